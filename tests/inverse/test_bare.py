"""A stretch where the pipe itself is seen, its image by the equation read forwards."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.bare import BareDraws, with_bare
from cladwatt.inverse.stretches import Run
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.physics.lagged_pipe import surface_heat_flux
from cladwatt.quantities import Quantity

BARE = slice(110, 170)
AXIS, HALF = 48.0, 24.0
STEEL = 0.85


def bare_pipe_image(bench, *, wall: float, all_round: bool = True) -> np.ndarray:
    """Sound lagging with a gap in it: a thinner steel pipe, background on both sides of it.

    Where not all round, lagging goes on above and below the opening.
    """
    line, conditions, band = bench.line, bench.conditions, bench.band
    lens = bench.lens(float(bench.sound.surface_temperature))
    air = band.radiance(conditions.air_temperature.value)
    half = HALF * line.pipe_outside_diameter.value / line.lagged_diameter
    across = (np.arange(lens.shape[0]) - AXIS) / half
    towards = directional_emissivity(STEEL, np.arcsin(np.clip(across, -1, 1)), False)
    own = towards * band.radiance(wall) + (1 - towards) * band.radiance(
        conditions.reflected_temperature.value
    )
    seen = band.temperature(0.98 * own + 0.02 * air)
    background = float(band.temperature(air))
    on_pipe = np.abs(across) <= 1
    if all_round:
        lens[:, BARE] = np.where(on_pipe, seen, background)[:, None]
    else:
        lens[on_pipe, BARE] = seen[on_pipe, None]
    return lens


def bare_loss(bench, wall: float) -> float:
    """Loss of a metre of bare pipe. [W/m]"""
    diameter = bench.line.pipe_outside_diameter.value
    exchange = replace(bench.exchange, diameter=diameter, total_emissivity=STEEL)
    return float(np.pi * diameter * surface_heat_flux(wall, exchange))


@pytest.fixture
def wide(bench):
    return bench.but(count=2000)


def test_a_bare_stretch_loses_what_a_bare_pipe_does(wide):
    wall = wide.line.inside_temperature.value - 2.0
    (stretch,) = wide.alone(bare_pipe_image(wide, wall=wall)).stretches
    truth = bare_loss(wide, wall)
    assert stretch.probability > 0.99
    assert stretch.heat_loss.low < truth < stretch.heat_loss.high
    assert stretch.heat_loss.median == pytest.approx(truth, rel=0.10)


def test_bright_cladding_elsewhere_does_not_inflate_it(wide, paint):
    shiny = replace(wide.line, cladding=paint(0.3, total_emissivity=Quantity(0.3)))
    wide = wide.but(line=shiny)
    wall = wide.line.inside_temperature.value - 2.0
    (stretch,) = wide.alone(bare_pipe_image(wide, wall=wall)).stretches
    truth = bare_loss(wide, wall)
    # at the lens shiny lagging looks like background: whether it goes on beside the pipe cannot
    # be told, and the interval must say so
    assert stretch.heat_loss.low < 0.7 * truth
    assert truth < stretch.heat_loss.high
    assert 0.7 * truth < stretch.heat_loss.median < 1.1 * truth


def test_where_lagging_goes_on_beside_it_less_is_lost(wide):
    wall = wide.line.inside_temperature.value - 2.0
    (whole,) = wide.alone(bare_pipe_image(wide, wall=wall)).stretches
    (sector,) = wide.alone(bare_pipe_image(wide, wall=wall, all_round=False)).stretches
    # 15 to 60 % of the circumference open, the rest sound
    sound, bare = float(wide.sound.heat_loss), bare_loss(wide, wall)
    assert sound + 0.15 * (bare - sound) < sector.heat_loss.median < sound + 0.6 * (bare - sound)
    assert sector.heat_loss.median < 0.6 * whole.heat_loss.median


def test_a_warm_stretch_far_from_the_fluid_is_cladding(wide):
    lens = wide.lens(float(wide.sound.surface_temperature))
    wet = wide.lens(325.0)
    lens[:, BARE] = wet[:, BARE]
    (stretch,) = wide.alone(lens).stretches
    # as hot cladding all round, the hidden side uncertain
    assert stretch.heat_loss.median == pytest.approx(wide.loss(325.0), rel=0.05)


def test_an_unknown_fluid_is_not_guessed_from_the_pipe(wide, keys):
    wall = wide.line.inside_temperature.value - 2.0
    unknown = wide.but(line=replace(wide.line, inside_temperature=None))
    result = unknown.alone(bare_pipe_image(wide, wall=wall))
    (stretch,) = result.stretches
    assert stretch.probability > 0.99
    # read as hot cladding, which misses about half of it; the missing temperature is named
    assert stretch.heat_loss.median < 0.7 * bare_loss(wide, wall)
    assert "missing.inside_temperature" in keys(result.missing)


def test_only_draws_that_see_the_pipe_change_and_only_within_the_run():
    flux = np.full((3, 10), 100.0)
    run = Run(2, 4, 50.0, 30.0, 1.0, 1.0, 1.0)
    bare = BareDraws(run, 0.5, np.array([700.0, np.nan, 300.0]))
    found = with_bare(flux, bare)
    assert found[:, 2:5] == pytest.approx(np.array([[700.0] * 3, [100.0] * 3, [300.0] * 3]))
    assert np.all(np.delete(found, [2, 3, 4], axis=1) == 100)
    assert np.all(flux == 100)
