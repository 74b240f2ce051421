"""Large and hostile texts: a sentence or a table, soon."""

from __future__ import annotations

import time

import numpy as np
import pytest

from app.files.measured import apply, guess, read, read_measured, shape_key, text_lines
from app.files.table_error import TableError

ROW = "0.1\t2\n"


def refusal_of(text: str | bytes) -> str:
    with pytest.raises(TableError) as refusal:
        read_measured(text.encode() if isinstance(text, str) else text, "x.txt")
    return str(refusal.value)


def test_too_many_bytes(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(text_lines, "MAX_BYTES", 1_000_000)
    assert refusal_of(b"1\t2\n" * 300_000) == (
        "“x.txt” has 1 MB and no more than 1 MB are read: take out what is not the measurement."
    )


def test_too_many_lines() -> None:
    assert refusal_of("\n" * 500_001 + ROW) == "“x.txt” has more than 500000 lines: take out those from line 500001 on."


def test_too_long_a_line() -> None:
    assert refusal_of(ROW * 3 + "1\t" * 25_001) == (
        "Line 4 of “x.txt” has more than 50000 characters: a line for each row was expected."
    )


def test_too_many_columns() -> None:
    row = "1\t" * 2001 + "\n"
    assert refusal_of("a\n" + row * 3) == "Line 2 of “x.txt” has 2001 columns: no more than 2000 were expected."


def test_too_many_cells(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(read, "MAX_CELLS", 10)
    assert refusal_of(ROW * 6) == "“x.txt” has more than 10 cells up to line 6: a file for each part was expected."


def test_too_many_tables() -> None:
    assert refusal_of(("next\n" + ROW * 3) * 501) == (
        "“x.txt” has more than 500 tables, the next at line 2002: a file for each part was expected."
    )


def test_many_passed_over_lines_are_counted() -> None:
    text = read_measured(("word\n" + ROW + "word\n").encode() * 80 + (ROW * 4).encode(), "x.txt")
    assert len(text.problems) == 51
    assert text.problems[0] == "Line 2, “0.1\\t2”, does not fit the table beside it: it was passed over."
    assert text.problems[-1] == "There are 30 more such lines."


def test_marks_of_instruments_for_no_reading_are_blank() -> None:
    text = read_measured(b"V;J\n0;1\n1;9.91E+37\n2;3\n3;-9.9e37\n", "x.txt")
    assert np.array_equal(text.blocks[0].columns[1].values, [1, np.nan, 3, np.nan], equal_nan=True)
    assert text.problems[0] == (
        "Line 3 has “9.91E+37” in column 2, an instrument's mark for no reading: it counts as blank."
    )


def test_rows_that_begin_or_end_blank_belong_to_the_table() -> None:
    text = read_measured(b"V;J;T\n0;;\n1;;\n2;3;\n3;4;5\n4;;\n\n1;2\n", "x.txt")
    (block,) = text.blocks
    assert list(block.lines) == [2, 3, 4, 5, 6]
    assert np.array_equal(block.columns[1].values, [np.nan, np.nan, 3, 4, np.nan], equal_nan=True)
    assert text.problems == ("Line 8, “1;2”, does not fit the table beside it: it was passed over.",)


def test_a_row_far_off_does_not_go_on_with_the_table() -> None:
    text = read_measured(b"V;J\n0;1\n1;2\n2;3\n\n3;4\n\n25;0.09\n", "x.txt")
    (block,) = text.blocks
    assert list(block.lines) == [2, 3, 4, 6]
    assert text.problems == ("Line 8, “25;0.09”, does not fit the table beside it: it was passed over.",)


def test_lines_are_counted_as_an_editor_does() -> None:
    text = read_measured(b"V;J\r\r\n0;1\r\n1;2\n2;3\r3;4\r\r\n4;5", "x.txt")
    assert list(text.blocks[0].lines) == [2, 3, 4, 5, 6]


HOSTILE = {
    "brackets": "((((" * 12_000,
    "openings and closings": "([{<" * 6_000 + ">}])" * 6_000,
    "digits": "1" * 49_000,
    "digits and commas": "1,234" * 9_000,
    "dots": "1.234." * 8_000,
    "signs": "+-" * 24_000,
    "quotes": '"' * 49_000,
    "quoted cells": '"a",' * 12_000,
    "open quotes": '"a,"b,"' * 6_000,
    "blanks": " " * 49_000 + "1",
    "blanks between": "1 " * 24_000,
    "tabs": "\t" * 49_000 + "1\t2",
    "key": "a" * 49_000 + ":1",
    "colons": ":=" * 24_000,
    "units": "mA/" * 16_000,
    "words": "forward " * 6_000,
    "comments": "# " * 24_000,
    "powers": "1×10^" * 9_000,
    "exponents": "1e5" * 16_000,
}


@pytest.mark.parametrize("line", HOSTILE.values(), ids=HOSTILE.keys())
@pytest.mark.parametrize("count", [1, 12])
def test_hostile_lines_take_no_time(line: str, count: int) -> None:
    start = time.perf_counter()
    for before, after in (("", ROW * 4), (ROW * 4, ""), (ROW * 4, ROW * 4)):
        data = (before + (line + "\n") * count + after).encode()
        try:
            text = read_measured(data, "x.txt")
            shape_key(text)
            apply(text, guess(text))
        except TableError:
            pass
    assert time.perf_counter() - start < 6  # 2 s each


@pytest.mark.parametrize(
    ("count", "bound"), [(20_000, 2.0), pytest.param(200_000, 15.0, marks=pytest.mark.slow)], ids=["20000", "200000"]
)
@pytest.mark.parametrize("comma", [False, True], ids=["point", "comma"])
def test_many_rows(count: int, bound: float, comma: bool) -> None:
    """Half a second and 2 s were measured for 20 000 and 200 000 rows; the bound allows for a busy machine."""
    voltage = np.linspace(-0.2, 1.2, count)
    rows = "\n".join(f"{v:.6f};{21 - np.exp((v - 1) / 0.05):.6f};25.0" for v in voltage)
    data = ("V (V);J (mA/cm2);T (C)\n" + (rows.replace(".", ",") if comma else rows)).encode()
    start = time.perf_counter()
    text = read_measured(data, "x.txt")
    (sweep,) = apply(text, guess(text))
    assert time.perf_counter() - start < bound
    assert len(sweep.voltage) == count
