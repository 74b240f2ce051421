from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QRectF

from app.figures.curves import clipped, covered, dense, freest

FRAME = QRectF(0, 0, 10, 10)


def test_a_curve_inside_is_left_alone() -> None:
    x = np.array([1.0, np.nan, 9.0])
    kept, _ = clipped(x, x, FRAME)
    assert kept is x


def test_a_curve_is_cut_exactly_at_the_frame() -> None:
    x, y = clipped(np.array([-5.0, 15.0]), np.array([0.0, 10.0]), FRAME)
    assert x[1:] == pytest.approx([0.0, 10.0])
    assert y[1:] == pytest.approx([2.5, 7.5])


def test_a_curve_that_leaves_and_returns_is_broken() -> None:
    x, y = clipped(np.array([1.0, 5.0, 9.0]), np.array([5.0, 25.0, 5.0]), FRAME)
    pieces = np.count_nonzero(np.isnan(x))
    assert pieces == 2
    assert np.nanmax(y) == pytest.approx(10.0)


def test_breaks_stay_breaks() -> None:
    x, y = clipped(np.array([1.0, 2.0, np.nan, 4.0, 40.0]), np.array([1.0, 2.0, 3.0, 4.0, 4.0]), FRAME)
    assert np.isnan(x[0])
    assert np.isnan(x[3])
    assert x[-1] == pytest.approx(10.0)
    assert y[-1] == pytest.approx(4.0)


def test_random_curves_stay_inside() -> None:
    rng = np.random.default_rng(1)
    for _ in range(200):
        x, y = rng.uniform(-10, 20, (2, 30))
        a, b = clipped(x, y, FRAME)
        assert np.all((a >= -1e-9) & (a <= 10 + 1e-9) | np.isnan(a))
        assert np.all((b >= -1e-9) & (b <= 10 + 1e-9) | np.isnan(b))


def test_dense_points_leave_no_hole() -> None:
    points = dense(np.array([0.0, 10.0]), np.array([0.0, 0.0]), 0.5)
    assert np.diff(np.sort(points[:, 0])).max() <= 0.5 + 1e-9
    assert covered(points, QRectF(4, -1, 1, 2)) >= 2


def test_the_freest_place_is_found() -> None:
    points = dense(np.array([0.0, 10.0]), np.array([1.0, 1.0]), 0.2)
    cost, area = freest([QRectF(0, 0, 3, 2), QRectF(0, 5, 3, 2)], points, [], 0.1)
    assert cost == 0
    assert area == QRectF(0, 5, 3, 2)
