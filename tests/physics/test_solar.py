import csv
from datetime import UTC, datetime
from pathlib import Path

import fluids
import numpy as np
import pandas as pd
import pvlib
import pytest

from cladwatt.errors import InputError
from cladwatt.physics.solar import (
    SOLAR_CONSTANT,
    SunPosition,
    absorbed_solar,
    clear_sky_irradiance_haurwitz,
    diffuse_fraction_erbs,
    extraterrestrial_irradiance,
    irradiance_on_element,
    projected_share,
    sun_position,
    sun_position_from_hour_angle,
)

with (Path(__file__).parents[1] / "published" / "sun_position.csv").open(
    encoding="utf-8", newline=""
) as file:
    EXAMPLES = list(csv.DictReader(file))

PLACES = [(51.5, -0.1), (-33.9, 151.2), (64.1, -21.9), (1.3, 103.8), (40.4, -104.7)]


def sun(elevation_deg, azimuth_deg):
    return SunPosition(np.asarray(elevation_deg, float), np.asarray(azimuth_deg, float))


def unix(times):
    return np.array([time.timestamp() for time in times])


@pytest.mark.parametrize("row", EXAMPLES, ids=lambda row: row["id"])
def test_textbook_positions(row, evidence):
    # Duffie and Beckman, example 1.6.2; half the last digit, and for the azimuth what the book's
    # rounded zenith does to it
    angles = {key: float(row[key]) for key in ("latitude_deg", "declination_deg", "hour_angle_deg")}
    position = sun_position_from_hour_angle(**angles)
    latitude, declination, hour = np.deg2rad(list(angles.values()))
    # the same by turning the vector towards the sun about the east-west axis
    south, west = np.cos(declination) * np.cos(hour), np.cos(declination) * np.sin(hour)
    pole = np.sin(declination)
    up = south * np.cos(latitude) + pole * np.sin(latitude)
    to_south = south * np.sin(latitude) - pole * np.cos(latitude)
    found, other = {
        "zenith": (90.0 - float(position.elevation_deg), np.rad2deg(np.arccos(up))),
        "azimuth_from_south": (
            float(position.azimuth_deg) - 180.0,
            np.rad2deg(np.arctan2(west, to_south)),
        ),
    }[row["quantity"]]
    printed, what = float(row["value_deg"]), row["quantity"].replace("_", " ")
    how = {"unit": "°", "abs": 1.001 * float(row["tolerance_deg"])}
    evidence("duffie_beckman_1_6_2", what, found, printed, **how)
    evidence.recomputed("duffie_beckman_1_6_2", what, other, printed, **how, by="vectors by hand")


@pytest.mark.parametrize(("latitude", "longitude"), PLACES)
@pytest.mark.parametrize("year", [1995, 2024, 2045])
def test_against_pvlib(latitude, longitude, year, evidence):
    # NREL's solar position algorithm in pvlib, good to 0.0003 degrees
    times = pd.date_range(f"{year}-01-03", f"{year}-12-28", periods=400, tz="UTC")
    expected = pvlib.solarposition.get_solarposition(times, latitude, longitude)
    found = sun_position(unix(times), latitude_deg=latitude, longitude_deg=longitude)
    elevation = expected["elevation"].to_numpy()
    how = {"unit": "°", "abs": 0.05, "scale": 90.0}
    evidence("pvlib_sun", "elevation", found.elevation_deg, elevation, **how)
    turn = found.azimuth_deg - expected["azimuth"].to_numpy()
    across = (np.mod(turn + 180.0, 360.0) - 180.0) * np.cos(np.deg2rad(found.elevation_deg))
    evidence("pvlib_sun", "across", across, np.zeros_like(across), **how)


@pytest.mark.parametrize(("latitude", "longitude"), PLACES)
def test_against_fluids(latitude, longitude, evidence):
    for moment in (datetime(2023, 6, 21, 15, 30, tzinfo=UTC), datetime(2026, 2, 1, 3, tzinfo=UTC)):
        other = fluids.solar_position(moment, latitude, longitude)
        found = sun_position(moment.timestamp(), latitude_deg=latitude, longitude_deg=longitude)
        how = {"unit": "°", "abs": 0.05, "scale": 90.0}
        evidence("fluids_sun", "elevation", found.elevation_deg, other[3], **how)
        evidence("fluids_sun", "azimuth", found.azimuth_deg, other[4], **how)


def test_irradiance_outside_the_atmosphere_against_pvlib(evidence):
    # leap years shift the date by less than 1.3 days, 0.06 % a day at most
    times = pd.date_range("2025-01-01T12", "2025-12-31T12", freq="D", tz="UTC")
    expected = pvlib.irradiance.get_extra_radiation(
        np.arange(1, 366), solar_constant=SOLAR_CONSTANT, method="spencer"
    )
    found = extraterrestrial_irradiance(unix(times))
    evidence("pvlib_irradiance", "outside the air", found, expected, unit="W/m2", rel=1e-3)


def test_clear_sky_against_pvlib(evidence):
    elevation = np.array([-10.0, 0.5, 5.0, 20.0, 45.0, 70.0, 90.0])
    expected = pvlib.clearsky.haurwitz(pd.Series(90.0 - elevation))["ghi"].to_numpy()
    found = clear_sky_irradiance_haurwitz(elevation)
    how = {"unit": "W/m2", "abs": 1e-9, "scale": 1.0}
    evidence("pvlib_irradiance", "clear sky", found, expected, **how)
    # a thousand watts per square metre and a little more with the sun overhead
    assert 1000.0 < float(clear_sky_irradiance_haurwitz(90.0)) < 1070.0


def test_diffuse_share_against_pvlib(evidence):
    kt = np.array([0.05, 0.21, 0.3, 0.5, 0.65, 0.79, 0.85])
    outside = pvlib.irradiance.get_extra_radiation(100)
    level = outside * np.cos(np.deg2rad(40.0))
    expected = pvlib.irradiance.erbs(kt * level, 40.0, 100)["dhi"] / (kt * level)
    evidence("pvlib_irradiance", "diffuse share", diffuse_fraction_erbs(kt), expected, rel=1e-9)


@pytest.mark.parametrize(("normal_elevation", "normal_azimuth"), [(90, 0), (30, 200), (-40, 120)])
def test_element_against_pvlib(normal_elevation, normal_azimuth, evidence):
    expected = pvlib.irradiance.get_total_irradiance(
        surface_tilt=90 - normal_elevation,
        surface_azimuth=normal_azimuth,
        solar_zenith=50.0,
        solar_azimuth=160.0,
        dni=700.0,
        ghi=700.0 * np.cos(np.deg2rad(50.0)) + 120.0,
        dhi=120.0,
        albedo=0.25,
        model="isotropic",
    )["poa_global"]
    found = irradiance_on_element(
        sun(40.0, 160.0),
        normal_elevation_deg=normal_elevation,
        normal_azimuth_deg=normal_azimuth,
        beam_normal=700.0,
        diffuse_horizontal=120.0,
        albedo=0.25,
    )
    evidence("pvlib_irradiance", "plane", found, float(expected), unit="W/m2", rel=1e-9)


@pytest.mark.parametrize(("axis", "inclination"), [(0, 0), (75, 0), (130, 35), (0, 90)])
def test_pipe_is_the_mean_of_its_elements(axis, inclination, evidence):
    # pvlib's plane-of-array irradiance averaged over 720 directions around the axis
    a, i = np.deg2rad(axis), np.deg2rad(inclination)
    side = np.array([np.cos(a), -np.sin(a), 0.0])  # east, north, up
    top = np.array([-np.sin(a) * np.sin(i), -np.cos(a) * np.sin(i), np.cos(i)])
    turn = np.linspace(0.0, 2 * np.pi, 720, endpoint=False)
    normal = np.cos(turn)[:, None] * side + np.sin(turn)[:, None] * top
    elevation = np.rad2deg(np.arcsin(np.clip(normal[:, 2], -1, 1)))
    azimuth = np.mod(np.rad2deg(np.arctan2(normal[:, 0], normal[:, 1])), 360.0)
    flat = pvlib.irradiance.get_total_irradiance(
        surface_tilt=90 - elevation,
        surface_azimuth=azimuth,
        solar_zenith=55.0,
        solar_azimuth=220.0,
        dni=650.0,
        ghi=650.0 * np.cos(np.deg2rad(55.0)) + 100.0,
        dhi=100.0,
        albedo=0.2,
        model="isotropic",
    )
    found = absorbed_solar(
        sun(35.0, 220.0),
        absorptance=0.4,
        beam_normal=650.0,
        diffuse_horizontal=100.0,
        axis_azimuth_deg=axis,
        inclination_deg=inclination,
    )
    expected = 0.4 * float(np.mean(flat["poa_global"]))
    evidence("pvlib_irradiance", "pipe", found, expected, unit="W/m2", rel=1e-4)


def test_shade_of_a_pipe():
    overhead = sun(90.0, 0.0)
    assert float(projected_share(overhead, axis_azimuth_deg=10.0)) == pytest.approx(1.0)
    upright = projected_share(overhead, axis_azimuth_deg=0.0, inclination_deg=90.0)
    assert float(upright) == pytest.approx(0.0, abs=1e-7)
    # sun 30 degrees up in the south: square to an east-west pipe, 30 degrees off a north-south one
    low = sun(30.0, 180.0)
    assert float(projected_share(low, axis_azimuth_deg=90.0)) == pytest.approx(1.0)
    assert float(projected_share(low, axis_azimuth_deg=0.0)) == pytest.approx(0.5)


def test_no_sun_at_night():
    night = sun(-5.0, 20.0)
    common = {"beam_normal": 500.0, "diffuse_horizontal": 0.0}
    found = absorbed_solar(night, absorptance=0.5, axis_azimuth_deg=0.0, **common)
    assert float(found) == 0.0
    upwards = {"normal_elevation_deg": 90.0, "normal_azimuth_deg": 0.0}
    assert float(irradiance_on_element(night, **upwards, **common)) == 0.0
    assert float(clear_sky_irradiance_haurwitz(-5.0)) == 0.0


def test_shapes_and_nan():
    position = sun_position(
        np.array([[1.7e9], [np.nan]]), latitude_deg=np.array([10.0, 50.0]), longitude_deg=0.0
    )
    assert position.azimuth_deg.shape == (2, 2)
    assert np.isnan(position.elevation_deg[1]).all()
    assert np.isnan(clear_sky_irradiance_haurwitz(np.nan))


def test_wrong_inputs_are_refused():
    with pytest.raises(InputError, match="latitude is 95; expected -90 to 90"):
        sun_position(0.0, latitude_deg=95.0, longitude_deg=0.0)
    with pytest.raises(InputError, match="longitude is 200; expected -180 to 180"):
        sun_position(0.0, latitude_deg=0.0, longitude_deg=200.0)
    common = {"beam_normal": 500.0, "diffuse_horizontal": 50.0, "axis_azimuth_deg": 0.0}
    with pytest.raises(InputError, match=r"absorptance is 40; expected 0 to 1"):
        absorbed_solar(sun(30.0, 0.0), absorptance=40.0, **common)
    with pytest.raises(InputError, match="diffuse irradiance is -1 W/m2; expected 0 or more"):
        absorbed_solar(sun(30.0, 0.0), absorptance=0.4, **common | {"diffuse_horizontal": -1.0})
    with pytest.raises(InputError, match=r"clearness is -0\.1; expected 0 or more"):
        diffuse_fraction_erbs(-0.1)
