from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtGui import QColor

from app.figures.export import PRESETS
from app.figures.palette import DARK, LIGHT
from app.figures.spec import Mark, PlotSpec, Series

from .drawing import collisions, in_file, on_screen, strays
from .samples import GAP, JV, MANY, PLOTS


@pytest.mark.parametrize("where", [(520, 380), (900, 600), *PRESETS], ids=str)
@pytest.mark.parametrize("name", PLOTS)
def test_texts_neither_collide_nor_leave_the_page(name: str, where: tuple[int, int] | str) -> None:
    spec = PLOTS[name]
    drawn = in_file(spec, PRESETS[where]) if isinstance(where, str) else on_screen(spec, *where)
    texts = drawn.of("text")
    assert collisions(texts) == []
    assert strays(drawn.page, texts) == []
    whole = " ".join(drawn.texts())
    for text in (spec.title, spec.x_label, spec.y_label, spec.stale, *(mark.label for mark in spec.marks)):
        assert text in whole
    for series in spec.series:
        assert series.label in whole


def test_a_curve_goes_through_its_points() -> None:
    line = PlotSpec(
        title="Line",
        x_label="x",
        y_label="y",
        x_range=(0.0, 1.0),
        y_range=(0.0, 1.0),
        series=(Series("line", "", np.array([0.0, 1.0]), np.array([0.0, 1.0]), "limit"),),
        marks=(Mark("m", "", 0.25, 0.75, "cell"),),
    )
    drawn = in_file(line, PRESETS["column-600"])
    width, height = drawn.image.width(), drawn.image.height()
    ink, dot = QColor(LIGHT.tones["limit"].ink), QColor(LIGHT.tones["cell"].ink)
    dark = [(x, y) for x in range(0, width, 4) for y in range(0, height, 4) if drawn.image.pixelColor(x, y) == ink]
    xs, ys = np.array(dark).T
    # From one corner of the frame to the other: position along x and along y agree everywhere.
    along = (xs - xs.min()) / (xs.max() - xs.min())
    up = (ys.max() - ys) / (ys.max() - ys.min())
    assert np.abs(along - up).max() < 0.02
    spot = (round(xs.min() + 0.25 * np.ptp(xs)), round(ys.max() - 0.75 * np.ptp(ys)))
    assert drawn.image.pixelColor(*spot) == dot


def test_the_key_keeps_off_the_curves_or_goes_beneath() -> None:
    # A curve that sweeps the whole frame leaves no corner free.
    x = np.linspace(0, 1, 2000)
    sweep = Series("s", "Sweep", x, 0.5 + 0.49 * np.sin(120 * x), "cell")
    spec = replace(JV, x_range=(0.0, 1.0), y_range=(0.0, 1.0), series=(sweep,), marks=(), caption=())
    drawn = in_file(spec, PRESETS["slide"])
    key = next(mark for mark in drawn.of("text") if mark.text == "Sweep")
    label = next(mark for mark in drawn.of("text") if mark.text == spec.x_label)
    assert key.rect.top() > label.rect.bottom()
    free = in_file(JV, PRESETS["slide"])
    key = next(mark for mark in free.of("text") if mark.text == "Limit")
    label = next(mark for mark in free.of("text") if mark.text == JV.x_label)
    assert key.rect.bottom() < label.rect.top()


def test_nothing_is_drawn_outside_the_frame_but_ticks_and_texts() -> None:
    drawn = on_screen(replace(MANY, stale=""), 900, 600)
    axis = next(mark for mark in drawn.of("text") if mark.text == MANY.title)
    inks = {QColor(tone.ink).name() for tone in LIGHT.tones.values()} - {QColor(LIGHT.muted).name()}
    rows = range(0, round(axis.rect.top()))
    assert not any(drawn.image.pixelColor(x, y).name() in inks for y in rows for x in range(900))


def test_a_mark_outside_the_axes_stays_on_the_page() -> None:
    spec = replace(GAP, marks=(Mark("m", "far off", 9.0, 99.0, "cell"), Mark("n", "none", np.nan, np.nan, "cell")))
    drawn = in_file(spec, PRESETS["column-300"])
    assert strays(drawn.page, drawn.of("text")) == []


def test_odd_data_do_not_break_the_picture() -> None:
    nothing = Series("a", "nothing", np.array([]), np.array([]), "cell")
    gaps = Series("b", "gaps", np.array([1.0, 2.0]), np.array([np.nan, np.nan]), "cell")
    one = Series("c", "one", np.array([1.0]), np.array([1.0]), "cell")
    on_screen(replace(JV, series=(nothing, gaps, one)), 520, 380)
    on_screen(replace(JV, x_range=(1.0, 1.0), y_range=(0.0, 0.0)), 520, 380)
    on_screen(JV, 60, 40)


def test_dark_and_light_differ_only_in_colour() -> None:
    light, dark = on_screen(JV, 620, 430), on_screen(JV, 620, 430, DARK)
    assert [mark.rect for mark in light.marks] == [mark.rect for mark in dark.marks]
    assert light.image != dark.image
