"""Read one table (of TOML, JSON or a CSV row) by the key list, gathering every fault."""

import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList, Place, shown
from cladwatt.survey.keys import UNKNOWN_WORD, Key, Section
from cladwatt.survey.values import (
    UNKNOWN,
    Problem,
    Unknown,
    Written,
    parse_plain,
    parse_u,
    parse_value,
    to_quantity,
)
from cladwatt.units import Unit

__all__ = ["Table", "nearest", "read_list", "read_table"]


def nearest(word: str, known: Iterable[str]) -> str:
    """Return ``; nearest: a, b`` or an empty text."""
    # without regard to case: what differs by case alone is the nearest there is
    spelled = {name.casefold(): name for name in known}
    close = difflib.get_close_matches(word.casefold(), list(spelled), n=3, cutoff=0.6)
    close = [spelled[name] for name in close]
    return f" (nearest: {', '.join(close)})" if close else ""


@dataclass(frozen=True)
class Table:
    """A table read: plain values and quantities by key name, and how each was spelled."""

    section: Section
    place: Place
    plain: Mapping[str, object]
    written: Mapping[str, Written]
    spelled: Mapping[str, str]
    defaults: Mapping[str, Quantity] | None = None
    """The survey's table of defaults, for uncertainties nobody declared; what ships where None."""

    def get(self, name: str) -> object:
        """Return a plain value or None."""
        return self.plain.get(name)

    def text(self, name: str) -> str:
        """Return a text or the empty text."""
        value = self.plain.get(name)
        return value if isinstance(value, str) else ""

    def number(self, name: str) -> float | None:
        """Return a number or None."""
        value = self.plain.get(name)
        return value if isinstance(value, (int, float)) and not isinstance(value, bool) else None

    def flag(self, name: str) -> bool | None:
        """Return a flag or None."""
        value = self.plain.get(name)
        return value if isinstance(value, bool) else None

    def has(self, name: str) -> bool:
        """Whether the key stands in the table, be it as unknown."""
        return name in self.plain or name in self.written

    def is_unknown(self, name: str) -> bool:
        """Whether it is declared unknown."""
        if self.plain.get(name) is UNKNOWN:
            return True
        written = self.written.get(name)
        return written is not None and isinstance(written.value, Unknown)

    def spelling(self, name: str) -> str:
        """Return the key as it stands in the file, or its usual spelling."""
        if name in self.spelled:
            return self.spelled[name]
        return self.key(name).usual

    def key(self, name: str) -> Key:
        """Return the key of this name."""
        return self.section.by_name[name]

    def quantity(self, name: str) -> Quantity | None:
        """Return a quantity; None where missing or unknown."""
        written = self.written.get(name)
        return None if written is None else to_quantity(self.key(name), written, self.defaults)

    def over(self, wide: "Table", *, prefix: str = "") -> "Table":
        """Return `wide` with what this table declares under the same names (after `prefix`)."""
        names = [key.name for key in wide.section.keys]
        plain, written = dict(wide.plain), dict(wide.written)
        spelled = dict(wide.spelled)
        for name in names:
            own = prefix + name
            if own in self.plain:
                plain[name] = self.plain[own]
                spelled[name] = self.spelled[own]
            if own in self.written:
                written[name] = self.written[own].over(wide.written.get(name))
                if own in self.spelled:
                    spelled[name] = self.spelled[own]
        return Table(wide.section, self.place, plain, written, spelled, self.defaults)


def read_table(
    section: Section,
    raw: object,
    place: Place,
    faults: FaultList,
    *,
    ask: bool = True,
    partial: bool = False,
    defaults: Mapping[str, Quantity] | None = None,
) -> Table:
    """Read a table by its section's keys.

    Parameters
    ----------
    section : Section
        Accepted keys.
    raw : object
        The table as parsed; anything but a mapping is a fault.
    place : Place
        Where it stands and what falls away with it.
    faults : FaultList
        Gets every fault and question.
    ask : bool
        Whether missing keys that have no default are put as questions.
    partial : bool
        Whether a ``u_`` may stand without its value (it then refines the survey-wide one).
    defaults : mapping of name to Quantity, optional
        The survey's table of defaults.

    Returns
    -------
    Table
        Without the keys that were at fault.
    """
    if not isinstance(raw, dict):
        faults.add(place, "", f"{shown(raw)} stands here", f"expected a table of {section.name}")
        raw = {}
    reader = _Reader(section, place, faults)
    for name, value in raw.items():
        reader.take(str(name), value)
    reader.finish(ask=ask and bool(raw), partial=partial)
    return Table(section, place, reader.plain, reader.written, reader.spelled, defaults)


def read_list(section: Section, table: Table, name: str, faults: FaultList) -> list[Table]:
    """Read the list of tables under one key of a table.

    Parameters
    ----------
    section : Section
        Accepted keys of each table in the list.
    table : Table
        Holds the list as written.
    name : str
        Its key.
    faults : FaultList
        Gets every fault; a list that is none, or empty, is one.

    Returns
    -------
    list of Table
        Without the tables that were at fault.
    """
    raw = table.get(name)
    if not isinstance(raw, list) or not raw:
        example = table.key(name).example
        faults.add(
            table.place, name, f"{name} is {shown(raw)}", f"expected a list of tables, {example}"
        )
        return []
    found = []
    for number, item in enumerate(raw, start=1):
        place = replace(
            table.place,
            prefix=table.place.where(f"{name}[{number}]"),
            line_of=lambda _key: table.place.line_of(name),
        )
        before = faults.errors
        one = read_table(section, item, place, faults, defaults=table.defaults)
        if faults.errors == before:
            found.append(one)
    return found


class _Reader:
    def __init__(self, section: Section, place: Place, faults: FaultList) -> None:
        self.section, self.place, self.faults = section, place, faults
        self.spellings = section.spellings
        self.by_name = section.by_name
        self.plain: dict[str, object] = {}
        self.written: dict[str, Written] = {}
        self.spelled: dict[str, str] = {}
        self.faulty: set[str] = set()

    def take(self, name: str, raw: object) -> None:
        found = self.spellings.get(name)
        if found is None:
            self._unknown_key(name, raw)
            return
        key, unit, is_u = found
        try:
            if is_u:
                self._take_u(key, unit, name, raw)
            else:
                self._take_value(key, unit, name, raw)
        except Problem as problem:
            self.faulty.add(key.name)
            self.faults.add(self.place, name, problem.found, problem.expected)

    def _take_value(self, key: Key, unit: Unit, name: str, raw: object) -> None:
        if key.name in self.spelled:
            raise Problem(
                f"{self.spelled[key.name]} and {name} are both given", "expected one of the two"
            )
        if key.kind == "quantity":
            value = parse_value(key, unit, name, raw)
            self.written[key.name] = value.over(self.written.get(key.name))
        elif key.kind in ("layers", "pieces"):
            self.plain[key.name] = raw
        elif _is_unknown_word(key, raw):
            self.plain[key.name] = UNKNOWN
        else:
            self.plain[key.name] = parse_plain(key, unit, name, raw)
        self.spelled[key.name] = name

    def _take_u(self, key: Key, unit: Unit, name: str, raw: object) -> None:
        known = self.written.get(key.name)
        if known is not None and known.u is not None:
            raise Problem(f"{name} repeats the uncertainty of {key.name}", "expected it once")
        u = parse_u(unit, name, raw)
        self.written[key.name] = Written(None if known is None else known.value, u)

    def _unknown_key(self, name: str, raw: object) -> None:
        bare = name.removeprefix("u_")
        key = self.by_name.get(bare)
        if key is not None and key.has_unit and bare not in self.spellings:
            if isinstance(raw, str) and raw.strip().lower() == UNKNOWN_WORD:
                self._take_bare_unknown(key, name)
                return
            choices = " or ".join(name.replace(bare, written) for written, _ in key.spellings)
            self.faulty.add(key.name)
            self.faults.add(self.place, name, f"{name} says no unit", f"expected {choices}")
            return
        if key is not None and name.startswith("u_"):
            self.faults.add(self.place, name, f"{bare} takes no uncertainty", "delete this key")
            return
        hint = nearest(name, self.spellings)
        foreign = not self.section.strict and not hint
        self.faults.add(
            self.place,
            name,
            f"there is no key {shown(name)} here" + (" and it is not used" if foreign else ""),
            f"expected a key of {self.section.name}{hint}",
            severity="question" if foreign else "error",
        )

    def _take_bare_unknown(self, key: Key, name: str) -> None:
        if key.kind == "quantity":
            self.written[key.name] = Written(UNKNOWN)
        else:
            self.plain[key.name] = UNKNOWN
        self.spelled[key.name] = name

    def finish(self, *, ask: bool, partial: bool) -> None:
        for key in self.section.keys:
            here = key.name in self.plain or key.name in self.written or key.name in self.faulty
            if key.required and not here:
                self.faults.add(
                    self.place, key.usual, f"{key.usual} is missing", f"expected {_meaning(key)}"
                )
            elif ask and key.ask and not here:
                self.faults.ask(
                    self.place,
                    key.usual,
                    f"{key.usual} is missing and nothing is assumed in its place",
                    f'declare it ({_meaning(key)}) or write "{UNKNOWN_WORD}"',
                )
            written = self.written.get(key.name)
            if written is not None and written.value is None:
                if key.name not in self.faulty and not partial:
                    self.faults.add(
                        self.place,
                        f"u_{key.usual}",
                        f"u_{key.name} stands without {key.name}",
                        f"expected {key.usual} beside it",
                    )
                if not partial:
                    del self.written[key.name]


def _is_unknown_word(key: Key, raw: object) -> bool:
    if key.kind in ("text", "name", "file", "choice", "layers", "pieces"):
        return False
    return isinstance(raw, str) and raw.strip().lower() == UNKNOWN_WORD


def _meaning(key: Key) -> str:
    meaning = key.meaning[0].lower() + key.meaning[1:]
    return f"{meaning}, e.g. {key.example}" if key.example else meaning
