"""Where everything on a plot stands: frame and ticks, texts of marks, and the key."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QRectF

from app.figures.curves import Floats, freest
from app.figures.sheet import Sheet
from app.figures.spec import Mark, PlotSpec, Series
from app.figures.style import Style
from app.figures.ticks import axis_ticks, tick_texts

#: Length of a tick, in type sizes.
_TICK = 0.35
#: How far from its mark a text may stand, in steps of about one line.
_DISTANCES = (1.0, 1.2, 1.45, 1.75, 2.2, 3.0, 4.0, 5.5, 7.5, 10.0)


@dataclass(frozen=True)
class Grid:
    """The frame with its ticks, placed."""

    frame: QRectF
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    x_ticks: list[tuple[float, str]]
    y_ticks: list[tuple[float, str]]

    def x(self, value: Floats) -> Floats:
        """Positions of values along x [units]."""
        low, high = self.x_range
        return self.frame.left() + self.frame.width() * (value - low) / ((high - low) or 1.0)

    def y(self, value: Floats) -> Floats:
        """Positions of values along y [units]."""
        low, high = self.y_range
        return self.frame.bottom() - self.frame.height() * (value - low) / ((high - low) or 1.0)


def axis_foot(style: Style) -> float:
    """Height below the frame for ticks, numbers and name of the axis [units]."""
    return style.base * _TICK + style.small * 2.75


def layout_grid(sheet: Sheet, spec: PlotSpec, area: QRectF, style: Style) -> Grid:
    """Place the frame in an area, with room for the numbers and names of both axes, and choose the ticks."""
    reach = style.base * _TICK
    height = max(style.base, area.height() - axis_foot(style))
    y_ticks = _ticks(spec.y_range, spec.y_names, max(3, int(height / (style.small * 2.6))))
    widest = max((sheet.width(text, style.small) for _, text in y_ticks), default=0.0)
    left = (style.base * 1.55 if spec.y_label else 0.0) + widest + reach + style.small * 0.25
    # The last number of the x axis is centred under its tick: half of it may stand out at the right.
    right = style.base * 0.4
    x_ticks: list[tuple[float, str]] = []
    for most in range(10, 1, -1):
        x_ticks = _ticks(spec.x_range, spec.x_names, most)
        widths = [sheet.width(text, style.small) for _, text in x_ticks]
        right = max(widths, default=0.0) / 2
        width = area.width() - left - right
        if len(widths) * (max(widths, default=0.0) + style.small * 1.1) <= width:
            break
    frame = QRectF(area.left() + left, area.top(), max(style.base, area.width() - left - right), height)
    return Grid(frame, spec.x_range, spec.y_range, x_ticks, y_ticks)


def _ticks(
    ends: tuple[float, float], names: tuple[tuple[float, str], ...], most: int
) -> list[tuple[float, str]]:
    """Positions and texts of ticks: the names of the axis, or round numbers."""
    if names:
        return [names[k] for k in range(0, len(names), math.ceil(len(names) / most))]
    ticks = axis_ticks(*ends, most)
    return list(zip(ticks, tick_texts(ticks), strict=True))


def mark_at(mark: Mark, grid: Grid) -> tuple[float, float]:
    """Where a mark stands [units]; one beyond the axes stands on the frame's edge."""
    x, y = grid.x(np.array(mark.x)), grid.y(np.array(mark.y))
    frame = grid.frame
    return (
        float(np.clip(np.nan_to_num(x, nan=frame.left()), frame.left(), frame.right())),
        float(np.clip(np.nan_to_num(y, nan=frame.bottom()), frame.top(), frame.bottom())),
    )


def mark_areas(spec: PlotSpec, grid: Grid, style: Style) -> list[QRectF]:
    """Areas the symbols of the marks take [units]."""
    radius = style.base * 0.5
    places = (mark_at(mark, grid) for mark in spec.marks)
    return [QRectF(x - radius, y - radius, 2 * radius, 2 * radius) for x, y in places]


def mark_labels(sheet: Sheet, spec: PlotSpec, grid: Grid, points: Floats, style: Style) -> list[QRectF]:
    """Areas of the marks' texts, each where it covers least: right, left, above, below, or a step further off."""
    taken = mark_areas(spec, grid, style)
    labels: list[QRectF] = []
    for mark in spec.marks:
        if not mark.label:
            labels.append(QRectF())
            continue
        x, y = mark_at(mark, grid)
        width, height = sheet.width(mark.label, style.small, True), style.small * 1.1
        frame = grid.frame.adjusted(style.base * 0.3, style.base * 0.3, -style.base * 0.3, -style.base * 0.3)
        candidates = []
        for far in _DISTANCES:
            side, level = style.base * 0.75 * far, style.base * 1.05 * far
            for dx, dy in ((1, 0), (-1, 0), (1, -1), (1, 1), (-1, 1), (-1, -1), (0, -1), (0, 1)):
                left = x + side if dx > 0 else x - side - width if dx < 0 else x - width / 2
                area = QRectF(left, y + dy * level - height / 2, width, height)
                if frame.contains(area):
                    candidates.append(area)
        if not candidates:
            left = min(max(x + style.base, frame.left()), max(frame.left(), frame.right() - width))
            candidates = [QRectF(left, y - height / 2, width, height)]
        _, area = freest(candidates, points, [*taken, *labels], style.base * 0.12)
        labels.append(area)
    return labels


def key_rows(sheet: Sheet, named: list[Series], room: float, style: Style) -> list[list[Series]]:
    """The key set in rows beneath the plot."""
    rows: list[list[Series]] = []
    x = room + 1.0
    for series in named:
        width = key_width(sheet, series, style)
        if x + width > room:
            rows.append([])
            x = 0.0
        rows[-1].append(series)
        x += width + style.small * 1.4
    return rows


def key_width(sheet: Sheet, series: Series, style: Style) -> float:
    """Width of one entry of the key: a piece of line and the name [units]."""
    return style.small * 3.0 + sheet.width(series.label, style.small)


def key_corner(
    sheet: Sheet, named: list[Series], grid: Grid, points: Floats, taken: list[QRectF], style: Style
) -> QRectF | None:
    """The emptiest place inside the frame for the key; None where it would cover something everywhere."""
    if not named:
        return None
    width = max(key_width(sheet, series, style) for series in named)
    height = len(named) * style.small * 1.5
    pad = style.base * 0.6
    frame = grid.frame.adjusted(pad, pad, -pad, -pad)
    if width > frame.width() * 0.6 or height > frame.height() * 0.6:
        return None
    lefts = (frame.right() - width, frame.left(), frame.center().x() - width / 2)
    tops = (frame.top(), frame.bottom() - height, frame.center().y() - height / 2)
    candidates = [QRectF(x, y, width, height) for y in tops for x in lefts]
    cost, area = freest(candidates, points, taken, style.base * 0.5)
    return area if cost == 0 else None
