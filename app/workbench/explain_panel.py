"""How the picked line was computed: the equation, the same with its numbers, what enters, and how it is known."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import (
    QAction,
    QFont,
    QFontMetricsF,
    QGuiApplication,
    QKeySequence,
    QPainter,
    QPaintEvent,
    QPalette,
    QResizeEvent,
)
from PySide6.QtWidgets import QAbstractScrollArea, QWidget

from app.wording import Explanation
from app.workbench.theme import Theme

_HINT = "Pick a bar of the waterfall or a row of the table to see how it was computed."
_MARGIN = 10.0
_SUBSCRIPT = re.compile(r"_([A-Za-z0-9,=]+(?: Rsh| Rs)?)")


def plain_explanation(explanation: Explanation) -> str:
    """An explanation as plain text, for the clipboard and for screen readers."""
    given = [f"{g.symbol} = {g.value} ({g.title})" for g in explanation.given]
    foot = [f"Basis: {explanation.basis}" if explanation.basis else "", f"Source: {explanation.source}"]
    parts = [explanation.title, explanation.amount, *explanation.steps, *given, *foot]
    return "\n".join(part for part in parts if part)


@dataclass(frozen=True)
class _Run:
    """A piece of text at a place, in one of the three fonts."""

    x: float
    y: float
    text: str
    font: int


class _Setter:
    """Sets an explanation in lines of a given width: a few dozen runs, without the cost of a rich-text document."""

    NORMAL, BOLD, SMALL = 0, 1, 2

    def __init__(self, font: QFont) -> None:
        bold, small = QFont(font), QFont(font)
        bold.setBold(True)
        small.setPointSizeF(font.pointSizeF() * 0.78)
        self.fonts = (font, bold, small)
        self._metrics = tuple(QFontMetricsF(f) for f in self.fonts)
        self._ascent = self._metrics[0].ascent()
        self._line = math.ceil(self._metrics[0].height()) + 1.0
        self._drop = self._metrics[0].descent() * 0.7
        self._widths: dict[tuple[int, str], float] = {}
        self.runs: list[_Run] = []
        self.height = 0.0

    def set(self, explanation: Explanation | None, width: float) -> None:
        """Lay out an explanation, or the hint, in `width` pixels."""
        self.runs, self.height = [], 4.0
        if len(self._widths) > 4000:
            self._widths.clear()
        room = width - 2 * _MARGIN
        if explanation is None:
            self._paragraph(_HINT, room)
            return
        self._paragraph(explanation.title, room, self.BOLD)
        self._paragraph(explanation.amount, room)
        self._gap(bool(explanation.steps))
        for step in explanation.steps:
            self._paragraph(step, room)
        self._gap(bool(explanation.given))
        self._columns(explanation, room)
        self._gap(True)
        if explanation.basis:
            self._paragraph(f"Basis: {explanation.basis}", room)
        self._paragraph(f"Source: {explanation.source}", room)
        self.height += 4.0

    def _gap(self, wanted: bool) -> None:
        self.height += 0.5 * self._line if wanted else 0.0

    def _width(self, text: str, font: int) -> float:
        key = (font, text)
        if key not in self._widths:
            self._widths[key] = self._metrics[font].horizontalAdvance(text)
        return self._widths[key]

    def _pieces(self, text: str, font: int) -> list[tuple[str, int]]:
        """A text cut at its subscripts."""
        if "_" not in text:
            return [(text, font)]
        parts = _SUBSCRIPT.split(text)
        return [(part, self.SMALL if k % 2 else font) for k, part in enumerate(parts) if part]

    def _extent(self, text: str, font: int) -> float:
        return sum(self._width(piece, kind) for piece, kind in self._pieces(text, font))

    def _put(self, x: float, text: str, font: int) -> float:
        """Place a text on the present line; where it ends."""
        base = self.height + self._ascent
        for piece, kind in self._pieces(text, font):
            self.runs.append(_Run(x, base + (self._drop if kind == self.SMALL else 0.0), piece, kind))
            x += self._width(piece, kind)
        return x

    def _paragraph(self, text: str, room: float, font: int = NORMAL, indent: float = 0.0) -> None:
        """Place a text, broken at blanks where it is too wide."""
        line = ""
        for word in text.split(" "):
            longer = f"{line} {word}" if line else word
            if line and self._extent(longer, font) > room - indent:
                self._put(_MARGIN + indent, line, font)
                self.height += self._line
                line = word
            else:
                line = longer
        self._put(_MARGIN + indent, line, font)
        self.height += self._line

    def _columns(self, explanation: Explanation, room: float) -> None:
        given = explanation.given
        symbols = max((self._extent(g.symbol, self.NORMAL) for g in given), default=0.0) + 12.0
        values = max((self._extent(g.value, self.NORMAL) for g in given), default=0.0)
        for g in given:
            self._put(_MARGIN, g.symbol, self.NORMAL)
            self._put(_MARGIN + symbols + values - self._extent(g.value, self.NORMAL), g.value, self.NORMAL)
            self._paragraph(g.title, room, indent=symbols + values + 12.0)


class ExplainPanel(QAbstractScrollArea):
    """Shows an explanation; Ctrl+C and the context menu copy its text."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setFrameShape(QAbstractScrollArea.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("How the picked line was computed")
        self._setter = _Setter(self.font())
        self._shown: Explanation | None = None
        copy = QAction("&Copy the explanation", self)
        copy.setShortcut(QKeySequence(QKeySequence.StandardKey.Copy))
        copy.setShortcutContext(Qt.ShortcutContext.WidgetShortcut)
        copy.triggered.connect(self.copy)
        self.addAction(copy)
        self.setContextMenuPolicy(Qt.ContextMenuPolicy.ActionsContextMenu)
        theme.changed.connect(self.viewport().update)
        self._set()

    @property
    def text(self) -> str:
        """What is shown, as plain text."""
        return _HINT if self._shown is None else plain_explanation(self._shown)

    def show_explanation(self, explanation: Explanation | None) -> None:
        """Show an explanation, or how to get one."""
        if explanation != self._shown:
            self._shown = explanation
            self._set()

    def _set(self) -> None:
        self._setter.set(self._shown, self.viewport().width())
        room = self.viewport().height()
        excess = max(0, math.ceil(self._setter.height) - room)
        bar = self.verticalScrollBar()
        if bar.maximum() != excess:
            bar.setRange(0, excess)
            bar.setPageStep(room)
            bar.setSingleStep(self.fontMetrics().height())
        self.viewport().update()

    def copy(self) -> None:
        """Put the text on the clipboard."""
        QGuiApplication.clipboard().setText(self.text)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Wrap the text to the new width."""
        super().resizeEvent(event)
        self._set()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the text."""
        with QPainter(self.viewport()) as painter:
            painter.setPen(self.palette().color(QPalette.ColorRole.WindowText))
            painter.translate(0.0, -self.verticalScrollBar().value())
            used = -1
            for run in self._setter.runs:
                if run.font != used:
                    painter.setFont(self._setter.fonts[run.font])
                    used = run.font
                painter.drawText(QPointF(run.x, run.y), run.text)
