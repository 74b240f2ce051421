"""How a power difference is shared among the factors whose product the power is."""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from physics.units import Array

#: "log-mean" is free of any order; "ladder" walks current, then voltage, then fill factor.
Attribution = Literal["log-mean", "ladder"]
ATTRIBUTIONS: tuple[Attribution, ...] = ("log-mean", "ladder")


def log_mean(a: ArrayLike, b: ArrayLike) -> Array:
    """Logarithmic mean Λ(a, b) = (a − b)/ln(a/b), with Λ(a, a) = a.

    Parameters
    ----------
    a, b : array_like
        Positive numbers of broadcastable shapes.

    Returns
    -------
    ndarray
        Λ; NaN where a or b is not positive.

    Notes
    -----
    Computed as b·t/ln(1 + t) with b the lesser of the two, a the greater, and t = (a − b)/b, which loses no digits
    where a is close to b, nor where they are far apart.
    """
    first, second = np.asarray(a, dtype=float), np.asarray(b, dtype=float)
    greater, lesser = np.maximum(first, second), np.minimum(first, second)
    valid = lesser > 0
    t = np.where(valid, greater - lesser, 0.0) / np.where(valid, lesser, 1.0)
    same = t == 0.0
    mean = lesser * np.where(same, 1.0, t) / np.where(same, 1.0, np.log1p(np.where(same, 1.0, t)))
    return np.where(valid, mean, np.nan)


def factor_weights(
    top: tuple[Array, Array, Array], bottom: tuple[Array, Array, Array], attribution: Attribution
) -> tuple[Array, Array, Array]:
    """Power that one unit of each factor is worth on the way from `top` to `bottom`.

    With P the product of the three factors (current, voltage, fill factor), the weights w obey
    Σ w_x (x_top − x_bottom) = P_top − P_bottom exactly, and a piece Δx of one factor costs w_x·Δx.

    Parameters
    ----------
    top, bottom : tuple of three ndarray
        Current density [mA cm⁻²], voltage [V] and fill factor at either end, all positive.
    attribution : {"log-mean", "ladder"}
        log-mean: w_x = Λ(P_top, P_bottom)/Λ(x_top, x_bottom). ladder: the current is lowered at the voltage and fill
        factor of the top, then the voltage at the current of the bottom, then the fill factor.

    Returns
    -------
    tuple of three ndarray
        Weights [mW cm⁻² per mA cm⁻²], [mW cm⁻² per V], [mW cm⁻²].

    Raises
    ------
    ValueError
        For another attribution.

    Notes
    -----
    log-mean: B. W. Ang, Energy Policy 33 (2005) 867, doi:10.1016/j.enpol.2003.10.010 (additive LMDI-I).
    """
    if attribution == "log-mean":
        powers = top[0] * top[1] * top[2], bottom[0] * bottom[1] * bottom[2]
        whole, current, voltage, fill = log_mean(np.array([powers[0], *top]), np.array([powers[1], *bottom]))
        return whole / current, whole / voltage, whole / fill
    if attribution == "ladder":
        return top[1] * top[2], bottom[0] * top[2], bottom[0] * bottom[1]
    raise ValueError(f"unknown attribution {attribution!r}: use one of {', '.join(ATTRIBUTIONS)}")
