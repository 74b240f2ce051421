"""Finding the tables of numbers in a measurement's text."""

from __future__ import annotations

from collections.abc import Sequence
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

from app.files.measured.cells import number_and_unit, number_in
from app.files.measured.dialect import Decimals, check_commas, find_decimals, find_delimiter, names_delimiter
from app.files.measured.headings import Headings, facts_of, find_headings, no_headings, notes_of, title_of
from app.files.measured.model import Block, Column, DecimalMark, Delimiter, MeasuredText
from app.files.measured.runs import Run, Runs, find_runs
from app.files.measured.scan import Line, LineKind, scan
from app.files.measured.text_lines import lines_of
from app.files.quoting import quote
from app.files.table_error import TableError

MAX_CELLS = 4_000_000
MAX_BLOCKS = 500
MAX_COLUMNS = 2_000
_MOST_PROBLEMS = 50
# Instruments that follow SCPI-99 write 9.9E37 for infinity and 9.91E37 for no number (from memory).
_OVERRANGE = 9e37


def read_measured(
    data: bytes, source: str, delimiter: Delimiter | None = None, decimal: DecimalMark | None = None
) -> MeasuredText:
    """Find the tables of numbers in a text, whatever stands above, between and below them.

    Parameters
    ----------
    data : bytes
        UTF-8, UTF-16 or Windows Western text, with lines that end in LF, CRLF or CR.
    source : str
        What to call it in messages, such as the file's name.
    delimiter, decimal : str, optional
        What is known to stand between the cells and to be the decimal mark; found out where None.

    Raises
    ------
    TableError
        Where it is no text, is too large, or has no rows of two or more numbers: one sentence with the line.
    """
    lines, encoding = lines_of(data, source)
    delimiter = delimiter or find_delimiter(lines)
    if names_delimiter(lines[0]):
        lines[0] = ""
    decimals = Decimals(decimal or ".")
    if decimal is None and _has_commas(lines, delimiter):
        rows = (line for line in scan(lines, delimiter, ".") if line.kind is LineKind.ROW)
        decimals = find_decimals((row.number, row.cells) for row in rows)
    scanned = list(scan(lines, delimiter, decimals.mark))
    found = find_runs(scanned, delimiter)
    _check(found, scanned, delimiter, source)
    problems = list(found.problems)
    if decimals.mixed:
        problems.append("There are decimal commas and decimal points: each number is read by its own mark.")
    blocks: list[Block] = []
    headings: Headings | None = None
    for run in found.runs:
        own = find_headings(run.above, run.width, delimiter)
        if own is None and headings is not None and len(headings.names) == run.width:
            own = headings
        headings = own or no_headings(run.width)
        blocks.append(_block(run, headings, decimals.mark, delimiter, problems))
    every = [line for block in blocks for line in block.notes] + [line.text for line in found.below]
    return MeasuredText(
        source=source,
        blocks=tuple(blocks),
        facts=MappingProxyType(facts_of(every, delimiter)),
        delimiter=delimiter,
        decimal=decimals.mark,
        decimal_doubt=decimals.doubt,
        decimal_line=decimals.line,
        encoding=encoding,
        problems=_shortened(problems),
        data=data,
    )


def _has_commas(lines: Sequence[str], delimiter: Delimiter) -> bool:
    """Say whether commas may stand in numbers."""
    return any("," in line and (delimiter != "," or '"' in line) for line in lines)


def _check(found: Runs, scanned: Sequence[Line], delimiter: Delimiter, source: str) -> None:
    if not found.runs:
        raise _no_table(scanned, source)
    widest = max(found.runs, key=lambda run: run.width)
    if widest.width > MAX_COLUMNS:
        raise TableError(
            f"Line {widest.rows[0].number} of {quote(source)} has {widest.width} columns: "
            f"no more than {MAX_COLUMNS} were expected."
        )
    if len(found.runs) > MAX_BLOCKS:
        raise TableError(
            f"{quote(source)} has more than {MAX_BLOCKS} tables, the next at line "
            f"{found.runs[MAX_BLOCKS].rows[0].number}: a file for each part was expected."
        )
    cells = 0
    for run in found.runs:
        cells += len(run.rows) * run.width
        if cells > MAX_CELLS:
            raise TableError(
                f"{quote(source)} has more than {MAX_CELLS} cells up to line {run.rows[-1].number}: "
                "a file for each part was expected."
            )
    if delimiter == ",":
        for run in found.runs:
            headings = len(run.above[-1].cells) if run.above else 0
            check_commas([(row.number, row.cells) for row in run.rows[:100]], headings, source)


def _no_table(scanned: Sequence[Line], source: str) -> TableError:
    """Say what stands where a table was expected."""
    written = [line for line in scanned if line.kind is not LineKind.BLANK]
    if not written:
        return TableError(f"{quote(source)} is empty: a table of numbers was expected from line 1 on.")
    line = next(filter(_has_number, written), written[0])
    return TableError(
        f"{quote(source)} has no table: line {line.number} reads {quote(line.text.strip())}, "
        "and rows of two or more numbers were expected."
    )


def _has_number(line: Line) -> bool:
    read = [number_in(cell, ".") for cell in line.cells]
    return any(value is not None and value == value for value in read)


def _block(run: Run, headings: Headings, decimal: DecimalMark, delimiter: Delimiter, problems: list[str]) -> Block:
    values = np.full((len(run.rows), run.width), np.nan)
    full = [index for index, row in enumerate(run.rows) if len(row.values) == run.width]
    if full:
        values[full] = [run.rows[index].values for index in full]
    for index, row in enumerate(run.rows):
        if len(row.values) != run.width:
            values[index, : len(row.values)] = row.values
    for index, place in np.argwhere(np.abs(values) >= _OVERRANGE):
        values[index, place] = np.nan
        problems.append(
            f"Line {run.rows[index].number} has {quote(run.rows[index].cells[place].strip())} in column {place + 1}, "
            "an instrument's mark for no reading: it counts as blank."
        )
    units = _units_in_cells(run, headings.units, decimal, values, problems)
    _tell_words(run, values, problems)
    columns = tuple(
        Column(place + 1, headings.names[place], units[place], headings.groups[place], _frozen(values[:, place]))
        for place in range(run.width)
    )
    header = tuple(line.text.strip() for line in run.above)
    lines = np.array([row.number for row in run.rows], dtype=np.int64)
    notes = tuple(notes_of(run.above, headings))
    facts = MappingProxyType(facts_of(notes, delimiter))
    return Block(columns, lines, header, notes, title_of(notes, delimiter), facts)


def _frozen(column: NDArray[np.float64]) -> NDArray[np.float64]:
    own = column.copy()
    own.flags.writeable = False
    return own


def _units_in_cells(
    run: Run, units: Sequence[str], decimal: DecimalMark, values: NDArray[np.float64], problems: list[str]
) -> list[str]:
    """Take units from cells such as "85 %" where the headings have none, and blank the cells with another unit."""
    found = list(units)
    for place, unit in enumerate(units):
        first = number_and_unit(run.rows[0].cells[place], decimal) if place < len(run.rows[0].cells) else None
        if first is None:
            continue
        found[place] = unit or first[1]
        for index, row in enumerate(run.rows):
            own = number_and_unit(row.cells[place], decimal) if place < len(row.cells) else first
            if (own is None or own[1] != first[1]) and values[index, place] == values[index, place]:
                values[index, place] = np.nan
                problems.append(
                    f"Line {row.number} has {quote(row.cells[place].strip())} in column {place + 1}, where the unit "
                    f"“{first[1]}” was expected: it counts as blank."
                )
    return found


def _tell_words(run: Run, values: NDArray[np.float64], problems: list[str]) -> None:
    """Tell the words that stand in columns of numbers; columns of nothing but words are no fault."""
    numeric = np.isfinite(values).sum(axis=0) * 2 > len(run.rows)
    for index in np.flatnonzero(np.isnan(values[:, numeric]).any(axis=1)):
        row = run.rows[int(index)]
        for place in row.words_at():
            if numeric[place]:
                problems.append(
                    f"Line {row.number} has {quote(row.cells[place].strip())} in column {place + 1}, "
                    "where a number was expected: it counts as blank."
                )


def _shortened(problems: list[str]) -> tuple[str, ...]:
    if len(problems) <= _MOST_PROBLEMS:
        return tuple(problems)
    return (*problems[:_MOST_PROBLEMS], f"There are {len(problems) - _MOST_PROBLEMS} more such lines.")
