"""What the synthetic camera records of surfaces whose radiance is known."""

import math

import numpy as np
import pytest

from cladwatt.physics.band import Band
from cladwatt.survey.model import AccuracyStatement, Recording
from cladwatt.synthetic.camera import Detector, gaussian_blur, record
from cladwatt.synthetic.fields import smooth_field
from cladwatt.synthetic.geometry import PipeAxis, View
from cladwatt.synthetic.render import AirPath, Skin, render
from cladwatt.synthetic.scene import Neighbour, Scene

BAND = Band.rectangular(7.5e-6, 14e-6)
VIEW = View(120, 160, 30.0)
QUIET = Detector(0.0, 0.0, 0.0, 0.0, 0.0, AccuracyStatement(2.0, 2.0))
ROOM = Scene(295.0, 295.0, 295.0)


def uniform_skin(temperature, emissivity, *, is_metal=False, mirror=0.5):
    axis = PipeAxis(np.array([[-2.0, 0.0, 3.0], [2.0, 0.0, 3.0]]), np.array([0.0, -1.0, 0.0]))
    shape = (40, 12)
    return Skin(
        axis, np.full(shape, 0.2), np.full(shape, temperature), np.full(shape, emissivity),
        np.zeros(shape, dtype=bool), np.full(shape, temperature), is_metal, mirror,
    )  # fmt: skip


def lens_of(skin, *, transmission=1.0):
    background = np.full((120, 160), float(BAND.radiance(290.0)))
    return render(VIEW, [skin], background, ROOM, AirPath(transmission, 298.0), BAND, fine=3)


def recorded(lens, detector=QUIET, recording=None, seed=1):
    random = np.random.default_rng(seed)
    return record(lens, detector, recording or Recording(), BAND, random)


def middle(image):
    return image[58:62, 40:120]


def test_a_black_pipe_is_recorded_at_its_temperature():
    # the coat's fall towards grazing leaves the middle of the pipe at its normal emissivity
    image = recorded(lens_of(uniform_skin(330.0, 1.0)))
    assert middle(image) == pytest.approx(330.0, abs=2e-3)
    assert image[:20] == pytest.approx(290.0, abs=1e-6)


def test_emission_and_reflection_follow_the_measurement_equation():
    image = lens_of(uniform_skin(340.0, 0.6), transmission=0.95)
    surface = 0.6 * float(BAND.radiance(340.0)) + 0.4 * float(BAND.radiance(295.0))
    expected = 0.95 * surface + 0.05 * float(BAND.radiance(298.0))
    assert middle(image) == pytest.approx(expected, rel=2e-4)


def test_settings_of_the_camera_are_applied():
    recording = Recording(emissivity=0.6, reflected_temperature=295.0, transmission=0.95,
                          atmosphere_temperature=298.0)  # fmt: skip
    image = recorded(lens_of(uniform_skin(340.0, 0.6), transmission=0.95), recording=recording)
    assert middle(image) == pytest.approx(340.0, abs=0.02)


def test_half_covered_pixels_mix():
    image = lens_of(uniform_skin(330.0, 1.0))
    column = image[:, 80]
    low, high = float(BAND.radiance(290.0)), float(BAND.radiance(330.0))
    between = (column > low * 1.001) & (column < 0.9 * high)
    assert between.sum() >= 1


def test_blur_keeps_the_sum_and_has_its_width():
    image = np.zeros((41, 41))
    image[20, 20] = 1.0
    blurred = gaussian_blur(image, 1.5)
    assert blurred.sum() == pytest.approx(1.0)
    offset = np.arange(41) - 20
    assert math.sqrt(float((blurred.sum(axis=0) * offset**2).sum())) == pytest.approx(1.5, rel=1e-3)


def test_noise_has_its_size_at_thirty_degrees():
    lens = np.full((200, 200), float(BAND.radiance(303.15)))
    noisy = recorded(lens, Detector(0.0, 0.06, 0.0, 0.0, 0.0, AccuracyStatement()))
    assert noisy.std() == pytest.approx(0.06, rel=0.02)
    striped = recorded(lens, Detector(0.0, 0.0, 0.05, 0.0, 0.0, AccuracyStatement()))
    assert striped.std(axis=0).max() < 1e-6
    assert striped.mean(axis=0).std() == pytest.approx(0.05, rel=0.2)


@pytest.mark.parametrize(("celsius", "limit"), [(20.0, 2.0), (200.0, 4.0)])
def test_calibration_is_off_by_a_share_of_the_larger_limit(celsius, limit):
    lens = np.full((8, 8), float(BAND.radiance(celsius + 273.15)))
    detector = Detector(0.0, 0.0, 0.0, 0.0, -0.5, AccuracyStatement(2.0, 2.0))
    assert recorded(lens, detector) == pytest.approx(celsius + 273.15 - limit / 2, abs=1e-3)


def test_a_uniform_scene_is_mirrored_alike_from_everywhere():
    random = np.random.default_rng(2)
    direction = random.standard_normal((50, 3))
    direction /= np.linalg.norm(direction, axis=1, keepdims=True)
    expected = float(BAND.radiance(295.0))
    assert ROOM.mirrored(direction, BAND) == pytest.approx(expected)
    assert ROOM.diffuse(direction, BAND) == pytest.approx(expected)


def test_a_matt_surface_facing_up_sees_mostly_the_sky():
    scene = Scene(250.0, 290.0, 290.0)
    up, down = np.array([0.0, -1.0, 0.0]), np.array([0.0, 1.0, 0.0])
    cold, warm = float(BAND.radiance(250.0)), float(BAND.radiance(290.0))
    share = (warm - float(scene.diffuse(up[None], BAND)[0])) / (warm - cold)
    assert 0.75 < share < 1.0
    assert float(scene.diffuse(down[None], BAND)[0]) == pytest.approx(warm)


def test_a_neighbour_is_seen_in_its_direction_only():
    scene = Scene(290.0, 290.0, 290.0, (Neighbour((0.0, -1.0, 0.0), 0.2, 400.0),))
    towards, away = np.array([[0.0, -1.0, 0.0]]), np.array([[0.0, 1.0, 0.0]])
    assert float(scene.mirrored(towards, BAND)[0]) == pytest.approx(float(BAND.radiance(400.0)))
    assert float(scene.mirrored(away, BAND)[0]) == pytest.approx(float(BAND.radiance(290.0)))


def test_smooth_fields_have_unit_variance_and_their_length():
    random = np.random.default_rng(3)
    fields = np.array([smooth_field((200,), (5.0,), random) for _ in range(400)])
    assert fields.std() == pytest.approx(1.0, rel=0.03)
    # a kernel of standard deviation s correlates as exp(-d^2 / (4 s^2))
    correlation = np.mean(fields[:, :-10] * fields[:, 10:])
    assert correlation == pytest.approx(math.exp(-100 / (4 * 25.0)), abs=0.05)


def test_a_periodic_field_closes():
    random = np.random.default_rng(4)
    fields = np.array([
        smooth_field((12, 24), (0.0, 2.0), random, periodic=(False, True)) for _ in range(200)
    ])  # fmt: skip
    assert fields.std() == pytest.approx(1.0, rel=0.03)
    neighbours = np.mean(fields[:, :, 0] * fields[:, :, -1])
    assert neighbours == pytest.approx(math.exp(-1 / 16.0), abs=0.05)
