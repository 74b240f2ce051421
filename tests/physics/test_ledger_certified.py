"""Ledgers of certified cells, and what luminescence says of cells in the literature."""

import math

import numpy as np
import pytest

from physics.attribution import factor_weights
from physics.cell import Cell
from physics.ledger import Ledger, ledger_of
from physics.limit import detailed_balance_limit
from physics.lines import CURRENT, FILL, VOLTAGE, Factor, Section
from physics.spectrum import reference_spectrum
from physics.units import thermal_voltage

from . import brute
from .published import (
    AUGER_LIMITED_SILICON,
    CERTIFIED,
    ERE_VOLTAGE,
    FIRST_CELL_LEDGER,
    FIRST_CELL_LIMIT,
    GAAS_ERE,
    PEROVSKITE_2019,
    PEROVSKITE_2019_CLOSES,
    CertifiedCell,
)

AM15G = reference_spectrum("am15g")


def _ledger(cell: CertifiedCell, irradiance: float = math.nan) -> Ledger:
    return ledger_of(
        Cell.of(gap=cell.gap, voc=cell.voc, jsc=cell.jsc, ff=cell.ff / 100, irradiance=irradiance), AM15G
    )


def _sum(ledger: Ledger, factor: Factor) -> float:
    return sum(float(entry.loss) for entry in ledger.entries if entry.line.factor is factor)


@pytest.mark.parametrize("certified", CERTIFIED, ids=lambda cell: cell.title)
def test_ledgers_of_certified_cells(certified: CertifiedCell) -> None:
    ledger = _ledger(certified, 100.0)
    # The product of the three rounded figures meets the certified efficiency within their rounding.
    rounding = certified.pce * (0.05 / certified.ff + 0.005 / certified.jsc + 0.0005 / certified.voc) + 0.05
    assert 100 * float(ledger.efficiency) == pytest.approx(certified.pce, abs=rounding)
    assert abs(float(ledger.closure)) < 1e-9
    row = {name: float(getattr(ledger.cell, name)) for name in Cell.__dataclass_fields__}
    wanted = brute.ledger_of(row, "am15g")
    assert {e.line.key for e in ledger.entries if e.present} == set(wanted)
    for key, loss in wanted.items():
        assert float(ledger[key].loss) == pytest.approx(loss, abs=2e-8), key
    assert all(float(ledger[key].loss) > 0 for key in ("current", "voltage_low_current", "nonradiative"))


def test_ledger_of_the_first_cell() -> None:
    ledger = _ledger(CERTIFIED[0])
    for value, wanted in zip((ledger.limit.jsc, ledger.limit.voc, ledger.limit.ff), FIRST_CELL_LIMIT, strict=True):
        assert float(value) == pytest.approx(wanted.value, abs=wanted.rounding)
    losses = {"current": _sum(ledger, CURRENT), "voltage": _sum(ledger, VOLTAGE), "fill": _sum(ledger, FILL)}
    losses["sum"] = sum(losses.values())
    for key, wanted in FIRST_CELL_LEDGER.items():
        # They were worked out from the limit's figures as rounded above; half of the last digit of each of the three
        # is 4e-5, 2e-5 and 2e-5 mW cm⁻².
        assert losses[key] == pytest.approx(wanted.value, abs=8e-5 if key == "sum" else 4e-5), key
    past = sum(float(e.loss) for e in ledger.entries if e.line.section is Section.LIMIT_TO_CELL)
    assert past == pytest.approx(losses["sum"], abs=1e-12)


def test_ledger_of_the_first_cell_from_the_rounded_limit() -> None:
    top = tuple(np.array(wanted.value) for wanted in FIRST_CELL_LIMIT)
    first = CERTIFIED[0]
    bottom = (np.array(first.jsc), np.array(first.voc), np.array(first.ff / 100))
    weights = factor_weights((top[0], top[1], top[2]), bottom, "log-mean")
    losses = [float(w * (a - b)) for w, a, b in zip(weights, top, bottom, strict=True)]
    for loss, wanted in zip([*losses, sum(losses)], FIRST_CELL_LEDGER.values(), strict=True):
        assert loss == pytest.approx(wanted.value, abs=wanted.rounding)


def test_silicon_above_the_ideal_fill_factor_has_a_negative_line() -> None:
    """With Auger recombination n falls below 1; the line past the n = 1 diode is then a gain, and is kept as one."""
    voc, jsc, ff, efficiency = AUGER_LIMITED_SILICON
    ledger = ledger_of(Cell.of(gap=1.12, voc=voc, jsc=jsc, ff=ff), AM15G)
    assert 100 * float(ledger.efficiency) == pytest.approx(efficiency.value, abs=0.01)
    assert float(ledger["fill_residual"].loss) < -1.0
    assert abs(float(ledger.closure)) < 1e-9
    told = ledger_of(Cell.of(gap=1.12, voc=voc, jsc=jsc, ff=ff, ideality=2 / 3), AM15G)
    assert float(told["fill_ideality"].loss) < 0
    assert abs(float(told["fill_residual"].delta)) < 0.003  # n = 2/3 of the Auger limit explains it


@pytest.mark.parametrize("ere", ERE_VOLTAGE)
def test_voltage_of_an_ere(ere: float) -> None:
    ledger = ledger_of(Cell.of(gap=1.424, voc=1.05, jsc=29.0, ff=0.85, ere=ere), AM15G)
    wanted = ERE_VOLTAGE[ere]
    assert 1e3 * float(ledger["nonradiative"].delta) == pytest.approx(wanted.value, abs=wanted.rounding)


def test_halide_perovskite_closes_within_11_mv() -> None:
    voc, ere, gap = PEROVSKITE_2019
    jsc = float(detailed_balance_limit(gap, 298.15, AM15G).jsc)
    ledger = ledger_of(Cell.of(gap=gap, voc=voc, jsc=jsc, ff=0.8, ere=ere, irradiance=math.nan), AM15G)
    rest = -1e3 * float(ledger["voltage_residual"].delta)
    assert rest == pytest.approx(PEROVSKITE_2019_CLOSES.value, abs=PEROVSKITE_2019_CLOSES.rounding)
    assert float(ledger["nonradiative"].loss) > 0


def test_two_gallium_arsenide_cells_imply_one_radiative_voltage() -> None:
    implied = []
    for voc, ere, wanted in GAAS_ERE:
        ledger = ledger_of(Cell.of(gap=1.424, voc=voc, jsc=29.0, ff=0.85, ere=ere), AM15G)
        # Voc_rad of the step less the rest is the radiative voltage that Voc and the ERE imply.
        value = float(ledger.quantities.voc_rad - ledger["voltage_residual"].delta)
        assert value == pytest.approx(wanted.value, abs=wanted.rounding)
        implied.append(value)
    assert abs(implied[0] - implied[1]) < 0.004
    # Both lie within 10 mV of the step's own voltage at such a current.
    np.testing.assert_allclose(implied, float(ledger.quantities.voc_rad), atol=0.02)


def test_reciprocity_is_vt_ln_ere() -> None:
    ere = np.logspace(-9, 0, 10)
    ledger = ledger_of(Cell.of(gap=1.6, voc=1.1, jsc=22.0, ff=0.8, ere=ere), AM15G)
    decades = np.diff(ledger["nonradiative"].delta)
    np.testing.assert_allclose(decades, -thermal_voltage(298.15) * math.log(10), rtol=1e-12)
