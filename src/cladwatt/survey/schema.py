"""JSON Schemas of survey file and regions, made from the key list."""

import json
import math
from pathlib import Path

from cladwatt.survey.keys import (
    LAYER,
    PIECE,
    REGION,
    REGION_VALUES,
    ROLES,
    SECTIONS,
    UNKNOWN_WORD,
    Key,
    Section,
)
from cladwatt.units import Unit

__all__ = ["SCHEMA_FOLDER", "regions_schema", "schema_text", "survey_schema"]

SCHEMA_FOLDER = Path(__file__).parent / "schemas"
_DIALECT = "https://json-schema.org/draft/2020-12/schema"
_UNKNOWN = {"const": UNKNOWN_WORD}

Schema = dict[str, object]


def survey_schema() -> Schema:
    """Return the schema of ``survey.toml`` as read into JSON (dates and times as text)."""
    properties: Schema = {}
    for part in SECTIONS:
        table = _table(part)
        properties[part.name] = {"type": "array", "items": table} if part.array else table
    return {
        "$schema": _DIALECT,
        "title": "cladwatt survey file",
        "description": "survey.toml of a cladwatt survey, version 1",
        "type": "object",
        "properties": properties,
        "required": ["survey"],
        "additionalProperties": False,
    }


def _table(part: Section) -> Schema:
    return {
        "type": "object",
        "description": part.title,
        "properties": {
            name: _u(key, unit) if is_u else _value(key, unit)
            for name, (key, unit, is_u) in part.spellings.items()
        }
        | {key.name: _UNKNOWN for key in part.keys if key.has_unit and _takes_unknown(key)},
        "required": [key.usual for key in part.keys if key.required],
        "additionalProperties": False,
    }


def _takes_unknown(key: Key) -> bool:
    return key.kind in ("quantity", "number", "integer", "flag", "date", "time", "size")


def _description(key: Key, unit: Unit | None) -> str:
    text = key.meaning + (f" [{unit.text}]" if unit is not None and unit.text else "")
    return f"{text}. Default: {key.default}" if key.default else text


def _number(key: Key, unit: Unit | None) -> Schema:
    found: Schema = {"type": "number"}
    if unit is None:
        return found
    if math.isfinite(key.lower):
        name = "exclusiveMinimum" if key.lower_open else "minimum"
        found[name] = float(f"{unit.from_si(key.lower):.9g}")
    if math.isfinite(key.upper):
        found["maximum"] = float(f"{unit.from_si(key.upper):.9g}")
    return found


def _u(key: Key, unit: Unit | None) -> Schema:
    sign = f" [{unit.text}]" if unit is not None and unit.text else ""
    return {
        "type": "number",
        "minimum": 0,
        "description": f"Standard uncertainty of {key.name}{sign}",
    }


def _value(key: Key, unit: Unit | None) -> Schema:
    kinds: dict[str, Schema] = {
        "flag": {"type": "boolean"},
        "choice": {"enum": list(key.choices)},
        "date": {"type": "string", "format": "date"},
        "time": {"type": "string"},
        "integer": _number(key, unit) | {"type": "integer"},
        "size": {"type": ["string", "number"]},
        "number": _number(key, unit),
        "numbers": {"type": "array", "items": _number(key, unit), "minItems": 1},
    }
    if key.kind == "quantity":
        found = _quantity(key, unit)
    elif key.kind == "layers":
        found = _list_of(Section("layers", "One layer of lagging", LAYER))
    elif key.kind == "pieces":
        found = _list_of(Section("surroundings", "One piece of the surroundings", PIECE))
    elif key.kind in kinds:
        found = kinds[key.kind]
        if _takes_unknown(key):
            found = {"anyOf": [found, _UNKNOWN]}
    else:
        found = {"type": "string"} | ({} if key.kind == "text" else {"minLength": 1})
    return {"description": _description(key, unit), **found}


def _list_of(part: Section) -> Schema:
    return {"type": "array", "items": _table(part), "minItems": 1}


def _quantity(key: Key, unit: Unit | None) -> Schema:
    pair: Schema = {
        "type": "object",
        "properties": {
            "value": {"anyOf": [_number(key, unit), _UNKNOWN]},
            "u": {"type": "number", "minimum": 0},
        },
        "required": ["value"],
        "additionalProperties": False,
    }
    return {"anyOf": [_number(key, unit), _UNKNOWN, pair]}


def regions_schema() -> Schema:
    """Return the schema of a regions file.

    What a schema cannot say (ids unique in the survey, lines that do not cross themselves,
    inside the frame) the reader checks.
    """
    return {
        "$schema": _DIALECT,
        "title": "cladwatt regions file",
        "description": "regions/<frame id>.geojson, version 1: a FeatureCollection whose"
        " coordinates are [x, y] in pixels, x right, y down, [0, 0] the centre of the first pixel",
        "type": "object",
        "properties": {
            "type": {"const": "FeatureCollection"},
            "features": {"type": "array", "items": _feature()},
        },
        "required": ["type", "features"],
    }


def _feature() -> Schema:
    return {
        "type": "object",
        "properties": {
            "type": {"const": "Feature"},
            "id": {"type": ["string", "integer"]},
            "properties": _region_properties(),
            "geometry": {"oneOf": [_line_string(), _polygon()]},
        },
        "required": ["type", "properties", "geometry"],
    }


def _region_properties() -> Schema:
    named: Schema = {}
    for name, (key, unit, is_u) in Section("region", "", REGION).spellings.items():
        schema = _u(key, unit) if is_u else _value(key, unit)
        named[name] = schema if key.required else {"anyOf": [schema, {"type": "null"}]}
    for role, key in REGION_VALUES.items():
        spellings = Section(role, "", (key,)).spellings
        for name, (_, unit, is_u) in spellings.items():
            text = f"A reading, for {' and '.join(_roles_with(name))}"
            sign = f" [{unit.text}]" if unit is not None and unit.text else ""
            named[name] = (
                {"type": "number", "minimum": 0, "description": f"Standard uncertainty{sign}"}
                if is_u
                else {"description": text + sign, "anyOf": [{"type": "number"}, {"type": "null"}]}
            )
    return {
        "type": "object",
        "properties": named,
        "required": ["role"],
        "allOf": [
            {
                "if": {"properties": {"role": {"const": "pipe"}}, "required": ["role"]},
                "then": {"required": ["tag"]},
            },
            {"properties": {"role": {"enum": list(ROLES)}}},
        ],
    }


def _roles_with(name: str) -> list[str]:
    return [
        role for role, key in REGION_VALUES.items() if name in Section(role, "", (key,)).spellings
    ]


def _position() -> Schema:
    return {"type": "array", "items": {"type": "number"}, "minItems": 2, "maxItems": 2}


def _line_string() -> Schema:
    return {
        "type": "object",
        "properties": {
            "type": {"const": "LineString"},
            "coordinates": {"type": "array", "items": _position(), "minItems": 2},
        },
        "required": ["type", "coordinates"],
    }


def _polygon() -> Schema:
    ring = {"type": "array", "items": _position(), "minItems": 4}
    return {
        "type": "object",
        "properties": {
            "type": {"const": "Polygon"},
            "coordinates": {"type": "array", "items": ring, "minItems": 1},
        },
        "required": ["type", "coordinates"],
    }


def schema_text(schema: Schema) -> str:
    """Return a schema as the text that ships."""
    return json.dumps(schema, indent=1, ensure_ascii=False) + "\n"


def write_schemas(folder: Path = SCHEMA_FOLDER) -> None:
    """Write both schemas anew after the key list has changed."""
    for name, schema in (("survey", survey_schema()), ("regions", regions_schema())):
        (folder / f"{name}.schema.json").write_text(schema_text(schema), encoding="utf-8")
