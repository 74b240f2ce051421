"""The equation that a line shows is the one that it is computed by."""

import numpy as np
import pytest

from physics.ledger import ledger_of
from physics.lines import CURRENT, FILL, LIMIT_FILL, LIMIT_VOLTAGE, LINES, POWER, VOLTAGE, Factor, Form, Line
from physics.quantities import Quantities, meaning
from physics.spectrum import reference_spectrum

from .cells import random_cells
from .equations import evaluate, names_in

NAMES = set(Quantities.__dataclass_fields__) - {"more"}
LEDGER = ledger_of(random_cells(2000, reference_spectrum("am15g"), seed=31), reference_spectrum("am15g"))
FORMS = [pytest.param(line, form, id=f"{line.key}-{k}") for line in LINES for k, form in enumerate(line.forms)]
FACTORS = [POWER, LIMIT_VOLTAGE, LIMIT_FILL, CURRENT, VOLTAGE, FILL]


def test_every_name_is_a_quantity() -> None:
    for line in LINES:
        for form in line.forms:
            assert names_in(form.equation)
            assert names_in(form.equation) <= NAMES
            if form.implied is not None:
                assert names_in(form.implied.equation) <= NAMES
    for factor in FACTORS:
        assert names_in(factor.weight_equation) <= NAMES
    assert {id(line.factor) for line in LINES} == {id(factor) for factor in FACTORS}


@pytest.mark.parametrize(("line", "form"), FORMS)
def test_text_and_calculation_are_one(line: Line, form: Form) -> None:
    q = LEDGER.quantities
    text, computed = evaluate(form.equation, q), form.delta(q)
    np.testing.assert_array_equal(np.isnan(text), np.isnan(computed))
    np.testing.assert_allclose(text, computed, rtol=1e-13, atol=1e-15)
    used = LEDGER[line.key].form == line.forms.index(form)
    assert used.any(), "no random cell uses this form"
    assert not np.isnan(text[used]).any()
    np.testing.assert_allclose(LEDGER[line.key].delta[used], text[used], rtol=1e-13, atol=1e-15)


@pytest.mark.parametrize(("line", "form"), FORMS)
def test_implied_figures_too(line: Line, form: Form) -> None:
    if form.implied is None:
        return
    text = evaluate(form.implied.equation, LEDGER.quantities)
    np.testing.assert_allclose(form.implied.value(LEDGER.quantities), text, rtol=1e-13)


@pytest.mark.parametrize("line", LINES, ids=lambda line: line.key)
def test_loss_is_weight_times_change(line: Line) -> None:
    q, entry = LEDGER.quantities, LEDGER[line.key]
    weight = evaluate(line.factor.weight_equation, q) if line.factor.weight_equation else np.ones(q.incident.shape)
    np.testing.assert_allclose(entry.loss, weight * entry.delta, rtol=1e-14)


def test_the_weight_equations_of_the_limit_are_those_of_the_lines() -> None:
    factor: Factor
    for factor in FACTORS:
        if factor.weight_equation:
            np.testing.assert_array_equal(
                evaluate(factor.weight_equation, LEDGER.quantities), factor.weight(LEDGER.quantities)
            )
        else:
            assert (factor.weight(LEDGER.quantities) == 1).all()


def test_every_quantity_has_a_meaning_of_its_own() -> None:
    meanings = [meaning(name) for name in sorted(NAMES)]
    assert all(m.symbol and m.title for m in meanings)
    assert len({m.symbol for m in meanings}) == len(meanings)
    with pytest.raises(KeyError):
        meaning("no such thing")


def test_keys_and_names_of_lines_are_unique() -> None:
    for field in ("key", "title", "short"):
        values = [getattr(line, field) for line in LINES]
        assert len(set(values)) == len(values), field
    assert all(line.source and line.forms for line in LINES)
