"""The tables: one line of pandas reads them, and text comes back as it was given."""

import math
import platform

import numpy as np
import pandas as pd
import pytest

from cladwatt.flags import flag_names
from cladwatt.quantities import Remark
from cladwatt.results.columns import (
    COMPONENT_COLUMNS,
    REGION_COLUMNS,
    STATION_COLUMNS,
    STRETCH_COLUMNS,
    columns_text,
    remark_text,
)
from cladwatt.results.csv_files import cell_text, csv_line, write_tables
from cladwatt.results.file_names import file_stems
from cladwatt.results.versions import library_versions

TEXT = {"dtype": {"tag": str, "area": str}, "keep_default_na": False, "na_values": [""]}


@pytest.fixture
def tables(odd, tmp_path):
    write_tables(odd, tmp_path)
    return tmp_path


def test_regions_table(odd, tables):
    table = pd.read_csv(tables / "regions.csv", **TEXT)
    assert list(table.columns) == [column.name for column in REGION_COLUMNS]
    assert list(table["tag"]) == [region.tag for region in odd.regions]
    assert table["area"][0] == 'Kesselhaus "Süd", Ebene\n2'
    first = table.iloc[0]
    assert first["heat_loss_W_per_m"] == 101.5
    assert first["heat_loss_low_W_per_m"] == 80.25
    assert first["heat_loss_high_W_per_m"] == pytest.approx(130.125, rel=5e-6)
    assert first["recorded_temperature_C"] == pytest.approx(46.95, abs=1e-9)
    assert first["surface_temperature_C"] == pytest.approx(46.8377, abs=5e-5)
    assert first["verdict"] == "not quantified"
    assert first["reason"] == "not_quantified.interval_too_wide(relative_width=inf, why=a/b~c)"
    assert first["cautions"] == "caution.touch(temperature_C=71.25); caution.asbestos"
    assert math.isnan(first["resistance_high_m_K_per_W"])
    assert math.isnan(first["sound_loss_W_per_m"])
    assert list(table["gain"]) == [False, False, True]


def test_tables_read_in_one_line_with_numbers_as_numbers(tables):
    for name in ("regions.csv", "stretches.csv", "stations.csv", "components.csv"):
        table = pd.read_csv(tables / name)
        assert len(table) > 0
        figures = [column for column in table if column.endswith(("_C", "_W_per_m", "_m", "_px"))]
        assert figures
        assert all(pd.api.types.is_numeric_dtype(table[column]) for column in figures)


def test_stations_table(odd, tables):
    table = pd.read_csv(tables / "stations.csv")
    assert list(table.columns) == [column.name for column in STATION_COLUMNS]
    assert len(table) == 10
    first = odd.regions[0].stations
    part = table[table["region_id"] == "nord|1"]
    np.testing.assert_allclose(part["station_m"], first.station, rtol=5e-6)
    np.testing.assert_allclose(part["heat_loss_W_per_m"], first.heat_loss, rtol=5e-6)
    np.testing.assert_allclose(
        part["surface_temperature_C"], first.surface_temperature - 273.15, atol=5e-5
    )
    assert part["flags"].iloc[-1] == flag_names(int(first.flags[-1])) == "gap|clipped"
    assert math.isnan(part["resistance_high_m_K_per_W"].iloc[-1])


def test_stretches_table(tables):
    table = pd.read_csv(tables / "stretches.csv")
    assert list(table.columns) == [column.name for column in STRETCH_COLUMNS]
    assert list(table["stretch_id"]) == ["nord|1-s1", "line"]
    assert table["start_high_m"][0] == pytest.approx(13.1235, abs=1e-9)
    assert math.isnan(table["excess_high_W"][0])


def test_components_table(tables):
    table = pd.read_csv(tables / "components.csv", **TEXT)
    assert list(table.columns) == [column.name for column in COMPONENT_COLUMNS]
    assert list(table["region_id"]) == ["v|1", "hanger-ü"]
    valve, hanger = table.iloc[0], table.iloc[1]
    assert valve["kind"] == "Schieber, DN 50"
    assert valve["surface_temperature_C"] == pytest.approx(126.973, abs=5e-4)
    assert valve["equivalent_length_high_m"] == 2.0
    assert valve["heat_loss_W"] == pytest.approx(812.346, abs=5e-4)
    assert valve["heat_loss_low_W"] == 0.0
    assert math.isnan(valve["heat_loss_high_W"])
    assert valve["source"] == 'house table, "Süd"'
    assert hanger["reason"] == "not_quantified.component_hanger"
    assert math.isnan(hanger["heat_loss_W"])
    assert list(table["lagged"]) == [False, True]


def test_tables_are_plain_utf8_with_one_header_row(tables):
    data = (tables / "regions.csv").read_bytes()
    assert data.startswith(b"frame_id,region_id,tag,area,gain,verdict,")
    assert b"\r" not in data
    assert b"nan" not in data
    assert "Dampf Ü-101 蒸気 🔥".encode() in data


def test_an_assessment_without_regions_leaves_header_rows(odd, tmp_path):
    import dataclasses

    write_tables(dataclasses.replace(odd, frames=()), tmp_path)
    assert len(pd.read_csv(tmp_path / "stations.csv")) == 0


@pytest.mark.parametrize(
    ("value", "text"),
    [(None, ""), (math.nan, ""), (math.inf, ""), (-math.inf, ""), (-0.0, "0"), (True, "true"),
     (False, "false"), (12, "12"), (1 / 3, "0.333333"), (123456.789, "123457"),
     (1234567.0, "1.23457e+06"), (-2.5e-7, "-2.5e-07"), ("=1+1", "=1+1"), ("", "")],
)  # fmt: skip
def test_cells(value, text):
    assert cell_text(value) == text


@pytest.mark.parametrize("text", ['a"b', "a,b", "a\nb", "a\rb", " a", "a ", '"', "=1+1", "@x", "ü"])
def test_text_comes_back_as_given(text, tmp_path):
    path = tmp_path / "one.csv"
    path.write_text(csv_line(("tag", "x")) + csv_line((text, "1")), "utf-8", newline="")
    assert pd.read_csv(path, **TEXT)["tag"][0] == text


def test_every_column_is_explained(tables):
    text = (tables / "COLUMNS.txt").read_text("utf-8")
    assert text == columns_text()
    lines = [line.split() for line in text.splitlines()]
    tables = (REGION_COLUMNS, STRETCH_COLUMNS, STATION_COLUMNS, COMPONENT_COLUMNS)
    for column in (column for table in tables for column in table):
        assert column.meaning
        assert any(words[:1] == [column.name] and len(words) > 1 for words in lines), column.name
    for table in tables:
        assert len({column.name for column in table}) == len(table)


def test_remarks_as_text():
    assert remark_text() == ""
    assert remark_text(None) == ""
    assert remark_text(Remark("a"), Remark("b", (("x_m", 1.5), ("y", "z")))) == "a; b(x_m=1.5, y=z)"


def test_file_stems_are_safe_and_never_alike():
    ids = ["f01", "F02", "f02", "a/b", "a_b", "../x", "..", "", "CON", "nul.txt", "ü", "u\u0308",
           "x" * 300, "x" * 299, "end.", " blank", "\udcff", "Halle 2"]  # fmt: skip
    stems = file_stems(ids)
    assert list(stems) == ids
    assert len({stem.casefold() for stem in stems.values()}) == len(ids)
    assert stems["f01"] == "f01"
    assert stems["a_b"] == "a_b"
    for stem in stems.values():
        assert stem
        assert not set(stem) & set('/\\:*?"<>| ')
        assert stem[0] != "."
        assert stem[-1] != "."
        assert len(stem.encode("utf-8")) <= 100
        assert stem.split(".")[0].lower() not in ("con", "nul")
    assert file_stems(["f02"]) == {"f02": "f02"}


def test_station_figures_are_written_as_any_other(odd, tables):
    rows = (tables / "stations.csv").read_text("utf-8").splitlines()[1:6]
    place = [column.name for column in STATION_COLUMNS].index("heat_loss_W_per_m")
    assert [row.split(",")[place] for row in rows] == [
        cell_text(float(value)) for value in odd.regions[0].stations.heat_loss
    ]
    assert rows[0].split(",")[place] == "0"


def test_library_versions_name_what_the_numbers_depend_on():
    found = library_versions()
    assert found["python"] == platform.python_version()
    assert found["numpy"] == np.__version__
    assert found["scipy"]
