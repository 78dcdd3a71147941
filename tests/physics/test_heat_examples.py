"""Worked examples of textbooks; inputs beside each, published results in heat_examples.csv."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest

from cladwatt.physics.conduction import critical_radius, cylinder_resistance, fin_length
from cladwatt.physics.convection import (
    nusselt_churchill_bernstein,
    nusselt_churchill_chu_horizontal,
    nusselt_churchill_chu_vertical,
    nusselt_hilpert,
    nusselt_zukauskas,
    rayleigh_number,
    reynolds_number,
)
from cladwatt.physics.lagged_pipe import SurfaceExchange, bare_pipe_loss
from cladwatt.physics.radiation import radiative_flux
from cladwatt.physics.surface_balance import surface_coefficients, surface_fluxes

with (Path(__file__).parents[1] / "published" / "heat_examples.csv").open(
    encoding="utf-8", newline=""
) as file:
    RESULTS = {(row["id"], row["quantity"]): row for row in csv.DictReader(file)}

PI = math.pi


def kelvin(celsius):
    return celsius + 273.15


CHECKS = {
    "C1": "incropera_9_4",
    "C2": "incropera_9_2",
    "C3": "incropera_7_4",
    "C4": "holman_7_5",
    "C6": "holman_6_7",
    "C7": "cengel_9_1",
    "C9": "cengel_7_53",
    "C10": "cengel_7_100",
    "C11": "cengel_7_6",
    "C12": "incropera_1_2",
    "C13": "trade_1950",
    "D1": "cengel_3_8",
    "D2": "cengel_3_70",
    "D3": "holman_2_2",
    "D4": "holman_2_5",
    "D5": "incropera_3_5",
    "D6": "kreith_2_2",
    "D7": "kreith_2_3",
    "D8": "geankoplis_4_3_2",
    "D12": "sukhatme_2_5",
    "D13": "incropera_3_9",
}  # fmt: skip


@pytest.fixture
def agrees(evidence):
    def compare(example, quantity, found, tolerance_percent=None):
        row = RESULTS[example, quantity]
        check = CHECKS[example] + ("_measured" if quantity.endswith("measured") else "")
        what = quantity.replace("_", " ") + (", own properties" if tolerance_percent else "")
        percent = tolerance_percent or float(row["tolerance_percent"])
        unit = row["unit"].removeprefix("-")
        evidence(check, what, found, float(row["published"]), unit=unit, rel=percent / 100)

    return compare


def test_c1_steam_pipe_in_a_room(agrees):
    diameter, surface, air = 0.1, kelvin(165.0), kelvin(23.0)
    rayleigh = 9.8 * 2.725e-3 * 142.0 * diameter**3 / (22.8e-6 * 32.8e-6)
    found = rayleigh_number(
        surface - air,
        length=diameter,
        expansion=2.725e-3,
        kinematic_viscosity=22.8e-6,
        prandtl=22.8e-6 / 32.8e-6,
        gravity=9.8,
    )
    assert found == pytest.approx(rayleigh)
    agrees("C1", "rayleigh", found)
    coefficient = nusselt_churchill_chu_horizontal(found, 0.697) * 0.0313 / diameter
    convection = PI * diameter * coefficient * 142.0
    radiation = (
        PI * diameter * radiative_flux(surface, emissivity=0.85, surroundings_temperature=air)
    )
    agrees("C1", "convection", convection)
    agrees("C1", "radiation", radiation)
    agrees("C1", "loss", convection + radiation)


def test_c1_with_own_properties(agrees):
    room = SurfaceExchange(kelvin(23.0), kelvin(23.0), 0.0, 0.1, 0.85)
    agrees("C1", "loss", bare_pipe_loss(kelvin(165.0), room), 2.0)


def test_c2_vertical_screen(agrees):
    found = rayleigh_number(
        209.0,
        length=0.71,
        expansion=1 / 400.65,
        kinematic_viscosity=26.4e-6,
        prandtl=26.4 / 38.3,
        gravity=9.8,
    )
    agrees("C2", "rayleigh", found)
    nusselt = nusselt_churchill_chu_vertical(found, 0.690)
    agrees("C2", "nusselt", nusselt)
    agrees("C2", "loss", nusselt * 0.0338 / 0.71 * 0.71 * 1.02 * 209.0)


def test_c3_cylinder_in_cross_flow(agrees):
    free = reynolds_number(10.0, length=12.7e-3, kinematic_viscosity=15.89e-6)
    film = reynolds_number(10.0, length=12.7e-3, kinematic_viscosity=20.92e-6)
    agrees("C3", "nusselt_zukauskas", nusselt_zukauskas(free, 0.707, prandtl_surface=0.690))
    agrees("C3", "nusselt_churchill_bernstein", nusselt_churchill_bernstein(film, 0.700))
    agrees("C3", "nusselt_hilpert", nusselt_hilpert(film, 0.700))


def test_c3_with_own_properties_against_the_measurement(agrees):
    # the measured coefficient; published correlations spread by 19 % on this case
    air, surface = kelvin(26.2), kelvin(128.4)
    tube = SurfaceExchange(air, air, 10.0, 12.7e-3, 0.0)
    agrees("C3", "coefficient_measured", surface_coefficients(surface, tube)[0])


def test_c4_wide_pipe_against_an_older_correlation(agrees):
    # one correlation against another: 20 %
    prandtl = 0.687
    rayleigh = 9.81 / (0.5 * (250 + 15) + 273.15) * 235.0 * 0.3048**3 / 26.54e-6**2 * prandtl
    agrees("C4", "nusselt", nusselt_churchill_chu_horizontal(rayleigh, prandtl))


def test_c6_fast_cross_flow_against_an_older_correlation(agrees):
    # Hilpert's last range as in the example; Churchill-Bernstein is 16 % below
    reynolds = 101_325 / (287 * (92.5 + 273.15)) * 50.0 * 0.05 / 2.14e-5
    for nusselt in (nusselt_hilpert, nusselt_churchill_bernstein):
        agrees("C6", "coefficient", nusselt(reynolds, 0.695) * 0.0312 / 0.05)


def test_c7_hot_water_pipe(agrees):
    found = rayleigh_number(
        50.0,
        length=0.08,
        expansion=1 / 318,
        kinematic_viscosity=1.749e-5,
        prandtl=0.7241,
        gravity=9.81,
    )
    agrees("C7", "rayleigh", found)
    nusselt = nusselt_churchill_chu_horizontal(found, 0.7241)
    agrees("C7", "nusselt", nusselt)
    agrees("C7", "loss", nusselt * 0.02699 / 0.08 * PI * 0.08 * 6.0 * 50.0)


def test_c7_with_own_properties(agrees):
    room = SurfaceExchange(kelvin(20.0), kelvin(20.0), 0.0, 0.08, 0.0)
    agrees("C7", "loss", 6.0 * bare_pipe_loss(kelvin(70.0), room), 2.0)


def test_c9_steam_pipe_in_light_wind(agrees):
    reynolds = reynolds_number(10 / 3.6, length=0.1, kinematic_viscosity=1.702e-5)
    agrees("C9", "reynolds", reynolds)
    nusselt = nusselt_churchill_bernstein(reynolds, 0.7255)
    agrees("C9", "nusselt", nusselt)
    area = PI * 0.1 * 12.0
    agrees("C9", "convection", nusselt * 0.02662 / 0.1 * area * 70.0)
    flux = radiative_flux(kelvin(75.0), emissivity=0.8, surroundings_temperature=kelvin(0.0))
    agrees("C9", "radiation", flux * area)


def test_c9_with_own_properties(agrees):
    wind = SurfaceExchange(kelvin(5.0), kelvin(0.0), 10 / 3.6, 0.1, 0.8)
    flux = surface_fluxes(kelvin(75.0), wind)
    agrees("C9", "convection", flux.convection * PI * 0.1 * 12.0, 2.0)
    agrees("C9", "radiation", flux.radiation * PI * 0.1 * 12.0)


def test_c10_lagged_pipe_across_air(agrees):
    reynolds = reynolds_number(4.0, length=0.116, kinematic_viscosity=1.426e-5)
    agrees("C10", "nusselt", nusselt_churchill_bernstein(reynolds, 0.7336))


def test_c11_bare_pipe_in_wind(agrees):
    reynolds = reynolds_number(8.0, length=0.1, kinematic_viscosity=1.896e-5)
    nusselt = nusselt_churchill_bernstein(reynolds, 0.7202)
    agrees("C11", "coefficient", nusselt * 0.02808 / 0.1)


def test_c11_with_own_properties(agrees):
    # the printed result is 0.45 % under the formula with the printed properties, whose
    # conductivity is 2 % under the reference equations
    wind = SurfaceExchange(kelvin(10.0), kelvin(10.0), 8.0, 0.1, 0.0)
    agrees("C11", "coefficient", surface_coefficients(kelvin(110.0), wind)[0], 2.5)


def test_c12_emission_and_loss(agrees):
    surface, room = kelvin(200.0), kelvin(25.0)
    emission = radiative_flux(surface, emissivity=0.8, surroundings_temperature=0.0)
    agrees("C12", "emission", emission)
    net = radiative_flux(surface, emissivity=0.8, surroundings_temperature=room)
    agrees("C12", "loss", PI * 0.07 * (15.0 * 175.0 + net))


def test_c13_trade_table(agrees):
    # an old table against the correlations: 5 to 6 % stated, 10 % allowed between correlations
    air = (80 + 459.67) / 1.8
    foot, unit = 0.3048, 1055.056 / 3600
    first = SurfaceExchange(air, air, 0.0, 88.9e-3, 0.95)
    surface = (430 + 459.67) / 1.8
    per_area = bare_pipe_loss(surface, first) / (PI * 88.9e-3) * foot**2 / unit
    agrees("C13", "loss_a", per_area / 350.0)
    second = SurfaceExchange(air, air, 0.0, 60.3e-3, 0.95)
    steam = kelvin(176.6)  # saturated at 120 psig
    per_length = bare_pipe_loss(steam, second) * foot / unit / ((steam - air) * 1.8)
    agrees("C13", "loss_b", per_length)


def film(coefficient, diameter):
    return 1 / (PI * diameter * coefficient)


def test_d1_lagged_steam_pipe(agrees):
    lagging = cylinder_resistance(0.055, 0.115, 0.05)
    total = film(60.0, 0.05) + cylinder_resistance(0.05, 0.055, 80.0) + lagging
    loss = 315.0 / (total + film(18.0, 0.115))
    agrees("D1", "loss", loss)
    agrees("D1", "lagging_drop", loss * lagging)


def test_d2_thickness_for_nine_tenths_saved(agrees):
    bare = 135.0 / film(20.0, 0.1)
    agrees("D2", "loss", 50.0 * bare)
    radius = np.linspace(0.0501, 0.1, 20_000)
    lagged = 135.0 / (cylinder_resistance(0.1, 2 * radius, 0.035) + film(20.0, 2 * radius))
    agrees("D2", "outer_radius", radius[np.argmin(np.abs(lagged - 0.1 * bare))])


def test_d3_two_layers(agrees):
    steel = cylinder_resistance(0.02, 0.04, 19.0)
    loss = 500.0 / (steel + cylinder_resistance(0.04, 0.10, 0.2))
    agrees("D3", "loss", loss)
    agrees("D3", "interface", 600.0 - loss * steel)


def test_d4_critical_radius(agrees):
    radius = critical_radius(0.17, 3.0)
    agrees("D4", "critical_radius", 100 * radius)
    lagged = 180.0 / (cylinder_resistance(0.05, 2 * radius, 0.17) + film(3.0, 2 * radius))
    agrees("D4", "loss_lagged", lagged)
    agrees("D4", "loss_bare", 180.0 / film(3.0, 0.05))


def test_d5_critical_radius_of_a_tube(agrees):
    agrees("D5", "critical_radius", 1e3 * critical_radius(0.055, 5.0))


def test_d6_steam_pipe(agrees):
    inner = film(10_000.0, 0.1) + cylinder_resistance(0.1, 0.12, 400.0)
    agrees("D6", "loss_bare", 80.0 / (inner + film(15.0, 0.12)))
    lagging = cylinder_resistance(0.12, 0.22, 0.2)
    agrees("D6", "loss_lagged", 80.0 / (inner + lagging + film(15.0, 0.22)))


def test_d7_plastic_pipe(agrees):
    total = film(300.0, 0.03) + cylinder_resistance(0.03, 0.04, 0.5) + film(10.0, 0.04)
    agrees("D7", "overall_coefficient", 1 / (total * PI * 0.04))
    agrees("D7", "loss", 170.0 / total)


def test_d8_insulated_tube(agrees):
    steel = cylinder_resistance(0.0254, 0.0508, 21.63)
    loss = (811.0 - 310.8) / (steel + cylinder_resistance(0.0508, 0.1016, 0.2423))
    agrees("D8", "loss", loss * 0.305)
    agrees("D8", "interface", 811.0 - loss * steel)


def test_d12_lagging_a_small_tube(agrees):
    agrees("D12", "critical_radius", 100 * critical_radius(0.2, 10.0))
    diameter = 0.02 + 2 * np.linspace(0.0, 0.05, 501)
    total = film(500.0, 0.016) + cylinder_resistance(0.02, diameter, 0.2) + film(10.0, diameter)
    agrees("D12", "critical_radius", 50 * diameter[np.argmin(total)])


@pytest.mark.parametrize(
    ("rod", "conductivity"), [("copper", 398.0), ("aluminium", 180.0), ("steel", 14.0)]
)
def test_d13_heat_runs_along_a_fin(rod, conductivity, agrees, evidence):
    # a rod gives off heat all round: a sheet of a quarter of its diameter gives off as much
    length = fin_length(0.005 / 4, conductivity, 100.0)
    section = PI * 0.005**2 / 4
    agrees("D13", f"loss_{rod}", conductivity * section * 75.0 / length)
    row = RESULTS["D13", f"loss_{rod}"]
    printed, rel = float(row["published"]), float(row["tolerance_percent"]) / 100
    by_hand = 75.0 * math.sqrt(100.0 * PI * 0.005 * conductivity * section)
    evidence.recomputed("incropera_3_9", f"loss {rod}", by_hand, printed, unit="W", rel=rel,
                        by="formula by hand")  # fmt: skip
