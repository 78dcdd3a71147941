"""Draws of frames and lines: who shares what, what a default follows, what unknown leaves."""

import math

import numpy as np
import pytest

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.frame_draws import draw_frame, mirrored
from cladwatt.inverse.line_draws import draw_line, layer_draws
from cladwatt.physics.constants import STANDARD_PRESSURE
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera, Conditions, Site, Window
from cladwatt.survey.region import Region

BOOK = DrawBook(4, 4000)
TOLERANCE = 4 / math.sqrt(4000)


def frame_of(conditions: Conditions, frame_id: str = "f1", **rest):
    arguments = {"camera": Camera(), "site": Site()} | rest
    frame = draw_frame(BOOK, frame_id, conditions, **arguments)
    assert frame is not None
    return frame


def correlation(one, two) -> float:
    return float(np.corrcoef(one, two)[0, 1])


def air(u: float = 1.0) -> Quantity:
    return Quantity(293.15, u)


def test_no_air_temperature_no_frame(hall_with):
    conditions = hall_with(air_temperature=None)
    assert draw_frame(BOOK, "f1", conditions, Camera(), Site()) is None


def test_exact_conditions_give_their_values(hall_with):
    frame = frame_of(hall_with())
    assert np.ptp(frame.air_temperature) == 0
    assert frame.surroundings_temperature == pytest.approx(295.15)
    assert frame.reflected_temperature == pytest.approx(296.15)
    assert frame.transmission == pytest.approx(0.98)
    assert frame.wind_speed == pytest.approx(0.2)
    assert frame.pressure == pytest.approx(STANDARD_PRESSURE)
    assert np.all(frame.irradiance == 0)
    assert np.all(frame.window_transmission == 1)
    assert frame.count == 4000


def test_unknown_wind_is_none(hall_with):
    assert frame_of(hall_with(wind_speed=None)).wind_speed is None


@pytest.mark.parametrize(
    "name", ["air_temperature", "reflected_temperature", "surroundings_temperature"]
)
def test_conditions_belong_to_their_frame(hall_with, name):
    conditions = hall_with(**{name: Quantity(295.0, 1.5)})
    same = getattr(frame_of(conditions), name), getattr(frame_of(conditions), name)
    assert np.array_equal(*same)
    other = getattr(frame_of(conditions, "f2"), name)
    assert abs(correlation(same[0], other)) < TOLERANCE
    assert same[0].std() == pytest.approx(1.5, rel=0.02)


@pytest.mark.parametrize(("name", "share"), [("calibration", 1 / 2), ("convection_factor", 2 / 3)])
def test_camera_and_convection_law_are_partly_shared_by_all_frames(hall_with, name, share):
    one = getattr(frame_of(hall_with()), name)
    two = getattr(frame_of(hall_with(), "f2"), name)
    assert correlation(one, two) == pytest.approx(share, abs=0.06)


def test_a_limit_of_error_is_rectangular(hall_with):
    calibration = frame_of(hall_with()).calibration
    assert np.abs(calibration).max() <= 1
    assert calibration.std() == pytest.approx(1 / math.sqrt(3), rel=0.03)
    assert np.mean(np.abs(calibration) < 0.5) == pytest.approx(0.5, abs=0.03)


def test_a_coverage_factor_is_taken_as_stated(hall_with):
    camera = Camera(accuracy=AccuracyStatement(2.0, 2.0, coverage_factor=2.0))
    assert frame_of(hall_with(), camera=camera).calibration.std() == pytest.approx(0.5, rel=0.02)


def test_accuracy_is_the_larger_of_limit_and_percentage_of_the_reading(hall_with):
    frame = frame_of(hall_with())
    offset = frame.calibration_offset(np.array([273.15 + 30, 273.15 + 300, 273.15 - 150]))
    limits = np.abs(offset).max(axis=0) / np.abs(frame.calibration).max()
    assert limits == pytest.approx([2.0, 6.0, 3.0])


def test_a_default_that_follows_the_air_keeps_its_draws(hall_with):
    following = Quantity(293.15, 0.5, source="as the air", confidence="low")
    frame = frame_of(
        hall_with(
            air_temperature=air(),
            surroundings_temperature=following,
            reflected_temperature=following,
        )
    )
    for values in (frame.surroundings_temperature, frame.reflected_temperature):
        own = values - frame.air_temperature
        assert own.std() == pytest.approx(0.5, rel=0.02)
        assert abs(correlation(own, frame.air_temperature)) < TOLERANCE


def test_a_reflected_default_follows_the_declared_surroundings(hall_with):
    frame = frame_of(
        hall_with(
            surroundings_temperature=Quantity(298.15, 1.5),
            reflected_temperature=Quantity(298.15, 2.5, source="as the declared surroundings"),
        )
    )
    own = frame.reflected_temperature - frame.surroundings_temperature
    assert own.std() == pytest.approx(2.0, rel=0.02)  # 2.5^2 = 1.5^2 + 2^2
    assert frame.reflected_temperature.std() == pytest.approx(2.5, rel=0.03)


def test_sky_is_mixed_in_radiance_by_its_view_factor():
    conditions = Conditions(
        air_temperature=Quantity(283.15),
        sky_band_temperature=Quantity(233.15),
        sky_total_temperature=Quantity(258.15),
        sky_view_factor=Quantity(0.5),
        wind_speed=Quantity(2.0),
        indoors=False,
    )
    frame = frame_of(conditions)
    # half the sky, half at air temperature: fourth powers for the heat balance
    fourth = (0.5 * 258.15**4 + 0.5 * 283.15**4) ** 0.25
    assert frame.surroundings_temperature == pytest.approx(fourth, abs=0.01)
    band = frame.band
    half = 0.5 * band.radiance(233.15) + 0.5 * band.radiance(283.15)
    assert frame.reflected_temperature == pytest.approx(float(band.temperature(half)), abs=0.01)
    # two skies, two results
    assert frame.reflected_temperature[0] < frame.surroundings_temperature[0] - 3


def test_air_stands_in_where_no_surroundings_are_declared():
    frame = frame_of(Conditions(air_temperature=air(), indoors=True))
    assert np.array_equal(frame.surroundings_temperature, frame.air_temperature)
    assert np.array_equal(frame.reflected_temperature, frame.air_temperature)


def test_a_longer_damper_path_transmits_less(hall_with):
    def transmission(distance: float, humidity: float) -> float:
        conditions = hall_with(
            atmosphere_transmission=None,
            distance=Quantity(distance),
            relative_humidity=Quantity(humidity),
        )
        return float(np.median(frame_of(conditions).transmission))

    assert 1 > transmission(2, 0.5) > transmission(20, 0.5) > transmission(20, 0.9) > 0.5


def test_distance_by_the_image_narrows_the_air_path(hall_with):
    conditions = hall_with(atmosphere_transmission=None)
    known = frame_of(conditions, distance=3.0).transmission
    unknown = frame_of(conditions).transmission
    assert known.std() < unknown.std()
    assert known.max() <= 1


def test_the_law_is_less_sure_across_flow(hall_with):
    def sigma(speed: float) -> float:
        frame = frame_of(hall_with(wind_speed=Quantity(speed)))
        return float(np.log(frame.convection_factor).std())

    # between still air (10-20 %) and across flow (19 %)
    assert 0.09 < sigma(0.0) < sigma(0.5) < sigma(5.0) < 0.20
    assert np.median(frame_of(hall_with()).convection_factor) == pytest.approx(1.0, abs=0.01)


def test_a_window_is_drawn_and_takes_the_air_temperature_without_its_own(hall_with):
    window = Window(Quantity(0.6, 0.02, lower=0.0, upper=1.0), Quantity(0.1))
    frame = frame_of(hall_with(window=window))
    assert frame.window_transmission.mean() == pytest.approx(0.6, abs=0.002)
    assert frame.window_transmission.std() == pytest.approx(0.02, rel=0.03)
    assert np.all(frame.window_reflectance == 0.1)
    assert np.array_equal(frame.window_temperature, frame.air_temperature)
    warm = Window(Quantity(0.6), Quantity(0.1), Quantity(303.15))
    assert np.all(frame_of(hall_with(window=warm)).window_temperature == 303.15)


@pytest.mark.parametrize("indoors", [True, False])
def test_a_region_mirrors_its_own_part_metal_more_than_paint(hall_with, indoors):
    frame = frame_of(hall_with())

    def own(region: str, is_metal: bool):
        changed = mirrored(frame, BOOK, region, is_metal=is_metal, indoors=indoors)
        return changed.reflected_temperature - frame.reflected_temperature

    assert own("a", True).std() > 2 * own("a", False).std() > 0
    assert abs(correlation(own("a", True), own("b", True))) < TOLERANCE


def test_outdoors_mirrors_more_than_indoors(hall_with):
    frame = frame_of(hall_with())
    spread = [
        mirrored(frame, BOOK, "a", is_metal=True, indoors=indoors).reflected_temperature.std()
        for indoors in (True, False)
    ]
    assert spread[1] > 3 * spread[0]


def test_a_line_is_drawn_once_for_all_its_regions(line_with, drawn_pipe, paint):
    line = line_with(
        inside_temperature=Quantity(453.15, 3.0),
        installation_factor=Quantity(1.15, 0.08, lower=1.0),
        cladding=paint(0.92, 0.02),
    )
    one = draw_line(BOOK, line, drawn_pipe())
    two = draw_line(BOOK, line, drawn_pipe(centreline=((0, 0), (50, 50))))
    for name in ("inside_temperature", "installation_factor", "band_emissivity"):
        assert np.array_equal(getattr(one, name), getattr(two, name)), name
    assert one.installation_factor.min() >= 1.0


def test_diameter_goes_with_the_thickness_it_is_made_of(line_with):
    from dataclasses import replace

    line = line_with(pipe_outside_diameter=Quantity(0.1143, 0.0005))
    layers = tuple(replace(layer, thickness=Quantity(0.06, 0.003)) for layer in line.layers)
    drawn = draw_line(BOOK, replace(line, layers=layers))
    assert drawn.layers is not None
    expected = drawn.pipe_diameter + 2 * drawn.layers[0].thickness + 0.002
    assert drawn.lagged_diameter == pytest.approx(expected)


def test_emissivities_of_one_cladding_go_together(line_with, paint):
    cladding = paint(0.5, 0.05, total_emissivity=Quantity(0.5, 0.05, lower=0.0, upper=1.0))
    line = draw_line(BOOK, line_with(cladding=cladding))
    assert correlation(line.band_emissivity, line.total_emissivity) == pytest.approx(0.7, abs=0.04)


def test_a_regions_own_emissivity_is_its_own_draw(line_with, drawn_pipe, paint):
    line = line_with(cladding=paint(0.92, 0.02))
    own = Quantity(0.6, 0.05, lower=0.01, upper=0.99)
    with_own = draw_line(BOOK, line, drawn_pipe(band_emissivity=own))
    without = draw_line(BOOK, line, drawn_pipe())
    assert np.median(with_own.band_emissivity) == pytest.approx(0.6, abs=0.005)
    assert abs(correlation(with_own.band_emissivity, without.band_emissivity)) < TOLERANCE


def test_a_regions_own_diameter_and_thickness_override(line_with, drawn_pipe):
    line = line_with()
    wide = draw_line(BOOK, line, drawn_pipe(outside_diameter=Quantity(0.30)))
    assert wide.lagged_diameter == pytest.approx(0.30)
    thick = draw_line(BOOK, line, drawn_pipe(lagging_thickness=Quantity(0.08)))
    assert thick.layers is not None
    assert thick.layers[0].thickness == pytest.approx(0.08)
    assert thick.lagged_diameter == pytest.approx(0.1143 + 0.16 + 0.002)


def test_a_riser_of_a_level_line_has_its_own_inclination(line_with, drawn_pipe):
    line = line_with(inclination_deg=10.0)
    assert draw_line(BOOK, line, drawn_pipe()).inclination_deg == 10.0
    assert draw_line(BOOK, line, drawn_pipe(inclination_deg=90.0)).inclination_deg == 90.0
    assert draw_line(BOOK, line, drawn_pipe(inclination_deg=0.0)).inclination_deg == 0.0


def test_a_window_never_reflects_what_it_transmits(hall_with):
    # the reader's default: half of what is not transmitted, and as uncertain as that
    window = Window(
        Quantity(0.7, 0.02, lower=0.01, upper=1.0), Quantity(0.15, 0.075, lower=0.0, upper=0.3)
    )
    frame = frame_of(hall_with(window=window))
    assert np.all(frame.window_transmission + frame.window_reflectance <= 1 + 1e-12)
    assert np.median(frame.window_reflectance) == pytest.approx(0.15, abs=0.01)


def test_unknown_parts_of_a_line_are_none_and_the_rest_stands(line_with):
    from dataclasses import replace

    line = line_with()
    without_size = draw_line(BOOK, replace(line, pipe_outside_diameter=None))
    assert without_size.pipe_diameter is None
    assert without_size.lagged_diameter is None
    assert without_size.layers is not None
    assert draw_line(BOOK, replace(line, inside_temperature=None)).inside_temperature is None
    (layer,) = line.layers
    thin = replace(line, layers=(replace(layer, thickness=None),))
    assert draw_line(BOOK, thin).layers is None
    assert draw_line(BOOK, thin).lagged_diameter is None
    # the size over the lagging is known though its conductivity is not
    unnamed = draw_line(BOOK, replace(line, layers=(replace(layer, conductivity=None),)))
    assert unnamed.layers is None
    assert unnamed.lagged_diameter == pytest.approx(line.lagged_diameter)
    assert layer_draws(BOOK, replace(line, layers=())) is None


def test_sun_is_spread_over_the_whole_circumference(hall_with, line_with):
    frame = frame_of(hall_with(solar_irradiance=Quantity(500.0)))
    line = draw_line(BOOK, line_with())
    exchange = line.exchange(frame, np.full(4000, 0.2))
    # projected width over circumference is 1 / pi; absorptance 0.6
    assert exchange.absorbed_solar == pytest.approx(0.6 * 500 / math.pi)


def test_no_heat_balance_without_wind(hall_with, line_with):
    frame = frame_of(hall_with(wind_speed=None))
    with pytest.raises(ValueError, match="wind speed is unknown"):
        draw_line(BOOK, line_with()).exchange(frame, np.full(4000, 0.2))


def test_site_pressure_is_drawn_for_all_frames(hall_with):
    site = Site(pressure=Quantity(90_000.0, 500.0))
    one = frame_of(hall_with(), site=site).pressure
    assert np.array_equal(one, frame_of(hall_with(), "f2", site=site).pressure)
    assert one.mean() == pytest.approx(90_000, rel=1e-3)


def test_a_region_is_not_changed_by_drawing(line_with, drawn_pipe):
    region: Region = drawn_pipe()
    draw_line(BOOK, line_with(), region)
    assert region == drawn_pipe()
