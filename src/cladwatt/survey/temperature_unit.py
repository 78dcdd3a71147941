"""Temperature units: to kelvin, and finding the unit a file's header states."""

import re
from collections.abc import Iterable, Sequence
from typing import TypeVar

from cladwatt.survey.decoded import TemperatureUnit
from cladwatt.types import FloatArray

__all__ = ["UNIT_SIGN", "from_kelvin", "to_kelvin", "unit_in_header"]

UNIT_SIGN: dict[TemperatureUnit, str] = {"C": "°C", "K": "K", "F": "°F"}

_Number = TypeVar("_Number", float, FloatArray)

_DEGREE = r"(?:[°º˚]\s?|\bdeg(?:rees?)?[ ._]?)"
_WORDS: tuple[tuple[TemperatureUnit, re.Pattern[str]], ...] = (
    ("C", re.compile(rf"{_DEGREE}C(?![^\W\d_])|℃|\bcelsius\b|[\[(]\s*C\s*[\])]", re.IGNORECASE)),
    ("F", re.compile(rf"{_DEGREE}F(?![^\W\d_])|℉|\bfahrenheit\b|[\[(]\s*F\s*[\])]", re.IGNORECASE)),
    ("K", re.compile(r"\b(?i:kelvin)\b|[\[(]\s*K\s*[\])]|(?i:\bdeg(?:rees?)?[ ._]?K\b)|\bin K\b")),
)
_STATEMENT = re.compile(
    rf"\b(?:temperature[ _]?)?(?:unit|einheit|unité|unidad|unità)s?\b"
    r"[\"']?\s*[:=;,\t ]\s*[\"'\[(]?\s*"
    rf"(?:{_DEGREE})?(?P<sign>C|K|F)(?:elsius|elvin|ahrenheit)?(?![^\W_])",
    re.IGNORECASE,
)
_NUMBER_BEFORE = re.compile(r"\d\s*[\[(]?\s*$")
_NUMBER_CELL = re.compile(r"[+-]?\d+(?:[.,]\d+)?")


def to_kelvin(value: _Number, unit: TemperatureUnit) -> _Number:
    """Return a temperature, or an array of them, in kelvin."""
    if unit == "C":
        return value + 273.15
    if unit == "F":
        return (value - 32.0) / 1.8 + 273.15
    return value


def from_kelvin(value: _Number, unit: TemperatureUnit) -> _Number:
    """Return a temperature given in kelvin in `unit`."""
    if unit == "C":
        return value - 273.15
    if unit == "F":
        return (value - 273.15) * 1.8 + 32.0
    return value


def unit_in_header(lines: Sequence[str]) -> TemperatureUnit | None:
    """Return the unit of the matrix as its header states it.

    A line that names the word *unit* decides. Otherwise a unit counts where it stands without a
    number of its own: ``Temperature [°C]`` does, ``air 20 °C`` and ``Air [°C];20`` tell of a
    setting. None where nothing is said, or where two lines disagree.
    """
    stated = _agreed(match["sign"].upper() for line in lines for match in _STATEMENT.finditer(line))
    if stated is not None:
        return stated
    return _agreed(
        unit
        for line in lines
        for unit, pattern in _WORDS
        for match in pattern.finditer(line)
        if not _is_setting(line, match)
    )


def _is_setting(line: str, match: re.Match[str]) -> bool:
    """Whether the unit belongs to a number on the same line rather than to the matrix."""
    if _NUMBER_BEFORE.search(line[: match.start()]):
        return True
    # A row of column numbers behind the unit is no value; one or two numbers are.
    return 1 <= len(_NUMBER_CELL.findall(line[match.end() :])) <= 2


def _agreed(found: Iterable[str]) -> TemperatureUnit | None:
    units = set(found)
    for unit in UNIT_SIGN:
        if units == {unit}:
            return unit
    return None
