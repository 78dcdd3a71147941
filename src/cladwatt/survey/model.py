"""What a survey is made of: site, camera, conditions, lines, frames.

Everything is frozen and in SI. ``None`` where a :class:`Quantity` could stand means unknown:
nobody declared it and no default may be given; what depends on it is left out with the reason.
"""

from dataclasses import dataclass, field
from datetime import date, datetime
from pathlib import Path
from typing import Literal

from cladwatt.quantities import Quantity

__all__ = [
    "AccuracyStatement",
    "Camera",
    "Cladding",
    "Conditions",
    "ConductivityCurve",
    "FrameEntry",
    "FrameFormat",
    "Layer",
    "Line",
    "Recording",
    "Site",
    "SurroundingsKind",
    "SurroundingsPiece",
    "Tracing",
    "Window",
]


@dataclass(frozen=True)
class Site:
    """Where the survey was made."""

    name: str = ""
    place: str = ""
    latitude_deg: float | None = None
    longitude_deg: float | None = None
    altitude: float | None = None
    """Height above sea level. [m]"""
    pressure: Quantity | None = None
    """Air pressure; from the altitude or the standard atmosphere where not declared. [Pa]"""


@dataclass(frozen=True)
class AccuracyStatement:
    """A camera's accuracy as its maker states it: a limit, the larger of the two parts.

    ``coverage_factor`` None means a limit of error: rectangular, u = limit / sqrt(3).
    """

    limit: float = 2.0
    """Absolute part. [K]"""
    percent: float = 2.0
    """Part in percent of the reading in degrees Celsius."""
    coverage_factor: float | None = None
    source: str = "declared"


@dataclass(frozen=True)
class Camera:
    """The camera that recorded."""

    model: str = ""
    serial: str = ""
    calibration_date: date | None = None
    band: tuple[float, float] = (7.5e-6, 14e-6)
    """Lower and upper wavelength of the band; of a spectral response, where it passes half of its
    largest value. [m]"""
    band_source: str = "declared"
    response: tuple[tuple[float, ...], tuple[float, ...]] | None = None
    """Spectral response: wavelengths [m], increasing, and the relative response at each, linear
    between and zero beyond; None where only the two ends of the band are known."""
    field_of_view_deg: float | None = None
    """Horizontal field of view."""
    noise: Quantity | None = None
    """Temperature noise of one pixel at 30 °C; estimated from the frame where None. [K]"""
    accuracy: AccuracyStatement = AccuracyStatement()
    spot_pixels: float = 3.0
    """Pixels across one measuring spot."""


@dataclass(frozen=True)
class Window:
    """An infrared window between camera and pipe."""

    transmission: Quantity
    reflectance: Quantity
    temperature: Quantity | None = None
    """Window temperature; air temperature where None. [K]"""


@dataclass(frozen=True)
class Recording:
    """The settings the camera had applied when it recorded; exact, since they are settings."""

    emissivity: float = 1.0
    reflected_temperature: float | None = None
    """[K]"""
    transmission: float = 1.0
    atmosphere_temperature: float | None = None
    """[K]"""
    window_transmission: float = 1.0
    window_temperature: float | None = None
    """[K]"""


SurroundingsKind = Literal["sky", "ground", "wall", "roof", "floor", "neighbour", "other"]


@dataclass(frozen=True)
class SurroundingsPiece:
    """One part of what the pipe exchanges radiation with, taken as black."""

    what: SurroundingsKind
    temperature: Quantity
    """[K]"""
    view_factor: Quantity
    """Share of the pipe's surroundings, 0..1; those of all pieces sum to 1 within 0.02."""


@dataclass(frozen=True)
class Conditions:
    """The conditions during one frame."""

    air_temperature: Quantity | None = None
    surroundings_temperature: Quantity | None = None
    """Temperature of the radiative surroundings for the heat balance; where they are declared in
    pieces, that of uniform surroundings that give the same. [K]"""
    surroundings_pieces: tuple[SurroundingsPiece, ...] = ()
    """What the surroundings are made of, where declared piece by piece."""
    reflected_temperature: Quantity | None = None
    """Reflected apparent temperature in the camera's band. [K]"""
    relative_humidity: Quantity | None = None
    """0..1"""
    distance: Quantity | None = None
    """Camera to pipe. [m]"""
    atmosphere_transmission: Quantity | None = None
    """True transmission of the air path; from humidity and distance where None."""
    wind_speed: Quantity | None = None
    """Wind at the pipe. [m/s]"""
    wind_angle_deg: Quantity | None = None
    """Angle between wind and pipe axis; 90 is across."""
    wind_uphill: Literal[-1, 0, 1] = 0
    """Whether the wind along an inclined run blows up it (1) or down it (-1); 0 is not known."""
    indoors: bool | None = None
    sky_band_temperature: Quantity | None = None
    """What the camera's band sees of the sky. [K]"""
    sky_total_temperature: Quantity | None = None
    """What the heat balance exchanges with. [K]"""
    sky_view_factor: Quantity | None = None
    """Share of the pipe's surroundings that is sky, 0..1."""
    cloud_cover: Quantity | None = None
    """Share of the sky that is clouded, 0..1; `sky_total_temperature` follows from it where no sky
    or surroundings are declared."""
    solar_irradiance: Quantity | None = None
    """Irradiance absorbed over the projected area of the pipe. [W/m2]"""
    sun_on_pipe: bool | None = None
    sun_elevation_deg: float | None = None
    """Of the sun outdoors, by place and time; None where either is unknown."""
    rain_last_24h: bool | None = None
    hours_since_rain: Quantity | None = None
    """Since the rain ended. [h]"""
    sun_last_24h: bool | None = None
    hours_since_sun: Quantity | None = None
    """Since the sun left the pipe, at the latest at sunset. [h]"""
    surface_wet: bool | None = None
    """Whether the surface was wet when it was recorded."""
    sheltered: bool | None = None
    """Whether walls or other pipes shelter the pipe; widens a default u of the wind."""
    roll_deg: float = 0.0
    """Direction of gravity in the frame: 0 is straight down, positive clockwise."""
    window: Window | None = None


@dataclass(frozen=True)
class ConductivityCurve:
    """Conductivity against temperature, linear between nodes."""

    temperature: tuple[float, ...]
    """Increasing. [K]"""
    conductivity: tuple[float, ...]
    """[W/(m K)]"""
    source: str = "declared"
    maximum_service_temperature: float | None = None
    """[K]"""


@dataclass(frozen=True)
class Layer:
    """One layer of lagging, from the inside out."""

    material: str
    thickness: Quantity | None
    """[m]"""
    conductivity: ConductivityCurve | None
    conductivity_factor: Quantity
    """Multiplies the curve; value 1, its u is the curve's relative uncertainty."""
    kind: Literal["lagging", "air_gap"] = "lagging"
    condition: Literal["dry", "wet", "ice"] = "dry"
    """As found; `conductivity` is that of the dry material in any case."""
    condition_factor: Quantity | None = None
    """Conductivity as found over dry, lognormal between published bounds; None where dry, or
    where no ratio is held for the material."""
    inner_emissivity: Quantity | None = None
    """Total emissivity of the face towards the pipe, of an air gap."""
    outer_emissivity: Quantity | None = None
    """Total emissivity of the face away from the pipe, of an air gap."""
    density: Quantity | None = None
    """[kg/m3]"""
    specific_heat: Quantity | None = None
    """[J/(kg K)]"""


@dataclass(frozen=True)
class Cladding:
    """The outer sheet or coat."""

    name: str
    thickness: Quantity
    """[m]"""
    band_emissivity: Quantity
    """In the camera's band, towards the camera, near normal."""
    total_emissivity: Quantity
    """Total hemispherical, for the heat balance."""
    solar_absorptance: Quantity
    conductivity: float
    """Of the sheet. [W/(m K)]"""
    is_metal: bool
    """Whether its emissivity against angle follows bare metal rather than a dielectric coat."""


@dataclass(frozen=True)
class Tracing:
    """A steam or electric tracer under the lagging."""

    kind: Literal["none", "steam", "electric"] = "none"
    clock_position: float | None = None
    """Hours, 12 is up, looking along the line."""
    temperature: Quantity | None = None
    power: Quantity | None = None
    """[W/m]"""


@dataclass(frozen=True)
class Line:
    """One pipe of the line list."""

    tag: str
    pipe_outside_diameter: Quantity | None
    """[m]"""
    layers: tuple[Layer, ...]
    cladding: Cladding
    installation_factor: Quantity
    inside_temperature: Quantity | None
    """Fluid or pipe wall temperature. [K]"""
    inside_is: Literal["fluid", "wall"] = "fluid"
    fluid: str = ""
    area: str = ""
    access: str = ""
    inclination_deg: float = 0.0
    """Angle of the axis from the horizontal, 0 to 90."""
    tracing: Tracing = Tracing()
    pipe_material: str = ""
    hours_at_temperature: Quantity | None = None
    """Time at temperature before the survey. [h]"""
    note: str = ""
    steam_pressure: Quantity | None = None
    """Absolute pressure of saturated steam; `inside_temperature` follows from it. [Pa]"""
    inside_film: Quantity | None = None
    """Coefficient between fluid and pipe wall, on the pipe's outside surface; None where it is
    neglected. [W/(m2 K)]"""
    flow: Quantity | None = None
    """Mass flow. [kg/s]"""
    specific_heat: Quantity | None = None
    """Of the fluid, for its fall of temperature along the line. [J/(kg K)]"""
    supports_allowance: Quantity = field(default_factory=lambda: Quantity(0.0))
    """Share of the sound loss that supports and spacers add to it."""

    @property
    def lagged_diameter(self) -> float | None:
        """Outside diameter over lagging and cladding; None where a part is unknown. [m]"""
        if self.pipe_outside_diameter is None:
            return None
        total = self.pipe_outside_diameter.value + 2 * self.cladding.thickness.value
        for layer in self.layers:
            if layer.thickness is None:
                return None
            total += 2 * layer.thickness.value
        return total


@dataclass(frozen=True)
class FrameFormat:
    """How the numbers of a frame file are to be taken."""

    unit: Literal["C", "K", "F"] | None = None
    """None: must stand in the file."""
    scale: float | None = None
    """Integer counts times `scale` plus `offset` is the temperature in `unit`."""
    offset: float | None = None
    page: int = 0
    rows_from: Literal["top", "bottom"] = "top"
    bad_value: float | None = None
    """As it stands in the file."""
    range_lower: float | None = None
    """Lower end of the camera's recording range. [K]"""
    range_upper: float | None = None
    """[K]"""


@dataclass(frozen=True)
class FrameEntry:
    """One frame as the survey lists it; its pixels are read on demand."""

    id: str
    path: Path
    """Absolute."""
    format: FrameFormat
    recording: Recording
    conditions: Conditions
    time: datetime | None = None
    area: str = ""
    note: str = ""
    photo: Path | None = None
    labels: Path | None = None
    """Label image with a CSV of the same stem beside it."""
    extra: dict[str, str] = field(default_factory=dict)
