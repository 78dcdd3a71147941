"""What the line would lose with its lagging as specified, and sound, in the frame's conditions."""

from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import Vapour, outer_flux, vapour_of
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.lagged_pipe import (
    LaggedPipeState,
    LaggingLayer,
    SurfaceExchange,
    solve_lagged_pipe,
)
from cladwatt.physics.surface_balance import surface_heat_flux
from cladwatt.types import BoolArray, FloatArray

__all__ = [
    "DryAndWet",
    "SoundDraws",
    "dry_and_wet_sound",
    "film_resistance",
    "outside_film",
    "sound_draws",
]

ROUNDS = 18
"""Halvings of what condensing vapour may bring."""


@dataclass(frozen=True)
class SoundDraws:
    """Draws of the reference, each (count,)."""

    heat_loss: FloatArray
    """Specified times the installation factor, with supports. [W/m]"""
    specified_loss: FloatArray
    """At laboratory conductivity. [W/m]"""
    specified_resistance: FloatArray
    """Of the lagging. [m K/W]"""
    declared_loss: FloatArray | None = None
    """With the lagging wet or frozen as it was declared found, installation factor and supports as
    for the sound loss; None where all of it is declared dry. [W/m]"""
    declared_resistance: FloatArray | None = None
    """Of that lagging. [m K/W]"""


def sound_draws(line: LineDraws, frame: FrameDraws) -> SoundDraws | None:
    """Return the sound and the specified loss, with the draws of the frame and the line.

    Parameters
    ----------
    line : LineDraws
    frame : FrameDraws

    Returns
    -------
    SoundDraws or None
        None where inside temperature, lagging, diameter or wind is unknown.

    Notes
    -----
    The installation factor multiplies the conductivity of every layer; the allowance for
    supports multiplies the loss. Specified and sound lagging is dry, whatever was declared found.
    """
    known = (line.inside_temperature, line.layers, line.lagged_diameter, line.pipe_diameter)
    if any(part is None for part in known) or frame.wind_speed is None:
        return None
    assert line.layers is not None
    specified, resistance = _solved(line, frame, line.layers)
    installed = _installed(line, line.layers)
    sound, _ = _solved(line, frame, installed)
    supported = 1 + line.supports_allowance
    reference = SoundDraws(sound * supported, specified, resistance)
    if not line.condition_factors:
        return reference
    found = tuple(
        replace(layer, factor=np.asarray(layer.factor) * factor)
        for layer, factor in zip(installed, line.condition_factors, strict=True)
    )
    loss, resistance = _solved(line, frame, found)
    return replace(reference, declared_loss=loss * supported, declared_resistance=resistance)


class DryAndWet(NamedTuple):
    """Sound lagging in balance as a dry surface and as one under a film, each (count,)."""

    both: BoolArray
    """Draws in which the dry one is above the dew point and the wet one wet all over."""
    dry_loss: FloatArray
    """[W/m]"""
    wet_loss: FloatArray
    """[W/m]"""


def dry_and_wet_sound(line: LineDraws, frame: FrameDraws) -> DryAndWet | None:
    """Return the sound line dry and wet, where its cladding is brighter than water.

    Parameters
    ----------
    line : LineDraws
    frame : FrameDraws

    Returns
    -------
    DryAndWet or None
        None where no vapour may condense, the film changes no emissivity, or something is
        unknown.

    Notes
    -----
    Under a cold sky a bright dry surface stays near the air, while the film on it radiates to
    the sky and keeps it below the dew point: then both are a balance, and the weather before
    tells which it is.
    """
    known = (line.inside_temperature, line.layers, line.lagged_diameter, line.pipe_diameter)
    vapour, dew = vapour_of(frame, line), frame.dew_point
    if vapour is None or dew is None or frame.wind_speed is None or any(p is None for p in known):
        return None
    film = np.maximum(line.total_emissivity, vapour.film_emissivity)
    if not (film > line.total_emissivity).any():
        return None
    assert line.layers is not None
    assert line.lagged_diameter is not None
    installed = _installed(line, line.layers)
    exchange = line.exchange(frame, line.lagged_diameter)
    dry = _closed(line, installed, exchange, None)
    wet = _closed(line, installed, replace(exchange, total_emissivity=film), vapour)
    both = (dry.surface_temperature >= dew) & (wet.surface_temperature < dew - vapour.film_span)
    supports = 1 + line.supports_allowance
    return DryAndWet(np.asarray(both), dry.heat_loss * supports, wet.heat_loss * supports)


def _installed(line: LineDraws, layers: tuple[LaggingLayer, ...]) -> tuple[LaggingLayer, ...]:
    return tuple(
        replace(layer, factor=np.asarray(layer.factor) * line.installation_factor)
        for layer in layers
    )


def film_resistance(line: LineDraws) -> FloatArray | None:
    """Return the resistance between fluid and pipe wall, None where neglected. [m K/W]"""
    if line.film_coefficient is None or line.pipe_diameter is None:
        return None
    return np.asarray(1 / (np.pi * line.pipe_diameter * line.film_coefficient))


def outside_film(conductance: FloatArray, line: LineDraws) -> FloatArray:
    """Return the conductance from the pipe wall on, of one that begins in the fluid.

    Parameters
    ----------
    conductance : (count,) or (count, n) array
        [W/(m K)]
    line : LineDraws
    """
    film = film_resistance(line)
    if film is None:
        return conductance
    film = film.reshape(-1, *[1] * (conductance.ndim - 1))
    return np.asarray(conductance / np.maximum(1 - conductance * film, 1e-6))


def _solved(
    line: LineDraws, frame: FrameDraws, layers: tuple[LaggingLayer, ...]
) -> tuple[FloatArray, FloatArray]:
    """Return loss and lagging's resistance, with film and condensation.

    What condenses, and the film of water it leaves, bring heat to the surface, like sun. A warmer
    surface is brought less, so that how much is found by halving: about the dew point, where the
    film comes and goes, substitution would go back and forth.
    """
    assert line.lagged_diameter is not None
    exchange = line.exchange(frame, line.lagged_diameter)
    state = _closed(line, layers, exchange, vapour_of(frame, line))
    film = film_resistance(line)
    resistance = state.resistance
    return state.heat_loss, resistance if film is None else np.asarray(resistance - film)


def _closed(
    line: LineDraws,
    layers: tuple[LaggingLayer, ...],
    exchange: SurfaceExchange,
    vapour: Vapour | None,
) -> LaggedPipeState:
    """Return the pipe in balance, with the film inside and what condenses outside."""
    assert line.inside_temperature is not None
    assert line.pipe_diameter is not None
    film = film_resistance(line)
    start, parts = line.pipe_diameter, layers
    if film is not None:
        start, parts = 0.9 * line.pipe_diameter, (_film_layer(line.pipe_diameter, film), *layers)
    state = solve_lagged_pipe(line.inside_temperature, start, parts, exchange)
    if vapour is None:
        return state
    first = _condensed(state.surface_temperature, exchange, vapour)
    low, high = 2 * np.minimum(first, 0.0), np.maximum(first, 0.0)
    for _ in range(ROUNDS if first.any() else 0):
        brought = 0.5 * (low + high)
        warmed = replace(exchange, absorbed_solar=exchange.absorbed_solar + brought)
        state = solve_lagged_pipe(line.inside_temperature, start, parts, warmed)
        more = _condensed(state.surface_temperature, exchange, vapour) > brought
        low, high = np.where(more, brought, low), np.where(more, high, brought)
    return state


def _film_layer(pipe_diameter: FloatArray, film: FloatArray) -> LaggingLayer:
    """Return a layer of the film's resistance, from nine tenths of the pipe's diameter out to it.

    Solved with the lagging: by substitution a film of more resistance than all the rest diverges.
    """
    factor = np.log(1 / 0.9) / (2 * np.pi * film)
    return LaggingLayer(ConductivityIntegral.constant(1.0), 0.05 * pipe_diameter, factor)


def _condensed(
    surface_temperature: FloatArray, exchange: SurfaceExchange, vapour: Vapour
) -> FloatArray:
    """Return the heat that condensing vapour brings, (count,). [W/m2]"""
    dry = surface_heat_flux(surface_temperature, exchange)
    return np.asarray(dry - outer_flux(surface_temperature, exchange, vapour))
