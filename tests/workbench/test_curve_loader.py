"""Curve files that a table names arrive beside the window, and disturb nothing."""

from __future__ import annotations

from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app.session.commands import SetValue
from app.workbench.window import Window

from .conftest import settle

_FILES = Path(__file__).parents[2] / "resources" / "demo"


def _loaded(window: Window, qtbot: QtBot) -> None:
    """Wait until all curves are there."""
    loader = window.intake._loader
    assert loader is not None
    loader.wait()
    qtbot.waitUntil(lambda: window.intake._to_come == 0, timeout=20_000)
    settle()


def test_the_demo_cells_get_their_curves(demo_window: Window, qtbot: QtBot) -> None:
    window = demo_window
    _loaded(window, qtbot)
    with_sweeps = [cell.name for cell in window.session.state.cells if cell.curves.sweeps]
    assert with_sweeps == ["Plover 3", "Curlew 5", "Dunlin 2", "Heron 1"]
    assert window.session.undo_name == ""
    cell = window.session.state.cell
    assert cell is not None
    assert cell.sources["ideality"] == "fit"
    bases = {row.key: row.basis for row in window.table._model.rows}
    assert bases["voltage_edge"].startswith("fitted")
    assert "invented" in window.notices.text.text()
    for entry in window.session.state.cells:
        ledger = window.outcomes.of(entry).appraisal
        assert ledger is not None
        assert ledger.ledger is not None
        assert abs(float(ledger.ledger.closure)) < 1e-9
        assert ledger.problems == ()


def test_what_the_user_does_meanwhile_stays(unshown_demo: Window, qtbot: QtBot) -> None:
    window = unshown_demo
    cell = window.session.state.cell
    assert cell is not None
    assert not cell.curves.sweeps  # they come later
    window.session.do(SetValue(cell.ident, "ideality", 2.0))
    window.session.do(SetValue(cell.ident, "voc", 1.0))
    window.show()
    settle()
    _loaded(window, qtbot)
    now = window.session.state.cell
    assert now is not None
    assert (now.values["ideality"], now.values["voc"]) == (2.0, 1.0)
    assert "ideality" not in now.sources
    assert now.sources["rs"] == "fit"
    assert now.curves.eqe is not None
    window.session.undo()
    window.session.undo()
    before = window.session.state.cell
    assert before is not None
    assert before.values["voc"] == 1.048
    assert before.curves.eqe is not None  # as if they had been there from the start
    assert before.sources["ideality"] == "fit"


def test_a_table_opened_later_and_a_file_that_is_missing(window: Window, qtbot: QtBot, tmp_path: Path) -> None:
    sweep = (_FILES / "heron_1_jv.csv").read_bytes()
    (tmp_path / "jv.csv").write_bytes(sweep)
    rows = "\n".join(f"cell {k},1.42,{'jv.csv' if k else 'gone.csv'}" for k in range(8))
    (tmp_path / "cells.csv").write_text(f"name,gap_eV,jv_file\n{rows}\n")
    window.intake.open_file(tmp_path / "cells.csv")
    settle()
    _loaded(window, qtbot)
    cells = [cell for cell in window.session.state.cells if cell.name.startswith("cell ")]
    assert [bool(cell.curves.sweeps) for cell in cells] == [False] + [True] * 7
    assert all(cell.values["voc"] == pytest.approx(1.098, abs=0.001) for cell in cells[1:])
    assert "gone.csv" in window.notices.text.text()
    assert "Line 2" in window.notices.text.text()
    assert window.session.undo_name == "opening of a table"


def test_it_is_told_how_many_are_to_come_and_what_was_left_out(
    window: Window, qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "jv.csv").write_bytes((_FILES / "heron_1_jv.csv").read_bytes())
    rows = "\n".join(f"cell {k},1.42,jv.csv" for k in range(12))
    told: list[str] = []
    say = window.notices.say

    def listen(sentence: str, *, lasting: bool = False) -> None:
        told.append(sentence)
        say(sentence, lasting=lasting)

    monkeypatch.setattr(window.notices, "say", listen)
    for extra, last in (("", "The curves of 12 cells have been read."), ("\n,1.5,", "Line 14: the name is missing.")):
        (tmp_path / "cells.csv").write_text(f"name,gap_eV,jv_file\n{rows}{extra}\n")
        told.clear()
        window.intake.open_file(tmp_path / "cells.csv")
        settle()
        _loaded(window, qtbot)
        qtbot.waitUntil(lambda last=last: last in told[-1], timeout=5000)  # type: ignore[misc]
        assert told[0].startswith("12 cells taken from cells.csv.")
        assert told[1:-1] == [f"Reading curves: {k} cells to come." for k in range(11, 4, -1)]


def test_the_window_answers_while_many_are_read(window: Window, qtbot: QtBot, tmp_path: Path) -> None:
    for name in ("heron_1_jv.csv", "heron_1_eqe.txt"):
        (tmp_path / name).write_bytes((_FILES / name).read_bytes())
    rows = "\n".join(f"cell {k},heron_1_jv.csv,heron_1_eqe.txt" for k in range(30))
    (tmp_path / "cells.csv").write_text(f"name,jv_file,eqe_file\n{rows}\n")
    ident = window.session.state.cells[0].ident
    window.intake.open_file(tmp_path / "cells.csv")
    window.session.pick(ident)
    qtbot.waitUntil(lambda: window.intake._to_come <= 25, timeout=20_000)
    window.inputs.fields["voc"].asked.emit(1.05)
    settle()
    assert window.intake._to_come > 0  # the change came through while files were still to be read
    assert window.session.state.cells[0].values["voc"] == 1.05
    assert window.table._model.rows
    _loaded(window, qtbot)
    assert window.session.state.cells[0].values["voc"] == 1.05
    assert all(cell.curves.eqe is not None for cell in window.session.state.cells if cell.name.startswith("cell "))


def test_closing_the_window_leaves_out_what_is_not_begun(window: Window, tmp_path: Path) -> None:
    (tmp_path / "jv.csv").write_bytes((_FILES / "plover_3_jv.txt").read_bytes())
    rows = "\n".join(f"cell {k},1.6,jv.csv" for k in range(200))
    (tmp_path / "cells.csv").write_text(f"name,gap_eV,jv_file\n{rows}\n")
    window.intake.open_file(tmp_path / "cells.csv")
    window.close()
    settle()
    assert window.intake._to_come > 0
