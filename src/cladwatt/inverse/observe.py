"""What the image says of one region by itself: its strip, contrasts, levels, and their draws."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np

from cladwatt.errors import Fault, RegionError
from cladwatt.inverse.bare import BareDraws, bare_draws, with_bare
from cladwatt.inverse.beside_components import beside_components
from cladwatt.inverse.cladding_fin import spreading_length
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.face import face_draws, surface_temperature_draws
from cladwatt.inverse.feasibility import Bounds, flux_bounds
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.hidden_side import HiddenSide, hidden_side, whole_flux
from cladwatt.inverse.joint import SOUND_SCATTER, LevelEvidence
from cladwatt.inverse.kelvin_per_rise import kelvin_of_rise
from cladwatt.inverse.law_spread import with_own_spread
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.null import NullModel, null_of
from cladwatt.inverse.rain import MAY_BE_WET, MOSTLY_WET, RainLeft, rain_left
from cladwatt.inverse.seen import FrameImage, Seen
from cladwatt.inverse.sound import SoundDraws, sound_draws
from cladwatt.inverse.steady_state import is_settled, warming_gain
from cladwatt.inverse.stretches import Run, find_runs, sound_stations
from cladwatt.inverse.sunlit import sun_on_run, sunlit_excess
from cladwatt.inverse.tracing import Stripe, clear_bands, stripe_of
from cladwatt.measure.face_bands import bands_of
from cladwatt.measure.strip import Strip, known_length_factor, sample_strip, straighten
from cladwatt.survey.model import Camera, Conditions, Line
from cladwatt.survey.region import Region
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Balance", "Observed", "observe_region"]

UNKNOWN_DIAMETER = 0.2
"""For the convection law alone where no diameter is known, a factor of 1.6 uncertain. [m]"""
BANDS_OF_ANGLE = 5
LEAST_STATIONS = 5
COMPONENT_MARGIN = 0.15
"""How far a component may reach beyond its drawn outline, over the pipe's width; assumption."""
SMALLEST_SOUND_LOSS = 1.0
"""Below this the specification says nothing of the level: the line is at the air's temperature.
[W/m]"""


@dataclass(frozen=True)
class Balance:
    """What the heat balance adds to what was seen.

    Attributes
    ----------
    null : NullModel
    searched : (n_stations,) array
        Lens temperature along the strip without what components add to it, NaN in gaps and
        where nothing is searched. [K]
    runs : tuple of Run
    sound_at : (n_stations,) array of bool
        Stations that carry the sound level.
    flux : (count, n_stations) array
        Over the whole circumference, NaN in gaps only. [W/m2]
    base : (count,) array
        The same at the sound level; like `flux` not yet held to the bounds. [W/m2]
    bounds : Bounds
    infeasible : float
        Share of draws of the mean flux beyond the bounds.
    sound : SoundDraws or None
    hidden : HiddenSide
    bare : tuple of BareDraws or None
        Of each run; None where the pipe is not seen.
    rain : RainLeft or None
    stripe : Stripe or None
        Of a traced line.
    """

    null: NullModel
    searched: FloatArray
    runs: tuple[Run, ...]
    sound_at: BoolArray
    flux: FloatArray
    base: FloatArray
    bounds: Bounds
    infeasible: float
    sound: SoundDraws | None
    hidden: HiddenSide
    bare: tuple[BareDraws | None, ...]
    rain: RainLeft | None = None
    stripe: Stripe | None = None

    @property
    def untraced_base(self) -> FloatArray:
        """Flux at the sound level without the tracer, (count,). [W/m2]"""
        return self.base if self.stripe is None else self.stripe.untraced(self.base)


@dataclass(frozen=True)
class Observed:
    """One region as the image shows it; no balance where the wind is unknown."""

    seen: Seen
    balance: Balance | None

    def evidence(self) -> LevelEvidence | None:
        """Return what the region says of its lagging as a whole, None where it says nothing.

        A traced line says nothing where its tracer's heat cannot be told from the fluid's; nor
        does a line that is still warming up, or a surface that is or may be wet. Nor does lagging
        declared wet or frozen: it is not sound, and how much worse it is no published range tells.
        """
        balance, line = self.balance, self.seen.line
        if balance is None or balance.sound is None:
            return None
        if balance.stripe is not None and not balance.stripe.is_split:
            return None
        if balance.sound.declared_loss is not None:
            return None
        if not is_settled(line) or self.seen.conditions.surface_wet:
            return None
        if balance.rain is not None and balance.rain.share > MAY_BE_WET:
            return None
        sound = balance.sound.heat_loss
        if not (np.abs(sound) > SMALLEST_SOUND_LOSS).all() or np.ptp(np.sign(sound)) > 0:
            return None
        # as seen, impossible or not: clipped here alone, draws would not be moved all the way
        relative = self.seen.perimeter * balance.untraced_base / sound - 1
        return LevelEvidence(self.seen.region.id, relative) if np.isfinite(relative).all() else None


def observe_region(
    region: Region,
    line: Line,
    *,
    image: FrameImage,
    left_out: BoolArray,
    components: BoolArray,
    known_lengths: Sequence[Region],
    frame: FrameDraws,
    line_draws: LineDraws,
    conditions: Conditions,
    camera: Camera,
    book: DrawBook,
    bare_component: bool = False,
) -> Observed:
    """Read one pipe region off the image.

    Parameters
    ----------
    region, line
        What was drawn, and over which line.
    image : FrameImage
    left_out : (rows, cols) array of bool
        Pixels of other regions and patches, already widened by the blur.
    components : (rows, cols) array of bool
        Pixels of components, as drawn; whole stations are left out for them.
    known_lengths : sequence of Region
        Role ``known_length`` on the same line in this frame.
    frame, line_draws
        Shared draws.
    conditions, camera
        As declared for this frame.
    book : DrawBook
    bare_component : bool
        Whether one of the components is bare.

    Returns
    -------
    Observed

    Raises
    ------
    RegionError
        If nothing usable is left of the region.
    """
    strip = _strip(region, line, image, known_lengths, camera)
    frame = sun_on_run(frame, conditions, line_draws.inclination_deg)
    lens = sample_strip(np.where(left_out, np.nan, image.lens_temperature), strip)
    component_at = _component_stations(strip, components)
    body = lens.mean(axis=0)
    lens[:, _bulged(component_at, strip)] = np.nan
    recorded = np.where(np.isfinite(lens), sample_strip(image.recorded_temperature, strip), np.nan)
    face = bands_of(lens, strip.view_angle, BANDS_OF_ANGLE)
    usable = np.asarray(np.isfinite(face.temperature).all(axis=0))
    if usable.sum() < LEAST_STATIONS:
        raise RegionError(_nothing_usable(region, int(usable.sum())))
    diameter = line_draws.lagged_diameter
    if diameter is None:
        diameter = UNKNOWN_DIAMETER * np.exp(0.5 * book.normal(f"region:{region.id}", "diameter"))
    middle = np.array([np.median(face.temperature[:, usable])])
    about = surface_temperature_draws(middle, np.zeros(1), frame, line_draws)[:, 0, 0]
    frame = with_own_spread(frame, line_draws, diameter, about)
    line_draws = _further_along(line, line_draws, frame, strip)
    seen = Seen(
        region=region,
        line=line,
        strip=strip,
        lens=lens,
        recorded=recorded,
        face=face,
        drawn=face_draws(face, frame, line_draws, diameter),
        usable=usable,
        component_at=component_at,
        bare_component=bare_component,
        diameter=diameter,
        gain=_is_gain(line, conditions),
        frame=frame,
        line_draws=line_draws,
        conditions=conditions,
        camera=camera,
        known_lengths=tuple(marked.id for marked in known_lengths),
        image=image,
        book=book,
        body=body,
    )
    return Observed(seen, _balance(seen))


def _further_along(line: Line, line_draws: LineDraws, frame: FrameDraws, strip: Strip) -> LineDraws:
    """Cool the fluid by what the line loses, if sound, up to the middle of the strip.

    Only where flow and specific heat are declared and the region's stations are.
    """
    inside = line_draws.inside_temperature
    station = float(np.mean(strip.station)) if np.isfinite(strip.station).all() else 0.0
    if inside is None or line.flow is None or line.specific_heat is None or station <= 0:
        return line_draws
    sound = sound_draws(line_draws, frame)
    if sound is None:
        return line_draws
    fall = station * sound.heat_loss / (line.flow.value * line.specific_heat.value)
    drop = inside - frame.air_temperature
    with np.errstate(divide="ignore", invalid="ignore"):
        lengths = np.where(fall * drop > 0, fall / drop, 0.0)
    # where nothing drives the loss towards the air, sun or surroundings do: evenly along the line
    fallen = np.where(lengths > 0, -drop * np.expm1(-lengths), fall)
    return replace(line_draws, inside_temperature=inside - fallen)


def _strip(
    region: Region,
    line: Line,
    image: FrameImage,
    known_lengths: Sequence[Region],
    camera: Camera,
) -> Strip:
    """Straighten the region, by a known length along it where one was marked."""
    nominal = line.lagged_diameter
    if region.outside_diameter is not None:
        nominal = region.outside_diameter.value
    columns = image.lens_temperature.shape[1]
    view = camera.field_of_view_deg
    strip = straighten(region, lagged_diameter=nominal, columns=columns, field_of_view_deg=view)
    for marked in known_lengths:
        factor = known_length_factor(strip, marked)
        if factor is not None:
            return straighten(
                region,
                lagged_diameter=nominal,
                columns=columns,
                field_of_view_deg=view,
                known_length=factor,
            )
    return strip


def _component_stations(strip: Strip, components: BoolArray) -> BoolArray:
    """Return the stations that a drawn component touches."""
    touched = np.nan_to_num(sample_strip(components.astype(float), strip)).max(axis=0)
    return np.asarray(touched > 0)


def _bulged(stations: BoolArray, strip: Strip) -> BoolArray:
    """Widen stations along: a round fitting seen obliquely bulges, and is drawn by hand."""
    margin = round(max(3.0, COMPONENT_MARGIN * float(np.median(strip.width))))
    return np.asarray(np.convolve(stations, np.ones(2 * margin + 1), mode="same") > 0)


def _nothing_usable(region: Region, stations: int) -> Fault:
    return Fault(
        f"regions/{region.frame_id}.geojson",
        f"feature {region.feature} (id '{region.id}')",
        f"only {stations} stations hold usable pixels",
        f"expected at least {LEAST_STATIONS}; the rest is dead, clipped, left out or outside the "
        "frame",
        frame_id=region.frame_id,
        region_id=region.id,
    )


def _is_gain(line: Line, conditions: Conditions) -> bool:
    """Whether the fluid is colder than the air."""
    if line.inside_temperature is None or conditions.air_temperature is None:
        return False
    return line.inside_temperature.value < conditions.air_temperature.value


def _infeasible_share(seen: Seen, bounds: Bounds, flux: FloatArray) -> float:
    """Return the share of draws without radiance somewhere, or with a mean beyond the bounds."""
    dark = np.isnan(seen.drawn.surface_temperature[:, seen.usable]).any(axis=1)
    return bounds.beyond(np.where(dark, np.nan, seen.mean_along(flux)))


class _Contrast(NamedTuple):
    """What stands out along a strip, against what."""

    null: NullModel
    searched: FloatArray
    """Profile without what components add to it, NaN where nothing is searched. [K]"""
    runs: tuple[Run, ...]
    sound_at: BoolArray


def _contrast(seen: Seen, bands: BoolArray, is_wet: bool) -> _Contrast:
    """Seek what stands out along the strip in these bands of angle."""
    profile = seen.face.temperature[bands].mean(axis=0)
    null = _null(seen, bands)
    sign = -1 if seen.gain else 1
    beside = beside_components(seen, profile, sign)
    searched = beside.searched(profile, sign)
    carries = beside.sound(searched)
    runs: tuple[Run, ...] = ()
    if is_wet:
        # it dries in patches, which are no damage: nothing is searched
        searched = np.full_like(searched, np.nan)
    else:
        found = find_runs(
            searched, null, sign=sign, diameter_stations=seen.width, level_from=carries
        )
        runs = tuple(beside.widened(run) for run in found)
    sound_at = sound_stations(carries, runs, clear_of=0.5 * seen.width)
    return _Contrast(null, searched, runs, sound_at)


def _null(seen: Seen, bands: BoolArray) -> NullModel:
    metres = seen.strip.length
    gain = warming_gain(seen.line)
    level = float(np.nanmedian(seen.face.temperature))
    warmth = abs(level - float(np.median(seen.frame.air_temperature)))
    return null_of(
        seen.face.temperature[bands],
        noise=seen.image.noise,
        pixels_per_station=seen.strip.used_width * float(bands.mean()),
        station_length=float(np.median(metres)) if np.isfinite(metres).all() else 0.005,
        reflected_temperature=float(np.median(seen.frame.reflected_temperature)),
        emissivity=seen.emissivity,
        indoors=seen.conditions.indoors is not False,
        lagging_scatter=0.0 if gain == 1 else SOUND_SCATTER * gain * warmth,
    )


def _balance(seen: Seen) -> Balance | None:
    """Balance the heat of the seen face, with what stands out and what is hidden."""
    if seen.drawn.heat_flux is None:
        return None
    rain = rain_left(seen)
    is_wet = bool(seen.conditions.surface_wet) or (rain is not None and rain.share > MOSTLY_WET)
    sound = sound_draws(seen.line_draws, seen.frame) if seen.diameter_known else None
    every = np.ones(seen.face.view_angle.size, dtype=bool)
    contrast = _contrast(seen, every, is_wet)
    stripe = stripe_of(seen, contrast.sound_at, sound)
    if stripe is not None and not clear_bands(stripe).all():
        # a tracer that wanders under the lagging must not look like damage
        contrast = _contrast(seen, clear_bands(stripe), is_wet)
    runs, sound_at = contrast.runs, contrast.sound_at
    bounds = flux_bounds(seen)
    seen_flux = seen.drawn.heat_flux
    sun = sunlit_excess(seen)
    if sun is not None:
        seen_flux = seen_flux - sun[:, None]
    seen_base = seen_flux[:, sound_at].mean(axis=1)
    hidden = hidden_side(
        seen,
        runs,
        sound_at,
        contrast.null,
        usual=None if stripe is None else stripe.usual,
        kelvin_per_rise=kelvin_of_rise(seen, sound_at, seen_base),
        spread_length=spreading_length(seen, sound) or 0.0,
    )
    flux = whole_flux(seen_flux, seen_base, hidden)
    base = seen_base * (1 + hidden.unevenness)
    if stripe is not None:
        flux, base = flux * stripe.factor[:, None], base * stripe.factor
    bare = tuple(bare_draws(seen, run, sound_at, base) for run in runs)
    for one in bare:
        flux = flux if one is None else with_bare(flux, one)
    return Balance(
        null=contrast.null,
        searched=contrast.searched,
        runs=runs,
        sound_at=sound_at,
        flux=bounds.filled(flux, seen.usable),
        base=bounds.filled(base[:, None], np.ones(1, dtype=bool))[:, 0],
        bounds=bounds,
        infeasible=_infeasible_share(seen, bounds, flux),
        sound=sound,
        hidden=hidden,
        bare=bare,
        stripe=stripe,
        rain=rain,
    )
