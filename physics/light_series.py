"""What Voc at several light levels tells: the ideality, and the J–V curve of the cell without series resistance."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import numpy as np
from numpy.typing import ArrayLike

from physics.units import Array, thermal_voltage

_GRID = 4001  # points in ln J on which the maximum power is looked for, before the parabola through three of them


class SeriesFault(Enum):
    """What stands in the way of a figure from a light-intensity series."""

    TOO_FEW = "A light-intensity series needs at least three different light levels with Jsc and Voc above zero."
    TOO_BRIGHT = (
        "The series does not go down far enough: the maximum power of the pseudo curve lies where the light is about "
        "a twentieth of that under which the cell was measured. Measure at weaker light."
    )
    NO_MAXIMUM = (
        "The pseudo curve of the series has no maximum of power: check Jsc, and the units and order of the columns."
    )
    TOO_DIM = "The series does not reach the light under which the cell was measured: measure up to its Jsc."


@dataclass(frozen=True, eq=False)
class LightSeries:
    """Jsc and Voc at several light levels.

    Parameters
    ----------
    jsc : ndarray, shape (n,)
        Short-circuit current densities [mA cm⁻²], rising, all different.
    voc : ndarray, shape (n,)
        Open-circuit voltages [V].
    """

    jsc: Array
    voc: Array

    @classmethod
    def of(cls, jsc: ArrayLike, voc: ArrayLike) -> LightSeries:
        """A series from pairs in any order; pairs that are not above zero are left out, equal currents averaged.

        Raises
        ------
        ValueError
            When the two are not of one length.
        """
        j, v = np.asarray(jsc, dtype=float).ravel(), np.asarray(voc, dtype=float).ravel()
        if j.shape != v.shape:
            raise ValueError("a light-intensity series needs as many voltages as currents")
        good = (j > 0) & (v > 0) & np.isfinite(j) & np.isfinite(v)
        levels, group = np.unique(j[good], return_inverse=True)
        mean = np.bincount(group, weights=v[good]) / np.bincount(group) if levels.size else levels
        return cls(levels, mean)


@dataclass(frozen=True)
class SeriesIdeality:
    """Ideality n = dVoc/d(ln Jsc)/Vt over a range of light.

    Parameters
    ----------
    value : float
        n; NaN where `fault` says why.
    u : float or None
        Standard uncertainty from the scatter about the straight line; None where two points leave none.
    fault : SeriesFault or None
    """

    value: float
    u: float | None
    fault: SeriesFault | None = None


def ideality_of(series: LightSeries, temperature: float, low: float = 0.0, high: float = np.inf) -> SeriesIdeality:
    """Ideality from Voc against ln Jsc, by least squares.

    Parameters
    ----------
    series : LightSeries
    temperature : float
        Temperature of the cell [K].
    low, high : float
        Range of Jsc to be used [mA cm⁻²].

    Notes
    -----
    Voc = n Vt ln(Jsc/J0 + 1), so the slope over ln Jsc is n Vt where Jsc is far above J0. No series resistance enters,
    since no current flows at Voc.
    """
    used = (series.jsc >= low) & (series.jsc <= high)
    x, y = np.log(series.jsc[used]), series.voc[used]
    if x.size < 3:
        return SeriesIdeality(np.nan, None, SeriesFault.TOO_FEW)
    x = x - x.mean()
    spread = float(np.sum(x * x))
    slope = float(np.sum(x * y)) / spread
    scatter = float(np.sum((y - y.mean() - slope * x) ** 2)) / (x.size - 2)
    vt = float(thermal_voltage(temperature))
    return SeriesIdeality(slope / vt, float(np.sqrt(scatter / spread)) / vt)


@dataclass(frozen=True, eq=False)
class PseudoCurve:
    """The J–V curve without series resistance.

    Parameters
    ----------
    voltage, current : ndarray, shape (n,)
        The measured points of it [V; mA cm⁻²].
    fill_factor : float
        Its fill factor; NaN where `fault` says why.
    voc : float
        Its open-circuit voltage [V].
    fault : SeriesFault or None
    """

    voltage: Array
    current: Array
    fill_factor: float
    voc: float
    fault: SeriesFault | None = None


def pseudo_points(series: LightSeries, jsc: float) -> tuple[Array, Array]:
    """The measured points of the curve without series resistance: V = Voc_k [V] and J = Jsc − Jsc_k [mA cm⁻²].

    Parameters
    ----------
    series : LightSeries
    jsc : float
        Current density under the light of the measurement [mA cm⁻²].

    Returns
    -------
    voltage, current : ndarray, shape (n,)
        In falling order of the voltage.
    """
    return series.voc[::-1], jsc - series.jsc[::-1]


def pseudo_curve(series: LightSeries, jsc: float) -> PseudoCurve:
    """The curve V = Voc_k, J = Jsc − Jsc_k, which superposition says the junction alone would have.

    Parameters
    ----------
    series : LightSeries
        From well above the light of the measurement, or at least up to it, down to a hundredth of it.
    jsc : float
        Current density under the light of the measurement [mA cm⁻²].

    Returns
    -------
    PseudoCurve
        Between points, V is a monotone cubic in ln J (a straight line where the ideality is constant).

    Notes
    -----
    The construction of R. A. Sinton and A. Cuevas, 16th European Photovoltaic Solar Energy Conference (2000) 1152
    (from memory).
    """
    voltage, current = pseudo_points(series, jsc)
    if series.jsc.size < 3:
        return PseudoCurve(voltage, current, np.nan, np.nan, SeriesFault.TOO_FEW)
    if series.jsc[-1] < jsc * (1.0 - 1e-6):
        return PseudoCurve(voltage, current, np.nan, np.nan, SeriesFault.TOO_DIM)
    from scipy.interpolate import PchipInterpolator

    junction = PchipInterpolator(np.log(series.jsc), series.voc)
    lost = np.linspace(np.log(series.jsc[0]), np.log(min(jsc, series.jsc[-1])), _GRID)  # ln of the current lost
    power = junction(lost) * (jsc - np.exp(lost))
    at = int(np.argmax(power))
    voc = float(junction(lost[-1]))
    if at == 0:
        return PseudoCurve(voltage, current, np.nan, voc, SeriesFault.TOO_BRIGHT)
    if at == power.size - 1:
        return PseudoCurve(voltage, current, np.nan, voc, SeriesFault.NO_MAXIMUM)
    left, middle, right = power[at - 1 : at + 2]
    best = middle - (left - right) ** 2 / (8.0 * (left - 2.0 * middle + right))  # top of the parabola through three
    return PseudoCurve(voltage, current, float(best / (voc * jsc)), voc)
