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
from cladwatt.inverse.opening import BLUR_PX, AcrossPipe, Opening, weigh_openings
from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.stretches import Run
from cladwatt.quantities import Quantity
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["BareDraws", "bare_draws", "cut_face_loss", "with_bare"]

BARE_EMISSIVITY = Quantity(0.85, 0.07, lower=0.5, upper=0.97)
"""Oxidised or rusted steel, band and total: handbooks give 0.61 to 0.96 (Incropera et al., table
A.11; tables for pipe and steel plate)."""
NEAR_FLUID = 0.3
"""Largest distance from the fluid's temperature, over its distance from the air's."""
WALL_DROP = 0.03
"""Largest drop between fluid and outside of the wall, over the same; assumption."""
ENDS_U = 0.1
"""Relative standard uncertainty for what cut ends lose or shelter; assumption."""
SHELTER = 0.15
"""Most that an opening's own walls shelter the pipe in it, over its loss; assumption."""
CUT_FACE_COEFFICIENT = 10.0
"""Convection and radiation at a cut face of lagging, as at any body in still air; assumption.
[W/(m2 K)]"""
LEAST_PROBABILITY = 0.02
PLACES_ACROSS = np.linspace(-0.97, 0.97, 39)
"""Where it is read what shows across, in half widths of the lagged pipe."""
BACKGROUND_AT = (1.2, 1.35, 1.5)
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
    opening : Opening
        Which openings may show so.
    """

    run: Run
    probability: float
    flux: FloatArray
    opening: Opening | None = None


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
    With a sector missing, that share of the circumference loses what the bare pipe does, less
    what the opening's walls shelter; the rest loses what sound lagging does, and heat leaves the
    two cut faces beside the opening.
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
    shown_across = _across(seen, run, sound_at)
    thinner = float(np.median(pipe / line.lagged_diameter))
    strongest = shown_across.strongest(thinner)
    if strongest is None:
        return None
    shown = surface_temperature_draws(
        np.array([seen.sign * strongest]), np.zeros(1), seen.frame, bare_line
    )[:, 0, 0]
    drop = inside - seen.frame.air_temperature
    pipe_seen = float(np.mean(np.abs(shown - inside) < NEAR_FLUID * np.abs(drop)))
    if pipe_seen < LEAST_PROBABILITY:
        return None
    opening = weigh_openings(shown_across, thinner)
    probability = pipe_seen * opening.bare
    wall = inside - WALL_DROP * drop * book.uniform(seen.owner, "bare_wall")
    ends = np.exp(ENDS_U * book.normal(seen.owner, "bare_ends"))
    bare = outer_flux(wall, bare_line.exchange(seen.frame, pipe), seen.vapour) * ends
    all_round = bare * pipe / line.lagged_diameter
    share = opening.share(book.uniform(owner, "sector_share"))
    sheltered = 1 - SHELTER * book.uniform(owner, "sector_shelter")
    cut = 2 * cut_face_loss(line.lagged_diameter, pipe, seen.perimeter * base, drop)
    sector = share * all_round * sheltered + (1 - share) * base + cut / seen.perimeter
    kind = book.uniform(owner, "bare_kind")
    return BareDraws(
        run=run,
        probability=probability,
        flux=np.where(kind < probability, all_round, np.where(kind < pipe_seen, sector, np.nan)),
        opening=opening,
    )


def cut_face_loss(
    lagged_diameter: FloatArray, pipe_diameter: FloatArray, loss: FloatArray, drop: FloatArray
) -> FloatArray:
    """Return what a cut face of lagging beside an opening adds to the loss. [W/m]

    Parameters
    ----------
    lagged_diameter, pipe_diameter : array
        [m]
    loss : array
        Of the sound lagging. [W/m]
    drop : array
        Fluid minus air. [K]

    Notes
    -----
    What a cut draws from the lagging beyond what passes anyway, by superposition: at a distance
    y from the pipe it is driven by the temperature theta(y) that would be there without the cut,
    reaches the face along a quarter of a circle about the corner and leaves it with h. The sum of
    ``theta / (pi y / (2 k) + 1 / h)`` over the thickness is ``(2 k / pi)`` times that of theta
    over ``ln(1 + pi h y / (2 k))``. theta falls with ln r; k follows from the sound loss.
    """
    thickness = (lagged_diameter - pipe_diameter) / 2
    with np.errstate(divide="ignore", invalid="ignore"):
        conducted = loss * np.log(lagged_diameter / pipe_diameter) / (2 * math.pi)
        conductivity = np.maximum(conducted / drop, 1e-3)
    slope = (math.pi * CUT_FACE_COEFFICIENT / 2) / conductivity
    place, weight = np.polynomial.legendre.leggauss(8)
    far = np.log1p(slope * thickness)
    y = np.expm1(far * (1 + place[:, None]) / 2) / slope
    radius = pipe_diameter / 2
    left = 1 - np.log1p(y / radius) / np.log(lagged_diameter / pipe_diameter)
    return np.asarray(2 / math.pi * conductivity * drop * far / 2 * (weight @ left))


def _across(seen: Seen, run: Run, sound_at: BoolArray) -> AcrossPipe:
    """Read what shows across the middle half of a run, and beside it."""
    quarter = (run.last - run.first) // 4
    within = np.arange(run.first + quarter, run.last + 1 - quarter)
    sound = np.flatnonzero(sound_at)
    beside = np.array(
        [[seen.sign * _beside(seen, side * place, within) for place in BACKGROUND_AT]
         for side in (-1, 1)]
    )  # fmt: skip
    return AcrossPipe(
        across=PLACES_ACROSS,
        value=np.array([seen.sign * _beside(seen, place, within) for place in PLACES_ACROSS]),
        lagging=np.array([seen.sign * _beside(seen, place, sound) for place in PLACES_ACROSS]),
        background=np.median(beside, axis=1),
        background_scatter=np.std(beside, axis=1),
        blur=BLUR_PX / (seen.width / 2),
    )


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
