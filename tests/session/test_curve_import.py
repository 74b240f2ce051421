"""A cell takes figures and lines from measured curves, as one change that can be undone."""

from __future__ import annotations

import numpy as np
import pytest

from app.figures.curve_plots import eqe_plot_of
from app.files.measured import apply, guess, read_measured
from app.files.table_error import TableError
from app.session.appraisal import appraise
from app.session.commands import AddCells, SetFigures, SetValue
from app.session.curve_import import taken
from app.session.outcome import picture_of
from app.session.session import Session
from app.session.state import CellEntry, Choices
from physics.diode import Diode
from physics.units import EV_NM

_NOISE = 0.02  # mA cm⁻²


def _sweep_text(header: str = "Voltage (V)\tCurrent density (mA/cm2)", factor: float = -1.0) -> bytes:
    """A noisy sweep of a diode with n = 1.4, Rs = 2 Ω cm², Rsh = 2000 Ω cm²; the current negative, as many write it."""
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.4, 2.0, 2000.0).curve(200)
    noise = _NOISE * np.random.default_rng(8).standard_normal(voltage.size)
    rows = "\n".join(f"{v:.5f}\t{factor * (j + e):.6f}" for v, j, e in zip(voltage, current, noise, strict=True))
    return f"{header}\n{rows}\n".encode()


def _eqe_text() -> bytes:
    """A logistic edge at 1.6 eV, 15 meV wide, in percent."""
    wavelength = np.arange(320.0, 900.0, 5.0)
    eqe = 85.0 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.015))
    rows = "\n".join(f"{w:.0f};{q:.6f}".replace(".", ",") for w, q in zip(wavelength, eqe, strict=True))
    return f"Wavelength (nm);EQE (%)\n{rows}\n".encode("utf-16")


def _series_text() -> bytes:
    light = np.geomspace(0.002, 1.1, 14)
    jsc = 22.0 * light
    voc = 1.1 + 1.4 * 0.0256926 * np.log(light)
    rows = "\n".join(f"{j:.6f},{v:.6f}" for j, v in zip(jsc, voc, strict=True))
    return f"Jsc (mA/cm2),Voc (V)\n{rows}\n".encode()


def _session(**values: float) -> Session:
    session = Session()
    entry = CellEntry(0, "x")
    for key, value in values.items():
        entry = entry.with_value(key, value)
    session.do(AddCells((entry,)))
    return session


def _take(session: Session, data: bytes) -> tuple[str, ...]:
    text = read_measured(data, "file.txt")
    cell = session.state.cell
    assert cell is not None
    command, sentences = taken(apply(text, guess(text)), cell, "file.txt")
    session.do(command)
    return sentences


def _cell(session: Session) -> CellEntry:
    cell = session.state.cell
    assert cell is not None
    return cell


def _bases(session: Session) -> dict[str, str]:
    ledger = appraise(_cell(session), Choices()).ledger
    assert ledger is not None
    assert abs(float(ledger.closure)) < 1e-9
    return {e.line.key: form.basis.value for e in ledger.entries if (form := e.form_at()) is not None}


def test_a_sweep_gives_figures_and_a_fit() -> None:
    session = _session(gap=1.6)
    _take(session, _sweep_text())
    values = _cell(session).values
    assert values["voc"] == pytest.approx(1.1, abs=0.001)
    assert values["jsc"] == pytest.approx(22.0, abs=0.03)
    assert values["ideality"] == pytest.approx(1.4, rel=0.05)
    assert values["rs"] == pytest.approx(2.0, rel=0.1)
    assert values["rsh"] == pytest.approx(2000.0, rel=0.1)
    assert dict(_cell(session).sources) == {
        "voc": "sweep", "jsc": "sweep", "ff": "sweep", "ideality": "fit", "rs": "fit", "rsh": "fit",
    }
    bases = _bases(session)
    assert {bases[key] for key in ("fill_ideality", "fill_series", "fill_shunt")} == {"fitted"}


def test_an_eqe_gives_the_gap_and_splits_the_current() -> None:
    session = _session(voc=1.1, jsc=20.0, ff=75.0)
    _take(session, _eqe_text())
    assert _cell(session).values["gap"] == pytest.approx(1.6, abs=0.0005)
    bases = _bases(session)
    assert bases["voltage_edge"] == "fitted"
    assert bases["nonradiative"] == "fitted"
    assert {"uncollected", "sub_gap_current", "current_mismatch"} <= bases.keys()
    assert "current" not in bases


def test_what_an_eqe_lacks_is_told_and_a_flat_tail_is_not_followed() -> None:
    wavelength = np.arange(320.0, 900.0, 5.0)
    flat = 104.0 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.04))  # flatter than kT, and above 100 %
    rows = "\n".join(f"{w:.0f};{q:.6f}" for w, q in zip(wavelength, flat, strict=True))
    session = _session(voc=1.1, jsc=20.0, ff=75.0)
    told = " ".join(_take(session, f"Wavelength (nm);EQE (%)\n{rows}\n".encode()))
    assert "flatter than kT" in told
    assert "exceeds 100 %" in told
    picture = picture_of(appraise(_cell(session), Choices()), Choices())
    assert picture is not None
    plot = eqe_plot_of(picture)
    assert plot is not None
    assert [series.key for series in plot.series] == ["eqe", "slope"]
    assert _bases(session)["voltage_edge"] == "measured"


def test_a_typed_gap_stays() -> None:
    session = _session(gap=1.62, voc=1.1, jsc=20.0, ff=75.0)
    sentences = _take(session, _eqe_text())
    assert _cell(session).values["gap"] == 1.62
    assert any("typed gap stays" in sentence for sentence in sentences)


def test_a_series_gives_ideality_and_pseudo_fill_factor() -> None:
    session = _session(gap=1.6, voc=1.1, jsc=22.0, ff=75.0)
    _take(session, _series_text())
    assert _cell(session).values["ideality"] == pytest.approx(1.4, rel=1e-3)
    assert "fill_recombination" in _bases(session)
    assert _bases(session)["fill_ideality"] == "measured"


def test_an_import_is_one_step_of_undo_and_typing_takes_the_source_away() -> None:
    session = _session(gap=1.6)
    before = session.state
    _take(session, _sweep_text())
    session.do(SetValue(_cell(session).ident, "rs", 3.0))
    assert "rs" not in _cell(session).sources
    session.undo()
    assert _cell(session).sources["rs"] == "fit"
    assert session.undo_name == "import of file.txt"
    session.undo()
    assert session.state == before


def test_a_current_without_an_area_is_refused_with_what_to_do() -> None:
    session = _session(gap=1.6)
    amperes = _sweep_text("Voltage (V)\tCurrent (mA)", -0.1)
    with pytest.raises(TableError, match="area first"):
        _take(session, amperes)
    session.do(SetFigures(_cell(session).ident, {"area": 0.1}, {}))
    _take(session, amperes)
    assert _cell(session).values["jsc"] == pytest.approx(22.0, abs=0.03)


def test_a_lamp_is_no_curve_of_a_cell() -> None:
    rows = "\n".join(f"{w},{1.0 + 0.001 * w:.3f}" for w in range(300, 1100, 10))
    with pytest.raises(TableError, match=r"not taken by this version|holds no curve"):
        _take(_session(gap=1.6), f"Wavelength (nm),Irradiance (W/m2/nm)\n{rows}\n".encode())


_IMPOSSIBLE = [("irradiance", -4.0), ("temperature", -400.0), ("area", -1.0), ("jsc", -3.0)]


@pytest.mark.parametrize(("key", "value"), _IMPOSSIBLE)
def test_a_number_that_cannot_be_does_not_stand_in_the_way(key: str, value: float) -> None:
    session = _session(**{key: value})
    assert _take(session, _sweep_text())
    assert session.state.cell is not None
    assert session.state.cell.sources["rs"] == "fit"
    assert _take(session, _series_text())
