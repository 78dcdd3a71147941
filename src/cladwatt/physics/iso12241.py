"""The simplified surface coefficients of ISO 12241, as an alternative to the correlations.

References
----------
ISO 12241:2008, *Thermal insulation for building equipment and industrial installations -
Calculation rules*, clause 4.1.4.
"""

import numpy as np

from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "coefficient_iso12241_horizontal_indoor",
    "coefficient_iso12241_outdoor",
    "coefficient_iso12241_vertical_indoor",
]

# Length cubed times temperature difference at which the standard changes its branch. [m3 K]
_INDOOR_LIMIT = 10.0


def coefficient_iso12241_horizontal_indoor(
    temperature_difference: FloatLike, diameter: FloatLike
) -> FloatArray:
    """Convection on a horizontal pipe indoors.

    Parameters
    ----------
    temperature_difference : float or array
        Surface minus air; the sign does not matter. [K]
    diameter : float or array
        Over the cladding. [m]

    Returns
    -------
    array
        1.25 (dT/D)^(1/4) up to D^3 dT = 10 m3 K, 1.21 dT^(1/3) beyond; it steps up by 17 % at the
        join. [W/(m2 K)]
    """
    return _indoor(temperature_difference, diameter, laminar=1.25, turbulent=1.21)


def coefficient_iso12241_vertical_indoor(
    temperature_difference: FloatLike, length: FloatLike
) -> FloatArray:
    """Convection on a vertical pipe or wall indoors.

    Parameters
    ----------
    temperature_difference : float or array
        Surface minus air; the sign does not matter. [K]
    length : float or array
        Diameter of a pipe, height of a wall. [m]

    Returns
    -------
    array
        1.32 (dT/L)^(1/4) up to L^3 dT = 10 m3 K, 1.74 dT^(1/3) beyond; it steps up by 60 % at the
        join. [W/(m2 K)]
    """
    return _indoor(temperature_difference, length, laminar=1.32, turbulent=1.74)


def coefficient_iso12241_outdoor(wind_speed: FloatLike, diameter: FloatLike) -> FloatArray:
    """Convection on a pipe in wind; for showing the disagreement only.

    Parameters
    ----------
    wind_speed : float or array
        [m/s]
    diameter : float or array
        Over the cladding. [m]

    Returns
    -------
    array
        8.1e-3/D + 3.14 (v/D)^(1/2) up to v D = 8.55e-3 m2/s, 8.9 v^0.9 / D^0.1 beyond.
        [W/(m2 K)]

    Notes
    -----
    The two branches differ by a factor of 2.4 where they meet, so the limit is doubtful; above
    2 m/s the rule lies a factor of 1.3 to 2.9 above the cross-flow correlations. No result of
    this package is computed with it.
    """
    speed, size = np.broadcast_arrays(
        np.asarray(wind_speed, dtype=np.float64), np.asarray(diameter, dtype=np.float64)
    )
    laminar = 8.1e-3 / size + 3.14 * np.sqrt(speed / size)
    turbulent = 8.9 * speed**0.9 / size**0.1
    return np.asarray(np.where(speed * size <= 8.55e-3, laminar, turbulent))


def _indoor(
    temperature_difference: FloatLike, length: FloatLike, *, laminar: float, turbulent: float
) -> FloatArray:
    difference, size = np.broadcast_arrays(
        np.abs(np.asarray(temperature_difference, dtype=np.float64)),
        np.asarray(length, dtype=np.float64),
    )
    is_laminar = size * size * size * difference <= _INDOOR_LIMIT
    return np.asarray(
        np.where(
            is_laminar,
            laminar * np.sqrt(np.sqrt(difference / size)),
            turbulent * np.cbrt(difference),
        )
    )
