"""What is counted: each measure turns a choice of cases into one number."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from tests.calibration.baselines import DAMAGED_ABOVE
from tests.calibration.cases import Columns
from tests.calibration.counting import (
    brier_score,
    coverage,
    relative_errors,
    relative_widths,
    rms_log_error,
    roc_area,
    wrong_signs,
)

from cladwatt.types import BoolArray, FloatArray

__all__ = [
    "AGED_ABOVE",
    "DECISION",
    "ESTIMATORS",
    "GROUPS",
    "LEAST_CASES",
    "MEASURES",
    "WRONG_ABOVE",
    "Estimator",
    "Measure",
]

DECISION = 0.5
"""A region is called damaged above this probability; fixed before anything was counted."""
WRONG_ABOVE = 0.30
"""A loss is wrong by much above this relative error."""
AGED_ABOVE = 1.25
"""Ageing throughout that a ranking has to find, found over sound loss."""
LEAST_CASES = 60
"""Groups of fewer regions are shown and not judged."""

_NAN = float("nan")


@dataclass(frozen=True)
class Measure:
    """One number of a choice of cases, and how it is shown."""

    words: str
    value: Callable[[Columns], float]
    number: Callable[[Columns], int]
    """Of the cases it rests on."""
    shown: str = "percent"
    """``percent``, ``plain`` or ``count``."""


def _mean(values: BoolArray | FloatArray) -> float:
    return float(np.mean(values)) if values.size else _NAN


def _median(values: FloatArray) -> float:
    return float(np.median(values)) if values.size else _NAN


def _all(cases: Columns) -> int:
    return cases.count


def _sound(cases: Columns) -> Columns:
    return cases.take(~cases["damaged"])


def _matters(cases: Columns) -> Columns:
    return cases.take(cases["matters"])


def _wrong(cases: Columns) -> BoolArray:
    errors = relative_errors(cases["loss"], cases["true_loss"])
    return np.asarray(errors > WRONG_ABOVE)


def _numbers(name: str) -> Callable[[Columns], FloatArray]:
    """Return the cases' finite values of a column; infinity counts as a value."""

    def values(cases: Columns) -> FloatArray:
        column = cases[name]
        return np.asarray(column[~np.isnan(column)])

    return values


def _covered(low: str, high: str, true: str) -> Callable[[Columns], float]:
    return lambda cases: coverage(cases[low], cases[high], cases[true])


def _error(cases: Columns, column: str = "loss") -> float:
    errors = relative_errors(cases[column], cases["true_loss"])
    # no number at all is as wrong as can be
    return _median(np.where(np.isnan(errors), np.inf, errors))


def _error_to_specified(cases: Columns) -> float:
    reference = _error(cases, "as_specified")
    return _error(cases) / reference if reference else _NAN


def _width(cases: Columns) -> float:
    return _median(relative_widths(cases["loss_low"], cases["loss_high"], cases["loss"]))


def _roc_local(cases: Columns) -> float:
    return roc_area(_matters(cases)["probability"], _sound(cases)["probability"])


def _aged(cases: Columns) -> Columns:
    return cases.take(cases["aged_ratio"] > AGED_ABOVE)


def _roc_aged(cases: Columns) -> float:
    return roc_area(_aged(cases)["probability"], _sound(cases)["probability"])


def _sure(cases: Columns) -> Columns:
    return cases.take(cases["probability"] > 0.9)


def _wrong_not_quantified(cases: Columns) -> float:
    wrong = cases.take(_wrong(cases))
    return _mean(wrong["verdict"] != "quantified")


def _half_of_allowed(cases: Columns) -> float:
    offsets = _numbers("short_offset")(cases)
    # infinities may stand on both sides of the middle
    if not offsets.size:
        return _NAN
    return float(np.percentile(offsets, 50, method="inverted_cdf"))


def _log_loss(cases: Columns, column: str = "kind_true") -> float:
    shares = _numbers(column)(cases)
    with np.errstate(divide="ignore"):
        return _mean(-np.log(shares))


def _kind_over(column: str) -> Callable[[Columns], float]:
    """Return the log-loss of the kinds over that of another column."""

    def value(cases: Columns) -> float:
        beside = _log_loss(cases, column)
        return _log_loss(cases) / beside if beside else _NAN

    return value


def _kinds(cases: Columns) -> int:
    return int(_numbers("kind_true")(cases).size)


MEASURES: dict[str, Measure] = {
    "coverage_95": Measure(
        "truth inside the 95 % interval", _covered("loss_low", "loss_high", "true_loss"), _all
    ),
    "coverage_50": Measure(
        "truth inside the 50 % interval", _covered("loss_q25", "loss_q75", "true_loss"), _all
    ),
    "width": Measure("median full width of the 95 % interval over the loss", _width, _all),
    "error": Measure("median error of the loss", _error, _all),
    "error_to_specified": Measure(
        "that error over the error of as specified, image unused", _error_to_specified, _all,
        "plain",
    ),
    "rms_log": Measure(
        "RMS of ln(found over true)",
        lambda cases: rms_log_error(cases["loss"], cases["true_loss"]), _all, "plain",
    ),
    "wrong_signs": Measure(
        "wrong signs",
        lambda cases: float(wrong_signs(cases["loss"], cases["true_loss"]).sum()), _all, "count",
    ),
    "false_alarms": Measure(
        "false alarms on sound regions",
        lambda cases: _mean(_sound(cases)["probability"] > DECISION),
        lambda cases: _sound(cases).count,
    ),
    "missed": Measure(
        "missed of what matters",
        lambda cases: _mean(_matters(cases)["probability"] <= DECISION),
        lambda cases: _matters(cases).count,
    ),
    "roc_local": Measure(
        "ROC area, local damage that matters against sound", _roc_local,
        lambda cases: _matters(cases).count, "plain",
    ),
    "roc_aged": Measure(
        "ROC area, aged by more than 25 % against sound", _roc_aged,
        lambda cases: _aged(cases).count, "plain",
    ),
    "brier": Measure(
        "Brier score", lambda cases: brier_score(cases["probability"], cases["damaged"]), _all,
        "plain",
    ),
    "sure_right": Measure(
        "right where P > 0.9", lambda cases: _mean(_sure(cases)["damaged"]),
        lambda cases: _sure(cases).count,
    ),
    "quantified": Measure(
        "called quantified", lambda cases: _mean(cases["verdict"] == "quantified"), _all
    ),
    "wrong_by_much": Measure(
        "wrong by more than 30 %", lambda cases: _mean(_wrong(cases)), _all
    ),
    "wrong_not_quantified": Measure(
        "of those wrong by more than 30 %, not called quantified", _wrong_not_quantified,
        lambda cases: int(_wrong(cases).sum()),
    ),
    "coverage_sound": Measure(
        "sound loss inside its 95 % interval", _covered("sound_low", "sound_high", "true_sound"),
        _all,
    ),
    "coverage_length": Measure(
        "length inside its 95 % interval", _covered("length_low", "length_high", "true_length"),
        _all,
    ),
    "long_overlap": Measure(
        "stretches that matter, longer than 0.2 m: median intersection over union",
        lambda cases: _median(_numbers("long_overlap")(cases)),
        lambda cases: _numbers("long_overlap")(cases).size, "plain",
    ),
    "short_offset": Measure(
        "shorter stretches: median distance of the centre over 5 cm or 3 pixels", _half_of_allowed,
        lambda cases: _numbers("short_offset")(cases).size, "plain",
    ),
    "kind_log_loss": Measure(
        "kinds of local damage: log-loss of the true kind", _log_loss, _kinds, "plain"
    ),
    "kind_over_prior": Measure(
        "that log-loss over the prior's", _kind_over("kind_prior"), _kinds, "plain"
    ),
    "kind_over_thresholds": Measure(
        "that log-loss over that of thresholds on temperature", _kind_over("kind_thresholds"),
        _kinds, "plain",
    ),
    "kind_right": Measure(
        "likeliest kind is the true one", lambda cases: _mean(_numbers("kind_right")(cases)), _kinds
    ),
    "kind_too_sure": Measure(
        "probability of the likeliest kind less how often it is true",
        lambda cases: _mean(_numbers("kind_top")(cases)) - _mean(_numbers("kind_right")(cases)),
        _kinds, "plain",
    ),
    "short_found": Measure(
        "shorter stretches found",
        lambda cases: _mean(np.isfinite(_numbers("short_offset")(cases))),
        lambda cases: _numbers("short_offset")(cases).size,
    ),
}  # fmt: skip


def _kind(name: str) -> Callable[[Columns], BoolArray]:
    return lambda cases: np.asarray(cases["kind"] == name)


GROUPS: dict[str, tuple[str, Callable[[Columns], BoolArray]]] = {
    "all": ("all regions", lambda c: np.ones(c.count, dtype=bool)),
    "quantified": ("quantified", lambda c: np.asarray(c["verdict"] == "quantified")),
    "indicative": ("indicative", lambda c: np.asarray(c["verdict"] == "indicative")),
    "not quantified": ("not quantified", lambda c: np.asarray(c["verdict"] == "not quantified")),
    "damaged": ("damaged", lambda c: np.asarray(c["damaged"])),
    "sound": ("sound", lambda c: ~c["damaged"]),
    "indoor": ("indoors", lambda c: np.asarray(c["indoors"])),
    "outdoor": ("outdoors", lambda c: ~c["indoors"]),
    "sun": ("in the sun", lambda c: np.asarray(c["sun"])),
    "chilled": ("chilled", lambda c: np.asarray(c["chilled"])),
    "bright": ("emissivity below 0.25", lambda c: np.asarray(c["emissivity"] < 0.25)),
    "weathered": (
        "emissivity 0.25 to 0.7",
        lambda c: np.asarray((c["emissivity"] >= 0.25) & (c["emissivity"] <= 0.7)),
    ),
    "painted": ("emissivity above 0.7", lambda c: np.asarray(c["emissivity"] > 0.7)),
    "painted indoors": (
        "indoors at emissivity above 0.7",
        lambda c: np.asarray(c["indoors"] & (c["emissivity"] > 0.7)),
    ),
    "aged": ("aged throughout", _kind("aged")),
    "soaked": ("soaked or frozen throughout, declared so", _kind("soaked")),
    "compressed": ("compressed", _kind("compressed")),
    "wet": ("wet", _kind("wet")),
    "wet_underside": ("wet underside", _kind("wet_underside")),
    "void": ("void under the cladding", _kind("void")),
    "open_joint": ("open joint", _kind("open_joint")),
    "bare": ("bare pipe", _kind("bare")),
    "missing_sector": ("missing sector", _kind("missing_sector")),
}


@dataclass(frozen=True)
class Estimator:
    """One way to a loss and a decision, by the columns it stands in."""

    words: str
    loss: str
    score: Callable[[Columns], FloatArray]
    """Larger is more damaged."""
    decision: float
    interval: tuple[str, str] | None = None
    some_seeds: bool = False
    """Was not run on every seed; counted on those where it was."""


def _ratio_to_specified(cases: Columns) -> FloatArray:
    ratio = cases["spreadsheet"] / cases["specified"]
    # where the correction gives no number nobody raises an alarm
    return np.asarray(np.where(np.isnan(ratio), -np.inf, ratio))


ESTIMATORS: dict[str, Estimator] = {
    "cladwatt": Estimator(
        "cladwatt", "loss", lambda c: np.asarray(c["probability"]), DECISION,
        ("loss_low", "loss_high"),
    ),
    "image": Estimator(
        "the image alone, specification unused", "image", lambda c: np.full(c.count, np.nan),
        DECISION, ("image_low", "image_high"),
    ),
    "as specified": Estimator(
        "as specified, image unused", "as_specified", lambda c: np.zeros(c.count), DECISION
    ),
    "spreadsheet": Estimator("spreadsheet", "spreadsheet", _ratio_to_specified, DAMAGED_ABOVE),
    "oracle": Estimator(
        "oracle: cladwatt with every declared input true", "oracle",
        # without a number it raises no alarm
        lambda c: np.nan_to_num(c["oracle_probability"], nan=0.0), DECISION,
        ("oracle_low", "oracle_high"), some_seeds=True,
    ),
}  # fmt: skip
