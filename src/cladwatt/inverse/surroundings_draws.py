"""Draws of what a pipe exchanges radiation with and of what it mirrors, on the same draws.

The heat balance takes the fourth powers of the pieces' temperatures, weighted with their view
factors; the camera's band takes their radiance in the band, weighted with the same. The sky is the
one piece with two temperatures, one for each.
"""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.physics.band import Band
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.radiation import combined_surroundings
from cladwatt.physics.sky import sky_temperature
from cladwatt.quantities import Quantity
from cladwatt.survey.model import Conditions
from cladwatt.types import FloatArray

__all__ = [
    "Pieces",
    "draw_pieces",
    "mirrored_apart",
    "reflected_draws",
    "sky_draws",
    "surroundings_draws",
]

AIR_AS_SOURCE = "as the air"
SURROUNDINGS_AS_SOURCE = "as the declared surroundings"
BELOW_AIR_AS_SOURCE = "below the air"
CLOUDS_AS_SOURCE = "sky by cloud cover"
"""Sources of a default temperature that follows another: its draws are the other's plus its
own."""
PIECES_MIRRORED_U = 2.0
"""Standard uncertainty of the reflected temperature that follows from pieces, beyond theirs: none
is black, none of one temperature; common practice. [K]"""
MIRRORED_DIRECTIONS, MIRRORED_DIRECTIONS_METAL = 30.0, 4.0
"""A cladding mirrors the pieces as if it saw that many directions taken at random by the view
factors: a coat scatters, metal mirrors a fan of few directions across the seen face; assumption."""


@dataclass(frozen=True)
class Pieces:
    """Surroundings in pieces, each array (pieces, count)."""

    temperature: FloatArray
    """What the heat balance exchanges with. [K]"""
    band_temperature: FloatArray
    """What the camera's band sees; another one of the sky alone. [K]"""
    share: FloatArray
    """View factors, made to sum to one in every draw. [-]"""

    @property
    def combined(self) -> FloatArray:
        """Temperature of uniform surroundings that radiate the same, (count,). [K]"""
        return combined_surroundings(list(self.temperature), list(self.share))

    def radiance(self, band: Band) -> FloatArray:
        """Return what the pieces radiate together in the band, (count,). [W/(m2 sr)]"""
        return np.asarray((self.share * band.radiance(self.band_temperature)).sum(axis=0))


def draw_pieces(
    book: DrawBook, owner: str, conditions: Conditions, air: FloatArray
) -> Pieces | None:
    """Draw surroundings that are declared in pieces; None where they are not.

    Parameters
    ----------
    book : DrawBook
    owner : str
        Key of the frame's draws.
    conditions : Conditions
    air : (count,) array
        Its temperature. [K]
    """
    declared = conditions.surroundings_pieces
    if not declared:
        return None
    total, band, shares = [], [], []
    for number, piece in enumerate(declared, start=1):
        name = f"surroundings_{number}_{piece.what}"
        temperature = _follow(book, owner, f"{name}_temperature", piece.temperature, conditions)
        total.append(temperature)
        sky = conditions.sky_band_temperature if piece.what == "sky" else None
        if sky is not None:
            temperature = _follow(book, owner, "sky_band_temperature", sky, conditions)
        elif piece.what == "sky":
            temperature = air
        band.append(temperature)
        shares.append(book.quantity(owner, f"{name}_view_factor", piece.view_factor))
    factors = np.maximum(np.stack(shares), 1e-9)
    return Pieces(np.stack(total), np.stack(band), factors / factors.sum(axis=0))


def surroundings_draws(
    book: DrawBook,
    owner: str,
    conditions: Conditions,
    air: FloatArray,
    pieces: Pieces | None,
) -> FloatArray:
    """Draw the temperature that the heat balance exchanges radiation with, (count,). [K]

    Parameters
    ----------
    book : DrawBook
    owner : str
    conditions : Conditions
    air : (count,) array
    pieces : Pieces or None
    """
    if pieces is not None:
        return pieces.combined
    declared = conditions.surroundings_temperature
    if declared is not None:
        return _follow(book, owner, "surroundings_temperature", declared, conditions)
    total = conditions.sky_total_temperature
    if total is None:
        return air
    sky = sky_draws(book, owner, total, conditions)
    view = _sky_view(book, owner, conditions)
    return combined_surroundings((sky, air), (view, 1 - view))


def sky_draws(book: DrawBook, owner: str, total: Quantity, conditions: Conditions) -> FloatArray:
    """Draw what the heat balance exchanges with in the sky, (count,). [K]"""
    return _follow(book, owner, "sky_total_temperature", total, conditions)


def reflected_draws(
    book: DrawBook,
    owner: str,
    conditions: Conditions,
    air: FloatArray,
    surroundings: FloatArray,
    pieces: Pieces | None,
    band: Band,
) -> FloatArray:
    """Draw the reflected temperature in the camera's band, (count,). [K]

    Parameters
    ----------
    book : DrawBook
    owner : str
    conditions : Conditions
        A declared reflected temperature goes before what follows from anything else.
    air, surroundings : (count,) array
    pieces : Pieces or None
    band : Band
    """
    reflected = conditions.reflected_temperature
    if reflected is not None and reflected.source.startswith(SURROUNDINGS_AS_SOURCE):
        declared = conditions.surroundings_temperature
        own = (
            reflected.u if declared is None else math.sqrt(max(reflected.u**2 - declared.u**2, 0.0))
        )
        return np.asarray(surroundings + own * book.normal(owner, "reflected_temperature"))
    if reflected is not None:
        return _follow(book, owner, "reflected_temperature", reflected, conditions)
    if pieces is not None:
        mixed = band.temperature(pieces.radiance(band))
        return mixed + PIECES_MIRRORED_U * book.normal(owner, "reflected_temperature")
    if conditions.sky_band_temperature is None:
        return air
    sky = _follow(book, owner, "sky_band_temperature", conditions.sky_band_temperature, conditions)
    view = _sky_view(book, owner, conditions)
    return band.temperature(view * band.radiance(sky) + (1 - view) * band.radiance(air))


def mirrored_apart(
    pieces: Pieces, band: Band, book: DrawBook, region_id: str, *, is_metal: bool
) -> FloatArray:
    """Draw by how much one region's mirror image of the pieces is off their mean, (count,). [K]

    Parameters
    ----------
    pieces : Pieces
    band : Band
    book : DrawBook
    region_id : str
    is_metal : bool

    Notes
    -----
    View factors weigh directions by how they meet the whole circumference. What a camera sees
    mirrored lies on its own side of the pipe, and on bright metal in a fan of directions. So the
    pieces' shares in it are drawn about their view factors, between none and all of one piece.
    """
    directions = MIRRORED_DIRECTIONS_METAL if is_metal else MIRRORED_DIRECTIONS
    seen = book.shares(f"region:{region_id}", "mirrored_pieces", pieces.share, directions)
    mirrored = Pieces(pieces.temperature, pieces.band_temperature, seen)
    return np.asarray(
        band.temperature(mirrored.radiance(band)) - band.temperature(pieces.radiance(band))
    )


def _follow(
    book: DrawBook, owner: str, name: str, quantity: Quantity, conditions: Conditions
) -> FloatArray:
    """Draw a temperature; a default that follows air or clouds takes their draws along."""
    air = conditions.air_temperature
    assert air is not None
    if quantity.source.startswith(AIR_AS_SOURCE):
        drawn = book.quantity(owner, "air_temperature", air)
        return np.asarray(drawn + quantity.u * book.normal(owner, name))
    if quantity.source.startswith(BELOW_AIR_AS_SOURCE):
        moved = book.quantity(owner, "air_temperature", air) - air.value
        return book.quantity(owner, name, quantity) + moved
    if quantity.source.startswith(CLOUDS_AS_SOURCE):
        return _sky_of_clouds(book, owner, name, quantity, conditions)
    return book.quantity(owner, name, quantity)


def _sky_of_clouds(
    book: DrawBook, owner: str, name: str, sky: Quantity, conditions: Conditions
) -> FloatArray:
    """Draw the sky with the frame's own air, humidity and clouds, and what else it may be off."""
    air, humidity = conditions.air_temperature, conditions.relative_humidity
    cover = conditions.cloud_cover
    if air is None or humidity is None or cover is None:
        return book.quantity(owner, name, sky)
    drawn = book.quantity(owner, "air_temperature", air)
    damp = np.clip(book.quantity(owner, "relative_humidity", humidity), 0.01, 1.0)
    clouds = book.quantity(owner, "cloud_cover", cover)
    shared = sky_temperature(drawn, dew_point(drawn, damp), clouds)
    own = math.sqrt(max(sky.u**2 - float(np.var(shared)), 0.0))
    return np.clip(shared + own * book.normal(owner, name), sky.lower, drawn + 10.0)


def _sky_view(book: DrawBook, owner: str, conditions: Conditions) -> FloatArray:
    view = conditions.sky_view_factor or Quantity(0.5, 0.1, lower=0.0, upper=1.0)
    return book.quantity(owner, "sky_view_factor", view)
