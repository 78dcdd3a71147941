"""Stretches as GeoJSON: closed rings in pixel coordinates, properties named as the columns."""

import json

from cladwatt.results.columns import STRETCH_COLUMNS
from cladwatt.results.file_names import file_stems
from cladwatt.results.geojson_file import stretch_collection, write_stretch_files


def refuse_constant(word):
    raise AssertionError(f"{word} stands in the GeoJSON")


def test_one_file_per_frame_also_where_nothing_was_found(odd, tmp_path):
    stems = file_stems(frame.frame_id for frame in odd.frames)
    write_stretch_files(odd, tmp_path / "stretches", stems)
    found = {
        path.stem: json.loads(path.read_text("utf-8"), parse_constant=refuse_constant)
        for path in (tmp_path / "stretches").iterdir()
    }
    assert set(found) == set(stems.values())
    assert all(collection["type"] == "FeatureCollection" for collection in found.values())
    assert found[stems["../Halle 2/CON"]]["features"] == []
    assert len(found["f01"]["features"]) == 2


def test_feature(odd):
    feature, line = stretch_collection(odd.frames[0])["features"]
    assert feature["geometry"] == {
        "type": "Polygon",
        "coordinates": [[[10.0, 20.5], [30.25, 20.0], [30.0, 40.0], [10.0, 20.5]]],
    }
    properties = feature["properties"]
    assert list(properties) == [column.name for column in STRETCH_COLUMNS]
    assert properties["tag"] == odd.regions[0].tag
    assert properties["start_high_m"] == 13.123456789
    assert properties["excess_high_W"] is None
    # an outline of two points is no polygon
    assert line["geometry"] is None
