"""What a solved pipe shows the camera: temperature, radius, emissivity, tape."""

import numpy as np

from cladwatt.synthetic.bodies import PlacedBody, body_radius
from cladwatt.synthetic.columns import ColumnModel, Solution
from cladwatt.synthetic.exchange import WATER_EMISSIVITY
from cladwatt.synthetic.fields import smooth_field
from cladwatt.synthetic.geometry import PipeAxis
from cladwatt.synthetic.plant import PlantLine, PlantPipe
from cladwatt.synthetic.render import Patch, Skin
from cladwatt.synthetic.truth import LineTruth
from cladwatt.types import FloatArray

__all__ = ["skin_of", "tape_on"]

_TAPE_LENGTH = 0.10
_TAPE_EMISSIVITY = 0.95


def tape_on(pipe: PlantPipe, drawn: tuple[float, float], facing: float) -> Patch | None:
    """Return the tape on a pipe, None where there is none.

    Parameters
    ----------
    pipe : PlantPipe
        Says where.
    drawn : (float, float)
        Drawn part. [m]
    facing : float
        Angle of the side the camera sees. [rad]

    Returns
    -------
    Patch or None
        Its place.
    """
    if pipe.tape is None:
        return None
    start = drawn[0] + pipe.tape * (drawn[1] - drawn[0])
    return Patch((start, start + _TAPE_LENGTH), (facing - 0.6, facing + 0.6), _TAPE_EMISSIVITY)


def skin_of(
    plant: PlantLine, line: LineTruth, axis: PipeAxis, model: ColumnModel,
    solution: Solution, water: FloatArray, bodies: tuple[PlacedBody, ...], tape: Patch | None,
    random: np.random.Generator,
) -> Skin:  # fmt: skip
    """Return what a solved pipe shows the camera."""
    n_x, n_phi = model.exposed.shape
    patches = smooth_field(
        (n_x, n_phi), (0.08 / model.cell_length, n_phi / 14), random, periodic=(False, True)
    )
    emissivity = np.clip(line.band_emissivity * (1 + plant.patchy * patches), 0.02, 0.985)
    radius = model.surface_radius.copy()
    # compressed lagging keeps its outline: dents are too shallow to be seen
    outer = line.pipe_diameter / 2 + line.thickness + line.gap
    radius[~model.exposed] = outer
    for body in bodies:
        shown = body_radius(body, line.pipe_diameter / 2, outer)
        if shown is not None:
            radius[body.covers(model.station)] = shown
    emissivity = np.where(model.exposed, line.bare_emissivity, emissivity)
    return Skin(
        axis=axis, radius=radius, temperature=solution.surface_temperature,
        emissivity=emissivity + water * (WATER_EMISSIVITY - emissivity),
        exposed=model.exposed, face_temperature=solution.cell_temperature.mean(axis=-1),
        is_metal=plant.is_metal, mirror=plant.mirror,
        patches=() if tape is None else (tape,),
    )  # fmt: skip
