import csv
from pathlib import Path

import numpy as np
import pytest

from cladwatt.errors import InputError
from cladwatt.physics.humidity import dew_point, vapour_pressure
from cladwatt.physics.sky import (
    DEW_POINT_RANGE,
    clear_sky_emissivity_berdahl_martin,
    clear_sky_temperature_swinbank,
    cloudy_sky_emissivity,
    outdoor_surroundings,
    outside_sky_validity,
    sky_temperature,
    sky_temperature_uncertainty,
)

ZERO = 273.15

with (Path(__file__).parents[1] / "published" / "sky_temperature.csv").open(
    encoding="utf-8", newline=""
) as file:
    STATED = {row["id"]: row for row in csv.DictReader(file)}


def nearest(found, row):
    return min(max(found, float(row["low"])), float(row["high"]))


def brutsaert(air, vapour):
    """Clear sky by vapour pressure in hPa: Water Resources Research 11 (1975) 742."""
    return air * (1.24 * (vapour / air) ** (1 / 7)) ** 0.25


@pytest.mark.parametrize("key", ["hot_moist", "cold_dry"])
def test_depression_lies_where_the_textbook_says(key, evidence):
    # Duffie and Beckman, section 3.9: 5 K in a hot moist to 30 K in a cold dry climate
    row = STATED[key]
    air, dew = float(row["air_C"]) + ZERO, float(row["dew_point_C"]) + ZERO
    found = air - float(sky_temperature(air, dew))
    evidence("duffie_beckman", key.replace("_", " "), found, nearest(found, row), unit="K", abs=0.0)


def test_a_cold_clear_sky_is_about_230_K(evidence):
    # Incropera et al., environmental radiation: 230 K under a cold, clear sky
    row = STATED["coldest"]
    found = float(sky_temperature(float(row["air_C"]) + ZERO, float(row["dew_point_C"]) + ZERO))
    evidence("incropera_cold_sky", "sky", found, nearest(found, row), unit="K", abs=0.0)
    other = 0.0552 * (float(row["air_C"]) + ZERO) ** 1.5
    evidence.recomputed("incropera_cold_sky", "sky", other, nearest(other, row), unit="K", abs=0.0,
                        by="Swinbank's relation")  # fmt: skip


@pytest.mark.parametrize("air_C", [5.0, 10.0, 15.0, 20.0, 25.0])
def test_three_relations_agree_within_their_scatter(air_C, evidence):
    # Swinbank (1963) by air temperature; Brutsaert, Water Resources Research 11 (1975) 742-744:
    # eps = 1.24 (e/T)^(1/7), e in hPa; humidity usual where Swinbank measured
    air = air_C + ZERO
    sky = float(sky_temperature(air, dew_point(air, 0.6)))
    vapour = float(vapour_pressure(air, 0.6)) / 100.0
    u = float(sky_temperature_uncertainty(air, dew_point(air, 0.6)))
    for what, other in (
        ("Brutsaert", brutsaert(air, vapour)),
        ("Swinbank", clear_sky_temperature_swinbank(air)),
    ):
        evidence("sky_relations", what, sky, other, unit="K", abs=2 * u)


def test_against_the_night_relation_of_another_paper(evidence):
    # Berdahl and Fromberg, Solar Energy 29 (1982): night 0.741 + 0.0062 Tdp, day 0.727 + 0.0060 Tdp
    dew = np.linspace(-10.0, 20.0, 7)
    night = clear_sky_emissivity_berdahl_martin(dew + ZERO, hour=0.0)
    day = clear_sky_emissivity_berdahl_martin(dew + ZERO, hour=12.0)
    for what, found, other in (
        ("Berdahl and Fromberg, night", night, 0.741 + 0.0062 * dew),
        ("Berdahl and Fromberg, day", day, 0.727 + 0.0060 * dew),
    ):
        evidence("sky_emissivities", what, found, other, abs=0.031)
    assert night - day == pytest.approx(np.full(7, 0.026), abs=1e-12)


def test_thin_air_radiates_less():
    low = clear_sky_emissivity_berdahl_martin(280.0, pressure=1e5)
    high = clear_sky_emissivity_berdahl_martin(280.0, pressure=8e4)
    # 0.00012 per hPa: Berdahl and Martin 1984
    assert float(low - high) == pytest.approx(0.024)
    assert float(low) == pytest.approx(float(clear_sky_emissivity_berdahl_martin(280.0)))


def test_clouds_warm_the_sky_up_to_the_air_at_their_base():
    cover = np.linspace(0.0, 1.0, 11)
    sky = sky_temperature(290.0, 278.0, cover)
    assert np.all(np.diff(sky) > 0)
    assert np.all(sky < 290.0)
    assert float(sky_temperature(290.0, 278.0, 1.0, cloud_base_height=0.0)) == pytest.approx(290.0)
    high = cloudy_sky_emissivity(0.75, 1.0, cloud_base_height=8200.0)
    assert float(high) == pytest.approx(0.75 + 0.25 / np.e)


def test_an_overcast_sky_by_another_relation(evidence):
    # overcast with low cloud is a few kelvin under the air: Unsworth and Monteith, Quarterly
    # J. Royal Meteorological Society 101 (1975) 13-24: eps = 0.84 n + (1 - 0.84 n) eps_clear
    clear = float(clear_sky_emissivity_berdahl_martin(283.15))
    for cover in (0.25, 0.5, 0.75, 1.0):
        other = 0.84 * cover + (1.0 - 0.84 * cover) * clear
        found = cloudy_sky_emissivity(clear, cover)
        evidence("sky_emissivities", "Unsworth and Monteith, cloud", found, other, abs=0.02)


def test_uncertainty_is_the_derivative_times_the_spread():
    air, dew, step = 288.15, 278.15, 1e-4
    clear = float(clear_sky_emissivity_berdahl_martin(dew))

    def sky(emissivity, cover, height):
        e = cloudy_sky_emissivity(emissivity, cover, cloud_base_height=height)
        return air * float(e) ** 0.25

    by_clear = (sky(clear + step, 0.5, 2e3) - sky(clear - step, 0.5, 2e3)) / (2 * step) * 0.031
    by_cover = (sky(clear, 0.5 + step, 2e3) - sky(clear, 0.5 - step, 2e3)) / (2 * step) * 0.1
    by_height = (sky(clear, 0.5, 2001.0) - sky(clear, 0.5, 1999.0)) / 2 * 1000.0
    expected = np.sqrt(by_clear**2 + by_cover**2 + by_height**2)
    assert float(sky_temperature_uncertainty(air, dew, 0.5)) == pytest.approx(expected, rel=1e-4)


def test_a_dew_point_beyond_the_range_is_held_and_told():
    lowest, highest = DEW_POINT_RANGE
    dew = np.array([lowest - 10.0, lowest, 280.0, highest, highest + 5.0, np.nan])
    assert outside_sky_validity(dew).tolist() == [True, False, False, False, True, True]
    sky = sky_temperature(290.0, dew)
    assert sky[0] == sky[1]
    assert sky[4] == sky[3]
    assert np.isnan(sky[5])


def test_half_sky_half_ground():
    found = float(outdoor_surroundings(260.0, 290.0))
    assert found == pytest.approx(((260.0**4 + 290.0**4) / 2) ** 0.25)
    assert float(outdoor_surroundings(260.0, 290.0, sky_share=0.0)) == pytest.approx(290.0)


@pytest.mark.parametrize("cover", [-0.1, 8.0])
def test_cloud_cover_in_eighths_or_percent_is_refused(cover):
    with pytest.raises(InputError, match=f"cloud cover is {cover:g}; expected 0 to 1"):
        sky_temperature(290.0, 280.0, cover)


def test_wrong_height_and_share_are_refused():
    with pytest.raises(InputError, match="cloud base height is -1 m; expected 0 or more"):
        cloudy_sky_emissivity(0.8, 0.5, cloud_base_height=-1.0)
    with pytest.raises(InputError, match=r"share of the sky is 1\.2; expected 0 to 1"):
        outdoor_surroundings(260.0, 290.0, sky_share=1.2)
