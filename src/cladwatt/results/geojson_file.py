"""The damaged stretches of each frame as GeoJSON in pixel coordinates."""

import json
import math
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from cladwatt.results.assessment import Assessment, FrameResult, Stretch
from cladwatt.results.columns import STRETCH_COLUMNS

__all__ = ["stretch_collection", "write_stretch_files"]

_COORDINATES = "pixels of the frame: x right, y down, (0, 0) is the centre of the first pixel"


def stretch_collection(frame: FrameResult) -> dict[str, Any]:
    """Return the FeatureCollection of one frame's stretches.

    Parameters
    ----------
    frame : FrameResult
        Results of one frame.

    Returns
    -------
    dict
        Geometry types of RFC 7946 in pixel coordinates (its longitude/latitude rule does not
        apply); properties are the columns of ``stretches.csv`` in full precision, null where
        unknown. A stretch whose outline is no polygon has a null geometry.

    References
    ----------
    .. [1] RFC 7946, *The GeoJSON Format*.
    """
    return {
        "type": "FeatureCollection",
        "frame": frame.frame_id,
        "coordinates": _COORDINATES,
        "features": [
            {
                "type": "Feature",
                "id": stretch.id,
                "properties": {c.name: c.value((region, stretch)) for c in STRETCH_COLUMNS},
                "geometry": _geometry(stretch),
            }
            for region in frame.regions
            for stretch in region.stretches
        ],
    }


def _geometry(stretch: Stretch) -> dict[str, Any] | None:
    ring = [[float(x), float(y)] for x, y in stretch.outline]
    if len(ring) < 3 or not all(math.isfinite(value) for point in ring for value in point):
        return None
    return {"type": "Polygon", "coordinates": [[*ring, ring[0]]]}


def write_stretch_files(assessment: Assessment, folder: Path, stems: Mapping[str, str]) -> None:
    """Write ``<stem>.geojson`` for every frame, also where nothing was found."""
    folder.mkdir()
    for frame in assessment.frames:
        text = json.dumps(
            stretch_collection(frame), ensure_ascii=False, allow_nan=False, separators=(",", ": ")
        )
        path = folder / f"{stems[frame.frame_id]}.geojson"
        # a lone surrogate becomes \udcxx, which is how JSON spells it
        path.write_text(text + "\n", encoding="utf-8", errors="backslashreplace", newline="\n")
