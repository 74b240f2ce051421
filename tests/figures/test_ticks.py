from __future__ import annotations

import itertools
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.figures.ticks import axis_ticks, tick_texts


@pytest.mark.parametrize(
    ("low", "high", "most", "expected"),
    [
        (0, 35, 8, [0, 5, 10, 15, 20, 25, 30, 35]),
        (20, 34, 8, [20, 22, 24, 26, 28, 30, 32, 34]),
        (0, 1, 6, [0, 0.2, 0.4, 0.6, 0.8, 1.0]),
        (-0.1, 1.0, 4, [0, 0.5, 1.0]),
        (1.25, 1.75, 3, [1.4, 1.6]),
        (35, 0, 4, [0, 10, 20, 30]),
        (7.0, 7.0, 5, [7.0]),
        (0.0, 0.0, 5, [0.0]),
        (math.nan, 1.0, 5, []),
        (0.0, math.inf, 5, []),
    ],
)
def test_ticks(low: float, high: float, most: int, expected: list[float]) -> None:
    assert axis_ticks(low, high, most) == pytest.approx(expected)


@given(
    st.floats(-1e9, 1e9),
    st.floats(1e-6, 1e9),
    st.integers(2, 20),
)
def test_ticks_are_round_even_and_inside(low: float, span: float, most: int) -> None:
    high = low + span
    ticks = axis_ticks(low, high, most)
    assert len(ticks) <= most
    slack = 1e-6 * span
    assert all(low - slack <= tick <= high + slack for tick in ticks)
    if len(ticks) > 2 and span > 1e-6 * abs(low):
        gaps = [b - a for a, b in itertools.pairwise(ticks)]
        assert max(gaps) - min(gaps) <= 1e-6 * span
        front = gaps[0] / 10 ** math.floor(math.log10(gaps[0]) + 1e-9)
        assert any(front == pytest.approx(factor, rel=1e-4) for factor in (1, 2, 5))


@given(st.floats(-1e4, 1e4), st.floats(0.01, 1e4), st.integers(3, 12))
def test_printed_ticks_are_the_ticks(low: float, span: float, most: int) -> None:
    ticks = axis_ticks(low, low + span, most)
    for tick, text in zip(ticks, tick_texts(ticks), strict=True):
        if "·" not in text:
            assert float(text.replace("−", "-")) == pytest.approx(tick, abs=1e-9 * (1 + abs(tick)))
    assert len(set(tick_texts(ticks))) == len(ticks)


@pytest.mark.parametrize(
    ("ticks", "expected"),
    [
        ([0.0, 0.5, 1.0], ["0.0", "0.5", "1.0"]),
        ([-20.0, 0.0, 20.0], ["−20", "0", "20"]),
        ([-0.05, 0.0, 0.05], ["−0.05", "0.00", "0.05"]),
        ([0.0, 2e-7, 4e-7], ["0", "2·10⁻⁷", "4·10⁻⁷"]),
        ([-2e-13, 0.0, 8e-13], ["−2·10⁻¹³", "0", "8·10⁻¹³"]),
        ([1.5e6, 2.0e6], ["1.5·10⁶", "2.0·10⁶"]),
        ([7.0], ["7"]),
        ([1.5], ["1.5"]),
        ([0.0], ["0"]),
        ([], []),
    ],
)
def test_texts(ticks: list[float], expected: list[str]) -> None:
    assert tick_texts(ticks) == expected
