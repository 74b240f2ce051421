"""What a session holds, as plain immutable data."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from types import MappingProxyType

from app.session.curves import NO_CURVES, Curves, Source
from app.session.fields import FIELDS
from app.session.stacks import NO_STACKS, StackReadings
from physics.attribution import Attribution
from physics.limit import Faces


@dataclass(frozen=True)
class Unread:
    """What was typed into a field but is no number, with the sentence about it."""

    text: str
    fault: str


#: A field holds a number [field's unit], nothing yet, or a text that could not be read.
Value = float | None | Unread


@dataclass(frozen=True)
class CellEntry:
    """A cell on the shelf.

    Parameters
    ----------
    ident : int
        Identity within the session; never used twice.
    name, group : str
        What the lab calls it.
    spectrum : str
        Short name of the illumination (`physics.spectrum.illumination`).
    values : mapping of str to Value
        One value for every field of `app.session.fields.FIELDS`.
    note : str
        Free text that goes into captions.
    curves : Curves
        What was measured of it beside single figures.
    sources : mapping of str to Source
        By field: where its value was read off, if it was not typed.
    stacks : StackReadings
        Luminescence of its partial stacks.
    """

    ident: int
    name: str
    group: str = ""
    spectrum: str = "am15g"
    values: Mapping[str, Value] = field(default_factory=lambda: EMPTY_VALUES)
    note: str = ""
    curves: Curves = NO_CURVES
    sources: Mapping[str, Source] = field(default_factory=lambda: TYPED)
    stacks: StackReadings = NO_STACKS

    def with_value(self, key: str, value: Value) -> CellEntry:
        """The same cell with one field typed anew."""
        return self.with_figures({key: value}, {})

    def with_figures(self, values: Mapping[str, Value], sources: Mapping[str, Source]) -> CellEntry:
        """The same cell with some fields changed, which then have these sources, or none."""
        kept = {key: source for key, source in self.sources.items() if key not in values}
        merged = MappingProxyType({**kept, **sources}) if kept or sources else TYPED
        return replace(self, values=MappingProxyType({**self.values, **values}), sources=merged)


TYPED: Mapping[str, Source] = MappingProxyType({})
EMPTY_VALUES: Mapping[str, Value] = MappingProxyType({f.key: f.default for f in FIELDS})


@dataclass(frozen=True)
class Choices:
    """Conventions that hold for the whole session."""

    attribution: Attribution = "log-mean"
    faces: Faces = 1


@dataclass(frozen=True)
class State:
    """Everything a session holds.

    Parameters
    ----------
    cells : tuple of CellEntry
        The shelf, in order.
    picked : int or None
        `ident` of the cell on show.
    line : str
        Key of the ledger line on show, or of a total.
    choices : Choices
    next_ident : int
        Identity for the next cell; it only grows, also through undo, and so is no part of a comparison.
    """

    cells: tuple[CellEntry, ...] = ()
    picked: int | None = None
    line: str = ""
    choices: Choices = Choices()
    next_ident: int = field(default=1, compare=False)

    def position(self, ident: int) -> int:
        """Index of a cell on the shelf; KeyError where there is none."""
        for index, cell in enumerate(self.cells):
            if cell.ident == ident:
                return index
        raise KeyError(ident)

    @property
    def cell(self) -> CellEntry | None:
        """The cell on show."""
        return None if self.picked is None else self.cells[self.position(self.picked)]

    def with_cell(self, cell: CellEntry) -> State:
        """The same state with one cell exchanged for another of the same identity."""
        index = self.position(cell.ident)
        return replace(self, cells=(*self.cells[:index], cell, *self.cells[index + 1 :]))
