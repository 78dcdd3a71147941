"""Physical constants, exact where the SI defines them so.

References
----------
BIPM, The International System of Units (SI Brochure), 9th edition, 2019: defining constants.
CODATA 2018 and 2022 recommended values for the quantities derived from them.
ISO 80000-5 and ISO 2533 for the ice-point offset and the standard atmosphere.
"""

from __future__ import annotations

from math import pi
from typing import Final

__all__ = [
    "AVOGADRO",
    "BOLTZMANN",
    "FIRST_RADIATION",
    "FIRST_RADIATION_RADIANCE",
    "GRAVITY",
    "LIGHT_SPEED",
    "MOLAR_GAS",
    "MOLAR_MASS_DRY_AIR",
    "MOLAR_MASS_WATER",
    "PLANCK",
    "SECOND_RADIATION",
    "STANDARD_PRESSURE",
    "STEFAN_BOLTZMANN",
    "ZERO_CELSIUS",
]

#: Planck constant h [J s], exact.
PLANCK: Final = 6.62607015e-34

#: Speed of light in vacuum c [m/s], exact.
LIGHT_SPEED: Final = 299_792_458.0

#: Boltzmann constant k [J/K], exact.
BOLTZMANN: Final = 1.380649e-23

#: Avogadro constant [1/mol], exact.
AVOGADRO: Final = 6.02214076e23

#: Molar gas constant [J/(mol K)], exact as the product of two exact constants.
MOLAR_GAS: Final = AVOGADRO * BOLTZMANN

#: Stefan-Boltzmann constant 2 pi^5 k^4 / (15 h^3 c^2) [W/(m2 K4)], exact.
STEFAN_BOLTZMANN: Final = 2.0 * pi**5 * BOLTZMANN**4 / (15.0 * PLANCK**3 * LIGHT_SPEED**2)

#: First radiation constant for spectral radiance, 2 h c^2 [W m2/sr], exact.
FIRST_RADIATION_RADIANCE: Final = 2.0 * PLANCK * LIGHT_SPEED**2

#: First radiation constant for spectral exitance, 2 pi h c^2 [W m2], exact.
FIRST_RADIATION: Final = pi * FIRST_RADIATION_RADIANCE

#: Second radiation constant h c / k [m K], exact.
SECOND_RADIATION: Final = PLANCK * LIGHT_SPEED / BOLTZMANN

#: Standard acceleration of free fall [m/s2], conventional.
GRAVITY: Final = 9.80665

#: Celsius zero on the kelvin scale [K], exact.
ZERO_CELSIUS: Final = 273.15

#: Standard atmosphere [Pa], conventional.
STANDARD_PRESSURE: Final = 101_325.0

#: Molar mass of dry air [kg/mol] (ISO 2533).
MOLAR_MASS_DRY_AIR: Final = 28.964420e-3

#: Molar mass of water [kg/mol] (IAPWS-95).
MOLAR_MASS_WATER: Final = 18.015268e-3
