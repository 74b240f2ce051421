"""Rows that name a J–V or EQE file."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.cell_curves import with_curves
from app.cells import shelf_of
from app.files.tables import load_table
from app.session.appraisal import appraise
from app.session.state import Choices
from physics.diode import Diode
from physics.units import EV_NM
from tests.batch.command_line import Command

HEADER = "name,gap_eV,voc_V,jsc_mA_cm2,ff_pct,jv_file,eqe_file"


def _write_curves(home: Path) -> None:
    """A sweep (n = 1.4, Rs = 2 Ω cm², Rsh = 2000 Ω cm²) and an EQE (logistic edge, 1.6 eV, 15 meV) beside the table."""
    folder = home / "curves"
    folder.mkdir()
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.4, 2.0, 2000.0).curve(150)
    noisy = current + 0.01 * np.random.default_rng(2).standard_normal(current.size)
    rows = [f"{v:.5f},{j:.5f}" for v, j in zip(voltage, noisy, strict=True)]
    (folder / "jv.csv").write_text("V (V),J (mA/cm2)\n" + "\n".join(rows))
    wavelength = np.arange(320.0, 900.0, 5.0)
    eqe = 85.0 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.015))
    rows = [f"{w:.0f},{q:.6f}" for w, q in zip(wavelength, eqe, strict=True)]
    (folder / "eqe.csv").write_text("wavelength (nm),EQE (%)\n" + "\n".join(rows))


def test_files_give_what_the_row_leaves_open(command: Command) -> None:
    _write_curves(command.home)
    rows = "all,,,,,curves/jv.csv,curves/eqe.csv\nsome,1.62,1.05,,,curves/jv.csv,\n"
    done = command(f"{HEADER}\n{rows}", "--charts", "svg")
    assert done.status == 0
    first, second = done.rows("summary")
    assert float(first["gap_eV"]) == pytest.approx(1.6, abs=0.0005)
    assert float(first["voc_V"]) == pytest.approx(1.1, abs=0.001)
    assert float(first["rs_ohm_cm2"]) == pytest.approx(2.0, rel=0.05)
    assert float(first["j0_rad_mA_cm2"]) > float(first["j0_limit_mA_cm2"])
    assert (second["gap_eV"], second["voc_V"]) == ("1.62", "1.05")  # what stands in the row wins
    assert float(second["jsc_mA_cm2"]) == pytest.approx(22.0, abs=0.03)
    for row in (first, second):
        assert abs(float(row["closure_mW_cm2"])) < 1e-9
    bases = {(row["name"], row["line"]): row["basis"] for row in done.rows("ledger")}
    assert bases["all", "voltage_edge"].startswith("fitted")
    assert bases["all", "fill_series"].startswith("fitted")
    assert ("all", "uncollected") in bases
    assert ("all", "current") not in bases
    assert ("some", "current") in bases
    assert bases["some", "voltage_edge"].startswith("assumed")
    assert len(list(done.folder.glob("*.svg"))) == 2


def test_the_window_makes_the_same_ledger_of_them(command: Command) -> None:
    _write_curves(command.home)
    done = command(f"{HEADER}\nall,,,,,curves/jv.csv,curves/eqe.csv\n")
    table = command.home / "cells.csv"
    shelf = shelf_of(load_table(table), table.name)
    assert shelf.left_out == ()
    entry, faults, doubts = with_curves(shelf.entries[0], shelf.rows[0], table.parent)
    assert (faults, doubts) == ([], [])
    ledger = appraise(entry, Choices()).ledger
    assert ledger is not None
    mine = [float(e.loss) for e in ledger.entries if e.present]
    assert mine == pytest.approx([float(row["loss_mW_cm2"]) for row in done.rows("ledger")], rel=1e-11, abs=1e-11)


def test_only_a_sweep_and_an_eqe_need_no_other_column(command: Command) -> None:
    _write_curves(command.home)
    done = command("name,jv_file,eqe_file\na,curves/jv.csv,curves/eqe.csv\n")
    assert (done.status, len(done.rows("summary"))) == (0, 1)


def test_one_bad_file_refuses_its_row_alone(command: Command) -> None:
    _write_curves(command.home)
    (command.home / "curves" / "empty.csv").write_bytes(b"")
    done = command(f"{HEADER}\nbad,1.6,,,,curves/empty.csv,\ngood,1.6,,,,curves/jv.csv,\n")
    assert done.status == 1
    assert [row["name"] for row in done.rows("summary")] == ["good"]
    refused = [problem for problem in done.problems() if problem[0] == "bad"]
    assert any(problem[1] == "jv_file" and problem[2] == "refused" for problem in refused)
