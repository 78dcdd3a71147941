"""Moist air: saturation pressure, dew point, frost point, absolute humidity.

Relative humidity is taken over liquid water at all temperatures, as meteorology does (WMO-No. 8);
handbooks of air conditioning take it over ice below 0 °C. Pressures are those of pure vapour: the
enhancement by the air, about 0.4 %, is left out and cancels in a dew point.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.constants import MOLAR_GAS, MOLAR_MASS_WATER, ZERO_CELSIUS
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "absolute_humidity",
    "dew_point",
    "dew_point_from_vapour_pressure",
    "frost_point",
    "frost_point_from_vapour_pressure",
    "saturation_pressure_ice",
    "saturation_pressure_magnus",
    "saturation_pressure_water",
    "vapour_pressure",
]

# ln p = sum of c_i T^i, i = -1 .. 4, + c ln T; p in Pa, T in K (ASHRAE Fundamentals, chapter 1,
# after Hyland and Wexler 1983).
_OVER_WATER: Final = (
    (-5.8002206e3, 1.3914993, -4.8640239e-2, 4.1764768e-5, -1.4452093e-8, 0.0),
    6.5459673,
)
_OVER_ICE: Final = (
    (-5.6745359e3, 6.3925247, -9.6778430e-3, 6.2215701e-7, 2.0747825e-9, -9.4840240e-13),
    4.1635019,
)
_NEWTON_STEPS: Final = 6


def _logarithm(
    coefficients: tuple[tuple[float, ...], float], temperature: FloatLike
) -> tuple[FloatArray, FloatArray]:
    """Return ln p and its derivative with respect to temperature."""
    kelvin = np.asarray(temperature, dtype=np.float64)
    (c_inverse, c0, c1, c2, c3, c4), c_log = coefficients
    value = c_inverse / kelvin + c0 + kelvin * (c1 + kelvin * (c2 + kelvin * (c3 + kelvin * c4)))
    slope = -c_inverse / kelvin**2 + c1 + kelvin * (2 * c2 + kelvin * (3 * c3 + kelvin * 4 * c4))
    return np.asarray(value + c_log * np.log(kelvin)), np.asarray(slope + c_log / kelvin)


def saturation_pressure_water(temperature: FloatLike) -> FloatArray:
    """Saturation pressure of vapour over liquid water, supercooled below 0 °C.

    Parameters
    ----------
    temperature : float or array
        Temperature, 233 K to 473 K; NaN stays NaN. [K]

    Returns
    -------
    array, same shape
        Pressure. [Pa]

    Notes
    -----
    Published for 0 °C to 200 °C; below, it continues within 1 % of the Magnus form of WMO-No. 8
    down to -40 °C.

    References
    ----------
    .. [1] ASHRAE Handbook, Fundamentals, chapter Psychrometrics, after R. W. Hyland and
       A. Wexler, ASHRAE Transactions 89(2A), 1983.
    """
    return np.exp(_logarithm(_OVER_WATER, temperature)[0])


def saturation_pressure_ice(temperature: FloatLike) -> FloatArray:
    """Saturation pressure of vapour over ice.

    Parameters
    ----------
    temperature : float or array
        Temperature, 173 K to 273 K; NaN stays NaN. [K]

    Returns
    -------
    array, same shape
        Pressure. [Pa]

    References
    ----------
    .. [1] As `saturation_pressure_water`, range -100 °C to 0 °C.
    """
    return np.exp(_logarithm(_OVER_ICE, temperature)[0])


def saturation_pressure_magnus(temperature: FloatLike) -> FloatArray:
    """Saturation pressure over liquid water by the Magnus form; simpler, for comparison.

    Parameters
    ----------
    temperature : float or array
        Temperature, 228 K to 333 K. [K]

    Returns
    -------
    array, same shape
        Pressure. [Pa]

    References
    ----------
    .. [1] WMO-No. 8, Guide to Instruments and Methods of Observation, volume I, annex 4.B.
    """
    celsius = np.asarray(temperature, dtype=np.float64) - ZERO_CELSIUS
    return np.asarray(611.2 * np.exp(17.62 * celsius / (243.12 + celsius)))


def vapour_pressure(air_temperature: FloatLike, relative_humidity: FloatLike) -> FloatArray:
    """Partial pressure of the vapour in the air.

    Parameters
    ----------
    air_temperature : float or array
        Air temperature. [K]
    relative_humidity : float or array
        Relative humidity over liquid water, 0 <= value <= 1. [-]

    Returns
    -------
    array, broadcast shape
        Pressure. [Pa]

    Raises
    ------
    InputError
        If the humidity is outside [0, 1].
    """
    humidity = np.asarray(relative_humidity, dtype=np.float64)
    wrong = (humidity < 0) | (humidity > 1)
    if np.any(wrong):
        shown = float(humidity[wrong].ravel()[0]) if humidity.ndim else float(humidity)
        raise InputError(f"relative humidity is {shown:g}; expected 0 <= value <= 1, not percent")
    return np.asarray(humidity * saturation_pressure_water(air_temperature))


def _saturation_temperature(
    pressure: FloatLike, coefficients: tuple[tuple[float, ...], float]
) -> FloatArray:
    """Return the temperature of saturation by Newton in ln p, nearly straight in 1/T."""
    vapour = np.asarray(pressure, dtype=np.float64)
    target = np.log(np.where(vapour > 0.0, vapour, np.nan))
    inverse = np.full_like(target, 1.0 / ZERO_CELSIUS)
    for _ in range(_NEWTON_STEPS):
        value, slope = _logarithm(coefficients, 1.0 / inverse)
        inverse = inverse - (target - value) * inverse**2 / slope
    return np.asarray(1.0 / inverse)


def dew_point_from_vapour_pressure(pressure: FloatLike) -> FloatArray:
    """Temperature at which vapour of this pressure condenses as water.

    Parameters
    ----------
    pressure : float or array
        Vapour pressure; NaN stays NaN. [Pa]

    Returns
    -------
    array, same shape
        Dew point; NaN where there is no vapour. [K]
    """
    return _saturation_temperature(pressure, _OVER_WATER)


def frost_point_from_vapour_pressure(pressure: FloatLike) -> FloatArray:
    """Temperature at which vapour of this pressure is deposited as ice.

    Parameters
    ----------
    pressure : float or array
        Vapour pressure; NaN stays NaN. [Pa]

    Returns
    -------
    array, same shape
        Frost point; meaningful up to 273.16 K; NaN where there is no vapour. [K]
    """
    return _saturation_temperature(pressure, _OVER_ICE)


def dew_point(air_temperature: FloatLike, relative_humidity: FloatLike) -> FloatArray:
    """Dew point of the air, over liquid water also below 0 °C.

    Parameters
    ----------
    air_temperature : float or array
        Air temperature. [K]
    relative_humidity : float or array
        Relative humidity over liquid water, 0 <= value <= 1. [-]

    Returns
    -------
    array, broadcast shape
        Dew point; NaN for perfectly dry air. [K]

    Raises
    ------
    InputError
        If the humidity is outside [0, 1].

    Examples
    --------
    >>> round(float(dew_point(293.15, 0.5)) - 273.15, 2)
    9.27
    """
    return dew_point_from_vapour_pressure(vapour_pressure(air_temperature, relative_humidity))


def frost_point(air_temperature: FloatLike, relative_humidity: FloatLike) -> FloatArray:
    """Frost point of the air: the temperature at which its vapour is saturated over ice.

    Parameters
    ----------
    air_temperature : float or array
        Air temperature. [K]
    relative_humidity : float or array
        Relative humidity over liquid water, 0 <= value <= 1. [-]

    Returns
    -------
    array, broadcast shape
        Frost point where it is at most 0 °C, else NaN: warmer air gives dew first. [K]

    Raises
    ------
    InputError
        If the humidity is outside [0, 1].
    """
    frost = frost_point_from_vapour_pressure(vapour_pressure(air_temperature, relative_humidity))
    return np.where(frost <= ZERO_CELSIUS, frost, np.nan)


def absolute_humidity(air_temperature: FloatLike, relative_humidity: FloatLike) -> FloatArray:
    """Mass of vapour in a volume of air, as an ideal gas.

    Parameters
    ----------
    air_temperature : float or array
        Air temperature. [K]
    relative_humidity : float or array
        Relative humidity over liquid water, 0 <= value <= 1. [-]

    Returns
    -------
    array, broadcast shape
        Absolute humidity. [kg/m3]

    Raises
    ------
    InputError
        If the humidity is outside [0, 1].
    """
    pressure = vapour_pressure(air_temperature, relative_humidity)
    return np.asarray(pressure * MOLAR_MASS_WATER / (MOLAR_GAS * np.asarray(air_temperature)))
