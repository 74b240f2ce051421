"""From lines to rows of numbers and lines of words."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from enum import Enum

from app.files.measured.cells import number_and_unit, number_in
from app.files.measured.dialect import cells_of
from app.files.measured.model import DecimalMark, Delimiter

_COMMENTS = ("#", "%", "//", "!")
_LONGEST_QUOTED = 4  # lines of one quoted cell; a mark that stays open longer is a stray one


class LineKind(Enum):
    """What a line is."""

    BLANK = 0
    WORDS = 1
    COMMENT = 2
    ROW = 3  # of numbers, two or more
    REST = 4  # goes on with a table, but cannot begin one: one number, or words behind a number


@dataclass(slots=True)
class Line:
    """One line, or several that a quoted cell spans, with its cells and their values (NaN where there is none)."""

    number: int
    kind: LineKind
    text: str
    cells: list[str]
    values: list[float] = field(default_factory=list)

    def words_at(self) -> list[int]:
        """Places of cells that hold words."""
        return [
            index for index, (cell, value) in enumerate(zip(self.cells, self.values, strict=True))
            if math.isnan(value) and number_in(cell, ".") is None
        ]  # fmt: skip


def joined_lines(lines: Sequence[str], delimiter: Delimiter) -> Iterator[tuple[int, str]]:
    """Number the lines, joining those that a quoted cell with line breaks spans."""
    index = 0
    while index < len(lines):
        text, count = lines[index], 1
        if '"' in text:
            while count < _LONGEST_QUOTED and index + count < len(lines) and _is_open(text, delimiter):
                text += " " + lines[index + count]
                count += 1
            if _is_open(text, delimiter):
                text, count = lines[index].replace('"', " "), 1
        yield index + 1, text
        index += count


def _is_open(text: str, delimiter: Delimiter) -> bool:
    if text.count('"') % 2 == 0:
        return False
    return any(cell.lstrip().startswith('"') and cell.count('"') % 2 for cell in text.split(delimiter))


def scan(lines: Sequence[str], delimiter: Delimiter, decimal: DecimalMark) -> Iterator[Line]:
    """Say of each line what it is, and read its numbers."""
    for number, text in joined_lines(lines, delimiter):
        plain = _plain(text, delimiter, decimal)
        quick = None if plain is None else _quickly(number, text, plain, delimiter)
        yield _slowly(number, text, delimiter, decimal) if quick is None else quick


def _plain(text: str, delimiter: Delimiter, decimal: DecimalMark) -> str | None:
    """The line with decimal points, where float() reads its cells as `number_in` would; else None."""
    if not text.isascii() or '"' in text or "_" in text:
        return None
    if decimal == ",":
        return None if delimiter == "," or "." in text else text.rstrip("; \t").replace(",", ".")
    if delimiter == ",":
        return text.rstrip(", \t")
    return None if "," in text else text.rstrip("; \t")


def _quickly(number: int, text: str, plain: str, delimiter: Delimiter) -> Line | None:
    cells = plain.split() if delimiter == " " else plain.split(delimiter)
    if len(cells) < 2:
        return None
    try:
        values = [float(cell) for cell in cells]
    except ValueError:
        return None
    if not all(map(math.isfinite, values)):
        return None
    return Line(number, LineKind.ROW, text, cells, values)


def _slowly(number: int, text: str, delimiter: Delimiter, decimal: DecimalMark) -> Line:
    stripped = text.lstrip()
    if not stripped:
        return Line(number, LineKind.BLANK, text, [])
    if stripped.startswith(_COMMENTS):
        return Line(number, LineKind.COMMENT, text, [])
    note = text.find("# ")
    cells = cells_of(text[:note] if note > 0 else text, delimiter)
    if not any(cell.strip() for cell in cells):
        return Line(number, LineKind.BLANK, text, [])
    values: list[float] = []
    numbers = words = 0
    for cell in cells:
        value = number_in(cell, decimal)
        if value is None:
            with_unit = number_and_unit(cell, decimal)
            value = math.nan if with_unit is None else with_unit[0]
            words += with_unit is None
        numbers += not math.isnan(value)
        values.append(value)
    kind = _kind(numbers, words, not math.isnan(values[0]))
    return Line(number, kind, text, cells, values if kind in (LineKind.ROW, LineKind.REST) else [])


def _kind(numbers: int, words: int, number_first: bool) -> LineKind:
    if numbers >= 2 and numbers >= words:
        return LineKind.ROW
    if numbers and (number_first or not words):
        return LineKind.REST
    return LineKind.WORDS
