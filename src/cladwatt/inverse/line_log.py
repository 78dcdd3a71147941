"""Several frames of one line as one log of it by station, in which every metre counts once.

Where frames overlap, their losses are averaged draw by draw, so that what they share stays
shared, each weighted by the inverse variance of what it has for itself. They agree where the
difference of their draws, in which shared errors cancel, is compatible with nothing; losses are
compared against what sound lagging would lose at each frame's own conditions, where that is
known. Where they do not agree, one of them is wrong and nobody knows which: the combined loss is
widened by as much as they spread beyond their own errors.

Stated stations are taken as good to `STATION_U`. Nothing is said of metres that no frame shows.

References
----------
.. [1] JCGM 101:2008, clause 5 (propagation by draws of what several results share).
.. [2] DerSimonian, Laird, "Meta-analysis in clinical trials", Controlled Clinical Trials 7 (1986)
   177-188 (spread of results beyond their own errors).
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.line_profile import BIN
from cladwatt.inverse.line_result import LineLog, LogBin, LogOverlap, LogStretch
from cladwatt.inverse.line_stretches import log_stretches, probability_in
from cladwatt.inverse.result import Interval, LineProfile, RegionResult, interval_of
from cladwatt.quantities import Remark
from cladwatt.types import BoolArray, FloatArray

__all__ = ["STATION_U", "LoggedLines", "log_lines"]

STATION_U = 0.1
"""Standard uncertainty of one frame's stations against another's; assumption. [m]"""
DISAGREE = 1.96
"""Standard uncertainties apart from which two frames do not agree."""
SMALLEST_OWN_SHARE = 0.02
"""Of a variance that is always taken for a frame's own, so that none gets all the weight."""
FIRM = 0.05
"""A sound loss with draws below this share of its median is none to compare against."""

Normal = Callable[[str, str], FloatArray]
"""Gives standard normal draws by owner and quantity, as `DrawBook.normal`."""


class LoggedLines(NamedTuple):
    """What the logs come to.

    Attributes
    ----------
    logs : tuple of LineLog
    counted : dict of str to dict of str to array
        By region id: draws of length, total_loss and, where known, total_excess that count every
        metre once when they are summed. Regions without a declared station are not in it.
    remarks : tuple of Remark
    """

    logs: tuple[LineLog, ...]
    counted: dict[str, dict[str, FloatArray]]
    remarks: tuple[Remark, ...]


def log_lines(regions: Sequence[RegionResult], normal: Normal) -> LoggedLines:
    """Put the regions of every line in order along it and count every metre once.

    Parameters
    ----------
    regions : sequence of RegionResult
        Of a survey, with their draws; those with a `profile` have a declared station.
    normal : callable
        As `DrawBook.normal`, for what disagreement adds.

    Returns
    -------
    LoggedLines
    """
    logs: list[LineLog] = []
    counted: dict[str, dict[str, FloatArray]] = {}
    twice: list[str] = []
    for tag in dict.fromkeys(region.tag for region in regions):
        own = [one for one in regions if one.tag == tag and "total_loss" in one.draws]
        placed = [one for one in own if one.profile is not None]
        if placed:
            log, once = _logged(placed, normal)
            logs.append(log)
            counted |= once
        if len(placed) < len(own) and len({one.frame_id for one in own}) > 1:
            names = ", ".join(one.region_id for one in own if one.profile is None)
            twice.append(f"{tag} ({names})")
    remarks = (Remark("remark.line_perhaps_twice", (("lines", "; ".join(twice)),)),)
    return LoggedLines(tuple(logs), counted, remarks if twice else ())


@dataclass
class _Grid:
    """The regions of one line on bins common to all; arrays (n_regions, n_bins).

    Attributes
    ----------
    first : int
        Number of the first bin.
    metres, seen : array
        Not seen is also what one frame cannot quantify and another can.
    union : (n_bins,) array
        Metres of pipe drawn, each once.
    weight : array
        Of each region's loss per metre; sums to one over the regions where any pipe is drawn.
    widening : (n_draws, n_bins) array
        What disagreement adds to the loss. [W/m]
    """

    regions: list[RegionResult]
    first: int
    metres: FloatArray
    seen: FloatArray
    union: FloatArray
    weight: FloatArray
    widening: FloatArray

    def profile(self, number: int) -> LineProfile:
        profile = self.regions[number].profile
        assert profile is not None
        return profile

    def within(self, number: int, bins: slice) -> FloatArray:
        """Return a region's loss in bins that all lie within it, (n_draws, n)."""
        shift = self.profile(number).first - self.first
        return self.profile(number).loss[:, bins.start - shift : bins.stop - shift]


def _logged(
    placed: Sequence[RegionResult], normal: Normal
) -> tuple[LineLog, dict[str, dict[str, FloatArray]]]:
    grid = _grid_of(placed)
    overlaps = []
    for number, (where, members) in enumerate(_overlaps(grid), start=1):
        noise = normal(f"line:{grid.regions[0].tag}", f"disagreement_{number}")
        overlaps.append(_weigh(grid, where, members, noise))
    named = [overlap for overlap in overlaps if overlap is not None]
    one = grid.regions[0]
    bins = _bins(grid)
    log = LineLog(
        tag=one.tag,
        area=one.area,
        gain=one.gain,
        regions=tuple(region.region_id for region in grid.regions),
        bins=bins,
        overlaps=tuple(named),
        stretches=_stretches(grid),
        not_seen=_not_seen(grid),
        covered_length=sum(one.covered for one in bins),
        remarks=tuple(
            _overlap_remark(one.tag, overlap) for overlap in named if _is_told(grid, overlap)
        ),
    )
    return log, _counted(grid)


def _grid_of(placed: Sequence[RegionResult]) -> _Grid:
    def order(region: RegionResult) -> tuple[float, str]:
        assert region.profile is not None
        return round(region.profile.low, 2), region.region_id

    regions = sorted(placed, key=order)
    profiles = [one.profile for one in regions if one.profile is not None]
    first = min(one.first for one in profiles)
    last = max(one.first + one.metres.size for one in profiles)
    metres, seen = np.zeros((2, len(profiles), last - first))
    for row, one in enumerate(profiles):
        here = slice(one.first - first, one.first - first + one.metres.size)
        metres[row, here], seen[row, here] = one.metres, one.seen
    told = np.array([one.verdict.level != "not quantified" for one in regions])
    # what an image cannot quantify gives way to one that can
    seen = np.where(~told[:, None] & (seen[told].sum(axis=0) > 0), 0.0, seen)
    weight = np.where((seen > 0) | (seen.sum(axis=0) == 0), metres, 0.0)
    total = weight.sum(axis=0)
    return _Grid(
        regions, first, metres, seen, _union(profiles, metres, first),
        weight / np.where(total > 0, total, 1.0),
        np.zeros((profiles[0].loss.shape[0], last - first)),
    )  # fmt: skip


def _union(profiles: Sequence[LineProfile], metres: FloatArray, first: int) -> FloatArray:
    """Return the metres of pipe drawn in each bin, each once, without components."""
    found = np.zeros(metres.shape[1])
    for column in range(found.size):
        low, high = BIN * (first + column), BIN * (first + column + 1)
        parts = [(max(one.low, low), min(one.high, high)) for one in profiles]
        drawn = sorted(part for part in parts if part[1] > part[0])
        end, length = low, 0.0
        for begin, stop in drawn:
            length += max(stop - max(begin, end), 0.0)
            end = max(end, stop)
        hidden = min(
            (stop - begin - metres[row, column]
             for row, (begin, stop) in enumerate(parts) if stop > begin),
            default=0.0,
        )  # fmt: skip
        found[column] = length - max(hidden, 0.0)
    return np.asarray(np.clip(found, metres.max(axis=0), metres.sum(axis=0)))


def _overlaps(grid: _Grid) -> list[tuple[slice, list[int]]]:
    """Return runs of bins that the same two or more regions see, with those regions."""
    found: list[tuple[slice, list[int]]] = []
    together = [tuple(np.flatnonzero(column > 0)) for column in grid.seen.T]
    for column, members in enumerate(together):
        if len(members) < 2:
            continue
        if found and found[-1][0].stop == column and tuple(found[-1][1]) == members:
            found[-1] = (slice(found[-1][0].start, column + 1), found[-1][1])
        else:
            found.append((slice(column, column + 1), [int(one) for one in members]))
    return found


def _weigh(grid: _Grid, bins: slice, members: list[int], noise: FloatArray) -> LogOverlap | None:
    """Set the weights of an overlap; None where it is no longer than a bin: they only touch."""
    twice = float((grid.metres[members, bins].sum(axis=0) - grid.union[bins]).sum())
    if twice < BIN:
        return None
    metres = grid.seen[members, bins].min(axis=0)
    share = metres / metres.sum() if metres.sum() > 0 else np.full(metres.size, 1 / metres.size)
    means = np.stack([grid.within(one, bins) @ share for one in members])
    weights = _weights(means)
    reference = _references(grid, members)
    values = means / reference
    spread, apart = _compared(grid, bins, members, values, reference, weights)
    agree = bool(apart < DISAGREE)
    grid.weight[:, bins] = 0.0
    grid.weight[members, bins] = weights[:, None]
    if not agree:
        scale = abs(float(np.median(weights @ np.broadcast_to(reference, means.shape))))
        grid.widening[:, bins] = (spread * scale * noise)[:, None]
    combined = weights @ means + grid.widening[:, bins] @ share
    low = max(min(grid.profile(one).low for one in members), BIN * (grid.first + bins.start))
    high = min(max(grid.profile(one).high for one in members), BIN * (grid.first + bins.stop))
    return LogOverlap(
        start=low,
        end=high,
        regions=tuple(grid.regions[one].region_id for one in members),
        heat_losses=tuple(interval_of(one) for one in means),
        weights=tuple(float(one) for one in weights),
        heat_loss=interval_of(combined),
        standard_uncertainties_apart=apart,
        agree=agree,
    )


def _weights(means: FloatArray) -> FloatArray:
    """Return weights by the inverse variance of what is each region's own, (n_regions,)."""
    covariance = np.atleast_2d(np.cov(means))
    variance = np.diag(covariance)
    shared = (covariance.sum() - variance.sum()) / max(variance.size * (variance.size - 1), 1)
    own = np.maximum(variance - shared, SMALLEST_OWN_SHARE * variance)
    weights = 1 / np.maximum(own, 1e-12)
    return np.asarray(weights / weights.sum())


def _references(grid: _Grid, members: Sequence[int]) -> FloatArray:
    """Return what losses are compared against, (n_regions, n_draws) or ones."""
    found = []
    for one in members:
        sound = grid.regions[one].draws.get("sound_loss")
        if sound is None or np.abs(sound).min() <= FIRM * abs(float(np.median(sound))):
            return np.ones((1, 1))
        found.append(np.abs(sound))
    return np.stack(found)


def _compared(
    grid: _Grid,
    bins: slice,
    members: Sequence[int],
    values: FloatArray,
    reference: FloatArray,
    weights: FloatArray,
) -> tuple[float, float]:
    """Return the spread of values beyond their own errors, and the furthest two apart.

    The first in units of the values, the second in standard uncertainties of a difference.
    """
    scale = np.median(np.broadcast_to(reference, values.shape), axis=1)
    placed = np.array([
        _slope(grid.within(one, bins)) * STATION_U / size
        for one, size in zip(members, scale, strict=True)
    ])  # fmt: skip
    apart = 0.0
    for first in range(len(members)):
        for second in range(first):
            between = values[first] - values[second]
            # one place for both: where each has a step, its station tells how far the mean moves
            u = np.hypot(np.std(between), max(placed[first], placed[second]))
            apart = max(apart, abs(float(np.median(between))) / max(float(u), 1e-12))
    centred = values - weights @ values
    middle = np.median(centred, axis=1)
    beyond = weights @ middle**2 - weights @ (np.var(centred, axis=1) + (placed / 2) ** 2)
    return float(np.sqrt(max(beyond, 0.0))), apart


def _slope(loss: FloatArray) -> float:
    """Return how much a mean over bins changes per metre that they are moved. [W/m2]"""
    middle = np.median(loss, axis=0)
    return float(abs(middle[-1] - middle[0])) / (BIN * middle.size)


def _bins(grid: _Grid) -> tuple[LogBin, ...]:
    return tuple(
        _bin(grid, column) for column in np.flatnonzero(grid.seen.sum(axis=0) > 0).tolist()
    )


def _bin(grid: _Grid, column: int) -> LogBin:
    members = [int(one) for one in np.flatnonzero(grid.weight[:, column] > 0)]
    weights = grid.weight[members, column]
    here = slice(column, column + 1)
    parts = np.stack([grid.within(one, here)[:, 0] for one in members])
    loss = weights @ parts + grid.widening[:, column]
    regions = [grid.regions[one] for one in members]
    sounds = [one.sound_loss for one in regions]
    station = BIN * (grid.first + column)
    resistance, ratio = _resistance(grid, column, members, weights)
    covered = min(float(grid.seen[:, column].sum()), float(grid.union[column]))
    return LogBin(
        station=round(station, 6),
        length=float(grid.union[column]),
        covered=covered,
        heat_loss=interval_of(loss),
        sound_loss=_mean([None if one is None else one.median for one in sounds], weights),
        resistance=resistance,
        resistance_ratio=ratio,
        probability_damaged=_mean(
            [probability_in(one, station, station + BIN) for one in regions], weights
        ),
        regions=tuple(one.region_id for one in regions),
    )


def _mean(values: Sequence[float | None], weights: FloatArray) -> float | None:
    """Return a weighted mean; None where any is unknown."""
    known = [value for value in values if value is not None]
    return float(weights @ known) if known and len(known) == len(values) else None


def _resistance(
    grid: _Grid, column: int, members: Sequence[int], weights: FloatArray
) -> tuple[Interval | None, float | None]:
    """Return the resistance in a bin and its ratio to the specified; by conductances."""
    total, specified = 0.0, 0.0
    for one, weight in zip(members, weights, strict=True):
        profile, region = grid.profile(one), grid.regions[one]
        if profile.conductance is None:
            return None, None
        here = profile.conductance[:, column - profile.first + grid.first]
        total = total + weight * here * _widened(grid, column, one)
        given = region.specified_resistance
        specified += np.nan if given is None else weight * given.median
    found = interval_of(np.asarray(total))
    with np.errstate(divide="ignore"):
        low, median, high = (
            float(np.divide(1.0, max(value, 0.0)))
            for value in (found.high, found.median, found.low)
        )
    ratio = median / specified
    return Interval(median, low, high), float(ratio) if np.isfinite(ratio) else None


def _widened(grid: _Grid, column: int, member: int) -> FloatArray:
    """Return the factor that disagreement puts on a conductance: as on the loss."""
    widening = grid.widening[:, column]
    if not widening.any():
        return np.ones_like(widening)
    here = grid.within(member, slice(column, column + 1))[:, 0]
    return np.maximum(1 + widening / np.median(here), 0.0)


def _not_seen(grid: _Grid) -> tuple[tuple[float, float], ...]:
    """Return the metres between first and last that no frame shows, from and to."""
    hidden = (grid.seen.sum(axis=0) == 0) & ~_all_component(grid)
    edges = np.flatnonzero(np.diff(np.concatenate([[False], hidden, [False]]).astype(int)))
    return tuple(
        (round(BIN * (grid.first + int(begin)), 6), round(BIN * (grid.first + int(end)), 6))
        for begin, end in edges.reshape(-1, 2)
    )


def _all_component(grid: _Grid) -> BoolArray:
    """Return the bins within a region that hold no lagged pipe: a flange, a valve."""
    found = np.zeros(grid.union.size, dtype=bool)
    for row in range(len(grid.regions)):
        profile = grid.profile(row)
        here = slice(profile.first - grid.first, profile.first - grid.first + profile.metres.size)
        found[here] |= profile.metres <= 0
    return np.asarray(found & (grid.union <= 0))


def _stretches(grid: _Grid) -> tuple[LogStretch, ...]:
    def weights(low: float, high: float) -> FloatArray:
        first = max(int(low / BIN + 1e-9) - grid.first, 0)
        here = grid.weight[:, first : max(int(np.ceil(high / BIN - 1e-9)) - grid.first, first + 1)]
        total = here.sum()
        return np.asarray(here.sum(axis=1) / total if total > 0 else here.sum(axis=1))

    return log_stretches(grid.regions, weights, STATION_U)


def _counted(grid: _Grid) -> dict[str, dict[str, FloatArray]]:
    """Return what each region adds to the totals: its share of every metre it is drawn on."""
    counted = {}
    for row, region in enumerate(grid.regions):
        profile = grid.profile(row)
        here = slice(profile.first - grid.first, profile.first - grid.first + profile.metres.size)
        metres = grid.weight[row, here] * grid.union[here]
        scale = region.draws["length"] / max(float(profile.metres.sum()), 1e-12)
        # of a metre partly seen the rest is taken at the region's mean, as in its own total
        seen = profile.seen / np.where(profile.metres > 0, profile.metres, 1.0)
        mean = region.draws["heat_loss"][:, None]
        loss = mean + seen * (profile.loss - mean)
        length = scale * float(metres.sum())
        total = scale * (loss @ metres)
        # what disagreement adds is the line's: carried once, by whoever weighs most there
        most = np.argmax(grid.weight[:, here], axis=0) == row
        total = total + grid.widening[:, here] @ np.where(most, grid.union[here], 0.0)
        draws = {"length": length, "total_loss": total}
        if "total_excess" in region.draws:
            draws["total_excess"] = draws["total_loss"] - length * region.draws["sound_loss"]
        counted[region.region_id] = draws
    return counted


def _is_told(grid: _Grid, overlap: LogOverlap) -> bool:
    """Return whether its numbers may be printed: those of images that bear one."""
    levels = {one.region_id: one.verdict.level for one in grid.regions}
    return all(levels[one] != "not quantified" for one in overlap.regions)


def _overlap_remark(tag: str, overlap: LogOverlap) -> Remark:
    order = np.argsort([one.median for one in overlap.heat_losses])
    low, high = int(order[0]), int(order[-1])
    key = "remark.line_frames_agree" if overlap.agree else "remark.line_frames_disagree"
    return Remark(
        key,
        (
            ("tag", tag),
            ("start_m", overlap.start),
            ("end_m", overlap.end),
            ("first", overlap.regions[low]),
            ("first_W_per_m", abs(overlap.heat_losses[low].median)),
            ("second", overlap.regions[high]),
            ("second_W_per_m", abs(overlap.heat_losses[high].median)),
            ("u_apart", overlap.standard_uncertainties_apart),
        ),
    )
