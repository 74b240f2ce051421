"""Partial stacks: the lines that replace the non-radiative one, held against a model that recombines in parallel."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import e, k
from scipy.optimize import brentq

from physics.attribution import ATTRIBUTIONS, Attribution
from physics.cell import Cell
from physics.checks import failed
from physics.ledger import Ledger, ledger_of
from physics.lines import LINES, Basis
from physics.spectrum import reference_spectrum
from physics.stack_lines import lines_with
from physics.stacks import Luminescence, Stacks, voltage_at_one_sun, yield_at_one_sun

from .cells import random_cells
from .equations import evaluate, names_in

Array = NDArray[np.float64]
AM15G = reference_spectrum("am15g")
VT = k * 298.15 / e
CELL = {"gap": 1.6, "voc": 1.12, "jsc": 23.0, "ff": 0.79}


def fraction(value: float | Array) -> Luminescence:
    return Luminescence(fraction=np.asarray(value, dtype=float)[()])


def volts(value: float | Array) -> Luminescence:
    return Luminescence(voltage=np.asarray(value, dtype=float)[()])


def _random_stacks(count: int, contacts: int, finished: bool, seed: int, rescaled: bool = False) -> Stacks:
    rng = np.random.default_rng(seed)
    bare = 10.0 ** rng.uniform(-4.0, -0.5, count)
    with_one = tuple((f"contact {i}", fraction(bare * 10.0 ** rng.uniform(-2.0, 0.0, count))) for i in range(contacts))
    whole = fraction(bare * 10.0 ** rng.uniform(-3.0, 0.2, count)) if finished else None
    return Stacks(fraction(bare), with_one, whole, rescaled)


def _split(ledger: Ledger) -> dict[str, Array]:
    return {x.line.key: x.delta for x in ledger.entries if x.line.key.startswith("nonradiative")}


@pytest.mark.parametrize("attribution", ATTRIBUTIONS)
@pytest.mark.parametrize(("contacts", "finished"), list(product(range(4), (True, False))))
def test_they_are_the_line_that_they_replace(attribution: Attribution, contacts: int, finished: bool) -> None:
    count = 2000
    cells = random_cells(count, AM15G, seed=50 + contacts)
    stacks = _random_stacks(count, contacts, finished, seed=contacts)
    split = ledger_of(cells, AM15G, attribution, stacks=stacks)
    whole = ledger_of(cells, AM15G, attribution)
    parts = [x for x in split.entries if x.line.key.startswith("nonradiative")]
    assert len(parts) == 2 + contacts + finished
    np.testing.assert_allclose(sum(x.delta for x in parts), whole["nonradiative"].delta, rtol=0, atol=1e-13)
    assert np.abs(split.closure).max() < 1e-9
    np.testing.assert_allclose(split["voltage_residual"].delta, whole["voltage_residual"].delta, rtol=0, atol=0)
    assert [x.line.key for x in split.entries if x not in parts] == [
        x.line.key for x in whole.entries if x.line.key != "nonradiative"
    ]


@pytest.mark.parametrize("attribution", ATTRIBUTIONS)
def test_one_cell_equals_an_element_of_an_array(attribution: Attribution) -> None:
    cells, stacks = random_cells(5, AM15G, seed=2), _random_stacks(5, 2, True, seed=2)
    together = ledger_of(cells, AM15G, attribution, stacks=stacks)
    for i in range(5):
        mine = Stacks(
            fraction(stacks.bare.fraction[i]),
            tuple((name, fraction(y.fraction[i])) for name, y in stacks.contacts),
            fraction(stacks.finished.fraction[i]) if stacks.finished else None,
        )
        alone = ledger_of(cells[i], AM15G, attribution, stacks=mine)
        for one, all_ in zip(alone.entries, together.entries, strict=True):
            assert float(one.delta) == pytest.approx(float(all_.delta[i]), rel=0, abs=1e-14), one.line.key


def _solved(generation: float, emission: float, *others: float) -> float:
    """Splitting [V] at which emission and the other recombination, in units of it, balance the generation."""
    return float(brentq(lambda v: emission * np.exp(v / VT) * (1.0 + sum(others)) - generation, -1.0, 3.0, xtol=1e-14))


def test_contacts_that_recombine_in_parallel() -> None:
    """Yields come from solved splittings of a model; the ledger finds the model's recombination back."""
    ledger = ledger_of(Cell.of(**CELL), AM15G)
    radiative, j0, jsc = float(ledger.quantities.voc_rad), float(ledger.limit.j0), CELL["jsc"]
    bulk, front, back = 60.0, 400.0, 1500.0
    at = {
        "bare": _solved(jsc, j0, bulk),
        "front": _solved(jsc, j0, bulk, front),
        "back": _solved(jsc, j0, bulk, back),
        "finished": _solved(jsc, j0, bulk, front, back),
    }
    by_volts = {name: volts(v) for name, v in at.items()}
    by_yield = {name: fraction(np.exp((v - radiative) / VT)) for name, v in at.items()}
    for of in (by_volts, by_yield):
        for finished in (of["finished"], None):  # it is what absorber and contacts add up to
            stacks = Stacks(of["bare"], (("front", of["front"]), ("back", of["back"])), finished)
            split = _split(ledger_of(Cell.of(**CELL), AM15G, stacks=stacks))
            assert float(split["nonradiative_bulk"]) == pytest.approx(radiative - at["bare"], abs=1e-9)
            both = at["bare"] - at["finished"]
            share = float(split["nonradiative_interface:front"]) / both
            assert share == pytest.approx(front / (front + back), abs=1e-9)
            total = float(split["nonradiative_interface:front"] + split["nonradiative_interface:back"])
            assert total == pytest.approx(both, abs=1e-9)
            assert float(split.get("nonradiative_interface", np.zeros(()))) == pytest.approx(0.0, abs=1e-9)
            assert float(split["nonradiative_contact"]) == pytest.approx(at["finished"] - CELL["voc"], abs=1e-9)
            ladder = _split(ledger_of(Cell.of(**CELL), AM15G, "ladder", stacks=stacks))
            assert float(ladder["nonradiative_interface:front"]) == pytest.approx(at["bare"] - at["front"], abs=1e-9)
            step = at["front"] - at["finished"]
            assert float(ladder["nonradiative_interface:back"]) == pytest.approx(step, abs=1e-9)


def test_a_measured_ere_stands_in_the_sum() -> None:
    stacks = Stacks(fraction(0.02), (("transport layer", fraction(0.004)),), fraction(0.003))
    ledger = ledger_of(Cell.of(**CELL, ere=2e-3), AM15G, stacks=stacks)
    split = _split(ledger)
    assert float(split["nonradiative_contact"]) == pytest.approx(VT * np.log(0.003 / 0.002), abs=1e-12)
    assert float(sum(split.values())) == pytest.approx(-VT * np.log(2e-3), abs=1e-12)
    assert "nonradiative" not in ledger
    assert "nonradiative_interface:transport layer" in ledger


def test_other_light_levels() -> None:
    """A stack that recombines with one ideality alone: solved at ten suns and at one."""
    emission, other, ideality = 1e-20, 3e-12, 1.6

    def splitting(generation: float) -> float:
        return float(
            brentq(
                lambda v: other * np.exp(v / (ideality * VT)) - generation, 0.0, 3.0, xtol=1e-15
            )  # emission is too weak to enter the balance
        )

    def emitted(generation: float) -> float:
        return emission * float(np.exp(splitting(generation) / VT)) / generation

    for suns in (0.1, 1.0, 10.0, 300.0):
        found = yield_at_one_sun(emitted(20.0 * suns), suns, ideality)
        assert float(found) == pytest.approx(emitted(20.0), rel=1e-9)
        voltage = voltage_at_one_sun(splitting(20.0 * suns), suns, ideality, 298.15)
        assert float(voltage) == pytest.approx(splitting(20.0), abs=1e-12)
    assert float(yield_at_one_sun(0.01, 10.0, 1.0)) == 0.01  # with n = 1 a yield does not depend on the light


def test_how_they_are_known() -> None:
    contact = (("layer", fraction(1e-3)),)

    def bases(stacks: Stacks, **more: float) -> dict[str, tuple[Basis, str]]:
        ledger = ledger_of(Cell.of(**CELL, **more), AM15G, stacks=stacks)
        forms = {x.line.key: x.form_at() for x in ledger.entries if x.line.key.startswith("nonradiative")}
        return {key: (form.basis, form.reason) for key, form in forms.items() if form is not None}

    measured = bases(Stacks(fraction(1e-2), contact, fraction(1e-3)))
    assert measured["nonradiative_bulk"][0] is Basis.MEASURED
    assert measured["nonradiative_interface:layer"][0] is Basis.MEASURED
    assert measured["nonradiative_contact"][0] is Basis.ASSUMED  # the radiative voltage is that of a step edge
    assert "step edge" in measured["nonradiative_contact"][1]
    eqe = {"eqe_above": 23.0, "eqe_below": 0.1, "j0_rad": 1e-21}
    assert bases(Stacks(fraction(1e-2), contact, fraction(1e-3)), **eqe)["nonradiative_contact"][0] is Basis.MEASURED
    implied = bases(Stacks(volts(1.2), (), volts(1.15)))
    assert implied["nonradiative_bulk"][0] is Basis.ASSUMED
    assert implied["nonradiative_contact"][0] is Basis.MEASURED
    rescaled = bases(Stacks(fraction(1e-2), contact, fraction(1e-3), rescaled=True))
    assert all(basis is Basis.ASSUMED and "one sun" in reason for basis, reason in rescaled.values())
    assert bases(Stacks(fraction(1e-2), contact))["nonradiative_contact"][0] is Basis.ASSUMED


@pytest.mark.parametrize("attribution", ATTRIBUTIONS)
@pytest.mark.parametrize(("finished", "rescaled"), [(True, False), (False, False), (True, True)])
def test_text_and_calculation_are_one(attribution: Attribution, finished: bool, rescaled: bool) -> None:
    cells = random_cells(300, AM15G, seed=9)
    stacks = _random_stacks(300, 3, finished, seed=9, rescaled=rescaled)
    q = ledger_of(cells, AM15G, attribution, stacks=stacks).quantities
    for line in lines_with(stacks, attribution):
        if line in LINES:
            continue
        for form in line.forms:
            assert names_in(form.equation)
            np.testing.assert_allclose(evaluate(form.equation, q), form.delta(q), rtol=1e-9, atol=1e-12)
            if form.implied is not None:
                np.testing.assert_allclose(evaluate(form.implied.equation, q), form.implied.value(q), rtol=1e-12)
    symbols = [q.meaning(name).symbol for name in q.more]
    assert len(set(symbols)) == len(symbols)


def test_what_cannot_be() -> None:
    def told(stacks: Stacks) -> set[str]:
        return {check.key for check, _ in failed(ledger_of(Cell.of(**CELL), AM15G, stacks=stacks))}

    assert told(Stacks(fraction(0.03), (("a", fraction(0.02)),), fraction(0.01))) == set()
    assert told(Stacks(volts(1.5), (), volts(1.2))) == {"stack_above_radiative"}
    assert told(Stacks(fraction(0.03), (), fraction(1e-9))) == {"stack_below_voc"}
    # Two contacts that both seem to take away half of the absorber's own recombination, and more.
    better = (("a", fraction(0.08)), ("b", fraction(0.09)))
    assert told(Stacks(fraction(0.03), better)) == {"stacks_contradict"}
