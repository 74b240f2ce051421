"""Thermal radiation above a photon energy: the black body as an emitter (the cell) and as a sun."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from physics.units import BOLTZMANN, ELEMENTARY_CHARGE, LIGHT_SPEED, PER_M2, PLANCK, Array

#: Solid-angle dilution of the sun's disc seen from the earth, as used by Shockley and Queisser,
#: J. Appl. Phys. 32 (1961) 510, doi:10.1063/1.1736034 (2.18e-5, from memory).
SUN_DILUTION = 2.18e-5

_HEMISPHERE = 2.0 * np.pi / (PLANCK**3 * LIGHT_SPEED**2)  # states per energy² into a hemisphere [J⁻³ m⁻² s⁻¹]
_SMALLEST_X = 0.01  # below it the series needs thousands of terms, and no gap in use comes near


def _bose_tail(x: Array, power: int) -> Array:
    """∫ₓ^∞ tᵖ/(eᵗ − 1) dt for p = 2 or 3 by its closed series in e⁻ⁿˣ; NaN for x below 0.01.

    Writing 1/(eᵗ − 1) = Σ e⁻ⁿᵗ and integrating by parts gives one polynomial in x and 1/n a term. The terms fall
    as e⁻ⁿˣ, so 38/x of them reach double precision.
    """
    x = np.where((x >= _SMALLEST_X) & (x < np.inf), x, np.nan)
    smallest = np.nanmin(x) if np.any(x >= _SMALLEST_X) else 1.0
    step = np.exp(-x)
    total = np.zeros_like(x)
    decay = np.ones_like(x)
    for n in range(1, int(38.0 / smallest) + 3):
        decay = decay * step
        if power == 2:
            total += decay * (x * x / n + 2.0 * x / n**2 + 2.0 / n**3)
        else:
            total += decay * (x**3 / n + 3.0 * x * x / n**2 + 6.0 * x / n**3 + 6.0 / n**4)
    return total


def _thermal_energy(temperature: ArrayLike) -> Array:
    """Energy kT [J]; NaN where T is not above 0 K."""
    kelvin = np.asarray(temperature, dtype=float)
    return BOLTZMANN * np.where(kelvin > 0, kelvin, np.nan)


def photon_current(gap: ArrayLike, temperature: ArrayLike) -> Array:
    """Photon flux of a black body above a gap, into one hemisphere, as a current density.

    j(Eg, T) = (2πq/h³c²) ∫_Eg^∞ E²/(exp(E/kT) − 1) dE

    Parameters
    ----------
    gap : array_like
        Lowest photon energy [eV].
    temperature : array_like
        Temperature of the body [K].

    Returns
    -------
    ndarray
        Current density [mA cm⁻²], of the broadcast shape; NaN where Eg < 0.01 kT.

    Notes
    -----
    With the cell's own temperature this is the radiative recombination current J0 of a step absorber with an
    ideal rear mirror: Shockley and Queisser, J. Appl. Phys. 32 (1961) 510, doi:10.1063/1.1736034.
    """
    kt = _thermal_energy(temperature)
    x = np.asarray(gap, dtype=float) * ELEMENTARY_CHARGE / kt
    return ELEMENTARY_CHARGE * _HEMISPHERE * kt**3 * _bose_tail(x, 2) * PER_M2


def thermal_flux(energy: ArrayLike, temperature: ArrayLike) -> Array:
    """Photon flux of a black body into one hemisphere, as a current density per energy.

    q φ_bb(E, T) = (2πq/h³c²) E²/(exp(E/kT) − 1)

    Parameters
    ----------
    energy : array_like
        Photon energy [eV], above 0.
    temperature : array_like
        Temperature of the body [K].

    Returns
    -------
    ndarray
        Current density per energy [mA cm⁻² eV⁻¹], of the broadcast shape.
    """
    kt = _thermal_energy(temperature)
    joule = np.asarray(energy, dtype=float) * ELEMENTARY_CHARGE
    # Written with e⁻ˣ, which does not overflow.
    thin = np.exp(-joule / kt)
    return ELEMENTARY_CHARGE**2 * _HEMISPHERE * PER_M2 * joule**2 * thin / -np.expm1(-joule / kt)


def radiant_power(gap: ArrayLike, temperature: ArrayLike) -> Array:
    """Power of a black body in photons above a gap, into one hemisphere.

    p(Eg, T) = (2π/h³c²) ∫_Eg^∞ E³/(exp(E/kT) − 1) dE; arguments and shapes as in `photon_current`, result [mW cm⁻²].
    """
    kt = _thermal_energy(temperature)
    x = np.asarray(gap, dtype=float) * ELEMENTARY_CHARGE / kt
    return _HEMISPHERE * kt**4 * _bose_tail(x, 3) * PER_M2


@dataclass(frozen=True)
class BlackBody:
    """A black-body sun, exact at every photon energy (no table).

    Parameters
    ----------
    temperature : float
        Temperature of the source [K], 1000 to 20 000.
    dilution : float
        Share of the hemisphere that the source fills, 0 to 1 (1 is full concentration).

    Raises
    ------
    ValueError
        For a temperature or dilution outside these bounds.
    """

    temperature: float
    dilution: float = SUN_DILUTION

    def __post_init__(self) -> None:
        if not 1000.0 <= self.temperature <= 20000.0:
            raise ValueError("the temperature of a black-body sun must lie between 1000 and 20000 K")
        if not 0.0 < self.dilution <= 1.0:
            raise ValueError("the dilution of a black-body sun must lie above 0 and at most at 1")

    @property
    def title(self) -> str:
        """Name for captions."""
        return f"black body {self.temperature:g} K"

    @property
    def power(self) -> float:
        """Undiluted σT⁴ times the dilution [mW cm⁻²]."""
        whole = np.pi**4 / 15.0 * (BOLTZMANN * self.temperature) ** 4  # ∫₀^∞ t³/(eᵗ − 1) dt = π⁴/15
        return float(self.dilution * _HEMISPHERE * whole * PER_M2)

    @property
    def gap_range(self) -> tuple[float, float]:
        """Gaps for which the light is known [eV]."""
        return (0.1, 6.0)

    @property
    def breaks(self) -> Array:
        """Wavelengths [nm] between which a low polynomial follows the photon current to a relative 1e-9."""
        return np.geomspace(100.0, 12400.0, 500)

    def photon_current_above(self, gap: ArrayLike) -> Array:
        """Current of all photons above `gap` [eV], undiminished [mA cm⁻²]."""
        return self.dilution * photon_current(gap, self.temperature)

    def power_above(self, gap: ArrayLike) -> Array:
        """Power in the photons above `gap` [eV] [mW cm⁻²]."""
        return self.dilution * radiant_power(gap, self.temperature)
