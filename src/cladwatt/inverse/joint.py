"""The joint estimate: the specification as evidence, all regions of a frame together.

What every draw of a frame says of every region's level is compared with what lagging does: it is
sound, or it has aged throughout. Most pipes are about as specified, and errors that regions share
(camera, air, reflected and radiative temperature, convection law) would show on all of them at
once; so each region tells something of the errors behind the others.

For a region ``y`` is its loss at the sound level over what sound lagging would lose, less one.
Under "sound" y is 0 within the scatter of sound lagging; under "aged" one of a few ranges of rise.
Every combination of these over the regions is weighed by how well the draws agree with it, and
each draw is moved to agree with the combination that it was dealt, by linear regression on the
y of all regions (an ensemble Kalman update with perturbed observations). Linear and Gaussian in
y; the draws' own shape is kept otherwise, and draws stay in step with those of other frames.

Local damage does not enter: levels are taken from stations away from what stands out.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = [
    "MOST_TOGETHER",
    "JointUpdate",
    "LevelEvidence",
    "SharedEvidence",
    "Weighing",
    "core_of",
    "joint_update",
    "weighing_of",
]


@dataclass(frozen=True)
class _State:
    """One thing lagging may have done: mean and scatter of y, and its prior."""

    mean: float
    sigma: float
    prior: float
    aged: bool


SOUND_SCATTER = 0.05
"""Scatter of sound lagging about its line's installation factor; assumption."""
STATES = (
    _State(0.0, SOUND_SCATTER, 0.82, aged=False),
    _State(0.2, 0.07, 0.085, aged=True),
    _State(0.45, 0.12, 0.055, aged=True),
    _State(0.95, 0.30, 0.025, aged=True),
    _State(1.9, 0.60, 0.015, aged=True),
)
"""Priors: 18 % of regions aged by more than 10 % beyond the ordinary age that the installation
factor holds already, small rises more often; assumption. The last is lagging wet or gone over the
whole region: no contrast shows it, only the level."""
LARGEST_DISAGREEMENT = 2.5
"""Standard uncertainties from the nearest state beyond which the specification is doubted."""
MOST_TOGETHER = 5
"""Regions weighed together; frames with more are taken in groups."""
CORE_SIGMAS = 4.0
"""Draws further from the median (in robust standard deviations) are left out where means and
covariances are taken: near-zero emissivities make tails that a Gaussian must not be fitted to."""


@dataclass(frozen=True)
class LevelEvidence:
    """Draws of one region's y, (count,), all finite."""

    region_id: str
    relative_excess: FloatArray


@dataclass(frozen=True)
class SharedEvidence:
    """What other frames say of what this one shares with them: m directions.

    Attributes
    ----------
    draws, noise : (count, m) array
        Draws of each direction, and standard normal draws of the error of what is said of it.
    mean, variance : (m,) array
        What is said of each, and how surely.
    """

    draws: FloatArray
    noise: FloatArray
    mean: FloatArray
    variance: FloatArray


@dataclass(frozen=True)
class Weighing:
    """What the regions' lagging may have done against what was seen.

    Attributes
    ----------
    mean : (n,) array
        Of the draws of y.
    covariance : (n, n) array
    means, variances : (n_combinations, n) array
        Of y under each combination of states.
    priors : (n_combinations,) array
    numbers : (n_combinations, n) array of int
        State of each region.
    doubt : (n,) array
        Largest variance added to a state of a region that none fits.
    """

    mean: FloatArray
    covariance: FloatArray
    means: FloatArray
    variances: FloatArray
    priors: FloatArray
    numbers: IntArray
    doubt: FloatArray

    def weights(self) -> FloatArray:
        """Return the posterior weight of each combination, (n_combinations,)."""
        return self._weighed(self.mean, self.covariance)[0]

    def tilted(self, mean: FloatArray, covariance: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the moments of a part u of y, known as (mean, covariance), after the weighing.

        y is u, plus what has this object's mean and covariance.
        """
        total_mean, total = self.mean + mean, self.covariance + covariance
        weights, totals = self._weighed(total_mean, total)
        kept = weights > 1e-9
        gain = np.linalg.solve(totals[kept], np.broadcast_to(covariance, totals[kept].shape))
        gain = np.swapaxes(gain, 1, 2)
        means = mean + np.einsum("cij,cj->ci", gain, self.means[kept] - total_mean)
        within = covariance - gain @ covariance
        moved = weights[kept] @ means
        away = means - moved
        between = np.einsum("c,ci,cj->ij", weights[kept], away, away)
        return moved, np.einsum("c,cij->ij", weights[kept], within) + between

    def _weighed(self, mean: FloatArray, covariance: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return weights and the total covariance under each combination."""
        total = covariance + np.einsum("ci,ij->cij", self.variances, np.eye(mean.size))
        away = self.means - mean
        solved = np.linalg.solve(total, away[:, :, None])[:, :, 0]
        logarithm = -0.5 * np.einsum("ci,ci->c", away, solved)
        logarithm -= 0.5 * np.linalg.slogdet(total)[1]
        weights = self.priors * np.exp(logarithm - logarithm.max())
        return weights / weights.sum(), total


@dataclass(frozen=True)
class JointUpdate:
    """Moves draws to agree with what the lagging of a frame's regions may have done.

    Attributes
    ----------
    aged : dict of str to float
        Posterior probability of ageing by region id.
    doubted : frozenset of str
        Regions whose image fits none of the states.
    """

    aged: dict[str, float]
    doubted: frozenset[str]
    _centred: FloatArray
    """Draws of y less their mean, over the number of draws that means and covariances are taken
    of, and zero in all others, (count, n_regions)."""
    _gain: FloatArray
    """What a unit of covariance with each y moves each draw by, (count, n_regions)."""

    def apply(self, values: FloatArray) -> FloatArray:
        """Return draws of any quantity of the frame after the update.

        Parameters
        ----------
        values : (count,) or (count, n) array
            Finite draws, in step with those of the evidence.

        Returns
        -------
        array of the same shape
            NaN stays NaN.
        """
        flat = values.reshape(values.shape[0], -1)
        moved = flat + self._gain @ (self._centred.T @ flat)
        return np.asarray(moved.reshape(values.shape))


def joint_update(
    evidence: Sequence[LevelEvidence],
    book: DrawBook,
    frame_id: str,
    shared: SharedEvidence | None = None,
) -> tuple[JointUpdate, ...]:
    """Weigh what the regions of a frame may have done.

    Parameters
    ----------
    evidence : sequence of LevelEvidence
        One per region whose sound loss is known.
    book : DrawBook
    frame_id : str
    shared : SharedEvidence, optional
        What other frames say.

    Returns
    -------
    tuple of JointUpdate
        To be applied one after the other; more than one only in frames with many regions.

    References
    ----------
    .. [1] Burgers, van Leeuwen, Evensen, "Analysis scheme in the ensemble Kalman filter",
       Monthly Weather Review 126 (1998) 1719-1724.
    """
    updates: list[JointUpdate] = [] if shared is None else [_shared_update(shared)]
    # by id: what comes out must not hang on the order in which regions were drawn
    ordered = sorted(evidence, key=lambda one: one.region_id)
    for first in range(0, len(ordered), MOST_TOGETHER):
        group = ordered[first : first + MOST_TOGETHER]
        observed = np.stack([one.relative_excess for one in group], axis=1)
        for update in updates:
            observed = update.apply(observed)
        owner = f"frame:{frame_id}:{first}"
        updates.append(_updated([one.region_id for one in group], observed, book, owner))
    return tuple(updates)


def _shared_update(shared: SharedEvidence) -> JointUpdate:
    """Take in what other frames say: an observation of each direction, the same for all draws."""
    covariance = np.atleast_2d(np.cov(shared.draws, rowvar=False, bias=True))
    innovation = shared.mean + np.sqrt(shared.variance) * shared.noise - shared.draws
    inverse = np.asarray(np.linalg.inv(covariance + np.diag(shared.variance)), dtype=float)
    every = np.ones(shared.draws.shape[0], dtype=bool)
    return JointUpdate({}, frozenset(), _centred(shared.draws, every), innovation @ inverse)


def _centred(observed: FloatArray, core: BoolArray) -> FloatArray:
    """Return what a covariance with y is taken by: zero where a draw does not count."""
    away = observed - observed[core].mean(axis=0)
    return np.asarray(np.where(core[:, None], away, 0.0) / core.sum())


def weighing_of(mean: FloatArray, covariance: FloatArray, observed: FloatArray) -> Weighing:
    """Return the weighing of regions.

    Parameters
    ----------
    mean : (n,) array
        Of y.
    covariance : (n, n) array
        Of what the combinations are weighed against.
    observed : (count, n) array
        Draws of y, whose whole spread says whether any state fits.
    """
    doubt = _doubt(mean, observed.var(axis=0))
    numbers = np.array(list(product(range(len(STATES)), repeat=mean.size)))
    variances = np.square([state.sigma for state in STATES])[numbers]
    return Weighing(
        mean=mean,
        covariance=covariance,
        means=np.array([state.mean for state in STATES])[numbers],
        variances=variances + doubt[np.arange(mean.size), numbers],
        priors=np.prod(np.array([state.prior for state in STATES])[numbers], axis=1),
        numbers=numbers,
        doubt=doubt.max(axis=1),
    )


def _updated(regions: list[str], observed: FloatArray, book: DrawBook, owner: str) -> JointUpdate:
    """Weigh one group of regions and deal its draws out."""
    core = core_of(observed)
    mean = observed[core].mean(axis=0)
    covariance = np.atleast_2d(np.cov(observed[core], rowvar=False, bias=True))
    weighing = weighing_of(mean, covariance, observed[core])
    weights = weighing.weights()
    dealt = np.searchsorted(np.cumsum(weights), book.uniform(owner, "lagging_state"))
    dealt = np.minimum(dealt, weights.size - 1)
    scatter = _keyed(book, regions, "sound_scatter")
    disagreement = np.sqrt(weighing.doubt) * _keyed(book, regions, "disagreement")
    gain = np.zeros_like(observed)
    for number in np.unique(dealt):
        chosen = np.flatnonzero(dealt == number)
        total = covariance + np.diag(weighing.variances[number])
        target = weighing.means[number] + np.sqrt(weighing.variances[number]) * scatter[chosen]
        # what image and specification disagree by stays as uncertainty of both
        widening = disagreement[chosen] @ np.linalg.pinv(covariance) @ total
        innovation = target - observed[chosen] + widening
        gain[chosen] = innovation @ np.linalg.inv(total)
    is_aged = np.array([state.aged for state in STATES])[weighing.numbers]
    aged = dict(zip(regions, (weights @ is_aged).tolist(), strict=True))
    doubted = frozenset(r for r, own in zip(regions, weighing.doubt, strict=True) if own > 0)
    return JointUpdate(aged, doubted, _centred(observed, core), gain)


def _keyed(book: DrawBook, regions: list[str], quantity: str) -> FloatArray:
    """Return standard normal draws of each region's own, (count, n_regions)."""
    return np.stack([book.normal(f"region:{region}", quantity) for region in regions], axis=1)


def core_of(observed: FloatArray) -> BoolArray:
    """Return the draws that lie in no region's far tail, (count,)."""
    away = np.abs(observed - np.median(observed, axis=0))
    sigma = 1.4826 * np.median(away, axis=0)
    return np.asarray((away <= CORE_SIGMAS * np.maximum(sigma, 1e-12)).all(axis=1))


def _doubt(mean: FloatArray, variance: FloatArray) -> FloatArray:
    """Return the variance to add to the nearest state of regions that no state fits.

    There the specification is wrong, or the image is; the two share the disagreement, which is
    also kept as uncertainty. (n_regions, n_states)
    """
    added = np.zeros((mean.size, len(STATES)))
    for index, (level, own) in enumerate(zip(mean, variance, strict=True)):
        sigmas = [abs(level - state.mean) / math.sqrt(own + state.sigma**2) for state in STATES]
        nearest = int(np.argmin(sigmas))
        if sigmas[nearest] > LARGEST_DISAGREEMENT:
            distance = abs(level - STATES[nearest].mean)
            added[index, nearest] = (distance / LARGEST_DISAGREEMENT) ** 2
    return added
