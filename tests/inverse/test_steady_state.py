"""The settling time against the slab's closed form, and what is unknown."""

import math
from dataclasses import replace

import pytest

from cladwatt.inverse.steady_state import is_settled, settling_time
from cladwatt.quantities import Quantity


def thin_slab(line, *, conductivity: float, capacity: float):
    """A line so wide that its lagging is a plane slab, without a sheet."""
    (layer,) = line.layers
    curve = replace(
        layer.conductivity, conductivity=(conductivity,) * 2, temperature=(250.0, 600.0)
    )
    slab = replace(
        layer, conductivity=curve, density=Quantity(capacity / 1000), specific_heat=Quantity(1000.0)
    )
    cladding = replace(line.cladding, thickness=Quantity(0.0))
    return replace(line, pipe_outside_diameter=Quantity(50.0), layers=(slab,), cladding=cladding)


def test_a_wide_line_settles_like_a_slab_cooled_at_its_face(bench):
    k, capacity = 0.045, 1e5
    line = thin_slab(bench.line, conductivity=k, capacity=capacity)
    thickness = line.layers[0].thickness.value
    biot = 8.0 * thickness / k
    # fixed inside, convection outside: mu cot(mu) = -Bi (Carslaw and Jaeger, section 3.11)
    low, high = math.pi / 2, math.pi
    for _ in range(80):
        mu = (low + high) / 2
        if mu / math.tan(mu) + biot > 0:
            low = mu
        else:
            high = mu
    time_constant = thickness**2 / (k / capacity) / mu**2
    # amplitude of the slowest mode is above 1: at least ln(1 / 0.05) time constants are needed
    found = settling_time(line)
    assert math.log(20) * time_constant < found < 1.5 * math.log(20) * time_constant


def test_heavier_lagging_takes_longer(bench):
    light = thin_slab(bench.line, conductivity=0.045, capacity=1e5)
    heavy = thin_slab(bench.line, conductivity=0.045, capacity=3e5)
    assert settling_time(heavy) == pytest.approx(3 * settling_time(light), rel=1e-6)


def test_nothing_declared_or_known_is_no_reason_to_doubt(bench):
    assert is_settled(replace(bench.line, hours_at_temperature=None))
    unknown = replace(bench.line, pipe_outside_diameter=None, hours_at_temperature=Quantity(0.1))
    assert settling_time(unknown) is None
    assert is_settled(unknown)
