"""Light or dark, as the desktop is, for the widgets that paint themselves."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QGuiApplication, QPalette
from PySide6.QtWidgets import QLabel, QWidget

from app.figures.palette import DARK, LIGHT, Palette


class Theme(QObject):
    """Follows the desktop's colours, of which the window tells by `changed`.

    Signals
    -------
    changed
        The colour scheme is another one now.
    """

    changed = Signal()

    @property
    def palette(self) -> Palette:
        """Colours for charts on the screen."""
        dark = QGuiApplication.palette().color(QPalette.ColorRole.Window).lightness() < 128
        return DARK if dark else LIGHT

    @property
    def field_sheet(self) -> str:
        """Style sheet of the inputs: what is refused or doubtful shows beside its words, too."""
        dark = self.palette is DARK
        refused, doubtful = ("#ff9d8a", "#ffd27a") if dark else ("#b3261e", "#7a5200")
        return (
            f'QLabel[trouble="refused"] {{ color: {refused}; }}'
            f'QLabel[trouble="missing"] {{ color: {self.palette.muted}; }}'
            f'QLabel[trouble="doubtful"] {{ color: {doubtful}; }}'
            f'[origin="curve"] {{ color: {self.palette.tones["voltage"].ink}; font-style: italic; }}'
            f'QLineEdit[trouble="refused"] {{ border: 2px solid {refused}; border-radius: 3px; }}'
            f'QLineEdit[trouble="doubtful"] {{ border: 2px solid {doubtful}; border-radius: 3px; }}'
        )


class Heading(QLabel):
    """Heads a part of the window, and tells when that part shows earlier inputs than the present ones."""

    def __init__(self, text: str, parent: QWidget | None = None) -> None:
        super().__init__(text, parent)
        self._text = text
        self._stale = False
        font = self.font()
        font.setBold(True)
        self.setFont(font)

    def mark_stale(self, stale: bool) -> None:
        """Say, or no longer say, that the last valid input is shown."""
        if stale != self._stale:
            self._stale = stale
            self.setText(f"{self._text} – last valid input" if stale else self._text)
