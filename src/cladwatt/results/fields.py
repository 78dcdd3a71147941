"""The figures of the results: unit at the edge and meaning, in one registry.

Inside, temperatures are in kelvin and names carry no unit. In files a name ends with its unit and
temperatures are in degrees Celsius; both the table columns and the JSON keys are made here.
"""

from dataclasses import dataclass
from decimal import Decimal

from cladwatt.results.assessment import (
    Assessment,
    Assumption,
    ComponentResult,
    LineLog,
    LineTotal,
    LogBin,
    LogOverlap,
    LogStretch,
    RegionResult,
    StationTable,
    Stretch,
)

__all__ = [
    "FIELDS",
    "ZERO_CELSIUS",
    "Field",
    "edge_name",
    "edge_value",
    "inside_value",
    "is_celsius",
]

ZERO_CELSIUS = 273.15
_SUFFIXES = {
    "": "",
    "°C": "_C",
    "m": "_m",
    "px": "_px",
    "W": "_W",
    "W/m": "_W_per_m",
    "W/m²": "_W_per_m2",
    "m·K/W": "_m_K_per_W",
    "W/(m·K)": "_W_per_m_K",
}


@dataclass(frozen=True)
class Field:
    """Unit in files and meaning of one figure."""

    unit: str
    meaning: str


_STATIONS = {
    "station": Field("m", "position along the line"),
    "x": Field("px", "centre of the station in the frame, to the right"),
    "y": Field("px", "centre of the station in the frame, downwards"),
    "width": Field("px", "width of the pipe in the frame"),
    "length": Field("m", "pipe this station stands for"),
    "recorded_temperature": Field("°C", "mean temperature over the used face as recorded"),
    "surface_temperature": Field("°C", "corrected surface temperature"),
    "surface_temperature_low": Field("°C", "its 2.5 percentile"),
    "surface_temperature_high": Field("°C", "its 97.5 percentile"),
    "heat_loss": Field("W/m", "heat loss per metre, negative for a gain"),
    "heat_loss_low": Field("W/m", "its 2.5 percentile"),
    "heat_loss_high": Field("W/m", "its 97.5 percentile"),
    "sound_loss": Field("W/m", "what sound lagging would lose in the same conditions"),
    "resistance": Field("m·K/W", "thermal resistance of the lagging"),
    "resistance_low": Field("m·K/W", "its 2.5 percentile"),
    "resistance_high": Field("m·K/W", "its 97.5 percentile"),
    "resistance_ratio": Field("", "resistance found over resistance specified"),
    "flags": Field("", "what is wrong or doubtful here, names joined by |"),
}
_STRETCH = {
    "start": Field("m", "where the stretch begins along the line"),
    "end": Field("m", "where the stretch ends along the line"),
    "probability": Field("", "probability that there is local damage here"),
    "heat_loss": Field("W/m", "mean heat loss per metre over the stretch"),
    "excess": Field("W", "loss above the sound rest of the region, over the whole stretch"),
    "share_of_excess": Field("", "part of the region's summed local excess"),
    "outline": Field("px", "outline in the frame"),
    "side_probability": Field("", "probability that the damage lies on that side"),
    "kinds": Field("", "probability of each kind of damage, if there is local damage here"),
}
_REGION = {
    "length": Field("m", "length of pipe drawn"),
    "start_station": Field("m", "first station along the line"),
    "end_station": Field("m", "last station along the line"),
    "recorded_temperature": Field("°C", "mean temperature as recorded"),
    "surface_temperature": Field("°C", "mean corrected surface temperature"),
    "heat_flux": Field("W/m²", "mean heat flux over the seen face"),
    "heat_loss": Field("W/m", "mean heat loss per metre, negative for a gain"),
    "image_loss": Field("W/m", "the same by the image alone, the specification unused"),
    "total_loss": Field("W", "heat loss over the drawn length"),
    "sound_loss": Field("W/m", "what sound lagging would lose in the same conditions"),
    "specified_loss": Field("W/m", "loss with the lagging as specified, laboratory conductivity"),
    "declared_loss": Field(
        "W/m", "loss expected with the lagging wet or frozen as it was declared found"
    ),
    "excess": Field("W/m", "loss found minus sound loss"),
    "resistance": Field("m·K/W", "thermal resistance of the lagging found"),
    "specified_resistance": Field("m·K/W", "thermal resistance of the lagging as specified"),
    "declared_resistance": Field("m·K/W", "resistance expected of lagging wet or frozen so"),
    "resistance_ratio": Field("", "resistance found over resistance specified"),
    "effective_conductivity": Field("W/(m·K)", "conductivity the lagging behaves as if it had"),
    "probability_damaged": Field("", "probability of local damage or marked ageing"),
    "probability_local": Field("", "probability of local damage"),
    "probability_aged": Field("", "probability of ageing throughout above 10 % over sound"),
    "variance_shares": Field("", "part of the variance of the loss by declared quantity"),
    "kinds": Field("", "probability of sound, aged and each kind of local damage"),
    "air_temperature": Field("°C", "declared air temperature of the frame"),
    "tracer_heat": Field(
        "W/m",
        "of the loss, what comes from the tracer: its power, or, by its temperature, what it gives "
        "straight to the lagging",
    ),
    "fluid_loss": Field(
        "W/m", "loss less the tracer's heat; negative where the tracer warms the fluid"
    ),
}
_LINE = {
    "length": Field("m", "length of pipe drawn, all regions of the line"),
    "total_loss": Field("W", "heat loss over the drawn regions, metres of its log once"),
    "excess": Field("W", "loss found minus sound loss over the drawn regions"),
}
_LOG_BIN = {
    "station": Field("m", "where this part of the line begins"),
    "length": Field("m", "pipe drawn here, every metre once"),
    "covered": Field("m", "of that, what at least one frame shows"),
    "heat_loss": Field("W/m", "heat loss per metre by all frames together, negative for a gain"),
    "sound_loss": Field("W/m", "what sound lagging would lose in the same conditions"),
    "resistance": Field("m·K/W", "thermal resistance of the lagging found"),
    "resistance_ratio": Field("", "resistance found over resistance specified"),
    "probability_damaged": Field("", "probability of damage here, or of marked ageing"),
}
_LOG_OVERLAP = {
    "start": Field("m", "where several frames begin to show the line"),
    "end": Field("m", "where they end"),
    "heat_losses": Field("W/m", "mean heat loss per metre by each region"),
    "weights": Field("", "weight of each region"),
    "heat_loss": Field("W/m", "combined; wider where they disagree"),
    "standard_uncertainties_apart": Field("", "of the two furthest apart, shared errors cancelled"),
}
_LOG_STRETCH = {
    "start": Field("m", "where the stretch begins along the line"),
    "end": Field("m", "where the stretch ends along the line"),
    "probability": Field("", "probability that there is local damage here, by all frames"),
    "excess": Field("W", "loss above the sound rest, over the whole stretch"),
}
_LOG = {
    "not_seen": Field("m", "between the first and the last metre: no frame shows it, from and to"),
    "covered_length": Field("m", "length of line seen, every metre once"),
}
_COMPONENT = {
    "surface_temperature": Field("°C", "temperature of the component as seen"),
    "equivalent_length": Field(
        "m", "pipe it counts as: bare for a bare one, clad for a lagged one and a hanger"
    ),
    "heat_loss": Field("W", "what the component loses, negative for a gain"),
    "table_loss": Field("W", "the same by print: the metres of line such a component adds"),
    "image_loss": Field("W", "the same by the image: flux at the temperature seen times surface"),
}
_ASSESSMENT = {
    "total_loss": Field("W", "heat loss of all hot regions"),
    "total_gain": Field("W", "heat gain of all chilled regions, positive"),
    "total_excess": Field("W", "loss above sound of all hot regions with a known sound loss"),
    "component_loss": Field("W", "heat loss of all components that lose; in no other total"),
    "component_gain": Field("W", "heat gain of all components that gain, positive"),
}
_ASSUMPTION = {
    "value": Field("", "best estimate, in the unit named beside it"),
    "u": Field("", "standard uncertainty, in the unit named beside it"),
}

FIELDS: dict[type, dict[str, Field]] = {
    StationTable: _STATIONS,
    Stretch: _STRETCH,
    RegionResult: _REGION,
    LineTotal: _LINE,
    LineLog: _LOG,
    LogBin: _LOG_BIN,
    LogOverlap: _LOG_OVERLAP,
    LogStretch: _LOG_STRETCH,
    ComponentResult: _COMPONENT,
    Assessment: _ASSESSMENT,
    Assumption: _ASSUMPTION,
}


def edge_name(owner: type, field: str, part: str = "") -> str:
    """Return the name a field has in files.

    Parameters
    ----------
    owner : type
        Class of the contract the field belongs to.
    field : str
        Field name inside.
    part : {"", "low", "high"}
        End of the 95 % interval.

    Returns
    -------
    str
        E.g. ``heat_loss_low_W_per_m``; the field name itself where it has no unit.
    """
    entry = FIELDS.get(owner, {}).get(field)
    suffix = _SUFFIXES[entry.unit] if entry else ""
    return f"{field}_{part}{suffix}" if part else f"{field}{suffix}"


def is_celsius(owner: type, field: str) -> bool:
    """Return whether the field is a temperature, in kelvin inside and in °C in files."""
    entry = FIELDS.get(owner, {}).get(field)
    return entry is not None and entry.unit == "°C"


def edge_value(kelvin: float) -> float:
    """Return a temperature in °C such that :func:`inside_value` gives `kelvin` back exactly.

    Notes
    -----
    The short decimal (46.95, not 46.950000000000045) is taken where it leads back; the plain
    difference does so from -136 to 511 °C, beyond which one unit in the last place may be lost.
    """
    short = float(Decimal(repr(float(kelvin))) - Decimal("273.15"))
    return short if inside_value(short) == kelvin else kelvin - ZERO_CELSIUS


def inside_value(celsius: float) -> float:
    """Return a temperature in kelvin from one in °C."""
    return celsius + ZERO_CELSIUS
