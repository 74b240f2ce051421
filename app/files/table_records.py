"""From the lines of a table to its records of cells, through the csv module."""

import csv
import re
from collections.abc import Iterator
from dataclasses import dataclass

from app.files.quoting import quote
from app.files.table_error import TableError

# In this order where a header splits into equally many columns.
_DELIMITERS = ("\t", ";", ",")
_NAMED_DELIMITER = re.compile(r"sep=([\t;,])\s*", re.IGNORECASE)


class Feed:
    """Hands lines to the csv reader, passing over blank and comment lines, but not within a record."""

    def __init__(self, lines: list[str], first: int) -> None:
        self._lines = lines
        self._next = first
        self.between_records = True
        self.start = 0
        self.comments: list[int] = []

    def __iter__(self) -> Iterator[str]:
        return self

    def __next__(self) -> str:
        while self._next < len(self._lines):
            line = self._lines[self._next]
            self._next += 1
            if not self.between_records:
                return line + "\n"
            if line.lstrip(" ").startswith("#"):
                self.comments.append(self._next)
            elif line and not line.isspace():
                self.start = self._next
                self.between_records = False
                return line + "\n"
        raise StopIteration

    def begun(self) -> str:
        """Give the first line of the record being read."""
        return self._lines[self.start - 1]

    def lines(self) -> str:
        """Name the lines of the record being read, with the verb."""
        if self._next == self.start:
            return f"Line {self.start} has"
        return f"Lines {self.start} to {self._next} have"


@dataclass(frozen=True)
class Record:
    """One line of cells, or several where a quoted cell holds line breaks.

    Attributes
    ----------
    line : int
        The line it starts on, the first line of the source being 1.
    lines : str
        Its lines with the verb, such as "Line 3 has".
    cells : list of str
        At least one.
    problem : str
        What is wrong with its quotation marks, or "".
    """

    line: int
    lines: str
    cells: list[str]
    problem: str = ""

    def is_blank(self) -> bool:
        """Say whether all cells are empty."""
        return not self.cells[0].strip() and not any(map(str.strip, self.cells))


def _reader(lines: Iterator[str], delimiter: str, strict: bool = True) -> Iterator[list[str]]:
    return csv.reader(lines, delimiter=delimiter, strict=strict, skipinitialspace=True)


def find_delimiter(lines: list[str]) -> tuple[int, str]:
    """Give the index of the first line to read, and the delimiter.

    A line "sep=;" names it; otherwise it is the one that splits the header into most columns.
    """
    feed = Feed(lines, 0)
    line = next(feed, "")
    named = _NAMED_DELIMITER.fullmatch(line)
    if named:
        return feed.start, named[1]
    counts = {delimiter: len(_first_record(lines, delimiter)) for delimiter in _DELIMITERS}
    most = max(counts.values())
    if most < 2:
        return 0, ","
    return 0, next(delimiter for delimiter in _DELIMITERS if counts[delimiter] == most)


def _first_record(lines: list[str], delimiter: str) -> list[str]:
    try:
        return next(_reader(Feed(lines, 0), delimiter, strict=False), [])
    except csv.Error:
        return []


def read_records(feed: Feed, delimiter: str, source: str) -> Iterator[Record]:
    """Read record after record, going on behind one whose quotation marks are out of place.

    Raises
    ------
    TableError
        Where a quotation mark is never closed, so that everything behind it would be one cell.
    """
    reader = _reader(feed, delimiter)
    while True:
        feed.between_records = True
        try:
            cells = next(reader)
        except StopIteration:
            return
        except csv.Error as fault:
            if "expected after" not in str(fault):
                raise _hopeless(feed.start, str(fault), source) from fault
            cells = next(_reader(iter([feed.begun()[: csv.field_size_limit()]]), delimiter, strict=False))
            problem = f"{feed.lines()} a quotation mark out of place: inside a quoted cell write it twice."
            yield Record(feed.start, feed.lines(), cells, problem)
        else:
            yield Record(feed.start, feed.lines(), cells)


def _hopeless(line: int, fault: str, source: str) -> TableError:
    """Say why nothing after this line can be read."""
    where = f"Line {line} of {quote(source)}"
    if "field larger" in fault:
        limit = csv.field_size_limit()
        return TableError(
            f"{where} has a cell of more than {limit} characters: check that its quotation mark is closed."
        )
    return TableError(f"{where} opens a quotation mark that is never closed: close it or take it out.")
