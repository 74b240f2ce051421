"""The curve files of the demo cells: read without a question, in keeping with the figures, and plainly invented."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.cell_curves import CURVE_COLUMNS, merged, with_curves
from app.cells import Shelf, shelf_of
from app.files.tables import load_table
from app.session.appraisal import appraise
from app.session.curves import edge_for
from app.session.state import CellEntry, Choices
from physics.ledger import Ledger
from physics.lines import Section

_DEMO = Path(__file__).parents[2] / "resources" / "demo_cells.csv"
#: Slope of the absorption tail that each file says it was made with [meV], and its noise floor.
_TAILS = {"Plover 3": (14.5, 2e-6), "Curlew 5": (19.0, 1e-5), "Dunlin 2": (13.0, 3e-6), "Heron 1": (7.5, 1e-6)}


@pytest.fixture(scope="module")
def shelf() -> Shelf:
    return shelf_of(load_table(_DEMO), _DEMO.name)


@pytest.fixture(scope="module")
def filled(shelf: Shelf) -> dict[str, CellEntry]:
    """The cells with their curves, by name."""
    rows = zip(shelf.entries, shelf.rows, strict=True)
    return {entry.name: with_curves(entry, row, _DEMO.parent)[0] for entry, row in rows}


def _losses(entry: CellEntry) -> tuple[Ledger, dict[str, float]]:
    """The ledger of a cell, and its losses from the limit to the cell [mW cm⁻²]."""
    ledger = appraise(entry, Choices()).ledger
    assert ledger is not None
    present = (e for e in ledger.entries if e.present and e.line.section is Section.LIMIT_TO_CELL)
    return ledger, {e.line.key: float(e.loss) for e in present}


def _sum(losses: dict[str, float], *stems: str) -> float:
    return sum(loss for key, loss in losses.items() if key.startswith(stems))


_CURRENT = ("reflection", "uncollected", "sub_gap_current", "current")
_VOLTAGE = ("voltage", "nonradiative")


def test_every_file_is_named_and_says_that_it_is_invented(shelf: Shelf) -> None:
    named = {row[column] for row in shelf.rows for column in CURVE_COLUMNS if row[column]}
    assert named == {f"demo/{path.name}" for path in (_DEMO.parent / "demo").iterdir()}
    for name in named:
        text = (_DEMO.parent / name).read_text(encoding="utf-8")
        assert "invented" in text.splitlines()[0]
        assert "made from" in text.splitlines()[1]


def test_they_agree_with_the_figures(shelf: Shelf) -> None:
    with_sweeps = 0
    for entry, row in zip(shelf.entries, shelf.rows, strict=True):
        filled, faults, doubts = with_curves(entry, row, _DEMO.parent)
        assert (faults, doubts) == ([], []), entry.name
        appraisal = appraise(filled, Choices())
        assert appraisal.problems == (), entry.name
        assert appraisal.ledger is not None
        assert abs(float(appraisal.ledger.closure)) < 1e-9
        if filled.curves.eqe is None:
            continue
        with_sweeps += 1
        q = appraisal.ledger.quantities
        assert float(q.jsc_eqe + q.jsc_sub_gap) == pytest.approx(float(q.jsc), rel=0.03)
        # The fit describes the sweep that the typed figures come from.
        assert abs(float(q.ff_diode - q.ff)) < 0.005
    assert with_sweeps == 4


def test_curves_that_arrive_late_leave_what_was_typed(shelf: Shelf) -> None:
    before = shelf.entries[0]
    after = with_curves(before, shelf.rows[0], _DEMO.parent)[0]
    assert merged(before, before, after) == after
    typed = before.with_value("rs", 3.0)
    late = merged(typed, before, after)
    assert late.values["rs"] == 3.0
    assert "rs" not in late.sources
    assert late.values["ideality"] == after.values["ideality"]
    assert late.curves is after.curves
    assert np.isfinite(float(late.values["rsh"] or np.nan))  # type: ignore[arg-type]


def test_each_has_both_directions_and_one_has_a_dark_sweep(filled: dict[str, CellEntry]) -> None:
    with_sweeps = {name: entry.curves.sweeps for name, entry in filled.items() if entry.curves.sweeps}
    assert set(with_sweeps) == set(_TAILS)
    for sweeps in with_sweeps.values():
        assert [sweep.direction for sweep in sweeps if sweep.lit] == ["forward", "reverse"]
    assert [name for name, sweeps in with_sweeps.items() if not all(s.lit for s in sweeps)] == ["Dunlin 2"]
    assert [name for name, entry in filled.items() if entry.curves.reflectance is not None] == ["Plover 3", "Dunlin 2"]
    assert [name for name, entry in filled.items() if entry.curves.series is not None] == ["Dunlin 2"]


@pytest.mark.parametrize("name", _TAILS)
def test_each_eqe_has_its_tail_down_to_the_noise(filled: dict[str, CellEntry], name: str) -> None:
    slope, floor = _TAILS[name]
    curves = filled[name].curves
    assert curves.eqe is not None
    tail, faults = edge_for(curves.eqe).tail_at(298.15)
    assert faults == ()
    assert tail is not None
    # The collection changes with the photon energy, which the fit takes for slope: up to 1 meV.
    assert 1e3 * tail.slope == pytest.approx(slope, abs=1.0)
    assert np.all(np.abs(curves.eqe.value[-3:]) < 5.0 * floor)  # at the long end there is nothing but noise
    assert tail.anchor > floor
    assert curves.eqe.value.max() < 1.0
    if curves.reflectance is not None:
        assert np.all(curves.eqe.value + curves.reflectance.value < 1.0)


def test_a_perovskite_limited_by_recombination_then_by_series_resistance(filled: dict[str, CellEntry]) -> None:
    ledger, first = _losses(filled["Plover 3"])
    assert max(first, key=first.__getitem__) == "nonradiative"
    assert first["nonradiative"] > 0.5 * sum(first.values())
    _, mended = _losses(filled["Plover 8"])
    assert max(mended, key=mended.__getitem__) == "fill_series"
    assert mended["nonradiative"] < 0.6 * first["nonradiative"]
    assert float(ledger.cell.gap) == filled["Plover 8"].values["gap"]


def test_a_chalcopyrite_that_lacks_voltage(filled: dict[str, CellEntry]) -> None:
    _, losses = _losses(filled["Curlew 5"])
    assert max(losses, key=losses.__getitem__) == "nonradiative"
    assert _sum(losses, *_VOLTAGE) > max(_sum(losses, *_CURRENT), _sum(losses, "fill"))


def test_a_silicon_that_lacks_light(filled: dict[str, CellEntry]) -> None:
    _, losses = _losses(filled["Dunlin 2"])
    assert 0.45 < _sum(losses, *_CURRENT) / sum(losses.values()) < 0.55


def test_a_gallium_arsenide_close_to_its_limit(filled: dict[str, CellEntry]) -> None:
    shares = {}
    for name, entry in filled.items():
        ledger, losses = _losses(entry)
        shares[name] = sum(losses.values()) / (sum(losses.values()) + float(ledger.quantities.power))
    assert min(shares, key=shares.__getitem__) == "Heron 1"
    assert shares["Heron 1"] < 0.2


def test_an_organic_blend_that_lacks_fill_factor(filled: dict[str, CellEntry]) -> None:
    _, losses = _losses(filled["Teal 6"])
    assert _sum(losses, "fill") > max(_sum(losses, *_VOLTAGE), _sum(losses, *_CURRENT))
    assert losses["fill_shunt"] > 1.0
    assert losses["fill_ideality"] > 1.0
