from __future__ import annotations

import re
from importlib.resources import files

import pytest
from PySide6.QtGui import QFontInfo, QFontMetricsF, QRawFont

from app.figures.fonts import chart_font, families, missing_signs


def test_the_bundled_families_are_loaded() -> None:
    assert families() == ("Noto Sans", "Gapledger Math")
    assert QFontInfo(chart_font(120)).family() == "Noto Sans"


def test_no_sign_the_charts_need_is_missing() -> None:
    assert missing_signs() == ""


def test_a_sign_no_bundled_font_has_is_named() -> None:
    assert missing_signs("a漢b") == "漢"


@pytest.mark.parametrize("hinted", [False, True])
@pytest.mark.parametrize("bold", [False, True])
@pytest.mark.parametrize("pixels", [9, 11, 12, 15, 28, 133])
def test_all_digits_are_as_wide_as_a_zero(pixels: int, bold: bool, hinted: bool) -> None:
    """Texts are measured by their shape, with zeros for all digits."""
    metrics = QFontMetricsF(chart_font(pixels, bold, hinted))
    for text in ("−17.71 %", "711.4 mV", "Plover 17", "1.1", "4.7×10⁻⁷", "a1b7", "11171"):
        shape = re.sub("[1-9]", "0", text)
        assert metrics.horizontalAdvance(text) == metrics.horizontalAdvance(shape), text


@pytest.mark.parametrize("bold", [False, True])
def test_the_minus_is_as_wide_and_heavy_as_the_plus(bold: bool) -> None:
    name = "Bold" if bold else "Regular"

    def outline(file: str, sign: str) -> tuple[float, float]:
        font = QRawFont()
        font.loadFromData(
            (files("resources") / "fonts" / file).read_bytes(), 1000.0, chart_font(10).hintingPreference()
        )
        glyph = font.glyphIndexesForString(sign)[0]
        return font.advancesForGlyphIndexes([glyph])[0].x(), font.pathForGlyph(glyph).boundingRect().height()

    minus = outline(f"GapledgerMath-{name}.ttf", "−")
    plus = outline(f"NotoSans-{name}.ttf", "+")
    assert minus[0] == pytest.approx(plus[0], abs=2)
    # The height of the minus is the thickness of its bar: 71 of 1000 in the regular weight, 107 in the bold.
    assert minus[1] == pytest.approx(107 if bold else 71, abs=2)


def test_the_licence_travels_with_the_fonts() -> None:
    text = (files("resources") / "licences" / "NotoSans-OFL.txt").read_text(encoding="utf-8")
    assert "SIL OPEN FONT LICENSE Version 1.1" in text
    assert "Copyright 2015-2020 Google LLC" in text
    for name in (entry.name for entry in (files("resources") / "fonts").iterdir() if entry.name.endswith(".ttf")):
        assert name in text
