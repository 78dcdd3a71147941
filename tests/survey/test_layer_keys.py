"""Layers of a line: air gaps, wet and frozen lagging, heat capacity, default uncertainties."""

import math

import pytest

from cladwatt.physics.air_gap import air_gap_conductance
from cladwatt.survey.survey_file import read_survey

SINGLE = 'lagging_material = "mineral_wool_pipe_section"\nlagging_thickness_mm = 50'


def line_of(folder, written):
    survey = read_survey(folder.edit(SINGLE, written).root)
    return survey.lines.get("HS-101"), [str(fault) for fault in survey.faults]


def layers(*tables):
    return "layers = [" + ", ".join(f"{{ {table} }}" for table in tables) + "]"


WOOL = 'material = "mineral_wool", thickness_mm = 40'
GAP = 'kind = "air_gap", thickness_mm = 10'


def test_an_air_gap_passes_as_much_heat_as_its_parts(survey_folder):
    line, said = line_of(survey_folder, layers(WOOL, GAP + ", inner_emissivity = 0.8"))
    assert said == []
    wool, gap = line.layers
    assert (wool.kind, gap.kind, gap.material) == ("lagging", "air_gap", "air_gap")
    assert (gap.inner_emissivity.value, gap.outer_emissivity.value) == (0.8, 0.9)
    assert gap.outer_emissivity.is_default
    # DN 100, EN 10220: 114.3 mm; the faces of the gap lie at 194.3 and 214.3 mm
    temperature = gap.conductivity.temperature
    at = min(range(len(temperature)), key=lambda number: abs(temperature[number] - 340.0))
    conductance = float(
        air_gap_conductance(
            0.1943, 0.2143, inner_temperature=temperature[at] + 5,
            outer_temperature=temperature[at] - 5, inner_emissivity=0.8, outer_emissivity=0.9,
        )
    )  # fmt: skip
    k = gap.conductivity.conductivity[at]
    assert 2 * math.pi * k / math.log(0.2143 / 0.1943) == pytest.approx(conductance)
    assert line.lagged_diameter == pytest.approx(0.2143 + 2 * line.cladding.thickness.value)


def test_radiation_rises_with_temperature_and_emissivity(survey_folder):
    line, _ = line_of(survey_folder, layers(GAP, GAP + ", outer_emissivity = 0.1"))
    dull, bright = (layer.conductivity.conductivity for layer in line.layers)
    assert list(dull) == sorted(dull)
    assert all(one > other for one, other in zip(dull, bright, strict=True))
    # still air alone conducts 0.026 W/(m K) near 300 K (Incropera et al., table A.4)
    assert bright[4] > 0.025


def test_an_air_gap_on_a_pipe_of_unknown_size_has_no_conductivity(survey_folder):
    survey_folder.edit("dn = 100", 'dn = "unknown"')
    line, _ = line_of(survey_folder, layers(GAP))
    assert line.layers[0].conductivity is None
    assert line.layers[0].thickness.value == pytest.approx(0.010)


@pytest.mark.parametrize(
    ("written", "message"),
    [
        (layers(GAP + ', material = "mineral_wool"'),
         "layers[1].material: material is given for an air gap; delete it, or declare a layer of"
         " lagging"),
        (layers(GAP + ", conductivity_W_m_K = 0.03"),
         "conductivity_W_m_K is given for an air gap"),
        (layers(GAP + ', condition = "wet"'), "condition is 'wet' for an air gap"),
        (layers(WOOL + ", inner_emissivity = 0.9"),
         'inner_emissivity is given for lagging; expected it only with kind = "air_gap"'),
        (layers("thickness_mm = 40"),
         'material is missing; expected a name in the material tables, or "unknown"'),
        (layers(GAP + ", outer_emissivity = 1.2"), "expected 0 < outer_emissivity <= 1"),
        (layers('kind = "gap", thickness_mm = 10'),
         "kind is 'gap'; expected one of \"lagging\", \"air_gap\""),
        (SINGLE + '\nlagging_condition = "damp"', 'expected one of "dry", "wet", "ice"'),
        ('layers = "mineral wool"', "layers is 'mineral wool'; expected a list of tables, [{ mat"),
        ("layers = []", "layers is []; expected a list of tables"),
        (layers(WOOL) + '\nlagging_condition = "wet"',
         "layers and lagging_condition are both given"),
    ],
)  # fmt: skip
def test_a_faulty_layer_leaves_out_the_line(survey_folder, written, message):
    line, said = line_of(survey_folder, written)
    assert line is None
    assert any(message in text for text in said), said


def test_wet_lagging_conducts_within_the_published_range(survey_folder):
    # Gusyachkin et al. 1.33 at least; trade magazine 2017, order of magnitude 10 at most
    line, said = line_of(survey_folder, SINGLE + '\nlagging_condition = "wet"')
    assert said == []
    (layer,) = line.layers
    assert layer.condition == "wet"
    factor = layer.condition_factor
    assert (factor.lower, factor.upper, factor.shape) == (1.33, 10, "lognormal")
    assert factor.value == pytest.approx(math.sqrt(13.3))
    assert factor.value * math.exp(2 * factor.u / factor.value) == pytest.approx(10)
    assert factor.is_default


def test_frozen_lagging_conducts_more_than_wet(survey_folder):
    line, _ = line_of(
        survey_folder,
        layers(WOOL + ', condition = "ice"', WOOL + ', condition = "wet"', WOOL),
    )
    ice, wet, dry = line.layers
    assert ice.condition_factor.value > wet.condition_factor.value
    assert dry.condition_factor is None
    assert ice.conductivity == wet.conductivity == dry.conductivity


def test_closed_cells_take_up_nothing(survey_folder):
    # ISO 10456: no moisture conversion for cellular glass
    line, _ = line_of(
        survey_folder, layers('material = "cellular_glass", thickness_mm = 40, condition = "ice"')
    )
    assert (line.layers[0].condition_factor.value, line.layers[0].condition_factor.u) == (1.0, 0.0)


def test_a_material_without_wet_ratio_is_asked_about(survey_folder):
    line, said = line_of(
        survey_folder, layers('material = "unknown", thickness_mm = 40, condition = "wet"')
    )
    assert line.layers[0].condition == "wet"
    assert line.layers[0].condition_factor is None
    assert any("how much more it then conducts is not held" in text for text in said), said


def test_layers_bring_their_heat_capacity(survey_folder):
    line, _ = line_of(survey_folder, layers(WOOL, 'material = "unknown", thickness_mm = 20', GAP))
    wool, unknown, gap = line.layers
    assert wool.density.value == pytest.approx(100)
    assert wool.specific_heat.u > 0
    assert unknown.density is unknown.specific_heat is gap.density is None


def test_a_line_list_in_csv_may_hold_an_air_gap(survey_folder):
    survey_folder.edit("[survey]", '[survey]\nline_list = "lines.csv"')
    survey_folder.write(
        "lines.csv",
        "tag,dn,cladding,fluid_temperature_C,lagging_1_material,lagging_1_thickness_mm,"
        "lagging_2_kind,lagging_2_thickness_mm\n"
        "HS-9,80,painted_steel,150,mineral_wool,40,air_gap,8\n",
    )
    line = read_survey(survey_folder.root).lines["HS-9"]
    assert [layer.kind for layer in line.layers] == ["lagging", "air_gap"]


# uncertainties from the table of defaults


def own_default(folder, name, value):
    folder.write("tables/defaults.csv", f"quantity,value,u\n,see unit,see unit\n{name},{value},0\n")
    return read_survey(folder.root)


def test_an_own_default_uncertainty_replaces_the_one_that_ships(survey_folder):
    thickness = read_survey(survey_folder.root).lines["HS-101"].layers[0].thickness
    assert thickness.u == pytest.approx(0.0025)
    survey = own_default(survey_folder, "u_relative_lagging_thickness", 0.1)
    thickness = survey.lines["HS-101"].layers[0].thickness
    assert thickness.u == pytest.approx(0.005)
    assert thickness.source == "declared; u by default: tables/defaults.csv"


@pytest.mark.parametrize(
    ("name", "value", "written", "u"),
    [
        ("u_relative_conductivity", 0.2, "lagging_conductivity_W_m_K = 0.04", 0.2),
        ("u_relative_pipe_outside_diameter", 0.02, "", 0.02),
    ],
)
def test_each_relative_default_is_used(survey_folder, name, value, written, u):
    if written:
        survey_folder.edit("lagging_thickness_mm = 50", f"lagging_thickness_mm = 50\n{written}")
        line = own_default(survey_folder, name, value).lines["HS-101"]
        assert line.layers[0].conductivity_factor.u == pytest.approx(u)
    else:
        line = own_default(survey_folder, name, value).lines["CW-7"]
        assert line.pipe_outside_diameter.u == pytest.approx(0.0603 * u)


def test_a_contact_reading_takes_its_uncertainty_from_the_defaults(survey_folder, drawn, box):
    contact = drawn("c", role="contact", width_px=None, geometry=box(20, 20), value_C=60)
    survey_folder.draw(drawn(), contact)
    regions = {region.id: region for region in read_survey(survey_folder.root).regions}
    assert regions["c"].value.u == 1.5
    survey = own_default(survey_folder, "u_contact_reading", 3.0)
    regions = {region.id: region for region in survey.regions}
    assert regions["c"].value.u == 3.0


def test_a_survey_carries_its_defaults(survey_folder):
    survey = read_survey(survey_folder.root)
    for name in ("tape_emissivity", "foil_emissivity", "water_film_emissivity", "distance"):
        assert survey.defaults[name].is_default
    assert survey.defaults["tape_emissivity"].value == 0.95
