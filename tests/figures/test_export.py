from __future__ import annotations

import os
import re
import struct
import subprocess
import sys
import zlib
from dataclasses import replace

import pytest
from PySide6.QtCore import QByteArray
from PySide6.QtGui import QColor, QGuiApplication, QImage, QPainter, QPalette
from PySide6.QtSvg import QSvgRenderer

from app.figures.errors import FigureError
from app.figures.export import PRESETS, Kind, image, page_size, render
from app.figures.sheet import Sheet
from app.figures.spec import PlotSpec, WaterfallSpec

from .samples import GAINS, JV, LONG_NAMES, MARKUP, PEROVSKITE, SILICON, SIXTEEN

SPECS: dict[str, WaterfallSpec | PlotSpec] = {"waterfall": SILICON, "plot": JV, "markup": MARKUP}


def chunks(data: bytes) -> dict[bytes, bytes]:
    """The parts of a PNG file (ISO/IEC 15948), each checked by its sum."""
    assert data[:8] == b"\x89PNG\r\n\x1a\n"
    found, place = {}, 8
    while place < len(data):
        (length,) = struct.unpack(">I", data[place : place + 4])
        kind, body = data[place + 4 : place + 8], data[place + 8 : place + 8 + length]
        (check,) = struct.unpack(">I", data[place + 8 + length : place + 12 + length])
        assert zlib.crc32(kind + body) == check
        found[kind] = body
        place += 12 + length
    return found


@pytest.mark.parametrize("name", SPECS)
@pytest.mark.parametrize(
    ("preset", "width", "dpi"),
    # 85 mm are 1003.9 px at 300 and 2007.9 px at 600 dots an inch.
    [("slide", 1920, 144), ("slide-4k", 3840, 288), ("column-300", 1004, 300), ("column-600", 2008, 600)],
)
def test_png_has_the_size_and_resolution_of_its_preset(name: str, preset: str, width: int, dpi: int) -> None:
    parts = chunks(render(SPECS[name], PRESETS[preset]))
    found_width, found_height = struct.unpack(">II", parts[b"IHDR"][:8])
    assert found_width == width
    if preset.startswith("slide"):
        assert found_height * 16 == found_width * 9
    else:
        assert 70 <= found_height / dpi * 25.4 <= 110.1
    across, down, unit = struct.unpack(">IIB", parts[b"pHYs"])
    assert unit == 1
    assert across == down == round(dpi / 0.0254)


def test_a_column_is_as_tall_as_its_rows_need() -> None:
    few, many = (page_size(spec, PRESETS["column-300"])[1] for spec in (GAINS, SIXTEEN))
    assert few < many
    assert page_size(LONG_NAMES, PRESETS["column-300"])[1] / 72 * 25.4 <= 110.1


@pytest.mark.parametrize("preset", PRESETS)
def test_the_names_of_the_axes_are_whole_also_above_a_long_caption(preset: str) -> None:
    spec = replace(JV, y_label="Current density (mA cm⁻²)", caption=("a word " * 30,))
    sheets: list[Sheet] = []
    image(spec, PRESETS[preset], record=sheets)
    texts = [mark.text for mark in sheets[0].marks or ()]
    assert spec.y_label in texts
    assert spec.x_label in texts


@pytest.mark.parametrize("preset", PRESETS)
@pytest.mark.parametrize("name", SPECS)
def test_a_transparent_picture_has_no_ground(name: str, preset: str) -> None:
    clear = QImage.fromData(render(SPECS[name], PRESETS[preset], background="transparent"))
    white = QImage.fromData(render(SPECS[name], PRESETS[preset]))
    right, bottom = clear.width() - 1, clear.height() - 1
    for x, y in ((0, 0), (right, 0), (0, bottom), (right, bottom)):
        assert clear.pixelColor(x, y).alpha() == 0
        assert white.pixelColor(x, y) == QColor("white")


@pytest.mark.parametrize("kind", ["png", "svg"])
@pytest.mark.parametrize("name", SPECS)
def test_the_same_description_gives_the_same_file(name: str, kind: Kind) -> None:
    preset = PRESETS["column-300"]
    assert render(SPECS[name], preset, kind=kind) == render(SPECS[name], preset, kind=kind)


def test_the_picture_does_not_depend_on_the_theme() -> None:
    before = render(SILICON, PRESETS["column-300"])
    kept = QGuiApplication.palette()
    dark = QPalette(QColor("#202020"), QColor("#101010"))
    try:
        QGuiApplication.setPalette(dark)
        assert render(SILICON, PRESETS["column-300"]) == before
    finally:
        QGuiApplication.setPalette(kept)


def test_another_number_gives_another_picture() -> None:
    other = replace(SILICON, steps=(*SILICON.steps[:-1], replace(SILICON.steps[-1], value_text="26.71 %")))
    assert render(other, PRESETS["slide"]) != render(SILICON, PRESETS["slide"])


@pytest.mark.parametrize("preset", ["slide", "column-300"])
@pytest.mark.parametrize("name", SPECS)
def test_svg_shows_what_png_shows(name: str, preset: str) -> None:
    data = render(SPECS[name], PRESETS[preset], kind="svg")
    assert b"<text" not in data
    renderer = QSvgRenderer(QByteArray(data))
    assert renderer.isValid()
    width, height = page_size(SPECS[name], PRESETS[preset])
    box = renderer.viewBoxF()
    assert (box.x(), box.y(), box.width(), box.height()) == pytest.approx((0, 0, width, height), abs=0.01)
    png = image(SPECS[name], PRESETS[preset])
    svg = QImage(png.size(), QImage.Format.Format_RGB32)
    svg.fill(QColor("white"))
    with QPainter(svg) as painter:
        renderer.render(painter)
    size = (240, 240)
    one, two = (picture.scaled(*size).convertToFormat(QImage.Format.Format_Grayscale8) for picture in (png, svg))
    differing = sum(
        abs(one.pixelColor(x, y).lightness() - two.pixelColor(x, y).lightness()) > 90
        for x in range(size[0])
        for y in range(size[1])
    )
    # Edges fall on other pixels, but no mark may be missing from either.
    assert differing < 0.01 * size[0] * size[1]


def test_svg_states_its_size_in_mm() -> None:
    data = render(SILICON, PRESETS["column-300"], kind="svg")
    found = re.search(rb'<svg width="([0-9.]+)mm" height="([0-9.]+)mm"', data)
    assert found is not None
    assert float(found[1]) == pytest.approx(85.0, abs=0.05)


@pytest.mark.parametrize("preset", ["slide", "column-300"])
def test_pdf_has_the_exact_page(preset: str) -> None:
    data = render(PEROVSKITE, PRESETS[preset], kind="pdf")
    assert data.startswith(b"%PDF-")
    found = re.search(rb"/MediaBox \[0 0 ([0-9.]+) ([0-9.]+)\]", data)
    assert found is not None
    width, height = page_size(PEROVSKITE, PRESETS[preset])
    # Qt rounds the box to the next whole point up.
    assert float(found[1]) == pytest.approx(width, abs=1.0)
    assert float(found[2]) == pytest.approx(height, abs=1.0)
    assert data.count(b"/Type /Page\n") == 1


def test_an_unknown_kind_is_refused_in_plain_words() -> None:
    with pytest.raises(FigureError, match="png, svg or pdf, not as gif"):
        render(SILICON, PRESETS["slide"], kind="gif")  # type: ignore[arg-type]


def test_a_picture_too_large_for_qt_is_refused() -> None:
    with pytest.raises(FigureError, match="not enough memory"):
        render(SILICON, replace(PRESETS["slide"], width=1e6, height=1e6, tallest=1e6))


@pytest.mark.parametrize("display", ["", ":987"], ids=["none", "unreachable"])
def test_charts_are_made_without_a_display_or_a_window(display: str) -> None:
    code = (
        "from app.figures.export import PRESETS, render\n"
        "from app.figures.spec import PlotSpec\n"
        "import sys\n"
        "spec = PlotSpec('Title', 'x', 'y', (0.0, 1.0), (0.0, 1.0), ())\n"
        "data = render(spec, PRESETS['column-300'])\n"
        "assert 'PySide6.QtWidgets' not in sys.modules\n"
        "print(len(data))\n"
    )
    bare = {key: value for key, value in os.environ.items() if key not in ("WAYLAND_DISPLAY", "QT_QPA_PLATFORM")}
    bare["DISPLAY"] = display
    command = [sys.executable, "-c", code]
    done = subprocess.run(command, env=bare, capture_output=True, text=True, timeout=60, check=False)
    assert done.returncode == 0, done.stderr
    assert int(done.stdout) > 5_000
