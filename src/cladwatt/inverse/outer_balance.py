"""What leaves a surface altogether: the dry balance, condensing vapour and its film of water."""

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.physics.condensation import latent_heat_flux
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.radiation import radiative_flux
from cladwatt.physics.surface_balance import (
    SurfaceExchange,
    surface_coefficients,
    surface_heat_flux,
)
from cladwatt.types import FloatArray, FloatLike

__all__ = ["FILM_SPAN", "WATER_EMISSIVITY", "may_condense", "outer_flux", "wetted_emissivity"]

WATER_EMISSIVITY = 0.96
"""Total, of a film of water; ice and frost 0.95 to 0.98 (Incropera et al., table A.11). [-]"""
FILM_SPAN = 0.5
"""How far below the dew point a surface is wet all over; assumption. [K]"""


def may_condense(frame: FrameDraws, line: LineDraws) -> bool:
    """Return whether the line is so cold that vapour may condense on its cladding."""
    dew, inside = frame.dew_point, line.inside_temperature
    if dew is None or inside is None:
        return False
    return bool(np.median(inside) < np.percentile(dew, 97.5))


def outer_flux(
    surface_temperature: FloatArray,
    exchange: SurfaceExchange,
    relative_humidity: FloatArray | None,
) -> FloatArray:
    """Return the heat that leaves a surface; negative where it takes heat up.

    Parameters
    ----------
    surface_temperature : array
        [K]
    exchange : SurfaceExchange
        Broadcasting with it.
    relative_humidity : array or None
        Broadcasting too; None where vapour cannot condense.

    Returns
    -------
    array, broadcast shape
        Convection, radiation, less sun, and with the latent heat of what condenses. Below the dew
        point the surface radiates as the film of water on it does. [W/m2]
    """
    flux = surface_heat_flux(surface_temperature, exchange)
    if relative_humidity is None:
        return flux
    convection, _ = surface_coefficients(surface_temperature, exchange)
    latent = latent_heat_flux(
        np.clip(surface_temperature, 233.15, 372.0),
        air_temperature=exchange.air_temperature,
        relative_humidity=relative_humidity,
        convection_coefficient=convection,
        pressure=exchange.pressure,
    )
    wetted = wetted_emissivity(surface_temperature, exchange, relative_humidity)
    film = radiative_flux(
        surface_temperature,
        emissivity=wetted - exchange.total_emissivity,
        surroundings_temperature=exchange.surroundings_temperature,
    )
    return np.asarray(flux + latent + film)


def wetted_emissivity(
    surface_temperature: FloatLike, exchange: SurfaceExchange, relative_humidity: FloatArray
) -> FloatArray:
    """Return the total emissivity with what has condensed: the film's below the dew point.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    exchange : SurfaceExchange
    relative_humidity : array

    Returns
    -------
    array, broadcast shape
        The cladding's down to the dew point, a film of water's from `FILM_SPAN` below it, linear
        between; the cladding's where that is higher. [-]
    """
    dew = dew_point(exchange.air_temperature, np.clip(relative_humidity, 0.01, 1.0))
    covered = np.clip((dew - np.asarray(surface_temperature)) / FILM_SPAN, 0.0, 1.0)
    dry = np.asarray(exchange.total_emissivity)
    return np.asarray(dry + covered * np.maximum(WATER_EMISSIVITY - dry, 0.0))
