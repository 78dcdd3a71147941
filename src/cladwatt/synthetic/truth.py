"""What was really so: draws of everything declared, and of what nobody declares."""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

from cladwatt.materials.tables import lagging_material
from cladwatt.physics.atmosphere import air_path_transmission
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.synthetic.plant import Declared, PlantFrame, PlantLine

__all__ = ["FrameTruth", "LineTruth", "Shared", "draw_frame", "draw_line", "draw_shared"]

_BAND_LIMITS = (7.5e-6, 14e-6)
INSTALLATION_FACTOR = Declared(1.15, 0.08)


@dataclass(frozen=True)
class Shared:
    """Errors that all frames of a survey share, standard normal."""

    calibration: float
    convection: float


@dataclass(frozen=True)
class LineTruth:
    """One line as it really is. SI."""

    fluid_temperature: float
    pipe_diameter: float
    thickness: float
    band_emissivity: float
    total_emissivity: float
    bare_emissivity: float
    conductivity_factor: float
    installation_factor: float
    curve: ConductivityIntegral


@dataclass(frozen=True)
class FrameTruth:
    """The conditions of one frame as they really were. SI."""

    air_temperature: float
    surroundings_temperature: float
    reflected_temperature: float
    relative_humidity: float
    wind_speed: float
    distance_ratio: float
    """Real distance over the one in the plant file."""
    transmission: float
    convection_factor: float
    unevenness: float
    """Amplitude of the convection coefficient around the pipe, relative."""
    unevenness_angle: float
    """Where it is largest. [rad]"""
    calibration: float
    """Share of the camera's limit, -1 to 1."""


def draw_shared(random: np.random.Generator) -> Shared:
    """Draw what all frames share."""
    first, second = random.standard_normal(2)
    return Shared(float(first), float(second))


def _draw(
    declared: Declared, random: np.random.Generator, low: float = -np.inf, high: float = np.inf
) -> float:
    """Draw from a normal distribution cut at bounds."""
    while True:
        value = float(declared.value + declared.u * random.standard_normal())
        if low < value < high:
            return value


def draw_line(line: PlantLine, random: np.random.Generator) -> LineTruth:
    """Draw one line.

    Parameters
    ----------
    line : PlantLine
        What is declared of it.
    random : numpy.random.Generator
        Source of randomness.

    Returns
    -------
    LineTruth
        The draw; band and total emissivity are off together, with correlation 0.7.
    """
    known = line.quantities
    material = lagging_material(line.material)
    band = _draw(known["emissivity"], random, 0.02, 0.985)
    off = (band - known["emissivity"].value) / known["emissivity"].u
    rest = float(np.sqrt(1 - 0.7**2) * random.standard_normal())
    total = known["total_emissivity"].value + known["total_emissivity"].u * (0.7 * off + rest)
    return LineTruth(
        fluid_temperature=ZERO_CELSIUS + _draw(known["fluid_temperature_C"], random),
        pipe_diameter=_draw(known["pipe_outside_diameter_mm"], random) / 1000,
        thickness=_draw(known["lagging_thickness_mm"], random, 5.0) / 1000,
        band_emissivity=band,
        total_emissivity=float(np.clip(total, 0.02, 0.985)),
        bare_emissivity=_draw(Declared(0.82, 0.06), random, 0.5, 0.97),
        conductivity_factor=_draw(Declared(1.0, material.u_relative), random, 0.5, 2.0),
        installation_factor=_draw(INSTALLATION_FACTOR, random, 0.8, 3.0),
        curve=ConductivityIntegral(list(material.temperature), list(material.conductivity)),
    )


def draw_frame(frame: PlantFrame, shared: Shared, random: np.random.Generator) -> FrameTruth:
    """Draw the conditions of one frame.

    Parameters
    ----------
    frame : PlantFrame
        What is declared of it.
    shared : Shared
        Errors common to the survey: half of the variance of calibration and convection law.
    random : numpy.random.Generator
        Source of randomness.

    Returns
    -------
    FrameTruth
        The draw.
    """
    known = frame.conditions
    air = ZERO_CELSIUS + _draw(known["air_temperature_C"], random)
    humidity = _draw(known["relative_humidity"], random, 0.05, 0.98)
    distance = known["distance_m"]
    path = _draw(distance, random, 0.5)
    own_calibration, own_convection = random.standard_normal(2)
    spread = 0.10 if frame.indoors else 0.15
    transmission = float(air_path_transmission(
        path, air_temperature=air, relative_humidity=humidity, band_limits=_BAND_LIMITS
    ))  # fmt: skip
    return FrameTruth(
        air_temperature=air,
        surroundings_temperature=ZERO_CELSIUS + _draw(known["surroundings_temperature_C"], random),
        reflected_temperature=ZERO_CELSIUS + _draw(known["reflected_temperature_C"], random),
        relative_humidity=humidity,
        wind_speed=_draw(known["wind_speed_m_s"], random, 0.0),
        distance_ratio=path / distance.value,
        transmission=min(1.0, transmission * (1 + 0.15 * (1 - transmission) * random.normal())),
        convection_factor=float(
            np.exp(spread * np.sqrt(0.5) * (shared.convection + own_convection))
        ),
        unevenness=float(random.uniform(0.10, 0.20)),
        # still air cools the underside best, wind the side it meets
        unevenness_angle=float(np.pi if frame.indoors else random.uniform(0, 2 * np.pi)),
        calibration=float(2 * ndtr(np.sqrt(0.5) * (shared.calibration + own_calibration)) - 1),
    )
