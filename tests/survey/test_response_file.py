"""The spectral response of a camera, from a CSV."""

import numpy as np
import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.physics.band import Band
from cladwatt.survey.response_file import half_response_band
from cladwatt.survey.survey_file import read_survey

CSV = "wavelength_um,response\n7,0\n8,0.8\n10,1\n13,0.9\n14.5,0\n"
NAMED = '[camera]\nspectral_response = "response.csv"'


def read(folder, text, *, name=NAMED):
    folder.edit("[camera]", name)
    folder.write("response.csv", text)
    return read_survey(folder.root)


def test_the_response_is_read_in_metres(survey_folder):
    survey = read(survey_folder, CSV)
    assert survey.faults == ()
    waves, values = survey.camera.response
    assert waves == pytest.approx((7e-6, 8e-6, 10e-6, 13e-6, 14.5e-6))
    assert values == (0, 0.8, 1, 0.9, 0)
    assert Band(waves, values).radiance(np.array(300.0)) > 0
    assert "response.csv" in survey.digests
    assert survey.camera.band_source.startswith("declared")


def test_the_band_beside_it_ends_where_it_passes_a_half(survey_folder):
    # straight lines by hand: 7 + 0.5/0.8, and 13 + 1.5 (0.9 - 0.5)/0.9
    low, high = read(survey_folder, CSV).camera.band
    assert low * 1e6 == pytest.approx(7.625)
    assert high * 1e6 == pytest.approx(13.6667, abs=1e-4)


def test_a_response_cut_off_at_its_ends_ends_there():
    assert half_response_band(((7e-6, 10e-6, 14e-6), (1.0, 1.0, 1.0))) == (7e-6, 14e-6)


@pytest.mark.parametrize(
    "text",
    [
        "response;wavelength_um\n0;7\n0,8;8\n1;10\n0,9;13\n0;14,5\n",
        "# measured\nwavelength_nm,response\n7000,0\n8000,0.8\n10000,1\n13000,0.9\n14500,0\n",
    ],
)
def test_other_ways_of_writing_are_understood(survey_folder, text):
    waves, values = read(survey_folder, text).camera.response
    assert waves == pytest.approx((7e-6, 8e-6, 10e-6, 13e-6, 14.5e-6))
    assert values == (0, 0.8, 1, 0.9, 0)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("wavelength_um,response\n7,0\n9,1\n",
         "response.csv: the response has 2 points; expected 3 to 20000"),
        ("wavelength_um,response\n7,0\n9,1\n8,1\n14,0\n",
         "response.csv:4: wavelength: 8 µm follows 9 µm; expected the wavelength to rise"),
        ("wavelength_um,response\n7,0\n9,0\n14,0\n", "the response is 0 everywhere; expected some"),
        ("wavelength_um,response\n7,0\n9,-1\n14,0\n", "response.csv:3: response: response is -1"),
        ("wavelength_um,response\n7,0\n9000,1\n14,0\n", "wavelength_um is 9000"),
        ("wavelength_um,response\n7,0\n9,much\n14,0\n", "response is the text 'much'"),
        ("wavelength_um,response\n7,0\n9,\n14,0\n", "response.csv:3: a cell is empty"),
        ("wavelength,response\n7,0\n9,1\n14,0\n",
         "response.csv:1: there is no column wavelength_um; expected one"),
        ("", "response.csv: the file is empty"),
    ],
)  # fmt: skip
def test_a_faulty_response_stops_the_survey(survey_folder, text, message):
    with pytest.raises(SurveyFileError) as caught:
        read(survey_folder, text)
    assert message in str(caught.value), str(caught.value)


def test_a_missing_file_is_said(survey_folder):
    survey_folder.edit("[camera]", NAMED.replace("response.csv", "respons.csv"))
    survey_folder.write("response.csv", CSV)
    with pytest.raises(SurveyFileError, match=r"there is no file 'respons.csv'.*response.csv"):
        read_survey(survey_folder.root)


def test_the_two_ends_beside_a_response_contradict_it(survey_folder):
    with pytest.raises(SurveyFileError) as caught:
        read(survey_folder, CSV, name=f"{NAMED}\nband_lower_um = 8\nband_upper_um = 14")
    assert "spectral_response and band_lower_um are both given" in str(caught.value)
