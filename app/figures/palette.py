"""Colours of the charts: what each role looks like on white, on a dark screen and on no ground at all.

The fills are those of Okabe and Ito (2008), which stay apart for colour-blind readers. Where such a fill is too
close to the paper the dark outline carries the shape. A hatch a family keeps them apart in grey print as well.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import lru_cache
from types import MappingProxyType
from typing import Literal

from app.figures.spec import Role

Hatch = Literal["plain", "rising", "falling", "level", "dots"]


@dataclass(frozen=True)
class Tone:
    """One role: `fill` of areas, `ink` for texts and curves on the paper, `outline` of areas, `on_fill` for
    texts upon the fill, and the `hatch` with its colour `mark`. Colours are "#rrggbb" or "#aarrggbb"."""

    fill: str
    ink: str
    outline: str
    on_fill: str
    hatch: Hatch
    mark: str


@dataclass(frozen=True, eq=False)
class Palette:
    """All colours of one output.

    Parameters
    ----------
    key : str
        "light", "dark" or "transparent".
    paper : str
        Ground of the picture; with alpha 0 where nothing is to be painted.
    ground : str
        The opaque colour that contrasts are reckoned against (white for the transparent one).
    ink, muted : str
        Texts, and texts of second rank.
    frame, grid, panel : str
        Axis lines, grid lines, and the ground of the magnified part.
    picked, hovered : str
        Ground of the picked row and of the one under the pointer.
    warn_fill, warn_ink : str
        The banner of a picture that is out of date.
    tones : mapping of Role to Tone
        One for each role.
    """

    key: str
    paper: str
    ground: str
    ink: str
    muted: str
    frame: str
    grid: str
    panel: str
    picked: str
    hovered: str
    warn_fill: str
    warn_ink: str
    tones: Mapping[Role, Tone]


def channels(colour: str) -> tuple[int, int, int]:
    """Split "#rrggbb" or "#aarrggbb" into red, green and blue (0–255)."""
    digits = colour[-6:]
    return int(digits[0:2], 16), int(digits[2:4], 16), int(digits[4:6], 16)


def blend(first: str, second: str, share: float) -> str:
    """Mix two opaque colours.

    Parameters
    ----------
    first, second : str
        "#rrggbb".
    share : float
        How much of `second`, 0 to 1.

    Returns
    -------
    str
        "#rrggbb".
    """
    pairs = zip(channels(first), channels(second), strict=True)
    return "#" + "".join(f"{round(a + (b - a) * share):02x}" for a, b in pairs)


def luminance(colour: str) -> float:
    """Relative luminance of a colour, 0 to 1 (WCAG 2.2, definition "relative luminance")."""

    def linear(value: int) -> float:
        part = value / 255
        return part / 12.92 if part <= 0.04045 else float(((part + 0.055) / 1.055) ** 2.4)

    red, green, blue = channels(colour)
    return 0.2126 * linear(red) + 0.7152 * linear(green) + 0.0722 * linear(blue)


def contrast(first: str, second: str) -> float:
    """Contrast ratio of two opaque colours, 1 to 21 (WCAG 2.2, definition "contrast ratio")."""
    low, high = sorted((luminance(first), luminance(second)))
    return (high + 0.05) / (low + 0.05)


def _on(fill: str) -> str:
    return max(("#ffffff", "#101418"), key=lambda text: contrast(text, fill))


def _tone(fill: str, ink: str, outline: str, hatch: Hatch) -> Tone:
    on_fill = _on(fill)
    # The hatch moves away from the text's colour, so that it never eats into the text's contrast.
    mark = blend(fill, "#ffffff" if on_fill != "#ffffff" else "#000000", 0.38)
    return Tone(fill, ink, outline, on_fill, hatch, mark)


_LIGHT_TONES: dict[Role, Tone] = {
    "spectral": _tone("#e69f00", "#8a5a00", "#8a5a00", "rising"),
    "voltage": _tone("#0072b2", "#00619a", "#00456c", "level"),
    "fill-factor": _tone("#009e73", "#00704f", "#005c42", "falling"),
    "non-radiative": _tone("#cc79a7", "#9a3f72", "#84345f", "dots"),
    "total": _tone("#5b6672", "#414b56", "#333c46", "plain"),
    "limit": _tone("#3b4754", "#333d48", "#1f2730", "plain"),
    "cell": _tone("#d55e00", "#b04d00", "#8a3c00", "plain"),
    "muted": _tone("#b9c0c8", "#5f6872", "#6c757f", "plain"),
}

_DARK_TONES: dict[Role, Tone] = {
    "spectral": _tone("#e69f00", "#f0b53a", "#f7cd78", "rising"),
    "voltage": _tone("#0072b2", "#5db8ee", "#6fbdec", "level"),
    "fill-factor": _tone("#009e73", "#3fc79d", "#63d4b0", "falling"),
    "non-radiative": _tone("#cc79a7", "#e09fc3", "#ecc0d8", "dots"),
    "total": _tone("#8b96a3", "#b3bdc8", "#c3ccd6", "plain"),
    "limit": _tone("#b4bec9", "#c9d2db", "#e4eaf0", "plain"),
    "cell": _tone("#d55e00", "#ff9447", "#ffab6e", "plain"),
    "muted": _tone("#59636e", "#98a3ae", "#8f9aa5", "plain"),
}

LIGHT = Palette(
    key="light",
    paper="#ffffff",
    ground="#ffffff",
    ink="#161b21",
    muted="#58616b",
    frame="#5b6570",
    grid="#dde2e7",
    panel="#f5f7f9",
    picked="#d6e6f5",
    hovered="#eaf1f8",
    warn_fill="#fff0c2",
    warn_ink="#5c4300",
    tones=MappingProxyType(_LIGHT_TONES),
)

DARK = Palette(
    key="dark",
    paper="#15191e",
    ground="#15191e",
    ink="#eef2f6",
    muted="#a3aeb9",
    frame="#8f9aa5",
    grid="#2d343c",
    panel="#1b2026",
    picked="#24405a",
    hovered="#222d38",
    warn_fill="#4a3a0c",
    warn_ink="#ffe39a",
    tones=MappingProxyType(_DARK_TONES),
)

#: For slides with a light ground of their own: as on white, with nothing painted underneath.
TRANSPARENT = replace(LIGHT, key="transparent", paper="#00ffffff", panel="#0c1f2730", grid="#2a1f2730")


@lru_cache(maxsize=8)
def faded(palette: Palette) -> Palette:
    """The same colours drawn back towards the ground, for a picture that is out of date; texts keep theirs."""
    tones: dict[Role, Tone] = {}
    for role, tone in palette.tones.items():
        fill = blend(tone.fill, palette.ground, 0.62)
        outline = blend(tone.outline, palette.ground, 0.35)
        tones[role] = replace(
            tone, fill=fill, on_fill=_on(fill), outline=outline, mark=blend(tone.mark, palette.ground, 0.62)
        )
    return replace(palette, tones=MappingProxyType(tones))


@lru_cache(maxsize=64)
def lightened(tone: Tone, ground: str) -> Tone:
    """A tone for an amount that rests on an assumption: half way to the ground, outline unchanged."""
    fill = blend(tone.fill, ground, 0.6)
    return replace(tone, fill=fill, on_fill=_on(fill), mark=blend(tone.mark, ground, 0.6))
