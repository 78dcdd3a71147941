"""Radiative exchange of a small grey surface with large surroundings."""

from collections.abc import Sequence

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.constants import STEFAN_BOLTZMANN
from cladwatt.types import FloatArray, FloatLike

__all__ = ["combined_surroundings", "radiative_coefficient", "radiative_flux"]


def radiative_flux(
    surface_temperature: FloatLike, *, emissivity: FloatLike, surroundings_temperature: FloatLike
) -> FloatArray:
    """Net flux radiated by a surface; negative where it gains.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    emissivity : float or array
        Total hemispherical emissivity, not the one in the camera's band. [-]
    surroundings_temperature : float or array
        Radiative temperature of the surroundings, see `combined_surroundings`. [K]

    Returns
    -------
    array
        eps sigma (Ts^4 - Tsur^4), of the broadcast shape. [W/m2]

    Notes
    -----
    Grey, diffuse, convex surface much smaller than its surroundings. The difference of fourth
    powers is taken as a product, which loses no digits where the temperatures are nearly equal.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, eq. 1.7.

    Examples
    --------
    A metre of bare 70 mm pipe at 200 °C in a room at 25 °C (example 1.2 of the same book):

    >>> flux = radiative_flux(473.15, emissivity=0.8, surroundings_temperature=298.15)
    >>> round(float(flux) * 3.14159 * 0.07)
    421
    """
    surface, surroundings = _arrays(surface_temperature, surroundings_temperature)
    difference = surface - surroundings
    return difference * _coefficient(surface, surroundings, emissivity)


def radiative_coefficient(
    surface_temperature: FloatLike, *, emissivity: FloatLike, surroundings_temperature: FloatLike
) -> FloatArray:
    """Radiative heat transfer coefficient referred to the surroundings' temperature.

    Parameters
    ----------
    surface_temperature, emissivity, surroundings_temperature : float or array
        As for `radiative_flux`. [K], [-], [K]

    Returns
    -------
    array
        eps sigma (Ts + Tsur)(Ts^2 + Tsur^2); finite where the temperatures are equal. [W/(m2 K)]

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, eq. 1.9.
    """
    surface, surroundings = _arrays(surface_temperature, surroundings_temperature)
    return _coefficient(surface, surroundings, emissivity)


def combined_surroundings(
    temperatures: Sequence[FloatLike], view_factors: Sequence[FloatLike]
) -> FloatArray:
    """One radiative temperature for surroundings made of several parts.

    Parameters
    ----------
    temperatures : sequence of float or array
        Temperature of each part (sky, ground, wall, neighbouring pipe); shapes broadcast. [K]
    view_factors : sequence of float or array
        View factor from the surface to each part; they sum to one. [-]

    Returns
    -------
    array
        Fourth root of the sum of F T^4. [K]

    Raises
    ------
    InputError
        If the lengths differ, a view factor is negative or they do not sum to one.

    Notes
    -----
    The parts are taken as black; a part with emissivity below one must be given its apparent
    temperature.
    """
    if len(temperatures) != len(view_factors) or not len(temperatures):
        raise InputError(
            f"{len(temperatures)} temperatures and {len(view_factors)} view factors; "
            "expected one view factor for each temperature"
        )
    factors = [np.asarray(factor, dtype=np.float64) for factor in view_factors]
    total = np.asarray(sum(factors))
    if any(np.any(factor < 0) for factor in factors) or np.any(np.abs(total - 1.0) > 1e-6):
        raise InputError(
            f"view factors {[np.round(factor, 6).tolist() for factor in factors]}; "
            "expected none negative and a sum of 1"
        )
    fourth_power = sum(
        factor * np.square(np.square(np.asarray(temperature, dtype=np.float64)))
        for factor, temperature in zip(factors, temperatures, strict=True)
    )
    return np.asarray(np.sqrt(np.sqrt(fourth_power / total)))


def _arrays(first: FloatLike, second: FloatLike) -> tuple[FloatArray, FloatArray]:
    return np.asarray(first, dtype=np.float64), np.asarray(second, dtype=np.float64)


def _coefficient(
    surface: FloatArray, surroundings: FloatArray, emissivity: FloatLike
) -> FloatArray:
    squares = surface * surface + surroundings * surroundings
    return np.asarray((emissivity * STEFAN_BOLTZMANN) * ((surface + surroundings) * squares))
