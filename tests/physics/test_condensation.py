import csv
from pathlib import Path

import numpy as np
import psychrolib
import pytest
from CoolProp.CoolProp import PropsSI
from CoolProp.HumidAirProp import HAPropsSI
from iapws import IAPWS95
from iapws._iapws import _Ice

from cladwatt.errors import InputError
from cladwatt.physics.condensation import (
    evaporation_heat_flux,
    latent_heat,
    latent_heat_flux,
    lewis_number,
    mass_transfer_coefficient,
    surface_vapour_pressure,
    vapour_diffusivity,
    vapour_mass_flux,
)
from cladwatt.physics.humidity import dew_point, frost_point

ZERO = 273.15
psychrolib.SetUnitSystem(psychrolib.SI)

with (Path(__file__).parents[1] / "published" / "vapour_diffusion.csv").open(
    encoding="utf-8", newline=""
) as file:
    PRINTED = {row["id"]: row for row in csv.DictReader(file)}


def flux(surface_C, air_C=25.0, humidity=0.65, coefficient=5.0, **others):
    return latent_heat_flux(
        np.asarray(surface_C, dtype=float) + ZERO,
        air_temperature=air_C + ZERO,
        relative_humidity=humidity,
        convection_coefficient=coefficient,
        **others,
    )


def test_diffusivity_of_the_textbook_table(evidence):
    # Incropera et al., table A.8; the measurements themselves scatter by 7 % (Massman 1998)
    row = PRINTED["D_298"]
    found = float(vapour_diffusivity(float(row["temperature_K"])))
    printed, rel = float(row["value"]), float(row["tolerance_percent"]) / 100
    evidence("incropera_a_8", "diffusivity", found, printed, unit="m2/s", rel=rel)
    # Fuller, Schettler and Giddings 1966: diffusion volumes 19.7 of air, 13.1 of water
    mass = 2 / (1 / 28.97 + 1 / 18.015)
    fuller = 1.43e-7 * 298**1.75 / (1.01325 * mass**0.5 * (19.7 ** (1 / 3) + 13.1 ** (1 / 3)) ** 2)
    evidence.recomputed("incropera_a_8", "diffusivity", fuller, printed, unit="m2/s", rel=rel,
                        by="relation of Fuller, Schettler and Giddings")  # fmt: skip
    assert float(vapour_diffusivity(298.0, 5e4)) == pytest.approx(found * 101_325 / 5e4)


@pytest.mark.parametrize(("key", "celsius"), [("hfg_0C", 0.0), ("hig_0C", -1e-3)])
def test_latent_heats_at_the_ice_point(key, celsius, evidence):
    # ASHRAE Fundamentals, Psychrometrics
    row = PRINTED[key]
    half = float(row["half_last_digit"])
    found, printed, what = latent_heat(ZERO + celsius), float(row["value"]), row["quantity"]
    evidence("ashrae_latent", what.replace("_", " "), found, printed, unit="J/kg", abs=half)
    # at the triple point, 0.01 K on
    steam, water = (PropsSI("H", "T", 273.16, "Q", q, "Water") for q in (1, 0))
    solid = 1e3 * _Ice(ZERO, 0.101325)["h"]
    other = steam - (solid if key == "hig_0C" else water)
    evidence.recomputed("ashrae_latent", what.replace("_", " "), other, printed, unit="J/kg",
                        abs=half, by="CoolProp, iapws")  # fmt: skip


# stated bounds: 0.1 % where vapour condenses, 0.2 % and 0.6 % where hot water would evaporate
@pytest.mark.parametrize(
    ("celsius", "bound"), [(1, 1e-3), (10, 1e-3), (25, 1e-3), (45, 1e-3), (60, 2e-3), (100, 6e-3)]
)
def test_heat_of_evaporation_against_the_equation_of_state(celsius, bound, evidence):
    steam, water = (PropsSI("H", "T", ZERO + celsius, "Q", q, "Water") for q in (1, 0))
    found = latent_heat(ZERO + celsius)
    evidence("coolprop_latent", "evaporation", found, steam - water, unit="J/kg", rel=bound)


@pytest.mark.parametrize("celsius", [-1.0, -10.0, -30.0])
def test_heat_of_sublimation_against_the_equation_of_ice(celsius, evidence):
    # ice Ih by IAPWS R10-06, vapour by IAPWS-95 as an almost ideal gas
    kelvin = ZERO + celsius
    ice = _Ice(kelvin, 0.101325)["h"]
    vapour = PropsSI("Hmass", "T", 273.16, "Q", 1, "Water") / 1e3 - 1.86 * (273.16 - kelvin)
    found, expected = latent_heat(kelvin), 1e3 * (vapour - ice)
    evidence("iapws_ice", "sublimation", found, expected, unit="J/kg", rel=1.5e-3)
    assert IAPWS95(T=273.16, x=1).h == pytest.approx(
        PropsSI("Hmass", "T", 273.16, "Q", 1, "Water") / 1e3, rel=1e-5
    )


@pytest.mark.parametrize(
    ("celsius", "ice"), [(-20.0, True), (-5.0, True), (5.0, False), (30.0, False)]
)
def test_vapour_pressure_at_the_surface_against_psychrolib(celsius, ice, evidence):
    found = float(surface_vapour_pressure(ZERO + celsius))
    expected = psychrolib.GetSatVapPres(celsius)
    evidence("psychrolib_saturation", "at a surface", found, expected, unit="Pa", rel=1e-5)
    over_water = PropsSI("P", "T", max(ZERO + celsius, 273.16), "Q", 1, "Water")
    assert (found < over_water) or not ice


@pytest.mark.parametrize(
    ("surface", "air", "humidity"),
    [(5.0, 25.0, 0.65), (10.0, 30.0, 0.8), (2.0, 15.0, 0.7), (12.0, 25.0, 0.6), (18.0, 35.0, 0.9)],
)
def test_against_the_humidity_ratio_form(surface, air, humidity, evidence):
    # ASHRAE Fundamentals, chapter Mass Transfer: m = h (W_air - W_surface) / (c_p Le^(2/3)) with
    # moist air's c_p per dry air; humidity ratios by psychrolib; Le^(2/3) = 0.9 as printed there
    wet = psychrolib.GetHumRatioFromRelHum(air, humidity, 101_325.0)
    at_surface = psychrolib.GetHumRatioFromRelHum(surface, 1.0, 101_325.0)
    mass = 5.0 * (wet - at_surface) / ((1006.0 + 1860.0 * wet) * 0.9)
    heat = mass * (
        PropsSI("H", "T", ZERO + surface, "Q", 1, "Water")
        - PropsSI("H", "T", ZERO + surface, "Q", 0, "Water")
    )
    found = flux(surface, air, humidity)
    evidence("humidity_ratio_form", "latent heat", found, -heat, unit="W/m2", rel=0.05)


@pytest.mark.parametrize(("surface", "air", "humidity"), [(5.0, 25.0, 0.65), (8.0, 30.0, 0.6)])
def test_total_by_the_enthalpy_potential(surface, air, humidity, evidence):
    # Merkel's enthalpy potential (Lewis number one): q = h / c_p (h_air - h_saturated); CoolProp
    def enthalpy(celsius, share):
        return HAPropsSI("H", "T", ZERO + celsius, "P", 101_325, "R", share)

    moist = HAPropsSI("C", "T", ZERO + air, "P", 101_325, "R", humidity)
    total = 5.0 / moist * (enthalpy(air, humidity) - enthalpy(surface, 1.0))
    found = 5.0 * (air - surface) - float(flux(surface, air, humidity))
    # Le^(2/3) = 0.9 instead of one makes the latent half 11 % more
    evidence("enthalpy_potential", "total heat", found, total, unit="W/m2", rel=0.08)
    assert found > total


@pytest.mark.parametrize(
    ("surface", "air", "humidity"), [(5.0, 25.0, 0.65), (5.0, 25.0, 0.7), (6.0, 22.0, 0.75)]
)
def test_as_much_again_as_convection_in_ordinary_humid_air(surface, air, humidity):
    ratio = -float(flux(surface, air, humidity)) / (5.0 * (air - surface))
    assert 0.8 < ratio < 1.3


def test_zero_above_the_dew_point_and_growing_below():
    dew = float(dew_point(25.0 + ZERO, 0.65)) - ZERO
    assert float(flux(dew + 0.01)) == 0.0
    assert float(flux(dew)) == pytest.approx(0.0, abs=1e-9)
    below = flux(np.linspace(0.1, dew - 0.1, 30))
    assert np.all(below < 0)
    assert np.all(np.diff(below) > 0)
    assert np.all(flux(np.linspace(dew + 0.1, 150.0, 40)) == 0.0)


def test_frost_begins_at_the_frost_point():
    # air at -5 °C, 60 % over water: frost point about -10.2 °C, dew point -11.5 °C
    frost = float(frost_point(ZERO - 5.0, 0.6)) - ZERO
    dew = float(dew_point(ZERO - 5.0, 0.6)) - ZERO
    assert dew < frost
    assert float(flux(frost + 0.01, -5.0, 0.6)) == 0.0
    assert float(flux(0.5 * (frost + dew), -5.0, 0.6)) < 0.0


def test_freezing_adds_the_heat_of_melting():
    # 333.4 kJ/kg on 2501: one eighth and a bit
    above, below = flux(0.0), flux(-1e-6)
    assert float(below / above) == pytest.approx(2834.4 / 2501.0, rel=2e-3)


def test_evaporation_is_the_same_law_with_the_other_sign():
    common = {"air_temperature": 293.15, "relative_humidity": 0.5, "convection_coefficient": 6.0}
    surface = np.array([275.15, 285.15, 300.15, 340.15])
    mass = vapour_mass_flux(surface, **common)
    taken = evaporation_heat_flux(surface, **common)
    brought = latent_heat_flux(surface, **common)
    assert taken + brought == pytest.approx(mass * latent_heat(surface))
    assert np.all(taken * brought == 0.0)
    # at 67 °C evaporation is several times convection: no number can be corrected for it
    assert taken[3] > 5.0 * 6.0 * (340.15 - 293.15)


def test_a_wet_bulb_is_where_evaporation_takes_what_convection_brings(evidence):
    # the wet-bulb temperature of a ventilated thermometer: psychrolib 2.5
    for air, humidity in ((20.0, 0.5), (30.0, 0.3), (35.0, 0.6)):
        wet = psychrolib.GetTWetBulbFromRelHum(air, humidity, 101_325.0)
        taken = evaporation_heat_flux(
            wet + ZERO,
            air_temperature=air + ZERO,
            relative_humidity=humidity,
            convection_coefficient=30.0,
        )
        # adiabatic saturation is Lewis number one: Le^(2/3) = 0.9 takes a little over 10 % more
        brought = 30.0 * (air - wet)
        evidence("wet_bulb", "heat taken", taken, brought, unit="W/m2", rel=0.15)


def test_boiling_has_no_number_and_a_hot_dry_surface_none_to_give():
    common = {"air_temperature": 293.15, "relative_humidity": 0.5, "convection_coefficient": 6.0}
    hot = np.array([360.0, 380.0])
    assert np.isnan(evaporation_heat_flux(hot, **common)).tolist() == [False, True]
    assert latent_heat_flux(hot, **common).tolist() == [0.0, 0.0]


def test_analogy_in_figures():
    # Le about 0.86 for vapour in air: ASHRAE Fundamentals, Le^(2/3) = 0.9
    assert float(lewis_number(293.15)) == pytest.approx(0.86, abs=0.03)
    rho_cp = PropsSI("D", "T", 293.15, "P", 101_325, "Air") * PropsSI(
        "C", "T", 293.15, "P", 101_325, "Air"
    )
    found = float(mass_transfer_coefficient(6.0, 293.15))
    assert found == pytest.approx(6.0 / (rho_cp * 0.9), rel=0.03)


def test_shapes_and_nan():
    found = flux(np.array([[1.0, np.nan, 30.0]]), np.array([[25.0], [20.0]]))
    assert found.shape == (2, 3)
    assert np.isnan(found[:, 1]).all()
    assert np.isfinite(found[:, [0, 2]]).all()


def test_wrong_inputs_are_refused():
    with pytest.raises(InputError, match="relative humidity is 65; expected 0 <= value <= 1"):
        flux(5.0, humidity=65.0)
    with pytest.raises(InputError, match="convection coefficient is -1 W/"):
        flux(5.0, coefficient=-1.0)
