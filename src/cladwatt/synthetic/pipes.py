"""One pipe of one frame: built, damaged, solved, and made ready to be seen."""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.physics.constants import STANDARD_PRESSURE
from cladwatt.physics.convection import convection_coefficient
from cladwatt.physics.radiation import radiative_flux
from cladwatt.synthetic.conduction_3d import ColumnModel, Solution, solve_columns
from cladwatt.synthetic.damage import Damage, DamageKind, draw_damage, lay_in
from cladwatt.synthetic.fields import smooth_field
from cladwatt.synthetic.geometry import PipeAxis, View
from cladwatt.synthetic.plant import PlantLine, PlantPipe
from cladwatt.synthetic.render import Patch, Skin
from cladwatt.synthetic.truth import FrameTruth, LineTruth
from cladwatt.types import BoolArray, FloatArray

__all__ = ["COMPONENT_LENGTHS", "PipeTruth", "build_pipe"]

_CELL_LENGTH = 0.015
_AROUND, _RADIAL = 24, 5
_SCATTER = 0.03
"""Relative scatter of sound lagging along the pipe."""
COMPONENT_LENGTHS = {"support": 0.12, "flange": 0.10}
"""Length of a component along the pipe. [m]"""
TAPE_LENGTH = 0.10
_TAPE_EMISSIVITY = 0.95


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
    component : (float, float) or None
        Stations of the component. [m]
    tape : Patch or None
        The tape on it.
    station : (n_x,) array
        Middle of each column. [m]
    cell_length : float
        [m]
    heat_loss, surface_temperature, resistance : (n_x,) array
        Truth along the pipe. [W/m], [K], [m K/W]
    sound_loss, specified_loss : float
        In the same conditions. [W/m]
    skin : Skin
        What the camera sees.
    """

    plant: PlantPipe
    axis: PipeAxis
    drawn: tuple[float, float]
    damage: Damage
    component: tuple[float, float] | None
    tape: Patch | None
    station: FloatArray
    cell_length: float
    heat_loss: FloatArray
    surface_temperature: FloatArray
    resistance: FloatArray
    sound_loss: float
    specified_loss: float
    skin: Skin

    @property
    def is_drawn(self) -> BoolArray:
        """Columns within the drawn part, (n_x,)."""
        inside: BoolArray = (self.station > self.drawn[0]) & (self.station < self.drawn[1])
        return inside

    @property
    def is_component(self) -> BoolArray:
        """Columns of the component, (n_x,)."""
        if self.component is None:
            return np.zeros(self.station.size, dtype=bool)
        inside: BoolArray = (self.station > self.component[0]) & (self.station < self.component[1])
        return inside


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


def _flux(
    model: ColumnModel, line: LineTruth, frame: FrameTruth, inclination_deg: float
) -> Callable[[FloatArray], FloatArray]:
    """Return the surface balance of a pipe."""
    n_phi = model.exposed.shape[1]
    angle = (np.arange(n_phi) + 0.5) * 2 * np.pi / n_phi
    amplitude = frame.unevenness * np.cos(np.radians(inclination_deg))
    uneven = 1 + amplitude * np.cos(angle - frame.unevenness_angle)
    emissivity = np.where(model.exposed, line.bare_emissivity, line.total_emissivity)
    # one coefficient for a ring of the pipe: the correlation is a mean around it
    share = model.surface_area / model.surface_area.sum(axis=1, keepdims=True)
    diameter = 2 * (share * model.surface_radius).sum(axis=1, keepdims=True)

    def flux(temperature: FloatArray) -> FloatArray:
        mean = (share * temperature).sum(axis=1, keepdims=True)
        coefficient = frame.convection_factor * uneven * convection_coefficient(
            mean, air_temperature=frame.air_temperature, diameter=diameter,
            wind_speed=frame.wind_speed, pressure=STANDARD_PRESSURE,
            inclination_deg=inclination_deg,
        )  # fmt: skip
        radiation = radiative_flux(
            temperature, emissivity=emissivity,
            surroundings_temperature=frame.surroundings_temperature,
        )  # fmt: skip
        result: FloatArray = coefficient * (temperature - frame.air_temperature) + radiation
        return result

    return flux


def _model(
    line: LineTruth, plant: PlantLine, frame: FrameTruth, shape: tuple[int, int], length: float,
    factor: FloatArray,
) -> ColumnModel:  # fmt: skip
    return ColumnModel(
        inside_temperature=line.fluid_temperature,
        inside_coefficient=plant.inside_coefficient,
        pipe_radius=line.pipe_diameter / 2,
        thickness=np.full(shape, line.thickness),
        cell_length=length,
        conductivity_curve=line.curve.conductivity,
        factor=np.broadcast_to(
            line.conductivity_factor * factor[:, None, None], (*shape, _RADIAL)
        ).copy(),
        sheet_conductance=plant.sheet_conductivity * plant.cladding_thickness_mm / 1000,
        exposed=np.zeros(shape, dtype=bool),
        air_temperature=frame.air_temperature,
    )


def _plain_loss(line: LineTruth, plant: PlantLine, frame: FrameTruth, factor: float) -> float:
    """Return the loss of the undamaged pipe with a conductivity factor. [W/m]"""
    model = _model(line, plant, frame, (2, _AROUND), 1.0, np.full(2, factor))
    solution = solve_columns(model, _flux(model, line, frame, plant.inclination_deg))
    return float(solution.heat_loss(1.0)[0])


def _with_component(
    pipe: PlantPipe, model: ColumnModel, drawn: tuple[float, float]
) -> tuple[ColumnModel, tuple[float, float] | None]:
    """Lay the component into the columns; a shoe conducts, a flange pair is bare."""
    if not pipe.component:
        return model, None
    middle = drawn[0] + pipe.component_at * (drawn[1] - drawn[0])
    half = COMPONENT_LENGTHS[pipe.component] / 2
    place = (middle - half, middle + half)
    if pipe.component == "flange":
        return lay_in(Damage("bare", *place), model), place
    shoe = Damage("wet", *place, severity=12.0, angle=np.pi, half_angle=0.6)
    growth = lay_in(
        shoe, replace(model, inside_temperature=300.0, factor=np.ones_like(model.factor))
    )
    return replace(model, factor=model.factor * growth.factor), place


def _room(
    pipe: PlantPipe, drawn: tuple[float, float], component: tuple[float, float] | None
) -> tuple[float, float]:
    """Return the longest part of the drawn pipe free of what hides or replaces its lagging."""
    blocked = [] if component is None else [(component[0] - 0.05, component[1] + 0.05)]
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
    n_x = int(np.clip(round(axis.length / _CELL_LENGTH), 60, 260))
    length = axis.length / n_x
    outer = line.pipe_diameter / 2 + line.thickness
    drawn = (
        axis.surface_station(view, pipe.drawn[0] * axis.length, outer),
        axis.surface_station(view, pipe.drawn[1] * axis.length, outer),
    )
    scatter = 1 + _SCATTER * smooth_field((n_x,), (0.15 / length,), random)
    sound = _model(line, plant, frame, (n_x, _AROUND), length, line.installation_factor * scatter)
    with_component, component = _with_component(pipe, sound, drawn)
    damage = draw_damage(kind, _room(pipe, drawn, component), random, facing=_facing(axis))
    model = lay_in(damage, with_component)
    if damage.kind in ("open_joint", "bare", "missing_sector"):
        first = round(damage.start / length)
        last = max(round(damage.end / length), first + 1)
        damage = replace(damage, start=first * length, end=last * length)
    solution = solve_columns(model, _flux(model, line, frame, plant.inclination_deg))
    tape = _tape(pipe, axis, drawn)
    heat_loss = solution.heat_loss(length)
    share = model.surface_area / model.surface_area.sum(axis=1, keepdims=True)
    surface = (share * solution.surface_temperature).sum(axis=1)
    return PipeTruth(
        plant=pipe, axis=axis, drawn=drawn, damage=damage, component=component, tape=tape,
        station=model.station, cell_length=length, heat_loss=heat_loss,
        surface_temperature=surface,
        resistance=(line.fluid_temperature - surface) / heat_loss,
        sound_loss=_plain_loss(line, plant, frame, line.installation_factor),
        specified_loss=_plain_loss(line, plant, frame, 1.0),
        skin=_skin(pipe, plant, line, axis, model, solution, component, tape, random),
    )  # fmt: skip


def _tape(pipe: PlantPipe, axis: PipeAxis, drawn: tuple[float, float]) -> Patch | None:
    if pipe.tape is None:
        return None
    start = drawn[0] + pipe.tape * (drawn[1] - drawn[0])
    facing = _facing(axis)
    return Patch((start, start + TAPE_LENGTH), (facing - 0.6, facing + 0.6), _TAPE_EMISSIVITY)


def _skin(
    pipe: PlantPipe, plant: PlantLine, line: LineTruth, axis: PipeAxis, model: ColumnModel,
    solution: Solution, component: tuple[float, float] | None, tape: Patch | None,
    random: np.random.Generator,
) -> Skin:  # fmt: skip
    n_x, n_phi = model.exposed.shape
    patches = smooth_field(
        (n_x, n_phi), (0.08 / model.cell_length, n_phi / 14), random, periodic=(False, True)
    )
    emissivity = np.clip(line.band_emissivity * (1 + plant.patchy * patches), 0.02, 0.985)
    radius = model.surface_radius.copy()
    # compressed lagging keeps its outline: dents are too shallow to be seen
    radius[~model.exposed] = line.pipe_diameter / 2 + line.thickness
    if component is not None and pipe.component == "flange":
        inside = (model.station > component[0]) & (model.station < component[1])
        radius[inside] = 0.85 * line.pipe_diameter
    return Skin(
        axis=axis, radius=radius, temperature=solution.surface_temperature,
        emissivity=np.where(model.exposed, line.bare_emissivity, emissivity),
        exposed=model.exposed, face_temperature=solution.cell_temperature.mean(axis=-1),
        is_metal=plant.is_metal, mirror=plant.mirror,
        patches=() if tape is None else (tape,),
    )  # fmt: skip
