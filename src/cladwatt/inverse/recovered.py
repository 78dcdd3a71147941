"""Loss and lagging's resistance along a strip, from its recovered profile and the shared draws.

The profile's own draws say where heat comes from and leaves, in kelvin at the lens; each shared
draw says what a kelvin at the lens means in watts. So errors that all stations share stay shared.
"""

import math
from typing import NamedTuple

import numpy as np

from cladwatt.inverse.face import COLDEST, surface_temperature_draws
from cladwatt.inverse.observe import Balance
from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.profile import Profile, Spreading, recover_profile
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws, outside_film
from cladwatt.physics.spreading import point_spread_sigma
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Recovered", "recovered_of", "spreading_of"]

FAINT = 0.02
"""Contrast below which a region does not say itself what a kelvin means. [K]"""
STRAIGHT = 1.0
"""Contrast below which the loss against the value at the lens counts as straight. [K]"""


EDGE_STATIONS = 3
"""Beside a bare stretch that neither show it nor the sheet alone; a spot; assumption."""


class Recovered(NamedTuple):
    """Draws along a strip, each (count, n_bins); numbers in gaps mean nothing.

    Attributes
    ----------
    loss : array
        Leaving the surface, the lens's blur undone. [W/m]
    conductance : array or None
        Of the lagging, spreading undone too; None where the inside is unknown. [W/(m K)]
    profile : Profile
    """

    loss: FloatArray
    conductance: FloatArray | None
    profile: Profile


def recovered_of(
    seen: Seen, balance: Balance, sound: SoundDraws | None, kelvin_per_rise: float
) -> Recovered | None:
    """Return what a strip loses and how well it is lagged, with what smeared it undone.

    Parameters
    ----------
    seen : Seen
        With known diameter.
    balance : Balance
    sound : SoundDraws or None
        Its lagging conducts lengthwise; left out where unknown.
    kelvin_per_rise : float
        What a loss twice that at the sound level shows at the lens. [K]

    Returns
    -------
    Recovered or None
        None where the surface is declared wet, lengths are unknown or too little is seen. Where
        the pipe may be bare there is no sheet to spread heat: those stations stay as they are.
    """
    length = seen.strip.length
    if seen.conditions.surface_wet or not kelvin_per_rise > 0 or not np.isfinite(length).all():
        return None
    value = np.where(seen.usable, seen.face.temperature.mean(axis=0), np.nan)
    level = float(value[balance.sound_at].mean())
    opened = _opened(seen, balance)
    spreading, warmer = spreading_of(seen, sound, level)
    profile = recover_profile(
        value,
        length,
        null=balance.null,
        blur_sigma=point_spread_sigma(seen.camera.spot_pixels),
        spreading=spreading,
        kelvin_per_rise=kelvin_per_rise,
        generator=seen.book.generator(seen.owner, "profile"),
        count=seen.book.count,
        opened=opened,
    )
    if profile is None:
        return None
    smeared = _binned(value[None], seen, profile)[0]
    flux = _binned(balance.flux, seen, profile)
    contrast = smeared - level
    steepness = abs(float(np.median(balance.base))) / kelvin_per_rise
    slope = _slopes(flux - balance.base[:, None], contrast, steepness)
    clad = ~np.logical_or.reduceat(opened, np.arange(0, opened.size, profile.step))
    sharper = np.where(clad, profile.surface - smeared, 0.0)
    loss = seen.perimeter[:, None] * (flux + slope * sharper)
    inside = seen.line_draws.inside_temperature
    if inside is None:
        return Recovered(loss, None, profile)
    held = np.where(clad, profile.supply - profile.surface, 0.0)
    temperature = _binned(seen.drawn.surface_temperature, seen, profile)
    temperature = temperature + warmer * sharper
    with np.errstate(divide="ignore", invalid="ignore"):
        supplied = loss + seen.perimeter[:, None] * slope * held
        conductance = supplied / (inside[:, None] - temperature)
        return Recovered(loss, outside_film(conductance, seen.line_draws), profile)


def spreading_of(seen: Seen, sound: SoundDraws | None, level: float) -> tuple[Spreading, float]:
    """Return what spreads heat along a region, and how much the surface warms per kelvin seen.

    Both in the median of the draws, about a value at the lens. [K]
    """
    temperature = surface_temperature_draws(
        np.array([level - 0.5, level + 0.5]), np.zeros(1), seen.frame, seen.line_draws
    )[:, 0]
    temperature = np.fmax(temperature, COLDEST)
    middle = temperature.mean(axis=1)
    per_kelvin = float(np.median(temperature[:, 1] - temperature[:, 0]))
    exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
    cooler, warmer = (outer_flux(middle + side, exchange, seen.vapour) for side in (-0.5, 0.5))
    sheet = seen.line.cladding
    found = Spreading(
        surface_coefficient=max(float(np.median(warmer - cooler)), 0.5),
        sheet_conductance=sheet.thickness.value * sheet.conductivity,
    )
    pipe, lagged = seen.line_draws.pipe_diameter, seen.line_draws.lagged_diameter
    if sound is None or pipe is None or lagged is None:
        return found, per_kelvin
    inner = float(np.median(pipe))
    outer = float(np.median(lagged)) - 2 * sheet.thickness.value
    if not outer > 1.01 * inner:
        return found, per_kelvin
    shape = math.log(outer / inner) / (2 * math.pi)
    conductivity = shape / float(np.median(sound.specified_resistance))
    lagging = {"inner_diameter": inner, "outer_diameter": outer}
    return found._replace(conductivity=conductivity, **lagging), per_kelvin


def _opened(seen: Seen, balance: Balance) -> BoolArray:
    """Return the stations where the pipe may be bare, with those its edges blur into."""
    opened = np.zeros(seen.usable.size, dtype=bool)
    for bare in balance.bare:
        if bare is not None:
            first = max(bare.run.first - EDGE_STATIONS, 0)
            opened[first : bare.run.last + EDGE_STATIONS + 1] = True
    return opened


def _binned(values: FloatArray, seen: Seen, profile: Profile) -> FloatArray:
    """Return means over the usable stations of each bin, (count, n_bins); 0 where none is."""
    if profile.step == 1:
        return np.where(seen.usable, values, 0.0)
    starts = np.arange(0, seen.usable.size, profile.step)
    total = np.add.reduceat(np.where(seen.usable, values, 0.0), starts, axis=1)
    number = np.add.reduceat(seen.usable.astype(float), starts)
    return np.asarray(total / np.maximum(number, 1.0))


def _slopes(found: FloatArray, contrast: FloatArray, steepness: float) -> FloatArray:
    """Return the slope of each draw's values against the contrast, at each bin, (count, n_bins).

    A parabola through the sound level: films give off more than in proportion. Where there is
    hardly any contrast the slope is `steepness`, where there is little the parabola is straight.
    """
    number = contrast.size
    square = contrast**2
    power = float(square.sum())
    across = square - (square @ contrast) / max(power, 1e-12) * contrast
    curved = found @ across / (float(across @ across) + number * STRAIGHT**4)
    left = found - curved[:, None] * square
    straight = (left @ contrast + number * FAINT**2 * steepness) / (power + number * FAINT**2)
    return np.asarray(straight[:, None] + 2 * curved[:, None] * contrast)
