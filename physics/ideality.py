"""The ideality with which a one-diode curve through a given Voc and Jsc has a given fill factor."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike

from physics.diode import OHM_CM2, Diode, ideal_fill_factor
from physics.units import Array, Mask, aligned, thermal_voltage

_STEPS = 8
_LEAST_IDEALITY, _GREATEST_IDEALITY = 0.05, 2000.0
_GRID = np.linspace(0.0, 1.0, 64)


def matching_ideality(
    ff: ArrayLike,
    voc: ArrayLike,
    jsc: ArrayLike,
    temperature: ArrayLike,
    rs: ArrayLike = 0.0,
    rsh: ArrayLike = np.inf,
    near: float = np.nan,
) -> Array:
    """Ideality with which a one-diode curve through Voc and Jsc has a given fill factor.

    Used to draw a curve for a cell of which only the figures of merit are known; no statement about the junction.

    Parameters
    ----------
    ff : array_like
        Fill factor to be met.
    voc, jsc, temperature, rs, rsh : array_like
        As in `Diode.through`.
    near : float
        An ideality to look around first, where one is at hand. It saves time; the result stays within the same 1e-6.

    Returns
    -------
    ndarray
        n between 0.05 and 2000, to 1e-6 relative; NaN where no such n exists (a fill factor of 0.25 or less, or one
        that the resistances alone undercut).

    Notes
    -----
    The fill factor falls as n rises, so the bracket is narrowed on a grid of 64 idealities a round, all cells at
    once; the last bracket, at most 0.27 % wide, is crossed by a straight line. Near a hint, Newton's steps come first.
    """
    known = aligned(ff, voc, jsc, temperature, rs, rsh)
    if np.isfinite(near):
        found = _by_newton(near, *known)
        if not np.isnan(found).any():
            return found
    ff_, voc_, jsc_, temperature_, rs_, rsh_ = (a[..., None] for a in known)
    plain = not ((rs_ > 0).any() or np.isfinite(rsh_).any())

    def fill_factors(ideality: Array) -> Array:
        if plain:
            return ideal_fill_factor(voc_ / (ideality * thermal_voltage(temperature_)))
        return Diode.through(voc_, jsc_, temperature_, ideality, rs_, rsh_).fill_factor()

    low = np.full(ff_.shape, np.log(_LEAST_IDEALITY))
    _, low, inside = _narrowed(fill_factors, ff_, low, np.full(ff_.shape, np.log(_GREATEST_IDEALITY)))
    width = (np.log(_GREATEST_IDEALITY) - np.log(_LEAST_IDEALITY)) / (_GRID.size - 1)
    between, _, _ = _narrowed(fill_factors, ff_, low, low + width, within=True)
    return np.where(inside, between, np.nan)[..., 0]


def _by_newton(near: float, ff: Array, voc: Array, jsc: Array, temperature: Array, rs: Array, rsh: Array) -> Array:
    """Idealities that meet the fill factors, looked for from one near them; NaN where that does not lead there.

    Each round moves u towards the maximum power point and n Vt towards the fill factor. At that point the power is
    stationary in u, so that what is still wrong in u disturbs n Vt in second order only.
    """
    vt, rs, conductance = thermal_voltage(temperature), rs * OHM_CM2, 1.0 / (rsh * OHM_CM2)
    below_voc = voc - jsc * rs
    top, target = jsc + (jsc * rs - voc) * conductance, ff * voc * jsc
    with np.errstate(invalid="ignore", over="ignore", divide="ignore"):
        scale = near * vt
        u = voc - scale * np.log1p(voc / scale)
        for _ in range(_STEPS):
            at_jsc = np.exp(-below_voc / scale)
            amplitude = top / (1.0 - at_jsc)
            lift = voc - u
            exponential = np.exp(-lift / scale)
            grown = amplitude * exponential / scale
            j = amplitude * (1.0 - exponential) + lift * conductance
            fall, reach = grown + conductance, u - 2.0 * rs * j
            gain = j - fall * reach
            step = gain / (grown / scale * reach + 2.0 * fall * (1.0 + rs * fall))
            sooner = amplitude * (1.0 - exponential) * at_jsc / (1.0 - at_jsc) * below_voc / scale**2
            per_scale = reach * (sooner - grown * lift / scale)  # of the power
            change = (target - j * (u - rs * j) - 0.5 * gain * step) / per_scale
            u, scale = u + step, scale + change
            if not (np.abs(change) > 1e-8 * scale).any():
                break
        ideality = scale / vt
        good = (np.abs(change) <= 1e-8 * scale) & (u > jsc * rs) & (u < voc) & (top > 0) & (below_voc > 0)
        good = good & (ideality > _LEAST_IDEALITY) & (ideality < _GREATEST_IDEALITY)
        return np.where(good, ideality, np.nan)


def _narrowed(
    fill_factors: Callable[[Array], Array], target: Array, low: Array, high: Array, within: bool = False
) -> tuple[Array, Array, Mask]:
    """One round of narrowing a bracket [ln n]: the n on a straight line, the new lower end, and whether it is inside.

    `within` says that the target is known to be inside, where rounding may put it an ulp outside.
    """
    reached = fill_factors(np.exp(low + (high - low) * _GRID))
    above = (reached >= target).sum(axis=-1, keepdims=True)  # how many grid points still exceed the target
    found = (above > 0) & (above < _GRID.size)
    above = np.minimum(np.maximum(above, 1), _GRID.size - 1)
    found = found | within
    width = (high - low) / (_GRID.size - 1)
    start = low + width * (above - 1)
    over = np.take_along_axis(reached, above - 1, axis=-1)
    under = np.take_along_axis(reached, above, axis=-1)
    with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
        return np.exp(start + width * (over - target) / (over - under)), start, found
