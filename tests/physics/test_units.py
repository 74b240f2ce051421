import numpy as np
import pytest
import scipy.constants as codata

from physics import units

from .published import DECADE


def test_constants_are_those_of_scipy() -> None:
    assert codata.e == units.ELEMENTARY_CHARGE
    assert codata.k == units.BOLTZMANN
    assert codata.h == units.PLANCK
    assert codata.c == units.LIGHT_SPEED
    assert codata.zero_Celsius == units.ZERO_CELSIUS


def test_a_photon_of_1_ev_has_a_wavelength_of_1240_nm() -> None:
    assert pytest.approx(codata.h * codata.c / codata.e * 1e9, rel=1e-15) == units.EV_NM
    assert pytest.approx(1239.841984, abs=5e-7) == units.EV_NM  # SI: hc/e, exact to any digit


def test_per_square_metre_to_milli_per_square_centimetre() -> None:
    assert pytest.approx(1e3 / 1e4, rel=1e-15) == units.PER_M2  # 1 A m⁻² = 1000 mA over 10⁴ cm²


def test_thermal_voltage() -> None:
    t = np.array([[250.0, 298.15], [300.0, 350.0]])
    np.testing.assert_allclose(units.thermal_voltage(t), codata.k * t / codata.e, rtol=4e-16)
    assert units.thermal_voltage(298.15).shape == ()
    assert np.log(10) * units.thermal_voltage(298.15) * 1e3 == pytest.approx(DECADE.value, abs=DECADE.rounding)
