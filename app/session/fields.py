"""The inputs of a cell: what each is called, its unit, and which values make sense."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike

from app.files.numbers import read_number, write_number
from physics.units import ZERO_CELSIUS, Array


@dataclass(frozen=True)
class Field:
    """One number that describes a cell, in the unit in which people write it.

    Parameters
    ----------
    key : str
        Name of the field in `physics.cell.Cell` (and "area", which only travels along).
    title, symbol : str
        Name in full and as a symbol.
    unit : str
        Unit on screen, "" for a pure number.
    column : str
        Column of the cell table.
    range : (float, float)
        Values that are accepted [unit]; the lower end is exclusive where `above` is set.
    slider : (float, float)
        What the slider spans [unit].
    required : bool
        Whether a ledger needs it.
    default : float or None
        Value where none is given; None means unknown.
    log : bool
        Logarithmic slider.
    digits : int
        Decimals (significant digits, if logarithmic) that a slider sets.
    units : mapping
        Suffixes that may be typed, with their factor to `unit`.
    scale, offset : float
        Value for physics = (value + offset)·scale.
    advice : str
        What to do about a value out of range.
    above : bool
        The lower end of the range is itself excluded.
    """

    key: str
    title: str
    symbol: str
    unit: str
    column: str
    range: tuple[float, float]
    slider: tuple[float, float]
    required: bool = False
    default: float | None = None
    log: bool = False
    digits: int = 3
    units: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    scale: float = 1.0
    offset: float = 0.0
    advice: str = ""
    above: bool = True

    def read(self, text: str, decimal_comma: bool = False) -> float:
        """Number in a text, in the field's unit; NumberError with a sentence where there is none."""
        return read_number(text, self.units, self.range, decimal_comma=decimal_comma)

    def fault(self, value: float) -> str:
        """Sentence about a value outside the range, or an empty text."""
        low, high = self.range
        if (value > low or (value == low and not self.above)) and value <= high:
            return ""
        unit = f" {self.unit}" if self.unit else ""
        bounds = f"{'above' if self.above else 'at least'} {write_number(low)} and at most {write_number(high)}{unit}"
        return f"{self.symbol} must be {bounds}{'; ' + self.advice if self.advice else ''}."

    def to_physics(self, values: ArrayLike) -> Array:
        """Values of any shape in the units of `physics`."""
        return (np.asarray(values, dtype=float) + self.offset) * self.scale


FIELDS: tuple[Field, ...] = (
    Field(
        "gap", "Bandgap", "Eg", "eV", "gap_eV", (0.3, 4.5), (0.7, 2.5), required=True,
        units={"eV": 1.0, "meV": 1e-3}, advice="give the gap in eV",
    ),
    Field(
        "voc", "Open-circuit voltage", "Voc", "V", "voc_V", (0.0, 5.0), (0.1, 2.0), required=True,
        units={"V": 1.0, "mV": 1e-3}, advice="give one cell's voltage in V",
    ),
    Field(
        "jsc", "Short-circuit current", "Jsc", "mA cm⁻²", "jsc_mA_cm2", (0.0, 1e5), (1.0, 60.0), required=True,
        digits=2, units={"mA cm⁻²": 1.0, "A cm⁻²": 1e3, "A m⁻²": 0.1, "µA cm⁻²": 1e-3},
        advice="give it positive, as a current density",
    ),
    Field(
        "ff", "Fill factor", "FF", "%", "ff_pct", (1.0, 100.0), (25.0, 92.0), required=True, digits=1,
        units={"%": 1.0}, scale=0.01, advice="give it in percent, such as 81.5",
    ),
    Field(
        "temperature", "Temperature", "T", "°C", "temperature_C", (-100.0, 200.0), (-20.0, 100.0), default=25.0,
        digits=1, units={"°C": 1.0, "C": 1.0}, offset=ZERO_CELSIUS, advice="give it in °C", above=False,
    ),
    Field(
        "irradiance", "Irradiance", "P", "mW cm⁻²", "irradiance_mW_cm2", (0.0, 1e5), (1.0, 200.0), default=100.0,
        digits=1, units={"mW cm⁻²": 1.0, "W m⁻²": 0.1, "W cm⁻²": 1e3, "µW cm⁻²": 1e-3, "suns": 100.0, "sun": 100.0},
        advice="one sun is 100 mW cm⁻²",
    ),
    Field(
        "ere", "External radiative efficiency", "ERE", "", "ere", (0.0, 1.0), (1e-9, 1.0), log=True, digits=2,
        units={"%": 0.01, "ppm": 1e-6}, advice="it is a fraction, such as 0.01 for 1 %",
    ),
    Field(
        "ideality", "Ideality factor", "n", "", "ideality", (0.1, 10.0), (0.5, 3.0), digits=2,
        advice="most cells lie between 1 and 2", above=False,
    ),
    Field(
        "rs", "Series resistance", "Rs", "Ω cm²", "rs_ohm_cm2", (0.0, 1e6), (0.0, 12.0), digits=2,
        units={"Ω cm²": 1.0, "ohm cm²": 1.0, "mΩ cm²": 1e-3}, advice="give it times the area, in Ω cm²", above=False,
    ),
    Field(
        "rsh", "Shunt resistance", "Rsh", "Ω cm²", "rsh_ohm_cm2", (0.0, 1e15), (50.0, 1e6), log=True, digits=2,
        units={"Ω cm²": 1.0, "ohm cm²": 1.0, "kΩ cm²": 1e3, "kohm cm²": 1e3, "MΩ cm²": 1e6, "Mohm cm²": 1e6},
        advice="give it times the area, in Ω cm²",
    ),
    Field(
        "pseudo_ff", "Pseudo fill factor", "pFF", "%", "pseudo_ff_pct", (1.0, 100.0), (25.0, 92.0), digits=1,
        units={"%": 1.0}, scale=0.01, advice="give it in percent, such as 84.0",
    ),
    Field(
        "area", "Area", "A", "cm²", "area_cm2", (0.0, 1e5), (0.01, 250.0), log=True, digits=2,
        units={"cm²": 1.0, "mm²": 0.01, "m²": 1e4}, advice="give the illuminated area in cm²",
    ),
)

FIELD_BY_KEY: Mapping[str, Field] = MappingProxyType({f.key: f for f in FIELDS})
FIELD_BY_COLUMN: Mapping[str, Field] = MappingProxyType({f.column: f for f in FIELDS})
