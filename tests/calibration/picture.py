"""The page's picture: reliability of the probability, and coverage by group beside it."""

from tests.calibration.measures import GROUPS, LEAST_CASES
from tests.calibration.summary import Counted, Decile, Summary

from cladwatt.report.colours import FAINT, GAIN, HAIR, INK, LOSS, PAPER, QUIET
from cladwatt.report.svg import Axis, Drawing

__all__ = ["picture"]

_WIDTH, _PAD_TOP, _PLOT = 1130.0, 76.0, 380.0
_LEFT = 72.0
_ROW = 25.0
_LABELS = 736.0
_BARS = (756.0, 1046.0)
_RANGE_95, _FLOOR_95 = (0.93, 0.97), 0.88
_LEAST_SHOWN = 5
"""Tenths and groups of fewer regions say nothing in a picture."""


def picture(summary: Summary) -> str:
    """Return the drawing as SVG text."""
    groups = _groups(summary)
    height = _PAD_TOP + max(_PLOT, _ROW * len(groups)) + 66
    drawing = Drawing(
        _WIDTH,
        height,
        "calibration",
        "Calibration: reliability of the probability of damage, coverage by group",
        _described(summary, groups),
    )
    drawing.rect(0, 0, _WIDTH, height, fill=PAPER)
    _reliability(drawing, summary.deciles)
    _coverage(drawing, groups)
    return drawing.render()


def _groups(summary: Summary) -> list[tuple[str, Counted]]:
    return [
        (words, counted)
        for group, (words, _) in GROUPS.items()
        if (counted := summary.of(group, "coverage_95")) is not None
        and counted.group_size >= _LEAST_SHOWN
    ]


def _described(summary: Summary, groups: list[tuple[str, Counted]]) -> str:
    tenths = "; ".join(
        f"said {100 * d.predicted:.0f} %, so {100 * d.observed:.0f} % of {d.number}"
        for d in summary.deciles
    )
    rows = "; ".join(f"{words} {100 * c.value:.0f} % of {c.group_size}" for words, c in groups)
    return f"Probability of damage by tenths: {tenths}. Truth inside the 95 % interval: {rows}."


def _title(drawing: Drawing, x: float, words: str, below: str) -> None:
    drawing.text(x, 28, words, fill=INK, font_size=17, font_weight="600")
    drawing.text(x, 50, below, fill=QUIET, font_size=13)


def _reliability(drawing: Drawing, deciles: tuple[Decile, ...]) -> None:
    across = Axis(0, 1, _LEFT, _LEFT + _PLOT)
    up = Axis(0, 1, _PAD_TOP + _PLOT, _PAD_TOP)
    _title(
        drawing, _LEFT, "When it says P, how often is it so?",
        "Regions by tenths of P(damaged); shaded: binomial 95 % band",
    )  # fmt: skip
    drawing.rect(_LEFT, _PAD_TOP, _PLOT, _PLOT, fill="none", stroke=HAIR)
    for tick in across.ticks():
        drawing.line(across(tick), up(0), across(tick), up(1), stroke=FAINT)
        drawing.line(across(0), up(tick), across(1), up(tick), stroke=FAINT)
        words = f"{100 * tick:.0f} %"
        drawing.text(across(tick), up(0) + 20, words, fill=QUIET, text_anchor="middle")
        drawing.text(across(0) - 8, up(tick) + 5, words, fill=QUIET, text_anchor="end")
    drawing.line(across(0), up(0), across(1), up(1), stroke=QUIET, stroke_dasharray="5 4")
    for tenth in deciles:
        drawing.rect(
            across(tenth.start) + 3, up(tenth.high), _PLOT / 10 - 6, up(tenth.low) - up(tenth.high),
            fill=HAIR, fill_opacity=0.45,
        )  # fmt: skip
    for tenth in deciles:
        hue = (INK if tenth.reliable else LOSS) if tenth.judged else QUIET
        fill = hue if tenth.judged else PAPER
        drawing.element("circle", cx=across(tenth.predicted), cy=up(tenth.observed), r=6,
                        fill=fill, stroke=hue, stroke_width=1.6)  # fmt: skip
        above = tenth.observed < 0.9
        drawing.text(
            min(max(across(tenth.predicted), across(0) + 16), across(1) - 16),
            up(tenth.observed) + (-12 if above else 22),
            str(tenth.number),
            fill=QUIET, font_size=12, text_anchor="middle",
        )  # fmt: skip
    drawing.text(across(0.5), up(0) + 44, "probability said", fill=QUIET, text_anchor="middle")
    drawing.text(
        across(0) - 54, up(0.5), "was so", fill=QUIET, text_anchor="middle",
        transform=f"rotate(-90 {across(0) - 54:.0f} {up(0.5):.0f})",
    )  # fmt: skip


def _coverage(drawing: Drawing, groups: list[tuple[str, Counted]]) -> None:
    lowest = min([0.8, *(c.low for _, c in groups if c.low == c.low)])
    along = Axis(max(0.0, int(lowest * 20) / 20), 1.0, *_BARS)
    bottom = _PAD_TOP + _ROW * len(groups)
    _title(
        drawing, 524, "Is the truth inside the 95 % interval of the loss?",
        f"By group, with the band from resampling frames; open: under {LEAST_CASES} regions",
    )  # fmt: skip
    low, high = _RANGE_95
    drawing.rect(along(low), _PAD_TOP, along(high) - along(low), bottom - _PAD_TOP, fill=GAIN,
                 fill_opacity=0.14)  # fmt: skip
    for tick in along.ticks(4):
        drawing.line(along(tick), _PAD_TOP, along(tick), bottom, stroke=FAINT)
        drawing.text(
            along(tick), bottom + 20, f"{100 * tick:.0f} %", fill=QUIET, text_anchor="middle"
        )
    drawing.line(along(_FLOOR_95), _PAD_TOP, along(_FLOOR_95), bottom, stroke=QUIET,
                 stroke_dasharray="5 4")  # fmt: skip
    for row, (words, counted) in enumerate(groups):
        y = _PAD_TOP + _ROW * (row + 0.5)
        judged = counted.judged
        hue = (INK if counted.value >= _FLOOR_95 else LOSS) if judged else QUIET
        drawing.text(_LABELS, y + 5, words, fill=INK if judged else QUIET, text_anchor="end")
        drawing.line(along(counted.low), y, along(counted.high), y, stroke=hue, stroke_width=2)
        drawing.element("circle", cx=along(counted.value), cy=y, r=5, fill=hue if judged else PAPER,
                        stroke=hue, stroke_width=1.6)  # fmt: skip
        drawing.text(_WIDTH - 20, y + 5, str(counted.group_size), fill=QUIET, text_anchor="end")
    drawing.text(
        (_BARS[0] + _BARS[1]) / 2, bottom + 44,
        "shaded: the range aimed at; dashed: the least for any group", fill=QUIET,
        text_anchor="middle",
    )  # fmt: skip
