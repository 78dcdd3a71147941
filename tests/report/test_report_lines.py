"""Lines seen in several frames, as the report shows them; no number in it was computed."""

from dataclasses import replace

import pytest

from cladwatt.quantities import Remark
from cladwatt.report.findings import ranked_findings, seen_again
from cladwatt.report.html_report import report_html
from cladwatt.report.line_picture import line_svg
from cladwatt.report.line_views import log_views
from cladwatt.results.assessment import Interval, LineLog, LogBin, LogOverlap, LogStretch


def bins(first, count, regions, level=120.0):
    return tuple(
        LogBin(
            round(0.1 * (first + i), 6), 0.1, 0.1, Interval(level, level - 20, level + 30), 100.0,
            Interval(0.7, 0.6, 0.9), 0.8, 0.9, regions,
        )
        for i in range(count)
    )  # fmt: skip


@pytest.fixture
def twice(invented):
    """Two regions of one line made to show the same damage, with a gap before a third."""
    assessment = invented.assessment()
    one = next(r for r in assessment.regions if r.stretches and not r.gain and r.heat_loss)
    again = replace(
        one, region_id=f"{one.region_id}-again", probability_aged=0.0,
        stretches=(replace(one.stretches[0], id=f"{one.region_id}-again:1", probability=0.9),),
    )  # fmt: skip
    one = replace(one, stretches=(replace(one.stretches[0], probability=0.95),))
    stretch = one.stretches[0]
    log = LineLog(
        tag=one.tag, area=one.area, gain=False, regions=(one.region_id, again.region_id),
        bins=bins(0, 30, (one.region_id, again.region_id)) + bins(60, 20, (again.region_id,)),
        overlaps=(
            LogOverlap(0.0, 3.0, (one.region_id, again.region_id),
                       (Interval(120, 100, 140), Interval(180, 160, 200)), (0.5, 0.5),
                       Interval(150, 95, 205), 4.2, agree=False),
        ),
        stretches=(
            LogStretch(stretch.id, (stretch.id, again.stretches[0].id),
                       (one.region_id, again.region_id), stretch.start, stretch.end, 0.92,
                       stretch.excess),
        ),
        not_seen=((3.0, 6.0),), covered_length=5.0,
        remarks=(Remark("remark.line_frames_disagree", (
            ("tag", one.tag), ("start_m", 0.0), ("end_m", 3.0), ("first", "A"),
            ("first_W_per_m", 120.0), ("second", "B"), ("second_W_per_m", 180.0),
            ("u_apart", 4.2),
        )),),
    )  # fmt: skip
    frame = replace(assessment.frames[0], regions=(one, again))
    return replace(assessment, frames=(frame,), logs=(log,))


def test_one_damage_is_one_finding(twice):
    one, again = twice.regions
    assert seen_again(twice) == {again.region_id}
    assert [finding.region.region_id for finding in ranked_findings(twice)] == [one.region_id]
    assert len(ranked_findings(replace(twice, logs=()))) == 2


def test_a_region_that_has_aged_as_well_stays_a_finding(twice):
    one, again = twice.regions
    frame = replace(twice.frames[0], regions=(one, replace(again, probability_aged=0.8)))
    assert seen_again(replace(twice, frames=(frame,))) == frozenset()


def test_disagreement_is_said_with_both_numbers(twice):
    (view,) = log_views(twice, "en")
    assert "120 W/m" in view.remarks[0]
    assert "180 W/m" in view.remarks[0]
    assert "do not agree" in view.remarks[0]
    assert "do not agree" in view.svg
    page = report_html(twice)
    assert "one damage, found as" in page
    assert "3.0 to 6.0 m" in page


def test_long_gaps_are_breaks_with_nothing_drawn_in_them(twice):
    regions = {one.region_id: one for one in twice.regions}
    svg = line_svg(twice.logs[0], regions)
    assert "3.0 m not seen" in svg
    assert line_svg(twice.logs[0], regions) == svg


def test_what_no_frame_quantifies_shows_no_number(twice):
    unknown = {
        one.region_id: replace(one, verdict=replace(one.verdict, level="not quantified"))
        for one in twice.regions
    }
    svg = line_svg(twice.logs[0], unknown)
    assert ">quantified</text>" in svg
    assert "at most" not in svg


def test_a_line_of_one_frame_needs_no_log_in_the_report(twice):
    log = replace(twice.logs[0], regions=twice.logs[0].regions[:1])
    assert log_views(replace(twice, logs=(log,)), "en") == []
