"""Stretches on profiles drawn from the null itself, and on profiles with a known step."""

import numpy as np
import pytest

from cladwatt.inverse.null import NullModel
from cladwatt.inverse.stretches import Run, find_runs, local_probability, sound_stations

STATION = 0.004
PATCH_LENGTH = 0.3


def null_profile(seed: int, stations: int, null: NullModel) -> np.ndarray:
    """A sound pipe as the null says: noise of stations, patches, a mirrored scene all along."""
    random = np.random.default_rng(seed)
    decay = np.exp(-2 * null.station_length / PATCH_LENGTH)
    patches = np.empty(stations)
    patches[0] = random.normal()
    for station in range(1, stations):
        patches[station] = decay * patches[station - 1] + np.sqrt(1 - decay**2) * random.normal()
    scene = null.scene_sigma * np.sin(np.linspace(0, 2 * np.pi, stations) + random.uniform(0, 6))
    noise = random.normal(0, null.station_sigma, stations)
    return 315.0 + noise + null.patch_sigma * patches + np.sqrt(2) * scene


def strongest(runs: tuple[Run, ...]) -> float:
    return max((run.probability for run in runs), default=0.0)


def step(stations: int, first: int, last: int, height: float, level: float = 315.0) -> np.ndarray:
    profile = np.full(stations, level)
    profile[first : last + 1] += height
    return profile


SMOOTH = NullModel(0.05, 0.0, 0.0, 0.0, STATION)
PAINT = NullModel(0.05, 0.1, 0.0, 0.05, STATION)
PATCHY = NullModel(0.05, 0.3, 0.0, 0.05, STATION)


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize(
    ("null", "stations", "diameter"),
    [(SMOOTH, 240, 48), (PAINT, 240, 48), (PATCHY, 240, 48), (PATCHY, 500, 30), (PAINT, 90, 20)],
    ids=["smooth", "paint", "patchy", "patchy long thin", "paint short"],
)
def test_false_alarms_on_sound_pipes_are_rare(null, stations, diameter, sign):
    found = [
        strongest(
            find_runs(
                null_profile(seed, stations, null), null, sign=sign, diameter_stations=diameter
            )
        )
        for seed in range(120)
    ]
    # at most 3 of 120 called more likely damaged than not, none called certain
    assert np.sum(np.array(found) > 0.5) <= 3
    assert max(found) < 0.95


def test_a_null_half_too_narrow_is_caught_by_that_count():
    # the count above can fail: the same profiles against a null that knows of no patches
    narrow = NullModel(PATCHY.station_sigma, 0.03, 0.0, 0.0, STATION)
    found = [
        strongest(find_runs(null_profile(seed, 240, PATCHY), narrow, sign=1, diameter_stations=48))
        for seed in range(20)
    ]
    assert np.mean(np.array(found) > 0.5) > 0.5


@pytest.mark.parametrize("null", [PAINT, PATCHY], ids=["paint", "patchy"])
def test_a_strong_stretch_is_found_where_it_is(null):
    height = 12 * null.run_sigma(48)
    hits, away = 0, []
    for seed in range(40):
        profile = null_profile(seed, 240, null)
        profile[100:148] += height
        runs = find_runs(profile, null, sign=1, diameter_stations=48)
        best = max(runs, key=lambda run: run.probability)
        hits += best.probability > 0.9
        away.append((best.first - 100, best.last - 147))
    assert hits >= 39
    assert np.median(np.abs(away)) <= 1
    assert np.percentile(np.abs(away), 90) <= 3


@pytest.mark.parametrize(("first", "last"), [(60, 100), (0, 30), (200, 239), (110, 116)])
def test_edges_of_a_clean_step_are_exact(first, last):
    (run,) = find_runs(step(240, first, last, 4.0), SMOOTH, sign=1, diameter_stations=40)
    assert abs(run.first - first) <= 1
    assert abs(run.last - last) <= 1
    assert run.probability > 0.99
    assert run.stations == slice(run.first, run.last + 1)


@pytest.mark.parametrize("null", [SMOOTH, PAINT, PATCHY], ids=["smooth", "paint", "patchy"])
def test_a_short_strong_defect_keeps_its_edges(null):
    """Far shorter than the diameter: marked by wide scales too, but no longer for that."""
    away = []
    for seed in range(30):
        profile = null_profile(seed, 300, null)
        profile[110:117] += 4.0
        runs = find_runs(profile, null, sign=1, diameter_stations=40)
        best = max(runs, key=lambda run: run.probability)
        assert best.probability > 0.5
        away.append((best.first - 110, best.last - 116))
    assert np.percentile(np.abs(away), 90) <= 1


def test_a_peak_within_damage_does_not_hide_the_rest_of_it():
    profile = null_profile(3, 300, PAINT)
    profile[80:200] += 2.0
    profile[120:130] += 20.0
    (run,) = find_runs(profile, PAINT, sign=1, diameter_stations=40)
    assert abs(run.first - 80) <= 1
    assert abs(run.last - 199) <= 1


def test_a_blurred_step_keeps_its_edges_at_half_height_and_grows_less_sure_of_them():
    from scipy.ndimage import gaussian_filter1d

    sharp = step(300, 100, 180, 5.0)
    runs = [
        find_runs(gaussian_filter1d(sharp, width), SMOOTH, sign=1, diameter_stations=40)
        for width in (0.5, 8.0)
    ]
    (clean,), (blurred,) = runs
    assert abs(blurred.first - 100) <= 1
    assert abs(blurred.last - 180) <= 1
    assert blurred.first_u > 2 * clean.first_u
    assert blurred.last_u > 2 * clean.last_u


def test_contrast_of_a_step_is_its_height():
    (run,) = find_runs(step(240, 90, 150, 3.0), SMOOTH, sign=1, diameter_stations=40)
    assert run.contrast == pytest.approx(3.0, rel=0.03)
    assert run.sigmas == pytest.approx(run.contrast / SMOOTH.run_sigma(run.last - run.first + 1))


def test_only_the_side_towards_the_fluid_is_damage():
    cold = step(240, 90, 150, -3.0)
    assert find_runs(cold, SMOOTH, sign=-1, diameter_stations=40)[0].contrast == pytest.approx(
        3.0, rel=0.03
    )
    for run in find_runs(step(240, 90, 150, 3.0), SMOOTH, sign=-1, diameter_stations=40):
        # the rest is colder than the warm stretch; what it must not do is name the warm one
        assert run.last < 90 or run.first > 150


def test_a_shared_error_moves_no_contrast():
    profile = null_profile(5, 240, PAINT)
    profile[60:110] += 2.0
    one = find_runs(profile, PAINT, sign=1, diameter_stations=40)
    two = find_runs(profile + 17.0, PAINT, sign=1, diameter_stations=40)
    assert [(run.first, run.last) for run in one] == [(run.first, run.last) for run in two]
    assert [run.contrast for run in one] == pytest.approx([run.contrast for run in two])


def test_two_stretches_far_apart_stay_two():
    profile = step(400, 60, 100, 3.0) + step(400, 250, 320, 5.0, level=0.0)
    runs = find_runs(profile, SMOOTH, sign=1, diameter_stations=40)
    assert [(run.first, run.last) for run in runs] == [(60, 100), (250, 320)]
    assert [run.contrast for run in runs] == pytest.approx([3.0, 5.0], rel=0.05)


@pytest.mark.parametrize("heights", [(4.0, 4.0), (8.0, 3.0), (20.0, 3.0), (3.0, 9.0)], ids=str)
def test_two_stretches_that_a_wide_scale_marks_as_one_stay_two(heights):
    for seed in range(10):
        profile = null_profile(seed, 240, PAINT)
        profile[40:70] += heights[0]
        profile[150:210] += heights[1]
        runs = find_runs(profile, PAINT, sign=1, diameter_stations=48)
        likely = [run for run in runs if run.probability > 0.5]
        edges = [(run.first, run.last) for run in likely]
        assert np.abs(np.subtract(edges, [(40, 69), (150, 209)])).max() <= 1


def test_the_tail_of_a_spread_step_is_no_second_stretch():
    from scipy.ndimage import gaussian_filter1d

    for seed in range(10):
        profile = null_profile(seed, 300, PAINT)
        profile += gaussian_filter1d(step(300, 110, 190, 15.0, level=0.0), 10.0)
        runs = find_runs(profile, PAINT, sign=1, diameter_stations=48)
        (run,) = [run for run in runs if run.probability > 0.5]
        assert abs(run.first - 110) <= 2
        assert abs(run.last - 190) <= 2


def test_two_stretches_closer_than_a_quarter_diameter_are_one():
    profile = step(300, 100, 140, 4.0) + step(300, 146, 190, 4.0, level=0.0)
    (run,) = find_runs(profile, SMOOTH, sign=1, diameter_stations=40)
    assert (run.first, run.last) == (100, 190)


def test_damage_over_more_than_half_the_strip_leaves_the_sound_level_where_it_is():
    (run,) = find_runs(step(300, 0, 179, 4.0), SMOOTH, sign=1, diameter_stations=40)
    assert run.contrast == pytest.approx(4.0, rel=0.03)
    assert (run.first, run.last) == (0, 179)


def test_a_gap_carries_no_edge_into_the_rest():
    profile = step(240, 120, 170, 4.0)
    profile[30:60] = np.nan
    (run,) = find_runs(profile, SMOOTH, sign=1, diameter_stations=40)
    assert abs(run.first - 120) <= 1
    assert np.isfinite([run.contrast, run.sigmas, run.first_u, run.last_u, run.probability]).all()


def test_too_few_stations_tell_nothing():
    profile = np.full(100, np.nan)
    profile[:7] = [315, 315, 320, 320, 320, 315, 315]
    assert find_runs(profile, SMOOTH, sign=1, diameter_stations=40) == ()


def test_a_level_profile_holds_no_run():
    assert find_runs(np.full(200, 310.0), SMOOTH, sign=1, diameter_stations=40) == ()


def test_probability_grows_with_contrast_and_falls_with_places_to_look():
    sigmas = np.linspace(0, 60, 241)
    by_sigmas = [local_probability(value, tries=5) for value in sigmas]
    assert np.all(np.diff(by_sigmas) >= 0)
    assert by_sigmas[0] < 0.02
    assert by_sigmas[-1] > 0.999
    by_tries = [local_probability(4.0, tries=tries) for tries in (1, 3, 10, 100)]
    assert by_tries == sorted(by_tries, reverse=True)


def test_probability_without_evidence_stays_below_its_prior():
    assert local_probability(0.0, tries=1) < 0.25


def test_sound_stations_keep_clear_of_runs():
    profile = np.full(100, 300.0)
    profile[90:] = np.nan
    run = Run(40, 49, 5.0, 10.0, 1.0, 1.0, 1.0)
    kept = sound_stations(profile, (run,), clear_of=10)
    assert np.flatnonzero(~kept).tolist() == [*range(30, 60), *range(90, 100)]


def test_sound_stations_give_up_the_margin_before_everything():
    profile = np.full(30, 300.0)
    run = Run(5, 24, 5.0, 10.0, 1.0, 1.0, 1.0)
    kept = sound_stations(profile, (run,), clear_of=10)
    assert np.flatnonzero(kept).tolist() == [*range(5), *range(25, 30)]
    everywhere = sound_stations(profile, (Run(0, 29, 5.0, 10.0, 1.0, 1.0, 1.0),), clear_of=3)
    assert everywhere.all()
