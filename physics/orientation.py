"""The sign of a measured sweep, whether it was lit, and rough figures to start a fit from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from physics.units import Array

_NANOVOLT = 1e-9  # [V]
FEWEST = 10  #: Points below which a sweep is not looked at.
_SURE = 5.0  # standard deviations that a photocurrent must stand out of the noise
_LEVEL = 0.02  # share of the current by which a sweep must fall to tell its sign
_DARK_SHARE = 1e-3  # a current at 0 V below this share of the forward current is an offset, not a photocurrent


@dataclass(frozen=True, eq=False)
class Oriented:
    """A sweep in the sign convention of the project: photocurrent positive, generating at positive voltage.

    Parameters
    ----------
    voltage, current : ndarray, shape (n,)
        Finite points in the order of the voltage [V, mA cm⁻²]; points at the same voltage are all kept.
    lit : bool
        Whether the sweep shows a photocurrent.
    current_flipped, voltage_flipped : bool
        Which signs were changed.
    left_out : int
        Points without a finite voltage and current.
    message : str
        What is doubtful, a sentence; empty where nothing is.
    """

    voltage: Array
    current: Array
    lit: bool
    current_flipped: bool
    voltage_flipped: bool
    left_out: int
    message: str


def oriented(voltage: ArrayLike, current: ArrayLike) -> Oriented:
    """A sweep in rising order, its sign and whether it was lit.

    The current of a diode falls with the voltage where photocurrent is positive, lit or dark: that gives its sign (a
    sweep that hardly falls is taken for the flat part of a lit one). A lit sweep then has a positive current at 0 V;
    if it is negative, the contacts were exchanged and both signs change. A dark sweep with exchanged contacts cannot
    be told from its signs and stays as it is.

    Parameters
    ----------
    voltage, current : array_like, shape (n,)
        Voltages [V] and current densities [mA cm⁻²] in any order and of either sign; NaN is left out.

    Returns
    -------
    Oriented

    Raises
    ------
    ValueError
        When the arrays are not of one length.
    """
    v, j = np.asarray(voltage, dtype=float), np.asarray(current, dtype=float)
    if v.ndim != 1 or v.shape != j.shape:
        raise ValueError(f"a sweep needs as many currents as voltages, not {j.shape} and {v.shape}")
    finite = np.isfinite(v) & np.isfinite(j)
    v, j = v[finite], j[finite]
    order = np.argsort(v, kind="stable")
    v, j = _snapped(v[order]), j[order]
    left_out = int(finite.size - v.size)
    different = np.unique(v).size
    if different < min(FEWEST, v.size):  # too few of them differ
        message = f"A sweep of {different} different voltages is too short to be read."
        return Oriented(v, j, False, False, False, left_out, message)
    if v.size < FEWEST:
        return Oriented(v, j, False, False, False, left_out, f"A sweep of {v.size} points is too short to be read.")
    smooth = smoothed(j)
    noise = _roughness(j)
    fall = float(smooth[0] - smooth[-1])
    level = abs(fall) < max(_SURE * noise, _LEVEL * float(np.max(np.abs(smooth))))
    flipped = bool(np.median(j) < 0.0) if level else fall < 0.0
    if flipped:
        j, smooth = -j, -smooth
    at_zero = float(smooth[np.argmin(np.abs(v))])
    swapped = at_zero < 0.0 and _stands_out(at_zero, smooth, noise)
    if swapped:
        v, j, smooth = -v[::-1], -j[::-1], -smooth[::-1]
    generating = smooth[v >= 0.0]
    photocurrent = float(generating[0]) if generating.size else float(smooth[-1])
    lit = photocurrent > 0.0 and _stands_out(photocurrent, smooth, noise)
    return Oriented(v, j, lit, flipped != swapped, swapped, left_out, _doubt(photocurrent, smooth, lit))


def _snapped(v: Array) -> Array:
    """Rising voltages [V], those less than a nanovolt above their neighbour taken as the same: no meter tells them."""
    together = np.concatenate([[False], np.diff(v) < _NANOVOLT])
    first = np.where(together, 0, np.arange(v.size))
    return v[np.maximum.accumulate(first)] if v.size else v


def _stands_out(current: float, smooth: Array, noise: float) -> bool:
    return abs(current) > max(_SURE * noise, _DARK_SHARE * float(np.max(np.abs(smooth))))


def _doubt(photocurrent: float, smooth: Array, lit: bool) -> str:
    share = abs(photocurrent) / max(float(np.max(np.abs(smooth))), 1e-300)
    if 0.1 * _DARK_SHARE < share < 10.0 * _DARK_SHARE:
        taken = "lit" if lit else "dark"
        return f"The current at 0 V is {share:.1e} of the largest: taken for a {taken} sweep, but look at it."
    return ""


def smoothed(j: Array) -> Array:
    """Median of five neighbours, of three at the ends."""
    padded = np.pad(j, 2, mode="reflect")
    return np.median(np.lib.stride_tricks.sliding_window_view(padded, 5), axis=1)


def _roughness(j: Array) -> float:
    """Noise by second differences of neighbours, which carry √6 of it."""
    return 1.4826 * float(np.median(np.abs(np.diff(j, 2)))) / 2.449489742783178


def rough_figures(v: Array, j: Array) -> tuple[float, float]:
    """Voc [V] and Jsc [mA cm⁻²] from smoothed points of an oriented sweep, to start a fit from."""
    at = crossing(v, j)
    voc = at if at is not None and at > 0 else float(v[-1])
    return voc, float(smoothed(j)[np.argmin(np.abs(v))])


def crossing(v: Array, j: Array) -> float | None:
    """Voltage [V] at which the smoothed current last falls through zero; None where it does not."""
    smooth = smoothed(j)
    after = np.flatnonzero((smooth[:-1] > 0) & (smooth[1:] <= 0))
    if not after.size:
        return None
    i = int(after[-1])
    return float(v[i] + (v[i + 1] - v[i]) * smooth[i] / (smooth[i] - smooth[i + 1]))
