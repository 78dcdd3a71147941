"""The joint estimate over a survey: what frames tell each other through what they share.

Frames of one line share its lagging, cladding and fluid, and all frames share the convection law.
So the image of one frame tells something of the errors behind the others. What a frame says is
boiled down to a few numbers: how its regions' y (see `inverse.joint`) hangs on the standard
normal draws behind each shared quantity, linear, with the rest as noise. All frames are then
weighed together, and each is handed back what the *others* say of what it shares with them: a few
directions in the space of those normals with a mean and a variance, which its own joint estimate
takes in as further evidence.

What frames say is a mixture (each region may be sound or aged); it is replaced by the Gaussian
that has its moments in the light of all others (expectation propagation), never narrower by a
frame that only adds doubt.

Frames of one camera share half of the variance of its calibration (see `inverse.frame_draws`).

References
----------
.. [1] Minka, "Expectation propagation for approximate Bayesian inference", Proc. 17th Conf. on
   Uncertainty in Artificial Intelligence (2001) 362-369.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.joint import MOST_TOGETHER, SharedEvidence, Weighing, core_of, weighing_of
from cladwatt.inverse.observe import Observed
from cladwatt.types import FloatArray

__all__ = ["FrameEvidence", "Message", "frame_evidence", "messages_between", "shared_evidence"]

Key = tuple[str, str]
"""Owner and quantity of standard normal draws."""

SURVEY_KEYS: tuple[Key, ...] = (("camera", "calibration"), ("model", "convection"))
SWEEPS = 8
DAMPING = 0.7
TELLING = 0.97
"""A direction whose variance the other frames leave above this share says nothing."""
VAGUE = 3.0
"""A region whose y is less sure than this says nothing: bright metal, mostly."""
LEAST_VARIANCE = 0.5
"""However many frames say it, what they say of a direction is taken for no surer than this share
of the prior's variance: that it is the same in all of them is itself an assumption."""
MOST_DIRECTIONS = 6


@dataclass(frozen=True)
class FrameEvidence:
    """What one frame says, small enough to be sent between processes.

    Attributes
    ----------
    frame_id : str
    keys : tuple of (owner, quantity)
        What it shares with other frames, k of them.
    loading : (n_regions, k) array
        Change of each region's y per unit of each standard normal.
    weighing : Weighing
        Mean of y and the covariance of what is not shared, with the states of each region.
    """

    frame_id: str
    keys: tuple[Key, ...]
    loading: FloatArray
    weighing: Weighing


@dataclass(frozen=True)
class Message:
    """What all other frames say of what a frame shares with them.

    Attributes
    ----------
    keys : tuple of (owner, quantity)
    directions : (m, k) array
        Orthonormal.
    mean, variance : (m,) array
        Of each direction, as an observation of it: what the frame's own prior knows is not in it.
    """

    keys: tuple[Key, ...]
    directions: FloatArray
    mean: FloatArray
    variance: FloatArray


def shared_keys(observed: Observed) -> tuple[Key, ...]:
    """Return the keys of the draws that a region shares with other frames."""
    seen = observed.seen
    line, region = seen.line, seen.region
    owner = f"line:{line.tag}"
    names = ["inside_temperature", "pipe_outside_diameter", "installation_factor"]
    if region.band_emissivity is None:
        names.append("band_emissivity")
    if region.total_emissivity is None:
        names.append("total_emissivity")
    for number, _ in enumerate(line.layers, start=1):
        names += [f"thickness_{number}", f"conductivity_factor_{number}"]
    if line.inside_film is not None:
        names.append("inside_film")
    return (*SURVEY_KEYS, *((owner, name) for name in names))


def frame_evidence(
    observed: Sequence[Observed], book: DrawBook, frame_id: str
) -> FrameEvidence | None:
    """Boil a frame down to what it says of what it shares.

    Parameters
    ----------
    observed : sequence of Observed
        Its pipe regions.
    book : DrawBook
    frame_id : str

    Returns
    -------
    FrameEvidence or None
        None where no region says anything. Of more than `MOST_TOGETHER` regions the first by id.
    """
    found: dict[str, Observed] = {}
    said: dict[str, FloatArray] = {}
    for one in observed:
        evidence = one.evidence()
        if evidence is None or np.std(evidence.relative_excess) > VAGUE:
            continue
        found[evidence.region_id] = one
        said[evidence.region_id] = evidence.relative_excess
    names = sorted(found)[:MOST_TOGETHER]
    if not names:
        return None
    observed_y = np.stack([said[name] for name in names], axis=1)
    keys = tuple(sorted({key for name in names for key in shared_keys(found[name])}))
    core = core_of(observed_y)
    normals = np.stack([book.normal(*key) for key in keys], axis=1)[core]
    normals -= normals.mean(axis=0)
    y = observed_y[core]
    loading = np.linalg.lstsq(normals, y - y.mean(axis=0), rcond=None)[0].T
    rest = y - y.mean(axis=0) - normals @ loading.T
    covariance = rest.T @ rest / core.sum()
    return FrameEvidence(frame_id, keys, loading, weighing_of(y.mean(axis=0), covariance, y))


@dataclass
class _Site:
    """A frame's Gaussian stand-in on u = loading @ s: precision and precision times mean."""

    precision: FloatArray
    shift: FloatArray


def messages_between(frames: Sequence[FrameEvidence]) -> Mapping[str, Message]:
    """Weigh all frames together and return what the others say to each.

    Parameters
    ----------
    frames : sequence of FrameEvidence

    Returns
    -------
    mapping of frame id to Message
        Frames to which nobody says anything are not in it.
    """
    ordered = sorted(frames, key=lambda one: one.frame_id)
    if len(ordered) < 2:
        return {}
    space = _Space(ordered)
    sites = [
        _Site(np.zeros((one.loading.shape[0],) * 2), np.zeros(one.loading.shape[0]))
        for one in ordered
    ]
    for _ in range(SWEEPS):
        means, covariances = space.marginals(sites)
        for number, frame in enumerate(ordered):
            b = frame.loading
            mean, covariance = means[number], covariances[number]
            moved = _moved(frame.weighing, b @ mean, b @ covariance @ b.T, b @ b.T, sites[number])
            # a frame that cannot be weighed says nothing more, and stops no other
            if np.isfinite(moved.precision).all() and np.isfinite(moved.shift).all():
                sites[number] = moved
    means, covariances = space.marginals(sites)
    messages = {}
    for number, frame in enumerate(ordered):
        message = _cavity_message(frame, means[number], covariances[number], sites[number])
        if message is not None:
            messages[frame.frame_id] = message
    return messages


class _Space:
    """The standard normals of everything shared, and their Gaussian posterior."""

    def __init__(self, frames: Sequence[FrameEvidence]) -> None:
        keys = sorted({key for frame in frames for key in frame.keys})
        number = {key: index for index, key in enumerate(keys)}
        self._frames = frames
        self._index = [np.array([number[key] for key in frame.keys]) for frame in frames]
        self._size = len(keys)

    def marginals(self, sites: Sequence[_Site]) -> tuple[list[FloatArray], list[FloatArray]]:
        """Return mean and covariance of what each frame shares, (k,) and (k, k)."""
        from scipy.sparse import coo_matrix, eye
        from scipy.sparse.linalg import splu

        rows, columns, values = [], [], []
        shift = np.zeros(self._size)
        for frame, index, site in zip(self._frames, self._index, sites, strict=True):
            rows.append(np.repeat(index, index.size))
            columns.append(np.tile(index, index.size))
            values.append((frame.loading.T @ site.precision @ frame.loading).ravel())
            np.add.at(shift, index, frame.loading.T @ site.shift)
        precision = coo_matrix(
            (np.concatenate(values), (np.concatenate(rows), np.concatenate(columns))),
            shape=(self._size, self._size),
        )
        solver = splu((precision + eye(self._size)).tocsc())
        mean = solver.solve(shift)
        covariances = []
        for index in self._index:
            columns_of_unity = np.zeros((self._size, index.size))
            columns_of_unity[index, np.arange(index.size)] = 1.0
            covariances.append(solver.solve(columns_of_unity)[index])
        return [mean[index] for index in self._index], covariances


def _moved(
    weighing: Weighing,
    mean: FloatArray,
    covariance: FloatArray,
    prior: FloatArray,
    site: _Site,
) -> _Site:
    """Return a frame's site after it was weighed in the light of all others."""
    floor = 1e-9 * max(float(np.trace(prior)), 1e-12) * np.eye(mean.size)
    precision = np.linalg.inv(covariance + floor)
    without = precision - site.precision
    values, vectors = np.linalg.eigh(0.5 * (without + without.T))
    # the others never leave more than the prior
    least = np.linalg.eigvalsh(np.linalg.inv(prior + floor)).min()
    without = (vectors * np.maximum(values, 0.5 * least)) @ vectors.T
    cavity = np.linalg.inv(without)
    cavity_mean = cavity @ (precision @ mean - site.shift)
    tilted_mean, tilted = weighing.tilted(cavity_mean, cavity)
    told = np.linalg.inv(tilted + floor) - without
    values, vectors = np.linalg.eigh(0.5 * (told + told.T))
    told = (vectors * np.maximum(values, 0.0)) @ vectors.T
    shift = (told + without) @ tilted_mean - without @ cavity_mean
    return _Site(
        site.precision + DAMPING * (told - site.precision),
        site.shift + DAMPING * (shift - site.shift),
    )


def _cavity_message(
    frame: FrameEvidence, mean: FloatArray, covariance: FloatArray, site: _Site
) -> Message | None:
    """Take a frame's own word out and return what is left, as observations of directions."""
    own = frame.loading.T @ site.precision @ frame.loading
    precision = np.linalg.inv(covariance) - own
    shift = np.linalg.solve(covariance, mean) - frame.loading.T @ site.shift
    # what the others add to the unit prior
    gained = precision - np.eye(mean.size)
    values, vectors = np.linalg.eigh(0.5 * (gained + gained.T))
    kept = np.flatnonzero(values > 1 / TELLING - 1)[::-1][:MOST_DIRECTIONS]
    if not kept.size:
        return None
    directions = vectors[:, kept].T
    mean = directions @ shift / values[kept]
    return Message(frame.keys, directions, mean, np.maximum(1 / values[kept], LEAST_VARIANCE))


def shared_evidence(message: Message, book: DrawBook) -> SharedEvidence:
    """Return a message as draws that the joint estimate of a frame takes in.

    The noise of the observations is drawn from what is shared as well, so that frames moved by
    the same message stay in step.
    """
    normals = np.stack([book.normal(*key) for key in message.keys], axis=1)
    noise = np.stack([book.normal(owner, f"told_{name}") for owner, name in message.keys], axis=1)
    return SharedEvidence(
        draws=normals @ message.directions.T,
        noise=noise @ message.directions.T,
        mean=message.mean,
        variance=message.variance,
    )
