"""What a chart shows, as plain data: no Qt, no physics, no pixels.

A figure is described once, by one of the two frozen descriptions below, and the same description is painted
on the screen and into every kind of file. Texts arrive here ready to print; positions are in data units.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import NDArray

#: What a colour stands for. The first four are the families of the ledger; "total" is a power, not a loss;
#: "limit" and "cell" tell the two sides of a comparison apart; "muted" is context.
Role = Literal["spectral", "voltage", "fill-factor", "non-radiative", "total", "limit", "cell", "muted"]


@dataclass(frozen=True)
class Segment:
    """One piece of the strip that shows where the sunlight goes before the limit is reached.

    Parameters
    ----------
    key : str
        Identity of the ledger line (or subtotal) behind the piece, for picking.
    label : str
        Name in full ("Heat above the gap").
    short : str
        Name for narrow places ("heat").
    share : float
        Share of the incident power [%].
    value_text : str
        The share as printed ("33.2 %").
    role : Role
        Colour.
    """

    key: str
    label: str
    short: str
    share: float
    value_text: str
    role: Role


@dataclass(frozen=True)
class Step:
    """One row of the staircase from the limit down to the cell.

    A total starts at zero and ends at its own value; a loss spans from what was left before it (`start`) to what
    is left after it (`end`), so `end < start` for a loss and `end > start` for a gain.

    Parameters
    ----------
    key : str
        Identity of the ledger line, or "detailed_balance" and "cell" for the totals.
    label : str
        Name of the row ("Non-radiative recombination").
    start, end : float
        Power as a share of the incident power [%].
    value_text : str
        The amount as printed, sign included ("−5.22 %").
    detail_text : str
        What changed in the cell's own figure ("−140 mV"), or empty.
    role : Role
        Colour.
    total : bool
        A subtotal, drawn as a bar of its own from the axis.
    assumed : bool
        The amount rests on an assumption: drawn with a broken outline.
    """

    key: str
    label: str
    start: float
    end: float
    value_text: str
    detail_text: str
    role: Role
    total: bool = False
    assumed: bool = False


@dataclass(frozen=True)
class WaterfallSpec:
    """The waterfall: the sunlight as one strip, and below it the staircase from the limit to the cell.

    Parameters
    ----------
    title : str
        Headline; may be edited by the user before an export.
    strip_title, steps_title : str
        One line above either part ("Sunlight, AM1.5G, 100 mW cm⁻²"; "From the limit to the cell, % of …").
    segments : tuple of Segment
        In order of the strip; shares add up to 100. The last one is the limit, which the staircase magnifies.
    steps : tuple of Step
        From the limit (a total) to the cell (a total).
    axis_label : str
        Name and unit of the staircase's horizontal axis.
    axis_range : (float, float)
        What the staircase's axis spans [%]. A lower end above zero is drawn as a broken axis.
    legend : tuple of (Role, str)
        Families that occur.
    caption : tuple of str
        Lines of small print (inputs of the cell, conventions).
    stale : str
        Empty, or why the picture is not of the present input ("shows the last valid input").
    """

    title: str
    strip_title: str
    steps_title: str
    segments: tuple[Segment, ...]
    steps: tuple[Step, ...]
    axis_label: str
    axis_range: tuple[float, float]
    legend: tuple[tuple[Role, str], ...] = ()
    caption: tuple[str, ...] = ()
    stale: str = ""


#: How a curve is stroked; "none" leaves its markers alone.
Dash = Literal["solid", "dashed", "dotted", "none"]


@dataclass(frozen=True, eq=False)
class Series:
    """A curve in data units; `x` and `y` are arrays of one length, NaN breaks the line.

    With `filled`, the area between the curve and the foot of the frame is filled and the curve is its rim; with
    `markers`, each point has a dot.
    """

    key: str
    label: str
    x: NDArray[np.float64]
    y: NDArray[np.float64]
    role: Role
    dash: Dash = "solid"
    filled: bool = False
    markers: bool = False


def dot_scale(series: Series) -> float:
    """How large the dots of a series are beside those of a few points: many are drawn smaller, to stay apart."""
    return min(1.0, max(0.4, math.sqrt(150.0 / max(series.x.size, 1))))


Symbol = Literal["circle", "square", "diamond", "triangle"]
#: Where a mark's text stands as seen from the mark, by the points of the compass.
Side = Literal["n", "s", "e", "w", "ne", "nw", "se", "sw"]


@dataclass(frozen=True)
class Mark:
    """A single point of note in data units, with the text that stands beside it.

    A live plot puts the text on `side`, so that it stays there while a slider moves; in files it goes where it covers
    least.
    """

    key: str
    label: str
    x: float
    y: float
    role: Role
    symbol: Symbol = "circle"
    filled: bool = True
    side: Side = "ne"


@dataclass(frozen=True)
class PlotSpec:
    """A plot of curves and marks over two linear axes; an axis of logarithms has its powers of ten as names.

    Parameters
    ----------
    title, x_label, y_label : str
        Headline and axis names with their units.
    y_short : str
        The name of the y axis for a place where it does not fit; empty where it is short already.
    x_range, y_range : (float, float)
        What the axes span, in data units.
    x_names, y_names : tuple of (float, str)
        Places on an axis and what is written there, in the stead of round numbers; may be empty.
    series : tuple of Series
        Curves, drawn in order.
    marks : tuple of Mark
        Points, drawn above the curves.
    caption : tuple of str
        Lines of small print.
    stale : str
        Empty, or why the picture is not of the present input.
    note : str
        What the plot tells in figures, for a live plot, which has no caption; may be empty.
    """

    title: str
    x_label: str
    y_label: str
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    series: tuple[Series, ...]
    marks: tuple[Mark, ...] = field(default_factory=tuple)
    caption: tuple[str, ...] = ()
    stale: str = ""
    y_short: str = ""
    x_names: tuple[tuple[float, str], ...] = ()
    y_names: tuple[tuple[float, str], ...] = ()
    note: str = ""

    def y_name(self, fits: bool) -> str:
        """Name of the y axis where the full one `fits`, or does not."""
        return self.y_label if fits or not self.y_short else self.y_short
