"""The recovered profile: sharp where lagging changes at once, within its bands, no heat made."""

import math

import numpy as np
import pytest
from scipy.linalg import solve_banded
from scipy.ndimage import gaussian_filter1d
from tests import finite_elements as fem

from cladwatt.inverse.null import PATCH_LENGTH, NullModel
from cladwatt.inverse.profile import Spreading, recover_profile

STEP, STATIONS, NOISE, PATCHES, BLUR, LEVEL, RISE = 0.005, 400, 0.05, 0.2, 0.8, 300.0, 6.0
ALUMINIUM = Spreading(surface_coefficient=10.0, sheet_conductance=0.16)


def fin(supply, length):
    """Solve the fin equation by differences, apart from the package; no heat through the ends."""
    side = (length / STEP) ** 2
    bands = np.zeros((3, supply.size))
    bands[0, 1:] = bands[2, :-1] = -side
    bands[1] = 1 + 2 * side
    bands[1, [0, -1]] -= side
    return solve_banded((1, 1), bands, supply)


def along(random, size):
    """Draw what hangs together over the length of a patch."""
    place = np.arange(STATIONS) * STEP
    apart = np.abs(place[:, None] - place[None, :])
    root = np.linalg.cholesky(np.exp(-apart / PATCH_LENGTH) + 1e-9 * np.eye(STATIONS))
    return size * root @ random.standard_normal(STATIONS)


def seen_by_a_camera(supply, random):
    patch = along(random, PATCHES)
    leaving = fin(supply, math.sqrt(0.16 / 10.0)) + patch - patch.mean()
    blurred = gaussian_filter1d(leaving, BLUR, mode="reflect")
    return LEVEL + blurred + NOISE * random.standard_normal(supply.size)


def recover(value, seed=1, spreading=ALUMINIUM, patches=PATCHES, noise=NOISE, rise=RISE, count=600):
    found = recover_profile(
        value,
        np.full(value.size, STEP),
        null=NullModel(noise, patches, 0.0, 0.0, STEP),
        blur_sigma=BLUR,
        spreading=spreading,
        kelvin_per_rise=rise,
        generator=np.random.default_rng(seed),
        count=count,
    )
    assert found is not None
    return found


def defect(centre, width, height):
    place = (np.arange(STATIONS) + 0.5) * STEP
    return np.where(np.abs(place - centre) < width / 2, height, 0.0)


def binned(values, step):
    return values.reshape(-1, step).mean(axis=1)


def width_at_half(profile, step):
    high = np.median(profile, axis=0) - LEVEL
    return float(np.sum(high > high.max() / 2)) * step * STEP


def test_an_open_joint_and_a_metre_of_wet_lagging_are_told_apart():
    joint = seen_by_a_camera(defect(1.0, 0.03, 40.0), np.random.default_rng(5))
    wet = seen_by_a_camera(defect(1.0, 1.0, 12.0), np.random.default_rng(6))
    smeared = np.sum(joint - LEVEL > (joint - LEVEL).max() / 2) * STEP
    assert smeared > 0.1
    short, long = recover(joint), recover(wet)
    assert width_at_half(short.supply, short.step) <= 0.08
    assert width_at_half(long.supply, long.step) == pytest.approx(1.0, abs=0.06)
    # the joint's own heat, above what goes on beside it: 30 mm of 40 K
    heat = (short.supply - np.median(short.supply, axis=1, keepdims=True)).sum(axis=1)
    low, high = np.percentile(heat * short.step * STEP, [2.5, 97.5])
    assert low < 0.03 * 40.0 < high
    assert high - low < 0.6 * 0.03 * 40.0


def test_a_jump_stays_sharp():
    wet = recover(seen_by_a_camera(defect(1.0, 1.0, 12.0), np.random.default_rng(7)))
    middle = np.median(wet.supply, axis=0) - LEVEL
    edge = round(0.5 / STEP / wet.step)
    # from a tenth to nine tenths within three bins; the fin alone takes 0.4 m
    assert middle[edge - 2] < 0.1 * 12.0
    assert middle[edge + 1] > 0.9 * 12.0


def coverage(damaged):
    """Share of bins whose band holds the truth: of the supply, and of what leaves."""
    held = []
    for seed in range(30):
        random = np.random.default_rng([seed, damaged])
        # lagging that scatters by 5 % along itself, as no two joints and densities are the same
        truth = along(random, 0.05 * RISE)
        if damaged:
            width = random.choice([0.03, 0.1, 0.3, 1.0])
            truth += defect(random.uniform(0.6, 1.4), width, RISE * random.uniform(0.5, 5))
        found = recover(seen_by_a_camera(truth, random), seed)
        for profile, real in ((found.supply, truth), (found.surface, fin(truth, math.sqrt(0.016)))):
            low, high = np.percentile(profile, [2.5, 97.5], axis=0)
            expected = LEVEL + binned(real, found.step)
            held.append(np.mean((expected >= low) & (expected <= high)))
    return np.mean(np.reshape(held, (-1, 2)), axis=0)


def test_bands_hold_the_truth_about_as_often_as_they_say():
    for damaged in (0, 1):
        found = coverage(damaged)
        assert np.all((found >= 0.90) & (found <= 0.99))


def test_heat_is_conserved_draw_by_draw():
    value = seen_by_a_camera(defect(0.4, 0.2, 20.0), np.random.default_rng(8))
    value[200:260] = np.nan
    found = recover(value)
    seen = np.isfinite(value).reshape(-1, found.step).any(axis=1)
    np.testing.assert_allclose(found.surface[:, seen].mean(axis=1), np.nanmean(value), atol=1e-9)
    whole = recover(seen_by_a_camera(defect(0.4, 0.2, 20.0), np.random.default_rng(8)))
    np.testing.assert_allclose(whole.supply.mean(axis=1), whole.surface.mean(axis=1), atol=1e-9)


def test_where_the_sheet_ends_nothing_is_taken_from_beside():
    place = np.arange(STATIONS)
    opened = (place >= 190) & (place < 210)
    random = np.random.default_rng(11)
    value = LEVEL + np.where(opened, 40.0, 0.0) + NOISE * random.standard_normal(STATIONS)
    lows = []
    for sheet_ends in (opened, None):
        found = recover_profile(
            value, np.full(STATIONS, STEP), null=NullModel(NOISE, PATCHES, 0.0, 0.0, STEP),
            blur_sigma=0.3, spreading=ALUMINIUM, kelvin_per_rise=RISE,
            generator=np.random.default_rng(1), count=200, opened=sheet_ends,
        )  # fmt: skip
        lows.append(float(np.median(found.supply, axis=0).min()) - LEVEL)
    assert lows[0] > -1.0
    # a sheet that went on could not show so sharp an edge but for a hole of heat beside it
    assert lows[1] < -5.0


def test_a_gap_is_open_between_what_both_sides_hold():
    value = seen_by_a_camera(np.zeros(STATIONS), np.random.default_rng(9))
    value[140:260] = np.nan
    found = recover(value)
    width = np.ptp(np.percentile(found.supply, [2.5, 97.5], axis=0), axis=0)
    assert width[44:56].mean() > 1.5 * width[8:28].mean()


def test_noise_is_not_taken_for_structure():
    truth = defect(1.0, 0.3, 5.0)
    value = LEVEL + fin(truth, 0.126) + NOISE * np.random.default_rng(4).standard_normal(STATIONS)
    found = recover(value, patches=0.01)
    error = np.std(np.median(found.supply, axis=0) - LEVEL - binned(truth, found.step))
    # the fin equation turned over, station by station
    direct = value - LEVEL
    direct[1:-1] -= (0.126 / STEP) ** 2 * np.diff(value, 2)
    assert np.std(binned(direct - truth, found.step)) > 20 * error


def test_too_little_seen_gives_no_profile():
    value = np.full(40, np.nan)
    value[:5] = LEVEL
    null = NullModel(NOISE, PATCHES, 0.0, 0.0, STEP)
    assert (
        recover_profile(
            value, np.full(40, STEP), null=null, blur_sigma=BLUR, spreading=ALUMINIUM,
            kelvin_per_rise=RISE, generator=np.random.default_rng(0), count=100,
        )
        is None
    )  # fmt: skip


@pytest.mark.parametrize("sheet", [0.16, 0.0075], ids=["aluminium", "stainless"])
def test_resistance_of_wet_lagging_and_heat_of_a_joint_by_finite_elements(sheet, evidence):
    spreading = Spreading(fem.COEFFICIENT, sheet, fem.CONDUCTIVITY, 2 * fem.INNER, 2 * fem.OUTER)
    for half_width, ratio in ((0.5, 4.0), (0.015, 8.0)):
        place, conductance, surface = fem.slices(half_width, ratio, sheet)
        random = np.random.default_rng(round(1000 * sheet + ratio))
        noise = 0.02 * random.standard_normal(place.size)
        seen = LEVEL + gaussian_filter1d(surface, BLUR, mode="reflect") + noise
        found = recover(seen, 3, spreading, 0.05, rise=float(surface[0]))
        supply = np.median(found.supply - LEVEL, axis=0) * fem.COEFFICIENT
        leaving = np.median(found.surface - LEVEL, axis=0)
        place = binned(place, found.step)
        case = f"sheet {sheet:g} W/K"
        if ratio == 4.0:
            inside = np.abs(place) < 0.4
            per_area = (fem.INSIDE - leaving)[inside] / supply[inside]
            resistance = per_area / (2 * math.pi * fem.OUTER)
            expected = 1 / (2 * math.pi * fem.OUTER * conductance.max())
            evidence("fem_recovered_profile", f"resistance of a metre wet, {case}",
                     np.median(resistance), expected, unit="m K/W", rel=0.05)  # fmt: skip
        else:
            away = np.median(supply[np.abs(place) > 0.8])
            heat = np.sum((supply - away)[np.abs(place) < 0.4]) * found.step * STEP
            expected = np.sum(fem.COEFFICIENT * (surface - surface[0])) * STEP
            evidence("fem_recovered_profile", f"excess of a joint of 30 mm, {case}",
                     heat, expected, unit="W/m", rel=0.1)  # fmt: skip
