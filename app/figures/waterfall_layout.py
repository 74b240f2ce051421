"""Where everything on the waterfall stands, and how small it must be set."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from PySide6.QtCore import QRectF

from app.figures.amounts import Axis
from app.figures.blocks import LEADING, banner_height, banner_lines, caption_lines, heading, legend_rows
from app.figures.sheet import Sheet
from app.figures.spec import Role, WaterfallSpec
from app.figures.staircase import Names, layout_names, row_needs, share_out
from app.figures.strip import Strip, label_pitch, layout_strip, leader_height
from app.figures.style import Style

#: The names of the rows take at most this share of the width.
_NAMES_SHARE = 0.34
#: Least heights of the strip and of the wedge below it, and the blank below the last row, in type sizes.
_STRIP, _WEDGE, _FOOT = 1.5, 1.0, 0.35
#: Length of a broken axis's piece from zero to the break and on to its lower end, in type sizes.
_STUB = 2.3
#: Steps in which the type shrinks down to its floor.
_STEPS = 12


@dataclass(frozen=True)
class Texts:
    """Every text of the waterfall broken into lines for one style and width, and the heights they take."""

    style: Style
    banner: list[str]
    title: tuple[list[str], float]
    strip_title: tuple[list[str], float]
    strip: Strip
    names: Names
    axis: Axis
    steps_title: tuple[list[str], float]
    legend: list[list[tuple[Role, str, float]]]
    caption: list[str]

    def above_strip(self) -> float:
        """From the upper edge of the page to the strip [units]."""
        style = self.style
        heads = sum(len(lines) * size * LEADING for lines, size in (self.title, self.strip_title))
        labels = self.strip.rows * label_pitch(style) + leader_height(style)
        return style.margin + banner_height(style, len(self.banner)) + heads + labels

    def above_rows(self) -> float:
        """From the upper edge of the panel to the first row [units]."""
        lines, size = self.steps_title
        return len(lines) * size * LEADING + self.style.base * 0.3

    def below_axis(self) -> float:
        """From the axis to the lower edge of the page [units]."""
        style = self.style
        blanks = style.base * 0.3 * (bool(self.legend) + bool(self.caption))
        feet = len(self.legend) * style.small * 1.4 + len(self.caption) * style.caption * LEADING
        return axis_height(style) + blanks + feet + style.margin

    def overhead(self) -> float:
        """Height of all that is not a row, with the strip and the wedge at their least [units]."""
        fixed = self.style.base * (_STRIP + _WEDGE + _FOOT)
        return self.above_strip() + self.above_rows() + self.below_axis() + fixed


@dataclass(frozen=True)
class Layout:
    """Everything placed, nothing drawn: upper edges, heights and the rows' edges, in the sheet's units; `fits` says
    whether every row got the height it needs."""

    texts: Texts
    strip_top: float
    strip_height: float
    panel_top: float
    rows: tuple[float, ...]
    foot: float
    fits: bool


def axis_height(style: Style) -> float:
    """Height of the axis with its numbers and its name [units]."""
    return style.base * 0.4 + style.small * 2.35


def layout_waterfall(sheet: Sheet, spec: WaterfallSpec, rect: QRectF, style: Style) -> Layout:
    """Place every part of the waterfall in a rectangle.

    Parameters
    ----------
    sheet : Sheet
        Measures texts.
    spec : WaterfallSpec
        What to show.
    rect : QRectF
        Where [units].
    style : Style
        Wanted sizes. Where the rows do not fit, the small print goes first (unless it must stay), then the type
        shrinks down to the floor, then the legend goes.

    Returns
    -------
    Layout
        The first that fits, or the tightest.
    """
    layout = _place(set_texts(sheet, spec, rect, style), rect)
    for trial, caption, legend in _tighter(style):
        if layout.fits:
            break
        layout = _place(set_texts(sheet, spec, rect, trial, caption=caption, legend=legend), rect)
    return layout


def natural_height(sheet: Sheet, spec: WaterfallSpec, width: float, style: Style) -> float:
    """Height at which the waterfall looks well at a given width [units]."""
    texts = set_texts(sheet, spec, QRectF(0.0, 0.0, width, 0.0), style)
    rows = sum(need + style.base * 0.35 for need in row_needs(texts.names, style))
    return texts.overhead() + rows + style.base


def _tighter(style: Style) -> Iterator[tuple[Style, bool, bool]]:
    """Styles to try in turn, each with whether small print and legend stay."""
    if not style.keep_caption:
        yield style, False, True
    least = min(1.0, style.floor / style.base)
    for index in range(1, _STEPS + 1):
        yield style.scaled(1.0 - (1.0 - least) * index / _STEPS), style.keep_caption, True
    if not style.keep_caption:
        yield style.scaled(least), False, False


def set_texts(
    sheet: Sheet, spec: WaterfallSpec, rect: QRectF, style: Style, *, caption: bool = True, legend: bool = True
) -> Texts:
    """Break every text for a rectangle's width; `caption` and `legend` say whether those stay."""
    left, right = rect.left() + style.margin, rect.right() - style.margin
    room, base = right - left, style.base
    names = layout_names(sheet, spec.steps, room * _NAMES_SHARE, style)
    low, high = spec.axis_range
    zero = left + names.width + base * 0.6
    axis = Axis(low, high, zero, zero + (base * _STUB if low > 0 else 0.0), right - base * 0.9, right)
    panel = axis.right - axis.left - base * 0.6
    return Texts(
        style=style,
        banner=banner_lines(sheet, spec.stale, room, style),
        title=heading(sheet, spec.title, style.title, base, room),
        strip_title=heading(sheet, spec.strip_title, style.small, style.floor, room, bold=False),
        strip=layout_strip(sheet, spec.segments, left, right, style),
        names=names,
        axis=axis,
        steps_title=heading(sheet, spec.steps_title, base, style.floor, panel, most=3),
        legend=legend_rows(sheet, spec.legend, room, style) if legend else [],
        caption=caption_lines(sheet, spec.caption, style, room) if caption else [],
    )


def _place(texts: Texts, rect: QRectF) -> Layout:
    base = texts.style.base
    needs = row_needs(texts.names, texts.style)
    spare = max(0.0, rect.height() - texts.overhead() - sum(needs))
    # Spare height goes mostly to the rows, a little to the strip and to the wedge.
    strip_height = base * _STRIP + min(base * 1.1, spare * 0.06)
    wedge = base * _WEDGE + min(base * 2.0, spare * 0.08)
    top = rect.top() + texts.above_strip()
    panel_top = top + strip_height + wedge
    foot = rect.bottom() - texts.below_axis()
    edges = [panel_top + texts.above_rows()]
    height = foot - base * _FOOT - edges[0]
    for part in share_out(needs, max(1.0, height)):
        edges.append(edges[-1] + part)
    fits = height >= sum(needs) - 1e-6
    return Layout(texts, top, strip_height, panel_top, tuple(edges), foot, fits)
