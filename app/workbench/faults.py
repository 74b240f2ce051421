"""The one road for what nobody foresaw: exceptions, those of threads, and warnings of Python and of Qt.

All of it is kept with its detail, told in one line under the work, and can be looked at and copied. The program goes
on.
"""

from __future__ import annotations

import sys
import threading
import traceback
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime
from types import TracebackType
from typing import TextIO

from PySide6.QtCore import QMessageLogContext, QObject, QtMsgType, Signal, qInstallMessageHandler
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import (
    QApplication,
    QDialog,
    QDialogButtonBox,
    QHBoxLayout,
    QLabel,
    QListWidget,
    QPlainTextEdit,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

_MOST = 500  # faults that are kept; of one kind after another, the first of each is the telling one
_CALM = ("propagateSizeHints", "does not support raise()")  # said by platforms without windows, of no meaning


@dataclass(frozen=True)
class Fault:
    """Something unforeseen.

    Parameters
    ----------
    when : datetime
    sentence : str
        One line.
    detail : str
        All that is known of it.
    """

    when: datetime
    sentence: str
    detail: str


class FaultLog(QObject):
    """Keeps faults and tells of them in the thread of the window.

    Signals
    -------
    added : Fault
    """

    added = Signal(object)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.faults: list[Fault] = []
        self._came.connect(self._add)
        self._undo: Callable[[], None] | None = None

    _came = Signal(object)

    def report(self, sentence: str, detail: str) -> None:
        """Add a fault, from any thread."""
        self._came.emit(Fault(datetime.now(), sentence, detail))

    def _add(self, fault: Fault) -> None:
        self.faults.append(fault)
        del self.faults[:-_MOST]
        self.added.emit(fault)

    def exception(self, kind: type[BaseException], fault: BaseException, trace: TracebackType | None) -> None:
        """Add an exception that nothing caught; an interrupt from the keyboard ends the program."""
        if issubclass(kind, KeyboardInterrupt):
            QApplication.quit()
            return
        detail = "".join(traceback.format_exception(kind, fault, trace))
        print(detail, file=sys.stderr)
        self.report(f"{kind.__name__}: {fault}", detail)

    def install(self) -> None:
        """Take in everything from now on; `remove` gives it back."""
        before = sys.excepthook, threading.excepthook, warnings.showwarning

        def of_thread(args: threading.ExceptHookArgs) -> None:
            if args.exc_value is not None:
                self.exception(args.exc_type, args.exc_value, args.exc_traceback)

        def of_python(
            message: Warning | str,
            category: type[Warning],
            filename: str,
            lineno: int,
            file: TextIO | None = None,
            line: str | None = None,
        ) -> None:
            text = warnings.formatwarning(message, category, filename, lineno, line)
            print(text, file=sys.stderr, end="")
            self.report(f"{category.__name__}: {message}", text)

        def of_qt(kind: QtMsgType, context: QMessageLogContext, message: str) -> None:
            print(message, file=sys.stderr)
            if kind not in (QtMsgType.QtDebugMsg, QtMsgType.QtInfoMsg) and not any(calm in message for calm in _CALM):
                place = f"{context.file or ''}:{context.line or 0} {context.function or ''}".strip(" :0")
                self.report(f"Qt: {message}", f"{message}\n{place}".strip())

        sys.excepthook, threading.excepthook, warnings.showwarning = self.exception, of_thread, of_python
        earlier = qInstallMessageHandler(of_qt)

        def undo() -> None:
            sys.excepthook, threading.excepthook, warnings.showwarning = before
            qInstallMessageHandler(earlier)

        self._undo = undo

    def remove(self) -> None:
        """Leave everything as it was before `install`."""
        if self._undo is not None:
            self._undo()
            self._undo = None


class FaultPanel(QDialog):
    """Lists faults with their detail, to be read and copied."""

    def __init__(self, log: FaultLog, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._log = log
        self.setWindowTitle("Messages of this run")
        self.setModal(False)
        self.resize(640, 420)
        self.head = QLabel()
        self.head.setWordWrap(True)
        self.list = QListWidget()
        self.list.setAccessibleName("Messages")
        self.detail = QPlainTextEdit()
        self.detail.setReadOnly(True)
        self.detail.setAccessibleName("Detail of the picked message")
        self.copy_button = QPushButton("&Copy all")
        self.copy_button.setAutoDefault(False)
        close = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        close.rejected.connect(self.close)
        self.copy_button.clicked.connect(self.copy)
        self.list.currentRowChanged.connect(self._show_detail)
        buttons = QHBoxLayout()
        buttons.addWidget(self.copy_button)
        buttons.addStretch(1)
        buttons.addWidget(close)
        column = QVBoxLayout(self)
        for widget in (self.head, self.list, self.detail):
            column.addWidget(widget)
        column.addLayout(buttons)
        log.added.connect(self.refresh)
        self.refresh()

    def refresh(self) -> None:
        """Show all faults, the newest last."""
        faults = self._log.faults
        self.head.setText(
            "What went wrong inside the program in this run. Your cells are not touched by it."
            if faults
            else "Nothing has gone wrong inside the program in this run."
        )
        self.list.clear()
        self.list.addItems([f"{fault.when:%H:%M:%S}  {fault.sentence}" for fault in faults])
        self.list.setCurrentRow(len(faults) - 1)
        self.copy_button.setEnabled(bool(faults))

    def _show_detail(self, row: int) -> None:
        self.detail.setPlainText(self._log.faults[row].detail if 0 <= row < len(self._log.faults) else "")

    def copy(self) -> None:
        """Put everything on the clipboard as text."""
        parts = [f"{fault.when:%Y-%m-%d %H:%M:%S}  {fault.sentence}\n{fault.detail}" for fault in self._log.faults]
        QGuiApplication.clipboard().setText("\n\n".join(parts))
