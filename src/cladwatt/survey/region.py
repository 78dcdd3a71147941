"""Regions: what the inspector drew, in pixel coordinates.

``x`` runs right, ``y`` down, (0, 0) is the centre of the first pixel; arrays are ``[row, col]``.
"""

from dataclasses import dataclass
from typing import Literal

from cladwatt.quantities import Quantity

__all__ = ["REGION_ROLES", "Region", "RegionRole"]

RegionRole = Literal[
    "pipe", "leave_out", "component", "foil", "tape", "contact", "background", "known_length"
]
REGION_ROLES: tuple[RegionRole, ...] = (
    "pipe", "leave_out", "component", "foil", "tape", "contact", "background", "known_length",
)  # fmt: skip


@dataclass(frozen=True)
class Region:
    """One drawn region, checked.

    Exactly one of `centreline` (with `widths`) and `outline` is given. A ``known_length`` is a
    centreline whose `widths` may be None, with the length in metres in `value`.
    """

    id: str
    frame_id: str
    role: RegionRole
    tag: str | None = None
    centreline: tuple[tuple[float, float], ...] | None = None
    """(x, y) along the middle of the pipe. [px]"""
    widths: tuple[float, ...] | None = None
    """Full width across the pipe at each vertex of the centreline. [px]"""
    outline: tuple[tuple[float, float], ...] | None = None
    """Closed ring, first point not repeated. [px]"""
    holes: tuple[tuple[tuple[float, float], ...], ...] = ()
    kind: str = ""
    """Of a component: flange, valve, pipe support, ..."""
    lagged: bool | None = None
    start: float | None = None
    """Station of the first vertex along the line; None where nobody declared it. [m]"""
    direction: Literal[1, -1] = 1
    """Whether stations grow (1) or fall (-1) from first to last vertex."""
    is_directed: bool = False
    """Whether that was declared: a tracer's clock position looks along growing stations."""
    value: Quantity | None = None
    """A reading that belongs here: K for foil, contact, background; - for tape; m for a length."""
    note: str = ""
    band_emissivity: Quantity | None = None
    total_emissivity: Quantity | None = None
    outside_diameter: Quantity | None = None
    """Over the lagging, overriding the line's. [m]"""
    lagging_thickness: Quantity | None = None
    """Of a single-layer line, overriding the line's. [m]"""
    inclination_deg: float | None = None
    """Angle of the axis from the horizontal, 0 to 90, overriding the line's."""
    feature: int = 0
    """Position in its file, from 1."""

    @property
    def origin(self) -> float:
        """Station its own stations count from: as declared, else 0. [m]"""
        return 0.0 if self.start is None else self.start
