"""Kinds of damage: forward models against other solutions, posteriors against their own samples."""

import math
from dataclasses import replace

import numpy as np
import pytest
from tests.inverse.conftest import Bench

from cladwatt.inverse.hidden_side import top_angle
from cladwatt.inverse.joint import STATES
from cladwatt.inverse.kind_families import View, _along, show
from cladwatt.inverse.kind_features import Features, features_of
from cladwatt.inverse.kind_levels import read_off, surface_levels
from cladwatt.inverse.kinds import (
    EDGE_KERNEL,
    LENGTH_KERNEL,
    RISE_KERNEL,
    SHAPE_KERNEL,
    local_prior,
    posterior,
    region_kinds,
)
from cladwatt.inverse.local_damage import PRIOR_LOCAL
from cladwatt.materials.damage_kinds import WHOLE_KINDS
from cladwatt.materials.load import shipped_tables
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.lagged_pipe import LaggingLayer, solve_lagged_pipe

KINDS = shipped_tables().damage_kinds
LOCAL = {name: kind for name, kind in KINDS.items() if name not in WHOLE_KINDS}
PRIORS = {name: kind.prior for name, kind in LOCAL.items()}
SAMPLES = 3000


def levels_of(bench, count):
    """What worse lagging shows on a sound pipe, each draw several times."""
    observed = bench.observe(bench.lens(float(bench.sound.surface_temperature)))
    balance = observed.balance
    levels = surface_levels(observed.seen, balance.base, balance.sound_at)
    return levels.take(np.arange(count) % levels.inside.size)


def view_of(**changes):
    fields = {
        "band_angle": np.radians([-40.0, -19.0, 0.0, 19.0, 40.0]), "top": -math.pi / 2,
        "spread_length": 0.05, "diameter": 0.234, "pipe_diameter": 0.1143,
        "station_length": 0.005,
    } | changes  # fmt: skip
    return View(**fields)


def shown_by_all(levels, view, seed):
    return {name: show(kind, levels, view, seed, SAMPLES) for name, kind in LOCAL.items()}


def test_priors_are_those_of_the_estimates_that_weigh_them():
    assert local_prior(KINDS) == pytest.approx(PRIOR_LOCAL)
    aged = sum(state.prior for state in STATES if state.aged)
    assert KINDS["aged"].prior == pytest.approx((1 - PRIOR_LOCAL) * aged)
    assert sum(kind.prior for kind in KINDS.values()) == pytest.approx(1.0)


@pytest.mark.parametrize("factor", [1.5, 3.0, 8.0])
def test_worse_lagging_shows_what_the_pipe_solved_with_it_shows(bench, factor):
    # against the pipe solved as a whole and imaged by the measurement equation; the median, since
    # each draw's sound level holds its own unevenness around the pipe
    levels = levels_of(bench, bench.count)
    worse = bench.solved(factor * bench.line.installation_factor.value)
    images = [bench.lens(float(one.surface_temperature))[48, 100] for one in (bench.sound, worse)]
    found = np.median(levels.rise_with(np.full(bench.count, 1 / factor)))
    assert found == pytest.approx(images[1] - images[0], rel=0.025)


def test_wet_lagging_is_dry_above_boiling(bench):
    # against conduction solved with a conductivity that jumps at 100 °C
    factor, installed = 5.0, bench.line.installation_factor.value
    wool = bench.line.layers[0]
    dry = wool.conductivity.conductivity[0]
    curve = ConductivityIntegral(
        np.array([250.0, 373.14, 373.16, 600.0]), dry * np.array([factor, factor, 1.0, 1.0])
    )
    wet = solve_lagged_pipe(
        bench.line.inside_temperature.value, bench.line.pipe_outside_diameter.value,
        [LaggingLayer(curve, wool.thickness.value, installed)], bench.exchange,
    )  # fmt: skip
    images = [bench.lens(float(one.surface_temperature))[48, 100] for one in (bench.sound, wet)]
    levels = levels_of(bench, bench.count)
    found = np.median(levels.rise_wet(np.full(bench.count, factor)))
    assert found == pytest.approx(images[1] - images[0], rel=0.025)
    assert found < 0.8 * np.median(levels.rise_with(np.full(bench.count, 1 / factor)))


@pytest.mark.parametrize("length", [0.02, 0.1, 0.6])
def test_a_stretch_spread_by_the_sheet_against_convolution(length):
    spread, step = 0.06, 2e-4
    x = np.arange(-1.5, 1.5, step)
    kernel = np.exp(-np.abs(x) / spread)
    profile = np.convolve(np.abs(x) <= length / 2, kernel / kernel.sum(), mode="same")
    wide = (profile > profile.max() / 2).sum() * step
    reached, half = _along(np.array([length]), np.array([spread]), 1e-6)
    assert reached[0] == pytest.approx(profile.max(), rel=0.02)
    assert half[0] == pytest.approx(wide, rel=0.02)


def test_reading_off_row_by_row():
    x = np.array([[0.0, 1.0, 3.0], [0.0, 2.0, 4.0]])
    y = np.array([[0.0, 10.0, 30.0], [1.0, 1.0, 2.0]])
    assert read_off(x, y, np.array([2.0, 5.0])).tolist() == [20.0, 2.0]


def test_upper_side_lies_where_the_frame_says(bench):
    seen = bench.observe(bench.lens(320.0)).seen
    # rows grow downwards, and across points downwards along a line drawn to the right
    assert top_angle(seen) == pytest.approx(-math.pi / 2)
    upside_down = replace(seen, conditions=replace(seen.conditions, roll_deg=180.0))
    assert top_angle(upside_down) == pytest.approx(math.pi / 2)
    sideways = replace(seen, conditions=replace(seen.conditions, roll_deg=90.0))
    assert top_angle(sideways) is None


def drawn_features(shown, index, random):
    """One sample as it would be seen, with the scatter that the kernels stand for."""

    def scattered(value, kernel):
        return float(value * np.exp(kernel * random.standard_normal()))

    noise = SHAPE_KERNEL * random.standard_normal(shown.shape.shape[1])
    return Features(
        rise=scattered(shown.rise[index], RISE_KERNEL), rise_u=0.0,
        shape=shown.shape[index] + noise, shape_u=0.0,
        length=scattered(shown.length[index], LENGTH_KERNEL), length_u=0.0,
        edge=scattered(shown.edge[index], EDGE_KERNEL), edge_u=0.0, cut=False,
    )  # fmt: skip


@pytest.fixture(scope="module")
def simulated():
    """Posteriors of damage drawn from prior and families, by other samples than those weighed."""
    bench = Bench(count=400)
    levels = levels_of(bench, SAMPLES)
    weighed = shown_by_all(levels, view_of(), seed=1)
    others = shown_by_all(levels, view_of(), seed=2)
    random = np.random.default_rng(5)
    names = list(PRIORS)
    weights = np.array(list(PRIORS.values()))
    cases = []
    while len(cases) < 600:
        true = names[random.choice(len(names), p=weights / weights.sum())]
        index = int(random.integers(SAMPLES))
        if others[true].rise[index] < 0.5:
            continue
        found = drawn_features(others[true], index, random)
        cases.append((true, posterior(found, weighed, PRIORS)))
    return cases


def test_probabilities_hold_on_samples_of_the_families(simulated):
    tops = np.array([kinds[0][1] for _, kinds in simulated])
    right = np.array([kinds[0][0] == true for true, kinds in simulated])
    # four standard errors of a binomial share
    allowed = 4 * math.sqrt(float(np.mean(tops * (1 - tops))) / tops.size)
    assert abs(float(right.mean() - tops.mean())) < allowed
    for low, high in ((0.0, 0.6), (0.6, 1.01)):
        part = (tops >= low) & (tops < high)
        said, so, number = tops[part].mean(), right[part].mean(), part.sum()
        assert abs(said - so) < 4 * math.sqrt(said * (1 - said) / number), (low, said, so)


def test_features_tell_more_than_the_prior(simulated):
    total = sum(PRIORS.values())
    present = [true for true, _ in simulated]
    shares = {name: present.count(name) / len(present) for name in PRIORS}
    # beaten is the best constant forecast for just these cases, not only the table's prior
    constant = -np.mean([math.log(shares[true]) for true in present])
    prior = -np.mean([math.log(PRIORS[true] / total) for true in present])
    found = -np.mean([math.log(dict(kinds)[true]) for true, kinds in simulated])
    assert found < 0.8 * min(constant, prior)


@pytest.mark.parametrize("kind", list(LOCAL))
def test_each_kind_gains_where_it_is_the_truth(simulated, kind):
    gained = [dict(kinds)[kind] for true, kinds in simulated if true == kind]
    lost = [dict(kinds)[kind] for true, kinds in simulated if true != kind]
    assert len(gained) >= 10
    assert np.mean(gained) > 1.5 * np.mean(lost)


def stretch_image(bench, surface, *, columns=slice(120, 165)):
    profile = np.full(280, float(bench.sound.surface_temperature))
    profile[columns] = surface
    return bench.lens(profile)


def bare_image(bench):
    """The pipe itself in a gap of the lagging, background beside it."""
    lens = bench.lens(float(bench.sound.surface_temperature))
    pipe = bench.lens(bench.line.inside_temperature.value - 1.0, emissivity=0.85)
    half = 24.0 * 0.1143 / bench.line.lagged_diameter
    rows = np.abs(np.arange(96) - 48.0)
    lens[:, 120:165] = np.where((rows <= half)[:, None], pipe, lens[2, 2])[:, 120:165]
    return lens


def test_a_bare_pipe_is_told(bench):
    result = bench.jointly(bare_image(bench))
    stretch = max(result.stretches, key=lambda one: one.probability)
    assert stretch.kinds[0][0] == "bare"
    assert dict(stretch.kinds)["bare"] > 0.6
    assert dict(stretch.kinds)["wet"] < 0.1


def test_wet_and_compressed_all_round_cannot_be_told_apart(bench):
    warm = float(bench.solved(3.0 * 1.15).surface_temperature)
    result = bench.jointly(stretch_image(bench, warm))
    kinds = dict(max(result.stretches, key=lambda one: one.probability).kinds)
    assert kinds["wet"] > 0.15
    assert kinds["compressed"] > 0.15
    assert max(kinds.values()) < 0.8
    assert kinds["bare"] + kinds["missing_sector"] < 0.1


def test_probabilities_of_a_region_add_up_and_keep_their_masses(bench):
    warm = float(bench.solved(3.0 * 1.15).surface_temperature)
    for lens in (stretch_image(bench, warm), bench.lens(float(bench.sound.surface_temperature))):
        result = bench.jointly(lens)
        kinds = dict(result.kinds)
        assert sum(kinds.values()) == pytest.approx(1.0)
        assert kinds["aged"] == pytest.approx(result.probability_aged)
        local = sum(p for name, p in kinds.items() if name not in WHOLE_KINDS)
        assert local == pytest.approx(result.probability_local)
        for stretch in result.stretches:
            assert sum(p for _, p in stretch.kinds) == pytest.approx(1.0)


def test_the_same_image_gives_the_same_probabilities(bench):
    image = bare_image(bench)
    assert bench.jointly(image).kinds == bench.jointly(image).kinds


def test_without_an_inside_temperature_length_and_side_still_tell(bench, line_with):
    unknown = bench.but(line=line_with(inside_temperature=None))
    warm = float(bench.solved(3.0 * 1.15).surface_temperature)
    observed = unknown.observe(stretch_image(bench, warm))
    weighed = region_kinds(observed.seen, observed.balance, 0.05, KINDS)
    assert len(weighed.runs) == 1
    kinds = dict(weighed.runs[0])
    assert sum(kinds.values()) == pytest.approx(1.0)
    # as long as a hand's breadth: no joint
    assert kinds["open_joint"] < PRIORS["open_joint"] / sum(PRIORS.values())


def test_a_changed_prior_changes_the_answer_by_its_ratio(bench):
    warm = float(bench.solved(3.0 * 1.15).surface_temperature)
    observed = bench.observe(stretch_image(bench, warm))
    doubled = KINDS | {"wet": replace(KINDS["wet"], prior=2 * KINDS["wet"].prior)}
    before, after = (
        dict(region_kinds(observed.seen, observed.balance, 0.05, kinds).runs[0])
        for kinds in (KINDS, doubled)
    )
    odds = [kinds["wet"] / kinds["compressed"] for kinds in (before, after)]
    assert odds[1] == pytest.approx(2 * odds[0])


def test_chilled_lines_are_weighed_towards_the_fluid(chilled):
    cold = float(chilled.solved(3.0 * 1.15).surface_temperature)
    observed = chilled.observe(stretch_image(chilled, cold))
    balance = observed.balance
    assert balance.runs
    bands = np.ones(5, dtype=bool)
    found = features_of(
        observed.seen, balance.runs[0], balance.sound_at, balance.null, bands, balance.searched
    )
    assert found.rise > 0
    assert found.shape.max() == 1
    assert dict(region_kinds(observed.seen, balance, 0.05, KINDS).runs[0])["bare"] < 0.1
