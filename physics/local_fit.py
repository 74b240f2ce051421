"""Local polynomial fits to a measured curve, with windows chosen so that noise and not bias decides the error.

What is fitted is the data minus a smooth background (a rough one-diode curve): a polynomial has far less to follow
then, and a background that is wrong by some share leaves only that share of the bias of a plain local polynomial
(N. L. Hjort and I. K. Glad, Ann. Statist. 23 (1995) 882, doi:10.1214/aos/1176324627, from memory, do the same with a
factor in place of a sum).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.polynomial import Legendre
from numpy.polynomial.legendre import legvander

from physics.diode_curve import DiodeCurve
from physics.sweep_noise import by_differences, outlying
from physics.units import Array, Indices

_HIGHEST = 7  # order of the polynomials
_FREEDOM = 8  # least degrees of freedom: with fewer the residuals say nothing of the noise
_WIDEST = 1500  # points of a window, for the sake of time
_ROUNDING = 1e-9  # share of the current below which nothing is an outlier
_GROWTH = 1.5  # from window to window
_TRUST = 0.5  # share of the background's bend that it may have wrong
_PATTERN = 2.0  # ratio of variances from which the background's error counts as seen; noise alone gives about 1/2
_BENT = 9  # order of the polynomial that follows the background's error then


@dataclass(frozen=True, eq=False)
class LocalFit:
    """Background plus polynomial in x = (V − centre)/half.

    Parameters
    ----------
    background : DiodeCurve or None
        What the polynomial is added to; None for zero.
    centre, half : float
        Middle and half width of the window [V].
    coefficients : ndarray, shape (p + 1,)
        Of the powers of x [mA cm⁻²].
    response : ndarray, shape (p + 1, m)
        Derivative of the coefficients by the fitted currents, without the background.
    index : ndarray, shape (m,)
        Which points were fitted.
    voltage : ndarray, shape (m,)
        Their voltages [V].
    link : ndarray, shape (5, n)
        Derivative of the background's parameters by all currents of the sweep.
    deviation : float
        Standard deviation of the noise of one point by the residuals, times √(ν/(ν − 2)) for ν degrees of freedom:
        the standard deviation of Student's t, so that ± 1.96 of it hold 95 % (JCGM 101:2008, 6.4.9.4).
    """

    background: DiodeCurve | None
    centre: float
    half: float
    coefficients: Array
    response: Array
    index: Indices
    voltage: Array
    link: Array
    deviation: float

    @property
    def order(self) -> int:
        """Order of the polynomial."""
        return self.coefficients.size - 1

    def powers(self, voltage: float, derivative: int = 0) -> Array:
        """The powers of x, or their first or second derivative by V, at a voltage [V]; shape (p + 1,)."""
        powers: Array = _powers((voltage - self.centre) / self.half, self.order, derivative)
        return powers / self.half**derivative

    def at(self, voltage: float) -> tuple[float, float, float]:
        """J and its first two derivatives by V at a voltage [V]."""
        value, slope, bend = (float(self.powers(voltage, d) @ self.coefficients) for d in range(3))
        if self.background is None:
            return value, slope, bend
        here = np.array([voltage])
        first, second = self.background.derivatives(here)
        return value + float(self.background.current(here)[0]), slope + float(first[0]), bend + float(second[0])

    def influence(self, voltage: float, derivative: int = 0) -> Array:
        """Derivative of J (or of its slope) at a voltage by each current of the sweep; shape (n,).

        The background is drawn by the same data. Moving its parameters by δ moves the result by ∂b(V) δ, less what the
        polynomial makes of ∂b δ at the fitted points.
        """
        own = self.powers(voltage, derivative) @ self.response
        out = np.zeros(self.link.shape[1])
        if self.background is not None:
            shift = self._background_shift(voltage, derivative) - own @ self.background.jacobian(self.voltage)
            out = shift @ self.link
        out[self.index] += own
        return out

    def _background_shift(self, voltage: float, derivative: int) -> Array:
        """Derivative of the background (or of its slope) at a voltage by its parameters."""
        if self.background is None:
            return np.zeros(5)
        if derivative == 0:
            here: Array = self.background.jacobian(np.array([voltage]))[0]
            return here
        step = 1e-4 * self.background.scale
        below, above = self.background.jacobian(np.array([voltage - step, voltage + step]))
        rise: Array = (above - below) / (2.0 * step)
        return rise


@dataclass(frozen=True, eq=False)
class LocalData:
    """A cleaned sweep, ready for local fits.

    Parameters
    ----------
    voltage, current : ndarray, shape (n,)
        Rising voltages [V] and current densities [mA cm⁻²].
    background : DiodeCurve or None
        Rough curve of the whole sweep.
    """

    voltage: Array
    current: Array
    background: DiodeCurve | None

    @cached_property
    def expected(self) -> Array:
        """The background at the points [mA cm⁻²], zero where there is none."""
        return np.zeros(self.voltage.size) if self.background is None else self.background.current(self.voltage)

    @cached_property
    def rest(self) -> Array:
        """The currents without the background [mA cm⁻²]."""
        return self.current - self.expected

    @cached_property
    def wrong(self) -> Array:
        """The error of the background at the points [mA cm⁻²], zero where none is seen."""
        return np.zeros(self.voltage.size) if self.error is None else self.error(self.voltage)

    @cached_property
    def link(self) -> Array:
        """Derivative of the background's parameters by the currents, shape (5, n); zero for one held at its bound."""
        out = np.zeros((5, self.voltage.size))
        if self.background is not None:
            jacobian = self.background.jacobian(self.voltage)
            free = np.array([True, True, True, self.background.rs > 0.0, self.background.conductance > 0.0])
            out[free] = np.linalg.pinv(jacobian[:, free] / (size := np.linalg.norm(jacobian[:, free], axis=0)))
            out[free] /= size[:, None]
        return out

    @cached_property
    def error(self) -> Legendre | None:
        """What the background has wrong, smoothed over the whole sweep; None where `rest` looks like noise alone."""
        rest, order = self.rest, min(_BENT, np.unique(self.voltage).size // 4)
        if self.background is None:
            return None
        ends = [float(self.voltage[0]), float(self.voltage[-1])]
        x = 2.0 * (self.voltage - ends[0]) / (ends[1] - ends[0]) - 1.0
        q, r = orthogonal(np.asarray(legvander(x, order), dtype=float))
        seen = q @ (q.T @ rest)
        explained, left = float(seen @ seen) / (order + 1), float(rest @ rest - seen @ seen) / (rest.size - order - 1)
        return Legendre(np.linalg.solve(r, q.T @ rest), domain=ends) if explained > _PATTERN * left else None

    def without_outliers(self) -> LocalData:
        """The same without single points that stand far out from their neighbours."""
        keep = ~outlying(self.rest, _ROUNDING * float(np.max(np.abs(self.current))))
        return LocalData(self.voltage[keep], self.current[keep], self.background)

    def fit(self, centre: float, slope_too: bool = False) -> LocalFit | None:
        """The local fit for J at a voltage [V], and for its slope if `slope_too`; None with too few points."""
        noise, known = self._noise(centre)
        plans = [plan for size in self._sizes() for plan in self._plans(centre, size, slope_too, noise, known)]
        if not plans:
            return None
        fair = [plan for plan in plans if plan.fair] or plans
        costs = np.array([plan.costs for plan in fair])
        best = int(np.argmin(np.sum(costs / (costs.min(axis=0) + 1e-300), axis=1)))
        return self._fitted(fair[best])

    def _sizes(self) -> list[int]:
        """Points of the windows that are tried."""
        most = min(self.voltage.size if self.background else max(self.voltage.size // 4, 8), _WIDEST)
        sizes, size = [], float(_FREEDOM + 2)
        while size < most:
            sizes.append(int(size))
            size = max(size * _GROWTH, size + 1)
        return [*sizes, most] if self.voltage.size >= _FREEDOM + 2 else []

    def _plans(self, centre: float, size: int, slope_too: bool, noise: float, known: float) -> list[_Plan]:
        """The orders that can be fitted to the nearest `size` points.

        With V = Q R and φ the powers at the centre, the variance of the value is that of a point times |R⁻ᵀφ|², and
        what a curve c is taken for is (R⁻ᵀφ)·(Qᵀc): sums of which each order takes the first terms.
        """
        window = self._window(centre, size)
        orders = min(_HIGHEST, size - _FREEDOM - 1, np.unique(self.voltage[window.index]).size - 3)
        if window.half <= 0 or orders < 1:
            return []
        rest = self.rest[window.index]
        q, r = orthogonal(window.design(self.voltage, orders))
        freedom = size - 1 - np.arange(orders + 1)
        squares = np.maximum(float(rest @ rest) - np.cumsum((q.T @ rest) ** 2), 0.0)
        tiny = 1e-32 * float(rest @ rest) + 1e-300  # the square of the rounding, where there is no noise at all
        excess = (squares / freedom + tiny) / (noise**2 + tiny)
        fair = np.log(excess) < 3.0 * np.sqrt(2.0 / freedom + 2.0 / known)
        seen = np.where(fair, 1.0, excess)  # where the residuals exceed the noise, they count as noise
        spread = (noise**2 + tiny) * seen * freedom / (freedom - 2.0)
        totals = np.array([self._costs(window, centre, q, r, d, spread) for d in range(1 + slope_too)])
        return [_Plan(window, p, tuple(totals[:, p].tolist()), bool(fair[p])) for p in range(1, orders + 1)]

    def _costs(self, window: _Window, centre: float, q: Array, r: Array, derivative: int, spread: Array) -> Array:
        """Mean square errors by order: the variance, and the bias as the background and its error let it expect."""
        x = (centre - window.middle) / window.half
        weights = np.linalg.solve(r.T, _powers(x, r.shape[0] - 1, derivative) / window.half**derivative)
        costs = np.cumsum(weights**2) * spread
        here = np.array([centre])
        if self.background is not None:
            exact = self.background.derivatives(here)[0] if derivative else self.background.current(here)
            taken = np.cumsum(weights * (q.T @ self.expected[window.index]))
            costs = costs + (_TRUST * (taken - exact)) ** 2
        if self.error is not None:
            taken = np.cumsum(weights * (q.T @ self.wrong[window.index]))
            costs = costs + (taken - self.error.deriv(derivative)(here)) ** 2
        return costs

    def _window(self, centre: float, size: int) -> _Window:
        index = np.argsort(np.abs(self.voltage - centre), kind="stable")[:size]
        v = self.voltage[index]
        return _Window(index, 0.5 * float(v.max() + v.min()), 0.5 * float(np.ptp(v)))

    def _noise(self, centre: float) -> tuple[float, float]:
        """Standard deviation of the noise near a voltage by divided differences, and how many points tell it."""
        near = np.argsort(np.abs(self.voltage - centre), kind="stable")[: max(40, self.voltage.size // 6)]
        near = np.sort(near)
        v, first = np.unique(self.voltage[near], return_index=True)
        rest = self.rest[near][first]
        found = [by_differences(v, rest, order) for order in range(2, 7) if v.size > order + 4]
        return (min(found) if found else float(np.std(rest))), 0.4 * max(v.size - 4, 2)

    def _fitted(self, plan: _Plan) -> LocalFit:
        window, rest = plan.window, self.rest[plan.window.index]
        q, r = orthogonal(window.design(self.voltage, plan.order))
        response = np.asarray(np.linalg.solve(r, q.T), dtype=float)
        coefficients = response @ rest
        left = rest - q @ (q.T @ rest)
        freedom = rest.size - plan.order - 1
        deviation = float(np.sqrt(left @ left / (freedom - 2.0)))  # √(χ²/ν) times √(ν/(ν − 2))
        chosen = self.voltage[window.index]
        where = window.middle, window.half
        return LocalFit(self.background, *where, coefficients, response, window.index, chosen, self.link, deviation)


@dataclass(frozen=True, eq=False)
class _Window:
    """The points nearest to a voltage, their middle and half width [V]."""

    index: Indices
    middle: float
    half: float

    def design(self, voltage: Array, order: int) -> Array:
        """Powers of x at the points of the window, of a whole sweep's voltages."""
        return np.vander((voltage[self.index] - self.middle) / self.half, order + 1, increasing=True)


@dataclass(frozen=True, eq=False)
class _Plan:
    """A possible local fit: its mean square errors, and whether its residuals look like the noise."""

    window: _Window
    order: int
    costs: tuple[float, ...]
    fair: bool


def orthogonal(design: Array) -> tuple[Array, Array]:
    """Q and R of a tall matrix, as numpy.linalg.qr gives them but for signs, at a tenth of the time.

    Cholesky's factor of the normal matrix, and the same once more on what it leaves: to rounding where the condition of
    the matrix is below 1e7 (Y. Yamamoto et al., Electron. Trans. Numer. Anal. 44 (2015) 306, from memory). The powers
    of x in a window stay far below.
    """
    try:
        first = np.linalg.cholesky(design.T @ design).T
        q = design @ np.linalg.inv(first)
        second = np.linalg.cholesky(q.T @ q).T
    except np.linalg.LinAlgError:
        factors = np.linalg.qr(design)
        return np.asarray(factors.Q, dtype=float), np.asarray(factors.R, dtype=float)
    return np.asarray(q @ np.linalg.inv(second), dtype=float), np.asarray(second @ first, dtype=float)


def _powers(x: float, order: int, derivative: int) -> Array:
    k = np.arange(order + 1)
    factor = np.ones(k.size)
    for step in range(derivative):
        factor = factor * (k - step)
    return factor * x ** np.maximum(k - derivative, 0)
