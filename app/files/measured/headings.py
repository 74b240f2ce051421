"""What the lines above a table say: names and units of its columns, and facts."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from app.files.measured.cells import number_in
from app.files.measured.dialect import cells_of
from app.files.measured.model import Delimiter
from app.files.measured.scan import Line
from app.files.measured.units import find_unit, is_unit, name_and_unit
from app.files.measured.words import names_something, word_quantity

_COMMENT_MARKS = "#%!/*; \t"
_LINES_LOOKED_AT = 12
_LONGEST_NAME = 80
_LONGEST_KEY = 60
_MOST_FACTS = 200
_WIDE_GAP = re.compile(r"\t| {2,}")


@dataclass(frozen=True)
class Headings:
    """Name, unit and spanning group for each column; "" where there is none; and the lines that say so."""

    names: tuple[str, ...]
    units: tuple[str, ...]
    groups: tuple[str, ...]
    lines: frozenset[int] = frozenset()


def no_headings(width: int) -> Headings:
    """The headings of columns that have none."""
    return Headings(("",) * width, ("",) * width, ("",) * width)


def find_headings(above: Sequence[Line], width: int, delimiter: Delimiter) -> Headings | None:
    """Find the names of the columns among the lines above them; None where no line has any."""
    rows = [_fitted(line.text, width, delimiter) for line in above[-_LINES_LOOKED_AT:]]
    best, chosen = 0.0, -1
    for index, row in enumerate(rows):
        worth = _worth(row, width) + index * 1e-3  # of equals, the nearest to the table
        if row and worth >= 1 and worth > best:
            best, chosen = worth, index
    if chosen < 0:
        return None
    cells = [name_and_unit(cell) for cell in _padded(rows[chosen], width)]
    names, units = [name for name, _ in cells], [unit for _, unit in cells]
    used = {chosen}
    for other in (chosen + 1, chosen - 1):  # a line of units stands below the names, seldom above
        if 0 <= other < len(rows) and _all_units(rows[other]):
            used.add(other)
            units = [_bare(cell) or unit for cell, unit in zip(_padded(rows[other], width), units, strict=True)]
            break
    groups: tuple[str, ...] = ("",) * width
    over = chosen - 1
    if over >= 0 and over not in used and _is_group(above[over - len(rows)].text, rows[over], width, delimiter):
        used.add(over)
        groups = _spread(rows[over], width)
    numbers = [line.number for line in above[-_LINES_LOOKED_AT:]]
    return Headings(tuple(names), tuple(units), groups, frozenset(numbers[index] for index in used))


def _padded(cells: Sequence[str], width: int) -> list[str]:
    return [*cells[:width], *[""] * (width - len(cells))]


def _bare(cell: str) -> str:
    return cell.strip().strip("()[]{}<>").strip() if find_unit(cell) is None else cell.strip()


def _all_units(cells: Sequence[str]) -> bool:
    written = [_bare(cell) for cell in cells if cell.strip()]
    known = any(find_unit(cell) is not None for cell in written)
    return len(cells) > 1 and known and all(map(is_unit, written))


def _worth(cells: Sequence[str], width: int) -> float:
    """How likely these are the names: two for each cell with a known quantity or unit, one for the right number."""
    filled = [cell for cell in cells if cell.strip()]
    if not filled or any(len(cell) > _LONGEST_NAME for cell in filled):
        return 0.0
    numbers = sum(number_in(cell, ".") is not None for cell in filled)
    if numbers >= len(filled) - (numbers < 2) or (width == 2 and numbers):
        return 0.0  # a fact such as "Area; 0.09", or numbers
    known = sum(bool(word_quantity(cell)) or bool(name_and_unit(cell)[1]) for cell in filled)
    if _all_units(cells):
        known *= 0.5  # type: ignore[assignment]
    exact = len(cells) == width
    if not exact and (not known or len(filled) < 2):
        return 0.0
    return 2.0 * min(known, width) + exact


def _fitted(text: str, width: int, delimiter: Delimiter) -> list[str]:
    """Part a line of names into cells, marks of comments and blanks within names allowed for."""
    bare = text.strip().lstrip(_COMMENT_MARKS) if text.lstrip()[:1] in _COMMENT_MARKS and text.strip() else text
    if text[:1] == "\t" and delimiter == "\t":
        bare = text  # an empty first cell, not a margin
    if facts_in(bare, delimiter) and not _is_wide(bare, width, delimiter):
        return []
    if delimiter != " ":
        cells = [cell.strip() for cell in cells_of(bare, delimiter)]
        return cells if len(cells) > 1 else _otherwise(bare, width) or cells
    parted = [cells_of(bare, " "), [cell.strip() for cell in _WIDE_GAP.split(bare) if cell.strip()], _by_units(bare)]
    for mark in (",", ";", "\t"):
        parted.append([cell.strip() for cell in bare.split(mark)])
    return next((cells for cells in parted if len(cells) == width), parted[0])


def _otherwise(text: str, width: int) -> list[str]:
    """Part a line that does not have the delimiter of the rows, where that gives names that are known."""
    parted = [[cell.strip() for cell in text.split(mark)] for mark in ("\t", ";", ",")]
    parted += [[cell.strip() for cell in _WIDE_GAP.split(text) if cell.strip()], _by_units(text)]
    fitting = [cells for cells in parted if len(cells) == width and all(map(word_quantity, cells))]
    return fitting[0] if fitting else []


def _is_wide(text: str, width: int, delimiter: Delimiter) -> bool:
    return width > 1 and delimiter != " " and len(cells_of(text, delimiter)) == width and ":" not in text


def _by_units(text: str) -> list[str]:
    """Part "V (V) J / mA" at blanks, but not in front of a bracket or on either side of a slash."""
    cells: list[str] = []
    open_slash = False
    depth = 0
    for word in text.split():
        if cells and (word[0] in "([{/" or open_slash or depth > 0):
            cells[-1] += f" {word}"
        else:
            cells.append(word)
        depth = max(0, depth + sum(word.count(mark) for mark in "([{") - sum(word.count(mark) for mark in ")]}"))
        open_slash = word.endswith("/")
    return cells


def _is_group(text: str, cells: Sequence[str], width: int, delimiter: Delimiter) -> bool:
    """Say whether a line above the names has their delimiters, and so names groups of columns."""
    filled = [cell for cell in cells if cell.strip()]
    as_wide = delimiter != " " and abs(text.count(delimiter) + 1 - width) <= 1 and width > 2
    return bool(filled) and as_wide and all(number_in(cell, ".") is None for cell in filled)


def _spread(cells: Sequence[str], width: int) -> tuple[str, ...]:
    """Carry the words of a spanning line over the empty cells to their right."""
    spread: list[str] = []
    for cell in _padded(cells, width):
        spread.append(cell.strip() or (spread[-1] if spread else ""))
    return tuple(spread)


def notes_of(above: Sequence[Line], headings: Headings) -> list[str]:
    """The lines above a table that neither name its columns nor hold rows of numbers."""
    return [line.text.strip() for line in above if line.number not in headings.lines and len(line.values) < 2]


def title_of(notes: Sequence[str], delimiter: Delimiter) -> str:
    """The last short line of plain words, such as "Forward scan"; or ""."""
    for note in reversed(notes[-_LINES_LOOKED_AT:]):
        bare = note.strip('#%!/*;,=-_ \t"')
        is_plain = bare and len(bare) <= _LONGEST_KEY and not set(bare) & set("\t;")
        if is_plain and number_in(bare, ".") is None and not facts_in(note, delimiter):
            return bare
    return ""


def facts_of(lines: Sequence[str], delimiter: Delimiter) -> dict[str, str]:
    """The facts that lines of words state; of equal keys the first."""
    facts: dict[str, str] = {}
    for line in lines:
        for key, value in facts_in(line, delimiter):
            if len(facts) < _MOST_FACTS:
                facts.setdefault(key, value)
    return facts


def facts_in(line: str, delimiter: Delimiter) -> list[tuple[str, str]]:
    """Keys and values of one line: "key: value", "key = value", several such cells, or words in front of a number."""
    bare = line.strip().lstrip(_COMMENT_MARKS).replace('"', "").strip()
    if delimiter != " ":
        cells = [cell.strip() for cell in bare.split(delimiter) if cell.strip()]
    else:
        cells = [cell.strip() for cell in _WIDE_GAP.split(bare) if cell.strip()]
    if len(cells) > 1:
        each = [_key_and_value(cell) for cell in cells]
        if all(each):
            return [fact for fact in each if fact]
    whole = _key_and_value(" ".join(cells))
    if whole:
        return [whole]
    if 2 <= len(cells) <= 3 and number_in(cells[0], ".") is None and any(letter.isdigit() for letter in cells[1]):
        third_is_unit = len(cells) == 2 or number_in(cells[2], ".") is None
        if cells[1][0] in "0123456789+-.,−" and third_is_unit and len(cells[0]) <= _LONGEST_KEY:
            return [(cells[0], " ".join(cells[1:]))]
    if len(cells) == 2 and names_something(cells[0]) and not (word_quantity(cells[1]) or names_something(cells[1])):
        return [(cells[0], cells[1])]
    return []


def _key_and_value(text: str) -> tuple[str, str] | None:
    at = min((place for place in (text.find(":"), text.find("=")) if place > 0), default=-1)
    key, value = text[:at].strip(), text[at + 1 :].strip()
    if at < 1 or not value or len(key) > _LONGEST_KEY or number_in(key, ".") is not None:
        return None
    return key, value
