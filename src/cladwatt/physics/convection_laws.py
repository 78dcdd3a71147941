"""Sets of correlations by name: which law for free flow, which across, within which ranges."""

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property
from types import MappingProxyType
from typing import Final, Literal, get_args

import numpy as np
from numpy.polynomial import Polynomial

from cladwatt.physics.air import AirProperties, air_properties
from cladwatt.physics.constants import GRAVITY
from cladwatt.physics.forced_convection import (
    nusselt_hilpert,
    nusselt_whitaker,
    nusselt_zukauskas,
    reynolds_number,
)
from cladwatt.physics.iso12241 import (
    coefficient_iso12241_horizontal_indoor,
    coefficient_iso12241_vertical_indoor,
)
from cladwatt.physics.moist_air import moist_air_properties
from cladwatt.physics.natural_convection import (
    nusselt_kuehn_goldstein,
    nusselt_morgan,
    rayleigh_number,
)
from cladwatt.types import FloatArray, FloatLike

__all__ = ["CONVECTION_LAWS", "CONVECTION_MODELS", "AirStream", "ConvectionLaw", "ConvectionModel"]

ConvectionModel = Literal[
    "churchill",
    "morgan_zukauskas",
    "morgan_hilpert",
    "kuehn_goldstein_whitaker",
    "iso12241_indoor",
]

#: The names of the selectable sets; the first is the default.
CONVECTION_MODELS: Final[tuple[ConvectionModel, ...]] = get_args(ConvectionModel)


@dataclass(frozen=True)
class AirStream:
    """Air around a pipe, as a correlation needs it; every field broadcasts against the others.

    Parameters
    ----------
    difference : array
        Between surface and air, not negative. [K]
    diameter : float or array
        [m]
    speed : float or array
        Across the pipe. [m/s]
    film : AirProperties
        At film temperature.
    ambient, surface : array
        Temperatures of the air and of the surface, held within the range of the properties. [K]
    pressure, vapour_fraction : float or array
        [Pa], mole fraction of vapour [-]
    """

    difference: FloatArray
    diameter: FloatLike
    speed: FloatLike
    film: AirProperties
    ambient: FloatArray
    surface: FloatArray
    pressure: FloatLike
    vapour_fraction: FloatLike

    @cached_property
    def free(self) -> AirProperties:
        """Properties of the air away from the pipe."""
        return self._at(self.ambient)

    @cached_property
    def wall(self) -> AirProperties:
        """Properties at the surface's temperature."""
        return self._at(self.surface)

    def _at(self, temperature: FloatArray) -> AirProperties:
        if not np.any(self.vapour_fraction):
            return air_properties(temperature, self.pressure)
        return moist_air_properties(temperature, self.pressure, self.vapour_fraction)

    def rayleigh(self, length: FloatLike) -> FloatArray:
        """Rayleigh number on a length, at film temperature."""
        return rayleigh_number(
            self.difference,
            length=length,
            expansion=self.film.expansion,
            kinematic_viscosity=self.film.kinematic_viscosity,
            prandtl=self.film.prandtl,
            gravity=GRAVITY,
        )

    def reynolds(self, air: AirProperties) -> FloatArray:
        """Reynolds number on the diameter with the properties given."""
        return reynolds_number(
            self.speed, length=self.diameter, kinematic_viscosity=air.kinematic_viscosity
        )


@dataclass(frozen=True)
class ConvectionLaw:
    """One set of correlations.

    Parameters
    ----------
    natural : callable
        Coefficient of a horizontal pipe in still air. [W/(m2 K)]
    vertical : callable
        That of a vertical run of the height given.
    forced : callable, optional
        That of flow across; None for a law that holds in still air only.
    rayleigh_range, vertical_range, reynolds_range : (float, float)
        What `natural` (on the diameter), `vertical` (on the height) and `forced` are stated for.
    free_stream : bool
        Whether the Reynolds number takes the properties of the free stream.
    is_blended : bool
        Whether an inclined run lies between the two; else it is vertical above 45 degrees.
    source : str
    """

    natural: Callable[[AirStream], FloatArray]
    vertical: Callable[[AirStream, FloatLike], FloatArray]
    forced: Callable[[AirStream], FloatArray] | None
    rayleigh_range: tuple[float, float]
    vertical_range: tuple[float, float]
    reynolds_range: tuple[float, float]
    source: str
    free_stream: bool = False
    is_blended: bool = True


# The factors of the Prandtl number hardly change for air (0.69 to 0.76), so that a cubic replaces
# their fractional powers to better than 1e-6: the balance is evaluated millions of times.
def _cubic_of_prandtl(nusselt_factor: FloatArray, prandtl: FloatArray) -> tuple[float, ...]:
    cubic = Polynomial.fit(prandtl, nusselt_factor, 3).convert()
    return tuple(float(coefficient) for coefficient in cubic.coef)


_PRANDTL = np.linspace(0.68, 0.78, 41)
_FORCED_FACTOR = _cubic_of_prandtl(
    0.62 * np.cbrt(_PRANDTL) / (1.0 + (0.4 / _PRANDTL) ** (2 / 3)) ** 0.25, _PRANDTL
)
_HORIZONTAL_FACTOR = _cubic_of_prandtl(
    0.387 / (1.0 + (0.559 / _PRANDTL) ** (9 / 16)) ** (8 / 27), _PRANDTL
)
_VERTICAL_FACTOR = _cubic_of_prandtl(
    0.387 / (1.0 + (0.492 / _PRANDTL) ** (9 / 16)) ** (8 / 27), _PRANDTL
)


def _cubic(x: FloatArray, coefficients: tuple[float, ...]) -> FloatArray:
    c0, c1, c2, c3 = coefficients
    return c0 + x * (c1 + x * (c2 + x * c3))


def _churchill_chu(stream: AirStream) -> FloatArray:
    sixth_root = np.cbrt(np.sqrt(stream.rayleigh(stream.diameter)))
    root = 0.60 + _cubic(stream.film.prandtl, _HORIZONTAL_FACTOR) * sixth_root
    return stream.film.conductivity / stream.diameter * (root * root)


def _churchill_chu_vertical(stream: AirStream, height: FloatLike) -> FloatArray:
    sixth_root = np.cbrt(np.sqrt(stream.rayleigh(height)))
    root = 0.825 + _cubic(stream.film.prandtl, _VERTICAL_FACTOR) * sixth_root
    return stream.film.conductivity / height * (root * root)


def _churchill_bernstein(stream: AirStream) -> FloatArray:
    per_length = stream.film.conductivity / stream.diameter
    if not np.any(stream.speed):
        return np.asarray(0.3 * per_length)
    reynolds = stream.reynolds(stream.film)
    # x^(5/8) by square roots: x^(1/2) x^(1/8)
    half = np.sqrt(reynolds / 282_000.0)
    rise = (1.0 + half * np.sqrt(np.sqrt(half))) ** 0.8
    factor = _cubic(stream.film.prandtl, _FORCED_FACTOR)
    return np.asarray(per_length * (0.3 + factor * np.sqrt(reynolds) * rise))


def _morgan(stream: AirStream) -> FloatArray:
    nusselt = nusselt_morgan(stream.rayleigh(stream.diameter))
    return stream.film.conductivity / stream.diameter * nusselt


def _kuehn_goldstein(stream: AirStream) -> FloatArray:
    # 2 / ln(1 + 2/x) tends to its limit 0 with x; a tiny Ra stands for none
    rayleigh = np.maximum(stream.rayleigh(stream.diameter), 1e-30)
    nusselt = nusselt_kuehn_goldstein(rayleigh, stream.film.prandtl)
    return stream.film.conductivity / stream.diameter * nusselt


def _zukauskas(stream: AirStream) -> FloatArray:
    free = stream.free
    nusselt = nusselt_zukauskas(
        stream.reynolds(free), free.prandtl, prandtl_surface=stream.wall.prandtl
    )
    return free.conductivity / stream.diameter * nusselt


def _hilpert(stream: AirStream) -> FloatArray:
    nusselt = nusselt_hilpert(stream.reynolds(stream.film), stream.film.prandtl)
    return stream.film.conductivity / stream.diameter * nusselt


def _whitaker(stream: AirStream) -> FloatArray:
    free = stream.free
    ratio = free.dynamic_viscosity / stream.wall.dynamic_viscosity
    nusselt = nusselt_whitaker(stream.reynolds(free), free.prandtl, viscosity_ratio=ratio)
    return free.conductivity / stream.diameter * nusselt


def _iso_horizontal(stream: AirStream) -> FloatArray:
    return coefficient_iso12241_horizontal_indoor(stream.difference, stream.diameter)


def _iso_vertical(stream: AirStream, _height: FloatLike) -> FloatArray:
    return coefficient_iso12241_vertical_indoor(stream.difference, stream.diameter)


_VERTICAL_RANGE: Final = (0.0, 1e12)

#: Every selectable set of correlations by its name.
CONVECTION_LAWS: Final[Mapping[ConvectionModel, ConvectionLaw]] = MappingProxyType(
    {
        "churchill": ConvectionLaw(
            _churchill_chu, _churchill_chu_vertical, _churchill_bernstein,
            (0.0, 1e12), _VERTICAL_RANGE, (0.0, 1e7),
            "Churchill and Chu 1975, Churchill and Bernstein 1977",
        ),
        "morgan_zukauskas": ConvectionLaw(
            _morgan, _churchill_chu_vertical, _zukauskas,
            (1e-10, 1e12), _VERTICAL_RANGE, (1.0, 1e6),
            "Morgan 1975, Zukauskas 1972; vertical runs Churchill and Chu 1975", free_stream=True,
        ),
        "morgan_hilpert": ConvectionLaw(
            _morgan, _churchill_chu_vertical, _hilpert,
            (1e-10, 1e12), _VERTICAL_RANGE, (0.4, 4e5),
            "Morgan 1975, Hilpert 1933; vertical runs Churchill and Chu 1975",
        ),
        "kuehn_goldstein_whitaker": ConvectionLaw(
            _kuehn_goldstein, _churchill_chu_vertical, _whitaker,
            (0.0, math.inf), _VERTICAL_RANGE, (1.0, 1e5),
            "Kuehn and Goldstein 1976, Whitaker 1972; vertical runs Churchill and Chu 1975",
            free_stream=True,
        ),
        "iso12241_indoor": ConvectionLaw(
            _iso_horizontal, _iso_vertical, None,
            (0.0, math.inf), (0.0, math.inf), (0.0, 0.0),
            "ISO 12241:2008, clause 4.1.4, still air indoors", is_blended=False,
        ),
    }
)  # fmt: skip
