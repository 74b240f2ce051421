"""Sizes and styles of exported pictures."""

from __future__ import annotations

from dataclasses import dataclass

from app.figures.style import Style

POINTS_PER_INCH = 72.0
MM = POINTS_PER_INCH / 25.4


@dataclass(frozen=True)
class Preset:
    """A size and style of exported pictures.

    Parameters
    ----------
    key, title : str
        Identity, and name for a menu.
    width, height : float
        Size of the page [pt]; the height is the least one where `tallest` is larger.
    tallest : float
        Largest height [pt]; the waterfall takes what its rows need up to this.
    dpi : float
        Pixels per inch of the PNG.
    style : Style
        Type and lines [pt].
    """

    key: str
    title: str
    width: float
    height: float
    tallest: float
    dpi: float
    style: Style


_SLIDE = Style(base=18, floor=10, title=24, small=17, caption=12, margin=16, hairline=0.8, outline=1.1, curve=2.6)
_COLUMN = Style(base=7.5, floor=6, title=8.5, small=7, caption=6, margin=4, hairline=0.35, outline=0.5, curve=1.1)

PRESETS: dict[str, Preset] = {
    preset.key: preset
    for preset in (
        Preset("slide", "Slide 16:9, 1920 × 1080", 960, 540, 540, 144, _SLIDE),
        Preset("slide-4k", "Slide 16:9, 3840 × 2160", 960, 540, 540, 288, _SLIDE),
        Preset("column-300", "Column 85 mm, 300 dpi", 85 * MM, 70 * MM, 110 * MM, 300, _COLUMN),
        Preset("column-600", "Column 85 mm, 600 dpi", 85 * MM, 70 * MM, 110 * MM, 600, _COLUMN),
    )
}
