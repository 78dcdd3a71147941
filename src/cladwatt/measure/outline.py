"""Outlines: the ring of a region, the pixels inside it, and the centreline of a straight one."""

import numpy as np

from cladwatt.errors import Fault, RegionError
from cladwatt.survey.region import Region
from cladwatt.types import BoolArray, FloatArray

__all__ = ["centreline_of_outline", "region_mask", "region_ring", "widened"]

LARGEST_RAGGEDNESS = 0.5
"""Largest departure of an outline's width from a straight taper, over its median width."""


def region_ring(region: Region) -> FloatArray:
    """Return the closed ring round a region, first point not repeated, (n, 2) in pixels.

    A centreline is widened by its widths; one without widths is a ring half a pixel wide.
    """
    if region.outline is not None:
        return np.asarray(region.outline, dtype=float)
    points = np.asarray(region.centreline, dtype=float)
    widths = np.asarray(region.widths if region.widths is not None else (1.0,), dtype=float)
    half = np.broadcast_to(widths, len(points))[:, None] / 2
    tangent = np.gradient(points, axis=0)
    tangent /= np.hypot(tangent[:, 0], tangent[:, 1])[:, None]
    normal = np.stack([-tangent[:, 1], tangent[:, 0]], axis=1)
    return np.concatenate([points + half * normal, (points - half * normal)[::-1]])


def region_mask(region: Region, shape: tuple[int, int]) -> BoolArray:
    """Return the pixels whose centre lies inside a region or on its edge, (rows, cols)."""
    import cv2

    mask = np.zeros(shape, dtype=np.uint8)
    fine = 4  # fractional bits of the coordinates below
    ring = np.rint(np.clip(region_ring(region), -1e4, 1e5) * 2**fine).astype(np.int32)
    cv2.fillPoly(mask, [ring], 1, shift=fine)
    for hole in region.holes:
        cv2.fillPoly(mask, [np.rint(np.asarray(hole) * 2**fine).astype(np.int32)], 0, shift=fine)
    return mask.astype(bool)


def widened(mask: BoolArray, margin: float) -> BoolArray:
    """Return a mask widened by `margin` pixels all round."""
    import cv2

    size = 2 * int(np.ceil(margin)) + 1
    kernel = cv2.getStructuringElement(cv2.MORPH_ELLIPSE, (size, size))
    return cv2.dilate(mask.astype(np.uint8), kernel).astype(bool)


def centreline_of_outline(region: Region) -> tuple[FloatArray, FloatArray]:
    """Return centreline and widths of an outline round a straight pipe.

    Parameters
    ----------
    region : Region
        With an outline longer than wide.

    Returns
    -------
    points : (n, 2) array
        [px]
    widths : (n,) array
        [px]

    Raises
    ------
    RegionError
        If a cut across the outline's long axis meets it more than twice, or its width jumps: it
        is not a straight pipe.

    Notes
    -----
    Cuts across the long axis of inertia give edge points; a straight line is fitted to the
    middles and to the widths, so that ragged outlines do not shake the strip.
    """
    ring = region_ring(region)
    centre, axis = _long_axis(ring)
    normal = np.array([-axis[1], axis[0]])
    along = (ring - centre) @ axis
    side = (ring - centre) @ normal
    inset = 0.06 * np.ptp(along)
    cuts = np.linspace(along.min() + inset, along.max() - inset, 40)
    middles, widths = np.empty(40), np.empty(40)
    for number, cut in enumerate(cuts):
        crossings = _crossings(along, side, cut)
        if len(crossings) != 2:
            raise _bends(region, f"a cut across the outline meets it {len(crossings)} times")
        middles[number] = (crossings[0] + crossings[1]) / 2
        widths[number] = abs(crossings[1] - crossings[0])
    middle_line = np.polyfit(cuts, middles, 1)
    width_line = np.polyfit(cuts, widths, 1)
    ragged = np.abs(widths - np.polyval(width_line, cuts)).max() / np.median(widths)
    if ragged > LARGEST_RAGGEDNESS:
        raise _bends(region, f"the outline's width jumps by {ragged:.0%}")
    ends = np.array([along.min(), along.max()])
    points = centre + ends[:, None] * axis + np.polyval(middle_line, ends)[:, None] * normal
    return points, np.maximum(np.polyval(width_line, ends), 1.0)


def _bends(region: Region, found: str) -> RegionError:
    return RegionError(
        Fault(
            f"regions/{region.frame_id}.geojson",
            f"feature {region.feature} (id '{region.id}')",
            found,
            "expected an outline round one straight pipe; draw a bent one as a LineString "
            "centreline with widths",
            frame_id=region.frame_id,
            region_id=region.id,
        )
    )


def _long_axis(ring: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return centroid and unit vector of the long axis of a polygon's area."""
    x, y = ring.T
    next_x, next_y = np.roll(x, -1), np.roll(y, -1)
    cross = x * next_y - next_x * y
    area = cross.sum() / 2
    centre = np.array(
        [((x + next_x) * cross).sum() / (6 * area), ((y + next_y) * cross).sum() / (6 * area)]
    )
    x, y = (ring - centre).T
    next_x, next_y = np.roll(x, -1), np.roll(y, -1)
    cross = (x * next_y - next_x * y) * np.sign(area)
    xx = ((x * x + x * next_x + next_x**2) * cross).sum() / 12
    yy = ((y * y + y * next_y + next_y**2) * cross).sum() / 12
    xy = ((x * next_y + 2 * x * y + 2 * next_x * next_y + next_x * y) * cross).sum() / 24
    axis = np.linalg.eigh(np.array([[xx, xy], [xy, yy]]))[1][:, 1]
    # left to right, or top to bottom: stations then grow the way a person reads
    return centre, axis * (np.sign(axis[0]) if abs(axis[0]) > 1e-6 else np.sign(axis[1]))


def _crossings(along: FloatArray, side: FloatArray, cut: float) -> list[float]:
    """Return where the ring crosses the line ``along == cut``, as positions across."""
    next_along, next_side = np.roll(along, -1), np.roll(side, -1)
    crossed = (along <= cut) != (next_along <= cut)
    share = (cut - along[crossed]) / (next_along[crossed] - along[crossed])
    return sorted(side[crossed] + share * (next_side[crossed] - side[crossed]))
