"""Lagging of several layers in columns of cells equal in ln r, and an air gap over it."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from cladwatt.physics.air import air_properties
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.constants import STEFAN_BOLTZMANN, ZERO_CELSIUS
from cladwatt.types import FloatArray

__all__ = ["LayeredCurve", "gap_coefficient"]

FREEZING_SPAN = 3.0
"""Over which the water in fine pores freezes. [K]"""


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
    wetness : (n_layers, n_r) array, optional
        What water adds to the conductivity of each layer in each cell, over the dry one.
    frozen_gain : tuple of float
        Times as much where a layer's water is frozen; 1 where none freezes.
    """

    shares: FloatArray
    curves: tuple[ConductivityIntegral, ...]
    factors: tuple[float, ...]
    wetness: FloatArray | None = None
    frozen_gain: tuple[float, ...] = ()

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
        for i, (share, curve) in enumerate(zip(self.shares, self.curves, strict=True)):
            dry = self.factors[i] * curve.conductivity(temperature)
            resistance += share / (dry * self._as_found(i, temperature))
        result: FloatArray = 1.0 / resistance
        return result

    def found_over_dry(self, layer: int, temperature: FloatArray) -> float:
        """Return the conductivity of a whole layer over its dry one at the cells' temperatures."""
        share = self.shares[layer]
        return float(share.sum() / (share / self._as_found(layer, temperature)).sum())

    def _as_found(self, layer: int, temperature: FloatArray) -> FloatArray | float:
        if self.wetness is None:
            return 1.0
        frozen = np.clip((ZERO_CELSIUS - temperature) / FREEZING_SPAN + 0.5, 0.0, 1.0)
        gain = 1 + (self.frozen_gain[layer] - 1) * frozen
        factor: FloatArray = 1 + gain * self.wetness[layer]
        return factor


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
