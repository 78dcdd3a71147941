"""The joint estimate of a region against the exact posterior by importance sampling.

The exact posterior weighs the image's own draws by the mixture of what lagging may have done,
with nothing linear or Gaussian assumed of them.
"""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.conclude import conclude
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.joint import STATES, LevelEvidence, joint_update
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera

CLADDINGS = {
    "painted": (0.92, 0.03, False),
    "weathered": (0.50, 0.08, True),
    "bright": (0.12, 0.03, True),
}


def uncertain(bench, line_with, hall_with, paint, name, count, seed):
    """The bench's line with everything as uncertain as surveys declare it."""
    emissivity, u, metal = CLADDINGS[name]
    cladding = paint(
        emissivity, u, total_emissivity=Quantity(emissivity, u, lower=0.01, upper=0.99),
        is_metal=metal,
    )  # fmt: skip
    layer = replace(bench.line.layers[0], conductivity_factor=Quantity(1.0, 0.05, lower=0.1))
    return bench.but(
        line=line_with(
            cladding=cladding,
            layers=(layer,),
            inside_temperature=Quantity(453.15, 2.0),
            installation_factor=Quantity(1.15, 0.08, lower=0.9),
        ),
        conditions=hall_with(
            air_temperature=Quantity(293.15, 0.8),
            surroundings_temperature=Quantity(295.15, 1.5),
            reflected_temperature=Quantity(296.15, 1.5),
        ),
        camera=Camera(field_of_view_deg=30.0, accuracy=AccuracyStatement(2.0, 2.0)),
        law_exact=False,
        count=count,
        seed=seed,
    )


def exact(observed) -> np.ndarray:
    """Percentiles of the loss over the exact posterior."""
    seen, balance = observed.seen, observed.balance
    ratio = seen.perimeter * balance.base / balance.sound.heat_loss - 1
    loss = seen.perimeter * balance.bounds.applied(seen.mean_along(balance.flux))
    weights = sum(
        state.prior / state.sigma * np.exp(-0.5 * ((ratio - state.mean) / state.sigma) ** 2)
        for state in STATES
    )
    order = np.argsort(loss)
    share = np.cumsum(weights[order]) / np.sum(weights)
    return loss[order][np.searchsorted(share, [0.025, 0.5, 0.975])]


@pytest.mark.parametrize("name", CLADDINGS)
@pytest.mark.parametrize("offset", [-2.0, 0.0, 2.0])
def test_joint_loss_is_the_exact_posteriors(bench, line_with, hall_with, paint, name, offset):
    """A sound pipe, seen rightly or through a camera off by its limit of error."""
    many = uncertain(bench, line_with, hall_with, paint, name, 12000, 5)
    lens = many.lens(many.sound.surface_temperature) + offset
    expected = exact(many.observe(lens))
    found = uncertain(bench, line_with, hall_with, paint, name, 2000, 9).jointly(lens).heat_loss
    # a linear update; on bright cladding the image's draws are far from Gaussian
    share = 0.2 if name == "bright" else 0.12
    width = expected[2] - expected[0]
    for value, exactly in zip((found.low, found.median, found.high), expected, strict=True):
        assert value == pytest.approx(exactly, abs=share * width)


def test_bright_cladding_falls_back_on_the_specification(bench, line_with, hall_with, paint):
    """An image that says next to nothing must not drag the loss to nothing."""
    bright = uncertain(bench, line_with, hall_with, paint, "bright", 1000, 3)
    bright = bright.but(
        conditions=replace(bright.conditions, reflected_temperature=Quantity(296.15, 8.0))
    )
    result = bright.jointly(bright.lens(bright.sound.surface_temperature))
    assert result.image_loss.low == pytest.approx(0.0, abs=1e-9)
    assert result.heat_loss.low > 0.6 * float(bright.sound.heat_loss)
    assert result.heat_loss.median == pytest.approx(float(bright.sound.heat_loss), rel=0.1)


def test_lagging_wet_throughout_is_damaged_though_nothing_stands_out(bench):
    sharp = bench.but(law_exact=False)
    wet = sharp.solved(5 * sharp.line.installation_factor.value)
    result = sharp.jointly(sharp.lens(wet.surface_temperature))
    assert result.probability_local < 0.05
    assert result.probability_damaged > 0.9
    assert result.heat_loss.low <= float(wet.heat_loss) <= result.heat_loss.high


def test_far_tails_do_not_drown_what_most_draws_say():
    book = DrawBook(1, 2000)
    level = 0.9 + 0.1 * book.normal("r", "own")
    tail = np.where(np.arange(2000) % 100 == 0, 60.0, level)
    (clean,) = joint_update([LevelEvidence("r", level)], book, "f")
    (update,) = joint_update([LevelEvidence("r", tail)], book, "f")
    assert update.aged["r"] == pytest.approx(clean.aged["r"], abs=0.01)


def test_order_of_regions_does_not_matter():
    book = DrawBook(2, 300)
    shared = 0.2 * book.normal("all", "shared")
    evidence = [
        LevelEvidence(f"r{number}", 0.05 * number + shared + 0.1 * book.normal(f"r{number}", "own"))
        for number in range(7)
    ]
    forwards, backwards = (
        joint_update(ordered, book, "f") for ordered in (evidence, evidence[::-1])
    )
    moved = [shared, shared]
    for pair in zip(forwards, backwards, strict=True):
        moved = [update.apply(values) for update, values in zip(pair, moved, strict=True)]
    assert np.array_equal(*moved)


def test_sound_loss_that_may_have_either_sign_stays_near_itself(bench, line_with):
    """A line about as warm as the air, beside one that moves the frame's draws."""
    warm = bench.but(law_exact=False)
    beside = warm.observe(warm.lens(warm.sound.surface_temperature + 4))
    lukewarm = warm.but(line=line_with(inside_temperature=Quantity(294.15, 1.0)))
    observed = lukewarm.observe(lukewarm.lens(294.0))
    assert observed.evidence() is None
    updates = joint_update([beside.evidence()], warm.book, "f1")
    before, after = (conclude(observed, updates).sound_loss for updates in ((), updates))
    assert after.low < 0 < after.high
    assert after.median == pytest.approx(before.median, abs=0.2 * (before.high - before.low))


def test_resistance_has_no_upper_end_where_the_loss_may_be_nothing(
    bench, line_with, hall_with, paint
):
    bright = uncertain(bench, line_with, hall_with, paint, "bright", 1000, 3)
    result = bright.alone(bright.lens(bright.sound.surface_temperature))
    assert result.heat_loss.low == pytest.approx(0.0, abs=1e-9)
    assert np.isinf(result.resistance.high)


def test_draws_without_radiance_at_one_place_still_tell_of_the_rest(
    bench, line_with, hall_with, paint
):
    """A cold sky mirrored at one end leaves some draws nothing there; not along the whole pipe."""
    bright = uncertain(bench, line_with, hall_with, paint, "bright", 1000, 3)
    lens = bright.lens(bright.sound.surface_temperature)
    lens[:, 240:] -= 25.0
    drawn = bright.observe(lens).seen.drawn
    dark = np.isnan(drawn.surface_temperature)
    assert dark[:, 5:200].any(axis=1).mean() < 0.8 * dark[:, -5:].any(axis=1).mean()
    assert np.isfinite(drawn.heat_flux).all()


def test_a_region_darker_than_possible_in_every_draw_ends_in_no_number(bench, paint):
    """Nothing uncertain, less radiance than the mirrored scene alone: no number, no warning."""
    dark = bench.but(line=replace(bench.line, cladding=paint(0.1, is_metal=True)), law_exact=False)
    observed = dark.observe(np.full((96, 280), 270.0))
    beside = bench.but(law_exact=False)
    evidence = beside.observe(beside.lens(beside.sound.surface_temperature + 2)).evidence()
    result = conclude(observed, joint_update([evidence], dark.book, "f1"))
    assert result.verdict.level == "not quantified"
    assert result.verdict.reason.key == "not_quantified.infeasible"
    assert np.isfinite(result.surface_temperature.high)
