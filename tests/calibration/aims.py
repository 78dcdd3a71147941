"""What is aimed at, line by line, and whether it was reached."""

from dataclasses import dataclass

from tests.calibration.measures import GROUPS, LEAST_CASES, MEASURES
from tests.calibration.summary import LEAST_IN_DECILE, Counted, Summary
from tests.calibration.wording import shown

__all__ = ["AIMS", "Aim", "Judged", "judged"]


@dataclass(frozen=True)
class Aim:
    """A limit for one measure of one group, or for every group large enough."""

    measure: str
    group: str
    low: float = float("-inf")
    high: float = float("inf")
    by_band: bool = False
    """Met where the resampled band overlaps the range, not only by the value itself."""

    def met(self, counted: Counted) -> bool:
        """Whether a number is within the limits."""
        if self.by_band:
            return counted.low <= self.high and counted.high >= self.low
        return self.low <= counted.value <= self.high


EVERY_GROUP = "every group"

AIMS: tuple[Aim, ...] = (
    Aim("coverage_95", "all", 0.93, 0.97, by_band=True),
    Aim("coverage_95", "quantified", 0.93, 0.97, by_band=True),
    Aim("coverage_95", EVERY_GROUP, low=0.88),
    Aim("coverage_50", "all", 0.45, 0.55, by_band=True),
    Aim("coverage_50", "quantified", 0.45, 0.55, by_band=True),
    Aim("width", "all", high=0.40),
    Aim("width", "quantified", high=0.28),
    Aim("error", "all", high=0.065),
    Aim("error", "quantified", high=0.05),
    Aim("error", "damaged", high=0.08),
    Aim("error_to_specified", "all", high=0.6),
    Aim("error_to_specified", "damaged", high=0.4),
    Aim("rms_log", "all", high=0.2),
    Aim("rms_log", "quantified", high=0.1),
    Aim("wrong_signs", "quantified", high=0),
    Aim("missed", "all", high=0.08),
    Aim("missed", "quantified", high=0.03),
    Aim("roc_local", "all", low=0.97),
    Aim("roc_local", "quantified", low=0.99),
    Aim("roc_aged", "all", low=0.78),
    Aim("roc_aged", "painted", low=0.88),
    Aim("false_alarms", "all", high=0.08),
    Aim("false_alarms", "quantified", high=0.03),
    Aim("false_alarms", "painted", high=0.03),
    Aim("brier", "all", high=0.11),
    Aim("brier", "quantified", high=0.06),
    Aim("sure_right", "all", low=0.93),
    Aim("quantified", "all", low=0.40),
    Aim("quantified", "painted indoors", low=0.70),
    Aim("wrong_not_quantified", "all", low=0.90),
    Aim("wrong_by_much", "quantified", high=0.01),
    Aim("long_overlap", "all", low=0.8),
    Aim("short_offset", "all", high=1.0),
    Aim("kind_over_prior", "all", high=0.9),
    Aim("kind_over_thresholds", "all", high=0.9),
    Aim("kind_too_sure", "all", -0.05, 0.05, by_band=True),
)


@dataclass(frozen=True)
class Judged:
    """One aim beside what was reached."""

    words: str
    aim: str
    reached: str
    number: int
    met: bool | None
    """None where there are too few cases to judge."""


def judged(summary: Summary) -> list[Judged]:
    """Return every aim beside what was reached, in their order."""
    lines = [line for aim in AIMS for line in _judged(summary, aim)]
    lines.append(_deciles(summary))
    return lines


def _limits(aim: Aim) -> str:
    show = MEASURES[aim.measure].shown
    if aim.low > float("-inf") and aim.high < float("inf"):
        return f"{shown(aim.low, show)} to {shown(aim.high, show)}"
    if aim.high < float("inf"):
        return "none" if aim.high == 0 else f"at most {shown(aim.high, show)}"
    return f"at least {shown(aim.low, show)}"


def _judged(summary: Summary, aim: Aim) -> list[Judged]:
    measure = MEASURES[aim.measure]
    if aim.group == EVERY_GROUP:
        return [_every_group(summary, aim)]
    counted = summary.of(aim.group, aim.measure)
    words = f"{measure.words}, {GROUPS[aim.group][0]}"
    if counted is None:
        return [Judged(words, _limits(aim), "no such region", 0, None)]
    met = aim.met(counted) if counted.judged else None
    reached = shown(counted.value, measure.shown, counted.low, counted.high)
    limits = {shown(limit, measure.shown) for limit in (aim.low, aim.high)}
    if met is False and shown(counted.value, measure.shown) in limits:
        # missed by less than a digit: show the digits that tell them apart
        reached = shown(counted.value, measure.shown, counted.low, counted.high, more_digits=2)
    return [Judged(words, _limits(aim), reached, counted.number, met)]


def _every_group(summary: Summary, aim: Aim) -> Judged:
    measure = MEASURES[aim.measure]
    words = f"{measure.words}, lowest of the groups of {LEAST_CASES} or more"
    found = {
        group: counted
        for group in GROUPS
        if (counted := summary.of(group, aim.measure)) is not None and counted.judged
    }
    if not found:
        return Judged(words, _limits(aim), "no group is large enough", 0, None)
    worst = min(found, key=lambda group: found[group].value)
    counted = found[worst]
    reached = shown(counted.value, measure.shown, counted.low, counted.high)
    met = all(aim.met(each) for each in found.values())
    return Judged(words, _limits(aim), f"{reached}: {GROUPS[worst][0]}", counted.number, met)


def _deciles(summary: Summary) -> Judged:
    large = [tenth for tenth in summary.deciles if tenth.judged]
    reliable = sum(tenth.reliable for tenth in large)
    return Judged(
        f"tenths of P with {LEAST_IN_DECILE} regions or more that are reliable",
        "all of them",
        f"{reliable} of {len(large)}",
        sum(tenth.number for tenth in large),
        reliable == len(large) if large else None,
    )
