"""Tables of cells as laboratories and spreadsheets write them: reading here, writing in `table_output`."""

import errno
import os
import re
import stat
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType

from app.files.quoting import quote
from app.files.table_error import TableError
from app.files.table_output import Cell, tab_separated, write_columns, write_rows, write_table
from app.files.table_records import Feed, Record, find_delimiter, read_records
from app.files.table_text import decode

__all__ = [
    "Cell",
    "Table",
    "TableError",
    "load_table",
    "read_table",
    "tab_separated",
    "write_columns",
    "write_rows",
    "write_table",
]

MAX_BYTES = 200_000_000
# Every cell is an object of some 60 bytes: this keeps the largest table at about 1.5 GB of memory.
MAX_CELLS = 15_000_000
MAX_LINES = 10_000_000
MAX_LINE_LENGTH = 5_000_000

_DELIMITER_NAMES = {"\t": "a tab", ";": "a semicolon", ",": "a comma"}
_COMMA_DECIMAL = re.compile(r"\s*[+\-−]?(?:0?,[0-9]+|[0-9]+,(?:[0-9]{1,2}|[0-9]{4,}))(?:[eE][+\-−]?[0-9]+)?\s*")
_DOT_DECIMAL = re.compile(r"\s*[+\-−]?[0-9]*\.[0-9]+(?:[eE][+\-−]?[0-9]+)?\s*")
_ROWS_LOOKED_AT = 1000


@dataclass(frozen=True)
class Table:
    """A table as it was found: cells are text, exactly as written but for spaces in front of them.

    Attributes
    ----------
    columns : tuple of str
        Names from the header, without surrounding spaces; all different, none empty.
    rows : sequence of tuple of str
        The cells, one for each column in every row: missing ones are empty, surplus ones left out, and
        `row_problems` says so.
    line_numbers : sequence of int
        The line of the source each row starts on, the first line being 1.
    row_problems : mapping of int to str
        One sentence for each row (by its index) that does not fit the header; such a row should not be used.
    delimiter : str
        Comma, semicolon or tab.
    decimal_comma : bool
        True where the first thousand rows hold numbers like "1,5" and none like "1.5".
    encoding : str
        The encoding the bytes were read in.
    comment_lines : sequence of int
        The lines passed over because they start with "#".
    """

    columns: tuple[str, ...]
    rows: Sequence[tuple[str, ...]]
    line_numbers: Sequence[int]
    delimiter: str
    decimal_comma: bool
    encoding: str
    row_problems: Mapping[int, str]
    comment_lines: Sequence[int]


def load_table(path: Path) -> Table:
    """Read the table in a file; see `read_table`.

    Raises
    ------
    TableError
        Where the file cannot be opened or is not a usable table.
    """
    return read_table(load_bytes(path), path.name)


def load_bytes(path: Path) -> bytes:
    """The bytes of a file that is to be read as a table.

    Raises
    ------
    TableError
        With a sentence, where the file cannot be opened or is too large.
    """
    source = path.name
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            raise IsADirectoryError(errno.EISDIR, os.strerror(errno.EISDIR))
        if not stat.S_ISREG(status.st_mode):
            raise TableError(f"{quote(source)} is a device or pipe, not a file: choose a table file.")
        _check_size(status.st_size, source)
        return path.read_bytes()
    except TableError:
        raise
    except FileNotFoundError as fault:
        raise TableError(f"{quote(source)} does not exist: check the name and the folder.") from fault
    except IsADirectoryError as fault:
        raise TableError(f"{quote(source)} is a folder: choose a table file in it.") from fault
    except PermissionError as fault:
        raise TableError(f"{quote(source)} may not be read: ask for permission or choose another.") from fault
    except (OSError, ValueError) as fault:
        told = fault.strerror if isinstance(fault, OSError) and fault.strerror else str(fault)
        raise TableError(f"{quote(source)} cannot be read, the system reports “{told}”: choose another.") from fault


def read_table(data: bytes, source: str) -> Table:
    """Read a table of cells: a header line with the names of the columns, then a line for each row.

    The delimiter is the one of comma, semicolon and tab that splits the header into most columns, unless a
    first line "sep=;" names it. Cells with the delimiter, quotation marks or line breaks in them stand in
    quotation marks. Lines that are blank, hold only empty cells or start with "#" are passed over.

    Parameters
    ----------
    data : bytes
        UTF-8 or, with a byte order mark, UTF-16; otherwise Windows Western (cp1252).
    source : str
        What to call the table in a refusal, such as the file's name.

    Raises
    ------
    TableError
        Where the bytes are not text, are too many, or hold no table with a clear header and at least one row.
    """
    _check_size(len(data), source)
    if not data:
        raise TableError(f"{quote(source)} is empty: it should have a header line and a line for each row.")
    text, encoding = decode(data, source)
    lines = _lines(text, source)
    first, delimiter = find_delimiter(lines)
    feed = Feed(lines, first)
    records = read_records(feed, delimiter, source)
    header = next((record for record in records if not record.is_blank()), None)
    if header is None:
        raise TableError(f"{quote(source)} has no header: it should have a line with the names of the columns.")
    if header.problem:
        raise TableError(f"The header of {quote(source)} cannot be used. {header.problem}")
    columns = _names(header.cells, header.line, source)
    rows, line_numbers, problems = _fit(records, len(columns), delimiter, source)
    if not rows:
        raise TableError(f"{quote(source)} has a header but no rows: add a line for each row below line {header.line}.")
    return Table(
        columns=columns,
        rows=tuple(rows),
        line_numbers=tuple(line_numbers),
        delimiter=delimiter,
        decimal_comma=_has_decimal_comma(rows[:_ROWS_LOOKED_AT]),
        encoding=encoding,
        row_problems=MappingProxyType(problems),
        comment_lines=tuple(feed.comments),
    )


def _check_size(size: int, source: str) -> None:
    if size > MAX_BYTES:
        raise TableError(
            f"{quote(source)} has {size / 1e6:.0f} MB and no more than {MAX_BYTES / 1e6:.0f} MB are read: "
            "split it into several files."
        )


def _lines(text: str, source: str) -> list[str]:
    """Part a text at its line ends, refusing what would take memory out of all proportion."""
    text = text.replace("\r\n", "\n").replace("\r", "\n")
    if text.count("\n") > MAX_LINES:
        raise TableError(f"{quote(source)} has more than {MAX_LINES} lines: split it into several files.")
    lines = text.split("\n")
    longest = max(map(len, lines))
    if longest > MAX_LINE_LENGTH:
        number = next(number for number, line in enumerate(lines, 1) if len(line) == longest)
        raise TableError(
            f"Line {number} of {quote(source)} has {longest} characters: check that every row has a line of its own."
        )
    return lines


def _names(cells: list[str], line: int, source: str) -> tuple[str, ...]:
    names = [cell.strip() for cell in cells]
    while not names[-1]:
        names.pop()
    where = f"Line {line} of {quote(source)}"
    for index, name in enumerate(names):
        if not name:
            raise TableError(f"{where} has no name for column {index + 1}: give every column a name.")
        if (earlier := names.index(name)) != index:
            raise TableError(
                f"{where} names both column {earlier + 1} and column {index + 1} {quote(name)}: "
                "give every column a name of its own."
            )
    return tuple(names)


def _fit(
    records: Iterator[Record], width: int, delimiter: str, source: str
) -> tuple[list[tuple[str, ...]], list[int], dict[int, str]]:
    """Bring every row to the header's width, telling what did not fit."""
    rows: list[tuple[str, ...]] = []
    line_numbers: list[int] = []
    problems: dict[int, str] = {}
    most = MAX_CELLS // width
    for record in records:
        if record.is_blank():
            continue
        if len(rows) == most:
            raise TableError(
                f"{quote(source)} has more than {most} rows of {width} columns: split it into several files."
            )
        cells, problem = record.cells, record.problem
        if len(cells) != width:
            problem = problem or _ragged(record, width, delimiter)
            cells = [*cells[:width], *[""] * (width - len(cells))]
        if problem:
            problems[len(rows)] = problem
        rows.append(tuple(cells))
        line_numbers.append(record.line)
    return rows, line_numbers, problems


def _ragged(record: Record, width: int, delimiter: str) -> str:
    """Say how a row misses the header's width; surplus cells that are empty do no harm."""
    count = len(record.cells)
    if count > width and not any(map(str.strip, record.cells[width:])):
        return ""
    found = f"{record.lines} {count} cell{'s' if count > 1 else ''} where the header has {width}"
    if count < width:
        return f"{found}: add the missing cells, empty ones too."
    return f"{found}: put cells with {_DELIMITER_NAMES[delimiter]} in them in quotation marks."


def _has_decimal_comma(rows: Sequence[tuple[str, ...]]) -> bool:
    commas = False
    for row in rows:
        for cell in row:
            if _DOT_DECIMAL.fullmatch(cell):
                return False
            commas = commas or _COMMA_DECIMAL.fullmatch(cell) is not None
    return commas
