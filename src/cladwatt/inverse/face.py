"""From recorded values of the seen face to draws of its temperature and loss.

A recorded value enters only as the radiance at the lens. So each draw's physics is worked out on
a few nodes of that one variable, for each band of angle, and every station reads it off through
one interpolation matrix that all draws share: thousands of draws cost about as much as one image.
"""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import may_condense, outer_flux, vapour_of
from cladwatt.measure.face_bands import FaceBands
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.physics.lagged_pipe import SurfaceExchange
from cladwatt.physics.radiometry import object_radiance
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "COLDEST",
    "FaceDraws",
    "dry_and_wet_readings",
    "face_draws",
    "surface_temperature_draws",
]

NODES = (17, 81)
NODE_SPACING = 2.5
"""Fewest and most nodes, and what lies between two where the strip asks for more. [K]"""
COLDEST = 150.0
"""What a surface counts as for its heat flux where a draw leaves it less radiance than that, or
none: colder than any pipe, so that such draws stay recognisable and in step along the strip. [K]"""


@dataclass(frozen=True)
class FaceDraws:
    """Draws of the seen face, each (count, n_stations), mean over its angle."""

    surface_temperature: FloatArray
    """[K]"""
    heat_flux: FloatArray | None
    """[W/m2], finite wherever a station carries a number; None without wind."""


def face_draws(
    face: FaceBands, frame: FrameDraws, line: LineDraws, diameter: FloatArray
) -> FaceDraws:
    """Return draws of temperature and heat flux along a strip.

    Parameters
    ----------
    face : FaceBands
        Every station either complete or NaN in all bands.
    frame : FrameDraws
    line : LineDraws
    diameter : (count,) array
        Over the cladding, for the convection law. [m]

    Returns
    -------
    FaceDraws
        Temperatures are NaN where a draw's emissivity and reflected radiance leave no positive
        radiance.

    Notes
    -----
    The convection law is applied at the local temperature of each band of angle.
    """
    nodes = _nodes(face.temperature)
    temperature = surface_temperature_draws(nodes, face.view_angle, frame, line)
    flux = None
    if frame.wind_speed is not None:
        exchange = _beside(line.exchange(frame, diameter))
        vapour = vapour_of(frame, line)
        beside = None if vapour is None else vapour.beside()
        flux = outer_flux(np.fmax(temperature, COLDEST), exchange, beside)
    shares = face.extent / face.extent.sum()
    weights = np.concatenate(
        [
            share * _interpolation_matrix(nodes, row)
            for share, row in zip(shares, face.temperature, strict=True)
        ]
    )
    return FaceDraws(
        _read_off(temperature.reshape(frame.count, -1), weights),
        None if flux is None else _read_off(flux.reshape(frame.count, -1), weights),
    )


def _read_off(values: FloatArray, weights: FloatArray) -> FloatArray:
    """Interpolate; NaN only at stations that lean on a NaN node, not along the whole strip."""
    missing = np.isnan(values)
    if not missing.any():
        return np.asarray(values @ weights)
    read = np.where(missing, 0.0, values) @ weights
    leaning = missing.astype(float) @ (np.nan_to_num(weights) != 0).astype(float)
    return np.where(leaning > 0, np.nan, read)


def surface_temperature_draws(
    lens_temperature: FloatArray, view_angle: FloatArray, frame: FrameDraws, line: LineDraws
) -> FloatArray:
    """Return surface temperatures for values at the lens, (count, n_bands, n_values). [K]

    Parameters
    ----------
    lens_temperature : (n_values,) array
        Blackbody-equivalent temperature at the lens. [K]
    view_angle : (n_bands,) array
        [rad]
    frame : FrameDraws
    line : LineDraws
    """
    dew = frame.dew_point
    if dew is None or not may_condense(frame, line):
        return _seen_through(lens_temperature, view_angle, frame, line, line.band_emissivity)
    dry, wet = dry_and_wet_readings(lens_temperature, view_angle, frame, line)
    below = dew[:, None, None]
    # on bright cladding a film shows less radiance than the dry metal would mirror: NaN if dry
    return np.asarray(np.where(~(dry >= below) & (wet < below), wet, dry))


def dry_and_wet_readings(
    lens_temperature: FloatArray, view_angle: FloatArray, frame: FrameDraws, line: LineDraws
) -> tuple[FloatArray, FloatArray]:
    """Return what values at the lens read as cladding and as a film of water on it. [K]

    Parameters
    ----------
    lens_temperature, view_angle, frame, line
        As for `surface_temperature_draws`.

    Returns
    -------
    dry, wet : (count, n_bands, n_values) array
        Below the dew point the surface shows the film, whatever is under it.
    """
    dry = _seen_through(lens_temperature, view_angle, frame, line, line.band_emissivity)
    film = np.maximum(line.band_emissivity, frame.water.band_emissivity)
    wet = _seen_through(lens_temperature, view_angle, frame, replace(line, is_metal=False), film)
    return dry, wet


def _seen_through(
    lens_temperature: FloatArray,
    view_angle: FloatArray,
    frame: FrameDraws,
    line: LineDraws,
    emissivity: FloatArray,
) -> FloatArray:
    """Take the radiance at the lens apart for one near-normal emissivity per draw."""
    band = frame.band
    true_lens = lens_temperature + frame.calibration_offset(lens_temperature)
    towards_camera = directional_emissivity(emissivity[:, None], view_angle, line.is_metal)
    air_radiance = band.radiance(frame.air_temperature)[:, None, None]
    surface = object_radiance(
        band.radiance(true_lens)[:, None, :],
        emissivity=towards_camera[:, :, None],
        reflected_radiance=band.radiance(frame.reflected_temperature)[:, None, None],
        transmission=frame.transmission[:, None, None],
        atmosphere_radiance=air_radiance,
        window_transmission=frame.window_transmission[:, None, None],
        window_reflectance=frame.window_reflectance[:, None, None],
        window_radiance=band.radiance(frame.window_temperature)[:, None, None],
        window_reflected_radiance=air_radiance,
    )
    return band.temperature(surface)


def _beside(exchange: SurfaceExchange) -> SurfaceExchange:
    """Return the exchange with its draws along the first of three axes."""

    def column(values: FloatLike) -> FloatArray:
        return np.reshape(values, (-1, 1, 1))

    humidity = exchange.relative_humidity
    return replace(
        exchange,
        relative_humidity=None if humidity is None else column(humidity),
        air_temperature=column(exchange.air_temperature),
        surroundings_temperature=column(exchange.surroundings_temperature),
        wind_speed=column(exchange.wind_speed),
        wind_angle_deg=column(exchange.wind_angle_deg),
        diameter=column(exchange.diameter),
        total_emissivity=column(exchange.total_emissivity),
        pressure=column(exchange.pressure),
        convection_factor=column(exchange.convection_factor),
        absorbed_solar=column(exchange.absorbed_solar),
    )


def _nodes(values: FloatArray) -> FloatArray:
    low, high = np.nanmin(values), np.nanmax(values)
    margin = 0.02 * (high - low) + 0.05
    count = int(np.clip(np.ceil((high - low) / NODE_SPACING), *NODES))
    return np.linspace(low - margin, high + margin, count)


def _interpolation_matrix(nodes: FloatArray, values: FloatArray) -> FloatArray:
    """Return weights W with ``f(values) ~ f(nodes) @ W``: cubic Lagrange on uniform nodes.

    NaN values get NaN columns.
    """
    step = nodes[1] - nodes[0]
    position = (values - nodes[0]) / step
    usable = np.isfinite(position)
    first = np.clip(np.floor(np.where(usable, position, 1)).astype(int) - 1, 0, nodes.size - 4)
    x = np.where(usable, position, np.nan) - first
    weights = np.zeros((nodes.size, values.size))
    columns = np.arange(values.size)
    weights[first, columns] = -(x - 1) * (x - 2) * (x - 3) / 6
    weights[first + 1, columns] = x * (x - 2) * (x - 3) / 2
    weights[first + 2, columns] = -x * (x - 1) * (x - 3) / 2
    weights[first + 3, columns] = x * (x - 1) * (x - 2) / 6
    return weights
