"""Frames of one line through the whole path: the sample's ramp, seen twice at one place."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from cladwatt.assess import assess
from cladwatt.report.line_views import log_views
from cladwatt.results.assessment import Settings
from cladwatt.results.store import read_results, write_results
from cladwatt.survey.survey_file import read_survey

SAMPLE = Path(__file__).parent.parent / "sample_data"
SETTINGS = Settings(seed=5, draws=300)
RAMP = ("f18_ramp_wind_up", "f19_ramp_wind_down")


def survey_of(frames=RAMP, change=lambda region: region):
    survey = read_survey(SAMPLE)
    regions = tuple(change(one) for one in survey.regions if one.frame_id in frames)
    entries = tuple(one for one in survey.frames if one.id in frames)
    return replace(survey, frames=entries, regions=regions)


@pytest.fixture(scope="module")
def ramp():
    return assess(survey_of(), settings=SETTINGS)


def test_the_same_place_seen_twice_counts_once(ramp):
    first, second = (one.total_loss.median for one in ramp.regions)
    (line,) = ramp.lines
    assert max(first, second) * 0.9 < line.total_loss.median < 0.6 * (first + second)
    assert ramp.total_loss == line.total_loss
    assert line.length.median == pytest.approx(
        max(one.length.median for one in ramp.regions), rel=0.02
    )


def test_overlap_and_agreement_are_said(ramp):
    (log,) = ramp.logs
    (overlap,) = log.overlaps
    assert set(overlap.regions) == {"R29", "R30"}
    assert overlap.agree
    assert sum(overlap.weights) == pytest.approx(1)
    assert [remark.key for remark in log.remarks] == ["remark.line_frames_agree"]
    assert not any(remark.key == "remark.line_perhaps_twice" for remark in ramp.remarks)


def test_bins_carry_what_the_regions_do(ramp):
    (log,) = ramp.logs
    one = ramp.regions[0]
    middle = np.median([part.heat_loss.median for part in log.bins])
    assert middle == pytest.approx(one.heat_loss.median, rel=0.1)
    resistance = np.median([part.resistance.median for part in log.bins])
    assert resistance == pytest.approx(one.resistance.median, rel=0.1)
    ratio = np.median([part.resistance_ratio for part in log.bins])
    assert ratio == pytest.approx(one.resistance_ratio.median, rel=0.1)
    assert all(part.covered <= part.length + 1e-9 for part in log.bins)


def test_the_log_does_not_depend_on_workers(ramp):
    again = assess(survey_of(), settings=SETTINGS, workers=2)
    assert again.logs == ramp.logs
    assert again.lines == ramp.lines
    assert again.total_loss == ramp.total_loss


def test_a_region_drawn_from_the_other_end_lies_on_the_same_metres(ramp):
    (length,) = [one.stations.length.sum() for one in ramp.regions if one.region_id == "R30"]

    def turned(region):
        if region.id != "R30":
            return region
        return replace(
            region, start=12.0 + length, direction=-1, centreline=region.centreline[::-1],
            widths=region.widths[::-1],
        )  # fmt: skip

    found = assess(survey_of(change=turned), settings=SETTINGS)
    (log,), (before,) = found.logs, ramp.logs
    ends = [(part.station, part.regions) for part in log.bins]
    assert ends == [(part.station, part.regions) for part in before.bins]
    assert [part.heat_loss.median for part in log.bins] == pytest.approx(
        [part.heat_loss.median for part in before.bins], rel=0.02
    )


def test_without_stations_both_count_and_that_is_asked():
    found = assess(survey_of(change=lambda region: replace(region, start=None)), settings=SETTINGS)
    assert found.logs == ()
    both = sum(one.total_loss.median for one in found.regions)
    assert found.total_loss.median == pytest.approx(both, rel=0.02)
    (asked,) = [one for one in found.remarks if one.key == "remark.line_perhaps_twice"]
    assert dict(asked.parameters)["lines"] == "CR-345 (R29, R30)"


def test_the_log_is_written_and_read_back(ramp, tmp_path):
    folder = write_results(ramp, tmp_path / "results")
    assert read_results(folder).logs == ramp.logs
    rows = (folder / "line_log.csv").read_text().splitlines()
    assert rows[0].startswith("tag,area,gain,station_m,length_m,covered_m,heat_loss_W_per_m,")
    assert len(rows) == 1 + len(ramp.logs[0].bins)
    assert rows[1].endswith(",R29|R30")


def test_gaps_stay_blank_in_the_picture():
    def far(region):
        return replace(region, start=20.0) if region.id == "R30" else region

    found = assess(survey_of(change=far), settings=SETTINGS)
    (log,) = found.logs
    ((low, high),) = log.not_seen
    assert (low, high) == (pytest.approx(13.5), pytest.approx(20.0))
    assert not [part for part in log.bins if low <= part.station < high - 1e-9]
    (view,) = log_views(found, "en")
    assert "6.5 m not seen" in view.svg
    assert "13.5 to 20.0 m" in view.summary
