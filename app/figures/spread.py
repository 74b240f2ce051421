"""Placing labels along a line so that none overlaps another."""

from __future__ import annotations

from collections.abc import Sequence


def spread(widths: Sequence[float], targets: Sequence[float], low: float, high: float, gap: float) -> list[float]:
    """Place items along a line in their given order, each as near its target as its neighbours let it.

    Minimises the sum of squared shifts under the order (pool adjacent violators), then keeps within the ends.

    Parameters
    ----------
    widths : sequence of float
        Widths of the items.
    targets : sequence of float
        Wanted centres, ascending.
    low, high : float
        Ends of the line.
    gap : float
        Least distance between neighbours.

    Returns
    -------
    list of float
        Left edges. Where the items together are longer than the line, they run past its high end.
    """
    # With every item's left edge reduced by the room of the items before it, "no overlap" becomes "not descending".
    taken = 0.0
    pools: list[list[float]] = []  # [sum of wanted reduced positions, how many]
    for width, target in zip(widths, targets, strict=True):
        pools.append([target - width / 2 - taken, 1.0])
        taken += width + gap
        while len(pools) > 1 and pools[-2][0] / pools[-2][1] >= pools[-1][0] / pools[-1][1]:
            total, count = pools.pop()
            pools[-1][0] += total
            pools[-1][1] += count
    top = high - (taken - gap)
    reduced = [max(low, min(total / count, top)) for total, count in pools for _ in range(int(count))]
    lefts, taken = [], 0.0
    for position, width in zip(reduced, widths, strict=True):
        lefts.append(position + taken)
        taken += width + gap
    return lefts


def needed(widths: Sequence[float], gap: float) -> float:
    """Length that items take side by side."""
    return sum(widths) + gap * max(0, len(widths) - 1)
