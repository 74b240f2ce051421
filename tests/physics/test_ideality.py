"""The ideality with which a curve meets a fill factor, as the inverse of the fill factor."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from physics.diode import Diode, ideal_fill_factor
from physics.ideality import matching_ideality
from physics.units import thermal_voltage

T = 298.15
VT = float(thermal_voltage(T))


@settings(deadline=None, max_examples=150)
@given(
    st.floats(0.06, 1500.0), st.floats(0.1, 3.0), st.floats(0.01, 100.0), st.floats(200.0, 400.0),
    st.one_of(st.just(0.0), st.floats(0.0, 0.5)), st.one_of(st.just(math.inf), st.floats(3.0, 1e5)),
)
def test_matching_ideality_is_the_inverse(
    n: float, voc: float, jsc: float, temperature: float, r: float, r_sh: float
) -> None:
    ohm = 1e3 * voc / jsc
    rs, rsh = r * ohm, r_sh * ohm
    ff = float(Diode.through(voc, jsc, temperature, n, rs, rsh).fill_factor())
    back = float(matching_ideality(ff, voc, jsc, temperature, rs, rsh))
    assert back == pytest.approx(n, rel=1e-6)
    again = float(Diode.through(voc, jsc, temperature, back, rs, rsh).fill_factor())
    assert again == pytest.approx(ff, abs=2e-7)


def test_matching_ideality_on_every_point_of_its_own_grid() -> None:
    for count in (24, 64):
        n = np.exp(np.linspace(np.log(0.05), np.log(2000.0), count))[:-1]
        ff = ideal_fill_factor(1.0 / (n * VT))
        np.testing.assert_allclose(matching_ideality(ff, 1.0, 25.0, T), n, rtol=1e-6)


@pytest.mark.parametrize("factor", [0.5, 0.951, 0.99, 1.0, 1.0 + 1e-9, 1.049, 1.06, 20.0])
def test_a_hint_changes_nothing(factor: float) -> None:
    for n in (0.0501, 0.08, 0.9, 1.7, 40.0, 1990.0):
        ff = float(Diode.through(1.0, 25.0, T, n, 0.3, 2e3).fill_factor())
        hinted = float(matching_ideality(ff, 1.0, 25.0, T, 0.3, 2e3, n * factor))
        assert hinted == pytest.approx(n, rel=1e-6)
    for n in (0.0495, 2020.0):  # outside what is served, with and without a hint nearby
        ff = float(ideal_fill_factor(1.0 / (n * VT)))
        assert np.isnan(matching_ideality(ff, 1.0, 25.0, T))
        assert np.isnan(matching_ideality(ff, 1.0, 25.0, T, near=n * factor))
    two = matching_ideality([0.2, 0.8], 1.0, 25.0, T, near=factor)
    np.testing.assert_allclose(two, matching_ideality([0.2, 0.8], 1.0, 25.0, T), rtol=2e-6)


def test_matching_ideality_where_there_is_none() -> None:
    assert np.isnan(matching_ideality([0.25, 0.2, 0.0, -1.0, 1.0, 1.2, np.nan], 1.0, 25.0, T)).all()
    assert np.isnan(matching_ideality(0.8, [0.0, -1.0, np.nan], 25.0, T)).all()
    # Rs alone brings the fill factor below 0.7, and 0.9 needs n below 0.05 at 50 mV.
    assert np.isnan(matching_ideality(0.7, 1.0, 25.0, T, 15.0))
    assert np.isnan(matching_ideality(0.97, 0.05, 25.0, T))
    mixed = matching_ideality([0.2, 0.8], 1.0, 25.0, T)
    assert np.isnan(mixed[0])
    assert mixed[1] == pytest.approx(float(matching_ideality(0.8, 1.0, 25.0, T)), rel=1e-12)
    assert matching_ideality(np.full((2, 1), 0.8), np.ones(3), 25.0, T).shape == (2, 3)


def test_a_hint_saves_the_search_and_finds_the_same() -> None:
    rng = np.random.default_rng(8)
    found = 0
    for _ in range(300):
        n, rs, rsh = rng.uniform(0.7, 2.5), rng.choice([0.0, 4.0]), rng.choice([np.inf, 900.0])
        voc, jsc = rng.uniform(0.5, 1.3), rng.uniform(10.0, 42.0)
        ff = Diode.through(voc, jsc, T, n, rs, rsh).fill_factor()
        if np.isfinite(ff) and ff > 0.3:
            hinted = matching_ideality(ff, voc, jsc, T, rs, rsh, n * rng.uniform(0.97, 1.03))
            assert float(hinted) == pytest.approx(n, rel=1e-7)  # the search alone is good to 1e-6 only
            found += 1
    assert found > 200
