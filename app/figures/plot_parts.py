"""What the descriptions of all charts share: names, captions, and round axes. No Qt."""

from __future__ import annotations

import math

from app.session.light import light_named
from app.session.outcome import Picture
from app.wording import conventions_text, inputs_text, shown_name, unbroken

STALE = "Last valid input: the fields marked in red do not enter"
_LONGEST_BESIDE = 16
_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def nice_step(span: float) -> float:
    """A round step (1, 2 or 5 times a power of ten) that cuts a span into four to ten pieces."""
    raw = span / 4.0
    power = 10.0 ** math.floor(math.log10(raw))
    return next(power * m for m in (5.0, 2.0, 1.0) if power * m <= raw * (1 + 1e-12))


def round_range(low: float, high: float) -> tuple[float, float]:
    """The smallest range with round ends that holds both numbers."""
    step = nice_step(max(high - low, 1e-9))
    return step * math.floor(low / step + 1e-9), step * math.ceil(high / step - 1e-9)


def caption_of(picture: Picture) -> tuple[str, ...]:
    """Small print under every chart of a cell."""
    entry = picture.entry
    light = light_named(entry.spectrum).title
    lines = [f"{inputs_text(entry)} · {unbroken(light)}", conventions_text(picture.choices)]
    if entry.note:
        lines.append(shown_name(entry.note))
    return tuple(lines)


def cell_name(picture: Picture) -> str:
    """The cell's name as a heading."""
    return shown_name(picture.entry.name) or "Unnamed cell"


def short_name(picture: Picture) -> str:
    """The name where it stands beside a point."""
    name = cell_name(picture)
    return name if len(name) <= _LONGEST_BESIDE else f"{name[: _LONGEST_BESIDE - 1].rstrip()}…"


def decades(low: float, high: float, most: int = 8) -> tuple[tuple[float, str], ...]:
    """Names of the whole powers of ten on an axis that shows logarithms: position and text ("10⁻³").

    Parameters
    ----------
    low, high : float
        Ends of the axis, as powers of ten.
    most : int
        As many as there is room for.
    """
    first, last = math.ceil(low - 1e-9), math.floor(high + 1e-9)
    step = max(1, math.ceil((last - first + 1) / most))
    return tuple((float(k), _power_of_ten(k)) for k in range(first, last + 1, step))


def _power_of_ten(exponent: int) -> str:
    if -2 <= exponent <= 3:
        return f"{10.0**exponent:.{max(0, -exponent)}f}"
    return f"10{str(exponent).translate(_RAISED)}"
