"""What an external quantum efficiency (EQE) tells: its current, its radiative recombination, and what they leave out.

The EQE is known at points and taken as linear in wavelength between them. Outside its points it is zero, but for the
low-energy side, where an exponential tail may continue it (`physics.edge`).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from physics.emission import thermal_flux
from physics.spectrum import Illumination
from physics.units import BOLTZMANN, ELEMENTARY_CHARGE, EV_NM, Array, thermal_voltage

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(4)
#: Widest step of the integral over the thermal emission, in kT: four points of Gauss and Legendre then leave an
#: error below 1e-9 of an exponential.
_STEP = 0.5
_DEEPEST = 45.0  # e⁻⁴⁵ is lost beside 1: how far down an exponential is followed


@dataclass(frozen=True, eq=False)
class Curve:
    """A quantum efficiency, absorptance or reflectance at points, linear between them and zero outside.

    Parameters
    ----------
    wavelength : ndarray, shape (n,)
        Wavelengths [nm], rising, n ≥ 2.
    value : ndarray, shape (n,)
        Fraction of the photons, usually between 0 and 1.

    Raises
    ------
    ValueError
        When the table is not of that form.
    """

    wavelength: Array
    value: Array

    def __post_init__(self) -> None:
        wavelength, value = self.wavelength, self.value
        if wavelength.ndim != 1 or wavelength.shape != value.shape or wavelength.size < 2:
            raise ValueError("a quantum efficiency needs two columns of one length with at least two points")
        if not (np.all(np.isfinite(wavelength)) and np.all(np.diff(wavelength) > 0) and wavelength[0] > 0):
            raise ValueError("the wavelengths of a quantum efficiency must be positive and rise from point to point")
        if not np.all(np.isfinite(value)):
            raise ValueError("a quantum efficiency must be a finite number at every wavelength")

    @property
    def energy_range(self) -> tuple[float, float]:
        """Lowest and highest photon energy [eV]."""
        return EV_NM / float(self.wavelength[-1]), EV_NM / float(self.wavelength[0])

    def at(self, energy: ArrayLike) -> Array:
        """Value at photon energies [eV] of any shape."""
        return np.interp(EV_NM / np.asarray(energy, dtype=float), self.wavelength, self.value, left=0.0, right=0.0)


@dataclass(frozen=True)
class Tail:
    """An exponential that continues an EQE to lower energies: anchor · exp((E − start)/slope) for E below `start`.

    Parameters
    ----------
    start : float
        Energy below which it stands in for the data [eV].
    anchor : float
        EQE at `start`.
    slope : float
        Urbach energy [eV].
    """

    start: float
    anchor: float
    slope: float

    def at(self, energy: ArrayLike) -> Array:
        """Value at photon energies [eV] of any shape; zero above `start`."""
        energy = np.asarray(energy, dtype=float)
        return np.where(energy < self.start, self.anchor * np.exp((energy - self.start) / self.slope), 0.0)


def collected_current(
    curve: Curve, light: Illumination, irradiance: float = np.nan, above: float = 0.0, below: float = np.inf
) -> float:
    """Current of the photons between two energies that a curve turns into electrons.

    J = q ∫ EQE(λ) Φ(λ) λ/(hc) dλ, written with N(λ), the current of all photons shorter than λ, as
    Σ [EQE·N] − Σ EQE′ ∫ N dλ over the pieces on which EQE is linear and N smooth. N is a cubic in λ between the points
    of a tabulated spectrum, so four points of Gauss and Legendre a piece give the integral exactly.

    Parameters
    ----------
    curve : Curve
        EQE (or reflectance, for the current that is reflected).
    light : Illumination
        Spectrum of the light.
    irradiance : float
        Power to which it is scaled [mW cm⁻²]; NaN leaves it as tabulated.
    above, below : float
        Photon energies that count [eV].

    Returns
    -------
    float
        Current density [mA cm⁻²].
    """
    scale = 1.0 if np.isnan(irradiance) else irradiance / light.power
    lowest, highest = light.gap_range
    first = max(EV_NM / min(below, highest), float(curve.wavelength[0]))
    last = min(EV_NM / max(above, lowest), float(curve.wavelength[-1]))
    if not first < last:
        return 0.0
    points = np.concatenate([curve.wavelength, light.breaks])
    grid = np.unique(np.concatenate([[first, last], points[(points > first) & (points < last)]]))
    value = np.interp(grid, curve.wavelength, curve.value)
    half, middle = np.diff(grid) / 2.0, (grid[1:] + grid[:-1]) / 2.0
    shorter = light.photon_current_above(EV_NM / grid)
    between = light.photon_current_above(EV_NM / (middle + half * _NODES[:, None]))
    area = half * (_WEIGHTS @ between)
    rise = np.diff(value) / (2.0 * half)
    return float(scale * np.sum(np.diff(value * shorter) - rise * area))


def radiative_current(curve: Curve, temperature: float, tail: Tail | None = None) -> tuple[float, float]:
    """Radiative recombination current of a cell by reciprocity, and the part of it under an extrapolated tail.

    J0_rad = q ∫ EQE(E) φ_bb(E, T) dE, with φ_bb the thermal photon flux into the front hemisphere.

    Parameters
    ----------
    curve : Curve
        EQE; negative values (noise) count as they are, so that they average out.
    temperature : float
        Temperature of the cell [K].
    tail : Tail, optional
        Stands in for the curve below its start.

    Returns
    -------
    whole, extrapolated : float
        Current densities [mA cm⁻²].

    Notes
    -----
    U. Rau, Phys. Rev. B 76 (2007) 085303, doi:10.1103/PhysRevB.76.085303. An exponential tail flatter than kT has its
    greatest share at the lowest energies; then nothing is gained by following it, and the sum is no figure to trust
    (`physics.edge` says so).
    """
    low, high = curve.energy_range
    start = low if tail is None else min(max(tail.start, low), high)
    edges = np.concatenate([[start], EV_NM / curve.wavelength[::-1]])
    measured = _thermal_sum(curve.at, np.unique(edges[edges >= start]), temperature)
    if tail is None:
        return measured, 0.0
    kt = float(thermal_voltage(temperature))
    fall = 1.0 / tail.slope - 1.0 / kt
    reach = _DEEPEST / fall if fall > 0 else tail.start
    bottom = max(tail.start - reach, 1e-3)
    extrapolated = _thermal_sum(tail.at, np.array([bottom, tail.start]), temperature)
    return measured + extrapolated, extrapolated


def emission_density(value: Callable[[Array], Array], energy: ArrayLike, temperature: float) -> Array:
    """What a cell emits by reciprocity at each photon energy, EQE(E) · q φ_bb(E, T): the integrand of J0_rad.

    Parameters
    ----------
    value : callable
        EQE at photon energies [eV]: `Curve.at` or `Tail.at`.
    energy : array_like
        Photon energies [eV], above 0.
    temperature : float
        Temperature of the cell [K].

    Returns
    -------
    ndarray
        Current density per energy [mA cm⁻² eV⁻¹], of the shape of `energy`.

    Notes
    -----
    U. Rau, Phys. Rev. B 76 (2007) 085303, doi:10.1103/PhysRevB.76.085303.
    """
    energy = np.asarray(energy, dtype=float)
    return value(energy) * thermal_flux(energy, temperature)


def _thermal_sum(value: Callable[[Array], Array], edges: Array, temperature: float) -> float:
    """∫ value · φ_bb dE [mA cm⁻²] over pieces between `edges` [eV], cut so that none is wider than half a kT."""
    kt = BOLTZMANN * temperature / ELEMENTARY_CHARGE
    pieces = np.maximum(1, np.ceil(np.diff(edges) / (_STEP * kt))).astype(int)
    starts = np.repeat(edges[:-1], pieces)
    widths = np.repeat(np.diff(edges) / pieces, pieces)
    place = np.arange(pieces.sum()) - np.repeat(np.cumsum(pieces) - pieces, pieces)
    middle = starts + (place + 0.5) * widths
    energy = middle + 0.5 * widths * _NODES[:, None]
    return float(np.sum(0.5 * widths * (_WEIGHTS @ emission_density(value, energy, temperature))))
