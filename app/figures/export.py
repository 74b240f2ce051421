"""Charts as files: PNG, SVG and PDF of one painter, all made in memory."""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import Literal

from PySide6.QtCore import QBuffer, QByteArray, QIODevice, QMarginsF, QRectF, QSize, QSizeF
from PySide6.QtGui import QColor, QGuiApplication, QImage, QImageWriter, QPageSize, QPainter, QPdfWriter
from PySide6.QtSvg import QSvgGenerator

from app.figures.errors import FigureError
from app.figures.palette import LIGHT, TRANSPARENT, Palette
from app.figures.plot import natural_height as plot_height
from app.figures.plot import paint_plot
from app.figures.presets import MM, POINTS_PER_INCH, PRESETS, Preset
from app.figures.sheet import Sheet, Target
from app.figures.spec import PlotSpec, WaterfallSpec
from app.figures.style import Style
from app.figures.waterfall import paint_waterfall
from app.figures.waterfall_layout import natural_height as waterfall_height
from app.files.png_text import with_texts

__all__ = ["PRESETS", "Background", "Kind", "Preset", "Spec", "ensure_gui", "image", "page_size", "render"]

Spec = WaterfallSpec | PlotSpec
Background = Literal["white", "transparent"]
Kind = Literal["png", "svg", "pdf"]
_kept: list[QGuiApplication] = []


def ensure_gui() -> None:
    """Make sure a Qt application exists, for programs without a window.

    It needs no display: the offscreen platform is chosen, unless the user chose another by QT_QPA_PLATFORM.
    """
    if QGuiApplication.instance() is None:
        chosen = [] if os.environ.get("QT_QPA_PLATFORM") else ["-platform", "offscreen"]
        # Qt deletes an application nobody holds.
        _kept.append(QGuiApplication(["gapledger", *chosen]))


def _ground(background: Background) -> Palette:
    return TRANSPARENT if background == "transparent" else LIGHT


def page_size(spec: Spec, preset: Preset) -> tuple[float, float]:
    """Size of the page a chart gets [pt], a whole number of device pixels of the preset.

    Parameters
    ----------
    spec : WaterfallSpec or PlotSpec
        What is shown; in a column it takes the height that its rows or axes and its texts need.
    preset : Preset
        Where.

    Returns
    -------
    (float, float)
        Width and height [pt].
    """
    height = preset.height
    if preset.tallest > preset.height:
        probe = QImage(1, 1, QImage.Format.Format_ARGB32_Premultiplied)
        with QPainter(probe) as painter:
            sheet = Sheet(painter)
            if isinstance(spec, WaterfallSpec):
                wanted = waterfall_height(sheet, spec, preset.width, preset.style)
            else:
                wanted = plot_height(sheet, spec, preset.width, preset.style)
        height = min(preset.tallest, max(preset.height, wanted))
    scale = preset.dpi / POINTS_PER_INCH
    return round(preset.width * scale) / scale, round(height * scale) / scale


def _paint(sheet: Sheet, spec: Spec, size: tuple[float, float], style: Style, palette: Palette) -> None:
    area = QRectF(0.0, 0.0, *size)
    if isinstance(spec, WaterfallSpec):
        paint_waterfall(sheet, spec, area, style, palette)
    else:
        paint_plot(sheet, spec, area, style, palette)


def image(spec: Spec, preset: Preset, *, background: Background = "white", record: list[Sheet] | None = None) -> QImage:
    """Paint a chart as an image.

    Parameters
    ----------
    spec : WaterfallSpec or PlotSpec
        What to show.
    preset : Preset
        Size and style.
    background : {"white", "transparent"}
        Ground of the picture.
    record : list, optional
        Receives the sheet with the list of what was drawn, for inspection.

    Returns
    -------
    QImage
        With the preset's resolution set.

    Raises
    ------
    FigureError
        Qt has no memory for the image.
    """
    ensure_gui()
    width, height = page_size(spec, preset)
    scale = preset.dpi / POINTS_PER_INCH
    picture = QImage(round(width * scale), round(height * scale), QImage.Format.Format_ARGB32_Premultiplied)
    if picture.isNull():
        raise FigureError("There is not enough memory for a picture of this size.")
    dots = round(preset.dpi / 0.0254)
    picture.setDotsPerMeterX(dots)
    picture.setDotsPerMeterY(dots)
    picture.fill(QColor("white") if background == "white" else QColor(0, 0, 0, 0))
    with QPainter(picture) as painter:
        painter.scale(scale, scale)
        sheet = Sheet(painter, "file", pixel=scale, record=record is not None)
        _paint(sheet, spec, (width, height), preset.style, _ground(background))
    if record is not None:
        record.append(sheet)
    return picture


@dataclass(frozen=True)
class Carried:
    """What a picture file carries beside the picture, in the places that its form has for it.

    Parameters
    ----------
    software : str
        Name and version of the program.
    session : str
        The session of the cell on the picture, as text.
    """

    software: str
    session: str


#: Keyword of the session in a PNG picture, and its name as an attachment of a PDF page.
SESSION_KEYWORD = "Gapledger session"
_ATTACHMENT = "cell.gapledger"


def render(
    spec: Spec,
    preset: Preset,
    *,
    background: Background = "white",
    kind: Kind = "png",
    carried: Carried | None = None,
) -> bytes:
    """Make a chart file in memory.

    Parameters
    ----------
    spec : WaterfallSpec or PlotSpec
        What to show.
    preset : Preset
        Size and style.
    background : {"white", "transparent"}
        Ground of the picture.
    kind : {"png", "svg", "pdf"}
        Form of the file.
    carried : Carried, optional
        What PNG and PDF files carry beside the picture.

    Returns
    -------
    bytes
        The whole file. The same description gives the same PNG and SVG.

    Raises
    ------
    FigureError
        The picture could not be made, or its kind is unknown.
    """
    ensure_gui()
    if kind == "png":
        data = _png(image(spec, preset, background=background))
        if data and carried is not None:
            texts = {"Title": spec.title, "Software": carried.software, SESSION_KEYWORD: carried.session}
            data = with_texts(data, texts)
    elif kind == "svg":
        data = _svg(spec, preset, background)
    elif kind == "pdf":
        data = _pdf(spec, preset, background, carried)
    else:
        raise FigureError(f"Charts can be written as png, svg or pdf, not as {kind}.")
    if not data:
        raise FigureError(f"Qt made no {kind.upper()} file of the chart.")
    return data


def _bytes(array: QByteArray) -> bytes:
    return bytes(array.data())


def _png(picture: QImage) -> bytes:
    array = QByteArray()
    buffer = QBuffer(array)
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    done = QImageWriter(buffer, b"png").write(picture)
    buffer.close()
    return _bytes(array) if done else b""


def _svg(spec: Spec, preset: Preset, background: Background) -> bytes:
    size = page_size(spec, preset)
    array = QByteArray()
    buffer = QBuffer(array)
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    writer = QSvgGenerator(QSvgGenerator.SvgVersion.Svg11)
    writer.setOutputDevice(buffer)
    writer.setResolution(round(POINTS_PER_INCH))
    writer.setSize(QSize(round(size[0]), round(size[1])))
    writer.setViewBox(QRectF(0.0, 0.0, *size))
    writer.setTitle(spec.title)
    _draw(writer, "outline", 1.0, spec, size, preset, background)
    buffer.close()
    return _exact_svg_size(_bytes(array), size)


def _exact_svg_size(data: bytes, size: tuple[float, float]) -> bytes:
    """Put the exact size in the head of an SVG: Qt rounds it to whole points, in mm."""
    head, mark, rest = data.partition(b"viewBox=")
    start = head.rfind(b"<svg")
    if not mark or start < 0:
        return data
    exact = f'<svg width="{size[0] / MM:.4f}mm" height="{size[1] / MM:.4f}mm"\n '
    return head[:start] + exact.encode() + mark + rest


def _pdf(spec: Spec, preset: Preset, background: Background, carried: Carried | None) -> bytes:
    size = page_size(spec, preset)
    array = QByteArray()
    buffer = QBuffer(array)
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    writer = QPdfWriter(buffer)
    writer.setCreator("Gapledger" if carried is None else carried.software)
    if carried is not None:
        writer.addFileAttachment(_ATTACHMENT, carried.session.encode("utf-8"), "application/json")
    writer.setTitle(spec.title)
    resolution = 1200
    writer.setResolution(resolution)
    page = QPageSize(QSizeF(*size), QPageSize.Unit.Point, "chart", QPageSize.SizeMatchPolicy.ExactMatch)
    writer.setPageSize(page)
    writer.setPageMargins(QMarginsF(0, 0, 0, 0))
    _draw(writer, "file", resolution / POINTS_PER_INCH, spec, size, preset, background)
    buffer.close()
    return _bytes(array)


def _draw(
    device: QSvgGenerator | QPdfWriter,
    target: Target,
    scale: float,
    spec: Spec,
    size: tuple[float, float],
    preset: Preset,
    background: Background,
) -> None:
    painter = QPainter()
    if not painter.begin(device):
        raise FigureError("Qt could not start to draw the file.")
    try:
        painter.scale(scale, scale)
        _paint(Sheet(painter, target, pixel=scale), spec, size, preset.style, _ground(background))
    finally:
        painter.end()
