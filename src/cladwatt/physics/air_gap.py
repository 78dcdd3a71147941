"""Resistance of an annular air gap, and of a contact, per metre of pipe."""

from __future__ import annotations

from math import pi
from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.air import air_properties
from cladwatt.physics.constants import GRAVITY, STANDARD_PRESSURE, STEFAN_BOLTZMANN
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "air_gap_conductance",
    "air_gap_resistance",
    "annulus_conductivity_ratio",
    "annulus_radiative_conductance",
    "annulus_rayleigh",
    "concentric_exchange_emissivity",
    "contact_resistance",
    "outside_air_gap_validity",
]

_RAYLEIGH_LIMIT: Final = 1e7


def annulus_rayleigh(
    inner_diameter: FloatLike,
    outer_diameter: FloatLike,
    *,
    inner_temperature: FloatLike,
    outer_temperature: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Rayleigh number of the air between two horizontal concentric cylinders.

    Parameters
    ----------
    inner_diameter, outer_diameter : float or array
        Of the two faces; the outer one larger. [m]
    inner_temperature, outer_temperature : float or array
        Of the two faces. [K]
    pressure : float or array
        Absolute. [Pa]

    Returns
    -------
    array, broadcast shape
        On the length 2 ln(Do/Di)^(4/3) / (ri^(-3/5) + ro^(-3/5))^(5/3). [-]

    Raises
    ------
    InputError
        If the outer diameter is not larger than the inner one, or the inner one not above 0.

    References
    ----------
    .. [1] Raithby, Hollands, *A general method of obtaining approximate solutions to laminar and
       turbulent free convection problems*, Advances in Heat Transfer 11 (1975) 265-315.
    .. [2] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, eq. 9.60.
    """
    inner, outer = _checked_radii(inner_diameter, outer_diameter)
    length = 2.0 * np.log(outer / inner) ** (4 / 3) / (inner**-0.6 + outer**-0.6) ** (5 / 3)
    warm = np.asarray(inner_temperature, dtype=np.float64)
    mean = 0.5 * (warm + outer_temperature)
    air = air_properties(mean, pressure)
    difference = np.abs(warm - outer_temperature)
    diffusivity = air.conductivity / (air.density * air.specific_heat)
    buoyancy = GRAVITY * air.expansion * difference * length**3
    return np.asarray(buoyancy / (air.kinematic_viscosity * diffusivity))


def annulus_conductivity_ratio(rayleigh: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Effective over molecular conductivity of the air between horizontal concentric cylinders.

    Parameters
    ----------
    rayleigh : float or array
        As of `annulus_rayleigh`, up to 1e7. [-]
    prandtl : float or array
        0.7 to 6000. [-]

    Returns
    -------
    array
        0.386 (Pr / (0.861 + Pr))^(1/4) Ra^(1/4), at least one: conduction. [-]

    References
    ----------
    .. [1] Raithby, Hollands, Advances in Heat Transfer 11 (1975) 265-315; Incropera et al.,
       eq. 9.59.
    """
    fluid = np.asarray(prandtl, dtype=np.float64)
    factor = fluid / (0.861 + fluid) * np.asarray(rayleigh, dtype=np.float64)
    return np.asarray(np.maximum(1.0, 0.386 * np.sqrt(np.sqrt(factor))))


def concentric_exchange_emissivity(
    inner_emissivity: FloatLike, outer_emissivity: FloatLike, radius_ratio: FloatLike
) -> FloatArray:
    """Exchange factor of two long concentric grey cylinders, referred to the inner face.

    Parameters
    ----------
    inner_emissivity, outer_emissivity : float or array
        Total hemispherical, of the two faces, 0 < value <= 1. [-]
    radius_ratio : float or array
        Inner over outer radius, 0 to 1. [-]

    Returns
    -------
    array
        1 / (1/eps_i + (1/eps_o - 1) ri/ro). [-]

    Raises
    ------
    InputError
        If an emissivity is not above 0 and at most 1.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, table 13.3, concentric cylinders.
    """
    inner, outer = _emissivity(inner_emissivity), _emissivity(outer_emissivity)
    return np.asarray(1.0 / (1.0 / inner + (1.0 / outer - 1.0) * radius_ratio))


def annulus_radiative_conductance(
    inner_diameter: FloatLike,
    outer_diameter: FloatLike,
    *,
    inner_temperature: FloatLike,
    outer_temperature: FloatLike,
    inner_emissivity: FloatLike,
    outer_emissivity: FloatLike,
) -> FloatArray:
    """Heat radiated across the gap per metre and kelvin.

    Parameters
    ----------
    inner_diameter, outer_diameter, inner_temperature, outer_temperature : float or array
        As for `annulus_rayleigh`.
    inner_emissivity, outer_emissivity : float or array
        Total hemispherical, of the two faces. [-]

    Returns
    -------
    array, broadcast shape
        [W/(m K)]

    Raises
    ------
    InputError
        As `annulus_rayleigh` and `concentric_exchange_emissivity`.
    """
    inner, outer = _checked_radii(inner_diameter, outer_diameter)
    exchange = concentric_exchange_emissivity(inner_emissivity, outer_emissivity, inner / outer)
    first = np.asarray(inner_temperature, dtype=np.float64)
    second = np.asarray(outer_temperature, dtype=np.float64)
    slope = STEFAN_BOLTZMANN * (first + second) * (first**2 + second**2)
    return np.asarray(2.0 * pi * inner * exchange * slope)


def air_gap_conductance(
    inner_diameter: FloatLike,
    outer_diameter: FloatLike,
    *,
    inner_temperature: FloatLike,
    outer_temperature: FloatLike,
    inner_emissivity: FloatLike,
    outer_emissivity: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Heat crossing an annular air gap per metre and kelvin, radiation included.

    Parameters
    ----------
    inner_diameter, outer_diameter : float or array
        Of the two faces; the outer one larger. [m]
    inner_temperature, outer_temperature : float or array
        Of the two faces. [K]
    inner_emissivity, outer_emissivity : float or array
        Total hemispherical, of the two faces. [-]
    pressure : float or array
        Absolute. [Pa]

    Returns
    -------
    array, broadcast shape
        [W/(m K)]

    Raises
    ------
    InputError
        As `annulus_rayleigh` and `concentric_exchange_emissivity`.

    Notes
    -----
    Air and radiation act side by side. Held for horizontal, closed, concentric gaps; a gap of a
    few millimetres only conducts, at any inclination. Where air can pass through, as at an open
    joint, nothing here holds.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 9.8.2 and table 13.3.
    """
    inner, outer = _checked_radii(inner_diameter, outer_diameter)
    rayleigh = annulus_rayleigh(
        inner_diameter,
        outer_diameter,
        inner_temperature=inner_temperature,
        outer_temperature=outer_temperature,
        pressure=pressure,
    )
    mean = 0.5 * (np.asarray(inner_temperature, dtype=np.float64) + outer_temperature)
    air = air_properties(mean, pressure)
    effective = air.conductivity * annulus_conductivity_ratio(rayleigh, air.prandtl)
    radiation = annulus_radiative_conductance(
        inner_diameter,
        outer_diameter,
        inner_temperature=inner_temperature,
        outer_temperature=outer_temperature,
        inner_emissivity=inner_emissivity,
        outer_emissivity=outer_emissivity,
    )
    return np.asarray(2.0 * pi * effective / np.log(outer / inner) + radiation)


def air_gap_resistance(
    inner_diameter: FloatLike,
    outer_diameter: FloatLike,
    *,
    inner_temperature: FloatLike,
    outer_temperature: FloatLike,
    inner_emissivity: FloatLike,
    outer_emissivity: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Resistance of an annular air gap per metre, the inverse of `air_gap_conductance`.

    Parameters
    ----------
    inner_diameter, outer_diameter, inner_temperature, outer_temperature : float or array
        As for `air_gap_conductance`.
    inner_emissivity, outer_emissivity, pressure : float or array
        As for `air_gap_conductance`.

    Returns
    -------
    array, broadcast shape
        [m K/W]

    Raises
    ------
    InputError
        As `air_gap_conductance`.
    """
    conductance = air_gap_conductance(
        inner_diameter,
        outer_diameter,
        inner_temperature=inner_temperature,
        outer_temperature=outer_temperature,
        inner_emissivity=inner_emissivity,
        outer_emissivity=outer_emissivity,
        pressure=pressure,
    )
    return np.asarray(1.0 / conductance)


def contact_resistance(
    diameter: FloatLike,
    mean_gap: FloatLike,
    temperature: FloatLike,
    *,
    inner_emissivity: FloatLike = 0.9,
    outer_emissivity: FloatLike = 0.9,
) -> FloatArray:
    """Resistance per metre where two faces touch in places and stand apart by a mean gap.

    Parameters
    ----------
    diameter : float or array
        At the contact. [m]
    mean_gap : float or array
        Mean distance of the faces, small against the diameter; 0 is perfect contact. [m]
    temperature : float or array
        At the contact. [K]
    inner_emissivity, outer_emissivity : float or array
        Total hemispherical, of the two faces; 0.9 is that of lagging and dull metal. [-]

    Returns
    -------
    array, broadcast shape
        1 / (pi D (k_air / gap + eps 4 sigma T^3)). [m K/W]

    Raises
    ------
    InputError
        If the gap is negative, the diameter not above 0, or an emissivity outside 0 to 1.

    Notes
    -----
    Still air and radiation side by side, conduction at the touching points neglected. The mean gap
    between lagging and cladding, some tenths of a millimetre to a few millimetres, is common
    practice, no source; it is worth little more than the same thickness of mineral wool.
    """
    gap = np.asarray(mean_gap, dtype=np.float64)
    if np.any(gap < 0.0):
        raise InputError(f"mean gap is {np.min(gap):g} m; expected 0 or more")
    if np.any(np.asarray(diameter) <= 0.0):
        raise InputError(f"diameter is {np.min(diameter):g} m; expected above 0")
    kelvin = np.asarray(temperature, dtype=np.float64)
    exchange = concentric_exchange_emissivity(inner_emissivity, outer_emissivity, 1.0)
    radiation = 4.0 * STEFAN_BOLTZMANN * exchange * kelvin**3
    conductivity = air_properties(kelvin).conductivity
    # gap / (k + gap h) is 1 / (k/gap + h) without dividing by a gap of 0
    return np.asarray(gap / (conductivity + gap * radiation) / (pi * np.asarray(diameter)))


def outside_air_gap_validity(rayleigh: FloatLike) -> BoolArray:
    """Where the Rayleigh number leaves the range of the correlation; NaN counts as outside.

    Parameters
    ----------
    rayleigh : float or array
        As of `annulus_rayleigh`. [-]

    Returns
    -------
    array of bool, same shape
    """
    return np.asarray(~(np.asarray(rayleigh, dtype=np.float64) <= _RAYLEIGH_LIMIT))


def _checked_radii(
    inner_diameter: FloatLike, outer_diameter: FloatLike
) -> tuple[FloatArray, FloatArray]:
    inner = 0.5 * np.asarray(inner_diameter, dtype=np.float64)
    outer = 0.5 * np.asarray(outer_diameter, dtype=np.float64)
    if np.any((inner <= 0.0) | (outer <= inner)):
        raise InputError(
            f"air gap from {np.min(2 * inner):g} m to {np.min(2 * outer):g} m diameter; expected "
            "an inner diameter above 0 and an outer one larger"
        )
    return inner, outer


def _emissivity(value: FloatLike) -> FloatArray:
    emissivity = np.asarray(value, dtype=np.float64)
    wrong = (emissivity <= 0.0) | (emissivity > 1.0)
    if np.any(wrong):
        raise InputError(
            f"emissivity is {emissivity[wrong].flat[0]:g}; expected above 0 and at most 1"
        )
    return emissivity
