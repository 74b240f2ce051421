"""PySide6 6.12.0 drops a reference to None with every void call and aborts on Python 3.11; the pin keeps it out."""

import sys

from PySide6.QtCore import QObject


def test_void_calls_leave_none_alone() -> None:
    thing = QObject()
    before = sys.getrefcount(None)
    for _ in range(10_000):
        thing.setObjectName("x")
    assert sys.getrefcount(None) >= before - 100
