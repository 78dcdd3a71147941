"""``cladwatt sample``: a survey of an invented plant, with its truth beside it."""

import argparse
from pathlib import Path

from cladwatt.faces.cli.common import CommandGroup, add_command, whole_number
from cladwatt.faces.cli.messages import ExitCode, Messages

__all__ = ["add"]

_DESCRIPTION = """\
Write a complete survey of an invented plant: frames as CSV and TIFF, regions, line list and
conditions, with sound lagging and every kind of damage. What is really so stands beside it in
truth/. It is drawn by a richer model than the one that assesses it. Takes up to a minute.
"""
_END = """\
writes, whole or not at all:
  DIR/survey.toml, DIR/frames/, DIR/regions/, DIR/truth/

exit codes:
  0 done; 1 could not, for example because DIR holds files already; 2 wrong usage; 130 interrupted

example:
  cladwatt sample demo --seed 12 && cladwatt assess demo
"""


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "sample", _run, summary="write a survey of an invented plant to try things on",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("folder", metavar="DIR", type=Path, help="new or empty folder")
    parser.add_argument(
        "--seed", metavar="N", type=whole_number(0), default=7,
        help="another seed places other damage and draws other weather; same seed, same files "
        "(default: 7)",
    )  # fmt: skip


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    from cladwatt.synthetic.sample import write_sample

    write_sample(options.folder, options.seed)
    messages.note(
        f"{options.folder} holds a survey of an invented plant; "
        f"`cladwatt assess {options.folder}` assesses it"
    )
    return ExitCode.DONE
