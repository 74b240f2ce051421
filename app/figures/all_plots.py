"""Every plot of a cell, by key, in the order in which they are offered. No Qt."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

from app.figures.curve_plots import (
    emission_plot_of,
    eqe_plot_of,
    fit_plot_of,
    lit_sweeps,
    series_plot_of,
)
from app.figures.photon_plot import spectrum_plot_of
from app.figures.plots import gap_plot_of, jv_plot_of
from app.figures.spec import PlotSpec
from app.figures.stack_plot import stack_plot_of
from app.session.outcome import Picture


class Describe(Protocol):
    """Describes a plot of a cell, or gives None where the cell lacks what it shows."""

    def __call__(self, picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
        """The plot of what was worked out; `stale` where that is of earlier inputs, `captioned` for a file."""


@dataclass(frozen=True)
class Plot:
    """One plot.

    Parameters
    ----------
    key : str
    title : str
        Name in full.
    tab : str
        Name on its tab, with the letter that brings it up.
    describe : Describe
    offered : callable
        Whether a cell has the data for it; quick, because every change asks. The data may still not suffice.
    """

    key: str
    title: str
    tab: str
    describe: Describe
    offered: Callable[[Picture], bool] = lambda picture: True


def _has_eqe(picture: Picture) -> bool:
    return picture.entry.curves.eqe is not None


JV = Plot("jv", "Current density against voltage", "&J–V", jv_plot_of)
#: The plots that share a place in the window.
BESIDE: tuple[Plot, ...] = (
    Plot("gap", "Efficiency against the gap", "&Limits", gap_plot_of),
    Plot("spectrum", "Photons of the light", "&Photons", spectrum_plot_of),
    Plot("eqe", "External quantum efficiency", "E&QE", eqe_plot_of, _has_eqe),
    Plot("emission", "Emission by reciprocity", "E&mission", emission_plot_of, _has_eqe),
    Plot("fit", "Residuals of the one-diode fit", "Fi&t", fit_plot_of, lambda p: bool(lit_sweeps(p))),
    Plot("series", "Voc against the light", "&Suns", series_plot_of, lambda p: p.entry.curves.series is not None),
    Plot("stacks", "Splitting from stack to stack", "Stac&ks", stack_plot_of, lambda p: bool(p.ledger.quantities.more)),
)
PLOTS: tuple[Plot, ...] = (JV, *BESIDE)
