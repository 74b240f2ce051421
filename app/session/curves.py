"""The measured curves of a cell, and the figures that are read off them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np

from app.session.light import light_named
from physics.diode_fit import DiodeFit, at_temperature, fit_one_diode
from physics.edge import Edge, edge_of
from physics.light_series import LightSeries
from physics.quantum import Curve, collected_current, radiative_current
from physics.units import Array

#: Where a figure in a field comes from, if it was not typed.
Source = Literal["sweep", "fit", "inflection", "edge mean", "light series"]


@dataclass(frozen=True, eq=False)
class Sweep:
    """A J–V sweep, oriented: the photocurrent is positive.

    Parameters
    ----------
    label : str
        What the file calls it.
    voltage, current : ndarray, shape (n,)
        Voltages [V] and current densities [mA cm⁻²] in measured order.
    direction : {"forward", "reverse", ""}
        From low to high voltage, the other way, or not told.
    lit : bool
        Under light, or in the dark.
    """

    label: str
    voltage: Array
    current: Array
    direction: str = ""
    lit: bool = True


@dataclass(frozen=True, eq=False)
class Curves:
    """All curves of a cell; what was not measured is None or empty."""

    sweeps: tuple[Sweep, ...] = ()
    eqe: Curve | None = None
    reflectance: Curve | None = None
    series: LightSeries | None = None


NO_CURVES = Curves()
_STANDARD = 298.15  # [K]


@lru_cache(maxsize=64)
def edge_for(eqe: Curve) -> Edge:
    """Gap and tail of an EQE, found once."""
    return edge_of(eqe)


@lru_cache(maxsize=32)
def _fit_of(sweep: Sweep) -> DiodeFit:
    return fit_one_diode(sweep.voltage, sweep.current, _STANDARD)


@lru_cache(maxsize=32)
def fit_for(sweep: Sweep, temperature: float = _STANDARD) -> DiodeFit:
    """One-diode fit to a lit sweep at a temperature [K]. The curve, found once, is the same at all temperatures."""
    return at_temperature(_fit_of(sweep), _STANDARD, temperature)


@lru_cache(maxsize=64)
def emission_for(eqe: Curve, temperature: float) -> tuple[float, float]:
    """Radiative recombination current [mA cm⁻²] of an EQE with its tail, and the tail's share of it."""
    whole, extrapolated = radiative_current(eqe, temperature, edge_for(eqe).tail_at(temperature)[0])
    return whole, extrapolated / whole if whole > 0 else 0.0


@lru_cache(maxsize=256)
def current_for(curve: Curve, spectrum: str, irradiance: float, above: float, below: float) -> float:
    """Current [mA cm⁻²] of a curve under a named light between two energies [eV]."""
    return collected_current(curve, light_named(spectrum), irradiance, above, below)


def curve_figures(
    curves: Curves, spectrum: str, gap: float, temperature: float, irradiance: float, faces: int
) -> dict[str, float]:
    """What `physics.cell.Cell` takes from an EQE and a reflectance; empty where there is no EQE.

    Parameters
    ----------
    curves : Curves
    spectrum : str
        Short name of the light.
    gap, temperature, irradiance : float
        As the ledger uses them [eV; K; mW cm⁻²].
    faces : int
        Faces from which the limit emits; the cell is taken to emit from as many.
    """
    eqe, reflectance = curves.eqe, curves.reflectance
    if eqe is None or not np.isfinite([gap, temperature, irradiance]).all():
        return {}
    j0, share = emission_for(eqe, temperature)
    if j0 <= 0:
        return {}
    figures = {
        "eqe_above": current_for(eqe, spectrum, irradiance, gap, np.inf),
        "eqe_below": current_for(eqe, spectrum, irradiance, 0.0, gap),
        "j0_rad": faces * j0,
        "tail_share": share,
    }
    if reflectance is not None:
        figures["reflected"] = current_for(reflectance, spectrum, irradiance, gap, np.inf)
    return figures


def gap_figures(eqe: Curve) -> dict[Source, float]:
    """The gap of an EQE by each definition [eV], to a tenth of a meV; without those that could not be found."""
    edge = edge_for(eqe)
    found: dict[Source, float] = {"inflection": edge.inflection, "edge mean": edge.mean}
    return {source: round(value, 4) for source, value in found.items() if np.isfinite(value)}
