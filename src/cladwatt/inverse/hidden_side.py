"""The side of the pipe the camera does not see: most of its circumference.

Sound lagging is taken to be the same all round but for a small unevenness. Damage may go all
round or sit on one side; the seen face says in part which, by how evenly the contrast lies
across it.
"""

from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.stretches import Run
from cladwatt.measure.face_bands import FaceBands
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Evenness", "HiddenSide", "evenness_of", "whole_flux"]

UNEVENNESS = 0.04
"""Relative standard uncertainty of the whole circumference's loss from the seen face's on a
sound pipe: convection differs between top and bottom, and the lagging around; assumption."""
ALL_ROUND_EVEN, ALL_ROUND_UNEVEN = 0.8, 0.05
"""Share of damage that goes all round, given an even and an uneven face; assumption."""
EVEN_FROM, UNEVEN_BELOW = 0.7, 0.3


@dataclass(frozen=True)
class Evenness:
    """How damage lies across the seen face.

    Attributes
    ----------
    evenness : float
        Weaker edge band over the strongest band, 0 to 1; 1 where nothing stands out.
    edge : float
        Stronger edge band over the mean: what the hidden side may continue with.
    """

    evenness: float = 1.0
    edge: float = 1.0


def evenness_of(
    face: FaceBands,
    runs: tuple[Run, ...],
    sound_at: BoolArray,
    *,
    sign: int,
    usual: FloatArray | None = None,
) -> Evenness:
    """Return how the strongest run lies across the face.

    Parameters
    ----------
    face : FaceBands
    runs : tuple of Run
    sound_at : (n_stations,) array of bool
    sign : {1, -1}
        1 where damage is warmer than sound.
    usual : (n_bands,) array, optional
        What each band gives off on sound lagging over an even one, beside a tracer.
    """
    bands = face.temperature.shape[0]
    if not runs or bands < 3:
        return Evenness()
    strongest = max(runs, key=lambda run: run.contrast * (run.last - run.first + 1))
    inside = face.temperature[:, strongest.stations]
    inside = inside[:, np.isfinite(inside[0])]
    level = face.temperature[:, sound_at].mean(axis=1)
    contrast = np.maximum(sign * (inside.mean(axis=1) - level), 0.0)
    if usual is not None:
        contrast = contrast / usual
    if contrast.max() <= 0:
        return Evenness()
    mean = float(np.average(contrast, weights=face.extent))
    edges = contrast[[0, -1]]
    return Evenness(float(edges.min() / contrast.max()), float(edges.max() / mean))


@dataclass(frozen=True)
class HiddenSide:
    """Draws for the hidden part, each (count,).

    Attributes
    ----------
    seen_share : float
        Seen part of the circumference.
    unevenness : (count,) array
        Relative difference of the whole from the seen, on sound lagging.
    excess_share : (count,) array
        Excess of the hidden part as a share of the seen part's.
    """

    seen_share: float
    unevenness: FloatArray
    excess_share: FloatArray

    @classmethod
    def draw(cls, book: DrawBook, owner: str, seen_share: float, seen: Evenness) -> "HiddenSide":
        """Draw for one region.

        Damage goes all round (hidden excess about as large as the seen one, 10 % uncertain) or
        it is one-sided: the hidden excess then lies anywhere from nothing to a fifth more than
        the stronger edge of the face shows.
        """
        towards_even = np.clip((seen.evenness - UNEVEN_BELOW) / (EVEN_FROM - UNEVEN_BELOW), 0, 1)
        share = ALL_ROUND_UNEVEN + towards_even * (ALL_ROUND_EVEN - ALL_ROUND_UNEVEN)
        all_round = book.uniform(owner, "hidden_kind") < share
        near_one = 1 + 0.1 * book.normal(owner, "hidden_excess")
        one_sided = 1.2 * np.clip(seen.edge, 0.2, 1.0) * book.uniform(owner, "hidden_part")
        return cls(
            seen_share=seen_share,
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
    share = hidden.seen_share + (1 - hidden.seen_share) * hidden.excess_share
    level = base * (1 + hidden.unevenness)
    return np.asarray(level[:, None] + (seen - base[:, None]) * share[:, None])
