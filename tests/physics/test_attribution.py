"""Sharing a difference of power among its factors."""

import math
from decimal import Decimal, localcontext

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from physics.attribution import ATTRIBUTIONS, Attribution, factor_weights, log_mean
from physics.cell import Cell
from physics.ledger import ledger_of
from physics.spectrum import reference_spectrum

from .published import LADDER_EXAMPLE, LMDI_AFTER, LMDI_BEFORE, LMDI_EFFECTS, LOG_MEAN_EXAMPLE

POSITIVE = st.floats(1e-12, 1e12)


def _precise(a: float, b: float) -> float:
    """(a − b)/ln(a/b) with 60 digits."""
    if a == b:
        return a
    with localcontext() as context:
        context.prec = 60
        x, y = Decimal(a), Decimal(b)
        return float((x - y) / (x / y).ln())


@settings(deadline=None)
@given(POSITIVE, POSITIVE)
def test_log_mean_to_all_digits(a: float, b: float) -> None:
    assert float(log_mean(a, b)) == pytest.approx(_precise(a, b), rel=1e-15)


@settings(deadline=None)
@given(st.floats(1e-3, 1e3), st.floats(-16.0, -1.0), st.sampled_from([-1, 1]))
def test_log_mean_of_neighbours_loses_no_digits(a: float, exponent: float, sign: int) -> None:
    b = a * (1 + sign * 10.0**exponent)
    assert float(log_mean(a, b)) == pytest.approx(_precise(a, b), rel=1e-15)
    near = math.nextafter(a, math.inf)
    assert float(log_mean(a, near)) == pytest.approx(a, rel=5e-16)


@settings(deadline=None)
@given(POSITIVE, POSITIVE)
def test_log_mean_is_symmetric_and_lies_between_the_two_other_means(a: float, b: float) -> None:
    mean = float(log_mean(a, b))
    assert mean == float(log_mean(b, a))
    slack = 1 + 1e-14
    assert math.sqrt(a) * math.sqrt(b) <= mean * slack
    assert mean <= 0.5 * (a + b) * slack


@settings(deadline=None)
@given(POSITIVE, st.floats(1e-6, 1e6), POSITIVE)
def test_log_mean_scales(a: float, factor: float, b: float) -> None:
    assert float(log_mean(factor * a, factor * b)) == pytest.approx(factor * float(log_mean(a, b)), rel=1e-12)


def test_log_mean_of_equals_and_of_extremes() -> None:
    np.testing.assert_array_equal(log_mean([1.0, 3.7], [1.0, 3.7]), [1.0, 3.7])
    assert float(log_mean(1e-20, 1.0)) == pytest.approx(1 / (20 * math.log(10)), rel=1e-14)
    assert float(log_mean(1.0, 1e-300)) == pytest.approx(1 / (300 * math.log(10)), rel=1e-14)


def test_log_mean_where_there_is_none() -> None:
    assert np.isnan(log_mean([0.0, 1.0, -1.0, 2.0, np.nan, 1.0, 0.0], [1.0, 0.0, 2.0, -1.0, 1.0, np.nan, 0.0])).all()
    mixed = log_mean([1.0, -1.0], [2.0, 2.0])
    assert mixed[0] == float(log_mean(1.0, 2.0))
    assert log_mean(np.ones((2, 1)), np.ones(3)).shape == (2, 3)


def test_published_decomposition() -> None:
    after, before = (tuple(np.array(x).T) for x in (LMDI_AFTER, LMDI_BEFORE))
    weights = factor_weights(after, before, "log-mean")
    effects = [float(np.sum(w * (t - b))) for w, t, b in zip(weights, after, before, strict=True)]
    assert sum(effects) == pytest.approx(100.0, abs=1e-12)  # 180 − 80
    for effect, wanted in zip(effects, LMDI_EFFECTS, strict=True):
        assert effect == pytest.approx(wanted.value, abs=wanted.rounding)


@pytest.mark.parametrize(("attribution", "wanted"), [("log-mean", LOG_MEAN_EXAMPLE), ("ladder", LADDER_EXAMPLE)])
def test_worked_example(attribution: Attribution, wanted: tuple[object, ...]) -> None:
    top, bottom = (tuple(np.array(x) for x in row) for row in ((40.0, 1.0, 0.9), (36.0, 0.8, 0.75)))
    assert len(top) == len(bottom) == 3
    weights = factor_weights((top[0], top[1], top[2]), (bottom[0], bottom[1], bottom[2]), attribution)
    losses = [float(w * (t - b)) for w, t, b in zip(weights, top, bottom, strict=True)]
    assert sum(losses) == pytest.approx(14.4, abs=1e-13)  # 36 − 21.6
    for loss, value in zip(losses, wanted, strict=True):
        assert loss == pytest.approx(value.value, abs=value.rounding + 1e-13)  # type: ignore[attr-defined]


TRIPLE = st.tuples(*[st.floats(1e-3, 1e3)] * 3)


@settings(deadline=None, max_examples=200)
@given(TRIPLE, TRIPLE, st.sampled_from(ATTRIBUTIONS))
def test_shares_add_up(top: tuple[float, ...], bottom: tuple[float, ...], attribution: Attribution) -> None:
    a, b = (np.array(top), np.array(bottom))
    weights = factor_weights((a[0], a[1], a[2]), (b[0], b[1], b[2]), attribution)
    whole = float(np.prod(a) - np.prod(b))
    assert sum(float(w * (t - u)) for w, t, u in zip(weights, a, b, strict=True)) == pytest.approx(
        whole, rel=0, abs=1e-13 * float(np.prod(np.maximum(a, b)))
    )


@settings(deadline=None)
@given(TRIPLE, TRIPLE, st.permutations([0, 1, 2]))
def test_log_mean_knows_no_order(top: tuple[float, ...], bottom: tuple[float, ...], order: list[int]) -> None:
    a, b = np.array(top), np.array(bottom)
    straight = np.array(factor_weights((a[0], a[1], a[2]), (b[0], b[1], b[2]), "log-mean"))
    p, q = a[order], b[order]
    turned = np.array(factor_weights((p[0], p[1], p[2]), (q[0], q[1], q[2]), "log-mean"))
    np.testing.assert_allclose(turned, straight[order], rtol=1e-13)


def test_other_attributions_are_refused() -> None:
    cell = Cell.of(gap=1.12, voc=0.7, jsc=40.0, ff=0.8)
    with pytest.raises(ValueError, match="log-mean, ladder"):
        ledger_of(cell, reference_spectrum("am15g"), "shapley")  # type: ignore[arg-type]
