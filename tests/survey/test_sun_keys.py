"""The sun by place and time: night, an undeclared sun, a clear sky's irradiance, contradictions."""

import math

import pandas as pd
import pvlib
import pytest

from cladwatt.survey.survey_file import read_survey

PLACE = "latitude_deg = 52.0\nlongitude_deg = 9.0"
NOON, EVENING = "2026-06-20T13:30:00+02:00", "2026-06-20T23:30:00+02:00"
ONLY_TIME = "time = 2026-03-18T09:40:00"
WEATHER = "indoors = false\nwind_speed_m_s = 2.0"


def read(folder, conditions="", *, time=NOON, place=PLACE, indoors=False):
    """The first frame of a survey outdoors, and what was asked of it."""
    folder.edit("date = 2026-03-18", "date = 2026-06-20")
    if place:
        folder.edit("altitude_m = 95", f"altitude_m = 95\n{place}")
    if not indoors:
        folder.edit("indoors = true", f"{WEATHER}\n{conditions}")
    else:
        folder.edit("indoors = true", f"indoors = true\n{conditions}")
    folder.edit(ONLY_TIME, f"time = {time}" if time else "")
    survey = read_survey(folder.root)
    return survey.frames, [str(fault) for fault in survey.faults]


def sun_of(time: str):
    moment = pd.DatetimeIndex([pd.Timestamp(time)])
    return pvlib.solarposition.get_solarposition(moment, 52.0, 9.0).iloc[0]


def test_the_sun_is_where_pvlib_has_it(survey_folder):
    frames, _ = read(survey_folder, "sun_on_pipe = false")
    assert frames[0].conditions.sun_elevation_deg == pytest.approx(
        float(sun_of(NOON)["elevation"]), abs=0.02
    )
    # the second frame says no time: of it nothing is known
    assert frames[1].conditions.sun_elevation_deg is None


def test_at_night_there_is_no_sun_and_its_source_is_told(survey_folder):
    frames, said = read(survey_folder, time=EVENING)
    assert said == []
    night = frames[0].conditions
    assert night.solar_irradiance.value == 0.0
    assert night.solar_irradiance.is_default
    down = -float(sun_of(EVENING)["elevation"])
    assert f"{down:.0f}° below the horizon by place and time" in night.solar_irradiance.source
    assert night.sun_on_pipe is False
    day = pd.DatetimeIndex([pd.Timestamp("2026-06-20T12:00:00Z")])
    sunset = pvlib.solarposition.sun_rise_set_transit_spa(day, 52.0, 9.0)["sunset"].iloc[0]
    hours = (pd.Timestamp(EVENING) - sunset).total_seconds() / 3600
    assert night.hours_since_sun.value == pytest.approx(hours, abs=0.03)


def test_by_day_it_is_asked_whether_the_sun_shone(survey_folder):
    frames, said = read(survey_folder)
    position = sun_of(NOON)
    (question,) = said
    assert f"the sun stood {position['elevation']:.0f}° above the horizon in the south" in question
    assert "declare sun_on_pipe = true or false" in question
    assert frames[0].conditions.solar_irradiance is None


def test_a_declared_unknown_is_not_asked_again(survey_folder):
    frames, said = read(survey_folder, 'sun_on_pipe = "unknown"')
    assert said == []
    assert frames[0].conditions.sun_on_pipe is None


@pytest.mark.parametrize("written", ["", 'solar_irradiance_W_m2 = "unknown"\n'])
def test_sun_that_nobody_measured_is_a_clear_sky_s(survey_folder, written):
    # the second frame has no time, so that its irradiance is asked for
    frames, _ = read(survey_folder, f"{written}sun_on_pipe = true\ncloud_cover = 0.0")
    found = frames[0].conditions.solar_irradiance
    position = sun_of(NOON)
    up = math.sin(math.radians(position["elevation"]))
    other = pvlib.clearsky.simplified_solis(position["elevation"], aod700=0.1,
                                            precipitable_water=1.5)  # fmt: skip
    # between a pipe along the sun's azimuth and one square to it, with light from all round
    around = math.pi / 2 * (other["dhi"] + 0.2 * other["ghi"])
    assert up * other["dni"] + around < found.value * 1.1
    assert found.value < 1.1 * (other["dni"] + around)
    assert 0.1 < found.u / found.value < 0.3
    assert found.confidence == "low"
    assert "clear sky" in found.source
    assert frames[1].conditions.solar_irradiance is None


def test_clouds_lower_and_widen_it(survey_folder):
    def found(cover):
        folder = survey_folder
        folder.edit(f"cloud_cover = {found.last}", f"cloud_cover = {cover}")
        found.last = cover
        return read_survey(folder.root).frames[0].conditions.solar_irradiance

    frames, _ = read(survey_folder, "sun_on_pipe = true\ncloud_cover = 0.0")
    clear = frames[0].conditions.solar_irradiance
    found.last = "0.0"
    closed = found("1.0")
    # half way between a quarter (Kasten and Czeplak) and a gap in the clouds
    assert closed.value / clear.value == pytest.approx(0.625, rel=1e-6)
    assert closed.u / closed.value > 1.5 * clear.u / clear.value


@pytest.mark.parametrize(
    ("conditions", "time", "said"),
    [
        ("solar_irradiance_W_m2 = 400", EVENING, "solar_irradiance_W_m2 is 400, but the sun stood"),
        ("sun_on_pipe = true", EVENING, "the sun shone on the pipe, but the sun stood"),
        ("solar_irradiance_W_m2 = 1420", NOON, "outside the atmosphere the sun sends 13"),
    ],
)
def test_sun_that_cannot_be_is_refused(survey_folder, conditions, time, said):
    frames, faults = read(survey_folder, conditions, time=time)
    assert [frame.id for frame in frames] == ["f02"]  # of which no time is known
    (fault,) = [one for one in faults if said in one]
    assert "expected" in fault


def test_more_than_a_clear_sky_is_questioned(survey_folder):
    # the sun 4° up in the evening: a clear sky sends some 100 W/m2
    frames, said = read(
        survey_folder, "solar_irradiance_W_m2 = 900", time="2026-06-20T21:05:00+02:00"
    )
    (question,) = said
    assert "a clear sky sends a pipe about" in question
    assert frames[0].conditions.solar_irradiance.value == 900.0


@pytest.mark.parametrize(
    ("place", "time"), [("", NOON), (PLACE, ""), (PLACE, None)], ids=["place", "time", "no time"]
)
def test_without_place_or_time_nothing_is_computed(survey_folder, place, time):
    frames, said = read(survey_folder, place=place, time=time)
    assert said == []
    assert frames[0].conditions.sun_elevation_deg is None
    assert frames[0].conditions.solar_irradiance is None


def test_a_time_without_zone_is_asked_for_and_not_used(survey_folder):
    survey_folder.edit('timezone = "+01:00"', "")
    frames, said = read(survey_folder, time="2026-06-20T23:30:00")
    (question,) = said
    assert "says no zone and is not used" in question
    assert frames[0].conditions.solar_irradiance is None


def test_indoors_the_sun_is_nobody_s_business(survey_folder):
    frames, said = read(survey_folder, indoors=True)
    assert said == []
    assert frames[0].conditions.sun_elevation_deg is None


def test_sun_without_place_is_asked_for_as_before(survey_folder):
    _, said = read(survey_folder, "sun_on_pipe = true", place="")
    assert all("solar_irradiance_W_m2 is missing" in one for one in said)
    assert "latitude_deg and longitude_deg" in said[0]


@pytest.mark.parametrize("what", ["rain", "sun"])
@pytest.mark.parametrize(("flag", "hours"), [("true", 30), ("false", 5)])
def test_hours_that_contradict_the_last_day_are_refused(survey_folder, what, flag, hours):
    frames, faults = read(
        survey_folder, f"{what}_last_24h = {flag}\nhours_since_{what} = {hours}", place=""
    )
    assert frames == ()
    assert sum(f"but {what}_last_24h is {flag}" in fault for fault in faults) == 2


def test_hours_since_rain_are_an_answer(survey_folder):
    frames, said = read(
        survey_folder, "rain_last_24h = true\nhours_since_rain = 6\nsun_on_pipe = false"
    )
    assert said == []
    since = frames[0].conditions.hours_since_rain
    assert (since.value, since.u) == pytest.approx((6.0, 0.6))


def test_declared_hours_since_sun_go_before_sunset(survey_folder):
    frames, _ = read(survey_folder, "sun_last_24h = true\nhours_since_sun = 7", time=EVENING)
    assert frames[0].conditions.hours_since_sun.value == 7.0
