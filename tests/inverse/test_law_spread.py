"""The spread of published laws at a region's own size, temperature, slope and wind."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.flags import StationFlag
from cladwatt.inverse.law_spread import with_own_spread
from cladwatt.inverse.station_table import _flags
from cladwatt.physics.convection_spread import correlation_spread
from cladwatt.physics.surface_balance import SurfaceExchange
from cladwatt.quantities import Quantity

AIR = 293.15


def spread_of(bench, surface=330.0, diameter=None):
    """Of the logarithm of the factor over that of its deviates, and the draws."""
    run = bench.but(law_exact=False, count=1000)
    frame, line = run.frame_draws(), run.line_draws()
    size = line.lagged_diameter if diameter is None else np.full(1000, diameter)
    own = with_own_spread(frame, line, size, np.full(1000, surface))
    return float(np.log(own.convection_factor).std() / deviates(frame).std()), own, frame


def deviates(frame):
    return np.log(frame.convection_factor) / frame.law_sigma


@pytest.mark.parametrize("wind", [0.0, 0.4, 6.0])
@pytest.mark.parametrize("slope", [0.0, 90.0])
@pytest.mark.parametrize(("surface", "diameter"), [(295.15, 0.06), (340.0, 0.6), (278.15, 0.2)])
def test_it_is_that_of_the_published_laws_right_there(
    bench, hall_with, wind, slope, surface, diameter
):
    run = bench.but(
        conditions=hall_with(wind_speed=Quantity(wind)),
        line=replace(bench.line, inclination_deg=slope),
    )
    exchange = SurfaceExchange(AIR, 295.15, wind, diameter, 0.9, inclination_deg=slope)
    expected = float(correlation_spread(surface, exchange))
    found, own, frame = spread_of(run, surface, diameter)
    assert found == pytest.approx(expected, rel=0.02)
    # one draw for all: what is off here is off there
    assert np.corrcoef(np.log(own.convection_factor), np.log(frame.convection_factor))[
        0, 1
    ] == pytest.approx(1.0)


def test_a_slim_riser_is_less_sure_than_the_frame_says(bench, hall_with):
    bench = bench.but(conditions=hall_with(wind_speed=Quantity(0.0)))
    riser = bench.but(line=replace(bench.line, inclination_deg=90.0))
    assert spread_of(riser, 298.15, 0.05)[0] > 1.3 * spread_of(bench, 298.15, 0.2)[0]


def test_a_wind_on_either_side_of_still_air_widens_draw_by_draw(bench, hall_with):
    wind = Quantity(1.0, 1.0, lower=0.0, upper=5.0)
    _, own, frame = spread_of(bench.but(conditions=hall_with(wind_speed=wind)))
    sigma = np.log(own.convection_factor) / deviates(frame)
    calm, windy = own.wind_speed < 0.1, own.wind_speed > 3.0
    assert np.median(sigma[calm]) < 0.14
    assert np.median(sigma[windy]) == pytest.approx(0.19, abs=0.005)


def test_without_wind_or_radiance_nothing_is_changed(bench, hall_with):
    unknown = bench.but(conditions=hall_with(wind_speed=None))
    _, own, frame = spread_of(unknown)
    assert own is frame
    _, own, frame = spread_of(bench, np.nan)
    assert own is frame


def test_a_region_carries_its_own(bench):
    line = replace(bench.line, inclination_deg=90.0)
    run = bench.but(law_exact=False, line=line, count=400)
    seen = run.observe(run.lens(330.0)).seen
    exchange = SurfaceExchange(
        AIR, 295.15, 0.2, bench.line.lagged_diameter, 0.9, inclination_deg=90.0
    )
    expected = float(correlation_spread(330.0, exchange))
    found = float(np.log(seen.frame.convection_factor).std() / deviates(run.frame_draws()).std())
    assert found == pytest.approx(expected, rel=0.02)
    assert abs(found / seen.frame.law_sigma - 1) > 0.02


@pytest.mark.parametrize(
    ("conditions", "flagged"),
    [
        ({"wind_speed": Quantity(8.0), "wind_angle_deg": Quantity(0.0)}, True),
        ({"wind_speed": Quantity(8.0), "wind_angle_deg": Quantity(90.0)}, False),
    ],
)
def test_stations_in_a_wind_along_are_flagged(bench, hall_with, conditions, flagged):
    run = bench.but(conditions=hall_with(**conditions))
    flags = run.alone(run.lens(330.0)).stations.flags
    assert bool((flags & StationFlag.OUTSIDE_VALIDITY).any()) == flagged


def test_the_flag_knows_the_humidity(bench, hall_with):
    # Whitaker's Re of 1e5 is reached by 5 % less wind in saturated air of 80 °C
    fields = {"air_temperature": Quantity(353.15), "surroundings_temperature": Quantity(353.15)}

    def first(humidity):
        for speed in np.arange(6.0, 12.0, 0.05):
            run = bench.but(
                conditions=hall_with(wind_speed=Quantity(float(speed)), relative_humidity=humidity,
                                     **fields),
                count=2,
            )  # fmt: skip
            frame = replace(run.frame_draws(), convection_model="kuehn_goldstein_whitaker")
            seen = run.observe(run.lens(390.0), frame=frame)
            if (_flags(seen.seen) & StationFlag.OUTSIDE_VALIDITY).any():
                return speed
        return np.inf

    assert first(Quantity(1.0)) < first(None) - 0.2
