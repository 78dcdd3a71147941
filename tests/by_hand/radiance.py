"""From a recorded temperature to the surface's, by quadrature and root finding."""

import csv
import math
from collections.abc import Callable
from functools import lru_cache
from pathlib import Path

from scipy.constants import c, h, k
from scipy.integrate import quad
from scipy.optimize import brentq

TABLE = Path(__file__).parents[1] / "published" / "atmosphere_transmittance_lwir.csv"
BAND_UM = (7.5, 14.0)


@lru_cache(maxsize=100_000)
def radiance(temperature: float) -> float:
    """Integrate Planck's law over 7.5 to 14 µm. [W/(m2 sr)]"""

    def planck(wave: float) -> float:
        return 2 * h * c**2 / wave**5 / math.expm1(h * c / (wave * k * temperature))

    return float(quad(planck, *(1e-6 * end for end in BAND_UM), epsrel=1e-10)[0])


def temperature_of(value: float) -> float:
    """Return the black body's temperature that has this radiance. [K]"""
    return float(brentq(lambda t: radiance(t) - value, 150.0, 1200.0, xtol=1e-9))


def tabled_transmission(air_C: float, humidity_percent: float, path_m: float) -> float:
    """Return a row of the published table of short humid paths, no fit between."""
    with TABLE.open(encoding="utf-8", newline="") as file:
        for row in csv.DictReader(file):
            key = tuple(float(row[name]) for name in ("T_air_C", "RH_pct", "path_m"))
            if key == (air_C, humidity_percent, path_m):
                return float(row["tau_7.5_14um"])
    raise KeyError((air_C, humidity_percent, path_m))


def fresnel_coat(angle: float, index: float = 1.5) -> float:
    """Emissivity of a smooth dielectric at an angle over that along the normal (Modest, ch. 2)."""

    def emissivity(at: float) -> float:
        inner = math.asin(math.sin(at) / index)
        if at == 0:
            return 1 - ((index - 1) / (index + 1)) ** 2
        across = (math.sin(at - inner) / math.sin(at + inner)) ** 2
        along = (math.tan(at - inner) / math.tan(at + inner)) ** 2
        return 1 - (across + along) / 2

    return emissivity(abs(angle)) / emissivity(0.0)


def surface_temperature(
    recorded: float,
    *,
    camera_emissivity: float,
    camera_reflected: float,
    emissivity: float,
    reflected: float,
    transmission: float,
    air: float,
    angle: float = 0.0,
) -> float:
    """Undo what the camera had been told and take off mirror and air (ISO 18434-1). [K]"""
    lens = camera_emissivity * radiance(recorded)
    lens += (1 - camera_emissivity) * radiance(camera_reflected)
    towards = emissivity * fresnel_coat(angle)
    left = (lens - (1 - transmission) * radiance(air)) / transmission
    return temperature_of((left - (1 - towards) * radiance(reflected)) / towards)


def over_the_face(value_at: Callable[[float], float], half_angle_deg: float = 50.0) -> float:
    """Return the mean over the seen part of a face, equal angles weighing the same."""
    edge = math.radians(half_angle_deg)
    total, _ = quad(value_at, 0.0, edge, epsrel=1e-6, limit=20)
    return float(total / edge)
