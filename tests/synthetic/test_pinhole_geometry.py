"""Pinhole view of pipes against plane geometry."""

import math

import numpy as np
import pytest

from cladwatt.synthetic.geometry import PipeAxis, View
from cladwatt.synthetic.tracing import trace_pipe

VIEW = View(240, 320, 40.0)
UP = np.array([0.0, -1.0, 0.0])


def straight(depth=3.0, slant=0.0, height=0.0):
    return PipeAxis(np.array([[-1.5, height, depth - slant], [1.5, height, depth + slant]]), UP)


def all_rays(view=VIEW):
    x, y = np.meshgrid(np.arange(view.cols, dtype=float), np.arange(view.rows, dtype=float))
    return view.rays(x.ravel(), y.ravel())


def test_a_placed_point_is_seen_where_it_was_placed():
    assert VIEW.project(VIEW.place(37.5, 200.25, 4.0)) == pytest.approx([37.5, 200.25])


def test_the_field_of_view_spans_the_frame():
    left, right = VIEW.rays(np.array([-0.5, 319.5]), np.array([119.5, 119.5]))
    assert math.degrees(math.acos(left @ right)) == pytest.approx(40.0)


def test_width_of_a_pipe_square_to_the_view():
    # tangent planes of a circle seen from outside: half width = f R / sqrt(Z^2 - R^2)
    first, second = straight().edges(VIEW, 1.5, 0.14)
    expected = 2 * VIEW.focal * 0.14 / math.sqrt(3.0**2 - 0.14**2)
    assert np.linalg.norm(first - second) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("station", [0.3, 1.5, 2.6])
def test_rays_through_the_edges_touch_the_pipe(station):
    axis = straight(slant=0.7, height=0.4)
    for x, y in axis.edges(VIEW, station, 0.14):
        ray = VIEW.rays(np.array(x), np.array(y))
        # distance of two lines in space
        across = np.cross(ray, axis.directions[0])
        distance = abs(axis.vertices[0] @ across) / np.linalg.norm(across)
        assert distance == pytest.approx(0.14, rel=1e-6)


def test_hits_lie_on_the_pipe_and_face_the_camera():
    axis, rays = straight(slant=0.5), all_rays()
    hits = trace_pipe(rays, axis, np.full((50, 12), 0.14))
    point = hits.depth[:, None] * rays[hits.index]
    foot = axis.vertices[0] + hits.station[:, None] * axis.directions[0]
    assert np.linalg.norm(point - foot, axis=1) == pytest.approx(0.14)
    assert np.all(np.einsum("ij,ij->i", hits.normal, hits.ray) < 0)
    up = point[np.abs(hits.angle) < 0.05] - foot[np.abs(hits.angle) < 0.05]
    assert np.all(up[:, 1] < 0)
    assert not hits.face.any()


def test_a_bare_stretch_is_seen_as_narrow_as_the_pipe_with_its_cut_faces():
    axis = PipeAxis(np.array([[-0.5, 0.0, 3.0], [2.5, 0.0, 3.0]]), UP)
    radius = np.full((60, 12), 0.14)
    radius[14:26] = 0.07
    middle = float(axis.length * 20 / 60)
    x = VIEW.project(axis.point(middle))[0]
    y = np.arange(0, 240, 0.25)
    hits = trace_pipe(VIEW.rays(np.full(y.size, x), y), axis, radius)
    width = 2 * VIEW.focal * 0.07 / math.sqrt(3.0**2 - 0.07**2)
    assert hits.index.size * 0.25 == pytest.approx(width, abs=0.5)
    whole = trace_pipe(all_rays(), axis, radius)
    # only the far cut face looks at a camera left of the stretch
    assert whole.face.any()
    assert np.all(whole.station[whole.face] > axis.length * 25.9 / 60)


def test_the_near_surface_is_seen_beside_the_axis():
    # a point 3 - 0.14 m away is seen farther from the middle than the axis point behind it
    axis = straight()
    seen = axis.seen_at(VIEW, 2.5, 0.14)
    assert seen - 1.5 == pytest.approx((2.5 - 1.5) * 3.0 / (3.0 - 0.14), rel=1e-6)
    assert axis.surface_station(VIEW, seen, 0.14) == pytest.approx(2.5, abs=1e-6)


def test_a_bend_has_no_gap_and_stations_run_on():
    axis = PipeAxis(np.array([[-2.0, 0.0, 3.0], [0.3, 0.0, 3.0], [1.0, 0.7, 3.0]]), UP)
    hits = trace_pipe(all_rays(), axis, np.full((50, 12), 0.1))
    image = np.zeros((240, 320), dtype=bool)
    image.ravel()[hits.index] = True
    for column in range(0, 250, 10):
        rows = np.flatnonzero(image[:, column])
        assert rows.size == rows[-1] - rows[0] + 1
    assert np.all((hits.station >= 0) & (hits.station <= axis.length))
    assert axis.starts[1] == pytest.approx(2.3)
