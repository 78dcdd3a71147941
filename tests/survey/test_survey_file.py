"""The survey file: what is read, which defaults hold, and what stops or is left out."""

from datetime import UTC, datetime
from zoneinfo import ZoneInfo

import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.materials.tables import table_rows
from cladwatt.survey.survey_file import read_survey


def stops(folder, message):
    with pytest.raises(SurveyFileError) as caught:
        read_survey(folder.root)
    assert message in str(caught.value)
    return caught.value


def left_out(folder, message):
    survey = read_survey(folder.root)
    texts = [str(fault) for fault in survey.faults if fault.severity == "error"]
    assert any(message in text for text in texts), texts
    return survey


def asks(folder, message):
    survey = read_survey(folder.root)
    texts = [str(fault) for fault in survey.faults if fault.severity == "question"]
    assert any(message in text for text in texts), texts
    return survey


def test_a_sound_survey_is_read_without_fault_or_question(survey_folder):
    survey = read_survey(survey_folder.root)
    assert survey.faults == ()
    assert (survey.name, survey.inspector) == ("Weaving shed", "R. Okafor")
    assert list(survey.lines) == ["HS-101", "CW-7"]
    assert [frame.id for frame in survey.frames] == ["f01", "f02"]
    assert [region.id for region in survey.regions_of("f02")] == ["west"]
    assert set(survey.digests) == {"survey.toml", "regions/f01.geojson", "regions/f02.geojson"}


def test_values_are_in_si_with_their_uncertainty(survey_folder):
    survey = read_survey(survey_folder.root)
    air = survey.frames[0].conditions.air_temperature
    assert (air.value, air.u, air.source) == (294.15, 0.5, "declared")
    thickness = survey.lines["HS-101"].layers[0].thickness
    assert thickness.value == pytest.approx(0.050)
    assert thickness.u == pytest.approx(0.0025)
    assert "u by default" in thickness.source
    assert not thickness.is_default


def test_a_nominal_size_gives_the_published_diameter(survey_folder):
    # EN 10220, series 1: DN 100 is 114.3 mm
    diameter = read_survey(survey_folder.root).lines["HS-101"].pipe_outside_diameter
    assert diameter.value == pytest.approx(0.1143)


@pytest.mark.parametrize(
    ("nps", "series", "millimetres"),
    # ASME B36.10M: NPS 2 1/2 is 2.875 in; EN 10220 gives 76.1 mm for the same size
    [('"2 1/2"', "ASME", 73.0), ("2.5", "ASME", 73.0), ('"2 1/2"', "EN", 76.1)],
)
def test_an_nps_size_may_name_its_series(survey_folder, nps, series, millimetres):
    survey_folder.edit("dn = 100", f'nps = {nps}\npipe_series = "{series}"')
    diameter = read_survey(survey_folder.root).lines["HS-101"].pipe_outside_diameter
    assert diameter.value * 1e3 == pytest.approx(millimetres, abs=0.05)


@pytest.mark.parametrize(
    ("written", "kelvin", "u"),
    [
        ("air_temperature_F = 70.0\nu_air_temperature_F = 1.8", 294.261, 1.0),
        ("air_temperature_K = 294.15\nu_air_temperature_C = 0.4", 294.15, 0.4),
        ("air_temperature_C = { value = 21.0, u = 0.7 }", 294.15, 0.7),
        ("air_temperature_C = 21", 294.15, 1.0),
    ],
)
def test_each_unit_and_way_of_writing_gives_the_same_quantity(survey_folder, written, kelvin, u):
    survey_folder.edit("air_temperature_C = 21.0\nu_air_temperature_C = 0.5", written)
    air = read_survey(survey_folder.root).frames[0].conditions.air_temperature
    assert air.value == pytest.approx(kelvin, abs=1e-3)
    assert air.u == pytest.approx(u)


@pytest.mark.parametrize(
    ("written", "metres_per_second"),
    [("wind_speed_m_s = 2", 2.0), ("wind_speed_km_h = 7.2", 2.0), ("wind_speed_mph = 10", 4.4704)],
)
def test_wind_in_any_accepted_unit(survey_folder, written, metres_per_second):
    survey_folder.edit("indoors = true", f"indoors = true\n{written}")
    wind = read_survey(survey_folder.root).frames[0].conditions.wind_speed
    assert wind.value == pytest.approx(metres_per_second)


def test_a_frame_overrides_the_survey_and_keeps_the_uncertainty_declared_once(survey_folder):
    first, second = read_survey(survey_folder.root).frames
    assert first.conditions.air_temperature.value == pytest.approx(294.15)
    assert second.conditions.air_temperature.value == pytest.approx(298.15)
    assert second.conditions.air_temperature.u == 0.5
    assert second.conditions.surroundings_temperature.value == pytest.approx(298.15)


def test_a_frame_may_override_the_uncertainty_alone(survey_folder):
    survey_folder.edit(
        'file = "frames/f01.csv"', 'file = "frames/f01.csv"\nu_air_temperature_K = 2'
    )
    air = read_survey(survey_folder.root).frames[0].conditions.air_temperature
    assert (air.value, air.u) == (294.15, 2.0)


def test_a_frame_overrides_camera_settings_and_format(survey_folder):
    survey_folder.edit(
        "air_temperature_C = 25.0",
        'camera_emissivity = 1.0\nunit = "K"\nrows_from = "bottom"\npage = 2\nrange_upper_C = 120',
    )
    first, second = read_survey(survey_folder.root).frames
    assert (first.recording.emissivity, second.recording.emissivity) == (0.95, 1.0)
    assert (first.format.unit, second.format.unit) == ("C", "K")
    assert (second.format.rows_from, second.format.page) == ("bottom", 2)
    assert second.format.range_upper == pytest.approx(393.15)


def test_a_frame_can_declare_unknown_what_the_survey_declares(survey_folder):
    survey_folder.edit("air_temperature_C = 25.0", 'air_temperature = "unknown"')
    conditions = read_survey(survey_folder.root).frames[1].conditions
    assert conditions.air_temperature is None
    assert conditions.reflected_temperature is None


def test_indoor_defaults_follow_the_air_and_name_their_source(survey_folder):
    conditions = read_survey(survey_folder.root).frames[0].conditions
    for quantity in (conditions.surroundings_temperature, conditions.reflected_temperature):
        assert quantity.value == pytest.approx(294.15)
        assert quantity.u == 2.0
        assert quantity.source.startswith("as the air, u 2 K indoors")
    assert (conditions.wind_speed.value, conditions.wind_speed.u) == (0.15, 0.1)
    assert conditions.relative_humidity.is_default


def test_outdoors_there_is_no_default_wind_and_the_surroundings_are_wide(survey_folder):
    survey_folder.edit("indoors = true", "indoors = false")
    survey = asks(survey_folder, "wind_speed_m_s is missing outdoors")
    conditions = survey.frames[0].conditions
    assert conditions.wind_speed is None
    assert conditions.surroundings_temperature.u == 10.0


def test_a_declared_sky_takes_the_place_of_the_default_but_not_of_the_other_sky(survey_folder):
    survey_folder.edit("indoors = true", "indoors = false\nsky_total_temperature_C = -5")
    conditions = read_survey(survey_folder.root).frames[0].conditions
    assert conditions.surroundings_temperature is None
    assert conditions.sky_band_temperature is None
    assert conditions.reflected_temperature.source.startswith("as the air")
    assert conditions.sky_view_factor.value == 0.5


def test_declared_surroundings_indoors_are_what_is_mirrored_too(survey_folder):
    survey_folder.edit("indoors = true", "indoors = true\nsurroundings_temperature_C = 30")
    reflected = read_survey(survey_folder.root).frames[0].conditions.reflected_temperature
    assert reflected.value == pytest.approx(303.15)
    assert reflected.u == pytest.approx(8**0.5)


def test_a_time_without_zone_takes_the_declared_one(survey_folder):
    survey = read_survey(survey_folder.root)
    assert survey.frames[0].time == datetime(2026, 3, 18, 8, 40, tzinfo=UTC)


def test_a_named_zone_is_found(survey_folder):
    survey_folder.edit('timezone = "+01:00"', 'timezone = "Europe/Berlin"')
    time = read_survey(survey_folder.root).frames[0].time
    assert time == datetime(2026, 3, 18, 9, 40, tzinfo=ZoneInfo("Europe/Berlin"))


def test_a_time_without_any_zone_is_asked_for_and_not_used(survey_folder):
    survey_folder.edit('timezone = "+01:00"\n', "")
    survey = asks(survey_folder, "time 2026-03-18 09:40:00 says no zone and is not used")
    assert survey.frames[0].time is None


def test_a_time_in_the_hour_the_clocks_change_is_asked_for(survey_folder):
    survey_folder.edit('timezone = "+01:00"', 'timezone = "Europe/Berlin"')
    survey_folder.edit("2026-03-18T09:40:00", "2026-10-25T02:30:00")
    asks(survey_folder, "lies in the hour the clocks change")


def test_air_pressure_follows_the_altitude(survey_folder, evidence):
    # ISO 2533:1975: 8.98763e4 Pa at a geometric altitude of 1000 m
    survey_folder.edit("altitude_m = 95", "altitude_m = 1000")
    pressure = read_survey(survey_folder.root).site.pressure
    evidence("iso_2533", "pressure", pressure.value, 89876.3, unit="Pa", abs=0.05)
    assert pressure.is_default


def test_several_layers_from_the_inside_out(survey_folder):
    survey_folder.edit(
        'lagging_material = "mineral_wool_pipe_section"\nlagging_thickness_mm = 50',
        'layers = [{ material = "calcium silicate", thickness_mm = 25 }, '
        '{ material = "special", thickness_mm = 50, conductivity_W_m_K = 0.04 }]',
    )
    first, second = read_survey(survey_folder.root).lines["HS-101"].layers
    assert first.thickness.value == pytest.approx(0.025)
    assert set(second.conductivity.conductivity) == {0.04}
    assert second.conductivity_factor.u == pytest.approx(0.1)


def test_a_specified_conductivity_holds_at_every_temperature(survey_folder):
    survey_folder.edit("dn = 100", "dn = 100\nlagging_conductivity_mW_m_K = 45")
    layer = read_survey(survey_folder.root).lines["HS-101"].layers[0]
    assert set(layer.conductivity.conductivity) == {0.045}


def test_with_its_mean_temperature_it_scales_the_table(survey_folder):
    plain = read_survey(survey_folder.root).lines["HS-101"].layers[0].conductivity
    survey_folder.edit(
        "dn = 100",
        "dn = 100\nlagging_conductivity_W_m_K = 0.074\nlagging_conductivity_temperature_C = 50",
    )
    curve = read_survey(survey_folder.root).lines["HS-101"].layers[0].conductivity
    at = curve.temperature.index(323.15)
    assert curve.conductivity[at] == pytest.approx(0.074)
    ratios = [a / b for a, b in zip(curve.conductivity, plain.conductivity, strict=True)]
    assert max(ratios) == pytest.approx(min(ratios))


def test_a_bare_pipe_has_no_layers_and_the_emissivity_of_oxidised_steel(survey_folder):
    survey_folder.edit(
        'lagging_material = "mineral_wool_pipe_section"\nlagging_thickness_mm = 50\n'
        'cladding = "painted_steel"',
        'lagging_material = "none"',
    )
    line = read_survey(survey_folder.root).lines["HS-101"]
    assert line.layers == ()
    assert line.lagged_diameter == pytest.approx(0.1143)
    assert line.cladding.name == "bare_steel_oxidised"


def test_what_is_declared_unknown_is_none_and_not_asked_for(survey_folder):
    survey_folder.edit("fluid_temperature_C = 165.0", 'fluid_temperature = "unknown"')
    survey_folder.edit("lagging_thickness_mm = 50", 'lagging_thickness_mm = "unknown"')
    survey_folder.edit("dn = 100", 'dn = "unknown"')
    survey = read_survey(survey_folder.root)
    line = survey.lines["HS-101"]
    assert survey.faults == ()
    assert line.inside_temperature is None
    assert line.layers[0].thickness is None
    assert line.pipe_outside_diameter is None


@pytest.mark.parametrize(
    ("removed", "key"),
    [
        ("fluid_temperature_C = 165.0\n", "fluid_temperature_C is missing"),
        ("lagging_thickness_mm = 50\n", "lagging_thickness_mm is missing"),
        ("dn = 100\n", "no pipe size is given"),
        ("indoors = true\n", "indoors is missing"),
        ("date = 2026-03-18\n", "date is missing"),
        ("emissivity = 0.95\n", "emissivity is missing and taken as 1"),
    ],
)
def test_what_has_no_default_is_asked_for(survey_folder, removed, key):
    survey_folder.edit(removed, "")
    asks(survey_folder, key)


def test_an_unknown_cladding_is_anything(survey_folder):
    survey_folder.edit('cladding = "painted_steel"', 'cladding = "unknown"')
    band = read_survey(survey_folder.root).lines["HS-101"].cladding.band_emissivity
    assert band.u == 0.25
    assert band.confidence == "low"


def test_a_declared_emissivity_moves_the_total_one_with_it(survey_folder):
    table = read_survey(survey_folder.root).lines["CW-7"].cladding
    survey_folder.edit(
        'cladding = "weathered_galvanised"',
        'cladding = "weathered_galvanised"\nemissivity = 0.5\nu_emissivity = 0.02',
    )
    cladding = read_survey(survey_folder.root).lines["CW-7"].cladding
    assert (cladding.band_emissivity.value, cladding.band_emissivity.u) == (0.5, 0.02)
    move = 0.5 - table.band_emissivity.value
    assert cladding.total_emissivity.value == pytest.approx(table.total_emissivity.value + move)
    assert "moved with the declared" in cladding.total_emissivity.source


def test_frames_need_not_be_listed(survey_folder):
    text = (survey_folder.root / "survey.toml").read_text()
    survey_folder.write("survey.toml", text[: text.index("[[frame]]")])
    assert [frame.id for frame in read_survey(survey_folder.root).frames] == ["f01", "f02"]


def test_a_users_material_table_is_read_and_its_digest_kept(survey_folder):
    header, units, rows = table_rows("claddings")
    own = list(rows[0])
    own[header.index("cladding")] = "hand_painted"
    own[header.index("aliases")] = ""
    text = "\n".join(",".join(f'"{cell}"' for cell in row) for row in (header, units, own))
    survey_folder.write("tables/claddings.csv", text)
    survey_folder.edit('cladding = "painted_steel"', 'cladding = "hand_painted"')
    survey = read_survey(survey_folder.root)
    assert survey.lines["HS-101"].cladding.name == "hand_painted"
    assert "tables/claddings.csv" in survey.digests


# --- what stops the survey ---------------------------------------------------------------------


def test_no_such_folder(tmp_path):
    with pytest.raises(SurveyFileError, match="there is no such folder"):
        read_survey(tmp_path / "nowhere")


def test_a_file_where_the_folder_should_be(survey_folder):
    with pytest.raises(SurveyFileError, match="this is a file; expected the folder"):
        read_survey(survey_folder.root / "survey.toml")


def test_no_survey_file(tmp_path):
    with pytest.raises(SurveyFileError, match=r"survey\.toml is missing"):
        read_survey(tmp_path)


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("air_temperature_C = 21.0", "air_temperature_C = 21,0",
         "survey.toml:20: not valid TOML: "),
        ("air_temperature_C = 21.0", "air_temperature_C = 21,0",
         "write numbers with a decimal point, not a comma"),
        ('name = "Weaving shed"', 'name = "Weaving shed', "survey.toml:2: not valid TOML"),
        ("[site]", "[site", "survey.toml:6: not valid TOML"),
        ("[site]", "[survey]", "not valid TOML"),
        ('"CW-7"', '"pipes\\CW-7"', "in paths write / or put the text in 'single quotes'"),
        ('name = "Weaving shed"\n', "", "survey.name: name is missing"),
        ('name = "Weaving shed"', "name = 3", "name is 3; expected text in quotes"),
        ("[camera]", "[kamera]", "there is no table 'kamera'; expected one of camera"),
        ("[survey]", "inspector = 'B'\n[survey]", "inspector stands outside of any table; "
         "expected it under [survey]"),
        ("accuracy_K", "acuracy_K", "there is no key 'acuracy_K' here; expected a key of camera "
         "(nearest: accuracy_K"),
        ("date = 2026-03-18", 'date = "18.3.2026"', "survey.toml:3: survey.date: date is "
         "'18.3.2026'; expected a date without quotes, 2026-03-18"),
        ("altitude_m = 95", "altitude = 95", "altitude says no unit; expected altitude_m or"),
        ("altitude_m = 95", "latitude_deg = 91", "latitude_deg is 91; expected -90 <= latitude"),
        ("altitude_m = 95", 'altitude_m = "95"', "altitude_m is the text '95'; expected a number, "
         "without quotes"),
        ("altitude_m = 95", 'altitude_m = "95,5"', "with a decimal point, 95.5, without quotes"),
        ("altitude_m = 95", "altitude_m = true", "altitude_m is true; expected a number"),
        ("altitude_m = 95", "altitude_m = nan", "altitude_m is nan; expected a finite number"),
        ("emissivity = 0.95", "emissivity = 1.3", "survey.toml:15: recording.emissivity: "
         "emissivity is 1.3; expected 0 < emissivity <= 1"),
        ("air_temperature_C = 21.0", "air_temperature_C = inf", "is inf; expected a finite number"),
        ("air_temperature_C = 21.0", "air_temperature_C = 294", "air_temperature_C is 294; "
         "expected -73.15 <= air_temperature <= 96.85 [°C]"),
        ("u_air_temperature_C = 0.5", "u_air_temperature_C = -0.5",
         "u_air_temperature_C is -0.5; expected a standard uncertainty >= 0"),
        ("u_air_temperature_C = 0.5", "air_temperature_K = 294",
         "air_temperature_C and air_temperature_K are both given"),
        ("air_temperature_C = 21.0", "air_temperature_C = { value = 21, sigma = 1 }",
         "air_temperature_C has 'sigma'; expected { value = ..., u = ... }"),
        ("indoors = true", 'indoors = "yes"', "indoors is 'yes'; expected true or false"),
        ("indoors = true", "relative_humidity = 55", "expected 0 <= relative_humidity <= 1"),
        ("indoors = true", "wind_speed_m_s = -1", "expected 0 <= wind_speed <= 40 [m/s]"),
        ("indoors = true", "distance_m = 0", "expected 0 < distance <= 150 [m]"),
        ('unit = "C"', 'unit = "Celsius"', 'unit is \'Celsius\'; expected one of "C", "K", "F"'),
        ('unit = "C"', "u_unit = 3", "unit takes no uncertainty"),
        ('timezone = "+01:00"', 'timezone = "Mars/Olympus"', "timezone is 'Mars/Olympus'"),
        ("accuracy_K = 2.0", "band_lower_um = 8", "only one end of the band is given"),
        ("accuracy_K = 2.0", "band_lower_um = 14\nband_upper_um = 8", "expected band_lower < "),
        ("inspector =", "line_list = \"lines.csv\"\ninspector =", "there is no file 'lines.csv'"),
        ("inspector =", "line_list = \"../l.csv\"\ninspector =", "'../l.csv' leaves the survey "
         "folder; copy the file into the survey"),
        ("inspector =", "frame_list = \"C:\\\\f.csv\"\ninspector =", "expected a path from the "
         "survey folder"),
        ("inspector =", "frame_list = \"/etc/passwd\"\ninspector =", "expected a path from the "
         "survey folder"),
        ("[[line]]", "[line]", "not valid TOML"),
    ],
)  # fmt: skip
def test_survey_wide_faults_stop_it_with_place_value_and_way_out(survey_folder, old, new, message):
    stops(survey_folder.edit(old, new), message)


def test_single_brackets_for_the_only_line(survey_folder):
    text = (survey_folder.root / "survey.toml").read_text()
    head, tail = text.split("[[line]]")[0], text[text.index("[[frame]]") :]
    survey_folder.write("survey.toml", head + '[line]\ntag = "HS-101"\n' + tail)
    stops(survey_folder, "[line] is a single table; expected double brackets, [[line]]")


def test_a_survey_without_lines(survey_folder):
    text = (survey_folder.root / "survey.toml").read_text()
    survey_folder.write("survey.toml", text.split("[[line]]")[0])
    stops(survey_folder, "the survey has no lines")


def test_a_survey_without_frames(survey_folder):
    text = (survey_folder.root / "survey.toml").read_text()
    survey_folder.write("survey.toml", text.split("[[frame]]")[0])
    for path in (survey_folder.root / "frames").iterdir():
        path.unlink()
    stops(survey_folder, "the survey lists no frames and frames/ holds none")


def test_the_text_must_be_utf8(survey_folder):
    text = (survey_folder.root / "survey.toml").read_text().replace("R. Okafor", "R. Müller")
    survey_folder.write("survey.toml", text.encode("latin-1"))
    stops(survey_folder, "survey.toml:4: the text is not UTF-8; save the file as UTF-8")


def test_a_byte_order_mark_and_windows_line_ends_do_no_harm(survey_folder):
    text = (survey_folder.root / "survey.toml").read_text().replace("\n", "\r\n")
    survey_folder.write("survey.toml", b"\xef\xbb\xbf" + text.encode())
    assert read_survey(survey_folder.root).faults == ()


def test_deep_nesting_is_refused_without_traceback(survey_folder):
    survey_folder.edit("altitude_m = 95", "altitude_m = " + "[" * 5000 + "]" * 5000)
    stops(survey_folder, "the TOML cannot be read")


def test_every_survey_wide_fault_is_named_at_once(survey_folder):
    survey_folder.edit("emissivity = 0.95", "emissivity = 1.3")
    survey_folder.edit("altitude_m = 95", "altitude_m = nan")
    survey_folder.edit("[camera]", "[camera]\nzoom = 2")
    error = stops(survey_folder, "emissivity is 1.3")
    assert [fault.line for fault in error.faults] == [7, 11, 16]


# --- what leaves out a line or a frame ---------------------------------------------------------


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("lagging_thickness_mm = 50", "lagging_thickness_mm = -50", "survey.toml:30: "
         "line[1] (HS-101).lagging_thickness_mm: lagging_thickness_mm is -50; "
         "expected 0 < lagging_thickness <= 1000 [mm]"),
        ("lagging_thickness_mm = 50", "lagging_thickness_m = 50", "expected 0 < lagging_thickness "
         "<= 1 [m]"),
        ("lagging_thickness_mm = 50", "lagging_thickness = 50", "says no unit; expected "
         "lagging_thickness_mm or lagging_thickness_m or lagging_thickness_in"),
        ("lagging_thickness_mm = 50", "u_lagging_thickness_mm = 5",
         "u_lagging_thickness stands without lagging_thickness"),
        ('cladding = "painted_steel"', 'cladding = "painted_steel"\nemissivity = 1.3',
         "emissivity is 1.3; expected 0 < emissivity <= 1"),
        ('cladding = "painted_steel"', 'cladding = "painted_steel"\nemissivity = 0',
         "emissivity is 0; expected 0 < emissivity <= 1"),
        ('cladding = "painted_steel"', 'cladding = "painted_stel"',
         "cladding is 'painted_stel': no cladding has this name"),
        ('cladding = "painted_steel"\n', "", "neither cladding nor emissivity is given"),
        ('"mineral_wool_pipe_section"', '"mineral_wol"', "no lagging material has this name"),
        ("dn = 100", "dn = 101", "dn is 101: the table has no such pipe size"),
        ("dn = 100", "dn = 100.5", "dn is 100.5; expected a whole number"),
        ("dn = 100", "dn = 100\nnps = 4", "dn and nps are both given"),
        ("dn = 100", "dn = 100\nwall_temperature_C = 160", "fluid and wall temperature are both"),
        ("dn = 100", "dn = 100\nlayers = []", "layers and lagging_material are both given"),
        ("dn = 100", "dn = 100\nlagging_conductivity_W_m_K = 38", "expected 0 < "
         "lagging_conductivity <= 5 [W/(m K)]"),
        ("dn = 100", "dn = 100\ninclination_deg = 120", "expected 0 <= inclination <= 90"),
        ("dn = 100", 'dn = 100\ntracing = "gas"', "tracing is 'gas'; expected one of"),
        ("dn = 100", "dn = 100\noutside_diameter_mm = 114", "(nearest: pipe_outside_diameter_mm"),
        ("fluid_temperature_C = 165.0", "fluid_temperature_C = 16.5", "service is 'hot' but the "
         "fluid at 16.5 °C is colder than the air of frame f01, 21 °C"),
        ("fluid_temperature_C = 165.0", "fluid_temperature_C = -300", "fluid_temperature_C is "
         "-300; expected -203.15 <= fluid_temperature"),
    ],
)  # fmt: skip
def test_a_fault_in_a_line_leaves_out_that_line_and_its_regions(survey_folder, old, new, message):
    survey = left_out(survey_folder.edit(old, new), message)
    assert list(survey.lines) == ["CW-7"]
    assert [region.id for region in survey.regions] == ["west"]
    dependent = [fault for fault in survey.faults if fault.region_id == "east"]
    assert len(dependent) == 1
    assert "its line 'HS-101' is left out" in str(dependent[0])


def test_a_chilled_line_warmer_than_the_air(survey_folder):
    survey_folder.edit("fluid_temperature_C = 6.0", "fluid_temperature_C = 60.0")
    left_out(survey_folder, "service is 'chilled' but the fluid at 60 °C is warmer than the air")


def test_steam_colder_than_the_air_needs_no_declared_service(survey_folder):
    survey_folder.edit(
        'fluid_temperature_C = 165.0\nservice = "hot"',
        'fluid_temperature_C = 16.5\nfluid = "saturated steam"',
    )
    left_out(survey_folder, "fluid is 'saturated steam' but the fluid at 16.5 °C is colder")


def test_a_tag_used_twice_leaves_out_both_lines(survey_folder):
    survey_folder.edit('tag = "CW-7"', 'tag = "hs-101"')
    survey = left_out(
        survey_folder, "the tag 'HS-101' is used more than once (also survey.toml:36)"
    )
    assert survey.lines == {}


def test_a_line_without_tag(survey_folder):
    survey_folder.edit('tag = "CW-7"\n', "")
    survey = left_out(survey_folder, "line[2].tag: tag is missing")
    assert list(survey.lines) == ["HS-101"]


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ('"frames/f02.csv"', '"frames/f03.csv"', "survey.toml:49: frame[2] (f03).file: there is no "
         "file 'frames/f03.csv'; expected one (nearest: f0"),
        ('"frames/f02.csv"', '"frames"', "'frames' is a folder; expected a file"),
        ('"frames/f02.csv"', '"../other.csv"', "leaves the survey folder"),
        ('"frames/f02.csv"', "7", "file is 7; expected text in quotes"),
        ("air_temperature_C = 25.0", "air_temperature_C = 250", "frame[2] (f02).air_temperature_C"),
        ("air_temperature_C = 25.0", "camera_emissivity = 0", "expected 0 < camera_emissivity"),
        ("air_temperature_C = 25.0", "camera_transmission = 0.9", "the camera was set to "
         "transmission 0.9 but not to which atmosphere_temperature"),
        ("air_temperature_C = 25.0", "recording = { emissivity = 0.9 }", "a table recording stands "
         "in a frame; write its keys directly in the frame with camera_ before them"),
        ("air_temperature_C = 25.0", "offset = 3", "offset stands without scale"),
        ("air_temperature_C = 25.0", "scale = 0.1", "scale stands without offset; expected both"),
        ("air_temperature_C = 25.0", "scale = 0\noffset = 3", "scale is 0"),
        ("air_temperature_C = 25.0", "page = -1", "expected 0 <= page"),
        ("air_temperature_C = 25.0", "range_lower_C = 90\nrange_upper_C = 20", "the recording "
         "range is empty"),
        ("air_temperature_C = 25.0", "u_distance_m = 1", "u_distance stands without distance"),
        ("air_temperature_C = 25.0", "window_reflectance = 0.1", "stands without its transmission"),
        ("air_temperature_C = 25.0", "window_transmission = 0.9\nwindow_reflectance = 0.2",
         "exceed 1 together"),
        ("air_temperature_C = 25.0", 'time = "9:40"', "time is '9:40'; expected date and time"),
        ("air_temperature_C = 25.0", 'id = "a/b"', "the frame's id is 'a/b'"),
        ("air_temperature_C = 25.0", 'labels = "labels/f02.png"', "there is no file 'labels/f02."),
    ],
)  # fmt: skip
def test_a_fault_in_a_frame_leaves_out_that_frame_alone(survey_folder, old, new, message):
    survey = left_out(survey_folder.edit(old, new), message)
    assert [frame.id for frame in survey.frames] == ["f01"]
    assert [region.id for region in survey.regions] == ["east"]


def test_a_frame_id_used_twice_leaves_out_both(survey_folder):
    survey_folder.edit("air_temperature_C = 25.0", 'id = "F01"')
    survey = left_out(survey_folder, "the frame id 'F01' is used more than once")
    assert survey.frames == ()


def test_a_missing_photo_is_only_asked_about(survey_folder):
    survey_folder.edit("air_temperature_C = 25.0", 'photo = "p.jpg"')
    survey = asks(survey_folder, "there is no file 'p.jpg'")
    assert len(survey.frames) == 2


def test_dates_that_do_not_fit_are_questioned(survey_folder):
    survey_folder.edit("accuracy_K = 2.0", "calibration_date = 2026-04-01")
    asks(survey_folder, "the camera was calibrated on 2026-04-01, after the survey")
    survey_folder.edit("2026-03-18T09:40:00", "2025-03-18T09:40:00")
    asks(survey_folder, "frame 'f01' was recorded on 2025-03-18, the survey made on 2026-03-18")


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("altitude_m = 95", "latitude_deg = 52", "latitude stands without longitude"),
        ("indoors = true", "indoors = true\nsun_on_pipe = true", "but solar_irradiance_W_m2 is"),
        ("emissivity = 0.95", 'emissivity = "unknown"', "emissivity is unknown and taken as 1"),
        ("dn = 100", "dn = 100\ntracer_power_W_m = 20", "tracer_power_W_m is given but tracing"),
    ],
)
def test_what_is_only_half_said_is_asked_about(survey_folder, old, new, message):
    survey = asks(survey_folder.edit(old, new), message)
    assert len(survey.regions) == 2


@pytest.mark.parametrize(
    ("written", "limit", "percent"),
    [("accuracy_K = 1.5", 1.5, 0.0), ("", 2.0, 2.0), ("accuracy_of_reading_percent = 1", 0.0, 1.0)],
)
def test_an_accuracy_statement_is_taken_as_declared_and_else_by_default(
    survey_folder, written, limit, percent
):
    survey_folder.edit("accuracy_K = 2.0\naccuracy_of_reading_percent = 2.0", written)
    accuracy = read_survey(survey_folder.root).camera.accuracy
    assert (accuracy.limit, accuracy.percent) == (limit, percent)
    assert (accuracy.source == "declared") is bool(written)
