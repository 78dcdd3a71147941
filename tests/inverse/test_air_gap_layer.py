"""An air gap among the layers of lagging."""

import math
from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.line_draws import layer_draws
from cladwatt.inverse.sound import sound_draws
from cladwatt.physics.air_gap import air_gap_conductance
from cladwatt.quantities import Quantity
from cladwatt.survey.model import Layer

PIPE, GAP = 0.1143, 0.010


def air_gap(inner_emissivity: float | None = 0.8, outer_emissivity: float | None = 0.2) -> Layer:
    return Layer(
        "air gap", Quantity(GAP), None, Quantity(1.0), kind="air_gap",
        inner_emissivity=None if inner_emissivity is None else Quantity(inner_emissivity),
        outer_emissivity=None if outer_emissivity is None else Quantity(outer_emissivity),
    )  # fmt: skip


def gap_of(bench, layer: Layer):
    (drawn,) = layer_draws(bench.book, replace(bench.line, layers=(layer,)))
    return drawn


@pytest.mark.parametrize("mean", [260.0, 300.0, 400.0, 550.0])
@pytest.mark.parametrize("drop", [5.0, 20.0, 40.0])
def test_resistance_at_a_mean_temperature_is_the_gaps(bench, mean, drop):
    layer = gap_of(bench, air_gap())
    conductivity = layer.conductivity.mean(mean + drop / 2, mean - drop / 2)
    found = math.log((PIPE + 2 * GAP) / PIPE) / (2 * math.pi * float(conductivity))
    # the drop for which its convection is tabulated
    expected = 1 / air_gap_conductance(
        PIPE,
        PIPE + 2 * GAP,
        inner_temperature=mean + 10,
        outer_temperature=mean - 10,
        inner_emissivity=0.8,
        outer_emissivity=0.2,
    )
    assert found == pytest.approx(float(expected), rel=0.01)


def test_conductivity_rises_with_temperature_by_radiation(bench):
    black, bright = (gap_of(bench, air_gap(one, one)).conductivity for one in (1.0, 0.05))
    temperatures = np.array([273.15, 373.15, 473.15])
    difference = black.conductivity(temperatures) - bright.conductivity(temperatures)
    # four sigma T^3 over the gap's shape, less the twentieth that the bright faces pass
    assert difference[2] / difference[0] == pytest.approx((473.15 / 273.15) ** 3, rel=0.02)
    inner, outer = PIPE / 2, PIPE / 2 + GAP
    radiated = inner * math.log(outer / inner) * 4 * 5.670374e-8 * 373.15**3
    passed = 1 / (1 / 0.05 + (1 / 0.05 - 1) * inner / outer)
    assert difference[1] == pytest.approx((1 - passed) * radiated, rel=0.01)
    # still air conducts at least
    assert bright.conductivity(273.15) > 0.024


def test_a_gap_under_wool_takes_its_part_of_the_drop(bench):
    (wool,) = bench.line.layers
    line = replace(bench.line, layers=(air_gap(), wool))
    bench = bench.but(line=line, count=20)
    sound = sound_draws(bench.line_draws(), bench.frame_draws())
    loss = sound.specified_loss[0]
    inner, outer = PIPE + 2 * GAP, PIPE + 2 * GAP + 0.12
    of_wool = math.log(outer / inner) / (2 * math.pi * 0.045)
    # the gap is crossed between the pipe and what the wool leaves of the drop
    of_gap = sound.specified_resistance[0] - of_wool
    face = 453.15 - loss * of_gap
    expected = 1 / air_gap_conductance(
        PIPE, inner, inner_temperature=453.15, outer_temperature=face,
        inner_emissivity=0.8, outer_emissivity=0.2,
    )  # fmt: skip
    assert 3 < 453.15 - face < 60
    assert of_gap == pytest.approx(float(expected), rel=0.03)


def test_a_second_gap_is_as_wide_as_where_it_lies(bench):
    (wool,) = bench.line.layers
    gaps = layer_draws(bench.book, replace(bench.line, layers=(wool, air_gap())))
    conductivity = float(gaps[1].conductivity.conductivity(300.0))
    inner = PIPE + 0.12
    expected = air_gap_conductance(
        inner, inner + 2 * GAP, inner_temperature=310.0, outer_temperature=290.0,
        inner_emissivity=0.8, outer_emissivity=0.2,
    )  # fmt: skip
    found = 2 * math.pi * conductivity / math.log((inner + 2 * GAP) / inner)
    assert found == pytest.approx(float(expected), rel=0.01)


@pytest.mark.parametrize("faces", [(None, 0.2), (0.8, None)])
def test_a_gap_of_unknown_faces_is_unknown_lagging(bench, faces):
    assert layer_draws(bench.book, replace(bench.line, layers=(air_gap(*faces),))) is None


def test_a_gap_round_a_pipe_of_unknown_size_is_unknown_lagging(bench):
    line = replace(bench.line, pipe_outside_diameter=None, layers=(air_gap(),))
    assert layer_draws(bench.book, line) is None
