from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

import numpy as np
import pytest
from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor, QFont, QImage, QPainter

from app.figures.fonts import chart_font
from app.figures.hatch import hatch_lines
from app.figures.palette import Hatch
from app.figures.sheet import Sheet, Target


@contextmanager
def canvas(target: Target = "screen", pixel: float = 1.0, size: int = 100) -> Iterator[tuple[QImage, Sheet]]:
    picture = QImage(round(size * pixel), round(size * pixel), QImage.Format.Format_RGB32)
    picture.setDevicePixelRatio(pixel)
    picture.fill(QColor("white"))
    with QPainter(picture) as painter:
        yield picture, Sheet(painter, target, pixel=pixel, record=True)


def inked(picture: QImage) -> QRectF:
    """Box around all that is not white [device px]."""
    white = QColor("white")
    places = [
        (x, y) for x in range(picture.width()) for y in range(picture.height()) if picture.pixelColor(x, y) != white
    ]
    xs, ys = zip(*places, strict=True)
    return QRectF(min(xs), min(ys), max(xs) - min(xs) + 1, max(ys) - min(ys) + 1)


@pytest.mark.parametrize("target", ["screen", "file", "outline"])
@pytest.mark.parametrize("align", ["left", "center", "right"])
def test_a_text_fills_the_box_it_is_said_to_fill(target: Target, align: str) -> None:
    with canvas(target) as (picture, sheet):
        width = sheet.text(50, 60, "Hpg", 20, "#000000", align=align)  # type: ignore[arg-type]
    box, drawn = sheet.marks[0].rect, inked(picture)
    assert box.width() == width
    assert box.adjusted(-1.5, -1.5, 1.5, 1.5).contains(drawn)
    assert drawn.width() > 0.85 * box.width()
    assert drawn.height() > 0.85 * box.height()


def test_a_text_drawn_twice_stands_in_the_same_place() -> None:
    # The second time it comes from the set texts, which hang from their upper edge.
    boxes = []
    for _ in range(3):
        with canvas() as (picture, sheet):
            sheet.text(10, 60, "Twice −5 %", 14, "#000000")
        boxes.append(inked(picture))
    assert boxes[0] == boxes[1] == boxes[2]


def test_a_turned_text_fills_its_box() -> None:
    with canvas() as (picture, sheet):
        sheet.turned_text(50, 50, "Hp upwards", 12, "#000000")
    # The baseline is put on a whole pixel, and small letters' stems rise a little above capitals.
    assert sheet.marks[0].rect.adjusted(-2, -2, 2, 2).contains(inked(picture))
    assert inked(picture).height() > inked(picture).width()


def test_a_long_text_is_cut_to_its_room() -> None:
    with canvas() as (_, sheet):
        cut = sheet.fit("Non-radiative recombination", 12, 80)
        assert cut.endswith("…")
        assert sheet.width(cut, 12) <= 80
        assert sheet.fit("short", 12, 80) == "short"
        assert sheet.fit("anything", 12, 1) == ""


def test_lines_break_at_blanks_and_evenly() -> None:
    with canvas() as (_, sheet):
        lines = sheet.type.wrap("Current mismatch, EQE against J–V", 12, 190, 2)
        assert lines == ["Current mismatch,", "EQE against J–V"]
        assert sheet.type.wrap("one two three four", 12, 1000, 2) == ["one two three four"]


@pytest.mark.parametrize("blank", ["\N{THIN SPACE}", "\N{NARROW NO-BREAK SPACE}", "\N{NO-BREAK SPACE}"])
def test_a_number_is_never_parted_from_its_unit(blank: str) -> None:
    with canvas() as (_, sheet):
        for room in range(40, 200, 5):
            lines = sheet.type.wrap(f"Voc 738.0{blank}mV and Jsc 42.65{blank}mA", 12, room, 5)
            assert not any(line.startswith(("mV", "mA")) for line in lines)
            whole = " ".join(lines)
            assert "…" in whole or whole == f"Voc 738.0{blank}mV and Jsc 42.65{blank}mA"


def test_lines_past_the_last_are_cut() -> None:
    with canvas() as (_, sheet):
        lines = sheet.type.wrap("a text of many words that needs more than two lines", 12, 90, 2)
        assert len(lines) == 2
        assert lines[1].endswith("…")
        assert all(sheet.width(line, 12) <= 90 for line in lines)


def test_fi_stays_two_letters_so_that_a_search_finds_it() -> None:
    assert chart_font(120).featureValue(QFont.Tag.fromString("liga")) == 0


@pytest.mark.parametrize("pixel", [1.0, 1.25, 1.5, 2.0])
def test_a_hairline_on_screen_is_crisp(pixel: float) -> None:
    for place in (10.0, 10.3, 10.5, 10.9):
        with canvas(pixel=pixel, size=40) as (picture, sheet):
            sheet.line(place, 0, place, 40, "#000000", 1.0)
        columns = {picture.pixelColor(x, 20).name() for x in range(picture.width())}
        assert columns == {"#000000", "#ffffff"}
        assert inked(picture).width() == max(1, round(pixel - 0.1))


def test_a_bar_on_screen_has_clean_edges_and_a_frame() -> None:
    with canvas() as (picture, sheet):
        sheet.rect(QRectF(10.4, 10.6, 30.2, 20.1), "#0000ff", "#ff0000", 1.0)
    assert inked(picture) == QRectF(10, 11, 31, 20)
    assert picture.pixelColor(10, 11) == QColor("#ff0000")
    assert picture.pixelColor(11, 12) == QColor("#0000ff")


def test_a_gap_in_the_data_is_a_gap_in_the_curve() -> None:
    x = np.arange(0.0, 100.0, 10.0)
    y = np.full_like(x, 50.0)
    y[5] = np.nan
    with canvas("file") as (picture, sheet):
        sheet.polyline(x, y, "#000000", 4.0)
    assert picture.pixelColor(25, 50) == QColor("black")
    assert picture.pixelColor(50, 50) == QColor("white")
    assert picture.pixelColor(75, 50) == QColor("black")


@pytest.mark.parametrize("hatch", ["plain", "rising", "falling", "level", "dots"])
@pytest.mark.parametrize("size", [(0.0, 5.0), (1.0, 1.0), (3.0, 40.0), (200.0, 12.0), (37.3, 11.9)])
def test_no_line_of_a_hatch_leaves_its_area(hatch: Hatch, size: tuple[float, float]) -> None:
    area = QRectF(5, 7, *size)
    lines = hatch_lines(area, hatch, 6.0)
    if hatch != "plain" and size[0] > 30:
        assert lines
    room = area.adjusted(-1e-6, -1e-6, 1e-6, 1e-6)
    for line in lines:
        for point in (line.p1(), line.p2()):
            assert room.contains(point)


def test_hatches_differ_without_colour() -> None:
    area = QRectF(0, 0, 60, 20)
    kinds: tuple[Hatch, ...] = ("rising", "falling", "level", "dots")
    seen = {tuple(line.toTuple() for line in hatch_lines(area, kind, 6.0)) for kind in kinds}
    assert len(seen) == len(kinds)
