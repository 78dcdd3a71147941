"""The log of a line as a picture: who sees which metres, loss and damage by station, gaps blank."""

import hashlib
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from cladwatt.report import colours
from cladwatt.report.numbers import as_gain, format_number, format_probability
from cladwatt.report.strip_sheet import LEFT, NUMBER, RIGHT, SMALL, TICK, WIDTH, wrapped
from cladwatt.report.svg import (
    Axis,
    Drawing,
    clip_text,
    isolated,
    nice_ticks,
    text_width,
    tick_decimals,
)
from cladwatt.report.wording import text
from cladwatt.results.assessment import LineLog, LogBin, RegionResult

__all__ = ["line_svg"]

BREAK_FROM = 1.0
"""A gap longer than this is drawn as a break, not to scale. [m]"""
BREAK_WIDTH = 64.0
BAR_TOP, BAR_STEP = 30.0, 24.0
LOSS_HEIGHT, CHANCE_HEIGHT, GAP = 150.0, 26.0, 14.0
TOUCHING = 1e-6


@dataclass(frozen=True)
class _Along:
    """Maps stations to places; long gaps are breaks of one width."""

    parts: tuple[tuple[float, float], ...]
    """From and to of what is drawn to scale. [m]"""
    starts: tuple[float, ...]
    """Places of their beginnings."""
    scale: float
    """Drawing units per metre."""

    def __call__(self, station: float) -> float:
        def apart(row: int) -> float:
            low, high = self.parts[row]
            return max(low - station, station - high, 0.0)

        # a station in a break goes to the nearer side of it
        row = min(range(len(self.parts)), key=apart)
        low, high = self.parts[row]
        return self.starts[row] + self.scale * (min(max(station, low), high) - low)


def _along(log: LineLog, ends: Mapping[str, tuple[float, float]]) -> _Along:
    low, high = min(low for low, _ in ends.values()), max(high for _, high in ends.values())
    cuts = [gap for gap in log.not_seen if gap[1] - gap[0] > BREAK_FROM]
    edges = [low, *(edge for gap in cuts for edge in gap), high]
    parts = tuple(zip(edges[::2], edges[1::2], strict=True))
    width = min(BREAK_WIDTH, 0.4 * (RIGHT - LEFT) / max(len(cuts), 1))
    metres = sum(end - begin for begin, end in parts)
    scale = (RIGHT - LEFT - width * len(cuts)) / max(metres, TOUCHING)
    starts, place = [], LEFT
    for begin, end in parts:
        starts.append(place)
        place += scale * (end - begin) + width
    return _Along(parts, tuple(starts), scale)


@dataclass(frozen=True)
class _Sheet:
    svg: Drawing
    log: LineLog
    along: _Along
    regions: Mapping[str, RegionResult]
    ends: Mapping[str, tuple[float, float]]
    language: str
    hatch: str

    def say(self, key: str, **parameters: float | str) -> str:
        return text(f"line_log.{key}", self.language, **parameters)

    def printed(self, part: LogBin) -> bool:
        """Whether any frame quantifies it, at least as indicative."""
        return any(self.regions[one].verdict.level != "not quantified" for one in part.regions)

    def places(self, part: LogBin) -> tuple[float, float]:
        """Return where a bin is drawn, no wider than its regions."""
        low = max(part.station, min(self.ends[one][0] for one in part.regions))
        end = part.station + 0.1
        high = min(end, max(self.ends[one][1] for one in part.regions))
        return self.along(low), self.along(high)


def line_svg(log: LineLog, regions: Mapping[str, RegionResult], language: str = "en") -> str:
    """Draw the log of a line.

    Parameters
    ----------
    log : LineLog
        With at least one bin.
    regions : mapping of str to RegionResult
        By region id.
    language : str
        Code of a language file.

    Returns
    -------
    str
        A complete SVG, self-contained; what no frame shows is blank in it, and what no frame
        quantifies hatched.
    """
    ends = {name: _ends(regions[name]) for name in log.regions}
    top = BAR_TOP + BAR_STEP * len(log.regions) + GAP + 4
    prefix = "l" + hashlib.sha256(log.tag.encode("utf-8", "replace")).hexdigest()[:10]
    described = text(
        "line_log.described", language, tag=isolated(clip_text(log.tag, 200)),
        covered=format_number(log.covered_length, 1), count=f"{len(log.regions)}",
        gaps=f"{len(log.not_seen)}",
    )  # fmt: skip
    svg = Drawing(
        WIDTH, top + LOSS_HEIGHT + GAP + CHANCE_HEIGHT + 50, prefix,
        text("line_log.title", language, tag=isolated(clip_text(log.tag, 200))), described,
    )  # fmt: skip
    svg.rect(0, 0, WIDTH, svg.height, fill=colours.PAPER)
    sheet = _Sheet(svg, log, _along(log, ends), regions, ends, language, svg.hatch())
    chance = top + LOSS_HEIGHT + GAP
    _draw_regions(sheet)
    _draw_blanks(sheet, top, chance + CHANCE_HEIGHT)
    _draw_loss(sheet, top)
    _draw_chance(sheet, chance)
    _draw_metres(sheet, chance + CHANCE_HEIGHT)
    return svg.render()


def _ends(region: RegionResult) -> tuple[float, float]:
    half = float(region.stations.length.mean()) / 2 if region.stations.length.size else 0.0
    low, high = sorted((region.start_station, region.end_station))
    return low - half, high + half


def _draw_regions(sheet: _Sheet) -> None:
    """Draw a bar per region over the metres it shows, and how overlaps came out."""
    svg = sheet.svg
    for row, name in enumerate(sheet.log.regions):
        y = BAR_TOP + BAR_STEP * row
        x1, x2 = (sheet.along(end) for end in sheet.ends[name])
        svg.rect(x1, y, x2 - x1, 6, fill=colours.INK)
        words = f"{name} · {sheet.regions[name].frame_id}"
        at, anchor = (x1, "start") if x1 < (LEFT + RIGHT) / 2 else (x2, "end")
        svg.text(at, y - 4, isolated(clip_text(words, 44)), text_anchor=anchor, font_size=12,
                 fill=colours.INK)  # fmt: skip
    top, bottom = BAR_TOP - 2, BAR_TOP + BAR_STEP * len(sheet.log.regions) - 10
    for overlap in sheet.log.overlaps:
        x1, x2 = sheet.along(overlap.start), sheet.along(overlap.end)
        for x in (x1, x2):
            svg.line(x, top, x, bottom, stroke=colours.QUIET, stroke_dasharray="2 3")
        words = sheet.say("agree" if overlap.agree else "disagree")
        half = text_width(words, 12) / 2
        middle = min(max((x1 + x2) / 2, LEFT + half), RIGHT - half)
        svg.text(middle, bottom + 14, words, text_anchor="middle", font_size=12,
                 fill=colours.INK if overlap.agree else colours.LOSS)  # fmt: skip


def _draw_blanks(sheet: _Sheet, top: float, bottom: float) -> None:
    """Write into the gaps that nothing was seen there, and hatch what no frame quantifies."""
    svg = sheet.svg
    for part in sheet.log.bins:
        if not sheet.printed(part):
            x1, x2 = sheet.places(part)
            svg.rect(x1, top, x2 - x1, bottom - top, fill=sheet.hatch)
    for low, high in sheet.log.not_seen:
        x1, x2 = sheet.along(low), sheet.along(high)
        for x in (x1, x2):
            svg.line(x, top, x, bottom, stroke=colours.QUIET, stroke_width=0.8)
        if high - low > BREAK_FROM or x2 - x1 > 30:
            words = sheet.say("not_seen", length=format_number(high - low, 1))
            x, y = (x1 + x2) / 2 + 4.5, (top + bottom) / 2
            svg.text(x, y, words, text_anchor="middle", font_size=12, fill=colours.QUIET,
                     transform=f"rotate(-90 {x:g} {y:g})")  # fmt: skip


def _draw_loss(sheet: _Sheet, top: float) -> None:
    """Draw the loss by station with its band, and dashed what sound lagging would lose."""
    svg, gain = sheet.svg, sheet.log.gain
    shown = [part for part in sheet.log.bins if sheet.printed(part)]
    hue = colours.hue_of(gain)
    if shown:
        losses = [as_gain(part.heat_loss) if gain else part.heat_loss for part in shown]
        sounds = [abs(part.sound_loss) if part.sound_loss is not None else 0.0 for part in shown]
        highest = 1.06 * max(*(one.high for one in losses), *sounds, 1e-6)
        lowest = min(0.0, 1.06 * min(one.low for one in losses))
        axis = Axis(lowest, highest, top + LOSS_HEIGHT, top)
        ticks = axis.ticks(4)
        for tick in ticks:
            _rule(sheet, axis(tick))
            svg.text(LEFT - 9, axis(tick) + 4.5, format_number(tick, tick_decimals(ticks), NUMBER),
                     text_anchor="end", font_size=SMALL, fill=colours.INK)  # fmt: skip
        for part, loss, sound in zip(shown, losses, sounds, strict=True):
            x1, x2 = sheet.places(part)
            svg.rect(x1, axis(loss.high), x2 - x1, axis(loss.low) - axis(loss.high), fill=hue,
                     fill_opacity=0.2)  # fmt: skip
            svg.line(x1, axis(loss.median), x2, axis(loss.median), stroke=hue, stroke_width=2.2)
            if sound:
                middle, half = (x1 + x2) / 2, 0.3 * (x2 - x1)
                svg.line(middle - half, axis(sound), middle + half, axis(sound),
                         stroke=colours.INK, stroke_width=1.4)  # fmt: skip
    _frames(sheet, top, LOSS_HEIGHT)
    for i, line in enumerate(text("strip.gain" if gain else "strip.loss", sheet.language)
                             .split("\n")):  # fmt: skip
        x, y = 16.0 + 15 * i, top + LOSS_HEIGHT / 2
        svg.text(x, y, line, text_anchor="middle", font_size=SMALL, fill=colours.INK,
                 transform=f"rotate(-90 {x:g} {y:g})")  # fmt: skip
    _legend(sheet, top, hue)


def _rule(sheet: _Sheet, y: float) -> None:
    for low, high in sheet.along.parts:
        sheet.svg.line(sheet.along(low), y, sheet.along(high), y, stroke=colours.HAIR,
                       stroke_width=0.7)  # fmt: skip


def _frames(sheet: _Sheet, top: float, height: float) -> None:
    for (low, high), start in zip(sheet.along.parts, sheet.along.starts, strict=True):
        sheet.svg.rect(start, top, sheet.along.scale * (high - low), height, fill="none",
                       stroke=colours.INK)  # fmt: skip


def _legend(sheet: _Sheet, top: float, hue: str) -> None:
    svg, x = sheet.svg, RIGHT + 12
    svg.rect(x, top + 14, 26, 12, fill=hue, fill_opacity=0.2)
    svg.line(x, top + 20, x + 26, top + 20, stroke=hue, stroke_width=2.2)
    y = top + 39
    for key, mark in (("found", ""), ("sound", "dash"), ("hatched", "hatch")):
        if mark == "dash":
            svg.line(x, y, x + 26, y, stroke=colours.INK, stroke_width=1.4, stroke_dasharray="7 4")
            y += 17
        elif mark == "hatch":
            if all(sheet.printed(part) for part in sheet.log.bins):
                continue
            svg.rect(x, y - 6, 26, 12, fill=sheet.hatch, stroke=colours.QUIET, stroke_width=0.6)
            y += 19
        for line in wrapped(sheet.say(key), 13):
            svg.text(x, y, line, font_size=12, fill=colours.QUIET)
            y += 14
        y += 8


def _draw_chance(sheet: _Sheet, top: float) -> None:
    """Draw the probability of damage by station, the darker the likelier, and its stretches."""
    svg = sheet.svg
    for part in sheet.log.bins:
        chance = part.probability_damaged
        if chance is None or not sheet.printed(part):
            continue
        x1, x2 = sheet.places(part)
        svg.rect(x1, top, x2 - x1, CHANCE_HEIGHT, fill=colours.INK,
                 fill_opacity=round(float(np.clip(chance, 0, 1)), 3))  # fmt: skip
    _frames(sheet, top, CHANCE_HEIGHT)
    svg.text(LEFT - 9, top + 17, sheet.say("chance"), text_anchor="end", font_size=12,
             fill=colours.INK)  # fmt: skip
    chances = [one.probability_damaged for one in sheet.log.bins
               if one.probability_damaged is not None and sheet.printed(one)]  # fmt: skip
    if chances:
        words = sheet.say("highest", probability=format_probability(max(chances)))
        svg.text(RIGHT + 12, top + 17, words, font_size=12, fill=colours.QUIET)


def _draw_metres(sheet: _Sheet, y: float) -> None:
    svg, parts = sheet.svg, sheet.along.parts
    metres = sum(high - low for low, high in parts)
    for low, high in parts:
        target = max(round(8 * (high - low) / metres), 1)
        ticks = nice_ticks(low, high, target) if high - low > TOUCHING else []
        for tick in ticks or [low]:
            x = sheet.along(tick)
            svg.line(x, y, x, y + TICK, stroke=colours.INK)
            svg.text(x, y + 19, format_number(tick, max(tick_decimals(ticks), 0), NUMBER),
                     text_anchor="middle", font_size=SMALL, fill=colours.INK)  # fmt: skip
    svg.text((LEFT + RIGHT) / 2, y + 38, sheet.say("metres"), text_anchor="middle",
             font_size=SMALL, fill=colours.INK)  # fmt: skip
