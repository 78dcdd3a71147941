"""Statistics of the bench: coverage, error, probability, and their bands. Pure functions."""

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = [
    "binomial_band",
    "brier_score",
    "coverage",
    "deciles",
    "longest_run",
    "overlap_of",
    "percentile_band",
    "relative_errors",
    "relative_widths",
    "resamples",
    "rms_log_error",
    "roc_area",
    "wrong_signs",
]


def coverage(low: FloatArray, high: FloatArray, truth: FloatArray) -> float:
    """Return the share of intervals that hold the truth, ends included; NaN where there is none."""
    if truth.size == 0:
        return float("nan")
    return float(np.mean((low <= truth) & (truth <= high)))


def relative_errors(estimate: FloatArray, truth: FloatArray) -> FloatArray:
    """Return the size of each error over the size of the truth."""
    return np.asarray(np.abs(estimate - truth) / np.abs(truth))


def relative_widths(low: FloatArray, high: FloatArray, middle: FloatArray) -> FloatArray:
    """Return full widths over the size of the middle; infinite where that is zero."""
    size = np.abs(middle)
    return np.asarray(np.where(size > 0, (high - low) / np.where(size > 0, size, 1.0), np.inf))


def wrong_signs(estimate: FloatArray, truth: FloatArray) -> BoolArray:
    """Return where the estimate has not the truth's sign; zero has none."""
    return np.asarray(np.sign(estimate) != np.sign(truth))


def rms_log_error(estimate: FloatArray, truth: FloatArray) -> float:
    """Return the root mean square of ln(estimate / truth); wrong signs are left out, not hidden:
    they are counted by themselves."""
    right = ~wrong_signs(estimate, truth)
    if not right.any():
        return float("nan")
    return float(np.sqrt(np.mean(np.log(estimate[right] / truth[right]) ** 2)))


def roc_area(positive: FloatArray, negative: FloatArray) -> float:
    """Return the probability that a positive case scores above a negative one, ties half.

    Notes
    -----
    The area under the receiver operating characteristic equals the Mann-Whitney statistic over
    the number of pairs (Hanley, McNeil, *Radiology* 143 (1982) 29-36).
    """
    if positive.size == 0 or negative.size == 0:
        return float("nan")
    ordered = np.sort(negative)
    below = np.searchsorted(ordered, positive, side="left")
    up_to = np.searchsorted(ordered, positive, side="right")
    return float(np.mean((below + up_to) / 2) / negative.size)


def brier_score(probability: FloatArray, outcome: BoolArray) -> float:
    """Return the mean squared difference between probability and what was so (Brier 1950)."""
    if probability.size == 0:
        return float("nan")
    return float(np.mean((probability - outcome) ** 2))


def binomial_band(count: int, probability: float, level: float = 0.95) -> tuple[float, float]:
    """Return the shares between which `level` of all samples of `count` lie, tails equal."""
    from scipy.stats import binom

    low, high = binom.interval(level, count, probability)
    return float(low) / count, float(high) / count


def deciles(
    probability: FloatArray, outcome: BoolArray
) -> list[tuple[float, float, int, float, float]]:
    """Return reliability by tenths of the probability.

    Returns
    -------
    list of (from, to, number, mean probability, share that was so)
        Tenths without cases are left out; 1 belongs to the last.
    """
    index = np.minimum((probability * 10).astype(int), 9)
    rows = []
    for tenth in range(10):
        inside = index == tenth
        if inside.any():
            rows.append((
                tenth / 10,
                (tenth + 1) / 10,
                int(inside.sum()),
                float(probability[inside].mean()),
                float(outcome[inside].mean()),
            ))  # fmt: skip
    return rows


def resamples(
    cluster: NDArray[np.int64], count: int, random: np.random.Generator
) -> Iterator[IntArray]:
    """Yield `count` bootstrap samples of the cases, drawn by whole clusters.

    Parameters
    ----------
    cluster : (n,) array of int
        Cluster of each case. Cases of a frame share its errors, so frames are what repeats.
    count : int
    random : numpy.random.Generator

    Yields
    ------
    array of int
        Indices of cases; as many clusters as there are, drawn with replacement.

    References
    ----------
    .. [1] Davison, Hinkley, *Bootstrap Methods and their Application*, Cambridge 1997, section 3.8.
    """
    _, code = np.unique(cluster, return_inverse=True)
    members = [np.flatnonzero(code == k) for k in range(int(code.max()) + 1)] if code.size else []
    for _ in range(count):
        drawn = random.integers(len(members), size=len(members))
        yield np.concatenate([members[k] for k in drawn])


def percentile_band(values: FloatArray) -> tuple[float, float]:
    """Return the 2.5 and 97.5 percentiles of bootstrap values, NaN values left out."""
    usable = values[~np.isnan(values)]
    if usable.size == 0:
        return float("nan"), float("nan")
    low, high = np.percentile(usable, [2.5, 97.5], method="closest_observation")
    return float(low), float(high)


def overlap_of(first: tuple[float, float], second: tuple[float, float]) -> float:
    """Return intersection over union of two stretches."""
    inside = max(0.0, min(first[1], second[1]) - max(first[0], second[0]))
    union = (first[1] - first[0]) + (second[1] - second[0]) - inside
    return inside / union if union > 0 else 0.0


def longest_run(marked: BoolArray, touching: BoolArray) -> int:
    """Return the length of the longest run of `marked` that meets `touching`."""
    best = start = 0
    for stop in range(marked.size + 1):
        if stop < marked.size and marked[stop]:
            continue
        if stop > start and touching[start:stop].any():
            best = max(best, stop - start)
        start = stop + 1
    return best
