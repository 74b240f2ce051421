"""The charts that the headless command draws. Needs Qt, but no display."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from app.batch.console import Progress
from app.batch.options import ChartKind
from app.cell_curves import with_curves
from app.cells import entry_of, note_in, read_row
from app.figures.charts import waterfall_of
from app.figures.export import PRESETS, Carried, ensure_gui, render
from app.files.file_names import chart_names
from app.files.tables import Table
from app.files.writer import write_file
from app.session.appraisal import appraise
from app.session.outcome import picture_of
from app.session.state import CellEntry, Choices
from app.session_file import session_of_cell
from app.version import version

_PRESET = PRESETS["slide"]


def write_charts(
    folder: Path, table: Table, curves: Path, computed: Sequence[int], choices: Choices, kind: ChartKind
) -> int:
    """Draw the waterfall of every cell that has a ledger, as the window would.

    Parameters
    ----------
    folder : Path
        An existing folder.
    table : Table
        The table of cells.
    curves : Path
        Folder that the names of curve files start from.
    computed : sequence of int
        Its rows that have a ledger.
    choices : Choices
        The conventions.
    kind : {"png", "svg", "pdf"}
        Form of the files NAME.waterfall.KIND.

    Returns
    -------
    int
        Number of charts.

    Raises
    ------
    WriteError, FigureError
        Where a chart could not be saved or drawn.
    """
    ensure_gui()
    progress = Progress("charts", len(computed))
    owners = [_entry(table, index, curves) for index in computed]
    names = chart_names([(entry.name, entry.group) for entry in owners], f".waterfall.{kind}")
    count = 0
    for entry, name in zip(owners, names, strict=True):
        picture = picture_of(appraise(entry, choices), choices)
        if picture is not None:
            carried = Carried(f"Gapledger {version()}", session_of_cell(entry, choices))
            write_file(folder / name, render(waterfall_of(picture), _PRESET, kind=kind, carried=carried))
            count += 1
        progress.at(count)
    return count


def _entry(table: Table, index: int, curves: Path) -> CellEntry:
    cells = dict(zip(table.columns, table.rows[index], strict=True))
    return with_curves(entry_of(read_row(cells, table.decimal_comma), note_in(cells)), cells, curves)[0]
