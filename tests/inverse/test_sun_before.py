"""The last day's sun against the line's own time constant; an undeclared sun; inclined runs."""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from cladwatt.inverse import steady_state
from cladwatt.inverse.steady_state import time_to_forget_sun
from cladwatt.inverse.sunlit import sun_on_run
from cladwatt.physics.clear_sky import clear_sky, pipe_sunlight
from cladwatt.quantities import Quantity

CLEAR = Quantity(700.0, 100.0, lower=0.0, source="clear sky")


def verdict(bench, hall_with, **changes):
    fields = {"indoors": False, "sun_last_24h": True} | changes
    bench = bench.but(conditions=hall_with(**fields))
    return bench.jointly(bench.lens(310.0)).verdict


def test_sun_long_gone_is_forgotten(bench, hall_with):
    above = 310.0 - 293.15
    needed = time_to_forget_sun(bench.line, absorptance=0.6, above_air=above) / 3600
    later = verdict(bench, hall_with, hours_since_sun=Quantity(1.02 * needed))
    assert later.level == "quantified"
    before = verdict(bench, hall_with, hours_since_sun=Quantity(0.98 * needed))
    assert (before.level, before.reason.key) == ("indicative", "indicative.sun_before")


def test_where_nobody_knows_since_when_it_caps(bench, hall_with):
    assert verdict(bench, hall_with).reason.key == "indicative.sun_before"
    assert verdict(bench, hall_with, sun_last_24h=False).level == "quantified"


@pytest.mark.parametrize(("conductivity", "capacity"), [(0.045, 1e5), (0.07, 3e5)])
def test_what_is_left_by_then_is_little_by_finite_volumes(bench, conductivity, capacity):
    """The lagging's heat equation integrated from the sun's own steady state, by scipy."""
    (layer,) = bench.line.layers
    curve = replace(layer.conductivity, conductivity=(conductivity,) * 2)
    layer = replace(
        layer, conductivity=curve, density=Quantity(capacity / 1e3), specific_heat=Quantity(1e3)
    )
    line = replace(bench.line, layers=(layer,))
    absorptance, above_air, h = 0.9, 8.0, steady_state.SURFACE_COEFFICIENT
    inner = line.pipe_outside_diameter.value / 2
    edges = np.linspace(inner, inner + layer.thickness.value, 61)
    middle = 0.5 * (edges[1:] + edges[:-1])
    stores = capacity * math.pi * np.diff(edges**2)
    between = 2 * math.pi * conductivity / np.log(middle[1:] / middle[:-1])
    at_pipe = 2 * math.pi * conductivity / math.log(middle[0] / inner)
    to_sheet = 2 * math.pi * conductivity / math.log(edges[-1] / middle[-1])
    sheet = steady_state.SHEET_HEAT_CAPACITY * line.cladding.thickness.value
    sheet *= 2 * math.pi * edges[-1]
    to_air = 2 * math.pi * edges[-1] * h

    def rate(_, state, sun=0.0):
        cells, skin = state[:-1], state[-1]
        flows = np.concatenate(
            [[at_pipe * (0 - cells[0])], between * -np.diff(cells), [to_sheet * (cells[-1] - skin)]]
        )
        return np.append(-np.diff(flows) / stores, (flows[-1] - to_air * skin + sun) / sheet)

    sun = absorptance * steady_state.STRONGEST_SUN * 2 * math.pi * edges[-1]
    day = solve_ivp(rate, (0, 10 * 3600), np.zeros(61), "BDF", args=(sun,), rtol=1e-6).y[:, -1]
    needed = time_to_forget_sun(line, absorptance=absorptance, above_air=above_air)
    night = solve_ivp(rate, (0, needed / 2), day, "BDF", rtol=1e-6, atol=1e-6).y[-1, -1]
    # before the margin of two on the time
    assert 0 < night < steady_state.LACKING * above_air
    assert night > 0.01 * steady_state.LACKING * above_air


def test_an_unknown_line_forgets_nothing(bench):
    unknown = replace(bench.line, pipe_outside_diameter=None)
    assert time_to_forget_sun(unknown, absorptance=0.6, above_air=10.0) is None


@pytest.mark.parametrize(
    ("changes", "capped"),
    [
        ({"sun_elevation_deg": 30.0}, True),
        ({"sun_elevation_deg": 30.0, "sun_on_pipe": False}, False),
        ({"sun_elevation_deg": -10.0}, False),
        ({}, False),
    ],
)
def test_a_sun_nobody_spoke_of_limits_the_verdict(bench, hall_with, changes, capped):
    found = verdict(bench, hall_with, sun_last_24h=None, **changes)
    if capped:
        assert (found.level, found.reason.key) == ("indicative", "indicative.sun_unknown")
    else:
        assert found.level == "quantified"


def test_a_clear_sky_on_a_riser_is_that_on_a_riser(bench, hall_with):
    conditions = hall_with(indoors=False, solar_irradiance=CLEAR, sun_elevation_deg=60.0)
    frame = bench.but(conditions=conditions).frame_draws()
    assert sun_on_run(frame, conditions, 0.0) is frame
    riser = sun_on_run(frame, conditions, 90.0).irradiance
    beam, diffuse = (float(part) for part in clear_sky(60.0))
    around = np.pi / 2 * (diffuse + 0.2 * (beam * np.sin(np.pi / 3) + diffuse))
    level = pipe_sunlight(60.0).mean
    assert riser == pytest.approx(frame.irradiance * (beam * 0.5 + around) / level, rel=1e-9)


def test_a_declared_irradiance_stays_what_it_is(bench, hall_with):
    declared = replace(CLEAR, source="declared")
    conditions = hall_with(indoors=False, solar_irradiance=declared, sun_elevation_deg=60.0)
    frame = bench.but(conditions=conditions).frame_draws()
    assert sun_on_run(frame, conditions, 90.0) is frame
