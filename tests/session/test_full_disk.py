"""No room on the disk, at 64 levels and for each kind of file of the session: the earlier one stays, and it is told."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from app.files.write_error import WriteError
from app.session_file import opened, save

ROOT = Path(__file__).parents[2]
_START = ROOT / "tests" / "data" / "sessions" / "form-1.gapledger"
_PROGRAM = """
import resource, sys
from pathlib import Path
from app.files.writer import WriteError
from app.journal import read_journal, write_journal
from app.session_file import backup_of, opened, save

kind, folder, start = sys.argv[1], Path(sys.argv[2]), Path(sys.argv[3])
state = opened(start.read_bytes(), "start")
cell = state.cells[0]

def version(number):
    return state.with_cell(cell.with_value("area", float(number)))

def number(path):
    found = opened(path.read_bytes(), "x") if kind == "session" else read_journal(path).state
    return int(found.cells[0].values["area"])

def write(path, number):
    save(path, version(number)) if kind == "session" else write_journal(path, version(number), None)

path = folder / "work.file"
write(path, 1)
size, held, refused, saved = path.stat().st_size, 1, 0, 0
hard = resource.getrlimit(resource.RLIMIT_FSIZE)[1]
for level in range(64):
    limit = round(level / 63 * 1.1 * size)
    resource.setrlimit(resource.RLIMIT_FSIZE, (limit, hard))
    try:
        write(path, level + 2)
        held, saved = level + 2, saved + 1
    except WriteError as fault:
        assert "larger than the system allows" in str(fault), fault
        refused += 1
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, (hard, hard))
    assert number(path) == held, level
    if kind == "session" and backup_of(path).exists():
        assert number(backup_of(path)) <= held
    assert all(p.name in ("work.file", "work.file.previous") for p in folder.iterdir()), list(folder.iterdir())
print(refused, saved)
"""


@pytest.mark.skipif(os.name == "nt", reason="needs file size limits")
@pytest.mark.parametrize("kind", ["session", "journal"])
def test_sixty_four_levels_of_a_full_disk(tmp_path: Path, kind: str) -> None:
    done = subprocess.run(
        [sys.executable, "-c", _PROGRAM, kind, str(tmp_path), str(_START)],
        capture_output=True, text=True, env=os.environ | {"PYTHONPATH": str(ROOT)}, timeout=120,
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    refused, saved = map(int, done.stdout.split())
    assert refused + saved == 64
    assert refused > 50
    assert saved > 3


@pytest.mark.parametrize("target", ["folder", "missing/a.gapledger", "pipe", "/dev/full", "n" * 300, "a\0b"])
def test_hostile_targets_are_refused_in_a_sentence(tmp_path: Path, target: str) -> None:
    (tmp_path / "folder").mkdir()
    os.mkfifo(tmp_path / "pipe")
    before = sorted(tmp_path.rglob("*"))
    state = opened(_START.read_bytes(), "start")
    with pytest.raises(WriteError, match="was not saved"):
        save(tmp_path / target, state)
    assert sorted(tmp_path.rglob("*")) == before
