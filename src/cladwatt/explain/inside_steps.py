"""Steps to the temperature inside a line: steam by its pressure, and its fall along the line."""

import numpy as np

from cladwatt.explain.steps import Pad, median_of, source_of
from cladwatt.inverse.line_draws import LineDraws, draw_line
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import sound_draws
from cladwatt.physics import steam
from cladwatt.types import FloatArray

__all__ = ["inside_steps"]

IAPWS = "IAPWS R7-97, equation 31"
EXPONENTIAL = "Incropera et al., section 8.3.3, with the air in place of the surface"


def inside_steps(pad: Pad, seen: Seen) -> None:
    """Write down the inside temperature and how it follows from what was declared.

    Parameters
    ----------
    pad : Pad
    seen : Seen
        With one draw; the inside temperature must be known.
    """
    inside = seen.line_draws.inside_temperature
    assert inside is not None
    start = draw_line(seen.book, seen.line, seen.region)
    assert start.inside_temperature is not None
    falls = not np.array_equal(start.inside_temperature, inside)
    symbol, key = ("T_start", "start_temperature") if falls else ("T_in", "inside_temperature")
    quantity = seen.line.inside_temperature
    by_steam = quantity is not None and "saturated steam" in quantity.source
    if by_steam and seen.line.steam_pressure is not None:
        _steam(pad, seen, symbol, key)
    else:
        pad.given(key, symbol, start.inside_temperature, "K", source_of(quantity, ""))
    if falls:
        _fall(pad, seen, start, inside)


def _steam(pad: Pad, seen: Seen, symbol: str, key: str) -> None:
    """Write down the saturation temperature of the steam's pressure."""
    pressure = seen.line.steam_pressure
    assert pressure is not None
    value, found = median_of(pressure), pad.found
    pad.given("steam_pressure", "p_steam", value, "Pa", pressure.source)
    beta = (value / 1e6) ** 0.25
    found("saturation_root", "B", beta, "-", "(p_steam / 1e6)^(1/4)", "p_steam")
    e = beta**2 + steam._N3 * beta + steam._N6
    f = steam._N1 * beta**2 + steam._N4 * beta + steam._N7
    g = steam._N2 * beta**2 + steam._N5 * beta + steam._N8
    for name, part, first, second, third in (
        ("E", e, 1.0, steam._N3, steam._N6),
        ("F", f, steam._N1, steam._N4, steam._N7),
        ("G", g, steam._N2, steam._N5, steam._N8),
    ):
        formula = f"{_term(first)} B^2 {_signed(second)} B {_signed(third)}"
        found("saturation_part", name, part, "-", formula, "B", IAPWS)
    d = 2 * g / (-f - (f * f - 4 * e * g) ** 0.5)
    found("saturation_part", "S", d, "K", "2 G / (0 - F - (F^2 - 4 E G)^(1/2))", "E F G", IAPWS)
    n9, n10 = steam._N9, steam._N10
    formula = f"({n10:.12g} + S - (({n10:.12g} + S)^2 - 4 ({_term(n9)} + {n10:.12g} S))^(1/2)) / 2"
    found(key, symbol, steam.saturation_temperature(value), "K", formula, "S", IAPWS)


def _term(value: float) -> str:
    return f"(0 - {-value:.12g})" if value < 0 else f"{value:.12g}"


def _signed(value: float) -> str:
    return f"- {-value:.12g}" if value < 0 else f"+ {value:.12g}"


def _fall(pad: Pad, seen: Seen, start: LineDraws, inside: FloatArray) -> None:
    """Write down how far the fluid has cooled where the region lies."""
    line = seen.line
    assert line.flow is not None
    assert line.specific_heat is not None
    loss = sound_draws(start, seen.frame)
    assert loss is not None
    given = pad.given
    given("flow", "m_fluid", line.flow.value, "kg/s", line.flow.source)
    given("specific_heat", "c_fluid", line.specific_heat.value, "J/(kg K)",
          line.specific_heat.source)  # fmt: skip
    middle = float(np.mean(seen.strip.station))
    given("middle_station", "x_mid", middle, "m", "middle of the region along the line")
    given("start_loss", "q'_start", loss.heat_loss, "W/m",
          "sound lagging with T_start inside, solved as in the section that follows")  # fmt: skip
    assert start.inside_temperature is not None
    drop = start.inside_temperature - seen.frame.air_temperature
    formula, inputs = "T_start - x_mid q'_start / (m_fluid c_fluid)", "T_start x_mid q'_start"
    if float(loss.heat_loss[0] * drop[0]) > 0:
        power = "0 - x_mid q'_start / (m_fluid c_fluid (T_start - T_air))"
        formula = f"T_air + (T_start - T_air) exp({power})"
        inputs += " T_air"
    inputs += " m_fluid c_fluid"
    pad.found("inside_temperature", "T_in", inside, "K", formula, inputs, EXPONENTIAL)
