"""The strip picture: a pipe straightened into metres, what it shows and what it loses."""

import hashlib
import math
import textwrap

import numpy as np
from numpy.typing import NDArray

from cladwatt.report import colours
from cladwatt.report.numbers import (
    NumberStyle,
    as_gain,
    celsius,
    format_interval,
    format_number,
    format_probability,
)
from cladwatt.report.strip_series import Series, left_out_runs, resample_columns, series_of
from cladwatt.report.svg import (
    Axis,
    Drawing,
    clip_text,
    isolated,
    nice_ticks,
    plain,
    png_data_uri,
    text_width,
    tick_decimals,
)
from cladwatt.report.wording import sentence, text
from cladwatt.results.assessment import RegionResult, Stretch
from cladwatt.types import FloatArray

__all__ = ["strip_svg", "temperature_limits"]

WIDTH = 900.0
LEFT, RIGHT = 88.0, 792.0
TITLE_Y = 20.0
FACE_TOP, FACE_HEIGHT = 42.0, 86.0
ROW_HEIGHT = 24.0
LOSS_HEIGHT, RATIO_HEIGHT = 150.0, 112.0
GAP = 30.0
TICK = 5.0
SMALL = 13.0
NUMBER = NumberStyle(thousands="")


def _wrapped(words: str, limit: int) -> list[str]:
    lines = textwrap.wrap(plain(words).replace(" %", "\u00a0%"), limit, break_long_words=True)
    return lines if len(lines) <= 6 else [*lines[:5], clip_text(lines[5] + "…", limit)]


def _value_axis(curves: tuple[FloatArray, ...], top: float, height: float) -> Axis:
    """Return an axis that holds all curves and zero."""
    values = np.concatenate(curves)
    values = values[np.isfinite(values)]
    low, high = min(0.0, float(values.min())), max(0.0, float(values.max()))
    room = 0.06 * (high - low) or 1.0
    return Axis(low - room if low < 0 else 0.0, high + room if high > 0 else 0.0, top + height, top)


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


def strip_svg(
    region: RegionResult,
    *,
    air_temperature: float | None,
    limits: tuple[float, float] | None = None,
    language: str = "en",
    heading: bool = True,
) -> str:
    """Draw the strip picture of a region.

    Parameters
    ----------
    region : RegionResult
        What the region came to.
    air_temperature : float or None
        Centre of the colour scale; the region's own where None, the lower limit where both are
        unknown. [K]
    limits : (float, float), optional
        Range of the colour scale; from the region itself where None. [K]
    language : str
        Code of a language file.
    heading : bool
        Whether line, region, frame and verdict stand over the picture.

    Returns
    -------
    str
        A complete SVG, self-contained, its ids unique to the region.
    """
    return _StripPicture(region, air_temperature, limits, language, heading).draw()


class _StripPicture:
    """One picture in the making; the panels share the axis of metres."""

    def __init__(
        self,
        region: RegionResult,
        air_temperature: float | None,
        limits: tuple[float, float] | None,
        language: str,
        heading: bool,
    ) -> None:
        self.region, self.language, self.heading = region, language, heading
        self.air = region.air_temperature if air_temperature is None else air_temperature
        self.limits = limits or temperature_limits(region)
        self.series: Series = series_of(region)
        low, high = sorted((region.start_station, region.end_station))
        self.metres = Axis(low, high if high > low else low + 1.0, LEFT, RIGHT)
        self.quantified = region.verdict.level != "not quantified"
        self.rows = self._label_rows()
        self.y = FACE_TOP + FACE_HEIGHT + 8 + ROW_HEIGHT * max(1, len(self.rows))
        bottom = self.y + LOSS_HEIGHT + GAP + RATIO_HEIGHT + 46
        key = f"{region.frame_id}\0{region.region_id}"
        prefix = "s" + hashlib.sha256(key.encode("utf-8", "replace")).hexdigest()[:10]
        self.svg = Drawing(
            WIDTH,
            bottom,
            prefix if heading else prefix + "e",
            self._title(),
            self._description(),
            top=0.0 if heading else TITLE_Y + 14,
        )

    def say(self, key: str, **parameters: float | str) -> str:
        return text(f"strip.{key}", self.language, **parameters)

    def draw(self) -> str:
        self.svg.rect(0, 0, WIDTH, self.svg.height, fill=colours.PAPER)
        self.hatch = self.svg.hatch()
        if self.heading:
            self._draw_title()
        bottom = self.y + LOSS_HEIGHT + GAP + RATIO_HEIGHT
        self._draw_stretch_tints(self.y, bottom)
        self._draw_face()
        if self.quantified:
            self._draw_loss(self.y)
            self._draw_ratio(self.y + LOSS_HEIGHT + GAP)
        else:
            self._draw_words(self.y, LOSS_HEIGHT + GAP + RATIO_HEIGHT, self._reason())
        self._draw_metres(bottom)
        self._draw_stretch_marks(FACE_TOP, bottom if self.quantified else self.y)
        return self.svg.render()

    # --- words -----------------------------------------------------------------------------

    def _title(self) -> str:
        region = self.region
        return self.say(
            "title",
            tag=isolated(region.tag),
            region=isolated(region.region_id),
            frame=isolated(region.frame_id),
        )

    def _reason(self) -> list[str]:
        return [self.say("not_quantified"), sentence(self.region.verdict.reason, self.language)]

    def _description(self) -> str:
        region = self.region
        parts = [
            self.say(
                "described_strip",
                start=format_number(self.metres.low, 1),
                end=format_number(self.metres.high, 1),
            )
        ]
        if not self.quantified:
            parts.append(self.say("described_not_quantified"))
        elif region.heat_loss is not None:
            loss = as_gain(region.heat_loss) if region.gain else region.heat_loss
            key = "described_gain" if region.gain else "described_loss"
            parts.append(self.say(key, loss=format_interval(loss, "W/m")))
        names = "; ".join(self._stretch_label(s) for s in region.stretches)
        parts.append(
            self.say("described_stretches", stretches=names)
            if names
            else self.say("described_none")
        )
        return " ".join(parts)

    def _stretch_label(self, stretch: Stretch) -> str:
        return self.say(
            "stretch",
            id=isolated(clip_text(stretch.id, 24)),
            start=format_number(stretch.start.median, 2),
            end=format_number(stretch.end.median, 2),
            probability=format_probability(stretch.probability),
        )

    def _draw_title(self) -> None:
        region, level = self.region, self.region.verdict.level
        words = self.say(
            "title",
            tag=isolated(clip_text(region.tag, 34)),
            region=isolated(clip_text(region.region_id, 28)),
            frame=isolated(clip_text(region.frame_id, 22)),
        )
        self.svg.text(LEFT, TITLE_Y, words, fill=colours.INK, font_weight="600", font_size=15)
        shown = text(f"verdict.{level.replace(' ', '_')}", self.language)
        self.svg.text(WIDTH - 8, TITLE_Y, shown, fill=colours.INK, text_anchor="end")
        self.svg.line(LEFT, TITLE_Y + 8, WIDTH - 8, TITLE_Y + 8, stroke=colours.INK)

    def _draw_words(self, top: float, height: float, lines: list[str]) -> None:
        self.svg.rect(LEFT, top, RIGHT - LEFT, height, fill=colours.PAPER, stroke=colours.HAIR)
        wrapped = [part for line in lines for part in _wrapped(line, 92)]
        y = top + height / 2 - 10 * (len(wrapped) - 1)
        for i, line in enumerate(wrapped):
            weight = "600" if i == 0 and len(lines) > 1 else "400"
            self.svg.text(
                (LEFT + RIGHT) / 2, y + 20 * i + 5, line,
                text_anchor="middle", fill=colours.INK, font_weight=weight,
            )  # fmt: skip

    # --- temperature -----------------------------------------------------------------------

    def _draw_face(self) -> None:
        svg, field = self.svg, self.region.strip_temperature
        svg.text(LEFT - 10, FACE_TOP + FACE_HEIGHT / 2 + 5, self.say("face"),
                 text_anchor="end", fill=colours.QUIET, font_size=SMALL)  # fmt: skip
        if field is None or self.limits is None:
            self._draw_words(FACE_TOP, FACE_HEIGHT, [self.say("no_temperature")])
            return
        svg.rect(LEFT, FACE_TOP, RIGHT - LEFT, FACE_HEIGHT, fill=self.hatch)
        columns = resample_columns(self.region, low=self.metres.low, high=self.metres.high)
        centre = self.limits[0] if self.air is None else self.air
        rows = self._colour(field[:, columns], centre)
        rows[:, columns < 0] = 0
        svg.element(
            "image", x=LEFT, y=FACE_TOP, width=RIGHT - LEFT, height=FACE_HEIGHT,
            preserveAspectRatio="none", image_rendering="pixelated",
            href=png_data_uri(rows, colours.diverging_palette()),
        )  # fmt: skip
        svg.rect(LEFT, FACE_TOP, RIGHT - LEFT, FACE_HEIGHT, fill="none", stroke=colours.INK)
        self._draw_scale(centre)

    def _colour(self, field: FloatArray, centre: float) -> NDArray[np.uint8]:
        assert self.limits is not None
        step = max(1, field.shape[0] // 96)
        return colours.temperature_index(field[::step], centre=centre, limits=self.limits)

    def _draw_scale(self, centre: float) -> None:
        assert self.limits is not None
        svg, (low, high) = self.svg, self.limits
        x, axis = RIGHT + 14, Axis(low, high, FACE_TOP + FACE_HEIGHT, FACE_TOP)
        ramp = np.linspace(high, low, 64)[:, None]
        svg.element(
            "image", x=x, y=FACE_TOP, width=14, height=FACE_HEIGHT, preserveAspectRatio="none",
            href=png_data_uri(self._colour(ramp, centre), colours.diverging_palette()),
        )  # fmt: skip
        svg.rect(x, FACE_TOP, 14, FACE_HEIGHT, fill="none", stroke=colours.INK, stroke_width=0.8)
        ticks = nice_ticks(celsius(low), celsius(high), 4)
        for tick in ticks:
            y = axis(tick + 273.15)
            svg.line(x + 14, y, x + 18, y, stroke=colours.INK)
            label = format_number(tick, tick_decimals(ticks), NUMBER)
            svg.text(x + 22, y + 4.5, label, font_size=SMALL, fill=colours.INK)
        svg.text(x, FACE_TOP + FACE_HEIGHT + 17, self.say("surface"), font_size=SMALL,
                 fill=colours.QUIET)  # fmt: skip
        if self.air is not None:
            degrees = format_number(celsius(self.air), 1)
            svg.text(x, FACE_TOP + FACE_HEIGHT + 33, self.say("air", temperature=degrees),
                     font_size=SMALL, fill=colours.QUIET)  # fmt: skip
            if low < self.air < high:
                y = axis(self.air)
                svg.line(x - 4, y, x + 18, y, stroke=colours.INK, stroke_width=1.6)

    # --- curves ----------------------------------------------------------------------------

    def _frame(self, top: float, height: float, axis: Axis, label: str) -> None:
        svg = self.svg
        for start, end in left_out_runs(self.region, self.metres.low, self.metres.high):
            x1, x2 = self.metres(start), self.metres(end)
            svg.rect(x1, top, x2 - x1, height, fill=self.hatch)
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

    def _curve(self, axis: Axis, middle: FloatArray, low: FloatArray, high: FloatArray) -> None:
        hue = colours.hue_of(self.region.gain)
        x = self.metres.places(self.series.station)
        for run in self.series.runs(low, high):
            if run.size == 1:
                run, wide = np.repeat(run, 2), np.array([-1.5, 1.5])
            else:
                wide = np.zeros(run.size)
            up = list(zip(x[run] + wide, axis.places(high[run]), strict=True))
            down = list(zip(x[run] + wide, axis.places(low[run]), strict=True))
            self.svg.path(up + down[::-1], close="z", fill=hue, fill_opacity=0.2)
        for run in self.series.runs(middle):
            points = list(zip(x[run], axis.places(middle[run]), strict=True))
            if len(points) == 1:
                points = [(points[0][0] - 1.5, points[0][1]), (points[0][0] + 1.5, points[0][1])]
            self.svg.path(points, fill="none", stroke=hue, stroke_width=1.8,
                          stroke_linejoin="round")  # fmt: skip

    def _legend(self, top: float, name: str, words: str, row: int = 0) -> None:
        svg, x, y = self.svg, RIGHT + 12, top + 30 + 60 * row
        hue = colours.hue_of(self.region.gain)
        if name == "band":
            svg.rect(x, y - 6, 26, 12, fill=hue, fill_opacity=0.2)
            svg.line(x, y, x + 26, y, stroke=hue, stroke_width=1.8)
        else:
            svg.line(x, y, x + 26, y, stroke=colours.INK, stroke_width=1.4,
                     stroke_dasharray="7 4")  # fmt: skip
        for i, line in enumerate(_wrapped(words, 14)):
            svg.text(x, y + 19 + 14 * i, line, font_size=12, fill=colours.QUIET)

    def _draw_loss(self, top: float) -> None:
        series = self.series
        if not np.isfinite(series.loss).any():
            self._draw_words(top, LOSS_HEIGHT, [self.say("flux_only")])
            return
        axis = _value_axis(
            (series.loss, series.loss_low, series.loss_high, series.sound), top, LOSS_HEIGHT
        )
        label = self.say("gain" if self.region.gain else "loss")
        self._frame(top, LOSS_HEIGHT, axis, label)
        self._curve(axis, series.loss, series.loss_low, series.loss_high)
        self._legend(top, "band", self.say("found_line"))
        if np.isfinite(series.sound).any():
            x = self.metres.places(series.station)
            for run in series.runs(series.sound):
                points = list(zip(x[run], axis.places(series.sound[run]), strict=True))
                self.svg.path(points, fill="none", stroke=colours.INK, stroke_width=1.4,
                              stroke_dasharray="7 4")  # fmt: skip
            self._legend(top, "dash", self.say("sound_line"), 1)

    def _draw_ratio(self, top: float) -> None:
        series = self.series
        if not np.isfinite(series.ratio).any():
            missing = self.region.missing
            words = (
                self.say("no_ratio", reason=sentence(missing[0], self.language))
                if missing
                else self.say("no_ratio_plain")
            )
            self._draw_words(top, RATIO_HEIGHT, [words])
            return
        high = series.ratio_high[np.isfinite(series.ratio_high)]
        highest = 1.06 * float(np.percentile(high, 98)) if high.size else 1.0
        axis = Axis(0.0, min(max(highest, 1.25), 3.0), top + RATIO_HEIGHT, top)
        self._frame(top, RATIO_HEIGHT, axis, self.say("ratio"))
        self._curve(axis, series.ratio, series.ratio_low, series.ratio_high)
        y = axis(1.0)
        self.svg.line(LEFT, y, RIGHT, y, stroke=colours.INK, stroke_width=1.2,
                      stroke_dasharray="2 3")  # fmt: skip
        self.svg.text(RIGHT + 12, y + 4.5, self.say("specified_line"), font_size=12,
                      fill=colours.QUIET)  # fmt: skip

    def _draw_metres(self, y: float) -> None:
        ticks = self.metres.ticks(8)
        for tick in ticks:
            x = self.metres(tick)
            self.svg.line(x, y, x, y + TICK, stroke=colours.INK)
            self.svg.text(x, y + 19, format_number(tick, tick_decimals(ticks), NUMBER),
                          text_anchor="middle", font_size=SMALL, fill=colours.INK)  # fmt: skip
        self.svg.text((LEFT + RIGHT) / 2, y + 38, self.say("metres"), text_anchor="middle",
                      font_size=SMALL, fill=colours.INK)  # fmt: skip
        if left_out_runs(self.region, self.metres.low, self.metres.high):
            self.svg.rect(RIGHT + 12, y + 27, 18, 12, fill=self.hatch, stroke=colours.QUIET,
                          stroke_width=0.6)  # fmt: skip
            self.svg.text(RIGHT + 35, y + 38, self.say("left_out"), font_size=12,
                          fill=colours.QUIET)  # fmt: skip

    # --- stretches -------------------------------------------------------------------------

    def _ends(self, stretch: Stretch) -> tuple[float, float]:
        first, last = self.metres(stretch.start.median), self.metres(stretch.end.median)
        return min(first, last), max(first, last)

    def _label_rows(self) -> list[list[tuple[Stretch, str, float]]]:
        """Set labels in as few rows as keep them apart; the last row takes ids only."""
        rows: list[list[tuple[Stretch, str, float]]] = []
        taken: list[float] = []
        for stretch in sorted(self.region.stretches, key=lambda s: s.start.median):
            words = self._stretch_label(stretch)
            half = text_width(words, SMALL) / 2 + 6
            x1, x2 = self._ends(stretch)
            centre = min(max((x1 + x2) / 2, LEFT + half), RIGHT - half)
            left, right = min(x1, centre - half), max(x2, centre + half)
            row = next((i for i, end in enumerate(taken) if end <= left), len(taken))
            if row == len(taken) and row < 4:
                rows.append([])
                taken.append(0.0)
            if row < 4:
                rows[row].append((stretch, words, centre))
                taken[row] = right
        return rows

    def _draw_stretch_tints(self, top: float, bottom: float) -> None:
        if not self.quantified:
            return
        for stretch in self.region.stretches:
            x1, x2 = self._ends(stretch)
            self.svg.rect(x1, top, x2 - x1, bottom - top, fill=colours.MARK)

    def _draw_stretch_marks(self, top: float, bottom: float) -> None:
        base = FACE_TOP + FACE_HEIGHT + 8
        marks = [
            (stretch, words, centre, base + ROW_HEIGHT * i + 15)
            for i, row in enumerate(self.rows)
            for stretch, words, centre in row
        ]
        for stretch, _, _, y in marks:
            self._draw_dimension(stretch, y, top, bottom)
        for _, words, centre, y in marks:
            self._draw_label(words, centre, y - 5)

    def _draw_dimension(self, stretch: Stretch, y: float, top: float, bottom: float) -> None:
        svg, (x1, x2) = self.svg, self._ends(stretch)
        for x, edge in ((x1, stretch.start), (x2, stretch.end)):
            svg.line(x, top, x, bottom, stroke=colours.INK, stroke_width=0.9,
                     stroke_dasharray="10 3 2 3")  # fmt: skip
            low, high = self.metres(edge.low), self.metres(edge.high)
            svg.line(low, bottom + 1.5, high, bottom + 1.5, stroke=colours.INK, stroke_width=4)
            svg.line(x - 4, y + 4, x + 4, y - 4, stroke=colours.INK, stroke_width=1.4)
        svg.line(x1, y, x2, y, stroke=colours.INK, stroke_width=0.9)

    def _draw_label(self, words: str, centre: float, y: float) -> None:
        half = text_width(words, SMALL) / 2
        self.svg.rect(centre - half, y - 11, 2 * half, 14, fill=colours.PAPER)
        self.svg.text(centre, y, words, text_anchor="middle", font_size=SMALL,
                      font_weight="600", fill=colours.INK)  # fmt: skip
