"""What must hold of every pipe, whatever its lagging and weather."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.lagged_pipe import (
    LaggingLayer,
    SurfaceExchange,
    solve_lagged_pipe,
    surface_heat_flux,
)

TEMPERATURES = st.floats(150.0, 900.0)
AMBIENTS = st.floats(230.0, 325.0)
DIAMETERS = st.floats(0.015, 0.8)
CONDUCTIVITIES = st.floats(0.015, 0.5)


@st.composite
def curves(draw):
    count = draw(st.integers(1, 4))
    start = draw(st.floats(150.0, 400.0))
    steps = draw(st.lists(st.floats(5.0, 250.0), min_size=count - 1, max_size=count - 1))
    values = draw(st.lists(CONDUCTIVITIES, min_size=count, max_size=count))
    return ConductivityIntegral(list(np.cumsum([start, *steps])), values)


@st.composite
def layer_lists(draw):
    thickness = st.just(0.0) | st.floats(1e-4, 0.2)
    count = draw(st.integers(1, 3))
    return [
        LaggingLayer(draw(curves()), draw(thickness), draw(st.floats(0.3, 10.0)))
        for _ in range(count)
    ]


@st.composite
def exchanges(draw, diameter, sun=0.0):
    return SurfaceExchange(
        air_temperature=draw(AMBIENTS),
        surroundings_temperature=draw(AMBIENTS),
        wind_speed=draw(st.just(0.0) | st.floats(0.01, 20.0)),
        diameter=diameter,
        total_emissivity=draw(st.floats(0.02, 1.0)),
        pressure=draw(st.floats(6e4, 1.05e5)),
        inclination_deg=draw(st.just(0.0) | st.floats(0.0, 90.0)),
        convection_factor=draw(st.floats(0.5, 2.0)),
        absorbed_solar=draw(st.floats(0.0, sun)) if sun else 0.0,
    )


@st.composite
def pipes(draw, sun=0.0):
    diameter = draw(DIAMETERS)
    layers = draw(layer_lists())
    over_cladding = diameter + 2 * sum(layer.thickness for layer in layers)
    return draw(TEMPERATURES), diameter, layers, draw(exchanges(over_cladding, sun))


@given(pipes(sun=900.0))
def test_balance_closes(pipe):
    state = solve_lagged_pipe(*pipe)
    assert np.isfinite(state.heat_loss)
    assert abs(state.residual) < 1e-8


@given(pipes(), AMBIENTS)
def test_equal_temperatures_no_loss(pipe, temperature):
    _, diameter, layers, exchange = pipe
    same = replace(exchange, air_temperature=temperature, surroundings_temperature=temperature)
    state = solve_lagged_pipe(temperature, diameter, layers, same)
    assert state.heat_loss == pytest.approx(0.0, abs=1e-9)
    assert state.surface_temperature == pytest.approx(temperature, abs=1e-9)


@given(pipes())
def test_heat_flows_from_warm_to_cold(pipe):
    inside, _, _, exchange = pipe
    coldest = min(exchange.air_temperature, exchange.surroundings_temperature)
    warmest = max(exchange.air_temperature, exchange.surroundings_temperature)
    state = solve_lagged_pipe(*pipe)
    if inside > warmest:
        assert state.heat_loss > 0
    if inside < coldest:
        assert state.heat_loss < 0
    assert min(coldest, inside) - 1e-9 <= state.surface_temperature
    assert state.surface_temperature <= max(warmest, inside) + 1e-9


@given(pipes())
def test_temperatures_fall_monotonically_through_the_layers(pipe):
    state = solve_lagged_pipe(*pipe)
    falls = -np.diff(state.interface_temperatures)
    assert np.all(falls * np.sign(state.heat_loss) >= -1e-9)


@given(pipes(), st.floats(1.05, 5.0))
def test_better_conductor_loses_more(pipe, factor):
    inside, diameter, layers, exchange = pipe
    # between air and surroundings heat passes through the surface and the loss may change sign
    ambients = (exchange.air_temperature, exchange.surroundings_temperature)
    assume(not min(ambients) <= inside <= max(ambients))
    assume(sum(layer.thickness for layer in layers) > 0)
    wet = [replace(layer, factor=layer.factor * factor) for layer in layers]
    dry_state = solve_lagged_pipe(*pipe)
    wet_state = solve_lagged_pipe(inside, diameter, wet, exchange)
    assert abs(wet_state.heat_loss) >= abs(dry_state.heat_loss) * (1 - 1e-9)
    assert wet_state.resistance < dry_state.resistance


@given(
    inside=st.floats(340.0, 900.0),
    diameter=st.floats(0.05, 0.8),
    conductivity=st.floats(0.02, 0.08),
    thickness=st.floats(0.005, 0.15),
    more=st.floats(0.002, 0.1),
    emissivity=st.floats(0.1, 1.0),
)
def test_thicker_lagging_loses_less_beyond_the_critical_radius(
    inside, diameter, conductivity, thickness, more, emissivity
):
    # k/h is at most 0.08/2.5 = 32 mm; the thinner lagging's radius must lie beyond
    assume(0.5 * diameter + thickness > 0.035)
    lagging = ConductivityIntegral.constant(conductivity)

    def loss(total):
        exchange = SurfaceExchange(293.15, 293.15, 0.0, diameter + 2 * total, emissivity)
        layers = [LaggingLayer(lagging, total)]
        return float(solve_lagged_pipe(inside, diameter, layers, exchange).heat_loss)

    assert loss(thickness + more) < loss(thickness)


def test_below_the_critical_radius_thicker_lagging_loses_more():
    lagging = ConductivityIntegral.constant(0.5)
    thickness = np.array([0.0, 0.002, 0.005])
    exchange = SurfaceExchange(293.15, 293.15, 0.0, 0.01 + 2 * thickness, 0.9)
    state = solve_lagged_pipe(350.0, 0.01, [LaggingLayer(lagging, thickness)], exchange)
    assert np.all(np.diff(state.heat_loss) > 0)


@settings(max_examples=60)
@given(pipes(sun=900.0))
def test_agrees_with_brentq(pipe):
    # scipy.optimize.brentq on the surface temperature, layers marched from the inside
    inside, diameter, layers, exchange = pipe

    def imbalance(surface):
        loss = math.pi * exchange.diameter * float(surface_heat_flux(surface, exchange))
        temperature, inner = inside, 0.5 * diameter
        for layer in layers:
            outer = inner + layer.thickness
            shape = math.log(outer / inner) / (2 * math.pi * layer.factor)
            integral = float(layer.conductivity.integral(temperature)) - loss * shape
            temperature, inner = float(layer.conductivity.inverse(integral)), outer
        return temperature - surface

    expected = brentq(imbalance, 100.0, 2000.0, xtol=1e-12, rtol=1e-14)
    found = solve_lagged_pipe(*pipe).surface_temperature
    assert found == pytest.approx(expected, abs=1e-9)


@given(st.data())
def test_many_at_once_are_the_same_as_one_by_one(data):
    _, diameter, layers, exchange = data.draw(pipes(sun=900.0))
    insides = np.array(data.draw(st.lists(TEMPERATURES, min_size=2, max_size=5)))
    together = solve_lagged_pipe(insides, diameter, layers, exchange)
    for index, inside in enumerate(insides):
        alone = solve_lagged_pipe(inside, diameter, layers, exchange)
        assert together.surface_temperature[index] == pytest.approx(
            float(alone.surface_temperature), abs=2e-10
        )
