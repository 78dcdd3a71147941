"""Schemas and starter file: made from the key list, shipped, and true of what the reader takes."""

import json
import tomllib
from datetime import date, datetime

import jsonschema
import pytest

from cladwatt.survey.checking import check_survey
from cladwatt.survey.keys import REGION, SECTIONS
from cladwatt.survey.schema import SCHEMA_FOLDER, regions_schema, schema_text, survey_schema
from cladwatt.survey.starter import StarterFrame, starter_survey_toml


def as_json(value):
    """What a TOML document is as JSON."""
    return json.loads(
        json.dumps(
            value, default=lambda v: v.isoformat() if isinstance(v, (date, datetime)) else str(v)
        )
    )


@pytest.fixture(scope="module")
def survey_validator():
    return jsonschema.Draft202012Validator(survey_schema())


@pytest.fixture(scope="module")
def regions_validator():
    return jsonschema.Draft202012Validator(regions_schema())


@pytest.mark.parametrize(
    ("name", "schema"), [("survey", survey_schema()), ("regions", regions_schema())]
)
def test_the_shipped_schema_is_the_one_made_from_the_keys(name, schema):
    jsonschema.Draft202012Validator.check_schema(schema)
    shipped = (SCHEMA_FOLDER / f"{name}.schema.json").read_text("utf-8")
    assert shipped == schema_text(schema), "run cladwatt.survey.schema.write_schemas()"


def test_a_sound_survey_meets_the_schema(survey_folder, survey_validator):
    document = tomllib.loads((survey_folder.root / "survey.toml").read_text())
    assert list(survey_validator.iter_errors(as_json(document))) == []


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("emissivity = 0.95", "emissivity = 1.3"),
        ("altitude_m = 95", "altitude = 95"),
        ("altitude_m = 95", "altitude_m = true"),
        ("lagging_thickness_mm = 50", "lagging_thickness_mm = 0"),
        ('unit = "C"', 'unit = "Celsius"'),
        ("[camera]", "[kamera]"),
        ("dn = 100", "dn = 100.5"),
        ("u_air_temperature_C = 0.5", "u_air_temperature_C = -1"),
    ],
)
def test_what_the_schema_refuses_the_reader_refuses(survey_folder, survey_validator, old, new):
    survey_folder.edit(old, new)
    document = tomllib.loads((survey_folder.root / "survey.toml").read_text())
    assert list(survey_validator.iter_errors(as_json(document)))
    assert [fault for fault in check_survey(survey_folder.root) if fault.severity == "error"]


def test_regions_meet_the_schema(survey_folder, regions_validator, drawn, box):
    survey_folder.draw(
        drawn(emissivity=0.4, note=None),
        drawn("b", role="foil", tag=None, width_px=None, geometry=box(5, 5), value_C=20),
    )
    document = json.loads((survey_folder.root / "regions/f01.geojson").read_text())
    assert list(regions_validator.iter_errors(document)) == []


@pytest.mark.parametrize(
    "changed",
    [{"role": "pip"}, {"tag": None}, {"width_px": 0}, {"emissivity": 1.3}, {"lagged": "yes"},
     {"geometry": {"type": "Point", "coordinates": [1, 2]}}],
)  # fmt: skip
def test_the_regions_schema_refuses(regions_validator, drawn, changed):
    feature = drawn(**changed)
    feature["properties"] = {k: v for k, v in feature["properties"].items() if v is not None}
    document = {"type": "FeatureCollection", "features": [feature]}
    assert list(regions_validator.iter_errors(document))


def test_every_key_has_a_meaning_and_a_sound_example():
    for part in SECTIONS:
        names = [key.name for key in part.keys]
        assert len(names) == len(set(names)), part.name
        for key in part.keys:
            assert key.meaning, key.name
            if key.example:
                tomllib.loads(f"key = {key.example}")
    assert all(key.meaning for key in REGION)


# --- the starter file ---------------------------------------------------------------------------

FRAMES = (
    StarterFrame("frames/a.csv", unit="C", note="80 x 160 numbers\n18.2 to 44.9"),
    StarterFrame('frames/b "x".csv', id="b", unit="K", unit_is_sure=True, scale=0.04, offset=-9.0),
)


def test_the_starter_file_says_only_what_is_certain():
    document = tomllib.loads(starter_survey_toml(FRAMES, name='Shed "3"'))
    assert document["survey"] == {"name": 'Shed "3"'}
    assert document["frame"] == [
        {"file": "frames/a.csv"},
        {"file": 'frames/b "x".csv', "id": "b", "unit": "K"},
    ]
    assert "line" not in document


def test_the_starter_file_names_every_key_with_meaning_and_default():
    text = starter_survey_toml(())
    for part in SECTIONS:
        for key in part.keys:
            if part.name == "frame" and key.default == "as set for the whole survey":
                continue
            assert f"{key.usual} = " in text, key.name
            assert key.meaning in text


def uncommented(text):
    """The starter file with every example taken in."""
    lines = [line[1:] if line.startswith("#") and line[1:2] not in (" ", "") else line
             for line in text.splitlines()]  # fmt: skip
    text = "\n".join(lines).replace("# [[line]]", "[[line]]")
    for line in (
        "line_list = ", "frame_list = ", "nps = ", "pipe_outside_diameter_mm = ", "pipe_series = ",
        "u_pipe_outside_diameter_mm = ", "wall_temperature_C = ", "u_wall_temperature_C = ",
        "layers = ", "photo = ", "labels = ", "accuracy_coverage_factor = ", "tracer_", "u_tracer_",
        "scale = ", "offset = ", "spectral_response = ", "surroundings = ", "steam_pressure",
        "u_steam_pressure", "sky_", "u_sky_",
    ):  # fmt: skip
        text = "\n".join(row for row in text.splitlines() if not row.startswith(line))
    return text


def test_its_examples_make_a_survey_without_fault(survey_folder):
    frames = [StarterFrame(f"frames/{name}.csv", unit="C") for name in ("f01", "f02")]
    text = uncommented(starter_survey_toml(frames))
    survey_folder.write("survey.toml", text)
    survey_folder.draw()
    survey_folder.draw(frame="f02")
    errors = [str(fault) for fault in check_survey(survey_folder.root)]
    assert errors == []
