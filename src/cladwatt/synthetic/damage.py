"""Kinds of damage to lagging: drawn at random, then laid into the columns of a pipe."""

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from cladwatt.synthetic.columns import ColumnModel
from cladwatt.types import FloatArray

__all__ = ["DAMAGE_KINDS", "Damage", "DamageKind", "draw_damage", "lay_in"]

DamageKind = Literal[
    "sound", "aged", "compressed", "wet", "wet_underside", "void",
    "open_joint", "bare", "missing_sector",
]  # fmt: skip
DAMAGE_KINDS: tuple[DamageKind, ...] = (
    "sound", "aged", "compressed", "wet", "wet_underside", "void",
    "open_joint", "bare", "missing_sector",
)  # fmt: skip


@dataclass(frozen=True)
class Damage:
    """One damage of one pipe.

    Parameters
    ----------
    kind : str
        One of `DAMAGE_KINDS`; ``sound`` is none, ``aged`` holds throughout.
    start, end : float
        Where, along the modelled pipe; both 0 where it is not local. [m]
    severity : float
        Conductivity factor (aged, compressed, wet, void), else unused.
    remaining : float
        Share of the thickness that is left (compressed).
    angle, half_angle : float
        Middle and half of the sector it takes, angle 0 up. [rad]
    """

    kind: DamageKind
    start: float = 0.0
    end: float = 0.0
    severity: float = 1.0
    remaining: float = 1.0
    angle: float = 0.0
    half_angle: float = np.pi

    @property
    def is_local(self) -> bool:
        """Whether it has a beginning and an end."""
        return self.end > self.start


_LENGTHS = {
    "compressed": (0.25, 0.60), "wet": (0.25, 0.70), "wet_underside": (0.30, 0.80),
    "void": (0.30, 0.70), "open_joint": (0.012, 0.040), "bare": (0.15, 0.40),
    "missing_sector": (0.25, 0.55),
}  # fmt: skip


def draw_damage(
    kind: DamageKind, room: tuple[float, float], random: np.random.Generator, *, facing: float
) -> Damage:
    """Draw where a damage lies and how bad it is.

    Parameters
    ----------
    kind : str
        One of `DAMAGE_KINDS`.
    room : (float, float)
        Part of the pipe it has to lie in. [m]
    random : numpy.random.Generator
        Source of randomness.
    facing : float
        Angle of the side the camera sees; a missing sector lies within 50 degrees of it. [rad]

    Returns
    -------
    Damage
        The draw.
    """
    if kind == "sound":
        return Damage(kind)
    if kind == "aged":
        return Damage(kind, severity=float(random.uniform(1.15, 1.8)))
    low, high = _LENGTHS[kind]
    available = room[1] - room[0]
    length = min(float(random.uniform(low, high)), 0.45 * available)
    start = float(random.uniform(room[0] + 0.05 * available, room[1] - 0.05 * available - length))
    place = Damage(kind, start, start + length)
    if kind == "compressed":
        return replace(place, severity=1.1, remaining=float(random.uniform(0.35, 0.6)))
    if kind == "wet":
        return replace(place, severity=float(random.uniform(3.0, 9.0)))
    if kind == "wet_underside":
        return replace(place, severity=float(random.uniform(4.0, 10.0)), angle=np.pi,
                       half_angle=float(np.radians(random.uniform(60, 95))))  # fmt: skip
    if kind == "void":
        return replace(place, severity=float(random.uniform(2.5, 4.5)),
                       angle=float(random.choice([0.0, np.pi])),
                       half_angle=float(np.radians(random.uniform(60, 90))))  # fmt: skip
    if kind == "missing_sector":
        return replace(place, angle=facing + float(np.radians(random.uniform(-50, 50))),
                       half_angle=float(np.radians(random.uniform(40, 75))))  # fmt: skip
    return place


def _ramp(distance: FloatArray, width: float) -> FloatArray:
    """Return a smooth step from 0 to 1 about 0."""
    inside: FloatArray = np.clip(distance / width + 0.5, 0.0, 1.0)
    result: FloatArray = inside * inside * (3 - 2 * inside)
    return result


def lay_in(damage: Damage, model: ColumnModel) -> ColumnModel:
    """Return a pipe with a damage laid into its columns.

    Wet and compressed lagging fades out over a few centimetres; removed lagging ends at a column.
    Above 100 °C lagging is dry next to the pipe, so there wet takes the outer cells only.

    Parameters
    ----------
    damage : Damage
        What to lay in.
    model : ColumnModel
        The sound pipe.

    Returns
    -------
    ColumnModel
        The damaged one.
    """
    n_x, n_phi, n_r = model.factor.shape
    station = model.station
    angle = (np.arange(n_phi) + 0.5) * 2 * np.pi / n_phi
    apart = np.abs(np.angle(np.exp(1j * (angle - damage.angle))))
    if damage.kind == "sound":
        return model
    if damage.kind == "aged":
        return replace(model, factor=model.factor * damage.severity)
    if damage.kind in ("open_joint", "bare", "missing_sector"):
        first = round(damage.start / model.cell_length)
        last = max(round(damage.end / model.cell_length), first + 1)
        gone = np.zeros((n_x, n_phi), dtype=bool)
        gone[first:last] = apart <= damage.half_angle
        return replace(model, exposed=model.exposed | gone)
    along = _ramp(station - damage.start, 0.06) * _ramp(damage.end - station, 0.06)
    around = _ramp(damage.half_angle - apart, 0.5) if damage.half_angle < np.pi else np.ones(n_phi)
    share = along[:, None] * around
    if damage.kind == "compressed":
        thickness = model.thickness * (1 - (1 - damage.remaining) * share)
        factor = model.factor * (1 + (damage.severity - 1) * share)[..., None]
        return replace(model, thickness=thickness, factor=factor)
    cells = np.ones(n_r)
    if damage.kind == "void":
        cells[: n_r - 2] = 0.0
    elif float(np.max(model.inside)) > 373.15:
        cells[: n_r // 2] = 0.0
    growth = 1 + (damage.severity - 1) * share[..., None] * cells
    return replace(model, factor=model.factor * growth)
