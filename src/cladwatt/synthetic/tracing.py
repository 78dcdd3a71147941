"""Where rays from the camera meet a pipe whose radius may step."""

from dataclasses import dataclass

import numpy as np

from cladwatt.synthetic.geometry import PipeAxis
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["Hits", "trace_pipe"]


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
    found: FloatArray = radius[row, column]
    return found


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
