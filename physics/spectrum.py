"""Tabulated spectra and their exact integrals, and the reference spectra of ASTM G173-03."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache, cached_property
from importlib.util import find_spec
from pathlib import Path
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike

from physics.emission import BlackBody
from physics.units import ELEMENTARY_CHARGE, EV_NM, LIGHT_SPEED, PER_M2, PLANCK, Array, Indices


class Illumination(Protocol):
    """Light that falls on a cell, at its own strength ("as tabulated")."""

    @property
    def title(self) -> str:
        """Name for captions."""

    @property
    def power(self) -> float:
        """All of its power [mW cm⁻²]."""

    @property
    def gap_range(self) -> tuple[float, float]:
        """Gaps for which the light is known [eV]."""

    @property
    def breaks(self) -> Array:
        """Wavelengths between which the photon current is smooth [nm]."""

    def photon_current_above(self, gap: ArrayLike) -> Array:
        """Current of all photons above `gap` [eV] at one electron each [mA cm⁻²]."""

    def power_above(self, gap: ArrayLike) -> Array:
        """Power in the photons above `gap` [eV] [mW cm⁻²]."""


class _Part(Protocol):
    def __call__(self, segment: Indices, length: Array, /) -> Array: ...


@dataclass(frozen=True, eq=False)
class Spectrum:
    """A spectral irradiance given at points and linear between them.

    Parameters
    ----------
    title : str
        Name for captions.
    wavelength : ndarray, shape (n,)
        Wavelengths [nm], rising, n ≥ 2.
    irradiance : ndarray, shape (n,)
        Spectral irradiance Φ [W m⁻² nm⁻¹], not negative.

    Raises
    ------
    ValueError
        When the table is not of that form, or holds no power.
    """

    title: str
    wavelength: Array
    irradiance: Array

    def __post_init__(self) -> None:
        wavelength, irradiance = self.wavelength, self.irradiance
        if wavelength.ndim != 1 or wavelength.shape != irradiance.shape or wavelength.size < 2:
            raise ValueError("a spectrum needs two columns of one length with at least two points")
        if not (np.all(np.isfinite(wavelength)) and np.all(np.diff(wavelength) > 0) and wavelength[0] > 0):
            raise ValueError("the wavelengths of a spectrum must be positive and rise from point to point")
        if not (np.all(np.isfinite(irradiance)) and np.all(irradiance >= 0) and np.any(irradiance > 0)):
            raise ValueError("the irradiance of a spectrum must be finite, not negative, and somewhere above zero")

    @cached_property
    def _slope(self) -> Array:
        return np.diff(self.irradiance) / np.diff(self.wavelength)

    @cached_property
    def _power_to(self) -> Array:
        """Power from the short end to each point [mW cm⁻²]."""
        return self._accumulate(self._power_in)

    @cached_property
    def _current_to(self) -> Array:
        """Photon current from the short end to each point [mA cm⁻²]."""
        return self._accumulate(self._current_in)

    def _accumulate(self, part: _Part) -> Array:
        segments = part(np.arange(self.wavelength.size - 1), np.diff(self.wavelength))
        return np.concatenate([[0.0], np.cumsum(segments)])

    def _power_in(self, segment: Indices, length: Array) -> Array:
        """∫ Φ dλ over the first `length` nm of a segment: a closed square."""
        return (self.irradiance[segment] + 0.5 * self._slope[segment] * length) * length * PER_M2

    def _current_in(self, segment: Indices, length: Array) -> Array:
        """(q/hc) ∫ Φ λ dλ over the first `length` nm of a segment: a closed cubic."""
        start, slope, value = self.wavelength[segment], self._slope[segment], self.irradiance[segment]
        moment = ((slope * length / 3.0 + (value + slope * start) / 2.0) * length + value * start) * length
        return moment * (ELEMENTARY_CHARGE / (PLANCK * LIGHT_SPEED) * 1e-9 * PER_M2)

    def _up_to(self, gap: ArrayLike, sums: Array, part: _Part) -> Array:
        """A running sum up to the wavelength of `gap`; NaN for gaps that the table does not cover."""
        energy = np.asarray(gap, dtype=float)
        low, high = self.gap_range
        inside = (energy >= low) & (energy <= high)
        edge = np.clip(EV_NM / np.where(inside, energy, high), self.wavelength[0], self.wavelength[-1])
        segment = np.minimum(np.searchsorted(self.wavelength, edge, side="right"), self.wavelength.size - 1) - 1
        value = sums[segment] + part(segment, edge - self.wavelength[segment])
        return np.where(inside, value, np.nan)

    @property
    def power(self) -> float:
        """Power of the whole table [mW cm⁻²]."""
        return float(self._power_to[-1])

    @property
    def gap_range(self) -> tuple[float, float]:
        """Gaps that the table covers [eV]."""
        return (EV_NM / float(self.wavelength[-1]), EV_NM / float(self.wavelength[0]))

    @property
    def breaks(self) -> Array:
        """Wavelengths between which the table is linear [nm]."""
        return self.wavelength

    def photon_current_above(self, gap: ArrayLike) -> Array:
        """Current of all photons above a gap at one electron each, exact for the piecewise-linear table.

        j(Eg) = q ∫_{λ < hc/Eg} Φ λ/(hc) dλ

        Parameters
        ----------
        gap : array_like
            Gap [eV], any shape.

        Returns
        -------
        ndarray
            Current density [mA cm⁻²] of the same shape; NaN outside `gap_range`.
        """
        return self._up_to(gap, self._current_to, self._current_in)

    def power_above(self, gap: ArrayLike) -> Array:
        """Power in the photons above a gap [mW cm⁻²], exact for the table; shapes as `photon_current_above`."""
        return self._up_to(gap, self._power_to, self._power_in)


#: Columns of the G173 table by the short name of the spectrum.
_G173 = {
    "am15g": ("global", "AM1.5G (ASTM G173-03 global)"),
    "am15d": ("direct", "AM1.5D (ASTM G173-03 direct)"),
    "am0": ("extraterrestrial", "AM0 (ASTM G173-03 extraterrestrial)"),
}

#: Short names of the illuminations that `illumination` knows outright.
REFERENCE_NAMES = tuple(_G173)


def _g173_columns() -> dict[str, Array]:
    """The columns of the G173 table that pvlib carries [nm; W m⁻² nm⁻¹].

    Read from pvlib's data file, because importing pvlib (and pandas with it) costs half a second before the first
    window is painted. Where a future pvlib keeps the file elsewhere, its public function serves instead.
    """
    spec = find_spec("pvlib")
    if spec is None or not spec.submodule_search_locations:
        raise ModuleNotFoundError("pvlib is needed for the ASTM G173-03 spectra: pip install pvlib")
    path = Path(spec.submodule_search_locations[0]) / "data" / "ASTMG173.csv"
    if not path.is_file():
        from pvlib.spectrum import get_reference_spectra

        table = get_reference_spectra()
        return {"wavelength": table.index.to_numpy(float)} | {name: table[name].to_numpy(float) for name in table}
    with path.open(newline="", encoding="utf-8") as stream:
        rows = list(csv.reader(stream))
    values = np.array(rows[2:], dtype=float)
    return {name: np.ascontiguousarray(values[:, k]) for k, name in enumerate(rows[1])}


@cache
def reference_spectrum(name: str) -> Spectrum:
    """One of the ASTM G173-03 spectra, 280 to 4000 nm, as tabulated.

    Parameters
    ----------
    name : str
        "am15g" (global, 37° tilt), "am15d" (direct and circumsolar) or "am0" (extraterrestrial).

    Returns
    -------
    Spectrum
        The same object for the same name.

    Raises
    ------
    KeyError
        For any other name.

    Notes
    -----
    Data: ASTM G173-03(2020), doi:10.1520/G0173-03R20, by way of pvlib.
    """
    column, title = _G173[name]
    table = _g173_columns()
    return Spectrum(title, table["wavelength"], table[column])


def illumination(name: str) -> Illumination:
    """The illumination of a short name: one of `REFERENCE_NAMES`, or "blackbody:T" with T in K.

    Raises
    ------
    ValueError
        For a name that is neither, or a black-body temperature that is no number or out of bounds.
    """
    key = name.strip().lower()
    if key in _G173:
        return reference_spectrum(key)
    kind, _, value = key.partition(":")
    if kind == "blackbody":
        return BlackBody(float(value))
    raise ValueError(f"unknown spectrum {name!r}")
