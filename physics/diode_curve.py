"""The one-diode curve as a function of voltage, with its derivatives by the parameters, and a rough one for data.

    J = J_L − J0 (exp(u/s) − 1) − g u,   u = V + r J,   s = n Vt,

written with the open-circuit voltage in place of J0, which leaves parameters that a sweep shows one by one:

    A = J0 exp(Voc/s) = (J_L − g Voc)/(1 − exp(−Voc/s)),
    J = J_L − A [exp((u − Voc)/s) − exp(−Voc/s)] − g u.

It is solved exactly: ω + ln ω = ln(r A/(s d)) + [(V + r K)/d − Voc]/s with d = 1 + r g and K = J_L + A exp(−Voc/s)
gives u = (V + r K)/d − s ω. That is the Lambert-W form of A. Jain and A. Kapoor, Sol. Energy Mater. Sol. Cells 81
(2004) 269, doi:10.1016/j.solmat.2003.11.018 (from memory), without its overflow.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.diode import wright_omega
from physics.units import Array

_DEEP = -30.0  # below it ω = exp(y) to double precision
_LEAST_SHARE = 1e-9  # least share of J_L that is left for the diode at Voc, so that a trial step stays a curve


@dataclass(frozen=True)
class DiodeCurve:
    """A one-diode curve.

    Parameters
    ----------
    light : float
        Photocurrent J_L [mA cm⁻²].
    voc : float
        Open-circuit voltage [V].
    scale : float
        s = n Vt [V].
    rs : float
        Series resistance [kΩ cm²], so that it times mA cm⁻² is a voltage [V]; 0 or more.
    conductance : float
        Shunt conductance g = 1/Rsh [mS cm⁻²]; 0 or more.
    """

    light: float
    voc: float
    scale: float
    rs: float
    conductance: float

    @property
    def parameters(self) -> Array:
        """(light, voc, scale, rs, conductance), in the units of the class."""
        return np.array([self.light, self.voc, self.scale, self.rs, self.conductance])

    def moved(self, step: Array) -> DiodeCurve:
        """This curve with its `parameters` moved, held within what a curve can be."""
        light, voc, scale, rs, conductance = (self.parameters + step).tolist()
        scale = min(max(scale, 0.5 * self.scale), 2.0 * self.scale)
        return DiodeCurve(light, max(voc, 0.5 * self.voc), scale, max(rs, 0.0), max(conductance, 0.0))

    @cached_property
    def _shade(self) -> float:
        return float(np.exp(-self.voc / self.scale))

    @cached_property
    def amplitude(self) -> float:
        """A = J0 exp(Voc/s) [mA cm⁻²]."""
        left = max(self.light - self.conductance * self.voc, _LEAST_SHARE * abs(self.light))
        return left / (1.0 - self._shade)

    @property
    def saturation(self) -> float:
        """J0 [mA cm⁻²]."""
        return self.amplitude * self._shade

    def junction(self, voltage: Array) -> tuple[Array, Array, Array]:
        """Junction voltage, diode current with J0 in it, and current density at given voltages.

        Parameters
        ----------
        voltage : ndarray
            Terminal voltages [V].

        Returns
        -------
        u, grown, J : ndarray
            u = V + r J [V], A exp((u − Voc)/s) [mA cm⁻²], J [mA cm⁻²].
        """
        top = self.light + self.amplitude * self._shade
        widened = 1.0 + self.rs * self.conductance
        u = (voltage + self.rs * top) / widened
        if self.rs > 0.0:
            y = np.log(self.rs * self.amplitude / (self.scale * widened)) + (u - self.voc) / self.scale
            omega = np.where(y < _DEEP, np.exp(np.minimum(y, _DEEP)), wright_omega(np.maximum(y, _DEEP)))
            u = u - self.scale * omega
        grown = self.amplitude * np.exp(np.minimum((u - self.voc) / self.scale, 700.0))
        return u, grown, top - self.conductance * u - grown

    def current(self, voltage: Array) -> Array:
        """Current density [mA cm⁻²] at voltages [V] of any shape."""
        return self.junction(voltage)[2]

    def derivatives(self, voltage: Array) -> tuple[Array, Array]:
        """First and second derivative of J by V [mA cm⁻² V⁻¹, mA cm⁻² V⁻²].

        With h = g + E/s for E = A exp((u − Voc)/s), dJ/dV = −h/(1 + r h) and du/dV = 1/(1 + r h).
        """
        _, grown, _ = self.junction(voltage)
        fall = self.conductance + grown / self.scale
        drag = 1.0 + self.rs * fall
        return -fall / drag, -grown / self.scale**2 / drag**3

    def jacobian(self, voltage: Array) -> Array:
        """Derivatives of J by the parameters, in the order and units of `parameters`.

        Parameters
        ----------
        voltage : ndarray, shape (n,)
            Voltages [V].

        Returns
        -------
        ndarray, shape (n, 5)
            ∂J/∂θ = H_θ/(1 + r (g + E/s)), where J = H(u, θ) and u = V + r J.
        """
        u, grown, current = self.junction(voltage)
        s, voc, shade, amplitude = self.scale, self.voc, self._shade, self.amplitude
        rest = 1.0 - shade
        ratio = grown / amplitude
        lifted = ratio - shade
        fall = self.conductance + grown / s
        out = np.empty((voltage.size, 5))
        out[:, 0] = 1.0 - lifted / rest
        out[:, 1] = lifted * (amplitude / s + self.conductance / rest + amplitude * shade / (s * rest))
        of_shade = shade * voc / s**2
        out[:, 2] = -amplitude * of_shade / rest * lifted + amplitude * (ratio * (u - voc) / s**2 + of_shade)
        out[:, 3] = -fall * current
        out[:, 4] = voc / rest * lifted - u
        return out / (1.0 + self.rs * fall)[:, None]


_SUBSAMPLE = 160
_SCALES = np.geomspace(0.008, 0.3, 14)  # s in units of Voc: a sharp silicon cell in the cold to a soft organic one
_DROPS = np.array([0.0, 0.01, 0.03, 0.06, 0.12, 0.2, 0.3, 0.45, 0.6])  # Rs in units of Voc/Jsc
_POLISHES = 25


def rough_curve(voltage: Array, current: Array, voc: float, jsc: float) -> DiodeCurve | None:
    """A one-diode curve near the data: least squares over a grid of s and Rs, then some damped Gauss-Newton steps.

    With u = V + Rs·J taken from the measured J, J = k − g u − c exp(u/s) is linear in k, g and c, so that the grid
    needs no start.

    Parameters
    ----------
    voltage, current : ndarray, shape (n,)
        Rising voltages [V] and current densities [mA cm⁻²], photocurrent positive.
    voc, jsc : float
        Rough open-circuit voltage [V] and short-circuit current density [mA cm⁻²], both positive.

    Returns
    -------
    DiodeCurve or None
        None where no such curve bends the right way.
    """
    step = max(1, voltage.size // _SUBSAMPLE)
    v, j = voltage[::step], current[::step]
    found = _grid(v, j, voc, _SCALES * voc, _DROPS * voc / jsc)
    return None if found is None else _polished(found, voltage, current)


def _polished(curve: DiodeCurve, v: Array, j: Array) -> DiodeCurve:
    """Levenberg's damped steps on the exact model; the resistances stay at or above zero."""
    left = j - curve.current(v)
    damping = 1e-3
    for _ in range(_POLISHES):
        trial = curve.moved(_step(curve, curve.jacobian(v), left, damping))
        misfit = j - trial.current(v)
        before, after = float(left @ left), float(misfit @ misfit)
        if after < before:
            curve, left, damping = trial, misfit, damping * 0.05
            if damping < 1e-7 and before - after < 1e-5 * before:  # far below what the noise leaves open
                break
        else:
            damping *= 20.0
    return curve


def _step(curve: DiodeCurve, jacobian: Array, left: Array, damping: float) -> Array:
    """Damped step of the parameters; a resistance or conductance that would fall below zero goes to zero instead.

    The other parameters are then solved for anew: cutting the step of one alone would leave them off their valley.
    """
    size = np.sqrt(np.sum(jacobian**2, axis=0)) + 1e-300
    scaled, parameters = jacobian / size, curve.parameters
    step, free = np.zeros(5), np.ones(5, dtype=bool)
    for _ in range(3):
        part = scaled[:, free]
        right = left - jacobian[:, ~free] @ step[~free]
        try:
            solved = np.linalg.solve(part.T @ part + damping * np.eye(int(free.sum())), part.T @ right)
        except np.linalg.LinAlgError:  # the points say nothing of some parameter: stay
            return np.zeros(5)
        step[free] = solved / size[free]
        below = free & (parameters + step < 0.0)
        below[:3] = False
        if not below.any():
            break
        step[below] = -parameters[below]
        free &= ~below
    return step


def _grid(v: Array, j: Array, voc: float, scales: Array, drops: Array) -> DiodeCurve | None:
    """The best curve of the grid."""
    scale, drop = (a.ravel() for a in np.meshgrid(scales, drops))
    u = v + drop[:, None] * j
    grown = np.exp(np.minimum((u - voc) / scale[:, None], 50.0))
    ones = np.ones_like(u)
    with_shunt = _solved(np.stack([ones, -u, -grown], -1), j)
    without = _solved(np.stack([ones, -grown], -1), j)
    keep = with_shunt[0][:, 1] >= 0.0
    k = np.where(keep, with_shunt[0][:, 0], without[0][:, 0])
    g = np.where(keep, with_shunt[0][:, 1], 0.0)
    c = np.where(keep, with_shunt[0][:, 2], without[0][:, 1])
    squares = np.where(keep, with_shunt[1], without[1])
    squares = np.where((c > 0) & (k > 0) & np.isfinite(squares), squares, np.inf)
    at = int(np.argmin(squares))
    if not np.isfinite(squares[at]):
        return None
    light = k[at] - c[at] * np.exp(-voc / scale[at])
    crossing = _crossing(k[at], g[at], c[at], voc, scale[at])
    if not (light > 0 and crossing > 0):
        return None
    return DiodeCurve(float(light), crossing, float(scale[at]), float(drop[at]), float(g[at]))


def _solved(columns: Array, j: Array) -> tuple[Array, Array]:
    """Linear least squares for a stack of design matrices, shape (m, n, p): coefficients and sums of squares."""
    size = np.sqrt(np.mean(columns**2, axis=1, keepdims=True)) + 1e-300
    scaled = columns / size
    normal = np.swapaxes(scaled, 1, 2) @ scaled + 1e-12 * j.size * np.eye(columns.shape[-1])
    x = np.linalg.solve(normal, (np.swapaxes(scaled, 1, 2) @ j)[..., None])
    left = j - (scaled @ x)[..., 0]
    return x[..., 0] / size[:, 0], np.sum(left**2, axis=-1)


def _crossing(k: float, g: float, c: float, near: float, scale: float) -> float:
    """Root of k − g V − c exp((V − near)/scale): convex and falling, so Newton from above never overshoots."""
    v = near + scale * np.log(k / c)  # where g = 0; above the root otherwise
    for _ in range(60):
        grown = c * np.exp((v - near) / scale)
        moved = (k - g * v - grown) / (g + grown / scale)
        v += moved
        if abs(moved) < 1e-14 * abs(v):
            break
    return float(v)
