"""One region from image to result: exact answers where nothing is uncertain.

`alone` is what the image says by itself and must give back what was put in; `jointly` adds the
specification. What remains uncertain with every declared uncertainty at zero is the hidden side
(4 % on a sound pipe) and the scale.
"""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.errors import RegionError
from cladwatt.flags import StationFlag
from cladwatt.inverse.region_estimate import estimate_regions
from cladwatt.measure.noise import FrameNoise
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera, ConductivityCurve, Layer, Tracing

MIRRORED = "reflected temperature equal to the surface's: emissivity and angle drop out"


def black(bench, hall_with, surface: float):
    """A bench whose image is the surface's own temperature, exactly: see MIRRORED."""
    return bench.but(
        conditions=hall_with(
            reflected_temperature=Quantity(surface), atmosphere_transmission=Quantity(1.0)
        )
    )


@pytest.mark.parametrize("surface", [295.0, 304.0, 340.0, 420.0])
def test_surface_temperature_and_loss_come_back_exactly(bench, hall_with, surface):
    bench = black(bench, hall_with, surface)
    result = bench.alone(bench.lens(surface))
    found = result.surface_temperature
    assert (found.low, found.median, found.high) == pytest.approx((surface,) * 3, abs=1e-3)
    # the median of 200 stratified draws of the hidden side is 1 within 5e-4
    assert result.heat_loss.median == pytest.approx(bench.loss(surface), rel=1e-3, abs=0.02)
    assert result.heat_flux.median == pytest.approx(
        bench.loss(surface) / (np.pi * bench.exchange.diameter), rel=1e-3, abs=0.02
    )


@pytest.mark.parametrize("emissivity", [0.95, 0.7, 0.4])
@pytest.mark.parametrize("surface", [300.0, 330.0])
def test_emissivity_and_air_path_are_undone(bench, paint, emissivity, surface):
    bench = bench.but(line=replace(bench.line, cladding=paint(emissivity)))
    result = bench.alone(bench.lens(surface))
    # five bands of angle stand for a curve: some hundredths of a kelvin
    assert result.surface_temperature.median == pytest.approx(surface, abs=0.06)
    assert result.heat_loss.median == pytest.approx(bench.loss(surface), rel=0.01)


def test_interval_is_the_hidden_sides_and_nothing_else(bench, hall_with):
    bench = black(bench, hall_with, 310.0)
    result = bench.alone(bench.lens(310.0))
    assert result.heat_loss.relative_width == pytest.approx(2 * 1.96 * 0.04, rel=0.05)
    assert result.variance_shares[0][0] == "hidden_side"
    assert result.variance_shares[0][1] > 0.99


def test_a_sound_pipe_is_found_sound(bench, hall_with):
    bench = black(bench, hall_with, float(bench.sound.surface_temperature))
    sound = bench.sound
    result = bench.alone(bench.lens(float(sound.surface_temperature)))
    assert result.heat_loss.median == pytest.approx(float(sound.heat_loss), rel=1e-3)
    assert result.sound_loss.median == pytest.approx(float(sound.heat_loss), rel=1e-6)
    assert result.specified_loss.median == pytest.approx(float(bench.solved(1.0).heat_loss))
    assert result.excess.median == pytest.approx(0, abs=1e-3 * float(sound.heat_loss))
    assert result.excess.low < 0 < result.excess.high
    assert result.stretches == ()
    assert result.probability_local < 0.01
    # resistance: (inside - surface) / loss; the factor multiplies the conductivity
    drop = 453.15 - float(sound.surface_temperature)
    assert result.resistance.median == pytest.approx(drop / float(sound.heat_loss), rel=1e-3)
    assert result.resistance.median == pytest.approx(float(sound.resistance), rel=1e-3)
    assert result.resistance_ratio.median == pytest.approx(1 / 1.15, rel=1e-3)
    assert result.effective_conductivity.median == pytest.approx(1.15 * 0.045, rel=1e-3)


@pytest.mark.parametrize("factor", [0.8, 1.6, 3.0])
def test_another_conductivity_is_found_again(bench, hall_with, factor):
    state = bench.solved(factor)
    bench = black(bench, hall_with, float(state.surface_temperature))
    result = bench.alone(bench.lens(float(state.surface_temperature)))
    assert result.resistance_ratio.median == pytest.approx(1 / factor, rel=1.5e-3)
    assert result.effective_conductivity.median == pytest.approx(factor * 0.045, rel=1.5e-3)
    excess = float(state.heat_loss - bench.sound.heat_loss)
    assert result.excess.median == pytest.approx(excess, abs=1e-3 * float(state.heat_loss))


def test_conductivity_rising_with_temperature_is_integrated(bench, hall_with):
    curve = ConductivityCurve((293.15, 473.15), (0.035, 0.060))
    layers = (Layer("wool", Quantity(0.060), curve, Quantity(1.0)),)
    bench = bench.but(line=replace(bench.line, layers=layers))
    bench = black(bench, hall_with, float(bench.sound.surface_temperature))
    result = bench.alone(bench.lens(float(bench.sound.surface_temperature)))
    assert result.excess.median == pytest.approx(0, abs=1e-3 * result.heat_loss.median)
    assert result.resistance.median == pytest.approx(float(bench.sound.resistance), rel=1.5e-3)


def test_stations_carry_the_same_numbers(bench, hall_with):
    sound = bench.sound
    bench = black(bench, hall_with, float(sound.surface_temperature))
    result = bench.alone(bench.lens(float(sound.surface_temperature)))
    table = result.stations
    assert table.surface_temperature == pytest.approx(float(sound.surface_temperature), abs=1e-3)
    # the middle of 200 draws of the profile scatters about it by a tenth of its band
    assert table.heat_loss == pytest.approx(float(sound.heat_loss), rel=4e-3)
    assert table.sound_loss == pytest.approx(float(sound.heat_loss), rel=1e-6)
    assert table.resistance_ratio == pytest.approx(1 / 1.15, rel=4e-3)
    assert np.all(table.heat_loss_low < table.heat_loss)
    assert np.all(table.resistance_low < table.resistance_high)
    assert np.all(table.flags == 0)
    assert table.length.sum() == pytest.approx(result.length.median, rel=1e-3)


def test_length_is_pixels_times_diameter_over_width(bench):
    result = bench.alone(bench.lens(304.0))
    focal = 140 / np.tan(np.radians(15))
    expected = 240 * bench.line.lagged_diameter / 48 * (1 - 48 / (2 * focal))
    assert result.length.median == pytest.approx(expected, rel=1e-3)
    assert result.total_loss.median == pytest.approx(
        result.heat_loss.median * result.length.median, rel=5e-3
    )


def test_a_known_length_overrides_the_scale(bench, drawn_pipe):
    marked = replace(
        drawn_pipe(),
        role="known_length", centreline=((40.0, 50.0), (240.0, 50.0)), widths=None,
        value=Quantity(1.5),
    )  # fmt: skip
    result = bench.alone(bench.lens(304.0), known_lengths=[marked])
    assert result.length.median == pytest.approx(1.5 * 240 / 200, rel=0.01)


# ---- damage -------------------------------------------------------------------------------


def banded(bench, rise: float, first: int = 110, last: int = 159) -> np.ndarray:
    surface = np.full(280, float(bench.sound.surface_temperature))
    surface[first : last + 1] += rise
    return bench.lens(surface)


def test_a_hot_band_is_a_stretch_with_its_edges(bench):
    result = bench.alone(banded(bench, 6.0))
    (stretch,) = result.stretches
    step = result.stations.length[0]
    start, end = (110 - 0.5 - 20) * step, (159 + 0.5 - 20) * step
    assert stretch.start.median == pytest.approx(start, abs=1.2 * step)
    assert stretch.end.median == pytest.approx(end, abs=1.2 * step)
    assert stretch.start.low < start < stretch.start.high
    assert stretch.end.low < end < stretch.end.high
    assert stretch.probability > 0.99
    assert result.probability_local > 0.99
    assert stretch.share_of_excess == pytest.approx(1.0)
    hot = bench.loss(float(bench.sound.surface_temperature) + 6.0)
    # even across the face: most likely all round
    assert stretch.heat_loss.median == pytest.approx(hot, rel=0.05)
    assert stretch.excess.low < (hot - float(bench.sound.heat_loss)) * 50 * step
    assert stretch.excess.high > (hot - float(bench.sound.heat_loss)) * 50 * step
    xs = [x for x, _ in stretch.outline]
    assert (min(xs), max(xs)) == pytest.approx((110, 159), abs=2)


@pytest.mark.parametrize("kelvin", [-1.5, 1.5])
def test_a_shared_error_moves_no_edge_and_no_certainty(bench, kelvin):
    """A wrong camera, air or emissivity moves the level, not the contrast."""
    one, two = (bench.alone(banded(bench, 6.0) + shift) for shift in (0.0, kelvin))
    assert one.stretches[0].start == two.stretches[0].start
    assert one.stretches[0].end == two.stretches[0].end
    assert min(one.probability_local, two.probability_local) > 0.98
    assert two.heat_loss.median != pytest.approx(one.heat_loss.median, rel=0.05)


def test_two_bands_are_two_stretches_and_share_the_excess(bench):
    surface = np.full(280, float(bench.sound.surface_temperature))
    surface[60:90] += 4.0
    surface[170:230] += 4.0
    result = bench.alone(bench.lens(surface))
    first, second = result.stretches
    assert first.end.median < second.start.median
    assert first.share_of_excess + second.share_of_excess == pytest.approx(1)
    assert first.share_of_excess == pytest.approx(30 / 90, abs=0.05)


def test_station_numbers_grow_or_fall_as_drawn(bench):
    region = replace(bench.region, start=40.0, direction=-1)
    result = bench.but(region=region).alone(banded(bench, 6.0))
    (stretch,) = result.stretches
    step = result.stations.length[0]
    ends = sorted([stretch.start.median, stretch.end.median])
    expected = sorted([40 - 89.5 * step, 40 - 139.5 * step])
    assert ends == pytest.approx(expected, abs=1.2 * step)


@pytest.mark.parametrize("seed", range(6))
def test_noise_alone_makes_no_damage_of_a_sound_pipe(bench, seed):
    bench = bench.but(seed=seed, noise=0.08)
    result = bench.alone(bench.lens(float(bench.sound.surface_temperature)))
    assert result.probability_local < 0.3


def test_a_cold_band_is_no_damage_of_a_hot_line(bench):
    result = bench.alone(banded(bench, -4.0))
    step = result.stations.length[0]
    for stretch in result.stretches:
        middle = (stretch.start.median + stretch.end.median) / 2
        assert not 90 * step < middle < 140 * step


# ---- chilled ------------------------------------------------------------------------------


def test_a_chilled_line_gains(chilled, hall_with):
    sound = chilled.sound
    surface = float(sound.surface_temperature)
    bench = black(chilled, hall_with, surface)
    result = bench.alone(bench.lens(surface))
    assert result.gain
    assert result.heat_loss.median < 0
    assert result.heat_loss.median == pytest.approx(float(sound.heat_loss), rel=1e-3)
    assert result.heat_loss.low < result.heat_loss.high
    assert result.resistance.median == pytest.approx(float(sound.resistance), rel=1e-3)
    assert result.resistance_ratio.median == pytest.approx(1 / 1.15, rel=1e-3)
    assert result.excess.median == pytest.approx(0, abs=0.02)


def test_damage_of_a_chilled_line_is_cold(chilled):
    (stretch,) = chilled.alone(banded(chilled, -3.0)).stretches
    assert stretch.probability > 0.95
    assert stretch.excess.median < 0  # gains more
    for stretch in chilled.alone(banded(chilled, 3.0)).stretches:
        assert not 0.5 < stretch.start.median < stretch.end.median < 0.6


# ---- what is unknown ----------------------------------------------------------------------


def fields_of(result, *names: str) -> list[bool]:
    return [getattr(result, name) is not None for name in names]


def test_unknown_inside_temperature(bench, keys):
    known = bench.alone(banded(bench, 6.0))
    result = bench.but(line=replace(bench.line, inside_temperature=None)).alone(banded(bench, 6.0))
    assert keys(result.missing) == {"missing.inside_temperature"}
    for name in ("resistance", "resistance_ratio", "effective_conductivity", "sound_loss",
                 "specified_loss", "excess", "specified_resistance"):  # fmt: skip
        assert getattr(result, name) is None, name
    # loss and contrast stand as before
    assert result.heat_loss == known.heat_loss
    # by the image's own level, not the joint one
    assert result.probability_local == pytest.approx(known.probability_local, abs=0.02)
    assert len(result.stretches) == 1
    # nothing is known of ageing: what the contrast says is the least of it
    assert result.probability_aged is None
    assert result.probability_damaged == result.probability_local
    assert np.isnan(result.stations.resistance).all()


def test_unknown_lagging(bench, keys):
    (layer,) = bench.line.layers
    unknown = replace(bench.line, layers=(replace(layer, conductivity=None),))
    known = bench.alone(banded(bench, 6.0))
    result = bench.but(line=unknown).alone(banded(bench, 6.0))
    assert keys(result.missing) == {"missing.lagging"}
    for name in ("sound_loss", "specified_loss", "excess", "resistance_ratio",
                 "specified_resistance"):  # fmt: skip
        assert getattr(result, name) is None, name
    assert result.heat_loss == known.heat_loss
    assert result.resistance == known.resistance
    assert result.effective_conductivity == known.effective_conductivity


def test_unknown_diameter(bench, keys):
    unknown = replace(bench.line, pipe_outside_diameter=None)
    known = bench.alone(bench.lens(310.0))
    result = bench.but(line=unknown).alone(bench.lens(310.0))
    assert "missing.diameter" in keys(result.missing)
    for name in ("heat_loss", "total_loss", "sound_loss", "excess", "resistance"):
        assert getattr(result, name) is None, name
    assert result.verdict.level == "not quantified"
    assert result.verdict.reason.key == "not_quantified.no_diameter"
    assert np.isnan(result.length.median)
    # W/m2 remains, a bit wider for the convection law's diameter
    assert result.heat_flux.median == pytest.approx(known.heat_flux.median, rel=0.05)
    assert result.surface_temperature == known.surface_temperature
    assert result.stretches == ()


def test_unknown_wind(bench, hall_with, keys):
    known = bench.alone(bench.lens(310.0))
    result = bench.but(conditions=hall_with(wind_speed=None)).alone(bench.lens(310.0))
    assert keys(result.missing) == {"missing.wind"}
    assert result.heat_loss is None
    assert np.isnan(result.heat_flux.median)
    assert result.verdict.reason.key == "not_quantified.no_wind"
    assert result.surface_temperature == known.surface_temperature
    assert result.length == known.length


def test_everything_known_misses_nothing(bench):
    assert bench.alone(bench.lens(310.0)).missing == ()


# ---- masks --------------------------------------------------------------------------------


def test_clipped_pixels_are_masked_flagged_and_remarked(bench, keys):
    lens = bench.lens(310.0)
    clipped = np.zeros(lens.shape, dtype=bool)
    clipped[:, 100:130] = True
    lens[clipped] = 500.0
    result = bench.alone(lens, clipped=clipped)
    assert result.surface_temperature.median == pytest.approx(310.0, abs=0.06)
    assert result.heat_loss.median == pytest.approx(bench.loss(310.0), rel=0.01)
    flags = result.stations.flags
    at = slice(100 - 20 + 1, 130 - 20 - 1)
    assert np.all(flags[at] & StationFlag.GAP)
    assert np.all(flags[at] & StationFlag.CLIPPED)
    assert np.all(flags[:75] == 0)
    assert np.isnan(result.stations.heat_loss[at]).all()
    assert "remark.masked_share" in keys(result.remarks)


def test_a_gap_counts_in_the_length_at_the_mean_of_the_rest(bench):
    left_out = np.zeros((96, 280), dtype=bool)
    left_out[:, 100:140] = True
    whole = bench.alone(bench.lens(310.0))
    result = bench.alone(bench.lens(310.0), left_out=left_out)
    assert result.length == whole.length
    assert result.total_loss.median == pytest.approx(whole.total_loss.median, rel=1e-3)


def test_dead_rows_are_filled_by_their_neighbours_without_a_step(bench):
    """A hole on one side of the pipe must not read as a warmer or colder station."""
    lens = bench.lens(310.0)
    lens[28:38, 120:150] = np.nan
    result = bench.alone(lens)
    assert result.stretches == ()
    assert result.stations.surface_temperature == pytest.approx(310.0, abs=0.1)
    assert np.any(result.stations.flags & StationFlag.MASKED)
    assert not np.any(result.stations.flags & StationFlag.GAP)


def test_component_stations_are_left_out_of_length_and_level(bench):
    lens = bench.lens(310.0)
    lens[:, 120:150] = 400.0  # a hot valve
    components = np.zeros(lens.shape, dtype=bool)
    components[30:66, 120:150] = True
    whole = bench.alone(bench.lens(310.0))
    result = bench.alone(lens, components=components)
    assert result.surface_temperature.median == pytest.approx(310.0, abs=0.06)
    assert result.stretches == ()
    assert result.length.median == pytest.approx(whole.length.median * 210 / 240, rel=0.01)


def test_nothing_usable_is_said(bench):
    lens = np.full((96, 280), np.nan)
    lens[:, 100:103] = 310.0
    with pytest.raises(RegionError, match=r"feature 0 \(id 'r1'\): only \d stations hold usable"):
        bench.alone(lens)


# ---- draws --------------------------------------------------------------------------------


def uncertain(bench, hall_with, paint, **changes):
    return bench.but(
        line=replace(
            bench.line,
            cladding=paint(0.92, 0.02),
            inside_temperature=Quantity(453.15, 3.0),
            installation_factor=Quantity(1.15, 0.08, lower=1.0),
        ),
        conditions=hall_with(
            air_temperature=Quantity(293.15, 0.7),
            surroundings_temperature=Quantity(295.15, 1.5),
            reflected_temperature=Quantity(296.15, 1.5),
            wind_speed=Quantity(0.2, 0.1, lower=0.0),
        ),
        camera=Camera(field_of_view_deg=30.0, accuracy=AccuracyStatement(2.0, 2.0)),
        law_exact=False,
        **changes,
    )


def test_same_seed_bit_identical_other_seed_about_the_same(bench, hall_with, paint):
    bench = uncertain(bench, hall_with, paint, count=1000)
    lens = banded(bench, 6.0)
    one, again, other = (bench.but(seed=seed).jointly(lens) for seed in (1, 1, 2))
    for name, values in one.draws.items():
        assert np.array_equal(values, again.draws[name]), name
    assert one.heat_loss == again.heat_loss
    assert one.heat_loss != other.heat_loss
    assert other.heat_loss.median == pytest.approx(one.heat_loss.median, rel=0.03)
    assert other.heat_loss.relative_width == pytest.approx(one.heat_loss.relative_width, rel=0.15)


def test_loss_of_a_frame_is_correlated_between_its_regions(bench, hall_with, paint, drawn_pipe):
    bench = uncertain(bench, hall_with, paint, count=1000)
    left = drawn_pipe(centreline=((20.0, 48.0), (130.0, 48.0)))
    right = replace(drawn_pipe(centreline=((150.0, 48.0), (260.0, 48.0))), id="r2")
    lens = bench.lens(310.0)
    losses = [bench.but(region=region).alone(lens).draws["total_loss"] for region in (left, right)]
    correlation = np.corrcoef(*losses)[0, 1]
    assert correlation > 0.8
    total = np.percentile(sum(losses), [2.5, 97.5])
    shuffled = np.random.default_rng(0).permutation(losses[1])
    independent = np.percentile(losses[0] + shuffled, [2.5, 97.5])
    # fully shared errors add, independent ones only by squares: a factor of sqrt(2)
    assert np.ptp(total) > 1.25 * np.ptp(independent)


@pytest.mark.parametrize(
    ("name", "u"),
    [("air_temperature", 0.3), ("reflected_temperature", 0.5), ("wind_speed", 0.03)],
)
def test_small_uncertainties_of_the_frame_carry_through_linearly(bench, hall_with, name, u):
    """The loss's spread is its slope against the quantity times u, by two exact estimates."""
    bench = bench.but(count=1000)
    lens = bench.lens(320.0)
    value = getattr(bench.conditions, name).value
    still = bench.alone(lens).draws["heat_loss"]

    def draws_at(quantity: Quantity) -> np.ndarray:
        return bench.but(conditions=hall_with(**{name: quantity})).alone(lens).draws["heat_loss"]

    slope = (draws_at(Quantity(value + u)) - draws_at(Quantity(value - u))) / (2 * u)
    # draws are keyed, so the hidden side cancels in the ratio draw by draw
    ratio = draws_at(Quantity(value, u)) / still
    assert ratio.std() == pytest.approx(abs(float(np.mean(slope / still))) * u, rel=0.05)


def test_wider_inputs_make_a_wider_interval_never_a_narrower_one(bench, hall_with, paint):
    lens = bench.lens(310.0)
    exact, vague = bench.alone(lens), uncertain(bench, hall_with, paint).alone(lens)
    assert vague.heat_loss.relative_width > 2 * exact.heat_loss.relative_width
    assert vague.heat_loss.low < exact.heat_loss.median < vague.heat_loss.high


def test_shares_of_variance_name_what_is_uncertain(bench, hall_with):
    vague = hall_with(reflected_temperature=Quantity(296.15, 8.0))
    result = bench.but(
        conditions=vague,
        count=1000,
        line=replace(
            bench.line,
            cladding=replace(bench.line.cladding, band_emissivity=Quantity(0.6)),
        ),
    ).alone(bench.lens(320.0, emissivity=0.6))
    assert result.variance_shares[0][0] == "reflected_temperature"
    assert result.variance_shares[0][1] > 0.8
    assert result.verdict.advice is not None
    assert result.verdict.advice.key == "advice.reflector"


# ---- verdict and cautions -----------------------------------------------------------------


def test_a_good_image_is_quantified(bench):
    assert bench.alone(bench.lens(310.0)).verdict.level == "quantified"


def test_a_pipe_under_three_spots_is_indicative(bench):
    camera = replace(bench.camera, spot_pixels=15.0)
    result = bench.but(camera=camera).alone(bench.lens(310.0))
    assert result.verdict.reason.key == "indicative.narrow_pipe"
    assert np.all(result.stations.flags & StationFlag.NARROW)


@pytest.mark.parametrize(
    ("changes", "key"),
    [
        ({"sun_on_pipe": True}, "indicative.sun"),
        ({"solar_irradiance": Quantity(100.0)}, "indicative.sun"),
        ({"indoors": False, "rain_last_24h": True}, "indicative.rain"),
    ],
)
def test_conditions_cap_the_verdict(bench, hall_with, changes, key):
    result = bench.but(conditions=hall_with(**changes)).alone(bench.lens(320.0))
    assert result.verdict.level == "indicative"
    assert result.verdict.reason.key == key


def test_a_riser_loses_what_a_vertical_pipe_loses(bench, drawn_pipe):
    upright = bench.but(line=replace(bench.line, inclination_deg=90.0))
    riser = bench.but(region=drawn_pipe(inclination_deg=90.0))
    lens = bench.lens(320.0)
    level = bench.alone(lens).heat_loss.median
    assert riser.alone(lens).heat_loss.median == upright.alone(lens).heat_loss.median
    assert riser.alone(lens).heat_loss.median == pytest.approx(upright.loss(320.0), rel=0.01)
    found = riser.alone(lens).heat_loss.median / level
    assert found == pytest.approx(upright.loss(320.0) / bench.loss(320.0), abs=1e-3)
    assert found < 0.995


@pytest.mark.parametrize(("name", "surface"), [("bench", 320.0), ("chilled", 286.0)])
def test_wind_against_the_moving_air_carries_less(request, hall_with, drawn_pipe, name, surface):
    bench = request.getfixturevalue(name)

    def loss(uphill: int, inclination: float = 90.0) -> float:
        along = hall_with(
            wind_speed=Quantity(1.5), wind_angle_deg=Quantity(0.0), wind_uphill=uphill
        )
        run = bench.but(conditions=along, region=drawn_pipe(inclination_deg=inclination))
        return abs(run.alone(run.lens(surface)).heat_flux.median)

    hot = 1 if surface > 293.15 else -1  # air falls along a cold pipe
    assert loss(-hot) < 0.99 * loss(hot)
    assert loss(0) == loss(hot)  # where nobody says, they are taken to help each other
    assert loss(-hot, 0.0) == loss(hot, 0.0)  # air rises across a level run


def test_film_and_supports_are_among_what_the_variance_comes_from(bench):
    line = replace(
        bench.line, inside_film=Quantity(5.0, 2.5, lower=0.1), installation_factor=Quantity(1.0),
        supports_allowance=Quantity(0.2, 0.1, lower=0.0),
    )  # fmt: skip
    result = bench.but(line=line).jointly(bench.lens(320.0))
    named = dict(result.variance_shares)
    assert {"inside_film", "supports_allowance"} <= set(named)
    assert "inside_film" not in dict(bench.jointly(bench.lens(320.0)).variance_shares)


@pytest.mark.parametrize(("hours", "steady"), [(0.5, False), (6.0, True)])
def test_a_line_just_started_caps_the_verdict(bench, hours, steady):
    # 60 mm of wool: a slab's slowest mode alone takes 0.06**2 / (pi/2)**2 / 3e-7 s = 1.35 h
    started = bench.but(line=replace(bench.line, hours_at_temperature=Quantity(hours)))
    verdict = started.alone(bench.lens(320.0)).verdict
    assert (verdict.reason.key != "indicative.not_steady") == steady


def test_tracing_caps_the_verdict_and_says_nothing_of_ageing(bench):
    traced = bench.but(line=replace(bench.line, tracing=Tracing("electric")))
    result = traced.jointly(traced.lens(310.0))
    assert result.verdict.reason.key == "indicative.traced"
    assert result.probability_aged is None


def test_noise_that_hides_a_rise_by_a_quarter_caps_the_verdict(bench):
    lens = bench.lens(float(bench.sound.surface_temperature))
    noisy = replace(bench.seen(lens), noise=FrameNoise(60.0, 40.0))
    result = bench.alone(lens, image=noisy)
    assert result.verdict.reason.key == "indicative.contrast_too_weak"


def test_more_than_the_fluid_can_give_is_no_number(bench, line_with):
    lukewarm = bench.but(line=line_with(inside_temperature=Quantity(300.0)))
    result = lukewarm.alone(lukewarm.lens(330.0))
    assert result.verdict.level == "not quantified"
    assert result.verdict.reason.key == "not_quantified.infeasible"


def test_the_caution_names_the_hottest_place_and_no_mean_across(bench):
    lens = bench.lens(310.0)
    # the middle third of the face shows 380 K along 40 pixels
    patch = np.s_[40:56, 120:160]
    lens[patch] = bench.lens(380.0)[patch]
    (caution,) = (c for c in bench.alone(lens).cautions if c.key == "caution.touch")
    assert dict(caution.parameters)["temperature_C"] == pytest.approx(106.85, abs=0.5)


def test_cautions_are_for_people_and_lagging(bench, hall_with, chilled, keys):
    (layer,) = bench.line.layers
    weak = replace(layer.conductivity, maximum_service_temperature=400.0)
    bench = bench.but(line=replace(bench.line, layers=(replace(layer, conductivity=weak),)))
    hot = bench.alone(bench.lens(330.0))
    assert keys(hot.cautions) == {"caution.touch", "caution.service_limit"}
    limit = next(c for c in hot.cautions if c.key == "caution.service_limit")
    assert dict(limit.parameters) == pytest.approx({"temperature_C": 180.0, "limit_C": 126.85})
    humid = chilled.but(conditions=hall_with(relative_humidity=Quantity(0.95)))
    wet = humid.alone(humid.lens(289.0))
    assert "caution.dew_point" in keys(wet.cautions)
    assert wet.verdict.reason.key == "indicative.below_dew_point"
    assert np.all(wet.stations.flags & StationFlag.BELOW_DEW_POINT)
    dry = chilled.but(conditions=hall_with(relative_humidity=Quantity(0.3)))
    assert dry.alone(dry.lens(289.0)).cautions == ()


def test_frost_is_flagged_below_zero(chilled, hall_with):
    frosty = chilled.but(
        conditions=hall_with(relative_humidity=Quantity(0.8)),
        line=replace(chilled.line, inside_temperature=Quantity(248.15)),
    )
    result = frosty.alone(frosty.lens(270.0))
    assert np.all(result.stations.flags & StationFlag.FROST)


# ---- the specification as evidence --------------------------------------------------------


def test_the_specification_narrows_a_vague_image(bench, hall_with, paint):
    bench = uncertain(bench, hall_with, paint, count=1000)
    lens = bench.lens(float(bench.sound.surface_temperature))
    alone, jointly = bench.alone(lens), bench.jointly(lens)
    assert jointly.heat_loss.relative_width < 0.8 * alone.heat_loss.relative_width
    truth = float(bench.sound.heat_loss)
    assert jointly.heat_loss.low < truth < jointly.heat_loss.high
    # the image's own number stands beside it
    assert jointly.image_loss == alone.heat_loss


def test_a_sharp_image_overrules_the_specification(bench):
    state = bench.solved(2.2)
    result = bench.jointly(bench.lens(float(state.surface_temperature)))
    assert result.heat_loss.median == pytest.approx(float(state.heat_loss), rel=0.03)
    assert result.probability_aged > 0.95


def test_a_sound_line_is_not_called_aged(bench):
    result = bench.jointly(bench.lens(float(bench.sound.surface_temperature)))
    assert result.probability_aged < 0.1
    assert result.probability_damaged == pytest.approx(
        result.probability_local + result.probability_aged
    )


def test_a_specification_that_cannot_be_is_doubted(bench, keys):
    lens = bench.lens(float(bench.solved(0.3).surface_temperature))
    result = bench.jointly(lens)
    assert "remark.specification_doubted" in keys(result.remarks)


def test_a_level_never_overrules_a_clear_contrast(bench, hall_with, paint):
    bench = uncertain(bench, hall_with, paint, count=500)
    result = bench.jointly(banded(bench, 6.0) - 1.5)  # the level looks better than sound
    assert result.probability_local > 0.9


def test_regions_of_a_frame_in_another_order_give_the_same(bench, hall_with, paint, drawn_pipe):
    bench = uncertain(bench, hall_with, paint, count=300)
    lens = bench.lens(310.0)
    regions = [
        replace(drawn_pipe(centreline=((20.0, 48.0), (130.0, 48.0))), id="a"),
        replace(drawn_pipe(centreline=((150.0, 48.0), (260.0, 48.0))), id="b"),
    ]
    observed = [bench.but(region=region).observe(lens) for region in regions]
    forwards = estimate_regions(observed, bench.book, "f1")
    backwards = estimate_regions(observed[::-1], bench.book, "f1")[::-1]
    for one, two in zip(forwards, backwards, strict=True):
        assert one.region_id == two.region_id
        assert one.heat_loss.median == pytest.approx(two.heat_loss.median, rel=0.02)


def test_result_does_not_change_the_image(bench):
    lens = bench.lens(310.0)
    before = lens.copy()
    bench.jointly(lens)
    assert np.array_equal(lens, before)
