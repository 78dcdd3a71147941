"""Draws of what a frame declares, each with the scope its error has.

Scopes (who shares a draw): the camera's calibration belongs to the survey for half of its
variance and to the frame for the rest; air, reflected and radiative temperature, wind, humidity
and air path to the frame; the convection law to the whole run for two thirds of its variance and
to the frame for the rest; what a region mirrors to the region. The shares are an assumption:
makers' statements and correlations say nothing of how their error divides.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from scipy.special import ndtr

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.surroundings_draws import (
    Pieces,
    draw_pieces,
    mirrored_apart,
    reflected_draws,
    surroundings_draws,
)
from cladwatt.inverse.water_draws import WaterDraws, draw_water
from cladwatt.materials.load import shipped_tables
from cladwatt.physics.atmosphere import air_path_transmission, air_path_transmission_uncertainty
from cladwatt.physics.band import Band
from cladwatt.physics.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from cladwatt.physics.convection import ConvectionModel
from cladwatt.physics.convection_spread import correlation_spread
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.surface_balance import SurfaceExchange
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera, Conditions, Site, Window
from cladwatt.types import FloatArray

__all__ = ["FrameDraws", "band_of", "draw_frame", "mirrored"]

SHARED_CALIBRATION, SHARED_CONVECTION = 0.5, 2 / 3
"""Share of variance of calibration and convection law common to the survey (assumption)."""
SPREAD_AT_RISE, SPREAD_AT_DIAMETER = 10.0, 0.2
"""Rise over the air [K] and diameter [m] for which the spread of published correlations stands
until a region puts its own in their place, see `law_spread`."""
MIRRORED_INDOORS, MIRRORED_INDOORS_METAL = 0.3, 1.0
MIRRORED_OUTDOORS, MIRRORED_OUTDOORS_METAL = 1.5, 5.0
"""Standard uncertainty of what one region mirrors about the mean over the half space: metal a
direction or two, a dielectric coat, which reflects diffusely, less; assumption. [K]"""


def band_of(camera: Camera) -> Band:
    """Return the camera's band: its spectral response where one is declared, else its two ends."""
    if camera.response is None:
        return Band.rectangular(*camera.band)
    wavelength, response = camera.response
    return Band.from_response(np.asarray(wavelength), np.asarray(response))


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
    wind_angle_deg: FloatArray
    """Between wind and pipe axis; 90 is across."""
    convection_model: ConvectionModel
    convection_factor: FloatArray
    law_sigma: float
    """Standard deviation of its logarithm, see `law_spread` for a region's own."""
    irradiance: FloatArray
    relative_humidity: FloatArray | None
    """None where unknown."""
    water: WaterDraws
    """What condenses on a line below the dew point, and what rain leaves."""
    window_transmission: FloatArray
    window_reflectance: FloatArray
    window_temperature: FloatArray
    wind_uphill: float = 0.0
    """1 where the wind along an inclined run blows up it, -1 down it, 0 not known."""
    pieces: Pieces | None = None
    """Of the surroundings, where they are declared so."""
    mirrors_pieces: bool = False
    """Whether the reflected temperature follows from them; a declared one goes before."""

    @cached_property
    def dew_point(self) -> FloatArray | None:
        """Dew point of the air, (count,); None where no humidity is known. [K]"""
        if self.relative_humidity is None:
            return None
        return dew_point(self.air_temperature, np.clip(self.relative_humidity, 0.01, 1.0))

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


def draw_frame(
    book: DrawBook,
    frame_id: str,
    conditions: Conditions,
    camera: Camera,
    site: Site,
    distance: float | None = None,
    defaults: Mapping[str, Quantity] | None = None,
    convection_model: ConvectionModel = "churchill",
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
    defaults : mapping of str to Quantity, optional
        Distance where the image shows none either, what water does; the shipped table's where
        not given.
    convection_model : str
        By name, see `physics.convection`.

    Returns
    -------
    FrameDraws or None
        None where the air temperature is unknown.
    """
    if conditions.air_temperature is None:
        return None
    owner = f"frame:{frame_id}"
    defaults = defaults or shipped_tables().defaults
    air = book.quantity(owner, "air_temperature", conditions.air_temperature)
    band = band_of(camera)
    wind = (
        None
        if conditions.wind_speed is None
        else book.quantity(owner, "wind_speed", conditions.wind_speed)
    )
    pieces = draw_pieces(book, owner, conditions, air)
    law_sigma = _law_sigma(conditions)
    surroundings = surroundings_draws(book, owner, conditions, air, pieces)
    still = np.zeros(book.count)
    window = conditions.window
    return FrameDraws(
        band=band,
        accuracy=camera.accuracy,
        calibration=_calibration(book, owner, camera.accuracy),
        air_temperature=air,
        surroundings_temperature=surroundings,
        reflected_temperature=reflected_draws(
            book, owner, conditions, air, surroundings, pieces, band
        ),
        pieces=pieces,
        mirrors_pieces=pieces is not None and conditions.reflected_temperature is None,
        transmission=_transmission(book, owner, conditions, camera, distance, defaults["distance"]),
        wind_speed=wind,
        pressure=(
            np.full(book.count, STANDARD_PRESSURE)
            if site.pressure is None
            else book.quantity("site", "pressure", site.pressure)
        ),
        wind_angle_deg=(
            still + 90.0
            if conditions.wind_angle_deg is None
            else book.quantity(owner, "wind_angle", conditions.wind_angle_deg)
        ),
        wind_uphill=float(conditions.wind_uphill),
        convection_model=convection_model,
        convection_factor=_convection_factor(book, owner, law_sigma),
        law_sigma=law_sigma,
        irradiance=(
            still
            if conditions.solar_irradiance is None
            else book.quantity(owner, "solar_irradiance", conditions.solar_irradiance)
        ),
        relative_humidity=(
            None
            if conditions.relative_humidity is None
            else book.quantity(owner, "relative_humidity", conditions.relative_humidity)
        ),
        water=draw_water(book, owner, defaults),
        window_transmission=(
            still + 1
            if window is None
            else book.quantity("camera", "window_transmission", window.transmission)
        ),
        window_reflectance=(still if window is None else _window_reflectance(book, window)),
        window_temperature=(
            air
            if window is None or window.temperature is None
            else book.quantity(owner, "window_temperature", window.temperature)
        ),
    )


def _window_reflectance(book: DrawBook, window: Window) -> FloatArray:
    """Draw what the window reflects, never more than it leaves of what it transmits."""
    reflected = book.quantity("camera", "window_reflectance", window.reflectance)
    transmitted = book.quantity("camera", "window_transmission", window.transmission)
    return np.asarray(np.minimum(reflected, 1 - transmitted))


def _calibration(book: DrawBook, owner: str, accuracy: AccuracyStatement) -> FloatArray:
    """Return the calibration error as a share of the limit."""
    normal = book.mixed(
        "calibration", ("camera", SHARED_CALIBRATION), (owner, 1 - SHARED_CALIBRATION)
    )
    if accuracy.coverage_factor is None:
        return np.asarray(2 * ndtr(normal) - 1)
    return normal / accuracy.coverage_factor


def _transmission(
    book: DrawBook,
    owner: str,
    conditions: Conditions,
    camera: Camera,
    distance: float | None,
    default_distance: Quantity,
) -> FloatArray:
    """Draw the transmission of the air path: declared, or from humidity and distance."""
    if conditions.atmosphere_transmission is not None:
        return book.quantity(owner, "transmission", conditions.atmosphere_transmission)
    declared = conditions.distance
    if declared is None:
        declared = default_distance
    if conditions.distance is None and distance is not None:
        declared = Quantity(distance, 0.15 * distance, lower=0.3, upper=149.0)
    humidity = conditions.relative_humidity or Quantity(0.5, 0.2, lower=0.0, upper=1.0)
    path = book.quantity(owner, "distance", declared)
    assert conditions.air_temperature is not None
    transmission = air_path_transmission(
        path,
        air_temperature=conditions.air_temperature.value,
        relative_humidity=book.quantity(owner, "relative_humidity", humidity),
        band_limits=band_of(camera).limits,
    )
    u = air_path_transmission_uncertainty(transmission)
    return np.clip(transmission + u * book.normal(owner, "transmission"), 0.05, 1.0)


def _law_sigma(conditions: Conditions) -> float:
    """Return the spread of published correlations in the declared air and wind."""
    assert conditions.air_temperature is not None
    air = conditions.air_temperature.value
    exchange = SurfaceExchange(
        air_temperature=air,
        surroundings_temperature=air,
        wind_speed=0.0 if conditions.wind_speed is None else conditions.wind_speed.value,
        diameter=SPREAD_AT_DIAMETER,
        total_emissivity=0.9,
    )
    return float(correlation_spread(air + SPREAD_AT_RISE, exchange))


def _convection_factor(book: DrawBook, owner: str, sigma: float) -> FloatArray:
    """Draw the factor by which the convection law is off here, log-normal about 1."""
    normal = book.mixed("convection", ("model", SHARED_CONVECTION), (owner, 1 - SHARED_CONVECTION))
    return np.asarray(np.exp(sigma * normal))


def mirrored(
    frame: FrameDraws, book: DrawBook, region_id: str, *, is_metal: bool, indoors: bool
) -> FrameDraws:
    """Return the frame's draws with what this one region mirrors.

    Parameters
    ----------
    frame : FrameDraws
    book : DrawBook
    region_id : str
    is_metal, indoors : bool

    Returns
    -------
    FrameDraws
        The reflected temperature moved by the region's own draw and, where it follows from
        surroundings in pieces, by what the region mirrors of them against their mean.
    """
    if indoors:
        sigma = MIRRORED_INDOORS_METAL if is_metal else MIRRORED_INDOORS
    else:
        sigma = MIRRORED_OUTDOORS_METAL if is_metal else MIRRORED_OUTDOORS
    own = sigma * book.normal(f"region:{region_id}", "mirrored_scene")
    if frame.pieces is not None and frame.mirrors_pieces:
        own = own + mirrored_apart(frame.pieces, frame.band, book, region_id, is_metal=is_metal)
    return replace(frame, reflected_temperature=frame.reflected_temperature + own)
