"""Parse one CSV table against its format, collecting every fault."""

import csv
import difflib
import math
import re
from dataclasses import dataclass, field
from pathlib import Path

from cladwatt.errors import Fault
from cladwatt.materials.formats import Column, TableFormat

__all__ = ["ParsedTable", "Record", "normalised_key", "parse_table", "read_table_text"]

_SPELLINGS = (
    ("aluminum", "aluminium"),
    ("fiber", "fibre"),
    ("galvanized", "galvanised"),
    ("oxidized", "oxidised"),
    ("anodized", "anodised"),
)
_TRUE, _FALSE = {"yes", "true", "1"}, {"no", "false", "0"}
_CONFIDENCES = ("declared", "high", "medium", "low")

Value = float | str | bool | tuple[str, ...] | None


@dataclass(frozen=True)
class Record:
    """One row: its line in the file, its cells as written and as parsed."""

    line: int
    cells: dict[str, str]
    values: dict[str, Value]

    def text(self, name: str) -> str:
        """Return a text cell, empty where there is none."""
        return self.cells.get(name, "")

    def number(self, name: str) -> float | None:
        """Return a number, None where the cell is empty."""
        value = self.values.get(name)
        return value if isinstance(value, float) else None

    def needed(self, name: str) -> float:
        """Return a number of a required column."""
        value = self.number(name)
        assert value is not None, name
        return value

    def flag(self, name: str) -> bool:
        """Return a yes/no cell, False where it is empty."""
        return self.values.get(name) is True

    def names(self, name: str) -> tuple[str, ...]:
        """Return the texts of a cell separated by ``|``."""
        value = self.values.get(name)
        return value if isinstance(value, tuple) else ()


@dataclass
class ParsedTable:
    """The usable rows of a table and everything found wrong."""

    records: list[Record] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)


def normalised_key(name: str) -> str:
    """Return `name` as a key: lower case, one underscore between words, one spelling.

    Examples
    --------
    >>> normalised_key("Bright Aluminum")
    'bright_aluminium'
    """
    key = re.sub(r"[^0-9a-z]+", "_", name.casefold()).strip("_")
    for other, ours in _SPELLINGS:
        key = key.replace(other, ours)
    return key


def read_table_text(path: Path) -> str:
    """Return the text of a table file: UTF-8, UTF-16 with its mark, else Windows-1252."""
    data = path.read_bytes()
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        return data.decode("utf-16", errors="replace")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        return data.decode("cp1252", errors="replace")


def parse_table(text: str, table: TableFormat, path: str) -> ParsedTable:
    """Parse the text of one table.

    Parameters
    ----------
    text : str
        Header row, units row, then one fact per row; columns in any order, separated by comma,
        semicolon or tab. With semicolons or tabs a decimal comma is understood. Empty rows and
        rows that begin with ``#`` are passed over.
    table : TableFormat
        What is expected.
    path : str
        How the file is called in a fault.

    Returns
    -------
    ParsedTable
        Rows without a fault, and all faults.
    """
    parsed = ParsedTable()
    rows, separator = _split(text, parsed, path)
    if len(rows) < 2:
        expected = f"expected a header row ({_header_words(table)}), a units row, then the facts"
        parsed.faults.append(Fault(path, "", f"it holds {len(rows)} row(s)", expected))
        return parsed
    header = [cell.strip() for cell in rows[0][1]]
    if not _check_header(header, rows[0][0], table, path, parsed):
        return parsed
    if not _check_units(header, *rows[1], table, path, parsed):
        return parsed
    for line, cells in rows[2:]:
        _parse_row(header, line, cells, table, path, separator, parsed)
    return parsed


def _header_words(table: TableFormat) -> str:
    return ", ".join(column.name for column in table.columns if column.required) or ", ".join(
        column.name for column in table.columns
    )


def _split(text: str, parsed: ParsedTable, path: str) -> tuple[list[tuple[int, list[str]]], str]:
    lines = text.splitlines()
    first = next((line for line in lines if line.strip() and line.strip()[0] != "#"), "")
    separator = max(",;\t", key=first.count)
    reader = csv.reader(lines, delimiter=separator, strict=True)
    rows: list[tuple[int, list[str]]] = []
    try:
        for cells in reader:
            filled = any(cell.strip() for cell in cells)
            # A table of texts has a units row of nothing but separators.
            is_units_row = len(rows) == 1 and len(cells) == len(rows[0][1]) > 1
            if (filled or is_units_row) and not cells[0].lstrip().startswith("#"):
                rows.append((reader.line_num, cells))
    except csv.Error as error:
        expected = "expected quoted cells to be closed on the line they begin"
        parsed.faults.append(Fault(path, "", str(error), expected, line=reader.line_num))
    return rows, separator


def _check_header(
    header: list[str], line: int, table: TableFormat, path: str, parsed: ParsedTable
) -> bool:
    before = len(parsed.faults)
    known = table.column
    for name in header:
        if header.count(name) > 1 and name:
            parsed.faults.append(
                Fault(path, "header", f"column {name!r} stands twice", "expected it once", line)
            )
            break
    for name in header:
        if name not in known:
            near = difflib.get_close_matches(name, known, n=1)
            hint = f"did you mean {near[0]!r}? " if near else ""
            expected = f"{hint}accepted are {', '.join(known)}"
            parsed.faults.append(Fault(path, "header", f"unknown column {name!r}", expected, line))
    for column in table.columns:
        if column.required and column.name not in header:
            parsed.faults.append(
                Fault(
                    path,
                    "header",
                    f"column {column.name!r} is missing",
                    f"expected the columns {_header_words(table)}",
                    line,
                )
            )
    return len(parsed.faults) == before


def _plain_unit(unit: str) -> str:
    plain = unit.strip().replace("·", " ").replace("³", "3").replace("²", "2").replace("*", " ")
    plain = re.sub(r"\s+", " ", plain)
    return {"C": "°C", "degC": "°C", "-": "1", "": "1", "W/mK": "W/(m K)", "W/(mK)": "W/(m K)"}.get(
        plain, plain
    )


def _check_units(
    header: list[str],
    line: int,
    cells: list[str],
    table: TableFormat,
    path: str,
    parsed: ParsedTable,
) -> bool:
    before = len(parsed.faults)
    for name, cell in zip(header, [*cells, *[""] * len(header)], strict=False):
        column = table.column[name]
        if column.kind != "number" or column.unit == "see unit":
            continue
        if _plain_unit(cell) != _plain_unit(column.unit):
            parsed.faults.append(
                Fault(
                    path,
                    f"units row, column {name}",
                    f"the unit is {cell.strip()!r}",
                    f"expected {column.unit!r} (the row below the header holds the units)",
                    line,
                )
            )
    return len(parsed.faults) == before


def _parse_row(
    header: list[str],
    line: int,
    cells: list[str],
    table: TableFormat,
    path: str,
    separator: str,
    parsed: ParsedTable,
) -> None:
    if len(cells) != len(header):
        hint = " (a decimal comma? write a point, or separate the columns by semicolons)"
        parsed.faults.append(
            Fault(
                path,
                "",
                f"the row has {len(cells)} cells",
                f"expected {len(header)}, as the header has"
                + (hint if separator == "," and len(cells) > len(header) else ""),
                line,
            )
        )
        return
    written = {name: cell.strip() for name, cell in zip(header, cells, strict=True)}
    values: dict[str, Value] = {}
    before = len(parsed.faults)
    subject = next((written[c.name] for c in table.columns if c.kind == "key"), "")
    for name, cell in written.items():
        fault_text = _parse_cell(cell, table.column[name], separator, values)
        if fault_text:
            where = f"{subject}: {name}" if subject and subject != cell else name
            parsed.faults.append(Fault(path, where, *fault_text, line))
    if len(parsed.faults) == before:
        parsed.records.append(Record(line, written, values))


def _parse_cell(
    cell: str, column: Column, separator: str, values: dict[str, Value]
) -> tuple[str, str] | None:
    if not cell:
        return ("the cell is empty", "expected a value") if column.required else None
    if column.kind == "number":
        return _parse_number(cell, column, separator, values)
    if column.kind == "flag":
        if cell.casefold() not in _TRUE | _FALSE:
            return f"found {cell!r}", "expected yes or no"
        values[column.name] = cell.casefold() in _TRUE
    elif column.kind == "confidence":
        if cell not in _CONFIDENCES:
            return f"found {cell!r}", f"expected one of {', '.join(_CONFIDENCES)}"
        values[column.name] = cell
    elif column.kind == "names":
        values[column.name] = tuple(part.strip() for part in cell.split("|") if part.strip())
    elif column.kind == "key":
        if not normalised_key(cell):
            return f"found {cell!r}", "expected a name with letters or digits"
        values[column.name] = normalised_key(cell)
    else:
        values[column.name] = cell
    return None


def _parse_number(
    cell: str, column: Column, separator: str, values: dict[str, Value]
) -> tuple[str, str] | None:
    text = cell
    if separator != "," and re.fullmatch(r"[+-]?\d*,\d+", cell):
        text = cell.replace(",", ".")
    try:
        number = float(text)
    except ValueError:
        return f"found {cell!r}", "expected a number, written like 0.037"
    if not math.isfinite(number) or not column.low <= number <= column.high:
        unit = "" if column.unit in ("1", "see unit") else f" {column.unit}"
        accepted = f"expected {column.low:g} to {column.high:g}{unit}"
        return f"found {cell}", f"{accepted}; is the decimal point misplaced?"
    values[column.name] = number
    return None
