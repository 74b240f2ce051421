"""The plots of measured curves show the numbers that the ledger has."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest

from app.figures.all_plots import PLOTS, Plot
from app.figures.curve_plots import (
    emission_plot_of,
    fit_plot_of,
    plus_minus,
    series_plot_of,
)
from app.figures.export import image
from app.figures.photon_plot import spectrum_plot_of
from app.figures.plot_parts import decades
from app.figures.plots import jv_plot_of
from app.figures.presets import PRESETS
from app.figures.spec import PlotSpec, Series
from app.figures.stack_plot import stack_plot_of
from app.session.appraisal import appraise
from app.session.curves import Curves, Sweep
from app.session.outcome import Picture, picture_of
from app.session.stacks import NO_STACKS, Reading, StackReadings
from app.session.state import EMPTY_VALUES, CellEntry, Choices
from app.wording import unbroken
from physics.diode import Diode
from physics.light_series import LightSeries
from physics.quantum import Curve
from physics.units import EV_NM

VALUES = {**EMPTY_VALUES, "gap": 1.6, "voc": 1.1, "jsc": 22.0, "ff": 79.0}
STACKS = StackReadings(Reading(0.02), (("front layer", Reading(0.002)), ("back layer", Reading(0.004))), Reading(6e-4))


def _curves() -> Curves:
    rng = np.random.default_rng(6)
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.4, 2.0, 2000.0).curve(200)
    noisy = current + 0.01 * rng.standard_normal(200)
    sweeps = (
        Sweep("forward", voltage, noisy, "forward"),
        Sweep("reverse", voltage[::-1], noisy[::-1] + 0.02, "reverse"),
        Sweep("dark", voltage, noisy - 22.0, "forward", lit=False),
    )
    wavelength = np.arange(310.0, 900.0, 2.0)
    eqe = 0.85 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.015))
    reflectance = Curve(wavelength, np.full(wavelength.size, 0.08))
    light = np.geomspace(0.02, 1.2, 12) * 22.0
    series = LightSeries.of(light, 1.1 + 1.4 * 0.02569 * np.log(light / 22.0))
    return Curves(sweeps, Curve(wavelength, eqe), reflectance, series)


CURVES = _curves()


def _picture(curves: Curves = CURVES, stacks: StackReadings = STACKS, **values: float) -> Picture:
    entry = CellEntry(1, "Cell 7", values={**VALUES, **values}, curves=curves, stacks=stacks)
    picture = picture_of(appraise(entry, Choices()), Choices())
    assert picture is not None
    return picture


PICTURE = _picture()


def _series(spec: PlotSpec | None, key: str) -> Series:
    assert spec is not None
    return next(series for series in spec.series if series.key == key)


def _area(series: Series) -> float:
    """Area under a drawn curve [mA cm⁻²], pieces that are NaN left out."""
    good = np.isfinite(series.y)
    return float(np.trapezoid(series.y[good], series.x[good])) * 1e-3


@pytest.mark.parametrize("plot", PLOTS, ids=lambda plot: plot.key)
@pytest.mark.parametrize("preset", ["slide", "column-300"])
def test_every_plot_paints(plot: Plot, preset: str) -> None:
    spec = plot.describe(PICTURE)
    assert spec is not None
    assert plot.offered(PICTURE)
    assert len({series.key for series in spec.series}) == len(spec.series)
    for low, high in (spec.x_range, spec.y_range):
        assert np.isfinite([low, high]).all()
        assert low < high
    key = next(name for name in PRESETS if name.startswith(preset.split("-")[0]))
    assert not image(spec, PRESETS[key]).isNull()
    assert plot.describe(PICTURE, True).stale  # type: ignore[union-attr]
    assert plot.describe(PICTURE, captioned=False).caption == ()  # type: ignore[union-attr]


def test_only_what_a_cell_has_is_offered() -> None:
    bare = _picture(Curves(), NO_STACKS)
    assert [plot.key for plot in PLOTS if plot.offered(bare)] == ["jv", "gap", "spectrum"]
    for plot in PLOTS:
        assert (plot.describe(bare) is not None) == plot.offered(bare)


def test_the_areas_of_the_photons_are_the_currents_of_the_ledger() -> None:
    q = PICTURE.ledger.quantities
    spec = spectrum_plot_of(PICTURE)
    collected = float(q.jsc_eqe + q.jsc_sub_gap)
    assert _area(_series(spec, "collected")) == pytest.approx(collected, rel=2e-3)
    # The rim of each area lies on the one beneath it: all photons above the gap, and those that enter the cell.
    assert _area(_series(spec, "reflected")) == pytest.approx(float(q.jsc_limit), rel=5e-3)
    entering = float(q.jsc_limit - q.jsc_reflected)
    assert _area(_series(spec, "above")) == pytest.approx(entering, rel=5e-3)
    labels = {series.key: series.label for series in spec.series}
    lost = float(q.jsc_limit - q.jsc_reflected - q.jsc_eqe)
    assert f"{lost:.4g}" in labels["above"] or f"{lost:.2f}" in labels["above"]
    assert f"{collected:.2f}" in labels["collected"]
    bare = spectrum_plot_of(_picture(Curves()))
    assert [series.key for series in bare.series] == ["below", "above"]
    assert _area(_series(bare, "above")) == pytest.approx(float(q.jsc_limit), rel=5e-3)


@pytest.mark.parametrize("spectrum", ["am15g", "am0", "blackbody:6000"])
def test_any_light_has_its_photons(spectrum: str) -> None:
    entry = CellEntry(1, "Cell", spectrum=spectrum, values=VALUES)
    picture = picture_of(appraise(entry, Choices()), Choices())
    assert picture is not None
    above = _area(_series(spectrum_plot_of(picture), "above"))
    assert above == pytest.approx(float(picture.ledger.quantities.jsc_limit), rel=5e-3)


def test_the_emission_integrates_to_j0_rad() -> None:
    spec = emission_plot_of(PICTURE)
    whole = 0.0
    for key in ("measured", "tail"):
        series = _series(spec, key)
        value = np.nan_to_num(10.0**series.y)
        whole += float(np.trapezoid(value, series.x))
    assert whole == pytest.approx(float(PICTURE.ledger.quantities.j0_rad), rel=2e-2)
    assert spec is not None
    assert "extrapolated" in spec.caption[0]
    assert spec.y_names
    assert all(spec.y_range[0] <= at <= spec.y_range[1] for at, _ in spec.y_names)


def test_the_residuals_are_those_of_the_fit() -> None:
    spec = fit_plot_of(PICTURE)
    residual = _series(spec, "residual")
    assert np.nanstd(residual.y) == pytest.approx(10.0, rel=0.2)  # the noise put in, 0.01 mA cm⁻²
    assert _series(spec, "upper").y[0] == pytest.approx(20.0, rel=0.2)
    assert spec is not None
    found = re.findall(r"=\s([\d.]+)\s±\s([\d.]+)", spec.title)
    for (value, u), true in zip(found, (1.4, 2.0, 2000.0), strict=True):
        assert abs(float(value) - true) < 3.0 * float(u)
    jv = jv_plot_of(PICTURE)
    fitted, data = _series(jv, "fit"), CURVES.sweeps[0]
    np.testing.assert_allclose(np.interp(data.voltage, fitted.x, fitted.y), data.current, atol=0.06)
    assert [s.key for s in jv.series] == ["limit", "sweep 0", "sweep 1", "fit", "pseudo"]  # and no dark sweep


def test_what_a_sweep_does_not_hold_is_said() -> None:
    straight = Sweep("s", np.linspace(0.0, 1.0, 60), 20.0 * (1.0 - np.linspace(0.0, 1.0, 60)), "forward")
    picture = _picture(replace(CURVES, sweeps=(straight,)), ff=25.1, voc=1.0, jsc=20.0)
    spec = fit_plot_of(picture)
    assert spec is not None
    assert unbroken("n cannot be told") in spec.title
    assert unbroken("n cannot be told") in spec.note


def test_the_slope_of_the_series_is_the_ideality() -> None:
    spec = series_plot_of(PICTURE)
    assert _series(spec, "slope").label.startswith("n = 1.4")
    measured = _series(spec, "measured")
    np.testing.assert_allclose(10.0**measured.x, CURVES.series.jsc if CURVES.series else [])
    assert spec is not None
    assert [text for _, text in spec.x_names] == ["0.1", "1", "10", "100"]


def test_levels_of_the_stacks() -> None:
    spec = stack_plot_of(PICTURE)
    q = PICTURE.ledger.quantities
    assert spec is not None
    vt, radiative = float(q.vt), float(q.voc_rad)
    wanted = [radiative, *(radiative + vt * np.log(y) for y in (0.02, 0.002, 0.004, 6e-4)), 1.1]
    np.testing.assert_allclose([mark.x for mark in spec.marks], wanted, atol=1e-12)
    names = [text for _, text in spec.y_names]
    assert names == ["radiative", "bare absorber", "with front layer", "with back layer", "finished stack", "Voc"]


def test_values_with_their_uncertainty() -> None:
    assert plus_minus(1.40163, 0.0123) == "1.402 ± 0.012"
    assert plus_minus(2022.7, 31.0) == "2023 ± 31"
    assert plus_minus(1.4, 1e-9) == "1.4"
    assert plus_minus(1.4, None) == "1.4"
    assert plus_minus(1.4, float("inf")) == "1.4"


def test_powers_of_ten() -> None:
    assert decades(-2.0, 1.0) == ((-2.0, "0.01"), (-1.0, "0.1"), (0.0, "1"), (1.0, "10"))
    assert decades(-24.5, -19.5)[0] == (-24.0, "10⁻²⁴")
    assert len(decades(-60.0, 0.0)) <= 8
