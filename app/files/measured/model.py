"""A text with tables of numbers in it, as found: no meaning given to any column yet."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Delimiter = Literal["\t", ";", ",", " "]
DecimalMark = Literal[".", ","]

DELIMITERS: tuple[Delimiter, ...] = ("\t", ";", ",", " ")


@dataclass(frozen=True, eq=False)
class Column:
    """One column of a block.

    Attributes
    ----------
    index : int
        Its place, the first being 1.
    name, unit : str
        As written above the numbers; "" where nothing is.
    group : str
        What stands above the name and spans several columns, such as the name of a sample; or "".
    values : ndarray, shape (n,)
        The numbers, NaN where a cell is blank or no number.
    """

    index: int
    name: str
    unit: str
    group: str
    values: NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Block:
    """Consecutive rows of numbers with the text above them.

    Attributes
    ----------
    columns : tuple of Column
    lines : ndarray of int, shape (n,)
        The line of the text each row stands on, the first line being 1.
    header : tuple of str
        The lines of text above, from the end of the block before.
    notes : tuple of str
        Those of them that do not name the columns.
    title : str
        The last short note of plain words, or "".
    facts : mapping of str to str
        What the notes say in the form "key: value", "key = value" or as a pair of cells.
    """

    columns: tuple[Column, ...]
    lines: NDArray[np.int64]
    header: tuple[str, ...]
    notes: tuple[str, ...]
    title: str
    facts: Mapping[str, str]

    @property
    def first_line(self) -> int:
        """The line of the first row."""
        return int(self.lines[0])


@dataclass(frozen=True, eq=False)
class MeasuredText:
    """All blocks of numbers of a text.

    Attributes
    ----------
    source : str
        What to call the text in messages.
    blocks : tuple of Block
        At least one.
    facts : mapping of str to str
        The facts of all blocks and of the text below the last one; of equal keys the first.
    delimiter : str
        Tab, semicolon, comma or blank.
    decimal : {".", ","}
        The decimal mark.
    decimal_doubt : str
        A cell such as "1,234", where all commas of the numbers can be decimal marks or part thousands; or "".
    decimal_line : int
        The line of that cell, or 0.
    encoding : str
    problems : tuple of str
        A sentence for each line or cell that was passed over.
    data : bytes
        What was read.
    """

    source: str
    blocks: tuple[Block, ...]
    facts: Mapping[str, str]
    delimiter: Delimiter
    decimal: DecimalMark
    decimal_doubt: str
    decimal_line: int
    encoding: str
    problems: tuple[str, ...]
    data: bytes = field(repr=False)
