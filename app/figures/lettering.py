"""Type: how wide texts are, where they break, and how they are drawn fast."""

from __future__ import annotations

from functools import lru_cache

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QFontMetricsF, QPainter, QPainterPath, QStaticText

from app.figures.fonts import chart_font

#: Files set type ten times too large under a scale of a tenth, because Qt takes whole pixel sizes only.
FINE = 10
_ELLIPSIS = "…"


#: Texts already broken into lines, by everything that decides how.
_wrapped: dict[tuple[str, float, float, int, bool, bool, bool], list[str]] = {}


@lru_cache(maxsize=128)
def _metrics(pixels: int, bold: bool, hinted: bool) -> QFontMetricsF:
    return QFontMetricsF(chart_font(pixels, bold, hinted))


#: All digits of the bundled type are as wide as a zero (a test holds it to that), so a number on the move keeps the
#: width of its shape and is measured once.
_SHAPE = str.maketrans("123456789", "000000000")


@lru_cache(maxsize=8192)
def _shape_width(shape: str, pixels: int, bold: bool, hinted: bool) -> float:
    return _metrics(pixels, bold, hinted).horizontalAdvance(shape)


def _width(text: str, pixels: int, bold: bool, hinted: bool) -> float:
    return _shape_width(text.translate(_SHAPE), pixels, bold, hinted)


class Setting:
    """A text at one size on the screen: its width, and how it is drawn best."""

    __slots__ = ("ascent", "static", "text", "times", "width")

    def __init__(self, text: str, pixels: int, bold: bool) -> None:
        self.text = text
        self.width = _width(text, pixels, bold, True)
        self.ascent = _metrics(pixels, bold, True).ascent()
        self.static: QStaticText | None = None
        self.times = 0

    def draw(self, painter: QPainter, x: float, baseline: float) -> None:
        """Draw with the painter's font, which must be the one this was measured with."""
        if self.static is None:
            # Most texts seen once are numbers on the move, and setting costs more than drawing once.
            if self.times == 0:
                self.times = 1
                painter.drawText(QPointF(x, baseline), self.text)
                return
            self.static = QStaticText(self.text)
            self.static.setTextFormat(Qt.TextFormat.PlainText)
            self.static.prepare(font=painter.font())
        # A static text hangs from its upper edge, a plain one stands on its baseline.
        painter.drawStaticText(QPointF(x, baseline - self.ascent), self.static)


@lru_cache(maxsize=2048)
def setting(text: str, pixels: int, bold: bool) -> Setting:
    """A text at one size on the screen, shared by all who draw it."""
    return Setting(text, pixels, bold)


@lru_cache(maxsize=1024)
def outline(text: str, pixels: int, bold: bool) -> QPainterPath:
    """The outlines of a text that stands on the origin, at `FINE` times its size."""
    path = QPainterPath()
    path.addText(0.0, 0.0, chart_font(pixels, bold, False), text)
    return path


class Lettering:
    """Measures and breaks texts.

    Parameters
    ----------
    screen : bool
        Type of whole pixels, fitted to the pixel grid; otherwise type of any size, free of it.
    """

    def __init__(self, screen: bool) -> None:
        self.screen = screen

    def pixels(self, size: float) -> int:
        """Whole pixel size Qt is asked for, for type of `size` units."""
        return round(size) if self.screen else round(size * FINE)

    def width(self, text: str, size: float, bold: bool = False) -> float:
        """Width of a text [units]."""
        if self.screen:
            return _width(text, round(size), bold, True)
        return _width(text, round(size * FINE), bold, False) / FINE

    def fit(self, text: str, size: float, room: float, bold: bool = False) -> str:
        """Cut a text with an ellipsis so that it is no wider than `room` [units]."""
        if self.width(text, size, bold) <= room:
            return text
        low, high = 0, len(text)
        while low < high:
            middle = (low + high + 1) // 2
            if self.width(text[:middle].rstrip() + _ELLIPSIS, size, bold) <= room:
                low = middle
            else:
                high = middle - 1
        return text[:low].rstrip() + _ELLIPSIS if low else ""

    def wrap(
        self, text: str, size: float, room: float, most: int, bold: bool = False, *, even: bool = True
    ) -> list[str]:
        """Break a text at plain blanks into lines no wider than `room`.

        Parameters
        ----------
        text : str
            One paragraph.
        size : float
            Size of the type [units].
        room : float
            Widest line [units].
        most : int
            Largest number of lines; the last one is cut with an ellipsis where the text is longer.
        bold : bool
            Bold instead of regular.
        even : bool
            Make the lines about equally long rather than filling the first ones.

        Returns
        -------
        list of str
            At least one line.
        """
        if self.width(text, size, bold) <= room:
            return [text]
        key = (text, size, room, most, bold, even, self.screen)
        lines = _wrapped.get(key)
        if lines is None:
            if len(_wrapped) > 2000:
                _wrapped.clear()
            lines = _wrapped[key] = self._broken(text, size, room, most, bold, even)
        return list(lines)

    def _broken(self, text: str, size: float, room: float, most: int, bold: bool, even: bool) -> list[str]:
        lines = self._greedy(text, size, room, most, bold)
        if not even or any(self.width(line, size, bold) > room for line in lines):
            return [self.fit(line, size, room, bold) for line in lines]
        # As many lines as must be, but of even length: no single word is left on the last.
        low, high = room / len(lines) * 0.5, room
        while high - low > size * 0.25:
            middle = (low + high) / 2
            trial = self._greedy(text, size, middle, most, bold)
            if len(trial) == len(lines) and all(self.width(line, size, bold) <= middle for line in trial):
                high, lines = middle, trial
            else:
                low = middle
        return lines

    def _greedy(self, text: str, size: float, room: float, most: int, bold: bool) -> list[str]:
        # At plain blanks alone: thin and fixed blanks hold a number and its unit together.
        words = text.split(" ")
        lines: list[str] = []
        line = ""
        for index, word in enumerate(words):
            longer = f"{line} {word}" if line else word
            if not line or self.width(longer, size, bold) <= room:
                line = longer
                continue
            if len(lines) == most - 1:
                line = " ".join([line, *words[index:]])
                break
            lines.append(line)
            line = word
        lines.append(line)
        return lines
