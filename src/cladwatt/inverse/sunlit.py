"""Sun on a pipe by place and time, and on its seen face: how much of it nobody knows."""

import math
from dataclasses import replace

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.seen import Seen
from cladwatt.physics.clear_sky import pipe_sunlight
from cladwatt.survey.model import Conditions
from cladwatt.types import FloatArray

__all__ = ["sun_on_run", "sunlit_excess"]

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


def sun_on_run(frame: FrameDraws, conditions: Conditions, inclination_deg: float) -> FrameDraws:
    """Return a frame's draws with a clear sky's sun, where it was assumed, on an inclined run.

    Parameters
    ----------
    frame : FrameDraws
        Its irradiance is that on a level pipe where nobody declared one.
    conditions : Conditions
    inclination_deg : float
        Of the run against the horizontal. [deg]

    Returns
    -------
    FrameDraws
        Unchanged where the irradiance was declared, or the run is level.
    """
    sun, elevation = conditions.solar_irradiance, conditions.sun_elevation_deg
    if sun is None or not sun.is_default or not sun.value > 0 or elevation is None:
        return frame
    if inclination_deg == 0:
        return frame
    level, run = (
        pipe_sunlight(elevation, inclination_deg=angle).mean for angle in (0.0, inclination_deg)
    )
    return replace(frame, irradiance=frame.irradiance * (run / level)) if level > 0 else frame
