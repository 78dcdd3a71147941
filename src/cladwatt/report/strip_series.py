"""What a strip picture plots: station figures in ascending order, gaps, and picture columns."""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.flags import StationFlag
from cladwatt.results.assessment import RegionResult
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["Series", "left_out_runs", "resample_columns", "series_of", "with_pixels"]

MOST_COLUMNS = 1000


@dataclass(frozen=True)
class Series:
    """Curves of one region, each (n_stations,), stations ascending, a gain counted positive."""

    station: FloatArray
    """[m]"""
    length: FloatArray
    """[m]"""
    loss: FloatArray
    loss_low: FloatArray
    loss_high: FloatArray
    sound: FloatArray
    """[W/m]"""
    ratio: FloatArray
    ratio_low: FloatArray
    ratio_high: FloatArray
    """Resistance found over specified. [-]"""

    def runs(self, *values: FloatArray) -> list[IntArray]:
        """Return the runs of neighbouring stations where all of `values` are numbers."""
        good = np.all([~np.isnan(v) for v in values], axis=0)
        reach = (self.length[1:] + self.length[:-1]) / 2
        apart = np.diff(self.station) > 1.6 * np.maximum(reach, 1e-9)
        cuts = np.flatnonzero(apart | (good[1:] != good[:-1])) + 1
        pieces = np.split(np.arange(self.station.size), cuts)
        return [piece for piece in pieces if piece.size and good[piece[0]]]


def _specified(region: RegionResult) -> FloatArray:
    table = region.stations
    if region.specified_resistance is not None:
        return np.full(table.station.shape, region.specified_resistance.median)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(table.resistance / table.resistance_ratio)


def series_of(region: RegionResult) -> Series:
    """Return the curves of a region; the band of the ratio is that of the found resistance."""
    table = region.stations
    order = np.argsort(table.station, kind="stable")
    gone = (table.flags & int(StationFlag.GAP)) > 0

    def clean(values: FloatArray) -> FloatArray:
        return np.asarray(np.where(gone, np.nan, values)[order], dtype=float)

    sign = -1.0 if region.gain else 1.0
    ends = (table.heat_loss_low, table.heat_loss_high)
    low, high = (ends[1], ends[0]) if region.gain else ends
    specified = _specified(region)
    with np.errstate(invalid="ignore", divide="ignore"):
        ratio_low, ratio_high = (
            table.resistance_low / specified,
            table.resistance_high / specified,
        )
    return Series(
        station=table.station[order],
        length=table.length[order],
        loss=clean(sign * table.heat_loss),
        loss_low=clean(sign * low),
        loss_high=clean(sign * high),
        sound=clean(sign * table.sound_loss),
        ratio=clean(table.resistance_ratio),
        ratio_low=clean(ratio_low),
        ratio_high=clean(ratio_high),
    )


def with_pixels(region: RegionResult) -> RegionResult:
    """Return a region of unknown scale with its stations counted in pixels of the frame."""
    table = region.stations
    steps = np.hypot(np.diff(table.x), np.diff(table.y))
    along = np.concatenate(([0.0], np.cumsum(steps)))[: table.station.size]
    length = np.full(along.shape, float(np.mean(steps)) if steps.size else 1.0)
    ends = (float(along[0]), float(along[-1])) if along.size else (0.0, 1.0)
    counted = replace(table, station=along, length=length)
    return replace(region, stations=counted, start_station=ends[0], end_station=ends[1])


def _usable(region: RegionResult) -> BoolArray:
    table = region.stations
    whole = (table.flags & int(StationFlag.GAP)) == 0
    return np.asarray(whole & np.isfinite(table.surface_temperature))


def left_out_runs(region: RegionResult, low: float, high: float) -> list[tuple[float, float]]:
    """Return the parts of [low, high] no usable station covers, joined, in metres."""
    table, usable = region.stations, _usable(region)
    cells = sorted(
        (float(s - d / 2), float(s + d / 2))
        for s, d in zip(table.station[usable], table.length[usable], strict=True)
    )
    # Station cells meet only within the rounding of an oblique pipe's scale.
    slack = 0.6 * float(np.median(table.length)) if table.length.size else 0.0
    gaps, reached = [], low
    for start, end in [*cells, (high, high)]:
        if start - reached > slack:
            gaps.append((reached, start))
        reached = max(reached, end)
    return gaps


def resample_columns(region: RegionResult, *, low: float, high: float) -> IntArray:
    """Return for each column of an even picture the column of the strip field, -1 for none.

    Parameters
    ----------
    region : RegionResult
        Its stations need not be evenly spaced nor ascending.
    low, high : float
        Ends of the picture. [m]

    Returns
    -------
    (n_columns,) array of int
        n_columns is two per station, at most 1000.
    """
    table = region.stations
    count = int(min(MOST_COLUMNS, max(2 * table.station.size, 2)))
    if table.station.size == 0:
        return np.full(count, -1, dtype=np.int64)
    order = np.argsort(table.station, kind="stable")
    station, half = table.station[order], table.length[order] / 2
    place = low + (np.arange(count) + 0.5) * (high - low) / count
    right = np.clip(np.searchsorted(station, place), 0, station.size - 1)
    left = np.maximum(right - 1, 0)
    nearest = np.where(np.abs(station[left] - place) <= np.abs(station[right] - place), left, right)
    inside = np.abs(station[nearest] - place) <= 1.25 * half[nearest]
    return np.asarray(np.where(inside, order[nearest], -1), dtype=np.int64)
