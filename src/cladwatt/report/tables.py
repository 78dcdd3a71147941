"""The results as data frames, for notebooks; columns as in the CSV files."""

from collections.abc import Iterable, Sequence
from dataclasses import asdict
from typing import TYPE_CHECKING, TypeVar

from cladwatt.report.findings import all_left_out
from cladwatt.report.wording import sentence
from cladwatt.results.assessment import Assessment
from cladwatt.results.columns import (
    COMPONENT_COLUMNS,
    REGION_COLUMNS,
    STATION_COLUMNS,
    STRETCH_COLUMNS,
    Column,
)

if TYPE_CHECKING:
    import pandas

__all__ = [
    "assumptions_table",
    "components_table",
    "left_out_table",
    "lines_table",
    "regions_table",
    "stations_table",
    "stretches_table",
]

Row = TypeVar("Row")


def regions_table(assessment: Assessment) -> "pandas.DataFrame":
    """Return one row per region.

    Parameters
    ----------
    assessment : Assessment
        What one run found.

    Returns
    -------
    pandas.DataFrame
        Columns as in ``regions.csv``: the unit stands at the end of the name, ``_low`` and
        ``_high`` are the ends of the 95 % interval, NaN is not known. Numbers are not rounded.
    """
    return _table(REGION_COLUMNS, assessment.regions)


def stretches_table(assessment: Assessment) -> "pandas.DataFrame":
    """Return one row per damaged stretch; columns as in ``stretches.csv``.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    """
    rows = [(region, stretch) for region in assessment.regions for stretch in region.stretches]
    return _table(STRETCH_COLUMNS, rows)


def stations_table(assessment: Assessment) -> "pandas.DataFrame":
    """Return one row per station along every region; columns as in ``stations.csv``.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    """
    import numpy as np
    import pandas as pd

    columns: dict[str, object] = {}
    for column in STATION_COLUMNS:
        parts = [column.values(region) for region in assessment.regions]
        if all(isinstance(part, list) for part in parts) and parts:
            columns[column.name] = [text for part in parts for text in part]
        elif parts:
            columns[column.name] = np.concatenate([np.asarray(part) for part in parts])
        else:
            columns[column.name] = []
    return pd.DataFrame(columns)


def components_table(assessment: Assessment) -> "pandas.DataFrame":
    """Return one row per flange, valve or hanger; columns as in ``components.csv``.

    Parameters
    ----------
    assessment : Assessment
        What one run found.

    Returns
    -------
    pandas.DataFrame
        What a component loses is in none of the other tables, and is no part of their totals.
    """
    return _table(COMPONENT_COLUMNS, assessment.components)


def lines_table(assessment: Assessment) -> "pandas.DataFrame":
    """Return one row per line: the sum over its drawn regions, shared errors kept.

    Parameters
    ----------
    assessment : Assessment
        What one run found.

    Returns
    -------
    pandas.DataFrame
        ``length_m``, ``total_loss_W`` and ``excess_W`` are medians; with ``_low`` and ``_high``
        before the unit they are the ends of the 95 % interval. NaN is not known.
    """
    figures = (("length", "m"), ("total_loss", "W"), ("excess", "W"))
    parts = (("median", ""), ("low", "_low"), ("high", "_high"))
    names = ["tag", "area", "gain", "regions"] + [
        f"{figure}{ending}_{unit}" for figure, unit in figures for _, ending in parts
    ]
    rows = []
    for line in assessment.lines:
        row: dict[str, object] = {
            "tag": line.tag, "area": line.area, "gain": line.gain, "regions": len(line.regions)
        }  # fmt: skip
        for figure, unit in figures:
            found = getattr(line, figure)
            for part, ending in parts:
                value = float("nan") if found is None else getattr(found, part)
                row[f"{figure}{ending}_{unit}"] = value
        rows.append(row)
    return _frame(rows, names)


def left_out_table(assessment: Assessment, language: str = "en") -> "pandas.DataFrame":
    """Return one row per frame, region or line that was not assessed, and why.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    language : str
        Code of a language file, for the reasons.
    """
    rows: list[dict[str, object]] = [
        {
            "what": item.what,
            "id": item.id,
            "frame_id": item.frame_id,
            "reason": item.message or (sentence(item.remark, language) if item.remark else ""),
        }
        for item in all_left_out(assessment)
    ]
    return _frame(rows, ["what", "id", "frame_id", "reason"])


def assumptions_table(assessment: Assessment) -> "pandas.DataFrame":
    """Return one row per quantity that went in, declared or default, with its source.

    Parameters
    ----------
    assessment : Assessment
        What one run found.

    Returns
    -------
    pandas.DataFrame
        Values in SI; the unit has its own column.
    """
    names = ["owner", "quantity", "value", "u", "unit", "source", "confidence"]
    return _frame([asdict(item) for item in assessment.assumptions], names)


def _table(columns: Sequence[Column[Row]], rows: Iterable[Row]) -> "pandas.DataFrame":
    import pandas as pd

    held = list(rows)
    cells = {column.name: [column.value(row) for row in held] for column in columns}
    # a column of figures that are all unknown must still be a column of numbers
    return pd.DataFrame(
        {
            column.name: pd.Series(cells[column.name], dtype=float)
            if column.unit and _is_figure(cells[column.name])
            else cells[column.name]
            for column in columns
        }
    )


def _is_figure(cells: Sequence[object]) -> bool:
    return all(cell is None or isinstance(cell, float) for cell in cells)


def _frame(rows: Sequence[dict[str, object]], names: list[str]) -> "pandas.DataFrame":
    import pandas as pd

    return pd.DataFrame(rows, columns=names)
