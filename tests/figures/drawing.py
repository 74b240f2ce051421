"""Draws a chart as on screen or as in a file, and keeps what was drawn."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations

from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor, QImage, QPainter

from app.figures.export import Background, Preset, image, page_size
from app.figures.palette import LIGHT, Palette
from app.figures.plot import paint_plot
from app.figures.sheet import Mark, Sheet
from app.figures.spec import PlotSpec, WaterfallSpec
from app.figures.style import screen_style
from app.figures.waterfall import paint_waterfall


@dataclass
class Drawn:
    image: QImage
    page: QRectF
    marks: list[Mark]
    hits: list[tuple[str, QRectF]]

    def of(self, kind: str) -> list[Mark]:
        return [mark for mark in self.marks if mark.kind == kind]

    def texts(self) -> list[str]:
        return [mark.text for mark in self.of("text")]


def on_screen(
    spec: WaterfallSpec | PlotSpec,
    width: int,
    height: int,
    palette: Palette = LIGHT,
    *,
    pixel: float = 1.0,
    picked: str | None = None,
    hovered: str | None = None,
) -> Drawn:
    picture = QImage(round(width * pixel), round(height * pixel), QImage.Format.Format_RGB32)
    picture.setDevicePixelRatio(pixel)
    picture.fill(QColor(palette.ground))
    area = QRectF(0, 0, width, height)
    hits: list[tuple[str, QRectF]] = []
    with QPainter(picture) as painter:
        sheet = Sheet(painter, "screen", pixel=pixel, record=True)
        style = screen_style(width, height)
        if isinstance(spec, WaterfallSpec):
            hits = paint_waterfall(sheet, spec, area, style, palette, picked=picked, hovered=hovered)
        else:
            paint_plot(sheet, spec, area, style, palette)
    assert sheet.marks is not None
    return Drawn(picture, area, sheet.marks, hits)


def in_file(spec: WaterfallSpec | PlotSpec, preset: Preset, background: Background = "white") -> Drawn:
    sheets: list[Sheet] = []
    picture = image(spec, preset, background=background, record=sheets)
    assert sheets[0].marks is not None
    return Drawn(picture, QRectF(0, 0, *page_size(spec, preset)), sheets[0].marks, [])


def collisions(marks: list[Mark]) -> list[tuple[str, str]]:
    """Pairs of texts whose boxes (capital height and descender) overlap."""
    return [
        (one.text, two.text)
        for one, two in combinations(marks, 2)
        if one.rect.adjusted(0.05, 0.05, -0.05, -0.05).intersects(two.rect)
    ]


def strays(page: QRectF, marks: list[Mark]) -> list[str]:
    """Texts that leave the page."""
    return [mark.text for mark in marks if not page.contains(mark.rect)]
