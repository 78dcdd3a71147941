import re
from dataclasses import replace
from xml.etree import ElementTree

import numpy as np
import pytest

from cladwatt.quantities import Remark
from cladwatt.report.strip_face import common_limits
from cladwatt.report.strip_picture import strip_svg, temperature_limits
from cladwatt.report.strip_series import left_out_runs, resample_columns, series_of
from cladwatt.report.strip_sheet import LEFT, RIGHT
from cladwatt.results.assessment import Interval

SVG = "{http://www.w3.org/2000/svg}"


def drawn(region, **options):
    return ElementTree.fromstring(strip_svg(region, **({"air_temperature": None} | options)))


def words(root):
    return [item.text for item in root.iter(f"{SVG}text")]


def curve(root, index):
    """Points of the index-th unfilled solid polyline."""
    paths = [p for p in root.iter(f"{SVG}path") if p.get("fill") == "none"
             and p.get("stroke-dasharray") is None]  # fmt: skip
    return np.array([p.split() for p in re.split("[ML]", paths[index].get("d"))[1:]], dtype=float)


def test_the_curve_is_the_loss_on_the_axis_of_metres(invented):
    region = invented.region()
    points, table = curve(drawn(region), 0), region.stations
    np.testing.assert_allclose(
        points[:, 0], LEFT + table.station / 8.0 * (RIGHT - LEFT), atol=0.006
    )
    slope, offset = np.polyfit(table.heat_loss, points[:, 1], 1)
    assert slope < 0
    np.testing.assert_allclose(points[:, 1], slope * table.heat_loss + offset, atol=0.006)


def test_all_parts_are_there(invented):
    root = drawn(invented.region())
    said = words(root)
    for needed in ("quantified", "loss, W/m", "station along the line, m", "surface, °C",
                   "air 20.0", "as specified", "s1: 3.00 to 4.20 m, P\u00a098\u00a0%"):  # fmt: skip
        assert any(needed in word.replace("P ", "P\u00a0") for word in said), needed
    assert "NS-101 · region north-1 · frame f03" in said
    assert root.find(f"{SVG}title").text == "NS-101 · region north-1 · frame f03"
    description = root.find(f"{SVG}desc").text
    assert "140\u00a0W/m (119\u00a0to\u00a0165)" in description
    assert "s1: 3.00 to 4.20 m" in description


def test_letters_are_legible_on_a_printed_page(invented):
    root = drawn(invented.region())
    millimetres_per_unit = 182 / float(root.get("viewBox").split()[2])  # A4 less its margins
    sizes = [float(t.get("font-size", 14)) for t in root.iter(f"{SVG}text")]
    points = min(sizes) * millimetres_per_unit / 0.3528
    assert points >= 6.5


def test_a_gain_is_drawn_upwards(invented):
    region = invented.region(gain=True)
    series = series_of(region)
    assert series.loss.min() > 0
    assert np.all(series.loss_low <= series.loss)
    assert np.all(series.loss <= series.loss_high)
    assert "gain, W/m" in words(drawn(region))


def test_not_quantified_stands_in_the_place_of_the_curves(invented):
    reason = Remark("not_quantified.interval_too_wide", (("relative_width", 2.4),))
    root = drawn(invented.region(level="not quantified", reason=reason))
    said = " ".join(words(root))
    assert "not quantified" in said
    assert "240" in said
    assert "loss, W/m" not in said
    assert [p for p in root.iter(f"{SVG}path") if p.get("fill-opacity")] == []


def test_without_resistance_the_reason_stands_there(invented):
    region = invented.region(known=False, missing=(Remark("missing.inside_temperature"),))
    said = " ".join(words(drawn(region)))
    assert "Without the inside temperature" in said
    assert "sound lagging" not in said


def test_gaps_are_hatched_and_break_the_curve(invented):
    region = invented.region(stations=invented.stations(gap=(5.2, 5.7)))
    (gap,) = left_out_runs(region, 0.0, 8.0)
    assert gap == pytest.approx((5.2, 5.7), abs=0.051)
    root = drawn(region)
    assert any("hatch" in r.get("fill", "") for r in root.iter(f"{SVG}rect"))
    assert "left out" in words(root)
    assert np.diff(curve(root, 0)[:, 0]).max() < 10
    assert left_out_runs(invented.region(), 0.0, 8.0) == []


def test_falling_stations_give_the_same_picture(invented):
    region = invented.region()
    table = region.stations
    turned = replace(table, **{name: values[::-1] for name, values in vars(table).items()})
    other = replace(region, stations=turned, strip_temperature=region.strip_temperature[:, ::-1])
    assert strip_svg(other, air_temperature=None) == strip_svg(region, air_temperature=None)


def test_columns_follow_uneven_stations(invented):
    table = invented.stations(count=4, length=8.0)
    uneven = replace(
        table, station=np.array([0.5, 1.5, 3.0, 7.0]), length=np.array([1.0, 1.0, 2.0, 2.0])
    )
    columns = resample_columns(invented.region(stations=uneven), low=0.0, high=8.0)
    assert columns.tolist() == [0, 1, 2, 2, -1, -1, 3, 3]


def test_scale_is_shared_when_limits_are_given(invented):
    one, other = invented.region(), invented.region(stations=invented.stations(bump=(-9, -8)))
    low, high = temperature_limits(one, other)
    assert low <= 317 <= high
    assert (high - low) > 20
    assert temperature_limits(replace(one, strip_temperature=None)) is None


def test_missing_fields_do_not_stop_the_picture(invented):
    region = invented.region(stretches=(), strip_temperature=None, air_temperature=None)
    assert "No temperature field was kept for this region." in words(drawn(region))
    table = invented.stations()
    lost = replace(table, heat_loss=np.full(table.station.shape, np.nan))
    assert "No loss per metre." in words(drawn(invented.region(stations=lost)))
    endless = replace(
        table, resistance_high=np.full(table.station.shape, np.inf),
        resistance_ratio=np.full(table.station.shape, np.inf),
    )  # fmt: skip
    drawn(invented.region(stations=endless))
    drawn(invented.region(stations=invented.stations(count=1), start_station=0, end_station=0))


def test_hostile_names_stay_text(invented):
    svg = strip_svg(
        invented.region(invented.nasty, tag=invented.nasty + "\x00\x1b"), air_temperature=None
    )
    root = ElementTree.fromstring(svg)
    assert [e for e in root.iter() if "script" in e.tag] == []
    assert max(len(word) for word in words(root)) < 120


def test_nothing_is_fetched(invented):
    root = drawn(invented.region())
    for element in root.iter():
        for name, value in element.attrib.items():
            if name.endswith("href"):
                assert value.startswith("data:image/png;base64,")


def test_labels_of_many_stretches_do_not_overlap(invented):
    region = next(r for r in invented.assessment().regions if r.region_id == "north-2")
    labels = [t for t in drawn(region).iter(f"{SVG}text") if re.match(r"s\d: ", t.text)]
    assert len(labels) == 4
    boxes = [(float(t.get("x")), float(t.get("y")), 0.5 * 13 * len(t.text)) for t in labels]
    for i, (x1, y1, w1) in enumerate(boxes):
        for x2, y2, w2 in boxes[i + 1 :]:
            assert abs(y1 - y2) > 12 or abs(x1 - x2) > (w1 + w2) / 2


def test_more_stretches_than_labels_find_place_keep_their_dimension_lines(invented):
    (one,) = invented.region().stretches
    many = tuple(
        replace(one, id=f"s{i}", start=Interval(i / 8, i / 8 - 0.01, i / 8 + 0.01),
                end=Interval(i / 8 + 0.06, i / 8 + 0.05, i / 8 + 0.07))
        for i in range(1, 60)
    )  # fmt: skip
    root = drawn(invented.region(stretches=many))
    edges = [e for e in root.iter(f"{SVG}line") if e.get("stroke-dasharray") == "10 3 2 3"]
    assert len(edges) == 2 * len(many)
    assert all(f"s{i}: " in root.find(f"{SVG}desc").text for i in range(1, 60))


def test_one_bare_stretch_does_not_take_the_colours_from_the_rest_of_its_line(invented):
    plain, near = invented.region("a"), invented.region("b", stations=invented.stations(seed=8))
    bare = invented.region("c")
    bare = replace(bare, strip_temperature=bare.strip_temperature + 200.0)
    assert common_limits(plain, [plain, near]) == temperature_limits(plain, near)
    assert common_limits(plain, [plain, near, bare]) == temperature_limits(plain)
    assert common_limits(bare, [plain, near, bare]) == temperature_limits(plain, near, bare)


def test_without_a_scale_the_strip_counts_pixels(invented):
    region = invented.region(level="not quantified", reason=Remark("not_quantified.no_diameter"))
    table, nothing = region.stations, np.full(region.stations.station.shape, np.nan)
    unscaled = replace(
        region, stations=replace(table, station=nothing, length=nothing),
        start_station=np.nan, end_station=np.nan, stretches=(),
    )  # fmt: skip
    root = drawn(unscaled)
    said = words(root)
    assert "along the drawn line, pixels" in said
    assert "station along the line, m" not in said
    # the invented stations lie 3 pixels apart: 159 steps
    assert "400" in said
    assert "from 0.0 to 477.0 pixels" in root.find(f"{SVG}desc").text
    assert "nan" not in strip_svg(unscaled, air_temperature=None).lower()
