"""From radiance at the lens to recorded temperatures: blur, noise, calibration, settings."""

from dataclasses import dataclass

import numpy as np

from cladwatt.physics.band import Band
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.survey.model import AccuracyStatement, Recording
from cladwatt.synthetic.fields import smooth_field
from cladwatt.types import FloatArray

__all__ = ["Detector", "gaussian_blur", "record"]

_NOISE_TEMPERATURE = ZERO_CELSIUS + 30.0
"""Temperature at which a camera's noise is stated. [K]"""


@dataclass(frozen=True)
class Detector:
    """What the camera does to the radiance.

    Parameters
    ----------
    blur : float
        Standard deviation of the lens's point spread. [px]
    noise : float
        White noise of one pixel at 30 °C. [K]
    column_pattern : float
        Standard deviation of the offset of a column. [K]
    drift : float
        Standard deviation of the slow non-uniformity. [K]
    calibration : float
        Error of calibration as a share of the stated limit, -1 to 1.
    accuracy : AccuracyStatement
        That limit.
    """

    blur: float
    noise: float
    column_pattern: float
    drift: float
    calibration: float
    accuracy: AccuracyStatement


def gaussian_blur(image: FloatArray, sigma: float) -> FloatArray:
    """Return an image blurred by a Gaussian of `sigma` pixels, edges continued."""
    if sigma <= 0:
        return image.copy()
    reach = int(np.ceil(4 * sigma))
    kernel = np.exp(-0.5 * (np.arange(-reach, reach + 1) / sigma) ** 2)
    kernel /= kernel.sum()
    result = image
    for axis in (0, 1):
        pad = [(0, 0), (0, 0)]
        pad[axis] = (reach, reach)
        wide = np.pad(result, pad, mode="edge")
        size = image.shape[axis]
        parts = [weight * np.take(wide, np.arange(i, i + size), axis=axis)
                 for i, weight in enumerate(kernel)]  # fmt: skip
        result = np.sum(parts, axis=0)
    return result


def record(
    lens: FloatArray,
    detector: Detector,
    recording: Recording,
    band: Band,
    random: np.random.Generator,
) -> FloatArray:
    """Return what the camera records.

    Parameters
    ----------
    lens : (rows, cols) array
        Radiance at the lens. [W/(m2 sr)]
    detector : Detector
        What the camera does to it.
    recording : Recording
        Settings it applies.
    band : Band
        Its band.
    random : numpy.random.Generator
        Source of the noise.

    Returns
    -------
    (rows, cols) array
        Recorded temperature. [K]
    """
    rows, cols = lens.shape
    radiance = gaussian_blur(lens, detector.blur)
    disturbance = detector.noise * random.standard_normal((rows, cols))
    disturbance += detector.column_pattern * random.standard_normal(cols)
    disturbance += detector.drift * smooth_field((rows, cols), (rows / 6, cols / 6), random)
    radiance = radiance + disturbance * float(band.radiance_derivative(_NOISE_TEMPERATURE))
    black = band.temperature(radiance)
    limit = np.maximum(
        detector.accuracy.limit,
        detector.accuracy.percent / 100 * np.abs(black - ZERO_CELSIUS),
    )
    radiance = band.radiance(black + detector.calibration * limit)
    if recording.window_transmission < 1 and recording.window_temperature is not None:
        radiance = radiance - (1 - recording.window_transmission) * band.radiance(
            recording.window_temperature
        )
    radiance = radiance / recording.window_transmission
    if recording.transmission < 1 and recording.atmosphere_temperature is not None:
        radiance = radiance - (1 - recording.transmission) * band.radiance(
            recording.atmosphere_temperature
        )
    radiance = radiance / recording.transmission
    if recording.emissivity < 1 and recording.reflected_temperature is not None:
        radiance = radiance - (1 - recording.emissivity) * band.radiance(
            recording.reflected_temperature
        )
    recorded: FloatArray = band.temperature(radiance / recording.emissivity)
    return recorded
