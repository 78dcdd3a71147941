"""Where the sun stands, what it sends, and what a pipe absorbs of it.

Azimuths count clockwise from north, elevations upwards from the horizon, both in degrees.
"""

from __future__ import annotations

from math import pi
from typing import Final, NamedTuple

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "GROUND_ALBEDO",
    "SOLAR_CONSTANT",
    "SunPosition",
    "absorbed_solar",
    "clear_sky_irradiance_haurwitz",
    "diffuse_fraction_erbs",
    "extraterrestrial_irradiance",
    "irradiance_on_element",
    "projected_share",
    "sun_position",
    "sun_position_from_hour_angle",
]

#: Irradiance outside the atmosphere at mean distance. [W/m2]
SOLAR_CONSTANT: Final = 1361.0

#: Share of the sunlight that common ground sends back; snow 0.6 to 0.9. [-]
GROUND_ALBEDO: Final = 0.2

_DAY: Final = 86_400.0
_J2000_UNIX: Final = 946_728_000.0  # 2000-01-01 12:00 UTC
_YEAR_DAYS: Final = 365.25


class SunPosition(NamedTuple):
    """Position of the sun in the sky.

    Parameters
    ----------
    elevation_deg : array
        Above the horizon, without refraction; negative at night. [deg]
    azimuth_deg : array
        From north clockwise, 0 to 360. [deg]
    """

    elevation_deg: FloatArray
    azimuth_deg: FloatArray


def sun_position(
    unix_time: FloatLike, *, latitude_deg: FloatLike, longitude_deg: FloatLike
) -> SunPosition:
    """Position of the sun from time and place.

    Parameters
    ----------
    unix_time : float or array
        Seconds since 1970-01-01 00:00 UTC; between the years 1950 and 2050. [s]
    latitude_deg : float or array
        North positive, -90 to 90. [deg]
    longitude_deg : float or array
        East positive, -180 to 180. [deg]

    Returns
    -------
    SunPosition
        Arrays of the broadcast shape; NaN where an input is NaN.

    Raises
    ------
    InputError
        If a coordinate is outside its range.

    Notes
    -----
    Low-precision formulas of the Astronomical Almanac, stated to hold 0.01 degrees between 1950
    and 2050. Refraction, which lifts the sun by half a degree at the horizon and by less than a
    tenth above 10 degrees, is left out.

    References
    ----------
    .. [1] Michalsky, *The Astronomical Almanac's algorithm for approximate solar position
       (1950-2050)*, Solar Energy 40 (1988) 227-235.
    """
    _check_within("latitude", latitude_deg, -90.0, 90.0)
    _check_within("longitude", longitude_deg, -180.0, 180.0)
    days = (np.asarray(unix_time, dtype=np.float64) - _J2000_UNIX) / _DAY
    anomaly = np.deg2rad(357.528 + 0.9856003 * days)
    longitude = 280.460 + 0.9856474 * days + 1.915 * np.sin(anomaly) + 0.020 * np.sin(2 * anomaly)
    ecliptic, obliquity = np.deg2rad(longitude), np.deg2rad(23.439 - 4e-7 * days)
    ascension = np.arctan2(np.cos(obliquity) * np.sin(ecliptic), np.cos(ecliptic))
    declination = np.arcsin(np.sin(obliquity) * np.sin(ecliptic))
    hour = np.mod(days + 0.5, 1.0) * 24.0
    sidereal = 6.697375 + 0.0657098242 * days + hour
    hour_angle = sidereal * 15.0 + longitude_deg - np.rad2deg(ascension)
    return sun_position_from_hour_angle(
        declination_deg=np.rad2deg(declination),
        hour_angle_deg=hour_angle,
        latitude_deg=latitude_deg,
    )


def sun_position_from_hour_angle(
    *, declination_deg: FloatLike, hour_angle_deg: FloatLike, latitude_deg: FloatLike
) -> SunPosition:
    """Position of the sun from its declination and hour angle.

    Parameters
    ----------
    declination_deg : float or array
        [deg]
    hour_angle_deg : float or array
        0 at solar noon, 15 more with every hour after it. [deg]
    latitude_deg : float or array
        [deg]

    Returns
    -------
    SunPosition
        Arrays of the broadcast shape.

    References
    ----------
    .. [1] Duffie, Beckman, *Solar Engineering of Thermal Processes*, 4th edition, Wiley, 2013,
       eqs. 1.6.5 and 1.6.6.
    """
    declination = np.deg2rad(np.asarray(declination_deg, dtype=np.float64))
    hour_angle = np.deg2rad(np.asarray(hour_angle_deg, dtype=np.float64))
    latitude = np.deg2rad(np.asarray(latitude_deg, dtype=np.float64))
    towards_equator = np.cos(declination) * np.cos(hour_angle)
    up = np.sin(declination) * np.sin(latitude) + towards_equator * np.cos(latitude)
    north = np.sin(declination) * np.cos(latitude) - towards_equator * np.sin(latitude)
    east = -np.cos(declination) * np.sin(hour_angle)
    azimuth = np.mod(np.rad2deg(np.arctan2(east, north)), 360.0)
    return SunPosition(np.asarray(np.rad2deg(np.arcsin(np.clip(up, -1.0, 1.0)))), azimuth)


def extraterrestrial_irradiance(unix_time: FloatLike) -> FloatArray:
    """Sunlight outside the atmosphere, on a face turned to the sun.

    Parameters
    ----------
    unix_time : float or array
        Seconds since 1970-01-01 00:00 UTC. [s]

    Returns
    -------
    array, same shape
        [W/m2]

    References
    ----------
    .. [1] Spencer, *Fourier series representation of the position of the sun*, Search 2 (1971)
       172: distance of the earth.
    """
    # leap years and the hour move the date by up to 1.3 days, the result by less than 0.1 %
    day = np.mod((np.asarray(unix_time, dtype=np.float64) - _J2000_UNIX) / _DAY + 0.5, _YEAR_DAYS)
    angle = 2.0 * pi * day / _YEAR_DAYS
    ratio = (
        1.000110
        + 0.034221 * np.cos(angle)
        + 0.001280 * np.sin(angle)
        + 0.000719 * np.cos(2.0 * angle)
        + 0.000077 * np.sin(2.0 * angle)
    )
    return np.asarray(SOLAR_CONSTANT * ratio)


def clear_sky_irradiance_haurwitz(elevation_deg: FloatLike) -> FloatArray:
    """Global irradiance on level ground under a clear sky, from the sun's elevation alone.

    Parameters
    ----------
    elevation_deg : float or array
        Of the sun. [deg]

    Returns
    -------
    array, same shape
        1098 sin(el) exp(-0.059 / sin(el)); 0 where the sun is down. [W/m2]

    Notes
    -----
    Haze and altitude do not enter: some 10 % (assumption, no source). What was measured is better.

    References
    ----------
    .. [1] Haurwitz, *Insolation in relation to cloudiness and cloud density*, J. Meteorology 2
       (1945) 154-166; constants as in Reno, Hansen, Stein, *Global horizontal irradiance clear sky
       models*, Sandia report SAND2012-2389, 2012 (0.057 is quoted too: 0.2 to 1 % more).
    """
    height = np.sin(np.deg2rad(np.asarray(elevation_deg, dtype=np.float64)))
    up = np.where(height > 0.0, height, 1.0)
    night = height <= 0.0
    return np.asarray(np.where(night, 0.0, 1098.0 * up * np.exp(-0.059 / up) + 0.0 * height))


def diffuse_fraction_erbs(clearness: FloatLike) -> FloatArray:
    """Diffuse share of the global irradiance on level ground.

    Parameters
    ----------
    clearness : float or array
        Global irradiance over that outside the atmosphere on a level face, 0 or more. [-]

    Returns
    -------
    array, same shape
        0.165 under a clear sky to 1 under a dark one. [-]

    Raises
    ------
    InputError
        If the clearness is negative.

    References
    ----------
    .. [1] Erbs, Klein, Duffie, *Estimation of the diffuse radiation fraction for hourly, daily and
       monthly-average global radiation*, Solar Energy 28 (1982) 293-302.
    """
    kt = np.asarray(clearness, dtype=np.float64)
    if np.any(kt < 0.0):
        raise InputError(f"clearness is {np.min(kt):g}; expected 0 or more")
    middle = 0.9511 + kt * (-0.1604 + kt * (4.388 + kt * (-16.638 + kt * 12.336)))
    return np.where(kt <= 0.22, 1.0 - 0.09 * kt, np.where(kt <= 0.8, middle, 0.165 + 0.0 * kt))


def projected_share(
    sun: SunPosition, *, axis_azimuth_deg: FloatLike, inclination_deg: FloatLike = 0.0
) -> FloatArray:
    """Sine of the angle between the sun and a pipe's axis: its shade over diameter and length.

    Parameters
    ----------
    sun : SunPosition
        Where the sun stands.
    axis_azimuth_deg : float or array
        Direction the pipe runs to, towards its upper end where it is inclined. [deg]
    inclination_deg : float or array
        Of the axis against the horizontal, 0 to 90. [deg]

    Returns
    -------
    array, broadcast shape
        1 where the sun stands square to the pipe, 0 along it. [-]
    """
    elevation = np.deg2rad(sun.elevation_deg)
    inclination = np.deg2rad(np.asarray(inclination_deg, dtype=np.float64))
    turn = np.deg2rad(sun.azimuth_deg - np.asarray(axis_azimuth_deg, dtype=np.float64))
    along = np.cos(elevation) * np.cos(inclination) * np.cos(turn)
    along = along + np.sin(elevation) * np.sin(inclination)
    return np.asarray(np.sqrt(np.maximum(0.0, 1.0 - along**2)))


def absorbed_solar(
    sun: SunPosition,
    *,
    absorptance: FloatLike,
    beam_normal: FloatLike,
    diffuse_horizontal: FloatLike,
    axis_azimuth_deg: FloatLike,
    inclination_deg: FloatLike = 0.0,
    albedo: FloatLike = GROUND_ALBEDO,
) -> FloatArray:
    """Sunlight absorbed by a pipe in the open, averaged over its circumference.

    Parameters
    ----------
    sun : SunPosition
        Where the sun stands; the beam counts only above the horizon.
    absorptance : float or array
        Solar, of the cladding, 0 to 1. [-]
    beam_normal : float or array
        Direct irradiance on a face turned to the sun. [W/m2]
    diffuse_horizontal : float or array
        Diffuse irradiance on level ground. [W/m2]
    axis_azimuth_deg, inclination_deg : float or array
        As for `projected_share`. [deg]
    albedo : float or array
        Of the ground, 0 to 1. [-]

    Returns
    -------
    array, broadcast shape
        alpha (beam sin(psi) / pi + diffuse / 2 + albedo global / 2), psi the angle between sun and
        axis. [W/m2]

    Raises
    ------
    InputError
        If a share is outside 0 to 1 or an irradiance negative.

    Notes
    -----
    Uniform sky and level, endless, diffuse ground, half and half over the circumference at any
    inclination; nothing shades the pipe or lights it from the side. The lit side takes up to pi
    times the mean of the beam: see `irradiance_on_element`.

    References
    ----------
    .. [1] Duffie, Beckman, *Solar Engineering of Thermal Processes*, 4th edition, Wiley, 2013,
       section 2.15 (isotropic sky), integrated around a cylinder.
    """
    _check_within("absorptance", absorptance, 0.0, 1.0)
    share = projected_share(sun, axis_azimuth_deg=axis_azimuth_deg, inclination_deg=inclination_deg)
    beam, around = _irradiances(sun, beam_normal, diffuse_horizontal, albedo)
    diffuse = 0.5 * (np.asarray(diffuse_horizontal) + around)
    return np.asarray(np.asarray(absorptance) * (beam * share / pi + diffuse))


def irradiance_on_element(
    sun: SunPosition,
    *,
    normal_elevation_deg: FloatLike,
    normal_azimuth_deg: FloatLike,
    beam_normal: FloatLike,
    diffuse_horizontal: FloatLike,
    albedo: FloatLike = GROUND_ALBEDO,
) -> FloatArray:
    """Sunlight on a small part of a surface, as one band of angle around a pipe.

    Parameters
    ----------
    sun : SunPosition
        Where the sun stands.
    normal_elevation_deg, normal_azimuth_deg : float or array
        Direction the part faces: 90 is up, -90 down. [deg]
    beam_normal, diffuse_horizontal, albedo : float or array
        As for `absorbed_solar`.

    Returns
    -------
    array, broadcast shape
        [W/m2]

    Raises
    ------
    InputError
        If the albedo is outside 0 to 1 or an irradiance negative.

    References
    ----------
    .. [1] Duffie, Beckman, *Solar Engineering of Thermal Processes*, 4th edition, Wiley, 2013,
       eq. 2.15.1.
    """
    tilt = np.deg2rad(np.asarray(normal_elevation_deg, dtype=np.float64))
    elevation = np.deg2rad(sun.elevation_deg)
    turn = np.deg2rad(sun.azimuth_deg - np.asarray(normal_azimuth_deg, dtype=np.float64))
    cosine = np.cos(elevation) * np.cos(tilt) * np.cos(turn) + np.sin(elevation) * np.sin(tilt)
    beam, around = _irradiances(sun, beam_normal, diffuse_horizontal, albedo)
    upwards = 0.5 * (1.0 + np.sin(tilt))
    sky = np.asarray(diffuse_horizontal) * upwards
    return np.asarray(beam * np.maximum(0.0, cosine) + sky + around * (1.0 - upwards))


def _irradiances(
    sun: SunPosition, beam_normal: FloatLike, diffuse_horizontal: FloatLike, albedo: FloatLike
) -> tuple[FloatArray, FloatArray]:
    """Return the beam where the sun is up, and what the ground sends back."""
    _check_within("albedo", albedo, 0.0, 1.0)
    for name, value in (("beam", beam_normal), ("diffuse", diffuse_horizontal)):
        if np.any(np.asarray(value) < 0.0):
            raise InputError(f"{name} irradiance is {np.min(value):g} W/m2; expected 0 or more")
    height = np.sin(np.deg2rad(sun.elevation_deg))
    beam = np.where(height <= 0.0, 0.0, np.asarray(beam_normal, dtype=np.float64))
    horizontal = beam * np.maximum(0.0, height) + diffuse_horizontal
    return beam, np.asarray(np.asarray(albedo) * horizontal)


def _check_within(name: str, value: FloatLike, lowest: float, highest: float) -> None:
    given = np.asarray(value, dtype=np.float64)
    wrong = (given < lowest) | (given > highest)
    if np.any(wrong):
        raise InputError(f"{name} is {given[wrong].flat[0]:g}; expected {lowest:g} to {highest:g}")
