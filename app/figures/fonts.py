"""The bundled type of the charts, so that a picture looks the same on every machine."""

from __future__ import annotations

from functools import lru_cache
from importlib.resources import files

from PySide6.QtGui import QFont, QFontDatabase, QGuiApplication, QRawFont

from app.figures.errors import FigureError

#: Signs the charts print beside plain letters and digits.
NEEDED_SIGNS = "−⁻⁰¹²³⁴⁵⁶⁷⁸⁹±°·–—×→ΩηλΔΦμµ≤≥≈∞…\N{THIN SPACE}\N{NARROW NO-BREAK SPACE}\N{NO-BREAK SPACE}"

#: Noto Sans carries letters, digits and superscripts, but neither the minus sign nor arrows; those come from
#: a small cut of Noto Sans Math, which has the same weight and width.
_FILES = ("NotoSans-Regular.ttf", "NotoSans-Bold.ttf", "GapledgerMath-Regular.ttf", "GapledgerMath-Bold.ttf")


@lru_cache(maxsize=1)
def families() -> tuple[str, ...]:
    """Load the bundled fonts into Qt, once, and name their families.

    Returns
    -------
    tuple of str
        Families in the order in which a glyph is looked for.

    Raises
    ------
    FigureError
        No QGuiApplication exists yet, or Qt refuses a bundled font.
    """
    if QGuiApplication.instance() is None:
        raise FigureError("Fonts can be loaded only once a Qt application exists.")
    found: list[str] = []
    for name in _FILES:
        data = (files("resources") / "fonts" / name).read_bytes()
        names = QFontDatabase.applicationFontFamilies(QFontDatabase.addApplicationFontFromData(data))
        if not names:
            raise FigureError(f"The bundled font {name} could not be loaded.")
        found += [family for family in names if family not in found]
    return tuple(found)


@lru_cache(maxsize=256)
def chart_font(pixels: int, bold: bool = False, hinted: bool = False) -> QFont:
    """Give the font of the charts at a whole number of pixels.

    Parameters
    ----------
    pixels : int
        Height of the type in the painter's present units.
    bold : bool
        Bold instead of regular.
    hinted : bool
        Fit the outlines to the pixel grid: crisp on a screen, wrong in a file that is scaled later.

    Returns
    -------
    QFont
        Shared; do not change it.
    """
    font = QFont(list(families()))
    font.setPixelSize(max(1, pixels))
    font.setBold(bold)
    font.setKerning(True)
    # A search for "fill" in a PDF must find it, so "fi" stays two letters.
    font.setFeature(QFont.Tag.fromString("liga"), 0)
    # Grey smoothing only: coloured fringes of sub-pixel smoothing would land in copied pictures.
    strategy = QFont.StyleStrategy.PreferAntialias | QFont.StyleStrategy.NoSubpixelAntialias
    font.setStyleStrategy(strategy)
    preference = QFont.HintingPreference
    font.setHintingPreference(preference.PreferVerticalHinting if hinted else preference.PreferNoHinting)
    return font


def missing_signs(signs: str = NEEDED_SIGNS) -> str:
    """Tell which signs none of the bundled fonts can draw.

    Parameters
    ----------
    signs : str
        Characters to look for.

    Returns
    -------
    str
        Those that would come out as an empty box; empty when all is well.
    """
    # The size does not matter for the question, but Qt wants one.
    size = 12.0
    raw = []
    for name in _FILES:
        font = QRawFont()
        font.loadFromData(
            (files("resources") / "fonts" / name).read_bytes(), size, QFont.HintingPreference.PreferNoHinting
        )
        if "Bold" not in name:
            raw.append(font)
    return "".join(sign for sign in signs if not any(font.supportsCharacter(ord(sign)) for font in raw))
