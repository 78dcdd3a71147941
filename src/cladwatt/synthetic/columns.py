"""One pipe with its lagging in columns, and what conducts between them.

The lagging is cut into columns, ``(n_x, n_phi)`` of them, standing on the pipe; each column into
``n_r`` cells equal in ln r, with one node more for the cladding sheet on top. Heat passes between
cells in all three directions and along the sheet. A column may be exposed: nothing on the pipe
there, so that the pipe itself faces the room, and the cut faces of its neighbours with it.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import cast

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.linalg import splu

from cladwatt.types import BoolArray, FloatArray

__all__ = [
    "ColumnModel",
    "Conductances",
    "Solution",
    "Solver",
    "SurfaceFlux",
    "cell_volumes",
    "conductances",
    "diagonal_of",
    "factors_of",
    "product_with",
]

SurfaceFlux = Callable[[FloatArray], FloatArray]
"""Heat flux leaving the surface for a surface temperature, both (n_x, n_phi). [K] -> [W/m2]"""

Solver = Callable[[FloatArray], FloatArray]

_CUT_FACE_COEFFICIENT = 9.0
"""Convection and radiation at a cut face of lagging, order of still indoor air. [W/(m2 K)]"""


@dataclass(frozen=True)
class ColumnModel:
    """One pipe with its lagging, column by column.

    Parameters
    ----------
    inside_temperature : float or array that broadcasts to (n_x, n_phi)
        Of what flows in the pipe; higher beside a tracer, lower further down the line. [K]
    inside_coefficient : float
        From there to the outer face of the pipe wall, per area of that face. [W/(m2 K)]
    pipe_radius : float
        Outer radius of the pipe. [m]
    thickness : (n_x, n_phi) array
        Of the lagging. [m]
    cell_length : float
        Length of a column along the pipe. [m]
    conductivity_curve : callable
        Conductivity of the lagging, as installed and sound, against temperature.
    factor : (n_x, n_phi, n_r) array
        Multiplies the curve: wet, aged, void.
    sheet_conductance : float
        Conductivity times thickness of the cladding. [W/K]
    exposed : (n_x, n_phi) array of bool
        Where the pipe is bare.
    air_temperature : float
        At the cut faces beside exposed columns. [K]
    gap : float
        Width of the air gap under the cladding; 0 for none. [m]
    gap_coefficient : callable, optional
        Heat passed by that gap against its temperature. [K] -> [W/(m2 K)]
    area_factor : (n_x, n_phi) array or float
        Surface of a body on the pipe over that of the column. [-]
    heat_capacity : float
        Of the lagging, for warming up. [J/(m3 K)]
    """

    inside_temperature: float | FloatArray
    inside_coefficient: float
    pipe_radius: float
    thickness: FloatArray
    cell_length: float
    conductivity_curve: Callable[[FloatArray], FloatArray]
    factor: FloatArray
    sheet_conductance: float
    exposed: BoolArray
    air_temperature: float
    gap: float = 0.0
    gap_coefficient: Callable[[FloatArray], FloatArray] | None = None
    area_factor: FloatArray | float = 1.0
    heat_capacity: float = 0.0

    @property
    def inside(self) -> FloatArray:
        """Temperature inside each column, (n_x, n_phi). [K]"""
        return np.broadcast_to(np.asarray(self.inside_temperature), self.exposed.shape)

    @property
    def station(self) -> FloatArray:
        """Middle of each column along the pipe, (n_x,). [m]"""
        middle: FloatArray = np.arange(0.5, self.exposed.shape[0]) * float(self.cell_length)
        return middle

    @property
    def surface_radius(self) -> FloatArray:
        """Radius of what faces the room, (n_x, n_phi). [m]"""
        radius: FloatArray = np.where(
            self.exposed, self.pipe_radius, self.pipe_radius + self.thickness + self.gap
        )
        return radius

    @property
    def surface_area(self) -> FloatArray:
        """Area of what faces the room, (n_x, n_phi). [m2]"""
        width = 2 * np.pi / self.exposed.shape[1]
        area: FloatArray = self.area_factor * self.surface_radius * width * self.cell_length
        return area


@dataclass(frozen=True)
class Solution:
    """What the solver found.

    Parameters
    ----------
    surface_temperature : (n_x, n_phi) array
        Of the cladding, or of the bare pipe where exposed. [K]
    surface_heat : (n_x, n_phi) array
        Leaving through the surface. [W]
    cut_face_heat : (n_x, n_phi) array
        Leaving through cut faces of the column. [W]
    inside_heat : (n_x, n_phi) array
        Given by the fluid into the column. [W]
    cell_temperature : (n_x, n_phi, n_r) array
        [K]
    """

    surface_temperature: FloatArray
    surface_heat: FloatArray
    cut_face_heat: FloatArray
    inside_heat: FloatArray
    cell_temperature: FloatArray

    def heat_loss(self, cell_length: float) -> FloatArray:
        """Return the loss per metre, (n_x,). [W/m]"""
        loss: FloatArray = (self.surface_heat + self.cut_face_heat).sum(axis=1) / cell_length
        return loss


@dataclass(frozen=True)
class Conductances:
    """Conductances between nodes, all (n_x, n_phi, n_r + 1) or (n_x, n_phi). [W/K]"""

    radial: FloatArray
    """From node i to node i + 1; the last entry is unused."""
    around: FloatArray
    """To the next phi, periodic."""
    along: FloatArray
    """To the next x; the last entry is zero."""
    inside: FloatArray
    """From the fluid to the first cell, (n_x, n_phi)."""
    bare: FloatArray
    """From the fluid straight to the surface node, (n_x, n_phi)."""
    cut: FloatArray
    """From a cell to the air at a cut face."""


def _series(first: FloatArray, second: FloatArray) -> FloatArray:
    """Return two conductances in series; zero where either is zero."""
    total = first + second
    result: FloatArray = np.divide(first * second, total, out=np.zeros_like(total), where=total > 0)
    return result


def conductances(
    model: ColumnModel, conductivity: FloatArray, outermost: FloatArray
) -> Conductances:
    """Return what ties the nodes together.

    Parameters
    ----------
    model : ColumnModel
    conductivity : (n_x, n_phi, n_r) array
        [W/(m K)]
    outermost : (n_x, n_phi) array
        Temperature of the last cells, for an air gap over them. [K]
    """
    n_x, n_phi, n_r = conductivity.shape
    angle, length = 2 * np.pi / n_phi, model.cell_length
    covered = ~model.exposed
    log_step = np.log1p(model.thickness / model.pipe_radius) / n_r
    edges = model.pipe_radius * np.exp(log_step[..., None] * np.arange(n_r + 1))
    height = np.diff(edges, axis=-1)
    middle = np.sqrt(edges[..., 1:] * edges[..., :-1])
    k = np.where(covered[..., None], conductivity, 0.0)
    # from the middle of a cell to its face, in each direction
    half_radial = k * angle * length / (log_step / 2)[..., None]
    half_around = k * height * length / (middle * angle / 2)
    half_along = k * height * middle * angle / (length / 2)
    sheet = np.where(covered, model.sheet_conductance, 0.0)
    radius = model.pipe_radius + model.thickness + model.gap
    shape = (n_x, n_phi, n_r + 1)
    radial, around, along, cut = (np.zeros(shape) for _ in range(4))
    radial[..., : n_r - 1] = _series(half_radial[..., :-1], half_radial[..., 1:])
    radial[..., n_r - 1] = half_radial[..., -1]
    if model.gap_coefficient is not None:
        across = model.gap_coefficient(outermost) * (radius - model.gap / 2) * angle * length
        radial[..., n_r - 1] = _series(half_radial[..., -1], across)
    around[..., :n_r] = _series(half_around, np.roll(half_around, -1, axis=1))
    around_sheet = sheet * length / (radius * angle / 2)
    around[..., n_r] = _series(around_sheet, np.roll(around_sheet, -1, axis=1))
    along[:-1, :, :n_r] = _series(half_along[:-1], half_along[1:])
    along_sheet = sheet * radius * angle / (length / 2)
    along[:-1, :, n_r] = _series(along_sheet[:-1], along_sheet[1:])
    face_along, face_around = height * middle * angle, height * length
    for shift, axis, face in ((1, 0, face_along), (-1, 0, face_along),
                              (1, 1, face_around), (-1, 1, face_around)):  # fmt: skip
        beside = np.roll(model.exposed, shift, axis=axis)
        if axis == 0:
            beside[0 if shift == 1 else -1] = False
        open_face = _series(
            (half_along if axis == 0 else half_around), _CUT_FACE_COEFFICIENT * face
        )
        cut[..., :n_r] += np.where((beside & covered)[..., None], open_face, 0.0)
    film = np.full((n_x, n_phi), model.inside_coefficient * model.pipe_radius * angle * length)
    inside = _series(film, half_radial[..., 0])
    bare = np.where(model.exposed, film, 0.0)
    return Conductances(radial, around, along, inside, bare, cut)


def cell_volumes(model: ColumnModel) -> FloatArray:
    """Return the volume of each cell, (n_x, n_phi, n_r). [m3]"""
    n_phi, n_r = model.factor.shape[1:]
    edges = np.exp(
        (np.log1p(model.thickness / model.pipe_radius) / n_r)[..., None] * np.arange(n_r + 1)
    )
    volume: FloatArray = np.diff((model.pipe_radius * edges) ** 2, axis=-1) * (
        np.pi / n_phi * model.cell_length
    )
    return volume


def diagonal_of(parts: Conductances, surface_slope: FloatArray) -> FloatArray:
    """Return what ties each node to all others and to fluid and air, (n_x, n_phi, n_r + 1)."""
    diagonal = parts.cut + parts.around + np.roll(parts.around, 1, axis=1) + parts.along
    diagonal[..., 0] += parts.inside
    diagonal[..., -1] += parts.bare + surface_slope
    diagonal[..., :-1] += parts.radial[..., :-1]
    diagonal[..., 1:] += parts.radial[..., :-1]
    diagonal[1:] += parts.along[:-1]
    # a column without lagging has cells without neighbours: hold them
    diagonal[diagonal <= 0] = 1.0
    return diagonal


def product_with(parts: Conductances, diagonal: FloatArray, field: FloatArray) -> FloatArray:
    """Return the matrix of the heat balance times a field."""
    radial = parts.radial[..., :-1]
    result = diagonal * field
    result[..., :-1] -= radial * field[..., 1:]
    result[..., 1:] -= radial * field[..., :-1]
    result[:-1] -= parts.along[:-1] * field[1:]
    result[1:] -= parts.along[:-1] * field[:-1]
    result -= parts.around * np.roll(field, -1, axis=1)
    result -= np.roll(parts.around * field, 1, axis=1)
    return result


def factors_of(parts: Conductances, diagonal: FloatArray) -> Solver:
    """Return a solver with the factors of that matrix."""
    node = np.arange(diagonal.size).reshape(diagonal.shape)
    ties = (
        (node[..., :-1], node[..., 1:], parts.radial[..., :-1]),
        (node, np.roll(node, -1, axis=1), parts.around),
        (node[:-1], node[1:], parts.along[:-1]),
    )
    first = np.concatenate([tie[0].ravel() for tie in ties])
    second = np.concatenate([tie[1].ravel() for tie in ties])
    value = -np.concatenate([tie[2].ravel() for tie in ties])
    rows = np.concatenate([first, second, node.ravel()])
    cols = np.concatenate([second, first, node.ravel()])
    matrix = coo_matrix((np.concatenate([value, value, diagonal.ravel()]), (rows, cols)))
    factors = splu(
        matrix.tocsc(), permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0,
        options={"SymmetricMode": True},
    )  # fmt: skip
    return cast(Solver, factors.solve)
