"""The three-dimensional solver against closed forms and an independent finite-element library."""

import math

import numpy as np
import pytest

from cladwatt.errors import FitError
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.synthetic.conduction_3d import ColumnModel, solve_columns

INSIDE, AIR = 453.15, 293.15
RADIUS, THICKNESS, COEFFICIENT = 0.0572, 0.05, 9.0


def make_model(n_x=20, n_phi=12, n_r=5, *, conductivity=None, **rest):
    curve = conductivity or (lambda temperature: np.full(np.shape(temperature), 0.045))
    values = {
        "inside_temperature": INSIDE,
        "inside_coefficient": 5000.0,
        "pipe_radius": RADIUS,
        "thickness": np.full((n_x, n_phi), THICKNESS),
        "cell_length": 0.015,
        "conductivity_curve": curve,
        "factor": np.ones((n_x, n_phi, n_r)),
        "sheet_conductance": 0.03,
        "exposed": np.zeros((n_x, n_phi), dtype=bool),
        "air_temperature": AIR,
    }
    return ColumnModel(**(values | rest))


def linear_flux(temperature):
    return COEFFICIENT * (temperature - AIR)


def test_uniform_lagging_gives_the_series_of_film_ring_and_surface():
    solution = solve_columns(make_model(), linear_flux)
    outer = RADIUS + THICKNESS
    resistance = (
        1 / (2 * math.pi * RADIUS * 5000.0)
        + math.log(outer / RADIUS) / (2 * math.pi * 0.045)
        + 1 / (2 * math.pi * outer * COEFFICIENT)
    )
    assert solution.heat_loss(0.015) == pytest.approx((INSIDE - AIR) / resistance, rel=1e-6)


def test_conductivity_that_grows_with_temperature_gives_its_integral():
    def curve(temperature):
        return 0.04 + 2e-4 * (temperature - 323.15)

    integral = ConductivityIntegral([250.0, 500.0], [curve(250.0), curve(500.0)])
    model = make_model(4, 4, 16, conductivity=curve, inside_coefficient=1e7)
    solution = solve_columns(model, linear_flux)
    surface = float(solution.surface_temperature.mean())
    through = 2 * math.pi * float(integral.integral(INSIDE) - integral.integral(surface))
    expected = through / math.log((RADIUS + THICKNESS) / RADIUS)
    assert solution.heat_loss(0.015) == pytest.approx(expected, rel=1e-3)


def test_a_bare_pipe_loses_through_film_and_surface_only():
    model = make_model(exposed=np.ones((20, 12), dtype=bool))
    expected = (INSIDE - AIR) / (1 / 5000.0 + 1 / COEFFICIENT) * 2 * math.pi * RADIUS
    assert solve_columns(model, linear_flux).heat_loss(0.015) == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("sheet", [0.0, 0.2])
def test_what_the_fluid_gives_leaves_at_the_surface(sheet):
    exposed = np.zeros((20, 12), dtype=bool)
    exposed[5:8], exposed[12:14, 3:7] = True, True
    factor = np.random.default_rng(1).uniform(0.5, 6.0, (20, 12, 5))
    model = make_model(exposed=exposed, factor=factor, sheet_conductance=sheet)

    def flux(temperature):
        return 5.0 * (temperature - AIR) + 5.67e-8 * 0.9 * (temperature**4 - AIR**4)

    solution = solve_columns(model, flux, tolerance=1e-6)
    lost = solution.surface_heat.sum() + solution.cut_face_heat.sum()
    assert solution.inside_heat.sum() == pytest.approx(lost, rel=1e-6)
    assert solution.cut_face_heat.sum() > 0


def test_a_chilled_line_gains():
    solution = solve_columns(make_model(inside_temperature=279.0), linear_flux)
    assert np.all(solution.heat_loss(0.015) < 0)


def test_a_step_of_the_lagging_under_a_sheet_spreads_as_a_fin():
    # Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th edition,
    # section 3.6: a fin's temperature falls with exp(-m x), m^2 = total coefficient / (k t).
    # Two half-infinite fins, one on each side of the step, joined with equal slope.
    n_x, sheet, radius, thickness = 240, 0.6, 1.0, 0.02
    factor = np.ones((n_x, 4, 5))
    factor[n_x // 2 :] = 3.0
    model = make_model(
        n_x, 4, pipe_radius=radius, thickness=np.full((n_x, 4), thickness), factor=factor,
        sheet_conductance=sheet, inside_coefficient=1e7,
    )  # fmt: skip
    found = solve_columns(model, linear_flux, tolerance=1e-5).surface_temperature.mean(axis=1)
    outer = radius + thickness
    through = [f * 0.045 / (outer * math.log(outer / radius)) for f in (1.0, 3.0)]
    level = [(u * INSIDE + COEFFICIENT * AIR) / (u + COEFFICIENT) for u in through]
    # the lagging conducts a little lengthwise too
    along = [sheet + f * 0.045 * thickness / 3 for f in (1.0, 3.0)]
    decay = [math.sqrt((u + COEFFICIENT) / k) for u, k in zip(through, along, strict=True)]
    weight = [k * m for k, m in zip(along, decay, strict=True)]
    middle = (weight[0] * level[0] + weight[1] * level[1]) / sum(weight)
    x = (np.arange(n_x) + 0.5 - n_x / 2) * 0.015
    expected = np.where(
        x < 0,
        level[0] + (middle - level[0]) * np.exp(decay[0] * x),
        level[1] + (middle - level[1]) * np.exp(-decay[1] * x),
    )
    assert np.max(np.abs(found - expected)) < 0.01 * (level[1] - level[0])


def test_a_wet_sector_agrees_with_finite_elements(evidence):
    # independent solver: scikit-fem, quadratic elements on a polar mesh
    import skfem
    from skfem.helpers import dot, grad

    outer, ratio = RADIUS + THICKNESS, 6.0
    mesh = skfem.MeshQuad.init_tensor(
        np.linspace(0, math.log(outer / RADIUS), 17), np.linspace(0, 2 * math.pi, 145)
    )
    # in (ln r, phi) Laplace's equation keeps its form; half of the circle is wet
    basis = skfem.Basis(mesh, skfem.ElementQuad2())
    edge = skfem.FacetBasis(mesh, skfem.ElementQuad2(), facets=mesh.facets_satisfying(
        lambda x: np.isclose(x[0], math.log(outer / RADIUS))))  # fmt: skip

    @skfem.BilinearForm
    def conduct(u, v, w):
        k = np.where(w.x[1] < math.pi, ratio * 0.045, 0.045)
        return k * dot(grad(u), grad(v))

    @skfem.BilinearForm
    def surface(u, v, _):
        return COEFFICIENT * outer * u * v

    matrix = conduct.assemble(basis) + surface.assemble(edge)
    inner = basis.get_dofs(lambda x: np.isclose(x[0], 0.0))
    start = np.zeros(basis.N)
    start[inner] = INSIDE - AIR
    # the first and the last angle are one line
    low = basis.get_dofs(lambda x: np.isclose(x[1], 0.0)).flatten()
    high = basis.get_dofs(lambda x: np.isclose(x[1], 2 * math.pi)).flatten()
    low = low[np.argsort(basis.doflocs[0, low])]
    high = high[np.argsort(basis.doflocs[0, high])]
    import scipy.sparse

    join = scipy.sparse.identity(basis.N, format="lil")
    for a, b in zip(low, high, strict=True):
        join[b, b], join[b, a] = 0.0, 1.0
    keep = np.setdiff1d(np.arange(basis.N), high)
    join = join.tocsr()[:, keep]
    small = (join.T @ matrix @ join).tocsr()
    fixed = np.flatnonzero(np.isin(keep, inner.flatten()))
    free = np.setdiff1d(np.arange(keep.size), fixed)
    values = start[keep]
    values[free] = scipy.sparse.linalg.spsolve(
        small[free][:, free].tocsc(), -small[free][:, fixed] @ values[fixed]
    )
    field = join @ values
    # the heat that leaves: the surface load over a test function of one
    expected = float(np.ones(basis.N) @ (surface.assemble(edge) @ field))

    factor = np.ones((3, 48, 10))
    factor[:, :24] = ratio
    model = make_model(
        3, 48, 10, factor=factor, thickness=np.full((3, 48), THICKNESS),
        exposed=np.zeros((3, 48), dtype=bool), sheet_conductance=0.0, inside_coefficient=1e9,
    )  # fmt: skip
    found = solve_columns(model, linear_flux).heat_loss(0.015)
    evidence("fem_wet_sector", "loss", found, expected, unit="W/m", rel=2e-3)


def test_no_settling_is_said():
    with pytest.raises(FitError, match="did not settle"):
        solve_columns(make_model(), linear_flux, most=1)
