"""Wind that meets a pipe at an angle to its axis."""

from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "LEAST_PUBLISHED_ANGLE",
    "SLOW_REYNOLDS",
    "check_wind_angle",
    "wind_across",
    "yaw_factor_ieee738",
    "yaw_factor_morgan",
    "yaw_factor_smooth",
]

#: Reynolds number of the whole wind up to which factors are published for every angle. [-]
SLOW_REYNOLDS: Final = 4000.0
#: Angle between wind and axis below which none is published for a faster wind. [deg]
LEAST_PUBLISHED_ANGLE: Final = 15.0

# Square of the share of a wind along the axis that still counts as across: 0.13.
_ALONG: Final = 0.0169


def wind_across(wind_speed: FloatLike, wind_angle_deg: FloatLike = 90.0) -> FloatArray:
    """Speed across the pipe that carries as much heat as a wind at an angle.

    Parameters
    ----------
    wind_speed : float or array
        At the pipe. [m/s]
    wind_angle_deg : float or array
        Between wind and axis, 0 (along) to 90 (across). [deg]

    Returns
    -------
    array
        v (sin^2 + 0.0169 cos^2)^(1/2); to be put into a correlation for cross flow. [m/s]

    Notes
    -----
    The component across the axis carries the heat (independence of cross flow), and of the
    component along it 13 % remain, as in the factor for smooth cylinders [1]_, to which this comes
    down where Nu goes as Re^0.45; up to Re = 4000, where that factor is stated, the two differ by
    less than 5 % from 30 degrees on and by 12 % along the pipe. At higher Re the exponent grows,
    and the factor falls to the sin^0.6 of tube banks [2]_ (100 < Re < 1e6, from 15 degrees on).
    Below 15 degrees at high Re nothing is published for pipes. `correlation_spread` contains how
    far the published factors differ.

    References
    ----------
    .. [1] CIGRE Technical Brochure 601, *Guide for thermal rating calculations of overhead
       lines*, 2014, eq. 21 and table 4.
    .. [2] ESDU 73031, *Convective heat transfer during crossflow of fluids over plain tube banks*,
       1973.

    Examples
    --------
    >>> round(float(wind_across(2.0, 30.0)), 3)
    1.025
    """
    speed = np.asarray(wind_speed, dtype=np.float64)
    angle = np.deg2rad(wind_angle_deg)
    return np.asarray(speed * np.sqrt(np.sin(angle) ** 2 + _ALONG * np.cos(angle) ** 2))


def yaw_factor_smooth(wind_angle_deg: FloatLike) -> FloatArray:
    """Nusselt number of a smooth cylinder over that in cross flow, Re < 4000.

    Parameters
    ----------
    wind_angle_deg : float or array
        0 to 90. [deg]

    Returns
    -------
    array
        (sin^2 + 0.0169 cos^2)^0.225. [-]

    References
    ----------
    .. [1] CIGRE Technical Brochure 601, *Guide for thermal rating calculations of overhead
       lines*, 2014, eq. 21 and table 4.
    """
    angle = np.deg2rad(wind_angle_deg)
    return np.asarray((np.sin(angle) ** 2 + _ALONG * np.cos(angle) ** 2) ** 0.225)


def yaw_factor_morgan(wind_angle_deg: FloatLike) -> FloatArray:
    """Nusselt number of a stranded conductor over that in cross flow.

    Parameters
    ----------
    wind_angle_deg : float or array
        0 to 90. [deg]

    Returns
    -------
    array
        0.42 + 0.68 sin^1.08 up to 24 degrees, 0.42 + 0.58 sin^0.90 beyond. [-]

    References
    ----------
    .. [1] CIGRE Technical Brochure 207, *Thermal behaviour of overhead conductors*, 2002, eq. 14,
       after Morgan.
    """
    sine = np.sin(np.deg2rad(wind_angle_deg))
    is_slight = np.asarray(wind_angle_deg) <= 24.0
    return np.asarray(0.42 + np.where(is_slight, 0.68 * sine**1.08, 0.58 * sine**0.90))


def yaw_factor_ieee738(wind_angle_deg: FloatLike) -> FloatArray:
    """Nusselt number of a bare overhead conductor over that in cross flow.

    Parameters
    ----------
    wind_angle_deg : float or array
        0 to 90. [deg]

    Returns
    -------
    array
        1.194 - cos(a) + 0.194 cos(2 a) + 0.368 sin(2 a). [-]

    References
    ----------
    .. [1] IEEE Std 738-2012, *Calculating the current-temperature relationship of bare overhead
       conductors*, eq. 4a.
    """
    angle = np.deg2rad(wind_angle_deg)
    return np.asarray(1.194 - np.cos(angle) + 0.194 * np.cos(2 * angle) + 0.368 * np.sin(2 * angle))


def check_wind_angle(wind_angle_deg: FloatLike) -> None:
    """Refuse an angle between wind and axis outside 0 to 90 degrees.

    Parameters
    ----------
    wind_angle_deg : float or array
        [deg]

    Raises
    ------
    InputError
        If any value is below 0 or above 90.
    """
    angle = np.asarray(wind_angle_deg, dtype=np.float64)
    wrong = (angle < 0.0) | (angle > 90.0)
    if np.any(wrong):
        raise InputError(
            f"wind angle is {angle[wrong].flat[0]:g} degrees; expected 0 (along the pipe) to 90"
            " (across)"
        )
