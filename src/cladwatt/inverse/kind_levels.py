"""What a surface would show at the lens, were the lagging under it worse: draw by draw.

Each draw's lagging is taken from its own sound level: the resistance that lets just that loss
through. On nodes between the sound surface and the fluid follow the share of that resistance
which would hold the surface there, and what the lens would see of it. Every family reads off.
"""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.bare import BARE_EMISSIVITY
from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.seen import Seen
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["SurfaceLevels", "read_off", "surface_levels"]

SURFACE_NODES = 10
LENS_NODES = 18
LEAST_DROP = 3.0
"""Between fluid and surface; below it no level tells anything. [K]"""
FAR_BELOW = -1e4
"""Stands where a surface would have no radiance left. [K]"""
LEAST_USABLE = 0.2
"""Share of draws that must hold a physical sound level."""


@dataclass(frozen=True)
class SurfaceLevels:
    """Nodes of each draw, each (count, n_nodes), towards the fluid.

    Attributes
    ----------
    surface : array
        Temperature of the surface. [K]
    left : array
        Resistance that holds it there over the sound one, 1 to 0, falling.
    rise : array
        Rise at the lens over the sound level, as clad. [K]
    bare_surface, bare_rise : array
        Temperature of a bare pipe's surface, and the rise that it shows. [K]
    inside, air : (count,) array
        [K]
    sound_resistance : (count,) array
        Of the lagging per area over the cladding. [m2 K/W]
    sign : {1, -1}
    """

    surface: FloatArray
    left: FloatArray
    rise: FloatArray
    bare_surface: FloatArray
    bare_rise: FloatArray
    inside: FloatArray
    air: FloatArray
    sound_resistance: FloatArray
    sign: int

    def take(self, index: IntArray) -> "SurfaceLevels":
        """Return the levels of a choice of draws."""
        return replace(
            self,
            **{
                name: getattr(self, name)[index]
                for name in (
                    "surface", "left", "rise", "bare_surface", "bare_rise", "inside", "air",
                    "sound_resistance",
                )
            },
        )  # fmt: skip

    def rise_with(self, left: FloatArray) -> FloatArray:
        """Return the rise at the lens with a share of the resistance left, (count,). [K]"""
        # between nodes the rise is close to linear in this, over weak and strong damage alike
        return read_off(_straightened(self.left), self.rise, _straightened(left))

    def rise_wet(self, factor: FloatArray) -> FloatArray:
        """Return the rise with the lagging below boiling this much more conductive. [K]

        Where the fluid is hotter the inner part, down to 100 °C, is dry. Surfaces hotter than
        that are not reached.
        """
        dry = np.clip((self.inside[:, None] - BOILING) / self._drop_full, 0.0, 1.0)
        cooler = np.maximum(self.left - dry, 1e-6)
        needed = np.maximum(1 - dry, 1e-6) / cooler
        # past the boiling front no wetness is enough: nodes there stand in falling order
        needed = np.maximum.accumulate(needed, axis=1)
        return read_off(np.sqrt(needed), self.rise, np.sqrt(factor))

    @property
    def _drop_full(self) -> FloatArray:
        """Drop that all of the sound lagging would have at each node's loss. [K]"""
        drop = np.abs(self.inside[:, None] - self.surface)
        return np.asarray(np.maximum(drop / np.maximum(self.left, 1e-9), 1e-9))

    def rise_of_pipe(self, share: FloatArray) -> FloatArray:
        """Return the rise where a pipe shows at a share of the drop from fluid to air. [K]"""
        temperature = self.air + share * (self.inside - self.air)
        return read_off(self.sign * self.bare_surface, self.bare_rise, self.sign * temperature)


BOILING = 373.15
"""Of water in open lagging. [K]"""


def _straightened(left: FloatArray) -> FloatArray:
    return np.asarray(np.maximum(left, 1e-4) ** -0.5)


def read_off(x: FloatArray, y: FloatArray, at: FloatArray) -> FloatArray:
    """Interpolate linearly row by row; held at the ends.

    Parameters
    ----------
    x : (n, m) array
        Not falling along each row.
    y : (n, m) array
    at : (n,) array

    Returns
    -------
    (n,) array
    """
    right = np.clip((x < at[:, None]).sum(axis=1), 1, x.shape[1] - 1)
    rows = np.arange(x.shape[0])
    low, high = x[rows, right - 1], x[rows, right]
    part = np.clip((at - low) / np.where(high > low, high - low, 1.0), 0.0, 1.0)
    return np.asarray(y[rows, right - 1] + part * (y[rows, right] - y[rows, right - 1]))


def surface_levels(seen: Seen, base: FloatArray, sound_at: BoolArray) -> SurfaceLevels | None:
    """Return what worse lagging would show in each draw that holds a physical sound level.

    Parameters
    ----------
    seen : Seen
        With known diameter and wind.
    base : (count,) array
        Flux at the sound level. [W/m2]
    sound_at : (n_stations,) array of bool

    Returns
    -------
    SurfaceLevels or None
        None where the inside temperature is unknown or close to the surface's.
    """
    inside = seen.line_draws.inside_temperature
    if inside is None:
        return None
    sign = -1 if seen.gain else 1
    sound = seen.drawn.surface_temperature[:, sound_at].mean(axis=1)
    usable = (sign * (inside - sound) > LEAST_DROP) & (sign * base > 0) & np.isfinite(sound)
    if usable.mean() < LEAST_USABLE:
        return None
    sound = np.where(usable, sound, inside - sign * LEAST_DROP)
    nodes = np.linspace(0.0, 1.0, SURFACE_NODES) ** 2
    surface = sound[:, None] + nodes * (inside - sound)[:, None]
    exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
    vapour = seen.vapour
    outer = np.stack([outer_flux(one, exchange, vapour) for one in surface.T], axis=1)
    flux = np.where(usable, base, sign)[:, None] + outer - outer[:, :1]
    more = np.maximum.accumulate(np.maximum(sign * flux, 1e-9), axis=1)
    drop = np.abs(inside[:, None] - surface)
    left = np.minimum.accumulate(drop / more / (drop[:, :1] / more[:, :1]), axis=1)
    level = float(np.median(seen.face.temperature[:, sound_at]))
    clad, bare, values, has_level = _seen_at(seen, level, inside)
    start = clad[:, :1]
    rise = np.stack(
        [read_off(sign * (clad - start), values, sign * (one - sound)) for one in surface.T],
        axis=1,
    )
    good = np.flatnonzero(usable & has_level & np.isfinite(rise).all(axis=1))
    if good.size < LEAST_USABLE * usable.size:
        return None
    return SurfaceLevels(
        surface, left, rise, bare, values, inside, seen.frame.air_temperature,
        drop[:, 0] / more[:, 0], sign,
    ).take(good)  # fmt: skip


def _seen_at(
    seen: Seen, level: float, inside: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray, BoolArray]:
    """Return what values at the lens read as cladding and as a pipe, and their rises.

    The last says in which draws the sound level leaves the surface any radiance.
    """
    sign = -1 if seen.gain else 1
    span = max(1.05 * abs(float(np.median(inside)) - level), 2.0)
    steps = np.linspace(0.0, 1.0, LENS_NODES) ** 2 * span
    line = seen.line_draws
    emissivity = seen.book.quantity(seen.owner, "bare_emissivity", BARE_EMISSIVITY)
    pipe = replace(line, band_emissivity=emissivity, total_emissivity=emissivity, is_metal=False)
    read = [
        surface_temperature_draws(level + sign * steps, np.zeros(1), seen.frame, one)[:, 0]
        for one in (line, pipe)
    ]
    clad, bare = (
        sign * np.maximum.accumulate(np.where(np.isfinite(one), sign * one, FAR_BELOW), axis=1)
        for one in read
    )
    return clad, bare, np.broadcast_to(steps, clad.shape), np.isfinite(read[0][:, 0])
