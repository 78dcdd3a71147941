import csv
from pathlib import Path

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from iapws import IAPWS95

from cladwatt.errors import InputError
from cladwatt.physics.moisture import (
    frozen_conductivity_range,
    ice_conductivity,
    moist_conductivity_bounds,
    moisture_conversion_factor,
    outside_moisture_validity,
    water_conductivity,
    wet_conductivity_range,
)

with (Path(__file__).parents[1] / "published" / "moist_lagging.csv").open(
    encoding="utf-8", newline=""
) as file:
    PRINTED = list(csv.DictReader(file))


def rows(quantity):
    chosen = [row for row in PRINTED if row["quantity"] == quantity]
    return pytest.mark.parametrize("row", chosen, ids=[row["id"] for row in chosen])


@rows("factor")
def test_conversion_factors_of_the_standard(row, evidence):
    # ISO 10456, table 4
    found = float(moisture_conversion_factor(float(row["moisture"]), float(row["coefficient"])))
    printed, allowed = float(row["printed"]), float(row["tolerance"])
    evidence("iso_10456", row["id"].replace("_", " "), found, printed, abs=allowed)


@rows("ratio")
def test_a_published_multiplier_lies_between_the_bounds(row, evidence):
    dry, moisture = float(row["dry_conductivity_W_per_m_K"]), float(row["moisture"])
    bounds = moist_conductivity_bounds(dry, moisture, 320.0)
    printed = dry * float(row["printed"])
    assert float(bounds.low) < printed < float(bounds.high)
    inside = min(max(printed, float(bounds.low)), float(bounds.high))
    evidence("moist_article", "conductivity", inside, printed, unit="W/(m K)", abs=0.0)
    # and so does the standard's factor for mineral wool
    assert bounds.low < dry * moisture_conversion_factor(moisture, 4.0) < bounds.high


@rows("saturated_ratio")
def test_wetted_lagging_stays_below_pores_full_of_water(row, evidence):
    dry = float(row["dry_conductivity_W_per_m_K"])
    bounds = moist_conductivity_bounds(dry, float(row["moisture"]), 298.15)
    printed = dry * float(row["printed"])
    assert dry < printed < float(bounds.high)
    check = "gusyachkin" if row["source"].startswith("Gusyachkin") else "energies_15_2626"
    below = min(printed, float(bounds.high))
    evidence(check, "conductivity", below, printed, unit="W/(m K)", abs=0.0)


@pytest.mark.parametrize("kelvin", [274.0, 283.15, 298.15, 323.15, 353.15, 370.0])
def test_water_against_two_libraries(kelvin, evidence):
    # the reference data are stated to hold 0.7 %
    found = float(water_conductivity(kelvin))
    for check, expected in (
        ("coolprop_water", PropsSI("L", "T", kelvin, "P", 101_325, "Water")),
        ("iapws_water", IAPWS95(T=kelvin, P=0.101325).k),
    ):
        evidence(check, "conductivity", found, expected, unit="W/(m K)", rel=7e-3)


@rows("ice_conductivity")
def test_ice_at_the_melting_point(row, evidence):
    # sources differ by a tenth, so no tighter
    printed, how = float(row["printed"]), {"unit": "W/(m K)", "abs": float(row["tolerance"])}
    evidence("ashrae_ice", "conductivity", ice_conductivity(273.15), printed, **how)
    evidence.recomputed("ashrae_ice", "conductivity", fukusako(0.0), printed, **how,
                        by="Fukusako's relation")  # fmt: skip


def fukusako(celsius):
    """Int. J. Thermophysics 11 (1990) 353-372."""
    return 1.16 * (1.91 - 8.66e-3 * celsius + 2.97e-5 * celsius**2)


@pytest.mark.parametrize("celsius", [-1.0, -10.0, -20.0, -40.0])
def test_ice_against_a_second_relation(celsius, evidence):
    found, other = ice_conductivity(273.15 + celsius), fukusako(celsius)
    evidence("fukusako_ice", "conductivity", found, other, unit="W/(m K)", rel=0.1)


def test_bounds_meet_where_there_is_one_material():
    dry = moist_conductivity_bounds(0.04, 0.0, 300.0)
    assert float(dry.low) == pytest.approx(0.04)
    assert float(dry.high) == pytest.approx(0.04)
    full = moist_conductivity_bounds(0.04, 1.0, 300.0)
    assert float(full.low) == pytest.approx(float(water_conductivity(300.0)))
    moisture = np.linspace(0.0, 1.0, 21)
    bounds = moist_conductivity_bounds(0.04, moisture, 300.0)
    assert np.all(bounds.low <= bounds.high)
    assert np.all(np.diff(bounds.low) > 0)
    assert np.all(np.diff(bounds.high) > 0)


def test_bounds_by_slabs_and_stripes():
    # 10 mm of lagging and 2 mm of water one behind the other, resistances added by hand
    bounds = moist_conductivity_bounds(0.04, 2.0 / 12.0, 298.15)
    assert float(bounds.low) == pytest.approx(0.012 / (0.010 / 0.04 + 0.002 / 0.6065), rel=1e-3)
    # beside each other, the stripe of water in the place of air
    air = PropsSI("L", "T", 298.15, "P", 101_325, "Air")
    assert float(bounds.high) == pytest.approx(0.04 + (0.6065 - air) / 6.0, rel=1e-3)


def test_freezing_makes_it_worse():
    cold, warm = (moist_conductivity_bounds(0.04, 0.2, kelvin) for kelvin in (272.0, 274.5))
    assert 3.0 < float((cold.high - 0.04) / (warm.high - 0.04)) < 4.5
    wet = wet_conductivity_range(0.04, 1.33, 4.42)
    frozen = frozen_conductivity_range(0.04, 1.33, 4.42, 263.15)
    assert float(wet.low) == pytest.approx(0.0532)
    assert float(wet.high) == pytest.approx(0.1768)
    assert float(frozen.low) == float(wet.low)
    assert 3.0 < float((frozen.high - 0.04) / (wet.high - 0.04)) < 4.5
    # never more than ice itself
    assert float(frozen_conductivity_range(0.04, 1.33, 100.0, 263.15).high) == float(
        ice_conductivity(263.15)
    )


def test_closed_cells_stay_dry():
    for found in (
        wet_conductivity_range(0.045, 1.0, 1.0),
        frozen_conductivity_range(0.045, 1.0, 1.0, 250.0),
    ):
        assert float(found.low) == float(found.high) == 0.045


def test_validity_shapes_and_nan():
    flags = outside_moisture_validity(np.array([0.0, 0.149, 0.15, np.nan]))
    assert flags.tolist() == [False, False, True, True]
    bounds = moist_conductivity_bounds(
        np.array([[0.04], [0.05]]), np.array([0.0, 0.1, np.nan]), 300.0
    )
    assert bounds.low.shape == bounds.high.shape == (2, 3)
    assert np.isnan(bounds.high[:, 2]).all()
    assert np.isnan(moist_conductivity_bounds(0.04, 0.1, np.nan).low)
    assert np.isnan(ice_conductivity(np.nan))


def test_wrong_inputs_are_refused():
    with pytest.raises(InputError, match="moisture is 5; expected 0 to 1"):
        moist_conductivity_bounds(0.04, 5.0, 300.0)
    with pytest.raises(InputError, match="dry conductivity is 0 W/"):
        wet_conductivity_range(0.0, 1.0, 2.0)
    with pytest.raises(InputError, match="multipliers are 3 to 2; expected 1 or more"):
        wet_conductivity_range(0.04, 3.0, 2.0)
    with pytest.raises(InputError, match="coefficient is -1; expected 0 or more"):
        moisture_conversion_factor(0.1, -1.0)
