"""Components: the body's temperature, the length it counts as, and what both come to."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.bare import BARE_EMISSIVITY
from cladwatt.inverse.component_estimates import AREA_U, weighed
from cladwatt.inverse.components import SHAPE_U, estimate_component
from cladwatt.inverse.sound import sound_draws
from cladwatt.physics.surface_balance import surface_heat_flux
from cladwatt.quantities import Quantity

AIR = 293.15
BODY = slice(34, 62), slice(115, 145)
"""Rows and columns of a bare body; the outline drawn round it is twice as high."""


@pytest.fixture
def outline(drawn_box):
    def draw(kind="valve", **rest):
        return drawn_box("v1", "component", 110.0, 20.0, 150.0, 76.0, kind=kind, **rest)

    return draw


@pytest.fixture
def estimated(bench):
    """What comes of a lens image; the path of air takes nothing."""
    clear = replace(bench.conditions, atmosphere_transmission=Quantity(1.0))

    def estimate(lens, region, clipped=None, **changes):
        one = bench.but(conditions=replace(clear, **changes))
        return estimate_component(
            region, image=one.seen(lens, clipped), frame=one.frame_draws(),
            line=one.line_draws(), book=one.book, tables=None,
        )  # fmt: skip

    return estimate


def bare_image(bench, temperature):
    band = bench.band
    lens = np.full((96, 280), AIR)
    eps = BARE_EMISSIVITY.value
    reflected = bench.conditions.reflected_temperature.value
    radiance = eps * band.radiance(temperature) + (1 - eps) * band.radiance(reflected)
    lens[BODY] = band.temperature(radiance)
    return lens


def test_background_inside_the_outline_does_not_cool_a_bare_body(bench, outline, estimated):
    found = estimated(bare_image(bench, 420.0), outline())
    assert found.surface_temperature.median == pytest.approx(420.0, abs=0.5)


def test_a_body_colder_than_the_air_is_read_too(bench, outline):
    lens = np.full((96, 280), AIR)
    lens[BODY] = 280.0
    cold = bench.line_draws()
    cold = replace(cold, inside_temperature=np.full(bench.count, 275.0))
    found = estimate_component(
        outline(), image=bench.seen(lens), frame=bench.frame_draws(), line=cold, book=bench.book,
        tables=None,
    )  # fmt: skip
    assert 275.0 <= found.surface_temperature.median < 280.0
    assert found.heat_loss.median < 0


def test_a_lagged_box_that_fills_its_outline_is_read_whole(bench, outline, estimated):
    lens = bench.lens(315.0)
    lens[15:80, 105:156] = 312.0
    found = estimated(lens, outline(lagged=True))
    assert found.surface_temperature.median == pytest.approx(313.4, abs=0.3)


@pytest.mark.parametrize("kind", ["valve", "flange"])
def test_a_bare_body_counts_as_bare_pipe_at_the_temperature_seen(bench, outline, estimated, kind):
    found = estimated(bare_image(bench, 420.0), outline(kind))
    exchange = replace(bench.exchange, diameter=0.1143, total_emissivity=BARE_EMISSIVITY.value)
    per_metre = np.pi * 0.1143 * float(surface_heat_flux(420.0, exchange))
    # Fuel Efficiency Booklet 8: a valve counts as 1 m of bare pipe, a pair of flanges as half
    metres = {"valve": 1.0, "flange": 0.5}[kind]
    assert found.image_loss.median == pytest.approx(metres * per_metre, rel=0.06)
    # no better known than the make of the component lets it be
    assert found.image_loss.high / found.image_loss.median > np.exp(1.96 * SHAPE_U)
    low, high = sorted((found.table_loss.median, found.image_loss.median))
    assert 0.97 * low < found.heat_loss.median < 1.03 * high
    assert found.heat_loss.relative_width < found.image_loss.relative_width


def test_no_length_is_taken_from_outside_its_printed_range(bench, outline):
    big = replace(bench.line_draws(), pipe_diameter=np.full(bench.count, 0.3239))
    found = estimate_component(
        outline(), image=bench.seen(bare_image(bench, 420.0)), frame=bench.frame_draws(), line=big,
        book=bench.book, tables=None,
    )  # fmt: skip
    assert found.table_loss is None
    assert found.heat_loss == found.image_loss


def test_a_cover_is_read_off_the_image_too(bench, outline):
    lens = bench.lens(315.0)
    lens[15:80, 105:156] = 312.0
    pipe = bench.observe(bench.lens(315.0)).seen
    line, frame = bench.line_draws(), bench.frame_draws()

    def estimate(pipes, value):
        lens[15:80, 105:156] = value
        return estimate_component(
            outline(lagged=True, tag="HS-1"), image=bench.seen(lens), frame=frame, line=line,
            book=bench.book, tables=None, pipes=pipes,
        )  # fmt: skip

    sized, unsized, cool = estimate([pipe], 312.0), estimate([], 312.0), estimate([pipe], 300.0)
    per_pixel = float(np.median(pipe.diameter)) / 48.0
    # 38 px by 54 px inside the rim of the outline: the side of a drum and its ends
    side = np.pi * 38 * 54 * per_pixel**2
    over = 38 * 54 / 40 * per_pixel
    ends = np.pi / 2 * max(over**2 - float(np.median(pipe.diameter)) ** 2, 0.0)
    flux = float(surface_heat_flux(sized.surface_temperature.median, bench.exchange))
    both = np.sqrt((side + ends) * np.pi * float(np.median(pipe.diameter)) * 1.0)
    assert sized.image_loss.median == pytest.approx(both * flux, rel=0.08)
    # a second guess of the surface makes it no surer
    assert sized.image_loss.relative_width == pytest.approx(
        unsized.image_loss.relative_width, rel=0.05
    )
    assert sized.image_loss.high / sized.image_loss.median > np.exp(1.9 * AREA_U)
    # print is the same however cool the cover is; what is said is not
    assert cool.table_loss == sized.table_loss
    assert cool.heat_loss.median < 0.7 * sized.heat_loss.median


def test_two_estimates_are_weighed_by_their_variances():
    random = np.random.default_rng(3)
    one, other = random.normal(size=(2, 40000))
    table, image = 300 * np.exp(0.5 * one), 150 * np.exp(0.25 * other)
    found = weighed(table, image)
    # the inverse of variances: 4 to 1, and their sum
    assert np.log(np.median(found)) == pytest.approx(
        0.2 * np.log(300) + 0.8 * np.log(150), abs=0.01
    )
    distance = np.log(2) / np.hypot(0.5, 0.25)
    expected = max(1.0, distance) * 1 / np.sqrt(1 / 0.5**2 + 1 / 0.25**2)
    assert np.std(np.log(found)) == pytest.approx(expected, rel=0.02)
    # far apart, both stay within reach
    apart = weighed(10 * table, image)
    assert np.quantile(apart, 0.975) > 1000
    assert np.quantile(apart, 0.025) < 150


def test_weighing_keeps_signs_and_what_is_missing():
    gain = -np.linspace(10, 20, 50)
    assert (weighed(gain, 1.5 * gain) < 0).all()
    assert weighed(gain, -gain) is gain
    assert weighed(None, gain) is gain
    assert weighed(gain, None) is gain
    assert weighed(None, None) is None


@pytest.mark.parametrize(("indoors", "share"), [(True, 0.15), (False, 0.25)])
def test_a_hanger_loses_its_share_of_one_spacing(bench, outline, indoors, share):
    found = estimate_component(
        outline("pipe support"), image=bench.seen(bare_image(bench, 420.0)),
        frame=bench.frame_draws(), line=bench.line_draws(), book=bench.book, tables=None,
        indoors=indoors,
    )  # fmt: skip
    # ISO 12241: 15 % indoors, 25 % outdoors; ASME B31.1: DN 100 hung every 4.3 m (water) to
    # 5.2 m (steam), each from memory
    assert found.equivalent_length.median == pytest.approx(share * 4.75, rel=0.05)
    per_metre = float(np.median(sound_draws(bench.line_draws(), bench.frame_draws()).heat_loss))
    assert found.heat_loss.median == pytest.approx(share * 4.75 * per_metre, rel=0.06)
    assert found.image_loss is None
    assert found.heat_loss.relative_width > 1.0


def test_a_hanger_that_is_hardly_warmer_than_its_line_counts_for_less(bench, drawn_box):
    lens = bench.lens(315.0)
    pipe = bench.observe(lens).seen
    clamp = drawn_box("h1", "component", 110.0, 24.0, 140.0, 72.0, kind="hanger", tag="HS-1",
                      lagged=True)  # fmt: skip

    def estimate(pipes):
        return estimate_component(
            clamp, image=bench.seen(lens), frame=bench.frame_draws(), line=bench.line_draws(),
            book=bench.book, tables=None, pipes=pipes,
        )  # fmt: skip

    by_print, both = estimate([]), estimate([pipe])
    assert both.image_loss.median < 0.5 * by_print.heat_loss.median
    assert both.image_loss.median < both.heat_loss.median < by_print.heat_loss.median
    assert both.heat_loss.low < both.image_loss.median
    assert both.heat_loss.high > both.table_loss.median


def test_a_body_beyond_the_recording_range_gets_no_number(bench, outline, estimated):
    lens = bare_image(bench, 420.0)
    clipped = np.zeros(lens.shape, dtype=bool)
    clipped[BODY] = True
    found = estimated(lens, outline(), clipped)
    assert found.reason.key == "not_quantified.component_clipped"
    assert (found.surface_temperature, found.heat_loss) == (None, None)


@pytest.mark.parametrize(
    ("kind", "changes", "key"),
    [
        ("strainer", {}, "component_kind_unknown"),
        ("valve", {"wind_speed": None, "indoors": False}, "component_no_size"),
    ],
)
def test_without_a_number_the_temperature_and_the_reason_remain(
    bench, outline, estimated, kind, changes, key
):
    found = estimated(bare_image(bench, 420.0), outline(kind), **changes)
    assert found.reason.key == f"not_quantified.{key}"
    assert found.surface_temperature.median == pytest.approx(420.0, abs=0.5)
    assert (found.equivalent_length, found.heat_loss, found.draws) == (None, None, {})


def test_a_hanger_on_a_line_whose_sound_loss_is_unknown_gets_its_reason(bench, outline):
    unknown = replace(bench.line_draws(), inside_temperature=None)
    found = estimate_component(
        outline("hanger"), image=bench.seen(bare_image(bench, 420.0)), frame=bench.frame_draws(),
        line=unknown, book=bench.book, tables=None,
    )  # fmt: skip
    assert found.reason.key == "not_quantified.component_hanger"
    assert found.heat_loss is None
