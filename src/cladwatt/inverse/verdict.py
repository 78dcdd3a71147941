"""The verdict: what may be said of a region's number, its reason, and what carries its width."""

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.result import Interval, Verdict, VerdictLevel
from cladwatt.quantities import Remark
from cladwatt.types import FloatArray

__all__ = ["VerdictInputs", "as_verdict", "give_verdict", "variance_shares"]

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

_FIND_OUT = {
    "missing.inside_temperature": "advice.inside_temperature",
    "missing.lagging": "advice.lagging_data",
}
_LIFTS = {
    "indicative.sun": "advice.other_hour",
    "indicative.sun_unknown": "advice.other_hour",
    "indicative.sun_before": "advice.other_hour",
    "indicative.rain": "advice.other_hour",
    "indicative.not_steady": "advice.other_hour",
    "indicative.narrow_pipe": "advice.closer_frame",
}
"""What would lift a reason, where no measurement would narrow the loss."""
_LIFTS_ALONE = {"not_quantified.too_narrow": "advice.closer_frame"}
"""What alone would lift a reason, whatever else narrows the loss."""


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


def as_verdict(
    inputs: VerdictInputs, advice: Remark | None, missing: tuple[Remark, ...] = ()
) -> Verdict:
    """Return the full verdict with its advice.

    Parameters
    ----------
    inputs : VerdictInputs
    advice : Remark or None
        The measurement that would help most, see `inverse.advice`.
    missing : tuple of Remark
        What is unknown; finding that out comes before any measurement.
    """
    level, reason = give_verdict(inputs)
    for remark in missing:
        if remark.key in _FIND_OUT:
            return Verdict(level, reason, Remark(_FIND_OUT[remark.key]))
    if reason.key in _LIFTS_ALONE:
        advice = Remark(_LIFTS_ALONE[reason.key])
    elif advice is None and reason.key in _LIFTS:
        advice = Remark(_LIFTS[reason.key])
    return Verdict(level, reason, advice)
