"""A program killed while it saves, again and again: the file is always whole, and holds what was said to be saved."""

from __future__ import annotations

import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from app.session_file import backup_of, opened

ROOT = Path(__file__).parents[2]
_PROGRAM = """
import sys
from dataclasses import replace
from pathlib import Path
from app.session_file import opened, save

path = Path(sys.argv[1])
state = opened(Path(sys.argv[2]).read_bytes(), "start")
first, number = state.cells[0], int(sys.argv[3])
while True:
    number += 1
    save(path, state.with_cell(first.with_value("area", float(number))))
    print(number, flush=True)
"""
_START = ROOT / "tests" / "data" / "sessions" / "form-1.gapledger"


def _number(path: Path) -> int:
    """Which save a file holds; raises where it holds none."""
    value = opened(path.read_bytes(), path.name).cells[0].values["area"]
    assert isinstance(value, float)
    return int(value)


def _kill_while_saving(folder: Path, kills: int, seed: int) -> None:
    chance = random.Random(seed)
    path = folder / "work.gapledger"
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    number = saves = left = 0
    for _ in range(kills):
        command = [sys.executable, "-c", _PROGRAM, str(path), str(_START), str(number)]
        with subprocess.Popen(command, env=environment, stdout=subprocess.PIPE, text=True) as program:
            assert program.stdout is not None
            said = int(program.stdout.readline())
            time.sleep(chance.uniform(0.0, 0.06))
            program.send_signal(signal.SIGKILL)
            lines = program.stdout.read().split("\n")
        # A number without its line end was printed after its save, too.
        said = max([said, *(int(line) for line in lines if line)])
        found = _number(path)
        assert said <= found <= said + 1, "what was said to be saved is lost"
        if found > 1:
            assert _number(backup_of(path)) in (found - 1, found), "the version before is lost"
        saves += found - number
        number = found
        for rest in folder.iterdir():
            if rest not in (path, backup_of(path)):
                left += 1
                rest.unlink()
    print(f"{kills} kills while saving, {saves} saves: 0 lost or unreadable, {left} unfinished files left beside")


def test_killed_while_saving(tmp_path: Path) -> None:
    _kill_while_saving(tmp_path, 8, 1)


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(2, 12))
def test_killed_a_thousand_times_while_saving(tmp_path: Path, seed: int) -> None:
    _kill_while_saving(tmp_path, 100, seed)
