"""The side of the pipe the camera does not see."""

from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.types import FloatArray

__all__ = ["HiddenSide", "whole_flux"]

UNEVENNESS = 0.04
"""Relative standard uncertainty of the whole circumference's loss from the seen face's on a
sound pipe: convection differs between top and bottom, and the lagging around; assumption."""
ALL_ROUND_SHARE = 0.65
"""Prior share of damage that goes all round; assumption."""


@dataclass(frozen=True)
class HiddenSide:
    """Draws for the hidden half, each (count,)."""

    unevenness: FloatArray
    """Relative difference of the whole from the seen, on sound lagging."""
    excess_share: FloatArray
    """Excess of the hidden half as a share of the seen half's."""

    @classmethod
    def draw(cls, book: DrawBook, region_id: str) -> "HiddenSide":
        """Draw for one region.

        Damage goes all round (hidden excess about as large as the seen one, 10 % uncertain) or
        it is one-sided, the hidden excess then anything from nothing to a fifth more than seen.
        """
        owner = f"region:{region_id}"
        all_round = book.uniform(owner, "hidden_kind") < ALL_ROUND_SHARE
        near_one = 1 + 0.1 * book.normal(owner, "hidden_excess")
        one_sided = 1.2 * book.uniform(owner, "hidden_part")
        return cls(
            unevenness=UNEVENNESS * book.normal(owner, "unevenness"),
            excess_share=np.where(all_round, near_one, one_sided),
        )


def whole_flux(seen: FloatArray, base: FloatArray, hidden: HiddenSide) -> FloatArray:
    """Return the mean flux over the whole circumference.

    Parameters
    ----------
    seen : (count, n_stations) array
        Mean flux over the seen face. [W/m2]
    base : (count,) array
        Its level at sound stations. [W/m2]
    hidden : HiddenSide

    Returns
    -------
    (count, n_stations) array
        [W/m2]
    """
    contrast = seen - base[:, None]
    share = (1 + hidden.excess_share) / 2
    return np.asarray((base * (1 + hidden.unevenness))[:, None] + contrast * share[:, None])
