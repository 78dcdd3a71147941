"""What an undeclared frame file looks like; a guess for a person to confirm, never used unseen."""

from dataclasses import dataclass
from pathlib import Path

from cladwatt.errors import Fault, FrameError
from cladwatt.survey.decoded import Decoded, Refusal, TemperatureUnit
from cladwatt.survey.frame_file import decode_frame_bytes, read_frame_bytes
from cladwatt.survey.plausibility import Reading, likely_readings, shown, spread_of
from cladwatt.survey.temperature_unit import UNIT_SIGN

__all__ = ["FrameGuess", "sniff_frame"]


@dataclass(frozen=True)
class FrameGuess:
    """What one file looks like.

    Parameters
    ----------
    shape : (int, int), optional
        Rows and columns; None where the file cannot be decoded.
    minimum, maximum, median : float, optional
        As the numbers stand in the file.
    likely_unit : {"C", "K", "F"}, optional
        Stated in the file, or the unit that puts the background at a usual air temperature.
    likely_scale_offset : (float, float), optional
        Where the numbers look like tenths or hundredths.
    format : str
        Such as ``TIFF float32, deflate`` or ``CSV, semicolon, decimal comma``.
    decimal, delimiter : str, optional
        Of a CSV, the signs themselves.
    unit_in_file : {"C", "K", "F"}, optional
        Where the file itself states it.
    pages : int
        Of a TIFF.
    note : str
        What is doubtful, or why the file cannot be used.
    """

    shape: tuple[int, int] | None = None
    minimum: float | None = None
    maximum: float | None = None
    median: float | None = None
    likely_unit: TemperatureUnit | None = None
    likely_scale_offset: tuple[float, float] | None = None
    format: str = ""
    decimal: str | None = None
    delimiter: str | None = None
    unit_in_file: TemperatureUnit | None = None
    pages: int = 1
    note: str = ""


def sniff_frame(path: Path) -> FrameGuess:
    """Return what the file at `path` looks like.

    Parameters
    ----------
    path : Path

    Returns
    -------
    FrameGuess
        With `shape` None and the reason in `note` where the file is no frame.

    Raises
    ------
    FrameError
        If there is no file to read.
    """
    try:
        data = read_frame_bytes(path)
    except Refusal as refusal:
        raise FrameError(Fault(path.name, "", refusal.found, refusal.expected)) from refusal
    try:
        decoded = decode_frame_bytes(data, suffix=path.suffix)
    except Refusal as refusal:
        place = "" if refusal.line is None else f"line {refusal.line}: "
        return FrameGuess(note=f"{place}{refusal}")
    return _guess(decoded)


def _guess(decoded: Decoded) -> FrameGuess:
    rows, columns = decoded.values.shape
    details = decoded.details
    text = decoded.dtype == "text"
    spread = spread_of(decoded.values)
    readings = likely_readings(spread, None) if spread is not None else ()
    if decoded.unit is not None:
        readings = tuple(reading for reading in readings if reading.unit == decoded.unit)
    best = readings[0] if readings else None
    scaled = best is not None and (best.scale != 1.0 or decoded.is_integer)
    return FrameGuess(
        shape=(rows, columns),
        minimum=None if spread is None else spread.minimum,
        maximum=None if spread is None else spread.maximum,
        median=None if spread is None else spread.median,
        likely_unit=decoded.unit or (best.unit if best else None),
        likely_scale_offset=(best.scale, 0.0) if best is not None and scaled else None,
        format=_format_text(decoded),
        decimal=("," if details["decimal"] == "comma" else ".") if text else None,
        delimiter={"tab": "\t", "semicolon": ";", "comma": ","}[details["separator"]]
        if text
        else None,
        unit_in_file=decoded.unit,
        pages=int(details.get("pages", "1")),
        note="; ".join(_doubts(decoded, readings)),
    )


def _format_text(decoded: Decoded) -> str:
    details = decoded.details
    if decoded.dtype == "text":
        return (
            f"CSV, {details['separator']}, decimal {details['decimal']}, {details['encoding']}, "
            f"{details['header_lines']} header line(s)"
        )
    pages = "" if details["pages"] == "1" else f", {details['pages']} pages"
    return f"{details['format']} {decoded.dtype}, compression {details['compression']}{pages}"


def _doubts(decoded: Decoded, readings: tuple[Reading, ...]) -> list[str]:
    doubts = []
    if not readings:
        doubts.append("the numbers look like no temperature of a usual place: declare unit, "
                      "scale and offset")  # fmt: skip
    elif decoded.unit is None:
        doubts.append("the unit is a guess")
    if len(readings) > 1:
        names = ", or ".join(
            f"{reading} ({shown(reading.spread.minimum, 'C')} to "
            f"{shown(reading.spread.maximum, 'C')})"
            for reading in readings
        )
        doubts.append(f"the numbers could be {names}")
    if decoded.is_integer:
        doubts.append("counts need a scale and an offset, which only the maker's export tells")
    if decoded.unit is not None and not readings:
        doubts.append(f"the file says {UNIT_SIGN[decoded.unit]}")
    if int(decoded.details.get("pages", "1")) > 1:
        doubts.append(f"{decoded.details['pages']} pages: choose one with page")
    return doubts
