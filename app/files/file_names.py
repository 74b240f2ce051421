"""File names for charts, made of the names of cells: safe on every system, and no two alike."""

from __future__ import annotations

import unicodedata
from collections import Counter
from collections.abc import Sequence

from app.files.windows_names import windows_trouble

_LONGEST = 150  # bytes of UTF-8, so that number and ending stay within the 255 of common file systems
_FORBIDDEN = frozenset('<>:"/\\|?*')


def chart_names(cells: Sequence[tuple[str, str]], ending: str) -> list[str]:
    """A file name for each cell.

    Parameters
    ----------
    cells : sequence of (str, str)
        Name and group of each.
    ending : str
        What follows the name (".waterfall.png").

    Returns
    -------
    list of str
        NAME and the ending. Where several cells have one name, NAME (GROUP); what is still alike is numbered. Alike are
        also names that differ in case or in the composition of accents only, since some file systems do not tell them
        apart.
    """
    stems = [safe_stem(name) for name, _ in cells]
    often = Counter(map(_key, stems))
    taken: set[str] = set()
    names = []
    for stem, (name, group) in zip(stems, cells, strict=True):
        wanted = stem
        if often[_key(stem)] > 1 and group:
            wanted = safe_stem(f"{name} ({group})")
        unique, number = wanted, 1
        while _key(unique) in taken:
            number += 1
            unique = f"{wanted} ({number})"
        taken.add(_key(unique))
        names.append(unique + ending)
    return names


def safe_stem(name: str) -> str:
    """The part of a file name that stands for a cell."""
    plain = unicodedata.normalize("NFC", name)
    plain = "".join(letter if letter.isprintable() and letter not in _FORBIDDEN else "_" for letter in plain).strip()
    if plain.startswith((".", "-")):  # hidden files, and what a shell takes for an option
        plain = f"_{plain[1:]}"
    plain = plain.encode("utf-8")[:_LONGEST].decode("utf-8", "ignore").rstrip(" .")
    if windows_trouble(plain):
        plain = f"_{plain}"
    return plain or "cell"


def _key(stem: str) -> str:
    return unicodedata.normalize("NFC", stem.casefold())
