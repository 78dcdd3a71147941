"""Stretches: runs of stations that stand out from their own region.

Found by contrast along the strip, which errors shared by the whole region do not touch. Edges
stand at half height between sound level and the run's plateau: a blurred or spread step keeps
its half height where the step is. (A defect shorter than the spread reads too long and too
shallow; deconvolution is a later step.)
"""

import math
from dataclasses import dataclass

import numpy as np
from scipy import stats

from cladwatt.inverse.null import NullModel, moving_mean
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Run", "find_runs", "local_probability", "sound_stations"]

PRIOR_LOCAL = 0.25
"""Prior probability of local damage somewhere in a region; assumption."""
CANDIDATE_SIGMA = 2.5
LARGEST_CONTRAST = 25.0
"""Damage shows with 0 to this many standard uncertainties, all equally likely; assumption."""
NULL_FREEDOM = 8.0
"""Degrees of freedom of the Student distribution of the null: its own size is uncertain."""


@dataclass(frozen=True)
class Run:
    """A run of stations ``first`` to ``last`` (inclusive) that stands out."""

    first: int
    last: int
    contrast: float
    """Mean above the sound level, towards the fluid. [K]"""
    sigmas: float
    first_u: float
    """Standard uncertainty of the start. [stations]"""
    last_u: float
    probability: float
    """That it is local damage, by contrast alone."""

    @property
    def stations(self) -> slice:
        """The run as a slice."""
        return slice(self.first, self.last + 1)


def find_runs(
    profile: FloatArray,
    null: NullModel,
    *,
    sign: int,
    diameter_stations: float,
    level_from: FloatArray | None = None,
) -> tuple[Run, ...]:
    """Find the runs that stand out from the sound level.

    Parameters
    ----------
    profile : (n_stations,) array
        Lens temperature, mean over the bands of angle; NaN in gaps. [K]
    null : NullModel
    sign : {1, -1}
        1 where damage is warmer than sound (hot lines), -1 for chilled ones.
    diameter_stations : float
        Stations per diameter of the pipe.
    level_from : (n_stations,) array, optional
        The profile where its sound level may be taken, NaN elsewhere.

    Returns
    -------
    tuple of Run
        In order along the strip.
    """
    excess = sign * profile
    usable = np.isfinite(excess)
    if usable.sum() < 8:
        return ()
    carries = usable if level_from is None else usable & np.isfinite(level_from)
    level = _sound_level(excess[carries], null, diameter_stations)
    excess = excess - level
    marked = _candidates(excess, null, diameter_stations)
    fine = moving_mean(excess, 3)
    runs = [
        run for span in _spans(marked & usable) for run in _runs_within(fine, excess, *span, null)
    ]
    return _merged(runs, excess, null, diameter_stations)


def _sound_level(excess: FloatArray, null: NullModel, diameter_stations: float) -> float:
    """Return the level of the coldest plateau: start at the 20th percentile, then refine."""
    smooth = moving_mean(excess, max(3, round(diameter_stations / 4)))
    sigma = null.run_sigma(max(3, diameter_stations / 4))
    level = float(np.percentile(smooth, 20))
    for _ in range(20):
        near = smooth[np.abs(smooth - level) < 2.5 * sigma]
        moved = float(near.mean()) if near.size else level
        if abs(moved - level) < 1e-3 * sigma:
            break
        level = moved
    return level


def _candidates(excess: FloatArray, null: NullModel, diameter_stations: float) -> BoolArray:
    """Mark stations that stand out at any of three scales."""
    marked = np.zeros(excess.size, dtype=bool)
    for scale in {3, max(3, round(diameter_stations / 2)), max(3, round(2 * diameter_stations))}:
        if scale > excess.size:
            continue
        smooth = moving_mean(excess, scale)
        marked |= smooth > CANDIDATE_SIGMA * null.run_sigma(scale)
    return marked


def _spans(marked: BoolArray) -> list[tuple[int, int]]:
    """Return first and last index of each run of True."""
    edges = np.flatnonzero(np.diff(np.concatenate([[0], marked.astype(int), [0]])))
    return [(int(first), int(end) - 1) for first, end in zip(edges[::2], edges[1::2], strict=True)]


def _runs_within(
    fine: FloatArray, excess: FloatArray, first: int, last: int, null: NullModel
) -> list[Run]:
    """Return the strongest run of a candidate, and those that stand apart from it.

    A wide scale marks two runs and the sound lagging between them as one. Beside the strongest
    one only what is likely damage by itself counts, and only beyond a valley: not its tail.
    """
    strongest = _run(fine, excess, *_narrowed(fine, first, last, null), null)
    if strongest is None:
        return []
    runs = [strongest]
    high = fine > CANDIDATE_SIGMA * null.run_sigma(3)
    high[strongest.stations] = False
    high[:first] = high[last + 1 :] = False
    for start, end in _spans(high):
        before = end < strongest.first
        valley = fine[end + 1 : strongest.first] if before else fine[strongest.last + 1 : start]
        if not np.any(valley < 0.5 * np.max(fine[start : end + 1])):
            continue
        run = _run(fine, excess, start, end, null)
        if run is not None and run.probability > 0.5:
            runs.append(run)
    return runs


def _narrowed(fine: FloatArray, first: int, last: int, null: NullModel) -> tuple[int, int]:
    """Cut a span that a wide scale marked round a short, strong run down to that run.

    Left as it is where the rest of the span stands out by itself: a peak within damage.
    """
    inside = fine[first : last + 1]
    high = np.flatnonzero(inside > np.nanmax(inside) / 4)
    if high.size == 0:
        return first, last
    rest = np.concatenate([inside[: high[0]], inside[high[-1] + 1 :]])
    if rest.size and np.mean(rest > CANDIDATE_SIGMA * null.run_sigma(3)) > 0.25:
        return first, last
    return first + int(high[0]), first + int(high[-1])


def _run(
    fine: FloatArray, excess: FloatArray, first: int, last: int, null: NullModel
) -> Run | None:
    """Set a candidate's edges at half height and weigh it."""
    plateau = float(np.nanpercentile(fine[first : last + 1], 85))
    if not plateau > 0:
        return None
    top = first + int(np.nanargmax(fine[first : last + 1]))
    above = fine >= plateau / 2
    start = end = top
    while start > 0 and (above[start - 1] or _bridges(above, start - 1, first, last)):
        start -= 1
    while end < fine.size - 1 and (above[end + 1] or _bridges(above, end + 1, first, last)):
        end += 1
    contrast = float(np.nanmean(excess[start : end + 1]))
    number = end - start + 1
    sigmas = contrast / null.run_sigma(number)
    return Run(
        first=start,
        last=end,
        contrast=contrast,
        sigmas=sigmas,
        first_u=_edge_u(fine, start, -1, plateau, null),
        last_u=_edge_u(fine, end, 1, plateau, null),
        probability=local_probability(sigmas, tries=max(1.0, fine.size / number)),
    )


def _bridges(above: BoolArray, index: int, first: int, last: int) -> bool:
    """Whether a dip below half height still lies inside the candidate with more to come."""
    if not first <= index <= last:
        return False
    reach = max(3, (last - first) // 10)
    low, high = max(first, index - reach), min(last, index + reach)
    return bool(above[low : index + 1].any() and above[index : high + 1].any())


def _edge_u(fine: FloatArray, edge: int, direction: int, plateau: float, null: NullModel) -> float:
    """Return the standard uncertainty of an edge. [stations]

    Noise moves the crossing by its size over the slope; how the step was spread is not known,
    so a third of the way from a quarter to three quarters of the height is added, and the
    station itself.
    """
    quarter, three_quarters = edge, edge
    while 0 < quarter < fine.size - 1 and fine[quarter] > plateau / 4:
        quarter += direction
    while 0 < three_quarters < fine.size - 1 and fine[three_quarters] < 0.75 * plateau:
        three_quarters -= direction
    spread = max(abs(quarter - three_quarters), 1)
    slope = 0.5 * plateau / spread
    noise = null.station_sigma / math.sqrt(3) / slope if slope > 0 else spread
    return math.sqrt(min(noise, 3 * spread) ** 2 + (spread / 3) ** 2 + 0.5**2)


def _merged(
    runs: list[Run], excess: FloatArray, null: NullModel, diameter_stations: float
) -> tuple[Run, ...]:
    """Join runs that overlap, or that lie closer than a quarter diameter without going back."""
    merged: list[Run] = []
    for run in sorted(runs, key=lambda run: run.first):
        if merged and run.first <= merged[-1].last + max(2, diameter_stations / 4):
            before = merged.pop()
            last = run if run.last > before.last else before
            first, end = before.first, last.last
            contrast = float(np.nanmean(excess[first : end + 1]))
            sigmas = contrast / null.run_sigma(end - first + 1)
            tries = max(1.0, excess.size / (end - first + 1))
            probability = max(
                before.probability, run.probability, local_probability(sigmas, tries=tries)
            )
            run = Run(first, end, contrast, sigmas, before.first_u, last.last_u, probability)
        merged.append(run)
    return tuple(merged)


def local_probability(sigmas: float, *, tries: float) -> float:
    """Return the probability that a contrast is damage rather than the scatter of a sound pipe.

    Parameters
    ----------
    sigmas : float
        Contrast over the null's standard uncertainty for a run of this length.
    tries : float
        How many runs of this length the strip holds: places where chance could have found one.

    Returns
    -------
    float
        Posterior of the two hypotheses, the null Student distributed, damage with any contrast
        from 0 to `LARGEST_CONTRAST` equally likely, prior `PRIOR_LOCAL`.
    """
    # far beyond the last contrast looked for, more of it is no further evidence
    sigmas = min(sigmas, 0.8 * LARGEST_CONTRAST)
    sound = float(stats.t.pdf(sigmas, NULL_FREEDOM))
    cdf = stats.t.cdf(np.array([sigmas, sigmas - LARGEST_CONTRAST]), NULL_FREEDOM)
    damaged = float(max(cdf[0] - cdf[1], 1e-12)) / LARGEST_CONTRAST
    odds = PRIOR_LOCAL / (1 - PRIOR_LOCAL) * damaged / sound / tries
    return odds / (1 + odds) if math.isfinite(odds) else 1.0


def sound_stations(profile: FloatArray, runs: tuple[Run, ...], *, clear_of: float) -> BoolArray:
    """Return the stations that carry the sound level, well away from every run.

    Parameters
    ----------
    profile : (n_stations,) array
        NaN in gaps.
    runs : tuple of Run
    clear_of : float
        Stations to keep clear of a run on either side.

    Returns
    -------
    (n_stations,) array of bool
        Without the margin where that would leave fewer than five; all usable ones where the
        runs leave fewer than five anyway.
    """
    usable = np.isfinite(profile)
    for margin in (round(clear_of), 0):
        kept = usable.copy()
        for run in runs:
            kept[max(0, run.first - margin) : run.last + margin + 1] = False
        if kept.sum() >= 5:
            return np.asarray(kept)
    return np.asarray(usable)
