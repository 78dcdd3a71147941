"""Label images: outlines enclose the painted pixels, and every slip is named."""

import cv2
import numpy as np
import pytest
import tifffile
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from cladwatt.errors import RegionError
from cladwatt.survey.label_format import read_label_image
from cladwatt.survey.mask_outline import mask_outlines

TABLE = "integer,id,tag,role\n1,north-1,HS-101,pipe\n2,flange,HS-101,component\n"


def area(ring) -> float:
    x, y = np.array(ring).T
    return 0.5 * abs(float(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y)))


def painted() -> np.ndarray:
    labels = np.zeros((30, 40), np.uint8)
    labels[5:15, 4:36] = 1
    labels[8:12, 10:14] = 2
    return labels


def write(folder, labels, table=TABLE, name="f.png"):
    path = folder / name
    if path.suffix == ".png":
        assert cv2.imwrite(str(path), labels)
    else:
        tifffile.imwrite(path, labels, photometric="minisblack")
    path.with_suffix(".csv").write_text(table, encoding="utf-8")
    return path


def inside(pieces, shape) -> np.ndarray:
    """Return which pixel centres the outlines enclose, by OpenCV's own point test."""
    result = np.zeros(shape, bool)
    for outline, holes, _ in pieces:
        for row, column in np.ndindex(shape):

            def within(ring, at=(float(column), float(row))):
                contour = np.array(ring, np.float32).reshape(-1, 1, 2)
                return cv2.pointPolygonTest(contour, at, False) > 0

            result[row, column] |= within(outline) and not any(within(hole) for hole in holes)
    return result


def test_a_rectangle_runs_along_the_outer_edges_of_its_pixels():
    mask = np.zeros((9, 12), bool)
    mask[2:5, 3:10] = True
    ((outline, holes, pixels),) = mask_outlines(mask)
    x, y = np.array(outline).T
    assert (x.min(), x.max(), y.min(), y.max()) == (2.5, 9.5, 1.5, 4.5)
    assert holes == ()
    assert pixels == 21
    assert area(outline) == pytest.approx(21 - 0.5)
    assert len(outline) == 8


def test_a_mask_up_to_the_border():
    ((outline, _, pixels),) = mask_outlines(np.ones((4, 5), bool))
    x, y = np.array(outline).T
    assert (x.min(), x.max(), y.min(), y.max()) == (-0.5, 4.5, -0.5, 3.5)
    assert pixels == 20


def test_holes_and_islands_in_them():
    mask = np.zeros((20, 20), bool)
    mask[2:18, 2:18] = True
    mask[5:15, 5:15] = False
    mask[8:12, 8:12] = True
    big, small = mask_outlines(mask)
    assert (big[2], small[2]) == (256 - 100, 16)
    assert len(big[1]) == 1
    assert area(big[1][0]) == pytest.approx(100 - 0.5)
    assert small[1] == ()


def test_many_rings_each_keep_their_own_hole():
    mask = np.zeros((60, 60), bool)
    for row, column in np.ndindex(10, 10):
        mask[6 * row : 6 * row + 5, 6 * column : 6 * column + 5] = True
        mask[6 * row + 2, 6 * column + 1 : 6 * column + 4] = False
    pieces = mask_outlines(mask)
    assert [pixels for *_, pixels in pieces] == [22] * 100
    for outline, holes, _ in pieces:
        (hole,) = holes
        assert np.mean(hole, axis=0) == pytest.approx(np.mean(outline, axis=0))


def test_a_slanted_band_keeps_its_area():
    y, x = np.mgrid[0:80, 0:120]
    mask = np.abs(y - 20 - 0.37 * x) < 6.5
    ((outline, _, pixels),) = mask_outlines(mask)
    assert pixels == mask.sum()
    assert area(outline) == pytest.approx(mask.sum(), rel=0.005)


@given(arrays(bool, st.tuples(st.integers(1, 9), st.integers(1, 9))))
def test_outlines_enclose_the_painted_centres_and_no_others(mask):
    pieces = mask_outlines(mask)
    assert sum(pixels for *_, pixels in pieces) == mask.sum()
    np.testing.assert_array_equal(inside(pieces, mask.shape), mask)
    number, _ = cv2.connectedComponents(mask.astype(np.uint8), connectivity=4)
    assert len(pieces) == number - 1


@pytest.mark.parametrize("name", ["f.png", "f.tif"])
@pytest.mark.parametrize("dtype", [np.uint8, np.uint16])
def test_regions_of_a_label_image(tmp_path, name, dtype):
    path = write(tmp_path, painted().astype(dtype), name=name)
    regions, faults = read_label_image(path, frame_id="f", shape=(30, 40))
    assert faults == ()
    north, flange = regions
    assert (north.id, north.tag, north.role, north.frame_id) == ("north-1", "HS-101", "pipe", "f")
    assert (flange.id, flange.role) == ("flange", "component")
    assert north.centreline is None
    assert north.outline is not None
    assert area(north.outline) - sum(map(area, north.holes)) == pytest.approx(320 - 16, abs=1.01)
    assert len(north.holes) == 1


def test_role_is_pipe_where_the_table_has_none(tmp_path):
    labels = np.where(painted() == 1, 1, 0).astype(np.uint8)
    path = write(tmp_path, labels, "integer;id;tag\n1;a;HS-1\n")
    (region,), faults = read_label_image(path, frame_id="f")
    assert (region.role, region.tag, faults) == ("pipe", "HS-1", ())


def test_a_label_cut_in_two_becomes_two_regions(tmp_path):
    labels = np.zeros((30, 40), np.uint8)
    labels[5:15, 4:36] = 1
    labels[:, 12:16] = 0
    regions, faults = read_label_image(
        write(tmp_path, labels, "integer,id,tag\n1,a,HS-1\n"), frame_id="f"
    )
    assert [region.id for region in regions] == ["a", "a-2"]
    assert faults == ()


def test_a_table_elsewhere(tmp_path):
    path = write(tmp_path, painted())
    other = tmp_path / "other.csv"
    path.with_suffix(".csv").rename(other)
    regions, _ = read_label_image(path, other, frame_id="f")
    assert len(regions) == 2


@pytest.mark.parametrize(
    ("table", "found", "line"),
    [
        (TABLE + "3,valve,HS-101,pipe\n", "label 3 ('valve') is in the table but nowhere", None),
        (TABLE.rsplit("2,", 1)[0], "label 2 (16 pixels) is in the image but not in f.csv", None),
        (TABLE + "1,again,HS-101,pipe\n", "label 1 stands on line 2 too", 4),
        (TABLE + "5,north-1,HS-101,pipe\n", "id 'north-1' stands on line 2 too", 4),
        (TABLE + "x,a,HS-101,pipe\n", "integer is 'x'", 4),
        (TABLE + "0,a,HS-101,pipe\n", "integer is '0'", 4),
        (TABLE + "5,,HS-101,pipe\n", "label 5 has no id", 4),
        (TABLE + "5,a,,pipe\n", "pipe region 'a' has no tag", 4),
        (TABLE + "5,a,HS-101,tube\n", "role of 'a' is 'tube'", 4),
        (TABLE + "5,a,HS-101,known_length\n", "role of 'a' is 'known_length'", 4),
    ],
)
def test_each_slip_is_named_and_the_rest_kept(tmp_path, table, found, line):
    regions, faults = read_label_image(
        write(tmp_path, painted(), table), frame_id="f", root=tmp_path
    )
    (fault,) = faults
    assert fault.found.startswith(found)
    assert fault.line == line
    assert fault.path in ("f.csv", "f.png")
    assert fault.where == "labels of frame 'f'"
    assert regions[0].id == "north-1"


def test_stray_pixels_are_named(tmp_path):
    labels = painted()
    labels[25, 30] = 1
    regions, (fault,) = read_label_image(write(tmp_path, labels), frame_id="f")
    assert [region.id for region in regions] == ["north-1", "flange"]
    assert "has 1 piece(s) under 9 pixels, the first near x = 30, y = 25" in fault.found
    assert fault.region_id == "north-1"


def error_of(path, **options):
    with pytest.raises(RegionError) as caught:
        read_label_image(path, frame_id="f", **options)
    (fault,) = caught.value.faults
    return fault


def test_another_shape_than_the_frame(tmp_path):
    fault = error_of(write(tmp_path, painted()), shape=(31, 40))
    assert fault.found == "the label image is 30 rows x 40 columns"


def test_missing_columns(tmp_path):
    fault = error_of(write(tmp_path, painted(), "integer,name\n1,a\n"))
    assert fault.found == "the table has no column id, tag"


def test_missing_files(tmp_path):
    assert error_of(tmp_path / "f.png").found == "there is no such file"
    path = write(tmp_path, painted())
    path.with_suffix(".csv").unlink()
    assert error_of(path).path == "f.csv"


def test_colour_png_and_other_kinds(tmp_path):
    path = write(tmp_path, np.zeros((5, 6, 3), np.uint8))
    assert "colour picture" in error_of(path).found
    path.write_bytes(b"nothing of the kind")
    assert error_of(path).found == "the file is neither TIFF nor PNG"
    path = write(tmp_path, np.zeros((5, 6), np.float32), name="g.tif")
    assert error_of(path).found == "the TIFF holds float32"


def test_a_giant_and_a_damaged_png(tmp_path):
    path = write(tmp_path, painted())
    data = bytearray(path.read_bytes())
    path.write_bytes(data[:60])
    assert error_of(path).found == "the PNG is damaged"
    data[16:24] = (100_000).to_bytes(4, "big") * 2
    path.write_bytes(data)
    assert error_of(path).found == "the PNG declares 100000 x 100000 pixels"
