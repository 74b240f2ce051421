r"""Writing tables: comma-separated files and tab-separated text for the clipboard.

Files are UTF-8 without byte order mark, quoted as in RFC 4180, but with the line end "\n": the tools that
read them line by line would otherwise find a carriage return in the last column. Numbers are written as the
shortest text that reads back without loss. Text that a spreadsheet would run as a formula gets an
apostrophe in front.
"""

import math
import re
import unicodedata
from collections.abc import Callable, Iterable, Iterator, Sequence
from functools import lru_cache
from itertools import islice
from numbers import Integral, Real
from pathlib import Path
from types import NoneType

from app.files.quoting import quote
from app.files.table_error import TableError
from app.files.writer import encode, write_blocks

Cell = str | float | int | None

# Half-width and full-width: spreadsheets fold one into the other.
_FORMULA_STARTS = frozenset("=+-@＝＋－＠")
_LINE_START_CONTROLS = ("\t", "\r", "\n")
_PLAIN_NUMBER = re.compile(r"[+\-]?(?:[0-9]+(?:[.,][0-9]*)?|[.,][0-9]+)(?:[eE][+\-]?[0-9]+)?")
_BREAKS = re.compile("[\t\n\r\v\f\x1c-\x1e\x85\u2028\u2029]+")
_NEEDS_QUOTES = re.compile(r'[",\n]|^[#\s]|\s$')
_ROWS_AT_A_TIME = 20_000


def write_table(columns: Sequence[str], rows: Iterable[Sequence[Cell]]) -> str:
    """Write a table as comma-separated text.

    Parameters
    ----------
    columns : sequence of str
        The header.
    rows : iterable of sequence of (str, float, int or None)
        One cell for each column; None is an empty cell. Numbers stay numbers; text that would be a formula
        in a spreadsheet is made harmless, unless it is nothing but a number. Line breaks in a cell become
        "\\n".

    Raises
    ------
    TableError
        Where a row has too many or too few cells, or a number is not finite.
    """
    return "".join(_csv_blocks(columns, _by_column(rows, columns)))


def write_rows(path: Path, columns: Sequence[str], chunks: Iterable[Iterable[Sequence[Cell]]]) -> int:
    """Save a table of any length as a comma-separated file, some thousand rows in memory at a time.

    The file appears whole and checked, or not at all: see `app.files.writer`.

    Parameters
    ----------
    path : Path
        The file.
    columns : sequence of str
        The header.
    chunks : iterable of iterables of rows
        The rows in portions, each as for `write_table`.

    Returns
    -------
    int
        The number of bytes saved.

    Raises
    ------
    TableError
        As for `write_table`.
    WriteError
        Where the file could not be saved.
    """
    rows = (row for chunk in chunks for row in chunk)
    return _save(path, columns, _by_column(rows, columns))


def write_columns(path: Path, columns: Sequence[str], chunks: Iterable[Sequence[Sequence[Cell]]]) -> int:
    """Save a table as `write_rows` does, from portions given column by column, which is faster.

    Parameters
    ----------
    path : Path
        The file.
    columns : sequence of str
        The header.
    chunks : iterable of sequences of columns
        Each portion holds one sequence of cells for each column, all of one length (`ndarray.tolist()`
        gives one).

    Returns
    -------
    int
        The number of bytes saved.

    Raises
    ------
    TableError
        Where a portion has columns too many, too few or of different lengths, or a number is not finite.
    WriteError
        Where the file could not be saved.
    """
    return _save(path, columns, chunks)


def tab_separated(columns: Sequence[str], rows: Iterable[Sequence[Cell]]) -> str:
    """Write a table as tab-separated text for the clipboard, a line for each row, every line ended.

    Tabs and line breaks inside a cell become one space, because pasting would part the cell there; a
    quotation mark at the start of a text gets an apostrophe in front, because pasting would swallow what
    follows it. Otherwise as `write_table`.

    Raises
    ------
    TableError
        As for `write_table`.
    """
    lines = ["\t".join(map(_pasted, _named(columns))) + "\n"]
    start = 1
    for chunk in _by_column(rows, columns):
        rendered = [_render(cells, _pasted, name, start) for name, cells in zip(columns, chunk, strict=True)]
        lines.extend("\t".join(row) + "\n" for row in zip(*rendered, strict=True))
        start += len(chunk[0])
    return "".join(lines)


def neutral(text: str) -> str:
    """Put an apostrophe in front of a text that a spreadsheet would run as a formula; leave any other alone.

    Such a text starts with = + - @ (also full-width), be it behind spaces or invisible characters, or with
    a tab or line break. A text that is a number and nothing else is none.
    """
    if not text or _PLAIN_NUMBER.fullmatch(text):
        return text
    if text[0] in _LINE_START_CONTROLS or _first_visible(text) in _FORMULA_STARTS:
        return f"'{text}"
    return text


def _first_visible(text: str) -> str:
    return next((letter for letter in text if unicodedata.category(letter)[0] not in "ZC"), "")


@lru_cache(maxsize=2048)
def _quoted(text: str) -> str:
    """Make a text a harmless cell of a comma-separated file.

    Quotation marks also go around outer spaces and a leading "#", which reading would otherwise pass over.
    """
    safe = neutral(text)
    if "\r" in safe:
        safe = safe.replace("\r\n", "\n").replace("\r", "\n")
    if _NEEDS_QUOTES.search(safe):
        return '"' + safe.replace('"', '""') + '"'
    return safe


@lru_cache(maxsize=2048)
def _pasted(text: str) -> str:
    """Make a text a harmless cell of tab-separated text."""
    safe = _BREAKS.sub(" ", neutral(text))
    return f"'{safe}" if safe.startswith('"') else safe


def _render(cells: Sequence[Cell], as_text: Callable[[str], str], column: str, start: int) -> Sequence[str]:
    """Make texts of one column's cells, whole columns of one type at once."""
    kinds = set(map(type, cells))
    if kinds == {str}:
        return list(map(as_text, cells))  # type: ignore[arg-type]
    if kinds == {float} and all(map(math.isfinite, cells)):  # type: ignore[arg-type]
        return list(map(repr, cells))
    if kinds == {NoneType}:
        return [""] * len(cells)
    return [_render_one(cell, as_text, column, start + index) for index, cell in enumerate(cells)]


def _render_one(cell: object, as_text: Callable[[str], str], column: str, row: int) -> str:
    if cell is None:
        return ""
    if isinstance(cell, str):
        return as_text(cell)
    if isinstance(cell, bool) or not isinstance(cell, Real):
        raise TypeError(f"A table cell is text, a number or None, not {type(cell).__name__}.")
    if isinstance(cell, Integral):
        return str(int(cell))
    number = float(cell)
    if not math.isfinite(number):
        raise TableError(f"Row {row} of column {quote(column)} is {number}, not a finite number: leave the cell empty.")
    return repr(number)


def _named(columns: Sequence[str]) -> Sequence[str]:
    if not columns:
        raise TableError("There are no columns to write: give at least one.")
    return columns


def _by_column(rows: Iterable[Sequence[Cell]], columns: Sequence[str]) -> Iterator[Sequence[Sequence[Cell]]]:
    """Turn rows into portions of columns, checking that every row has its cells."""
    start = 1
    remaining = iter(rows)
    while portion := list(islice(remaining, _ROWS_AT_A_TIME)):
        if set(map(len, portion)) != {len(columns)}:
            number, row = next((start + index, row) for index, row in enumerate(portion) if len(row) != len(columns))
            raise TableError(f"Row {number} has {len(row)} cells, but there are {len(columns)} columns.")
        yield list(zip(*portion, strict=True))
        start += len(portion)


def _csv_blocks(columns: Sequence[str], chunks: Iterable[Sequence[Sequence[Cell]]]) -> Iterator[str]:
    yield ",".join(map(_quoted, _named(columns))) + "\n"
    start = 1
    for chunk in chunks:
        lengths = set(map(len, chunk))
        if len(chunk) != len(columns) or len(lengths) != 1:
            raise TableError(
                f"The rows from {start} on do not fill the {len(columns)} columns with cells of equal number."
            )
        rendered = [_render(cells, _quoted, name, start) for name, cells in zip(columns, chunk, strict=True)]
        block = "\n".join(map(",".join, zip(*rendered, strict=True)))
        if block:
            yield block + "\n"
        start += lengths.pop()


def _save(path: Path, columns: Sequence[str], chunks: Iterable[Sequence[Sequence[Cell]]]) -> int:
    return write_blocks(path, (encode(path, block) for block in _csv_blocks(columns, chunks)))
