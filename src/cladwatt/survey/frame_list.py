"""The frame list: ``[[frame]]`` tables, rows of a CSV, or simply the files in ``frames/``."""

import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from datetime import tzinfo
from pathlib import Path

from cladwatt.errors import SurveyFileError
from cladwatt.materials.load import MaterialTables
from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList, Place, shown
from cladwatt.survey.frame_builder import (
    build_conditions,
    build_format,
    build_recording,
    zone_of,
    zoned,
)
from cladwatt.survey.keys import CAMERA_PREFIX, UNKNOWN_WORD, section
from cladwatt.survey.line_list import Entry, entries_of_csv, repeated
from cladwatt.survey.model import FrameEntry
from cladwatt.survey.sun_builder import with_sun
from cladwatt.survey.surroundings_builder import read_pieces, without_rivals
from cladwatt.survey.survey_source import Source
from cladwatt.survey.table_reader import Table, read_table
from cladwatt.survey.values import Problem

__all__ = ["FRAME_SUFFIXES", "Frames", "is_usable_id", "read_frames"]

FRAME_SUFFIXES = (".csv", ".txt", ".tsv", ".tif", ".tiff")
_FORBIDDEN = re.compile(r'[\\/:*?"<>|]|^\.|[. ]$|^(?i:con|prn|aux|nul|com\d|lpt\d)$')
_LONGEST_ID = 120


@dataclass(frozen=True)
class Frames:
    """Usable frames, why others were dropped, and the survey-wide air temperature."""

    entries: tuple[FrameEntry, ...]
    dropped: Mapping[str, str]
    wide_air: Quantity | None


def is_usable_id(text: str) -> bool:
    """Whether a frame id can name a file on every system."""
    return bool(text) and len(text) <= _LONGEST_ID and _FORBIDDEN.search(text) is None


@dataclass(frozen=True)
class _Read:
    """One frame's table, its id, and whether nothing was wrong with it."""

    table: Table
    id: str
    sound: bool
    extra: dict[str, str]


@dataclass
class _Reader:
    wide: Mapping[str, Table]
    source: Source
    tables: MaterialTables
    faults: FaultList
    zone: tzinfo | None
    site: Table


def read_frames(
    entries: list[Entry],
    head: Table,
    site: Table,
    wide: Mapping[str, Table],
    source: Source,
    tables: MaterialTables,
    faults: FaultList,
    *,
    needed: bool = True,
) -> Frames:
    """Return every frame that can be used.

    Parameters
    ----------
    entries : list of Entry
        The ``[[frame]]`` tables.
    head, site : Table
        ``[survey]``, which may name a list, and ``[site]``, which may name a zone.
    wide : mapping of str to Table
        ``recording``, ``conditions`` and ``format`` for the whole survey.
    source : Source
    tables : MaterialTables
    faults : FaultList
    needed : bool
        Whether it is a fault that there are none.

    Returns
    -------
    Frames
    """
    reader = _Reader(wide, source, tables, faults, zone_of(site, faults), site)
    entries = entries + _listed(head, source, faults)
    if not entries and not head.text("frame_list"):
        entries = _found_files(source, faults, needed=needed)
    read = [_read_entry(entry, reader) for entry in entries]
    _ask_for_missing([one.table for one in read], wide, faults)
    twice = repeated(one.id for one in read)
    usable: list[FrameEntry] = []
    dropped: dict[str, str] = {}
    for one in read:
        if one.id.casefold() in twice:
            _id_twice(one, read, faults)
            dropped[one.id] = "its id is used by more than one frame"
            continue
        frame = _build(one, reader)
        if frame is None or not one.sound:
            dropped[one.id] = "the frame list is at fault there"
        else:
            usable.append(frame)
    air = wide["conditions"].quantity("air_temperature")
    return Frames(tuple(usable), dropped, air)


def _listed(head: Table, source: Source, faults: FaultList) -> list[Entry]:
    data, path = source.listed(head, "frame_list", faults)
    if data is None:
        return []
    try:
        return entries_of_csv(data, path, section("frame"), faults)
    except SurveyFileError as error:
        faults.faults.extend(error.faults)
        return []


def _found_files(source: Source, faults: FaultList, *, needed: bool) -> list[Entry]:
    """Take every frame file in ``frames/`` where the survey lists none."""
    folder = source.root / "frames"
    names = []
    if folder.is_dir():
        names = sorted(
            path.name
            for path in folder.iterdir()
            if path.suffix.lower() in FRAME_SUFFIXES and not path.name.startswith((".", "~"))
        )
    if not names and needed:
        faults.add(
            Place("survey.toml"), "", "the survey lists no frames and frames/ holds none",
            "expected [[frame]] tables, frame_list in [survey], or files in frames/",
        )  # fmt: skip
    return [
        Entry({"file": f"frames/{name}"}, Place("survey.toml", f"frame {name}"), {})
        for name in names
    ]


def _read_entry(entry: Entry, reader: _Reader) -> _Read:
    raw = entry.raw if isinstance(entry.raw, dict) else {}
    identity = _identity(raw) or entry.place.prefix
    place = replace(entry.place, frame_id=identity)
    if entry.place.prefix.endswith("]") or " in row " in entry.place.prefix:
        place = replace(place, prefix=f"{entry.place.prefix} ({identity[:60]})")
    before = reader.faults.errors
    for name in ("recording", "conditions", "format"):
        if isinstance(raw.get(name), dict):
            prefix = f" with {CAMERA_PREFIX} before them" if name == "recording" else ""
            reader.faults.add(
                place, name, f"a table {name} stands in a frame",
                f"write its keys directly in the frame{prefix}",
            )  # fmt: skip
    raw = {k: v for k, v in raw.items() if not (isinstance(v, dict) and k in reader.wide)}
    if not isinstance(entry.raw, dict):
        raw = entry.raw  # type: ignore[assignment]
    table = read_table(
        section("frame"),
        raw,
        place,
        reader.faults,
        ask=False,
        partial=True,
        defaults=reader.tables.defaults,
    )
    table = read_pieces(table, reader.faults)
    if not is_usable_id(identity):
        reader.faults.add(
            place, "id", f"the frame's id is {shown(identity)}",
            'expected up to 120 letters that may name a file: none of \\ / : * ? " < > |, no dot'
            " first or last",
        )  # fmt: skip
    return _Read(table, identity, reader.faults.errors == before, entry.extra)


def _identity(raw: Mapping[str, object]) -> str:
    given = raw.get("id")
    if isinstance(given, str) and given.strip():
        return given.strip()
    file = raw.get("file")
    return Path(file.replace("\\", "/")).stem if isinstance(file, str) else ""


def _ask_for_missing(frames: list[Table], wide: Mapping[str, Table], faults: FaultList) -> None:
    """Ask once for what no frame declares, else frame by frame."""
    for name, prefix in (("recording", CAMERA_PREFIX), ("conditions", "")):
        table = wide[name]
        for key in table.section.keys:
            if not key.ask or table.has(key.name):
                continue
            lacking = [frame for frame in frames if not frame.has(prefix + key.name)]
            whole = len(lacking) == len(frames)
            for place in [table.place] if whole else [frame.place for frame in lacking]:
                written = key.usual if whole else prefix + key.usual
                expected = f'declare it or write "{UNKNOWN_WORD}"'
                found = f"{written} is missing and nothing is assumed in its place"
                if name == "recording":
                    found = f"{written} is missing and taken as 1, as for raw radiance"
                    expected = "declare what the camera was set to"
                faults.ask(place, written, found, expected)


def _id_twice(one: _Read, read: list[_Read], faults: FaultList) -> None:
    other = next(o for o in read if o is not one and o.id.casefold() == one.id.casefold())
    line = other.table.place.line_of("id")
    at = other.table.place.path if line is None else f"{other.table.place.path}:{line}"
    faults.add(
        one.table.place, "id",
        f"the frame id {shown(one.id)} is used more than once (also {at})",
        "expected it once; give one of the frames another id",
    )  # fmt: skip


def _build(one: _Read, reader: _Reader) -> FrameEntry | None:
    table, faults = one.table, reader.faults
    before = faults.errors
    path = _file(table, "file", reader, ("frames",)) if table.text("file") else None
    recording = build_recording(
        table.over(reader.wide["recording"], prefix=CAMERA_PREFIX), faults, prefix=CAMERA_PREFIX
    )
    merged = table.over(without_rivals(table, reader.wide["conditions"]))
    _check_lone_u(merged, reader)
    time = zoned(table, reader.zone, faults)
    conditions = build_conditions(merged, reader.tables, faults)
    conditions = with_sun(conditions, merged, time, reader.site, faults)
    frame_format = build_format(table.over(reader.wide["format"]), faults)
    frame = FrameEntry(
        id=one.id,
        path=path or Path(),
        format=frame_format,
        recording=recording,
        conditions=conditions,
        time=time,
        area=table.text("area"),
        note=table.text("note"),
        photo=_file(table, "photo", reader, ("photos", "frames")) if table.has("photo") else None,
        labels=_file(table, "labels", reader, ("labels",)) if table.has("labels") else None,
        extra=one.extra,
    )
    return frame if path is not None and faults.errors == before else None


def _check_lone_u(merged: Table, reader: _Reader) -> None:
    for name, written in merged.written.items():
        if written.value is None:
            reader.faults.add(
                merged.place, f"u_{merged.key(name).usual}",
                f"u_{name} stands without {name}",
                f"expected {merged.key(name).usual} in the frame or in [conditions]",
            )  # fmt: skip


def _file(table: Table, name: str, reader: _Reader, among: tuple[str, ...]) -> Path | None:
    try:
        return reader.source.locate(table.text(name), among=among)
    except Problem as problem:
        if name == "photo":
            reader.faults.ask(table.place, name, problem.found, problem.expected)
        else:
            reader.faults.add(table.place, name, problem.found, problem.expected)
        return None
