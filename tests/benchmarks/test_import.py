"""From two dropped files, a sweep of 2000 points and an EQE of 400, to figures, fit and plots on the screen.

Preview and taking are both in the time, as is the repaint. The first import of a run loads scipy and is left out.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtWidgets import QApplication

from app.workbench.start import application, make_window
from app.workbench.window import Window
from physics.diode import Diode
from physics.diode_fit import fit_one_diode
from physics.edge import edge_of
from physics.quantum import Curve
from physics.sweep import figures_of_merit
from physics.units import EV_NM

from .record import write

_BOUND_MS = 150.0


def _settle() -> None:
    for _ in range(4):
        QApplication.processEvents()


@pytest.fixture
def window(qapp: QApplication) -> Iterator[Window]:
    application([])
    qapp.setStyle("Fusion")
    made = make_window([])
    made.resize(1280, 800)
    made.show()
    _settle()
    yield made
    made.close()
    made.deleteLater()
    _settle()


def _curves(seed: int) -> tuple[np.ndarray, ...]:
    rng = np.random.default_rng(seed)
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.4, 2.0, 2000.0).curve(2000)
    wavelength = np.linspace(300.0, 900.0, 400)
    eqe = 0.85 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.015))
    noise = rng.standard_normal
    return voltage, current + 0.01 * noise(2000), wavelength, eqe + 2e-4 * noise(400)


def _write(folder: Path, seed: int) -> tuple[Path, Path]:
    voltage, current, wavelength, eqe = _curves(seed)
    sweep, quantum = folder / f"sweep{seed}.txt", folder / f"eqe{seed}.txt"
    rows = "\n".join(f"{v:.5f}\t{j:.5f}" for v, j in zip(voltage, current, strict=True))
    sweep.write_text(f"Voltage (V)\tCurrent density (mA/cm2)\n{rows}\n")
    rows = "\n".join(f"{w:.2f}\t{100.0 * q:.4f}" for w, q in zip(wavelength, eqe, strict=True))
    quantum.write_text(f"Wavelength (nm)\tEQE (%)\n{rows}\n")
    return sweep, quantum


def _imported(window: Window, files: tuple[Path, Path]) -> float:
    start = time.perf_counter()
    for path in files:
        window.intake.open_file(path)
        panel = window.intake._import
        assert panel is not None
        panel.take()
        _settle()
    return 1e3 * (time.perf_counter() - start)


def _calculated(seed: int) -> float:
    """What the numbers alone take, without files, window and plots."""
    voltage, current, wavelength, eqe = _curves(seed)
    start = time.perf_counter()
    figures_of_merit(voltage, current, 100.0)
    fit_one_diode(voltage, current, 298.15)
    edge_of(Curve(wavelength, eqe))
    return 1e3 * (time.perf_counter() - start)


def _measure(window: Window, folder: Path, runs: int) -> dict[str, object]:
    _imported(window, _write(folder, 0))
    times, bare = [], []
    for seed in range(1, runs + 1):
        times.append(_imported(window, _write(folder, seed)))
        bare.append(_calculated(seed))
        cell = window.session.state.cell
        assert cell is not None
        assert cell.sources["rs"] == "fit"
        assert cell.curves.eqe is not None
    ratios = [mine / plain for mine, plain in zip(times, bare, strict=True)]
    return {
        "runs": runs,
        "import_ms": statistics.median(times),
        "import_slowest_ms": max(times),
        "calculation_ms": statistics.median(bare),
        "ratio": statistics.median(ratios),
    }


def test_an_import_is_not_much_more_than_its_fits(window: Window, tmp_path: Path) -> None:
    figures = _measure(window, tmp_path, 4)
    write("import", "short", figures)
    assert figures["ratio"] < 4.0, figures


@pytest.mark.slow
def test_an_import_takes_less_than_its_time(window: Window, tmp_path: Path) -> None:
    figures = _measure(window, tmp_path, 30)
    write("import", "long", figures)
    assert figures["import_ms"] < _BOUND_MS, figures
