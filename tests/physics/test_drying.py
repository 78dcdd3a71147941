"""A wet surface in balance, and how long its water lasts."""

from dataclasses import replace

import numpy as np
import psychrolib
import pytest
from CoolProp.CoolProp import PropsSI

from cladwatt.physics.drying import WATER_DENSITY, drying_time, wet_surface
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.surface_balance import SurfaceExchange, surface_heat_flux

psychrolib.SetUnitSystem(psychrolib.SI)
CALM = SurfaceExchange(283.15, 281.15, 1.0, 0.2, 0.9)


def psychrometer(air_celsius: float) -> SurfaceExchange:
    """A thin wet thread in a fast draught, radiation left out."""
    return SurfaceExchange(air_celsius + 273.15, air_celsius + 273.15, 4.0, 0.005, 0.0)


@pytest.mark.parametrize(
    ("celsius", "humidity"), [(10.0, 0.8), (20.0, 0.5), (25.0, 0.65), (30.0, 0.3)]
)
def test_without_heat_it_is_the_wet_bulb(celsius, humidity, evidence):
    # thermodynamic wet bulb (ASHRAE); the analogy with Lewis' number 0.86 reads a little colder
    expected = psychrolib.GetTWetBulbFromRelHum(celsius, humidity, 101325.0)
    found = wet_surface(0.0, psychrometer(celsius), relative_humidity=humidity).temperature
    how = {"unit": "°C", "abs": 0.5, "scale": 30.0}
    evidence("psychrolib_wet_bulb", "wet bulb", float(found) - 273.15, expected, **how)


def test_printed_wet_bulb_in_dry_air(evidence):
    # Holman, Heat Transfer, example 11-2: dry air at 53.69 °C reads 18.3 °C
    found = float(wet_surface(0.0, psychrometer(53.69), relative_humidity=0.0).temperature)
    evidence("holman_11_2", "wet bulb", found - 273.15, 18.3, unit="°C", abs=0.2, scale=30.0)
    # dT = rho_w r / (rho cp Le^(2/3)) with the book's numbers: 2107 Pa, 2456 kJ/kg, Le 0.845
    vapour = 2107 / (8315 / 18 * 291.45)
    depression = vapour * 2.456e6 / (1.212 * 1005 * 0.845 ** (2 / 3))
    evidence.recomputed(
        "holman_11_2", "wet bulb", 53.69 - depression, 18.3, unit="°C", abs=0.3, scale=30.0,
        by="the analogy by hand",
    )  # fmt: skip


@pytest.mark.parametrize("flux", [0.0, 30.0, 100.0, 400.0])
def test_heat_is_kept(flux):
    found = wet_surface(flux, CALM, relative_humidity=0.8)
    kelvin = float(found.temperature)
    heat = PropsSI("H", "T", kelvin, "Q", 1, "Water") - PropsSI("H", "T", kelvin, "Q", 0, "Water")
    total = float(surface_heat_flux(kelvin, CALM)) + float(found.evaporation) * heat
    assert total == pytest.approx(flux, abs=0.1 + 2e-3 * flux)


def test_water_cools_what_it_lies_on():
    # dry, 100 W/m2 leave at this temperature
    grid = np.linspace(280.0, 330.0, 5001)
    dry = np.interp(100.0, surface_heat_flux(grid, CALM), grid)
    assert wet_surface(100.0, CALM, relative_humidity=0.8).temperature < dry - 2.0


def test_drying_time_is_water_over_what_leaves():
    wet = replace(CALM, total_emissivity=0.96)
    leaving = wet_surface(60.0, wet, relative_humidity=0.7).evaporation
    found = drying_time(
        60.0, CALM, relative_humidity=0.7, film_thickness=3e-4, film_emissivity=0.96
    )
    assert found == pytest.approx(WATER_DENSITY * 3e-4 / leaving, rel=1e-9)


def test_more_heat_dries_sooner_and_damp_air_later():
    def hours(flux, humidity):
        return drying_time(
            flux, CALM, relative_humidity=humidity, film_thickness=2e-4, film_emissivity=0.96
        )

    assert hours(20.0, 0.8) > 2 * hours(200.0, 0.8)
    assert hours(50.0, 0.95) > 1.3 * hours(50.0, 0.6)


def test_a_cold_surface_never_dries():
    found = drying_time(
        -60.0, CALM, relative_humidity=0.9, film_thickness=1e-5, film_emissivity=0.96
    )
    assert np.isinf(found)
    assert wet_surface(-60.0, CALM, relative_humidity=0.9).temperature < dew_point(283.15, 0.9)


def test_a_surface_near_boiling_is_dry_in_minutes_and_nan_stays():
    flux = np.array([4000.0, np.nan])
    found = drying_time(
        flux, CALM, relative_humidity=0.5, film_thickness=2e-4, film_emissivity=0.96
    )
    assert found[0] < 600
    assert np.isnan(found[1])
