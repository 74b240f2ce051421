"""The ledger: every line from the sunlight to the cell, adding up exactly."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from weakref import WeakKeyDictionary

import numpy as np

from physics.attribution import Attribution
from physics.cell import Cell
from physics.diode import Diode
from physics.limit import Faces, Limit, detailed_balance_limit
from physics.lines import LINES, Form, Line, Section
from physics.quantities import Quantities, quantities_of
from physics.spectrum import Illumination
from physics.stack_lines import lines_with
from physics.stacks import Stacks
from physics.units import Array, Indices, Mask


@dataclass(frozen=True, eq=False)
class Entry:
    """One line worked out for all cells.

    Parameters
    ----------
    line : Line
        What the line is.
    delta : ndarray
        Change of the line's factor, positive for a loss [unit of the factor]; 0 where the cell has no such line.
    loss : ndarray
        Power that the change costs [mW cm⁻²].
    form : ndarray of int
        Index into `line.forms` of the form used, −1 where the cell has no such line.
    """

    line: Line
    delta: Array
    loss: Array
    form: Indices

    @property
    def present(self) -> Mask:
        """Which cells have this line."""
        return self.form >= 0

    def form_at(self, index: tuple[int, ...] | int = ()) -> Form | None:
        """The form used for the cell at `index`, or None where it has no such line."""
        chosen = int(self.form[index])
        return self.line.forms[chosen] if chosen >= 0 else None


@dataclass(frozen=True, eq=False)
class Ledger:
    """Where the watts of a cell went.

    Parameters
    ----------
    cell : Cell
        The measured cells.
    limit : Limit
        Their limits.
    quantities : Quantities
        Every number that the lines are made of.
    entries : tuple of Entry
        In the order of `physics.lines.LINES`, or of `physics.stack_lines.lines_with`.
    attribution : {"log-mean", "ladder"}
        Convention that was used.
    """

    cell: Cell
    limit: Limit
    quantities: Quantities
    entries: tuple[Entry, ...]
    attribution: Attribution

    def __getitem__(self, key: str) -> Entry:
        """The entry of the line called `key`; KeyError where there is none."""
        for entry in self.entries:
            if entry.line.key == key:
                return entry
        raise KeyError(key)

    def __contains__(self, key: str) -> bool:
        """Whether there is a line called `key`."""
        return any(entry.line.key == key for entry in self.entries)

    @cached_property
    def diode(self) -> Diode:
        """The cells' curves with the resistances that are known, and n = 1."""
        cell = self.cell
        rs = np.where(np.isnan(cell.rs), 0.0, cell.rs)
        rsh = np.where(np.isnan(cell.rsh), np.inf, cell.rsh)
        return Diode.through(cell.voc, cell.jsc, cell.temperature, 1.0, rs, rsh)

    @property
    def efficiency(self) -> Array:
        """Power of the cell over incident power."""
        return self.cell.power / self.limit.incident

    @property
    def ere(self) -> Array:
        """External radiative efficiency: measured, or exp((Voc − Voc_rad)/Vt) by reciprocity (Rau 2007)."""
        q = self.quantities
        return np.where(np.isnan(q.ere), q.ere_reciprocal, q.ere)

    @property
    def closure(self) -> Array:
        """Incident power less all lines less the power of the cell [mW cm⁻²]: rounding alone."""
        return self.limit.incident - sum(e.loss for e in self.entries) - self.cell.power

    def factors(self) -> dict[str, tuple[Array, Array]]:
        """The product behind the sums, for the limit and for the cell.

        Efficiency = ultimate efficiency × gap utilisation (q Voc/Eg) × fill factor × collection (Jsc/J_lim).

        Returns
        -------
        dict of str to (ndarray, ndarray)
            By name: value of the limit, value of the cell.
        """
        limit, cell = self.limit, self.cell
        ultimate = limit.ultimate_efficiency
        return {
            "ultimate efficiency": (ultimate, ultimate),
            "gap utilisation": (limit.voc / limit.gap, cell.voc / limit.gap),
            "fill factor": (limit.ff, cell.ff),
            "collection": (np.ones_like(limit.jsc), cell.jsc / limit.jsc),
        }


#: The index of a form for a single cell, and no loss: made once, because a ledger of one cell is made at each tick.
_ONE_CELL = {index: np.array(index, dtype=np.intp) for index in range(-1, 8)}
_NOTHING = np.zeros(())
for _constant in (*_ONE_CELL.values(), _NOTHING):
    _constant.flags.writeable = False


_TO_LIMIT = tuple(line for line in LINES if line.section is Section.SUN_TO_LIMIT)


def _to_cell(lines: tuple[Line, ...]) -> tuple[Line, ...]:
    return tuple(line for line in lines if line.section is Section.LIMIT_TO_CELL)


_TO_CELL = _to_cell(LINES)
#: Lines down to the limit of a single cell: they stay while the cell's own figures change.
_KNOWN: WeakKeyDictionary[Limit, tuple[Entry, ...]] = WeakKeyDictionary()


def _work_out(line: Line, q: Quantities) -> Entry:
    """One line for all cells: the first form that applies to a cell gives its Δ."""
    shape = q.incident.shape
    if not shape:
        return _work_out_one(line, q)
    used: list[tuple[int, Mask]] = []
    for index, option in enumerate(line.forms):
        mask = None if option.applies is None else option.applies(q)
        if mask is None or mask.all():
            if not used:  # by far the most frequent case, and the quickest
                return _with_form(line, q, index, np.full(shape, index, dtype=np.intp))
            used.append((index, np.ones(shape, dtype=bool)))
            break
        if mask.any():
            used.append((index, mask))
    delta, form = np.zeros(shape), np.full(shape, -1, dtype=np.intp)
    if not used:
        return Entry(line, delta, delta, form)
    for index, mask in reversed(used):  # an earlier form overrules a later one
        delta = np.where(mask, line.forms[index].delta(q), delta)
        form = np.where(mask, index, form)
    return Entry(line, delta, line.factor.weight(q) * delta, form)


def _with_form(line: Line, q: Quantities, index: int, form: Indices) -> Entry:
    """A line whose Δ is found in the same way for all cells."""
    delta = line.forms[index].delta(q)
    return Entry(line, delta, line.factor.weight(q) * delta, form)


def _work_out_one(line: Line, q: Quantities) -> Entry:
    """One line for a single cell, without the masks: that is what a slider waits for."""
    for index, option in enumerate(line.forms):
        if option.applies is None or option.applies(q):
            return _with_form(line, q, index, _ONE_CELL[index])
    return Entry(line, _NOTHING, _NOTHING, _ONE_CELL[-1])


def ledger_against(
    cell: Cell, limit: Limit, attribution: Attribution = "log-mean", stacks: Stacks | None = None
) -> Ledger:
    """Ledger of cells against limits of the same shape that are at hand already; see `ledger_of`."""
    to_cell = _TO_CELL if stacks is None else _to_cell(lines_with(stacks, attribution))
    with np.errstate(invalid="ignore", divide="ignore"):
        q = quantities_of(cell, limit, attribution, stacks)
        known = _KNOWN.get(limit) if not q.incident.shape else None
        down_to_limit = known or tuple(_work_out(line, q) for line in _TO_LIMIT)
        if known is None and not q.incident.shape:
            _KNOWN[limit] = down_to_limit
        entries = (*down_to_limit, *(_work_out(line, q) for line in to_cell))
        return Ledger(cell, limit, q, entries, attribution)


def ledger_of(
    cell: Cell,
    light: Illumination,
    attribution: Attribution = "log-mean",
    faces: Faces = 1,
    stacks: Stacks | None = None,
) -> Ledger:
    """Ledger of measured cells against the detailed-balance limits of their gaps.

    Parameters
    ----------
    cell : Cell
        One cell or an array of them.
    light : Illumination
        Spectrum under which they were measured.
    attribution : {"log-mean", "ladder"}
        How the difference is shared among current, voltage and fill factor (`physics.attribution`).
    faces : {1, 2}
        Faces from which the limit emits.
    stacks : Stacks, optional
        Luminescence of partial stacks, for all cells or none: it splits the line of non-radiative recombination.

    Returns
    -------
    Ledger
        Every array of the cells' shape; NaN for a cell with an impossible value. Σ losses = incident − cell power to
        rounding, whatever the signs.

    Raises
    ------
    ValueError
        For an unknown attribution.
    """
    limit = detailed_balance_limit(cell.gap, cell.temperature, light, cell.irradiance, faces)
    return ledger_against(cell, limit, attribution, stacks)


def entries_of(ledger: Ledger, section: Section) -> tuple[Entry, ...]:
    """The entries of one half of the way, in order."""
    return tuple(entry for entry in ledger.entries if entry.line.section is section)
