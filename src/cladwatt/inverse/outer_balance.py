"""What leaves a surface altogether: the dry balance, condensing vapour and its film of water."""

from typing import NamedTuple

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

__all__ = ["Vapour", "may_condense", "outer_flux", "vapour_of", "wetted_emissivity"]


class Vapour(NamedTuple):
    """Vapour that may condense on a surface, and the film it leaves; all broadcast together."""

    relative_humidity: FloatArray
    film_emissivity: FloatLike
    """Total, of the film. [-]"""
    film_span: FloatLike
    """How far below the dew point the surface is wet all over. [K]"""

    def beside(self) -> "Vapour":
        """Return it with its draws along the first of three axes."""
        return Vapour(*(np.reshape(part, (-1, 1, 1)) for part in self))


def may_condense(frame: FrameDraws, line: LineDraws) -> bool:
    """Return whether the line is so cold that vapour may condense on its cladding."""
    dew, inside = frame.dew_point, line.inside_temperature
    if dew is None or inside is None:
        return False
    return bool(np.median(inside) < np.percentile(dew, 97.5))


def vapour_of(frame: FrameDraws, line: LineDraws) -> Vapour | None:
    """Return the vapour that may condense on a line, each part (count,); None where none may."""
    if frame.relative_humidity is None or not may_condense(frame, line):
        return None
    water = frame.water
    return Vapour(frame.relative_humidity, water.total_emissivity, water.span)


def outer_flux(
    surface_temperature: FloatArray, exchange: SurfaceExchange, vapour: Vapour | None
) -> FloatArray:
    """Return the heat that leaves a surface; negative where it takes heat up.

    Parameters
    ----------
    surface_temperature : array
        [K]
    exchange : SurfaceExchange
        Broadcasting with it.
    vapour : Vapour or None
        Broadcasting too; None where none can condense.

    Returns
    -------
    array, broadcast shape
        Convection, radiation, less sun, and with the latent heat of what condenses. Below the dew
        point the surface radiates as the film of water on it does. [W/m2]
    """
    flux = surface_heat_flux(surface_temperature, exchange)
    if vapour is None:
        return flux
    convection, _ = surface_coefficients(surface_temperature, exchange)
    latent = latent_heat_flux(
        np.clip(surface_temperature, 233.15, 372.0),
        air_temperature=exchange.air_temperature,
        relative_humidity=vapour.relative_humidity,
        convection_coefficient=convection,
        pressure=exchange.pressure,
    )
    wetted = wetted_emissivity(surface_temperature, exchange, vapour)
    film = radiative_flux(
        surface_temperature,
        emissivity=wetted - exchange.total_emissivity,
        surroundings_temperature=exchange.surroundings_temperature,
    )
    return np.asarray(flux + latent + film)


def wetted_emissivity(
    surface_temperature: FloatLike, exchange: SurfaceExchange, vapour: Vapour
) -> FloatArray:
    """Return the total emissivity with what has condensed: the film's below the dew point.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    exchange : SurfaceExchange
    vapour : Vapour

    Returns
    -------
    array, broadcast shape
        The cladding's down to the dew point, the film's from its span below it, linear between;
        the cladding's where that is higher. [-]
    """
    dew = dew_point(exchange.air_temperature, np.clip(vapour.relative_humidity, 0.01, 1.0))
    covered = np.clip((dew - np.asarray(surface_temperature)) / vapour.film_span, 0.0, 1.0)
    dry = np.asarray(exchange.total_emissivity)
    return np.asarray(dry + covered * np.maximum(vapour.film_emissivity - dry, 0.0))
