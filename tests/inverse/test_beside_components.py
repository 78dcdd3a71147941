"""What a component adds to the lagging beside it: estimated, taken off, and damage still found."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.beside_components import decay_of, warmth_beside
from cladwatt.inverse.null import NullModel
from cladwatt.inverse.steady_state import warming_gain
from cladwatt.inverse.stretches import find_runs
from cladwatt.physics.time_constant import lagging_step_response
from cladwatt.quantities import Quantity

STATION, STATIONS, DECAY = 0.005, 400, 0.06
BODY = slice(160, 220)
NULL = NullModel(0.03, 0.15, 0.0, 0.05, STATION)
COMPONENT_AT = np.zeros(STATIONS, dtype=bool)
COMPONENT_AT[BODY] = True
AWAY = np.minimum(
    np.abs(np.arange(STATIONS) - BODY.start), np.abs(np.arange(STATIONS) - (BODY.stop - 1))
) * STATION  # fmt: skip


def warmed(seed=1, *, sign=1, height=4.0, decay=DECAY):
    """A sound strip with a component that warms it, and the component's own stations."""
    random = np.random.default_rng(seed)
    profile = 310.0 + random.normal(0, NULL.station_sigma, STATIONS)
    profile += sign * height * np.exp(-AWAY / decay)
    body = np.where(COMPONENT_AT, 310.0 + sign * 1.5 * height, profile)
    profile[COMPONENT_AT] = np.nan
    return profile, body


def beside(profile, body, sign=1, decay=DECAY):
    length = np.full(STATIONS, STATION)
    return warmth_beside(profile, body, COMPONENT_AT, length, sign=sign, decay=decay)


def runs_of(profile, body, sign=1):
    found = beside(profile, body, sign)
    searched = found.searched(profile, sign)
    return find_runs(
        searched, NULL, sign=sign, diameter_stations=40, level_from=found.sound(searched)
    )


@pytest.mark.parametrize("sign", [1, -1], ids=["hot", "chilled"])
@pytest.mark.parametrize("off", [0.75, 1.0, 1.35])
def test_warmth_by_conduction_is_no_damage(sign, off):
    profile, body = warmed(sign=sign, decay=off * DECAY)
    # left in, it is called damage
    plain = find_runs(profile, NULL, sign=sign, diameter_stations=40)
    assert max(run.probability for run in plain) > 0.5
    assert not any(run.probability > 0.1 for run in runs_of(profile, body, sign))


@pytest.mark.parametrize(("first", "last"), [(240, 300), (80, 150), (300, 380)])
def test_damage_that_reaches_beyond_it_is_still_found(first, last):
    profile, body = warmed()
    profile[first:last] += 3.0
    (best,) = (run for run in runs_of(profile, body) if run.probability > 0.5)
    assert best.probability > 0.95
    # an edge within the first decay length is not seen: it stands where the search begins
    assert best.first == pytest.approx(first, abs=DECAY / STATION)
    assert best.last == pytest.approx(last - 1, abs=DECAY / STATION)


def test_damage_beside_a_component_is_not_taken_for_its_warmth():
    # a step that ends at the component: hotter than anything conduction could leave there
    profile, body = warmed(height=0.0)
    body[BODY] = 313.0
    profile[220:320] += 3.0
    found = beside(profile, body)
    assert found.warmth[220:].max() < 0.6
    (best,) = (run for run in runs_of(profile, body) if run.probability > 0.5)
    # where it begins is not seen, and that is said
    assert best.first_u < found.widened(best).first_u
    assert found.widened(best).last_u == best.last_u


def test_what_is_warmed_is_not_warmer_than_what_warms_it():
    profile, body = warmed(height=4.0)
    cool = np.where(COMPONENT_AT, 310.0, body)
    assert beside(profile, cool).warmth.max() < 0.3
    assert beside(profile, body).warmth.max() == pytest.approx(4.0, rel=0.1)


def test_sound_level_is_taken_away_from_components():
    profile, body = warmed()
    found = beside(profile, body)
    kept = np.isfinite(found.sound(found.searched(profile, 1)))
    assert AWAY[kept].min() > 2.9 * DECAY
    assert kept.sum() > 200
    # but from somewhere
    short = np.where(AWAY < 2 * DECAY, profile, np.nan)
    assert np.isfinite(found.sound(short)).sum() == np.isfinite(short).sum()


def test_a_better_conducting_sheet_reaches_further(bench):
    aluminium = replace(bench.line.cladding, conductivity=200.0, thickness=Quantity(0.001))
    steel = decay_of(bench.line, 8.0)
    far = decay_of(replace(bench.line, cladding=aluminium), 8.0)
    assert 1.7 < far / steel < 2.0  # twice, were the sheet alone to carry it
    (layer,) = bench.line.layers
    unknown = replace(bench.line, layers=(replace(layer, thickness=None),))
    assert decay_of(unknown, 8.0) == pytest.approx(steel, rel=0.1)


def test_uneven_lagging_looks_more_uneven_while_it_warms_up(bench):
    (layer,) = bench.line.layers
    heavy = replace(layer, density=Quantity(200.0), specific_heat=Quantity(900.0))
    line = replace(bench.line, layers=(heavy,))
    assert warming_gain(line) == 1.0
    assert warming_gain(replace(line, hours_at_temperature=Quantity(100.0))) == 1.0
    # against the difference of two laggings, both followed by their slowest mode
    hours, warmth = 1.5, []
    for conductivity in (0.045 * 0.99, 0.045 * 1.01):
        response = lagging_step_response(
            0.1143, 0.2343, conductivity=conductivity, volumetric_heat_capacity=180e3,
            surface_coefficient=8.0, surface_heat_capacity=3.2e6 * 0.001,
        )  # fmt: skip
        reached = 1 - response.amplitude * np.exp(-3600 * hours / response.time_constant)
        warmth.append(float(conductivity * reached))
    slope = np.log(warmth[1] / warmth[0]) / np.log(1.01 / 0.99)
    found = warming_gain(replace(line, hours_at_temperature=Quantity(hours)))
    assert found > 1.3
    assert found == pytest.approx(slope, rel=0.1)
