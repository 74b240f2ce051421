from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.figures.spread import needed, spread
from app.figures.staircase import share_out


def test_items_with_room_stand_centred_on_their_targets() -> None:
    assert spread([10, 10], [20, 60], 0, 100, 2) == [15, 55]


def test_items_that_collide_share_the_shift() -> None:
    assert spread([20, 20], [50, 50], 0, 100, 2) == [29, 51]


def test_the_ends_hold() -> None:
    assert spread([20, 20], [0, 100], 0, 100, 2) == [0, 80]


@given(
    st.lists(st.tuples(st.floats(0, 30), st.floats(0, 200)), min_size=1, max_size=8),
    st.floats(0, 5),
)
def test_no_two_items_overlap(items: list[tuple[float, float]], gap: float) -> None:
    widths = [width for width, _ in items]
    targets = sorted(target for _, target in items)
    high = max(200.0, needed(widths, gap))
    lefts = spread(widths, targets, 0.0, high, gap)
    for i in range(1, len(lefts)):
        assert lefts[i] >= lefts[i - 1] + widths[i - 1] + gap - 1e-6
    assert lefts[0] >= -1e-6
    assert lefts[-1] + widths[-1] <= high + 1e-6


@given(st.lists(st.floats(1, 40), min_size=1, max_size=16), st.floats(1, 900))
def test_rows_share_the_height(needs: list[float], room: float) -> None:
    heights = share_out(needs, room)
    assert sum(heights) == pytest.approx(room)
    if sum(needs) <= room:
        assert all(height >= need - 1e-9 for height, need in zip(heights, needs, strict=True))
        lowest = min(heights)
        assert all(
            height == pytest.approx(lowest) or height == pytest.approx(need)
            for height, need in zip(heights, needs, strict=True)
        )
