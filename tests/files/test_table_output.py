"""Writing tables: numbers stay numbers, texts stay texts, and no text becomes a formula."""

import csv
import io
import math
from collections.abc import Iterator, Sequence
from pathlib import Path

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from app.files.numbers import read_number
from app.files.table_output import Cell, neutral
from app.files.tables import (
    TableError,
    load_table,
    read_table,
    tab_separated,
    write_columns,
    write_rows,
    write_table,
)
from app.files.writer import WriteError

DANGEROUS = [
    "=1+1",
    "+1+1",
    "-1+1",
    "@SUM(A1)",
    "=cmd|' /C calc'!A0",
    '=HYPERLINK("http://example.org","x")',
    "-A1",
    "+A1",
    "-",
    "=",
    "--1",
    "+49 30 1234",
    "-1e5x",
    " =1+1",
    "\u00a0=1+1",
    "\u200b=1+1",
    "\ufeff=1+1",
    "\u3000=1+1",
    "  \t=1+1",
    "\t=1+1",
    "\r=1+1",
    "\n=1+1",
    "\tplain",
    "\rplain",
    "\nplain",
    "＝1+1",
    "＋1+1",
    "－1+1",
    "＠SUM(A1)",
    " ＝1+1",
]
HARMLESS = ["", "a", "a=b", "a-b", "'=1", "1+1", "a@b.c", "−5", "(=1)", "#1", "Ω", " a ", "5-"]
NUMBERS = ["-1.5", "+1.5", "-1,5", "-.5", "-1e-5", "-5.", "+0"]


@pytest.mark.parametrize("text", DANGEROUS)
def test_a_text_that_would_be_a_formula_gets_an_apostrophe(text: str) -> None:
    assert neutral(text) == f"'{text}"
    written = next(csv.reader(io.StringIO(write_table(["a"], [[text]]).split("\n", 1)[1], newline="")))
    assert written == [f"'{text}".replace("\r", "\n")]
    assert tab_separated(["a"], [[text]]).split("\n")[1].startswith("'")


@pytest.mark.parametrize("text", HARMLESS + NUMBERS)
def test_a_harmless_text_is_left_alone(text: str) -> None:
    assert neutral(text) == text


@pytest.mark.parametrize("text", DANGEROUS)
def test_a_header_is_made_harmless_too(text: str) -> None:
    assert next(csv.reader(io.StringIO(write_table([text, "b"], []), newline="")))[0].startswith("'")


CELLS: list[tuple[Cell, str]] = [
    (-1.5, "-1.5"),
    (-1e-7, "-1e-07"),
    (0.1, "0.1"),
    (-3, "-3"),
    (10**20, "100000000000000000000"),
    (None, ""),
    ("", ""),
    ("a", "a"),
    ("a,b", '"a,b"'),
    ('a"b', '"a""b"'),
    ("a\nb", '"a\nb"'),
    ("a\r\nb\rc", '"a\nb\nc"'),
    (" a", '" a"'),
    ("a ", '"a "'),
    ("#1", '"#1"'),
    ("a;b", "a;b"),
    ("=1,2", '"\'=1,2"'),
    ("µ", "µ"),
    (np.float64(-0.25), "-0.25"),
    (np.float32(0.5), "0.5"),
    (np.int64(-7), "-7"),
    (np.str_("=a"), "'=a"),
]


@pytest.mark.parametrize(("cell", "expected"), CELLS)
def test_a_cell_is_written_by_its_type(cell: Cell, expected: str) -> None:
    assert write_table(["a", "b"], [[cell, 1.0]]) == f"a,b\n{expected},1.0\n"
    mixed = [[cell, 1.0], ["x", 1.0], [None, 1.0], [2.5, 1.0]]
    assert write_table(["a", "b"], mixed) == f"a,b\n{expected},1.0\nx,1.0\n,1.0\n2.5,1.0\n"


def test_an_empty_table_is_its_header() -> None:
    assert write_table(["a", "b"], []) == "a,b\n"
    assert tab_separated(["a", "b"], []) == "a\tb\n"


BAD = [
    ([], [], "There are no columns to write: give at least one."),
    (["a", "b"], [[1, 2], [1]], "Row 2 has 1 cells, but there are 2 columns."),
    (["a", "b"], [[1, 2], [1, 2, 3]], "Row 2 has 3 cells, but there are 2 columns."),
    (["a"], [[1.0], [math.nan]], "Row 2 of column “a” is nan, not a finite number: leave the cell empty."),
    (["a"], [[-math.inf], ["x"]], "Row 1 of column “a” is -inf, not a finite number: leave the cell empty."),
]


@pytest.mark.parametrize(("columns", "rows", "message"), BAD)
def test_a_table_that_cannot_be_is_refused(
    columns: list[str], rows: list[list[Cell]], message: str, tmp_path: Path
) -> None:
    for write in (write_table, tab_separated, lambda c, r: write_rows(tmp_path / "t.csv", c, [r])):
        with pytest.raises(TableError) as caught:
            write(columns, rows)
        assert str(caught.value) == message
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("cell", [True, 1j, b"x", ["a"]])
def test_a_cell_of_another_kind_is_a_mistake_of_the_program(cell: object) -> None:
    with pytest.raises(TypeError, match=f"text, a number or None, not {type(cell).__name__}"):
        write_table(["a"], [[cell]])  # type: ignore[list-item]


def test_pasting_takes_cells_apart_only_where_they_end() -> None:
    rows: list[Sequence[Cell]] = [
        ("a\tb", -1.5, None),
        ("c\r\nd", -2, '"quoted'),
        ("e\u2028f", 1e-9, "=x\ty"),
    ]
    assert tab_separated(["na\nme", "loss", "note"], rows) == (
        "na me\tloss\tnote\na b\t-1.5\t\nc d\t-2\t'\"quoted\ne f\t1e-09\t'=x y\n"
    )


texts = st.text(
    st.characters(codec="utf-8", exclude_characters="".join(map(chr, [*range(9), 11, *range(14, 32), 127])))
)
cells = st.one_of(st.none(), texts, st.floats(allow_nan=False, allow_infinity=False), st.integers())


@given(st.lists(st.tuples(cells, cells), min_size=1, max_size=8))
@example([(None, "\r")])
@example([(" ", "\u3000")])
def test_what_is_written_is_read_back(rows: list[tuple[Cell, Cell]]) -> None:
    rows = [("first", 1.0), *rows]
    table = read_table(write_table(["a", "b"], rows).encode(), "t.csv")
    # A lone tab or line break gets its apostrophe, so that such a row is not blank.
    expected = [row for row in rows if any(neutral(str(cell)).strip() for cell in row if cell is not None)]
    assert len(table.rows) == len(expected)
    assert table.row_problems == {}
    for found, wanted in zip(table.rows, expected, strict=True):
        for text, cell in zip(found, wanted, strict=True):
            if isinstance(cell, float):
                assert read_number(text) == cell
            elif isinstance(cell, int):
                assert int(text) == cell
            else:
                assert text == neutral(cell or "").replace("\r\n", "\n").replace("\r", "\n")


@given(st.lists(st.tuples(cells, cells), max_size=8))
def test_pasted_text_has_a_line_for_each_row_and_a_tab_for_each_column(rows: list[tuple[Cell, Cell]]) -> None:
    lines = tab_separated(["a", "b"], rows).splitlines()
    assert len(lines) == len(rows) + 1
    assert {line.count("\t") for line in lines} == {1}


@given(st.builds("".join, st.tuples(st.text(" \u200b\ufeff\t\n"), st.sampled_from("=+-@＝＋－＠"), texts)) | texts)
def test_no_text_reaches_a_file_as_a_formula(text: str) -> None:
    cell = next(csv.reader(io.StringIO(write_table(["a", "b"], [[text, 1]]).split("\n", 1)[1], newline="")))[0]
    visible = cell.lstrip("\u200b\ufeff \u00a0\u3000\t\r\n")
    if visible[:1] in tuple("=+-@＝＋－＠"):
        read_number(visible)  # raises unless it is a number and nothing else


def chunks(count: int) -> Iterator[list[tuple[Cell, ...]]]:
    for start in range(0, count, 7000):
        numbers = range(start, min(start + 7000, count))
        yield [(f"cell {n // 15}", "fill_series", n / 7, None if n % 3 else -n, "=x") for n in numbers]


def test_a_long_table_is_saved_the_same_in_rows_and_in_columns(tmp_path: Path) -> None:
    columns = ["name", "line", "loss", "low", "note"]
    by_rows = write_rows(tmp_path / "rows.csv", columns, chunks(50_000))
    by_columns = write_columns(
        tmp_path / "columns.csv", columns, (list(zip(*chunk, strict=True)) for chunk in chunks(50_000))
    )
    whole = write_table(columns, [row for chunk in chunks(50_000) for row in chunk])
    assert (tmp_path / "rows.csv").read_bytes() == whole.encode()
    assert (tmp_path / "columns.csv").read_bytes() == whole.encode()
    assert by_rows == by_columns == len(whole.encode())
    assert sorted(entry.name for entry in tmp_path.iterdir()) == ["columns.csv", "rows.csv"]
    table = load_table(tmp_path / "rows.csv")
    assert len(table.rows) == 50_000
    assert table.rows[-1] == ("cell 3333", "fill_series", repr(49_999 / 7), "", "'=x")


def test_a_portion_that_does_not_fit_the_columns_is_refused(tmp_path: Path) -> None:
    for portion in ([[1, 2]], [[1, 2], [3]], [[1], [2], [3]]):
        with pytest.raises(TableError) as caught:
            write_columns(tmp_path / "t.csv", ["a", "b"], [[[1], [2]], portion])
        assert str(caught.value) == "The rows from 2 on do not fill the 2 columns with cells of equal number."
    assert list(tmp_path.iterdir()) == []


def test_a_row_deep_in_a_long_table_is_named(tmp_path: Path) -> None:
    rows = [[float(n)] for n in range(45_000)]
    rows[44_000] = [math.nan]
    with pytest.raises(TableError, match=r"^Row 44001 of column “a” is nan"):
        write_rows(tmp_path / "t.csv", ["a"], [rows])
    assert list(tmp_path.iterdir()) == []


def test_a_broken_character_is_refused_and_nothing_is_left(tmp_path: Path) -> None:
    with pytest.raises(WriteError, match="holds the broken character"):
        write_rows(tmp_path / "t.csv", ["a"], [[["\ud800"]]])
    assert list(tmp_path.iterdir()) == []


def test_numpy_columns_can_be_written(tmp_path: Path) -> None:
    write_columns(tmp_path / "t.csv", ["a", "b"], [[np.array([1.5, -2.5]), np.array([1, 2])]])  # type: ignore[list-item]
    assert (tmp_path / "t.csv").read_bytes() == b"a,b\n1.5,1\n-2.5,2\n"
