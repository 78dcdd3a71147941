"""``cladwatt plan``: before walking, what each line can show and what to bring."""

import argparse
import json
import math
from collections.abc import Iterator
from pathlib import Path
from textwrap import wrap
from typing import TYPE_CHECKING, Any

from cladwatt.faces.cli.common import CommandGroup, add_command, whole_number
from cladwatt.faces.cli.messages import ExitCode, Messages

if TYPE_CHECKING:
    from cladwatt.inverse.plan import LinePlan

__all__ = ["add"]

_DESCRIPTION = """\
Before walking: tell for each line of the line list, in the conditions that the survey file expects,
the smallest damage a frame can show (found in 95 % of cases, with false alarms on fewer than 5 %
of sound pipes), how well its loss would be known, and what to bring. The survey needs no frames
yet: lines and [conditions] are enough. Writes nothing.
"""
_END = """\
A frame of each line is imagined, seen square on at the distance given, and assessed like a recorded
one: what is promised is what assessing will say. Where frames and regions are there already, a line
is planned in the conditions of the first frame it is drawn on.

exit codes:
  0 done; 1 the survey is faulty; 2 wrong usage;
  3 done, but some lines could not be planned for want of something that is named; 130 interrupted

example:
  cladwatt plan north_hall --distance 3
"""


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "plan", _run, summary="before walking: what each line can show, what to bring",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("survey", metavar="SURVEY", type=Path, help="survey folder")
    parser.add_argument(
        "--distance", metavar="M", type=_metres,
        help="camera to pipe in metres (default: the survey's, else 5)",
    )  # fmt: skip
    parser.add_argument(
        "--columns", metavar="N", type=whole_number(32, 10_000), default=640,
        help="pixels along a row of the camera (default 640)",
    )  # fmt: skip
    parser.add_argument("--json", action="store_true", help="print the plan as JSON")


def _metres(text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not 0.1 <= value <= 149:
        raise argparse.ArgumentTypeError(f"{text!r} is not a number of metres from 0.1 to 149")
    return value


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    from cladwatt.inverse.plan import Viewpoint
    from cladwatt.planning import plan_survey
    from cladwatt.survey.survey_file import read_survey

    survey = read_survey(options.survey, frames_needed=False)
    view = Viewpoint(options.columns, options.distance)
    plans = plan_survey(survey, view=view)
    if options.json:
        messages.output(json.dumps([_plain(one) for one in plans], indent=1, ensure_ascii=False))
    else:
        messages.lines(_lines(plans, max(messages.width, 60)))
    left_out = any(one.missing for one in plans) or any(
        fault.severity == "error" for fault in survey.faults
    )
    for fault in survey.faults:
        if fault.severity == "error":
            messages.note(str(fault))
    return ExitCode.LEFT_OUT if left_out else ExitCode.DONE


def _plain(plan: "LinePlan") -> dict[str, Any]:
    """Return a plan as JSON, units in the names; null where there is no number."""
    from cladwatt.report.wording import sentence

    def known(value: float) -> float | None:
        return float(f"{value:.4g}") if math.isfinite(value) else None

    loss, verdict = plan.heat_loss, plan.verdict
    return {
        "tag": plan.tag,
        "area": plan.area,
        "distance_m": known(plan.distance),
        "width_px": known(plan.width),
        "strip_length_m": known(plan.strip_length),
        "sound_loss_W_per_m": None if plan.sound_loss is None else known(plan.sound_loss.median),
        "half_width_percent": None if loss is None else known(50 * loss.relative_width),
        "verdict": None if verdict is None else verdict.level,
        "reason": None if verdict is None else sentence(verdict.reason),
        "smallest_damage": [
            {
                "length_m": known(one.length),
                "rise_percent": known(100 * one.rise),
                "rise_W_per_m": known(one.loss),
            }
            for one in plan.smallest
        ],
        "bring": [
            {"key": one.key.removeprefix("advice."),
             "half_width_percent": known(float(dict(one.parameters)["width_then"]))}
            for one in plan.bring
        ],
        "missing": [sentence(one) for one in plan.missing],
    }  # fmt: skip


def _lines(plans: tuple["LinePlan", ...], width: int) -> Iterator[str]:
    """Yield the printed plan, one paragraph a line."""
    from cladwatt.report.wording import text

    yield from wrap(text("plan.head"), width)
    for plan in plans:
        yield ""
        yield f"{plan.tag}  {plan.area}".rstrip()
        for words in _words(plan):
            yield from wrap(words, width, initial_indent="  ", subsequent_indent="    ")


def _words(plan: "LinePlan") -> Iterator[str]:
    from cladwatt.report.wording import sentence, text

    for missing in plan.missing:
        yield sentence(missing)
    if plan.verdict is None:
        return
    if plan.sound_loss is not None and plan.heat_loss is not None:
        yield text(
            "plan.gain" if plan.gain else "plan.loss", loss=abs(plan.sound_loss.median),
            half_width=50 * plan.heat_loss.relative_width,
            verdict=text(f"verdict.{plan.verdict.level.replace(' ', '_')}"),
        )  # fmt: skip
        yield text("plan.frame", width=plan.width, distance=plan.distance, length=plan.strip_length)
    yield sentence(plan.verdict.reason)
    for one in plan.smallest:
        if math.isfinite(one.rise):
            yield text("plan.smallest", length=one.length, rise=100 * one.rise, loss=one.loss)
        else:
            yield text("plan.nothing_shows", length=one.length)
    if plan.bring:
        things = ", ".join(
            text(f"plan.bring.{one.key.removeprefix('advice.')}",
                 width=dict(one.parameters)["width_then"])
            for one in plan.bring
        )  # fmt: skip
        yield text("plan.bring_these", things=things)
    elif plan.verdict.advice is not None:
        yield sentence(plan.verdict.advice)
    else:
        yield text("plan.bring_nothing")
