"""Totals of lines and of the plant against the truth: do shared errors stay in their intervals?"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from tests.calibration.counting import coverage, percentile_band, relative_widths, resamples
from tests.calibration.tables import Table
from tests.calibration.wording import shown

from cladwatt.results.assessment import Assessment, Interval, RegionResult

__all__ = ["TotalCase", "total_cases", "totals_table"]

RESAMPLES = 400
WORDS = {
    "line": "lines of one region",
    "lines": "lines of several regions",
    "loss": "the plant's loss",
    "gain": "the plant's gain, chilled lines",
}


@dataclass(frozen=True)
class TotalCase:
    """One sum of one survey. [W]"""

    seed: int
    what: str
    """A key of `WORDS`."""
    truth: float
    found: float
    low: float
    high: float
    independent: float
    """Full width of the interval, had the regions nothing in common."""


def total_cases(
    seed: int, assessment: Assessment, true_totals: Mapping[str, float]
) -> tuple[TotalCase, ...]:
    """Return the sums of a survey with their truth.

    Parameters
    ----------
    seed : int
    assessment : Assessment
    true_totals : mapping of str to float
        Loss over the drawn length by region. [W]
    """
    regions = [one for one in assessment.regions
               if one.total_loss is not None and one.region_id in true_totals]  # fmt: skip
    counted = {one.region_id: true_totals[one.region_id] - twice
               for one in regions
               for twice in [_counted_elsewhere(assessment, one, true_totals)]}  # fmt: skip
    cases = []
    for line in assessment.lines:
        own = [one for one in regions if one.region_id in line.regions]
        if len(own) == len(line.regions):
            what = "line" if len(own) == 1 else "lines"
            cases.append(_case(seed, what, own, counted, line.total_loss))
    hot = [one for one in regions if not one.gain]
    chilled = [one for one in regions if one.gain]
    if assessment.total_loss is not None:
        cases.append(_case(seed, "loss", hot, counted, assessment.total_loss))
    if assessment.total_gain is not None:
        gains = {name: -loss for name, loss in counted.items()}
        cases.append(_case(seed, "gain", chilled, gains, assessment.total_gain))
    return tuple(cases)


def _counted_elsewhere(
    assessment: Assessment, region: RegionResult, true_totals: Mapping[str, float]
) -> float:
    """Return what of a region's true loss its line's log counts in other frames."""
    length = abs(region.end_station - region.start_station)
    return sum(
        (1 - overlap.weights[overlap.regions.index(region.region_id)])
        * true_totals[region.region_id]
        * min((overlap.end - overlap.start) / length, 1.0)
        for log in assessment.logs
        for overlap in log.overlaps
        if region.region_id in overlap.regions
    )


def _case(
    seed: int, what: str, regions: Sequence[RegionResult], truth: Mapping[str, float],
    found: Interval,
) -> TotalCase:  # fmt: skip
    widths = [one.total_loss.high - one.total_loss.low for one in regions if one.total_loss]
    return TotalCase(
        seed, what, sum(truth[one.region_id] for one in regions), found.median, found.low,
        found.high, float(np.hypot.reduce(widths)) if widths else 0.0,
    )  # fmt: skip


def totals_table(cases: Sequence[TotalCase]) -> Table:
    """Return how often the 95 % intervals of sums hold the truth, with bands by survey."""
    rows = []
    for what, words in WORDS.items():
        own = [one for one in cases if one.what == what]
        if not own:
            continue
        columns: dict[str, Any] = {
            name: np.array([getattr(one, name) for one in own])
            for name in ("seed", "truth", "found", "low", "high", "independent")
        }
        truth, found, low, high = (columns[name] for name in ("truth", "found", "low", "high"))
        band = percentile_band(
            np.array([coverage(low[i], high[i], truth[i])
                      for i in resamples(columns["seed"], RESAMPLES, np.random.default_rng(1))])
        )  # fmt: skip
        if_independent = columns["independent"] / 2
        held = coverage(found - if_independent, found + if_independent, truth)
        rows.append([
            words, str(len(own)), shown(coverage(low, high, truth), "percent", *band),
            shown(float(np.median(relative_widths(low, high, found))), "percent"),
            shown(float(np.median(np.abs(found - truth) / np.abs(truth))), "percent"),
            shown(held, "percent"),
        ])  # fmt: skip
    return Table(
        "Sums",
        ["sum", "number", "95 % interval holds the truth", "median full width", "median error",
         "were errors independent"],
        rows,
        "Bands by resampling surveys. Last: how often an interval as wide as if no region shared "
        "an error with another would hold the truth.",
    )  # fmt: skip
