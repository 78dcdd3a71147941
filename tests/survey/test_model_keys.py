import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.physics.convection import CONVECTION_MODELS
from cladwatt.survey.keys import section
from cladwatt.survey.survey_file import read_survey

FORMAT = '[format]\nunit = "C"'
WIND = "u_air_temperature_C = 0.5"


def with_model(folder, model, conditions=""):
    folder.edit(FORMAT, f'{FORMAT}\n\n[model]\nconvection = "{model}"')
    if conditions:
        folder.edit(WIND, f"{WIND}\n{conditions}")
    return folder


def refused(folder):
    with pytest.raises(SurveyFileError) as caught:
        read_survey(folder.root)
    (fault,) = caught.value.faults
    return fault


def test_the_key_offers_every_model_and_the_default_first():
    (key,) = section("model").keys
    assert key.choices == CONVECTION_MODELS
    assert key.default == CONVECTION_MODELS[0]


def test_without_the_table_the_default_holds(survey_folder):
    survey = read_survey(survey_folder.root)
    assert survey.convection_model == "churchill"
    assert survey.faults == ()


@pytest.mark.parametrize("model", CONVECTION_MODELS)
def test_each_model_is_taken_in_a_hall(survey_folder, model):
    survey = read_survey(with_model(survey_folder, model).root)
    assert survey.convection_model == model
    assert survey.faults == ()


def test_a_model_nobody_knows_is_refused(survey_folder):
    fault = refused(with_model(survey_folder, "churchil"))
    assert fault.where == "model.convection"
    assert "churchil" in fault.found
    assert "morgan_zukauskas" in fault.expected


@pytest.mark.parametrize(
    ("conditions", "found"),
    [
        ("wind_speed_m_s = 0.4", "frame 'f01' has a wind of 0.4 m/s"),
        ("wind_speed_m_s = 0.4\nsheltered = true", "frame 'f01' has a wind of 0.4 m/s"),
    ],
)
def test_the_indoor_rule_is_refused_in_wind(survey_folder, conditions, found):
    fault = refused(with_model(survey_folder, "iso12241_indoor", conditions))
    assert (fault.path, fault.where) == ("survey.toml", "model.convection")
    assert fault.line is not None
    assert found in fault.found
    assert "still air" in fault.expected
    assert "churchill" in fault.expected


def test_the_indoor_rule_is_refused_outdoors(survey_folder):
    survey_folder.edit("indoors = true", 'indoors = false\nwind_speed_m_s = "unknown"')
    fault = refused(with_model(survey_folder, "iso12241_indoor"))
    assert "frame 'f01' was recorded outdoors" in fault.found


def test_the_indoor_rule_is_refused_for_a_single_frame_in_wind(survey_folder):
    survey_folder.edit("air_temperature_C = 25.0", "air_temperature_C = 25.0\nwind_speed_m_s = 2")
    fault = refused(with_model(survey_folder, "iso12241_indoor"))
    assert "frame 'f02' has a wind of 2 m/s" in fault.found


def test_still_air_declared_is_accepted(survey_folder):
    folder = with_model(survey_folder, "iso12241_indoor", "wind_speed_m_s = 0")
    assert read_survey(folder.root).convection_model == "iso12241_indoor"
