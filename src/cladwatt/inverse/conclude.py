"""Conclusions on one region: loss, resistance, stretches, probabilities and verdict."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.advice import Measurement, best_measurement, measurements_of
from cladwatt.inverse.cautions import (
    cautions_of,
    missing_of,
    refusals_of,
    remarks_of,
    verdict_caps,
)
from cladwatt.inverse.cladding_fin import edge_spread, spread_remark, spreading_length
from cladwatt.inverse.declared import declared_condition, declared_level
from cladwatt.inverse.face import COLDEST, FaceDraws, surface_temperature_draws
from cladwatt.inverse.joint import JointUpdate
from cladwatt.inverse.kelvin_per_rise import kelvin_of_rise
from cladwatt.inverse.kinds import KindShares, local_prior, region_kinds, shares_of_region
from cladwatt.inverse.line_profile import line_profile
from cladwatt.inverse.local_damage import local_damage
from cladwatt.inverse.observe import Balance, Observed
from cladwatt.inverse.recovered import recovered_of
from cladwatt.inverse.resistance import resistances_of
from cladwatt.inverse.result import (
    Interval,
    RegionResult,
    StationTable,
    Stretch,
    Verdict,
    interval_of,
)
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws
from cladwatt.inverse.station_table import station_table
from cladwatt.inverse.stretch_results import stretches_of
from cladwatt.inverse.stretch_side import Side, sides_of
from cladwatt.inverse.tracing import stripe_remarks
from cladwatt.inverse.verdict import VerdictInputs, as_verdict, variance_shares
from cladwatt.materials.load import shipped_tables
from cladwatt.materials.rows import DamageKind
from cladwatt.quantities import Remark
from cladwatt.types import FloatArray

__all__ = ["Shift", "conclude", "moved"]


def conclude(
    observed: Observed,
    updates: Sequence[JointUpdate] = (),
    kinds: Mapping[str, DamageKind] | None = None,
) -> RegionResult:
    """Draw the conclusions on a region.

    Parameters
    ----------
    observed : Observed
    updates : sequence of JointUpdate
        What the frame's regions and the specification say together; without any the result is
        what the image says by itself.
    kinds : mapping of key to DamageKind, optional
        What damage may look like, and its priors; what ships where left out.

    Returns
    -------
    RegionResult
    """
    if observed.balance is None:
        seen = observed.seen
        return _without_balance(seen, station_table(seen, None, None))
    image_loss = _image_loss(observed.seen, observed.balance)
    seen, balance, shift = moved(observed, updates)
    aged = next((u.aged[seen.region.id] for u in updates if seen.region.id in u.aged), None)
    drivers = {name: shift(draws) for name, draws in _drivers(observed.seen).items()}
    measurements = measurements_of(seen, balance.sound, shift)
    result = _concluded(seen, balance, image_loss, aged, drivers, measurements, kinds)
    if any(seen.region.id in update.doubted for update in updates):
        return replace(result, remarks=(*result.remarks, Remark("remark.specification_doubted")))
    return result


@dataclass(frozen=True)
class Shift:
    """All updates of a frame, one after the other."""

    updates: Sequence[JointUpdate]

    def __call__(self, values: FloatArray) -> FloatArray:
        """Return draws, (count,) or (count, n), after the joint estimate."""
        for update in self.updates:
            values = update.apply(values)
        return values


def moved(observed: Observed, updates: Sequence[JointUpdate]) -> tuple[Seen, Balance, Shift]:
    """Return what was seen and its balance after the joint estimate, and what moves draws so."""
    shift = Shift(updates)
    seen = _shifted_seen(observed.seen, shift)
    return seen, _shifted_balance(observed, shift, seen.perimeter), shift


def _image_loss(seen: Seen, balance: Balance) -> Interval | None:
    """Return the loss as the image alone gives it. [W/m]"""
    if not seen.diameter_known:
        return None
    return interval_of(seen.perimeter * balance.bounds.applied(seen.mean_along(balance.flux)))


def _shifted_seen(seen: Seen, shift: Shift) -> Seen:
    """Return what was seen with what its conclusions rest on moved.

    Impossible draws of the surface count as the coldest.
    """
    temperature = seen.drawn.surface_temperature
    coldest = np.min(np.where(np.isfinite(temperature), temperature, np.inf), axis=0)
    coldest = np.where(np.isfinite(coldest), coldest, COLDEST)
    filled = np.where(np.isfinite(temperature) | ~seen.usable, temperature, coldest)
    inside = seen.line_draws.inside_temperature
    return replace(
        seen,
        drawn=FaceDraws(shift(filled), seen.drawn.heat_flux),
        diameter=np.exp(shift(np.log(seen.diameter))),
        line_draws=replace(
            seen.line_draws, inside_temperature=None if inside is None else shift(inside)
        ),
    )


def _shifted_balance(observed: Observed, shift: Shift, perimeter: FloatArray) -> Balance:
    """Move the balance; the sound level by its ratio to what sound lagging would lose.

    Flux is sound loss times ratio: moved by itself, its draws would keep the sound loss's error
    times a ratio that may be far off in them, on bright cladding many times the error.
    """
    balance = observed.balance
    assert balance is not None
    sound, base = balance.sound, shift(balance.base)
    if sound is not None:
        sound = SoundDraws(
            _shifted_loss(sound.heat_loss, shift),
            _shifted_loss(sound.specified_loss, shift),
            np.exp(shift(np.log(sound.specified_resistance))),
            None if sound.declared_loss is None else _shifted_loss(sound.declared_loss, shift),
            None
            if sound.declared_resistance is None
            else np.exp(shift(np.log(sound.declared_resistance))),
        )
        evidence = observed.evidence()
        if shift.updates and evidence is not None:
            base = sound.heat_loss * (1 + shift(evidence.relative_excess)) / perimeter
            if balance.stripe is not None:
                base = base * (1 + balance.stripe.rise)
    contrast = shift(balance.flux - balance.base[:, None])
    return replace(balance, flux=base[:, None] + contrast, base=base, sound=sound)


def _shifted_loss(loss: FloatArray, shift: Shift) -> FloatArray:
    """Move a loss by its logarithm, which keeps its sign; as it is where it may change sign."""
    size = np.abs(loss)
    if np.ptp(np.sign(loss)) > 0 or not (size > 0.05 * np.median(size)).all():
        return shift(loss)
    return np.asarray(np.sign(loss) * np.exp(shift(np.log(size))))


def _concluded(
    seen: Seen,
    balance: Balance,
    image_loss: Interval | None,
    aged_level: float | None,
    drivers: dict[str, FloatArray],
    measurements: Sequence[Measurement],
    kinds: Mapping[str, DamageKind] | None = None,
) -> RegionResult:
    bounds, sound = balance.bounds, balance.sound
    mean_flux = bounds.applied(seen.mean_along(balance.flux))
    draws = {"length": seen.length_draws()}
    stretches: tuple[Stretch, ...] = ()
    whole: KindShares = ()
    local = aged = None
    loss = recovered = None
    lens_per_rise = kelvin_of_rise(seen, balance.sound_at, balance.base)
    if seen.diameter_known:
        loss = seen.perimeter[:, None] * balance.flux
        draws |= _loss_draws(seen.perimeter * mean_flux, balance, draws["length"])
        recovered = recovered_of(seen, balance, sound, lens_per_rise)
        kinds = shipped_tables().damage_kinds if kinds is None else kinds
        spread = spreading_length(seen, sound) or 0.0
        damage = local_damage(
            balance.searched,
            balance.null,
            balance.runs,
            sign=-1 if seen.gain else 1,
            kelvin_per_rise=lens_per_rise,
            spread_length=edge_spread(seen, sound, balance.null.station_length),
            prior=local_prior(kinds),
        )
        weighed = region_kinds(seen, balance, spread, kinds)
        of_kinds = weighed.runs
        runs, likely, sides = balance.runs, damage.runs, sides_of(seen, balance)
        if damage.hidden is not None:
            runs, likely = (*runs, damage.hidden), (*likely, damage.hidden.probability)
            sides = (*sides, Side())
            of_kinds = (*of_kinds, ())
        stretches = stretches_of(
            seen, runs, likely, loss, seen.perimeter * balance.base, sides, of_kinds
        )
        local = damage.probability
        level = declared_level(seen.perimeter * balance.untraced_base, sound, aged_level)
        aged = None if level is None else (1 - local) * level
        whole = shares_of_region(weighed, damage, local, aged)
    heat_loss = _interval(draws, "heat_loss")
    shares = variance_shares(draws["heat_loss"], drivers) if heat_loss else ()
    advice = best_measurement(draws.get("heat_loss"), measurements)
    inputs = VerdictInputs(
        heat_loss=heat_loss,
        excess=_interval(draws, "excess"),
        emissivity=seen.emissivity,
        visible_rise_sigmas=0.25 * lens_per_rise / balance.null.run_sigma(seen.width),
        width=seen.width,
        spot_pixels=seen.camera.spot_pixels,
        infeasible_share=balance.infeasible,
        caps=verdict_caps(seen),
        refusals=refusals_of(seen, balance.rain),
    )
    resistances = resistances_of(seen, draws.get("heat_loss"), sound)
    bare = _without_balance(seen, station_table(seen, loss, sound, recovered))
    declared_loss = _interval(draws, "declared_loss")
    stripe = balance.stripe
    traced = () if stripe is None else stripe_remarks(stripe, seen.perimeter * mean_flux)
    return replace(
        bare,
        heat_flux=interval_of(mean_flux),
        heat_loss=heat_loss,
        image_loss=image_loss,
        total_loss=_interval(draws, "total_loss"),
        sound_loss=_interval(draws, "sound_loss"),
        specified_loss=_interval(draws, "specified_loss"),
        declared_loss=declared_loss,
        declared_resistance=resistances.declared,
        excess=_interval(draws, "excess"),
        tracer_heat=_interval(draws, "tracer_heat"),
        fluid_loss=_interval(draws, "fluid_loss"),
        resistance=resistances.found,
        specified_resistance=resistances.specified,
        resistance_ratio=resistances.ratio,
        effective_conductivity=resistances.effective_conductivity,
        probability_damaged=None if local is None else local + (aged or 0.0),
        probability_local=local,
        probability_aged=aged,
        verdict=as_verdict(inputs, advice, missing_of(seen)),
        stretches=stretches,
        kinds=whole,
        remarks=(
            *bare.remarks,
            *traced,
            *declared_condition(declared_loss),
            *spread_remark(seen, sound, stretches),
        ),
        variance_shares=shares,
        draws=draws,
        profile=line_profile(seen, loss, draws.get("heat_loss")),
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


def _loss_draws(loss: FloatArray, balance: Balance, length: FloatArray) -> dict[str, FloatArray]:
    """Return the draws of the loss and what it is compared with.

    A tracer's heat is no excess; where it cannot be told from the fluid's there is none.
    """
    draws = {"heat_loss": loss, "total_loss": loss * length}
    sound, stripe = balance.sound, balance.stripe
    if sound is not None:
        draws |= {"sound_loss": sound.heat_loss, "specified_loss": sound.specified_loss}
        if sound.declared_loss is not None:
            draws["declared_loss"] = sound.declared_loss
    if stripe is not None and not stripe.is_split:
        return draws
    untraced = loss
    if stripe is not None:
        heat, untraced = stripe.heat(loss), stripe.untraced(loss)
        draws |= {"tracer_heat": heat, "fluid_loss": loss - heat}
    if sound is not None:
        excess = untraced - sound.heat_loss
        draws |= {"excess": excess, "total_excess": excess * length}
    return draws


def _interval(draws: dict[str, FloatArray], quantity: str) -> Interval | None:
    return interval_of(draws[quantity]) if quantity in draws else None


def _drivers(seen: Seen) -> dict[str, FloatArray]:
    """Return the draws behind each quantity that may carry variance."""
    frame, line = f"frame:{seen.region.frame_id}", f"line:{seen.line.tag}"
    overridden = seen.region.total_emissivity is not None
    cladding = seen.owner if overridden else line
    normal, film = seen.book.normal, seen.line_draws.film_coefficient
    return {
        "band_emissivity": seen.line_draws.band_emissivity,
        "total_emissivity": normal(cladding, "total_emissivity"),
        "inside_temperature": normal(line, "inside_temperature"),
        "installation_factor": normal(line, "installation_factor"),
        **({} if film is None else {"inside_film": film}),
        "supports_allowance": seen.line_draws.supports_allowance,
        "conductivity": normal(line, "conductivity_factor_1"),
        "thickness": normal(line, "thickness_1"),
        "sound_scatter": normal(seen.owner, "sound_scatter"),
        "mirrored_scene": normal(seen.owner, "mirrored_scene"),
        "reflected_temperature": seen.frame.reflected_temperature,
        "surroundings_temperature": (
            normal(frame, "surroundings_temperature")
            if seen.frame.pieces is None
            else seen.frame.surroundings_temperature
        ),
        "air_temperature": normal(frame, "air_temperature"),
        "wind_speed": normal(frame, "wind_speed"),
        "transmission": normal(frame, "transmission"),
        "calibration": seen.frame.calibration,
        "convection": np.log(seen.frame.convection_factor),
        "diameter": seen.diameter,
        "hidden_side": normal(seen.owner, "unevenness"),
        **(
            {}
            if seen.line.tracing.kind == "none"
            else {"tracer": normal(seen.owner, "tracer_dealt")}
        ),
    }


def _strip_temperature(seen: Seen) -> FloatArray:
    """Return the corrected temperature of the seen face straightened, at the draws' median. [K]

    Corrected sample by sample with the declared inputs, then set to the level of the draws.
    """
    nodes = np.linspace(np.nanmin(seen.lens) - 0.1, np.nanmax(seen.lens) + 0.1, 33)
    drawn = surface_temperature_draws(nodes, np.zeros(1), seen.frame, seen.line_draws)[:, 0]
    field = np.interp(seen.lens, nodes, np.median(np.fmax(drawn, COLDEST), axis=0))
    level = float(np.median(seen.mean_along(seen.drawn.surface_temperature)))
    return np.asarray(field + level - np.nanmean(field[:, seen.usable]))
