"""Whether there is local damage somewhere in a region, and where: a Bayesian comparison.

Sound: the profile along the strip is a level, a slow trend, patches that hang together over a
length, and noise of single stations. Damaged: the same plus one stretch, of any length and place,
that loses more by any factor from 0.15 to twelvefold of the sound loss, spread along by the
cladding. Both are weighed by their marginal likelihood, the stretch's place, length and height
integrated out; so where damage could not show, the probability stays what it was before the image
was looked at, and where it would show and does not, it falls.

How large the scatter of a sound pipe is, is itself uncertain: it is integrated out over a range
of factors. The level is free: what all stations share is no evidence here.

References
----------
.. [1] Kass, Raftery, "Bayes factors", J. American Statistical Association 90 (1995) 773-795.
.. [2] Rasmussen, Williams, *Gaussian Processes for Machine Learning*, MIT Press 2006, sections
   2.7 (explicit basis functions) and 5.4 (model comparison).
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.null import PATCH_LENGTH, NullModel
from cladwatt.inverse.stretches import Run
from cladwatt.types import FloatArray

__all__ = ["PRIOR_LOCAL", "LocalDamage", "local_damage"]

PRIOR_LOCAL = 0.25
"""Prior probability of local damage somewhere in a region; assumption."""
SCATTER_ALONG = 0.05
"""Scatter of a sound pipe's own loss along it, by joints, density and air; assumption."""
MOST_BINS = 100
RISES = np.geomspace(0.15, 12.0, 28)
"""Loss of a stretch over sound, less one; every factor equally likely."""
SHOULDER = 5.0
"""Templates beside a run count with it where they are not e^5 times likelier than those on it."""
SHORTEST = 0.02
"""[m]"""
LONGEST_SHARE = 0.75
"""Of the region; what is longer is ageing throughout."""
LENGTHS = 14
SCATTER_FACTORS = np.array([0.5, 0.8, 1.25, 2.0, 3.2])
SCATTER_WEIGHTS = np.array([0.10, 0.30, 0.33, 0.20, 0.07])
"""Patches of a sound pipe over what they are taken for; log-normal, sigma 0.6; assumption."""
PATCH_LENGTHS = (0.1, 0.25, 0.6)
"""Over which patches hang together, each as likely; assumption. [m]"""
TREND_SHARE = 1.0
"""Slow trend along the pipe over the scatter of the mirrored scene; assumption."""


@dataclass(frozen=True)
class LocalDamage:
    """What the profile says of local damage.

    Attributes
    ----------
    runs : tuple of float
        Posterior probability of damage at each run.
    elsewhere : float
        That there is damage which stands out nowhere.
    """

    runs: tuple[float, ...]
    elsewhere: float

    @property
    def probability(self) -> float:
        """That there is local damage somewhere in the region."""
        return 1 - (1 - self.elsewhere) * float(np.prod([1 - one for one in self.runs]))


def local_damage(
    profile: FloatArray,
    null: NullModel,
    runs: tuple[Run, ...],
    *,
    sign: int,
    kelvin_per_rise: float,
    spread_length: float,
    prior: float = PRIOR_LOCAL,
) -> LocalDamage:
    """Weigh local damage against a sound pipe.

    Parameters
    ----------
    profile : (n_stations,) array
        Lens temperature along the strip, NaN in gaps. [K]
    null : NullModel
    runs : tuple of Run
        What was found to stand out; each gets the weight of the stretches that overlap it.
    sign : {1, -1}
        1 where damage is warmer than sound.
    kelvin_per_rise : float
        Kelvin at the lens for a loss twice the sound one. [K]
    spread_length : float
        Decay length along the cladding; 0 where it does not spread heat. [m]
    prior : float

    Returns
    -------
    LocalDamage
    """
    if not kelvin_per_rise > 0 or np.isfinite(profile).sum() < 8:
        return LocalDamage((prior,) * min(len(runs), 1), prior if not runs else 0.0)
    found: list[float] = []
    for number, run in enumerate(runs):
        others = [other for index, other in enumerate(runs) if index != number]
        factors = _factors(profile, null, (run,), others, sign, kelvin_per_rise, spread_length)
        anywhere = np.logaddexp(factors.at, factors.beside)
        # beside a strong run, its own shoulders are no other damage
        at = anywhere if factors.at > factors.beside - SHOULDER else factors.at
        found.append(_share(prior, at, anywhere))
    factors = _factors(profile, null, (), list(runs), sign, kelvin_per_rise, spread_length)
    # what stands out nowhere may hide, and is no evidence beyond that
    beside = min(factors.beside, 0.0)
    return LocalDamage(tuple(found), _share(prior, beside, beside))


def _share(prior: float, found: float, anywhere: float) -> float:
    """Return the posterior probability of what was found, of logarithms of Bayes factors."""
    damaged = np.log(prior) + anywhere
    return float(np.exp(np.log(prior) + found - np.logaddexp(np.log(1 - prior), damaged)))


class _Factors(NamedTuple):
    """Logarithms of marginal likelihoods over that of a sound pipe."""

    at: float
    """Of damage at the run."""
    beside: float
    """Of damage elsewhere."""


def _factors(
    profile: FloatArray,
    null: NullModel,
    wanted: tuple[Run, ...],
    left_out: list[Run],
    sign: int,
    kelvin_per_rise: float,
    spread_length: float,
) -> _Factors:
    """Weigh damage at a run, and damage elsewhere, against a sound pipe."""
    excess = sign * profile
    for run in left_out:
        margin = max(2, (run.last - run.first) // 4)
        excess[max(0, run.first - margin) : run.last + margin + 1] = np.nan
    excess = _clear_of_gaps(excess, spread_length / null.station_length)
    bins = _Bins.of(excess, null.station_length)
    if bins.value.size < 8:
        return _Factors(0.0, -np.inf) if wanted else _Factors(-np.inf, 0.0)
    templates, weights, spans = _templates(bins, spread_length)
    damage = _log_factors(bins, templates, null, kelvin_per_rise)
    at = np.zeros(weights.size, dtype=bool)
    for run in wanted:
        low = (run.first - 0.5) * null.station_length
        high = (run.last + 0.5) * null.station_length
        at |= (spans[:, 0] < high) & (spans[:, 1] > low)
    logarithm = np.log(weights) + damage
    return _Factors(
        at=_log_sum(logarithm[at]),
        beside=_log_sum(logarithm[~at]),
    )


def _log_sum(logarithms: FloatArray) -> float:
    """Return the logarithm of a sum, minus infinity of nothing."""
    return float(np.logaddexp.reduce(logarithms)) if logarithms.size else -np.inf


def _clear_of_gaps(values: FloatArray, reach: float) -> FloatArray:
    """Leave out stations that share heat with what lies in a gap."""
    missing = np.isnan(values)
    if not missing.any() or reach < 1:
        return values
    near = np.convolve(missing, np.ones(2 * round(reach) + 1), mode="same") > 0
    return np.where(near, np.nan, values)


@dataclass(frozen=True)
class _Bins:
    """Stations taken together, without gaps: place [m], value [K], stations in each."""

    place: FloatArray
    value: FloatArray
    number: FloatArray
    size: float

    @classmethod
    def of(cls, values: FloatArray, station_length: float) -> "_Bins":
        step = max(1, -(-values.size // MOST_BINS))
        padded = np.full(-(-values.size // step) * step, np.nan)
        padded[: values.size] = values
        table = padded.reshape(-1, step)
        usable = np.isfinite(table)
        number = usable.sum(axis=1).astype(float)
        kept = number > 0
        total = np.where(usable, table, 0.0).sum(axis=1)
        place = (np.arange(table.shape[0]) * step + (step - 1) / 2) * station_length
        return cls(place[kept], total[kept] / number[kept], number[kept], step * station_length)


def _templates(bins: _Bins, spread_length: float) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return shapes of damage (m, n), their prior weights (m,) and their spans (m, 2) [m]."""
    start, end = bins.place[0] - bins.size / 2, bins.place[-1] + bins.size / 2
    longest = LONGEST_SHARE * (end - start)
    lengths = np.geomspace(min(max(SHORTEST, bins.size), longest), longest, LENGTHS)
    spans, weights = [], []
    for length in lengths:
        number = max(2, int(np.ceil((end - start) / max(length / 3, bins.size))))
        centres = start + (np.arange(number) + 0.5) * (end - start) / number
        spans.append(np.stack([centres - length / 2, centres + length / 2], axis=1))
        weights.append(np.full(number, 1 / number / LENGTHS))
    span = np.concatenate(spans)
    shapes = _shape(bins.place[None, :], span[:, :1], span[:, 1:], spread_length, bins.size)
    return shapes, np.concatenate(weights), span


def _shape(
    x: FloatArray, low: FloatArray, high: FloatArray, spread_length: float, bin_size: float
) -> FloatArray:
    """Return a unit stretch after it has spread along the cladding as along a fin."""
    if spread_length < 0.25 * bin_size:
        inside = (np.minimum(high, x + bin_size / 2) - np.maximum(low, x - bin_size / 2)) / bin_size
        return np.asarray(np.clip(inside, 0.0, 1.0))

    def step(distance: FloatArray) -> FloatArray:
        far = 0.5 * np.exp(-np.abs(distance) / spread_length)
        return np.where(distance > 0, 1 - far, far)

    return np.asarray(step(x - low) - step(x - high))


def _log_factors(
    bins: _Bins, templates: FloatArray, null: NullModel, kelvin_per_rise: float
) -> FloatArray:
    """Return the logarithm of each template's Bayes factor, (m,).

    Averaged over how smooth patches are, how long, and how strong; factors of strength share
    the eigenvectors of a covariance.
    """
    white = null.station_sigma / np.sqrt(bins.number)
    # level and trend are free: what lies in their direction is no evidence
    basis = np.stack([np.ones_like(white), bins.place - bins.place.mean()]) / white
    free_sigma = np.array([1e3, TREND_SHARE * null.scene_sigma / max(np.ptp(bins.place), 1e-9)])
    sound, ratio = [], []
    for covariance in _patch_covariances(bins, null, SCATTER_ALONG * kelvin_per_rise):
        values, vectors = np.linalg.eigh(covariance / np.outer(white, white))
        values = np.maximum(values, 0.0)
        data = (bins.value / white) @ vectors
        shapes = (templates / white) @ vectors
        free = (basis @ vectors) * free_sigma[:, None]
        for factor, weight in zip(SCATTER_FACTORS, SCATTER_WEIGHTS, strict=True):
            inverse = 1 / (1 + factor**2 * values)
            data_left, shapes_left, log_det = _without_free(data, shapes, free, inverse)
            fit = (data * data_left * inverse).sum() - np.log(inverse).sum() + log_det
            sound.append(np.log(weight) - 0.5 * fit)
            along = shapes @ (data_left * inverse)
            power = (shapes * shapes_left * inverse).sum(axis=1)
            ratio.append(_over_rises(along, power, kelvin_per_rise * RISES))
    weights = np.exp(np.array(sound) - max(sound))
    weights /= weights.sum()
    return _averaged(np.array(ratio), weights)


def _averaged(logarithms: FloatArray, weights: FloatArray) -> FloatArray:
    """Return the logarithm of the weighted mean over the first axis."""
    top = logarithms.max(axis=0)
    return np.asarray(top + np.log(np.maximum(weights @ np.exp(logarithms - top), 1e-300)))


def _without_free(
    data: FloatArray,
    shapes: FloatArray,
    free: FloatArray,
    inverse: FloatArray,
) -> tuple[FloatArray, FloatArray, float]:
    """Take out of data and shapes what the free level and trend explain."""
    inner = np.eye(free.shape[0]) + (free * inverse) @ free.T
    fit = np.linalg.solve(inner, (free * inverse) @ data)
    fits = np.linalg.solve(inner, (free * inverse) @ shapes.T)
    return data - fit @ free, shapes - fits.T @ free, float(np.linalg.slogdet(inner)[1])


def _over_rises(along: FloatArray, power: FloatArray, heights: FloatArray) -> FloatArray:
    """Return the log of the likelihood ratio averaged over a stretch's heights, (m,)."""
    exponent = heights[:, None] * along - 0.5 * heights[:, None] ** 2 * power
    return _averaged(exponent, np.full(heights.size, 1 / heights.size))


def _patch_covariances(bins: _Bins, null: NullModel, scatter: float) -> list[FloatArray]:
    """Return the covariance of patches and mirrored scene for each smoothness and length. [K2]

    Rough (exponential), or smooth (Matern 5/2) with a rough hundredth.
    """
    apart = np.abs(bins.place[:, None] - bins.place[None, :])
    patch = max(null.patch_sigma, null.own_sigma) ** 2 + scatter**2
    span = max(np.ptp(bins.place), PATCH_LENGTH)
    slow = null.scene_sigma**2 * np.exp(-apart / (span / 2))
    found = []
    for length in PATCH_LENGTHS:
        rough = np.exp(-apart / length)
        reach = np.sqrt(5) * apart / length
        smooth = (1 + reach + reach**2 / 3) * np.exp(-reach)
        found += [patch * rough + slow, patch * (0.99 * smooth + 0.01 * rough) + slow]
    return found
