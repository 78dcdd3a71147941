"""The lagging beside a component: warmed by conduction from it, neither sound nor damaged.

A flange, valve or support warms the lagging and the sheet beside it. What it adds fades along the
pipe as ``exp(-x/L)``, with ``L`` of lagging and sheet together (`physics/lengthwise.py`). How warm
it begins is estimated from the strip itself, beside each end of each component; what remains
when that is taken off is searched for damage. The first length is not searched at all.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.seen import Seen
from cladwatt.inverse.stretches import Run
from cladwatt.physics.lengthwise import lengthwise_decay
from cladwatt.survey.model import Line
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["BesideComponents", "beside_components", "decay_of", "warmth_beside"]

NOT_SEARCHED = 1.0
"""Decay lengths beside a component that are not searched for damage; assumption."""
NOT_SOUND = 3.0
"""Decay lengths beside a component that do not count for the sound level; 5 % is left there."""
FITTED = 4.0
"""Decay lengths over which the warmth is estimated; assumption."""
LENGTH_FACTORS = (0.7, 1.0, 1.4)
"""Decay lengths tried over the one worked out: conductivity, sheet and air are not known better;
assumption."""
EDGE = 5
"""Stations of a component that show how warm its end is."""
LEAST_FITTED = 6
"""Stations an estimate needs; with fewer the lagging beside is not searched."""
USUAL_COEFFICIENT = 8.0
"""Convection and radiation together where the surface is at the air's temperature; assumption.
[W/(m2 K)]"""

LEAST_DROP = 2.0
"""Between surface and air, for their coefficient to be told from the flux. [K]"""
UNKNOWN_STATION = 0.005
"""Length of a station where no scale is known; assumption. [m]"""


@dataclass(frozen=True)
class BesideComponents:
    """What the components of a region do to the lagging beside them.

    Attributes
    ----------
    warmth : (n_stations,) array
        What they add at the lens, towards the fluid. [K]
    not_searched : (n_stations,) array of bool
        So near to one that nothing is said of the lagging.
    not_sound : (n_stations,) array of bool
        Near enough that the sound level is not taken from there.
    """

    warmth: FloatArray
    not_searched: BoolArray
    not_sound: BoolArray

    def searched(self, profile: FloatArray, sign: int) -> FloatArray:
        """Return a profile without the warmth, NaN where nothing is searched. [K]"""
        return np.asarray(np.where(self.not_searched, np.nan, profile - sign * self.warmth))

    def sound(self, profile: FloatArray, least: int = 5) -> FloatArray:
        """Return a searched profile, NaN where no sound level is taken; as it is if too short."""
        kept = np.where(self.not_sound, np.nan, profile)
        return np.asarray(kept if np.isfinite(kept).sum() >= least else profile)

    def widened(self, run: Run) -> Run:
        """Return a run with edges less certain where it ends at what was not searched."""
        blind = self.not_searched
        before = _run_length(blind[: run.first][::-1])
        after = _run_length(blind[run.last + 1 :])
        return replace(
            run,
            first_u=math.hypot(run.first_u, before / math.sqrt(3)),
            last_u=math.hypot(run.last_u, after / math.sqrt(3)),
        )


def _run_length(blind: BoolArray) -> int:
    """Return how many of the first stations are blind; the one next to a run may still be seen."""
    start = int(blind[:2].argmax()) if blind[:2].any() else blind.size
    rest = blind[start:]
    return int(rest.argmin()) if not rest.all() else int(rest.size)


def beside_components(seen: Seen, profile: FloatArray, sign: int) -> BesideComponents:
    """Return what the components of a region do to the lagging beside them.

    Parameters
    ----------
    seen : Seen
        With a heat balance.
    profile : (n_stations,) array
        Lens temperature, mean over the bands of angle; NaN in gaps. [K]
    sign : {1, -1}
        1 where the fluid is hotter than the air.
    """
    if not seen.component_at.any():
        nothing = np.zeros(profile.size)
        return BesideComponents(nothing, nothing > 0, nothing > 0)
    length = seen.strip.length
    if not np.isfinite(length).all():
        length = np.full(length.shape, UNKNOWN_STATION)
    return warmth_beside(
        profile,
        profile if seen.body is None else seen.body,
        seen.component_at,
        length,
        sign=sign,
        decay=decay_of(seen.line, _surface_coefficient(seen)),
    )


def _surface_coefficient(seen: Seen) -> float:
    """Return convection and radiation together, as the draws' median shows them. [W/(m2 K)]"""
    assert seen.drawn.heat_flux is not None
    flux = seen.drawn.heat_flux[:, seen.usable]
    surface = seen.drawn.surface_temperature[:, seen.usable]
    known = np.isfinite(surface) & np.isfinite(flux)
    if not known.any():
        return USUAL_COEFFICIENT
    drop = float(np.median(surface[known])) - float(np.median(seen.frame.air_temperature))
    if abs(drop) < LEAST_DROP:
        return USUAL_COEFFICIENT
    coefficient = float(np.median(flux[known])) / drop
    return float(np.clip(coefficient, 0.5 * USUAL_COEFFICIENT, 10 * USUAL_COEFFICIENT))


def decay_of(line: Line, surface_coefficient: float) -> float:
    """Return how far heat spreads along a line. [m]

    Parameters
    ----------
    line : Line
        Where thickness or conductivity is unknown, the sheet alone and 50 mm of usual lagging.
    surface_coefficient : float
        [W/(m2 K)]
    """
    sheet = line.cladding.conductivity * line.cladding.thickness.value
    thickness, resistance = 0.0, 0.0
    for layer in line.layers:
        if layer.thickness is None or layer.conductivity is None:
            thickness = 0.0
            break
        curve = layer.conductivity.conductivity
        thickness += layer.thickness.value
        resistance += layer.thickness.value / curve[len(curve) // 2]
    if not thickness > 0:
        thickness, resistance = 0.05, 1.0
    return float(
        lengthwise_decay(
            thickness,
            thickness / resistance,
            surface_coefficient=surface_coefficient,
            sheet_conductance=sheet,
        )
    )


def warmth_beside(
    profile: FloatArray,
    body: FloatArray,
    component_at: BoolArray,
    length: FloatArray,
    *,
    sign: int,
    decay: float,
) -> BesideComponents:
    """Estimate what components add to the strip beside them.

    Parameters
    ----------
    profile : (n_stations,) array
        Lens temperature, mean over the bands of angle; NaN in gaps. [K]
    body : (n_stations,) array
        The same with the components' own stations in it; NaN where nothing usable. [K]
    component_at : (n_stations,) array of bool
        Stations of components, as drawn.
    length : (n_stations,) array
        Of each station. [m]
    sign : {1, -1}
        1 where the fluid is hotter than the air.
    decay : float
        As `decay_of` gives it. [m]

    Returns
    -------
    BesideComponents
        All nothing without a component.
    """
    number = profile.size
    warmth = np.zeros(number)
    not_searched, not_sound = np.zeros(number, dtype=bool), np.zeros(number, dtype=bool)
    for inside, beyond in _sides(component_at):
        away = np.cumsum(length[beyond]) - 0.5 * length[beyond]
        shown = sign * body[inside]
        hottest = float(np.median(shown)) if np.isfinite(shown).all() else math.inf
        found = _fitted(sign * profile[beyond] - warmth[beyond], away, decay, hottest)
        if found is not None:
            amplitude, fitted = found
            warmth[beyond] += amplitude * np.exp(-away / fitted)
        not_searched[beyond[away < NOT_SEARCHED * decay]] = True
        not_sound[beyond[away < NOT_SOUND * decay]] = True
    return BesideComponents(warmth, not_searched, not_sound)


def _sides(component_at: BoolArray) -> Iterator[tuple[IntArray, IntArray]]:
    """Yield for each end of each component its last stations, and those beyond to the next one."""
    for last in np.flatnonzero(component_at[:-1] & ~component_at[1:]).tolist():
        yield _stretch_from(component_at, last, -1)[:EDGE], _stretch_from(component_at, last + 1, 1)
    for before in np.flatnonzero(~component_at[:-1] & component_at[1:]).tolist():
        yield (
            _stretch_from(component_at, before + 1, 1)[:EDGE],
            _stretch_from(component_at, before, -1),
        )


def _stretch_from(component_at: BoolArray, start: int, step: int) -> IntArray:
    """Return the stations from one on that are like it, in their order."""
    stations = np.arange(start, component_at.size if step > 0 else -1, step)
    other = component_at[stations] != component_at[start]
    return stations[: int(other.argmax())] if other.any() else stations


def _fitted(
    excess: FloatArray, away: FloatArray, decay: float, hottest: float
) -> tuple[float, float] | None:
    """Fit a level and what fades on top of it; return what it begins with and the length.

    The level is the strip's own beyond, damaged or not: a step of damage is no warmth.
    """
    usable = np.isfinite(excess)
    if not usable.any():
        return None
    first = float(away[usable][0])
    chosen = usable & (away < first + FITTED * decay)
    if chosen.sum() < LEAST_FITTED:
        return None
    excess, away = excess[chosen], away[chosen]
    # it cannot be warmer than what warms it
    limit = max(hottest - float(np.min(excess)), 0.0)
    best = (math.inf, 0.0, decay)
    for factor in LENGTH_FACTORS:
        fading = np.exp(-away / (factor * decay))
        matrix = np.stack([np.ones_like(fading), fading], axis=1)
        amplitude = float(np.clip(np.linalg.lstsq(matrix, excess)[0][1], 0.0, limit))
        rest = excess - amplitude * fading
        misfit = float(np.sum((rest - rest.mean()) ** 2))
        if misfit < best[0]:
            best = (misfit, amplitude, factor * decay)
    return best[1], best[2]
