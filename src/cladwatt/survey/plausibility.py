"""Whether recorded numbers can be what is declared, and what they look like if not."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from cladwatt.survey.decoded import TemperatureUnit
from cladwatt.survey.temperature_unit import UNIT_SIGN, from_kelvin, to_kelvin
from cladwatt.types import BoolArray, FloatArray

__all__ = [
    "BACKGROUND_TOLERANCE",
    "COLDEST_PIXEL",
    "HOTTEST_PIXEL",
    "Reading",
    "Spread",
    "background_distance",
    "likely_readings",
    "shown",
    "spread_of",
]

COLDEST_PIXEL = 100.0
"""Nothing recorded on a plant lies below, the clearest sky included. [K]"""
HOTTEST_PIXEL = 1500.0 + 273.15
"""[K]"""
BACKGROUND_TOLERANCE = 15.0
"""A background further than this from the declared air is worth a question. [K]"""

_USUAL_AIR = 293.15
_USUAL_AIR_TOLERANCE = 30.0
_COLDEST_SKY = 190.0
_SCALES: tuple[tuple[TemperatureUnit, float], ...] = (
    ("C", 1.0), ("K", 1.0), ("F", 1.0), ("K", 0.01), ("K", 0.1), ("C", 0.01), ("C", 0.1),
)  # fmt: skip


@dataclass(frozen=True)
class Spread:
    """How the usable values of a frame are spread; in whatever unit they stand."""

    minimum: float
    low: float
    """1 % of the values lie below."""
    median: float
    high: float
    """1 % of the values lie above."""
    maximum: float
    background: tuple[float, ...]
    """Where the background may lie: median along the border, lowest tenth, median."""
    whole: bool = False
    """Whether all values are whole numbers, as counts are."""

    def scaled(self, scale: float, offset: float) -> "Spread":
        """Return the spread of the values times `scale` plus `offset`; `scale` is positive."""
        return self._mapped(lambda value: value * scale + offset)

    def kelvin(self, unit: TemperatureUnit) -> "Spread":
        """Return the spread of the same values taken to be in `unit`, in kelvin."""
        return self._mapped(lambda value: to_kelvin(value, unit))

    def _mapped(self, change: Callable[[float], float]) -> "Spread":
        return Spread(
            minimum=change(self.minimum),
            low=change(self.low),
            median=change(self.median),
            high=change(self.high),
            maximum=change(self.maximum),
            background=tuple(change(value) for value in self.background),
            whole=self.whole,
        )


@dataclass(frozen=True)
class Reading:
    """One way to take the numbers of a frame."""

    unit: TemperatureUnit
    scale: float
    spread: Spread
    """[K]"""
    distance: float
    """Of the background from the air, declared or usual. [K]"""

    def __str__(self) -> str:
        sign = UNIT_SIGN[self.unit]
        if self.scale == 1.0:
            return sign
        parts = "hundredths" if self.scale == 0.01 else "tenths"
        return f"{parts} of a kelvin" if self.unit == "K" else f"{parts} of a degree Celsius"

    @property
    def declaration(self) -> str:
        """What to write into the survey file."""
        text = f'unit = "{self.unit}"'
        return text if self.scale == 1.0 else f"{text}, scale = {self.scale}, offset = 0.0"


def spread_of(values: FloatArray, usable: BoolArray | None = None) -> Spread | None:
    """Return the spread of a frame's values; None where not one is usable.

    Parameters
    ----------
    values : (rows, cols) array
        NaN is left out.
    usable : (rows, cols) array of bool, optional
    """
    good = np.isfinite(values) if usable is None else usable & np.isfinite(values)
    inside = values[good]
    if inside.size == 0:
        return None
    quantiles = np.quantile(inside, [0.0, 0.01, 0.1, 0.5, 0.99, 1.0])
    minimum, low, tenth, median, high, maximum = (float(value) for value in quantiles)
    border = np.zeros(values.shape, dtype=np.bool_)
    border[[0, -1], :] = border[:, [0, -1]] = True
    rim = values[good & border]
    background = (tenth, median) if rim.size == 0 else (float(np.median(rim)), tenth, median)
    whole = bool(np.all(inside == np.round(inside)))
    return Spread(minimum, low, median, high, maximum, background, whole)


def background_distance(spread: Spread, air: float) -> float:
    """Return how far the background lies from the air, the kindest choice of background.

    Positive where the background is warmer. `spread`, `air` and the distance in kelvin.
    """
    return min((value - air for value in spread.background), key=abs)


def likely_readings(spread: Spread, air: float | None) -> tuple[Reading, ...]:
    """Return the ways the numbers can be taken that put the background near the air.

    Parameters
    ----------
    spread : Spread
        Of the numbers as they stand.
    air : float or None
        Declared air temperature; None: something a person can work in. [K]

    Returns
    -------
    tuple of Reading
        Plain units before tenths and hundredths, then the nearest first. Tenths and hundredths
        are thought of for whole numbers only.
    """
    return tuple(sorted(_readings(spread, air), key=lambda r: (r.scale != 1.0, abs(r.distance))))


def _readings(spread: Spread, air: float | None) -> Iterator[Reading]:
    centre, tolerance = (
        (_USUAL_AIR, _USUAL_AIR_TOLERANCE) if air is None else (air, BACKGROUND_TOLERANCE)
    )
    for unit, scale in _SCALES:
        if scale != 1.0 and not spread.whole:
            continue
        taken = spread.scaled(scale, 0.0).kelvin(unit)
        distance = background_distance(taken, centre)
        if taken.low >= _COLDEST_SKY and taken.high <= HOTTEST_PIXEL and abs(distance) <= tolerance:
            yield Reading(unit, scale, taken, distance)


def shown(kelvin: float, unit: TemperatureUnit) -> str:
    """Return a temperature for a message, in `unit`."""
    return f"{from_kelvin(kelvin, unit):.1f} {UNIT_SIGN[unit]}"
