"""What a surface gives off to air, surroundings and sun, per area."""

from dataclasses import dataclass
from math import pi
from typing import NamedTuple

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.constants import STANDARD_PRESSURE
from cladwatt.physics.convection import (
    CONVECTION_MODELS,
    ConvectionModel,
    check_inclination,
    convection_coefficient,
    outside_validity,
)
from cladwatt.physics.radiation import radiative_coefficient, radiative_flux
from cladwatt.physics.yawed_wind import check_wind_angle
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "ConvectionModel",
    "SurfaceExchange",
    "SurfaceFluxes",
    "bare_pipe_loss",
    "surface_coefficients",
    "surface_fluxes",
    "surface_heat_flux",
    "surface_outside_validity",
]


@dataclass(frozen=True)
class SurfaceExchange:
    """What a pipe's surface exchanges heat with; every field a float or a broadcastable array.

    Parameters
    ----------
    air_temperature : float or array
        [K]
    surroundings_temperature : float or array
        Radiative, see `radiation.combined_surroundings`. [K]
    wind_speed : float or array
        At the pipe. [m/s]
    diameter : float or array
        Of the surface: over the cladding, or of the bare pipe. [m]
    total_emissivity : float or array
        Total hemispherical. [-]
    pressure : float or array
        Absolute. [Pa]
    inclination_deg : float or array
        Of the axis against the horizontal, 0 to 90. [deg]
    convection_factor : float or array
        Multiplies the convection coefficient: the uncertainty of the correlation. [-]
    absorbed_solar : float or array
        Absorbed on average over the circumference. [W/m2]
    convection_model : str
        One of `convection.CONVECTION_MODELS`. The simplified rule for still air indoors,
        ``iso12241_indoor``, steps at its branch limit and leaves pressure and humidity out.
    wind_angle_deg : float or array
        Between wind and axis, 0 (along) to 90 (across). [deg]
    wind_uphill : float or array
        1 where the wind along an inclined run blows up the run, -1 down, 0 not known. [-]
    relative_humidity : float or array, optional
        Of the air, 0 to 1; dry where left out. [-]

    Raises
    ------
    InputError
        If a temperature, the diameter, the pressure or the convection factor is not above 0, the
        emissivity or the humidity outside 0 to 1, the wind negative, the inclination or the wind's
        angle outside 0 to 90, the model unknown, or the indoor rule asked for with wind. NaN
        passes, and comes out as NaN.
    """

    air_temperature: FloatLike
    surroundings_temperature: FloatLike
    wind_speed: FloatLike
    diameter: FloatLike
    total_emissivity: FloatLike
    pressure: FloatLike = STANDARD_PRESSURE
    inclination_deg: FloatLike = 0.0
    convection_factor: FloatLike = 1.0
    absorbed_solar: FloatLike = 0.0
    convection_model: ConvectionModel = "churchill"
    wind_angle_deg: FloatLike = 90.0
    wind_uphill: FloatLike = 0.0
    relative_humidity: FloatLike | None = None

    def __post_init__(self) -> None:
        for name in ("air_temperature", "surroundings_temperature"):
            _check_above_zero(name, getattr(self, name), "K")
        _check_above_zero("diameter", self.diameter, "m")
        _check_above_zero("pressure", self.pressure, "Pa")
        _check_above_zero("convection_factor", self.convection_factor, "-")
        check_inclination(self.inclination_deg)
        if np.any(np.asarray(self.wind_speed) < 0):
            raise InputError(f"wind_speed is {np.min(self.wind_speed)} m/s; expected 0 or more")
        check_wind_angle(self.wind_angle_deg)
        _check_share("total_emissivity", self.total_emissivity)
        if self.relative_humidity is not None:
            _check_share("relative_humidity", self.relative_humidity)
        if self.convection_model not in CONVECTION_MODELS:
            raise InputError(
                f"convection_model is {self.convection_model!r}; expected one of"
                f" {', '.join(CONVECTION_MODELS)}"
            )
        if self.convection_model == "iso12241_indoor" and np.any(self.wind_speed):
            raise InputError(
                f"wind_speed is {np.max(self.wind_speed)} m/s; the indoor rule of ISO 12241 "
                "holds for still air, expected 0"
            )


class SurfaceFluxes(NamedTuple):
    """Parts of the surface balance, per area.

    Parameters
    ----------
    convection : array
        Given to the air. [W/m2]
    radiation : array
        Given to the surroundings. [W/m2]
    absorbed_solar : array
        Taken from the sun. [W/m2]
    """

    convection: FloatArray
    radiation: FloatArray
    absorbed_solar: FloatArray

    @property
    def total(self) -> FloatArray:
        """Convection plus radiation minus sun. [W/m2]."""
        return self.convection + self.radiation - self.absorbed_solar


def surface_heat_flux(surface_temperature: FloatLike, exchange: SurfaceExchange) -> FloatArray:
    """Net flux a surface gives off; negative where it gains.

    Parameters
    ----------
    surface_temperature : float or array
        Broadcast against the fields of `exchange`. [K]
    exchange : SurfaceExchange

    Returns
    -------
    array
        f h (Ts - Tair) + eps sigma (Ts^4 - Tsur^4) - absorbed sun; NaN for NaN. [W/m2]

    Notes
    -----
    Surface temperature and exchange are means around the pipe.
    """
    return surface_fluxes(surface_temperature, exchange).total


def surface_fluxes(surface_temperature: FloatLike, exchange: SurfaceExchange) -> SurfaceFluxes:
    """Convection, radiation and sun apart.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    exchange : SurfaceExchange

    Returns
    -------
    SurfaceFluxes
    """
    surface = np.asarray(surface_temperature, dtype=np.float64)
    coefficient = _convection(surface, exchange)
    return SurfaceFluxes(
        coefficient * (surface - exchange.air_temperature),
        radiative_flux(
            surface,
            emissivity=exchange.total_emissivity,
            surroundings_temperature=exchange.surroundings_temperature,
        ),
        np.asarray(exchange.absorbed_solar, dtype=np.float64),
    )


def surface_coefficients(
    surface_temperature: FloatLike, exchange: SurfaceExchange
) -> tuple[FloatArray, FloatArray]:
    """Coefficients of convection (to the air) and of radiation (to the surroundings).

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    exchange : SurfaceExchange

    Returns
    -------
    tuple of two arrays
        Convection with its factor, radiation. [W/(m2 K)]
    """
    surface = np.asarray(surface_temperature, dtype=np.float64)
    radiation = radiative_coefficient(
        surface,
        emissivity=exchange.total_emissivity,
        surroundings_temperature=exchange.surroundings_temperature,
    )
    return _convection(surface, exchange), radiation


def bare_pipe_loss(pipe_temperature: FloatLike, exchange: SurfaceExchange) -> FloatArray:
    """Loss of a bare pipe whose surface is at a known temperature.

    Parameters
    ----------
    pipe_temperature : float or array
        Of the outer surface. [K]
    exchange : SurfaceExchange
        With the diameter and emissivity of the pipe, not of the cladding.

    Returns
    -------
    array
        [W/m]
    """
    return np.asarray(pi * surface_heat_flux(pipe_temperature, exchange) * exchange.diameter)


def surface_outside_validity(
    surface_temperature: FloatLike, exchange: SurfaceExchange
) -> BoolArray:
    """Where the correlations of convection are used beyond what they are stated for.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    exchange : SurfaceExchange

    Returns
    -------
    array of bool
        See `convection.outside_validity`.
    """
    return outside_validity(
        surface_temperature,
        air_temperature=exchange.air_temperature,
        diameter=exchange.diameter,
        wind_speed=exchange.wind_speed,
        pressure=exchange.pressure,
        inclination_deg=exchange.inclination_deg,
        wind_angle_deg=exchange.wind_angle_deg,
        relative_humidity=exchange.relative_humidity,
        model=exchange.convection_model,
    )


def _convection(surface: FloatArray, exchange: SurfaceExchange) -> FloatArray:
    coefficient = convection_coefficient(
        surface,
        air_temperature=exchange.air_temperature,
        diameter=exchange.diameter,
        wind_speed=exchange.wind_speed,
        pressure=exchange.pressure,
        inclination_deg=exchange.inclination_deg,
        wind_angle_deg=exchange.wind_angle_deg,
        wind_uphill=exchange.wind_uphill,
        relative_humidity=exchange.relative_humidity,
        model=exchange.convection_model,
    )
    return coefficient * exchange.convection_factor


def _check_share(name: str, value: FloatLike) -> None:
    share = np.asarray(value)
    if np.any((share < 0) | (share > 1)):
        raise InputError(f"{name} is {np.min(share)} to {np.max(share)}; expected 0 to 1")


def _check_above_zero(name: str, value: FloatLike, unit: str) -> None:
    if np.any(np.asarray(value) <= 0):
        raise InputError(f"{name} is {np.min(value)} {unit}; expected above 0")
