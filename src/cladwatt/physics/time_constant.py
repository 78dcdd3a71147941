"""How slowly lagging follows: its own time constant, and how long until it has settled."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from math import pi
from typing import Final, NamedTuple

import numpy as np
from scipy.linalg import eigh_tridiagonal
from scipy.special import j0, j1, y0, y1

from cladwatt.errors import InputError
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "StepResponse",
    "lagging_step_response",
    "layered_step_response",
    "slab_time_constant",
    "time_until_within",
]

_HALVINGS: Final = 52  # to the last digit of a root between 0 and pi
_CELLS: Final = 60  # per layer; the time constant of a layer comes out within 0.02 %


class StepResponse(NamedTuple):
    """How the outer surface follows a change of the temperature inside, slowest part.

    Parameters
    ----------
    time_constant : array
        Of the slowest mode. [s]
    amplitude : array
        Share of the final change that this mode lacks at the start, extrapolated back: the
        surface has reached 1 - amplitude exp(-t / time_constant) of it. Above 1, since at first
        nothing arrives. [-]
    """

    time_constant: FloatArray
    amplitude: FloatArray


def slab_time_constant(thickness: FloatLike, diffusivity: FloatLike) -> FloatArray:
    """Slowest time constant of a flat layer with both faces held: the rule of thumb.

    Parameters
    ----------
    thickness : float or array
        [m]
    diffusivity : float or array
        Conductivity over density and specific heat. [m2/s]

    Returns
    -------
    array, broadcast shape
        L^2 / (pi^2 a). [s]

    References
    ----------
    .. [1] Carslaw, Jaeger, *Conduction of Heat in Solids*, 2nd edition, Oxford, 1959, section 3.3.
    """
    length = np.asarray(thickness, dtype=np.float64)
    return np.asarray(length**2 / (pi**2 * np.asarray(diffusivity)))


def lagging_step_response(
    inner_diameter: FloatLike,
    outer_diameter: FloatLike,
    *,
    conductivity: FloatLike,
    volumetric_heat_capacity: FloatLike,
    surface_coefficient: FloatLike,
    surface_heat_capacity: FloatLike = 0.0,
) -> StepResponse:
    """Step response of lagging of one material, its inside brought to a temperature at once.

    Parameters
    ----------
    inner_diameter, outer_diameter : float or array
        Of the lagging; the outer one larger. [m]
    conductivity : float or array
        At its mean temperature. [W/(m K)]
    volumetric_heat_capacity : float or array
        Density times specific heat, dry. [J/(m3 K)]
    surface_coefficient : float or array
        Convection plus radiation outside. [W/(m2 K)]
    surface_heat_capacity : float or array
        Of the cladding: density times specific heat times thickness. [J/(m2 K)]

    Returns
    -------
    StepResponse
        Arrays of the broadcast shape; NaN where an input is NaN.

    Raises
    ------
    InputError
        If a dimension or property is not above 0, or the cladding's capacity negative.

    Notes
    -----
    First eigenvalue of the hollow cylinder r^-1 d/dr(r du/dr) + x^2 u = 0 with u = 0 inside and
    du/dr + (Bi - C x^2) u = 0 outside, lengths in thicknesses, C the cladding's heat capacity over
    the lagging's; found by halving below the first zero of u outside. A fluid that warms up slowly
    adds its own time. Water or ice in the lagging stores and moves heat in ways that are not here.

    References
    ----------
    .. [1] Carslaw, Jaeger, *Conduction of Heat in Solids*, 2nd edition, Oxford, 1959, section 7.10
       (composite functions of order zero) and 1.9 (a surface with a skin of a good conductor).

    Examples
    --------
    50 mm of mineral wool on a 114 mm pipe, 100 kg/m3, with 0.8 mm of steel sheet:

    >>> response = lagging_step_response(
    ...     0.114, 0.214, conductivity=0.05, volumetric_heat_capacity=84e3,
    ...     surface_coefficient=8.0, surface_heat_capacity=2900.0)
    >>> round(float(response.time_constant) / 3600, 2)
    0.19
    """
    _above_zero("inner diameter", inner_diameter, "m")
    _above_zero("conductivity", conductivity, "W/(m K)")
    _above_zero("volumetric heat capacity", volumetric_heat_capacity, "J/(m3 K)")
    _above_zero("surface coefficient", surface_coefficient, "W/(m2 K)")
    thickness = 0.5 * (np.asarray(outer_diameter, dtype=np.float64) - inner_diameter)
    _above_zero("thickness of the lagging", thickness, "m")
    if np.any(np.asarray(surface_heat_capacity) < 0):
        raise InputError(
            f"surface heat capacity is {np.min(surface_heat_capacity):g} J/(m2 K); "
            "expected 0 or more"
        )
    inside = 0.5 * np.asarray(inner_diameter) / thickness
    biot = np.asarray(surface_coefficient) * thickness / np.asarray(conductivity)
    skin = np.asarray(surface_heat_capacity) / (np.asarray(volumetric_heat_capacity) * thickness)
    inside, biot, skin = np.broadcast_arrays(inside, biot, skin)
    root = _first_root(inside, biot, skin)
    diffusivity = np.asarray(conductivity) / np.asarray(volumetric_heat_capacity)
    unknown = np.isnan(inside + biot + skin)
    return StepResponse(
        np.where(unknown, np.nan, thickness**2 / (diffusivity * root**2)),
        np.where(unknown, np.nan, _amplitude(root, inside, biot, skin)),
    )


def layered_step_response(
    diameters: Sequence[float],
    conductivities: Sequence[float],
    volumetric_heat_capacities: Sequence[float],
    *,
    surface_coefficient: float,
    surface_heat_capacity: float = 0.0,
) -> StepResponse:
    """Step response of lagging in layers, of one pipe.

    Parameters
    ----------
    diameters : sequence of float
        From the pipe outwards, one more than layers, increasing. [m]
    conductivities, volumetric_heat_capacities : sequence of float
        Of the layers. [W/(m K)], [J/(m3 K)]
    surface_coefficient, surface_heat_capacity : float
        As for `lagging_step_response`.

    Returns
    -------
    StepResponse
        Arrays without dimensions.

    Raises
    ------
    InputError
        If the lengths do not fit, diameters do not increase, or a property is not above 0.

    Notes
    -----
    Finite volumes, 60 to a layer; the slowest mode of the symmetric tridiagonal matrix. One layer
    agrees with `lagging_step_response` within 0.1 %. An air gap is a layer of its effective
    conductivity with the heat capacity of air.
    """
    edges = np.asarray(diameters, dtype=np.float64) / 2.0
    layers = edges.size - 1
    if layers < 1 or not len(conductivities) == len(volumetric_heat_capacities) == layers:
        raise InputError(
            f"{edges.size} diameters, {len(conductivities)} conductivities and "
            f"{len(volumetric_heat_capacities)} heat capacities; expected one diameter more than "
            "layers and the other two once per layer"
        )
    if not (edges[0] > 0.0 and np.all(np.diff(edges) > 0.0)):
        raise InputError(f"diameters are {list(diameters)} m; expected above 0 and increasing")
    _above_zero("conductivity", np.asarray(conductivities), "W/(m K)")
    _above_zero("volumetric heat capacity", np.asarray(volumetric_heat_capacities), "J/(m3 K)")
    _above_zero("surface coefficient", surface_coefficient, "W/(m2 K)")
    conductance, capacity = _network(
        edges, conductivities, volumetric_heat_capacities, surface_coefficient,
        surface_heat_capacity,
    )  # fmt: skip
    rates, modes = eigh_tridiagonal(
        (conductance[:-1] + conductance[1:]) / capacity,
        -conductance[1:-1] / np.sqrt(capacity[:-1] * capacity[1:]),
        select="i",
        select_range=(0, 0),
    )
    mode = modes[:, 0]
    steady = 1.0 - np.cumsum(1.0 / conductance[:-1]) / np.sum(1.0 / conductance)
    weight = np.sqrt(capacity)
    amplitude = mode @ (weight * steady) * mode[-1] / (weight[-1] * steady[-1])
    return StepResponse(np.asarray(1.0 / rates[0]), np.asarray(amplitude))


def time_until_within(response: StepResponse, share: FloatLike = 0.05) -> FloatArray:
    """Time after which the surface lacks no more than a share of its final change.

    Parameters
    ----------
    response : StepResponse
        Of the lagging.
    share : float or array
        0 < value < 1. [-]

    Returns
    -------
    array, broadcast shape
        time_constant ln(amplitude / share), at least 0. [s]

    Raises
    ------
    InputError
        If the share is outside 0 to 1.

    Notes
    -----
    The slowest mode alone: right once the others have died away, within a time constant or less.
    The loss follows the surface, so it lacks the same share.
    """
    left = np.asarray(share, dtype=np.float64)
    if np.any((left <= 0.0) | (left >= 1.0)):
        raise InputError(f"share is {np.min(left):g}; expected between 0 and 1")
    return np.asarray(response.time_constant * np.maximum(0.0, np.log(response.amplitude / left)))


def _mode(
    root: FloatArray, inside: FloatArray, position: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return the mode that is zero inside, and its slope, at a position in thicknesses."""
    at_inside, here = root * inside, root * position
    value = y0(here) * j0(at_inside) - j0(here) * y0(at_inside)
    slope = -root * (y1(here) * j0(at_inside) - j1(here) * y0(at_inside))
    return np.asarray(value), np.asarray(slope)


def _first_root(inside: FloatArray, biot: FloatArray, skin: FloatArray) -> FloatArray:
    # the zero of the mode at the outer face bounds the root from above; pi bounds that zero
    held = _halve(inside, np.full(inside.shape, pi), lambda value, _, __: value)
    return _halve(inside, held, lambda value, slope, x: slope + (biot - skin * x**2) * value)


def _halve(
    inside: FloatArray,
    highest: FloatArray,
    function: Callable[[FloatArray, FloatArray, FloatArray], FloatArray],
) -> FloatArray:
    low, high = np.zeros(inside.shape), highest.copy()
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        positive = function(*_mode(middle, inside, inside + 1.0), middle) > 0.0
        low, high = np.where(positive, middle, low), np.where(positive, high, middle)
    return np.asarray(0.5 * (low + high))


def _amplitude(
    root: FloatArray, inside: FloatArray, biot: FloatArray, skin: FloatArray
) -> FloatArray:
    """Share of the final surface temperature that the first mode holds at the start."""
    outside = inside + 1.0
    value, slope = _mode(root, inside, outside)
    slope_inside = 2.0 / (pi * inside)  # by the Wronskian
    square = 0.5 * outside**2 * (value**2 + (slope / root) ** 2)
    square = square - 0.5 * (inside * slope_inside / root) ** 2 + skin * outside * value**2
    steady = 1.0 / (1.0 + biot * outside * np.log(outside / inside))
    return np.asarray(inside * slope_inside / root**2 / square * value / steady)


def _network(
    edges: FloatArray,
    conductivities: Sequence[float],
    capacities: Sequence[float],
    surface_coefficient: float,
    surface_heat_capacity: float,
) -> tuple[FloatArray, FloatArray]:
    """Return the conductances from the pipe through the cells to the air, and the capacities."""
    resistances = [0.0]  # halves of neighbouring cells add
    capacity = []
    layers = zip(edges[:-1], edges[1:], conductivities, capacities, strict=True)
    for inner, outer, conductivity, volumetric in layers:
        faces = np.geomspace(inner, outer, 2 * _CELLS + 1)
        half = np.log(faces[1] / faces[0]) / (2.0 * pi * conductivity)
        resistances[-1] += half
        resistances += [2.0 * half] * (_CELLS - 1) + [half]
        capacity += list(volumetric * pi * np.diff(faces[::2] ** 2))
    film = 1.0 / (2.0 * pi * edges[-1] * surface_coefficient)
    if surface_heat_capacity > 0.0:
        resistances.append(film)
        capacity.append(surface_heat_capacity * 2.0 * pi * edges[-1])
    else:
        resistances[-1] += film
    return 1.0 / np.asarray(resistances), np.asarray(capacity)


def _above_zero(name: str, value: FloatLike, unit: str) -> None:
    if np.any(np.asarray(value) <= 0.0):
        raise InputError(f"{name} is {np.min(value):g} {unit}; expected above 0")
