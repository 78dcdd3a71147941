"""Nusselt numbers for air blowing across a cylinder."""

import numpy as np

from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "nusselt_churchill_bernstein",
    "nusselt_hilpert",
    "nusselt_whitaker",
    "nusselt_zukauskas",
    "reynolds_number",
]

_HILPERT_LIMITS = np.array([4.0, 40.0, 4e3, 4e4])
_HILPERT_FACTORS = np.array([0.989, 0.911, 0.683, 0.193, 0.027])
_HILPERT_EXPONENTS = np.array([0.330, 0.385, 0.466, 0.618, 0.805])

_ZUKAUSKAS_LIMITS = np.array([40.0, 1e3, 2e5])
_ZUKAUSKAS_FACTORS = np.array([0.75, 0.51, 0.26, 0.076])
_ZUKAUSKAS_EXPONENTS = np.array([0.4, 0.5, 0.6, 0.7])


def reynolds_number(
    speed: FloatLike, *, length: FloatLike, kinematic_viscosity: FloatLike
) -> FloatArray:
    """Reynolds number.

    Parameters
    ----------
    speed : float or array
        Wind speed across the pipe, at the pipe. [m/s]
    length : float or array
        Diameter. [m]
    kinematic_viscosity : float or array
        [m2/s]

    Returns
    -------
    array
        [-]
    """
    return np.asarray(
        np.asarray(speed, dtype=np.float64) * length / np.asarray(kinematic_viscosity)
    )


def nusselt_churchill_bernstein(reynolds: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Cross flow on a cylinder, Re Pr >= 0.2; properties at film temperature.

    Parameters
    ----------
    reynolds, prandtl : float or array
        On the diameter. [-]

    Returns
    -------
    array
        Mean Nusselt number on the diameter; 0.3 at rest. [-]

    Notes
    -----
    Its authors call it a lower bound for Re Pr > 0.4; on one measured case it and two other
    correlations differ by 19 % (Incropera et al., example 7.4).

    References
    ----------
    .. [1] Churchill, Bernstein, *A correlating equation for forced convection from gases and
       liquids to a circular cylinder in crossflow*, J. Heat Transfer 99 (1977) 300-306.

    Examples
    --------
    >>> round(float(nusselt_churchill_bernstein(6071.0, 0.7)), 1)
    40.6
    """
    number = np.asarray(reynolds, dtype=np.float64)
    air = np.asarray(prandtl, dtype=np.float64)
    damping = (1.0 + (0.4 / air) ** (2 / 3)) ** 0.25
    rise = (1.0 + (number / 282_000.0) ** (5 / 8)) ** (4 / 5)
    return np.asarray(0.3 + 0.62 * np.sqrt(number) * np.cbrt(air) / damping * rise)


def nusselt_zukauskas(
    reynolds: FloatLike, prandtl: FloatLike, *, prandtl_surface: FloatLike | None = None
) -> FloatArray:
    """Cross flow on a cylinder, 1 < Re < 1e6; properties of the free stream.

    Parameters
    ----------
    reynolds, prandtl : float or array
        On the diameter, at the air's temperature. [-]
    prandtl_surface : float or array, optional
        At the surface's temperature; left out the correction (Pr/Pr_s)^(1/4) is one. [-]

    Returns
    -------
    array
        Mean Nusselt number on the diameter. [-]

    References
    ----------
    .. [1] Zukauskas, *Heat transfer from tubes in crossflow*, Advances in Heat Transfer 8 (1972)
       93-160.
    """
    number = np.asarray(reynolds, dtype=np.float64)
    air = np.asarray(prandtl, dtype=np.float64)
    part = np.searchsorted(_ZUKAUSKAS_LIMITS, number)
    power = number ** _ZUKAUSKAS_EXPONENTS[part]
    nusselt = _ZUKAUSKAS_FACTORS[part] * power * air ** np.where(air <= 10.0, 0.37, 0.36)
    if prandtl_surface is not None:
        nusselt = nusselt * (air / np.asarray(prandtl_surface)) ** 0.25
    return np.asarray(nusselt)


def nusselt_hilpert(reynolds: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Cross flow of a gas on a cylinder by ranges, 0.4 < Re < 4e5; film temperature.

    Parameters
    ----------
    reynolds, prandtl : float or array
        On the diameter. [-]

    Returns
    -------
    array
        Mean Nusselt number on the diameter. [-]

    References
    ----------
    .. [1] Hilpert, *Wärmeabgabe von geheizten Drähten und Rohren im Luftstrom*, Forschung im
       Gebiete des Ingenieurwesens 4 (1933) 215-224; constants as in Incropera et al., table 7.2.
    """
    number = np.asarray(reynolds, dtype=np.float64)
    part = np.searchsorted(_HILPERT_LIMITS, number)
    power = number ** _HILPERT_EXPONENTS[part]
    return np.asarray(_HILPERT_FACTORS[part] * power * np.cbrt(prandtl))


def nusselt_whitaker(
    reynolds: FloatLike, prandtl: FloatLike, *, viscosity_ratio: FloatLike = 1.0
) -> FloatArray:
    """Cross flow on a cylinder, 1 < Re < 1e5, 0.67 < Pr < 300; properties of the free stream.

    Parameters
    ----------
    reynolds, prandtl : float or array
        On the diameter, at the air's temperature. [-]
    viscosity_ratio : float or array
        Dynamic viscosity at the air's over that at the surface's temperature. [-]

    Returns
    -------
    array
        (0.4 Re^(1/2) + 0.06 Re^(2/3)) Pr^0.4 (mu/mu_s)^(1/4). [-]

    References
    ----------
    .. [1] Whitaker, *Forced convection heat transfer correlations for flow in pipes, past flat
       plates, single cylinders, single spheres, and for flow in packed beds and tube bundles*,
       AIChE Journal 18 (1972) 361-371.
    """
    number = np.asarray(reynolds, dtype=np.float64)
    growth = 0.4 * np.sqrt(number) + 0.06 * np.cbrt(number) ** 2
    return np.asarray(growth * np.asarray(prandtl) ** 0.4 * np.asarray(viscosity_ratio) ** 0.25)
