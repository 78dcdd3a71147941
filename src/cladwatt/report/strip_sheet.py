"""The sheet a strip picture is drawn on: its measures, axis of metres, and words."""

import textwrap
from dataclasses import dataclass

from cladwatt.report import colours
from cladwatt.report.numbers import NumberStyle
from cladwatt.report.strip_series import Series
from cladwatt.report.svg import Axis, Drawing, clip_text, plain
from cladwatt.report.wording import text
from cladwatt.results.assessment import RegionResult

__all__ = ["Sheet", "draw_words", "wrapped"]

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


@dataclass(frozen=True)
class Sheet:
    """One picture in the making; the panels share the axis of metres."""

    svg: Drawing
    region: RegionResult
    series: Series
    metres: Axis
    air: float | None
    """Centre of the colours. [K]"""
    limits: tuple[float, float] | None
    """Ends of the colours. [K]"""
    hatch: str
    """Paint of what was left out."""
    language: str
    along: str = "metres"
    """What the long axis counts: "metres", or "pixels" where there is no scale."""

    def say(self, key: str, **parameters: float | str) -> str:
        """Return a text of the picture."""
        return text(f"strip.{key}", self.language, **parameters)


def wrapped(words: str, limit: int) -> list[str]:
    """Return words in at most six lines of `limit` characters."""
    lines = textwrap.wrap(plain(words).replace(" %", "\u00a0%"), limit, break_long_words=True)
    return lines if len(lines) <= 6 else [*lines[:5], clip_text(lines[5] + "…", limit)]


def draw_words(sheet: Sheet, top: float, height: float, lines: list[str]) -> None:
    """Write words in the place of a panel."""
    sheet.svg.rect(LEFT, top, RIGHT - LEFT, height, fill=colours.PAPER, stroke=colours.HAIR)
    lines_set = [part for line in lines for part in wrapped(line, 92)]
    y = top + height / 2 - 10 * (len(lines_set) - 1)
    for i, line in enumerate(lines_set):
        weight = "600" if i == 0 and len(lines) > 1 else "400"
        sheet.svg.text(
            (LEFT + RIGHT) / 2, y + 20 * i + 5, line,
            text_anchor="middle", fill=colours.INK, font_weight=weight,
        )  # fmt: skip
