"""The line list: ``[[line]]`` tables of the survey file and rows of a CSV."""

import re
from collections.abc import Iterable
from dataclasses import dataclass, replace

from cladwatt.survey.fault_list import FaultList, Place
from cladwatt.survey.keys import LAYER, Key, Section, section
from cladwatt.survey.list_csv import ListRow, cell_value, read_rows

__all__ = ["Entry", "entries_of_csv", "line_entries_of_csv"]

MAXIMUM_LAYERS = 6
_NUMBERED = re.compile(r"(u_)?lagging_(\d)_(.+)")


@dataclass(frozen=True)
class Entry:
    """One raw table of a list and where it stands."""

    raw: object
    place: Place
    extra: dict[str, str]


def entries_of_csv(
    data: bytes,
    path: str,
    part: Section,
    faults: FaultList,
    extra_columns: dict[str, Key] | None = None,
) -> list[Entry]:
    """Return the rows of a CSV list as raw tables.

    Parameters
    ----------
    data : bytes
        The file.
    path : str
        Name in messages.
    part : Section
        ``line`` or ``frame``.
    faults : FaultList
    extra_columns : dict, optional
        Further accepted columns and the key their cells are read by.

    Raises
    ------
    SurveyFileError
        If the file as a whole cannot be used.
    """
    further = extra_columns or {}
    keys = {name: key for name, (key, _, _) in part.spellings.items()} | further
    rows = read_rows(data, path, part, frozenset(further), faults)
    return [_entry(row, keys, path, part.name) for row in rows]


def _entry(row: ListRow, keys: dict[str, Key], path: str, name: str) -> Entry:
    raw: dict[str, object] = {
        column: cell_value(keys[column], text, decimal_comma=row.decimal_comma)
        for column, text in row.cells.items()
    }
    place = Place(path, f"{name} in row {row.line}", line_of=lambda _key: row.line)
    return Entry(raw, place, row.extra)


def line_entries_of_csv(data: bytes, path: str, faults: FaultList) -> list[Entry]:
    """Return the rows of a line list; ``lagging_2_material`` and so on become layers.

    Several layers are numbered from the inside out: ``lagging_1_material``,
    ``lagging_1_thickness_mm``, ``lagging_2_material`` ...

    Raises
    ------
    SurveyFileError
        If the file as a whole cannot be used.
    """
    entries = entries_of_csv(data, path, section("line"), faults, _numbered_columns())
    return [replace(entry, raw=_with_layers(entry.raw)) for entry in entries]


def _numbered_columns() -> dict[str, Key]:
    spellings = Section("layers", "", LAYER).spellings
    columns: dict[str, Key] = {}
    for number in range(1, MAXIMUM_LAYERS + 1):
        for name, (key, _, _) in spellings.items():
            u, bare = ("u_", name[2:]) if name.startswith("u_") else ("", name)
            columns[f"{u}lagging_{number}_{bare}"] = key
    return columns


def _with_layers(raw: object) -> object:
    """Gather the numbered columns of a row into its list of layers."""
    assert isinstance(raw, dict)
    layers: dict[int, dict[str, object]] = {}
    rest: dict[str, object] = {}
    for name, value in raw.items():
        match = _NUMBERED.fullmatch(name)
        if match is None:
            rest[name] = value
        else:
            layers.setdefault(int(match[2]), {})[(match[1] or "") + match[3]] = value
    if layers:
        rest["layers"] = [layers[number] for number in sorted(layers)]
    return rest


def repeated(names: Iterable[str]) -> set[str]:
    """Return the names that occur more than once, letter case aside."""
    seen: set[str] = set()
    twice: set[str] = set()
    for name in names:
        folded = name.casefold()
        (twice if folded in seen else seen).add(folded)
    return twice
