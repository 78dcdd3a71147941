"""Steady conduction in the lagging of one pipe in three dimensions, by finite volumes.

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

from cladwatt.errors import FitError
from cladwatt.types import BoolArray, FloatArray

__all__ = ["ColumnModel", "Solution", "SurfaceFlux", "solve_columns"]

SurfaceFlux = Callable[[FloatArray], FloatArray]
"""Heat flux leaving the surface for a surface temperature, both (n_x, n_phi). [K] -> [W/m2]"""

_Solver = Callable[[FloatArray], FloatArray]

_CUT_FACE_COEFFICIENT = 9.0
"""Convection and radiation at a cut face of lagging, order of still indoor air. [W/(m2 K)]"""
_MOST_GRADIENT_STEPS = 15
_GRADIENT_TOLERANCE = 1e-7
"""Largest residual of the heat balance, over what ties the node. [K]"""
_STEP = 0.05
"""Step of the numerical derivative of the surface flux. [K]"""


@dataclass(frozen=True)
class ColumnModel:
    """One pipe with its lagging, column by column.

    Parameters
    ----------
    inside_temperature : float
        Temperature of what flows in the pipe. [K]
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
    """

    inside_temperature: float
    inside_coefficient: float
    pipe_radius: float
    thickness: FloatArray
    cell_length: float
    conductivity_curve: Callable[[FloatArray], FloatArray]
    factor: FloatArray
    sheet_conductance: float
    exposed: BoolArray
    air_temperature: float

    @property
    def station(self) -> FloatArray:
        """Middle of each column along the pipe, (n_x,). [m]"""
        middle: FloatArray = np.arange(0.5, self.exposed.shape[0]) * float(self.cell_length)
        return middle

    @property
    def surface_radius(self) -> FloatArray:
        """Radius of what faces the room, (n_x, n_phi). [m]"""
        radius: FloatArray = np.where(
            self.exposed, self.pipe_radius, self.pipe_radius + self.thickness
        )
        return radius

    @property
    def surface_area(self) -> FloatArray:
        """Area of what faces the room, (n_x, n_phi). [m2]"""
        width = 2 * np.pi / self.exposed.shape[1]
        area: FloatArray = self.surface_radius * width * self.cell_length
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
class _Conductances:
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


def _conductances(model: ColumnModel, conductivity: FloatArray) -> _Conductances:
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
    radius = model.pipe_radius + model.thickness
    shape = (n_x, n_phi, n_r + 1)
    radial, around, along, cut = (np.zeros(shape) for _ in range(4))
    radial[..., : n_r - 1] = _series(half_radial[..., :-1], half_radial[..., 1:])
    radial[..., n_r - 1] = half_radial[..., -1]
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
    return _Conductances(radial, around, along, inside, bare, cut)


def _diagonal(parts: _Conductances, surface_slope: FloatArray) -> FloatArray:
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


def _product(parts: _Conductances, diagonal: FloatArray, field: FloatArray) -> FloatArray:
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


def _factor(parts: _Conductances, diagonal: FloatArray) -> _Solver:
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
    return cast(_Solver, factors.solve)


def _solve_near(
    parts: _Conductances, diagonal: FloatArray, source: FloatArray, start: FloatArray,
    solver: _Solver,
) -> FloatArray | None:  # fmt: skip
    """Solve by conjugate gradients with the factors of a nearby matrix; None if it is too far."""
    found = start.copy()
    residual = source - _product(parts, diagonal, found)
    direction, old = np.zeros_like(found), 0.0
    for step in range(_MOST_GRADIENT_STEPS):
        if float(np.max(np.abs(residual / diagonal))) < _GRADIENT_TOLERANCE:
            return found
        near = solver(residual.ravel()).reshape(found.shape)
        new = float(np.sum(residual * near))
        direction = near + (new / old) * direction if step else near
        image = _product(parts, diagonal, direction)
        length = new / float(np.sum(direction * image))
        found += length * direction
        residual -= length * image
        old = new
    return None


def solve_columns(
    model: ColumnModel, surface_flux: SurfaceFlux, *, tolerance: float = 2e-3, most: int = 12
) -> Solution:
    """Solve the steady temperatures of a lagged pipe and the heat it gives off.

    Both ends of the pipe are taken as planes of symmetry. Conductivity follows the temperature
    by repeated substitution, the surface flux by Newton's rule.

    Parameters
    ----------
    model : ColumnModel
        The pipe.
    surface_flux : callable
        Heat flux leaving the surface for a surface temperature, (n_x, n_phi) each.
    tolerance : float
        Largest change of a surface temperature at which the iteration stops. [K]
    most : int
        Most iterations.

    Returns
    -------
    Solution
        Temperatures and heats.

    Raises
    ------
    FitError
        If `tolerance` is not reached.
    """
    n_x, n_phi, n_r = model.factor.shape
    inside, air = model.inside_temperature, model.air_temperature
    falling = 1 - 0.9 * (np.arange(n_r) + 0.5) / n_r
    cells = air + (inside - air) * np.broadcast_to(falling, (n_x, n_phi, n_r))
    surface = np.where(model.exposed, air + 0.97 * (inside - air), air + 0.1 * (inside - air))
    area = model.surface_area
    solver: _Solver | None = None
    for _ in range(most):
        parts = _conductances(model, model.factor * model.conductivity_curve(cells))
        flux = surface_flux(surface)
        slope = np.maximum((surface_flux(surface + _STEP) - flux) / _STEP, 0.5)
        diagonal = _diagonal(parts, slope * area)
        source = parts.cut * air
        source[..., 0] += parts.inside * inside
        source[..., -1] += parts.bare * inside + area * (slope * surface - flux)
        # the held cells of exposed columns take the temperature of the pipe
        source[..., :n_r][model.exposed] = inside
        start = np.concatenate([cells, surface[..., None]], axis=-1)
        found = None if solver is None else _solve_near(parts, diagonal, source, start, solver)
        if found is None:
            solver = _factor(parts, diagonal)
            found = solver(source.ravel()).reshape(n_x, n_phi, n_r + 1)
        change = float(np.max(np.abs(found[..., -1] - surface)))
        surface, cells = found[..., -1], found[..., :-1]
        if change < tolerance:
            cut = (parts.cut[..., :-1] * (cells - air)).sum(axis=-1)
            given = parts.inside * (inside - cells[..., 0]) + parts.bare * (inside - surface)
            return Solution(surface, surface_flux(surface) * area, cut, given, cells)
    raise FitError(
        f"conduction in the lagging did not settle: change {change:.3g} K after {most} steps; "
        f"expected below {tolerance:g} K"
    )
