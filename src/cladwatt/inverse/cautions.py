"""What a reader must know beside the numbers: what is missing, cautions, remarks, limits."""

import numpy as np

from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.film_states import film_remarks, fits_both
from cladwatt.inverse.rain import DAY_HOURS, MAY_BE_WET, RainLeft, had_rained
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.steady_state import is_settled, time_to_forget_sun
from cladwatt.inverse.tracing import can_split
from cladwatt.physics.clear_sky import HORIZON_DEG
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.quantities import Quantity, Remark
from cladwatt.survey.model import Conditions

__all__ = ["cautions_of", "in_the_sun", "missing_of", "refusals_of", "remarks_of", "verdict_caps"]

TOUCH_CAUTION = ZERO_CELSIUS + 48.9
"""120 °F, above which the US DOE steam tip sheet 2 advises to insulate. [K]"""
TRUSTED_EMISSIVITY = 0.5
"""Below this single pixels are left to the mean across: what they mirror weighs too much. [-]"""
MIRRORED_LEAST, MIRRORED_SHARE = 1.5, 0.4
"""A band of angle stands out by a mirrored neighbour beyond this [K] and this share of what the
surface is above the air, times its emissivity, as the camera sees it; assumption."""
NOTICEABLE_ANGLE = 0.2
"""Foreshortening is mentioned beyond this: it shortens lengths by 2 %. [rad]"""


def missing_of(seen: Seen) -> tuple[Remark, ...]:
    """Return what is unknown of the line and the frame, and so left out."""
    line = seen.line_draws
    unknown = {
        "missing.inside_temperature": line.inside_temperature is None,
        "missing.lagging": line.layers is None,
        "missing.diameter": line.lagged_diameter is None,
        "missing.wind": seen.frame.wind_speed is None,
        "missing.humidity": seen.gain and seen.conditions.relative_humidity is None,
        "missing.tracer_heat": seen.line.tracing.kind != "none" and not can_split(seen),
    }
    return tuple(Remark(key) for key, is_missing in unknown.items() if is_missing)


def cautions_of(seen: Seen) -> tuple[Remark, ...]:
    """Return cautions for people: hot surface, service limit, water under the lagging."""
    cautions = []
    hottest = _hottest(seen)
    if hottest > TOUCH_CAUTION:
        cautions.append(_celsius("caution.touch", temperature_C=hottest))
    inside = seen.line.inside_temperature
    innermost = seen.line.layers[0].conductivity if seen.line.layers else None
    limit = None if innermost is None else innermost.maximum_service_temperature
    if inside is not None and limit is not None and inside.value > limit:
        cautions.append(
            _celsius("caution.service_limit", temperature_C=inside.value, limit_C=limit)
        )
    dew = seen.dew_point()
    if dew is not None and seen.below_dew_point.any():
        cautions.append(_celsius("caution.dew_point", dew_point_C=dew))
    return tuple(cautions)


def _hottest(seen: Seen) -> float:
    """Return the hottest place of the seen face, at the draws' median, 0 where none is. [K]

    Three stations are averaged, so that one bad pixel does not speak for a surface; a mean across
    the pipe would hide a bare side.
    """
    along = seen.median_temperature[seen.usable]
    hottest = float(np.max(along[np.isfinite(along)], initial=0.0))
    lens = np.where(seen.usable, seen.lens, np.nan)
    three = (lens[:, :-2] + lens[:, 1:-1] + lens[:, 2:]) / 3
    three = three[np.isfinite(three)]
    if seen.emissivity < TRUSTED_EMISSIVITY or three.size == 0:
        return hottest
    drawn = surface_temperature_draws(
        np.array([three.max()]), np.zeros(1), seen.frame, seen.line_draws
    )
    return max(hottest, float(np.nan_to_num(np.nanmedian(drawn))))


def _celsius(key: str, **temperatures: float) -> Remark:
    return Remark(key, tuple((name, value - ZERO_CELSIUS) for name, value in temperatures.items()))


def remarks_of(seen: Seen) -> tuple[Remark, ...]:
    """Return what was done to the region that a reader should know."""
    remarks = []
    masked = float(1 - np.isfinite(seen.lens).mean())
    if masked > 0.02:
        remarks.append(Remark("remark.masked_share", (("share", masked),)))
    if seen.known_lengths and seen.strip.scaled_by_diameter:
        reason = "it does not lie beside this pipe, or is far off what the diameter gives"
        parameters = (("id", ", ".join(seen.known_lengths)), ("reason", reason))
        remarks.append(Remark("remark.reading_not_used", parameters))
    tracer = seen.line.tracing
    if tracer.kind != "none" and (seen.frame.wind_speed is None or not can_split(seen)):
        power = () if tracer.power is None else (("power_W_per_m", tracer.power.value),)
        remarks.append(Remark("remark.tracer_heat", power))
    remarks.extend(film_remarks(seen))
    humidity = seen.conditions.relative_humidity
    if seen.gain and humidity is not None and humidity.is_default:
        remarks.append(Remark("remark.humidity_assumed", (("share", humidity.value),)))
    if _mirrors_a_neighbour(seen):
        remarks.append(Remark("remark.mirrored_neighbour"))
    if seen.strip.receding_angle > NOTICEABLE_ANGLE:
        angle = float(np.degrees(seen.strip.receding_angle))
        remarks.append(Remark("remark.foreshortening", (("angle_deg", angle),)))
    return tuple(remarks)


def _mirrors_a_neighbour(seen: Seen) -> bool:
    """Return whether a band of angle stands out all along metal, as a mirrored neighbour does.

    Uneven convection makes top and bottom of a pipe differ by some 15 % of what the surface is
    above the air, damage stands out at some stations only; a line beside it is mirrored along
    its whole length at one angle. The limits are assumptions, no source.
    """
    if not seen.line.cladding.is_metal or seen.line.tracing.kind != "none":
        return False
    bands = seen.face.temperature[:, seen.usable]
    if bands.shape[0] < 3:
        return False
    along = np.median(bands, axis=1)
    standing_out = float(np.abs(along - np.median(along)).max())
    surface = float(np.nanmedian(seen.median_temperature[seen.usable]))
    above = seen.emissivity * abs(surface - float(np.median(seen.frame.air_temperature)))
    return standing_out > max(MIRRORED_LEAST, MIRRORED_SHARE * above)


def refusals_of(seen: Seen, rain: RainLeft | None = None) -> tuple[Remark, ...]:
    """Return the reasons that allow no number at all.

    Parameters
    ----------
    seen : Seen
    rain : RainLeft, optional
        What of the rain may still be there.

    Notes
    -----
    Water evaporates from a wet surface that is warmer than the dew point, and takes heat that
    the image does not show.
    """
    reasons = []
    if not seen.diameter_known:
        reasons.append(Remark("not_quantified.no_diameter"))
    if not seen.below_dew_point[seen.usable].all():
        if seen.conditions.surface_wet:
            reasons.append(Remark("not_quantified.wet_surface"))
        elif rain is not None and rain.share > MAY_BE_WET:
            reasons.append(_may_be_wet(seen.conditions, rain))
    return tuple(reasons)


def _may_be_wet(conditions: Conditions, rain: RainLeft) -> Remark:
    since = conditions.hours_since_rain
    parameters = [("share", rain.share)]
    if since is not None:
        parameters.append(("hours", since.value))
    if np.isfinite(rain.drying_hours):
        parameters.append(("drying_hours", rain.drying_hours))
    return Remark("not_quantified.may_be_wet", tuple(parameters))


def in_the_sun(conditions: Conditions) -> bool:
    """Return whether the sun shone on the pipe when it was recorded."""
    sun = conditions.solar_irradiance
    return bool(conditions.sun_on_pipe or (sun is not None and sun.value > 0))


def verdict_caps(seen: Seen) -> tuple[Remark, ...]:
    """Return the reasons that allow an indicative verdict at most."""
    conditions = seen.conditions
    below = seen.below_dew_point[seen.usable].mean()
    reasons = {
        "indicative.sun": in_the_sun(conditions),
        "indicative.traced": seen.line.tracing.kind != "none",
        "indicative.sun_unknown": _sun_is_unknown(conditions),
        "indicative.rain": had_rained(conditions) and _within_a_day(conditions.hours_since_rain),
        "indicative.bare_component": seen.bare_component,
        "indicative.not_steady": not is_settled(seen.line),
        "indicative.sun_before": _sun_lingers(seen),
        "indicative.below_dew_point": bool(below > 0.05),
        "indicative.wet_or_dry": fits_both(seen),
        "indicative.mostly_masked": bool(np.isfinite(seen.lens).mean() < 0.5),
    }
    return tuple(Remark(key) for key, holds in reasons.items() if holds)


def _sun_is_unknown(conditions: Conditions) -> bool:
    """Return whether the sun was up over an outdoor pipe and nobody said if it shone there."""
    elevation = conditions.sun_elevation_deg
    undeclared = conditions.sun_on_pipe is None and conditions.solar_irradiance is None
    return elevation is not None and elevation > HORIZON_DEG and undeclared


def _within_a_day(hours: Quantity | None) -> bool:
    return hours is None or hours.value <= DAY_HOURS


def _sun_lingers(seen: Seen) -> bool:
    """Return whether the cladding and lagging may still hold heat of the last day's sun."""
    conditions = seen.conditions
    if conditions.indoors is not False or not conditions.sun_last_24h:
        return False
    if conditions.hours_since_sun is None:
        return True
    surface = float(np.nanmedian(seen.median_temperature[seen.usable]))
    above_air = surface - float(np.median(seen.frame.air_temperature))
    absorptance = float(np.median(seen.line_draws.solar_absorptance))
    needed = time_to_forget_sun(seen.line, absorptance=absorptance, above_air=above_air)
    return needed is None or conditions.hours_since_sun.value * 3600 < needed
