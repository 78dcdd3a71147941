"""Where the pipe itself is seen: a model of its own.

Where lagging is gone the surface is the pipe's: its diameter, its emissivity, and a temperature
close to the fluid's. Read as very hot cladding such a stretch comes out wrong, most of all on
bright cladding. The pipe is seen where the middle of a stretch shows about the fluid's
temperature when read with the emissivity of a pipe. Then either the stretch is bare all round,
and background shows on both sides of the thinner pipe; or a sector is missing, and lagging goes
on at one side at least.
"""

import math
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.stretches import Run
from cladwatt.quantities import Quantity
from cladwatt.types import BoolArray, FloatArray, IntArray

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
SECTOR_SHARE = (0.15, 0.6)
"""Share of the circumference that a missing sector opens, all equally likely; assumption."""
LEAST_PROBABILITY = 0.02
EDGE_SIGMA = 2.0
EDGE_SIGMA_SHARE = 0.01
"""Scatter of what shows beside a pipe about background or lagging: 2 K and 1 % of the drop from
fluid to air; assumption."""
LIKELIHOOD_FLOOR = 0.01
BLUR_PX = 3.0
"""How far the glow of the hot pipe reaches beyond its edge in the image. [px]"""
FARTHEST_BESIDE = 0.97
"""Up to where lagging is looked for, in half widths of the lagged pipe."""
BACKGROUND_AT = 1.35
"""Where the background is looked for, in half widths."""


@dataclass(frozen=True)
class BareDraws:
    """One run in which the pipe is seen.

    Attributes
    ----------
    run : Run
    probability : float
        That it is bare all round.
    flux : (count,) array
        Loss per square metre of cladding, NaN in draws in which neither is the case. [W/m2]
    """

    run: Run
    probability: float
    flux: FloatArray


def bare_draws(seen: Seen, run: Run, sound_at: BoolArray, base: FloatArray) -> BareDraws | None:
    """Return a run read as bare pipe, or as an opening in the lagging.

    Parameters
    ----------
    seen : Seen
        With known wind.
    run : Run
    sound_at : (n_stations,) array of bool
    base : (count,) array
        Flux at the sound level, over the whole circumference. [W/m2]

    Returns
    -------
    BareDraws or None
        None where inside temperature or diameters are unknown, or the pipe is not seen.

    Notes
    -----
    With a sector missing, that share of the circumference loses what the bare pipe does, the
    rest what sound lagging does: radial heat only, and no shelter in the opening.
    """
    line = seen.line_draws
    inside, pipe = line.inside_temperature, line.pipe_diameter
    if inside is None or pipe is None or line.lagged_diameter is None:
        return None
    book, owner = seen.book, f"{seen.owner}:{run.first}"
    emissivity = book.quantity(seen.owner, "bare_emissivity", BARE_EMISSIVITY)
    bare_line = replace(
        line, band_emissivity=emissivity, total_emissivity=emissivity, is_metal=False
    )
    middle = seen.face.temperature[len(seen.face.view_angle) // 2, run.stations]
    shown = surface_temperature_draws(
        np.array([np.nanmedian(middle)]), np.zeros(1), seen.frame, bare_line
    )[:, 0, 0]
    drop = inside - seen.frame.air_temperature
    pipe_seen = float(np.mean(np.abs(shown - inside) < NEAR_FLUID * np.abs(drop)))
    if pipe_seen < LEAST_PROBABILITY:
        return None
    thinner = float(np.median(pipe / line.lagged_diameter))
    odds = PRIOR_BARE / (1 - PRIOR_BARE) * _edges_favour_bare(seen, run, sound_at, thinner)
    probability = pipe_seen * odds / (1 + odds)
    wall = inside - WALL_DROP * drop * book.uniform(seen.owner, "bare_wall")
    ends = np.exp(ENDS_U * book.normal(seen.owner, "bare_ends"))
    bare = outer_flux(wall, bare_line.exchange(seen.frame, pipe), seen.vapour) * ends
    all_round = bare * pipe / line.lagged_diameter
    share = SECTOR_SHARE[0] + np.ptp(SECTOR_SHARE) * book.uniform(owner, "sector_share")
    sector = share * all_round + (1 - share) * base
    kind = book.uniform(owner, "bare_kind")
    return BareDraws(
        run=run,
        probability=probability,
        flux=np.where(kind < probability, all_round, np.where(kind < pipe_seen, sector, np.nan)),
    )


def _edges_favour_bare(seen: Seen, run: Run, sound_at: BoolArray, thinner: float) -> float:
    """Return the likelihood of what shows beside the pipe, bare over missing sector.

    `thinner` is the pipe's diameter over the lagged one's. Between the pipe's edge and the
    lagging's a bare stretch lets the background through, on both sides. With a sector missing
    lagging goes on at one side at least: somewhere there its sound level shows or, inside the
    opening, something warmer, beside a cut face that may be as cool as the background.
    """
    nearest = thinner + BLUR_PX / (seen.width / 2)
    if nearest > FARTHEST_BESIDE:
        return 1.0
    within = np.arange(run.first, run.last + 1)
    sound = np.flatnonzero(sound_at)
    sign = -1 if seen.gain else 1
    assert seen.line_draws.inside_temperature is not None
    drop = np.median(seen.line_draws.inside_temperature - seen.frame.air_temperature)
    scatter = EDGE_SIGMA + EDGE_SIGMA_SHARE * abs(float(drop))
    positions = np.linspace(nearest, FARTHEST_BESIDE, 6)
    through, goes_on = [], []
    for side in (-1.0, 1.0):
        strongest = max(sign * _beside(seen, side * position, within) for position in positions)
        background = sign * _beside(seen, side * BACKGROUND_AT, within)
        lagging = sign * _beside(seen, side * (1 + thinner) / 2, sound)
        if not np.isfinite([strongest, background, lagging]).all():
            continue
        through.append(_likelihood((strongest - background) / scatter))
        goes_on.append(_likelihood(min(strongest - lagging, 0.0) / scatter))
    if len(through) < 2:
        return 1.0
    sector = (goes_on[0] * goes_on[1] + goes_on[0] * through[1] + through[0] * goes_on[1]) / 3
    return through[0] * through[1] / sector


def _likelihood(away: float) -> float:
    """Return a likelihood with a floor, since other things may lie beside a pipe."""
    return math.exp(-0.5 * away**2) + LIKELIHOOD_FLOOR


def _beside(seen: Seen, across: float, stations: IntArray) -> float:
    """Return the median at the lens at a fraction of the half width, NaN where none. [K]"""
    strip, image = seen.strip, seen.image.lens_temperature
    reach = across / strip.across[-1]
    x = strip.x + (strip.sample_x[-1] - strip.x) * reach
    y = strip.y + (strip.sample_y[-1] - strip.y) * reach
    rows, columns = np.rint(y[stations]).astype(int), np.rint(x[stations]).astype(int)
    inside = (rows >= 0) & (rows < image.shape[0]) & (columns >= 0) & (columns < image.shape[1])
    values = image[rows[inside], columns[inside]]
    values = values[np.isfinite(values)]
    return float(np.median(values)) if values.size else math.nan


def with_bare(flux: FloatArray, bare: BareDraws) -> FloatArray:
    """Put the flux of a seen pipe in place of the cladding's, in the draws in which it is seen.

    Parameters
    ----------
    flux : (count, n_stations) array
        Per square metre of cladding. [W/m2]
    bare : BareDraws

    Returns
    -------
    (count, n_stations) array
        A new array. [W/m2]
    """
    spread = flux.copy()
    seen = np.isfinite(bare.flux)
    along = np.arange(bare.run.first, bare.run.last + 1)
    spread[np.ix_(seen, along)] = bare.flux[seen, None]
    return spread
