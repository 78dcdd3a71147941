import csv
from pathlib import Path

import numpy as np
import psychrolib
import pytest
from CoolProp.HumidAirProp import HAPropsSI

from cladwatt.errors import InputError
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.humidity import (
    absolute_humidity,
    dew_point,
    dew_point_from_vapour_pressure,
    frost_point,
    frost_point_from_vapour_pressure,
    saturation_pressure_ice,
    saturation_pressure_magnus,
    saturation_pressure_water,
    vapour_pressure,
)

psychrolib.SetUnitSystem(psychrolib.SI)

with (Path(__file__).parents[1] / "published" / "dew_point_cases.csv").open(
    encoding="utf-8", newline=""
) as file:
    CASES = list(csv.DictReader(file))


def half_last_digit(text):
    return 0.5 * 10.0 ** -len(text.partition(".")[2])


@pytest.mark.parametrize("row", CASES, ids=lambda r: f"{r['T_air_C']}C-{r['RH_pct']}")
def test_dew_point_cases(row, evidence):
    # dew_point_cases.csv - WMO Magnus; ASHRAE Fundamentals (Hyland-Wexler)
    celsius, humidity = float(row["T_air_C"]), float(row["RH_pct"]) / 100
    air = celsius + ZERO_CELSIUS
    magnus = float(saturation_pressure_magnus(air)) / 100
    table = float(row["e_s_Magnus_WMO_hPa"])
    evidence("dew_points", "saturation, Magnus", magnus, table, unit="hPa", abs=5.1e-4)
    over = saturation_pressure_water(air) if celsius > 0 else saturation_pressure_ice(air)
    table = float(row["e_s_ASHRAE_hPa"])
    evidence("dew_points", "saturation", float(over) / 100, table, unit="hPa", abs=5.1e-4)
    # The handbook takes humidity over ice up to 0 °C and the point over ice below it. Of that
    # pressure the published dew or frost point must come back.
    pressure = humidity * over
    dew = dew_point_from_vapour_pressure(pressure)
    found = dew if dew >= ZERO_CELSIUS else frost_point_from_vapour_pressure(pressure)
    text = row["T_dew_ASHRAE_C"]
    # 2 mK: the library behind the column iterates to 1 mK and 0.01 K is kept by its digits
    allowed = half_last_digit(text) + 2e-3
    printed = float(text) + ZERO_CELSIUS
    evidence("dew_points", "dew or frost point", found, printed, unit="K", abs=allowed)
    # over water, the constant sets agree to 0.02 K for dew points above 5 °C
    if float(row["T_dew_Magnus_WMO_C"]) > 5.0:
        printed = float(row["T_dew_Magnus_WMO_C"]) + ZERO_CELSIUS
        evidence("wmo_8", "dew point", dew_point(air, humidity), printed, unit="K", abs=0.02)


@pytest.mark.parametrize("celsius", [0.5, 20.0, 60.0, 100.0, 180.0])
def test_saturation_over_water_against_psychrolib(celsius, evidence):
    expected = psychrolib.GetSatVapPres(celsius)
    found = float(saturation_pressure_water(celsius + ZERO_CELSIUS))
    evidence("psychrolib_saturation", "over water", found, expected, unit="Pa", rel=1e-9)


@pytest.mark.parametrize("celsius", [-80.0, -40.0, -10.0, -0.5])
def test_saturation_over_ice_against_psychrolib(celsius, evidence):
    expected = psychrolib.GetSatVapPres(celsius)
    found = saturation_pressure_ice(celsius + ZERO_CELSIUS)
    evidence("psychrolib_saturation", "over ice", found, expected, unit="Pa", rel=1e-9)


def test_supercooled_water_against_the_wmo_form(evidence):
    temperature = np.linspace(233.15, 273.15, 41)  # WMO-No. 8: -45 °C to 60 °C over water
    found, expected = (
        saturation_pressure_water(temperature),
        saturation_pressure_magnus(temperature),
    )
    evidence("wmo_8", "supercooled water", found, expected, unit="Pa", rel=0.01)


@pytest.mark.parametrize(("celsius", "humidity"), [(5.0, 0.9), (20.0, 0.5), (35.0, 0.3), (45, 0.8)])
def test_dew_point_and_vapour_content_against_coolprop(celsius, humidity, evidence):
    air = celsius + ZERO_CELSIUS
    inputs = ("T", air, "P", 101325.0, "R", humidity)
    # CoolProp is a real-gas model: the enhancement factor, about 0.4 %, differs by some 0.05 %
    # between air and dew point, worth 0.0005 T^2 R / (M L) = 8 mK
    dew, expected = dew_point(air, humidity), HAPropsSI("D", *inputs)
    evidence("coolprop_humid_air", "dew point", dew, expected, unit="K", abs=0.01)
    content = HAPropsSI("W", *inputs) / HAPropsSI("V", *inputs)
    found = absolute_humidity(air, humidity)
    evidence("coolprop_humid_air", "vapour content", found, content, unit="kg/m3", rel=7e-3)


@pytest.mark.parametrize("row", CASES[:-1], ids=lambda r: f"{r['T_air_C']}C-{r['RH_pct']}")
def test_absolute_humidity_cases(row, evidence):
    # same table, from the Magnus pressure, which is up to 0.3 % below Hyland-Wexler
    found = absolute_humidity(float(row["T_air_C"]) + ZERO_CELSIUS, float(row["RH_pct"]) / 100)
    expected = float(row["abs_humidity_g_m3"])
    evidence("dew_points", "vapour content", 1e3 * found, expected, unit="g/m3", rel=4e-3)


def test_frost_point_lies_above_the_dew_point_below_zero():
    air, humidity = 268.15, np.array([0.3, 0.6, 0.9])
    assert np.all(frost_point(air, humidity) > dew_point(air, humidity))
    np.testing.assert_allclose(
        saturation_pressure_ice(frost_point(air, humidity)),
        vapour_pressure(air, humidity),
        rtol=1e-10,
    )
    assert np.isnan(frost_point(300.0, 0.8))


def test_saturated_air_is_at_its_dew_point():
    air = np.linspace(243.15, 450.0, 60)
    np.testing.assert_allclose(dew_point(air, 1.0), air, atol=1e-8)


def test_dry_air_and_nan():
    found = dew_point(np.array([293.15, np.nan, 293.15]), np.array([0.0, 0.5, np.nan]))
    assert np.isnan(found).all()


def test_percent_is_refused():
    with pytest.raises(InputError, match=r"relative humidity is 50; .* not percent"):
        dew_point(293.15, 50.0)
    with pytest.raises(InputError, match=r"relative humidity is -0\.1"):
        absolute_humidity(293.15, np.array([0.4, -0.1]))
