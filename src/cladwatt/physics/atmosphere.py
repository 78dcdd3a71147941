"""Transmission of humid air between pipe and camera in the long-wave bands."""

from __future__ import annotations

from typing import Final, NamedTuple

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.humidity import absolute_humidity
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "LIMIT_ABSOLUTE",
    "LIMIT_RELATIVE",
    "MAXIMUM_DISTANCE",
    "air_path_transmission",
    "air_path_transmission_uncertainty",
    "is_known_band",
]

#: Longest path accepted; the fit's table ends at 100 m. [m]
MAXIMUM_DISTANCE: Final = 150.0

#: Limits of error of the band model at short paths: the larger of this transmission and this
#: share of the absorption.
LIMIT_ABSOLUTE: Final = 0.005
LIMIT_RELATIVE: Final = 0.2

_AIR_TEMPERATURES_ACCEPTED: Final = (ZERO_CELSIUS - 50.0, ZERO_CELSIUS + 60.0)
_FURTHEST_BAND_EDGE: Final = 0.6e-6
_REFERENCE_TEMPERATURE: Final = ZERO_CELSIUS + 20.0
_REFERENCE_HUMIDITY: Final = 0.010  # [kg/m3]


class _Coefficients(NamedTuple):
    """-ln tau = dry L^p + line (w/w0)^q (T/T0)^s L^r + continuum (w/w0)^2 L, L in metres."""

    dry: float
    dry_power: float
    line: float
    line_humidity_power: float
    line_power: float
    line_temperature_power: float
    continuum: float


# Least squares to 105 rows of LOWTRAN 7 (AFGL-TR-88-0177): 0-40 °C, 20-80 %, 1-100 m, sea level,
# weighted with a black body at 300 K. Keys: band in µm.
_FITS: Final = {
    (7.5, 14.0): _Coefficients(2.0044e-3, 0.5980, 4.3270e-3, 0.5699, 0.5400, 1.305, 1.0278e-4),
    (8.0, 14.0): _Coefficients(1.8193e-3, 0.5939, 2.7025e-3, 0.5615, 0.5521, 1.426, 1.0820e-4),
    (7.5, 13.0): _Coefficients(5.8703e-4, 0.6352, 4.2565e-3, 0.5684, 0.5339, 1.043, 8.8848e-5),
    (8.0, 12.0): _Coefficients(1.1097e-4, 0.7601, 2.1644e-3, 0.5289, 0.5453, 1.018, 7.9822e-5),
}


def is_known_band(band_limits: tuple[float, float]) -> bool:
    """Return whether the transmission of air is held for a band near this one.

    Parameters
    ----------
    band_limits : (float, float)
        [m]
    """
    return _band_distance(_nearest_band(band_limits), band_limits) <= _FURTHEST_BAND_EDGE + 1e-12


def _band_distance(key: tuple[float, float], band_limits: tuple[float, float]) -> float:
    return max(abs(key[0] * 1e-6 - band_limits[0]), abs(key[1] * 1e-6 - band_limits[1]))


def _nearest_band(band_limits: tuple[float, float]) -> tuple[float, float]:
    return min(_FITS, key=lambda key: _band_distance(key, band_limits))


def _coefficients(band_limits: tuple[float, float]) -> _Coefficients:
    nearest = _nearest_band(band_limits)
    if not is_known_band(band_limits):
        known = ", ".join(f"{lower:g}-{upper:g}" for lower, upper in _FITS)
        raise InputError(
            f"band is {band_limits[0] * 1e6:g}-{band_limits[1] * 1e6:g} µm; the transmission of air"
            f" is known for bands near {known} µm. Declare the transmission instead"
        )
    return _FITS[nearest]


def _check_range(name: str, value: FloatLike, lower: float, upper: float, unit: str) -> None:
    array = np.asarray(value, dtype=np.float64)
    wrong = (array < lower) | (array > upper)
    if np.any(wrong):
        raise InputError(
            f"{name} is {array[wrong].ravel()[0]:g} {unit}; "
            f"expected {lower:g} to {upper:g} {unit}, or declare the transmission instead"
        )


def air_path_transmission(
    distance: FloatLike,
    *,
    air_temperature: FloatLike,
    relative_humidity: FloatLike,
    band_limits: tuple[float, float],
) -> FloatArray:
    """Transmission of a horizontal path through humid air, no haze, in a camera's band.

    Parameters
    ----------
    distance : float or array
        Length of the path, 0 to 150. [m]
    air_temperature : float or array
        Air temperature, -50 °C to 60 °C. [K]
    relative_humidity : float or array
        Relative humidity, 0 <= value <= 1. [-]
    band_limits : (float, float)
        Lower and upper wavelength; each within 0.6 µm of 7.5-14, 8-14, 7.5-13 or 8-12 µm, of
        which the nearest is taken. [m]

    Returns
    -------
    array, broadcast shape
        Transmission; NaN where an argument is NaN. [-]

    Raises
    ------
    InputError
        If an argument is outside its range or the band is not known.

    Notes
    -----
    Broad-band absorption does not follow the exponential law, since the strong lines saturate
    within metres: -ln tau grows about as L^0.58. The form fitted has a dry part, a water-line part
    and a water continuum. It is within 0.0007 of the table up to 20 m, 0.0009 up to 50 m and
    0.002 up to 100 m; the table itself is the weaker link, see
    `air_path_transmission_uncertainty`. Below 0 °C, above 40 °C and
    above 41 g/m3 of vapour the fit is continued. Sea-level
    pressure is taken; on a mountain the air is a little clearer. Haze, fog, rain, steam leaks and
    dust are not in it.

    References
    ----------
    .. [1] F. X. Kneizys et al., *Users Guide to LOWTRAN 7*, AFGL-TR-88-0177, 1988.

    Examples
    --------
    >>> tau = air_path_transmission(
    ...     10.0, air_temperature=293.15, relative_humidity=0.5, band_limits=(7.5e-6, 14e-6)
    ... )
    >>> round(float(tau), 3)
    0.978
    """
    _check_range("distance", distance, 0.0, MAXIMUM_DISTANCE, "m")
    _check_range("air temperature", air_temperature, *_AIR_TEMPERATURES_ACCEPTED, "K")
    fit = _coefficients(band_limits)
    path = np.asarray(distance, dtype=np.float64)
    vapour = absolute_humidity(air_temperature, relative_humidity) / _REFERENCE_HUMIDITY
    warmth = np.asarray(air_temperature) / _REFERENCE_TEMPERATURE
    depth = (
        fit.dry * path**fit.dry_power
        + fit.line
        * vapour**fit.line_humidity_power
        * warmth**fit.line_temperature_power
        * path**fit.line_power
        + fit.continuum * vapour**2 * path
    )
    return np.asarray(np.exp(-depth))


def air_path_transmission_uncertainty(transmission: FloatLike) -> FloatArray:
    """Return the standard uncertainty of a transmission from `air_path_transmission`.

    Parameters
    ----------
    transmission : float or array
        Transmission, 0 <= value <= 1. [-]

    Returns
    -------
    array, same shape
        Standard uncertainty. [-]

    Notes
    -----
    A band model of 20 cm^-1 resolution is good at metre-scale paths to the larger of 0.005 and
    20 % of 1 - tau, taken as limits of error (u = limit / sqrt(3), JCGM 100:2008, 4.3.7). A path
    cannot amplify, so the limit is never larger than 1 - tau.
    """
    _check_range("transmission", transmission, 0.0, 1.0, "(share)")
    absorption = 1.0 - np.asarray(transmission, dtype=np.float64)
    limit = np.minimum(np.maximum(LIMIT_ABSOLUTE, LIMIT_RELATIVE * absorption), absorption)
    return np.asarray(limit / np.sqrt(3.0))
