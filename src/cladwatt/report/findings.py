"""Which regions are put in front of the reader, and in what order."""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.quantities import Remark
from cladwatt.report.numbers import as_gain
from cladwatt.results.assessment import Assessment, Interval, LeftOut, RegionResult, interval_of

__all__ = [
    "Finding",
    "all_left_out",
    "component_sums",
    "is_finding",
    "ranked_findings",
    "seen_again",
    "signed",
    "where_damaged",
]

LIKELY = 0.5
"""A region is a finding where damage is at least as likely as not."""


@dataclass(frozen=True)
class Finding:
    """A region in front of the reader; numbers are None where they are not quantified.

    A chilled line's loss, sound loss and excess are gains, counted positive.
    """

    region: RegionResult
    loss: Interval | None
    """[W/m]"""
    sound: Interval | None
    """[W/m]"""
    excess: Interval | None
    """Above sound, over the drawn length. [W]"""
    probability: float | None
    """That the region is damaged anywhere."""

    @property
    def quantified(self) -> bool:
        """Whether the verdict lets numbers be printed."""
        return self.region.verdict.level != "not quantified"


def signed(region: RegionResult, interval: Interval | None) -> Interval | None:
    """Return a loss as it is printed: positive, as loss or as gain."""
    if interval is None:
        return None
    return as_gain(interval) if region.gain else interval


def _likelihood(region: RegionResult) -> float | None:
    parts = [stretch.probability for stretch in region.stretches]
    if region.probability_damaged is not None and math.isfinite(region.probability_damaged):
        parts.append(region.probability_damaged)
    return max(parts, default=None)


def is_finding(region: RegionResult) -> bool:
    """Return whether damage somewhere in the region is at least as likely as not.

    A pipe under three pixels wide carries no evidence either way.
    """
    if region.verdict.reason.key == "not_quantified.too_narrow":
        return False
    probability = _likelihood(region)
    return probability is not None and probability >= LIKELY


def whole_excess(region: RegionResult) -> Interval | None:
    """Return found minus sound over the drawn length, in W; from the draws if kept."""
    if region.excess is None:
        return None
    drawn = region.draws.get("total_excess")
    if drawn is not None and np.isfinite(drawn).any():
        return interval_of(drawn)
    metres, excess = region.length.median, region.excess
    return Interval(excess.median * metres, excess.low * metres, excess.high * metres)


def finding_of(region: RegionResult) -> Finding:
    """Return a region as it is put in front of the reader."""
    printed = region.verdict.level != "not quantified"
    return Finding(
        region,
        loss=signed(region, region.heat_loss) if printed else None,
        sound=signed(region, region.sound_loss) if printed else None,
        excess=signed(region, whole_excess(region)) if printed else None,
        probability=_likelihood(region),
    )


def _rank(finding: Finding) -> tuple[bool, float, float]:
    excess = finding.excess
    known = excess is not None and math.isfinite(excess.median)
    return (
        not known,
        -excess.median if excess is not None and known else 0.0,
        -(finding.probability or 0.0),
    )


def ranked_findings(assessment: Assessment) -> tuple[Finding, ...]:
    """Return the findings, largest expected excess first.

    Damage that several frames of a line show is one finding (`seen_again`). Those whose excess is
    not known or not quantified follow, by probability; equals keep the order of the survey.
    """
    again = seen_again(assessment)
    found = [
        finding_of(region)
        for region in assessment.regions
        if is_finding(region) and region.region_id not in again
    ]
    return tuple(sorted(found, key=_rank))


def seen_again(assessment: Assessment) -> frozenset[str]:
    """Return the regions that find nothing but damage another frame of their line shows better.

    By the log of the line: each of their likely stretches is one with a stretch of a region that
    stands before them in it, and they are not aged throughout.
    """
    elsewhere: dict[str, str] = {}
    for log in assessment.logs:
        for stretch in log.stretches:
            first, *others = stretch.members
            if stretch.probability >= LIKELY:
                elsewhere |= dict.fromkeys(others, first)
    found = set()
    for region in assessment.regions:
        likely = [one.id for one in region.stretches if one.probability >= LIKELY]
        aged = (region.probability_aged or 0.0) >= LIKELY
        if likely and not aged and all(one in elsewhere for one in likely):
            found.add(region.region_id)
    return frozenset(found)


def where_damaged(region: RegionResult) -> tuple[tuple[float, float], ...]:
    """Return the likely damaged parts in metres; the whole region where no stretch is marked."""
    likely = [s for s in region.stretches if s.probability >= LIKELY]
    if not likely:
        low, high = sorted((region.start_station, region.end_station))
        return ((low, high),)
    return tuple(sorted((s.start.median, s.end.median) for s in likely))


def all_left_out(assessment: Assessment) -> tuple[LeftOut, ...]:
    """Return everything not assessed, of the survey and of its frames, each once."""
    items = [*assessment.left_out]
    for frame in assessment.frames:
        items += frame.left_out
    return tuple(dict.fromkeys(items))


def unique_remarks(*groups: tuple[Remark, ...]) -> tuple[Remark, ...]:
    """Return the remarks of all groups, each once, in order."""
    return tuple(dict.fromkeys(remark for group in groups for remark in group))


def component_sums(assessment: Assessment) -> list[tuple[str, int, Interval]]:
    """Return ``loss`` and ``gain``, each with its number of components and their sum in W.

    A way that no component goes is left out; losses and gains are never netted.
    """
    medians = [one.heat_loss.median for one in assessment.components if one.heat_loss is not None]
    ways = (
        ("loss", sum(median >= 0 for median in medians), assessment.component_loss),
        ("gain", sum(median < 0 for median in medians), assessment.component_gain),
    )
    return [(way, count, value) for way, count, value in ways if value is not None]
