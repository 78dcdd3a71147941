"""Where respected sources differ: our value and uncertainty beside each, none averaged away."""

import csv
from itertools import groupby
from pathlib import Path

import numpy as np
import pytest

from cladwatt.materials.tables import cladding_material, lagging_material

TABLE = Path(__file__).parents[1] / "published/source_disagreements.csv"
ROWS = list(csv.DictReader(TABLE.read_text(encoding="utf-8").splitlines()))
SUBJECTS = {subject: list(rows) for subject, rows in groupby(ROWS, lambda row: row["subject"])}


def ours(row: dict[str, str]) -> tuple[float, float]:
    if row["table"] == "cladding":
        emissivity = cladding_material(row["key"]).total_emissivity
        return emissivity.value, emissivity.u
    material = lagging_material(row["key"])
    kelvin = float(row["at"]) + 273.15
    assert material.temperature[0] <= kelvin <= material.temperature[-1]
    value = float(np.interp(kelvin, material.temperature, material.conductivity))
    return value, value * material.u_relative


@pytest.mark.parametrize("subject", SUBJECTS)
def test_our_interval_meets_what_was_seen(subject, evidence):
    rows = SUBJECTS[subject]
    value, u = ours(rows[0])
    low, high = (
        pick(float(row[end]) for row in rows) for end, pick in (("low", min), ("high", max))
    )
    # the sources truly differ, and our value lies among them
    assert high / low > 1.05
    assert low <= value <= high
    for row in rows:
        evidence.beside(
            f"sources_{row['table']}",
            subject,
            (float(row["low"]), float(row["high"])),
            value,
            u,
            source=row["source"],
            provenance=row["provenance"],
            unit="W/(m K)" if row["table"] == "lagging" else "",
        )
