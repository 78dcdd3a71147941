"""The promise of a plan, counted on profiles that had no part in it, and in closed form."""

import numpy as np
import pytest

from cladwatt.inverse.detectable import (
    DETECTION,
    FALSE_ALARM,
    SoundProfiles,
    _evidence,
    _terms,
    smallest_rise,
)
from cladwatt.inverse.null import NullModel

NULL = NullModel(
    station_sigma=0.05, patch_sigma=0.3, own_sigma=0.1, scene_sigma=0.1, station_length=0.025
)
LENGTH = 0.3


def sound(seed: int, profiles: int = 300, kelvin: float = 10.0, null: NullModel = NULL):
    return SoundProfiles.draw(
        null, 80, np.random.default_rng(seed), kelvin_per_rise=kelvin, spread_length=0.06,
        profiles=profiles,
    )  # fmt: skip


def test_found_as_often_as_promised_on_fresh_profiles():
    rise = smallest_rise(sound(1), LENGTH)
    fresh = sound(2, 400)
    # the same question asked of fresh pipes: any place against the one where the damage is
    half = LENGTH / 2
    places = np.linspace(fresh.bins.place[0] + half, fresh.bins.place[-1] - half, 36)
    shapes = fresh.shapes(LENGTH, np.append(places, fresh.middle))
    terms = list(_terms(fresh, shapes))
    any_place = np.arange(places.size)
    alarm = _evidence(terms, 10.0, any_place, 0.0)
    threshold = np.quantile(_evidence(list(_terms(sound(1), shapes)), 10.0, any_place, 0.0), 0.95)
    found = _evidence(terms, 10.0, np.arange(places.size + 1), 10.0 * rise)
    # two standard errors of 400 and of the 300 the threshold stands on
    assert (alarm > threshold).mean() == pytest.approx(FALSE_ALARM, abs=0.035)
    assert (found > threshold).mean() == pytest.approx(DETECTION, abs=0.04)


def test_rise_falls_with_what_the_lens_shows_and_grows_with_patches():
    usual = smallest_rise(sound(3), LENGTH)
    patchy = NullModel(0.05, 0.9, 0.1, 0.1, 0.025)
    assert smallest_rise(sound(3, null=patchy), LENGTH) > 1.5 * usual
    assert smallest_rise(sound(3, kelvin=30.0), LENGTH) < usual


def test_shorter_damage_must_be_stronger_under_a_sheet_that_spreads():
    profiles = sound(4)
    assert smallest_rise(profiles, 0.05) > 1.5 * smallest_rise(profiles, LENGTH)


def test_a_white_null_gives_the_matched_filter_in_closed_form():
    # noise alone: 95 % against 5 % over m independent places needs z(0.95^(1/m)) + z(0.95)
    # over the filter's signal to noise (Kay 1998, section 4.3); m is some two dozen here
    white = NullModel(0.5, 1e-6, 0.0, 1e-6, 0.025)
    profiles = SoundProfiles.draw(
        white, 80, np.random.default_rng(5), kelvin_per_rise=0.2, spread_length=0.0
    )
    shape = profiles.shapes(LENGTH, np.array([profiles.middle]))[0]
    shape = shape - shape.mean()
    unit = 0.2 * np.sqrt((shape**2).sum()) / 0.5
    low, high = (1.645 + 1.645) / unit, (3.1 + 1.645) / unit
    assert low < smallest_rise(profiles, LENGTH) < high


def test_nothing_shows_where_nothing_reaches_the_lens_or_the_strip_is_too_short():
    assert smallest_rise(sound(6, kelvin=0.0), LENGTH) == np.inf
    assert smallest_rise(sound(6), 1.9) == np.inf
