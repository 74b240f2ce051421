"""The changes a session can undergo. A command knows its name for the menu and turns one state into the next."""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import dataclass, replace
from typing import Protocol

from app.session.curves import Curves, Source
from app.session.fields import FIELD_BY_KEY
from app.session.stacks import StackReadings
from app.session.state import CellEntry, Choices, State, Value


class Command(Protocol):
    """A change that can be done and undone."""

    @property
    def name(self) -> str:
        """Name for the menu ("change of Voc")."""

    @property
    def merge(self) -> Hashable:
        """Commands of the same value in one gesture are one step of undo; None never merges."""

    def apply(self, state: State) -> State:
        """The state after the change."""


@dataclass(frozen=True)
class SetValue:
    """Change one number of a cell."""

    ident: int
    key: str
    value: Value

    @property
    def name(self) -> str:
        return f"change of {FIELD_BY_KEY[self.key].symbol}"

    @property
    def merge(self) -> Hashable:
        return ("value", self.ident, self.key)

    def apply(self, state: State) -> State:
        cell = state.cells[state.position(self.ident)]
        return state.with_cell(cell.with_value(self.key, self.value))


@dataclass(frozen=True)
class SetFigures:
    """Change several numbers of a cell at once, read off its curves, and the curves with them if they changed."""

    ident: int
    values: Mapping[str, Value]
    sources: Mapping[str, Source]
    curves: Curves | None = None
    label: str = "figures from a curve"

    @property
    def name(self) -> str:
        return self.label

    @property
    def merge(self) -> Hashable:
        return None

    def apply(self, state: State) -> State:
        cell = state.cells[state.position(self.ident)].with_figures(self.values, self.sources)
        return state.with_cell(cell if self.curves is None else replace(cell, curves=self.curves))


@dataclass(frozen=True)
class SetStacks:
    """Change what is known of a cell's partial stacks."""

    ident: int
    stacks: StackReadings

    @property
    def name(self) -> str:
        return "change of the partial stacks"

    @property
    def merge(self) -> Hashable:
        return ("stacks", self.ident)

    def apply(self, state: State) -> State:
        return state.with_cell(replace(state.cells[state.position(self.ident)], stacks=self.stacks))


@dataclass(frozen=True)
class Describe:
    """Change the name, group, note or spectrum of a cell; what is None stays."""

    ident: int
    cell_name: str | None = None
    group: str | None = None
    note: str | None = None
    spectrum: str | None = None

    @property
    def name(self) -> str:
        return "change of the spectrum" if self.spectrum is not None else "change of the name"

    @property
    def merge(self) -> Hashable:
        return None if self.spectrum is not None else ("describe", self.ident)

    def apply(self, state: State) -> State:
        given = {"name": self.cell_name, "group": self.group, "note": self.note, "spectrum": self.spectrum}
        changes = {key: value for key, value in given.items() if value is not None}
        cell = state.cells[state.position(self.ident)]
        return state.with_cell(replace(cell, **changes))  # type: ignore[arg-type]


@dataclass(frozen=True)
class AddCells:
    """Put cells on the shelf, behind the one on show, and show the first of them."""

    cells: tuple[CellEntry, ...]
    label: str = "new cell"

    @property
    def name(self) -> str:
        return self.label

    @property
    def merge(self) -> Hashable:
        return None

    def apply(self, state: State) -> State:
        fresh = tuple(replace(cell, ident=state.next_ident + k) for k, cell in enumerate(self.cells))
        if not fresh:
            return state
        at = len(state.cells) if state.picked is None else state.position(state.picked) + 1
        return replace(
            state,
            cells=(*state.cells[:at], *fresh, *state.cells[at:]),
            picked=fresh[0].ident,
            next_ident=state.next_ident + len(fresh),
        )


@dataclass(frozen=True)
class RemoveCell:
    """Take a cell off the shelf and show its neighbour."""

    ident: int

    @property
    def name(self) -> str:
        return "removal of a cell"

    @property
    def merge(self) -> Hashable:
        return None

    def apply(self, state: State) -> State:
        at = state.position(self.ident)
        left = (*state.cells[:at], *state.cells[at + 1 :])
        picked = state.picked
        if picked == self.ident:
            picked = left[min(at, len(left) - 1)].ident if left else None
        return replace(state, cells=left, picked=picked)


@dataclass(frozen=True)
class SetChoices:
    """Change a convention."""

    choices: Choices

    @property
    def name(self) -> str:
        return "change of the convention"

    @property
    def merge(self) -> Hashable:
        return None

    def apply(self, state: State) -> State:
        return replace(state, choices=self.choices)
