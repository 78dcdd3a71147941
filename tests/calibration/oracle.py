"""The oracle: a survey whose declared inputs are what they really are."""

import math
from dataclasses import replace
from typing import Any

import numpy as np

from cladwatt.physics.air_gap import air_gap_conductance
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.quantities import Quantity, exact
from cladwatt.survey.model import Conditions, Layer, Line, Tracing, Window
from cladwatt.survey.survey import Survey

__all__ = ["with_true_inputs"]


def with_true_inputs(survey: Survey, truth: dict[str, Any]) -> Survey:
    """Return the survey with every declared input at its true value, without uncertainty.

    Parameters
    ----------
    survey : Survey
    truth : dict
        ``truth.json`` beside it.

    Notes
    -----
    What nobody declares stays unknown: the camera's calibration, the convection law's error, how
    it varies around the pipe, the patches of the cladding, the hidden side. Surroundings, however
    declared (sky, clouds, pieces), become the uniform ones that give the same; the inside, however
    declared (steam pressure, wall), the temperature that was there.
    """
    lines = {tag: _line(line, truth["lines"][tag]) for tag, line in survey.lines.items()}
    frames = tuple(
        replace(entry, conditions=_conditions(entry.conditions, truth["frames"][entry.id]))
        for entry in survey.frames
    )
    return replace(survey, lines=lines, frames=frames)


def _line(line: Line, true: dict[str, Any]) -> Line:
    cladding = replace(
        line.cladding,
        band_emissivity=exact(true["emissivity"]),
        total_emissivity=exact(true["total_emissivity"]),
        solar_absorptance=exact(true["solar_absorptance"]),
    )
    return replace(
        line,
        pipe_outside_diameter=exact(true["pipe_outside_diameter_mm"] / 1000),
        layers=_layers(line, true),
        cladding=cladding,
        installation_factor=exact(true["installation_factor"]),
        inside_temperature=exact(true["fluid_temperature_C"] + ZERO_CELSIUS),
        steam_pressure=None,
        tracing=_tracing(line.tracing, true),
        hours_at_temperature=_given(line.hours_at_temperature, true, "hours_at_temperature"),
        inside_film=_given(line.inside_film, true, "inside_film_W_per_m2_K"),
        flow=_flow(line, true),
        supports_allowance=exact(true.get("supports_allowance", 0.0)),
    )


def _given(declared: Quantity | None, true: dict[str, Any], name: str) -> Quantity | None:
    """Return the true value of what is declared; a declared one must have a truth."""
    return None if declared is None else exact(true[name])


def _flow(line: Line, true: dict[str, Any]) -> Quantity | None:
    """Return the flow that carries the true heat at the declared specific heat."""
    if line.flow is None or line.specific_heat is None:
        return line.flow
    return exact(true["heat_flow_W_per_K"] / line.specific_heat.value)


def _tracing(tracing: Tracing, true: dict[str, Any]) -> Tracing:
    celsius = _given(tracing.temperature, true, "tracer_temperature_C")
    return replace(
        tracing,
        temperature=None if celsius is None else exact(celsius.value + ZERO_CELSIUS),
        power=_given(tracing.power, true, "tracer_power_W_per_m"),
    )


def _layers(line: Line, true: dict[str, Any]) -> tuple[Layer, ...]:
    """Return the layers as they are; a layer of lagging has its numbers in the order of layers."""
    thickness = true.get("layer_thickness_mm", [true["lagging_thickness_mm"]])
    factor = true.get("layer_conductivity_factor", [true["conductivity_factor"]])
    wet = true.get("layer_condition_factor", [1.0] * len(thickness))
    inner = true["pipe_outside_diameter_mm"] / 1000
    layers: list[Layer] = []
    solid = 0
    for layer in line.layers:
        if layer.kind == "air_gap":
            known = _air_gap(layer, inner, true["air_gap_mm"] / 1000)
        else:
            known = replace(
                layer,
                thickness=exact(thickness[solid] / 1000),
                conductivity_factor=exact(factor[solid]),
                condition_factor=None if layer.condition == "dry" else exact(wet[solid]),
            )
            solid += 1
        assert known.thickness is not None
        inner += 2 * known.thickness.value
        layers.append(known)
    return tuple(layers)


def _air_gap(layer: Layer, inner: float, thickness: float) -> Layer:
    """Return a gap of the true width, its conductivity worked out for that."""
    assert layer.conductivity is not None
    assert layer.inner_emissivity is not None
    assert layer.outer_emissivity is not None
    outer = inner + 2 * thickness
    nodes = np.array(layer.conductivity.temperature)
    conductance = air_gap_conductance(
        inner, outer, inner_temperature=nodes + 5.0, outer_temperature=nodes - 5.0,
        inner_emissivity=layer.inner_emissivity.value,
        outer_emissivity=layer.outer_emissivity.value,
    )  # fmt: skip
    values = conductance * math.log(outer / inner) / (2 * math.pi)
    curve = replace(layer.conductivity, conductivity=tuple(float(one) for one in values))
    return replace(
        layer, thickness=exact(thickness), conductivity=curve, conductivity_factor=exact(1.0)
    )


def _conditions(conditions: Conditions, true: dict[str, Any]) -> Conditions:
    def kelvin(name: str) -> Quantity:
        return exact(true[f"{name}_C"] + ZERO_CELSIUS)

    return replace(
        conditions,
        air_temperature=kelvin("air_temperature"),
        surroundings_temperature=kelvin("surroundings_temperature"),
        surroundings_pieces=(),
        sky_total_temperature=None,
        sky_band_temperature=None,
        sky_view_factor=None,
        cloud_cover=None,
        reflected_temperature=kelvin("reflected_temperature"),
        relative_humidity=exact(true["relative_humidity"]),
        wind_speed=exact(true["wind_speed_m_s"]),
        wind_angle_deg=_given(conditions.wind_angle_deg, true, "wind_angle_deg"),
        atmosphere_transmission=exact(true["atmosphere_transmission"]),
        solar_irradiance=_given(conditions.solar_irradiance, true, "solar_irradiance_W_m2"),
        window=None if conditions.window is None else _window(true),
    )


def _window(true: dict[str, Any]) -> Window:
    return Window(
        exact(true["window_transmission"]),
        exact(true["window_reflectance"]),
        exact(true["window_temperature_C"] + ZERO_CELSIUS),
    )
