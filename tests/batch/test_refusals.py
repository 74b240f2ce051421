"""What is refused, in which words, and with which exit status."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.batch.command_line import GOOD, HEADER, Command

_ADVICE = "or give it another name if it is something else."

#: Tables of which nothing can be used: case, contents, sentence. Exit status 2, and no folder is made.
UNUSABLE: list[tuple[str, str | bytes, str]] = [
    ("0 bytes", b"", "“cells.csv” is empty: it should have a header line and a line for each row."),
    (
        "binary",
        b"\x7fELF\x02\x01\x01\x00\x00",
        "“cells.csv” is not text, line 1 holds a zero byte: save it as CSV text in UTF-8.",
    ),
    (
        "a picture",
        b"\x89PNG\r\n\x1a\n" + bytes(range(1, 256)),
        "Line 4 of “cells.csv” has bytes that are no Windows Western text: save it as CSV text in UTF-8 once more.",
    ),
    ("header only", HEADER, "“cells.csv” has a header but no rows: add a line for each row below line 1."),
    ("blank lines only", "\n\n \n", "“cells.csv” has no header: it should have a line with the names of the columns."),
    (
        "a column twice",
        "name,voc_V,voc_V\na,1,1\n",
        "Line 1 of “cells.csv” names both column 2 and column 3 “voc_V”: give every column a name of its own.",
    ),
    (
        "an open quotation mark",
        f'{HEADER}\n"a,1.6,1.05,23.9,77.6\n',
        "Line 2 of “cells.csv” opens a quotation mark that is never closed: close it or take it out.",
    ),
    (
        "no name and no fill factor",
        "sample,gap_eV,voc_V,jsc_mA_cm2,PCE (%)\na,1.6,1,20,15\n",
        "“cells.csv” lacks the columns name and ff_pct. If “sample” is meant, name it name. "
        "An efficiency (“PCE (%)”) does not replace them.",
    ),
    (
        "no gap",
        "name,voc_V,jsc_mA_cm2,ff_pct\na,1,20,75\n",
        "“cells.csv” lacks the column gap_eV.",
    ),
    (
        "a sweep but no gap",
        "name,jv_file\na,a.txt\n",
        "“cells.csv” lacks the column gap_eV.",
    ),
    (
        "a current in place of its density",
        "name,gap_eV,voc_V,Isc (mA),ff_pct\na,1.6,1,20,75\n",
        "“cells.csv” lacks the column jsc_mA_cm2. "
        "If “Isc (mA)” is meant, name it jsc_mA_cm2 and divide it by the area.",
    ),
    (
        "Voc in mV",
        "name,gap_eV,voc_mV,jsc_mA_cm2,ff_pct\na,1.6,1050,23.9,77.6\n",
        "“cells.csv” lacks the column voc_V. "
        f"Its column “voc_mV” looks like voc_V: name it voc_V with values in V, {_ADVICE}",
    ),
    (
        "other spellings",
        "Name,Eg,Voc,jsc,FF\na,1.6,1.05,23.9,77.6\n",
        "“cells.csv” lacks the columns name, gap_eV, voc_V, jsc_mA_cm2 and ff_pct. "
        f"Its column “Name” looks like name: name it name, {_ADVICE} "
        f"Its column “Eg” looks like gap_eV: name it gap_eV with values in eV, {_ADVICE} "
        f"Its column “Voc” looks like voc_V: name it voc_V with values in V, {_ADVICE} "
        f"Its column “jsc” looks like jsc_mA_cm2: name it jsc_mA_cm2 with values in mA cm⁻², {_ADVICE} "
        f"Its column “FF” looks like ff_pct: name it ff_pct with values in %, {_ADVICE}",
    ),
    (
        "an optional one in another unit",
        f"{HEADER},T (K)\n{GOOD},300\n",
        "In “cells.csv” the column “T (K)” looks like temperature_C: "
        f"name it temperature_C with values in °C, {_ADVICE}",
    ),
    (
        "an uncertainty in another unit",
        f"{HEADER},u_voc_mV\n{GOOD},3\n",
        f"In “cells.csv” the column “u_voc_mV” looks like u_voc_V: name it u_voc_V with values in V, {_ADVICE}",
    ),
]


@pytest.mark.parametrize(("contents", "sentence"), [u[1:] for u in UNUSABLE], ids=[u[0] for u in UNUSABLE])
def test_unusable_table(command: Command, contents: str | bytes, sentence: str) -> None:
    done = command(contents)
    assert (done.status, done.out) == (2, "")
    assert done.err == f"gapledger batch: {sentence}\n"
    assert not done.folder.exists()


def _with(column: str, text: str) -> str:
    return f"{HEADER},{column}\n{GOOD},\nbad,1.6,1.05,23.9,77.6,{text}\n"


def _instead(voc: str = "1.05", jsc: str = "23.9", ff: str = "77.6", gap: str = "1.6", name: str = "bad") -> str:
    return f"{HEADER}\n{GOOD}\n{name},{gap},{voc},{jsc},{ff}\n"


_SPECTRUM = "is not known here: use am15g, am15d, am0, or blackbody:6000 for a black body of 6000 K."

#: Rows that are refused beside a good one: case, table, field and sentence of each problem. Exit status 1.
REFUSED: list[tuple[str, str, list[tuple[str, str]]]] = [
    (
        "text for a number",
        _instead(voc="high"),
        [("voc_V", "Line 3: “high” is not a number: write a number such as 1.5.")],
    ),
    ("NaN", _instead(jsc="NaN"), [("jsc_mA_cm2", "Line 3: “NaN” is not a finite number: write a number such as 1.5.")]),
    ("inf", _instead(ff="inf"), [("ff_pct", "Line 3: “inf” is not a finite number: write a number such as 1.5.")]),
    (
        "an overflow",
        _instead(voc="1e999"),
        [("voc_V", "Line 3: “1e999” is too large to hold: write a number below 1.7e308.")],
    ),
    (
        "negative area",
        _with("area_cm2", "-0.1"),
        [
            (
                "area_cm2",
                "Line 3: A must be above 0 and at most 100000 cm²; give the illuminated area in cm².",
            )
        ],
    ),
    (
        "negative current",
        _instead(jsc="-23.9"),
        [
            (
                "jsc_mA_cm2",
                "Line 3: Jsc must be above 0 and at most 100000 mA cm⁻²; give it positive, as a current density.",
            )
        ],
    ),
    (
        "Voc in mV within the column in V",
        _instead(voc="1050"),
        [("voc_V", "Line 3: Voc must be above 0 and at most 5 V; give one cell's voltage in V.")],
    ),
    (
        "FF as a fraction",
        _instead(ff="0.776"),
        [("ff_pct", "Line 3: FF must be above 1 and at most 100 %; give it in percent, such as 81.5.")],
    ),
    ("no gap in one row", _instead(gap=""), [("gap_eV", "Line 3: Eg is missing: type it in eV.")]),
    ("no Voc in one row", _instead(voc=""), [("voc_V", "Line 3: Voc is missing: type it in V.")]),
    (
        "two at once",
        _instead(gap="", ff="x"),
        [
            ("gap_eV", "Line 3: Eg is missing: type it in eV."),
            ("ff_pct", "Line 3: “x” is not a number: write a number such as 1.5."),
        ],
    ),
    (
        "gap outside the spectrum",
        _instead(gap="0.305", voc="0.05", jsc="20", ff="26"),
        [("gap_eV", "Line 3: The spectrum covers gaps from 0.31 to 4.43 eV; this gap lies outside.")],
    ),
    (
        "Voc above the limit",
        _instead(voc="1.4", jsc="15"),
        [
            (
                "voc_V",
                "Line 3: Voc is above the limit of 1.326 V for a gap of 1.6 eV: check Voc, its unit, and the gap.",
            )
        ],
    ),
    ("no name", _instead(name=""), [("name", "Line 3: The name is missing: give every cell one.")]),
    (
        "a name twice",
        _instead(name="good"),
        [
            (
                "name",
                "Line 3: The name “good” stands already in line 2: give every cell of a group a name of its own.",
            )
        ],
    ),
    ("unknown spectrum", _with("spectrum", "sunshine"), [("spectrum", f"Line 3: The spectrum 'sunshine' {_SPECTRUM}")]),
    (
        "an illuminant",
        _with("spectrum", "cie:LED-B3@500lx"),
        [("spectrum", f"Line 3: The spectrum 'cie:LED-B3@500lx' {_SPECTRUM}")],
    ),
    ("a spectrum file", _with("spectrum", "sun.csv"), [("spectrum", f"Line 3: The spectrum 'sun.csv' {_SPECTRUM}")]),
    (
        "a cold black body",
        _with("spectrum", "blackbody:60"),
        [
            (
                "spectrum",
                "Line 3: The spectrum 'blackbody:60' is no black body: write blackbody: and a temperature between 1000 "
                "and 20000 K, such as blackbody:6000.",
            )
        ],
    ),
    (
        "another reference",
        _with("reference", "silicon:110um"),
        [
            (
                "reference",
                "Line 3: The reference “silicon:110um” is not available in this version: leave it empty or write step.",
            )
        ],
    ),
    (
        "a J–V file",
        _with("jv_file", "a.txt"),
        [
            (
                "jv_file",
                "Line 3: “a.txt” does not exist: check the name and the folder.",
            )
        ],
    ),
    (
        "an EQE file",
        _with("eqe_file", "a.txt"),
        [("eqe_file", "Line 3: “a.txt” does not exist: check the name and the folder.")],
    ),
    (
        "an uncertainty",
        _with("u_voc_V", "0.003"),
        [("u_voc_V", "Line 3: Uncertainties are not read by this version: leave u_voc_V empty.")],
    ),
    (
        "too few cells",
        f"{HEADER}\n{GOOD}\nbad,1.6,1.05\n",
        [("", "Line 3 has 3 cells where the header has 5: add the missing cells, empty ones too.")],
    ),
    (
        "too many cells",
        f"{HEADER}\n{GOOD}\nbad,1.6,1,05,23.9,77.6\n",
        [
            (
                "",
                "Line 3 has 6 cells where the header has 5: put cells with a comma in them in quotation marks.",
            )
        ],
    ),
    (
        "numbers beyond all reason",
        _instead(gap="0.4", voc="5e-324", jsc="5e-324", ff="40"),
        [
            (
                "jsc_mA_cm2",
                "Line 3: The ledger of these figures is no finite number: one of them is far too small or too large.",
            )
        ],
    ),
    (
        "Rs in Ω",
        _with("rs_ohm_cm2", "60"),
        [
            (
                "rs_ohm_cm2",
                "Line 3: Rs × Jsc would be more than Voc: no diode curve can do that. Give Rs in Ω cm², not in Ω.",
            )
        ],
    ),
]


@pytest.mark.parametrize(("table", "problems"), [r[1:] for r in REFUSED], ids=[r[0] for r in REFUSED])
def test_refused_row(command: Command, table: str, problems: list[tuple[str, str]]) -> None:
    done = command(table)
    assert (done.status, done.err) == (1, "")
    assert [(p[1], p[2], p[3]) for p in done.problems()] == [(f, "refused", m) for f, m in problems]
    assert [row["name"] for row in done.rows("summary")] == ["good"]
    assert {row["name"] for row in done.rows("ledger")} == {"good"}
    assert done.out == f"1 cell computed, 1 refused, 0 doubtful figures; see “{done.folder / 'problems.csv'}”\n"


def test_all_rows_refused_still_leaves_the_reasons(command: Command) -> None:
    done = command(f"{HEADER}\na,1.6,,,\n")
    assert done.status == 1
    assert [p[1] for p in done.problems()] == ["voc_V", "jsc_mA_cm2", "ff_pct"]
    assert done.rows("summary") == []
    assert done.rows("ledger") == []


def test_doubtful_row_is_computed(command: Command) -> None:
    # 45 mA cm⁻² is above the 43.79 that AM1.5G holds above 1.12 eV (photon current of ASTM G173-03 global).
    done = command(f"{HEADER}\nbright,1.12,0.70,45,80\n")
    assert done.status == 0
    assert done.problems() == [
        (
            "bright",
            "jsc_mA_cm2",
            "doubtful",
            "Line 2: Jsc is above the 43.79 mA cm⁻² that the light holds above this gap: check the area (mask), the "
            "irradiance and the gap.",
        )
    ]
    assert [row["name"] for row in done.rows("summary")] == ["bright"]
    assert done.out.startswith("1 cell computed, 0 refused, 1 doubtful figure; see “")


def test_empty_columns_do_no_harm(command: Command) -> None:
    done = command(f"{HEADER},jv_file,eqe_file,u_voc_V,reference\n{GOOD},,,,step\nsecond,1.6,1.05,23.9,77.6,,, ,\n")
    assert (done.status, done.problems()) == (0, [])
    assert "jv_file" not in done.rows("summary")[0]


#: Arguments that cannot be followed (exit status 2). CELLS stands for a good table, DIR for a folder not made yet.
ARGUMENTS: list[tuple[list[str], str]] = [
    ([], "Name the table of cells: gapledger batch CELLS.csv --into DIR."),
    (["CELLS"], "Name the folder for the results: gapledger batch CELLS.csv --into DIR."),
    (["CELLS", "--into", ""], "Name the folder for the results: gapledger batch CELLS.csv --into DIR."),
    (
        ["CELLS", "--into"],
        "The arguments cannot be read (argument --into: expected one argument): see gapledger batch --help.",
    ),
    (["CELLS", "more.csv", "--into", "DIR"], "“more.csv” is not understood: see gapledger batch --help."),
    (["CELLS", "--into", "DIR", "--fast"], "“--fast” is not understood: see gapledger batch --help."),
    (["CELLS", "--int", "DIR"], "“--int” is not understood: see gapledger batch --help."),
    (["CELLS", "--into", "DIR", "--charts", "bmp"], "Charts can be png, svg or pdf, not “bmp”."),
    (
        ["CELLS", "--into", "DIR", "--attribution", "fair"],
        "The attribution can be log-mean or ladder, not “fair”.",
    ),
    (
        ["CELLS", "--into", "DIR", "--draws", "1000"],
        "--draws and --seed are for uncertainties, which this version does not work out: leave them out.",
    ),
    (
        ["CELLS", "--into", "DIR", "--seed=1"],
        "--draws and --seed are for uncertainties, which this version does not work out: leave them out.",
    ),
    (["nowhere.csv", "--into", "DIR"], "“nowhere.csv” does not exist: check the name and the folder."),
    ([".", "--into", "DIR"], "“folder.csv” is a folder: choose a table file in it."),
    (["FOLDER", "--into", "DIR"], "“folder.csv” is a folder: choose a table file in it."),
    (["/dev/null", "--into", "DIR"], "“null” is a device or pipe, not a file: choose a table file."),
    (["a\0b", "--into", "DIR"], "“a\\x00b” cannot be read, the system reports “embedded null byte”: choose another."),
]


@pytest.mark.parametrize(("argv", "sentence"), ARGUMENTS, ids=[" ".join(a[0]) or "nothing" for a in ARGUMENTS])
def test_arguments(command: Command, argv: list[str], sentence: str, monkeypatch: pytest.MonkeyPatch) -> None:
    cells, folder = command.home / "cells.csv", command.home / "folder.csv"
    cells.write_text(f"{HEADER}\n{GOOD}\n")
    folder.mkdir()
    names = {"CELLS": str(cells), "DIR": str(command.home / "out"), "FOLDER": str(folder)}
    monkeypatch.chdir(folder)
    done = command.line(*(names.get(word, word) for word in argv))
    assert (done.status, done.out) == (2, "")
    assert done.err == f"gapledger batch: {sentence}\n"
    assert not done.folder.exists()


TARGETS: list[tuple[str, str, str]] = [
    ("a file", "file", "“ledger.csv” was not saved in “{}” because that is not a folder: choose another folder."),
    (
        "below a file",
        "file/x",
        "“ledger.csv” was not saved in “{}” because that is not a folder: choose another folder.",
    ),
    (
        "a folder has the name of a result",
        "taken",
        "“summary.csv” was not saved in “{}” because a folder has that name: choose another name.",
    ),
    (
        "a name too long",
        "x" * 300,
        "“ledger.csv” was not saved in “{}” because the name is too long: choose a shorter one.",
    ),
    (
        "a zero byte",
        "a\0b",
        "“ledger.csv” was not saved in “{}” because its folder holds a character no name can have: choose another.",
    ),
    (
        "a link to itself",
        "loop",
        "“ledger.csv” was not saved in “{}” because that is not a folder: choose another folder.",
    ),
]


@pytest.mark.parametrize(("into", "sentence"), [t[1:] for t in TARGETS], ids=[t[0] for t in TARGETS])
def test_folder_that_cannot_take_the_results(command: Command, into: str, sentence: str) -> None:
    (command.home / "file").write_text("mine")
    (command.home / "taken" / "summary.csv").mkdir(parents=True)
    (command.home / "loop").symlink_to(command.home / "loop")
    done = command(f"{HEADER}\n{GOOD}\n", into=into)
    assert (done.status, done.out) == (2, "")
    head, tail = (f"gapledger batch: {sentence}\n").split("{}")
    assert done.err.startswith(head)
    assert done.err.endswith(tail)
    assert (command.home / "file").read_text() == "mine"


def test_read_only_folder(command: Command, monkeypatch: pytest.MonkeyPatch) -> None:
    """The system's refusal is played, since an administrator may write into read-only folders."""

    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "mkdir", refuse)
    done = command(f"{HEADER}\n{GOOD}\n")
    assert (done.status, done.out) == (2, "")
    assert done.err == (
        f"gapledger batch: “ledger.csv” was not saved in “{done.folder}” because permission is missing there: "
        "choose another folder or ask for permission.\n"
    )


def test_the_table_itself_is_never_replaced(command: Command) -> None:
    own = command.home / "summary.csv"
    own.write_text(f"{HEADER}\n{GOOD}\n")
    before = own.read_bytes()
    done = command(own, into=".")
    assert done.status == 2
    assert "because the table of cells itself has that name there: choose another folder." in done.err
    assert own.read_bytes() == before
