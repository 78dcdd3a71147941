"""Where around the pipe the excess lies, weighed from how it lies across the seen face.

Either damage goes all round, or it takes a sector: of some width, centred somewhere. What a
sector gives off is spread around by the cladding, then seen in the bands of angle. Every sector
that may show as the bands do is kept with its probability; so the hidden part of the excess comes
out certain where damage is even, and wide where it is one-sided or sits at the edge of the view.
"""

import math
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.measure.face_bands import FaceBands
from cladwatt.types import FloatArray

__all__ = ["AroundPipe", "BandContrast", "shown_by_sector", "upwards", "weigh_sides"]

PRIOR_ALL_ROUND = 0.5
"""Of local damage; assumption."""
NARROWEST, WIDEST = math.radians(30.0), math.radians(240.0)
"""Of a damaged sector, every width equally likely: from a seam to lagging soaked well past the
half; assumption. [rad]"""
PRIOR_BOTTOM, PRIOR_TOP = 0.2, 0.1
"""Sectors centred on the bottom, where water gathers, and on the top, where it comes in; the rest
lie anywhere. Assumption."""
TOP_U = math.radians(25.0)
"""Standard uncertainty of where the top of the pipe is seen, since the camera may look up or down
at it, and of a sector's centre about top or bottom; assumption. [rad]"""
SMALLEST_RISE, LARGEST_RISE = 0.15, 12.0
"""Loss of the damaged part over sound, less one; every factor equally likely; assumption."""
HEIGHTS, WIDTHS = 15, 8
"""Steps of these."""
PRIOR_UNSPREAD = 0.1
"""Of a sector over which the cladding is gone or loose, and spreads nothing; assumption."""
BAND_MODEL_U = 0.15
"""Of the contrast of a band: convection uneven around the pipe, emissivity by angle; assumption."""
TILT_U = 0.1
"""The same, from one edge of the face to the other; assumption."""
STRONGEST_U = 0.05
"""Of every band, over the strongest: how far the cladding spreads heat is not known exactly;
assumption."""
EVEN_U = 0.15
"""Of the hidden part where damage goes all round; assumption."""
LARGEST_RATIO = 8.0
"""Of the whole circumference's mean excess over the seen face's."""
HARMONICS = np.arange(1, 33)


@dataclass(frozen=True)
class BandContrast:
    """How a run stands out across the face.

    Attributes
    ----------
    contrast : (n_bands,) array
        At the lens, towards the fluid. [K]
    face : FaceBands
    band_sigma, common_sigma : float
        Standard uncertainty of each band by itself and of all together. [K]
    kelvin_per_rise : float
        Kelvin at the lens for a loss twice the sound one. [K]
    spread_angle : float
        Decay length along the cladding over its radius. [rad]
    top : float or None
        Angle at which the top of the pipe lies, from the side facing the camera; None where the
        pipe stands or gravity runs along it. [rad]
    """

    contrast: FloatArray
    face: FaceBands
    band_sigma: float
    common_sigma: float
    kelvin_per_rise: float
    spread_angle: float
    top: float | None


@dataclass(frozen=True)
class AroundPipe:
    """What may lie around the pipe.

    Attributes
    ----------
    ratio, ratio_u : (n,) array
        Mean excess over the whole circumference by that over the seen face, and its relative
        standard uncertainty.
    weight : (n,) array
        Probabilities, add up to 1.
    all_round, upper, under : float
        Probabilities; both sides 0 where it is not known which is up.
    """

    ratio: FloatArray
    ratio_u: FloatArray
    weight: FloatArray
    all_round: float
    upper: float
    under: float

    def draw(self, book: DrawBook, owner: str, seen_share: float) -> FloatArray:
        """Return draws of the hidden part's mean excess over the seen part's, (count,)."""
        order = np.argsort(self.ratio, kind="stable")
        ends = np.cumsum(self.weight[order])
        which = np.searchsorted(ends, book.uniform(owner, "hidden_part") * ends[-1])
        which = order[np.minimum(which, order.size - 1)]
        ratio = self.ratio[which] * np.exp(
            self.ratio_u[which] * book.normal(owner, "hidden_excess")
        )
        hidden = (np.minimum(ratio, LARGEST_RATIO) - seen_share) / (1 - seen_share)
        return np.asarray(np.maximum(hidden, 0.0))


def shown_by_sector(
    angle: FloatArray, width: FloatArray, centre: FloatArray, spread_angle: float
) -> FloatArray:
    """Return the excess flux at an angle of a sector that gives off 1, spread by the cladding.

    Parameters
    ----------
    angle, width, centre : arrays that broadcast
        [rad]
    spread_angle : float
        Decay length along the cladding over its radius. [rad]

    Notes
    -----
    The ring obeys the fin equation ``flux - spread^2 flux'' = source``; its solution is the
    sector's Fourier series, each harmonic n less by ``1 + (n spread)^2``.
    """
    n = HARMONICS
    spread = 2 / (math.pi * n * (1 + (n * spread_angle) ** 2))
    away = np.asarray(angle - centre)[..., None]
    waves = spread * np.sin(np.asarray(width)[..., None] * n / 2) * np.cos(n * away)
    return np.asarray(width / (2 * math.pi) + waves.sum(axis=-1))


def weigh_sides(seen: BandContrast) -> AroundPipe:
    """Weigh damage all round against sectors.

    Parameters
    ----------
    seen : BandContrast
    """
    extent = seen.face.extent / seen.face.extent.sum()
    step = math.radians(15.0)
    widths, centres = (
        grid.ravel()
        for grid in np.meshgrid(
            np.linspace(NARROWEST, WIDEST, WIDTHS),
            np.arange(-math.pi, math.pi, step),
            indexing="ij",
        )
    )
    even = np.ones((1, extent.size))
    shapes = np.concatenate([even, *(
        _shapes(replace(seen, spread_angle=spread), widths, centres)
        for spread in (seen.spread_angle, 0.0)
    )])  # fmt: skip
    sector = (1 - PRIOR_ALL_ROUND) * _centre_prior(centres, seen.top) / WIDTHS
    prior = np.concatenate(
        [[PRIOR_ALL_ROUND], (1 - PRIOR_UNSPREAD) * sector, PRIOR_UNSPREAD * sector]
    )
    widths, centres = np.tile(widths, 2), np.tile(centres, 2)
    logarithm, height, height_u = _weighed(seen, shapes)
    weight = prior * np.exp(logarithm - logarithm.max())
    weight /= weight.sum()
    mean = np.concatenate([[1.0], widths / (2 * math.pi)])
    ratio = height * mean / max(float(seen.contrast @ extent), 1e-9)
    ratio_u = np.concatenate([[EVEN_U], np.hypot(height_u[1:], BAND_MODEL_U / 2)])
    ratio[0] = 1.0
    upper = 0.0 if seen.top is None else float(weight[1:] @ upwards(centres, seen.top))
    one_sided = float(weight[1:].sum())
    return AroundPipe(
        ratio=ratio,
        ratio_u=np.minimum(ratio_u, 0.5),
        weight=weight,
        all_round=float(weight[0]),
        upper=upper,
        under=0.0 if seen.top is None else one_sided - upper,
    )


def _shapes(seen: BandContrast, widths: FloatArray, centres: FloatArray) -> FloatArray:
    """Return what each sector shows in each band, (n, n_bands): mean over the band's angle."""
    angle, extent = seen.face.view_angle, seen.face.extent
    inside = np.array([-1.0, 0.0, 1.0]) / 3
    places = angle[:, None] + extent[:, None] * inside
    shown = shown_by_sector(
        places[None], widths[:, None, None], centres[:, None, None], seen.spread_angle
    )
    return np.asarray(np.maximum(shown.mean(axis=-1), 0.0))


def upwards(centre: FloatArray, top: float) -> FloatArray:
    """Return how likely sectors are centred above the axis, the camera's height uncertain.

    Parameters
    ----------
    centre : (n,) array
        From the side facing the camera. [rad]
    top : float
        Where the top is. [rad]
    """
    tilts = TOP_U * np.array([-1.0, 0.0, 1.0])
    return np.asarray(np.mean(np.cos(centre[:, None] - top - tilts) > 0, axis=1))


def _centre_prior(centre: FloatArray, top: float | None) -> FloatArray:
    even = np.full(centre.size, 1 / centre.size)
    if top is None:
        return even

    def near(middle: float) -> FloatArray:
        away = np.angle(np.exp(1j * (centre - middle)))
        density = np.exp(-0.5 * (away / (math.sqrt(2) * TOP_U)) ** 2)
        return np.asarray(density / density.sum())

    return np.asarray(
        PRIOR_BOTTOM * near(top + math.pi)
        + PRIOR_TOP * near(top)
        + (1 - PRIOR_BOTTOM - PRIOR_TOP) * even
    )


def _weighed(seen: BandContrast, shapes: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return each shape's log marginal likelihood, its mean height [K] and the relative u of it.

    Noise of each band by itself, of all together, and of the model in proportion to the height.
    """
    # up to what stands there, however much more than damage should show
    largest = max(LARGEST_RISE * seen.kelvin_per_rise, 1.5 * float(seen.contrast.max()))
    heights = np.geomspace(SMALLEST_RISE * seen.kelvin_per_rise, largest, HEIGHTS)
    level = heights[:, None, None] * shapes  # (height, shape, band)
    slope = TILT_U * level * np.sin(seen.face.view_angle)
    floor = math.hypot(seen.band_sigma, STRONGEST_U * float(np.abs(seen.contrast).max()))
    single = 1 / (floor**2 + (BAND_MODEL_U * level) ** 2)
    logarithm = _log_normal(seen.contrast - level, single, seen.common_sigma, slope)
    top = logarithm.max(axis=0)
    share = np.exp(logarithm - top)
    total = share.sum(axis=0)
    mean = (share * heights[:, None]).sum(axis=0) / total
    square = (share * heights[:, None] ** 2).sum(axis=0) / total
    relative = np.sqrt(np.maximum(square - mean**2, 0.0)) / mean
    return top + np.log(total / heights.size), mean, relative


def _log_normal(
    away: FloatArray, single: FloatArray, common: float, slope: FloatArray
) -> FloatArray:
    """Return the log density over the last axis, but for a constant.

    The covariance is a diagonal, 1 / `single`, plus the squares of a `common` part and of a
    `slope`: two ranks more, by Woodbury's identity.
    """
    common_part = common * single.sum(axis=-1)
    first = 1 + common * common_part
    second = 1 + (slope**2 * single).sum(axis=-1)
    both = common * (slope * single).sum(axis=-1)
    determinant = first * second - both**2
    along_common = common * (away * single).sum(axis=-1)
    along_slope = (away * slope * single).sum(axis=-1)
    explained = (
        second * along_common**2 - 2 * both * along_common * along_slope + first * along_slope**2
    ) / determinant
    fit = (away**2 * single).sum(axis=-1) - explained
    return np.asarray(-0.5 * (fit - np.log(single).sum(axis=-1) + np.log(determinant)))
