"""A pinhole camera and pipes in front of it.

Points are in metres with the camera in the origin: x right, y down, z away from the camera.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from cladwatt.types import FloatArray

__all__ = ["PipeAxis", "View"]


@dataclass(frozen=True)
class View:
    """A pinhole camera looking along z.

    Parameters
    ----------
    rows, cols : int
        Size of the frame. [px]
    field_of_view_deg : float
        Horizontal field of view.
    """

    rows: int
    cols: int
    field_of_view_deg: float

    @property
    def focal(self) -> float:
        """Focal length. [px]"""
        return float(self.cols / 2 / np.tan(np.radians(self.field_of_view_deg) / 2))

    @property
    def centre(self) -> tuple[float, float]:
        """Pixel the camera looks at (x, y)."""
        return (self.cols - 1) / 2, (self.rows - 1) / 2

    def rays(self, x: FloatArray, y: FloatArray) -> FloatArray:
        """Return unit vectors through pixels, (..., 3)."""
        cx, cy = self.centre
        ray = np.stack(
            [(x - cx) / self.focal, (y - cy) / self.focal, np.ones(np.shape(x))], axis=-1
        )
        unit: FloatArray = ray / np.linalg.norm(ray, axis=-1, keepdims=True)
        return unit

    def project(self, points: FloatArray) -> FloatArray:
        """Return the pixels (x, y) of points (..., 3), as (..., 2)."""
        cx, cy = self.centre
        return np.stack(
            [cx + self.focal * points[..., 0] / points[..., 2],
             cy + self.focal * points[..., 1] / points[..., 2]], axis=-1)  # fmt: skip

    def place(self, x: float, y: float, depth: float) -> FloatArray:
        """Return the point at `depth` that is seen at pixel (x, y)."""
        cx, cy = self.centre
        return np.array([(x - cx) / self.focal * depth, (y - cy) / self.focal * depth, depth])


@dataclass(frozen=True)
class PipeAxis:
    """Axis of a pipe: a polyline, mitred at its vertices.

    Parameters
    ----------
    vertices : (n, 3) array
        [m]
    zero : (3,) array
        Direction, made square to the first leg, in which the angle around the pipe is 0.
    """

    vertices: FloatArray
    zero: FloatArray

    @cached_property
    def steps(self) -> FloatArray:
        """Length of each leg, (n - 1,). [m]"""
        length: FloatArray = np.linalg.norm(np.diff(self.vertices, axis=0), axis=1)
        return length

    @cached_property
    def directions(self) -> FloatArray:
        """Unit vector of each leg, (n - 1, 3)."""
        direction: FloatArray = np.diff(self.vertices, axis=0) / self.steps[:, None]
        return direction

    @cached_property
    def starts(self) -> FloatArray:
        """Station where each leg begins, (n - 1,). [m]"""
        return np.concatenate([[0.0], np.cumsum(self.steps)[:-1]])

    @property
    def length(self) -> float:
        """Whole length. [m]"""
        return float(self.steps.sum())

    @cached_property
    def zeros(self) -> FloatArray:
        """Direction of angle 0 on each leg, carried along without twist, (n - 1, 3)."""
        result = []
        zero = self.zero
        for direction in self.directions:
            zero = zero - (zero @ direction) * direction
            zero = zero / np.linalg.norm(zero)
            result.append(zero)
        return np.array(result)

    def leg_of(self, station: float) -> int:
        """Return the leg a station lies on."""
        return int(np.clip(np.searchsorted(self.starts, station, side="right") - 1,
                           0, self.steps.size - 1))  # fmt: skip

    def point(self, station: float) -> FloatArray:
        """Return the point of the axis at a station, (3,)."""
        leg = self.leg_of(station)
        along = station - self.starts[leg]
        point: FloatArray = self.vertices[leg] + along * self.directions[leg]
        return point

    def seen_at(self, view: View, station: float, radius: float) -> float:
        """Return the station whose axis point is seen where the near surface at `station` is.

        The surface is nearer to the camera than the axis, so that both are seen apart.

        Parameters
        ----------
        view : View
            The camera.
        station : float
            Of the surface. [m]
        radius : float
            [m]

        Returns
        -------
        float
            Station of the axis. [m]
        """
        leg = self.leg_of(station)
        direction, point = self.directions[leg], self.point(station)
        away = point - (point @ direction) * direction
        surface = view.project(point - radius * away / np.linalg.norm(away))
        seen = station
        for _ in range(4):
            here = view.project(point + (seen - station) * direction)
            ahead = view.project(point + (seen - station + 1e-4) * direction) - here
            seen += 1e-4 * float((surface - here) @ ahead) / float(ahead @ ahead)
        return seen

    def surface_station(self, view: View, seen: float, radius: float) -> float:
        """Return the station of the near surface that is seen at an axis point; the inverse."""
        station = seen
        for _ in range(8):
            station += seen - self.seen_at(view, station, radius)
        return station

    def edges(self, view: View, station: float, radius: float) -> FloatArray:
        """Return where the two edges of the pipe are seen beside a station.

        The edges of a cylinder are seen as straight lines; the two points lie on the line across
        the pipe's picture through the picture of the axis point.

        Parameters
        ----------
        view : View
            The camera.
        station : float
            [m]
        radius : float
            Of what is seen. [m]

        Returns
        -------
        (2, 2) array
            Two points (x, y). [px]
        """
        leg = self.leg_of(station)
        direction, point = self.directions[leg], self.point(station)
        # square to the axis, from the camera to the axis
        away = point - (point @ direction) * direction
        distance = float(np.linalg.norm(away))
        away = away / distance
        side = np.cross(direction, away)
        lean = radius / distance
        centre = view.project(point)
        ahead = view.project(point + 1e-4 * direction) - centre
        across = np.array([-ahead[1], ahead[0]]) / np.linalg.norm(ahead)
        cx, cy = view.centre
        found = []
        for sign in (-1.0, 1.0):
            # plane through the camera touching the cylinder
            plane = lean * away + sign * np.sqrt(1 - lean**2) * side
            slope = plane[:2] / view.focal
            at_centre = slope @ (centre - np.array([cx, cy])) + plane[2]
            found.append(centre - at_centre / (slope @ across) * across)
        return np.array(found)
