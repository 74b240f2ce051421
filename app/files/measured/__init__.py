"""Reading measured curves from any delimited text: find the table, say what it is, and give curves in physical units.

Three steps, each of which can be looked at and changed: `read_measured` finds the numbers, `guess` says which column is
what, `apply` makes curves of them.
"""

from app.files.measured.apply import apply
from app.files.measured.curves import EqeCurve, Irradiance, JvSweep, MeasuredCurve, Pairs
from app.files.measured.guess import guess, remembered
from app.files.measured.memory import ReadingMemory
from app.files.measured.model import Block, Column, MeasuredText
from app.files.measured.read import read_measured
from app.files.measured.reading import Kind, Reading, Trace, reading_from_json, reading_to_json
from app.files.measured.shape import shape_key
from app.files.measured.units import UNITS, Unit, units_of

__all__ = [
    "UNITS",
    "Block",
    "Column",
    "EqeCurve",
    "Irradiance",
    "JvSweep",
    "Kind",
    "MeasuredCurve",
    "MeasuredText",
    "Pairs",
    "Reading",
    "ReadingMemory",
    "Trace",
    "Unit",
    "apply",
    "guess",
    "read_measured",
    "reading_from_json",
    "reading_to_json",
    "remembered",
    "shape_key",
    "units_of",
]
