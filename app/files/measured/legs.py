"""Where a sweep turns back."""

from __future__ import annotations

import numpy as np

from physics.units import Array

_LEAST_SHARE = 0.15  # of the whole range of voltages: less is noise in the voltage, not a leg of its own
_LEAST_POINTS = 3


def legs_of(voltage: Array) -> list[slice]:
    """Part a sweep where its voltage turns or jumps back.

    Parameters
    ----------
    voltage : ndarray, shape (n,)
        [V], finite.

    Returns
    -------
    list of slice
        The legs, in order, which together are the whole; the point of turning ends the leg that reaches it. A leg of
        fewer than three points, or of less than a seventh of all voltages, is none.
    """
    cuts = [0]
    for cut in _turns(voltage):
        if cut - cuts[-1] >= _LEAST_POINTS and len(voltage) - cut >= _LEAST_POINTS:
            cuts.append(cut)
    return [slice(start, end) for start, end in zip(cuts, [*cuts[1:], len(voltage)], strict=True)]


def _turns(voltage: Array) -> list[int]:
    """Places of the first points after turning: a zigzag that heeds only swings of some size."""
    least = _LEAST_SHARE * float(np.ptp(voltage))
    turns: list[int] = []
    heading = 0
    extreme = 0  # of the present leg
    for place in range(1, len(voltage)):
        swing = voltage[place] - voltage[extreme]
        if heading == 0:
            if abs(swing) >= least:
                heading, extreme = int(np.sign(swing)), place
        elif swing * heading > 0:
            extreme = place
        elif -swing * heading >= least:
            turns.append(extreme + 1)
            heading, extreme = -heading, place
    return _without_jumps(voltage, turns)


def _without_jumps(voltage: Array, turns: list[int]) -> list[int]:
    """Drop the turn behind a jump back: "0 to 1, again 0 to 1" is two legs, not three."""
    kept: list[int] = []
    for place, turn in enumerate(turns):
        if place and kept and kept[-1] == turns[place - 1] and turn - turns[place - 1] <= 1:
            continue
        kept.append(turn)
    return kept
