"""How far heat spreads along lagging and sheet: the strip, the fin, and both by finite elements."""

import csv
from math import sqrt
from pathlib import Path

import mpmath
import numpy as np
import pytest
import skfem
from skfem.helpers import dot, grad

from cladwatt.errors import InputError
from cladwatt.physics.lengthwise import lengthwise_decay

with (Path(__file__).parents[1] / "published" / "strip_eigenvalues.csv").open(
    encoding="utf-8", newline=""
) as file:
    ROOTS = list(csv.DictReader(file))


@pytest.mark.parametrize("row", ROOTS, ids=lambda row: row["parameter"])
def test_without_a_sheet_the_roots_are_those_of_the_book(row, evidence):
    # Carslaw and Jaeger, appendix IV, table II; each recomputed from its own equation
    biot, printed = float(row["parameter"]), float(row["root"])
    half = float(row["half_last_digit"])
    exact = mpmath.findroot(lambda x: x * mpmath.cot(x) + biot, printed)
    evidence.recomputed(
        "carslaw_jaeger_strip", f"C {biot:g}", float(exact), printed, abs=half, by="mpmath"
    )
    found = 0.05 / lengthwise_decay(0.05, 0.04, surface_coefficient=biot * 0.04 / 0.05)
    evidence("carslaw_jaeger_strip", f"C {biot:g}", found, printed, abs=half)


@pytest.mark.parametrize(("conductivity", "printed"), [(398.0, 0.19), (180.0, 0.13), (14.0, 0.04)])
def test_without_lagging_the_sheet_is_a_fin(conductivity, printed, evidence):
    # Incropera et al., example 3.9: a rod of 5 mm at 100 W/(m2 K) is infinitely long from 2.65/m on
    length = 2.65 / sqrt(100.0 * 4 / (conductivity * 0.005))
    what = f"rod of {conductivity:g} W/(m K)"
    evidence.recomputed(
        "fin_length", what, length, printed, by="m^2 = hP/(kA)", abs=0.005, unit="m"
    )
    # a rod's section over its perimeter takes the place of the sheet's thickness
    sheet = conductivity * 0.005 / 4
    found = lengthwise_decay(0.01, 1e-6, surface_coefficient=100.0, sheet_conductance=sheet)
    evidence("fin_length", what, 2.65 * found, printed, abs=0.005, unit="m")


def decay_by_finite_elements(thickness, conductivity, coefficient, sheet, length):
    """Decay along the sheet of what is held at one end, by scikit-fem, the pipe's side held."""
    mesh = skfem.MeshQuad.init_tensor(
        np.linspace(0, 12 * length, 181), np.linspace(0, thickness, 15)
    ).with_boundaries({
        "outside": lambda x: np.isclose(x[1], thickness),
        "held": lambda x: np.isclose(x[1], 0) | np.isclose(x[0], 0),
    })  # fmt: skip
    element = skfem.ElementQuad2()
    basis = skfem.Basis(mesh, element)
    outside = skfem.FacetBasis(mesh, element, facets="outside")
    inner = skfem.BilinearForm(lambda u, v, _: conductivity * dot(grad(u), grad(v)))
    skin = skfem.BilinearForm(lambda u, v, _: coefficient * u * v + sheet * grad(u)[0] * grad(v)[0])
    held = basis.get_dofs("held")
    matrix = inner.assemble(basis) + skin.assemble(outside)
    field = basis.zeros()
    at_end = basis.get_dofs(lambda x: np.isclose(x[0], 0)).flatten()
    field[at_end] = basis.doflocs[1, at_end] / thickness
    field = skfem.solve(*skfem.condense(matrix, x=field, D=held))
    probe = basis.probes(np.array([[5 * length, 6 * length], [thickness, thickness]]))
    near, far = probe @ field
    return length / np.log(near / far)


@pytest.mark.parametrize(
    ("thickness", "conductivity", "sheet"),
    [(0.05, 0.05, 0.035), (0.10, 0.06, 0.2), (0.03, 0.04, 0.001)],
    ids=["steel", "aluminium", "plastic"],
)
def test_lagging_and_sheet_together(thickness, conductivity, sheet, evidence):
    found = float(
        lengthwise_decay(thickness, conductivity, surface_coefficient=8.0, sheet_conductance=sheet)
    )
    expected = decay_by_finite_elements(thickness, conductivity, 8.0, sheet, found)
    evidence("fem_lengthwise", "decay length", found, expected, unit="m", rel=0.01)


def test_a_sheet_carries_further_and_air_shortens_it():
    still, windy = lengthwise_decay(
        0.05, 0.05, surface_coefficient=[6.0, 30.0], sheet_conductance=0.2
    )
    bare = lengthwise_decay(0.05, 0.05, surface_coefficient=6.0)
    assert bare < windy < still
    assert np.isnan(lengthwise_decay(0.05, np.nan, surface_coefficient=6.0))


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"thickness": 0.0}, "thickness is 0 m; expected above 0"),
        ({"conductivity": -1.0}, r"conductivity is -1 W/\(m K\)"),
        ({"surface_coefficient": 0.0}, "surface coefficient is 0"),
        ({"sheet_conductance": -0.1}, r"sheet conductance is -0\.1 W/K; expected 0 or more"),
    ],
)
def test_wrong_inputs_are_refused(changes, message):
    usual = {"thickness": 0.05, "conductivity": 0.05, "surface_coefficient": 8.0}
    with pytest.raises(InputError, match=message):
        lengthwise_decay(**usual | changes)
