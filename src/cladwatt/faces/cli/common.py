"""What the commands share: options every one takes, checked numbers, help layout."""

import argparse
from collections.abc import Callable
from typing import TYPE_CHECKING, TypeAlias

from cladwatt.faces.cli.messages import ExitCode, Messages

__all__ = ["CommandGroup", "Runner", "add_command", "global_options", "whole_number"]

Runner: TypeAlias = Callable[[argparse.Namespace, Messages], ExitCode]

if TYPE_CHECKING:
    CommandGroup: TypeAlias = argparse._SubParsersAction[argparse.ArgumentParser]
else:
    CommandGroup = object


def whole_number(lower: int, upper: int | None = None) -> Callable[[str], int]:
    """Return a converter that takes a whole number from `lower` to `upper`."""
    accepted = f"a whole number of {lower} or more"
    if upper is not None:
        accepted = f"a whole number from {lower} to {upper}"

    def convert(text: str) -> int:
        try:
            value = int(text)
        except ValueError:
            raise argparse.ArgumentTypeError(f"{text!r} is not {accepted}") from None
        if value < lower or (upper is not None and value > upper):
            raise argparse.ArgumentTypeError(f"{value} is not {accepted}")
        return value

    return convert


def global_options(parser: argparse.ArgumentParser, *, main: bool) -> None:
    """Add the options that stand before or after the command."""
    missing: object = False if main else argparse.SUPPRESS
    group = parser.add_argument_group("everywhere")
    group.add_argument(
        "-q", "--quiet", action="store_true", default=missing,
        help="no progress, no remarks: only what was asked for, and errors",
    )  # fmt: skip
    group.add_argument(
        "--debug", action="store_true", default=missing,
        help="with an error, also show where in the program it happened",
    )  # fmt: skip


def add_command(
    commands: CommandGroup, name: str, run: Runner, *, summary: str, description: str, end: str
) -> argparse.ArgumentParser:
    """Add a command with its help.

    Parameters
    ----------
    commands : sub-parsers of the main parser
    name : str
    run : callable
        Does the work.
    summary : str
        One line for the list of commands.
    description : str
        What it does, above the options.
    end : str
        Outputs, exit codes and an example, below the options.
    """
    parser = commands.add_parser(
        name,
        help=summary,
        description=description,
        epilog=end,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.set_defaults(run=run)
    global_options(parser, main=False)
    return parser
