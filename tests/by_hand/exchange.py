"""What a pipe's surface gives off: humid air, convection, radiation, condensing vapour."""

import math
from dataclasses import dataclass

import psychrolib
from CoolProp.CoolProp import PropsSI
from ht.conv_external import Nu_cylinder_Churchill_Bernstein
from ht.conv_free_immersed import (
    Nu_horizontal_cylinder_Churchill_Chu,
    Nu_vertical_plate_Churchill,
)
from scipy.constants import R as GAS
from scipy.constants import g, sigma

WATER, AIR = 0.018015268, 0.02896546
"""Molar masses. [kg/mol]"""


def saturation(temperature: float) -> float:
    """Pressure of saturated vapour by psychrolib, after ASHRAE. [Pa]"""
    psychrolib.SetUnitSystem(psychrolib.SI)
    return float(psychrolib.GetSatVapPres(temperature - 273.15))


@dataclass(frozen=True)
class HumidAir:
    """Properties of humid air. [SI]"""

    viscosity: float
    conductivity: float
    capacity: float
    density: float


def humid_air(temperature: float, pressure: float, share: float) -> HumidAir:
    """Mix dry air and vapour, both by CoolProp, with Wilke's rule (Wilke 1950)."""
    temperature = max(
        temperature, 273.17
    )  # vapour's triple point; colder only on the way to a root
    part = {"Air": (1 - share, AIR), "Water": (share, WATER)}
    single = {
        name: [
            PropsSI(what, "T", temperature, "P", pressure if name == "Air" else 100.0, name)
            for what in ("V", "L", "C")
        ]
        for name in part
    }

    def mixed(which: int) -> float:
        total = 0.0
        for one, (share_one, mass_one) in part.items():
            below = 0.0
            for other, (share_other, mass_other) in part.items():
                ratio = single[one][0] / single[other][0]
                upper = (1 + math.sqrt(ratio) * (mass_other / mass_one) ** 0.25) ** 2
                below += share_other * upper / math.sqrt(8 * (1 + mass_one / mass_other))
            total += share_one * single[one][which] / below
        return total

    mass = (1 - share) * AIR + share * WATER
    capacity = sum(p * m * single[name][2] for name, (p, m) in part.items()) / mass
    return HumidAir(mixed(0), mixed(1), capacity, pressure * mass / (GAS * temperature))


@dataclass(frozen=True)
class Place:
    """Where a pipe hangs. Temperatures in kelvin, angles in degrees, pressure in Pa."""

    air: float
    surroundings: float
    wind: float
    diameter: float
    emissivity: float
    humidity: float
    pressure: float = 101325.0
    inclination: float = 0.0
    wind_angle: float = 90.0
    sun: float = 0.0
    condenses: bool = False
    height: float = 2.0

    @property
    def dew_point(self) -> float:
        """[K]"""
        air_C = self.air - 273.15
        return float(psychrolib.GetTDewPointFromRelHum(air_C, self.humidity)) + 273.15

    def coefficient(self, surface: float) -> float:
        """Film coefficient of mixed convection, flows not opposed. [W/(m2 K)]"""
        film = (surface + self.air) / 2
        share = self.humidity * saturation(self.air) / self.pressure
        air = humid_air(film, self.pressure, share)
        nu, prandtl = air.viscosity / air.density, air.capacity * air.viscosity / air.conductivity
        angle = math.radians(self.wind_angle)
        across = self.wind * math.sqrt(math.sin(angle) ** 2 + 0.13**2 * math.cos(angle) ** 2)

        def grashof(length: float) -> float:
            return g * abs(surface - self.air) / film * length**3 / nu**2

        by_diameter = air.conductivity / self.diameter
        forced = by_diameter * float(
            Nu_cylinder_Churchill_Bernstein(across * self.diameter / nu, prandtl)
        )
        level = by_diameter * float(
            Nu_horizontal_cylinder_Churchill_Chu(prandtl, grashof(self.diameter))
        )
        upright = air.conductivity / self.height * float(
            Nu_vertical_plate_Churchill(prandtl, grashof(self.height))
        )  # fmt: skip
        level = (forced**4 + level**4) ** 0.25
        upright = (forced**3 + upright**3) ** (1 / 3)
        tilt = math.sin(math.radians(self.inclination)) ** 2
        return (1 - tilt) * level + tilt * upright

    def flux(self, surface: float) -> float:
        """Heat given off. [W/m2]"""
        coefficient = self.coefficient(surface)
        emissivity = self.emissivity
        below = self.dew_point - surface
        if self.condenses and below > 0:
            film = max(0.96, emissivity)  # Incropera, table A.11: water 0.95 to 0.98
            emissivity += min(below / 0.5, 1.0) * (film - emissivity)
        flux = coefficient * (surface - self.air) - self.sun
        flux += emissivity * sigma * (surface**4 - self.surroundings**4)
        return flux + (self.latent(surface, coefficient) if self.condenses and below > 0 else 0.0)

    def latent(self, surface: float, coefficient: float) -> float:
        """Heat that condensing vapour brings, by humidity ratios (ASHRAE Fundamentals).

        Diffusivity of vapour by Incropera et al., table A.8 and section 14.1: 0.26e-4 m2/s at
        298 K, growing as T^1.5 / p.
        """

        def ratio(vapour: float) -> float:
            return 0.621945 * vapour / (self.pressure - vapour)

        film = (surface + self.air) / 2
        k, dry, density = (PropsSI(w, "T", film, "P", self.pressure, "Air") for w in "LCD")
        diffusivity = 0.26e-4 * (film / 298) ** 1.5 * 101325 / self.pressure
        lewis = k / (density * dry * diffusivity)
        heat = PropsSI("H", "T", surface, "Q", 1, "Water")
        heat -= PropsSI("H", "T", surface, "Q", 0, "Water")
        in_air = ratio(self.humidity * saturation(self.air))
        moist = dry + 1860.0 * in_air  # per kilogram of dry air
        rise = ratio(saturation(surface)) - in_air
        return coefficient / moist / lewis ** (2 / 3) * heat * rise
