"""What fluid, air and surroundings can do at all: bounds for every draw."""

from typing import NamedTuple

import numpy as np

from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.seen import Seen
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Bounds", "flux_bounds"]


class Bounds(NamedTuple):
    """Bounds of the mean flux, each (count,). [W/m2]"""

    low: FloatArray
    high: FloatArray

    def beyond(self, flux: FloatArray) -> float:
        """Return the share of draws outside, NaN counted as outside."""
        return float(np.mean(~((flux >= self.low) & (flux <= self.high))))

    def filled(self, flux: FloatArray, usable: BoolArray) -> FloatArray:
        """Return draws along a strip with impossible ones (NaN) at the lower bound.

        A draw whose emissivity and reflected radiance leave no positive radiance says that the
        surface is as cold as it can be. NaN stays in gaps, and where there is no bound the
        smallest draw of the station stands in.
        """
        smallest = np.min(np.where(np.isfinite(flux), flux, np.inf), axis=0)
        low = np.where(np.isfinite(self.low)[:, None], self.low[:, None], smallest)
        return np.asarray(np.where(np.isfinite(flux) | ~usable, flux, low))

    def applied(self, flux: FloatArray) -> FloatArray:
        """Return the draws moved to the nearest bound.

        Moving rather than dropping keeps them in step with the draws of other regions.
        """
        return np.asarray(np.clip(np.where(np.isfinite(flux), flux, self.low), self.low, self.high))


def flux_bounds(seen: Seen) -> Bounds:
    """Return the bounds of a region's mean flux.

    Parameters
    ----------
    seen : Seen
        With known wind.

    Returns
    -------
    Bounds
        A line warmer than everything outside cannot take heat up through its lagging, nor lose
        more than with its surface at the fluid's temperature; one colder than everything the
        other way round. Sun moves the first bound by what it brings. Beside a tracer more can leave
        than at the fluid's temperature: up to what leaves at the tracer's, where that is declared.
    """
    inside = seen.line_draws.inside_temperature
    unbounded = np.full(seen.book.count, np.inf)
    if inside is None:
        return Bounds(-unbounded, unbounded)
    exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
    bare = outer_flux(inside, exchange, seen.vapour)
    sun = np.asarray(exchange.absorbed_solar)
    air, surroundings = seen.frame.air_temperature, seen.frame.surroundings_temperature
    hot = inside >= np.maximum(air, surroundings)
    cold = inside <= np.minimum(air, surroundings)
    low = np.where(hot, -sun, -unbounded)
    high = np.where(hot, np.maximum(bare, 0.0), unbounded)
    low = np.where(cold, np.minimum(bare, 0.0), low)
    high = np.where(cold, 0.0, high)
    tracer = seen.line.tracing
    if tracer.kind != "none":
        high = unbounded
        if tracer.temperature is not None:
            hottest = np.maximum(inside, tracer.temperature.value + 2 * tracer.temperature.u)
            high = np.maximum(outer_flux(hottest, exchange, seen.vapour), 0.0)
    return Bounds(low, high)
