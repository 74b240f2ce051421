"""Currents and radiative recombination from an EQE, against integration by other means."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from scipy.constants import c, e, h, k
from scipy.integrate import quad, simpson

from physics.emission import BlackBody, photon_current, thermal_flux
from physics.limit import detailed_balance_limit
from physics.quantum import Curve, Tail, collected_current, emission_density, radiative_current
from physics.spectrum import reference_spectrum
from physics.units import EV_NM, Array

from .optical_constants import GAAS, LEAD_IODIDE, silicon

_SUN = reference_spectrum("am15g")
_TRAPEZE = Curve(np.array([300.0, 500.0, 800.0, 850.0]), np.array([0.2, 0.9, 0.85, 0.0]))


def _fine_current(curve: Curve, low: float, high: float) -> float:
    """The current on a grid so fine that Simpson's rule is exact to some 1e-9, apart from the project [mA cm⁻²]."""
    grid = np.linspace(low, high, 4_000_001)
    eqe = np.interp(grid, curve.wavelength, curve.value)
    light = np.interp(grid, _SUN.wavelength, _SUN.irradiance)
    return float(simpson(eqe * light * grid * 1e-9 * e / (h * c) * 0.1, x=grid))


def _step(gap: float) -> Curve:
    return Curve(np.array([280.0, EV_NM / gap]), np.array([1.0, 1.0]))


def test_the_current_is_that_of_a_fine_integration() -> None:
    assert collected_current(_TRAPEZE, _SUN) == pytest.approx(_fine_current(_TRAPEZE, 300.0, 850.0), rel=1e-8)


def test_the_parts_above_and_below_a_gap_make_the_whole() -> None:
    above, below = collected_current(_TRAPEZE, _SUN, above=1.7), collected_current(_TRAPEZE, _SUN, below=1.7)
    assert above + below == pytest.approx(collected_current(_TRAPEZE, _SUN), rel=1e-13)
    assert above == pytest.approx(_fine_current(_TRAPEZE, 300.0, EV_NM / 1.7), rel=1e-8)


@pytest.mark.parametrize("gap", [0.7, 1.12, 1.6, 2.0])
def test_a_full_step_collects_what_the_limit_does(gap: float) -> None:
    limit = detailed_balance_limit(gap, 298.15, _SUN, 100.0)
    assert collected_current(_step(gap), _SUN, 100.0, above=gap) == pytest.approx(float(limit.jsc), rel=1e-14)
    # What a step of EQE does not emit is what lies beyond its last point, 4.4 eV: 1e-50 of it.
    assert radiative_current(_step(gap), 298.15)[0] == pytest.approx(float(limit.j0), rel=1e-11)


def test_the_current_under_a_black_body_is_that_of_adaptive_quadrature() -> None:
    sun = BlackBody(6000.0)

    def flux(wavelength: float) -> float:
        energy = h * c / (wavelength * 1e-9)
        per_joule = 2 * np.pi / (h**3 * c**2) * energy**2 / np.expm1(energy / (k * 6000.0)) * sun.dilution
        return float(np.interp(wavelength, _TRAPEZE.wavelength, _TRAPEZE.value) * e * per_joule * energy / wavelength)

    parts = itertools.pairwise(_TRAPEZE.wavelength)
    expected = 0.1 * sum(quad(flux, a, b, epsabs=0.0, epsrel=1e-12)[0] for a, b in parts)
    assert collected_current(_TRAPEZE, sun) == pytest.approx(expected, rel=1e-9)


def test_no_light_where_the_curve_is() -> None:
    assert collected_current(Curve(np.array([5000.0, 6000.0]), np.ones(2)), _SUN) == 0.0
    assert collected_current(_TRAPEZE, _SUN, above=5.0) == 0.0


def test_the_thermal_flux_sums_up_to_the_closed_form() -> None:
    for gap in (0.7, 1.34):
        total = quad(lambda x: float(thermal_flux(x, 300.0)), gap, gap + 2.0, epsabs=0.0, epsrel=1e-12)[0]
        assert total == pytest.approx(float(photon_current(gap, 300.0)), rel=1e-10)


def _fine_emission(curve: Curve, temperature: float) -> float:
    """∫ EQE φ_bb dE point by point between the curve's own points [mA cm⁻²], apart from the project."""
    kt = k * temperature / e

    def part(low: float, high: float) -> float:
        grid = np.linspace(low, high, 2001)
        eqe: Array = np.interp(EV_NM / grid, curve.wavelength, curve.value)
        return float(simpson(eqe * grid**2 / np.expm1(grid / kt), x=grid))

    energy = EV_NM / curve.wavelength[::-1]
    total = sum(part(a, b) for a, b in itertools.pairwise(energy))
    return 0.1 * e * 2 * np.pi * e**3 / (h**3 * c**2) * total


@pytest.mark.parametrize("curve", [silicon(110.0), GAAS, LEAD_IODIDE], ids=["silicon", "GaAs", "lead iodide"])
def test_published_absorptances_emit_what_direct_integration_says(curve: Curve) -> None:
    """Wanted to 1e-4; it holds far better."""
    assert radiative_current(curve, 300.0)[0] == pytest.approx(_fine_emission(curve, 300.0), rel=1e-8)


@pytest.mark.parametrize("slope", [0.008, 0.015, 0.022])
def test_a_tail_emits_what_quadrature_says(slope: float) -> None:
    tail = Tail(1.6, 0.8, slope)

    def integrand(energy: float) -> float:
        return 0.8 * np.exp((energy - 1.6) / slope) * float(thermal_flux(energy, 298.15))

    expected = quad(integrand, 0.01, 1.6, epsabs=0.0, epsrel=1e-10, limit=400, points=[1.2, 1.5])[0]
    whole, extrapolated = radiative_current(_step(1.6), 298.15, tail)
    assert extrapolated == pytest.approx(expected, rel=1e-8)
    assert whole == pytest.approx(float(photon_current(1.6, 298.15)) + expected, rel=1e-8)


def test_an_urbach_tail_of_15_mev_costs_21_mv() -> None:
    """15 meV is published for methylammonium lead iodide; a gap of 1.6 eV, 25 °C.

    With Boltzmann's e^(−E/kT) the step emits Eg² kT + 2 Eg kT² + 2 kT³, and a tail that falls on balance with
    m = 1/(1/E_U − 1/kT) adds Eg² m − 2 Eg m² + 2 m³ (by hand).
    """
    kt = k * 298.15 / e
    whole, _ = radiative_current(_step(1.6), 298.15, Tail(1.6, 1.0, 0.015))
    loss = kt * np.log(whole / float(photon_current(1.6, 298.15)))
    m = 1 / (1 / 0.015 - 1 / kt)
    step, more = 1.6**2 * kt + 2 * 1.6 * kt**2 + 2 * kt**3, 1.6**2 * m - 2 * 1.6 * m**2 + 2 * m**3
    assert loss == pytest.approx(kt * np.log(1 + more / step), abs=1e-7)
    assert loss == pytest.approx(0.0214, abs=0.0001)


@pytest.mark.parametrize(
    ("wavelength", "value"),
    [([500.0], [1.0]), ([500.0, 400.0], [1.0, 1.0]), ([400.0, 500.0], [np.nan, 1.0]), ([-1.0, 500.0], [1.0, 1.0])],
)
def test_what_is_no_curve_is_refused(wavelength: list[float], value: list[float]) -> None:
    with pytest.raises(ValueError, match="quantum efficiency"):
        Curve(np.array(wavelength), np.array(value))


def test_the_emission_density_is_the_integrand() -> None:
    tail = Tail(start=1.4, anchor=0.2, slope=0.015)
    curve = Curve(np.array([400.0, EV_NM / 1.4]), np.array([0.9, 0.2]))
    below, above = np.linspace(0.9, 1.4, 20_001)[:-1], np.linspace(1.4, EV_NM / 400.0, 100_001)
    parts = [
        simpson(emission_density(tail.at, below, 298.15), x=below),
        simpson(emission_density(curve.at, above, 298.15), x=above),
    ]
    whole, extrapolated = radiative_current(curve, 298.15, tail)
    assert parts[0] == pytest.approx(extrapolated, rel=2e-3)  # the last step of the tail is left out
    assert sum(parts) == pytest.approx(whole, rel=2e-3)
    # One value by hand: q · 2π/(h³c²) · E²/(exp(E/kT) − 1) at 1.5 eV, in mA cm⁻² eV⁻¹.
    by_hand = 0.5 * e * 2 * np.pi / (h**3 * c**2) * (1.5 * e) ** 2 / np.expm1(1.5 * e / (k * 298.15)) * e * 0.1
    assert float(emission_density(lambda at: np.full(at.shape, 0.5), 1.5, 298.15)) == pytest.approx(by_hand, rel=1e-9)
