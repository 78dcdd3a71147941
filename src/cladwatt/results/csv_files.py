"""The result tables as CSV: one header row, decimal point, UTF-8, written row by row."""

import math
import re
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import TypeVar

import numpy as np

from cladwatt.results.assessment import Assessment, RegionResult
from cladwatt.results.columns import (
    COMPONENT_COLUMNS,
    LOG_COLUMNS,
    REGION_COLUMNS,
    STATION_COLUMNS,
    STRETCH_COLUMNS,
    Cell,
    Column,
    columns_text,
)
from cladwatt.types import FloatArray

__all__ = ["cell_text", "csv_line", "write_tables"]

_NEEDS_QUOTES = re.compile(r'[,"\r\n]|^\s|\s$')
Row = TypeVar("Row")


def cell_text(value: Cell) -> str:
    """Return a cell as text: six significant digits, ``true``/``false``, empty where unknown."""
    if value is None:
        return ""
    if isinstance(value, str):
        return value
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int):
        return str(value)
    # adding zero turns -0.0 into 0
    return format(value + 0.0, ".6g") if math.isfinite(value) else ""


def csv_line(cells: Iterable[str]) -> str:
    """Return one line of CSV, quoted where RFC 4180 asks for it, ending with a line feed."""
    return ",".join(_quoted(cell) for cell in cells) + "\n"


def _quoted(text: str) -> str:
    return '"' + text.replace('"', '""') + '"' if _NEEDS_QUOTES.search(text) else text


def _write(path: Path, columns: Sequence[Column[Row]], rows: Iterator[Row]) -> None:
    # a name that is no valid Unicode must not cost the run its results
    with path.open("w", encoding="utf-8", errors="backslashreplace", newline="") as file:
        file.write(csv_line(column.name for column in columns))
        for row in rows:
            file.write(csv_line(cell_text(column.value(row)) for column in columns))


def _number_texts(figures: FloatArray) -> list[str]:
    """Return figures as :func:`cell_text` does, many at once."""
    texts = ("%.6g " * figures.size % tuple((figures + 0.0).tolist())).split()
    for i in (~np.isfinite(figures)).nonzero()[0]:
        texts[i] = ""
    return texts


def _write_stations(path: Path, regions: Iterable[RegionResult]) -> None:
    with path.open("w", encoding="utf-8", errors="backslashreplace", newline="") as file:
        file.write(csv_line(column.name for column in STATION_COLUMNS))
        for region in regions:
            cells = (column.values(region) for column in STATION_COLUMNS)
            texts = [
                [_quoted(text) for text in found] if isinstance(found, list)
                else _number_texts(found)
                for found in cells
            ]  # fmt: skip
            file.writelines(",".join(row) + "\n" for row in zip(*texts, strict=True))


def write_tables(assessment: Assessment, folder: Path) -> None:
    """Write the tables of regions, stretches, stations, lines and components, and ``COLUMNS.txt``.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    folder : Path
        Existing folder to write into.

    References
    ----------
    .. [1] RFC 4180 (quoting; the line ends with a line feed alone).
    """
    regions = assessment.regions
    stretches = ((region, stretch) for region in regions for stretch in region.stretches)
    _write(folder / "regions.csv", REGION_COLUMNS, iter(regions))
    _write(folder / "stretches.csv", STRETCH_COLUMNS, stretches)
    _write_stations(folder / "stations.csv", regions)
    logged = ((log, part) for log in assessment.logs for part in log.bins)
    _write(folder / "line_log.csv", LOG_COLUMNS, logged)
    _write(folder / "components.csv", COMPONENT_COLUMNS, iter(assessment.components))
    (folder / "COLUMNS.txt").write_text(columns_text(), encoding="utf-8", newline="\n")
