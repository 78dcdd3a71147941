import numpy as np
import pytest

from cladwatt.errors import InputError
from cladwatt.physics.constants import STEFAN_BOLTZMANN
from cladwatt.physics.radiation import combined_surroundings, radiative_coefficient, radiative_flux


def test_flux_is_the_difference_of_fourth_powers():
    surface, surroundings = np.array([250.0, 300.0, 900.0]), np.array([[260.0], [300.0]])
    found = radiative_flux(surface, emissivity=0.7, surroundings_temperature=surroundings)
    expected = 0.7 * STEFAN_BOLTZMANN * (surface**4 - surroundings**4)
    np.testing.assert_allclose(found, expected, rtol=1e-12, atol=1e-9)
    assert found[1, 1] == 0.0


def test_flux_keeps_its_digits_at_small_differences():
    # the derivative 4 eps sigma T^3 at 300 K
    found = radiative_flux(300.0 + 1e-6, emissivity=1.0, surroundings_temperature=300.0)
    assert found == pytest.approx(4e-6 * STEFAN_BOLTZMANN * 300.0**3, rel=1e-6)


def test_coefficient_times_difference_is_the_flux():
    settings = {"emissivity": 0.3, "surroundings_temperature": 280.0}
    assert radiative_coefficient(330.0, **settings) * 50.0 == pytest.approx(
        float(radiative_flux(330.0, **settings))
    )
    assert radiative_coefficient(280.0, **settings) == pytest.approx(
        0.3 * 4 * STEFAN_BOLTZMANN * 280.0**3
    )


def test_combined_surroundings_exchange_the_same_heat_as_their_parts():
    temperatures, factors = [240.0, 285.0, np.array([350.0, 400.0])], [0.5, 0.4, 0.1]
    one = combined_surroundings(temperatures, factors)
    parts = sum(
        factor * radiative_flux(310.0, emissivity=0.8, surroundings_temperature=temperature)
        for factor, temperature in zip(factors, temperatures, strict=True)
    )
    np.testing.assert_allclose(
        radiative_flux(310.0, emissivity=0.8, surroundings_temperature=one), parts
    )


@pytest.mark.parametrize("factors", [[0.5, 0.4], [1.2, -0.2], [0.0, np.array([1.0, 0.9])]])
def test_view_factors_must_be_shares(factors):
    with pytest.raises(InputError, match="expected none negative and a sum of 1"):
        combined_surroundings([280.0, 290.0], factors)


@pytest.mark.parametrize(("temperatures", "factors"), [([280.0], [0.5, 0.5]), ([], [])])
def test_one_view_factor_each(temperatures, factors):
    with pytest.raises(InputError, match="one view factor for each temperature"):
        combined_surroundings(temperatures, factors)
