"""Draws of what a frame and a line declare, each with the scope its error has.

Scopes (who shares a draw): the camera's calibration belongs to the survey for two thirds of its
variance and to the frame for the rest; air, reflected and radiative temperature, wind, humidity
and air path to the frame; emissivities, inside temperature, conductivity, dimensions and
installation factor to the line; the convection law to the whole run for two thirds of its
variance and to the frame for the rest. The shares are an assumption: maker's statements and
correlations say nothing of how their error divides.
"""

import math
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.physics.atmosphere import air_path_transmission, air_path_transmission_uncertainty
from cladwatt.physics.band import Band
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from cladwatt.physics.lagged_pipe import LaggingLayer, SurfaceExchange
from cladwatt.physics.radiation import combined_surroundings
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera, Conditions, Line, Site
from cladwatt.survey.region import Region
from cladwatt.types import FloatArray

__all__ = ["FrameDraws", "LineDraws", "draw_frame", "draw_line", "layer_draws", "mirrored"]

SHARED_SHARE = 2 / 3
"""Share of variance of calibration and convection law common to the survey (assumption)."""
CONVECTION_SIGMA_STILL = 0.12
CONVECTION_SIGMA_WIND = 0.17
"""Relative standard uncertainty of the convection law: published correlations differ by 10-20 %
in still air and 19 % across flow."""
AIR_AS_SOURCE = "as the air"
SURROUNDINGS_AS_SOURCE = "as the declared surroundings"
"""Sources of a default temperature that follows another: its draws are the other's plus its
own."""
EMISSIVITY_CORRELATION = 0.7
"""Between the errors of band and total emissivity of one cladding (assumption): dirt and
weather raise both."""


@dataclass(frozen=True)
class FrameDraws:
    """Draws that every region of a frame shares, each (count,)."""

    band: Band
    accuracy: AccuracyStatement
    calibration: FloatArray
    """Calibration error as a share of the accuracy limit."""
    air_temperature: FloatArray
    surroundings_temperature: FloatArray
    reflected_temperature: FloatArray
    transmission: FloatArray
    wind_speed: FloatArray | None
    """None where unknown: nothing of the heat balance can be said."""
    pressure: FloatArray
    convection_factor: FloatArray
    irradiance: FloatArray
    window_transmission: FloatArray
    window_reflectance: FloatArray
    window_temperature: FloatArray

    @property
    def count(self) -> int:
        """Number of draws."""
        return self.air_temperature.size

    def calibration_offset(self, temperature: FloatArray) -> FloatArray:
        """Return the calibration error at these temperatures. [K]

        Parameters
        ----------
        temperature : (n,) array
            Blackbody-equivalent temperature at the lens. [K]

        Returns
        -------
        (count, n) array
            What to add to a recorded value to undo the error. [K]
        """
        limit = np.maximum(
            self.accuracy.limit,
            self.accuracy.percent / 100 * np.abs(temperature - ZERO_CELSIUS),
        )
        return np.asarray(self.calibration[:, None] * limit)


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
    inclination_deg: float

    def exchange(self, frame: FrameDraws, diameter: FloatArray) -> SurfaceExchange:
        """Return the surface's conditions, each (count,); wind must be known."""
        if frame.wind_speed is None:
            raise ValueError("wind speed is unknown; no heat balance")
        return SurfaceExchange(
            air_temperature=frame.air_temperature,
            surroundings_temperature=frame.surroundings_temperature,
            wind_speed=frame.wind_speed,
            diameter=diameter,
            total_emissivity=self.total_emissivity,
            pressure=frame.pressure,
            inclination_deg=self.inclination_deg,
            convection_factor=frame.convection_factor,
            # the beam meets the projected width, a share 1/pi of the circumference
            absorbed_solar=self.solar_absorptance * frame.irradiance / math.pi,
        )


def draw_frame(
    book: DrawBook,
    frame_id: str,
    conditions: Conditions,
    camera: Camera,
    site: Site,
    distance: float | None = None,
) -> FrameDraws | None:
    """Draw what the regions of one frame share.

    Parameters
    ----------
    book : DrawBook
    frame_id : str
    conditions : Conditions
    camera : Camera
    site : Site
    distance : float, optional
        Camera to pipe as the image shows it, where none is declared. [m]

    Returns
    -------
    FrameDraws or None
        None where the air temperature is unknown.
    """
    if conditions.air_temperature is None:
        return None
    owner = f"frame:{frame_id}"
    air = book.quantity(owner, "air_temperature", conditions.air_temperature)
    band = Band.rectangular(*camera.band)
    wind = (
        None
        if conditions.wind_speed is None
        else book.quantity(owner, "wind_speed", conditions.wind_speed)
    )
    surroundings = _surroundings(book, owner, conditions, air)
    still = np.zeros(book.count)
    window = conditions.window
    return FrameDraws(
        band=band,
        accuracy=camera.accuracy,
        calibration=_calibration(book, owner, camera.accuracy),
        air_temperature=air,
        surroundings_temperature=surroundings,
        reflected_temperature=_reflected(book, owner, conditions, air, surroundings, band),
        transmission=_transmission(book, owner, conditions, camera, distance),
        wind_speed=wind,
        pressure=(
            np.full(book.count, STANDARD_PRESSURE)
            if site.pressure is None
            else book.quantity("site", "pressure", site.pressure)
        ),
        convection_factor=_convection_factor(book, owner, conditions),
        irradiance=(
            still
            if conditions.solar_irradiance is None
            else book.quantity(owner, "solar_irradiance", conditions.solar_irradiance)
        ),
        window_transmission=(
            still + 1
            if window is None
            else book.quantity("camera", "window_transmission", window.transmission)
        ),
        window_reflectance=(
            still
            if window is None
            else book.quantity("camera", "window_reflectance", window.reflectance)
        ),
        window_temperature=(
            air
            if window is None or window.temperature is None
            else book.quantity(owner, "window_temperature", window.temperature)
        ),
    )


def _calibration(book: DrawBook, owner: str, accuracy: AccuracyStatement) -> FloatArray:
    """Return the calibration error as a share of the limit."""
    from scipy.special import ndtr

    normal = book.mixed("calibration", ("camera", SHARED_SHARE), (owner, 1 - SHARED_SHARE))
    if accuracy.coverage_factor is None:
        return np.asarray(2 * ndtr(normal) - 1)
    return normal / accuracy.coverage_factor


def _follow(
    book: DrawBook, owner: str, name: str, quantity: Quantity, air: FloatArray
) -> FloatArray:
    """Draw a temperature; a default that follows the air takes the air's draws along."""
    if quantity.source.startswith(AIR_AS_SOURCE):
        return np.asarray(air + quantity.u * book.normal(owner, name))
    return book.quantity(owner, name, quantity)


def _surroundings(
    book: DrawBook, owner: str, conditions: Conditions, air: FloatArray
) -> FloatArray:
    if conditions.surroundings_temperature is not None:
        return _follow(
            book, owner, "surroundings_temperature", conditions.surroundings_temperature, air
        )
    if conditions.sky_total_temperature is None:
        return air
    sky = book.quantity(owner, "sky_total_temperature", conditions.sky_total_temperature)
    view = _sky_view(book, owner, conditions)
    return combined_surroundings((sky, air), (view, 1 - view))


def _reflected(
    book: DrawBook,
    owner: str,
    conditions: Conditions,
    air: FloatArray,
    surroundings: FloatArray,
    band: Band,
) -> FloatArray:
    reflected = conditions.reflected_temperature
    if reflected is not None and reflected.source.startswith(SURROUNDINGS_AS_SOURCE):
        declared = conditions.surroundings_temperature
        own = (
            reflected.u if declared is None else math.sqrt(max(reflected.u**2 - declared.u**2, 0.0))
        )
        return np.asarray(surroundings + own * book.normal(owner, "reflected_temperature"))
    if reflected is not None:
        return _follow(book, owner, "reflected_temperature", reflected, air)
    if conditions.sky_band_temperature is None:
        return air
    sky = book.quantity(owner, "sky_band_temperature", conditions.sky_band_temperature)
    view = _sky_view(book, owner, conditions)
    return band.temperature(view * band.radiance(sky) + (1 - view) * band.radiance(air))


def _sky_view(book: DrawBook, owner: str, conditions: Conditions) -> FloatArray:
    view = conditions.sky_view_factor or Quantity(0.5, 0.1, lower=0.0, upper=1.0)
    return book.quantity(owner, "sky_view_factor", view)


def _transmission(
    book: DrawBook,
    owner: str,
    conditions: Conditions,
    camera: Camera,
    distance: float | None,
) -> FloatArray:
    """Draw the transmission of the air path: declared, or from humidity and distance."""
    if conditions.atmosphere_transmission is not None:
        return book.quantity(owner, "transmission", conditions.atmosphere_transmission)
    declared = conditions.distance or Quantity(
        distance or 5.0, 0.15 * distance if distance else 4.0, lower=0.3, upper=149.0
    )
    humidity = conditions.relative_humidity or Quantity(0.5, 0.2, lower=0.0, upper=1.0)
    path = book.quantity(owner, "distance", declared)
    assert conditions.air_temperature is not None
    transmission = air_path_transmission(
        path,
        air_temperature=conditions.air_temperature.value,
        relative_humidity=book.quantity(owner, "relative_humidity", humidity),
        band_limits=camera.band,
    )
    u = air_path_transmission_uncertainty(transmission)
    return np.clip(transmission + u * book.normal(owner, "transmission"), 0.05, 1.0)


def _convection_factor(book: DrawBook, owner: str, conditions: Conditions) -> FloatArray:
    """Draw the factor by which the convection law is off here, log-normal about 1."""
    speed = 0.0 if conditions.wind_speed is None else conditions.wind_speed.value
    share = speed / (speed + 0.5)
    sigma = CONVECTION_SIGMA_STILL + share * (CONVECTION_SIGMA_WIND - CONVECTION_SIGMA_STILL)
    normal = book.mixed("convection", ("model", SHARED_SHARE), (owner, 1 - SHARED_SHARE))
    return np.asarray(np.exp(sigma * normal))


def mirrored(
    frame: FrameDraws, book: DrawBook, region_id: str, *, is_metal: bool, indoors: bool
) -> FrameDraws:
    """Return the frame's draws with what this one region mirrors.

    The reflected apparent temperature is a mean over the half space. A region mirrors its own
    part of the scene: metal a direction or two (1 K off indoors, 5 K outdoors), a dielectric
    coat, which reflects diffusely, less (0.3 and 1.5 K). Assumptions, no source.
    """
    sigma = (1.0 if is_metal else 0.3) if indoors else (5.0 if is_metal else 1.5)
    own = sigma * book.normal(f"region:{region_id}", "mirrored_scene")
    return replace(frame, reflected_temperature=frame.reflected_temperature + own)


def draw_line(book: DrawBook, line: Line, region: Region | None = None) -> LineDraws:
    """Draw what the regions of one line share; a region's own overrides are its own draws.

    Parameters
    ----------
    book : DrawBook
    line : Line
    region : Region, optional
        Whose emissivity, outside diameter or lagging override the line's.

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
        inclination_deg=line.inclination_deg,
    )


def _total_emissivity(
    book: DrawBook, band_owner: str, owner: str, quantity: Quantity
) -> FloatArray:
    """Draw the total emissivity, its error going partly with the band emissivity's."""
    from cladwatt.inverse.draws import quantity_draws

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
    drawn = []
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
