"""Surroundings in pieces, the sky by its clouds, shelter and a wet surface."""

import re

import pytest

from cladwatt.errors import SurveyFileError
from cladwatt.survey.survey_file import read_survey

AIR = "air_temperature_C = 21.0\nu_air_temperature_C = 0.5"
OUTDOORS = "indoors = true"
WALL = '{ what = "wall", temperature_C = 18.0, view_factor = 0.6 }'
HOT = '{ what = "neighbour", temperature_C = 120.0, view_factor = 0.1, u_view_factor = 0.02 }'
GROUND = '{ what = "ground", temperature_C = 10.0, view_factor = 0.3 }'


def read(folder, written="", *, outdoors=False, frame=""):
    folder.edit(AIR, f"{AIR}\n{written}")
    if outdoors:
        folder.edit(OUTDOORS, "indoors = false\nwind_speed_m_s = 2.0")
    if frame:
        folder.edit('file = "frames/f01.csv"', f'file = "frames/f01.csv"\n{frame}')
    survey = read_survey(folder.root)
    return survey, [str(fault) for fault in survey.faults]


def conditions(folder, written="", **rest):
    survey, said = read(folder, written, **rest)
    assert said == []
    return survey.frames[0].conditions


def test_pieces_give_the_uniform_surroundings_that_radiate_the_same(survey_folder):
    found = conditions(survey_folder, f"surroundings = [{WALL}, {HOT}, {GROUND}]")
    assert [piece.what for piece in found.surroundings_pieces] == ["wall", "neighbour", "ground"]
    # mean of the fourth powers, as Stefan and Boltzmann's law has it
    mean = (0.6 * 291.15**4 + 0.1 * 393.15**4 + 0.3 * 283.15**4) ** 0.25
    assert found.surroundings_temperature.value == pytest.approx(mean)
    assert not found.surroundings_temperature.is_default
    assert 1.0 < found.surroundings_temperature.u < 6.0
    # what is mirrored follows from the same pieces, draw by draw
    assert found.reflected_temperature is None
    assert found.sky_band_temperature is None


def test_their_uncertainty_is_that_of_draws(survey_folder):
    import numpy as np

    found = conditions(survey_folder, f"surroundings = [{WALL}, {HOT}, {GROUND}]")
    random = np.random.default_rng(5)

    def drawn(quantity):
        return quantity.value + quantity.u * random.standard_normal(200_000)

    shares = [drawn(piece.view_factor) for piece in found.surroundings_pieces]
    fourth = sum(
        share * drawn(piece.temperature) ** 4
        for share, piece in zip(shares, found.surroundings_pieces, strict=True)
    )
    spread = np.std((fourth / sum(shares)) ** 0.25)
    assert found.surroundings_temperature.u == pytest.approx(spread, rel=0.05)


def test_a_frame_may_declare_its_own_pieces_or_a_single_temperature(survey_folder):
    survey, said = read(
        survey_folder, "surroundings_temperature_C = 15", frame=f"surroundings = [{WALL}, "
        '{ what = "other", temperature_C = 40, view_factor = 0.4 }]',
    )  # fmt: skip
    assert said == []
    first, second = (frame.conditions for frame in survey.frames)
    assert len(first.surroundings_pieces) == 2
    assert second.surroundings_pieces == ()
    assert second.surroundings_temperature.value == pytest.approx(288.15)


def test_a_single_temperature_of_a_frame_goes_before_the_pieces_of_the_survey(survey_folder):
    survey, said = read(
        survey_folder, f"surroundings = [{WALL}, {HOT}, {GROUND}]",
        frame="surroundings_temperature_C = 15",
    )  # fmt: skip
    assert said == []
    first, second = (frame.conditions for frame in survey.frames)
    assert first.surroundings_pieces == ()
    assert first.surroundings_temperature.value == pytest.approx(288.15)
    assert len(second.surroundings_pieces) == 3


@pytest.mark.parametrize(
    ("written", "message"),
    [
        (f"surroundings = [{WALL}, {HOT}]", "the view factors sum to 0.7; expected 1 within 0.02"),
        (f"surroundings = [{WALL}, {HOT}, {GROUND}]\nsurroundings_temperature_C = 15",
         "surroundings and surroundings_temperature_C are both given; expected one of them"),
        ('surroundings = [{ what = "sky", temperature_C = -5, view_factor = 1 }]\n'
         "sky_view_factor = 0.5", "surroundings and sky_view_factor are both given"),
        ("surroundings = 20.0", "surroundings is 20.0; expected a list of tables, [{ what ="),
        ('surroundings = [{ what = "wall", view_factor = 1 }]',
         "surroundings[1].temperature_C: the temperature of the wall is not known; expected temp"),
        ('surroundings = [{ what = "barn", temperature_C = 5, view_factor = 1 }]',
         'what is \'barn\'; expected one of "sky", "ground", "wall"'),
        ('surroundings = [{ what = "wall", temperature_C = 5 }]', "view_factor is missing"),
        ('surroundings = [{ what = "wall", temperature_C = 5, view_factor = 1.5 }]',
         "view_factor is 1.5; expected 0 <= view_factor <= 1"),
        ('surroundings = [{ what = "wall", temperature_C = 5, view_factor = "unknown" }]',
         "a view factor is unknown; expected a number for each"),
        ('surroundings = [{ what = "wall", temperature = 5, view_factor = 1 }]',
         "temperature says no unit; expected temperature_C or temperature_K"),
    ],
)  # fmt: skip
def test_faulty_pieces_of_the_survey_are_said_once(survey_folder, written, message):
    survey_folder.edit(AIR, f"{AIR}\n{written}")
    with pytest.raises(SurveyFileError) as caught:
        read_survey(survey_folder.root)
    assert str(caught.value).count(message) == 1, str(caught.value)
    assert re.search(r"survey\.toml:2[23]: conditions", str(caught.value))


def test_faulty_pieces_of_a_frame_leave_out_the_frame(survey_folder):
    survey, said = read(survey_folder, frame=f"surroundings = [{WALL}]")
    assert [frame.id for frame in survey.frames] == ["f02"]
    assert any("the view factors sum to 0.6" in text for text in said), said


def test_unknown_surroundings_are_those_of_the_air(survey_folder):
    found = conditions(survey_folder, 'surroundings = "unknown"')
    assert found.surroundings_temperature.value == pytest.approx(294.15)


# the sky


def test_clouds_give_the_total_sky_outdoors_where_nothing_else_is_declared(survey_folder):
    found = conditions(survey_folder, "cloud_cover = 0.0\nrelative_humidity = 0.5", outdoors=True)
    sky = found.sky_total_temperature
    # Berdahl and Martin (1984) by hand: dew point of 21 °C and 50 % is 10.2 °C, t = 0.102,
    # eps = 0.711 + 0.56 t + 0.73 t^2 = 0.7757, T = 294.15 eps^(1/4) = 276.05 K
    assert sky.value == pytest.approx(276.05, abs=0.1)
    assert sky.is_default
    assert "Berdahl and Martin" in sky.source
    assert 3.0 <= sky.u <= 8.0
    assert found.surroundings_temperature is None
    assert found.sky_view_factor.value == 0.5
    assert found.sky_band_temperature is None
    assert "as the air" in found.reflected_temperature.source


def test_an_overcast_sky_is_warmer_and_no_warmer_than_the_air(survey_folder):
    survey, _ = read(survey_folder, "cloud_cover = 1.0", outdoors=True, frame="cloud_cover = 0")
    clear, overcast = (frame.conditions for frame in survey.frames)
    assert clear.sky_total_temperature.value < overcast.sky_total_temperature.value
    assert overcast.sky_total_temperature.value < overcast.air_temperature.value


def test_damp_air_widens_the_sky_where_its_humidity_is_unknown(survey_folder):
    known = "cloud_cover = 0.2\nrelative_humidity = 0.5\nu_relative_humidity = 0.01"
    survey, _ = read(survey_folder, known, outdoors=True, frame="u_relative_humidity = 0.25")
    wide, narrow = (frame.conditions.sky_total_temperature for frame in survey.frames)
    assert wide.u > narrow.u


@pytest.mark.parametrize(
    ("written", "outdoors", "total"),
    [
        ("cloud_cover = 0.5\nsky_total_temperature_C = -3", True, 270.15),
        ("cloud_cover = 0.5\nsurroundings_temperature_C = 12", True, None),
        ("cloud_cover = 0.5", False, None),
    ],
)
def test_what_is_declared_goes_before_the_clouds(survey_folder, written, outdoors, total):
    found = conditions(survey_folder, written, outdoors=outdoors)
    sky = found.sky_total_temperature
    assert (sky is None) if total is None else sky.value == pytest.approx(total)
    assert found.cloud_cover.value == 0.5


def test_a_piece_of_sky_may_take_its_temperature_from_the_clouds(survey_folder):
    pieces = '[{ what = "sky", view_factor = 0.4 }, ' + GROUND.replace("0.3", "0.6") + "]"
    found = conditions(survey_folder, f"cloud_cover = 0.3\nsurroundings = {pieces}", outdoors=True)
    sky, ground = found.surroundings_pieces
    assert sky.temperature.value < ground.temperature.value
    assert found.sky_view_factor.value == pytest.approx(0.4)
    assert found.sky_total_temperature is None
    # what the band sees of the sky is another temperature, which the clouds do not tell: anything
    # from the air's to 60 K below it
    assert found.reflected_temperature is None
    assert found.sky_band_temperature.value == pytest.approx(294.15 - 30)
    assert found.sky_band_temperature.u == pytest.approx(60 / 12**0.5)
    assert found.sky_band_temperature.is_default


@pytest.mark.parametrize(
    ("written", "band", "reflected"),
    [("sky_band_temperature_C = -40", 233.15, None), ("reflected_temperature_C = 5", None, 278.15)],
)
def test_a_declared_band_or_reflected_temperature_stays(survey_folder, written, band, reflected):
    pieces = '[{ what = "sky", temperature_C = -5, view_factor = 0.7 }, ' + GROUND + "]"
    found = conditions(survey_folder, f"{written}\nsurroundings = {pieces}", outdoors=True)
    values = [
        None if one is None else round(one.value, 6)
        for one in (found.sky_band_temperature, found.reflected_temperature)
    ]
    assert values == [band, reflected]


def test_a_piece_of_sky_without_clouds_leaves_out_its_frames(survey_folder):
    pieces = '[{ what = "sky", view_factor = 0.4 }, ' + GROUND.replace("0.3", "0.6") + "]"
    survey_folder.edit(AIR, f"{AIR}\nsurroundings = {pieces}")
    survey_folder.edit('file = "frames/f01.csv"', 'file = "frames/f01.csv"\ncloud_cover = 0.5')
    survey = read_survey(survey_folder.root)
    assert [frame.id for frame in survey.frames] == ["f01"]
    said = [str(fault) for fault in survey.faults]
    assert any("the temperature of the sky is not known" in text for text in said), said


@pytest.mark.parametrize("written", ["cloud_cover = 1.2", "cloud_cover_percent = 120"])
def test_a_cloud_cover_is_a_share(survey_folder, written):
    survey_folder.edit(AIR, f"{AIR}\n{written}")
    with pytest.raises(SurveyFileError, match="expected 0 <= cloud_cover <= 1"):
        read_survey(survey_folder.root)


# shelter and wet


def test_shelter_widens_a_wind_without_its_own_uncertainty(survey_folder):
    open_, sheltered = (
        conditions(survey_folder, outdoors=True).wind_speed,
        conditions(survey_folder, "sheltered = true").wind_speed,
    )
    assert (open_.u, sheltered.u) == (pytest.approx(0.5), pytest.approx(1.0))
    assert "sheltered" in sheltered.source


def test_shelter_indoors_stills_a_draught_that_nobody_declared(survey_folder):
    survey, said = read(survey_folder, frame="sheltered = true")
    sheltered, open_ = (frame.conditions.wind_speed for frame in survey.frames)
    assert said == []
    assert (sheltered.value, sheltered.u) == (0.05, 0.05)
    assert sheltered.is_default
    assert sheltered.value + 2 * sheltered.u <= open_.value + 2 * open_.u
    assert (open_.value, open_.u) == (0.15, 0.1)


def test_shelter_indoors_widens_a_declared_draught_too(survey_folder):
    survey, _ = read(survey_folder, "wind_speed_m_s = 0.8", frame="sheltered = true")
    sheltered, open_ = (frame.conditions.wind_speed for frame in survey.frames)
    assert (sheltered.value, open_.value) == (0.8, 0.8)
    assert (sheltered.u, open_.u) == (pytest.approx(0.4), pytest.approx(0.2))


@pytest.mark.parametrize("written", ["", "\nsheltered = true"])
def test_an_unknown_draught_stays_unknown(survey_folder, written):
    assert conditions(survey_folder, f'wind_speed = "unknown"{written}').wind_speed is None


def test_a_declared_uncertainty_of_the_wind_stays(survey_folder):
    found = conditions(
        survey_folder, "sheltered = true\nu_wind_speed_m_s = 0.3", outdoors=True
    ).wind_speed
    assert (found.u, found.source) == (0.3, "declared")


def test_a_wet_surface_is_kept(survey_folder):
    survey, _ = read(survey_folder, frame="surface_wet = true")
    assert [frame.conditions.surface_wet for frame in survey.frames] == [True, None]


def test_a_band_no_air_path_is_held_for_is_asked_about(survey_folder):
    survey_folder.edit("[camera]", "[camera]\nband_lower_um = 3.0\nband_upper_um = 5.0")
    said = [str(fault) for fault in read_survey(survey_folder.root).faults]
    assert any("3 to 5 µm" in one and "declare atmosphere_transmission" in one for one in said)
    assert conditions(survey_folder, "atmosphere_transmission = 0.99") is not None


@pytest.mark.parametrize(("word", "sign"), [("up", 1), ("down", -1)])
def test_wind_along_a_run_blows_up_or_down_it(survey_folder, word, sign):
    assert conditions(survey_folder, f'wind_along = "{word}"').wind_uphill == sign


def test_wind_along_a_run_is_one_of_two_words(survey_folder):
    survey_folder.edit(AIR, f'{AIR}\nwind_along = "north"')
    with pytest.raises(SurveyFileError, match='expected one of "up", "down"'):
        read_survey(survey_folder.root)


@pytest.mark.parametrize(("wet", "asked"), [("", True), ("\nsurface_wet = false", False)])
def test_rain_outdoors_asks_whether_the_surface_was_still_wet(survey_folder, wet, asked):
    _, said = read(survey_folder, f"rain_last_24h = true{wet}", outdoors=True)
    assert any("surface_wet is missing" in one for one in said) == asked
