"""From cases to every number of the tables, with bands by resampling frames."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

import numpy as np
from tests.calibration.cases import Columns
from tests.calibration.counting import (
    binomial_band,
    coverage,
    deciles,
    percentile_band,
    relative_errors,
    relative_widths,
    resamples,
    rms_log_error,
    roc_area,
    wrong_signs,
)
from tests.calibration.measures import ESTIMATORS, GROUPS, LEAST_CASES, MEASURES, Estimator

__all__ = ["Counted", "Decile", "EstimatorLine", "Summary", "summarise"]

RESAMPLES = 400
LEAST_IN_DECILE = 30
WITHIN = 0.05
"""A decile is reliable within this or within its binomial band."""


@dataclass(frozen=True)
class Counted:
    """One measure of one group."""

    value: float
    low: float
    high: float
    """95 % band."""
    number: int
    """Of the cases it rests on."""
    group_size: int

    @property
    def judged(self) -> bool:
        """Whether the group is large enough to be held against an aim."""
        return self.group_size >= LEAST_CASES and not np.isnan(self.value)


@dataclass(frozen=True)
class Decile:
    """Reliability of one tenth of the probability."""

    start: float
    end: float
    number: int
    predicted: float
    observed: float
    low: float
    high: float
    """Binomial band about what was predicted."""

    @property
    def judged(self) -> bool:
        """Whether it holds enough cases."""
        return self.number >= LEAST_IN_DECILE

    @property
    def reliable(self) -> bool:
        """Whether what was so agrees with what was said."""
        near = abs(self.observed - self.predicted) <= WITHIN
        return near or self.low <= self.observed <= self.high


@dataclass(frozen=True)
class EstimatorLine:
    """What one way of estimating reaches over all regions it was run on."""

    words: str
    regions: int
    error: float
    error_damaged: float
    rms_log: float
    wrong_signs: int
    no_number: int
    coverage: float
    width: float
    false_alarms: float
    missed: float
    roc_local: float


@dataclass(frozen=True)
class Summary:
    """Every number of the tables."""

    regions: int
    frames: int
    seeds: int
    counted: Mapping[tuple[str, str], Counted]
    """By (group, measure)."""
    deciles: tuple[Decile, ...]
    deciles_by_group: Mapping[str, tuple[Decile, ...]]
    estimators: tuple[EstimatorLine, ...]

    def of(self, group: str, measure: str) -> Counted | None:
        """Return a number, or None where the group is empty."""
        return self.counted.get((group, measure))


def summarise(cases: Columns, *, seed: int = 1, samples: int = RESAMPLES) -> Summary:
    """Count everything.

    Parameters
    ----------
    cases : Columns
    seed : int
        Of the resampling.
    samples : int
        Bootstrap samples; each draws as many frames as there are, with replacement.
    """
    masks = {name: test(cases) for name, (_, test) in GROUPS.items()}
    masks = {name: mask for name, mask in masks.items() if mask.any()}
    keys = [(group, measure) for group in masks for measure in MEASURES]
    bands = np.full((samples, len(keys)), np.nan)
    random = np.random.default_rng(seed)
    for row, index in enumerate(resamples(cases["frame"], samples, random)):
        chosen = {name: cases.take(index[mask[index]]) for name, mask in masks.items()}
        for column, (group, measure) in enumerate(keys):
            if chosen[group].count:
                bands[row, column] = MEASURES[measure].value(chosen[group])
    counted = {}
    for column, (group, measure) in enumerate(keys):
        inside = cases.take(masks[group])
        low, high = percentile_band(bands[:, column])
        counted[group, measure] = Counted(
            MEASURES[measure].value(inside),
            low,
            high,
            MEASURES[measure].number(inside),
            inside.count,
        )
    return Summary(
        regions=cases.count,
        frames=int(np.unique(cases["frame"]).size),
        seeds=int(np.unique(cases["seed"]).size),
        counted=counted,
        deciles=tuple(_deciles(cases)),
        deciles_by_group={name: tuple(_deciles(cases.take(mask))) for name, mask in masks.items()},
        estimators=tuple(_estimator_lines(cases)),
    )


def _estimator_lines(cases: Columns) -> Iterable[EstimatorLine]:
    for each in ESTIMATORS.values():
        given = ~np.isnan(cases[each.loss])
        if not given.any():
            continue
        own = cases
        if each.some_seeds:
            own = cases.take(np.isin(cases["seed"], cases["seed"][given]))
        if own.count < cases.count:
            first = next(iter(ESTIMATORS.values()))
            line = _estimator_line(own, first)
            yield replace(line, words=f"{first.words}, the surveys of the next line")
        yield _estimator_line(own, each)


def _deciles(cases: Columns) -> Iterable[Decile]:
    for start, end, number, predicted, observed in deciles(cases["probability"], cases["damaged"]):
        yield Decile(
            start, end, number, predicted, observed, *binomial_band(number, predicted)
        )  # fmt: skip


def _estimator_line(cases: Columns, each: Estimator) -> EstimatorLine:
    loss, truth = cases[each.loss], cases["true_loss"]
    given = ~np.isnan(loss)
    errors = np.where(given, relative_errors(loss, truth), np.inf)
    score = each.score(cases)
    sound, matters = ~cases["damaged"], cases["matters"]
    decides = not np.isnan(score).any() and bool(matters.any() and sound.any())
    nan = float("nan")
    covered = width = nan
    if each.interval is not None:
        low, high = (cases[name] for name in each.interval)
        covered = coverage(low[given], high[given], truth[given])
        width = float(np.median(relative_widths(low, high, loss)[given]))
    damaged = errors[cases["damaged"]]
    return EstimatorLine(
        words=each.words,
        regions=cases.count,
        error=float(np.median(errors)),
        error_damaged=float(np.median(damaged)) if damaged.size else nan,
        rms_log=rms_log_error(loss[given], truth[given]),
        wrong_signs=int(wrong_signs(loss[given], truth[given]).sum()),
        no_number=int((~given).sum()),
        coverage=covered,
        width=width,
        false_alarms=float(np.mean(score[sound] > each.decision)) if decides else nan,
        missed=float(np.mean(score[matters] <= each.decision)) if decides else nan,
        roc_local=roc_area(score[matters], score[sound]) if decides else nan,
    )
