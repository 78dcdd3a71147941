"""Label images: one whole number per region, with a CSV that says which is which."""

import csv
import io
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

import numpy as np

from cladwatt.errors import Fault, RegionError
from cladwatt.survey.csv_format import decode_text
from cladwatt.survey.decoded import MAXIMUM_PIXELS, Refusal
from cladwatt.survey.frame_file import read_frame_bytes
from cladwatt.survey.mask_outline import mask_outlines
from cladwatt.survey.region import REGION_ROLES, Region, RegionRole
from cladwatt.survey.tiff_format import is_tiff, parse_tiff_integers
from cladwatt.types import IntArray

__all__ = ["LabelRow", "parse_label_table", "read_label_image"]

_Parsed = TypeVar("_Parsed")

_PNG = b"\x89PNG\r\n\x1a\n"
_IMAGE = "expected a TIFF or a grey PNG of whole numbers, 0 where there is no region"
_COLUMNS = "expected the columns integer, id, tag and, if wanted, role, kind, note"
_SMALLEST_PIECE = 9
"""Pieces below this many pixels are slips of the brush."""


@dataclass(frozen=True)
class LabelRow:
    """One row of the table beside a label image."""

    integer: int
    id: str
    tag: str | None
    role: RegionRole
    kind: str
    note: str
    line: int


def read_label_image(
    path: Path,
    table: Path | None = None,
    *,
    frame_id: str,
    shape: tuple[int, int] | None = None,
    root: Path | None = None,
) -> tuple[tuple[Region, ...], tuple[Fault, ...]]:
    """Read the regions of a label image.

    A label in several pieces, as where another pipe crosses in front, becomes one region per
    piece, with ``-2``, ``-3`` ... added to the id of the smaller ones.

    Parameters
    ----------
    path : Path
        TIFF or PNG of whole numbers, as large as the frame, its first row the frame's upper edge.
    table : Path, optional
        CSV with the columns integer, id, tag and perhaps role (``pipe`` where missing), kind,
        note; the file of the same stem beside the image where None.
    frame_id : str
    shape : (int, int), optional
        Rows and columns of the frame, checked where given.
    root : Path, optional
        Survey folder; paths in messages are relative to it.

    Returns
    -------
    regions : tuple of Region
        With an outline through the middle of the pixels' outer edges, and holes.
    faults : tuple of Fault
        What was left out.

    Raises
    ------
    RegionError
        If image or table cannot be used at all.
    """
    table = path.with_suffix(".csv") if table is None else table
    image = _read(path, root, frame_id, _parse_labels)
    if shape is not None and image.shape != shape:
        raise _error(path, root, frame_id, Refusal(
            f"the label image is {image.shape[0]} rows x {image.shape[1]} columns",
            f"expected {shape[0]} x {shape[1]}, as the frame",
        ))  # fmt: skip
    rows, refusals = _read(table, root, frame_id, parse_label_table)
    faults = [_fault(table, root, frame_id, refusal) for refusal in refusals]
    regions: list[Region] = []
    present = {int(value): int(n) for value, n in zip(*np.unique(image, return_counts=True),
                                                      strict=True)}  # fmt: skip
    for value in sorted(present.keys() - {0} - {row.integer for row in rows}):
        faults.append(_fault(path, root, frame_id, Refusal(
            f"label {value} ({present[value]} pixels) is in the image but not in {table.name}",
            "expected a row for every label; add it, or paint it 0",
        )))  # fmt: skip
    for row in rows:
        found, problem = _regions_of_label(image, row, frame_id)
        regions += found
        if problem is not None:
            faults.append(_fault(path, root, frame_id, problem, row))
    return tuple(regions), tuple(faults)


def parse_label_table(data: bytes) -> tuple[tuple[LabelRow, ...], tuple[Refusal, ...]]:
    """Read the table beside a label image.

    Returns
    -------
    rows : tuple of LabelRow
    refusals : tuple of Refusal
        One per faulty row, which is left out.

    Raises
    ------
    Refusal
        If the columns are not there.
    """
    text, _ = decode_text(data)
    head = text.lstrip("\r\n").split("\n", 1)[0]
    separator = max(";\t,", key=head.count)
    reader = csv.DictReader(io.StringIO(text), delimiter=separator, skipinitialspace=True)
    columns = [(name or "").strip().lower() for name in reader.fieldnames or ()]
    missing = [name for name in ("integer", "id", "tag") if name not in columns]
    if missing:
        raise Refusal(f"the table has no column {', '.join(missing)}", _COLUMNS, 1)
    reader.fieldnames = columns
    rows: list[LabelRow] = []
    refusals: list[Refusal] = []
    for record in reader:
        cells = {name: (record.get(name) or "").strip() for name in columns}
        if not any(cells.values()):
            continue
        try:
            rows.append(_label_row(cells, reader.line_num, rows))
        except Refusal as refusal:
            refusals.append(refusal)
    return tuple(rows), tuple(refusals)


def _label_row(cells: dict[str, str], line: int, rows: list[LabelRow]) -> LabelRow:
    text = cells["integer"]
    if not (text.isascii() and text.isdecimal() and len(text) < 10 and int(text) > 0):
        raise Refusal(f"integer is {text!r}", "expected a whole number above 0", line)
    integer, name = int(text), cells["id"]
    if not name:
        raise Refusal(f"label {integer} has no id", "expected an id, unique in the survey", line)
    for row in rows:
        if row.integer == integer:
            raise Refusal(f"label {integer} stands on line {row.line} too",
                          "expected each label once", line)  # fmt: skip
        if row.id == name:
            raise Refusal(f"id '{name}' stands on line {row.line} too",
                          "expected each id once", line)  # fmt: skip
    wanted = cells.get("role") or "pipe"
    role = next((role for role in REGION_ROLES if role == wanted), None)
    if role is None or role == "known_length":
        accepted = ", ".join(role for role in REGION_ROLES if role != "known_length")
        raise Refusal(f"role of '{name}' is {wanted!r}", f"expected one of {accepted}", line)
    if role == "pipe" and not cells["tag"]:
        raise Refusal(f"pipe region '{name}' has no tag", "expected the tag of its line", line)
    return LabelRow(integer, name, cells["tag"] or None, role,
                    cells.get("kind", ""), cells.get("note", ""), line)  # fmt: skip


def _regions_of_label(
    image: IntArray, row: LabelRow, frame_id: str
) -> tuple[list[Region], Refusal | None]:
    pieces = mask_outlines(image == row.integer)
    if not pieces:
        return [], Refusal(
            f"label {row.integer} ('{row.id}') is in the table but nowhere in the image",
            "expected its pixels; paint them or remove the row",
        )
    whole = [piece for piece in pieces if piece[2] >= _SMALLEST_PIECE]
    regions = [
        Region(
            id=row.id if number == 1 else f"{row.id}-{number}",
            frame_id=frame_id,
            role=row.role,
            tag=row.tag,
            outline=outline,
            holes=holes,
            kind=row.kind,
            note=row.note,
            feature=row.integer,
        )
        for number, (outline, holes, _) in enumerate(whole, 1)
    ]
    specks = [piece for piece in pieces if piece[2] < _SMALLEST_PIECE]
    if not specks:
        return regions, None
    x, y = (sum(values) / len(values) for values in zip(*specks[0][0], strict=True))
    return regions, Refusal(
        f"label {row.integer} ('{row.id}') has {len(specks)} piece(s) under {_SMALLEST_PIECE} "
        f"pixels, the first near x = {x:.0f}, y = {y:.0f}; left out",
        "expected larger pieces; paint stray pixels 0",
    )


def _parse_labels(data: bytes) -> IntArray:
    if is_tiff(data):
        return parse_tiff_integers(data).astype(np.int64)
    if not data.startswith(_PNG):
        raise Refusal("the file is neither TIFF nor PNG", _IMAGE)
    columns, rows = (int.from_bytes(data[i : i + 4], "big") for i in (16, 20))
    if not 0 < rows * columns <= MAXIMUM_PIXELS:
        raise Refusal(f"the PNG declares {columns} x {rows} pixels",
                      f"expected 1 to {MAXIMUM_PIXELS} pixels")  # fmt: skip
    if len(data) < 26 or data[25] != 0 or data[24] not in (8, 16):
        raise Refusal("the PNG is a colour picture or has few bits per pixel", _IMAGE)
    import cv2

    image = cv2.imdecode(np.frombuffer(data, dtype=np.uint8), cv2.IMREAD_UNCHANGED)
    if image is None or image.shape != (rows, columns):
        raise Refusal("the PNG is damaged", _IMAGE)
    return image.astype(np.int64)


def _read(
    path: Path, root: Path | None, frame_id: str, parse: Callable[[bytes], _Parsed]
) -> _Parsed:
    try:
        return parse(read_frame_bytes(path))
    except Refusal as refusal:
        raise _error(path, root, frame_id, refusal) from refusal


def _error(path: Path, root: Path | None, frame_id: str, refusal: Refusal) -> RegionError:
    return RegionError(_fault(path, root, frame_id, refusal))


def _fault(
    path: Path, root: Path | None, frame_id: str, refusal: Refusal, row: LabelRow | None = None
) -> Fault:
    shown = path.name
    if root is not None and path.resolve().is_relative_to(root.resolve()):
        shown = path.resolve().relative_to(root.resolve()).as_posix()
    return Fault(
        shown,
        f"labels of frame '{frame_id}'",
        refusal.found,
        refusal.expected,
        line=refusal.line,
        frame_id=frame_id,
        region_id=None if row is None else row.id,
        tag=None,
    )
