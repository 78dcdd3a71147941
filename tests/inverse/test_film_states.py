"""Dry or wet: both told where the draws allow both, and the film's own spread drawn."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.frame_draws import draw_frame
from cladwatt.inverse.sound import dry_and_wet_sound
from cladwatt.materials.load import shipped_tables
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.surface_balance import surface_heat_flux
from cladwatt.quantities import Quantity
from cladwatt.survey.model import ConductivityCurve, Layer

AIR, HUMIDITY = 283.15, 0.75
DEW = float(dew_point(AIR, HUMIDITY))


@pytest.fixture
def bright(bench, hall_with, paint):
    """Chilled water under good foam and bright metal, outdoors on a clear, humid night."""

    def line(emissivity=0.1, *, surroundings=266.15, humidity=HUMIDITY, inside=277.15):
        foam = ConductivityCurve((240.0, 330.0), (0.036, 0.036))
        metal = paint(emissivity, is_metal=True, total_emissivity=Quantity(emissivity))
        return bench.but(
            line=replace(
                bench.line,
                layers=(Layer("foam", Quantity(0.050), foam, Quantity(1.0)),),
                cladding=metal,
                inside_temperature=Quantity(inside),
                installation_factor=Quantity(1.0),
            ),
            conditions=hall_with(
                indoors=False,
                air_temperature=Quantity(AIR),
                surroundings_temperature=Quantity(surroundings),
                reflected_temperature=Quantity(surroundings),
                relative_humidity=Quantity(humidity),
                wind_speed=Quantity(0.3),
            ),
            count=60,
        )

    return line


def told(bench, lens, key):
    found = [remark for remark in bench.alone(lens).remarks if remark.key == key]
    return dict(found[0].parameters) if found else None


def test_under_a_cold_sky_both_are_a_balance(bright):
    bench = bright()
    states = dry_and_wet_sound(bench.line_draws(), bench.frame_draws())
    assert states.both.all()
    # the dry one by the engine's balance: above the dew point nothing condenses
    dry = bench.solved(1.0)
    assert float(dry.surface_temperature) > DEW
    assert states.dry_loss == pytest.approx(float(dry.heat_loss), rel=1e-6)
    # the wet one with the emissivity of water is below it even without the vapour's heat, and its
    # flux is that of the surface its own loss implies
    bare = replace(bench.exchange, total_emissivity=0.96)
    wet_surface = 277.15 - float(states.wet_loss[0]) * float(dry.resistance)
    assert wet_surface < DEW - 0.5
    perimeter = np.pi * bench.exchange.diameter
    vapour = perimeter * surface_heat_flux(wet_surface, bare) - states.wet_loss[0]
    assert vapour > 0
    said = told(bench, bench.lens(DEW + 3.0), "remark.wet_or_dry_balance")
    assert said["share"] == 1.0
    assert said["dry_W_per_m"] == pytest.approx(-float(dry.heat_loss), rel=1e-3)


@pytest.mark.parametrize(
    "changes",
    [{"surroundings": 283.15}, {"humidity": 0.4}, {"emissivity": 0.96}, {"inside": 253.15}],
    ids=["no cold sky", "dry air", "as dark as water", "cold enough to be wet in any case"],
)
def test_elsewhere_there_is_one_balance(bright, changes):
    bench = bright(**changes)
    if changes.get("inside"):
        (layer,) = bench.line.layers
        thin = replace(layer, thickness=Quantity(0.006))
        bench = bench.but(line=replace(bench.line, layers=(thin,)))
    assert told(bench, bench.lens(DEW - 3.0), "remark.wet_or_dry_balance") is None


def test_an_image_that_fits_both_is_told(bright):
    # bright metal at 11 °C mirrors the sky: as a film of water the same radiance is far colder
    bench = bright()
    surface = DEW + 2.0
    said = told(bench, bench.lens(surface), "remark.wet_or_dry_reading")
    assert said["share"] == 1.0
    assert said["dry_C"] == pytest.approx(surface - 273.15, abs=0.3)
    assert said["wet_C"] < DEW - 273.15 - 2.0
    assert bench.alone(bench.lens(surface)).verdict.level != "quantified"


@pytest.mark.parametrize("emissivity", [0.92, 0.96])
def test_on_paint_the_two_readings_are_one(bright, emissivity):
    bench = bright(emissivity)
    bench = bench.but(
        line=replace(bench.line, cladding=replace(bench.line.cladding, is_metal=False))
    )
    assert told(bench, bench.lens(DEW + 0.3), "remark.wet_or_dry_reading") is None


def test_hot_lines_say_nothing_of_films(bench, keys):
    assert not {k for k in keys(bench.alone(bench.lens(320.0)).remarks) if "wet_or_dry" in k}


def test_the_film_is_drawn_within_its_bounds(bright):
    bench = bright()
    frame = draw_frame(
        replace(bench.book, count=2000), "f1", bench.conditions, bench.camera, bench.site
    )
    row = shipped_tables().defaults["water_film_total_emissivity"]
    film = frame.water.total_emissivity
    assert np.std(film) == pytest.approx(row.u, rel=0.05)
    assert row.lower <= film.min() < film.max() <= row.upper
    # from the first drops to a film that has run together
    assert frame.water.span.min() == pytest.approx(0.1, abs=0.01)
    assert frame.water.span.max() == pytest.approx(0.9, abs=0.01)
    assert (frame.water.rain_film > 0).all()


def test_its_spread_reaches_the_flux(bright, paint):
    """Wet all over, a change of emissivity is that times sigma (Ts^4 - Tsur^4)."""
    bench = bright(inside=268.15)
    bench = bench.but(line=replace(bench.line, cladding=paint(0.9)), count=2000)
    surface = DEW - 3.0
    lens = bench.lens(surface, emissivity=0.96)
    drawn = draw_frame(bench.book, "f1", bench.conditions, bench.camera, bench.site)
    exact = bench.frame_draws()
    water = replace(exact.water, total_emissivity=drawn.water.total_emissivity)
    seen = bench.observe(lens, frame=replace(exact, water=water)).seen
    flux = seen.mean_along(seen.drawn.heat_flux)
    sky = bench.conditions.surroundings_temperature.value
    by_film = (water.total_emissivity - 0.96) * 5.670374e-8 * (surface**4 - sky**4)
    plain = bench.observe(lens).seen
    assert flux - plain.mean_along(plain.drawn.heat_flux) == pytest.approx(by_film, abs=0.02)
    assert np.std(flux) > 0.3
