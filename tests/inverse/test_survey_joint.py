"""What frames tell each other, against linear algebra, numerical integration and simulation."""

import numpy as np
import pytest
from scipy import integrate, stats

from cladwatt.inverse import survey_joint as module
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.joint import STATES, LevelEvidence, Weighing, joint_update, weighing_of
from cladwatt.inverse.survey_joint import (
    FrameEvidence,
    Message,
    messages_between,
    shared_evidence,
)

LAW, CAMERA = ("model", "convection"), ("camera", "calibration")
LINE, OTHER = ("line:A", "installation_factor"), ("line:B", "installation_factor")


@pytest.fixture
def as_sure_as_said(monkeypatch):
    """No floor under what many frames say together, and no direction left out."""
    monkeypatch.setattr(module, "LEAST_VARIANCE", 1e-9)
    monkeypatch.setattr(module, "TELLING", 1 - 1e-9)


def single(name, keys, loading, mean, covariance, target, sigma) -> FrameEvidence:
    """A frame whose regions' lagging can have done one thing only: Gaussian throughout."""
    mean, target, sigma = (np.asarray(one, dtype=float) for one in (mean, target, sigma))
    weighing = Weighing(
        mean=mean,
        covariance=np.asarray(covariance, dtype=float),
        means=target[None],
        variances=sigma[None] ** 2,
        priors=np.ones(1),
        numbers=np.zeros((1, mean.size), dtype=int),
        doubt=np.zeros(mean.size),
    )
    return FrameEvidence(name, tuple(keys), np.asarray(loading, dtype=float), weighing)


def mixture(name, loading, mean, sigma, keys=(LAW,), spread=None) -> FrameEvidence:
    """A frame of one region that may be in any of the states."""
    spread = np.hypot(sigma, np.linalg.norm(loading)) if spread is None else spread
    observed = mean + spread * stats.norm.ppf((np.arange(400) + 0.5) / 400)[:, None]
    weighing = weighing_of(np.array([mean]), np.array([[sigma**2]]), observed)
    return FrameEvidence(name, tuple(keys), np.atleast_2d(loading), weighing)


def gaussian_frames() -> list[FrameEvidence]:
    random = np.random.default_rng(3)
    frames = []
    for name, keys, regions in (
        ("f1", (CAMERA, LINE, LAW), 2),
        ("f2", (CAMERA, OTHER, LAW), 1),
        ("f3", (CAMERA, LINE, OTHER, LAW), 3),
        ("f4", (LINE,), 1),
    ):
        root = 0.1 * random.standard_normal((regions, regions))
        frames.append(
            single(
                name,
                keys,
                0.15 * random.standard_normal((regions, len(keys))),
                0.2 * random.standard_normal(regions),
                root @ root.T + 0.01 * np.eye(regions),
                0.1 * random.standard_normal(regions),
                np.full(regions, 0.05),
            )
        )
    return frames


def told(frames: list[FrameEvidence], keys) -> tuple[np.ndarray, np.ndarray]:
    """Mean and covariance of shared normals given whole frames, by Gaussian conditioning."""
    every = sorted({key for frame in frames for key in frame.keys} | set(keys))
    rows, noise, seen = [], [], []
    for frame in frames:
        row = np.zeros((frame.loading.shape[0], len(every)))
        row[:, [every.index(key) for key in frame.keys]] = frame.loading
        rows.append(row)
        noise.append(frame.weighing.covariance + np.diag(frame.weighing.variances[0]))
        seen.append(frame.weighing.means[0] - frame.weighing.mean)
    design, data = np.vstack(rows), np.concatenate(seen)
    total = design @ design.T
    start = 0
    for one in noise:
        total[start : start + len(one), start : start + len(one)] += one
        start += len(one)
    gain = design.T @ np.linalg.inv(total)
    wanted = [every.index(key) for key in keys]
    covariance = np.eye(len(every)) - gain @ design
    return (gain @ data)[wanted], covariance[np.ix_(wanted, wanted)]


def with_prior(message: Message | None, size: int) -> tuple[np.ndarray, np.ndarray]:
    """Mean and covariance of standard normals that a message is told of."""
    if message is None:
        return np.zeros(size), np.eye(size)
    precision = np.eye(size) + (message.directions.T / message.variance) @ message.directions
    shift = message.directions.T @ (message.mean / message.variance)
    return np.linalg.solve(precision, shift), np.linalg.inv(precision)


@pytest.mark.usefixtures("as_sure_as_said")
def test_gaussian_frames_tell_what_conditioning_on_the_others_gives():
    frames = gaussian_frames()
    messages = messages_between(frames)
    for frame in frames:
        others = [one for one in frames if one is not frame]
        mean, covariance = told(others, frame.keys)
        assert np.linalg.eigvalsh(covariance).min() < 0.8
        found = with_prior(messages[frame.frame_id], len(frame.keys))
        np.testing.assert_allclose(found[0], mean, atol=2e-3)
        np.testing.assert_allclose(found[1], covariance, atol=2e-3)


def test_no_direction_is_told_more_surely_than_allowed():
    random = np.random.default_rng(5)
    truth = 0.8
    frames = [
        single(f"f{n:02}", (LAW,), [[0.3]], [-0.3 * truth + 0.02 * random.standard_normal()],
               [[0.01**2]], [0.0], [0.02])
        for n in range(12)
    ]  # fmt: skip
    for message in messages_between(frames).values():
        assert message.variance == pytest.approx([module.LEAST_VARIANCE])
        assert abs(message.mean @ message.directions) == pytest.approx(truth, abs=0.1)


def test_tilted_is_gaussian_conditioning():
    frame = gaussian_frames()[2]
    prior = np.array([0.1, -0.2, 0.05])
    covariance = np.array([[0.04, 0.01, 0.0], [0.01, 0.02, 0.005], [0.0, 0.005, 0.03]])
    weighing = frame.weighing
    noise = weighing.covariance + np.diag(weighing.variances[0])
    # the product of two Gaussians, in precisions
    precision = np.linalg.inv(covariance) + np.linalg.inv(noise)
    shift = np.linalg.solve(covariance, prior)
    shift += np.linalg.solve(noise, weighing.means[0] - weighing.mean)
    mean, tilted = weighing.tilted(prior, covariance)
    np.testing.assert_allclose(mean, np.linalg.solve(precision, shift), rtol=1e-9)
    np.testing.assert_allclose(tilted, np.linalg.inv(precision), rtol=1e-8, atol=1e-12)


def state_density(frame: FrameEvidence, s: float) -> float:
    """Likelihood of one region's states at a value of the one shared normal."""
    y = float(frame.weighing.mean[0] + frame.loading[0, 0] * s)
    own = float(frame.weighing.covariance[0, 0])
    return sum(
        state.prior * stats.norm.pdf(state.mean, y, np.sqrt(own + state.sigma**2))
        for state in STATES
    )


def moments(frames: list[FrameEvidence]) -> tuple[float, float]:
    """Posterior mean and variance of the one shared normal, by numerical integration."""

    def density(s: float) -> float:
        return float(stats.norm.pdf(s) * np.prod([state_density(one, s) for one in frames]))

    powers = [
        integrate.quad(lambda s, n=n: s**n * density(s), -8, 8, limit=400)[0] for n in range(3)
    ]
    mean = powers[1] / powers[0]
    return mean, powers[2] / powers[0] - mean**2


def test_tilted_moments_of_a_mixture_are_those_of_integration():
    frame = mixture("f1", [[0.2]], 0.25, 0.08)
    mean, variance = frame.weighing.tilted(np.zeros(1), np.array([[0.2**2]]))
    expected = moments([frame])
    assert mean[0] / 0.2 == pytest.approx(expected[0], abs=1e-6)
    assert variance[0, 0] / 0.2**2 == pytest.approx(expected[1], abs=1e-6)


@pytest.mark.usefixtures("as_sure_as_said")
@pytest.mark.parametrize(
    "levels", [(0.1, -0.1), (0.15, 0.3, 0.1), (-0.2, -0.15, 0.05), (0.2, 0.25, 0.9)]
)
def test_mixtures_are_weighed_as_by_integration(levels):
    """Message and the frame's own word together; within a fifth of the exact deviation."""
    frames = [mixture(f"f{n}", [[0.2]], level, 0.06 + 0.02 * n) for n, level in enumerate(levels)]
    mean, variance = moments(frames)
    messages = messages_between(frames)
    for frame in frames:
        told_mean, told_covariance = with_prior(messages.get(frame.frame_id), 1)
        b = frame.loading
        found, tilted = frame.weighing.tilted(b @ told_mean, b @ told_covariance @ b.T)
        assert found[0] / 0.2 == pytest.approx(mean, abs=0.2 * np.sqrt(variance))
        assert np.sqrt(tilted[0, 0]) / 0.2 == pytest.approx(np.sqrt(variance), rel=0.2)


def test_order_of_frames_changes_nothing():
    frames = gaussian_frames()
    first, second = messages_between(frames), messages_between(frames[::-1])
    assert first.keys() == second.keys()
    assert len(first) > 1
    for name, message in first.items():
        np.testing.assert_array_equal(message.mean, second[name].mean)
        np.testing.assert_array_equal(message.directions, second[name].directions)


def test_a_frames_own_word_is_not_in_what_it_is_told():
    frames = gaussian_frames()
    moved = single(
        "f1", frames[0].keys, frames[0].loading, frames[0].weighing.mean + 0.5,
        frames[0].weighing.covariance, frames[0].weighing.means[0], [0.05, 0.05],
    )  # fmt: skip
    before, after = messages_between(frames), messages_between([moved, *frames[1:]])
    own = [with_prior(one["f1"], 3)[0] for one in (before, after)]
    np.testing.assert_allclose(own[1], own[0], atol=3e-3)
    others = [with_prior(one["f3"], 4)[0] for one in (before, after)]
    assert np.abs(others[1] - others[0]).max() > 0.1


def test_alone_or_among_strangers_nobody_is_told_anything():
    frames = gaussian_frames()
    assert messages_between([]) == {}
    assert messages_between(frames[:1]) == {}
    strangers = [mixture(f"f{n}", [[0.3]], 0.2, 0.05, keys=((f"line:{n}", "x"),)) for n in (1, 2)]
    assert messages_between(strangers) == {}


def test_draws_are_moved_as_told_and_stay_in_step():
    book = DrawBook(1, 4000)
    own = {name: book.normal(f"frame:{name}", "own") for name in ("f1", "f2")}
    shifted = {}
    for name, noise in own.items():
        y = 0.3 * (0.6 * book.normal(*CAMERA) + 0.8 * book.normal(*LAW)) + 0.05 * noise
        # each frame is handed a message of its own
        message = Message((CAMERA, LAW), np.array([[0.6, 0.8]]), np.array([0.9]), np.array([0.5]))
        (update,) = joint_update([], book, name, shared_evidence(message, DrawBook(1, 4000)))
        shifted[name] = update.apply(y), update.apply(book.normal(*LAW))
    # observing d.s = 0.9 with variance 0.5: mean 0.9 / 1.5 along d, variance 1 - 1 / 1.5
    along = 0.3 * 0.6, 0.3**2 / 3 + 0.05**2
    for y, law in shifted.values():
        assert y.mean() == pytest.approx(along[0], abs=0.01)
        assert y.var() == pytest.approx(along[1], rel=0.05)
        assert law.mean() == pytest.approx(0.8 * 0.6, abs=0.03)
        assert law.var() == pytest.approx(1 - 0.8**2 / 1.5, rel=0.05)
    np.testing.assert_allclose(shifted["f1"][1], shifted["f2"][1], atol=1e-12)
    correlation = np.corrcoef(shifted["f1"][0], shifted["f2"][0])[0, 1]
    assert correlation == pytest.approx(0.03 / along[1], abs=0.02)


def test_being_told_is_taken_in_before_the_regions_are_weighed():
    book = DrawBook(2, 4000)
    y = 0.3 * book.normal(*LAW) + 0.1 + 0.02 * book.normal("frame:f1", "own")
    alone = joint_update([LevelEvidence("r1", y)], book, "f1")
    message = Message((LAW,), np.array([[1.0]]), np.array([1.5]), np.array([0.1]))
    informed = joint_update([LevelEvidence("r1", y)], book, "f1", shared_evidence(message, book))
    # 1.5 of 0.3 above a tenth: aged by half, where the image by itself leaves it open
    assert alone[-1].aged["r1"] < 0.5 < 0.9 < informed[-1].aged["r1"]


@pytest.mark.parametrize("level", [8.0, -3.0])
def test_a_frame_that_nothing_fits_does_not_drag_the_others(level):
    usual = [mixture(f"f{n}", [[0.25]], 0.0, 0.05) for n in range(3)]
    wild = mixture("wild", [[0.25]], level, 0.05)
    assert wild.weighing.doubt[0] > 0
    means, variances = zip(
        *(with_prior(messages_between(usual + extra)["f0"], 1) for extra in ([], [wild])),
        strict=True,
    )
    assert means[1][0] == pytest.approx(means[0][0], abs=0.2)
    assert variances[1][0, 0] == pytest.approx(variances[0][0, 0], rel=0.1)


@pytest.mark.usefixtures("as_sure_as_said")
def test_what_is_told_is_as_sure_as_it_says():
    """Small surveys drawn from the prior: squared error over stated variance is one on average."""
    random = np.random.default_rng(8)
    prior = np.array([state.prior for state in STATES])
    squares, reduced = [], []
    for _ in range(40):
        s = random.standard_normal(3)
        frames = []
        for number in range(5):
            loading = 0.15 * random.standard_normal((1, 3))
            state = STATES[random.choice(len(STATES), p=prior / prior.sum())]
            y = state.mean + state.sigma * random.standard_normal()
            mean = y - float(loading[0] @ s) - 0.08 * random.standard_normal()
            keys = (CAMERA, LINE, LAW)
            frames.append(mixture(f"f{number}", loading, mean, 0.08, keys))
        for message in messages_between(frames).values():
            posterior = 1 / (1 + 1 / message.variance)
            mean = posterior * message.mean / message.variance
            away = message.directions @ s - mean
            squares.append(np.mean(away**2 / posterior))
            reduced.append(posterior.min())
    # 40 surveys of about three directions each: two standard errors are a quarter
    assert np.mean(squares) == pytest.approx(1.0, abs=0.25)
    assert np.median(reduced) < 0.7
