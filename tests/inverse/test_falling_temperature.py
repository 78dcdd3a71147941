"""The fluid's temperature along a line that cools by its own loss."""

import math
from dataclasses import replace

import numpy as np
import pytest

from cladwatt.quantities import Quantity

FLOW, SPECIFIC_HEAT = 0.05, 4200.0
CAPACITY = FLOW * SPECIFIC_HEAT
AIR = 293.15


def flowing(bench, start: float, **changes):
    """Slow hot water; the region lies so far down the line."""
    fields = {"flow": Quantity(FLOW), "specific_heat": Quantity(SPECIFIC_HEAT)} | changes
    return bench.but(
        line=replace(bench.line, **fields), region=replace(bench.region, start=start), count=20
    )


def inside_at(bench) -> float:
    seen = bench.observe(bench.lens(310.0)).seen
    assert np.ptp(seen.line_draws.inside_temperature) < 1e-9
    return float(seen.line_draws.inside_temperature[0])


def middle_of(bench) -> float:
    return float(np.mean(bench.observe(bench.lens(310.0)).seen.strip.station))


@pytest.mark.parametrize("start", [20.0, 200.0, 800.0])
def test_the_fall_is_exponential_towards_the_air(bench, start):
    bench = flowing(bench, start)
    x = middle_of(bench)
    assert x == pytest.approx(start + 0.6, abs=0.2)
    drop = 453.15 - AIR
    per_kelvin = float(bench.sound.heat_loss) / drop
    expected = AIR + drop * math.exp(-per_kelvin * x / CAPACITY)
    assert inside_at(bench) == pytest.approx(expected, abs=1e-6)


def test_a_stepwise_march_down_the_line_agrees(bench):
    """Loss solved anew every 5 m: it falls a little faster than in proportion to the drop."""
    bench = flowing(bench, 200.0)
    x = middle_of(bench)
    fluid = 453.15
    step = x / 40
    for _ in range(40):
        here = bench.but(line=replace(bench.line, inside_temperature=Quantity(fluid)))
        fluid -= step * float(here.sound.heat_loss) / CAPACITY
    assert inside_at(bench) == pytest.approx(fluid, abs=0.02 * (453.15 - fluid))
    assert 453.15 - fluid > 40


def test_a_chilled_line_warms_towards_the_air(chilled):
    bench = flowing(chilled, 300.0)
    drop = 279.15 - AIR
    per_kelvin = float(bench.sound.heat_loss) / drop
    expected = AIR + drop * math.exp(-per_kelvin * middle_of(bench) / CAPACITY)
    assert inside_at(bench) == pytest.approx(expected, abs=1e-6)
    assert 279.15 < inside_at(bench) < AIR


def test_only_what_is_declared_falls(bench):
    for unknown in ({"flow": None}, {"specific_heat": None}):
        assert inside_at(flowing(bench, 400.0, **unknown)) == 453.15
    assert inside_at(flowing(bench, 400.0, flow=Quantity(1e6))) == pytest.approx(453.15, abs=1e-3)


def test_a_drawn_line_against_the_numbering_is_taken_by_its_stations(bench):
    down = flowing(bench, 300.0)
    length = 2 * (middle_of(down) - 300.0)
    back = down.but(region=replace(down.region, start=300.0 + length, direction=-1))
    assert inside_at(back) == pytest.approx(inside_at(down), abs=1e-3)


def test_a_cooled_line_is_found_sound_and_would_not_have_been(bench):
    """The lagging's resistance comes back from an image far down the line."""
    bench = flowing(bench, 400.0)
    fluid = inside_at(bench)
    here = bench.but(line=replace(bench.line, inside_temperature=Quantity(fluid)))
    lens = bench.lens(float(here.sound.surface_temperature))
    assert bench.alone(lens).resistance_ratio.median == pytest.approx(1 / 1.15, rel=0.01)
    unaware = bench.but(line=replace(bench.line, flow=None)).alone(lens)
    assert unaware.resistance_ratio.median > 1.2 / 1.15


def test_a_line_at_the_airs_temperature_stays_there(bench, hall_with):
    line = replace(bench.line, inside_temperature=Quantity(AIR))
    even = bench.but(line=line, conditions=hall_with(surroundings_temperature=Quantity(AIR)))
    assert inside_at(flowing(even, 100.0)) == pytest.approx(AIR, abs=1e-9)


@pytest.mark.parametrize("off", [0.0, 1e-6, -1e-6])
def test_near_the_airs_temperature_surroundings_alone_drive_it(bench, off):
    """Surroundings 2 K above the air: it warms by what the line takes up, no more."""
    line = replace(bench.line, inside_temperature=Quantity(AIR + off))
    bench = flowing(bench.but(line=line), 100.0)
    taken_up = -float(bench.sound.heat_loss)
    assert taken_up > 0
    warmer = taken_up * middle_of(bench) / CAPACITY
    if off < 0:  # the loss is put down to the air, which is where it ends
        assert AIR + off <= inside_at(bench) <= AIR
    else:
        assert inside_at(bench) == pytest.approx(AIR + off + warmer, abs=1e-9)
