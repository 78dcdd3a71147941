import numpy as np
import pytest

from cladwatt.errors import InputError
from cladwatt.physics.constants import STEFAN_BOLTZMANN
from cladwatt.physics.radiation import combined_surroundings, radiative_coefficient, radiative_flux
from cladwatt.physics.surface_balance import SurfaceExchange, surface_fluxes

SIGMA = 5.67e-8
"""As the textbooks print it. [W/(m2 K4)]"""


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


def test_the_base_of_a_black_furnace(evidence):
    # Çengel, example 12-6: cube of 5 m, base 800 K, top 1500 K, sides 500 K; F = 0.2 to the top
    around = combined_surroundings([1500.0, 500.0], [0.2, 0.8])
    kilowatts = 25e-3 * radiative_flux(800.0, emissivity=1.0, surroundings_temperature=around)
    evidence("cengel_black_furnace", "net from the base", kilowatts, -925.0, unit="kW", rel=1e-3)
    for share, other, printed in ((0.8, 500.0, 394.0), (0.2, 1500.0, -1319.0)):
        parts = 25e-3 * share * SIGMA * (800.0**4 - other**4)
        evidence.recomputed(
            "cengel_black_furnace", f"to {other:g} K", parts, printed, by="the law written out",
            unit="kW", abs=0.5,
        )  # fmt: skip
    whole = 25e-3 * SIGMA * (800.0**4 - 0.8 * 500.0**4 - 0.2 * 1500.0**4)
    evidence.recomputed(
        "cengel_black_furnace", "net from the base", whole, -925.0, by="the law written out",
        unit="kW", abs=1.0,
    )  # fmt: skip


@pytest.mark.parametrize(
    ("absorptance", "emissivity", "printed"),
    [(0.9, 0.9, 307.0), (0.9, 0.1, 575.0), (0.1, 0.9, -234.0), (0.1, 0.1, 34.0)],
)
def test_surfaces_under_sun_and_sky(evidence, absorptance, emissivity, printed):
    # Çengel, example 11-5: 400 W/m2 of beam 20 degrees off the normal, 300 W/m2 diffuse, surface
    # 320 K, sky 260 K; heat taken up, in whole watts
    sun = 400.0 * np.cos(np.deg2rad(20.0)) + 300.0
    exchange = SurfaceExchange(300.0, 260.0, 0.0, 0.2, emissivity, absorbed_solar=absorptance * sun)
    fluxes = surface_fluxes(320.0, exchange)
    taken = fluxes.absorbed_solar - fluxes.radiation
    what = f"absorptance {absorptance}, emissivity {emissivity}"
    evidence("cengel_selective_surfaces", what, taken, printed, unit="W/m2", abs=1.0)
    other = absorptance * sun - emissivity * SIGMA * (320.0**4 - 260.0**4)
    evidence.recomputed(
        "cengel_selective_surfaces", what, other, printed, by="the law written out", unit="W/m2",
        abs=1.0,
    )  # fmt: skip


@pytest.mark.parametrize("emissivity", [0.85, 0.95])
def test_grey_surroundings_are_nearly_black_ones(evidence, emissivity):
    # a small pipe in the middle of a cubical room sees every face alike: floor, walls, ceiling
    shares = np.array([1.0, 4.0, 1.0]) / 6.0
    kelvin = np.array([288.15, 293.15, 308.15])
    between = np.array([[0.0, 0.8, 0.2], [0.2, 0.6, 0.2], [0.2, 0.8, 0.0]])
    emitted = emissivity * STEFAN_BOLTZMANN * kelvin**4
    radiosity = np.linalg.solve(np.eye(3) - (1.0 - emissivity) * between, emitted)
    seen = (shares @ radiosity / STEFAN_BOLTZMANN) ** 0.25
    ours = combined_surroundings(list(kelvin), list(shares))
    # a quarter of the 2 K that a piece's temperature is uncertain by where nobody says better
    evidence("room_radiosity", f"emissivity {emissivity}", ours, seen, unit="K", abs=0.5)
