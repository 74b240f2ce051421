"""Readings: what is guessed without words, what a person may change, and what is remembered."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest

from app.files.measured import (
    EqeCurve,
    JvSweep,
    MeasuredText,
    Pairs,
    Reading,
    Trace,
    apply,
    guess,
    read_measured,
    reading_from_json,
    reading_to_json,
    remembered,
    shape_key,
)
from app.files.measured.legs import legs_of
from app.files.table_error import TableError

V = np.linspace(-0.2, 1.2, 57)
LIGHT = 21.5 - 1e-9 * np.expm1(V / 0.045)  # an invented diode [mA cm⁻²]
DARK = LIGHT - 21.5


def table(*columns: np.ndarray, names: str = "", delimiter: str = "\t") -> MeasuredText:
    rows = [delimiter.join(f"{value:.7g}" for value in row) for row in zip(*columns, strict=True)]
    return read_measured("\n".join([*([names] if names else []), *rows]).encode(), "cell.txt")


def sweeps(text: MeasuredText, reading: Reading | None = None) -> list[JvSweep]:
    curves = apply(text, reading or guess(text))
    assert all(isinstance(curve, JvSweep) for curve in curves)
    return [curve for curve in curves if isinstance(curve, JvSweep)]


@pytest.mark.parametrize("x_sign", [1, -1])
@pytest.mark.parametrize("y_sign", [1, -1])
@pytest.mark.parametrize("order", [1, -1], ids=["up", "down"])
@pytest.mark.parametrize(("current", "lit"), [(LIGHT, True), (DARK, False), (LIGHT - 21.29, True)])
def test_signs_and_light_are_told_from_the_shape(
    x_sign: int, y_sign: int, order: int, current: np.ndarray, lit: bool
) -> None:
    """Also where the light is a hundredth of a sun, and the current at 1.2 V two thousand times its photocurrent."""
    text = table(x_sign * V[::order], y_sign * current[::order], names="V (V)\tJ (mA/cm2)")
    (sweep,) = sweeps(text)
    assert np.allclose(sweep.voltage, V[::order], rtol=1e-6, atol=1e-12)  # seven digits were written
    assert np.allclose(sweep.current, current[::order], rtol=1e-6, atol=1e-12)
    assert sweep.lit is lit
    assert guess(text).questions == ()


def test_a_dark_sweep_has_the_signs_of_the_light_one() -> None:
    leaky = -0.01 * V  # a shunt, the same in both directions: alone it would not tell which end is positive
    text = table(V, -LIGHT, -leaky, names="V (V)\tJ light (mA/cm2)\tJ dark (mA/cm2)")
    light, dark = sweeps(text)
    assert np.allclose(light.current, LIGHT, rtol=1e-6)
    assert np.allclose(dark.current, leaky, rtol=1e-6, atol=1e-12)
    assert (light.lit, dark.lit) == (True, False)


def test_words_that_the_numbers_belie_are_asked_about() -> None:
    text = table(V, LIGHT, names="V (V)\tJ dark (mA/cm2)")
    assert guess(text).questions == ("The sweep at line 2 is called dark, but carries a current at 0 V: is it?",)


def test_more_current_than_sunlight_gives_is_asked_about() -> None:
    text = table(V, LIGHT * 10, names="V (V)\tJ (mA/cm2)")
    assert guess(text).questions == (
        "The sweep at line 2 carries 215 mA/cm² at 0 V, more than all sunlight gives: is the unit right?",
    )
    (trace,) = (reading := guess(text)).traces
    (sweep,) = sweeps(text, replace(reading, traces=(replace(trace, y_unit="A/m²"),)))
    assert np.allclose(sweep.current, LIGHT, rtol=1e-6)


@pytest.mark.parametrize(
    ("word", "order", "verb", "seen"), [("Forward", -1, "fall", "reverse"), ("rev", 1, "rise", "forward")]
)
def test_a_direction_that_the_voltages_belie_is_asked_about(word: str, order: int, verb: str, seen: str) -> None:
    text = table(V[::order], LIGHT[::order], names=f"V (V)\tJ {word} (mA/cm2)")
    called = "forward" if word == "Forward" else "reverse"
    assert guess(text).questions == (
        f"The sweep at line 2 is called {called}, but its voltages {verb}: it is taken as {seen}.",
    )
    assert [sweep.direction for sweep in sweeps(text)] == [seen]


def test_results_above_a_sweep_are_left_out() -> None:
    results = "Voc (V)\tJsc (mA/cm2)\tFF (%)\n1.08\t21.5\t79\n1.07\t21.4\t78\n1.06\t21.4\t78\n\n"
    rows = "".join(f"{j:.7g}\t{v:.7g}\n" for v, j in zip(V, LIGHT, strict=True))
    text = read_measured(f"{results}J (mA/cm2)\tV (V)\n{rows}".encode(), "cell.txt")
    assert guess(text).kind == "jv"
    assert guess(text).questions == ("The table at line 2 is a light-intensity series: it is left out.",)
    (sweep,) = sweeps(text)
    assert np.allclose(sweep.current, LIGHT, rtol=1e-6)


def test_currents_may_stand_before_their_voltages() -> None:
    names = "I1 (mA)\tV1 (V)\tI2 (mA)\tV2 (V)"
    one, two = sweeps(table(LIGHT, V, DARK, V[::-1], names=names))
    assert np.allclose(one.voltage, V, rtol=1e-6, atol=1e-12)
    assert np.allclose(two.voltage, V[::-1], rtol=1e-6, atol=1e-12)


def test_every_guess_can_be_changed() -> None:
    text = table(V, LIGHT, V * 1000, names="a\tb\tc")
    changed = Reading(
        kind="jv",
        traces=(
            Trace(0, 3, 2, "mV", "A", x_sign=-1, y_sign=-1, label="mine", direction="reverse", lit=None, area_cm2=2.0),
        ),
        delimiter="\t",
        decimal=".",
        split=False,
    )
    (sweep,) = sweeps(text, changed)
    assert np.allclose(sweep.voltage, -V, rtol=1e-6, atol=1e-12)
    assert np.allclose(sweep.current, -1000 * LIGHT, rtol=1e-6)
    assert (sweep.label, sweep.direction, sweep.lit, sweep.area_cm2) == ("mine", "reverse", None, 2.0)
    assert not sweep.is_density


def test_the_kind_can_be_chosen() -> None:
    text = table(np.array([2.0, 10.0, 21.0]), np.array([0.9, 0.95, 1.0]), names="first\tsecond")
    assert guess(text).kind == "unknown"
    assert guess(text).traces == ()
    (series,) = apply(text, guess(text, "intensity"))
    assert isinstance(series, Pairs)
    assert list(series.voc) == [0.9, 0.95, 1.0]
    (curve,) = apply(wide := table(np.array([300.0, 400.0, 500.0]), np.array([1.0, 2.0, 90.0])), guess(wide, "eqe"))
    assert isinstance(curve, EqeCurve)


def test_unused_traces_are_left_out() -> None:
    text = table(V, LIGHT, DARK, names="V (V)\tJ1 (mA/cm2)\tJ2 (mA/cm2)")
    reading = guess(text)
    first, second = reading.traces
    (sweep,) = sweeps(text, replace(reading, traces=(replace(first, used=False), second)))
    assert np.allclose(sweep.current, DARK, rtol=1e-6, atol=1e-12)
    with pytest.raises(TableError, match="cannot be told"):
        apply(text, replace(reading, traces=()))


def test_the_doubtful_decimal_mark_is_a_choice() -> None:
    data = "Voltage (mV)\tCurrent (µA)\n1,000\t1,935\n1,100\t1,926\n1,150\t1,917\n1,200\t1,881\n".encode()
    text = read_measured(data, "cell.txt")
    (sweep,) = sweeps(text, replace(guess(text), decimal="."))
    assert list(sweep.voltage) == [1.0, 1.1, 1.15, 1.2]
    assert np.allclose(sweep.current, [1.935, 1.926, 1.917, 1.881], rtol=1e-15)
    assert guess(read_measured(data, "cell.txt", decimal=".")).questions == ()


def test_the_delimiter_is_a_choice() -> None:
    data = b"0,1\t2,1\n0,2\t2,2\n0,3\t2,4\n"
    text = read_measured(data, "cell.txt")
    assert [list(column.values) for column in text.blocks[0].columns] == [[0.1, 0.2, 0.3], [2.1, 2.2, 2.4]]
    parted = read_measured(data, "cell.txt", ",", ".")
    assert list(parted.blocks[0].columns[2].values) == [1, 2, 4]
    reading = Reading("jv", (Trace(0, 3, 1, "V", "mA/cm²"),), ",", ".")
    (sweep,) = sweeps(text, reading)
    assert list(sweep.voltage) == [1, 2, 4]


def test_a_choice_is_remembered_for_the_next_file_of_the_shape() -> None:
    first = table(V, -LIGHT, names="U\tI")
    reading = guess(first)
    choice = replace(reading, traces=(replace(reading.traces[0], y_unit="A/m²", area_cm2=0.5, label="first"),))
    again = reading_from_json(reading_to_json(choice))
    data = "U\tI\n" + "".join(f"{v:.4f}\t{-j:.6f}\n" for v, j in zip(V, LIGHT / 2, strict=True))
    data += "Area: 0.1 cm2\nU\tI\n" + "".join(f"{v:.4f}\t{-j:.6f}\n" for v, j in zip(V[::-1], LIGHT[::-1], strict=True))
    second = read_measured(data.encode(), "second.txt")
    assert shape_key(first) != ""
    taken = remembered(second, again)
    one, two = sweeps(second, taken)
    assert np.allclose(one.current, LIGHT / 20, rtol=1e-5, atol=1e-6)  # six decimals, and A/m²
    assert np.allclose(two.current, LIGHT[::-1] / 10, rtol=1e-5, atol=1e-6)
    assert (one.label, two.label) != ("first", "first")
    assert (one.area_cm2, two.area_cm2) == (0.1, 0.1)
    assert (one.direction, two.direction) == ("forward", "reverse")
    assert taken.questions == ()


def test_a_choice_for_more_columns_is_not_forced_on_fewer() -> None:
    wide, narrow = table(V, DARK, LIGHT), table(V, LIGHT)
    choice = replace(guess(wide), traces=(Trace(0, 1, 3, "V", "mA/cm²"),))
    assert remembered(narrow, choice) == guess(narrow)


def test_the_shape_depends_on_words_and_layout_alone() -> None:
    names = "V (V)\tJ cell 1 (mA/cm2)"
    key = shape_key(table(V, LIGHT, names=names))
    assert key == shape_key(table(V[::-1], DARK, names=names.replace("1", "27")))
    others = [
        table(V, LIGHT, names="V (mV)\tJ cell 1 (mA/cm2)"),
        table(V, LIGHT, names=names.replace("\t", ";"), delimiter=";"),
        table(V, LIGHT, LIGHT, names=names + "\tJ (mA/cm2)"),
        table(V, LIGHT, names="U (V)\tJ cell 1 (mA/cm2)"),
        table(V, LIGHT, names="Area: 1 cm2\n" + names),
    ]
    assert len({key, *map(shape_key, others)}) == 6


def good() -> dict[str, object]:
    fields: dict[str, object] = json.loads(reading_to_json(guess(table(V, LIGHT))))
    return fields


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("kind", "other"), ("delimiter", "|"), ("decimal", ";"), ("split", 1), ("traces", 7),
        ("traces", [{"block": 0}]), ("questions", None), ("more", 1),
    ],
)  # fmt: skip
def test_damaged_readings_are_refused(field: str, value: object) -> None:
    with pytest.raises(ValueError, match="This is no remembered reading"):
        reading_from_json(json.dumps({**good(), field: value}))


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("block", -1), ("block", True), ("x", 0), ("y", 1.5), ("x_unit", "furlong"), ("y_sign", 2), ("lit", "yes"),
        ("area_cm2", -1), ("area_cm2", float("nan")), ("direction", "up"), ("quantity", "iqe"), ("used", None),
        ("label", 3),
    ],
)  # fmt: skip
def test_damaged_traces_are_refused(field: str, value: object) -> None:
    fields = good()
    trace = json.loads(reading_to_json(guess(table(V, LIGHT))))["traces"][0]
    with pytest.raises(ValueError, match="This is no remembered reading"):
        reading_from_json(json.dumps({**fields, "traces": [{**trace, field: value}]}))


@pytest.mark.parametrize("text", ["", "[]", "null", "{", '{"traces": []}', "[" * 100_000, "1" * 2_000_000])
def test_what_is_no_reading_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match=r"This is (no|too long for a) remembered reading"):
        reading_from_json(text)


@pytest.mark.parametrize(
    ("trace", "message"),
    [
        (Trace(3, 1, 2, "V", "mA"), "“cell.txt” has 1 table, and number 4 was expected."),
        (Trace(0, 1, 9, "V", "mA"), "The table at line 1 of “cell.txt” has 2 columns, and column 9 was expected."),
        (
            Trace(0, 1, 2, "nm", "mA"),
            "Column 1 at line 1 of “cell.txt” has the unit “nm”: one of V, mV, µV was expected.",
        ),
        (Trace(0, 1, 2, "", "mA"), "Column 1 at line 1 of “cell.txt” has no unit: one of V, mV, µV was expected."),
    ],
)
def test_traces_that_do_not_fit_the_text(trace: Trace, message: str) -> None:
    with pytest.raises(TableError) as refusal:
        apply(table(V, LIGHT), Reading("jv", (trace,), "\t", "."))
    assert str(refusal.value) == message


@pytest.mark.parametrize(
    ("legs", "wanted"),
    [
        ([V], 1),
        ([V, V[::-1]], 2),
        ([V, V], 2),
        ([V, V, V], 3),
        ([V, V[::-1], V], 3),
        ([np.zeros(1), V], 1),
        ([np.linspace(0, 1.2, 40), np.linspace(1.2, -0.4, 50), np.linspace(-0.4, 0, 12)], 3),
    ],
)
def test_a_sweep_is_parted_where_it_turns(legs: list[np.ndarray], wanted: int) -> None:
    noise = np.random.default_rng(5).normal(0, 0.01, sum(map(len, legs)))  # of a step of 0.025 V
    for voltage in (np.concatenate(legs), np.concatenate(legs) + noise):
        found = legs_of(voltage)
        assert len(found) == wanted
        assert np.array_equal(np.concatenate([voltage[leg] for leg in found]), voltage)
        if wanted > 1:
            lengths = [leg.stop - leg.start for leg in found]
            assert np.allclose(lengths, [len(leg) for leg in legs], atol=2)  # noise moves the turn by a point or two
