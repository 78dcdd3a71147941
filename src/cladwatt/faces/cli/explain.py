"""``cladwatt explain``: how one number comes about, line by line."""

import argparse
import json
import math
from collections.abc import Iterator, Sequence
from dataclasses import asdict
from pathlib import Path
from textwrap import wrap
from typing import TYPE_CHECKING, Any

from cladwatt.faces.cli.common import CommandGroup, add_command
from cladwatt.faces.cli.messages import ExitCode, Messages

if TYPE_CHECKING:
    from cladwatt.explain.steps import BandOfAngle, Explanation, Step

__all__ = ["add"]

_DESCRIPTION = """\
Show how the loss of one region comes about at one station: every value from the recorded
temperature to the loss per metre and the lagging's resistance, with symbol, unit, formula and
source, so that it can be followed with a calculator. Writes nothing.
"""
_END = """\
prints the steps at nominal values (medians of what was declared or assumed), then what assessing
says of the same station and why that differs. Where something is unknown the steps go as far as
they can, and what is missing is named.

exit codes:
  0 done; 1 no such region or station, or the survey is faulty; 2 wrong usage;
  3 done, but the steps end early for want of something that is named; 130 interrupted

example:
  cladwatt explain north_hall R07 --station 1.45
"""
_INDENT, _NAME_AT, _CELL = 20, 46, 11


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "explain", _run, summary="show step by step how a region's loss comes about",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("survey", metavar="SURVEY", type=Path, help="survey folder")
    parser.add_argument("region", metavar="REGION", help="id of a pipe region")
    parser.add_argument(
        "--station", metavar="M", type=_metres,
        help="station in metres along the line (default: the median one at the sound level)",
    )  # fmt: skip
    parser.add_argument("--json", action="store_true", help="print the steps as JSON")


def _metres(text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise argparse.ArgumentTypeError(f"{text!r} is not a number of metres")
    return value


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    from cladwatt.explain.region import explain_region
    from cladwatt.survey.survey_file import read_survey

    survey = read_survey(options.survey)
    explanation = explain_region(survey, options.region, station=options.station)
    if options.json:
        messages.output(json.dumps(_plain(asdict(explanation)), indent=1, ensure_ascii=False))
    else:
        messages.lines(_lines(explanation, max(messages.width, 80)))
    ends_early = explanation.missing or explanation.section("face") is None
    return ExitCode.LEFT_OUT if ends_early else ExitCode.DONE


def _plain(value: Any) -> Any:
    """Return a value as JSON knows it: no NaN and no infinity."""
    if isinstance(value, dict):
        return {name: _plain(one) for name, one in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(one) for one in value]
    return None if isinstance(value, float) and not math.isfinite(value) else value


def _lines(explanation: "Explanation", width: int) -> Iterator[str]:
    """Yield the printed page."""
    from cladwatt.report.wording import sentence, text

    yield from _head(explanation, width)
    number = 0
    for section in explanation.sections:
        if section.key == "face" and explanation.bands:
            number += 1
            yield from _bands(explanation, number, width)
        number += 1
        yield from _titled(text(f"explain.section.{section.key}"), number, section.steps, width)
    if explanation.section("face") is None and explanation.bands:
        yield from _bands(explanation, number + 1, width)
    for note in explanation.notes:
        yield from ["", *wrap(sentence(note), width)]
    if explanation.missing:
        yield from ["", text("explain.incomplete")]
        for remark in explanation.missing:
            yield from wrap(sentence(remark), width, initial_indent="  ", subsequent_indent="  ")
    yield from _reported(explanation, width)


def _head(explanation: "Explanation", width: int) -> Iterator[str]:
    from cladwatt.report.wording import text

    one = explanation
    yield text("explain.head", tag=one.tag, region=one.region_id, frame=one.frame_id)
    if math.isfinite(one.station):
        yield text(
            "explain.at", station=one.station, start=one.start, end=one.end, x=one.x, y=one.y
        )
    elif math.isfinite(one.x):
        yield text("explain.at_pixel", x=one.x, y=one.y)
    yield from wrap(text("explain.nominal"), width)


def _titled(title: str, number: int, steps: Sequence["Step"], width: int) -> Iterator[str]:
    if not steps:
        return
    yield from ["", f"{number}. {title}"]
    for step in steps:
        yield from _step(step, width)


def _step(step: "Step", width: int) -> Iterator[str]:
    """Yield one step: symbol, value, unit and name; below it formula or origin."""
    from cladwatt.report.wording import text

    unit = "" if step.unit == "-" else f" {step.unit}"
    shown = f"  {step.symbol:<15} = {_number_text(step.value)}{unit}"
    if step.unit == "K" and step.symbol.startswith("T_"):
        shown += f" ({step.value - 273.15:.2f} °C)"
    yield f"{shown:<{_NAME_AT}}  {text(f'explain.step.{step.key}')}"
    below = text("explain.given", source=step.source)
    if step.formula:
        key = "explain.formula_with_source" if step.source else ""
        below = text(key, formula=step.formula, source=step.source) if key else step.formula
    margin = " " * _INDENT
    yield from wrap(
        below, width, initial_indent=margin, subsequent_indent=margin, break_long_words=False,
        break_on_hyphens=False,
    )  # fmt: skip


def _number_text(value: float) -> str:
    """Return a number with six significant digits, trailing zeros left off."""
    from cladwatt.report.wording import text

    return f"{value:.6g}" if math.isfinite(value) else f"({text('explain.no_value')})"


_COLUMNS = ("theta", "T_rec", "eps", "L_s", "T_s", "h_c", "q")


def _bands(explanation: "Explanation", number: int, width: int) -> Iterator[str]:
    """Yield the shown band in full, and a table of all."""
    from cladwatt.report.wording import text

    bands, shown = explanation.bands, explanation.shown
    title = text("explain.section.band", number=shown + 1, bands=len(bands))
    yield from _titled(title, number, bands[shown].steps, width)
    yield from ["", *wrap(text("explain.table"), width, initial_indent="  ",
                          subsequent_indent="  ")]  # fmt: skip
    names = [name for name in _COLUMNS if any(s.symbol == name for s in bands[shown].steps)]
    units = {step.symbol: step.unit for step in bands[shown].steps}
    yield "    " + " ".join(f"{head:>{_CELL}}" for head in ["share", *names])
    yield "    " + " ".join(f"{unit:>{_CELL}}" for unit in ["-", *(units[name] for name in names)])
    for at, band in enumerate(bands):
        yield _row(band, names, mark="*" if at == shown else " ")


def _row(band: "BandOfAngle", names: Sequence[str], *, mark: str) -> str:
    values = [band.share, *(band.value(name) for name in names)]
    cells = (f"{value:.6g}" if math.isfinite(value) else "none" for value in values)
    return f"  {mark} " + " ".join(f"{cell:>{_CELL}}" for cell in cells)


def _reported(explanation: "Explanation", width: int) -> Iterator[str]:
    """Yield what the assessment says of the same station."""
    from cladwatt.report.numbers import CONSOLE, format_interval
    from cladwatt.report.wording import sentence, text
    from cladwatt.results.assessment import Interval

    found = explanation.reported
    if found is None:
        yield from ["", text("explain.not_reported")]
        return
    yield from ["", *wrap(text("explain.reported"), width)]
    rows = [("explain.reported_loss", format_interval(Interval(*found.heat_loss), "W/m", CONSOLE))]
    if math.isfinite(found.sound_loss):
        rows.append(("explain.reported_sound", f"{found.sound_loss:.4g} W/m"))
    if math.isfinite(found.resistance[0]):
        resistance = format_interval(Interval(*found.resistance), "m K/W", CONSOLE)
        rows.append(("explain.reported_resistance", resistance))
    if math.isfinite(found.resistance_ratio):
        rows.append(("explain.reported_ratio", f"{found.resistance_ratio:.2f}"))
    for key, shown in rows:
        yield f"  {text(key):<32}  {shown}"
    yield from wrap(text("explain.reported_why"), width)
    verdict = text(f"verdict.{found.verdict.replace(' ', '_')}")
    yield from ["", text("explain.reported_verdict", verdict=verdict)]
    for reason in found.reasons:
        yield from wrap(sentence(reason), width, initial_indent="  ", subsequent_indent="  ")
