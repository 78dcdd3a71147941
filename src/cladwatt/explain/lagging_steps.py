"""Steps through the lagging: as specified, sound, and as found."""

from dataclasses import replace
from itertools import pairwise

import numpy as np

from cladwatt.explain.steps import Pad, Section, source_of
from cladwatt.explain.surface_steps import exchange_steps
from cladwatt.inverse.seen import Seen
from cladwatt.physics.lagged_pipe import (
    LaggedPipeState,
    LaggingLayer,
    lagging_resistance_from_surface,
    solve_lagged_pipe,
)
from cladwatt.survey.model import Line

__all__ = ["lagging_sections", "result_section"]

CARSLAW = "Carslaw and Jaeger, section 1.6"
ISO_12241 = "ISO 12241, hollow cylinder"


def lagging_sections(seen: Seen) -> tuple[Section, ...]:
    """Return the lagging as specified and as sound, solved in the frame's conditions.

    Parameters
    ----------
    seen : Seen
        With one draw.

    Returns
    -------
    tuple of Section
        Empty where inside temperature, lagging or diameter is unknown.
    """
    line = seen.line_draws
    if line.inside_temperature is None or line.layers is None or line.lagged_diameter is None:
        return ()
    specified, sound = Pad(), Pad()
    inside = seen.line.inside_temperature
    assert inside is not None
    specified.given("inside_temperature", "T_in", line.inside_temperature, "K", inside.source)
    if seen.region.outside_diameter is not None and line.pipe_diameter is not None:
        pipe = seen.line.pipe_outside_diameter
        assert pipe is not None
        specified.given("pipe_diameter", "d", line.pipe_diameter, "m", pipe.source)
        for number, (declared, layer) in enumerate(zip(seen.line.layers, line.layers, strict=True)):
            source = source_of(declared.thickness, "")
            symbol = f"t_{number + 1}"
            specified.given("layer_thickness", symbol, layer.thickness, "m", source)
    _through(specified, seen, line.layers, "_spec")
    factor = seen.line.installation_factor.source
    sound.given("installation_factor", "f_inst", line.installation_factor, "-", factor)
    installed = tuple(
        replace(layer, factor=np.asarray(layer.factor) * line.installation_factor)
        for layer in line.layers
    )
    _through(sound, seen, installed, "_sound")
    _closed(sound, seen, installed)
    return specified.section("specified"), sound.section("sound")


def _solved(seen: Seen, layers: tuple[LaggingLayer, ...]) -> LaggedPipeState:
    line = seen.line_draws
    assert line.inside_temperature is not None
    assert line.pipe_diameter is not None
    assert line.lagged_diameter is not None
    exchange = line.exchange(seen.frame, line.lagged_diameter)
    return solve_lagged_pipe(line.inside_temperature, line.pipe_diameter, layers, exchange)


def _through(pad: Pad, seen: Seen, layers: tuple[LaggingLayer, ...], suffix: str) -> None:
    """Write down the solved temperatures, each layer's resistance, and the loss by conduction."""
    state = _solved(seen, layers)
    faces = _faces(len(layers), suffix)
    installed = suffix == "_sound"
    how = "solved together with the surface's balance" + (", checked below" if installed else "")
    for number, symbol in enumerate(faces[1:], start=1):
        key = "solved_surface" if number == len(layers) else "solved_interface"
        pad.given(key, symbol, state.interface_temperatures[number], "K", how)
    inner, parts = "d", []
    for number, (layer, (hot, cold)) in enumerate(zip(layers, pairwise(faces), strict=True), 1):
        warm, cool = (state.interface_temperatures[number - 1 + side] for side in (0, 1))
        mean = layer.conductivity.mean(warm, cool)
        pad.found(
            "mean_conductivity", f"k_{number}{suffix}", mean, "W/(m K)",
            f"mean of k(T) between {hot} and {cold}; {_curve(seen.line, number)}",
            f"{hot} {cold}", CARSLAW,
        )  # fmt: skip
        share = "f_inst " if installed else ""
        own = seen.line_draws.layers[number - 1].factor if seen.line_draws.layers else 1.0
        if (np.asarray(own) != 1).any():
            share += f"f_{number} "
            if not installed:
                source = seen.line.layers[number - 1].conductivity_factor.source
                pad.given("conductivity_factor", f"f_{number}", own, "-", source)
        outer = f"{inner} + 2 t_{number}"
        radius = 0.5 * np.asarray(seen.line_draws.pipe_diameter)
        radius = radius + sum(np.asarray(one.thickness) for one in layers[: number - 1])
        resistance = np.log((radius + layer.thickness) / radius) / (2 * np.pi * layer.factor * mean)
        thick = " ".join(f"t_{one}" for one in range(1, number + 1))
        pad.found(
            "layer_resistance", f"R_{number}{suffix}", resistance, "m K/W",
            f"ln(({outer}) / ({inner})) / (2 pi {share}k_{number}{suffix})",
            f"d {thick} {share}k_{number}{suffix}", ISO_12241,
        )  # fmt: skip
        inner = outer
        parts.append(f"R_{number}{suffix}")
    if len(parts) > 1:
        total = " + ".join(parts)
        pad.found("lagging_resistance", f"R{suffix}", state.resistance, "m K/W", total,
                  " ".join(parts))  # fmt: skip
        parts = [f"R{suffix}"]
    loss = "sound_loss" if installed else "specified_loss"
    pad.found(loss, f"q'{suffix}", state.heat_loss, "W/m", f"(T_in - {faces[-1]}) / {parts[0]}",
              f"T_in {faces[-1]} {parts[0]}")  # fmt: skip


def _faces(layers: int, suffix: str) -> list[str]:
    """Return the symbols of the temperatures from the pipe outwards."""
    between = [f"T_{number}{suffix}" for number in range(1, layers)]
    return ["T_in", *between, f"T_s{suffix}"]


def _curve(line: Line, number: int) -> str:
    """Return the nodes of a layer's conductivity curve as text."""
    curve = line.layers[number - 1].conductivity
    assert curve is not None
    nodes = zip(curve.temperature, curve.conductivity, strict=True)
    listed = ", ".join(f"{k:g} at {temperature:g} K" for temperature, k in nodes)
    return f"k = {listed}, straight between"


def _closed(pad: Pad, seen: Seen, layers: tuple[LaggingLayer, ...]) -> None:
    """Write down the check by substitution: the surface gives off what is conducted."""
    line = seen.line_draws
    state = _solved(seen, layers)
    assert line.lagged_diameter is not None
    exchange = line.exchange(seen.frame, line.lagged_diameter)
    exchange_steps(pad, float(state.surface_temperature[0]), exchange, suffix="_sound")
    loss = state.heat_loss * (1 + state.residual)
    pad.found(
        "closes", "q'_check", loss, "W/m", "pi D q_sound, to be compared with q'_sound", "D q_sound"
    )


def result_section(seen: Seen, heat_loss: float, surface_temperature: float) -> Section | None:
    """Return the resistance found and what it is compared with.

    Parameters
    ----------
    seen : Seen
        With one draw.
    heat_loss : float
        At the station. [W/m]
    surface_temperature : float
        Mean over the seen face of the station. [K]

    Returns
    -------
    Section or None
        None where the inside temperature is unknown.
    """
    line = seen.line_draws
    if line.inside_temperature is None:
        return None
    pad = Pad()
    if line.layers is None or line.lagged_diameter is None:
        inside = seen.line.inside_temperature
        assert inside is not None
        pad.given("inside_temperature", "T_in", line.inside_temperature, "K", inside.source)
    found = lagging_resistance_from_surface(line.inside_temperature, surface_temperature, heat_loss)
    pad.found("resistance", "R", found, "m K/W", "(T_in - T_face) / q'", "T_in T_face q'")
    if line.layers is not None and line.lagged_diameter is not None:
        state = _solved(seen, line.layers)
        several = "R_spec" if len(line.layers) > 1 else "R_1_spec"
        ratio = found / state.resistance
        pad.found("resistance_ratio", "ratio", ratio, "-", f"R / {several}", f"R {several}")
        installed = tuple(
            replace(layer, factor=np.asarray(layer.factor) * line.installation_factor)
            for layer in line.layers
        )
        excess = heat_loss - _solved(seen, installed).heat_loss
        pad.found("excess", "excess", excess, "W/m", "q' - q'_sound", "q' q'_sound")
    return pad.section("result")
