"""The three tables that the headless command writes.

ledger.csv
    A row for each cell and line that the cell has, cells in the order of the table, lines from the sun to the cell.
    `loss_mW_cm2`, `loss_pct` (of the incident power) and `delta` are positive for a loss; `delta_unit` is V, mA/cm2,
    % (points of fill factor) or mW/cm2; `basis` says how the line is known. The 95 % columns stay empty as long as no
    uncertainties are worked out.
summary.csv
    A row for each cell: `name`, `group`, the fields under the names they have in the table (`ere` apart, which stands
    among the results: as measured, or by reciprocity where it was not), defaults filled in and unknown ones empty,
    `spectrum`, `reference`; then the table's other columns as they were; then the results. A column of the table that
    is called like one of these is kept under its name with "given_" in front.
problems.csv
    A row for each thing that is wrong (`refused`) or wants a second look (`doubtful`), with the column it is about and
    the line of the table in its message. Without problems there is only the header.

Numbers are written so that they read back without loss.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from app.batch.portions import RESULTS, Portion
from app.batch.rows import located
from app.cell_columns import GROUP, NAME, REFERENCE, SPECTRUM, STEP
from app.files.tables import Cell, Table, write_columns
from app.session.fields import FIELD_BY_KEY, FIELDS
from app.wording import basis_text
from physics.checks import Severity
from physics.lines import LINES
from physics.units import Array, Indices

LEDGER_FILE, SUMMARY_FILE, PROBLEMS_FILE = "ledger.csv", "summary.csv", "problems.csv"
FILES = (LEDGER_FILE, SUMMARY_FILE, PROBLEMS_FILE)
LEDGER_COLUMNS = (
    "name", "group", "line", "family", "section", "loss_mW_cm2", "loss_pct", "delta", "delta_unit", "basis",
    "low95_pct", "high95_pct",
)  # fmt: skip
PROBLEM_COLUMNS = ("name", "field", "severity", "message")
_GIVEN = tuple((k, f) for k, f in enumerate(FIELDS) if f.column not in RESULTS)
SUMMARY_INPUTS = (NAME, GROUP, *(f.column for _, f in _GIVEN), SPECTRUM, REFERENCE)

# Unit in physics -> factor and unit in plain ASCII, for programs that read the file.
_DELTA = {"V": (1.0, "V"), "mA cm⁻²": (1.0, "mA/cm2"), "": (100.0, "%"), "mW cm⁻²": (1.0, "mW/cm2")}
_FACTORS = np.array([_DELTA[line.factor.unit][0] for line in LINES])
_BASES = tuple(tuple(basis_text(form) for form in line.forms) for line in LINES)

Columns = list[list[Cell]]


@dataclass
class Tally:
    """What became of the rows, and what is kept of them until the ledger is written."""

    computed: list[int] = field(default_factory=list)
    refused: int = 0
    doubtful: int = 0
    problems: list[tuple[str, str, str, str]] = field(default_factory=list)
    kept: list[tuple[Indices, list[tuple[str, str, str]], Array, Array]] = field(default_factory=list)

    def add(self, portion: Portion) -> None:
        """Count a portion and keep its inputs, results and problems."""
        places = portion.computed
        self.refused += len(portion.rows) - len(places)
        for row in portion.rows:
            for problem in row.problems:
                self.doubtful += problem.severity is Severity.DOUBTFUL
                known = FIELD_BY_KEY.get(problem.field)
                column = known.column if known else problem.field
                message = located(row.line, problem.message)
                self.problems.append((row.read.name, column, problem.severity.value, message))
        rows = [portion.rows[place] for place in places]
        indices = [row.index for row in rows]
        self.computed += indices
        texts = [(row.read.name, row.read.group, row.read.spectrum) for row in rows]
        self.kept.append((np.array(indices, dtype=np.intp), texts, portion.inputs[places], portion.results[places]))


def write_tables(folder: Path, table: Table, extras: tuple[str, ...], portions: Iterable[Portion]) -> Tally:
    """Write the three tables, each whole or not at all.

    Parameters
    ----------
    folder : Path
        An existing folder.
    table : Table
        The table of cells.
    extras : tuple of str
        Its columns that travel along.
    portions : iterable of Portion
        All its rows, worked out; they are drawn one by one while the ledger is written.

    Returns
    -------
    Tally
        What became of the rows.

    Raises
    ------
    WriteError
        Where a table could not be saved.
    """
    tally = Tally()

    def ledgers() -> Iterator[Columns]:
        for portion in portions:
            tally.add(portion)
            yield _ledger_columns(portion)

    write_columns(folder / LEDGER_FILE, LEDGER_COLUMNS, ledgers())
    write_columns(folder / SUMMARY_FILE, summary_header(extras), _summary_columns(tally, table, extras))
    problems: list[Columns] = [[list(column) for column in zip(*tally.problems, strict=True)]] if tally.problems else []
    write_columns(folder / PROBLEMS_FILE, PROBLEM_COLUMNS, problems)
    return tally


def _ledger_columns(portion: Portion) -> Columns:
    """The lines of a portion's cells, cell by cell."""
    places = portion.computed
    cells, lines = np.nonzero(portion.form[places] >= 0)
    at = places[cells]
    loss = portion.loss[at, lines]
    picked = lines.tolist()
    forms = portion.form[at, lines].tolist()
    owners = [portion.rows[place].read for place in at.tolist()]
    nothing: list[Cell] = [None] * len(picked)
    return [
        [owner.name for owner in owners],
        [owner.group for owner in owners],
        [LINES[k].key for k in picked],
        [LINES[k].family.value for k in picked],
        [LINES[k].section.value for k in picked],
        loss.tolist(),
        (100.0 * loss / portion.incident[at]).tolist(),
        (portion.delta[at, lines] * _FACTORS[lines]).tolist(),
        [_DELTA[LINES[k].factor.unit][1] for k in picked],
        [_BASES[k][form] for k, form in zip(picked, forms, strict=True)],
        nothing,
        nothing,
    ]


def summary_header(extras: tuple[str, ...]) -> tuple[str, ...]:
    """Columns of summary.csv for a table with these other columns."""
    return (*SUMMARY_INPUTS, *renamed(extras).values(), *RESULTS)


def renamed(extras: tuple[str, ...]) -> dict[str, str]:
    """The other columns of a table, each with its name in summary.csv."""
    taken = {*SUMMARY_INPUTS, *RESULTS, *extras}
    names = {}
    for extra in extras:
        name = extra
        while (name != extra and name in taken) or name in SUMMARY_INPUTS or name in RESULTS:
            name = f"given_{name}"
        taken.add(name)
        names[extra] = name
    return names


def _summary_columns(tally: Tally, table: Table, extras: tuple[str, ...]) -> Iterator[Columns]:
    positions = [table.columns.index(extra) for extra in extras]
    for indices, texts, inputs, results in tally.kept:
        rows = [table.rows[index] for index in indices]
        yield [
            [name for name, _, _ in texts],
            [group for _, group, _ in texts],
            *(_numbers(inputs[:, k]) for k, _ in _GIVEN),
            [spectrum for _, _, spectrum in texts],
            [STEP] * len(texts),
            *([row[position] for row in rows] for position in positions),
            *(_numbers(results[:, k]) for k in range(len(RESULTS))),
        ]


def _numbers(values: Array) -> list[Cell]:
    """Numbers, with an empty cell for an unknown one."""
    if np.isnan(values).any():
        return [None if value != value else value for value in values.tolist()]
    column: list[Cell] = values.tolist()
    return column
