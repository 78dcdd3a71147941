"""Nusselt numbers for free convection on isothermal cylinders and vertical faces.

Every Rayleigh number is built with properties at the film temperature unless said otherwise.
"""

import numpy as np

from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "nusselt_churchill_chu_horizontal",
    "nusselt_churchill_chu_horizontal_laminar",
    "nusselt_churchill_chu_vertical",
    "nusselt_kuehn_goldstein",
    "nusselt_morgan",
    "rayleigh_number",
    "slenderness_factor_popiel",
]

# Upper limits of Ra, factor and exponent of each of Morgan's ranges.
_MORGAN_LIMITS = np.array([1e-2, 1e2, 1e4, 1e7])
_MORGAN_FACTORS = np.array([0.675, 1.02, 0.850, 0.480, 0.125])
_MORGAN_EXPONENTS = np.array([0.058, 0.148, 0.188, 0.250, 0.333])


def rayleigh_number(
    temperature_difference: FloatLike,
    *,
    length: FloatLike,
    expansion: FloatLike,
    kinematic_viscosity: FloatLike,
    prandtl: FloatLike,
    gravity: float,
) -> FloatArray:
    """Rayleigh number g beta abs(dT) L^3 Pr / nu^2.

    Parameters
    ----------
    temperature_difference : float or array
        Surface minus air; the sign does not matter. [K]
    length : float or array
        Diameter, or height of a vertical face. [m]
    expansion, kinematic_viscosity, prandtl : float or array
        Air properties at the film temperature. [1/K], [m2/s], [-]
    gravity : float
        [m/s2]

    Returns
    -------
    array
        [-]
    """
    size = np.asarray(length, dtype=np.float64)
    viscosity = np.asarray(kinematic_viscosity, dtype=np.float64)
    buoyancy = gravity * np.abs(temperature_difference) * expansion
    return np.asarray(buoyancy * (size * size * size) * prandtl / (viscosity * viscosity))


def nusselt_churchill_chu_horizontal(rayleigh: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Free convection on a horizontal cylinder, full range.

    Parameters
    ----------
    rayleigh : float or array
        On the diameter, 1e-5 to 1e12. [-]
    prandtl : float or array
        Any. [-]

    Returns
    -------
    array
        Mean Nusselt number on the diameter. [-]

    References
    ----------
    .. [1] Churchill, Chu, *Correlating equations for laminar and turbulent free convection from a
       horizontal cylinder*, Int. J. Heat Mass Transfer 18 (1975) 1049-1053.

    Examples
    --------
    >>> round(float(nusselt_churchill_chu_horizontal(1.869e6, 0.7241)), 2)
    17.4
    """
    damping = (1.0 + (0.559 / np.asarray(prandtl)) ** (9 / 16)) ** (8 / 27)
    return np.asarray((0.60 + 0.387 * _sixth_root(rayleigh) / damping) ** 2)


def nusselt_churchill_chu_horizontal_laminar(rayleigh: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Free convection on a horizontal cylinder, laminar range 1e-6 <= Ra <= 1e9.

    Parameters
    ----------
    rayleigh, prandtl : float or array
        On the diameter. [-]

    Returns
    -------
    array
        Mean Nusselt number on the diameter. [-]

    References
    ----------
    .. [1] Churchill, Chu, Int. J. Heat Mass Transfer 18 (1975) 1049-1053.
    """
    damping = (1.0 + (0.559 / np.asarray(prandtl)) ** (9 / 16)) ** (4 / 9)
    return np.asarray(0.36 + 0.518 * np.sqrt(np.sqrt(rayleigh)) / damping)


def nusselt_churchill_chu_vertical(rayleigh: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Free convection on a vertical face, full range up to Ra = 1e12.

    Parameters
    ----------
    rayleigh, prandtl : float or array
        On the height. [-]

    Returns
    -------
    array
        Mean Nusselt number on the height. [-]

    Notes
    -----
    Holds for a vertical cylinder where D/L >= 35 / Gr_L^(1/4); slimmer ones lose more.

    References
    ----------
    .. [1] Churchill, Chu, *Correlating equations for laminar and turbulent free convection from a
       vertical plate*, Int. J. Heat Mass Transfer 18 (1975) 1323-1329.
    """
    damping = (1.0 + (0.492 / np.asarray(prandtl)) ** (9 / 16)) ** (8 / 27)
    return np.asarray((0.825 + 0.387 * _sixth_root(rayleigh) / damping) ** 2)


def nusselt_morgan(rayleigh: FloatLike) -> FloatArray:
    """Free convection on a horizontal cylinder in air, by ranges; steps at their joins.

    Parameters
    ----------
    rayleigh : float or array
        On the diameter, 1e-10 to 1e12. [-]

    Returns
    -------
    array
        Mean Nusselt number on the diameter. [-]

    References
    ----------
    .. [1] Morgan, *The overall convective heat transfer from smooth circular cylinders*, Advances
       in Heat Transfer 11 (1975) 199-264; the table as in Incropera et al., table 9.1.
    """
    number = np.asarray(rayleigh, dtype=np.float64)
    part = np.searchsorted(_MORGAN_LIMITS, number)
    return np.asarray(_MORGAN_FACTORS[part] * number ** _MORGAN_EXPONENTS[part])


def nusselt_kuehn_goldstein(rayleigh: FloatLike, prandtl: FloatLike) -> FloatArray:
    """Free convection on a horizontal cylinder, any Ra > 0; not for liquid metals.

    Parameters
    ----------
    rayleigh, prandtl : float or array
        On the diameter. [-]

    Returns
    -------
    array
        Mean Nusselt number on the diameter. [-]

    References
    ----------
    .. [1] Kuehn, Goldstein, *Correlating equations for natural convection heat transfer between
       horizontal circular cylinders*, Int. J. Heat Mass Transfer 19 (1976) 1127-1134.
    """
    number = np.asarray(rayleigh, dtype=np.float64)
    damping = (1.0 + (0.559 / np.asarray(prandtl)) ** (3 / 5)) ** (-5 / 12)
    laminar = 0.518 * np.sqrt(np.sqrt(number)) * damping
    turbulent = 0.1 * np.cbrt(number)
    layer = (laminar**15 + turbulent**15) ** (1 / 15)
    return np.asarray(2.0 / np.log1p(2.0 / layer))


def slenderness_factor_popiel(
    grashof: FloatLike, prandtl: FloatLike, *, slenderness: FloatLike
) -> FloatArray:
    """Nusselt number of a slim vertical cylinder over that of a vertical face.

    Parameters
    ----------
    grashof : float or array
        On the height, laminar; used beyond, it errs to the high side. [-]
    prandtl : float or array
        0.01 to 100. [-]
    slenderness : float or array
        Height over diameter. [-]

    Returns
    -------
    array
        1 and more. [-]

    References
    ----------
    .. [1] Popiel, Wojtkowiak, Bober, *Laminar free convective heat transfer from isothermal
       vertical slender cylinder*, Experimental Thermal and Fluid Science 32 (2007) 607-613.
    """
    air = np.asarray(prandtl, dtype=np.float64)
    factor = 0.0571322 + 0.20305 * air**-0.43
    exponent = 0.9165 - 0.0043 * np.sqrt(air) + 0.01333 * np.log(air) + 0.0004809 / air
    thickness = np.sqrt(32.0) * np.asarray(grashof, dtype=np.float64) ** -0.25 * slenderness
    return np.asarray(1.0 + factor * thickness**exponent)


def _sixth_root(rayleigh: FloatLike) -> FloatArray:
    return np.asarray(np.cbrt(np.sqrt(rayleigh)))
