"""All drawn regions of a survey, compared with its frames, its lines and each other."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from cladwatt.errors import FaultyInputError
from cladwatt.materials.load import MaterialTables
from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList, Place, shown
from cladwatt.survey.line_builder import moved_total_emissivity
from cladwatt.survey.model import FrameEntry, Line
from cladwatt.survey.region import Region
from cladwatt.survey.region_format import MAXIMUM_BYTES, parse_regions
from cladwatt.survey.survey_source import Source
from cladwatt.survey.table_reader import nearest

__all__ = ["REGIONS_FOLDER", "read_all_regions", "region_place"]

REGIONS_FOLDER = "regions"
_SUFFIXES = (".geojson", ".json")


def region_place(region: Region, path: str | None = None) -> Place:
    """Return where a region stands, for messages."""
    return Place(
        path or f"{REGIONS_FOLDER}/{region.frame_id}.geojson",
        f"feature {region.feature} (id {shown(region.id)})",
        frame_id=region.frame_id,
        region_id=region.id,
    )


def read_all_regions(
    source: Source,
    frames: Sequence[FrameEntry],
    dropped_frames: Mapping[str, str],
    lines: Mapping[str, Line],
    dropped_lines: Mapping[str, str],
    tables: MaterialTables,
    faults: FaultList,
) -> list[Region]:
    """Return the regions that can be used, in the order of the frames.

    Parameters
    ----------
    source : Source
        The survey folder.
    frames : sequence of FrameEntry
    dropped_frames, dropped_lines : mapping of str to str
        Why a frame or line is left out; its regions go with it.
    lines : mapping of str to Line
    tables : MaterialTables
        Hold the uncertainty of readings that declare none.
    faults : FaultList
    """
    files = _files(source, faults)
    known = {frame.id for frame in frames} | set(dropped_frames)
    found: list[Region] = []
    seen: dict[str, str] = {}
    for frame in frames:
        path = files.pop(frame.id, None)
        regions = _of_frame(frame, path, source, tables, faults)
        for region in regions:
            place = region_place(region, None if path is None else source.name(path))
            checked = _checked(region, place, seen, lines, dropped_lines, faults)
            if checked is not None:
                found.append(checked)
    for name, path in files.items():
        _orphaned(name, path, source, known, dropped_frames, faults)
    return found


def _files(source: Source, faults: FaultList) -> dict[str, Path]:
    folder = source.root / REGIONS_FOLDER
    files: dict[str, Path] = {}
    if not folder.is_dir():
        return files
    for path in sorted(folder.iterdir()):
        if path.suffix.lower() not in _SUFFIXES or path.name.startswith("."):
            continue
        if path.stem in files:
            faults.add(
                Place(source.name(path), frame_id=path.stem), "",
                f"{files[path.stem].name} holds regions of the same frame",
                "expected one regions file per frame",
            )  # fmt: skip
            continue
        files[path.stem] = path
    return files


def _of_frame(
    frame: FrameEntry,
    path: Path | None,
    source: Source,
    tables: MaterialTables,
    faults: FaultList,
) -> list[Region]:
    regions: list[Region] = []
    if path is not None:
        name = source.name(path)
        try:
            data = source.read(path, name, MAXIMUM_BYTES)
        except FaultyInputError as error:
            faults.faults.extend(replace(f, frame_id=frame.id) for f in error.faults)
            return []
        regions = parse_regions(data, name, frame.id, faults, tables.defaults)
    if frame.labels is not None:
        regions += _of_labels(frame, source, faults)
    if path is None and frame.labels is None:
        faults.ask(
            Place(f"{REGIONS_FOLDER}/{frame.id}.geojson", frame_id=frame.id), "",
            f"nothing is drawn on frame {shown(frame.id)}", "draw its pipes to have it assessed",
        )  # fmt: skip
    return regions


def _of_labels(frame: FrameEntry, source: Source, faults: FaultList) -> list[Region]:
    from cladwatt.survey.label_format import read_label_image

    assert frame.labels is not None
    source.digest(frame.labels)
    source.digest(frame.labels.with_suffix(".csv"))
    try:
        regions, found = read_label_image(frame.labels, frame_id=frame.id, root=source.root)
    except FaultyInputError as error:
        faults.faults.extend(replace(f, frame_id=frame.id) for f in error.faults)
        return []
    faults.faults.extend(found)
    return list(regions)


def _orphaned(
    name: str,
    path: Path,
    source: Source,
    known: set[str],
    dropped: Mapping[str, str],
    faults: FaultList,
) -> None:
    place = Place(source.name(path), frame_id=name)
    if name in dropped:
        faults.add(
            place, "", f"its frame {shown(name)} is left out: {dropped[name]}",
            "mend the frame and its regions come back",
        )  # fmt: skip
    else:
        faults.add(
            place, "", f"there is no frame {shown(name)}",
            f"expected the file to be named after a frame's id{nearest(name, known)}",
        )  # fmt: skip


def _checked(
    region: Region,
    place: Place,
    seen: dict[str, str],
    lines: Mapping[str, Line],
    dropped: Mapping[str, str],
    faults: FaultList,
) -> Region | None:
    """Return the region with what its line lends it, or None with the fault noted."""
    folded = region.id.casefold()
    if folded in seen:
        faults.add(
            place, "id", f"the id {shown(region.id)} is used already by {seen[folded]}",
            "expected an id that is unique in the whole survey, letter case aside",
        )  # fmt: skip
        return None
    seen[folded] = f"{place.prefix.split(' (')[0]} of {place.path}"
    if region.tag is None:
        return region
    line = lines.get(region.tag)
    if line is None:
        if region.tag in dropped:
            faults.add(
                place, "tag", f"its line {shown(region.tag)} is left out: {dropped[region.tag]}",
                "mend the line and the region comes back",
            )  # fmt: skip
        else:
            faults.add(
                place, "tag", f"there is no line {shown(region.tag)}",
                f"expected a tag of the line list{nearest(region.tag, [*lines, *dropped])}",
            )  # fmt: skip
        return None
    if region.lagging_thickness is not None and len(line.layers) != 1:
        faults.add(
            place, "lagging_thickness",
            f"lagging_thickness is given, but line {shown(line.tag)} has {len(line.layers)} layers",
            "expected it only where the line has one layer",
        )  # fmt: skip
        return None
    return replace(region, total_emissivity=_total(region, line))


def _total(region: Region, line: Line) -> Quantity | None:
    if region.total_emissivity is not None or region.band_emissivity is None:
        return region.total_emissivity
    return moved_total_emissivity(line.cladding, region.band_emissivity)
