"""The joint estimate against the closed form of the mixture it stands for."""

import numpy as np
import pytest
from scipy import stats

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.joint import STATES, LevelEvidence, joint_update

COUNT = 4000
BOOK = DrawBook(21, COUNT)


def evidence(name: str, mean: float, own: float, shared: float = 0.0) -> LevelEvidence:
    draws = mean + own * BOOK.normal(name, "own") + shared * BOOK.normal("all", "shared")
    return LevelEvidence(name, draws)


def single(mean: float, sigma: float):
    found = evidence("a", mean, sigma)
    (update,) = joint_update([found], BOOK, "f1")
    return update, update.apply(found.relative_excess)


def mixture(mean: float, sigma: float) -> tuple[float, float, float]:
    """Mean, standard deviation and probability of ageing after a Gaussian reading."""
    prior = np.array([state.prior for state in STATES])
    centre = np.array([state.mean for state in STATES])
    own = np.array([state.sigma for state in STATES])
    weights = prior * stats.norm.pdf(mean, centre, np.hypot(sigma, own))
    weights /= weights.sum()
    gain = sigma**2 / (sigma**2 + own**2)
    after = mean + gain * (centre - mean)
    variance = gain * own**2
    total = weights @ after
    spread = np.sqrt(weights @ (variance + (after - total) ** 2))
    return total, spread, weights @ [state.aged for state in STATES]


@pytest.mark.parametrize(
    ("mean", "sigma"), [(0.0, 0.15), (0.05, 0.3), (0.25, 0.1), (0.5, 0.15), (0.9, 0.3), (-0.1, 0.1)]
)
def test_one_region_comes_to_the_posterior_of_the_mixture(mean, sigma):
    update, moved = single(mean, sigma)
    after, spread, aged = mixture(mean, sigma)
    assert update.aged["a"] == pytest.approx(aged, abs=0.01)
    assert moved.mean() == pytest.approx(after, abs=0.012)
    assert moved.std() == pytest.approx(spread, rel=0.06)


def test_priors_are_a_distribution_and_mostly_sound():
    assert sum(state.prior for state in STATES) == pytest.approx(1.0)
    assert STATES[0].mean == 0
    assert not STATES[0].aged
    assert all(state.aged and state.mean > 0.1 for state in STATES[1:])


def test_ageing_grows_with_the_level_and_less_with_a_vague_image():
    sharp = [single(mean, 0.08)[0].aged["a"] for mean in np.linspace(-0.2, 0.8, 11)]
    assert sharp == sorted(sharp)
    assert sharp[0] < 0.03
    assert sharp[-1] > 0.99
    vague = single(0.3, 1.0)[0].aged["a"]
    assert vague == pytest.approx(sum(s.prior for s in STATES[1:]), abs=0.1)


def test_a_sharp_image_keeps_its_own_number():
    _, moved = single(0.45, 0.005)
    assert moved.mean() == pytest.approx(0.45, abs=0.004)


def test_regions_that_share_an_error_tell_of_it_together():
    """Four sound pipes seen 25 % too high by one shared error: the error, not four aged pipes."""
    together = [evidence(name, 0.25, 0.03, shared=0.25) for name in "abcd"]
    (joint,) = joint_update(together, BOOK, "f1")
    (one,) = joint_update(together[:1], BOOK, "f1")
    assert joint.aged["a"] < one.aged["a"] - 0.05
    shared = 0.25 * BOOK.normal("all", "shared")
    assert joint.apply(shared).std() < 0.95 * one.apply(shared).std()
    assert joint.apply(shared).mean() < one.apply(shared).mean() < -0.03


def test_one_aged_pipe_among_sound_ones_stands_out():
    levels = {"a": 0.0, "b": 0.02, "c": -0.02, "d": 0.5}
    (update,) = joint_update(
        [evidence(name, level, 0.03, shared=0.3) for name, level in levels.items()], BOOK, "f1"
    )
    assert update.aged["d"] > 0.9
    assert max(update.aged[name] for name in "abc") < 0.3


def test_independent_quantities_stay():
    update, _ = single(0.3, 0.1)
    other = 5 + BOOK.normal("elsewhere", "other")
    moved = update.apply(other)
    assert moved.mean() == pytest.approx(other.mean(), abs=0.05)
    assert moved.std() == pytest.approx(other.std(), rel=0.02)


def test_a_linear_function_moves_like_its_parts():
    update, moved = single(0.3, 0.2)
    before = evidence("a", 0.3, 0.2).relative_excess
    assert update.apply(3 * before + 7) == pytest.approx(3 * moved + 7)
    columns = np.stack([before, -2 * before], axis=1)
    assert update.apply(columns) == pytest.approx(np.stack([moved, -2 * moved], axis=1))


@pytest.mark.parametrize("sigma", [0.05, 0.15, 0.3])
def test_a_loss_some_times_the_specified_is_never_taken_for_sound(sigma):
    found = [single(level, sigma)[0].aged["a"] for level in (1.3, 1.5, 1.6)]
    assert min(found) > 0.98


@pytest.mark.parametrize("level", [-0.6, 6.0])
def test_a_level_no_state_explains_is_doubted(level):
    update, moved = single(level, 0.05)
    assert update.doubted == {"a"}
    # the image is believed more than the specification, which cannot be right
    assert moved.mean() == pytest.approx(level, abs=0.05)
    # and not narrowed by a specification that does not fit
    assert moved.std() > 0.95 * 0.05


def test_a_level_some_state_explains_is_not_doubted():
    for level in (0.05, 0.3, 0.9):
        assert single(level, 0.05)[0].doubted == frozenset()


def test_more_regions_than_are_weighed_together_are_all_weighed():
    many = [evidence(f"r{number}", 0.02 * number, 0.1, shared=0.1) for number in range(8)]
    updates = joint_update(many, BOOK, "f1")
    aged = {name for update in updates for name in update.aged}
    assert aged == {one.region_id for one in many}
    for one in many:
        draws = one.relative_excess
        for update in updates:
            draws = update.apply(draws)
        assert draws.std() < one.relative_excess.std()


def test_nothing_to_weigh():
    assert joint_update([], BOOK, "f1") == ()


def test_intervals_cover_pipes_drawn_from_the_prior():
    """Truth from the prior, image with its declared error: 95 % intervals hold about 95 %."""
    random = np.random.default_rng(5)
    book, held, aged_found, aged_true = DrawBook(3, 400), 0, [], []
    pipes = 300
    for number in range(pipes):
        state = STATES[random.choice(len(STATES), p=[s.prior for s in STATES])]
        truth = random.normal(state.mean, state.sigma)
        sigma = 0.2
        draws = truth + sigma * random.normal() + sigma * book.normal(f"p{number}", "own")
        (update,) = joint_update([LevelEvidence(f"p{number}", draws)], book, f"f{number}")
        low, high = np.percentile(update.apply(draws), [2.5, 97.5])
        held += low <= truth <= high
        aged_found.append(update.aged[f"p{number}"])
        aged_true.append(state.aged)
    # binomial scatter of 300 at 95 %: 1.3 %
    assert 0.91 <= held / pipes <= 0.99
    assert np.mean(aged_found) == pytest.approx(np.mean(aged_true), abs=0.06)
