"""What is inside a line: temperature, from steam pressure too, film, flow, and the tracer."""

import math
from dataclasses import dataclass
from typing import Literal

from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList, shown
from cladwatt.survey.model import Tracing
from cladwatt.survey.table_reader import Table

__all__ = ["Inside", "build_inside", "build_tracing"]

_ZERO_CELSIUS = 273.15
_FAR_OFF = 3.0
"""Combined standard uncertainties beyond which pressure and temperature contradict each other."""
_STEAM_WORDS = ("steam", "vapour", "vapor", "condensate")


@dataclass(frozen=True)
class Inside:
    """What a line declares of its inside."""

    temperature: Quantity | None
    """Of the fluid or the pipe wall. [K]"""
    inside_is: Literal["fluid", "wall"] = "fluid"
    steam_pressure: Quantity | None = None
    """Absolute. [Pa]"""
    film: Quantity | None = None
    """[W/(m2 K)]"""
    flow: Quantity | None = None
    """[kg/s]"""
    specific_heat: Quantity | None = None
    """[J/(kg K)]"""


def build_inside(table: Table, site_pressure: Quantity, faults: FaultList) -> Inside:
    """Return the inside of a line.

    Parameters
    ----------
    table : Table
        Read by the keys of ``line``.
    site_pressure : Quantity
        Air pressure at the site, for a gauge pressure. [Pa]
    faults : FaultList
        Gets what is wrong or contradicts itself.
    """
    fluid, wall = table.quantity("fluid_temperature"), table.quantity("wall_temperature")
    pressure = _steam_pressure(table, site_pressure, faults)
    saturation = None if pressure is None else _saturation(table, pressure)
    if wall is not None and (fluid is not None or saturation is not None):
        other = "fluid" if fluid is not None else "steam pressure"
        faults.add(
            table.place, table.spelling("wall_temperature"),
            f"{other} and wall temperature are both given", "expected the one that was measured",
        )  # fmt: skip
    if saturation is not None:
        fluid = _agreed(table, fluid, saturation, faults)
    film = table.quantity("inside_film")
    if film is not None and wall is not None:
        faults.ask(
            table.place, table.spelling("inside_film"),
            "a film is given, but the temperature is that of the pipe wall: the film is not used",
            "delete it, or declare the fluid's temperature",
        )  # fmt: skip
        film = None
    return Inside(
        temperature=wall if wall is not None else fluid,
        inside_is="wall" if wall is not None else "fluid",
        steam_pressure=pressure,
        film=film,
        flow=_with_other(table, "flow", "specific_heat", faults),
        specific_heat=_with_other(table, "specific_heat", "flow", faults),
    )


def _with_other(table: Table, name: str, other: str, faults: FaultList) -> Quantity | None:
    """Return a quantity that is of no use without another, and say so where that is missing."""
    if table.quantity(name) is not None and not table.has(other):
        faults.ask(
            table.place, table.spelling(name),
            f"{name} stands without {other}: the fall of temperature along the line is left out",
            f"expected {table.key(other).usual} beside it",
        )  # fmt: skip
    return table.quantity(name)


def _steam_pressure(table: Table, site: Quantity, faults: FaultList) -> Quantity | None:
    """Return the absolute pressure of the steam; whether it is gauge must be said."""
    written = table.quantity("steam_pressure")
    reference = table.text("steam_pressure_is")
    if written is None:
        if reference and not table.has("steam_pressure"):
            faults.add(
                table.place, "steam_pressure_is", "steam_pressure_is stands without steam_pressure",
                f"expected {table.key('steam_pressure').usual} beside it",
            )  # fmt: skip
        return None
    name = table.spelling("steam_pressure")
    unit = table.section.spellings[name][1]
    said = f"{unit.from_si(written.value):.6g} {unit.text}"
    if not reference:
        faults.add(
            table.place, name, f"{name} is {said}, but not said over what",
            'expected steam_pressure_is = "gauge" or "absolute" beside it; it is not guessed',
        )  # fmt: skip
        return None
    words = table.text("fluid").casefold()
    if words and not any(word in words for word in _STEAM_WORDS):
        faults.ask(
            table.place, name, f"{name} is given, but the fluid is {shown(table.text('fluid'))}",
            "it is taken as saturated steam; declare fluid_temperature where it is none",
        )  # fmt: skip
    if "superheat" in words and not table.has("fluid_temperature"):
        faults.add(
            table.place, name, f"{name} is given for superheated steam",
            "expected fluid_temperature: a pressure only gives the temperature of saturated steam",
        )  # fmt: skip
        return None
    return _absolute(table, written, reference, site, said, faults)


def _absolute(
    table: Table, written: Quantity, reference: str, site: Quantity, said: str, faults: FaultList
) -> Quantity | None:
    from cladwatt.physics.steam import SATURATION_PRESSURE_RANGE, absolute_pressure

    lowest, highest = SATURATION_PRESSURE_RANGE
    name = table.spelling("steam_pressure")
    unit = table.section.spellings[name][1]
    gauge = reference == "gauge"
    air = site.value if gauge else 0.0
    if not lowest <= written.value + air <= highest:
        low, high = unit.from_si(lowest - air), unit.from_si(highest - air)
        faults.add(
            table.place, name, f"{name} is {said} {reference}",
            f"expected {low:.4g} to {high:.4g} {unit.text} {reference}: saturated steam exists"
            " only there",
        )  # fmt: skip
        return None
    value = float(absolute_pressure(written.value, air)) if gauge else written.value
    u = math.hypot(written.u, site.u) if gauge else written.u
    detail = written.source.removeprefix("declared").removeprefix("; ")
    added = f"; air at the site: {site.source}" if gauge else ""
    return Quantity(
        value, u, lower=max(lowest, value - 8 * u), upper=min(highest, value + 8 * u),
        source=f"declared, {said} {reference}" + (f"; {detail}" if detail else "") + added,
    )  # fmt: skip


def _saturation(table: Table, pressure: Quantity) -> Quantity:
    """Return the temperature of saturated steam at a pressure."""
    from cladwatt.physics.steam import SATURATION_PRESSURE_RANGE, saturation_temperature

    def at(value: float) -> float:
        lowest, highest = SATURATION_PRESSURE_RANGE
        return float(saturation_temperature(min(max(value, lowest), highest)))

    u = 0.5 * (at(pressure.value + pressure.u) - at(pressure.value - pressure.u))
    name = table.spelling("steam_pressure")
    return Quantity(
        at(pressure.value), u, lower=at(pressure.lower), upper=at(pressure.upper),
        source=f"declared by {name}: saturated steam, IAPWS-IF97",
    )  # fmt: skip


def _agreed(
    table: Table, fluid: Quantity | None, saturation: Quantity, faults: FaultList
) -> Quantity:
    """Return the better of two statements of the fluid's temperature, or say they contradict."""
    if fluid is None:
        return saturation
    difference = fluid.value - saturation.value
    if abs(difference) > _FAR_OFF * math.hypot(fluid.u, saturation.u):
        found = (
            f"fluid_temperature is {fluid.value - _ZERO_CELSIUS:.4g} °C, but saturated steam of"
            f" {table.spelling('steam_pressure')} has {saturation.value - _ZERO_CELSIUS:.4g} °C"
        )
        if difference > 0:
            faults.ask(
                table.place, table.spelling("fluid_temperature"), found,
                "fluid_temperature is used, as of superheated steam; check both",
            )  # fmt: skip
            return fluid
        faults.add(
            table.place, table.spelling("fluid_temperature"), found,
            "steam cannot be colder than that; check both, gauge or absolute too, and keep the one"
            " that was measured",
        )  # fmt: skip
    return saturation if saturation.u < fluid.u else fluid


def build_tracing(table: Table, fluid: Quantity | None, faults: FaultList) -> Tracing:
    """Return the tracer of a line.

    Parameters
    ----------
    table : Table
        Read by the keys of ``line``.
    fluid : Quantity or None
        Inside temperature of the line. [K]
    faults : FaultList
    """
    kind = table.text("tracing") or "none"
    names = ("tracer_temperature", "tracer_power", "tracer_clock_position")
    parts = [name for name in names if table.has(name) and not table.is_unknown(name)]
    if kind == "none" and parts:
        faults.ask(
            table.place, table.spelling(parts[0]),
            f"{table.spelling(parts[0])} is given but tracing is not", 'declare tracing = "steam"'
            ' or "electric"',
        )  # fmt: skip
    if kind == "steam" and "tracer_power" in parts:
        name = table.spelling("tracer_power")
        faults.add(
            table.place, name, f"{name} is given, but the tracer is a steam tracer",
            "expected tracer_temperature; a power is that of an electric tracer",
        )  # fmt: skip
    temperature = table.quantity("tracer_temperature")
    if kind != "none" and temperature is not None and fluid is not None:
        _compare(table, temperature, fluid, faults)
    return Tracing(
        kind="steam" if kind == "steam" else "electric" if kind == "electric" else "none",
        clock_position=table.number("tracer_clock_position"),
        temperature=temperature,
        power=table.quantity("tracer_power"),
    )


def _compare(table: Table, tracer: Quantity, fluid: Quantity, faults: FaultList) -> None:
    if fluid.value - tracer.value > _FAR_OFF * math.hypot(fluid.u, tracer.u):
        faults.ask(
            table.place, table.spelling("tracer_temperature"),
            f"the tracer at {tracer.value - _ZERO_CELSIUS:.4g} °C is colder than what it should"
            f" warm, {fluid.value - _ZERO_CELSIUS:.4g} °C", "check both",
        )  # fmt: skip
