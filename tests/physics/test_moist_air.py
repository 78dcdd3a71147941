import CoolProp.CoolProp as reference
import numpy as np
import pytest
from CoolProp.HumidAirProp import HAPropsSI

from cladwatt.physics.air import air_properties
from cladwatt.physics.convection import convection_coefficient
from cladwatt.physics.moist_air import moist_air_properties, vapour_mole_fraction

TEMPERATURES = (268.15, 283.15, 303.15, 323.15)
HUMIDITIES = (0.1, 0.5, 1.0)


@pytest.mark.parametrize("pressure", [80_000.0, 101_325.0])
def test_mole_fraction_against_coolprop(pressure, evidence):
    # CoolProp humid air; above freezing, below it takes saturation over ice; it has the enhancement
    # factor of the air, 0.4 to 0.6 %
    for humidity in HUMIDITIES:
        expected = [
            HAPropsSI("psi_w", "T", t, "P", pressure, "R", humidity) for t in TEMPERATURES[1:]
        ]
        found = vapour_mole_fraction(np.array(TEMPERATURES[1:]), humidity, pressure)
        evidence("humid_air_coolprop", "mole fraction of vapour", found, expected, rel=6e-3)


def states():
    for temperature in TEMPERATURES:
        for humidity in HUMIDITIES:
            state = ("T", temperature, "P", 101_325.0, "R", humidity)
            yield state, moist_air_properties(temperature, 101_325.0, HAPropsSI("psi_w", *state))


def test_density_and_heat_capacity_against_coolprop(evidence):
    # CoolProp humid air (virial mixture): the stated distance of ideal gases
    for state, air in states():
        at_50 = state[1] > 310
        expected = 1 / HAPropsSI("Vha", *state)
        evidence("humid_air_coolprop", "density", air.density, expected, rel=1.5e-3)
        expected = HAPropsSI("Cha", *state)
        tolerance = 5e-3 if at_50 else 1.5e-3
        evidence("humid_air_coolprop", "heat capacity", air.specific_heat, expected, rel=tolerance)


@pytest.mark.parametrize(
    ("quantity", "key", "low"), [("dynamic_viscosity", "M", 0.98), ("conductivity", "K", 0.975)]
)
def test_mixing_of_viscosity_and_conductivity_is_disputed(quantity, key, low, evidence):
    # CoolProp humid air takes another mixing rule than Wilke's; the same parts
    pairs = [(getattr(air, quantity), HAPropsSI(key, *state)) for state, air in states()]
    found, expected = np.array(pairs).T
    evidence.spread("humid_air_disputed", quantity, found, expected, low=low, high=1.001)


def test_mixing_rule_on_the_reference_equations_of_the_parts(evidence):
    # Wilke 1950, Mason and Saxena 1958, written out with CoolProp's saturated vapour and dry air
    for temperature in (290.0, 310.0, 330.0):
        x, mass_air, mass_water = 0.06, 28.965, 18.015
        vapour = {k: reference.PropsSI(k, "T", temperature, "Q", 1, "Water") for k in "VL"}
        dry = {k: reference.PropsSI(k, "T", temperature, "P", 101_325.0, "Air") for k in "VL"}

        def phi(first, second, mass_first, mass_second):
            root = (first / second) ** 0.5 * (mass_second / mass_first) ** 0.25
            return (1 + root) ** 2 / (8 * (1 + mass_first / mass_second)) ** 0.5

        of_air = (1 - x) / (1 - x + x * phi(dry["V"], vapour["V"], mass_air, mass_water))
        of_vapour = x / (x + (1 - x) * phi(vapour["V"], dry["V"], mass_water, mass_air))
        found = moist_air_properties(temperature, 101_325.0, x)
        for quantity, key in (("dynamic_viscosity", "V"), ("conductivity", "L")):
            expected = of_air * dry[key] + of_vapour * vapour[key]
            evidence("humid_air_mixing", quantity, getattr(found, quantity), expected, rel=2.5e-3)


def test_no_vapour_is_dry_air():
    temperature = np.array([250.0, 350.0, np.nan])
    for moist, dry in zip(
        moist_air_properties(temperature, 9e4, 0.0), air_properties(temperature, 9e4), strict=True
    ):
        np.testing.assert_array_equal(moist, dry)
    tiny = moist_air_properties(temperature, 9e4, 1e-9)
    np.testing.assert_allclose(tiny.prandtl, air_properties(temperature).prandtl, rtol=1e-7)


def test_shapes_broadcast_and_nan_passes():
    air = moist_air_properties(np.array([280.0, np.nan]), 1e5, np.array([[0.01], [0.03], [0.0]]))
    for values in air[:6]:
        assert values.shape == (3, 2)
        np.testing.assert_array_equal(np.isnan(values), [[False, True]] * 3)


def test_fraction_is_held_at_one():
    assert vapour_mole_fraction(380.0, 1.0) == 1.0


def test_humidity_hardly_moves_the_coefficient():
    # the stated ground for dry air by default: about 1 % for saturated air of 30 C
    for wind in (0.0, 3.0):
        dry, moist = (
            convection_coefficient(
                333.15, air_temperature=303.15, diameter=0.15, wind_speed=wind,
                relative_humidity=humidity,
            )
            for humidity in (None, 1.0)
        )  # fmt: skip
        assert 0.002 < abs(float(moist / dry) - 1) < 0.013
