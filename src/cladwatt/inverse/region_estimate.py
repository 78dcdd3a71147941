"""One pipe region: from its strip to loss, resistance, stretches, probabilities and verdict."""

from collections.abc import Sequence
from dataclasses import replace
from typing import NamedTuple

import numpy as np

from cladwatt.errors import Fault, RegionError
from cladwatt.inverse.bare import bare_draws, with_bare
from cladwatt.inverse.cautions import cautions_of, missing_of, remarks_of, verdict_caps
from cladwatt.inverse.conditions import FrameDraws, LineDraws
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.face import face_draws, surface_temperature_draws
from cladwatt.inverse.feasibility import flux_bounds
from cladwatt.inverse.hidden_side import HiddenSide, evenness_of, whole_flux
from cladwatt.inverse.level import aged_probability
from cladwatt.inverse.null import NullModel, null_of
from cladwatt.inverse.result import (
    Interval,
    RegionResult,
    StationTable,
    Stretch,
    Verdict,
    interval_of,
)
from cladwatt.inverse.seen import FrameImage, Seen
from cladwatt.inverse.sound import SoundDraws, sound_draws
from cladwatt.inverse.station_table import station_table
from cladwatt.inverse.stretch_results import stretches_of
from cladwatt.inverse.stretches import find_runs, sound_stations
from cladwatt.inverse.verdict import VerdictInputs, as_verdict, variance_shares
from cladwatt.measure.face_bands import bands_of
from cladwatt.measure.strip import Strip, known_length_factor, sample_strip, straighten
from cladwatt.physics.lagged_pipe import surface_heat_flux
from cladwatt.quantities import Remark
from cladwatt.survey.model import Camera, Conditions, Line
from cladwatt.survey.region import Region
from cladwatt.types import BoolArray, FloatArray

__all__ = ["estimate_region"]

UNKNOWN_DIAMETER = 0.2
"""For the convection law alone where no diameter is known, a factor of 1.6 uncertain. [m]"""
BANDS_OF_ANGLE = 5
LEAST_STATIONS = 5
COMPONENT_MARGIN = 0.15
"""How far a component may reach beyond its drawn outline, over the pipe's width; assumption."""


def estimate_region(
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
) -> RegionResult:
    """Estimate one pipe region.

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

    Returns
    -------
    RegionResult

    Raises
    ------
    RegionError
        If nothing usable is left of the region.
    """
    strip = _strip(region, line, image, known_lengths, camera)
    lens = sample_strip(np.where(left_out, np.nan, image.lens_temperature), strip)
    component_at = _component_stations(strip, components)
    lens[:, _bulged(component_at, strip)] = np.nan
    recorded = np.where(np.isfinite(lens), sample_strip(image.recorded_temperature, strip), np.nan)
    face = bands_of(lens, strip.view_angle, BANDS_OF_ANGLE)
    usable = np.asarray(np.isfinite(face.temperature).all(axis=0))
    if usable.sum() < LEAST_STATIONS:
        raise RegionError(_nothing_usable(region, int(usable.sum())))
    diameter = line_draws.lagged_diameter
    if diameter is None:
        diameter = UNKNOWN_DIAMETER * np.exp(0.5 * book.normal(f"region:{region.id}", "diameter"))
    return _concluded(
        Seen(
            region=region,
            line=line,
            strip=strip,
            lens=lens,
            recorded=recorded,
            face=face,
            drawn=face_draws(face, frame, line_draws, diameter),
            usable=usable,
            component_at=component_at,
            diameter=diameter,
            gain=_is_gain(line, conditions),
            frame=frame,
            line_draws=line_draws,
            conditions=conditions,
            camera=camera,
            image=image,
            book=book,
        )
    )


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


def _null(seen: Seen) -> NullModel:
    metres = seen.strip.length
    return null_of(
        seen.face.temperature,
        noise=seen.image.noise,
        pixels_per_station=seen.strip.used_width,
        station_length=float(np.median(metres)) if np.isfinite(metres).all() else 0.005,
        reflected_temperature=float(np.median(seen.frame.reflected_temperature)),
        emissivity=seen.emissivity,
        indoors=seen.conditions.indoors is not False,
    )


def _concluded(seen: Seen) -> RegionResult:
    """Draw the conclusions."""
    if seen.drawn.heat_flux is None:
        return _without_balance(seen, station_table(seen, None, None))
    profile = seen.face.temperature.mean(axis=0)
    null = _null(seen)
    sign = -1 if seen.gain else 1
    runs = find_runs(profile, null, sign=sign, diameter_stations=seen.width)
    sound_at = sound_stations(profile, runs, clear_of=0.5 * seen.width)
    hidden = HiddenSide.draw(
        seen.book,
        seen.owner,
        seen_share=float(seen.face.extent.sum() / (2 * np.pi)),
        seen=evenness_of(seen.face, runs, sound_at, sign=sign),
    )
    base = seen.drawn.heat_flux[:, sound_at].mean(axis=1)
    flux = whole_flux(seen.drawn.heat_flux, base, hidden)
    for run in runs:
        bare = bare_draws(seen, run, sound_at, base * (1 + hidden.unevenness))
        if bare is not None:
            flux = with_bare(flux, bare)
    bounds = flux_bounds(seen)
    mean_flux = seen.mean_along(flux)
    infeasible = bounds.beyond(mean_flux)
    mean_flux = bounds.applied(mean_flux)
    sound = sound_draws(seen.line_draws, seen.frame) if seen.diameter_known else None
    draws = {"length": seen.length_draws()}
    stretches: tuple[Stretch, ...] = ()
    local = aged = None
    loss = None
    if seen.diameter_known:
        loss = seen.perimeter[:, None] * flux
        base_loss = seen.perimeter * bounds.applied(base * (1 + hidden.unevenness))
        draws |= _loss_draws(seen.perimeter * mean_flux, sound, draws["length"])
        stretches = stretches_of(seen, runs, loss, base_loss)
        local = float(1 - np.prod([1 - stretch.probability for stretch in stretches]))
        if sound is not None:
            aged = (1 - local) * aged_probability(base_loss, sound.heat_loss)
    heat_loss = _interval(draws, "heat_loss")
    shares = variance_shares(draws["heat_loss"], _drivers(seen)) if heat_loss else ()
    inputs = VerdictInputs(
        heat_loss=heat_loss,
        excess=_interval(draws, "excess"),
        emissivity=seen.emissivity,
        visible_rise_sigmas=_visible_rise(seen, null, sound_at, base),
        width=seen.width,
        spot_pixels=seen.camera.spot_pixels,
        infeasible_share=infeasible,
        caps=verdict_caps(seen),
        refusals=() if seen.diameter_known else (Remark("not_quantified.no_diameter"),),
    )
    resistances = _resistances(seen, draws.get("heat_loss"), sound)
    return replace(
        _without_balance(seen, station_table(seen, loss, sound)),
        heat_flux=interval_of(mean_flux),
        heat_loss=heat_loss,
        total_loss=_interval(draws, "total_loss"),
        sound_loss=_interval(draws, "sound_loss"),
        specified_loss=_interval(draws, "specified_loss"),
        excess=_interval(draws, "excess"),
        resistance=resistances.found,
        specified_resistance=resistances.specified,
        resistance_ratio=resistances.ratio,
        effective_conductivity=resistances.effective_conductivity,
        probability_damaged=None if local is None or aged is None else local + aged,
        probability_local=local,
        probability_aged=aged,
        verdict=as_verdict(inputs, shares),
        stretches=stretches,
        variance_shares=shares,
        draws=draws,
    )


def _without_balance(seen: Seen, stations: StationTable) -> RegionResult:
    """Return what needs no heat balance: length, temperature, what is missing."""
    return RegionResult(
        region_id=seen.region.id,
        frame_id=seen.region.frame_id,
        tag=seen.line.tag,
        area=seen.line.area,
        gain=seen.gain,
        length=interval_of(seen.length_draws()),
        start_station=float(seen.strip.station[0]),
        end_station=float(seen.strip.station[-1]),
        recorded_temperature=float(np.nanmean(seen.recorded)),
        surface_temperature=interval_of(seen.mean_along(seen.drawn.surface_temperature)),
        heat_flux=Interval(float("nan"), float("nan"), float("nan")),
        heat_loss=None,
        total_loss=None,
        sound_loss=None,
        specified_loss=None,
        excess=None,
        resistance=None,
        specified_resistance=None,
        resistance_ratio=None,
        effective_conductivity=None,
        probability_damaged=None,
        probability_local=None,
        probability_aged=None,
        verdict=Verdict("not quantified", Remark("not_quantified.no_wind")),
        stretches=(),
        stations=stations,
        missing=missing_of(seen),
        cautions=cautions_of(seen),
        remarks=remarks_of(seen),
        air_temperature=float(np.median(seen.frame.air_temperature)),
        strip_temperature=_strip_temperature(seen),
    )


def _loss_draws(
    loss: FloatArray, sound: SoundDraws | None, length: FloatArray
) -> dict[str, FloatArray]:
    draws = {"heat_loss": loss, "total_loss": loss * length}
    if sound is not None:
        excess = loss - sound.heat_loss
        draws |= {
            "sound_loss": sound.heat_loss,
            "specified_loss": sound.specified_loss,
            "excess": excess,
            "total_excess": excess * length,
        }
    return draws


def _interval(draws: dict[str, FloatArray], quantity: str) -> Interval | None:
    return interval_of(draws[quantity]) if quantity in draws else None


class _Resistances(NamedTuple):
    found: Interval | None = None
    specified: Interval | None = None
    ratio: Interval | None = None
    effective_conductivity: Interval | None = None


def _resistances(seen: Seen, loss: FloatArray | None, sound: SoundDraws | None) -> _Resistances:
    """Return resistance, specified resistance, their ratio, and the effective conductivity.

    Carried as conductances, since a loss may be zero, and turned over as quantiles.
    """
    line = seen.line_draws
    if loss is None or line.inside_temperature is None:
        return _Resistances()
    drop = line.inside_temperature - seen.mean_along(seen.drawn.surface_temperature)
    with np.errstate(divide="ignore", invalid="ignore"):
        conductance = np.where(drop * np.sign(loss) > 0, loss / drop, np.nan)
    specified = None if sound is None else sound.specified_resistance
    effective = None
    if line.pipe_diameter is not None and line.lagged_diameter is not None:
        lagging = line.lagged_diameter - 2 * seen.line.cladding.thickness.value
        shape = np.log(np.maximum(lagging / line.pipe_diameter, 1.0)) / (2 * np.pi)
        effective = interval_of(conductance * shape)
    return _Resistances(
        found=_reciprocal(interval_of(conductance)),
        specified=None if specified is None else interval_of(specified),
        ratio=None if specified is None else _reciprocal(interval_of(conductance * specified)),
        effective_conductivity=effective,
    )


def _reciprocal(interval: Interval) -> Interval:
    """Turn the interval of a conductance into that of a resistance."""
    with np.errstate(divide="ignore"):
        low, median, high = (
            float(np.divide(1.0, max(value, 0.0)))
            for value in (interval.high, interval.median, interval.low)
        )
    return Interval(median, low, high)


def _drivers(seen: Seen) -> dict[str, FloatArray]:
    """Return the draws behind each quantity that may carry variance."""
    frame, line = f"frame:{seen.region.frame_id}", f"line:{seen.line.tag}"
    overridden = seen.region.band_emissivity is not None
    cladding = seen.owner if overridden else line
    normal = seen.book.normal
    return {
        "band_emissivity": seen.line_draws.band_emissivity,
        "total_emissivity": normal(cladding, "total_emissivity"),
        "reflected_temperature": normal(frame, "reflected_temperature"),
        "surroundings_temperature": normal(frame, "surroundings_temperature"),
        "air_temperature": normal(frame, "air_temperature"),
        "wind_speed": normal(frame, "wind_speed"),
        "transmission": normal(frame, "transmission"),
        "calibration": seen.frame.calibration,
        "convection": np.log(seen.frame.convection_factor),
        "diameter": seen.diameter,
        "hidden_side": normal(seen.owner, "unevenness"),
    }


def _visible_rise(seen: Seen, null: NullModel, sound_at: BoolArray, base: FloatArray) -> float:
    """Return at how many standard uncertainties a 25 % rise over one diameter would show.

    The flux's slope against the value at the lens is taken from two values around the sound
    level, in the median of the draws.
    """
    level = float(np.median(seen.face.temperature[:, sound_at]))
    temperature = surface_temperature_draws(
        np.array([level - 0.5, level + 0.5]), np.zeros(1), seen.frame, seen.line_draws
    )[:, 0]
    exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
    cooler, warmer = (surface_heat_flux(temperature[:, side], exchange) for side in (0, 1))
    slope = float(np.nanmedian(warmer - cooler))
    if not slope > 0:
        return 0.0
    rise = 0.25 * abs(float(np.nanmedian(base))) / slope
    return rise / null.run_sigma(seen.width)


def _strip_temperature(seen: Seen) -> FloatArray:
    """Return the corrected temperature of the seen face, in the median of every input. [K]"""
    nodes = np.linspace(np.nanmin(seen.lens) - 0.1, np.nanmax(seen.lens) + 0.1, 33)
    drawn = surface_temperature_draws(nodes, np.zeros(1), seen.frame, seen.line_draws)[:, 0]
    return np.asarray(np.interp(seen.lens, nodes, np.median(drawn, axis=0)))
