"""Fit of the one-diode model to a lit J–V sweep, with what the data can and cannot tell of each parameter."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from physics.diode_curve import DiodeCurve, rough_curve
from physics.diode_parameters import Parameter, change, stated_parameters
from physics.orientation import Oriented, oriented, rough_figures
from physics.units import Array, Mask, thermal_voltage

FEWEST = 12  #: Points below which nothing is fitted.

_MEDIAN = 1.4826  # standard deviation of a normal distribution over its median absolute value
_SOFT = 2.0  # standard deviations from which the first fit gives points less weight
_OUTLIER = 5.0  # standard deviations from which a point is set aside
_MOST_ASIDE = 0.2  # share of the points; more than that is a pattern and no outlier
_FALLEN = 0.8  # of Jsc: a sweep that stays above it shows no knee
_PATTERN = 4.0  # standard deviations of the residuals' correlation that chance does not make


@dataclass(frozen=True, eq=False)
class DiodeFit:
    """Result of `fit_one_diode`.

    Parameters
    ----------
    parameters : mapping of str to Parameter
        "n", "rs" and "rsh" [Ω cm²], "j_l" and "j0" [mA cm⁻²]; empty where nothing was fitted.
    covariance : ndarray, shape (5, 5)
        Of the quantities in `ORDER`, with the conductance in S cm⁻² and ln J0 of J0 in mA cm⁻²; NaN where nothing was
        fitted.
    voltage, residuals : ndarray, shape (m,)
        Voltages [V] in rising order, and measured minus fitted current density there [mA cm⁻²].
    used : ndarray of bool, shape (m,)
        Which of them were fitted; the others stood out too far.
    scale : float
        Standard deviation of the residuals [mA cm⁻²]; NaN where nothing was fitted.
    converged : bool
        Whether there is a fit.
    message : str
        Sentences on what is missing or doubtful; empty where nothing is.
    model : DiodeCurve or None
        The fitted curve.
    """

    parameters: Mapping[str, Parameter]
    covariance: Array
    voltage: Array
    residuals: Array
    used: Mask
    scale: float
    converged: bool
    message: str
    model: DiodeCurve | None

    def curve(self, voltage: ArrayLike) -> Array:
        """Fitted current density [mA cm⁻²] at voltages [V] of any shape, photocurrent positive; NaN without a fit."""
        v = np.asarray(voltage, dtype=float)
        return np.full(v.shape, np.nan) if self.model is None else self.model.current(v)


def fit_one_diode(voltage: ArrayLike, current: ArrayLike, temperature: float, *, lit: bool = True) -> DiodeFit:
    """Fit n, Rs, Rsh, J_L and J0 to a lit sweep.

    The model is solved exactly (`physics.diode_curve`). A first fit with a soft loss ρ = 2(√(1 + r²) − 1) finds the
    points that stand out by more than five standard deviations (by the median absolute residual); an ordinary least
    squares fit to the others follows, held to Rs ≥ 0 and 1/Rsh ≥ 0.

    Parameters
    ----------
    voltage, current : array_like, shape (n,)
        Voltages [V] and current densities [mA cm⁻²] in any order and of either sign; NaN is left out.
    temperature : float
        Cell temperature [K].
    lit : bool
        False refuses the sweep as a dark one.

    Returns
    -------
    DiodeFit
        With `converged` False and a `message` where the sweep holds no fit.

    Raises
    ------
    ValueError
        When the arrays are not of one length, or the temperature is not positive.

    Notes
    -----
    The covariance is that of the least squares, s² (XᵀX)⁻¹, times ν/(ν − 2) for ν degrees of freedom, so that
    ± 1.96 u hold 95 % of Student's t (JCGM 101:2008, 6.4.9.4). It takes the noise as equal and independent from point
    to point; `message` says so where the residuals follow a pattern. A resistance at its physical end is given the
    interval on which χ² rises by less than 1.96² over its least physical value, with the estimate x that the data
    alone would give: from 0 to x + √(x² + 1.96² u²) for x < 0 and to x + 1.96 u for x > 0.
    """
    _check_temperature(temperature)
    sweep = oriented(voltage, current)
    v, j = sweep.voltage, sweep.current
    reason = _refusal(sweep, lit)
    if reason:
        return _refused(v, reason)
    voc, jsc = rough_figures(v, j)
    start = rough_curve(v, j, voc, jsc) if voc > 0 and jsc > 0 else None
    if start is None:
        return _refused(v, "The sweep does not bend like a diode, so no one-diode curve was fitted.")
    found = _robust(start, v, j)
    if found is None:
        return _refused(v, "The fit did not settle on a one-diode curve.")
    model, used = found
    return _result(model, v, j, used, float(thermal_voltage(temperature)), sweep.message)


def at_temperature(fit: DiodeFit, before: float, after: float) -> DiodeFit:
    """The same fitted curve, read at another temperature: of its parameters only n = s/Vt is another.

    Parameters
    ----------
    fit : DiodeFit
        Of a sweep that was taken to be at the temperature `before`.
    before, after : float
        Temperatures [K].

    Raises
    ------
    ValueError
        When a temperature is not positive.
    """
    for temperature in (before, after):
        _check_temperature(temperature)
    if before == after or not fit.converged:
        return fit
    factor = before / after
    n = fit.parameters["n"]
    scaled = replace(
        n,
        value=n.value * factor,
        u=None if n.u is None else n.u * factor,
        low95=n.low95 * factor,
        high95=n.high95 * factor,
    )
    covariance = fit.covariance.copy()
    covariance[0] *= factor
    covariance[:, 0] *= factor
    return replace(fit, parameters={**fit.parameters, "n": scaled}, covariance=covariance)


def _check_temperature(temperature: float) -> None:
    if not 0.0 < temperature < np.inf:
        raise ValueError(f"the temperature must be a positive number of kelvin, not {temperature:g}")


def _refusal(sweep: Oriented, lit: bool) -> str:
    if sweep.voltage.size < FEWEST:
        return f"A one-diode fit needs at least {FEWEST} points; this sweep has {sweep.voltage.size}."
    if np.unique(sweep.voltage).size < FEWEST:
        return f"A one-diode fit needs at least {FEWEST} different voltages."
    if not (lit and sweep.lit):
        return "This is a dark sweep; the fit of n, Rs, Rsh, J_L and J0 needs a lit one."
    _, jsc = rough_figures(sweep.voltage, sweep.current)
    if np.median(sweep.current[-3:]) > _FALLEN * jsc:
        return "The sweep ends in its flat part, before the current falls; n, Rs and J0 cannot be told from it."
    return ""


def _refused(v: Array, message: str) -> DiodeFit:
    nothing = np.full(v.size, np.nan)
    return DiodeFit({}, np.full((5, 5), np.nan), v, nothing, np.zeros(v.size, bool), float("nan"), False, message, None)


def _robust(start: DiodeCurve, v: Array, j: Array) -> tuple[DiodeCurve, Mask] | None:
    """The fitted curve and the points that were fitted; None where the fit failed."""
    scale = _median_scale(j - start.current(v), j)
    soft = _least_squares(start, v, j, "soft_l1", _SOFT * scale)
    if soft is None:
        return None
    used = np.ones(v.size, dtype=bool)
    model: DiodeCurve | None = soft
    for _ in range(3):
        if model is None:
            return None
        left = j - model.current(v)
        near = np.abs(left) <= _OUTLIER * _median_scale(left, j)
        if np.mean(~near) > _MOST_ASIDE:
            near[:] = True
        settled = bool((near == used).all()) and model is not soft
        used = near
        if settled:
            break
        model = _least_squares(model, v[used], j[used], "linear", 1.0)
    return None if model is None else (model, used)


def _median_scale(left: Array, j: Array) -> float:
    """Scale of the residuals by their median, never below the rounding of the currents."""
    return max(_MEDIAN * float(np.median(np.abs(left))), 1e-13 * float(np.max(np.abs(j))))


def _least_squares(
    start: DiodeCurve, v: Array, j: Array, loss: Literal["linear", "soft_l1"], scale: float
) -> DiodeCurve | None:
    from scipy.optimize import least_squares

    def misfit(x: Array) -> Array:
        return DiodeCurve(*x.tolist()).current(v) - j

    def jacobian(x: Array) -> Array:
        return DiodeCurve(*x.tolist()).jacobian(v)

    least = np.array([1e-9 * start.light, 1e-3 * start.voc, 1e-2 * start.scale, 0.0, 0.0])
    most = np.array([10.0 * start.light, 10.0 * start.voc, 100.0 * start.scale, np.inf, np.inf])
    tight = 1e-15 if loss == "linear" else 1e-10  # the soft fit only finds the points that stand out
    found = least_squares(
        misfit,
        start.parameters,
        jac=jacobian,
        bounds=(least, most),
        x_scale="jac",
        loss=loss,
        f_scale=scale,
        ftol=tight,
        xtol=tight,
        gtol=None,
        max_nfev=60,
    )
    return DiodeCurve(*found.x.tolist()) if np.isfinite(found.cost) else None


def _result(model: DiodeCurve, v: Array, j: Array, used: Mask, vt: float, message: str) -> DiodeFit:
    residuals = j - model.current(v)
    left = residuals[used]
    freedom = left.size - 5
    jacobian = model.jacobian(v[used])
    size = np.linalg.norm(jacobian, axis=0) + 1e-300
    inverse = np.linalg.pinv(jacobian / size) / size[:, None]
    scale = float(np.sqrt(left @ left / freedom))
    noise = max(scale, 1e-16 * float(np.max(np.abs(j))))
    spread = inverse @ inverse.T * noise**2 * freedom / (freedom - 2.0)
    free = model.parameters + inverse @ left  # what the data alone would give, where an end holds a resistance
    by_curve = change(model, vt)
    with np.errstate(over="ignore", invalid="ignore"):  # where J0 is next to nothing; then it cannot be told
        covariance = by_curve @ spread @ by_curve.T
        parameters = stated_parameters(model, free, covariance, vt)
    notes = [message] if message else []
    notes += _remarks(left, int(np.sum(~used)), v.size, 1e-12 * float(np.max(np.abs(j))))
    return DiodeFit(parameters, covariance, v, residuals, used, scale, True, " ".join(notes), model)


def _remarks(left: Array, aside: int, points: int, rounding: float) -> list[str]:
    notes = []
    if aside:
        notes.append(
            f"{aside} of {points} points stand out by more than {_OUTLIER:g} standard deviations and were set aside."
        )
    correlation = float(left[1:] @ left[:-1]) / max(float(left @ left), 1e-300)
    if correlation * np.sqrt(left.size) > _PATTERN and float(np.std(left)) > rounding:
        notes.append(
            "The residuals follow a pattern: a one-diode curve does not describe this sweep fully, and the intervals"
            " are too narrow."
        )
    return notes
