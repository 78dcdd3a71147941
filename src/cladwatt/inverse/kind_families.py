"""Kinds of local damage as families of forward models: what each would show, sample by sample.

A sample draws severity, length, side and edges from its kind's row in the table of kinds, takes
one of the region's own draws of what is declared, and works out what the camera would show: the
rise of the strongest band of angle, how it is shared between bands, the length at half height,
the length over which it sets in.

Assumptions, each a constant beside what it is for: conduction is radial; a sheet spreads heat as
a fin; the lens blurs as a Gaussian; an open joint lies open or under its sheet, each as likely.
"""

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from scipy.special import erf

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.kind_levels import SurfaceLevels
from cladwatt.materials.rows import DamageKind
from cladwatt.types import FloatArray

__all__ = ["FEW_SAMPLES", "SAMPLES", "Shown", "View", "show"]

SAMPLES, FEW_SAMPLES = 3000, 500
"""Per kind, where something stands out and where nothing does; the region's draws are gone
through again and again."""
BLUR_SIGMA = 1.3
"""Of lens and sampling. [px]"""
DENSER = (1.0, 1.3)
"""Conductivity of compressed over sound lagging; assumption."""
GAP_COEFFICIENT = (3.0, 9.0)
"""Across an air gap: about ISO 6946, whose unventilated gaps of 10 to 25 mm and more resist 0.11
to 0.23 m2 K/W, towards bright faces; from memory. [W/(m2 K)]"""
SHEET_CLOSED = 0.5
"""Share of open joints that lie under their sheet; assumption."""
SPREAD_FACTOR = 0.3
"""Relative spread of the length over which the cladding spreads heat; assumption."""
CUT_FACE = 0.5
"""Beside a pipe that is seen, at most this share of its rise shows; assumption."""
PIPE_EDGE = 0.15
"""Over which a pipe's edge is seen to fall, in half widths of the lagged pipe; a band's width."""
SOFT_EDGE = 0.35
"""Over which a sector ends around the pipe, besides the cladding's spread; assumption. [rad]"""
QUARTERS_OF_FIN, QUARTERS_OF_RAMP, QUARTERS_OF_BLUR = 2 * math.log(2), 0.5, 1.349
"""From a quarter to three quarters of the height: of a step spread as along a fin, of a ramp's
whole length, and of a step blurred by a Gaussian, in its standard deviations."""
_OPEN = frozenset({"bare", "missing_sector"})
_QUANTITIES = ("severity", "length", "side", "half_angle", "edge", "own", "second", "spread")


@dataclass(frozen=True)
class View:
    """How a region is seen.

    Attributes
    ----------
    band_angle : (n_bands,) array
        View angle of each band. [rad]
    top : float or None
        View angle at which the upper side would lie; None where it is not told. [rad]
    spread_length : float
        Along the cladding. [m]
    diameter, pipe_diameter : float
        Over the cladding, and of the pipe; the second NaN where unknown. [m]
    station_length : float
        [m]
    """

    band_angle: FloatArray
    top: float | None
    spread_length: float
    diameter: float
    pipe_diameter: float
    station_length: float


@dataclass(frozen=True)
class Shown:
    """What a family shows, each (n_samples,)."""

    rise: FloatArray | None
    """Of the strongest band at the lens; None where no fluid temperature is known. [K]"""
    shape: FloatArray
    """Rise of each band over the strongest, (n_samples, n_bands)."""
    length: FloatArray
    """At half height. [m]"""
    edge: FloatArray
    """From a quarter to three quarters of the height. [m]"""


@lru_cache(maxsize=4)
def _uniform(seed: int, size: int) -> dict[str, FloatArray]:
    """Return the samples that all kinds and regions share: their noise is in step."""
    book = DrawBook(seed, size)
    return {name: book.uniform("kinds", name) for name in _QUANTITIES}


def show(
    kind: DamageKind, levels: SurfaceLevels | None, view: View, seed: int, samples: int = SAMPLES
) -> Shown:
    """Return what a kind of damage would show.

    Parameters
    ----------
    kind : DamageKind
        A local one.
    levels : SurfaceLevels or None
        Of `samples` draws.
    view : View
    seed : int
    samples : int

    Returns
    -------
    Shown
    """
    drawn = _uniform(seed, samples)
    length = _between(kind.length, drawn["length"], by_factor=True)
    edge = _between(kind.edge, drawn["edge"])
    spread = view.spread_length * np.exp(SPREAD_FACTOR * (2 * drawn["spread"] - 1) * 3**0.5)
    if kind.key in _OPEN:
        spread = np.zeros(samples)
    elif kind.key == "open_joint":
        spread = np.where(drawn["own"] < SHEET_CLOSED, spread, 0.0)
    cover = _cover(kind, view, drawn, spread)
    strongest = cover.max(axis=1)
    reached, wide = _along(length, spread, view.station_length)
    rise = None
    if levels is not None:
        rise = _rise(kind, levels, view, drawn) * reached * strongest
    sharp = np.sqrt(
        (QUARTERS_OF_FIN * spread) ** 2
        + (QUARTERS_OF_RAMP * np.minimum(edge, length)) ** 2
        + (QUARTERS_OF_BLUR * BLUR_SIGMA * view.station_length) ** 2
    )
    return Shown(
        rise=rise,
        shape=cover / np.maximum(strongest, 1e-9)[:, None],
        length=wide,
        edge=np.minimum(sharp, 0.6 * wide),
    )


def _between(
    limits: tuple[float, float], part: FloatArray, *, by_factor: bool = False
) -> FloatArray:
    low, high = limits
    if by_factor:
        return np.asarray(low * (high / low) ** part)
    return np.asarray(low + (high - low) * part)


def _along(
    length: FloatArray, spread: FloatArray, station_length: float
) -> tuple[FloatArray, FloatArray]:
    """Return the share of the height that a stretch's middle reaches, and its length at half."""
    decay = np.maximum(spread, 1e-6)
    inside = length / (2 * decay)
    by_fin = -np.expm1(-inside)
    wide = length + 2 * decay * np.log1p(np.exp(-inside))
    sigma = BLUR_SIGMA * station_length
    by_lens = erf(wide / (2 * math.sqrt(2) * sigma))
    return by_fin * by_lens, np.hypot(wide, 2.355 * sigma)


def _cover(
    kind: DamageKind, view: View, drawn: dict[str, FloatArray], spread: FloatArray
) -> FloatArray:
    """Return how far each band of angle shows the damage, (n_samples, n_bands)."""
    count = drawn["side"].size
    if kind.key == "bare":
        return _pipe_within(view, drawn["half_angle"])
    bounds = np.cumsum(kind.sides)
    side = np.searchsorted(bounds[:-1], drawn["side"], side="right")
    around = drawn["second"]
    top: FloatArray = np.full(count, view.top) if view.top is not None else 2 * np.pi * around
    flank = top + np.where(around < 0.5, 0.5, -0.5) * np.pi
    middle = np.select([side == 1, side == 2], [top, top + np.pi], flank)
    half = np.radians(_between(kind.half_angle_deg, drawn["half_angle"]))
    apart = np.abs(np.angle(np.exp(1j * (view.band_angle - middle[:, None]))))
    soft = np.hypot(SOFT_EDGE, 2 * spread / (view.diameter / 2))
    covered = np.clip((half[:, None] - apart) / soft[:, None] + 0.5, 0.0, 1.0)
    covered = np.where((side == 0)[:, None], 1.0, covered)
    if kind.key == "missing_sector":
        return covered * _pipe_within(view, drawn["own"])
    if kind.key == "open_joint":
        closed = drawn["own"] < SHEET_CLOSED
        return np.where(closed[:, None], covered, covered * _pipe_within(view, drawn["edge"]))
    return covered


def _pipe_within(view: View, beside: FloatArray) -> FloatArray:
    """Return how far each band shows a pipe thinner than its lagging, (count, n_bands).

    Beyond its edge there is something between the background and cut faces that the pipe warms.
    """
    thin = view.pipe_diameter / view.diameter
    within = np.ones(view.band_angle.size)
    if math.isfinite(thin):
        away = np.abs(np.sin(view.band_angle))
        within = np.clip((thin - away) / PIPE_EDGE + 0.5, 0.0, 1.0)
    return np.asarray(within + (1 - within) * (CUT_FACE * beside)[:, None])


def _rise(
    kind: DamageKind, levels: SurfaceLevels, view: View, drawn: dict[str, FloatArray]
) -> FloatArray:
    """Return the rise at the lens of a stretch long and wide enough to show all of it. [K]"""
    severity = _between(kind.severity, drawn["severity"], by_factor=kind.key.startswith("wet"))
    if kind.key.startswith("wet"):
        return levels.rise_wet(severity)
    if kind.key in _OPEN:
        return levels.rise_of_pipe(severity)
    if kind.key == "open_joint":
        gap = _between(GAP_COEFFICIENT, drawn["second"])
        closed = levels.rise_with(np.minimum(1 / gap / levels.sound_resistance, 1.0))
        return np.where(drawn["own"] < SHEET_CLOSED, closed, levels.rise_of_pipe(severity))
    radius = view.diameter / 2
    core = view.pipe_diameter / 2 if math.isfinite(view.pipe_diameter) else 0.5 * radius
    whole = math.log(radius / core)
    if kind.key == "compressed":
        outside = core + severity * (radius - core)
        left = np.log(outside / core) / whole / _between(DENSER, drawn["own"])
        # a smaller circumference gives off what the nodes ask of the whole one
        return levels.rise_with(np.minimum(left * outside / radius, 1.0))
    outside = core + (1 - severity) * (radius - core)
    gap = _between(GAP_COEFFICIENT, drawn["own"])
    left = np.log(np.maximum(outside / core, 1.0)) / whole + 1 / gap / levels.sound_resistance
    return levels.rise_with(np.minimum(left, 1.0))
