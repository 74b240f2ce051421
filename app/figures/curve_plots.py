"""The plots of a cell's measured curves, each None where the cell lacks what it needs. No Qt, no physics."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from app.figures.plot_parts import STALE, caption_of, cell_name, decades, round_range
from app.figures.spec import Mark, PlotSpec, Series
from app.session.curves import Sweep, edge_for, emission_for, fit_for
from app.session.fields import FIELD_BY_KEY
from app.session.outcome import Picture
from app.wording import unbroken, with_unit
from physics.diode_fit import DiodeFit
from physics.ledger import Ledger
from physics.light_series import LightSeries, ideality_of
from physics.quantum import Curve, emission_density
from physics.units import EV_NM, Array

_DEEP = 6  # decades of the emission that are worth a look
_FITTED = (("n", "ideality"), ("rs", "rs"), ("rsh", "rsh"))


def eqe_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
    """The EQE over photon energy with its edge, both gaps and the tail; None where the cell has no EQE."""
    eqe, edge = picture.entry.curves.eqe, picture.edge
    if eqe is None or edge is None:
        return None
    energy = EV_NM / eqe.wavelength[::-1]
    series = [Series("eqe", "EQE", energy, 100.0 * eqe.value[::-1], "cell")]
    reflectance = picture.entry.curves.reflectance
    if reflectance is not None:
        beyond = EV_NM / reflectance.wavelength[::-1]
        series.append(Series("reflectance", "reflectance", beyond, 100.0 * reflectance.value[::-1], "muted", "dashed"))
    marks: list[Mark] = []
    high = max(105.0, 105.0 * float(np.max(eqe.value)))
    if edge.energy.size:
        scale = 50.0 / float(np.max(edge.slope))
        series.append(Series("slope", "dEQE/dE", edge.energy, scale * edge.slope, "limit", "dotted"))
        inflection, mean = with_unit(edge.inflection, "eV", 5), with_unit(edge.mean, "eV", 5)
        on_curve = 100.0 * float(eqe.at(edge.inflection))
        on_slope = scale * float(np.interp(edge.mean, edge.energy, edge.slope))
        marks = [
            Mark("inflection", f"inflection {inflection}", edge.inflection, on_curve, "limit", "diamond", False, "se"),
            Mark("mean", f"edge mean {mean}", edge.mean, on_slope, "limit", "diamond", False, "ne"),
        ]
    note = "No tail extrapolated"
    tail, _ = edge.tail_at(float(picture.ledger.cell.temperature))  # as the ledger uses it
    if tail is not None:
        below = np.linspace(tail.start - 6.0 * tail.slope, tail.start, 60, endpoint=False)
        value = 100.0 * tail.at(below)
        series.append(Series("tail", "tail", below, value, "non-radiative", "dashed"))
        note = f"Tail: exponential, {with_unit(1e3 * tail.slope, 'meV', 3)}"
    return PlotSpec(
        title=f"{cell_name(picture)}: external quantum efficiency",
        x_label="Photon energy (eV)",
        y_label="EQE (%)",
        x_range=round_range(float(energy[0]), float(energy[-1])),
        y_range=round_range(0.0, high),
        series=tuple(series),
        marks=tuple(marks),
        caption=(note, *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


@lru_cache(maxsize=16)
def _emission(eqe: Curve, temperature: float) -> tuple[Array, Array, Array, Array]:
    """Energies [eV] and emission EQE·φ [mA cm⁻² eV⁻¹], of the data and of the extrapolated tail."""
    tail, _ = edge_for(eqe).tail_at(temperature)
    low, high = eqe.energy_range
    start = low if tail is None else min(max(tail.start, low), high)
    points = EV_NM / eqe.wavelength[::-1]
    energy = np.unique(np.concatenate([points[points >= start], np.linspace(start, high, 400)]))
    measured = emission_density(eqe.at, energy, temperature)
    if tail is None:
        return energy, measured, np.empty(0), np.empty(0)
    deepest = max(tail.start - 25.0 * tail.slope, 0.05)
    below = np.linspace(deepest, np.nextafter(tail.start, 0.0), 200)  # at its start it is over
    return energy, measured, below, emission_density(tail.at, below, temperature)


def _at_gap(gap: float, series: list[Series]) -> list[tuple[float, float]]:
    """The gap and the height there of the curve that reaches it, if one does."""
    reached = [s for s in series if s.x[0] <= gap <= s.x[-1]]
    return [(gap, float(np.interp(gap, s.x, s.y))) for s in reached[:1]]


def _logarithm(value: Array) -> Array:
    """Powers of ten, NaN where there is none."""
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.where(value > 0, np.log10(value), np.nan)


def emission_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
    """What the cell emits by reciprocity, over photon energy: the integrand of J0_rad; None without an EQE."""
    eqe, cell = picture.entry.curves.eqe, picture.ledger.cell
    if eqe is None:
        return None
    temperature = float(cell.temperature)
    energy, measured, below, extrapolated = _emission(eqe, temperature)
    peak = float(np.max(np.concatenate([measured, extrapolated])))
    if not peak > 0.0:
        return None
    top = math.log10(peak)
    low, high = math.floor(top) - _DEEP + 1, math.floor(top) + 1
    series = [Series("measured", "measured", energy, _logarithm(measured), "cell")]
    if below.size:
        series.append(Series("tail", "extrapolated", below, _logarithm(extrapolated), "non-radiative", "dashed"))
    shown = [e[np.nan_to_num(_logarithm(v), nan=-999.0) > low] for e, v in ((energy, measured), (below, extrapolated))]
    span = np.concatenate(shown)
    whole, share = emission_for(eqe, temperature)
    marks = [
        Mark("gap", f"Eg {with_unit(gap, 'eV', 4)}", gap, at, "limit", "diamond", False, "ne")
        for gap, at in _at_gap(float(picture.ledger.limit.gap), series)
        if low <= at <= high
    ]
    amount = with_unit(whole, "mA cm⁻²", 3)
    part = with_unit(100.0 * share, "%", 3) if below.size else "nothing"
    rest = f"{part} of it under the extrapolated tail" if below.size else "nothing of it is extrapolated"
    return PlotSpec(
        title=f"{cell_name(picture)}: emission by reciprocity",
        x_label="Photon energy (eV)",
        y_label="EQE × black body (mA cm⁻² eV⁻¹)",
        y_short="mA cm⁻² eV⁻¹",
        x_range=round_range(float(span.min()), float(span.max())),
        y_range=(float(low), float(high)),
        y_names=decades(low, high),
        note=f"{unbroken(f'J0,rad {amount},')} {unbroken(f'{part} extrapolated')}",
        series=tuple(series),
        marks=tuple(marks),
        caption=(f"J0,rad = {unbroken(amount)} into one hemisphere; {rest}", *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


def lit_sweeps(picture: Picture) -> tuple[Sweep, ...]:
    """The sweeps under light, in the order of the file."""
    return tuple(sweep for sweep in picture.entry.curves.sweeps if sweep.lit)


def plus_minus(value: float, u: float | None) -> str:
    """A value with its standard uncertainty to two digits ("1.402 ± 0.012"), or alone where that is next to nothing."""
    if u is None or not 0.0 < u < math.inf:
        return f"{value:.4g}"
    decimals = max(0, 1 - math.floor(math.log10(u)))
    if decimals > 5:
        return f"{value:.4g}"
    return f"{value:.{decimals}f} ± {u:.{decimals}f}"


def _two_digits(value: float) -> float:
    """A bound, which is known to no more than its size."""
    return float(f"{value:.2g}")


def fit_texts(fit: DiodeFit) -> tuple[str, ...]:
    """What a fit says of n, Rs and Rsh, with standard uncertainties, or what cannot be told."""
    words = {"lower bound": "at least", "upper bound": "at most"}
    texts = []
    for name, key in _FITTED:
        about, parameter = FIELD_BY_KEY[key], fit.parameters[name]
        stated, unit = parameter.stated, about.unit
        if parameter.status == "fitted" and parameter.u is not None:
            text = f"{about.symbol} = {plus_minus(parameter.value, parameter.u)}{f' {unit}' if unit else ''}"
        elif stated is not None and parameter.status in words:
            text = f"{about.symbol} {words[parameter.status]} {with_unit(_two_digits(stated), unit)}"
        else:
            text = f"{about.symbol} cannot be told"
        texts.append(unbroken(text))
    return tuple(texts)


def fit_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
    """Measured minus fitted current of the sweep that feeds the figures; None without a fit."""
    sweeps = lit_sweeps(picture)
    if not sweeps:
        return None
    fit = fit_for(sweeps[0], float(picture.ledger.cell.temperature))
    if not fit.converged:
        return None
    residual = 1e3 * np.where(fit.used, fit.residuals, np.nan)
    apart = 1e3 * np.where(fit.used, np.nan, fit.residuals)
    most = max(1.2 * float(np.nanmax(np.abs(residual))), 3e3 * fit.scale, 1e-6)
    ends = np.array([fit.voltage[0], fit.voltage[-1]])
    band = np.full(2, 2e3 * fit.scale)
    name = f"{sweeps[0].direction} sweep" if sweeps[0].direction and len(sweeps) > 1 else "sweep"
    series = [
        Series("zero", "", ends, np.zeros(2), "muted"),
        Series("upper", "± 2σ", ends, band, "muted", "dashed"),
        Series("lower", "", ends, -band, "muted", "dashed"),
        Series("residual", name, fit.voltage, residual, "cell", "none", markers=True),
    ]
    if np.isfinite(apart).any():
        kept = np.clip(apart, -most, most)  # one far off stands on the edge
        series.append(Series("apart", "left out", fit.voltage, kept, "non-radiative", "none", markers=True))
    texts = "; ".join(fit_texts(fit))
    told = f"σ = {with_unit(1e3 * fit.scale, 'µA cm⁻²', 2)}, the residuals' standard deviation"
    told += f"; {fit.message}" if fit.message else ""
    return PlotSpec(
        title=f"{cell_name(picture)}: one-diode fit, {texts}",
        x_label="Voltage (V)",
        y_label="Residual current (µA cm⁻²)",
        y_short="ΔJ (µA cm⁻²)",
        x_range=round_range(float(ends[0]), float(ends[1])),
        y_range=round_range(-most, most),
        series=tuple(series),
        note=texts,
        caption=(told, *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


def series_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
    """Voc against the light, with the slope that gives the ideality; None without a light-intensity series."""
    series = picture.entry.curves.series
    if series is None or series.jsc.size < 2:
        return None
    ledger = picture.ledger
    x = np.log10(series.jsc)
    drawn = [Series("measured", "measured", x, series.voc, "cell", markers=True)]
    slope = ideality_of(series, float(ledger.cell.temperature))
    note = "No ideality: fewer than three light levels"
    if slope.fault is None:
        line = _line_through(series, ledger, slope.value)
        told = f"n = {plus_minus(slope.value, slope.u)}"
        drawn.append(Series("slope", told, x[[0, -1]], line, "limit", "dashed"))
        note = f"Ideality from the slope: {told}"
    low, high = math.floor(x[0] + 1e-9), math.ceil(x[-1] - 1e-9)
    high = max(high, low + 1)
    span = float(np.ptp(series.voc))
    return PlotSpec(
        title=f"{cell_name(picture)}: open-circuit voltage against the light",
        x_label="Jsc (mA cm⁻²)",
        y_label="Voc (V)",
        x_range=(float(low), float(high)),
        x_names=decades(low, high),
        y_range=round_range(float(series.voc.min()) - 0.1 * span, float(series.voc.max()) + 0.1 * span),
        series=tuple(drawn),
        caption=(note, *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


def _line_through(series: LightSeries, ledger: Ledger, ideality: float) -> Array:
    """The straight line of an ideality through the middle of a series, at its two ends [V]."""
    light = np.log(series.jsc)
    rise = ideality * float(ledger.quantities.vt)
    line: Array = series.voc.mean() + rise * (light[[0, -1]] - light.mean())
    return line
