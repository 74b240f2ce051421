"""Sessions as text: what was written is read back to the last bit, and nothing else is read."""

from __future__ import annotations

import json
import random
from pathlib import Path

import jsonschema
import numpy as np
import pytest
from hypothesis import given, settings

from app.cell_curves import with_curves
from app.cells import shelf_of
from app.files.tables import load_table
from app.session.commands import AddCells
from app.session.curves import Curves
from app.session.document import FORMAT, VERSION, from_text, to_text
from app.session.document_reader import DocumentError
from app.session.state import CellEntry, State

from .states import states

_ROOT = Path(__file__).parents[2]
_SCHEMA = json.loads((_ROOT / "resources" / f"session-{VERSION}.schema.json").read_text(encoding="utf-8"))
_OLD = _ROOT / "tests" / "data" / "sessions"


def _arrays(curves: Curves) -> list[np.ndarray]:
    found = [array for sweep in curves.sweeps for array in (sweep.voltage, sweep.current)]
    for curve in (curves.eqe, curves.reflectance):
        found += [] if curve is None else [curve.wavelength, curve.value]
    return found + ([] if curves.series is None else [curves.series.jsc, curves.series.voc])


def same(one: CellEntry, other: CellEntry) -> bool:
    """Whether two cells are alike to the last bit, signs of zero included."""
    plain = all(
        getattr(one, name) == getattr(other, name)
        for name in ("ident", "name", "group", "spectrum", "note", "values", "sources", "stacks")
    )
    labels = [[(s.label, s.direction, s.lit) for s in each.curves.sweeps] for each in (one, other)]
    pairs = zip(_arrays(one.curves), _arrays(other.curves), strict=True)
    return plain and labels[0] == labels[1] and all(a.tobytes() == b.tobytes() for a, b in pairs)


@pytest.fixture(scope="module")
def demo() -> State:
    table = _ROOT / "resources" / "demo_cells.csv"
    shelf = shelf_of(load_table(table), table.name)
    filled = (with_curves(entry, row, table.parent)[0] for entry, row in zip(shelf.entries, shelf.rows, strict=True))
    return AddCells(tuple(filled)).apply(State())


@settings(deadline=None, max_examples=150)
@given(states())
def test_what_was_written_is_read_back(state: State) -> None:
    text = to_text(state, "test")
    jsonschema.validate(json.loads(text), _SCHEMA)
    back = from_text(text)
    assert (back.picked, back.line, back.choices) == (state.picked, state.line, state.choices)
    assert len(back.cells) == len(state.cells)
    assert all(same(a, b) for a, b in zip(back.cells, state.cells, strict=True))
    assert to_text(back, "test") == text


def test_a_changed_number_changes_one_line(demo: State) -> None:
    before = to_text(demo).splitlines()
    after = to_text(demo.with_cell(demo.cells[1].with_value("voc", 1.19))).splitlines()
    assert sum(a != b for a, b in zip(before, after, strict=True)) == 1


def test_big_curves_stay_reasonable(demo: State) -> None:
    points = sum(array.size for cell in demo.cells for array in _arrays(cell.curves))
    assert len(to_text(demo)) < 12 * points + 20_000


@pytest.mark.parametrize("path", sorted(_OLD.glob("*.gapledger")), ids=lambda path: path.name)
def test_earlier_forms_are_read(path: Path) -> None:
    state = from_text(path.read_text(encoding="utf-8"))
    assert [cell.name for cell in state.cells] == ["Plover 3", "Plover 8"]
    assert state.cells[0].curves.eqe is not None
    assert state.cells[0].stacks.bare is not None
    assert state.cells[0].sources["ideality"] == "fit"


def test_there_is_a_file_of_this_form() -> None:
    assert (_OLD / f"form-{VERSION}.gapledger").exists()


_BAD = {
    "": "damaged",
    "{": "damaged",
    "[]": "no session of Gapledger",
    '"x"': "no session of Gapledger",
    "{}": "is missing",
    '{"format": "another"}': "no session of Gapledger",
    "[" * 100_000: "nested too deep",
    '{"a":' * 50_000: "nested too deep",
    '{"format": "gapledger session", "version": 2}': "newer version",
    '{"format": "gapledger session", "version": 1, "version": 1}': "stands twice",
    '{"format": "gapledger session", "version": true}': "a whole number was expected",
    '{"format": "gapledger session", "version": NaN}': "NaN is no number",
}


@pytest.mark.parametrize("text", _BAD, ids=range(len(_BAD)))
def test_what_is_no_session_is_told(text: str) -> None:
    with pytest.raises(DocumentError, match=_BAD[text]) as told:
        from_text(text)
    assert str(told.value).endswith(".")
    assert "\n" not in str(told.value)


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ('"gap": 1.6', '"gap": 1e999', "values.gap, the number is out of range"),
        ('"gap": 1.6', '"gap": "1.6"', "values.gap, a number was expected"),
        ('"gap": 1.6', '"gap": true', "values.gap, a number was expected"),
        ('"gap": 1.6', '"gab": 1.6', "“gab” is not known here"),
        ('"gap": 1.6', '"gap": -Infinity', "Infinity is no number"),
        ('"faces": 1', '"faces": true', "choices.faces, one of 1, 2"),
        ('"picked": 0', '"picked": 6', "picked, the number is out of range"),
        ('"direction": "forward"', '"direction": "sideways"', "sweeps[0].direction"),
        ('"lit": true', '"lit": 1', "sweeps[0].lit"),
        ("300.0, 305.0", "300.0, 299.0", "rise from point to point"),
        ("300.0, 305.0", "305.0", "must be of one length"),
        ("300.0, 305.0", '300.0, "x"', "a list of numbers was expected"),
        ('"ideality": "fit"', '"ideality": "guess"', "sources.ideality"),
        ('"name": "Plover 3"', '"name": 3', "cells[0].name, a text was expected"),
        ('"name": "Plover 3"', '"name": "\\ud800"', "half a character"),
        ('"name": "Plover 3"', f'"name": "{"x" * 1001}"', "longer than 1000"),
    ],
)
def test_the_place_of_a_fault_is_told(demo: State, old: str, new: str, words: str) -> None:
    text = to_text(demo)
    assert old in text
    with pytest.raises(DocumentError) as told:
        from_text(text.replace(old, new, 1))
    assert words in str(told.value)


def mutated(text: str, chance: random.Random) -> str:
    """The text with a few things broken."""
    for _ in range(chance.choice([1, 1, 2, 5, 20])):
        at, kind = chance.randrange(len(text) + 1), chance.randrange(5)
        if kind == 0:
            text = text[:at] + chance.choice('[]{}",:0x-e.\\\x00é') + text[at:]
        elif kind == 1:
            text = text[:at] + text[at + chance.randrange(1, 9) :]
        elif kind == 2:
            text = text[: at + 1]
        elif kind == 3:
            end = at + chance.randrange(1, 400)
            text = text[:at] + text[at:end] * 2 + text[end:]
        else:
            text = text[:at] + chance.choice(["null", "1e999", "NaN", "true", "[[[[", '{"a":1}', "9" * 500]) + text[at:]
    return text


def _fuzz(text: str, count: int, seed: int) -> tuple[int, int]:
    read = refused = 0
    for k in range(count):
        chance = random.Random(f"{seed} {k}")
        try:
            from_text(mutated(text, chance))
            read += 1
        except DocumentError:
            refused += 1
    return read, refused


def test_mutated_sessions(demo: State) -> None:
    read, refused = _fuzz(to_text(demo), 400, 1)
    assert refused > 200
    assert read + refused == 400


@pytest.mark.slow
def test_many_mutated_sessions(demo: State) -> None:
    read, refused = _fuzz(to_text(demo), 30_000, 2)
    print(f"mutated sessions: {read} read, {refused} refused")
    assert read + refused == 30_000


def test_every_cut_of_a_document_is_refused(demo: State) -> None:
    text = to_text(AddCells((demo.cells[0],)).apply(State()))
    for at in range(0, len(text.rstrip()) - 1, 7):
        with pytest.raises(DocumentError):
            from_text(text[:at])


def test_the_format_names_itself() -> None:
    assert _SCHEMA["properties"]["format"]["const"] == FORMAT
