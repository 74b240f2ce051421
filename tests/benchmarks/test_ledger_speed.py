"""How long ledgers take: 100 000 cells at once, against one cell after the other by quadrature and root finding.

No absolute time is asserted, since the machine is not known; the ratio is,
because it holds on any. The long run (`-m slow`) does the brute force for 1 000 cells, the short one for 12.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable

import pytest

from physics.cell import Cell
from physics.ledger import ledger_of
from physics.spectrum import reference_spectrum

from ..physics import brute
from ..physics.cells import random_cells
from .record import write

MANY = 100_000
LEAST_RATIO = 100.0
AM15G = reference_spectrum("am15g")


def _seconds(run: Callable[[], object], repeats: int) -> list[float]:
    """Durations of several runs [s], after one that warms up."""
    run()
    durations = []
    for _ in range(repeats):
        start = time.perf_counter()
        run()
        durations.append(time.perf_counter() - start)
    return durations


def _simple(cells: Cell) -> Cell:
    """The same cells with nothing known but the figures of merit."""
    return Cell.of(
        gap=cells.gap, voc=cells.voc, jsc=cells.jsc, ff=cells.ff, temperature=cells.temperature,
        irradiance=cells.irradiance,
    )  # fmt: skip


def _brute_force(cells: Cell) -> tuple[float, list[dict[str, float]]]:
    """Seconds for all cells, and their losses; what does not depend on the cell is made ready beforehand."""
    rows = [{name: float(getattr(cells, name)[k]) for name in Cell.__dataclass_fields__} for k in range(cells.gap.size)]
    brute.incident("am15g")
    brute.light_above.cache_clear()
    start = time.perf_counter()
    losses = [brute.ledger_of(row, "am15g") for row in rows]
    return time.perf_counter() - start, losses


def _compare(brute_cells: int, repeats: int) -> dict[str, object]:
    cells = random_cells(MANY, AM15G, seed=1, irradiance=100.0)
    few = cells[:brute_cells]
    everything = _seconds(lambda: ledger_of(cells, AM15G), repeats)
    figures_of_merit = _seconds(lambda: ledger_of(_simple(cells), AM15G), repeats)
    one_cell = _seconds(lambda: ledger_of(cells[0], AM15G), 30)
    brute_seconds, losses = _brute_force(few)

    ledger = ledger_of(few, AM15G)
    for index, wanted in enumerate(losses):
        for key, loss in wanted.items():
            # Both sides did the same work: otherwise the ratio says nothing.
            assert float(ledger[key].loss[index]) == pytest.approx(loss, abs=1e-6), (index, key)

    fast, slow = statistics.median(everything) / MANY, brute_seconds / brute_cells
    return {
        "cells": MANY,
        "median_s_half_of_the_optional_figures_known": statistics.median(everything),
        "slowest_s_half_of_the_optional_figures_known": max(everything),
        "median_s_figures_of_merit_alone": statistics.median(figures_of_merit),
        "slowest_s_figures_of_merit_alone": max(figures_of_merit),
        "runs": repeats,
        "median_s_one_cell_a_call": statistics.median(one_cell),
        "brute_force_cells": brute_cells,
        "brute_force_s": brute_seconds,
        "brute_force_s_per_cell": slow,
        "ratio_per_cell": slow / fast,
    }


def _judge(key: str, figures: dict[str, object]) -> None:
    write("ledger", key, figures)
    ratio = figures["ratio_per_cell"]
    assert isinstance(ratio, float)
    assert ratio > LEAST_RATIO, f"the vectorised ledger is only {ratio:.0f} times as fast as brute force"


def test_ledgers_are_far_faster_than_brute_force() -> None:
    _judge("short", _compare(brute_cells=12, repeats=3))


@pytest.mark.slow
def test_ledgers_against_brute_force_for_1000_cells() -> None:
    _judge("long", _compare(brute_cells=1000, repeats=15))
