"""`cladwatt start`: copies, reports, marks guesses for confirmation, decides nothing."""

import tomllib

import numpy as np
import pytest
import tifffile

from cladwatt.faces.cli.messages import ExitCode


@pytest.fixture
def recordings(tmp_path):
    folder = tmp_path / "recordings"
    folder.mkdir()
    values = 20.0 + np.random.default_rng(1).normal(0, 1, (24, 32))
    values[10:14] += 15.0
    tifffile.imwrite(folder / "plain.tiff", values.astype(np.float32))
    tifffile.imwrite(folder / "counts.tif", np.round((values + 273.15) * 100).astype(np.uint16))
    text = "\n".join(";".join(f"{v * 1.8 + 32:.1f}" for v in row) for row in values)
    (folder / "stated.csv").write_text("Unit: °F\n" + text.replace(".", ","), encoding="utf-8")
    return folder


def started(cladwatt, recordings, tmp_path, *names):
    into = tmp_path / "new"
    ended = cladwatt("start", *[recordings / name for name in names], "--into", into)
    return ended, into


def test_copies_frames_unchanged_and_makes_the_folders(cladwatt, recordings, tmp_path):
    names = ("plain.tiff", "counts.tif", "stated.csv")
    ended, into = started(cladwatt, recordings, tmp_path, *names)
    assert ended.code == ExitCode.DONE, ended.err
    for name in names:
        assert (into / "frames" / name).read_bytes() == (recordings / name).read_bytes()
    assert [path.name for path in (into / "regions").iterdir()] == ["README.txt"]
    assert sorted(path.name for path in into.iterdir()) == ["frames", "regions", "survey.toml"]


def test_a_likely_unit_is_written_as_a_comment_and_a_stated_one_in_force(
    cladwatt, recordings, tmp_path
):
    ended, into = started(cladwatt, recordings, tmp_path, "plain.tiff", "stated.csv")
    text = (into / "survey.toml").read_text(encoding="utf-8")
    frames = tomllib.loads(text)["frame"]
    assert [frame["file"] for frame in frames] == ["frames/plain.tiff", "frames/stated.csv"]
    assert "unit" not in frames[0]
    assert '#unit = "C"' in text
    assert frames[1]["unit"] == "F"
    assert "likely °C" in ended.out
    assert "°F, by the file" in ended.out


def test_check_of_the_new_folder_asks_for_the_unit(cladwatt, recordings, tmp_path):
    _, into = started(cladwatt, recordings, tmp_path, "plain.tiff")
    ended = cladwatt("check", into)
    assert ended.code == ExitCode.COULD_NOT
    assert "no unit is declared" in ended.out
    assert "the survey has no lines" in ended.out


def test_scale_of_counts_is_only_suggested(cladwatt, recordings, tmp_path):
    ended, into = started(cladwatt, recordings, tmp_path, "counts.tif")
    text = (into / "survey.toml").read_text(encoding="utf-8")
    assert "scale" not in tomllib.loads(text)["frame"][0]
    assert "#scale = 0.01" in text
    assert "likely K x 0.01" in ended.out


def test_range_is_reported_as_it_stands_in_the_file(cladwatt, recordings, tmp_path):
    ended, _ = started(cladwatt, recordings, tmp_path, "counts.tif")
    counts = tifffile.imread(recordings / "counts.tif")
    assert f"{counts.min()} to {counts.max()}" in ended.out
    assert "32 x 24" in ended.out


def test_a_file_that_is_no_frame_is_left_out_named_and_gives_3(cladwatt, recordings, tmp_path):
    (recordings / "notes.csv").write_text("walked the north hall\n")
    ended, into = started(cladwatt, recordings, tmp_path, "plain.tiff", "notes.csv", "gone.csv")
    assert ended.code == ExitCode.LEFT_OUT
    assert "notes.csv: left out" in ended.err
    assert "gone.csv: left out, there is no such file" in ended.err
    assert [path.name for path in (into / "frames").iterdir()] == ["plain.tiff"]


def test_no_frame_at_all_writes_nothing(cladwatt, recordings, tmp_path):
    ended, into = started(cladwatt, recordings, tmp_path, "gone.csv")
    assert ended.code == ExitCode.COULD_NOT
    assert not into.exists()
    assert sorted(path.name for path in tmp_path.iterdir()) == ["recordings"]


def test_a_folder_in_use_is_refused(cladwatt, recordings, tmp_path):
    into = tmp_path / "new"
    into.mkdir()
    (into / "survey.toml").write_text("[survey]\n")
    ended, _ = started(cladwatt, recordings, tmp_path, "plain.tiff")
    assert ended.code == ExitCode.COULD_NOT
    assert "holds files already" in ended.err
    assert (into / "survey.toml").read_text() == "[survey]\n"


def test_equal_names_from_two_folders_stay_apart(cladwatt, recordings, tmp_path):
    other = tmp_path / "other"
    other.mkdir()
    (other / "Plain.tiff").write_bytes((recordings / "plain.tiff").read_bytes())
    ended = cladwatt(
        "start", recordings / "plain.tiff", other / "Plain.tiff", "--into", tmp_path / "new"
    )
    assert ended.code == ExitCode.DONE
    names = sorted(path.name for path in (tmp_path / "new" / "frames").iterdir())
    assert names == ["Plain-2.tiff", "plain.tiff"]


def test_takes_folders_patterns_and_each_file_once(cladwatt, recordings, tmp_path):
    ended = cladwatt(
        "start", recordings, recordings / "*.csv", recordings / "plain.tiff",
        "--into", tmp_path / "new",
    )  # fmt: skip
    assert ended.code == ExitCode.DONE
    names = sorted(path.name for path in (tmp_path / "new" / "frames").iterdir())
    assert names == ["counts.tif", "plain.tiff", "stated.csv"]


def test_without_into_is_wrong_usage(cladwatt, recordings):
    ended = cladwatt("start", recordings)
    assert ended.code == ExitCode.WRONG_USAGE
    assert "--into" in ended.err
