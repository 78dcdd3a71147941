"""Whether there is local damage somewhere in a region, and where: a Bayesian comparison.

Sound: the profile along the strip is a level, a slow trend, patches that hang together over a
length, and noise of single stations. Damaged: the same plus one stretch, of any length and place,
that loses more by any factor from 0.12 to twelvefold of the sound loss, spread along by the
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
from cladwatt.inverse.stretches import PRIOR_LOCAL, Run
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = [
    "PRIOR_LOCAL",
    "Bins",
    "LocalDamage",
    "local_damage",
    "patch_covariances",
    "spread_step",
    "stretches_of",
]

SCATTER_ALONG = 0.05
"""Scatter of a sound pipe's own loss along it, by joints, density and air; assumption."""
MOST_BINS = 100
RISES = np.geomspace(0.12, 12.0, 16)
"""Loss of a stretch over sound, less one; every factor equally likely."""
SHOULDER = 5.0
"""Stretches beside a run count with it where they are not e^5 times likelier than those on it."""
SHORTEST = 0.02
"""[m]"""
LONGEST_SHARE = 0.75
"""Of the region; what is longer is ageing throughout."""
MISFIT, MISFIT_ELSEWHERE = 3.0, 7.0
"""Logarithm of the odds that count for nothing: no sound pipe is quite the model's, the less so
where nothing stands out by itself; assumption."""
SPREADS = (0.4, 1.3)
"""How far edges are spread over what is reckoned, each as likely; assumption."""
NEGLIGIBLE = 14.0
"""Logarithm below the best from which a kind of scatter is left out."""
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
        That there is damage beside them.
    hidden : Run or None
        Where that is, if it is likelier than not: a stretch that shows by its edges rather than
        by its height.
    """

    runs: tuple[float, ...]
    elsewhere: float
    hidden: Run | None = None

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
        return LocalDamage((0.0,) * len(runs), prior)
    found: list[float] = []
    for number, run in enumerate(runs):
        others = [other for index, other in enumerate(runs) if index != number]
        factors = _factors(profile, null, (run,), others, sign, kelvin_per_rise, spread_length)
        anywhere = np.logaddexp(factors.at, factors.beside)
        # beside a strong run, its own shoulders are no other damage; one that nothing speaks for
        # has no more of the prior than its place
        strong = factors.at > max(factors.beside - SHOULDER, 0.0)
        at = anywhere if strong else factors.at
        found.append(_share(prior, _heard(at, MISFIT), _heard(anywhere, MISFIT)))
    factors = _factors(profile, null, (), list(runs), sign, kelvin_per_rise, spread_length)
    beside = _heard(factors.beside, MISFIT_ELSEWHERE)
    # the prior is of the whole strip: the runs have had their part of it
    elsewhere = _share(prior * _clear_share(profile.size, null, runs), beside, beside)
    hidden = None
    if elsewhere > 0.5:
        hidden = _run_at(factors.likeliest, sign * profile, null, elsewhere)
    return LocalDamage(tuple(found), elsewhere, hidden)


def _clear_share(stations: int, null: NullModel, runs: tuple[Run, ...]) -> float:
    """Return the prior share of the stretches of a strip that touch no run, above zero."""
    bins = Bins.of(np.zeros(stations), null.station_length)
    edges, weights = stretches_of(bins)
    touching = _touching(bins, edges, null, runs)
    return max(1e-9, float(weights[~touching].sum()))


def _touching(bins: "Bins", edges: IntArray, null: NullModel, runs: tuple[Run, ...]) -> BoolArray:
    """Return which stretches overlap any run, (m,)."""
    touching = np.zeros(edges.shape[0], dtype=bool)
    for run in runs:
        low = (run.first - 0.5) * null.station_length
        high = (run.last + 0.5) * null.station_length
        touching |= (bins.edge[edges[:, 0]] < high) & (bins.edge[edges[:, 1]] > low)
    return touching


def _run_at(
    span: tuple[float, float], excess: FloatArray, null: NullModel, probability: float
) -> Run:
    """Return the stations of a stretch as a run."""
    last_station = excess.size - 1
    first = int(np.clip(np.ceil(span[0] / null.station_length), 0, last_station))
    last = int(np.clip(np.floor(span[1] / null.station_length), first, last_station))
    inside = np.zeros(excess.size, dtype=bool)
    inside[first : last + 1] = True
    contrast = float(np.nanmean(excess[inside]) - np.nanmedian(excess[~inside]))
    u = max(0.5, excess.size / MOST_BINS / 2)
    sigmas = contrast / null.run_sigma(last - first + 1)
    return Run(first, last, contrast, sigmas, u, u, probability)


def _heard(factor: float, misfit: float) -> float:
    """Return what of a Bayes factor's logarithm counts: for damage, what is beyond the misfit."""
    return max(min(factor, 0.0), factor - misfit)


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
    likeliest: tuple[float, float] = (0.0, 0.0)
    """Start and end of the likeliest stretch of all. [m]"""


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
    bins = Bins.of(excess, null.station_length)
    if bins.value.size < 8:
        return _Factors(0.0, -np.inf) if wanted else _Factors(-np.inf, 0.0)
    edges, weights = stretches_of(bins)
    logarithm = np.log(weights) + _log_factors(bins, edges, null, kelvin_per_rise, spread_length)
    at = _touching(bins, edges, null, wanted)
    best = int(np.argmax(logarithm))
    return _Factors(
        at=_log_sum(logarithm[at]),
        beside=_log_sum(logarithm[~at]),
        likeliest=(float(bins.edge[edges[best, 0]]), float(bins.edge[edges[best, 1]])),
    )


def _log_sum(logarithms: FloatArray) -> float:
    """Return the logarithm of a sum, minus infinity of nothing."""
    return float(np.logaddexp.reduce(logarithms)) if logarithms.size else -np.inf


def _clear_of_gaps(values: FloatArray, reach: float) -> FloatArray:
    """Leave out stations that share heat with what lies in a gap."""
    missing = np.isnan(values)
    if not missing.any() or reach < 1:
        return values
    # a reach beyond the strip's end reaches all of it
    stations = min(round(reach), values.size)
    near = np.convolve(missing, np.ones(2 * stations + 1))[stations : stations + values.size] > 0
    return np.where(near, np.nan, values)


@dataclass(frozen=True)
class Bins:
    """Stations taken together, without gaps: place [m], value [K], stations in each."""

    place: FloatArray
    value: FloatArray
    number: FloatArray
    size: float
    edge: FloatArray
    """Where a stretch may begin or end, one more than bins. [m]"""

    @classmethod
    def of(cls, values: FloatArray, station_length: float) -> "Bins":
        """Take stations together, at most `MOST_BINS` of them."""
        step = max(1, -(-values.size // MOST_BINS))
        padded = np.full(-(-values.size // step) * step, np.nan)
        padded[: values.size] = values
        table = padded.reshape(-1, step)
        usable = np.isfinite(table)
        number = usable.sum(axis=1).astype(float)
        kept = number > 0
        total = np.where(usable, table, 0.0).sum(axis=1)
        place = (np.arange(table.shape[0]) * step + (step - 1) / 2) * station_length
        place, size = place[kept], step * station_length
        edge = np.append(place - size / 2, place[-1:] + size / 2)
        return cls(place, total[kept] / number[kept], number[kept], size, edge)


def stretches_of(bins: Bins) -> tuple[IntArray, FloatArray]:
    """Return first and last edge of every stretch there could be (m, 2), and their priors (m,).

    Lengths are likely by their logarithm, places alike.
    """
    count = bins.value.size
    first, last = np.triu_indices(count + 1, 1)
    number = last - first
    longest = max(1, round(LONGEST_SHARE * count))
    shortest = min(longest, max(1, round(SHORTEST / bins.size)))
    kept = (number >= shortest) & (number <= longest)
    first, last, number = first[kept], last[kept], number[kept]
    weights = 1.0 / (number * (count - number + 1))
    return np.stack([first, last], axis=1), weights / weights.sum()


def spread_step(ahead: FloatArray, spread_length: float, bin_size: float) -> FloatArray:
    """Return a unit step spread along the cladding as along a fin.

    Parameters
    ----------
    ahead : array
        Distance beyond the step. [m]
    spread_length : float
        Decay length; not told from a sharp step below a quarter of a bin. [m]
    bin_size : float
        [m]
    """
    if spread_length < 0.25 * bin_size:
        return np.asarray(np.clip(ahead / bin_size + 0.5, 0.0, 1.0))
    far = 0.5 * np.exp(-np.abs(ahead) / spread_length)
    return np.asarray(np.where(ahead > 0, 1 - far, far))


def _steps(bins: Bins, spread_length: float) -> FloatArray:
    """Return a step at each edge, (n + 1, n)."""
    return spread_step(bins.place[None, :] - bins.edge[:, None], spread_length, bins.size)


def _log_factors(
    bins: Bins, edges: IntArray, null: NullModel, kelvin_per_rise: float, spread_length: float
) -> FloatArray:
    """Return the logarithm of each stretch's Bayes factor against the sound pipe, (m,).

    Averaged over how smooth patches are, how long, and how strong; factors of strength share
    the eigenvectors of a covariance. A stretch is the difference of two steps, so what all of
    them fit follows from what the steps fit.
    """
    white = null.station_sigma / np.sqrt(bins.number)
    # level and trend are free: what lies in their direction is no evidence
    basis = np.stack([np.ones_like(white), bins.place - bins.place.mean()]) / white
    free_sigma = np.array([1e3, TREND_SHARE * null.scene_sigma / max(np.ptp(bins.place), 1e-9)])
    steps = [_steps(bins, share * spread_length) / white for share in SPREADS]
    first, last = edges.T
    sound: list[float] = []
    fits: list[tuple[FloatArray, FloatArray]] = []
    for covariance in patch_covariances(bins, null, SCATTER_ALONG * kelvin_per_rise):
        values, vectors = np.linalg.eigh(covariance / np.outer(white, white))
        values = np.maximum(values, 0.0)
        data = (bins.value / white) @ vectors
        shapes = [step @ vectors for step in steps]
        free = (basis @ vectors) * free_sigma[:, None]
        for factor, weight in zip(SCATTER_FACTORS, SCATTER_WEIGHTS, strict=True):
            inverse = 1 / (1 + factor**2 * values)
            inner = np.eye(free.shape[0]) + (free * inverse) @ free.T
            left = data - np.linalg.solve(inner, (free * inverse) @ data) @ free
            fit = (data * left * inverse).sum() - np.log(inverse).sum()
            fit += float(np.linalg.slogdet(inner)[1])
            for shape in shapes:
                sound.append(float(np.log(weight / len(shapes)) - 0.5 * fit))
                along = shape @ (left * inverse)
                power = _power(shape, free, inner, inverse)
                own = np.diag(power)
                fits.append(
                    (along[first] - along[last], own[first] + own[last] - 2 * power[first, last])
                )
    return _over_scatter(np.array(sound), fits, kelvin_per_rise)


def _over_scatter(
    sound: FloatArray, fits: list[tuple[FloatArray, FloatArray]], kelvin_per_rise: float
) -> FloatArray:
    """Average over the kinds of scatter; those that explain nothing even with damage left out."""
    heights = kelvin_per_rise * RISES
    best = np.array(
        [
            float(np.max(np.maximum(along, 0.0) ** 2 / np.maximum(2 * power, 1e-12)))
            for along, power in fits
        ]
    )
    kept = np.flatnonzero(sound + best > (sound + best).max() - NEGLIGIBLE)
    weights = sound - np.logaddexp.reduce(sound)
    total = np.full(fits[0][0].size, -np.inf)
    for number in kept:
        along, power = fits[number]
        exponent = heights[:, None] * along - 0.5 * heights[:, None] ** 2 * power
        top = exponent.max(axis=0)
        mean = top + np.log(np.exp(exponent - top).mean(axis=0))
        total = np.logaddexp(total, weights[number] + mean)
    return total


def _power(
    shapes: FloatArray, free: FloatArray, inner: FloatArray, inverse: FloatArray
) -> FloatArray:
    """Return the products of shapes under the inverse covariance, level and trend taken out."""
    weighted = shapes * inverse
    by_free = weighted @ free.T
    return np.asarray(weighted @ shapes.T - by_free @ np.linalg.solve(inner, by_free.T))


def patch_covariances(bins: Bins, null: NullModel, scatter: float) -> list[FloatArray]:
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
