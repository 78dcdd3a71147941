"""The forward model: a lagged pipe whose layers and surface balance are solved together."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import pi
from typing import Final, NamedTuple

import numpy as np

from cladwatt.errors import FitError, InputError
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.surface_balance import (
    SurfaceExchange,
    SurfaceFluxes,
    bare_pipe_loss,
    surface_coefficients,
    surface_fluxes,
    surface_heat_flux,
)
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "LaggedPipeState",
    "LaggingLayer",
    "SurfaceExchange",
    "SurfaceFluxes",
    "bare_pipe_loss",
    "lagging_conductance_from_surface",
    "lagging_resistance_from_surface",
    "solve_lagged_pipe",
    "surface_coefficients",
    "surface_fluxes",
    "surface_heat_flux",
]

_STEP_TOLERANCE: Final = 1e-10  # K; the step after it is smaller by orders
_LARGEST_ITERATIONS: Final = 100


@dataclass(frozen=True)
class LaggingLayer:
    """One cylindrical layer, the layers counted from the pipe outwards.

    Parameters
    ----------
    conductivity : ConductivityIntegral
        Of the material.
    thickness : float or array
        0 or more. [m]
    factor : float or array
        Multiplies the conductivity: installation, ageing, damage, a draw. [-]

    Raises
    ------
    InputError
        If a thickness is negative or a factor not above 0.
    """

    conductivity: ConductivityIntegral
    thickness: FloatLike
    factor: FloatLike = 1.0

    def __post_init__(self) -> None:
        if np.any(np.asarray(self.thickness) < 0):
            raise InputError(f"thickness is {np.min(self.thickness)} m; expected 0 or more")
        if np.any(np.asarray(self.factor) <= 0):
            raise InputError(f"conductivity factor is {np.min(self.factor)}; expected above 0")


class LaggedPipeState(NamedTuple):
    """A solved pipe; arrays of the broadcast shape of all inputs.

    Parameters
    ----------
    heat_loss : array
        Per metre of pipe, negative where the pipe gains. [W/m]
    surface_temperature : array
        [K]
    interface_temperatures : (layers + 1, ...) array
        From the pipe outwards: inside temperature first, surface temperature last. [K]
    resistance : array
        Of all layers together, at the temperatures found; also where no heat flows. [m K/W]
    residual : array
        Surface balance minus conduction over the larger term (at least 1e-3 W/m). [-]
    """

    heat_loss: FloatArray
    surface_temperature: FloatArray
    interface_temperatures: FloatArray
    resistance: FloatArray
    residual: FloatArray


def solve_lagged_pipe(
    inside_temperature: FloatLike,
    pipe_outside_diameter: FloatLike,
    layers: Sequence[LaggingLayer],
    exchange: SurfaceExchange,
) -> LaggedPipeState:
    """Surface temperature and loss of a lagged pipe in steady state.

    Parameters
    ----------
    inside_temperature : float or array
        At the inner face of the first layer. [K]
    pipe_outside_diameter : float or array
        [m]
    layers : sequence of LaggingLayer
        From the pipe outwards; none, or thickness 0, is a bare pipe.
    exchange : SurfaceExchange
        What the outer surface exchanges heat with; its diameter is that over the cladding.

    Returns
    -------
    LaggedPipeState
        NaN where an input is NaN.

    Raises
    ------
    InputError
        If the inside temperature or the pipe's diameter is not above 0.
    FitError
        If a balance could not be closed.

    Notes
    -----
    With Theta the integral of the conductivity, each layer obeys
    Theta(T1) - Theta(T2) = q' ln(r2/r1) / (2 pi f) exactly [1]_. From a trial surface temperature
    follows the loss, from the loss, outwards through the layers, a surface temperature; the
    difference of the two falls monotonically with a slope of at least one and has one root, found
    by secants held within a bracket, for all elements at once. The resistance of the pipe's wall,
    of the cladding and of contacts is neglected.

    References
    ----------
    .. [1] Carslaw, Jaeger, *Conduction of Heat in Solids*, 2nd edition, Oxford, 1959,
       section 1.6 and 7.2.

    Examples
    --------
    >>> wool = ConductivityIntegral.constant(0.045)
    >>> hall = SurfaceExchange(293.15, 293.15, 0.0, 0.1403, 0.15)
    >>> state = solve_lagged_pipe(423.15, 0.0603, [LaggingLayer(wool, 0.040)], hall)
    >>> round(float(state.heat_loss), 1), round(float(state.surface_temperature) - 273.15, 1)
    (37.9, 36.9)
    """
    problem = _Problem(inside_temperature, pipe_outside_diameter, layers, exchange)
    surface = problem.solve()
    heat_loss = problem.circumference * surface_heat_flux(surface, exchange)
    interfaces = problem.march(heat_loss)
    fluxes = surface_fluxes(interfaces[-1], exchange)
    return LaggedPipeState(
        heat_loss,
        interfaces[-1],
        np.stack(interfaces),
        problem.resistance(interfaces),
        _residual(fluxes, heat_loss, problem.circumference),
    )


def lagging_resistance_from_surface(
    inside_temperature: FloatLike, surface_temperature: FloatLike, heat_loss: FloatLike
) -> FloatArray:
    """Resistance of the lagging from what was found outside.

    Parameters
    ----------
    inside_temperature, surface_temperature : float or array
        [K]
    heat_loss : float or array
        [W/m]

    Returns
    -------
    array
        (Tin - Ts)/q'; NaN where no heat flows. A ratio with no mean where the loss may be zero:
        average the conductance instead. [m K/W]
    """
    loss = np.asarray(heat_loss, dtype=np.float64)
    difference = np.asarray(inside_temperature, dtype=np.float64) - surface_temperature
    return np.asarray(difference / np.where(loss == 0.0, np.nan, loss))


def lagging_conductance_from_surface(
    inside_temperature: FloatLike, surface_temperature: FloatLike, heat_loss: FloatLike
) -> FloatArray:
    """Conductance of the lagging from what was found outside.

    Parameters
    ----------
    inside_temperature, surface_temperature : float or array
        [K]
    heat_loss : float or array
        [W/m]

    Returns
    -------
    array
        q'/(Tin - Ts); NaN where the temperatures are equal. [W/(m K)]
    """
    difference = np.asarray(inside_temperature, dtype=np.float64) - surface_temperature
    return np.asarray(np.asarray(heat_loss) / np.where(difference == 0.0, np.nan, difference))


class _Problem:
    """One or many pipes to be solved at once."""

    def __init__(
        self,
        inside_temperature: FloatLike,
        pipe_outside_diameter: FloatLike,
        layers: Sequence[LaggingLayer],
        exchange: SurfaceExchange,
    ) -> None:
        inside = np.asarray(inside_temperature, dtype=np.float64)
        radius = 0.5 * np.asarray(pipe_outside_diameter, dtype=np.float64)
        if np.any(inside <= 0):
            raise InputError(f"inside temperature is {np.min(inside)} K; expected above 0")
        if np.any(radius <= 0):
            raise InputError(f"pipe diameter is {2 * np.min(radius)} m; expected above 0")
        self.exchange = exchange
        self.circumference = pi * np.asarray(exchange.diameter, dtype=np.float64)
        self.integrals = [layer.conductivity for layer in layers]
        self.shape_factors: list[FloatArray] = []
        for layer in layers:
            outer = radius + layer.thickness
            self.shape_factors.append(np.log(outer / radius) / (2.0 * pi * layer.factor))
            radius = outer
        fields = [value for value in vars(exchange).values() if not isinstance(value, str)]
        shape = np.broadcast_shapes(
            inside.shape,
            radius.shape,
            *(s.shape for s in self.shape_factors),
            *map(np.shape, fields),
        )
        self.inside = np.broadcast_to(inside, shape)
        self.first_integral = self.integrals[0].integral(inside) if layers else inside

    def march(self, heat_loss: FloatArray) -> list[FloatArray]:
        """Temperatures from the pipe outwards for a given loss."""
        temperatures = [self.inside]
        integral = self.first_integral
        for number, (layer, factor) in enumerate(
            zip(self.integrals, self.shape_factors, strict=True)
        ):
            if number:
                integral = layer.integral(temperatures[-1])
            temperatures.append(layer.inverse(integral - heat_loss * factor))
        return temperatures

    def resistance(self, temperatures: list[FloatArray]) -> FloatArray:
        """Resistance of all layers at given temperatures."""
        total = np.zeros(self.inside.shape)
        pairs = pairwise(temperatures)
        for layer, factor, (inner, outer) in zip(
            self.integrals, self.shape_factors, pairs, strict=True
        ):
            total = total + factor / layer.mean(inner, outer)
        return total

    def mismatch(self, surface: FloatArray) -> FloatArray:
        """Surface temperature that conduction gives, minus the trial one."""
        loss = self.circumference * surface_heat_flux(surface, self.exchange)
        return np.asarray(self.march(loss)[-1] - surface)

    def solve(self) -> FloatArray:
        """Surface temperature at which the balance closes."""
        lower, upper = self.bracket()
        surface, slope = self.start(lower, upper)
        mismatch = self.mismatch(surface)
        is_done = np.isnan(mismatch)
        step = -mismatch / slope
        for _ in range(_LARGEST_ITERATIONS):
            lower = np.where(mismatch > 0, surface, lower)
            upper = np.where(mismatch < 0, surface, upper)
            trial = surface + step
            is_inside = (trial >= lower) & (trial <= upper)
            trial = np.where(is_inside, trial, 0.5 * (lower + upper))
            step = np.where(is_done, 0.0, trial - surface)
            surface = surface + step
            is_done |= np.abs(step) <= _STEP_TOLERANCE
            if np.all(is_done):
                return surface
            previous, mismatch = mismatch, self.mismatch(surface)
            step = -mismatch / _secant_slope(mismatch - previous, step, slope)
        raise FitError(
            f"the heat balance of {np.count_nonzero(~is_done)} of {is_done.size} pipes did not "
            f"close; largest open step {np.max(np.abs(step[~is_done])):.3g} K"
        )

    def bracket(self) -> tuple[FloatArray, FloatArray]:
        """Temperatures between which the surface must be."""
        exchange = self.exchange
        air, surroundings = exchange.air_temperature, exchange.surroundings_temperature
        lower = np.minimum(np.minimum(air, surroundings), self.inside)
        upper = np.maximum(np.maximum(air, surroundings), self.inside)
        sun = np.asarray(exchange.absorbed_solar, dtype=np.float64)
        if not np.any(sun):
            return lower, upper
        reach = np.abs(sun) / 5.0  # K, at a low coefficient; doubled until it is enough
        for _ in range(20):
            high = np.where(sun > 0, upper + reach, upper)
            low = np.where(sun < 0, np.maximum(lower - reach, 1.0), lower)
            is_short = (sun > 0) & (self.mismatch(high) > 0)
            is_short |= (sun < 0) & (self.mismatch(low) < 0)
            if not np.any(is_short):
                break
            reach = 2.0 * reach
        return low, high

    def start(self, lower: FloatArray, upper: FloatArray) -> tuple[FloatArray, FloatArray]:
        """First guess from linear coefficients, and the slope of the mismatch there."""
        exchange = self.exchange
        guess = lower + 0.1 * (upper - lower)
        guess = np.where(self.inside > lower, guess, upper - 0.1 * (upper - lower))
        convection, radiation = surface_coefficients(guess, exchange)
        total = convection + radiation
        outside = (
            convection * exchange.air_temperature
            + radiation * exchange.surroundings_temperature
            + exchange.absorbed_solar
        ) / total
        resistance = self.resistance([self.inside] + [guess] * len(self.integrals))
        ratio = resistance * self.circumference
        surface = outside + (self.inside - outside) / (1.0 + ratio * total)
        slope = -(1.0 + ratio * (1.2 * convection + radiation))
        return np.clip(surface, lower, upper), slope


def _secant_slope(rise: FloatArray, step: FloatArray, estimate: FloatArray) -> FloatArray:
    # Held to what the slope can be, as a far point reached by halving would make the next step
    # look converged when it is not.
    is_usable = rise * step < 0
    slope = np.where(is_usable, rise / np.where(is_usable, step, 1.0), estimate)
    return np.clip(slope, 8.0 * estimate, -1.0)


def _residual(
    fluxes: SurfaceFluxes, heat_loss: FloatArray, circumference: FloatArray
) -> FloatArray:
    terms = np.maximum(np.abs(fluxes.convection), np.abs(fluxes.radiation))
    largest = circumference * np.maximum(terms, np.abs(fluxes.absorbed_solar))
    scale = np.maximum(np.maximum(largest, np.abs(heat_loss)), 1e-3)
    return np.asarray((circumference * fluxes.total - heat_loss) / scale)
