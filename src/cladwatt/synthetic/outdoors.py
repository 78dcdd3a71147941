"""What pipes exchange radiation with where it is declared by sky, cloud or piece by piece."""

import numpy as np

from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.humidity import dew_point
from cladwatt.synthetic.plant import Declared, PlantFrame
from cladwatt.synthetic.response import true_band

__all__ = ["draw_reflected", "draw_surroundings"]

_CLEAR_SKY = (0.711, 0.56, 0.73)
"""Emissivity of a clear sky: 0.711 + 0.56 x + 0.73 x^2 with x a hundredth of the dew point in °C
(Berdahl and Martin, Solar Energy 32 (1984) 663)."""
_CLEAR_SKY_SPREAD = 0.03
_CLOUD_SHARE = (0.6, 0.95)
"""Of the rest of a black sky that a closed cover gives back: high, thin clouds to low ones."""
_GROUND = Declared(0.5, 1.5)
"""Ground and buildings over the air. [K]"""


def _normal(declared: Declared, random: np.random.Generator) -> float:
    return float(declared.value + declared.u * random.standard_normal())


def _share(declared: Declared, random: np.random.Generator) -> float:
    return float(np.clip(_normal(declared, random), 0.0, 1.0))


def _sky_total(
    frame: PlantFrame, air: float, humidity: float, random: np.random.Generator
) -> float:
    known = frame.conditions
    if "sky_total_temperature_C" in known:
        return ZERO_CELSIUS + _normal(known["sky_total_temperature_C"], random)
    x = (float(dew_point(air, humidity)) - ZERO_CELSIUS) / 100
    clear = _CLEAR_SKY[0] + _CLEAR_SKY[1] * x + _CLEAR_SKY[2] * x * x
    clear += _CLEAR_SKY_SPREAD * random.standard_normal()
    cloud = _share(known["cloud_cover"], random) * random.uniform(*_CLOUD_SHARE)
    return float((clear + (1 - clear) * cloud) ** 0.25 * air)


def draw_surroundings(
    frame: PlantFrame, air: float, humidity: float, random: np.random.Generator
) -> float | None:
    """Return the temperature of uniform surroundings that give the same; None where it is declared.

    Parameters
    ----------
    frame : PlantFrame
        What is declared.
    air : float
        Really. [K]
    humidity : float
        Really.
    random : numpy.random.Generator
        Source of randomness.

    Returns
    -------
    float or None
        [K]
    """
    if frame.pieces:
        shares = np.array([piece.view_factor for piece in frame.pieces])
        shares = np.clip(shares * (1 + 0.1 * random.standard_normal(shares.size)), 0.0, None)
        kelvin = [ZERO_CELSIUS + _normal(piece.temperature_C, random) for piece in frame.pieces]
        return float((shares @ np.array(kelvin) ** 4 / shares.sum()) ** 0.25)
    if "surroundings_temperature_C" in frame.conditions:
        return None
    sky = _sky_total(frame, air, humidity, random)
    view = _share(frame.conditions["sky_view_factor"], random)
    ground = air + _normal(_GROUND, random)
    return float((view * sky**4 + (1 - view) * ground**4) ** 0.25)


def draw_reflected(frame: PlantFrame, air: float, random: np.random.Generator) -> float | None:
    """Return the reflected temperature from the sky in the band; None where it is declared. [K]"""
    known = frame.conditions
    if "reflected_temperature_C" in known:
        return None
    band = true_band()
    sky = float(band.radiance(ZERO_CELSIUS + _normal(known["sky_band_temperature_C"], random)))
    ground = float(band.radiance(air + _normal(_GROUND, random)))
    view = _share(known["sky_view_factor"], random)
    return float(band.temperature(view * sky + (1 - view) * ground))
