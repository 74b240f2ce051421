"""Partial stacks as they are typed, and what the ledger takes of them."""

from __future__ import annotations

import numpy as np
import pytest

from app.files.numbers import NumberError
from app.session.appraisal import appraise
from app.session.commands import AddCells, SetStacks
from app.session.session import Session
from app.session.stacks import NO_STACKS, Reading, StackReadings, read_reading, read_suns, stacks_of
from app.session.state import EMPTY_VALUES, CellEntry, Choices

VALUES = {**EMPTY_VALUES, "gap": 1.6, "voc": 1.1, "jsc": 22.0, "ff": 79.0}


@pytest.mark.parametrize(
    ("text", "wanted"),
    [
        ("0.012", Reading(0.012)), ("1.2 %", Reading(0.012)), ("1,2%", Reading(0.012)), ("120 ppm", Reading(1.2e-4)),
        ("1e-4", Reading(1e-4)), ("1.18 V", Reading(1.18, "voltage")), ("1180 mV", Reading(1.18, "voltage")),
        ("1,18V", Reading(1.18, "voltage")), ("", None), ("  ", None),
    ],
)
def test_readings_as_typed(text: str, wanted: Reading | None) -> None:
    found = read_reading(text)
    if wanted is None:
        assert found is None
        return
    assert found is not None
    assert found.quantity == wanted.quantity
    assert found.value == pytest.approx(wanted.value, rel=1e-12)
    assert read_reading(found.text) == found


@pytest.mark.parametrize("text", ["0", "-0.1", "1.5", "120 %", "0 V", "-1 V", "7 V", "x", "1 mW", "1.1.1"])
def test_what_is_no_reading_is_told(text: str) -> None:
    with pytest.raises(NumberError) as told:
        read_reading(text)
    assert str(told.value).endswith(".")


def test_light_levels() -> None:
    assert read_suns("") == 1.0
    assert read_suns("0.1") == 0.1
    assert read_suns("10 suns") == 10.0
    assert read_suns("50 %") == 0.5
    for text in ("0", "-1", "bright"):
        with pytest.raises(NumberError):
            read_suns(text)


def _appraised(stacks: StackReadings) -> tuple[set[str], list[str]]:
    appraisal = appraise(CellEntry(1, "Cell", values=VALUES, stacks=stacks), Choices())
    assert appraisal.ledger is not None
    assert abs(float(appraisal.ledger.closure)) < 1e-9
    keys = {entry.line.key for entry in appraisal.ledger.entries if entry.present}
    return keys, [problem.message for problem in appraisal.problems if problem.field == "stacks"]


def test_the_ledger_is_split() -> None:
    keys, told = _appraised(StackReadings(Reading(0.02), (("a", Reading(0.002)), ("b", None)), Reading(6e-4)))
    assert {"nonradiative_bulk", "nonradiative_interface:a", "nonradiative_contact"} <= keys
    assert "nonradiative" not in keys
    assert "nonradiative_interface:b" not in keys  # nothing was measured with it
    assert told == []


@pytest.mark.parametrize(
    ("stacks", "words"),
    [
        (StackReadings(None, (), Reading(1e-3)), "bare absorber"),
        (StackReadings(Reading(1e-2)), "one stack more"),
        (StackReadings(Reading(1e-2), (), Reading(1e-3, suns=10.0)), "ideality"),
        (StackReadings(Reading(0.03), (("a", Reading(0.08)), ("b", Reading(0.09)))), "take away more recombination"),
    ],
)
def test_what_splits_nothing_is_told_and_the_ledger_stands(stacks: StackReadings, words: str) -> None:
    keys, told = _appraised(stacks)
    assert "nonradiative" in keys
    assert len(told) == 1
    assert words in told[0]


def test_other_light_levels_are_brought_to_one_sun() -> None:
    given = StackReadings(Reading(1e-2, suns=10.0), (), Reading(1.05, "voltage", 0.1), ideality=1.5)
    stacks = stacks_of(given, 298.15)
    assert stacks is not None
    assert stacks.rescaled
    assert float(stacks.bare.fraction) == pytest.approx(1e-2 * 10.0**-0.5, rel=1e-12)
    assert stacks.finished is not None
    vt = 1.380649e-23 * 298.15 / 1.602176634e-19
    assert float(stacks.finished.voltage) == pytest.approx(1.05 + 1.5 * vt * np.log(10.0), abs=1e-12)


def test_names_are_plain_and_each_stands_once() -> None:
    rough = (("a\x00b", Reading(1e-3)), ("", Reading(1e-3)), ("a b", Reading(1e-3)), ("x" * 80, Reading(1e-3)))
    stacks = stacks_of(StackReadings(Reading(1e-2), rough), 298.15)
    assert stacks is not None
    names = [name for name, _ in stacks.contacts]
    assert names[:3] == ["a b", "contact 2", "a b′"]
    assert len(names[3]) == 40


def test_a_change_of_stacks_can_be_undone() -> None:
    session = Session(AddCells((CellEntry(0, "Cell", values=VALUES),)).apply(Session().state))
    ident = session.state.picked
    assert ident is not None
    session.do(SetStacks(ident, StackReadings(Reading(0.02))))
    assert session.undo_name == "change of the partial stacks"
    session.undo()
    assert session.state.cell is not None
    assert session.state.cell.stacks == NO_STACKS
