"""One pipe of one frame: built, damaged, solved, and made ready to be seen."""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.synthetic.bodies import PlacedBody, bodies_on, lay_bodies
from cladwatt.synthetic.columns import ColumnModel
from cladwatt.synthetic.conduction_3d import SurfaceFlux, heat_up, solve_columns
from cladwatt.synthetic.damage import Damage, DamageKind, draw_damage, lay_in
from cladwatt.synthetic.exchange import (
    Weather,
    absorbed_sun,
    surface_flux,
    water_share,
)
from cladwatt.synthetic.fields import smooth_field
from cladwatt.synthetic.geometry import PipeAxis, View
from cladwatt.synthetic.inside import fluid_after, inside_of, tracer_warmth
from cladwatt.synthetic.plant import PlantLine, PlantPipe
from cladwatt.synthetic.render import Patch, Skin
from cladwatt.synthetic.skins import skin_of, tape_on
from cladwatt.synthetic.truth import RADIAL_CELLS, FrameTruth, LineTruth
from cladwatt.types import BoolArray, FloatArray

__all__ = ["PipeTruth", "build_pipe"]

_CELL_LENGTH = 0.015
_AROUND = 24
_SCATTER = 0.03
"""Relative scatter of sound lagging along the pipe."""


@dataclass(frozen=True)
class PipeTruth:
    """One pipe as it really is and gives off heat; stations from the start of the axis.

    Parameters
    ----------
    plant : PlantPipe
        What was asked for.
    axis : PipeAxis
        Where it is.
    drawn : (float, float)
        Stations of the near surface between which the inspector means to draw. [m]
    damage : Damage
        What is wrong with it.
    bodies : tuple of PlacedBody
        Components on it.
    tape : Patch or None
        The tape on it.
    station : (n_x,) array
        Middle of each column. [m]
    cell_length : float
        [m]
    heat_loss, surface_temperature, resistance : (n_x,) array
        Truth along the pipe. [W/m], [K], [m K/W]
    inside_heat : (n_x,) array
        What fluid and tracer give off there; differs from the loss by what flows lengthwise, and
        while it warms up. [W/m]
    tracer_heat : (n_x,) array or None
        What a steam tracer gives straight to the lagging, or an electric one in all. [W/m]
    untraced_loss : (n_x,) array or None
        Loss of the same pipe with the tracer off. [W/m]
    water_share : (n_x,) array
        Share of the surface under water.
    sound_loss, specified_loss : float
        In the same conditions, all at rest, any tracer off. [W/m]
    skin : Skin
        What the camera sees.
    is_soaked : bool
        Whether its lagging is wet or frozen throughout, over any damage.
    """

    plant: PlantPipe
    axis: PipeAxis
    drawn: tuple[float, float]
    damage: Damage
    bodies: tuple[PlacedBody, ...]
    tape: Patch | None
    station: FloatArray
    cell_length: float
    heat_loss: FloatArray
    surface_temperature: FloatArray
    resistance: FloatArray
    inside_heat: FloatArray
    tracer_heat: FloatArray | None
    untraced_loss: FloatArray | None
    water_share: FloatArray
    sound_loss: float
    specified_loss: float
    skin: Skin
    is_soaked: bool = False

    @property
    def is_drawn(self) -> BoolArray:
        """Columns within the drawn part, (n_x,)."""
        inside: BoolArray = (self.station > self.drawn[0]) & (self.station < self.drawn[1])
        return inside

    @property
    def is_component(self) -> BoolArray:
        """Columns of any component, (n_x,)."""
        taken = np.zeros(self.station.size, dtype=bool)
        for body in self.bodies:
            taken |= body.covers(self.station)
        return taken


def _axis(pipe: PlantPipe, view: View, distance_ratio: float) -> PipeAxis:
    vertices = np.array([
        view.place(x * view.cols, y * view.rows, depth * distance_ratio)
        for x, y, depth in pipe.ends
    ])  # fmt: skip
    first = vertices[1] - vertices[0]
    upright = abs(first[1]) > 0.9 * float(np.linalg.norm(first))
    return PipeAxis(vertices, np.array([0.0, 0.0, -1.0] if upright else [0.0, -1.0, 0.0]))


def _facing(axis: PipeAxis) -> float:
    """Return the angle around the pipe of the side the camera sees. [rad]"""
    leg = axis.leg_of(axis.length / 2)
    towards = -axis.point(axis.length / 2)
    zero, direction = axis.zeros[leg], axis.directions[leg]
    return float(np.arctan2(towards @ np.cross(direction, zero), towards @ zero))


def _model(
    line: LineTruth, plant: PlantLine, frame: FrameTruth, shape: tuple[int, int], length: float,
    factor: FloatArray,
) -> ColumnModel:  # fmt: skip
    return ColumnModel(
        inside_temperature=inside_of(plant, line, shape[1]),
        inside_coefficient=line.inside_coefficient,
        pipe_radius=line.pipe_diameter / 2,
        thickness=np.full(shape, line.thickness),
        cell_length=length,
        conductivity_curve=(line.found_curve or line.curve).conductivity,
        factor=np.broadcast_to(
            line.conductivity_factor * factor[:, None, None], (*shape, RADIAL_CELLS)
        ).copy(),
        sheet_conductance=plant.sheet_conductivity * plant.cladding_thickness_mm / 1000,
        exposed=np.zeros(shape, dtype=bool),
        air_temperature=frame.air_temperature,
        gap=line.gap,
        gap_coefficient=line.gap_coefficient,
        heat_capacity=plant.heat_capacity,
    )


def _tracer_heat(plant: PlantLine, line: LineTruth, given: FloatArray) -> FloatArray | None:
    """Return what of the heat given inside is the tracer's, (n_x,). [W/m]"""
    warmth = tracer_warmth(plant, given.shape[1])
    if warmth is None:
        return None
    if line.tracer_power is not None:
        return np.full(given.shape[0], line.tracer_power)
    heat: FloatArray = (warmth * given).sum(axis=1)
    return heat


def _untraced_loss(
    plant: PlantLine, line: LineTruth, model: ColumnModel, flux: SurfaceFlux
) -> FloatArray | None:
    """Return the loss of the same pipe with its tracer off, None where it has none. [W/m]"""
    if plant.tracer_clock is None:
        return None
    inside = inside_of(replace(plant, tracer_clock=None), line, model.exposed.shape[1])
    off = replace(model, inside_temperature=inside)
    return solve_columns(off, flux).heat_loss(float(model.cell_length))


def _plain_loss(
    line: LineTruth,
    plant: PlantLine,
    frame: FrameTruth,
    factor: float,
    weather: Weather,
    inclination_deg: float,
) -> float:
    """Return the loss of the undamaged pipe at rest, untraced, with this factor. [W/m]"""
    dry, plant = replace(line, found_curve=None), replace(plant, tracer_clock=None)
    model = _model(dry, plant, frame, (2, _AROUND), 1.0, np.full(2, factor))
    mean = Weather(
        *(None if part is None else part.mean(axis=0, keepdims=True).repeat(2, axis=0)
          for part in (weather.sun, weather.rain))
    )  # fmt: skip
    flux = surface_flux(model, line, frame, inclination_deg, mean)
    return float(solve_columns(model, flux).heat_loss(1.0)[0])


def _down_the_line(
    pipe: PlantPipe, plant: PlantLine, line: LineTruth, frame: FrameTruth, factor: float,
    slope: float,
) -> LineTruth:  # fmt: skip
    """Return the line with its fluid as it comes here, a metre behind what is drawn first."""

    def loss(fluid: float) -> float:
        here = replace(line, fluid_temperature=fluid)
        return _plain_loss(here, plant, frame, factor, Weather(), slope)

    fluid = fluid_after(line, pipe.start_m + 1.0 if pipe.start_m else 0.0, loss)
    return replace(line, fluid_temperature=fluid)


def _weather(
    axis: PipeAxis, shape: tuple[int, int], line: LineTruth, frame: FrameTruth,
    random: np.random.Generator,
) -> Weather:  # fmt: skip
    sun = absorbed_sun(axis, shape, frame, line.solar_absorptance)
    if not frame.wet:
        return Weather(sun)
    patches = smooth_field(shape, (6.0, 2.0), random, periodic=(False, True))
    return Weather(sun, np.clip(0.6 + 0.4 * patches, 0.0, 1.0))


def _room(
    pipe: PlantPipe, drawn: tuple[float, float], bodies: tuple[PlacedBody, ...]
) -> tuple[float, float]:
    """Return the longest part of the drawn pipe free of what hides or replaces its lagging."""
    blocked = [(body.start - 0.05, body.end + 0.05) for body in bodies]
    if pipe.clear is not None:
        length = drawn[1] - drawn[0]
        blocked.append((drawn[0] + pipe.clear[0] * length, drawn[0] + pipe.clear[1] * length))
    edges = [drawn[0], *(edge for pair in sorted(blocked) for edge in pair), drawn[1]]
    return max(zip(edges[::2], edges[1::2], strict=True), key=lambda part: part[1] - part[0])


def build_pipe(
    pipe: PlantPipe,
    plant: PlantLine,
    line: LineTruth,
    frame: FrameTruth,
    view: View,
    kind: DamageKind,
    random: np.random.Generator,
) -> PipeTruth:
    """Build one pipe, damage it and solve it.

    Parameters
    ----------
    pipe : PlantPipe
        Where it is seen.
    plant : PlantLine
        What is declared of its line.
    line : LineTruth
        What is true of it.
    frame : FrameTruth
        The conditions.
    view : View
        The camera.
    kind : str
        Damage to give it.
    random : numpy.random.Generator
        Source of randomness.

    Returns
    -------
    PipeTruth
        The pipe.
    """
    axis = _axis(pipe, view, frame.distance_ratio)
    slope = plant.inclination_deg if pipe.inclination_deg is None else pipe.inclination_deg
    n_x = int(np.clip(round(axis.length / _CELL_LENGTH), 60, 260))
    length = axis.length / n_x
    outer = line.pipe_diameter / 2 + line.thickness + line.gap
    drawn = (
        axis.surface_station(view, pipe.drawn[0] * axis.length, outer),
        axis.surface_station(view, pipe.drawn[1] * axis.length, outer),
    )
    scatter = 1 + _SCATTER * smooth_field((n_x,), (0.15 / length,), random)
    installed = line.installation_factor * (1 + line.supports_share)
    line = _down_the_line(pipe, plant, line, frame, installed, slope)
    sound = _model(line, plant, frame, (n_x, _AROUND), length, installed * scatter)
    bodies = bodies_on(pipe.components, drawn)
    # bodies and weather draw from streams of their own, so that a seed keeps its pipes
    made, wetted = random.spawn(2)
    with_bodies = lay_bodies(bodies, sound, made)
    damage = draw_damage(kind, _room(pipe, drawn, bodies), random, facing=_facing(axis))
    model = lay_in(damage, with_bodies)
    if damage.kind in ("open_joint", "bare", "missing_sector"):
        first = round(damage.start / length)
        last = max(round(damage.end / length), first + 1)
        damage = replace(damage, start=first * length, end=last * length)
    weather = _weather(axis, (n_x, _AROUND), line, frame, wetted)
    flux = surface_flux(model, line, frame, slope, weather)
    if line.hours_at_temperature is None:
        solution = solve_columns(model, flux)
    else:
        solution = heat_up(model, flux, 3600 * line.hours_at_temperature)
    tape = tape_on(pipe, drawn, _facing(axis))
    heat_loss = solution.heat_loss(length)
    share = model.surface_area / model.surface_area.sum(axis=1, keepdims=True)
    surface = (share * solution.surface_temperature).sum(axis=1)
    given = solution.inside_heat / length
    water = np.zeros((n_x, _AROUND))
    if weather.rain is not None or line.fluid_temperature < frame.air_temperature:
        water = water_share(solution.surface_temperature, frame, weather.rain)
    return PipeTruth(
        plant=pipe, axis=axis, drawn=drawn, damage=damage, bodies=bodies, tape=tape,
        station=model.station, cell_length=length, heat_loss=heat_loss,
        surface_temperature=surface,
        resistance=(line.fluid_temperature - surface) / heat_loss,
        inside_heat=given.sum(axis=1),
        tracer_heat=_tracer_heat(plant, line, given),
        untraced_loss=_untraced_loss(plant, line, model, flux),
        water_share=(share * water).sum(axis=1),
        sound_loss=_plain_loss(line, plant, frame, installed, weather, slope),
        specified_loss=_plain_loss(line, plant, frame, 1.0, weather, slope),
        is_soaked=plant.is_soaked,
        skin=skin_of(plant, line, axis, model, solution, water, bodies, tape, random),
    )  # fmt: skip
