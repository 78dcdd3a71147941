"""Wind at an angle to an inclined run: flow past it and flow along it, put together as vectors.

The estimator weighs horizontal and vertical correlations and mixes by powers; here the buoyant
stream is a velocity of its own, added to the wind.
"""

import numpy as np

from cladwatt.physics.air import air_properties
from cladwatt.physics.constants import GRAVITY
from cladwatt.physics.convection import (
    nusselt_churchill_bernstein,
    nusselt_churchill_chu_horizontal,
    rayleigh_number,
)
from cladwatt.physics.yawed_wind import yaw_factor_morgan
from cladwatt.types import FloatArray

__all__ = ["slanted_coefficient"]

_REYNOLDS = np.geomspace(0.5, 1e6, 400)


def slanted_coefficient(
    surface_temperature: FloatArray,
    diameter: FloatArray,
    *,
    air_temperature: float,
    wind_speed: float,
    wind_angle_deg: float,
    wind_uphill: int,
    inclination_deg: float,
) -> FloatArray:
    """Return the convection coefficient of an inclined cylinder in a wind that blows up or down it.

    Parameters
    ----------
    surface_temperature, diameter : array
        [K], [m]
    air_temperature, wind_speed : float
        [K], [m/s]
    wind_angle_deg : float
        Between wind and axis.
    wind_uphill : int
        1 where the part along the axis blows up the run, -1 down it.
    inclination_deg : float
        Of the axis.

    Returns
    -------
    array
        [W/(m2 K)]

    Notes
    -----
    Free convection of an inclined cylinder is that of a horizontal one with the part of gravity
    across its axis (Oosthuizen, ASME paper 76-WA/HT-41, 1976). It counts as a stream that would
    cool as well, straight up (down from a cold pipe), added to the wind as a vector (after Hatton,
    James and Swire, J. Fluid Mechanics 42 (1970) 17-31). A stream at an angle cools by Morgan's
    factor (Advances in Heat Transfer 11 (1975) 199-264).
    """
    film = air_properties((surface_temperature + air_temperature) / 2)
    slope = np.radians(inclination_deg)
    free = nusselt_churchill_chu_horizontal(
        rayleigh_number(
            surface_temperature - air_temperature, length=diameter, expansion=film.expansion,
            kinematic_viscosity=film.kinematic_viscosity, prandtl=film.prandtl,
            gravity=GRAVITY * np.cos(slope),
        ),
        film.prandtl,
    )  # fmt: skip
    prandtl = float(np.mean(film.prandtl))
    curve = np.log(nusselt_churchill_bernstein(_REYNOLDS, prandtl))
    # so fast that, straight up past the slanting pipe, it cools as free convection does
    straight = free / yaw_factor_morgan(90.0 - inclination_deg)
    buoyant = np.exp(np.interp(np.log(straight), curve, np.log(_REYNOLDS)))
    buoyant = buoyant * np.sign(surface_temperature - air_temperature)
    wind = wind_speed * diameter / film.kinematic_viscosity
    angle = np.radians(wind_angle_deg)
    # axes: along the run uphill, across it upwards, across it level
    along = wind * np.cos(angle) * wind_uphill + buoyant * np.sin(slope)
    upwards = buoyant * np.cos(slope)
    level = wind * np.sin(angle)
    across = np.hypot(upwards, level)
    speed = np.hypot(along, across)
    yaw = yaw_factor_morgan(np.degrees(np.arctan2(across, np.abs(along))))
    nusselt = yaw * np.exp(np.interp(np.log(speed), np.log(_REYNOLDS), curve))
    result: FloatArray = nusselt * film.conductivity / diameter
    return result
