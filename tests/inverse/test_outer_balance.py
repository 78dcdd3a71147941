"""What leaves a surface: dry above the dew point, with the heat of condensing vapour below."""

from dataclasses import replace

import numpy as np
import psychrolib
import pytest

from cladwatt.inverse.outer_balance import (
    Vapour,
    may_condense,
    outer_flux,
    wetted_emissivity,
)
from cladwatt.physics.condensation import latent_heat_flux
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.surface_balance import (
    SurfaceExchange,
    surface_coefficients,
    surface_fluxes,
    surface_heat_flux,
)
from cladwatt.quantities import Quantity

AIR, HUMIDITY = 298.15, 0.65
DEW = float(dew_point(AIR, HUMIDITY))
STILL = SurfaceExchange(AIR, AIR, 0.0, 0.15, 0.9)
WATER_EMISSIVITY = 0.96
"""Incropera et al., table A.11."""
HUMID = Vapour(np.array(HUMIDITY), WATER_EMISSIVITY, 0.5)


def test_above_the_dew_point_the_surface_is_dry():
    surface = np.linspace(DEW + 0.01, 420.0, 50)
    assert np.array_equal(outer_flux(surface, STILL, HUMID), surface_heat_flux(surface, STILL))


def test_below_it_the_latent_heat_of_the_same_convection_is_added():
    surface = np.linspace(240.0, DEW - 0.01, 50)
    convection, _ = surface_coefficients(surface, STILL)
    latent = latent_heat_flux(
        surface, air_temperature=AIR, relative_humidity=HUMIDITY, convection_coefficient=convection
    )
    assert np.all(latent < 0)
    # with the emissivity of water the film changes nothing but brings its heat
    wet = wet_of(STILL)
    found = outer_flux(surface, wet, HUMID)
    assert found == pytest.approx(surface_heat_flux(surface, wet) + latent, rel=1e-12)


@pytest.mark.parametrize("emissivity", [0.1, 0.6, 0.9])
def test_below_it_bright_cladding_radiates_as_the_water_on_it(emissivity):
    surface = np.linspace(250.0, DEW - 0.6, 20)
    bright = replace(STILL, total_emissivity=emissivity)
    more = outer_flux(surface, bright, HUMID) - outer_flux(
        surface, replace(STILL, total_emissivity=WATER_EMISSIVITY), HUMID
    )
    assert more == pytest.approx(np.zeros(20), abs=1e-9)
    # by hand at 5 °C: (0.96 - 0.1) sigma (278.15^4 - 298.15^4)
    cold = np.array(278.15)
    dry = surface_heat_flux(cold, replace(STILL, total_emissivity=0.1))
    film = outer_flux(cold, replace(STILL, total_emissivity=0.1), HUMID) - dry
    latent = outer_flux(cold, wet_of(STILL), HUMID) - surface_heat_flux(cold, wet_of(STILL))
    assert film - latent == pytest.approx(-0.86 * 5.670374e-8 * (298.15**4 - 278.15**4), rel=1e-6)


def test_the_film_never_lowers_what_the_cladding_radiates():
    coat = replace(STILL, total_emissivity=0.98)
    assert wetted_emissivity(270.0, coat, HUMID) == 0.98


def wet_of(exchange: SurfaceExchange) -> SurfaceExchange:
    return replace(exchange, total_emissivity=WATER_EMISSIVITY)


def test_flux_passes_the_dew_point_without_a_step():
    above, below = outer_flux(np.array([DEW + 1e-4, DEW - 1e-4]), STILL, HUMID)
    assert above == pytest.approx(below, abs=0.01)


@pytest.mark.parametrize("celsius", [2.0, 5.0, 10.0])
def test_latent_heat_is_that_of_the_humidity_ratios_difference(celsius, evidence):
    """Chilton-Colburn by hand, humidity ratios by psychrolib (ASHRAE Fundamentals)."""
    surface = np.array(273.15 + celsius)
    psychrolib.SetUnitSystem(psychrolib.SI)
    in_air = psychrolib.GetHumRatioFromRelHum(AIR - 273.15, HUMIDITY, 101325.0)
    at_surface = psychrolib.GetHumRatioFromRelHum(celsius, 1.0, 101325.0)
    convection = float(surface_coefficients(surface, STILL)[0])
    # cp of air 1.006 kJ/(kg K), Le 0.86, heat of evaporation 2501 - 2.36 t kJ/kg
    by_hand = convection / 1006 / 0.86 ** (2 / 3) * (in_air - at_surface)
    by_hand *= 1e3 * (2501 - 2.36 * celsius)
    wet = wet_of(STILL)
    found = surface_heat_flux(surface, wet) - outer_flux(surface, wet, HUMID)
    evidence("humidity_ratio_form", "in the balance", found, by_hand, unit="W/m2", rel=0.03)


def test_vapour_about_doubles_what_the_air_brings_a_chilled_surface():
    surface = np.array(278.15)
    wet = wet_of(STILL)
    convection = surface_fluxes(surface, wet).convection
    latent = outer_flux(surface, wet, HUMID) - surface_heat_flux(surface, wet)
    assert latent / convection == pytest.approx(1.0, abs=0.15)


def test_no_humidity_no_vapour():
    surface = np.linspace(240.0, 400.0, 20)
    assert np.array_equal(outer_flux(surface, STILL, None), surface_heat_flux(surface, STILL))


def test_a_hopelessly_cold_draw_still_has_a_number_and_nan_stays():
    flux = outer_flux(np.array([150.0, np.nan]), STILL, HUMID)
    assert np.isfinite(flux[0])
    assert np.isnan(flux[1])


def test_draws_and_bands_broadcast():
    humid = Vapour(np.array([0.3, 0.9]), np.full(2, 0.96), np.full(2, 0.5)).beside()
    surface = np.full((2, 3, 4), 283.15)
    flux = outer_flux(surface, STILL, humid)
    dry = surface_heat_flux(surface, STILL)
    assert flux.shape == (2, 3, 4)
    assert np.array_equal(flux[0], dry[0])  # dew point 6 °C
    assert np.all(flux[1] < dry[1] - 20)


def wets(bench, hall_with, inside: float | None, humidity: Quantity | None) -> bool:
    line = replace(bench.line, inside_temperature=inside and Quantity(inside))
    conditions = hall_with(air_temperature=Quantity(AIR), relative_humidity=humidity)
    bench = bench.but(line=line, conditions=conditions)
    return may_condense(bench.frame_draws(), bench.line_draws())


def test_only_a_line_colder_than_the_dew_point_can_be_wet(chilled, hall_with):
    known = Quantity(HUMIDITY)
    assert wets(chilled, hall_with, DEW - 0.1, known)
    assert not wets(chilled, hall_with, DEW + 0.1, known)
    assert not wets(chilled, hall_with, 453.15, known)
    assert not wets(chilled, hall_with, 279.15, None)
    assert not wets(chilled, hall_with, None, known)


def test_a_dew_point_that_is_not_sure_may_wet_a_line_a_little_above_it(chilled, hall_with):
    unsure = Quantity(HUMIDITY, 0.05, lower=0.0, upper=1.0)
    # 5 % of humidity is 1.2 K of dew point: two of those
    assert wets(chilled, hall_with, DEW + 1.5, unsure)
    assert not wets(chilled, hall_with, DEW + 4.0, unsure)
