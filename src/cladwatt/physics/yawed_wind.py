"""Wind that meets a pipe at an angle to its axis."""

from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import FloatArray, FloatLike

__all__ = ["check_wind_angle", "wind_across"]

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
    component along it 13 % remain. With Nu going as Re^0.45 this is the factor stated for smooth
    cylinders up to Re = 4000 [1]_; with Re^0.6, as at higher Reynolds numbers, it is the sin^0.6
    of tube banks from 15° on, 100 < Re < 1e6 [2]_. The factors stated for stranded conductors
    outdoors, [3]_ and [4]_, lie up to 6 % from the first. Below 15° at high Re there is no
    published value; the axial boundary layer of a long pipe is thick there.

    References
    ----------
    .. [1] CIGRE Technical Brochure 601, *Guide for thermal rating calculations of overhead
       lines*, 2014, eq. 21 and table 4.
    .. [2] ESDU 73031, *Convective heat transfer during crossflow of fluids over plain tube banks*,
       1973.
    .. [3] Morgan, after CIGRE Technical Brochure 207, 2002, eq. 14.
    .. [4] IEEE Std 738-2012, *Calculating the current-temperature relationship of bare overhead
       conductors*, eq. 4a.

    Examples
    --------
    >>> round(float(wind_across(2.0, 30.0)), 3)
    1.025
    """
    speed = np.asarray(wind_speed, dtype=np.float64)
    angle = np.deg2rad(wind_angle_deg)
    return np.asarray(speed * np.sqrt(np.sin(angle) ** 2 + _ALONG * np.cos(angle) ** 2))


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
