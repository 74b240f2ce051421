"""Light or dark, as the desktop is, for the widgets that paint themselves."""

from __future__ import annotations

from PySide6.QtCore import QObject, Qt, Signal
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QLabel

from app.figures.palette import DARK, LIGHT, Palette


class Theme(QObject):
    """Follows the desktop's colour scheme.

    Signals
    -------
    changed
        The colour scheme is another one now.
    """

    changed = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        QGuiApplication.styleHints().colorSchemeChanged.connect(self.changed)

    @property
    def palette(self) -> Palette:
        """Colours for charts on the screen."""
        dark = QGuiApplication.styleHints().colorScheme() == Qt.ColorScheme.Dark
        return DARK if dark else LIGHT

    @property
    def field_sheet(self) -> str:
        """Style sheet of the inputs: what is refused or doubtful shows beside its words, too."""
        dark = self.palette is DARK
        refused, doubtful = ("#ff9d8a", "#ffd27a") if dark else ("#b3261e", "#7a5200")
        return (
            f'QLabel[trouble="refused"] {{ color: {refused}; }}'
            f'QLabel[trouble="doubtful"] {{ color: {doubtful}; }}'
            f'QLineEdit[trouble="refused"] {{ border: 2px solid {refused}; border-radius: 3px; }}'
            f'QLineEdit[trouble="doubtful"] {{ border: 2px solid {doubtful}; border-radius: 3px; }}'
        )


def heading(text: str) -> QLabel:
    """A label that heads a part of the window."""
    label = QLabel(text)
    font = label.font()
    font.setBold(True)
    label.setFont(font)
    return label
