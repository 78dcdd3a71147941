"""Numbers as people read them: no more digits than the interval carries, always with a unit."""

import math
from dataclasses import dataclass

from cladwatt.results.assessment import Interval

__all__ = [
    "CONSOLE",
    "PRINT",
    "NumberStyle",
    "as_gain",
    "celsius",
    "celsius_interval",
    "decimals_for",
    "format_interval",
    "format_number",
    "format_probability",
    "format_range",
    "format_value",
]

ZERO_CELSIUS = 273.15


@dataclass(frozen=True)
class NumberStyle:
    """How numbers are set.

    Parameters
    ----------
    decimal, thousands, minus : str
        Decimal sign, sign between groups of three digits, sign of a negative number.
    space : str
        Between number and unit.
    unknown : str
        What stands for NaN.
    range_word : str
        Between the ends of an interval.
    above_word, below_word : str
        Before the one end of an interval that has only one.
    """

    decimal: str = "."
    thousands: str = "\u202f"
    minus: str = "\u2212"
    space: str = "\u00a0"
    unknown: str = "not known"
    range_word: str = "to"
    above_word: str = "above"
    below_word: str = "below"


PRINT = NumberStyle()
CONSOLE = NumberStyle(thousands="", minus="-", space=" ")


def decimals_for(half_width: float) -> int:
    """Return the decimals that show two significant digits of an interval's half width.

    Parameters
    ----------
    half_width : float
        Half of the interval's width, in the unit of the number.

    Returns
    -------
    int
        Decimals; negative for rounding to tens, hundreds ...; 2 where the width says nothing.

    References
    ----------
    .. [1] JCGM 100:2008, 7.2.6 (at most two significant digits of the uncertainty).
    """
    if not math.isfinite(half_width) or half_width <= 0:
        return 2
    return max(-6, min(6, 1 - math.floor(math.log10(half_width))))


def format_number(value: float, decimals: int, style: NumberStyle = PRINT) -> str:
    """Return a number rounded to `decimals`, which may be negative; NaN gives the unknown word."""
    if math.isnan(value):
        return style.unknown
    if math.isinf(value):
        return ("" if value > 0 else style.minus) + "∞"
    rounded = round(value, decimals)
    digits = f"{abs(rounded):,.{max(decimals, 0)}f}"
    sign = style.minus if rounded < 0 else ""
    # Four digits stay together; groups start at five.
    whole, _, rest = digits.partition(".")
    separator = style.thousands if len(whole) > 5 else ""
    whole = whole.replace(",", separator)
    return sign + whole + (style.decimal + rest if rest else "")


def _interval_decimals(interval: Interval, most: int) -> int:
    return min(most, _own_decimals(interval))


def _own_decimals(interval: Interval) -> int:
    ends = [end for end in (interval.low, interval.high) if math.isfinite(end)]
    if len(ends) == 2:
        return decimals_for((ends[1] - ends[0]) / 2)
    if math.isfinite(interval.median) and ends:
        return decimals_for(abs(interval.median - ends[0]))
    return 2


def format_range(interval: Interval, style: NumberStyle = PRINT, *, most: int = 6) -> str:
    """Return the 95 % interval alone, without unit: ``152 to 221`` or ``above 0.42``."""
    decimals = _interval_decimals(interval, most)
    if math.isnan(interval.low) or math.isnan(interval.high):
        return style.unknown
    low = format_number(interval.low, decimals, style)
    high = format_number(interval.high, decimals, style)
    if math.isinf(interval.high):
        return f"{style.above_word}{style.space}{low}"
    if math.isinf(interval.low):
        return f"{style.below_word}{style.space}{high}"
    return style.space.join((low, style.range_word, high))


def format_value(
    interval: Interval, unit: str, style: NumberStyle = PRINT, *, most: int = 6
) -> str:
    """Return the median with its unit, with the digits the interval carries."""
    if math.isnan(interval.median):
        return style.unknown
    number = format_number(interval.median, _interval_decimals(interval, most), style)
    return f"{number}{style.space}{unit}" if unit else number


def format_interval(
    interval: Interval, unit: str, style: NumberStyle = PRINT, *, most: int = 6
) -> str:
    """Return median, unit and 95 % interval, ``184 W/m (152 to 221)``, `most` decimals at most."""
    if math.isnan(interval.median):
        return style.unknown
    if math.isinf(interval.median):
        return f"{format_range(interval, style, most=most)}{style.space}{unit}".strip()
    value = format_value(interval, unit, style, most=most)
    return f"{value} ({format_range(interval, style, most=most)})"


def format_probability(probability: float | None, style: NumberStyle = PRINT) -> str:
    """Return a probability in percent; never 0 % or 100 %, which no finite run can show."""
    if probability is None or math.isnan(probability):
        return style.unknown
    if probability < 0.01:
        return f"<{style.space}1{style.space}%"
    if probability > 0.99:
        return f">{style.space}99{style.space}%"
    return f"{100 * probability:.0f}{style.space}%"


def celsius(kelvin: float) -> float:
    """Return a temperature in degrees Celsius."""
    return kelvin - ZERO_CELSIUS


def celsius_interval(interval: Interval) -> Interval:
    """Return an interval of temperatures in degrees Celsius."""
    return Interval(celsius(interval.median), celsius(interval.low), celsius(interval.high))


def as_gain(interval: Interval) -> Interval:
    """Return a loss counted as a gain: the sign turned, the ends swapped."""
    return Interval(-interval.median, -interval.high, -interval.low)
