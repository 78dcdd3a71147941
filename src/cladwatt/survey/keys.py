"""Every key of the survey file and of a region, in one declarative list.

Reader, JSON Schemas and the starter file are all made from this list. A quantity's key ends with
its unit (``air_temperature_C``); its standard uncertainty stands beside it as ``u_`` and the key
(``u_air_temperature_C``), or both together as ``{ value = 21.0, u = 0.5 }``.

In a frame's table the keys of ``[conditions]`` and ``[format]`` stand as they are and those of
``[recording]`` (the camera's settings) with ``camera_`` before them, so that
``reflected_temperature_C`` is what was there and ``camera_reflected_temperature_C`` is what the
camera had been told.
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Literal

from cladwatt.quantities import Quantity
from cladwatt.units import Unit, units_of

__all__ = [
    "CAMERA_PREFIX",
    "LAYER",
    "PIECE",
    "SECTIONS",
    "TOP_LEVEL",
    "UNKNOWN_WORD",
    "Key",
    "Kind",
    "Section",
    "section",
]

Kind = Literal[
    "text", "name", "flag", "choice", "date", "time", "file", "number", "integer", "quantity",
    "size", "layers", "pieces", "numbers",
]  # fmt: skip

CAMERA_PREFIX = "camera_"
UNKNOWN_WORD = "unknown"
_PRACTICE = "common practice, no source"


@dataclass(frozen=True)
class Key:
    """One key.

    Parameters
    ----------
    name : str
        Without unit and without ``u_``.
    kind : str
        What may stand there; only a ``quantity`` has an uncertainty.
    meaning : str
        In one sentence or less, for the starter file and the schema.
    dimension : str
        Key of :data:`cladwatt.units.UNITS`.
    lower, upper : float
        Accepted range. [SI]
    lower_open : bool
        Whether `lower` itself is refused.
    cut : (float, float), optional
        Where the distribution is cut; the accepted range where None. [SI]
    choices : tuple of str
        Accepted words of a ``choice``.
    u, u_relative : float
        Standard uncertainty where none is declared: the larger of the two counts. [SI], [-]
    u_source : str
        Where that comes from.
    u_row : str
        Row of the table ``defaults`` that takes the place of `u`, or of `u_relative` where its name
        begins with ``u_relative_``; with it goes the row's source.
    default : str
        What holds where the key is missing, in words; empty for nothing.
    ask : bool
        Nothing may be assumed here: a missing key is put to the user as a question.
    required : bool
        Without it the table cannot be used.
    example : str
        Right-hand side for the starter file.
    """

    name: str
    kind: Kind
    meaning: str
    dimension: str = "none"
    lower: float = -math.inf
    upper: float = math.inf
    lower_open: bool = False
    cut: tuple[float, float] | None = None
    choices: tuple[str, ...] = ()
    u: float = 0.0
    u_relative: float = 0.0
    u_source: str = _PRACTICE
    u_row: str = ""
    default: str = ""
    ask: bool = False
    required: bool = False
    example: str = ""

    @property
    def units(self) -> tuple[Unit, ...]:
        """Accepted units, the usual one first."""
        return units_of(self.dimension)

    @property
    def has_unit(self) -> bool:
        """Whether the key must say a unit."""
        return all(unit.suffix for unit in self.units)

    @property
    def spellings(self) -> tuple[tuple[str, Unit], ...]:
        """Every accepted spelling of the value's key, the usual one first."""
        return tuple((f"{self.name}_{u.suffix}" if u.suffix else self.name, u) for u in self.units)

    @property
    def usual(self) -> str:
        """The usual spelling."""
        return self.spellings[0][0]

    def default_u(self, value: float, defaults: Mapping[str, Quantity] | None = None) -> float:
        """Return the standard uncertainty where none is declared. [SI]

        Parameters
        ----------
        value : float
            [SI]
        defaults : mapping of name to Quantity, optional
            The survey's table of defaults; what ships where left out.
        """
        u, share, _ = self.usual_u(defaults)
        return max(u, share * abs(value))

    def usual_u(self, defaults: Mapping[str, Quantity] | None = None) -> tuple[float, float, str]:
        """Return `u`, `u_relative` and their source, the row of the table of defaults in force."""
        if not self.u_row:
            return self.u, self.u_relative, self.u_source
        if defaults is None:
            from cladwatt.materials.load import shipped_tables

            defaults = shipped_tables().defaults
        row = defaults[self.u_row]
        if self.u_row.startswith("u_relative_"):
            return self.u, row.value, row.source
        return row.value, self.u_relative, row.source


@dataclass(frozen=True)
class Section:
    """One table of the survey file."""

    name: str
    title: str
    keys: tuple[Key, ...]
    array: bool = False
    """Whether it may stand several times (``[[line]]``)."""
    strict: bool = True
    """Whether a key that resembles none of these is a fault rather than a question."""

    @cached_property
    def by_name(self) -> dict[str, Key]:
        """Keys by name."""
        return {key.name: key for key in self.keys}

    @cached_property
    def spellings(self) -> dict[str, tuple[Key, Unit, bool]]:
        """Every accepted key as written: (key, unit, whether it is the uncertainty)."""
        found: dict[str, tuple[Key, Unit, bool]] = {}
        for key in self.keys:
            for written, unit in key.spellings:
                found[written] = (key, unit, False)
                if key.kind == "quantity":
                    found[f"u_{written}"] = (key, unit, True)
        return found


def _temperature(name: str, meaning: str, *, u: float, **rest: object) -> Key:
    base = Key(name, "quantity", meaning, "temperature", 50.0, 1800.0, u=u, example="21.0")
    return replace(base, **rest)  # type: ignore[arg-type]


def _setting(name: str, meaning: str, dimension: str, **rest: object) -> Key:
    return replace(Key(name, "number", meaning, dimension), **rest)  # type: ignore[arg-type]


def _flag(name: str, meaning: str, **rest: object) -> Key:
    return replace(Key(name, "flag", meaning, example="true"), **rest)  # type: ignore[arg-type]


def _text(name: str, meaning: str, example: str = '""') -> Key:
    return Key(name, "text", meaning, example=example)


def _emissivity(name: str, meaning: str, default: str) -> Key:
    return Key(
        name, "quantity", meaning, "ratio", 0.0, 1.0, lower_open=True, cut=(0.01, 0.995),
        u=0.03, default=default, example="0.90",
    )  # fmt: skip


SURVEY = (
    Key("name", "name", "Name of this survey", required=True, example='"Boiler house, spring"'),
    Key("date", "date", "Day of the walk-down", ask=True, example="2026-03-18"),
    _text("inspector", "Who surveyed", '"A. Inspector"'),
    Key("line_list", "file", "CSV with the line list, beside this file", example='"lines.csv"'),
    Key("frame_list", "file", "CSV with the frame list, beside this file", example='"frames.csv"'),
    _text("note", "Anything else worth keeping"),
)

SITE = (
    _text("name", "Name of the site", '"North works"'),
    _text("place", "Town or postal address", '"Hall 3"'),
    _setting("latitude", "North positive", "angle", lower=-90.0, upper=90.0, example="52.1"),
    _setting("longitude", "East positive", "angle", lower=-180.0, upper=180.0, example="8.7"),
    _setting(
        "altitude", "Height above the sea", "distance", lower=-450.0, upper=6000.0, example="95"
    ),
    Key(
        "pressure", "quantity", "Absolute air pressure at the site (not reduced to sea level)",
        "pressure", 4e4, 1.1e5, u=200.0, example="101300",
        default="from the altitude, else the standard atmosphere",
    ),
    Key(
        "timezone", "text", "Zone of times written without one: a name or an offset",
        example='"Europe/Berlin"',
    ),
)  # fmt: skip

CAMERA = (
    _text("model", "Type of camera"),
    _text("serial", "Serial number"),
    Key("calibration_date", "date", "Day of the last calibration", example="2025-09-01"),
    _setting(
        "band_lower", "Short end of the band", "wavelength", lower=1e-6, upper=25e-6,
        default="7.5 µm", example="7.5",
    ),
    _setting(
        "band_upper", "Long end of the band", "wavelength", lower=1e-6, upper=25e-6,
        default="14 µm", example="14.0",
    ),
    Key(
        "spectral_response", "file",
        "CSV of the camera's response (columns wavelength_um, response), instead of the two ends",
        example='"response.csv"',
    ),
    _setting(
        "field_of_view", "Horizontal field of view", "angle", lower=0.5, upper=120.0, example="25"
    ),
    Key(
        "noise", "quantity", "Temperature noise of one pixel at 30 °C", "temperature difference",
        0.0, 2.0, u_relative=0.2, default="estimated from the frame", example="0.05",
    ),
    _setting(
        "accuracy", "Maker's limit of error", "temperature difference", lower=0.0, upper=20.0,
        default="2 K where neither this nor the share is declared", example="2.0",
    ),
    _setting(
        "accuracy_of_reading", "Maker's limit as a share of the reading in °C; the larger counts",
        "percent", lower=0.0, upper=20.0, example="2.0",
        default="2 % where neither this nor the limit is declared",
    ),
    _setting(
        "accuracy_coverage_factor", "Only where the maker states one", "none", lower=1.0, upper=4.0
    ),
    _setting(
        "spot_pixels", "Pixels across one measuring spot", "none", lower=1.0, upper=20.0,
        default="3", example="3",
    ),
)  # fmt: skip

RECORDING = (
    _setting(
        "emissivity", "Emissivity the camera was set to", "ratio", lower=0.0, upper=1.0,
        lower_open=True, ask=True, default="1, and asked for", example="0.95",
    ),
    _setting(
        "reflected_temperature", "Reflected apparent temperature the camera was set to",
        "temperature", lower=50.0, upper=1800.0, example="20.0",
    ),
    _setting(
        "transmission", "Transmission of the air the camera was set to", "ratio", lower=0.0,
        upper=1.0, lower_open=True, default="1", example="1.0",
    ),
    _setting(
        "atmosphere_temperature", "Air temperature the camera was set to", "temperature",
        lower=150.0, upper=400.0, example="20.0",
    ),
    _setting(
        "window_transmission", "Window transmission the camera was set to", "ratio", lower=0.0,
        upper=1.0, lower_open=True, default="1", example="1.0",
    ),
    _setting(
        "window_temperature", "Window temperature the camera was set to", "temperature",
        lower=150.0, upper=500.0, example="20.0",
    ),
)  # fmt: skip

CONDITIONS = (
    _flag("indoors", "Whether the pipes are indoors", ask=True),
    _temperature("air_temperature", "Air near the pipe", u=1.0, lower=200.0, upper=370.0, ask=True),
    _temperature(
        "surroundings_temperature", "What the pipe exchanges radiation with, sky left aside", u=2.0,
        default="the air temperature, u 2 K indoors, 10 K outdoors", lower=150.0, upper=800.0,
    ),
    Key(
        "surroundings", "pieces",
        "What the pipe exchanges radiation with, piece by piece, instead of the key above",
        example='[{ what = "wall", temperature_C = 18.0, view_factor = 1.0 }]',
    ),
    _temperature(
        "reflected_temperature", "Reflected apparent temperature in the camera's band", u=2.0,
        default="the surroundings, u 2 K more, indoors or in pieces; the air, u 10 K outdoors",
        lower=100.0, upper=800.0,
    ),
    Key(
        "relative_humidity", "quantity", "Of the air", "ratio", 0.0, 1.0, u=0.05, example="0.5",
        default="0.5, u 0.2",
    ),
    Key(
        "distance", "quantity",
        "Camera to pipe, for the air between; further off declare atmosphere_transmission instead",
        "distance", 0.0, 150.0, lower_open=True, cut=(0.05, 150.0), u_relative=0.1, example="3.0",
    ),
    Key(
        "atmosphere_transmission", "quantity", "True transmission of the air path", "ratio",
        0.0, 1.0, lower_open=True, cut=(0.01, 1.0), u=0.01, default="from humidity and distance",
        example="0.99",
    ),
    Key(
        "wind_speed", "quantity", "Wind at the pipe, not at a mast", "speed", 0.0, 40.0,
        cut=(0.0, 60.0), u=0.1, u_relative=0.25, example="0.2",
        default="0.15 m/s, u 0.1 indoors, sheltered 0.05 m/s, u 0.05; none outdoors",
    ),
    Key(
        "wind_angle", "quantity", "Between wind and pipe axis; 90 is across", "angle", 0.0, 90.0,
        u=20.0, example="90",
    ),
    Key(
        "wind_along", "choice", "Of an inclined run: whether its wind blows up the run or down it",
        choices=("up", "down"), default="not known: taken as aiding", example='"up"',
    ),
    _temperature(
        "sky_band_temperature", "What the camera's band sees of the sky", u=8.0, lower=100.0,
        upper=330.0, example="-40.0",
        default="of a piece of sky 0 to 60 K below the air, all equally likely",
    ),
    _temperature(
        "sky_total_temperature", "What the heat balance exchanges with in the sky", u=5.0,
        lower=150.0, upper=330.0, example="-5.0", default="from cloud_cover where that is declared",
    ),
    Key(
        "cloud_cover", "quantity",
        "Share of the sky that is clouded; outdoors the total sky temperature follows from it",
        "ratio", 0.0, 1.0, u=0.15, example="0.5",
    ),
    Key(
        "sky_view_factor", "quantity", "Share of the pipe's surroundings that is sky", "ratio",
        0.0, 1.0, u=0.1, default="0.5, u 0.15 where a sky temperature is declared", example="0.5",
    ),
    Key(
        "solar_irradiance", "quantity", "Sun on the pipe's projected area", "irradiance", 0.0,
        1500.0, cut=(0.0, 1600.0), u=20.0, u_relative=0.15, example="0",
        default="0 where the sun was down by place and time; a clear sky's where it shone on the"
        " pipe outdoors",
    ),
    _flag("sun_on_pipe", "Whether the sun shone on the pipe"),
    _flag("rain_last_24h", "Whether it rained in the last 24 hours"),
    Key(
        "hours_since_rain", "quantity", "Since it last rained on the pipe, in hours", "none",
        0.0, 240.0, cut=(0.0, 240.0), u=0.25, u_relative=0.1, example="6",
    ),
    _flag("sun_last_24h", "Whether the sun shone on the pipe in the last 24 hours"),
    Key(
        "hours_since_sun", "quantity", "Since the sun left the pipe, in hours", "none", 0.0, 240.0,
        cut=(0.0, 240.0), u=0.25, u_relative=0.1, default="since sunset, by place and time",
        example="5",
    ),
    _flag("surface_wet", "Whether the surface was wet when it was recorded"),
    _flag(
        "sheltered", "Whether walls or other pipes shelter the pipe from the wind: a wind speed"
        " without its own u is taken as twice as uncertain, and where none is declared indoors the"
        " air as all but still",
    ),
    _setting(
        "roll", "Direction of gravity in the frame: 0 is straight down, clockwise positive",
        "angle", lower=-180.0, upper=180.0, default="0", example="0",
    ),
    Key(
        "window_transmission", "quantity", "Of an infrared window in the way", "ratio", 0.0, 1.0,
        lower_open=True, cut=(0.01, 1.0), u=0.02, default="no window", example="0.75",
    ),
    Key(
        "window_reflectance", "quantity", "Of that window", "ratio", 0.0, 1.0, cut=(0.0, 0.99),
        u=0.03, example="0.05",
    ),
    _temperature(
        "window_temperature", "Of that window", u=2.0, default="the air temperature", lower=150.0,
        upper=500.0,
    ),
)  # fmt: skip

FORMAT = (
    Key(
        "unit", "choice", "Unit of the numbers in the frame files", choices=("C", "K", "F"),
        default="must stand in the file", example='"C"',
    ),
    _setting("scale", "Counts times this plus offset is the temperature", "none", example="0.04"),
    _setting("offset", "See scale; in the same unit", "none", example="-273.15"),
    Key(
        "page", "integer", "Page of a TIFF, counted from 0", lower=0.0, upper=1e6, default="0",
        example="0",
    ),
    Key(
        "rows_from", "choice", "Which row stands first in the file", choices=("top", "bottom"),
        default="top", example='"top"',
    ),
    _setting("bad_value", "Number that marks a dead pixel, as in the file", "none", example="-999"),
    _setting(
        "range_lower", "Lower end of the recording range", "temperature", lower=0.0, upper=3300.0,
        example="-20.0",
    ),
    _setting(
        "range_upper", "Upper end of the recording range", "temperature", lower=0.0, upper=3300.0,
        example="120.0",
    ),
)  # fmt: skip


def _in_a_frame(keys: tuple[Key, ...], prefix: str = "") -> tuple[Key, ...]:
    return tuple(
        replace(key, name=prefix + key.name, ask=False, default="as set for the whole survey")
        for key in keys
    )


FRAME = (
    Key("id", "name", "Unique; names the regions file", default="the file's stem"),
    Key("file", "file", "Path from the survey folder", required=True, example='"frames/f01.tiff"'),
    Key("time", "time", "When it was recorded, with zone", example="2026-03-18T09:40:00+01:00"),
    _text("area", "Part of the plant"),
    _text("note", "Remark"),
    Key("photo", "file", "Ordinary photo of the same view", example='"photos/f01.jpg"'),
    Key(
        "labels", "file", "Label image with a CSV of the same stem, in place of drawn regions",
        example='"labels/f01.png"',
    ),
    *_in_a_frame(FORMAT),
    *_in_a_frame(CONDITIONS),
    *_in_a_frame(RECORDING, CAMERA_PREFIX),
)  # fmt: skip

PIECE = (
    Key(
        "what", "choice", "What this piece is",
        choices=("sky", "ground", "wall", "roof", "floor", "neighbour", "other"), required=True,
        example='"wall"',
    ),
    _temperature(
        "temperature",
        "Of its surface, of bright metal what it radiates as; of the sky what the heat balance"
        " exchanges with", u=2.0,
        lower=150.0, upper=1500.0, default="of the sky from cloud_cover where that is declared",
        example="18.0",
    ),
    Key(
        "view_factor", "quantity", "Its share of the pipe's surroundings; all sum to 1", "ratio",
        0.0, 1.0, u=0.05, required=True, example="0.5",
    ),
)  # fmt: skip

LAYER = (
    Key(
        "kind", "choice",
        "Lagging, or air between two surfaces: a gap, or a poor contact some tenths of a mm wide",
        choices=("lagging", "air_gap"),
        default="lagging", example='"lagging"',
    ),
    Key(
        "material", "name", "Name in the material tables, or unknown; none for an air gap",
        default="unknown", example='"mineral_wool"',
    ),
    Key(
        "thickness", "quantity", "Of this layer", "length", 0.0, 1.0, lower_open=True,
        cut=(1e-4, 2.0), u_row="u_relative_lagging_thickness", ask=True, example="50",
    ),
    Key(
        "conductivity", "quantity", "As specified, instead of the table's", "conductivity", 0.0,
        5.0, lower_open=True, u_row="u_relative_conductivity", default="the material's table",
        example="0.038",
    ),
    _setting(
        "conductivity_temperature",
        "Mean temperature it is specified at: the table's curve is scaled to meet it",
        "temperature", lower=50.0, upper=1300.0,
        default="the specified conductivity holds at every temperature", example="50",
    ),
    Key(
        "condition", "choice",
        "As found: dry, wet or frozen; the loss expected of it is told beside that of sound, dry"
        " lagging", choices=("dry", "wet", "ice"),
        default="dry", example='"dry"',
    ),
    _emissivity(
        "inner_emissivity", "Of an air gap: its face towards the pipe, total", "0.9, u 0.05"
    ),
    _emissivity(
        "outer_emissivity", "Of an air gap: its face away from the pipe, total", "0.9, u 0.05"
    ),
)  # fmt: skip

LINE = (
    Key("tag", "name", "Tag of the line, unique", required=True, example='"HS-101"'),
    _text("area", "Part of the plant", '"Boiler house"'),
    _text("access", "How it is reached", '"ladder"'),
    Key(
        "service", "choice", "Whether it should lose heat or gain it", choices=("hot", "chilled"),
        default="by the temperatures", example='"hot"',
    ),
    Key("dn", "integer", "Nominal size DN of the pipe", lower=6.0, upper=3000.0, example="100"),
    Key("nps", "size", "Nominal pipe size in inches", example='"2 1/2"'),
    Key(
        "pipe_series", "choice", "Series the nominal size belongs to", choices=("EN", "ASME"),
        default="EN with dn, ASME with nps", example='"EN"',
    ),
    Key(
        "pipe_outside_diameter", "quantity", "Of the bare pipe, without lagging", "length", 0.003,
        4.0, cut=(0.001, 5.0), u=3e-4, u_row="u_relative_pipe_outside_diameter",
        example="114.3",
    ),
    Key(
        "lagging_material", "text", 'Name in the material tables, "unknown" or "none" (bare)',
        ask=True, example='"mineral_wool"',
    ),
    Key(
        "lagging_thickness", "quantity", "Of a single layer", "length", 0.0, 1.0, lower_open=True,
        cut=(1e-4, 2.0), u_row="u_relative_lagging_thickness", ask=True, example="50",
    ),
    Key(
        "lagging_conductivity", "quantity", "As specified, instead of the table's", "conductivity",
        0.0, 5.0, lower_open=True, u_row="u_relative_conductivity", default="the material's table",
        example="0.038",
    ),
    _setting(
        "lagging_conductivity_temperature",
        "Mean temperature it is specified at: the table's curve is scaled to meet it",
        "temperature", lower=50.0, upper=1300.0,
        default="the specified conductivity holds at every temperature", example="50",
    ),
    Key(
        "lagging_condition", "choice",
        "As found: dry, wet or frozen; the loss expected of it is told beside that of sound, dry"
        " lagging",
        choices=("dry", "wet", "ice"), default="dry", example='"dry"',
    ),
    Key(
        "layers", "layers", "Several layers from the inside out, instead of the keys above",
        example='[{ material = "mineral_wool", thickness_mm = 50 }]',
    ),
    Key(
        "installation_factor", "quantity", "Sound loss as installed over that as specified",
        "none", 0.5, 3.0, cut=(0.8, 3.0), u=0.08, default="1.15, u 0.08, confidence low",
        example="1.15",
    ),
    Key(
        "cladding", "text", 'Name in the material tables, or "unknown"', example='"painted_steel"'
    ),
    Key(
        "cladding_thickness", "quantity", "Of the sheet", "length", 0.0, 0.02, cut=(0.0, 0.05),
        u_relative=0.1, default="the cladding's table", example="0.8",
    ),
    _emissivity(
        "emissivity", "In the camera's band, near normal", "the cladding's table"
    ),
    _emissivity(
        "total_emissivity", "Total hemispherical, for the heat balance", "the cladding's table"
    ),
    Key(
        "solar_absorptance", "quantity", "Of the cladding", "ratio", 0.0, 1.0, u=0.05,
        default="the cladding's table", example="0.4",
    ),
    _text("fluid", "What flows in it", '"saturated steam"'),
    _temperature(
        "fluid_temperature", "Of what flows in it", u=2.0, ask=True, example="165.0", lower=70.0,
        upper=1500.0,
    ),
    _temperature(
        "wall_temperature", "Of the pipe wall, instead of the fluid's", u=2.0, example="160.0",
        lower=70.0, upper=1500.0,
    ),
    Key(
        "steam_pressure", "quantity",
        "Of saturated steam, instead of its temperature; steam_pressure_is must stand beside it",
        "steam pressure", -1e5, 2.2e7, cut=(-1.1e5, 2.3e7), u=1e4, u_relative=0.02, example="7.0",
    ),
    Key(
        "steam_pressure_is", "choice", "Over the air's pressure, or absolute; never guessed",
        choices=("gauge", "absolute"), example='"gauge"',
    ),
    Key(
        "inside_film", "quantity",
        "Coefficient between fluid and pipe, on its outside surface, where it matters: gas, slow"
        " water", "film coefficient", 0.1, 1e6, u_relative=0.3, default="neglected",
        example="50",
    ),
    Key(
        "flow", "quantity", "Of the fluid, for its fall of temperature along the line", "mass flow",
        0.0, 1e5, lower_open=True, cut=(1e-9, 2e5), u_relative=0.1, example="0.5",
    ),
    Key(
        "specific_heat", "quantity", "Of the fluid, for its fall of temperature", "specific heat",
        100.0, 2e4, u_relative=0.03, example="4180",
    ),
    Key(
        "supports_allowance", "quantity",
        "Share of the sound loss that supports and spacers in the lagging add", "ratio", 0.0, 0.5,
        u=0.01, u_relative=0.3, example="0.15",
        default="0: the installation factor holds them",
    ),
    _setting(
        "inclination", "Of the axis: 0 horizontal, 90 vertical", "angle", lower=0.0, upper=90.0,
        default="0", example="0",
    ),
    Key(
        "tracing", "choice", "Heat tracing", choices=("none", "steam", "electric"), default="none",
        example='"none"',
    ),
    _setting(
        "tracer_clock_position", "Where the tracer lies, 12 is up, looking along growing stations",
        "none",
        lower=0.0, upper=12.0, example="6",
    ),
    _temperature(
        "tracer_temperature", "Of the tracer", u=5.0, example="120.0", lower=230.0, upper=900.0
    ),
    Key(
        "tracer_power", "quantity", "Of an electric tracer", "power per length", 0.0, 500.0,
        u_relative=0.1, example="20",
    ),
    _text("pipe_material", "Steel of the pipe", '"carbon steel"'),
    Key(
        "hours_at_temperature", "quantity", "Time at temperature before the survey, in hours",
        "none", 0.0, 1e6, u_relative=0.2, example="48",
    ),
    _text("note", "Remark"),
)  # fmt: skip

ROLES = (
    "pipe", "leave_out", "component", "foil", "tape", "contact", "background", "known_length",
)  # fmt: skip

REGION = (
    Key("id", "name", "Unique in the whole survey", required=True),
    Key("role", "choice", "What was drawn", choices=ROLES, required=True),
    Key("tag", "text", "Line it belongs to; a pipe must have one"),
    _setting(
        "width", "Full width across the pipe", "pixels", lower=0.0, upper=1e5, lower_open=True
    ),
    Key("widths_px", "numbers", "Full width at each vertex", lower=0.0, upper=1e5, lower_open=True),
    _text("kind", "Of a component: flange, valve, hanger, or one of tables/fittings.csv"),
    _flag("lagged", "Whether a component is lagged; bare where it does not say"),
    _setting(
        "start", "Station of the first vertex along the line; by it frames of a line form one log",
        "distance", lower=-1e5, upper=1e5, default="not declared, counted from 0",
    ),
    Key(
        "direction", "choice", "Whether stations grow or fall from the first vertex to the last",
        choices=("forward", "backward"), default="forward",
    ),
    _text("note", "Remark"),
    _emissivity("emissivity", "Overrides the line's, camera's band", "the line's"),
    _emissivity("total_emissivity", "Overrides the line's, total", "the line's"),
    Key(
        "outside_diameter", "quantity", "Over lagging and cladding; overrides the line's",
        "length", 0.003, 6.0, cut=(0.001, 8.0), u_relative=0.01, default="the line's",
    ),
    Key(
        "lagging_thickness", "quantity", "Overrides that of a single-layer line", "length",
        0.0, 1.0, lower_open=True, cut=(1e-4, 2.0), u_row="u_relative_lagging_thickness",
        default="the line's",
    ),
    _setting(
        "inclination", "Of the axis, of a riser, drop or bend: 0 horizontal, 90 vertical", "angle",
        lower=0.0, upper=90.0, default="the line's", example="90",
    ),
)  # fmt: skip

MODEL = (
    Key(
        "convection", "choice",
        "Correlations of convection, free and across flow; iso12241_indoor holds in still air only",
        choices=(
            "churchill", "morgan_zukauskas", "morgan_hilpert", "kuehn_goldstein_whitaker",
            "iso12241_indoor",
        ),
        default="churchill", example='"churchill"',
    ),
)  # fmt: skip

REGION_VALUES: dict[str, Key] = {
    "foil": _temperature("value", "Reflected apparent temperature read on the foil", u=1.0),
    "contact": _temperature("value", "Contact reading", u=0.0, u_row="u_contact_reading"),
    "background": _temperature("value", "Temperature of this background", u=1.5),
    "tape": replace(_emissivity("value", "Emissivity of the tape or paint", ""), u=0.015),
    "known_length": Key(
        "value", "quantity", "Length between the two ends", "distance", 0.0, 1e3, lower_open=True,
        cut=(1e-3, 2e3), u=0.005, u_relative=0.01,
    ),
}  # fmt: skip
"""What ``value`` means for each role that carries a reading."""

SECTIONS: tuple[Section, ...] = (
    Section("survey", "The survey itself", SURVEY),
    Section("site", "Where it was made", SITE),
    Section("camera", "The camera", CAMERA),
    Section("recording", "What the camera had applied when it recorded", RECORDING),
    Section("conditions", "What was true, unless a frame says otherwise", CONDITIONS),
    Section("format", "How the numbers of the frame files are to be taken", FORMAT),
    Section("model", "How the heat is worked out", MODEL),
    Section("line", "One line of the line list", LINE, array=True),
    Section("frame", "One frame; also takes the keys of conditions and format, and those of"
            " recording with camera_ before them", FRAME, array=True),
)  # fmt: skip

TOP_LEVEL: frozenset[str] = frozenset(part.name for part in SECTIONS)


def section(name: str) -> Section:
    """Return the section of this name."""
    return next(part for part in SECTIONS if part.name == name)
