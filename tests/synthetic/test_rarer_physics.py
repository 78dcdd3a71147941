"""Slanting wind, window, soaked lagging, frost, cooling fluid, heating cable: closed forms."""

import math
from dataclasses import replace

import ht
import numpy as np
import pytest

from cladwatt.physics.band import Band
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.humidity import frost_point, saturation_pressure_water
from cladwatt.physics.measurement_equation import lens_radiance
from cladwatt.survey.model import AccuracyStatement, Recording
from cladwatt.synthetic import sample
from cladwatt.synthetic.bodies import bodies_on, lay_bodies
from cladwatt.synthetic.camera import Detector, record
from cladwatt.synthetic.columns import ColumnModel
from cladwatt.synthetic.conduction_3d import solve_columns
from cladwatt.synthetic.exchange import Weather, surface_flux, water_share
from cladwatt.synthetic.inside import fluid_after, inside_of
from cladwatt.synthetic.plant import PlantComponent, load_plant
from cladwatt.synthetic.slanted import slanted_coefficient
from cladwatt.synthetic.soaked import soaked
from cladwatt.synthetic.truth import FrameTruth, LineTruth
from cladwatt.synthetic.window import TrueWindow

BAND = Band.rectangular(7.5e-6, 14e-6)
AIR, DIAMETER = 283.15, 0.12
NU, PRANDTL, CONDUCTIVITY = 1.50e-5, 0.711, 0.0255
"""Of air at 20 °C, the film (Incropera et al., table A.4, between 250 and 300 K)."""


def coefficient(speed, angle=90.0, uphill=0, inclination=0.0, surface=303.15):
    return float(
        slanted_coefficient(
            np.array([[surface]]), np.array([[DIAMETER]]), air_temperature=AIR, wind_speed=speed,
            wind_angle_deg=angle, wind_uphill=uphill, inclination_deg=inclination,
        )[0, 0]
    )  # fmt: skip


@pytest.mark.parametrize("speed", [3.0, 10.0])
def test_strong_wind_across_cools_as_by_churchill_and_bernstein(speed):
    nusselt = ht.Nu_cylinder_Churchill_Bernstein(speed * DIAMETER / NU, PRANDTL)
    # Morgan's factor is 1.00 across
    assert coefficient(speed) == pytest.approx(nusselt * CONDUCTIVITY / DIAMETER, rel=0.03)


def test_still_air_cools_as_by_churchill_and_chu():
    grashof = 9.80665 * 20.0 / 293.15 * DIAMETER**3 / NU**2
    nusselt = ht.Nu_horizontal_cylinder_Churchill_Chu(PRANDTL, grashof)
    assert coefficient(1e-9) == pytest.approx(nusselt * CONDUCTIVITY / DIAMETER, rel=0.04)
    # on a slope the part of gravity across the axis counts; laminar, by its fourth root
    steep = coefficient(1e-9, inclination=60.0)
    assert steep / coefficient(1e-9) == pytest.approx(0.5**0.25, rel=0.04)


def test_wind_against_the_plume_cools_less_than_with_it():
    up, down = (coefficient(0.3, 15.0, side, 65.0) for side in (1, -1))
    still = coefficient(1e-9, inclination=65.0)
    assert down < up
    assert still < up
    # a cold pipe's plume falls: the wind down the run then goes with it
    cold = [coefficient(0.3, 15.0, side, 65.0, surface=263.15) for side in (1, -1)]
    assert cold[0] < cold[1]


def test_a_window_at_one_temperature_with_all_else_changes_nothing():
    window = TrueWindow(0.7, 0.1, 320.0, 320.0)
    scene = np.full((2, 3), float(BAND.radiance(320.0)))
    assert window.seen_through(scene, BAND) == pytest.approx(scene, rel=1e-12)
    warm = TrueWindow(0.7, 0.1, 300.0, 295.0).seen_through(scene, BAND)
    by_hand = 0.7 * scene + 0.1 * float(BAND.radiance(295.0)) + 0.2 * float(BAND.radiance(300.0))
    assert warm == pytest.approx(by_hand, rel=1e-12)


def test_what_the_camera_was_told_of_a_window_is_undone_exactly():
    lens = BAND.radiance(np.linspace(290.0, 360.0, 24).reshape(4, 6))
    still = Detector(0.0, 0.0, 0.0, 0.0, 0.0, AccuracyStatement(2.0, 2.0))
    told = Recording(
        emissivity=0.95, reflected_temperature=293.15, window_transmission=0.85,
        window_temperature=298.15,
    )  # fmt: skip
    recorded = record(lens, still, told, BAND, np.random.default_rng(1))
    undone = lens_radiance(
        recorded, band=BAND, emissivity=0.95, reflected_temperature=293.15, transmission=1.0,
        window_transmission=0.85, window_temperature=298.15,
    )  # fmt: skip
    assert undone == pytest.approx(lens, rel=1e-6)


def wet_wool(condition="wet", seed=3):
    dry = ConductivityIntegral.constant(0.035)
    return soaked(dry, [("mineral_wool_pipe_section", condition)], [0.03], 0.05, 5,
                  np.random.default_rng(seed))  # fmt: skip


def test_soaked_lagging_conducts_within_what_is_published():
    # 1.33 to 10 times the dry conductivity: mineral wool, the table of lagging materials
    warm = np.full(5, 280.0)
    ratios = [wet_wool(seed=seed).found_over_dry(0, warm) for seed in range(40)]
    assert min(ratios) > 1.2
    assert max(ratios) < 10.0
    curve = wet_wool()
    cells = curve.conductivity(warm[None])[0] / 0.035
    assert np.all(np.diff(cells) < 0)
    assert curve.found_over_dry(0, warm) == pytest.approx(5 / np.sum(1 / cells))
    assert curve.found_over_dry(0, warm - 15) == pytest.approx(curve.found_over_dry(0, warm))


def test_ice_conducts_more_than_the_water_it_was():
    curve = wet_wool("ice")
    warm, cold = curve.found_over_dry(0, np.full(5, 280.0)), curve.found_over_dry(
        0, np.full(5, 260.0)
    )  # fmt: skip
    # ice 2.2, water 0.56 W/(m K) at 0 °C: at most four times what water adds
    assert 1.0 < (cold - 1) / (warm - 1) < 4.0
    assert wet_wool("dry").found_over_dry(0, np.full(5, 260.0)) == 1.0


def frame_truth(**rest):
    values = {
        "air_temperature": 274.65, "surroundings_temperature": 274.65,
        "reflected_temperature": 274.65, "relative_humidity": 0.84, "wind_speed": 0.2,
        "distance_ratio": 1.0, "transmission": 1.0, "convection_factor": 1.0, "unevenness": 0.0,
        "unevenness_angle": 0.0, "calibration": 0.0,
    }  # fmt: skip
    return FrameTruth(**(values | rest))


def line_truth(**rest):
    values = {
        "fluid_temperature": 245.15, "pipe_diameter": 0.1, "thickness": 0.03,
        "band_emissivity": 0.96, "total_emissivity": 0.96, "bare_emissivity": 0.85,
        "conductivity_factor": 1.0, "installation_factor": 1.0,
        "curve": ConductivityIntegral.constant(0.05),
    }  # fmt: skip
    return LineTruth(**(values | rest))


def model(inside=245.15, n_x=2, n_phi=4, **rest):
    values = {
        "inside_temperature": inside, "inside_coefficient": 150.0, "pipe_radius": 0.05,
        "thickness": np.full((n_x, n_phi), 0.03), "cell_length": 0.02,
        "conductivity_curve": lambda t: np.full(np.shape(t), 0.05),
        "factor": np.ones((n_x, n_phi, 5)), "sheet_conductance": 0.03,
        "exposed": np.zeros((n_x, n_phi), dtype=bool), "air_temperature": 274.65,
    }  # fmt: skip
    return ColumnModel(**(values | rest))


def test_frost_brings_the_heat_of_sublimation():
    surface = np.full((2, 4), 263.15)
    wet = surface_flux(model(), line_truth(), frame_truth(), 0.0, Weather())(surface)
    dry = surface_flux(model(), line_truth(), frame_truth(relative_humidity=1e-3), 0.0, Weather())
    added = (wet - dry(surface))[0, 0]
    # over ice of -10 °C 259.9 Pa, over water of 1.5 °C 681 Pa (Smithsonian Meteorological Tables);
    # heat of sublimation 2.839 MJ/kg; air of 1.3 kg/m3, 1006 J/(kg K); vapour 461.5 J/(kg K)
    radiation = 0.96 * 5.670374e-8 * (263.15**4 - 274.65**4)
    transfer = (dry(surface)[0, 0] - radiation) / (263.15 - 274.65)
    density = (259.9 - 0.84 * 681.0) / (461.5 * 268.9)
    by_hand = transfer / (1.285 * 1006 * 0.865 ** (2 / 3)) * density * 2.839e6
    assert added == pytest.approx(by_hand, rel=0.03)


def test_frost_begins_at_the_frost_point():
    # air of -5 °C and 80 %: dew point -7.9 °C over water, frost point -7.0 °C over ice (Magnus)
    frame = frame_truth(air_temperature=268.15, relative_humidity=0.8)
    share = water_share(np.array([[265.0, 266.0, 266.3, 267.0]]), frame)
    assert share[0, 0] == 1.0
    assert share[0, 1] > 0.5 > share[0, 2]
    assert share[0, 3] == 0.0


def test_a_fluid_cools_exponentially_where_loss_goes_with_its_excess():
    line = line_truth(fluid_temperature=453.15, heat_flow=100.0)
    conductance = 0.5
    found = fluid_after(line, 60.0, lambda fluid: conductance * (fluid - 300.0))
    exact = 300.0 + 153.15 * math.exp(-conductance * 60.0 / 100.0)
    assert found == pytest.approx(exact, abs=1.5)
    assert fluid_after(line_truth(fluid_temperature=450.0), 60.0, lambda _: 50.0) == 450.0


def test_a_heating_cable_gives_its_watts():
    plant = load_plant().lines["GL-640"]
    line = line_truth(
        fluid_temperature=340.0, tracer_power=8.0, inside_coefficient=150.0, pipe_diameter=0.1
    )
    inside = inside_of(plant, line, 24)
    warmer = (inside - 340.0) * 150.0 * math.pi * 0.1 / 24
    assert warmer.sum() == pytest.approx(8.0)
    assert np.argmax(inside) in (11, 12)
    # at rest the fluid gives the rest of the loss
    solved = solve_columns(model(inside, n_phi=24), lambda t: 9.0 * (t - 293.15))
    plain = solve_columns(model(340.0, n_phi=24), lambda t: 9.0 * (t - 293.15))
    assert solved.inside_heat.sum() == pytest.approx(solved.surface_heat.sum(), rel=1e-4)
    more = solved.heat_loss(0.02)[0] - plain.heat_loss(0.02)[0]
    assert 0 < more < 0.2 * 8.0


def test_a_hanger_shows_on_top_and_a_shoe_below():
    plain = model(440.0, n_x=60, n_phi=24)
    tops = {}
    for kind in ("hanger", "support"):
        bodies = bodies_on((PlantComponent(kind, 0.5, True),), (0.1, 1.1))
        laid = lay_bodies(bodies, plain, np.random.default_rng(1))
        found = solve_columns(laid, lambda t: 9.0 * (t - 293.15)).surface_temperature[30]
        tops[kind] = found[0] - found[12]
    assert tops["hanger"] > 1.0
    assert tops["support"] < -1.0


def test_the_recording_range_ends_where_it_says():
    plant = load_plant()
    frame = next(one for one in plant.frames if one.id == "f16_steam_riser")
    _, made = sample.make_frames(replace(plant, frames=(frame,)), 2)
    recorded = next(made).recorded
    assert recorded.max() == pytest.approx(273.15 + 90.0)
    assert 10 < np.count_nonzero(recorded == recorded.max()) < 3000


def test_air_whose_dew_point_lies_just_below_freezing_has_a_film():
    # over ice the same vapour is saturated above 0 °C
    humidity = float(saturation_pressure_water(273.149) / saturation_pressure_water(276.115))
    assert np.isnan(frost_point(276.115, humidity))
    frame = frame_truth(air_temperature=276.115, relative_humidity=humidity)
    share = water_share(np.array([272.0, 273.1, 275.0]), frame)
    assert share.tolist() == pytest.approx([1.0, 0.6, 0.0], abs=0.05)
