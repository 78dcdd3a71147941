"""Stretches on a strip picture: tints, dimension lines with labels, intervals of the edges."""

from typing import TypeAlias

from cladwatt.report import colours
from cladwatt.report.numbers import format_number, format_probability
from cladwatt.report.strip_sheet import FACE_HEIGHT, FACE_TOP, LEFT, RIGHT, ROW_HEIGHT, SMALL, Sheet
from cladwatt.report.svg import Axis, clip_text, isolated, text_width
from cladwatt.report.wording import text
from cladwatt.results.assessment import RegionResult, Stretch

__all__ = ["Mark", "draw_marks", "draw_tints", "label_rows", "stretch_label"]

MOST_ROWS = 4
Mark: TypeAlias = tuple[Stretch, str, float]
"""Stretch, label (may be empty), place of the label's middle."""


def stretch_label(stretch: Stretch, language: str) -> str:
    """Return what stands at a stretch."""
    return text(
        "strip.stretch",
        language,
        id=isolated(clip_text(stretch.id, 24)),
        start=format_number(stretch.start.median, 2),
        end=format_number(stretch.end.median, 2),
        probability=format_probability(stretch.probability),
    )


def _ends(stretch: Stretch, metres: Axis) -> tuple[float, float]:
    first, last = metres(stretch.start.median), metres(stretch.end.median)
    return min(first, last), max(first, last)


def label_rows(region: RegionResult, metres: Axis, language: str) -> list[list[Mark]]:
    """Set labels in as few rows as keep them apart; what finds no place stays without label."""
    rows: list[list[Mark]] = []
    taken: list[float] = []
    for stretch in sorted(region.stretches, key=lambda s: s.start.median):
        words = stretch_label(stretch, language)
        half = text_width(words, SMALL) / 2 + 6
        x1, x2 = _ends(stretch, metres)
        centre = min(max((x1 + x2) / 2, LEFT + half), RIGHT - half)
        left, right = min(x1, centre - half), max(x2, centre + half)
        row = next((i for i, end in enumerate(taken) if end <= left), len(taken))
        if row == MOST_ROWS:
            rows[-1].append((stretch, "", centre))
            continue
        if row == len(taken):
            rows.append([])
            taken.append(0.0)
        rows[row].append((stretch, words, centre))
        taken[row] = right
    return rows


def draw_tints(sheet: Sheet, top: float, bottom: float) -> None:
    """Tint the stretches behind the panels."""
    for stretch in sheet.region.stretches:
        x1, x2 = _ends(stretch, sheet.metres)
        sheet.svg.rect(x1, top, x2 - x1, bottom - top, fill=colours.MARK)


def draw_marks(sheet: Sheet, rows: list[list[Mark]], top: float, bottom: float) -> None:
    """Draw dimension lines with labels, the edges, and the intervals of the edges."""
    base = FACE_TOP + FACE_HEIGHT + 8
    marks = [
        (stretch, words, centre, base + ROW_HEIGHT * i + 15)
        for i, row in enumerate(rows)
        for stretch, words, centre in row
    ]
    for stretch, _, _, y in marks:
        _draw_dimension(sheet, stretch, y, top, bottom)
    for _, words, centre, y in marks:
        if words:
            _draw_label(sheet, words, centre, y - 5)


def _draw_dimension(sheet: Sheet, stretch: Stretch, y: float, top: float, bottom: float) -> None:
    svg, (x1, x2) = sheet.svg, _ends(stretch, sheet.metres)
    for x, edge in ((x1, stretch.start), (x2, stretch.end)):
        svg.line(x, top, x, bottom, stroke=colours.INK, stroke_width=0.9,
                 stroke_dasharray="10 3 2 3")  # fmt: skip
        low, high = sheet.metres(edge.low), sheet.metres(edge.high)
        svg.line(low, bottom + 1.5, high, bottom + 1.5, stroke=colours.INK, stroke_width=4)
        svg.line(x - 4, y + 4, x + 4, y - 4, stroke=colours.INK, stroke_width=1.4)
    svg.line(x1, y, x2, y, stroke=colours.INK, stroke_width=0.9)


def _draw_label(sheet: Sheet, words: str, centre: float, y: float) -> None:
    half = text_width(words, SMALL) / 2
    sheet.svg.rect(centre - half, y - 11, 2 * half, 14, fill=colours.PAPER)
    sheet.svg.text(centre, y, words, text_anchor="middle", font_size=SMALL,
                  font_weight="600", fill=colours.INK)  # fmt: skip
