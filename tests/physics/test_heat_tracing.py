"""A tracer under lagging, against finite elements, hand limits and energy balances."""

import math

import numpy as np
import pytest
import skfem
from skfem.helpers import grad

from cladwatt.errors import InputError
from cladwatt.physics.heat_tracing import (
    AnnulusPath,
    covered_half_angle,
    stripe_profile,
    surface_transfer,
    tracer_rise_by_power,
    tracer_shares,
)

INNER, OUTER, K, OUTSIDE = 0.030, 0.070, 0.045, 9.0
PLAIN = AnnulusPath(INNER, OUTER, K, OUTSIDE)
FILM = PLAIN._replace(inside_coefficient=25.0)
CLAD = FILM._replace(sheet_conductance=0.05)


def finite_elements(path: AnnulusPath, half_angle: float):
    """Surface temperatures over angle, air at 0, spot at 1 inside and the rest at 0.

    Half of the annulus in (r, phi), where the weak form has r and 1/r before its gradients;
    quadratic elements. The spot's edge lies on an element's.
    """
    radius = np.geomspace(path.inner_radius, path.outer_radius, 25)
    angle = np.unique(np.concatenate([
        np.linspace(0, half_angle, 25), half_angle + (math.pi - half_angle) * np.linspace(0, 1, 50)
    ]))  # fmt: skip
    mesh = skfem.MeshQuad.init_tensor(radius, angle)
    basis = skfem.Basis(mesh, skfem.ElementQuad2())

    def edge(where):
        return skfem.FacetBasis(mesh, skfem.ElementQuad2(), facets=mesh.facets_satisfying(where))

    outside = edge(lambda x: np.isclose(x[0], path.outer_radius))
    inside = edge(lambda x: np.isclose(x[0], path.inner_radius))

    @skfem.BilinearForm
    def conduction(u, v, w):
        r = w.x[0]
        return path.conductivity * (grad(u)[0] * grad(v)[0] * r + grad(u)[1] * grad(v)[1] / r)

    @skfem.BilinearForm
    def surface(u, v, _):
        along = path.sheet_conductance / path.outer_radius * grad(u)[1] * grad(v)[1]
        return path.outside_coefficient * path.outer_radius * u * v + along

    @skfem.BilinearForm
    def film(u, v, _):
        return path.inside_coefficient * path.inner_radius * u * v

    @skfem.LinearForm
    def spot(v, w):
        return path.inside_coefficient * path.inner_radius * (w.x[1] < half_angle) * v

    matrix = conduction.assemble(basis) + surface.assemble(outside) + film.assemble(inside)
    found = skfem.solve(matrix, spot.assemble(inside))
    nodes = np.flatnonzero(np.isclose(basis.doflocs[0], path.outer_radius))
    nodes = nodes[np.argsort(basis.doflocs[1][nodes])]
    return basis.doflocs[1][nodes], found[nodes]


@pytest.mark.parametrize(
    ("name", "path"),
    [
        ("40 mm of wool on 60 mm", FILM),
        ("the same under sheet metal", CLAD),
        ("60 mm on 168 mm", AnnulusPath(0.084, 0.144, 0.05, 8.0, 40.0, 0.01)),
        ("thin lagging", AnnulusPath(0.05, 0.065, 0.04, 10.0, 300.0, 0.0)),
    ],
)
def test_stripe_against_finite_elements(evidence, name, path):
    half_angle = 0.45
    angle, theirs = finite_elements(path, half_angle)
    mean = surface_transfer(path, 0) * half_angle / math.pi
    ours = mean * stripe_profile(path, half_angle, angle)
    evidence("tracer_stripe_fem", f"{name}, surface over angle", ours, theirs,
             rel=0.004, abs=0.002 * theirs.max(), unit="K per K", scale=theirs.max())  # fmt: skip
    fem_mean = float(np.trapezoid(theirs, angle) / math.pi)
    evidence("tracer_stripe_fem", f"{name}, mean all round", mean, fem_mean,
             rel=0.004, unit="K per K")  # fmt: skip


def test_mean_is_the_chain_of_resistances(evidence):
    # mode 0 by hand: film, lagging and surface in series
    film = 1 / (2 * math.pi * INNER * 25.0)
    lagging = math.log(OUTER / INNER) / (2 * math.pi * K)
    surface = 1 / (2 * math.pi * OUTER * OUTSIDE)
    evidence("tracer_limits", "mean of the surface, resistances by hand",
             surface_transfer(FILM, 0), surface / (film + lagging + surface), rel=1e-9)  # fmt: skip


def test_flat_layer_between_two_walls(evidence):
    # thin wall on a wide pipe, wave of number p along it: 1 / (cosh p d + h / (k p) sinh p d),
    # the plane layer of Carslaw and Jaeger, with p = n / radius
    radius, depth, n = 50.0, 0.04, 2000
    p = n / (radius + depth / 2)
    flat = 1 / (math.cosh(p * depth) + OUTSIDE / (K * p) * math.sinh(p * depth))
    curved = surface_transfer(AnnulusPath(radius, radius + depth, K, OUTSIDE), n)
    evidence("tracer_limits", "wave through a plane layer", curved, flat, rel=2e-3)


def test_wave_under_an_insulated_surface(evidence):
    # without any exchange outside the wave of n periods falls as 2 x^n / (1 + x^2n), x = b / a
    x = OUTER / INNER
    free = AnnulusPath(INNER, OUTER, K, 1e-12)
    for n in (1, 2, 5):
        evidence("tracer_limits", f"insulated surface, mode {n}",
                 surface_transfer(free, n), 2 * x**n / (1 + x ** (2 * n)), rel=1e-9)  # fmt: skip


def test_stripe_is_one_on_average_and_highest_above_the_tracer():
    angle = np.linspace(-math.pi, math.pi, 721)
    profile = stripe_profile(CLAD, 0.4, angle)
    assert np.mean(profile[:-1]) == pytest.approx(1.0, abs=1e-9)
    assert np.argmax(profile) == 360
    assert profile[0] < 0.6
    np.testing.assert_allclose(profile, profile[::-1])


def test_sheet_and_thicker_lagging_smooth_the_stripe():
    def peak(path):
        return float(stripe_profile(path, 0.4, 0.0))

    assert peak(CLAD) < peak(FILM)
    assert peak(FILM._replace(outer_radius=0.12)) < peak(FILM)
    assert peak(FILM._replace(inside_coefficient=1e3)) > peak(FILM)


def test_high_modes_neither_overflow_nor_pass():
    found = surface_transfer(PLAIN, np.array([1.0, 10.0, 400.0, 4000.0]))
    assert np.isfinite(found).all()
    assert (np.diff(found) <= 0).all()
    assert found[-1] == 0.0


def test_arrays_of_draws_give_one_profile_each():
    paths = FILM._replace(conductivity=np.array([0.03, 0.06]), outer_radius=np.array([0.06, 0.08]))
    both = stripe_profile(
        AnnulusPath(*(np.asarray(part)[..., None] for part in paths)),
        np.array([[0.3], [0.5]]), np.array([0.0, 1.0, 2.0]),
    )  # fmt: skip
    assert both.shape == (2, 3)
    one = FILM._replace(conductivity=0.06, outer_radius=0.08)
    np.testing.assert_allclose(both[1], stripe_profile(one, 0.5, np.array([0.0, 1.0, 2.0])))


def test_covered_angle_by_geometry():
    # equal circles side by side touch a common tangent square to the line of centres
    assert covered_half_angle(0.01, 0.01) == pytest.approx(math.pi / 2)
    # pipe of 60 mm, tracer of 12 mm: the tangent's slope is 24 over 36
    assert covered_half_angle(0.030, 0.006) == pytest.approx(math.acos(24 / 36))
    assert covered_half_angle(0.030, 0.0) == 0.0


def test_shares_add_up_to_the_whole_loss():
    # 62 °C inside, 138 °C tracer over 12 % of the inside, air at 25 °C, 2 m K/W by hand
    resistance, share = 2.0, 0.12
    inside, tracer, air = 62.0, 138.0, 25.0
    untraced = (inside - air) / resistance
    loss = ((1 - share) * inside + share * tracer - air) / resistance
    found = tracer_shares(share, (tracer - inside) / (inside - air))
    assert untraced * (1 + found.rise) == pytest.approx(loss)
    by_tracer = share * (tracer - air) / resistance
    assert untraced * found.straight == pytest.approx(by_tracer)
    assert loss - by_tracer == pytest.approx((1 - share) * untraced)


@pytest.mark.parametrize("contact", [0.3, 3.0, 30.0])
def test_power_is_what_lagging_and_pipe_take(contact):
    share, untraced, above = 0.1, 16.0, 40.0
    rise = float(tracer_rise_by_power(20.0, share, contact, untraced, above))
    to_pipe = contact * rise * above
    to_lagging = untraced * float(tracer_shares(share, rise).straight)
    assert to_pipe + to_lagging == pytest.approx(20.0)


def test_a_loose_tracer_is_hotter_than_one_in_contact():
    rises = tracer_rise_by_power(20.0, 0.1, np.array([0.3, 3.0, 30.0]), 16.0, 40.0)
    assert (np.diff(rises) < 0).all()
    # no contact: all of it into the lagging
    alone = tracer_shares(0.1, tracer_rise_by_power(20.0, 0.1, 0.0, 16.0, 40.0))
    assert 16.0 * alone.straight == pytest.approx(20.0)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"outer_radius": 0.02}, "a larger one"),
        ({"inner_radius": 0.0}, "above 0"),
        ({"conductivity": 0.0}, "conductivity is 0; expected above 0"),
        ({"outside_coefficient": -1.0}, "outside_coefficient is -1; expected above 0"),
    ],
)
def test_impossible_paths_are_refused(change, message):
    with pytest.raises(InputError, match=message):
        surface_transfer(PLAIN._replace(**change), 1)
