"""From the start of the process to the first painted window, beside a bare window with the same libraries.

The two are not alike in one thing: the program's first window has its waterfall, but gets its two plots (and imports
pyqtgraph for them) right after, while the bare window has two plots from the first. `ratio_with_plots` is therefore
written beside `ratio`; it alone compares the same contents.
"""

from __future__ import annotations

import json
import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import pytest

from .record import write

ROOT = Path(__file__).parents[2]
_SCRIPT = Path(__file__).with_name("first_paint.py")


def _run(which: str) -> list[dict[str, object]]:
    home = tempfile.gettempdir()  # whose settings are nobody's
    environment = os.environ | {"PYTHONPATH": str(ROOT), "QT_QPA_PLATFORM": "offscreen"}
    environment |= {"XDG_CONFIG_HOME": home, "XDG_DATA_HOME": home}
    done = subprocess.run(
        [sys.executable, str(_SCRIPT), str(time.time()), which],
        env=environment, capture_output=True, text=True, timeout=60, check=True,
    )  # fmt: skip
    return [json.loads(line) for line in done.stdout.splitlines()]


def _measure(runs: int) -> dict[str, object]:
    first, complete, bare = [], [], []
    for which in ("program", "bare"):
        _run(which)  # compiles, and fills the caches of the disk
    for _ in range(runs):
        painted, whole = _run("program")
        assert painted["heavy"] == whole["heavy"] == []
        first.append(painted["seconds"])
        complete.append(whole["seconds"])
        bare.append(_run("bare")[0]["seconds"])
    medians = {
        "program_s": statistics.median(first),
        "program_with_plots_s": statistics.median(complete),
        "bare_s": statistics.median(bare),
    }
    return {
        "runs": runs,
        **medians,
        "ratio": medians["program_s"] / medians["bare_s"],
        "ratio_with_plots": medians["program_with_plots_s"] / medians["bare_s"],
    }


def test_the_window_comes_without_heavy_libraries() -> None:
    figures = _measure(3)
    write("start", "short", figures)
    assert figures["ratio"] < 2.0, figures  # a guard against mishaps; the long run has the real bound


@pytest.mark.slow
def test_the_window_comes_nearly_as_fast_as_a_bare_one() -> None:
    figures = _measure(25)
    write("start", "long", figures)
    assert figures["ratio"] <= 1.3, figures
