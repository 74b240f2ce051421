"""Every awkward file of tests/data/measured reads as what it is, or is refused in the words that help."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.files.measured import (
    EqeCurve,
    Irradiance,
    JvSweep,
    MeasuredCurve,
    Pairs,
    apply,
    guess,
    read_measured,
    reading_from_json,
    reading_to_json,
    shape_key,
)
from app.files.table_error import TableError
from tests.files.measured.expected import READ, REFUSED, Case, Curve, Sweep

DATA = Path(__file__).parents[2] / "data" / "measured"


def check_sweep(found: MeasuredCurve, wanted: Sweep) -> None:
    assert isinstance(found, JvSweep)
    assert np.allclose(found.voltage, wanted.voltage, rtol=1e-15, atol=0)  # one rounding
    assert np.allclose(found.current, wanted.current, rtol=1e-6, atol=1e-15)  # written with 6 digits in some files
    assert not np.signbit(found.voltage[found.voltage == 0]).any()
    assert (found.is_density, found.direction, found.lit) == (wanted.is_density, wanted.direction, wanted.lit)
    assert found.area_cm2 == wanted.area_cm2
    if wanted.label:
        assert found.label == wanted.label
    assert found.label


def check_curve(found: MeasuredCurve, wanted: Curve) -> None:
    assert not isinstance(found, JvSweep)
    match found:
        case EqeCurve():
            columns = (found.wavelength, found.eqe)
            assert found.quantity == wanted.quantity
        case Irradiance():
            columns = (found.wavelength, found.irradiance)
        case Pairs():
            columns = (found.jsc, found.voc)
            assert (found.is_density, found.area_cm2) == (wanted.is_density, wanted.area_cm2)
    assert np.allclose(columns[0], wanted.x, rtol=1e-12, atol=0)
    assert np.allclose(columns[1], wanted.y, rtol=1e-12, atol=0)
    if wanted.label:
        assert found.label == wanted.label


@pytest.mark.parametrize("case", READ, ids=[case.name for case in READ])
def test_a_file_reads_as_what_it_is(case: Case) -> None:
    text = read_measured((DATA / case.name).read_bytes(), case.name)
    reading = guess(text)
    assert text.encoding == case.encoding
    assert text.problems == case.problems
    assert reading.questions == case.questions
    assert reading.kind == case.kind
    curves = apply(text, reading)
    assert len(curves) == len(case.curves)
    for found, wanted in zip(curves, case.curves, strict=True):
        if isinstance(wanted, Sweep):
            check_sweep(found, wanted)
        else:
            check_curve(found, wanted)
    assert reading_from_json(reading_to_json(reading)) == reading
    assert len({curve.label for curve in curves}) == len(curves)


@pytest.mark.parametrize(("name", "message"), REFUSED, ids=[name for name, _ in REFUSED])
def test_a_file_is_refused(name: str, message: str) -> None:
    with pytest.raises(TableError) as refusal:
        apply(text := read_measured((DATA / name).read_bytes(), name), guess(text))
    assert str(refusal.value) == message


def test_every_file_has_its_entry() -> None:
    named = [case.name for case in READ] + [name for name, _ in REFUSED]
    assert sorted(named) == sorted(path.name for path in DATA.iterdir())


def test_the_shape_is_that_of_the_layout() -> None:
    keys: dict[str, str] = {}
    for case in READ:
        keys[case.name] = shape_key(read_measured((DATA / case.name).read_bytes(), case.name))
    alike = {name for name, key in keys.items() if key == keys["tab_plain.txt"]}
    assert alike == {
        "tab_plain.txt", "utf16le_bom.txt", "utf16be_bom.txt", "utf16be_no_bom.txt", "cr_only.txt", "up_and_down.txt",
        "two_sweeps_blank_line.txt", "twice_the_same_way.txt", "descending.txt", "duplicate_points.txt", "overload.txt",
        "voltage_of_other_sign.txt", "double_spaced.txt", "stray_quote.txt",
    }  # fmt: skip
