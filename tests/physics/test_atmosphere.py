import csv
from pathlib import Path

import numpy as np
import pytest

from cladwatt.errors import InputError
from cladwatt.physics.atmosphere import (
    air_path_transmission,
    air_path_transmission_uncertainty,
)

with (Path(__file__).parents[1] / "published" / "atmosphere_transmittance_lwir.csv").open(
    encoding="utf-8", newline=""
) as file:
    TABLE = list(csv.DictReader(file))

BANDS = {
    "tau_7.5_14um": (7.5e-6, 14e-6),
    "tau_8_14um": (8e-6, 14e-6),
    "tau_7.5_13um": (7.5e-6, 13e-6),
    "tau_8_12um": (8e-6, 12e-6),
}


def transmission(distance, **changed):
    settings = {
        "air_temperature": 293.15,
        "relative_humidity": 0.5,
        "band_limits": (7.5e-6, 14e-6),
    }
    return air_path_transmission(distance, **(settings | changed))


@pytest.mark.parametrize(("column", "limits"), BANDS.items())
@pytest.mark.parametrize(("longest", "tolerance"), [(20, 7e-4), (50, 9e-4), (100, 2e-3)])
def test_fit_against_lowtran_table(column, limits, longest, tolerance, evidence):
    # atmosphere_transmittance_lwir.csv - LOWTRAN 7 (AFGL-TR-88-0177); four printed decimals
    chosen = [row for row in TABLE if float(row["path_m"]) <= longest]
    found = air_path_transmission(
        np.array([float(row["path_m"]) for row in chosen]),
        air_temperature=np.array([float(row["T_air_C"]) + 273.15 for row in chosen]),
        relative_humidity=np.array([float(row["RH_pct"]) / 100 for row in chosen]),
        band_limits=limits,
    )
    expected = np.array([float(row[column]) for row in chosen])
    evidence("lowtran", f"transmission to {longest} m", found, expected, abs=tolerance)


def test_absorption_grows_slower_than_the_exponential_law():
    # atmosphere_cross_checks: -ln tau = 0.00598 L^0.579 for 7.5-14 µm at 20 °C, 50 %, 1-100 m
    distance = np.geomspace(1.0, 100.0, 15)
    depth = -np.log(transmission(distance))
    np.testing.assert_allclose(depth, 0.00598 * distance**0.579, rtol=0.06)


def test_clear_at_no_distance_and_falling_with_everything():
    assert float(transmission(0.0)) == 1.0
    assert np.all(np.diff(transmission(np.linspace(0, 150, 301))) < 0)
    assert np.all(np.diff(transmission(20.0, relative_humidity=np.linspace(0, 1, 21))) < 0)
    assert np.all(np.diff(transmission(20.0, air_temperature=np.linspace(230, 330, 21))) < 0)


def test_neighbouring_band_takes_the_nearest():
    assert transmission(10.0, band_limits=(7.7e-6, 13.8e-6)) == transmission(10.0)


@pytest.mark.parametrize(
    ("distance", "changed", "message"),
    [
        (-1.0, {}, "distance is -1 m"),
        (200.0, {}, "distance is 200 m; expected 0 to 150 m"),
        (10.0, {"air_temperature": 20.0}, "air temperature is 20 K"),
        (10.0, {"relative_humidity": 50.0}, "relative humidity is 50"),
        (10.0, {"band_limits": (3e-6, 5e-6)}, "band is 3-5 µm"),
    ],
)
def test_refuses(distance, changed, message):
    with pytest.raises(InputError, match=message):
        transmission(distance, **changed)


def test_uncertainty():
    # limits of 0.005 or 20 % of the absorption, rectangular; never past a transmission of 1
    found = air_path_transmission_uncertainty(np.array([1.0, 0.998, 0.98, 0.9]))
    np.testing.assert_allclose(found * np.sqrt(3), [0.0, 0.002, 0.005, 0.02], atol=1e-12)
    with pytest.raises(InputError, match=r"transmission is 1\.1"):
        air_path_transmission_uncertainty(1.1)
