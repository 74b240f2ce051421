"""Plots of curves and marks over two linear axes, for files and for the clipboard."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QRectF

from app.figures.blocks import LEADING, banner_height, banner_lines, caption_lines, heading, paint_banner, paint_lines
from app.figures.curves import Floats, clipped, dense
from app.figures.palette import Palette, blend, faded
from app.figures.plot_layout import (
    Grid,
    axis_foot,
    key_corner,
    key_rows,
    key_width,
    layout_grid,
    mark_areas,
    mark_at,
    mark_labels,
)
from app.figures.sheet import CAP, Sheet
from app.figures.spec import Dash, Mark, PlotSpec, Role, Series, Symbol, dot_scale
from app.figures.style import Style

#: A text further from its mark than this, in type sizes, is tied to it by a thin line.
_LEADER = 0.9
#: Height of the frame as a share of the page's width, where the page takes the height it needs.
_FRAME_SHAPE = 0.5


def dashes(dash: Dash, width: float) -> tuple[float, ...]:
    """Lengths of the strokes and gaps of a line [units]."""
    if dash == "dashed":
        return (width * 3.6, width * 2.2)
    if dash == "dotted":
        return (width * 1.1, width * 1.7)
    return ()


def paint_plot(sheet: Sheet, spec: PlotSpec, rect: QRectF, style: Style, palette: Palette) -> None:
    """Draw a plot.

    Parameters
    ----------
    sheet : Sheet
        Where to draw.
    spec : PlotSpec
        What to show.
    rect : QRectF
        Area to fill [units].
    style : Style
        Sizes.
    palette : Palette
        Colours.
    """
    shown = faded(palette) if spec.stale else palette
    if palette.paper == palette.ground:
        sheet.rect(rect, palette.paper)
    left, room = rect.left() + style.margin, rect.width() - 2 * style.margin
    top = _paint_head(sheet, spec, left, rect.top() + style.margin, room, style, palette)
    bottom = _paint_caption(sheet, spec, left, rect.bottom() - style.margin, room, top, style, palette)
    named = [series for series in spec.series if series.label]
    rows = key_rows(sheet, named, room, style)
    below = len(rows) * style.small * 1.5
    grid = layout_grid(sheet, spec, QRectF(left, top, room, bottom - top), style)
    curves = [_curve(series, grid) for series in spec.series]
    points = _points(spec, curves, grid, style)
    labels = mark_labels(sheet, spec, grid, points, style)
    key = key_corner(sheet, named, grid, points, [*labels, *mark_areas(spec, grid, style)], style)
    if key is None and named:
        # No corner is free: the key goes beneath, and everything moves up to make room for it.
        grid = layout_grid(sheet, spec, QRectF(left, top, room, bottom - top - below), style)
        curves = [_curve(series, grid) for series in spec.series]
        labels = mark_labels(sheet, spec, grid, _points(spec, curves, grid, style), style)
    _paint_grid(sheet, spec, grid, left, style, palette)
    for series, (x, y) in zip(spec.series, curves, strict=True):
        if series.filled:
            _paint_area(sheet, series, grid, shown)
            continue
        colour = _ink(series.role, shown, bool(spec.stale))
        if series.dash != "none":
            sheet.polyline(x, y, colour, style.curve, dashes(series.dash, style.curve))
        if series.markers:
            _paint_dots(sheet, series, grid, colour, style)
    for mark, area in zip(spec.marks, labels, strict=True):
        _paint_leader(sheet, mark, area, grid, style, palette)
    for mark, area in zip(spec.marks, labels, strict=True):
        _paint_mark(sheet, mark, grid, style, shown, bool(spec.stale))
        baseline = area.center().y() + CAP * style.small / 2
        sheet.text(area.left(), baseline, mark.label, style.small, shown.tones[mark.role].ink, bold=True)
    if key is not None:
        if palette.paper == palette.ground:
            sheet.rect(key, palette.ground)
        _paint_key(sheet, [[series] for series in named], key.left(), key.top(), style, shown, bool(spec.stale))
    elif named:
        _paint_key(sheet, rows, left, bottom - below, style, shown, bool(spec.stale))


def natural_height(sheet: Sheet, spec: PlotSpec, width: float, style: Style) -> float:
    """Height at which a plot looks well at a given width: the axis names fit, and all texts [units]."""
    room = width - 2 * style.margin
    banner = banner_height(style, len(banner_lines(sheet, spec.stale, room, style)))
    lines, size = heading(sheet, spec.title, style.title, style.base, room)
    head = banner + len(lines) * size * LEADING + style.base * 0.75
    caption = len(caption_lines(sheet, spec.caption, style, room)) * style.caption * LEADING + style.base * 0.3
    key = len(key_rows(sheet, [series for series in spec.series if series.label], room, style)) * style.small * 1.5
    frame = max(room * _FRAME_SHAPE, sheet.width(spec.y_label, style.small) + style.small)
    return 2 * style.margin + head + frame + axis_foot(style) + key + caption


def _ink(role: Role, palette: Palette, stale: bool) -> str:
    """Colour of a curve or mark; drawn back towards the ground in a picture that is out of date."""
    ink = palette.tones[role].ink
    return blend(ink, palette.ground, 0.5) if stale else ink


def _paint_leader(sheet: Sheet, mark: Mark, area: QRectF, grid: Grid, style: Style, palette: Palette) -> None:
    """A thin line from a mark to its text, where they stand so far apart that the eye would lose the pair."""
    x, y = mark_at(mark, grid)
    dx = max(area.left() - x, 0.0, x - area.right())
    dy = max(area.top() - y, 0.0, y - area.bottom())
    if not area.isEmpty() and math.hypot(dx, dy) > _LEADER * style.base:
        end_x = min(max(x, area.left() + style.small * 0.4), area.right() - style.small * 0.4)
        end_y = min(max(y, area.top()), area.bottom())
        sheet.line(x, y, end_x, end_y, palette.muted, style.hairline)


def _paint_head(
    sheet: Sheet, spec: PlotSpec, left: float, top: float, room: float, style: Style, palette: Palette
) -> float:
    banner = banner_lines(sheet, spec.stale, room, style)
    top = paint_banner(sheet, left, top, room, banner, style, palette)
    lines, size = heading(sheet, spec.title, style.title, style.base, room)
    return paint_lines(sheet, left, top, lines, size, palette.ink, bold=True) + style.base * 0.75


def _paint_caption(
    sheet: Sheet,
    spec: PlotSpec,
    left: float,
    bottom: float,
    room: float,
    top: float,
    style: Style,
    palette: Palette,
) -> float:
    """Draw the small print above `bottom`; returns the upper edge [units]."""
    lines = caption_lines(sheet, spec.caption, style, room)
    height = len(lines) * style.caption * LEADING
    if not lines or (not style.keep_caption and bottom - top - height < style.base * 14):
        return bottom
    paint_lines(sheet, left, bottom - height, lines, style.caption, palette.muted)
    return bottom - height - style.base * 0.3


def _curve(series: Series, grid: Grid) -> tuple[Floats, Floats]:
    x = np.asarray(series.x, dtype=np.float64)
    y = np.asarray(series.y, dtype=np.float64)
    return clipped(grid.x(x), grid.y(y), grid.frame)


def _runs(known: NDArray[np.bool_]) -> list[slice]:
    """Runs of points without a break."""
    edges = np.flatnonzero(np.diff(np.concatenate([[False], known, [False]]).astype(np.int8)))
    return [slice(int(start), int(stop)) for start, stop in zip(edges[::2], edges[1::2], strict=True)]


def _paint_area(sheet: Sheet, series: Series, grid: Grid, palette: Palette) -> None:
    """Fill from a curve down to the foot of the frame."""
    frame = grid.frame
    x = np.clip(grid.x(np.asarray(series.x, dtype=np.float64)), frame.left(), frame.right())
    y = np.clip(grid.y(np.asarray(series.y, dtype=np.float64)), frame.top(), frame.bottom())
    for run in _runs(np.isfinite(x) & np.isfinite(y)):
        rim = list(zip(x[run].tolist(), y[run].tolist(), strict=True))
        corners = [(rim[0][0], frame.bottom()), *rim, (rim[-1][0], frame.bottom())]
        sheet.polygon(corners, palette.tones[series.role].fill)


def _paint_dots(sheet: Sheet, series: Series, grid: Grid, colour: str, style: Style) -> None:
    """A dot on each point inside the frame."""
    frame = grid.frame.adjusted(-0.5, -0.5, 0.5, 0.5)
    radius = style.curve * 1.4 * dot_scale(series)
    for x, y in zip(grid.x(np.asarray(series.x)).tolist(), grid.y(np.asarray(series.y)).tolist(), strict=True):
        if math.isfinite(x + y) and frame.contains(x, y):  # Qt takes NaN to be inside
            sheet.ellipse(x, y, radius, colour)


def _points(spec: PlotSpec, curves: list[tuple[Floats, Floats]], grid: Grid, style: Style) -> Floats:
    """Points [units] that stand for all that is drawn, areas included: texts keep off them."""
    parts = []
    for series, (x, y) in zip(spec.series, curves, strict=True):
        rim = dense(x, y, style.base * 0.25)
        parts.append(rim)
        if series.filled:
            depths = np.arange(style.small / 2.0, grid.frame.height(), style.small)
            inside = np.repeat(rim[::4], depths.size, axis=0)
            inside[:, 1] += np.tile(depths, len(rim[::4]))
            parts.append(inside[inside[:, 1] < grid.frame.bottom()])
    return np.vstack(parts) if parts else np.empty((0, 2))


def _paint_key(
    sheet: Sheet, rows: list[list[Series]], left: float, top: float, style: Style, palette: Palette, stale: bool
) -> None:
    for row in rows:
        x, middle = left, top + style.small * 0.75
        for series in row:
            colour = _ink(series.role, palette, stale)
            end = x + style.small * 2.4
            if series.filled:
                box = QRectF(x + style.small * 0.9, middle - style.small * 0.45, style.small * 1.5, style.small * 0.9)
                sheet.rect(box, palette.tones[series.role].fill, palette.tones[series.role].outline, style.hairline)
            elif series.dash != "none":
                sheet.line(x, middle, end, middle, colour, style.curve, dashes(series.dash, style.curve))
            if series.markers:
                sheet.ellipse((x + end) / 2, middle, style.curve * 1.4, colour)
            sheet.text(x + style.small * 3.0, middle + CAP * style.small / 2, series.label, style.small, palette.ink)
            x += key_width(sheet, series, style) + style.small * 1.4
        top += style.small * 1.5


def _paint_grid(sheet: Sheet, spec: PlotSpec, grid: Grid, left: float, style: Style, palette: Palette) -> None:
    frame, reach = grid.frame, style.base * 0.35
    thin = style.hairline
    for value, text in grid.x_ticks:
        x = float(grid.x(np.array(value)))
        sheet.line(x, frame.top(), x, frame.bottom(), palette.grid, thin)
        sheet.line(x, frame.bottom(), x, frame.bottom() + reach, palette.frame, thin)
        baseline = frame.bottom() + reach + style.small * (0.25 + CAP)
        sheet.text(x, baseline, text, style.small, palette.muted, align="center")
    for value, text in grid.y_ticks:
        y = float(grid.y(np.array(value)))
        zero = value == 0 and spec.y_range[0] < 0 < spec.y_range[1]
        sheet.line(frame.left(), y, frame.right(), y, palette.frame if zero else palette.grid, thin)
        sheet.line(frame.left() - reach, y, frame.left(), y, palette.frame, thin)
        x = frame.left() - reach - style.small * 0.25
        sheet.text(x, y + CAP * style.small / 2, text, style.small, palette.muted, align="right")
    sheet.rect(frame, "", palette.frame, thin)
    width = sheet.width(spec.x_label, style.small)
    x = max(left, min(frame.center().x() - width / 2, frame.right() - width))
    baseline = frame.bottom() + reach + style.small * (0.25 + 1.3 + CAP)
    label = sheet.fit(spec.x_label, style.small, frame.right() - x + style.base * 0.4)
    sheet.text(x, baseline, label, style.small, palette.ink)
    name = spec.y_name(sheet.width(spec.y_label, style.small) <= frame.height())
    text = sheet.fit(name, style.small, frame.height())
    if text:
        sheet.turned_text(left + CAP * style.small / 2, frame.center().y(), text, style.small, palette.ink)


def _corners(symbol: Symbol, x: float, y: float, radius: float) -> list[tuple[float, float]]:
    if symbol == "square":
        side = radius * 0.86
        return [(x - side, y - side), (x + side, y - side), (x + side, y + side), (x - side, y + side)]
    if symbol == "diamond":
        side = radius * 1.2
        return [(x, y - side), (x + side, y), (x, y + side), (x - side, y)]
    return [(x, y - radius * 1.15), (x + radius * 1.05, y + radius * 0.75), (x - radius * 1.05, y + radius * 0.75)]


def _paint_mark(sheet: Sheet, mark: Mark, grid: Grid, style: Style, palette: Palette, stale: bool) -> None:
    x, y = mark_at(mark, grid)
    ink = _ink(mark.role, palette, stale)
    radius, edge = style.base * 0.4, style.curve * 0.75
    fill, stroke = (ink, palette.ground) if mark.filled else (palette.ground, ink)
    if mark.filled:
        # A rim of paper keeps the mark apart from the curve it sits on.
        radius += edge / 2
    if mark.symbol == "circle":
        sheet.ellipse(x, y, radius, fill, stroke, edge)
    else:
        sheet.polygon(_corners(mark.symbol, x, y, radius), fill, stroke, edge)
