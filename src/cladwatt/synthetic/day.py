"""The day a survey is drawn on: other air, other wind, and sun where it is asked for."""

from dataclasses import replace

import numpy as np

from cladwatt.synthetic.plant import Declared, PlantFrame

__all__ = ["another_day", "in_the_sun"]

_SUN = Declared(600.0, 90.0)
"""Irradiance where every outdoor frame is put in the sun. [W/m2]"""
_WEATHER = {"air_temperature_C": 1.5, "wind_speed_m_s": 0.3}
"""How far the declared conditions of one draw differ from those of the plant file."""
_SHELTERED = 0.5
"""Relative, of the wind at a pipe that walls shelter, as the assessment takes it by default."""
_SHIFTED = {
    "air_temperature_C", "surroundings_temperature_C", "reflected_temperature_C",
    "sky_total_temperature_C", "sky_band_temperature_C", "window_temperature_C",
}  # fmt: skip
"""What follows the air from day to day."""


def another_day(frame: PlantFrame, random: np.random.Generator) -> PlantFrame:
    """Return a frame whose declared conditions are those of another day."""
    conditions = dict(frame.conditions)
    shift = round(
        float(np.clip(random.standard_normal(), -2, 2)) * _WEATHER["air_temperature_C"], 1
    )
    for key in _SHIFTED & conditions.keys():
        conditions[key] = replace(conditions[key], value=round(conditions[key].value + shift, 1))
    pieces = tuple(
        replace(piece, temperature_C=replace(
            piece.temperature_C, value=round(piece.temperature_C.value + shift, 1)
        ))
        for piece in frame.pieces
    )  # fmt: skip
    if not frame.indoors:
        wind = conditions["wind_speed_m_s"]
        speed = round(wind.value * float(np.exp(_WEATHER["wind_speed_m_s"] * random.normal())), 1)
        u = _SHELTERED * speed if frame.sheltered else 0.2 * speed + 0.1
        conditions["wind_speed_m_s"] = Declared(speed, round(u, 2))
    return replace(frame, conditions=conditions, pieces=pieces)


def in_the_sun(frame: PlantFrame, random: np.random.Generator) -> PlantFrame:
    """Return an outdoor frame with the sun behind the camera, somewhere above."""
    if frame.indoors or frame.sun:
        return frame
    across, height = random.uniform(-1.0, 1.0), random.uniform(0.4, 1.2)
    conditions = frame.conditions | {"solar_irradiance_W_m2": _SUN}
    return replace(frame, conditions=conditions, sun=(float(across), -float(height), -1.0))
