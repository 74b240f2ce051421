"""From a cell's picture to the description of its waterfall. No Qt, no physics: numbers in, texts and positions out."""

from __future__ import annotations

from functools import lru_cache

from app.figures.plot_parts import STALE, caption_of, cell_name, round_range
from app.figures.spec import Role, Segment, Step, WaterfallSpec
from app.session.light import light_named
from app.session.outcome import Picture
from app.wording import basis_text, delta_text, loss_text, percent, with_unit
from physics.ledger import Entry, Ledger, entries_of
from physics.lines import Basis, Family, Section

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
    name = cell_name(picture)
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


