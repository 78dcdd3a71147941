"""What the line would lose with its lagging as specified, and sound, in the frame's conditions."""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import may_condense, outer_flux
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.lagged_pipe import LaggingLayer, SurfaceExchange, solve_lagged_pipe
from cladwatt.physics.surface_balance import surface_heat_flux
from cladwatt.types import FloatArray

__all__ = ["SoundDraws", "film_resistance", "outside_film", "sound_draws"]

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
    installed = tuple(
        replace(layer, factor=np.asarray(layer.factor) * line.installation_factor)
        for layer in line.layers
    )
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
    assert line.inside_temperature is not None
    assert line.pipe_diameter is not None
    assert line.lagged_diameter is not None
    exchange = line.exchange(frame, line.lagged_diameter)
    humidity = frame.relative_humidity if may_condense(frame, line) else None
    film = film_resistance(line)
    start, parts = line.pipe_diameter, layers
    if film is not None:
        start, parts = 0.9 * line.pipe_diameter, (_film_layer(line.pipe_diameter, film), *layers)
    state = solve_lagged_pipe(line.inside_temperature, start, parts, exchange)
    if humidity is not None:
        first = _condensed(state.surface_temperature, exchange, humidity)
        low, high = 2 * np.minimum(first, 0.0), np.maximum(first, 0.0)
        for _ in range(ROUNDS if first.any() else 0):
            brought = 0.5 * (low + high)
            warmed = replace(exchange, absorbed_solar=exchange.absorbed_solar + brought)
            state = solve_lagged_pipe(line.inside_temperature, start, parts, warmed)
            more = _condensed(state.surface_temperature, exchange, humidity) > brought
            low, high = np.where(more, brought, low), np.where(more, high, brought)
    resistance = state.resistance
    return state.heat_loss, resistance if film is None else np.asarray(resistance - film)


def _film_layer(pipe_diameter: FloatArray, film: FloatArray) -> LaggingLayer:
    """Return a layer of the film's resistance, from nine tenths of the pipe's diameter out to it.

    Solved with the lagging: by substitution a film of more resistance than all the rest diverges.
    """
    factor = np.log(1 / 0.9) / (2 * np.pi * film)
    return LaggingLayer(ConductivityIntegral.constant(1.0), 0.05 * pipe_diameter, factor)


def _condensed(
    surface_temperature: FloatArray, exchange: SurfaceExchange, humidity: FloatArray
) -> FloatArray:
    """Return the heat that condensing vapour brings, (count,). [W/m2]"""
    dry = surface_heat_flux(surface_temperature, exchange)
    return np.asarray(dry - outer_flux(surface_temperature, exchange, humidity))
