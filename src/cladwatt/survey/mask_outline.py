"""Outlines of a mask's connected pieces, by following the edges between pixels."""

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from cladwatt.types import BoolArray

__all__ = ["Ring", "mask_outlines"]

Ring: TypeAlias = tuple[tuple[float, float], ...]
_Corner: TypeAlias = tuple[int, int]


def mask_outlines(mask: BoolArray) -> list[tuple[Ring, tuple[Ring, ...], int]]:
    """Return the outlines of the connected pieces of a mask, the largest first.

    Parameters
    ----------
    mask : (rows, cols) array of bool
        Pixels that touch only at a corner are not connected.

    Returns
    -------
    list of (outline, holes, pixels)
        Rings of (x, y) through the middle of the pixels' outer edges, so that a rectangle of
        w x h pixels has the area w h - 1/2 and runs half a pixel outside the outermost centres.
    """
    rings = _edge_rings(mask)
    outer = [ring for ring in rings if _signed_area(ring) > 0]
    inner = [ring for ring in rings if _signed_area(ring) < 0]
    outer.sort(key=_signed_area)
    holes: dict[int, list[NDArray[np.float64]]] = {i: [] for i in range(len(outer))}
    lower = np.array([ring.min(axis=0) for ring in outer])
    upper = np.array([ring.max(axis=0) for ring in outer])
    for hole in inner:
        point = _point_in_hole(hole)
        near = np.flatnonzero(np.all((lower < point) & (upper > point), axis=1))
        # The smallest ring around a hole is the one it was cut from.
        holes[next(int(i) for i in near if _contains(outer[i], point))].append(hole)
    pieces = []
    for i, ring in enumerate(outer):
        area = _signed_area(ring) + sum(_signed_area(hole) for hole in holes[i])
        pieces.append((_midpoints(ring), tuple(map(_midpoints, holes[i])), round(area)))
    return sorted(pieces, key=lambda piece: -piece[2])


def _edge_rings(mask: BoolArray) -> list[NDArray[np.float64]]:
    """Follow the edges between pixels inside and outside; inside lies to the right of the way.

    Corners are numbered so that corner (c, r) is the upper left one of pixel [r, c].
    """
    padded = np.pad(mask, 1)
    edges: dict[_Corner, list[_Corner]] = {}
    # Step along x or y, where the pixel inside lies from the edge's start, the one outside.
    for dx, dy, inside, outside in (
        (1, 0, (0, 0), (-1, 0)), (0, 1, (0, -1), (0, 0)),
        (-1, 0, (-1, -1), (0, -1)), (0, -1, (-1, 0), (-1, -1)),
    ):  # fmt: skip
        there = np.roll(padded, (-inside[0], -inside[1]), (0, 1))
        away = np.roll(padded, (-outside[0], -outside[1]), (0, 1))
        for row, column in np.argwhere(there & ~away):
            edges.setdefault((int(column) - 1, int(row) - 1), []).append((dx, dy))
    rings = []
    while edges:
        start = next(iter(edges))
        rings.append(np.asarray(_follow(edges, start), dtype=np.float64) - 0.5)
    return rings


def _follow(edges: dict[_Corner, list[_Corner]], start: _Corner) -> list[_Corner]:
    """Take the edges of one ring out of `edges`; return its corners in order."""
    first = step = edges[start][0]
    place, ring = start, []
    while True:
        edges[place].remove(step)
        if not edges[place]:
            del edges[place]
        ring.append(place)
        place = (place[0] + step[0], place[1] + step[1])
        onward = edges.get(place, [])
        # Where two pixels touch at a corner, turn right: keep to the same pixel.
        right = (-step[1], step[0])
        if not onward or (place == start and right == first):
            return ring
        step = right if right in onward else onward[0]


def _signed_area(ring: NDArray[np.float64]) -> float:
    x, y = ring[:, 0], ring[:, 1]
    return 0.5 * float(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y))


def _contains(ring: NDArray[np.float64], point: tuple[float, float]) -> bool:
    """Whether a point off the grid of corners lies inside the ring."""
    x, y = point
    following = np.roll(ring[:, 1], -1)
    crossed = ((ring[:, 1] > y) != (following > y)) & (ring[:, 0] > x)
    return bool(np.count_nonzero(crossed) % 2)


def _point_in_hole(hole: NDArray[np.float64]) -> tuple[float, float]:
    """Return a point to the left of the hole's first edge, inside a pixel of the hole."""
    dx, dy = hole[1] - hole[0]
    return float(hole[0, 0] + 0.5 * dx + 0.25 * dy), float(hole[0, 1] + 0.5 * dy - 0.25 * dx)


def _midpoints(ring: NDArray[np.float64]) -> Ring:
    """Return the middles of the ring's unit edges without those inside straight runs."""
    points = 0.5 * (ring + np.roll(ring, -1, axis=0))
    before = points - np.roll(points, 1, axis=0)
    after = np.roll(before, -1, axis=0)
    bend = before[:, 0] * after[:, 1] - before[:, 1] * after[:, 0] != 0
    return tuple((float(x), float(y)) for x, y in points[bend])
