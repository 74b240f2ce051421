"""What is wrong with a cell's inputs, and its ledger where nothing is."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from app.session.curves import curve_figures
from app.session.fields import FIELD_BY_KEY, FIELDS
from app.session.light import light_named
from app.session.stacks import stacks_of
from app.session.state import CellEntry, Choices, Unread
from physics.cell import UNKNOWN, Cell
from physics.checks import Check, Severity, failed
from physics.ledger import Ledger, ledger_against
from physics.limit import Faces, Limit, detailed_balance_limit
from physics.spectrum import Illumination
from physics.units import Array


@dataclass(frozen=True)
class Problem:
    """Something wrong or doubtful about one field.

    Parameters
    ----------
    field : str
        Key of the field, "spectrum" for the light, "stacks" for the partial stacks, or "" for the cell as a whole.
    severity : Severity
    message : str
        One plain sentence.
    missing : bool
        Nothing is wrong but that nothing was given yet.
    """

    field: str
    severity: Severity
    message: str
    missing: bool = False


@dataclass(frozen=True, eq=False)
class Appraisal:
    """A cell's problems, and its ledger unless a problem forbids one."""

    entry: CellEntry
    problems: tuple[Problem, ...]
    ledger: Ledger | None

    def about(self, field: str) -> Problem | None:
        """The gravest problem of a field, or None."""
        if not self.problems:
            return None
        mine = [p for p in self.problems if p.field == field]
        return min(mine, key=lambda p: p.severity is not Severity.IMPOSSIBLE, default=None)


@lru_cache(maxsize=64)
def limit_under(spectrum: str, gap: float, temperature: float, irradiance: float, faces: Faces) -> Limit:
    """The limit of one gap [eV] at a temperature [K] under a named light of an irradiance [mW cm⁻²].

    Most inputs of a cell do not touch its limit: it stays the same object while they change.
    """
    return detailed_balance_limit(gap, temperature, light_named(spectrum), irradiance, faces)


def gap_fault(gap: float, light: Illumination) -> str:
    """Sentence about a gap that the light does not cover, or an empty text."""
    low, high = light.gap_range
    if low <= gap <= high:
        return ""
    return f"The spectrum covers gaps from {low:.3g} to {high:.3g} eV; this gap lies outside."


def field_problems(values: Mapping[str, object]) -> list[Problem]:
    """Problems that each field shows by itself: missing, unreadable, out of range."""
    found = []
    for field in FIELDS:
        value = values.get(field.key)
        if isinstance(value, Unread):
            sentence = value.fault
        elif value is None:
            sentence = f"{field.symbol} is missing: type it in{f' {field.unit}' if field.unit else ''}."
            if not field.required:
                continue
        else:
            sentence = field.fault(float(value))  # type: ignore[arg-type]
        if sentence:
            found.append(Problem(field.key, Severity.IMPOSSIBLE, sentence, missing=value is None))
    return found


def check_sentence(check: Check, ledger: Ledger, index: int | tuple[int, ...] = ()) -> str:
    """A check's sentence with the numbers of one cell in it."""
    q = ledger.quantities
    names = {name: float(getattr(q, name)[index]) for name in q.__dataclass_fields__ if f"{{{name}" in check.message}
    return check.message.format(**names)


def physics_values(columns: Mapping[str, object]) -> dict[str, Array]:
    """Inputs of `physics.cell.Cell` from numbers or arrays in the fields' units (NaN or None: default or unknown)."""
    arguments = {}
    for field in FIELDS:
        if field.key == "area":
            continue
        given, default = columns.get(field.key), UNKNOWN if field.default is None else field.default
        array = np.asarray(default if given is None else given, dtype=float)
        if field.default is not None and array.ndim:
            array = np.where(np.isnan(array), default, array)
        arguments[field.key] = field.to_physics(array)
    return arguments


def _cell_of(entry: CellEntry, values: Mapping[str, object], choices: Choices) -> Cell:
    """The cell that the numbers and curves describe."""
    numbers = physics_values(values)
    gap, temperature, irradiance = (float(numbers[key]) for key in ("gap", "temperature", "irradiance"))
    more = curve_figures(entry.curves, entry.spectrum, gap, temperature, irradiance, choices.faces)
    fitted = float("fit" in entry.sources.values())
    return Cell.of(**numbers, **more, fitted=fitted)


def appraise(entry: CellEntry, choices: Choices) -> Appraisal:
    """Check one cell and work out its ledger.

    Parameters
    ----------
    entry : CellEntry
        The cell as typed.
    choices : Choices
        Conventions.

    Returns
    -------
    Appraisal
        `ledger` is None where a problem is of the kind that forbids one.
    """
    problems = field_problems(entry.values)
    light = None
    try:
        light = light_named(entry.spectrum)
    except ValueError as fault:
        problems.append(Problem("spectrum", Severity.IMPOSSIBLE, str(fault)))
    gap = entry.values.get("gap")
    if light is not None and isinstance(gap, float) and not FIELD_BY_KEY["gap"].fault(gap):
        sentence = gap_fault(gap, light)
        if sentence:
            problems.append(Problem("gap", Severity.IMPOSSIBLE, sentence))
    if light is None:
        return Appraisal(entry, tuple(problems), None)
    wrong = {p.field for p in problems}
    sound = {key: None if key in wrong else value for key, value in entry.values.items()}
    cell = _cell_of(entry, sound, choices)
    limit = limit_under(entry.spectrum, float(cell.gap), float(cell.temperature), float(cell.irradiance), choices.faces)
    stacks = stacks_of(entry.stacks, float(cell.temperature))
    if entry.stacks.fault:
        problems.append(Problem("stacks", Severity.DOUBTFUL, entry.stacks.fault))
    ledger = ledger_against(cell, limit, choices.attribution, stacks)
    missed = failed(ledger)
    if any(check.field == "stacks" and check.severity is Severity.IMPOSSIBLE for check, _ in missed):
        # The cell has a ledger all the same: the one without the split.
        problems += [Problem("stacks", Severity.DOUBTFUL, c.message) for c, _ in missed if c.field == "stacks"]
        ledger = ledger_against(cell, limit, choices.attribution)
        missed = failed(ledger)
    problems += [Problem(check.field, check.severity, check_sentence(check, ledger)) for check, _ in missed]
    forbidden = any(p.severity is Severity.IMPOSSIBLE for p in problems)
    return Appraisal(entry, tuple(problems), None if forbidden else ledger)
