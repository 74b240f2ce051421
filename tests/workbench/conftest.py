"""A window on the demo cells, and proof that nothing is left behind by a test."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit, QWidget

from app.workbench.start import application, make_window
from app.workbench.window import Window


def settle() -> None:
    """Let the window answer."""
    app = QApplication.instance()
    assert app is not None
    for _ in range(6):
        app.processEvents()


def press(entry: QLineEdit, text: str) -> None:
    """Press the keys of a text (QTest knows ASCII alone, and aborts at anything else)."""
    for letter in text:
        for kind in (QEvent.Type.KeyPress, QEvent.Type.KeyRelease):
            event = QKeyEvent(kind, Qt.Key.Key_unknown, Qt.KeyboardModifier.NoModifier, letter)
            QApplication.sendEvent(entry, event)


@pytest.fixture(autouse=True)
def home_of_its_own(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Nothing that is remembered from run to run reaches the real home, or another test."""
    home = tmp_path_factory.mktemp("home")
    monkeypatch.setenv("XDG_CONFIG_HOME", str(home))
    monkeypatch.setenv("XDG_DATA_HOME", str(home))
    monkeypatch.setenv("HOME", str(home))
    return home


@pytest.fixture
def window(qapp: QApplication) -> Iterator[Window]:
    """A window on the demo cells by their figures alone."""
    application([])
    qapp.setStyle("Fusion")
    made = make_window(["demo"])
    made.intake.leave_curves()
    yield from _shown(made)


@pytest.fixture
def demo_window(qapp: QApplication) -> Iterator[Window]:
    """A window on the demo cells whose curves come as they do for a user."""
    application([])
    yield from _shown(make_window(["demo"]))


@pytest.fixture
def unshown_demo(qapp: QApplication) -> Iterator[Window]:
    """The same before it shows itself."""
    application([])
    made = make_window(["demo"])
    yield made
    made.close()
    made.deleteLater()
    settle()


@pytest.fixture
def empty_window(qapp: QApplication) -> Iterator[Window]:
    application([])
    yield from _shown(make_window([]))


def _shown(made: Window) -> Iterator[Window]:
    made.show()
    made.activateWindow()
    assert QTest.qWaitForWindowActive(made, 5000)
    settle()
    yield made
    made.close()
    made.deleteLater()
    settle()
    left = [w for w in QApplication.topLevelWidgets() if isinstance(w, QWidget) and w.isVisible()]
    assert not left
