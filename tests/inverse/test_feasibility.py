"""What fluid, air and surroundings allow at all."""

import numpy as np
import pytest

from cladwatt.inverse.feasibility import Bounds, flux_bounds
from cladwatt.physics.lagged_pipe import surface_heat_flux
from cladwatt.quantities import Quantity


def bounds_of(bench, surface: float = 304.0) -> Bounds:
    return flux_bounds(bench.observe(bench.lens(surface)).seen)


def test_a_hot_line_loses_between_nothing_and_a_bare_surface_at_its_fluid(bench):
    bounds = bounds_of(bench)
    assert np.all(bounds.low == 0)
    assert bounds.high == pytest.approx(float(surface_heat_flux(453.15, bench.exchange)))


def test_a_chilled_line_gains(chilled):
    bounds = bounds_of(chilled, 291.0)
    assert np.all(bounds.high == 0)
    assert bounds.low == pytest.approx(float(surface_heat_flux(279.15, chilled.exchange)))
    assert np.all(bounds.low < -50)


def test_sun_may_turn_a_loss_into_a_gain(bench, hall_with):
    bounds = bounds_of(bench.but(conditions=hall_with(solar_irradiance=Quantity(500.0))))
    assert bounds.low == pytest.approx(-0.6 * 500 / np.pi)


def test_unknown_fluid_bounds_nothing(bench, line_with):
    bounds = bounds_of(bench.but(line=line_with(inside_temperature=None)))
    assert np.all(np.isinf(bounds.low))
    assert np.all(np.isinf(bounds.high))


def test_a_line_between_air_and_surroundings_is_not_bounded_below(bench, line_with, hall_with):
    bench = bench.but(
        line=line_with(inside_temperature=Quantity(300.0)),
        conditions=hall_with(surroundings_temperature=Quantity(310.0)),
    )
    bounds = bounds_of(bench, 302.0)
    assert np.all(np.isneginf(bounds.low))
    assert np.all(np.isposinf(bounds.high))


def test_draws_are_moved_to_the_nearest_bound_in_step():
    bounds = Bounds(np.array([0.0, 0.0, 0.0]), np.array([10.0, 10.0, 10.0]))
    assert bounds.applied(np.array([-5.0, 5.0, 50.0])) == pytest.approx([0, 5, 10])
    assert bounds.beyond(np.array([-5.0, 5.0, 50.0])) == pytest.approx(2 / 3)


def test_a_draw_without_a_temperature_counts_as_beyond_and_as_coldest():
    bounds = Bounds(np.zeros(2), np.full(2, 10.0))
    assert bounds.beyond(np.array([np.nan, 5.0])) == pytest.approx(0.5)
    assert bounds.applied(np.array([np.nan, 5.0])) == pytest.approx([0, 5])
    flux = np.array([[np.nan, 4.0, np.nan], [3.0, 5.0, np.nan]])
    usable = np.array([True, True, False])
    filled = bounds.filled(flux, usable)
    assert filled[:, :2] == pytest.approx(np.array([[0.0, 4.0], [3.0, 5.0]]))
    assert np.isnan(filled[:, 2]).all()


def test_unbounded_a_draw_without_a_temperature_takes_the_smallest():
    bounds = Bounds(np.full(3, -np.inf), np.full(3, np.inf))
    filled = bounds.filled(np.array([[np.nan], [3.0], [7.0]]), np.array([True]))
    assert filled[:, 0] == pytest.approx([3, 3, 7])
