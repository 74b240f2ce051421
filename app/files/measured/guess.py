"""The first guess at what a measured text is, to be looked at and changed."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import replace
from pathlib import PurePath

import numpy as np

from app.files.measured import magnitudes
from app.files.measured.columns import Pairing, Seen, pairing
from app.files.measured.facts import area_of, name_of, sweep_words
from app.files.measured.legs import legs_of
from app.files.measured.model import Block, MeasuredText
from app.files.measured.reading import Kind, Reading, Trace
from app.files.measured.units import UNITS
from app.files.measured.words import direction_in, lit_in
from app.files.quoting import quote

_KINDS: dict[Kind, str] = {
    "jv": "a current–voltage sweep", "eqe": "a quantum efficiency", "intensity": "a light-intensity series",
    "spectrum": "a spectrum", "unknown": "not known",
}  # fmt: skip


def guess(text: MeasuredText, kind: Kind | None = None) -> Reading:
    """Say what kind of measurement a text holds, which columns make its curves, and in which units and signs.

    What the words above the columns leave open is told from the numbers, and asked in `Reading.questions`.

    Parameters
    ----------
    text : MeasuredText
    kind : {"jv", "eqe", "intensity", "spectrum"}, optional
        What it is known to be.
    """
    questions: list[str] = []
    if text.decimal_doubt:
        taken = "decimal marks" if text.decimal == "," else "marks of thousands"
        questions.append(
            f"The commas in the numbers, as in {quote(text.decimal_doubt)} on line {text.decimal_line}, can be decimal "
            f"marks or part thousands: they are taken as {taken}."
        )
    pairings = [pairing(block, kind) for block in text.blocks]
    kind = kind or _kind(text.blocks, pairings)
    if kind == "unknown":
        questions.append(f"What the columns at line {text.blocks[0].first_line} are cannot be told: choose.")
        return Reading(kind, (), text.delimiter, text.decimal, questions=tuple(questions))
    traces: list[Trace] = []
    for place, (block, found) in enumerate(zip(text.blocks, pairings, strict=True)):
        if found.kind != kind:
            questions.append(f"The table at line {block.first_line} is {_KINDS[found.kind]}: it is left out.")
        elif found.by_numbers and found.pairs:
            questions.append(
                f"The columns at line {block.first_line} have no known names: they are taken as {_KINDS[kind]}."
            )
        if found.kind == kind:
            traces += [_trace(text, place, pair, kind, questions) for pair in found.pairs]
    if kind == "jv":
        traces = _with_directions(text, _oriented(text, traces, questions), questions)
    if kind == "intensity":
        traces = [_positive(text, trace) for trace in traces]
    traces = _labelled(text, traces)
    return Reading(kind, tuple(traces), text.delimiter, text.decimal, questions=tuple(dict.fromkeys(questions)))


def remembered(text: MeasuredText, choice: Reading) -> Reading:
    """Apply a choice made for one text to another of the same shape (see `shape_key`).

    Columns, units and signs come from the choice; names, directions, light and area from the text. Blocks beyond those
    the choice was made for follow the last one of as many columns.
    """
    fresh = guess(text)
    told = {(trace.block, trace.y): trace for trace in fresh.traces}
    last = max((trace.block for trace in choice.traces), default=0)
    traces: list[Trace] = []
    for place, block in enumerate(text.blocks):
        pattern = [trace for trace in choice.traces if trace.block == min(place, last)]
        for trace in pattern:
            if max(trace.x, trace.y) > len(block.columns):
                return fresh
            own = told.get((place, trace.y))
            traces.append(
                replace(
                    trace, block=place, label=own.label, direction=own.direction, lit=own.lit, area_cm2=own.area_cm2
                )
                if own is not None
                else replace(trace, block=place)
            )
    return replace(choice, traces=tuple(traces), questions=())


def _kind(blocks: Sequence[Block], pairings: Sequence[Pairing]) -> Kind:
    """The kind of most rows, those with named columns first: a list of results above a sweep has few."""
    named: Counter[Kind] = Counter()
    guessed: Counter[Kind] = Counter()
    for block, found in zip(blocks, pairings, strict=True):
        if found.kind != "unknown":
            (guessed if found.by_numbers else named)[found.kind] += len(block.lines)
    for counted in (named, guessed):
        if counted:
            return counted.most_common(1)[0][0]
    return "unknown"


def _trace(text: MeasuredText, place: int, pair: tuple[Seen, Seen], kind: Kind, questions: list[str]) -> Trace:
    x, y = pair
    block = text.blocks[place]
    direction, lit = sweep_words(block)
    area = area_of(text, block) if kind in ("jv", "intensity") else None
    if area is not None and area.question:
        questions.append(area.question)
    return Trace(
        block=place,
        x=x.column.index,
        y=y.column.index,
        x_unit=_unit(x, kind, "x", block, questions, 0.0),
        y_unit=_unit(y, kind, "y", block, questions, _at_zero(x, y)),
        direction=direction_in(y.name) or direction_in(x.name) or direction,
        lit=_first_told(lit_in(y.name), lit_in(x.name), lit),
        area_cm2=None if area is None else area.cm2,
        quantity="reflectance" if y.quantity == "reflectance" else "eqe",
    )


def _first_told(*answers: bool | None) -> bool | None:
    return next((answer for answer in answers if answer is not None), None)


def _at_zero(x: Seen, y: Seen) -> float:
    return magnitudes.orientation(x.column.values, y.column.values).at_zero


def _unit(column: Seen, kind: Kind, axis: str, block: Block, questions: list[str], at_zero: float) -> str:
    """The unit of a column: as written, or the likely one with a question, or "" where one is written but not known."""
    if column.unit is not None and column.unit.dimension in _dimensions(kind, axis):
        return column.unit.name
    where = f"Column {column.column.index} at line {block.first_line}"
    named = f", {quote(column.name)}," if column.name else ""
    if column.unit is None and column.column.unit:
        questions.append(f"{where}{named} has the unit {quote(column.column.unit)}, which is not known: choose one.")
        return ""
    unit = _likely(column, kind, axis, at_zero)
    questions.append(f"{where}{named} has no unit: it is taken as {unit}." if unit else f"{where}{named} has no unit.")
    return unit


def _dimensions(kind: Kind, axis: str) -> tuple[str, ...]:
    if kind in ("jv", "intensity"):
        return ("voltage",) if (axis == "x") == (kind == "jv") else ("current", "density")
    if axis == "x":
        return ("wavelength", "energy")
    return ("fraction", "responsivity") if kind == "eqe" else ("irradiance",)


def _likely(column: Seen, kind: Kind, axis: str, at_zero: float) -> str:
    values = column.column.values
    dimensions = _dimensions(kind, axis)
    if "voltage" in dimensions:
        return magnitudes.unit_of_voltage(values)
    if "density" in dimensions:
        typical = at_zero if kind == "jv" else float(np.nanmax(np.abs(values)))
        nameless = column.quantity not in ("density", "current", "jsc")
        density = column.quantity in ("density", "jsc") or (nameless and abs(typical) >= 0.3)
        return magnitudes.unit_of_current(typical, density)
    if "wavelength" in dimensions:
        return "eV" if column.quantity == "energy" else magnitudes.unit_of_wavelength(values)
    if column.quantity == "responsivity":
        return "A/W"
    if kind == "eqe":
        return magnitudes.unit_of_efficiency(values)
    return "W/m²/nm" if kind == "spectrum" else ""


def _with_directions(text: MeasuredText, traces: Sequence[Trace], questions: list[str]) -> list[Trace]:
    """Keep the words on direction where sweeps share a column of voltages: its order says nothing of them then."""
    shared = Counter((trace.block, trace.x) for trace in traces)
    kept: list[Trace] = []
    for trace in traces:
        if shared[trace.block, trace.x] > 1:
            kept.append(trace)
            continue
        block = text.blocks[trace.block]
        voltage = block.columns[trace.x - 1].values * trace.x_sign
        voltage = voltage[np.isfinite(voltage)]
        if trace.direction and len(voltage) and len(legs_of(voltage)) == 1:
            seen = "forward" if voltage[-1] > voltage[0] else "reverse"
            if seen != trace.direction:
                questions.append(
                    f"The sweep at line {block.first_line} is called {trace.direction}, but its voltages "
                    f"{'rise' if seen == 'forward' else 'fall'}: it is taken as {seen}."
                )
        kept.append(replace(trace, direction=""))
    return kept


def _positive(text: MeasuredText, trace: Trace) -> Trace:
    """Give the currents and voltages of a light-intensity series the signs that make them positive."""
    columns = text.blocks[trace.block].columns
    signs = [-1 if np.nanmedian(columns[place - 1].values) < 0 else 1 for place in (trace.x, trace.y)]
    return replace(trace, x_sign=signs[0], y_sign=signs[1])


def _oriented(text: MeasuredText, traces: Sequence[Trace], questions: list[str]) -> list[Trace]:
    """Give all sweeps of one text the signs of its light sweeps: they were taken with one wiring."""
    shapes = []
    for trace in traces:
        columns = text.blocks[trace.block].columns
        shape = magnitudes.orientation(columns[trace.x - 1].values, columns[trace.y - 1].values)
        shapes.append(shape)
    lit = [_first_told(trace.lit, shape.lit) for trace, shape in zip(traces, shapes, strict=True)]
    guiding = [shape for shape, light in zip(shapes, lit, strict=True) if light is not False] or shapes
    signs = Counter((shape.x_sign, shape.y_sign) for shape in guiding).most_common(1)
    x_sign, y_sign = signs[0][0] if signs else (1, 1)
    for trace, shape, light in zip(traces, shapes, lit, strict=True):
        line = text.blocks[trace.block].first_line
        if trace.lit is False and shape.lit:
            questions.append(f"The sweep at line {line} is called dark, but carries a current at 0 V: is it?")
        if light is None:
            questions.append(f"Whether the sweep at line {line} was taken under light cannot be told: choose.")
        unit = UNITS.get(trace.y_unit)
        if light and unit is not None and unit.dimension == "density" and abs(shape.at_zero * unit.factor) > 100:
            questions.append(
                f"The sweep at line {line} carries {abs(shape.at_zero * unit.factor):.4g} mA/cm² at 0 V, more than all "
                "sunlight gives: is the unit right?"
            )
    return [replace(trace, x_sign=x_sign, y_sign=y_sign, lit=light) for trace, light in zip(traces, lit, strict=True)]


def _labelled(text: MeasuredText, traces: Sequence[Trace]) -> list[Trace]:
    """Name the curves: by the words above their columns, the title or facts of their block, or the source."""
    several = Counter(trace.block for trace in traces)
    source = PurePath(text.source).stem or text.source
    labelled: list[Trace] = []
    taken: Counter[str] = Counter()
    for trace in traces:
        block = text.blocks[trace.block]
        column = block.columns[trace.y - 1]
        parts = [(block.title if len(text.blocks) > 1 else "") or name_of(block.facts)]
        if several[trace.block] > 1:
            parts.append(f"{column.group} {column.name}".strip())
        label = ", ".join(part for part in parts if part) or source
        taken[label] += 1
        labelled.append(replace(trace, label=label if taken[label] == 1 else f"{label} ({taken[label]})"))
    return labelled
