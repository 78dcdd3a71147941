"""The sky as a heat balance exchanges with it, and the surroundings of a pipe outdoors.

These temperatures stand for the whole spectrum and the whole vault. What the camera mirrors is
another quantity: in its band, between 8 and 14 µm, a clear sky is tens of kelvin colder, since the
air radiates mostly outside it. Neither may stand in for the other.
"""

from __future__ import annotations

from math import pi
from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.radiation import combined_surroundings
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "CLOUD_BASE_HEIGHT",
    "DEW_POINT_RANGE",
    "U_CLEAR_SKY_EMISSIVITY",
    "clear_sky_emissivity_berdahl_martin",
    "clear_sky_temperature_swinbank",
    "cloudy_sky_emissivity",
    "outdoor_surroundings",
    "outside_sky_validity",
    "sky_temperature",
    "sky_temperature_uncertainty",
]

#: Dew points from which the clear-sky relation was fitted. [K]
DEW_POINT_RANGE: Final = (253.15, 303.15)

#: Standard deviation of a single clear hour about relations of this kind. [-]
U_CLEAR_SKY_EMISSIVITY: Final = 0.031

#: Height of the cloud base where none is known: that of low cloud, an assumption. [m]
CLOUD_BASE_HEIGHT: Final = 2000.0

_CLOUD_SCALE_HEIGHT: Final = 8200.0


def clear_sky_emissivity_berdahl_martin(
    dew_point: FloatLike,
    *,
    hour: FloatLike | None = None,
    pressure: FloatLike | None = None,
) -> FloatArray:
    """Total emissivity of a clear sky, over the whole vault, referred to air temperature.

    Parameters
    ----------
    dew_point : float or array
        Of the air near the ground. [K]
    hour : float or array, optional
        Local solar time; left out, the daily swing of 0.013 is left out. [h]
    pressure : float or array, optional
        Absolute, of the air; left out, 100 kPa. [Pa]

    Returns
    -------
    array
        0.711 + 0.56 t + 0.73 t^2 + 0.013 cos(2 pi hour / 24) + 0.00012 (p - 1000 hPa), t the dew
        point in hundreds of °C; of the broadcast shape. [-]

    Notes
    -----
    Fitted to six places in the United States with dew points from -20 to 30 °C; see
    `outside_sky_validity`. Single hours scatter about relations of this kind with a standard
    deviation of 0.031 [2]_.

    References
    ----------
    .. [1] Berdahl, Martin, *Emissivity of clear skies*, Solar Energy 32 (1984) 663-664.
    .. [2] Berdahl, Fromberg, *The thermal radiance of clear skies*, Solar Energy 29 (1982)
       299-314.

    Examples
    --------
    >>> round(float(clear_sky_emissivity_berdahl_martin(283.15)), 3)
    0.774
    """
    hundreds = (np.asarray(dew_point, dtype=np.float64) - ZERO_CELSIUS) / 100.0
    emissivity = np.asarray(0.711 + hundreds * (0.56 + 0.73 * hundreds))
    if hour is not None:
        emissivity = emissivity + 0.013 * np.cos(2.0 * pi * np.asarray(hour) / 24.0)
    if pressure is not None:
        emissivity = emissivity + 0.00012 * (np.asarray(pressure) / 100.0 - 1000.0)
    return emissivity


def clear_sky_temperature_swinbank(air_temperature: FloatLike) -> FloatArray:
    """Clear-sky temperature from the air's alone; for comparison.

    Parameters
    ----------
    air_temperature : float or array
        [K]

    Returns
    -------
    array, same shape
        0.0552 T^1.5. [K]

    Notes
    -----
    Humidity does not enter, so it is off where the air is drier or damper than usual for its
    temperature; fitted between 2 and 29 °C.

    References
    ----------
    .. [1] Swinbank, *Long-wave radiation from clear skies*, Quarterly J. Royal Meteorological
       Society 89 (1963) 339-348.
    """
    return np.asarray(0.0552 * np.asarray(air_temperature, dtype=np.float64) ** 1.5)


def cloudy_sky_emissivity(
    clear_sky_emissivity: FloatLike,
    cloud_cover: FloatLike,
    *,
    cloud_base_height: FloatLike = CLOUD_BASE_HEIGHT,
    cloud_emissivity: FloatLike = 1.0,
) -> FloatArray:
    """Total emissivity of a sky with clouds.

    Parameters
    ----------
    clear_sky_emissivity : float or array
        Of the same sky without clouds. [-]
    cloud_cover : float or array
        Covered share of the vault, 0 <= value <= 1. [-]
    cloud_base_height : float or array
        Of the clouds above the ground. [m]
    cloud_emissivity : float or array
        Of the clouds: 1 for low and middle ones, less for thin high ones. [-]

    Returns
    -------
    array
        eps + (1 - eps) n eps_cloud exp(-z / 8200 m), of the broadcast shape. [-]

    Raises
    ------
    InputError
        If a share is outside 0 to 1 or a height negative.

    References
    ----------
    .. [1] Martin, Berdahl, *Characteristics of infrared sky radiation in the United States*,
       Solar Energy 33 (1984) 321-336.
    """
    clear = np.asarray(clear_sky_emissivity, dtype=np.float64)
    cover = _share("cloud cover", cloud_cover)
    black = _share("cloud emissivity", cloud_emissivity)
    height = np.asarray(cloud_base_height, dtype=np.float64)
    if np.any(height < 0):
        raise InputError(f"cloud base height is {np.min(height):g} m; expected 0 or more")
    factor = np.exp(-height / _CLOUD_SCALE_HEIGHT)
    return np.asarray(clear + (1.0 - clear) * cover * black * factor)


def sky_temperature(
    air_temperature: FloatLike,
    dew_point: FloatLike,
    cloud_cover: FloatLike = 0.0,
    *,
    hour: FloatLike | None = None,
    pressure: FloatLike | None = None,
    cloud_base_height: FloatLike = CLOUD_BASE_HEIGHT,
) -> FloatArray:
    """Total radiative temperature of the sky, for the heat balance and not for the camera's band.

    Parameters
    ----------
    air_temperature : float or array
        Near the ground. [K]
    dew_point : float or array
        Near the ground; held within `DEW_POINT_RANGE`. [K]
    cloud_cover : float or array
        Covered share of the vault, 0 <= value <= 1. [-]
    hour : float or array, optional
        Local solar time, see `clear_sky_emissivity_berdahl_martin`. [h]
    pressure : float or array, optional
        Absolute. [Pa]
    cloud_base_height : float or array
        [m]

    Returns
    -------
    array
        T_air eps^(1/4), of the broadcast shape; NaN where an input is NaN. [K]

    Raises
    ------
    InputError
        If the cloud cover is outside 0 to 1 or the height negative.

    References
    ----------
    .. [1] Berdahl, Martin, Solar Energy 32 (1984) 663-664; Martin, Berdahl, Solar Energy 33
       (1984) 321-336.

    Examples
    --------
    >>> round(float(sky_temperature(293.15, 283.15)) - 273.15, 1)
    1.8
    """
    held = np.clip(np.asarray(dew_point, dtype=np.float64), *DEW_POINT_RANGE)
    clear = clear_sky_emissivity_berdahl_martin(held, hour=hour, pressure=pressure)
    emissivity = cloudy_sky_emissivity(clear, cloud_cover, cloud_base_height=cloud_base_height)
    return np.asarray(np.asarray(air_temperature, dtype=np.float64) * np.sqrt(np.sqrt(emissivity)))


def sky_temperature_uncertainty(
    air_temperature: FloatLike,
    dew_point: FloatLike,
    cloud_cover: FloatLike = 0.0,
    *,
    u_cloud_cover: FloatLike = 0.1,
    u_cloud_base_height: FloatLike = 1000.0,
    cloud_base_height: FloatLike = CLOUD_BASE_HEIGHT,
) -> FloatArray:
    """Return the standard uncertainty of `sky_temperature`, air and dew point taken as known.

    Parameters
    ----------
    air_temperature, dew_point, cloud_cover, cloud_base_height : float or array
        As for `sky_temperature`.
    u_cloud_cover : float or array
        Of the cover; a tenth is common practice for an estimate by eye, no source. [-]
    u_cloud_base_height : float or array
        Of the height; an assumption, no source. [m]

    Returns
    -------
    array
        T_sky / (4 eps) u_eps, from the scatter of clear hours, the cover and the height of the
        clouds, added in squares. [K]

    Raises
    ------
    InputError
        As `sky_temperature`.

    References
    ----------
    .. [1] Berdahl, Fromberg, Solar Energy 29 (1982) 299-314: 0.031 for a clear hour.
    """
    held = np.clip(np.asarray(dew_point, dtype=np.float64), *DEW_POINT_RANGE)
    clear = clear_sky_emissivity_berdahl_martin(held)
    emissivity = cloudy_sky_emissivity(clear, cloud_cover, cloud_base_height=cloud_base_height)
    attenuation = np.exp(-np.asarray(cloud_base_height) / _CLOUD_SCALE_HEIGHT)
    by_clear = (1.0 - np.asarray(cloud_cover) * attenuation) * U_CLEAR_SKY_EMISSIVITY
    by_cover = (1.0 - clear) * attenuation * u_cloud_cover
    by_height = (emissivity - clear) * np.asarray(u_cloud_base_height) / _CLOUD_SCALE_HEIGHT
    spread = np.sqrt(by_clear**2 + by_cover**2 + by_height**2)
    return np.asarray(np.asarray(air_temperature) * 0.25 * emissivity**-0.75 * spread)


def outside_sky_validity(dew_point: FloatLike) -> BoolArray:
    """Where the dew point leaves the range of the clear-sky relation; NaN counts as outside.

    Parameters
    ----------
    dew_point : float or array
        [K]

    Returns
    -------
    array of bool, same shape
    """
    lowest, highest = DEW_POINT_RANGE
    given = np.asarray(dew_point, dtype=np.float64)
    return np.asarray(~((given >= lowest) & (given <= highest)))


def outdoor_surroundings(
    sky: FloatLike, ground_temperature: FloatLike, *, sky_share: FloatLike = 0.5
) -> FloatArray:
    """Radiative temperature of the surroundings of a pipe outdoors.

    Parameters
    ----------
    sky : float or array
        Total temperature of the sky. [K]
    ground_temperature : float or array
        Radiative, of the ground and of what stands at its temperature. [K]
    sky_share : float or array
        View factor from the pipe to open sky: one half in the open, at any inclination of the
        pipe, less under racks and beside walls. [-]

    Returns
    -------
    array
        Fourth root of F T_sky^4 + (1 - F) T_ground^4, of the broadcast shape. [K]

    Raises
    ------
    InputError
        If the share is outside 0 to 1.

    Notes
    -----
    The upper half of a horizontal pipe sees more sky than the lower half: top and bottom of the
    same pipe exchange with different surroundings, which this mean over the circumference hides.
    """
    share = _share("share of the sky", sky_share)
    return combined_surroundings([sky, ground_temperature], [share, 1.0 - share])


def _share(name: str, value: FloatLike) -> FloatArray:
    share = np.asarray(value, dtype=np.float64)
    wrong = (share < 0.0) | (share > 1.0)
    if np.any(wrong):
        raise InputError(f"{name} is {share[wrong].flat[0]:g}; expected 0 to 1")
    return share
