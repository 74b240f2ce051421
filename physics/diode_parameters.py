"""What a one-diode fit states of each parameter: a value, a bound, or that it cannot be told."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from physics.diode_curve import DiodeCurve
from physics.units import Array

Status = Literal["fitted", "lower bound", "upper bound", "cannot be told"]

#: The quantities of `DiodeFit.covariance`: those in which the errors are nearest to normal.
ORDER = ("n", "rs", "conductance", "j_l", "ln_j0")

_WIDE = 1.959963984540054  # 97.5 % quantile of the normal distribution
_OHM = 1e3  # Ω cm² in a kΩ cm²
_UNSURE = 0.5  # relative standard uncertainty above which a value is none
_MOST_DECADES = 10.0 * float(np.log(10.0))  # width of J0's interval beyond which it says nothing: 20 decades


@dataclass(frozen=True)
class Parameter:
    """A fitted parameter.

    Parameters
    ----------
    value : float
        Best fit, with which the curve is drawn: 0 for a series resistance and infinite for a shunt at their physical
        end. To be stated as a number only where `status` is "fitted"; see `stated`.
    u : float or None
        Standard uncertainty; None where the value is none.
    low95, high95 : float
        95 % interval, cut at what is physical (0 for resistances, infinity for the shunt).
    status : {"fitted", "lower bound", "upper bound", "cannot be told"}
        What the sweep holds of it.
    """

    value: float
    u: float | None
    low95: float
    high95: float
    status: Status

    @property
    def stated(self) -> float | None:
        """What can be stated: the value, or the bound where there is only one; None where nothing can be told."""
        choice = {"fitted": self.value, "lower bound": self.low95, "upper bound": self.high95}
        return choice.get(self.status)


def change(model: DiodeCurve, vt: float) -> Array:
    """Derivatives of the quantities in `ORDER` by those of a curve, at a thermal voltage [V]; shape (5, 5)."""
    light, voc, s, _, g = model.parameters.tolist()
    shade = float(np.exp(-voc / s))
    left, rest = max(light - g * voc, 1e-300), 1.0 - shade
    out = np.zeros((5, 5))
    out[0, 2] = 1.0 / vt
    out[1, 3] = _OHM
    out[2, 4] = 1.0 / _OHM
    out[3, 0] = 1.0
    of_voc = -g / left - shade / (s * rest) - 1.0 / s
    of_scale = voc / s**2 * (1.0 + shade / rest)
    out[4] = [1.0 / left, of_voc, of_scale, 0.0, -voc / left]
    return out


def stated_parameters(model: DiodeCurve, free: Array, covariance: Array, vt: float) -> dict[str, Parameter]:
    """The parameters of a fitted curve.

    Parameters
    ----------
    model : DiodeCurve
        The fit, held to physical values.
    free : ndarray, shape (5,)
        Parameters of the curve as the data alone would give them.
    covariance : ndarray, shape (5, 5)
        Of the quantities in `ORDER`.
    vt : float
        Thermal voltage [V].

    Returns
    -------
    dict of str to Parameter
        "n", "rs", "rsh", "j_l", "j0".
    """
    u = np.sqrt(np.diag(covariance)).tolist()
    ohm = _OHM * model.voc / max(float(model.current(np.zeros(1))[0]), 1e-300)
    return {
        "n": _positive(model.scale / vt, u[0]),
        "rs": _series(_OHM * model.rs, _OHM * float(free[3]), u[1], ohm),
        "rsh": _shunt(model.conductance / _OHM, float(free[4]) / _OHM, u[2], ohm),
        "j_l": _positive(model.light, u[3]),
        "j0": _positive(model.saturation, model.saturation * u[4], logarithmic=True),
    }


def _positive(value: float, u: float, logarithmic: bool = False) -> Parameter:
    relative = u / value if value > 0 else float("inf")
    if logarithmic:  # J0 is spread over decades: its interval is one of ratios
        if not _WIDE * relative < _MOST_DECADES:
            return Parameter(value, None, 0.0, float("inf"), "cannot be told")
        ratio = float(np.exp(_WIDE * relative))
        return Parameter(value, u, value / ratio, value * ratio, "fitted")
    if not relative < _UNSURE:
        return Parameter(value, None, 0.0, float("inf"), "cannot be told")
    return Parameter(value, u, value - _WIDE * u, value + _WIDE * u, "fitted")


def _ends(free: float, u: float) -> tuple[float, float]:
    """95 % interval of something that is not negative, by the estimate the data alone would give."""
    reach = _WIDE * u
    return max(free - reach, 0.0), free + (float(np.hypot(free, reach)) if free < 0.0 else reach)


def _series(value: float, free: float, u: float, ohm: float) -> Parameter:
    low, high = _ends(free, u)
    value = value if free > 0.0 else 0.0
    if not high < ohm:  # Voc/Jsc: no lit cell has more
        return Parameter(value, None, 0.0, float("inf"), "cannot be told")
    if low > 0.0:
        return Parameter(value, u, low, high, "fitted")
    return Parameter(value, None, 0.0, high, "upper bound")


def _shunt(conductance: float, free: float, u: float, ohm: float) -> Parameter:
    low, high = _ends(free, u)
    value = 1.0 / conductance if free > 0.0 < conductance else float("inf")
    if not high * ohm < 1.0:  # Voc/Jsc: no lit cell has less
        return Parameter(value, None, 0.0, float("inf"), "cannot be told")
    if low > 0.0:
        return Parameter(value, u * value**2, 1.0 / high, 1.0 / low, "fitted")
    return Parameter(value, None, 1.0 / high, float("inf"), "lower bound")
