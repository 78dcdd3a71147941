"""Bare stretches: a model of their own.

Where the lagging is gone the surface is the pipe's: its diameter, its emissivity, and a
temperature close to the fluid's. Read as very hot cladding such a stretch comes out wrong, most
of all on bright cladding. A stretch is bare as likely as

- its middle shows about the fluid's temperature when read with the emissivity of a pipe, and
- its edges show what a thinner pipe leaves free, the background, rather than lagging that goes
  on (a missing sector also shows the pipe in the middle).
"""

import math
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.stretches import Run
from cladwatt.physics.lagged_pipe import surface_heat_flux
from cladwatt.quantities import Quantity
from cladwatt.types import BoolArray, FloatArray

__all__ = ["BareDraws", "bare_draws", "with_bare"]

BARE_EMISSIVITY = Quantity(0.85, 0.07, lower=0.5, upper=0.97)
"""Oxidised or rusted steel, band and total: handbooks give 0.61 to 0.96 (Incropera et al., table
A.11; tables for pipe and steel plate)."""
NEAR_FLUID = 0.3
"""Largest distance from the fluid's temperature, over its distance from the air's."""
WALL_DROP = 0.03
"""Largest drop between fluid and outside of the wall, over the same; assumption."""
ENDS_U = 0.1
"""Relative standard uncertainty for what cut ends lose or shelter; assumption."""
PRIOR_BARE = 0.5
"""Of a stretch whose middle shows the pipe; a missing sector is the rest. Assumption."""
EDGE_SIGMA = 3.0
"""Scatter of what an edge band shows about background or lagging; assumption. [K]"""


@dataclass(frozen=True)
class BareDraws:
    """One run read as bare pipe.

    Attributes
    ----------
    run : Run
    probability : float
    loss : (count,) array
        Of the bare pipe. [W/m]
    is_bare : (count,) array of bool
        Draws in which the run is bare.
    """

    run: Run
    probability: float
    loss: FloatArray
    is_bare: BoolArray


def bare_draws(seen: Seen, run: Run, sound_at: BoolArray) -> BareDraws | None:
    """Return a run read as bare pipe.

    Parameters
    ----------
    seen : Seen
        With known wind.
    run : Run
    sound_at : (n_stations,) array of bool

    Returns
    -------
    BareDraws or None
        None where inside temperature or diameters are unknown, or the run cannot be bare.
    """
    line = seen.line_draws
    inside, pipe = line.inside_temperature, line.pipe_diameter
    if inside is None or pipe is None or line.lagged_diameter is None:
        return None
    emissivity = seen.book.quantity(seen.owner, "bare_emissivity", BARE_EMISSIVITY)
    bare_line = replace(
        line, band_emissivity=emissivity, total_emissivity=emissivity, is_metal=False
    )
    middle = seen.face.temperature[len(seen.face.view_angle) // 2, run.stations]
    hottest = np.nanpercentile(middle, 50 if seen.gain else 60)
    shown = surface_temperature_draws(np.array([hottest]), np.zeros(1), seen.frame, bare_line)[
        :, 0, 0
    ]
    drop = inside - seen.frame.air_temperature
    near = float(np.mean(np.abs(shown - inside) < NEAR_FLUID * np.abs(drop)))
    edges = _edges_favour_bare(seen, run, sound_at, float(np.median(pipe / line.lagged_diameter)))
    odds = PRIOR_BARE / (1 - PRIOR_BARE) * edges
    probability = near * odds / (1 + odds)
    if probability < 0.02:
        return None
    wall = inside - WALL_DROP * drop * seen.book.uniform(seen.owner, "bare_wall")
    exchange = bare_line.exchange(seen.frame, pipe)
    ends = np.exp(ENDS_U * seen.book.normal(seen.owner, "bare_ends"))
    return BareDraws(
        run=run,
        probability=probability,
        loss=math.pi * pipe * surface_heat_flux(wall, exchange) * ends,
        is_bare=seen.book.uniform(seen.owner, "bare_kind") < probability,
    )


def _edges_favour_bare(seen: Seen, run: Run, sound_at: BoolArray, thinner: float) -> float:
    """Return the likelihood of the edge bands under bare over that under a missing sector.

    `thinner` is the pipe's diameter over the lagged one's.
    """
    face = seen.face
    if face.view_angle.size < 3:
        return 1.0
    edges = face.temperature[[0, -1]]
    shown = np.nanmedian(edges[:, run.stations], axis=1)
    lagging = np.median(edges[:, sound_at], axis=1)
    middle = float(np.nanmedian(face.temperature[face.view_angle.size // 2, run.stations]))
    seen_on_pipe = math.sin(face.view_angle[-1]) < thinner
    expected = middle if seen_on_pipe else _background(seen, run)
    scatter = EDGE_SIGMA + 0.1 * abs(middle - float(lagging.mean()))
    bare = -0.5 * float(np.sum(np.square((shown - expected) / scatter)))
    sign = -1 if seen.gain else 1
    # beside a missing sector the lagging is at its sound level or warmer, up to half the middle's
    above = sign * (shown - lagging)
    room = 0.5 * abs(middle - float(lagging.mean()))
    away = np.maximum(-above, 0) + np.maximum(above - room, 0)
    sector = -0.5 * float(np.sum(np.square(away / scatter)))
    return float(np.exp(np.clip(bare - sector, -20, 20)))


def _background(seen: Seen, run: Run) -> float:
    """Return what the frame shows beside the pipe along a run, at the lens. [K]"""
    strip, image = seen.strip, seen.image.lens_temperature
    beside = []
    for row, beyond in ((0, 1.4), (-1, 1.4)):
        reach = beyond / abs(strip.across[row])
        x = strip.x + (strip.sample_x[row] - strip.x) * reach
        y = strip.y + (strip.sample_y[row] - strip.y) * reach
        rows, columns = np.rint(y).astype(int), np.rint(x).astype(int)
        inside = (rows >= 0) & (rows < image.shape[0]) & (columns >= 0)
        inside &= columns < image.shape[1]
        inside[: run.first] = inside[run.last + 1 :] = False
        beside.append(image[rows[inside], columns[inside]])
    values = np.concatenate(beside)
    values = values[np.isfinite(values)]
    return float(np.median(values)) if values.size else float(np.median(seen.frame.air_temperature))


def with_bare(flux: FloatArray, bare: BareDraws, perimeter: FloatArray) -> FloatArray:
    """Put the bare loss in place of the cladding's, in the draws in which a run is bare.

    Parameters
    ----------
    flux : (count, n_stations) array
        Per square metre of cladding. [W/m2]
    bare : BareDraws
    perimeter : (count,) array
        Over the cladding. [m]

    Returns
    -------
    (count, n_stations) array
        A new array: the bare loss spread over the cladding's circumference. [W/m2]
    """
    spread = flux.copy()
    along = np.arange(bare.run.first, bare.run.last + 1)
    spread[np.ix_(bare.is_bare, along)] = (bare.loss / perimeter)[bare.is_bare, None]
    return spread
