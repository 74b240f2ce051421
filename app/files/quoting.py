"""Quoting what someone wrote inside a sentence about it."""

import unicodedata

_LONGEST = 40


def visible(text: str) -> str:
    """Spell out what cannot be seen, so that a hidden character is found; spaces of all widths become " "."""
    return "".join(_visible(letter) for letter in text)


def _visible(letter: str) -> str:
    if letter.isprintable():
        return letter
    return " " if unicodedata.category(letter) == "Zs" else ascii(letter)[1:-1]


def quote(text: str, longest: int = _LONGEST) -> str:
    """Put a text between quotation marks on one line, its end cut off where it is longer than `longest`."""
    shown = visible(text[: longest + 1])
    return f"“{shown}”" if len(shown) <= longest else f"“{shown[: longest - 1]}…”"


def quote_end(text: str, longest: int = 80) -> str:
    """Put the end of a long text between quotation marks: for folders, whose last part tells most."""
    shown = visible(text[-longest - 1 :])
    return f"“{shown}”" if len(shown) <= longest else f"“…{shown[1 - longest :]}”"
