"""Conduction in the lagging of one pipe in three dimensions, by finite volumes (`columns`)."""

import numpy as np

from cladwatt.errors import FitError
from cladwatt.synthetic.columns import (
    ColumnModel,
    Conductances,
    Solution,
    Solver,
    SurfaceFlux,
    cell_volumes,
    conductances,
    diagonal_of,
    factors_of,
    product_with,
)
from cladwatt.types import FloatArray

__all__ = ["ColumnModel", "Solution", "SurfaceFlux", "heat_up", "solve_columns"]

_MOST_GRADIENT_STEPS = 15
_GRADIENT_TOLERANCE = 1e-7
"""Largest residual of the heat balance, over what ties the node. [K]"""
_FULL_STEPS = 8
_STEP = 0.05
"""Step of the numerical derivative of the surface flux. [K]"""


def _solve_near(
    parts: Conductances, diagonal: FloatArray, source: FloatArray, start: FloatArray,
    solver: Solver,
) -> FloatArray | None:  # fmt: skip
    """Solve by conjugate gradients with the factors of a nearby matrix; None if it is too far."""
    found = start.copy()
    residual = source - product_with(parts, diagonal, found)
    direction, old = np.zeros_like(found), 0.0
    for step in range(_MOST_GRADIENT_STEPS):
        if float(np.max(np.abs(residual / diagonal))) < _GRADIENT_TOLERANCE:
            return found
        near = solver(residual.ravel()).reshape(found.shape)
        new = float(np.sum(residual * near))
        direction = near + (new / old) * direction if step else near
        image = product_with(parts, diagonal, direction)
        length = new / float(np.sum(direction * image))
        found += length * direction
        residual -= length * image
        old = new
    return None


def solve_columns(
    model: ColumnModel, surface_flux: SurfaceFlux, *, tolerance: float = 2e-3, most: int = 40
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
    inside, air = model.inside, model.air_temperature
    falling = 1 - 0.9 * (np.arange(n_r) + 0.5) / n_r
    cells = air + (inside - air)[..., None] * np.broadcast_to(falling, (n_x, n_phi, n_r))
    surface = np.where(model.exposed, air + 0.97 * (inside - air), air + 0.1 * (inside - air))
    solver: Solver | None = None
    for step in range(most):
        parts, diagonal, source = _balance(model, surface_flux, cells, surface)
        start = np.concatenate([cells, surface[..., None]], axis=-1)
        found = None if solver is None else _solve_near(parts, diagonal, source, start, solver)
        if found is None:
            solver = factors_of(parts, diagonal)
            found = solver(source.ravel()).reshape(n_x, n_phi, n_r + 1)
        change = float(np.max(np.abs(found[..., -1] - surface)))
        # about a kink of the surface's balance full steps would go to and fro
        if step >= _FULL_STEPS:
            found = (found + np.concatenate([cells, surface[..., None]], axis=-1)) / 2
        surface, cells = found[..., -1], found[..., :-1]
        if change < tolerance:
            return _solution(model, surface_flux, parts, cells, surface)
    raise FitError(
        f"conduction in the lagging did not settle: change {change:.3g} K after {most} steps; "
        f"expected below {tolerance:g} K"
    )


def _balance(
    model: ColumnModel, surface_flux: SurfaceFlux, cells: FloatArray, surface: FloatArray
) -> tuple[Conductances, FloatArray, FloatArray]:
    """Return the conductances, the diagonal and the right side about these temperatures."""
    air, area = model.air_temperature, model.surface_area
    parts = conductances(model, model.factor * model.conductivity_curve(cells), cells[..., -1])
    flux = surface_flux(surface)
    slope = np.maximum((surface_flux(surface + _STEP) - flux) / _STEP, 0.5)
    diagonal = diagonal_of(parts, slope * area)
    source = parts.cut * air
    source[..., 0] += parts.inside * model.inside
    source[..., -1] += parts.bare * model.inside + area * (slope * surface - flux)
    # the held cells of exposed columns take the temperature of the pipe
    source[..., : cells.shape[-1]][model.exposed] = model.inside[model.exposed][:, None]
    return parts, diagonal, source


def _solution(
    model: ColumnModel, surface_flux: SurfaceFlux, parts: Conductances, cells: FloatArray,
    surface: FloatArray,
) -> Solution:  # fmt: skip
    cut = (parts.cut[..., :-1] * (cells - model.air_temperature)).sum(axis=-1)
    given = parts.inside * (model.inside - cells[..., 0]) + parts.bare * (model.inside - surface)
    return Solution(surface, surface_flux(surface) * model.surface_area, cut, given, cells)


def heat_up(
    model: ColumnModel, surface_flux: SurfaceFlux, time: float, *, steps: int = 24
) -> Solution:
    """Return the temperatures of a line that came to temperature a time ago, all at air before.

    Backward differences in steps that grow from short to long.

    Parameters
    ----------
    model : ColumnModel
        The pipe; its heat capacity counts.
    surface_flux : callable
        Heat flux leaving the surface for a surface temperature, (n_x, n_phi) each.
    time : float
        Since the pipe reached its temperature. [s]
    steps : int
        Number of them.

    Returns
    -------
    Solution
        Temperatures and heats at that time.
    """
    n_x, n_phi, n_r = model.factor.shape
    cells = np.full((n_x, n_phi, n_r), float(model.air_temperature))
    surface = np.full((n_x, n_phi), float(model.air_temperature))
    ends = time * (np.arange(steps + 1) / steps) ** 2
    capacity = model.heat_capacity * cell_volumes(model)
    solver: Solver | None = None
    for number, step in enumerate(np.diff(ends), start=1):
        stored = np.zeros((n_x, n_phi, n_r + 1))
        stored[..., :n_r] = np.where(model.exposed[..., None], 0.0, capacity / step)
        before = np.concatenate([cells, surface[..., None]], axis=-1)
        # conductivity and surface flux lag by one step; the last one is gone over again
        for _ in range(2 if number == steps else 1):
            parts, diagonal, source = _balance(model, surface_flux, cells, surface)
            start = np.concatenate([cells, surface[..., None]], axis=-1)
            diagonal, source = diagonal + stored, source + stored * before
            found = None if solver is None else _solve_near(parts, diagonal, source, start, solver)
            if found is None:
                solver = factors_of(parts, diagonal)
                found = solver(source.ravel()).reshape(before.shape)
            cells, surface = found[..., :-1], found[..., -1]
    return _solution(model, surface_flux, parts, cells, surface)
