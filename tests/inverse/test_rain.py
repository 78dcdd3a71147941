"""Rain: a surface that may still be wet gets no number, one that has dried an indicative one."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.rain import MAY_BE_WET, rain_left
from cladwatt.quantities import Quantity

AIR, HUMIDITY = 283.15, 0.75


@pytest.fixture
def yard(bench, hall_with):
    """The bench outdoors after rain, under an overcast sky at the air's temperature."""

    def after(*, hours=None, **changes):
        fields = {
            "indoors": False,
            "air_temperature": Quantity(AIR),
            "surroundings_temperature": Quantity(AIR),
            "reflected_temperature": Quantity(AIR),
            "wind_speed": Quantity(1.0),
            "relative_humidity": Quantity(HUMIDITY),
            "rain_last_24h": True,
            "hours_since_rain": None if hours is None else Quantity(hours, 0.25, lower=0.0),
        } | changes
        return bench.but(conditions=hall_with(**fields), count=400)

    return after


def left(bench, rise):
    return rain_left(bench.observe(bench.lens(AIR + rise)).seen)


def verdict(bench, rise):
    return bench.jointly(bench.lens(AIR + rise)).verdict


def test_drying_takes_as_long_as_the_water_needs_heat(yard):
    """At the least a film takes its heat of evaporation from all that the surface gives off."""
    bench = yard(hours=3.0, relative_humidity=Quantity(1.0))
    found = left(bench, 10.0)
    flux = bench.loss(AIR + 10.0) / (np.pi * bench.exchange.diameter)
    assert found.drying_hours > 1000 * 2e-4 * 2.47e6 / flux / 3600
    # in saturated air at 10 °C some half of the heat leaves as vapour: e_s rises by 80 Pa/K,
    # against 66 Pa/K of the psychrometer, and radiation takes a share
    assert found.drying_hours < 4 * 1000 * 2e-4 * 2.47e6 / flux / 3600


@pytest.mark.parametrize(("rise", "hours"), [(4.0, 2.0), (15.0, 0.3), (2.0, 4.0)])
def test_a_surface_that_may_be_wet_is_refused_a_number(yard, rise, hours):
    found = verdict(yard(hours=hours), rise)
    assert (found.level, found.reason.key) == ("not quantified", "not_quantified.may_be_wet")
    said = dict(found.reason.parameters)
    assert said["share"] > MAY_BE_WET
    assert said["hours"] == hours
    assert said["drying_hours"] > 0


@pytest.mark.parametrize(("rise", "hours"), [(10.0, 12.0), (30.0, 3.0)])
def test_one_that_has_dried_is_indicative(yard, rise, hours):
    found = verdict(yard(hours=hours), rise)
    assert (found.level, found.reason.key) == ("indicative", "indicative.rain")


def test_hours_unknown_refuse_what_dries_slowly(yard):
    # any hour of the last day: at 3 K above the air the film takes a good part of one
    slow = verdict(yard(), 3.0)
    assert slow.reason.key == "not_quantified.may_be_wet"
    assert "hours" not in dict(slow.reason.parameters)
    quick = verdict(yard(), 45.0)
    assert (quick.level, quick.reason.key) == ("indicative", "indicative.rain")


@pytest.mark.parametrize("rise", [8.0, 15.0, 45.0])
def test_a_declared_dry_surface_ends_the_doubt(yard, rise):
    dry = yard(surface_wet=False)
    assert left(dry, rise) is None
    assert verdict(dry, rise).reason.key == "indicative.rain"


def test_a_declared_wet_surface_is_refused_whatever_the_hours(yard):
    found = verdict(yard(hours=20.0, surface_wet=True), 30.0)
    assert found.reason.key == "not_quantified.wet_surface"


@pytest.mark.parametrize("changes", [{"indoors": True}, {"rain_last_24h": False}])
def test_no_rain_on_the_pipe_no_doubt(yard, changes):
    assert left(yard(**changes), 3.0) is None


def test_hours_alone_say_that_it_rained(yard):
    bench = yard(hours=1.0, rain_last_24h=None)
    assert verdict(bench, 3.0).reason.key == "not_quantified.may_be_wet"


def test_more_wind_and_a_thinner_film_dry_sooner(yard):
    calm = left(yard(hours=3.0), 6.0).drying_hours
    assert left(yard(hours=3.0, wind_speed=Quantity(6.0)), 6.0).drying_hours < calm
    bench = yard(hours=3.0)
    frame = bench.frame_draws()
    thin = replace(frame, water=replace(frame.water, rain_film=np.full(400, 2e-5)))
    seen = bench.observe(bench.lens(AIR + 6.0), frame=thin).seen
    assert rain_left(seen).drying_hours == pytest.approx(calm / 10, rel=1e-6)


def test_a_surface_below_the_dew_point_is_not_refused_for_rain(yard):
    cold = yard(hours=1.0, relative_humidity=Quantity(0.9))
    line = replace(cold.line, inside_temperature=Quantity(263.15))
    result = cold.but(line=line).alone(cold.lens(274.15))
    assert result.verdict.reason.key != "not_quantified.may_be_wet"


def test_a_surface_that_may_be_wet_is_no_evidence_for_its_neighbours(yard):
    wet, dried = yard(hours=1.0), yard(hours=20.0)
    assert wet.observe(wet.lens(AIR + 10.0)).evidence() is None
    assert dried.observe(dried.lens(AIR + 10.0)).evidence() is not None


def test_a_surface_most_likely_wet_dries_in_patches_that_are_no_damage(yard):
    lens = yard().lens(AIR + 10.0)
    lens[:, 100:150] += 3.0
    assert yard(hours=20.0).alone(lens).stretches
    assert not yard(hours=0.2).alone(lens).stretches


def test_without_a_heat_balance_nothing_is_said(yard):
    bench = yard(wind_speed=None)
    assert rain_left(bench.but(law_exact=True).observe(bench.lens(AIR + 3.0)).seen) is None


def test_where_the_humidity_is_unknown_there_is_still_an_answer(yard):
    found = left(yard(hours=1.0, relative_humidity=None), 5.0)
    assert 0.5 < found.share <= 1.0
