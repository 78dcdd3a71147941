"""A traced line's stripe and heat, against conduction solved around the lagging (`synthetic`)."""

import math
from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.seen import Seen
from cladwatt.inverse.tracer_place import band_clock_angles, place_of
from cladwatt.inverse.tracing import clear_bands
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.surface_balance import surface_heat_flux
from cladwatt.quantities import Quantity
from cladwatt.survey.model import Tracing
from cladwatt.synthetic.columns import ColumnModel
from cladwatt.synthetic.conduction_3d import solve_columns

FLUID, STEAM = 353.15, 423.15
AROUND = 48
ROWS, COLUMNS, AXIS_ROW, WIDTH = 96, 280, 48.0, 48.0


@pytest.fixture
def traced(bench, line_with, drawn_pipe):
    """80 °C under 60 mm of lagging with a steam tracer at 150 °C, drawn with its direction."""

    def build(clock, *, kind="steam", directed=True, installation=0.08, **tracing):
        known = {"temperature": Quantity(STEAM, 2.0)} if kind == "steam" else {}
        line = line_with(
            inside_temperature=Quantity(FLUID),
            installation_factor=Quantity(1.15, installation),
            tracing=Tracing(kind, clock, **(known | tracing)),
        )
        region = drawn_pipe(is_directed=directed)
        return bench.but(line=line, region=region, count=400, law_exact=False, noise=0.03)

    return build


def around(bench, clock, *, tracer=None, power=None, factor=1.0, sector=0.35):
    """Solve the lagging around: surface temperature over angle from 12 o'clock, and losses.

    A sector of the pipe under the tracer is near the steam's temperature, or takes a power; the
    lagging is as sound as the line's installation factor says, times `factor`. Returns surface
    temperature (AROUND,), loss, and loss with the tracer off. [W/m]
    """
    line = bench.line
    angle = (np.arange(AROUND) + 0.5) * 2 * np.pi / AROUND
    apart = np.angle(np.exp(1j * (angle - (clock or 0.0) / 6 * np.pi)))
    warmth = 0.8 * (np.abs(apart) < sector)
    coefficient = 300.0
    inside = np.full(AROUND, FLUID)
    if tracer is not None:
        inside = FLUID + (tracer - FLUID) * warmth
    if power is not None:
        area = warmth.sum() * 2 * np.pi / AROUND * 0.1143 / 2
        coefficient = 60.0
        inside = FLUID + power * warmth / area / coefficient
    curve = ConductivityIntegral.constant(line.installation_factor.value * 0.045)
    model = ColumnModel(
        inside_temperature=inside, inside_coefficient=coefficient, pipe_radius=0.1143 / 2,
        thickness=np.full((2, AROUND), 0.060), cell_length=1.0,
        conductivity_curve=curve.conductivity, factor=np.full((2, AROUND, 8), factor),
        sheet_conductance=line.cladding.conductivity * line.cladding.thickness.value,
        exposed=np.zeros((2, AROUND), dtype=bool), air_temperature=293.15,
    )  # fmt: skip

    def flux(surface):
        return surface_heat_flux(surface, bench.exchange)

    solution = solve_columns(model, flux)
    off = solve_columns(replace(model, inside_temperature=FLUID), flux)
    return (
        solution.surface_temperature[0],
        float(solution.heat_loss(1.0)[0]),
        float(off.heat_loss(1.0)[0]),
    )


def picture(surface, columns=slice(0, 0), other=None):
    """The camera level with the pipe, which runs to the right: 3 o'clock in the middle.

    Returns (ROWS, COLUMNS) surface temperatures; those of `columns` are `other`'s.
    """
    across = np.clip((np.arange(ROWS) - AXIS_ROW) / (WIDTH / 2), -1, 1)
    seen = np.pi / 2 + np.arcsin(across)
    angle = (np.arange(AROUND) + 0.5) * 2 * np.pi / AROUND
    image = np.repeat(np.interp(seen, angle, surface, period=2 * np.pi)[:, None], COLUMNS, axis=1)
    if other is not None:
        image[:, columns] = np.interp(seen, angle, other, period=2 * np.pi)[:, None]
    return image


def holds(interval, value):
    return interval.low <= value <= interval.high


# ---- where it lies ------------------------------------------------------------------------


def seen_of(bench) -> Seen:
    return bench.observe(bench.lens(310.0)).seen


def facing_clock(bench):
    """Hour at the middle band, some degrees off the middle of the face, and the band at 12."""
    seen = seen_of(bench)
    place = place_of(seen)._replace(angle=0.0)

    class Exact:
        def standard_normal(self, shape):
            return np.zeros(shape)

    angles = band_clock_angles(seen, place, Exact(), 1)[0]
    return float(angles[2] % (2 * np.pi)) / np.pi * 6, int(np.argmin(np.abs(angles)))


@pytest.mark.parametrize(
    ("change", "hour", "top_band"),
    [
        ({}, 3.0, 0),
        ({"direction": -1}, 9.0, 0),
        # drawn from right to left: across now points up the frame
        ({"centreline": ((260.0, AXIS_ROW), (20.0, AXIS_ROW))}, 9.0, 4),
        ({"centreline": ((260.0, AXIS_ROW), (20.0, AXIS_ROW)), "direction": -1}, 3.0, 4),
    ],
)
def test_the_hour_that_faces_the_camera(bench, drawn_pipe, change, hour, top_band):
    region = drawn_pipe(is_directed=True, **change)
    found = facing_clock(bench.but(region=region))
    assert found == (pytest.approx(hour, abs=0.15), top_band)


def test_upside_down_frame_turns_the_clock(bench, drawn_pipe, hall_with):
    # gravity up the frame: the pipe runs to the left as one stands
    turned = bench.but(
        region=drawn_pipe(is_directed=True), conditions=replace(hall_with(), roll_deg=180.0)
    )
    assert facing_clock(turned) == (pytest.approx(9.0, abs=0.15), 4)


def test_a_pipe_below_the_middle_of_the_frame_is_seen_from_above(bench):
    seen = seen_of(bench)
    tall = replace(seen, image=replace(seen.image, lens_temperature=np.full((40, 280), 300.0)))
    assert place_of(tall).elevation > 0.05
    assert abs(place_of(seen).elevation) < 0.01


def test_up_means_nothing_on_a_riser(drawn_pipe, traced):
    assert place_of(seen_of(traced(4.0))).angle == pytest.approx(4 / 6 * math.pi)
    upright = drawn_pipe(centreline=((140.0, 10.0), (140.0, 90.0)), is_directed=True)
    assert place_of(seen_of(traced(4.0).but(region=upright))).angle is None
    steep = traced(4.0)
    steep = steep.but(line=replace(steep.line, inclination_deg=75.0))
    assert place_of(seen_of(steep)).angle is None


@pytest.mark.parametrize(
    ("clock", "directed", "told"),
    [(4.0, False, True), (4.0, True, False), (6.0, False, False), (None, False, False)],
)
def test_unknown_direction_is_told_where_it_matters(traced, keys, clock, directed, told):
    found = traced(clock, directed=directed)
    remarks = keys(found.alone(found.lens(305.0)).remarks)
    assert ("remark.tracer_side_unknown" in remarks) == told


# ---- what it does to the loss -------------------------------------------------------------


@pytest.mark.parametrize("directed", [True, False])
@pytest.mark.parametrize("clock", [3.0, 4.5, 6.0, 9.0, 12.0])
def test_a_sound_line_with_steam_tracing(traced, clock, directed):
    bench = traced(clock, directed=directed)
    surface, loss, off = around(bench, clock, tracer=STEAM)
    assert loss > 1.05 * off
    result = bench.jointly(bench.lens(picture(surface)))
    assert result.stretches == ()
    assert result.probability_damaged < 0.5
    assert holds(result.heat_loss, loss)
    assert holds(result.excess, 0.0)
    # a sector of 11 % of the pipe at eight tenths of the way to the steam
    share = 0.8 * 2 * 0.35 / (2 * math.pi)
    assert holds(result.tracer_heat, share * (STEAM - 293.15) / (FLUID - 293.15) * off)
    assert holds(result.fluid_loss, (1 - share) * off)


def test_the_stripe_in_view_is_not_taken_for_the_whole(traced):
    bench = traced(3.0)
    surface, loss, _ = around(bench, 3.0, tracer=STEAM)
    plain = bench.but(line=replace(bench.line, tracing=Tracing()))
    before = plain.alone(plain.lens(picture(surface))).heat_loss.median
    after = bench.alone(bench.lens(picture(surface))).heat_loss.median
    assert before > 1.1 * loss
    assert abs(after - loss) < 0.4 * abs(before - loss)


def test_a_hidden_stripe_is_added(traced):
    bench = traced(9.0)
    surface, loss, _ = around(bench, 9.0, tracer=STEAM)
    plain = bench.but(line=replace(bench.line, tracing=Tracing()))
    before = plain.alone(plain.lens(picture(surface))).heat_loss.median
    after = bench.alone(bench.lens(picture(surface))).heat_loss.median
    assert before < 0.92 * loss
    assert before < after
    assert abs(after - loss) < abs(before - loss)


@pytest.mark.parametrize("clock", [3.0, 6.0, None])
def test_the_power_of_a_cable_is_no_loss_of_the_fluid(traced, clock):
    bench = traced(clock, kind="electric", power=Quantity(15.0, 1.0))
    surface, loss, _ = around(bench, clock, power=15.0)
    result = bench.jointly(bench.lens(picture(surface)))
    assert result.tracer_heat.median == pytest.approx(15.0, abs=0.1)
    assert holds(result.heat_loss, loss)
    assert holds(result.fluid_loss, loss - 15.0)
    assert holds(result.excess, 0.0)
    # in step: the split of every draw adds up
    drawn = result.draws
    np.testing.assert_allclose(drawn["tracer_heat"] + drawn["fluid_loss"], drawn["heat_loss"])


def test_without_clock_position_the_stripe_is_looked_for(traced):
    bench = traced(None)
    surface, loss, _ = around(bench, 3.0, tracer=STEAM)
    result = bench.jointly(bench.lens(picture(surface)))
    assert result.stretches == ()
    assert holds(result.heat_loss, loss)


@pytest.mark.parametrize("clock", [3.0, 5.0, 9.0])
def test_damage_of_a_traced_line_is_found(traced, clock):
    bench = traced(clock)
    sound, _, off = around(bench, clock, tracer=STEAM)
    wet, _, wet_off = around(bench, clock, tracer=STEAM, factor=2.5)
    image = picture(sound, slice(120, 170), wet)
    result = bench.jointly(bench.lens(image))
    (stretch,) = result.stretches
    assert stretch.probability > 0.9
    scale = float(result.stations.length[0])
    first, last = (100 * scale, 150 * scale)
    assert stretch.start.median == pytest.approx(first, abs=3 * scale)
    assert stretch.end.median == pytest.approx(last, abs=3 * scale)
    assert holds(result.excess, (wet_off - off) * 50 / 240)


def test_aged_lagging_under_a_tracer_shows_in_the_level(traced):
    bench = traced(9.0)
    surface, _, _ = around(bench, 9.0, tracer=STEAM, factor=2.2)
    result = bench.jointly(bench.lens(picture(surface)))
    assert result.probability_aged > 0.5
    assert result.verdict.level == "indicative"


def test_a_tracer_that_wanders_is_no_finding(traced):
    bench = traced(4.0)
    image = picture(around(bench, 4.0, tracer=STEAM)[0])
    for first, clock in ((60, 4.3), (120, 4.6), (180, 4.2)):
        image[:, first : first + 60] = picture(around(bench, clock, tracer=STEAM)[0])[:, :60]
    result = bench.jointly(bench.lens(image))
    assert result.probability_local < 0.5


def test_bands_beside_a_narrow_stripe_carry_the_contrast(traced):
    bench = traced(5.5)
    balance = bench.observe(bench.lens(picture(around(bench, 5.5, tracer=STEAM)[0]))).balance
    clear = clear_bands(balance.stripe)
    assert balance.stripe.usual[4] > balance.stripe.usual[0]
    assert clear.sum() >= 2
    assert not clear[4] or clear.all()


# ---- what cannot be told ------------------------------------------------------------------


@pytest.mark.parametrize(
    "tracing",
    [
        Tracing("steam", 3.0),
        Tracing("electric", 3.0),
        # colder than the fluid: off, or kept for standstill
        Tracing("steam", 3.0, temperature=Quantity(330.0, 1.0)),
    ],
)
def test_without_temperature_or_power_nothing_is_split(traced, keys, tracing):
    bench = traced(3.0)
    bench = bench.but(line=replace(bench.line, tracing=tracing))
    surface, loss, _ = around(bench, 3.0, tracer=STEAM)
    result = bench.jointly(bench.lens(picture(surface)))
    assert "missing.tracer_heat" in keys(result.missing)
    assert "remark.tracer_heat" in keys(result.remarks)
    assert (result.tracer_heat, result.fluid_loss, result.excess) == (None, None, None)
    assert result.probability_aged is None
    assert "total_excess" not in result.draws
    assert holds(result.heat_loss, loss)


def test_without_inside_temperature_nothing_is_split(traced, keys):
    bench = traced(3.0)
    bench = bench.but(line=replace(bench.line, inside_temperature=None))
    result = bench.jointly(bench.lens(305.0))
    assert "missing.tracer_heat" in keys(result.missing)
    assert result.tracer_heat is None
    assert result.heat_loss is not None


def test_beside_a_hot_tracer_more_may_leave_than_at_the_fluids_temperature(traced):
    # 25 °C inside, surface at 40 °C over a tracer at 150 °C: no contradiction
    bench = traced(3.0)
    cool = replace(bench.line, inside_temperature=Quantity(298.15))
    image = picture(np.full(AROUND, 313.15))
    assert bench.but(line=cool).observe(bench.lens(image)).balance.infeasible < 0.05
    plain = bench.but(line=replace(cool, tracing=Tracing()))
    assert plain.observe(plain.lens(image)).balance.infeasible > 0.9


def test_the_resistance_is_marked(traced, keys):
    bench = traced(3.0)
    result = bench.jointly(bench.lens(picture(around(bench, 3.0, tracer=STEAM)[0])))
    assert {"remark.traced_resistance", "remark.tracer_by_temperature"} <= keys(result.remarks)
    assert result.resistance is not None
    assert result.verdict.level != "quantified"


def test_equal_draws_are_dealt_whoever_asks(traced):
    bench = traced(4.0)
    lens = bench.lens(picture(around(bench, 4.0, tracer=STEAM)[0]))
    one, two = bench.jointly(lens), bench.jointly(lens)
    np.testing.assert_array_equal(one.draws["fluid_loss"], two.draws["fluid_loss"])
    assert "tracer" in dict(one.variance_shares)
