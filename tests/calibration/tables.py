"""The tables, as rows of text; console and page lay them out each in its own way."""

from dataclasses import dataclass

from tests.calibration.aims import judged
from tests.calibration.measures import GROUPS, LEAST_CASES, MEASURES
from tests.calibration.summary import Counted, Summary
from tests.calibration.wording import shown

__all__ = ["Table", "tables_of"]


@dataclass(frozen=True)
class Table:
    """One table of words."""

    title: str
    header: list[str]
    rows: list[list[str]]
    note: str = ""


_LOSS = {
    "coverage_95": "inside 95 %",
    "coverage_50": "inside 50 %",
    "width": "width",
    "error": "error",
    "error_to_specified": "over as specified",
    "rms_log": "RMS ln",
    "wrong_signs": "wrong signs",
}
_DAMAGE = {
    "false_alarms": "false alarms",
    "missed": "missed",
    "roc_local": "ROC local",
    "roc_aged": "ROC aged",
    "brier": "Brier",
    "quantified": "quantified",
    "wrong_by_much": "wrong > 30 %",
}
_REST = ("coverage_sound", "coverage_length", "long_overlap", "short_offset", "short_found",
         "sure_right", "wrong_not_quantified",
         "kind_log_loss", "kind_over_prior", "kind_over_thresholds", "kind_right",
         "kind_too_sure")  # fmt: skip
_BY_GROUP = {
    "sure_right": "right where P > 0.9",
    "wrong_not_quantified": "wrong > 30 %: not quantified",
    "long_overlap": "overlap of long stretches",
    "short_offset": "offset of short ones",
    "kind_over_prior": "kinds: over prior",
    "kind_over_thresholds": "over thresholds",
    "kind_too_sure": "too sure by",
}
_FEW = f"\\* fewer than {LEAST_CASES} regions: shown, not judged."


def tables_of(summary: Summary) -> list[Table]:
    """Return every table, the aims first."""
    return [
        _aims(summary),
        _by_group(
            summary, "Loss by group", _LOSS,
            f"Behind a number its 95 % band from resampling frames. {_FEW}",
        ),
        _by_group(
            summary, "Damage by group", _DAMAGE,
            "False alarms: sound regions called damaged (P > 0.5). Missed: of local damage that "
            "raises the loss by more than 25 % over more than one lagged diameter. " + _FEW,
        ),
        _verdicts(summary),
        _reliability(summary),
        _rest(summary),
        _rest_by_group(summary),
        _estimators(summary),
    ]  # fmt: skip


def _cell(counted: Counted | None, measure: str) -> str:
    if counted is None or counted.number == 0:
        return "–"
    return shown(counted.value, MEASURES[measure].shown, counted.low, counted.high)


def _aims(summary: Summary) -> Table:
    words = {True: "met", False: "short", None: "too few"}
    rows = [
        [line.words, line.aim, line.reached, str(line.number), words[line.met]]
        for line in judged(summary)
    ]
    return Table("Aims", ["what", "aim", "reached", "regions", ""], rows)


def _by_group(summary: Summary, title: str, columns: dict[str, str], note: str) -> Table:
    rows = []
    for group, (words, _) in GROUPS.items():
        first = summary.of(group, next(iter(columns)))
        if first is None:
            continue
        few = "" if first.group_size >= LEAST_CASES else "*"
        cells = [_cell(summary.of(group, measure), measure) for measure in columns]
        rows.append([words + few, str(first.group_size), *cells])
    return Table(title, ["group", "regions", *columns.values()], rows, note)


def _verdicts(summary: Summary) -> Table:
    rows = []
    for group in ("quantified", "indicative", "not quantified"):
        found = summary.of(group, "wrong_by_much")
        number = 0 if found is None else found.group_size
        share = shown(number / summary.regions, "percent")
        rows.append([group, str(number), share, _cell(found, "wrong_by_much")])
    return Table("Verdicts", ["verdict", "regions", "share", "wrong > 30 %"], rows)


def _reliability(summary: Summary) -> Table:
    rows = [
        [
            f"{tenth.start:.1f} to {tenth.end:.1f}",
            str(tenth.number),
            shown(tenth.predicted, "percent"),
            shown(tenth.observed, "percent"),
            f"{shown(tenth.low, 'percent')} to {shown(tenth.high, 'percent')}",
            ("yes" if tenth.reliable else "no") if tenth.judged else "too few",
        ]
        for tenth in summary.deciles
    ]
    header = ["P damaged", "regions", "said", "so", "binomial band", "reliable"]
    note = "Reliable: within 5 points of what was said, or within its binomial band."
    return Table("Reliability of the probability of damage", header, rows, note)


def _rest(summary: Summary) -> Table:
    rows = []
    for measure in _REST:
        cells = [_cell(summary.of(group, measure), measure) for group in ("all", "quantified")]
        found = summary.of("all", measure)
        rows.append([MEASURES[measure].words, "0" if found is None else str(found.number), *cells])
    note = "A stretch counts as found at P > 0.5; one that was not found overlaps by nothing."
    return Table("The rest", ["what", "regions", "all", "quantified"], rows, note)


def _rest_by_group(summary: Summary) -> Table:
    rows = []
    for group, (words, _) in GROUPS.items():
        first = summary.of(group, "sure_right")
        if first is None:
            continue
        few = "" if first.group_size >= LEAST_CASES else "*"
        large = [tenth for tenth in summary.deciles_by_group[group] if tenth.judged]
        mixed = any(0 < tenth.observed < 1 for tenth in summary.deciles_by_group[group])
        reliable = sum(tenth.reliable for tenth in large)
        tenths = f"{reliable} of {len(large)}" if large and mixed else "–"
        cells = [_cell(summary.of(group, measure), measure) for measure in _BY_GROUP]
        rows.append([words + few, str(first.group_size), tenths, *cells])
    header = ["group", "regions", "reliable tenths", *_BY_GROUP.values()]
    note = (
        "Reliable tenths: of those with 30 regions or more. Stretches: median intersection over "
        "union; median distance of the centre over 5 cm or 3 pixels. Kinds: log-loss over that of "
        "the prior, of thresholds on temperature; probability of the likeliest kind less how often "
        "it is true. A group of damaged regions only, or of sound ones, says nothing of tenths. "
    )
    return Table("The rest by group", header, rows, note + _FEW)


def _estimators(summary: Summary) -> Table:
    rows = [
        [
            line.words,
            str(line.regions),
            shown(line.error, "percent"),
            shown(line.error_damaged, "percent"),
            shown(line.rms_log, "plain"),
            str(line.wrong_signs),
            str(line.no_number),
            shown(line.coverage, "percent"),
            shown(line.width, "percent"),
            shown(line.false_alarms, "percent"),
            shown(line.missed, "percent"),
            shown(line.roc_local, "plain"),
        ]
        for line in summary.estimators
    ]
    header = ["estimate", "regions", "error", "on damaged", "RMS ln", "wrong signs", "no number",
              "inside 95 %", "width", "false alarms", "missed", "ROC local"]  # fmt: skip
    note = (
        "Over all regions of the surveys it was run on. RMS ln leaves out wrong signs, which are "
        "counted beside it; a region without a number counts as infinitely wrong in the median "
        "errors."
    )
    return Table("Beside it", header, rows, note)
