"""What a measurement promises, against Gaussian conditioning in closed form and a second look."""

import math
from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.advice import Measurement, best_measurement, measurements_of, width_after
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.result import interval_of
from cladwatt.quantities import Quantity

FACTORS = {"air": 3.0, "wind": 2.0, "rest": 1.0}


def linear(count: int = 4000):
    book = DrawBook(11, count)
    drivers = {name: book.normal("test", name) for name in FACTORS}
    return 50 + sum(FACTORS[name] * drivers[name] for name in FACTORS), drivers


@pytest.mark.parametrize("u", [0.02, 0.2, 0.5, 1.0, 3.0])
@pytest.mark.parametrize("name", ["air", "wind"])
def test_width_is_that_of_gaussian_conditioning(name, u):
    # var(y | z) = var(y) - cov(y, x)^2 / (var(x) + u^2)
    loss, drivers = linear()
    left = sum(f**2 for f in FACTORS.values()) - FACTORS[name] ** 2 / (1 + u**2)
    expected = 1.96 * math.sqrt(left) / 50
    found = width_after(loss, Measurement("x", drivers[name], u))
    assert found == pytest.approx(expected, rel=0.06)


def test_a_reading_of_two_things_knows_what_they_share():
    # the sum of two errors is read: what it leaves is less than either alone tells
    loss, drivers = linear()
    both = 3 * drivers["air"] + 2 * drivers["wind"]
    found = width_after(loss, Measurement("x", both, 0.01))
    assert found == pytest.approx(1.96 / 50, rel=0.08)


def test_on_a_bent_loss_the_promise_is_the_mean_over_readings():
    # loss exp(s x): its width at a reading follows the reading; closed form by the lognormal
    x = DrawBook(5, 8000).normal("test", "x")
    s, u = 0.3, 0.3
    left = s * u / math.hypot(1, u)
    expected = math.sinh(1.96 * left)
    found = width_after(np.exp(s * x), Measurement("x", x, u))
    assert found == pytest.approx(expected, rel=0.06)


def test_the_best_is_chosen_with_the_widths_it_promises():
    loss, drivers = linear()
    choice = [Measurement(f"advice.{name}", values, 0.2) for name, values in drivers.items()]
    advice = best_measurement(loss, choice)
    assert advice is not None
    assert advice.key == "advice.air"
    promised = dict(advice.parameters)
    assert promised["width_now"] == pytest.approx(196 * math.sqrt(14) / 50, rel=0.03)
    assert promised["width_then"] < promised["width_now"]


def test_nothing_is_advised_where_nothing_narrows_by_a_tenth():
    loss, drivers = linear()
    other = DrawBook(12, loss.size).normal("test", "other")
    for weak in (Measurement("a", drivers["rest"], 0.1), Measurement("b", other, 0.1)):
        assert best_measurement(loss, [weak]) is None
    exact = Measurement("c", np.full(loss.size, 3.0), 0.1)
    assert best_measurement(loss, [exact]) is None
    assert best_measurement(None, [Measurement("d", drivers["air"], 0.1)]) is None
    assert best_measurement(loss, []) is None


def test_draws_without_a_number_are_left_out():
    loss, drivers = linear()
    whole = width_after(loss, Measurement("x", drivers["air"], 0.5))
    loss[::9] = np.nan
    assert width_after(loss, Measurement("x", drivers["air"], 0.5)) == pytest.approx(
        whole, rel=0.05
    )


def offered(bench, surface: float):
    observed = bench.observe(bench.lens(surface))
    seen = observed.seen
    found = measurements_of(seen, observed.balance.sound, lambda values: values)
    return seen, {one.key.removeprefix("advice."): one for one in found}


def test_tape_and_probe_need_ten_kelvin_to_what_is_mirrored(bench, paint, line_with):
    # ISO 18434-1, ASTM E1933: at least 10 K between surface and reflected temperature
    doubtful = bench.but(line=line_with(cladding=paint(0.3, 0.1)))
    for surface, named in ((310.0, True), (303.0, False)):
        _, found = offered(doubtful, surface)
        assert ("tape_patch" in found) == named
        assert ("contact_temperature" in found) == named


def test_the_reading_of_tape_follows_the_surface_and_what_is_mirrored(bench, paint, line_with):
    doubtful = bench.but(line=line_with(cladding=paint(0.3, 0.05)))
    seen, found = offered(doubtful, 330.0)
    surface = seen.drawn.surface_temperature[:, seen.usable].mean(axis=1)
    slope = np.polyfit(surface, found["tape_patch"].reading, 1)[0]
    # at 0.95 and 98 % through air the tape shows nearly the whole of the surface's change
    assert 0.85 < slope < 1.0
    assert 0.2 < found["tape_patch"].u < 2.0


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_a_better_air_temperature_keeps_its_promise(bench, hall_with, seed):
    # the same pipe looked at again with the air temperature measured: what was promised comes
    vague = hall_with(
        air_temperature=Quantity(293.15, 3.0),
        surroundings_temperature=Quantity(295.15, 1.0),
        wind_speed=Quantity(0.2, 0.05),
    )
    one = bench.but(conditions=vague, seed=seed, count=1000)
    image = one.lens(one.sound.surface_temperature)
    before = one.alone(image)
    assert before.verdict.advice is not None
    assert before.verdict.advice.key == "advice.air_temperature"
    promised = dict(before.verdict.advice.parameters)
    assert promised["width_now"] == pytest.approx(50 * before.heat_loss.relative_width, rel=0.02)
    measured = replace(vague, air_temperature=Quantity(293.15, 0.3))
    after = one.but(conditions=measured).alone(image)
    width = 50 * interval_of(after.draws["heat_loss"]).relative_width
    assert promised["width_then"] == pytest.approx(width, rel=0.2)
