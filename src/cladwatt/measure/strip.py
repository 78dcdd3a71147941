"""The strip: a drawn pipe straightened into metres along and angle around.

A station is one pixel step along the centreline. Across, samples sit at fixed fractions of the
half width, so that every sample row keeps its angle around the pipe whatever the slant.
"""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.errors import Fault, RegionError
from cladwatt.measure.outline import centreline_of_outline
from cladwatt.survey.region import Region
from cladwatt.types import FloatArray

__all__ = ["Strip", "known_length_factor", "sample_strip", "straighten"]

WIDEST_FRACTION = math.sin(math.radians(50.0))
"""Used part of the half width: view within 50 degrees, where emissivity still holds."""
EDGE_MARGIN_PX = 1.5
"""Kept clear of the drawn edge on either side: optical blur and an outline error of a pixel."""
OUTLINE_ERROR_PX = 0.7
"""Standard uncertainty of a drawn edge; common practice, no source. [px]"""
LARGEST_FACTOR = 3.0
"""A known length further off than this is not believed."""
UNKNOWN_VIEW_DEG = 35.0
"""Horizontal field of view where none is declared; assumption."""


@dataclass(frozen=True)
class Strip:
    """A straightened region.

    Attributes
    ----------
    station, length : (n_stations,) array
        Position along the line and metres of pipe per station, NaN where no scale is known. [m]
    x, y, width : (n_stations,) array
        Centre and full width in the frame. [px]
    across : (n_across,) array
        Fractions of the half width, -1..1; increasing to the right-hand side of the direction
        of the centreline (clockwise on the screen).
    sample_x, sample_y : (n_across, n_stations) array
        Where the frame is sampled. [px]
    scale_uncertainty : float
        Relative standard uncertainty of every length, common to all stations.
    nearer : float
        Factor by which lengths shrink since the near surface is what is drawn.
    scaled_by_diameter : bool
        Whether lengths hang on the pipe's diameter rather than on a marked length.
    receding_angle : float
        Angle between the axis and the image plane as the growth of the width shows it. [rad]
    """

    station: FloatArray
    length: FloatArray
    x: FloatArray
    y: FloatArray
    width: FloatArray
    across: FloatArray
    sample_x: FloatArray
    sample_y: FloatArray
    scale_uncertainty: float
    nearer: float
    scaled_by_diameter: bool
    receding_angle: float

    @property
    def view_angle(self) -> FloatArray:
        """Angle between the surface normal and the view, per sample row. [rad]"""
        return np.arcsin(self.across)

    @property
    def used_width(self) -> float:
        """Median width of the used window. [px]"""
        return float(np.median(self.width) * (self.across[-1] - self.across[0]) / 2)


def straighten(
    region: Region,
    *,
    lagged_diameter: float | None,
    columns: int,
    field_of_view_deg: float | None = None,
    known_length: float | None = None,
) -> Strip:
    """Straighten a pipe region.

    Parameters
    ----------
    region : Region
        Centreline with widths, or an outline round a straight pipe.
    lagged_diameter : float or None
        Outside diameter over the lagging; gives the scale station by station. [m]
    columns : int
        Width of the frame. [px]
    field_of_view_deg : float, optional
        Horizontal field of view; with it the foreshortening follows from the growth of the width.
    known_length : float, optional
        Factor on all lengths by width alone, see `known_length_factor`.

    Returns
    -------
    Strip

    Raises
    ------
    RegionError
        If the region is too small to hold a strip or its outline bends.

    Notes
    -----
    A pinhole camera of focal length f (in pixels) sees a pipe of diameter D at distance Z with
    the width w = f D / Z. One pixel along the axis then is ``sqrt((D / w)^2 + (f D d(1/w)/ds)^2)``
    metres. What is drawn along the middle is the near surface, closer by D / 2: every length
    shrinks by ``1 - w / (2 f)``. Without a field of view the growth of the width is not used,
    and f is taken as that of 35 degrees with half of the shrinkage as uncertainty (assumption).
    """
    if region.outline is not None:
        points, vertex_widths = centreline_of_outline(region)
    else:
        points = np.asarray(region.centreline, dtype=float)
        vertex_widths = np.broadcast_to(np.asarray(region.widths, dtype=float), len(points)).copy()
    steps = np.hypot(*np.diff(points, axis=0).T)
    distance = np.concatenate([[0.0], np.cumsum(steps)])
    count = int(distance[-1])
    if count < 3:
        raise RegionError(
            Fault(
                f"regions/{region.frame_id}.geojson",
                f"feature {region.feature} (id '{region.id}')",
                f"the centreline is {distance[-1]:.1f} px long",
                "expected at least 3 px",
                frame_id=region.frame_id,
                region_id=region.id,
            )
        )
    along = (np.arange(count) + 0.5) * distance[-1] / count
    x = np.interp(along, distance, points[:, 0])
    y = np.interp(along, distance, points[:, 1])
    width = np.interp(along, distance, vertex_widths)
    normal_x, normal_y = _normals(points, distance, along, float(np.median(width)))
    across = _across(float(np.median(width)))
    half = width / 2
    view = UNKNOWN_VIEW_DEG if field_of_view_deg is None else field_of_view_deg
    focal = columns / 2 / math.tan(math.radians(view) / 2)
    nearer = float(np.median(width)) / (2 * focal)
    scale_u = _scale_uncertainty(width, len(points), known_length)
    if field_of_view_deg is None and known_length is None:
        scale_u = math.hypot(scale_u, nearer / 2)
    growing = focal if field_of_view_deg is not None else 0.0
    return Strip(
        *_stations(region, along, width, lagged_diameter, growing, 1 - nearer, known_length),
        x=x,
        y=y,
        width=width,
        across=across,
        sample_x=x + across[:, None] * half * normal_x,
        sample_y=y + across[:, None] * half * normal_y,
        scale_uncertainty=scale_u,
        nearer=1 - nearer,
        scaled_by_diameter=known_length is None,
        receding_angle=math.atan(focal * _width_growth(along, width)),
    )


def _across(width: float) -> FloatArray:
    """Return the sample rows for a pipe of this width."""
    fraction = float(np.clip(1 - 2 * EDGE_MARGIN_PX / width, 0.3, WIDEST_FRACTION))
    count = int(np.clip(round(width * fraction), 3, 41)) | 1
    return np.asarray(np.linspace(-fraction, fraction, count))


def _normals(
    points: FloatArray, distance: FloatArray, along: FloatArray, width: float
) -> tuple[FloatArray, FloatArray]:
    """Return unit normals, turned smoothly within half a width of each vertex."""
    reach = max(width / 2, 1.0)
    before = np.clip(along - reach / 2, 0, distance[-1])
    after = np.clip(along + reach / 2, 0, distance[-1])
    tangent_x = np.interp(after, distance, points[:, 0]) - np.interp(before, distance, points[:, 0])
    tangent_y = np.interp(after, distance, points[:, 1]) - np.interp(before, distance, points[:, 1])
    size = np.hypot(tangent_x, tangent_y)
    return -tangent_y / size, tangent_x / size


def _width_growth(along: FloatArray, width: FloatArray) -> float:
    """Return |d(1/w)/ds| times the median width: relative growth of the width per pixel."""
    if along.size < 8:
        return 0.0
    slope = np.polyfit(along, 1 / width, 1)[0]
    return float(abs(slope) * np.median(width))


def _stations(
    region: Region,
    along: FloatArray,
    width: FloatArray,
    diameter: float | None,
    focal: float,
    nearer: float,
    known_length: float | None,
) -> tuple[FloatArray, FloatArray]:
    """Return station and length per station. [m]"""
    if diameter is None:
        nothing = np.full(along.size, np.nan)
        return nothing, nothing
    step = along[1] - along[0]
    length = diameter / width * step
    if along.size >= 8:
        receding = focal * diameter * np.polyfit(along, 1 / width, 1)[0] * step
        length = np.hypot(length, receding)
    length = length * (nearer if known_length is None else known_length)
    position = np.cumsum(length) - length / 2
    return region.origin + region.direction * position, length


def _scale_uncertainty(width: FloatArray, vertices: int, known_length: float | None) -> float:
    """Return the relative standard uncertainty of lengths.

    Both edges are drawn with `OUTLINE_ERROR_PX`; a straight pipe drawn with one width leaves 2 %
    for a foreshortening nobody has seen (common practice, no source).
    """
    if known_length is not None:
        return 0.01
    drawn = math.sqrt(2) * OUTLINE_ERROR_PX / float(np.median(width))
    unseen = 0.02 if vertices <= 2 and np.ptp(width) == 0 else 0.01
    return math.hypot(drawn, unseen)


def known_length_factor(strip: Strip, marked: Region) -> float | None:
    """Return the factor on a strip's lengths that a known length along it asks for.

    Parameters
    ----------
    strip : Strip
        With metres from the diameter.
    marked : Region
        Role ``known_length``, its `value` in metres.

    Returns
    -------
    float or None
        None where the strip has no scale, the marked ends do not lie beside it, or the length is
        off by more than a factor of three from what the diameter gives.
    """
    if marked.value is None or marked.centreline is None or not np.isfinite(strip.station).all():
        return None
    ends = []
    for end_x, end_y in (marked.centreline[0], marked.centreline[-1]):
        away = np.hypot(strip.x - end_x, strip.y - end_y)
        nearest = int(np.argmin(away))
        if away[nearest] > strip.width[nearest] + 5:
            return None
        ends.append(nearest)
    first, last = sorted(ends)
    by_width = strip.length[first:last] / strip.nearer
    measured = float(np.sum(by_width))
    if not measured > 0:
        return None
    factor = marked.value.value / measured
    return factor if 1 / LARGEST_FACTOR < factor < LARGEST_FACTOR else None


def sample_strip(image: FloatArray, strip: Strip) -> FloatArray:
    """Sample an image along a strip, bilinear; NaN wherever one of the four pixels is NaN.

    Parameters
    ----------
    image : (rows, cols) array
        Any quantity, NaN where masked.
    strip : Strip

    Returns
    -------
    (n_across, n_stations) array
        NaN outside the image too: masked pixels are never interpolated over.
    """
    rows, columns = image.shape
    inside = (
        (strip.sample_x >= 0)
        & (strip.sample_x <= columns - 1)
        & (strip.sample_y >= 0)
        & (strip.sample_y <= rows - 1)
    )
    left = np.clip(strip.sample_x.astype(int), 0, columns - 2)
    top = np.clip(strip.sample_y.astype(int), 0, rows - 2)
    right_share = strip.sample_x - left
    lower_share = strip.sample_y - top
    upper = image[top, left] * (1 - right_share) + image[top, left + 1] * right_share
    lower = image[top + 1, left] * (1 - right_share) + image[top + 1, left + 1] * right_share
    return np.where(inside, upper * (1 - lower_share) + lower * lower_share, np.nan)
