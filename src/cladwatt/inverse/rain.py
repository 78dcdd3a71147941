"""Whether a surface that rain has wetted may still have been wet when it was recorded."""

from dataclasses import replace
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.seen import Seen
from cladwatt.physics.drying import drying_time
from cladwatt.survey.model import Conditions
from cladwatt.types import FloatArray

__all__ = ["DAY_HOURS", "MAY_BE_WET", "MOSTLY_WET", "RainLeft", "had_rained", "rain_left"]

MAY_BE_WET = 0.05
"""Beyond this share of draws a surface that may be wet gets no number: what an interval of 95 %
leaves out."""
MOSTLY_WET = 0.5
"""Beyond this share its contrasts are taken as patches that dry."""
DAY_HOURS = 24.0
"""Where it is not said when the rain ended it may have been at any hour of the last day."""
UNKNOWN_HUMIDITY = 0.5
"""The least that the air's humidity may have been since, where none is declared; assumption."""


class RainLeft(NamedTuple):
    """What of the rain is still there."""

    share: float
    """Of the draws in which the surface is still wet."""
    drying_hours: float
    """Median time in which the film dries off; infinite where it does not."""


def had_rained(conditions: Conditions) -> bool:
    """Return whether rain on an outdoor pipe is declared."""
    declared = conditions.rain_last_24h or conditions.hours_since_rain is not None
    return conditions.indoors is False and bool(declared)


def rain_left(seen: Seen) -> RainLeft | None:
    """Return whether the surface may still be wet, by the time its film of rain takes to dry.

    Parameters
    ----------
    seen : Seen

    Returns
    -------
    RainLeft or None
        None where no rain on an outdoor pipe is declared, where it is declared whether the
        surface was wet, or where no heat balance is possible.

    Notes
    -----
    The heat through the lagging is that which the surface, taken as dry, gives off; the film
    lowers the temperature below the recorded one, and if the surface was wet when it was recorded
    less heat is found than there is: both lengthen the time. Sun, which would shorten it, is left
    out. The air may have been anywhere between its declared humidity and saturated.
    """
    conditions, flux = seen.conditions, seen.drawn.heat_flux
    if not had_rained(conditions) or conditions.surface_wet is not None or flux is None:
        return None
    frame, book = seen.frame, seen.book
    exchange = replace(
        seen.line_draws.exchange(frame, seen.diameter), absorbed_solar=np.zeros(frame.count)
    )
    least = frame.relative_humidity
    if least is None:
        least = np.full(frame.count, UNKNOWN_HUMIDITY)
    owner = f"frame:{seen.region.frame_id}"
    since = book.uniform(owner, "humidity_since_rain")
    seconds = drying_time(
        seen.mean_along(flux),
        exchange,
        relative_humidity=least + (1 - least) * since,
        film_thickness=frame.water.rain_film,
        film_emissivity=frame.water.total_emissivity,
    )
    needed = np.where(np.isnan(seconds), np.inf, seconds) / 3600
    wet = needed > _hours_since(seen, owner)
    return RainLeft(float(wet.mean()), float(np.median(needed)))


def _hours_since(seen: Seen, owner: str) -> FloatArray:
    declared = seen.conditions.hours_since_rain
    if declared is None:
        return DAY_HOURS * seen.book.uniform(owner, "hours_since_rain")
    return seen.book.quantity(owner, "hours_since_rain", declared)
