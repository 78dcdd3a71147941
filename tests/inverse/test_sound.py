"""Sound and specified loss: condensation, inside film and supports, against balances by hand."""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import brentq

from cladwatt.inverse.outer_balance import outer_flux, vapour_of
from cladwatt.inverse.sound import film_resistance, outside_film, sound_draws
from cladwatt.physics.condensation import latent_heat_flux
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.surface_balance import surface_coefficients, surface_heat_flux
from cladwatt.quantities import Quantity
from cladwatt.survey.model import ConductivityCurve, Layer

FOAM = ConductivityCurve((250.0, 330.0), (0.036, 0.036))
WARM = 298.15


def sound_of(bench):
    return sound_draws(bench.line_draws(), bench.frame_draws())


def foamed(bench, thickness: float, inside: float, **changes):
    """A chilled line under some foam of exactly known conductivity."""
    layers = (Layer("foam", Quantity(thickness), FOAM, Quantity(1.0)),)
    return replace(bench.line, layers=layers, inside_temperature=Quantity(inside), **changes)


def humid(hall_with, humidity: float | Quantity, **changes):
    if not isinstance(humidity, Quantity):
        humidity = Quantity(humidity)
    fields = {
        "air_temperature": Quantity(WARM),
        "surroundings_temperature": Quantity(WARM),
        "relative_humidity": humidity,
    } | changes
    return hall_with(**fields)


def by_hand(bench, *, factor: float = 1.0) -> float:
    """Loss of a one-layer line by bisection of the whole balance, film and vapour in it. [W/m]"""
    line, exchange = bench.line, bench.exchange
    (layer,) = line.layers
    inner = line.pipe_outside_diameter.value
    outer = inner + 2 * layer.thickness.value
    resistance = math.log(outer / inner) / (2 * math.pi * layer.conductivity.conductivity[0])
    resistance /= factor
    if line.inside_film is not None:
        resistance += 1 / (math.pi * inner * line.inside_film.value)
    inside = line.inside_temperature.value
    humidity = bench.conditions.relative_humidity

    def given_off(surface: float) -> float:
        wetted = exchange
        if humidity is not None:
            # cladding down to the dew point, water (0.96) from half a kelvin below it
            dew = float(dew_point(float(exchange.air_temperature), humidity.value))
            covered = min(max((dew - surface) / 0.5, 0.0), 1.0)
            dry = exchange.total_emissivity
            wetted = replace(exchange, total_emissivity=dry + covered * (0.96 - dry))
        flux = float(surface_heat_flux(surface, wetted))
        if humidity is not None:
            flux += float(
                latent_heat_flux(
                    surface,
                    air_temperature=exchange.air_temperature,
                    relative_humidity=humidity.value,
                    convection_coefficient=surface_coefficients(surface, exchange)[0],
                )
            )
        return math.pi * exchange.diameter * flux

    surface = brentq(lambda t: (inside - t) / resistance - given_off(t), 230.0, 600.0, xtol=1e-10)
    return (inside - surface) / resistance


# ---- condensation -------------------------------------------------------------------------


@pytest.mark.parametrize("humidity", [0.65, 0.95])
@pytest.mark.parametrize(
    ("thickness", "inside"),
    [(0.025, 279.15), (0.010, 253.15), (0.003, 279.15), (0.003, 253.15)],
    ids=["dry or damp", "brine, thin", "water, a film of foam", "frost"],
)
def test_condensing_lines_gain_what_the_whole_balance_says(
    chilled, hall_with, humidity, thickness, inside
):
    bench = chilled.but(
        line=foamed(chilled, thickness, inside), conditions=humid(hall_with, humidity), count=50
    )
    sound = sound_of(bench)
    assert sound.heat_loss == pytest.approx(by_hand(bench, factor=1.15), rel=3e-4)
    assert sound.specified_loss == pytest.approx(by_hand(bench), rel=3e-4)


def test_what_crosses_the_lagging_is_what_air_surroundings_and_vapour_bring(chilled, hall_with):
    """In every draw, at the surface that the loss and the resistance imply."""
    bench = chilled.but(
        line=foamed(chilled, 0.004, 258.15),
        conditions=humid(
            hall_with,
            Quantity(0.7, 0.05, lower=0.0, upper=1.0),
            air_temperature=Quantity(WARM, 0.5),
            wind_speed=Quantity(0.3, 0.1, lower=0.05),
        ),
        law_exact=False,
    )
    frame, line = bench.frame_draws(), bench.line_draws()
    sound = sound_draws(line, frame)
    surface = line.inside_temperature - sound.specified_loss * sound.specified_resistance
    assert np.all(surface < frame.dew_point)
    exchange = line.exchange(frame, line.lagged_diameter)
    dry = surface_heat_flux(surface, exchange)
    wet = outer_flux(surface, exchange, vapour_of(frame, line))
    perimeter = math.pi * line.lagged_diameter
    assert sound.specified_loss == pytest.approx(perimeter * wet, rel=1e-3)
    assert np.all(wet < 1.2 * dry)  # both negative: vapour brings at least a fifth more


def test_humid_air_warms_a_chilled_line_more_than_dry_air(chilled, hall_with):
    line = foamed(chilled, 0.010, 268.15)
    wet, dry = (
        sound_of(chilled.but(line=line, conditions=humid(hall_with, humidity))).heat_loss[0]
        for humidity in (0.8, 0.1)
    )
    assert wet < 1.03 * dry < 0


def test_humidity_moves_a_hot_line_by_its_airs_properties_alone(bench, hall_with):
    damp = bench.but(conditions=hall_with(relative_humidity=Quantity(0.9)))
    assert np.ptp(sound_of(damp).heat_loss) == 0
    assert sound_of(damp).heat_loss[0] == pytest.approx(damp.sound.heat_loss, rel=1e-6)
    assert sound_of(damp).heat_loss == pytest.approx(sound_of(bench).heat_loss, rel=1e-3)
    assert sound_of(damp).heat_loss[0] != sound_of(bench).heat_loss[0]


# ---- inside film --------------------------------------------------------------------------


@pytest.mark.parametrize("coefficient", [500.0, 50.0, 10.0, 3.0, 0.5])
@pytest.mark.parametrize("thickness", [0.06, 0.005])
def test_drops_over_film_and_lagging_and_from_the_surface_add_up(bench, coefficient, thickness):
    (layer,) = bench.line.layers
    line = replace(
        bench.line,
        layers=(replace(layer, thickness=Quantity(thickness)),),
        inside_film=Quantity(coefficient),
    )
    bench = bench.but(line=line, count=50)
    frame, drawn = bench.frame_draws(), bench.line_draws()
    sound = sound_draws(drawn, frame)
    loss, diameter = sound.specified_loss, drawn.pipe_diameter
    wall = 453.15 - loss / (math.pi * diameter * coefficient)
    surface = wall - loss * sound.specified_resistance
    exchange = drawn.exchange(frame, drawn.lagged_diameter)
    given_off = math.pi * drawn.lagged_diameter * surface_heat_flux(surface, exchange)
    assert given_off == pytest.approx(loss, rel=1e-6)
    # the lagging's own, by ISO 12241's hollow cylinder; the film is not in it
    own = math.log((0.1143 + 2 * thickness) / 0.1143) / (2 * math.pi * 0.045)
    assert sound.specified_resistance == pytest.approx(own, rel=1e-9)
    assert sound.heat_loss == pytest.approx(by_hand(bench, factor=1.15), rel=1e-6)


def test_the_wall_temperature_needs_no_film(bench):
    filmed = replace(bench.line, inside_film=Quantity(10.0), inside_is="wall")
    bench_with = bench.but(line=filmed)
    assert film_resistance(bench_with.line_draws()) is None
    assert np.array_equal(sound_of(bench_with).heat_loss, sound_of(bench).heat_loss)


def test_film_and_vapour_together(chilled, hall_with):
    line = foamed(chilled, 0.006, 263.15, inside_film=Quantity(30.0))
    bench = chilled.but(line=line, conditions=humid(hall_with, 0.8), count=50)
    assert sound_of(bench).heat_loss == pytest.approx(by_hand(bench, factor=1.15), rel=3e-4)
    without = bench.but(line=replace(line, inside_film=None))
    assert abs(sound_of(without).heat_loss[0]) > 1.05 * abs(sound_of(bench).heat_loss[0])


def test_conductances_in_series_are_taken_apart(bench):
    line = bench.but(line=replace(bench.line, inside_film=Quantity(8.0)), count=3).line_draws()
    film = 1 / (math.pi * 0.1143 * 8.0)
    lagging = np.array([0.1, 0.4, 3.0])
    together = 1 / (film + 1 / lagging)
    assert outside_film(together, line) == pytest.approx(lagging)
    along = np.stack([together, 0.5 * together], axis=1)
    assert outside_film(along, line)[:, 0] == pytest.approx(lagging)
    assert outside_film(along, line)[:, 1] == pytest.approx(1 / (2 / together - film))
    assert np.array_equal(outside_film(together, bench.but(count=3).line_draws()), together)


def test_found_resistance_excludes_the_film(bench):
    line = replace(bench.line, inside_film=Quantity(8.0))
    bench = bench.but(line=line)
    loss = by_hand(bench, factor=1.15)
    own = math.log((0.1143 + 0.12) / 0.1143) / (2 * math.pi * 0.045 * 1.15)
    film = 1 / (math.pi * 0.1143 * 8.0)
    result = bench.alone(bench.lens(453.15 - loss * (film + own)))
    # five bands of angle stand for a curve: some hundredths of a kelvin, half a percent here
    assert result.heat_loss.median == pytest.approx(loss, rel=0.01)
    assert result.resistance.median == pytest.approx(own, rel=0.01)
    assert result.resistance_ratio.median == pytest.approx(1 / 1.15, rel=0.01)
    assert result.effective_conductivity.median == pytest.approx(0.045 * 1.15, rel=0.01)
    assert np.median(result.stations.resistance) == pytest.approx(own, rel=0.01)
    assert np.median(result.stations.resistance_ratio) == pytest.approx(1 / 1.15, rel=0.01)
    assert film > 0.1 * own  # or nothing was shown


# ---- supports and what is unknown ---------------------------------------------------------


def test_supports_add_to_the_sound_loss_alone(bench):
    plain = sound_of(bench)
    held = sound_of(bench.but(line=replace(bench.line, supports_allowance=Quantity(0.15))))
    assert held.heat_loss == pytest.approx(1.15 * plain.heat_loss, rel=1e-12)
    assert np.array_equal(held.specified_loss, plain.specified_loss)
    assert np.array_equal(held.specified_resistance, plain.specified_resistance)


def test_a_line_that_loses_what_its_supports_allow_is_sound(bench):
    plain = sound_of(bench)
    allowance = 0.15
    held = bench.but(line=replace(bench.line, supports_allowance=Quantity(allowance)))
    wanted = (1 + allowance) * float(plain.heat_loss[0])
    surface = brentq(lambda t: held.loss(t) - wanted, 295.0, 360.0)
    result = held.alone(held.lens(surface))
    assert result.excess.median == pytest.approx(0.0, abs=0.01 * wanted)
    assert bench.alone(bench.lens(surface)).excess.median == pytest.approx(
        allowance / (1 + allowance) * wanted, rel=0.08
    )


@pytest.mark.parametrize(
    "unknown", [{"inside_temperature": None}, {"pipe_outside_diameter": None}, {"layers": ()}]
)
def test_nothing_is_said_where_a_part_is_unknown(bench, unknown):
    assert sound_of(bench.but(line=replace(bench.line, **unknown))) is None


def test_nothing_is_said_without_wind(bench, hall_with):
    assert sound_of(bench.but(conditions=hall_with(wind_speed=None))) is None
