"""``cladwatt tables``: the material tables, with their sources."""

import argparse
import csv
import io
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from cladwatt.errors import InputError
from cladwatt.faces.cli.common import CommandGroup, add_command
from cladwatt.faces.cli.messages import ExitCode, Messages

if TYPE_CHECKING:
    from cladwatt.materials.load import MaterialTables

__all__ = ["add"]

_DESCRIPTION = """\
Print the material tables that ship: lagging conductivity against temperature, service limits,
claddings, pipe sizes, air properties, defaults, and the sources of them all. Every row names its
source, how far it can be trusted and an uncertainty.
"""
_END = """\
Without NAME the tables are listed. A survey may hold tables of its own in SURVEY/tables/, of the
same names and columns: their rows add to these or stand in their place; --survey shows the result.

exit codes:
  0 done; 1 no such table, or a survey's own table is faulty; 2 wrong usage

examples:
  cladwatt tables
  cladwatt tables claddings
  cladwatt tables lagging_conductivity --csv > my_survey/tables/lagging_conductivity.csv
"""
_WIDEST = 48
"""A cell is cut here in the aligned listing; --csv cuts nothing."""
_GAP = "  "


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "tables", _run, summary="print the material tables with their sources",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("name", metavar="NAME", nargs="?", help="name of a table")
    parser.add_argument(
        "--survey", metavar="SURVEY", type=Path, help="with the own tables of this survey"
    )
    parser.add_argument("--csv", action="store_true", help="print as CSV, nothing cut")


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    from cladwatt.materials.tables import load_tables, table_rows

    if options.survey is not None and not options.survey.is_dir():
        raise InputError(f"{options.survey} is no folder; expected a survey folder")
    tables = load_tables(options.survey / "tables" if options.survey is not None else None)
    if options.name is None:
        messages.lines(_listing(tables))
        return ExitCode.DONE
    header, units, rows = table_rows(options.name, tables)
    if options.csv:
        messages.output(_as_csv([header, units, *rows]))
        return ExitCode.DONE
    messages.lines(_aligned(header, units, rows))
    columns = [i for i, name in enumerate(header) if i and name.endswith("source")]
    if columns:
        messages.lines(["", *_sources([row[i] for i in columns for row in rows], tables)])
    return ExitCode.DONE


def _listing(tables: "MaterialTables") -> list[str]:
    from cladwatt.materials.formats import TABLE_FORMATS

    names = list(tables.rows)
    widest = max(len(name) for name in names)
    return [
        f"{name.ljust(widest)}{_GAP}{len(tables.rows[name][2]):4d} rows{_GAP}"
        f"{TABLE_FORMATS[name].about}"
        for name in names
    ]


def _as_csv(rows: Sequence[Sequence[str]]) -> str:
    text = io.StringIO()
    csv.writer(text, lineterminator="\n").writerows(rows)
    return text.getvalue()


def _aligned(
    header: Sequence[str], units: Sequence[str], rows: Sequence[Sequence[str]]
) -> Iterator[str]:
    """Yield the table with columns aligned, numbers to the right."""
    signs = [f"[{unit}]" if unit not in ("", "1") else "" for unit in units]
    shown = [[_cut(cell) for cell in row] for row in (header, signs, *rows)]
    widths = [max(len(row[column]) for row in shown) for column in range(len(header))]
    numeric = [all(_is_number(row[column]) for row in rows) for column in range(len(header))]
    for row in shown:
        cells = [
            cell.rjust(width) if right else cell.ljust(width)
            for cell, width, right in zip(row, widths, numeric, strict=True)
        ]
        yield _GAP.join(cells).rstrip()


def _cut(cell: str) -> str:
    return cell if len(cell) <= _WIDEST else cell[: _WIDEST - 3] + "..."


def _is_number(cell: str) -> bool:
    try:
        float(cell or "0")
    except ValueError:
        return False
    return True


def _sources(cells: Sequence[str], tables: "MaterialTables") -> Iterator[str]:
    """Yield what the source ids of a table stand for."""
    header, _, rows = tables.rows["sources"]
    citation, place = header.index("citation"), header.index("place")
    known = {row[0]: row for row in rows}
    named = dict.fromkeys(name for cell in cells for name in cell.split("|") if name)
    yield "sources:"
    for name in named:
        row = known.get(name)
        if row is None:
            yield f"  {name}"
        else:
            where = f" ({row[place]})" if row[place] else ""
            yield f"  {name}: {row[citation]}{where}"
