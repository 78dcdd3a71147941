"""`cladwatt check`: every fault named, one to a line, and never a traceback."""

import re
import shutil

import numpy as np
import pytest
import tifffile

from cladwatt.faces.cli.messages import ExitCode


def test_a_sound_survey_has_no_fault_and_gives_0(cladwatt, survey):
    ended = cladwatt("check", survey)
    assert ended.code == ExitCode.DONE
    assert "0 faults" in ended.err
    assert "Faults" not in ended.out


def test_questions_alone_give_0_and_stand_apart(cladwatt, survey, edit):
    edit("date = 2026-03-18\n", "")
    ended = cladwatt("check", survey)
    assert ended.code == ExitCode.DONE
    assert ended.out.startswith("Questions")
    assert "survey.date" in ended.out


def test_a_faulty_key_is_not_missing_as_well(cladwatt, survey, edit):
    edit("\nair_temperature_C = 20.0", '\nair_temperature_C = "20.0"')
    ended = cladwatt("check", survey)
    assert ended.out.count("air_temperature_C: air_temperature_C") == 1
    assert "Questions" not in ended.out


def test_a_tag_that_differs_by_case_alone_is_pointed_to(cladwatt, survey):
    swapped(survey / "regions" / "steam.geojson", "HS-101", "hs-101")
    assert "nearest: HS-101" in cladwatt("check", survey).out


def test_every_fault_at_once_with_file_line_key(cladwatt, survey, edit):
    edit("lagging_thickness_mm = 50", "lagging_thickness_mm = -50")
    edit('cladding = "painted_steel"\nfluid_temperature_C = 6.0',
         'cladding = "paintd_steel"\nfluid_temperature_C = 6.0')  # fmt: skip
    edit("emissivity = 0.95", "emissivity = 9.5")
    (survey / "frames" / "chilled.csv").unlink()
    ended = cladwatt("check", survey)
    assert ended.code == ExitCode.COULD_NOT
    text = (survey / "survey.toml").read_text().splitlines()
    for key, line in (("lagging_thickness_mm", "lagging_thickness_mm = -50"),
                      ("recording.emissivity", "emissivity = 9.5")):  # fmt: skip
        number = text.index(line) + 1
        assert re.search(rf"^survey\.toml:{number}: .*{re.escape(key)}: ", ended.out, re.M), key
    assert "painted_steel" in ended.out  # the nearest name
    assert "chilled.csv" in ended.out
    counted = re.search(r"(\d+) faults", ended.err)
    assert counted
    assert int(counted[1]) >= 4


# What is done to the survey, and what the listing must say. Each ends with 1, with no traceback
# (the fixture looks), on stdout.
FAULTS = {
    "unit missing": (
        lambda s: replaced(s, 'steam.tiff"\nunit = "C"', 'steam.tiff"'),
        r"steam.*no unit",
    ),
    "wrong unit": (
        lambda s: replaced(s, 'file = "frames/steam.tiff"\nunit = "C"',
                           'file = "frames/steam.tiff"\nunit = "K"'),
        r"steam.*°C",
    ),
    "decimal comma in the survey file": (
        lambda s: replaced(s, "air_temperature_C = 20.0", "air_temperature_C = 20,0"),
        r"survey\.toml:\d+.*decimal point",
    ),
    "decimal comma read as separator": (
        lambda s: (s / "frames" / "chilled.csv").write_text(
            "\n".join(",".join(["17", "2"] * 8 + ["17"]) for _ in range(3))
            + "\n" + ",".join(["17", "2"] * 7)
        ),
        r"chilled\.csv",
    ),
    "frame missing": (
        lambda s: (s / "frames" / "steam.tiff").unlink(),
        r"there is no file 'frames/steam\.tiff'",
    ),
    "frame file empty": (
        lambda s: (s / "frames" / "steam.tiff").write_bytes(b""), r"steam\.tiff.*empty",
    ),
    "folder instead of a frame file": (
        lambda s: ((s / "frames" / "steam.tiff").unlink(), (s / "frames" / "steam.tiff").mkdir()),
        r"steam\.tiff.*folder",
    ),
    "frame cut short": (
        lambda s: cut(s / "frames" / "steam.tiff"), r"steam\.tiff",
    ),
    "text in a frame": (
        lambda s: (s / "frames" / "chilled.csv").write_text("1;2\n3;hot\n"), r"chilled\.csv.*hot",
    ),
    "rows of unequal length": (
        lambda s: (s / "frames" / "chilled.csv").write_text("1;2;3\n4;5\n6;7;8\n"),
        r"chilled\.csv",
    ),
    "integer TIFF without scale": (
        lambda s: tifffile.imwrite(s / "frames" / "steam.tiff",
                                   np.full((96, 160), 29500, np.uint16)),
        r"steam.*scale and offset",
    ),
    "several samples in a TIFF": (
        lambda s: tifffile.imwrite(s / "frames" / "steam.tiff",
                                   np.zeros((96, 160, 3), np.uint8), photometric="rgb"),
        r"steam\.tiff",
    ),
    "unknown tag": (
        lambda s: swapped(s / "regions" / "steam.geojson", "HS-101", "HS-999"),
        r"north-1.*HS-999",
    ),
    "id used twice": (
        lambda s: swapped(s / "regions" / "chilled.geojson", "south-1", "north-1"),
        r"north-1.*(twice|once|already)",
    ),
    "tag used twice": (
        lambda s: replaced(s, 'tag = "CW-7"', 'tag = "HS-101"'), r"HS-101.*(twice|once)",
    ),
    "region outside its frame": (
        lambda s: swapped(s / "regions" / "steam.geojson", "[150, 48]", "[450, 48]"),
        r"north-1.*outside",
    ),
    "region without pixels": (
        lambda s: (
            swapped(s / "regions" / "steam.geojson", "[150, 48]", "[9, 48]"),
            swapped(s / "regions" / "steam.geojson", '"width_px": 30', '"width_px": 1'),
        ),
        r"north-1.*too few pixels",
    ),
    "region of no known role": (
        lambda s: swapped(s / "regions" / "steam.geojson", '"pipe"', '"pype"'), r"north-1.*pype",
    ),
    "geometry of another kind": (
        lambda s: swapped(s / "regions" / "steam.geojson", "LineString", "MultiPoint"),
        r"north-1.*MultiPoint",
    ),
    "regions of no known frame": (
        lambda s: shutil.copy(s / "regions" / "steam.geojson", s / "regions" / "steem.geojson"),
        r"steem",
    ),
    "broken GeoJSON": (
        lambda s: (s / "regions" / "steam.geojson").write_text('{"type": "Feature'),
        r"regions/steam\.geojson:1",
    ),
    "broken TOML": (
        lambda s: replaced(s, "[camera]", "[camera"), r"survey\.toml:\d+",
    ),
    "survey file not UTF-8": (
        lambda s: (s / "survey.toml").write_bytes(b"\xff\xfe\x00[survey]"), r"survey\.toml",
    ),
    "survey file empty": (
        lambda s: (s / "survey.toml").write_bytes(b""), r"survey\.toml",
    ),
    "survey file missing": (
        lambda s: (s / "survey.toml").unlink(), r"survey\.toml is missing",
    ),
    "negative thickness": (
        lambda s: replaced(s, "lagging_thickness_mm = 50", "lagging_thickness_mm = -50"),
        r"survey\.toml:\d+: .*lagging_thickness_mm.*-50",
    ),
    "thickness in a wrong unit": (
        lambda s: replaced(s, "lagging_thickness_mm = 50", "lagging_thickness_cm = 5"),
        r"lagging_thickness_cm",
    ),
    "thickness without unit": (
        lambda s: replaced(s, "lagging_thickness_mm = 50", "lagging_thickness = 50"),
        r"lagging_thickness.*lagging_thickness_mm",
    ),
    "emissivity above 1": (
        lambda s: replaced(s, "dn = 100", "dn = 100\nemissivity = 1.3"),
        r"survey\.toml:\d+: .*emissivity.*1\.3",
    ),
    "fluid colder than air on a hot line": (
        lambda s: replaced(s, "fluid_temperature_C = 180.0",
                           'fluid_temperature_C = 8.0\nservice = "hot"'),
        r"HS-101|line\[1\].*fluid",
    ),
    "misspelt key": (
        lambda s: replaced(s, "distance_m", "distence_m"), r"distence_m.*distance_m",
    ),
    "number as text": (
        lambda s: replaced(s, "distance_m = 3.0", 'distance_m = "3.0"'), r"distance_m",
    ),
    "true as a number": (
        lambda s: replaced(s, "distance_m = 3.0", "distance_m = true"), r"distance_m.*true",
    ),
    "not a number": (
        lambda s: replaced(s, "distance_m = 3.0", "distance_m = nan"), r"distance_m.*nan",
    ),
    "no such pipe size": (
        lambda s: replaced(s, "dn = 100", "dn = 101"), r"101.*100",
    ),
    "no such lagging": (
        lambda s: replaced(s, '"mineral wool"', '"mineral woll"'), r"mineral woll",
    ),
    "frame outside the survey": (
        lambda s: replaced(s, "frames/steam.tiff", "../steam.tiff"), r"\.\./steam\.tiff",
    ),
    "frame id used twice": (
        lambda s: replaced(s, 'file = "frames/chilled.csv"',
                           'file = "frames/chilled.csv"\nid = "steam"'),
        r"steam.*(twice|once|already)",
    ),
    "faulty table of its own": (
        lambda s: ((s / "tables").mkdir(),
                   (s / "tables" / "claddings.csv").write_text("cladding;emissivity\n")),
        r"claddings\.csv",
    ),
}  # fmt: skip


def replaced(survey, old, new):
    swapped(survey / "survey.toml", old, new)


def swapped(path, old, new):
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="utf-8")


def cut(path):
    data = path.read_bytes()
    path.write_bytes(data[: len(data) // 2])


@pytest.mark.parametrize("name", FAULTS)
def test_fault_is_named_without_traceback(cladwatt, survey, name):
    spoil, said = FAULTS[name]
    spoil(survey)
    ended = cladwatt("check", survey)
    assert ended.code == ExitCode.COULD_NOT, ended.out
    # before the questions, which stop nothing
    listed = ended.out.partition("\nQuestions")[0]
    assert listed.startswith("Faults\n")
    assert re.search(said, listed), listed


@pytest.mark.parametrize("name", FAULTS)
def test_assess_of_a_faulty_survey_never_ends_in_a_traceback(cladwatt, survey, name):
    FAULTS[name][0](survey)
    ended = cladwatt("assess", survey, "--draws", 100)
    assert ended.code in (ExitCode.COULD_NOT, ExitCode.LEFT_OUT), ended.out
    assert "fault in the program" not in ended.err


def test_a_file_instead_of_the_survey_folder(cladwatt, survey):
    ended = cladwatt("check", survey / "survey.toml")
    assert ended.code == ExitCode.COULD_NOT
    assert "this is a file" in ended.out
    assert "it cannot be opened" not in ended.out


def test_no_such_survey_folder(cladwatt, tmp_path):
    ended = cladwatt("check", tmp_path / "nowhere")
    assert ended.code == ExitCode.COULD_NOT
    assert ended.out.count("there is no such folder") == 1


def test_check_writes_nothing(cladwatt, survey):
    before = sorted(survey.rglob("*"))
    cladwatt("check", survey)
    assert sorted(survey.rglob("*")) == before
