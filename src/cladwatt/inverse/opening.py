"""Lagging gone all round, or a sector of it: what shows across the pipe tells, and how wide.

Across the pipe, at the places where nothing is blurred, four things may show: the hot pipe, the
cut face of lagging, lagging that goes on, and what lies behind. Each way the lagging may be gone
says which shows where. A bare stretch shows the pipe over its full, thinner width and background
on both sides. Where an opening ends at an angle seen from the camera, a cut face stands there: it
hides the pipe beyond that angle, and outside of it lagging goes on.
"""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.types import FloatArray

__all__ = ["BLUR_PX", "AcrossPipe", "Opening", "weigh_openings"]

PRIOR_BARE = 0.5
"""Of a stretch that shows the pipe; an opening is the rest. Assumption."""
NARROWEST, WIDEST = math.radians(30.0), math.radians(180.0)
"""Of openings, every width equally likely: lagging comes in mats and half shells, and what is
open over more than half of the circumference does not stay on; assumption. [rad]"""
BLUR_PX = 3.0
"""How far the glow of the hot pipe reaches beyond its edge in the image. [px]"""
GLOW_SHARE = 0.01
"""Stray light of the pipe beside it, over its contrast; assumption."""
SMALLEST_SCATTER = 0.5
"""Of what shows beside a pipe; more where the background itself is more uneven. [K]"""
HOT_SHARE, HOT_SCATTER = 0.7, 0.12
"""From this share of the strongest contrast the pipe shows, and the scatter of that."""
LAGGING_SHARE = 0.3
"""Beside an opening lagging shows at least this share of its sound contrast: its end is cooled."""
FLOOR = 0.02
"""Least likelihood of a place, since other things may lie beside a pipe; assumption."""
INDEPENDENT = 1 / 3
"""Neighbouring places across share what lies behind them; assumption."""

STEP = math.radians(5.0)


@dataclass(frozen=True)
class AcrossPipe:
    """What shows across a stretch, towards the fluid's side: hotter is higher. [K]

    Attributes
    ----------
    across : (n,) array
        Places in half widths of the lagged pipe, -1 to 1.
    value : (n,) array
        Median along the stretch, NaN where there is none.
    lagging : (n,) array
        The same at sound stations.
    background : (2,) array
        Beside the lagged pipe, at the side of negative and of positive `across`.
    background_scatter : (2,) array
        Scatter of that.
    blur : float
        In half widths.
    """

    across: FloatArray
    value: FloatArray
    lagging: FloatArray
    background: FloatArray
    background_scatter: FloatArray
    blur: float

    def strongest(self, thinner: float) -> float | None:
        """Return the strongest value within the width of the pipe, None where there is none."""
        within = self.value[np.abs(self.across) <= thinner]
        within = within[np.isfinite(within)]
        return float(within.max()) if within.size else None


@dataclass(frozen=True)
class Opening:
    """Which ways the lagging may be gone.

    Attributes
    ----------
    bare : float
        Probability that it is gone all round.
    width, middle : (n,) array
        Openings: angle over the circumference, and where it is centred from the side that faces
        the camera, towards positive `across`. [rad]
    weight : (n,) array
        Their probabilities; add up to ``1 - bare``.
    """

    bare: float
    width: FloatArray
    middle: FloatArray
    weight: FloatArray

    def share(self, level: FloatArray) -> FloatArray:
        """Return the share of the circumference that is open at levels of probability 0 to 1."""
        order = np.argsort(self.width, kind="stable")
        summed = np.cumsum(self.weight[order])
        if not summed[-1] > 0:
            return np.full(np.shape(level), (NARROWEST + WIDEST) / (4 * np.pi))
        # within a step all widths are equally likely
        widths = self.width[order]
        steps, first = np.unique(widths, return_index=True)
        ends = np.concatenate([summed[first[1:] - 1], summed[-1:]]) / summed[-1]
        levels = np.concatenate([[0.0], ends])
        edges = np.concatenate([steps - STEP / 2, steps[-1:] + STEP / 2])
        return np.asarray(np.interp(level, levels, edges) / (2 * np.pi))


def weigh_openings(shown: AcrossPipe, thinner: float) -> Opening:
    """Weigh a bare stretch against every opening that may show as much.

    Parameters
    ----------
    shown : AcrossPipe
    thinner : float
        Diameter of the pipe over that of the lagged one.

    Returns
    -------
    Opening
    """
    half = np.arange(NARROWEST, WIDEST + STEP / 2, STEP) / 2
    centre = np.arange(-math.pi / 2, math.pi / 2 + STEP / 2, STEP)
    widths, middles = (grid.ravel() for grid in np.meshgrid(half, centre, indexing="ij"))
    sides = [_side(shown, thinner, side) for side in (-1, 1)]
    edges = np.arange(-math.pi, math.pi + STEP / 4, STEP / 2)
    by_edge = np.array([[side.of_lip(angle) for angle in edges] for side in sides])

    def lips(angle: FloatArray, number: int) -> FloatArray:
        return np.asarray(np.interp(angle, edges, by_edge[number]))

    # a lip on the left at -angle is the mirror image of one on the right
    logarithm = lips(widths - middles, 0) + lips(widths + middles, 1)
    shows = (np.abs(middles) - widths < math.pi / 2) & np.isfinite(logarithm)
    logarithm = np.where(shows, logarithm, -np.inf)
    bare = sum(side.of_bare for side in sides) + math.log(PRIOR_BARE)
    log_prior = math.log((1 - PRIOR_BARE) / max(int(shows.sum()), 1))
    top = max(bare, float(logarithm.max()) + log_prior)
    weight = np.exp(logarithm + log_prior - top)
    total = weight.sum() + math.exp(bare - top)
    return Opening(float(math.exp(bare - top) / total), 2 * widths, middles, weight / total)


@dataclass(frozen=True)
class _Side:
    """One half of the width: logarithms of likelihoods of what shows place by place."""

    across: FloatArray
    """From the middle outwards, positive."""
    hot: FloatArray
    background: FloatArray
    lagging: FloatArray
    cut_face: FloatArray
    thinner: float
    blur: float

    def _sum(self, chosen: FloatArray, edges: tuple[float, ...]) -> float:
        clear = np.ones(self.across.size, dtype=bool)
        for edge in edges:
            clear &= np.abs(self.across - edge) > self.blur
        return INDEPENDENT * float(chosen[clear].sum())

    @property
    def of_bare(self) -> float:
        """The pipe over its width, background beyond."""
        chosen = np.where(self.across < self.thinner, self.hot, self.background)
        return self._sum(chosen, (self.thinner,))

    def of_lip(self, angle: float) -> float:
        """Lagging goes on from an angle, counted outwards from the side facing the camera.

        A cut face stands on the pipe at that angle and hides the pipe beyond it, from the sine
        times the pipe's half width to the sine times the lagged one's. From 90 degrees on nothing
        of it is seen.
        """
        if angle >= math.pi / 2:
            return self.of_bare
        lip = math.sin(max(angle, -math.pi / 2))
        pipe = self.thinner * lip
        chosen = np.where(self.across < pipe, self.hot, self.cut_face)
        chosen = np.where(self.across > lip, self.lagging, chosen)
        return self._sum(chosen, (pipe, lip))


def _side(shown: AcrossPipe, thinner: float, side: int) -> _Side:
    number = (side + 1) // 2
    along = np.isfinite(shown.value) & np.isfinite(shown.lagging) & (side * shown.across > 0)
    along &= bool(np.isfinite(shown.background[number]))
    order = np.flatnonzero(along)[np.argsort(side * shown.across[along])]
    value, lagging = shown.value[order], shown.lagging[order]
    background = shown.background[number]
    strongest = shown.strongest(thinner)
    assert strongest is not None
    contrast = max(strongest - background, 1e-6)
    scatter = math.hypot(
        SMALLEST_SCATTER, GLOW_SHARE * contrast, float(shown.background_scatter[number])
    )
    hot_scatter = HOT_SCATTER * contrast + scatter
    not_hot = _log_tail((background + 0.5 * contrast - value) / hot_scatter)
    goes_on = background + LAGGING_SHARE * np.maximum(lagging - background, 0.0)
    return _Side(
        across=side * shown.across[order],
        hot=_log_tail((value - background - HOT_SHARE * contrast) / hot_scatter),
        background=_log_tail(-np.abs(value - background) / scatter),
        lagging=np.maximum(_log_tail((value - goes_on) / scatter) + not_hot, math.log(FLOOR)),
        cut_face=_log_tail((value - background) / scatter),
        thinner=thinner,
        blur=shown.blur,
    )


def _log_tail(above: FloatArray) -> FloatArray:
    """Return the log likelihood of a value that may lie above, and falls off below."""
    return np.log(np.exp(-0.5 * np.minimum(above, 0.0) ** 2) + FLOOR)
