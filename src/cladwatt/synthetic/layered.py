"""Lagging of several layers in columns of cells equal in ln r, and an air gap over it."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from cladwatt.physics.air import air_properties
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.constants import STEFAN_BOLTZMANN
from cladwatt.types import FloatArray

__all__ = ["LayeredCurve", "gap_coefficient"]


@dataclass(frozen=True)
class LayeredCurve:
    """Conductivity of cells that hold one layer or the join of two.

    Parameters
    ----------
    shares : (n_layers, n_r) array
        What each layer takes of each cell's ln r; columns sum to 1.
    curves : tuple of ConductivityIntegral
        One per layer.
    factors : tuple of float
        Multiply them.
    """

    shares: FloatArray
    curves: tuple[ConductivityIntegral, ...]
    factors: tuple[float, ...]

    @classmethod
    def stacked(
        cls, pipe_radius: float, thickness: tuple[float, ...],
        curves: tuple[ConductivityIntegral, ...], factors: tuple[float, ...], cells: int,
    ) -> "LayeredCurve":  # fmt: skip
        """Lay layers of these thicknesses, from the inside out, into `cells` cells."""
        radius = pipe_radius + np.concatenate([[0.0], np.cumsum(thickness)])
        joins = np.log(radius / pipe_radius)
        edges = np.linspace(0.0, joins[-1], cells + 1)
        low = np.maximum(joins[:-1, None], edges[:-1])
        high = np.minimum(joins[1:, None], edges[1:])
        shares = np.clip(high - low, 0.0, None) / np.diff(edges)
        return cls(shares, curves, factors)

    def conductivity(self, temperature: FloatArray) -> FloatArray:
        """Return what conducts like the layers of each cell in series, (..., n_r). [W/(m K)]"""
        resistance = np.zeros_like(temperature)
        for share, curve, factor in zip(self.shares, self.curves, self.factors, strict=True):
            resistance += share / (factor * curve.conductivity(temperature))
        result: FloatArray = 1.0 / resistance
        return result


def gap_coefficient(
    width: float, inner_emissivity: float, outer_emissivity: float
) -> Callable[[FloatArray], FloatArray]:
    """Return what a narrow gap of air passes by conduction and radiation.

    Parameters
    ----------
    width : float
        Narrow enough for the air in it to stand: a centimetre or so. [m]
    inner_emissivity, outer_emissivity : float
        Total, of its two faces.

    Returns
    -------
    callable
        Coefficient against the gap's temperature. [K] -> [W/(m2 K)]
    """
    exchange = 1.0 / (1.0 / inner_emissivity + 1.0 / outer_emissivity - 1.0)

    def coefficient(temperature: FloatArray) -> FloatArray:
        radiation = 4.0 * exchange * STEFAN_BOLTZMANN * temperature**3
        return np.asarray(air_properties(temperature).conductivity / width + radiation)

    return coefficient
