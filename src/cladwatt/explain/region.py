"""A station of a region explained, from one recorded value to loss and resistance."""

import math

import numpy as np

from cladwatt.assess import assess_among_others
from cladwatt.errors import FaultyInputError, InputError
from cladwatt.explain.lagging_steps import lagging_sections, result_section
from cladwatt.explain.nominal import NominalRegion, nominal_region
from cladwatt.explain.recorded_steps import (
    recorded_steps,
    scene_section,
    settings_section,
)
from cladwatt.explain.steps import BandOfAngle, Explanation, Pad, Reported, Section
from cladwatt.explain.surface_steps import exchange_steps, surface_section
from cladwatt.explain.tracer_steps import stripe_steps
from cladwatt.inverse.cautions import missing_of
from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.frame_draws import band_of
from cladwatt.inverse.observe import Balance, Observed
from cladwatt.quantities import Remark
from cladwatt.results.assessment import Settings
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey
from cladwatt.survey.table_reader import nearest

__all__ = ["explain_region"]

AGREES = 5e-3
"""Relative difference of the steps' flux from the engine's at nominal values beyond which the
engine takes another way there; its interpolation along a strip with bare pipe costs 0.2 %."""


def explain_region(
    survey: Survey,
    region_id: str,
    *,
    station: float | None = None,
    settings: Settings | None = None,
) -> Explanation:
    """Show how a region's loss comes about, at one station and with nominal values.

    Parameters
    ----------
    survey : Survey
    region_id : str
        A pipe region.
    station : float, optional
        Along the line; the nearest that carries a number is taken. Where left out, the station
        whose flux is the median of those at the sound level. [m]
    settings : Settings, optional
        Of the assessment that the steps are compared with.

    Returns
    -------
    Explanation
        As far as what is known reaches; what is missing is named.

    Raises
    ------
    InputError
        If there is no such pipe region, it cannot be used, or the station lies outside it.

    Notes
    -----
    Every value is computed by the functions the assessment uses, with the median of every
    quantity that was declared or assumed.
    """
    settings = settings or Settings()
    region = _pipe_region(survey, region_id)
    nominal = nominal_region(survey, region, settings)
    if nominal.observed is None:
        return _without_air(survey, region, nominal)
    return _Explained(survey, region, nominal, nominal.observed, station, settings).result()


def _pipe_region(survey: Survey, region_id: str) -> Region:
    """Return the pipe region of this id."""
    pipes = {region.id: region for region in survey.regions if region.role == "pipe"}
    if region_id in pipes:
        return pipes[region_id]
    faults = [fault for fault in survey.faults if fault.region_id == region_id]
    faults = [fault for fault in faults if fault.severity == "error"]
    if faults:
        raise FaultyInputError(*faults)
    for region in survey.regions:
        if region.id == region_id:
            raise InputError(
                f"region {region_id!r} is drawn with the role {region.role!r}; expected a pipe "
                f"region{_some(pipes)}"
            )
    raise InputError(
        f"region is {region_id!r}; expected the id of a pipe region of this survey"
        f"{nearest(region_id, pipes) or _some(pipes)}"
    )


def _some(pipes: dict[str, Region]) -> str:
    listed = ", ".join(list(pipes)[:20])
    return f": {listed}{', ...' if len(pipes) > 20 else ''}" if pipes else "; none is drawn"


def _without_air(survey: Survey, region: Region, nominal: NominalRegion) -> Explanation:
    """Return what can be said where no air temperature is known: the settings, no more."""
    nothing = math.nan
    band = band_of(survey.camera)
    return Explanation(
        survey=survey.name,
        region_id=region.id,
        frame_id=region.frame_id,
        tag=region.tag or "",
        station=nothing, start=nothing, end=nothing, x=nothing, y=nothing,
        sections=(settings_section(nominal.entry.recording, band),),
        missing=(Remark("missing.air_temperature"),),
    )  # fmt: skip


class _Explained:
    """One station of a region at nominal values."""

    def __init__(
        self,
        survey: Survey,
        region: Region,
        nominal: NominalRegion,
        observed: Observed,
        station: float | None,
        settings: Settings,
    ) -> None:
        self.survey, self.region, self.nominal = survey, region, nominal
        self.observed, self.seen, self.settings = observed, observed.seen, settings
        self.index = _station_index(observed, station, region)
        self.notes: list[Remark] = []

    def result(self) -> Explanation:
        """Return the explanation."""
        seen, strip, index = self.seen, self.seen.strip, self.index
        sections, bands = self.sections()
        return Explanation(
            survey=self.survey.name,
            region_id=self.region.id,
            frame_id=self.region.frame_id,
            tag=seen.line.tag,
            station=float(strip.station[index]),
            start=float(strip.station[0]),
            end=float(strip.station[-1]),
            x=float(strip.x[index]),
            y=float(strip.y[index]),
            sections=tuple(sections),
            bands=bands,
            shown=int(np.argmin(np.abs(seen.face.view_angle))),
            missing=missing_of(seen),
            notes=tuple(self.notes),
            reported=self.reported(),
        )

    def sections(self) -> tuple[list[Section], tuple[BandOfAngle, ...]]:
        """Return the sections as far as what is known reaches, and the bands of angle."""
        seen, recording = self.seen, self.nominal.entry.recording
        frame, line = seen.frame, seen.line_draws
        sections = [
            settings_section(recording, frame.band),
            scene_section(self.nominal, self.region, seen.line.cladding, frame, line),
        ]
        if frame.wind_speed is not None:
            sections.append(surface_section(seen))
        bands = tuple(self.band(number) for number in range(seen.face.view_angle.size))
        temperature = sum(band.share * band.value("T_s") for band in bands)
        balance = self.observed.balance
        if not math.isfinite(temperature):
            self.notes.append(Remark("explain.no_radiance"))
            return sections, bands
        face = Pad()
        face.found("face_temperature", "T_face", temperature, "K",
                   "sum of share times T_s over the bands", "T_s")  # fmt: skip
        if balance is None:
            return [*sections, face.section("face")], bands
        loss = self.face_loss(face, bands, balance)
        sections.append(face.section("face"))
        if loss is not None:
            sections += self.lagging(balance, loss, temperature)
        return sections, bands

    def lagging(self, balance: Balance, loss: float, temperature: float) -> list[Section]:
        """Return the sections on the lagging."""
        sound = balance.sound
        sections = [] if sound is None else list(lagging_sections(self.seen, sound))
        result = result_section(self.seen, sound, loss, temperature, balance.stripe)
        return sections if result is None else [*sections, result]

    def band(self, number: int) -> BandOfAngle:
        """Return one band of angle with every step."""
        seen, face = self.seen, self.seen.face
        angle = face.view_angle[number]
        lens = float(face.temperature[number, self.index])
        surface = float(
            surface_temperature_draws(
                np.array([lens]), np.array([angle]), seen.frame, seen.line_draws
            )[0, 0, 0]
        )
        pad = Pad()
        share = float(face.extent[number] / face.extent.sum())
        recorded_steps(pad, lens, angle, self.nominal, seen.frame, seen.line_draws, surface)
        if seen.frame.wind_speed is not None and math.isfinite(surface):
            exchange = seen.line_draws.exchange(seen.frame, seen.diameter)
            exchange_steps(pad, surface, exchange, seen.vapour)
        return BandOfAngle(share, tuple(pad.steps))

    def face_loss(self, pad: Pad, bands: tuple[BandOfAngle, ...], balance: Balance) -> float | None:
        """Write down the flux of the seen face and of the whole, and the loss per metre."""
        seen = self.seen
        flux = sum(band.share * band.value("q") for band in bands)
        pad.found("face_flux", "q_face", flux, "W/m²", "sum of share times q over the bands", "q")
        hidden = balance.hidden
        excess = float(hidden.excess_share[0, self.index])
        level, stripe = float(balance.base[0]), balance.stripe
        whole_share = hidden.seen_share + (1 - hidden.seen_share) * excess
        pad.given("sound_level", "q_level", level, "W/m²",
                  f"the same steps, mean of {balance.sound_at.sum()} sound stations")  # fmt: skip
        pad.given("seen_share", "s_seen", hidden.seen_share, "-", "angle of the used face / 360")
        pad.given("hidden_excess", "s_hid", excess, "-", "contrast across the seen face")
        found = "q_face"
        if stripe is not None:
            found, flux = "f_tr q_face", flux * float(stripe.factor[0])
            stripe_steps(pad, stripe)
        whole = level + (flux - level) * whole_share
        pad.found("whole_flux", "q_whole", whole, "W/m²",
                  f"q_level + ({found} - q_level) (s_seen + (1 - s_seen) s_hid)",
                  f"q_level {found} s_seen s_hid")  # fmt: skip
        self.note_difference(whole, float(balance.flux[0, self.index]))
        if not seen.diameter_known:
            return None
        perimeter = float(seen.perimeter[0])
        pad.found("perimeter", "P", perimeter, "m", "pi D", "D")
        pad.found("heat_loss", "q'", perimeter * whole, "W/m", "P q_whole", "P q_whole")
        return perimeter * whole

    def note_difference(self, whole: float, engine: float) -> None:
        """Say where the assessment uses more than these steps."""
        if abs(whole - engine) > AGREES * max(abs(engine), 1.0):
            self.notes.append(Remark("explain.bare", (("heat_flux_W_per_m2", engine),)))

    def reported(self) -> Reported | None:
        """Return what the assessment says of the same station."""
        result = assess_among_others(self.survey, self.nominal.entry, self.settings)
        for region in result.regions:
            if region.region_id == self.region.id and region.heat_loss is not None:
                table, at = region.stations, self.index
                return Reported(
                    (float(table.heat_loss[at]), float(table.heat_loss_low[at]),
                     float(table.heat_loss_high[at])),
                    float(table.sound_loss[at]),
                    (float(table.resistance[at]), float(table.resistance_low[at]),
                     float(table.resistance_high[at])),
                    float(table.resistance_ratio[at]),
                    region.verdict.level,
                    (region.verdict.reason, *region.remarks),
                )  # fmt: skip
        return None


def _station_index(observed: Observed, station: float | None, region: Region) -> int:
    """Return the station that is asked for, or the median one at the sound level."""
    seen = observed.seen
    usable = np.flatnonzero(seen.usable)
    positions = seen.strip.station
    if station is None:
        level, flux = usable, seen.face.temperature.mean(axis=0)
        if observed.balance is not None and seen.drawn.heat_flux is not None:
            level, flux = np.flatnonzero(observed.balance.sound_at), seen.drawn.heat_flux[0]
        return int(level[np.argsort(flux[level], kind="stable")[(level.size - 1) // 2]])
    if not np.isfinite(positions).all():
        raise InputError(
            f"station is {station:g} m, but region {region.id!r} has no scale in metres, since its "
            "outside diameter is unknown; leave the station out"
        )
    low, high = sorted((float(positions[0]), float(positions[-1])))
    margin = (high - low) / max(positions.size - 1, 1)
    if not low - margin <= station <= high + margin:
        raise InputError(
            f"station is {station:g} m; region {region.id!r} was drawn from {low:.2f} to "
            f"{high:.2f} m, expected a station there"
        )
    return int(usable[np.argmin(np.abs(positions[usable] - station))])
