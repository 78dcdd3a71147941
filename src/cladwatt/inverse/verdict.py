"""The verdict: what may be said of a region's number, its reason, and what would help most."""

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.result import Interval, Verdict, VerdictLevel
from cladwatt.quantities import Remark
from cladwatt.types import FloatArray

__all__ = ["VerdictInputs", "advice_of", "as_verdict", "give_verdict", "variance_shares"]

QUANTIFIED_WIDTH = 0.40
INDICATIVE_WIDTH = 1.20
"""Full 95 % width over the median below which a loss is quantified, indicative."""
VISIBLE_RISE_SIGMAS = 2.0
VISIBLE_RISE_SIGMAS_METAL = 5.0
"""A 25 % rise over one diameter must show at this; at emissivity below 0.7 sound metal is
patchy."""
METAL_EMISSIVITY = 0.7
SPOTS_ACROSS = 3.0
INFEASIBLE_SHARE = 0.3

_ADVICE: dict[str, tuple[str, float]] = {
    # quantity: (advice key, share of its uncertainty that the measurement leaves)
    "band_emissivity": ("advice.tape_patch", 0.35),
    "reflected_temperature": ("advice.reflector", 0.25),
    "calibration": ("advice.contact_temperature", 0.6),
    "air_temperature": ("advice.air_temperature", 0.3),
    "surroundings_temperature": ("advice.other_hour", 0.5),
    "wind_speed": ("advice.wind", 0.4),
    "transmission": ("advice.closer_frame", 0.4),
    "inside_temperature": ("advice.inside_temperature", 0.4),
}
_FIND_OUT = {
    "missing.inside_temperature": "advice.inside_temperature",
    "missing.lagging": "advice.lagging_data",
}
LEAST_GAIN = 0.1
"""Advice that would narrow the interval by less than this share is not given."""


@dataclass(frozen=True)
class VerdictInputs:
    """What a verdict rests on."""

    heat_loss: Interval | None
    excess: Interval | None
    emissivity: float
    visible_rise_sigmas: float
    """Standard uncertainties at which a 25 % rise over one diameter would show."""
    width: float
    """Median width of the pipe. [px]"""
    spot_pixels: float
    infeasible_share: float
    caps: tuple[Remark, ...]
    """Reasons that allow indicative at most."""
    refusals: tuple[Remark, ...]
    """Reasons that allow no number."""


def give_verdict(inputs: VerdictInputs) -> tuple[VerdictLevel, Remark]:
    """Return the verdict and its reason.

    Parameters
    ----------
    inputs : VerdictInputs

    Returns
    -------
    level : {"quantified", "indicative", "not quantified"}
    reason : Remark
        The first reason that decided.
    """
    refusal = _refusal(inputs)
    if refusal is not None:
        return "not quantified", refusal
    assert inputs.heat_loss is not None
    relative = inputs.heat_loss.relative_width
    excess_known = inputs.excess is not None and inputs.excess.low * inputs.excess.high > 0
    if not (relative < INDICATIVE_WIDTH or excess_known):
        return "not quantified", _remark(
            "not_quantified.interval_too_wide", relative_width=relative
        )
    needed = (
        VISIBLE_RISE_SIGMAS_METAL if inputs.emissivity < METAL_EMISSIVITY else VISIBLE_RISE_SIGMAS
    )
    spots = 0.75 * inputs.width / inputs.spot_pixels
    if spots < SPOTS_ACROSS:
        return "indicative", _remark("indicative.narrow_pipe", spots=spots)
    if inputs.caps:
        return "indicative", inputs.caps[0]
    if relative >= QUANTIFIED_WIDTH:
        key = "indicative.interval_wide" if relative < INDICATIVE_WIDTH else "indicative.sign_known"
        return "indicative", _remark(key, relative_width=relative)
    if inputs.visible_rise_sigmas < needed:
        return "indicative", _remark(
            "indicative.contrast_too_weak", sigmas=inputs.visible_rise_sigmas
        )
    return "quantified", _remark("quantified.image_carries", relative_width=relative)


def _refusal(inputs: VerdictInputs) -> Remark | None:
    if inputs.refusals:
        return inputs.refusals[0]
    if inputs.width < 3.0:
        return _remark("not_quantified.too_narrow", width_px=inputs.width)
    if inputs.infeasible_share > INFEASIBLE_SHARE:
        return _remark("not_quantified.infeasible", share=inputs.infeasible_share)
    if inputs.heat_loss is None or not math.isfinite(inputs.heat_loss.median):
        return _remark("not_quantified.infeasible", share=inputs.infeasible_share)
    return None


def _remark(key: str, **parameters: float) -> Remark:
    return Remark(key, tuple((name, float(value)) for name, value in parameters.items()))


def variance_shares(
    loss: FloatArray, drivers: Mapping[str, FloatArray]
) -> tuple[tuple[str, float], ...]:
    """Return the share of the loss's variance that each declared quantity carries.

    Parameters
    ----------
    loss : (count,) array
        Draws of the loss; NaN left out.
    drivers : mapping of name to (count,) array
        The draws behind each quantity, moved by the joint estimate like the loss.

    Returns
    -------
    tuple of (name, share)
        Squared correlations, largest first: what of the variance a linear model of that quantity
        alone explains. Independent quantities add up to one less what bends or interacts; the
        joint estimate makes them hang together, and shares then overlap.

    References
    ----------
    .. [1] Saltelli et al., *Global Sensitivity Analysis: The Primer*, Wiley 2008, section 1.2
       (standardised regression coefficients).
    """
    usable = np.isfinite(loss)
    if usable.sum() < 10 or np.ptp(loss[usable]) == 0:
        return ()
    shares = []
    for name, driver in drivers.items():
        values = driver[usable]
        if np.ptp(values) > 0:
            shares.append((name, float(np.corrcoef(loss[usable], values)[0, 1] ** 2)))
    return tuple(sorted(shares, key=lambda item: -item[1]))


def advice_of(
    shares: tuple[tuple[str, float], ...],
    narrowed: Mapping[str, float],
    heat_loss: Interval | None,
    *,
    emissivity: float,
) -> Remark | None:
    """Return the one measurement that would narrow the loss most, with the widths it promises.

    Parameters
    ----------
    shares : tuple of (name, share)
    narrowed : mapping of name to float
        What is left of each quantity's declared uncertainty after the joint estimate.
    heat_loss : Interval or None
    emissivity : float

    Returns
    -------
    Remark or None
        Half widths now and then, in percent; None where nothing measurable would narrow the
        interval by a tenth.
    """
    if heat_loss is None or not heat_loss.median:
        return None
    now = 50 * heat_loss.relative_width
    best: tuple[float, str] | None = None
    for name, share in shares:
        if name in _ADVICE and share >= 0.1:
            key, left = _ADVICE[name]
            # the measurement adds to what the joint estimate knows of the quantity already
            measured = left / math.sqrt(1 - left**2)
            left = 1 / math.hypot(1.0, narrowed.get(name, 1.0) / measured)
            if key == "advice.reflector" and emissivity > 0.9:
                continue
            then = now * math.sqrt(max(1 - share * (1 - left**2), 0.02))
            if best is None or then < best[0]:
                best = (then, key)
    if best is None or best[0] > (1 - LEAST_GAIN) * now:
        return None
    return _remark(best[1], width_now=now, width_then=best[0])


def as_verdict(
    inputs: VerdictInputs,
    shares: tuple[tuple[str, float], ...],
    narrowed: Mapping[str, float],
    missing: tuple[Remark, ...] = (),
) -> Verdict:
    """Return the full verdict with its advice.

    Parameters
    ----------
    inputs : VerdictInputs
    shares : tuple of (name, share)
        As `variance_shares` gives them.
    narrowed : mapping of name to float
        As for `advice_of`.
    missing : tuple of Remark
        What is unknown; finding that out comes before any measurement.
    """
    level, reason = give_verdict(inputs)
    for remark in missing:
        if remark.key in _FIND_OUT:
            return Verdict(level, reason, Remark(_FIND_OUT[remark.key]))
    advice = advice_of(shares, narrowed, inputs.heat_loss, emissivity=inputs.emissivity)
    return Verdict(level, reason, advice)
