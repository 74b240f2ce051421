"""The absorption edge in an EQE: two definitions of the gap, and the exponential tail below it."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import numpy as np

from physics.quantum import Curve, Tail
from physics.units import EV_NM, Array, thermal_voltage

_LEAST_POINTS = 8
_SPLINE_POINTS = 60  # from twice as many on, points are averaged in groups: the spline takes time with their number
_GRID = 4001  # points of the derivative over the edge: steps far below a meV
_WINDOW = 0.35  # [eV] beyond the energy where half the maximum is reached, the edge is over
_OPEN = 0.1  # an EQE that has not fallen below this share of its maximum has not shown its edge
# The tail: an absorptance 1 − exp(−αd) is exponential in αd only where it is small.
_TAIL_TOP = 0.1  # share of the value at the top of the edge
_TAIL_POINTS = 4
_TAIL_RANGE = 4.0  # the fitted points must span this factor, or their slope says little
# A point is floor, not tail, where it is off the line by a fifth and by four times what the scatter so far explains.
_OFF_LINE, _SCATTERS = 0.2, 4.0


class EdgeFault(Enum):
    """What stands in the way of a gap or a tail."""

    TOO_FEW = "The EQE has fewer than eight points: no edge can be found in it."
    STOPS_EARLY = (
        "The EQE stops before its edge: at its longest wavelength it is still above a tenth of its maximum. "
        "Measure to longer wavelengths, or type the gap."
    )
    NO_SIGNAL = "The EQE nowhere rises above zero: check the file and the column."
    NO_TAIL = (
        "The EQE shows no exponential tail above its noise (four points in a row that span a factor of four), so "
        "nothing is extrapolated: what radiative recombination lies below the last point is missing."
    )
    FLAT_TAIL = (
        "The tail is flatter than kT, so the radiative recombination grows without end towards lower energies: "
        "a background or stray light is likely. Nothing is extrapolated."
    )


@dataclass(frozen=True, eq=False)
class Edge:
    """The edge of an EQE.

    Parameters
    ----------
    inflection : float
        Energy of the largest dEQE/dE [eV]; NaN where there is no edge.
    mean : float
        Mean energy, weighted by dEQE/dE, over the band where that exceeds half its maximum [eV]; NaN likewise.
    energy, slope : ndarray, shape (n,)
        dEQE/dE [eV⁻¹] over energies [eV] around the edge, smoothed, for a plot.
    band : (float, float)
        The band of the mean [eV].
    tail : Tail or None
        The exponential that continues the data; None where none could be fitted.
    tail_span : (float, float)
        Energies of the points it was fitted to [eV].
    tail_u : float or None
        Standard uncertainty of its slope [eV], from the scatter of the points.
    faults : tuple of EdgeFault
        Why something is missing.
    """

    inflection: float
    mean: float
    energy: Array
    slope: Array
    band: tuple[float, float]
    tail: Tail | None
    tail_span: tuple[float, float]
    tail_u: float | None
    faults: tuple[EdgeFault, ...]

    def tail_at(self, temperature: float) -> tuple[Tail | None, tuple[EdgeFault, ...]]:
        """The tail that may be followed at a temperature [K], and why there is none or whatever else is missing."""
        if self.tail is not None and self.tail.slope >= thermal_voltage(temperature):
            return None, (EdgeFault.FLAT_TAIL,)
        return self.tail, self.faults


_NOTHING = (np.nan, np.nan)


def _without(fault: EdgeFault) -> Edge:
    empty = np.empty(0)
    return Edge(np.nan, np.nan, empty, empty, _NOTHING, None, _NOTHING, None, (fault,))


def edge_of(eqe: Curve) -> Edge:
    """Find the gap and the tail of an EQE.

    The derivative is that of a cubic smoothing spline over the photon energy whose smoothness generalised
    cross-validation chooses: it follows clean points exactly and smooths noisy ones.

    Parameters
    ----------
    eqe : Curve
        The EQE.

    Returns
    -------
    Edge

    Notes
    -----
    Both gaps: U. Rau, B. Blank, T. C. M. Müller and T. Kirchartz, Phys. Rev. Applied 7 (2017) 044016,
    doi:10.1103/PhysRevApplied.7.044016 (the distribution of gaps dEQE/dE, and its mean over the band above half the
    maximum). Spline: scipy.interpolate.make_smoothing_spline.
    """
    if eqe.wavelength.size < _LEAST_POINTS:
        return _without(EdgeFault.TOO_FEW)
    energy, value = EV_NM / eqe.wavelength[::-1], eqe.value[::-1]
    top = float(value.max())
    if top <= 0.0:
        return _without(EdgeFault.NO_SIGNAL)
    first_half = float(energy[np.argmax(value >= 0.5 * top)])
    grid = np.linspace(energy[0], min(first_half + _WINDOW, energy[-1]), _GRID)
    smooth, slope = _smoothed(energy, value, grid)
    at = int(np.argmax(slope))
    stops = value[: max(2, value.size // 100)].mean() > _OPEN * top
    if stops or at in (0, grid.size - 1):
        return _without(EdgeFault.STOPS_EARLY)
    band = _band(slope, at)
    weight = slope[band]
    mean = float(np.trapezoid(grid[band] * weight, grid[band]) / np.trapezoid(weight, grid[band]))
    ceiling = _TAIL_TOP * float(smooth[band][-1])
    tail, span, u = _tail(energy, value, float(grid[band][0]), ceiling)
    faults = () if tail is not None else (EdgeFault.NO_TAIL,)
    return Edge(
        _peak(grid, slope, at), mean, grid, slope, (float(grid[band][0]), float(grid[band][-1])), tail, span, u, faults
    )


def _smoothed(energy: Array, value: Array, grid: Array) -> tuple[Array, Array]:
    """The smoothed EQE and its derivative [eV⁻¹] on a grid."""
    from scipy.interpolate import make_smoothing_spline

    near = energy <= grid[-1] + 0.15
    if near.sum() < _LEAST_POINTS:
        near = np.ones_like(near)
    spline = make_smoothing_spline(*_thinned(energy[near], value[near]))
    return spline(grid), spline(grid, 1)


def _thinned(energy: Array, value: Array) -> tuple[Array, Array]:
    """Means of neighbouring points, where there are so many that the spline would take long; noise goes down alike."""
    together = energy.size // _SPLINE_POINTS
    if together < 2:
        return energy, value
    whole = energy.size // together * together
    rest = energy.size - whole
    cut = slice(rest, None)  # what does not fill a group is left out at the low end, far from the edge
    return (
        energy[cut].reshape(-1, together).mean(axis=1),
        value[cut].reshape(-1, together).mean(axis=1),
    )


def _band(slope: Array, at: int) -> slice:
    """The run around `at` in which the derivative exceeds half its maximum."""
    low = slope < 0.5 * slope[at]
    before, after = np.flatnonzero(low[:at]), np.flatnonzero(low[at:])
    return slice(before[-1] + 1 if before.size else 0, at + after[0] if after.size else slope.size)


def _peak(grid: Array, slope: Array, at: int) -> float:
    """The maximum between grid points, by a parabola through three."""
    left, middle, right = slope[at - 1 : at + 2]
    bend = left - 2.0 * middle + right
    shift = 0.5 * (left - right) / bend if bend < 0 else 0.0
    return float(grid[at] + shift * (grid[1] - grid[0]))


def _tail(
    energy: Array, value: Array, edge: float, ceiling: float
) -> tuple[Tail | None, tuple[float, float], float | None]:
    """Fit ln EQE by a straight line from `ceiling` down to where the points leave it."""
    highest = int(np.count_nonzero(energy < edge))
    while highest and value[highest - 1] >= ceiling:
        highest -= 1
    down, levels = energy[:highest][::-1], value[:highest][::-1]
    ends = np.flatnonzero(levels <= 0)
    if ends.size:
        down, levels = down[: ends[0]], levels[: ends[0]]
    kept = _on_line(down, levels)
    x, y = down[:kept], np.log(levels[:kept])
    if kept < _TAIL_POINTS or y.max() - y.min() < np.log(_TAIL_RANGE):
        return None, _NOTHING, None
    (rise, level), covariance = _line(x, y)
    if rise <= 0:
        return None, _NOTHING, None
    start = float(x.min())
    slope = 1.0 / rise
    u = float(np.sqrt(covariance) / rise**2) if kept > 2 else None
    return Tail(start, float(np.exp(level + rise * start)), float(slope)), (start, float(x.max())), u


def _on_line(energy: Array, value: Array) -> int:
    """How many points from the top lie on the line through those before them; a single one off it ends nothing."""
    logs = np.log(value)
    kept = min(_TAIL_POINTS, energy.size)
    while kept < energy.size:
        x, y = energy[:kept], logs[:kept]
        (rise, level), _ = _line(x, y)
        scatter = np.sum((y - level - rise * x) ** 2) / (kept - 2)
        ahead = energy[kept : kept + 2]
        expected = np.sqrt(scatter * (1.0 + 1.0 / kept + (ahead - x.mean()) ** 2 / np.sum((x - x.mean()) ** 2)))
        off = np.abs(logs[kept : kept + 2] - level - rise * ahead) > np.maximum(_OFF_LINE, _SCATTERS * expected)
        if off.all():
            break
        kept += 1
    return kept


def _line(x: Array, y: Array) -> tuple[tuple[float, float], float]:
    """Least squares: slope, intercept, and the variance of the slope (0 for two points)."""
    middle = x.mean()
    spread = float(np.sum((x - middle) ** 2))
    if spread == 0.0:
        return (0.0, float(y.mean())), np.inf
    rise = float(np.sum((x - middle) * y) / spread)
    level = float(y.mean() - rise * middle)
    free = x.size - 2
    scatter = float(np.sum((y - level - rise * x) ** 2)) / free if free > 0 else 0.0
    return (rise, level), scatter / spread
