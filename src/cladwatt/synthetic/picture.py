"""One frame: what stands behind and around the pipes, and what the camera makes of it all."""

from dataclasses import replace

import numpy as np

from cladwatt.physics.band import Band
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.survey.model import AccuracyStatement, Recording
from cladwatt.synthetic.camera import Detector, record
from cladwatt.synthetic.drawing import foil_box
from cladwatt.synthetic.fields import smooth_field
from cladwatt.synthetic.geometry import View
from cladwatt.synthetic.pipes import PipeTruth
from cladwatt.synthetic.plant import Plant, PlantFrame
from cladwatt.synthetic.render import AirPath, render
from cladwatt.synthetic.response import true_band
from cladwatt.synthetic.scene import Neighbour, Scene
from cladwatt.synthetic.truth import FrameTruth
from cladwatt.types import FloatArray

__all__ = ["take_picture"]

_FOIL_EMISSIVITY = 0.05


def make_scene(frame: PlantFrame, truth: FrameTruth, band: Band) -> Scene:
    """Return surroundings whose mean towards the camera's side is the real reflected one."""
    above, beside, below = frame.scene
    mean = truth.reflected_temperature
    scene = Scene(mean + above, mean + beside, mean + below)
    towards = np.array([[0.0, 0.0, -1.0]])
    for _ in range(3):
        off = mean - float(band.temperature(scene.diffuse(towards, band))[0])
        scene = Scene(scene.upward + off, scene.level + off, scene.downward + off)
    if frame.neighbour:
        x, y, z, half_width, excess = frame.neighbour
        hot = Neighbour((x, y, z), half_width, mean + excess)
        scene = replace(scene, neighbours=(hot,))
    return scene


def _background(
    frame: PlantFrame, truth: FrameTruth, scene: Scene, band: Band, random: np.random.Generator
) -> FloatArray:
    """Return the radiance of what stands behind, (rows, cols)."""
    shape = (frame.rows, frame.cols)
    scale = frame.cols / 640
    height = np.linspace(-1, 1, frame.rows)[:, None]
    temperature = truth.air_temperature + np.zeros(shape) - 0.8 * height
    temperature += 0.5 * smooth_field(shape, (60 * scale, 60 * scale), random)
    temperature += 0.2 * smooth_field(shape, (6 * scale, 6 * scale), random)
    for _ in range(5):
        row, col = random.integers(frame.rows), random.integers(frame.cols)
        tall, wide = random.integers(20, 150, 2) * scale
        part = (slice(row, row + int(tall)), slice(col, col + int(wide)))
        temperature[part] += random.normal(0, 1.2)
    radiance = band.radiance(temperature)
    if not frame.indoors:
        # overcast sky over the roofs opposite
        edge = 0.48 * frame.rows + 14 * scale * smooth_field((frame.cols,), (30 * scale,), random)
        sky = np.arange(frame.rows)[:, None] < edge
        cold = scene.upward - 6 + 10 * np.arange(frame.rows)[:, None] / frame.rows
        radiance = np.where(sky, band.radiance(np.broadcast_to(cold, shape)), radiance)
    if frame.foil:
        left, top, right, bottom = foil_box(frame)
        mirrored = float(scene.diffuse(np.array([[0.0, 0.0, -1.0]]), band)[0])
        mean = (1 - _FOIL_EMISSIVITY) * mirrored
        mean += _FOIL_EMISSIVITY * float(band.radiance(truth.air_temperature))
        slope = float(band.radiance_derivative(truth.reflected_temperature))
        facets = smooth_field((bottom - top, right - left), (1.5, 1.5), random)
        radiance[top:bottom, left:right] = mean + 0.8 * slope * (facets - facets.mean())
    return radiance


def take_picture(
    plant: Plant, frame: PlantFrame, truth: FrameTruth, pipes: list[PipeTruth], view: View,
    random: np.random.Generator,
) -> FloatArray:  # fmt: skip
    """Return the recorded temperatures of one frame, (rows, cols). [K]

    Parameters
    ----------
    plant : Plant
        Whose camera it is.
    frame : PlantFrame
        What is in view.
    truth : FrameTruth
        The conditions.
    pipes : list of PipeTruth
        The pipes, solved.
    view : View
        The camera's place.
    random : numpy.random.Generator
        Source of texture and noise.

    Returns
    -------
    (rows, cols) array
        Recorded temperature. [K]
    """
    band = true_band()
    scene = make_scene(frame, truth, band)
    background = _background(frame, truth, scene, band, random)
    seen = render(
        view, [pipe.skin for pipe in pipes], background, scene,
        AirPath(truth.transmission, truth.air_temperature), band,
        fine=3 if frame.cols < 480 else 2,
    )  # fmt: skip
    lens = seen if truth.window is None else truth.window.seen_through(seen, band)
    camera = plant.camera
    detector = Detector(
        blur=float(random.uniform(0.7, 1.0)),
        noise=camera["noise_K"],
        column_pattern=0.02,
        drift=0.06,
        calibration=truth.calibration,
        accuracy=AccuracyStatement(camera["accuracy_K"], camera["accuracy_of_reading_percent"]),
    )
    recording = Recording(
        emissivity=camera["emissivity"],
        reflected_temperature=ZERO_CELSIUS + camera["reflected_temperature_C"],
    )
    if frame.camera_window is not None:
        transmission, celsius = frame.camera_window
        recording = replace(
            recording, window_transmission=transmission, window_temperature=ZERO_CELSIUS + celsius
        )
    recorded = record(lens, detector, recording, band, random)
    if frame.upper_end_C is None:
        return recorded
    return np.minimum(recorded, ZERO_CELSIUS + frame.upper_end_C)
