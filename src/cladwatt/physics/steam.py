"""Saturated steam: temperature from pressure and back, and gauge to absolute pressure."""

from __future__ import annotations

from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "SATURATION_PRESSURE_RANGE",
    "SATURATION_TEMPERATURE_RANGE",
    "absolute_pressure",
    "saturation_pressure",
    "saturation_temperature",
]

#: Temperatures the saturation line is stated for: 0 °C to the critical point. [K]
SATURATION_TEMPERATURE_RANGE: Final = (ZERO_CELSIUS, 647.096)

#: Pressures the saturation line is stated for, at the same two ends. [Pa]
SATURATION_PRESSURE_RANGE: Final = (611.213, 22.064e6)

# Coefficients n1 to n10 of region 4, for pressure in MPa.
_N1: Final = 1167.0521452767
_N2: Final = -724213.16703206
_N3: Final = -17.073846940092
_N4: Final = 12020.824702470
_N5: Final = -3232555.0322333
_N6: Final = 14.915108613530
_N7: Final = -4823.2657361591
_N8: Final = 405113.40542057
_N9: Final = -0.23855557567849
_N10: Final = 650.17534844798

_PA_PER_MPA: Final = 1e6


def saturation_temperature(pressure: FloatLike) -> FloatArray:
    """Temperature of saturated steam or boiling water at an absolute pressure.

    Parameters
    ----------
    pressure : float or array
        Absolute pressure, 611.213 Pa to 22.064 MPa; NaN stays NaN. [Pa]

    Returns
    -------
    array, same shape
        Temperature. [K]

    Raises
    ------
    InputError
        If a pressure is outside the range.

    Notes
    -----
    The backward form (equation 31) of region 4, an exact inverse of `saturation_pressure`. It
    differs from the scientific formulation IAPWS-95 by up to about 0.01 K. Dry, still, air-free
    steam is meant: superheated steam is hotter, condensate that has run a way is colder.

    References
    ----------
    .. [1] IAPWS R7-97(2012), *Revised Release on the IAPWS Industrial Formulation 1997 for the
       Thermodynamic Properties of Water and Steam*, section 8, equations 29 to 31.

    Examples
    --------
    >>> round(float(saturation_temperature(1e6)) - 273.15, 2)
    179.89
    """
    given = np.asarray(pressure, dtype=np.float64)
    _check("absolute steam pressure", given, SATURATION_PRESSURE_RANGE, "Pa")
    beta = np.sqrt(np.sqrt(given / _PA_PER_MPA))
    e = beta * (beta + _N3) + _N6
    f = beta * (beta * _N1 + _N4) + _N7
    g = beta * (beta * _N2 + _N5) + _N8
    d = 2.0 * g / (-f - np.sqrt(f * f - 4.0 * e * g))
    root = np.sqrt((_N10 + d) ** 2 - 4.0 * (_N9 + _N10 * d))
    return np.asarray(0.5 * (_N10 + d - root))


def saturation_pressure(temperature: FloatLike) -> FloatArray:
    """Absolute pressure at which water of a temperature boils.

    Parameters
    ----------
    temperature : float or array
        Temperature, 273.15 K to 647.096 K; NaN stays NaN. [K]

    Returns
    -------
    array, same shape
        Absolute pressure. [Pa]

    Raises
    ------
    InputError
        If a temperature is outside the range.

    References
    ----------
    .. [1] As `saturation_temperature`, equation 30.

    Examples
    --------
    >>> round(float(saturation_pressure(300.0)), 2)
    3536.59
    """
    given = np.asarray(temperature, dtype=np.float64)
    _check("steam temperature", given, SATURATION_TEMPERATURE_RANGE, "K")
    theta = given + _N9 / (given - _N10)
    a = theta * (theta + _N1) + _N2
    b = theta * (_N3 * theta + _N4) + _N5
    c = theta * (_N6 * theta + _N7) + _N8
    return np.asarray(_PA_PER_MPA * (2.0 * c / (-b + np.sqrt(b * b - 4.0 * a * c))) ** 4)


def absolute_pressure(
    gauge_pressure: FloatLike, atmospheric_pressure: FloatLike = STANDARD_PRESSURE
) -> FloatArray:
    """Absolute pressure from what a gauge shows.

    Parameters
    ----------
    gauge_pressure : float or array
        Above the surrounding air; negative under vacuum. [Pa]
    atmospheric_pressure : float or array
        Absolute pressure of the air at the gauge, see `air.pressure_at_altitude`. [Pa]

    Returns
    -------
    array, broadcast shape
        Absolute pressure. [Pa]

    Raises
    ------
    InputError
        If the sum is not above 0.
    """
    total = np.asarray(gauge_pressure, dtype=np.float64) + atmospheric_pressure
    if np.any(total <= 0.0):
        raise InputError(
            f"gauge pressure is {np.min(gauge_pressure):g} Pa, absolute {np.min(total):g} Pa; "
            "expected an absolute pressure above 0"
        )
    return np.asarray(total)


def _check(name: str, value: FloatArray, limits: tuple[float, float], unit: str) -> None:
    lowest, highest = limits
    wrong = (value < lowest) | (value > highest)
    if np.any(wrong):
        raise InputError(
            f"{name} is {value[wrong].flat[0]:g} {unit}; expected {lowest:g} to {highest:g} {unit}"
        )
