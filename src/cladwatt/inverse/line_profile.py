"""A region's draws put into bins along its line, where its station is declared."""

import numpy as np

from cladwatt.inverse.result import LineProfile
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import outside_film
from cladwatt.types import FloatArray

__all__ = ["BIN", "line_profile"]

BIN = 0.1
"""Length of a bin, counted from station 0 so that those of all frames fall together. [m]"""


def line_profile(
    seen: Seen, loss: FloatArray | None, mean_loss: FloatArray | None
) -> LineProfile | None:
    """Return a region's draws along its line.

    Parameters
    ----------
    seen : Seen
    loss : (count, n_stations) array or None
        NaN in gaps. [W/m]
    mean_loss : (count,) array or None
        The region's loss per metre, held to what is possible. [W/m]

    Returns
    -------
    LineProfile or None
        None where no station is declared, or no loss per metre known. That a region begins at
        station 0 by default says nothing of where it lies.
    """
    strip = seen.strip
    if seen.region.start is None or loss is None or mean_loss is None:
        return None
    if not np.isfinite(strip.station).all():
        return None
    low, high = strip.station - strip.length / 2, strip.station + strip.length / 2
    first = int(np.floor(low.min() / BIN + 1e-9))
    last = int(np.ceil(high.max() / BIN - 1e-9))
    within = _within(low, high, BIN * np.arange(first, max(last, first + 1) + 1, dtype=np.float64))
    pipe = np.where(seen.component_at, 0.0, 1.0) @ within
    usable = within * (seen.usable & ~seen.component_at)[:, None]
    number = usable.sum(axis=0)
    share = usable / np.where(number > 0, number, 1.0)
    binned = np.where(seen.usable, loss, 0.0) @ share
    if number.sum() > 0:
        binned += (mean_loss - binned @ (number / number.sum()))[:, None]
    binned = np.where(number > 0, binned, mean_loss[:, None])
    return LineProfile(
        first=first,
        low=float(low.min()),
        high=float(high.max()),
        loss=binned,
        conductance=_conductance(seen, binned, share, number > 0),
        metres=pipe,
        seen=number,
    )


def _within(low: FloatArray, high: FloatArray, edges: FloatArray) -> FloatArray:
    """Return how many metres of each station lie in each bin, (n_stations, n_bins)."""
    top = np.minimum(high[:, None], edges[None, 1:])
    return np.asarray(np.maximum(top - np.maximum(low[:, None], edges[None, :-1]), 0.0))


def _conductance(
    seen: Seen, loss: FloatArray, share: FloatArray, known: FloatArray
) -> FloatArray | None:
    """Return the lagging's conductance; NaN where the surface is beyond the fluid."""
    line = seen.line_draws
    if line.inside_temperature is None:
        return None
    surface = np.where(seen.usable, seen.drawn.surface_temperature, 0.0) @ share
    drop = line.inside_temperature[:, None] - surface
    towards = np.sign(line.inside_temperature - seen.frame.air_temperature)[:, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        found = np.where(drop * towards > 0, np.maximum(loss / drop, 0.0), np.nan)
        found = outside_film(found, line)
    return np.asarray(np.where(known, found, np.nan))
