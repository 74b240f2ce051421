"""The detailed-balance limit: the figures of the trade and of the literature, and how it behaves."""

import math

import numpy as np
import pytest

from physics.emission import BlackBody
from physics.limit import Faces, Limit, detailed_balance_limit
from physics.spectrum import reference_spectrum
from physics.units import BOLTZMANN, ELEMENTARY_CHARGE, thermal_voltage

from . import published
from .published import LIMIT_TABLE, MAXIMUM, LimitRow

FACES: tuple[Faces, ...] = (1, 2)


def _limit(gap: object, temperature: float = 298.15, faces: Faces = 1, irradiance: float = math.nan) -> Limit:
    return detailed_balance_limit(np.asarray(gap), temperature, reference_spectrum("am15g"), irradiance, faces)


def _digits(value: float, digits: int) -> float:
    return float(f"{value:.{digits - 1}e}")


@pytest.mark.parametrize("row", LIMIT_TABLE, ids=lambda row: f"{row.gap} eV")
def test_table_of_limits(row: LimitRow) -> None:
    limit = _limit(row.gap)
    assert round(float(limit.jsc), 3) == row.jsc
    assert _digits(float(limit.j0), 4) == row.j0
    assert round(float(limit.voc), 4) == row.voc
    assert round(float(limit.ff), 4) == row.ff
    assert round(100 * float(limit.efficiency), 2) == row.pce


@pytest.mark.parametrize("faces", FACES)
def test_highest_efficiency_of_either_convention(faces: Faces) -> None:
    gaps = np.arange(0.5, 3.0, 1e-4)
    efficiency = 100 * _limit(gaps, faces=faces).efficiency
    best = int(efficiency.argmax())
    height, place = MAXIMUM[faces]
    assert efficiency[best] == pytest.approx(height.value, abs=height.rounding)
    assert gaps[best] == pytest.approx(place.value, abs=place.rounding + 0.5e-4)  # and half a step of the grid
    if faces == 1:
        rounded = published.ONE_FACE_ROUNDED
        assert 100 * float(_limit(1.34).efficiency) == pytest.approx(rounded.value, abs=rounded.rounding + 0.01)


def test_trade_figure_of_33_1_percent_is_that_of_both_faces() -> None:
    """At 1.34 eV both faces give 33.15 %, which the trade cuts to 33.1; one face gives 33.76 %."""
    both, one = (100 * float(_limit(1.34, faces=faces).efficiency) for faces in (2, 1))
    exact, trade = published.TRADE_LIMIT_RECOMPUTED, published.TRADE_LIMIT
    assert both == pytest.approx(exact.value, abs=exact.rounding)
    assert math.floor(both * 10) / 10 == trade.value
    assert one - both == pytest.approx(0.61, abs=0.005)  # recomputed: 33.759 − 33.151


def test_trade_figure_of_48_percent_is_the_ultimate_efficiency_at_1_2_ev() -> None:
    """It is the value at 1.2 eV, not the maximum: that is 49.05 % at 1.12 eV under AM1.5G."""
    at, exact = 100 * float(_limit(1.2).ultimate_efficiency), published.TRADE_ULTIMATE_RECOMPUTED
    assert at == pytest.approx(exact.value, abs=exact.rounding)
    assert at == pytest.approx(published.TRADE_ULTIMATE.value, abs=published.TRADE_ULTIMATE.rounding)
    gaps = np.arange(0.5, 3.0, 1e-4)
    ultimate = 100 * _limit(gaps).ultimate_efficiency
    top = published.ULTIMATE_MAXIMUM
    assert ultimate.max() == pytest.approx(top.value, abs=top.rounding)
    assert gaps[ultimate.argmax()] == pytest.approx(1.1214, abs=1e-4)
    np.testing.assert_allclose(100 * _limit(gaps, faces=2).ultimate_efficiency, ultimate, rtol=1e-15)


@pytest.mark.parametrize("faces", FACES)
def test_trade_figure_of_a_fill_factor_of_0_87(faces: Faces) -> None:
    ff, exact = float(_limit(1.2, faces=faces).ff), published.TRADE_FILL_FACTOR_RECOMPUTED[faces]
    assert ff == pytest.approx(exact.value, abs=exact.rounding)
    assert ff == pytest.approx(published.TRADE_FILL_FACTOR.value, abs=published.TRADE_FILL_FACTOR.rounding)


def test_voltage_limit_of_a_perovskite() -> None:
    voc = float(_limit(1.57, 300.0).voc)
    seen, exact = published.PEROVSKITE_VOC_LIMIT, published.PEROVSKITE_VOC_LIMIT_RECOMPUTED
    assert voc == pytest.approx(exact.value, abs=exact.rounding)
    assert voc == pytest.approx(seen.value, abs=seen.rounding)
    # The other convention is 17.9 mV away, so this figure decides which one its authors used.
    assert abs(float(_limit(1.57, 300.0, faces=2).voc) - seen.value) > 0.017


def test_two_faces_cost_vt_ln_2() -> None:
    gaps = np.linspace(0.6, 3.0, 25)
    one, two = _limit(gaps), _limit(gaps, faces=2)
    np.testing.assert_array_equal(two.j0, 2 * one.j0)
    np.testing.assert_allclose(one.voc - two.voc, thermal_voltage(298.15) * math.log(2), rtol=3e-7)
    # Exactly Vt ln[2 (J + J0)/(J + 2 J0)]: at 0.6 eV the "+ 1" of the logarithm shows in the seventh digit.
    exact = thermal_voltage(298.15) * np.log(2 * (one.jsc + one.j0) / (one.jsc + two.j0))
    np.testing.assert_allclose(one.voc - two.voc, exact, rtol=1e-13)
    cost = 1e3 * float(one.voc[10] - two.voc[10])
    assert cost == pytest.approx(published.FACES_VOLTAGE.value, abs=published.FACES_VOLTAGE.rounding)


def test_a_warmer_cell() -> None:
    lost = 100 * float(_limit(1.34).efficiency - _limit(1.34, 300.0).efficiency)
    assert lost == pytest.approx(published.HOTTER_CELL.value, abs=published.HOTTER_CELL.rounding)


def test_dividing_by_1000_in_place_of_the_table() -> None:
    tabulated, scaled = _limit(1.34), _limit(1.34, irradiance=100.0)
    assert float(tabulated.incident) == reference_spectrum("am15g").power
    relative = 100 * (float(tabulated.power) / 100 / float(tabulated.efficiency) - 1)
    assert relative == pytest.approx(published.DIVISOR.value, abs=published.DIVISOR.rounding)
    np.testing.assert_allclose(scaled.jsc, tabulated.jsc * 100 / tabulated.incident, rtol=1e-15)


def test_ten_millielectronvolts_of_gap() -> None:
    """The voltage step is nearly the same everywhere; the current follows the bands of the atmosphere."""
    first, last = _limit(1.12), _limit(1.60)
    step = published.GAP_STEP_VOLTAGE
    assert 1e3 * float(last.voc - first.voc) / 48 == pytest.approx(step.value, abs=step.rounding)
    low, high = published.GAP_STEP_CURRENT
    assert low < float(last.jsc - first.jsc) / 48 < high
    fine = np.arange(1.12, 1.60, 1e-3)
    below, above = _limit(fine), _limit(fine + 0.01)
    for change, span in (
        (1e3 * (above.voc - below.voc), published.GAP_STEP_VOLTAGE_SPAN),
        (above.jsc - below.jsc, published.GAP_STEP_CURRENT_SPAN),
    ):
        assert change.min() == pytest.approx(span[0].value, abs=span[0].rounding)
        assert change.max() == pytest.approx(span[1].value, abs=span[1].rounding)


def test_a_decade_of_light() -> None:
    dim, bright = _limit(1.34, irradiance=10.0), _limit(1.34, irradiance=100.0)
    decade = 1e3 * float(bright.voc - dim.voc)
    assert decade == pytest.approx(published.DECADE.value, abs=published.DECADE.rounding)


def test_ultimate_efficiency_under_a_black_body() -> None:
    kts = BOLTZMANN * 6000.0 / ELEMENTARY_CHARGE
    x = np.arange(1.0, 4.0, 1e-4)
    ultimate = 100 * detailed_balance_limit(x * kts, 300.0, BlackBody(6000.0)).ultimate_efficiency
    best, (height, place) = int(ultimate.argmax()), published.SQ_ULTIMATE_RECOMPUTED
    assert ultimate[best] == pytest.approx(height.value, abs=height.rounding)
    assert ultimate[best] == pytest.approx(published.SQ_ULTIMATE.value, abs=published.SQ_ULTIMATE.rounding)
    assert x[best] == pytest.approx(place.value, abs=place.rounding)


def test_the_30_percent_of_shockley_and_queisser() -> None:
    """Their cell emits from both faces; its highest efficiency is 30.4 %, and 29.4 % at the 1.1 eV they name.

    The curve is flat there: 30 % at 1.1 eV to their digits is 30.04 % only with one face, whose maximum is 31.0 %.
    """
    gaps, sun, trade = np.arange(0.8, 2.0, 1e-4), BlackBody(6000.0), published.SQ_EFFICIENCY
    both = 100 * detailed_balance_limit(gaps, 300.0, sun, faces=2).efficiency
    assert both.max() == pytest.approx(trade.value, abs=trade.rounding)
    assert both.max() == pytest.approx(30.40, abs=0.005)  # recomputed, at 1.319 eV
    assert gaps[both.argmax()] == pytest.approx(1.3194, abs=1e-4)
    one = 100 * detailed_balance_limit(gaps, 300.0, sun).efficiency
    assert one.max() == pytest.approx(30.97, abs=0.005)  # recomputed, at 1.306 eV
    at = int(np.abs(gaps - 1.1).argmin())
    assert both[at] == pytest.approx(29.35, abs=0.005)  # recomputed
    assert one[at] == pytest.approx(30.04, abs=0.005)  # recomputed
    assert one[at] == pytest.approx(trade.value, abs=trade.rounding)


def test_shapes_broadcast_and_every_field_has_the_one_shape() -> None:
    light = reference_spectrum("am15g")
    limit = detailed_balance_limit(np.linspace(1, 2, 5), np.array([[280.0], [300.0]]), light, [[[10.0]], [[100.0]]])
    for name in (*limit.__dataclass_fields__, "power", "efficiency", "ultimate_efficiency"):
        assert getattr(limit, name).shape == (2, 2, 5), name
    one = detailed_balance_limit(np.linspace(1, 2, 5)[3], 300.0, light, 100.0)
    assert one.power.shape == ()
    np.testing.assert_allclose(limit.power[1, 1, 3], one.power, rtol=1e-14)
    with pytest.raises(ValueError, match="broadcast"):
        detailed_balance_limit([1.0, 1.1], [1.0, 2.0, 3.0], light)


@pytest.mark.parametrize(
    "odd",
    [
        {"gap": [0.0, -1.0, np.nan, 0.2, 4.6, np.inf]},
        {"temperature": [0.0, -5.0, np.nan, np.inf, 1.0, -np.inf]},  # at 1 K the emission underflows
        {"irradiance": [0.0, -100.0, -np.inf]},
    ],
)
def test_impossible_values_give_nan_for_that_cell_alone(odd: dict[str, list[float]]) -> None:
    def between(key: str, good: float) -> list[float] | float:
        return [good, *odd[key], good] if key in odd else good

    light = reference_spectrum("am15g")
    gap, temperature, irradiance = between("gap", 1.3), between("temperature", 298.15), between("irradiance", 100.0)
    limit = detailed_balance_limit(gap, temperature, light, irradiance)
    alone = detailed_balance_limit(1.3, 298.15, light, 100.0)
    assert np.isnan(limit.power[1:-1]).all()
    for name in limit.__dataclass_fields__:
        np.testing.assert_allclose(getattr(limit, name)[[0, -1]], getattr(alone, name), rtol=1e-14)
