"""The promise of a plan, counted on profiles that had no part in it, and in closed form."""

import numpy as np
import pytest
from scipy.optimize import brentq

from cladwatt.inverse.detectable import (
    DETECTION,
    FALSE_ALARM,
    SoundProfiles,
    smallest_rise,
)
from cladwatt.inverse.local_damage import MISFIT, local_damage
from cladwatt.inverse.null import NullModel
from cladwatt.inverse.stretches import find_runs

NULL = NullModel(
    station_sigma=0.05, patch_sigma=0.3, own_sigma=0.1, scene_sigma=0.1, station_length=0.025
)
LENGTH = 0.3


def sound(
    seed: int,
    profiles: int = 300,
    kelvin: float = 10.0,
    null: NullModel = NULL,
    spread: float = 0.06,
):
    return SoundProfiles.draw(
        null, 80, np.random.default_rng(seed), kelvin_per_rise=kelvin, spread_length=spread,
        profiles=profiles,
    )  # fmt: skip


def called(profile, fresh: SoundProfiles, length: float) -> tuple[bool, bool]:
    """Whether assessing calls a strip damaged, and where the damage is."""
    null = fresh.null
    runs = find_runs(profile, null, sign=1, diameter_stations=8.0)
    found = local_damage(
        profile, null, runs,
        sign=1, kelvin_per_rise=fresh.kelvin_per_rise, spread_length=fresh.spread_length,
    )  # fmt: skip
    low, high = ((fresh.middle + side * length / 2) / null.station_length for side in (-1, 1))
    likely = [one for one, so in zip(runs, found.runs, strict=True) if so > 0.5]
    if found.hidden is not None:
        likely.append(found.hidden)
    return found.probability > 0.5, any(one.first < high and one.last > low for one in likely)


@pytest.mark.parametrize(
    ("spread", "length"), [(0.0, LENGTH), (0.06, LENGTH), (0.06, 0.1), (0.06, 1.0)]
)
def test_assessing_fresh_strips_finds_what_is_promised(spread, length):
    rise = smallest_rise(sound(1, spread=spread), length)
    fresh = sound(2, 120, spread=spread)
    shape = fresh.shapes(length, np.array([fresh.middle]))[0]
    as_promised, less = (
        np.mean(
            [called(one + part * rise * 10.0 * shape, fresh, length)[1] for one in fresh.values]
        )
        for part in (1.0, 0.4)
    )
    alarms = np.mean([called(one, fresh, length)[0] for one in fresh.values])
    # two standard errors of 120 strips; and no more is asked for than is needed
    assert as_promised > DETECTION - 0.04
    assert less < DETECTION - 0.04
    assert alarms < FALSE_ALARM


def test_rise_falls_with_what_the_lens_shows_and_grows_with_patches():
    usual = smallest_rise(sound(3), LENGTH)
    patchy = NullModel(0.05, 0.9, 0.1, 0.1, 0.025)
    assert smallest_rise(sound(3, null=patchy), LENGTH) > 1.5 * usual
    assert smallest_rise(sound(3, kelvin=30.0), LENGTH) < usual


def test_shorter_damage_must_be_stronger_under_a_sheet_that_spreads():
    profiles = sound(4)
    assert smallest_rise(profiles, 0.05) > 1.5 * smallest_rise(profiles, LENGTH)


def test_a_white_null_gives_laplaces_factor_in_closed_form():
    """Noise alone: damage at z standard deviations, 1.645 of which luck may take.

    A matched template's factor is e^(z^2 / 2) sqrt(2 pi) / (z ln 100) for heights over two decades
    (Kass and Raftery 1995, eq. 5), times its prior; at best all beside it count as much.
    """
    white = NullModel(0.5, 1e-6, 0.0, 1e-6, 0.025)
    profiles = SoundProfiles.draw(
        white, 80, np.random.default_rng(5), kelvin_per_rise=0.2, spread_length=0.0, profiles=1000
    )
    shape = profiles.shapes(LENGTH, np.array([profiles.middle]))[0]
    shape = shape - shape.mean()
    unit = 0.2 * np.sqrt((shape**2).sum()) / 0.5
    # 12 of 80 bins at one of 69 places, lengths to 60 bins by their logarithm
    prior = 1 / (12 * 69) / np.sum(1 / np.arange(1, 61))

    def needed(counted: float) -> float:
        def short(z: float) -> float:
            factor = counted * prior * np.sqrt(2 * np.pi) / (z * np.log(100))
            return z**2 / 2 + np.log(factor) - MISFIT - np.log(3)

        return brentq(short, 2, 9) + 1.645

    assert needed(25) < smallest_rise(profiles, LENGTH) * unit < needed(1)


def test_nothing_shows_where_nothing_reaches_the_lens_or_the_strip_is_too_short():
    assert smallest_rise(sound(6, kelvin=0.0), LENGTH) == np.inf
    assert smallest_rise(sound(6), 1.9) == np.inf
