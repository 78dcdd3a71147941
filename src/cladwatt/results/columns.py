"""The columns of the result tables: name, meaning and how each is taken from the results."""

import math
import textwrap
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Generic, TypeVar

from cladwatt.flags import FLAG_SENTENCES, flag_names
from cladwatt.quantities import Remark
from cladwatt.results.assessment import (
    ComponentResult,
    Interval,
    LineLog,
    LogBin,
    RegionResult,
    StationTable,
    Stretch,
)
from cladwatt.results.fields import FIELDS, ZERO_CELSIUS, edge_name, edge_value, is_celsius
from cladwatt.types import FloatArray

__all__ = [
    "COMPONENT_COLUMNS",
    "LOG_COLUMNS",
    "REGION_COLUMNS",
    "STATION_COLUMNS",
    "STRETCH_COLUMNS",
    "Cell",
    "Column",
    "Heading",
    "StationColumn",
    "columns_text",
    "remark_text",
]

Cell = str | float | int | bool | None
Row = TypeVar("Row")
StretchRow = tuple[RegionResult, Stretch]
LogRow = tuple[LineLog, LogBin]


@dataclass(frozen=True)
class Heading:
    """What a column is called and what stands in it.

    Parameters
    ----------
    name : str
        Header, with the unit at its end.
    unit : str
        Unit as a person writes it; empty for text and plain numbers.
    meaning : str
        For ``COLUMNS.txt``.
    """

    name: str
    unit: str
    meaning: str


@dataclass(frozen=True)
class Column(Heading, Generic[Row]):
    """A column whose cells are taken row by row.

    Parameters
    ----------
    value : callable
        Takes the row's object and returns the cell: None, NaN and inf become an empty cell.
    """

    value: Callable[[Row], Cell]


@dataclass(frozen=True)
class StationColumn(Heading):
    """A column of the stations, taken for a whole region at once since there are many.

    Parameters
    ----------
    values : callable
        Takes a region and returns an array of figures or a list of texts, one per station.
    """

    values: Callable[[RegionResult], FloatArray | list[str]]


def remark_text(*remarks: Remark | None) -> str:
    """Return remarks as ``key(name=value, ...)`` joined by ``; ``; empty for none."""
    return "; ".join(_one_remark(remark) for remark in remarks if remark is not None)


def _one_remark(remark: Remark) -> str:
    if not remark.parameters:
        return remark.key
    inside = ", ".join(
        f"{name}={value if isinstance(value, str) else format(value, '.6g')}"
        for name, value in remark.parameters
    )
    return f"{remark.key}({inside})"


def _number(value: float, celsius: bool) -> float | None:
    if not math.isfinite(value):
        return None
    return edge_value(value) if celsius else float(value)


def _figure_columns(
    owner: type, field: str, get: Callable[[Row], float | Interval | None], *, interval: bool
) -> list[Column[Row]]:
    """Return the column of a figure, or the three of an interval."""
    entry = FIELDS[owner][field]
    celsius = is_celsius(owner, field)

    def part_of(part: str) -> Callable[[Row], Cell]:
        def cell(row: Row) -> Cell:
            found = get(row)
            if isinstance(found, Interval):
                found = float(getattr(found, part))
            return None if found is None else _number(found, celsius)

        return cell

    columns = [Column(edge_name(owner, field), entry.unit, entry.meaning, part_of("median"))]
    if interval:
        columns += [
            Column(edge_name(owner, field, part), entry.unit, f"its {percentile}", part_of(part))
            for part, percentile in (("low", "2.5 percentile"), ("high", "97.5 percentile"))
        ]
    return columns


def _region_figures() -> list[Column[RegionResult]]:
    plain = (
        "start_station", "end_station", "recorded_temperature", "probability_damaged",
        "probability_local", "probability_aged", "air_temperature",
    )  # fmt: skip
    columns: list[Column[RegionResult]] = []
    for field in FIELDS[RegionResult]:
        if field in ("variance_shares", "kinds"):
            continue

        def get(region: RegionResult, field: str = field) -> float | Interval | None:
            found: float | Interval | None = getattr(region, field)
            return found

        columns += _figure_columns(RegionResult, field, get, interval=field not in plain)
    return columns


def _stretch_figures() -> list[Column[StretchRow]]:
    columns: list[Column[StretchRow]] = []
    for field in FIELDS[Stretch]:
        if field in ("outline", "kinds"):
            continue

        def get(row: StretchRow, field: str = field) -> float | Interval | None:
            found: float | Interval | None = getattr(row[1], field)
            return found

        interval = field in ("start", "end", "heat_loss", "excess")
        columns += _figure_columns(Stretch, field, get, interval=interval)
    return columns


def _log_figures() -> list[Column[LogRow]]:
    columns: list[Column[LogRow]] = []
    for field in FIELDS[LogBin]:

        def get(row: LogRow, field: str = field) -> float | Interval | None:
            found: float | Interval | None = getattr(row[1], field)
            return found

        interval = field in ("heat_loss", "resistance")
        columns += _figure_columns(LogBin, field, get, interval=interval)
    return columns


def _component_figures() -> list[Column[ComponentResult]]:
    columns: list[Column[ComponentResult]] = []
    for field in FIELDS[ComponentResult]:

        def get(one: ComponentResult, field: str = field) -> Interval | None:
            found: Interval | None = getattr(one, field)
            return found

        columns += _figure_columns(ComponentResult, field, get, interval=True)
    return columns


def _station_figures() -> list[StationColumn]:
    columns: list[StationColumn] = []
    for field, entry in FIELDS[StationTable].items():
        if field == "flags":
            continue

        def values(region: RegionResult, field: str = field) -> FloatArray:
            found: FloatArray = getattr(region.stations, field)
            return found - ZERO_CELSIUS if is_celsius(StationTable, field) else found

        name = edge_name(StationTable, field)
        columns.append(StationColumn(name, entry.unit, entry.meaning, values))
    return columns


def _repeated(get: Callable[[RegionResult], str]) -> Callable[[RegionResult], list[str]]:
    return lambda region: [get(region)] * region.stations.station.size


def _shares_text(region: RegionResult) -> str:
    return _named_shares(region.variance_shares)


def _named_shares(shares: tuple[tuple[str, float], ...]) -> str:
    return "; ".join(f"{name}={share:.3g}" for name, share in shares)


REGION_COLUMNS: tuple[Column[RegionResult], ...] = (
    Column("frame_id", "", "frame the region is drawn on", lambda r: r.frame_id),
    Column("region_id", "", "region as drawn", lambda r: r.region_id),
    Column("tag", "", "tag of the line", lambda r: r.tag),
    Column("area", "", "area of the plant", lambda r: r.area),
    Column("gain", "", "true where the line gains heat (chilled)", lambda r: bool(r.gain)),
    Column("verdict", "", "quantified, indicative or not quantified", lambda r: r.verdict.level),
    Column("reason", "", "why that verdict, as a key", lambda r: remark_text(r.verdict.reason)),
    Column("advice", "", "measurement that would help most, as a key",
           lambda r: remark_text(r.verdict.advice)),
    *_region_figures(),
    Column("stretches", "", "number of damaged stretches found", lambda r: len(r.stretches)),
    Column("variance_shares", "", "part of the variance of the loss by quantity", _shares_text),
    Column("kinds", "", "probability of sound, aged and each kind of local damage",
           lambda r: _named_shares(r.kinds)),
    Column("missing", "", "what could not be given, and why", lambda r: remark_text(*r.missing)),
    Column("cautions", "", "cautions, as keys", lambda r: remark_text(*r.cautions)),
    Column("remarks", "", "other remarks, as keys", lambda r: remark_text(*r.remarks)),
)  # fmt: skip

STRETCH_COLUMNS: tuple[Column[StretchRow], ...] = (
    Column("frame_id", "", "frame the region is drawn on", lambda row: row[0].frame_id),
    Column("region_id", "", "region the stretch lies in", lambda row: row[0].region_id),
    Column("stretch_id", "", "id of the stretch", lambda row: row[1].id),
    Column("tag", "", "tag of the line", lambda row: row[0].tag),
    Column("area", "", "area of the plant", lambda row: row[0].area),
    Column("gain", "", "true where the line gains heat", lambda row: bool(row[0].gain)),
    Column("verdict", "", "verdict of the region", lambda row: row[0].verdict.level),
    *_stretch_figures(),
    Column("side", "", "upper side, underside, all round or not known", lambda row: row[1].side),
    Column(
        "kinds",
        "",
        "probability of each kind of damage, if there is local damage here",
        lambda row: _named_shares(row[1].kinds),
    ),
)

LOG_COLUMNS: tuple[Column[LogRow], ...] = (
    Column("tag", "", "tag of the line", lambda row: row[0].tag),
    Column("area", "", "area of the plant", lambda row: row[0].area),
    Column("gain", "", "true where the line gains heat", lambda row: bool(row[0].gain)),
    *_log_figures(),
    Column(
        "regions", "", "regions that show it, joined by |", lambda row: "|".join(row[1].regions)
    ),
)

COMPONENT_COLUMNS: tuple[Column[ComponentResult], ...] = (
    Column("frame_id", "", "frame the component is drawn on", lambda c: c.frame_id),
    Column("region_id", "", "component as drawn", lambda c: c.region_id),
    Column("tag", "", "tag of the line it sits on", lambda c: c.tag),
    Column("kind", "", "what it is, as drawn", lambda c: c.kind),
    Column("lagged", "", "true where it is lagged itself", lambda c: bool(c.lagged)),
    *_component_figures(),
    Column("source", "", "of the equivalent length", lambda c: c.source),
    Column("reason", "", "why a figure is missing, as a key", lambda c: remark_text(c.reason)),
)

STATION_COLUMNS: tuple[StationColumn, ...] = (
    StationColumn("frame_id", "", "frame the region is drawn on", _repeated(lambda r: r.frame_id)),
    StationColumn("region_id", "", "region the station lies in", _repeated(lambda r: r.region_id)),
    StationColumn("tag", "", "tag of the line", _repeated(lambda r: r.tag)),
    *_station_figures(),
    StationColumn("flags", "", FIELDS[StationTable]["flags"].meaning,
                  lambda r: [flag_names(bits) for bits in r.stations.flags.tolist()]),
)  # fmt: skip

_NOTES = (
    "Every table is UTF-8 text, comma separated, with one header row and a decimal point whatever "
    "the computer's language. Units stand at the end of the names; temperatures are in degrees "
    "Celsius, everything else in SI. Read one with pandas.read_csv(path).",
    "A figure without _low or _high is the median, or the plain value where there is no interval; "
    "_low and _high are the 2.5 and 97.5 percentiles, the 95 % interval. Figures carry six "
    "significant digits; assessment.json and draws/ carry all.",
    "An empty cell means: not known, or not finite. A resistance has no finite upper end where "
    "the heat loss may be zero; its _high cell is then empty.",
    "Figures of regions that are not quantified stand here with their intervals; the column "
    "verdict says so.",
    "Components (flanges, valves, hangers) are estimated on their own from printed equivalent "
    "lengths, which are orders of magnitude; regions.csv and its totals do not contain them.",
    "Reasons, cautions and remarks are keys with parameters, key(name=value, ...), joined by "
    "semicolons; the report words them.",
    "Text is written as it was given, also where it begins with =, +, - or @: changing it would "
    "break the tie to the plant's own lists. A spreadsheet may take such a cell for a formula, so "
    "import text columns as text. Tags that look like numbers, or read NA or null, stay text with "
    "pandas.read_csv(path, dtype={'tag': str, 'area': str}, keep_default_na=False, "
    "na_values=['']).",
    "files.csv lists every file of this folder with its size and SHA-256. A folder that holds "
    "other or changed files is not overwritten.",
)


def columns_text() -> str:
    """Return the text of ``COLUMNS.txt``: what every column of every table means."""
    parts = ["Columns of the result tables", ""]
    for note in _NOTES:
        parts += [*textwrap.wrap(note, 96), ""]
    for name, table in (
        ("regions.csv: one row per region", _described(REGION_COLUMNS)),
        ("stretches.csv: one row per damaged stretch", _described(STRETCH_COLUMNS)),
        ("stations.csv: one row per station along a region", _described(STATION_COLUMNS)),
        (
            "line_log.csv: one row per tenth of a metre seen of a line with declared stations",
            _described(LOG_COLUMNS),
        ),
        ("components.csv: one row per flange, valve or hanger", _described(COMPONENT_COLUMNS)),
        ("flags in stations.csv", [(str(f.name).lower(), s) for f, s in FLAG_SENTENCES.items()]),
    ):
        parts += [name, *(f"  {column:<38} {meaning}" for column, meaning in table), ""]
    return "\n".join(parts)


def _described(columns: Iterable[Heading]) -> list[tuple[str, str]]:
    return [(c.name, f"{c.meaning} [{c.unit}]" if c.unit else c.meaning) for c in columns]
