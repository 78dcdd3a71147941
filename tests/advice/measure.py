"""Make the advised measurement on a drawn survey: its true value, with the error it may have."""

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np

from cladwatt.frame_assessment import lens_image
from cladwatt.inverse import advice
from cladwatt.inverse.frame_draws import band_of
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.radiometry import lens_radiance
from cladwatt.quantities import Quantity
from cladwatt.survey.frame import Frame
from cladwatt.survey.model import FrameEntry, Layer
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey

__all__ = ["measured"]

TAPE, U_TAPE, U_PROBE = 0.95, 0.02, 1.5
CORE = 5
"""Half the side of a patch. [px]"""


def measured(
    survey: Survey,
    entry: FrameEntry,
    region: Region,
    frame: Frame,
    truth: dict[str, Any],
    key: str,
    random: np.random.Generator,
) -> tuple[Survey, FrameEntry, Frame] | None:
    """Return survey, frame entry and frame with a measurement made; None where it cannot be."""
    name = key.removeprefix("advice.")
    there, line = truth["frames"][entry.id], truth["lines"][region.tag]
    if name in ("air_temperature", "surroundings", "wind"):
        entry = _conditions(entry, there, name, random)
    elif name in ("inside_temperature", "lagging_data"):
        survey = _line(survey, region, line, name, random)
    elif name in ("reflector", "tape_patch", "contact_temperature"):
        made = _patch(survey, entry, region, frame, there, line, name, random)
        if made is None:
            return None
        survey, frame = made
    elif name == "background":
        survey, frame = _background(survey, entry, frame, there, random)
    else:
        return None
    frames = tuple(entry if one.id == entry.id else one for one in survey.frames)
    return replace(survey, frames=frames), entry, frame


def _conditions(
    entry: FrameEntry, there: dict[str, Any], name: str, random: np.random.Generator
) -> FrameEntry:
    def read(value: float, u: float, **bounds: float) -> Quantity:
        return Quantity(value + u * random.standard_normal(), u, **bounds)

    known = entry.conditions
    if name == "air_temperature":
        air = read(there["air_temperature_C"] + ZERO_CELSIUS, advice.AIR_U)
        return replace(entry, conditions=replace(known, air_temperature=air))
    if name == "surroundings":
        around = read(there["surroundings_temperature_C"] + ZERO_CELSIUS, advice.SURROUNDINGS_U)
        plain = replace(
            known, surroundings_temperature=around, surroundings_pieces=(),
            sky_total_temperature=None, cloud_cover=None,
        )  # fmt: skip
        return replace(entry, conditions=plain)
    u = max(advice.WIND_U, advice.WIND_U_RELATIVE * there["wind_speed_m_s"])
    wind = max(there["wind_speed_m_s"] + u * random.standard_normal(), 0.0)
    return replace(entry, conditions=replace(known, wind_speed=Quantity(wind, u, lower=0.0)))


def _line(
    survey: Survey, region: Region, true: dict[str, Any], name: str, random: np.random.Generator
) -> Survey:
    assert region.tag is not None
    line = survey.lines[region.tag]
    if name == "inside_temperature":
        shown = true["fluid_temperature_C"] + ZERO_CELSIUS
        shown += advice.INSIDE_U * random.standard_normal()
        changed = replace(line, inside_temperature=Quantity(shown, advice.INSIDE_U))
    else:
        thickness = true.get("layer_thickness_mm", [true["lagging_thickness_mm"]])
        factor = true.get("layer_conductivity_factor", [true["conductivity_factor"]])
        layers: list[Layer] = []
        solid = [layer for layer in line.layers if layer.kind != "air_gap"]
        for layer, thick, share in zip(solid, thickness, factor, strict=False):
            # together the resistance's u of 4 %
            each = advice.LAGGING_U / math.sqrt(2)
            thick, share = (
                value * (1 + each * random.standard_normal()) for value in (thick / 1000, share)
            )
            layers.append(
                replace(layer, thickness=Quantity(thick, each * thick),
                        conductivity_factor=Quantity(share, each * share))
            )  # fmt: skip
        changed = replace(line, layers=tuple(layers))
    return replace(survey, lines={**survey.lines, region.tag: changed})


def _patch(
    survey: Survey,
    entry: FrameEntry,
    region: Region,
    frame: Frame,
    there: dict[str, Any],
    line: dict[str, Any],
    name: str,
    random: np.random.Generator,
) -> tuple[Survey, Frame] | None:
    """Hold a reflector, stick tape or put a probe on the pipe where the region is drawn."""
    mirrored = there["reflected_temperature_C"] + ZERO_CELSIUS
    if name == "reflector":
        u = advice.FOIL_U
        value = Quantity(mirrored + u * random.standard_normal(), 0.1)
        return _with(
            survey, Region("adv", entry.id, "foil", outline=_box(8, 8), value=value)
        ), frame
    if region.centreline is None:
        return None
    points = np.asarray(region.centreline)
    x, y = 0.6 * points[0] + 0.4 * points[1]
    band, scene = band_of(survey.camera), band_of(survey.camera).radiance(mirrored)
    lens = lens_image(survey, entry, frame).lens_temperature
    spot = (
        slice(round(y) - CORE, round(y) + CORE + 1),
        slice(round(x) - CORE, round(x) + CORE + 1),
    )
    shown = float(np.nanmedian(lens[spot]))
    if not math.isfinite(shown):
        return None
    to_true, to_shown = _camera(survey, there, shown)
    through, air = there["atmosphere_transmission"], there["air_temperature_C"] + ZERO_CELSIUS
    arriving = (band.radiance(to_true(shown)) - (1 - through) * band.radiance(air)) / through
    own = (arriving - (1 - line["emissivity"]) * scene) / line["emissivity"]
    surface = float(band.temperature(own))
    if name == "contact_temperature":
        value = Quantity(surface + U_PROBE * random.standard_normal(), U_PROBE)
        return _with(survey, Region("adv", entry.id, "contact", region.tag,
                                    outline=_box(x, y), value=value)), frame  # fmt: skip
    tape = TAPE + U_TAPE * random.standard_normal()
    cooling = advice.TAPE_COOLING * abs(random.standard_normal())
    sent = scene + tape * (1 - cooling) * (own - scene)
    arrived = through * sent + (1 - through) * band.radiance(air)
    pasted = _pasted(survey, entry, frame, spot, to_shown(float(band.temperature(arrived))))
    patch = Region("adv", entry.id, "tape", region.tag, outline=_box(x, y))
    return _with(survey, patch), pasted


def _background(
    survey: Survey,
    entry: FrameEntry,
    frame: Frame,
    there: dict[str, Any],
    random: np.random.Generator,
) -> tuple[Survey, Frame]:
    """Put a painted plate near the air's temperature into a corner of the frame."""
    true = there["air_temperature_C"] + ZERO_CELSIUS + 1.0
    _, to_shown = _camera(survey, there, true)
    shown = to_shown(true + advice.BACKGROUND_EMISSIVITY_U * random.standard_normal())
    spot = (slice(2, 15), slice(2, 15))
    u = advice.BACKGROUND_U
    value = Quantity(true + u * random.standard_normal(), u)
    region = Region("adv", entry.id, "background", outline=_box(8, 8), value=value)
    return _with(survey, region), _pasted(survey, entry, frame, spot, shown)


def _with(survey: Survey, region: Region) -> Survey:
    return replace(survey, regions=(*survey.regions, region))


def _box(x: float, y: float) -> tuple[tuple[float, float], ...]:
    h = CORE
    return ((x - h, y - h), (x + h, y - h), (x + h, y + h), (x - h, y + h))


def _camera(
    survey: Survey, there: dict[str, Any], about: float
) -> tuple[Callable[[float], float], Callable[[float], float]]:
    """Return what undoes the camera's true error, and what adds it. [K]"""
    accuracy = survey.camera.accuracy
    limit = max(accuracy.limit, accuracy.percent / 100 * abs(about - ZERO_CELSIUS))
    error = there["calibration_share_of_limit"] * limit
    return (lambda shown: shown - error), (lambda true: true + error)


def _pasted(
    survey: Survey, entry: FrameEntry, frame: Frame, spot: tuple[slice, ...], lens: float
) -> Frame:
    """Return the frame with one temperature at the lens, as the camera would have recorded it."""
    band, told = band_of(survey.camera), entry.recording
    recorded = np.linspace(200.0, 700.0, 20_001)
    arriving = band.temperature(
        lens_radiance(
            recorded, band=band, emissivity=told.emissivity,
            reflected_temperature=told.reflected_temperature, transmission=told.transmission,
            atmosphere_temperature=told.atmosphere_temperature,
            window_transmission=told.window_transmission,
            window_temperature=told.window_temperature,
        )
    )  # fmt: skip
    usable = np.isfinite(arriving)
    temperature = frame.temperature.copy()
    temperature[spot] = np.interp(lens, arriving[usable], recorded[usable])
    return replace(frame, temperature=temperature)
