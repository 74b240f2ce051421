"""The plots of measured curves in files: no text is cut or collides, and odd cells are told about rightly."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import qInstallMessageHandler
from PySide6.QtGui import QColor

from app.figures.all_plots import PLOTS, Plot
from app.figures.curve_plots import emission_plot_of, fit_plot_of
from app.figures.palette import LIGHT
from app.figures.photon_plot import spectrum_plot_of
from app.figures.plots import jv_plot_of
from app.figures.presets import PRESETS
from app.figures.spec import PlotSpec, Series, dot_scale
from app.session.appraisal import appraise
from app.session.curves import Curves, Sweep
from app.session.outcome import Picture, picture_of
from app.session.state import CellEntry, Choices
from app.wording import THIN
from physics.diode import Diode
from physics.light_series import LightSeries, pseudo_curve
from physics.quantum import Curve
from physics.spectrum import illumination
from physics.units import EV_NM

from .drawing import collisions, in_file, on_screen, strays
from .test_curve_plots import CURVES, PICTURE, _picture


def _series(spec: PlotSpec | None, key: str) -> Series:
    assert spec is not None
    return next(series for series in spec.series if series.key == key)


def _amounts(spec: PlotSpec) -> dict[str, float]:
    """The numbers in the key of the plot of photons [mA cm⁻²]."""
    found = {}
    for series in spec.series:
        number = re.search(r"([−\d.]+)(?:\s?mA cm⁻²)?$", series.label)
        assert number is not None, series.label
        found[series.key] = float(number.group(1).replace("−", "-"))
    return found


@pytest.mark.parametrize("where", [(620, 430), *PRESETS], ids=str)
@pytest.mark.parametrize("plot", PLOTS, ids=lambda plot: plot.key)
def test_texts_neither_collide_nor_leave_the_page(plot: Plot, where: tuple[int, int] | str) -> None:
    spec = plot.describe(PICTURE)
    assert spec is not None
    drawn = in_file(spec, PRESETS[where]) if isinstance(where, str) else on_screen(spec, *where)
    texts = drawn.of("text")
    assert collisions(texts) == []
    assert strays(drawn.page, texts) == []
    whole = " ".join(drawn.texts())
    for text in (spec.x_label, spec.y_label, *(mark.label for mark in spec.marks), *(s.label for s in spec.series)):
        assert text in whole


def test_the_key_keeps_off_the_areas() -> None:
    # An area that fills the frame under a rim near its top: a key inside would stand upon it.
    x = np.linspace(0.0, 1.0, 50)
    full = Series("full", "full", x, np.full(50, 0.97), "cell", filled=True)
    spec = PlotSpec("Full", "x", "y", (0.0, 1.0), (0.0, 1.0), (full,))
    drawn = in_file(spec, PRESETS["slide"])
    key = next(mark for mark in drawn.of("text") if mark.text == "full")
    label = next(mark for mark in drawn.of("text") if mark.text == "x")
    assert key.rect.top() > label.rect.bottom()


@pytest.mark.parametrize("curves", [CURVES, replace(CURVES, reflectance=None), Curves()], ids=["all", "eqe", "none"])
@pytest.mark.parametrize(("spectrum", "irradiance"), [("am15g", 100.0), ("am0", 136.0), ("blackbody:3000", 0.05)])
def test_the_photons_add_up_to_the_light(curves: Curves, spectrum: str, irradiance: float) -> None:
    entry = replace(_picture(curves).entry, spectrum=spectrum)
    for key, value in (("irradiance", irradiance), ("voc", 0.8), ("jsc", 0.03 * irradiance)):
        entry = entry.with_value(key, value)
    picture = _picture_of(entry)
    light, q = illumination(spectrum), picture.ledger.quantities
    low, _ = light.gap_range
    whole = float(light.photon_current_above(low)) * irradiance / light.power
    shown = _amounts(spectrum_plot_of(picture))
    rounding = 0.5e-3 * float(q.jsc_limit)
    below_gap_collected = float(q.jsc_sub_gap) if curves.eqe is not None else 0.0
    assert sum(shown.values()) - below_gap_collected == pytest.approx(whole, abs=4 * rounding)
    if curves.eqe is None:
        assert shown["above"] == pytest.approx(float(q.jsc_limit), abs=rounding)
        return
    reflected = float(q.jsc_reflected) if curves.reflectance is not None else 0.0
    assert shown["collected"] == pytest.approx(float(q.jsc_eqe + q.jsc_sub_gap), abs=rounding)
    assert shown["above"] == pytest.approx(float(q.jsc_limit - q.jsc_eqe) - reflected, abs=rounding)
    assert ("reflected" in shown) == (curves.reflectance is not None)
    line = "uncollected" if "uncollected" in picture.ledger else "current"
    assert shown["above"] == pytest.approx(float(picture.ledger[line].delta), abs=rounding)


def _picture_of(entry: CellEntry) -> Picture:
    picture = picture_of(appraise(entry, Choices()), Choices())
    assert picture is not None
    return picture


def test_a_spectrum_is_drawn_with_few_points_and_true_areas() -> None:
    spec = spectrum_plot_of(PICTURE)
    for series in spec.series:
        assert series.x.size < 700  # the table has 2002
    # What lies within the axes of the areas below the gap, against the light itself.
    below = _series(spec, "below")
    inside = np.isfinite(below.y) & (below.x <= spec.x_range[1])
    light = illumination("am15g")
    scale = 100.0 / light.power
    wanted = light.photon_current_above(EV_NM / spec.x_range[1]) - light.photon_current_above(1.6)
    drawn = 1e-3 * float(np.trapezoid(below.y[inside], below.x[inside]))
    assert drawn == pytest.approx(scale * float(wanted), rel=5e-3)


def test_a_live_plot_tells_the_unit_once_and_a_file_beside_each_number() -> None:
    for captioned in (True, False):
        labels = [series.label for series in spectrum_plot_of(PICTURE, captioned=captioned).series]
        assert [label.endswith(f"{THIN}mA cm⁻²") for label in labels] == [captioned, captioned, captioned, True]


def test_an_eqe_without_signal_leaves_the_photons_above_the_gap_whole() -> None:
    assert CURVES.eqe is not None
    dead = Curve(CURVES.eqe.wavelength, np.zeros(CURVES.eqe.wavelength.size))
    picture = _picture(replace(CURVES, eqe=dead))
    assert [series.key for series in spectrum_plot_of(picture).series] == ["below", "above"]
    assert emission_plot_of(picture) is None


@pytest.mark.parametrize("gap", [1.30, 1.45, 1.6, 1.7])
def test_the_mark_of_the_gap_stands_on_the_emission(gap: float) -> None:
    spec = emission_plot_of(_picture(gap=gap, voc=0.7))
    assert spec is not None
    measured, tail = _series(spec, "measured"), _series(spec, "tail")
    assert tail.x[-1] == pytest.approx(measured.x[0], abs=1e-9)  # one goes on where the other ends
    assert tail.y[-1] == pytest.approx(measured.y[0], abs=0.05)
    (mark,) = spec.marks
    curve = tail if gap < tail.x[-1] else measured
    assert mark.x == gap
    assert mark.y == pytest.approx(float(np.interp(gap, curve.x, curve.y)), abs=1e-9)


def test_a_gap_beyond_the_axes_of_the_emission_has_no_mark() -> None:
    spec = emission_plot_of(_picture(gap=2.6, jsc=2.0))
    assert spec is not None
    assert spec.marks == ()


def test_points_left_out_of_the_fit_are_shown_as_such() -> None:
    sweep = CURVES.sweeps[0]
    current = sweep.current.copy()
    current[[40, 90]] += 3.0  # a hundred times the noise
    picture = _picture(Curves((replace(sweep, current=current),)))
    spec = fit_plot_of(picture)
    apart = _series(spec, "apart")
    assert apart.markers  # single points: a line through them alone would draw nothing
    np.testing.assert_array_equal(np.flatnonzero(np.isfinite(apart.y)), [40, 90])
    assert spec is not None
    assert np.nanmax(apart.y) <= spec.y_range[1]
    assert np.isnan(_series(spec, "residual").y[[40, 90]]).all()
    assert "2 of 200 points" in spec.caption[0]


def test_the_fit_names_its_sweep_and_the_current_plot_tells_its_figures() -> None:
    spec, jv = fit_plot_of(PICTURE), jv_plot_of(PICTURE)
    assert spec is not None
    assert _series(spec, "residual").label == "forward sweep"
    assert spec.note in spec.title
    assert f"One-diode fit to the forward sweep: {spec.note}" in jv.caption
    series = CURVES.series
    assert series is not None
    pseudo = pseudo_curve(series, 22.0)
    assert f"Without Rs, from the light series: FF {100.0 * pseudo.fill_factor:.1f}{THIN}%" in jv.caption
    drawn = _series(jv, "pseudo")
    np.testing.assert_array_equal(drawn.x, pseudo.voltage)
    np.testing.assert_array_equal(drawn.y, pseudo.current)


def test_a_series_too_dim_draws_its_points_and_claims_no_fill_factor() -> None:
    dim = LightSeries.of(np.geomspace(0.1, 2.0, 8), 0.9 + 0.03 * np.arange(8))
    jv = jv_plot_of(_picture(replace(CURVES, series=dim)))
    assert not any("Without Rs" in line for line in jv.caption)


def test_the_fitted_curve_is_not_fitted_anew_at_another_temperature() -> None:
    cold, warm = (_series(jv_plot_of(_picture(temperature=t)), "fit") for t in (25.0, 60.0))
    assert cold.y is warm.y
    notes = [spec.note for t in (25.0, 60.0) if (spec := fit_plot_of(_picture(temperature=t))) is not None]
    n = [float(re.search(r"n\s=\s([\d.]+)", note).group(1)) for note in notes]  # type: ignore[union-attr]
    assert n[0] / n[1] == pytest.approx(333.15 / 298.15, rel=1e-3)


def test_dots_stand_on_the_points_that_there_are_and_qt_has_nothing_to_say() -> None:
    said: list[str] = []
    before = qInstallMessageHandler(lambda kind, context, message: said.append(message))
    try:
        y = np.array([0.2, np.nan, 0.6, 5.0])
        dots = Series("dots", "", np.array([0.2, 0.4, 0.6, 0.8]), y, "cell", "none", markers=True)
        spec = PlotSpec("Dots", "x", "y", (0.0, 1.0), (0.0, 1.0), (dots,))
        drawn = in_file(spec, PRESETS["slide"])
    finally:
        qInstallMessageHandler(before)
    assert said == []
    ink = QColor(LIGHT.tones["cell"].ink)
    lit = [x for x in range(drawn.image.width()) if any(drawn.image.pixelColor(x, y) == ink for y in range(0, 1080, 2))]
    assert int(np.count_nonzero(np.diff(lit) > 1)) == 1  # two dots: the third is no number, the fourth beyond the axes


def test_many_dots_are_smaller() -> None:
    few, many, most = (Series("s", "", np.zeros(n), np.zeros(n), "cell") for n in (50, 600, 100_000))
    assert (dot_scale(few), dot_scale(many), dot_scale(most)) == (1.0, 0.5, 0.4)


def test_a_bound_is_told_to_two_digits() -> None:
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.2, 0.001, 1e7).curve(400)
    noisy = current + 0.05 * np.random.default_rng(1).standard_normal(400)
    spec = fit_plot_of(_picture(Curves((Sweep("s", voltage, noisy),))))
    assert spec is not None
    assert re.search(r"Rsh\sat\sleast\s[1-9][0-9]?0+\s", spec.note.replace("\u2009", " ")), spec.note
    assert re.search(r"Rs\sat\smost\s0\.0?[1-9]+", spec.note), spec.note


def test_without_a_tail_nothing_is_said_to_be_extrapolated() -> None:
    wavelength = np.arange(310.0, 900.0, 5.0)
    flat = Curve(wavelength, 0.85 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.04)))  # flatter than kT
    spec = emission_plot_of(_picture(Curves(eqe=flat)))
    assert spec is not None
    assert [series.key for series in spec.series] == ["measured"]
    assert "nothing of it is extrapolated" in spec.caption[0]
