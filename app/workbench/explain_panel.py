"""How the picked line was computed: the equation, the same with its numbers, what enters, and how it is known."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRect, Qt
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
_SUBSCRIPT = re.compile(r"_([A-Za-z0-9,=]*[A-Za-z0-9=](?: Rsh| Rs)?)")


def plain_explanation(explanation: Explanation) -> str:
    """An explanation as plain text, for the clipboard and for screen readers."""
    given = [f"{g.symbol} = {g.value} ({g.title})" for g in explanation.given]
    foot = [f"Basis: {explanation.basis}" if explanation.basis else "", f"Source: {explanation.source}"]
    parts = [explanation.title, explanation.amount, *explanation.steps, *given, *foot]
    return "\n".join(part for part in parts if part)


@dataclass(frozen=True, slots=True)
class _Run:
    """A piece of text at a place relative to its block, in one of the three fonts."""

    x: float
    y: float
    text: str
    font: int


@dataclass(frozen=True, slots=True)
class _Block:
    """A paragraph broken into lines: its runs and its size [px]."""

    runs: tuple[_Run, ...]
    width: float
    height: float

    def area(self, x: float, y: float) -> QRect:
        """Where it is painted when placed at (x, y), with a rim for what reaches beyond."""
        return QRect(int(x) - 2, int(y) - 1, int(self.width) + 5, int(self.height) + 3)


class _Setter:
    """Sets an explanation in lines of a given width: a few dozen runs, without the cost of a rich-text document.

    Paragraphs are kept as set: when a number moves, most of them read as before.
    """

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
        self._blank = self._metrics[0].horizontalAdvance(" ")
        # Where all digits are as wide as a zero, a number on the move keeps the width of its shape.
        even = all(len({metrics.horizontalAdvance(digit) for digit in "0123456789"}) == 1 for metrics in self._metrics)
        self._shape = str.maketrans("123456789", "000000000") if even else {}
        self._extents: dict[tuple[int, str], float] = {}
        self._blocks: dict[tuple[str, float, int], _Block] = {}

    def set(self, explanation: Explanation | None, width: float) -> list[tuple[float, float, _Block]]:
        """Set an explanation, or the hint, in `width` pixels: blocks with their left and upper edges."""
        if len(self._extents) > 4000 or len(self._blocks) > 1000:
            self._extents.clear()
            self._blocks.clear()
        room = width - 2 * _MARGIN
        page = _Page()
        if explanation is None:
            page.add(_MARGIN, self._paragraph(_HINT, room))
            return page.placed
        page.add(_MARGIN, self._paragraph(explanation.title, room, self.BOLD))
        page.add(_MARGIN, self._paragraph(explanation.amount, room))
        page.skip(0.5 * self._line if explanation.steps else 0.0)
        for step in explanation.steps:
            page.add(_MARGIN, self._paragraph(step, room))
        page.skip(0.5 * self._line if explanation.given else 0.0)
        self._columns(page, explanation, room)
        page.skip(0.5 * self._line)
        if explanation.basis:
            page.add(_MARGIN, self._paragraph(f"Basis: {explanation.basis}", room))
        page.add(_MARGIN, self._paragraph(f"Source: {explanation.source}", room))
        return page.placed

    def _columns(self, page: _Page, explanation: Explanation, room: float) -> None:
        """What enters: symbol, value flush right, and what it is."""
        given = explanation.given
        symbols = max((self._extent(g.symbol, self.NORMAL) for g in given), default=0.0) + 12.0
        values = max((self._extent(g.value, self.NORMAL) for g in given), default=0.0)
        for g in given:
            page.beside(_MARGIN, self._paragraph(g.symbol, room))
            page.beside(_MARGIN + symbols + values - self._extent(g.value, self.NORMAL), self._paragraph(g.value, room))
            titles = symbols + values + 12.0
            page.add(_MARGIN + titles, self._paragraph(g.title, room - titles))

    @staticmethod
    def _pieces(text: str, font: int) -> list[tuple[str, int]]:
        """A text cut at its subscripts."""
        if "_" not in text:
            return [(text, font)]
        parts = _SUBSCRIPT.split(text)
        return [(part, _Setter.SMALL if k % 2 else font) for k, part in enumerate(parts) if part]

    def _extent(self, text: str, font: int) -> float:
        key = (font, text.translate(self._shape))
        known = self._extents.get(key)
        if known is None:
            pieces = self._pieces(text, font)
            known = sum(self._metrics[kind].horizontalAdvance(piece) for piece, kind in pieces)
            self._extents[key] = known
        return known

    def _paragraph(self, text: str, room: float, font: int = NORMAL) -> _Block:
        """A text, broken at blanks where it is too wide."""
        key = (text, room, font)
        block = self._blocks.get(key)
        if block is None:
            runs: list[_Run] = []
            width = 0.0
            lines = [text] if self._extent(text, font) <= room else self._broken(text, room, font)
            for at, line in enumerate(lines):
                x, base = 0.0, at * self._line + self._ascent
                pieces = self._pieces(line, font)
                for piece, kind in pieces:
                    runs.append(_Run(x, base + (self._drop if kind == self.SMALL else 0.0), piece, kind))
                    x += self._extent(piece, kind) if len(pieces) > 1 else self._extent(line, font)
                width = max(width, x)
            block = self._blocks[key] = _Block(tuple(runs), width, len(lines) * self._line)
        return block

    def _broken(self, text: str, room: float, font: int) -> list[str]:
        lines: list[str] = []
        line, width = "", 0.0
        for word in text.split(" "):
            wide = self._extent(word, font)
            if line and width + self._blank + wide > room:
                lines.append(line)
                line, width = word, wide
            else:
                line, width = (f"{line} {word}", width + self._blank + wide) if line else (word, wide)
        return [*lines, line]


class _Page:
    """Blocks placed below each other."""

    def __init__(self) -> None:
        self.placed: list[tuple[float, float, _Block]] = []
        self._y = 4.0

    def add(self, x: float, block: _Block) -> None:
        """Place a block and go below it."""
        self.beside(x, block)
        self._y += block.height

    def beside(self, x: float, block: _Block) -> None:
        """Place a block where the next one will stand beside it."""
        self.placed.append((x, self._y, block))

    def skip(self, height: float) -> None:
        """Leave a blank."""
        self._y += height


class ExplainPanel(QAbstractScrollArea):
    """Shows an explanation; Ctrl+C and the context menu copy its text."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setFrameShape(QAbstractScrollArea.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("How the picked line was computed")
        self._setter = _Setter(self.font())
        self._placed: list[tuple[float, float, _Block]] = []
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
        previous, self._placed = self._placed, self._setter.set(self._shown, self.viewport().width())
        _, top, last = self._placed[-1]
        room = self.viewport().height()
        excess = max(0, math.ceil(top + last.height + 4.0) - room)
        bar = self.verticalScrollBar()
        if bar.maximum() != excess:
            bar.setRange(0, excess)
            bar.setPageStep(room)
            bar.setSingleStep(self.fontMetrics().height())
        self._show_changes(previous)

    def _show_changes(self, previous: list[tuple[float, float, _Block]]) -> None:
        """Ask for a repaint of the blocks that read otherwise than before, or of all."""
        view = self.viewport()
        if len(previous) != len(self._placed):
            view.update()
            return
        shift = self.verticalScrollBar().value()
        for before, now in zip(previous, self._placed, strict=True):
            if before != now:
                x, y, block = now
                area = block.area(x, y - shift)
                x, y, block = before
                view.update(area.united(block.area(x, y - shift)))

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
            shift, changed, used = self.verticalScrollBar().value(), event.region(), -1
            for left, top, block in self._placed:
                top -= shift
                if not changed.intersects(block.area(left, top)):
                    continue
                for run in block.runs:
                    if run.font != used:
                        painter.setFont(self._setter.fonts[run.font])
                        used = run.font
                    painter.drawText(QPointF(left + run.x, top + run.y), run.text)
