"""The command ``cladwatt``: reads the options, runs one command, tells how it ended."""

import argparse
import sys
import traceback
import warnings
from collections.abc import Sequence
from typing import NoReturn

from cladwatt.errors import CladwattError
from cladwatt.faces.cli import assess, check, explain, plan, sample, schema, start, tables
from cladwatt.faces.cli.common import global_options
from cladwatt.faces.cli.messages import ExitCode, Messages, end_output

__all__ = ["build_parser", "main", "run"]

_DESCRIPTION = """\
From a survey folder of recorded infrared frames and drawn pipe regions to heat losses in watts
per metre, damaged stretches of lagging and a report, each number with its 95 % interval.
"""
_END = """\
exit codes:
  0    done
  1    could not be done; the reason stands on stderr
  2    wrong usage: the command line itself was not understood
  3    done, with something left out that is named; --strict of assess makes that 1
  130  interrupted

examples:
  cladwatt sample demo            write a survey of an invented plant
  cladwatt assess demo            assess it; results go to demo/results
  cladwatt start *.tiff --into boiler_house
                                  begin a survey of your own from its frames
  cladwatt check boiler_house     list everything that is still wrong in it

`cladwatt COMMAND --help` tells what a command reads, writes and returns.
"""


class _Version(argparse.Action):
    """Prints the version; looks it up only when asked."""

    def __init__(self, option_strings: Sequence[str], dest: str, help: str) -> None:
        super().__init__(option_strings, dest, nargs=0, default=argparse.SUPPRESS, help=help)

    def __call__(self, parser: argparse.ArgumentParser, *_: object) -> NoReturn:
        from importlib.metadata import version

        Messages().output(f"cladwatt {version('cladwatt')}")
        parser.exit()


def build_parser() -> argparse.ArgumentParser:
    """Return the parser of the whole command line."""
    parser = argparse.ArgumentParser(
        prog="cladwatt",
        description=_DESCRIPTION,
        epilog=_END,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    global_options(parser, main=True)
    parser.add_argument("--version", action=_Version, help="print the version and stop")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True)
    for module in (assess, check, explain, plan, start, sample, tables, schema):
        module.add(commands)
    return parser


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code; raises nothing.

    Parameters
    ----------
    arguments : sequence of str, optional
        What stands behind ``cladwatt``; the process's own where left out.

    Returns
    -------
    int
        See :class:`~cladwatt.faces.cli.messages.ExitCode`.
    """
    try:
        options = build_parser().parse_args(arguments)
    except SystemExit as end:
        return end.code if isinstance(end.code, int) else ExitCode.WRONG_USAGE
    messages = Messages(quiet=options.quiet)
    try:
        code: ExitCode = options.run(options, messages)
    except KeyboardInterrupt:
        code = messages.interrupted()
    except Exception as error:
        if options.debug:
            traceback.print_exc()
        code = _told(error, messages)
    return int(code)


def _told(error: Exception, messages: Messages) -> ExitCode:
    """Say what went wrong, whoever is to blame."""
    from concurrent.futures import BrokenExecutor

    if isinstance(error, CladwattError):
        return messages.failure(error)
    if isinstance(error, MemoryError):
        messages.error("there is not enough memory; try fewer draws or one worker")
        return ExitCode.COULD_NOT
    if isinstance(error, BrokenExecutor):
        messages.error(
            "a worker process ended unexpectedly, most often for want of memory; "
            "run again with --workers 1"
        )
        return ExitCode.COULD_NOT
    if isinstance(error, OSError):
        return messages.system_failure(error)
    return messages.defect(error)


def run() -> NoReturn:
    """Run the command line as a process of its own; the console script."""
    for stream in (sys.stdout, sys.stderr):
        # a terminal that lacks a sign must not cost the user the message
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="backslashreplace")
    if "--debug" not in sys.argv:
        # numerical libraries warn in words meant for programmers
        warnings.simplefilter("ignore")
    code = main()
    end_output()
    sys.exit(code)
