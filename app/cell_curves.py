"""The curve files that a row of a cell table names: read, and turned into figures and curves of its cell."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from app.cell_columns import EQE_FILE, JV_FILE, SERIES_FILE
from app.files.table_error import TableError
from app.files.tables import load_bytes
from app.session.fields import FIELD_BY_KEY
from app.session.state import CellEntry

if TYPE_CHECKING:
    from app.files.measured import Kind

#: In the order in which they are read: a series needs the Jsc of the sweep.
CURVE_COLUMNS = (EQE_FILE, JV_FILE, SERIES_FILE)
_KINDS: Mapping[str, Kind] = {EQE_FILE: "eqe", JV_FILE: "jv", SERIES_FILE: "intensity"}


def names_curves(cells: Mapping[str, str]) -> bool:
    """Whether a row names a curve file."""
    return any(cells.get(column, "").strip() for column in CURVE_COLUMNS)


def with_curves(
    entry: CellEntry, cells: Mapping[str, str], folder: Path
) -> tuple[CellEntry, list[tuple[str, str]], list[tuple[str, str]]]:
    """A cell with the curves of its row's files.

    Parameters
    ----------
    entry : CellEntry
        The cell by the numbers in its row. A number that stands there wins over the same figure of a curve.
    cells : mapping of str to str
        Text of the row by column name.
    folder : Path
        Folder that the names of the files start from: that of the table.

    Returns
    -------
    entry : CellEntry
    faults : list of (column, sentence)
        Files that could not be read.
    doubts : list of (column, sentence)
        What was guessed in them and should be checked.
    """
    named = [column for column in CURVE_COLUMNS if cells.get(column, "").strip()]
    if not named:
        return entry, [], []
    # Only now: the fits are not needed for the first window.
    from app.files.measured import apply, guess, read_measured
    from app.session.curve_import import taken

    faults, doubts = [], []
    for column in named:
        name = cells[column].strip()
        try:
            text = read_measured(load_bytes(folder / name), name)
            reading = guess(text, _KINDS[column])
            command, _ = taken(apply(text, reading), entry, name)
        except TableError as fault:
            faults.append((column, str(fault)))
            continue
        doubts += [(column, question) for question in reading.questions]
        open_ = {key for key in command.values if entry.values[key] in (None, FIELD_BY_KEY[key].default)}
        values = {key: value for key, value in command.values.items() if key in open_}
        sources = {key: source for key, source in command.sources.items() if key in open_}
        entry = entry.with_figures(values, sources)
        if command.curves is not None:
            entry = replace(entry, curves=command.curves)
    return entry, faults, doubts


def merged(now: CellEntry, before: CellEntry, after: CellEntry) -> CellEntry:
    """What a cell becomes when its curves arrive: `after` where it is as it was `before`, else as the user has it now.

    Parameters
    ----------
    now : CellEntry
        The cell as it is.
    before, after : CellEntry
        As it was when its files were asked for, and the same with their curves (`with_curves`).
    """
    fresh = {
        key: value
        for key, value in after.values.items()
        if value != before.values[key] and now.values[key] == before.values[key]
    }
    sources = {key: source for key, source in after.sources.items() if key in fresh}
    filled = now.with_figures(fresh, sources)
    return replace(filled, curves=after.curves) if now.curves is before.curves else filled
