"""CSV matrices: find encoding, separator, decimal sign and header, then read the numbers."""

import re
from collections import Counter
from dataclasses import dataclass

import numpy as np

from cladwatt.quantities import Remark
from cladwatt.survey.decoded import MAXIMUM_PIXELS, Decoded, Refusal
from cladwatt.survey.temperature_unit import unit_in_header
from cladwatt.types import FloatArray

__all__ = ["MAXIMUM_CSV_BYTES", "MAXIMUM_CSV_SIDE", "decode_text", "parse_csv_matrix"]

MAXIMUM_CSV_BYTES = 256 * 1024**2
MAXIMUM_CSV_SIDE = 16384
"""Most lines and most values in a line; settled before any line is taken apart."""

_SEPARATOR_NAMES = {"\t": "tab", ";": "semicolon", ",": "comma"}
_MATRIX = (
    "expected a matrix of numbers, one image row per line, separated by comma, semicolon or tab"
)
_DATA_LINE = re.compile(r"[0-9\s+\-.,;eE]*")
_DEAD_WORD = re.compile(
    r"(?i)(?<![^\s,;])(?:[+-]?nan|n/a|na|null|none|[+-]?inf(?:inity)?)(?![^\s,;])"
)
_DEAD_CELL = re.compile(r"(?i)-*|[+-]?nan|n/a|na|null|none|[+-]?inf(?:inity)?")
_NUMBER = re.compile(r"[+-]?(?:[0-9]+[.,]?[0-9]*|[.,][0-9]+)(?:[eE][+-]?[0-9]+)?")
_QUOTED = re.compile(r'"([^"]*)"')
_BYTE_ORDER_MARKS = (
    (b"\xff\xfe\x00\x00", "UTF-32"),
    (b"\x00\x00\xfe\xff", "UTF-32"),
    (b"\xef\xbb\xbf", "UTF-8-SIG"),
    (b"\xff\xfe", "UTF-16"),
    (b"\xfe\xff", "UTF-16"),
)


@dataclass(frozen=True)
class _Layout:
    """How the lines of one file are to be read."""

    separator: str
    decimal: str
    header: list[str]
    body: list[tuple[int, str]]
    columns: int
    remarks: tuple[Remark, ...]


def decode_text(data: bytes) -> tuple[str, str]:
    """Return the text and the name of its encoding.

    A byte order mark decides; else UTF-16 by its zero bytes, UTF-8 if it is valid, Latin-1.

    Raises
    ------
    Refusal
        If the bytes are no text.
    """
    encoding = next((name for mark, name in _BYTE_ORDER_MARKS if data.startswith(mark)), None)
    head = data[:4096]
    if encoding is None and b"\x00" in head:
        pairs = np.frombuffer(head + b"\x01" * (len(head) % 2), dtype=np.uint8).reshape(-1, 2)
        zero_first, zero_second = np.mean(pairs == 0, axis=0)
        if max(zero_first, zero_second) < 0.7 or min(zero_first, zero_second) > 0.1:
            raise Refusal("the file is neither TIFF nor text", _MATRIX + ", or a TIFF")
        encoding = "UTF-16-BE" if zero_first > zero_second else "UTF-16-LE"
    if encoding is None:
        try:
            return data.decode("utf-8"), "UTF-8"
        except UnicodeDecodeError:
            encoding = "Latin-1"
    try:
        text = data.decode(encoding)
    except UnicodeDecodeError as error:
        raise Refusal(
            f"the text breaks off or is not {encoding} (at byte {error.start})",
            "expected an intact text file; export or copy it again",
        ) from None
    return text.removeprefix("\ufeff"), encoding.replace("-SIG", " with BOM")


def parse_csv_matrix(text: str, *, encoding: str = "UTF-8") -> Decoded:
    """Read a matrix of numbers out of `text`.

    Parameters
    ----------
    text : str
        The whole file.
    encoding : str
        For the description only.

    Returns
    -------
    Decoded
        Values in the order of the file; NaN where a cell is empty or says so.

    Raises
    ------
    Refusal
        With the line, if the text is no rectangular matrix of numbers.
    """
    layout = _find_layout(_numbered_lines(text))
    pixels = len(layout.body) * layout.columns
    if pixels > MAXIMUM_PIXELS:
        raise Refusal(f"the matrix holds {pixels} values", f"expected at most {MAXIMUM_PIXELS}")
    values = _numbers(layout)
    _refuse_swallowed_decimals(layout, values)
    values, remarks = _without_index_column(values)
    rows, columns = values.shape
    if rows < 2 or columns < 2:
        raise Refusal(f"found {rows} row(s) of {columns} value(s)", _MATRIX)
    _refuse_list_of_points(values)
    details = {
        "format": "CSV",
        "encoding": encoding,
        "separator": _SEPARATOR_NAMES[layout.separator],
        "decimal": "comma" if layout.decimal == "," else "point",
        "header_lines": str(len(layout.header)),
    }
    unit = unit_in_header(layout.header)
    return Decoded(values, "text", unit=unit, details=details, remarks=layout.remarks + remarks)


def _numbered_lines(text: str) -> list[tuple[int, str]]:
    """Return the lines that hold anything, with their numbers from 1."""
    text = text.replace("\r\n", "\n").replace("\r", "\n")
    text = text.replace("\u2212", "-").replace("\xa0", " ")
    if text.count("\n") > MAXIMUM_CSV_SIDE:
        raise Refusal(
            f"the file holds {text.count(chr(10))} lines", f"expected at most {MAXIMUM_CSV_SIDE}"
        )
    lines = [
        (number, line)
        for number, line in enumerate(text.split("\n"), 1)
        if line and not line.isspace()
    ]
    if not lines:
        raise Refusal("the file is empty", _MATRIX)
    return lines


def _is_data(line: str) -> bool:
    if '"' in line:
        line = line.replace('"', "")
    if _DATA_LINE.fullmatch(line) is None:
        line = _DEAD_WORD.sub("0", line)
        if _DATA_LINE.fullmatch(line) is None:
            return False
    return any(character in "0123456789,;\t" for character in line)


def _unquoted(line: str, separator: str) -> str:
    if '"' not in line:
        return line
    if separator != ",":
        return line.replace('"', "")
    return _QUOTED.sub(lambda match: match[1].replace(",", "."), line)


def _find_separator(lines: list[str]) -> str:
    for separator in _SEPARATOR_NAMES:
        if 2 * sum(separator in line for line in lines) >= len(lines):
            return separator
    raise Refusal(
        f"no separator between the numbers (line begins {lines[0].strip()[:40]!r})", _MATRIX
    )


def _find_layout(lines: list[tuple[int, str]]) -> _Layout:
    data = [_is_data(line) for _, line in lines]
    if not any(data):
        number, line = lines[0]
        raise Refusal(
            f"no line of numbers found; the file begins {line.strip()[:40]!r}", _MATRIX, number
        )
    separator = _find_separator([line for (_, line), good in zip(lines, data, strict=True) if good])
    lines = [(number, _unquoted(line, separator)) for number, line in lines]
    counts = [line.count(separator) + 1 for _, line in lines]
    columns = Counter(count for count, good in zip(counts, data, strict=True) if good).most_common(
        1
    )[0][0]
    if columns > MAXIMUM_CSV_SIDE:
        raise Refusal(f"the rows hold {columns} values", f"expected at most {MAXIMUM_CSV_SIDE}")
    start = _first_row([line for _, line in lines], data, columns, separator)
    header = [line for _, line in lines[:start]]
    _check_header_rows(lines[:start], data[:start], columns, separator)
    body = lines[start:]
    for (number, line), count, good in zip(body, counts[start:], data[start:], strict=True):
        if not good:
            raise _bad_cell(number, line.split(separator)) or Refusal(
                f"no row of numbers: {line.strip()[:40]!r}", _MATRIX, number
            )
        if count != columns:
            raise Refusal(
                f"the row has {count} values, the other rows have {columns}",
                "expected rows of one length; the file may be cut or edited, export it again",
                number,
            )
    remarks: tuple[Remark, ...] = ()
    if _counts_up(body[0][1], separator) and len(body) > 1:
        header.append(body[0][1])
        body = body[1:]
        remarks = (Remark("frame.column_numbers_dropped"),)
    if columns > 2 and all(line.rstrip(" ").endswith(separator) for _, line in body):
        body = [(number, line.rstrip(" ")[:-1]) for number, line in body]
        columns -= 1
    return _Layout(separator, _find_decimal(body, separator), header, body, columns, remarks)


def _first_row(lines: list[str], data: list[bool], columns: int, separator: str) -> int:
    """Return where the matrix begins.

    A spreadsheet fills header lines up with separators, and blank lines too; a blank row counts
    as a dead one only where no such line stands above it.
    """
    rows = [i for i, line in enumerate(lines) if data[i] and line.count(separator) + 1 == columns]
    full = next(
        (
            i
            for i in rows
            if 2 * sum(map(bool, map(str.strip, lines[i].split(separator)))) > columns
        ),
        rows[0],
    )
    last_words = max((i for i in range(full) if not data[i]), default=-1)
    if last_words >= 0 and lines[last_words].count(separator) + 1 == columns:
        return full
    return next(i for i in rows if i > last_words)


def _check_header_rows(
    lines: list[tuple[int, str]], data: list[bool], columns: int, separator: str
) -> None:
    """Refuse what stands above the matrix and is a faulty row of it rather than a header."""
    for (number, line), good in zip(lines, data, strict=True):
        cells = [cell.strip() for cell in line.split(separator)]
        count = len(cells)
        numbers = sum(_NUMBER.fullmatch(cell) is not None for cell in cells)
        counting = _counts_up(separator.join(["", *cells[1:]]), separator)
        if not good and columns > 3 and 2 * numbers > columns and not counting:
            bad = _bad_cell(number, cells)
            if bad is not None:
                raise bad
        filled = sum(map(bool, cells))
        if good and filled > 3 and count != columns and not _counts_up(line, separator):
            raise Refusal(
                f"the row has {count} values, the other rows have {columns}",
                "expected rows of one length; the file may be cut or edited, export it again",
                number,
            )


def _counts_up(line: str, separator: str) -> bool:
    """Whether a row is nothing but column numbers, with or without a blank first cell."""
    cells = [cell.strip() for cell in line.rstrip(" ").removesuffix(separator).split(separator)]
    if cells and not cells[0]:
        cells = cells[1:]
    if len(cells) < 3 or not all(cell.isdecimal() for cell in cells) or int(cells[0]) > 1:
        return False
    return [int(cell) for cell in cells] == list(range(int(cells[0]), int(cells[0]) + len(cells)))


def _find_decimal(body: list[tuple[int, str]], separator: str) -> str:
    if separator == ",":
        return "."
    with_comma = next((number for number, line in body if "," in line), None)
    if with_comma is None:
        return "."
    with_point = next((number for number, line in body if "." in line), None)
    if with_point is not None:
        raise Refusal(
            f"decimal comma (line {with_comma}) and decimal point (line {with_point}) in one file",
            "expected one decimal sign throughout and no sign between thousands",
            max(with_comma, with_point),
        )
    return ","


def _bad_cell(number: int, cells: list[str]) -> Refusal | None:
    for column, cell in enumerate(cells, 1):
        text = cell.strip()
        if _NUMBER.fullmatch(text) is None and _DEAD_CELL.fullmatch(text) is None:
            return Refusal(
                f"value {column} of the row is {cell.strip()[:30]!r}",
                "expected a number, or an empty cell for a dead pixel",
                number,
            )
    return None


def _numbers(layout: _Layout) -> FloatArray:
    import io

    import pandas as pd

    source = io.StringIO("\n".join(line for _, line in layout.body))
    try:
        table = pd.read_csv(
            source, sep=layout.separator, decimal=layout.decimal, header=None, dtype=np.float64,
            index_col=False, skip_blank_lines=False, na_values=["-", "--", "---"], engine="c",
            skipinitialspace=True, quoting=3,
        )  # fmt: skip
    except (ValueError, OverflowError) as error:
        for number, line in layout.body:
            bad = _bad_cell(number, line.split(layout.separator))
            if bad is not None:
                raise bad from None
        raise Refusal(f"the numbers cannot be read ({error})", _MATRIX) from None
    values = np.ascontiguousarray(table.to_numpy(dtype=np.float64))
    return np.where(np.isfinite(values), values, np.nan)


def _refuse_swallowed_decimals(layout: _Layout, values: FloatArray) -> None:
    """Recognise ``20,5,21,3``: decimal commas in a file separated by commas.

    Whole degrees and tenths then stand in alternating columns: columns two apart are alike,
    neighbours are not.
    """
    if layout.separator != "," or layout.columns < 4 or layout.columns % 2:
        return
    if any("." in line for _, line in layout.body):
        return
    whole, part = values[:, 0::2], values[:, 1::2]
    along = np.abs(np.diff(whole, axis=1))
    across = np.abs(part - whole)
    along, across = along[np.isfinite(along)], across[np.isfinite(across)]
    alternating = (
        along.size and across.size and np.median(across) > 4 * np.median(along) + 2
        and not np.any(part < 0)
    )  # fmt: skip
    leading_zero = any(re.search(r",0\d", line) for _, line in layout.body)
    if alternating or leading_zero:
        number, line = layout.body[0]
        raise Refusal(
            f"decimal commas read as separators: {line.strip()[:24]!r} ... gives "
            f"{layout.columns} values",
            "expected another separator beside a decimal comma; export with semicolon or tab, "
            "or with a decimal point",
            number,
        )


def _without_index_column(values: FloatArray) -> tuple[FloatArray, tuple[Remark, ...]]:
    rows, columns = values.shape
    if rows < 3 or columns < 3:
        return values, ()
    first = values[:, 0]
    counting = np.arange(rows, dtype=np.float64)
    if any(np.array_equal(first, counting + k) or np.array_equal(first, counting[::-1] + k)
           for k in (0, 1)):  # fmt: skip
        return np.ascontiguousarray(values[:, 1:]), (Remark("frame.row_numbers_dropped"),)
    return values, ()


def _refuse_list_of_points(values: FloatArray) -> None:
    rows, columns = values.shape
    if columns != 3 or rows < 64:
        return
    places = values[:, :2]
    if np.all(np.isfinite(places)) and np.all(places == np.round(places)) and places.min() >= 0:
        raise Refusal(f"{rows} rows of x, y and value rather than a matrix", _MATRIX)
