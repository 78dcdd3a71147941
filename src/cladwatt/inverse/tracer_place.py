"""Where a tracer lies as the camera sees it: clock position against the bands of angle."""

import math
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.seen import Seen
from cladwatt.measure.strip import UNKNOWN_VIEW_DEG
from cladwatt.types import FloatArray

__all__ = ["Place", "band_clock_angles", "place_of"]

CLOCK_U = math.radians(10.0)
"""How far a tracer lies from its declared hour; assumption. [rad]"""
TILT_U = math.radians(15.0)
"""How far the camera's axis is from level; assumption. [rad]"""
LEAST_LEVEL = 0.5
"""Sine of the angle between pipe and plumb line in the frame, below which no side is up."""
STEEPEST_DEG = 60.0
"""Inclination above which twelve o'clock means nothing."""


class Place(NamedTuple):
    """What is known of where a tracer lies.

    Parameters
    ----------
    angle : float or None
        Clock position, 0 up; None where it is not declared or up means nothing on the pipe. [rad]
    sides : tuple of int
        Ways in which stations may grow, 1 from the first drawn vertex to the last; both where
        that was not declared.
    upwards : int
        Whether the strip's samples across go up (1) or down (-1).
    elevation : float
        Of the camera above the pipe, with its axis level. [rad]
    """

    angle: float | None
    sides: tuple[int, ...]
    upwards: int
    elevation: float

    @property
    def both_sides(self) -> bool:
        """Whether left and right cannot be told apart, and matter."""
        return self.angle is not None and len(self.sides) == 2 and abs(math.sin(self.angle)) > 0.1


def place_of(seen: Seen) -> Place:
    """Return where a line's tracer lies on this region."""
    region, strip = seen.region, seen.strip
    roll = math.radians(seen.conditions.roll_deg)
    gravity = np.array([-math.sin(roll), math.cos(roll)])
    along = np.stack([np.gradient(strip.x), np.gradient(strip.y)])
    along = along / np.hypot(*along)
    # the strip's across points to the right-hand side of the way along, clockwise on the screen
    upwards = -(gravity @ np.stack([-along[1], along[0]]))
    is_level = float(np.min(np.abs(upwards))) > LEAST_LEVEL and np.ptp(np.sign(upwards)) == 0
    clock = seen.line.tracing.clock_position
    if clock is None or not is_level or seen.line_draws.inclination_deg > STEEPEST_DEG:
        angle = None
    else:
        angle = clock / 6 * math.pi
    return Place(
        angle=angle,
        sides=(region.direction,) if region.is_directed else (1, -1),
        upwards=1 if float(np.median(upwards)) > 0 else -1,
        elevation=_elevation(seen, gravity),
    )


def _elevation(seen: Seen, gravity: FloatArray) -> float:
    """Return by how much the camera, its axis level, looks down on the pipe. [rad]"""
    rows, columns = seen.image.lens_temperature.shape
    view = seen.camera.field_of_view_deg or UNKNOWN_VIEW_DEG
    focal = columns / 2 / math.tan(math.radians(view) / 2)
    away = np.array([
        float(np.median(seen.strip.x)) - (columns - 1) / 2,
        float(np.median(seen.strip.y)) - (rows - 1) / 2,
    ])  # fmt: skip
    return math.atan2(float(away @ gravity), focal)


def band_clock_angles(
    seen: Seen, place: Place, random: np.random.Generator, count: int
) -> FloatArray:
    """Return how far each band of angle is from each of many possible tracers.

    Parameters
    ----------
    seen : Seen
    place : Place
    random : numpy.random.Generator
    count : int
        Number of tracers.

    Returns
    -------
    (count, n_bands) array
        [rad]

    Notes
    -----
    Looking along growing stations three o'clock is on the right: on a pipe whose stations grow
    to the right of the frame it faces the camera.
    """
    way = np.asarray(place.sides)[np.arange(count) % len(place.sides)][:, None]
    tilt = place.elevation + TILT_U * random.standard_normal((count, 1))
    up = place.upwards * seen.face.view_angle + tilt
    clock = np.arctan2(-way * place.upwards * np.cos(up), np.sin(up))
    if place.angle is None:
        tracer = random.uniform(-math.pi, math.pi, (count, 1))
    else:
        tracer = place.angle + CLOCK_U * random.standard_normal((count, 1))
    return np.asarray(clock - tracer)
