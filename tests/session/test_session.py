"""The session: every change can be undone, gestures are one step, and looking is no change."""

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.session.commands import AddCells, Command, Describe, RemoveCell, SetChoices, SetValue
from app.session.fields import FIELDS
from app.session.session import Session
from app.session.state import CellEntry, Choices, State, Unread


def _session(cells: int = 1) -> Session:
    return Session(AddCells(tuple(CellEntry(0, f"c{k}") for k in range(cells))).apply(State()))


_VALUES = st.one_of(st.none(), st.floats(0.1, 9.0), st.builds(Unread, st.text(max_size=4), st.just("no number")))


@st.composite
def _commands(draw: st.DrawFn, state: State) -> Command:
    idents = [cell.ident for cell in state.cells]
    kinds = ["add", "choices"] + (["value", "describe", "remove"] if idents else [])
    kind = draw(st.sampled_from(kinds))
    if kind == "add":
        return AddCells(tuple(CellEntry(0, draw(st.text(max_size=5))) for _ in range(draw(st.integers(0, 3)))))
    if kind == "choices":
        return SetChoices(Choices(draw(st.sampled_from(["log-mean", "ladder"])), draw(st.sampled_from([1, 2]))))
    ident = draw(st.sampled_from(idents))
    if kind == "value":
        return SetValue(ident, draw(st.sampled_from(FIELDS)).key, draw(_VALUES))
    if kind == "describe":
        return Describe(ident, cell_name=draw(st.text(max_size=5)), spectrum=draw(st.sampled_from([None, "am0"])))
    return RemoveCell(ident)


@settings(max_examples=150, deadline=None)
@given(st.data())
def test_undo_takes_back_everything_and_redo_brings_it_again(data: st.DataObject) -> None:
    session = _session(2)
    states = [session.state]
    for _ in range(data.draw(st.integers(1, 25))):
        before = session.state
        session.do(data.draw(_commands(before)))
        session.settle()
        if session.state != before:
            states.append(session.state)
    end = session.state
    for earlier in reversed(states[:-1]):
        session.undo()
        assert session.state == earlier
    assert session.undo_name == ""
    for later in states[1:]:
        session.redo()
        assert session.state == later
    assert session.state == end
    assert session.redo_name == ""


@pytest.mark.parametrize(
    "command",
    [
        SetValue(1, "voc", 1.1),
        SetValue(1, "ff", Unread("x", "no number")),
        Describe(1, cell_name="other"),
        Describe(1, note="n", group="g"),
        Describe(1, spectrum="am0"),
        AddCells((CellEntry(0, "new"), CellEntry(0, "newer"))),
        RemoveCell(1),
        SetChoices(Choices("ladder", 2)),
    ],
    ids=lambda c: type(c).__name__,
)
def test_each_command_do_undo_equal_to_before(command: Command) -> None:
    session = _session(2)
    before = session.state
    session.do(command)
    assert session.state != before
    assert session.undo_name == command.name != ""
    session.undo()
    assert session.state == before


def test_a_gesture_is_one_step_until_it_is_settled() -> None:
    session = _session()
    for k in range(20):
        session.do(SetValue(1, "voc", 1.0 + k / 100))
    session.settle()
    session.do(SetValue(1, "voc", 0.5))
    session.undo()
    assert session.state.cells[0].values["voc"] == 1.19
    session.undo()
    assert session.state.cells[0].values["voc"] is None
    assert session.undo_name == ""


def test_another_field_begins_another_step() -> None:
    session = _session()
    session.do(SetValue(1, "voc", 1.0))
    session.do(SetValue(1, "ff", 80.0))
    session.undo()
    assert session.state.cells[0].values["voc"] == 1.0
    assert session.state.cells[0].values["ff"] is None


def test_no_change_is_no_step() -> None:
    session = _session()
    calls: list[int] = []
    session.listen(lambda: calls.append(1))
    session.do(SetValue(1, "temperature", 25.0))
    session.do(AddCells(()))
    assert session.undo_name == ""
    assert calls == []


def test_looking_is_no_change() -> None:
    session = _session(2)
    session.pick(2)
    session.pick_line("current")
    assert session.undo_name == ""
    assert session.state.picked == 2
    with pytest.raises(KeyError):
        session.pick(99)


def test_undo_shows_the_cell_it_was_made_on_and_keeps_the_line() -> None:
    session = _session(2)
    session.pick(1)
    session.do(SetValue(1, "voc", 1.0))
    session.pick(2)
    session.pick_line("current")
    session.undo()
    assert session.state.picked == 1
    assert session.state.line == "current"


def test_steps_are_bounded() -> None:
    session = _session()
    for k in range(1500):
        session.do(SetValue(1, "voc", float(k + 1)))
        session.settle()
    steps = 0
    while session.undo_name:
        session.undo()
        steps += 1
    assert steps == 1000


def test_a_failing_command_changes_nothing() -> None:
    session = _session()
    before = session.state
    with pytest.raises(KeyError):
        session.do(SetValue(7, "voc", 1.0))
    assert session.state is before
    assert session.undo_name == ""


def test_identities_are_never_used_twice() -> None:
    session = _session()
    session.do(AddCells((CellEntry(0, "second"),)))
    first = session.state.picked
    session.undo()
    session.do(AddCells((CellEntry(0, "third"),)))
    assert session.state.picked not in (1, first)


def test_removing_shows_the_neighbour() -> None:
    session = _session(3)
    session.pick(2)
    session.do(RemoveCell(2))
    assert session.state.picked == 3
    session.do(RemoveCell(3))
    assert session.state.picked == 1
    session.do(RemoveCell(1))
    assert session.state.picked is None
    assert session.state.cell is None


def test_listeners_are_told_once_a_change() -> None:
    session = _session()
    calls: list[State] = []
    session.listen(lambda: calls.append(session.state))
    session.do(SetValue(1, "voc", 1.0))
    session.undo()
    session.redo()
    assert len(calls) == 3
    assert calls[0] == calls[2] == replace(calls[0])


def test_what_arrives_late_is_there_in_every_step() -> None:
    session = Session()
    session.do(AddCells((CellEntry(0, "a"), CellEntry(0, "b"))))
    first, second = session.state.cells
    session.do(SetValue(first.ident, "voc", 1.0))
    session.settle()
    session.do(SetValue(second.ident, "voc", 0.5))
    session.undo()
    seen = []
    session.listen(lambda: seen.append(session.state))
    session.amend(first.ident, lambda cell: cell.with_value("rs", 2.0))
    assert len(seen) == 1
    assert session.undo_name == "change of Voc"
    assert session.redo_name == "change of Voc"
    session.redo()
    assert [cell.values["rs"] for cell in session.state.cells] == [2.0, None]
    assert [cell.values["voc"] for cell in session.state.cells] == [1.0, 0.5]
    session.undo()
    session.undo()
    assert [cell.values["rs"] for cell in session.state.cells] == [2.0, None]
    assert session.state.cells[0].values["voc"] is None
    session.undo()
    assert session.state.cells == ()
    session.redo()
    assert session.state.cells[0].values["rs"] == 2.0
    session.amend(99, lambda cell: cell.with_value("rs", 3.0))  # of a cell that is no more
