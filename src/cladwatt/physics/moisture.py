"""Conductivity of wet and of frozen lagging: ranges and bounds, never one value.

How much water lies where in lagging nobody knows from outside, and published multipliers of the
dry conductivity reach from 1 to 10, to 185 in a flooded line. What is here says how far off a
number may be; it corrects none.
"""

from __future__ import annotations

from typing import Final, NamedTuple

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.air import air_properties
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "ICE_CONDUCTIVITY_RANGE",
    "WATER_CONDUCTIVITY_RANGE",
    "ConductivityRange",
    "frozen_conductivity_range",
    "ice_conductivity",
    "moist_conductivity_bounds",
    "moisture_conversion_factor",
    "outside_moisture_validity",
    "water_conductivity",
    "wet_conductivity_range",
]

#: Temperatures the water's conductivity is stated for. [K]
WATER_CONDUCTIVITY_RANGE: Final = (274.0, 370.0)

#: Temperatures the ice's conductivity is stated for. [K]
ICE_CONDUCTIVITY_RANGE: Final = (150.0, 273.15)

_HYGROSCOPIC_LIMIT: Final = 0.15
_FREEZING: Final = 273.15


class ConductivityRange(NamedTuple):
    """Between which conductivities moist lagging may lie.

    Parameters
    ----------
    low, high : array
        [W/(m K)]
    """

    low: FloatArray
    high: FloatArray


def water_conductivity(temperature: FloatLike) -> FloatArray:
    """Thermal conductivity of liquid water near atmospheric pressure, 274 K to 370 K.

    Parameters
    ----------
    temperature : float or array
        Held within `WATER_CONDUCTIVITY_RANGE`; NaN gives NaN. [K]

    Returns
    -------
    array, same shape
        0.6065 (-1.48445 + 4.12292 t - 1.63866 t^2), t = T / 298.15 K. [W/(m K)]

    References
    ----------
    .. [1] Ramires, Nieto de Castro, Nagasaka, Nagashima, Assael, Wakeham, *Standard reference data
       for the thermal conductivity of water*, J. Phys. Chem. Ref. Data 24 (1995) 1377-1381.

    Examples
    --------
    >>> round(float(water_conductivity(298.15)), 2)
    0.61
    """
    held = np.clip(np.asarray(temperature, dtype=np.float64), *WATER_CONDUCTIVITY_RANGE)
    t = held / 298.15
    return np.asarray(0.6065 * (-1.48445 + t * (4.12292 - 1.63866 * t)))


def ice_conductivity(temperature: FloatLike) -> FloatArray:
    """Thermal conductivity of solid ice, 150 K to 273 K.

    Parameters
    ----------
    temperature : float or array
        Held within `ICE_CONDUCTIVITY_RANGE`; NaN gives NaN. [K]

    Returns
    -------
    array, same shape
        0.4685 + 488.19 / T. [W/(m K)]

    Notes
    -----
    Sources differ by some 10 %. Rime and frost, which hold air, conduct a tenth to a half of it.

    References
    ----------
    .. [1] Hobbs, *Ice Physics*, Oxford, 1974, chapter 5.
    """
    held = np.clip(np.asarray(temperature, dtype=np.float64), *ICE_CONDUCTIVITY_RANGE)
    return np.asarray(0.4685 + 488.19 / held)


def moisture_conversion_factor(moisture: FloatLike, coefficient: FloatLike) -> FloatArray:
    """Moist over dry conductivity in the hygroscopic range, below 0.15 by volume.

    Parameters
    ----------
    moisture : float or array
        Volume of water in a volume of lagging, 0 <= value <= 1. [-]
    coefficient : float or array
        Conversion coefficient of the material by volume: 4 for mineral wool, 6 for polyurethane,
        0 for cellular glass. [-]

    Returns
    -------
    array, broadcast shape
        exp(f moisture). [-]

    Raises
    ------
    InputError
        If the moisture is outside 0 to 1 or the coefficient negative.

    References
    ----------
    .. [1] ISO 10456:2007, *Building materials and products: hygrothermal properties*, clause 7.3
       and table 4.
    """
    content = _share("moisture", moisture)
    if np.any(np.asarray(coefficient) < 0.0):
        raise InputError(f"coefficient is {np.min(coefficient):g}; expected 0 or more")
    return np.asarray(np.exp(content * np.asarray(coefficient)))


def outside_moisture_validity(moisture: FloatLike) -> BoolArray:
    """Where the conversion factor no longer holds: free water; NaN counts as outside.

    Parameters
    ----------
    moisture : float or array
        [-]

    Returns
    -------
    array of bool, same shape
    """
    content = np.asarray(moisture, dtype=np.float64)
    return np.asarray(~((content >= 0.0) & (content < _HYGROSCOPIC_LIMIT)))


def moist_conductivity_bounds(
    dry_conductivity: FloatLike, moisture: FloatLike, temperature: FloatLike
) -> ConductivityRange:
    """Bounds of the conductivity at a moisture by volume, as water above 0 °C and ice below.

    Parameters
    ----------
    dry_conductivity : float or array
        [W/(m K)]
    moisture : float or array
        Volume of water or ice in a volume of lagging, 0 <= value <= 1. [-]
    temperature : float or array
        Of the moist part. [K]

    Returns
    -------
    ConductivityRange
        Low: the water as a layer across the flow of heat. High: as a path along it, in the place
        of air.

    Raises
    ------
    InputError
        If the moisture is outside 0 to 1 or the conductivity not above 0.

    Notes
    -----
    Nothing that only conducts lies outside these bounds. Vapour that evaporates at the hot side
    and condenses at the cold one carries heat besides, and in lagging that boils exceeds them by
    far.

    References
    ----------
    .. [1] Wiener, *Die Theorie des Mischkörpers für das Feld der stationären Strömung*,
       Abhandlungen der Sächsischen Akademie der Wissenschaften 32 (1912) 507-604.
    """
    dry = _conductivity(dry_conductivity)
    content = _share("moisture", moisture)
    kelvin = np.asarray(temperature, dtype=np.float64)
    filling = np.where(kelvin < _FREEZING, ice_conductivity(kelvin), water_conductivity(kelvin))
    filling = np.where(np.isnan(kelvin), np.nan, filling)
    low = 1.0 / ((1.0 - content) / dry + content / filling)
    high = dry + content * (filling - air_properties(kelvin).conductivity)
    return ConductivityRange(np.asarray(low), np.asarray(high))


def wet_conductivity_range(
    dry_conductivity: FloatLike, ratio_low: FloatLike, ratio_high: FloatLike
) -> ConductivityRange:
    """Range of the conductivity of wet lagging by published multipliers of the dry one.

    Parameters
    ----------
    dry_conductivity : float or array
        [W/(m K)]
    ratio_low, ratio_high : float or array
        Smallest and largest published ratio for the material, 1 or more. [-]

    Returns
    -------
    ConductivityRange
        Arrays of the broadcast shape.

    Raises
    ------
    InputError
        If the conductivity is not above 0, a ratio below 1 or the high one below the low one.
    """
    dry = _conductivity(dry_conductivity)
    low, high = _ratios(ratio_low, ratio_high)
    return ConductivityRange(np.asarray(dry * low), np.asarray(dry * high))


def frozen_conductivity_range(
    dry_conductivity: FloatLike,
    ratio_low: FloatLike,
    ratio_high: FloatLike,
    temperature: FloatLike,
) -> ConductivityRange:
    """Range of the conductivity of lagging with ice in it, from multipliers found with water.

    Parameters
    ----------
    dry_conductivity, ratio_low, ratio_high : float or array
        As for `wet_conductivity_range`.
    temperature : float or array
        Of the frozen part, held at most at 0 °C. [K]

    Returns
    -------
    ConductivityRange
        Arrays of the broadcast shape; never above that of ice in every pore.

    Raises
    ------
    InputError
        As `wet_conductivity_range`.

    Notes
    -----
    What water added is multiplied by the ratio of ice's conductivity to water's at 0 °C, about 4,
    at the high end, and taken over as it is at the low end. An assumption, no source: no
    measurement on frozen pipe lagging was found.
    """
    dry = _conductivity(dry_conductivity)
    low, high = _ratios(ratio_low, ratio_high)
    ice = ice_conductivity(temperature)
    gain = ice / water_conductivity(_FREEZING)
    highest = np.minimum(dry * (1.0 + (high - 1.0) * gain), np.maximum(ice, dry))
    return ConductivityRange(np.asarray(dry * low + 0.0 * gain), np.asarray(highest))


def _conductivity(value: FloatLike) -> FloatArray:
    given = np.asarray(value, dtype=np.float64)
    if np.any(given <= 0.0):
        raise InputError(f"dry conductivity is {np.min(given):g} W/(m K); expected above 0")
    return given


def _ratios(ratio_low: FloatLike, ratio_high: FloatLike) -> tuple[FloatArray, FloatArray]:
    low = np.asarray(ratio_low, dtype=np.float64)
    high = np.asarray(ratio_high, dtype=np.float64)
    if np.any(low < 1.0) or np.any(high < low):
        raise InputError(
            f"multipliers are {np.min(low):g} to {np.min(high):g}; expected 1 or more, the low one "
            "first"
        )
    return low, high


def _share(name: str, value: FloatLike) -> FloatArray:
    share = np.asarray(value, dtype=np.float64)
    wrong = (share < 0.0) | (share > 1.0)
    if np.any(wrong):
        raise InputError(f"{name} is {share[wrong].flat[0]:g}; expected 0 to 1")
    return share
