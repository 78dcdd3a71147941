"""An infrared window between camera and pipe, as it really is."""

from dataclasses import dataclass

import numpy as np

from cladwatt.physics.band import Band
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.synthetic.plant import PlantFrame
from cladwatt.types import FloatArray

__all__ = ["TrueWindow", "draw_window"]

_BEFORE = (3.0, 1.5)
"""How much colder what the window mirrors, on the camera's side, is than the air behind it: mean
and standard deviation. [K]"""


@dataclass(frozen=True)
class TrueWindow:
    """A window that transmits, mirrors and emits.

    Parameters
    ----------
    transmission, reflectance : float
    temperature : float
        [K]
    mirrored : float
        Temperature of what it mirrors on the camera's side. [K]
    """

    transmission: float
    reflectance: float
    temperature: float
    mirrored: float

    def seen_through(self, radiance: FloatArray, band: Band) -> FloatArray:
        """Return the radiance at the lens for that behind the window. [W/(m2 sr)]"""
        own = 1 - self.transmission - self.reflectance
        result: FloatArray = self.transmission * radiance
        result = result + self.reflectance * float(band.radiance(self.mirrored))
        return result + own * float(band.radiance(self.temperature))


def draw_window(frame: PlantFrame, air: float, random: np.random.Generator) -> TrueWindow | None:
    """Draw the window of a frame; None where there is none."""
    known = frame.conditions
    if "window_transmission" not in known:
        return None
    transmission, reflectance, celsius = (
        known[key].value + known[key].u * float(random.standard_normal())
        for key in ("window_transmission", "window_reflectance", "window_temperature_C")
    )
    mean, spread = _BEFORE
    mirrored = air - mean + spread * float(random.standard_normal())
    transmission = float(np.clip(transmission, 0.05, 1.0))
    reflectance = float(np.clip(reflectance, 0.0, 1 - transmission))
    return TrueWindow(transmission, reflectance, ZERO_CELSIUS + celsius, mirrored)
