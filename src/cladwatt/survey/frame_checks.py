"""Judge a frame's values against what is declared: stop it, or ask."""

import numpy as np

from cladwatt.survey.decoded import Refusal, TemperatureUnit
from cladwatt.survey.model import FrameEntry
from cladwatt.survey.plausibility import (
    BACKGROUND_TOLERANCE,
    COLDEST_PIXEL,
    HOTTEST_PIXEL,
    Spread,
    background_distance,
    likely_readings,
    shown,
    spread_of,
)
from cladwatt.survey.temperature_unit import UNIT_SIGN, from_kelvin
from cladwatt.types import BoolArray, FloatArray

__all__ = [
    "background_question",
    "declared_air",
    "looks_like",
    "plateau_question",
    "refuse_impossible",
]

# A frame in which nothing at all comes this near to the air shows no background. [K]
_NOTHING_NEAR_AIR = 35.0
_WRONG_UNIT_TOLERANCE = 8.0
_SKY_BELOW_AIR = 90.0
_PLATEAU_LEVELS = 50
_PLATEAU_PIXELS = 30


def refuse_impossible(
    numbers: FloatArray,
    temperature: FloatArray,
    usable: BoolArray,
    spread: Spread,
    unit: TemperatureUnit,
    entry: FrameEntry,
) -> None:
    """Stop a frame whose values cannot be temperatures in the unit settled on."""
    air, sign = declared_air(entry), UNIT_SIGN[unit]
    extent = f"values {spread.minimum:g} to {spread.maximum:g}"
    outside = usable & ((temperature < COLDEST_PIXEL) | (temperature > HOTTEST_PIXEL))
    limits = f"{shown(COLDEST_PIXEL, unit)} to {shown(HOTTEST_PIXEL, unit)}"
    count = int(outside.sum())
    if count > 0.01 * usable.sum():
        raise Refusal(
            f"{extent} cannot be temperatures in {sign}",
            f"expected {limits}{looks_like(spread, air)}",
        )
    if count:
        example = float(numbers[outside].flat[0])
        raise Refusal(
            f"{count} pixel(s) hold values such as {example:g}, no temperature in {sign}",
            f"expected {limits}; if it marks dead pixels, declare it as bad_value",
        )
    _refuse_other_unit(spread, unit, air, extent)


def _refuse_other_unit(
    spread: Spread, unit: TemperatureUnit, air: float | None, extent: str
) -> None:
    """Stop a frame wholly far above the air that another unit would put right there."""
    centre = 293.15 if air is None else air
    above = spread.kelvin(unit).low - centre
    if above <= (_NOTHING_NEAR_AIR if air is not None else 4 * _NOTHING_NEAR_AIR):
        return
    better = [
        reading
        for reading in likely_readings(spread, centre)
        if abs(reading.distance) <= _WRONG_UNIT_TOLERANCE
        and (reading.unit, reading.scale) != (unit, 1.0)
    ]
    if better:
        told = "" if air is None else f" at {shown(air, 'C')}"
        raise Refusal(
            f"{extent} cannot be {UNIT_SIGN[unit]}: nothing in the frame is within "
            f"{above:.0f} K of the air",
            f"expected a background near the air{told}; they look like {better[0]}: "
            f"{better[0].declaration}",
        )


def looks_like(spread: Spread | None, air: float | None) -> str:
    """Return the tail of a message: what the numbers look like; empty where nothing fits."""
    readings = likely_readings(spread, air) if spread is not None else ()
    if not readings:
        return ""
    names = " or ".join(
        f"{reading} ({shown(reading.spread.minimum, 'C')} to {shown(reading.spread.maximum, 'C')})"
        for reading in readings[:2]
    )
    return f"; they look like {names}: {readings[0].declaration}"


def background_question(
    temperature: FloatArray, unit: TemperatureUnit, entry: FrameEntry
) -> tuple[str, str] | None:
    """Ask about a background far from the declared air.

    Parameters
    ----------
    temperature : (rows, cols) array
        NaN is left out. [K]
    unit : {"C", "K", "F"}
        The unit the file was read in.
    entry : FrameEntry

    Returns
    -------
    (found, expected) or None
    """
    air = declared_air(entry)
    spread = spread_of(temperature)
    if air is None or spread is None:
        return None
    distance = background_distance(spread, air)
    if abs(distance) <= BACKGROUND_TOLERANCE:
        return None
    other = [
        reading
        for reading in likely_readings(_in_unit(spread, unit), air)
        if (reading.unit, reading.scale) != (unit, 1.0)
    ]
    # Outdoors the background may be sky, which looks far colder than the air.
    sky = entry.conditions.indoors is False and -_SKY_BELOW_AIR < distance < 0
    if sky and not (other and abs(other[0].distance) <= _WRONG_UNIT_TOLERANCE):
        return None
    hint = f" The numbers also look like {other[0]}: {other[0].declaration}" if other else ""
    return (
        f"the background is near {shown(air + distance, 'C')}, "
        f"{abs(distance):.0f} K {'above' if distance > 0 else 'below'} "
        f"the declared air of {shown(air, 'C')}",
        f"is the air temperature right, and the unit?{hint}",
    )


def _in_unit(spread: Spread, unit: TemperatureUnit) -> Spread:
    zero, one = from_kelvin(0.0, unit), from_kelvin(1.0, unit)
    return spread.scaled(one - zero, zero)


def plateau_question(temperature: FloatArray, entry: FrameEntry) -> tuple[str, str] | None:
    """Ask about many pixels sharing the highest value where no upper end is declared."""
    if entry.format.range_upper is not None:
        return None
    inside = temperature[np.isfinite(temperature)]
    levels, counts = np.unique(inside, return_counts=True)
    if levels.size < _PLATEAU_LEVELS or counts[-1] < _PLATEAU_PIXELS:
        return None
    if counts[-1] < 10 * counts[-11:-1].max():
        return None
    return (
        f"{int(counts[-1])} pixels share the highest value, {shown(float(levels[-1]), 'C')}",
        "is this the end of the recording range? Then declare range_upper_C",
    )


def declared_air(entry: FrameEntry) -> float | None:
    """Return the declared air temperature, in kelvin; None where unknown."""
    air = entry.conditions.air_temperature
    return None if air is None else air.value
