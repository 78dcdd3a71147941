"""Results quoted from memory, worked out again without the package.

By the library ht, by the textbook's formula written out, or by plain draws. Only what comes out
here counts as evidence; the inputs stand beside each example, as in test_heat_examples.py.
"""

import csv
import math
from pathlib import Path

import fluids
import ht
import numpy as np
import pytest
from scipy.optimize import brentq
from scipy.stats import norm

PUBLISHED = Path(__file__).parents[1] / "published"
SIGMA = 5.670374419e-8
PI = math.pi


def read(name):
    with (PUBLISHED / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


RESULTS = {(row["id"], row["quantity"]): row for row in read("heat_examples.csv")}


@pytest.fixture
def again(evidence):
    def compare(check, example, quantity, found, by="formula by hand"):
        row = RESULTS[example, quantity]
        evidence.recomputed(
            check, quantity.replace("_", " "), found, float(row["published"]),
            unit=row["unit"].removeprefix("-"), rel=float(row["tolerance_percent"]) / 100, by=by,
        )  # fmt: skip

    return compare


def radiated(emissivity, surface_C, surroundings_C):
    return emissivity * SIGMA * ((surface_C + 273.15) ** 4 - (surroundings_C + 273.15) ** 4)


def layer(inner, outer, conductivity):
    return math.log(outer / inner) / (2 * PI * conductivity)


def film(coefficient, diameter):
    return 1 / (PI * diameter * coefficient)


def test_incropera_9_4(again):
    rayleigh = 9.8 * 2.725e-3 * 142.0 * 0.1**3 / (22.8e-6 * 32.8e-6)
    nusselt = ht.Nu_horizontal_cylinder_Churchill_Chu(0.697, rayleigh / 0.697)
    convection = PI * nusselt * 0.0313 * 142.0
    radiation = PI * 0.1 * radiated(0.85, 165.0, 23.0)
    again("incropera_9_4", "C1", "rayleigh", rayleigh)
    again("incropera_9_4", "C1", "convection", convection, "ht")
    again("incropera_9_4", "C1", "radiation", radiation)
    again("incropera_9_4", "C1", "loss", convection + radiation, "ht")


def test_incropera_9_2(again):
    rayleigh = 9.8 / 400.65 * 209.0 * 0.71**3 / (26.4e-6 * 38.3e-6)
    nusselt = ht.Nu_vertical_plate_Churchill(0.690, rayleigh / 0.690)
    again("incropera_9_2", "C2", "rayleigh", rayleigh)
    again("incropera_9_2", "C2", "nusselt", nusselt, "ht")
    again("incropera_9_2", "C2", "loss", nusselt * 0.0338 * 1.02 * 209.0, "ht")


def test_incropera_7_4(again):
    free, behind = 10.0 * 12.7e-3 / 15.89e-6, 10.0 * 12.7e-3 / 20.92e-6
    check = "incropera_7_4"
    again(check, "C3", "nusselt_zukauskas", ht.Nu_cylinder_Zukauskas(free, 0.707, 0.690), "ht")
    found = ht.Nu_cylinder_Churchill_Bernstein(behind, 0.700)
    again(check, "C3", "nusselt_churchill_bernstein", found, "ht")
    again(check, "C3", "nusselt_hilpert", 0.193 * behind**0.618 * 0.700 ** (1 / 3))


@pytest.mark.parametrize("check", ["holman_7_5", "holman_6_7"])
def test_holman_by_the_correlation_of_the_example(check, evidence):
    if check == "holman_7_5":
        rayleigh = 9.81 / (0.5 * (250 + 15) + 273.15) * 235.0 * 0.3048**3 / 26.54e-6**2 * 0.687
        row, found = RESULTS["C4", "nusselt"], 0.53 * rayleigh**0.25
    else:
        reynolds = 101_325 / (287 * (92.5 + 273.15)) * 50.0 * 0.05 / 2.14e-5
        row = RESULTS["C6", "coefficient"]
        found = 0.0266 * reynolds**0.805 * 0.695 ** (1 / 3) * 0.0312 / 0.05
    # printed to three or four digits
    evidence.recomputed(check, row["quantity"], found, float(row["published"]), rel=2e-3,
                        by="the example's own correlation")  # fmt: skip


def test_cengel_in_wind(again):
    reynolds = 10 / 3.6 * 0.1 / 1.702e-5
    nusselt = ht.Nu_cylinder_Churchill_Bernstein(reynolds, 0.7255)
    area = PI * 0.1 * 12.0
    check = "cengel_7_53"
    again(check, "C9", "reynolds", reynolds)
    again(check, "C9", "nusselt", nusselt, "ht")
    again(check, "C9", "convection", nusselt * 0.02662 / 0.1 * area * 70.0, "ht")
    again(check, "C9", "radiation", radiated(0.8, 75.0, 0.0) * area)
    found = ht.Nu_cylinder_Churchill_Bernstein(8.0 * 0.1 / 1.896e-5, 0.7202) * 0.02808 / 0.1
    again("cengel_7_6", "C11", "coefficient", found, "ht")


def test_incropera_1_2(again):
    again("incropera_1_2", "C12", "emission", 0.8 * SIGMA * 473.15**4)
    loss = PI * 0.07 * (15.0 * 175.0 + radiated(0.8, 200.0, 25.0))
    again("incropera_1_2", "C12", "loss", loss)


def test_series_of_resistances(again):
    lagging = layer(0.055, 0.115, 0.05)
    loss = 315.0 / (film(60, 0.05) + layer(0.05, 0.055, 80) + lagging + film(18, 0.115))
    again("cengel_3_8", "D1", "loss", loss)
    again("cengel_3_8", "D1", "lagging_drop", loss * lagging)

    bare = 135.0 / film(20.0, 0.1)
    again("cengel_3_70", "D2", "loss", 50 * bare)
    radius = brentq(
        lambda r: 135 / (layer(0.1, 2 * r, 0.035) + film(20, 2 * r)) - 0.1 * bare, 0.055, 0.2
    )
    again("cengel_3_70", "D2", "outer_radius", radius)

    steel = layer(0.02, 0.04, 19.0)
    loss = 500.0 / (steel + layer(0.04, 0.10, 0.2))
    again("holman_2_2", "D3", "loss", loss)
    again("holman_2_2", "D3", "interface", 600.0 - loss * steel)

    again("holman_2_5", "D4", "critical_radius", 100 * 0.17 / 3.0)
    best = 2 * 0.17 / 3.0
    lagged = 180.0 / (layer(0.05, best, 0.17) + film(3.0, best))
    again("holman_2_5", "D4", "loss_lagged", lagged)
    again("holman_2_5", "D4", "loss_bare", 180.0 / film(3.0, 0.05))

    inner = film(10_000, 0.1) + layer(0.1, 0.12, 400)
    again("kreith_2_2", "D6", "loss_bare", 80.0 / (inner + film(15, 0.12)))
    lagged = 80.0 / (inner + layer(0.12, 0.22, 0.2) + film(15, 0.22))
    again("kreith_2_2", "D6", "loss_lagged", lagged)

    total = film(300, 0.03) + layer(0.03, 0.04, 0.5) + film(10, 0.04)
    again("kreith_2_3", "D7", "overall_coefficient", 1 / (total * PI * 0.04))
    again("kreith_2_3", "D7", "loss", 170 / total)

    # the book takes logarithmic mean areas, over a length of 0.305 m
    def mean_area(inner, outer):
        return 2 * PI * 0.305 * (outer - inner) / math.log(outer / inner)

    steel = 12.7e-3 / (21.63 * mean_area(12.7e-3, 25.4e-3))
    loss = (811.0 - 310.8) / (steel + 25.4e-3 / (0.2423 * mean_area(25.4e-3, 50.8e-3)))
    again("geankoplis_4_3_2", "D8", "loss", loss, "logarithmic mean areas")
    again("geankoplis_4_3_2", "D8", "interface", 811.0 - loss * steel, "logarithmic mean areas")


def black_fraction(micrometre_kelvin):
    """Series of the integral of Planck's law."""
    x, n = 14387.768775 / micrometre_kelvin, np.arange(1, 400)
    terms = np.exp(-n * x) * (x**3 / n + 3 * x**2 / n**2 + 6 * x / n**3 + 6 / n**4)
    return 15 / PI**4 * float(terms.sum())


def test_incropera_12_3(evidence):
    peak = 2897.771955e-6 / 2000
    found = {
        "emissive_power": SIGMA * 2000.0**4,
        "wavelength_of_10_percent": brentq(lambda p: black_fraction(p) - 0.1, 1500, 3000) / 2000,
        "wavelength_of_90_percent": brentq(lambda p: black_fraction(p) - 0.9, 8000, 11000) / 2000,
        "wavelength_of_maximum": 1e6 * peak,
        "spectral_power_at_maximum": PI * ht.blackbody_spectral_radiance(2000.0, peak),
    }
    rows = [row for row in read("radiation_examples.csv") if row["id"] == "R1"]
    assert len(rows) == len(found)
    for row in rows:
        what, half = row["quantity"], float(row["half_last_digit"])
        evidence.recomputed("incropera_12_3", what.replace("_", " "), found[what],
                            float(row["value"]), unit=row["unit"], abs=half,
                            by="series of Planck's integral, ht")  # fmt: skip


def test_textbook_air_by_the_reference_equations(evidence):
    # columns *_calc: Lemmon and Jacobsen by CoolProp; as far apart as that table is known to be
    rows = [row for row in read("air_properties_dry.csv") if 250 <= float(row["T_K"]) <= 800]
    for name, calculated, rel in (
        ("cp_kJ_kgK", "cp_calc_kJ_kgK", 0.002),
        ("mu_1e-7_Pa_s", "mu_calc_1e-7_Pa_s", 0.014),
        ("k_1e-3_W_mK", "k_calc_1e-3_W_mK", 0.022),
        ("Pr", "Pr_calc", 0.027),
    ):
        printed, found = ([float(row[key]) for row in rows] for key in (name, calculated))
        evidence.recomputed("incropera_a_4", name.split("_")[0], found, printed, rel=rel,
                            by="equations of Lemmon and Jacobsen (CoolProp)")  # fmt: skip


def test_standard_atmosphere(evidence):
    # five printed digits and a sixth
    evidence.recomputed("iso_2533", "pressure", fluids.ATMOSPHERE_1976(1000.0).P, 89876.3,
                        unit="Pa", rel=1e-6, by="fluids")  # fmt: skip


@pytest.mark.parametrize("row", read("jcgm101_examples.csv"), ids=lambda row: row["id"])
def test_jcgm_101(row, evidence):
    random, count = np.random.default_rng(101), 2_000_000
    check = "jcgm_101_" + row["id"].split()[0].replace(".", "_")
    sizes = [float(u) for u in row["u"].split(";")]
    if row["input"] == "sum of squares":
        # moments of a square of a normal quantity, in closed form
        centre, u = float(row["centre"]), sizes[0]
        mean, spread = centre**2 + 2 * u**2, math.sqrt(4 * u**4 + 4 * centre**2 * u**2)
        # the last printed digit: 1e-6, and the print's own draws
        for what, found, printed in (
            ("mean", mean, row["mean"]),
            ("standard uncertainty", spread, row["standard_uncertainty"]),
        ):
            evidence.recomputed(check, what, found, float(printed), abs=1.01e-6, by="closed form")
        return
    spread = math.sqrt(sum(u**2 for u in sizes))
    printed = float(row["standard_uncertainty"])
    half = 0.05 if printed > 10 else 0.005
    evidence.recomputed(check, "standard uncertainty", spread, printed, abs=half, by="closed form")
    if row["shape"] == "normal":
        high, by, error = spread * norm.ppf(0.975), "closed form", 0.0
    else:
        draws = sum(u * math.sqrt(3) * random.uniform(-1, 1, count) for u in sizes)
        # three standard errors of the quantile, its density taken as that of a normal
        error = 3 * spread * math.sqrt(0.975 * 0.025 / count) / norm.pdf(1.96)
        high, by = float(np.percentile(draws, 97.5)), "plain draws"
    evidence.recomputed(check, "high 95", high, float(row["high_95"]), abs=half + error, by=by)
