"""Blocks of text that both charts share: headline, banner, legend, small print."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QRectF

from app.figures.hatch import fill_area
from app.figures.palette import Palette
from app.figures.sheet import CAP, Sheet
from app.figures.spec import Role
from app.figures.style import Style

#: Line pitch of running text, in type sizes.
LEADING = 1.26


def heading(
    sheet: Sheet, text: str, size: float, floor: float, room: float, *, bold: bool = True, most: int = 2
) -> tuple[list[str], float]:
    """Set a headline: a little smaller, down to `floor`, so that it stays on one line, else on several.

    Returns
    -------
    list of str, float
        Lines (none for an empty text) and type size [units].
    """
    if not text:
        return [], size
    trial = size
    for share in (1.0, 0.92, 0.84):
        trial = max(floor, size * share)
        if sheet.width(text, trial, bold) <= room:
            return [text], trial
    return sheet.type.wrap(text, trial, room, most, bold), trial


def caption_lines(sheet: Sheet, parts: Sequence[str], style: Style, room: float) -> list[str]:
    """Set the small print: parts that fit side by side share a line, and long ones are broken."""
    joined: list[str] = []
    for part in parts:
        together = f"{joined[-1]} · {part}" if joined else part
        if joined and sheet.width(together, style.caption) <= room:
            joined[-1] = together
        else:
            joined.append(part)
    return [line for part in joined for line in sheet.type.wrap(part, style.caption, room, 3, even=False)]


def paint_lines(
    sheet: Sheet,
    x: float,
    top: float,
    lines: Sequence[str],
    size: float,
    colour: str,
    *,
    bold: bool = False,
    leading: float = LEADING,
) -> float:
    """Draw lines of text below `top`; returns the lower edge [units]."""
    pitch = size * leading
    for line in lines:
        sheet.text(x, top + pitch / 2 + CAP * size / 2, line, size, colour, bold=bold)
        top += pitch
    return top


def banner_lines(sheet: Sheet, text: str, room: float, style: Style) -> list[str]:
    """Set the text of the banner of a picture that is out of date; none for an empty text."""
    return sheet.type.wrap(text, style.small, room - style.base * 1.4, 3, True) if text else []


def banner_height(style: Style, lines: int) -> float:
    """Height of the banner with the blank below it [units]."""
    return style.small * (0.4 + LEADING * lines) + style.base * 0.4 if lines else 0.0


def paint_banner(
    sheet: Sheet, left: float, top: float, room: float, lines: Sequence[str], style: Style, palette: Palette
) -> float:
    """Draw the banner that says why the picture is out of date; returns where the next thing begins [units]."""
    if not lines:
        return top
    whole = banner_height(style, len(lines))
    height = whole - style.base * 0.4
    sheet.rect(QRectF(left, top, room, height), palette.warn_fill)
    sheet.rect(QRectF(left, top, style.base * 0.3, height), palette.warn_ink)
    x, first = left + style.base * 0.9, top + style.small * 0.2
    paint_lines(sheet, x, first, lines, style.small, palette.warn_ink, bold=True)
    return top + whole


def legend_rows(
    sheet: Sheet, entries: Sequence[tuple[Role, str]], room: float, style: Style
) -> list[list[tuple[Role, str, float]]]:
    """Break a legend into rows; each entry comes with its width [units]."""
    rows: list[list[tuple[Role, str, float]]] = []
    x = room + 1.0
    for role, name in entries:
        swatch, space = style.small * 1.5, style.small * 1.4
        text = sheet.fit(name, style.small, room - swatch * 1.3)
        width = swatch * 1.3 + sheet.width(text, style.small)
        if x + width > room or not rows:
            rows.append([])
            x = 0.0
        rows[-1].append((role, text, width))
        x += width + space
    return rows


def paint_legend(
    sheet: Sheet,
    left: float,
    top: float,
    rows: Sequence[Sequence[tuple[Role, str, float]]],
    style: Style,
    palette: Palette,
) -> float:
    """Draw legend rows below `top`; returns the lower edge [units]."""
    pitch = style.small * 1.4
    for row in rows:
        x, middle = left, top + pitch / 2
        for role, name, width in row:
            high = style.small * 0.82
            swatch = QRectF(x, middle - high / 2, style.small * 1.5, high)
            fill_area(sheet, swatch, palette.tones[role], pitch=style.base * 0.42, outline=style.outline)
            sheet.text(x + style.small * 1.95, middle + CAP * style.small / 2, name, style.small, palette.ink)
            x += width + style.small * 1.4
        top += pitch
    return top
