from __future__ import annotations

import itertools
from dataclasses import replace

import pytest
from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor

from app.figures.export import PRESETS
from app.figures.palette import DARK, LIGHT
from app.figures.spec import Step, WaterfallSpec

from .drawing import Drawn, collisions, in_file, on_screen, strays
from .samples import GAINS, LONG_NAMES, PEROVSKITE, SILICON, SIXTEEN, STALE, WATERFALLS, ZERO

SIZES = [(520, 380), (620, 430), (700, 400), (520, 700), (900, 600), (1400, 900)]


def draw(spec: WaterfallSpec, where: tuple[int, int] | str) -> Drawn:
    return in_file(spec, PRESETS[where]) if isinstance(where, str) else on_screen(spec, *where)


@pytest.mark.parametrize("where", [*SIZES, *PRESETS], ids=str)
@pytest.mark.parametrize("name", WATERFALLS)
def test_texts_neither_collide_nor_leave_the_page(name: str, where: tuple[int, int] | str) -> None:
    drawn = draw(WATERFALLS[name], where)
    texts = drawn.of("text")
    assert collisions(texts) == []
    assert strays(drawn.page, texts) == []


@pytest.mark.parametrize("where", [*SIZES, *PRESETS], ids=str)
@pytest.mark.parametrize("name", WATERFALLS)
def test_a_text_is_beside_every_bar_or_wholly_within_one(name: str, where: tuple[int, int] | str) -> None:
    drawn = draw(WATERFALLS[name], where)
    for bar in drawn.of("bar") + drawn.of("segment"):
        for text in drawn.of("text"):
            if text.rect.adjusted(0.3, 0.3, -0.3, -0.3).intersects(bar.rect):
                assert text.rect.left() >= bar.rect.left(), text.text
                assert text.rect.right() <= bar.rect.right(), text.text


@pytest.mark.parametrize("where", [*SIZES, *PRESETS], ids=str)
@pytest.mark.parametrize("name", WATERFALLS)
def test_no_amount_is_lost(name: str, where: tuple[int, int] | str) -> None:
    spec = WATERFALLS[name]
    texts = draw(spec, where).texts()
    for step in spec.steps:
        assert step.value_text in texts, step.label
    for part in spec.segments:
        assert any(part.value_text in text for text in texts), part.label


@pytest.mark.parametrize("where", [*SIZES, *PRESETS], ids=str)
@pytest.mark.parametrize("name", [name for name in WATERFALLS if name != "long"])
def test_ordinary_names_are_never_cut(name: str, where: tuple[int, int] | str) -> None:
    spec = WATERFALLS[name]
    texts = draw(spec, where).texts()
    # The remark of the poor cell's one large loss is longer than a column has room for beside the amount.
    assert [text for text in texts if text.endswith("…") and not text.startswith("−905 mV")] == []
    whole = " ".join(texts)
    for step in spec.steps:
        assert step.label in whole
        if name != "poor":
            assert not step.detail_text or step.detail_text in texts


@pytest.mark.parametrize("size", SIZES, ids=str)
@pytest.mark.parametrize("name", WATERFALLS)
def test_hit_areas_cover_rows_and_strip_without_overlap(name: str, size: tuple[int, int]) -> None:
    spec = WATERFALLS[name]
    drawn = on_screen(spec, *size)
    keys = [key for key, _ in drawn.hits]
    assert keys == [part.key for part in spec.segments] + [step.key for step in spec.steps]
    areas = [area for _, area in drawn.hits]
    for index, area in enumerate(areas):
        # A piece of no width has an area that Qt does not count as contained in anything.
        assert area.isEmpty() or drawn.page.contains(area)
        for other in areas[index + 1 :]:
            common = area.intersected(other)
            assert common.width() < 1e-6 or common.height() < 1e-6
    pieces, rows = areas[: len(spec.segments)], areas[len(spec.segments) :]
    for one, two in itertools.pairwise(pieces):
        assert one.right() == pytest.approx(two.left())
    for one, two in itertools.pairwise(rows):
        assert one.bottom() == pytest.approx(two.top())
    for bar, row in zip(drawn.of("bar"), rows, strict=True):
        assert row.top() <= bar.rect.top()
        assert bar.rect.bottom() <= row.bottom()


def test_bars_stand_where_their_amounts_say() -> None:
    drawn = on_screen(PEROVSKITE, 900, 600)
    bars = [mark.rect for mark in drawn.of("bar")]
    scale = bars[0].width() / 30.58
    for bar, step in zip(bars[1:], PEROVSKITE.steps[1:], strict=True):
        start = 0.0 if step.total else min(step.start, step.end)
        assert bar.left() == pytest.approx(bars[0].left() + scale * start, abs=1.0)
        # Hairline amounts are drawn a little wider than they are, so that they are seen.
        assert bar.width() == pytest.approx(
            max(1.6, scale * abs(step.end - start if step.total else step.end - step.start)), abs=1.0
        )


def test_a_broken_axis_says_so() -> None:
    whole = on_screen(replace(SILICON, axis_range=(0.0, 34.0)), 900, 600)
    cut = on_screen(SILICON, 900, 600)
    # Totals begin at zero, which the axis names, while the losses are magnified.
    for drawn in (whole, cut):
        zero = next(mark for mark in drawn.of("text") if mark.text == "0")
        for bar in (drawn.of("bar")[0], drawn.of("bar")[-1]):
            assert bar.rect.left() == pytest.approx(zero.rect.center().x(), abs=1)
    assert cut.of("bar")[4].rect.width() > 2 * whole.of("bar")[4].rect.width()
    # The strokes of the break leave ground within the total bar near its left end.
    bar = cut.of("bar")[0].rect
    row = [cut.image.pixelColor(x, round(bar.center().y())) for x in range(round(bar.left()), round(bar.left()) + 40)]
    assert QColor(LIGHT.ground) in row
    bar = whole.of("bar")[0].rect
    row = [whole.image.pixelColor(x, round(bar.center().y())) for x in range(round(bar.left()), round(bar.left()) + 40)]
    assert QColor(LIGHT.ground) not in row


def test_small_print_goes_before_the_type_shrinks() -> None:
    tight = on_screen(SIXTEEN, 520, 380)
    roomy = on_screen(SIXTEEN, 900, 600)
    assert any(SIXTEEN.caption[0] in text for text in roomy.texts())
    assert not any(SIXTEEN.caption[0] in text for text in tight.texts())
    assert min(mark.size for mark in tight.of("text")) >= 9


@pytest.mark.parametrize(
    "name", [name for name, spec in WATERFALLS.items() if len(spec.steps) <= 11 and name not in ("long", "stale")]
)
def test_a_slide_is_readable_from_the_back_of_a_room(name: str) -> None:
    spec = WATERFALLS[name]
    drawn = in_file(spec, PRESETS["slide"])
    small = {text for line in spec.caption for text in drawn.texts() if text in line or line in text}
    for mark in drawn.of("text"):
        if mark.text not in small:
            assert mark.size >= 16, (mark.text, mark.size)


def test_a_gain_has_an_arrow_head_and_a_loss_has_none() -> None:
    # Same bar, walked the other way: the picture must differ to the right of the bar.
    def beside(step: Step) -> int:
        spec = replace(GAINS, steps=(GAINS.steps[0], replace(step, value_text="", detail_text=""), GAINS.steps[-1]))
        drawn = on_screen(spec, 900, 600)
        bar = drawn.of("bar")[1].rect
        y, right = round(bar.center().y()), round(bar.right())
        panel = QColor(LIGHT.panel)
        return sum(drawn.image.pixelColor(right + shift, y) != panel for shift in range(2, 8))

    gain = GAINS.steps[1]
    loss = replace(gain, start=gain.end, end=gain.start)
    assert beside(gain) >= 4
    assert beside(loss) == 0


def test_an_assumed_amount_looks_different() -> None:
    def picture(assumed: bool) -> object:
        steps = tuple(replace(step, assumed=assumed and step.key == "line0") for step in GAINS.steps)
        return on_screen(replace(GAINS, steps=steps), 700, 500).image

    assert picture(True) != picture(False)


def test_a_loss_of_nothing_is_still_seen() -> None:
    for bar in on_screen(ZERO, 620, 430).of("bar")[1:-1]:
        assert bar.rect.width() >= 1
        assert bar.rect.height() >= 8


def test_a_stale_picture_says_why_and_fades() -> None:
    drawn = on_screen(STALE, 620, 430)
    assert STALE.stale in drawn.texts()
    bar = drawn.of("bar")[0].rect
    y = round(bar.top() + 3)
    shown = drawn.image.pixelColor(round(bar.left() + 20), y)
    fresh = on_screen(replace(STALE, stale=""), 620, 430)
    bar = fresh.of("bar")[0].rect
    assert shown.lightness() > fresh.image.pixelColor(round(bar.left() + 20), round(bar.top() + 3)).lightness() + 40


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=["light", "dark"])
def test_picked_and_hovered_rows_are_lit(palette: object) -> None:
    plain = on_screen(SILICON, 620, 430, palette)
    lit = on_screen(SILICON, 620, 430, palette, picked="line3", hovered="line1")
    areas = dict(lit.hits[len(SILICON.segments) :])

    def ground(drawn: Drawn, area: QRectF) -> QColor:
        return drawn.image.pixelColor(round(area.right() - 3), round(area.top() + 2))

    changed = [key for key, area in areas.items() if ground(plain, area) != ground(lit, area)]
    assert changed == ["line1", "line3"]
    assert ground(lit, areas["line1"]) != ground(lit, areas["line3"])


def test_picking_a_piece_of_the_strip_marks_it() -> None:
    assert on_screen(SILICON, 620, 430).image != on_screen(SILICON, 620, 430, picked="thermalisation").image


@pytest.mark.parametrize("pixel", [1.0, 1.25, 1.5, 2.0])
def test_the_layout_is_the_same_at_any_density(pixel: float) -> None:
    plain, dense = on_screen(PEROVSKITE, 620, 430), on_screen(PEROVSKITE, 620, 430, pixel=pixel)
    assert dense.image.width() == round(620 * pixel)
    assert [mark.rect for mark in dense.marks] == [mark.rect for mark in plain.marks]


def test_values_that_are_no_numbers_do_not_break_the_picture() -> None:
    broken = replace(SILICON.steps[1], end=float("nan"))
    on_screen(replace(SILICON, steps=(SILICON.steps[0], broken, SILICON.steps[-1])), 620, 430)
    on_screen(replace(SILICON, axis_range=(0.0, 0.0)), 620, 430)
    on_screen(replace(SILICON, segments=(), steps=SILICON.steps), 620, 430)


def test_no_size_is_too_small_to_survive() -> None:
    for size in ((1, 1), (40, 30), (200, 120)):
        on_screen(LONG_NAMES, *size)
