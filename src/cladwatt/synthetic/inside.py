"""What a pipe holds: fluid that cools along the line, the wall's film, a tracer beside it."""

from collections.abc import Callable

import numpy as np

from cladwatt.synthetic.plant import PlantLine
from cladwatt.synthetic.truth import LineTruth
from cladwatt.types import FloatArray

__all__ = ["fluid_after", "inside_of", "tracer_warmth"]

_TRACER_SPREAD, _TRACER_SHARE = 0.30, 0.85
"""Over what angle a tracer warms the inside of the lagging, and how near to its temperature a steam
tracer comes. [rad], [-]"""
_STEPS = 6


def tracer_warmth(plant: PlantLine, n_phi: int) -> FloatArray | None:
    """Return how near each column's inside is to the tracer, (n_phi,); 3 o'clock is angle pi/2."""
    if plant.tracer_clock is None:
        return None
    angle = (np.arange(n_phi) + 0.5) * 2 * np.pi / n_phi
    apart = np.angle(np.exp(1j * (angle - plant.tracer_clock / 6 * np.pi)))
    warmth: FloatArray = np.exp(-0.5 * (apart / _TRACER_SPREAD) ** 2)
    return warmth


def inside_of(plant: PlantLine, line: LineTruth, n_phi: int) -> float | FloatArray:
    """Return the temperature inside each column, as that of a fluid. [K]

    Heat that an electric tracer gives on the pipe's wall is the same as a fluid that much warmer
    behind the wall's film.
    """
    warmth = tracer_warmth(plant, n_phi)
    if warmth is None:
        return line.fluid_temperature
    if line.tracer_power is not None:
        share = warmth / warmth.sum() * n_phi / (np.pi * line.pipe_diameter)
        warmer: FloatArray = line.tracer_power * share / line.inside_coefficient
        return line.fluid_temperature + warmer
    if line.tracer_temperature is None:
        return line.fluid_temperature
    nearer: FloatArray = _TRACER_SHARE * warmth
    return line.fluid_temperature + (line.tracer_temperature - line.fluid_temperature) * nearer


def fluid_after(line: LineTruth, distance: float, loss: Callable[[float], float]) -> float:
    """Return the fluid's temperature so far down a sound line. [K]

    Parameters
    ----------
    line : LineTruth
        With its flow.
    distance : float
        [m]
    loss : callable
        Loss of the line against its fluid's temperature. [K] -> [W/m]
    """
    fluid = line.fluid_temperature
    if line.heat_flow is None or distance <= 0:
        return fluid
    for _ in range(_STEPS):
        fluid -= distance / _STEPS * loss(fluid) / line.heat_flow
    return fluid
