"""All that the views show of the cell on show, worked out once per change."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from app.session.appraisal import Appraisal, appraise
from app.session.curves import edge_for
from app.session.light import light_named
from app.session.session import Session
from app.session.state import CellEntry, Choices
from physics.diode import Diode
from physics.edge import Edge
from physics.ideality import matching_ideality
from physics.ledger import Ledger
from physics.limit import Faces, Limit, detailed_balance_limit
from physics.units import Array

_GAP_POINTS = 241


@dataclass(frozen=True, eq=False)
class Curve:
    """A J–V curve [V; mA cm⁻²] and the ideality with which it was drawn (NaN where none could be)."""

    voltage: Array
    current: Array
    ideality: float


@dataclass(frozen=True, eq=False)
class Picture:
    """A cell's ledger with the curves that go with it.

    Parameters
    ----------
    entry : CellEntry
        The inputs it was made of.
    choices : Choices
        The conventions it was made with.
    ledger : Ledger
        Ledger of that one cell (shape ()).
    cell_curve, limit_curve : Curve
        J–V curve through the cell's Voc, Jsc and FF, and that of its limit.
    edge : Edge or None
        Edge of the EQE; None where there is no EQE.
    gap_curve : Limit
        Limits over the gaps that a single junction may have, same light and temperature, shape (n,).
    """

    entry: CellEntry
    choices: Choices
    ledger: Ledger
    cell_curve: Curve
    limit_curve: Curve
    gap_curve: Limit
    edge: Edge | None = None


@dataclass(frozen=True, eq=False)
class Outcome:
    """The cell on show: its problems, and the last picture that could be made of it.

    Parameters
    ----------
    appraisal : Appraisal or None
        None where the shelf is empty.
    picture : Picture or None
        None where the cell never had a valid set of inputs.
    stale : bool
        The picture is of earlier inputs, because the present ones allow none.
    """

    appraisal: Appraisal | None
    picture: Picture | None
    stale: bool


def cell_curve(ledger: Ledger, near: float = math.nan) -> Curve:
    """One-diode curve through Voc, Jsc and FF, with the Rs and Rsh given and the ideality that meets FF.

    Where no ideality does, the resistances are left out; below a fill factor of a quarter there is no such curve.
    `near` is the ideality of an earlier curve of the same cell, if there is one: a place to look first.
    """
    cell, rs, rsh = ledger.cell, ledger.diode.rs, ledger.diode.rsh
    ideality = matching_ideality(cell.ff, cell.voc, cell.jsc, cell.temperature, rs, rsh, near)
    if np.isnan(ideality) and (rs > 0 or np.isfinite(rsh)):
        rs, rsh = np.zeros_like(rs), np.full_like(rsh, np.inf)
        ideality = matching_ideality(cell.ff, cell.voc, cell.jsc, cell.temperature)
    voltage, current = Diode.through(cell.voc, cell.jsc, cell.temperature, ideality, rs, rsh).curve()
    return Curve(voltage, current, float(ideality))


@lru_cache(maxsize=32)
def limit_curve(limit: Limit) -> Curve:
    """J–V curve of a limit."""
    voltage, current = Diode.through(limit.voc, limit.jsc, limit.temperature).curve()
    return Curve(voltage, current, 1.0)


@lru_cache(maxsize=8)
def gap_curve(spectrum: str, irradiance: float, temperature: float, faces: Faces) -> Limit:
    """Limits over the range of gaps worth plotting; temperature [K], irradiance [mW cm⁻²]."""
    light = light_named(spectrum)
    low, high = light.gap_range
    gaps = np.linspace(max(low * (1 + 1e-9), 0.4), min(high * (1 - 1e-9), 3.0), _GAP_POINTS)
    return detailed_balance_limit(gaps, temperature, light, irradiance, faces)


def picture_of(appraisal: Appraisal, choices: Choices, earlier: Picture | None = None) -> Picture | None:
    """The picture of a cell that has a ledger, None where it has none; an `earlier` one of the cell saves time."""
    ledger, entry = appraisal.ledger, appraisal.entry
    if ledger is None:
        return None
    cell = ledger.cell
    near = math.nan if earlier is None else earlier.cell_curve.ideality
    gaps = gap_curve(entry.spectrum, float(cell.irradiance), float(cell.temperature), choices.faces)
    edge = None if entry.curves.eqe is None else edge_for(entry.curves.eqe)
    return Picture(entry, choices, ledger, cell_curve(ledger, near), limit_curve(ledger.limit), gaps, edge)


class Outcomes:
    """Works out the outcome of the cells of a session and remembers the last good picture of each."""

    def __init__(self, session: Session) -> None:
        self._session = session
        self._known: dict[int, tuple[CellEntry, Choices, Outcome]] = {}

    def current(self) -> Outcome:
        """The outcome for the cell on show."""
        entry = self._session.state.cell
        return Outcome(None, None, False) if entry is None else self.of(entry)

    def of(self, entry: CellEntry) -> Outcome:
        """The outcome for a cell of the session; worked out again only where it or the conventions changed."""
        choices = self._session.state.choices
        known = self._known.get(entry.ident)
        if known is not None and known[0] is entry and known[1] is choices:
            return known[2]
        appraisal = appraise(entry, choices)
        earlier = known[2].picture if known is not None else None
        fresh = picture_of(appraisal, choices, earlier)
        outcome = Outcome(appraisal, fresh or earlier, fresh is None)
        self._known[entry.ident] = (entry, choices, outcome)
        return outcome
