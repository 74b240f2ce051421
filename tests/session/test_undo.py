"""Whatever is done can be undone and done again, in any order of any commands."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.strategies import DataObject

from app.session.commands import (
    AddCells,
    Command,
    Describe,
    RemoveCell,
    SetChoices,
    SetFigures,
    SetStacks,
    SetValue,
)
from app.session.document import to_text
from app.session.fields import FIELDS
from app.session.session import Session
from app.session.state import Choices, State

from .states import TEXTS, cells, curves, stacks, states, values

_KEYS = [field.key for field in FIELDS]
_KINDS = ("value", "figures", "stacks", "describe", "add", "remove", "choices")


def _drawn(data: DataObject, state: State, kind: str) -> Command:
    """A command of a kind that fits the state."""
    if kind == "add" or (not state.cells and kind != "choices"):
        return AddCells(tuple(data.draw(st.lists(cells(), min_size=1, max_size=3))))
    if kind == "choices":
        attribution, faces = st.sampled_from(["log-mean", "ladder"]), st.sampled_from([1, 2])
        return SetChoices(Choices(data.draw(attribution), data.draw(faces)))
    ident = data.draw(st.sampled_from([cell.ident for cell in state.cells]))
    if kind == "value":
        return SetValue(ident, data.draw(st.sampled_from(_KEYS)), data.draw(values()))
    if kind == "figures":
        figures = data.draw(st.dictionaries(st.sampled_from(_KEYS), values(), max_size=4))
        return SetFigures(ident, figures, dict.fromkeys(figures, "fit"), data.draw(st.none() | curves()))
    if kind == "stacks":
        return SetStacks(ident, data.draw(stacks()))
    if kind == "describe":
        return Describe(ident, *(data.draw(st.none() | TEXTS) for _ in range(3)), data.draw(st.none() | st.just("am0")))
    return RemoveCell(ident)


@settings(deadline=None, max_examples=120)
@given(states(), st.lists(st.sampled_from(_KINDS), min_size=1, max_size=12), st.data())
def test_done_undone_and_done_again(start: State, kinds: list[str], data: DataObject) -> None:
    session = Session(start)
    first = to_text(session.state)
    texts = [first]
    for kind in kinds:
        command = _drawn(data, session.state, kind)
        before = to_text(session.state)
        session.settle()
        session.do(command)
        after = to_text(session.state)
        if after == before:
            continue
        assert session.undo_name == command.name
        session.undo()
        assert to_text(session.state) == before
        assert session.redo_name == command.name
        session.redo()
        assert to_text(session.state) == after
        texts.append(after)
    for text in reversed(texts[:-1]):
        session.undo()
        assert to_text(session.state) == text
    assert to_text(session.state) == first
    assert session.undo_name == ""
    for text in texts[1:]:
        session.redo()
        assert to_text(session.state) == text
    assert session.redo_name == ""


@settings(deadline=None, max_examples=40)
@given(states(), st.lists(st.floats(0.1, 2.0), min_size=2, max_size=20))
def test_a_drag_is_one_step(start: State, drag: list[float]) -> None:
    session = Session(start)
    if not start.cells:
        return
    before, ident = to_text(session.state), start.cells[0].ident
    for value in drag:
        session.do(SetValue(ident, "voc", value))
    session.settle()
    session.undo()
    assert to_text(session.state) == before
    assert session.undo_name == ""
