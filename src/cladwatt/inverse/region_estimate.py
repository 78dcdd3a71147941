"""One pipe region: from its strip to loss, resistance, stretches, probabilities and verdict."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.errors import Fault, RegionError
from cladwatt.flags import StationFlag
from cladwatt.inverse.conditions import FrameDraws, LineDraws, draw_line
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.face import Face, FaceDraws, face_draws, surface_temperature_draws
from cladwatt.inverse.hidden_side import HiddenSide, whole_flux
from cladwatt.inverse.level import aged_probability
from cladwatt.inverse.null import NullModel, null_of
from cladwatt.inverse.result import Interval, RegionResult, StationTable, Stretch, interval_of
from cladwatt.inverse.sound import SoundDraws, sound_draws
from cladwatt.inverse.stretches import Run, find_runs, sound_stations
from cladwatt.inverse.verdict import VerdictInputs, as_verdict, variance_shares
from cladwatt.measure.face_bands import bands_of
from cladwatt.measure.noise import FrameNoise
from cladwatt.measure.strip import Strip, known_length_factor, sample_strip, straighten
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.lagged_pipe import surface_heat_flux
from cladwatt.quantities import Remark
from cladwatt.survey.model import Camera, Conditions, Line
from cladwatt.survey.region import Region
from cladwatt.types import BoolArray, FloatArray, IntArray

__all__ = ["FrameImage", "estimate_region"]

UNKNOWN_DIAMETER = 0.2
"""For the convection law alone where no diameter is known, a factor of 1.6 uncertain. [m]"""
LOCAL_THRESHOLD = 0.10
"""A stretch counts as damaged where it loses more than this above the sound level."""
TOUCH_CAUTION = ZERO_CELSIUS + 48.9
"""Surfaces above 120 °F: US DOE steam tip sheet 2 advises to insulate them. [K]"""
FLUX_PARTS = 5
"""Bands of angle across the face."""


@dataclass(frozen=True)
class FrameImage:
    """A frame ready for its regions.

    Attributes
    ----------
    frame_id : str
    lens_temperature : (rows, cols) array
        Blackbody-equivalent temperature at the lens, camera settings undone, NaN where dead or
        clipped. [K]
    recorded_temperature : (rows, cols) array
        As recorded. [K]
    clipped : (rows, cols) array of bool
    noise : FrameNoise
    """

    frame_id: str
    lens_temperature: FloatArray
    recorded_temperature: FloatArray
    clipped: BoolArray
    noise: FrameNoise


def estimate_region(
    region: Region,
    line: Line,
    *,
    image: FrameImage,
    left_out: BoolArray,
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
        Pixels of other regions, components and patches, already widened by the blur.
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
    lens, recorded, masked = _sample(strip, image, left_out)
    face = Face(*bands_of(lens, strip.view_angle, FLUX_PARTS))
    usable = np.isfinite(face.lens_temperature[0])
    if usable.sum() < 5:
        raise RegionError(_nothing_usable(region, int(usable.sum())))
    diameter = line_draws.lagged_diameter
    if diameter is None:
        diameter = UNKNOWN_DIAMETER * np.exp(0.5 * book.normal(f"region:{region.id}", "diameter"))
    drawn = face_draws(face, frame, line_draws, diameter)
    gain = _is_gain(line, conditions)
    null = _null(face, strip, image, line, conditions, frame)
    profile = face.lens_temperature.mean(axis=0)
    diameter_stations = float(np.median(strip.width))
    runs = find_runs(
        profile, null, sign=-1 if gain else 1, diameter_stations=diameter_stations
    )
    sound_at = sound_stations(profile, runs, clear_of=0.5 * diameter_stations)
    return _Estimate(
        region, line, strip, face, drawn, frame, line_draws, conditions, camera, book,
        image, null, runs, sound_at, usable, gain, diameter, lens, recorded, masked,
    ).result()  # fmt: skip


def _strip(
    region: Region,
    line: Line,
    image: FrameImage,
    known_lengths: Sequence[Region],
    camera: Camera,
) -> Strip:
    nominal = line.lagged_diameter
    if region.outside_diameter is not None:
        nominal = region.outside_diameter.value
    columns = image.lens_temperature.shape[1]
    strip = straighten(
        region,
        lagged_diameter=nominal,
        columns=columns,
        field_of_view_deg=camera.field_of_view_deg,
    )
    for marked in known_lengths:
        factor = known_length_factor(strip, marked)
        if factor is not None:
            return straighten(
                region,
                lagged_diameter=nominal,
                columns=columns,
                field_of_view_deg=camera.field_of_view_deg,
                known_length=factor,
            )
    return strip


def _sample(
    strip: Strip, image: FrameImage, left_out: BoolArray
) -> tuple[FloatArray, FloatArray, float]:
    """Return lens and recorded temperature along the strip, and the masked share."""
    lens = sample_strip(np.where(left_out, np.nan, image.lens_temperature), strip)
    recorded = np.where(
        np.isfinite(lens), sample_strip(image.recorded_temperature, strip), np.nan
    )
    return lens, recorded, float(1 - np.isfinite(lens).mean())


def _nothing_usable(region: Region, stations: int) -> Fault:
    return Fault(
        f"regions/{region.frame_id}.geojson",
        f"feature {region.feature} (id '{region.id}')",
        f"only {stations} stations hold usable pixels",
        "expected at least 5; the rest is dead, clipped, left out or outside the frame",
        frame_id=region.frame_id,
        region_id=region.id,
    )


def _is_gain(line: Line, conditions: Conditions) -> bool:
    """Whether the fluid is colder than the air."""
    if line.inside_temperature is None or conditions.air_temperature is None:
        return False
    return line.inside_temperature.value < conditions.air_temperature.value


def _null(
    face: Face,
    strip: Strip,
    image: FrameImage,
    line: Line,
    conditions: Conditions,
    frame: FrameDraws,
) -> NullModel:
    length = float(np.nanmedian(strip.length)) if np.isfinite(strip.length).any() else 0.005
    return null_of(
        face.lens_temperature,
        noise=image.noise,
        pixels_per_station=strip.used_width,
        station_length=length,
        reflected_temperature=float(np.median(frame.reflected_temperature)),
        emissivity=line.cladding.band_emissivity.value,
        indoors=conditions.indoors is not False,
    )


@dataclass(frozen=True)
class _Estimate:
    """Everything known on the way to the result; one method per part of it."""

    region: Region
    line: Line
    strip: Strip
    face: Face
    drawn: FaceDraws
    frame: FrameDraws
    line_draws: LineDraws
    conditions: Conditions
    camera: Camera
    book: DrawBook
    image: FrameImage
    null: NullModel
    runs: tuple[Run, ...]
    sound_at: BoolArray
    usable: BoolArray
    gain: bool
    diameter: FloatArray
    lens: FloatArray
    recorded: FloatArray
    masked_share: float

    def result(self) -> RegionResult:
        """Return the region's result."""
        if self.drawn.heat_flux is None:
            return self._without_balance()
        hidden = HiddenSide.draw(self.book, self.region.id)
        base = np.nanmean(self.drawn.heat_flux[:, self.sound_at], axis=1)
        flux = whole_flux(self.drawn.heat_flux, base, hidden)
        infeasible, low, high = self._feasible(flux)
        perimeter = math.pi * self.diameter
        known = self.line_draws.lagged_diameter is not None
        sound = sound_draws(self.line_draws, self.frame) if known else None
        per_metre = perimeter[:, None] * flux if known else None
        mean_flux = np.clip(self._mean(flux), low, high)
        mean_loss = perimeter * mean_flux if known else None
        length = self._length_draws()
        base_loss = perimeter * np.clip(base * (1 + hidden.unevenness), low, high)
        aged = None if sound is None else aged_probability(base_loss, sound.heat_loss)
        stretches = self._stretches(per_metre, base_loss, length) if known else ()
        local = float(1 - np.prod([1 - s.probability for s in stretches])) if known else None
        draws = self._draws(mean_loss, sound, length)
        shares = (
            variance_shares(mean_loss, self._drivers()) if mean_loss is not None else ()
        )
        heat_loss = None if mean_loss is None else interval_of(mean_loss)
        excess = interval_of(draws["excess"]) if "excess" in draws else None
        inputs = self._verdict_inputs(heat_loss, excess, infeasible, base)
        damaged = None
        if local is not None and aged is not None:
            damaged = local + (1 - local) * aged
        return RegionResult(
            region_id=self.region.id,
            frame_id=self.region.frame_id,
            tag=self.line.tag,
            area=self.line.area,
            gain=self.gain,
            length=interval_of(length),
            start_station=float(self.strip.station[0]),
            end_station=float(self.strip.station[-1]),
            recorded_temperature=float(np.nanmean(self.recorded)),
            surface_temperature=interval_of(self._mean(self.drawn.surface_temperature)),
            heat_flux=interval_of(mean_flux),
            heat_loss=heat_loss,
            total_loss=interval_of(draws["total_loss"]) if "total_loss" in draws else None,
            sound_loss=None if sound is None else interval_of(sound.heat_loss),
            specified_loss=None if sound is None else interval_of(sound.specified_loss),
            excess=excess,
            **self._resistances(mean_loss, sound),
            probability_damaged=damaged,
            probability_local=local,
            probability_aged=None if aged is None or local is None else (1 - local) * aged,
            verdict=as_verdict(inputs, shares),
            stretches=stretches,
            stations=self._stations(per_metre, sound),
            missing=self._missing(),
            cautions=self._cautions(),
            remarks=self._remarks(),
            variance_shares=shares,
            air_temperature=float(np.median(self.frame.air_temperature)),
            strip_temperature=self._strip_temperature(),
            draws=draws,
        )

    # ---- parts ---------------------------------------------------------------------------

    def _mean(self, values: FloatArray) -> FloatArray:
        """Mean over stations weighted by their metres, (count,)."""
        weights = self.strip.length if np.isfinite(self.strip.length).all() else np.ones_like(
            self.strip.x
        )
        weights = np.where(self.usable, weights, 0.0)
        return np.asarray(np.where(self.usable, values, 0.0) @ (weights / weights.sum()))

    def _feasible(self, flux: FloatArray) -> tuple[float, FloatArray, FloatArray]:
        """Return the share of draws beyond what fluid and air can do, and the bounds.

        A hot line cannot take heat up through its lagging, nor lose more than with its surface
        at the fluid's temperature; a chilled one the other way round. Draws beyond are moved to
        the bound, which keeps them in step with the draws of other regions.
        """
        mean = self._mean(flux)
        unbounded = np.full(mean.size, np.inf)
        inside = self.line_draws.inside_temperature
        if inside is None:
            return float(np.mean(~np.isfinite(mean))), -unbounded, unbounded
        exchange = self.line_draws.exchange(self.frame, self.diameter)
        bare = surface_heat_flux(inside, exchange)
        warmest = np.maximum(
            self.frame.air_temperature, self.frame.surroundings_temperature
        )
        coldest = np.minimum(
            self.frame.air_temperature, self.frame.surroundings_temperature
        )
        sunny = bool(np.any(self.frame.irradiance > 0))
        low = np.where((inside >= warmest) & (not sunny), 0.0, -unbounded)
        low = np.where(inside < coldest, np.minimum(bare, 0.0), low)
        high = np.where(inside > warmest, np.maximum(bare, 0.0), unbounded)
        high = np.where((inside <= coldest) & (not sunny), 0.0, high)
        beyond = ~((mean >= low) & (mean <= high))
        return float(beyond.mean()), low, high

    def _length_draws(self) -> FloatArray:
        total = float(np.sum(self.strip.length[self.usable]))
        scale = 1 + self.strip.scale_uncertainty * self.book.normal(
            f"region:{self.region.id}", "scale"
        )
        relative = self.diameter / np.median(self.diameter)
        return np.asarray(total * scale * relative)

    def _draws(
        self, mean_loss: FloatArray | None, sound: SoundDraws | None, length: FloatArray
    ) -> dict[str, FloatArray]:
        draws = {"length": length}
        if mean_loss is not None:
            draws |= {"heat_loss": mean_loss, "total_loss": mean_loss * length}
            if sound is not None:
                draws |= {
                    "sound_loss": sound.heat_loss,
                    "specified_loss": sound.specified_loss,
                    "excess": mean_loss - sound.heat_loss,
                    "total_excess": (mean_loss - sound.heat_loss) * length,
                }
        return draws

    def _resistances(
        self, mean_loss: FloatArray | None, sound: SoundDraws | None
    ) -> dict[str, Interval | None]:
        """Return resistance, its ratio to specified and the effective conductivity.

        Carried as conductances, since a loss may be zero, and turned over as quantiles.
        """
        nothing: dict[str, Interval | None] = dict.fromkeys(
            ("resistance", "specified_resistance", "resistance_ratio", "effective_conductivity")
        )
        inside = self.line_draws.inside_temperature
        if mean_loss is None or inside is None:
            return nothing
        drop = inside - self._mean(self.drawn.surface_temperature)
        with np.errstate(divide="ignore", invalid="ignore"):
            conductance = np.where(drop * np.sign(mean_loss) > 0, mean_loss / drop, np.nan)
        nothing["resistance"] = _reciprocal(interval_of(conductance))
        if sound is not None:
            nothing["specified_resistance"] = interval_of(sound.specified_resistance)
            nothing["resistance_ratio"] = _reciprocal(
                interval_of(conductance * sound.specified_resistance)
            )
        pipe, outer = self.line_draws.pipe_diameter, self.line_draws.lagged_diameter
        if pipe is not None and outer is not None:
            bare = outer - 2 * self.line.cladding.thickness.value
            shape = np.log(np.maximum(bare / pipe, 1.0)) / (2 * math.pi)
            nothing["effective_conductivity"] = interval_of(conductance * shape)
        return nothing

    def _stretches(
        self, per_metre: FloatArray | None, base_loss: FloatArray, length: FloatArray
    ) -> tuple[Stretch, ...]:
        if per_metre is None:
            return ()
        metres = np.where(self.usable, self.strip.length, 0.0)
        scale = length / np.sum(metres)
        found = []
        for run in self.runs:
            inside = per_metre[:, run.stations]
            weight = metres[run.stations]
            mean = np.where(weight > 0, inside, 0.0) @ (weight / max(weight.sum(), 1e-12))
            above = np.abs(mean) > (1 + LOCAL_THRESHOLD) * np.abs(base_loss)
            found.append((run, mean, (mean - base_loss) * weight.sum() * scale, above.mean()))
        everything = sum((np.median(np.abs(excess)) for _, _, excess, _ in found), 0.0)
        return tuple(
            Stretch(
                id=f"{self.region.id}:{number}",
                start=self._edge(run.first, -0.5, run.first_u),
                end=self._edge(run.last, 0.5, run.last_u),
                probability=float(run.probability * above),
                heat_loss=interval_of(mean),
                excess=interval_of(excess),
                share_of_excess=float(np.median(np.abs(excess)) / everything),
                outline=self._outline(run),
            )
            for number, (run, mean, excess, above) in enumerate(found, start=1)
            if run.probability * above > 0.05
        )

    def _edge(self, index: int, side: float, u_stations: float) -> Interval:
        """Return an edge of a run as a station with its 95 % interval."""
        step = float(self.strip.length[index])
        direction = self.region.direction
        middle = float(self.strip.station[index]) + direction * side * step
        reach = 1.96 * math.hypot(u_stations * step, 0.01 * abs(middle - self.region.start))
        ends = sorted((float(self.strip.station[0]), float(self.strip.station[-1])))
        return Interval(
            middle,
            max(middle - reach, ends[0] - step),
            min(middle + reach, ends[1] + step),
        )

    def _outline(self, run: Run) -> tuple[tuple[float, float], ...]:
        x, y = self.strip.sample_x[:, run.stations], self.strip.sample_y[:, run.stations]
        centre_x, centre_y = self.strip.x[run.stations], self.strip.y[run.stations]
        full = 1 / self.strip.across[-1]
        ring = [
            (centre + (edge - centre) * full)
            for edge, centre in ((x[0], centre_x), (x[-1][::-1], centre_x[::-1]))
        ]
        ring_y = [
            (centre + (edge - centre) * full)
            for edge, centre in ((y[0], centre_y), (y[-1][::-1], centre_y[::-1]))
        ]
        return tuple(
            (round(float(px), 2), round(float(py), 2))
            for px, py in zip(np.concatenate(ring), np.concatenate(ring_y), strict=True)
        )

    def _drivers(self) -> dict[str, FloatArray]:
        """Return the standard normal draws behind each quantity that may carry variance."""
        book, frame = self.book, f"frame:{self.region.frame_id}"
        line = f"line:{self.line.tag}"
        own = f"region:{self.region.id}"
        emissivity_owner = own if self.region.band_emissivity is not None else line
        return {
            "band_emissivity": book.normal(emissivity_owner, "band_emissivity"),
            "total_emissivity": book.normal(emissivity_owner, "total_emissivity"),
            "reflected_temperature": book.normal(frame, "reflected_temperature"),
            "surroundings_temperature": book.normal(frame, "surroundings_temperature"),
            "air_temperature": book.normal(frame, "air_temperature"),
            "wind_speed": book.normal(frame, "wind_speed"),
            "transmission": book.normal(frame, "transmission"),
            "calibration": self.frame.calibration,
            "convection": np.log(self.frame.convection_factor),
            "diameter": self.diameter,
            "hidden_side": book.normal(own, "unevenness"),
        }

    def _verdict_inputs(
        self,
        heat_loss: Interval | None,
        excess: Interval | None,
        infeasible: float,
        base: FloatArray,
    ) -> VerdictInputs:
        caps, refusals = [], []
        conditions = self.conditions
        if heat_loss is None:
            refusals.append(Remark("not_quantified.no_diameter"))
        if conditions.sun_on_pipe or (
            conditions.solar_irradiance is not None and conditions.solar_irradiance.value > 0
        ):
            caps.append(Remark("indicative.sun"))
        if self.line.tracing.kind != "none":
            caps.append(Remark("indicative.traced"))
        if conditions.indoors is False and conditions.rain_last_24h:
            caps.append(Remark("indicative.not_steady"))
        if self._dew_share() > 0.05:
            caps.append(Remark("indicative.below_dew_point"))
        return VerdictInputs(
            heat_loss=heat_loss,
            excess=excess,
            emissivity=self._emissivity(),
            visible_rise_sigmas=self._visible_rise(base),
            width=float(np.median(self.strip.width)),
            spot_pixels=self.camera.spot_pixels,
            infeasible_share=infeasible,
            caps=tuple(caps),
            refusals=tuple(refusals),
        )

    def _emissivity(self) -> float:
        return float(np.median(self.line_draws.band_emissivity))

    def _visible_rise(self, base: FloatArray) -> float:
        """Return at how many standard uncertainties a 25 % rise over one diameter would show.

        The flux's slope against the value at the lens is taken from two values around the sound
        level, in the median of the draws.
        """
        level = float(np.median(self.face.lens_temperature[:, self.sound_at]))
        values = np.array([level - 0.5, level + 0.5])
        temperature = surface_temperature_draws(
            values, np.zeros(1), self.frame, self.line_draws
        )[:, 0]
        exchange = self.line_draws.exchange(self.frame, self.diameter)
        flux = [surface_heat_flux(temperature[:, side], exchange) for side in (0, 1)]
        slope = float(np.nanmedian(flux[1] - flux[0]))
        rise = 0.25 * abs(float(np.nanmedian(base))) / slope if slope > 0 else 0.0
        return rise / self.null.run_sigma(float(np.median(self.strip.width)))

    def _dew_point(self) -> float | None:
        humidity = self.conditions.relative_humidity
        air = self.conditions.air_temperature
        if humidity is None or air is None or not humidity.value > 0:
            return None
        return float(dew_point(air.value, humidity.value))

    def _below_dew(self) -> BoolArray:
        dew = self._dew_point()
        if dew is None:
            return np.zeros(self.usable.size, dtype=bool)
        return np.asarray(np.median(self.drawn.surface_temperature, axis=0) < dew)

    def _dew_share(self) -> float:
        return float(self._below_dew()[self.usable].mean())

    def _stations(
        self, per_metre: FloatArray | None, sound: SoundDraws | None
    ) -> StationTable:
        """Return the table along the strip."""
        low_t, mid_t, high_t = _quantiles(self.drawn.surface_temperature)
        nothing = np.full(self.usable.size, np.nan)
        low_q = mid_q = high_q = nothing
        low_r = mid_r = high_r = ratio = nothing
        inside = self.line_draws.inside_temperature
        if per_metre is not None:
            low_q, mid_q, high_q = _quantiles(per_metre)
        if per_metre is not None and inside is not None:
            drop = inside[:, None] - self.drawn.surface_temperature
            with np.errstate(divide="ignore", invalid="ignore"):
                conductance = per_metre / drop
                low_c, mid_c, high_c = (np.maximum(q, 0.0) for q in _quantiles(conductance))
                low_r, mid_r, high_r = 1 / high_c, 1 / mid_c, 1 / low_c
                if sound is not None:
                    specified = float(np.median(sound.specified_resistance))
                    ratio = mid_r / specified
        sound_level = np.nan if sound is None else float(np.median(sound.heat_loss))
        return StationTable(
            station=self.strip.station,
            x=self.strip.x,
            y=self.strip.y,
            width=self.strip.width,
            length=self.strip.length,
            recorded_temperature=np.asarray(_nanmean(self.recorded)),
            surface_temperature=mid_t,
            surface_temperature_low=low_t,
            surface_temperature_high=high_t,
            heat_loss=mid_q,
            heat_loss_low=low_q,
            heat_loss_high=high_q,
            sound_loss=np.full(self.usable.size, sound_level),
            resistance=mid_r,
            resistance_low=low_r,
            resistance_high=high_r,
            resistance_ratio=ratio,
            flags=self._flags(),
        )

    def _flags(self) -> IntArray:
        flags = np.zeros(self.usable.size, dtype=np.int64)
        partly = np.isnan(self.lens).any(axis=0)
        flags[partly] |= StationFlag.MASKED
        flags[~self.usable] |= StationFlag.GAP
        narrow = 0.75 * self.strip.width / self.camera.spot_pixels < 3
        flags[narrow] |= StationFlag.NARROW
        clipped = sample_strip(self.image.clipped.astype(float), self.strip)
        flags[(np.nan_to_num(clipped) > 0).any(axis=0)] |= StationFlag.CLIPPED
        beyond = ~np.isfinite(self.drawn.surface_temperature)
        flags[self.usable & (beyond.mean(axis=0) > 0.05)] |= StationFlag.INFEASIBLE
        below = self._below_dew()
        flags[below] |= StationFlag.BELOW_DEW_POINT
        frozen = np.median(self.drawn.surface_temperature, axis=0) < ZERO_CELSIUS
        flags[below & frozen] |= StationFlag.FROST
        return flags

    def _strip_temperature(self) -> FloatArray:
        """Return the corrected temperature of the seen face, at the median of every input."""
        nodes = np.linspace(np.nanmin(self.lens) - 0.1, np.nanmax(self.lens) + 0.1, 33)
        middle = np.median(
            surface_temperature_draws(nodes, np.zeros(1), self.frame, self.line_draws)[:, 0],
            axis=0,
        )
        return np.asarray(np.interp(self.lens, nodes, middle))

    def _missing(self) -> tuple[Remark, ...]:
        missing = []
        if self.line.inside_temperature is None:
            missing.append(Remark("missing.inside_temperature"))
        if self.line_draws.layers is None:
            missing.append(Remark("missing.lagging"))
        if self.line_draws.lagged_diameter is None:
            missing.append(Remark("missing.diameter"))
        if self.frame.wind_speed is None:
            missing.append(Remark("missing.wind"))
        return tuple(missing)

    def _cautions(self) -> tuple[Remark, ...]:
        cautions = []
        hottest = float(np.nanmax(np.median(self.drawn.surface_temperature, axis=0)))
        if hottest > TOUCH_CAUTION:
            cautions.append(
                Remark("caution.touch", (("temperature_C", hottest - ZERO_CELSIUS),))
            )
        inside = self.line.inside_temperature
        innermost = self.line.layers[0].conductivity if self.line.layers else None
        limit = None if innermost is None else innermost.maximum_service_temperature
        if inside is not None and limit is not None and inside.value > limit:
            cautions.append(
                Remark(
                    "caution.service_limit",
                    (
                        ("temperature_C", inside.value - ZERO_CELSIUS),
                        ("limit_C", limit - ZERO_CELSIUS),
                    ),
                )
            )
        dew = self._dew_point()
        if dew is not None and self._dew_share() > 0:
            cautions.append(Remark("caution.dew_point", (("dew_point_C", dew - ZERO_CELSIUS),)))
        return tuple(cautions)

    def _remarks(self) -> tuple[Remark, ...]:
        remarks = []
        if self.masked_share > 0.02:
            remarks.append(Remark("remark.masked_share", (("share", self.masked_share),)))
        if self.strip.foreshortened:
            remarks.append(Remark("remark.foreshortening"))
        return tuple(remarks)

    def _without_balance(self) -> RegionResult:
        """Return what remains where the wind is unknown: the temperature."""
        stations = self._stations(None, None)
        nothing = interval_of(np.full(1, np.nan))
        return RegionResult(
            region_id=self.region.id,
            frame_id=self.region.frame_id,
            tag=self.line.tag,
            area=self.line.area,
            gain=self.gain,
            length=interval_of(self._length_draws()),
            start_station=float(self.strip.station[0]),
            end_station=float(self.strip.station[-1]),
            recorded_temperature=float(np.nanmean(self.recorded)),
            surface_temperature=interval_of(self._mean(self.drawn.surface_temperature)),
            heat_flux=nothing,
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
            verdict=as_verdict(
                VerdictInputs(
                    heat_loss=None,
                    excess=None,
                    emissivity=self._emissivity(),
                    visible_rise_sigmas=0.0,
                    width=float(np.median(self.strip.width)),
                    spot_pixels=self.camera.spot_pixels,
                    infeasible_share=0.0,
                    caps=(),
                    refusals=(Remark("not_quantified.no_wind"),),
                ),
                (),
            ),
            stretches=(),
            stations=replace(stations),
            missing=self._missing(),
            cautions=self._cautions(),
            remarks=self._remarks(),
            air_temperature=float(np.median(self.frame.air_temperature)),
            strip_temperature=self._strip_temperature(),
        )


def _nanmean(values: FloatArray) -> FloatArray:
    """Mean over the first axis; NaN where nothing is usable, without a warning."""
    number = np.isfinite(values).sum(axis=0)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(np.nansum(values, axis=0) / np.where(number > 0, number, np.nan))


def _reciprocal(interval: Interval) -> Interval:
    """Turn the interval of a conductance into that of a resistance."""
    with np.errstate(divide="ignore"):
        low, median, high = (
            float(np.divide(1.0, max(value, 0.0)))
            for value in (interval.high, interval.median, interval.low)
        )
    return Interval(median, low, high)


def _quantiles(draws: FloatArray) -> FloatArray:
    """Return 2.5, 50 and 97.5 percentiles over the draws, (3, n_stations)."""
    ordered = np.sort(draws, axis=0)
    last = draws.shape[0] - 1
    picks = np.rint(np.array([0.025, 0.5, 0.975]) * last).astype(int)
    return ordered[picks]


def line_draws_of(book: DrawBook, line: Line, region: Region) -> LineDraws:
    """Return the draws of a region's line with the region's own overrides."""
    return draw_line(book, line, region)
