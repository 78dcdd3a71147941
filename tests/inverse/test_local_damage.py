"""Local damage: marginal likelihoods by a general library, and what is said against what is so.

Covariances are rebuilt from the general Matern form (Rasmussen and Williams 2006, eq. 4.14), and
likelihoods are those of `scipy.stats.multivariate_normal`.
"""

import numpy as np
import pytest
from scipy import integrate, special, stats

from cladwatt.inverse import local_damage as module
from cladwatt.inverse.local_damage import (
    PRIOR_LOCAL,
    Bins,
    LocalDamage,
    local_damage,
    patch_covariances,
    spread_step,
    stretches_of,
)
from cladwatt.inverse.null import NullModel
from cladwatt.inverse.stretches import Run, find_runs

NULL = NullModel(
    station_sigma=0.05, patch_sigma=0.3, own_sigma=0.1, scene_sigma=0.1, station_length=0.025
)
KELVIN = 10.0
SPREADS = pytest.mark.parametrize("spread", [0.0, 0.06])


def matern(apart: np.ndarray, length: float, nu: float) -> np.ndarray:
    scaled = np.sqrt(2 * nu) * np.maximum(apart, 1e-12) / length
    found = 2 ** (1 - nu) / special.gamma(nu) * scaled**nu * special.kv(nu, scaled)
    return np.where(apart > 0, found, 1.0)


def kinds_of_patches(place: np.ndarray, null: NullModel, kelvin: float) -> list[np.ndarray]:
    """Rough and smooth patches of three lengths, each over the slow scene."""
    apart = np.abs(place[:, None] - place[None, :])
    patch = null.patch_sigma**2 + (0.05 * kelvin) ** 2
    slow = null.scene_sigma**2 * matern(apart, np.ptp(place) / 2, 0.5)
    found = []
    for length in (0.1, 0.25, 0.6):
        rough, smooth = matern(apart, length, 0.5), matern(apart, length, 2.5)
        found += [patch * rough + slow, patch * (0.99 * smooth + 0.01 * rough) + slow]
    return found


def drawn(random: np.random.Generator, stations: int, kelvin: float = KELVIN) -> np.ndarray:
    """A profile of a sound pipe from the model that it is weighed by."""
    place = np.arange(stations) * NULL.station_length
    kinds = kinds_of_patches(place, NULL, kelvin)
    factor = random.choice(module.SCATTER_FACTORS, p=module.SCATTER_WEIGHTS)
    covariance = kinds[random.integers(len(kinds))]
    patches = random.multivariate_normal(np.zeros(stations), covariance, method="eigh")
    trend = NULL.scene_sigma * random.standard_normal() * (place - place.mean()) / np.ptp(place)
    return 40.0 + factor * patches + trend + NULL.station_sigma * random.standard_normal(stations)


def stretch(stations: int, first: int, last: int, spread: float) -> np.ndarray:
    """Unit damage from the first to the last station."""
    place = np.arange(stations)
    if spread == 0:
        return ((place >= first) & (place <= last)).astype(float)
    size = NULL.station_length
    low, high = (
        np.exp(-np.abs((place - edge) * size) / spread) for edge in (first - 0.5, last + 0.5)
    )
    inside = (place >= first) & (place <= last)
    return np.where(inside, 1 - (low + high) / 2, np.abs(low - high) / 2)


def weighed(profile: np.ndarray, spread: float, kelvin: float = KELVIN, **rest) -> LocalDamage:
    runs = find_runs(profile, NULL, sign=rest.get("sign", 1), diameter_stations=8.0)
    settings = {"sign": 1, "kelvin_per_rise": kelvin, "spread_length": spread} | rest
    return local_damage(profile, NULL, runs, **settings)


def run(first: int, last: int) -> Run:
    return Run(first, last, 1.0, 5.0, 0.5, 0.5, 0.9)


@pytest.mark.parametrize("spread", [0.0, 0.06])
def test_factors_are_those_of_multivariate_normals(spread):
    null = NullModel(0.3, 0.5, 0.2, 0.3, 0.05)
    kelvin = 3.0
    bins = Bins.of(np.random.default_rng(4).normal(20.0, 0.6, 10), null.station_length)
    bins.value[4:7] += 1.5
    edges, _ = stretches_of(bins)
    place, size = bins.place, null.station_length
    sound, damaged = [], []
    free = 1e6 + null.scene_sigma**2 * np.outer(*[(place - place.mean()) / np.ptp(place)] * 2)
    for covariance in kinds_of_patches(place, null, kelvin):
        for factor, weight in zip(module.SCATTER_FACTORS, module.SCATTER_WEIGHTS, strict=True):
            total = factor**2 * covariance + null.station_sigma**2 * np.eye(10) + free
            for share in (0.4, 1.3):
                law = stats.multivariate_normal(np.zeros(10), total)
                sound.append(weight / 2 * law.pdf(bins.value))
                steps = spread_step(place - bins.edge[:, None], share * spread, size)
                shapes = steps[edges[:, 0]] - steps[edges[:, 1]]
                rises = kelvin * np.geomspace(0.12, 12, 16)
                left = bins.value - rises[:, None, None] * shapes
                damaged.append(weight / 2 * law.pdf(left).mean(axis=0))
    expected = np.log(np.sum(damaged, axis=0) / np.sum(sound))
    found = module._log_factors(bins, edges, null, kelvin, spread)
    assert expected.max() > 1.0
    assert expected.min() < -1.0
    np.testing.assert_allclose(found, expected, atol=1e-5)


def test_covariances_are_the_general_matern_form():
    bins = Bins.of(np.zeros(60), NULL.station_length)
    expected = kinds_of_patches(bins.place, NULL, KELVIN)
    for found, one in zip(patch_covariances(bins, NULL, 0.05 * KELVIN), expected, strict=True):
        np.testing.assert_allclose(found, one, atol=1e-9)


@pytest.mark.parametrize("ahead", [-0.2, -0.03, 0.01, 0.1])
def test_spread_step_is_a_step_convolved_with_the_fins_answer(ahead):
    # a line source on an infinite fin leaves exp(-|x|/L) / 2L
    length = 0.05
    expected, _ = integrate.quad(
        lambda x: np.exp(-abs(x) / length) / (2 * length), -2.0, ahead, points=[0.0]
    )
    found = spread_step(np.array([ahead]), length, 0.025)
    assert found[0] == pytest.approx(expected, abs=1e-9)


def test_every_stretch_has_a_prior_and_lengths_count_by_their_logarithm():
    bins = Bins.of(np.zeros(40), NULL.station_length)
    edges, weights = stretches_of(bins)
    number = edges[:, 1] - edges[:, 0]
    assert weights.sum() == pytest.approx(1)
    assert number.max() == 30
    of_length = np.array([weights[number == n].sum() for n in range(1, 31)])
    np.testing.assert_allclose(of_length * np.arange(1, 31), of_length[0], rtol=1e-12)


@SPREADS
def test_sound_pipes_are_seldom_called_damaged(spread):
    random = np.random.default_rng(11)
    said = [weighed(drawn(random, 60), spread).probability for _ in range(150)]
    assert np.mean(np.array(said) > 0.5) < 0.05


def drawn_with_damage(random: np.random.Generator, stations: int, spread: float):
    """A profile, damaged as often as the prior says, and whether it is."""
    profile = drawn(random, stations)
    damaged = bool(random.random() < PRIOR_LOCAL)
    if damaged:
        edges, weights = stretches_of(Bins.of(profile, NULL.station_length))
        first, end = edges[random.choice(weights.size, p=weights)]
        unit = stretch(stations, first, end - 1, spread * random.choice(module.SPREADS))
        profile += KELVIN * random.choice(module.RISES) * unit
    return profile, damaged


@SPREADS
def test_what_is_likely_is_so_at_least_as_often(spread):
    """What counts for nothing errs to the safe side only; binomial, three standard errors."""
    random = np.random.default_rng(12)
    said, so = [], []
    for _ in range(300):
        profile, damaged = drawn_with_damage(random, 48, spread)
        said.append(weighed(profile, spread).probability)
        so.append(damaged)
    likely, true = np.array(said), np.array(so)
    for chosen in (likely > 0.5, likely > 0.9):
        number = chosen.sum()
        assert number > 20
        mean = likely[chosen].mean()
        assert true[chosen].mean() > mean - 3 * np.sqrt(mean * (1 - mean) / number)
    # what strikes is found, and what is called unlikely seldom is damaged
    assert true[likely < 0.2].mean() < 0.25


@SPREADS
def test_without_the_misfit_the_probability_is_the_frequency(spread, monkeypatch):
    """Damage drawn from the prior: a Bayesian who knows it is right on the average."""
    monkeypatch.setattr(module, "MISFIT_ELSEWHERE", 0.0)
    random = np.random.default_rng(13)
    said, so = [], []
    for _ in range(300):
        profile, damaged = drawn_with_damage(random, 40, spread)
        found = local_damage(
            profile, NULL, (), sign=1, kelvin_per_rise=KELVIN, spread_length=spread
        )
        said.append(found.elsewhere)
        so.append(damaged)
    likely, true = np.array(said), np.array(so)
    for chosen in (likely < 2, likely < 0.3, likely > 0.3):
        off = (true[chosen] - likely[chosen]).sum()
        assert abs(off) < 3 * np.sqrt((likely[chosen] * (1 - likely[chosen])).sum())


@SPREADS
def test_a_clear_step_is_certain_and_at_its_place(spread):
    profile = drawn(np.random.default_rng(14), 80) + 8.0 * stretch(80, 30, 44, spread)
    runs = find_runs(profile, NULL, sign=1, diameter_stations=8.0)
    found = weighed(profile, spread)
    at = [one for one, likely in zip(runs, found.runs, strict=True) if likely > 0.99]
    assert [one for one in at if one.first < 44 and one.last > 30]


def test_a_step_that_no_run_shows_is_hidden_at_its_place():
    """Sharp edges on smooth patches tell damage where the height alone does not."""
    place = np.arange(80) * NULL.station_length
    smooth = 1.2 * np.sin(2 * np.pi * place / 1.1)
    noise = 0.02 * np.random.default_rng(15).standard_normal(80)
    null = NullModel(0.02, 0.8, 0.1, 0.1, 0.025)
    profile = 30 + smooth + noise + 1.5 * stretch(80, 34, 47, 0.0)
    found = local_damage(profile, null, (), sign=1, kelvin_per_rise=KELVIN, spread_length=0.0)
    assert found.hidden is not None
    assert found.elsewhere == found.hidden.probability > 0.9
    assert found.hidden.first == pytest.approx(34, abs=1)
    assert found.hidden.last == pytest.approx(47, abs=1)
    assert found.hidden.contrast > 0
    without = profile - 1.5 * stretch(80, 34, 47, 0.0)
    sound = local_damage(without, null, (), sign=1, kelvin_per_rise=KELVIN, spread_length=0.0)
    assert sound.hidden is None
    assert sound.elsewhere < PRIOR_LOCAL


@pytest.mark.parametrize("kelvin", [0.0, 1e-9, 1e-4])
@pytest.mark.parametrize("runs", [(), (run(10, 20),), (run(5, 14), run(50, 60))])
def test_where_nothing_could_show_it_stays_the_prior(kelvin, runs):
    profile = drawn(np.random.default_rng(16), 80, 1.0)
    found = local_damage(profile, NULL, runs, sign=1, kelvin_per_rise=kelvin, spread_length=0.0)
    assert len(found.runs) == len(runs)
    assert found.elsewhere <= PRIOR_LOCAL + 1e-3
    # each run and what lies beside them have their parts of one prior; they overlap a little
    assert found.probability == pytest.approx(PRIOR_LOCAL, abs=0.03 if runs else 1e-3)


def test_a_strip_that_would_show_it_and_does_not_speaks_against_it():
    profile = 30 + 0.05 * np.random.default_rng(17).standard_normal(80)
    found = local_damage(profile, NULL, (), sign=1, kelvin_per_rise=30.0, spread_length=0.0)
    assert found.elsewhere < 0.5 * PRIOR_LOCAL


def test_level_and_sign_are_no_evidence():
    profile = drawn(np.random.default_rng(18), 60) + 6.0 * stretch(60, 20, 29, 0.06)
    found = weighed(profile, 0.06).probability
    assert weighed(profile + 50.0, 0.06).probability == pytest.approx(found, abs=1e-3)
    chilled = weighed(80.0 - profile, 0.06, sign=-1).probability
    assert chilled == pytest.approx(found, abs=1e-3)
    assert weighed(80.0 - profile, 0.06).probability < 0.5 < found


def test_each_of_several_runs_is_weighed_by_itself():
    profile = drawn(np.random.default_rng(19), 100)
    profile += 8 * stretch(100, 15, 24, 0.0)
    found = local_damage(
        profile, NULL, (run(15, 24), run(70, 79)),
        sign=1, kelvin_per_rise=KELVIN, spread_length=0.0,
    )  # fmt: skip
    assert found.runs[0] > 0.99
    assert found.runs[1] < 0.3
    assert found.elsewhere < 0.3
    assert found.probability > 0.99


def test_gaps_neither_hide_damage_nor_make_it():
    sound = drawn(np.random.default_rng(20), 80)
    holed = sound.copy()
    holed[20:26] = np.nan
    assert weighed(holed, 0.0).probability < 0.5
    holed += 8 * stretch(80, 40, 52, 0.0)
    assert weighed(holed, 0.0).probability > 0.99


@pytest.mark.parametrize("spread", [0.0, 0.06, 0.5])
@pytest.mark.parametrize("stations", [1, 3, 8, 9, 12, 20])
@pytest.mark.parametrize("gap", [0, 1, 3, 99])
def test_short_and_holed_profiles_have_a_probability(stations, gap, spread):
    profile = 30 + 0.05 * np.random.default_rng(21).standard_normal(stations)
    profile[stations // 2 : stations // 2 + gap] = np.nan
    runs = (run(0, stations // 3),)
    for given in ((), runs):
        found = local_damage(
            profile, NULL, given, sign=1, kelvin_per_rise=KELVIN, spread_length=spread
        )
        for one in (*found.runs, found.elsewhere, found.probability):
            assert 0 <= one <= 1
