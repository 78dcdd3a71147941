"""A pipe with a local defect of its lagging under cladding, by finite elements."""

import math

import numpy as np
import scipy.sparse.linalg
import skfem
from skfem.helpers import dot, grad

__all__ = ["COEFFICIENT", "CONDUCTIVITY", "INNER", "INSIDE", "OUTER", "slices"]

INSIDE, COEFFICIENT = 160.0, 10.0
"""Fluid above the air [K]; film outside [W/(m2 K)]."""
INNER, OUTER, CONDUCTIVITY = 0.057, 0.117, 0.045
"""Radii of the lagging [m] and its conductivity [W/(m K)]."""


def lagging_by_finite_elements(half_width, ratio, sheet_conductance, reach=1.5):
    """Surface temperature above air along a pipe whose lagging conducts `ratio` times better.

    Axially symmetric, quadratic elements; the sheet is a fin on the outer face. Mirrored at 0.
    """
    fine = np.linspace(0, 2 * half_width, 25)
    along = np.unique(np.concatenate([fine, np.linspace(2 * half_width, reach, 160)]))
    mesh = skfem.MeshQuad.init_tensor(np.linspace(INNER, OUTER, 13), along)
    element = skfem.ElementQuad2()
    basis = skfem.Basis(mesh, element)
    edge = skfem.FacetBasis(
        mesh, element, facets=mesh.facets_satisfying(lambda x: np.isclose(x[0], OUTER))
    )

    @skfem.BilinearForm
    def conduct(u, v, w):
        k = np.where(w.x[1] < half_width, ratio, 1.0) * CONDUCTIVITY
        return k * w.x[0] * dot(grad(u), grad(v))

    @skfem.BilinearForm
    def surface(u, v, _):
        return OUTER * (COEFFICIENT * u * v + sheet_conductance * grad(u)[1] * grad(v)[1])

    matrix = (conduct.assemble(basis) + surface.assemble(edge)).tocsc()
    held = basis.get_dofs(lambda x: np.isclose(x[0], INNER)).flatten()
    free = np.setdiff1d(np.arange(basis.N), held)
    field = np.full(basis.N, INSIDE)
    field[free] = scipy.sparse.linalg.spsolve(
        matrix[free][:, free], -matrix[free][:, held] @ field[held]
    )
    outside = np.flatnonzero(np.isclose(basis.doflocs[0], OUTER))
    order = outside[np.argsort(basis.doflocs[1, outside])]
    return basis.doflocs[1, order], field[order]


def slices(half_width, ratio, sheet_conductance, step=0.005, reach=1.5):
    """Mid-points, conductances per outer area and finite elements' surface temperature."""
    place = np.arange(-reach + step / 2, reach, step)
    known, temperature = lagging_by_finite_elements(half_width, ratio, sheet_conductance)
    radial = CONDUCTIVITY / (OUTER * math.log(OUTER / INNER))
    conductance = np.where(np.abs(place) < half_width, ratio, 1.0) * radial
    return place, conductance, np.interp(np.abs(place), known, temperature)
