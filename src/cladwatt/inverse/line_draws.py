"""Draws of what a line declares: cladding, inside temperature, lagging, dimensions.

Their errors belong to the line, and are the same wherever the line is seen; what a region
overrides belongs to the region.
"""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.draws import DrawBook, quantity_draws
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.lagged_pipe import LaggingLayer, SurfaceExchange
from cladwatt.quantities import Quantity
from cladwatt.survey.model import Line
from cladwatt.survey.region import Region
from cladwatt.types import FloatArray

__all__ = ["LineDraws", "draw_line", "layer_draws"]

EMISSIVITY_CORRELATION = 0.7
"""Between the errors of band and total emissivity of one cladding (assumption): dirt and
weather raise both."""


@dataclass(frozen=True)
class LineDraws:
    """Draws that every region of a line shares, each (count,); None where unknown."""

    band_emissivity: FloatArray
    total_emissivity: FloatArray
    solar_absorptance: FloatArray
    is_metal: bool
    inside_temperature: FloatArray | None
    pipe_diameter: FloatArray | None
    lagged_diameter: FloatArray | None
    layers: tuple[LaggingLayer, ...] | None
    """As specified, without installation factor; None where a thickness or conductivity is
    unknown."""
    installation_factor: FloatArray
    film_coefficient: FloatArray | None
    """Between fluid and wall, on the pipe's outside; None where neglected. [W/(m2 K)]"""
    supports_allowance: FloatArray
    """Share of the sound loss that supports add to it."""
    inclination_deg: float
    condition_factors: tuple[FloatArray, ...] = ()
    """Conductivity of each layer as declared found, wet or frozen, over dry; empty where dry."""

    def exchange(self, frame: FrameDraws, diameter: FloatArray) -> SurfaceExchange:
        """Return the surface's conditions, each (count,); wind must be known."""
        if frame.wind_speed is None:
            raise ValueError("wind speed is unknown; no heat balance")
        still = np.zeros_like(frame.wind_speed)
        return SurfaceExchange(
            air_temperature=frame.air_temperature,
            surroundings_temperature=frame.surroundings_temperature,
            # a rule for still air knows no draught
            wind_speed=still if frame.convection_model == "iso12241_indoor" else frame.wind_speed,
            diameter=diameter,
            total_emissivity=self.total_emissivity,
            pressure=frame.pressure,
            relative_humidity=frame.relative_humidity,
            inclination_deg=self.inclination_deg,
            convection_factor=frame.convection_factor,
            convection_model=frame.convection_model,
            wind_angle_deg=frame.wind_angle_deg,
            wind_uphill=frame.wind_uphill,
            # the beam meets the projected width, a share 1/pi of the circumference
            absorbed_solar=self.solar_absorptance * frame.irradiance / math.pi,
        )


def draw_line(book: DrawBook, line: Line, region: Region | None = None) -> LineDraws:
    """Draw what the regions of one line share; a region's own overrides are its own draws.

    Parameters
    ----------
    book : DrawBook
    line : Line
    region : Region, optional
        Whose emissivity, outside diameter, lagging or inclination override the line's.

    Returns
    -------
    LineDraws
    """
    owner = f"line:{line.tag}"
    cladding = line.cladding
    band_quantity, total_quantity = cladding.band_emissivity, cladding.total_emissivity
    band_owner = total_owner = owner
    if region is not None and region.band_emissivity is not None:
        band_quantity, band_owner = region.band_emissivity, f"region:{region.id}"
    if region is not None and region.total_emissivity is not None:
        total_quantity, total_owner = region.total_emissivity, f"region:{region.id}"
    pipe = (
        None
        if line.pipe_outside_diameter is None
        else book.quantity(owner, "pipe_outside_diameter", line.pipe_outside_diameter)
    )
    layers = layer_draws(book, line, region)
    return LineDraws(
        band_emissivity=book.quantity(band_owner, "band_emissivity", band_quantity),
        total_emissivity=_total_emissivity(book, band_owner, total_owner, total_quantity),
        solar_absorptance=book.quantity(owner, "solar_absorptance", cladding.solar_absorptance),
        is_metal=cladding.is_metal,
        inside_temperature=(
            None
            if line.inside_temperature is None
            else book.quantity(owner, "inside_temperature", line.inside_temperature)
        ),
        pipe_diameter=pipe,
        lagged_diameter=_lagged_diameter(book, line, region, pipe, layers),
        layers=layers,
        installation_factor=book.quantity(owner, "installation_factor", line.installation_factor),
        film_coefficient=(
            None
            if line.inside_film is None or line.inside_is == "wall"
            else book.quantity(owner, "inside_film", line.inside_film)
        ),
        supports_allowance=book.quantity(owner, "supports_allowance", line.supports_allowance),
        inclination_deg=_inclination(line, region),
        condition_factors=_condition_factors(book, line),
    )


def _condition_factors(book: DrawBook, line: Line) -> tuple[FloatArray, ...]:
    """Draw what wet or frozen layers conduct over dry; empty where none is declared so."""
    if all(layer.condition_factor is None for layer in line.layers):
        return ()
    return tuple(
        np.ones(book.count)
        if layer.condition_factor is None
        else book.quantity(f"line:{line.tag}", f"condition_factor_{number}", layer.condition_factor)
        for number, layer in enumerate(line.layers, start=1)
    )


def _inclination(line: Line, region: Region | None) -> float:
    """Return the angle of the axis from the horizontal: a riser's own, else the line's. [deg]"""
    if region is None or region.inclination_deg is None:
        return line.inclination_deg
    return region.inclination_deg


def _total_emissivity(
    book: DrawBook, band_owner: str, owner: str, quantity: Quantity
) -> FloatArray:
    """Draw the total emissivity, its error going partly with the band emissivity's."""
    own = math.sqrt(1 - EMISSIVITY_CORRELATION**2)
    normal = EMISSIVITY_CORRELATION * book.normal(
        band_owner, "band_emissivity"
    ) + own * book.normal(owner, "total_emissivity")
    return quantity_draws(quantity, lambda: normal, book.count)


def layer_draws(
    book: DrawBook, line: Line, region: Region | None = None
) -> tuple[LaggingLayer, ...] | None:
    """Draw the lagging as specified, from the inside out; None where a part is unknown."""
    owner = f"line:{line.tag}"
    drawn: list[LaggingLayer] = []
    for number, layer in enumerate(line.layers, start=1):
        thickness = layer.thickness
        if region is not None and region.lagging_thickness is not None and len(line.layers) == 1:
            thickness = region.lagging_thickness
        if thickness is None or layer.conductivity is None:
            return None
        drawn.append(
            LaggingLayer(
                conductivity=ConductivityIntegral(
                    np.asarray(layer.conductivity.temperature),
                    np.asarray(layer.conductivity.conductivity),
                ),
                thickness=book.quantity(owner, f"thickness_{number}", thickness),
                factor=book.quantity(
                    owner, f"conductivity_factor_{number}", layer.conductivity_factor
                ),
            )
        )
    return tuple(drawn) or None


def _lagged_diameter(
    book: DrawBook,
    line: Line,
    region: Region | None,
    pipe: FloatArray | None,
    layers: tuple[LaggingLayer, ...] | None,
) -> FloatArray | None:
    """Draw the diameter over the cladding."""
    if region is not None and region.outside_diameter is not None:
        return book.quantity(f"region:{region.id}", "outside_diameter", region.outside_diameter)
    if pipe is None:
        return None
    thicknesses = [layer.thickness for layer in line.layers]
    if region is not None and region.lagging_thickness is not None and len(line.layers) == 1:
        thicknesses = [region.lagging_thickness]
    total = pipe + 2 * line.cladding.thickness.value
    for number, thickness in enumerate(thicknesses, start=1):
        if thickness is None:
            return None
        drawn = (
            layers[number - 1].thickness
            if layers is not None
            else book.quantity(f"line:{line.tag}", f"thickness_{number}", thickness)
        )
        total = total + 2 * np.asarray(drawn)
    return total
