import csv
from math import log, pi
from pathlib import Path

import fluids
import ht
import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

from cladwatt.errors import InputError
from cladwatt.physics.conduction import cylinder_resistance
from cladwatt.physics.inside_film import (
    NUSSELT_LAMINAR,
    film_coefficient,
    film_resistance,
    friction_factor_smooth,
    nusselt_dittus_boelter,
    nusselt_gnielinski,
    nusselt_inside,
    outside_film_validity,
    wall_temperature,
)

with (Path(__file__).parents[1] / "published" / "inside_film.csv").open(
    encoding="utf-8", newline=""
) as file:
    PRINTED = {(row["id"], row["quantity"]): row for row in csv.DictReader(file)}


def printed(example, quantity):
    """What is printed, with its unit and tolerance, as the evidence takes it."""
    row = PRINTED[example, quantity]
    rel = float(row["tolerance_percent"]) / 100
    return float(row["published"]), {"unit": row["unit"].removeprefix("-"), "rel": rel}


def test_air_heated_in_a_tube(evidence):
    # Holman, example 6-1: gas law for the density, mu 2.57e-5, k 0.0386, Pr 0.681
    density = 2 * 101_320.0 / (287.0 * 473.0)
    reynolds = density * 10.0 * 0.0254 / 2.57e-5
    number, how = printed("H6.1", "reynolds")
    evidence.recomputed("holman_6_1", "reynolds", reynolds, number, **how, by="formula by hand")
    ours = float(nusselt_dittus_boelter(14756.0, 0.681, heated=True))
    theirs = ht.turbulent_Dittus_Boelter(14756.0, 0.681, True, revised=True)
    for what, factor in (("nusselt", 1.0), ("coefficient", 0.0386 / 0.0254)):
        number, how = printed("H6.1", what)
        evidence("holman_6_1", what, ours * factor, number, **how)
        evidence.recomputed("holman_6_1", what, theirs * factor, number, **how, by="ht")


def test_film_in_a_chain_of_resistances(evidence):
    # Cengel, example 3-8: steam 320 °C, h 60 in 5 cm; wall and 3 cm of glass wool; h 18; air 5 °C
    film = film_resistance(0.05, 60.0)
    number, how = printed("D1", "film_resistance")
    evidence("cengel_3_8", "film resistance", film, number, **how)
    others = cylinder_resistance(0.05, 0.055, 80.0) + cylinder_resistance(0.055, 0.115, 0.05)
    loss = 315.0 / (film + others + film_resistance(0.115, 18.0))
    drop = 593.15 - wall_temperature(593.15, loss, film)
    number, how = printed("D1", "film_drop")
    evidence("cengel_3_8", "film drop", drop, number, **how)
    # the same chain written out
    films = [1 / (pi * 0.05 * 60.0), 1 / (pi * 0.115 * 18.0)]
    walls = [log(0.055 / 0.05) / (2 * pi * 80.0), log(0.115 / 0.055) / (2 * pi * 0.05)]
    for what, again in (
        ("film_resistance", films[0]),
        ("film_drop", 315.0 * films[0] / sum(films + walls)),
    ):
        number, how = printed("D1", what)
        evidence.recomputed("cengel_3_8", what.replace("_", " "), again, number, **how,
                            by="formula by hand")  # fmt: skip


@pytest.mark.parametrize("reynolds", [4e3, 1e4, 5e4, 3e5, 2e6])
@pytest.mark.parametrize("prandtl", [0.7, 1.0, 2.0, 7.0, 90.0])
def test_turbulent_flow_against_ht(reynolds, prandtl, evidence):
    friction = float(friction_factor_smooth(reynolds))
    found = nusselt_gnielinski(reynolds, prandtl)
    expected = ht.turbulent_Gnielinski(reynolds, prandtl, friction)
    evidence("ht_inside", "Gnielinski", found, expected, rel=1e-9)
    for heated in (True, False):
        found = nusselt_dittus_boelter(reynolds, prandtl, heated=heated)
        expected = ht.turbulent_Dittus_Boelter(reynolds, prandtl, heated, revised=True)
        evidence("ht_inside", "Dittus and Boelter", found, expected, rel=1e-9)


@pytest.mark.parametrize("reynolds", [1e4, 1e5, 1e6, 5e6])
def test_friction_against_fluids(reynolds, evidence):
    # Petukhov's form against Colebrook's equation for a smooth wall
    found, expected = friction_factor_smooth(reynolds), fluids.friction_factor(reynolds, eD=0.0)
    evidence("fluids_friction", "friction factor", found, expected, rel=0.02)


@pytest.mark.parametrize("reynolds", [1e4, 1e5, 1e6])
@pytest.mark.parametrize("prandtl", [0.7, 1.0, 2.0])
def test_two_correlations_agree_for_gas_and_hot_water(reynolds, prandtl, evidence):
    # Dittus-Boelter is stated to err by up to 25 % (Incropera et al., section 8.5)
    friction = fluids.friction_factor(reynolds, eD=0.0)
    finer = ht.turbulent_Gnielinski(reynolds, prandtl, friction)
    simple = nusselt_dittus_boelter(reynolds, prandtl)
    evidence.spread("dittus_gnielinski", "Nusselt number", simple, finer, low=0.75, high=1.25)


def test_laminar_constant_against_ht(evidence):
    evidence("ht_inside", "laminar", NUSSELT_LAMINAR, ht.laminar_T_const(), rel=1e-9)
    assert np.all(nusselt_inside(np.array([0.0, 100.0, 2300.0]), 5.0) == 3.66)


def test_no_step_between_laminar_and_turbulent():
    reynolds = np.linspace(1000.0, 6000.0, 5001)
    found = nusselt_inside(reynolds, 2.0)
    assert np.all(np.diff(found) >= 0)
    assert np.max(np.diff(found)) < 0.03
    middle = 0.5 * (3.66 + float(nusselt_gnielinski(4000.0, 2.0)))
    assert float(nusselt_inside(3150.0, 2.0)) == pytest.approx(middle)


@pytest.mark.parametrize(("fluid", "celsius", "bar"), [("Nitrogen", 250, 20), ("Water", 80, 5)])
def test_coefficient_with_properties_of_a_library(fluid, celsius, bar, evidence):
    density, heat, k, mu = (
        PropsSI(key, "T", 273.15 + celsius, "P", bar * 1e5, fluid) for key in "DCLV"
    )
    found = film_coefficient(
        1.5, 0.1, density=density, dynamic_viscosity=mu, conductivity=k, specific_heat=heat
    )
    reynolds, prandtl = density * 1.5 * 0.1 / mu, mu * heat / k
    # Gnielinski's equation in ht with Colebrook's friction factor in fluids
    friction = fluids.friction_factor(reynolds, eD=0.0)
    other = ht.turbulent_Gnielinski(reynolds, prandtl, friction) * k / 0.1
    evidence("film_by_libraries", fluid.lower(), found, other, unit="W/(m2 K)", rel=0.02)


def test_the_film_matters_for_slow_gas_and_not_for_water():
    # 120 mm of lagging on 100 mm: resistance of the lagging about 4 m K/W
    lagging = float(cylinder_resistance(0.114, 0.354, 0.045))
    slow_gas = float(film_resistance(0.1, 3.66 * 0.04 / 0.1))
    water = float(film_resistance(0.1, 2000.0))
    assert slow_gas > 0.3 * lagging
    assert water < 1e-3 * lagging


def test_a_gain_makes_the_wall_warmer_than_the_fluid():
    assert float(wall_temperature(275.0, -20.0, 0.1)) == pytest.approx(277.0)
    assert float(wall_temperature(450.0, 100.0, 0.1)) == pytest.approx(440.0)


def test_validity_shapes_and_nan():
    flags = outside_film_validity(np.array([0.0, 1e5, 6e6, np.nan]), 0.7)
    assert flags.tolist() == [False, False, True, True]
    assert outside_film_validity(1e5, np.array([0.01, 3e3])).tolist() == [True, True]
    found = nusselt_inside(np.array([[1e3], [1e5]]), np.array([0.7, np.nan]))
    assert found.shape == (2, 2)
    assert np.isfinite(found[:, 0]).all()


def test_wrong_inputs_are_refused():
    fluid = {
        "density": 1.0, "dynamic_viscosity": 1e-5, "conductivity": 0.03, "specific_heat": 1e3,
    }  # fmt: skip
    with pytest.raises(InputError, match="speed is -1 m/s; expected 0 or more"):
        film_coefficient(-1.0, 0.1, **fluid)
    with pytest.raises(InputError, match="density is 0 kg/m3; expected above 0"):
        film_coefficient(1.0, 0.1, **fluid | {"density": 0.0})
    with pytest.raises(InputError, match="film coefficient is 0 W/"):
        film_resistance(0.1, 0.0)
