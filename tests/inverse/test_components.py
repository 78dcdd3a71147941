"""Components: the body's temperature, the length it counts as, and what both come to."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.bare import BARE_EMISSIVITY
from cladwatt.inverse.components import SHAPE_U, estimate_component
from cladwatt.physics.surface_balance import surface_heat_flux
from cladwatt.quantities import Quantity

AIR = 293.15
BODY = slice(34, 62), slice(115, 145)
"""Rows and columns of a bare body; the outline drawn round it is twice as high."""


@pytest.fixture
def outline(drawn_box):
    def draw(kind="valve", **rest):
        return drawn_box("v1", "component", 110.0, 20.0, 150.0, 76.0, kind=kind, **rest)

    return draw


@pytest.fixture
def estimated(bench):
    """What comes of a lens image; the path of air takes nothing."""
    clear = replace(bench.conditions, atmosphere_transmission=Quantity(1.0))

    def estimate(lens, region, clipped=None, **changes):
        one = bench.but(conditions=replace(clear, **changes))
        return estimate_component(
            region, image=one.seen(lens, clipped), frame=one.frame_draws(),
            line=one.line_draws(), book=one.book, tables=None,
        )  # fmt: skip

    return estimate


def bare_image(bench, temperature):
    band = bench.band
    lens = np.full((96, 280), AIR)
    eps = BARE_EMISSIVITY.value
    reflected = bench.conditions.reflected_temperature.value
    radiance = eps * band.radiance(temperature) + (1 - eps) * band.radiance(reflected)
    lens[BODY] = band.temperature(radiance)
    return lens


def test_background_inside_the_outline_does_not_cool_a_bare_body(bench, outline, estimated):
    found = estimated(bare_image(bench, 420.0), outline())
    assert found.surface_temperature.median == pytest.approx(420.0, abs=0.5)


def test_a_body_colder_than_the_air_is_read_too(bench, outline):
    lens = np.full((96, 280), AIR)
    lens[BODY] = 280.0
    cold = bench.line_draws()
    cold = replace(cold, inside_temperature=np.full(bench.count, 275.0))
    found = estimate_component(
        outline(), image=bench.seen(lens), frame=bench.frame_draws(), line=cold, book=bench.book,
        tables=None,
    )  # fmt: skip
    assert 275.0 <= found.surface_temperature.median < 280.0
    assert found.heat_loss.median < 0


def test_a_lagged_box_that_fills_its_outline_is_read_whole(bench, outline, estimated):
    lens = bench.lens(315.0)
    lens[15:80, 105:156] = 312.0
    found = estimated(lens, outline(lagged=True))
    assert found.surface_temperature.median == pytest.approx(313.4, abs=0.3)


@pytest.mark.parametrize("kind", ["valve", "flange"])
def test_the_loss_is_that_of_the_bare_pipe_it_counts_as(bench, outline, estimated, kind):
    found = estimated(bare_image(bench, 420.0), outline(kind))
    exchange = replace(bench.exchange, diameter=0.1143, total_emissivity=BARE_EMISSIVITY.value)
    per_metre = np.pi * 0.1143 * float(surface_heat_flux(420.0, exchange))
    # Fuel Efficiency Booklet 8: a valve counts as 1 m of bare pipe, a pair of flanges as half
    metres = {"valve": 1.0, "flange": 0.5}[kind]
    assert found.equivalent_length.median == pytest.approx(metres, rel=0.05)
    assert found.heat_loss.median == pytest.approx(metres * per_metre, rel=0.06)
    # no better known than the make of the component lets it be
    assert found.heat_loss.high / found.heat_loss.median > np.exp(1.96 * SHAPE_U)


def test_a_body_beyond_the_recording_range_gets_no_number(bench, outline, estimated):
    lens = bare_image(bench, 420.0)
    clipped = np.zeros(lens.shape, dtype=bool)
    clipped[BODY] = True
    found = estimated(lens, outline(), clipped)
    assert found.reason.key == "not_quantified.component_clipped"
    assert (found.surface_temperature, found.heat_loss) == (None, None)


@pytest.mark.parametrize(
    ("kind", "changes", "key"),
    [
        ("hanger", {}, "component_hanger"),
        ("pipe support", {}, "component_hanger"),
        ("strainer", {}, "component_kind_unknown"),
        ("valve", {"wind_speed": None, "indoors": False}, "component_no_size"),
    ],
)
def test_without_a_number_the_temperature_and_the_reason_remain(
    bench, outline, estimated, kind, changes, key
):
    found = estimated(bare_image(bench, 420.0), outline(kind), **changes)
    assert found.reason.key == f"not_quantified.{key}"
    assert found.surface_temperature.median == pytest.approx(420.0, abs=0.5)
    assert (found.equivalent_length, found.heat_loss, found.draws) == (None, None, {})
