"""Air with vapour in it, for convection: the vapour's share and the mixture's properties."""

from typing import Final

import numpy as np
from numpy.polynomial import Polynomial

from cladwatt.physics.air import AirProperties, air_properties
from cladwatt.physics.constants import MOLAR_GAS, MOLAR_MASS_WATER, STANDARD_PRESSURE
from cladwatt.physics.humidity import vapour_pressure
from cladwatt.types import FloatArray, FloatLike

__all__ = ["moist_air_properties", "vapour_mole_fraction"]

_MOLAR_MASS_DRY: Final = MOLAR_GAS / 287.05
_RATIO: Final = _MOLAR_MASS_DRY / MOLAR_MASS_WATER
# Wilke's constant parts for air seen from vapour and the other way round.
_AIR_VAPOUR: Final = 1.0 / np.sqrt(8.0 * (1.0 + _RATIO))
_VAPOUR_AIR: Final = 1.0 / np.sqrt(8.0 * (1.0 + 1.0 / _RATIO))


def vapour_mole_fraction(
    air_temperature: FloatLike,
    relative_humidity: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
) -> FloatArray:
    """Share of the molecules of the air that are water.

    Parameters
    ----------
    air_temperature : float or array
        233 K to 373 K. [K]
    relative_humidity : float or array
        Over liquid water, 0 to 1. [-]
    pressure : float or array
        Absolute, of air and vapour. [Pa]

    Returns
    -------
    array
        0 to 1; held at 1 where the vapour alone would exceed the pressure. [-]

    Notes
    -----
    Ideal gases; the enhancement of the saturation pressure by the air, 0.4 %, is left out.
    """
    return np.minimum(vapour_pressure(air_temperature, relative_humidity) / pressure, 1.0)


def moist_air_properties(
    temperature: FloatLike,
    pressure: FloatLike = STANDARD_PRESSURE,
    vapour_fraction: FloatLike = 0.0,
) -> AirProperties:
    """Properties of moist air near atmospheric pressure.

    Parameters
    ----------
    temperature : float or array
        For convection the film temperature, 230 K to 800 K. [K]
    pressure : float or array
        Absolute. [Pa]
    vapour_fraction : float or array
        Mole fraction of vapour, see `vapour_mole_fraction`. [-]

    Returns
    -------
    AirProperties
        Arrays of the broadcast shape; those of `air_properties` where the fraction is 0.

    Notes
    -----
    Density and heat capacity of ideal gases mixed by moles, the latter 0.15 % low in saturated air
    of 30 °C and 0.5 % at 50 °C. Viscosity by Wilke [1]_, conductivity by Wassiljewa's rule with
    the same factors [2]_; another rule gives up to 1.1 % more of these two in saturated air of
    30 °C, 2.3 % at 50 °C. Vapour at low pressure by IAPWS [3]_ [4]_ [5]_. Saturated air of 30 °C
    moves the coefficient of convection by about 1 %.

    References
    ----------
    .. [1] Wilke, *A viscosity equation for gas mixtures*, J. Chem. Phys. 18 (1950) 517-519.
    .. [2] Mason, Saxena, *Approximate formula for the thermal conductivity of gas mixtures*,
       Phys. Fluids 1 (1958) 361-369.
    .. [3] IAPWS R12-08, viscosity of ordinary water substance, eq. 11 (dilute gas).
    .. [4] IAPWS R15-11, thermal conductivity of ordinary water substance, eq. 16 (dilute gas).
    .. [5] IAPWS R6-95, ideal-gas part of the Helmholtz energy.
    """
    kelvin = np.asarray(temperature, dtype=np.float64)
    dry = air_properties(kelvin, pressure)
    vapour = np.asarray(vapour_fraction, dtype=np.float64)
    if not np.any(vapour):
        return dry
    air = 1.0 - vapour
    reduced = kelvin / 300.0
    own_viscosity = _polynomial(reduced, _VISCOSITY)
    root = np.sqrt(dry.dynamic_viscosity / own_viscosity)
    quarter = _RATIO**0.25
    air_by_vapour = _AIR_VAPOUR * (1.0 + root / quarter) ** 2
    vapour_by_air = _VAPOUR_AIR * (1.0 + quarter / root) ** 2
    of_air = air / (air + vapour * air_by_vapour)
    of_vapour = vapour / (vapour + air * vapour_by_air)
    viscosity = of_air * dry.dynamic_viscosity + of_vapour * own_viscosity
    conductivity = of_air * dry.conductivity + of_vapour * _polynomial(reduced, _CONDUCTIVITY)
    mass = air * _MOLAR_MASS_DRY + vapour * MOLAR_MASS_WATER
    specific_heat = (
        air * _MOLAR_MASS_DRY * dry.specific_heat
        + vapour * MOLAR_GAS * _polynomial(reduced, _HEAT_OVER_R)
    ) / mass
    density = dry.density * (mass / _MOLAR_MASS_DRY)
    return AirProperties(
        density=density,
        specific_heat=specific_heat,
        dynamic_viscosity=viscosity,
        kinematic_viscosity=viscosity / density,
        conductivity=conductivity,
        prandtl=specific_heat * viscosity / conductivity,
        expansion=dry.expansion,
    )


def _dilute_viscosity(kelvin: FloatArray) -> FloatArray:
    reduced = kelvin / 647.096
    factors = (1.67752, 2.20462, 0.6366564, -0.241605)
    total = sum(factor / reduced**power for power, factor in enumerate(factors))
    return np.asarray(1e-6 * 100.0 * np.sqrt(reduced) / total)


def _dilute_conductivity(kelvin: FloatArray) -> FloatArray:
    reduced = kelvin / 647.096
    factors = (2.443221e-3, 1.323095e-2, 6.770357e-3, -3.454586e-3, 4.096266e-4)
    total = sum(factor / reduced**power for power, factor in enumerate(factors))
    return np.asarray(1e-3 * np.sqrt(reduced) / total)


def _heat_capacity_over_gas_constant(kelvin: FloatArray) -> FloatArray:
    total = np.full_like(kelvin, 4.00632)
    for weight, theta in (
        (0.012436, 1.28728967), (0.97315, 3.53734222), (1.27950, 7.74073708),
        (0.96956, 9.24437796), (0.24873, 27.5075105),
    ):  # fmt: skip
        x = theta * 647.096 / kelvin
        total = total + weight * x * x * np.exp(-x) / (1.0 - np.exp(-x)) ** 2
    return total


# Polynomials in T/300 K in place of the formulas, to better than 0.1 %: they are evaluated on every
# draw.
_TEMPERATURE = np.linspace(230.0, 900.0, 135)


def _fitted(values: FloatArray) -> tuple[float, ...]:
    fitted = Polynomial.fit(_TEMPERATURE / 300.0, values, 7, w=1.0 / values).convert()
    return tuple(float(coefficient) for coefficient in fitted.coef)


_VISCOSITY = _fitted(_dilute_viscosity(_TEMPERATURE))
_CONDUCTIVITY = _fitted(_dilute_conductivity(_TEMPERATURE))
_HEAT_OVER_R = _fitted(_heat_capacity_over_gas_constant(_TEMPERATURE))


def _polynomial(x: FloatArray, coefficients: tuple[float, ...]) -> FloatArray:
    total = np.full_like(x, coefficients[-1])
    for coefficient in reversed(coefficients[:-1]):
        total = total * x + coefficient
    return total
