"""Check a whole survey: every fault and question at once, frames and regions included."""

import math
from pathlib import Path

from cladwatt.errors import Fault, FaultyInputError
from cladwatt.survey.fault_list import FaultList
from cladwatt.survey.frame import frame_questions, read_frame
from cladwatt.survey.model import FrameEntry
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey
from cladwatt.survey.survey_file import load_survey
from cladwatt.survey.survey_regions import region_place

__all__ = ["check_labels_against_frame", "check_region_against_frame", "check_survey"]

_EDGE_TOLERANCE = 2.0
"""A hand drawing may overshoot the frame's edge so far. [px]"""
_MUST_LIE_INSIDE = ("pipe", "known_length", "foil", "tape", "contact")
_SMALLEST_AREA = 9.0
"""Three by three pixels: one measuring spot."""
_FARTHEST = 30_000.0
"""Coordinates are clipped here before drawing; the renderer counts in 32-bit integers. [px]"""


def check_survey(folder: str | Path) -> tuple[Fault, ...]:
    """Return every fault and question of a survey, without stopping at the first.

    Parameters
    ----------
    folder : str or Path

    Returns
    -------
    tuple of Fault
        Survey file, lists and regions first, then what reading the frames showed; empty where
        all is well. Nothing is raised for a faulty survey.
    """
    survey, faults = load_survey(folder)
    wrong = {(f.path, f.where) for f in faults.faults if f.severity == "error"}
    # a key that is there but faulty is not missing as well
    found = [f for f in faults.faults if f.severity == "error" or (f.path, f.where) not in wrong]
    if survey is not None:
        found.extend(_frame_faults(survey))
    return tuple(found)


def _frame_faults(survey: Survey) -> list[Fault]:
    found: list[Fault] = []
    for entry in survey.frames:
        try:
            frame = read_frame(entry, root=survey.root)
        except FaultyInputError as error:
            found.extend(error.faults)
            continue
        shape = (frame.temperature.shape[0], frame.temperature.shape[1])
        found.extend(check_labels_against_frame(entry, shape, root=survey.root))
        found.extend(frame_questions(frame, entry, root=survey.root))
        for region in survey.regions_of(entry.id):
            fault = check_region_against_frame(region, shape)
            if fault is not None:
                found.append(fault)
    return found


def check_labels_against_frame(
    entry: FrameEntry, shape: tuple[int, int], *, root: Path
) -> tuple[Fault, ...]:
    """Return why a frame's label image does not fit it; empty where it does or there is none.

    Parameters
    ----------
    entry : FrameEntry
    shape : (int, int)
        Rows and columns of the frame.
    root : Path
        Survey folder; paths in messages are relative to it.
    """
    if entry.labels is None:
        return ()
    from cladwatt.survey.label_format import read_label_image

    try:
        read_label_image(entry.labels, frame_id=entry.id, root=root)
    except FaultyInputError:
        return ()  # said when the survey was read
    try:
        read_label_image(entry.labels, frame_id=entry.id, shape=shape, root=root)
    except FaultyInputError as error:
        return error.faults
    return ()


def check_region_against_frame(region: Region, shape: tuple[int, int]) -> Fault | None:
    """Return why a region cannot be used on a frame of this shape, or None.

    Parameters
    ----------
    region : Region
    shape : (int, int)
        Rows and columns of the frame.

    Returns
    -------
    Fault or None
        Outside the frame, or too few pixels inside it. What only hides or marks (left-out parts,
        components, background) may hang over the edge.
    """
    rows, columns = shape
    points = region.centreline or region.outline or ()
    size = f"the frame is {columns} x {rows} pixels, x 0 to {columns - 1}, y 0 to {rows - 1}"
    outside = [
        (number, x, y)
        for number, (x, y) in enumerate(points, start=1)
        if not (
            -_EDGE_TOLERANCE <= x <= columns - 1 + _EDGE_TOLERANCE
            and -_EDGE_TOLERANCE <= y <= rows - 1 + _EDGE_TOLERANCE
        )
    ]
    pixels = _pixels_inside(region, shape)
    if pixels == 0 and outside:
        return _fault(region, "it lies outside its frame", size)
    if outside and region.role in _MUST_LIE_INSIDE:
        number, x, y = outside[0]
        return _fault(region, f"point {number} at ({x:g}, {y:g}) lies outside its frame", size)
    if pixels < _SMALLEST_AREA and region.role != "known_length":
        return _fault(
            region, f"too few pixels: it covers {pixels} of the frame",
            f"expected at least {_SMALLEST_AREA:g}, three by three",
        )  # fmt: skip
    return None


def _pixels_inside(region: Region, shape: tuple[int, int]) -> int:
    """Return how many pixels of the frame a region covers, holes counted as covered."""
    import cv2
    import numpy as np

    mask = np.zeros(shape, dtype=np.uint8)
    for ring in [region.outline] if region.outline else _segments(region):
        points = np.clip(np.asarray(ring, dtype=float), -_FARTHEST, _FARTHEST)
        cv2.fillPoly(mask, [np.rint(points * 16).astype(np.int32)], 1, shift=4)
    return int(np.count_nonzero(mask))


def _segments(region: Region) -> list[list[tuple[float, float]]]:
    """Return each step of a centreline as the rectangle its widths span."""
    points = region.centreline or ()
    widths = region.widths or (1.0,) * len(points)
    rings = []
    for number in range(len(points) - 1):
        (x0, y0), (x1, y1) = points[number], points[number + 1]
        length = math.hypot(x1 - x0, y1 - y0)
        nx, ny = -(y1 - y0) / length / 2, (x1 - x0) / length / 2
        w0, w1 = widths[number], widths[number + 1]
        rings.append([
            (x0 + w0 * nx, y0 + w0 * ny), (x1 + w1 * nx, y1 + w1 * ny),
            (x1 - w1 * nx, y1 - w1 * ny), (x0 - w0 * nx, y0 - w0 * ny),
        ])  # fmt: skip
    return rings


def _fault(region: Region, found: str, expected: str) -> Fault:
    faults = FaultList()
    faults.add(region_place(region), "", found, expected)
    return faults.faults[0]
