"""Mutilated tables, interruptions, closed pipes, narrow terminals: an exit status and a sentence, never a traceback."""

from __future__ import annotations

import os
import random
import re
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from app.batch import command as command_module
from tests.batch.command_line import GOOD, HEADER, ROOT, Command, in_process_of_its_own, rows_of

#: The figures alone: a fit for each of hundreds of tables would take minutes.
DEMO = re.sub(rb"demo/[\w.]+", b"", (ROOT / "resources" / "demo_cells.csv").read_bytes())
_SNIPPETS = [
    b"", b"NaN", b"inf", b"-inf", b"1e308", b"1e-308", b"5e-324", b"-0", b"0", b"-1", b"1,5", b"1.234,5", b"1e", b'"',
    b'""', b"'", b"=1+1", b"\0", b"\xff", b"\xef\xbb\xbf", b"\r", b"\n", b"\r\n", b"\t", b";", b",", b"#", b"\x1a",
    "½".encode(), "٣".encode(), "−1".encode(), "字".encode(), b"am0", b"am15d", b"blackbody:6000", b"blackbody:nan",
    b"blackbody:", b"cie:x", b"../x", b"{0}", b"%n", b"name", b"voc_V", b"9" * 400, b"0.31", b"4.4", b"100", b"0.001",
]  # fmt: skip


def mutilated(seed: int) -> bytes:
    """The demo table with some bytes, cells or lines exchanged, lost or doubled."""
    chance = random.Random(seed)
    data = DEMO
    for _ in range(chance.choice([1, 1, 2, 3, 6, 20])):
        kind = chance.randrange(6)
        if kind == 0 and data:
            at = chance.randrange(len(data))
            data = data[:at] + bytes([chance.randrange(256)]) + data[at + 1 :]
        elif kind == 1:
            at = chance.randrange(len(data) + 1)
            data = data[:at] + chance.choice(_SNIPPETS) + data[at:]
        elif kind == 2 and data:
            data = data[: chance.randrange(len(data))]
        else:
            lines = data.split(b"\n")
            at = chance.randrange(len(lines))
            if kind == 3:
                lines.insert(chance.randrange(len(lines)), lines[at])
            else:
                cells = lines[at].split(b",")
                cells[chance.randrange(len(cells))] = chance.choice(_SNIPPETS)
                lines[at] = b",".join(cells)
            data = b"\n".join(lines)
    if chance.random() < 0.05:
        data = data.decode("utf-8", "replace").encode("utf-16")
    return data


def check_outputs(folder: Path, status: int) -> None:
    """What must hold of the results whatever went in."""
    if status == 2:
        return
    tables = {name: rows_of(folder / f"{name}.csv") for name in ("ledger", "summary", "problems")}
    refused = [row for row in tables["problems"] if row["severity"] == "refused"]
    assert bool(refused) == (status == 1)
    assert all(row["message"] for row in tables["problems"])
    assert {row["name"] for row in tables["ledger"]} == {row["name"] for row in tables["summary"]}
    for row in tables["summary"]:
        mine = [line for line in tables["ledger"] if (line["name"], line["group"]) == (row["name"], row["group"])]
        losses = [float(line["loss_mW_cm2"]) for line in mine]
        incident, power = float(row["irradiance_mW_cm2"]), float(row["pce_pct"]) / 100 * float(row["irradiance_mW_cm2"])
        # A measured ERE of 5e-324 makes lines of six times the sunlight: rounding goes with the largest line.
        assert abs(incident - sum(losses) - power) <= 1e-13 * max(incident, *map(abs, losses))


def test_mutilated_tables(command: Command) -> None:
    """300 tables in this process, where a warning is an error too."""
    seen = set()
    for seed in range(300):
        done = command(mutilated(seed), into=f"o{seed}")
        assert done.status in (0, 1, 2), seed
        assert (done.status == 2) == bool(done.err), seed
        assert done.err.count("\n") <= 1, seed
        check_outputs(done.folder, done.status)
        seen.add(done.status)
    assert seen == {0, 1, 2}


def _in_processes(tmp_path: Path, seeds: range) -> Iterator[int]:
    for seed in seeds:
        (tmp_path / "cells.csv").write_bytes(mutilated(seed))
        charts = ["--charts", "svg"] if seed % 4 == 0 else []
        done = in_process_of_its_own("cells.csv", "--into", f"o{seed}", *charts, cwd=tmp_path)
        assert done.returncode in (0, 1, 2), (seed, done.stderr)
        assert "Traceback" not in done.stderr, seed
        assert "Warning" not in done.stderr, (seed, done.stderr)
        check_outputs(tmp_path / f"o{seed}", done.returncode)
        yield done.returncode


def test_mutilated_tables_in_processes_of_their_own(tmp_path: Path) -> None:
    assert set(_in_processes(tmp_path, range(1000, 1016))) <= {0, 1, 2}


@pytest.mark.slow
def test_many_mutilated_tables_in_processes_of_their_own(tmp_path: Path) -> None:
    assert set(_in_processes(tmp_path, range(2000, 2400))) == {0, 1, 2}


def test_no_memory(command: Command, monkeypatch: pytest.MonkeyPatch) -> None:
    def exhausted(_: Path) -> None:
        raise MemoryError

    monkeypatch.setattr(command_module, "load_table", exhausted)
    done = command(f"{HEADER}\n{GOOD}\n")
    assert (done.status, done.out) == (2, "")
    assert done.err == ("gapledger batch: There is not enough memory for this table: split it into several files.\n")


def big_table(path: Path, count: int) -> None:
    """A table of many cells, invented, under two lights."""
    chance = random.Random(7)
    with path.open("w", encoding="utf-8") as stream:
        stream.write("name,group,gap_eV,voc_V,jsc_mA_cm2,ff_pct,spectrum,ere,ideality,rs_ohm_cm2,rsh_ohm_cm2,note\n")
        for k in range(count):
            gap = chance.uniform(1.0, 1.8)
            stream.write(
                f"c{k},g{k % 9},{gap:.4f},{gap - chance.uniform(0.35, 0.6):.4f},{chance.uniform(10, 20):.3f},"
                f"{chance.uniform(55, 85):.2f},{chance.choice(['', 'am0'])},{chance.choice(['', '1e-3'])},"
                f'{chance.choice(["", "1.4"])},{chance.choice(["", "1.2"])},{chance.choice(["", "3000"])},"n, {k}"\n'
            )


def test_interrupted(tmp_path: Path) -> None:
    """An interrupt in the midst of a long table: no traceback, no half-written file, nothing temporary left."""
    big_table(tmp_path / "cells.csv", 60_000)
    running = subprocess.Popen(
        [sys.executable, "-m", "app.main", "batch", "cells.csv", "--into", "out"],
        cwd=tmp_path, env=os.environ | {"PYTHONPATH": str(ROOT)}, stderr=subprocess.PIPE, text=True,
    )  # fmt: skip
    deadline = time.monotonic() + 60
    while not list((tmp_path / "out").glob(".*.part")):
        assert time.monotonic() < deadline
        assert running.poll() is None
        time.sleep(0.02)
    running.send_signal(signal.SIGINT)
    _, told = running.communicate(timeout=60)
    assert running.returncode == 130
    assert told == "gapledger batch: Interrupted; files not finished by then were not written.\n"
    assert list((tmp_path / "out").iterdir()) == []


def test_reader_that_has_gone(tmp_path: Path) -> None:
    (tmp_path / "cells.csv").write_text(f"{HEADER}\n{GOOD}\n")
    read_end, write_end = os.pipe()
    os.close(read_end)
    done = subprocess.run(
        [sys.executable, "-m", "app.main", "batch", "cells.csv", "--into", "out"],
        cwd=tmp_path, env=os.environ | {"PYTHONPATH": str(ROOT)}, stdout=write_end, stderr=subprocess.PIPE, text=True,
        timeout=60, check=False,
    )  # fmt: skip
    os.close(write_end)
    assert (done.returncode, done.stderr) == (0, "")
    assert len(rows_of(tmp_path / "out" / "summary.csv")) == 1


def test_terminal_of_few_letters(tmp_path: Path) -> None:
    (tmp_path / "cells.csv").write_text("Voc (mA/cm²)\n1\n")
    done = in_process_of_its_own("cells.csv", "--into", "ö", cwd=tmp_path, PYTHONIOENCODING="ascii")
    assert done.returncode == 2
    assert done.stderr.startswith("gapledger batch: \\u201ccells.csv\\u201d lacks the columns name, ")
    (tmp_path / "cells.csv").write_text(f"{HEADER}\n{GOOD}\n")
    done = in_process_of_its_own("cells.csv", "--into", "ö", cwd=tmp_path, PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout == "1 cell computed, 0 refused, 0 doubtful figures; see \\u201c\\xf6\\u201d\n"


def test_help(command: Command) -> None:
    done = command.line("--help")
    assert (done.status, done.err) == (0, "")
    assert done.out.startswith("usage: gapledger batch CELLS.csv --into DIR ")


def test_20000_rows(command: Command) -> None:
    """Some 2 s on a laptop core; the bound only keeps what grows with the square of the rows out."""
    table = command.home / "cells.csv"
    big_table(table, 20_000)
    start = time.perf_counter()
    done = command(table)
    assert time.perf_counter() - start < 30.0
    assert done.status in (0, 1)
    computed = len(done.rows("summary"))
    assert computed + len({p[0] for p in done.problems() if p[2] == "refused"}) == 20_000
    assert computed > 15_000
    assert len(done.rows("ledger")) > 10 * computed


@pytest.mark.slow
def test_200000_rows(tmp_path: Path) -> None:
    """Well under two minutes, and in bounded memory: less than 1 GB, of which the table itself is a good third."""
    big_table(tmp_path / "cells.csv", 200_000)
    (tmp_path / "measure.py").write_text(
        "import resource, sys\n"
        "from app.batch.command import run\n"
        "status = run(['cells.csv', '--into', 'out'])\n"
        "print(status, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)\n"
    )
    start = time.perf_counter()
    done = subprocess.run(
        [sys.executable, "measure.py"],
        cwd=tmp_path, env=os.environ | {"PYTHONPATH": str(ROOT)}, capture_output=True, text=True, timeout=300,
        check=True,
    )  # fmt: skip
    assert time.perf_counter() - start < 90.0
    status, kilobytes = map(int, done.stdout.splitlines()[-1].split())
    assert status in (0, 1)
    assert kilobytes < 1_000_000
    assert "of 200000 rows done" in done.stderr
