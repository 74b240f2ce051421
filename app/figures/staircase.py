"""The staircase: one row a loss, from the limit down to the cell."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QRectF

from app.figures.amounts import Axis, paint_amount
from app.figures.hatch import fill_area
from app.figures.palette import Palette, Tone, lightened
from app.figures.sheet import CAP, Sheet
from app.figures.spec import Step
from app.figures.style import Style


@dataclass(frozen=True)
class Names:
    """Names of the rows, set in a column: lines and type size of each, and the column's width."""

    lines: tuple[tuple[str, ...], ...]
    sizes: tuple[float, ...]
    width: float


def layout_names(sheet: Sheet, steps: Sequence[Step], room: float, style: Style, most_lines: int = 2) -> Names:
    """Set the names of the rows: on one line, else wrapped, else smaller, and cut only as a last resort.

    Parameters
    ----------
    sheet : Sheet
        Measures texts.
    steps : sequence of Step
        Rows.
    room : float
        Widest column allowed [units].
    style : Style
        Sizes.
    most_lines : int
        As many lines as a row may take.

    Returns
    -------
    Names
        The set names.
    """
    lines, sizes = [], []
    for step in steps:
        size = style.base
        parts = sheet.type.wrap(step.label, size, room, most_lines, step.total)
        while any(part.endswith("…") for part in parts) and size > style.floor:
            size = max(style.floor, size - max(0.5, 0.05 * style.base))
            parts = sheet.type.wrap(step.label, size, room, most_lines, step.total)
        lines.append(tuple(parts))
        sizes.append(size)
    width = max(
        sheet.width(part, size, step.total)
        for parts, size, step in zip(lines, sizes, steps, strict=True)
        for part in parts
    )
    return Names(tuple(lines), tuple(sizes), min(room, width))


def row_needs(names: Names, style: Style) -> list[float]:
    """Least height of each row [units]."""
    return [
        max(style.base * 1.16, len(parts) * size * 1.14 + style.base * 0.12)
        for parts, size in zip(names.lines, names.sizes, strict=True)
    ]


def share_out(needs: Sequence[float], room: float) -> list[float]:
    """Share a height among rows: all alike where that serves each row's need, else the needy ones get theirs.

    Parameters
    ----------
    needs : sequence of float
        Least heights [units].
    room : float
        Height to share [units].

    Returns
    -------
    list of float
        Heights that add up to `room`; in proportion to the needs where the room is too small for them.
    """
    total = sum(needs)
    if total >= room:
        return [need * room / total for need in needs]
    rest, count = room, len(needs)
    level = 0.0
    for need in sorted(needs, reverse=True):
        level = rest / count
        if need <= level:
            break
        rest -= need
        count -= 1
    return [max(need, level) for need in needs]


def paint_rows(
    sheet: Sheet,
    steps: Sequence[Step],
    names: Names,
    axis: Axis,
    tops: Sequence[float],
    style: Style,
    palette: Palette,
) -> None:
    """Draw the rows.

    Parameters
    ----------
    sheet, style, palette
        Where and how to draw.
    steps, names, axis
        What to draw.
    tops : sequence of float
        Upper edge of each row, and the lower edge of the last [units].
    """
    bars = [_bar(step, axis, tops[i], tops[i + 1], style) for i, step in enumerate(steps)]
    for above, below, step in zip(bars, bars[1:], steps, strict=False):
        x = axis.at(step.end)
        sheet.line(x, above.bottom(), x, below.top(), palette.frame, style.hairline)
    for i, (step, bar) in enumerate(zip(steps, bars, strict=True)):
        tone = palette.tones[step.role]
        if step.assumed:
            tone = lightened(tone, palette.ground)
        _paint_name(sheet, step, names, i, (tops[i] + tops[i + 1]) / 2, axis.left - style.base * 0.6, palette)
        reach = _paint_bar(sheet, step, bar, tone, axis, style, palette)
        paint_amount(sheet, step, bar, reach, axis, tone, style, palette)


def _bar(step: Step, axis: Axis, top: float, bottom: float, style: Style) -> QRectF:
    height = bottom - top
    # At least as tall as the digits that may stand inside.
    thick = min(max(height * 0.66, style.base), height * 0.92, style.base * 2.6)
    first = axis.left if step.total else axis.at(step.start)
    last = axis.at(step.end)
    x, width = min(first, last), abs(last - first)
    return QRectF(x, (top + bottom - thick) / 2, width, thick)


def _paint_name(
    sheet: Sheet, step: Step, names: Names, index: int, middle: float, right: float, palette: Palette
) -> None:
    parts, size = names.lines[index], names.sizes[index]
    pitch = size * 1.14
    baseline = middle + CAP * size / 2 - pitch * (len(parts) - 1) / 2
    for part in parts:
        sheet.text(right, baseline, part, size, palette.ink, bold=step.total, align="right")
        baseline += pitch


def _paint_bar(
    sheet: Sheet, step: Step, bar: QRectF, tone: Tone, axis: Axis, style: Style, palette: Palette
) -> tuple[float, float]:
    """Draw one bar; returns how far left and right it reaches with its marker [units]."""
    thin = style.outline * 1.6
    dash = (style.base * 0.34, style.base * 0.24) if step.assumed else ()
    if bar.width() < thin:
        x = axis.at(step.end)
        area = QRectF(min(max(x - thin / 2, axis.left), axis.right - thin), bar.top(), thin, bar.height())
        if step.assumed:
            sheet.rect(area, "", kind="bar")
            middle = area.center().x()
            sheet.line(middle, area.top(), middle, area.bottom(), tone.outline, thin, dash)
        else:
            sheet.rect(area, tone.outline, kind="bar")
        bar = area
    else:
        edge = style.outline * (1.4 if step.assumed else 1.0)
        fill_area(sheet, bar, tone, pitch=style.base * 0.5, outline=edge, dash=dash, kind="bar")
    if step.total and axis.broken and axis.at(step.end) >= axis.start:
        paint_break(sheet, (axis.left + axis.start) / 2, bar.center().y(), bar.height() * 1.3, style, palette)
    if not step.total and step.end > step.start:
        return bar.left(), _paint_gain(sheet, bar, tone, style)
    return bar.left(), bar.right()


def _paint_gain(sheet: Sheet, bar: QRectF, tone: Tone, style: Style) -> float:
    """An arrow head at the upper end of a gain; returns its tip."""
    half = min(bar.height() * 0.42, style.base * 0.55)
    left, middle = bar.right() + style.outline, bar.center().y()
    tip = left + half * 1.25
    sheet.polygon([(left, middle - half), (tip, middle), (left, middle + half)], tone.outline)
    return tip


def paint_break(sheet: Sheet, x: float, y: float, height: float, style: Style, palette: Palette) -> None:
    """Two slanted strokes that say "cut here", centred at (x, y)."""
    half, slant = height / 2, style.base * 0.22
    gap = style.base * 0.34
    corners = [
        (x - gap / 2 - slant, y + half),
        (x - gap / 2 + slant, y - half),
        (x + gap / 2 + slant, y - half),
        (x + gap / 2 - slant, y + half),
    ]
    sheet.polygon(corners, palette.ground)
    for shift in (-gap / 2, gap / 2):
        sheet.line(x + shift - slant, y + half, x + shift + slant, y - half, palette.frame, style.outline)
