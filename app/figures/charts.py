"""From a cell's picture to the descriptions of its charts. No Qt, no physics: numbers in, texts and positions out."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from app.figures.spec import Dash, Mark, PlotSpec, Role, Segment, Series, Side, Step, WaterfallSpec
from app.session.light import light_named
from app.session.outcome import Picture
from app.wording import (
    basis_text,
    conventions_text,
    delta_text,
    inputs_text,
    loss_text,
    percent,
    shown_name,
    unbroken,
    with_unit,
)
from physics.ledger import Entry, Ledger, entries_of
from physics.limit import Limit
from physics.lines import Basis, Family, Section
from physics.units import EV_NM

STALE = "Last valid input: the fields marked in red do not enter"
_LONGEST_BESIDE = 16
_ROLES: dict[Family, Role] = {
    Family.SPECTRAL: "spectral",
    Family.VOLTAGE: "voltage",
    Family.FILL: "fill-factor",
    Family.NONRADIATIVE: "non-radiative",
}
_FAMILY_NAMES: dict[Family, str] = {
    Family.SPECTRAL: "Spectral",
    Family.VOLTAGE: "Voltage",
    Family.NONRADIATIVE: "Non-radiative",
    Family.FILL: "Fill factor",
}


def nice_step(span: float) -> float:
    """A round step (1, 2 or 5 times a power of ten) that cuts a span into four to ten pieces."""
    raw = span / 4.0
    power = 10.0 ** math.floor(math.log10(raw))
    return next(power * m for m in (5.0, 2.0, 1.0) if power * m <= raw * (1 + 1e-12))


def round_range(low: float, high: float) -> tuple[float, float]:
    """The smallest range with round ends that holds both numbers."""
    step = nice_step(max(high - low, 1e-9))
    return step * math.floor(low / step + 1e-9), step * math.ceil(high / step - 1e-9)


def caption_of(picture: Picture) -> tuple[str, ...]:
    """Small print under every chart of a cell."""
    entry = picture.entry
    light = light_named(entry.spectrum).title
    lines = [f"{inputs_text(entry)} · {unbroken(light)}", conventions_text(picture.choices)]
    if entry.note:
        lines.append(shown_name(entry.note))
    return tuple(lines)


def _name(picture: Picture) -> str:
    return shown_name(picture.entry.name) or "Unnamed cell"


def _short_name(picture: Picture) -> str:
    """The name where it stands beside a point."""
    name = _name(picture)
    return name if len(name) <= _LONGEST_BESIDE else f"{name[: _LONGEST_BESIDE - 1].rstrip()}…"


def waterfall_of(picture: Picture, stale: bool = False) -> WaterfallSpec:
    """The waterfall of a cell.

    Parameters
    ----------
    picture : Picture
        What was worked out.
    stale : bool
        Whether it is of earlier inputs than the present ones.
    """
    ledger = picture.ledger
    incident = float(ledger.limit.incident)
    limit, cell = float(ledger.limit.efficiency), float(ledger.efficiency)
    name = _name(picture)
    steps = _steps(name, ledger)
    families = [f for f in _FAMILY_NAMES if any(e.line.family is f for e in ledger.entries)]
    return WaterfallSpec(
        title=f"{name}: {percent(cell, 1)} of a possible {percent(limit, 1)}",
        strip_title=(
            f"Sunlight: {with_unit(incident, 'mW cm⁻²', 4)}, {light_named(picture.entry.spectrum).title.split(' (')[0]}"
        ),
        segments=_segments(ledger, limit),
        steps_title="From the limit to the cell",
        steps=steps,
        axis_label="Share of the incident power (%)",
        axis_range=_axis(steps),
        legend=tuple((_ROLES[f], _FAMILY_NAMES[f]) for f in families),
        caption=(*_marks_explained(ledger), *caption_of(picture)),
        stale=STALE if stale else "",
    )


def _marks_explained(ledger: Ledger) -> tuple[str, ...]:
    """What a broken outline and an arrow mean, where the chart has them."""
    lines = []
    reasons = [
        basis_text(form).partition(": ")[2]
        for e in entries_of(ledger, Section.LIMIT_TO_CELL)
        if (form := e.form_at()) is not None and form.basis is Basis.ASSUMED
    ]
    if reasons:
        lines.append(f"Broken outline: assumed ({'; '.join(dict.fromkeys(reasons))})")
    incident = float(ledger.limit.incident)
    if any(loss_text(float(e.loss), incident).startswith("+") for e in entries_of(ledger, Section.LIMIT_TO_CELL)):
        lines.append("Arrow: a gain")
    return tuple(lines)


def _segments(ledger: Ledger, limit: float) -> tuple[Segment, ...]:
    incident = float(ledger.limit.incident)
    pieces = [_segment(entry, incident) for entry in entries_of(ledger, Section.SUN_TO_LIMIT)]
    pieces.append(
        Segment("detailed_balance", "Detailed-balance limit", "limit", 100 * limit, percent(limit, 1), "limit")
    )
    return tuple(pieces)


@lru_cache(maxsize=64)  # the lines down to the limit stay while the cell's figures change
def _segment(entry: Entry, incident: float) -> Segment:
    share, line = float(entry.loss) / incident, entry.line
    return Segment(line.key, line.title, line.short, 100 * share, percent(share, 1), _ROLES[line.family])


def _steps(name: str, ledger: Ledger) -> tuple[Step, ...]:
    incident = float(ledger.limit.incident)
    limit, cell = 100 * float(ledger.limit.efficiency), 100 * float(ledger.efficiency)
    gap = with_unit(float(ledger.limit.gap), "eV", 4)
    steps = [
        Step("detailed_balance", f"Limit of a {gap} gap", 0.0, limit, percent(limit / 100), "", "limit", total=True)
    ]
    level = limit
    for entry in entries_of(ledger, Section.LIMIT_TO_CELL):
        if entry.present:
            after = level - 100 * float(entry.loss) / incident
            steps.append(_step(entry, level, after, incident))
            level = after
    steps.append(Step("cell", name, 0.0, cell, percent(cell / 100), "", "cell", total=True))
    return tuple(steps)


def _step(entry: Entry, start: float, end: float, incident: float) -> Step:
    form = entry.form_at()
    assumed = form is not None and form.basis is Basis.ASSUMED
    amount = loss_text(float(entry.loss), incident)
    return Step(
        key=entry.line.key,
        label=entry.line.title,
        start=start,
        end=end if amount[0] in "+−" else start,  # what prints as zero is drawn as zero, not as a gain of rounding
        value_text=amount,
        detail_text=delta_text(entry),
        role=_ROLES[entry.line.family],
        assumed=assumed,
    )


def _axis(steps: tuple[Step, ...]) -> tuple[float, float]:
    """From zero, or from a round number where the losses would be too small to see."""
    ends = [level for s in steps if not s.total for level in (s.start, s.end)] + [s.end for s in steps if s.total]
    low, high = min(ends), max(ends)
    span = max(high - low, 1.0)
    floor = low - 0.4 * span
    return round_range(floor if floor > 0.12 * high else 0.0, high + 0.02 * span)


def jv_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec:
    """Current density against voltage: the cell and its limit. A live plot has no room for a caption."""
    ledger, cell_curve = picture.ledger, picture.cell_curve
    limit = ledger.limit
    drawn = not math.isnan(cell_curve.ideality)
    series = [Series("limit", "Limit", picture.limit_curve.voltage, picture.limit_curve.current, "limit", "dashed")]
    marks = [_power_mark("limit", picture.limit_curve.voltage, picture.limit_curve.current, float(limit.efficiency))]
    sweeps = [sweep for sweep in picture.entry.curves.sweeps if sweep.lit]
    for k, sweep in enumerate(sweeps):
        dash: Dash = "solid" if k == 0 else "dotted"
        label = sweep.direction or f"sweep {k + 1}"
        series.append(Series(f"sweep {k}", f"{label} (measured)", sweep.voltage, sweep.current, "cell", dash))
    if drawn:
        if not sweeps:
            label = f"{_short_name(picture)} (modelled)"
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
        title=f"{_name(picture)}: current density against voltage",
        x_label="Voltage (V)",
        y_label="Current density (mA cm⁻²)",
        y_short="J (mA cm⁻²)",
        x_range=round_range(0.0, 1.02 * max(float(limit.voc), float(ledger.cell.voc))),
        y_range=round_range(0.0, 1.12 * max(float(limit.jsc), float(ledger.cell.jsc))),
        series=tuple(series),
        marks=tuple(marks),
        caption=(note, *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


def _power_mark(role: Role, voltage: np.ndarray, current: np.ndarray, efficiency: float) -> Mark:
    """The mark at the maximum power point of a drawn curve (nearest drawn point: a place, not a figure)."""
    at = int(np.argmax(voltage * current))
    side: Side = "n" if role == "limit" else "sw"  # over the outer curve, and inside the inner one
    return Mark(str(role), percent(efficiency, 1), float(voltage[at]), float(current[at]), role, side=side)


def eqe_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
    """The EQE over photon energy with its edge, both gaps and the tail; None where the cell has no EQE."""
    eqe, edge = picture.entry.curves.eqe, picture.edge
    if eqe is None or edge is None:
        return None
    energy = EV_NM / eqe.wavelength[::-1]
    series = [Series("eqe", "EQE", energy, 100.0 * eqe.value[::-1], "cell")]
    marks: list[Mark] = []
    high = max(105.0, 105.0 * float(np.max(eqe.value)))
    if edge.energy.size:
        scale = 50.0 / float(np.max(edge.slope))
        series.append(Series("slope", "dEQE/dE", edge.energy, scale * edge.slope, "limit", "dotted"))
        inflection, mean = with_unit(edge.inflection, "eV", 5), with_unit(edge.mean, "eV", 5)
        on_curve = 100.0 * float(eqe.at(edge.inflection))
        marks = [
            Mark("inflection", f"inflection {inflection}", edge.inflection, on_curve, "limit", "diamond", False, "se"),
            Mark("mean", f"edge mean {mean}", edge.mean, 0.0, "limit", "diamond", False, "ne"),
        ]
    note = "No tail extrapolated"
    tail, _ = edge.tail_at(float(picture.ledger.cell.temperature))  # as the ledger uses it
    if tail is not None:
        below = np.linspace(tail.start - 6.0 * tail.slope, tail.start, 60, endpoint=False)
        value = 100.0 * tail.at(below)
        series.append(Series("tail", "tail", below, value, "non-radiative", "dashed"))
        note = f"Tail: exponential, {with_unit(1e3 * tail.slope, 'meV', 3)}"
    return PlotSpec(
        title=f"{_name(picture)}: external quantum efficiency",
        x_label="Photon energy (eV)",
        y_label="EQE (%)",
        x_range=round_range(float(energy[0]), float(energy[-1])),
        y_range=round_range(0.0, high),
        series=tuple(series),
        marks=tuple(marks),
        caption=(note, *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


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
        title=f"{_name(picture)}: efficiency against the gap",
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
