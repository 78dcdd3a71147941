"""What a clear sky sends onto a pipe whose direction nobody declared, and when the sun was last up.

Everything here rests on place and time alone, for where nobody measured the sun.
"""

from __future__ import annotations

from math import pi
from typing import Final, NamedTuple

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.solar import (
    SOLAR_CONSTANT,
    SunPosition,
    absorbed_solar,
    clear_sky_irradiance_haurwitz,
    diffuse_fraction_erbs,
    sun_position,
)
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "HORIZON_DEG",
    "ClearSky",
    "PipeSunlight",
    "clear_sky",
    "cloud_factor_kasten_czeplak",
    "hours_since_sun",
    "pipe_sunlight",
]

#: Elevation of the sun's centre when its upper edge touches the horizon: 34' of refraction and 16'
#: of its radius, as almanacs have it. [deg]
HORIZON_DEG: Final = -50.0 / 60.0

_DIRECTIONS: Final = 90
_DAY: Final = 86_400.0
_STEP: Final = 300.0
_HALVINGS: Final = 12


class ClearSky(NamedTuple):
    """Irradiance under a clear sky. [W/m2]"""

    beam_normal: FloatArray
    """On a face turned to the sun."""
    diffuse_horizontal: FloatArray
    """From the sky, on level ground."""


class PipeSunlight(NamedTuple):
    """Sunlight on a pipe over its projected area (diameter times length). [W/m2]"""

    mean: float
    """Over all directions the pipe may run to."""
    u: float
    """Standard deviation over these directions."""


def clear_sky(elevation_deg: FloatLike, extraterrestrial: FloatLike = SOLAR_CONSTANT) -> ClearSky:
    """Beam and diffuse irradiance under a clear sky, from the sun's elevation.

    Parameters
    ----------
    elevation_deg : float or array
        Of the sun. [deg]
    extraterrestrial : float or array
        Irradiance outside the atmosphere on a face turned to the sun. [W/m2]

    Returns
    -------
    ClearSky
        Zero where the sun is down.

    Notes
    -----
    Haurwitz's global irradiance divided by the diffuse share of Erbs, Klein and Duffie. Haze and
    altitude do not enter.

    References
    ----------
    .. [1] `solar.clear_sky_irradiance_haurwitz`, `solar.diffuse_fraction_erbs`.

    Examples
    --------
    >>> beam, diffuse = clear_sky(45.0)
    >>> round(float(beam)), round(float(diffuse))
    (818, 136)
    """
    height = np.sin(np.deg2rad(np.asarray(elevation_deg, dtype=np.float64)))
    level = clear_sky_irradiance_haurwitz(elevation_deg)
    up = np.where(height > 0.0, height, 1.0)
    clearness = np.where(height > 0.0, level / (extraterrestrial * up), 0.0)
    diffuse = diffuse_fraction_erbs(clearness) * level
    return ClearSky(np.where(height > 0.0, (level - diffuse) / up, 0.0), np.asarray(diffuse))


def cloud_factor_kasten_czeplak(cloud_cover: FloatLike) -> FloatArray:
    """Global irradiance under clouds over that under a clear sky, mean of an hour.

    Parameters
    ----------
    cloud_cover : float or array
        Share of the sky that is clouded, 0 to 1. [-]

    Returns
    -------
    array, same shape
        1 - 0.75 N^3.4. [-]

    Raises
    ------
    InputError
        If the cover is outside 0 to 1.

    References
    ----------
    .. [1] Kasten, Czeplak, *Solar and terrestrial radiation dependent on the amount and type of
       cloud*, Solar Energy 24 (1980) 177-189.

    Examples
    --------
    >>> round(float(cloud_factor_kasten_czeplak(0.5)), 2)
    0.93
    """
    cover = np.asarray(cloud_cover, dtype=np.float64)
    if np.any((cover < 0.0) | (cover > 1.0)):
        wrong = cover[(cover < 0.0) | (cover > 1.0)].flat[0]
        raise InputError(f"cloud cover is {wrong:g}; expected 0 to 1")
    return np.asarray(1.0 - 0.75 * cover**3.4)


def pipe_sunlight(
    elevation_deg: float,
    *,
    extraterrestrial: float = SOLAR_CONSTANT,
    inclination_deg: float = 0.0,
) -> PipeSunlight:
    """Sunlight of a clear sky on a pipe of unknown direction, over its projected area.

    Parameters
    ----------
    elevation_deg : float
        Of the sun. [deg]
    extraterrestrial : float
        Irradiance outside the atmosphere on a face turned to the sun. [W/m2]
    inclination_deg : float
        Of the pipe's axis against the horizontal, 0 to 90. [deg]

    Returns
    -------
    PipeSunlight
        Beam times the sine between sun and axis, and sky and ground from all sides: times
        diameter and absorptance it is what a metre absorbs.

    Notes
    -----
    All azimuths of the axis are equally likely. Nothing shades the pipe.
    """
    beam, diffuse = clear_sky(elevation_deg, extraterrestrial)
    turns = np.asarray((np.arange(_DIRECTIONS) + 0.5) * (360.0 / _DIRECTIONS), dtype=np.float64)
    over_projected = pi * absorbed_solar(
        SunPosition(np.asarray(elevation_deg, dtype=np.float64), np.zeros(())),
        absorptance=1.0,
        beam_normal=beam,
        diffuse_horizontal=diffuse,
        axis_azimuth_deg=turns,
        inclination_deg=inclination_deg,
    )
    return PipeSunlight(float(np.mean(over_projected)), float(np.std(over_projected)))


def hours_since_sun(unix_time: float, *, latitude_deg: float, longitude_deg: float) -> float | None:
    """Hours since the sun was last above the horizon.

    Parameters
    ----------
    unix_time : float
        Seconds since 1970-01-01 00:00 UTC. [s]
    latitude_deg, longitude_deg : float
        North and east positive. [deg]

    Returns
    -------
    float or None
        0 while it is up, else since the last sunset; None where it was not up within a day. [h]

    Notes
    -----
    The horizon is level: hills end the day earlier, never later.
    """

    def is_up(times: FloatLike) -> FloatArray:
        position = sun_position(times, latitude_deg=latitude_deg, longitude_deg=longitude_deg)
        return np.asarray(position.elevation_deg > HORIZON_DEG)

    back = np.arange(0.0, _DAY + _STEP, _STEP)
    up = is_up(unix_time - back)
    if not up.any():
        return None
    first = int(np.argmax(up))
    if first == 0:
        return 0.0
    lower, upper = back[first - 1], back[first]
    for _ in range(_HALVINGS):
        middle = 0.5 * (lower + upper)
        lower, upper = (lower, middle) if is_up(unix_time - middle) else (middle, upper)
    return float(upper) / 3600.0
