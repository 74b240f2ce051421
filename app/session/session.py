"""The session: its state, how it changes, and who is told."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from app.session.commands import Command
from app.session.state import CellEntry, State

_DEEPEST = 1000  # steps of undo that are kept; states share all they have in common, so a step is small


@dataclass(frozen=True)
class Step:
    """One change that can be undone."""

    name: str
    merge: object
    before: State
    after: State


class Session:
    """Holds the state. Every change goes through `do` and can be undone.

    Listeners are called without arguments after each change of the state.
    """

    def __init__(self, state: State | None = None) -> None:
        self._state = state or State()
        self._done: list[Step] = []
        self._undone: list[Step] = []
        self._gesture_open = False
        self._listeners: list[Callable[[], None]] = []

    @property
    def state(self) -> State:
        """What the session holds now."""
        return self._state

    def listen(self, listener: Callable[[], None]) -> None:
        """Call `listener` after each change."""
        self._listeners.append(listener)

    def do(self, command: Command) -> None:
        """Carry out a command. It counts for undo only after it succeeded and where it changed something."""
        before = self._state
        after = command.apply(before)
        if after == before:
            return
        step = Step(command.name, command.merge, before, after)
        last = self._done[-1] if self._done else None
        if self._gesture_open and last is not None and step.merge is not None and last.merge == step.merge:
            self._done[-1] = replace(last, after=after)
        else:
            self._done.append(step)
            del self._done[:-_DEEPEST]
        self._gesture_open = True
        self._undone.clear()
        self._become(after)

    def amend(self, ident: int, change: Callable[[CellEntry], CellEntry]) -> None:
        """Change a cell now and in all steps that can be undone or done again, as if it had always been so.

        For what was asked for before and arrives only now. The change must depend on the cell alone.
        """
        known: dict[int, tuple[CellEntry, CellEntry]] = {}

        def amended(state: State) -> State:
            for cell in state.cells:
                if cell.ident == ident:
                    if id(cell) not in known:
                        known[id(cell)] = (cell, change(cell))
                    return state.with_cell(known[id(cell)][1])
            return state

        for steps in (self._done, self._undone):
            steps[:] = [replace(step, before=amended(step.before), after=amended(step.after)) for step in steps]
        self._become(amended(self._state))

    def settle(self) -> None:
        """End a gesture (a slider drag, a visit to a field): what follows is a new step of undo."""
        self._gesture_open = False

    def pick(self, ident: int) -> None:
        """Show another cell. Looking is no change, so it is no step of undo. KeyError for an unknown cell."""
        self._state.position(ident)
        self.settle()
        self._become(replace(self._state, picked=ident))

    def pick_line(self, key: str) -> None:
        """Show how another line was found."""
        self._become(replace(self._state, line=key))

    def start_with(self, state: State) -> None:
        """Take another state from outside, such as an opened session; there is nothing to undo in it."""
        self._done.clear()
        self._undone.clear()
        self.settle()
        # Identities are never used twice: those of the new cells follow on those of the cells that were here before.
        shift = self._state.next_ident - 1
        cells = tuple(replace(cell, ident=cell.ident + shift) for cell in state.cells)
        picked = None if state.picked is None else state.picked + shift
        if picked is None and cells:
            picked = cells[0].ident
        self._become(replace(state, cells=cells, picked=picked, next_ident=state.next_ident + shift))

    def start_here(self) -> None:
        """Forget the steps so far: what was opened at the start is nothing to undo, and the first cell is on show."""
        self._done.clear()
        self._undone.clear()
        if self._state.cells:
            self.pick(self._state.cells[0].ident)

    @property
    def undo_name(self) -> str:
        """Name of what `undo` would take back, or an empty text."""
        return self._done[-1].name if self._done else ""

    @property
    def redo_name(self) -> str:
        """Name of what `redo` would do again, or an empty text."""
        return self._undone[-1].name if self._undone else ""

    def undo(self) -> None:
        """Take back the last change, and show the cell it was made on."""
        if self._done:
            step = self._done.pop()
            self._undone.append(step)
            self._travel(step.before)

    def redo(self) -> None:
        """Do again what was taken back last."""
        if self._undone:
            step = self._undone.pop()
            self._done.append(step)
            self._travel(step.after)

    def _travel(self, state: State) -> None:
        self.settle()
        highest = max(state.next_ident, self._state.next_ident)
        self._become(replace(state, line=self._state.line, next_ident=highest))

    def _become(self, state: State) -> None:
        if state == self._state:
            return
        self._state = state
        for listener in tuple(self._listeners):
            listener()
