"""From the rows of a cell table to the cells of a session."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from app.files.numbers import NumberError
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


def entry_of(row: ReadRow, note: str = "") -> CellEntry:
    """A shelf entry of a row; its identity is given when it is put on the shelf."""
    return CellEntry(0, row.name, row.group, row.spectrum, row.values, note)
