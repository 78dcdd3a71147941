import csv
from pathlib import Path

import numpy as np
import pytest

from cladwatt.errors import InputError
from cladwatt.physics.emissivity import (
    directional_emissivity,
    fresnel_dielectric_emissivity,
    fresnel_metal_emissivity,
    hemispherical_emissivity,
    hemispherical_to_normal_ratio,
    metal_index_hagen_rubens,
)

PUBLISHED = Path(__file__).parents[1] / "published"


def rows(name):
    with (PUBLISHED / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


ANGULAR = rows("emissivity_angular.csv")


@pytest.mark.parametrize("row", ANGULAR, ids=lambda r: f"{r['n']}-{r['angle_deg']}")
def test_fresnel_against_table(row, evidence):
    # emissivity_angular.csv - Fresnel relations (Siegel & Howell; Modest; NASA SP-164)
    angle = np.deg2rad(float(row["angle_deg"]))
    n, k = float(row["n"]), float(row["k"])
    found = fresnel_metal_emissivity(angle, n, k)
    # five printed significant digits
    evidence("fresnel", "directional emissivity", found, float(row["emissivity"]), rel=5e-5)
    if k == 0:
        assert float(fresnel_dielectric_emissivity(angle, n)) == pytest.approx(float(found))


@pytest.mark.parametrize(
    "row", [r for r in ANGULAR if r["angle_deg"] == "0"], ids=lambda r: r["material"]
)
def test_hemispherical_against_table(row, evidence):
    angle = np.linspace(0.0, np.pi / 2, 20_001)
    values = fresnel_metal_emissivity(angle, float(row["n"]), float(row["k"]))
    found = hemispherical_emissivity(angle, values)
    # the last digits of a grazing metal depend on the quadrature; 0.1 % is far inside any use
    expected = float(row["emissivity_hemispherical"])
    evidence("fresnel", "hemispherical emissivity", found, expected, rel=1e-3)


def test_brewster_angle():
    # closed form: at tan(angle) = n the parallel part is not reflected at all
    n = 1.5
    angle = np.arctan(n)
    perpendicular = ((n**2 - 1) / (n**2 + 1)) ** 2
    found = float(fresnel_dielectric_emissivity(angle, n))
    assert found == pytest.approx(1 - perpendicular / 2, rel=1e-12)


def test_hagen_rubens_index_gives_back_the_emissivity():
    value = np.array([0.01, 0.05, 0.2, 0.8])
    index = metal_index_hagen_rubens(value)
    np.testing.assert_allclose(fresnel_metal_emissivity(0.0, index, index), value, rtol=1e-10)
    with pytest.raises(InputError, match=r"expected 0 < value <= 0\.8"):
        metal_index_hagen_rubens(0.9)


@pytest.mark.parametrize(
    "row", [r for r in ANGULAR if r["n"] == "1.5" and float(r["angle_deg"]) <= 85]
)
def test_coat_follows_the_dielectric_curve(row, evidence):
    found = directional_emissivity(0.9, np.deg2rad(float(row["angle_deg"])), False)
    expected = float(row["ratio_to_normal"])
    evidence("fresnel", "coat, over normal", float(found) / 0.9, expected, rel=1e-4)


@pytest.mark.parametrize(
    "row", [r for r in ANGULAR if r["n"] == "25.3" and float(r["angle_deg"]) <= 65]
)
def test_bright_metal_follows_the_metal_curve(row, evidence):
    # the table's metals have k > n, ours n = k: alike within 3 % where pixels are used
    found = directional_emissivity(0.03, np.deg2rad(float(row["angle_deg"])), True)
    expected = float(row["ratio_to_normal"])
    evidence("fresnel", "bright metal, over normal", float(found) / 0.03, expected, rel=0.03)


def test_metal_rises_then_falls_and_coat_only_falls():
    angle = np.deg2rad(np.linspace(0, 89, 90))
    assert np.all(np.diff(directional_emissivity(0.9, angle, False)) < 0)
    index = metal_index_hagen_rubens(0.05)
    true_angles = np.deg2rad(np.linspace(0, 90, 901))
    metal = fresnel_metal_emissivity(true_angles, index, index)
    top = int(np.argmax(metal))
    assert 85 < np.rad2deg(true_angles[top]) < 90
    assert np.all(np.diff(metal[20 : top + 1]) > 0)  # from 2°: flat to rounding before
    assert np.all(np.diff(metal[top:]) < 0)


def test_weathered_metal_lies_between_and_meets_its_ends():
    angle = np.deg2rad(60.0)
    values = np.linspace(0.01, 1.0, 200)
    ratio = directional_emissivity(values, angle, True) / values
    assert np.all(np.diff(ratio) <= 1e-12)
    assert ratio[0] > 1.2
    assert ratio[-1] == pytest.approx(float(directional_emissivity(1.0, angle, False)))


def test_broadcasts_and_mixes():
    found = directional_emissivity(
        np.array([[0.05], [0.9]]), np.deg2rad([0.0, 60.0, -60.0]), np.array([[True], [False]])
    )
    assert found.shape == (2, 3)
    np.testing.assert_allclose(found[:, 1], found[:, 2])
    np.testing.assert_allclose(found[:, 0], [0.05, 0.9])
    assert found[0, 1] > found[0, 0]
    assert found[1, 1] < found[1, 0]
    assert np.isnan(directional_emissivity(np.nan, 0.3, True))


def nearest(value, row):
    return min(max(value, float(row["low"])), float(row["high"]))


def test_ratio_against_published_ranges(evidence):
    # emissivity_angular_summary.csv - Incropera section 12.5 ranges; Munis & Marshall 1985
    table = {row["statement"]: row for row in rows("emissivity_angular_summary.csv")}
    coat = table["non-conductors, hemispherical/normal ratio"]
    metal = table["conductors, hemispherical/normal ratio"]
    found = float(hemispherical_to_normal_ratio(0.9, False))
    # normal above hemispherical "by 5 %", near n = 1.5
    glassy = float(table["weakly absorbing glassy materials, hemispherical below normal by"]["low"])
    evidence("munis_marshall", "hemispherical over normal", found, glassy, abs=0.005)
    bright = float(hemispherical_to_normal_ratio(0.05, True))
    # against the nearest value of the range; the first is rounded to two digits
    evidence("incropera_12_5", "coat", found, nearest(found, coat), abs=0.005)
    evidence("incropera_12_5", "bright metal", bright, nearest(bright, metal), abs=0.0)
    for start, row in (("dielectric n=1.5", coat), ("metal", metal)):
        named = [other for other in ANGULAR if other["material"].startswith(start)]
        for ratio in sorted({float(other["ratio_hemispherical_to_normal"]) for other in named}):
            evidence.recomputed("incropera_12_5", start, ratio, nearest(ratio, row), abs=0.005,
                                by="quadrature of Fresnel's relations")  # fmt: skip
    weathered = hemispherical_to_normal_ratio(np.linspace(0.05, 0.9, 30), True)
    assert np.all(np.diff(weathered) < 0)


@pytest.mark.parametrize("is_metal", [True, False])
@pytest.mark.parametrize("value", [0.03, 0.2, 0.6, 0.95])
def test_ratio_is_the_mean_of_the_directional_values(value, is_metal):
    angle = np.linspace(0, np.pi / 2, 40_001)
    mean = hemispherical_emissivity(angle, directional_emissivity(value, angle, is_metal))
    expected = float(hemispherical_to_normal_ratio(value, is_metal))
    assert float(mean) / value == pytest.approx(expected, rel=2e-5)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: directional_emissivity(1.2, 0.1, True), r"normal emissivity is 1\.2"),
        (lambda: directional_emissivity(0.0, 0.1, True), "normal emissivity is 0;"),
        (lambda: directional_emissivity(0.9, 60.0, False), "view angle is 60 rad"),
        (lambda: fresnel_dielectric_emissivity(0.1, 0.9), r"refractive index is 0\.9"),
        (lambda: fresnel_metal_emissivity(0.1, 5.0, -1.0), "extinction -1"),
        (lambda: hemispherical_to_normal_ratio(-0.1, False), r"normal emissivity is -0\.1"),
    ],
)
def test_refuses(call, message):
    with pytest.raises(InputError, match=message):
        call()
