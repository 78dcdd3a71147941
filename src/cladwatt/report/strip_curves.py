"""The lower panels of a strip picture: loss per metre, resistance ratio, axis of metres."""

import numpy as np

from cladwatt.report import colours
from cladwatt.report.numbers import format_number
from cladwatt.report.strip_series import left_out_runs
from cladwatt.report.strip_sheet import (
    LEFT,
    LOSS_HEIGHT,
    NUMBER,
    RATIO_HEIGHT,
    RIGHT,
    SMALL,
    TICK,
    Sheet,
    draw_words,
    wrapped,
)
from cladwatt.report.svg import Axis, tick_decimals
from cladwatt.report.wording import sentence
from cladwatt.types import FloatArray

__all__ = ["draw_loss", "draw_metres", "draw_ratio"]


def _value_axis(curves: tuple[FloatArray, ...], top: float, height: float) -> Axis:
    """Return an axis that holds all curves and zero."""
    values = np.concatenate(curves)
    values = values[np.isfinite(values)]
    low, high = min(0.0, float(values.min())), max(0.0, float(values.max()))
    room = 0.06 * (high - low) or 1.0
    return Axis(low - room if low < 0 else 0.0, high + room if high > 0 else 0.0, top + height, top)


def draw_loss(sheet: Sheet, top: float) -> None:
    """Draw the loss per metre with its band and the loss of sound lagging."""
    series = sheet.series
    if not np.isfinite(series.loss).any():
        draw_words(sheet, top, LOSS_HEIGHT, [sheet.say("flux_only")])
        return
    axis = _value_axis(
        (series.loss, series.loss_low, series.loss_high, series.sound), top, LOSS_HEIGHT
    )
    label = sheet.say("gain" if sheet.region.gain else "loss")
    _frame(sheet, top, LOSS_HEIGHT, axis, label)
    _curve(sheet, axis, series.loss, series.loss_low, series.loss_high)
    _legend(sheet, top, "band", sheet.say("found_line"))
    if np.isfinite(series.sound).any():
        x = sheet.metres.places(series.station)
        for run in series.runs(series.sound):
            points = list(zip(x[run], axis.places(series.sound[run]), strict=True))
            sheet.svg.path(points, fill="none", stroke=colours.INK, stroke_width=1.4,
                          stroke_dasharray="7 4")  # fmt: skip
        _legend(sheet, top, "dash", sheet.say("sound_line"), 1)


def draw_ratio(sheet: Sheet, top: float) -> None:
    """Draw the resistance found over the specified one."""
    series = sheet.series
    if not np.isfinite(series.ratio).any():
        missing = sheet.region.missing
        words = (
            sheet.say("no_ratio", reason=sentence(missing[0], sheet.language))
            if missing
            else sheet.say("no_ratio_plain")
        )
        draw_words(sheet, top, RATIO_HEIGHT, [words])
        return
    high = series.ratio_high[np.isfinite(series.ratio_high)]
    highest = 1.06 * float(np.percentile(high, 98)) if high.size else 1.0
    axis = Axis(0.0, min(max(highest, 1.25), 3.0), top + RATIO_HEIGHT, top)
    _frame(sheet, top, RATIO_HEIGHT, axis, sheet.say("ratio"))
    _curve(sheet, axis, series.ratio, series.ratio_low, series.ratio_high)
    y = axis(1.0)
    sheet.svg.line(LEFT, y, RIGHT, y, stroke=colours.INK, stroke_width=1.2,
                  stroke_dasharray="2 3")  # fmt: skip
    sheet.svg.text(RIGHT + 12, y + 4.5, sheet.say("specified_line"), font_size=12,
                  fill=colours.QUIET)  # fmt: skip


def draw_metres(sheet: Sheet, y: float) -> None:
    """Draw the axis along the pipe under the panels."""
    ticks = sheet.metres.ticks(8)
    for tick in ticks:
        x = sheet.metres(tick)
        sheet.svg.line(x, y, x, y + TICK, stroke=colours.INK)
        sheet.svg.text(x, y + 19, format_number(tick, tick_decimals(ticks), NUMBER),
                      text_anchor="middle", font_size=SMALL, fill=colours.INK)  # fmt: skip
    sheet.svg.text((LEFT + RIGHT) / 2, y + 38, sheet.say(sheet.along), text_anchor="middle",
                  font_size=SMALL, fill=colours.INK)  # fmt: skip
    if left_out_runs(sheet.region, sheet.metres.low, sheet.metres.high):
        sheet.svg.rect(RIGHT + 12, y + 27, 18, 12, fill=sheet.hatch, stroke=colours.QUIET,
                      stroke_width=0.6)  # fmt: skip
        sheet.svg.text(RIGHT + 35, y + 38, sheet.say("left_out"), font_size=12,
                      fill=colours.QUIET)  # fmt: skip


def _frame(sheet: Sheet, top: float, height: float, axis: Axis, label: str) -> None:
    svg = sheet.svg
    for start, end in left_out_runs(sheet.region, sheet.metres.low, sheet.metres.high):
        x1, x2 = sheet.metres(start), sheet.metres(end)
        svg.rect(x1, top, x2 - x1, height, fill=sheet.hatch)
    ticks = axis.ticks(4)
    for tick in ticks:
        y = axis(tick)
        svg.line(LEFT, y, RIGHT, y, stroke=colours.HAIR, stroke_width=0.7)
        svg.text(LEFT - 9, y + 4.5, format_number(tick, tick_decimals(ticks), NUMBER),
                 text_anchor="end", font_size=SMALL, fill=colours.INK)  # fmt: skip
    svg.rect(LEFT, top, RIGHT - LEFT, height, fill="none", stroke=colours.INK)
    lines = label.split("\n")
    for i, line in enumerate(lines):
        x, y = 16.0 + 15 * i, top + height / 2
        svg.text(x, y, line, text_anchor="middle", font_size=SMALL, fill=colours.INK,
                 transform=f"rotate(-90 {x:g} {y:g})")  # fmt: skip


def _curve(sheet: Sheet, axis: Axis, middle: FloatArray, low: FloatArray, high: FloatArray) -> None:
    hue = colours.hue_of(sheet.region.gain)
    x = sheet.metres.places(sheet.series.station)
    for run in sheet.series.runs(low, high):
        if run.size == 1:
            run, wide = np.repeat(run, 2), np.array([-1.5, 1.5])
        else:
            wide = np.zeros(run.size)
        up = list(zip(x[run] + wide, axis.places(high[run]), strict=True))
        down = list(zip(x[run] + wide, axis.places(low[run]), strict=True))
        sheet.svg.path(up + down[::-1], close="z", fill=hue, fill_opacity=0.2)
    for run in sheet.series.runs(middle):
        points = list(zip(x[run], axis.places(middle[run]), strict=True))
        if len(points) == 1:
            points = [(points[0][0] - 1.5, points[0][1]), (points[0][0] + 1.5, points[0][1])]
        sheet.svg.path(points, fill="none", stroke=hue, stroke_width=1.8,
                      stroke_linejoin="round")  # fmt: skip


def _legend(sheet: Sheet, top: float, name: str, words: str, row: int = 0) -> None:
    svg, x, y = sheet.svg, RIGHT + 12, top + 30 + 60 * row
    hue = colours.hue_of(sheet.region.gain)
    if name == "band":
        svg.rect(x, y - 6, 26, 12, fill=hue, fill_opacity=0.2)
        svg.line(x, y, x + 26, y, stroke=hue, stroke_width=1.8)
    else:
        svg.line(x, y, x + 26, y, stroke=colours.INK, stroke_width=1.4,
                 stroke_dasharray="7 4")  # fmt: skip
    for i, line in enumerate(wrapped(words, 14)):
        svg.text(x, y + 19 + 14 * i, line, font_size=12, fill=colours.QUIET)
