"""Guesses about undeclared files: right on ordinary ones, open about doubt, never raising."""

import numpy as np
import pytest
import tifffile

from cladwatt.errors import FrameError
from cladwatt.survey.sniff import FrameGuess, sniff_frame


def scene() -> np.ndarray:
    values = 22.0 + np.random.default_rng(2).normal(0, 0.2, (40, 60))
    values[14:24] += 36.0
    return values


def test_a_semicolon_file_with_decimal_commas(tmp_path):
    path = tmp_path / "a.csv"
    rows = [";".join(f"{value:.1f}".replace(".", ",") for value in row) for row in scene()]
    path.write_text("Temperatur [°C]\n" + "\n".join(rows), encoding="latin-1")
    guess = sniff_frame(path)
    assert guess.shape == (40, 60)
    assert (guess.likely_unit, guess.unit_in_file) == ("C", "C")
    assert (guess.delimiter, guess.decimal) == (";", ",")
    assert guess.format == "CSV, semicolon, decimal comma, Latin-1, 1 header line(s)"
    assert guess.minimum == pytest.approx(scene().min(), abs=0.06)
    assert guess.median == pytest.approx(np.median(scene()), abs=0.06)
    assert guess.maximum == pytest.approx(scene().max(), abs=0.06)
    assert guess.likely_scale_offset is None


@pytest.mark.parametrize(
    ("values", "unit"), [(scene(), "C"), (scene() + 273.15, "K"), (scene() * 1.8 + 32, "F")]
)
def test_the_likely_unit(tmp_path, values, unit):
    path = tmp_path / "a.tif"
    tifffile.imwrite(path, values.astype("float32"), photometric="minisblack")
    guess = sniff_frame(path)
    assert guess.likely_unit == unit
    assert guess.unit_in_file is None
    assert "the unit is a guess" in guess.note
    assert guess.format == "TIFF float32, compression none"


def test_counts_in_hundredths_of_a_kelvin(tmp_path):
    path = tmp_path / "a.tif"
    counts = np.round((scene() + 273.15) * 100).astype("uint16")
    tifffile.imwrite(path, np.stack([counts, counts]), photometric="minisblack")
    guess = sniff_frame(path)
    assert guess.likely_unit == "K"
    assert guess.likely_scale_offset == (0.01, 0.0)
    assert guess.pages == 2
    assert "2 pages: choose one" in guess.note
    assert "counts need a scale and an offset" in guess.note


def test_numbers_of_no_usual_place(tmp_path):
    path = tmp_path / "a.tif"
    tifffile.imwrite(path, scene() * 1e5, photometric="minisblack")
    guess = sniff_frame(path)
    assert guess.likely_unit is None
    assert "look like no temperature" in guess.note


def test_a_frame_without_any_number(tmp_path):
    path = tmp_path / "a.tif"
    tifffile.imwrite(path, np.full((8, 8), np.nan), photometric="minisblack")
    guess = sniff_frame(path)
    assert (guess.shape, guess.minimum, guess.likely_unit) == ((8, 8), None, None)


@pytest.mark.parametrize(
    ("content", "note"),
    [
        (b"hello\n", "line 1: no line of numbers found"),
        (b"\xff\xd8\xff\xe0 picture", "the file is a JPEG picture"),
        (b"1;2;3\n4;5\n6;7;8\n", "line 2: the row has 2 values, the other rows have 3"),
    ],
)
def test_what_is_no_frame_is_told_in_the_note(tmp_path, content, note):
    path = tmp_path / "a.csv"
    path.write_bytes(content)
    guess = sniff_frame(path)
    assert guess.note.startswith(note)
    assert guess == FrameGuess(note=guess.note)


def test_a_missing_file_is_an_error(tmp_path):
    with pytest.raises(FrameError, match="there is no such file"):
        sniff_frame(tmp_path / "a.csv")
