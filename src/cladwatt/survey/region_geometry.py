"""Whether drawn points make a usable line or ring; plain tests on pixel coordinates."""

import math
from collections.abc import Sequence
from itertools import pairwise
from typing import TypeAlias

import numpy as np

from cladwatt.types import FloatArray

__all__ = ["MAXIMUM_VERTICES", "Point", "first_crossing", "ring_area", "zero_step"]

Point: TypeAlias = tuple[float, float]

MAXIMUM_VERTICES = 2000
"""Above this a drawing is no hand's; the crossing test grows with its square."""


def ring_area(ring: Sequence[Point]) -> float:
    """Return the area a closed ring encloses, first point not repeated. [px2]"""
    x, y = np.asarray(ring, dtype=float).T
    return abs(float(np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1)))) / 2


def zero_step(points: Sequence[Point]) -> int | None:
    """Return the number (from 1) of the first point that repeats the one before, or None."""
    for number, (before, here) in enumerate(pairwise(points), start=2):
        if math.dist(before, here) < 1e-6:
            return number
    return None


def first_crossing(points: Sequence[Point], *, closed: bool) -> tuple[int, int] | None:
    """Return the first two segments (from 1) that cross or touch, neighbours aside.

    Parameters
    ----------
    points : sequence of (x, y)
        [px]
    closed : bool
        Whether the last point is joined to the first.

    Returns
    -------
    (int, int) or None
        Segment n runs from point n to the next.
    """
    start = np.asarray(points, dtype=float)
    end = np.roll(start, -1, axis=0)
    if not closed:
        start, end = start[:-1], end[:-1]
    count = len(start)
    for first in range(count - 2):
        last = count - 1 if closed and first == 0 else count
        others = np.arange(first + 2, last)
        hit = _meets(start[first], end[first], start[others], end[others])
        if hit.any():
            return first + 1, int(others[int(np.argmax(hit))]) + 1
    return None


def _side(origin: FloatArray, towards: FloatArray, points: FloatArray) -> FloatArray:
    """Return on which side of a directed line points lie; 0 on it."""
    along, to_point = towards - origin, points - origin
    turn = along[..., 0] * to_point[..., 1] - along[..., 1] * to_point[..., 0]
    length = np.hypot(along[..., 0], along[..., 1])
    return np.asarray(np.where(np.abs(turn) <= 1e-9 * length, 0.0, np.sign(turn)))


def _meets(start: FloatArray, end: FloatArray, starts: FloatArray, ends: FloatArray) -> FloatArray:
    """Return which of several segments meet one segment."""
    a, b = _side(start, end, starts), _side(start, end, ends)
    c, d = _side(starts, ends, start[None, :]), _side(starts, ends, end[None, :])
    crossing = (a * b <= 0) & (c * d <= 0)
    overlap = np.all(
        (np.maximum(starts, ends) >= np.minimum(start, end) - 1e-9)
        & (np.minimum(starts, ends) <= np.maximum(start, end) + 1e-9),
        axis=1,
    )
    return np.asarray(crossing & overlap)
