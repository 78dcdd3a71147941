import csv
from itertools import pairwise
from math import pi
from pathlib import Path

import mpmath
import numpy as np
import pytest
import skfem
from scipy.linalg import eigh, expm
from skfem.helpers import dot, grad

from cladwatt.errors import InputError
from cladwatt.physics.time_constant import (
    StepResponse,
    lagging_step_response,
    layered_step_response,
    slab_time_constant,
    time_until_within,
)

with (Path(__file__).parents[1] / "published" / "transient_eigenvalues.csv").open(
    encoding="utf-8", newline=""
) as file:
    ROOTS = list(csv.DictReader(file))

WOOL = {"conductivity": 0.05, "volumetric_heat_capacity": 84e3, "surface_coefficient": 8.0}


@pytest.mark.parametrize("row", ROOTS, ids=lambda row: row["id"])
def test_first_roots_of_the_book(row, evidence):
    # Carslaw and Jaeger, appendix IV; each recomputed from its own equation with mpmath
    parameter, printed = float(row["parameter"]), float(row["root"])
    half = float(row["half_last_digit"])
    if row["kind"] == "slab":
        # a layer as good as flat: 1 m on a pipe of 2 km
        inner, outer, biot = 2000.0, 2002.0, parameter
        exact = mpmath.findroot(lambda x: x * mpmath.cot(x) + parameter, printed)
        tolerance = half + 5e-4  # the remaining curvature
    else:
        # outer face held by a very strong film
        inner, outer, biot = 2.0, 2.0 * parameter, 1e9
        exact = mpmath.findroot(
            lambda x: (
                mpmath.besselj(0, x) * mpmath.bessely(0, parameter * x)
                - mpmath.bessely(0, x) * mpmath.besselj(0, parameter * x)
            ),
            printed,
        )
        tolerance = half
    what = f"{row['kind']} {row['parameter']}"
    evidence.recomputed("carslaw_jaeger", what, float(exact), printed, abs=half, by="mpmath")
    thickness = (outer - inner) / 2
    response = lagging_step_response(
        inner,
        outer,
        conductivity=1.0,
        volumetric_heat_capacity=1.0,
        surface_coefficient=biot / thickness,
    )
    found = 1.0 / np.sqrt(float(response.time_constant))
    evidence("carslaw_jaeger", what, found, printed, abs=tolerance)


def finite_elements(edges, conductivities, capacities, coefficient, skin):
    """Slowest time constant of layers by scikit-fem, quadratic elements in the radius."""
    parts = [np.linspace(*pair, 25) for pair in pairwise(edges)]
    basis = skfem.Basis(skfem.MeshLine(np.unique(np.concatenate(parts))), skfem.ElementLineP2())

    def at(values, radius):
        return np.asarray(values)[np.searchsorted(edges, radius) - 1]

    stiffness = skfem.BilinearForm(
        lambda u, v, w: at(conductivities, w.x[0]) * w.x[0] * dot(grad(u), grad(v))
    )
    mass = skfem.BilinearForm(lambda u, v, w: at(capacities, w.x[0]) * w.x[0] * u * v)
    outside, inside = (
        int(basis.get_dofs(lambda x, end=end: np.isclose(x[0], end)).flatten()[0])
        for end in (edges[-1], edges[0])
    )
    left, right = stiffness.assemble(basis).toarray(), mass.assemble(basis).toarray()
    left[outside, outside] += coefficient * edges[-1]
    right[outside, outside] += skin * edges[-1]
    keep = np.setdiff1d(np.arange(basis.N), [inside])
    rates = eigh(left[np.ix_(keep, keep)], right[np.ix_(keep, keep)], eigvals_only=True)
    return 1.0 / rates[0]


@pytest.mark.parametrize("skin", [0.0, 2900.0, 40e3])
@pytest.mark.parametrize(("inner", "outer"), [(0.0337, 0.1337), (0.114, 0.214), (0.5, 0.56)])
def test_one_material_against_finite_elements(inner, outer, skin, evidence):
    response = lagging_step_response(inner, outer, **WOOL, surface_heat_capacity=skin)
    expected = finite_elements(np.array([inner, outer]) / 2, [0.05], [84e3], 8.0, skin)
    found = response.time_constant
    evidence("fem_time_constant", "one material", found, expected, unit="s", rel=1e-6)


def test_two_layers_against_finite_elements(evidence):
    # calcium silicate under mineral wool, with a steel sheet
    layers = ([0.06, 0.08], [240e3, 84e3])
    found = layered_step_response(
        [0.168, 0.248, 0.328], *layers, surface_coefficient=9.0, surface_heat_capacity=2900.0
    )
    expected = finite_elements(np.array([0.084, 0.124, 0.164]), *layers, 9.0, 2900.0)
    constant = found.time_constant
    evidence("fem_time_constant", "two layers", constant, expected, unit="s", rel=1e-3)


@pytest.mark.parametrize("skin", [0.0, 2900.0])
def test_the_whole_step_against_a_network_of_many_cells(skin, evidence):
    # 200 cells of equal thickness, the matrix exponential of it: no modes are used
    inner, outer, cells = 0.057, 0.107, 200
    faces = np.linspace(inner, outer, cells + 1)
    middles = 0.5 * (faces[1:] + faces[:-1])
    between = 2 * pi * 0.05 / np.log(middles[1:] / middles[:-1])
    first = 2 * pi * 0.05 / np.log(middles[0] / inner)
    last = 1 / (np.log(outer / middles[-1]) / (2 * pi * 0.05) + 1 / (2 * pi * outer * 8.0))
    to_skin = 2 * pi * 0.05 / np.log(outer / middles[-1])
    capacity = list(84e3 * pi * np.diff(faces**2))
    links = [first, *between, last]
    if skin:
        links = [first, *between, to_skin, 2 * pi * outer * 8.0]
        capacity.append(skin * 2 * pi * outer)
    links, capacity = np.array(links), np.array(capacity)
    matrix = np.diag(-(links[:-1] + links[1:])) + np.diag(links[1:-1], 1) + np.diag(links[1:-1], -1)
    source = np.zeros(capacity.size)
    source[0] = first
    steady = np.linalg.solve(-matrix, source)
    response = lagging_step_response(2 * inner, 2 * outer, **WOOL, surface_heat_capacity=skin)
    for share in (0.2, 0.05, 0.01):
        time = float(time_until_within(response, share))
        now = steady - expm(matrix / capacity[:, None] * time) @ steady
        # ours is the share asked for, theirs what the network still lacks by then
        left = 1.0 - now[-1] / steady[-1]
        evidence("cell_network", "share still to come", share, left, abs=0.03 * share)


def test_layers_of_one_material_are_one_layer():
    exact = lagging_step_response(0.114, 0.214, **WOOL, surface_heat_capacity=2900.0)
    split = layered_step_response(
        [0.114, 0.15, 0.214],
        [0.05, 0.05],
        [84e3, 84e3],
        surface_coefficient=8.0,
        surface_heat_capacity=2900.0,
    )
    assert float(split.time_constant) == pytest.approx(float(exact.time_constant), rel=1e-3)
    assert float(split.amplitude) == pytest.approx(float(exact.amplitude), rel=1e-3)


def test_rule_of_thumb_is_the_held_flat_layer():
    held = lagging_step_response(
        100.0, 100.1, conductivity=0.05, volumetric_heat_capacity=84e3, surface_coefficient=1e9
    )
    assert float(held.time_constant) == pytest.approx(
        float(slab_time_constant(0.05, 0.05 / 84e3)), rel=1e-6
    )
    # flux through a held slab: 1 - 2 exp(-t / tau) + ... (Carslaw and Jaeger, section 3.3)
    assert float(held.amplitude) == pytest.approx(2.0, rel=1e-3)


def test_time_goes_with_the_square_of_thickness_and_with_the_capacity():
    base = lagging_step_response(50.0, 50.1, **WOOL | {"surface_coefficient": 1e6})
    thick = lagging_step_response(50.0, 50.2, **WOOL | {"surface_coefficient": 1e6})
    heavy = lagging_step_response(
        50.0, 50.1, **WOOL | {"surface_coefficient": 1e6, "volumetric_heat_capacity": 168e3}
    )
    assert float(thick.time_constant / base.time_constant) == pytest.approx(4.0, rel=5e-3)
    assert float(heavy.time_constant / base.time_constant) == pytest.approx(2.0)


def test_settling_times():
    response = StepResponse(np.array(3600.0), np.array(2.0))
    assert float(time_until_within(response)) == pytest.approx(3600.0 * np.log(40.0))
    # a mode that is smaller than the share from the start
    assert float(time_until_within(StepResponse(np.array(3600.0), np.array(0.03)))) == 0.0


def test_shapes_and_nan():
    response = lagging_step_response(
        np.array([[0.05], [0.1]]), np.array([0.2, 0.3, np.nan]), **WOOL
    )
    assert response.time_constant.shape == (2, 3)
    assert np.isnan(response.time_constant[:, 2]).all()
    assert np.isfinite(response.amplitude[:, :2]).all()


def test_wrong_inputs_are_refused():
    with pytest.raises(InputError, match=r"thickness of the lagging is -0\.05 m"):
        lagging_step_response(0.2, 0.1, **WOOL)
    with pytest.raises(InputError, match="conductivity is 0 W/"):
        lagging_step_response(0.1, 0.2, **WOOL | {"conductivity": 0.0})
    with pytest.raises(InputError, match="surface heat capacity is -1 J/"):
        lagging_step_response(0.1, 0.2, **WOOL, surface_heat_capacity=-1.0)
    with pytest.raises(InputError, match="2 diameters, 2 conductivities and 1 heat capacities"):
        layered_step_response([0.1, 0.2], [0.05, 0.05], [1e5], surface_coefficient=8.0)
    with pytest.raises(InputError, match="expected above 0 and increasing"):
        layered_step_response([0.2, 0.1], [0.05], [1e5], surface_coefficient=8.0)
    with pytest.raises(InputError, match="share is 5; expected between 0 and 1"):
        time_until_within(StepResponse(np.array(1.0), np.array(1.0)), 5.0)
