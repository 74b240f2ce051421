"""From a text and its reading to curves in physical units."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.files.measured.curves import EqeCurve, Irradiance, JvSweep, MeasuredCurve, Pairs
from app.files.measured.legs import legs_of
from app.files.measured.model import Block, Column, MeasuredText
from app.files.measured.read import read_measured
from app.files.measured.reading import Direction, Reading, Trace
from app.files.measured.units import UNITS, Dimension, Unit, units_of
from app.files.quoting import quote
from app.files.table_error import TableError
from physics.units import EV_NM, Array, Mask

LEAST_POINTS = 3
_WAVELENGTHS = (100.0, 20000.0)  # nm
_EFFICIENCIES = (-0.5, 1.5)
_VOLTAGE = 1000.0  # V, of a whole string of modules
_CURRENT = 1e6  # mA


def apply(text: MeasuredText, reading: Reading) -> tuple[MeasuredCurve, ...]:
    """Make curves of a text.

    Returns
    -------
    tuple of JvSweep, EqeCurve, Pairs or Irradiance
        Of the one sort that belongs to the reading's kind; at least one.

    Raises
    ------
    TableError
        Where the columns do not make sense as what they are read as: one sentence with line or column.
    """
    if (text.delimiter, text.decimal) != (reading.delimiter, reading.decimal):
        text = read_measured(text.data, text.source, reading.delimiter, reading.decimal)
    makers: dict[str, Callable[[_Points, Reading], list[MeasuredCurve]]] = {
        "jv": _sweeps, "eqe": _efficiency, "intensity": _series, "spectrum": _spectrum,
    }  # fmt: skip
    make = makers.get(reading.kind)
    traces = [trace for trace in reading.traces if trace.used]
    if make is None or not traces:
        first = text.blocks[0]
        _check_upright(first, text.source)
        raise TableError(
            f"What the {len(first.columns)} columns at line {first.first_line} of {quote(text.source)} are cannot be "
            "told: names such as voltage and current, or wavelength and EQE, were expected above them."
        )
    return tuple(curve for trace in traces for curve in make(_points(text, trace, reading.kind), reading))


@dataclass(frozen=True, eq=False)
class _Points:
    """The points of one trace where both columns hold numbers, in the units of the text."""

    x: Array
    y: Array
    lines: NDArray[np.int64]
    x_unit: Unit
    y_unit: Unit
    trace: Trace
    source: str

    def refuse_where(self, bad: Mask, axis: str, found: str, expected: str, shown: str = "") -> None:
        """Refuse the first bad point: its number stands between `found` and `shown`."""
        places = np.flatnonzero(bad)
        if len(places):
            first = int(places[0])
            column, value = (self.trace.x, self.x[first]) if axis == "x" else (self.trace.y, self.y[first])
            unit = self.x_unit if axis == "x" else self.y_unit
            told = f"{value:.6g}" if unit.name == "fraction" else f"{value:.6g} {unit.name}"
            where = f"Line {int(self.lines[first])}, column {column} of {quote(self.source)}"
            raise TableError(f"{where} {found} {told}{shown}: {expected}.")


def _points(text: MeasuredText, trace: Trace, kind: str) -> _Points:
    if trace.block >= len(text.blocks):
        tables = f"{len(text.blocks)} tables" if len(text.blocks) > 1 else "1 table"
        raise TableError(f"{quote(text.source)} has {tables}, and number {trace.block + 1} was expected.")
    block = text.blocks[trace.block]
    for column in (trace.x, trace.y):
        if not 1 <= column <= len(block.columns):
            raise TableError(
                f"The table at line {block.first_line} of {quote(text.source)} has {len(block.columns)} columns, and "
                f"column {column} was expected."
            )
    x, y = block.columns[trace.x - 1], block.columns[trace.y - 1]
    x_allowed, y_allowed = _ALLOWED[kind]
    x_unit = _chosen(trace.x_unit, x, x_allowed, block, text.source)
    y_unit = _chosen(trace.y_unit, y, y_allowed, block, text.source)
    good = np.isfinite(x.values) & np.isfinite(y.values)
    count = int(np.count_nonzero(good))
    if count < LEAST_POINTS:
        _check_upright(block, text.source)
        points = "point" if count == 1 else "points"
        raise TableError(
            f"Columns {trace.x} and {trace.y} at line {block.first_line} of {quote(text.source)} hold {count or 'no'} "
            f"{points} between them: {LEAST_POINTS} or more rows of numbers were expected."
        )
    lines = block.lines[good]
    return _Points(x.values[good], y.values[good], lines, x_unit, y_unit, trace, text.source)


def _check_upright(block: Block, source: str) -> None:
    """Refuse a table with a row for each quantity in words that help."""
    if len(block.lines) < LEAST_POINTS < len(block.columns):
        raise TableError(
            f"The table at line {block.first_line} of {quote(source)} lies on its side: "
            "a column for each quantity, and a row for each point, were expected."
        )


_ALLOWED: dict[str, tuple[tuple[Dimension, ...], tuple[Dimension, ...]]] = {
    "jv": (("voltage",), ("density", "current")),
    "intensity": (("density", "current"), ("voltage",)),
    "eqe": (("wavelength", "energy"), ("fraction", "responsivity")),
    "spectrum": (("wavelength", "energy"), ("irradiance",)),
}


def _chosen(name: str, column: Column, allowed: tuple[Dimension, ...], block: Block, source: str) -> Unit:
    unit = UNITS.get(name)
    if unit is None or unit.dimension not in allowed:
        written = column.unit or name
        has = f"has the unit {quote(written)}" if written else "has no unit"
        known = ", ".join(unit.name for unit in units_of(*allowed)[:6])
        raise TableError(
            f"Column {column.index} at line {block.first_line} of {quote(source)} {has}: one of {known} was expected."
        )
    return unit


def _sweeps(points: _Points, reading: Reading) -> list[MeasuredCurve]:
    trace = points.trace
    voltage = points.x_unit.convert(points.x) * trace.x_sign + 0.0  # no negative zeros
    current = points.y_unit.convert(points.y) * trace.y_sign + 0.0
    points.refuse_where(
        np.abs(voltage) > _VOLTAGE, "x", "holds a voltage of", f"less than {_VOLTAGE:.0f} V was expected"
    )
    points.refuse_where(np.abs(current) > _CURRENT, "y", "holds a current of", "less than 1000 A was expected")
    if np.ptp(voltage) == 0:
        raise TableError(
            f"Column {trace.x} of {quote(points.source)} stays at {points.x[0]:.6g} {points.x_unit.name} from line "
            f"{int(points.lines[0])} on: voltages that change were expected."
        )
    legs = legs_of(voltage) if reading.split else [slice(None)]
    return [
        JvSweep(
            label=trace.label if len(legs) == 1 else f"{trace.label}, part {number}",
            voltage=voltage[leg],
            current=current[leg],
            is_density=points.y_unit.dimension == "density",
            area_cm2=trace.area_cm2,
            direction=(trace.direction if len(legs) == 1 else "") or _direction(voltage[leg]),
            lit=trace.lit,
        )
        for number, leg in enumerate(legs, 1)
    ]


def _direction(voltage: Array) -> Direction:
    if voltage[-1] == voltage[0]:
        return ""
    return "forward" if voltage[-1] > voltage[0] else "reverse"


def _efficiency(points: _Points, _: Reading) -> list[MeasuredCurve]:
    wavelength = _wavelengths(points)
    eqe = points.y_unit.convert(points.y)
    if points.y_unit.dimension == "responsivity":
        eqe = eqe * (EV_NM / wavelength)
    low, high = _EFFICIENCIES
    bad = (eqe < low) | (eqe > high)
    if bad.any():
        percent = eqe[np.flatnonzero(bad)[0]] * 100
        shown = "" if points.y_unit.name == "%" else f", which is {percent:.4g} %"
        points.refuse_where(bad, "y", "holds", "an efficiency between 0 and 100 % was expected", shown)
    return [EqeCurve(points.trace.label, *_averaged(points, wavelength, eqe), quantity=points.trace.quantity)]


def _spectrum(points: _Points, _: Reading) -> list[MeasuredCurve]:
    wavelength = _wavelengths(points)
    irradiance = points.y_unit.convert(points.y)
    largest = float(np.max(irradiance))
    points.refuse_where(
        irradiance < -0.1 * abs(largest), "y", "holds an irradiance of", "a positive number was expected"
    )
    return [Irradiance(points.trace.label, *_averaged(points, wavelength, irradiance))]


def _wavelengths(points: _Points) -> Array:
    """Wavelengths [nm] of wavelengths or photon energies."""
    points.refuse_where(points.x <= 0, "x", "holds", "a wavelength or energy above zero was expected")
    converted = points.x_unit.convert(points.x)
    wavelength = EV_NM / converted if points.x_unit.dimension == "energy" else converted
    low, high = _WAVELENGTHS
    bad = (wavelength < low) | (wavelength > high)
    points.refuse_where(bad, "x", "holds", f"a wavelength between {low:.0f} and {high:.0f} nm was expected")
    return wavelength


def _averaged(points: _Points, wavelength: Array, values: Array) -> tuple[Array, Array]:
    """Sort by wavelength, with the mean where a wavelength occurs more than once."""
    places, where, counts = np.unique(wavelength, return_inverse=True, return_counts=True)
    if len(places) < LEAST_POINTS:
        raise TableError(
            f"Column {points.trace.x} of {quote(points.source)} has fewer than {LEAST_POINTS} different values from "
            f"line {int(points.lines[0])} on: a curve was expected."
        )
    return places, np.bincount(where, weights=values) / counts


def _series(points: _Points, _: Reading) -> list[MeasuredCurve]:
    trace = points.trace
    jsc = points.x_unit.convert(points.x) * trace.x_sign
    voc = points.y_unit.convert(points.y) * trace.y_sign
    points.refuse_where(np.abs(voc) > _VOLTAGE, "y", "holds a voltage of", f"less than {_VOLTAGE:.0f} V was expected")
    is_density = points.x_unit.dimension == "density"
    return [Pairs(trace.label, jsc, voc, is_density, trace.area_cm2)]
