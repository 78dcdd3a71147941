"""Regions files: what is read, what is refused and how it is said, and the round trip."""

import json
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cladwatt.errors import RegionError
from cladwatt.survey.checking import check_region_against_frame
from cladwatt.survey.fault_list import FaultList
from cladwatt.survey.region import Region
from cladwatt.survey.region_format import parse_regions, region_text, write_regions
from cladwatt.survey.region_geometry import first_crossing, ring_area
from cladwatt.survey.survey_file import read_survey


def parsed(*features, frame="f01"):
    faults = FaultList()
    data = json.dumps({"type": "FeatureCollection", "features": list(features)}).encode()
    return parse_regions(data, f"regions/{frame}.geojson", frame, faults), faults.faults


def test_a_centreline_with_one_width(drawn):
    (region,), faults = parsed(drawn())
    assert faults == []
    assert region.centreline == ((5.0, 40.0), (150.0, 42.0))
    assert region.widths == (20.0, 20.0)
    assert (region.role, region.tag, region.frame_id, region.feature) == (
        "pipe",
        "HS-101",
        "f01",
        1,
    )


def test_widths_per_vertex_start_and_direction(drawn):
    (region,), _ = parsed(
        drawn(width_px=None, widths_px=[18, 22.5], start_m=12.5, direction="backward")
    )
    assert region.widths == (18.0, 22.5)
    assert (region.start, region.direction) == (12.5, -1)


def test_whether_a_direction_was_declared_is_kept(drawn, box):
    # a tracer's clock position looks along growing stations, which an outline does not order
    (plain, forward, backward, outline), _ = parsed(
        drawn("a"), drawn("b", direction="forward"), drawn("c", direction="backward"),
        drawn("d", width_px=None, geometry=box(10, 10, 30), direction="forward"),
    )  # fmt: skip
    directed = [one.is_directed for one in (plain, forward, backward, outline)]
    assert directed == [False, True, True, False]


def test_an_outline_with_a_hole(drawn, box):
    outline = box(10, 10, 30)
    outline["coordinates"].append(box(15, 15, 5)["coordinates"][0])
    (region,), faults = parsed(drawn(width_px=None, geometry=outline))
    assert faults == []
    assert region.outline == ((10, 10), (40, 10), (40, 40), (10, 40))
    assert len(region.holes) == 1


@pytest.mark.parametrize(
    ("role", "written", "value", "u"),
    [
        ("foil", {"value_C": 21.5, "u_value_C": 0.5}, 294.65, 0.5),
        ("contact", {"value_F": 212}, 373.15, 1.5),
        ("background", {"value_K": 290}, 290.0, 1.5),
        ("tape", {"value": 0.95, "u_value": 0.02}, 0.95, 0.02),
        ("tape", {"value": 0.95}, 0.95, 0.015),
    ],
)
def test_readings_have_the_unit_of_their_role(drawn, box, role, written, value, u):
    (region,), faults = parsed(
        drawn(role=role, tag=None, width_px=None, geometry=box(5, 5), **written)
    )
    assert faults == []
    assert region.value.value == pytest.approx(value)
    assert region.value.u == pytest.approx(u)


def test_a_known_length_is_a_line_without_width(drawn):
    (region,), faults = parsed(drawn(role="known_length", tag=None, width_px=None, value_m=2.5))
    assert faults == []
    assert region.widths is None
    assert region.value.value == 2.5


def test_the_id_may_be_the_features_own(drawn):
    one = drawn()
    del one["properties"]["id"]
    (region,), _ = parsed(one | {"id": 17})
    assert region.id == "17"


BOW_TIE = {"type": "Polygon", "coordinates": [[[0, 0], [20, 20], [20, 0], [0, 20], [0, 0]]]}
OPEN = {"type": "Polygon", "coordinates": [[[0, 0], [20, 0], [20, 20], [0, 20]]]}
LOOP = {"type": "LineString", "coordinates": [[0, 0], [50, 0], [50, 20], [20, -20]]}
MULTI = {"type": "MultiLineString", "coordinates": [[[0, 0], [9, 9]]]}
SPECK = {"type": "Polygon", "coordinates": [[[5, 5], [7, 5], [7, 7], [5, 7], [5, 5]]]}


@pytest.mark.parametrize(
    ("changed", "message"),
    [
        ({"geometry": LOOP}, "feature 1 (id 'east'): the centreline crosses itself (segments 1 and "
         "3); expected a line that does not"),
        ({"geometry": BOW_TIE, "width_px": None}, "the outline crosses itself (sides 1 and 3)"),
        ({"geometry": OPEN, "width_px": None}, "the outline is not closed; expected its first"),
        ({"geometry": SPECK, "width_px": None}, "too few pixels: the outline encloses 4; expected "
         "at least 9"),
        ({"geometry": MULTI}, "geometry is 'MultiLineString'; expected a LineString (with a width) "
         "or a Polygon; draw each part as a feature of its own"),
        ({"geometry": {"type": "Point", "coordinates": [3, 4]}}, "draw a small Polygon"),
        ({"geometry": {"type": "GeometryCollection", "geometries": []}}, "'GeometryCollection'"),
        ({"geometry": None}, "geometry is None; expected a LineString or Polygon"),
        ({"geometry": {"type": "LineString", "coordinates": [[3, 4]]}}, "has 1 points; expected "
         "at least 2"),
        ({"geometry": {"type": "LineString", "coordinates": [[3, 4], [3, 4]]}}, "point 2 of the "
         "centreline repeats the one before"),
        ({"geometry": {"type": "LineString", "coordinates": [[3, 4], [3, 4, 5]]}}, "point 2 of the "
         "centreline is [3, 4, 5]; expected [x, y] in pixels"),
        ({"geometry": {"type": "LineString", "coordinates": [[3, 4], [True, 9]]}}, "is true; "
         "expected a number"),
        ({"geometry": {"type": "LineString", "coordinates": [[3, 4], ["8", 9]]}}, "the text '8'"),
        ({"geometry": {"type": "LineString", "coordinates": [[3, 4], [1e300, 9]]}}, "expected "
         "pixels"),
        ({"width_px": None}, "a LineString has no width; expected width_px, or widths_px"),
        ({"width_px": 0}, "width_px is 0; expected 0 < width"),
        ({"width_px": True}, "width_px is true; expected a number"),
        ({"widths_px": [3, 4]}, "width_px and widths_px are both given"),
        ({"width_px": None, "widths_px": [3]}, "has 1 numbers and the centreline 2 points"),
        ({"width_px": None, "widths_px": [3, -4]}, "number 2 of widths_px is -4"),
        ({"geometry": {"type": "Polygon", "coordinates": [[[0, 0], [9, 0], [9, 9], [0, 0]]]}},
         "a Polygon has width_px; delete it"),
        ({"role": "pip"}, "role is 'pip'; expected one of \"pipe\""),
        ({"role": None}, "role: role is missing"),
        ({"tag": None}, "a pipe region has no tag"),
        ({"id": None}, "feature 1: id: id is missing"),
        ({"id": "  "}, "id is empty"),
        ({"id": 7.5}, "id is 7.5; expected text in quotes"),
        ({"emissivity": 1.3}, "emissivity is 1.3; expected 0 < emissivity <= 1"),
        ({"outside_diameter": 200}, "says no unit; expected outside_diameter_mm or"),
        ({"lagging_thickness_mm": -3}, "expected 0 < lagging_thickness <= 1000 [mm]"),
        ({"direction": -1}, "direction is -1; expected text in quotes"),
        ({"lagged": "yes"}, "lagged is 'yes'; expected true or false"),
        ({"start_mm": "12,5"}, "expected a number with a decimal point, 12.5, without quotes"),
        ({"widht_px": 4}, "there is no key 'widht_px' here; expected a key of a pipe region "
         "(nearest: width_px"),
        ({"role": "foil", "value": 20}, "value says no unit; expected value_C or value_K"),
        ({"role": "known_length"}, "a known length has no value"),
        ({"role": "tape", "value": 1.2}, "value is 1.2; expected 0 < value <= 1"),
    ],
)  # fmt: skip
def test_a_faulty_feature_is_left_out_and_named(drawn, changed, message):
    regions, faults = parsed(drawn(**changed), drawn("sound"))
    assert [region.id for region in regions] == ["sound"]
    texts = [str(fault) for fault in faults]
    assert any(message in text for text in texts), texts
    assert all(fault.frame_id == "f01" and fault.region_id for fault in faults)


def test_every_fault_of_a_file_is_named_at_once(drawn):
    regions, faults = parsed(drawn("a", width_px=-1), drawn("b", role="x"), {"type": "Thing"}, 3)
    assert regions == []
    assert {fault.where.split(":")[0].split(" (")[0] for fault in faults} == {
        f"feature {number}" for number in (1, 2, 3, 4)
    }


@pytest.mark.parametrize(
    ("data", "message"),
    [
        (b"", "the file is empty"),
        (b'{"type": "FeatureCollection", "features": [', "regions/f01.geojson:1: not valid JSON: "
         "Expecting value at column 44"),
        (b'{"type": "Feature"}', "the file holds 'Feature'; expected a FeatureCollection"),
        (b"[]", "expected a FeatureCollection"),
        (b'{"type": "FeatureCollection"}', "features is None; expected a list"),
        (b'{"type": "FeatureCollection", "features": [{"a": NaN}]}', "a number is NaN"),
        (b'{"type": "FeatureCollection", "type": "b"}', "the key 'type' stands twice"),
        (b"\xff\xfe\x00\x01", "the text is not UTF-8"),
        (b"[" * 100_000, "nested too deeply"),
        (b'{"type": "FeatureCollection", "features": [' + b"9" * 5000 + b"]}", "not readable JSON"),
    ],
)  # fmt: skip
def test_a_broken_file_is_one_fault_of_its_frame(data, message):
    faults = FaultList()
    assert parse_regions(data, "regions/f01.geojson", "f01", faults) == []
    (fault,) = faults.faults
    assert message in str(fault)
    assert (fault.frame_id, fault.region_id) == ("f01", None)


# --- against the rest of the survey -------------------------------------------------------------


def test_an_unknown_tag(survey_folder, drawn):
    survey_folder.draw(drawn(tag="HS-102"))
    survey = read_survey(survey_folder.root)
    assert [region.id for region in survey.regions] == ["west"]
    assert "there is no line 'HS-102'; expected a tag of the line list (nearest: HS-101" in str(
        survey.faults[0]
    )


def test_an_id_used_twice_in_one_file_and_across_files(survey_folder, drawn):
    survey_folder.draw(drawn("east"), drawn("EAST"))
    survey_folder.draw(drawn("east", "CW-7"), frame="f02")
    survey = read_survey(survey_folder.root)
    assert [region.feature for region in survey.regions] == [1]
    texts = [str(fault) for fault in survey.faults]
    assert (
        "feature 2 (id 'EAST'): id: the id 'EAST' is used already by feature 1 of regions/f01"
        in (texts[0])
    )
    assert texts[1].startswith("regions/f02.geojson: feature 1 (id 'east')")


def test_a_regions_file_of_no_frame(survey_folder, drawn):
    survey_folder.draw(drawn("north"), frame="f11")
    (fault,) = read_survey(survey_folder.root).faults
    assert "regions/f11.geojson: there is no frame 'f11'" in str(fault)


def test_a_frame_on_which_nothing_is_drawn_is_asked_about(survey_folder):
    (survey_folder.root / "regions/f02.geojson").unlink()
    (fault,) = read_survey(survey_folder.root).faults
    assert fault.severity == "question"
    assert "nothing is drawn on frame 'f02'" in str(fault)


def test_an_overridden_thickness_needs_a_single_layer(survey_folder, drawn):
    survey_folder.draw(drawn(lagging_thickness_mm=40))
    assert read_survey(survey_folder.root).faults == ()
    survey_folder.edit(
        'lagging_material = "mineral_wool_pipe_section"\nlagging_thickness_mm = 50',
        'layers = [{ material = "mineral wool", thickness_mm = 25 }, '
        '{ material = "mineral wool", thickness_mm = 25 }]',
    )
    (fault,) = read_survey(survey_folder.root).faults
    assert "line 'HS-101' has 2 layers" in str(fault)


def test_an_overridden_emissivity_moves_the_total_one_too(survey_folder, drawn):
    survey_folder.draw(drawn(emissivity=0.8))
    survey = read_survey(survey_folder.root)
    cladding = survey.lines["HS-101"].cladding
    move = 0.8 - cladding.band_emissivity.value
    region = survey.regions_of("f01")[0]
    assert region.total_emissivity.value == pytest.approx(cladding.total_emissivity.value + move)


# --- against the frame --------------------------------------------------------------------------

LINE = Region("r", "f01", "pipe", centreline=((10.0, 40.0), (150.0, 40.0)), widths=(20.0, 20.0))


@pytest.mark.parametrize(
    ("points", "found"),
    [
        (((10.0, 40.0), (150.0, 40.0)), None),
        (((-1.5, 40.0), (160.5, 40.0)), None),
        (((10.0, 40.0), (170.0, 40.0)), "point 2 at (170, 40) lies outside its frame"),
        (((10.0, -5.0), (150.0, 40.0)), "point 1 at (10, -5) lies outside its frame"),
        (((500.0, 400.0), (600.0, 400.0)), "it lies outside its frame"),
    ],
)
def test_a_pipe_must_lie_inside_its_frame(points, found):
    fault = check_region_against_frame(replace(LINE, centreline=points), (80, 160))
    assert (fault.found if fault else None) == found
    if fault:
        assert "the frame is 160 x 80 pixels, x 0 to 159, y 0 to 79" in fault.expected
        assert (fault.region_id, fault.frame_id) == ("r", "f01")


def test_what_only_hides_may_hang_over_the_edge():
    outline = ((150.0, 10.0), (200.0, 10.0), (200.0, 40.0), (150.0, 40.0))
    region = Region("r", "f01", "leave_out", outline=outline)
    assert check_region_against_frame(region, (80, 160)) is None
    assert check_region_against_frame(replace(region, role="tape"), (80, 160)) is not None


def test_too_few_pixels():
    region = replace(LINE, centreline=((10.0, 40.0), (12.0, 40.0)), widths=(1.0, 1.0))
    fault = check_region_against_frame(region, (80, 160))
    assert fault.found.startswith("too few pixels: it covers ")


# --- writing ------------------------------------------------------------------------------------


def test_read_write_read_gives_equal_regions(survey_folder, drawn, box, tmp_path):
    survey_folder.draw(
        drawn("a", note="Ventil – süd \U0001f527", start_m=3.3, direction="backward"),
        drawn("b", width_px=None, widths_px=[18, 22.5], outside_diameter_mm=215.3,
              inclination_deg=72.5),
        drawn("c", width_px=None, geometry=box(5, 5, 20), emissivity=0.31, u_emissivity=0.05,
              total_emissivity=0.33, lagging_thickness_mm=41.7),
        drawn("d", role="foil", tag=None, width_px=None, geometry=box(60, 5), value_C=20.9),
        drawn("e", role="known_length", tag=None, width_px=None, value_m=2.51, u_value_m=0.003),
        drawn("f", role="component", width_px=None, geometry=box(90, 5), kind="valve",
              lagged=False),
        drawn("g", direction="forward"),
    )  # fmt: skip
    first = read_survey(survey_folder.root).regions_of("f01")
    assert len(first) == 7
    path = tmp_path / "f01.geojson"
    write_regions(path, first)
    faults = FaultList()
    again = parse_regions(path.read_bytes(), "f01.geojson", "f01", faults)
    assert faults.faults == []
    assert tuple(again) == first


def test_an_emissivity_lent_by_the_line_is_not_written(survey_folder, drawn):
    survey_folder.draw(drawn(emissivity=0.8))
    text = region_text(read_survey(survey_folder.root).regions_of("f01"))
    assert json.loads(text)["features"][0]["properties"]["emissivity"] == 0.8
    assert "total_emissivity" not in text


def test_a_property_of_another_program_is_asked_about_but_harmless(drawn):
    regions, (fault,) = parsed(drawn(layer_colour="red"))
    assert len(regions) == 1
    assert fault.severity == "question"
    assert "there is no key 'layer_colour' here and it is not used" in str(fault)


coordinate = st.floats(-1e4, 1e4, allow_nan=False)


@given(
    points=st.lists(st.tuples(coordinate, coordinate), min_size=2, max_size=2, unique=True),
    width=st.floats(0.5, 500),
    kelvin=st.floats(200, 400),
    u=st.floats(0, 10),
)
def test_any_region_survives_the_round_trip(points, width, kelvin, u):
    feature = {
        "type": "Feature",
        "properties": {"id": "r", "role": "contact", "width_px": width, "value_K": kelvin,
                       "u_value_K": u},
        "geometry": {"type": "LineString", "coordinates": [list(point) for point in points]},
    }  # fmt: skip
    regions, faults = parsed(feature)
    if not regions:
        assert "repeats the one before" in str(faults[0])
        return
    again, _ = parsed(*json.loads(region_text(regions))["features"])
    assert again == regions


def test_a_failed_write_leaves_the_old_file(tmp_path, monkeypatch):
    path = tmp_path / "f01.geojson"
    write_regions(path, [LINE])
    before = path.read_bytes()
    monkeypatch.setattr("os.fsync", lambda _: (_ for _ in ()).throw(OSError(28, "no space")))
    with pytest.raises(OSError, match="no space"):
        write_regions(path, [replace(LINE, id="other")])
    assert path.read_bytes() == before
    assert list(tmp_path.iterdir()) == [path]


def test_a_region_without_geometry_cannot_be_written(tmp_path):
    with pytest.raises(RegionError, match="neither centreline nor outline"):
        write_regions(tmp_path / "f.geojson", [Region("r", "f01", "pipe")])


# --- geometry -----------------------------------------------------------------------------------


def test_crossings_against_brute_force():
    """A polyline of random points: orientation tests on every pair, written out differently."""

    def orient(a, b, c):
        return np.sign(np.linalg.det([[*a, 1], [*b, 1], [*c, 1]]))

    random = np.random.default_rng(11)
    for _ in range(200):
        points = random.uniform(0, 10, (int(random.integers(3, 7)), 2))
        expected = None
        pairs = [(p, points[i + 1]) for i, p in enumerate(points[:-1])]
        for i, (a, b) in enumerate(pairs):
            for j in range(i + 2, len(pairs)):
                c, d = pairs[j]
                if orient(a, b, c) != orient(a, b, d) and orient(c, d, a) != orient(c, d, b):
                    expected = expected or (i + 1, j + 1)
        assert first_crossing([tuple(p) for p in points], closed=False) == expected


def test_the_area_of_a_triangle():
    assert ring_area([(0, 0), (4, 0), (0, 3)]) == 6
