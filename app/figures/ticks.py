"""Where the ticks of an axis stand, and how they are printed."""

from __future__ import annotations

import itertools
import math

MINUS = "\N{MINUS SIGN}"


def axis_ticks(low: float, high: float, most: int) -> list[float]:
    """Choose round tick positions inside a range: multiples of 1, 2 or 5 times a power of ten.

    Parameters
    ----------
    low, high : float
        Ends of the axis, in data units, in either order.
    most : int
        As many ticks as there is room for; at least 2 are sought.

    Returns
    -------
    list of float
        Ascending positions within the range. A single one where the range is empty, none where it is not finite.
    """
    low, high = min(low, high), max(low, high)
    if not (math.isfinite(low) and math.isfinite(high)):
        return []
    span = high - low
    # Below this the positions could no longer be told apart in double precision.
    if span <= 1e-12 * max(abs(low), abs(high), 1e-280):
        return [low]
    step, first, last = _step(low, high, max(2, most))
    return [0.0 if index == 0 else index * step for index in range(first, last + 1)]


def _step(low: float, high: float, most: int) -> tuple[float, int, int]:
    """The smallest round step with no more than `most` multiples in the range, and its first and last multiple."""
    power = 10.0 ** math.floor(math.log10((high - low) / most))
    while True:
        for factor in (1.0, 2.0, 5.0):
            step = factor * power
            first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
            if last - first < most:
                return step, first, last
        power *= 10.0


def tick_texts(ticks: list[float]) -> list[str]:
    """Print tick positions with just the decimals their spacing needs.

    Parameters
    ----------
    ticks : list of float
        As `axis_ticks` gives them.

    Returns
    -------
    list of str
        Texts with a true minus sign; powers of ten ("2·10⁻⁷") for very large or very small numbers.
    """
    if not ticks:
        return []
    largest = max(abs(tick) for tick in ticks)
    spacing = min((b - a for a, b in itertools.pairwise(ticks)), default=largest)
    if largest and not 1e-4 <= largest < 1e5:
        return [_power(tick, spacing) for tick in ticks]
    if len(ticks) == 1:
        return [f"{ticks[0]:.12g}".replace("-", MINUS)]
    decimals = 0 if spacing == 0 else max(0, -math.floor(math.log10(spacing) + 1e-9))
    return [f"{tick:.{decimals}f}".replace("-", MINUS) for tick in ticks]


_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def _power(value: float, spacing: float) -> str:
    if value == 0:
        return "0"
    exponent = math.floor(math.log10(abs(value)) + 1e-12)
    decimals = max(0, exponent - math.floor(math.log10(spacing) + 1e-9)) if spacing else 0
    front = f"{value / 10.0**exponent:.{decimals}f}".replace("-", MINUS)
    return f"{front}·10{str(exponent).translate(_RAISED)}"
