"""Which delimiter and which decimal mark a text uses, told from its rows of numbers."""

from __future__ import annotations

import csv
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from app.files.measured.cells import decimal_evidence, number_and_unit, number_in
from app.files.measured.model import DELIMITERS, DecimalMark, Delimiter
from app.files.quoting import quote
from app.files.table_error import TableError

_STARTS_LIKE_A_ROW = re.compile(r"[\s\"';,]*[+\-−]?[.,]?[0-9]")
_NAMED = re.compile(r"\s*sep=([\t;, ])\s*", re.IGNORECASE)
_SAMPLE = 400
_ENOUGH_EVIDENCE = 200
_MOST_CELLS = 64
_ONE_NUMBER = 0.9  # and empty cells, parted by marks that seldom stand in prose


@dataclass(frozen=True)
class Decimals:
    """The decimal mark, a cell that leaves it in doubt with its line, and whether both marks occur."""

    mark: DecimalMark
    doubt: str = ""
    line: int = 0
    mixed: bool = False


def cells_of(line: str, delimiter: Delimiter) -> list[str]:
    """Part a line into cells, quotation marks heeded, empty cells at its end left out."""
    if '"' in line:
        try:
            plain = line.replace("\t", " ") if delimiter == " " else line
            cells = next(csv.reader([plain], delimiter=delimiter, skipinitialspace=True), [])
        except csv.Error:  # a line break or a null within: no row of numbers
            cells = line.split(delimiter)
    elif delimiter == " ":
        return line.split()
    else:
        cells = line.split(delimiter)
    while cells and not cells[-1].strip():
        cells.pop()
    return cells


def names_delimiter(line: str) -> bool:
    """Say whether a line is of the form "sep=;"."""
    return _NAMED.fullmatch(line) is not None


def find_delimiter(lines: Sequence[str]) -> Delimiter:
    """The delimiter that turns most lines into rows of numbers; a first line "sep=;" names it."""
    named = _NAMED.fullmatch(lines[0])
    if named:
        return next(mark for mark in DELIMITERS if mark == named[1])
    rows = [line for line in lines if _STARTS_LIKE_A_ROW.match(line)] or list(lines)
    sample = rows[:: max(1, len(rows) // _SAMPLE)]
    # Where two do equally well, the earlier in the list: a blank beside a tab is padding.
    return max(DELIMITERS, key=lambda mark: sum(_share_of_numbers(line, mark) for line in sample))


def _share_of_numbers(line: str, delimiter: Delimiter) -> float:
    """Between 0 (no row of numbers) and 1 (two or more numbers, and nothing but numbers)."""
    if delimiter not in line:
        return 0.0
    cells = [cell for cell in cells_of(line, delimiter)[:_MOST_CELLS] if cell.strip()]
    numbers = sum(_is_number(cell, delimiter) for cell in cells)
    if numbers == 1 == len(cells) and delimiter in "\t;" and delimiter in line:
        return _ONE_NUMBER
    return (numbers / len(cells)) ** 2 if numbers >= 2 else 0.0


def _is_number(cell: str, delimiter: Delimiter) -> bool:
    if delimiter in ", " and " " in cell.strip():
        return False  # "0,1 215,3" is no row of 0, 1215 and 3
    value = number_in(cell, ".")
    if value is None:
        return number_and_unit(cell, ".") is not None
    return value == value


def find_decimals(rows: Iterable[tuple[int, Sequence[str]]]) -> Decimals:
    """The decimal mark of rows of numbers (line and cells): a comma where more cells have commas that must be one."""
    found = {",": 0, ".": 0}
    doubt, line = "", 0
    for number, cells in rows:
        for cell in cells:
            evidence = decimal_evidence(cell)
            if evidence == "?":
                if not doubt:
                    doubt, line = cell.strip(), number
            elif evidence:
                found[evidence] += 1
        if max(found.values()) >= _ENOUGH_EVIDENCE:
            break
    if found[","] or found["."]:
        return Decimals("," if found[","] > found["."] else ".", mixed=found[","] > 0 < found["."])
    return Decimals(",", doubt, line) if doubt else Decimals(".")


def check_commas(rows: Sequence[tuple[int, Sequence[str]]], headings: int, source: str) -> None:
    """Refuse rows in which commas are both between the columns and within the numbers.

    Parameters
    ----------
    rows : sequence of (int, sequence of str)
        Line and cells of rows parted at commas.
    headings : int
        How many cells the line above them has.
    source : str

    Raises
    ------
    TableError
        Where all cells are whole numbers and every second looks like the digits behind a decimal mark.
    """
    width = len(rows[0][1])
    if width < 4 or width % 2 or not all(cell.strip().lstrip("+-").isdigit() for _, cells in rows for cell in cells):
        return
    zeros = any(len(cell.strip()) > 1 and cell.strip()[0] == "0" for _, cells in rows for cell in cells[1::2])
    if zeros or 2 * headings == width:
        raise TableError(
            f"Line {rows[0][0]} of {quote(source)} has commas both as decimal marks and between its columns: "
            "decimal points, or semicolons between the columns, were expected."
        )
