"""Draws against JCGM 101, the published supplement on propagating distributions."""

import csv
from pathlib import Path

import numpy as np
import pytest

from cladwatt.inverse.draws import DrawBook
from cladwatt.quantities import Quantity

TABLE = Path(__file__).parents[1] / "published/jcgm101_examples.csv"
EXAMPLES = list(csv.DictReader(TABLE.read_text(encoding="utf-8").splitlines()))
COUNT = 200_000


def drawn(example: dict[str, str]) -> np.ndarray:
    book = DrawBook(seed=3, count=COUNT)
    centre = float(example["centre"])
    inputs = [
        book.quantity(
            example["id"], f"x{i}", Quantity(centre * (i == 0), float(u), shape=example["shape"])
        )
        for i, u in enumerate(example["u"].split(";"))
    ]
    if example["input"] == "sum of squares":
        return inputs[0] ** 2 + inputs[1] ** 2
    return np.sum(inputs, axis=0)


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example["id"])
def test_propagation_reproduces_jcgm_101(example, evidence):
    # half a unit of the last printed digit, plus three standard errors of this many draws
    y = drawn(example)
    u = float(example["standard_uncertainty"])
    error = 3 * u / np.sqrt(COUNT)
    check = "jcgm_101_" + example["id"].split()[0].replace(".", "_")
    mean = float(example["mean"])
    evidence(check, "mean", y.mean(), mean, abs=0.005 * u + error, scale=u)
    evidence(check, "standard uncertainty", y.std(), u, rel=0.006)
    if example["low_95"]:
        low, high = np.percentile(y, [2.5, 97.5])
        digit = 0.05 if abs(float(example["high_95"])) > 10 else 0.005
        for what, found in (("low_95", low), ("high_95", high)):
            printed = float(example[what])
            evidence(check, what.replace("_", " "), found, printed, abs=digit + 6 * error)


def test_same_key_same_draws_whatever_was_asked_before():
    first, second = DrawBook(5, 400), DrawBook(5, 400)
    second.normal("frame:f9", "wind_speed")
    assert np.array_equal(first.normal("line:A", "x"), second.normal("line:A", "x"))


@pytest.mark.parametrize(
    "other", [("line:B", "x", 5), ("line:A", "y", 5), ("line:A", "x", 6)], ids=str
)
def test_other_keys_are_independent(other):
    owner, name, seed = other
    one = DrawBook(5, 4000).normal("line:A", "x")
    two = DrawBook(seed, 4000).normal(owner, name)
    assert abs(np.corrcoef(one, two)[0, 1]) < 4 / np.sqrt(4000)


def test_stratified_draws_hold_one_per_slice():
    from scipy.special import ndtr

    slices = np.floor(ndtr(DrawBook(1, 500).normal("a", "b")) * 500).astype(int)
    assert sorted(slices) == list(range(500))


@pytest.mark.parametrize("shape", ["normal", "rectangular", "lognormal"])
def test_bounds_cut_and_do_not_pile_up(shape):
    quantity = Quantity(0.93, 0.1, lower=0.5, upper=0.99, shape=shape)
    draws = DrawBook(1, 20_000).quantity("a", "b", quantity)
    assert draws.min() >= 0.5
    assert draws.max() <= 0.99
    assert np.mean(draws > 0.989) < 0.05


def test_lognormal_has_its_median_and_sigma():
    draws = DrawBook(1, 20_000).quantity("a", "b", Quantity(2.0, 0.5, shape="lognormal"))
    assert np.median(draws) == pytest.approx(2.0, rel=0.002)
    assert np.log(draws).std() == pytest.approx(0.25, rel=0.01)


def test_parts_of_a_mixed_error_are_shared_as_declared():
    book = DrawBook(1, 50_000)
    one = book.mixed("calibration", ("camera", 0.6), ("frame:a", 0.4))
    two = book.mixed("calibration", ("camera", 0.6), ("frame:b", 0.4))
    assert one.std() == pytest.approx(1.0, abs=0.01)
    assert np.corrcoef(one, two)[0, 1] == pytest.approx(0.6, abs=0.02)


def test_exact_quantity_has_no_spread():
    assert np.ptp(DrawBook(1, 10).quantity("a", "b", Quantity(3.0))) == 0
