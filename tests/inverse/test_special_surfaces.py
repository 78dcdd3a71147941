"""Surfaces that are not simply dry, lit by nothing and seen through a plain band.

Water on cold cladding, water on warm cladding, yesterday's sun, a neighbour mirrored in metal, a
tracer's stripe, a camera with a spectral response of its own.
"""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.constants import Boltzmann, c, h
from scipy.interpolate import PchipInterpolator

from cladwatt.physics.humidity import dew_point
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera, ConductivityCurve, Layer, Tracing
from cladwatt.survey.region import Region
from cladwatt.synthetic.camera import gaussian_blur
from cladwatt.synthetic.geometry import PipeAxis, View
from cladwatt.synthetic.render import AirPath, Skin, render
from cladwatt.synthetic.scene import Neighbour, Scene

WARM, HUMIDITY = 298.15, 0.7
DEW = float(dew_point(WARM, HUMIDITY))
ACROSS = np.clip((np.arange(96) - 48.0) / 24.0, -1, 1)[:, None]
"""Of each row, from edge to edge of the pipe."""


@pytest.fixture
def metal(paint):
    def clad(emissivity: float):
        return paint(emissivity, is_metal=True, total_emissivity=Quantity(emissivity))

    return clad


@pytest.fixture
def brine(bench, hall_with):
    """A line at -20 °C under little foam, in a warm and humid hall."""
    foam = ConductivityCurve((250.0, 330.0), (0.036, 0.036))
    return bench.but(
        line=replace(
            bench.line,
            layers=(Layer("foam", Quantity(0.010), foam, Quantity(1.0)),),
            inside_temperature=Quantity(253.15),
        ),
        conditions=hall_with(
            air_temperature=Quantity(WARM),
            surroundings_temperature=Quantity(WARM),
            reflected_temperature=Quantity(WARM),
            relative_humidity=Quantity(HUMIDITY),
        ),
    )


def film_on(bench, paint, surface: float) -> np.ndarray:
    """The image of the same pipe under a film of water, a dielectric of 0.96."""
    return bench.but(line=replace(bench.line, cladding=paint(0.96))).lens(surface)


# ---- what was declared of lagging and air -------------------------------------------------


def declared_wet(bench, factor):
    (wool,) = bench.line.layers
    wet = replace(wool, condition="wet", condition_factor=factor)
    return bench.but(line=replace(bench.line, layers=(wet,)))


def test_lagging_declared_wet_has_its_expected_loss_beside_the_sound_one(bench):
    wetted = declared_wet(bench, Quantity(4.0))
    (said,) = [
        remark
        for remark in wetted.alone(bench.lens(320.0)).remarks
        if remark.key == "remark.declared_condition"
    ]
    factor = 4.0 * bench.line.installation_factor.value
    assert dict(said.parameters)["loss_W_per_m"] == pytest.approx(
        bench.solved(factor).heat_loss, rel=1e-3
    )
    dry = bench.alone(bench.lens(320.0))
    assert wetted.alone(bench.lens(320.0)).sound_loss == dry.sound_loss
    assert dry.declared_loss is None
    assert dry.declared_resistance is None


def test_its_expected_resistance_is_that_of_the_wet_layer(bench):
    result = declared_wet(bench, Quantity(4.0)).alone(bench.lens(320.0))
    state = bench.solved(4.0 * bench.line.installation_factor.value)
    assert result.declared_loss.median == pytest.approx(float(state.heat_loss), rel=1e-3)
    # ln(D/d) / (2 pi k), the conductivity being constant
    pipe, thick = bench.line.pipe_outside_diameter.value, bench.line.layers[0].thickness.value
    conductivity = 4.0 * 1.15 * bench.line.layers[0].conductivity.conductivity[0]
    by_hand = math.log(1 + 2 * thick / pipe) / (2 * math.pi * conductivity)
    assert result.declared_resistance.median == pytest.approx(by_hand, rel=1e-3)
    assert result.specified_resistance.median == pytest.approx(4.6 * by_hand, rel=1e-3)


PUBLISHED = Quantity(3.65, 1.84, lower=1.33, upper=10.0, shape="lognormal")
"""Wet over dry conductivity of mineral wool, the range of `lagging_materials.csv`."""


def doubtful(bench):
    """Camera and convection law as uncertain as in the field."""
    camera = replace(bench.camera, accuracy=AccuracyStatement(2.0, 2.0))
    return bench.but(camera=camera, law_exact=False, count=1000)


def test_an_image_of_wet_lagging_is_not_pulled_to_sound_where_it_was_declared_wet(bench):
    state = bench.solved(2.0 * bench.line.installation_factor.value)
    loss = float(state.heat_loss)
    image = bench.lens(float(state.surface_temperature))
    told = declared_wet(doubtful(bench), PUBLISHED).jointly(image)
    untold = doubtful(bench).jointly(image)
    assert abs(told.heat_loss.median - loss) < 0.5 * abs(untold.heat_loss.median - loss)
    assert told.heat_loss.low < loss < told.heat_loss.high
    assert told.probability_aged > 0.97
    assert told.excess.median > 0.9 * (loss - float(bench.sound.heat_loss))


def test_lagging_declared_wet_that_looks_sound_is_not_pulled_to_wet(bench):
    sound = float(bench.sound.heat_loss)
    image = bench.lens(float(bench.sound.surface_temperature))
    told = declared_wet(doubtful(bench), PUBLISHED).jointly(image)
    assert told.heat_loss.median == pytest.approx(sound, rel=0.05)
    assert told.declared_loss.low > 1.1 * sound
    assert told.probability_aged < 0.5


def test_dry_lagging_has_no_such_word(bench, keys):
    assert "remark.declared_condition" not in keys(bench.alone(bench.lens(320.0)).remarks)


@pytest.mark.parametrize(
    ("humidity", "missing", "assumed"),
    [
        (None, True, False),
        (Quantity(0.5, 0.2, lower=0.0, upper=1.0, source="usual"), False, True),
        (Quantity(0.5, 0.05, lower=0.0, upper=1.0), False, False),
    ],
)
def test_a_cold_line_without_humidity_says_so(chilled, hall_with, keys, humidity, missing, assumed):
    damp = chilled.but(conditions=hall_with(relative_humidity=humidity), region=chilled.region)
    result = damp.alone(damp.lens(288.0))
    assert ("missing.humidity" in keys(result.missing)) == missing
    assert ("remark.humidity_assumed" in keys(result.remarks)) == assumed


def test_a_hot_line_needs_no_humidity(bench, keys):
    result = bench.alone(bench.lens(320.0))
    assert "missing.humidity" not in keys(result.missing)


# ---- water on cold cladding ---------------------------------------------------------------


@pytest.mark.parametrize("emissivity", [0.05, 0.1, 0.3, 0.6])
@pytest.mark.parametrize("surface", [DEW - 2.0, 280.0, 265.0])
def test_below_the_dew_point_metal_shows_water(brine, metal, paint, keys, emissivity, surface):
    bench = brine.but(line=replace(brine.line, cladding=metal(emissivity)))
    result = bench.alone(film_on(bench, paint, surface))
    assert result.surface_temperature.median == pytest.approx(surface, abs=0.06)
    assert result.verdict.level == "indicative"
    assert result.verdict.reason.key == "indicative.below_dew_point"
    assert "caution.dew_point" in keys(result.cautions)
    assert result.heat_loss.median < 0


def test_the_film_is_not_less_than_what_it_lies_on(brine, paint):
    bench = brine.but(line=replace(brine.line, cladding=paint(0.975)))
    result = bench.alone(bench.lens(283.15))
    assert result.surface_temperature.median == pytest.approx(283.15, abs=0.06)


@pytest.mark.parametrize("surface", [DEW + 1.0, 296.0])
def test_above_the_dew_point_a_chilled_line_shows_its_own_coat(brine, paint, surface):
    bench = brine.but(line=replace(brine.line, cladding=paint(0.7)))
    result = bench.alone(bench.lens(surface))
    assert result.surface_temperature.median == pytest.approx(surface, abs=0.06)


def test_without_humidity_nobody_knows_of_the_film(brine, metal, paint):
    dry = brine.but(
        line=replace(brine.line, cladding=metal(0.6)),
        conditions=replace(brine.conditions, relative_humidity=None),
    )
    result = dry.alone(film_on(dry, paint, 280.0))
    # read with 0.6 a drop of 18 K becomes one of 27
    assert result.surface_temperature.median < 280.0 - 5


def test_gain_below_the_dew_point_holds_the_vapours_heat(brine):
    surface = 283.15
    result = brine.alone(film_on(brine, lambda _: brine.line.cladding, surface))
    dry = brine.loss(surface)
    assert result.heat_loss.median < 1.3 * dry < 0


# ---- water on warm cladding ---------------------------------------------------------------


def wet(bench, is_wet: bool | None = True):
    return bench.but(conditions=replace(bench.conditions, surface_wet=is_wet))


def test_a_wet_warm_surface_is_refused_a_number(bench):
    lens = bench.lens(310.0)
    result = wet(bench).jointly(lens)
    assert result.verdict.level == "not quantified"
    assert result.verdict.reason.key == "not_quantified.wet_surface"
    for dry in (False, None):
        assert wet(bench, dry).jointly(lens).verdict.level == "quantified"


def test_a_wet_surface_below_the_dew_point_is_not_refused(brine, paint):
    result = wet(brine).alone(film_on(brine, paint, 283.15))
    assert result.verdict.level == "indicative"
    assert result.verdict.reason.key == "indicative.below_dew_point"


def test_wet_between_dew_point_and_air_evaporates_too(brine):
    result = wet(brine).alone(brine.lens(DEW + 2.0))
    assert result.verdict.reason.key == "not_quantified.wet_surface"


def test_wet_and_partly_above_the_dew_point_is_refused(brine, paint):
    surface = np.full(280, 283.15)
    surface[150:200] = DEW + 3.0
    result = wet(brine).alone(film_on(brine, paint, surface))
    assert result.verdict.reason.key == "not_quantified.wet_surface"


# ---- yesterday's sun ----------------------------------------------------------------------


@pytest.mark.parametrize(
    ("indoors", "sun", "capped"),
    [(False, True, True), (False, False, False), (False, None, False), (True, True, False)],
)
def test_sun_of_the_last_day_caps_outdoors(bench, hall_with, indoors, sun, capped):
    bench = bench.but(conditions=hall_with(indoors=indoors, sun_last_24h=sun))
    verdict = bench.jointly(bench.lens(310.0)).verdict
    if capped:
        assert (verdict.level, verdict.reason.key) == ("indicative", "indicative.sun_before")
    else:
        assert verdict.level == "quantified"


# ---- a neighbour mirrored in metal --------------------------------------------------------

COLD_SKY = {
    "reflected_temperature": Quantity(253.15),
    "surroundings_temperature": Quantity(270.0),
    "air_temperature": Quantity(283.15),
    "indoors": False,
}
PLACES = {"hall": {}, "cold sky": COLD_SKY}


def mirrors(bench, lens, keys) -> bool:
    return "remark.mirrored_neighbour" in keys(bench.alone(lens).remarks)


def with_stripe(value: float, base: float) -> np.ndarray:
    """One band of rows, off the middle."""
    rows = np.full((96, 1), base)
    rows[52:58] = value
    return rows


@pytest.mark.parametrize("place", PLACES)
@pytest.mark.parametrize("emissivity", [0.1, 0.3, 0.6])
@pytest.mark.parametrize("neighbour", [40.0, -40.0], ids=["hot", "cold"])
def test_a_neighbour_mirrored_along_metal_is_told(
    bench, metal, hall_with, keys, place, emissivity, neighbour
):
    bench = bench.but(
        line=replace(bench.line, cladding=metal(emissivity)),
        conditions=hall_with(**PLACES[place]),
        count=40,
    )
    scene = bench.conditions.reflected_temperature.value
    lens = bench.lens(
        float(bench.sound.surface_temperature), mirrored=with_stripe(scene + neighbour, scene)
    )
    assert mirrors(bench, lens, keys)
    assert not mirrors(bench, bench.lens(float(bench.sound.surface_temperature)), keys)


def test_paint_mirrors_too_little_to_tell(bench, paint, keys):
    stripe = with_stripe(296.15 + 40, 296.15)
    surface = float(bench.sound.surface_temperature)
    painted = bench.but(line=replace(bench.line, cladding=paint(0.6)))
    assert not mirrors(painted, painted.lens(surface, mirrored=stripe), keys)


@pytest.mark.parametrize("place", PLACES)
@pytest.mark.parametrize("emissivity", [0.1, 0.3, 0.5, 0.7])
@pytest.mark.parametrize("above_air", [10.0, 20.0, 40.0, 80.0])
def test_uneven_convection_is_no_neighbour(
    bench, metal, hall_with, keys, place, emissivity, above_air
):
    bench = bench.but(
        line=replace(bench.line, cladding=metal(emissivity)),
        conditions=hall_with(**PLACES[place]),
        count=40,
    )
    air = bench.conditions.air_temperature.value
    surface = air + above_air * (1 + 0.15 * np.sin(ACROSS * np.pi / 2))
    assert not mirrors(bench, bench.lens(surface), keys)


def test_damage_at_some_stations_is_no_neighbour(bench, metal, keys):
    bench = bench.but(line=replace(bench.line, cladding=metal(0.3)))
    surface = np.full((96, 280), float(bench.sound.surface_temperature))
    surface[52:58, 100:150] += 40
    assert not mirrors(bench, bench.lens(surface), keys)


def simulated(bench, metal, *, neighbours=(), slant=0.0):
    """A frame by the sample's camera: mirrored directions, perspective, blur and noise."""
    cladding = metal(0.3)
    bench = bench.but(line=replace(bench.line, cladding=cladding), count=100)
    view = View(96, 280, 30.0)
    distance = view.focal * bench.line.lagged_diameter / 48.0
    ends = np.array([[-2.0, 0.0, distance - 2 * slant], [2.0, 0.0, distance + 2 * slant]])
    shape = (40, 12)
    skin = Skin(
        PipeAxis(ends, np.array([0.0, -1.0, 0.0])),
        np.full(shape, bench.line.lagged_diameter / 2),
        np.full(shape, float(bench.sound.surface_temperature)),
        np.full(shape, 0.3), np.zeros(shape, dtype=bool), np.full(shape, 300.0), True, 0.5,
    )  # fmt: skip
    # ceiling, walls and floor differ a little, as in any hall
    scene = Scene(298.15, 296.15, 294.15, neighbours)
    band = bench.band
    background = np.full((96, 280), float(band.radiance(296.15)))
    radiance = render(view, [skin], background, scene, AirPath(0.98, 293.15), band, fine=2)
    lens = band.temperature(gaussian_blur(radiance, 0.8))
    lens += np.random.default_rng(7).normal(0.0, 0.05, lens.shape)
    edges = [skin.axis.edges(view, station, bench.line.lagged_diameter / 2)
             for station in (1.5, 2.0, 2.5)]  # fmt: skip
    middles = tuple(tuple(np.mean(pair, axis=0)) for pair in edges)
    widths = tuple(float(np.linalg.norm(pair[1] - pair[0])) for pair in edges)
    return bench.but(region=pipe_drawn(middles, widths)), lens


def pipe_drawn(middles, widths):
    return Region("r1", "f1", "pipe", "HS-1", centreline=middles, widths=widths)


@pytest.mark.parametrize("slant", [0.0, 0.1])
@pytest.mark.parametrize("temperature", [393.15, 233.15], ids=["hot", "cold"])
def test_a_neighbour_in_a_simulated_frame_is_told_and_a_plain_hall_is_not(
    bench, metal, keys, temperature, slant
):
    # 60 degrees above the line of sight: mirrored 30 degrees up the face, all along
    above = Neighbour((0.0, -math.sin(math.radians(60)), -0.5), 0.3, temperature)
    run, lens = simulated(bench, metal, neighbours=(above,), slant=slant)
    assert mirrors(run, lens, keys)
    run, lens = simulated(bench, metal, slant=slant)
    assert not mirrors(run, lens, keys)


# ---- a tracer's stripe --------------------------------------------------------------------


@pytest.mark.parametrize("rise", [3.0, 8.0])
@pytest.mark.parametrize("kind", ["steam", "electric"])
def test_a_tracers_stripe_is_no_finding(bench, keys, kind, rise):
    tracer = Tracing(kind, clock_position=5.0, power=Quantity(25.0))
    traced = bench.but(line=replace(bench.line, tracing=tracer), noise=0.05)
    surface = float(bench.sound.surface_temperature)
    result = traced.jointly(traced.lens(with_stripe(surface + rise, surface)))
    assert result.stretches == ()
    assert result.probability_local < 0.05
    assert result.probability_aged < 0.2
    assert result.verdict.level == "indicative"
    assert result.verdict.reason.key == "indicative.traced"
    assert not {"remark.mirrored_neighbour", "remark.tracer_heat"} & keys(result.remarks)
    (told,) = (remark for remark in result.remarks if remark.key == "remark.tracer_by_power")
    assert dict(told.parameters)["power_W_per_m"] == 25.0


def test_damage_beside_the_stripe_is_still_found(bench):
    traced = bench.but(line=replace(bench.line, tracing=Tracing("electric", 5.0)))
    surface = np.repeat(with_stripe(8.0, 0.0), 280, axis=1) + float(bench.sound.surface_temperature)
    surface[:, 110:160] += 6.0
    (stretch,) = traced.jointly(traced.lens(surface)).stretches
    assert stretch.probability > 0.9


def test_a_tracer_of_unknown_power_is_told_without_it(bench):
    traced = bench.but(line=replace(bench.line, tracing=Tracing("steam", 6.0)))
    result = traced.jointly(traced.lens(310.0))
    (told,) = (remark for remark in result.remarks if remark.key == "remark.tracer_heat")
    assert told.parameters == ()
    assert (result.tracer_heat, result.fluid_loss, result.excess) == (None, None, None)
    assert result.probability_aged is None


def test_no_tracer_no_word_of_it(bench, keys):
    assert "remark.tracer_heat" not in keys(bench.alone(bench.lens(310.0)).remarks)


# ---- a camera with a response of its own --------------------------------------------------

TRIANGLE = ((7.5e-6, 9.0e-6, 14e-6), (0.0, 1.0, 0.0))
"""Most sensitive at 9 µm."""


class Triangle:
    """Planck's law times the triangle, summed here and inverted by interpolation."""

    def __init__(self) -> None:
        self.waves = np.linspace(7.5e-6, 14e-6, 2001)
        self.response = np.interp(self.waves, *TRIANGLE)
        kelvin = np.linspace(240.0, 460.0, 221)
        self._inverse = PchipInterpolator(np.log(self.radiance(kelvin)), 1 / kelvin)

    def radiance(self, temperature):
        kelvin = np.asarray(temperature, dtype=float)
        values, back = np.unique(kelvin, return_inverse=True)
        exponent = h * c / (self.waves * Boltzmann * values[:, None])
        spectral = 2 * h * c**2 / self.waves**5 / np.expm1(exponent) * self.response
        return np.trapezoid(spectral, self.waves, axis=1)[back].reshape(kelvin.shape)

    def temperature(self, radiance):
        return 1 / self._inverse(np.log(radiance))


@pytest.mark.parametrize("emissivity", [0.9, 0.3])
@pytest.mark.parametrize("surface", [310.0, 400.0])
def test_a_spectral_response_is_undone_end_to_end(bench, paint, emissivity, surface):
    declared = replace(bench.camera, response=TRIANGLE)
    bench = bench.but(line=replace(bench.line, cladding=paint(emissivity)), optics=Triangle())
    lens = bench.lens(surface)
    found = bench.but(camera=declared).alone(lens).surface_temperature.median
    # five bands of angle stand for a curve: 0.07 K at 400 K in any band
    assert found == pytest.approx(surface, abs=0.06 if surface < 350 else 0.09)
    plain = bench.but(optics=None)
    same = plain.alone(plain.lens(surface)).surface_temperature.median
    assert found == pytest.approx(same, abs=0.003)


def test_another_response_would_have_been_wrong_by_kelvins(bench, paint):
    """Or the test above could not fail: the reflected part weighs differently in each band."""
    bench = bench.but(line=replace(bench.line, cladding=paint(0.3)), optics=Triangle())
    lens = bench.lens(400.0)
    plain: Camera = bench.camera
    far = replace(plain, band=(7.5e-6, 14e-6), response=((12e-6, 13e-6, 14e-6), (0.0, 1.0, 0.0)))
    for camera, off in ((plain, 0.3), (far, 2.0)):
        found = bench.but(camera=camera).alone(lens).surface_temperature.median
        assert abs(found - 400.0) > off


def test_a_wet_surface_dries_in_patches_that_are_no_damage(bench, hall_with):
    lens = bench.lens(320.0)
    lens[:, 100:150] += 3.0
    dry = bench.alone(lens)
    wet = bench.but(conditions=hall_with(surface_wet=True)).alone(lens)
    assert dry.stretches
    assert not wet.stretches


def test_a_line_still_warming_up_is_no_evidence_for_its_neighbours(bench):
    started = replace(bench.line, hours_at_temperature=Quantity(0.2))
    assert bench.observe(bench.lens(320.0)).evidence() is not None
    assert bench.but(line=started).observe(bench.lens(320.0)).evidence() is None


def test_sun_on_the_seen_face_leaves_its_loss_nearly_unknown(bench, hall_with):
    """What the face absorbs lies between shade and facing the beam: hundreds of W/m2 apart."""
    lens = bench.lens(325.0)
    dark = bench.but(count=2000).alone(lens).image_loss
    sun = hall_with(solar_irradiance=Quantity(600.0))
    lit = bench.but(count=2000, conditions=sun).alone(lens)
    absorbed = 600.0 * bench.line.cladding.solar_absorptance.value
    diameter = bench.line.lagged_diameter
    # in the median the mean over the circumference, the projected width over it
    assert lit.image_loss.median == pytest.approx(dark.median - absorbed * diameter, rel=0.1)
    width = lit.image_loss.high - lit.image_loss.low
    assert width > 0.4 * absorbed * np.pi * diameter
    assert lit.verdict.level != "quantified"
