"""The one-diode curve: the functions it is made of, its ends, its fill factor and the approximations of the trade."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.special import lambertw, wrightomega

from physics.diode import Diode, ideal_fill_factor, wright_omega
from physics.units import thermal_voltage

from . import brute
from .published import (
    EXACT_FILL_FACTOR,
    GREEN_ABOVE,
    GREEN_AT_TEN,
    GREEN_SERIES_ERROR,
    GREEN_SERIES_RANGE,
    GREEN_SHUNT_ERROR,
    GREEN_SHUNT_RANGE,
)

Array = NDArray[np.float64]
T = 298.15
VT = float(thermal_voltage(T))


def _random(count: int, seed: int) -> dict[str, Array]:
    """Curves that exist, from straight lines to sharp knees."""
    rng = np.random.default_rng(seed)
    voc, jsc = rng.uniform(0.2, 3.0, count), np.exp(rng.uniform(np.log(1e-3), np.log(1e3), count))
    ohm = 1e3 * voc / jsc
    rs = np.where(rng.random(count) < 0.3, 0.0, ohm * rng.uniform(0.0, 0.97, count))
    rsh = np.where(rng.random(count) < 0.3, np.inf, ohm * np.exp(rng.uniform(np.log(1.02), np.log(1e6), count)))
    temperature, ideality = rng.uniform(180.0, 450.0, count), np.exp(rng.uniform(np.log(0.3), np.log(8.0), count))
    return {"voc": voc, "jsc": jsc, "temperature": temperature, "ideality": ideality, "rs": rs, "rsh": rsh}


def _relative(v: Array, r: Array | float = 0.0, r_sh: Array | float = np.inf) -> Array:
    """Fill factor by v = Voc/(n Vt) and resistances in units of Voc/Jsc."""
    voc, jsc = 1.0, 25.0
    ohm = 1e3 * voc / jsc
    return Diode.through(voc, jsc, T, voc / (v * VT), np.multiply(r, ohm), np.multiply(r_sh, ohm)).fill_factor()


def test_wright_omega_is_that_of_scipy() -> None:
    y = np.concatenate([np.linspace(-30, 40, 14001), np.linspace(40, 2000, 4001)])
    # The equation itself carries |y| rounding errors, which a relative one of w shows.
    allowed = 4e-16 * (4 + np.minimum(np.abs(y), 30) * (y < 0))
    assert (np.abs(wright_omega(y) / wrightomega(y) - 1) < allowed).all()
    small = y[y < 700]
    np.testing.assert_allclose(wright_omega(small), lambertw(np.exp(small)).real, rtol=5e-15)


@settings(deadline=None)
@given(st.floats(-30.0, 2000.0))
def test_wright_omega_solves_its_equation(y: float) -> None:
    w = float(wright_omega(y))
    assert w + math.log(w) == pytest.approx(y, rel=1e-14, abs=1e-14)


def test_wright_omega_keeps_shapes_and_nan() -> None:
    assert wright_omega(1.0).shape == ()
    w = wright_omega([[1.0, np.nan], [0.0, 3.0]])
    assert w.shape == (2, 2)
    assert w[0, 0] == pytest.approx(1.0, abs=1e-15)  # 1 + ln 1 = 1
    np.testing.assert_array_equal(np.isnan(w), [[False, True], [False, False]])


@pytest.mark.parametrize("case", EXACT_FILL_FACTOR)
def test_exact_fill_factors(case: tuple[float, float, float]) -> None:
    wanted = EXACT_FILL_FACTOR[case]
    assert float(_relative(*(np.array(x) for x in case))) == pytest.approx(wanted.value, abs=wanted.rounding)
    if case[1:] == (0.0, math.inf):
        assert float(ideal_fill_factor(case[0])) == pytest.approx(wanted.value, abs=wanted.rounding)


def test_ideal_fill_factor_equals_the_search() -> None:
    v = np.exp(np.linspace(np.log(0.01), np.log(800.0), 400))
    np.testing.assert_allclose(ideal_fill_factor(v), _relative(v), rtol=1e-12)


def test_ideal_fill_factor_between_a_straight_line_and_a_rectangle() -> None:
    v = np.exp(np.linspace(np.log(1e-4), np.log(1e5), 500))
    ff = ideal_fill_factor(v)
    assert (np.diff(ff) > 0).all()
    assert ff[0] == pytest.approx(0.25 + 1e-4 / 16, rel=1e-9)  # series for small v, by hand: 1/4 + v/16
    assert 0.999 < ff[-1] < 1.0


def test_ideal_fill_factor_where_there_is_none() -> None:
    assert np.isnan(ideal_fill_factor([0.0, -3.0, np.nan, np.inf])).all()
    assert np.isfinite(ideal_fill_factor([np.nan, 20.0])[1])


def test_green_without_resistances() -> None:
    v = np.linspace(10.0, 80.0, 7001)
    error = np.abs((v - np.log(v + 0.72)) / (v + 1) / ideal_fill_factor(v) - 1)
    assert error.max() == error[0]
    assert error[0] == pytest.approx(GREEN_AT_TEN.value, abs=GREEN_AT_TEN.rounding)
    assert error[v > 12].max() == pytest.approx(GREEN_ABOVE.value, abs=GREEN_ABOVE.rounding)


def test_green_with_series_resistance() -> None:
    v, r = np.meshgrid(np.linspace(10.0, 60.0, 51), np.linspace(0.0, GREEN_SERIES_RANGE.value, 41))
    approximate = ideal_fill_factor(v) * (1 - 1.1 * r) + r**2 / 5.4
    error = np.abs(approximate - _relative(v, r))
    assert error.max() == pytest.approx(GREEN_SERIES_ERROR.value, abs=GREEN_SERIES_ERROR.rounding)
    assert error[r == 0].max() < 1e-12


def test_green_with_shunt_resistance() -> None:
    v, r_sh = np.meshgrid(np.linspace(10.0, 60.0, 51), np.linspace(GREEN_SHUNT_RANGE.value, 100.0, 196))
    ff0 = ideal_fill_factor(v)
    error = np.abs(ff0 * (1 - (v + 0.7) / v * ff0 / r_sh) - _relative(v, 0.0, r_sh))
    assert error.max() == pytest.approx(GREEN_SHUNT_ERROR.value, abs=GREEN_SHUNT_ERROR.rounding)


def test_fill_factor_equals_a_bounded_search() -> None:
    some = _random(150, seed=5)
    ours = Diode.through(**some).fill_factor()
    scale = some["ideality"] * some["temperature"] * VT / T
    columns = (some["voc"], some["jsc"], scale, some["rs"], some["rsh"])
    theirs = [brute.fill_factor(*row) for row in zip(*(c.tolist() for c in columns), strict=True)]
    np.testing.assert_allclose(ours, theirs, rtol=1e-9)


def test_power_is_stationary_and_highest_at_the_maximum_power_point() -> None:
    diode = Diode.through(**_random(3000, seed=6))
    voltage, current = diode.maximum_power()
    v, j = diode.curve(400)
    best = (v * j).max(axis=-1)
    power = voltage * current
    assert (power >= best * (1 - 1e-12)).all()
    assert (power <= best * (1 + 1e-3)).all()
    assert ((voltage > 0) & (voltage < diode.voc) & (current > 0) & (current <= diode.jsc * (1 + 1e-12))).all()


def test_curve_ends_in_jsc_and_voc() -> None:
    diode = Diode.through(**_random(3000, seed=7))
    v, j = diode.curve(50)
    assert v.shape == j.shape == (3000, 50)
    # A shunt near the straight line cancels most of its own current: what is left carries its rounding.
    load = 1 + diode.voc / (diode.jsc * diode.rsh * 1e-3) + diode.voc / diode.scale
    assert (np.abs(v[:, 0]) <= 1e-13 * diode.voc * load).all()
    assert (np.abs(j[:, 0] / diode.jsc - 1) <= 1e-13 * load).all()
    assert (np.abs(v[:, -1] / diode.voc - 1) <= 1e-13 * load).all()
    assert (np.abs(j[:, -1]) <= 1e-13 * diode.jsc * load).all()
    assert (np.diff(v, axis=-1) > 0).all()
    assert (np.diff(j, axis=-1) <= 1e-13 * (diode.jsc * load)[:, None]).all()


def test_ends_of_everyday_curves_to_1e_12() -> None:
    voc, jsc, rs = [0.738, 1.13, 1.6], [42.65, 25.0, 12.0], [0.3, 4.0, 0.0]
    diode = Diode.through(voc, jsc, T, [1.0, 1.7, 2.0], rs, [1e5, 2e3, np.inf])
    v, j = diode.curve()
    np.testing.assert_allclose(v[:, 0], 0.0, atol=1e-12)
    np.testing.assert_allclose(j[:, 0], diode.jsc, rtol=1e-12)
    np.testing.assert_allclose(v[:, -1], diode.voc, rtol=1e-12)
    np.testing.assert_allclose(j[:, -1], 0.0, atol=1e-12)


def test_curve_satisfies_the_implicit_equation() -> None:
    """J = J_L − J0 [exp((V + J Rs)/(n Vt)) − 1] − (V + J Rs)/Rsh with J_L and J0 from two equations, solved here."""
    some = _random(400, seed=8)
    diode = Diode.through(**some)
    v, j = diode.curve(40)
    ohm = 1e-3
    grown = np.exp((some["jsc"] * some["rs"] * ohm - some["voc"]) / diode.scale)  # over exp(Voc/nVt), as J0 is below
    ones = np.ones_like(grown)
    shade = np.exp(-some["voc"] / diode.scale)
    matrix = np.stack([np.stack([ones, shade - grown], -1), np.stack([ones, shade - 1.0], -1)], -2)
    right = np.stack([some["jsc"] * (1 + some["rs"] / some["rsh"]), some["voc"] / (some["rsh"] * ohm)], -1)
    light, dark = np.linalg.solve(matrix, right[..., None])[..., 0].T[..., None]
    u = v + j * (some["rs"] * ohm)[:, None]
    lift = np.exp((u - some["voc"][:, None]) / diode.scale[:, None]) - shade[:, None]
    implicit = light - dark * lift - u / (some["rsh"] * ohm)[:, None]
    largest = np.maximum(np.abs(light), np.abs(dark))
    assert (np.abs(implicit - j) <= 1e-12 * largest).all()


@pytest.mark.parametrize(
    "odd",
    [
        {"rs": 40.0},  # exactly Voc/Jsc
        {"rs": 1000.0},
        {"rs": 1e9},
        {"rs": -1.0},
        {"rs": np.nan},
        {"rs": np.inf},
        {"rsh": 40.0},
        {"rsh": 0.0},
        {"rsh": -5.0},
        {"rsh": np.nan},
        {"voc": 0.0},
        {"voc": -0.5},
        {"voc": np.nan},
        {"jsc": 0.0},
        {"jsc": -25.0},
        {"jsc": np.nan},
        {"ideality": 0.0},
        {"ideality": -1.0},
        {"ideality": np.nan},
        {"temperature": 0.0},
    ],
    ids=str,
)
def test_impossible_curves_are_nan_and_leave_the_others(odd: dict[str, float]) -> None:
    good = {"voc": 1.0, "jsc": 25.0, "temperature": T, "ideality": 1.5, "rs": 2.0, "rsh": 900.0}
    if "rsh" in odd:
        good |= {"rs": 0.0}
    mixed = {key: np.array([value, odd.get(key, value), value]) for key, value in good.items()}
    diode, alone = Diode.through(**mixed), Diode.through(**good)
    np.testing.assert_array_equal(diode.possible, [True, False, True])
    # The search for the maximum power goes on until every cell is there, so its point may move a little, to no effect
    # on the power, which is stationary.
    for value, single, rtol in (
        *((a, b, 1e-13) for a, b in zip(diode.curve(5), alone.curve(5), strict=True)),
        *((a, b, 1e-9) for a, b in zip(diode.maximum_power(), alone.maximum_power(), strict=True)),
        (diode.fill_factor(), alone.fill_factor(), 1e-14),
    ):
        assert np.isnan(value[1]).all()
        np.testing.assert_allclose(value[[0, 2]], np.stack([single, single]), rtol=rtol, atol=1e-13 * rtol)


def test_bounds_of_the_resistances() -> None:
    diode = Diode.through(1.0, 25.0, T, 1.0, [39.9, 40.0, 0.0, 0.0, 10.0], [np.inf, np.inf, 40.1, 40.0, 30.1])
    np.testing.assert_array_equal(diode.drop_below_voc, [True, False, True, True, True])
    np.testing.assert_array_equal(diode.shunt_above_line, [True, True, True, False, True])
    ff = diode.fill_factor()
    np.testing.assert_array_equal(np.isnan(ff), ~diode.possible)
    # Rs this near to Voc/Jsc leaves a straight line from (0, Jsc) to (Voc, 0), and so does the shunt.
    np.testing.assert_allclose(ff[[0, 2, 4]], 0.25, atol=0.005)
