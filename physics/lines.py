"""The lines of the ledger: what each is called, where it belongs, and how its amount is found.

To add a line, add one entry to `LINES` (and, if it needs a number that is not there yet, one field to
`physics.quantities.Quantities`). Nothing else has to know: the ledger, the chart, the table, the exports and the
panel that explains a line all read these entries. The lines of one factor must add up to that factor's difference
between the limit and the cell; a test holds the whole list to that.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from enum import Enum

import numpy as np

from physics.quantities import Quantities
from physics.units import Array, Mask


class Family(Enum):
    """Kind of a loss."""

    SPECTRAL = "spectral"
    VOLTAGE = "voltage"
    FILL = "fill-factor"
    NONRADIATIVE = "non-radiative"


class Section(Enum):
    """Half of the way from the sunlight to the cell."""

    SUN_TO_LIMIT = "sun-to-limit"
    LIMIT_TO_CELL = "limit-to-cell"


class Basis(Enum):
    """How a line is known."""

    CALCULATED = "calculated"  # from the gap, the temperature and the spectrum alone
    MEASURED = "measured"
    FITTED = "fitted"
    ASSUMED = "assumed"


@dataclass(frozen=True)
class Factor:
    """What a line's Δ is counted in, and the power that a unit of it is worth.

    Parameters
    ----------
    unit : str
        Unit of Δ ("" for a fill factor).
    weight : callable
        Quantities -> power per unit of Δ.
    weight_equation : str
        The same as an equation; names in braces are fields of `Quantities`. Empty where Δ is a power already.
    """

    unit: str
    weight: Callable[[Quantities], Array]
    weight_equation: str


_ONE = np.ones(())
POWER = Factor("mW cm⁻²", lambda q: _ONE, "")
LIMIT_VOLTAGE = Factor("V", lambda q: q.jsc_limit, "{jsc_limit}")
LIMIT_FILL = Factor("", lambda q: q.jsc_limit * q.voc_limit, "{jsc_limit} · {voc_limit}")
CURRENT = Factor("mA cm⁻²", lambda q: q.weight_current, "{weight_current}")
VOLTAGE = Factor("V", lambda q: q.weight_voltage, "{weight_voltage}")
FILL = Factor("", lambda q: q.weight_fill, "{weight_fill}")


@dataclass(frozen=True)
class Implied:
    """A figure that follows from a line as well.

    Parameters
    ----------
    symbol : str
        What it is.
    equation : str
        How it follows; names in braces are fields of `Quantities`.
    value : callable
        Quantities -> the figure.
    unit : str
        Its unit, "" for a pure number.
    """

    symbol: str
    equation: str
    value: Callable[[Quantities], Array]
    unit: str = ""


@dataclass(frozen=True)
class Form:
    """One way to find a line's Δ, and when it applies.

    Parameters
    ----------
    equation : str
        Δ as an equation; names in braces are fields of `Quantities`.
    delta : callable
        Quantities -> Δ, positive for a loss.
    basis : Basis
        How the line is then known.
    reason : str
        What is assumed, or what the line rests on; may be empty.
    applies : callable, optional
        Quantities -> mask of the cells for which this form serves; every cell if left out.
    implied : Implied, optional
        A figure that is worth telling beside the line.
    """

    equation: str
    delta: Callable[[Quantities], Array]
    basis: Basis
    reason: str = ""
    applies: Callable[[Quantities], Mask] | None = None
    implied: Implied | None = None


@dataclass(frozen=True)
class Line:
    """A line of the ledger.

    Parameters
    ----------
    key : str
        Name in files ("nonradiative").
    title, short : str
        Name on screen, in full and for narrow places.
    family : Family
    section : Section
    factor : Factor
    forms : tuple of Form
        The first that applies to a cell is used; where none does, the cell has no such line.
    source : str
        Where the formula comes from.
    """

    key: str
    title: str
    short: str
    family: Family
    section: Section
    factor: Factor
    forms: tuple[Form, ...]
    source: str


def _known(name: str) -> Callable[[Quantities], Mask]:
    return lambda q: q.knows(name)


_SQ = "Shockley and Queisser 1961, doi:10.1063/1.1736034"
_RAU = "Rau 2007, doi:10.1103/PhysRevB.76.085303"
_GREEN = "exact one-diode curve; approximations by Green 1981, doi:10.1016/0038-1101(81)90062-9"
_DIFFERENCE = "difference of measured figures"
_REFLECTANCE = "photon current times the measured reflectance"
_FIT = "one-diode fit to the sweep"

_HAS_ERE, _HAS_PFF, _HAS_EQE, _HAS_R = (_known(name) for name in ("ere", "pseudo_ff", "jsc_eqe", "jsc_reflected"))
_HAS_N, _HAS_RS, _HAS_RSH = _known("ideality"), _known("rs"), _known("rsh")


def _both(one: Callable[[Quantities], Mask], other: Callable[[Quantities], Mask]) -> Callable[[Quantities], Mask]:
    return lambda q: one(q) & other(q)


def _fitted(q: Quantities) -> Mask:
    return q.fitted > 0


def _tail_extrapolated(q: Quantities) -> Mask:
    return _HAS_EQE(q) & (q.tail_share > 0)


def _with_or_without_ideality(
    equation: str, delta: Callable[[Quantities], Array], known: Callable[[Quantities], Mask]
) -> tuple[Form, ...]:
    """A resistance line rests on the cell's ideality; where that is unknown, on an ideal diode."""
    return (
        Form(equation, delta, Basis.FITTED, _FIT, _both(_fitted, _both(known, _HAS_N))),
        Form(equation, delta, Basis.MEASURED, "", _both(known, _HAS_N)),
        Form(equation, delta, Basis.ASSUMED, "n = 1, as no ideality is given", known),
    )


LINES: tuple[Line, ...] = (
    Line(
        "below_gap", "Photons below the gap", "below gap", Family.SPECTRAL, Section.SUN_TO_LIMIT, POWER,
        (Form("{incident} − {above_gap}", lambda q: q.incident - q.above_gap, Basis.CALCULATED),),
        _SQ,
    ),
    Line(
        "thermalisation", "Thermalisation above the gap", "heat", Family.SPECTRAL, Section.SUN_TO_LIMIT, POWER,
        (Form(
            "{above_gap} − {jsc_limit} · {gap}/q",
            lambda q: q.above_gap - q.jsc_limit * q.gap, Basis.CALCULATED,
        ),),
        _SQ,
    ),
    Line(
        "limit_voltage", "Voltage of the limit, below the gap", "voltage", Family.VOLTAGE, Section.SUN_TO_LIMIT,
        LIMIT_VOLTAGE,
        (Form("{gap}/q − {voc_limit}", lambda q: q.gap - q.voc_limit, Basis.CALCULATED),),
        _SQ,
    ),
    Line(
        "limit_fill", "Fill factor of the limit", "fill", Family.FILL, Section.SUN_TO_LIMIT, LIMIT_FILL,
        (Form("1 − {ff_limit}", lambda q: 1.0 - q.ff_limit, Basis.CALCULATED),),
        _SQ,
    ),
    Line(
        "current", "Current not collected", "current", Family.SPECTRAL, Section.LIMIT_TO_CELL, CURRENT,
        (Form("{jsc_limit} − {jsc}", lambda q: q.jsc_limit - q.jsc, Basis.MEASURED, "", lambda q: ~_HAS_EQE(q)),),
        _DIFFERENCE,
    ),
    Line(
        "reflection", "Reflection", "reflection", Family.SPECTRAL, Section.LIMIT_TO_CELL, CURRENT,
        (Form(
            "{jsc_reflected}", lambda q: q.jsc_reflected,
            Basis.MEASURED, "from the reflectance", _both(_HAS_EQE, _HAS_R),
        ),),
        _REFLECTANCE,
    ),
    Line(
        "uncollected", "Current not collected above the gap", "uncollected", Family.SPECTRAL,
        Section.LIMIT_TO_CELL, CURRENT,
        (
            Form(
                "{jsc_limit} − {jsc_eqe} − {jsc_reflected}", lambda q: q.jsc_limit - q.jsc_eqe - q.jsc_reflected,
                Basis.MEASURED, "from the EQE, less the reflection", _both(_HAS_EQE, _HAS_R),
            ),
            Form(
                "{jsc_limit} − {jsc_eqe}", lambda q: q.jsc_limit - q.jsc_eqe,
                Basis.MEASURED, "from the EQE", _HAS_EQE,
            ),
        ),
        _DIFFERENCE,
    ),
    Line(
        "sub_gap_current", "Current from below the gap", "below-gap current", Family.SPECTRAL,
        Section.LIMIT_TO_CELL, CURRENT,
        (Form("−{jsc_sub_gap}", lambda q: -q.jsc_sub_gap, Basis.MEASURED, "from the EQE", _HAS_EQE),),
        _DIFFERENCE,
    ),
    Line(
        "current_mismatch", "EQE current against the sweep's", "EQE against J–V", Family.SPECTRAL,
        Section.LIMIT_TO_CELL, CURRENT,
        (Form(
            "{jsc_eqe} + {jsc_sub_gap} − {jsc}", lambda q: q.jsc_eqe + q.jsc_sub_gap - q.jsc,
            Basis.MEASURED, "EQE and J–V", _HAS_EQE,
        ),),
        _DIFFERENCE,
    ),
    Line(
        "voltage_low_current", "Voltage, from the lower current", "lower current", Family.VOLTAGE,
        Section.LIMIT_TO_CELL, VOLTAGE,
        (Form("{voc_limit} − {voc_limit_at_jsc}", lambda q: q.voc_limit - q.voc_limit_at_jsc, Basis.MEASURED),),
        _RAU,
    ),
    Line(
        "voltage_edge", "Voltage, from a soft edge", "soft edge", Family.VOLTAGE,
        Section.LIMIT_TO_CELL, VOLTAGE,
        tuple(
            Form("{voc_limit_at_jsc} − {voc_rad}", lambda q: q.voc_limit_at_jsc - q.voc_rad, basis, reason, applies)
            for basis, reason, applies in (
                (Basis.FITTED, "from the EQE, its tail extrapolated", _tail_extrapolated),
                (Basis.MEASURED, "from the EQE", _HAS_EQE),
                (Basis.ASSUMED, "step edge", None),
            )
        ),
        "Rau et al. 2017, doi:10.1103/PhysRevApplied.7.044016",
    ),
    Line(
        "nonradiative", "Non-radiative recombination", "non-radiative", Family.NONRADIATIVE,
        Section.LIMIT_TO_CELL, VOLTAGE,
        (
            Form("−{vt} · ln {ere}", lambda q: -q.vt * np.log(q.ere), Basis.MEASURED, "from the ERE", _HAS_ERE),
            *(
                Form(
                    "{voc_rad} − {voc}", lambda q: q.voc_rad - q.voc, basis, reason, applies,
                    implied=Implied("ERE", "exp(({voc} − {voc_rad}) / {vt})", lambda q: q.ere_reciprocal),
                )
                for basis, reason, applies in (
                    (Basis.FITTED, "by reciprocity, with the EQE and its extrapolated tail", _tail_extrapolated),
                    (Basis.MEASURED, "by reciprocity, with the EQE", _HAS_EQE),
                    (Basis.ASSUMED, "by reciprocity, with a step edge", None),
                )
            ),
        ),
        _RAU,
    ),
    Line(
        "voltage_residual", "Voltage not accounted for", "voltage, rest", Family.VOLTAGE,
        Section.LIMIT_TO_CELL, VOLTAGE,
        tuple(
            Form(
                "{voc_rad} + {vt} · ln {ere} − {voc}", lambda q: q.voc_rad + q.vt * np.log(q.ere) - q.voc,
                basis, reason, applies,
            )
            for basis, reason, applies in (
                (Basis.FITTED, "the rest, with the EQE and its extrapolated tail", _both(_HAS_ERE, _tail_extrapolated)),
                (Basis.MEASURED, "the rest, with the EQE", _both(_HAS_ERE, _HAS_EQE)),
                (Basis.MEASURED, "the rest, with the edge taken as a step", _HAS_ERE),
            )
        ),
        _RAU,
    ),
    Line(
        "fill_voltage", "Fill factor, from the lower voltage", "lower voltage", Family.FILL,
        Section.LIMIT_TO_CELL, FILL,
        (Form("{ff_limit} − {ff_voltage}", lambda q: q.ff_limit - q.ff_voltage, Basis.MEASURED),),
        _GREEN,
    ),
    Line(
        "fill_ideality", "Fill factor, from the ideality", "ideality", Family.FILL, Section.LIMIT_TO_CELL, FILL,
        (
            Form(
                "{ff_voltage} − {ff_ideality}", lambda q: q.ff_voltage - q.ff_ideality,
                Basis.FITTED, _FIT, _both(_HAS_N, _fitted),
            ),
            Form(
                "{ff_voltage} − {ff_ideality}", lambda q: q.ff_voltage - q.ff_ideality, Basis.MEASURED, "", _HAS_N,
            ),
        ),
        _GREEN,
    ),
    Line(
        "fill_series", "Series resistance", "series resistance", Family.FILL, Section.LIMIT_TO_CELL, FILL,
        _with_or_without_ideality(
            "{ff_without_rs} − {ff_with_rs}", lambda q: q.ff_without_rs - q.ff_with_rs, _HAS_RS
        ),
        _GREEN,
    ),
    Line(
        "fill_shunt", "Shunts", "shunts", Family.FILL, Section.LIMIT_TO_CELL, FILL,
        _with_or_without_ideality(
            "{ff_without_rsh} − {ff_with_rsh}", lambda q: q.ff_without_rsh - q.ff_with_rsh, _HAS_RSH
        ),
        _GREEN,
    ),
    Line(
        "fill_recombination", "Recombination and shunts", "recombination", Family.FILL,
        Section.LIMIT_TO_CELL, FILL,
        (Form(
            "{ff_with_rsh} − {pseudo_ff}", lambda q: q.ff_with_rsh - q.pseudo_ff,
            Basis.MEASURED, "", _HAS_PFF,
        ),),
        _DIFFERENCE,
    ),
    Line(
        "fill_transport", "Transport", "transport", Family.FILL,
        Section.LIMIT_TO_CELL, FILL,
        (Form(
            "{pseudo_ff} − {ff} − ({ff_without_rs} − {ff_with_rs})",
            lambda q: q.pseudo_ff - q.ff - (q.ff_without_rs - q.ff_with_rs), Basis.MEASURED, "", _HAS_PFF,
        ),),
        _DIFFERENCE,
    ),
    Line(
        "fill_residual", "Fill factor not accounted for", "fill factor, rest", Family.FILL,
        Section.LIMIT_TO_CELL, FILL,
        (Form(
            "{ff_diode} − {ff}", lambda q: q.ff_diode - q.ff, Basis.MEASURED, "the rest",
            lambda q: ~_HAS_PFF(q),
        ),),
        _DIFFERENCE,
    ),
)
