"""Thermal radiation above a photon energy, against quadrature and the Stefan–Boltzmann law."""

import math
from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import c, e, h, k, sigma
from scipy.integrate import quad

from physics.emission import SUN_DILUTION, BlackBody, photon_current, radiant_power

from .published import FULL_CONCENTRATION, SQ_DILUTION

Array = NDArray[np.float64]

#: Eg/kT from the smallest that is served to the largest in use (4.5 eV at 173 K is 302).
X = (0.01, 0.02, 0.058, 0.3, 1.0, 2.166, 5.0, 12.0, 30.0, 100.0, 300.0)


def _tail(x: float, power: int) -> float:
    """∫ₓ^∞ tᵖ/(eᵗ − 1) dt, with eˣ divided out so that quadrature sees numbers near one."""

    def integrand(s: float) -> float:
        return (x + s) ** power * math.exp(-s) / -math.expm1(-x - s)

    edges = (0.0, 1.0, 5.0, 20.0, 60.0, 120.0)
    return math.exp(-x) * sum(quad(integrand, a, b, epsabs=0, epsrel=1e-13, limit=200)[0] for a, b in pairwise(edges))


@pytest.mark.parametrize("x", X)
@pytest.mark.parametrize("temperature", [298.15, 5772.0])
def test_series_equals_quadrature(x: float, temperature: float) -> None:
    kt = k * temperature
    gap = x * kt / e * (1 + 1e-15)
    hemisphere = 2 * math.pi / (h**3 * c**2)
    current = e * hemisphere * kt**3 * _tail(x, 2) * 0.1
    power = hemisphere * kt**4 * _tail(x, 3) * 0.1
    rtol = 1e-12 + 4e-16 * x  # the exponent itself carries x rounding errors
    np.testing.assert_allclose(photon_current(gap, temperature), current, rtol=rtol)
    np.testing.assert_allclose(radiant_power(gap, temperature), power, rtol=rtol)


@pytest.mark.parametrize("function", [photon_current, radiant_power])
def test_what_the_series_does_not_serve_is_nan_and_disturbs_nothing(function: Callable[..., Array]) -> None:
    kt = k * 298.15 / e
    gap = np.array([1.1, 0.0099 * kt, 0.0101 * kt, 0.0, -1.0, np.nan, np.inf])
    value = function(gap, 298.15)
    np.testing.assert_array_equal(np.isnan(value), [False, True, False, True, True, True, True])
    np.testing.assert_allclose(value[0], function(1.1, 298.15), rtol=1e-15)
    assert np.isnan(function(1.1, [0.0, -5.0, np.nan])).all()
    assert np.isnan(function(np.nan, 298.15))


def test_shapes_broadcast() -> None:
    assert photon_current(1.1, 300.0).shape == ()
    assert photon_current(np.ones((3, 1)), np.full(4, 300.0)).shape == (3, 4)
    assert radiant_power(np.ones((3, 1)), np.full(4, 300.0)).shape == (3, 4)


@pytest.mark.parametrize("temperature", [1000.0, 3000.0, 5772.0, 6000.0, 20000.0])
def test_power_of_a_sun_is_that_of_stefan_and_boltzmann(temperature: float) -> None:
    sun = BlackBody(temperature, 0.25)
    assert sun.power == pytest.approx(0.25 * sigma * temperature**4 * 0.1, rel=1e-12)
    x = 0.01 * (1 + 1e-12)
    rest = x**3 / 3 - x**4 / 8 + x**5 / 60  # ∫₀ˣ t³/(eᵗ − 1) dt for small x, in units of π⁴/15 below
    whole = float(sun.power_above(x * k * temperature / e))
    assert whole == pytest.approx(sun.power * (1 - rest * 15 / math.pi**4), rel=1e-12)


def test_sun_scales_with_its_dilution() -> None:
    full, thin = BlackBody(6000.0, 1.0), BlackBody(6000.0)
    gap = np.linspace(0.4, 3.0, 7)
    for ours, undiluted in (
        (thin.photon_current_above(gap), full.photon_current_above(gap)),
        (thin.power_above(gap), full.power_above(gap)),
    ):
        np.testing.assert_allclose(ours, SUN_DILUTION * undiluted, rtol=1e-15)
    assert thin.power == pytest.approx(SUN_DILUTION * full.power, rel=1e-15)


def test_dilution_is_the_sun_as_seen_from_the_earth() -> None:
    assert SQ_DILUTION.value == SUN_DILUTION
    astronomical_unit, solar_radius = 149_597_870_700.0, 695_700_000.0  # IAU 2012 and 2015, nominal
    assert (astronomical_unit / solar_radius) ** 2 == pytest.approx(FULL_CONCENTRATION, abs=0.5)
    assert pytest.approx(1 / SUN_DILUTION, rel=0.01) == FULL_CONCENTRATION


@pytest.mark.parametrize("temperature", [999.9, 20000.1, math.nan, math.inf])
def test_temperature_of_a_sun_is_bounded(temperature: float) -> None:
    with pytest.raises(ValueError, match="between 1000 and 20000 K"):
        BlackBody(temperature)


@pytest.mark.parametrize("dilution", [0.0, -1.0, 1.0001, math.nan])
def test_dilution_of_a_sun_is_bounded(dilution: float) -> None:
    with pytest.raises(ValueError, match="dilution"):
        BlackBody(6000.0, dilution)


def test_title_and_range_of_a_sun() -> None:
    sun = BlackBody(5800.0)
    assert sun.title == "black body 5800 K"
    low, high = sun.gap_range
    assert np.isfinite(sun.photon_current_above([low, high])).all()
    # Even the hottest sun is served over the whole range.
    assert np.isfinite(BlackBody(20000.0).power_above([low, high])).all()
