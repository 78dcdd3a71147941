"""The table of a region's stations, with their flags."""

import numpy as np

from cladwatt.flags import StationFlag
from cladwatt.inverse.law_spread import at_medians
from cladwatt.inverse.recovered import Recovered
from cladwatt.inverse.result import StationTable
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws, outside_film
from cladwatt.measure.strip import sample_strip
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.surface_balance import surface_outside_validity
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["station_table"]

INFEASIBLE_SHARE = 0.05


def station_table(
    seen: Seen,
    loss: FloatArray | None,
    sound: SoundDraws | None,
    recovered: Recovered | None = None,
) -> StationTable:
    """Return the figures along a strip.

    Parameters
    ----------
    seen : Seen
    loss : (count, n_stations) array or None
        Draws of the loss; None where no diameter or wind is known. [W/m]
    sound : SoundDraws or None
    recovered : Recovered or None
        Loss and resistance with what smeared them undone; as each station shows by itself
        without.

    Returns
    -------
    StationTable
        NaN where unknown; resistances are quantiles of the conductance turned over, inf where
        the conductance's reaches zero.
    """
    nothing = np.full((3, seen.usable.size), np.nan)
    temperature = _quantiles(seen.drawn.surface_temperature)
    if recovered is not None:
        losses = _along(_quantiles(recovered.loss), seen, recovered)
        resistance = _recovered_resistances(seen, recovered)
    else:
        losses = nothing if loss is None else _quantiles(loss)
        resistance = nothing if loss is None else _resistances(seen, loss)
    ratio = nothing[1]
    if sound is not None:
        ratio = resistance[1] / float(np.median(sound.specified_resistance))
    sound_level = np.nan if sound is None else float(np.median(sound.heat_loss))
    strip = seen.strip
    return StationTable(
        station=strip.station,
        x=strip.x,
        y=strip.y,
        width=strip.width,
        length=strip.length,
        recorded_temperature=_mean_across(seen.recorded),
        surface_temperature_low=temperature[0],
        surface_temperature=temperature[1],
        surface_temperature_high=temperature[2],
        heat_loss_low=losses[0],
        heat_loss=losses[1],
        heat_loss_high=losses[2],
        sound_loss=np.full(seen.usable.size, sound_level),
        resistance_low=resistance[0],
        resistance=resistance[1],
        resistance_high=resistance[2],
        resistance_ratio=ratio,
        flags=_flags(seen),
    )


def _quantiles(draws: FloatArray) -> FloatArray:
    """Return 2.5, 50 and 97.5 percentiles over the draws, (3, n_stations)."""
    last = draws.shape[0] - 1
    picks = np.rint(np.array([0.025, 0.5, 0.975]) * last).astype(int)
    # contiguous per station: several times quicker than picking across rows
    ordered = np.partition(np.ascontiguousarray(draws.T), picks, axis=1)
    return np.asarray(ordered[:, picks].T)


def _resistances(seen: Seen, loss: FloatArray) -> FloatArray:
    """Return 2.5, 50 and 97.5 percentiles of the resistance, (3, n_stations)."""
    inside = seen.line_draws.inside_temperature
    if inside is None:
        return np.full((3, seen.usable.size), np.nan)
    with np.errstate(divide="ignore", invalid="ignore"):
        conductance = loss / (inside[:, None] - seen.drawn.surface_temperature)
        conductance = outside_film(conductance, seen.line_draws)
        return np.asarray(1 / np.maximum(_quantiles(conductance), 0.0)[::-1])


def _recovered_resistances(seen: Seen, recovered: Recovered) -> FloatArray:
    if recovered.conductance is None:
        return np.full((3, seen.usable.size), np.nan)
    conductance = _along(_quantiles(recovered.conductance), seen, recovered)
    with np.errstate(divide="ignore"):
        return np.asarray(1 / np.maximum(conductance, 0.0)[::-1])


def _along(values: FloatArray, seen: Seen, recovered: Recovered) -> FloatArray:
    """Return figures of bins at the stations, NaN in gaps."""
    step = recovered.profile.step
    stations = np.arange(seen.usable.size)
    starts = stations[::step]
    number = np.add.reduceat(seen.usable.astype(float), starts)
    places = np.add.reduceat(np.where(seen.usable, stations, 0.0), starts)
    seen_bins = number > 0
    places = places[seen_bins] / number[seen_bins]
    found = np.stack([np.interp(stations, places, row[seen_bins]) for row in values])
    return np.where(seen.usable, found, np.nan)


def _mean_across(values: FloatArray) -> FloatArray:
    """Mean over the first axis; NaN where nothing is usable, without a warning."""
    number = np.isfinite(values).sum(axis=0)
    return np.asarray(np.nansum(values, axis=0) / np.where(number > 0, number, np.nan))


def _flags(seen: Seen) -> IntArray:
    flags = np.zeros(seen.usable.size, dtype=np.int64)
    flags[np.isnan(seen.lens).any(axis=0)] |= StationFlag.MASKED
    flags[~seen.usable] |= StationFlag.GAP
    flags[0.75 * seen.strip.width / seen.camera.spot_pixels < 3] |= StationFlag.NARROW
    clipped = np.nan_to_num(sample_strip(seen.image.clipped.astype(float), seen.strip))
    flags[(clipped > 0).any(axis=0)] |= StationFlag.CLIPPED
    impossible = ~np.isfinite(seen.drawn.surface_temperature)
    flags[seen.usable & (impossible.mean(axis=0) > INFEASIBLE_SHARE)] |= StationFlag.INFEASIBLE
    if seen.frame.wind_speed is not None and seen.diameter_known:
        flags[_outside_validity(seen)] |= StationFlag.OUTSIDE_VALIDITY
    below = seen.below_dew_point
    flags[below] |= StationFlag.BELOW_DEW_POINT
    flags[below & (seen.median_temperature < ZERO_CELSIUS)] |= StationFlag.FROST
    return flags


def _outside_validity(seen: Seen) -> BoolArray:
    """Return the stations where the convection law is used beyond its range, in the median."""
    frame = seen.frame
    assert frame.wind_speed is not None
    temperature = seen.median_temperature
    known = np.isfinite(temperature)
    exchange = at_medians(seen.line_draws.exchange(frame, seen.diameter))
    air = float(np.median(frame.air_temperature))
    outside = surface_outside_validity(np.where(known, temperature, air), exchange)
    return np.asarray(known & outside)
