"""Figures of merit of J–V sweeps: exact curves, noise and its coverage, what is not there, and awkward input."""

import math

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.optimize import brentq, minimize_scalar

from physics.sweep import Estimate, SweepFigures, density, figures_of_merit, hysteresis, oriented

from .sweeps import VT, Truth, precise_curves, random_truth, sweep

Array = NDArray[np.float64]
FIGURES = ("jsc", "voc", "ff", "v_mp", "j_mp", "power")
CELL = Truth(j_l=25.0, j0=1e-9, n=1.5, rs=3.0, rsh=2000.0)


def _noisy(points: int = 120, noise: float = 2e-3, seed: int = 1, stop: float = 1.0) -> tuple[Array, Array]:
    rng = np.random.default_rng(seed)
    v = np.linspace(-0.1, stop, points)
    return v, CELL.current(v) + rng.normal(0.0, noise * CELL.j_l, points)


def _of(figures: SweepFigures, name: str) -> Estimate:
    estimate = getattr(figures, name)
    assert isinstance(estimate, Estimate), (name, figures.message)
    return estimate


def _off(figures: SweepFigures, truth: dict[str, float], name: str) -> float:
    """How many standard uncertainties a figure is off."""
    estimate = _of(figures, name)
    assert estimate.u is not None
    assert estimate.u > 0.0
    return (estimate.value - truth[name]) / estimate.u


@pytest.mark.parametrize("name", precise_curves())
def test_exact_curves_of_pvlib(name: str) -> None:
    """Source: pvlib-python, tests/data/precise_iv_curves1.json and …2.json (published, 40 digits)."""
    known, voltage, current = precise_curves()[name]
    cells = known["cells"]
    figures = figures_of_merit(voltage / cells, current * 1e3)
    truth = {
        "voc": known["voc_V"] / cells,
        "jsc": known["isc_A"] * 1e3,
        "v_mp": known["vmp_V"] / cells,
        "j_mp": known["imp_A"] * 1e3,
        "power": known["pmp_W"] / cells * 1e3,
        "ff": known["pmp_W"] / (known["voc_V"] * known["isc_A"]),
    }
    for figure in FIGURES:
        assert _of(figures, figure).value == pytest.approx(truth[figure], rel=1e-9), figure
    assert figures.message == ""


def test_exact_random_curves() -> None:
    rng = np.random.default_rng(3)
    for points in (100, 150, 300, 500):
        for _ in range(4):
            truth = random_truth(rng)
            figures, known = figures_of_merit(*sweep(truth, rng, 0.0, points)), truth.figures()
            for name in FIGURES:
                # brentq of pvlib's solver finds Vmp (and with it Jmp) no better than some 1e-7
                rel = 1e-6 if name in ("v_mp", "j_mp") else 1e-9
                assert _of(figures, name).value == pytest.approx(known[name], rel=rel), name


def _two_diodes(v: float) -> float:
    """25 mA cm⁻² with n = 1 and n = 2 diodes, 3 Ω cm² and 10 kΩ cm², solved by bisection."""

    def misfit(j: float) -> float:
        u = v + j * 3e-3
        return 25.0 - 1e-16 * math.expm1(u / VT) - 1e-9 * math.expm1(u / (2 * VT)) - 0.1 * u - j

    return float(brentq(misfit, -300.0, 100.0, xtol=1e-14, rtol=1e-14))


@pytest.mark.parametrize(("points", "bound"), [(100, 1e-5), (200, 1e-7), (500, 1e-9)])
def test_two_diodes_without_noise(points: int, bound: float) -> None:
    """The rough curve is wrong here; what is left is the error of the local polynomials, smaller with the step."""
    voc = float(brentq(_two_diodes, 0.5, 1.2, xtol=1e-15))
    best = minimize_scalar(lambda v: -v * _two_diodes(v), bounds=(0.5, voc), method="bounded", options={"xatol": 1e-8})
    v = np.linspace(-0.1, voc + 0.06, points)
    figures = figures_of_merit(v, np.array([_two_diodes(x) for x in v]))
    assert figures.set_aside == 0
    assert _of(figures, "voc").value == pytest.approx(voc, rel=bound)
    assert _of(figures, "jsc").value == pytest.approx(_two_diodes(0.0), rel=bound)
    assert _of(figures, "power").value == pytest.approx(-float(best.fun), rel=bound)


def _covered(count: int, seed: int) -> dict[str, float]:
    """Share of random noisy sweeps whose truth lies within ± 1.96 u."""
    rng = np.random.default_rng(seed)
    inside: dict[str, list[bool]] = {name: [] for name in FIGURES}
    for i in range(count):
        truth = random_truth(rng)
        figures, known = figures_of_merit(*sweep(truth, rng, (1e-4, 1e-3, 5e-3, 2e-2)[i % 4])), truth.figures()
        for name in FIGURES:
            inside[name].append(abs(_off(figures, known, name)) < 1.96)
    return {name: float(np.mean(seen)) for name, seen in inside.items()}


def test_uncertainties_cover_the_truth() -> None:
    covered = _covered(60, seed=11)
    # 53 of 60: fewer have a chance of 1 % where 95 % is right
    assert all(share >= 53 / 60 for share in covered.values()), covered


@pytest.mark.slow
def test_uncertainties_cover_the_truth_in_93_to_97_percent() -> None:
    covered = _covered(1000, seed=12)
    assert all(0.93 <= share <= 0.97 for share in covered.values()), covered


def test_uncertainty_falls_with_noise_and_points() -> None:
    quiet, loud = (figures_of_merit(*_noisy(noise=noise)) for noise in (1e-4, 1e-2))
    dense = figures_of_merit(*_noisy(points=1200, noise=1e-2))
    for name in FIGURES:
        few, many, least = (_of(f, name).u for f in (loud, dense, quiet))
        assert few is not None
        assert many is not None
        assert least is not None
        assert least < many < few


def test_fill_factor_knows_that_its_parts_share_points() -> None:
    figures = figures_of_merit(*_noisy())
    ff, power, voc, jsc = (_of(figures, name) for name in ("ff", "power", "voc", "jsc"))
    assert ff.value == pytest.approx(power.value / (voc.value * jsc.value), rel=1e-12)
    assert _of(figures, "j_mp").value * _of(figures, "v_mp").value == pytest.approx(power.value, rel=1e-12)
    assert None not in (ff.u, power.u, voc.u, jsc.u)


def test_efficiency_is_power_over_irradiance() -> None:
    v, j = _noisy()
    figures = figures_of_merit(v, j, irradiance=50.0)
    assert _of(figures, "efficiency").value == pytest.approx(_of(figures, "power").value / 50.0, rel=1e-15)
    with pytest.raises(ValueError, match="irradiance"):
        figures_of_merit(v, j, irradiance=0.0)


@settings(deadline=None, max_examples=25)
@given(st.permutations(range(60)), st.booleans(), st.booleans())
def test_order_and_signs_do_not_matter(order: list[int], flip_current: bool, flip_voltage: bool) -> None:
    v, j = _noisy(points=60)
    signs = (-1.0 if flip_voltage else 1.0), (-1.0 if flip_current else 1.0)
    seen = figures_of_merit(signs[0] * v[order], signs[1] * j[order])
    plain = figures_of_merit(v, j)
    for name in FIGURES:
        assert _of(seen, name).value == pytest.approx(_of(plain, name).value, rel=1e-12)


def test_nan_and_duplicates() -> None:
    v, j = _noisy()
    spoilt_v, spoilt_j = np.concatenate([v, [np.nan, 0.3, np.inf]]), np.concatenate([j, [1.0, np.nan, 2.0]])
    plain, spoilt = figures_of_merit(v, j), figures_of_merit(spoilt_v, spoilt_j)
    doubled = figures_of_merit(np.concatenate([v, v]), np.concatenate([j, j]))
    for name in FIGURES:
        assert _of(spoilt, name) == _of(plain, name)
        assert _of(doubled, name).value == pytest.approx(_of(plain, name).value, rel=5e-3)
    assert doubled.points == 2 * plain.points == 240


def test_outliers_are_set_aside_and_told() -> None:
    v, j = _noisy()
    spikes = [20, 75, 100]
    j[spikes] += np.array([1.0, -1.0, 1.0])  # 20 standard deviations
    figures = figures_of_merit(v, j)
    assert figures.set_aside == 3
    assert "3 of 120 points" in figures.message
    known = CELL.figures()
    assert all(abs(_off(figures, known, name)) < 3.5 for name in FIGURES)


def test_nothing_is_extrapolated_far() -> None:
    v, j = _noisy()
    short = figures_of_merit(v[v < 0.7], j[v < 0.7])  # Voc lies at 0.92 V
    assert short.voc is None
    assert short.ff is None
    assert short.jsc is not None
    assert "does not reach zero current" in short.message
    late = figures_of_merit(v[v > 0.1], j[v > 0.1])
    assert late.jsc is None
    assert late.ff is None
    assert late.voc is not None
    assert "does not reach 0 V" in late.message
    flat = figures_of_merit(v[v < 0.4], j[v < 0.4])
    assert flat.power is None
    assert flat.v_mp is None
    assert "no maximum of the power" in flat.message


def test_less_than_a_step_is_extrapolated_and_told() -> None:
    voc, step = CELL.figures()["voc"], 0.01
    v = np.arange(0.5 * step, voc - 0.01 * step, step)
    figures = figures_of_merit(v, CELL.current(v) + np.random.default_rng(4).normal(0.0, 0.05, v.size))
    assert "open-circuit voltage is extrapolated" in figures.message
    assert "short-circuit current is extrapolated" in figures.message
    assert abs(_off(figures, CELL.figures(), "voc")) < 3.0
    assert abs(_off(figures, CELL.figures(), "jsc")) < 3.0


def test_light_and_dark() -> None:
    v, j = _noisy(noise=1e-4)
    dark = -1e-9 * np.expm1(v / (1.5 * VT)) - v / 2.0 + np.random.default_rng(2).normal(0.0, 1e-4, v.size)
    for sign in (1.0, -1.0):
        lit, unlit = oriented(v, sign * j), oriented(v, sign * dark)
        assert lit.lit
        assert not unlit.lit
        assert lit.current_flipped == unlit.current_flipped == (sign < 0)
        np.testing.assert_array_equal(lit.current, j)
        np.testing.assert_array_equal(unlit.current, dark)
    figures = figures_of_merit(v, dark)
    assert not figures.lit
    assert figures.power is None
    assert "dark" in figures.message


def test_exchanged_contacts() -> None:
    v, j = _noisy()
    swapped = oriented(-v, -j)
    assert swapped.voltage_flipped
    assert swapped.current_flipped
    np.testing.assert_array_equal(swapped.voltage, v)
    np.testing.assert_array_equal(swapped.current, j)
    only_voltage = oriented(-v, j)
    assert only_voltage.voltage_flipped
    assert not only_voltage.current_flipped


def test_doubtful_light_is_told() -> None:
    v = np.linspace(-0.1, 1.3, 200)
    weak = Truth(0.05, 1e-9, 1.5, 3.0, 1e5)
    assert "taken for a" in oriented(v, weak.current(v)).message


@pytest.mark.parametrize("points", [0, 1, 2, 5, 9])
def test_too_short(points: int) -> None:
    v, j = _noisy()
    figures = figures_of_merit(v[:points], j[:points])
    assert figures.power is None
    assert "too short" in figures.message


def test_wrong_shapes() -> None:
    with pytest.raises(ValueError, match="as many currents as voltages"):
        figures_of_merit([0.0, 1.0], [1.0])
    with pytest.raises(ValueError, match="as many currents as voltages"):
        oriented([[0.0, 1.0]], [[1.0, 2.0]])


@settings(deadline=None, max_examples=150)
@given(
    st.lists(
        st.tuples(st.floats(-3, 3, allow_subnormal=False), st.floats(-1e3, 1e3, allow_subnormal=False)), max_size=60
    )
)
# Found by earlier runs: voltages that no meter tells apart, one voltage over and over, and points that fit nothing.
@example([(0.0, 0.0), (0.0, 1.0), (0.0, 1.0), (1.0, 0.0), (2.0, 0.0), (0.5, 0.0), (0.75, 0.0), (1e-197, 0.0)] * 2)
@example([(0.0, 1.0)] * 2 + [(0.0, 0.0)] * 8)
@example([(0.0, 1.0)] * 5 + [(1.0, 1.0)] * 4 + [(2.2250738585072014e-308, 0.0)])
def test_any_numbers_give_an_answer(points: list[tuple[float, float]]) -> None:
    v, j = np.array(points).reshape(-1, 2).T
    figures = figures_of_merit(v, j)
    for name in (*FIGURES, "efficiency"):
        estimate = getattr(figures, name)
        assert estimate is None or (np.isfinite(estimate.value) and estimate.u is not None and estimate.u >= 0.0)
    assert figures.message or figures.power is not None


def test_density() -> None:
    np.testing.assert_allclose(density([3.0, -1.5], 0.15), [20.0, -10.0], rtol=1e-15)
    for area in (0.0, -1.0, math.nan, math.inf):
        with pytest.raises(ValueError, match="area"):
            density(1.0, area)


def test_hysteresis() -> None:
    v, j = _noisy(seed=1)
    forward, reverse = figures_of_merit(v, 0.9 * j), figures_of_merit(v, _noisy(seed=2)[1])
    index = hysteresis(forward, reverse)
    assert index is not None
    assert index.u is not None
    assert index.value == pytest.approx(0.1, abs=4 * index.u)
    drawn = np.random.default_rng(5).normal(
        [_of(forward, "power").value, _of(reverse, "power").value],
        [_of(forward, "power").u, _of(reverse, "power").u],
        (40_000, 2),
    )
    assert index.u == pytest.approx(np.std(1.0 - drawn[:, 0] / drawn[:, 1]), rel=0.02)
    swapped = hysteresis(reverse, forward)
    assert swapped is not None
    assert swapped.value < 0.0 < index.value
    assert hysteresis(figures_of_merit(v[v < 0.4], j[v < 0.4]), reverse) is None
