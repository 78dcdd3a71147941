"""Clear sky on a pipe, clouds, and the last sunset, from place and time."""

from datetime import UTC, datetime, timedelta, timezone

import numpy as np
import pandas as pd
import pvlib
import pytest

from cladwatt.errors import InputError
from cladwatt.physics.clear_sky import (
    HORIZON_DEG,
    clear_sky,
    cloud_factor_kasten_czeplak,
    hours_since_sun,
    pipe_sunlight,
)
from cladwatt.physics.solar import sun_position

GOLDEN = {"latitude_deg": 39.742476, "longitude_deg": -105.1786}
MOUNTAIN = timezone(timedelta(hours=-7))


def test_printed_position_of_nrel(evidence):
    # Reda and Andreas, table A5.1: 17 October 2003, 12:30:30 at UTC-7, 1830 m, 820 mbar, 11 °C;
    # printed with refraction, which the report's own eq. 42 gives as 0.0163 degrees
    moment = datetime(2003, 10, 17, 12, 30, 30, tzinfo=MOUNTAIN)
    found = sun_position(moment.timestamp(), **GOLDEN)
    bent = np.tan(np.deg2rad(found.elevation_deg + 10.3 / (found.elevation_deg + 5.11)))
    refraction = 820 / 1010 * 283 / (273 + 11) * 1.02 / (60 * bent)
    other = pvlib.solarposition.get_solarposition(
        pd.DatetimeIndex([moment]), GOLDEN["latitude_deg"], GOLDEN["longitude_deg"],
        altitude=1830.14, pressure=82000, temperature=11,
    )  # fmt: skip
    pairs = {
        "zenith": (90 - found.elevation_deg - refraction, 50.11162, "apparent_zenith"),
        "azimuth": (found.azimuth_deg, 194.34024, "azimuth"),
    }
    for what, (value, printed, column) in pairs.items():
        evidence("nrel_spa", what, float(value), printed, unit="°", abs=0.02)
        evidence.recomputed(
            "nrel_spa", what, float(other[column].iloc[0]), printed, unit="°", abs=1e-5, by="pvlib"
        )


def test_clear_sky_of_the_book(evidence):
    # Duffie and Beckman, examples 2.8.1 and 2.8.2, Madison (270 m), 22 August, 11:30 solar time:
    # Hottel's standard atmosphere, 23 km of visibility; outside the air 1339 W/m2, cos z 0.846
    cosine, outside = 0.846, 1339.0
    beam, diffuse = clear_sky(np.rad2deg(np.arcsin(cosine)), outside)
    altitude = 0.27
    a0 = 0.97 * (0.4237 - 0.00821 * (6 - altitude) ** 2)
    a1 = 0.99 * (0.5055 + 0.00595 * (6.5 - altitude) ** 2)
    k = 1.02 * (0.2711 + 0.01858 * (2.5 - altitude) ** 2)
    passed = a0 + a1 * np.exp(-k / cosine)
    whole = outside * cosine * (passed + 0.271 - 0.294 * passed)
    pairs = {
        "beam": (beam, outside * passed, 830.0),
        "level ground": (beam * cosine + diffuse, whole, 803.0),
    }
    for what, (value, again, printed) in pairs.items():
        evidence("duffie_beckman_2_8", what, float(value), printed, unit="W/m2", rel=0.1)
        evidence.recomputed(
            "duffie_beckman_2_8", what, again, printed, unit="W/m2", rel=5e-3, by="Hottel's model"
        )


@pytest.mark.parametrize("elevation", [10.0, 20.0, 35.0, 50.0, 65.0])
def test_clear_sky_beside_another_model(elevation, evidence):
    # simplified Solis with the aerosol and water of a clear day in the middle latitudes
    other = pvlib.clearsky.simplified_solis(elevation, aod700=0.1, precipitable_water=1.5)
    beam, diffuse = clear_sky(elevation)
    level = float(beam) * np.sin(np.deg2rad(elevation)) + float(diffuse)
    # stated u 10 % on level ground, and the split is worse where the sun is low
    how = {"unit": "W/m2", "rel": 0.2}
    evidence("pvlib_clear_sky", "level ground", level, float(other["ghi"]), **how)
    evidence("pvlib_clear_sky", "beam", float(beam), float(other["dni"]), **how | {"rel": 0.25})


def test_level_pipe_by_hand():
    # sun overhead: every level pipe stands square to it, an upright one does not meet the beam
    beam, diffuse = clear_sky(90.0)
    around = 0.5 * (diffuse + 0.2 * (beam + diffuse))
    level = pipe_sunlight(90.0)
    assert level.mean == pytest.approx(float(beam + np.pi * around), rel=1e-9)
    assert level.u == pytest.approx(0.0, abs=1e-6)
    upright = pipe_sunlight(90.0, inclination_deg=90.0)
    assert upright.mean == pytest.approx(float(np.pi * around), rel=1e-6)


def test_level_pipe_of_any_direction_under_a_low_sun():
    # sqrt(1 - cos^2 el cos^2 t) over all t: 2/pi of the complete elliptic integral of the 2nd kind
    from scipy.special import ellipe

    beam, diffuse = clear_sky(20.0)
    around = 0.5 * (diffuse + 0.2 * (beam * np.sin(np.deg2rad(20.0)) + diffuse))
    share = 2 / np.pi * ellipe(np.cos(np.deg2rad(20.0)) ** 2)
    found = pipe_sunlight(20.0)
    assert found.mean == pytest.approx(float(beam * share + np.pi * around), rel=1e-3)
    mean_square = 1 - 0.5 * np.cos(np.deg2rad(20.0)) ** 2
    assert found.u == pytest.approx(float(beam) * np.sqrt(mean_square - share**2), rel=1e-2)


def test_nothing_at_night():
    assert clear_sky(-3.0) == (0.0, 0.0)
    assert pipe_sunlight(-3.0) == (0.0, 0.0)


def test_clouds():
    # the relation's ends: clear is 1, overcast a quarter
    assert cloud_factor_kasten_czeplak(np.array([0.0, 1.0])).tolist() == [1.0, 0.25]
    with pytest.raises(InputError, match=r"cloud cover is 1\.2; expected 0 to 1"):
        cloud_factor_kasten_czeplak(1.2)


@pytest.mark.parametrize(("latitude", "longitude"), [(51.5, -0.1), (40.4, 23.0), (-33.9, 18.4)])
@pytest.mark.parametrize("month", [1, 4, 7, 10])
def test_sunset_against_pvlib(latitude, longitude, month, evidence):
    # places whose day lies within one day of UTC: the algorithm's sunset is that of the UTC day
    day = pd.DatetimeIndex([datetime(2025, month, 14, 12, tzinfo=UTC)])
    expected = pvlib.solarposition.sun_rise_set_transit_spa(day, latitude, longitude)["sunset"]
    night = datetime(2025, month, 14, 23, tzinfo=UTC).timestamp()
    hours = (night - expected.iloc[0].timestamp()) / 3600
    found = hours_since_sun(night, latitude_deg=latitude, longitude_deg=longitude)
    evidence("pvlib_sun", "hours since sunset", found, hours, unit="h", abs=0.03, scale=1.0)


def test_the_sun_stands_on_the_horizon_at_the_sunset_found(evidence):
    evening = datetime(2003, 10, 17, 20, 30, tzinfo=MOUNTAIN)
    hours = hours_since_sun(evening.timestamp(), **GOLDEN)
    sunset = pd.DatetimeIndex([evening - timedelta(hours=hours)])
    stands = pvlib.solarposition.get_solarposition(sunset, *GOLDEN.values())["elevation"]
    how = {"unit": "°", "abs": 0.02, "scale": 1.0}
    evidence("pvlib_sun", "elevation at sunset", float(stands.iloc[0]), HORIZON_DEG, **how)


def test_day_and_polar_night():
    noon = datetime(2025, 6, 21, 12, tzinfo=UTC).timestamp()
    assert hours_since_sun(noon, latitude_deg=52.0, longitude_deg=0.0) == 0.0
    winter = datetime(2025, 12, 21, 12, tzinfo=UTC).timestamp()
    assert hours_since_sun(winter, latitude_deg=75.0, longitude_deg=20.0) is None
