"""What is known of a region before anything is concluded."""

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.face import FaceDraws
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import Vapour, vapour_of
from cladwatt.measure.face_bands import FaceBands
from cladwatt.measure.noise import FrameNoise
from cladwatt.measure.strip import Strip
from cladwatt.physics.humidity import dew_point
from cladwatt.survey.model import Camera, Conditions, Line
from cladwatt.survey.region import Region
from cladwatt.types import BoolArray, FloatArray

__all__ = ["FrameImage", "Seen"]

COMPONENT_END_U = 0.02
"""Standard uncertainty of where a drawn component ends along the pipe; assumption. [m]"""


@dataclass(frozen=True)
class FrameImage:
    """A frame ready for its regions.

    Attributes
    ----------
    frame_id : str
    lens_temperature : (rows, cols) array
        Blackbody-equivalent temperature at the lens, camera settings undone, NaN where dead or
        clipped. [K]
    recorded_temperature : (rows, cols) array
        As recorded. [K]
    clipped : (rows, cols) array of bool
    noise : FrameNoise
    """

    frame_id: str
    lens_temperature: FloatArray
    recorded_temperature: FloatArray
    clipped: BoolArray
    noise: FrameNoise


@dataclass(frozen=True)
class Seen:
    """A region's strip, its face, and the draws that belong to it.

    Attributes
    ----------
    lens, recorded : (n_across, n_stations) array
        Along the strip, NaN where left out. [K]
    usable : (n_stations,) array of bool
        Stations that carry a number.
    component_at : (n_stations,) array of bool
        Stations under a drawn component: no pipe lagging, not counted in the length.
    bare_component : bool
        Whether one of them is bare, so that the lagging beside it ends in a cut.
    diameter : (count,) array
        Over the cladding; a rough guess for the convection law alone where `diameter_known` is
        False. [m]
    known_lengths : tuple of str
        Ids of the known lengths marked on this line.
    gain : bool
        Whether the line is colder than the air.
    body : (n_stations,) array or None
        Mean across at the lens with the components in it, NaN where left out otherwise. [K]
    """

    region: Region
    line: Line
    strip: Strip
    lens: FloatArray
    recorded: FloatArray
    face: FaceBands
    drawn: FaceDraws
    usable: BoolArray
    component_at: BoolArray
    diameter: FloatArray
    gain: bool
    frame: FrameDraws
    line_draws: LineDraws
    conditions: Conditions
    camera: Camera
    known_lengths: tuple[str, ...]
    image: FrameImage
    book: DrawBook
    body: FloatArray | None = None
    bare_component: bool = False

    @property
    def owner(self) -> str:
        """Key of draws that belong to this region alone."""
        return f"region:{self.region.id}"

    @property
    def diameter_known(self) -> bool:
        """Whether losses can be told per metre."""
        return self.line_draws.lagged_diameter is not None

    @property
    def sign(self) -> int:
        """1 where damage is warmer than sound, -1 on a line colder than the air."""
        return -1 if self.gain else 1

    @property
    def width(self) -> float:
        """Median width of the pipe. [px]"""
        return float(np.median(self.strip.width))

    @property
    def emissivity(self) -> float:
        """Median of the band emissivity, after references."""
        return float(np.median(self.line_draws.band_emissivity))

    def mean_along(self, values: FloatArray) -> FloatArray:
        """Return the mean over usable stations weighted by their metres.

        Parameters
        ----------
        values : (count, n_stations) array

        Returns
        -------
        (count,) array
        """
        metres = self.strip.length
        weights = metres if np.isfinite(metres).all() else np.ones_like(self.strip.x)
        weights = np.where(self.usable, weights, 0.0)
        return np.asarray(np.where(self.usable, values, 0.0) @ (weights / weights.sum()))

    def length_draws(self) -> FloatArray:
        """Return draws of the drawn length without components, (count,). [m]

        Gaps behind other things count: the pipe goes on there, at the mean of the rest.
        """
        total = float(np.sum(self.strip.length[~self.component_at]))
        ends = COMPONENT_END_U * np.count_nonzero(np.diff(self.component_at)) ** 0.5
        relative = math.hypot(self.strip.scale_uncertainty, ends / max(total, ends))
        length = total * (1 + relative * self.book.normal(self.owner, "scale"))
        if self.strip.scaled_by_diameter:
            length = length * self.diameter / np.median(self.diameter)
        return np.asarray(length)

    def dew_point(self) -> float | None:
        """Return the dew point of the declared air; None where no humidity is known. [K]"""
        humidity, air = self.conditions.relative_humidity, self.conditions.air_temperature
        if humidity is None or air is None or not humidity.value > 0:
            return None
        return float(dew_point(air.value, humidity.value))

    @cached_property
    def below_dew_point(self) -> BoolArray:
        """Stations whose median temperature is below the dew point."""
        dew = self.dew_point()
        if dew is None:
            return np.zeros(self.usable.size, dtype=bool)
        return np.asarray(self.usable & (self.median_temperature < dew))

    @cached_property
    def median_temperature(self) -> FloatArray:
        """Median surface temperature per station, NaN in gaps, (n_stations,). [K]"""
        return np.asarray(np.median(self.drawn.surface_temperature, axis=0))

    @property
    def vapour(self) -> Vapour | None:
        """Vapour that may condense on the line."""
        return vapour_of(self.frame, self.line_draws)

    @property
    def perimeter(self) -> FloatArray:
        """Circumference over the cladding, (count,). [m]"""
        return math.pi * self.diameter
