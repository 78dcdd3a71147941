"""Flanges, valves and hangers: estimated on their own, never taken for damaged lagging.

What a component loses is an equivalent length of pipe, as printed, times what a metre of such
pipe loses: of bare pipe at the temperature the image shows for a bare component, of the sound
line for a lagged one (at the temperature seen where the sound loss is unknown). A hanger has no
equivalent length; what is printed of it is a share of a line's loss.
"""

import math
from dataclasses import replace

import numpy as np

from cladwatt.errors import TableError
from cladwatt.inverse.bare import BARE_EMISSIVITY
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.law_spread import with_own_spread
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import outer_flux, vapour_of
from cladwatt.inverse.result import ComponentResult, Interval, interval_of
from cladwatt.inverse.seen import FrameImage
from cladwatt.inverse.sound import sound_draws
from cladwatt.materials.fittings import fitting_kind
from cladwatt.materials.load import MaterialTables
from cladwatt.materials.tables import fitting_equivalent_length
from cladwatt.measure.outline import region_mask, widened
from cladwatt.quantities import Remark
from cladwatt.survey.region import Region
from cladwatt.types import FloatArray

__all__ = ["estimate_component", "unknown_component"]

BODY_FROM = 0.5
"""Pixels of the outline less far from the air than this share of its far ones are background."""
FAR_PERCENTILE = 90.0
"""Which of its pixels are far ones: a body covers more than a tenth of its outline; assumption."""
MOST_CLIPPED = 0.05
"""Where more of an outline is clipped its temperature is not known; assumption."""

SHAPE_U = 0.3
"""Relative standard uncertainty of an equivalent length for the component at hand: printed ones
differ by more than their own spread says; assumption."""


def estimate_component(
    region: Region,
    *,
    image: FrameImage,
    frame: FrameDraws,
    line: LineDraws,
    book: DrawBook,
    tables: MaterialTables | None,
) -> ComponentResult:
    """Estimate what one component loses.

    Parameters
    ----------
    region : Region
        Role ``component``, with `kind` and `lagged`; not lagged where it does not say.
    image : FrameImage
    frame : FrameDraws
    line : LineDraws
        Of the line it sits on.
    book : DrawBook
    tables : MaterialTables or None
        The survey's, for equivalent lengths.

    Returns
    -------
    ComponentResult
        Without numbers, and with the reason, where the kind, a size or the wind is unknown or
        nothing usable is seen.
    """
    lagged = bool(region.lagged)
    if _clipped_share(region, image) > MOST_CLIPPED:
        return unknown_component(region, "not_quantified.component_clipped")
    seen = _seen(region, image, float(np.median(frame.air_temperature)))
    emissivity = line.band_emissivity
    if not lagged:
        emissivity = book.quantity(f"region:{region.id}", "bare_emissivity", BARE_EMISSIVITY)
    if not np.isfinite(seen):
        return unknown_component(region, "not_quantified.component_unseen")
    temperature = _temperature(seen, frame, line, emissivity, is_metal=lagged and line.is_metal)
    surface = interval_of(temperature)
    diameter = line.lagged_diameter if lagged else line.pipe_diameter
    if diameter is None or frame.wind_speed is None:
        return unknown_component(region, "not_quantified.component_no_size", surface)
    try:
        fitting = fitting_equivalent_length(
            region.kind,
            lagged,
            counts_as="lagged_pipe" if lagged else "bare_pipe",
            tables=tables,
        )
    except TableError:
        hanger = fitting_kind(region.kind) == "hanger"
        key = (
            "not_quantified.component_hanger" if hanger else "not_quantified.component_kind_unknown"
        )
        return unknown_component(region, key, surface)
    clad = line if lagged else _bare(line, emissivity)
    frame = with_own_spread(frame, clad, diameter, temperature)
    exchange = clad.exchange(frame, diameter)
    per_metre = math.pi * diameter * outer_flux(temperature, exchange, vapour_of(frame, line))
    if lagged and (sound := sound_draws(line, frame)) is not None:
        # such lengths are printed of the line as clad, not of what the box's own surface shows
        per_metre = sound.heat_loss
    owner = f"region:{region.id}"
    length = book.quantity(owner, "equivalent_length", fitting.amount)
    length = length * np.exp(SHAPE_U * book.normal(owner, "shape"))
    loss = length * per_metre
    return ComponentResult(
        region_id=region.id,
        frame_id=region.frame_id,
        tag=region.tag or "",
        kind=region.kind,
        lagged=lagged,
        surface_temperature=surface,
        equivalent_length=interval_of(length),
        heat_loss=interval_of(loss),
        reason=None,
        source=fitting.amount.source,
        draws={"heat_loss": loss},
    )


def _clipped_share(region: Region, image: FrameImage) -> float:
    clipped = image.clipped[region_mask(region, image.clipped.shape)]
    return float(clipped.mean()) if clipped.size else 0.0


def _seen(region: Region, image: FrameImage, air_temperature: float) -> float:
    """Return the median at the lens of the body inside the drawn outline. [K]

    A bare body is narrower than the lagging beside it, so that an outline as wide as the lagging
    holds more background than body; they part at half height.
    """
    mask = region_mask(region, image.lens_temperature.shape)
    core = mask & ~widened(~mask, 1.0)
    values = image.lens_temperature[core if core.any() else mask]
    values = values[np.isfinite(values)]
    if not values.size:
        return math.nan
    away = np.abs(values - air_temperature)
    body = away >= BODY_FROM * np.percentile(away, FAR_PERCENTILE)
    return float(np.median(values[body]))


def _bare(line: LineDraws, emissivity: FloatArray) -> LineDraws:
    return replace(line, band_emissivity=emissivity, total_emissivity=emissivity, is_metal=False)


def _temperature(
    seen: float, frame: FrameDraws, line: LineDraws, emissivity: FloatArray, *, is_metal: bool
) -> FloatArray:
    """Return draws of the component's temperature, no hotter than the fluid. [K]"""
    read = replace(line, band_emissivity=emissivity, is_metal=is_metal)
    drawn = surface_temperature_draws(np.array([seen]), np.zeros(1), frame, read)[:, 0, 0]
    coldest = np.nanmin(drawn) if np.isfinite(drawn).any() else frame.air_temperature
    drawn = np.where(np.isfinite(drawn), drawn, coldest)
    inside = line.inside_temperature
    if inside is None:
        return np.asarray(drawn)
    hot = inside >= frame.air_temperature
    return np.asarray(np.where(hot, np.minimum(drawn, inside), np.maximum(drawn, inside)))


def unknown_component(region: Region, key: str, surface: Interval | None = None) -> ComponentResult:
    """Return a component without numbers, and why.

    Parameters
    ----------
    region : Region
    key : str
        Of the reason.
    surface : Interval, optional
        Its temperature, where that much is known. [K]
    """
    return ComponentResult(
        region_id=region.id,
        frame_id=region.frame_id,
        tag=region.tag or "",
        kind=region.kind,
        lagged=bool(region.lagged),
        surface_temperature=surface,
        equivalent_length=None,
        heat_loss=None,
        reason=Remark(key),
    )
