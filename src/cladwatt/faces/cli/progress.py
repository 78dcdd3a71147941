"""A progress bar on stderr, only where a person watches."""

import sys
import time
from types import TracebackType
from typing import Self

__all__ = ["ProgressBar"]

_CELLS = 24


class ProgressBar:
    """Redraws one line as frames finish; writes nothing where stderr is no terminal.

    Parameters
    ----------
    width : int
        Columns of the terminal.
    silent : bool
        Whether to write nothing at all.
    """

    def __init__(self, width: int = 80, *, silent: bool = False) -> None:
        self._width = max(width - 1, 40)
        self._active = not silent and sys.stderr.isatty()
        self._drawn = 0
        self._started = time.monotonic()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        traceback: TracebackType | None,
    ) -> None:
        self._draw("")

    def __call__(self, done: int, total: int, name: str) -> None:
        """Draw the bar after `done` of `total` frames; `name` is the one just finished."""
        filled = round(_CELLS * done / total) if total else _CELLS
        bar = "#" * filled + "." * (_CELLS - filled)
        seconds = int(time.monotonic() - self._started)
        head = f"[{bar}] {done}/{total} {seconds // 60}:{seconds % 60:02d} "
        self._draw(head + "".join(letter for letter in name if letter.isprintable()))

    def _draw(self, text: str) -> None:
        if not self._active:
            return
        shown = text[: self._width]
        blanks = " " * max(self._drawn - len(shown), 0)
        sys.stderr.write(f"\r{shown}{blanks}" if shown else f"\r{blanks}\r")
        sys.stderr.flush()
        self._drawn = len(shown)
