"""The arrays of one frame: stations, strips and draws of its regions, in one NPZ file.

Arrays are named ``<owner>|<quantity>``: ``<region id>|heat_loss`` for draws, of components too,
``<region id>|stations.heat_loss`` for the stations, ``<region id>|strip.temperature`` for the
straightened field; ``run|seed`` and ``run|draws`` say which draws they are. SI, kelvin.
"""

import zipfile
from collections.abc import Iterator
from dataclasses import fields
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cladwatt.errors import ResultsError
from cladwatt.results.assessment import FrameResult, Settings, StationTable

__all__ = ["FrameArrays", "read_frame_arrays", "region_arrays", "write_frame_arrays"]

# a zip entry cannot do without a date; a fixed one keeps files of equal content identical
_FIXED_DATE = (1980, 1, 1, 0, 0, 0)
_STATIONS = "stations."
_STRIP = "strip.temperature"
FrameArrays = dict[str, dict[str, NDArray[Any]]]


def _named_arrays(frame: FrameResult, settings: Settings) -> Iterator[tuple[str, NDArray[Any]]]:
    yield "run|seed", np.asarray(settings.seed, dtype="<i8")
    yield "run|draws", np.asarray(settings.draws, dtype="<i8")
    for region in frame.regions:
        owner = region.region_id
        for field in fields(StationTable):
            kind = "<i8" if field.name == "flags" else "<f8"
            array = np.asarray(getattr(region.stations, field.name), dtype=kind)
            yield f"{owner}|{_STATIONS}{field.name}", array
        if region.strip_temperature is not None:
            yield f"{owner}|{_STRIP}", np.asarray(region.strip_temperature, dtype="<f8")
        for quantity in sorted(region.draws):
            yield f"{owner}|{quantity}", np.asarray(region.draws[quantity], dtype="<f8")
    for one in frame.components:
        for quantity in sorted(one.draws):
            yield f"{one.region_id}|{quantity}", np.asarray(one.draws[quantity], dtype="<f8")


def write_frame_arrays(path: Path, frame: FrameResult, settings: Settings) -> None:
    """Write the arrays of one frame; equal content gives identical bytes.

    Parameters
    ----------
    path : Path
        File to write, ``.npz``.
    frame : FrameResult
        Results of one frame.
    settings : Settings
        Seed and number of draws, kept beside the draws.
    """
    # stored, not deflated: noise does not shrink, and zlib builds differ in their bytes
    with zipfile.ZipFile(path, "w", zipfile.ZIP_STORED) as archive:
        for name, array in _named_arrays(frame, settings):
            entry = zipfile.ZipInfo(f"{name}.npy", _FIXED_DATE)
            entry.create_system = 3
            entry.external_attr = 0o644 << 16
            with archive.open(entry, "w", force_zip64=True) as file:
                np.lib.format.write_array(
                    file, np.ascontiguousarray(array).reshape(array.shape), (1, 0), False
                )


def read_frame_arrays(path: Path) -> FrameArrays:
    """Read the arrays of one frame.

    Parameters
    ----------
    path : Path
        File written by :func:`write_frame_arrays`.

    Returns
    -------
    dict of str to dict of str to array
        Arrays by owner, then by quantity.

    Raises
    ------
    ResultsError
        If the file is missing, damaged or no such file.
    """
    found: FrameArrays = {}
    try:
        with path.open("rb") as file, np.load(file, allow_pickle=False) as archive:
            for name in archive.files:
                owner, _, quantity = name.rpartition("|")
                found.setdefault(owner, {})[quantity] = archive[name]
    except FileNotFoundError as error:
        raise ResultsError(f"{path} is missing; run the assessment again") from error
    except (OSError, ValueError, TypeError, EOFError, KeyError, zipfile.BadZipFile) as error:
        raise ResultsError(f"{path} is damaged ({error}); run the assessment again") from error
    return found


def region_arrays(arrays: dict[str, NDArray[Any]], where: str) -> dict[str, Any]:
    """Return the array fields of a region's result from the arrays of its owner.

    Raises
    ------
    ResultsError
        If a station array is missing or its shape is not that of the others.
    """
    stations = {name.removeprefix(_STATIONS): array for name, array in arrays.items()
                if name.startswith(_STATIONS)}  # fmt: skip
    wanted = {field.name for field in fields(StationTable)}
    if missing := sorted(wanted - stations.keys()):
        raise ResultsError(f"{where}: no array stations.{missing[0]}; run the assessment again")
    if len({array.shape for array in stations.values()}) != 1:
        raise ResultsError(f"{where}: station arrays differ in length; run the assessment again")
    draws = {name: array for name, array in arrays.items()
             if not name.startswith((_STATIONS, "strip."))}  # fmt: skip
    return {
        "stations": StationTable(**{name: stations[name] for name in wanted}),
        "strip_temperature": arrays.get(_STRIP),
        "draws": draws,
    }
