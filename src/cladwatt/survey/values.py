"""One raw value (from TOML, JSON or a CSV cell) against its key: what it is in SI, or why not."""

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from datetime import date, datetime

from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import shown
from cladwatt.survey.keys import UNKNOWN_WORD, Key
from cladwatt.units import Unit

__all__ = [
    "UNKNOWN",
    "Problem",
    "Unknown",
    "Written",
    "check_range",
    "parse_plain",
    "parse_value",
    "range_text",
    "read_number",
    "to_quantity",
]

_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+")
_LONGEST_TEXT = 4000


class Unknown:
    """Declared as unknown; a single value, :data:`UNKNOWN`."""

    def __repr__(self) -> str:
        return "UNKNOWN"


UNKNOWN = Unknown()


class Problem(Exception):
    """A value is not acceptable: what was found and what is accepted."""

    def __init__(self, found: str, expected: str, line: int | None = None) -> None:
        super().__init__(f"{found}; {expected}")
        self.found = found
        self.expected = expected
        self.line = line


@dataclass(frozen=True)
class Written:
    """A quantity as written: value and uncertainty may come from different tables."""

    value: float | Unknown | None = None
    u: float | None = None

    def over(self, other: "Written | None") -> "Written":
        """Return this with what it leaves open taken from `other`."""
        if other is None:
            return self
        return Written(
            self.value if self.value is not None else other.value,
            self.u if self.u is not None else other.u,
        )


def read_number(name: str, raw: object) -> float:
    """Return a finite number.

    Raises
    ------
    Problem
        If it is text, true/false, NaN or infinite.
    """
    if isinstance(raw, bool):
        raise Problem(f"{name} is {shown(raw)}", "expected a number")
    if isinstance(raw, str):
        hint = "expected a number"
        if _DECIMAL_COMMA.fullmatch(raw.strip()):
            hint += f" with a decimal point, {raw.strip().replace(',', '.')}, without quotes"
        elif _is_number(raw):
            hint += ", without quotes"
        raise Problem(f"{name} is the text {shown(raw)}", hint)
    if not isinstance(raw, (int, float)):
        raise Problem(f"{name} is {shown(raw)}", "expected a number")
    try:
        value = float(raw)
    except OverflowError:
        value = math.inf
    if not math.isfinite(value):
        raise Problem(f"{name} is {shown(raw)}", "expected a finite number")
    return value


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def range_text(key: Key, unit: Unit) -> str:
    """Return the accepted range in the unit the user wrote, e.g. ``0 < emissivity <= 1``."""
    sign = "<" if key.lower_open else "<="
    low = f"{unit.from_si(key.lower):.6g} {sign} " if math.isfinite(key.lower) else ""
    high = f" <= {unit.from_si(key.upper):.6g}" if math.isfinite(key.upper) else ""
    return f"{low}{key.name}{high}" + (f" [{unit.text}]" if unit.text else "")


def check_range(key: Key, unit: Unit, name: str, raw: object, value: float) -> None:
    """Refuse an SI value outside the key's range.

    Raises
    ------
    Problem
    """
    below = value <= key.lower if key.lower_open else value < key.lower * (1 - 1e-12)
    if below or value > key.upper * (1 + 1e-12):
        raise Problem(f"{name} is {shown(raw)}", f"expected {range_text(key, unit)}")


def parse_value(key: Key, unit: Unit, name: str, raw: object) -> Written:
    """Return a quantity's value (and its u where a table gives both), in SI.

    Parameters
    ----------
    key : Key
        Of kind ``quantity``.
    unit : Unit
        Unit the key's spelling says.
    name : str
        The key as written.
    raw : object
        Number, ``"unknown"`` or a table of `value` and `u`.

    Raises
    ------
    Problem
    """
    if isinstance(raw, dict):
        return _parse_pair(key, unit, name, raw)
    if isinstance(raw, str) and raw.strip().lower() == UNKNOWN_WORD:
        return Written(UNKNOWN)
    value = unit.to_si(read_number(name, raw))
    check_range(key, unit, name, raw, value)
    return Written(value)


def _parse_pair(key: Key, unit: Unit, name: str, raw: dict[str, object]) -> Written:
    strange = [part for part in raw if part not in ("value", "u")]
    if strange or "value" not in raw:
        found = f"{name} has {strange[0]!r}" if strange else f"{name} has no value"
        raise Problem(found, "expected { value = ..., u = ... }")
    written = parse_value(key, unit, f"{name}.value", raw["value"])
    if "u" not in raw:
        return written
    return replace(written, u=parse_u(unit, f"{name}.u", raw["u"]))


def parse_u(unit: Unit, name: str, raw: object) -> float:
    """Return a standard uncertainty in SI; that of a temperature is a difference.

    Raises
    ------
    Problem
        If it is no number or negative.
    """
    u = unit.difference_to_si(read_number(name, raw))
    if u < 0:
        raise Problem(f"{name} is {shown(raw)}", "expected a standard uncertainty >= 0")
    return u


def to_quantity(
    key: Key, written: Written, defaults: Mapping[str, Quantity] | None = None
) -> Quantity | None:
    """Return the quantity with bounds, and the default uncertainty where none was declared.

    None where it is unknown. `defaults` is the survey's table of defaults.
    """
    if written.value is None or isinstance(written.value, Unknown):
        return None
    value = written.value
    lower, upper = key.cut if key.cut is not None else (key.lower, key.upper)
    u, source = written.u, "declared"
    if u is None:
        u = key.default_u(value, defaults)
        source = f"declared; u by default: {key.usual_u(defaults)[2]}" if u else "declared"
    return Quantity(value, u, lower=min(lower, value), upper=max(upper, value), source=source)


def parse_plain(key: Key, unit: Unit, name: str, raw: object) -> object:
    """Return the value of a key that is no quantity.

    Raises
    ------
    Problem
    """
    if key.kind == "number":
        value = unit.to_si(read_number(name, raw))
        check_range(key, unit, name, raw, value)
        return value
    if key.kind == "integer":
        return _parse_integer(key, unit, name, raw)
    if key.kind == "flag":
        if not isinstance(raw, bool):
            raise Problem(f"{name} is {shown(raw)}", "expected true or false")
        return raw
    if key.kind == "date":
        if isinstance(raw, date) and not isinstance(raw, datetime):
            return raw
        raise Problem(f"{name} is {shown(raw)}", "expected a date without quotes, 2026-03-18")
    if key.kind == "time":
        if isinstance(raw, datetime):
            return raw
        raise Problem(
            f"{name} is {shown(raw)}",
            "expected date and time with zone, without quotes: 2026-03-18T09:40:00+01:00",
        )
    if key.kind == "size":
        return _parse_size(name, raw)
    if key.kind == "numbers":
        return _parse_numbers(key, unit, name, raw)
    return _parse_words(key, name, raw)


def _parse_integer(key: Key, unit: Unit, name: str, raw: object) -> int:
    value = read_number(name, raw)
    if value != int(value):
        raise Problem(f"{name} is {shown(raw)}", "expected a whole number")
    check_range(key, unit, name, raw, value)
    return int(value)


def _parse_size(name: str, raw: object) -> str:
    if isinstance(raw, str) and raw.strip():
        return raw.strip()
    if isinstance(raw, (int, float)) and not isinstance(raw, bool) and math.isfinite(raw):
        return f"{raw:g}"
    raise Problem(f"{name} is {shown(raw)}", 'expected a size in inches such as 4 or "2 1/2"')


def _parse_numbers(key: Key, unit: Unit, name: str, raw: object) -> tuple[float, ...]:
    if not isinstance(raw, list) or not raw:
        raise Problem(f"{name} is {shown(raw)}", "expected a list of numbers")
    numbers = []
    for position, item in enumerate(raw, start=1):
        value = read_number(f"number {position} of {name}", item)
        check_range(key, unit, f"number {position} of {name}", item, value)
        numbers.append(value)
    return tuple(numbers)


def _parse_words(key: Key, name: str, raw: object) -> str:
    if not isinstance(raw, str):
        raise Problem(f"{name} is {shown(raw)}", "expected text in quotes")
    text = raw.strip()
    if len(text) > _LONGEST_TEXT:
        raise Problem(f"{name} has {len(text)} letters", f"expected at most {_LONGEST_TEXT}")
    if key.kind == "choice" and text not in key.choices:
        words = ", ".join(f'"{word}"' for word in key.choices)
        raise Problem(f"{name} is {shown(text)}", f"expected one of {words}")
    if key.kind in ("name", "file") and not text:
        raise Problem(f"{name} is empty", "expected text")
    if any(ord(letter) < 32 for letter in text.replace("\n", "").replace("\t", "")):
        raise Problem(f"{name} holds a control character", "expected plain text")
    if key.kind == "name" and ("\n" in text or "\t" in text):
        raise Problem(f"{name} holds a line break or tab", "expected one line of text")
    return text
