"""The strip: all of the sunlight on one bar, cut where it goes before the limit is reached."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QRectF

from app.figures.hatch import fill_area
from app.figures.palette import Palette
from app.figures.sheet import CAP, Sheet
from app.figures.spec import Segment
from app.figures.spread import needed, spread
from app.figures.style import Style


@dataclass(frozen=True)
class Label:
    """A label above the strip: its text, its left edge and width, its row (0 is next to the strip), and where its
    leader passes the lower row."""

    text: str
    left: float
    width: float
    row: int
    passage: float


@dataclass(frozen=True)
class Strip:
    """Where the pieces of the strip and their labels stand; `rows` of labels above it."""

    edges: tuple[float, ...]
    labels: tuple[Label, ...]
    inside: tuple[bool, ...]
    rows: int


def label_gap(style: Style) -> float:
    """Least distance between two labels [units]."""
    return style.base * 0.75


def layout_strip(sheet: Sheet, segments: Sequence[Segment], left: float, right: float, style: Style) -> Strip:
    """Place the pieces and labels of the strip.

    Parameters
    ----------
    sheet : Sheet
        Measures texts.
    segments : sequence of Segment
        Pieces in order.
    left, right : float
        Ends of the strip [units].
    style : Style
        Sizes.

    Returns
    -------
    Strip
        Labels never overlap and never leave the strip's span; names get short, then a second row is opened, and
        only then is a name cut.
    """
    total = sum(max(0.0, part.share) for part in segments) or 1.0
    edges = [left]
    for part in segments:
        edges.append(edges[-1] + (right - left) * max(0.0, part.share) / total)
    edges[-1] = right
    inside = tuple(
        sheet.width(part.value_text, style.base, True) + style.base * 0.8 <= edges[i + 1] - edges[i]
        for i, part in enumerate(segments)
    )
    full = [part.label if inside[i] else f"{part.label} {part.value_text}" for i, part in enumerate(segments)]
    short = [part.short if inside[i] else f"{part.short} {part.value_text}" for i, part in enumerate(segments)]
    labels = _one_row(sheet, full, short, edges, style) or _two_rows(sheet, full, short, edges, style)
    return Strip(tuple(edges), labels, inside, 1 + max((label.row for label in labels), default=0))


def _centres(edges: Sequence[float]) -> list[float]:
    return [(a + b) / 2 for a, b in itertools.pairwise(edges)]


def _one_row(
    sheet: Sheet, full: list[str], short: list[str], edges: list[float], style: Style
) -> tuple[Label, ...] | None:
    gap, room = label_gap(style), edges[-1] - edges[0]
    texts = list(full)
    widths = [sheet.width(text, style.small) for text in texts]
    # Names that stick out most from their piece get short first.
    spare = sorted(range(len(texts)), key=lambda i: edges[i + 1] - edges[i] - widths[i])
    for index in spare:
        if needed(widths, gap) <= room and not _strays(widths, edges, gap):
            break
        texts[index] = short[index]
        widths[index] = sheet.width(short[index], style.small)
    if needed(widths, gap) > room:
        return None
    centres = _centres(edges)
    lefts = spread(widths, centres, edges[0], edges[-1], gap)
    return tuple(
        Label(text, x, width, 0, centre) for text, x, width, centre in zip(texts, lefts, widths, centres, strict=True)
    )


def _strays(widths: list[float], edges: list[float], gap: float) -> bool:
    """Whether a label would end up beside the middle of its own piece."""
    centres = _centres(edges)
    lefts = spread(widths, centres, edges[0], edges[-1], gap)
    return any(x > centre or x + width < centre for x, width, centre in zip(lefts, widths, centres, strict=True))


def _two_rows(sheet: Sheet, full: list[str], short: list[str], edges: list[float], style: Style) -> tuple[Label, ...]:
    """Labels of the narrow pieces go up; their leaders are narrow obstacles to the row below."""
    gap, room, low, high = label_gap(style), edges[-1] - edges[0], edges[0], edges[-1]
    centres = _centres(edges)
    count = len(short)
    by_width = sorted(range(count), key=lambda i: edges[i + 1] - edges[i])
    upper = set(by_width[: (count + 1) // 2])
    texts = [
        full[i] if sheet.width(full[i], style.small) <= edges[i + 1] - edges[i] else short[i] for i in range(count)
    ]
    leader = style.base * 0.2
    rows = ([i for i in range(count) if i in upper], [i for i in range(count) if i not in upper])
    for row in rows:
        others = 0.0 if row is rows[0] else len(rows[0]) * (leader + gap)
        most = (room - others - gap * (len(row) - 1)) / max(1, len(row))
        if needed([sheet.width(texts[i], style.small) for i in row], gap) > room - others:
            for i in row:
                texts[i] = sheet.fit(short[i], style.small, most)
    widths = [sheet.width(text, style.small) for text in texts]
    lower_widths = [leader if i in upper else widths[i] for i in range(count)]
    lower = spread(lower_widths, centres, low, high, gap)
    passages = [lower[i] + lower_widths[i] / 2 for i in range(count)]
    high_lefts = dict(
        zip(rows[0], spread([widths[i] for i in rows[0]], [passages[i] for i in rows[0]], low, high, gap), strict=True)
    )
    return tuple(
        Label(texts[i], high_lefts[i], widths[i], 1, passages[i])
        if i in upper
        else Label(texts[i], lower[i], widths[i], 0, centres[i])
        for i in range(count)
    )


def paint_strip(
    sheet: Sheet,
    segments: Sequence[Segment],
    strip: Strip,
    top: float,
    height: float,
    style: Style,
    palette: Palette,
    picked: str | None = None,
    hovered: str | None = None,
) -> list[tuple[str, QRectF]]:
    """Draw the strip with its upper edge at `top`, and its labels above.

    Returns
    -------
    list of (str, QRectF)
        Key and area of each piece.
    """
    hits = []
    for i, part in enumerate(segments):
        area = QRectF(strip.edges[i], top, strip.edges[i + 1] - strip.edges[i], height)
        hits.append((part.key, area))
        tone = palette.tones[part.role]
        if area.width() > 0:
            fill_area(sheet, area, tone, pitch=style.base * 0.5, outline=style.outline, kind="segment")
        if strip.inside[i]:
            _plated(sheet, area, part.value_text, style, tone.fill, tone.on_fill)
        _paint_label(sheet, strip, i, top, style, palette)
    # Last, so that no neighbour covers the frame.
    for key, area in hits:
        if key in (picked, hovered):
            edge = style.outline * (2.5 if key == picked else 1.5)
            sheet.rect(area.adjusted(-edge, -edge, edge, edge), "", palette.ink, edge)
    return hits


def _plated(sheet: Sheet, area: QRectF, text: str, style: Style, fill: str, ink: str) -> None:
    """A text upon a hatched area, on a plate of the plain fill."""
    width = sheet.width(text, style.base, True)
    x, y = area.center().x(), area.center().y()
    half = style.base * 0.62
    plate = QRectF(x - width / 2 - style.base * 0.25, y - half, width + style.base * 0.5, 2 * half)
    sheet.rect(plate, fill)
    sheet.text(x, y + CAP * style.base / 2, text, style.base, ink, bold=True, align="center")


def label_pitch(style: Style) -> float:
    """Height of one row of labels [units]."""
    return style.small * 1.26


def leader_height(style: Style) -> float:
    """Blank height between the lowest labels and the strip, for the leaders [units]."""
    return style.base * 0.58


def _paint_label(sheet: Sheet, strip: Strip, index: int, top: float, style: Style, palette: Palette) -> None:
    label = strip.labels[index]
    low, high = strip.edges[index], strip.edges[index + 1]
    gap = leader_height(style)
    baseline = top - gap - style.small * 0.12 - label.row * label_pitch(style)
    sheet.text(label.left, baseline, label.text, style.small, palette.ink)
    centre = (low + high) / 2
    if label.row == 0 and low <= label.left and label.left + label.width <= high:
        return
    reach = style.small * 0.3
    x = max(label.left + reach, min(centre, label.left + label.width - reach))
    bottom = top - style.outline
    if label.row == 0:
        sheet.line(x, top - gap * 0.85, centre, bottom, palette.muted, style.hairline)
        return
    start = baseline + style.small * 0.26
    sheet.line(label.passage, start, label.passage, top - gap * 0.85, palette.muted, style.hairline)
    sheet.line(label.passage, top - gap * 0.85, centre, bottom, palette.muted, style.hairline)
