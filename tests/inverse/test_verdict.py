"""The verdict's thresholds, the shares of variance, and which advice goes with a verdict."""

from typing import Any

import numpy as np
import pytest

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.result import Interval
from cladwatt.inverse.verdict import (
    VerdictInputs,
    as_verdict,
    give_verdict,
    variance_shares,
)
from cladwatt.quantities import Remark


def wide(relative: float, median: float = 100.0) -> Interval:
    half = relative * abs(median) / 2
    return Interval(median, median - half, median + half)


def inputs(**changes: Any) -> VerdictInputs:
    """A painted pipe, 60 pixels wide, as good as one can wish."""
    fields: dict[str, Any] = {
        "heat_loss": wide(0.2),
        "excess": Interval(10.0, -10.0, 30.0),
        "emissivity": 0.92,
        "visible_rise_sigmas": 10.0,
        "width": 60.0,
        "spot_pixels": 3.0,
        "infeasible_share": 0.0,
        "caps": (),
        "refusals": (),
    } | changes
    return VerdictInputs(**fields)


SIGN_KNOWN = Interval(10.0, 1.0, 30.0)
CASES = {
    "good": ({}, "quantified", "quantified.image_carries"),
    "just under 40 %": ({"heat_loss": wide(0.399)}, "quantified", "quantified.image_carries"),
    "just over 40 %": ({"heat_loss": wide(0.401)}, "indicative", "indicative.interval_wide"),
    "just under 120 %": ({"heat_loss": wide(1.199)}, "indicative", "indicative.interval_wide"),
    "just over 120 %": (
        {"heat_loss": wide(1.201)}, "not quantified", "not_quantified.interval_too_wide"),
    "over 120 %, sign known": (
        {"heat_loss": wide(1.5), "excess": SIGN_KNOWN}, "indicative", "indicative.sign_known"),
    "over 120 %, negative sign known": (
        {"heat_loss": wide(1.5), "excess": Interval(-10.0, -30.0, -1.0)},
        "indicative", "indicative.sign_known"),
    "over 120 %, no excess": (
        {"heat_loss": wide(1.5), "excess": None},
        "not quantified", "not_quantified.interval_too_wide"),
    "gain": ({"heat_loss": wide(0.3, -40.0)}, "quantified", "quantified.image_carries"),
    "paint, contrast at 2": (
        {"visible_rise_sigmas": 2.01}, "quantified", "quantified.image_carries"),
    "paint, contrast below 2": (
        {"visible_rise_sigmas": 1.99}, "indicative", "indicative.contrast_too_weak"),
    "metal, contrast at 5": (
        {"visible_rise_sigmas": 5.01, "emissivity": 0.69},
        "quantified", "quantified.image_carries"),
    "metal, contrast below 5": (
        {"visible_rise_sigmas": 4.99, "emissivity": 0.69},
        "indicative", "indicative.contrast_too_weak"),
    "just 0.7 is no metal": (
        {"visible_rise_sigmas": 4.0, "emissivity": 0.7},
        "quantified", "quantified.image_carries"),
    "three spots": ({"width": 12.0}, "quantified", "quantified.image_carries"),
    "under three spots": ({"width": 11.9}, "indicative", "indicative.narrow_pipe"),
    "larger spots": (
        {"width": 19.0, "spot_pixels": 5.0}, "indicative", "indicative.narrow_pipe"),
    "three pixels": ({"width": 3.0}, "indicative", "indicative.narrow_pipe"),
    "under three pixels": ({"width": 2.9}, "not quantified", "not_quantified.too_narrow"),
    "capped": (
        {"caps": (Remark("indicative.sun"), Remark("indicative.traced"))},
        "indicative", "indicative.sun"),
    "capped and too wide": (
        {"caps": (Remark("indicative.sun"),), "heat_loss": wide(1.3)},
        "not quantified", "not_quantified.interval_too_wide"),
    "infeasible": (
        {"infeasible_share": 0.31}, "not quantified", "not_quantified.infeasible"),
    "hardly infeasible": ({"infeasible_share": 0.29}, "quantified", "quantified.image_carries"),
    "no number": (
        {"heat_loss": Interval(np.nan, np.nan, np.nan)},
        "not quantified", "not_quantified.infeasible"),
    "refused": (
        {"refusals": (Remark("not_quantified.no_diameter"),), "heat_loss": None},
        "not quantified", "not_quantified.no_diameter"),
}  # fmt: skip


@pytest.mark.parametrize(("changes", "level", "key"), CASES.values(), ids=CASES)
def test_thresholds(changes, level, key):
    found, reason = give_verdict(inputs(**changes))
    assert (found, reason.key) == (level, key)


def test_the_reason_carries_its_number():
    _, reason = give_verdict(inputs(heat_loss=wide(0.7)))
    assert dict(reason.parameters)["relative_width"] == pytest.approx(0.7)
    _, reason = give_verdict(inputs(width=8.0))
    assert dict(reason.parameters)["spots"] == pytest.approx(0.75 * 8 / 3)


def test_a_loss_of_zero_is_wide():
    assert Interval(0.0, -1.0, 1.0).relative_width == float("inf")


COEFFICIENTS = {"air_temperature": 3.0, "wind_speed": 2.0, "calibration": 1.0, "diameter": 0.0}


def linear(count: int = 4000):
    book = DrawBook(11, count)
    drivers = {name: book.normal("test", name) for name in COEFFICIENTS}
    loss = 50 + sum(factor * drivers[name] for name, factor in COEFFICIENTS.items())
    return np.asarray(loss), drivers


def test_shares_of_a_linear_model_are_its_squared_coefficients():
    loss, drivers = linear()
    shares = dict(variance_shares(loss, drivers))
    for name, factor in COEFFICIENTS.items():
        assert shares[name] == pytest.approx(factor**2 / 14, abs=0.04)
    assert [name for name, _ in variance_shares(loss, drivers)][:3] == [
        "air_temperature", "wind_speed", "calibration",
    ]  # fmt: skip
    assert sum(shares.values()) == pytest.approx(1.0, abs=0.05)


def test_shares_do_not_depend_on_scale_or_offset_of_loss_or_driver():
    loss, drivers = linear()
    moved = {name: 5 + 0.1 * values for name, values in drivers.items()}
    assert dict(variance_shares(-7 * loss + 3, moved)) == pytest.approx(
        dict(variance_shares(loss, drivers))
    )


def test_shares_leave_draws_without_a_number_out_and_exact_drivers_away():
    loss, drivers = linear()
    loss[::7] = np.nan
    drivers["emissivity"] = np.full(loss.size, 0.9)
    shares = dict(variance_shares(loss, drivers))
    assert "emissivity" not in shares
    assert shares["air_temperature"] == pytest.approx(9 / 14, abs=0.04)


def test_nothing_to_share():
    _, drivers = linear()
    assert variance_shares(np.full(4000, 3.0), drivers) == ()
    assert variance_shares(np.full(4000, np.nan), drivers) == ()


WIND = Remark("advice.wind", (("width_now", 50.0), ("width_then", 30.0)))


def test_advice_goes_with_the_verdict():
    assert as_verdict(inputs(), WIND).advice == WIND
    assert as_verdict(inputs(), None).advice is None


def test_finding_out_what_is_unknown_comes_before_any_measurement():
    advice = as_verdict(inputs(), WIND, (Remark("missing.lagging"),)).advice
    assert advice == Remark("advice.lagging_data")


@pytest.mark.parametrize(
    ("changes", "key"),
    [({"caps": (Remark("indicative.sun"),)}, "other_hour"), ({"width": 11.0}, "closer_frame")],
)
def test_without_a_measurement_that_narrows_what_lifts_the_reason_is_advised(changes, key):
    assert as_verdict(inputs(**changes), None).advice == Remark(f"advice.{key}")
    assert as_verdict(inputs(**changes), WIND).advice == WIND


def test_a_pipe_too_narrow_for_any_number_is_seen_from_closer_whatever_else_helps():
    assert as_verdict(inputs(width=2.0), WIND).advice == Remark("advice.closer_frame")


def test_shares_are_first_order_indices_of_another_library(evidence):
    from SALib.analyze import sobol as analyze
    from SALib.sample import sobol as sample

    names = ["air_temperature", "wind_speed", "calibration"]
    problem = {"num_vars": 3, "names": names, "bounds": [[0, 1]] * 3, "dists": ["norm"] * 3}

    def loss(x):
        # about linear, as a loss is in its draws, with a bend and an interaction
        return 50 + 3 * x[:, 0] + 2 * x[:, 1] - x[:, 2] + 0.3 * x[:, 0] * x[:, 1]

    taken = sample.sample(problem, 2048, seed=4)
    indices = analyze.analyze(problem, loss(taken), seed=4)
    book = DrawBook(11, 20_000)
    drivers = {name: book.normal("test", name) for name in names}
    found = dict(variance_shares(loss(np.stack(list(drivers.values()), axis=1)), drivers))
    for number, name in enumerate(names):
        evidence("salib_first_order", name, found[name], indices["S1"][number], abs=0.02, scale=1.0)
