"""The oracle: a survey whose declared inputs are what they really are."""

from dataclasses import replace
from typing import Any

from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.quantities import Quantity, exact
from cladwatt.survey.model import Conditions, Line
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
    it varies around the pipe, the patches of the cladding, the hidden side.
    """
    lines = {tag: _line(line, truth["lines"][tag]) for tag, line in survey.lines.items()}
    frames = tuple(
        replace(entry, conditions=_conditions(entry.conditions, truth["frames"][entry.id]))
        for entry in survey.frames
    )
    return replace(survey, lines=lines, frames=frames)


def _line(line: Line, true: dict[str, float]) -> Line:
    layer = replace(
        line.layers[0],
        thickness=exact(true["lagging_thickness_mm"] / 1000),
        conductivity_factor=exact(true["conductivity_factor"]),
    )
    cladding = replace(
        line.cladding,
        band_emissivity=exact(true["emissivity"]),
        total_emissivity=exact(true["total_emissivity"]),
    )
    return replace(
        line,
        pipe_outside_diameter=exact(true["pipe_outside_diameter_mm"] / 1000),
        layers=(layer, *line.layers[1:]),
        cladding=cladding,
        installation_factor=exact(true["installation_factor"]),
        inside_temperature=exact(true["fluid_temperature_C"] + ZERO_CELSIUS),
    )


def _conditions(conditions: Conditions, true: dict[str, float]) -> Conditions:
    def kelvin(name: str) -> Quantity:
        return exact(true[f"{name}_C"] + ZERO_CELSIUS)

    return replace(
        conditions,
        air_temperature=kelvin("air_temperature"),
        surroundings_temperature=kelvin("surroundings_temperature"),
        reflected_temperature=kelvin("reflected_temperature"),
        relative_humidity=exact(true["relative_humidity"]),
        wind_speed=exact(true["wind_speed_m_s"]),
        atmosphere_transmission=exact(true["atmosphere_transmission"]),
    )
