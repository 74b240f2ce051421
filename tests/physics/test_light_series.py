"""Light-intensity series made of diodes whose answer is known."""

from __future__ import annotations

import numpy as np
import pytest

from physics.diode import ideal_fill_factor
from physics.light_series import LightSeries, SeriesFault, ideality_of, pseudo_curve
from physics.units import Array, thermal_voltage

_VT = float(thermal_voltage(298.15))


def _series(ideality: float = 1.4, voc: float = 1.1, jsc: float = 24.0, levels: Array | None = None) -> LightSeries:
    """Voc(J) of one diode that has `voc` at `jsc`."""
    light = np.geomspace(0.002, 1.2, 15) if levels is None else levels
    scale = ideality * _VT
    j0 = jsc / np.expm1(voc / scale)
    return LightSeries.of(jsc * light, scale * np.log1p(jsc * light / j0))


@pytest.mark.parametrize("ideality", [1.0, 1.4, 2.0])
def test_the_ideality_of_one_diode_is_found(ideality: float) -> None:
    found = ideality_of(_series(ideality), 298.15)
    assert found.value == pytest.approx(ideality, rel=1e-7)
    assert found.u == pytest.approx(0.0, abs=1e-6)


def test_its_uncertainty_is_that_of_the_scatter() -> None:
    clean = _series()
    rng = np.random.default_rng(5)
    found = [
        ideality_of(LightSeries.of(clean.jsc, clean.voc + 0.002 * rng.standard_normal(clean.voc.size)), 298.15)
        for _ in range(400)
    ]
    values = np.array([f.value for f in found])
    stated = np.array([f.u for f in found], dtype=float)
    assert values.mean() == pytest.approx(1.4, abs=0.003)
    assert np.sqrt(np.mean(stated**2)) == pytest.approx(values.std(), rel=0.1)
    # 15 points leave 13 degrees of freedom: Student's factor for 95 % is 2.160 (table).
    assert 0.925 < np.mean(np.abs(values - 1.4) < 2.160 * stated) < 0.975


def test_only_the_range_asked_for_counts() -> None:
    low, high = _series(2.0, levels=np.geomspace(0.001, 0.03, 6)), _series(1.0, levels=np.geomspace(0.05, 1.0, 6))
    both = LightSeries.of(np.concatenate([low.jsc, high.jsc]), np.concatenate([low.voc, high.voc]))
    assert ideality_of(both, 298.15, low=1.0).value == pytest.approx(1.0, rel=1e-6)
    assert ideality_of(both, 298.15, high=1.0).value == pytest.approx(2.0, rel=1e-6)


@pytest.mark.parametrize("ideality", [1.0, 1.4, 2.0])
def test_the_pseudo_fill_factor_is_that_of_the_diode_without_resistance(ideality: float) -> None:
    curve = pseudo_curve(_series(ideality), 24.0)
    assert curve.fault is None
    assert curve.voc == pytest.approx(1.1, rel=1e-9)
    assert curve.fill_factor == pytest.approx(float(ideal_fill_factor(1.1 / (ideality * _VT))), rel=1e-6)
    np.testing.assert_allclose(curve.current[-1], 24.0 * (1 - 0.002))
    assert (np.diff(curve.voltage) < 0).all()


def test_a_shunt_lowers_the_pseudo_fill_factor_as_it_lowers_the_real_one() -> None:
    """Points of a diode with a shunt at open circuit: J = J0 (exp(V/nVt) − 1) + V/Rsh, with no series resistance."""
    voltage = np.linspace(0.3, 1.15, 400)
    scale, j0, rsh = 1.4 * _VT, 24.0 / np.expm1(1.1 / (1.4 * _VT)), 0.5  # kΩ cm²
    series = LightSeries.of(j0 * np.expm1(voltage / scale) + voltage / rsh, voltage)
    fine = np.linspace(0.0, 1.1, 200_001)
    power = fine * (24.0 - j0 * np.expm1(fine / scale) - fine / rsh)
    voc = float(np.interp(24.0, series.jsc, series.voc))
    assert pseudo_curve(series, 24.0).fill_factor == pytest.approx(power.max() / (24.0 * voc), rel=1e-5)


def test_order_repeats_and_unusable_pairs_do_not_matter() -> None:
    clean = _series()
    jsc = np.concatenate([clean.jsc[::-1], clean.jsc, [-1.0, 0.0, np.nan, 3.0]])
    voc = np.concatenate([clean.voc[::-1] + 0.001, clean.voc - 0.001, [0.5, 0.5, 0.5, np.nan]])
    series = LightSeries.of(jsc, voc)
    np.testing.assert_array_equal(series.jsc, clean.jsc)
    np.testing.assert_allclose(series.voc, clean.voc, rtol=1e-14)


def test_what_cannot_be_told_is_told() -> None:
    assert ideality_of(_series(levels=np.array([0.5, 1.0])), 298.15).fault is SeriesFault.TOO_FEW
    assert pseudo_curve(_series(levels=np.array([0.5, 1.0])), 24.0).fault is SeriesFault.TOO_FEW
    assert pseudo_curve(_series(levels=np.geomspace(0.001, 0.5, 9)), 24.0).fault is SeriesFault.TOO_DIM
    bright = pseudo_curve(_series(levels=np.geomspace(0.3, 1.2, 9)), 24.0)
    assert bright.fault is SeriesFault.TOO_BRIGHT
    assert np.isnan(bright.fill_factor)
    assert LightSeries.of([], []).jsc.size == 0
    with pytest.raises(ValueError, match="as many"):
        LightSeries.of([1.0, 2.0], [0.5])


def test_a_series_without_a_maximum_of_power_is_told() -> None:
    """A voltage at the brightest level alone, which is as bright as the measurement: no power but at its very end."""
    series = LightSeries.of([1.0, 1.5, 2.0, 2.0 + 1e-9], [1e-15, 1e-15, 1e-15, 5.0])
    assert pseudo_curve(series, (2.0 + 1e-9) * (1.0 + 5e-7)).fault is SeriesFault.NO_MAXIMUM
