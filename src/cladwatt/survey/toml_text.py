"""Parse the survey file's text and find the line a key stands on."""

import re
import tomllib
from dataclasses import dataclass

from cladwatt.errors import Fault, SurveyFileError

__all__ = ["LineFinder", "parse_toml"]

_AT = re.compile(r"at line (\d+), column (\d+)")
_HEAD = re.compile(r"^\s*(\[\[?)\s*([^\[\]#]+?)\s*\]\]?\s*(?:#.*)?$")
_KEY = re.compile(r"""^\s*(?:"([^"]*)"|'([^']*)'|([A-Za-z0-9_-]+))\s*(?:\.|=)""")
_COMMA_NUMBER = re.compile(r"=\s*[+-]?\d+,\d+\s*(#.*)?$")


def parse_toml(data: bytes, path: str) -> tuple[dict[str, object], str]:
    """Return the parsed survey file and its text.

    Parameters
    ----------
    data : bytes
        UTF-8, with or without a byte order mark.
    path : str
        Name in messages.

    Raises
    ------
    SurveyFileError
        If it is not UTF-8 or not TOML; with line and column, and a word on decimal commas.
    """
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise SurveyFileError(
            Fault(path, "", "the text is not UTF-8", "save the file as UTF-8", line=line)
        ) from None
    text = text.replace("\r\n", "\n")
    try:
        return tomllib.loads(text), text
    except tomllib.TOMLDecodeError as error:
        raise SurveyFileError(_toml_fault(str(error), text, path)) from None
    except (RecursionError, ValueError, OverflowError) as error:
        raise SurveyFileError(
            Fault(path, "", f"the TOML cannot be read ({type(error).__name__}: {error})"[:200],
                  "expected plain tables and short numbers")
        ) from None  # fmt: skip


def _toml_fault(message: str, text: str, path: str) -> Fault:
    match = _AT.search(message)
    lines = text.splitlines()
    line = int(match[1]) if match else len(lines)
    reason = _AT.sub("", message).replace("()", "").strip() or message
    said = lines[line - 1].strip() if 0 < line <= len(lines) else ""
    found = f"not valid TOML: {reason}"
    if match:
        found += f" at column {match[2]}"
    if said:
        found += f" in {said[:60]!r}"
    expected = "mend this line"
    if said and _COMMA_NUMBER.search(said):
        expected = "write numbers with a decimal point, not a comma: 4.5"
    elif "end of document" in message:
        expected = "a quote, bracket or value is not closed"
    elif said and re.search(r"=\s*\"[^\"]*\\", said):
        expected = "in paths write / or put the text in 'single quotes'"
    return Fault(path, "", found, expected, line=line if match else None)


@dataclass(frozen=True)
class _Block:
    name: str
    index: int
    line: int
    keys: dict[str, int]


class LineFinder:
    """Finds the line of a key in a survey file's text; tables of one name are counted from 0."""

    def __init__(self, text: str) -> None:
        counts: dict[str, int] = {}
        self._blocks: dict[tuple[str, int], _Block] = {}
        block = _Block("", 0, 1, {})
        self._blocks["", 0] = block
        for number, line in enumerate(text.split("\n"), start=1):
            head = _HEAD.match(line)
            if head is not None:
                name = head[2]
                index = counts.get(name, -1) + 1
                counts[name] = index
                block = _Block(name, index, number, {})
                self._blocks[name, index] = block
                continue
            key = _KEY.match(line)
            if key is not None:
                block.keys.setdefault(key[1] or key[2] or key[3], number)

    def line(self, name: str, index: int, key: str) -> int | None:
        """Return the line of a key, else of its table's head, else None."""
        block = self._blocks.get((name, index))
        if block is None:
            return None
        return block.keys.get(key.split(".")[0].split("[")[0], block.line)
