"""What the numbers of a curve alone tell of its units, its sign, and the light; for where no words do."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from physics.units import Array

_LIT_FROM = 0.01
_SIDE_BY_SIDE = 0.5


@dataclass(frozen=True)
class Orientation:
    """Signs that make the photocurrent positive at positive voltages, whether it is lit, and the current at 0 V."""

    x_sign: int
    y_sign: int
    lit: bool | None
    at_zero: float


def orientation(voltage: Array, current: Array) -> Orientation:
    """Tell the orientation of a sweep from its shape.

    A diode's current grows steeply at one end of the voltages: that end is positive, and the current that grows there
    is opposite to the photocurrent. The current at 0 V is the photocurrent.

    Parameters
    ----------
    voltage, current : ndarray, shape (n,)
        In any one unit each; NaN where blank.
    """
    good = np.isfinite(voltage) & np.isfinite(current)
    v, j = voltage[good], current[good]
    if len(v) < 3 or np.ptp(v) == 0:
        return Orientation(1, 1, None, 0.0)
    order = np.argsort(v, kind="stable")
    v, j = v[order], j[order]
    at_zero = float(j[np.argmin(np.abs(v))])
    largest = float(np.max(np.abs(j)))
    if largest == 0.0:
        return Orientation(1, 1, False, 0.0)
    share = abs(at_zero) / largest
    low, high = float(j[0]) - at_zero, float(j[-1]) - at_zero
    x_sign = -1 if abs(low) > abs(high) and v[0] < 0 and _is_end_of_cell(v, low, high) else 1
    grows = low if x_sign < 0 else high
    lit = True if share > _LIT_FROM else _gives_power(v * x_sign, j * float(np.sign(grows)))
    y_sign = 1
    if lit is not False and at_zero:
        y_sign = 1 if at_zero > 0 else -1
    elif grows:
        y_sign = -1 if grows > 0 else 1
    return Orientation(x_sign, y_sign, lit, at_zero)


def _gives_power(voltage: Array, current: Array) -> bool | None:
    """Say whether the current at small voltages is opposite to the one that grows; None where it is now so, now so."""
    near = current[(voltage > 0) & (voltage <= 0.5 * voltage.max())]
    if not len(near):
        return None
    opposite = float(np.mean(near < 0))
    return True if opposite > 0.8 else False if opposite < 0.5 else None


def _is_end_of_cell(v: Array, low: float, high: float) -> bool:
    """Say whether the diode's steep end is at negative voltages: mere leakage there is not as steep."""
    return bool(v[-1] <= 0 or (abs(low) > 5 * abs(high) and abs(v[0]) >= 0.5 * abs(v[-1])))


def counts_up(values: Array) -> bool:
    """Say whether a column merely numbers its rows."""
    return len(values) > 2 and bool(np.all(np.diff(values) == 1)) and values[0] in (0.0, 1.0)


def alike(first: Array, second: Array) -> bool:
    """Say whether two columns can be the voltages (or wavelengths) of sweeps side by side."""
    a, b = first[np.isfinite(first)], second[np.isfinite(second)]
    if len(a) < 3 or len(b) < 3 or np.ptp(a) == 0 or np.ptp(b) == 0:
        return False
    overlap = min(a.max(), b.max()) - max(a.min(), b.min())
    span = max(a.max(), b.max()) - min(a.min(), b.min())
    return bool(overlap > _SIDE_BY_SIDE * span) and runs_one_way(a) and runs_one_way(b)


def runs_one_way(values: Array) -> bool:
    """Say whether nearly all steps of a column go one way, or one way and then back."""
    steps = np.sign(np.diff(values))
    turns = np.count_nonzero(np.diff(steps[steps != 0]))
    return bool(turns <= max(1, len(values) // 20))


def unit_of_voltage(values: Array) -> str:
    """V or mV, whichever makes these the voltages of a cell."""
    return "mV" if np.nanmax(np.abs(values)) > 20 else "V"


def unit_of_current(at_zero: float, density: bool) -> str:
    """The unit in which this is a likely photocurrent: ampere below 0.3, milliampere up to 100, else A/m² or µA."""
    size = abs(at_zero)
    if density:
        return "A/cm²" if 0 < size < 0.3 else "A/m²" if size > 100 else "mA/cm²"
    return "A" if 0 < size < 0.3 else "µA" if size > 1000 else "mA"


def unit_of_efficiency(values: Array) -> str:
    """Fraction or %, whichever makes these efficiencies."""
    return "%" if np.nanmax(values) > 2 else "fraction"


def unit_of_wavelength(values: Array) -> str:
    """The likely unit of wavelengths: nm from 100 on, else µm."""
    return "nm" if np.nanmedian(values) > 50 else "µm"
