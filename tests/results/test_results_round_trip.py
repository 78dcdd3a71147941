"""Written and read back, an assessment is the same; equal ones leave equal bytes."""

import dataclasses
import json
import math
import typing
from pathlib import Path

import jsonschema
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cladwatt.errors import ResultsError
from cladwatt.results.assessment import (
    Assessment,
    ComponentResult,
    FrameResult,
    Interval,
    LineTotal,
    RegionResult,
    StationTable,
    Stretch,
)
from cladwatt.results.fields import FIELDS, edge_name, edge_value, inside_value
from cladwatt.results.json_file import make_schema, schema_text
from cladwatt.results.store import read_results, write_results


def refuse_constant(word):
    raise AssertionError(f"{word} stands in the JSON")


def loaded(folder):
    text = (folder / "assessment.json").read_text("utf-8")
    return json.loads(text, parse_constant=refuse_constant)


def changed(folder, **changes):
    """Change top-level keys of a written assessment.json."""
    data = loaded(folder) | changes
    (folder / "assessment.json").write_text(json.dumps(data), "utf-8")


def tree(folder):
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


def test_reads_back_equal(odd, differ, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    assert differ(odd, read_results(folder)) == []


def test_the_comparison_sees_a_difference(odd, differ):
    other = dataclasses.replace(odd, total_gain=Interval(1.0, 0.0, math.nan))
    assert differ(odd, other)
    region = odd.regions[0]
    assert differ(region, dataclasses.replace(region, draws={"heat_loss": np.zeros(4)}))


def test_writing_what_was_read_gives_the_same_bytes(odd, tmp_path):
    first = write_results(odd, tmp_path / "one")
    before = tree(first)
    write_results(read_results(first), first)
    assert tree(first) == before


def test_equal_assessments_give_equal_bytes(odd, tmp_path):
    frames = tuple(
        dataclasses.replace(
            frame,
            seconds=frame.seconds + 3,
            regions=tuple(
                dataclasses.replace(region, draws=dict(reversed(region.draws.items())))
                for region in frame.regions
            ),
        )
        for frame in odd.frames
    )
    camera = dict(reversed(odd.camera.items()))
    twin = dataclasses.replace(odd, frames=frames, camera=camera)
    one = write_results(odd, tmp_path / "one")
    two = write_results(twin, tmp_path / "two")
    assert tree(one) == tree(two)


def test_json_names_units_and_degrees(odd, tmp_path):
    data = loaded(write_results(odd, tmp_path / "results"))
    region = data["frames"][0]["regions"][0]
    assert region["heat_loss_W_per_m"] == {"median": 101.5, "low": 80.25, "high": 130.125}
    assert region["recorded_temperature_C"] == pytest.approx(46.95, abs=1e-12)
    assert region["surface_temperature_C"]["low"] == pytest.approx(44.05, abs=1e-12)
    assert region["air_temperature_C"] == 20.0
    assert region["resistance_m_K_per_W"]["high"] is None
    assert region["verdict"]["level"] == "not quantified"
    assert region["cautions"][0] == {"key": "caution.touch", "parameters": {"temperature_C": 71.25}}
    assert data["not_finite"]["/frames/0/regions/0/resistance_m_K_per_W/high"] == "inf"
    assert data["settings"] == {"seed": 7, "draws": 4}
    assert data["inputs"]["survey.toml"] == "c" * 64


def test_json_meets_the_shipped_schema(odd, tmp_path):
    schema = json.loads(schema_text())
    validator = jsonschema.Draft202012Validator
    validator.check_schema(schema)
    data = loaded(write_results(odd, tmp_path / "results"))
    validator(schema).validate(data)
    for key in schema["properties"]:
        rest = {name: value for name, value in data.items() if name != key}
        assert not validator(schema).is_valid(rest), f"{key} may be missing"
    data["frames"][0]["regions"][0]["verdict"]["level"] = "certain"
    assert not validator(schema).is_valid(data)


def test_shipped_schema_is_that_of_the_classes():
    assert json.loads(schema_text()) == make_schema()


@pytest.mark.parametrize(
    "owner", [Assessment, ComponentResult, LineTotal, RegionResult, StationTable, Stretch]
)
def test_every_figure_of_the_results_has_a_unit_and_a_meaning(owner):
    hints = typing.get_type_hints(owner)
    figures = {
        name
        for name, hint in hints.items()
        if {float, Interval} & {hint, *typing.get_args(hint)}
        or (owner is StationTable)
        or name in ("outline", "variance_shares", "kinds")
    }
    assert set(FIELDS[owner]) == figures


def test_edge_names():
    assert edge_name(RegionResult, "heat_loss") == "heat_loss_W_per_m"
    assert edge_name(RegionResult, "resistance", "low") == "resistance_low_m_K_per_W"
    assert edge_name(StationTable, "surface_temperature_high") == "surface_temperature_high_C"
    assert edge_name(Stretch, "excess") == "excess_W"
    assert edge_name(Stretch, "start") == "start_m"
    assert edge_name(FrameResult, "shape") == "shape"


@given(st.floats(min_value=137.0, max_value=784.0))
def test_degrees_lead_back_to_the_very_kelvin(kelvin):
    assert inside_value(edge_value(kelvin)) == kelvin


def test_draws_file_is_open_to_numpy_and_names_owner_and_quantity(odd, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    with np.load(folder / "draws" / "f01.npz") as arrays:
        np.testing.assert_array_equal(arrays["nord|1|heat_loss"], [1.0, np.nan, np.inf, -2.5])
        assert arrays["nord|1|stations.station"][0] == 12.5
        np.testing.assert_array_equal(arrays["v|1|heat_loss"], [800.0, np.nan, 812.3, -1.0])
        assert int(arrays["run|seed"]) == 7
        assert int(arrays["run|draws"]) == 4


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"schema": "something else"}, "no assessment of cladwatt"),
        ({"schema_version": 99}, "schema_version is 99; this cladwatt reads 1"),
        ({"settings": {"seed": "one", "draws": 4}}, "settings.seed: found 'one'; expected a whole"),
        ({"settings": {"seed": True, "draws": 4}}, "settings.seed: found True"),
        ({"total_loss_W": 3.0}, "total_loss_W: found 3.0; expected an object or null"),
        ({"total_loss_W": {"median": 1.0, "low": 0.0}}, "total_loss_W: key 'high' is missing"),
        ({"total_loss_W": {"median": 1.0, "low": 0.0, "high": None}}, "expected a number"),
        ({"not_finite": {"/nowhere/0": "nan"}}, "not_finite: found '/nowhere/0'"),
        ({"not_finite": {"/settings/seed": "nan"}}, "not_finite: found '/settings/seed'"),
        ({"not_finite": []}, "not_finite: found"),
        ({"frames": {}, "not_finite": {}}, "frames: found {}; expected a list"),
        ({"left_out": [{"what": "pump", "id": "", "frame_id": "", "message": "", "remark": None}]},
         r"left_out\[0\].what: found 'pump'; expected 'frame' or"),
    ],
)  # fmt: skip
def test_a_changed_assessment_file_is_refused_with_its_place(odd, tmp_path, changes, message):
    folder = write_results(odd, tmp_path / "results")
    changed(folder, **changes)
    with pytest.raises(ResultsError, match=message):
        read_results(folder)


@pytest.mark.parametrize("name", ["../secret.npz", "draws/../../x.npz", "/etc/x.npz", 3, None])
def test_an_arrays_file_outside_the_folder_is_refused(odd, tmp_path, name):
    folder = write_results(odd, tmp_path / "results")
    frames = loaded(folder)["frames"]
    frames[0]["arrays_file"] = name
    changed(folder, frames=frames)
    with pytest.raises(ResultsError, match="arrays_file is"):
        read_results(folder)


def test_an_older_file_without_an_optional_key_is_read(odd, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    data = loaded(folder)
    del data["versions"]
    (folder / "assessment.json").write_text(json.dumps(data), "utf-8")
    assert read_results(folder).versions == {}


def test_results_from_before_components_are_read(odd, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    data = loaded(folder)
    del data["component_loss_W"], data["component_gain_W"]
    for frame in data["frames"]:
        del frame["components"]
    data["not_finite"] = {p: w for p, w in data["not_finite"].items() if "component" not in p}
    (folder / "assessment.json").write_text(json.dumps(data), "utf-8")
    read = read_results(folder)
    assert read.components == ()
    assert read.component_loss is None


@pytest.mark.parametrize("held", [3, {"a": 1}, [{"frame_id": "f02"}], ["v1"]])
def test_components_that_are_none_of_the_frame_are_refused(odd, tmp_path, held):
    folder = write_results(odd, tmp_path / "results")
    data = loaded(folder)
    data["frames"][0]["components"] = held
    pointers = {p: w for p, w in data["not_finite"].items() if "component" not in p}
    changed(folder, frames=data["frames"], not_finite=pointers)
    with pytest.raises(ResultsError, match=r"names another frame|components: found"):
        read_results(folder)


@pytest.mark.parametrize("keep", [0, 10, 1000, -30])
@pytest.mark.parametrize("name", ["assessment.json", "draws/f01.npz"])
def test_a_cut_file_is_refused(odd, tmp_path, name, keep):
    path = write_results(odd, tmp_path / "results") / name
    path.write_bytes(path.read_bytes()[:keep])
    with pytest.raises(ResultsError, match="is damaged"):
        read_results(path.parent if path.suffix == ".json" else path.parents[1])


def test_a_missing_file_is_refused(odd, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    (folder / "draws" / "f01.npz").unlink()
    with pytest.raises(ResultsError, match=r"f01\.npz is missing"):
        read_results(folder)
    (folder / "assessment.json").unlink()
    with pytest.raises(ResultsError, match="no results folder"):
        read_results(folder)
    with pytest.raises(ResultsError, match="is no folder"):
        read_results(Path(tmp_path / "none"))


def test_arrays_of_a_region_must_be_complete_and_of_one_length(odd, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    path = folder / "draws" / "f01.npz"
    with np.load(path) as archive:
        arrays = {name: archive[name] for name in archive.files}
    np.savez(path, **(arrays | {"r2|stations.x": np.zeros(3)}))
    with pytest.raises(ResultsError, match="region 'r2': station arrays differ in length"):
        read_results(folder)
    del arrays["r2|stations.x"]
    np.savez(path, **arrays)
    with pytest.raises(ResultsError, match=r"region 'r2': no array stations\.x"):
        read_results(folder)
