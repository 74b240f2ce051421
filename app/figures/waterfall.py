"""The waterfall: sunlight as one strip on top, and below it the limit's share magnified into a staircase."""

from __future__ import annotations

from PySide6.QtCore import QRectF

from app.figures.blocks import paint_banner, paint_legend, paint_lines
from app.figures.palette import Palette, faded
from app.figures.sheet import CAP, Sheet
from app.figures.spec import WaterfallSpec
from app.figures.staircase import paint_break, paint_rows
from app.figures.strip import paint_strip
from app.figures.style import Style
from app.figures.ticks import axis_ticks, tick_texts
from app.figures.waterfall_layout import Layout, axis_height, layout_waterfall

Hits = list[tuple[str, QRectF]]


def paint_waterfall(
    sheet: Sheet,
    spec: WaterfallSpec,
    rect: QRectF,
    style: Style,
    palette: Palette,
    picked: str | None = None,
    hovered: str | None = None,
) -> Hits:
    """Draw the waterfall.

    Parameters
    ----------
    sheet : Sheet
        Where to draw.
    spec : WaterfallSpec
        What to show.
    rect : QRectF
        Area to fill [units].
    style : Style
        Sizes.
    palette : Palette
        Colours.
    picked, hovered : str, optional
        Keys of the line that is picked and of the one under the pointer.

    Returns
    -------
    list of (str, QRectF)
        Key and area of every piece of the strip and of every row, for hit-testing. The areas do not overlap.
    """
    layout = layout_waterfall(sheet, spec, rect, style)
    style, texts = layout.texts.style, layout.texts
    shown = faded(palette) if spec.stale else palette
    if palette.paper == palette.ground:
        sheet.rect(rect, palette.paper)
    _paint_magnifier(sheet, spec, layout, palette)
    _paint_heads(sheet, rect, layout, palette)
    top, height = layout.strip_top, layout.strip_height
    hits = paint_strip(sheet, spec.segments, texts.strip, top, height, style, shown, picked, hovered)
    rows = _rows(spec, rect, layout)
    for key, area in rows:
        if key == picked:
            sheet.rect(area, palette.picked)
            edge = QRectF(area.left() - style.base * 0.3, area.top(), style.base * 0.25, area.height())
            sheet.rect(edge, palette.ink)
        elif key == hovered:
            sheet.rect(area, palette.hovered)
    _paint_axis(sheet, spec, layout, palette)
    paint_rows(sheet, spec.steps, texts.names, texts.axis, layout.rows, style, shown)
    _paint_feet(sheet, layout, rect.left() + style.margin, palette, shown)
    return hits + rows


def _rows(spec: WaterfallSpec, rect: QRectF, layout: Layout) -> Hits:
    margin = layout.texts.style.margin
    left, width = rect.left() + margin, rect.width() - 2 * margin
    edges = layout.rows
    return [
        (step.key, QRectF(left, top, width, bottom - top))
        for step, top, bottom in zip(spec.steps, edges, edges[1:], strict=False)
    ]


def _paint_heads(sheet: Sheet, rect: QRectF, layout: Layout, palette: Palette) -> None:
    texts = layout.texts
    style = texts.style
    left, room = rect.left() + style.margin, rect.width() - 2 * style.margin
    top = paint_banner(sheet, left, rect.top() + style.margin, room, texts.banner, style, palette)
    lines, size = texts.title
    top = paint_lines(sheet, left, top, lines, size, palette.ink, bold=True)
    lines, size = texts.strip_title
    paint_lines(sheet, left, top, lines, size, palette.muted)
    lines, size = texts.steps_title
    left, top = texts.axis.left + style.base * 0.5, layout.panel_top + style.base * 0.15
    paint_lines(sheet, left, top, lines, size, palette.ink, bold=True)


def _paint_magnifier(sheet: Sheet, spec: WaterfallSpec, layout: Layout, palette: Palette) -> None:
    """The wedge from the strip's last piece down to the panel that magnifies it."""
    if not spec.segments:
        return
    axis, strip, style = layout.texts.axis, layout.texts.strip, layout.texts.style
    limit = spec.segments[-1].share
    start, stop = strip.edges[-2], strip.edges[-1]
    top, bottom, foot = layout.strip_top + layout.strip_height, layout.panel_top, layout.foot
    high = axis.at(limit)
    sheet.polygon([(start, top), (stop, top), (high, bottom), (axis.left, bottom)], palette.panel)
    sheet.rect(QRectF(axis.left, bottom, axis.right - axis.left, foot - bottom), palette.panel)
    for upper, lower in ((start, axis.left), (stop, high)):
        sheet.line(upper, top, lower, bottom, palette.frame, style.hairline)


def _paint_axis(sheet: Sheet, spec: WaterfallSpec, layout: Layout, palette: Palette) -> None:
    axis, style, foot = layout.texts.axis, layout.texts.style, layout.foot
    size, thin, reach = style.small, style.hairline, style.base * 0.3
    room = sheet.width("00.0", size) + size * 1.4
    ticks = axis_ticks(axis.low, axis.high, max(2, min(9, int((axis.right - axis.start) / room))))
    texts = tick_texts(ticks)
    if axis.broken:
        ticks, texts = [0.0, *ticks], ["0", *texts]
    baseline = foot + reach + size * (0.3 + CAP)
    for value, text in zip(ticks, texts, strict=True):
        x = axis.at(value)
        if x > axis.left + thin:
            sheet.line(x, layout.rows[0], x, foot, palette.grid, thin)
        sheet.line(x, foot, x, foot + reach, palette.frame, thin)
        half = sheet.width(text, size) / 2
        sheet.text(min(x, axis.end - half), baseline, text, size, palette.muted, align="center")
    sheet.line(axis.left, foot, axis.right, foot, palette.frame, thin)
    sheet.line(axis.left, layout.panel_top, axis.left, foot, palette.frame, thin)
    if axis.broken:
        paint_break(sheet, (axis.left + axis.start) / 2, foot, style.base * 0.6, style, palette)
    # Centred under the axis where it fits, else shifted left under the names.
    width = sheet.width(spec.axis_label, size)
    x = max(axis.left - layout.texts.names.width, min((axis.left + axis.right - width) / 2, axis.end - width))
    # Half a unit of slack: the room was reckoned from the very width it is compared with.
    label = sheet.fit(spec.axis_label, size, axis.end - x + 0.5)
    sheet.text(x, baseline + size * 1.22, label, size, palette.muted)


def _paint_feet(sheet: Sheet, layout: Layout, left: float, palette: Palette, shown: Palette) -> None:
    texts, style = layout.texts, layout.texts.style
    top = layout.foot + axis_height(style)
    if texts.legend:
        top = paint_legend(sheet, left, top + style.base * 0.3, texts.legend, style, shown)
    if texts.caption:
        paint_lines(sheet, left, top + style.base * 0.3, texts.caption, style.caption, palette.muted)
