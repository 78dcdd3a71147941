"""Read the tables that ship and a user's own, and merge them."""

import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import lru_cache
from pathlib import Path

from cladwatt.errors import Fault, TableError
from cladwatt.materials.build import (
    build_air_rows,
    build_claddings,
    build_defaults,
    build_lagging,
)
from cladwatt.materials.damage_kinds import build_damage_kinds
from cladwatt.materials.fittings import build_fittings, build_hanger_spacing
from cladwatt.materials.formats import TABLE_FORMATS
from cladwatt.materials.pipes import build_pipe_sizes, parse_nps
from cladwatt.materials.placed import Placed
from cladwatt.materials.rows import (
    AirRow,
    CladdingMaterial,
    DamageKind,
    Fitting,
    HangerSpacing,
    LaggingMaterial,
    PipeSize,
)
from cladwatt.materials.table_text import parse_table, read_table_text
from cladwatt.quantities import Quantity

__all__ = ["TABLE_NAMES", "MaterialTables", "TableRows", "load_tables", "shipped_tables"]

TABLE_NAMES = tuple(TABLE_FORMATS)
"""Names of the tables, in the order they are printed."""

TableRows = tuple[tuple[str, ...], tuple[str, ...], tuple[tuple[str, ...], ...]]
"""Header, units and rows of one table, as text."""

_DATA = Path(__file__).parent / "data"
_KEY_COLUMN = {
    "lagging_conductivity": "material",
    "lagging_materials": "material",
    "claddings": "cladding",
    "defaults": "quantity",
    "fittings": "fitting",
    "damage_kinds": "kind",
    "sources": "source",
    "air_properties": "temperature_K",
}


@dataclass(frozen=True)
class MaterialTables:
    """All tables of one survey: what ships, with the user's rows added or put in place.

    Parameters
    ----------
    lagging, claddings : mapping of key to row
        Lagging materials and outer surfaces.
    pipe_sizes : tuple of PipeSize
        By rising diameter.
    air : tuple of AirRow
        By rising temperature.
    defaults : mapping of name to Quantity
        What is taken where nothing is declared. [SI]
    rows : mapping of table name to (header, units, rows)
        The same as text, for printing.
    user_files : tuple of Path
        The user's files that were read.
    fittings : mapping of key to Fitting
        Flanges, valves and hangers; those of the user last.
    damage_kinds : mapping of key to DamageKind
        Of damage to lagging, with its prior.
    hanger_spacing : tuple of HangerSpacing
        By rising diameter.
    """

    lagging: Mapping[str, LaggingMaterial]
    claddings: Mapping[str, CladdingMaterial]
    pipe_sizes: tuple[PipeSize, ...]
    air: tuple[AirRow, ...]
    defaults: Mapping[str, Quantity]
    rows: Mapping[str, TableRows]
    user_files: tuple[Path, ...] = ()
    fittings: Mapping[str, Fitting] = field(default_factory=dict)
    hanger_spacing: tuple[HangerSpacing, ...] = ()
    damage_kinds: Mapping[str, DamageKind] = field(default_factory=dict)


def load_tables(extra_folder: Path | None = None) -> MaterialTables:
    """Return the tables that ship, merged with a user's own.

    Parameters
    ----------
    extra_folder : Path, optional
        Folder of the user's tables, by custom ``tables/`` beside the survey: files of the same
        names and columns as those that ship. Rows add to them, or stand in their place where the
        key is the same; a conductivity curve is replaced as a whole. Nothing happens where the
        folder does not exist.

    Returns
    -------
    MaterialTables
        Frozen tables in SI.

    Raises
    ------
    TableError
        If a file is faulty; it carries every fault of every file.
    """
    if extra_folder is None or not extra_folder.exists():
        return shipped_tables()
    if not extra_folder.is_dir():
        fault = Fault(extra_folder.name, "", "this is a file", "expected a folder of CSV tables")
        raise TableError(fault)
    return _merged_tables(extra_folder)


@lru_cache(maxsize=1)
def shipped_tables() -> MaterialTables:
    """Return the tables that ship; read once."""
    return _merged_tables(None)


def _merged_tables(extra_folder: Path | None) -> MaterialTables:
    faults: list[Fault] = []
    placed = {
        name: _read_placed(_DATA / f"{name}.csv", name, False, faults) for name in TABLE_NAMES
    }
    user_files = [] if extra_folder is None else _user_files(extra_folder, faults)
    for path in user_files:
        own = _read_placed(path, path.stem, True, faults)
        placed[path.stem] = _merged(path.stem, placed[path.stem], own)
    shorts = {p.record.text("source"): p.record.text("short") for p in placed["sources"]}
    tables = MaterialTables(
        lagging=build_lagging(
            placed["lagging_conductivity"], placed["lagging_materials"], shorts, faults
        ),
        claddings=build_claddings(placed["claddings"], shorts, faults),
        pipe_sizes=build_pipe_sizes(placed["pipe_sizes"], shorts, faults),
        air=build_air_rows(placed["air_properties"], shorts),
        defaults=build_defaults(placed["defaults"], shorts, faults),
        rows={name: _text_rows(name, placed[name]) for name in TABLE_NAMES},
        user_files=tuple(user_files),
        fittings=build_fittings(placed["fittings"], shorts, faults),
        hanger_spacing=build_hanger_spacing(placed["hanger_spacing"], shorts, faults),
        damage_kinds=build_damage_kinds(placed["damage_kinds"], shorts, faults),
    )
    if faults:
        raise TableError(*faults)
    return tables


def _user_files(folder: Path, faults: list[Fault]) -> list[Path]:
    accepted = [name for name, table in TABLE_FORMATS.items() if table.user_may_extend]
    found = []
    for path in sorted(folder.iterdir()):
        if path.suffix.lower() != ".csv":
            continue
        if path.stem in accepted:
            found.append(path)
            continue
        near = difflib.get_close_matches(path.stem, accepted, n=1)
        hint = f"did you mean {near[0]}.csv? " if near else ""
        expected = f"{hint}accepted are {', '.join(f'{name}.csv' for name in accepted)}"
        faults.append(Fault(f"{folder.name}/{path.name}", "", "no table has this name", expected))
    return found


def _read_placed(path: Path, name: str, is_user: bool, faults: list[Fault]) -> list[Placed]:
    label = f"{path.parent.name}/{path.name}"
    try:
        text = read_table_text(path)
    except OSError as error:
        reason = error.strerror or str(error)
        faults.append(Fault(label, "", reason, "expected a CSV file that can be read"))
        return []
    parsed = parse_table(text, TABLE_FORMATS[name], label)
    faults.extend(parsed.faults)
    placed = [Placed(record, label, is_user) for record in parsed.records]
    if name != "lagging_conductivity":
        _find_twice(placed, name, faults)
    return placed


def _find_twice(placed: Iterable[Placed], name: str, faults: list[Fault]) -> None:
    lines: dict[object, int] = {}
    for row in placed:
        key = _row_key(name, row)
        if key in lines:
            found = f"it stands twice, first in line {lines[key]}"
            faults.append(row.fault(str(key), found, "expected each once"))
        lines[key] = row.record.line


def _row_key(name: str, placed: Placed) -> object:
    if name in _KEY_COLUMN:
        return placed.record.values[_KEY_COLUMN[name]]
    dn = placed.record.number("dn")
    if dn is not None:
        return f"DN {dn:g}"
    return f"NPS {parse_nps(placed.record.text('nps'))}"


def _merged(name: str, shipped: list[Placed], own: list[Placed]) -> list[Placed]:
    if name == "defaults":
        # A user's default is checked against the bounds of the one that ships: keep both.
        return [*shipped, *own]
    replaced = {_row_key(name, placed) for placed in own}
    return [*(p for p in shipped if _row_key(name, p) not in replaced), *own]


def _text_rows(name: str, placed: list[Placed]) -> TableRows:
    columns = TABLE_FORMATS[name].columns
    header = tuple(column.name for column in columns)
    units = tuple(column.unit for column in columns)
    kept = placed
    if name == "defaults":
        own = {_row_key(name, p) for p in placed if p.is_user}
        kept = [p for p in placed if p.is_user or _row_key(name, p) not in own]
    rows = []
    for row in kept:
        cells = {"source": row.path, "confidence": "declared"} if row.is_user else {}
        cells |= {key: cell for key, cell in row.record.cells.items() if cell}
        rows.append(tuple(cells.get(column, "") for column in header))
    return header, units, tuple(rows)
