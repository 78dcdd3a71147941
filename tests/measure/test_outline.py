import numpy as np
import pytest

from cladwatt.errors import RegionError
from cladwatt.measure.outline import centreline_of_outline, region_mask, region_ring, widened
from cladwatt.survey.region import Region


def outlined(*points) -> Region:
    return Region("r", "f", "pipe", "A", outline=tuple(points), feature=3)


@pytest.mark.parametrize("angle_deg", [0, 25, 90, -40])
def test_rectangle_gives_its_middle_line_and_width(angle_deg):
    angle = np.radians(angle_deg)
    axis, normal = (
        np.array([np.cos(angle), np.sin(angle)]),
        np.array([-np.sin(angle), np.cos(angle)]),
    )
    centre = np.array([150.0, 110.0])
    corners = [
        centre + a * 80 * axis + b * 15 * normal for a, b in ((-1, -1), (1, -1), (1, 1), (-1, 1))
    ]
    points, widths = centreline_of_outline(outlined(*map(tuple, corners)))
    assert widths == pytest.approx([30, 30], rel=1e-6)
    assert np.hypot(*(points[1] - points[0])) == pytest.approx(160, rel=1e-6)
    assert points.mean(axis=0) == pytest.approx(centre)


def test_tapering_outline_gives_two_widths():
    points, widths = centreline_of_outline(outlined((0, -10), (200, -20), (200, 20), (0, 10)))
    assert widths == pytest.approx([20, 40], rel=0.02)
    assert points[:, 1] == pytest.approx([0, 0], abs=0.1)


def test_bent_outline_is_refused_with_the_way_out():
    bent = outlined(
        (0, 0), (100, 0), (100, 100), (80, 100), (80, 20), (20, 20), (20, 100), (0, 100)
    )
    with pytest.raises(RegionError, match=r"feature 3 \(id 'r'\).*LineString centreline"):
        centreline_of_outline(bent)


def test_mask_holds_the_pixels_whose_centres_lie_inside():
    mask = region_mask(outlined((10, 20), (30, 20), (30, 25), (10, 25)), (50, 50))
    rows, columns = np.nonzero(mask)
    assert (columns.min(), columns.max(), rows.min(), rows.max()) == (10, 30, 20, 25)
    assert mask.sum() == 21 * 6


def test_mask_leaves_holes_out():
    region = Region(
        "r", "f", "leave_out", outline=((5, 5), (45, 5), (45, 45), (5, 45)),
        holes=(((20, 20), (30, 20), (30, 30), (20, 30)),),
    )  # fmt: skip
    mask = region_mask(region, (60, 60))
    assert mask[10, 10]
    assert not mask[25, 25]


def test_ring_of_a_centreline_is_its_width_wide():
    ring = region_ring(Region("r", "f", "pipe", "A", centreline=((0, 10), (50, 10)), widths=(8.0,)))
    assert sorted(set(ring[:, 1])) == [6.0, 14.0]


def test_widened_grows_by_the_margin_all_round():
    mask = np.zeros((21, 21), dtype=bool)
    mask[10, 10] = True
    grown = widened(mask, 2.0)
    assert grown[10, 12]
    assert grown[8, 10]
    assert not grown[10, 13]
