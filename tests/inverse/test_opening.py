"""Openings in the lagging: what shows across says which; heat of a cut face by finite elements.

Outside check: lagging from a cut face round to the opposite side in two dimensions, by linear
elements of scikit-fem in ln r and angle, where Laplace's equation keeps its form.
"""

import math

import numpy as np
import pytest
from skfem import (
    Basis,
    BilinearForm,
    ElementTriP2,
    FacetBasis,
    LinearForm,
    MeshTri,
    condense,
    solve,
)
from skfem.helpers import dot, grad

from cladwatt.inverse.bare import CUT_FACE_COEFFICIENT, cut_face_loss
from cladwatt.inverse.opening import AcrossPipe, weigh_openings

ACROSS = np.linspace(-0.97, 0.97, 39)
THINNER = 0.5


def across(lips=None, *, pipe=150.0, background=20.0, lagging=28.0) -> AcrossPipe:
    """What shows across: bare without lips, else an opening between two angles in degrees.

    Traced ray by ray: a cut face is a radial plane from the pipe to the lagging's surface.
    """
    value = np.full(ACROSS.size, background)
    value[np.abs(ACROSS) < THINNER] = pipe
    for side, lip in zip((-1, 1), lips or (), strict=False):
        outer, inner = math.sin(math.radians(lip)), THINNER * math.sin(math.radians(lip))
        if lip >= 90:
            continue
        warm = background + 0.3 * (pipe - background)
        place = side * ACROSS
        value[(place > min(inner, outer)) & (place <= outer)] = warm
        value[place > outer] = lagging - 3
    return AcrossPipe(
        ACROSS, value, np.full(ACROSS.size, lagging), np.full(2, background), np.zeros(2), 0.07
    )


def test_background_on_both_sides_of_the_full_width_is_bare():
    assert weigh_openings(across(), THINNER).bare > 0.8


@pytest.mark.parametrize("lips", [(40, 40), (60, 60), (20, 75), (70, 10)])
def test_lips_seen_on_either_side_are_an_opening_of_their_width(lips):
    found = weigh_openings(across(lips), THINNER)
    low, middle, high = 2 * np.degrees(math.pi) * found.share(np.array([0.025, 0.5, 0.975]))
    assert found.bare < 0.05
    assert low < sum(lips) < high
    assert middle == pytest.approx(sum(lips), abs=30)


def test_where_lagging_looks_like_background_neither_is_sure():
    told = weigh_openings(across(), THINNER).bare
    untold = weigh_openings(across(lagging=20.2), THINNER).bare
    assert 0.2 < untold < told - 0.05


def cut_face_by_elements(radius, outer, conductivity, coefficient):
    """Heat that lagging with a cut face gives off beyond one without, per kelvin. [W/(m K)]"""
    points = np.linspace(0, 1, 60) ** 2
    mesh = MeshTri.init_tensor(
        np.log(radius) + math.log(outer / radius) * np.linspace(0, 1, 40), math.pi * points
    )
    ends = (math.log(radius), math.log(outer))
    mesh = mesh.with_boundaries({
        "pipe": lambda x: np.isclose(x[0], ends[0]),
        "surface": lambda x: np.isclose(x[0], ends[1]),
        "cut": lambda x: np.isclose(x[1], 0.0),
    })  # fmt: skip
    basis = Basis(mesh, ElementTriP2())
    heats = []
    for exposed in (("surface", "cut"), ("surface",)):
        facets = FacetBasis(mesh, ElementTriP2(), facets=np.concatenate(
            [mesh.boundaries[name] for name in exposed]))  # fmt: skip
        conduction = BilinearForm(lambda u, v, _: conductivity * dot(grad(u), grad(v)))
        matrix = conduction.assemble(basis)
        robin = BilinearForm(lambda u, v, w: coefficient * np.exp(w.x[0]) * u * v).assemble(facets)
        given = LinearForm(lambda v, w: coefficient * np.exp(w.x[0]) * v).assemble(facets)
        warm = np.zeros(basis.N)
        held = basis.get_dofs("pipe")
        warm[held] = 1.0
        found = solve(*condense(matrix + robin, np.zeros(basis.N), x=warm, D=held))
        heats.append(float(given @ found))
    return heats[0] - heats[1]


@pytest.mark.parametrize(("radius", "thickness", "conductivity"), [
    (0.0302, 0.04, 0.045), (0.057, 0.05, 0.05), (0.0845, 0.06, 0.06), (0.11, 0.08, 0.04),
])  # fmt: skip
def test_a_cut_face_loses_what_finite_elements_say(radius, thickness, conductivity, evidence):
    outer = radius + thickness
    by_elements = cut_face_by_elements(radius, outer, conductivity, CUT_FACE_COEFFICIENT)
    loss = np.array([2 * math.pi * conductivity * 100.0 / math.log(outer / radius)])
    found = cut_face_loss(np.array([2 * outer]), np.array([2 * radius]), loss, np.array([100.0]))
    evidence("cut_face", "heat per kelvin", float(found[0]) / 100.0, by_elements, rel=0.2)
