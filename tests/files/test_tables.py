"""Reading tables: dialects, encodings, and what is refused in which words."""

import codecs
import csv
import os
import time
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.files import tables
from app.files.tables import Table, TableError, load_table, read_table, write_table

COLUMNS = ("name", "voc_V", "note")
ROWS = (("Älplerin", "1.08", "a, b; c"), ("µ-cell", "0.7", 'said "no"'))


def csv_text(delimiter: str, end: str) -> str:
    quoted = [("Älplerin", "1.08", '"a, b; c"'), ("µ-cell", "0.7", '"said ""no"""')]
    return "".join(delimiter.join(row) + end for row in [COLUMNS, *quoted])


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"], ids=["LF", "CRLF", "CR"])
@pytest.mark.parametrize("delimiter", [",", ";", "\t"], ids=["comma", "semicolon", "tab"])
@pytest.mark.parametrize(
    ("encoding", "mark"),
    [
        ("utf-8", b""),
        ("utf-8-sig", b""),
        ("utf-16-le", codecs.BOM_UTF16_LE),
        ("utf-16-be", codecs.BOM_UTF16_BE),
        ("cp1252", b""),
        ("latin-1", b""),
    ],
)
def test_the_same_table_in_every_dialect(encoding: str, mark: bytes, delimiter: str, end: str) -> None:
    table = read_table(mark + csv_text(delimiter, end).encode(encoding), "cells.csv")
    assert table.columns == COLUMNS
    assert table.rows == ROWS
    assert table.line_numbers == (2, 3)
    assert table.delimiter == delimiter
    assert table.row_problems == {}
    assert not table.decimal_comma
    names = {"utf-16-le": "utf-16", "utf-16-be": "utf-16", "latin-1": "cp1252"}
    assert table.encoding == names.get(encoding, encoding)


def read(text: str) -> Table:
    return read_table(text.encode(), "cells.csv")


READ = [
    ("decimal comma", "name;voc_V\na;1,08\n", [("a", "1,08")]),
    ("quoted delimiter", 'name,note\n"a, b",c\n', [("a, b", "c")]),
    ("quoted delimiter in the header", '"name, long";note\na;b\n', [("a", "b")]),
    ("quoted other delimiter in the header", '"a;b;c;d",note\na,b\n', [("a", "b")]),
    ("more commas than tabs in one name", "a\tb\tc, d\n1\t2\t3\n", [("1", "2", "3")]),
    ("quoted line break", 'name,note\na,"b\nc"\nd,e\n', [("a", "b\nc"), ("d", "e")]),
    ("quoted blank and comment lines", 'name,note\na,"b\n\n# c"\nd,e\n', [("a", "b\n\n# c"), ("d", "e")]),
    ("line break in the header", '"na\nme",note\na,b\n', [("a", "b")]),
    ("no line end at the end", "name,note\na,b", [("a", "b")]),
    ("blank lines", "\n  \nname,note\n\na,b\n\n\n", [("a", "b")]),
    ("lines of empty cells", ",,\nname,note\n,\n , \na,b\n,\n", [("a", "b")]),
    ("comments", '# by hand\n #, "x\nname,note\na,b\n# c,d\ne,f\n', [("a", "b"), ("e", "f")]),
    ("a hash inside", 'name,note\na,#1\n"#2",b\n', [("a", "#1"), ("#2", "b")]),
    ("a hash behind an empty cell", "name\tnote\n\t#1\n", [("", "#1")]),
    ("delimiter at every line's end", "name,note,\na,b,\nc,d,,\n", [("a", "b"), ("c", "d")]),
    ("spaces behind delimiters", 'name, note\na, "b, c"\n', [("a", "b, c")]),
    ("one column", "name\na\nb\n", [("a",), ("b",)]),
    ("the delimiter named first", "sep=;\na,b;c\n1;2\n", [("1", "2")]),
    ("the delimiter named to be a tab", "SEP=\t\na;b;c\td\n1\t2\n", [("1", "2")]),
    (
        "separators only spreadsheets know as line ends",
        "name,note\na,b\u2028c\x85d\n",
        [("a", "b\u2028c\x85d")],
    ),
]


@pytest.mark.parametrize(("text", "rows"), [case[1:] for case in READ], ids=[case[0] for case in READ])
def test_what_spreadsheets_and_people_write_is_read(text: str, rows: list[tuple[str, ...]]) -> None:
    table = read(text)
    assert list(table.rows) == rows
    assert len(table.columns) == len(rows[0])
    assert table.row_problems == {}


def test_line_numbers_count_every_line_of_the_source() -> None:
    table = read('# one\n\nname,note\na,"b\nc"\n\n# seven\nd,e\r\nf,g\r')
    assert table.line_numbers == (4, 8, 9)
    assert table.comment_lines == (1, 7)


@pytest.mark.parametrize(
    ("cells", "expected"),
    [
        (["1,5"], True),
        (["0,123"], True),
        (["-,5", "12"], True),
        (["1,5e-3"], True),
        (["1,234"], False),
        (["12"], False),
        (["a,b"], False),
        (["1,5", "1.5"], False),
        (["1,5", "1.234,5"], True),
    ],
)
def test_decimal_commas_are_noticed_only_where_they_are_certain(cells: list[str], expected: bool) -> None:
    assert read("x;y\n" + "".join(f"{cell};\n" for cell in cells)).decimal_comma is expected


FLAWED = [
    ("a\n", ("a", ""), "Line 3 has 1 cell where the header has 2: add the missing cells, empty ones too."),
    (
        "a,b,c\n",
        ("a", "b"),
        "Line 3 has 3 cells where the header has 2: put cells with a comma in them in quotation marks.",
    ),
    (
        'a,"b"c\n',
        ("a", "bc"),
        "Line 3 has a quotation mark out of place: inside a quoted cell write it twice.",
    ),
    (
        '"a,b\nc,d"e,f\n',
        ("a,b", ""),
        "Lines 3 to 4 have a quotation mark out of place: inside a quoted cell write it twice.",
    ),
    (
        '"a\n\nb"\n',
        ("a\n\nb", ""),
        "Lines 3 to 5 have 1 cell where the header has 2: add the missing cells, empty ones too.",
    ),
]


@pytest.mark.parametrize(("line", "row", "problem"), FLAWED)
def test_a_flawed_row_is_kept_and_told_and_the_others_read(line: str, row: tuple[str, ...], problem: str) -> None:
    table = read(f"name,note\nfirst,1\n{line}last,2\n")
    assert table.rows == (("first", "1"), row, ("last", "2"))
    assert table.row_problems == {1: problem}


@pytest.mark.parametrize(("delimiter", "name"), [(";", "a semicolon"), ("\t", "a tab")])
def test_the_surplus_is_blamed_on_the_delimiter_there_is(delimiter: str, name: str) -> None:
    table = read(delimiter.join("ab") + "\n" + delimiter.join("abc") + "\n")
    assert table.row_problems[0].endswith(f": put cells with {name} in them in quotation marks.")


NO_HEADER = "“cells.csv” has no header: it should have a line with the names of the columns."
REFUSED = [
    ("empty", b"", "“cells.csv” is empty: it should have a header line and a line for each row."),
    ("blank", b"\n \n\r\n", NO_HEADER),
    ("only a byte order mark", codecs.BOM_UTF8, NO_HEADER),
    ("only comments", b"# a,b\n", NO_HEADER),
    ("only delimiters", b",,,\n,,\n", NO_HEADER),
    (
        "header only",
        b"# x\na,b\n\n",
        "“cells.csv” has a header but no rows: add a line for each row below line 2.",
    ),
    (
        "picture",
        b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR",
        "“cells.csv” is not text, line 3 holds a zero byte: save it as CSV text in UTF-8.",
    ),
    (
        "UTF-16 without mark",
        "a,b\n".encode("utf-16-le"),
        "“cells.csv” is not text, line 1 holds a zero byte: save it as CSV text in UTF-8.",
    ),
    (
        "UTF-32",
        codecs.BOM_UTF32_LE + "a".encode("utf-32-le"),
        "“cells.csv” is text in UTF-32, which is not read: save it as CSV text in UTF-8.",
    ),
    (
        "control character",
        b"a,b\n1,2\x07\n",
        "“cells.csv” is not text, line 2 holds the control character \\x07: save it as CSV text in UTF-8.",
    ),
    (
        "zero character in UTF-16",
        codecs.BOM_UTF16_LE + "a,b\n\0".encode("utf-16-le"),
        "“cells.csv” is not text, line 2 holds the control character \\x00: save it as CSV text in UTF-8.",
    ),
    (
        "half a UTF-16 character",
        codecs.BOM_UTF16_LE + "a,b\n1,2".encode("utf-16-le") + b"3",
        "Line 2 of “cells.csv” has bytes that are no UTF-16 text: save it as CSV text in UTF-8 once more.",
    ),
    (
        "damaged UTF-8",
        "a,µ\n1,".encode() + b"\xff\n",
        "Line 2 of “cells.csv” has bytes that are no UTF-8 text: save it as CSV text in UTF-8 once more.",
    ),
    (
        "damaged UTF-8 with mark",
        codecs.BOM_UTF8 + b"a,b\n1,\xff\n",
        "Line 2 of “cells.csv” has bytes that are no UTF-8 text: save it as CSV text in UTF-8 once more.",
    ),
    (
        "bytes of no encoding",
        b"a,b\n\n1,\x81\n",
        "Line 3 of “cells.csv” has bytes that are no Windows Western text: save it as CSV text in UTF-8 once more.",
    ),
    (
        "two equal names",
        b"\nname,voc, name\n",
        "Line 2 of “cells.csv” names both column 1 and column 3 “name”: give every column a name of its own.",
    ),
    ("no name", b"name,,voc\n", "Line 1 of “cells.csv” has no name for column 2: give every column a name."),
    (
        "open quotation mark",
        b'name,voc\na,1\nb,"2\nc,3\n',
        "Line 3 of “cells.csv” opens a quotation mark that is never closed: close it or take it out.",
    ),
    (
        "open quotation mark in the header",
        b'name,"voc\na,1\n',
        "Line 1 of “cells.csv” opens a quotation mark that is never closed: close it or take it out.",
    ),
    (
        "misplaced quotation mark in the header",
        b'name,"voc"V\na,1\n',
        "The header of “cells.csv” cannot be used. "
        "Line 1 has a quotation mark out of place: inside a quoted cell write it twice.",
    ),
    (
        "enormous cell",
        b"name,voc\na,1\n" + b"n" * 131_073 + b",1\n",
        "Line 3 of “cells.csv” has a cell of more than 131072 characters: check that its quotation mark is closed.",
    ),
    (
        "enormous line",
        b"name,voc\n" + b"," * 5_000_001,
        "Line 2 of “cells.csv” has 5000001 characters: check that every row has a line of its own.",
    ),
]


@pytest.mark.parametrize(("data", "message"), [case[1:] for case in REFUSED], ids=[case[0] for case in REFUSED])
def test_what_is_no_table_is_refused_in_a_sentence(data: bytes, message: str) -> None:
    with pytest.raises(TableError) as caught:
        read_table(data, "cells.csv")
    assert str(caught.value) == message


@pytest.mark.parametrize(
    ("limit", "value", "message"),
    [
        (
            "MAX_BYTES",
            15,
            "“cells.csv” has 0 MB and no more than 0 MB are read: split it into several files.",
        ),
        ("MAX_CELLS", 5, "“cells.csv” has more than 2 rows of 2 columns: split it into several files."),
        ("MAX_LINES", 3, "“cells.csv” has more than 3 lines: split it into several files."),
    ],
)
def test_a_table_too_large_is_refused(monkeypatch: pytest.MonkeyPatch, limit: str, value: int, message: str) -> None:
    text = "a,b\n" + "1,2\n" * 3
    assert len(read(text).rows) == 3
    monkeypatch.setattr(tables, limit, value)
    with pytest.raises(TableError) as caught:
        read(text)
    assert str(caught.value) == message


def test_a_file_is_read_under_its_name(tmp_path: Path) -> None:
    (tmp_path / "cells.csv").write_bytes(csv_text(",", "\n").encode())
    assert load_table(tmp_path / "cells.csv").rows == ROWS


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs the devices of Linux")
def test_a_file_that_cannot_be_opened_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "locked").write_bytes(b"a\n1\n")
    os.mkfifo(tmp_path / "pipe")
    (tmp_path / "large").touch()
    os.truncate(tmp_path / "large", 200_000_001)
    wanted = {
        tmp_path / "gone": "“gone” does not exist: check the name and the folder.",
        tmp_path: f"“{tmp_path.name}” is a folder: choose a table file in it.",
        tmp_path / "pipe": "“pipe” is a device or pipe, not a file: choose a table file.",
        Path("/dev/zero"): "“zero” is a device or pipe, not a file: choose a table file.",
        tmp_path / "large": "“large” has 200 MB and no more than 200 MB are read: split it into several files.",
        tmp_path / ("n" * 300): "“" + "n" * 39 + "…” cannot be read, the system reports “File name too long”: "
        "choose another.",
        tmp_path / "a\0b": "“a\\x00b” cannot be read, the system reports “embedded null byte”: choose another.",
    }
    found = {}
    for path in wanted:
        with pytest.raises(TableError) as caught:
            load_table(path)
        found[path] = str(caught.value)
    assert found == wanted

    def denied(_: Path) -> bytes:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "read_bytes", denied)  # permission bits do not bind root, so the refusal is played
    with pytest.raises(TableError, match=r"^“locked” may not be read: ask for permission or choose another\.$"):
        load_table(tmp_path / "locked")


def test_a_large_table_is_read_in_a_few_seconds() -> None:
    row = "cell {},g,1.12,0.7381,42.65,84.9,25,100,am15g,step,0.001,1.1\n"
    data = (
        "name,group,gap_eV,voc_V,jsc_mA_cm2,ff_pct,temperature_C,irradiance_mW_cm2,spectrum,reference,ere,ideality\n"
        + "".join(row.format(number) for number in range(200_000))
    ).encode()
    start = time.process_time()
    table = read_table(data, "cells.csv")
    took = time.process_time() - start
    assert len(table.rows) == 200_000
    assert table.rows[-1][:2] == ("cell 199999", "g")
    assert table.line_numbers[-1] == 200_001
    assert took < 10.0  # measured 1.8 s on one core of a shared machine; the bound only catches a blow-up


@given(
    st.lists(st.lists(st.text(st.characters(codec="utf-8", exclude_categories=["Cc"])), min_size=2, max_size=2)),
    st.sampled_from([",", ";", "\t"]),
)
def test_what_the_csv_module_writes_is_read_back(rows: list[list[str]], delimiter: str) -> None:
    class Sink(list[str]):
        write = list.append

    sink = Sink()
    writer = csv.writer(sink, delimiter=delimiter, quoting=csv.QUOTE_ALL)
    writer.writerows([["a", "b"], ["first", "row"], *rows])
    expected = [("first", "row"), *(tuple(row) for row in rows if any(cell.strip() for cell in row))]
    assert list(read("".join(sink)).rows) == expected


@given(st.binary(max_size=200))
def test_any_bytes_are_read_or_refused_in_a_sentence(data: bytes) -> None:
    try:
        table = read_table(data, "cells.csv")
    except TableError as refusal:
        sentence = str(refusal)
        assert sentence.endswith(".")
    else:
        assert {len(row) for row in table.rows} == {len(table.columns)}


@given(st.text(alphabet='ab,;\t"\n\r #1', max_size=40))
def test_any_text_is_read_or_refused_and_every_line_is_accounted_for(text: str) -> None:
    try:
        table = read(text)
    except TableError as refusal:
        sentence = str(refusal)
        assert sentence.endswith(".")
    else:
        assert {len(row) for row in table.rows} == {len(table.columns)}
        assert list(table.line_numbers) == sorted(set(table.line_numbers))
        assert len(table.rows) == len(table.line_numbers)


def test_reading_leaves_the_csv_modules_limit_alone() -> None:
    before = csv.field_size_limit()
    read(write_table(["a"], [["b"]]))
    assert csv.field_size_limit() == before
