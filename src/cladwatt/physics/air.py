"""Dry air at film temperature, and the standard atmosphere's pressure at altitude."""

from typing import Final, NamedTuple

import numpy as np

from cladwatt.physics.constants import GRAVITY, STANDARD_PRESSURE
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "AIR_TEMPERATURE_RANGE",
    "AirProperties",
    "air_properties",
    "pressure_at_altitude",
]

#: Temperatures for which `air_properties` stays within 0.7 % of the reference equations. [K]
AIR_TEMPERATURE_RANGE: Final = (150.0, 900.0)

_GAS_CONSTANT: Final = 287.05  # dry air, J/(kg K)

# Ascending coefficients in T / 300 K.
_VISCOSITY: Final = (0.0852162e-6, 23.6032e-6, -6.46123e-6, 1.45092e-6, -0.142925e-6)
_CONDUCTIVITY: Final = (-0.644618e-3, 33.1403e-3, -7.65332e-3, 1.70614e-3, -0.166393e-3)
_SPECIFIC_HEAT: Final = (1039.78, -79.0572, 44.4268, 3.20166, -2.11873)


class AirProperties(NamedTuple):
    """Transport properties of dry air, each shaped like the broadcast inputs.

    Parameters
    ----------
    density : array
        [kg/m3]
    specific_heat : array
        At constant pressure. [J/(kg K)]
    dynamic_viscosity : array
        [Pa s]
    kinematic_viscosity : array
        [m2/s]
    conductivity : array
        [W/(m K)]
    prandtl : array
        [-]
    expansion : array
        Volumetric expansion coefficient of the ideal gas, 1/T. [1/K]
    """

    density: FloatArray
    specific_heat: FloatArray
    dynamic_viscosity: FloatArray
    kinematic_viscosity: FloatArray
    conductivity: FloatArray
    prandtl: FloatArray
    expansion: FloatArray


def air_properties(
    temperature: FloatLike, pressure: FloatLike = STANDARD_PRESSURE
) -> AirProperties:
    """Properties of dry air near atmospheric pressure.

    Parameters
    ----------
    temperature : float or array
        Air temperature; for convection the film temperature. NaN gives NaN. [K]
    pressure : float or array
        Absolute pressure, broadcast against `temperature`. [Pa]

    Returns
    -------
    AirProperties
        Arrays of the broadcast shape (viscosity, conductivity and heat capacity of the
        temperature's shape: they do not depend on pressure here).

    Notes
    -----
    Quartics in T/300 K fitted to the reference equations [1]_ [2]_; density by the ideal gas law.
    Between 230 and 800 K all four are within 0.15 % of them, between 150 and 900 K within 0.7 %.
    Humidity is neglected.

    References
    ----------
    .. [1] Lemmon, Jacobsen, *Viscosity and thermal conductivity equations for nitrogen, oxygen,
       argon and air*, Int. J. Thermophysics 25 (2004) 21-69.
    .. [2] Lemmon, Jacobsen, Penoncello, Friend, *Thermodynamic properties of air*,
       J. Phys. Chem. Ref. Data 29 (2000) 331-385.

    Examples
    --------
    >>> round(float(air_properties(300.0).kinematic_viscosity) * 1e6, 2)
    15.75
    """
    kelvin = np.asarray(temperature, dtype=np.float64)
    reduced = kelvin / 300.0
    viscosity = _quartic(reduced, _VISCOSITY)
    conductivity = _quartic(reduced, _CONDUCTIVITY)
    specific_heat = _quartic(reduced, _SPECIFIC_HEAT)
    density = np.asarray(pressure, dtype=np.float64) / (_GAS_CONSTANT * kelvin)
    return AirProperties(
        density=density,
        specific_heat=specific_heat,
        dynamic_viscosity=viscosity,
        kinematic_viscosity=viscosity / density,
        conductivity=conductivity,
        prandtl=specific_heat * viscosity / conductivity,
        expansion=1.0 / kelvin,
    )


def pressure_at_altitude(altitude: FloatLike) -> FloatArray:
    """Air pressure of the standard atmosphere at a height above sea level.

    Parameters
    ----------
    altitude : float or array
        Geometric height above mean sea level, -5000 to 11000. [m]

    Returns
    -------
    array
        Absolute pressure. [Pa]

    Notes
    -----
    Lapse rate 6.5 K/km from 288.15 K at sea level.

    References
    ----------
    .. [1] ISO 2533:1975, *Standard atmosphere*; the same troposphere as in the *U.S. Standard
       Atmosphere*, 1976.

    Examples
    --------
    >>> round(float(pressure_at_altitude(1000.0)))
    89876
    """
    height = np.asarray(altitude, dtype=np.float64)
    lapse_rate, sea_level_temperature, earth_radius = 0.0065, 288.15, 6_356_766.0
    geopotential = earth_radius * height / (earth_radius + height)
    exponent = GRAVITY / (287.05287 * lapse_rate)
    ratio = 1.0 - lapse_rate * geopotential / sea_level_temperature
    return np.asarray(STANDARD_PRESSURE * ratio**exponent)


def _quartic(x: FloatArray, coefficients: tuple[float, ...]) -> FloatArray:
    c0, c1, c2, c3, c4 = coefficients
    return c0 + x * (c1 + x * (c2 + x * (c3 + x * c4)))
