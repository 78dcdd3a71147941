"""The facts that ship, against plausible ranges, printed values and other people's libraries."""

import csv
import pickle
from pathlib import Path

import numpy as np
import pytest

from cladwatt.materials import load
from cladwatt.materials.tables import (
    TABLE_NAMES,
    LaggingMaterial,
    cladding_material,
    default_quantity,
    lagging_material,
    load_tables,
    pipe_outside_diameter,
    table_rows,
)

PUBLISHED = Path(__file__).parents[1] / "published"
TABLES = load_tables()
DATA = Path(load.__file__).parent / "data"


def published(name: str) -> list[dict[str, str]]:
    with (PUBLISHED / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def check_of(row: dict[str, str]) -> str:
    checks = {
        "ASTM C533": "astm_c533", "ASTM C547": "astm_c547", "EN 253": "en_253",
        "Facility Piping": "piping_handbook_5_3", "UK Fuel": "fuel_booklet_8",
        "Turner": "turner_doty", "A. J. Ede": "ede_1967", "Mechanical": "data_handbook",
    }  # fmt: skip
    (check,) = (check for start, check in checks.items() if row["source"].startswith(start))
    return check


def conductivity_at(material: LaggingMaterial, celsius: float) -> float:
    kelvin = celsius + 273.15
    assert material.temperature[0] - 1e-6 <= kelvin <= material.temperature[-1] + 1e-6
    return float(np.interp(kelvin, material.temperature, material.conductivity))


FIBRE = [
    "mineral_wool_pipe_section",
    "mineral_fibre_c547_type_1",
    "mineral_fibre_c547_type_2",
    "rock_wool_100",
    "glass_wool_48",
]
FOAM = ["polyisocyanurate", "polyurethane_foam", "elastomeric_foam"]
BLOCK = ["calcium_silicate", "calcium_silicate_c533", "expanded_perlite", "magnesia_85"]
SUPER = ["aerogel_blanket", "microporous_silica"]
GLASS = ["cellular_glass", "cellular_glass_c552"]
CLASS_RANGES = [(FIBRE, 0.03, 0.13), (FOAM, 0.02, 0.05), (BLOCK, 0.05, 0.12), (SUPER, 0.018, 0.04)]
CLASS_RANGES += [(GLASS, 0.038, 0.09)]


def test_each_lagging_material_has_its_class():
    classed = [key for keys, _, _ in CLASS_RANGES for key in keys]
    assert sorted(classed) == sorted(TABLES.lagging)


@pytest.mark.parametrize(("keys", "low", "high"), CLASS_RANGES)
def test_conductivity_is_plausible_for_its_class(keys, low, high):
    for key in keys:
        material = TABLES.lagging[key]
        assert low <= min(material.conductivity), key
        assert max(material.conductivity) <= high, key
        assert 0.05 <= material.u_relative <= 0.25, key


@pytest.mark.parametrize("key", sorted(TABLES.lagging))
def test_curves_rise_and_stay_below_the_service_limit(key):
    material = TABLES.lagging[key]
    assert len(material.temperature) >= 2
    assert np.all(np.diff(material.temperature) > 0)
    assert np.all(np.diff(material.conductivity) >= 0)
    if material.maximum_service_temperature is not None:
        assert material.temperature[-1] < material.maximum_service_temperature
    assert material.source
    assert material.confidence in ("high", "medium", "low")


def test_stated_validity_is_the_span_of_the_curve():
    header, _, rows = table_rows("lagging_materials")
    for row in rows:
        cells = dict(zip(header, row, strict=True))
        material = TABLES.lagging[cells["material"]]
        assert float(cells["valid_from_C"]) == pytest.approx(material.temperature[0] - 273.15)
        assert float(cells["valid_to_C"]) == pytest.approx(material.temperature[-1] - 273.15)


@pytest.mark.parametrize("row", published("materials_retyped.csv"), ids=lambda r: r["key"])
def test_retyped_sample(row, evidence):
    # Source in the row: re-typed from the printed units, so a slip in either place shows.
    material = lagging_material(row["key"])
    if row["table"] == "service":
        expected = float(row["printed"]) + 273.15
        found = material.maximum_service_temperature
        evidence(check_of(row), row["key"], found, expected, unit="K", abs=1e-9)
        return
    at = np.isclose(material.temperature, float(row["at"]) + 273.15, atol=0.01)
    assert at.sum() == 1
    printed_again = np.array(material.conductivity)[at][0] / float(row["conversion"])
    half = 0.5 * 10.0 ** -int(row["digits"])
    evidence(
        check_of(row), f"{row['key']}, re-typed", printed_again, float(row["printed"]), abs=half
    )


@pytest.mark.parametrize("row", published("materials_second_sources.csv"), ids=lambda r: r["key"])
def test_second_source_lies_within_the_stated_uncertainty(row, evidence):
    # The 95 % interval of the curve must hold what another publication prints (source in the row).
    material = lagging_material(row["key"])
    ours = conductivity_at(material, float(row["temperature_C"]))
    other = float(row["conductivity_W_per_m_K"])
    what, allowed = f"{row['key']} at {row['temperature_C']} °C", 2 * material.u_relative * ours
    evidence(check_of(row), what, ours, other, unit="W/(m K)", abs=allowed)


@pytest.mark.parametrize(
    ("key", "library_name"),
    [
        ("mineral_wool_pipe_section", "Mineral wool, felted, 100 kg/m^3"),
        ("rock_wool_100", "Slag wool, 120 kg/m^3"),
        ("glass_wool_48", "Glass fiber board"),
        ("cellular_glass", "Cellular glass"),
        ("polyurethane_foam", "Spray-applied Polyurethane foam, aged and dry, 40 mm"),
    ],
)
def test_conductivity_against_the_ht_library(key, library_name, evidence):
    # ht 1.2, insulation.k_material: building materials near room temperature.
    from ht.insulation import k_material

    material = TABLES.lagging[key]
    ours = float(np.interp(297.0, material.temperature, material.conductivity))
    theirs, allowed = k_material(library_name), 2 * material.u_relative * ours
    evidence("ht_insulation", key, ours, theirs, unit="W/(m K)", abs=allowed)


@pytest.mark.parametrize("row", published("materials_emissivities.csv"), ids=lambda r: r["key"])
def test_published_emissivity_overlaps_the_95_percent_interval(row, evidence):
    emissivity = cladding_material(row["key"]).total_emissivity
    low = max(emissivity.lower, emissivity.value - 2 * emissivity.u)
    high = min(emissivity.upper, emissivity.value + 2 * emissivity.u)
    # ours against the nearest value of the printed range, within the 95 % interval
    printed = float(np.clip(emissivity.value, float(row["low"]), float(row["high"])))
    allowed = emissivity.value - low if printed < emissivity.value else high - emissivity.value
    evidence(check_of(row), row["key"], emissivity.value, printed, abs=allowed)


@pytest.mark.parametrize("key", sorted(TABLES.claddings))
def test_claddings_are_plausible(key):
    cladding = TABLES.claddings[key]
    band, total = cladding.band_emissivity, cladding.total_emissivity
    for emissivity in (band, total):
        assert emissivity.lower < emissivity.value - emissivity.u
        assert emissivity.value + emissivity.u < emissivity.upper
        assert emissivity.u >= 0.025
    if cladding.is_metal:
        assert total.value <= 0.6
        # Siegel and Howell; Incropera 12.5: conductors, hemispherical over normal 1 to 1.3.
        assert 1.0 <= total.value / band.value <= 1.3
        assert band.u >= total.u
    else:
        assert total.value >= 0.5
        # Incropera section 12.5: non-conductors, hemispherical over normal 0.95 to 1.
        assert 0.945 <= total.value / band.value <= 1.0
    if key.startswith("bare") or key in ("none", "elastomeric_skin"):
        assert cladding.thickness.value == 0
    else:
        assert 5e-5 <= cladding.thickness.value <= 6e-3
        assert cladding.thickness.u >= 0.25 * cladding.thickness.value


def test_order_of_brightness():
    order = ["bright_aluminium", "weathered_aluminium", "new_galvanised", "weathered_galvanised"]
    values = [TABLES.claddings[key].total_emissivity.value for key in [*order, "painted_steel"]]
    assert values == sorted(values)


def test_sheet_conductivity_of_metals():
    # Incropera Table A.1 near 300 K: aluminium alloys 168 to 237, plain carbon steel 60,
    # stainless steel 304 14.9, copper 401 W/(m K).
    expected = {"bright_aluminium": (160, 240), "painted_steel": (40, 65)}
    expected |= {"stainless_steel_new": (13, 17), "bare_copper_oxidised": (350, 405)}
    for key, (low, high) in expected.items():
        assert low <= TABLES.claddings[key].conductivity <= high


def test_pipe_diameters_against_the_fluids_library(evidence):
    # fluids 1.3, piping.nearest_pipe: ASME B36.10M outside diameters and STD walls.
    from fluids.piping import nearest_pipe

    header, _, rows = table_rows("pipe_sizes")
    walls = {row[header.index("dn")]: row[header.index("wall_standard_mm")] for row in rows}
    assert len(TABLES.pipe_sizes) >= 25
    for size in TABLES.pipe_sizes:
        assert size.nps is not None
        assert size.asme is not None
        _, _, outside, wall = nearest_pipe(NPS=size.nps, schedule="STD")
        evidence("fluids_pipes", "diameter", size.asme, outside, unit="m", abs=1e-9)
        found = float(walls[str(size.dn)])
        evidence("fluids_pipes", "wall", found, 1e3 * wall, unit="mm", abs=1e-6)


def test_series_differ_only_where_the_standards_do(evidence):
    # EN 10220 series 1 against ASME B36.10M: 76.1/73.0 at DN 65, 139.7/141.3 at DN 125.
    large = {s.dn for s in TABLES.pipe_sizes if abs(s.en / s.asme - 1) > s.u_relative * 2}
    assert large == {65, 125}
    assert pipe_outside_diameter(dn=65) == pytest.approx(0.0761)
    assert pipe_outside_diameter(dn=65, series="ASME") == pytest.approx(0.0730)
    assert pipe_outside_diameter(dn=125) == pytest.approx(0.1397)
    assert pipe_outside_diameter(nps=5) == pytest.approx(0.1413)
    # EN 10220 series 1, re-typed.
    retyped = {15: 21.3, 25: 33.7, 50: 60.3, 80: 88.9, 100: 114.3, 200: 219.1, 300: 323.9}
    for dn, outside in retyped.items():
        found = pipe_outside_diameter(dn=dn)
        evidence("en_10220", "diameter", found, 1e-3 * outside, unit="m", rel=1e-6)


def test_air_is_consistent_with_coolprop(evidence):
    # CoolProp: Lemmon et al. (2000), Lemmon and Jacobsen (2004).
    from CoolProp.CoolProp import PropsSI

    for row in TABLES.air:
        state = ("T", row.temperature, "P", 101325.0, "Air")
        for name, key, rel in (
            ("density", "D", 1e-4),
            ("specific_heat", "C", 1e-4),
            ("dynamic_viscosity", "V", 1e-4),
            ("conductivity", "L", 1e-3),
        ):
            found, what = getattr(row, name), f"shipped table, {name}"
            evidence("air_reference_equations", what, found, PropsSI(key, *state), rel=rel)
        diffusivity = row.conductivity / (row.density * row.specific_heat)
        viscosity = row.dynamic_viscosity / row.density
        assert row.prandtl == pytest.approx(viscosity / diffusivity, rel=1e-3)


def test_defaults_are_generous_and_sourced():
    factor = default_quantity("installation_factor")
    assert (factor.value, factor.u, factor.confidence) == (1.15, 0.08, "low")
    assert default_quantity("band_lower").value == 7.5e-6
    assert default_quantity("band_upper").value == 14e-6
    # U.S. Standard Atmosphere 1976, sea level.
    assert default_quantity("air_pressure").value == 101325
    for name, quantity in TABLES.defaults.items():
        assert quantity.source, name
        assert quantity.is_default, name
        assert quantity.confidence != "declared", name


def test_every_source_is_listed_with_its_terms():
    header, _, rows = table_rows("sources")
    listed = {row[0] for row in rows}
    page = (DATA / "SOURCES.md").read_text(encoding="utf-8")
    used = set()
    for name in TABLE_NAMES:
        columns, _, table = table_rows(name)
        for row in table:
            cells = dict(zip(columns, row, strict=True))
            for column in ("source", "service_source", "wet_source", "heat_source"):
                used |= {part for part in cells.get(column, "").split("|") if part}
            if name != "sources":
                for column in ("provenance", "confidence"):
                    assert column not in columns or cells[column], (name, row)
    assert used == listed
    assert all(f"`{source}`" in page for source in listed)
    assert all(row[header.index("terms")] for row in rows)


def test_names_and_aliases_lead_to_one_row_each():
    for rows in (TABLES.lagging, TABLES.claddings):
        owner: dict[str, str] = {}
        for key, row in rows.items():
            for name in (key, row.name, *row.aliases):
                assert owner.setdefault(name.casefold(), key) == key, name


def test_tables_travel_to_another_process():
    assert pickle.loads(pickle.dumps(TABLES)) == TABLES
