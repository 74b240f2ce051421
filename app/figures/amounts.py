"""The amounts beside the bars of the staircase: never over a neighbour, never off the page."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from PySide6.QtCore import QRectF

from app.figures.palette import Palette, Tone
from app.figures.sheet import CAP, Sheet
from app.figures.spec import Step
from app.figures.style import Style

#: Distance between amount and remark, in type sizes.
_GAP = 0.6


@dataclass(frozen=True)
class Axis:
    """The common axis of the staircase.

    Parameters
    ----------
    low, high : float
        What it spans in data units [%].
    left : float
        Where zero stands, and so where the totals begin [units].
    start, right : float
        Where `low` and `high` stand; `start` lies right of `left` where the axis is broken in between [units].
    end : float
        How far texts may reach [units].
    """

    low: float
    high: float
    left: float
    start: float
    right: float
    end: float

    @property
    def broken(self) -> bool:
        """Whether a piece between zero and `low` is cut out."""
        return self.start > self.left

    def at(self, value: float) -> float:
        """Position of a value, kept within the axis; a value that is no number stands at its left end."""
        if not math.isfinite(value):
            return self.left
        if value < self.low and self.broken:
            return self.left + (self.start - self.left) * max(0.0, value) / self.low
        share = (value - self.low) / ((self.high - self.low) or 1.0)
        return self.start + (self.right - self.start) * min(1.0, max(0.0, share))


Place = Literal["right", "left", "inside", "far"]

#: Where amount and remark may stand together, and where they may stand apart, each in order of preference; "far" is
#: right of the bar too, but beyond the axis.
_TOGETHER: tuple[Place, ...] = ("right", "left", "inside", "far")
_APART: tuple[tuple[Place, Place], ...] = (
    ("far", "left"),
    ("left", "far"),
    ("left", "inside"),
    ("far", "inside"),
    ("inside", "left"),
    ("inside", "far"),
)


@dataclass(slots=True)
class _Spot:
    """Surroundings of one bar: how far it reaches with its marker, what it may be written upon, and with what."""

    sheet: Sheet
    bar: QRectF
    low: float
    high: float
    axis: Axis
    tone: Tone
    style: Style
    palette: Palette

    @property
    def pad(self) -> float:
        return self.style.base * 0.45

    def room(self, place: Place) -> float:
        """Width a text may take there [units]."""
        if place == "inside":
            return self.bar.width() - 2 * self.pad
        if place == "left":
            return self.low - self.axis.left - self.pad
        return (self.axis.right if place == "right" else self.axis.end) - self.high - self.pad

    def write(self, place: Place, value: str, detail: str) -> None:
        """Write an amount, a remark, or both side by side; inside a bar the hatch is cleared first."""
        base, small = self.style.base, self.style.small
        first = self.sheet.width(value, base, True) if value else 0.0
        gap = base * _GAP if value and detail else 0.0
        whole = first + gap + (self.sheet.width(detail, small) if detail else 0.0)
        ink, muted = self.palette.ink, self.palette.muted
        if place == "inside":
            x = self.bar.right() - self.pad - whole
            ink = muted = self._cleared(whole + 1.5 * self.pad)
        else:
            x = self.low - self.pad - whole if place == "left" else self.high + self.pad
        # Both stand on one line, whatever their sizes.
        baseline = self.bar.center().y() + CAP * base / 2
        if value:
            self.sheet.text(x, baseline, value, base, ink, bold=True)
        if detail:
            self.sheet.text(x + first + gap, baseline, detail, small, muted)

    def _cleared(self, width: float) -> str:
        bar, edge = self.bar, self.style.outline * 1.5
        half = min(self.style.base * 0.62, bar.height() / 2 - self.style.outline)
        right = bar.right() - edge
        left = max(bar.left() + edge, right - width)
        if self.tone.hatch != "plain":
            self.sheet.rect(QRectF(left, bar.center().y() - half, right - left, 2 * half), self.tone.fill)
        return self.tone.on_fill


def paint_amount(
    sheet: Sheet,
    step: Step,
    bar: QRectF,
    reach: tuple[float, float],
    axis: Axis,
    tone: Tone,
    style: Style,
    palette: Palette,
) -> None:
    """Draw amount and remark of a row: side by side where one place holds both, else apart, else the remark is cut.

    Parameters
    ----------
    sheet, style, palette
        Where and how to draw.
    step : Step
        The row.
    bar : QRectF
        Its bar [units].
    reach : (float, float)
        How far left and right the bar reaches with its marker [units].
    axis : Axis
        The common axis.
    tone : Tone
        Colours of the bar as drawn.
    """
    spot = _Spot(sheet, bar, *reach, axis, tone, style, palette)
    value = sheet.width(step.value_text, style.base, True)
    detail = sheet.width(step.detail_text, style.small) if step.detail_text else 0.0
    gap = style.base * _GAP
    whole = value + (gap + detail if detail else 0.0)
    for place in _TOGETHER:
        if whole <= spot.room(place):
            spot.write(place, step.value_text, step.detail_text)
            return
    for first, second in _APART if detail else ():
        if value <= spot.room(first) and detail <= spot.room(second):
            spot.write(first, step.value_text, "")
            spot.write(second, "", step.detail_text)
            return
    # Nothing holds all of it: the amount matters more than the remark.
    best = max(_TOGETHER, key=spot.room)
    spot.write(best, step.value_text, sheet.fit(step.detail_text, style.small, spot.room(best) - value - gap))
