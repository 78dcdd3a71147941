"""What the user is told, where it is written, and the exit code that goes with it."""

import os
import shutil
import sys
import unicodedata
from collections.abc import Iterable
from enum import IntEnum

from cladwatt.errors import CladwattError, FaultyInputError

__all__ = ["ExitCode", "Messages", "counted", "end_output"]

_PROGRAM = "cladwatt"


class ExitCode(IntEnum):
    """How a command ended."""

    DONE = 0
    COULD_NOT = 1
    WRONG_USAGE = 2
    LEFT_OUT = 3
    INTERRUPTED = 130


class Messages:
    """Writes to the two streams: what was asked for to stdout, everything else to stderr.

    Parameters
    ----------
    quiet : bool
        Only what was asked for, and errors.
    """

    def __init__(self, *, quiet: bool = False) -> None:
        self.quiet = quiet
        self._reader_gone = False

    @property
    def width(self) -> int:
        """Columns of the terminal; 100 where there is none."""
        return shutil.get_terminal_size((100, 24)).columns

    def output(self, text: str) -> None:
        """Write what the command was asked for.

        A reader that went away (``| head``) is no error: the rest is not written, and the command
        goes on to its own exit code.
        """
        if self._reader_gone:
            return
        try:
            sys.stdout.write(_harmless(text if text.endswith("\n") else text + "\n"))
            sys.stdout.flush()
        except BrokenPipeError:
            self._reader_gone = True
            _close_stdout_quietly()

    def lines(self, lines: Iterable[str]) -> None:
        """Write several lines of what the command was asked for."""
        self.output("\n".join(lines))

    def note(self, text: str) -> None:
        """Tell something besides; left out when quiet."""
        if not self.quiet:
            self._error_line(text)

    def error(self, text: str) -> None:
        """Tell what went wrong."""
        self._error_line(f"{_PROGRAM}: {text}")

    def failure(self, error: CladwattError) -> ExitCode:
        """Tell an error raised on purpose; faults of files stand one to a line, place first."""
        if isinstance(error, FaultyInputError) and error.faults:
            for fault in error.faults:
                self._error_line(str(fault))
            self.error(f"{counted(len(error.faults), 'fault')}; nothing was done")
        else:
            self.error(str(error))
        return ExitCode.COULD_NOT

    def system_failure(self, error: OSError) -> ExitCode:
        """Tell that the system refused something."""
        name = f"{error.filename}: " if error.filename is not None else ""
        self.error(f"{name}the system refused: {error.strerror or error}")
        return ExitCode.COULD_NOT

    def defect(self, error: BaseException) -> ExitCode:
        """Tell an error nobody foresaw."""
        said = " ".join(str(error).split())
        kind = type(error).__name__
        self.error(
            f"this is a fault in the program, not in your files ({kind}: {said[:300]}). Earlier "
            "results were not changed. Run the same command with --debug to see where it "
            "happened, and report that text."
        )
        return ExitCode.COULD_NOT

    def interrupted(self) -> ExitCode:
        """Tell that the user stopped the run."""
        self.error("interrupted; nothing half-written was left behind")
        return ExitCode.INTERRUPTED

    def _error_line(self, text: str) -> None:
        try:
            sys.stderr.write(_harmless(text) + "\n")
            sys.stderr.flush()
        except (OSError, ValueError):
            # nobody listens; the exit code still tells
            return


def counted(count: int, one: str, many: str | None = None) -> str:
    """Return a count with its noun, ``1 fault``, ``3 faults``."""
    return f"{count} {one if count == 1 else many or one + 's'}"


def _harmless(text: str) -> str:
    """Return text without control characters, which could steer a terminal."""
    return "".join(
        letter if letter in "\n\t" or unicodedata.category(letter) != "Cc" else "\ufffd"
        for letter in text
    )


def end_output() -> None:
    """Write what is still held back; a reader that went away is no error."""
    try:
        sys.stdout.flush()
    except BrokenPipeError:
        _close_stdout_quietly()


def _close_stdout_quietly() -> None:
    """Point stdout to nowhere, so that the interpreter's last flush does not complain."""
    try:
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, sys.stdout.fileno())
        os.close(nowhere)
    except (OSError, ValueError):
        return
