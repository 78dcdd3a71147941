"""Frames: recorded temperatures in kelvin with what must not be used masked."""

import hashlib
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from cladwatt.errors import Fault, FrameError
from cladwatt.quantities import Remark
from cladwatt.survey.decoded import MAXIMUM_FILE_BYTES, Decoded, Refusal, TemperatureUnit
from cladwatt.survey.model import FrameEntry, FrameFormat
from cladwatt.survey.plausibility import (
    BACKGROUND_TOLERANCE,
    COLDEST_PIXEL,
    HOTTEST_PIXEL,
    Spread,
    background_distance,
    likely_readings,
    shown,
    spread_of,
)
from cladwatt.survey.temperature_unit import UNIT_SIGN, from_kelvin, to_kelvin
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Frame", "decode_frame_bytes", "frame_questions", "read_frame", "read_frame_bytes"]

_ACCEPTED = "expected a CSV matrix or a TIFF of temperatures"
_FOREIGN = {
    b"\x89PNG": "a PNG picture",
    b"\xff\xd8\xff": "a JPEG picture",
    b"GIF8": "a GIF picture",
    b"BM": "a BMP picture",
    b"PK\x03\x04": "a workbook or ZIP archive",
    b"\xd0\xcf\x11\xe0": "an old office document",
    b"%PDF": "a PDF",
    b"\x1f\x8b": "a gzip archive",
    b"\x89HDF": "an HDF5 file",
    b"\x93NUMPY": "a numpy file",
}
# Ends of the recording range survive a float32 and a change of unit only so far. [K]
_RANGE_TOLERANCE = 0.005
# A frame in which nothing at all comes this near to the air shows no background. [K]
_NOTHING_NEAR_AIR = 35.0
_WRONG_UNIT_TOLERANCE = 8.0
_SKY_BELOW_AIR = 90.0
_PLATEAU_LEVELS = 50
_PLATEAU_PIXELS = 30


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
    found = (_background_question(frame, entry), _plateau_question(frame, entry))
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


def read_frame_bytes(path: Path) -> bytes:
    """Return the bytes of a frame file that is a file of a size fit to be read.

    Raises
    ------
    Refusal
        If it is missing, a folder, empty, too large or may not be read.
    """
    try:
        if path.is_dir():
            raise Refusal("this is a folder", f"{_ACCEPTED}; name the file inside it")
        if not path.exists():
            raise Refusal("there is no such file", f"{_ACCEPTED}; correct the path or add the file")
        if not path.is_file():
            raise Refusal("this is no ordinary file", _ACCEPTED)
        size = path.stat().st_size
        if size > MAXIMUM_FILE_BYTES:
            raise Refusal(f"the file holds {size} bytes", f"expected at most {MAXIMUM_FILE_BYTES}")
        data = path.read_bytes()
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise Refusal(f"the file cannot be read ({reason})", _ACCEPTED) from error
    if not data:
        raise Refusal("the file is empty", f"{_ACCEPTED}; export or copy it again")
    return data


def decode_frame_bytes(data: bytes, *, suffix: str = "", page: int = 0) -> Decoded:
    """Decode a frame file by what it holds, not by what it is called.

    Raises
    ------
    Refusal
        If it is neither a CSV matrix nor a fit TIFF.
    """
    from cladwatt.survey.csv_format import MAXIMUM_CSV_BYTES, decode_text, parse_csv_matrix
    from cladwatt.survey.tiff_format import is_tiff, parse_tiff

    if is_tiff(data):
        return parse_tiff(data, page=page)
    for magic, name in _FOREIGN.items():
        if data.startswith(magic):
            raise Refusal(f"the file is {name}", f"{_ACCEPTED}; export the recorded values")
    if suffix.lower() in (".tif", ".tiff"):
        raise Refusal("the file does not begin like a TIFF", f"{_ACCEPTED}; export it again")
    if len(data) > MAXIMUM_CSV_BYTES:
        raise Refusal(f"the file holds {len(data)} bytes", f"expected at most {MAXIMUM_CSV_BYTES}")
    if page != 0:
        raise Refusal(f"page {page} was chosen of a text file", "expected page = 0, or a TIFF")
    text, encoding = decode_text(data)
    return parse_csv_matrix(text, encoding=encoding)


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
    _refuse_impossible(numbers, temperature, usable, spread, unit, entry)
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
            f"{_looks_like(spread_of(decoded.values, ~dead), None)}",
        )
    if scale is not None and not (np.isfinite(scale) and scale > 0):
        raise Refusal(f"scale is {scale}", "expected a number above 0")
    if offset is not None and not np.isfinite(offset):
        raise Refusal(f"offset is {offset}", "expected a finite number")
    if scale is None and offset is None:
        return decoded.values
    return decoded.values * (1.0 if scale is None else scale) + (offset or 0.0)


def _looks_like(spread: Spread | None, air: float | None) -> str:
    readings = likely_readings(spread, air) if spread is not None else ()
    if not readings:
        return ""
    names = " or ".join(
        f"{reading} ({shown(reading.spread.minimum, 'C')} to {shown(reading.spread.maximum, 'C')})"
        for reading in readings[:2]
    )
    return f"; they look like {names}: {readings[0].declaration}"


def _settle_unit(
    decoded: Decoded, form: FrameFormat, numbers: FloatArray, dead: BoolArray, entry: FrameEntry
) -> TemperatureUnit:
    if form.unit is None and decoded.unit is None:
        spread = spread_of(numbers, ~dead)
        extent = f"{spread.minimum:g} to {spread.maximum:g}" if spread else "none"
        raise Refusal(
            f"no unit is declared and none stands in the file (values {extent})",
            f'expected unit = "C", "K" or "F"{_looks_like(spread, _air(entry))}',
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


def _air(entry: FrameEntry) -> float | None:
    air = entry.conditions.air_temperature
    return None if air is None else air.value


def _refuse_impossible(
    numbers: FloatArray,
    temperature: FloatArray,
    usable: BoolArray,
    spread: Spread,
    unit: TemperatureUnit,
    entry: FrameEntry,
) -> None:
    """Stop a frame whose values cannot be temperatures in the unit settled on."""
    air, sign = _air(entry), UNIT_SIGN[unit]
    extent = f"values {spread.minimum:g} to {spread.maximum:g}"
    outside = usable & ((temperature < COLDEST_PIXEL) | (temperature > HOTTEST_PIXEL))
    limits = f"{shown(COLDEST_PIXEL, unit)} to {shown(HOTTEST_PIXEL, unit)}"
    count = int(outside.sum())
    if count > 0.01 * usable.sum():
        raise Refusal(
            f"{extent} cannot be temperatures in {sign}",
            f"expected {limits}{_looks_like(spread, air)}",
        )
    if count:
        example = float(numbers[outside].flat[0])
        raise Refusal(
            f"{count} pixel(s) hold values such as {example:g}, no temperature in {sign}",
            f"expected {limits}; if it marks dead pixels, declare it as bad_value",
        )
    _refuse_other_unit(spread, unit, air, extent)


def _refuse_other_unit(
    spread: Spread, unit: TemperatureUnit, air: float | None, extent: str
) -> None:
    """Stop a frame wholly far above the air that another unit would put right there."""
    centre = 293.15 if air is None else air
    above = spread.kelvin(unit).low - centre
    if above <= (_NOTHING_NEAR_AIR if air is not None else 4 * _NOTHING_NEAR_AIR):
        return
    better = [
        reading
        for reading in likely_readings(spread, centre)
        if abs(reading.distance) <= _WRONG_UNIT_TOLERANCE
        and (reading.unit, reading.scale) != (unit, 1.0)
    ]
    if better:
        told = "" if air is None else f" at {shown(air, 'C')}"
        raise Refusal(
            f"{extent} cannot be {UNIT_SIGN[unit]}: nothing in the frame is within "
            f"{above:.0f} K of the air",
            f"expected a background near the air{told}; they look like {better[0]}: "
            f"{better[0].declaration}",
        )


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


def _background_question(frame: Frame, entry: FrameEntry) -> tuple[str, str] | None:
    air = _air(entry)
    spread = spread_of(frame.temperature)
    if air is None or spread is None:
        return None
    distance = background_distance(spread, air)
    if abs(distance) <= BACKGROUND_TOLERANCE:
        return None
    unit = next(key for key, sign in UNIT_SIGN.items() if sign == frame.description["unit"])
    other = [
        reading
        for reading in likely_readings(_in_unit(spread, unit), air)
        if (reading.unit, reading.scale) != (unit, 1.0)
    ]
    # Outdoors the background may be sky, which looks far colder than the air.
    sky = entry.conditions.indoors is False and -_SKY_BELOW_AIR < distance < 0
    if sky and not (other and abs(other[0].distance) <= _WRONG_UNIT_TOLERANCE):
        return None
    hint = f" The numbers also look like {other[0]}: {other[0].declaration}" if other else ""
    return (
        f"the background is near {shown(air + distance, 'C')}, "
        f"{abs(distance):.0f} K {'above' if distance > 0 else 'below'} "
        f"the declared air of {shown(air, 'C')}",
        f"is the air temperature right, and the unit?{hint}",
    )


def _in_unit(spread: Spread, unit: TemperatureUnit) -> Spread:
    zero, one = from_kelvin(0.0, unit), from_kelvin(1.0, unit)
    return spread.scaled(one - zero, zero)


def _plateau_question(frame: Frame, entry: FrameEntry) -> tuple[str, str] | None:
    """Ask about many pixels sharing the highest value where no upper end is declared."""
    if entry.format.range_upper is not None:
        return None
    inside = frame.temperature[np.isfinite(frame.temperature)]
    levels, counts = np.unique(inside, return_counts=True)
    if levels.size < _PLATEAU_LEVELS or counts[-1] < _PLATEAU_PIXELS:
        return None
    if counts[-1] < 10 * counts[-11:-1].max():
        return None
    return (
        f"{int(counts[-1])} pixels share the highest value, {shown(float(levels[-1]), 'C')}",
        "is this the end of the recording range? Then declare range_upper_C",
    )
