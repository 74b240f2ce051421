"""Random use of the window: nothing raises, nothing leaks, and the work can be undone all the way back."""

from __future__ import annotations

import gc
import os
import random
import shutil
import statistics
import threading
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtGui import QAction, QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QAbstractButton,
    QApplication,
    QComboBox,
    QDialog,
    QFileDialog,
    QLineEdit,
    QMessageBox,
    QSlider,
    QWidget,
)

from app.workbench.start import application, make_window
from app.workbench.window import Window

from .conftest import settle

_ROOT = Path(__file__).parents[2]
_TEXTS = ("1.1", "1,05", "78", "0.3 V", "abc", "", "1e-3", "-4", "999999", "1 %", "22 mA cm⁻²", "η&<b>", "1.18 V")
_FILES = [
    *sorted((_ROOT / "resources" / "demo").iterdir()),
    _ROOT / "resources" / "demo_cells.csv",
    *sorted((_ROOT / "tests" / "data" / "sessions").iterdir()),
    *sorted((_ROOT / "tests" / "data" / "measured").iterdir())[::7],
]


def _memory() -> float:
    """Memory of the process [MB]."""
    pages = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[1])
    return pages * os.sysconf("SC_PAGE_SIZE") / 1e6


class Monkey:
    """Does one thing after another that a user might do, by a seed."""

    def __init__(self, window: Window, folder: Path, seed: int) -> None:
        self.window = window
        self.chance = random.Random(seed)
        self.files = [Path(shutil.copy(path, folder)) for path in _FILES]  # a session that is opened is saved to, too
        self.deeds: tuple[tuple[int, Callable[[], None]], ...] = (
            (6, self.type_text), (6, self.drag), (3, self.choose), (4, self.act), (4, self.undo), (3, self.look),
            (2, self.open_file), (1, self.size), (2, self.press), (1, self.paste), (2, self.tidy),
        )  # fmt: skip

    def do(self) -> None:
        deeds = [deed for weight, deed in self.deeds for _ in range(weight)]
        self.chance.choice(deeds)()
        settle()

    def _among(self, kind: type[QWidget]) -> list[QWidget]:
        tops = [top for top in QApplication.topLevelWidgets() if top.isVisible()]
        return [w for top in tops for w in top.findChildren(kind) if w.isVisible() and w.isEnabled()]

    def type_text(self) -> None:
        fields = self._among(QLineEdit)
        if fields:
            field = self.chance.choice(fields)
            assert isinstance(field, QLineEdit)
            field.setFocus()
            text = self.chance.choice(_TEXTS)
            field.setText(text)
            field.textEdited.emit(text)
            if self.chance.random() < 0.5:
                field.returnPressed.emit()

    def drag(self) -> None:
        sliders = self._among(QSlider)
        if sliders:
            slider = self.chance.choice(sliders)
            assert isinstance(slider, QSlider)
            slider.setSliderDown(True)
            for _ in range(self.chance.randrange(1, 12)):
                slider.setSliderPosition(self.chance.randint(slider.minimum(), slider.maximum()))
                QApplication.processEvents()
            slider.setSliderDown(False)

    def choose(self) -> None:
        boxes = self._among(QComboBox)
        if boxes:
            box = self.chance.choice(boxes)
            assert isinstance(box, QComboBox)
            if box.count():
                box.setCurrentIndex(self.chance.randrange(box.count()))
                box.activated.emit(box.currentIndex())

    def act(self) -> None:
        actions = [a for a in self.window.actions_.findChildren(QAction) if a.isEnabled() and "Quit" not in a.text()]
        self.chance.choice(actions).trigger()

    def undo(self) -> None:
        session = self.window.session
        for _ in range(self.chance.randrange(1, 6)):
            (session.undo if self.chance.random() < 0.7 else session.redo)()

    def look(self) -> None:
        session, rows = self.window.session, self.window.table._model.rows
        if session.state.cells:
            session.pick(self.chance.choice(session.state.cells).ident)
        if rows:
            session.pick_line(self.chance.choice(rows).key)
        tabs = self.window._tabs
        tabs.setCurrentIndex(self.chance.choice([k for k in range(tabs.count()) if tabs.isTabVisible(k)]))

    def open_file(self) -> None:
        self.window.intake.open_file(self.chance.choice(self.files))

    def size(self) -> None:
        self.window.resize(self.chance.randrange(640, 1600), self.chance.randrange(480, 1000))

    def press(self) -> None:
        buttons = [b for b in self._among(QAbstractButton) if b.text() not in ("Close", "Cancel")]
        if buttons:
            button = self.chance.choice(buttons)
            assert isinstance(button, QAbstractButton)
            button.click()

    def paste(self) -> None:
        path = self.chance.choice(self.files)
        QGuiApplication.clipboard().setText(path.read_bytes()[:20_000].decode("utf-8", "replace"))
        self.window.intake.paste()

    def tidy(self) -> None:
        """Close the panels, and keep the shelf as long as a user's."""
        for panel in QApplication.topLevelWidgets():
            if isinstance(panel, QDialog) and panel.isVisible() and self.chance.random() < 0.7:
                panel.close()
        while len(self.window.session.state.cells) > 30:
            self.window.actions_._remove()


@pytest.fixture
def soaked(qapp: QApplication, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Window]:
    application([])
    monkeypatch.setattr(QFileDialog, "getOpenFileNames", lambda *_: ([], ""))
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: (str(tmp_path / "saved.out"), ""))
    monkeypatch.setattr(QMessageBox, "question", lambda *_: QMessageBox.StandardButton.Discard)
    made = make_window(["demo"])
    made.show()
    settle()
    yield made
    made.files.asks = False
    made.close()
    made.deleteLater()
    settle()


def _soak(window: Window, folder: Path, seconds: float, seed: int) -> dict[str, float]:
    window.keep_journal(folder / "journals")
    window.faults.install()
    (folder / "files").mkdir()
    monkey = Monkey(window, folder / "files", seed)
    threads = threading.active_count()
    memory, events = [], 0
    start = time.monotonic()
    while time.monotonic() - start < seconds:
        monkey.do()
        events += 1
        if events % 50 == 0:
            gc.collect()
            memory.append(_memory())
    while QApplication.activeModalWidget() is not None:
        QApplication.activeModalWidget().close()
    timers = len([timer for timer in window.findChildren(QTimer) if timer.isActive() and not timer.isSingleShot()])
    windows = [top for top in QApplication.topLevelWidgets() if top.isVisible() and top is not window]
    session = window.session
    while session.undo_name:
        session.undo()
    settle()
    window.faults.remove()
    assert [fault.sentence for fault in window.faults.faults] == []
    assert timers == 0
    assert threading.active_count() <= threads + 1
    assert len(windows) <= 8  # each panel once
    third = max(1, len(memory) // 3)
    before, after = statistics.median(memory[third : 2 * third] or memory), statistics.median(memory[-third:])
    return {"events": events, "memory_mb": after, "growth": after / before - 1.0}


def test_a_short_soak(soaked: Window, tmp_path: Path) -> None:
    figures = _soak(soaked, tmp_path, 20.0, 1)
    assert figures["events"] > 50


@pytest.mark.slow
@pytest.mark.parametrize("seed", [2, 3, 4])
def test_ten_minutes_of_random_use(soaked: Window, tmp_path: Path, seed: int) -> None:
    figures = _soak(soaked, tmp_path, 200.0, seed)
    print(figures)
    assert figures["growth"] < 0.05, figures


def test_a_key_in_every_place(soaked: Window) -> None:
    """Tab through everything, and press what moves things, everywhere."""
    for _ in range(60):
        widget = QApplication.focusWidget() or soaked
        for key in "1", "\t":
            QTest.keyClicks(widget, key)
        settle()
    assert soaked.faults.faults == []
