"""Curves on a sheet: cut at the frame, and asked where they leave room."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QRectF

Floats = NDArray[np.float64]


def clipped(x: Floats, y: Floats, frame: QRectF) -> tuple[Floats, Floats]:
    """Cut a curve at a frame, exactly on its edges (Liang and Barsky 1984, for all pieces at once).

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        Points [units]; NaN breaks the curve.
    frame : QRectF
        What may be drawn upon [units].

    Returns
    -------
    x, y : ndarray
        The visible points, NaN between pieces.
    """
    inside = (x >= frame.left()) & (x <= frame.right()) & (y >= frame.top()) & (y <= frame.bottom())
    if np.all(inside | ~(np.isfinite(x) & np.isfinite(y))):
        return x, y
    start, stop = np.zeros(len(x) - 1), np.ones(len(x) - 1)
    with np.errstate(invalid="ignore", divide="ignore"):
        dx, dy = np.diff(x), np.diff(y)
        keep = np.isfinite(dx) & np.isfinite(dy)
        for step, room in (
            (-dx, x[:-1] - frame.left()),
            (dx, frame.right() - x[:-1]),
            (-dy, y[:-1] - frame.top()),
            (dy, frame.bottom() - y[:-1]),
        ):
            share = room / step
            start = np.where(step < 0, np.maximum(start, share), start)
            stop = np.where(step > 0, np.minimum(stop, share), stop)
            keep &= (step != 0) | (room >= 0)
        keep &= start <= stop
    return _joined(x, y, dx, dy, start, stop, np.flatnonzero(keep))


def _joined(
    x: Floats, y: Floats, dx: Floats, dy: Floats, start: Floats, stop: Floats, kept: NDArray[np.intp]
) -> tuple[Floats, Floats]:
    xs: list[float] = []
    ys: list[float] = []
    before = -2
    for index in kept.tolist():
        if index != before + 1 or stop[before] < 1.0 or start[index] > 0.0:
            xs += [np.nan, x[index] + start[index] * dx[index]]
            ys += [np.nan, y[index] + start[index] * dy[index]]
        xs.append(x[index] + stop[index] * dx[index])
        ys.append(y[index] + stop[index] * dy[index])
        before = index
    return np.array(xs), np.array(ys)


def dense(x: Floats, y: Floats, step: float) -> Floats:
    """Points along a curve no further apart than `step`, for asking what an area would cover.

    Returns
    -------
    ndarray, shape (m, 2)
        Without the NaN breaks.
    """
    if len(x) < 2:
        return np.empty((0, 2))
    dx, dy = np.diff(x), np.diff(y)
    length = np.hypot(dx, dy)
    good = np.flatnonzero(np.isfinite(length))
    if not len(good):
        return np.empty((0, 2))
    counts = np.maximum(1, np.ceil(length[good] / step)).astype(int)
    which = np.repeat(good, counts)
    first = np.repeat(np.cumsum(counts) - counts, counts)
    share = (np.arange(len(which)) - first + 0.5) / np.repeat(counts, counts)
    ends = np.flatnonzero(np.isfinite(x) & np.isfinite(y))
    along = np.column_stack((x[which] + share * dx[which], y[which] + share * dy[which]))
    return np.vstack((along, np.column_stack((x[ends], y[ends]))))


def covered(points: Floats, area: QRectF, margin: float = 0.0) -> int:
    """How many points lie in an area widened by a margin."""
    if not len(points):
        return 0
    area = area.adjusted(-margin, -margin, margin, margin)
    x, y = points[:, 0], points[:, 1]
    hits = (x >= area.left()) & (x <= area.right()) & (y >= area.top()) & (y <= area.bottom())
    return int(np.count_nonzero(hits))


def freest(candidates: Sequence[QRectF], points: Floats, taken: Sequence[QRectF], margin: float) -> tuple[int, QRectF]:
    """Choose the area that covers least.

    Parameters
    ----------
    candidates : sequence of QRectF
        In order of preference; at least one.
    points : ndarray, shape (m, 2)
        Points of curves.
    taken : sequence of QRectF
        Areas that must not be covered.
    margin : float
        Distance to keep from both.

    Returns
    -------
    int, QRectF
        How much the chosen one covers (a taken area counts as a thousand points), and the area.
    """

    def cost(area: QRectF) -> int:
        wide = area.adjusted(-margin, -margin, margin, margin)
        return covered(points, area, margin) + 1000 * sum(1 for other in taken if wide.intersects(other))

    costs = [cost(area) for area in candidates]
    best = min(range(len(costs)), key=costs.__getitem__)
    return costs[best], candidates[best]
