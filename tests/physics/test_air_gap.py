import csv
from functools import partial
from math import log, pi
from pathlib import Path

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

from cladwatt.errors import InputError
from cladwatt.physics.air_gap import (
    air_gap_conductance,
    air_gap_resistance,
    annulus_conductivity_ratio,
    annulus_radiative_conductance,
    annulus_rayleigh,
    concentric_exchange_emissivity,
    contact_resistance,
    outside_air_gap_validity,
)
from cladwatt.physics.constants import STEFAN_BOLTZMANN

with (Path(__file__).parents[1] / "published" / "air_gap.csv").open(
    encoding="utf-8", newline=""
) as file:
    SOLUTIONS = list(csv.DictReader(file))

SHIELD = {"inner_temperature": 393.15, "outer_temperature": 308.15}


def test_textbook_shield_around_a_tube(evidence):
    # Incropera et al., example 9.5: tube of 100 mm at 120 °C in a shield of 120 mm at 35 °C:
    # Ra 171, k_eff 0.0343 W/(m K), 100 W/m by the gas (from memory; recomputed here by hand below)
    # its air table is that of 1 bar
    rayleigh = annulus_rayleigh(0.1, 0.12, **SHIELD, pressure=1e5)
    evidence("incropera_9_5", "Rayleigh number", rayleigh, 171.0, rel=0.01)
    density, heat, k, mu = (PropsSI(key, "T", 350.65, "P", 1e5, "Air") for key in "DCLV")
    length = 2 * log(1.2) ** (4 / 3) / (0.05**-0.6 + 0.06**-0.6) ** (5 / 3)
    other = 9.80665 / 350.65 * 85.0 * length**3 * density**2 * heat / (mu * k)
    evidence.recomputed("incropera_9_5", "Rayleigh number", other, 171.0, rel=0.01,
                        by="CoolProp")  # fmt: skip
    ratio = float(annulus_conductivity_ratio(171.0, 0.7))
    by_hand = 0.386 * (0.7 / (0.861 + 0.7) * 171.0) ** 0.25
    for compare, factor in (
        (evidence, ratio),
        (partial(evidence.recomputed, by="formula by hand"), by_hand),
    ):
        k, loss = factor * 0.030, 2 * pi * factor * 0.030 * 85.0 / log(1.2)
        compare("incropera_9_5", "conductivity", k, 0.0343, unit="W/(m K)", abs=0.00005)
        compare("incropera_9_5", "by the gas", loss, 100.0, unit="W/m", abs=0.5)
    radiation = annulus_radiative_conductance(
        0.1, 0.12, **SHIELD, inner_emissivity=0.8, outer_emissivity=0.1
    )
    total = air_gap_conductance(
        0.1, 0.12, **SHIELD, inner_emissivity=0.8, outer_emissivity=0.1, pressure=1e5
    )
    found = (total - radiation) * 85.0
    evidence("incropera_9_5", "by the gas, own properties", found, 100.0, unit="W/m", rel=0.02)


@pytest.mark.parametrize("row", SOLUTIONS, ids=lambda row: row["id"])
def test_numerical_solutions_of_the_annulus(row, evidence):
    # Kuehn and Goldstein 1976, air in an annulus; the correlation is to hold some per cent
    ratio, on_gap = float(row["ratio"]), float(row["rayleigh_on_gap"])
    inner = 1.0 / (ratio - 1.0)
    outer = inner * ratio
    length = 2 * log(ratio) ** (4 / 3) / (inner**-0.6 + outer**-0.6) ** (5 / 3)
    found = float(annulus_conductivity_ratio(on_gap * length**3, 0.7))
    evidence("kuehn_goldstein", "over conduction", found, float(row["value"]), rel=0.05)


def test_rayleigh_by_the_properties_of_a_library(evidence):
    mean = 350.65
    density, heat, k, mu = (PropsSI(key, "T", mean, "P", 101_325, "Air") for key in "DCLV")
    ri, ro = 0.06, 0.085
    length = 2 * log(ro / ri) ** (4 / 3) / (ri**-0.6 + ro**-0.6) ** (5 / 3)
    expected = 9.80665 / mean * 85.0 * length**3 * density**2 * heat / (mu * k)
    found = annulus_rayleigh(0.12, 0.17, **SHIELD)
    evidence("annulus_rayleigh", "Rayleigh number", found, expected, rel=5e-3)
    # the direction of the heat does not matter
    other = annulus_rayleigh(0.12, 0.17, inner_temperature=308.15, outer_temperature=393.15)
    assert float(other) == pytest.approx(float(annulus_rayleigh(0.12, 0.17, **SHIELD)))


def test_a_narrow_gap_only_conducts():
    total = air_gap_conductance(0.1, 0.106, **SHIELD, inner_emissivity=1e-9, outer_emissivity=1e-9)
    k = PropsSI("L", "T", 350.65, "P", 101_325, "Air")
    assert float(total) == pytest.approx(2 * pi * k / log(1.06), rel=2e-3)


@pytest.mark.parametrize(("eps_1", "eps_2"), [(0.9, 0.9), (0.1, 0.9), (0.9, 0.1), (0.3, 0.05)])
def test_radiation_against_the_radiosities(eps_1, eps_2, evidence):
    # net-radiation method with F11 = 0, F12 = 1, F21 = r1/r2, F22 = 1 - r1/r2, solved as a matrix
    r1, r2, hot, cold = 0.05, 0.08, 450.0, 330.0
    factors = np.array([[0.0, 1.0], [r1 / r2, 1.0 - r1 / r2]])
    eps = np.array([eps_1, eps_2])
    black = STEFAN_BOLTZMANN * np.array([hot, cold]) ** 4
    radiosity = np.linalg.solve(np.eye(2) - (1 - eps)[:, None] * factors, eps * black)
    loss = 2 * pi * r1 * (radiosity - factors @ radiosity)[0]
    found = annulus_radiative_conductance(
        2 * r1,
        2 * r2,
        inner_temperature=hot,
        outer_temperature=cold,
        inner_emissivity=eps_1,
        outer_emissivity=eps_2,
    )
    evidence("annulus_radiosity", "loss", found * (hot - cold), loss, unit="W/m", rel=1e-9)


def test_exchange_factor_in_its_limits():
    # parallel plates; a small body in large surroundings
    assert float(concentric_exchange_emissivity(0.8, 0.5, 1.0)) == pytest.approx(1 / (1.25 + 1.0))
    assert float(concentric_exchange_emissivity(0.8, 0.5, 0.0)) == pytest.approx(0.8)


def test_contact_is_the_narrow_gap():
    face = {"inner_emissivity": 0.9, "outer_emissivity": 0.4}
    found = contact_resistance(0.2, 0.0005, 320.0, **face)
    gap = air_gap_resistance(
        0.1995, 0.2005, inner_temperature=320.01, outer_temperature=319.99, **face
    )
    assert float(found) == pytest.approx(float(gap), rel=5e-3)
    assert float(contact_resistance(0.2, 0.0, 320.0)) == 0.0
    # a millimetre of still air and radiation: between 0.7 and 1.5 mm of wool at 0.04 W/(m K)
    wool = 0.001 / 0.04 / (pi * 0.2)
    assert 0.7 < float(contact_resistance(0.2, 0.001, 300.0)) / wool < 1.5


def test_thicker_gaps_stop_helping():
    outer = np.array([0.104, 0.11, 0.13, 0.16])
    resistance = air_gap_resistance(
        0.1, outer, **SHIELD, inner_emissivity=0.1, outer_emissivity=0.1
    )
    assert resistance[1] > 1.5 * resistance[0]
    assert resistance[3] < 1.2 * resistance[2]


def test_validity_shapes_and_nan():
    assert outside_air_gap_validity(np.array([1.0, 1e7, 2e7, np.nan])).tolist() == [
        False,
        False,
        True,
        True,
    ]
    found = air_gap_resistance(
        np.full((2, 1), 0.1),
        np.array([0.11, 0.12, np.nan]),
        **SHIELD,
        inner_emissivity=0.9,
        outer_emissivity=0.9,
    )
    assert found.shape == (2, 3)
    assert np.isnan(found[:, 2]).all()


def test_wrong_inputs_are_refused():
    with pytest.raises(InputError, match=r"air gap from 0\.12 m to 0\.1 m diameter"):
        annulus_rayleigh(0.12, 0.1, **SHIELD)
    with pytest.raises(InputError, match="emissivity is 0; expected above 0 and at most 1"):
        concentric_exchange_emissivity(0.0, 0.5, 0.5)
    with pytest.raises(InputError, match=r"mean gap is -0\.001 m; expected 0 or more"):
        contact_resistance(0.2, -0.001, 300.0)
    with pytest.raises(InputError, match="diameter is 0 m; expected above 0"):
        contact_resistance(0.0, 0.001, 300.0)
