"""How long a thin film of rain stays on a warm surface.

The water cools what it lies on. So the surface is balanced with its film: what comes from inside
goes to the air, to the surroundings and into vapour.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Final, NamedTuple

import numpy as np

from cladwatt.physics.condensation import latent_heat, vapour_mass_flux
from cladwatt.physics.surface_balance import (
    SurfaceExchange,
    surface_coefficients,
    surface_heat_flux,
)
from cladwatt.types import FloatArray, FloatLike

__all__ = ["WATER_DENSITY", "WetSurface", "drying_time", "wet_surface"]

#: Of liquid water; 0.4 % less at 30 °C. [kg/m3]
WATER_DENSITY: Final = 1000.0

_COLDEST: Final = 213.15  # K, where the vapour pressure over ice still holds
_HOTTEST: Final = 371.0  # K, short of boiling
_HALVINGS: Final = 28


class WetSurface(NamedTuple):
    """A wholly wet surface in balance; arrays of the broadcast shape.

    Parameters
    ----------
    temperature : array
        [K]
    evaporation : array
        Water that leaves it, negative where vapour condenses. [kg/(m2 s)]
    """

    temperature: FloatArray
    evaporation: FloatArray


def wet_surface(
    heat_flux: FloatLike, exchange: SurfaceExchange, *, relative_humidity: FloatLike
) -> WetSurface:
    """Temperature and evaporation of a wholly wet surface that is given a heat flux from inside.

    Parameters
    ----------
    heat_flux : float or array
        Through the lagging, to the surface. [W/m2]
    exchange : SurfaceExchange
        Its total emissivity is that of what the water shows.
    relative_humidity : float or array
        Of the air, 0 to 1. [-]

    Returns
    -------
    WetSurface
        The temperature is held between -60 and 98 °C. NaN where an input is NaN.

    Raises
    ------
    InputError
        If the humidity is outside 0 to 1.

    Notes
    -----
    The three fluxes rise with the temperature, so there is one root, found by halving. Without
    heat from inside and radiation it is the wet-bulb temperature of a psychrometer.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 6.7.2 (evaporative cooling).
    """
    flux = np.asarray(heat_flux, dtype=np.float64)
    humidity = np.asarray(relative_humidity, dtype=np.float64)
    shape = np.broadcast_shapes(
        flux.shape, humidity.shape, np.shape(surface_heat_flux(300.0, exchange))
    )
    lower, upper = np.full(shape, _COLDEST), np.full(shape, _HOTTEST)
    for _ in range(_HALVINGS):
        middle = 0.5 * (lower + upper)
        evaporation = _evaporation(middle, exchange, humidity)
        gives = surface_heat_flux(middle, exchange) + evaporation * latent_heat(middle)
        colder = gives > flux
        lower, upper = np.where(colder, lower, middle), np.where(colder, middle, upper)
    unknown = np.isnan(gives + flux)
    temperature = np.where(unknown, np.nan, 0.5 * (lower + upper))
    return WetSurface(temperature, _evaporation(temperature, exchange, humidity))


def _evaporation(
    temperature: FloatArray, exchange: SurfaceExchange, humidity: FloatArray
) -> FloatArray:
    convection, _ = surface_coefficients(temperature, exchange)
    return vapour_mass_flux(
        temperature,
        air_temperature=exchange.air_temperature,
        relative_humidity=humidity,
        convection_coefficient=convection,
        pressure=exchange.pressure,
    )


def drying_time(
    heat_flux: FloatLike,
    exchange: SurfaceExchange,
    *,
    relative_humidity: FloatLike,
    film_thickness: FloatLike,
    film_emissivity: FloatLike,
) -> FloatArray:
    """Time in which a film of water dries off a surface.

    Parameters
    ----------
    heat_flux, relative_humidity : float or array
        As for `wet_surface`.
    exchange : SurfaceExchange
        Of the dry surface; under the film the larger emissivity counts.
    film_thickness : float or array
        Of the water that has not run off, 0 or more. [m]
    film_emissivity : float or array
        Total, of water. [-]

    Returns
    -------
    array, broadcast shape
        Infinite where nothing evaporates, NaN where an input is NaN. [s]

    Notes
    -----
    The air stays as it is, and the film covers the surface until it is gone: water draws together
    in drops and hangs from the underside, where it stays longer.

    Examples
    --------
    A fifth of a millimetre on cladding that gives off 100 W/m2 into calm air at 10 °C and 80 %:

    >>> calm = SurfaceExchange(283.15, 283.15, 0.5, 0.2, 0.9)
    >>> round(float(drying_time(100.0, calm, relative_humidity=0.8, film_thickness=2e-4,
    ...                         film_emissivity=0.96)) / 3600, 1)
    2.4
    """
    emissivity = np.maximum(exchange.total_emissivity, film_emissivity)
    wet = replace(exchange, total_emissivity=emissivity)
    leaving = wet_surface(heat_flux, wet, relative_humidity=relative_humidity).evaporation
    water = WATER_DENSITY * np.asarray(film_thickness, dtype=np.float64)
    dries = leaving > 0.0
    time = np.where(dries, water / np.where(dries, leaving, 1.0), np.inf)
    return np.asarray(np.where(np.isnan(leaving), np.nan, time))
