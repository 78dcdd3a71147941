"""The side of the pipe the camera does not see: most of its circumference.

Sound lagging is taken to be the same all round but for a small unevenness. Where damage lies is
weighed run by run from how it stands out across the seen face (`around_pipe`).
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.around_pipe import AroundPipe, BandContrast, weigh_sides
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.null import PATCH_LENGTH, NullModel
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.stretches import Run
from cladwatt.types import BoolArray, FloatArray

__all__ = ["HiddenSide", "around_run", "hidden_side", "top_angle", "whole_flux"]

UNEVENNESS = 0.04
"""Relative standard uncertainty of the whole circumference's loss from the seen face's on a
sound pipe: convection differs between top and bottom, and the lagging around; assumption."""
STEEPEST_DEG = 60.0
"""Of a pipe of which it is told what is its upper side."""
LEAST_ACROSS = 0.5
"""Part of gravity in the picture that has to lie across the pipe for that."""
LAGGING_SPREADS = 1 / 3
"""Of its thickness: how far lagging itself spreads heat around; assumption."""


@dataclass(frozen=True)
class HiddenSide:
    """Draws for the hidden part.

    Attributes
    ----------
    seen_share : float
        Seen part of the circumference.
    unevenness : (count,) array
        Relative difference of the whole from the seen, on sound lagging.
    excess_share : (count, n_stations) array
        Excess of the hidden part as a share of the seen part's; that of the nearest run.
    around : tuple of AroundPipe or None
        Of each run; None where nothing tells.
    """

    seen_share: float
    unevenness: FloatArray
    excess_share: FloatArray
    around: tuple[AroundPipe | None, ...]


def hidden_side(
    seen: Seen,
    runs: tuple[Run, ...],
    sound_at: BoolArray,
    null: NullModel,
    *,
    kelvin_per_rise: float,
    spread_length: float,
    usual: FloatArray | None = None,
) -> HiddenSide:
    """Draw for one region.

    Parameters
    ----------
    seen : Seen
    runs : tuple of Run
    sound_at : (n_stations,) array of bool
    null : NullModel
    kelvin_per_rise : float
        Kelvin at the lens for a loss twice the sound one. [K]
    spread_length : float
        Decay length along the cladding. [m]
    usual : (n_bands,) array, optional
        What each band gives off on sound lagging over an even one, beside a tracer.
    """
    seen_share = float(seen.face.extent.sum() / (2 * np.pi))
    around = tuple(
        around_run(seen, run, sound_at, null, kelvin_per_rise, spread_length, usual) for run in runs
    )
    shares = [_share(seen.book, seen.owner, run, one, seen_share) for run, one in
              zip(runs, around, strict=True)]  # fmt: skip
    return HiddenSide(
        seen_share=seen_share,
        unevenness=UNEVENNESS * seen.book.normal(seen.owner, "unevenness"),
        excess_share=_nearest(shares, runs, seen.usable.size, seen.book.count),
        around=around,
    )


def _share(
    book: DrawBook, owner: str, run: Run, around: AroundPipe | None, seen_share: float
) -> FloatArray:
    if around is None:
        return np.ones(book.count)
    return around.draw(book, f"{owner}:{run.first}", seen_share)


def _nearest(
    shares: Sequence[FloatArray], runs: tuple[Run, ...], stations: int, count: int
) -> FloatArray:
    """Give every station the share of the run nearest to it; 1 without runs."""
    if not runs:
        return np.ones((count, stations))
    at = np.arange(stations)
    apart = [np.maximum(np.maximum(run.first - at, at - run.last), 0) for run in runs]
    return np.stack(shares, axis=1)[:, np.argmin(apart, axis=0)]


def around_run(
    seen: Seen,
    run: Run,
    sound_at: BoolArray,
    null: NullModel,
    kelvin_per_rise: float,
    spread_length: float,
    usual: FloatArray | None = None,
) -> AroundPipe | None:
    """Weigh where around the pipe a run lies; None where the face does not tell."""
    temperature = seen.face.temperature
    bands = temperature.shape[0]
    inside = temperature[:, run.stations]
    inside = inside[:, np.isfinite(inside).all(axis=0)]
    if bands < 3 or not kelvin_per_rise > 0 or not inside.size or not sound_at.any():
        return None
    contrast = seen.sign * (inside.mean(axis=1) - temperature[:, sound_at].mean(axis=1))
    if usual is not None:
        contrast = contrast / usual
    if not contrast @ seen.face.extent > 0:
        return None
    stations = inside.shape[1]
    patches = null.own_sigma / math.sqrt(1 + stations * null.station_length / PATCH_LENGTH)
    radius = float(np.median(seen.diameter)) / 2
    lagging = 0.0
    if seen.line_draws.pipe_diameter is not None:
        lagging = max(radius - float(np.median(seen.line_draws.pipe_diameter)) / 2, 0.0)
    return weigh_sides(
        BandContrast(
            contrast=contrast,
            face=seen.face,
            # what the mean over bands scatters by, a band by itself scatters more
            band_sigma=math.hypot(
                patches * math.sqrt(bands / 2), null.station_sigma * math.sqrt(bands / stations)
            ),
            common_sigma=null.run_sigma(stations),
            kelvin_per_rise=kelvin_per_rise,
            spread_angle=math.hypot(spread_length, LAGGING_SPREADS * lagging) / radius,
            top=top_angle(seen),
        )
    )


def top_angle(seen: Seen) -> float | None:
    """Return where the top of the pipe is, from the side facing the camera. [rad]

    A camera level with a lying pipe sees the top at 90 degrees, towards where gravity does not
    pull in the picture; how far it looks up or down is not declared and counts as uncertain.
    """
    if seen.line_draws.inclination_deg > STEEPEST_DEG:
        return None
    strip, roll = seen.strip, math.radians(seen.conditions.roll_deg)
    x = float(np.median(strip.sample_x[-1] - strip.sample_x[0]))
    y = float(np.median(strip.sample_y[-1] - strip.sample_y[0]))
    # roll turns "down" clockwise on the screen, y runs down
    across = (-x * math.sin(roll) + y * math.cos(roll)) / max(math.hypot(x, y), 1e-9)
    if abs(across) < LEAST_ACROSS:
        return None
    return -math.copysign(math.pi / 2, across)


def whole_flux(seen: FloatArray, base: FloatArray, hidden: HiddenSide) -> FloatArray:
    """Return the mean flux over the whole circumference.

    Parameters
    ----------
    seen : (count, n_stations) array
        Mean flux over the seen face. [W/m2]
    base : (count,) array
        Its level at sound stations. [W/m2]
    hidden : HiddenSide

    Returns
    -------
    (count, n_stations) array
        [W/m2]
    """
    share = hidden.seen_share + (1 - hidden.seen_share) * hidden.excess_share
    level = base * (1 + hidden.unevenness)
    return np.asarray(level[:, None] + (seen - base[:, None]) * share)
