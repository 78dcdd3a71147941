"""Sun, water, layers, bodies and warming up of the sample's pipes, against closed forms."""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.synthetic.bodies import bodies_on, lay_bodies
from cladwatt.synthetic.columns import ColumnModel, cell_volumes
from cladwatt.synthetic.conduction_3d import heat_up, solve_columns
from cladwatt.synthetic.exchange import Weather, absorbed_sun, surface_flux, water_share
from cladwatt.synthetic.geometry import PipeAxis
from cladwatt.synthetic.layered import LayeredCurve, gap_coefficient
from cladwatt.synthetic.plant import PlantComponent
from cladwatt.synthetic.truth import FrameTruth, LineTruth

INSIDE, AIR, COEFFICIENT = 453.15, 293.15, 9.0
RADIUS = 0.05
STEFAN_BOLTZMANN = 5.670374e-8


def make_model(n_x=4, n_phi=12, n_r=5, **rest):
    values = {
        "inside_temperature": INSIDE,
        "inside_coefficient": 1e6,
        "pipe_radius": RADIUS,
        "thickness": np.full((n_x, n_phi), 0.06),
        "cell_length": 0.015,
        "conductivity_curve": lambda temperature: np.full(np.shape(temperature), 0.05),
        "factor": np.ones((n_x, n_phi, n_r)),
        "sheet_conductance": 0.03,
        "exposed": np.zeros((n_x, n_phi), dtype=bool),
        "air_temperature": AIR,
    }
    return ColumnModel(**(values | rest))


def linear_flux(temperature):
    return COEFFICIENT * (temperature - AIR)


def frame_truth(**rest):
    values = {
        "air_temperature": 298.15, "surroundings_temperature": 298.15,
        "reflected_temperature": 298.15, "relative_humidity": 0.6, "wind_speed": 0.2,
        "distance_ratio": 1.0, "transmission": 1.0, "convection_factor": 1.0, "unevenness": 0.0,
        "unevenness_angle": 0.0, "calibration": 0.0,
    }  # fmt: skip
    return FrameTruth(**(values | rest))


def line_truth():
    return LineTruth(
        fluid_temperature=INSIDE, pipe_diameter=2 * RADIUS, thickness=0.06, band_emissivity=0.9,
        total_emissivity=0.9, bare_emissivity=0.85, conductivity_factor=1.0,
        installation_factor=1.0, curve=ConductivityIntegral.constant(0.05),
    )  # fmt: skip


def test_layers_and_gap_are_in_series():
    curves = tuple(ConductivityIntegral.constant(k) for k in (0.06, 0.04))
    layered = LayeredCurve.stacked(RADIUS, (0.033, 0.027), curves, (1.0, 1.2), 5)
    model = make_model(
        conductivity_curve=layered.conductivity, gap=0.01,
        gap_coefficient=lambda temperature: np.full(temperature.shape, 5.0),
    )  # fmt: skip
    first, second, outer = RADIUS + 0.033, RADIUS + 0.06, RADIUS + 0.07
    resistance = (
        math.log(first / RADIUS) / (2 * math.pi * 0.06)
        + math.log(second / first) / (2 * math.pi * 0.048)
        + 1 / (2 * math.pi * (RADIUS + 0.065) * 5.0)
        + 1 / (2 * math.pi * outer * COEFFICIENT)
        + 1 / (2 * math.pi * RADIUS * 1e6)
    )
    solution = solve_columns(model, linear_flux)
    assert solution.heat_loss(0.015) == pytest.approx((INSIDE - AIR) / resistance, rel=1e-6)


def test_a_gap_passes_conduction_and_radiation():
    # air at 320 K conducts 0.0278 W/(m K) (Incropera et al., table A.4, between 300 and 350 K)
    found = float(gap_coefficient(0.01, 0.9, 0.25)(np.array(320.0)))
    exchange = 1 / (1 / 0.9 + 1 / 0.25 - 1)
    assert found == pytest.approx(
        0.0278 / 0.01 + 4 * exchange * STEFAN_BOLTZMANN * 320**3, rel=0.01
    )


@pytest.mark.parametrize(
    ("hours", "steps", "within"),
    [(0.7, 400, 0.005), (0.7, 24, 0.06), (1.5, 400, 0.003), (1.5, 24, 0.03), (30.0, 24, 1e-4)],
)
def test_warming_up_follows_the_same_cells_integrated_otherwise(hours, steps, within):
    # one column as ordinary differential equations, by an implicit Runge-Kutta rule
    cells, capacity = 5, 1.6e5
    model = make_model(2, 4, cells, heat_capacity=capacity)
    found = heat_up(model, linear_flux, 3600 * hours, steps=steps)
    volume = cell_volumes(model)[0].sum(axis=0) / 0.015
    step = math.log(0.11 / RADIUS) / cells
    conductance = np.full(cells + 1, 2 * math.pi * 0.05 / step)
    conductance[0] = 1 / (step / 2 / (2 * math.pi * 0.05) + 1 / (2 * math.pi * RADIUS * 1e6))
    conductance[-1] = 1 / (step / 2 / (2 * math.pi * 0.05) + 1 / (2 * math.pi * 0.11 * COEFFICIENT))

    def change(_, temperature):
        wide = np.concatenate([[INSIDE], temperature, [AIR]])
        flow = conductance * (wide[:-1] - wide[1:])
        return -np.diff(flow) / (capacity * volume)

    end = solve_ivp(change, (0, 3600 * hours), np.full(cells, AIR), method="Radau", rtol=1e-8)
    expected = conductance[-1] * (end.y[-1, -1] - AIR)
    assert found.heat_loss(0.015) == pytest.approx(expected, rel=within)
    steady = solve_columns(model, linear_flux).heat_loss(0.015)
    assert np.all(found.heat_loss(0.015) < 1.0001 * steady)


def test_cell_volumes_fill_the_lagging():
    volume = cell_volumes(make_model())
    assert volume.sum() == pytest.approx(math.pi * (0.11**2 - RADIUS**2) * 4 * 0.015)


def test_the_sun_leaves_what_the_projected_area_takes():
    axis = PipeAxis(np.array([[-1.0, 0.0, 3.0], [1.0, 0.0, 3.0]]), np.array([0.0, -1.0, 0.0]))
    frame = frame_truth(sun=(0.3, -1.0, 0.0), solar_irradiance=600.0)
    absorbed = absorbed_sun(axis, (10, 24), frame, 0.5)
    assert absorbed.mean() == pytest.approx(0.5 * 600.0 / math.pi)
    around = absorbed[0]
    # angle 0 is up: next to the sun most, below only what the ground sends back
    assert np.argmax(around) in (0, 23)
    assert around[12] < 0.1 * around[0]
    assert absorbed_sun(axis, (10, 24), frame_truth(), 0.5) is None


def latent_part(surface, **rest):
    """Return what water adds to the flux of a dry surface, and the convection alone."""
    model = make_model(2, 4, inside_temperature=270.0)
    rain = rest.pop("rain", None)
    frame = frame_truth(**rest)
    line = line_truth()
    weather = Weather(rain=None if rain is None else np.full((2, 4), rain))
    temperature = np.full((2, 4), surface)
    total = surface_flux(model, line, frame, 0.0, weather)(temperature)
    share = water_share(temperature, frame, weather.rain)
    emissivity = 0.9 + share * (0.96 - 0.9)
    radiation = emissivity * STEFAN_BOLTZMANN * (surface**4 - frame.surroundings_temperature**4)
    dry = surface_flux(model, line, frame_truth(relative_humidity=0.01), 0.0, Weather())
    convection = dry(temperature) - 0.9 * STEFAN_BOLTZMANN * (surface**4 - 298.15**4)
    return float((total - radiation - convection)[0, 0]), float(convection[0, 0])


def test_dew_brings_its_latent_heat():
    # air of 25 °C and 50 % has a wet-bulb temperature of 17.9 °C (psychrometric chart), where a
    # wet surface would give off in vapour what convection brings, were vapour to spread as heat
    # does; it spreads faster: a Lewis number of 0.865 makes it 0.865^(-2/3) as much
    latent, convection = latent_part(273.15 + 17.9, relative_humidity=0.5, rain=1.0)
    assert latent == pytest.approx(-convection * 0.865 ** (-2 / 3), rel=0.03)
    # below the dew point of 16.7 °C at 60 % it condenses; above, a dry surface has none of it
    assert latent_part(288.15)[0] < 0
    assert latent_part(292.15)[0] == pytest.approx(0.0, abs=1e-3)
    # in humid air as much again as convection
    latent, convection = latent_part(285.15, relative_humidity=0.75)
    assert 0.5 < latent / convection < 1.5


def test_rain_takes_heat_where_the_surface_is_warm():
    latent, _ = latent_part(308.15, rain=0.5)
    assert latent > 50.0


@pytest.mark.parametrize(("kind", "length"), [("valve", 1.0), ("flange", 0.5)])
def test_a_bare_body_gives_off_a_length_of_bare_pipe(kind, length):
    # Fuel Efficiency Booklet 8 (1993): a valve about 1 m, a flange pair 0.5 m of bare pipe
    bodies = bodies_on((PlantComponent(kind, 0.5, False),), (0.1, 0.9))
    plain = make_model(70, 12)
    ratios = []
    for seed in range(12):
        model = lay_bodies(bodies, plain, np.random.default_rng(seed))
        loss = solve_columns(model, linear_flux).surface_heat
        ratios.append(loss[model.exposed].sum())
    bare = COEFFICIENT * 2 * math.pi * RADIUS * (INSIDE - AIR)
    assert np.mean(ratios) / bare == pytest.approx(length, rel=0.12)


def test_a_cover_gives_off_more_than_the_lagging_it_replaces():
    bodies = bodies_on((PlantComponent("valve", 0.5, True),), (0.1, 1.7))
    plain = make_model(120, 12)
    model = lay_bodies(bodies, plain, np.random.default_rng(1))
    taken = bodies[0].covers(model.station)
    loss = solve_columns(model, linear_flux).heat_loss(0.015)
    sound = float(solve_columns(plain, linear_flux).heat_loss(0.015)[0])
    # insulated valves are given 2 to 6 m of lagged pipe, the smaller ones the least
    assert 1.0 < loss[taken].sum() * 0.015 / sound < 6.0
    assert loss[0] == pytest.approx(sound, rel=0.01)


def test_a_tracer_warms_one_side_of_the_inside():
    warm = INSIDE + np.array([40.0, *[0.0] * 11])
    solution = solve_columns(make_model(inside_temperature=warm), linear_flux)
    around = solution.surface_temperature[0]
    assert np.argmax(around) == 0
    assert around[0] - around[6] > 0.5
    assert solution.surface_heat.sum() == pytest.approx(solution.inside_heat.sum(), rel=1e-4)
