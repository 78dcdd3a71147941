"""`cladwatt tables`, `schema` and `sample`."""

import csv
import io
import json

import jsonschema
import pytest

from cladwatt.faces.cli.messages import ExitCode
from cladwatt.materials.tables import TABLE_NAMES, table_rows


def test_tables_lists_every_table(cladwatt):
    ended = cladwatt("tables")
    assert ended.code == ExitCode.DONE
    assert [line.split()[0] for line in ended.out.splitlines()] == list(TABLE_NAMES)


@pytest.mark.parametrize("name", TABLE_NAMES)
def test_a_table_is_printed_whole_with_its_sources(cladwatt, name):
    header, _, rows = table_rows(name)
    out = cladwatt("tables", name).out
    assert all(column in out.splitlines()[0] for column in header)
    assert len(out.splitlines()) >= len(rows) + 2
    _, _, sources = table_rows("sources")
    citations = {row[0]: row[2] for row in sources}
    columns = [i for i, column in enumerate(header) if i and column.endswith("source")]
    used = {part for row in rows for i in columns for part in row[i].split("|") if part}
    assert used or name == "sources"
    for source in used:
        assert f"  {source}: {citations[source]}" in out, source


def test_csv_is_the_table_itself(cladwatt):
    out = cladwatt("tables", "claddings", "--csv").out
    header, units, rows = table_rows("claddings")
    assert [tuple(row) for row in csv.reader(io.StringIO(out))] == [header, units, *rows]


def test_a_survey_with_its_own_table_shows_it(cladwatt, survey):
    shipped = cladwatt("tables", "claddings", "--csv").out.splitlines()
    (survey / "tables").mkdir()
    own = shipped[2].replace("painted_steel,", "our_green_paint,", 1)
    own = own.replace(shipped[2].split(",")[2], "our green")
    text = "\n".join([shipped[0], shipped[1], own])
    (survey / "tables" / "claddings.csv").write_text(text, encoding="utf-8")
    assert "our_green_paint" in cladwatt("tables", "claddings", "--survey", survey).out
    assert "our_green_paint" not in cladwatt("tables", "claddings").out


def test_unknown_table_names_the_known(cladwatt):
    ended = cladwatt("tables", "paints")
    assert ended.code == ExitCode.COULD_NOT
    assert "'paints'" in ended.err
    assert "claddings" in ended.err


def test_tables_of_no_survey(cladwatt, tmp_path):
    ended = cladwatt("tables", "--survey", tmp_path / "nowhere")
    assert ended.code == ExitCode.COULD_NOT
    assert "expected a survey folder" in ended.err


@pytest.mark.parametrize("name", ["survey", "regions", "assessment"])
def test_schema_is_a_schema(cladwatt, name):
    ended = cladwatt("schema", name)
    assert ended.code == ExitCode.DONE
    jsonschema.Draft202012Validator.check_schema(json.loads(ended.out))


def test_regions_schema_accepts_regions_and_refuses_others(cladwatt, survey):
    schema = json.loads(cladwatt("schema", "regions").out)
    regions = json.loads((survey / "regions" / "steam.geojson").read_text())
    jsonschema.validate(regions, schema)
    regions["features"][0]["properties"]["role"] = "pype"
    with pytest.raises(jsonschema.ValidationError):
        jsonschema.validate(regions, schema)


def test_assessment_schema_accepts_a_run(cladwatt, survey):
    schema = json.loads(cladwatt("schema", "assessment").out)
    cladwatt("assess", survey, "--draws", 100)
    jsonschema.validate(json.loads((survey / "results" / "assessment.json").read_text()), schema)


def test_unknown_schema_is_wrong_usage(cladwatt):
    ended = cladwatt("schema", "pipes")
    assert ended.code == ExitCode.WRONG_USAGE
    assert "assessment" in ended.err


def test_sample_hands_folder_and_seed_on_and_says_what_is_next(cladwatt, tmp_path, monkeypatch):
    called = []
    monkeypatch.setattr(
        "cladwatt.synthetic.sample.write_sample", lambda *given: called.append(given)
    )
    ended = cladwatt("sample", tmp_path / "demo", "--seed", 12)
    assert ended.code == ExitCode.DONE
    assert called == [(tmp_path / "demo", 12)]
    assert f"cladwatt assess {tmp_path / 'demo'}" in ended.err


def test_sample_refuses_a_folder_in_use(cladwatt, tmp_path):
    (tmp_path / "mine.txt").write_text("mine")
    ended = cladwatt("sample", tmp_path)
    assert ended.code == ExitCode.COULD_NOT
    assert "holds files already" in ended.err
