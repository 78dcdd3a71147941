"""The invented plant of the sample: what is declared of it, and where the camera stood."""

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

from cladwatt.synthetic.damage import DamageKind

__all__ = ["Declared", "Plant", "PlantFrame", "PlantLine", "PlantPipe", "load_plant"]


@dataclass(frozen=True)
class Declared:
    """A declared quantity, in the unit of the plant file."""

    value: float
    u: float


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


@dataclass(frozen=True)
class PlantPipe:
    """A line as seen in one frame."""

    id: str
    tag: str
    ends: tuple[tuple[float, float, float], ...]
    drawn: tuple[float, float]
    only: tuple[DamageKind, ...]
    component: str
    component_at: float
    crossed_by: str
    clear: tuple[float, float] | None
    """Shares of the drawn part where no damage may lie."""
    tape: float | None


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
        material=table["lagging_material"], cladding=table["cladding"],
        quantities=_declared(table),
        cladding_thickness_mm=float(table["cladding_thickness_mm"]),
        sheet_conductivity=float(table["sheet_conductivity"]),
        inside_coefficient=float(table["inside_coefficient"]),
        patchy=float(table["patchy"]), mirror=float(table["mirror"]),
        is_metal=bool(table.get("is_metal", False)),
        inclination_deg=float(table.get("inclination_deg", 0.0)),
    )  # fmt: skip


def _pipe(table: dict[str, Any]) -> PlantPipe:
    return PlantPipe(
        id=table["id"], tag=table["tag"],
        ends=tuple((float(x), float(y), float(z)) for x, y, z in table["ends"]),
        drawn=(float(table["drawn"][0]), float(table["drawn"][1])),
        only=tuple(table.get("only", ())),
        component=table.get("component", ""), component_at=float(table.get("component_at", 0.0)),
        crossed_by=table.get("crossed_by", ""),
        clear=tuple(table["clear"]) if "clear" in table else None,
        tape=table.get("tape"),
    )  # fmt: skip


def _frame(table: dict[str, Any]) -> PlantFrame:
    above, beside, below = table["scene"]
    return PlantFrame(
        id=table["id"], time=table["time"], note=table["note"], rows=table["rows"],
        cols=table["cols"], file=table["file"], indoors=table["indoors"],
        conditions=_declared(table), scene=(float(above), float(beside), float(below)),
        neighbour=tuple(table.get("neighbour", ())), foil=tuple(table.get("foil", ())),
        pipes=tuple(_pipe(pipe) for pipe in table["pipes"]),
    )  # fmt: skip


@cache
def load_plant() -> Plant:
    """Return the plant that ships with the package."""
    text = files("cladwatt.synthetic").joinpath("plant.toml").read_text(encoding="utf-8")
    table = tomllib.loads(text)
    return Plant(
        table["survey"],
        table["camera"],
        {line["tag"]: _line(line) for line in table["line"]},
        tuple(_frame(frame) for frame in table["frame"]),
    )
