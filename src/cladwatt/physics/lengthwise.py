"""How far heat spreads along a lagged pipe: lagging and cladding sheet together."""

from math import pi
from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import FloatArray, FloatLike

__all__ = ["lengthwise_decay"]

_HALVINGS: Final = 52  # to the last digit of a root between 0 and pi


def lengthwise_decay(
    thickness: FloatLike,
    conductivity: FloatLike,
    *,
    surface_coefficient: FloatLike,
    sheet_conductance: FloatLike = 0.0,
) -> FloatArray:
    """Length over which a disturbance at one place of a lagged pipe fades along it to 1/e.

    Parameters
    ----------
    thickness : float or array
        Of the lagging. [m]
    conductivity : float or array
        Of the lagging. [W/(m K)]
    surface_coefficient : float or array
        Convection plus radiation outside. [W/(m2 K)]
    sheet_conductance : float or array
        Conductivity times thickness of the cladding sheet. [W/K]

    Returns
    -------
    array, broadcast shape
        [m]; NaN where an input is NaN.

    Raises
    ------
    InputError
        If thickness, conductivity or surface coefficient is not above 0, or the sheet's
        conductance negative.

    Notes
    -----
    Slowest mode ``exp(-x/L) sin(y/L)`` of a flat layer, y from the pipe, which stays at its
    temperature, to the sheet, which takes heat lengthwise:
    ``(h - K/L^2) sin(Y/L) + (k/L) cos(Y/L) = 0``; found by halving below ``Y/L = pi``. Without a
    sheet that is ``z cot z = -hY/k``, without lagging the fin, ``L = sqrt(K/h)``. Curvature is
    left out: it takes a few percent on usual pipes.

    References
    ----------
    .. [1] Carslaw, Jaeger, *Conduction of Heat in Solids*, 2nd edition, Oxford, 1959, sections
       5.1 (strip, semi-infinite lengthwise), 1.9 (skin of a good conductor), table IV.II.
    .. [2] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 3.6 (fins of uniform section).

    Examples
    --------
    50 mm of mineral wool under 0.7 mm of steel, then under 1 mm of aluminium:

    >>> found = lengthwise_decay(
    ...     0.05, 0.05, surface_coefficient=8.0, sheet_conductance=[0.035, 0.2]
    ... )
    >>> [round(float(one), 3) for one in found]
    [0.063, 0.149]
    """
    layer, k = np.asarray(thickness, dtype=np.float64), np.asarray(conductivity, dtype=np.float64)
    h, sheet = np.asarray(surface_coefficient, dtype=np.float64), np.asarray(sheet_conductance)
    for name, value, unit in (
        ("thickness", layer, "m"),
        ("conductivity", k, "W/(m K)"),
        ("surface coefficient", h, "W/(m2 K)"),
    ):
        if np.any(value <= 0):
            raise InputError(f"{name} is {np.min(value):g} {unit}; expected above 0")
    if np.any(sheet < 0):
        raise InputError(f"sheet conductance is {np.min(sheet):g} W/K; expected 0 or more")
    biot = h * layer / k
    skin = sheet / (k * layer)
    biot, skin = np.broadcast_arrays(biot, skin)
    low, high = np.zeros(biot.shape), np.full(biot.shape, pi)
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        below = (biot - skin * middle**2) * np.sin(middle) + middle * np.cos(middle) > 0
        low, high = np.where(below, middle, low), np.where(below, high, middle)
    return np.asarray(np.where(np.isnan(biot + skin), np.nan, layer / (0.5 * (low + high))))
