"""The command `gapledger batch`: from a table of cells to ledgers, summaries, problems and charts."""

from __future__ import annotations

import errno
import os
import sys
from collections.abc import Iterator, Sequence
from pathlib import Path

from app.batch.console import Progress, say
from app.batch.options import HELP_FLAGS, Options, UsageError, help_text, read_options
from app.batch.portions import Portion, portions_of
from app.batch.tables_out import FILES, PROBLEMS_FILE, Tally, renamed, write_tables
from app.cell_columns import check_header
from app.figures.errors import FigureError
from app.files.quoting import quote, quote_end
from app.files.table_error import TableError
from app.files.tables import Table, load_table
from app.files.write_error import WriteError, not_written, refused_by_system
from app.session.state import Choices

COMPUTED, SOME_REFUSED, NOTHING, STOPPED = 0, 1, 2, 130


def run(argv: Sequence[str]) -> int:
    """Run the headless command.

    Parameters
    ----------
    argv : sequence of str
        Arguments behind `gapledger batch`.

    Returns
    -------
    int
        0 when every row was computed, 1 when some were refused, 2 with one sentence on the error stream when the
        arguments, the table or the folder could not be used, 130 when it was interrupted.
    """
    if any(flag in argv for flag in HELP_FLAGS):
        say(help_text().rstrip("\n"), sys.stdout)
        return COMPUTED
    try:
        return _run(read_options(argv))
    except (UsageError, TableError, WriteError, FigureError) as fault:
        say(f"gapledger batch: {fault}", sys.stderr)
    except MemoryError:
        say("gapledger batch: There is not enough memory for this table: split it into several files.", sys.stderr)
    except KeyboardInterrupt:
        say("gapledger batch: Interrupted; files not finished by then were not written.", sys.stderr)
        return STOPPED
    return NOTHING


def _run(options: Options) -> int:
    # "." has no name to put into a sentence.
    cells = options.cells if options.cells.name else options.cells.resolve()
    table = load_table(cells)
    extras = check_header(table.columns, cells.name)
    _prepare(options)
    tally = write_tables(options.into, table, extras, _watched(table, options))
    charts = 0
    if options.charts is not None:
        # Here and not above: without charts the command starts without Qt.
        from app.batch.charts_out import write_charts

        charts = write_charts(
            options.into,
            table,
            cells.resolve().parent,
            tally.computed,
            Choices(attribution=options.attribution),
            options.charts,
        )
    for old, new in renamed(extras).items():
        if new != old:
            say(f"The column {quote(old)} stands in summary.csv as {quote(new)}: {old} is a result there.", sys.stdout)
    say(_closing(tally, charts, options.into), sys.stdout)
    return SOME_REFUSED if tally.refused else COMPUTED


def _prepare(options: Options) -> None:
    """Make the folder, and see to it that no result would replace the table it comes from."""
    folder = options.into
    first = folder / FILES[0]
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name in FILES:
            target = folder / name
            if target.exists() and target.samefile(options.cells):
                raise not_written(target, "the table of cells itself has that name there", "choose another folder")
    except WriteError:
        raise
    except FileExistsError as fault:
        raise refused_by_system(first, NotADirectoryError(errno.ENOTDIR, os.strerror(errno.ENOTDIR))) from fault
    except OSError as fault:
        raise refused_by_system(first, fault) from fault
    except ValueError as fault:
        raise not_written(first, "its folder holds a character no name can have", "choose another") from fault


def _watched(table: Table, options: Options) -> Iterator[Portion]:
    progress = Progress("rows", len(table.rows))
    done = 0
    for portion in portions_of(table, options.attribution, options.cells.resolve().parent):
        yield portion
        done += len(portion.rows)
        progress.at(done)


def _closing(tally: Tally, charts: int, folder: Path) -> str:
    parts = [f"{_count(len(tally.computed), 'cell')} computed", f"{tally.refused} refused"]
    parts.append(_count(tally.doubtful, "doubtful figure"))
    if charts:
        parts.append(_count(charts, "chart"))
    where = folder / PROBLEMS_FILE if tally.problems else folder
    return f"{', '.join(parts)}; see {quote_end(str(where))}"


def _count(number: int, what: str) -> str:
    return f"{number} {what}{'' if number == 1 else 's'}"
