"""Foil, tape, contact and background: what they narrow, and where they cannot work."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.references import (
    read_references,
    with_emissivity,
    with_frame_references,
)
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera, Window

FOIL_BOX = (200.0, 4.0, 230.0, 18.0)
TAPE_BOX = (120.0, 40.0, 136.0, 56.0)
SURFACE = 330.0


def vague(bench, hall_with, paint, *, emissivity: float = 0.6):
    """A bench whose emissivity and reflected temperature are poorly known, seen through air."""
    return bench.but(
        count=2000,
        line=replace(bench.line, cladding=paint(0.8, 0.1)),
        conditions=hall_with(reflected_temperature=Quantity(296.15, 3.0)),
    ), bench.but(line=replace(bench.line, cladding=paint(emissivity)))


def put(lens: np.ndarray, box: tuple[float, ...], value: float) -> None:
    left, top, right, bottom = (int(side) for side in box)
    lens[top : bottom + 1, left : right + 1] = value


def through_air(bench, radiance: float) -> float:
    band, air = bench.band, bench.conditions.air_temperature.value
    return float(band.temperature(0.98 * radiance + 0.02 * band.radiance(air)))


def foil_value(bench, reflected: float) -> float:
    """What a foil of emissivity 0.07 at air temperature shows at the lens. [K]"""
    band, air = bench.band, bench.conditions.air_temperature.value
    return through_air(bench, 0.07 * band.radiance(air) + 0.93 * band.radiance(reflected))


def tape_value(bench, surface: float, emissivity: float = 0.95) -> float:
    band = bench.band
    reflected = bench.conditions.reflected_temperature.value
    own = emissivity * band.radiance(surface) + (1 - emissivity) * band.radiance(reflected)
    return through_air(bench, own)


def used(readings, bench):
    return with_frame_references(bench.frame_draws(), readings, bench.book)


def test_readings_are_the_median_inside_clear_of_the_rim(bench, drawn_box):
    lens = bench.lens(SURFACE)
    put(lens, FOIL_BOX, 297.0)
    left, top, right, bottom = (int(side) for side in FOIL_BOX)
    lens[top, left : right + 1] = 310.0  # a blurred rim
    lens[bottom, left : right + 1] = 310.0
    lens[10, 210:214] = np.nan  # dead pixels
    (reading,) = read_references(lens, [bench.region, drawn_box("foil", "foil", *FOIL_BOX)])
    assert reading.reading == pytest.approx(297.0)
    assert np.isnan(reading.beside)


def test_a_dead_reference_reads_nothing_and_is_set_aside(bench, drawn_box, keys):
    lens = bench.lens(SURFACE)
    put(lens, FOIL_BOX, np.nan)
    readings = read_references(lens, [drawn_box("foil", "foil", *FOIL_BOX)])
    assert np.isnan(readings[0].reading)
    frame, remarks = used(readings, bench)
    assert keys(remarks) == {"remark.reading_not_used"}
    assert dict(remarks[0].parameters)["id"] == "foil"
    assert np.array_equal(frame.reflected_temperature, bench.frame_draws().reflected_temperature)


def test_only_references_are_read(bench, drawn_box):
    regions = [bench.region, drawn_box("x", "leave_out", *FOIL_BOX)]
    assert read_references(bench.lens(SURFACE), regions) == ()


def test_foil_gives_and_narrows_the_reflected_temperature(bench, hall_with, paint, drawn_box, keys):
    poor, _ = vague(bench, hall_with, paint)
    lens = bench.lens(SURFACE)
    put(lens, FOIL_BOX, foil_value(bench, 301.0))
    foil = drawn_box("foil", "foil", *FOIL_BOX, band_emissivity=Quantity(0.07))
    frame, remarks = used(read_references(lens, [foil]), poor)
    assert keys(remarks) == {"remark.foil_used"}
    # 3 K declared at 296.15 K and 0.5 K by the foil at 301 K, weighed by their variances
    share = 9 / (9 + 0.25)
    reflected = frame.reflected_temperature
    assert np.median(reflected) == pytest.approx(share * 301 + (1 - share) * 296.15, abs=0.03)
    assert reflected.std() == pytest.approx(np.sqrt(9 * 0.25 / 9.25), rel=0.05)
    assert dict(remarks[0].parameters)["temperature_C"] == pytest.approx(
        float(np.median(reflected)) - 273.15
    )


def test_foil_shares_the_cameras_error_with_the_pipe(bench, hall_with, paint, drawn_box):
    poor, _ = vague(bench, hall_with, paint)
    poor = poor.but(camera=Camera(accuracy=AccuracyStatement(2.0, 0.0)))
    lens = bench.lens(SURFACE)
    put(lens, FOIL_BOX, foil_value(bench, 301.0))
    foil = drawn_box("foil", "foil", *FOIL_BOX, band_emissivity=Quantity(0.07))
    frame, _ = used(read_references(lens, [foil]), poor)
    assert np.corrcoef(frame.reflected_temperature, frame.calibration)[0, 1] > 0.7


def test_a_value_read_from_the_foil_is_taken_as_it_is(bench, hall_with, paint, drawn_box):
    poor, _ = vague(bench, hall_with, paint)
    foil = drawn_box("foil", "foil", *FOIL_BOX, value=Quantity(299.0, 0.3))
    frame, _ = used(read_references(bench.lens(SURFACE), [foil]), poor)
    assert np.median(frame.reflected_temperature) == pytest.approx(299.0, abs=0.2)
    assert frame.reflected_temperature.std() < 0.65


def test_tape_gives_and_narrows_the_emissivity(bench, hall_with, paint, drawn_box, keys):
    poor, true = vague(bench, hall_with, paint)
    poor = poor.but(conditions=hall_with())
    lens = true.lens(SURFACE)
    put(lens, TAPE_BOX, tape_value(bench, SURFACE))
    tape = drawn_box("t1", "tape", *TAPE_BOX, tag="HS-1")
    readings = read_references(lens, [bench.region, tape])
    line, remarks = with_emissivity(
        poor.line_draws(), "HS-1", poor.frame_draws(), readings, poor.book
    )
    assert keys(remarks) == {"remark.tape_used"}
    # off normal the coat emits 1 % less than on the axis
    assert np.median(line.band_emissivity) == pytest.approx(0.61, abs=0.02)
    assert line.band_emissivity.std() < 0.04
    assert poor.line_draws().band_emissivity.std() > 0.08


def test_tape_of_known_emissivity_counts_by_it(bench, hall_with, paint, drawn_box):
    poor, true = vague(bench, hall_with, paint)
    poor = poor.but(conditions=hall_with())
    lens = true.lens(SURFACE)
    put(lens, TAPE_BOX, tape_value(bench, SURFACE, 0.88))
    tape = drawn_box("t1", "tape", *TAPE_BOX, tag="HS-1", value=Quantity(0.88))
    readings = read_references(lens, [bench.region, tape])
    line, _ = with_emissivity(poor.line_draws(), "HS-1", poor.frame_draws(), readings, poor.book)
    assert np.median(line.band_emissivity) == pytest.approx(0.61, abs=0.02)


def test_contact_gives_and_narrows_the_emissivity(bench, hall_with, paint, drawn_box, keys):
    poor, true = vague(bench, hall_with, paint)
    poor = poor.but(conditions=hall_with())
    contact = drawn_box("c1", "contact", *TAPE_BOX, tag="HS-1", value=Quantity(SURFACE))
    readings = read_references(true.lens(SURFACE), [bench.region, contact])
    line, remarks = with_emissivity(
        poor.line_draws(), "HS-1", poor.frame_draws(), readings, poor.book
    )
    assert keys(remarks) == {"remark.tape_used"}
    assert np.median(line.band_emissivity) == pytest.approx(0.60, abs=0.02)
    # a probe is no better than 1.5 K of 34 K, about 5 %, even where it claims to be exact
    assert 0.02 < line.band_emissivity.std() < 0.04


@pytest.mark.parametrize("role", ["tape", "contact"])
def test_less_than_ten_kelvin_from_the_reflected_tells_no_emissivity(
    bench, hall_with, paint, drawn_box, keys, role
):
    poor, true = vague(bench, hall_with, paint)
    poor = poor.but(conditions=hall_with())
    surface = 296.15 + 6.0
    lens = true.lens(surface)
    if role == "tape":
        put(lens, TAPE_BOX, tape_value(bench, surface))
    value = Quantity(surface, 0.5) if role == "contact" else None
    region = drawn_box("ref", role, *TAPE_BOX, tag="HS-1", value=value)
    readings = read_references(lens, [bench.region, region])
    before = poor.line_draws()
    line, remarks = with_emissivity(before, "HS-1", poor.frame_draws(), readings, poor.book)
    assert keys(remarks) == {"remark.reading_not_used"}
    said = dict(remarks[0].parameters)
    assert said["id"] == "ref"
    assert "10 K" in said["reason"]
    assert np.array_equal(line.band_emissivity, before.band_emissivity)


def test_a_contact_without_a_reading_says_so_and_not_something_else(bench, drawn_box):
    contact = drawn_box("c1", "contact", *TAPE_BOX, tag="HS-1")
    readings = read_references(bench.lens(SURFACE), [bench.region, contact])
    _, (remark,) = with_emissivity(
        bench.line_draws(), "HS-1", bench.frame_draws(), readings, bench.book
    )
    assert remark.key == "remark.reading_not_used"
    assert "10 K" not in dict(remark.parameters)["reason"]


def test_a_dead_tape_patch_says_so_and_not_something_else(bench, drawn_box):
    lens = bench.lens(SURFACE)
    put(lens, TAPE_BOX, np.nan)
    tape = drawn_box("t1", "tape", *TAPE_BOX, tag="HS-1")
    readings = read_references(lens, [bench.region, tape])
    _, (remark,) = with_emissivity(
        bench.line_draws(), "HS-1", bench.frame_draws(), readings, bench.book
    )
    assert "no usable pixels" in dict(remark.parameters)["reason"]


def test_another_lines_tape_says_nothing(bench, drawn_box):
    tape = drawn_box("t1", "tape", *TAPE_BOX, tag="CW-9")
    readings = read_references(bench.lens(SURFACE), [bench.region, tape])
    before = bench.line_draws()
    line, remarks = with_emissivity(before, "HS-1", bench.frame_draws(), readings, bench.book)
    assert remarks == ()
    assert line is before


def test_a_known_background_narrows_the_cameras_offset(bench, drawn_box):
    rough = bench.but(count=2000, camera=Camera(accuracy=AccuracyStatement(2.0, 0.0)))
    lens = bench.lens(SURFACE)
    put(lens, FOIL_BOX, 293.15 + 1.2)  # the camera reads 1.2 K too high
    wall = drawn_box("wall", "background", *FOIL_BOX, value=Quantity(293.15, 0.2))
    frame, remarks = used(read_references(lens, [wall]), rough)
    assert remarks == ()
    offset = frame.calibration_offset(np.array([320.0]))[:, 0]
    # 2 / sqrt(3) K declared against sqrt(0.2^2 + 0.3^2) K
    declared, found = 4 / 3, 0.13
    share = declared / (declared + found)
    assert offset.mean() == pytest.approx(-1.2 * share, abs=0.02)
    assert offset.std() == pytest.approx(np.sqrt(declared * found / (declared + found)), rel=0.05)


@pytest.mark.parametrize(("off", "used_up"), [(3.5, True), (36.0, False)])
def test_a_background_beyond_the_cameras_accuracy_is_set_aside(bench, drawn_box, off, used_up):
    # 3.5 * sqrt(4 / 3 + 0.13) = 4.2 K is the most that both uncertainties explain
    rough = bench.but(count=2000, camera=Camera(accuracy=AccuracyStatement(2.0, 0.0)))
    lens = bench.lens(SURFACE)
    put(lens, FOIL_BOX, 293.15)
    wall = drawn_box("wall", "background", *FOIL_BOX, value=Quantity(293.15 + off, 0.2))
    before = rough.frame_draws().calibration
    frame, remarks = used(read_references(lens, [wall]), rough)
    assert [r.key for r in remarks] == ([] if used_up else ["remark.reading_not_used"])
    assert np.array_equal(frame.calibration, before) != used_up


def test_a_background_without_a_temperature_is_set_aside(bench, drawn_box, keys):
    wall = drawn_box("wall", "background", *FOIL_BOX)
    _, remarks = used(read_references(bench.lens(SURFACE), [wall]), bench)
    assert keys(remarks) == {"remark.reading_not_used"}


def test_an_exact_camera_has_no_offset_to_narrow(bench, drawn_box, keys):
    wall = drawn_box("wall", "background", *FOIL_BOX, value=Quantity(293.15, 0.2))
    exact = bench.but(camera=Camera(accuracy=AccuracyStatement(0.0, 0.0)))
    frame, remarks = used(read_references(bench.lens(SURFACE), [wall]), exact)
    assert np.all(frame.calibration_offset(np.array([300.0])) == 0)
    assert keys(remarks) == {"remark.reading_not_used"}


def test_references_narrow_the_loss_of_the_region(bench, hall_with, paint, drawn_box):
    poor, true = vague(bench, hall_with, paint)
    lens = true.lens(SURFACE)
    put(lens, TAPE_BOX, tape_value(bench, SURFACE))
    put(lens, FOIL_BOX, foil_value(bench, 296.15))
    foil = drawn_box("foil", "foil", *FOIL_BOX)
    tape = drawn_box("t1", "tape", *TAPE_BOX, tag="HS-1")
    readings = read_references(lens, [bench.region, foil, tape])
    frame, _ = used(readings, poor)
    line, _ = with_emissivity(poor.line_draws(), "HS-1", frame, readings, poor.book)
    left_out = np.zeros(lens.shape, dtype=bool)
    left_out[36:61, 116:141] = True
    before = poor.alone(lens, left_out=left_out).heat_loss
    after = poor.alone(lens, left_out=left_out, frame=frame, line_draws=line).heat_loss
    truth = bench.loss(SURFACE)
    assert after.relative_width < 0.6 * before.relative_width
    assert after.low < truth < after.high
    assert abs(after.median - truth) < 0.5 * abs(before.median - truth)


def test_a_contact_reading_far_from_the_declared_emissivity_is_set_aside(bench, drawn_box, keys):
    """300 K too hot: a slip of the pen, which would make every loss of the line absurd."""
    contact = drawn_box("c1", "contact", *TAPE_BOX, tag="HS-1", value=Quantity(SURFACE + 300, 1.5))
    readings = read_references(bench.lens(SURFACE), [bench.region, contact])
    before = bench.line_draws()
    line, remarks = with_emissivity(before, "HS-1", bench.frame_draws(), readings, bench.book)
    assert keys(remarks) == {"remark.reading_not_used"}
    assert np.array_equal(line.band_emissivity, before.band_emissivity)


def test_a_foil_far_from_the_declared_reflected_temperature_is_set_aside(
    bench, hall_with, drawn_box, keys
):
    vague_hall = bench.but(conditions=hall_with(reflected_temperature=Quantity(296.15, 2.0)))
    lens = bench.lens(SURFACE)
    put(lens, FOIL_BOX, foil_value(bench, 320.0))  # drawn on a pipe, say
    foil = drawn_box("foil", "foil", *FOIL_BOX)
    frame, remarks = used(read_references(lens, [foil]), vague_hall)
    assert keys(remarks) == {"remark.reading_not_used"}
    assert np.median(frame.reflected_temperature) == pytest.approx(296.15, abs=0.1)


def test_what_a_reference_leaves_unsaid_comes_from_the_defaults_given(bench, drawn_box):
    defaults = {
        "foil_emissivity": Quantity(0.12, 0.01),
        "tape_emissivity": Quantity(0.90, 0.02),
        "u_contact_reading": Quantity(2.5),
    }
    regions = [
        bench.region,
        drawn_box("foil", "foil", *FOIL_BOX),
        drawn_box("tape", "tape", *TAPE_BOX, tag="HS-1"),
        drawn_box("contact", "contact", *TAPE_BOX, tag="HS-1", value=Quantity(330.0)),
    ]
    foil, tape, contact = read_references(bench.lens(SURFACE), regions, defaults)
    assert foil.region.band_emissivity == Quantity(0.12, 0.01)
    assert tape.region.value == Quantity(0.90, 0.02)
    assert (contact.region.value.value, contact.region.value.u) == (330.0, 2.5)


def test_what_a_reference_says_stands(bench, drawn_box):
    regions = [
        drawn_box("foil", "foil", *FOIL_BOX, band_emissivity=Quantity(0.05)),
        drawn_box("tape", "tape", *TAPE_BOX, tag="HS-1", value=Quantity(0.88)),
        drawn_box("contact", "contact", *TAPE_BOX, tag="HS-1", value=Quantity(330.0, 0.4)),
    ]
    foil, tape, contact = read_references(bench.lens(SURFACE), regions)
    assert foil.region.band_emissivity == Quantity(0.05)
    assert tape.region.value == Quantity(0.88)
    assert contact.region.value == Quantity(330.0, 0.4)


# ---- behind a window ----------------------------------------------------------------------


def windowed(bench, hall_with, **changes):
    window = Window(Quantity(0.6), Quantity(0.1), Quantity(305.0))
    return bench.but(conditions=hall_with(window=window, **changes))


def through_window(bench, lens_temperature):
    """The measurement equation forwards: 0.6 passes, 0.1 mirrors the air, 0.3 is emitted. [K]"""
    band, air = bench.band, bench.conditions.air_temperature.value
    passed = 0.6 * band.radiance(lens_temperature)
    return float(band.temperature(passed + 0.1 * band.radiance(air) + 0.3 * band.radiance(305.0)))


def test_a_foil_behind_a_window_gives_what_it_mirrors(bench, hall_with, drawn_box):
    run = windowed(bench, hall_with, reflected_temperature=Quantity(300.0, 5.0))
    shown = through_window(run, foil_value(run, 303.15))
    foil = drawn_box("foil", "foil", *FOIL_BOX, band_emissivity=Quantity(0.07))
    (reading,) = read_references(np.full((96, 280), shown), [foil])
    frame, remarks = used((reading,), run)
    assert remarks[0].key == "remark.foil_used"
    assert np.median(frame.reflected_temperature) == pytest.approx(303.15, abs=0.15)


@pytest.mark.parametrize("role", ["tape", "contact"])
def test_an_emissivity_is_found_behind_a_window(bench, hall_with, paint, drawn_box, role):
    run = windowed(bench, hall_with).but(line=replace(bench.line, cladding=paint(0.8, 0.1)))
    lens = bench.but(line=replace(bench.line, cladding=paint(0.6))).lens(SURFACE)
    value = Quantity(0.95)
    if role == "tape":
        put(lens, TAPE_BOX, tape_value(run, SURFACE))
    else:
        value = Quantity(SURFACE, 0.1)
    band, air = run.band, run.conditions.air_temperature.value
    mixed = 0.6 * band.radiance(lens) + 0.1 * band.radiance(air) + 0.3 * band.radiance(305.0)
    patch = drawn_box("patch", role, *TAPE_BOX, tag="HS-1", value=value)
    readings = read_references(band.temperature(mixed), [run.region, patch])
    line, _ = with_emissivity(run.line_draws(), "HS-1", run.frame_draws(), readings, run.book)
    found = float(np.median(line.band_emissivity))
    # tape cools where it sticks: half-normal, 2 %, its median 1.35 %
    assert found == pytest.approx(0.6 * (1 - 0.0135 * (role == "tape")), abs=0.006)


def test_a_background_is_compared_through_air_and_window(bench, hall_with, drawn_box, keys):
    run = windowed(bench, hall_with).but(
        camera=Camera(field_of_view_deg=30.0, accuracy=AccuracyStatement(2.0, 2.0)), count=2000
    )
    band, air = run.band, run.conditions.air_temperature.value
    behind = band.temperature(0.98 * band.radiance(333.15) + 0.02 * band.radiance(air))
    box = drawn_box("wall", "background", *FOIL_BOX, value=Quantity(333.15, 0.1))
    # the camera reads 1 K too low
    readings = read_references(np.full((96, 280), through_window(run, behind) - 1.0), [box])
    frame, remarks = used(readings, run)
    assert "remark.reading_not_used" not in keys(remarks)
    offset = frame.calibration_offset(np.array([readings[0].reading]))
    assert np.median(offset) == pytest.approx(1.0, abs=0.15)
