"""Figures of merit of a measured current-density–voltage (J–V) sweep, by local fits, with standard uncertainties."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike

from physics.diode_curve import DiodeCurve, rough_curve
from physics.local_fit import LocalData, LocalFit
from physics.local_points import Linear, root, top
from physics.orientation import Oriented, crossing, oriented, rough_figures, smoothed
from physics.units import Array

_ROUNDS = 4  # of moving the window after the point that is sought


@dataclass(frozen=True)
class Estimate:
    """A value with its standard uncertainty `u`, which is None where it is not known."""

    value: float
    u: float | None


@dataclass(frozen=True)
class Window:
    """Where a local fit looked: voltages [V] from `low` to `high`, how many `points`, and the polynomial's `order`."""

    low: float
    high: float
    points: int
    order: int


@dataclass(frozen=True, eq=False)
class SweepFigures:
    """Figures of merit of one sweep; None where the sweep does not hold one, and `message` says why.

    Parameters
    ----------
    jsc, voc, ff : Estimate or None
        Short-circuit current density [mA cm⁻²], open-circuit voltage [V], fill factor (0 to 1).
    v_mp, j_mp, power : Estimate or None
        Voltage [V], current density [mA cm⁻²] and power density [mW cm⁻²] of the maximum power point.
    efficiency : Estimate or None
        Power over irradiance (0 to 1).
    lit : bool
        Whether the sweep shows a photocurrent.
    points, set_aside : int
        How many points were used, and how many stood out too far from their neighbours.
    windows : dict of str to Window
        Where the local fits of `jsc`, `voc` and `power` looked.
    message : str
        Sentences on what is missing or doubtful; empty where nothing is.
    """

    jsc: Estimate | None
    voc: Estimate | None
    ff: Estimate | None
    v_mp: Estimate | None
    j_mp: Estimate | None
    power: Estimate | None
    efficiency: Estimate | None
    lit: bool
    points: int
    set_aside: int
    windows: dict[str, Window]
    message: str


def density(current_mA: ArrayLike, area_cm2: float) -> Array:
    """Current density [mA cm⁻²] of a current [mA], of any shape, through an area [cm²].

    Raises
    ------
    ValueError
        When the area is not a positive number.
    """
    if not 0.0 < area_cm2 < np.inf:
        raise ValueError(f"the cell area must be a positive number of cm², not {area_cm2:g}")
    return np.asarray(current_mA, dtype=float) / area_cm2


def figures_of_merit(voltage: ArrayLike, current: ArrayLike, irradiance: float = 100.0) -> SweepFigures:
    """Jsc, Voc, fill factor and maximum power of a lit sweep, each by a local fit of J(V).

    Around V = 0, the crossing of J = 0 and the maximum of V·J, a polynomial is fitted to what the data differ from a
    rough one-diode curve of the whole sweep. Window and order (1 to 7) are those of the least expected error: the
    variance, plus the square of half the bias that the polynomial alone would have on the rough curve, plus that of
    the bias it has on a smooth difference from it, where one is seen. Windows whose residuals exceed the noise are
    refused.

    Parameters
    ----------
    voltage, current : array_like, shape (n,)
        As in `oriented`.
    irradiance : float
        Incident power [mW cm⁻²].

    Returns
    -------
    SweepFigures
        The standard uncertainties hold the noise that the local residuals show and the covariance of the fits, widened
        for few degrees of freedom (value ± 1.96 u holds 95 %). They hold no error of calibration, area or voltage.

    Raises
    ------
    ValueError
        When the arrays are not of one length or the irradiance is not positive.

    Notes
    -----
    On exact one-diode curves the rough curve is the curve itself, and the figures are good to 1e-12 relative. On
    two-diode curves without noise what is left is the error of the local polynomials: at most 1e-5 with 100 points to
    Voc, 1e-7 with 200 (tests/physics/test_sweep.py). In noise, a sweep far from any one-diode curve (a photocurrent
    that falls with the voltage, say) can be off by some 2 u. V = 0 or J = 0 up to one step outside the sweep is
    extrapolated, and said so; further out there is no figure. The noise lifts the highest point of a fitted curve by
    ½ u²(P′)/|P″|, which is taken off.
    """
    if not 0.0 < irradiance < np.inf:
        raise ValueError(f"the irradiance must be a positive number of mW cm⁻², not {irradiance:g}")
    sweep = oriented(voltage, current)
    if not sweep.lit:
        message = sweep.message or "No photocurrent stands out of the noise: this looks like a dark sweep."
        return _without(sweep, message)
    with np.errstate(over="ignore", divide="ignore", invalid="ignore"):  # figures that come out of it are none
        return _Reading(sweep).figures(irradiance)


def _without(sweep: Oriented, message: str) -> SweepFigures:
    return SweepFigures(None, None, None, None, None, None, None, sweep.lit, sweep.voltage.size, 0, {}, message)


@dataclass(eq=False)
class _Reading:
    """One pass over a lit sweep: what was found, and what there is to say about it."""

    sweep: Oriented
    notes: list[str] = field(default_factory=list)
    windows: dict[str, Window] = field(default_factory=dict)

    def figures(self, irradiance: float) -> SweepFigures:
        """All figures, for an irradiance [mW cm⁻²]."""
        if self.sweep.message:
            self.notes.append(self.sweep.message)
        self.data = self._data()
        jsc, voc, peak = self._short_circuit(), self._open_circuit(), self._maximum()
        power = peak["power"] if peak else None
        if not self.notes and _stated(power) is None:
            self.notes.append("No maximum power can be read off these points.")
        ff = power.over(jsc).over(voc) if power and jsc and voc else None
        return SweepFigures(
            _stated(jsc),
            _stated(voc),
            _stated(ff),
            _stated(peak["voltage"]) if peak else None,
            _stated(peak["current"]) if peak else None,
            _stated(power),
            _stated(power.times(1.0 / irradiance)) if power else None,
            True,
            self.data.voltage.size,
            self.sweep.voltage.size - self.data.voltage.size,
            self.windows,
            " ".join(self.notes),
        )

    def _data(self) -> LocalData:
        v, j = self.sweep.voltage, self.sweep.current
        data = LocalData(v, j, _rough(v, j)).without_outliers()
        if data.voltage.size < v.size:  # the rough curve was drawn by them too
            cleaned = LocalData(data.voltage, data.current, _rough(data.voltage, data.current))
            data = cleaned.without_outliers()
            aside = v.size - data.voltage.size
            self.notes.append(f"{aside} of {v.size} points stand far from their neighbours and were set aside.")
        return data

    @property
    def _reach(self) -> tuple[float, float]:
        """Voltages [V] up to one step outside the sweep."""
        v = self.data.voltage
        steps = np.diff(np.unique(v))
        return float(v[0] - steps[0]), float(v[-1] + steps[-1])

    def _short_circuit(self) -> Linear | None:
        low, high = self._reach
        if not low <= 0.0 <= high:
            self.notes.append("The sweep does not reach 0 V, so it holds no short-circuit current.")
            return None
        fit = self.data.fit(0.0)
        if fit is None:
            self.notes.append("Too few points near 0 V for a short-circuit current.")
            return None
        self._note("jsc", fit, 0.0, "The short-circuit current is extrapolated by less than one step.")
        return self._linear(fit, fit.at(0.0)[0], fit.influence(0.0))

    def _open_circuit(self) -> Linear | None:
        low, high = self._reach
        at = self.data.background.voc if self.data.background else crossing(self.data.voltage, self.data.current)
        fit = None
        for _ in range(_ROUNDS):
            if at is None or not low <= at <= high:
                self.notes.append("The sweep does not reach zero current, so it holds no open-circuit voltage.")
                return None
            fit, centre = self.data.fit(at), at
            at = root(fit, at) if fit else None
            if at is not None and abs(at - centre) < 0.2 * (high - low) / self.data.voltage.size:
                break
        if fit is None or at is None or not low <= at <= high:
            self.notes.append("The current does not cross zero clearly enough for an open-circuit voltage.")
            return None
        self._note("voc", fit, at, "The open-circuit voltage is extrapolated by less than one step.")
        return self._linear(fit, at, fit.influence(at) / -fit.at(at)[1])

    def _maximum(self) -> dict[str, Linear] | None:
        v, j = self.data.voltage, self.data.current
        power = v * (self.data.background.current(v) if self.data.background else smoothed(j))
        at: float | None = float(v[int(np.argmax(power))])
        fit = None
        for _ in range(_ROUNDS):
            if at is None or not v[0] < at < v[-1]:
                break
            fit, centre = self.data.fit(at, slope_too=True), at
            at = top(fit, at) if fit else None
            if at is not None and abs(at - centre) < 0.5 * np.ptp(v) / v.size:
                break
        if fit is None or at is None or not v[0] < at < v[-1] or abs(at - fit.centre) > fit.half:
            self.notes.append("The sweep holds no maximum of the power, so there is no fill factor.")
            return None
        self._note("power", fit, at, "")
        return self._at_the_top(fit, at)

    def _at_the_top(self, fit: LocalFit, at: float) -> dict[str, Linear]:
        value, slope, bend = fit.at(at)
        curvature = 2.0 * slope + at * bend
        own = fit.influence(at)
        moved = (own + at * fit.influence(at, 1)) / -curvature
        raised = 0.5 * float(moved @ moved) * fit.deviation**2 * abs(curvature)
        power = value * at - raised
        return {
            "voltage": self._linear(fit, at, moved),
            "current": self._linear(fit, power / at, own + slope * moved),
            "power": self._linear(fit, power, own * at),
        }

    def _note(self, name: str, fit: LocalFit, at: float, extrapolated: str) -> None:
        v = self.data.voltage
        inside = fit.centre - fit.half, fit.centre + fit.half
        self.windows[name] = Window(*inside, fit.index.size, fit.order)
        rounding = 1e-9 * float(v[-1] - v[0])
        if extrapolated and not v[0] - rounding <= at <= v[-1] + rounding:
            self.notes.append(extrapolated)

    @staticmethod
    def _linear(fit: LocalFit, value: float, influence: Array) -> Linear:
        return Linear(value, influence * fit.deviation)


def _stated(linear: Linear | None) -> Estimate | None:
    if linear is None:
        return None
    value, u = float(linear.value), float(np.sqrt(linear.moves @ linear.moves))
    return Estimate(value, u) if np.isfinite([value, u]).all() else None


def hysteresis(forward: SweepFigures, reverse: SweepFigures) -> Estimate | None:
    """Hysteresis index (P_reverse − P_forward)/P_reverse of the maximum powers.

    The convention is that of the falling sweep (Voc to Jsc) as the reference: positive where the reverse sweep yields
    more, as usual with mobile ions; 0 for none.

    Parameters
    ----------
    forward, reverse : SweepFigures
        Of the sweep with rising and the one with falling voltage.

    Returns
    -------
    Estimate or None
        With the uncertainty of two independent powers; None where one of them is missing or not positive.
    """
    if forward.power is None or reverse.power is None or not reverse.power.value > 0.0:
        return None
    ratio = forward.power.value / reverse.power.value
    if forward.power.u is None or reverse.power.u is None:
        return Estimate(1.0 - ratio, None)
    return Estimate(1.0 - ratio, float(np.hypot(forward.power.u, ratio * reverse.power.u)) / reverse.power.value)


def _rough(v: Array, j: Array) -> DiodeCurve | None:
    voc, jsc = rough_figures(v, j)
    return rough_curve(v, j, voc, jsc) if voc > 0 and jsc > 0 else None
