"""The one-diode curve that runs through a measured Voc and Jsc, and its fill factor.

Written with the junction voltage u = V + J·Rs, every curve through (0, Jsc) and (Voc, 0) is

    J(u) = A (1 − exp((u − Voc)/(n Vt))) + (Voc − u)/Rsh,    V(u) = u − J(u)·Rs,
    A = [Jsc (1 + Rs/Rsh) − Voc/Rsh] / [1 − exp((Jsc Rs − Voc)/(n Vt))],

which is the usual J = J_L − J0 (exp(u/(n Vt)) − 1) − u/Rsh with J_L and J0 eliminated by the two points
(A = J0 exp(Voc/(n Vt)); J_L + J0 = A + Voc/Rsh). Nothing overflows, and J and V are explicit in u.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike

from physics.units import Array, Mask, aligned, thermal_voltage

OHM_CM2 = 1e-3  #: mA cm⁻² through Ω cm² gives mV
_QUICK_STEPS, _NEWTON_STEPS = 8, 80
# Newton's step is quadratic: once it moves less than this share of Voc, what is left is below 1e-9 of Voc, and the
# power, stationary there, is good to the square of that. A tighter bound would chase rounding.
_TOLERANCE = 1e-6


def wright_omega(y: ArrayLike) -> Array:
    """Solution w of w + ln w = y, which is the Lambert function W(eʸ) without the overflow.

    Parameters
    ----------
    y : array_like
        Any shape, y ≥ −30.

    Returns
    -------
    ndarray
        w, to double precision (held against scipy.special in tests/physics/test_diode.py).

    Notes
    -----
    The fourth-order iteration of Fritsch, Shafer and Crowley, Commun. ACM 16 (1973) 123, doi:10.1145/361952.361970
    (from memory). scipy has this function, but importing scipy.special costs more time than the rest of the program
    takes to show its window.
    """
    y = np.asarray(y, dtype=float)
    large = np.maximum(y, 1.0)
    log = np.log(large)
    w: Array = np.where(y > 1.0, large - log + log / large, np.exp(np.minimum(y, 1.0) - 1.0))
    for _ in range(6):
        excess = y - w - np.log(w)
        half = (1.0 + w) * (1.0 + w + excess * (2.0 / 3.0))
        w = w * (1.0 + excess / (1.0 + w) * (half - 0.5 * excess) / (half - excess))
        if not (np.abs(excess) > 1e-4 * (1.0 + w)).any():  # the next error is its fourth power
            break
    return w


def ideal_fill_factor(v: ArrayLike) -> Array:
    """Fill factor of a diode without resistances.

    With w + ln(1 + w) = v, which has w = ω(1 + v) − 1, the maximum power lies at V = w n Vt, and

        FF = w² / [(1 + w) v (1 − e⁻ᵛ)].

    Parameters
    ----------
    v : array_like
        Voc/(n Vt), above 0, any shape.

    Returns
    -------
    ndarray
        Fill factor; NaN where v is not positive or not finite.

    Notes
    -----
    From d(JV)/dV = 0; it is the exact form of which M. A. Green, Solid-State Electron. 24 (1981) 788,
    doi:10.1016/0038-1101(81)90062-9, gives the approximation [v − ln(v + 0.72)]/(v + 1).
    """
    v = np.asarray(v, dtype=float)
    v = np.where((v > 0) & (v < np.inf), v, np.nan)
    w = wright_omega(1.0 + v) - 1.0
    return w * w / ((1.0 + w) * v * -np.expm1(-v))


@lru_cache(maxsize=16)
def _crowded(points: int) -> Array:
    """Numbers from 0 to 1 that lie closer together towards 1."""
    places = 1.0 - (1.0 - np.linspace(0.0, 1.0, points)) ** 2
    places.flags.writeable = False
    return places


@dataclass(frozen=True, eq=False)
class Diode:
    """A one-diode curve through a given Voc and Jsc (all fields broadcastable arrays).

    Parameters
    ----------
    voc : array_like
        Open-circuit voltage [V].
    jsc : array_like
        Short-circuit current density [mA cm⁻²].
    scale : array_like
        n·Vt [V].
    rs, rsh : array_like
        Series and shunt resistance [Ω cm²]; `rsh` may be infinite.
    """

    voc: Array
    jsc: Array
    scale: Array
    rs: Array
    rsh: Array

    @classmethod
    def through(
        cls,
        voc: ArrayLike,
        jsc: ArrayLike,
        temperature: ArrayLike,
        ideality: ArrayLike = 1.0,
        rs: ArrayLike = 0.0,
        rsh: ArrayLike = np.inf,
    ) -> Diode:
        """The curve for an `ideality` n at a `temperature` [K]; other arguments as the class says."""
        scale = np.asarray(ideality, dtype=float) * thermal_voltage(temperature)
        return cls(*aligned(voc, jsc, scale, rs, rsh))

    @property
    def drop_below_voc(self) -> Mask:
        """Whether Rs is small enough: Jsc·Rs < Voc."""
        return (self.rs >= 0) & (self.jsc * self.rs * OHM_CM2 < self.voc)

    @property
    def shunt_above_line(self) -> Mask:
        """Whether Rsh is large enough for the curve to stay above a straight line: Jsc (Rsh + Rs) > Voc."""
        return (self.rsh > 0) & (self.jsc * (self.rsh + self.rs) * OHM_CM2 > self.voc)

    @property
    def possible(self) -> Mask:
        """Whether such a curve exists: resistances within bounds and all else positive."""
        positive = (self.voc > 0) & (self.jsc > 0) & (self.scale > 0)
        return positive & self.drop_below_voc & self.shunt_above_line

    def _amplitude(self) -> Array:
        conductance = 1.0 / (self.rsh * OHM_CM2)
        top = self.jsc * (1.0 + self.rs * OHM_CM2 * conductance) - self.voc * conductance
        return top / -np.expm1((self.jsc * self.rs * OHM_CM2 - self.voc) / self.scale)

    def curve(self, points: int = 160) -> tuple[Array, Array]:
        """The curve from V = 0 to Voc.

        Parameters
        ----------
        points : int
            Number of points, at least 2.

        Returns
        -------
        V, J : ndarray, shape (..., points)
            Voltages [V] and current densities [mA cm⁻²]; dense where the curve bends. NaN where impossible.
        """
        with np.errstate(invalid="ignore", over="ignore", divide="ignore"):
            return self._curve(points)

    def _curve(self, points: int) -> tuple[Array, Array]:
        start = (self.jsc * self.rs * OHM_CM2)[..., None]
        u = start + (self.voc[..., None] - start) * _crowded(points)
        amplitude = np.where(self.possible, self._amplitude(), np.nan)[..., None]
        lift = self.voc[..., None] - u
        j = amplitude * -np.expm1(-lift / self.scale[..., None]) + lift / (self.rsh * OHM_CM2)[..., None]
        return u - j * (self.rs * OHM_CM2)[..., None], j

    def maximum_power(self) -> tuple[Array, Array]:
        """Maximum power point.

        Returns
        -------
        V, J : ndarray
            Voltage [V] and current density [mA cm⁻²] of the point, NaN where no such curve exists.

        Notes
        -----
        d(J·V)/du = 0 reads J′ (u − 2 Rs J) + J = 0. It has one root between V = 0 and Voc, since J·V is concave in
        V. Newton's steps find it nearly always; where they leave that range, they are taken again with a bracket.
        """
        with np.errstate(invalid="ignore", over="ignore", divide="ignore"):
            return self._maximum_power()

    def _maximum_power(self) -> tuple[Array, Array]:
        knee = _Knee.of(self)
        u = knee.start()
        for _ in range(_QUICK_STEPS):
            step = knee.newton(u)
            u = u + step
            if not (np.abs(step) > knee.near_enough).any():
                break
        good = (u >= knee.low) & (u <= knee.voc) & (np.abs(step) <= knee.near_enough)
        if not (good | np.isnan(knee.amplitude)).all():
            u = np.where(good, u, knee.bracketed())[()]
        j = knee.current(u)
        return u - knee.rs * j, j

    def fill_factor(self) -> Array:
        """Fill factor of the curve (maximum power over Voc·Jsc); NaN where no such curve exists."""
        voltage, current = self.maximum_power()
        return voltage * current / (self.voc * self.jsc)


@dataclass(frozen=True, eq=False)
class _Knee:
    """The search for the maximum power point of diodes, in the junction voltage u [V] and kΩ cm²."""

    voc: Array
    jsc: Array
    scale: Array
    rs: Array
    conductance: Array
    amplitude: Array
    low: Array
    near_enough: Array

    @classmethod
    def of(cls, diode: Diode) -> _Knee:
        rs = diode.rs * OHM_CM2
        amplitude = np.where(diode.possible, diode._amplitude(), np.nan)[()]
        conductance = 1.0 / (diode.rsh * OHM_CM2)
        low, near_enough = diode.jsc * rs, _TOLERANCE * diode.voc
        return cls(diode.voc, diode.jsc, diode.scale, rs, conductance, amplitude, low, near_enough)

    def current(self, u: Array) -> Array:
        return self.amplitude * -np.expm1((u - self.voc) / self.scale) + (self.voc - u) * self.conductance

    def start(self) -> Array:
        """A place near the point, between both ends."""
        reduced = self.voc / self.scale
        u = self.scale * (reduced - np.log1p(reduced))  # near the point of a diode without resistances
        u = np.where((u > self.low) & (u < self.voc), u, 0.5 * (self.low + self.voc))[()]
        # J′ (u − 2 Rs J) + J = 0 solved for the exponential, once: a start on the right side of the knee.
        j = self.current(u)
        bent = (j / (u - 2.0 * self.rs * j) - self.conductance) * self.scale / self.amplitude
        knee = self.voc + self.scale * np.log(bent)
        return np.where((knee > self.low) & (knee < self.voc), knee, u)[()]

    def _climb(self, u: Array) -> tuple[Array, Array]:
        """d(J·V)/du, and minus its derivative."""
        grown = self.amplitude * np.exp((u - self.voc) / self.scale)
        j = self.amplitude - grown + (self.voc - u) * self.conductance
        bent = grown / self.scale
        fall = bent + self.conductance  # −J′
        reach = u - 2.0 * self.rs * j
        return j - fall * reach, bent / self.scale * reach + 2.0 * fall * (1.0 + self.rs * fall)

    def newton(self, u: Array) -> Array:
        """Newton's step."""
        gain, bend = self._climb(u)
        return gain / bend

    def bracketed(self) -> Array:
        """Newton's steps where they stay inside a bracket that narrows, halving elsewhere."""
        low, high, u = self.low, self.voc, self.start()
        for _ in range(_NEWTON_STEPS):
            gain, bend = self._climb(u)
            low, high = np.where(gain > 0, u, low), np.where(gain > 0, high, u)
            newton = u + gain / bend
            newton = np.where((newton < low) | (newton > high), 0.5 * (low + high), newton)
            moved, u = np.abs(newton - u), newton
            if not (moved > self.near_enough).any():
                break
        return u
