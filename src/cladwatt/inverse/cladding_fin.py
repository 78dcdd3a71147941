"""How far the cladding spreads heat along itself, against the stretches that are found."""

import math
from collections.abc import Sequence

import numpy as np

from cladwatt.inverse.result import Stretch
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws
from cladwatt.physics.conduction import fin_length
from cladwatt.physics.surface_balance import surface_coefficients
from cladwatt.quantities import Remark

__all__ = ["edge_spread", "spread_remark", "spreading_length"]

SHORT = 2.0
"""A stretch this many fin lengths long shows 1 - 1/e of its contrast in its middle, a shorter one
less: where a step under a sheet lies, half of it shows, and the rest comes as exp(-x / length)."""
LEAST = 0.02
"""A sheet that spreads heat less far than this is not worth a word. [m]"""


LAGGING_SPREAD, LENS_SPREAD = 0.3, 1.5
"""Decay of a step along lagging, over its thickness (1 / pi between two plane faces that hold
their temperature), and of a step through the lens, in stations (assumption)."""


def spreading_length(seen: Seen, sound: SoundDraws | None) -> float | None:
    """Return the length over which a disturbance along the cladding falls to 1/e. [m]

    Parameters
    ----------
    seen : Seen
    sound : SoundDraws or None
        Its lagging conducts too; left out where unknown.

    Returns
    -------
    float or None
        At the medians; None where no wind is known.
    """
    if seen.frame.wind_speed is None or not seen.usable.any():
        return None
    surface = np.full(1, float(np.median(seen.median_temperature[seen.usable])))
    exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
    total = float(np.median(sum(surface_coefficients(surface, exchange))))
    if sound is not None:
        conducted = 1 / (seen.perimeter * sound.specified_resistance)
        total += max(float(np.median(conducted)), 0.0)
    sheet = seen.line.cladding
    return float(fin_length(sheet.thickness.value, sheet.conductivity, total))


def spread_remark(
    seen: Seen, sound: SoundDraws | None, stretches: Sequence[Stretch]
) -> tuple[Remark, ...]:
    """Return the remark that a stretch is short against what the cladding spreads.

    Parameters
    ----------
    seen : Seen
    sound : SoundDraws or None
    stretches : sequence of Stretch
    """
    length = spreading_length(seen, sound) if stretches else None
    if length is None or not math.isfinite(length) or length < LEAST:
        return ()
    shortest = min(abs(one.end.median - one.start.median) for one in stretches)
    if shortest > SHORT * length:
        return ()
    return (Remark("remark.spread_by_cladding", (("length_m", length),)),)


def edge_spread(seen: Seen, sound: SoundDraws | None, station_length: float) -> float:
    """Return how far the edges of damage are spread by cladding, lagging and lens. [m]

    Parameters
    ----------
    seen : Seen
    sound : SoundDraws or None
    station_length : float
        [m]
    """
    lagging = sum(layer.thickness.value for layer in seen.line.layers if layer.thickness)
    return float(
        np.sqrt(
            (spreading_length(seen, sound) or 0.0) ** 2
            + (LAGGING_SPREAD * lagging) ** 2
            + (LENS_SPREAD * station_length) ** 2
        )
    )
