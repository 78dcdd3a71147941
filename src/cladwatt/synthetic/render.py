"""From temperatures on pipes to the radiance that reaches the lens, with soft edges."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from cladwatt.physics.band import Band
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.synthetic.geometry import PipeAxis, View
from cladwatt.synthetic.scene import Scene
from cladwatt.synthetic.tracing import Hits, trace_pipe
from cladwatt.types import BoolArray, FloatArray

__all__ = ["AirPath", "Patch", "Skin", "render"]

_CUT_FACE_EMISSIVITY = 0.93


@dataclass(frozen=True)
class Patch:
    """Tape on a pipe: a rectangle in station and angle of its own emissivity."""

    station: tuple[float, float]
    angle: tuple[float, float]
    emissivity: float


@dataclass(frozen=True)
class Skin:
    """What a pipe shows the camera, column by column.

    Parameters
    ----------
    axis : PipeAxis
        Where the pipe is; the columns divide its whole length.
    radius : (n_x, n_phi) array
        Of what faces the room. [m]
    temperature : (n_x, n_phi) array
        [K]
    emissivity : (n_x, n_phi) array
        In the camera's band, near normal.
    exposed : (n_x, n_phi) array of bool
        Where the pipe is bare.
    face_temperature : (n_x, n_phi) array
        Of a cut face. [K]
    is_metal : bool
        Of the cladding, for its emissivity against the viewing angle.
    mirror : float
        Share of the reflection that is mirror-like.
    patches : tuple of Patch
        Tapes.
    """

    axis: PipeAxis
    radius: FloatArray
    temperature: FloatArray
    emissivity: FloatArray
    exposed: BoolArray
    face_temperature: FloatArray
    is_metal: bool
    mirror: float
    patches: tuple[Patch, ...] = ()


@dataclass(frozen=True)
class AirPath:
    """The air between camera and pipe."""

    transmission: float
    temperature: float


class _LookUp:
    """Fields of a skin at the hits: linear between columns, not across the end of lagging."""

    def __init__(self, skin: Skin, hits: Hits) -> None:
        n_x, n_phi = skin.exposed.shape
        x = np.clip(hits.station / skin.axis.length * n_x - 0.5, 0, n_x - 1.000001)
        phi = np.mod(hits.angle / (2 * np.pi) * n_phi - 0.5, n_phi)
        i, j = x.astype(np.int64), phi.astype(np.int64)
        part_x, part_phi = x - i, phi - j
        j %= n_phi
        ahead, beside = np.minimum(i + 1, n_x - 1) * n_phi, (j + 1) % n_phi
        i *= n_phi
        self._corners = (i + j, i + beside, ahead + j, ahead + beside)
        if skin.exposed.any():
            bare = [skin.exposed.ravel()[corner] for corner in self._corners]
            mixed = (bare[0] != bare[1]) | (bare[0] != bare[2]) | (bare[0] != bare[3])
            part_x = np.where(mixed, np.round(part_x), part_x)
            part_phi = np.where(mixed, np.round(part_phi), part_phi)
        self._weights = (
            (1 - part_x) * (1 - part_phi), (1 - part_x) * part_phi,
            part_x * (1 - part_phi), part_x * part_phi,
        )  # fmt: skip

    def __call__(self, field: FloatArray) -> FloatArray:
        """Return the (n_x, n_phi) field at the hits."""
        flat = field.ravel()
        total = np.zeros(self._weights[0].size)
        for weight, corner in zip(self._weights, self._corners, strict=True):
            total += weight * flat[corner]
        return total


def surface_radiance(skin: Skin, hits: Hits, scene: Scene, band: Band) -> FloatArray:
    """Return what leaves a pipe towards the camera at the hits. [W/(m2 sr)]"""
    look_up = _LookUp(skin, hits)
    temperature, normal_emissivity = look_up(skin.temperature), look_up(skin.emissivity)
    bare = look_up(skin.exposed.astype(np.float64)) > 0.5
    taped = np.zeros(bare.shape, dtype=bool)
    for patch in skin.patches:
        middle, half = sum(patch.angle) / 2, (patch.angle[1] - patch.angle[0]) / 2
        inside = (hits.station > patch.station[0]) & (hits.station < patch.station[1])
        inside &= np.abs(np.angle(np.exp(1j * (hits.angle - middle)))) < half
        normal_emissivity = np.where(inside, patch.emissivity, normal_emissivity)
        taped |= inside
    normal_emissivity = np.where(hits.face, _CUT_FACE_EMISSIVITY, normal_emissivity)
    if hits.face.any():
        temperature = np.where(hits.face, look_up(skin.face_temperature), temperature)
    cosine = -np.einsum("ij,ij->i", hits.normal, hits.ray)
    view = np.arccos(np.clip(cosine, 0.01, 1.0))
    matt = bare | taped | hits.face
    emissivity = directional_emissivity(normal_emissivity, view, skin.is_metal & ~matt)
    back = hits.ray + 2 * cosine[:, None] * hits.normal
    mirror = np.where(matt, 0.0, skin.mirror)
    reflected = mirror * scene.mirrored(back, band)
    reflected += (1 - mirror) * scene.diffuse(hits.normal, band)
    radiance: FloatArray = emissivity * band.radiance(temperature) + (1 - emissivity) * reflected
    return radiance


def _box(view: View, axis: PipeAxis, radius: float) -> tuple[slice, slice]:
    """Return rows and columns that hold the picture of a pipe."""
    stations = np.linspace(0, axis.length, 4 * axis.steps.size + 1)
    points = np.concatenate([axis.edges(view, float(s), radius) for s in stations])
    low, high = np.floor(points.min(axis=0)) - 4, np.ceil(points.max(axis=0)) + 5
    limits = np.array([view.cols, view.rows])
    first, last = np.clip(low, 0, limits).astype(int), np.clip(high, 0, limits).astype(int)
    return slice(int(first[1]), int(last[1])), slice(int(first[0]), int(last[0]))


def render(
    view: View,
    skins: Sequence[Skin],
    background: FloatArray,
    scene: Scene,
    air: AirPath,
    band: Band,
    *,
    fine: int,
) -> FloatArray:
    """Return the radiance at the lens, before blur and noise.

    Parameters
    ----------
    view : View
        The camera.
    skins : sequence of Skin
        The pipes in view; the nearer one hides the other.
    background : (rows, cols) array
        Radiance that leaves what stands behind. [W/(m2 sr)]
    scene : Scene
        What the pipes mirror.
    air : AirPath
        Between camera and pipe.
    band : Band
        The camera's band.
    fine : int
        Rays per pixel in each direction.

    Returns
    -------
    (rows, cols) array
        Mean over each pixel's rays. [W/(m2 sr)]
    """
    image = np.repeat(np.repeat(background, fine, axis=0), fine, axis=1)
    nearest = np.full(image.shape, np.inf)
    for skin in skins:
        rows, cols = _box(view, skin.axis, float(skin.radius.max()))
        if rows.stop <= rows.start or cols.stop <= cols.start:
            continue
        y = (np.arange(rows.start * fine, rows.stop * fine) + 0.5) / fine - 0.5
        x = (np.arange(cols.start * fine, cols.stop * fine) + 0.5) / fine - 0.5
        grid_x, grid_y = np.meshgrid(x, y)
        hits = trace_pipe(view.rays(grid_x.ravel(), grid_y.ravel()), skin.axis, skin.radius)
        row, col = np.divmod(hits.index, x.size)
        row, col = row + rows.start * fine, col + cols.start * fine
        radiance = surface_radiance(skin, hits, scene, band)
        seen = hits.depth < nearest[row, col]
        image[row[seen], col[seen]] = radiance[seen]
        nearest[row[seen], col[seen]] = hits.depth[seen]
    pixels = image.reshape(view.rows, fine, view.cols, fine).mean(axis=(1, 3))
    lens: FloatArray = air.transmission * pixels
    lens += (1 - air.transmission) * float(band.radiance(air.temperature))
    return lens
