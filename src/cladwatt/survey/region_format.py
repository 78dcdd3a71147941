"""Regions as GeoJSON (RFC 7946 geometry types) in pixel coordinates, read and written.

Coordinates are ``[x, y]`` in pixels: x right, y down, ``[0, 0]`` the centre of the first pixel.
The rule of RFC 7946 that coordinates are longitude and latitude does not apply.
"""

import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import cast

from cladwatt.errors import Fault, RegionError
from cladwatt.quantities import Quantity
from cladwatt.survey.atomic import write_atomically
from cladwatt.survey.fault_list import FaultList, Place, shown
from cladwatt.survey.keys import REGION, REGION_VALUES, Section
from cladwatt.survey.region import Region, RegionRole
from cladwatt.survey.region_geometry import (
    MAXIMUM_VERTICES,
    Point,
    first_crossing,
    ring_area,
    zero_step,
)
from cladwatt.survey.table_reader import Table, read_table
from cladwatt.survey.values import Problem, read_number

__all__ = ["MAXIMUM_BYTES", "parse_regions", "region_text", "write_regions"]

MAXIMUM_BYTES = 64 * 1024 * 1024
_MAXIMUM_FEATURES = 10_000
_SMALLEST_AREA = 9.0
"""Three by three pixels: one measuring spot. [px2]"""


def parse_regions(
    data: bytes,
    path: str,
    frame_id: str,
    faults: FaultList,
    defaults: Mapping[str, Quantity] | None = None,
) -> list[Region]:
    """Return the regions of one frame's file that can be used.

    Parameters
    ----------
    data : bytes
        The file, UTF-8.
    path : str
        Name in messages.
    frame_id : str
        Frame they are drawn on.
    faults : FaultList
        Gets one fault or more for each feature that is left out. A file that cannot be read at
        all is a fault of the frame.
    defaults : mapping of name to Quantity, optional
        The survey's table of defaults, for readings without uncertainty.

    Returns
    -------
    list of Region
        In the order of the file; ids and tags are not yet compared with the rest of the survey.
    """
    whole = Place(path, frame_id=frame_id)
    try:
        features = _features(data)
    except Problem as problem:
        faults.add(whole, "", problem.found, problem.expected, line=problem.line)
        return []
    regions = []
    for number, feature in enumerate(features, start=1):
        region = _region(feature, number, whole, faults, defaults)
        if region is not None:
            regions.append(region)
    return regions


def _features(data: bytes) -> list[object]:
    document = _json(data)
    if not isinstance(document, dict) or document.get("type") != "FeatureCollection":
        kind = document.get("type") if isinstance(document, dict) else document
        raise Problem(f"the file holds {shown(kind)}", "expected a FeatureCollection")
    features = document.get("features")
    if not isinstance(features, list):
        raise Problem(f"features is {shown(features)}", "expected a list of features")
    if len(features) > _MAXIMUM_FEATURES:
        raise Problem(f"{len(features)} features", f"expected at most {_MAXIMUM_FEATURES}")
    return features


def _json(data: bytes) -> object:
    if len(data) > MAXIMUM_BYTES:
        raise Problem(f"the file has {len(data)} bytes", f"expected at most {MAXIMUM_BYTES}")
    if not data.strip():
        raise Problem("the file is empty", "expected a FeatureCollection")
    try:
        text = data.decode("utf-8-sig")
        return cast(
            object,
            json.loads(text, parse_constant=_refuse_constant, object_pairs_hook=_once_each),
        )
    except UnicodeDecodeError:
        raise Problem("the text is not UTF-8", "save the file as UTF-8") from None
    except json.JSONDecodeError as error:
        raise Problem(
            f"not valid JSON: {error.msg} at column {error.colno}",
            "mend it there, or draw the regions anew",
            error.lineno,
        ) from None
    except RecursionError:
        raise Problem("the JSON is nested too deeply", "expected a FeatureCollection") from None
    except ValueError as error:
        raise Problem(f"not readable JSON: {str(error)[:120]}", "expected short numbers") from None


def _refuse_constant(name: str) -> float:
    raise Problem(f"a number is {name}", "expected finite numbers")


def _once_each(pairs: list[tuple[str, object]]) -> dict[str, object]:
    found: dict[str, object] = {}
    for name, value in pairs:
        if name in found:
            raise Problem(f"the key {shown(name)} stands twice in one object", "expected it once")
        found[name] = value
    return found


def _region(
    feature: object,
    number: int,
    whole: Place,
    faults: FaultList,
    defaults: Mapping[str, Quantity] | None,
) -> Region | None:
    place = replace(whole, prefix=f"feature {number}", region_id=f"feature {number}")
    if not isinstance(feature, dict) or feature.get("type") != "Feature":
        kind = feature.get("type") if isinstance(feature, dict) else feature
        faults.add(place, "", f"it is {shown(kind)}", "expected a Feature")
        return None
    properties = feature.get("properties")
    if not isinstance(properties, dict):
        faults.add(
            place, "", f"properties is {shown(properties)}", "expected id, role and the like"
        )
        return None
    named = {name: value for name, value in properties.items() if value is not None}
    if "id" not in named and isinstance(feature.get("id"), (str, int)):
        named["id"] = str(feature["id"])
    identity = named.get("id")
    if isinstance(identity, str) and identity.strip():
        label = shown(identity.strip())
        place = replace(place, prefix=f"feature {number} (id {label})", region_id=identity.strip())
    before = faults.errors
    table = read_table(
        _section(named.get("role")), named, place, faults, ask=False, defaults=defaults
    )
    shape = _shape(feature.get("geometry"), table, place, faults)
    _check_role(table, place, faults)
    if faults.errors > before or shape is None:
        return None
    return _build(table, shape, number, place)


def _section(role: object) -> Section:
    value = REGION_VALUES.get(role) if isinstance(role, str) else None
    keys = REGION if value is None else (*REGION, value)
    return Section(
        f"a {role} region" if isinstance(role, str) else "a region", "", keys, strict=False
    )


def _check_role(table: Table, place: Place, faults: FaultList) -> None:
    role = table.text("role")
    if role == "pipe" and not table.text("tag"):
        faults.add(place, "tag", "a pipe region has no tag", "expected the tag of its line")
    if role == "known_length" and not table.has("value"):
        faults.add(place, "value", "a known length has no value", "expected value_m")


@dataclass(frozen=True)
class _Shape:
    centreline: tuple[Point, ...] | None = None
    widths: tuple[float, ...] | None = None
    outline: tuple[Point, ...] | None = None
    holes: tuple[tuple[Point, ...], ...] = ()


def _shape(geometry: object, table: Table, place: Place, faults: FaultList) -> _Shape | None:
    try:
        if not isinstance(geometry, dict):
            raise Problem(f"geometry is {shown(geometry)}", "expected a LineString or Polygon")
        kind, points = geometry.get("type"), geometry.get("coordinates")
        if kind == "LineString":
            return _line(points, table)
        if kind == "Polygon":
            return _polygon(points, table)
        hint = "expected a LineString (with a width) or a Polygon"
        if isinstance(kind, str) and kind.startswith("Multi"):
            hint += "; draw each part as a feature of its own, with its own id"
        elif kind == "Point":
            hint += "; draw a small Polygon round the spot"
        raise Problem(f"geometry is {shown(kind)}", hint)
    except Problem as problem:
        faults.add(place, "", problem.found, problem.expected)
        return None


def _positions(raw: object, what: str, fewest: int) -> tuple[Point, ...]:
    if not isinstance(raw, list) or len(raw) < fewest:
        count = f"{len(raw)} points" if isinstance(raw, list) else shown(raw)
        raise Problem(f"{what} has {count}", f"expected at least {fewest} points [x, y]")
    if len(raw) > MAXIMUM_VERTICES:
        raise Problem(f"{what} has {len(raw)} points", f"expected at most {MAXIMUM_VERTICES}")
    points = []
    for number, item in enumerate(raw, start=1):
        if not isinstance(item, list) or len(item) != 2:
            raise Problem(f"point {number} of {what} is {shown(item)}", "expected [x, y] in pixels")
        x, y = (read_number(f"point {number} of {what}", value) for value in item)
        if max(abs(x), abs(y)) > 1e6:
            raise Problem(f"point {number} of {what} is {shown(item)}", "expected pixels")
        points.append((x, y))
    return tuple(points)


def _line(raw: object, table: Table) -> _Shape:
    points = _positions(raw, "the centreline", 2)
    repeated = zero_step(points)
    if repeated is not None:
        raise Problem(f"point {repeated} of the centreline repeats the one before", "delete it")
    crossing = first_crossing(points, closed=False)
    if crossing is not None:
        raise Problem(
            f"the centreline crosses itself (segments {crossing[0]} and {crossing[1]})",
            "expected a line that does not; draw a pipe that passes twice as two features",
        )
    return _Shape(centreline=points, widths=_widths(table, len(points)))


def _widths(table: Table, count: int) -> tuple[float, ...] | None:
    one, several = table.number("width"), table.get("widths_px")
    if one is not None and several is not None:
        raise Problem("width_px and widths_px are both given", "expected one of them")
    if isinstance(several, tuple):
        if len(several) != count:
            raise Problem(
                f"widths_px has {len(several)} numbers and the centreline {count} points",
                "expected one width per point",
            )
        return several
    if one is not None:
        return (one,) * count
    if table.text("role") == "known_length":
        return None
    raise Problem("a LineString has no width", "expected width_px, or widths_px per point")


def _polygon(raw: object, table: Table) -> _Shape:
    for name in ("width", "widths_px"):
        if table.has(name):
            raise Problem(
                f"a Polygon has {table.spelling(name)}", "delete it, or draw a LineString"
            )
    if table.text("role") == "known_length":
        raise Problem("a known length is a Polygon", "expected a LineString between its two ends")
    if not isinstance(raw, list) or not raw:
        raise Problem(f"coordinates is {shown(raw)}", "expected a list of rings")
    rings = [
        _ring(ring, "the outline" if number == 0 else f"hole {number}")
        for number, ring in enumerate(raw)
    ]
    return _Shape(outline=rings[0], holes=tuple(rings[1:]))


def _ring(raw: object, what: str) -> tuple[Point, ...]:
    points = _positions(raw, what, 4)
    if math.dist(points[0], points[-1]) > 1e-9:
        raise Problem(f"{what} is not closed", "expected its first point again at the end")
    ring = points[:-1]
    repeated = zero_step(ring)
    if repeated is not None:
        raise Problem(f"point {repeated} of {what} repeats the one before", "delete it")
    crossing = first_crossing(ring, closed=True)
    if crossing is not None:
        raise Problem(
            f"{what} crosses itself (sides {crossing[0]} and {crossing[1]})",
            "expected a ring that does not; move the point",
        )
    area = ring_area(ring)
    if area < _SMALLEST_AREA and what == "the outline":
        raise Problem(
            f"too few pixels: {what} encloses {area:.3g}",
            f"expected at least {_SMALLEST_AREA:g}, three by three",
        )
    return ring


def _build(table: Table, shape: _Shape, number: int, place: Place) -> Region:
    return Region(
        id=table.text("id"),
        frame_id=place.frame_id or "",
        role=cast(RegionRole, table.text("role")),
        tag=table.text("tag") or None,
        centreline=shape.centreline,
        widths=shape.widths,
        outline=shape.outline,
        holes=shape.holes,
        kind=table.text("kind"),
        lagged=table.flag("lagged"),
        start=table.number("start"),
        direction=-1 if table.text("direction") == "backward" else 1,
        is_directed=table.has("direction") and shape.centreline is not None,
        value=table.quantity("value") if table.has("value") else None,
        note=table.text("note"),
        band_emissivity=table.quantity("emissivity"),
        total_emissivity=table.quantity("total_emissivity"),
        outside_diameter=table.quantity("outside_diameter"),
        lagging_thickness=table.quantity("lagging_thickness"),
        inclination_deg=table.number("inclination"),
        feature=number,
    )


_VALUE_SPELLING = {"tape": "value", "known_length": "value_m"}


def _direction(region: Region) -> str | None:
    if region.direction == -1:
        return "backward"
    return "forward" if region.is_directed else None


def _properties(region: Region) -> dict[str, object]:
    """Return the properties as written: K and m, which survive reading back to the last bit."""
    found: dict[str, object] = {"id": region.id, "role": region.role}
    optional: tuple[tuple[str, object], ...] = (
        ("tag", region.tag),
        ("kind", region.kind or None),
        ("lagged", region.lagged),
        ("start_m", region.start),
        ("direction", _direction(region)),
        ("inclination_deg", region.inclination_deg),
        ("note", region.note or None),
    )
    found.update((name, value) for name, value in optional if value is not None)
    if region.widths is not None:
        if len(set(region.widths)) == 1:
            found["width_px"] = region.widths[0]
        else:
            found["widths_px"] = list(region.widths)
    quantities: tuple[tuple[str, Quantity | None], ...] = (
        (_VALUE_SPELLING.get(region.role, "value_K"), region.value),
        ("emissivity", region.band_emissivity),
        ("total_emissivity", region.total_emissivity),
        ("outside_diameter_m", region.outside_diameter),
        ("lagging_thickness_m", region.lagging_thickness),
    )
    for name, quantity in quantities:
        if quantity is not None and not quantity.is_default:
            found[name] = quantity.value
            if quantity.source == "declared":
                found[f"u_{name}"] = quantity.u
    return found


def _geometry(region: Region) -> dict[str, object]:
    if region.centreline is not None:
        return {"type": "LineString", "coordinates": [list(p) for p in region.centreline]}
    if region.outline is None:
        raise RegionError(
            Fault(
                f"regions/{region.frame_id}.geojson", f"id {region.id!r}",
                "the region has neither centreline nor outline", "expected one of them",
                frame_id=region.frame_id, region_id=region.id,
            )
        )  # fmt: skip
    rings = (region.outline, *region.holes)
    closed = [[list(point) for point in (*ring, ring[0])] for ring in rings]
    return {"type": "Polygon", "coordinates": closed}


def region_text(regions: Sequence[Region]) -> str:
    """Return regions as the text of a GeoJSON file, one feature per line.

    Emissivities that were derived from a line's rather than declared are not written.
    """
    features = ",\n".join(
        json.dumps(
            {
                "type": "Feature",
                "properties": _properties(region),
                "geometry": _geometry(region),
            },
            ensure_ascii=False,
            allow_nan=False,
        )
        for region in regions
    )
    return f'{{"type": "FeatureCollection", "features": [\n{features}\n]}}\n'


def write_regions(path: Path, regions: Sequence[Region]) -> None:
    """Write the regions of one frame; the old file stays whole until the new one is.

    Reading the file back gives equal regions, features numbered in this order.

    Parameters
    ----------
    path : Path
        ``regions/<frame id>.geojson``; the folder must be there.
    regions : sequence of Region
        All of one frame.

    Raises
    ------
    RegionError
        If a region has no geometry.
    OSError
        If the file cannot be written.
    """
    write_atomically(path, region_text(regions).encode())
