"""Site, camera, settings and conditions from their tables, and one frame from its own."""

from dataclasses import replace
from datetime import date, datetime, timedelta, timezone, tzinfo
from typing import Literal

from cladwatt.materials.tables import MaterialTables, default_quantity
from cladwatt.quantities import Quantity
from cladwatt.survey.contradictions import ask_of_camera, ask_of_conditions, ask_of_pressure
from cladwatt.survey.fault_list import FaultList, shown
from cladwatt.survey.model import (
    AccuracyStatement,
    Camera,
    Conditions,
    FrameFormat,
    Recording,
    Site,
    Window,
)
from cladwatt.survey.response_file import Response, half_response_band
from cladwatt.survey.surroundings_builder import build_surroundings
from cladwatt.survey.table_reader import Table

__all__ = [
    "build_camera",
    "build_conditions",
    "build_format",
    "build_recording",
    "build_site",
    "zone_of",
    "zoned",
]

_UPHILL: dict[str, Literal[-1, 0, 1]] = {"up": 1, "down": -1}


def build_site(table: Table, tables: MaterialTables, faults: FaultList) -> Site:
    """Return the site, with the air pressure of its altitude where none is declared."""
    altitude = table.number("altitude")
    for name, other in (("latitude", "longitude"), ("longitude", "latitude")):
        if table.has(name) and not table.has(other):
            faults.ask(
                table.place, table.spelling(name), f"{name} stands without {other}",
                f"expected {other}_deg beside it",
            )  # fmt: skip
    pressure = table.quantity("pressure")
    ask_of_pressure(table, pressure, altitude, faults)
    if pressure is None and altitude is not None:
        from cladwatt.physics.air import pressure_at_altitude

        value = float(pressure_at_altitude(altitude))
        pressure = Quantity(
            value, 0.015 * value, lower=0.9 * value, upper=1.1 * value,
            source="standard atmosphere at the altitude (ISO 2533), u for weather",
            confidence="medium",
        )  # fmt: skip
    return Site(
        name=table.text("name"),
        place=table.text("place"),
        latitude_deg=table.number("latitude"),
        longitude_deg=table.number("longitude"),
        altitude=altitude,
        pressure=pressure or default_quantity("air_pressure", tables),
    )


def build_camera(
    table: Table, tables: MaterialTables, faults: FaultList, response: Response | None = None
) -> Camera:
    """Return the camera; what is not declared of band and accuracy comes from the tables.

    `response` is its spectral response where it names the file of one.
    """
    ask_of_camera(table, faults)
    lower, upper = table.number("band_lower"), table.number("band_upper")
    if (lower is None) != (upper is None):
        name = "band_lower" if lower is not None else "band_upper"
        faults.add(
            table.place, table.spelling(name), "only one end of the band is given",
            "expected band_lower_um and band_upper_um",
        )  # fmt: skip
    band_source = "declared"
    if lower is None or upper is None:
        low, high = default_quantity("band_lower", tables), default_quantity("band_upper", tables)
        lower, upper, band_source = low.value, high.value, low.source
    elif lower >= upper:
        faults.add(
            table.place, table.spelling("band_lower"),
            f"the band runs from {lower * 1e6:g} to {upper * 1e6:g} µm",
            "expected band_lower < band_upper",
        )  # fmt: skip
    if response is not None:
        lower, upper = half_response_band(response)
        band_source = f"declared: {table.text('spectral_response')}, where it passes a half"
    calibrated = table.get("calibration_date")
    spot = table.number("spot_pixels")
    return Camera(
        model=table.text("model"),
        serial=table.text("serial"),
        calibration_date=calibrated if isinstance(calibrated, date) else None,
        band=(lower, upper),
        band_source=band_source,
        response=response,
        field_of_view_deg=table.number("field_of_view"),
        noise=table.quantity("noise"),
        accuracy=_accuracy(table, tables),
        spot_pixels=spot if spot is not None else default_quantity("spot_pixels", tables).value,
    )


def _accuracy(table: Table, tables: MaterialTables) -> AccuracyStatement:
    limit, percent = table.number("accuracy"), table.number("accuracy_of_reading")
    factor = table.number("accuracy_coverage_factor")
    if limit is None and percent is None:
        usual = default_quantity("camera_accuracy_limit", tables)
        share = default_quantity("camera_accuracy_percent", tables)
        return AccuracyStatement(usual.value, share.value, factor, usual.source)
    return AccuracyStatement(limit or 0.0, percent or 0.0, factor)


def build_recording(table: Table, faults: FaultList, *, prefix: str = "") -> Recording:
    """Return the camera's settings; those that belong together are asked for together."""
    emissivity = _or(table.number("emissivity"), 1.0)
    transmission = _or(table.number("transmission"), 1.0)
    window = _or(table.number("window_transmission"), 1.0)
    needed = (
        ("emissivity", emissivity, "reflected_temperature"),
        ("transmission", transmission, "atmosphere_temperature"),
        ("window_transmission", window, "window_temperature"),
    )
    for name, value, other in needed:
        if table.is_unknown(name):
            faults.ask(
                table.place, prefix + name, f"{prefix}{name} is unknown and taken as 1",
                "find out what the camera was set to: it stands in the recorded values",
            )  # fmt: skip
        if value < 1 and table.number(other) is None:
            faults.add(
                table.place, prefix + name if prefix else table.spelling(name),
                f"the camera was set to {name} {value:g} but not to which {other}",
                f"expected {prefix}{table.key(other).usual}: without it the setting cannot be"
                " undone",
            )  # fmt: skip
    return Recording(
        emissivity=emissivity,
        reflected_temperature=table.number("reflected_temperature"),
        transmission=transmission,
        atmosphere_temperature=table.number("atmosphere_temperature"),
        window_transmission=window,
        window_temperature=table.number("window_temperature"),
    )


def _or(value: float | None, other: float) -> float:
    return other if value is None else value


def build_format(table: Table, faults: FaultList) -> FrameFormat:
    """Return how the numbers of a frame file are to be taken."""
    scale, offset = table.number("scale"), table.number("offset")
    if scale == 0:
        faults.add(table.place, table.spelling("scale"), "scale is 0", "expected another number")
    if (offset is None) != (scale is None):
        alone, other = ("offset", "scale") if scale is None else ("scale", "offset")
        faults.add(
            table.place, table.spelling(alone), f"{alone} stands without {other}",
            "expected both: temperature = counts * scale + offset",
        )  # fmt: skip
    lower, upper = table.number("range_lower"), table.number("range_upper")
    if lower is not None and upper is not None and lower >= upper:
        faults.add(
            table.place, table.spelling("range_lower"), "the recording range is empty",
            "expected range_lower < range_upper",
        )  # fmt: skip
    unit = table.text("unit")
    bottom: Literal["top", "bottom"] = "bottom" if table.text("rows_from") == "bottom" else "top"
    return FrameFormat(
        unit="C" if unit == "C" else "K" if unit == "K" else "F" if unit == "F" else None,
        scale=scale,
        offset=offset,
        page=int(table.number("page") or 0),
        rows_from=bottom,
        bad_value=table.number("bad_value"),
        range_lower=lower,
        range_upper=upper,
    )


def build_conditions(table: Table, tables: MaterialTables, faults: FaultList) -> Conditions:
    """Return the conditions with the defaults that may be taken.

    Indoors the surroundings are taken at the air's temperature with 2 K of their own
    uncertainty, and the wind as a draught. Outdoors, or where neither is said, there is no
    default wind and the surroundings carry 10 K; a sky temperature, declared or by the clouds,
    or surroundings in pieces take the place of the default.
    """
    _ask_outdoors(table, faults)
    air = table.quantity("air_temperature")
    humidity = _default(table, "relative_humidity", "relative_humidity", tables)
    around = build_surroundings(table, air, humidity, tables, faults)
    ask_of_conditions(table, air, around.sky_total, faults)
    return Conditions(
        air_temperature=air,
        surroundings_temperature=around.temperature,
        surroundings_pieces=around.pieces,
        reflected_temperature=around.reflected,
        relative_humidity=humidity,
        distance=table.quantity("distance"),
        atmosphere_transmission=table.quantity("atmosphere_transmission"),
        wind_speed=_wind(table, tables),
        wind_angle_deg=table.quantity("wind_angle"),
        wind_uphill=_UPHILL.get(table.text("wind_along"), 0),
        indoors=table.flag("indoors"),
        sky_band_temperature=around.sky_band,
        sky_total_temperature=around.sky_total,
        sky_view_factor=around.sky_view,
        cloud_cover=table.quantity("cloud_cover"),
        solar_irradiance=table.quantity("solar_irradiance"),
        sun_on_pipe=table.flag("sun_on_pipe"),
        rain_last_24h=table.flag("rain_last_24h"),
        hours_since_rain=table.quantity("hours_since_rain"),
        sun_last_24h=table.flag("sun_last_24h"),
        hours_since_sun=table.quantity("hours_since_sun"),
        surface_wet=table.flag("surface_wet"),
        sheltered=table.flag("sheltered"),
        roll_deg=table.number("roll") or 0.0,
        window=_window(table, faults),
    )


def _wind(table: Table, tables: MaterialTables) -> Quantity | None:
    """Return the wind at the pipe: declared, or a draught where that may be taken.

    Shelter makes a declared wind without its own u less sure, and an undeclared draught indoors
    one that all but stands. Outdoors it gives no wind by itself.
    """
    if table.flag("indoors") and not table.has("wind_speed"):
        still = table.flag("sheltered")
        draught = "air_speed_indoors_sheltered" if still else "air_speed_indoors"
        return default_quantity(draught, tables)
    wind = table.quantity("wind_speed")
    if wind is None or not table.flag("sheltered") or table.written["wind_speed"].u is not None:
        return wind
    share = default_quantity("u_relative_wind_speed_sheltered", tables)
    return replace(
        wind,
        u=max(wind.u, share.value * wind.value),
        source=f"declared; u by default, sheltered: {share.source}",
    )


def _ask_outdoors(table: Table, faults: FaultList) -> None:
    """Ask outdoors for the wind and for what rain left wet."""
    if table.flag("indoors") is False and not table.has("wind_speed"):
        faults.ask(
            table.place, "wind_speed_m_s",
            "wind_speed_m_s is missing outdoors and nothing is assumed in its place",
            'declare the wind at the pipe or write "unknown"',
        )  # fmt: skip
    rained = table.flag("indoors") is False and table.flag("rain_last_24h")
    known = table.has("surface_wet") or table.quantity("hours_since_rain") is not None
    if rained and not known:
        faults.ask(
            table.place, table.spelling("rain_last_24h"),
            "it had rained, but surface_wet is missing: a warm surface that may still be wet gets"
            " no number", "declare surface_wet = true or false, else hours_since_rain",
        )  # fmt: skip


def _default(table: Table, name: str, default: str, tables: MaterialTables) -> Quantity | None:
    """Return what is declared, else the default; None where declared unknown."""
    if table.has(name):
        return table.quantity(name)
    return default_quantity(default, tables)


def _window(table: Table, faults: FaultList) -> Window | None:
    transmission = table.quantity("window_transmission")
    reflectance = table.quantity("window_reflectance")
    if transmission is None:
        if reflectance is not None:
            faults.add(
                table.place, table.spelling("window_reflectance"),
                "a window's reflectance stands without its transmission",
                "expected window_transmission beside it",
            )  # fmt: skip
        return None
    if reflectance is None:
        rest = 1.0 - transmission.value
        reflectance = Quantity(
            rest / 2, rest / 4, lower=0.0, upper=rest,
            source="half of what the window does not transmit: common practice, no source",
            confidence="low",
        )  # fmt: skip
    if transmission.value + reflectance.value > 1:
        faults.add(
            table.place, table.spelling("window_reflectance"),
            f"window transmission {transmission.value:g} and reflectance {reflectance.value:g}"
            " exceed 1 together", "expected their sum <= 1",
        )  # fmt: skip
    return Window(transmission, reflectance, table.quantity("window_temperature"))


def zone_of(table: Table, faults: FaultList) -> tzinfo | None:
    """Return the zone declared for times written without one."""
    text = table.text("timezone")
    if not text:
        return None
    try:
        shift = datetime.strptime(text.replace(":", ""), "%z").utcoffset()
        return timezone(shift or timedelta(0))
    except ValueError:
        pass
    from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

    try:
        return ZoneInfo(text)
    except (ZoneInfoNotFoundError, ValueError, OSError):
        faults.add(
            table.place, "timezone", f"timezone is {shown(text)}",
            'expected a name such as "Europe/Berlin" or an offset such as "+01:00"',
        )  # fmt: skip
        return None


def zoned(table: Table, zone: tzinfo | None, faults: FaultList) -> datetime | None:
    """Return a frame's time with its zone; without one it is asked for, never guessed."""
    time = table.get("time")
    if not isinstance(time, datetime):
        return None
    if time.tzinfo is not None:
        return time
    if zone is None:
        faults.ask(
            table.place, "time", f"time {time.isoformat(' ')} says no zone and is not used",
            'write it with one (+01:00), or declare timezone in [site]',
        )  # fmt: skip
        return None
    early, late = time.replace(tzinfo=zone), time.replace(tzinfo=zone, fold=1)
    if early.utcoffset() != late.utcoffset():
        faults.ask(
            table.place, "time",
            f"time {time.isoformat(' ')} lies in the hour the clocks change and is not used",
            "write it with its offset (+01:00)",
        )  # fmt: skip
        return None
    return early
