"""The measurement that would help most: what each would leave of the loss's uncertainty.

Every measurement is known by its reading: what the instrument would show in each draw after the
joint estimate, and with what standard uncertainty. A reading is then pretended, each draw weighed
by how well it agrees with it, and the width of the loss taken from the weighed draws; the mean
over a few readings, as likely as the draws make them, is the promise. A tape patch thus says of
the emissivity what it can in the light of what is known of the reflected temperature, and nothing
where the surface is within 10 K of it.

References
----------
.. [1] Lindley, "On a measure of the information provided by an experiment", Annals of
   Mathematical Statistics 27 (1956) 986-1005 (worth of a measurement not yet made).
.. [2] Beaumont, Zhang, Balding, "Approximate Bayesian computation in population genetics",
   Genetics 162 (2002) 2025-2035 (draws about a sharp reading moved to it by regression).
"""

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws, mirrored
from cladwatt.inverse.references import (
    BACKGROUND_EMISSIVITY_U,
    FOIL_U,
    TAPE_COOLING,
    TAPE_COOLING_METAL,
    at_lens,
)
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws
from cladwatt.inverse.sunlit import MEAN_SHARE, sunlit_excess
from cladwatt.materials.load import shipped_tables
from cladwatt.physics.field_methods import MINIMUM_SEPARATION
from cladwatt.quantities import Remark
from cladwatt.types import FloatArray

__all__ = [
    "LEAST_GAIN",
    "Measurement",
    "best_measurement",
    "measurements_of",
    "ranked_measurements",
    "width_after",
]

AIR_U = 0.3
"""A shaded thermometer near the pipe; assumption. [K]"""
SURROUNDINGS_U = 1.0
"""Walls, roof and floor measured one by one; assumption. [K]"""
WIND_U, WIND_U_RELATIVE = 0.1, 0.1
"""An anemometer at the pipe, the larger of the two; assumption. [m/s], [-]"""
INSIDE_U = 1.0
"""A sensor in a well of the pipe; assumption. [K]"""
BACKGROUND_U = 0.5
"""A probe on a painted wall near the air's temperature; assumption. [K]"""
LAGGING_U = 0.04
"""Resistance by thickness and data sheet; assumption. [-]"""
CLOSER_LEAVES = 1 / 3
"""Of the air path's uncertainty, from a third of the distance; assumption."""
HOUR_LEAVES = 0.05
"""Of the sun's uncertainty, at an hour without; assumption."""
LEAST_GAIN = 0.1
"""Advice that would narrow the interval by less than this share is not given."""
LEAST_CORRELATION = 0.25
"""Of loss and reading, below which a measurement narrows nothing by a tenth."""
READINGS = (0.1, 0.3, 0.5, 0.7, 0.9)
"""Quantiles of a reading beforehand at which it is pretended."""
SHARPEST = 0.35
"""Of the draws' spread: a sharper reading takes in draws this far about, moved to it."""


@dataclass(frozen=True)
class Measurement:
    """A measurement that could be made.

    Attributes
    ----------
    key : str
        Of its advice.
    reading : (count,) array
        What it would show in each draw.
    u : float
        Standard uncertainty of the reading, in its unit.
    """

    key: str
    reading: FloatArray
    u: float


Shift = Callable[[FloatArray], FloatArray]


def measurements_of(seen: Seen, sound: SoundDraws | None, shift: Shift) -> tuple[Measurement, ...]:
    """Return every measurement that could be made beside a region.

    Parameters
    ----------
    seen : Seen
        After the joint estimate; draws of the frame and the emissivity as they were before.
    sound : SoundDraws or None
        After the joint estimate.
    shift : callable
        Moves draws as the joint estimate does.
    """
    frame = replace(
        seen.frame,
        air_temperature=shift(seen.frame.air_temperature),
        reflected_temperature=shift(seen.frame.reflected_temperature),
        calibration=shift(seen.frame.calibration),
        transmission=np.clip(shift(seen.frame.transmission), 0.05, 1.0),
    )
    found = [
        *_on_the_cladding(seen, frame),
        _foil(seen, frame),
        _background(frame),
        Measurement("advice.air_temperature", frame.air_temperature, AIR_U),
        Measurement(
            "advice.surroundings", shift(seen.frame.surroundings_temperature), SURROUNDINGS_U
        ),
        _left("advice.closer_frame", frame.transmission, CLOSER_LEAVES),
    ]
    sun = sunlit_excess(seen)
    if sun is not None:
        mean = MEAN_SHARE * seen.line_draws.solar_absorptance * seen.frame.irradiance
        found.append(_left("advice.other_hour", shift(sun + mean), HOUR_LEAVES))
    if seen.frame.wind_speed is not None:
        wind = shift(seen.frame.wind_speed)
        u = max(WIND_U, WIND_U_RELATIVE * float(np.median(wind)))
        found.append(Measurement("advice.wind", wind, u))
    if seen.line_draws.inside_temperature is not None:
        inside = seen.line_draws.inside_temperature
        found.append(Measurement("advice.inside_temperature", inside, INSIDE_U))
    if sound is not None:
        resistance = np.log(sound.specified_resistance)
        found.append(Measurement("advice.lagging_data", resistance, LAGGING_U))
    return tuple(found)


def best_measurement(loss: FloatArray | None, measurements: Sequence[Measurement]) -> Remark | None:
    """Return the measurement that would narrow the loss most, with the widths it promises.

    Parameters
    ----------
    loss : (count,) array or None
        After the joint estimate. [W/m]
    measurements : sequence of Measurement

    Returns
    -------
    Remark or None
        Half widths now and then, in percent; None where nothing would narrow the interval by a
        tenth.
    """
    ranked = ranked_measurements(loss, measurements)
    return ranked[0] if ranked else None


def ranked_measurements(
    loss: FloatArray | None, measurements: Sequence[Measurement]
) -> tuple[Remark, ...]:
    """Return every measurement that narrows the loss by a tenth, the best first.

    Parameters
    ----------
    loss, measurements
        As for `best_measurement`.
    """
    if loss is None:
        return ()
    now = _half_width(loss, np.ones_like(loss))
    widths = [(width_after(loss, one), one.key) for one in _telling(loss, measurements)]
    return tuple(
        Remark(key, (("width_now", 100 * now), ("width_then", 100 * then)))
        for then, key in sorted(widths)
        if then <= (1 - LEAST_GAIN) * now
    )


def _telling(loss: FloatArray, measurements: Sequence[Measurement]) -> list[Measurement]:
    """Leave out what neither the loss, nor how far it is off, hangs on."""
    if not measurements:
        return []
    readings = np.stack([one.reading for one in measurements])
    usable = np.isfinite(loss) & np.isfinite(readings).all(axis=0)
    if usable.sum() < 10:
        return []
    loss, readings = loss[usable], readings[:, usable]
    targets = np.stack([loss, np.abs(loss - np.median(loss))])
    targets = targets - targets.mean(axis=1, keepdims=True)
    readings = readings - readings.mean(axis=1, keepdims=True)
    noise = np.array([one.u for one in measurements])
    spread = np.sqrt((readings**2).mean(axis=1) + noise**2)
    scale = np.outer(spread, np.sqrt((targets**2).mean(axis=1)))
    with np.errstate(divide="ignore", invalid="ignore"):
        hang = np.abs(readings @ targets.T / loss.size / scale).max(axis=1)
    return [one for one, found in zip(measurements, hang, strict=True) if found > LEAST_CORRELATION]


def width_after(loss: FloatArray, measurement: Measurement) -> float:
    """Return the half width of the loss over its median that a measurement would leave.

    Parameters
    ----------
    loss : (count,) array
        NaN left out.
    measurement : Measurement

    Returns
    -------
    float
        The mean over readings as likely as the draws make them; NaN where it would say nothing.
    """
    usable = np.isfinite(loss) & np.isfinite(measurement.reading)
    loss, reading = loss[usable], measurement.reading[usable]
    spread = float(np.std(reading)) if reading.size > 2 else 0.0
    if spread == 0:
        return math.nan
    about = max(measurement.u, SHARPEST * spread)
    moved = 1 - min(measurement.u / about, 1.0)
    # as likely beforehand as the draws make them, up to the instrument's own error
    widened = math.hypot(1.0, measurement.u / spread)
    middle = float(np.median(reading))
    widths = []
    for shown in middle + widened * (np.quantile(reading, READINGS) - middle):
        away = reading - shown
        weights = np.exp(-0.5 * (away / about) ** 2)
        narrowed = loss - moved * _slope(loss, away, weights) * away if moved > 0 else loss
        widths.append(_half_width(narrowed, weights))
    return float(np.mean(widths))


def _slope(loss: FloatArray, away: FloatArray, weights: FloatArray) -> float:
    """Return the weighted slope of the loss against the reading."""
    total = weights.sum()
    centred = away - weights @ away / total
    square = float(weights @ centred**2)
    return float(weights @ (centred * loss)) / square if square > 0 else 0.0


def _half_width(loss: FloatArray, weights: FloatArray) -> float:
    """Return half the 95 % interval of weighted draws over the size of their median."""
    order = np.argsort(loss)
    share = np.cumsum(weights[order])
    share = (share - 0.5 * weights[order]) / share[-1]
    low, median, high = np.interp((0.025, 0.5, 0.975), share, loss[order])
    return float((high - low) / 2 / abs(median)) if median else math.inf


def _left(key: str, values: FloatArray, share: float) -> Measurement:
    """Return a measurement that leaves a share of the values' spread."""
    return Measurement(key, values, float(np.std(values)) * share / math.sqrt(1 - share**2))


def _recorded(frame: FrameDraws, apparent: FloatArray) -> FloatArray:
    """Return what the camera shows of something, its error included, (count,). [K]"""
    lens = at_lens(frame, apparent)
    offset = frame.calibration_offset(np.array([float(np.median(lens))]))[:, 0]
    return np.asarray(lens - offset)


def _on_the_cladding(seen: Seen, frame: FrameDraws) -> list[Measurement]:
    """Return tape and contact probe, where the surface is far enough from what it mirrors."""
    stations = np.flatnonzero(seen.usable)
    some = stations[:: max(1, stations.size // 20)]
    surface = seen.drawn.surface_temperature[:, some].mean(axis=1)
    apart = abs(float(np.median(surface)) - float(np.median(frame.reflected_temperature)))
    if not apart >= MINIMUM_SEPARATION:
        return []
    defaults = shipped_tables().defaults
    tape, probe = defaults["tape_emissivity"], defaults["u_contact_reading"].value
    band = frame.band
    black, reflected = band.radiance(surface), band.radiance(frame.reflected_temperature)

    def shown(emissivity: float) -> FloatArray:
        return _recorded(frame, band.temperature(emissivity * black + (1 - emissivity) * reflected))

    cooling = TAPE_COOLING_METAL if seen.line_draws.is_metal else TAPE_COOLING
    # a half-normal share has the standard deviation sqrt(1 - 2 / pi)
    off = math.hypot(tape.u / tape.value, cooling * math.sqrt(1 - 2 / math.pi))
    reading = shown(tape.value)
    u = abs(float(np.median(shown(tape.value * (1 - off)) - reading)))
    return [
        Measurement("advice.tape_patch", reading, u),
        Measurement("advice.contact_temperature", surface, probe),
    ]


def _foil(seen: Seen, frame: FrameDraws) -> Measurement:
    """Return the reflector: it shows the mean over the half space, not what the region mirrors."""
    nothing = replace(seen.frame, reflected_temperature=np.zeros(frame.count))
    own = mirrored(
        nothing,
        seen.book,
        seen.region.id,
        is_metal=seen.line.cladding.is_metal,
        indoors=seen.conditions.indoors is not False,
    ).reflected_temperature
    foil = shipped_tables().defaults["foil_emissivity"]
    band = frame.band
    air, scene = (
        band.radiance(values)
        for values in (frame.air_temperature, frame.reflected_temperature - own)
    )

    def shown(emissivity: float) -> FloatArray:
        return _recorded(frame, band.temperature(emissivity * air + (1 - emissivity) * scene))

    reading = shown(foil.value)
    off = float(np.median(shown(foil.value + foil.u) - reading))
    return Measurement("advice.reflector", reading, math.hypot(FOIL_U, off))


def _background(frame: FrameDraws) -> Measurement:
    """Return a painted wall of known temperature, which tells the camera's error."""
    offset = frame.calibration_offset(np.array([float(np.median(frame.air_temperature))]))[:, 0]
    return Measurement(
        "advice.background", offset, math.hypot(BACKGROUND_U, BACKGROUND_EMISSIVITY_U)
    )
