"""The ledgers of many cells at once, in portions that bound the memory."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import islice
from pathlib import Path

import numpy as np

from app.batch.rows import Row, read_rows
from app.files.tables import Table
from app.session.appraisal import Problem, check_sentence, physics_values
from app.session.curves import curve_figures
from app.session.fields import FIELDS
from physics.attribution import Attribution
from physics.cell import Cell
from physics.checks import failed
from physics.ledger import Ledger, ledger_of
from physics.lines import LINES
from physics.spectrum import Illumination
from physics.units import Array, Indices

ROWS_AT_A_TIME = 5_000

#: Columns of `Portion.results`, by their names in summary.csv.
RESULTS = (
    "jsc_limit_mA_cm2",
    "voc_limit_V",
    "ff_limit_pct",
    "pce_limit_pct",
    "pce_pct",
    "ere",
    "voc_rad_V",
    "j0_limit_mA_cm2",
    "j0_rad_mA_cm2",
    "closure_mW_cm2",
)


@dataclass(frozen=True, eq=False)
class Portion:
    """Some successive rows of a table, worked out; the arrays hold NaN for rows without a known light.

    Parameters
    ----------
    rows : list of Row, length n
        With all their problems.
    inputs : ndarray, shape (n, number of fields)
        Numbers as given or by default, in the fields' units; NaN where unknown or wrong.
    incident : ndarray, shape (n,)
        Incident power [mW cm⁻²].
    loss, delta : ndarray, shape (n, number of lines)
        Amounts of the lines [mW cm⁻²; unit of the line's factor].
    form : ndarray of int, shape (n, number of lines)
        Index of the form of each line, −1 where the cell has no such line.
    results : ndarray, shape (n, len(RESULTS))
        In the units that the names state.
    """

    rows: list[Row]
    inputs: Array
    incident: Array
    loss: Array
    delta: Array
    form: Indices
    results: Array

    @property
    def computed(self) -> Indices:
        """Places of the rows that have a ledger."""
        return np.array([place for place, row in enumerate(self.rows) if not row.refused], dtype=np.intp)


def portions_of(table: Table, attribution: Attribution, folder: Path) -> Iterator[Portion]:
    """All rows of a table in `folder`, worked out in portions of `ROWS_AT_A_TIME`, in order."""
    rows = read_rows(table, folder)
    while batch := list(islice(rows, ROWS_AT_A_TIME)):
        yield work_out(batch, attribution)


def work_out(rows: list[Row], attribution: Attribution) -> Portion:
    """Ledgers and checks of some rows, with one call of the physics for each light among them.

    Refused rows are worked out too, as far as they go, so that all that is wrong with a row is told at once.
    """
    portion = _empty(rows)
    lights: dict[int, tuple[Illumination, list[int]]] = {}
    for place, row in enumerate(rows):
        if row.light is not None:
            lights.setdefault(id(row.light), (row.light, []))[1].append(place)
    for light, places in lights.values():
        where = np.array(places, dtype=np.intp)
        columns = {field.key: portion.inputs[where, k] for k, field in enumerate(FIELDS)}
        # What overflows here ends in a number that is not finite, and the check `not_finite` tells of it.
        with np.errstate(all="ignore"):
            numbers = physics_values(columns)
            cell = Cell.of(**numbers, **_curve_columns([rows[place] for place in places], numbers))
            ledger = ledger_of(cell, light, attribution)
            _keep(portion, where, ledger)
            _check(rows, where, ledger)
    return portion


def _curve_columns(rows: list[Row], numbers: Mapping[str, Array]) -> dict[str, Array]:
    """What the rows' curves add to the numbers of their cells; nothing where no row has any."""
    if not any(row.fitted or row.curves.eqe is not None for row in rows):
        return {}
    columns = {name: np.full(len(rows), np.nan) for name in ("eqe_above", "eqe_below", "j0_rad", "reflected")}
    columns |= {"tail_share": np.zeros(len(rows)), "fitted": np.array([float(row.fitted) for row in rows])}
    for k, row in enumerate(rows):
        gap, temperature, irradiance = (float(numbers[key][k]) for key in ("gap", "temperature", "irradiance"))
        found = curve_figures(row.curves, row.read.spectrum, gap, temperature, irradiance, 1)
        for name, value in found.items():
            columns[name][k] = value
    return columns


def _empty(rows: list[Row]) -> Portion:
    count = len(rows)
    inputs = np.full((count, len(FIELDS)), np.nan)
    for place, row in enumerate(rows):
        wrong = {problem.field for problem in row.problems}
        for k, field in enumerate(FIELDS):
            value = row.read.values.get(field.key)
            if isinstance(value, float) and field.key not in wrong:
                inputs[place, k] = value
    return Portion(
        rows=rows,
        inputs=inputs,
        incident=np.full(count, np.nan),
        loss=np.full((count, len(LINES)), np.nan),
        delta=np.full((count, len(LINES)), np.nan),
        form=np.full((count, len(LINES)), -1, dtype=np.intp),
        results=np.full((count, len(RESULTS)), np.nan),
    )


def _keep(portion: Portion, where: Indices, ledger: Ledger) -> None:
    portion.incident[where] = ledger.limit.incident
    for k, entry in enumerate(ledger.entries):
        portion.loss[where, k] = entry.loss
        portion.delta[where, k] = entry.delta
        portion.form[where, k] = entry.form
    limit, q = ledger.limit, ledger.quantities
    results = (
        limit.jsc,
        limit.voc,
        100.0 * limit.ff,
        100.0 * limit.efficiency,
        100.0 * ledger.efficiency,
        ledger.ere,
        q.voc_rad,
        limit.j0,
        q.j0_rad,
        ledger.closure,
    )
    portion.results[where] = np.stack(results, axis=-1)


def _check(rows: list[Row], where: Indices, ledger: Ledger) -> None:
    for check, mask in failed(ledger):
        for index in np.flatnonzero(mask).tolist():
            problem = Problem(check.field, check.severity, check_sentence(check, ledger, index))
            rows[where[index]].problems.append(problem)
