"""One line under the work for what the program has to say: never in the way, gone at a click.

The line keeps its place when it is empty, so that nothing above it moves.
"""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QToolButton, QWidget

_SHORT_MS = 6000


class NoticeBar(QFrame):
    """Shows one notice at a time."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.text = QLabel()
        self.text.setWordWrap(True)
        self.text.setTextFormat(Qt.TextFormat.PlainText)
        self.text.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.text.setAccessibleName("Notice")
        self.close_button = QToolButton()
        self.close_button.setText("✕")
        self.close_button.setAccessibleName("Dismiss the notice")
        self.close_button.clicked.connect(self.clear)
        row = QHBoxLayout(self)
        row.setContentsMargins(10, 3, 6, 3)
        row.addWidget(self.text, 1)
        row.addWidget(self.close_button, 0, Qt.AlignmentFlag.AlignTop)
        self.setMinimumHeight(self.fontMetrics().height() + 12)
        self._timer = QTimer(self, singleShot=True, interval=_SHORT_MS)
        self._timer.timeout.connect(self.clear)
        self.clear()

    def say(self, sentence: str, *, lasting: bool = False) -> None:
        """Show a sentence; a lasting one stays until it is dismissed."""
        self.text.setText(sentence)
        self.close_button.show()
        if lasting:
            self._timer.stop()
        else:
            self._timer.start()

    def clear(self) -> None:
        """Say nothing."""
        self._timer.stop()
        self.text.clear()
        self.close_button.hide()
