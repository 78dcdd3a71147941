"""What the report prints of the logs of lines, ready made."""

from collections.abc import Mapping
from dataclasses import dataclass

from cladwatt.report.line_picture import line_svg
from cladwatt.report.numbers import format_interval, format_number, format_probability
from cladwatt.report.wording import sentence, text
from cladwatt.results.assessment import Assessment, LineLog, LogStretch, RegionResult

__all__ = ["LogView", "log_views"]

LIKELY = 0.5


@dataclass(frozen=True)
class LogView:
    """One line's log."""

    log: LineLog
    svg: str
    summary: str
    remarks: tuple[str, ...]
    stretches: tuple[str, ...]


def log_views(assessment: Assessment, language: str) -> list[LogView]:
    """Return the logs of the lines of which several frames have a declared station.

    A line of one frame says no more as a log than as its region; it stands in ``line_log.csv``.
    """
    regions = {region.region_id: region for region in assessment.regions}
    return [_view(log, regions, language)
            for log in assessment.logs if len(log.regions) > 1 and log.bins]  # fmt: skip


def _view(log: LineLog, regions: Mapping[str, RegionResult], language: str) -> LogView:
    gaps = "; ".join(
        text("line_log.from_to", language, start=format_number(low, 1), end=format_number(high, 1))
        for low, high in log.not_seen
    )
    covered = format_number(log.covered_length, 1)
    summary = text("line_log.covered", language, covered=covered)
    if gaps:
        summary += " " + text("line_log.gaps", language, gaps=gaps)
    return LogView(
        log=log,
        svg=line_svg(log, regions, language),
        summary=summary,
        remarks=tuple(sentence(remark, language) for remark in log.remarks),
        stretches=tuple(
            _stretch(one, language) for one in log.stretches if one.probability >= LIKELY
        ),
    )


def _stretch(one: LogStretch, language: str) -> str:
    return text(
        "line_log.stretch" if len(one.members) == 1 else "line_log.stretch_again",
        language,
        id=one.id,
        start=format_interval(one.start, "", most=2),
        end=format_interval(one.end, "", most=2),
        probability=format_probability(one.probability),
        members=", ".join(one.members),
    )
