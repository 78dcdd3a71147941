"""Units: conversions at their defining points, and what a header says."""

import numpy as np
import pytest

from cladwatt.survey.temperature_unit import from_kelvin, to_kelvin, unit_in_header


# Defining points: SI Brochure, 9th edition, section 2.3.1 (0 °C = 273.15 K); the Fahrenheit scale
# has 32 and 212 at 0 and 100 °C and meets Celsius at -40.
@pytest.mark.parametrize(
    ("value", "unit", "kelvin"),
    [(0, "C", 273.15), (32, "F", 273.15), (212, "F", 373.15), (-40, "F", 233.15), (77, "K", 77)],
)
def test_to_kelvin_and_back(value, unit, kelvin):
    assert to_kelvin(float(value), unit) == pytest.approx(kelvin, abs=1e-9)
    assert from_kelvin(kelvin, unit) == pytest.approx(value, abs=1e-9)
    np.testing.assert_allclose(to_kelvin(np.array([value, value], float), unit), kelvin)


@pytest.mark.parametrize(
    ("lines", "unit"),
    [
        (["Temperature [°C]"], "C"),
        (["T (K)"], "K"),
        (["unit: K"], "K"),
        (["Unit;°F"], "F"),
        (['"temperature_unit": "C"'], "C"),
        (["Units = Celsius"], "C"),
        (["Einheit;K"], "K"),
        (["temperatures in degrees Fahrenheit"], "F"),
        (["deg C"], "C"),
        (["values in K"], "K"),
        (["Temperature in ℃"], "C"),
        (["Air;20 °C", "Matrix [K]"], "K"),
        (["Air [°C];20.5", "Temperature [K]"], "K"),
        (["Temperature [°F];0;1;2;3;4;5"], "F"),
        (["Reflected [°C]", "unit: K"], "K"),
        (["Air;20 °C"], None),
        (["Temperature [°C]", "Temperature [K]"], None),
        (["Camera K7, operator C. Kay, file F", "OK", "{\"shape\": [480, 640]}"], None),
        (["Klaus", "Cable", "unit 7 Kiln house", "unit Kiln"], None),
        ([], None),
    ],
)  # fmt: skip
def test_unit_in_header(lines, unit):
    assert unit_in_header(lines) == unit
