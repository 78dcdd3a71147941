"""Kinds of damage: which of them a stretch is likely to be, by Bayesian model comparison.

Every kind is a family of forward models with a prior (`kind_families`, table ``damage_kinds``).
The likelihood of what a stretch shows is the density of the family's samples in the space of
what is seen, each sample widened by the stretch's own uncertainty and by what the families leave
out. No feature decides by itself, and there are no thresholds: kinds that would show the same
share the probability in the ratio of their priors.

How likely there is damage at all is decided elsewhere (`local_damage`, `joint`); the kinds divide
what is found there.

References
----------
.. [1] Kass, Raftery, "Bayes factors", J. American Statistical Association 90 (1995) 773-795.
.. [2] Beaumont, Zhang, Balding, "Approximate Bayesian computation in population genetics",
   Genetics 162 (2002) 2025-2035: likelihoods from simulated samples and a kernel.
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

from cladwatt.inverse.hidden_side import top_angle
from cladwatt.inverse.kind_families import FEW_SAMPLES, SAMPLES, Shown, View, show
from cladwatt.inverse.kind_features import Features, features_of
from cladwatt.inverse.kind_levels import SurfaceLevels, surface_levels
from cladwatt.inverse.local_damage import LocalDamage
from cladwatt.inverse.null import NullModel
from cladwatt.inverse.observe import Balance
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.tracing import clear_bands
from cladwatt.materials.damage_kinds import WHOLE_KINDS
from cladwatt.materials.rows import DamageKind
from cladwatt.types import FloatArray

__all__ = [
    "KindShares",
    "RegionKinds",
    "local_prior",
    "posterior",
    "region_kinds",
    "shares_of_region",
]

KindShares = tuple[tuple[str, float], ...]
"""Kinds with their probabilities, likeliest first."""

RISE_KERNEL = 0.15
"""Of the logarithm of the rise, besides its uncertainty: heat that flows along and around in the
lagging, which the families leave out; assumption."""
LENGTH_KERNEL = 0.2
"""Of the logarithm of the length; assumption."""
EDGE_KERNEL = 0.45
"""Of the logarithm of the edges' length; assumption."""
SHAPE_KERNEL = 0.2
"""Of each band over the strongest; assumption."""
SHAPE_INDEPENDENT = 0.5
"""Bands that tell something of their own, over all: neighbours share heat; assumption."""
OTHERWISE = 0.01
"""Least likelihood of a kind over that of the likeliest: damage keeps to no family; assumption."""
SEEN_FROM = 2.5
"""Standard uncertainties from which a stretch stands out, as `stretches` looks for it."""


def local_prior(kinds: Mapping[str, DamageKind]) -> float:
    """Return the prior probability of local damage somewhere in a region."""
    return sum(kind.prior for kind in _local(kinds))


def _local(kinds: Mapping[str, DamageKind]) -> list[DamageKind]:
    return [kind for kind in kinds.values() if kind.key not in WHOLE_KINDS]


@dataclass(frozen=True)
class RegionKinds:
    """Kinds of what stands out, and of damage that stands out nowhere.

    Attributes
    ----------
    runs : tuple of KindShares
        Of each run, if it is local damage; empty where there is nothing to go by.
    hidden : KindShares
        If there is local damage that stands out nowhere.
    """

    runs: tuple[KindShares, ...]
    hidden: KindShares


def region_kinds(seen: Seen, balance: Balance, view_spread: float,
                 kinds: Mapping[str, DamageKind]) -> RegionKinds:  # fmt: skip
    """Weigh the kinds of local damage at each run of a region.

    Parameters
    ----------
    seen : Seen
        With known diameter.
    balance : Balance
    view_spread : float
        Decay length along the cladding. [m]
    kinds : mapping of key to DamageKind
    """
    bands = np.ones(seen.face.view_angle.size, dtype=bool)
    if balance.stripe is not None:
        bands = clear_bands(balance.stripe)
    pipe = seen.line_draws.pipe_diameter
    view = View(
        band_angle=seen.face.view_angle[bands],
        top=top_angle(seen),
        spread_length=view_spread,
        diameter=float(np.median(seen.diameter)),
        pipe_diameter=math.nan if pipe is None else float(np.median(pipe)),
        station_length=balance.null.station_length,
    )
    samples = SAMPLES if balance.runs else FEW_SAMPLES
    levels = _spread_out(surface_levels(seen, balance.base, balance.sound_at), samples)
    shown = {kind.key: show(kind, levels, view, seen.book.seed, samples) for kind in _local(kinds)}
    priors = {kind.key: kind.prior for kind in _local(kinds)}
    runs = []
    for run in balance.runs:
        found = features_of(seen, run, balance.sound_at, balance.null, bands, balance.searched)
        runs.append(() if found is None else posterior(found, shown, priors))
    return RegionKinds(tuple(runs), _hidden(shown, priors, balance.null))


def _spread_out(levels: SurfaceLevels | None, samples: int) -> SurfaceLevels | None:
    """Return as many draws as there are samples, each as often as the others."""
    if levels is None:
        return None
    return levels.take(np.arange(samples) % levels.inside.size)


def posterior(
    found: Features, shown: Mapping[str, Shown], priors: Mapping[str, float]
) -> KindShares:
    """Return the probability of each kind from what a stretch shows.

    Parameters
    ----------
    found : Features
    shown : mapping of kind to Shown
    priors : mapping of kind to float

    Returns
    -------
    KindShares
        They add up to 1.
    """
    names = [name for name, prior in priors.items() if prior > 0]
    logarithms = np.array([_log_likelihood(found, shown[name]) for name in names])
    likelihood = np.exp(logarithms - logarithms.max())
    weights = np.array([priors[name] for name in names]) * np.maximum(likelihood, OTHERWISE)
    return _ordered(dict(zip(names, (weights / weights.sum()).tolist(), strict=True)))


def _ordered(shares: Mapping[str, float]) -> KindShares:
    return tuple(sorted(shares.items(), key=lambda item: (-item[1], item[0])))


def _log_likelihood(found: Features, shown: Shown) -> float:
    """Return the logarithm of the samples' density at what is seen."""
    off = (shown.shape - found.shape) / math.hypot(SHAPE_KERNEL, found.shape_u)
    exponent = -0.5 * SHAPE_INDEPENDENT * (off**2).sum(axis=1)
    if shown.rise is not None:
        exponent = exponent + _normal(
            np.log(np.maximum(shown.rise, 1e-6)), math.log(found.rise),
            math.hypot(RISE_KERNEL, found.rise_u / found.rise),
        )  # fmt: skip
    width = math.hypot(LENGTH_KERNEL, found.length_u / found.length)
    length = np.log(shown.length)
    if found.cut:
        # it may go on beyond the strip's end
        exponent = exponent + np.log(ndtr((length - math.log(found.length)) / width) + 1e-12)
    else:
        exponent = exponent + _normal(length, math.log(found.length), width)
    if math.isfinite(found.edge):
        exponent = exponent + _normal(
            np.log(shown.edge), math.log(found.edge),
            math.hypot(EDGE_KERNEL, found.edge_u / found.edge),
        )  # fmt: skip
    return float(np.logaddexp.reduce(exponent) - math.log(exponent.size))


def _normal(values: FloatArray, at: float, sigma: float) -> FloatArray:
    """Return the logarithm of a normal density, but for the constant all kinds share."""
    return np.asarray(-0.5 * ((values - at) / sigma) ** 2)


def _hidden(shown: Mapping[str, Shown], priors: Mapping[str, float], null: NullModel) -> KindShares:
    """Return the probability of each kind if it does not stand out."""
    weights = {}
    for name, prior in priors.items():
        one = shown[name]
        if one.rise is None:
            weights[name] = prior
            continue
        stations = float(np.median(one.length)) / null.station_length
        unseen = float(np.mean(one.rise < SEEN_FROM * null.run_sigma(stations)))
        weights[name] = prior * max(unseen, 1e-3)
    total = sum(weights.values())
    return _ordered({name: weight / total for name, weight in weights.items()})


def shares_of_region(
    kinds: RegionKinds, damage: LocalDamage, local: float, aged: float | None
) -> KindShares:
    """Return the probability of sound, aged and each kind of local damage.

    Parameters
    ----------
    kinds : RegionKinds
    damage : LocalDamage
    local : float
        Probability of local damage.
    aged : float or None
        Of ageing throughout; nothing is returned where it is not known.

    Returns
    -------
    KindShares
        They add up to 1.
    """
    if aged is None:
        return ()
    parts: list[tuple[float, KindShares]] = [(damage.elsewhere, kinds.hidden)]
    parts += [(p, k or kinds.hidden) for p, k in zip(damage.runs, kinds.runs, strict=True)]
    total = sum(weight for weight, _ in parts)
    shares = {"sound": max(1 - local - aged, 0.0), "aged": aged}
    for weight, each in parts:
        for name, share in each:
            by_part = local * weight / total * share if total > 0 else 0.0
            shares[name] = shares.get(name, 0.0) + by_part
    whole = sum(shares.values())
    return _ordered({name: share / whole for name, share in shares.items()})
