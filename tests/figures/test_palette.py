from __future__ import annotations

from itertools import combinations
from typing import get_args

import numpy as np
import pytest

from app.figures.palette import DARK, LIGHT, TRANSPARENT, Palette, channels, faded, lightened
from app.figures.spec import Role

PALETTES = [LIGHT, DARK, TRANSPARENT, faded(LIGHT), faded(DARK)]
NAMES = ["light", "dark", "transparent", "faded light", "faded dark"]
FAMILIES: tuple[Role, ...] = ("spectral", "voltage", "fill-factor", "non-radiative", "limit", "cell")


def linear(colour: str) -> np.ndarray:
    part = np.array(channels(colour)) / 255
    return np.where(part <= 0.04045, part / 12.92, ((part + 0.055) / 1.055) ** 2.4)


def ratio(one: str, two: str) -> float:
    """Contrast by WCAG 2.2, written apart from the program's own."""
    first, second = (float(linear(colour) @ [0.2126, 0.7152, 0.0722]) for colour in (one, two))
    return (max(first, second) + 0.05) / (min(first, second) + 0.05)


def test_black_on_white_is_21() -> None:
    assert ratio("#000000", "#ffffff") == pytest.approx(21.0)


@pytest.mark.parametrize("palette", PALETTES, ids=NAMES)
def test_every_role_has_a_tone(palette: Palette) -> None:
    assert set(palette.tones) == set(get_args(Role))


@pytest.mark.parametrize("palette", PALETTES, ids=NAMES)
def test_texts_have_contrast_of_at_least_4_5(palette: Palette) -> None:
    grounds = [palette.ground]
    if palette.key != "transparent":
        grounds += [palette.panel, palette.picked, palette.hovered]
    for ground in grounds:
        for ink in (palette.ink, palette.muted):
            assert ratio(ink, ground) >= 4.5, (ink, ground)
    assert ratio(palette.warn_ink, palette.warn_fill) >= 4.5
    for role, tone in palette.tones.items():
        assert ratio(tone.ink, palette.ground) >= 4.5, role
        for ground in (tone.fill, lightened(tone, palette.ground).fill):
            text = tone.on_fill if ground == tone.fill else lightened(tone, palette.ground).on_fill
            assert ratio(text, ground) >= 4.5, (role, ground)


@pytest.mark.parametrize("palette", [LIGHT, DARK, TRANSPARENT], ids=NAMES[:3])
def test_outlines_and_axes_have_contrast_of_at_least_3(palette: Palette) -> None:
    assert ratio(palette.frame, palette.ground) >= 3
    for role, tone in palette.tones.items():
        assert ratio(tone.outline, palette.ground) >= 3, role


@pytest.mark.parametrize("palette", PALETTES[3:], ids=NAMES[3:])
def test_a_picture_out_of_date_still_has_outlines(palette: Palette) -> None:
    # Faded on purpose, so 3:1 is not asked for; but each bar must stand out from the ground.
    for role, tone in palette.tones.items():
        assert ratio(tone.outline, palette.ground) >= 1.9, role


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=NAMES[:2])
def test_the_families_differ_in_hatch(palette: Palette) -> None:
    hatches = [palette.tones[role].hatch for role in FAMILIES[:4]]
    assert len(set(hatches)) == 4
    assert "plain" not in hatches


# Simulation matrices for full dichromacy, in linear RGB: Machado, Oliveira and Fernandes 2009 (from memory).
SIGHT = {
    "full": np.eye(3),
    "protan": np.array(
        [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]
    ),
    "deutan": np.array(
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]]
    ),
    "tritan": np.array(
        [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]]
    ),
}


def lab(rgb: np.ndarray) -> np.ndarray:
    """CIE 1976 L*a*b* of linear sRGB (IEC 61966-2-1 primaries, D65)."""
    to_xyz = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])
    xyz = to_xyz @ rgb / np.array([0.9505, 1.0, 1.089])
    root = np.where(xyz > 0.008856, np.cbrt(xyz), 7.787 * xyz + 16 / 116)
    return np.array([116 * root[1] - 16, 500 * (root[0] - root[1]), 200 * (root[1] - root[2])])


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=NAMES[:2])
@pytest.mark.parametrize("sight", SIGHT)
def test_fills_stay_apart_for_colour_blind_readers(palette: Palette, sight: str) -> None:
    def seen(role: Role) -> np.ndarray:
        return lab(np.clip(SIGHT[sight] @ linear(palette.tones[role].fill), 0, 1))

    for one, two in combinations(FAMILIES, 2):
        # A difference of about 2 is just seen side by side; 10 is told apart across a picture.
        assert np.linalg.norm(seen(one) - seen(two)) >= 10, (one, two)
