"""Draws of what water on a surface does: its emissivities, where it covers, what rain leaves."""

from collections.abc import Mapping
from dataclasses import dataclass

from cladwatt.inverse.draws import DrawBook
from cladwatt.quantities import Quantity
from cladwatt.types import FloatArray

__all__ = ["FILM_SPAN", "WaterDraws", "draw_water"]

FILM_SPAN = Quantity(0.5, 0.8 / 12**0.5, shape="rectangular", source="assumption, no source")
"""How far below the dew point a surface is wet all over: 0.1 to 0.9 K, from the first drops to a
film that has run together. [K]"""


@dataclass(frozen=True)
class WaterDraws:
    """What all surfaces of a run share of water, each (count,)."""

    band_emissivity: FloatArray
    """Of a film, in the band."""
    total_emissivity: FloatArray
    """Of a film or rime, total."""
    span: FloatArray
    """How far below the dew point a surface is wet all over. [K]"""
    rain_film: FloatArray
    """What rain leaves on a surface when the rest has run off. [m]"""


def draw_water(book: DrawBook, owner: str, defaults: Mapping[str, Quantity]) -> WaterDraws:
    """Draw what water does; what rain leaves belongs to the frame, the rest to the run.

    Parameters
    ----------
    book : DrawBook
    owner : str
        Of the frame.
    defaults : mapping of str to Quantity
    """
    return WaterDraws(
        band_emissivity=book.quantity(
            "model", "water_film_emissivity", defaults["water_film_emissivity"]
        ),
        total_emissivity=book.quantity(
            "model", "water_film_total_emissivity", defaults["water_film_total_emissivity"]
        ),
        span=book.quantity("model", "water_film_span", FILM_SPAN),
        rain_film=book.quantity(owner, "rain_film_thickness", defaults["rain_film_thickness"]),
    )
