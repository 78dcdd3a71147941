import csv
from pathlib import Path

import CoolProp.CoolProp as reference
import fluids
import numpy as np
import pytest

from cladwatt.physics.air import AIR_TEMPERATURE_RANGE, air_properties, pressure_at_altitude

with (Path(__file__).parents[1] / "published" / "air_properties_dry.csv").open(
    encoding="utf-8", newline=""
) as file:
    TABLE = [row for row in csv.DictReader(file) if 250 <= float(row["T_K"]) <= 800]


def column(name):
    return np.array([float(row[name]) for row in TABLE])


@pytest.mark.parametrize(
    ("quantity", "name", "unit"),
    [
        ("density", "rho_calc_1atm_kg_m3", 1.0),
        ("specific_heat", "cp_calc_kJ_kgK", 1e3),
        ("dynamic_viscosity", "mu_calc_1e-7_Pa_s", 1e-7),
        ("conductivity", "k_calc_1e-3_W_mK", 1e-3),
        ("prandtl", "Pr_calc", 1.0),
    ],
)
def test_air_against_recomputed_columns(quantity, name, unit, evidence):
    # air_properties_dry.csv, columns *_calc - Lemmon & Jacobsen equations
    found = getattr(air_properties(column("T_K")), quantity)
    evidence(
        "air_reference_equations", f"{quantity}, columns", found, column(name) * unit, rel=1.5e-3
    )


@pytest.mark.parametrize(
    ("quantity", "name", "unit", "tolerance"),
    [
        ("specific_heat", "cp_kJ_kgK", 1e3, 0.002),
        ("dynamic_viscosity", "mu_1e-7_Pa_s", 1e-7, 0.014),
        ("conductivity", "k_1e-3_W_mK", 1e-3, 0.022),
        ("prandtl", "Pr", 1.0, 0.027),
    ],
)
def test_air_against_textbook_table(quantity, name, unit, tolerance, evidence):
    # air_properties_dry.csv - Incropera Table A.4; the stated distance of that table from the
    # reference equations (k 2 %, mu 1.2 %, Pr 2.6 %) plus its rounding
    found = getattr(air_properties(column("T_K")), quantity)
    evidence("incropera_a_4", quantity, found, column(name) * unit, rel=tolerance)


def test_textbook_density_belongs_to_one_bar(evidence):
    # air_properties_dry.csv - Incropera Table A.4: densities agree at 1 bar within 0.3 %
    found = air_properties(column("T_K"), 1e5).density
    evidence("incropera_a_4", "density", found, column("rho_kg_m3"), unit="kg/m3", rel=3e-3)


@pytest.mark.parametrize(
    ("limits", "pressure", "tolerance"),
    [
        ((230, 800), 101_325.0, 1.5e-3),
        ((230, 800), 80_000.0, 1.5e-3),
        ((150, 900), 101_325.0, 7e-3),
    ],
)
@pytest.mark.parametrize(
    ("quantity", "key"),
    [
        ("density", "D"),
        ("specific_heat", "C"),
        ("dynamic_viscosity", "V"),
        ("conductivity", "L"),
        ("prandtl", "PRANDTL"),
    ],
)
def test_air_against_coolprop(limits, pressure, tolerance, quantity, key, evidence):
    # CoolProp, Air: the stated accuracy of the fits
    temperature = np.linspace(*limits, 60)
    found = getattr(air_properties(temperature, pressure), quantity)
    expected = reference.PropsSI(key, "T", temperature, "P", pressure, "Air")
    evidence("air_reference_equations", quantity, found, expected, rel=tolerance)


def test_expansion_and_kinematic_viscosity_follow_from_the_others():
    air = air_properties(np.array([260.0, 340.0]), np.array([[9e4], [1e5]]))
    np.testing.assert_allclose(air.expansion, [1 / 260.0, 1 / 340.0])
    np.testing.assert_allclose(air.kinematic_viscosity, air.dynamic_viscosity / air.density)
    assert air.density.shape == (2, 2)
    assert AIR_TEMPERATURE_RANGE == (150.0, 900.0)


@pytest.mark.parametrize("altitude", [-200.0, 0.0, 350.0, 1500.0, 4200.0, 10_000.0])
def test_pressure_against_standard_atmosphere(altitude, evidence):
    # fluids.ATMOSPHERE_1976 - U.S. Standard Atmosphere 1976
    expected = fluids.ATMOSPHERE_1976(altitude).P
    found = pressure_at_altitude(altitude)
    evidence("standard_atmosphere", "pressure", found, expected, unit="Pa", rel=1e-5)
