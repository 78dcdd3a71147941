"""What the line would lose with its lagging as specified, and sound, in the frame's conditions."""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.conditions import FrameDraws, LineDraws
from cladwatt.physics.lagged_pipe import solve_lagged_pipe
from cladwatt.types import FloatArray

__all__ = ["SoundDraws", "sound_draws"]


@dataclass(frozen=True)
class SoundDraws:
    """Draws of the reference, each (count,)."""

    heat_loss: FloatArray
    """Specified times the installation factor. [W/m]"""
    specified_loss: FloatArray
    """At laboratory conductivity. [W/m]"""
    specified_resistance: FloatArray
    """[m K/W]"""


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
    The installation factor multiplies the conductivity of every layer.
    """
    known = (line.inside_temperature, line.layers, line.lagged_diameter, line.pipe_diameter)
    if any(part is None for part in known) or frame.wind_speed is None:
        return None
    assert line.inside_temperature is not None
    assert line.layers is not None
    assert line.lagged_diameter is not None
    assert line.pipe_diameter is not None
    exchange = line.exchange(frame, line.lagged_diameter)
    specified = solve_lagged_pipe(
        line.inside_temperature, line.pipe_diameter, line.layers, exchange
    )
    installed = tuple(
        replace(layer, factor=np.asarray(layer.factor) * line.installation_factor)
        for layer in line.layers
    )
    sound = solve_lagged_pipe(line.inside_temperature, line.pipe_diameter, installed, exchange)
    return SoundDraws(
        heat_loss=sound.heat_loss,
        specified_loss=specified.heat_loss,
        specified_resistance=specified.resistance,
    )
