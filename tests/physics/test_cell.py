from dataclasses import fields

import numpy as np
import pytest

from physics.cell import Cell


def test_every_field_has_the_broadcast_shape() -> None:
    cell = Cell.of(gap=[[1.1], [1.5]], voc=0.7, jsc=[30.0, 31.0, 32.0], ff=0.8)
    assert cell.shape == (2, 3)
    assert all(getattr(cell, f.name).shape == (2, 3) for f in fields(cell))
    np.testing.assert_allclose(cell.power, np.broadcast_to(np.array([16.8, 17.36, 17.92]), (2, 3)))


def test_what_is_not_given() -> None:
    cell = Cell.of(gap=1.1, voc=0.7, jsc=30.0, ff=0.8)
    assert (float(cell.temperature), float(cell.irradiance)) == (298.15, 100.0)
    assert all(np.isnan(getattr(cell, name)) for name in ("ere", "ideality", "rs", "rsh", "pseudo_ff"))


def test_indexing() -> None:
    cell = Cell.of(gap=[1.1, 1.2], voc=[0.7, 0.8], jsc=30.0, ff=0.8)
    assert cell[1].shape == ()
    assert float(cell[1].voc) == 0.8
    assert cell[:1].shape == (1,)


def test_shapes_that_do_not_fit() -> None:
    with pytest.raises(ValueError, match="broadcast"):
        Cell.of(gap=[1.1, 1.2], voc=[0.7, 0.8, 0.9], jsc=30.0, ff=0.8)
