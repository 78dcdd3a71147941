"""The smallest damage that a strip can show, by what the assessment weighs it with.

Profiles of a sound pipe are drawn from the null of `inverse.local_damage`: patches of six kinds of
smoothness and length, their strength uncertain, a mirrored scene, noise, level and trend free.
What decides is what `inverse.local_damage` decides by: the Bayes factor of a stretch in the strip,
its place, length and height integrated out, against none, less what counts for nothing. The
smallest damage is the rise that makes damage likelier than not in 95 % of strips with such a
stretch in their middle; fewer than 5 % of sound strips are called damaged by that.

References
----------
.. [1] Kay, *Fundamentals of Statistical Signal Processing: Detection Theory*, Prentice Hall 1998,
   chapter 9 (unknown noise parameters).
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.local_damage import (
    LONGEST_SHARE,
    MISFIT,
    PRIOR_LOCAL,
    RISES,
    SCATTER_ALONG,
    SCATTER_FACTORS,
    SCATTER_WEIGHTS,
    SPREADS,
    TREND_SHARE,
    Bins,
    patch_covariances,
    spread_step,
    stretches_of,
)
from cladwatt.inverse.null import NullModel
from cladwatt.types import FloatArray

__all__ = ["DETECTION", "FALSE_ALARM", "SoundProfiles", "smallest_rise"]

DETECTION, FALSE_ALARM = 0.95, 0.05
"""Of damage found, and of sound strips called damaged at most."""
PROFILES = 200
"""Sound pipes drawn."""
BESIDE = 2
"""Edges to either side of the damage's own that are weighed. [bins]"""
TRIED = (0.02, 20.0)
"""Least and largest rise over the sound loss that are tried."""
HALVINGS = 9
"""Of what lies between them, by its logarithm."""


@dataclass(frozen=True)
class SoundProfiles:
    """Profiles of a sound pipe as the null draws them.

    Attributes
    ----------
    null : NullModel
    bins : Bins
        Places along the strip.
    values : (n_profiles, n_bins) array
        [K]
    kelvin_per_rise : float
        Kelvin at the lens for a loss twice the sound one.
    spread_length : float
        Decay length along the cladding. [m]
    """

    null: NullModel
    bins: Bins
    values: FloatArray
    kelvin_per_rise: float
    spread_length: float

    @classmethod
    def draw(
        cls,
        null: NullModel,
        stations: int,
        random: np.random.Generator,
        *,
        kelvin_per_rise: float,
        spread_length: float,
        profiles: int = PROFILES,
    ) -> "SoundProfiles":
        """Draw sound profiles of a strip of so many stations."""
        bins = Bins.of(np.zeros(stations), null.station_length)
        nothing = np.zeros((profiles, bins.value.size))
        sound = cls(null, bins, nothing, kelvin_per_rise, spread_length)
        factors = random.choice(SCATTER_FACTORS, profiles, p=SCATTER_WEIGHTS)
        kinds = sound.patches()
        kind = random.integers(len(kinds), size=profiles)
        values = sound.white * random.standard_normal(nothing.shape)
        values += random.standard_normal((profiles, 2)) @ sound.free
        for number, one in enumerate(kinds):
            chosen = kind == number
            roots, vectors = np.linalg.eigh(one)
            drawn = random.standard_normal((int(chosen.sum()), bins.value.size))
            patches = (drawn * np.sqrt(np.maximum(roots, 0.0))) @ vectors.T
            values[chosen] += factors[chosen, None] * patches
        return cls(null, bins, values, kelvin_per_rise, spread_length)

    @property
    def white(self) -> FloatArray:
        """Independent scatter of each bin. [K]"""
        return np.asarray(self.null.station_sigma / np.sqrt(self.bins.number))

    @property
    def free(self) -> FloatArray:
        """Level and trend, each at one standard deviation, (2, n_bins). [K]"""
        along = (self.bins.place - self.bins.place.mean()) / max(np.ptp(self.bins.place), 1e-9)
        trend = TREND_SHARE * self.null.scene_sigma
        return np.stack([np.full(along.size, 1e3), trend * along])

    @property
    def length(self) -> float:
        """Of the strip. [m]"""
        return float(np.ptp(self.bins.place)) + self.bins.size

    def patches(self) -> list[FloatArray]:
        """Return the covariance of every kind of patches. [K2]"""
        return patch_covariances(self.bins, self.null, SCATTER_ALONG * self.kelvin_per_rise)

    def shapes(self, length: float, centre: FloatArray) -> FloatArray:
        """Return unit stretches with these centres [m], spread along, (n, n_bins)."""
        low, high = centre[:, None] - length / 2, centre[:, None] + length / 2
        place = self.bins.place[None, :]
        begins, ends = (
            spread_step(place - edge, self.spread_length, self.bins.size) for edge in (low, high)
        )
        return begins - ends

    @property
    def middle(self) -> float:
        """Of the strip. [m]"""
        return float(self.bins.place[0] + self.bins.place[-1]) / 2


class _Terms(NamedTuple):
    """What one kind and strength of patches makes of profiles and shapes.

    The last shape is that of the damage.
    """

    logarithm: FloatArray
    """Weight of this kind for a sound profile, (p,)."""
    along: FloatArray
    """Of profile and shape, (p, m)."""
    power: FloatArray
    """Of shapes, (m,)."""
    with_damage: FloatArray
    """Of shapes and damage, (m,)."""


def smallest_rise(sound: SoundProfiles, length: float) -> float:
    """Return the smallest rise of the loss over a length that shows.

    Parameters
    ----------
    sound : SoundProfiles
    length : float
        Of the stretch. [m]

    Returns
    -------
    float
        Share of the sound loss that is called damage in 95 % of strips; infinite where the strip
        is too short for a contrast or nothing shows at the lens. [-]
    """
    too_long = length > LONGEST_SHARE * sound.length
    if too_long or not sound.kelvin_per_rise > 0 or sound.bins.value.size < 8:
        return float("inf")
    shapes, weights = _near(sound, length)
    terms = list(_terms(sound, shapes))
    needed = MISFIT + np.log((1 - PRIOR_LOCAL) / PRIOR_LOCAL)

    def share(rise: float) -> float:
        evidence = _evidence(terms, weights, sound.kelvin_per_rise, sound.kelvin_per_rise * rise)
        return float(np.mean(evidence > needed))

    low, high = TRIED
    if share(high) < DETECTION:
        return float("inf")
    if share(low) >= DETECTION:
        return low
    for _ in range(HALVINGS):
        middle = float(np.sqrt(low * high))
        low, high = (low, middle) if share(middle) >= DETECTION else (middle, high)
    return high


def _near(sound: SoundProfiles, length: float) -> tuple[FloatArray, FloatArray]:
    """Return the stretches that overlay damage in the middle, the damage last, and their priors.

    Others add little to the evidence for it; left out, they err to the safe side.
    """
    edges, weights = stretches_of(sound.bins)
    bins, half = sound.bins, length / 2
    begin, end = (
        int(np.argmin(np.abs(bins.edge - edge)))
        for edge in (sound.middle - half, sound.middle + half)
    )
    close = np.abs(edges - np.array([begin, end])).max(axis=1) <= BESIDE
    first, last = bins.edge[edges[close, 0]], bins.edge[edges[close, 1]]
    shapes = [
        spread_step(bins.place - first[:, None], spread, bins.size)
        - spread_step(bins.place - last[:, None], spread, bins.size)
        for spread in np.multiply(SPREADS, sound.spread_length)
    ]
    damage = sound.shapes(length, np.array([sound.middle]))
    share = np.tile(weights[close] / len(SPREADS), len(SPREADS))
    return np.concatenate([*shapes, damage]), share


def _terms(sound: SoundProfiles, shapes: FloatArray) -> Iterator[_Terms]:
    """Yield the terms of every kind and strength of patches."""
    white = sound.white
    for covariance in sound.patches():
        roots, vectors = np.linalg.eigh(covariance / np.outer(white, white))
        roots = np.maximum(roots, 0.0)
        data, marks, free = (
            (part / white) @ vectors for part in (sound.values, shapes, sound.free)
        )
        for factor, weight in zip(SCATTER_FACTORS, SCATTER_WEIGHTS, strict=True):
            inverse = 1 / (1 + factor**2 * roots)
            inner = np.eye(2) + (free * inverse) @ free.T
            cleared = marks - np.linalg.solve(inner, (free * inverse) @ marks.T).T @ free
            left = data - np.linalg.solve(inner, (free * inverse) @ data.T).T @ free
            fit = (data * left * inverse).sum(axis=1)
            fit += np.linalg.slogdet(inner)[1] - np.log(inverse).sum()
            yield _Terms(
                logarithm=np.log(weight) - 0.5 * fit,
                along=(left * inverse) @ marks.T,
                power=(marks * cleared * inverse).sum(axis=1),
                with_damage=(marks * inverse) @ cleared[-1],
            )


def _evidence(terms: list[_Terms], weights: FloatArray, kelvin: float, lifted: float) -> FloatArray:
    """Return the logarithm of the Bayes factor of each profile, lifted by damage [K], (p,).

    Heights are averaged over as `local_damage` does, `kelvin` being what a doubled loss shows.
    """
    sound, damaged = [], []
    for one in terms:
        fit = 2 * lifted * one.along[:, -1] + lifted**2 * one.power[-1]
        logarithm = one.logarithm - 0.5 * fit
        along = one.along[:, :-1] + lifted * one.with_damage[:-1]
        power = one.power[:-1]
        heights = kelvin * RISES[:, None, None]
        exponent = heights * along - 0.5 * heights**2 * power
        top = exponent.max(axis=(0, 2))
        mean = np.exp(exponent - top[:, None]).mean(axis=0) @ weights
        sound.append(logarithm)
        damaged.append(logarithm + top + np.log(mean))
    return np.asarray(np.logaddexp.reduce(damaged, axis=0) - np.logaddexp.reduce(sound, axis=0))
