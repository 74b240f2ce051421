"""Running the headless command on a table, and reading back what it wrote."""

from __future__ import annotations

import csv
import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import pytest

from app.batch.command import run

ROOT = Path(__file__).parents[2]
HEADER = "name,gap_eV,voc_V,jsc_mA_cm2,ff_pct"
GOOD = "good,1.6,1.05,23.9,77.6"


def rows_of(path: Path) -> list[dict[str, str]]:
    """A written table by the csv module alone, apart from the project's own reader."""
    with path.open(newline="", encoding="utf-8") as stream:
        return list(csv.DictReader(stream, strict=True))


@dataclass
class Run:
    """What a run of the command left behind."""

    status: int
    out: str
    err: str
    folder: Path

    def rows(self, name: str) -> list[dict[str, str]]:
        """One of the tables."""
        return rows_of(self.folder / f"{name}.csv")

    def problems(self) -> list[tuple[str, str, str, str]]:
        """problems.csv as tuples."""
        return [tuple(row.values()) for row in self.rows("problems")]  # type: ignore[misc]


@dataclass
class Command:
    """Runs the command within this process, in an empty folder."""

    home: Path
    capsys: pytest.CaptureFixture[str]

    def __call__(self, table: str | bytes | Path, *options: str, into: str = "out") -> Run:
        """Run on a table given as a file, as text or as bytes."""
        path = table if isinstance(table, Path) else self.home / "cells.csv"
        if not isinstance(table, Path):
            path.write_bytes(table.encode() if isinstance(table, str) else table)
        return self.line(str(path), "--into", str(self.home / into), *options, into=into)

    def line(self, *argv: str, into: str = "out") -> Run:
        """Run with these arguments."""
        self.capsys.readouterr()
        status = run(argv)
        told = self.capsys.readouterr()
        return Run(status, told.out, told.err, self.home / into)


def in_process_of_its_own(*argv: str, cwd: Path, **environment: str) -> subprocess.CompletedProcess[str]:
    """Run the program as a user does, without a display."""
    plain = {key: value for key, value in os.environ.items() if key not in ("DISPLAY", "WAYLAND_DISPLAY")}
    plain.pop("QT_QPA_PLATFORM", None)
    return subprocess.run(
        [sys.executable, "-m", "app.main", "batch", *argv],
        cwd=cwd,
        env=plain | {"PYTHONPATH": str(ROOT)} | environment,
        capture_output=True,
        text=True,
        timeout=300,
        check=False,
    )
