"""The sample's survey file, as a careful inspector would have written it."""

from cladwatt.synthetic.frame_files import FRAME_FILES
from cladwatt.synthetic.plant import Declared, Plant, PlantFrame, PlantLine

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
altitude_m = {altitude_m}
timezone = "{timezone}"

[camera]
model = "{model}"
serial = "{serial}"
field_of_view_deg = {field_of_view_deg}
noise_K = {noise_K}
accuracy_K = {accuracy_K}                    # limit of error, the larger of the two
accuracy_of_reading_percent = {accuracy_of_reading_percent}

# What the camera had been told when it recorded: undone before anything else.
[recording]
emissivity = {emissivity}
reflected_temperature_C = {reflected_temperature_C}
transmission = 1.0
"""


def _pair(key: str, declared: Declared) -> str:
    return f"{key} = {declared.value:g}\nu_{key} = {declared.u:g}"


def _line(line: PlantLine) -> str:
    parts = [
        "[[line]]", f'tag = "{line.tag}"', f'area = "{line.area}"', f'fluid = "{line.fluid}"',
        _pair("fluid_temperature_C", line.quantities["fluid_temperature_C"]),
        _pair("pipe_outside_diameter_mm", line.quantities["pipe_outside_diameter_mm"]),
        f'lagging_material = "{line.material}"',
        _pair("lagging_thickness_mm", line.quantities["lagging_thickness_mm"]),
        f'cladding = "{line.cladding}"', f"cladding_thickness_mm = {line.cladding_thickness_mm:g}",
        _pair("emissivity", line.quantities["emissivity"]),
        _pair("total_emissivity", line.quantities["total_emissivity"]),
    ]  # fmt: skip
    if line.inclination_deg:
        parts.append(f"inclination_deg = {line.inclination_deg:g}")
    return "\n".join(parts)


def _frame(frame: PlantFrame, date: str) -> str:
    suffix, keys, _ = FRAME_FILES[frame.file]
    parts = [
        "[[frame]]", f'id = "{frame.id}"', f'file = "frames/{frame.id}{suffix}"',
        f"time = {date}T{frame.time}:00", f'note = "{frame.note}"', keys,
        f"indoors = {str(frame.indoors).lower()}",
        *(_pair(key, declared) for key, declared in frame.conditions.items()),
    ]  # fmt: skip
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
        _HEAD.format(seed=seed, **plant.survey, **plant.camera).rstrip(),
        "# ---- the line list " + "-" * 60,
        *(_line(line) for line in plant.lines.values()),
        "# ---- the frames " + "-" * 63,
        *(_frame(frame, date) for frame in frames),
    ]) + "\n"  # fmt: skip
