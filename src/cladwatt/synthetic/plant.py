"""The invented plant of the sample: what is declared of it, and where the camera stood."""

import tomllib
from dataclasses import dataclass, replace
from functools import cache
from importlib.resources import files
from typing import Any, Literal

from cladwatt.synthetic.damage import DamageKind

__all__ = [
    "Condition",
    "Declared",
    "Plant",
    "PlantComponent",
    "PlantFrame",
    "PlantLayer",
    "PlantLine",
    "PlantPiece",
    "PlantPipe",
    "load_plant",
]


Condition = Literal["dry", "wet", "ice"]


@dataclass(frozen=True)
class Declared:
    """A declared quantity, in the unit of the plant file."""

    value: float
    u: float


@dataclass(frozen=True)
class PlantLayer:
    """One layer of lagging, from the inside out; without a material an air gap."""

    material: str
    thickness_mm: Declared
    inner_emissivity: float = 0.9
    outer_emissivity: float = 0.9
    condition: Condition = "dry"
    """As it was found, and is declared."""


@dataclass(frozen=True)
class PlantPiece:
    """One part of what a pipe exchanges radiation with."""

    what: str
    temperature_C: Declared
    view_factor: float


@dataclass(frozen=True)
class PlantComponent:
    """A body on a pipe."""

    kind: str
    at: float
    """Its middle, as a share of the drawn part."""
    lagged: bool


@dataclass(frozen=True)
class PlantLine:
    """One line of the plant; quantities by the keys of the survey file."""

    tag: str
    area: str
    fluid: str
    material: str
    cladding: str
    quantities: dict[str, Declared]
    cladding_thickness_mm: float
    sheet_conductivity: float
    inside_coefficient: float
    patchy: float
    mirror: float
    is_metal: bool
    inclination_deg: float
    layers: tuple[PlantLayer, ...] = ()
    """Instead of material and thickness; an air gap comes last."""
    tracer_clock: float | None = None
    """Where a steam tracer lies, in hours."""
    heat_capacity: float = 0.0
    """Of the lagging, for a line that warms up. [J/(m3 K)]"""
    condition: Condition = "dry"
    """Of a single layer, as it was found, and is declared."""

    @property
    def is_soaked(self) -> bool:
        """Whether any of its lagging is wet or frozen throughout."""
        return any(c != "dry" for c in (self.condition, *(one.condition for one in self.layers)))


@dataclass(frozen=True)
class PlantPipe:
    """A line as seen in one frame."""

    id: str
    tag: str
    ends: tuple[tuple[float, float, float], ...]
    drawn: tuple[float, float]
    only: tuple[DamageKind, ...]
    components: tuple[PlantComponent, ...]
    crossed_by: str
    clear: tuple[float, float] | None
    """Shares of the drawn part where no damage may lie."""
    tape: float | None
    kinds: tuple[DamageKind, ...] = ()
    """In a corner frame: what it may have, drawn by lot."""
    inclination_deg: float | None = None
    """Of a riser or drop, over its line's."""
    start_m: float | None = None
    """Along the line, of what is drawn first; None where the inspector did not say."""


@dataclass(frozen=True)
class PlantFrame:
    """One frame of the survey; conditions by the keys of the survey file."""

    id: str
    time: str
    note: str
    rows: int
    cols: int
    file: str
    indoors: bool
    conditions: dict[str, Declared]
    scene: tuple[float, float, float]
    neighbour: tuple[float, ...]
    foil: tuple[float, ...]
    pipes: tuple[PlantPipe, ...]
    pieces: tuple[PlantPiece, ...] = ()
    sun: tuple[float, ...] = ()
    """Towards the sun, in camera coordinates; empty where it does not shine on the pipes."""
    wet: bool = False
    """Whether rain stands on the cladding."""
    wind_along: Literal["", "up", "down"] = ""
    """Which way the wind blows along an inclined run."""
    sheltered: bool = False
    """Whether the wind's uncertainty is left to the default for sheltered pipes."""
    day_before: Literal["", "sun", "rain"] = ""
    """What had been within a day, its traces gone."""
    camera_window: tuple[float, float] | None = None
    """Window the camera had been told of: its transmission and temperature. [-], [°C]"""
    upper_end_C: float | None = None
    """Of the recording range."""
    is_corner: bool = False
    """Whether it was added to show a rarer case."""


@dataclass(frozen=True)
class Plant:
    """The plant."""

    survey: dict[str, Any]
    camera: dict[str, Any]
    lines: dict[str, PlantLine]
    frames: tuple[PlantFrame, ...]


def _declared(table: dict[str, Any]) -> dict[str, Declared]:
    """Return the ``[value, u]`` entries of a table."""
    return {
        key: Declared(float(value[0]), float(value[1]))
        for key, value in table.items()
        if isinstance(value, list) and len(value) == 2 and not isinstance(value[0], (dict, list))
    }


def _line(table: dict[str, Any]) -> PlantLine:
    return PlantLine(
        tag=table["tag"], area=table["area"], fluid=table["fluid"],
        material=table.get("lagging_material", ""), cladding=table["cladding"],
        quantities=_declared(table),
        cladding_thickness_mm=float(table["cladding_thickness_mm"]),
        sheet_conductivity=float(table["sheet_conductivity"]),
        inside_coefficient=float(table["inside_coefficient"]),
        patchy=float(table["patchy"]), mirror=float(table["mirror"]),
        is_metal=bool(table.get("is_metal", False)),
        inclination_deg=float(table.get("inclination_deg", 0.0)),
        layers=tuple(_layer(layer) for layer in table.get("layers", ())),
        tracer_clock=table.get("tracer_clock"),
        heat_capacity=float(table.get("heat_capacity", 0.0)),
        condition=table.get("lagging_condition", "dry"),
    )  # fmt: skip


def _layer(table: dict[str, Any]) -> PlantLayer:
    value, u = table["thickness_mm"]
    faces = {key: float(table[key]) for key in ("inner_emissivity", "outer_emissivity")
             if key in table}  # fmt: skip
    return PlantLayer(
        table.get("material", ""), Declared(float(value), float(u)), **faces,
        condition=table.get("condition", "dry"),
    )  # fmt: skip


def _piece(table: dict[str, Any]) -> PlantPiece:
    value, u = table["temperature_C"]
    return PlantPiece(table["what"], Declared(float(value), float(u)), float(table["view_factor"]))


def _pipe(table: dict[str, Any]) -> PlantPipe:
    return PlantPipe(
        id=table["id"], tag=table["tag"],
        ends=tuple((float(x), float(y), float(z)) for x, y, z in table["ends"]),
        drawn=(float(table["drawn"][0]), float(table["drawn"][1])),
        only=tuple(table.get("only", ())),
        components=tuple(
            PlantComponent(one["kind"], float(one["at"]), bool(one["lagged"]))
            for one in table.get("components", ())
        ),
        crossed_by=table.get("crossed_by", ""),
        clear=tuple(table["clear"]) if "clear" in table else None,
        tape=table.get("tape"), kinds=tuple(table.get("kinds", ())),
        inclination_deg=table.get("inclination_deg"), start_m=_start(table),
    )  # fmt: skip


def _start(table: dict[str, Any]) -> float | None:
    return float(table["start_m"]) if "start_m" in table else None


def _frame(table: dict[str, Any]) -> PlantFrame:
    above, beside, below = table["scene"]
    return PlantFrame(
        id=table["id"], time=table["time"], note=table["note"], rows=table["rows"],
        cols=table["cols"], file=table["file"], indoors=table["indoors"],
        conditions=_declared(table), scene=(float(above), float(beside), float(below)),
        neighbour=tuple(table.get("neighbour", ())), foil=tuple(table.get("foil", ())),
        pipes=tuple(_pipe(pipe) for pipe in table["pipes"]),
        pieces=tuple(_piece(piece) for piece in table.get("pieces", ())),
        sun=tuple(float(part) for part in table.get("sun", ())), wet=bool(table.get("wet", False)),
        wind_along=table.get("wind_along", ""), sheltered=bool(table.get("sheltered", False)),
        day_before=table.get("day_before", ""),
        camera_window=_camera_window(table), upper_end_C=table.get("upper_end_C"),
    )  # fmt: skip


def _camera_window(table: dict[str, Any]) -> tuple[float, float] | None:
    setting = table.get("camera_window")
    return None if setting is None else (setting["transmission"], setting["temperature_C"])


def _read(name: str) -> dict[str, Any]:
    return tomllib.loads(files("cladwatt.synthetic").joinpath(name).read_text(encoding="utf-8"))


@cache
def load_plant(corners: bool = True) -> Plant:
    """Return the plant that ships with the package.

    Parameters
    ----------
    corners : bool
        With the frames of rarer cases: sun, condensation, frost, wet and frozen lagging, tracing,
        layers, fittings, warming up, rain, a window, risers, wind along a run.

    Returns
    -------
    Plant
        The plant.
    """
    table, more = _read("plant.toml"), _read("corners.toml") if corners else {}
    lines = [*table["line"], *more.get("line", ())]
    frames = [_frame(frame) for frame in table["frame"]]
    frames += [replace(_frame(frame), is_corner=True) for frame in more.get("frame", ())]
    return Plant(
        table["survey"],
        table["camera"],
        {line["tag"]: _line(line) for line in lines},
        tuple(frames),
    )
