"""An air gap among the layers of lagging: the reader's curve, taken like any other."""

import math
from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.line_draws import layer_draws
from cladwatt.inverse.sound import sound_draws
from cladwatt.physics.air_gap import air_gap_conductance
from cladwatt.quantities import Quantity
from cladwatt.survey.model import ConductivityCurve, Layer

PIPE, GAP = 0.1143, 0.010
FACES = {"inner_emissivity": 0.8, "outer_emissivity": 0.2}


def air_gap() -> Layer:
    mean = np.linspace(260.0, 600.0, 18)
    passed = air_gap_conductance(
        PIPE, PIPE + 2 * GAP, inner_temperature=mean + 10, outer_temperature=mean - 10, **FACES
    )
    curve = passed * math.log((PIPE + 2 * GAP) / PIPE) / (2 * math.pi)
    return Layer(
        "air gap", Quantity(GAP), ConductivityCurve(tuple(mean), tuple(curve)), Quantity(1.0),
        kind="air_gap",
        inner_emissivity=Quantity(0.8), outer_emissivity=Quantity(0.2),
    )  # fmt: skip


def test_a_gap_under_wool_takes_its_part_of_the_drop(bench):
    (wool,) = bench.line.layers
    bench = bench.but(line=replace(bench.line, layers=(air_gap(), wool)), count=20)
    sound = sound_draws(bench.line_draws(), bench.frame_draws())
    loss = sound.specified_loss[0]
    inner, outer = PIPE + 2 * GAP, PIPE + 2 * GAP + 0.12
    of_wool = math.log(outer / inner) / (2 * math.pi * 0.045)
    # the gap is crossed between the pipe and what the wool leaves of the drop
    of_gap = sound.specified_resistance[0] - of_wool
    face = 453.15 - loss * of_gap
    expected = 1 / air_gap_conductance(
        PIPE, inner, inner_temperature=453.15, outer_temperature=face, **FACES
    )
    assert 3 < 453.15 - face < 60
    assert of_gap == pytest.approx(float(expected), rel=0.03)


def test_a_gap_without_a_curve_is_unknown_lagging(bench):
    unknown = replace(air_gap(), conductivity=None)
    assert layer_draws(bench.book, replace(bench.line, layers=(unknown,))) is None
