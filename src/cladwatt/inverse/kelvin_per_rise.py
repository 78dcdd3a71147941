"""What more loss shows at the lens."""

import numpy as np

from cladwatt.inverse.face import COLDEST, surface_temperature_draws
from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.seen import Seen
from cladwatt.types import BoolArray, FloatArray

__all__ = ["kelvin_of_rise"]


def kelvin_of_rise(seen: Seen, sound_at: BoolArray, base: FloatArray) -> float:
    """Return what a loss twice that at the sound level shows at the lens; 0 where nothing. [K]

    The flux's slope against the value at the lens is taken from two values around the sound
    level, in the median of the draws.

    Parameters
    ----------
    seen : Seen
        With known wind.
    sound_at : (n_stations,) array of bool
    base : (count,) array
        Flux at the sound level. [W/m2]
    """
    level = float(np.median(seen.face.temperature[:, sound_at]))
    temperature = surface_temperature_draws(
        np.array([level - 0.5, level + 0.5]), np.zeros(1), seen.frame, seen.line_draws
    )[:, 0]
    exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
    temperature = np.fmax(temperature, COLDEST)
    cooler, warmer = (outer_flux(temperature[:, side], exchange, seen.vapour) for side in (0, 1))
    slope = float(np.median(warmer - cooler))
    return abs(float(np.median(base))) / slope if slope > 0 else 0.0
