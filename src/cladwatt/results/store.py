"""The results folder: refused where it holds anything else, written whole or not at all."""

import hashlib
import os
import shutil
from collections.abc import Callable, Iterator
from pathlib import Path

from cladwatt.errors import ResultsError
from cladwatt.results.assessment import Assessment
from cladwatt.results.csv_files import csv_line, write_tables
from cladwatt.results.draws_file import write_frame_arrays
from cladwatt.results.file_names import file_stems
from cladwatt.results.folder_swap import (
    exclusive,
    make_new,
    plain_reason,
    remove,
    restore_if_missing,
    settle,
    swap,
    sync_tree,
)
from cladwatt.results.geojson_file import write_stretch_files
from cladwatt.results.json_file import (
    is_assessment_file,
    read_assessment_file,
    write_assessment_file,
)

__all__ = ["check_target", "read_results", "write_results"]

_MARK = "assessment.json"
_LIST = "files.csv"
# left by file browsers in any folder they show
_LITTER = frozenset({".DS_Store", "Thumbs.db", "desktop.ini", ".directory"})


def write_results(
    assessment: Assessment,
    folder: str | Path,
    *,
    survey_root: str | Path | None = None,
    extra: Callable[[Path], None] | None = None,
) -> Path:
    """Write a results folder, all of it or nothing.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    folder : str or Path
        Folder to write; may be missing, empty, or hold earlier results, which stay whole until
        the new ones are complete.
    survey_root : str or Path, optional
        Survey folder, which must not be the results folder itself.
    extra : callable, optional
        Called with the folder being written, to add further files (reports, pictures) before it
        is put in place. What it raises is passed on, and the earlier results stay.

    Returns
    -------
    Path
        The folder, absolute.

    Raises
    ------
    ResultsError
        If the folder holds anything else, another run is writing there, or the system refuses;
        nothing is then changed.

    Notes
    -----
    Equal assessments and extra files give identical bytes; no file carries a date.
    """
    folder = Path(folder)
    survey_root = None if survey_root is None else Path(survey_root)
    try:
        target = folder.resolve()
        check_target(folder, survey_root)
        target.parent.mkdir(parents=True, exist_ok=True)
        with exclusive(target):
            settle(target)
            _write_and_swap(assessment, target, survey_root, extra)
    except OSError as error:
        raise ResultsError(
            f"{folder} cannot be written: {plain_reason(error)}. Nothing was changed; free the "
            "place or choose another folder, and run again"
        ) from error
    return target


def _write_and_swap(
    assessment: Assessment,
    target: Path,
    survey_root: Path | None,
    extra: Callable[[Path], None] | None,
) -> None:
    new = make_new(target)
    try:
        _write_all(assessment, new)
        if extra is not None:
            extra(new)
        _write_list(new)
        sync_tree(new)
        if target.exists():
            shutil.copymode(target, new)
        # somebody may have put a file there while the run went on
        check_target(target, survey_root)
        swap(new, target)
    finally:
        remove(new)


def _write_all(assessment: Assessment, folder: Path) -> None:
    stems = file_stems(frame.frame_id for frame in assessment.frames)
    draws = folder / "draws"
    draws.mkdir()
    for frame in assessment.frames:
        path = draws / f"{stems[frame.frame_id]}.npz"
        write_frame_arrays(path, frame, assessment.settings)
    write_stretch_files(assessment, folder / "stretches", stems)
    write_tables(assessment, folder)
    write_assessment_file(assessment, folder / _MARK, stems)


def _files(folder: Path) -> Iterator[tuple[str, Path]]:
    """Yield (name with slashes, path) of everything in a tree that is no plain folder."""
    for root, folders, names in os.walk(folder):
        folders.sort()
        links = [name for name in folders if (Path(root) / name).is_symlink()]
        for name in sorted([*names, *links]):
            path = Path(root) / name
            yield path.relative_to(folder).as_posix(), path


def _sha256(path: Path) -> str:
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def _write_list(folder: Path) -> None:
    rows = [(name, str(path.stat().st_size), _sha256(path)) for name, path in _files(folder)]
    with (folder / _LIST).open("w", encoding="utf-8", newline="") as file:
        file.write(csv_line(("file", "bytes", "sha256")))
        file.writelines(csv_line(row) for row in rows)


def _listed(folder: Path) -> dict[str, str]:
    """Return the SHA-256 by name of the files written there; empty where there is no list."""
    import csv

    try:
        with (folder / _LIST).open(encoding="utf-8", newline="") as file:
            return {row["file"]: row["sha256"] for row in csv.DictReader(file)}
    except (OSError, ValueError, KeyError, csv.Error):
        return {}


def check_target(folder: Path, survey_root: Path | None = None) -> None:
    """Refuse a folder that results may not be written to; changes nothing.

    Parameters
    ----------
    folder : Path
        Results folder asked for.
    survey_root : Path, optional
        Survey folder.

    Raises
    ------
    ResultsError
        If it is a file, the survey folder or above it, the root of a file system, not writable,
        or holds files other than those of earlier results, or such files changed since.
    """
    target = folder.resolve()
    if survey_root is not None and survey_root.resolve().is_relative_to(target):
        raise ResultsError(
            f"{folder} is the survey folder or holds it; results need a folder of their own, "
            f"for example {survey_root / 'results'}"
        )
    if target.exists() and not target.is_dir():
        raise ResultsError(f"{folder} is a file; expected a folder for the results")
    if target.is_mount():
        raise ResultsError(
            f"{folder} is the root of a disk or mount; results are put in place by renaming, "
            f"choose a folder in it, for example {folder / 'results'}"
        )
    _check_writable(folder, target)
    if target.is_dir():
        _check_content(folder, target)


def _check_writable(folder: Path, target: Path) -> None:
    nearest = next(parent for parent in target.parents if parent.exists())
    if not nearest.is_dir():
        raise ResultsError(f"{folder} cannot be made: {nearest} is a file, not a folder")
    if not os.access(nearest, os.W_OK | os.X_OK):
        raise ResultsError(
            f"{folder} cannot be written: no permission to write in {nearest}; choose another "
            "folder"
        )


def _check_content(folder: Path, target: Path) -> None:
    present = {name: path for name, path in _files(target) if path.name not in _LITTER}
    if not present:
        return
    listed = _listed(target) if is_assessment_file(target / _MARK) else {}
    foreign = sorted(present.keys() - listed.keys() - ({_LIST} if listed else set()))
    if foreign:
        raise ResultsError(
            f"{folder} holds files that are no results of cladwatt ({_some(foreign)}); move them "
            "away or choose another folder"
        )
    changed = [name for name, path in present.items()
               if name != _LIST and _sha256(path) != listed[name]]  # fmt: skip
    if changed:
        raise ResultsError(
            f"{folder} holds results changed since they were written ({_some(changed)}); copy "
            "them elsewhere and remove the folder, or choose another one"
        )


def _some(names: list[str]) -> str:
    more = f" and {len(names) - 3} more" if len(names) > 3 else ""
    return ", ".join(names[:3]) + more


def read_results(folder: str | Path) -> Assessment:
    """Read a results folder back.

    Parameters
    ----------
    folder : str or Path
        Folder written by :func:`write_results`.

    Returns
    -------
    Assessment
        Equal to the one written, with its stations, strips and draws; durations are not kept.

    Raises
    ------
    ResultsError
        If it is no results folder, incomplete, damaged or of another version.
    """
    folder = Path(folder)
    target = folder.resolve()
    try:
        restore_if_missing(target)
    except OSError as error:
        raise ResultsError(f"{folder} cannot be read: {plain_reason(error)}") from error
    if not target.is_dir():
        raise ResultsError(f"{folder} is no folder; expected results written by cladwatt")
    return read_assessment_file(target / _MARK)
