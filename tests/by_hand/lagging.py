"""What a lagged pipe would lose: conduction by quadrature, the surface by root finding."""

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from CoolProp.CoolProp import PropsSI
from scipy.constants import g, sigma
from scipy.integrate import quad
from scipy.optimize import brentq
from tests.by_hand.exchange import Place

Curve = Callable[[float], float]


@dataclass(frozen=True)
class Lagging:
    """A layer by its conductivity. [m], [W/(m K)]"""

    thickness: float
    conductivity: Curve

    def outside(self, inside: float, loss: float, inner: float, factor: float) -> float:
        """Return the temperature of its outer face for a loss per metre. [K]"""
        needed = loss * math.log1p(2 * self.thickness / inner) / (2 * math.pi * factor)

        def left(face: float) -> float:
            carried, _ = quad(self.conductivity, face, inside, epsrel=1e-9, limit=200)
            return carried - needed

        return float(brentq(left, 60.0, 1500.0, xtol=1e-7))


@dataclass(frozen=True)
class AirGap:
    """Air between two concentric grey faces (Incropera, eq. 9.58 to 9.60 and table 13.3)."""

    thickness: float
    inner_emissivity: float
    outer_emissivity: float

    def loss(self, warm: float, cold: float, inner: float) -> float:
        """Return what crosses it per metre. [W/m]"""
        outer = inner + 2 * self.thickness
        mean, radii = (warm + cold) / 2, (inner / 2, outer / 2)
        k, mu, cp, rho = (PropsSI(what, "T", mean, "P", 101325.0, "Air") for what in "LVCD")
        logarithm = math.log(outer / inner)
        length = 2 * logarithm ** (4 / 3) / sum(r**-0.6 for r in radii) ** (5 / 3)
        rayleigh = g / mean * abs(warm - cold) * length**3 / (mu / rho * (k / rho / cp))
        prandtl = cp * mu / k
        enhanced = max(1.0, 0.386 * (prandtl / (0.861 + prandtl) * rayleigh) ** 0.25)
        exchange = 1 / self.inner_emissivity + (1 / self.outer_emissivity - 1) * inner / outer
        radiated = math.pi * inner * sigma * (warm**4 - cold**4) / exchange
        return 2 * math.pi * k * enhanced * (warm - cold) / logarithm + radiated

    def outside(self, inside: float, loss: float, inner: float, factor: float) -> float:
        """Return the temperature of its outer face for a loss per metre. [K]"""
        return float(
            brentq(lambda t: factor * self.loss(inside, t, inner) - loss, 60.0, 1500.0, xtol=1e-7)
        )


@dataclass(frozen=True)
class Solved:
    """Loss [W/m], resistance of the lagging [m K/W] and surface temperature [K]."""

    loss: float
    resistance: float
    surface: float


def lagged_pipe(
    inside: float,
    diameter: float,
    layers: Sequence[Lagging | AirGap],
    place: Place,
    *,
    between: tuple[float, float],
    factor: float = 1.0,
    film: float | None = None,
) -> Solved:
    """Solve fluid, film, layers and surface together: the loss at which both sides agree.

    The root is sought `between` two losses. [W/m] `factor` multiplies what every layer conducts;
    `film` is on the pipe's outside. [W/(m2 K)]
    """

    def marched(loss: float) -> tuple[float, float]:
        wall = inside if film is None else inside - loss / (math.pi * diameter * film)
        face, inner = wall, diameter
        for layer in layers:
            face = layer.outside(face, loss, inner, factor)
            inner += 2 * layer.thickness
        return wall, face

    def open_(loss: float) -> float:
        return loss - math.pi * place.diameter * place.flux(marched(loss)[1])

    loss = float(brentq(open_, *between, xtol=1e-6))
    wall, face = marched(loss)
    return Solved(loss, (wall - face) / loss, face)
