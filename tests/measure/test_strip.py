"""The strip against exact geometry."""

import math

import numpy as np
import pytest

from cladwatt.errors import RegionError
from cladwatt.measure.strip import known_length_factor, sample_strip, straighten
from cladwatt.quantities import Quantity
from cladwatt.survey.region import Region

DIAMETER = 0.2


def pipe(centreline, widths, **rest) -> Region:
    return Region("r", "f", "pipe", "A", centreline=tuple(centreline), widths=widths, **rest)


def strip_of(region: Region, **rest):
    return straighten(region, **{"lagged_diameter": DIAMETER, "columns": 320} | rest)


@pytest.mark.parametrize("slope_deg", [0, 17, 45, 90, 200])
def test_length_is_pixels_times_diameter_over_width(slope_deg):
    direction = np.array([math.cos(math.radians(slope_deg)), math.sin(math.radians(slope_deg))])
    region = pipe([(160, 120), tuple((160, 120) + 100 * direction)], (40.0,))
    strip = strip_of(region, field_of_view_deg=40.0)
    # the near surface, half a diameter closer than the axis, is what was drawn along
    focal = 160 / math.tan(math.radians(20))
    assert strip.length.sum() == pytest.approx(100 * DIAMETER / 40 * (1 - 40 / (2 * focal)))
    assert strip.station[0] == pytest.approx(0.5 * strip.length[0])


def test_stations_start_and_run_as_declared():
    strip = strip_of(pipe([(10, 50), (110, 50)], (40.0,), start=12.0, direction=-1))
    assert strip.station[0] < 12.0
    assert np.all(np.diff(strip.station) < 0)
    assert 12.0 - strip.station[-1] == pytest.approx(0.5, rel=0.05)


def test_view_angle_follows_from_the_position_across():
    strip = strip_of(pipe([(10, 100), (200, 100)], (80.0,)))
    assert strip.across == pytest.approx(np.sin(strip.view_angle))
    assert np.degrees(strip.view_angle.max()) == pytest.approx(50.0)
    # a sample row lies where its angle says
    assert strip.sample_y[-1, 50] - 100 == pytest.approx(40 * math.sin(math.radians(50)))


def test_narrow_pipe_keeps_clear_of_its_edges():
    strip = strip_of(pipe([(10, 100), (200, 100)], (8.0,)))
    assert strip.across.max() * 4 <= 4 - 1.5 + 1e-9


def test_samples_of_a_linear_image_are_exact():
    rows, columns = np.mgrid[:240, :320]
    image = 2.0 * columns + 3.0 * rows
    strip = strip_of(pipe([(30.3, 40.7), (250.1, 180.9)], (30.0, 44.0)))
    assert sample_strip(image, strip) == pytest.approx(2 * strip.sample_x + 3 * strip.sample_y)


def test_masked_pixels_are_never_interpolated():
    image = np.full((240, 320), 300.0)
    image[100, 150] = np.nan
    strip = strip_of(pipe([(100, 100), (200, 100)], (40.0,)))
    sampled = sample_strip(image, strip)
    near = np.hypot(strip.sample_x - 150, strip.sample_y - 100) < 1
    near &= (abs(strip.sample_x - 150) < 1) & (abs(strip.sample_y - 100) < 1)
    assert np.isnan(sampled[near]).all()
    assert np.isfinite(sampled[np.hypot(strip.sample_x - 150, strip.sample_y - 100) > 2]).all()


def test_outside_the_frame_is_nan():
    strip = strip_of(pipe([(300, 100), (340, 100)], (20.0,)))
    sampled = sample_strip(np.zeros((240, 320)), strip)
    assert np.isnan(sampled[:, strip.x > 320]).all()


def pinhole(view_deg: float, start, end, columns=320):
    """Ends and widths of a pipe between two points in space, seen by a pinhole camera."""
    focal = columns / 2 / math.tan(math.radians(view_deg) / 2)
    # drawn along the near surface, half a diameter closer than the axis
    near = [(x, y, z - DIAMETER / 2) for x, y, z in (start, end)]
    ends = [(160 + focal * x / z, 120 + focal * y / z) for x, y, z in near]
    widths = tuple(focal * DIAMETER / z for _, _, z in (start, end))
    return pipe(ends, widths)


@pytest.mark.parametrize("depth", [0.0, 0.5, 1.0])
def test_foreshortening_is_undone_with_the_field_of_view(depth):
    start, end = np.array([-1.0, 0.2, 4.0]), np.array([1.0, 0.2, 4.0 + depth])
    strip = strip_of(pinhole(30.0, start, end), field_of_view_deg=30.0)
    truth = float(np.linalg.norm(end - start))
    # widths between the vertices are taken as linear along the strip; the rest is second order
    assert strip.length.sum() == pytest.approx(truth, rel=0.02)


def test_without_the_field_of_view_foreshortening_is_missed_and_said():
    start, end = np.array([-0.6, 0.2, 3.0]), np.array([0.6, 0.2, 4.5])
    strip = strip_of(pinhole(40.0, start, end))
    assert math.degrees(strip.receding_angle) == pytest.approx(51, abs=8)  # atan(1.5 / 1.2)
    assert strip.length.sum() < 0.95 * np.linalg.norm(end - start)


def test_known_length_sets_the_scale():
    region = pipe([(10, 100), (210, 100)], (40.0,))
    strip = strip_of(region)
    marked = Region(
        "k", "f", "known_length", "A", centreline=((50, 100), (150, 100)), value=Quantity(0.75)
    )
    factor = known_length_factor(strip, marked)
    assert strip_of(region, known_length=factor).length.sum() == pytest.approx(1.5, rel=0.02)


def test_known_length_elsewhere_says_nothing():
    strip = strip_of(pipe([(10, 100), (210, 100)], (40.0,)))
    marked = Region(
        "k", "f", "known_length", "A", centreline=((50, 200), (150, 200)), value=Quantity(1.0)
    )
    assert known_length_factor(strip, marked) is None


def test_no_diameter_no_metres():
    strip = strip_of(pipe([(10, 100), (210, 100)], (40.0,)), lagged_diameter=None)
    assert np.isnan(strip.length).all()


def test_bend_keeps_its_arc_length_and_turns_smoothly():
    strip = strip_of(pipe([(20, 40), (120, 40), (120, 140)], (20.0,)))
    assert strip.length.sum() / strip.nearer == pytest.approx(200 * DIAMETER / 20)
    edge_step = np.hypot(np.diff(strip.sample_x[0]), np.diff(strip.sample_y[0]))
    assert edge_step.max() < 3.0


def test_too_short_is_refused():
    with pytest.raises(RegionError, match=r"centreline is 2\.0 px long; expected at least 3 px"):
        strip_of(pipe([(10, 10), (12, 10)], (20.0,)))


def test_scale_uncertainty_grows_for_thin_pipes():
    thin = strip_of(pipe([(10, 100), (210, 100)], (10.0,))).scale_uncertainty
    wide = strip_of(pipe([(10, 100), (210, 100)], (80.0,))).scale_uncertainty
    assert thin > 2 * wide > 0


def test_absurd_known_length_is_not_believed():
    strip = strip_of(pipe([(10, 100), (210, 100)], (40.0,)))
    marked = Region(
        "k", "f", "known_length", "A", centreline=((50, 100), (150, 100)), value=Quantity(70.0)
    )
    assert known_length_factor(strip, marked) is None
