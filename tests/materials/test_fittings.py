"""Equivalent lengths of fittings, and the heat capacity of lagging."""

import csv
from pathlib import Path

import pytest

from cladwatt.errors import TableError
from cladwatt.materials.tables import (
    fitting_equivalent_length,
    hanger_share,
    hanger_spacing,
    lagging_material,
    load_tables,
)

PUBLISHED = Path(__file__).parents[1] / "published"
TABLES = load_tables()
HEAD = "fitting,kind,lagged,counts_as,low,high\n,,,,see unit,see unit\n"


def retyped():
    with (PUBLISHED / "fittings_retyped.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


@pytest.mark.parametrize("row", retyped(), ids=lambda row: row["item"])
def test_a_fitting_holds_what_is_printed(row, evidence):
    # source and provenance stand in the row
    if row["kind"] == "hanger":
        amount = hanger_share(indoors=row["lagged"] == "indoors")
    else:
        fitting = fitting_equivalent_length(
            row["kind"], row["lagged"] == "yes", counts_as=row["counts_as"]
        )
        amount = fitting.amount
    low, high = float(row["low"]), float(row["high"])
    check = "vdi_2055_fittings" if "from memory" in row["provenance"] else "fuel_booklet_8_fittings"
    unit = "" if row["kind"] == "hanger" else "m"
    evidence(check, row["item"], amount.value, (low + high) / 2, unit=unit, rel=1e-6)
    if high > low:
        assert (amount.lower, amount.upper, amount.shape) == (low, high, "rectangular")
    else:
        assert amount.u > 0
    assert amount.is_default
    assert amount.confidence in ("low", "medium")


@pytest.mark.parametrize(
    ("kind", "lagged", "counts_as"),
    [("Gate valve", False, "bare_pipe"), ("flange pair", False, "bare_pipe"),
     ("valve", True, "lagged_pipe"), ("flange", True, "lagged_pipe")],
)  # fmt: skip
def test_what_a_fitting_counts_as_unless_said(kind, lagged, counts_as):
    assert fitting_equivalent_length(kind, lagged).counts_as == counts_as


def test_a_bare_fitting_loses_more_than_a_lagged_one():
    for kind in ("valve", "flange"):
        bare = fitting_equivalent_length(kind, False, counts_as="lagged_pipe").amount
        assert bare.lower > fitting_equivalent_length(kind, True).amount.upper


def test_a_fitting_nobody_holds_is_named_with_what_there_is():
    with pytest.raises(TableError, match=r"'strainer', bare: no equivalent length.*accepted are v"):
        fitting_equivalent_length("strainer", False)
    with pytest.raises(TableError, match="no equivalent length of bare_pipe is held"):
        fitting_equivalent_length("valve", True, counts_as="bare_pipe")
    with pytest.raises(TableError, match="'hanger', lagged: no equivalent length"):
        fitting_equivalent_length("hanger", True)


@pytest.fixture
def own(tmp_path):
    folder = tmp_path / "tables"
    folder.mkdir()

    def write(name, text):
        (folder / f"{name}.csv").write_text(text, encoding="utf-8")
        return folder

    return write


def test_an_own_fitting_is_added_and_goes_first(own):
    text = HEAD + "our strainer,strainer,no,bare_pipe,0.8,1.2\nours,valve,no,bare_pipe,2,2\n"
    tables = load_tables(own("fittings", text))
    strainer = fitting_equivalent_length("Strainer", False, tables=tables)
    assert strainer.amount.value == pytest.approx(1.0)
    assert strainer.amount.source == "tables/fittings.csv"
    assert fitting_equivalent_length("valve", False, tables=tables).amount.value == 2
    assert fitting_equivalent_length("valve", False).amount.value == 1


@pytest.mark.parametrize(
    ("row", "message"),
    [
        ("x,valve,no,bare_pip,1,2", "found 'bare_pip'; expected one of bare_pipe, lagged_pipe, "
         "line_share (nearest: bare_pipe)"),
        ("x,valve,no,bare_pipe,2,1", "found 2 and 1; expected low <= high"),
        ("x,valve,perhaps,bare_pipe,1,2", "lagged"),
        ("x,valve,no,bare_pipe,1,2000", "high"),
    ],
)  # fmt: skip
def test_a_faulty_fitting_is_said(own, row, message):
    with pytest.raises(TableError) as caught:
        load_tables(own("fittings", HEAD + row + "\n"))
    assert message in str(caught.value)


# heat capacity


@pytest.mark.parametrize("key", sorted(TABLES.lagging))
def test_each_lagging_has_density_and_specific_heat(key):
    density, specific_heat = TABLES.lagging[key].density, TABLES.lagging[key].specific_heat
    assert 30 <= density.value <= 260
    assert 0.05 <= density.u / density.value <= 0.35
    assert 800 <= specific_heat.value <= 1600
    assert 0.03 <= specific_heat.u / specific_heat.value <= 0.2
    assert density.source
    assert density.is_default
    assert specific_heat.confidence in ("medium", "low")


@pytest.mark.parametrize(
    ("key", "library_name"),
    [
        ("mineral_wool_pipe_section", "Mineral wool, felted, 100 kg/m^3"),
        ("rock_wool_100", "Mineral wool, felted, 100 kg/m^3"),
        ("cellular_glass", "Cellular glass"),
        ("cellular_glass_c552", "Cellular glass"),
        ("elastomeric_foam", "Sealant, elastomeric foam, flexible"),
        ("polyurethane_foam", "Sealant, polyurethane (PU) foam"),
    ],
)
def test_heat_capacity_against_the_ht_library(key, library_name, evidence):
    # ht 1.2, insulation.rho_material and Cp_material: building materials, after ASHRAE, ISO 10456
    from ht.insulation import Cp_material, rho_material

    material = lagging_material(key)
    density, specific_heat = material.density, material.specific_heat
    for what, unit, ours, theirs in (
        ("density", "kg/m3", density, rho_material(library_name)),
        ("specific heat", "J/(kg K)", specific_heat, Cp_material(library_name)),
    ):
        name = f"{key}, {what}"
        evidence("ht_heat_capacity", name, ours.value, theirs, unit=unit, abs=2 * ours.u)


def test_an_own_material_may_say_its_heat_capacity(own):
    own("lagging_conductivity", "material,temperature_C,conductivity_W_per_m_K,u_relative\n"
        ",°C,W/(m K),1\nfelt,20,0.04,0.05\n")  # fmt: skip
    folder = own("lagging_materials", "material,density_kg_per_m3,specific_heat_J_per_kg_K\n"
                 ",kg/m3,J/(kg K)\nfelt,200,\n")  # fmt: skip
    felt = lagging_material("felt", load_tables(folder))
    assert (felt.density.value, felt.density.u) == (200, 20)
    assert felt.specific_heat is None


def test_a_lone_uncertainty_of_an_own_material_is_said(own):
    own("lagging_conductivity", "material,temperature_C,conductivity_W_per_m_K,u_relative\n"
        ",°C,W/(m K),1\nfelt,20,0.04,0.05\n")  # fmt: skip
    folder = own("lagging_materials", "material,u_density_kg_per_m3\n,kg/m3\nfelt,20\n")
    with pytest.raises(TableError, match="it stands without density_kg_per_m3"):
        load_tables(folder)


def spaced_in_feet():
    with (PUBLISHED / "hanger_spacing_feet.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


@pytest.mark.parametrize("row", spaced_in_feet(), ids=lambda row: f"NPS {row['nps']}")
def test_hangers_are_as_far_apart_as_the_print_in_feet_says(row, evidence):
    # ASME B31.1, Table 121.5, from memory; ours is in metres to a decimetre
    found = hanger_spacing(float(row["outside_diameter_mm"]) / 1000)
    printed = [0.3048 * float(row["water_ft"]), 0.3048 * float(row["vapour_ft"])]
    evidence(
        "asme_b31_1_spacing", f"NPS {row['nps']}", [found.lower, found.upper], printed, unit="m",
        abs=0.06,
    )  # fmt: skip


def test_hangers_between_the_sizes_and_beyond_them():
    four, between, six = (hanger_spacing(size) for size in (0.1143, 0.14, 0.1683))
    assert four.lower < between.lower < six.lower
    # bending: the span goes with the root of the diameter, as the table does
    assert between.lower == pytest.approx(four.lower * (0.14 / 0.1143) ** 0.5, rel=0.02)
    assert hanger_spacing(2.0).upper == hanger_spacing(0.6096).upper
    assert hanger_spacing(0.01).lower == hanger_spacing(0.0334).lower


def test_a_users_spacing_takes_its_place_and_a_crossed_one_is_refused(own):
    head = "dn,outside_diameter_mm,water_m,vapour_m\n1,mm,m,m\n"
    tables = load_tables(own("hanger_spacing", head + "100,114.3,2.5,3.0\n"))
    found = hanger_spacing(0.1143, tables=tables)
    assert (found.lower, found.upper) == (2.5, 3.0)
    assert found.confidence == "declared"
    with pytest.raises(TableError, match=r"found 3\.5 and 3; expected water_m <= vapour_m"):
        load_tables(own("hanger_spacing", head + "100,114.3,3.5,3.0\n"))
