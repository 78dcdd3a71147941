"""The sun over a frame, from the site's place and the frame's time, and hours since sun and rain.

Without both nothing is computed; a time without a zone has been asked for before it comes here.
"""

import math
from dataclasses import dataclass, replace
from datetime import datetime

from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList
from cladwatt.survey.model import Conditions
from cladwatt.survey.table_reader import Table

__all__ = ["with_sun"]

CLEARLY_DOWN_DEG = -2.0
"""Below this no hill and no clock some minutes off leaves sun on a pipe; assumption. [deg]"""
HAZE_U = 0.10
"""Relative, of the clear sky's irradiance: haze and altitude; assumption."""
MEAN_CLOUD_FACTOR = 1.0 - 0.75 / 4.4
"""Of Kasten and Czeplak's relation where any cloud cover is as likely as another."""
BRIGHTER_THAN_CLEAR = 1.3
"""Clouds beside the sun, snow and altitude add up to so much; more is questioned; assumption."""
_DAY_HOURS = 24.0
_CONTRADICTION = (
    "expected place (latitude_deg north, longitude_deg east), time with its zone, and sun to agree"
)
_COMPASS = (
    "north", "north-east", "east", "south-east", "south", "south-west", "west", "north-west",
)  # fmt: skip


@dataclass(frozen=True)
class _Sun:
    elevation_deg: float
    azimuth_deg: float
    extraterrestrial: float
    """Outside the atmosphere, on a face turned to the sun. [W/m2]"""
    hours_since: float | None
    """Since it was last up; None where it was not within a day. [h]"""
    is_up: bool

    @property
    def said(self) -> str:
        """Where it stood, in words."""
        if not self.is_up:
            return f"the sun stood {-self.elevation_deg:.0f}° below the horizon"
        side = _COMPASS[round(self.azimuth_deg / 45.0) % 8]
        return f"the sun stood {self.elevation_deg:.0f}° above the horizon in the {side}"


def with_sun(
    conditions: Conditions, table: Table, time: datetime | None, site: Table, faults: FaultList
) -> Conditions:
    """Return a frame's conditions with what place and time tell of the sun outdoors.

    Parameters
    ----------
    conditions : Conditions
    table : Table
        The frame's conditions as declared.
    time : datetime or None
        With its zone.
    site : Table
        ``[site]``, for latitude and longitude.
    faults : FaultList
        Gets contradictions and questions.

    Returns
    -------
    Conditions
        Where the sun was down, without sun. Where it shone on the pipe and nobody measured it,
        with the irradiance of a clear sky. As declared where place or time is unknown.
    """
    _check_hours(table, faults)
    if conditions.indoors is not False:
        _ask_for_irradiance(conditions, table, faults)
        return conditions
    sun = _sun(time, site.number("latitude"), site.number("longitude"))
    if sun is None:
        _ask_for_irradiance(conditions, table, faults)
        return conditions
    conditions = replace(conditions, sun_elevation_deg=sun.elevation_deg)
    if not sun.is_up:
        return _at_night(conditions, table, sun, faults)
    if conditions.solar_irradiance is not None:
        _check_irradiance(conditions.solar_irradiance.value, table, sun, faults)
    elif conditions.sun_on_pipe:
        return replace(conditions, solar_irradiance=_clear_sky(conditions, sun))
    elif not table.has("sun_on_pipe"):
        faults.ask(
            table.place, "sun_on_pipe",
            f"{sun.said}, but it is not said whether it shone on the pipe; no sun is taken and the"
            " verdict limited", "declare sun_on_pipe = true or false",
        )  # fmt: skip
    return conditions


def _check_hours(table: Table, faults: FaultList) -> None:
    """Refuse hours since rain or sun that contradict what the last day is said to have been."""
    for what in ("rain", "sun"):
        flag, hours = table.flag(f"{what}_last_24h"), table.quantity(f"hours_since_{what}")
        if flag is None or hours is None or flag == (hours.value <= _DAY_HOURS):
            continue
        name, said = table.spelling(f"hours_since_{what}"), "true" if flag else "false"
        faults.add(
            table.place, name, f"{name} is {hours.value:g}, but {what}_last_24h is {said}",
            f"expected the two to agree: {name} up to {_DAY_HOURS:g} with true, more with false",
        )  # fmt: skip


def _sun(
    time: datetime | None, latitude_deg: float | None, longitude_deg: float | None
) -> _Sun | None:
    if time is None or latitude_deg is None or longitude_deg is None:
        return None
    from cladwatt.physics.clear_sky import HORIZON_DEG, hours_since_sun
    from cladwatt.physics.solar import extraterrestrial_irradiance, sun_position

    seconds = time.timestamp()
    position = sun_position(seconds, latitude_deg=latitude_deg, longitude_deg=longitude_deg)
    elevation = float(position.elevation_deg)
    return _Sun(
        elevation,
        float(position.azimuth_deg),
        float(extraterrestrial_irradiance(seconds)),
        hours_since_sun(seconds, latitude_deg=latitude_deg, longitude_deg=longitude_deg),
        elevation > HORIZON_DEG,
    )


def _ask_for_irradiance(conditions: Conditions, table: Table, faults: FaultList) -> None:
    if conditions.sun_on_pipe and not table.has("solar_irradiance"):
        faults.ask(
            table.place, table.spelling("sun_on_pipe"),
            "the sun shone on the pipe, but solar_irradiance_W_m2 is missing",
            'declare it or write "unknown"; outdoors latitude_deg and longitude_deg in [site] and'
            " a time with its zone give that of a clear sky",
        )  # fmt: skip


def _at_night(conditions: Conditions, table: Table, sun: _Sun, faults: FaultList) -> Conditions:
    """Return the conditions without sun, and since when the pipe has been without it."""
    declared = conditions.solar_irradiance
    if sun.elevation_deg < CLEARLY_DOWN_DEG:
        if declared is not None and declared.value > 0:
            name = "solar_irradiance"
            faults.add(
                table.place, table.spelling(name),
                f"{table.spelling(name)} is {declared.value:g}, but {sun.said} by place and time",
                _CONTRADICTION,
            )  # fmt: skip
        elif conditions.sun_on_pipe:
            faults.add(
                table.place, table.spelling("sun_on_pipe"),
                f"the sun shone on the pipe, but {sun.said} by place and time", _CONTRADICTION,
            )  # fmt: skip
    if conditions.hours_since_sun is None and sun.hours_since is not None:
        since = Quantity(
            sun.hours_since, 0.0, lower=0.0,
            source="sunset by place and time: Michalsky (1988)", confidence="high",
        )  # fmt: skip
        conditions = replace(conditions, hours_since_sun=since)
    if declared is not None or conditions.sun_on_pipe:
        return conditions
    none = Quantity(
        0.0, 0.0, lower=0.0,
        source=f"no sun: {sun.said} by place and time, Michalsky (1988)", confidence="high",
    )  # fmt: skip
    return replace(conditions, solar_irradiance=none, sun_on_pipe=False)


def _check_irradiance(value: float, table: Table, sun: _Sun, faults: FaultList) -> None:
    """Refuse more than there is outside the air, question more than a clear sky sends."""
    from cladwatt.physics.clear_sky import clear_sky

    spelled = table.spelling("solar_irradiance")
    if value > sun.extraterrestrial:
        faults.add(
            table.place, spelled,
            f"{spelled} is {value:g}, but outside the atmosphere the sun sends"
            f" {sun.extraterrestrial:.0f} on that day",
            "expected what reaches the pipe, below that; check value and unit",
        )  # fmt: skip
        return
    beam, diffuse = (float(part) for part in clear_sky(sun.elevation_deg, sun.extraterrestrial))
    most = beam + math.pi / 2 * diffuse
    if value > BRIGHTER_THAN_CLEAR * most:
        faults.ask(
            table.place, spelled,
            f"{spelled} is {value:g}, but {sun.said} by place and time: a clear sky sends a pipe"
            f" about {most:.0f}", "check irradiance, place and time",
        )  # fmt: skip


def _clear_sky(conditions: Conditions, sun: _Sun) -> Quantity:
    """Return a clear sky's irradiance, lowered for clouds, on a level pipe of any direction.

    The sun shone on the pipe, so the clouds left gaps: anywhere between the hour's mean under
    such a cover and no cloud at all.
    """
    from cladwatt.physics.clear_sky import cloud_factor_kasten_czeplak, pipe_sunlight

    cover = conditions.cloud_cover
    lowest = MEAN_CLOUD_FACTOR
    if cover is not None:
        lowest = float(cloud_factor_kasten_czeplak(min(cover.value, 1.0)))
    factor, u_factor = (1 + lowest) / 2, (1 - lowest) / math.sqrt(12.0)
    light = pipe_sunlight(sun.elevation_deg, extraterrestrial=sun.extraterrestrial)
    value = factor * light.mean
    relative = math.hypot(u_factor / factor, HAZE_U, light.u / max(light.mean, 1e-9))
    return Quantity(
        value, relative * value, lower=0.0, upper=BRIGHTER_THAN_CLEAR * light.mean,
        source=f"clear sky, {sun.said} by place and time (Haurwitz 1945, Erbs et al. 1982), clouds"
        " by Kasten and Czeplak (1980), on a level pipe of unknown direction",
        confidence="low",
    )  # fmt: skip
