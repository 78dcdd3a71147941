"""``assessment.json``: the whole result but its arrays, under a versioned schema."""

import json
import re
from collections.abc import Callable, Mapping
from importlib.resources import files
from pathlib import Path
from typing import Any

from cladwatt.errors import ResultsError
from cladwatt.results.assessment import (
    Assessment,
    ComponentResult,
    FrameResult,
    RegionResult,
)
from cladwatt.results.codec import (
    DataError,
    NotFinite,
    decode,
    encode,
    restore_not_finite,
    schema_of,
)
from cladwatt.results.draws_file import FrameArrays, read_frame_arrays, region_arrays

__all__ = [
    "SCHEMA_NAME",
    "SCHEMA_VERSION",
    "assessment_data",
    "is_assessment_file",
    "make_schema",
    "read_assessment_file",
    "schema_text",
    "write_assessment_file",
]

SCHEMA_NAME = "cladwatt assessment"
SCHEMA_VERSION = 1
_HEAD = f'"schema": "{SCHEMA_NAME}"'
_ARRAYS_KEY = "arrays_file"
_ARRAYS_FILE = re.compile(r"draws/[^/\\]+\.npz")


def make_schema() -> dict[str, Any]:
    """Return the JSON Schema of ``assessment.json``, made from the classes of the results."""
    definitions: dict[str, Any] = {}
    schema_of(Assessment, definitions)
    frame = definitions["FrameResult"]
    frame["properties"][_ARRAYS_KEY] = {
        "type": "string",
        "description": "stations, strips and draws of the frame, relative to this file",
        "pattern": f"^{_ARRAYS_FILE.pattern}$",
    }
    frame["required"].append(_ARRAYS_KEY)
    top = definitions.pop("Assessment")
    head = {
        "schema": {"const": SCHEMA_NAME},
        "schema_version": {"const": SCHEMA_VERSION},
    }
    tail = {
        "not_finite": {
            "type": "object",
            "description": "JSON pointers of the nulls that stand for NaN or an infinite figure; "
            "every other null is unknown",
            "additionalProperties": {"enum": ["nan", "inf", "-inf"]},
        }
    }
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "$id": f"urn:cladwatt:assessment:{SCHEMA_VERSION}",
        "title": "What one run of cladwatt found in one survey",
        "description": "Units stand at the end of the names; temperatures are in degrees Celsius. "
        "An interval is the median with the 2.5 and 97.5 percentiles.",
        "type": "object",
        "properties": head | top["properties"] | tail,
        "required": [*head, *top["required"], *tail],
        "$defs": definitions,
    }


def schema_text() -> str:
    """Return the schema as it ships with the package."""
    return files("cladwatt.results").joinpath("assessment.schema.json").read_text("utf-8")


def assessment_data(assessment: Assessment, stems: Mapping[str, str]) -> dict[str, Any]:
    """Return the content of ``assessment.json`` as plain data.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    stems : mapping of str to str
        File stem by frame id.

    Returns
    -------
    dict
        Ready for :func:`json.dumps`; no figure in it is NaN or infinite.
    """
    not_finite: NotFinite = {}
    data: dict[str, Any] = encode(assessment, Assessment, not_finite)
    for frame in data["frames"]:
        frame[_ARRAYS_KEY] = f"draws/{stems[frame['frame_id']]}.npz"
    return {
        "schema": SCHEMA_NAME,
        "schema_version": SCHEMA_VERSION,
        **data,
        "not_finite": not_finite,
    }


def write_assessment_file(assessment: Assessment, path: Path, stems: Mapping[str, str]) -> None:
    """Write ``assessment.json``; its first key is the mark of a results folder."""
    data = assessment_data(assessment, stems)
    # a lone surrogate (a file name that is no text) becomes \udcxx, which is how JSON spells it
    with path.open("w", encoding="utf-8", errors="backslashreplace", newline="\n") as file:
        for piece in json.JSONEncoder(ensure_ascii=False, allow_nan=False, indent=1).iterencode(
            data
        ):
            file.write(piece)
        file.write("\n")


def is_assessment_file(path: Path) -> bool:
    """Return whether a file begins as :func:`write_assessment_file` begins it."""
    try:
        with path.open("rb") as file:
            return _HEAD in file.read(200).decode("utf-8", "replace")
    except OSError:
        return False


def _parsed(path: Path) -> dict[str, Any]:
    try:
        data = json.loads(path.read_text("utf-8"))
    except FileNotFoundError as error:
        raise ResultsError(f"{path} is missing; this is no results folder of cladwatt") from error
    except OSError as error:
        raise ResultsError(f"{path} cannot be read: {error.strerror or error}") from error
    except (ValueError, RecursionError) as error:
        raise ResultsError(f"{path} is damaged ({error}); run the assessment again") from error
    if not isinstance(data, dict) or data.get("schema") != SCHEMA_NAME:
        raise ResultsError(f"{path} is no assessment of cladwatt; expected {_HEAD} in it")
    version = data.get("schema_version")
    if version != SCHEMA_VERSION:
        raise ResultsError(
            f"{path}: schema_version is {version!r}; this cladwatt reads {SCHEMA_VERSION}. "
            "Use the cladwatt that wrote it, or run the assessment again"
        )
    return data


def _supplier(folder: Path) -> Callable[[type, dict[str, Any]], Any]:
    """Return what fetches the arrays of a region or component; each file is read once."""
    names: dict[str, str] = {}
    loaded: dict[str, FrameArrays] = {}

    def supply(cls: type, item: dict[str, Any]) -> dict[str, Any]:
        if cls is FrameResult:
            name = item.get(_ARRAYS_KEY)
            if not isinstance(name, str) or not _ARRAYS_FILE.fullmatch(name):
                raise DataError(f"frames: {_ARRAYS_KEY} is {name!r}; expected draws/<frame>.npz")
            frame_id = str(item.get("frame_id"))
            names[frame_id] = name
            loaded.clear()
            loaded[frame_id] = read_frame_arrays(folder / name)
            _check_owners(item, frame_id)
        if cls is RegionResult:
            frame_id, region_id = str(item.get("frame_id")), str(item.get("region_id"))
            arrays = loaded[frame_id].get(region_id, {})
            return region_arrays(arrays, f"{folder / names[frame_id]}, region {region_id!r}")
        if cls is ComponentResult:
            of_frame = loaded[str(item.get("frame_id"))]
            return {"draws": dict(of_frame.get(str(item.get("region_id")), {}))}
        return {}

    return supply


def _check_owners(frame: dict[str, Any], frame_id: str) -> None:
    """Refuse regions and components that name another frame than the one they stand in."""
    for key in ("regions", "components"):
        held = frame.get(key)
        for one in held if isinstance(held, list) else ():
            if not isinstance(one, dict) or one.get("frame_id") != frame_id:
                raise DataError(f"frames: a region of {frame_id!r} names another frame")


def read_assessment_file(path: Path) -> Assessment:
    """Read ``assessment.json`` and the arrays beside it.

    Parameters
    ----------
    path : Path
        The file in its results folder.

    Returns
    -------
    Assessment
        Equal to the one written.

    Raises
    ------
    ResultsError
        If a file is missing, damaged, or of another schema version.
    """
    data = _parsed(path)
    try:
        not_finite = data.get("not_finite", {})
        if not isinstance(not_finite, dict):
            raise DataError(f"not_finite: found {not_finite!r}; expected an object")
        restore_not_finite(data, not_finite)
        found: Assessment = decode(data, Assessment, _supplier(path.parent))
    except DataError as error:
        raise ResultsError(f"{path}: {error}") from error
    return found
