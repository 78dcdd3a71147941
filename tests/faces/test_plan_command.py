"""The command that plans a walk, on a survey that has no frames yet."""

import json

import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.faces.cli.main import main
from cladwatt.survey.survey_file import read_survey

SURVEY = """
[survey]
name = "north hall"
[camera]
field_of_view_deg = 25
[conditions]
air_temperature_C = 22
indoors = true
[[line]]
tag = "HS-1"
area = "north"
fluid_temperature_C = 180
pipe_outside_diameter_mm = 114.3
lagging_material = "mineral_wool_pipe_section"
lagging_thickness_mm = 60
cladding = "painted_steel"
[[line]]
tag = "HS-2"
pipe_outside_diameter_mm = 114.3
lagging_material = "mineral_wool_pipe_section"
lagging_thickness_mm = 60
cladding = "painted_steel"
"""


@pytest.fixture
def folder(tmp_path):
    (tmp_path / "survey.toml").write_text(SURVEY, encoding="utf-8")
    return tmp_path


def test_json_has_every_line_with_units_in_its_names(folder, capsys):
    assert main(["plan", str(folder), "--distance", "3", "--columns", "320", "--json"]) == 3
    known, unknown = json.loads(capsys.readouterr().out)
    assert known["tag"] == "HS-1"
    assert known["distance_m"] == 3
    assert len(known["smallest_damage"]) == 3
    assert known["smallest_damage"][1]["length_m"] == 0.2
    assert known["smallest_damage"][1]["rise_percent"] > 0
    assert known["half_width_percent"] > 0
    assert unknown["tag"] == "HS-2"
    assert unknown["verdict"] is None
    assert "inside temperature" in " ".join(unknown["missing"])


def test_printed_plan_names_the_damage_and_what_to_bring(folder, capsys):
    assert main(["plan", str(folder)]) == 3
    page = capsys.readouterr().out
    for words in ("HS-1", "north", "Smallest damage over 0.20 m", "W/m", "HS-2"):
        assert words in page


def test_assessing_still_asks_for_frames(folder, capsys):
    assert main(["assess", str(folder)]) == 1
    assert "lists no frames" in capsys.readouterr().err
    with pytest.raises(SurveyFileError):
        read_survey(folder)


def test_an_odd_distance_is_refused(folder, capsys):
    assert main(["plan", str(folder), "--distance", "0"]) == 2
    assert "0.1 to 149" in capsys.readouterr().err
