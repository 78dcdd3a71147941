"""A pinhole camera and pipes in front of it.

Points are in metres with the camera in the origin: x right, y down, z away from the camera.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["Hits", "PipeAxis", "View", "trace_pipe"]


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


@dataclass(frozen=True)
class Hits:
    """Where rays meet a pipe; arrays over the rays that do.

    Parameters
    ----------
    index : (n,) array of int
        Which ray.
    depth : (n,) array
        Distance from the camera. [m]
    station, angle : (n,) array
        Where on the pipe. [m], [rad]
    normal, ray : (n, 3) array
        Outward normal there, and direction of the ray.
    face : (n,) array of bool
        Whether it is a cut face of the lagging rather than the surface.
    """

    index: IntArray
    depth: FloatArray
    station: FloatArray
    angle: FloatArray
    normal: FloatArray
    ray: FloatArray
    face: BoolArray


def _cell(station: FloatArray, angle: FloatArray, radius: FloatArray, length: float) -> FloatArray:
    """Return the radius of the column at each point."""
    n_x, n_phi = radius.shape
    row = np.clip((station / length * n_x).astype(np.int64), 0, n_x - 1)
    column = np.floor(np.mod(angle, 2 * np.pi) / (2 * np.pi) * n_phi).astype(np.int64) % n_phi
    return radius[row, column]


def trace_pipe(rays: FloatArray, axis: PipeAxis, radius: FloatArray) -> Hits:
    """Return where rays from the origin meet a pipe whose radius may step.

    Parameters
    ----------
    rays : (n, 3) array
        Unit vectors.
    axis : PipeAxis
        The pipe.
    radius : (n_x, n_phi) array
        Radius of what faces the room, column by column along the whole axis; column j of phi
        spans the angles from j to j + 1 of ``2 pi / n_phi``. [m]

    Returns
    -------
    Hits
        The rays that meet the pipe.
    """
    n = rays.shape[0]
    depth = np.full(n, np.inf)
    station, angle = np.zeros(n), np.zeros(n)
    normal = np.zeros((n, 3))
    above = np.zeros(n, dtype=bool)
    inside_depth, inside_station = np.full(n, np.inf), np.zeros(n)
    inside_angle = np.zeros(n)
    for level in np.unique(radius)[::-1]:
        for leg in range(axis.steps.size):
            which, t, s, phi, out = _meet_leg(rays, axis, leg, float(level))
            here = _cell(s, phi, radius, axis.length)
            on = (np.abs(here - level) < 1e-9) & (t < depth[which])
            rows = which[on]
            depth[rows], station[rows], angle[rows] = t[on], s[on], phi[on]
            normal[rows] = out[on]
            above[which[here < level - 1e-9]] = True
            under = which[here > level + 1e-9]
            inside_depth[under] = t[here > level + 1e-9]
            inside_station[under] = s[here > level + 1e-9]
            inside_angle[under] = phi[here > level + 1e-9]
    # entered above a lower column and left below a higher one: the cut face between them
    face = above & np.isfinite(inside_depth) & (inside_depth < depth)
    depth[face] = inside_depth[face]
    station[face], angle[face] = inside_station[face], inside_angle[face]
    normal[face] = -rays[face]
    index = np.flatnonzero(np.isfinite(depth))
    return Hits(
        index, depth[index], station[index], angle[index], normal[index], rays[index], face[index]
    )


def _dot(vectors: FloatArray, vector: FloatArray) -> FloatArray:
    """Return the dot products of (n, 3) vectors with one, without a matrix library's threads."""
    product: FloatArray = (
        vectors[:, 0] * vector[0] + vectors[:, 1] * vector[1] + vectors[:, 2] * vector[2]
    )
    return product


def _meet_leg(
    rays: FloatArray, axis: PipeAxis, leg: int, radius: float
) -> tuple[IntArray, FloatArray, FloatArray, FloatArray, FloatArray]:
    """Return ray number, depth, station, angle and normal where rays meet one leg."""
    direction, start = axis.directions[leg], axis.vertices[leg]
    along_ray = _dot(rays, direction)
    offset = (start @ direction) * direction - start
    # |t s + offset| = radius, where s is the part of the ray square to the axis
    a = 1.0 - along_ray * along_ray
    b = _dot(rays, offset)
    root = b * b - a * (offset @ offset - radius**2)
    which = np.flatnonzero((root > 0) & (a > 1e-12))
    t = (-b[which] - np.sqrt(root[which])) / a[which]
    point = t[:, None] * rays[which]
    along = t * along_ray[which] - float(start @ direction)
    last = axis.steps.size - 1
    keep = t > 0
    if leg == 0:
        keep &= along >= 0
    else:
        bisector = axis.directions[leg - 1] + direction
        keep &= _dot(point - start, bisector) >= 0
    if leg == last:
        keep &= along <= axis.steps[leg]
    else:
        bisector = axis.directions[leg + 1] + direction
        keep &= _dot(point - axis.vertices[leg + 1], bisector) < 0
    which, t, point, along = which[keep], t[keep], point[keep], along[keep]
    out = (point - start - along[:, None] * direction) / radius
    zero = axis.zeros[leg]
    phi = np.arctan2(_dot(out, np.cross(direction, zero)), _dot(out, zero))
    return which, t, axis.starts[leg] + along, phi, out
