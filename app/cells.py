"""From the rows of a cell table to the cells of a session."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

from app.cell_columns import check_header, not_available
from app.files.numbers import NumberError
from app.files.table_output import write_table
from app.files.tables import Table
from app.session.fields import FIELDS
from app.session.state import CellEntry, Unread, Value


@dataclass(frozen=True)
class ReadRow:
    """One row of a cell table, read but not yet appraised."""

    name: str
    group: str
    spectrum: str
    values: Mapping[str, Value]


def read_row(cells: Mapping[str, str], decimal_comma: bool = False) -> ReadRow:
    """Read one row.

    Parameters
    ----------
    cells : mapping of str to str
        Text by column name; missing columns count as empty.
    decimal_comma : bool
        Whether the table is known to write decimals with a comma.

    Returns
    -------
    ReadRow
        An empty text takes the field's default; one that is no number becomes `Unread`, with its sentence.
    """
    values: dict[str, Value] = {}
    for field in FIELDS:
        text = cells.get(field.column, "").strip()
        if not text:
            values[field.key] = field.default
            continue
        try:
            values[field.key] = field.read(text, decimal_comma)
        except NumberError as fault:
            values[field.key] = Unread(text, str(fault))
    return ReadRow(
        name=cells.get("name", "").strip(),
        group=cells.get("group", "").strip(),
        spectrum=cells.get("spectrum", "").strip() or "am15g",
        values=MappingProxyType(values),
    )


def note_in(cells: Mapping[str, str]) -> str:
    """The free text of a row."""
    return (cells.get("note") or cells.get("story") or "").strip()


def entry_of(row: ReadRow, note: str = "") -> CellEntry:
    """A shelf entry of a row; its identity is given when it is put on the shelf."""
    return CellEntry(0, row.name, row.group, row.spectrum, row.values, note)


@dataclass(frozen=True)
class Shelf:
    """The cells of a table, their curve files not yet read.

    Parameters
    ----------
    entries : tuple of CellEntry
        One for each row with a name. Numbers that could not be read stay as typed, to be mended in the window.
    rows : tuple of mapping
        Text of each cell's row by column name.
    lines : tuple of int
        Line of each in the file.
    left_out : tuple of str
        One sentence for each row, or part of a row, that could not be taken.
    """

    entries: tuple[CellEntry, ...]
    rows: tuple[Mapping[str, str], ...]
    lines: tuple[int, ...]
    left_out: tuple[str, ...]


def shelf_of(table: Table, source: str) -> Shelf:
    """Shelf entries of a table of cells.

    Parameters
    ----------
    table : Table
        As read from a file. A column "note" (or "story") becomes the note.
    source : str
        What to call the table.

    Raises
    ------
    TableError
        When a column is missing or looks like a known quantity in another spelling or unit.
    """
    check_header(table.columns, source)
    entries, rows, lines, left_out = [], [], [], []
    for index, (row, line) in enumerate(zip(table.rows, table.line_numbers, strict=True)):
        fault = table.row_problems.get(index, "")
        cells = dict(zip(table.columns, row, strict=True))
        read = read_row(cells, table.decimal_comma)
        if not fault and not read.name:
            fault = "the name is missing."
        if fault:
            left_out.append(f"Line {line}: {fault}")
            continue
        entries.append(entry_of(read, note_in(cells)))
        rows.append(cells)
        lines.append(line)
        left_out += [f"Line {line}: {sentence}" for _, sentence in not_available(cells)]
    return Shelf(tuple(entries), tuple(rows), tuple(lines), tuple(left_out))


def cell_table(cells: Sequence[CellEntry]) -> str:
    """The cells of a shelf as a table that `shelf_of` and the headless command read back."""
    columns = ("name", "group", *(field.column for field in FIELDS), "spectrum", "note")
    rows = [
        (cell.name, cell.group, *(_written(cell.values[field.key]) for field in FIELDS), cell.spectrum, cell.note)
        for cell in cells
    ]
    return write_table(columns, rows)


def _written(value: Value) -> str | float | None:
    return value.text if isinstance(value, Unread) else value
