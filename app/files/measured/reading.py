"""How a measured text is to be read: plain data that can be looked at, changed field by field, and remembered."""

from __future__ import annotations

import json
import math
from dataclasses import asdict, dataclass
from typing import Any, Literal, get_args

from app.files.measured.model import DELIMITERS, DecimalMark, Delimiter
from app.files.measured.units import UNITS

Kind = Literal["jv", "eqe", "intensity", "spectrum", "unknown"]
Direction = Literal["forward", "reverse", ""]
CurveQuantity = Literal["eqe", "reflectance"]

_LONGEST_JSON = 1_000_000


@dataclass(frozen=True)
class Trace:
    """One curve: which columns of which block, in which units.

    Attributes
    ----------
    block : int
        Place of the block, the first being 0.
    x, y : int
        Columns, the first being 1: voltage and current; wavelength or energy and what was measured there; or, in a
        light-intensity series, the current at short circuit and the voltage at open circuit.
    x_unit, y_unit : str
        Names of units in `UNITS`, or "" where it must still be said.
    x_sign, y_sign : {1, -1}
        What to multiply the numbers with, so that the photocurrent is positive and flows at positive voltages.
    label : str
    direction : {"forward", "reverse", ""}
        What the text says of the order of a sweep; "" to tell it from the numbers.
    lit : bool or None
        Whether a sweep was taken under light; None where that is not known.
    area_cm2 : float or None
        Area of the cell [cm²], None where it is not stated.
    quantity : {"eqe", "reflectance"}
        What a curve over wavelength is.
    used : bool
        False for a curve that is to be left out.
    """

    block: int
    x: int
    y: int
    x_unit: str
    y_unit: str
    x_sign: int = 1
    y_sign: int = 1
    label: str = ""
    direction: Direction = ""
    lit: bool | None = None
    area_cm2: float | None = None
    quantity: CurveQuantity = "eqe"
    used: bool = True


@dataclass(frozen=True)
class Reading:
    """What a text is, and how its curves are read.

    Attributes
    ----------
    kind : {"jv", "eqe", "intensity", "spectrum", "unknown"}
    traces : tuple of Trace
    delimiter : str
    decimal : {".", ","}
    split : bool
        Whether a sweep that turns back is two sweeps.
    questions : tuple of str
        A sentence for each guess that the text leaves open.
    """

    kind: Kind
    traces: tuple[Trace, ...]
    delimiter: Delimiter
    decimal: DecimalMark
    split: bool = True
    questions: tuple[str, ...] = ()


def reading_to_json(reading: Reading) -> str:
    """Write a reading as JSON, to be remembered."""
    return json.dumps(asdict(reading), ensure_ascii=False, sort_keys=True)


def reading_from_json(text: str) -> Reading:
    """Read what `reading_to_json` wrote.

    Raises
    ------
    ValueError
        Where the text is anything else.
    """
    if len(text) > _LONGEST_JSON:
        raise ValueError("This is too long for a remembered reading.")
    try:
        fields = json.loads(text)
        traces = tuple(_trace(**entry) for entry in fields.pop("traces"))
        reading = Reading(traces=traces, questions=tuple(map(str, fields.pop("questions"))), **fields)
    except (ValueError, TypeError, AttributeError, KeyError, RecursionError) as fault:
        raise ValueError(f"This is no remembered reading: {fault}.") from fault
    sound = (
        reading.kind in get_args(Kind)
        and reading.delimiter in DELIMITERS
        and reading.decimal in (".", ",")
        and isinstance(reading.split, bool)
    )
    if not sound:
        raise ValueError("This is no remembered reading: a field has a value of no meaning.")
    return reading


def _trace(**fields: Any) -> Trace:
    trace = Trace(**fields)
    whole = all(type(number) is int for number in (trace.block, trace.x, trace.y, trace.x_sign, trace.y_sign))
    area = trace.area_cm2
    sound = (
        whole
        and trace.block >= 0
        and trace.x > 0 < trace.y
        and {trace.x_unit, trace.y_unit} <= {"", *UNITS}
        and {trace.x_sign, trace.y_sign} <= {1, -1}
        and isinstance(trace.label, str)
        and trace.direction in get_args(Direction)
        and trace.lit in (True, False, None)
        and (area is None or (isinstance(area, float | int) and math.isfinite(area) and area > 0))
        and trace.quantity in get_args(CurveQuantity)
        and isinstance(trace.used, bool)
    )
    if not sound:
        raise ValueError("a curve has a field of no meaning")
    return trace
