"""Frames: recorded temperatures in kelvin with what must not be used masked."""

import hashlib
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from cladwatt.errors import Fault, FrameError
from cladwatt.quantities import Remark
from cladwatt.survey.decoded import Decoded, Refusal, TemperatureUnit
from cladwatt.survey.frame_checks import (
    background_question,
    declared_air,
    looks_like,
    plateau_question,
    refuse_impossible,
)
from cladwatt.survey.frame_file import decode_frame_bytes, read_frame_bytes
from cladwatt.survey.model import FrameEntry, FrameFormat
from cladwatt.survey.plausibility import (
    spread_of,
)
from cladwatt.survey.temperature_unit import UNIT_SIGN, to_kelvin
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Frame", "frame_questions", "read_frame"]

# Ends of the recording range survive a float32 and a change of unit only so far. [K]
_RANGE_TOLERANCE = 0.005


@dataclass(frozen=True)
class Frame:
    """One recorded frame, its arrays read-only.

    Parameters
    ----------
    id : str
    temperature : (rows, cols) array
        Recorded temperature, with the settings of the camera in it; NaN where `dead` or
        `clipped`. [K]
    dead : (rows, cols) array of bool
        No number, or the declared bad value.
    clipped : (rows, cols) array of bool
        At or beyond an end of the recording range.
    sha256 : str
        Digest of the file.
    remarks : tuple of Remark
        What a reader should know of the file.
    description : dict
        Format, unit, shape and the like, for people to read.
    """

    id: str
    temperature: FloatArray
    dead: BoolArray
    clipped: BoolArray
    sha256: str
    remarks: tuple[Remark, ...] = ()
    description: dict[str, str] = field(default_factory=dict)

    @property
    def shape(self) -> tuple[int, int]:
        """Rows and columns."""
        rows, columns = self.temperature.shape
        return rows, columns


def read_frame(entry: FrameEntry, *, root: Path | None = None) -> Frame:
    """Read one frame of a survey.

    Parameters
    ----------
    entry : FrameEntry
        Where the file is and how its numbers are to be taken.
    root : Path, optional
        Survey folder; paths in messages are relative to it.

    Returns
    -------
    Frame

    Raises
    ------
    FrameError
        If the file cannot be read, or its values cannot be what is declared.
    """
    try:
        data = read_frame_bytes(entry.path)
        decoded = decode_frame_bytes(data, suffix=entry.path.suffix, page=entry.format.page)
        return _make_frame(entry, decoded, hashlib.sha256(data).hexdigest())
    except Refusal as refusal:
        raise FrameError(
            Fault(
                _path_in_messages(entry.path, root),
                f"frame '{entry.id}'",
                refusal.found,
                refusal.expected,
                line=refusal.line,
                frame_id=entry.id,
            )
        ) from refusal


def frame_questions(
    frame: Frame, entry: FrameEntry, *, root: Path | None = None
) -> tuple[Fault, ...]:
    """Return what is odd about a readable frame; nothing of it stops the frame.

    Parameters
    ----------
    frame : Frame
    entry : FrameEntry
        With the declared conditions.
    root : Path, optional
        Survey folder; paths in messages are relative to it.

    Returns
    -------
    tuple of Fault
        Of severity ``question``.
    """
    unit = next(key for key, sign in UNIT_SIGN.items() if sign == frame.description["unit"])
    found = (
        background_question(frame.temperature, unit, entry),
        plateau_question(frame.temperature, entry),
    )
    return tuple(
        Fault(
            _path_in_messages(entry.path, root),
            f"frame '{entry.id}'",
            *question,
            severity="question",
            frame_id=entry.id,
        )
        for question in found
        if question is not None
    )


def _path_in_messages(path: Path, root: Path | None) -> str:
    if root is not None:
        try:
            return path.resolve().relative_to(root.resolve()).as_posix()
        except (OSError, ValueError):
            pass
    return path.name if root is None else path.as_posix()


def _make_frame(entry: FrameEntry, decoded: Decoded, digest: str) -> Frame:
    form = entry.format
    dead = _dead_pixels(decoded, form.bad_value)
    numbers = _scaled(decoded, form, dead)
    unit = _settle_unit(decoded, form, numbers, dead, entry)
    temperature = to_kelvin(numbers, unit)
    clipped = _clipped_pixels(temperature, decoded, form) & ~dead
    usable = ~(dead | clipped)
    spread = spread_of(numbers, usable)
    if spread is None:
        raise Refusal(
            f"not one usable pixel: {int(dead.sum())} dead, {int(clipped.sum())} clipped",
            "expected recorded temperatures; check bad_value and the recording range",
        )
    refuse_impossible(numbers, temperature, usable, spread, unit, entry)
    temperature = np.where(usable, temperature, np.nan)
    planes: tuple[FloatArray, BoolArray, BoolArray] = (temperature, dead, clipped)
    if form.rows_from == "bottom":
        planes = (temperature[::-1].copy(), dead[::-1].copy(), clipped[::-1].copy())
    for plane in planes:
        plane.flags.writeable = False
    return Frame(
        entry.id,
        *planes,
        sha256=digest,
        remarks=decoded.remarks + _remarks(decoded, form, unit, dead, clipped),
        description=_description(decoded, form, unit, dead, clipped),
    )


def _dead_pixels(decoded: Decoded, bad_value: float | None) -> BoolArray:
    dead: BoolArray = ~np.isfinite(decoded.values)
    kind = np.float64 if decoded.dtype == "text" else np.dtype(decoded.dtype).type
    for bad in (bad_value, decoded.no_data):
        if bad is None or not np.isfinite(bad):
            continue
        # -9999.9 in a float32 file is the nearest float32.
        with np.errstate(over="ignore"):
            stored = float(kind(bad)) if np.issubdtype(kind, np.floating) else bad
        dead |= decoded.values == stored
    return dead


def _scaled(decoded: Decoded, form: FrameFormat, dead: BoolArray) -> FloatArray:
    scale, offset = form.scale, form.offset
    if decoded.is_integer and (scale is None or offset is None):
        inside = decoded.values[~dead]
        extent = f"{inside.min():g} to {inside.max():g}" if inside.size else "all dead"
        missing = " and ".join(
            name for name, given in (("scale", scale), ("offset", offset)) if given is None
        )
        raise Refusal(
            f"{decoded.dtype} counts ({extent}) without a declared {missing}",
            f"expected scale and offset, temperature = counts x scale + offset"
            f"{looks_like(spread_of(decoded.values, ~dead), None)}",
        )
    if scale is not None and not (np.isfinite(scale) and scale > 0):
        raise Refusal(f"scale is {scale}", "expected a number above 0")
    if offset is not None and not np.isfinite(offset):
        raise Refusal(f"offset is {offset}", "expected a finite number")
    if scale is None and offset is None:
        return decoded.values
    return decoded.values * (1.0 if scale is None else scale) + (offset or 0.0)


def _settle_unit(
    decoded: Decoded, form: FrameFormat, numbers: FloatArray, dead: BoolArray, entry: FrameEntry
) -> TemperatureUnit:
    if form.unit is None and decoded.unit is None:
        spread = spread_of(numbers, ~dead)
        extent = f"{spread.minimum:g} to {spread.maximum:g}" if spread else "none"
        raise Refusal(
            f"no unit is declared and none stands in the file (values {extent})",
            f'expected unit = "C", "K" or "F"{looks_like(spread, declared_air(entry))}',
        )
    if form.unit is not None and decoded.unit is not None and form.unit != decoded.unit:
        raise Refusal(
            f"the unit is declared as {UNIT_SIGN[form.unit]}, "
            f"the file says {UNIT_SIGN[decoded.unit]}",
            f'expected the two to agree; set unit = "{decoded.unit}" or correct the file',
        )
    unit = form.unit or decoded.unit
    assert unit is not None
    return unit


def _clipped_pixels(temperature: FloatArray, decoded: Decoded, form: FrameFormat) -> BoolArray:
    clipped = np.zeros(temperature.shape, dtype=np.bool_)
    if decoded.saturated is not None:
        clipped |= decoded.saturated
    with np.errstate(invalid="ignore"):
        if form.range_lower is not None:
            clipped |= temperature <= form.range_lower + _RANGE_TOLERANCE
        if form.range_upper is not None:
            clipped |= temperature >= form.range_upper - _RANGE_TOLERANCE
    return clipped


def _remarks(
    decoded: Decoded, form: FrameFormat, unit: TemperatureUnit, dead: BoolArray, clipped: BoolArray
) -> tuple[Remark, ...]:
    remarks = []
    if form.unit is None:
        remarks.append(Remark("frame.unit_from_file", (("unit", unit),)))
    if dead.any():
        remarks.append(Remark("frame.dead_pixels", (("pixels", int(dead.sum())),)))
    if clipped.any():
        remarks.append(Remark("frame.clipped_pixels", (("pixels", int(clipped.sum())),)))
    if decoded.no_data is not None:
        remarks.append(Remark("frame.no_data_value_in_file", (("value", decoded.no_data),)))
    return tuple(remarks)


def _description(
    decoded: Decoded, form: FrameFormat, unit: TemperatureUnit, dead: BoolArray, clipped: BoolArray
) -> dict[str, str]:
    rows, columns = decoded.values.shape
    description = dict(decoded.details)
    description |= {
        "shape": f"{rows} rows x {columns} columns",
        "unit": UNIT_SIGN[unit],
        "unit_source": "declared" if form.unit else "file",
        "rows_from": form.rows_from,
        "dead_pixels": str(int(dead.sum())),
        "clipped_pixels": str(int(clipped.sum())),
    }
    if form.scale is not None or form.offset is not None:
        description["scale"] = f"{1.0 if form.scale is None else form.scale:g}"
        description["offset"] = f"{form.offset or 0.0:g}"
    return description
