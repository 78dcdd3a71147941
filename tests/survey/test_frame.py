"""Frames: kelvin, masks, and every message about values that cannot be what is declared."""

import hashlib
from pathlib import Path

import numpy as np
import pytest
import tifffile

from cladwatt.errors import Fault, FrameError
from cladwatt.quantities import declared
from cladwatt.survey.frame import Frame, frame_questions, read_frame
from cladwatt.survey.model import Conditions, FrameEntry, FrameFormat, Recording

AIR_C = 21.0


def scene(seed: int = 2, pipe_C: float = 58.0, background_C: float = 22.0) -> np.ndarray:
    """Return a warm pipe across a room at about the air's temperature. [°C]"""
    values = background_C + np.random.default_rng(seed).normal(0, 0.2, (40, 60))
    values[14:24] += pipe_C - background_C
    return values


def entry(
    path: Path, *, air_C: float | None = AIR_C, indoors: bool | None = True, **form
) -> FrameEntry:
    air = None if air_C is None else declared(air_C + 273.15, 1.0)
    conditions = Conditions(air_temperature=air, indoors=indoors)
    return FrameEntry("hall-1", path, FrameFormat(**form), Recording(), conditions)


def write_tiff(path: Path, values: np.ndarray, **options) -> Path:
    tifffile.imwrite(path, values, photometric="minisblack", **options)
    return path


def write_csv(path: Path, values: np.ndarray, header: str = "", form: str = "%.3f") -> Path:
    lines = [";".join(form % value for value in row) for row in values]
    path.write_text(header + "\n".join(lines) + "\n", encoding="utf-8")
    return path


def fault_of(asked: FrameEntry, root: Path | None = None) -> Fault:
    with pytest.raises(FrameError) as caught:
        read_frame(asked, root=root)
    (fault,) = caught.value.faults
    assert fault.frame_id == "hall-1"
    assert fault.severity == "error"
    return fault


def questions_of(asked: FrameEntry) -> list[str]:
    questions = frame_questions(read_frame(asked), asked)
    assert all(q.severity == "question" and q.frame_id == "hall-1" for q in questions)
    return [str(question) for question in questions]


IN_UNIT = {
    "C": lambda celsius: celsius,
    "K": lambda celsius: celsius + 273.15,
    "F": lambda celsius: celsius * 1.8 + 32.0,
}


@pytest.mark.parametrize("unit", IN_UNIT)
@pytest.mark.parametrize("kind", ["csv", "tiff"])
def test_kelvin_from_every_unit(tmp_path, unit, kind):
    values = IN_UNIT[unit](scene())
    if kind == "csv":
        path = write_csv(tmp_path / "a.csv", values, form="%.9f")
    else:
        path = write_tiff(tmp_path / "a.tif", values)
    asked = entry(path, unit=unit)
    frame = read_frame(asked)
    np.testing.assert_allclose(frame.temperature, scene() + 273.15, atol=1e-8, rtol=0)
    assert not frame.dead.any()
    assert not frame.clipped.any()
    assert frame.shape == (40, 60)
    assert frame.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()
    assert frame_questions(frame, asked) == ()


def test_the_unit_may_stand_in_the_file(tmp_path):
    path = write_csv(tmp_path / "a.csv", scene(), "Temperature [°C]\n")
    frame = read_frame(entry(path))
    np.testing.assert_allclose(frame.temperature, scene() + 273.15, atol=6e-4)
    assert frame.remarks[-1].key == "frame.unit_from_file"
    assert (frame.description["unit"], frame.description["unit_source"]) == ("°C", "file")


def test_arrays_are_read_only(tmp_path):
    frame = read_frame(entry(write_tiff(tmp_path / "a.tif", scene()), unit="C"))
    for plane in (frame.temperature, frame.dead, frame.clipped):
        with pytest.raises(ValueError, match="read-only"):
            plane[0, 0] = 0


def test_rows_from_the_bottom(tmp_path):
    values = scene()
    values[0, 0] = np.nan
    frame = read_frame(entry(write_tiff(tmp_path / "a.tif", values), unit="C", rows_from="bottom"))
    np.testing.assert_allclose(frame.temperature[::-1], values + 273.15)
    assert np.argwhere(frame.dead).tolist() == [[39, 0]]


@pytest.mark.parametrize("dtype", ["uint16", "int16", "int32", "uint32"])
def test_counts_with_scale_and_offset(tmp_path, dtype):
    counts = np.round((scene() + 100.0) / 0.02).astype(dtype)
    frame = read_frame(
        entry(write_tiff(tmp_path / "a.tif", counts), unit="C", scale=0.02, offset=-100.0)
    )
    expected = counts.astype(float) * 0.02 - 100.0 + 273.15
    np.testing.assert_allclose(frame.temperature, expected, atol=1e-9, rtol=0)


def test_bytes_with_scale_and_offset_and_saturated_ends(tmp_path):
    counts = np.round(scene() * 2).astype("uint8")
    counts[0, 1], counts[2, 3] = 255, 0
    frame = read_frame(
        entry(write_tiff(tmp_path / "a.tif", counts), unit="C", scale=0.5, offset=0.0)
    )
    assert np.argwhere(frame.clipped).tolist() == [[0, 1], [2, 3]]
    assert np.isnan(frame.temperature[frame.clipped]).all()
    assert np.isfinite(frame.temperature[~frame.clipped]).all()


def test_counts_in_a_text_file(tmp_path):
    path = write_csv(tmp_path / "a.csv", (scene() + 273.15) * 100, form="%.0f")
    frame = read_frame(entry(path, unit="K", scale=0.01, offset=0.0))
    np.testing.assert_allclose(frame.temperature, scene() + 273.15, atol=0.0051)


@pytest.mark.parametrize("dtype", ["float32", "float64"])
@pytest.mark.parametrize("bad", [-9999.9, 0.1, 3.4e38])
def test_dead_pixels_are_masked_and_never_filled(tmp_path, dtype, bad):
    values = scene().astype(dtype)
    values[3, 4], values[5, 6], values[7, 8] = bad, np.nan, np.inf
    asked = entry(write_tiff(tmp_path / "a.tif", values), unit="C", bad_value=bad)
    frame = read_frame(asked)
    assert np.argwhere(frame.dead).tolist() == [[3, 4], [5, 6], [7, 8]]
    np.testing.assert_array_equal(np.isnan(frame.temperature), frame.dead)
    assert ("frame.dead_pixels", (("pixels", 3),)) in [(r.key, r.parameters) for r in frame.remarks]


def test_bad_value_is_taken_before_the_scale(tmp_path):
    counts = np.round((scene() + 273.15) * 100).astype("uint16")
    counts[9, 9] = 1
    frame = read_frame(
        entry(write_tiff(tmp_path / "a.tif", counts), unit="K", scale=0.01, offset=0.0, bad_value=1)
    )
    assert np.argwhere(frame.dead).tolist() == [[9, 9]]


@pytest.mark.parametrize("unit", IN_UNIT)
@pytest.mark.parametrize("dtype", ["float32", "float64"])
def test_the_recording_ranges_ends_are_clipped(tmp_path, unit, dtype):
    values = scene()
    values[0, :3], values[1, :2] = [60.0, 61.0, 59.9], [10.0, 9.0]
    path = write_tiff(tmp_path / "a.tif", IN_UNIT[unit](values).astype(dtype))
    frame = read_frame(entry(path, unit=unit, range_lower=283.15, range_upper=333.15))
    assert np.argwhere(frame.clipped).tolist() == [[0, 0], [0, 1], [1, 0], [1, 1]]
    assert np.isnan(frame.temperature[frame.clipped]).all()
    assert not frame.dead.any()


def test_page_of_a_stack(tmp_path):
    stack = np.stack([scene(1), scene(2)]).astype("float32")
    path = write_tiff(tmp_path / "a.tif", stack)
    frame = read_frame(entry(path, unit="C", page=1))
    np.testing.assert_allclose(frame.temperature, stack[1] + 273.15, atol=1e-4)
    fault = fault_of(entry(path, unit="C", page=2))
    assert fault.found == "page 2 was chosen, the TIFF holds 2 page(s)"


# What cannot be opened.


def test_paths_in_messages_are_relative_to_the_survey(tmp_path):
    (tmp_path / "frames").mkdir()
    asked = entry(tmp_path / "frames" / "a.tif", unit="C")
    assert fault_of(asked, tmp_path).path == "frames/a.tif"
    assert fault_of(asked).path == "a.tif"
    assert str(fault_of(asked, tmp_path)).startswith(
        "frames/a.tif: frame 'hall-1': there is no such file; expected"
    )


def test_a_folder(tmp_path):
    assert fault_of(entry(tmp_path, unit="C")).found == "this is a folder"


def test_an_empty_file(tmp_path):
    path = tmp_path / "a.csv"
    path.touch()
    assert fault_of(entry(path, unit="C")).found == "the file is empty"


def test_a_path_no_system_accepts(tmp_path):
    assert "there is no such file" in fault_of(entry(tmp_path / ("x" * 300), unit="C")).found or (
        "cannot be read" in fault_of(entry(tmp_path / ("x" * 300), unit="C")).found
    )
    assert fault_of(entry(tmp_path / "a\0b", unit="C")).found


def test_a_file_too_large(tmp_path, monkeypatch):
    monkeypatch.setattr("cladwatt.survey.frame_file.MAXIMUM_FILE_BYTES", 100)
    path = write_csv(tmp_path / "a.csv", scene())
    assert "bytes" in fault_of(entry(path, unit="C")).found


@pytest.mark.parametrize(
    ("head", "found"),
    [
        (b"\x89PNG\r\n\x1a\n", "the file is a PNG picture"),
        (b"\xff\xd8\xff\xe0", "the file is a JPEG picture"),
        (b"PK\x03\x04", "the file is a workbook or ZIP archive"),
        (b"%PDF-1.7", "the file is a PDF"),
        (b"\x00\x01\x02\x03\x00", "the file is neither TIFF nor text"),
    ],
)
def test_other_kinds_of_file(tmp_path, head, found):
    path = tmp_path / "a.csv"
    path.write_bytes(head + bytes(range(1, 200)))
    assert fault_of(entry(path, unit="C")).found == found


def test_a_tiff_by_name_only(tmp_path):
    path = write_csv(tmp_path / "a.tiff", scene())
    assert fault_of(entry(path, unit="C")).found == "the file does not begin like a TIFF"


def test_a_page_of_a_text_file(tmp_path):
    path = write_csv(tmp_path / "a.csv", scene())
    assert fault_of(entry(path, unit="C", page=1)).found == "page 1 was chosen of a text file"


def test_a_ragged_row_is_named_by_file_and_line(tmp_path):
    path = write_csv(tmp_path / "a.csv", scene(), "unit: C\n")
    lines = path.read_text().splitlines()
    lines[20] = lines[20].rsplit(";", 3)[0]
    path.write_text("\n".join(lines))
    fault = fault_of(entry(path), tmp_path)
    assert str(fault).startswith(
        "a.csv:21: frame 'hall-1': the row has 57 values, the other rows have 60; expected"
    )


def test_decimal_commas_between_commas(tmp_path):
    path = tmp_path / "a.csv"
    rows = [",".join(f"{value:.2f}".replace(".", ",") for value in row) for row in scene()]
    path.write_text("\n".join(rows))
    fault = fault_of(entry(path, unit="C"))
    assert "decimal commas read as separators" in fault.found
    assert fault.line == 1


# Values that cannot be what is declared.


def test_counts_without_scale(tmp_path):
    counts = np.round((scene() + 273.15) * 100).astype("uint16")
    fault = fault_of(entry(write_tiff(tmp_path / "a.tif", counts), unit="K"))
    assert fault.found == (
        f"uint16 counts ({counts.min()} to {counts.max()}) without a declared scale and offset"
    )
    assert "hundredths of a kelvin" in fault.expected
    assert 'unit = "K", scale = 0.01, offset = 0.0' in fault.expected


@pytest.mark.parametrize(("given", "missing"), [("scale", "offset"), ("offset", "scale")])
def test_counts_with_half_a_scale(tmp_path, given, missing):
    path = write_tiff(tmp_path / "a.tif", scene().astype("int16"))
    fault = fault_of(entry(path, unit="C", **{given: 1.0}))
    assert fault.found.endswith(f"without a declared {missing}")


@pytest.mark.parametrize("scale", [0.0, -1.0, float("nan")])
def test_a_scale_that_is_none(tmp_path, scale):
    path = write_tiff(tmp_path / "a.tif", scene().astype("int16"))
    fault = fault_of(entry(path, unit="C", scale=scale, offset=0.0))
    assert fault.found == f"scale is {scale}"


@pytest.mark.parametrize("unit", IN_UNIT)
def test_no_unit_anywhere_says_what_it_looks_like(tmp_path, unit):
    values = IN_UNIT[unit](scene())
    fault = fault_of(entry(write_tiff(tmp_path / "a.tif", values)))
    assert fault.found == (
        "no unit is declared and none stands in the file "
        f"(values {values.min():g} to {values.max():g})"
    )
    assert f"they look like {'K' if unit == 'K' else '°' + unit}" in fault.expected
    assert fault.expected.endswith(f'unit = "{unit}"')


def test_no_unit_and_nothing_that_fits(tmp_path):
    fault = fault_of(entry(write_tiff(tmp_path / "a.tif", scene() * 1e6)))
    assert fault.expected == 'expected unit = "C", "K" or "F"'


def test_declared_unit_against_the_files_own(tmp_path):
    path = write_csv(tmp_path / "a.csv", scene(), "Temperature [°C]\n")
    fault = fault_of(entry(path, unit="K"))
    assert fault.found == "the unit is declared as K, the file says °C"
    assert 'set unit = "C"' in fault.expected


@pytest.mark.parametrize(
    ("really", "declared_as", "named"),
    [("K", "C", "K"), ("F", "C", "°F"), ("C", "K", "°C"), ("F", "K", "°F"), ("K", "F", "K")],
)
@pytest.mark.parametrize("air_C", [AIR_C, 5.0, 35.0])
def test_a_wrong_unit_stops_the_frame_and_is_named(tmp_path, really, declared_as, named, air_C):
    values = IN_UNIT[really](scene(background_C=air_C + 1.0))
    fault = fault_of(entry(write_tiff(tmp_path / "a.tif", values), unit=declared_as, air_C=air_C))
    assert "cannot be" in fault.found
    assert f"values {values.min():g} to {values.max():g}" in fault.found
    assert f"they look like {named}" in fault.expected


def test_kelvin_as_celsius_without_a_declared_air(tmp_path):
    path = write_tiff(tmp_path / "a.tif", scene() + 273.15)
    fault = fault_of(entry(path, unit="C", air_C=None))
    assert "they look like K" in fault.expected


@pytest.mark.parametrize(
    ("factor", "zero", "unit", "named"),
    [
        (100, 273.15, "K", "hundredths of a kelvin"),
        (10, 273.15, "K", "tenths of a kelvin"),
        (100, 0.0, "C", "hundredths of a degree Celsius"),
        (10, 0.0, "C", "tenths of a degree Celsius"),
    ],
)
def test_hundredths_and_tenths_are_named(tmp_path, factor, zero, unit, named):
    values = np.round((scene() + zero) * factor)
    fault = fault_of(entry(write_tiff(tmp_path / "a.tif", values), unit=unit))
    assert named in fault.expected
    assert f"scale = {1 / factor}" in fault.expected


def test_an_undeclared_bad_value_is_named(tmp_path):
    values = scene()
    values[3, 3] = values[8, 9] = -9999.0
    fault = fault_of(entry(write_tiff(tmp_path / "a.tif", values), unit="C"))
    assert fault.found == "2 pixel(s) hold values such as -9999, no temperature in °C"
    assert "declare it as bad_value" in fault.expected


def test_nothing_usable(tmp_path):
    fault = fault_of(entry(write_tiff(tmp_path / "a.tif", np.full((9, 9), np.nan)), unit="C"))
    assert fault.found == "not one usable pixel: 81 dead, 0 clipped"


# What is only odd.


def test_a_background_far_from_the_air_is_questioned_and_read(tmp_path):
    path = write_tiff(tmp_path / "a.tif", scene(background_C=45.0, pipe_C=90.0))
    (question,) = questions_of(entry(path, unit="C"))
    assert "24 K above the declared air of 21.0 °C" in question
    assert "is the air temperature right, and the unit?" in question


def test_celsius_declared_as_fahrenheit_is_questioned_with_the_likely_unit(tmp_path):
    (question,) = questions_of(entry(write_tiff(tmp_path / "a.tif", scene()), unit="F"))
    assert 'also look like °C: unit = "C"' in question


def test_fractions_are_no_counts(tmp_path):
    """Tenths of a degree would explain the level, but counts have no decimals."""
    path = write_tiff(tmp_path / "a.tif", scene(background_C=210.0, pipe_C=250.0))
    (question,) = questions_of(entry(path, unit="C"))
    assert "tenths" not in question


def test_a_close_view_of_a_hot_surface_is_read(tmp_path):
    """All of the frame is hot and no other unit explains it: a question, no refusal."""
    path = write_tiff(tmp_path / "a.tif", scene(background_C=190.0, pipe_C=240.0))
    (question,) = questions_of(entry(path, unit="C"))
    assert "169 K above" in question or "168 K above" in question


def test_hot_pixels_beside_a_room_are_not_taken_for_kelvin(tmp_path):
    path = write_tiff(tmp_path / "a.tif", scene(pipe_C=288.0))
    assert questions_of(entry(path, unit="C")) == []


@pytest.mark.parametrize(("indoors", "number"), [(True, 1), (None, 1), (False, 0)])
def test_cold_sky_is_no_question_outdoors(tmp_path, indoors, number):
    path = write_tiff(tmp_path / "a.tif", scene(background_C=-30.0, pipe_C=15.0))
    assert len(questions_of(entry(path, unit="C", air_C=5.0, indoors=indoors))) == number


def test_a_chilled_line_is_read_without_question(tmp_path):
    path = write_tiff(tmp_path / "a.tif", scene(pipe_C=9.0))
    assert questions_of(entry(path, unit="C")) == []


def test_a_plateau_at_the_top_is_questioned_unless_the_range_is_declared(tmp_path):
    values = np.minimum(scene() + np.linspace(0, 8, 60), 60.0)
    path = write_tiff(tmp_path / "a.tif", values)
    (question,) = questions_of(entry(path, unit="C"))
    assert "share the highest value, 60.0 °C" in question
    assert questions_of(entry(path, unit="C", range_upper=333.15)) == []


def test_a_frame_is_frozen(tmp_path):
    frame = read_frame(entry(write_tiff(tmp_path / "a.tif", scene()), unit="C"))
    assert isinstance(frame, Frame)
    with pytest.raises(AttributeError):
        frame.id = "other"
