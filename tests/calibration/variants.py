"""Runs in which something is otherwise than in the main one."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from tests.calibration.oracle import with_true_inputs

from cladwatt.physics.convection import ConvectionModel
from cladwatt.survey.survey import Survey
from cladwatt.synthetic.sample import SampleOptions

__all__ = ["ORACLE", "PLAIN", "VARIANTS", "WRONG_LAW", "Variant"]

PLAIN, ORACLE = "plain", "oracle"
WRONG_LAW: ConvectionModel = "kuehn_goldstein_whitaker"
"""Of the laws that hold in still air and in wind the one furthest from the generator's: less by an
eighth in still air, more by a tenth in light wind."""
_AS_USUAL = SampleOptions()


def _as_declared(survey: Survey, _truth: dict[str, Any]) -> Survey:
    return survey


def _by_another_law(survey: Survey, _truth: dict[str, Any]) -> Survey:
    return replace(survey, convection_model=WRONG_LAW)


@dataclass(frozen=True)
class Variant:
    """What a run draws and what the estimator is given of it."""

    words: str
    seeds: range
    """If none are asked for."""
    options: SampleOptions = _AS_USUAL
    given: Callable[[Survey, dict[str, Any]], Survey] = _as_declared
    """From the declared survey and its truth."""


VARIANTS: dict[str, Variant] = {
    PLAIN: Variant("as above", range(5000, 5060)),
    ORACLE: Variant("every declared input true", range(5000, 5020), given=with_true_inputs),
    "wrong-law": Variant(
        f"assessed by another convection law ({WRONG_LAW})", range(5000, 5012),
        given=_by_another_law,
    ),
    "half-damaged": Variant(
        "half as many damaged pipes in the ordinary frames",
        range(6000, 6012), SampleOptions(damaged=0.5)
    ),
    "twice-damaged": Variant(
        "twice as many damaged pipes in the ordinary frames",
        range(6100, 6112), SampleOptions(damaged=2.0)
    ),
}  # fmt: skip
