"""A live plot with its heading and the key to its curves."""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

from PySide6.QtGui import QColor, QResizeEvent
from PySide6.QtWidgets import QLabel, QSizePolicy, QVBoxLayout, QWidget

from app.figures.fonts import chart_font
from app.figures.spec import PlotSpec
from app.wording import THIN
from app.workbench.theme import Heading, Theme

if TYPE_CHECKING:
    from app.workbench.plot_canvas import PlotCanvas

_STROKES = {"solid": "━━", "dashed": "╍╍", "dotted": "┄┄", "none": "●"}
_KEY_PX = 11
_MOST_LINES = 4


class PlotView(QWidget):
    """Shows a `PlotSpec`.

    The canvas comes on first need, because importing pyqtgraph takes a third of the time from the start of the
    program to its window; the window shows itself first and then asks for the canvas.
    """

    def __init__(self, title: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._title = title
        self._theme = theme
        self._spec: PlotSpec | None = None
        self._canvas: PlotCanvas | None = None
        self.head = Heading(title)
        self.key = QLabel()
        for label in (self.head, self.key):
            label.setMinimumHeight(label.fontMetrics().height() + 2)
            label.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self.key.setWordWrap(True)
        self.key.setFont(chart_font(_KEY_PX, hinted=True))
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(8, 4, 8, 4)
        self._column.setSpacing(0)
        self._column.addWidget(self.head)
        self._column.addWidget(self.key)
        self._column.addStretch(1)
        self.setMinimumSize(200, 185)
        self.setAutoFillBackground(True)
        theme.changed.connect(self._recolour)
        self._recolour()

    @property
    def canvas(self) -> PlotCanvas:
        """The canvas, made now if there is none yet."""
        if self._canvas is None:
            from app.workbench.plot_canvas import PlotCanvas

            self._canvas = PlotCanvas(self._title, self._theme, self)  # without a parent it would flash as a window
            self._column.insertWidget(2, self._canvas, 1000)
            self._canvas.setVisible(self._spec is not None)
            if self._spec is not None:
                self._canvas.show_spec(self._spec)
        return self._canvas

    def show_spec(self, spec: PlotSpec | None, why: str = "") -> None:
        """Show a plot, or the sentence why there is none."""
        previous, self._spec = self._spec, spec
        self.head.mark_stale(spec is not None and bool(spec.stale))
        if spec is None and self.key.text() != why:
            self.key.setText(why)
        self.key.setVisible(spec is not None or bool(why))
        if self._canvas is not None:
            self._canvas.setVisible(spec is not None)
            if spec is not None:
                self._canvas.show_spec(spec)
        if spec is not None and (previous is None or _labels(previous) != _labels(spec)):
            self._show_key(spec)

    def _show_key(self, spec: PlotSpec) -> None:
        """Name the curves by colour and stroke, and say what the plot tells in figures."""
        tones = self._theme.palette.tones
        parts = [
            f'<span style="color:{tones[s.role].fill if s.filled else tones[s.role].ink}">'
            f"{'■' if s.filled else _STROKES[s.dash]}</span>&nbsp;{_whole(s.label)}"
            for s in spec.series
            if s.label
        ]
        note = f"<br>{_held(spec.note)}" if spec.note else ""
        self.key.setText("&nbsp; ".join(parts) + note)
        self._fit_key()

    def _fit_key(self) -> None:
        """Give the key the lines that it needs, up to four."""
        line = self.key.fontMetrics().height()
        lines = self.key.heightForWidth(max(self.width() - 16, 1)) // line
        self.key.setFixedHeight(min(max(lines, 1), _MOST_LINES) * line + 4)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Set the key anew for the width."""
        super().resizeEvent(event)
        self._fit_key()

    def _recolour(self) -> None:
        colours = self.palette()
        colours.setColor(self.backgroundRole(), QColor(self._theme.palette.paper))
        self.setPalette(colours)
        if self._canvas is not None:
            self._canvas.recolour()
        if self._spec is not None:
            self._show_key(self._spec)


def _labels(spec: PlotSpec) -> list[str]:
    return [spec.note, *(series.label for series in spec.series)]


def _whole(label: str) -> str:
    """A label that no line break parts, neither at a blank nor at a stroke."""
    return _held(label).replace(" ", "&nbsp;").replace("/", "/&#8288;")


def _held(text: str) -> str:
    """A text in which numbers stay with their units: rich text takes a thin space for a plain one."""
    return escape(text).replace(THIN, "&nbsp;")
