"""From runs of stations to stretches in metres and watts."""

import math
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.result import Interval, Stretch, interval_of
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.stretch_side import Side
from cladwatt.inverse.stretches import Run
from cladwatt.types import FloatArray

__all__ = ["stretches_of"]

SMALLEST_PROBABILITY = 0.05
"""Runs less likely than this are not listed."""


class _Weighed(NamedTuple):
    run: Run
    loss: FloatArray
    """(count,) [W/m]"""
    excess: FloatArray
    """(count,) [W]"""
    probability: float
    side: Side
    kinds: tuple[tuple[str, float], ...]


def stretches_of(
    seen: Seen,
    runs: tuple[Run, ...],
    probabilities: Sequence[float],
    loss: FloatArray,
    base_loss: FloatArray,
    sides: Sequence[Side],
    kinds: Sequence[tuple[tuple[str, float], ...]],
) -> tuple[Stretch, ...]:
    """Return the stretches behind the runs of a region.

    Parameters
    ----------
    seen : Seen
        With known diameter.
    runs : tuple of Run
    probabilities : sequence of float
        That there is damage at each run.
    loss : (count, n_stations) array
        [W/m]
    base_loss : (count,) array
        At the sound level; like `loss` as seen, possible or not. [W/m]
    sides : sequence of Side
        Of each run.
    kinds : sequence of (name, probability) pairs
        Of damage at each run, if it is local damage.

    Returns
    -------
    tuple of Stretch
        Runs likelier than `SMALLEST_PROBABILITY`.
    """
    scale = seen.length_draws() / float(np.sum(seen.strip.length[~seen.component_at]))
    weighed = [
        _weigh(seen, run, probability, loss, base_loss, scale, side, each)
        for run, probability, side, each in zip(runs, probabilities, sides, kinds, strict=True)
    ]
    kept = [one for one in weighed if one.probability > SMALLEST_PROBABILITY]
    everything = max(sum(float(np.median(np.abs(one.excess))) for one in kept), 1e-12)
    return tuple(
        Stretch(
            id=f"{seen.region.id}:{number}",
            start=_edge(seen, one.run.first, -0.5, one.run.first_u),
            end=_edge(seen, one.run.last, 0.5, one.run.last_u),
            probability=one.probability,
            heat_loss=interval_of(one.loss),
            excess=interval_of(one.excess),
            share_of_excess=float(np.median(np.abs(one.excess))) / everything,
            outline=_outline(seen, one.run),
            side=one.side.side,
            side_probability=one.side.probability,
            kinds=one.kinds,
        )
        for number, one in enumerate(kept, start=1)
    )


def _weigh(
    seen: Seen,
    run: Run,
    probability: float,
    loss: FloatArray,
    base_loss: FloatArray,
    scale: FloatArray,
    side: Side,
    kinds: tuple[tuple[str, float], ...],
) -> _Weighed:
    metres = np.where(seen.usable, seen.strip.length, 0.0)[run.stations]
    inside = np.where(metres > 0, loss[:, run.stations], 0.0)
    mean = np.asarray(inside @ (metres / max(float(metres.sum()), 1e-12)))
    excess = (mean - base_loss) * float(metres.sum()) * scale
    return _Weighed(run, mean, excess, probability, side, kinds)


def _edge(seen: Seen, index: int, side: float, u_stations: float) -> Interval:
    """Return an edge of a run as a station with its 95 % interval. [m]"""
    strip, region = seen.strip, seen.region
    step = float(strip.length[index])
    middle = float(strip.station[index]) + region.direction * side * step
    by_scale = strip.scale_uncertainty * abs(middle - region.origin)
    reach = 1.96 * math.hypot(u_stations * step, by_scale)
    low, high = sorted((float(strip.station[0]), float(strip.station[-1])))
    return Interval(middle, max(middle - reach, low - step), min(middle + reach, high + step))


def _outline(seen: Seen, run: Run) -> tuple[tuple[float, float], ...]:
    """Return the ring of a stretch in the frame, at the pipe's full width. [px]"""
    strip = seen.strip
    full = 1 / strip.across[-1]
    number = 2 if len(seen.region.centreline or ()) <= 2 else 9
    stations = np.unique(np.linspace(run.first, run.last, number).astype(int))
    sides = []
    for samples, centre in ((strip.sample_x, strip.x), (strip.sample_y, strip.y)):
        middle = centre[stations]
        edges = [middle + (samples[row, stations] - middle) * full for row in (0, -1)]
        sides.append(np.concatenate([edges[0], edges[1][::-1]]))
    return tuple((round(float(x), 2), round(float(y), 2)) for x, y in zip(*sides, strict=True))
