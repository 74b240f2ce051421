"""The curve files of the demo cells: read without a question, in keeping with the figures, and plainly invented."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.cell_curves import CURVE_COLUMNS, merged, with_curves
from app.cells import Shelf, shelf_of
from app.files.tables import load_table
from app.session.appraisal import appraise
from app.session.state import Choices

_DEMO = Path(__file__).parents[2] / "resources" / "demo_cells.csv"


@pytest.fixture(scope="module")
def shelf() -> Shelf:
    return shelf_of(load_table(_DEMO), _DEMO.name)


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
