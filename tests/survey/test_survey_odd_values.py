"""Whatever stands behind a key, the survey is refused in words or read, never with a traceback."""

import itertools
import json

import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.survey.checking import check_survey
from cladwatt.survey.keys import REGION, SECTIONS
from cladwatt.survey.survey_file import read_survey

ODD = (
    "true", "-1", "0", "1", "1e308", "-inf", "nan", '""', '"unknown"', '"x"', '"1,5"', "[]",
    "[1, 2]", "{}", "{ value = 1 }", "{ value = 1, u = -1 }", '{ value = "unknown" }',
    "2026-03-18", "2026-03-18T09:00:00", "09:00:00", '[{ material = "x" }]', "[{}]",
    "9999999999999999999999", '"\\u0000"', '"../../x"', "[[[]]]",
)  # fmt: skip
HOME = {
    "line": 'tag = "HS-101"', "frame": 'file = "frames/f01.csv"', "survey": 'name = "Weaving shed"',
    "site": "altitude_m = 95", "camera": "accuracy_K = 2.0", "recording": "emissivity = 0.95",
    "conditions": "indoors = true", "format": 'unit = "C"', "model": 'convection = "churchill"',
}  # fmt: skip


def outcome(folder):
    """All faults, and whether the survey could be read."""
    try:
        return read_survey(folder.root).faults, True
    except SurveyFileError as error:
        return error.faults, False


@pytest.mark.parametrize("section", SECTIONS, ids=lambda part: part.name)
def test_odd_values_behind_every_key(survey_folder, section):
    path = survey_folder.root / "survey.toml"
    text = path.read_text()
    home = HOME[section.name]
    kept = set(home.split(" = ")[0].split())
    turn = itertools.cycle(ODD)
    for name in section.spellings:
        for _ in range(4):
            value = next(turn)
            line = f"{name} = {value}" if name in kept else f"{home}\n{name} = {value}"
            path.write_text(text.replace(home, line, 1))
            faults, is_read = outcome(survey_folder)
            assert faults or is_read, line
            assert all(fault.found and fault.expected for fault in faults), line


def test_odd_values_behind_every_property(survey_folder, drawn):
    odd = (True, -1, 0, 1e308, "", "unknown", "x", "1,5", [], [1, [2]], {}, {"value": 1}, 10**400)
    names = [written for key in REGION for written, _ in key.spellings]
    for name in (*names, "u_emissivity", "value", "value_C", "geometry"):
        for value in odd:
            try:
                one = drawn(**{name: value})
                survey_folder.draw(one)
            except ValueError:  # too long a number for JSON text
                continue
            faults, is_read = outcome(survey_folder)
            assert is_read
            assert all(fault.found and fault.expected for fault in faults)


@pytest.mark.parametrize("part", ["features", "properties", "geometry", "coordinates"])
def test_odd_json_in_every_place(survey_folder, drawn, part):
    for value in (None, True, 3, "x", [], [[]], [[[]]], [None], {}, {"type": "Polygon"}):
        one = drawn()
        document = {"type": "FeatureCollection", "features": [one]}
        if part == "features":
            document["features"] = value
        elif part == "coordinates":
            one["geometry"]["coordinates"] = value
        else:
            one[part] = value
        survey_folder.write("regions/f01.geojson", json.dumps(document))
        errors = [f for f in check_survey(survey_folder.root) if f.severity == "error"]
        assert errors or value == []
