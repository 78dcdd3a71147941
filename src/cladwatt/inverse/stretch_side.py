"""Which side of the pipe a stretch lies on, in a word."""

from typing import NamedTuple

from cladwatt.inverse.around_pipe import upwards
from cladwatt.inverse.hidden_side import top_angle
from cladwatt.inverse.observe import Balance
from cladwatt.inverse.result import StretchSide
from cladwatt.inverse.seen import Seen

__all__ = ["NAMED_FROM", "Side", "side_named", "sides_of"]

NAMED_FROM = 0.6
"""A side less likely than this is not named."""


class Side(NamedTuple):
    """A side and the probability that the damage lies there."""

    side: StretchSide = "not known"
    probability: float = float("nan")


def side_named(all_round: float, upper: float, under: float) -> Side:
    """Return the likeliest side, "not known" where none is likely enough.

    Parameters
    ----------
    all_round, upper, under : float
        Probabilities; add up to less than 1 where it is not known which is up.
    """
    best: list[Side] = [
        Side("all round", all_round), Side("upper side", upper), Side("underside", under),
    ]  # fmt: skip
    likeliest = max(best, key=lambda one: one.probability)
    return likeliest if likeliest.probability >= NAMED_FROM else Side()


def sides_of(seen: Seen, balance: Balance) -> tuple[Side, ...]:
    """Return the side of each run.

    Parameters
    ----------
    seen : Seen
    balance : Balance
    """
    top = top_angle(seen)
    named = []
    for around, bare in zip(balance.hidden.around, balance.bare, strict=True):
        if bare is not None and bare.opening is not None:
            opening = bare.opening
            upper = 0.0 if top is None else float(opening.weight @ upwards(opening.middle, top))
            under = 0.0 if top is None else 1 - opening.bare - upper
            named.append(side_named(float(opening.bare), upper, float(under)))
        elif around is not None:
            named.append(side_named(around.all_round, around.upper, around.under))
        else:
            named.append(Side())
    return tuple(named)
