"""Random tables in random dialects: what was written is what is read."""

from __future__ import annotations

import codecs
from dataclasses import dataclass

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from app.files.measured import EqeCurve, JvSweep, apply, guess, read_measured
from physics.units import EV_NM

_ENDS = st.sampled_from(["\n", "\r\n", "\r"])
_ENCODINGS = st.sampled_from(
    ["utf-8", "utf-8-sig", "utf-16-le", "utf-16-be", "cp1252", "latin-1", "no mark le", "no mark be"]
)
_FORMATS = st.sampled_from(["{:.6g}", "{:.4e}", "{:.2f}", "{:.3f}", "{:+.5f}", "{:.9g}"])
# No Latin-1 from µ to ¿ here: behind Ã or é it would be good UTF-8 by chance, and nothing could tell.
_PROSE = st.text("abcdefghABCDEV äöüßéè().!", max_size=40)
_LINES = st.sampled_from(["", "# by hand", "Operator: N. N.", "Date: 2024-02-01", "run 7", "25", "Area = 0.1 cm2"])
_HEADER = st.lists(_PROSE | _LINES, max_size=30)


@dataclass(frozen=True)
class Dialect:
    """How a table is written."""

    delimiter: str
    comma: bool
    end: str
    encoding: str
    number: str
    pad: str
    header: tuple[str, ...]
    trailing: bool

    def cell(self, value: float | None) -> str:
        text = "" if value is None else self.number.format(value)
        return self.pad + (text.replace(".", ",") if self.comma else text)

    def value(self, value: float | None) -> float:
        return float("nan") if value is None else float(self.number.format(value))

    def write(self, names: list[str], rows: list[tuple[float | None, ...]]) -> bytes:
        between = "   " if self.delimiter == " " else self.delimiter
        tail = self.delimiter if self.trailing else ""
        lines = [*self.header, between.join(names) + tail, *(between.join(map(self.cell, row)) + tail for row in rows)]
        text = self.end.join(lines) + self.end
        if self.encoding.startswith("no mark"):
            return text.encode(f"utf-16-{self.encoding[-2:]}")
        marks = {"utf-16-le": codecs.BOM_UTF16_LE, "utf-16-be": codecs.BOM_UTF16_BE}
        return marks.get(self.encoding, b"") + text.encode(self.encoding)


@st.composite
def dialects(draw: st.DrawFn) -> Dialect:
    delimiter = draw(st.sampled_from(["\t", ";", ",", " "]))
    return Dialect(
        delimiter=delimiter,
        comma=delimiter != "," and draw(st.booleans()),
        end=draw(_ENDS),
        encoding=draw(_ENCODINGS),
        number=draw(_FORMATS),
        pad=draw(st.sampled_from(["", " "])),
        header=tuple(line for line in draw(_HEADER) if not set(line) & {"\t", ";", ","}),
        trailing=draw(st.booleans()) and delimiter != " ",
    )


_NUMBERS = st.floats(-1e6, 1e6, allow_nan=False)
# The first two columns are full: what is mostly blank is no table that anything could tell from prose.
_TABLES = st.integers(2, 6).flatmap(
    lambda width: st.lists(
        st.tuples(_NUMBERS, _NUMBERS, *[_NUMBERS | st.none()] * (width - 2)), min_size=3, max_size=30
    )
)


@settings(max_examples=300, deadline=None)
@given(dialects(), _TABLES)
def test_numbers_come_back(dialect: Dialect, rows: list[tuple[float | None, ...]]) -> None:
    if dialect.delimiter == " ":
        rows = [tuple(0.25 if value is None else value for value in row) for row in rows]  # blanks cannot be seen
    rows = [*rows, (0.5,) * len(rows[0])]  # a last column of nothing but blanks is no column
    names = [f"Column{'ABCDEF'[place]} (V)" for place in range(len(rows[0]))]
    text = read_measured(dialect.write(names, rows), "table.txt")
    assert len(text.blocks) == 1
    block = text.blocks[0]
    assert [column.name for column in block.columns] == [name[:-4] for name in names]
    assert {column.unit for column in block.columns} == {"V"}
    assert text.problems == ()
    found = np.array([column.values for column in block.columns]).T
    wanted = np.array([[dialect.value(value) for value in row] for row in rows])
    assert np.array_equal(found, wanted, equal_nan=True)
    assert list(block.lines) == [len(dialect.header) + 2 + place for place in range(len(rows))]


_CURRENTS = [
    ("A", 1e3, False), ("mA", 1.0, False), ("uA", 1e-3, False), ("A/m2", 0.1, True), ("mA/cm2", 1.0, True),
    ("mA cm^-2", 1.0, True), ("A/cm2", 1e3, True),
]  # fmt: skip
_SWEEP_UNITS = st.tuples(
    st.sampled_from([("V", 1.0), ("mV", 1e-3)]),
    st.sampled_from(_CURRENTS),
    st.sampled_from(["{} ({})", "{} [{}]", "{}/{}"]),
)


@settings(max_examples=200, deadline=None)
@given(dialects(), _SWEEP_UNITS, st.sampled_from([-1, 1]), st.booleans(), st.integers(8, 60))
def test_a_sweep_comes_back(
    dialect: Dialect, units: tuple[tuple[str, float], tuple[str, float, bool], str], sign: int, down: bool, count: int
) -> None:
    (volt, per_volt), (ampere, per_ampere, is_density), form = units
    voltage = np.linspace(-0.1, 1.1, count)[:: -1 if down else 1]
    current = 21.5 - 1e-9 * np.expm1(voltage / 0.045)  # an invented diode
    precise = Dialect(**{**dialect.__dict__, "number": "{:.9e}"})
    rows = [(float(v / per_volt), float(sign * j / per_ampere)) for v, j in zip(voltage, current, strict=True)]
    text = read_measured(precise.write([form.format("Voltage", volt), form.format("Current", ampere)], rows), "s.txt")
    reading = guess(text)
    (sweep,) = apply(text, reading)
    assert isinstance(sweep, JvSweep)
    assert np.allclose(sweep.voltage, voltage, rtol=1e-9, atol=1e-12)  # ten digits were written
    assert np.allclose(sweep.current, current, rtol=1e-9, atol=1e-8)
    assert (sweep.is_density, sweep.lit) == (is_density, True)
    assert sweep.direction == ("reverse" if down else "forward")
    assert reading.questions == ()


_POINTS = st.lists(
    st.tuples(st.floats(300, 1200), st.floats(0, 1)), min_size=3, max_size=40, unique_by=lambda point: round(point[0])
)


@settings(max_examples=200, deadline=None)
@given(
    dialects(),
    st.sampled_from([("nm", 1.0), ("um", 1e-3), ("µm", 1e-3), ("eV", None)]),
    st.sampled_from([("%", 100.0), ("fraction", 1.0)]),
    _POINTS,
)
def test_an_efficiency_comes_back(
    dialect: Dialect, x: tuple[str, float | None], y: tuple[str, float], points: list[tuple[float, float]]
) -> None:
    precise = Dialect(**{**dialect.__dict__, "number": "{:.9e}"})
    x_name = "Energy" if x[1] is None else "Wavelength"
    rows = [(EV_NM / nm if x[1] is None else nm * x[1], eqe * y[1]) for nm, eqe in points]
    text = read_measured(precise.write([f"{x_name} ({x[0]})", f"EQE ({y[0]})"], rows), "e.txt")
    reading = guess(text)
    (curve,) = apply(text, reading)
    assert isinstance(curve, EqeCurve)
    points = sorted(points)
    assert np.allclose(curve.wavelength, [nm for nm, _ in points], rtol=2e-9, atol=0)  # ten digits were written
    assert np.allclose(curve.eqe, [eqe for _, eqe in points], rtol=2e-9, atol=1e-300)
    assert reading.questions == ()
