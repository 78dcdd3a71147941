"""Heat that vapour brings to a cold surface, and that water takes from a wet warm one.

All fluxes follow the sign of the heat balance: what the surface gives off is positive. Condensing
vapour and growing frost bring heat, a negative flux, on top of the convection of a chilled line.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.air import air_properties
from cladwatt.physics.constants import (
    MOLAR_GAS,
    MOLAR_MASS_WATER,
    STANDARD_PRESSURE,
    ZERO_CELSIUS,
)
from cladwatt.physics.humidity import (
    saturation_pressure_ice,
    saturation_pressure_water,
    vapour_pressure,
)
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "evaporation_heat_flux",
    "latent_heat",
    "latent_heat_flux",
    "lewis_number",
    "mass_transfer_coefficient",
    "surface_vapour_pressure",
    "vapour_diffusivity",
    "vapour_mass_flux",
]

_LEWIS_EXPONENT: Final = 2.0 / 3.0


def vapour_diffusivity(
    temperature: FloatLike, pressure: FloatLike = STANDARD_PRESSURE
) -> FloatArray:
    """Diffusivity of water vapour in air.

    Parameters
    ----------
    temperature : float or array
        Film temperature; NaN gives NaN. [K]
    pressure : float or array
        Absolute. [Pa]

    Returns
    -------
    array, broadcast shape
        0.2178e-4 (T / 273.15 K)^1.81 (101 325 Pa / p). [m2/s]

    Notes
    -----
    A fit to eleven sets of measurements, mostly between 0 and 100 °C, which scatter by 7 %.

    References
    ----------
    .. [1] Massman, *A review of the molecular diffusivities of H2O, CO2, ... in air, O2 and N2
       near STP*, Atmospheric Environment 32 (1998) 1111-1127.

    Examples
    --------
    >>> round(float(vapour_diffusivity(298.15)) * 1e4, 3)
    0.255
    """
    ratio = np.asarray(temperature, dtype=np.float64) / ZERO_CELSIUS
    return np.asarray(0.2178e-4 * ratio**1.81 * STANDARD_PRESSURE / pressure)


def lewis_number(temperature: FloatLike) -> FloatArray:
    """Thermal diffusivity of air over the diffusivity of vapour in it.

    Parameters
    ----------
    temperature : float or array
        Film temperature. [K]

    Returns
    -------
    array, same shape
        About 0.86; pressure cancels. [-]
    """
    air = air_properties(temperature)
    diffusivity = air.conductivity / (air.density * air.specific_heat)
    return np.asarray(diffusivity / vapour_diffusivity(temperature))


def mass_transfer_coefficient(
    convection_coefficient: FloatLike,
    film_temperature: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Mass transfer coefficient by analogy with heat transfer.

    Parameters
    ----------
    convection_coefficient : float or array
        Of heat, without radiation. [W/(m2 K)]
    film_temperature : float or array
        Between surface and air. [K]
    pressure : float or array
        Absolute. [Pa]

    Returns
    -------
    array, broadcast shape
        h / (rho c_p Le^(2/3)). [m/s]

    References
    ----------
    .. [1] Chilton, Colburn, *Mass transfer (absorption) coefficients*, Industrial and Engineering
       Chemistry 26 (1934) 1183-1187.
    .. [2] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, eq. 6.60.
    """
    air = air_properties(film_temperature, pressure)
    lewis = lewis_number(film_temperature) ** _LEWIS_EXPONENT
    return np.asarray(convection_coefficient / (air.density * air.specific_heat * lewis))


def surface_vapour_pressure(surface_temperature: FloatLike) -> FloatArray:
    """Vapour pressure over a wet surface: over water from 0 °C up, over ice below.

    Parameters
    ----------
    surface_temperature : float or array
        [K]

    Returns
    -------
    array, same shape
        [Pa]
    """
    surface = np.asarray(surface_temperature, dtype=np.float64)
    return np.where(
        surface < ZERO_CELSIUS, saturation_pressure_ice(surface), saturation_pressure_water(surface)
    )


def latent_heat(surface_temperature: FloatLike) -> FloatArray:
    """Heat set free where vapour becomes water, or below 0 °C ice, at a temperature.

    Parameters
    ----------
    surface_temperature : float or array
        -60 to 100 °C. [K]

    Returns
    -------
    array, same shape
        Of evaporation from 0 °C up, of sublimation below. [J/kg]

    Notes
    -----
    Up to 45 °C, beyond any dew point in the open, within 0.1 % of the equation of state; 0.2 %
    above it at 60 °C, 0.6 % at 100 °C.

    References
    ----------
    .. [1] ASHRAE Handbook, Fundamentals, chapter Psychrometrics: enthalpies of vapour
       2501 + 1.86 t, of water 4.186 t, of ice -333.4 + 2.1 t, in kJ/kg with t in °C.

    Examples
    --------
    >>> round(float(latent_heat(293.15)) / 1e3)
    2454
    """
    celsius = np.asarray(surface_temperature, dtype=np.float64) - ZERO_CELSIUS
    evaporation = 2501.0 + (1.86 - 4.186) * celsius
    sublimation = 2501.0 + 333.4 + (1.86 - 2.1) * celsius
    return np.asarray(1e3 * np.where(celsius < 0.0, sublimation, evaporation))


def vapour_mass_flux(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    relative_humidity: FloatLike,
    convection_coefficient: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Vapour leaving a wholly wet or iced surface; negative where it arrives.

    Parameters
    ----------
    surface_temperature : float or array
        Of the water or ice; NaN gives NaN. [K]
    air_temperature : float or array
        [K]
    relative_humidity : float or array
        Over liquid water, 0 <= value <= 1. [-]
    convection_coefficient : float or array
        Of heat, without radiation. [W/(m2 K)]
    pressure : float or array
        Absolute. [Pa]

    Returns
    -------
    array, broadcast shape
        NaN where the water would boil. [kg/(m2 s)]

    Raises
    ------
    InputError
        If the humidity is outside 0 to 1 or a convection coefficient negative.

    Notes
    -----
    h_m M/(R T_film) p ln((p - e_air) / (p - e_surface)): diffusion through stagnant air, which for
    small vapour pressures is their difference times h_m M/(R T). The film's own resistance to
    conduction, dripping, and what rime does to the roughness are neglected.

    References
    ----------
    .. [1] Bird, Stewart, Lightfoot, *Transport Phenomena*, 2nd edition, Wiley, 2002, section 18.2
       (diffusion through a stagnant gas film).
    """
    surface = np.asarray(surface_temperature, dtype=np.float64)
    if np.any(np.asarray(convection_coefficient) < 0):
        raise InputError(
            f"convection coefficient is {np.min(convection_coefficient):g} W/(m2 K); "
            "expected 0 or more"
        )
    film = 0.5 * (surface + air_temperature)
    transfer = mass_transfer_coefficient(convection_coefficient, film, pressure)
    air_side = np.asarray(pressure - vapour_pressure(air_temperature, relative_humidity))
    surface_side = np.asarray(pressure - surface_vapour_pressure(surface))
    possible = (surface_side > 0.0) & (air_side > 0.0)
    ratio = np.where(possible, air_side, np.nan) / np.where(possible, surface_side, 1.0)
    driving = pressure * np.log(ratio)
    return np.asarray(transfer * MOLAR_MASS_WATER / (MOLAR_GAS * film) * driving)


def latent_heat_flux(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    relative_humidity: FloatLike,
    convection_coefficient: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Heat given off as vapour condenses or is deposited on a surface: zero or negative.

    Parameters
    ----------
    surface_temperature, air_temperature, relative_humidity, convection_coefficient, pressure
        As for `vapour_mass_flux`.

    Returns
    -------
    array, broadcast shape
        Negative where the surface is below the dew point, or below 0 °C and below the frost
        point; zero elsewhere, a dry surface; NaN where an input is NaN. [W/m2]

    Raises
    ------
    InputError
        As `vapour_mass_flux`.

    Notes
    -----
    In ordinary humid air it is about as much again as convection. The analogy holds to some
    10 %, less well on drops and rime (assumption, no source); add it to the uncertainty of the
    convection coefficient it rests on.

    Examples
    --------
    A line at 5 °C in air of 25 °C and 65 %: convection brings 100 W/m2, condensation as much.

    >>> flux = latent_heat_flux(278.15, air_temperature=298.15, relative_humidity=0.65,
    ...                         convection_coefficient=5.0)
    >>> round(float(flux))
    -101
    """
    mass = vapour_mass_flux(
        surface_temperature,
        air_temperature=air_temperature,
        relative_humidity=relative_humidity,
        convection_coefficient=convection_coefficient,
        pressure=pressure,
    )
    # water about to boil gives mass off; a dry surface at that temperature gives none
    boiling = surface_vapour_pressure(surface_temperature) >= pressure
    return np.asarray(
        np.where(boiling, 0.0, np.minimum(mass, 0.0) * latent_heat(surface_temperature))
    )


def evaporation_heat_flux(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    relative_humidity: FloatLike,
    convection_coefficient: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Heat that water evaporating from a wholly wet surface would take: zero or positive.

    Parameters
    ----------
    surface_temperature, air_temperature, relative_humidity, convection_coefficient, pressure
        As for `vapour_mass_flux`.

    Returns
    -------
    array, broadcast shape
        Zero below the dew point; NaN where the water would boil. [W/m2]

    Raises
    ------
    InputError
        As `vapour_mass_flux`.

    Notes
    -----
    How large the error is that a wet surface makes, not a correction for it: how much of a
    surface is wet, and since when, no image tells.
    """
    mass = vapour_mass_flux(
        surface_temperature,
        air_temperature=air_temperature,
        relative_humidity=relative_humidity,
        convection_coefficient=convection_coefficient,
        pressure=pressure,
    )
    return np.asarray(np.maximum(mass, 0.0) * latent_heat(surface_temperature))
