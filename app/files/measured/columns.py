"""Which column is what, from the words and units above it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from app.files.measured.magnitudes import alike, counts_up
from app.files.measured.model import Block, Column
from app.files.measured.reading import Kind
from app.files.measured.units import Unit, find_unit
from app.files.measured.words import Quantity, word_quantity

_BY_UNIT: dict[str, Quantity] = {
    "voltage": "voltage", "current": "current", "density": "density", "wavelength": "wavelength", "energy": "energy",
    "responsivity": "responsivity", "irradiance": "irradiance",
}  # fmt: skip
_CURRENTS: tuple[Quantity, ...] = ("current", "density")
_SPECTRAL: tuple[Quantity, ...] = ("eqe", "reflectance", "responsivity")


@dataclass(frozen=True)
class Seen:
    """A column with what its words and its unit say."""

    column: Column
    quantity: Quantity
    unit: Unit | None

    @property
    def name(self) -> str:
        """The words above it, those that span several columns too."""
        return f"{self.column.group} {self.column.name}".strip()


@dataclass(frozen=True)
class Pairing:
    """What a block is: pairs of x and y."""

    kind: Kind
    pairs: tuple[tuple[Seen, Seen], ...]
    by_numbers: bool = False


def seen(column: Column) -> Seen:
    """Tell the quantity of a column by its unit, or by its words where they are more precise."""
    unit = find_unit(column.unit)
    words = word_quantity(column.name)
    if unit is None or unit.dimension == "fraction":
        if unit is not None and words not in ("eqe", "reflectance"):
            words = "other" if words else "eqe"
        return Seen(column, words, unit)
    by_unit = _BY_UNIT[unit.dimension]
    if words in ("jsc", "voc"):
        fits = by_unit in (_CURRENTS if words == "jsc" else ("voltage",))
        return Seen(column, words if fits else by_unit, unit)
    return Seen(column, "other" if words == "other" else by_unit, unit)


def pairing(block: Block, wanted: Kind | None = None) -> Pairing:
    """Pair the columns of a block, as a certain kind of measurement where one is wanted."""
    columns = [seen(column) for column in block.columns if np.isfinite(column.values).any()]
    for kind, find in (("jv", _jv), ("spectral", _spectral), ("intensity", _intensity)):
        pairs = find(columns)
        if pairs and wanted in (None, _kind_of(kind, pairs)):
            return Pairing(_kind_of(kind, pairs), tuple(pairs))
    found = _by_numbers(columns)
    return found if wanted is None or not found.pairs else replace(found, kind=wanted)


def _kind_of(found: str, pairs: Sequence[tuple[Seen, Seen]]) -> Kind:
    if found == "spectral":
        by_numbers = not pairs[0][1].quantity and _kind_by_numbers(*pairs[0]) == "spectrum"
        return "spectrum" if by_numbers or pairs[0][1].quantity == "irradiance" else "eqe"
    return "intensity" if found == "intensity" else "jv"


def _each_with_its(
    columns: Sequence[Seen], x: Sequence[Quantity], y: Sequence[Quantity]
) -> list[tuple[Seen, list[Seen]]]:
    """Give every y column to the nearest x column in front of it, or to the first where none is."""
    axes = [column for column in columns if column.quantity in x]
    others = [column for column in columns if column.quantity in y]
    if len(axes) == len(others) and all(o.column.index < a.column.index for o, a in zip(others, axes, strict=True)):
        return [(axis, [other]) for axis, other in zip(axes, others, strict=True)]  # current first, then voltage
    found: list[tuple[Seen, list[Seen]]] = [(axis, []) for axis in axes]
    for column in others:
        if axes:
            before = [place for place, axis in enumerate(axes) if axis.column.index < column.column.index]
            found[before[-1] if before else 0][1].append(column)
    return [entry for entry in found if entry[1]]


def _jv(columns: Sequence[Seen]) -> list[tuple[Seen, Seen]]:
    pairs = []
    for axis, currents in _each_with_its(columns, ["voltage"], _CURRENTS):
        # Where density and current stand side by side they are one measurement twice: the density needs no area.
        densities = [column for column in currents if column.quantity == "density"]
        pairs += [(axis, column) for column in densities or currents]
    return pairs


def _spectral(columns: Sequence[Seen]) -> list[tuple[Seen, Seen]]:
    axes: list[Quantity] = ["wavelength"] if any(c.quantity == "wavelength" for c in columns) else ["energy"]
    for wanted in (_SPECTRAL, ("irradiance",)):
        pairs = []
        for axis, found in _each_with_its(columns, axes, wanted):
            efficiencies = [column for column in found if column.quantity != "responsivity"]
            pairs += [(axis, column) for column in efficiencies or found]
        if pairs:
            return pairs
    unnamed = [column for column in columns if not column.quantity]
    return [(axis, column) for axis in columns if axis.quantity in axes for column in unnamed][: len(unnamed)]


def _intensity(columns: Sequence[Seen]) -> list[tuple[Seen, Seen]]:
    currents = [column for column in columns if column.quantity == "jsc"]
    voltages = [column for column in columns if column.quantity == "voc"]
    if not currents:
        currents = [column for column in columns if column.quantity in _CURRENTS]
    if not voltages:
        voltages = [column for column in columns if column.quantity == "voltage"]
    return list(zip(currents, voltages, strict=False))


def _by_numbers(columns: Sequence[Seen]) -> Pairing:
    """Pair columns of no known name: V, J, V, J where every second looks like the first, else one x and all others."""
    named = [column for column in columns if column.quantity in ("voltage", "wavelength", "energy")]
    rest = [column for column in columns if column.quantity != "other"]
    if not named and len(rest) > 2 and counts_up(rest[0].column.values):
        rest = rest[1:]
    if len(rest) < 2:
        return Pairing("unknown", ())
    first = named[0] if named else rest[0]
    others = [column for column in rest if column is not first]
    axes = rest[::2]
    pairs = [(first, column) for column in others]
    if len(rest) % 2 == 0 and len(rest) > 2 and all(alike(rest[0].column.values, axis.column.values) for axis in axes):
        pairs = list(zip(axes, rest[1::2], strict=True))
    return Pairing(_kind_by_numbers(*pairs[0]), tuple(pairs), by_numbers=True)


def _kind_by_numbers(x: Seen, y: Seen) -> Kind:
    both = np.isfinite(x.column.values) & np.isfinite(y.column.values)
    if np.count_nonzero(both) < 2:
        return "unknown"
    xs, ys = x.column.values[both], y.column.values[both]
    if x.quantity == "voltage":
        return "jv"
    if xs.min() >= 150 and xs.max() <= 5000 and np.ptp(xs) >= 10 and ys.min() > -0.2 * max(abs(ys.max()), 1e-9):
        is_sunlight = xs.max() > 1800 and ys.max() < 5
        return "spectrum" if is_sunlight else "eqe" if ys.max() <= 150 else "unknown"
    if np.abs(xs).max() <= 10 or (xs.min() < 0 and np.abs(xs).max() < 5000):
        return "jv"
    return "unknown"
