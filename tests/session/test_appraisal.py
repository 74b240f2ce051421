"""What is told about a cell's inputs, and which picture stays."""

import numpy as np
import pytest

from app.session.appraisal import appraise, field_problems
from app.session.commands import AddCells, SetValue
from app.session.fields import FIELD_BY_KEY, FIELDS
from app.session.light import light_named
from app.session.outcome import Outcomes, cell_curve
from app.session.session import Session
from app.session.state import CellEntry, Choices, State, Unread, Value
from physics.cell import Cell
from physics.checks import Severity
from physics.ledger import ledger_of

SOUND = {"gap": 1.6, "voc": 1.1, "jsc": 23.0, "ff": 78.0}


def _entry(spectrum: str = "am15g", **values: Value) -> CellEntry:
    entry = CellEntry(0, "cell", spectrum=spectrum)
    for key, value in (SOUND | values).items():
        entry = entry.with_value(key, value)
    return entry


def test_a_sound_cell_has_no_problem() -> None:
    appraisal = appraise(_entry(), Choices())
    assert appraisal.problems == ()
    assert appraisal.ledger is not None
    assert float(appraisal.ledger.efficiency) == pytest.approx(1.1 * 23.0 * 0.78 / 100)


REFUSED = [
    ({"voc": None}, "voc", "Voc is missing: type it in V."),
    ({"gap": None}, "gap", "Eg is missing: type it in eV."),
    ({"ff": Unread("abc", "no number.")}, "ff", "no number."),
    ({"ff": 120.0}, "ff", "FF must be above 1 and at most 100 %; give it in percent, such as 81.5."),
    ({"ff": 0.8}, "ff", "FF must be above 1 and at most 100 %; give it in percent, such as 81.5."),
    ({"jsc": -23.0}, "jsc", "Jsc must be above 0 and at most 100000 mA cm⁻²; give it positive, as a current density."),
    ({"voc": 1100.0}, "voc", "Voc must be above 0 and at most 5 V; give one cell's voltage in V."),
    ({"temperature": 298.0}, "temperature", "T must be at least −100 and at most 200 °C; give it in °C."),
    ({"ere": 2.0}, "ere", "ERE must be above 0 and at most 1; it is a fraction, such as 0.01 for 1 %."),
    ({"gap": 0.305}, "gap", "The spectrum covers gaps from 0.31 to 4.43 eV; this gap lies outside."),
    (
        {"voc": 1.4},
        "voc",
        "Voc is above the limit of 1.326 V for a gap of 1.6 eV: check Voc, its unit, and the gap.",
    ),
    (
        {"rs": 60.0},
        "rs",
        "Rs × Jsc would be more than Voc: no diode curve can do that. Give Rs in Ω cm², not in Ω.",
    ),
    (
        {"rsh": 40.0},
        "rsh",
        "So low an Rsh would draw more than Jsc before Voc is reached: no diode curve can do that. "
        "Give Rsh in Ω cm², not in Ω.",
    ),
    (
        {"jsc": 1e-300, "voc": 1e-300},
        "jsc",
        "The ledger of these figures is no finite number: one of them is far too small or too large.",
    ),
]


@pytest.mark.parametrize(("values", "field", "sentence"), REFUSED, ids=[f"{k}-{v[1]}" for k, v in enumerate(REFUSED)])
def test_what_is_refused_and_how(values: dict[str, Value], field: str, sentence: str) -> None:
    appraisal = appraise(_entry(**values), Choices())
    problem = appraisal.about(field)
    assert problem is not None
    assert problem.message == sentence
    assert problem.severity is Severity.IMPOSSIBLE
    assert appraisal.ledger is None


DOUBTFUL = [
    ({"jsc": 25.6}, "jsc", "Jsc is above the 25.46 mA cm⁻² that the light holds above this gap"),
    ({"ere": 0.5}, "ere", "This ERE and Voc disagree by more than 30 mV"),
    ({"ff": 90.0}, "ff", "FF is above that of an ideal diode with n = 1 at this Voc."),
    ({"ff": 24.0}, "ff", "An FF of 25 % or less means an S-shaped or straight J–V curve"),
    ({"pseudo_ff": 70.0}, "pseudo_ff", "The pseudo fill factor is below FF"),
]


@pytest.mark.parametrize(("values", "field", "start"), DOUBTFUL, ids=[v[1] for v in DOUBTFUL])
def test_what_is_doubtful_still_has_a_ledger(values: dict[str, Value], field: str, start: str) -> None:
    appraisal = appraise(_entry(**values), Choices())
    problem = appraisal.about(field)
    assert problem is not None
    assert problem.message.startswith(start)
    assert problem.severity is Severity.DOUBTFUL
    assert appraisal.ledger is not None
    assert abs(float(appraisal.ledger.closure)) < 1e-9


def test_every_fault_is_told_at_once() -> None:
    appraisal = appraise(_entry(voc=1.4, ff=120.0, rs=Unread("?", "no number.")), Choices())
    assert {p.field for p in appraisal.problems} == {"voc", "ff", "rs"}


@pytest.mark.parametrize("name", ["am2", "", "blackbody:cold", "blackbody:900", "cie:LED-B3@500lx"])
def test_unknown_light_is_told(name: str) -> None:
    problem = appraise(_entry(spectrum=name), Choices()).about("spectrum")
    assert problem is not None
    assert "blackbody:6000" in problem.message
    with pytest.raises(ValueError, match="blackbody:6000"):
        light_named(name)


@pytest.mark.parametrize("field", FIELDS, ids=lambda f: f.key)
def test_ends_of_each_range(field: object) -> None:
    from app.session.fields import Field

    assert isinstance(field, Field)
    low, high = field.range
    assert field.fault(high) == ""
    assert bool(field.fault(low)) is field.above
    assert field.symbol in field.fault(high * 1.001 + 1)
    assert field.fault(float("nan"))
    assert field_problems({field.key: high * 1.001 + 1})


def test_a_fault_keeps_the_last_picture_of_its_own_cell() -> None:
    session = Session(AddCells((_entry(), _entry(voc=None))).apply(State()))
    outcomes = Outcomes(session)
    good = outcomes.current()
    assert good.picture is not None
    assert not good.stale
    session.do(SetValue(1, "voc", 3.0))
    bad = outcomes.current()
    assert bad.stale
    assert bad.picture is good.picture
    session.pick(2)
    assert outcomes.current().picture is None
    session.undo()
    assert not outcomes.current().stale


def test_nothing_is_worked_out_twice() -> None:
    session = Session(AddCells((_entry(),)).apply(State()))
    outcomes = Outcomes(session)
    first = outcomes.current()
    session.pick_line("current")
    assert outcomes.current() is first


def test_the_drawn_curve_has_the_cells_own_figures() -> None:
    rng = np.random.default_rng(5)
    light = light_named("am15g")
    for _ in range(200):
        voc, jsc, ff = rng.uniform(0.5, 1.2), rng.uniform(5, 24), rng.uniform(0.3, 0.88)
        known = {"rs": rng.uniform(0, 5), "rsh": 10 ** rng.uniform(2.5, 5)} if rng.random() < 0.5 else {}
        ledger = ledger_of(Cell.of(gap=1.6, voc=voc, jsc=jsc, ff=ff, **known), light)
        curve = cell_curve(ledger)
        assert curve.voltage[0] == pytest.approx(0.0, abs=1e-9)
        assert curve.current[0] == pytest.approx(jsc)
        assert curve.voltage[-1] == pytest.approx(voc)
        assert curve.current[-1] == pytest.approx(0.0, abs=1e-9)
        # 160 drawn points find the maximum power to a few parts in ten thousand, and never above it
        assert np.max(curve.voltage * curve.current) == pytest.approx(voc * jsc * ff, rel=1e-3)
        assert np.max(curve.voltage * curve.current) <= voc * jsc * ff * (1 + 1e-6)


def test_typed_units_reach_the_field_in_its_own() -> None:
    assert FIELD_BY_KEY["voc"].read("738 mV") == 0.738
    assert FIELD_BY_KEY["ere"].read("5 %") == 0.05
    assert FIELD_BY_KEY["irradiance"].read("1000 W/m²") == 100.0
    assert FIELD_BY_KEY["rsh"].read("5 kΩ cm²") == 5000.0
