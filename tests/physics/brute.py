"""The limit and the ledger written a second time, apart from `physics`: one cell at a time, by quadrature and roots.

Nothing here comes from `physics`. Spectra are read through pvlib's public function, integrals are scipy's adaptive
quadrature, voltages and maximum power points are roots or minima of the equations as they stand in text books.
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, lru_cache
from itertools import pairwise

import numpy as np
from pvlib.spectrum import get_reference_spectra
from scipy.constants import c, e, h, k
from scipy.integrate import quad
from scipy.optimize import brentq, minimize_scalar

_COLUMNS = {"am15g": "global", "am15d": "direct", "am0": "extraterrestrial"}


@cache
def table(name: str) -> tuple[list[float], list[float]]:
    """Wavelengths [nm] and spectral irradiance [W m⁻² nm⁻¹] of a G173 spectrum."""
    frame = get_reference_spectra()
    return frame.index.astype(float).tolist(), frame[_COLUMNS[name]].astype(float).tolist()


def interpolant(wavelength: list[float], irradiance: list[float]) -> Callable[[float], float]:
    """The straight lines between the points of a table."""

    def value(nm: float) -> float:
        right = min(max(bisect_right(wavelength, nm), 1), len(wavelength) - 1)
        x0, x1, y0, y1 = wavelength[right - 1], wavelength[right], irradiance[right - 1], irradiance[right]
        return y0 + (y1 - y0) * (nm - x0) / (x1 - x0)

    return value


def integral(integrand: Callable[[float], float], wavelength: list[float], stop: float) -> float:
    """Quadrature from the short end of a table to `stop` [nm], with the points of the table as breakpoints."""
    points = [nm for nm in wavelength[1:] if nm < stop]
    limit = len(points) + 200
    return float(quad(integrand, wavelength[0], stop, points=points or None, epsabs=0, epsrel=1e-11, limit=limit)[0])


@lru_cache(maxsize=4096)
def light_above(name: str, gap: float) -> tuple[float, float]:
    """Photon current [mA cm⁻²] and power [mW cm⁻²] above a gap [eV] of a G173 spectrum."""
    wavelength, irradiance = table(name)
    phi = interpolant(wavelength, irradiance)
    edge = h * c / (e * gap) * 1e9
    current = integral(lambda nm: phi(nm) * nm * 1e-9 * e / (h * c), wavelength, edge)
    power = integral(phi, wavelength, edge)
    return current / 10, power / 10


@cache
def incident(name: str) -> float:
    """Power of a whole G173 table by the trapezoid, which is exact for straight lines [mW cm⁻²]."""
    wavelength, irradiance = table(name)
    return float(np.trapezoid(irradiance, wavelength)) / 10


def emission(gap: float, temperature: float, voltage: float = 0.0) -> float:
    """Generalised Planck emission above a gap into one hemisphere [mA cm⁻²], by quadrature."""
    kt = k * temperature
    low, potential = gap * e / kt, voltage * e / kt

    def integrand(t: float) -> float:
        return t * t / math.expm1(t - potential)

    edges = (low, low + 1, low + 10, max(low + 60, 100.0))
    total = sum(quad(integrand, a, b, epsabs=0, epsrel=1e-11, limit=500)[0] for a, b in pairwise(edges))
    return float(2 * math.pi * e / (h**3 * c**2) * kt**3 * total / 10)


@dataclass(frozen=True)
class BruteLimit:
    """A limit [mW cm⁻², mA cm⁻², V]."""

    incident: float
    above: float
    jsc: float
    j0: float
    voc: float
    power: float

    @property
    def ff(self) -> float:
        return self.power / (self.jsc * self.voc)


def limit_of(name: str, gap: float, temperature: float, irradiance: float = math.nan, faces: int = 1) -> BruteLimit:
    """Limit of a step absorber: quadrature for both currents, root finding for both voltages."""
    current, above = light_above(name, gap)
    scale = 1.0 if math.isnan(irradiance) else irradiance / incident(name)
    jsc, j0, vt = scale * current, faces * emission(gap, temperature), k * temperature / e

    def j(v: float) -> float:
        return jsc - j0 * math.expm1(v / vt)

    voc = brentq(j, 0.0, gap + 0.5, xtol=1e-14, rtol=1e-14)
    best = brentq(lambda v: j(v) - v * j0 / vt * math.exp(v / vt), 0.0, voc, xtol=1e-14, rtol=1e-14)
    return BruteLimit(scale * incident(name), scale * above, jsc, j0, voc, best * j(best))


def generalised_power(jsc: float, gap: float, temperature: float) -> float:
    """Maximum of V·[J − emission(V) + emission(0)] with the generalised Planck form [mW cm⁻²]."""
    dark = emission(gap, temperature)

    def negative(v: float) -> float:
        return -v * (jsc - emission(gap, temperature, v) + dark)

    bounds = (0.2 * gap, 0.9999 * gap)
    return float(-minimize_scalar(negative, bounds=bounds, method="bounded", options={"xatol": 1e-8}).fun)


def fill_factor(voc: float, jsc: float, scale: float, rs: float = 0.0, rsh: float = math.inf) -> float:
    """Fill factor of the one-diode curve through (0, Jsc) and (Voc, 0); `scale` is n·Vt [V], resistances [Ω cm²].

    J_L and J0 follow from two linear equations; J at a voltage is the root of the implicit equation.
    """
    ohm = 1e-3
    g = 1 / (rsh * ohm)
    # Scaled by exp(Voc/scale), so that nothing overflows: b = J0 exp(Voc/scale).
    at_short = math.exp((jsc * rs * ohm - voc) / scale) - math.exp(-voc / scale)
    at_open = -math.expm1(-voc / scale)
    matrix = np.array([[1.0, -at_short], [1.0, -at_open]])
    light, b = np.linalg.solve(matrix, np.array([jsc * (1 + rs * ohm * g), voc * g]))

    def current(v: float) -> float:
        def implicit(j: float) -> float:
            u = v + j * rs * ohm
            return float(light - b * (math.exp((u - voc) / scale) - math.exp(-voc / scale)) - u * g - j)

        return float(implicit(0.0) if rs == 0 else brentq(implicit, -0.5 * jsc, 1.5 * jsc, xtol=1e-13, rtol=1e-13))

    found = minimize_scalar(lambda v: -v * current(v), bounds=(0.0, voc), method="bounded", options={"xatol": 1e-9})
    return float(-found.fun) / (voc * jsc)


def log_mean(a: float, b: float) -> float:
    """(a − b)/ln(a/b)."""
    return a if math.isclose(a, b, rel_tol=1e-13) else (a - b) / math.log(a / b)


def weights(top: tuple[float, ...], bottom: tuple[float, ...], attribution: str) -> tuple[float, ...]:
    """Power per unit of current, voltage and fill factor."""
    if attribution == "log-mean":
        whole = log_mean(math.prod(top), math.prod(bottom))
        return tuple(whole / log_mean(a, b) for a, b in zip(top, bottom, strict=True))
    (_, v1, f1), (j0, v0, _) = top, bottom
    return v1 * f1, j0 * f1, j0 * v0


def _or(value: float, other: float) -> float:
    return other if math.isnan(value) else value


def ledger_of(cell: dict[str, float], name: str, attribution: str = "log-mean", faces: int = 1) -> dict[str, float]:
    """Losses [mW cm⁻²] by line of one cell; a line that the cell does not have is not in the result.

    `cell` holds gap, voc, jsc, ff, temperature, irradiance, ere, ideality, rs, rsh, pseudo_ff, eqe_above, eqe_below,
    reflected, j0_rad; NaN is unknown.
    """
    gap, voc, jsc, ff, t = (cell[key] for key in ("gap", "voc", "jsc", "ff", "temperature"))
    ere, n, rs, rsh, pff = (cell[key] for key in ("ere", "ideality", "rs", "rsh", "pseudo_ff"))
    limit = limit_of(name, gap, t, cell["irradiance"], faces)
    vt = k * t / e
    w_j, w_v, w_f = weights((limit.jsc, limit.voc, limit.ff), (jsc, voc, ff), attribution)
    step_edge = vt * math.log(jsc / limit.j0 + 1)
    radiative = vt * math.log(jsc / _or(cell["j0_rad"], limit.j0) + 1)
    lines = {
        "below_gap": limit.incident - limit.above,
        "thermalisation": limit.above - limit.jsc * gap,
        "limit_voltage": limit.jsc * (gap - limit.voc),
        "limit_fill": limit.jsc * limit.voc * (1 - limit.ff),
        "voltage_low_current": w_v * (limit.voc - step_edge),
        "voltage_edge": w_v * (step_edge - radiative),
    }
    above, below, reflected = (cell[key] for key in ("eqe_above", "eqe_below", "reflected"))
    if math.isnan(above):
        lines["current"] = w_j * (limit.jsc - jsc)
    else:
        if not math.isnan(reflected):
            lines["reflection"] = w_j * reflected
        lines["uncollected"] = w_j * (limit.jsc - above - _or(reflected, 0.0))
        lines["sub_gap_current"] = -w_j * below
        lines["current_mismatch"] = w_j * (above + below - jsc)
    if math.isnan(ere):
        lines["nonradiative"] = w_v * (radiative - voc)
    else:
        lines["nonradiative"] = w_v * -vt * math.log(ere)
        lines["voltage_residual"] = w_v * (radiative + vt * math.log(ere) - voc)
    lines |= {key: w_f * delta for key, delta in _fill_lines(limit.ff, voc, jsc, ff, vt, n, rs, rsh, pff).items()}
    return lines


def _fill_lines(
    ff_limit: float, voc: float, jsc: float, ff: float, vt: float, n: float, rs: float, rsh: float, pff: float
) -> dict[str, float]:
    """Changes of the fill factor, one thing added after the other."""
    state = fill_factor(voc, jsc, vt)
    lines = {"fill_voltage": ff_limit - state}
    scale = _or(n, 1.0) * vt

    def step(key: str, with_rs: bool, with_rsh: bool) -> None:
        nonlocal state
        after = fill_factor(voc, jsc, scale, rs if with_rs else 0.0, rsh if with_rsh else math.inf)
        lines[key] = state - after
        state = after

    has_n, has_rs, has_rsh = (not math.isnan(x) for x in (n, rs, rsh))
    if has_n:
        step("fill_ideality", False, False)
    if math.isnan(pff):
        if has_rs:
            step("fill_series", True, False)
        if has_rsh:
            step("fill_shunt", has_rs, True)
        lines["fill_residual"] = state - ff
        return lines
    if has_rsh:
        step("fill_shunt", False, True)
    lines["fill_recombination"] = state - pff
    series = 0.0
    if has_rs:
        step("fill_series", True, has_rsh)
        series = lines["fill_series"]
    lines["fill_transport"] = pff - ff - series
    return lines
