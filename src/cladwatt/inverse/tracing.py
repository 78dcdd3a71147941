"""A traced line: where its tracer's stripe lies on the seen face, and how much of the loss it is.

The shape of the stripe follows from conduction in the lagging, its place from the declared clock
position and the way the camera looks, its size from the tracer's temperature or power and from how
tracer, pipe and lagging touch, which nobody knows. So each draw of the frame is dealt one of many
tracers that might be there, in proportion to how well it agrees with what differs between the
bands of angle. Only that face is compared, along the sound stations: damage does not enter.
"""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.face import COLDEST, surface_temperature_draws
from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws
from cladwatt.inverse.tracer_place import Place, band_clock_angles, place_of
from cladwatt.physics.heat_tracing import (
    AnnulusPath,
    covered_half_angle,
    stripe_profile,
    tracer_rise_by_power,
    tracer_shares,
)
from cladwatt.physics.surface_balance import surface_coefficients
from cladwatt.quantities import Remark
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["Stripe", "can_split", "clear_bands", "stripe_of", "stripe_remarks"]

POOL = 600
"""Tracers that might be there."""
TRACER_RADIUS = {"steam": 0.006, "electric": 0.0045}
"""Tube or cable, known to a factor; assumption. [m]"""
TRACER_RADIUS_SPREAD = 0.3
LEAST_COVERED, MOST_COVERED = 0.2, 0.8
"""How far the lagging that a tracer holds off the pipe is at the tracer's temperature rather than
the pipe's; assumption. [-]"""
CONTACT, CONTACT_SPREAD = 1.5, 0.9
"""Conductance between tracer and pipe, loose to cemented, log-normal; assumption. [W/(m K)]"""
UNKNOWN_RISE, UNKNOWN_RISE_SPREAD = 1.0, 0.9
"""Tracer above fluid over fluid above air where neither temperature nor power is declared,
log-normal; assumption. [-]"""
UNEVEN_U, PATCH_U = 0.08, 0.03
"""How much an untraced face differs around, in waves and from band to band, over its mean;
assumption. [-]"""
MIRRORED_U = 1.0
"""Scatter of what the bands mirror, weighted with the reflectance over the emissivity;
assumption. [K]"""
LEAST_DRIVE = 5.0
"""With the fluid nearer to the air nothing is shared out. [K]"""
CLEAR_SHARE = 0.1
"""Bands with a smaller part of their heat from the tracer count as beside the stripe."""
DEFAULT_CONDUCTIVITY = 0.045
"""For the stripe's shape alone, where the lagging is unknown; mineral wool. [W/(m K)]"""


@dataclass(frozen=True)
class Stripe:
    """Draws of a tracer's heat, each (count,), over what the line would lose untraced.

    Attributes
    ----------
    place : Place
        What is known of where it lies.
    rise : (count,) array
        By how much the loss is larger for the tracer.
    bands : (count, n_bands) array
        The same in each band of angle.
    seen_rise : (count,) array
        The same over the seen face.
    straight : (count,) array
        What the tracer gives to the lagging without passing through the pipe.
    coupling : (count,) array
        Share of the inside that is at the tracer's temperature.
    power : (count,) array or None
        Declared. [W/m]
    is_split : bool
        Whether the heat can be shared out between tracer and fluid.
    """

    place: Place
    rise: FloatArray
    bands: FloatArray
    seen_rise: FloatArray
    straight: FloatArray
    coupling: FloatArray
    power: FloatArray | None
    is_split: bool

    @property
    def factor(self) -> FloatArray:
        """Loss all round over what the seen face shows as if it went all round, (count,)."""
        return np.asarray((1 + self.rise) / (1 + self.seen_rise))

    @property
    def usual(self) -> FloatArray:
        """Flux of each band of angle on sound lagging over its mean, (n_bands,)."""
        seen = (1 + self.bands) / (1 + self.seen_rise)[:, None]
        return np.asarray(np.median(seen, axis=0))

    def untraced(self, loss: FloatArray) -> FloatArray:
        """Return what of a loss would be left without the tracer."""
        return np.asarray(loss / (1 + self.rise))

    def heat(self, loss: FloatArray) -> FloatArray:
        """Return what of a loss comes from the tracer, (count,). [W/m]

        In steady state all the power of an electric tracer leaves through the surface, straight
        or through the pipe; of one known by its temperature only the straight part is told.
        """
        return self.untraced(loss) * self.straight if self.power is None else self.power


def stripe_of(seen: Seen, sound_at: BoolArray, sound: SoundDraws | None) -> Stripe | None:
    """Return the draws of a traced line's tracer, None on a line without one.

    Parameters
    ----------
    seen : Seen
        With known wind.
    sound_at : (n_stations,) array of bool
        Stations at the sound level.
    sound : SoundDraws or None
        For the lagging's conductance.
    """
    tracing = seen.line.tracing
    if tracing.kind == "none":
        return None
    levels = _band_flux(seen, sound_at)
    place = place_of(seen)
    pool = _Pool(seen, place, _path(seen, sound))
    known = can_split(seen)
    relative, power = _relative_rise(seen, pool, levels, known)
    dealt = _dealt(seen, pool, relative, levels)
    draws = np.arange(seen.book.count)
    shares = tracer_shares(pool.coupling[dealt], relative[draws, dealt])
    bands = np.asarray(shares.rise[:, None] * pool.profile[dealt])
    return Stripe(
        place=place,
        rise=shares.rise,
        bands=bands,
        seen_rise=bands @ _weights(seen),
        straight=shares.straight,
        coupling=pool.coupling[dealt],
        power=power,
        is_split=known,
    )


def clear_bands(stripe: Stripe) -> BoolArray:
    """Return the bands of angle beside the stripe; all where fewer than two are, (n_bands,)."""
    share = np.median(stripe.bands / (1 + stripe.bands), axis=0)
    clear = np.asarray(share < CLEAR_SHARE)
    return clear if clear.sum() >= 2 else np.ones_like(clear)


def can_split(seen: Seen) -> bool:
    """Return whether temperatures or power tell a tracer's heat from the fluid's."""
    tracing, inside = seen.line.tracing, seen.line_draws.inside_temperature
    if inside is None or (tracing.temperature is None and tracing.power is None):
        return False
    above = float(np.median(inside - seen.frame.air_temperature))
    hotter = tracing.temperature is None or tracing.temperature.value > float(np.median(inside))
    return above > LEAST_DRIVE and hotter and seen.diameter_known


def stripe_remarks(stripe: Stripe, loss: FloatArray) -> tuple[Remark, ...]:
    """Return what a reader must know of a tracer and the numbers beside it.

    Parameters
    ----------
    stripe : Stripe
    loss : (count,) array
        Of the line. [W/m]
    """
    remarks = []
    if stripe.place.both_sides:
        remarks.append(Remark("remark.tracer_side_unknown"))
    if not stripe.is_split:
        return tuple(remarks)
    if stripe.power is None:
        remarks.append(Remark("remark.tracer_by_temperature"))
    else:
        straight = np.clip(stripe.untraced(loss) * stripe.straight / stripe.power, 0.0, 1.0)
        parameters = (
            ("power_W_per_m", float(np.median(stripe.power))),
            ("share", float(np.median(straight))),
        )
        remarks.append(Remark("remark.tracer_by_power", parameters))
    # with the tracer off the loss is smaller, and what it gives for the resistance larger
    higher = float(np.median(stripe.rise))
    remarks.append(Remark("remark.traced_resistance", (("share", higher),)))
    return tuple(remarks)


class _Pool:
    """Tracers that might lie under the lagging, and the stripes they would make."""

    def __init__(self, seen: Seen, place: Place, path: AnnulusPath) -> None:
        random = seen.book.generator(seen.owner, "tracer")
        kind = seen.line.tracing.kind
        size = random.standard_normal(POOL)
        radius = TRACER_RADIUS[kind] * np.exp(TRACER_RADIUS_SPREAD * size)
        half = covered_half_angle(path.inner_radius, radius)
        covered = random.uniform(LEAST_COVERED, MOST_COVERED, POOL)
        coupling = covered * half / math.pi
        contact = CONTACT * np.exp(CONTACT_SPREAD * random.standard_normal(POOL))
        rise = UNKNOWN_RISE * np.exp(UNKNOWN_RISE_SPREAD * random.standard_normal(POOL))
        angles = band_clock_angles(seen, place, random, POOL)
        profile = stripe_profile(path, (covered * half)[:, None], angles)
        # in order of their heat, so that draws are dealt along it
        order = np.argsort(coupling, kind="stable")
        self.coupling: FloatArray = coupling[order]
        self.contact: FloatArray = contact[order]
        self.unknown_rise: FloatArray = rise[order]
        self.profile: FloatArray = profile[order]


def _band_flux(seen: Seen, sound_at: BoolArray) -> FloatArray:
    """Return the flux of each band of angle at the sound stations, (count, n_bands). [W/m2]"""
    lens = seen.face.temperature[:, sound_at].mean(axis=1)
    drawn = surface_temperature_draws(lens, seen.face.view_angle, seen.frame, seen.line_draws)
    surface = np.fmax(np.diagonal(drawn, axis1=1, axis2=2), COLDEST)
    exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
    columns = [outer_flux(column, exchange, seen.vapour) for column in surface.T]
    return np.stack(columns, axis=1)


def _path(seen: Seen, sound: SoundDraws | None) -> AnnulusPath:
    """Return what lies between pipe and room, in the median."""
    line, cladding = seen.line_draws, seen.line.cladding
    outer = 0.5 * float(np.median(seen.diameter))
    inner = (
        0.5 * outer if line.pipe_diameter is None else 0.5 * float(np.median(line.pipe_diameter))
    )
    inner = min(inner, 0.98 * outer)
    conductivity = DEFAULT_CONDUCTIVITY
    if sound is not None:
        resistance = float(np.median(sound.specified_resistance / line.installation_factor))
        conductivity = math.log(outer / inner) / (2 * math.pi * resistance)
    exchange = line.exchange(seen.frame, seen.diameter)
    surface = np.nanmedian(seen.median_temperature[seen.usable])
    outside = sum(float(np.median(part)) for part in surface_coefficients(surface, exchange))
    return AnnulusPath(
        inner, outer, conductivity, max(outside, 1.0),
        sheet_conductance=cladding.conductivity * cladding.thickness.value,
    )  # fmt: skip


def _relative_rise(
    seen: Seen, pool: _Pool, levels: FloatArray, known: bool
) -> tuple[FloatArray, FloatArray | None]:
    """Return tracer above fluid over fluid above air, (count, POOL), and the power's draws."""
    tracing, inside = seen.line.tracing, seen.line_draws.inside_temperature
    owner, count = f"line:{seen.line.tag}", seen.book.count
    if not known or inside is None:
        return np.broadcast_to(pool.unknown_rise, (count, POOL)), None
    above = np.maximum(inside - seen.frame.air_temperature, 0.5 * LEAST_DRIVE)[:, None]
    power = None
    if tracing.power is not None:
        power = seen.book.quantity(owner, "tracer_power", tracing.power)
    if tracing.temperature is not None:
        tracer = seen.book.quantity(owner, "tracer_temperature", tracing.temperature)
        return np.maximum(tracer - inside, 0.0)[:, None] / above + 0 * pool.contact, power
    assert power is not None
    loss = (seen.perimeter * (levels @ _weights(seen)))[:, None]
    rise = tracer_rise_by_power(
        power[:, None], pool.coupling, pool.contact, np.maximum(loss, 0.1 * power[:, None]), above
    )
    return np.maximum(rise, 0.0), power


def _dealt(seen: Seen, pool: _Pool, relative: FloatArray, levels: FloatArray) -> IntArray:
    """Return which tracer of the pool each draw is dealt, (count,)."""
    weights = _weights(seen)
    mean = levels @ weights
    floor = 0.2 * abs(float(np.median(mean)))
    found = (levels - mean[:, None]) / np.maximum(mean, floor)[:, None]
    rise = np.asarray(pool.coupling * relative)
    expected = 1 + rise[..., None] * pool.profile
    whole = expected @ weights
    residual = found[:, None, :] - (expected / whole[..., None] - 1)
    precision = _precision(seen, weights)
    misfit = np.einsum("dpi,ij,dpj->dp", residual, precision, residual, optimize=True)
    likely = np.exp(-0.5 * (misfit - misfit.min(axis=1, keepdims=True)))
    cumulative = np.cumsum(likely, axis=1)
    at = seen.book.uniform(seen.owner, "tracer_dealt")[:, None] * cumulative[:, -1:]
    return np.asarray(np.minimum((cumulative < at).sum(axis=1), POOL - 1))


def _weights(seen: Seen) -> FloatArray:
    """Return the share of each band in the seen face, (n_bands,)."""
    return np.asarray(seen.face.extent / seen.face.extent.sum())


def _precision(seen: Seen, weights: FloatArray) -> FloatArray:
    """Return the inverse covariance of what differs between bands without a tracer."""
    angles = seen.face.view_angle
    emissivity = seen.emissivity
    surface = float(np.nanmedian(seen.median_temperature[seen.usable]))
    above = max(abs(surface - float(np.median(seen.frame.air_temperature))), 0.5)
    mirrored = MIRRORED_U * (1 - emissivity) / emissivity / above
    smooth = (UNEVEN_U**2 + mirrored**2) * np.cos(angles[:, None] - angles)
    covariance = smooth + PATCH_U**2 * np.eye(angles.size)
    centre = np.eye(angles.size) - weights
    return np.asarray(np.linalg.pinv(centre @ covariance @ centre.T, rcond=1e-6, hermitian=True))
