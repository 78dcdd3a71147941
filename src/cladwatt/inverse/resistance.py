"""The lagging's resistance as found, specified and declared, and the conductivity it acts as."""

from typing import NamedTuple

import numpy as np

from cladwatt.inverse.result import Interval, interval_of
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws, outside_film
from cladwatt.types import FloatArray

__all__ = ["Resistances", "resistances_of"]


class Resistances(NamedTuple):
    """Intervals; None where unknown. [m K/W], [-] and [W/(m K)]"""

    found: Interval | None = None
    specified: Interval | None = None
    ratio: Interval | None = None
    effective_conductivity: Interval | None = None
    declared: Interval | None = None


def resistances_of(seen: Seen, loss: FloatArray | None, sound: SoundDraws | None) -> Resistances:
    """Return resistance, specified resistance, their ratio, and the effective conductivity.

    Carried as conductances, since a loss may be zero, and turned over as quantiles. A draw with
    no loss, or one against the fluid, is a conductance of nothing and stays among them; only
    draws with the surface beyond the fluid's temperature tell nothing and are left out.
    """
    line = seen.line_draws
    if loss is None or line.inside_temperature is None:
        return Resistances()
    drop = line.inside_temperature - seen.mean_along(seen.drawn.surface_temperature)
    towards = np.sign(line.inside_temperature - seen.frame.air_temperature)
    with np.errstate(divide="ignore", invalid="ignore"):
        conductance = np.where(drop * towards > 0, np.maximum(loss / drop, 0.0), np.nan)
        conductance = outside_film(conductance, line)
    specified = None if sound is None else sound.specified_resistance
    effective = None
    if line.pipe_diameter is not None and line.lagged_diameter is not None:
        lagging = line.lagged_diameter - 2 * seen.line.cladding.thickness.value
        shape = np.log(np.maximum(lagging / line.pipe_diameter, 1.0)) / (2 * np.pi)
        effective = interval_of(conductance * shape)
    return Resistances(
        found=_reciprocal(interval_of(conductance)),
        specified=None if specified is None else interval_of(specified),
        ratio=None if specified is None else _reciprocal(interval_of(conductance * specified)),
        effective_conductivity=effective,
        declared=(
            None
            if sound is None or sound.declared_resistance is None
            else interval_of(sound.declared_resistance)
        ),
    )


def _reciprocal(interval: Interval) -> Interval:
    """Turn the interval of a conductance into that of a resistance."""
    with np.errstate(divide="ignore"):
        low, median, high = (
            float(np.divide(1.0, max(value, 0.0)))
            for value in (interval.high, interval.median, interval.low)
        )
    return Interval(median, low, high)
