"""Sun on the seen face: how much of it nobody knows."""

import math

import numpy as np

from cladwatt.inverse.seen import Seen
from cladwatt.types import FloatArray

__all__ = ["sunlit_excess"]

MEAN_SHARE = 1 / math.pi
"""Of the beam over the whole circumference: projected width over circumference."""
SHARE_SIGMA = 0.7
LARGEST_SHARE = 0.9
"""The seen face may lie in the shade or face the sun: log-normal about the mean over the
circumference, cut where a face would meet the beam squarely; assumption."""


def sunlit_excess(seen: Seen) -> FloatArray | None:
    """Return what the seen face absorbs above the mean of the circumference, None without sun.

    Parameters
    ----------
    seen : Seen

    Returns
    -------
    (count,) array or None
        To be taken off the heat that leaves the seen face to tell what comes through the
        lagging. [W/m2]
    """
    if not np.any(seen.frame.irradiance > 0):
        return None
    share = MEAN_SHARE * np.exp(SHARE_SIGMA * seen.book.normal(seen.owner, "sunlit_share"))
    absorbed = seen.line_draws.solar_absorptance * seen.frame.irradiance
    return np.asarray(absorbed * (np.minimum(share, LARGEST_SHARE) - MEAN_SHARE))
