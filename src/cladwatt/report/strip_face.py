"""The upper panel of a strip picture: the straightened temperature and its scale."""

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from cladwatt.report import colours
from cladwatt.report.numbers import celsius, format_number
from cladwatt.report.strip_series import resample_columns
from cladwatt.report.strip_sheet import (
    FACE_HEIGHT,
    FACE_TOP,
    LEFT,
    NUMBER,
    RIGHT,
    SMALL,
    Sheet,
    draw_words,
)
from cladwatt.report.svg import Axis, nice_ticks, png_data_uri, tick_decimals
from cladwatt.results.assessment import RegionResult
from cladwatt.types import FloatArray

__all__ = ["common_limits", "draw_face", "temperature_limits"]


def temperature_limits(*regions: RegionResult) -> tuple[float, float] | None:
    """Return one range of temperatures for strips that are to be compared.

    Parameters
    ----------
    *regions : RegionResult
        Regions shown with the same colours.

    Returns
    -------
    (float, float) or None
        0.5 and 99.5 percentiles of what was kept, widened to whole kelvins; None where no region
        kept a field. [K]
    """
    fields = [r.strip_temperature for r in regions if r.strip_temperature is not None]
    values = np.concatenate([f[np.isfinite(f)] for f in fields]) if fields else np.empty(0)
    if values.size == 0:
        return None
    low, high = np.percentile(values, [0.5, 99.5]) - 273.15
    return math.floor(low) + 273.15, max(math.ceil(high), math.floor(low) + 2) + 273.15


def common_limits(
    region: RegionResult, of_line: Sequence[RegionResult]
) -> tuple[float, float] | None:
    """Return the range a region shares with its line, or its own where the shared one is too wide.

    Parameters
    ----------
    region : RegionResult
        The region to be drawn.
    of_line : sequence of RegionResult
        All regions of its line, this one among them.

    Returns
    -------
    (float, float) or None
        The shared range, unless one bare stretch elsewhere would leave this region less than
        half of the colours. [K]
    """
    own, shared = temperature_limits(region), temperature_limits(*of_line)
    if own is None or shared is None:
        return own
    centre = own[0] if region.air_temperature is None else region.air_temperature
    reach = max(abs(limit - centre) for limit in own)
    return shared if max(abs(limit - centre) for limit in shared) <= 2 * reach else own


def draw_face(sheet: Sheet) -> None:
    """Draw the straightened temperature with its scale; words where none was kept."""
    svg, field = sheet.svg, sheet.region.strip_temperature
    svg.text(LEFT - 10, FACE_TOP + FACE_HEIGHT / 2 + 5, sheet.say("face"),
             text_anchor="end", fill=colours.QUIET, font_size=SMALL)  # fmt: skip
    if field is None or sheet.limits is None:
        draw_words(sheet, FACE_TOP, FACE_HEIGHT, [sheet.say("no_temperature")])
        return
    svg.rect(LEFT, FACE_TOP, RIGHT - LEFT, FACE_HEIGHT, fill=sheet.hatch)
    columns = resample_columns(sheet.region, low=sheet.metres.low, high=sheet.metres.high)
    centre = sheet.limits[0] if sheet.air is None else sheet.air
    rows = _colours_of(sheet, field[:, columns], centre)
    rows[:, columns < 0] = 0
    svg.element(
        "image", x=LEFT, y=FACE_TOP, width=RIGHT - LEFT, height=FACE_HEIGHT,
        preserveAspectRatio="none", image_rendering="pixelated",
        href=png_data_uri(rows, colours.diverging_palette()),
    )  # fmt: skip
    svg.rect(LEFT, FACE_TOP, RIGHT - LEFT, FACE_HEIGHT, fill="none", stroke=colours.INK)
    _draw_scale(sheet, centre)


def _colours_of(sheet: Sheet, field: FloatArray, centre: float) -> NDArray[np.uint8]:
    assert sheet.limits is not None
    step = max(1, field.shape[0] // 96)
    return colours.temperature_index(field[::step], centre=centre, limits=sheet.limits)


def _draw_scale(sheet: Sheet, centre: float) -> None:
    assert sheet.limits is not None
    svg, (low, high) = sheet.svg, sheet.limits
    x, axis = RIGHT + 14, Axis(low, high, FACE_TOP + FACE_HEIGHT, FACE_TOP)
    ramp = np.linspace(high, low, 64)[:, None]
    svg.element(
        "image", x=x, y=FACE_TOP, width=14, height=FACE_HEIGHT, preserveAspectRatio="none",
        href=png_data_uri(_colours_of(sheet, ramp, centre), colours.diverging_palette()),
    )  # fmt: skip
    svg.rect(x, FACE_TOP, 14, FACE_HEIGHT, fill="none", stroke=colours.INK, stroke_width=0.8)
    ticks = nice_ticks(celsius(low), celsius(high), 4)
    for tick in ticks:
        y = axis(tick + 273.15)
        svg.line(x + 14, y, x + 18, y, stroke=colours.INK)
        label = format_number(tick, tick_decimals(ticks), NUMBER)
        svg.text(x + 22, y + 4.5, label, font_size=SMALL, fill=colours.INK)
    svg.text(x, FACE_TOP + FACE_HEIGHT + 17, sheet.say("surface"), font_size=SMALL,
             fill=colours.QUIET)  # fmt: skip
    if sheet.air is not None:
        degrees = format_number(celsius(sheet.air), 1)
        svg.text(x, FACE_TOP + FACE_HEIGHT + 33, sheet.say("air", temperature=degrees),
                 font_size=SMALL, fill=colours.QUIET)  # fmt: skip
        if low < sheet.air < high:
            y = axis(sheet.air)
            svg.line(x - 4, y, x + 18, y, stroke=colours.INK, stroke_width=1.6)
