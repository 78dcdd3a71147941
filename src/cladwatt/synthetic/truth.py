"""What was really so: draws of everything declared, and of what nobody declares."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any, Literal

import numpy as np
from scipy.special import ndtr

from cladwatt.materials.tables import cladding_material, lagging_material
from cladwatt.physics.atmosphere import air_path_transmission
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from cladwatt.physics.steam import saturation_temperature
from cladwatt.synthetic.layered import LayeredCurve, gap_coefficient
from cladwatt.synthetic.outdoors import draw_reflected, draw_surroundings
from cladwatt.synthetic.plant import Declared, PlantFrame, PlantLine
from cladwatt.synthetic.soaked import soaked
from cladwatt.synthetic.window import TrueWindow, draw_window
from cladwatt.types import FloatArray

__all__ = [
    "RADIAL_CELLS",
    "ConvectionLaw",
    "FrameTruth",
    "LineTruth",
    "Shared",
    "draw_frame",
    "draw_line",
    "draw_shared",
]

ConvectionLaw = Literal["churchill", "morgan_zukauskas"]
RADIAL_CELLS = 5
"""Cells from the pipe to the cladding."""

_BAND_LIMITS = (7.5e-6, 14e-6)
INSTALLATION_FACTOR = Declared(1.15, 0.08)
_BARE_EMISSIVITY = Declared(0.82, 0.06)


@dataclass(frozen=True)
class Shared:
    """Errors that all frames of a survey share, standard normal."""

    calibration: float
    convection: float
    law: ConvectionLaw = "churchill"
    """Correlations the air obeys."""
    bias: float = 1.0
    """Multiplies every convection coefficient."""


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
    curve: ConductivityIntegral | LayeredCurve
    solar_absorptance: float = 0.0
    gap: float = 0.0
    """Air gap under the cladding. [m]"""
    gap_coefficient: Callable[[FloatArray], FloatArray] | None = None
    tracer_temperature: float | None = None
    hours_at_temperature: float | None = None
    layer_thickness: tuple[float, ...] = ()
    layer_factor: tuple[float, ...] = ()
    """Of each layer of lagging where there are several; of its conductivity."""
    found_curve: LayeredCurve | None = None
    """With the water or ice that the lagging holds; `curve` is that of dry lagging."""
    condition_factor: tuple[float, ...] = ()
    """Of each layer where any is wet or frozen: its conductivity over the dry one."""
    inside_coefficient: float = 1e6
    """From the fluid to the outside of the wall, on that. [W/(m2 K)]"""
    tracer_power: float | None = None
    """[W/m]"""
    heat_flow: float | None = None
    """Mass flow times specific heat. [W/K]"""
    supports_share: float = 0.0
    """What supports in the lagging add to its conductance."""


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
    sun: tuple[float, ...] = ()
    """Towards the sun, in camera coordinates."""
    solar_irradiance: float = 0.0
    """On the pipe's projected area. [W/m2]"""
    wet: bool = False
    """Whether rain stands on the cladding."""
    convection_law: ConvectionLaw = "churchill"
    window: TrueWindow | None = None
    wind_angle_deg: float | None = None
    """Between wind and axis, where the wind is not taken across."""
    wind_uphill: int = 0
    """1 where it blows up an inclined run, -1 down it."""


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
    band = _draw(known["emissivity"], random, 0.02, 0.985)
    off = (band - known["emissivity"].value) / known["emissivity"].u
    rest = float(np.sqrt(1 - 0.7**2) * random.standard_normal())
    total = known["total_emissivity"].value + known["total_emissivity"].u * (0.7 * off + rest)
    fluid = _fluid_temperature(line, random)
    diameter = _draw(known["pipe_outside_diameter_mm"], random) / 1000
    lagging = _layered(line, diameter, random) if line.layers else _single(line, random)
    absorptance = cladding_material(line.cladding).solar_absorptance
    plain = LineTruth(
        fluid_temperature=fluid, pipe_diameter=diameter, band_emissivity=band,
        total_emissivity=float(np.clip(total, 0.02, 0.985)),
        **lagging,
        installation_factor=_draw(INSTALLATION_FACTOR, random, 0.8, 3.0),
    )  # fmt: skip
    # what came later is drawn last, so that a seed keeps its lines
    hours = known.get("hours_at_temperature")
    tracer = known.get("tracer_temperature_C")
    later = replace(
        plain,
        solar_absorptance=_draw(Declared(absorptance.value, absorptance.u), random, 0.05, 0.97),
        hours_at_temperature=None if hours is None else _draw(hours, random, 0.05),
        tracer_temperature=None if tracer is None else ZERO_CELSIUS + _draw(tracer, random),
    )
    return _with_inside(line, _with_water(line, later, random), random)


def _with_inside(line: PlantLine, truth: LineTruth, random: np.random.Generator) -> LineTruth:
    """Draw film, tracer's power, flow and supports where they are declared."""

    def drawn(key: str) -> float | None:
        known = line.quantities.get(key)
        return None if known is None else _draw(known, random, 0.0)

    film, power, flow = drawn("inside_film_W_m2_K"), drawn("tracer_power_W_m"), drawn("flow_kg_s")
    heat, supports = drawn("specific_heat_J_kg_K"), drawn("supports_allowance")
    return replace(
        truth,
        inside_coefficient=line.inside_coefficient if film is None else film,
        tracer_power=power,
        heat_flow=None if flow is None or heat is None else flow * heat,
        supports_share=supports or 0.0,
    )


def _with_water(line: PlantLine, truth: LineTruth, random: np.random.Generator) -> LineTruth:
    """Draw what water and ice are in lagging that is declared wet or frozen."""
    if not line.is_soaked:
        return truth
    names = [(one.material, one.condition) for one in line.layers if one.material]
    found = soaked(
        truth.curve,
        names or [(line.material, line.condition)],
        truth.layer_thickness or (truth.thickness,),
        truth.pipe_diameter / 2,
        RADIAL_CELLS,
        random,
    )
    # the cells between the pipe and a surface near room temperature
    middle = (np.arange(RADIAL_CELLS) + 0.5) / RADIAL_CELLS
    cells = truth.fluid_temperature + middle * (ZERO_CELSIUS + 10.0 - truth.fluid_temperature)
    factors = tuple(found.found_over_dry(i, cells) for i in range(len(found.curves)))
    return replace(truth, found_curve=found, condition_factor=factors)


def _fluid_temperature(line: PlantLine, random: np.random.Generator) -> float:
    """Draw what flows in the pipe; steam boils at what its gauge shows over the air's pressure."""
    for key in ("fluid_temperature_C", "wall_temperature_C"):
        if key in line.quantities:
            return ZERO_CELSIUS + _draw(line.quantities[key], random)
    gauge = 1e5 * _draw(line.quantities["steam_pressure_bar"], random)
    return float(saturation_temperature(gauge + STANDARD_PRESSURE + 200 * random.standard_normal()))


def _single(line: PlantLine, random: np.random.Generator) -> dict[str, Any]:
    """Draw lagging of one layer."""
    material = lagging_material(line.material)
    return {
        "thickness": _draw(line.quantities["lagging_thickness_mm"], random, 5.0) / 1000,
        "bare_emissivity": _draw(_BARE_EMISSIVITY, random, 0.5, 0.97),
        "conductivity_factor": _draw(Declared(1.0, material.u_relative), random, 0.5, 2.0),
        "curve": ConductivityIntegral(list(material.temperature), list(material.conductivity)),
    }


def _layered(line: PlantLine, diameter: float, random: np.random.Generator) -> dict[str, Any]:
    """Draw lagging of several layers and the air gap over it."""
    solid = [layer for layer in line.layers if layer.material]
    materials = [lagging_material(layer.material) for layer in solid]
    thickness = tuple(_draw(layer.thickness_mm, random, 2.0) / 1000 for layer in solid)
    factors = tuple(_draw(Declared(1.0, m.u_relative), random, 0.5, 2.0) for m in materials)
    curves = tuple(ConductivityIntegral(list(m.temperature), list(m.conductivity))
                   for m in materials)  # fmt: skip
    found: dict[str, Any] = {
        "thickness": sum(thickness),
        "bare_emissivity": _draw(_BARE_EMISSIVITY, random, 0.5, 0.97),
        "conductivity_factor": 1.0,
        "curve": LayeredCurve.stacked(diameter / 2, thickness, curves, factors, RADIAL_CELLS),
        "layer_thickness": thickness,
        "layer_factor": factors,
    }
    for layer in line.layers:
        if not layer.material:
            gap = _draw(layer.thickness_mm, random, 1.0) / 1000
            found["gap"] = gap
            found["gap_coefficient"] = gap_coefficient(
                gap, layer.inner_emissivity, layer.outer_emissivity
            )
    return found


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
    # what came later draws from a stream of its own, so that a seed keeps its frames
    (more,) = random.spawn(1)
    surroundings = draw_surroundings(frame, air, humidity, more)
    if surroundings is None:
        surroundings = ZERO_CELSIUS + _draw(known["surroundings_temperature_C"], random)
    reflected = draw_reflected(frame, air, more)
    if reflected is None:
        reflected = ZERO_CELSIUS + _draw(known["reflected_temperature_C"], random)
    sun = known.get("solar_irradiance_W_m2") if frame.sun else None
    angle = known.get("wind_angle_deg")
    return FrameTruth(
        air_temperature=air,
        surroundings_temperature=surroundings,
        reflected_temperature=reflected,
        relative_humidity=humidity,
        wind_speed=_draw(known["wind_speed_m_s"], random, 0.0),
        distance_ratio=path / distance.value,
        transmission=min(1.0, transmission * (1 + 0.15 * (1 - transmission) * random.normal())),
        convection_factor=float(
            shared.bias * np.exp(spread * np.sqrt(0.5) * (shared.convection + own_convection))
        ),
        unevenness=float(random.uniform(0.10, 0.20)),
        # still air cools the underside best, wind the side it meets
        unevenness_angle=float(np.pi if frame.indoors else random.uniform(0, 2 * np.pi)),
        calibration=float(2 * ndtr(np.sqrt(0.5) * (shared.calibration + own_calibration)) - 1),
        sun=frame.sun,
        solar_irradiance=0.0 if sun is None else _draw(sun, more, 0.0),
        wet=frame.wet,
        convection_law=shared.law,
        window=draw_window(frame, air, more),
        wind_angle_deg=None if angle is None else _draw(angle, more, 0.0, 90.0),
        wind_uphill={"up": 1, "down": -1, "": 0}[frame.wind_along],
    )
