"""The bench's count of sums, on sums whose coverage is known beforehand."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from tests.calibration.totals import TotalCase, total_cases, totals_table

from cladwatt.assess import assess
from cladwatt.results.assessment import Settings
from cladwatt.survey.survey_file import read_survey

SAMPLE = Path(__file__).parent.parent / "sample_data"
RAMP = ("f18_ramp_wind_up", "f19_ramp_wind_down")


def cases(shared, own, regions=4, surveys=400):
    """Sums of regions with a shared and an own error, their 95 % intervals made to hold."""
    random = np.random.default_rng(2)
    width = 1.96 * np.hypot(regions * shared, np.sqrt(regions) * own)
    alone = np.sqrt(regions) * 2 * 1.96 * np.hypot(shared, own)
    errors = regions * shared * random.standard_normal(surveys) + np.sqrt(
        regions
    ) * own * random.standard_normal(surveys)
    return [
        TotalCase(seed, "loss", 100.0, 100.0 + e, 100.0 + e - width, 100.0 + e + width, alone)
        for seed, e in enumerate(errors)
    ]


def percent(cell):
    return float(cell.split(" ")[0])


def test_intervals_that_hold_are_counted_as_such():
    ((_, number, held, width, _, independent),) = totals_table(cases(5.0, 1.0)).rows
    assert number == "400"
    assert percent(held) == pytest.approx(95, abs=3)
    assert percent(width) == pytest.approx(2 * 1.96 * np.hypot(20, 2), rel=0.1)
    # half as wide as they need to be: 1.96 / 2 standard deviations hold 67 %
    assert percent(independent) == pytest.approx(67, abs=6)


def test_without_shared_errors_both_ways_are_one():
    ((_, _, held, _, _, independent),) = totals_table(cases(0.0, 3.0)).rows
    assert held.split(" ")[0] == independent.split(" ")[0]


def test_truth_counts_metres_seen_twice_once():
    survey = read_survey(SAMPLE)
    survey = replace(
        survey,
        frames=tuple(one for one in survey.frames if one.id in RAMP),
        regions=tuple(one for one in survey.regions if one.frame_id in RAMP),
    )
    found = assess(survey, settings=Settings(seed=1, draws=100))
    per_metre = 40.0
    truth = {one.region_id: per_metre * one.length.median for one in found.regions}
    line, plant = total_cases(7, found, truth)
    assert (line.what, plant.what) == ("lines", "loss")
    drawn = max(one.length.median for one in found.regions)
    assert line.truth == pytest.approx(per_metre * drawn, rel=0.03)
    assert plant.truth == line.truth
