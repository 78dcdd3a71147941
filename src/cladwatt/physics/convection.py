"""Convection coefficient of a pipe in air: free, forced and mixed.

The single correlations live in `natural_convection`, `forced_convection` and `iso12241`, and are
offered from here as well.
"""

from typing import Final

import numpy as np
from numpy.polynomial import Polynomial

from cladwatt.errors import InputError
from cladwatt.physics.air import AIR_TEMPERATURE_RANGE, AirProperties, air_properties
from cladwatt.physics.constants import GRAVITY, STANDARD_PRESSURE
from cladwatt.physics.forced_convection import (
    nusselt_churchill_bernstein,
    nusselt_hilpert,
    nusselt_zukauskas,
    reynolds_number,
)
from cladwatt.physics.iso12241 import (
    coefficient_iso12241_horizontal_indoor,
    coefficient_iso12241_outdoor,
    coefficient_iso12241_vertical_indoor,
)
from cladwatt.physics.natural_convection import (
    nusselt_churchill_chu_horizontal,
    nusselt_churchill_chu_horizontal_laminar,
    nusselt_churchill_chu_vertical,
    nusselt_kuehn_goldstein,
    nusselt_morgan,
    rayleigh_number,
)
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "VERTICAL_LENGTH",
    "coefficient_iso12241_horizontal_indoor",
    "coefficient_iso12241_outdoor",
    "coefficient_iso12241_vertical_indoor",
    "convection_coefficient",
    "mixed_nusselt",
    "nusselt_churchill_bernstein",
    "nusselt_churchill_chu_horizontal",
    "nusselt_churchill_chu_horizontal_laminar",
    "nusselt_churchill_chu_vertical",
    "nusselt_hilpert",
    "nusselt_kuehn_goldstein",
    "nusselt_morgan",
    "nusselt_zukauskas",
    "outside_validity",
    "rayleigh_number",
    "reynolds_number",
]

#: Height assumed for a vertical run where none is declared. [m]
VERTICAL_LENGTH: Final = 2.0

_RAYLEIGH_LIMIT: Final = 1e12
_REYNOLDS_LIMIT: Final = 1e7
_PECLET_LIMIT: Final = 0.2


def mixed_nusselt(
    forced: FloatLike, natural: FloatLike, exponent: float = 4.0, aiding: bool = True
) -> FloatArray:
    """Mixed convection from its two limits.

    Parameters
    ----------
    forced, natural : float or array
        Nusselt numbers on the same length, or coefficients. [-] or [W/(m2 K)]
    exponent : float
        4 across a horizontal cylinder, 3 along a vertical face.
    aiding : bool
        True for flows in the same direction or across each other, False for opposed ones.

    Returns
    -------
    array
        abs(forced^n + natural^n)^(1/n), with a minus where the flows oppose.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 9.9; after Churchill.
    """
    first = np.asarray(forced, dtype=np.float64) ** exponent
    second = np.asarray(natural, dtype=np.float64) ** exponent
    total = first + second if aiding else np.abs(first - second)
    return np.asarray(total ** (1.0 / exponent))


def convection_coefficient(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    diameter: FloatLike,
    wind_speed: FloatLike = 0.0,
    pressure: FloatLike = STANDARD_PRESSURE,
    inclination_deg: FloatLike = 0.0,
    vertical_length: FloatLike = VERTICAL_LENGTH,
) -> FloatArray:
    """Mean convection coefficient around a pipe in still or moving air.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    air_temperature : float or array
        Away from the pipe. [K]
    diameter : float or array
        Over the cladding. [m]
    wind_speed : float or array
        At the pipe, taken as across it. [m/s]
    pressure : float or array
        Absolute. [Pa]
    inclination_deg : float or array
        Of the axis against the horizontal, 0 to 90. [deg]
    vertical_length : float or array
        Height over which the boundary layer of a vertical run grows. [m]

    Returns
    -------
    array
        Of the broadcast shape; NaN where an input is NaN. [W/(m2 K)]

    Notes
    -----
    Horizontal: Churchill and Chu [1]_ with Churchill and Bernstein [3]_, exponent 4. Vertical:
    Churchill and Chu's vertical face [2]_, exponent 3. The wind crosses the plume in both, so the
    two add [4]_. Between the two the coefficients are weighted with cos^2 and sin^2 of the
    inclination, which is an assumption of this package. Published correlations differ by 10 to
    20 %.

    A vertical run of 2 m with 10 K or more on it is turbulent over most of its height, and the
    coefficient then hardly depends on the height: 1 m and 6 m both stay within 5 % of it.
    The film temperature is held within the range of `air_properties`; `outside_validity` says
    where that happened.

    References
    ----------
    .. [1] Churchill, Chu, Int. J. Heat Mass Transfer 18 (1975) 1049-1053.
    .. [2] Churchill, Chu, Int. J. Heat Mass Transfer 18 (1975) 1323-1329.
    .. [3] Churchill, Bernstein, J. Heat Transfer 99 (1977) 300-306.
    .. [4] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 9.9.

    Examples
    --------
    >>> h = convection_coefficient(343.15, air_temperature=293.15, diameter=0.08)
    >>> round(float(h))
    6
    """
    surface = np.asarray(surface_temperature, dtype=np.float64)
    ambient = np.asarray(air_temperature, dtype=np.float64)
    air = air_properties(_film_temperature(surface, ambient), pressure)
    difference = np.abs(surface - ambient)
    per_length = air.conductivity / diameter
    forced = _forced(air, wind_speed, diameter)
    horizontal = per_length * _fourth_power_sum(forced, _natural(air, difference, diameter))
    if not np.any(inclination_deg):
        return np.asarray(horizontal)
    natural = air.conductivity / vertical_length * _vertical(air, difference, vertical_length)
    vertical = mixed_nusselt(per_length * forced, natural, exponent=3.0)
    share = np.sin(np.deg2rad(inclination_deg)) ** 2
    return np.asarray(horizontal + share * (vertical - horizontal))


def outside_validity(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    diameter: FloatLike,
    wind_speed: FloatLike = 0.0,
    pressure: FloatLike = STANDARD_PRESSURE,
    inclination_deg: FloatLike = 0.0,
    vertical_length: FloatLike = VERTICAL_LENGTH,
) -> BoolArray:
    """Where `convection_coefficient` leaves the range its correlations are stated for.

    Parameters
    ----------
    surface_temperature, air_temperature, diameter, wind_speed, pressure : float or array
        As for `convection_coefficient`.
    inclination_deg, vertical_length : float or array
        As for `convection_coefficient`.

    Returns
    -------
    array of bool
        True where the film temperature is outside the air properties' range, Ra above 1e12 (on
        the height for inclined runs), Re above 1e7, or forced flow carries the heat at Re Pr
        below 0.2. NaN counts as outside.
    """
    surface = np.asarray(surface_temperature, dtype=np.float64)
    ambient = np.asarray(air_temperature, dtype=np.float64)
    film = 0.5 * (surface + ambient)
    air = air_properties(_film_temperature(surface, ambient), pressure)
    difference = np.abs(surface - ambient)
    length = np.where(np.asarray(inclination_deg) != 0.0, vertical_length, diameter)
    rayleigh = _rayleigh(air, difference, length)
    reynolds = reynolds_number(
        wind_speed, length=diameter, kinematic_viscosity=air.kinematic_viscosity
    )
    is_forced = _forced(air, wind_speed, diameter) > _natural(air, difference, diameter)
    lowest, highest = AIR_TEMPERATURE_RANGE
    inside = (film >= lowest) & (film <= highest) & (rayleigh <= _RAYLEIGH_LIMIT)
    inside &= reynolds <= _REYNOLDS_LIMIT
    inside &= ~is_forced | (reynolds * air.prandtl >= _PECLET_LIMIT)
    return np.asarray(~inside)


def check_inclination(inclination_deg: FloatLike) -> None:
    """Refuse an inclination outside 0 to 90 degrees.

    Parameters
    ----------
    inclination_deg : float or array
        [deg]

    Raises
    ------
    InputError
        If any value is below 0 or above 90.
    """
    angle = np.asarray(inclination_deg, dtype=np.float64)
    wrong = (angle < 0.0) | (angle > 90.0)
    if np.any(wrong):
        raise InputError(
            f"inclination is {angle[wrong].flat[0]:g} degrees; expected 0 (horizontal) to 90"
        )


def _film_temperature(surface: FloatArray, ambient: FloatArray) -> FloatArray:
    return np.clip(0.5 * (surface + ambient), *AIR_TEMPERATURE_RANGE)


# The factors of the Prandtl number hardly change for air (0.69 to 0.76), so that a cubic replaces
# their fractional powers to better than 1e-6: the balance is evaluated millions of times.
def _cubic_of_prandtl(nusselt_factor: FloatArray, prandtl: FloatArray) -> tuple[float, ...]:
    cubic = Polynomial.fit(prandtl, nusselt_factor, 3).convert()
    return tuple(float(coefficient) for coefficient in cubic.coef)


_PRANDTL = np.linspace(0.68, 0.78, 41)
_FORCED_FACTOR = _cubic_of_prandtl(
    0.62 * np.cbrt(_PRANDTL) / (1.0 + (0.4 / _PRANDTL) ** (2 / 3)) ** 0.25, _PRANDTL
)
_HORIZONTAL_FACTOR = _cubic_of_prandtl(
    0.387 / (1.0 + (0.559 / _PRANDTL) ** (9 / 16)) ** (8 / 27), _PRANDTL
)
_VERTICAL_FACTOR = _cubic_of_prandtl(
    0.387 / (1.0 + (0.492 / _PRANDTL) ** (9 / 16)) ** (8 / 27), _PRANDTL
)


def _cubic(x: FloatArray, coefficients: tuple[float, ...]) -> FloatArray:
    c0, c1, c2, c3 = coefficients
    return c0 + x * (c1 + x * (c2 + x * c3))


def _rayleigh(air: AirProperties, difference: FloatArray, length: FloatLike) -> FloatArray:
    return rayleigh_number(
        difference,
        length=length,
        expansion=air.expansion,
        kinematic_viscosity=air.kinematic_viscosity,
        prandtl=air.prandtl,
        gravity=GRAVITY,
    )


def _natural(air: AirProperties, difference: FloatArray, diameter: FloatLike) -> FloatArray:
    sixth_root = np.cbrt(np.sqrt(_rayleigh(air, difference, diameter)))
    root = 0.60 + _cubic(air.prandtl, _HORIZONTAL_FACTOR) * sixth_root
    return np.asarray(root * root)


def _vertical(air: AirProperties, difference: FloatArray, length: FloatLike) -> FloatArray:
    sixth_root = np.cbrt(np.sqrt(_rayleigh(air, difference, length)))
    root = 0.825 + _cubic(air.prandtl, _VERTICAL_FACTOR) * sixth_root
    return np.asarray(root * root)


def _forced(air: AirProperties, wind_speed: FloatLike, diameter: FloatLike) -> FloatArray:
    if not np.any(wind_speed):
        return np.asarray(0.3)
    reynolds = np.asarray(wind_speed, dtype=np.float64) * diameter / air.kinematic_viscosity
    # x^(5/8) by square roots: x^(1/2) x^(1/8)
    half = np.sqrt(reynolds / 282_000.0)
    rise = (1.0 + half * np.sqrt(np.sqrt(half))) ** 0.8
    return np.asarray(0.3 + _cubic(air.prandtl, _FORCED_FACTOR) * np.sqrt(reynolds) * rise)


def _fourth_power_sum(forced: FloatArray, natural: FloatArray) -> FloatArray:
    first, second = forced * forced, natural * natural
    return np.asarray(np.sqrt(np.sqrt(first * first + second * second)))
