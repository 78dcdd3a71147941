"""Flanges, valves and hangers: estimated on their own, never taken for damaged lagging.

Two estimates each, and what both say together: what is printed, as metres that the component
adds to its line; and what the image shows, the flux at its temperature times its surface. Of a
hanger a share of the line's loss is printed, which is taken over one spacing of hangers.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np

from cladwatt.errors import TableError
from cladwatt.inverse.bare import BARE_EMISSIVITY
from cladwatt.inverse.component_estimates import BodySize, body_size, covered_area, weighed
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.law_spread import with_own_spread
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import outer_flux, vapour_of
from cladwatt.inverse.result import ComponentResult, Interval, interval_of
from cladwatt.inverse.seen import FrameImage, Seen
from cladwatt.inverse.sound import sound_draws
from cladwatt.materials.fittings import fitting_kind
from cladwatt.materials.load import MaterialTables
from cladwatt.materials.rows import CountsAs, Fitting
from cladwatt.materials.tables import fitting_equivalent_length, hanger_share, hanger_spacing
from cladwatt.measure.outline import region_mask, widened
from cladwatt.quantities import Remark
from cladwatt.survey.region import Region
from cladwatt.types import BoolArray, FloatArray

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
PRINTED_U = 0.5
"""The same of the metres that a component adds to a line as clad: sources differ by a factor of
two and more; assumption."""
UNSEEN_U = 0.6
"""Relative standard uncertainty of what a hanger loses by what is seen of it: its foot or rod, and
the steel it hangs on, mostly are not; assumption."""
PRINTED_DIAMETERS = (0.055, 0.125)
"""Of the pipe: DN 50 to 100. [m]"""
PRINTED_TEMPERATURES = (373.15, 673.15)
"""For which lengths of bare components on a lagged line are printed; larger lines and other
temperatures are read off the image alone. [K]"""


def estimate_component(
    region: Region,
    *,
    image: FrameImage,
    frame: FrameDraws,
    line: LineDraws,
    book: DrawBook,
    tables: MaterialTables | None,
    pipes: Sequence[Seen] = (),
    indoors: bool = True,
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
    pipes : sequence of Seen
        Regions of the frame, whose scale tells the size of the body.
    indoors : bool

    Returns
    -------
    ComponentResult
        Without numbers, and with the reason, where the kind, a size or the wind is unknown or
        nothing usable is seen.
    """
    lagged = bool(region.lagged)
    if _clipped_share(region, image) > MOST_CLIPPED:
        return unknown_component(region, "not_quantified.component_clipped")
    body = _body(region, image, float(np.median(frame.air_temperature)))
    if not body.any():
        return unknown_component(region, "not_quantified.component_unseen")
    emissivity = line.band_emissivity
    if not lagged:
        emissivity = book.quantity(f"region:{region.id}", "bare_emissivity", BARE_EMISSIVITY)
    seen = float(np.median(image.lens_temperature[body]))
    temperature = _temperature(seen, frame, line, emissivity, is_metal=lagged and line.is_metal)
    surface = interval_of(temperature)
    diameter = line.lagged_diameter if lagged else line.pipe_diameter
    if diameter is None or frame.wind_speed is None:
        return unknown_component(region, "not_quantified.component_no_size", surface)
    clad = line if lagged else _bare(line, emissivity)
    frame = with_own_spread(frame, clad, diameter, temperature)
    exchange = clad.exchange(frame, diameter)
    flux = outer_flux(temperature, exchange, vapour_of(frame, line))
    sound = sound_draws(line, frame)
    known = _Known(
        kind=region.kind,
        lagged=lagged,
        diameter=diameter,
        flux=flux,
        sound_loss=None if sound is None else sound.heat_loss,
        size=body_size(region_mask(region, body.shape), body, region.tag, pipes),
        indoors=indoors,
        book=book,
        owner=f"region:{region.id}",
        tables=tables,
    )
    printed, by_image = _printed(known, line), _by_image(known)
    loss = weighed(printed.draws, by_image.draws)
    if loss is None:
        if fitting_kind(region.kind) == "hanger":
            return unknown_component(region, "not_quantified.component_hanger", surface)
        return unknown_component(region, "not_quantified.component_kind_unknown", surface)
    with np.errstate(divide="ignore", invalid="ignore"):
        length = loss / known.per_metre
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
        source=" | ".join(dict.fromkeys(filter(None, (printed.source, by_image.source)))),
        draws={"heat_loss": loss},
        table_loss=None if printed.draws is None else interval_of(printed.draws),
        image_loss=None if by_image.draws is None else interval_of(by_image.draws),
    )


@dataclass(frozen=True)
class _Known:
    """What the two estimates of a component rest on."""

    kind: str
    lagged: bool
    diameter: FloatArray
    """Of the pipe, or over its lagging where the component is lagged. [m]"""
    flux: FloatArray
    """At the temperature seen. [W/m2]"""
    sound_loss: FloatArray | None
    """Of the line. [W/m]"""
    size: BodySize | None
    indoors: bool
    book: DrawBook
    owner: str
    tables: MaterialTables | None

    @property
    def clad_loss(self) -> FloatArray | None:
        """Loss of a metre of the line as clad, by what is seen where the sound one is unknown."""
        if self.sound_loss is None and self.lagged:
            return np.asarray(math.pi * self.diameter * self.flux)
        return self.sound_loss

    @property
    def per_metre(self) -> FloatArray:
        """Loss of a metre of what a component's equivalent length is a length of. [W/m]"""
        clad = self.clad_loss
        if fitting_kind(self.kind) == "hanger" or self.lagged:
            assert clad is not None
            return clad
        return np.asarray(math.pi * self.diameter * self.flux)

    def length(self, counts_as: CountsAs, *, lagged: bool) -> Fitting | None:
        """Return what is printed of the kind, None where nothing is."""
        try:
            return fitting_equivalent_length(
                self.kind, lagged, counts_as=counts_as, tables=self.tables
            )
        except TableError:
            return None


class _Estimate(NamedTuple):
    draws: FloatArray | None = None
    source: str = ""


def _printed(known: _Known, line: LineDraws) -> _Estimate:
    """Return what is printed of the kind: metres that it adds to the line, clad as it is."""
    clad, book, owner = known.clad_loss, known.book, known.owner
    if clad is None:
        return _Estimate()
    make = np.exp(PRINTED_U * book.normal(owner, "shape"))
    fitting = known.length("lagged_pipe", lagged=known.lagged)
    if fitting is None:
        return _hanger(known, line, clad * make)
    if not known.lagged and not _is_in_printed_range(line):
        return _Estimate()
    length = book.quantity(owner, "added_length", fitting.amount)
    # printed lengths are added to the pipe's own
    own = 0.0 if known.size is None else known.size.length
    return _Estimate((length + own) * make * clad, fitting.amount.source)


def _is_in_printed_range(line: LineDraws) -> bool:
    """Whether lengths of bare components on a lagged line are printed for such a line."""
    if line.pipe_diameter is None or line.inside_temperature is None:
        return False
    small, large = PRINTED_DIAMETERS
    cold, hot = PRINTED_TEMPERATURES
    inside = float(np.median(line.inside_temperature))
    return small <= float(np.median(line.pipe_diameter)) <= large and cold <= inside <= hot


def _hanger(known: _Known, line: LineDraws, clad: FloatArray) -> _Estimate:
    """Return the share of a line's loss that hangers add, over one spacing of them."""
    if fitting_kind(known.kind) != "hanger" or line.pipe_diameter is None:
        return _Estimate()
    share = hanger_share(indoors=known.indoors, tables=known.tables)
    spacing = hanger_spacing(float(np.median(line.pipe_diameter)), tables=known.tables)
    metres = known.book.quantity(known.owner, "hanger_share", share)
    metres = metres * known.book.quantity(known.owner, "hanger_spacing", spacing)
    metres = metres + (0.0 if known.size is None else known.size.length)
    source = f"{share.source.partition('; u: ')[0]} | {spacing.source}"
    return _Estimate(metres * clad, source)


def _by_image(known: _Known) -> _Estimate:
    """Return the flux at the temperature seen times the surface of the body."""
    if fitting_kind(known.kind) == "hanger":
        area = covered_area(known.size, None, known.diameter, known.book, known.owner)
        if area is None:
            return _Estimate()
        unseen = np.exp(UNSEEN_U * known.book.normal(known.owner, "unseen"))
        return _Estimate(area * known.flux * unseen)
    bare = known.length("bare_pipe", lagged=False)
    if known.lagged:
        published = None if bare is None else bare.amount.value
        area = covered_area(known.size, published, known.diameter, known.book, known.owner)
        if area is None:
            return _Estimate()
        return _Estimate(area * known.flux, "" if bare is None else bare.amount.source)
    if bare is None:
        return _Estimate()
    length = known.book.quantity(known.owner, "equivalent_length", bare.amount)
    length = length * np.exp(SHAPE_U * known.book.normal(known.owner, "make"))
    return _Estimate(math.pi * known.diameter * length * known.flux, bare.amount.source)


def _clipped_share(region: Region, image: FrameImage) -> float:
    clipped = image.clipped[region_mask(region, image.clipped.shape)]
    return float(clipped.mean()) if clipped.size else 0.0


def _body(region: Region, image: FrameImage, air_temperature: float) -> BoolArray:
    """Return the pixels of the body inside the drawn outline.

    A bare body is narrower than the lagging beside it, so that an outline as wide as the lagging
    holds more background than body; they part at half height.
    """
    mask = region_mask(region, image.lens_temperature.shape)
    core = mask & ~widened(~mask, 1.0)
    usable = (core if core.any() else mask) & np.isfinite(image.lens_temperature)
    if not usable.any():
        return usable
    away = np.abs(image.lens_temperature - air_temperature)
    far = np.percentile(away[usable], FAR_PERCENTILE)
    return np.asarray(usable & (away >= BODY_FROM * far))


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
