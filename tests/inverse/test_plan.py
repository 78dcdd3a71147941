"""What is promised of a frame not yet taken, against the assessment of one that was."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.plan import Viewpoint, plan_line
from cladwatt.materials.load import shipped_tables
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement

DEFAULTS = shipped_tables().defaults


@pytest.fixture
def real(bench, hall_with, line_with, paint):
    """The bench's pipe with what nobody knows exactly."""
    conditions = hall_with(
        air_temperature=Quantity(293.15, 1.0),
        surroundings_temperature=Quantity(295.15, 1.5),
        reflected_temperature=Quantity(296.15, 1.5),
        wind_speed=Quantity(0.2, 0.1, lower=0.0),
    )
    camera = replace(bench.camera, accuracy=AccuracyStatement(2.0, 2.0))
    line = line_with(cladding=paint(0.92, 0.03), inside_temperature=Quantity(453.15, 2.0))
    return bench.but(conditions=conditions, camera=camera, line=line, law_exact=False, count=1000)


def planned(one, **changes):
    arguments = {"defaults": DEFAULTS, "view": Viewpoint(640, 3.0)} | changes
    conditions = arguments.pop("conditions", one.conditions)
    line = arguments.pop("line", one.line)
    return plan_line(line, conditions, one.camera, one.site, DrawBook(1, 1000), **arguments)


def test_width_and_loss_are_those_of_a_recorded_frame(real):
    plan = planned(real)
    image = real.lens(real.sound.surface_temperature)
    found = real.but(noise=0.06).jointly(image)
    assert plan.sound_loss.median == pytest.approx(found.sound_loss.median, rel=0.03)
    assert plan.heat_loss.median == pytest.approx(found.heat_loss.median, rel=0.05)
    assert plan.heat_loss.relative_width == pytest.approx(found.heat_loss.relative_width, rel=0.2)
    assert plan.verdict.level == found.verdict.level


def test_the_frame_is_as_optics_say(real):
    # pixels of a thing at a distance: focal length in pixels times its size over the distance
    plan = planned(real)
    focal = 320 / np.tan(np.radians(15))
    assert plan.width == pytest.approx(focal * real.line.lagged_diameter / 3.0, rel=0.02)
    # what is drawn along its middle is the near surface
    near = 3.0 - real.line.lagged_diameter / 2
    assert plan.strip_length == pytest.approx(0.9 * 640 * near / focal, rel=0.005)


def test_lengths_asked_for(real):
    plan = planned(real)
    lengths = [one.length for one in plan.smallest]
    assert lengths == pytest.approx([real.line.lagged_diameter, 0.2, 1.0], rel=0.01)
    for one in plan.smallest[:2]:
        assert 0.05 < one.rise < 3
        assert one.loss == pytest.approx(one.rise * plan.sound_loss.median, rel=1e-6)


def test_bright_metal_shows_less_than_paint(real, line_with, paint):
    total = Quantity(0.12, 0.03, lower=0.02, upper=0.4)
    cladding = paint(0.15, 0.03, total_emissivity=total, is_metal=True)
    bright = line_with(cladding=cladding, inside_temperature=Quantity(453.15, 2.0))
    assert planned(real, line=bright).smallest[0].rise > 2 * planned(real).smallest[0].rise


def test_a_vague_air_temperature_asks_for_a_thermometer(real):
    vague = replace(real.conditions, air_temperature=Quantity(293.15, 4.0))
    keys = [one.key for one in planned(real, conditions=vague).bring]
    assert keys[0] == "advice.air_temperature"


@pytest.mark.parametrize("name", ["air_temperature", "wind_speed"])
def test_what_is_missing_is_named(real, name):
    plan = planned(real, conditions=replace(real.conditions, **{name: None}))
    assert [one.key for one in plan.missing] == [f"missing.{name.removesuffix('_speed')}"]
    assert plan.verdict is None


def test_a_pipe_too_far_to_be_seen_is_told_to_go_closer(real):
    plan = planned(real, view=Viewpoint(640, 140.0))
    assert plan.verdict.level == "not quantified"
    assert plan.verdict.advice.key == "advice.closer_frame"
