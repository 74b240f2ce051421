"""The two plots that every cell has: its curve beside that of the limit, and its place among the limits. No Qt."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from app.figures.curve_plots import fit_texts, lit_sweeps
from app.figures.plot_parts import STALE, caption_of, cell_name, round_range, short_name
from app.figures.spec import Dash, Mark, PlotSpec, Role, Series, Side
from app.session.curves import Sweep, fit_for
from app.session.outcome import Picture
from app.wording import percent
from physics.light_series import LightSeries, pseudo_curve, pseudo_points
from physics.limit import Limit


def jv_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec:
    """Current density against voltage: the cell and its limit. A live plot has no room for a caption."""
    ledger, cell_curve = picture.ledger, picture.cell_curve
    limit = ledger.limit
    drawn = not math.isnan(cell_curve.ideality)
    series = [Series("limit", "Limit", picture.limit_curve.voltage, picture.limit_curve.current, "limit", "dashed")]
    marks = [_power_mark("limit", picture.limit_curve.voltage, picture.limit_curve.current, float(limit.efficiency))]
    sweeps = lit_sweeps(picture)
    for k, sweep in enumerate(sweeps):
        dash: Dash = "solid" if k == 0 else "dotted"
        label = sweep.direction or f"sweep {k + 1}"
        series.append(Series(f"sweep {k}", f"{label} (measured)", sweep.voltage, sweep.current, "cell", dash))
    if sweeps:
        fitted = _fitted(sweeps[0])
        series += [] if fitted is None else [fitted]
    light = picture.entry.curves.series
    if light is not None and light.jsc.size > 2:
        series.append(_pseudo(light, float(ledger.cell.jsc)))
    if drawn:
        if not sweeps:
            label = f"{short_name(picture)} (modelled)"
            series.append(Series("cell", label, cell_curve.voltage, cell_curve.current, "cell"))
        marks.append(_power_mark("cell", cell_curve.voltage, cell_curve.current, float(ledger.efficiency)))
        note = (
            "Cell: measured sweep; the mark stands on a one-diode curve through Voc, Jsc and FF"
            if sweeps
            else "Cell: one-diode curve drawn through Voc, Jsc and FF "
            f"(n = {cell_curve.ideality:.3g}), not a measured sweep"
        )
    else:
        marks.append(Mark("voc", "Voc", float(ledger.cell.voc), 0.0, "cell"))
        marks.append(Mark("jsc", "Jsc", 0.0, float(ledger.cell.jsc), "cell"))
        note = "Cell: no diode curve has so low a fill factor, so only Voc and Jsc are shown"
    return PlotSpec(
        title=f"{cell_name(picture)}: current density against voltage",
        x_label="Voltage (V)",
        y_label="Current density (mA cm⁻²)",
        y_short="J (mA cm⁻²)",
        x_range=round_range(0.0, 1.02 * max(float(limit.voc), float(ledger.cell.voc))),
        y_range=round_range(0.0, 1.12 * max(float(limit.jsc), float(ledger.cell.jsc))),
        series=tuple(series),
        marks=tuple(marks),
        caption=(note, *_curves_told(picture), *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


@lru_cache(maxsize=8)
def _fitted(sweep: Sweep) -> Series | None:
    """The one-diode fit to a sweep, or None; the curve is the same whatever the temperature."""
    fit = fit_for(sweep)
    if not fit.converged:
        return None
    at = np.linspace(fit.voltage[0], fit.voltage[-1], 160)
    return Series("fit", "diode fit", at, fit.curve(at), "voltage", "dashed")


@lru_cache(maxsize=8)
def _pseudo(light: LightSeries, jsc: float) -> Series:
    """The curve without series resistance."""
    return Series("pseudo", "without Rs", *pseudo_points(light, jsc), "fill-factor", "dotted")


def _curves_told(picture: Picture) -> tuple[str, ...]:
    """What the fit and the curve without series resistance say, for a caption."""
    cell, lines = picture.ledger.cell, []
    sweeps, light = lit_sweeps(picture), picture.entry.curves.series
    if sweeps:
        fit = fit_for(sweeps[0], float(cell.temperature))
        which = f" to the {sweeps[0].direction} sweep" if sweeps[0].direction and len(sweeps) > 1 else ""
        if fit.converged:
            lines.append(f"One-diode fit{which}: {'; '.join(fit_texts(fit))}")
    if light is not None:
        pseudo = pseudo_curve(light, float(cell.jsc))
        if pseudo.fault is None:
            lines.append(f"Without Rs, from the light series: FF {percent(pseudo.fill_factor, 1)}")
    return tuple(lines)


def _power_mark(role: Role, voltage: np.ndarray, current: np.ndarray, efficiency: float) -> Mark:
    """The mark at the maximum power point of a drawn curve (nearest drawn point: a place, not a figure)."""
    at = int(np.argmax(voltage * current))
    side: Side = "n" if role == "limit" else "sw"  # over the outer curve, and inside the inner one
    return Mark(str(role), percent(efficiency, 1), float(voltage[at]), float(current[at]), role, side=side)


@lru_cache(maxsize=8)
def _limits_curve(gaps: Limit) -> tuple[Series, float, float]:
    """The curve of limits [%] over the gap [eV], the gap of its maximum, and the maximum [%]."""
    curve = 100.0 * gaps.efficiency
    at = int(np.argmax(curve))
    return Series("limit", "Detailed-balance limit", gaps.gap, curve, "limit"), float(gaps.gap[at]), float(curve[at])


def gap_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec:
    """Efficiency of the limit against the gap, with the cell and its limit as marks."""
    gaps, ledger = picture.gap_curve, picture.ledger
    gap, limit, cell = float(ledger.limit.gap), float(ledger.limit.efficiency), float(ledger.efficiency)
    series, best, top = _limits_curve(gaps)
    high = 100 * limit > 0.92 * top
    clear: Side = "ne" if high or gap > best else "se"  # over the falling side of the curve, under the rising one
    return PlotSpec(
        title=f"{cell_name(picture)}: efficiency against the gap",
        x_label="Gap (eV)",
        y_label="Efficiency (%)",
        x_range=(0.4, 3.0) if 0.4 <= gap <= 3.0 else round_range(min(gap, 0.4), max(gap, 3.0)),
        y_range=round_range(0.0, 1.04 * top),
        series=(series,),
        marks=(
            Mark(
                "limit", f"limit {percent(limit, 1)}", gap, 100 * limit, "limit", "diamond", False, clear,
            ),
            Mark("cell", f"cell {percent(cell, 1)}", gap, 100 * cell, "cell", side="s"),
        ),
        caption=caption_of(picture) if captioned else (),
        stale=STALE if stale else "",
    )
