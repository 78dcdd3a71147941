import csv
from pathlib import Path

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from iapws import IAPWS97
from iapws.iapws97 import _PSat_T, _TSat_P

from cladwatt.errors import InputError
from cladwatt.physics.air import pressure_at_altitude
from cladwatt.physics.steam import (
    SATURATION_PRESSURE_RANGE,
    SATURATION_TEMPERATURE_RANGE,
    absolute_pressure,
    saturation_pressure,
    saturation_temperature,
)

with (Path(__file__).parents[1] / "published" / "steam_saturation.csv").open(
    encoding="utf-8", newline=""
) as file:
    PRINTED = list(csv.DictReader(file))


def half_last_digit(printed):
    mantissa, _, exponent = printed.partition("e")
    return 0.5 * 10.0 ** (int(exponent) - len(mantissa.partition(".")[2]))


@pytest.mark.parametrize("row", PRINTED, ids=lambda row: row["id"])
def test_verification_values_of_the_release(row, evidence):
    # IAPWS R7-97(2012), tables 35 and 36: nine digits
    value = float(row["value"])
    if row["given"] == "temperature":
        found = float(saturation_pressure(value)) / 1e6
        other = _PSat_T(value)
    else:
        found = float(saturation_temperature(value * 1e6))
        other = _TSat_P(value)
    half = half_last_digit(row["printed"])
    what, _, unit = row["wanted"].partition("_")
    printed, allowed = float(row["printed"]), 1.001 * half
    # nine digits: relative to them, in kelvin too
    evidence("iapws_r7_97", what, found, printed, unit=unit, rel=allowed / printed)
    evidence.recomputed("iapws_r7_97", what, other, printed, unit=unit, rel=allowed / printed,
                        by="iapws")  # fmt: skip


@pytest.mark.parametrize("pressure", [2e3, 5e4, 101_325.0, 3e5, 8e5, 1.1e6, 4e6, 1.2e7, 2.1e7])
def test_against_two_libraries(pressure, evidence):
    found = float(saturation_temperature(pressure))
    expected = IAPWS97(P=pressure / 1e6, x=1).T
    evidence("iapws_saturation", "temperature", found, expected, unit="K", abs=1e-6)
    # CoolProp evaluates IAPWS-95; the release allows the industrial formulation about 0.01 K
    expected = PropsSI("T", "P", pressure, "Q", 1, "Water")
    evidence("coolprop_saturation", "temperature", found, expected, unit="K", abs=0.015)
    back = PropsSI("P", "T", found, "Q", 0, "IF97::Water")
    again = saturation_pressure(found)
    evidence("coolprop_saturation", "pressure", again, back, unit="Pa", rel=1e-8)


def test_the_normal_boiling_point():
    # 99.974 °C at 101.325 kPa: ITS-90 text books; not the old 100 °C exactly
    assert float(saturation_temperature(101_325.0)) - 273.15 == pytest.approx(99.974, abs=1e-3)


def test_forth_and_back_over_the_whole_line():
    temperature = np.linspace(*SATURATION_TEMPERATURE_RANGE, 300)
    pressure = saturation_pressure(temperature)
    assert np.all(np.diff(pressure) > 0)
    inner = pressure[(pressure >= SATURATION_PRESSURE_RANGE[0]) & (pressure <= 22.064e6)]
    assert inner.size >= 298
    again = saturation_pressure(np.clip(saturation_temperature(inner), None, 647.096))
    assert again == pytest.approx(inner, rel=1e-7)


def test_shapes_and_nan_pass():
    found = saturation_temperature(np.array([[1e5, np.nan], [1e6, 2e6]]))
    assert found.shape == (2, 2)
    assert np.isnan(found[0, 1])
    assert np.isfinite(found[1]).all()


@pytest.mark.parametrize("pressure", [600.0, 23e6, -1.0])
def test_a_pressure_outside_is_refused_with_the_range(pressure):
    with pytest.raises(InputError, match=r"absolute steam pressure is .* expected 611\.213 to"):
        saturation_temperature(np.array([1e5, pressure]))


@pytest.mark.parametrize("temperature", [270.0, 650.0])
def test_a_temperature_outside_is_refused_with_the_range(temperature):
    with pytest.raises(InputError, match=r"steam temperature is .* expected 273\.15 to 647\.096 K"):
        saturation_pressure(temperature)


def test_a_gauge_adds_the_air_of_the_site():
    # 7 bar on the gauge, at sea level and at 1500 m
    low = absolute_pressure(7e5)
    high = absolute_pressure(7e5, pressure_at_altitude(1500.0))
    assert float(low) == pytest.approx(801_325.0)
    difference = saturation_temperature(low) - saturation_temperature(high)
    slope = PropsSI("T", "P", 801_325.0, "Q", 1, "Water") - PropsSI(
        "T", "P", 7e5 + 84_556.0, "Q", 1, "Water"
    )
    # 84 556 Pa at 1500 m: ISO 2533
    assert float(difference) == pytest.approx(slope, abs=0.01)


def test_less_than_nothing_is_refused():
    with pytest.raises(InputError, match="gauge pressure is -110000 Pa, absolute -8675 Pa"):
        absolute_pressure(-110_000.0)
