"""The sample's survey file, as a careful inspector would have written it."""

from cladwatt.synthetic.frame_files import FRAME_FILES
from cladwatt.synthetic.plant import (
    Declared,
    Plant,
    PlantFrame,
    PlantLayer,
    PlantLine,
    PlantPiece,
)
from cladwatt.synthetic.response import RESPONSE_FILE

__all__ = ["survey_text"]

_HEAD = """\
# Survey of an invented plant, made by the sample generator (seed {seed}).
# A key ends with its unit; u_ before a key is its standard uncertainty (one sigma).
# What is really so stands in truth/.

[survey]
name = "{name}"
date = {date}
inspector = "{inspector}"

[site]
name = "Orrenfell Board Mill"
place = "{place}"
latitude_deg = {latitude_deg}
longitude_deg = {longitude_deg}
altitude_m = {altitude_m}
timezone = "{timezone}"

[camera]
model = "{model}"
serial = "{serial}"
field_of_view_deg = {field_of_view_deg}
noise_K = {noise_K}
accuracy_K = {accuracy_K}                    # limit of error, the larger of the two
accuracy_of_reading_percent = {accuracy_of_reading_percent}
spectral_response = "{response}"   # the type's, from its maker's sheet

# What the camera had been told when it recorded: undone before anything else.
[recording]
emissivity = {emissivity}
reflected_temperature_C = {reflected_temperature_C}
transmission = 1.0
"""


def _pair(key: str, declared: Declared) -> str:
    return f"{key} = {declared.value:g}\nu_{key} = {declared.u:g}"


def _layer(layer: PlantLayer) -> str:
    depth = (
        f"thickness_mm = {layer.thickness_mm.value:g}, u_thickness_mm = {layer.thickness_mm.u:g}"
    )
    if layer.material:
        found = "" if layer.condition == "dry" else f', condition = "{layer.condition}"'
        return f'  {{ material = "{layer.material}", {depth}{found} }},'
    return (
        f'  {{ kind = "air_gap", {depth}, inner_emissivity = {layer.inner_emissivity:g}, '
        f"outer_emissivity = {layer.outer_emissivity:g} }},"
    )


def _lagging(line: PlantLine) -> list[str]:
    if line.layers:
        return ["layers = [", *(_layer(layer) for layer in line.layers), "]"]
    return [
        f'lagging_material = "{line.material}"',
        _pair("lagging_thickness_mm", line.quantities["lagging_thickness_mm"]),
        *([] if line.condition == "dry" else [f'lagging_condition = "{line.condition}"']),
    ]


def _inside(line: PlantLine) -> list[str]:
    known = line.quantities
    if "steam_pressure_bar" not in known:
        keys = ("fluid_temperature_C", "wall_temperature_C", "inside_film_W_m2_K", "flow_kg_s",
                "specific_heat_J_kg_K")  # fmt: skip
        return [_pair(key, known[key]) for key in keys if key in known]
    return [_pair("steam_pressure_bar", known["steam_pressure_bar"]), 'steam_pressure_is = "gauge"']


def _line(line: PlantLine) -> str:
    known = line.quantities
    parts = [
        "[[line]]", f'tag = "{line.tag}"', f'area = "{line.area}"', f'fluid = "{line.fluid}"',
        *_inside(line),
        _pair("pipe_outside_diameter_mm", known["pipe_outside_diameter_mm"]), *_lagging(line),
        f'cladding = "{line.cladding}"', f"cladding_thickness_mm = {line.cladding_thickness_mm:g}",
        _pair("emissivity", known["emissivity"]),
        _pair("total_emissivity", known["total_emissivity"]),
    ]  # fmt: skip
    if line.inclination_deg:
        parts.append(f"inclination_deg = {line.inclination_deg:g}")
    if line.tracer_clock is not None:
        kind, key = "steam", "tracer_temperature_C"
        if "tracer_power_W_m" in known:
            kind, key = "electric", "tracer_power_W_m"
        parts.append(f'tracing = "{kind}"\ntracer_clock_position = {line.tracer_clock:g}')
        parts.append(_pair(key, known[key]))
    if "supports_allowance" in known:
        parts.append(_pair("supports_allowance", known["supports_allowance"]))
    if "hours_at_temperature" in known:
        parts.append(_pair("hours_at_temperature", known["hours_at_temperature"]))
    return "\n".join(parts)


def _piece(piece: PlantPiece) -> str:
    known = piece.temperature_C
    return (
        f'  {{ what = "{piece.what}", temperature_C = {known.value:g}, '
        f"u_temperature_C = {known.u:g}, view_factor = {piece.view_factor:g} }},"
    )


def _condition(key: str, declared: Declared, frame: PlantFrame) -> str:
    if key == "wind_speed_m_s" and frame.sheltered:
        return f"{key} = {declared.value:g}\nsheltered = true"
    return _pair(key, declared)


def _settings(frame: PlantFrame) -> list[str]:
    """Return what else a frame declares: wind along the run, the camera's settings and range."""
    parts = []
    if frame.wind_along:
        parts.append(f'wind_along = "{frame.wind_along}"')
    if frame.camera_window is not None:
        transmission, celsius = frame.camera_window
        parts.append(f"camera_window_transmission = {transmission:g}")
        parts.append(f"camera_window_temperature_C = {celsius:g}")
    if frame.day_before:
        parts.append(f"{frame.day_before}_last_24h = true")
    if frame.day_before == "rain":
        parts.append("surface_wet = false")
    if frame.upper_end_C is not None:
        parts.append(f"range_upper_C = {frame.upper_end_C:g}")
    return parts


def _frame(frame: PlantFrame, date: str) -> str:
    suffix, keys, _ = FRAME_FILES[frame.file]
    parts = [
        "[[frame]]", f'id = "{frame.id}"', f'file = "frames/{frame.id}{suffix}"',
        f"time = {date}T{frame.time}:00", f'note = "{frame.note}"', keys,
        f"indoors = {str(frame.indoors).lower()}",
        *(_condition(key, declared, frame) for key, declared in frame.conditions.items()),
        *_settings(frame),
    ]  # fmt: skip
    if frame.pieces:
        parts += ["surroundings = [", *(_piece(piece) for piece in frame.pieces), "]"]
    if frame.sun:
        parts += ["sun_on_pipe = true", "sun_last_24h = true"]
    elif not frame.indoors:
        parts.append("sun_on_pipe = false")
    if frame.wet:
        parts += ["surface_wet = true", "rain_last_24h = true"]
    return "\n".join(parts)


def survey_text(plant: Plant, frames: tuple[PlantFrame, ...], seed: int) -> str:
    """Return the text of ``survey.toml``.

    Parameters
    ----------
    plant : Plant
        The plant.
    frames : tuple of PlantFrame
        Its frames with the conditions of this draw.
    seed : int
        Named in the head.

    Returns
    -------
    str
        TOML.
    """
    date = plant.survey["date"]
    return "\n\n".join([
        _HEAD.format(seed=seed, response=RESPONSE_FILE, **plant.survey, **plant.camera).rstrip(),
        "# ---- the line list " + "-" * 60,
        *(_line(line) for line in plant.lines.values()),
        "# ---- the frames " + "-" * 63,
        *(_frame(frame, date) for frame in frames),
    ]) + "\n"  # fmt: skip
