"""What a pipe's surface gives off: air, surroundings, sun on one side, water on it."""

from dataclasses import dataclass

import numpy as np

from cladwatt.physics.air import air_properties
from cladwatt.physics.constants import GRAVITY, STANDARD_PRESSURE, ZERO_CELSIUS
from cladwatt.physics.convection import (
    convection_coefficient,
    mixed_nusselt,
    nusselt_morgan,
    nusselt_zukauskas,
    rayleigh_number,
)
from cladwatt.physics.humidity import (
    dew_point,
    frost_point,
    saturation_pressure_ice,
    saturation_pressure_water,
)
from cladwatt.physics.radiation import radiative_flux
from cladwatt.synthetic.columns import ColumnModel, SurfaceFlux
from cladwatt.synthetic.geometry import PipeAxis
from cladwatt.synthetic.slanted import slanted_coefficient
from cladwatt.synthetic.truth import ConvectionLaw, FrameTruth, LineTruth
from cladwatt.types import FloatArray

__all__ = ["WATER_EMISSIVITY", "Weather", "absorbed_sun", "surface_flux", "water_share"]

WATER_EMISSIVITY = 0.96
"""Of a film of water, in the band and in total; handbooks give 0.95 to 0.97."""
_FILM_SPAN = 0.4
"""Over which a surface about the dew point turns wet. [K]"""
_VAPOUR_GAS = 461.5
"""Gas constant of water vapour. [J/(kg K)]"""
_LEWIS = 0.865
"""Thermal diffusivity of air over the diffusivity of vapour in it, room temperature."""
_LATENT = (2.501e6, 2.37e3)
"""Heat of evaporation at 0 °C and its fall with temperature. [J/kg], [J/(kg K)]"""
_FUSION = 3.34e5
"""Heat of melting, given off besides where vapour becomes frost. [J/kg]"""
_DIFFUSE_SHARE = 0.2
"""Of the sun's heat, from sky and ground rather than from the sun's side."""


@dataclass(frozen=True)
class Weather:
    """What one pipe meets, column by column.

    Parameters
    ----------
    sun : (n_x, n_phi) array or None
        What is absorbed. [W/m2]
    rain : (n_x, n_phi) array or None
        Share of the surface that rain has left wet.
    """

    sun: FloatArray | None = None
    rain: FloatArray | None = None


def absorbed_sun(
    axis: PipeAxis, shape: tuple[int, int], frame: FrameTruth, absorptance: float
) -> FloatArray | None:
    """Return what the sun leaves in each column, None where it does not shine. [W/m2]

    The irradiance on the projected area is a share of 1 / pi of the circumference on average.
    """
    if not frame.sun:
        return None
    n_x, n_phi = shape
    towards = np.array(frame.sun) / np.linalg.norm(frame.sun)
    angle = (np.arange(n_phi) + 0.5) * 2 * np.pi / n_phi
    share = np.empty(shape)
    for i, station in enumerate((np.arange(n_x) + 0.5) * axis.length / n_x):
        leg = axis.leg_of(float(station))
        zero = axis.zeros[leg]
        side = np.cross(axis.directions[leg], zero)
        normal = np.cos(angle)[:, None] * zero + np.sin(angle)[:, None] * side
        direct = np.clip(normal @ towards, 0.0, None)
        share[i] = (1 - _DIFFUSE_SHARE) * direct / direct.mean()
        # the sky lights the upper half more than the ground does the lower
        share[i] += _DIFFUSE_SHARE * (1 - 0.5 * normal[:, 1])
    absorbed: FloatArray = absorptance * frame.solar_irradiance / np.pi * share
    return absorbed


def _coefficient(
    law: ConvectionLaw, mean: FloatArray, diameter: FloatArray, frame: FrameTruth,
    inclination_deg: float,
) -> FloatArray:  # fmt: skip
    if law == "churchill" and frame.wind_angle_deg is not None:
        return slanted_coefficient(
            mean, diameter, air_temperature=frame.air_temperature, wind_speed=frame.wind_speed,
            wind_angle_deg=frame.wind_angle_deg, wind_uphill=frame.wind_uphill,
            inclination_deg=inclination_deg,
        )  # fmt: skip
    if law == "churchill":
        return convection_coefficient(
            mean, air_temperature=frame.air_temperature, diameter=diameter,
            wind_speed=frame.wind_speed, pressure=STANDARD_PRESSURE,
            inclination_deg=inclination_deg,
        )  # fmt: skip
    # horizontal correlations at every inclination: as wrong as another author's choice would be
    film = air_properties((mean + frame.air_temperature) / 2)
    free = nusselt_morgan(rayleigh_number(
        mean - frame.air_temperature, length=diameter, expansion=film.expansion,
        kinematic_viscosity=film.kinematic_viscosity, prandtl=film.prandtl, gravity=GRAVITY,
    ))  # fmt: skip
    stream = air_properties(frame.air_temperature)
    reynolds = np.maximum(frame.wind_speed * diameter / stream.kinematic_viscosity, 1.0)
    forced = nusselt_zukauskas(
        reynolds, stream.prandtl, prandtl_surface=air_properties(mean).prandtl
    )
    result: FloatArray = mixed_nusselt(forced, free) * film.conductivity / diameter
    return result


def water_share(
    temperature: FloatArray, frame: FrameTruth, rain: FloatArray | None = None
) -> FloatArray:
    """Return how much of a surface is under water: dew or frost, and what rain left."""
    air, humidity = frame.air_temperature, frame.relative_humidity
    dew = float(dew_point(air, humidity))
    point: FloatArray | float = dew
    if dew < ZERO_CELSIUS:
        # just below the freezing point of water the frost point of the same vapour lies above it
        frost = float(np.fmax(frost_point(air, humidity), dew))
        point = np.where(temperature < ZERO_CELSIUS, frost, dew)
    share: FloatArray = np.clip((point - temperature) / _FILM_SPAN + 0.5, 0.0, 1.0)
    return share if rain is None else np.maximum(share, rain)


def _latent_flux(
    temperature: FloatArray, coefficient: FloatArray, frame: FrameTruth, rain: FloatArray | None
) -> FloatArray:
    """Return what water takes with it: negative where it condenses, positive where it dries."""
    air = air_properties(frame.air_temperature)
    in_air = frame.relative_humidity * float(saturation_pressure_water(frame.air_temperature))
    # what drives is the share of vapour: both sides at one temperature, between the two
    film = (temperature + frame.air_temperature) / 2
    frozen = temperature < ZERO_CELSIUS
    at_surface = np.where(
        frozen, saturation_pressure_ice(np.minimum(temperature, ZERO_CELSIUS)),
        saturation_pressure_water(temperature),
    )  # fmt: skip
    density = (at_surface - in_air) / (_VAPOUR_GAS * film)
    transfer = coefficient / (air.density * air.specific_heat * _LEWIS ** (2 / 3))
    latent = _LATENT[0] - _LATENT[1] * (temperature - ZERO_CELSIUS) + _FUSION * frozen
    heat = transfer * density * latent
    result: FloatArray = np.minimum(heat, 0.0)
    return result if rain is None else result + rain * np.maximum(heat, 0.0)


def surface_flux(
    model: ColumnModel, line: LineTruth, frame: FrameTruth, inclination_deg: float,
    weather: Weather,
) -> SurfaceFlux:  # fmt: skip
    """Return the surface balance of a pipe.

    Parameters
    ----------
    model : ColumnModel
        The pipe.
    line : LineTruth
        What is true of its line.
    frame : FrameTruth
        The conditions.
    inclination_deg : float
        Of its axis.
    weather : Weather
        Sun and rain on it.

    Returns
    -------
    callable
        Flux leaving the surface for a surface temperature, (n_x, n_phi) each. [K] -> [W/m2]
    """
    n_phi = model.exposed.shape[1]
    angle = (np.arange(n_phi) + 0.5) * 2 * np.pi / n_phi
    amplitude = frame.unevenness * np.cos(np.radians(inclination_deg))
    uneven = 1 + amplitude * np.cos(angle - frame.unevenness_angle)
    dry_emissivity = np.where(model.exposed, line.bare_emissivity, line.total_emissivity)
    # one coefficient for a ring of the pipe: the correlation is a mean around it
    share = model.surface_area / model.surface_area.sum(axis=1, keepdims=True)
    diameter = 2 * (share * model.surface_radius).sum(axis=1, keepdims=True)
    may_be_wet = weather.rain is not None or float(np.min(model.inside)) < frame.air_temperature

    def flux(temperature: FloatArray) -> FloatArray:
        mean = (share * temperature).sum(axis=1, keepdims=True)
        coefficient = frame.convection_factor * uneven * _coefficient(
            frame.convection_law, mean, diameter, frame, inclination_deg
        )  # fmt: skip
        emissivity = dry_emissivity
        if may_be_wet:
            water = water_share(temperature, frame, weather.rain)
            emissivity = dry_emissivity + water * (WATER_EMISSIVITY - dry_emissivity)
        radiation = radiative_flux(
            temperature, emissivity=emissivity,
            surroundings_temperature=frame.surroundings_temperature,
        )  # fmt: skip
        result: FloatArray = coefficient * (temperature - frame.air_temperature) + radiation
        if may_be_wet:
            result = result + _latent_flux(temperature, coefficient, frame, weather.rain)
        return result if weather.sun is None else result - weather.sun

    return flux
