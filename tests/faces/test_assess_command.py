"""`cladwatt assess`, end to end on a small survey."""

import csv
import json

import numpy as np
import pandas as pd
import pytest
import tifffile

from cladwatt.faces.cli.messages import ExitCode

DRAWS = ("--draws", 100)


def test_writes_every_promised_file_and_prints_the_table(cladwatt, survey):
    ended = cladwatt("assess", survey, *DRAWS)
    assert ended.code == ExitCode.DONE, ended.err
    results = survey / "results"
    for name in ("report.html", "regions.csv", "stretches.csv", "stations.csv", "COLUMNS.txt",
                 "assessment.json", "strips", "stretches", "draws"):  # fmt: skip
        assert (results / name).exists(), name
    assert "HS-101 north-1" in ended.out
    assert f"Results are in {results}" in ended.out
    regions = pd.read_csv(results / "regions.csv")
    assert list(regions["region_id"]) == ["north-1", "south-1"]
    assert list(regions["gain"]) == [False, True]
    loss = regions["heat_loss_W_per_m"]
    # a pipe 11 K above the air gives heat off, one 3 K below takes it up
    assert loss[0] > 0 > loss[1]


def test_the_hot_spot_is_among_the_stretches(cladwatt, survey):
    cladwatt("assess", survey, *DRAWS)
    with (survey / "results" / "stretches.csv").open(newline="") as file:
        rows = [row for row in csv.DictReader(file) if row["region_id"] == "north-1"]
    # the lagged pipe, 0.2157 m over everything, is drawn 30 pixels wide from column 8 on and
    # the bump stands at column 100
    bump = (100 - 8) * (0.1143 + 2 * 0.05 + 2 * 0.0007) / 30
    assert any(float(row["start_m"]) <= bump <= float(row["end_m"]) for row in rows)


def test_same_seed_same_bytes_whatever_the_workers(cladwatt, survey, tmp_path):
    outs = [tmp_path / name for name in ("one", "two", "other_seed")]
    assert cladwatt("assess", survey, *DRAWS, "--out", outs[0]).code == 0
    assert cladwatt("assess", survey, *DRAWS, "--out", outs[1], "--workers", 2).code == 0
    assert cladwatt("assess", survey, *DRAWS, "--out", outs[2], "--seed", 2).code == 0
    texts = [(out / "assessment.json").read_bytes() for out in outs]
    assert texts[0] == texts[1]
    assert texts[0] != texts[2]


def test_json_summary_is_json_and_nothing_else(cladwatt, survey):
    ended = cladwatt("assess", survey, *DRAWS, "--json")
    summary = json.loads(ended.out)
    assert summary["exit_code"] == ended.code == 0
    assert summary["regions"] == 2
    assert sum(summary["verdicts"].values()) == 2
    assert summary["left_out"] == []
    assert (survey / "results").samefile(summary["results"])


@pytest.mark.parametrize("line", ["dn = 100\n", "lagging_thickness_mm = 50\n"])
def test_a_line_of_unknown_diameter_is_left_without_metres(cladwatt, survey, edit, line):
    edit(line, "")
    ended = cladwatt("assess", survey, *DRAWS)
    assert ended.code == ExitCode.DONE, ended.err
    regions = pd.read_csv(survey / "results" / "regions.csv").set_index("region_id")
    assert np.isnan(regions.loc["north-1", "heat_loss_W_per_m"])
    assert regions.loc["north-1", "heat_flux_W_per_m2"] > 0
    assert np.isfinite(regions.loc["south-1", "heat_loss_W_per_m"])
    assert "along the drawn line, pixels" in (survey / "results" / "report.html").read_text("utf-8")


def test_a_faulty_label_image_leaves_its_frame_out_and_no_other(cladwatt, survey, edit):
    (survey / "labels").mkdir()
    painted = np.zeros((96, 160), np.uint8)
    painted[33:63, 8:150] = 1
    tifffile.imwrite(survey / "labels" / "steam.tiff", painted)
    (survey / "labels" / "steam.csv").write_text("integer,id,tag\n")
    (survey / "regions" / "steam.geojson").unlink()
    edit('steam.tiff"\n', 'steam.tiff"\nlabels = "labels/steam.tiff"\n')
    ended = cladwatt("assess", survey, *DRAWS)
    assert ended.code == ExitCode.LEFT_OUT, ended.err
    assert "frame steam: labels/steam.tiff" in ended.out
    assert list(pd.read_csv(survey / "results" / "regions.csv")["region_id"]) == ["south-1"]


def test_an_assumed_field_of_view_is_named(cladwatt, survey, edit):
    cladwatt("assess", survey, *DRAWS)
    report = (survey / "results" / "report.html").read_text("utf-8")
    assert "field of view of the camera" in report
    edit("noise_K = 0.05", "noise_K = 0.05\nfield_of_view_deg = 25")
    cladwatt("assess", survey, *DRAWS)
    report = (survey / "results" / "report.html").read_text("utf-8")
    assert "field of view of the camera" not in report


def test_quiet_says_nothing(cladwatt, survey):
    ended = cladwatt("--quiet", "assess", survey, *DRAWS)
    assert (ended.code, ended.out, ended.err) == (0, "", "")
    assert (survey / "results" / "report.html").is_file()


def test_quiet_stands_before_or_after_the_command(cladwatt, survey):
    assert cladwatt("assess", survey, *DRAWS, "-q").out == ""


def test_what_is_left_out_is_named_and_gives_3(cladwatt, survey):
    (survey / "frames" / "chilled.csv").write_bytes(b"")
    ended = cladwatt("assess", survey, *DRAWS)
    assert ended.code == ExitCode.LEFT_OUT
    assert "chilled" in ended.out
    assert "empty" in ended.out
    assert "HS-101 north-1" in ended.out


def test_strict_turns_3_into_1_and_keeps_the_results(cladwatt, survey):
    (survey / "frames" / "chilled.csv").write_bytes(b"")
    ended = cladwatt("assess", survey, *DRAWS, "--strict")
    assert ended.code == ExitCode.COULD_NOT
    assert "--strict" in ended.err
    assert (survey / "results" / "report.html").is_file()


def test_nothing_assessed_is_could_not(cladwatt, survey):
    for name in ("steam.tiff", "chilled.csv"):
        (survey / "frames" / name).write_bytes(b"")
    ended = cladwatt("assess", survey, *DRAWS)
    assert ended.code == ExitCode.COULD_NOT
    assert "not one pipe region could be assessed" in ended.err


def test_a_folder_holding_anything_else_is_refused_before_the_work(cladwatt, survey, tmp_path):
    out = tmp_path / "papers"
    out.mkdir()
    (out / "thesis.txt").write_text("years of work")
    ended = cladwatt("assess", survey, "--out", out, "--draws", 100_000)
    assert ended.code == ExitCode.COULD_NOT
    assert "thesis.txt" in ended.err
    assert [path.name for path in out.iterdir()] == ["thesis.txt"]


def test_earlier_results_are_replaced(cladwatt, survey):
    cladwatt("assess", survey, *DRAWS)
    before = (survey / "results" / "assessment.json").read_bytes()
    tifffile.imwrite(survey / "frames" / "steam.tiff", np.full((96, 160), 20.0, np.float32))
    assert cladwatt("assess", survey, *DRAWS).code in (0, 3)
    assert (survey / "results" / "assessment.json").read_bytes() != before


def test_a_question_about_a_frame_is_pointed_to(cladwatt, survey, edit):
    # numbers near 20 declared °F lie 27 K below the declared air: asked, not refused
    edit('steam.tiff"\nunit = "C"', 'steam.tiff"\nunit = "F"')
    assert "1 question" in cladwatt("assess", survey, *DRAWS).err


def test_questions_are_pointed_to(cladwatt, survey, edit):
    edit("date = 2026-03-18\n", "")
    ended = cladwatt("assess", survey, *DRAWS)
    assert ended.code == ExitCode.DONE
    assert "question" in ended.err
    assert "cladwatt check" in ended.err


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("--draws", 5), "5 is not a whole number from 100 to 100000"),
        (("--draws", "many"), "'many' is not a whole number"),
        (("--seed", -1), "-1 is not a whole number of 0 or more"),
        (("--workers", 0), "0 is not a whole number from 1 to 256"),
        (("--drawz", 5), "unrecognized arguments"),
    ],
)
def test_wrong_usage_gives_2_and_writes_nothing(cladwatt, survey, arguments, said):
    ended = cladwatt("assess", survey, *arguments)
    assert ended.code == ExitCode.WRONG_USAGE
    assert said in ended.err
    assert not (survey / "results").exists()


def test_no_such_survey(cladwatt, tmp_path):
    ended = cladwatt("assess", tmp_path / "nowhere")
    assert ended.code == ExitCode.COULD_NOT
    assert "there is no such folder" in ended.err
    assert not (tmp_path / "nowhere").exists()


def test_an_interrupted_run_says_so_and_leaves_nothing(cladwatt, survey, monkeypatch):
    def stop(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("cladwatt.report.html_report.write_report", stop)
    ended = cladwatt("assess", survey, *DRAWS)
    assert ended.code == ExitCode.INTERRUPTED
    assert "interrupted" in ended.err
    assert sorted(path.name for path in survey.iterdir()) == ["frames", "regions", "survey.toml"]
