"""Lagging that water or ice has soaked throughout: more of it next to the cold pipe."""

import math
from collections.abc import Sequence

import numpy as np

from cladwatt.materials.tables import lagging_material
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.synthetic.layered import LayeredCurve
from cladwatt.synthetic.plant import Condition

__all__ = ["soaked"]

_INNERMOST, _OUTERMOST = 1.5, 0.5
"""Of a layer's mean moisture, at its inner and outer face: vapour condenses where it is cold."""
_MOST_FROZEN = 4.0
"""What water adds to the conductivity, at most so many times as much where it is ice: the ratio of
their conductivities at 0 °C."""


def soaked(
    curve: ConductivityIntegral | LayeredCurve,
    layers: Sequence[tuple[str, Condition]],
    thickness: Sequence[float],
    pipe_radius: float,
    cells: int,
    random: np.random.Generator,
) -> LayeredCurve:
    """Draw how wet or frozen the layers of a line are.

    Parameters
    ----------
    curve : ConductivityIntegral or LayeredCurve
        Of the dry lagging.
    layers : sequence of (str, str)
        Material and condition of each, from the inside out.
    thickness : sequence of float
        [m]
    pipe_radius : float
        [m]
    cells : int
        From the pipe to the cladding.
    random : numpy.random.Generator
        Source of randomness.

    Returns
    -------
    LayeredCurve
        With the water in it.
    """
    if isinstance(curve, LayeredCurve):
        curves, factors = curve.curves, curve.factors
    else:
        curves, factors = (curve,), (1.0,)
    radius = pipe_radius + np.concatenate([[0.0], np.cumsum(thickness)])
    joins = np.log(radius / pipe_radius)
    middle = (np.arange(cells) + 0.5) / cells * joins[-1]
    wetness = np.zeros((len(layers), cells))
    gains = []
    for i, (material, condition) in enumerate(layers):
        depth = np.clip((middle - joins[i]) / (joins[i + 1] - joins[i]), 0.0, 1.0)
        moisture = _INNERMOST + (_OUTERMOST - _INNERMOST) * depth
        wetness[i] = _added(material, condition, random) * moisture
        gains.append(float(random.uniform(1.0, _MOST_FROZEN)) if condition == "ice" else 1.0)
    dry = LayeredCurve.stacked(pipe_radius, tuple(thickness), curves, factors, cells)
    return LayeredCurve(dry.shares, curves, factors, wetness, tuple(gains))


def _added(material: str, condition: Condition, random: np.random.Generator) -> float:
    """Draw what water adds to the conductivity over the dry one, within what is published."""
    ratio = lagging_material(material).wet_ratio
    if condition == "dry" or ratio is None:
        return 0.0
    low, high = (math.log(end) for end in ratio)
    drawn = (low + high) / 2 + (high - low) / 4 * float(random.standard_normal())
    return math.exp(min(max(drawn, low), high)) - 1
