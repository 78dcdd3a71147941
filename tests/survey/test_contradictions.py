"""What is declared and cannot both be so is asked about; nothing stops for it."""

import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.survey.survey_file import read_survey

INDOORS = "indoors = true"
OUTDOORS = "indoors = false\nwind_speed_m_s = 1.0"
WOOL = "lagging_thickness_mm = 50"
SITE = "altitude_m = 95"
ACCURACY = "accuracy_K = 2.0\naccuracy_of_reading_percent = 2.0"


def questions(folder, old, new):
    folder.edit(old, new)
    survey = read_survey(folder.root)
    assert not [fault for fault in survey.faults if fault.severity == "error"]
    return [f"{fault.found}; {fault.expected}" for fault in survey.faults]


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        (INDOORS, f"{OUTDOORS}\nsky_total_temperature_C = 50", "warmer than the air, 21 °C"),
        (
            INDOORS,
            f"{OUTDOORS}\nsky_total_temperature_C = -20\nsky_band_temperature_C = 20",
            "warmer than what the heat balance exchanges with in the sky, -20 °C",
        ),
        (INDOORS, f"{INDOORS}\nsky_view_factor = 0.5", "but sky_view_factor is declared"),
        (INDOORS, f"{INDOORS}\nsolar_irradiance_W_m2 = 300", "indoors is true, but solar_irr"),
        (
            INDOORS,
            f"{OUTDOORS}\nsun_on_pipe = false\nsolar_irradiance_W_m2 = 300",
            "sun_on_pipe is false, but solar_irradiance_W_m2 is 300; expected 0",
        ),
        (INDOORS, f"{INDOORS}\nwindow_temperature_C = 30", "expected window_transmission beside"),
        (SITE, "altitude_m = 1500\npressure_hPa = 1015", "near 846 hPa; expected the absolute"),
        (ACCURACY, "accuracy_K = 0", "accuracy_K is 0: the camera would make no error"),
        (WOOL, f'{WOOL}\nlagging_condition = "ice"', "inside the line it is 165 °C"),
        (WOOL, f"{WOOL}\nlagging_conductivity_temperature_C = 50", "stands without a conductiv"),
        (
            f'lagging_material = "mineral_wool_pipe_section"\n{WOOL}',
            'layers = [{ kind = "air_gap", thickness_mm = 150 }]',
            "an air gap is 150 mm wide; expected some millimetres",
        ),
    ],
)
def test_what_contradicts_is_asked_about(survey_folder, old, new, said):
    assert any(said in message for message in questions(survey_folder, old, new))


@pytest.mark.parametrize(
    ("old", "new"),
    [
        (INDOORS, f"{OUTDOORS}\nsky_total_temperature_C = 10\nsky_band_temperature_C = -10"),
        (INDOORS, f"{OUTDOORS}\nsky_total_temperature_C = 23\nsky_band_temperature_C = 23"),
        (INDOORS, f"{OUTDOORS}\nsun_on_pipe = false\nsolar_irradiance_W_m2 = 0"),
        (INDOORS, f"{OUTDOORS}\nsun_on_pipe = true\nsolar_irradiance_W_m2 = 300"),
        (INDOORS, f"{INDOORS}\nwindow_temperature_C = 30\nwindow_transmission = 0.8"),
        (SITE, "altitude_m = 1500\npressure_hPa = 850"),
        (ACCURACY, "accuracy_K = 0\naccuracy_of_reading_percent = 2"),
        (WOOL, f'{WOOL}\nlagging_condition = "wet"'),
    ],
)
def test_what_fits_is_not(survey_folder, old, new):
    said = questions(survey_folder, old, new)
    for words in ("warmer than", "is false, but", "beside it", "no error", "hPa", "hold ice"):
        assert not any(words in message for message in said)


def test_a_distance_beyond_what_is_known_of_the_air_is_refused(survey_folder):
    survey_folder.edit(INDOORS, f"{INDOORS}\ndistance_m = 160")
    with pytest.raises(
        SurveyFileError, match=r"distance_m is 160; expected 0 < distance <= 150 \[m\]"
    ):
        read_survey(survey_folder.root)
