"""``cladwatt check``: everything that is wrong with a survey, at once."""

import argparse
from pathlib import Path

from cladwatt.faces.cli.common import CommandGroup, add_command
from cladwatt.faces.cli.messages import ExitCode, Messages, counted

__all__ = ["add"]

_DESCRIPTION = """\
List every fault of a survey at once, without assessing anything: survey file, line list, frame
list, regions, the survey's own tables, and the frames themselves, each read and compared with
what is declared. Writes nothing.
"""
_END = """\
prints, one to a line, files named from the survey folder:
  FILE:LINE: KEY: what was found; what is accepted
Faults first. Questions after them: they stop nothing, but somebody should answer them.

exit codes:
  0 no fault, questions or not; 1 at least one fault; 2 wrong usage; 130 interrupted

example:
  cladwatt check north_hall
"""


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "check", _run, summary="list every fault of a survey, without assessing it",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("survey", metavar="SURVEY", type=Path, help="survey folder")


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    from cladwatt.survey.checking import check_survey

    found = check_survey(options.survey)
    faults = [str(fault) for fault in found if fault.severity == "error"]
    questions = [str(fault) for fault in found if fault.severity == "question"]
    parts = []
    if faults:
        parts.append("\n".join(["Faults", *faults]))
    if questions:
        parts.append("\n".join(["Questions (nothing stops for them)", *questions]))
    if parts:
        messages.output("\n\n".join(parts))
    messages.note(f"{counted(len(faults), 'fault')}, {counted(len(questions), 'question')}")
    return ExitCode.COULD_NOT if faults else ExitCode.DONE
