"""A thin drawing surface over QPainter: the few strokes and texts charts need, in points or logical pixels."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import (
    QBrush,
    QColor,
    QPainter,
    QPen,
    QPolygonF,
)

from app.figures.fonts import chart_font
from app.figures.lettering import FINE, Lettering, outline, setting

Target = Literal["screen", "file", "outline"]
Align = Literal["left", "center", "right"]

#: Height of capitals and digits, and depth of descenders, as shares of the type size (Noto Sans: 0.714, 0.24).
CAP, DEPTH = 0.714, 0.24


@dataclass(frozen=True)
class Mark:
    """Something drawn, kept for inspection: its kind ("text", "bar", …), its text, and where it is."""

    kind: str
    text: str
    rect: QRectF
    size: float = 0.0


@lru_cache(maxsize=512)
def _pen(colour: str, width: float, dash: tuple[float, ...]) -> QPen:
    pen = QPen(QColor(colour), width)
    pen.setCapStyle(Qt.PenCapStyle.FlatCap)
    pen.setJoinStyle(Qt.PenJoinStyle.MiterJoin)
    if dash:
        pen.setDashPattern([part / width for part in dash])
    return pen


@lru_cache(maxsize=512)
def _brush(colour: str) -> QBrush:
    return QBrush(QColor(colour)) if colour else QBrush(Qt.BrushStyle.NoBrush)


@lru_cache(maxsize=512)
def _colour(colour: str) -> QColor:
    return QColor(colour)


class Sheet:
    """Draws on an open QPainter whose units are points (files) or logical pixels (screen).

    Parameters
    ----------
    painter : QPainter
        Open painter, already scaled to the sheet's units.
    target : {"screen", "file", "outline"}
        "screen" fits type and straight lines to the pixel grid; "file" draws type free of any grid;
        "outline" draws type as curves, for files that must not depend on the reader's fonts.
    pixel : float
        Device pixels in one unit, for the fitting on a screen.
    record : bool
        Keep a list of what was drawn in `marks`.
    """

    def __init__(self, painter: QPainter, target: Target = "file", *, pixel: float = 1.0, record: bool = False) -> None:
        self.painter = painter
        self.target: Target = target
        self.marks: list[Mark] | None = [] if record else None
        self._pixel = pixel
        self._screen = target == "screen"
        self.type = Lettering(self._screen)
        self._pen_key: tuple[str, float, tuple[float, ...]] | None = None
        self._brush_key: str | None = None
        self._font_key: tuple[int, bool] | None = None
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
        painter.setRenderHint(QPainter.RenderHint.TextAntialiasing, True)

    # ---------------------------------------------------------------- type

    def width(self, text: str, size: float, bold: bool = False) -> float:
        """Width of a text [units]."""
        return self.type.width(text, size, bold)

    def fit(self, text: str, size: float, room: float, bold: bool = False) -> str:
        """Cut a text with an ellipsis so that it is no wider than `room` [units]."""
        return self.type.fit(text, size, room, bold)

    def text(
        self,
        x: float,
        baseline: float,
        text: str,
        size: float,
        colour: str,
        *,
        bold: bool = False,
        align: Align = "left",
    ) -> float:
        """Draw one line of text.

        Parameters
        ----------
        x, baseline : float
            Anchor [units].
        text : str
            What to draw.
        size : float
            Size of the type [units].
        colour : str
            "#rrggbb".
        bold : bool
            Bold instead of regular.
        align : {"left", "center", "right"}
            Which point of the text stands at `x`.

        Returns
        -------
        float
            Width of what was drawn [units].
        """
        if not text:
            return 0.0
        done = setting(text, round(size), bold) if self._screen else None
        width = done.width if done else self.type.width(text, size, bold)
        if align == "right":
            x -= width
        elif align == "center":
            x -= width / 2
        if self.marks is not None:
            box = QRectF(x, baseline - CAP * size, width, (CAP + DEPTH) * size)
            self.marks.append(Mark("text", text, box, size))
        if done:
            self._set_font(round(size), bold)
            self._set_pen(colour, 1.0, ())
            done.draw(self.painter, round(x * self._pixel) / self._pixel, round(baseline))
        else:
            self._file_text(x, baseline, text, round(size * FINE), colour, bold)
        return width

    def _file_text(self, x: float, baseline: float, text: str, pixels: int, colour: str, bold: bool) -> None:
        painter = self.painter
        painter.save()
        painter.translate(x, baseline)
        painter.scale(1 / FINE, 1 / FINE)
        if self.target == "outline":
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(_brush(colour))
            painter.drawPath(outline(text, pixels, bold))
        else:
            painter.setFont(chart_font(pixels, bold, False))
            painter.setPen(_pen(colour, 1.0, ()))
            painter.drawText(QPointF(0.0, 0.0), text)
        painter.restore()

    def turned_text(self, x: float, y: float, text: str, size: float, colour: str, *, bold: bool = False) -> None:
        """Draw a text that reads upwards, centred at (x, y)."""
        width = self.width(text, size, bold)
        shift = CAP * size / 2
        if self.marks is not None:
            box = QRectF(x - shift, y - width / 2, (CAP + DEPTH) * size, width)
            self.marks.append(Mark("text", text, box, size))
        painter = self.painter
        kept, self.marks = self.marks, None
        painter.save()
        painter.translate(x, y)
        painter.rotate(-90)
        self.text(0.0, shift, text, size, colour, bold=bold, align="center")
        painter.restore()
        self.marks = kept
        self._forget()

    # ---------------------------------------------------------------- shapes

    def rect(
        self,
        area: QRectF,
        fill: str = "",
        stroke: str = "",
        width: float = 1.0,
        dash: tuple[float, ...] = (),
        *,
        kind: str = "",
    ) -> None:
        """Draw a rectangle, its edge inside the area; `kind` names it in the record."""
        if self.marks is not None and kind:
            self.marks.append(Mark(kind, "", QRectF(area)))
        if self._screen:
            area = self._snapped(area)
            if not dash:
                self._filled(area, fill, stroke, width)
                return
        if stroke:
            inset = min(width / 2, area.width() / 2, area.height() / 2)
            area = area.adjusted(inset, inset, -inset, -inset)
            self._set_pen(stroke, width, dash)
        else:
            self._no_pen()
        self._set_brush(fill)
        self.painter.drawRect(area)

    def _filled(self, area: QRectF, fill: str, stroke: str, width: float) -> None:
        """A rectangle on whole pixels, from fills alone: stroking an edge smoothly takes forty times as long."""
        painter = self.painter
        if not stroke:
            if fill:
                painter.fillRect(area, _colour(fill))
            return
        colour = _colour(stroke)
        width = self._whole(width)
        x, y, wide, high = area.x(), area.y(), area.width(), area.height()
        if fill:
            painter.fillRect(area, colour)
            if wide > 2 * width and high > 2 * width:
                painter.fillRect(QRectF(x + width, y + width, wide - 2 * width, high - 2 * width), _colour(fill))
            return
        painter.fillRect(QRectF(x, y, wide, width), colour)
        painter.fillRect(QRectF(x, y + high - width, wide, width), colour)
        painter.fillRect(QRectF(x, y, width, high), colour)
        painter.fillRect(QRectF(x + wide - width, y, width, high), colour)

    def line(
        self,
        x1: float,
        y1: float,
        x2: float,
        y2: float,
        colour: str,
        width: float,
        dash: tuple[float, ...] = (),
    ) -> None:
        """Draw a straight line."""
        if self._screen:
            # A one-pixel line on a pixel's edge would be smeared over two.
            if x1 == x2:
                x1 = x2 = self._middle(x1)
            elif y1 == y2:
                y1 = y2 = self._middle(y1)
            if not dash and (x1 == x2 or y1 == y2):
                self._straight(x1, y1, x2, y2, colour, width)
                return
        self._set_pen(colour, width, dash)
        self.painter.drawLine(QLineF(x1, y1, x2, y2))

    def _straight(self, x1: float, y1: float, x2: float, y2: float, colour: str, width: float) -> None:
        scale = self._pixel
        width = self._whole(width)
        if x1 == x2:
            left, top = math.floor((x1 - width / 2) * scale + 0.5) / scale, round(min(y1, y2) * scale) / scale
            area = QRectF(left, top, width, round(abs(y2 - y1) * scale) / scale)
        else:
            left, top = round(min(x1, x2) * scale) / scale, math.floor((y1 - width / 2) * scale + 0.5) / scale
            area = QRectF(left, top, round(abs(x2 - x1) * scale) / scale, width)
        self.painter.fillRect(area, _colour(colour))

    def lines(self, parts: Sequence[QLineF], colour: str, width: float) -> None:
        """Draw many straight lines of one kind."""
        if parts:
            self._set_pen(colour, width, ())
            self.painter.drawLines(list(parts))

    def polygon(
        self, points: Sequence[tuple[float, float]], fill: str = "", stroke: str = "", width: float = 1.0
    ) -> None:
        """Draw a closed shape."""
        if stroke:
            self._set_pen(stroke, width, ())
        else:
            self._no_pen()
        self._set_brush(fill)
        self.painter.drawPolygon(QPolygonF([QPointF(x, y) for x, y in points]))

    def ellipse(self, x: float, y: float, radius: float, fill: str = "", stroke: str = "", width: float = 1.0) -> None:
        """Draw a circle."""
        if stroke:
            self._set_pen(stroke, width, ())
        else:
            self._no_pen()
        self._set_brush(fill)
        self.painter.drawEllipse(QPointF(x, y), radius, radius)

    def polyline(
        self,
        x: NDArray[np.float64],
        y: NDArray[np.float64],
        colour: str,
        width: float,
        dash: tuple[float, ...] = (),
    ) -> None:
        """Draw a curve through points [units]; a NaN breaks it."""
        good = np.isfinite(x) & np.isfinite(y)
        if not good.any():
            return
        edges = np.flatnonzero(np.diff(np.concatenate(([False], good, [False])).astype(np.int8)))
        pen = QPen(_pen(colour, width, dash))
        pen.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
        pen.setCapStyle(Qt.PenCapStyle.FlatCap if dash else Qt.PenCapStyle.RoundCap)
        self.painter.setPen(pen)
        self._pen_key = None
        self._set_brush("")
        for start, stop in zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True):
            points = [QPointF(a, b) for a, b in zip(x[start:stop].tolist(), y[start:stop].tolist(), strict=True)]
            if len(points) > 1:
                self.painter.drawPolyline(QPolygonF(points))

    # ---------------------------------------------------------------- state

    def _set_pen(self, colour: str, width: float, dash: tuple[float, ...]) -> None:
        key = (colour, width, dash)
        if key != self._pen_key:
            self.painter.setPen(_pen(colour, width, dash))
            self._pen_key = key

    def _no_pen(self) -> None:
        key = ("", 0.0, ())
        if key != self._pen_key:
            self.painter.setPen(Qt.PenStyle.NoPen)
            self._pen_key = key

    def _set_brush(self, colour: str) -> None:
        if colour != self._brush_key:
            self.painter.setBrush(_brush(colour))
            self._brush_key = colour

    def _set_font(self, pixels: int, bold: bool) -> None:
        if (pixels, bold) != self._font_key:
            self.painter.setFont(chart_font(pixels, bold, True))
            self._font_key = (pixels, bold)

    def _forget(self) -> None:
        # After a restore() the painter holds other pens and fonts than the keys say.
        self._pen_key = self._brush_key = self._font_key = None

    def _whole(self, width: float) -> float:
        """Width of a line in whole device pixels, rather too thin than too bold, but never none."""
        return max(1, math.floor(width * self._pixel + 0.4)) / self._pixel

    def _middle(self, value: float) -> float:
        return (math.floor(value * self._pixel) + 0.5) / self._pixel

    def _snapped(self, area: QRectF) -> QRectF:
        scale = self._pixel
        left, top = round(area.left() * scale) / scale, round(area.top() * scale) / scale
        right, bottom = round(area.right() * scale) / scale, round(area.bottom() * scale) / scale
        return QRectF(left, top, max(right - left, 1 / scale), max(bottom - top, 1 / scale))
