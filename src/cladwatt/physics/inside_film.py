"""The film between fluid and pipe wall: where gas or slow water leaves the wall colder."""

from __future__ import annotations

from math import pi
from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "NUSSELT_LAMINAR",
    "film_coefficient",
    "film_resistance",
    "friction_factor_smooth",
    "nusselt_dittus_boelter",
    "nusselt_gnielinski",
    "nusselt_inside",
    "outside_film_validity",
    "wall_temperature",
]

#: Fully developed laminar flow in a pipe whose wall has one temperature. [-]
NUSSELT_LAMINAR: Final = 3.66

_LAMINAR_LIMIT: Final = 2300.0
_TURBULENT_LIMIT: Final = 4000.0
_REYNOLDS_LIMIT: Final = 5e6
_PRANDTL_RANGE: Final = (0.5, 2000.0)


def friction_factor_smooth(reynolds: FloatLike) -> FloatArray:
    """Darcy friction factor of a smooth pipe, 3000 < Re < 5e6.

    Parameters
    ----------
    reynolds : float or array
        On the inner diameter. [-]

    Returns
    -------
    array, same shape
        (0.790 ln Re - 1.64)^-2. [-]

    Notes
    -----
    Within 2 % of Colebrook's equation for a smooth wall from Re 1e4 up; 4 % above it at 4000.

    References
    ----------
    .. [1] Petukhov, *Heat transfer and friction in turbulent pipe flow with variable physical
       properties*, Advances in Heat Transfer 6 (1970) 503-564; Incropera et al., eq. 8.21.
    """
    return np.asarray((0.790 * np.log(np.asarray(reynolds, dtype=np.float64)) - 1.64) ** -2)


def nusselt_gnielinski(
    reynolds: FloatLike, prandtl: FloatLike, *, friction_factor: FloatLike | None = None
) -> FloatArray:
    """Turbulent flow in a pipe, 3000 < Re < 5e6 and 0.5 < Pr < 2000.

    Parameters
    ----------
    reynolds, prandtl : float or array
        On the inner diameter, at the fluid's mean temperature. [-]
    friction_factor : float or array, optional
        Darcy's; left out, that of a smooth pipe. [-]

    Returns
    -------
    array, broadcast shape
        (f/8)(Re - 1000) Pr / (1 + 12.7 (f/8)^(1/2) (Pr^(2/3) - 1)). [-]

    Notes
    -----
    Stated to hold within about 10 %.

    References
    ----------
    .. [1] Gnielinski, *New equations for heat and mass transfer in turbulent pipe and channel
       flow*, International Chemical Engineering 16 (1976) 359-368; Incropera et al., eq. 8.62.
    """
    number = np.asarray(reynolds, dtype=np.float64)
    fluid = np.asarray(prandtl, dtype=np.float64)
    friction = friction_factor_smooth(number) if friction_factor is None else friction_factor
    eighth = np.asarray(friction) / 8.0
    damping = 1.0 + 12.7 * np.sqrt(eighth) * (fluid ** (2 / 3) - 1.0)
    return np.asarray(eighth * (number - 1000.0) * fluid / damping)


def nusselt_dittus_boelter(
    reynolds: FloatLike, prandtl: FloatLike, *, heated: bool = False
) -> FloatArray:
    """Turbulent flow in a pipe, Re > 1e4 and 0.6 < Pr < 160; simpler, for comparison.

    Parameters
    ----------
    reynolds, prandtl : float or array
        On the inner diameter, at the fluid's mean temperature. [-]
    heated : bool
        Whether the fluid takes up heat, as in a chilled line, or gives it off.

    Returns
    -------
    array, broadcast shape
        0.023 Re^0.8 Pr^n, n = 0.4 heated, 0.3 cooled. [-]

    Notes
    -----
    Errors up to 25 % are stated. For gas and hot water (Pr up to 2) it stays that near to
    `nusselt_gnielinski`; for cold water (Pr 7) it lies 18 to 41 % below.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, eq. 8.60; after Dittus and Boelter (1930) and McAdams.
    """
    number = np.asarray(reynolds, dtype=np.float64)
    fluid = np.asarray(prandtl, dtype=np.float64)
    return np.asarray(0.023 * number**0.8 * fluid ** (0.4 if heated else 0.3))


def nusselt_inside(reynolds: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Flow in a long pipe at any speed.

    Parameters
    ----------
    reynolds, prandtl : float or array
        On the inner diameter; Re up to 5e6. [-]

    Returns
    -------
    array, broadcast shape
        3.66 up to Re 2300, Gnielinski from 4000, straight between the two. [-]

    Notes
    -----
    Laminar flow is taken as fully developed without free convection, so the coefficient of slow
    flow is a lower bound, and the resistance of its film an upper one.

    References
    ----------
    .. [1] Gnielinski, *On heat transfer in tubes*, Int. J. Heat Mass Transfer 63 (2013) 134-140:
       the straight line between 2300 and 4000.
    """
    number = np.asarray(reynolds, dtype=np.float64)
    share = np.clip((number - _LAMINAR_LIMIT) / (_TURBULENT_LIMIT - _LAMINAR_LIMIT), 0.0, 1.0)
    turbulent = nusselt_gnielinski(np.maximum(number, _TURBULENT_LIMIT), prandtl)
    return np.asarray(NUSSELT_LAMINAR + share * (turbulent - NUSSELT_LAMINAR))


def film_coefficient(
    speed: FloatLike,
    inner_diameter: FloatLike,
    *,
    density: FloatLike,
    dynamic_viscosity: FloatLike,
    conductivity: FloatLike,
    specific_heat: FloatLike,
) -> FloatArray:
    """Film coefficient of a fluid that flows in a pipe.

    Parameters
    ----------
    speed : float or array
        Mean over the cross section, 0 or more. [m/s]
    inner_diameter : float or array
        Of the pipe. [m]
    density, dynamic_viscosity, conductivity, specific_heat : float or array
        Of the fluid at its temperature. [kg/m3], [Pa s], [W/(m K)], [J/(kg K)]

    Returns
    -------
    array, broadcast shape
        Referred to the inner face. [W/(m2 K)]

    Raises
    ------
    InputError
        If the speed is negative or another value not above 0.

    Notes
    -----
    Without change of phase: condensing steam has some 5000 W/(m2 K) and more, no film worth
    counting.

    Examples
    --------
    Nitrogen at 20 bar and 250 °C, 10 m/s in a pipe of 100 mm:

    >>> h = film_coefficient(10.0, 0.1, density=12.8, dynamic_viscosity=27.5e-6,
    ...                      conductivity=0.041, specific_heat=1070.0)
    >>> round(float(h))
    253
    """
    if np.any(np.asarray(speed) < 0.0):
        raise InputError(f"speed is {np.min(speed):g} m/s; expected 0 or more")
    _above_zero("inner diameter", inner_diameter, "m")
    _above_zero("density", density, "kg/m3")
    _above_zero("dynamic viscosity", dynamic_viscosity, "Pa s")
    _above_zero("conductivity", conductivity, "W/(m K)")
    _above_zero("specific heat", specific_heat, "J/(kg K)")
    diameter = np.asarray(inner_diameter, dtype=np.float64)
    viscosity = np.asarray(dynamic_viscosity)
    reynolds = np.asarray(density) * np.asarray(speed) * diameter / viscosity
    prandtl = viscosity * np.asarray(specific_heat) / np.asarray(conductivity)
    return np.asarray(nusselt_inside(reynolds, prandtl) * np.asarray(conductivity) / diameter)


def film_resistance(inner_diameter: FloatLike, coefficient: FloatLike) -> FloatArray:
    """Resistance of the film per metre of pipe.

    Parameters
    ----------
    inner_diameter : float or array
        Of the pipe. [m]
    coefficient : float or array
        Of the film. [W/(m2 K)]

    Returns
    -------
    array, broadcast shape
        1 / (pi D h). [m K/W]

    Raises
    ------
    InputError
        If a value is not above 0.
    """
    _above_zero("inner diameter", inner_diameter, "m")
    _above_zero("film coefficient", coefficient, "W/(m2 K)")
    diameter = np.asarray(inner_diameter, dtype=np.float64)
    return np.asarray(1.0 / (pi * diameter * np.asarray(coefficient)))


def wall_temperature(
    fluid_temperature: FloatLike, heat_loss: FloatLike, resistance: FloatLike
) -> FloatArray:
    """Temperature of the pipe wall from that of the fluid.

    Parameters
    ----------
    fluid_temperature : float or array
        [K]
    heat_loss : float or array
        Per metre, negative for a gain. [W/m]
    resistance : float or array
        Of the film, see `film_resistance`, and of whatever else lies between. [m K/W]

    Returns
    -------
    array, broadcast shape
        Colder than the fluid where heat is lost, warmer where it is gained. [K]
    """
    drop = np.asarray(heat_loss, dtype=np.float64) * resistance
    return np.asarray(np.asarray(fluid_temperature, dtype=np.float64) - drop)


def outside_film_validity(reynolds: FloatLike, prandtl: FloatLike) -> BoolArray:
    """Where `nusselt_inside` leaves the range of its correlations; NaN counts as outside.

    Parameters
    ----------
    reynolds, prandtl : float or array
        [-]

    Returns
    -------
    array of bool, broadcast shape
    """
    number = np.asarray(reynolds, dtype=np.float64)
    fluid = np.asarray(prandtl, dtype=np.float64)
    lowest, highest = _PRANDTL_RANGE
    inside = (number >= 0.0) & (number <= _REYNOLDS_LIMIT) & (fluid >= lowest) & (fluid <= highest)
    return np.asarray(~inside)


def _above_zero(name: str, value: FloatLike, unit: str) -> None:
    if np.any(np.asarray(value) <= 0.0):
        raise InputError(f"{name} is {np.min(value):g} {unit}; expected above 0")
