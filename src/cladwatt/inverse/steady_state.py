"""Whether the line had been at temperature long enough for its surface to tell its loss."""

import math
from itertools import accumulate

from cladwatt.physics.time_constant import StepResponse, layered_step_response, time_until_within
from cladwatt.survey.model import Line

__all__ = ["is_settled", "settling_time", "time_to_forget_sun", "warming_gain"]

LACKING = 0.05
"""Share of the final change that the surface may lack; the loss lacks the same."""
SHEET_HEAT_CAPACITY = 3.2e6
"""Of the cladding's sheet: steel 3.8, aluminium 2.4 MJ/(m3 K) (Incropera et al., table A.1)."""
SURFACE_COEFFICIENT = 8.0
"""Convection and radiation together in still air; assumption. [W/(m2 K)]"""
LAGGING_HEAT_CAPACITY = 1.5e5
"""Where density or specific heat are not held: heavy wool, 150 kg/m3; assumption. [J/(m3 K)]"""
MARGIN = 2.0
"""On the settling time, for damp lagging and a fluid that warmed up slowly; assumption."""
STRONGEST_SUN = 1000.0
"""On a face square to a clear sky's sun; assumption. [W/m2]"""
SMALLEST_RISE = 0.5
"""What a surface nearer to the air counts as being above it; assumption. [K]"""

LEAST_REACHED = 0.05
"""Share of its final warmth below which a surface shows nothing of its lagging; assumption."""


def settling_time(line: Line) -> float | None:
    """Return how long the surface takes to come within 5 % after a step inside.

    Parameters
    ----------
    line : Line

    Returns
    -------
    float or None
        None where a size or conductivity is unknown. [s]
    """
    response = _response(line)
    return None if response is None else float(time_until_within(response, LACKING))


def _response(line: Line) -> StepResponse | None:
    """Return how the surface follows, None where a size or conductivity is unknown."""
    if line.pipe_outside_diameter is None or not line.layers:
        return None
    thicknesses, conductivities, capacities = [], [], []
    for layer in line.layers:
        if layer.thickness is None or layer.conductivity is None:
            return None
        curve = layer.conductivity.conductivity
        thicknesses.append(layer.thickness.value)
        conductivities.append(curve[len(curve) // 2])
        if layer.density is None or layer.specific_heat is None:
            capacities.append(LAGGING_HEAT_CAPACITY)
        else:
            capacities.append(layer.density.value * layer.specific_heat.value)
    inner = line.pipe_outside_diameter.value
    return layered_step_response(
        list(accumulate((2 * one for one in thicknesses), initial=inner)),
        conductivities,
        capacities,
        surface_coefficient=SURFACE_COEFFICIENT,
        surface_heat_capacity=SHEET_HEAT_CAPACITY * line.cladding.thickness.value,
    )


def time_to_forget_sun(line: Line, *, absorptance: float, above_air: float) -> float | None:
    """Return how long the surface takes to lose what a clear sky's sun had put into it.

    Parameters
    ----------
    line : Line
    absorptance : float
        Of the cladding, for sunlight. [-]
    above_air : float
        Of the surface over the air, either sign. [K]

    Returns
    -------
    float or None
        Until no more than 5 % of what the surface is above the air is left of it, and twice
        that; None where a size or conductivity is unknown. [s]

    Notes
    -----
    A face square to the sun was warmed by no more than what it absorbs over its coefficient.
    That dies away as a sum of the lagging's own modes, all of the same sign at the surface, so
    no slower than the slowest of them; see `physics.time_constant`.
    """
    response = _response(line)
    if response is None:
        return None
    warmed = absorptance * STRONGEST_SUN / SURFACE_COEFFICIENT
    left = LACKING * max(abs(above_air), SMALLEST_RISE)
    constants = max(0.0, math.log(warmed / left)) if warmed > 0 else 0.0
    return MARGIN * float(response.time_constant) * constants


def is_settled(line: Line) -> bool:
    """Return whether the declared time at temperature is enough; True where none is declared."""
    if line.hours_at_temperature is None:
        return True
    needed = settling_time(line)
    return needed is None or line.hours_at_temperature.value * 3600 >= MARGIN * needed


def warming_gain(line: Line) -> float:
    """Return how many times as far apart lagging of different conductivity looks while it warms up.

    Parameters
    ----------
    line : Line

    Returns
    -------
    float
        Relative change of the surface's warmth over that of the conductivity: 1 where the line
        has settled, or nothing is declared of it.

    Notes
    -----
    By its slowest mode the surface has reached ``w = 1 - A exp(-t/tau)`` of its warmth, and tau
    goes with the inverse of the conductivity, so that ``d ln(k w) / d ln k`` is
    ``1 + (t/tau) (1 - w) / w``.
    """
    response = None if is_settled(line) else _response(line)
    if response is None or line.hours_at_temperature is None:
        return 1.0
    periods = line.hours_at_temperature.value * 3600 / float(response.time_constant)
    lacking = min(float(response.amplitude) * math.exp(-periods), 1 - LEAST_REACHED)
    return 1 + periods * lacking / (1 - lacking)
