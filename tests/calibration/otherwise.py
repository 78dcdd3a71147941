"""The runs in which things are otherwise, beside the main one."""

from collections.abc import Mapping, Sequence

import numpy as np
from tests.calibration.cases import Case, Columns, columns_of
from tests.calibration.counting import percentile_band, resamples
from tests.calibration.measures import MEASURES
from tests.calibration.surveys import SurveyCases
from tests.calibration.tables import Table
from tests.calibration.variants import ORACLE, PLAIN, VARIANTS
from tests.calibration.wording import shown

__all__ = ["cases_of", "otherwise_table"]

RESAMPLES = 400
_COLUMNS: dict[str, tuple[str, bool]] = {
    "inside 95 %": ("coverage_95", False),
    "error": ("error", False),
    "width": ("width", False),
    "false alarms": ("false_alarms", False),
    "missed": ("missed", False),
    "Brier": ("brier", False),
    "called quantified": ("quantified", False),
    "quantified: inside 95 %": ("coverage_95", True),
    "quantified: false alarms": ("false_alarms", True),
}
"""Measure, and whether of the quantified regions only."""


def cases_of(runs: Sequence[SurveyCases]) -> list[Case]:
    """Return all cases of some surveys."""
    return [case for run in runs for case in run.cases]


def otherwise_table(pieces: Mapping[str, Sequence[SurveyCases]]) -> Table | None:
    """Return a line for each run, the main one first; None where there is only that.

    Where a run took surveys of the main one, the main one's numbers of just those stand before it.
    """
    rows = []
    plain = cases_of(pieces.get(PLAIN, ()))
    for name, variant in VARIANTS.items():
        cases = cases_of(pieces.get(name, ()))
        if not cases or name == ORACLE:
            continue
        seeds = {case.seed for case in cases}
        same = [case for case in plain if case.seed in seeds]
        if name != PLAIN and same and len(same) < len(plain):
            rows.append(_row("as above, the surveys of the next line", same))
        rows.append(_row(variant.words, cases))
    if not set(pieces) - {PLAIN, ORACLE}:
        return None
    return Table(
        "If things are otherwise", ["run", "surveys", "regions", "damaged", *_COLUMNS], rows,
        "Behind a number its 95 % band from resampling frames; few surveys, so wide ones. The "
        "estimator knows of none of these changes: its prior of damage stays what it is.",
    )  # fmt: skip


def _row(words: str, cases: Sequence[Case]) -> list[str]:
    columns = columns_of(cases)
    random = np.random.default_rng(1)
    samples = [columns.take(index) for index in resamples(columns["frame"], RESAMPLES, random)]
    cells = [_cell(columns, samples, *how) for how in _COLUMNS.values()]
    return [
        words, str(len(set(columns["seed"].tolist()))), str(columns.count),
        shown(float(np.mean(columns["damaged"])), "percent"), *cells,
    ]  # fmt: skip


def _cell(cases: Columns, samples: Sequence[Columns], name: str, quantified: bool) -> str:
    def chosen(some: Columns) -> Columns:
        return some.take(some["verdict"] == "quantified") if quantified else some

    measure = MEASURES[name]
    if not chosen(cases).count:
        return "–"
    band = percentile_band(np.array([measure.value(chosen(sample)) for sample in samples]))
    return shown(measure.value(chosen(cases)), measure.shown, *band)
