"""What is inside a line: steam pressure, film, flow, tracer, supports."""

import math

import pytest

from cladwatt.survey.survey_file import read_survey

TEMPERATURE = "fluid_temperature_C = 165.0"


def line_of(folder, written, *, old=TEMPERATURE):
    survey = read_survey(folder.edit(old, written).root)
    said = [str(fault) for fault in survey.faults]
    return survey.lines.get("HS-101"), said


@pytest.mark.parametrize(
    ("written", "kelvin"),
    # IAPWS R7-97(2012), table 36, printed: 0.1, 1 and 10 MPa
    [
        ('steam_pressure_MPa = 0.1\nsteam_pressure_is = "absolute"', 372.755919),
        ('steam_pressure_bar = 10\nsteam_pressure_is = "absolute"', 453.035632),
        ('steam_pressure_kPa = 10000\nsteam_pressure_is = "absolute"', 584.149488),
    ],
)
def test_an_absolute_steam_pressure_gives_the_printed_temperature(survey_folder, written, kelvin):
    line, said = line_of(survey_folder, written)
    assert said == []
    assert line.inside_temperature.value == pytest.approx(kelvin, abs=5e-6)
    assert line.inside_is == "fluid"
    assert not line.inside_temperature.is_default


def test_a_gauge_pressure_counts_from_the_air_of_the_site(survey_folder, evidence):
    # CoolProp, IAPWS-95: differs from IF97 by 0.01 K at most
    from CoolProp.CoolProp import PropsSI

    survey_folder.edit("altitude_m = 95", "pressure_hPa = 900\nu_pressure_hPa = 2")
    line, said = line_of(survey_folder, 'steam_pressure_bar = 7\nsteam_pressure_is = "gauge"')
    assert said == []
    assert line.steam_pressure.value == pytest.approx(7.9e5)
    expected = PropsSI("T", "P", 7.9e5, "Q", 1, "Water")
    found = line.inside_temperature.value
    evidence("coolprop_saturation", "by a gauge, 900 hPa", found, expected, unit="K", abs=0.02)


def test_the_uncertainty_of_pressure_becomes_one_of_temperature(survey_folder, evidence):
    from CoolProp.CoolProp import PropsSI

    survey_folder.edit("altitude_m = 95", "pressure_hPa = 1000\nu_pressure_hPa = 20")
    line, _ = line_of(
        survey_folder,
        'steam_pressure_bar = 4\nu_steam_pressure_bar = 0.15\nsteam_pressure_is = "gauge"',
    )
    u = math.hypot(0.15e5, 0.02e5)
    assert line.steam_pressure.u == pytest.approx(u)
    high, low = (PropsSI("T", "P", 5e5 + sign * u, "Q", 1, "Water") for sign in (1, -1))
    found = line.inside_temperature.u
    evidence("coolprop_saturation", "u of it", found, (high - low) / 2, unit="K", rel=1e-2)


def test_psi_is_read_too(survey_folder):
    # 100 psi over 101 325 Pa: 338 °F in old steam tables
    line, _ = line_of(survey_folder, 'steam_pressure_psi = 100\nsteam_pressure_is = "gauge"')
    assert (line.inside_temperature.value - 273.15) * 1.8 + 32 == pytest.approx(338, abs=0.5)


@pytest.mark.parametrize(
    ("written", "message"),
    [
        ("steam_pressure_bar = 7",
         "steam_pressure_bar is 7 bar, but not said over what; expected steam_pressure_is ="
         ' "gauge" or "absolute" beside it; it is not guessed'),
        ('steam_pressure_bar = 7\nsteam_pressure_is = "gage"',
         "steam_pressure_is is 'gage'; expected one of \"gauge\", \"absolute\""),
        ('fluid_temperature_C = 165.0\nsteam_pressure_is = "gauge"',
         "steam_pressure_is stands without steam_pressure; expected steam_pressure_bar beside it"),
        ('steam_pressure = 7\nsteam_pressure_is = "gauge"',
         "steam_pressure says no unit; expected steam_pressure_bar or steam_pressure_kPa"),
        ('steam_pressure_bar = -0.5\nsteam_pressure_is = "absolute"',
         "steam_pressure_bar is -0.5 bar absolute; expected 0.006112 to 220.6 bar absolute"),
        ('steam_pressure_bar = -0.999\nsteam_pressure_is = "gauge"\n',
         "steam_pressure_bar is -0.999 bar gauge; expected -0.9958"),
        ('steam_pressure_bar = 7\nsteam_pressure_is = "gauge"\nwall_temperature_C = 160',
         "steam pressure and wall temperature are both given"),
        ('steam_pressure_bar = 7\nsteam_pressure_is = "gauge"\nfluid_temperature_C = 120',
         "fluid_temperature is 120 °C, but saturated steam of steam_pressure_bar has 170."),
        ('steam_pressure_bar = 7\nsteam_pressure_is = "gauge"\nfluid = "superheated steam"',
         "steam_pressure_bar is given for superheated steam; expected fluid_temperature"),
    ],
)  # fmt: skip
def test_a_steam_pressure_that_cannot_be_used_leaves_out_the_line(survey_folder, written, message):
    line, said = line_of(survey_folder, written)
    assert line is None
    assert any(message in text for text in said), said


def test_a_fluid_hotter_than_saturation_is_taken_and_asked_about(survey_folder):
    line, said = line_of(
        survey_folder,
        'steam_pressure_bar = 7\nsteam_pressure_is = "gauge"\nfluid_temperature_C = 230',
    )
    assert line.inside_temperature.value == pytest.approx(503.15)
    assert any("as of superheated steam" in text for text in said), said


@pytest.mark.parametrize(
    ("u_fluid", "by_pressure"), [("2.0", True), ("0.1", False)]
)  # fmt: skip
def test_of_two_statements_that_agree_the_better_counts(survey_folder, u_fluid, by_pressure):
    line, said = line_of(
        survey_folder,
        'steam_pressure_bar = 7\nsteam_pressure_is = "gauge"\nu_steam_pressure_bar = 0.05\n'
        f"fluid_temperature_C = 171\nu_fluid_temperature_C = {u_fluid}",
    )
    assert said == []
    assert ("IAPWS" in line.inside_temperature.source) is by_pressure


def test_pressure_for_another_fluid_than_steam_is_asked_about(survey_folder):
    _, said = line_of(
        survey_folder,
        'steam_pressure_bar = 7\nsteam_pressure_is = "gauge"\nfluid = "thermal oil"',
    )
    assert any("the fluid is 'thermal oil'" in text for text in said), said


def test_an_unknown_steam_pressure_is_no_fault(survey_folder):
    line, said = line_of(survey_folder, 'steam_pressure = "unknown"')
    assert said == []
    assert line.inside_temperature is None


# film, flow, supports


def test_film_flow_and_supports_are_kept(survey_folder):
    line, said = line_of(
        survey_folder,
        f"{TEMPERATURE}\ninside_film_W_m2_K = 40\nu_inside_film_W_m2_K = 8\nflow_kg_h = 1800\n"
        "specific_heat_kJ_kg_K = 2.2\nsupports_allowance_percent = 15",
    )
    assert said == []
    assert (line.inside_film.value, line.inside_film.u) == (40, 8)
    assert line.flow.value == pytest.approx(0.5)
    assert line.specific_heat.value == pytest.approx(2200)
    assert line.supports_allowance.value == pytest.approx(0.15)
    assert line.supports_allowance.u == pytest.approx(0.045)


def test_supports_are_in_the_installation_factor_unless_declared(survey_folder):
    allowance = read_survey(survey_folder.root).lines["HS-101"].supports_allowance
    assert (allowance.value, allowance.u) == (0.0, 0.0)
    assert allowance.is_default
    assert allowance.source


@pytest.mark.parametrize(
    ("written", "message"),
    [
        ("flow_kg_s = 1", "flow stands without specific_heat: the fall of temperature"),
        ("specific_heat_J_kg_K = 4180", "specific_heat stands without flow"),
    ],
)
def test_flow_and_specific_heat_belong_together(survey_folder, written, message):
    _, said = line_of(survey_folder, f"{TEMPERATURE}\n{written}")
    assert any(message in text for text in said), said


def test_a_film_beside_a_wall_temperature_is_not_used(survey_folder):
    line, said = line_of(survey_folder, "wall_temperature_C = 160\ninside_film_W_m2_K = 40")
    assert (line.inside_is, line.inside_film) == ("wall", None)
    assert any("the film is not used" in text for text in said), said


@pytest.mark.parametrize(
    ("written", "message"),
    [
        ("inside_film_W_m2_K = 0", "expected 0.1 <= inside_film <= 1e+06 [W/(m2 K)]"),
        ("flow_kg_s = 0", "expected 0 < flow <= 100000 [kg/s]"),
        ("supports_allowance = 0.8", "expected 0 <= supports_allowance <= 0.5"),
        ('tracing = "gas"', 'expected one of "none", "steam", "electric"'),
        ('tracing = "electric"\ntracer_clock_position = 13', "tracer_clock_position is 13"),
        ('tracing = "steam"\ntracer_temperature_C = 1000', "tracer_temperature_C is 1000"),
        ('tracing = "steam"\ntracer_power_W_m = 20',
         "tracer_power_W_m is given, but the tracer is a steam tracer; expected tracer_temperature;"
         " a power is that of an electric tracer"),
    ],
)  # fmt: skip
def test_values_out_of_range_leave_out_the_line(survey_folder, written, message):
    line, said = line_of(survey_folder, f"{TEMPERATURE}\n{written}")
    assert line is None
    assert any(message in text for text in said), said


@pytest.mark.parametrize(
    ("written", "message"),
    [
        ("tracer_clock_position = 6", "tracer_clock_position is given but tracing is not"),
        ('tracing = "electric"\ntracer_temperature_C = 60', "the tracer at 60 °C is colder"),
    ],
)
def test_a_doubtful_tracer_is_asked_about(survey_folder, written, message):
    line, said = line_of(survey_folder, f"{TEMPERATURE}\n{written}")
    assert line is not None
    assert any(message in text for text in said), said


def test_a_sound_tracer_is_kept_without_a_question(survey_folder):
    line, said = line_of(
        survey_folder,
        f'{TEMPERATURE}\ntracing = "electric"\ntracer_clock_position = 5\ntracer_power_W_m = 20',
    )
    assert said == []
    assert (line.tracing.kind, line.tracing.clock_position) == ("electric", 5)
    assert line.tracing.power.value == 20
