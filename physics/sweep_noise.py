"""The noise of a sweep and the points that stand out of it, told from neighbours and without a model."""

from __future__ import annotations

import numpy as np

from physics.units import Array, Mask

_MEDIAN = 1.4826  # standard deviation of a normal distribution over its median absolute value
_BENDS = 3.0  # steps by which a bend of the background's error may leave the median of nine
_MOST_OUTLIERS = 0.15  # share of the points; more than that is a pattern and no outlier
_OFF_MEDIAN = 1.72  # standard deviation of the noise over the median distance from the median of nine; by simulation
_OUTLIER = 6.0  # standard deviations; one normal point in 1e9 lies further out


def by_differences(v: Array, rest: Array, order: int) -> float:
    """Noise by the divided differences of `order` + 1 neighbours, each scaled to the variance of one point."""
    points = np.lib.stride_tricks.sliding_window_view(v, order + 1)
    gaps = points[:, :, None] - points[:, None, :] + np.eye(order + 1) * np.ptp(v)
    weights = 1.0 / np.prod(gaps / np.ptp(v), axis=2)
    weights = weights / np.sqrt(np.sum(weights**2, axis=1, keepdims=True))
    differences = np.sum(weights * np.lib.stride_tricks.sliding_window_view(rest, order + 1), axis=1)
    return _MEDIAN * float(np.median(np.abs(differences)))


def outlying(rest: Array, least: float = 0.0) -> Mask:
    """Points that stand far out from the median of nine neighbours.

    Parameters
    ----------
    rest : ndarray, shape (n,)
        Currents without the background, in the order of the voltage [mA cm⁻²].
    least : float
        Distance that is never far [mA cm⁻²].

    Returns
    -------
    ndarray of bool, shape (n,)
        Where a background is wrong, `rest` bends: what its running median moves from point to point nearby is never
        far. Nothing is outlying where more than 15 % would be.
    """
    if rest.size < 12:
        return np.zeros(rest.size, dtype=bool)
    middle = _running_median(rest, 4)
    off = np.abs(rest - middle)
    usual = _OFF_MEDIAN * np.maximum(_running_median(off, 20), np.median(off))
    moving = np.pad(np.abs(np.gradient(_running_median(rest, 2))), 5, mode="edge")
    drift = _BENDS * np.lib.stride_tricks.sliding_window_view(moving, 11).max(axis=1)
    limit = _OUTLIER * (1.0 + 3.0 / np.sqrt(rest.size))  # the fewer points, the less is known of what is usual
    far = off > np.maximum(np.maximum(limit * usual, drift), least)
    return far if np.mean(far) <= _MOST_OUTLIERS else np.zeros(rest.size, dtype=bool)


def _running_median(values: Array, reach: int) -> Array:
    reach = min(reach, values.size - 1)
    padded = np.pad(values, reach, mode="reflect")
    return np.median(np.lib.stride_tricks.sliding_window_view(padded, 2 * reach + 1), axis=1)
