"""What the inspector draws: regions over the pipes, a little off, and their neighbours."""

from dataclasses import dataclass

import numpy as np

from cladwatt.quantities import Quantity
from cladwatt.survey.region import Region
from cladwatt.synthetic.bodies import PlacedBody, body_numbers
from cladwatt.synthetic.geometry import PipeAxis, View
from cladwatt.synthetic.pipes import PipeTruth
from cladwatt.synthetic.plant import PlantFrame
from cladwatt.types import FloatArray

__all__ = ["DrawnFrame", "draw_regions", "foil_box"]

_ALONG, _ACROSS, _WIDTH = 0.7, 0.5, 0.8
"""Standard deviations of the inspector's hand. [px]"""
_TAPE_U = 0.02
_RIM = 2.0
"""What is kept clear of the edge of tape and foil. [px]"""


@dataclass(frozen=True)
class DrawnFrame:
    """Regions of one frame, and where their pipes' first vertices really lie.

    Parameters
    ----------
    regions : tuple of Region
        As the inspector drew them.
    drawn : dict of str to (float, float)
        Stations of the near surface seen at first and last vertex, by region id. [m]
    """

    regions: tuple[Region, ...]
    drawn: dict[str, tuple[float, float]]


def _point(values: FloatArray) -> tuple[float, float]:
    return round(float(values[0]), 2), round(float(values[1]), 2)


def _vertex(
    axis: PipeAxis, view: View, station: float, radius: float, hand: FloatArray
) -> tuple[tuple[float, float], float]:
    """Return the vertex where the near surface at a station is seen, and the width there."""
    first, second = axis.edges(view, axis.seen_at(view, station, radius), radius)
    across = second - first
    width = float(np.linalg.norm(across))
    middle = (first + second) / 2 + hand[0] * across / width
    return _point(middle), round(max(width + float(hand[1]), 2.0), 2)


def _metres_per_pixel(axis: PipeAxis, view: View, station: float) -> float:
    ahead = view.project(axis.point(station + 1e-3)) - view.project(axis.point(station))
    return 1e-3 / float(np.linalg.norm(ahead))


def _pipe_region(
    pipe: PipeTruth, frame: PlantFrame, view: View, random: np.random.Generator
) -> tuple[Region, tuple[float, float]]:
    axis, radius = pipe.axis, float(pipe.skin.radius.max(axis=1)[0])
    start, end = (
        station + _ALONG * float(random.standard_normal()) * _metres_per_pixel(axis, view, station)
        for station in pipe.drawn
    )
    corners = [float(s) for s in axis.starts[1:] if start + 0.05 < s < end - 0.05]
    stations = [start, *(corners or [(start + end) / 2]), end]
    vertices = [
        _vertex(axis, view, s, radius, random.standard_normal(2) * (_ACROSS, _WIDTH))
        for s in stations
    ]
    region = Region(
        id=pipe.plant.id, frame_id=frame.id, role="pipe", tag=pipe.plant.tag,
        centreline=tuple(v[0] for v in vertices), widths=tuple(v[1] for v in vertices),
        inclination_deg=pipe.plant.inclination_deg, start=pipe.plant.start_m,
    )  # fmt: skip
    return region, (start, end)


def _component(
    body: PlacedBody, pipe: PipeTruth, number: int, frame: PlantFrame, view: View
) -> Region:
    """Return a body, drawn a little wider than it is."""
    one = body.plant
    shown = pipe.skin.radius[body.covers(pipe.station)]
    radius = max(float(shown.max()), float(pipe.skin.radius[0].max()))
    ends = (body.start - 0.02, body.end + 0.02)
    vertices = [_vertex(pipe.axis, view, s, radius, np.zeros(2)) for s in ends]
    return Region(
        id=f"{pipe.plant.id}-{one.kind}" + (f"-{number}" if number > 1 else ""),
        frame_id=frame.id, role="component", tag=pipe.plant.tag, kind=one.kind, lagged=one.lagged,
        centreline=tuple(v[0] for v in vertices),
        widths=tuple(round(1.15 * v[1], 2) for v in vertices),
    )  # fmt: skip


def _crossing(pipe: PipeTruth, other: PipeTruth, frame: PlantFrame, view: View) -> Region:
    """Return what the pipe in front hides of the one behind."""
    height = float(pipe.skin.radius.max())
    behind = pipe.axis.edges(view, pipe.axis.length * 0.65, height)
    low, high = behind[:, 1].min() - 12, behind[:, 1].max() + 12
    stations = np.linspace(0, other.axis.length, 400)
    rows = np.array([view.project(other.axis.point(float(s)))[1] for s in stations])
    inside = stations[(rows > low) & (rows < high)]
    radius = float(other.skin.radius.max())
    vertices = [_vertex(other.axis, view, float(s), radius, np.zeros(2))
                for s in (inside[0], inside[-1])]  # fmt: skip
    return Region(
        id=f"{pipe.plant.id}-behind", frame_id=frame.id, role="leave_out",
        centreline=tuple(v[0] for v in vertices),
        widths=tuple(round(v[1] + 8.0, 2) for v in vertices),
        note="the line in front",
    )  # fmt: skip


def _tape(pipe: PipeTruth, frame: PlantFrame, view: View) -> Region | None:
    """Return the tape, drawn within its rim."""
    if pipe.tape is None:
        return None
    axis = pipe.axis
    radius = float(pipe.skin.radius.max())
    leg = axis.leg_of(pipe.tape.station[0])
    direction, zero = axis.directions[leg], axis.zeros[leg]
    side = np.cross(direction, zero)
    corners = []
    for station, angle in (
        (pipe.tape.station[0], pipe.tape.angle[0]), (pipe.tape.station[1], pipe.tape.angle[0]),
        (pipe.tape.station[1], pipe.tape.angle[1]), (pipe.tape.station[0], pipe.tape.angle[1]),
    ):  # fmt: skip
        out = np.cos(angle) * zero + np.sin(angle) * side
        corners.append(view.project(axis.point(station) + radius * out))
    middle = np.mean(corners, axis=0)
    outline = []
    for corner in corners:
        inwards = np.sign(middle - corner)
        outline.append(_point(corner + _RIM * inwards))
    return Region(
        id=f"{pipe.plant.id}-tape", frame_id=frame.id, role="tape", tag=pipe.plant.tag,
        outline=tuple(outline),
        value=Quantity(pipe.tape.emissivity, _TAPE_U, lower=0.01, upper=0.995),
    )  # fmt: skip


def foil_box(frame: PlantFrame) -> tuple[int, int, int, int]:
    """Return left, top, right, bottom of the foil, pixels inside. [px]"""
    x, y, width, height = frame.foil
    left, top = round(x * frame.cols), round(y * frame.rows)
    return left, top, left + round(width * frame.cols), top + round(height * frame.rows)


def draw_regions(
    pipes: list[PipeTruth], frame: PlantFrame, view: View, random: np.random.Generator
) -> DrawnFrame:
    """Draw every region of a frame.

    Parameters
    ----------
    pipes : list of PipeTruth
        The pipes in view.
    frame : PlantFrame
        The frame.
    view : View
        The camera.
    random : numpy.random.Generator
        The inspector's hand.

    Returns
    -------
    DrawnFrame
        The regions, pipes first.
    """
    by_id = {pipe.plant.id: pipe for pipe in pipes}
    regions: list[Region] = []
    beside: list[Region | None] = []
    drawn = {}
    for pipe in pipes:
        region, ends = _pipe_region(pipe, frame, view, random)
        regions.append(region)
        drawn[region.id] = ends
        beside += [
            _component(body, pipe, number, frame, view)
            for body, number in zip(pipe.bodies, body_numbers(pipe.bodies), strict=True)
        ]
        beside.append(_tape(pipe, frame, view))
        if pipe.plant.crossed_by:
            beside.append(_crossing(pipe, by_id[pipe.plant.crossed_by], frame, view))
    if frame.foil:
        left, top, right, bottom = foil_box(frame)
        corners = ((left + _RIM, top + _RIM), (right - _RIM, top + _RIM),
                   (right - _RIM, bottom - _RIM), (left + _RIM, bottom - _RIM))  # fmt: skip
        beside.append(Region(id=f"{frame.id[:3]}-foil", frame_id=frame.id, role="foil",
                             outline=corners))  # fmt: skip
    return DrawnFrame((*regions, *(region for region in beside if region is not None)), drawn)
