"""The log of a line: overlaps in step, every metre once, agreement said."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.line_log import STATION_U, log_lines
from cladwatt.inverse.line_profile import BIN
from cladwatt.inverse.result import (
    Interval,
    LineProfile,
    RegionResult,
    StationTable,
    Stretch,
    Verdict,
    interval_of,
)
from cladwatt.quantities import Remark

BOOK = DrawBook(seed=3, count=4000)
SHARED = BOOK.normal("camera", "calibration")
NOTHING = np.zeros(0)
STATIONS = StationTable(*([NOTHING] * 17), flags=np.zeros(0, dtype=np.int64))
SOUND, SHARED_U, OWN_U = 50.0, 5.0, 2.0


def region(
    name, first, metres, *, level=60.0, own=OWN_U, shared=SHARED_U, frame=None, seen=None,
    placed=True, stretches=(), verdict="quantified", tag="HS-1", profile_of=None,
):  # fmt: skip
    """A region of `metres` bins from bin `first`, alike all along unless `profile_of` says else."""
    noise = own * BOOK.normal(f"region:{name}", "own")
    profile = np.full(metres, level) if profile_of is None else np.asarray(profile_of, float)
    loss = profile + (shared * SHARED + noise)[:, None]
    length = np.full(BOOK.count, BIN * metres)
    mean = loss.mean(axis=1)
    sound = np.full(BOOK.count, SOUND)
    pipe = np.full(metres, BIN)
    draws = {
        "heat_loss": mean, "total_loss": mean * length, "length": length, "sound_loss": sound,
        "excess": mean - sound, "total_excess": (mean - sound) * length,
    }  # fmt: skip
    place = LineProfile(
        first, BIN * first, BIN * (first + metres), loss, loss / 100.0, pipe,
        pipe if seen is None else np.asarray(seen, float) * BIN,
    )  # fmt: skip
    one = Interval(1.0, 1.0, 1.0)
    return RegionResult(
        region_id=name, frame_id=frame or f"f_{name}", tag=tag, area="Hall", gain=False,
        length=interval_of(length), start_station=BIN * first,
        end_station=BIN * (first + metres), recorded_temperature=300.0, surface_temperature=one,
        heat_flux=one, heat_loss=interval_of(mean), total_loss=interval_of(draws["total_loss"]),
        sound_loss=interval_of(sound), specified_loss=None, excess=interval_of(draws["excess"]),
        resistance=None, specified_resistance=Interval(2.0, 1.8, 2.2), resistance_ratio=None,
        effective_conductivity=None, probability_damaged=0.1, probability_local=0.0,
        probability_aged=0.1, verdict=Verdict(verdict, Remark("quantified.narrow")),
        stretches=tuple(stretches), stations=STATIONS, draws=draws,
        profile=place if placed else None,
    )  # fmt: skip


def stretch(name, start, end, probability=0.9, watts=20.0):
    def near(value):
        return Interval(value, value - 0.05, value + 0.05)

    return Stretch(
        id=name, start=near(start), end=near(end), probability=probability,
        heat_loss=Interval(90.0, 80.0, 100.0), excess=Interval(watts, watts - 5, watts + 5),
        share_of_excess=1.0, outline=(),
    )  # fmt: skip


def logged(*regions):
    return log_lines(regions, BOOK.normal)


def summed(found, quantity="total_loss"):
    return np.sum([draws[quantity] for draws in found.counted.values()], axis=0)


def test_frames_side_by_side_add_up_to_what_they_are():
    first, second = region("A", 0, 20), region("B", 30, 10)
    found = logged(first, second)
    together = first.draws["total_loss"] + second.draws["total_loss"]
    assert summed(found) == pytest.approx(together, rel=1e-12)
    excess = first.draws["total_excess"] + second.draws["total_excess"]
    assert summed(found, "total_excess") == pytest.approx(excess, rel=1e-9, abs=1e-9)
    log = found.logs[0]
    assert log.covered_length == pytest.approx(3.0)
    assert log.not_seen == ((pytest.approx(2.0), pytest.approx(3.0)),)
    assert log.overlaps == ()
    assert not any(2.0 - 1e-9 < one.station < 3.0 - 1e-9 for one in log.bins)


def test_metres_seen_twice_count_once():
    found = logged(region("A", 0, 20), region("B", 10, 20))
    assert np.median(summed(found, "length")) == pytest.approx(3.0)
    assert np.median(summed(found)) == pytest.approx(3.0 * 60, rel=0.02)
    assert [one.station for one in found.logs[0].bins] == pytest.approx(BIN * np.arange(30))


def test_what_frames_share_stays_in_the_sum():
    # closed form: per metre u² = shared² + own²/2 with equal weights, shared errors in step
    found = logged(region("A", 0, 20), region("B", 0, 20))
    expected = 2.0 * np.hypot(SHARED_U, OWN_U / np.sqrt(2))
    assert np.std(summed(found)) == pytest.approx(expected, rel=0.03)
    apart = logged(region("A", 0, 20), region("B", 20, 20))
    in_step = np.hypot(4.0 * SHARED_U, 2.0 * OWN_U * np.sqrt(2))
    assert np.std(summed(apart)) == pytest.approx(in_step, rel=0.03)
    independent = 2.0 * np.sqrt(2) * np.hypot(SHARED_U, OWN_U)
    assert np.std(summed(apart)) > 1.2 * independent


def test_weights_go_by_what_is_each_frames_own():
    # inverse variances 1/1 and 1/9, whatever they share
    sure, unsure = region("A", 0, 20, own=1.0, shared=2.0), region("B", 0, 20, own=3.0, shared=2.0)
    overlap = logged(sure, unsure).logs[0].overlaps[0]
    assert overlap.weights == pytest.approx((0.9, 0.1), abs=0.02)


def test_frames_that_agree_say_so():
    log = logged(region("A", 0, 20), region("B", 10, 20, level=61.0)).logs[0]
    overlap = log.overlaps[0]
    assert overlap.agree
    assert (overlap.start, overlap.end) == (pytest.approx(1.0), pytest.approx(2.0))
    assert [remark.key for remark in log.remarks] == ["remark.line_frames_agree"]


def test_shared_errors_cancel_in_the_comparison():
    # 12 W/m apart: within the 5 + 5 W/m they share, far outside the 2 W/m of their own
    one, other = region("A", 0, 20, level=60.0), region("B", 0, 20, level=72.0)
    overlap = logged(one, other).logs[0].overlaps[0]
    assert not overlap.agree
    assert overlap.standard_uncertainties_apart == pytest.approx(12 / (np.sqrt(2) * OWN_U), rel=0.1)
    independent = 12 / np.hypot(np.std(one.draws["heat_loss"]), np.std(other.draws["heat_loss"]))
    assert independent < 1.96


def test_disagreement_widens_until_both_are_held():
    found = logged(
        region("A", 0, 20, level=60.0, shared=0), region("B", 0, 20, level=80.0, shared=0)
    )
    overlap = found.logs[0].overlaps[0]
    assert overlap.heat_loss.low < 61.0
    assert overlap.heat_loss.high > 79.0
    remark = found.logs[0].remarks[0]
    said = dict(remark.parameters)
    assert remark.key == "remark.line_frames_disagree"
    assert said["first_W_per_m"] == pytest.approx(60.0, rel=0.02)
    assert said["second_W_per_m"] == pytest.approx(80.0, rel=0.02)
    # and so are the totals
    assert np.std(summed(found)) == pytest.approx(
        2.0 * (overlap.heat_loss.high - overlap.heat_loss.low) / 3.92, rel=0.05
    )


def test_frames_in_other_weather_are_compared_by_what_sound_lagging_would_lose():
    calm = region("A", 0, 20, level=60.0)
    windy = region("B", 0, 20, level=72.0)
    windy = replace(windy, draws={**windy.draws, "sound_loss": 1.2 * windy.draws["sound_loss"]})
    assert logged(calm, windy).logs[0].overlaps[0].agree


def test_a_step_may_be_misplaced_by_its_station():
    step = [60.0] * 10 + [120.0] * 10
    moved = [60.0] * 11 + [120.0] * 9
    assert pytest.approx(0.1) == STATION_U
    found = logged(region("A", 0, 20, profile_of=step), region("B", 0, 20, profile_of=moved))
    assert found.logs[0].overlaps[0].agree


def test_order_does_not_matter():
    one, two, three = region("C", 0, 12), region("A", 10, 12), region("B", 20, 12)
    found, turned = logged(one, two, three), logged(three, one, two)
    assert found.logs == turned.logs
    assert found.logs[0].regions == ("C", "A", "B")
    assert summed(found) == pytest.approx(summed(turned), rel=1e-12)


def test_frames_that_only_touch_are_not_compared():
    one, two = region("A", 0, 10), region("B", 9, 10)
    assert one.profile is not None
    half = np.full(10, BIN)
    half[-1] = BIN / 2
    rest = np.full(10, BIN)
    rest[0] = BIN / 2
    one = replace(one, profile=replace(one.profile, high=0.95, metres=half, seen=half))
    two = replace(two, profile=replace(two.profile, low=0.95, metres=rest, seen=rest))
    log = logged(one, two).logs[0]
    assert log.overlaps == ()
    assert sum(part.length for part in log.bins) == pytest.approx(1.9)


def test_what_one_frame_hides_another_shows():
    hidden = [1] * 10 + [0] * 5 + [1] * 5
    log = logged(region("A", 0, 20, seen=hidden), region("B", 8, 8)).logs[0]
    assert log.not_seen == ()
    shown = {round(part.station, 3): part.regions for part in log.bins}
    assert shown[1.2] == ("B",)
    assert shown[0.9] == ("A", "B")
    alone = logged(region("A", 0, 20, seen=hidden)).logs[0]
    assert alone.not_seen == ((pytest.approx(1.0), pytest.approx(1.5)),)


def test_metres_under_a_flange_are_no_gap():
    one = region("A", 0, 20)
    assert one.profile is not None
    pipe = one.profile.metres.copy()
    pipe[8:11] = 0.0
    log = logged(replace(one, profile=replace(one.profile, metres=pipe, seen=pipe))).logs[0]
    assert log.not_seen == ()
    assert sum(part.length for part in log.bins) == pytest.approx(1.7)


def test_a_frame_that_is_not_quantified_gives_way():
    poor = region("B", 0, 20, level=200.0, own=90.0, verdict="not quantified")
    log = logged(region("A", 0, 20), poor).logs[0]
    assert log.overlaps == ()
    assert {part.regions for part in log.bins} == {("A",)}
    assert np.median(summed(logged(region("A", 0, 20), poor))) == pytest.approx(120.0, rel=0.02)


def test_numbers_that_may_not_be_printed_are_in_no_remark():
    unsure = [region(name, 0, 20, own=90.0, verdict="not quantified") for name in "AB"]
    log = logged(*unsure).logs[0]
    assert len(log.overlaps) == 1
    assert log.remarks == ()


def test_stations_by_default_are_no_place():
    one, two = region("A", 0, 20, placed=False), region("B", 0, 20, placed=False)
    found = logged(one, two)
    assert (found.logs, found.counted) == ((), {})
    assert found.remarks == (
        Remark("remark.line_perhaps_twice", (("lines", "HS-1 (A, B)"),)),
    )  # fmt: skip
    same_frame = logged(replace(one, frame_id="f"), replace(two, frame_id="f"))
    assert same_frame.remarks == ()
    assert logged(one, replace(two, tag="HS-2")).remarks == ()


def test_one_damage_in_two_frames_is_one_stretch():
    found = logged(
        region("A", 0, 20, stretches=[stretch("A:1", 1.3, 1.6)]),
        region("B", 10, 20, stretches=[stretch("B:1", 1.4, 1.7), stretch("B:2", 2.4, 2.5)]),
    )
    both, other = found.logs[0].stretches
    assert (both.id, both.members) == ("A:1", ("A:1", "B:1"))
    assert both.probability == pytest.approx(0.9)
    assert both.excess.median == pytest.approx(20.0)
    assert (other.id, other.members, other.regions) == ("B:2", ("B:2",), ("B",))


def test_a_damage_that_the_other_frame_does_not_see_is_less_likely():
    found = logged(region("A", 0, 20, stretches=[stretch("A:1", 1.3, 1.6)]), region("B", 10, 20))
    (only,) = found.logs[0].stretches
    assert only.probability == pytest.approx(0.45, abs=0.03)
    assert only.regions == ("A", "B")


def test_two_stretches_of_one_frame_stay_two():
    pair = [stretch("A:1", 1.0, 1.2), stretch("A:2", 1.3, 1.4)]
    assert len(logged(region("A", 0, 20, stretches=pair)).logs[0].stretches) == 2
