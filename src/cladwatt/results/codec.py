"""Frozen results to plain JSON data and back, and the schema of it, led by the type hints.

A figure that is not finite is null in the data; where such nulls stand is kept apart, as JSON
pointers (RFC 6901), so that NaN, inf and unknown (None) come back as what they were.
"""

import math
import types
from collections.abc import Callable
from dataclasses import MISSING, fields, is_dataclass
from functools import cache
from typing import Any, Literal, Union, get_args, get_origin, get_type_hints

from cladwatt.errors import ResultsError
from cladwatt.results.assessment import ComponentResult, FrameResult, RegionResult
from cladwatt.results.fields import FIELDS, edge_name, edge_value, inside_value, is_celsius

__all__ = [
    "NOT_STORED",
    "DataError",
    "NotFinite",
    "decode",
    "encode",
    "restore_not_finite",
    "schema_of",
]


class DataError(ResultsError):
    """Data are not what the contract asks for; the message names the place, not the file."""


NOT_STORED: dict[type, frozenset[str]] = {
    RegionResult: frozenset({"stations", "strip_temperature", "draws", "profile"}),
    ComponentResult: frozenset({"draws"}),
    FrameResult: frozenset({"seconds"}),
}
"""Fields kept in array files, and the run's duration, which is no result."""

NotFinite = dict[str, str]
"""JSON pointer to ``nan``, ``inf`` or ``-inf``."""

Supply = Callable[[type, dict[str, Any]], dict[str, Any]]
_NUMBER = (float, int)


@cache
def _hints(cls: type) -> dict[str, Any]:
    return get_type_hints(cls)


def _stored(cls: type) -> list[tuple[str, str, Any]]:
    """Return (field, JSON key, hint) of what is stored of a class."""
    left_out = NOT_STORED.get(cls, frozenset())
    return [
        (field.name, edge_name(cls, field.name), _hints(cls)[field.name])
        for field in fields(cls)
        if field.name not in left_out
    ]


def _alternatives(hint: Any) -> tuple[Any, ...]:
    return get_args(hint) if get_origin(hint) in (Union, types.UnionType) else (hint,)


def _is_mapping(hint: Any) -> bool:
    """Whether a hint is a run of (name, value) pairs, an object in JSON."""
    args = get_args(hint)
    return (
        get_origin(hint) is tuple
        and len(args) == 2
        and args[1] is Ellipsis
        and get_origin(args[0]) is tuple
        and get_args(args[0])[0] is str
    )


# --- to JSON ---------------------------------------------------------------------------------


def encode(
    value: Any, hint: Any, not_finite: NotFinite, at: str = "", celsius: bool = False
) -> Any:
    """Return plain JSON data of a value of the contract.

    Parameters
    ----------
    value : object
        Value to encode.
    hint : type
        Its type hint.
    not_finite : dict
        Filled with the pointers of figures that are not finite.
    at : str
        JSON pointer of the value.
    celsius : bool
        Whether figures below are temperatures, to be given in °C.
    """
    if value is None:
        return None
    if isinstance(value, str):
        return str(value)
    choices = [choice for choice in _alternatives(hint) if choice is not types.NoneType]
    if bool in choices:
        return bool(value)
    if float in choices:
        return _encode_number(float(value), not_finite, at, celsius)
    if int in choices:
        return int(value)
    if is_dataclass(value) and not isinstance(value, type):
        return {
            key: encode(
                getattr(value, name), item, not_finite, f"{at}/{_escaped(key)}",
                celsius or is_celsius(type(value), name),
            )
            for name, key, item in _stored(type(value))
        }  # fmt: skip
    if isinstance(value, dict):
        return {key: encode(value[key], get_args(choices[0])[1], not_finite,
                            f"{at}/{_escaped(key)}", celsius) for key in sorted(value)}  # fmt: skip
    return _encode_tuple(value, choices[0], not_finite, at, celsius)


def _encode_number(value: float, not_finite: NotFinite, at: str, celsius: bool) -> float | None:
    if not math.isfinite(value):
        not_finite[at] = str(value)
        return None
    return edge_value(value) if celsius else value


def _encode_tuple(
    value: tuple[Any, ...], hint: Any, not_finite: NotFinite, at: str, celsius: bool
) -> Any:
    args = get_args(hint)
    if _is_mapping(hint):
        item = get_args(args[0])[1]
        if len({name for name, _ in value}) != len(value):
            raise DataError(f"{at}: a name stands twice in {value!r}; expected each once")
        return {
            name: encode(each, item, not_finite, f"{at}/{_escaped(name)}", celsius)
            for name, each in value
        }
    return [
        encode(each, args[0] if args[-1] is Ellipsis else args[i], not_finite, f"{at}/{i}", celsius)
        for i, each in enumerate(value)
    ]


def _escaped(key: str) -> str:
    return key.replace("~", "~0").replace("/", "~1")


# --- from JSON -------------------------------------------------------------------------------


def restore_not_finite(data: Any, not_finite: NotFinite) -> None:
    """Put the figures that are not finite back in the places `not_finite` names.

    Raises
    ------
    DataError
        If a pointer leads nowhere or the word is none of ``nan``, ``inf``, ``-inf``.
    """
    for pointer, word in not_finite.items():
        steps = [step.replace("~1", "/").replace("~0", "~") for step in pointer.split("/")[1:]]
        try:
            if word not in ("nan", "inf", "-inf") or not steps:
                raise ValueError(word)
            place = data
            for step in steps[:-1]:
                place = place[int(step) if isinstance(place, list) else step]
            last: Any = int(steps[-1]) if isinstance(place, list) else steps[-1]
            if place[last] is not None:
                raise ValueError(word)
            place[last] = float(word)
        except (KeyError, IndexError, ValueError, TypeError) as error:
            raise DataError(
                f"not_finite: found {pointer!r}: {word!r}; expected the place of a null and "
                "nan, inf or -inf"
            ) from error


def decode(data: Any, hint: Any, supply: Supply, at: str = "", celsius: bool = False) -> Any:
    """Return the value of the contract that plain JSON data stand for.

    Parameters
    ----------
    data : object
        Parsed JSON, figures that are not finite restored.
    hint : type
        Type hint of what is wanted.
    supply : callable
        Called with a class and its object; returns the fields that are not stored in it.
    at : str
        Place of the data, for messages.
    celsius : bool
        Whether figures below are temperatures in °C.

    Raises
    ------
    DataError
        If the data are not what the hint asks for; the message names the place.
    """
    choices = _alternatives(hint)
    if data is None and types.NoneType in choices:
        return None
    for choice in choices:
        if choice in (str, bool, int) and type(data) is choice and float not in choices:
            return data
        if choice is str and isinstance(data, str):
            return data
        if choice is float and type(data) in _NUMBER:
            return inside_value(float(data)) if celsius else float(data)
        if get_origin(choice) is Literal and data in get_args(choice):
            return data
        if is_dataclass(choice) and isinstance(data, dict):
            return _decode_object(choice, data, supply, at, celsius)  # type: ignore[arg-type]
        if get_origin(choice) is dict and isinstance(data, dict):
            item = get_args(choice)[1]
            return {key: decode(v, item, supply, f"{at}.{key}", celsius) for key, v in data.items()}
        if get_origin(choice) is tuple and isinstance(data, dict if _is_mapping(choice) else list):
            return _decode_tuple(data, choice, supply, at, celsius)
    shown = repr(data)
    raise DataError(f"{at.lstrip('.')}: found {shown[:60]}; expected {_hint_words(choices)}")


def _decode_object(cls: type, data: dict[str, Any], supply: Supply, at: str, celsius: bool) -> Any:
    values = supply(cls, data)
    for field, (name, key, hint) in zip(_stored_fields(cls), _stored(cls), strict=True):
        if key in data:
            warm = celsius or is_celsius(cls, name)
            values[name] = decode(data[key], hint, supply, f"{at}.{key}", warm)
        elif field.default is MISSING and field.default_factory is MISSING:
            raise DataError(f"{at.lstrip('.') or 'top level'}: key {key!r} is missing")
    return cls(**values)


def _stored_fields(cls: Any) -> list[Any]:
    left_out = NOT_STORED.get(cls, frozenset())
    return [field for field in fields(cls) if field.name not in left_out]


def _decode_tuple(data: Any, hint: Any, supply: Supply, at: str, celsius: bool) -> tuple[Any, ...]:
    args = get_args(hint)
    if _is_mapping(hint):
        item = get_args(args[0])[1]
        return tuple(
            (name, decode(each, item, supply, f"{at}.{name}", celsius))
            for name, each in data.items()
        )
    if args[-1] is not Ellipsis and len(args) != len(data):
        raise DataError(f"{at.lstrip('.')}: found {len(data)} values; expected {len(args)}")
    return tuple(
        decode(each, args[0] if args[-1] is Ellipsis else args[i], supply, f"{at}[{i}]", celsius)
        for i, each in enumerate(data)
    )


def _hint_words(choices: tuple[Any, ...]) -> str:
    words = {str: "text", float: "a number", int: "a whole number", bool: "true or false",
             types.NoneType: "null"}  # fmt: skip
    return " or ".join(
        words.get(choice)
        or (" or ".join(map(repr, get_args(choice))) if get_origin(choice) is Literal else "")
        or ("a list" if get_origin(choice) is tuple and not _is_mapping(choice) else "an object")
        for choice in choices
    )


# --- schema ----------------------------------------------------------------------------------


def schema_of(hint: Any, definitions: dict[str, Any]) -> dict[str, Any]:
    """Return the JSON Schema of a type hint; classes go to `definitions`, once each."""
    choices = _alternatives(hint)
    if len(choices) > 1:
        return {"anyOf": [schema_of(choice, definitions) for choice in choices]}
    if hint is float:
        # null: not finite, see not_finite
        return {"type": ["number", "null"]}
    simple = {str: "string", int: "integer", bool: "boolean", types.NoneType: "null"}
    if hint in simple:
        return {"type": simple[hint]}
    if get_origin(hint) is Literal:
        return {"enum": list(get_args(hint))}
    if is_dataclass(hint):
        return _class_schema(hint, definitions)  # type: ignore[arg-type]
    args = get_args(hint)
    if get_origin(hint) is dict or _is_mapping(hint):
        item = args[1] if get_origin(hint) is dict else get_args(args[0])[1]
        return {"type": "object", "additionalProperties": schema_of(item, definitions)}
    if args[-1] is Ellipsis:
        return {"type": "array", "items": schema_of(args[0], definitions)}
    return {
        "type": "array",
        "prefixItems": [schema_of(each, definitions) for each in args],
        "minItems": len(args),
        "maxItems": len(args),
    }


def _class_schema(cls: type, definitions: dict[str, Any]) -> dict[str, Any]:
    if cls.__name__ not in definitions:
        definitions[cls.__name__] = {}
        properties = {}
        for name, key, hint in _stored(cls):
            properties[key] = schema_of(hint, definitions)
            if entry := FIELDS.get(cls, {}).get(name):
                unit = f" [{entry.unit}]" if entry.unit else ""
                properties[key] = {"description": entry.meaning + unit, **properties[key]}
        definitions[cls.__name__] = {
            "type": "object",
            "properties": properties,
            "required": list(properties),
        }
    return {"$ref": f"#/$defs/{cls.__name__}"}
