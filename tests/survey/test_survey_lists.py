"""Line list and frame list as CSV, as plants keep them."""

import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.survey.survey_file import read_survey

LINES = """\
tag;dn;lagging_material;lagging_thickness_mm;cladding;fluid_temperature_C;u_fluid_temperature_C
HS-101;100;mineral_wool_pipe_section;50,5;painted_steel;165,0;1,5
CW-7;50;mineral_wool_pipe_section;30;weathered_galvanised;6;
"""
FRAMES = """\
file;time;air_temperature_C;camera_emissivity;sun_on_pipe;Crew
frames/f01.csv;2026-03-18T09:40:00+01:00;21,5;1,0;no;early
frames/f02.csv;2026-03-18T09:52:00+01:00;unknown;;;late
"""


@pytest.fixture
def listed(survey_folder):
    """The survey with its lines and frames in CSVs."""
    text = (survey_folder.root / "survey.toml").read_text()
    text = text.split("[[line]]")[0].replace(
        "[site]", 'line_list = "lines.csv"\nframe_list = "frames.csv"\n[site]'
    )
    survey_folder.write("survey.toml", text)
    return survey_folder.write("lines.csv", LINES).write("frames.csv", FRAMES)


def commas(text):
    return text.replace(",", ".").replace(";", ",")


@pytest.mark.parametrize(
    "written",
    [
        LINES.encode(),
        b"\xef\xbb\xbf" + LINES.encode(),
        LINES.encode("utf-16"),
        LINES.replace("\n", "\r\n").encode(),
        LINES.replace(";", "\t").encode(),
        commas(LINES).encode(),
        ("# our list\n\n" + LINES).encode(),
        LINES.replace("tag;dn", "Tag;DN").encode(),
        LINES.replace("lagging_thickness_mm", "lagging thickness mm").encode(),
    ],
)
def test_the_line_list_in_every_usual_kind_of_csv(listed, written):
    survey = read_survey(listed.write("lines.csv", written).root)
    steam = survey.lines["HS-101"]
    assert steam.layers[0].thickness.value == pytest.approx(0.0505)
    assert (steam.inside_temperature.value, steam.inside_temperature.u) == (438.15, 1.5)
    assert survey.lines["CW-7"].inside_temperature.u == 2.0
    assert "lines.csv" in survey.digests


def test_the_frame_list_overrides_and_keeps_what_it_does_not_know(listed):
    survey = read_survey(listed.root)
    first, second = survey.frames
    assert first.conditions.air_temperature.value == pytest.approx(294.65)
    assert first.conditions.air_temperature.u == 0.5
    assert first.conditions.sun_on_pipe is False
    assert first.recording.emissivity == 1.0
    assert first.time.isoformat() == "2026-03-18T09:40:00+01:00"
    assert second.conditions.air_temperature is None
    assert second.recording.emissivity == 0.95
    assert (first.extra, second.extra) == ({"Crew": "early"}, {"Crew": "late"})
    question = [f for f in survey.faults if "column 'Crew' is no key and is not used" in f.found]
    assert [f.severity for f in question] == ["question"]


def test_lists_and_tables_add_up(listed):
    text = (listed.root / "survey.toml").read_text()
    listed.write("survey.toml", text + '[[line]]\ntag = "X-1"\nemissivity = 0.9\ndn = 50\n')
    assert list(read_survey(listed.root).lines) == ["X-1", "HS-101", "CW-7"]


def test_numbered_columns_are_layers(listed):
    listed.write(
        "lines.csv",
        "tag;dn;lagging_1_material;lagging_1_thickness_mm;lagging_2_material;"
        "lagging_2_thickness_mm;u_lagging_2_thickness_mm;cladding;fluid_temperature_C\n"
        "HS-101;100;calcium silicate;25;mineral wool;50;4;painted_steel;165\n"
        "CW-7;50;calcium silicate;25;;;;painted_steel;6\n",
    )
    lines = read_survey(listed.root).lines
    assert [layer.thickness.value for layer in lines["HS-101"].layers] == [0.025, 0.05]
    assert lines["HS-101"].layers[1].thickness.u == pytest.approx(0.004)
    assert len(lines["CW-7"].layers) == 1


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("50,5", "-50,5", "lines.csv:2: line in row 2 (HS-101).lagging_thickness_mm: "
         "lagging_thickness_mm is -50.5; expected 0 < lagging_thickness <= 1000 [mm]"),
        ("165,0", "1.165,0", "fluid_temperature_C is the text '1.165,0'; expected a number"),
        ("165,0", "about 165", "fluid_temperature_C is the text 'about 165'; expected a number"),
        ("painted_steel", "pinted_steel", "lines.csv:2: line in row 2 (HS-101).cladding: cladding "
         "is 'pinted_steel'"),
    ],
)  # fmt: skip
def test_a_faulty_row_is_named_by_file_and_line(listed, old, new, message):
    listed.write("lines.csv", LINES.replace(old, new))
    survey = read_survey(listed.root)
    assert list(survey.lines) == ["CW-7"]
    assert any(message in str(fault) for fault in survey.faults), survey.faults


@pytest.mark.parametrize(
    ("content", "message"),
    [
        ("", "lines.csv: the file is empty; expected a head row of keys of line"),
        ("name;dn\nA;50\n", "lines.csv:1: there is no column tag; expected one (tag of the line"),
        (LINES.replace(";", ","), "lines.csv:2: the row has 10 cells; expected 7, as in the head "
         "row; with decimal commas separate the columns by semicolons"),
        ("tag;dn;DN\nA;50;50\n", "lines.csv:1: dn: two columns have this name"),
        (b"tag;dn\n\x00\x01\x02", "lines.csv: the file is not text"),
        ('tag;dn\n"A;50\n', "lines.csv:2: not a readable CSV: unexpected end of data"),
    ],
)  # fmt: skip
def test_a_list_that_cannot_be_read_stops_the_survey(listed, content, message):
    listed.write("lines.csv", content)
    with pytest.raises(SurveyFileError) as caught:
        read_survey(listed.root)
    assert message in str(caught.value)


def test_a_column_close_to_a_key_says_so(listed):
    listed.write("lines.csv", LINES.replace("cladding", "claddng", 1))
    survey = read_survey(listed.root)
    text = "\n".join(str(fault) for fault in survey.faults)
    assert "column 'claddng' is no key and is not used" in text
    assert "nearest: cladding" in text


def test_a_tag_both_in_table_and_list_is_used_twice(listed):
    text = (listed.root / "survey.toml").read_text()
    listed.write("survey.toml", text + '[[line]]\ntag = "CW-7"\nemissivity = 0.9\ndn = 50\n')
    survey = read_survey(listed.root)
    assert list(survey.lines) == ["HS-101"]
    assert any("also lines.csv:3" in str(fault) for fault in survey.faults)
