"""What a stretch shows of its kind: rise, how it lies across the face, length and edges."""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.null import NullModel, moving_mean
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.stretches import Run
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Features", "features_of"]


@dataclass(frozen=True)
class Features:
    """One stretch as the image shows it.

    Attributes
    ----------
    rise, rise_u : float
        Of the strongest band over its sound level, towards the fluid. [K]
    shape : (n_bands,) array
        Rise of each band over the strongest.
    shape_u : float
    length, length_u : float
        At half height. [m]
    edge, edge_u : float
        From a quarter to three quarters of the height; NaN where no edge is told. [m]
    cut : bool
        Whether it reaches an end of the strip and may go on beyond.
    """

    rise: float
    rise_u: float
    shape: FloatArray
    shape_u: float
    length: float
    length_u: float
    edge: float
    edge_u: float
    cut: bool


def features_of(
    seen: Seen,
    run: Run,
    sound_at: BoolArray,
    null: NullModel,
    bands: BoolArray,
    searched: FloatArray,
) -> Features | None:
    """Return what one run shows; None where it stands out nowhere.

    Parameters
    ----------
    seen : Seen
    run : Run
    sound_at : (n_stations,) array of bool
    null : NullModel
    bands : (n_bands,) array of bool
        Those in which contrast is looked for.
    searched : (n_stations,) array
        Profile in which the run was found. [K]
    """
    face = seen.face.temperature[bands]
    sign, step = (-1 if seen.gain else 1), null.station_length
    profile = sign * (searched - np.nanmean(searched[sound_at]))
    fine = moving_mean(profile, 3)
    inside = fine[run.stations]
    if not np.isfinite(inside).any():
        return None
    plateau = float(np.nanpercentile(inside, 85))
    core = np.arange(run.first, run.last + 1)[inside >= 0.7 * plateau]
    if plateau <= 0 or core.size == 0:
        return None
    level = np.nanmean(face[:, core], axis=1) - face[:, sound_at].mean(axis=1)
    rises = sign * level
    strongest = float(np.max(rises))
    if not strongest > 0:
        return None
    # a band by itself scatters more than the mean over all
    by_band = null.station_sigma * math.sqrt(face.shape[0] / core.size)
    patchy = null.own_sigma * math.sqrt(face.shape[0] / 2)
    scatter = math.hypot(by_band, patchy)
    number = run.last - run.first + 1
    edge, edge_u = _edges(fine, run, plateau, null)
    return Features(
        rise=strongest,
        rise_u=math.hypot(null.run_sigma(core.size), by_band),
        shape=rises / strongest,
        shape_u=scatter / strongest,
        length=number * step,
        length_u=math.hypot(run.first_u, run.last_u) * step,
        edge=edge,
        edge_u=edge_u,
        cut=run.first <= 2 or run.last >= fine.size - 3,
    )


def _edges(fine: FloatArray, run: Run, plateau: float, null: NullModel) -> tuple[float, float]:
    """Return how long the run's edges are and their standard uncertainty, NaN where not told."""
    found = []
    for edge, outwards in ((run.first, -1), (run.last, 1)):
        quarter, three_quarters = edge, edge
        while 0 <= quarter < fine.size and fine[quarter] > plateau / 4:
            quarter += outwards
        while run.first <= three_quarters <= run.last and not (
            fine[three_quarters] >= 0.75 * plateau
        ):
            three_quarters -= outwards
        told = 0 <= quarter < fine.size and run.first <= three_quarters <= run.last
        if told and np.isfinite(fine[quarter]):
            found.append(max(abs(quarter - three_quarters), 1))
    if not found:
        return math.nan, math.nan
    length = min(found)
    noise = null.station_sigma / math.sqrt(3) / (0.5 * plateau / length)
    step = null.station_length
    return length * step, math.hypot(1.0, math.sqrt(2) * min(noise, 2.0 * length)) * step
