"""Supports, flanges and valves on a pipe: laid into its columns, seen, and counted.

A bare body gives off heat like a length of bare pipe: a valve of a six-inch line has more than 6
square feet (US DOE, steam tip sheet 2), about one metre of its pipe, and a flange pair about half
of a valve (Fuel Efficiency Booklet 8, 1993). Each body differs from that by its make. Under a cover
what counts is its larger surface and the metal that bridges the lagging.
"""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.synthetic.columns import ColumnModel
from cladwatt.synthetic.damage import Damage, lay_in
from cladwatt.synthetic.plant import PlantComponent
from cladwatt.types import BoolArray, FloatArray

__all__ = ["PlacedBody", "bodies_on", "body_numbers", "body_radius", "lay_bodies"]

_CLAMPS = {"support": (0.12, np.pi, 0.6, 12.0), "hanger": (0.08, 0.0, 0.45, 9.0)}
"""What carries the pipe through its lagging: length [m], where around, half of the angle it takes
[rad], times the conductivity of the lagging."""


@dataclass(frozen=True)
class _Make:
    """How a kind of body is built."""

    length: float
    """Along the pipe. [m]"""
    width: float
    """Over the pipe's diameter where bare, over the lagged one where lagged."""
    surface: float
    """Bare: length of bare pipe of the same surface. Lagged: times the surface of the lagging. [m]
    or [-]"""
    bridging: float = 1.0
    """Times the conductivity of the lagging."""


_MAKES = {
    ("flange", False): _Make(0.10, 1.7, 0.5),
    ("valve", False): _Make(0.34, 1.8, 1.0),
    ("flange", True): _Make(0.26, 1.15, 1.3, 2.0),
    ("valve", True): _Make(0.46, 1.25, 1.9, 2.2),
}
_SPREAD = 0.15
"""Relative standard deviation of a body's surface by its make."""


@dataclass(frozen=True)
class PlacedBody:
    """A body where it really is, between two stations of the near surface. [m]"""

    plant: PlantComponent
    start: float
    end: float

    def covers(self, station: FloatArray) -> BoolArray:
        """Return which columns it takes, by their middles."""
        inside: BoolArray = (station > self.start) & (station < self.end)
        return inside


def bodies_on(
    components: tuple[PlantComponent, ...], drawn: tuple[float, float]
) -> tuple[PlacedBody, ...]:
    """Place the bodies along the drawn part."""
    placed = []
    for one in components:
        middle = drawn[0] + one.at * (drawn[1] - drawn[0])
        clamp = _CLAMPS.get(one.kind)
        length = _MAKES[one.kind, one.lagged].length if clamp is None else clamp[0]
        placed.append(PlacedBody(one, middle - length / 2, middle + length / 2))
    return tuple(placed)


def body_numbers(bodies: tuple[PlacedBody, ...]) -> list[int]:
    """Return which of its kind on the pipe each body is, from 1."""
    kinds = [body.plant.kind for body in bodies]
    return [kinds[: i + 1].count(kind) for i, kind in enumerate(kinds)]


def body_radius(body: PlacedBody, pipe_radius: float, outer_radius: float) -> float | None:
    """Return the radius it shows the camera, None where it shows none of its own. [m]"""
    if body.plant.kind in _CLAMPS:
        return None
    make = _MAKES[body.plant.kind, body.plant.lagged]
    return make.width * (outer_radius if body.plant.lagged else pipe_radius)


def lay_bodies(
    bodies: tuple[PlacedBody, ...], model: ColumnModel, random: np.random.Generator
) -> ColumnModel:
    """Lay bodies into the columns of a pipe.

    Parameters
    ----------
    bodies : tuple of PlacedBody
        What to lay in.
    model : ColumnModel
        The pipe.
    random : numpy.random.Generator
        Source of the scatter between makes.

    Returns
    -------
    ColumnModel
        The pipe with them.
    """
    for body in bodies:
        if body.plant.kind in _CLAMPS:
            model = _with_clamp(body, model)
            continue
        make = _MAKES[body.plant.kind, body.plant.lagged]
        made = float(np.exp(_SPREAD * random.standard_normal()))
        taken = body.covers(model.station)[:, None]
        if body.plant.lagged:
            model = replace(
                model,
                factor=np.where(
                    taken[..., None], made * make.surface * make.bridging, 1.0
                ) * model.factor,
                area_factor=np.where(taken, made * make.surface, 1.0) * model.area_factor,
            )  # fmt: skip
            continue
        laid = lay_in(Damage("bare", body.start, body.end), model)
        bare = laid.exposed & ~model.exposed
        growth = made * make.surface / (np.count_nonzero(bare[:, 0]) * model.cell_length)
        model = replace(laid, area_factor=np.where(bare, growth, 1.0) * model.area_factor)
    return model


def _with_clamp(body: PlacedBody, model: ColumnModel) -> ColumnModel:
    """Return the pipe with a shoe below or a hanger above that conducts through the lagging."""
    _, angle, half_angle, severity = _CLAMPS[body.plant.kind]
    clamp = Damage(
        "wet", body.start, body.end, severity=severity, angle=angle, half_angle=half_angle
    )
    growth = lay_in(
        clamp, replace(model, inside_temperature=300.0, factor=np.ones_like(model.factor))
    )
    return replace(model, factor=model.factor * growth.factor)
