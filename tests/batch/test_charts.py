"""The charts of the headless command, and the names of their files."""

from __future__ import annotations

import csv
import subprocess
import sys
import unicodedata
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtGui import QImage

from app.files.file_names import chart_names, safe_stem
from app.files.windows_names import windows_trouble
from tests.batch.command_line import GOOD, HEADER, ROOT, Command, in_process_of_its_own

ENDING = ".waterfall.png"

SAFE = [
    ("Plover 3", "Plover 3"),
    ("../../etc/passwd", "_._.._etc_passwd"),
    ("/etc/passwd", "_etc_passwd"),
    ("..\\up", "_._up"),
    ("C:\\x", "C__x"),
    ("..", "_"),
    (".hidden", "_hidden"),
    ("-rf", "_rf"),
    ("CON", "_CON"),
    ("nul.txt", "_nul.txt"),
    ("a|b?*", "a_b__"),
    ("line\nbreak", "line_break"),
    ("dots...", "dots"),
    ("\u202egpj", "_gpj"),
    ("e\u0301", "é"),
    ("日本語 セル", "日本語 セル"),
    ("", "cell"),
    ("   ", "cell"),
    ("x" * 400, "x" * 150),
    ("é" * 100, "é" * 75),
]


@pytest.mark.parametrize(("name", "stem"), SAFE)
def test_safe_stem(name: str, stem: str) -> None:
    assert safe_stem(name) == stem


def test_names_that_are_alike() -> None:
    cells = [("a", "x"), ("A", "y"), ("a", ""), ("e\u0301", ""), ("é", ""), ("a (x)", ""), ("b", "x")]
    assert chart_names(cells, ENDING) == [
        f"{stem}{ENDING}" for stem in ("a (x)", "A (y)", "a", "é", "é (2)", "a (x) (2)", "b")
    ]


@given(st.lists(st.tuples(st.text(max_size=300), st.text(max_size=300)), max_size=12))
def test_any_names_are_safe_and_different(cells: list[tuple[str, str]]) -> None:
    cells = [(n.encode("utf-8", "replace").decode(), g.encode("utf-8", "replace").decode()) for n, g in cells]
    names = chart_names(cells, ENDING)
    assert len(names) == len(cells)
    assert len({unicodedata.normalize("NFC", name.casefold()) for name in names}) == len(names)
    for name in names:
        assert Path(name).name == name
        assert "\\" not in name
        assert name.isprintable()
        assert len(name.encode()) <= 255
        assert windows_trouble(name) == ""
        assert name[0] not in ".-"


HOSTILE = ["../../up", "/root/x", "CON", "a/b", "a\\b", "..", "-rf", "A", "a", "x" * 400, "字" * 200, "<b>&amp;"]


@pytest.mark.parametrize("kind", ["png", "svg", "pdf"])
def test_hostile_names_stay_in_their_folder(command: Command, kind: str, qapp: object) -> None:
    table = command.home / "cells.csv"
    with table.open("w", newline="", encoding="utf-8") as stream:
        writer = csv.writer(stream)
        writer.writerow([*HEADER.split(","), "note"])
        writer.writerows([name, 1.6, 1.05, 23.9, 77.6, name] for name in HOSTILE)
    done = command(table, "--charts", kind, into="deep/er/out")
    assert done.status == 0
    assert f", {len(HOSTILE)} charts; see" in done.out
    everything = [path for path in command.home.rglob("*") if path.is_file() and path != table]
    assert {path.parent for path in everything} == {done.folder}
    charts = [path for path in everything if path.suffix == f".{kind}"]
    assert len(charts) == len(HOSTILE)
    start = {"png": b"\x89PNG\r\n\x1a\n", "svg": b"<?xml", "pdf": b"%PDF-"}[kind]
    assert all(path.read_bytes().startswith(start) for path in charts)
    if kind == "png":
        assert {(QImage(str(p)).width(), QImage(str(p)).height()) for p in charts} == {(1920, 1080)}


def _without_progress(text: str) -> str:
    """What was said beside how far the work is, which a slow machine is told."""
    return "".join(line for line in text.splitlines(keepends=True) if " done" not in line)


def test_refused_rows_get_no_chart(command: Command, qapp: object) -> None:
    done = command(f"{HEADER}\n{GOOD}\nbad,1.6,1.5,23.9,77.6\n", "--charts", "png")
    assert done.status == 1
    assert [path.name for path in done.folder.glob("*.png")] == ["good.waterfall.png"]
    assert "1 cell computed, 1 refused, 0 doubtful figures, 1 chart; see" in done.out


def test_a_chart_that_cannot_be_saved_is_told(command: Command, qapp: object) -> None:
    (command.home / "out" / f"good{ENDING}").mkdir(parents=True)
    done = command(f"{HEADER}\n{GOOD}\n", "--charts", "png")
    assert (done.status, done.out) == (2, "")
    assert done.err.startswith(f"gapledger batch: “good{ENDING}” was not saved in “")
    assert done.err.endswith("” because a folder has that name: choose another name.\n")


def test_without_a_display(tmp_path: Path) -> None:
    done = in_process_of_its_own(
        str(ROOT / "resources" / "demo_cells.csv"), "--into", "o", "--charts=png", cwd=tmp_path
    )
    assert done.returncode == 0
    assert _without_progress(done.stderr) == ""
    assert done.stdout == "6 cells computed, 0 refused, 0 doubtful figures, 6 charts; see “o”\n"
    assert len(list((tmp_path / "o").glob("*.png"))) == 6


def test_without_charts_neither_qt_nor_scipy_is_loaded(tmp_path: Path) -> None:
    (tmp_path / "cells.csv").write_text(f"{HEADER}\n{GOOD}\n")
    (tmp_path / "look.py").write_text(
        "import sys\n"
        "from app.batch.command import run\n"
        "status = run(['cells.csv', '--into', 'o'])\n"
        "heavy = {'PySide6', 'scipy', 'pvlib', 'pandas', 'pyqtgraph'} & {name.split('.')[0] for name in sys.modules}\n"
        "print(status, sorted(heavy))\n"
    )
    done = subprocess.run(
        [sys.executable, "look.py"],
        cwd=tmp_path, env={"PYTHONPATH": str(ROOT)}, capture_output=True, text=True, timeout=60, check=False,
    )  # fmt: skip
    assert _without_progress(done.stderr) == ""
    assert done.stdout.splitlines()[-1] == "0 []"
