"""From the rows of a table to cells with their problems, before anything is worked out."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path

from app.cell_columns import GROUP, NAME, SPECTRUM, not_available
from app.cell_curves import CURVE_COLUMNS, with_curves
from app.cells import ReadRow, entry_of, read_row
from app.files.quoting import quote
from app.files.tables import Table
from app.session.appraisal import Problem, field_problems, gap_fault
from app.session.curves import NO_CURVES, Curves
from app.session.fields import FIELD_BY_KEY
from app.session.light import light_named
from physics.checks import Severity
from physics.spectrum import Illumination

_NAMES_ITS_LINE = re.compile(r"Lines? [0-9]")
_GAP = FIELD_BY_KEY["gap"]


@dataclass(frozen=True)
class Row:
    """A row of the table.

    Parameters
    ----------
    index : int
        Place among the rows of the table.
    line : int
        Line of the file it starts on.
    read : ReadRow
        Its texts and numbers.
    light : Illumination or None
        None where the spectrum is not known, or the row cannot be used at all.
    problems : list of Problem
        What is wrong with it; more may be found when its ledger is worked out.
    curves : Curves
        What its files hold.
    fitted : bool
        Whether its ideality or resistances come from a fit.
    """

    index: int
    line: int
    read: ReadRow
    light: Illumination | None
    problems: list[Problem] = field(default_factory=list)
    curves: Curves = NO_CURVES
    fitted: bool = False

    def refuse(self, about: str, sentence: str) -> None:
        """Say why no ledger can be made of this row."""
        self.problems.append(Problem(about, Severity.IMPOSSIBLE, sentence))

    @property
    def refused(self) -> bool:
        """Whether a problem forbids a ledger."""
        return any(problem.severity is Severity.IMPOSSIBLE for problem in self.problems)


def located(line: int, sentence: str) -> str:
    """A sentence with the line of the file it is about, unless it names its lines itself."""
    return sentence if _NAMES_ITS_LINE.match(sentence) else f"Line {line}: {sentence}"


def read_rows(table: Table, folder: Path) -> Iterator[Row]:
    """All rows of a table, in order; names of curve files start from `folder`.

    What a field shows by itself is told in the same sentences as in the window; the columns that only this command
    reads, and names that occur twice, are looked at here.
    """
    first_lines: dict[tuple[str, str], int] = {}
    for index, (texts, line) in enumerate(zip(table.rows, table.line_numbers, strict=True)):
        cells = dict(zip(table.columns, texts, strict=True))
        if index in table.row_problems:
            bare = ReadRow(cells.get(NAME, "").strip(), cells.get(GROUP, "").strip(), "", {})
            row = Row(index, line, bare, None)
            row.refuse("", table.row_problems[index])
            yield row
            continue
        read = read_row(cells, table.decimal_comma)
        light, light_fault = _light_of(read.spectrum)
        row = _with_files(Row(index, line, read, light), cells, folder)
        read = row.read
        _check_name(row, first_lines)
        for column, sentence in not_available(cells):
            row.refuse(column, sentence)
        row.problems.extend(field_problems(read.values))
        if light_fault:
            row.refuse(SPECTRUM, light_fault)
        _check_gap(row)
        yield row


def _with_files(row: Row, cells: Mapping[str, str], folder: Path) -> Row:
    """The row with what its curve files hold."""
    if not any(cells.get(column, "").strip() for column in CURVE_COLUMNS):
        return row
    entry, faults, doubts = with_curves(entry_of(row.read), cells, folder)
    read = replace(row.read, values=entry.values)
    row = replace(row, read=read, curves=entry.curves, fitted="fit" in entry.sources.values())
    for column, sentence in faults:
        row.refuse(column, sentence)
    row.problems.extend(Problem(column, Severity.DOUBTFUL, sentence) for column, sentence in doubts)
    return row


def _light_of(spectrum: str) -> tuple[Illumination | None, str]:
    """The light, or the sentence why there is none."""
    try:
        return light_named(spectrum), ""
    except ValueError as fault:
        return None, str(fault)


def _check_gap(row: Row) -> None:
    gap = row.read.values["gap"]
    if row.light is not None and isinstance(gap, float) and not _GAP.fault(gap):
        sentence = gap_fault(gap, row.light)
        if sentence:
            row.refuse(_GAP.key, sentence)


def _check_name(row: Row, first_lines: dict[tuple[str, str], int]) -> None:
    """Names tell the cells apart in every result, so within a group each stands once."""
    name = row.read.name
    if not name:
        row.refuse(NAME, "The name is missing: give every cell one.")
        return
    first = first_lines.setdefault((row.read.group, name), row.line)
    if first != row.line:
        row.refuse(
            NAME,
            f"The name {quote(name)} stands already in line {first}: give every cell of a group a name of its own.",
        )
