import math

import pytest

from cladwatt.report.numbers import (
    CONSOLE,
    PRINT,
    NumberStyle,
    as_gain,
    celsius_interval,
    decimals_for,
    format_interval,
    format_number,
    format_probability,
    format_range,
)
from cladwatt.results.assessment import Interval

NAN, INF = math.nan, math.inf


# JCGM 100:2008, 7.2.6: at most two significant digits of an uncertainty; the clause's own
# example rounds u_c 28.05 kHz to 28 kHz (here in kHz: no decimals).
@pytest.mark.parametrize(
    ("half", "decimals"), [(28.05, 0), (0.35, 2), (3.5, 1), (350, -1), (0.099, 3), (0, 2), (INF, 2)]
)
def test_two_digits_of_the_half_width(half, decimals):
    assert decimals_for(half) == decimals


@pytest.mark.parametrize(
    ("interval", "unit", "words"),
    [
        (Interval(184.2, 152.3, 221.4), "W/m", "184 W/m (152 to 221)"),
        (Interval(30214, 24820, 36200), "W", "30200 W (24800 to 36200)"),
        (Interval(0.0523, 0.0431, 0.0628), "W/(m K)", "0.0523 W/(m K) (0.0431 to 0.0628)"),
        (Interval(-3.2, -8.1, 1.9), "W", "-3.2 W (-8.1 to 1.9)"),
        (Interval(1.2, 0.42, INF), "m K/W", "1.20 m K/W (above 0.42)"),
        (Interval(INF, 0.42, INF), "m K/W", "above 0.42 m K/W"),
        (Interval(NAN, NAN, NAN), "W", "not known"),
        (Interval(2.0, 2.0, 2.0), "m", "2.00 m (2.00 to 2.00)"),
    ],
)
def test_intervals(interval, unit, words):
    assert format_interval(interval, unit, CONSOLE) == words


def test_print_style_keeps_number_and_unit_together():
    words = format_interval(Interval(-30214, -36200, -24820), "W", PRINT)
    assert words == "−30\u202f200\u00a0W (−36\u202f200\u00a0to\u00a0−24\u202f800)"


def test_most_decimals():
    assert format_range(Interval(3.0, 2.95, 3.05), CONSOLE, most=2) == "2.95 to 3.05"
    assert format_range(Interval(3.0, 2.95, 3.05), CONSOLE) == "2.950 to 3.050"


def test_another_style():
    style = NumberStyle(decimal=",", thousands=".", minus="-", space=" ", range_word="bis")
    assert format_interval(Interval(12345.6, 12345.1, 12346.1), "W", style) == (
        "12.345,60 W (12.345,10 bis 12.346,10)"
    )


def test_zero_has_no_sign():
    assert format_number(-0.0004, 2, CONSOLE) == "0.00"


@pytest.mark.parametrize(
    ("probability", "words"),
    [(0.0, "< 1 %"), (0.0099, "< 1 %"), (0.5, "50 %"), (0.9999, "> 99 %"), (1.0, "> 99 %"),
     (None, "not known"), (NAN, "not known")],
)  # fmt: skip
def test_probabilities_are_never_certain(probability, words):
    assert format_probability(probability, CONSOLE) == words


def test_gain_turns_the_interval():
    assert as_gain(Interval(-20, -30, -12)) == Interval(20, 12, 30)


def test_celsius():
    assert celsius_interval(Interval(293.15, 273.15, 373.15)).high == pytest.approx(100.0)
