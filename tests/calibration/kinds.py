"""Kinds of damage: what the estimator says of the true one, and what it has to beat.

Counted over regions with local damage, whether it was found or not, and given that damage is
local: how likely there is any is counted elsewhere. The *prior* is the table's. *Thresholds on
temperature* is what a careful user does: where the hottest pixel of the outline, its emissivity
corrected as in the spreadsheet, shows more than half of the drop from fluid to air, the pipe is
seen, else worse lagging; within either by the prior, and one time in ten it is the other.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from tests.calibration.cases import LOCAL_KINDS

from cladwatt.materials.load import shipped_tables
from cladwatt.survey.model import Conditions, Line

__all__ = [
    "PIPE_SEEN_ABOVE",
    "KindScores",
    "by_thresholds",
    "drop_shown",
    "kind_scores",
    "prior_shares",
]

PIPE_SEEN_ABOVE = 0.5
"""Of the drop from fluid to air, at the hottest pixel of a region."""
SURE = 0.9
PIPE_KINDS = frozenset({"open_joint", "bare", "missing_sector"})


@dataclass(frozen=True)
class KindScores:
    """Of one region with local damage; NaN where there is none.

    Attributes
    ----------
    true, prior, thresholds : float
        Probability that each gives the true kind.
    top : float
        Probability of the likeliest kind.
    right : float
        1 where that is the true one, else 0.
    """

    true: float = math.nan
    prior: float = math.nan
    thresholds: float = math.nan
    top: float = math.nan
    right: float = math.nan


def prior_shares() -> dict[str, float]:
    """Return the prior of each kind of local damage, given that damage is local."""
    kinds = shipped_tables().damage_kinds
    total = sum(kinds[name].prior for name in sorted(LOCAL_KINDS))
    return {name: kinds[name].prior / total for name in sorted(LOCAL_KINDS)}


def by_thresholds(shown: float) -> dict[str, float]:
    """Return what thresholds give each kind.

    Parameters
    ----------
    shown : float
        Share of the drop from fluid to air at the hottest place; the prior where it is NaN.
    """
    prior = prior_shares()
    if math.isnan(shown):
        return prior
    favoured = PIPE_KINDS if shown > PIPE_SEEN_ABOVE else LOCAL_KINDS - PIPE_KINDS
    mass = sum(prior[name] for name in sorted(favoured))
    return {
        name: (SURE * share / mass if name in favoured else (1 - SURE) * share / (1 - mass))
        for name, share in prior.items()
    }


def drop_shown(extreme: float, line: Line, conditions: Conditions) -> float:
    """Return the share of the drop from fluid to air that a surface shows.

    Parameters
    ----------
    extreme : float
        Of the hottest pixel, of the coldest on a chilled line; NaN where none is told. [K]
    line : Line
    conditions : Conditions
        As declared.
    """
    inside, air = line.inside_temperature, conditions.air_temperature
    if inside is None or air is None or inside.value == air.value:
        return math.nan
    return (extreme - air.value) / (inside.value - air.value)


def kind_scores(true: str, kinds: Sequence[tuple[str, float]], shown: float) -> KindScores:
    """Score what was said of the kind of a region's damage.

    Parameters
    ----------
    true : str
        The true kind.
    kinds : sequence of (name, probability)
        As the region's result gives them.
    shown : float
        Share of the drop from fluid to air at the hottest pixel.
    """
    if true not in LOCAL_KINDS:
        return KindScores()
    local = {name: share for name, share in kinds if name in LOCAL_KINDS}
    # a region of which nothing was said counts as left at the prior, not as left out
    local = local if sum(local.values()) > 0 else prior_shares()
    total = sum(local.values())
    top = max(local, key=lambda name: (local[name], name))
    return KindScores(
        true=local.get(true, 0.0) / total,
        prior=prior_shares()[true],
        thresholds=by_thresholds(shown)[true],
        top=local[top] / total,
        right=float(top == true),
    )
