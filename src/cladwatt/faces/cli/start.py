"""``cladwatt start``: a commented survey folder from a handful of frames."""

import argparse
import glob
import os
import shutil
import tempfile
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from cladwatt.errors import FaultyInputError, InputError
from cladwatt.faces.cli.common import CommandGroup, add_command
from cladwatt.faces.cli.messages import ExitCode, Messages

if TYPE_CHECKING:
    from cladwatt.survey.sniff import FrameGuess

__all__ = ["add"]

_DESCRIPTION = """\
Begin a survey from a handful of frames: copy them into a new folder, write a survey.toml that
explains every key, and report the range and the likely unit of each frame. It asks nothing and
decides nothing: a unit that only seems likely is written as a comment for you to confirm.
"""
_END = """\
writes, whole or not at all:
  DIR/survey.toml         every key with its meaning, unit and default, commented out
  DIR/frames/             copies of the frames
  DIR/regions/README.txt  how pipe regions are drawn; the folder is otherwise empty

FRAME may be a file, a folder (every .csv, .txt, .tif and .tiff in it) or a pattern such as *.csv.

exit codes:
  0 done; 1 could not; 2 wrong usage; 3 done, but a file that is no frame was left out;
  130 interrupted

example:
  cladwatt start recordings/*.tiff --into north_hall
"""
_SUFFIXES = frozenset({".csv", ".txt", ".tsv", ".tif", ".tiff"})
_SIGN = {"C": "°C", "K": "K", "F": "°F"}
_REGIONS_README = """\
Pipe regions belong here, one file per frame: <frame id>.geojson, a FeatureCollection.

Coordinates are [x, y] in pixels: x runs right, y runs down, [0, 0] is the centre of the first
pixel. A pipe is a LineString along its middle with width_px, its full width across in pixels, or
a Polygon around it. For example, on frame f01:

{"type": "FeatureCollection", "features": [
  {"type": "Feature",
   "properties": {"id": "north-1", "role": "pipe", "tag": "HS-101", "width_px": 42},
   "geometry": {"type": "LineString", "coordinates": [[30, 200], [600, 215]]}}
]}

id     stable, and used once in the whole survey
role   pipe, leave_out, component, foil, tape, contact, background or known_length
tag    the line of the line list that is seen
kind   of a component: flange, valve or hanger; it is estimated on its own, as bare
       unless it says "lagged": true

`cladwatt schema regions` prints every property; `cladwatt check` names what is still wrong.
"""


@dataclass(frozen=True)
class _Found:
    """One file, what it looks like, and the name it gets in the survey."""

    path: Path
    guess: "FrameGuess"
    name: str = ""


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "start", _run, summary="begin a survey folder from recorded frames",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("frames", metavar="FRAME", nargs="+", help="frame file, folder or pattern")
    parser.add_argument(
        "--into", metavar="DIR", type=Path, required=True, help="new or empty survey folder"
    )


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    target: Path = options.into
    _check_target(target)
    usable, left_out = _sniffed(_paths(options.frames))
    for path, reason in left_out:
        messages.error(f"{path}: left out, {reason}")
    if not usable:
        raise InputError("not one of the files is a frame; nothing was written")
    found = _named(usable)
    _write(target, found)
    messages.lines(_report(found))
    messages.note(_next_steps(target))
    return ExitCode.LEFT_OUT if left_out else ExitCode.DONE


def _check_target(target: Path) -> None:
    if target.exists() and (not target.is_dir() or any(target.iterdir())):
        what = "holds files already" if target.is_dir() else "is a file"
        raise InputError(f"{target} {what}; expected a new or an empty folder")


def _paths(given: Iterable[str]) -> list[Path]:
    """Return the files meant, each once; some shells hand patterns on as they are."""
    paths: list[Path] = []
    for text in given:
        path = Path(text)
        if path.is_dir():
            paths += sorted(p for p in path.iterdir() if p.suffix.lower() in _SUFFIXES)
        elif not path.exists() and glob.has_magic(text):
            # pathlib's own glob refuses absolute patterns
            paths += sorted(Path(name) for name in glob.glob(text))  # noqa: PTH207
        else:
            paths.append(path)
    once = {path.resolve(): path for path in paths}
    if not once:
        raise InputError(f"{', '.join(map(str, given))}: no frame is there; expected CSV or TIFF")
    return list(once.values())


def _sniffed(paths: Sequence[Path]) -> tuple[list[_Found], list[tuple[Path, str]]]:
    """Divide the files into frames and those that are none, with the reason."""
    from cladwatt.survey.sniff import sniff_frame

    usable, left_out = [], []
    for path in paths:
        try:
            guess = sniff_frame(path)
        except FaultyInputError as error:
            fault = error.faults[0]
            left_out.append((path, f"{fault.found}; {fault.expected}"))
            continue
        if guess.shape is None:
            left_out.append((path, guess.note))
        else:
            usable.append(_Found(path, guess))
    return usable, left_out


def _named(found: Sequence[_Found]) -> list[_Found]:
    """Give every frame a file name whose stem is unique, whatever the case."""
    taken: set[str] = set()
    named = []
    for one in found:
        stem, number = one.path.stem, 1
        while stem.casefold() in taken:
            number += 1
            stem = f"{one.path.stem}-{number}"
        taken.add(stem.casefold())
        named.append(_Found(one.path, one.guess, f"{stem}{one.path.suffix}"))
    return named


def _write(target: Path, found: Sequence[_Found]) -> None:
    """Write the folder beside its place, then put it there in one step."""
    place = target.absolute()
    place.parent.mkdir(parents=True, exist_ok=True)
    work = Path(tempfile.mkdtemp(prefix=f".{place.name[:40]}.", dir=place.parent))
    try:
        _fill(work, place.name, found)
        work.chmod(0o777 & ~_umask())
        if place.exists():
            place.rmdir()
        work.rename(place)
    finally:
        shutil.rmtree(work, ignore_errors=True)


def _umask() -> int:
    mask = os.umask(0o022)
    os.umask(mask)
    return mask


def _fill(folder: Path, name: str, found: Sequence[_Found]) -> None:
    from cladwatt.survey.starter import StarterFrame, starter_survey_toml

    (folder / "frames").mkdir()
    (folder / "regions").mkdir()
    (folder / "regions" / "README.txt").write_text(_REGIONS_README, encoding="utf-8", newline="\n")
    frames = []
    for one in found:
        shutil.copyfile(one.path, folder / "frames" / one.name)
        scale, offset = one.guess.likely_scale_offset or (None, None)
        frames.append(
            StarterFrame(
                f"frames/{one.name}",
                unit=one.guess.likely_unit or "",
                unit_is_sure=one.guess.unit_in_file is not None,
                scale=scale,
                offset=offset,
                note="\n".join([_looks(one.guess), *one.guess.note.split("; ")]).strip(),
            )
        )
    text = starter_survey_toml(frames, name=name)
    (folder / "survey.toml").write_text(text, encoding="utf-8", newline="\n")


def _looks(guess: "FrameGuess") -> str:
    rows, columns = guess.shape or (0, 0)
    return f"{columns} x {rows} pixels, {_range(guess)}, {guess.format}"


def _range(guess: "FrameGuess") -> str:
    if guess.minimum is None or guess.maximum is None:
        return "no usable value"
    return f"{guess.minimum:g} to {guess.maximum:g}"


def _unit(guess: "FrameGuess") -> str:
    if guess.likely_unit is None:
        return "unclear"
    sign = _SIGN[guess.likely_unit]
    if guess.unit_in_file is not None:
        return f"{sign}, by the file"
    scale = guess.likely_scale_offset
    return f"likely {sign}" + (f" x {scale[0]:g}" if scale is not None and scale[0] != 1 else "")


def _report(found: Sequence[_Found]) -> list[str]:
    """Return an aligned table: frame, size, range, unit, format, and what is doubtful."""
    rows = [("frame", "pixels", "numbers", "unit", "format")]
    for one in found:
        height, width = one.guess.shape or (0, 0)
        size = f"{width} x {height}"
        rows.append((one.name, size, _range(one.guess), _unit(one.guess), one.guess.format))
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    lines = []
    for number, row in enumerate(rows):
        cells = (cell.ljust(width) for cell, width in zip(row, widths, strict=True))
        lines.append("  ".join(cells).rstrip())
        if number and found[number - 1].guess.note:
            lines.append(f"    {found[number - 1].guess.note}")
    return lines


def _next_steps(target: Path) -> str:
    return (
        f"\n{target} is begun. Next:\n"
        f"  1. in {target / 'survey.toml'} confirm the unit of each frame, and write what the\n"
        "     camera was set to, the conditions and the lines\n"
        f"  2. draw the pipe regions into {target / 'regions'}; README.txt there tells how\n"
        f"  3. `cladwatt check {target}` lists what is still missing"
    )
