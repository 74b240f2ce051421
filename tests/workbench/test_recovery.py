"""Unsaved work survives the program: a journal while there is any, and an offer at the next start."""

from __future__ import annotations

import json
import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from PySide6.QtWidgets import QMessageBox

from app.journal import SUFFIX, read_journal, write_journal
from app.session.commands import SetValue
from app.session.document import to_text
from app.workbench.recovery import BEHIND_MS, Recovery
from app.workbench.start import make_window
from app.workbench.window import Window

from .conftest import settle

ROOT = Path(__file__).parents[2]
_BUTTONS = QMessageBox.StandardButton


def _change(window: Window, value: float) -> None:
    cell = window.session.state.cell
    assert cell is not None
    window.session.do(SetValue(cell.ident, "voc", value))
    settle()


def _journals(folder: Path) -> list[Path]:
    return sorted(folder.glob(f"*{SUFFIX}"))


def _written(window: Window) -> None:
    assert window.recovery is not None
    window.recovery.write()
    window.recovery._pool.waitForDone()


def test_a_journal_comes_and_goes_with_unsaved_work(window: Window, tmp_path: Path) -> None:
    folder = tmp_path / "deep" / "journals"
    window.keep_journal(folder)
    _written(window)
    assert not folder.exists()  # nothing is unsaved yet
    _change(window, 1.01)
    _written(window)
    (journal,) = _journals(folder)
    found = read_journal(journal)
    assert found is not None
    assert to_text(found.state) == to_text(window.session.state)
    assert found.file is None
    assert window.files.save_to(tmp_path / "a.gapledger")
    _written(window)
    assert _journals(folder) == []
    _change(window, 1.02)
    _written(window)
    (journal,) = _journals(folder)
    again = read_journal(journal)
    assert again is not None
    assert again.file == tmp_path / "a.gapledger"
    window.close()
    assert list(folder.iterdir()) == []


def test_the_clock_writes_it_too(window: Window, tmp_path: Path) -> None:
    window.keep_journal(tmp_path)
    assert window.recovery is not None
    assert BEHIND_MS < 5000
    _change(window, 1.01)
    assert window.recovery._due.isActive()
    assert window.recovery._due.remainingTime() <= 1.06 * BEHIND_MS  # coarse timers may be late by a twentieth
    window.recovery._due.timeout.emit()
    window.recovery._pool.waitForDone()
    assert len(_journals(tmp_path)) == 1


@pytest.mark.parametrize("answer", [_BUTTONS.Open, _BUTTONS.Discard, _BUTTONS.Cancel])
def test_what_was_left_behind_is_offered(
    window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, answer: QMessageBox.StandardButton
) -> None:
    before = window.session.state
    _change(window, 0.77)
    left = window.session.state
    write_journal(tmp_path / f"old{SUFFIX}", left, tmp_path / "work.gapledger")
    (tmp_path / f"broken{SUFFIX}").write_text("gapledger journal\n\n{", encoding="utf-8")
    window.session.undo()
    settle()
    window.files.mark_clean()
    monkeypatch.setattr(Recovery, "_ask", lambda self, found: answer)
    window.keep_journal(tmp_path)
    assert window.recovery is not None
    window.recovery.offer()
    settle()
    names = {path.name for path in _journals(tmp_path)}
    if answer == _BUTTONS.Open:
        assert to_text(window.session.state) == to_text(left)
        assert window.files.path == tmp_path / "work.gapledger"
        assert window.files.unsaved
        assert f"old{SUFFIX}" not in names
        assert len(names) == 2  # the broken one stays, and the work is kept anew
    elif answer == _BUTTONS.Discard:
        assert window.session.state == before
        assert names == {f"broken{SUFFIX}"}
    else:
        assert window.session.state == before
        assert names == {f"old{SUFFIX}", f"broken{SUFFIX}"}


def test_two_windows_do_not_fight_over_it(window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    window.keep_journal(tmp_path)
    _change(window, 1.01)
    _written(window)
    asked: list[object] = []
    monkeypatch.setattr(Recovery, "_ask", lambda self, found: asked.append(found) or _BUTTONS.Discard)
    other = make_window([])
    other.keep_journal(tmp_path)
    assert other.recovery is not None
    other.recovery.offer()
    assert asked == []  # the first window is still open
    assert len(_journals(tmp_path)) == 1
    other.close()
    other.deleteLater()


def test_a_folder_that_cannot_be_made_is_told_once(window: Window, tmp_path: Path) -> None:
    (tmp_path / "file").write_text("in the way")
    window.keep_journal(tmp_path / "file" / "journals")
    _change(window, 1.01)
    _written(window)
    assert "not kept for the case of a crash" in window.notices.text.text()
    window.notices.say("later")
    _written(window)
    assert window.notices.text.text() == "later"


_PROGRAM = """
import json, sys, time
from PySide6.QtCore import QTimer
from app.session.commands import SetValue
from app.workbench import start

make, count = start.make_window, [0]

def edited(arguments):
    window = make(arguments)
    clock = QTimer(window, interval=int(sys.argv[1]))
    def edit():
        count[0] += 1
        cell = window.session.state.cells[count[0] % 6]
        window.session.do(SetValue(cell.ident, "area", float(count[0])))
        print(json.dumps([count[0], time.time()]), flush=True)
    clock.timeout.connect(edit)
    window.waterfall.first_painted.connect(lambda: clock.start())
    return window

start.make_window = edited
sys.exit(start.open_window(["demo"]))
"""


def _killed(home: Path, chance: random.Random) -> tuple[int, float]:
    """Edits that a killed program had made, and how old the last edit in its journal was [s]."""
    environment = os.environ | {"PYTHONPATH": str(ROOT), "HOME": str(home), "XDG_DATA_HOME": str(home)}
    with subprocess.Popen(
        [sys.executable, "-c", _PROGRAM, str(chance.choice([20, 100, 400]))],
        env=environment, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL, text=True,
    ) as program:  # fmt: skip
        assert program.stdout is not None
        program.stdout.readline()
        time.sleep(chance.uniform(3.5, 8.0))
        program.send_signal(signal.SIGKILL)
        end = time.time()
        edits = [json.loads(line) for line in program.stdout.read().splitlines() if line.endswith("]")]
    journals = list(home.rglob(f"*{SUFFIX}"))
    if not journals:  # killed before the first was due
        return len(edits), end - edits[0][1]
    (journal,) = journals
    found = read_journal(journal)
    assert found is not None, "the journal cannot be read"
    last = max(cell.values["area"] or 0.0 for cell in found.state.cells)  # type: ignore[type-var]
    when = next(at for number, at in edits if number >= last)
    lost = [at for number, at in edits if number > last]
    journal.unlink()
    assert when <= end
    return len(edits), (end - lost[0]) if lost else 0.0


def _kill_often(folder: Path, runs: int, seed: int) -> float:
    """Kills programs; the most work that was missing afterwards [s]."""
    chance = random.Random(seed)
    results = []
    for k in range(runs):
        home = folder / f"home{k}"
        home.mkdir()
        results.append(_killed(home, chance))
    worst = max(lost for _, lost in results)
    print(f"{runs} kills after {sum(n for n, _ in results)} edits: at most {worst:.1f} s of work missing")
    return worst


def test_a_killed_program_leaves_its_work(tmp_path: Path) -> None:
    assert _kill_often(tmp_path, 2, 1) < 30.0  # a guard against mishaps; the long run has the real bound


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(2, 12))
def test_a_program_killed_often_leaves_its_work(tmp_path: Path, seed: int) -> None:
    assert _kill_often(tmp_path, 20, seed) <= 5.0
