"""Spectra: the G173 table as pvlib gives it, and the integrals of the straight lines between its points."""

from fractions import Fraction
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pvlib.spectrum import get_reference_spectra
from scipy.constants import c, e, h

from physics import spectrum
from physics.emission import BlackBody
from physics.spectrum import REFERENCE_NAMES, Spectrum, illumination, reference_spectrum

from . import brute
from .published import BAND_SHARE, G173_POINTS, PARTIAL_CURRENT, PHOTON_CURRENT, POWER

COLUMNS = {"am15g": "global", "am15d": "direct", "am0": "extraterrestrial"}


def _gap(wavelength: float) -> float:
    return h * c / e / wavelength * 1e9


@pytest.mark.parametrize("name", REFERENCE_NAMES)
def test_columns_are_those_of_pvlib(name: str) -> None:
    light, frame = reference_spectrum(name), get_reference_spectra()
    assert light.wavelength.size == G173_POINTS
    np.testing.assert_array_equal(light.wavelength, frame.index.to_numpy(float))
    np.testing.assert_array_equal(light.irradiance, frame[COLUMNS[name]].to_numpy(float))


def test_every_reference_spectrum_is_tested() -> None:
    assert set(REFERENCE_NAMES) == set(COLUMNS) == set(POWER) == set(PHOTON_CURRENT)


@pytest.mark.parametrize("name", REFERENCE_NAMES)
def test_power_and_photon_current_of_the_whole_table(name: str) -> None:
    light = reference_spectrum(name)
    assert light.power * 10 == pytest.approx(POWER[name].value, abs=POWER[name].rounding)
    assert light.power == pytest.approx(float(np.trapezoid(light.irradiance, light.wavelength)) / 10, rel=1e-13)
    whole = float(light.photon_current_above(light.gap_range[0]))
    assert whole == pytest.approx(PHOTON_CURRENT[name].value, abs=PHOTON_CURRENT[name].rounding)
    assert float(light.power_above(light.gap_range[0])) == pytest.approx(light.power, rel=1e-14)
    assert float(light.power_above(light.gap_range[1])) == 0.0


@pytest.mark.parametrize("wavelength", PARTIAL_CURRENT)
def test_partial_currents(wavelength: float) -> None:
    current = float(reference_spectrum("am15g").photon_current_above(_gap(wavelength)))
    assert current == pytest.approx(PARTIAL_CURRENT[wavelength].value, abs=PARTIAL_CURRENT[wavelength].rounding)


@pytest.mark.parametrize("band", BAND_SHARE)
def test_band_shares(band: tuple[float, float]) -> None:
    def power(low: float, high: float) -> float:
        above = reference_spectrum("am15g").power_above([_gap(high), _gap(low)])
        return float(above[0] - above[1])

    share = 100 * power(*band) / power(400.0, 1100.0)
    assert share == pytest.approx(BAND_SHARE[band].value, abs=BAND_SHARE[band].rounding)


@pytest.mark.parametrize("name", REFERENCE_NAMES)
def test_integrals_equal_quadrature(name: str) -> None:
    light = reference_spectrum(name)
    gaps = np.array([0.32, 0.5, 0.7003, 1.0, 1.12, 1.3456, 1.77, 2.4, 3.1, 4.2])
    wanted = np.array([brute.light_above(name, gap) for gap in gaps.tolist()])
    np.testing.assert_allclose(light.photon_current_above(gaps), wanted[:, 0], rtol=1e-9)
    np.testing.assert_allclose(light.power_above(gaps), wanted[:, 1], rtol=1e-9)


@st.composite
def tables(draw: st.DrawFn) -> Spectrum:
    """Tables of 2 to 25 points with steps from a picometre to 400 nm, dark stretches included."""
    count = draw(st.integers(2, 25))
    steps = draw(st.lists(st.floats(1e-3, 400.0), min_size=count, max_size=count))
    heights = st.one_of(st.just(0.0), st.floats(1e-6, 1e3))
    values = draw(st.lists(heights, min_size=count, max_size=count).filter(any))
    return Spectrum("made up", 200.0 + np.cumsum(steps), np.array(values))


def _exactly(light: Spectrum, edge: float, moment: int) -> float:
    """∫ Φ λᵐ dλ up to `edge` in rational numbers, by Simpson's rule, which is exact for cubics."""
    points = zip(light.wavelength.tolist(), light.irradiance.tolist(), strict=True)
    stop, total = Fraction(edge), Fraction(0)
    for (x0, y0), (x1, y1) in pairwise((Fraction(x), Fraction(y)) for x, y in points):
        if stop <= x0:
            break
        slope, end = (y1 - y0) / (x1 - x0), min(x1, stop)
        middle = (x0 + end) / 2
        f0, fm, fe = ((y0 + slope * (x - x0)) * x**moment for x in (x0, middle, end))
        total += (end - x0) / 6 * (f0 + 4 * fm + fe)
    return float(total)


@settings(deadline=None, max_examples=150)
@given(tables(), st.lists(st.floats(0.0, 1.0), min_size=1, max_size=5))
def test_random_tables_equal_piecewise_integration(light: Spectrum, shares: list[float]) -> None:
    first, last = float(light.wavelength[0]), float(light.wavelength[-1])
    edges = [first + share * (last - first) for share in shares]
    low, high = light.gap_range
    gaps = np.clip([_gap(edge) for edge in edges], low, high)
    power = [_exactly(light, edge, 0) / 10 for edge in edges]
    current = [_exactly(light, edge, 1) * 1e-9 * e / (h * c) / 10 for edge in edges]
    # An edge is known to a few units in its last place: no more can be asked of a short first stretch.
    reach = 1e-12 * float(light.irradiance.max()) * last
    np.testing.assert_allclose(light.power_above(gaps), power, rtol=1e-11, atol=reach / 10)
    np.testing.assert_allclose(light.photon_current_above(gaps), current, rtol=1e-11, atol=reach * last / 12398)
    assert light.power == pytest.approx(_exactly(light, last, 0) / 10, rel=1e-12)


@settings(deadline=None, max_examples=150)
@given(tables())
def test_a_table_covers_its_own_gap_range_and_no_more(light: Spectrum) -> None:
    low, high = light.gap_range
    inside, outside = np.array([low, high]), np.array([low * (1 - 1e-14), high * (1 + 1e-14)])
    for function in (light.power_above, light.photon_current_above):
        assert np.isfinite(function(inside)).all()
        assert np.isnan(function(outside)).all()
    ulps = 4 * np.spacing(light.wavelength[-1]) * light.irradiance.max() / 10  # an edge is hc/E of a rounded E
    np.testing.assert_allclose(light.power_above(inside), [light.power, 0.0], rtol=1e-14, atol=ulps)


@settings(deadline=None, max_examples=50)
@given(tables(), st.lists(st.floats(0.0, 1.0), min_size=2, max_size=9))
def test_integrals_fall_as_the_gap_rises(light: Spectrum, shares: list[float]) -> None:
    low, high = light.gap_range
    gaps = np.clip(np.sort(low + np.array(shares) * (high - low)), low, high)
    slack = 1e-13 * light.power
    assert (np.diff(light.power_above(gaps)) <= slack).all()
    assert (np.diff(light.photon_current_above(gaps)) <= slack * light.wavelength[-1] / 1239).all()


def test_odd_gaps_give_nan_and_leave_the_others() -> None:
    light = reference_spectrum("am15g")
    gaps = np.array([[1.1, np.nan, 0.0], [-1.0, np.inf, 1.5]])
    current = light.photon_current_above(gaps)
    np.testing.assert_array_equal(np.isnan(current), [[False, True, True], [True, True, False]])
    assert current[0, 0] == light.photon_current_above(1.1)
    assert light.power_above(1.1).shape == ()


@pytest.mark.parametrize(
    ("wavelength", "irradiance", "words"),
    [
        ([300.0], [1.0], "two points"),
        ([300.0, 400.0], [1.0, 2.0, 3.0], "two columns of one length"),
        ([[300.0, 400.0]], [[1.0, 2.0]], "two columns"),
        ([], [], "two points"),
        ([400.0, 300.0], [1.0, 1.0], "rise from point to point"),
        ([300.0, 300.0], [1.0, 1.0], "rise from point to point"),
        ([0.0, 300.0], [1.0, 1.0], "positive"),
        ([-5.0, 300.0], [1.0, 1.0], "positive"),
        ([300.0, np.nan], [1.0, 1.0], "rise"),
        ([300.0, np.inf], [1.0, 1.0], "rise"),
        ([300.0, 400.0], [1.0, -1e-9], "not negative"),
        ([300.0, 400.0], [1.0, np.nan], "finite"),
        ([300.0, 400.0], [1.0, np.inf], "finite"),
        ([300.0, 400.0], [0.0, 0.0], "above zero"),
    ],
)
def test_tables_of_another_form_are_refused(wavelength: object, irradiance: object, words: str) -> None:
    with pytest.raises(ValueError, match=words):
        Spectrum("odd", np.array(wavelength, dtype=float), np.array(irradiance, dtype=float))


def test_reference_spectra_are_read_once_and_by_name_alone() -> None:
    assert reference_spectrum("am15g") is reference_spectrum("am15g")
    with pytest.raises(KeyError):
        reference_spectrum("am15")


def test_without_the_data_file_pvlib_itself_is_asked(monkeypatch: pytest.MonkeyPatch) -> None:
    direct = spectrum._g173_columns()
    monkeypatch.setattr("pathlib.Path.is_file", lambda self: False)
    asked = spectrum._g173_columns()
    assert set(direct) == set(asked) == {"wavelength", *COLUMNS.values()}
    for name, column in direct.items():
        np.testing.assert_array_equal(asked[name], column)


def test_a_missing_pvlib_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(spectrum, "find_spec", lambda name: None)
    with pytest.raises(ModuleNotFoundError, match="pip install pvlib"):
        spectrum._g173_columns()


def test_illuminations_by_name() -> None:
    assert illumination(" AM15G ") is reference_spectrum("am15g")
    assert illumination("blackbody:5800") == BlackBody(5800.0)


@pytest.mark.parametrize(
    "name", ["", "am1.5g", "blackbody", "blackbody:", "blackbody:hot", "blackbody:1", "blackbody:nan"]
)
def test_illuminations_that_do_not_exist(name: str) -> None:
    with pytest.raises(ValueError):
        illumination(name)
