"""The null against noise of known size."""

import numpy as np
import pytest

from cladwatt.inverse.null import NullModel, moving_mean, null_of
from cladwatt.measure.noise import FrameNoise

STATION = 0.004
BANDS, STATIONS = 5, 400


def null_with(lens: np.ndarray, **changes):
    arguments = {
        "noise": FrameNoise(0.06, 1.0),
        "pixels_per_station": 36.0,
        "station_length": STATION,
        "reflected_temperature": 295.0,
        "emissivity": 0.92,
        "indoors": True,
    } | changes
    return null_of(lens, **arguments)


def even(level: float = 310.0) -> np.ndarray:
    return np.full((BANDS, STATIONS), level)


def patchy(sigma: float, seed: int, *, common: bool) -> np.ndarray:
    """Bands with slow patches, the same in all bands or in each its own."""
    random = np.random.default_rng(seed)
    decay = np.exp(-2 * STATION / 0.3)
    patches = np.empty((1 if common else BANDS, STATIONS))
    patches[:, 0] = random.normal(size=len(patches))
    for station in range(1, STATIONS):
        fresh = random.normal(size=len(patches))
        patches[:, station] = decay * patches[:, station - 1] + np.sqrt(1 - decay**2) * fresh
    return even() + sigma * patches


def test_independent_pixels_average_down_in_a_station_and_along_a_run():
    null = null_with(even(295.0), emissivity=0.999999)  # no patches, nothing mirrored
    assert null.station_sigma == pytest.approx(0.06 / 6)
    assert null.run_sigma(100) == pytest.approx(0.06 / 6 / 10, rel=1e-3)


def test_pixels_that_hang_together_average_less():
    null = null_with(even(), noise=FrameNoise(0.06, 9.0))
    assert null.station_sigma == pytest.approx(0.06 / 2)


def test_rough_stations_count_for_more_than_declared_noise():
    random = np.random.default_rng(4)
    rough = even() + random.normal(0, 0.5, STATIONS)
    # second differences of independent values scatter by sqrt(6) of one
    assert null_with(rough).station_sigma == pytest.approx(0.5, rel=0.15)


def test_scatter_of_a_run_is_the_sum_of_its_parts():
    null = NullModel(0.1, 0.3, 0.2, 0.05, STATION)
    run = 0.3 / STATION  # one patch long: patches average to 1 / sqrt(2)
    assert null.run_sigma(run) == pytest.approx(np.sqrt(0.01 / run + 0.09 / 2 + 0.0025))
    assert NullModel(0.0, 0.1, 0.4, 0.0, STATION).run_sigma(run) == pytest.approx(0.4 / np.sqrt(2))


def test_a_longer_run_never_scatters_more_and_the_mirrored_scene_stays():
    null = NullModel(0.1, 0.3, 0.0, 0.07, STATION)
    sigmas = [null.run_sigma(stations) for stations in (1, 3, 10, 100, 1000, 1e9)]
    assert sigmas == sorted(sigmas, reverse=True)
    assert sigmas[-1] == pytest.approx(0.07, rel=1e-3)


def test_patches_follow_the_class_of_cladding_and_the_distance_from_the_mirrored_scene():
    paint, half_bright, bright = (
        null_with(even(), emissivity=emissivity).patch_sigma for emissivity in (0.92, 0.5, 0.1)
    )
    assert paint < half_bright < bright
    assert null_with(even(), reflected_temperature=310.0).patch_sigma == 0
    away = null_with(even(), reflected_temperature=280.0).patch_sigma
    assert away == pytest.approx(2 * null_with(even(), reflected_temperature=295.0).patch_sigma)


def test_what_is_mirrored_counts_by_reflectance_and_more_outdoors():
    assert null_with(even(), emissivity=1.0).scene_sigma == 0
    shiny, painted = null_with(even(), emissivity=0.1), null_with(even(), emissivity=0.9)
    assert shiny.scene_sigma == pytest.approx(9 * painted.scene_sigma)
    assert null_with(even(), indoors=False).scene_sigma > null_with(even()).scene_sigma


@pytest.mark.parametrize("seed", range(4))
def test_lasting_differences_between_bands_are_found(seed):
    own = null_with(patchy(1.0, seed, common=False)).own_sigma
    # the mean over five independent bands of patches of 1 K, a bit less for averaging along
    assert 0.5 / np.sqrt(BANDS) < own < 1.7 / np.sqrt(BANDS)


def test_what_all_bands_share_is_no_difference_between_bands():
    assert null_with(patchy(1.0, 0, common=True)).own_sigma == pytest.approx(0, abs=1e-9)
    assert null_with(patchy(1.0, 0, common=False)[:2]).own_sigma == 0  # two bands cannot tell


def test_gaps_do_not_change_the_null_much():
    whole = patchy(0.4, 3, common=False)
    with_gap = whole.copy()
    with_gap[:, 100:140] = np.nan
    one, two = null_with(whole), null_with(with_gap)
    assert np.isfinite(two.run_sigma(20))
    assert two.run_sigma(20) == pytest.approx(one.run_sigma(20), rel=0.25)


def test_moving_mean_is_the_mean_of_the_window():
    values = np.random.default_rng(1).normal(size=50)
    assert moving_mean(values, 5)[10] == pytest.approx(values[8:13].mean())
    assert moving_mean(values, 5)[0] == pytest.approx(values[:3].mean())
    assert moving_mean(np.full(20, 3.0), 500) == pytest.approx(3.0)


def test_moving_mean_leaves_gaps_out():
    values = np.array([1.0, 2.0, np.nan, 4.0, 5.0, np.nan, np.nan, np.nan, 9.0])
    mean = moving_mean(values, 3)
    assert mean[2] == pytest.approx(3.0)
    assert np.isnan(mean[6])
