"""What is mirrored in the cladding: surroundings that differ with direction, and background."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from cladwatt.physics.band import Band
from cladwatt.types import FloatArray

__all__ = ["Neighbour", "Scene"]


@dataclass(frozen=True)
class Neighbour:
    """A hot or cold thing that is mirrored.

    Parameters
    ----------
    direction : (3,) tuple
        Towards it, in camera coordinates; any length.
    half_width : float
        Half of the angle it takes. [rad]
    temperature : float
        Apparent. [K]
    """

    direction: tuple[float, float, float]
    half_width: float
    temperature: float

    def weight(self, direction: FloatArray) -> FloatArray:
        """Return its share of what is seen in directions (..., 3)."""
        towards = np.array(self.direction) / np.linalg.norm(self.direction)
        apart = np.arccos(np.clip(np.einsum("...i,i", direction, towards), -1, 1))
        weight: FloatArray = np.clip(1.5 - apart / self.half_width, 0, 1)
        return weight

    def factor(self, normal: FloatArray) -> FloatArray:
        """Return its view factor from surfaces with normals (..., 3)."""
        towards = np.array(self.direction) / np.linalg.norm(self.direction)
        factor: FloatArray = (
            np.clip(np.einsum("...i,i", normal, towards), 0, 1) * np.sin(self.half_width) ** 2
        )
        return factor


@dataclass(frozen=True)
class Scene:
    """Apparent temperatures of the surroundings in the camera's band.

    Parameters
    ----------
    upward, level, downward : float
        Ceiling or sky, walls, floor or ground. [K]
    neighbours : tuple of Neighbour
        What stands before them.
    """

    upward: float
    level: float
    downward: float
    neighbours: tuple[Neighbour, ...] = ()

    @staticmethod
    def _shares(rise: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the shares of above and below for a direction rising by `rise` (sine)."""
        up = np.clip((rise - 0.05) / 0.5, 0, 1)
        down = np.clip((-rise - 0.05) / 0.5, 0, 1)
        return up * up * (3 - 2 * up), down * down * (3 - 2 * down)

    def mirrored(self, direction: FloatArray, band: Band) -> FloatArray:
        """Return the radiance arriving from directions (..., 3). [W/(m2 sr)]"""
        up, down = self._shares(-direction[..., 1])
        result = self._blend(up, down, band)
        for neighbour in self.neighbours:
            weight = neighbour.weight(direction)
            result = result + weight * (float(band.radiance(neighbour.temperature)) - result)
        return result

    def diffuse(self, normal: FloatArray, band: Band) -> FloatArray:
        """Return the radiance a matt surface scatters, by its normals (..., 3). [W/(m2 sr)]"""
        rise, up, down = self._matt_shares
        result = self._blend(
            np.interp(-normal[..., 1], rise, up), np.interp(-normal[..., 1], rise, down), band
        )
        for neighbour in self.neighbours:
            factor = neighbour.factor(normal)
            result = result + factor * (float(band.radiance(neighbour.temperature)) - result)
        return result

    def _blend(self, up: FloatArray, down: FloatArray, band: Band) -> FloatArray:
        above, beside, below = (
            float(band.radiance(t)) for t in (self.upward, self.level, self.downward)
        )
        blend: FloatArray = up * above + down * below + (1 - up - down) * beside
        return blend

    @cached_property
    def _matt_shares(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Cosine-weighted shares of above and below against the rise of the normal."""
        rise = np.linspace(-1, 1, 41)
        # directions over the hemisphere about z, equal in cosine weight
        u, v = np.meshgrid((np.arange(24) + 0.5) / 24, (np.arange(48) + 0.5) / 48)
        polar, turn = np.arcsin(np.sqrt(u)).ravel(), (2 * np.pi * v).ravel()
        across, ahead = np.sin(polar) * np.cos(turn), np.cos(polar)
        tilt = np.arcsin(rise)[:, None]
        up, down = self._shares(ahead * np.sin(tilt) + across * np.cos(tilt))
        return rise, up.mean(axis=1), down.mean(axis=1)
