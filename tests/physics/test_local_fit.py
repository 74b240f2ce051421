"""The orthogonal factors that local fits rest on."""

import numpy as np
import pytest

from physics.local_fit import orthogonal


@pytest.mark.parametrize("order", [1, 3, 7, 9])
@pytest.mark.parametrize("points", [12, 300, 1500])
def test_they_are_those_of_numpy(order: int, points: int) -> None:
    x = np.sort(np.random.default_rng(points).uniform(-1.0, 1.0, points))
    design = np.vander(x, order + 1, increasing=True)
    q, r = orthogonal(design)
    wanted = np.linalg.qr(design)
    sign = np.sign(np.diag(wanted.R))
    np.testing.assert_allclose(q.T @ q, np.eye(order + 1), atol=1e-13)
    np.testing.assert_allclose(q @ r, design, atol=1e-13)
    np.testing.assert_allclose(r, sign[:, None] * wanted.R, rtol=1e-8, atol=1e-11)
    np.testing.assert_array_equal(r, np.triu(r))


def test_columns_that_say_the_same_fall_back_on_numpy() -> None:
    design = np.ones((20, 3))
    q, r = orthogonal(design)
    np.testing.assert_allclose(q @ r, design, atol=1e-14)
