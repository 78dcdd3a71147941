"""Lookups, a user's own tables beside the survey, and every message about them."""

import re

import pytest

from cladwatt.errors import InputError, TableError
from cladwatt.materials.pipes import parse_nps
from cladwatt.materials.tables import (
    cladding_material,
    default_quantity,
    lagging_material,
    load_tables,
    pipe_outside_diameter,
    pipe_size,
    table_rows,
)

CURVE_HEAD = "material,temperature_C,conductivity_W_per_m_K,u_relative\n,°C,W/(m K),1\n"
CLADDING_HEAD = (
    "cladding,band_emissivity,u_band_emissivity,total_emissivity,u_total_emissivity,"
    "solar_absorptance,u_solar_absorptance,conductivity_W_per_m_K,thickness_mm,u_thickness_mm,"
    "is_metal\n,1,1,1,1,1,1,W/(m K),mm,mm,\n"
)
PIPE_HEAD = "dn,en_outside_diameter_mm\n1,mm\n"
DEFAULT_HEAD = "quantity,value,u\n,see unit,see unit\n"


@pytest.fixture
def own(tmp_path):
    folder = tmp_path / "tables"
    folder.mkdir()

    def write(name, text, encoding="utf-8"):
        (folder / f"{name}.csv").write_text(text, encoding=encoding)
        return folder

    return write


def faults_of(folder):
    with pytest.raises(TableError) as caught:
        load_tables(folder)
    return [str(fault) for fault in caught.value.faults]


# Lookups


@pytest.mark.parametrize(
    ("name", "key"),
    [
        ("CALCIUM silicate", "calcium_silicate"),
        ("Mineral Wool", "mineral_wool_pipe_section"),
        ("mineral-fiber", "mineral_wool_pipe_section"),
        ("PIR", "polyisocyanurate"),
        ("cellular glass, 145 kg/m3", "cellular_glass"),
    ],
)
def test_lagging_by_any_name(name, key):
    assert lagging_material(name).key == key


@pytest.mark.parametrize(
    ("name", "key"),
    [
        ("Bright Aluminum", "bright_aluminium"),
        ("galvanized, weathered", "weathered_galvanised"),
        ("painted", "painted_steel"),
        ("None", "none"),
    ],
)
def test_cladding_by_any_name(name, key):
    assert cladding_material(name).key == key


def test_unknown_names_list_the_nearest():
    with pytest.raises(TableError, match=r"'calcium silicat'.*nearest are calcium_silicate"):
        lagging_material("calcium silicat")
    with pytest.raises(TableError, match=r"'brite aluminium'.*nearest are bright_aluminium"):
        cladding_material("brite aluminium")
    with pytest.raises(TableError, match=r"no lagging material.*accepted are mineral_wool"):
        lagging_material("qqqq")
    with pytest.raises(InputError, match=r"no default 'hours'; accepted are band_lower"):
        default_quantity("hours")
    with pytest.raises(InputError, match=r"no table is called 'paint'; accepted are lagging_cond"):
        table_rows("paint")


@pytest.mark.parametrize(
    ("written", "inches"),
    [
        ("2 1/2", 2.5),
        ("2-1/2", 2.5),
        ("2½", 2.5),
        ('2.5"', 2.5),
        ("2,5", 2.5),
        ("NPS 1 1/4", 1.25),
        ("3/4", 0.75),
        (" 10 ", 10.0),
    ],
)
def test_nominal_sizes_as_they_are_written(written, inches):
    assert parse_nps(written) == inches


@pytest.mark.parametrize("written", ["", "big", "1/0", "-", "0", "nan"])
def test_sizes_that_cannot_be_read(written):
    assert parse_nps(written) is None


def test_pipe_lookups():
    assert pipe_outside_diameter(nps="2 1/2") == pytest.approx(0.0730)
    assert pipe_outside_diameter(nps=2.5, series="EN") == pytest.approx(0.0761)
    assert pipe_outside_diameter(dn="DN 100") == pytest.approx(0.1143)
    assert pipe_size(dn=100).u_relative == 0.005
    with pytest.raises(TableError, match=r"DN 110: .*nearest are 90, 100, 125; or declare"):
        pipe_outside_diameter(dn=110)
    with pytest.raises(TableError, match=r"NPS big: the table has no such pipe size"):
        pipe_outside_diameter(nps="big")
    with pytest.raises(TableError, match="no such pipe size"):
        pipe_outside_diameter(dn="four")
    with pytest.raises(InputError, match="expected exactly one of them"):
        pipe_outside_diameter(dn=100, nps=4)
    with pytest.raises(InputError, match="expected exactly one of them"):
        pipe_outside_diameter()
    with pytest.raises(InputError, match="series is 'DIN'; expected 'EN' or 'ASME'"):
        pipe_outside_diameter(dn=100, series="DIN")


# Own tables


def test_no_folder_means_what_ships(tmp_path):
    assert load_tables(tmp_path / "tables") is load_tables()


def test_own_material_is_added_and_named_by_its_file(own):
    tables = load_tables(own("lagging_conductivity", CURVE_HEAD + "Our Felt,20,0.04,0.05\n"))
    felt = lagging_material("our felt", tables)
    assert felt.temperature == (293.15,)
    assert felt.source == "tables/lagging_conductivity.csv"
    assert felt.confidence == "declared"
    assert felt.maximum_service_temperature is None
    assert "calcium_silicate" in tables.lagging
    assert "our_felt" not in load_tables().lagging
    assert [path.name for path in tables.user_files] == ["lagging_conductivity.csv"]
    printed = [row for row in table_rows("lagging_conductivity", tables)[2] if row[0] == "Our Felt"]
    assert printed == [
        ("Our Felt", "20", "0.04", "0.05", "tables/lagging_conductivity.csv", "", "declared", "")
    ]


def test_own_curve_replaces_the_whole_curve(own):
    rows = "calcium_silicate,100,0.07,0.05\ncalcium_silicate,50,0.06,0.03\n"
    tables = load_tables(own("lagging_conductivity", CURVE_HEAD + rows))
    material = lagging_material("calcium silicate", tables)
    assert material.temperature == (323.15, 373.15)
    assert material.conductivity == (0.06, 0.07)
    assert material.u_relative == 0.05
    assert material.maximum_service_temperature == pytest.approx(649 + 273.15)


def test_own_description_joins_own_curve(own):
    own("lagging_conductivity", CURVE_HEAD + "cork,20,0.045,0.1\n")
    text = (
        "material,name,aliases,maximum_service_temperature_C,vapour_tight,wet_ratio_low,"
        "wet_ratio_high\n,,,°C,,1,1\ncork,cork slab,korkplatte|liege,120,no,1.2,3\n"
    )
    tables = load_tables(own("lagging_materials", text))
    cork = lagging_material("Liege", tables)
    assert (cork.name, cork.wet_ratio) == ("cork slab", (1.2, 3.0))
    assert cork.maximum_service_temperature == pytest.approx(393.15)


def test_semicolons_decimal_commas_comments_and_a_byte_order_mark(own):
    text = (
        "material;temperature_C;conductivity_W_per_m_K;u_relative\n;C;W/mK;-\n"
        "# felt of unit 3\n\nfelt;20;0,04;0,05\nfelt;120;0,055;0,05\n"
    )
    for encoding in ("utf-8-sig", "utf-16", "cp1252"):
        tables = load_tables(own("lagging_conductivity", text, encoding))
        assert tables.lagging["felt"].conductivity == (0.04, 0.055)


def test_own_cladding_pipe_and_default(own):
    own("claddings", CLADDING_HEAD + "painted_steel,0.95,0.01,0.93,0.02,0.3,0.1,50,1,0.1,no\n")
    own("pipe_sizes", PIPE_HEAD + "65,76\n28,30\n")
    folder = own("defaults", DEFAULT_HEAD + "installation_factor,1.1,0.05\nband_lower,8,0.1\n")
    tables = load_tables(folder)
    paint = cladding_material("painted_steel", tables)
    assert paint.band_emissivity.value == 0.95
    assert paint.thickness.value == 1e-3
    assert paint.band_emissivity.source == "tables/claddings.csv"
    assert pipe_outside_diameter(dn=65, tables=tables) == pytest.approx(0.076)
    assert pipe_outside_diameter(dn=28, tables=tables) == pytest.approx(0.030)
    assert default_quantity("installation_factor", tables).value == 1.1
    assert default_quantity("band_lower", tables).value == 8e-6
    assert default_quantity("spot_pixels", tables).value == 3
    printed = [row for row in table_rows("defaults", tables)[2] if row[0] == "band_lower"]
    assert [row[1] for row in printed] == ["8"]
    with pytest.raises(TableError, match="the ASME series has no outside diameter for it"):
        pipe_outside_diameter(dn=65, series="ASME", tables=tables)


# Messages


@pytest.mark.parametrize(
    ("row", "message"),
    [
        (
            "felt,20,0.0037,0.05",
            r"^tables/lagging_conductivity.csv:3: felt: conductivity_W_per_m_K: found 0.0037; "
            r"expected 0.01 to 1 W/\(m K\); is the decimal point misplaced\?$",
        ),
        ("felt,20,0.37,0.05", r"found 0.37 at 20 °C; expected 0.01 to 0.2 W/\(m K\) for a lagging"),
        ("felt,20,37,0.05", "found 37; expected 0.01 to 1 W"),
        ("felt,2000,0.04,0.05", "temperature_C: found 2000; expected -200 to 1200 °C"),
        ("felt,20,0.04,5", "u_relative: found 5; expected 0 to 0.5;"),
        ("felt,20,nan,0.05", "found nan; expected 0.01"),
        ("felt,20,x,0.05", "found 'x'; expected a number, written like 0.037"),
        ("felt,20,,0.05", "the cell is empty; expected a value"),
        ("felt,20,0,04,0.05", r"the row has 5 cells; expected 4.*decimal comma\?"),
        ("felt,20,0.04", "the row has 3 cells; expected 4, as the header has$"),
        ("--,20,0.04,0.05", "found '--'; expected a name with letters or digits"),
        ("felt,20,0.04,0.05\nfelt,20,0.05,0.05", r":4: felt: 20 °C stands twice"),
        (
            "felt,20,0.02,0.05\nfelt,40,0.06,0.05",
            r":4: .*found 0.06 beside 0.02 at 20 °C; expected neighbours within a factor 2.5",
        ),
        ('felt,20,"0.04,0.05', r"expected quoted cells to be closed"),
    ],
)
def test_faulty_curve_rows(own, row, message):
    faults = faults_of(own("lagging_conductivity", CURVE_HEAD + row + "\n"))
    assert len(faults) == 1
    assert re.search(message, faults[0]), faults[0]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "it holds 0 row(s); expected a header row"),
        (
            CURVE_HEAD.replace("W/(m K)", "mW/(m K)") + "felt,20,0.04,0.05\n",
            "the unit is 'mW/(m K)'; expected 'W/(m K)' (the row below the header holds the units)",
        ),
        (CURVE_HEAD.split("\n")[0] + "\nfelt,20,0.04,0.05\n", "the unit is '20'; expected '°C'"),
        (
            CURVE_HEAD.replace("temperature_C", "temprature_C"),
            "unknown column 'temprature_C'; did you mean 'temperature_C'?",
        ),
        (CURVE_HEAD.replace(",u_relative", ",note"), "column 'u_relative' is missing"),
        (CURVE_HEAD.replace("u_relative", "material"), "column 'material' stands twice"),
    ],
)
def test_faulty_heads(own, text, message):
    assert any(message in fault for fault in faults_of(own("lagging_conductivity", text)))


@pytest.mark.parametrize(
    ("row", "message"),
    [
        ("x,9.2,0.02,0.9,0.02,0.3,0.1,50,1,0.1,no", "x: band_emissivity: found 9.2; expected 0.02"),
        ("x,0.9,0.02,0.9,0.02,0.3,0.1,50,80,0.1,no", "thickness_mm: found 80; expected 0 to 20 mm"),
        (
            "x,0.92,0.02,0.09,0.02,0.3,0.1,50,1,0.1,no",
            "band_emissivity, total_emissivity: found 0.92 and 0.09; expected them within a factor",
        ),
        ("x,0.9,0.02,0.9,0.02,0.3,0.1,50,1,0.1,maybe", "is_metal: found 'maybe'; expected yes or"),
        (
            "x,0.9,0.02,0.9,0.02,0.3,0.1,50,1,0.1,no\nX,0.9,0.02,0.9,0.02,0.3,0.1,50,1,0.1,no",
            ":4: x: it stands twice, first in line 3",
        ),
    ],
)
def test_faulty_claddings(own, row, message):
    faults = faults_of(own("claddings", CLADDING_HEAD + row + "\n"))
    assert len(faults) == 1
    assert message in faults[0]


def test_value_outside_its_own_bounds(own):
    head = CLADDING_HEAD.replace("is_metal\n,", "is_metal,band_emissivity_low\n,").replace(
        "mm,mm,\n", "mm,mm,,1\n"
    )
    row = "x,0.5,0.02,0.9,0.02,0.3,0.1,50,1,0.1,no,0.6\n"
    (fault,) = faults_of(own("claddings", head + row))
    assert "x: band_emissivity: found 0.5; expected a value within its own bounds 0.6" in fault


@pytest.mark.parametrize(
    ("row", "message"),
    [
        ("65,7.61", "found 7.61 for a nominal 65 mm; expected 58.5 to 120 mm; is the decimal"),
        ("65,761", "found 761 for a nominal 65 mm"),
        ("65.5,76", "dn: found 65.5; expected a whole number"),
        ("65,", "no outside diameter is given; expected one or both"),
        (",76", "neither dn nor nps is given; expected one of them"),
        ("65,76.1\n65,76", "DN 65: it stands twice, first in line 3"),
    ],
)
def test_faulty_pipe_sizes(own, row, message):
    faults = faults_of(own("pipe_sizes", PIPE_HEAD + row + "\n"))
    assert len(faults) == 1
    assert message in faults[0]


def test_faulty_nps(own):
    text = "nps,asme_outside_diameter_mm\n,mm\nlarge,60\n"
    assert "nps: found 'large'; expected inches like" in faults_of(own("pipe_sizes", text))[0]


@pytest.mark.parametrize(
    ("row", "message"),
    [
        ("hours,8000,100", "hours: there is no such default; accepted are band_lower"),
        ("installation_factor,11.5,0.8", "installation_factor: found 11.5; expected 0.8 to 2"),
        ("band_lower,0.0000075,0", "band_lower: found 7.5e-06; expected 6.5 to 9 um"),
    ],
)
def test_faulty_defaults(own, row, message):
    (fault,) = faults_of(own("defaults", DEFAULT_HEAD + row + "\n"))
    assert message in fault


def test_default_in_another_unit(own):
    text = "quantity,value,u,unit\n,see unit,see unit,\nband_lower,7.5,0.1,mm\n"
    (fault,) = faults_of(own("defaults", text))
    assert "band_lower: unit: found 'mm'; expected 'um'" in fault


def test_confidence_and_wet_ratio_words(own):
    head = CURVE_HEAD.replace("u_relative\n", "u_relative,confidence\n").replace("1\n", "1,\n")
    (fault,) = faults_of(own("lagging_conductivity", head + "felt,20,0.04,0.05,sure\n"))
    assert "confidence: found 'sure'; expected one of declared, high, medium, low" in fault


def test_wet_ratio_needs_both_ends(own):
    text = "material,wet_ratio_low,wet_ratio_high\n,1,1\nmagnesia_85,3,2\n"
    (fault,) = faults_of(own("lagging_materials", text))
    assert "magnesia_85: wet_ratio_low, wet_ratio_high: found 3.0 and 2.0; expected both" in fault


def test_description_without_a_curve(own):
    text = "material,name\n,\ncork,cork slab\n"
    (fault,) = faults_of(own("lagging_materials", text))
    assert "cork: there is no conductivity; expected rows in lagging_conductivity.csv" in fault


def test_all_faults_of_all_files_at_once(own):
    own("lagging_conductivity", CURVE_HEAD + "felt,20,0.37,0.05\n")
    own("pipe_sizes", PIPE_HEAD + "65,761\n")
    folder = own("cladding", CLADDING_HEAD)
    faults = faults_of(folder)
    assert len(faults) == 3
    assert any(
        "tables/cladding.csv: no table has this name; did you mean claddings.csv?" in fault
        for fault in faults
    )


def test_air_cannot_be_replaced(own):
    (fault,) = faults_of(own("air_properties", "x"))
    assert "tables/air_properties.csv: no table has this name" in fault


def test_a_file_in_place_of_the_folder(tmp_path):
    (tmp_path / "tables").write_text("x")
    with pytest.raises(TableError, match="tables: this is a file; expected a folder of CSV tables"):
        load_tables(tmp_path / "tables")


def test_a_folder_in_place_of_a_file(tmp_path):
    (tmp_path / "tables" / "claddings.csv").mkdir(parents=True)
    (fault,) = faults_of(tmp_path / "tables")
    assert fault.startswith("tables/claddings.csv: ")
    assert fault.endswith("expected a CSV file that can be read")


@pytest.mark.parametrize(
    "junk",
    [b"PK\x03\x04\x00\x00\xff\xfe,\n\x00;\n", b"\xff\xfea", b"\x00" * 40, b'"\n"\n', b",,,\n,,,\n"],
)
def test_junk_is_a_fault_and_no_traceback(tmp_path, junk):
    folder = tmp_path / "tables"
    folder.mkdir()
    (folder / "claddings.csv").write_bytes(junk)
    assert all(fault.startswith("tables/claddings.csv") for fault in faults_of(folder))


def shipped_with_one_cell_changed(name, column, factor):
    """Yield the text of a table that ships, once per row, with one number times a factor."""
    header, units, rows = table_rows(name)
    place = header.index(column)
    for index, row in enumerate(rows):
        if not float(row[place] or 0):
            continue
        changed = [list(r) for r in rows]
        changed[index][place] = f"{float(row[place]) * factor:.6g}"
        lines = ["\t".join(cells) for cells in (header, units, *changed)]
        yield index + 3, "\n".join(lines)


@pytest.mark.parametrize("factor", [10.0, 0.1])
@pytest.mark.parametrize(
    ("name", "column"),
    [
        ("lagging_conductivity", "conductivity_W_per_m_K"),
        ("claddings", "band_emissivity"),
        ("claddings", "total_emissivity"),
        ("pipe_sizes", "en_outside_diameter_mm"),
        ("pipe_sizes", "asme_outside_diameter_mm"),
    ],
)
def test_every_misplaced_decimal_is_caught(own, name, column, factor):
    changed = list(shipped_with_one_cell_changed(name, column, factor))
    assert len(changed) >= 20
    for line, text in changed:
        faults = faults_of(own(name, text))
        near = {line, line + 1}  # a curve complains at the slip or at the node after it
        assert any(f"{name}.csv:{number}:" in fault for fault in faults for number in near), line
