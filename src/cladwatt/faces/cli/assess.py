"""``cladwatt assess``: a survey folder in, a results folder out."""

import argparse
import json
from pathlib import Path
from typing import TYPE_CHECKING

from cladwatt.faces.cli.common import CommandGroup, add_command, whole_number
from cladwatt.faces.cli.messages import ExitCode, Messages, counted
from cladwatt.faces.cli.progress import ProgressBar

if TYPE_CHECKING:
    from cladwatt.results.assessment import Assessment
    from cladwatt.survey.survey import Survey

__all__ = ["add"]

RESULTS_FOLDER = "results"

_DESCRIPTION = """\
Assess a survey: correct every drawn pipe region, solve its heat balance, compare it with sound
lagging, find damaged stretches, and say how far each number can be trusted.

Reads SURVEY/survey.toml, the frames and lists it names, SURVEY/regions/ and, where there is one,
SURVEY/tables/. Nothing in the survey is changed but its results folder.
"""
_END = """\
writes, into the results folder, whole or not at all:
  report.html        the report, one file that needs nothing beside it
  regions.csv, stretches.csv, stations.csv, components.csv
                     the numbers; COLUMNS.txt says what every column means
  assessment.json    everything a program needs, with inputs' SHA-256, seed and versions
  strips/, stretches/, draws/
                     a picture per region, outlines on the frames, the draws behind the intervals
  A folder that holds anything else is refused; results of an earlier run are replaced.

prints a short table: worst findings first, then what could not be assessed and why.

exit codes:
  0 done; 1 could not; 2 wrong usage; 3 done, but a frame, line or region was left out (its reason
  is named; with --strict that is 1); 130 interrupted. A region whose verdict is "not quantified"
  was assessed: it is not left out.

example:
  cladwatt assess north_hall --out north_hall_results --draws 2000 --workers 4
"""


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "assess", _run, summary="assess a survey and write results and report",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("survey", metavar="SURVEY", type=Path, help="survey folder")
    parser.add_argument(
        "--out", metavar="DIR", type=Path, help="results folder (default: SURVEY/results)"
    )
    parser.add_argument(
        "--seed", metavar="N", type=whole_number(0), default=1,
        help="seed of the draws; same seed, same results (default: 1)",
    )  # fmt: skip
    parser.add_argument(
        "--draws", metavar="N", type=whole_number(100, 100_000), default=1000,
        help="draws behind every interval, 100 to 100000 (default: 1000)",
    )  # fmt: skip
    parser.add_argument(
        "--workers", metavar="N", type=whole_number(1, 256), default=1,
        help="processes to share the frames among; results do not depend on it (default: 1)",
    )  # fmt: skip
    parser.add_argument(
        "--strict", action="store_true", help="end with 1 where something was left out"
    )
    parser.add_argument(
        "--json", action="store_true", help="print a summary as JSON instead of the table"
    )


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    from cladwatt.report.html_report import write_report
    from cladwatt.results.store import check_target, write_results
    from cladwatt.survey.survey_file import read_survey

    survey = read_survey(options.survey)
    folder: Path = options.out if options.out is not None else options.survey / RESULTS_FOLDER
    check_target(folder, survey.root)
    assessment = _assess(survey, options, messages)
    written = write_results(
        assessment,
        folder,
        survey_root=survey.root,
        extra=lambda place: _ignore(write_report(assessment, place)),
    )
    code = _code(assessment, options.strict)
    if options.json:
        messages.output(json.dumps(_summary(assessment, written, code), indent=1))
    else:
        _print_table(assessment, folder, messages)
    _closing_notes(survey, assessment, options, messages)
    return code


def _ignore(_value: object) -> None:
    """Drop what a callback returns."""


def _assess(survey: "Survey", options: argparse.Namespace, messages: Messages) -> "Assessment":
    from cladwatt.assess import assess
    from cladwatt.faces.cli.workers import worker_pool
    from cladwatt.results.assessment import Settings

    workers = min(options.workers, max(len(survey.frames), 1))
    with (
        worker_pool(workers, show_warnings=options.debug) as pool,
        ProgressBar(messages.width, silent=messages.quiet) as progress,
    ):
        return assess(
            survey,
            settings=Settings(seed=options.seed, draws=options.draws),
            progress=progress,
            executor=pool,
        )


def _code(assessment: "Assessment", strict: bool) -> ExitCode:
    if not assessment.regions:
        return ExitCode.COULD_NOT
    if assessment.left_out:
        return ExitCode.COULD_NOT if strict else ExitCode.LEFT_OUT
    return ExitCode.DONE


def _print_table(assessment: "Assessment", folder: Path, messages: Messages) -> None:
    from cladwatt.report.console import console_summary

    if messages.quiet:
        return
    messages.lines(
        [
            *console_summary(assessment, messages.width),
            "",
            f"Results are in {folder}; open {folder / 'report.html'}",
        ]
    )


def _closing_notes(
    survey: "Survey", assessment: "Assessment", options: argparse.Namespace, messages: Messages
) -> None:
    questions = sum(fault.severity == "question" for fault in survey.faults)
    questions += sum(
        remark.key == "remark.question" for frame in assessment.frames for remark in frame.remarks
    )
    if questions:
        messages.note(
            f"{counted(questions, 'question')} about the survey; "
            f"`cladwatt check {options.survey}` asks"
        )
    left_out = len(assessment.left_out)
    if not assessment.regions:
        messages.error("not one pipe region could be assessed; the report says why")
    elif left_out and options.strict:
        messages.error(f"{counted(left_out, 'thing')} left out, and --strict was asked for")


def _summary(assessment: "Assessment", folder: Path, code: ExitCode) -> dict[str, object]:
    """Return the end of a run for a program; figures in SI, null where not known."""
    from cladwatt.report.findings import ranked_findings
    from cladwatt.report.tables import left_out_table

    levels = [region.verdict.level for region in assessment.regions]
    return {
        "results": str(folder),
        "exit_code": int(code),
        "survey": assessment.survey_name,
        "frames": len(assessment.frames),
        "regions": len(levels),
        "verdicts": {
            level.replace(" ", "_"): levels.count(level)
            for level in ("quantified", "indicative", "not quantified")
        },
        "total_loss_W": _interval(assessment.total_loss),
        "total_gain_W": _interval(assessment.total_gain),
        "total_excess_W": _interval(assessment.total_excess),
        "components": len(assessment.components),
        "component_loss_W": _interval(assessment.component_loss),
        "component_gain_W": _interval(assessment.component_gain),
        "findings": [
            {
                "region_id": finding.region.region_id,
                "tag": finding.region.tag,
                "frame_id": finding.region.frame_id,
                "verdict": finding.region.verdict.level,
                "excess_W": _interval(finding.excess),
                "probability_damaged": _number(finding.probability),
            }
            for finding in ranked_findings(assessment)
        ],
        "left_out": left_out_table(assessment).to_dict(orient="records"),
    }


def _interval(interval: object) -> dict[str, float | None] | None:
    if interval is None:
        return None
    return {part: _number(getattr(interval, part)) for part in ("median", "low", "high")}


def _number(value: float | None) -> float | None:
    """Return a number JSON can hold, or None."""
    return value if value is not None and abs(value) < float("inf") else None
