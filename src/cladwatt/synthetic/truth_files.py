"""The truth of a sample, as files beside it."""

import json
from collections.abc import Iterable
from typing import Any

import numpy as np

from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.humidity import dew_point
from cladwatt.synthetic.bodies import PlacedBody, body_numbers
from cladwatt.synthetic.pipes import PipeTruth
from cladwatt.synthetic.truth import FrameTruth, LineTruth

__all__ = [
    "AGED_THRESHOLD",
    "STATION_HEADER",
    "TRUTH_README",
    "region_truth",
    "station_rows",
    "truth_json",
]

FILM_THAT_MATTERS = 100.0
"""Films below are told. [W/(m2 K)]"""
AGED_THRESHOLD = 1.10
"""Ageing throughout counts as damage from this ratio of found to sound loss."""

TRUTH_README = """\
Invented. Nothing here was measured: plant, pipes and damage come from the sample generator,
which also made the frames from them. These files say what is really so, for comparison with
what an assessment finds.

truth.json          by region: kind of damage, whether it counts as damaged (local damage, or
                    ageing throughout that raises the loss more than 10 % above sound), length of
                    the drawn part, mean loss along it without components, what the same pipe
                    would lose if sound and as specified, local stretches; by frame and line: the
                    real conditions behind the declared ones; by component: the heat it gives
                    off, and the length of sound lagged pipe that would give as much
truth_stations.csv  along every drawn part: loss, mean surface temperature around the pipe,
                    resistance of the lagging. Stations run from the first drawn vertex.

A loss is heat given off to the room, negative on a chilled line. It is what leaves the surface:
condensing water brings heat, drying water takes it, and what the sun leaves in the cladding is
taken off. "without components" leaves out the pipe under a drawn flange, valve or support. On a
traced line a part of the loss comes from the tracer: "tracer heat" is what a steam tracer gives
straight to the lagging, of an electric one all its power; "untraced" is the loss with the tracer
off, and so are sound and specified losses. On a line that has just come to temperature the loss
still grows, while the sound one is that at rest. Lagging that is "soaked" is wet or frozen
throughout; its sound loss is that of the same lagging dry.
"""


def _inside(pipe: PipeTruth, drawn: tuple[float, float]) -> Any:
    return (pipe.station > drawn[0]) & (pipe.station < drawn[1])


def _rounded(value: float, digits: int = 6) -> float:
    return float(f"{value:.{digits}g}")


def region_truth(pipe: PipeTruth, frame_id: str, drawn: tuple[float, float]) -> dict[str, Any]:
    """Return what is true of one drawn pipe.

    Parameters
    ----------
    pipe : PipeTruth
        The pipe.
    frame_id : str
        Its frame.
    drawn : (float, float)
        Where the first and last vertex really lie. [m]

    Returns
    -------
    dict
        Names carry their units.
    """
    inside = _inside(pipe, drawn)
    counted = inside & ~pipe.is_component
    mean = float(pipe.heat_loss[counted].mean())
    damage = pipe.damage
    stretches = []
    if damage.is_local:
        stretches.append({
            "kind": damage.kind,
            "start_m": round(damage.start - drawn[0], 4),
            "end_m": round(damage.end - drawn[0], 4),
            "conductivity_factor": round(damage.severity, 3),
            "remaining_thickness": round(damage.remaining, 3),
        })  # fmt: skip
    kind = "soaked" if pipe.is_soaked and damage.kind == "sound" else damage.kind
    untraced = pipe.heat_loss if pipe.untraced_loss is None else pipe.untraced_loss
    by_fluid = float(untraced[counted].mean())
    aged = kind in ("aged", "soaked") and by_fluid / pipe.sound_loss > AGED_THRESHOLD
    length = drawn[1] - drawn[0]
    return {
        "region_id": pipe.plant.id,
        "frame_id": frame_id,
        "tag": pipe.plant.tag,
        "kind": kind,
        "damaged": bool(aged or damage.is_local),
        "aged_factor": round(damage.severity, 4) if damage.kind == "aged" else 1.0,
        "length_m": round(length, 4),
        "heat_loss_W_per_m": _rounded(mean),
        "total_loss_W": _rounded(mean * length),
        "total_loss_without_components_W": _rounded(
            float(pipe.heat_loss[counted].sum()) * pipe.cell_length
        ),
        "sound_loss_W_per_m": _rounded(pipe.sound_loss),
        "specified_loss_W_per_m": _rounded(pipe.specified_loss),
        "excess_W_per_m": _rounded(by_fluid - pipe.sound_loss),
        "resistance_m_K_per_W": _rounded(float(1 / np.mean(1 / pipe.resistance[counted]))),
        "surface_temperature_C": round(
            float(pipe.surface_temperature[counted].mean()) - ZERO_CELSIUS, 3
        ),
        "stretches": stretches,
        "components": [
            _component(pipe, body, number, drawn)
            for body, number in zip(pipe.bodies, body_numbers(pipe.bodies), strict=True)
        ],
        "water_on_surface": round(float(pipe.water_share[counted].mean()), 4),
        "inside_heat_W_per_m": _rounded(float(pipe.inside_heat[counted].mean())),
    } | _tracer(pipe, counted)


def _tracer(pipe: PipeTruth, counted: Any) -> dict[str, float]:
    if pipe.tracer_heat is None or pipe.untraced_loss is None:
        return {}
    return {
        "tracer_heat_W_per_m": _rounded(float(pipe.tracer_heat[counted].mean())),
        "untraced_loss_W_per_m": _rounded(float(pipe.untraced_loss[counted].mean())),
    }


def _component(
    pipe: PipeTruth, body: PlacedBody, number: int, drawn: tuple[float, float]
) -> dict[str, Any]:
    taken = body.covers(pipe.station)
    heat = float(pipe.heat_loss[taken].sum()) * pipe.cell_length
    length = float(np.count_nonzero(taken)) * pipe.cell_length
    return {
        "region_id": f"{pipe.plant.id}-{body.plant.kind}" + (f"-{number}" if number > 1 else ""),
        "kind": body.plant.kind,
        "lagged": body.plant.lagged,
        "start_m": round(body.start - drawn[0], 4),
        "end_m": round(body.end - drawn[0], 4),
        "heat_loss_W": _rounded(heat),
        "surface_temperature_C": round(
            float(pipe.surface_temperature[taken].mean()) - ZERO_CELSIUS, 3
        ),
        "equivalent_lagged_length_m": _rounded(heat / pipe.sound_loss, 4),
        "added_lagged_length_m": _rounded(heat / pipe.sound_loss - length, 4),
    }


def station_rows(pipe: PipeTruth, frame_id: str, drawn: tuple[float, float]) -> Iterable[str]:
    """Yield the lines of ``truth_stations.csv`` of one drawn pipe."""
    component = pipe.is_component
    for i in np.flatnonzero(_inside(pipe, drawn)):
        yield (
            f"{pipe.plant.id},{frame_id},{pipe.station[i] - drawn[0]:.4f},"
            f"{pipe.heat_loss[i]:.3f},{pipe.surface_temperature[i] - ZERO_CELSIUS:.3f},"
            f"{pipe.resistance[i]:.5f},{int(component[i])}"
        )


STATION_HEADER = (
    "region_id,frame_id,station_m,heat_loss_W_per_m,surface_temperature_C,"
    "resistance_m_K_per_W,component"
)


def _conditions(truth: FrameTruth) -> dict[str, float]:
    dew = float(dew_point(truth.air_temperature, truth.relative_humidity))
    found = {
        "air_temperature_C": round(truth.air_temperature - ZERO_CELSIUS, 3),
        "surroundings_temperature_C": round(truth.surroundings_temperature - ZERO_CELSIUS, 3),
        "reflected_temperature_C": round(truth.reflected_temperature - ZERO_CELSIUS, 3),
        "relative_humidity": round(truth.relative_humidity, 4),
        "wind_speed_m_s": round(truth.wind_speed, 4),
        "atmosphere_transmission": round(truth.transmission, 5),
        "convection_factor": round(truth.convection_factor, 4),
        "calibration_share_of_limit": round(truth.calibration, 4),
        "dew_point_C": round(dew - ZERO_CELSIUS, 3),
    }
    if truth.window is not None:
        found["window_transmission"] = round(truth.window.transmission, 4)
        found["window_reflectance"] = round(truth.window.reflectance, 4)
        found["window_temperature_C"] = round(truth.window.temperature - ZERO_CELSIUS, 3)
    if truth.wind_angle_deg is not None:
        found["wind_angle_deg"] = round(truth.wind_angle_deg, 2)
    if truth.sun:
        found["solar_irradiance_W_m2"] = round(truth.solar_irradiance, 2)
    return found


def _line(truth: LineTruth) -> dict[str, Any]:
    found: dict[str, Any] = {
        "fluid_temperature_C": round(truth.fluid_temperature - ZERO_CELSIUS, 3),
        "pipe_outside_diameter_mm": round(truth.pipe_diameter * 1000, 3),
        "lagging_thickness_mm": round(truth.thickness * 1000, 3),
        "emissivity": round(truth.band_emissivity, 4),
        "total_emissivity": round(truth.total_emissivity, 4),
        "bare_pipe_emissivity": round(truth.bare_emissivity, 4),
        "conductivity_factor": round(truth.conductivity_factor, 4),
        "installation_factor": round(truth.installation_factor, 4),
        "solar_absorptance": round(truth.solar_absorptance, 4),
    }
    if truth.layer_thickness:
        found["layer_thickness_mm"] = [round(1000 * part, 3) for part in truth.layer_thickness]
        found["layer_conductivity_factor"] = [round(part, 4) for part in truth.layer_factor]
    if truth.gap:
        found["air_gap_mm"] = round(1000 * truth.gap, 3)
    if truth.tracer_temperature is not None:
        found["tracer_temperature_C"] = round(truth.tracer_temperature - ZERO_CELSIUS, 3)
    if truth.hours_at_temperature is not None:
        found["hours_at_temperature"] = round(truth.hours_at_temperature, 4)
    if truth.condition_factor:
        found["layer_condition_factor"] = [round(part, 4) for part in truth.condition_factor]
    if truth.tracer_power is not None:
        found["tracer_power_W_per_m"] = round(truth.tracer_power, 3)
    if truth.inside_coefficient < FILM_THAT_MATTERS:
        found["inside_film_W_per_m2_K"] = round(truth.inside_coefficient, 3)
    if truth.heat_flow is not None:
        found["heat_flow_W_per_K"] = round(truth.heat_flow, 4)
    if truth.supports_share:
        found["supports_allowance"] = round(truth.supports_share, 4)
    return found


def truth_json(
    seed: int,
    regions: list[dict[str, Any]],
    frames: dict[str, FrameTruth],
    lines: dict[str, LineTruth],
) -> str:
    """Return the text of ``truth.json``."""
    document = {
        "invented": True,
        "seed": seed,
        "regions": regions,
        "frames": {frame_id: _conditions(truth) for frame_id, truth in frames.items()},
        "lines": {tag: _line(truth) for tag, truth in lines.items()},
    }
    return json.dumps(document, indent=1, ensure_ascii=False) + "\n"
