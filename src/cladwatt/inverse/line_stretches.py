"""One damage seen in several frames as one stretch of its line."""

from collections.abc import Callable, Sequence
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.line_result import LogStretch
from cladwatt.inverse.result import Interval, RegionResult, Stretch
from cladwatt.types import FloatArray

__all__ = ["log_stretches", "probability_in"]


class _Found(NamedTuple):
    row: int
    stretch: Stretch


def log_stretches(
    regions: Sequence[RegionResult],
    weights: Callable[[float, float], FloatArray],
    apart: float,
) -> tuple[LogStretch, ...]:
    """Put the stretches of a line's regions together.

    Stretches of different regions are one where they overlap, or lie within twice `apart` of each
    other: frames place their stations no better than that.

    Parameters
    ----------
    regions : sequence of RegionResult
        Of one line, each with its declared station, in their order along it.
    weights : callable
        Weight of each region between two stations, (n_regions,).
    apart : float
        Standard uncertainty of one frame's stations against another's. [m]

    Returns
    -------
    tuple of LogStretch
        In their order along the line. A frame that sees the metres and finds nothing there counts
        with probability 0. Excess is that of all metres, the intervals' ends averaged, as for
        errors that are all shared: never too narrow for that.
    """
    found = [
        _Found(row, stretch) for row, region in enumerate(regions) for stretch in region.stretches
    ]
    found.sort(key=lambda one: (one.stretch.start.median, one.row))
    groups: list[list[_Found]] = []
    for one in found:
        for group in groups:
            if _same(group, one, 2 * apart):
                group.append(one)
                break
        else:
            groups.append([one])
    return tuple(_merged(group, regions, weights) for group in groups)


def _same(group: Sequence[_Found], one: _Found, reach: float) -> bool:
    if any(one.row == other.row for other in group):
        return False
    begin = one.stretch.start.median
    return begin <= max(other.stretch.end.median for other in group) + reach


def _merged(
    group: Sequence[_Found],
    regions: Sequence[RegionResult],
    weights: Callable[[float, float], FloatArray],
) -> LogStretch:
    group = sorted(group)
    low = min(one.stretch.start.median for one in group)
    high = max(one.stretch.end.median for one in group)
    seeing = weights(low, high)
    own = np.array([max(seeing[one.row], 1e-6) for one in group])
    share = own / own.sum()
    edges = np.array([_precision(one.stretch) for one in group])
    return LogStretch(
        id=group[0].stretch.id,
        members=tuple(one.stretch.id for one in group),
        regions=tuple(
            region.region_id
            for row, region in enumerate(regions)
            if seeing[row] > 0 or any(one.row == row for one in group)
        ),
        start=_averaged([one.stretch.start for one in group], edges),
        end=_averaged([one.stretch.end for one in group], edges),
        probability=float(
            min(sum(seeing[one.row] * one.stretch.probability for one in group), 1.0)
        ),
        excess=_averaged([one.stretch.excess for one in group], share),
    )


def _precision(stretch: Stretch) -> float:
    """Return a weight for a stretch's edges: the inverse variance of where they lie."""
    widths = [edge.high - edge.low for edge in (stretch.start, stretch.end)]
    return 1 / max(sum(width**2 for width in widths), 1e-6)


def _averaged(intervals: Sequence[Interval], weights: FloatArray) -> Interval:
    ends = np.array([(one.median, one.low, one.high) for one in intervals])
    median, low, high = (weights / weights.sum()) @ ends
    return Interval(float(median), float(low), float(high))


def probability_in(region: RegionResult, low: float, high: float) -> float | None:
    """Return the probability of damage between two stations, as one region has it.

    Ageing throughout, or that of the stretches that reach in.
    """
    if region.probability_aged is None and region.probability_local is None:
        return None
    sound = 1.0 - (region.probability_aged or 0.0)
    for stretch in region.stretches:
        if stretch.start.median < high and stretch.end.median > low:
            sound = min(sound, 1.0 - stretch.probability)
    return 1.0 - sound
