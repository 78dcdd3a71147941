"""A list kept as CSV beside the survey file: one head row of keys, one row per entry."""

import csv
import io
import re
from dataclasses import dataclass
from datetime import date, datetime

from cladwatt.errors import Fault, SurveyFileError
from cladwatt.survey.fault_list import FaultList, Place, shown
from cladwatt.survey.keys import UNKNOWN_WORD, Key, Section
from cladwatt.survey.table_reader import nearest

__all__ = ["ListRow", "cell_value", "decoded_text", "read_rows"]

_DELIMITERS = ";\t,"
_TRUE, _FALSE = {"true", "yes", "y"}, {"false", "no", "n"}
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")
_LONGEST_FIELD = 1 << 20


@dataclass(frozen=True)
class ListRow:
    """One row: its line in the file and its filled cells by accepted key."""

    line: int
    cells: dict[str, str]
    extra: dict[str, str]
    """Cells of columns that are no keys."""
    decimal_comma: bool


def decoded_text(data: bytes) -> str:
    """Return the text of a CSV in UTF-8 (with or without mark), UTF-16 or Latin-1."""
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return data.decode("utf-16", errors="replace")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        return data.decode("latin-1")


def read_rows(
    data: bytes, path: str, section: Section, extra_names: frozenset[str], faults: FaultList
) -> list[ListRow]:
    """Return the rows of a list.

    Parameters
    ----------
    data : bytes
        The file.
    path : str
        Name in messages.
    section : Section
        Whose keys are columns; letter case does not matter.
    extra_names : frozenset of str
        Further accepted columns (numbered layers).
    faults : FaultList
        Gets columns that are no keys, as questions.

    Raises
    ------
    SurveyFileError
        If the file as a whole cannot be used: empty, no required column, a column twice, a row
        with more cells than the head.
    """
    text = decoded_text(data)
    if "\x00" in text:
        raise SurveyFileError(Fault(path, "", "the file is not text", "expected a CSV"))
    lines = text.splitlines()
    first = next((line for line in lines if line.strip() and not line.startswith("#")), None)
    if first is None:
        raise SurveyFileError(
            Fault(path, "", "the file is empty", f"expected a head row of keys of {section.name}")
        )
    delimiter = max(_DELIMITERS, key=first.count)
    table = _split(text, delimiter, path)
    head_line, head = table[0]
    names = _columns(head, head_line, path, section, extra_names, faults)
    return [
        _row(line, cells, names, delimiter, path)
        for line, cells in table[1:]
        if any(cell.strip() for cell in cells)
    ]


def _split(text: str, delimiter: str, path: str) -> list[tuple[int, list[str]]]:
    reader = csv.reader(
        io.StringIO(text, newline=""), delimiter=delimiter, skipinitialspace=True, strict=True
    )
    csv.field_size_limit(_LONGEST_FIELD)
    rows: list[tuple[int, list[str]]] = []
    start = 1
    try:
        for cells in reader:
            if cells and any(c.strip() for c in cells) and not cells[0].startswith("#"):
                rows.append((start, cells))
            start = reader.line_num + 1
    except csv.Error as error:
        raise SurveyFileError(
            Fault(path, "", f"not a readable CSV: {error}", "mend this row", line=start)
        ) from None
    return rows


def _columns(
    head: list[str],
    line: int,
    path: str,
    section: Section,
    extra_names: frozenset[str],
    faults: FaultList,
) -> list[tuple[str, bool]]:
    """Return each column's (name, whether it is a key)."""
    accepted = {name.lower(): name for name in (*section.spellings, *extra_names)}
    columns: list[tuple[str, bool]] = []
    seen: set[str] = set()
    for cell in head:
        name = cell.strip().strip("\ufeff")
        known = accepted.get(name.lower().replace(" ", "_"))
        columns.append((known or name, known is not None))
        if known is not None and known in seen:
            raise SurveyFileError(
                Fault(path, known, "two columns have this name", "expected it once", line=line)
            )
        seen.add(known or "")
        if known is None and name:
            faults.ask(
                Place(path, line_of=lambda _key: line),
                "",
                f"column {shown(name)} is no key and is not used",
                f"rename it where it should be{nearest(name, accepted.values())}",
            )
    for key in section.keys:
        if key.required and not any(written in seen for written, _ in key.spellings):
            raise SurveyFileError(
                Fault(
                    path, "", f"there is no column {key.usual}",
                    f"expected one ({key.meaning.lower()}); the columns are "
                    + ", ".join(name for name, _ in columns)[:200],
                    line=line,
                )
            )  # fmt: skip
    return columns


def _row(
    line: int, cells: list[str], columns: list[tuple[str, bool]], delimiter: str, path: str
) -> ListRow:
    surplus = [cell for cell in cells[len(columns) :] if cell.strip()]
    if surplus:
        hint = f"expected {len(columns)}, as in the head row"
        if delimiter == ",":
            hint += "; with decimal commas separate the columns by semicolons"
        raise SurveyFileError(Fault(path, "", f"the row has {len(cells)} cells", hint, line=line))
    known: dict[str, str] = {}
    extra: dict[str, str] = {}
    for (name, is_key), cell in zip(columns, cells, strict=False):
        if cell.strip() and name:
            (known if is_key else extra)[name] = cell.strip()
    return ListRow(line, known, extra, delimiter != ",")


def cell_value(key: Key, text: str, *, decimal_comma: bool) -> object:
    """Return a cell as the survey file would give it; what cannot be read stays text."""
    if text.lower() == UNKNOWN_WORD:
        return UNKNOWN_WORD
    if key.kind in ("quantity", "number", "integer"):
        plain = text.replace(",", ".") if decimal_comma and text.count(",") == 1 else text
        return float(plain) if _NUMBER.fullmatch(plain) else text
    if key.kind == "flag":
        word = text.lower()
        return True if word in _TRUE else False if word in _FALSE else text
    if key.kind in ("date", "time"):
        try:
            moment = datetime.fromisoformat(text)
            return moment if key.kind == "time" else date.fromisoformat(text)
        except ValueError:
            return text
    return text
