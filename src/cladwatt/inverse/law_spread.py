"""How far the convection law may be off at one region: its own size, temperature, slope, wind."""

from dataclasses import fields, replace
from typing import Any

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.physics.convection_spread import correlation_spread
from cladwatt.physics.surface_balance import SurfaceExchange
from cladwatt.types import FloatArray

__all__ = ["at_medians", "with_own_spread"]


def with_own_spread(
    frame: FrameDraws, line: LineDraws, diameter: FloatArray, surface_temperature: FloatArray
) -> FrameDraws:
    """Return the frame's draws with the convection law as uncertain as it is here.

    Parameters
    ----------
    frame : FrameDraws
    line : LineDraws
    diameter : (count,) array
        Of the surface. [m]
    surface_temperature : (count,) array
        About that of the surface; its median counts, as of all but the wind, which may lie on
        either side of still air. NaN where a draw leaves no radiance. [K]

    Returns
    -------
    FrameDraws
        The factor stays log-normal about 1 and on the same draws: what is off for one region is
        off for all of them, each by its own size.
    """
    if frame.wind_speed is None or not np.isfinite(surface_temperature).any():
        return frame
    exchange = line.exchange(frame, diameter)
    sigma = correlation_spread(
        float(np.nanmedian(surface_temperature)),
        replace(at_medians(exchange), wind_speed=exchange.wind_speed),
    )
    return replace(frame, convection_factor=frame.convection_factor ** (sigma / frame.law_sigma))


def at_medians(exchange: SurfaceExchange) -> SurfaceExchange:
    """Return what a surface exchanges heat with, every quantity at the median of its draws.

    Parameters
    ----------
    exchange : SurfaceExchange
        Of arrays (count,).
    """
    drawn: dict[str, Any] = {
        field.name: float(np.median(value))
        for field in fields(exchange)
        if isinstance(value := getattr(exchange, field.name), np.ndarray)
    }
    return replace(exchange, **drawn)
