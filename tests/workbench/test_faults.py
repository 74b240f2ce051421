"""Whatever goes wrong ends up in one place, with its detail, and the program goes on."""

from __future__ import annotations

import sys
import threading
import warnings
from collections.abc import Iterator

import pytest
from PySide6.QtCore import qWarning
from PySide6.QtGui import QGuiApplication

from app.workbench.faults import FaultLog
from app.workbench.window import Window

from .conftest import settle


@pytest.fixture
def log(window: Window) -> Iterator[FaultLog]:
    before = sys.excepthook, threading.excepthook, warnings.showwarning
    window.faults.install()
    yield window.faults
    window.faults.remove()
    assert (sys.excepthook, threading.excepthook, warnings.showwarning) == before


def test_nothing_has_gone_wrong(window: Window) -> None:
    window.actions_.show_messages()
    panel = window.actions_._messages
    assert panel is not None
    assert "Nothing has gone wrong" in panel.head.text()
    assert not panel.copy_button.isEnabled()


def test_exceptions_of_threads_and_slots_and_warnings(window: Window, log: FaultLog) -> None:
    def fail() -> None:
        raise ValueError("in a thread")

    thread = threading.Thread(target=fail)
    thread.start()
    thread.join()
    settle()
    sys.excepthook(KeyError, KeyError("in a slot"), None)
    with warnings.catch_warnings():
        warnings.simplefilter("always")
        warnings.showwarning("a warning", RuntimeWarning, "file.py", 7)
    qWarning("a word of Qt")
    qWarning("This plugin does not support propagateSizeHints()")
    settle()
    sentences = [fault.sentence for fault in log.faults]
    assert sentences == [
        "ValueError: in a thread", "KeyError: 'in a slot'", "RuntimeWarning: a warning", "Qt: a word of Qt"
    ]  # fmt: skip
    assert "fail()" in log.faults[0].detail or "in fail" in log.faults[0].detail
    assert "a word of Qt" in window.notices.text.text()
    window.actions_.show_messages()
    panel = window.actions_._messages
    assert panel is not None
    assert panel.list.count() == 4
    panel.list.setCurrentRow(0)
    assert "Traceback" in panel.detail.toPlainText()
    panel.copy()
    assert "in a thread" in QGuiApplication.clipboard().text()
    assert "a word of Qt" in QGuiApplication.clipboard().text()


def test_no_more_are_kept_than_can_be_read(window: Window) -> None:
    for k in range(600):
        window.faults.report(f"fault {k}", "")
    settle()
    assert len(window.faults.faults) == 500
    assert window.faults.faults[-1].sentence == "fault 599"
