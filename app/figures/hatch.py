"""Areas filled with a tone: ground, hatch and outline.

The hatch is drawn as plain lines cut at the area's edge: pattern brushes come out differently on every device.
"""

from __future__ import annotations

from functools import lru_cache

from PySide6.QtCore import QLineF, QRectF

from app.figures.palette import Hatch, Tone
from app.figures.sheet import Sheet

#: Size of a dot, as a share of the pitch.
DOT = 0.34


def slanted(area: QRectF, pitch: float, rising: bool) -> list[QLineF]:
    """Lines at 45° across an area, `pitch` apart along x, each cut at the area's edge."""
    left, top, width, height = area.left(), area.top(), area.width(), area.height()
    parts = []
    # On each line x - left + y - top is constant; walk over that constant.
    offset = pitch / 2
    while offset < width + height:
        x1, y1 = (offset, 0.0) if offset <= width else (width, offset - width)
        x2, y2 = (0.0, offset) if offset <= height else (offset - height, height)
        if rising:
            parts.append(QLineF(left + x1, top + y1, left + x2, top + y2))
        else:
            parts.append(QLineF(left + width - x1, top + y1, left + width - x2, top + y2))
        offset += pitch
    return parts


def _level(area: QRectF, pitch: float) -> list[QLineF]:
    count = max(1, int(area.height() / pitch))
    gap = area.height() / (count + 1)
    rows = (area.top() + gap * (index + 1) for index in range(count))
    return [QLineF(area.left(), y, area.right(), y) for y in rows]


def _dots(area: QRectF, pitch: float, size: float) -> list[QLineF]:
    rows = max(1, int(area.height() / pitch))
    gap = area.height() / rows
    parts = []
    for row in range(rows):
        y = area.top() + gap * (row + 0.5)
        x = area.left() + pitch * (0.5 if row % 2 else 1.0)
        while x + size < area.right():
            parts.append(QLineF(x - size / 2, y, x + size / 2, y))
            x += pitch
    return parts


@lru_cache(maxsize=256)
def _kept(x: float, y: float, width: float, height: float, hatch: Hatch, pitch: float) -> list[QLineF]:
    area = QRectF(x, y, width, height)
    if hatch == "level":
        return _level(area, pitch)
    if hatch == "dots":
        return _dots(area, pitch, pitch * DOT)
    return slanted(area, pitch * 1.3, hatch == "rising")


def hatch_lines(area: QRectF, hatch: Hatch, pitch: float) -> list[QLineF]:
    """Lines of a hatch inside an area.

    Parameters
    ----------
    area : QRectF
        Where [units].
    hatch : {"plain", "rising", "falling", "level", "dots"}
        Which pattern.
    pitch : float
        Distance between lines [units].

    Returns
    -------
    list of QLineF
        None of them leaves the area.
    """
    if hatch == "plain" or area.width() <= 0 or area.height() <= 0:
        return []
    return _kept(area.x(), area.y(), area.width(), area.height(), hatch, pitch)


def fill_area(
    sheet: Sheet,
    area: QRectF,
    tone: Tone,
    *,
    pitch: float,
    outline: float,
    dash: tuple[float, ...] = (),
    kind: str = "",
) -> None:
    """Draw an area in a tone.

    Parameters
    ----------
    sheet : Sheet
        Where to draw.
    area : QRectF
        What to fill [units].
    tone : Tone
        Colours and hatch.
    pitch : float
        Distance between hatch lines [units].
    outline : float
        Width of the edge [units].
    dash : tuple of float
        Dashes of the edge [units]; empty for a solid one.
    kind : str
        Name in the sheet's record.
    """
    if sheet.target == "screen" and not dash:
        # On whole pixels the hatch stays within the edge, so that edge and ground can come first, in one go.
        sheet.rect(area, tone.fill, tone.outline, outline, kind=kind)
    else:
        sheet.rect(area, tone.fill, kind=kind)
    inner = area.adjusted(outline, outline, -outline, -outline)
    if tone.hatch == "dots":
        sheet.lines(hatch_lines(inner, "dots", pitch), tone.mark, pitch * DOT)
    else:
        sheet.lines(hatch_lines(inner, tone.hatch, pitch), tone.mark, max(outline * 0.8, pitch * 0.14))
    if sheet.target != "screen" or dash:
        sheet.rect(area, "", tone.outline, outline, dash)
