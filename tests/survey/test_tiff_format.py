"""TIFF: every kind that is accepted gives the written numbers, every other says why not."""

import io
import itertools
import subprocess
import sys

import numpy as np
import pytest
import tifffile
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from cladwatt.survey.decoded import Refusal
from cladwatt.survey.tiff_format import is_tiff, parse_tiff, parse_tiff_integers

FLOATS = ["float16", "float32", "float64"]
INTEGERS = ["uint8", "int8", "uint16", "int16", "uint32", "int32"]
COMPRESSIONS = [None, "lzw", "zlib", "packbits", "zstd", "lzma"]
SHAPE = (48, 80)


def picture(dtype: str, seed: int = 1) -> np.ndarray:
    values = 40.0 + 20.0 * np.random.default_rng(seed).normal(size=SHAPE)
    return np.clip(values, 0, 120).astype(dtype)


def tiff(image: np.ndarray, **options) -> bytes:
    buffer = io.BytesIO()
    options.setdefault("photometric", "minisblack")
    tifffile.imwrite(buffer, image, **options)
    return buffer.getvalue()


def refusal_of(data: bytes, **options) -> Refusal:
    with pytest.raises(Refusal) as caught:
        parse_tiff(data, **options)
    return caught.value


@pytest.mark.parametrize("byteorder", ["<", ">"])
@pytest.mark.parametrize("compression", COMPRESSIONS)
@pytest.mark.parametrize("dtype", FLOATS + INTEGERS)
def test_types_orders_and_compressions(dtype, compression, byteorder):
    image = picture(dtype)
    decoded = parse_tiff(tiff(image, compression=compression, byteorder=byteorder))
    np.testing.assert_array_equal(decoded.values, image.astype(float))
    assert decoded.dtype == dtype
    assert decoded.is_integer == (dtype in INTEGERS)
    assert decoded.values.dtype == np.float64
    assert decoded.details["byte_order"] == ("little" if byteorder == "<" else "big")


@pytest.mark.parametrize(
    ("dtype", "predictor", "layout", "bigtiff"),
    [
        (dtype, predictor, layout, bigtiff)
        for (dtype, predictor), layout, bigtiff in itertools.product(
            [("float32", 3), ("float64", 3), ("uint16", 2), ("int32", 2), ("float32", 1)],
            [{}, {"tile": (32, 32)}, {"rowsperstrip": 7}],
            [False, True],
        )
    ],
)
def test_predictors_tiles_strips_and_bigtiff(dtype, predictor, layout, bigtiff):
    image = picture(dtype)
    data = tiff(image, compression="zlib", predictor=predictor, bigtiff=bigtiff, **layout)
    decoded = parse_tiff(data)
    np.testing.assert_array_equal(decoded.values, image.astype(float))
    assert decoded.details["format"] == ("BigTIFF" if bigtiff else "TIFF")
    assert decoded.details["tiled"] == ("yes" if "tile" in layout else "no")


@pytest.mark.parametrize("page", [0, 1, 2])
def test_the_chosen_page_is_read_and_said(page):
    pages = np.stack([picture("float32", seed) for seed in range(3)])
    decoded = parse_tiff(tiff(pages), page=page)
    np.testing.assert_array_equal(decoded.values, pages[page].astype(float))
    (remark,) = decoded.remarks
    assert remark.key == "frame.several_pages"
    assert dict(remark.parameters) == {"pages": 3, "page": page}


def test_pages_of_different_shape():
    buffer = io.BytesIO()
    with tifffile.TiffWriter(buffer) as file:
        file.write(np.zeros((4, 4, 3), np.uint8), photometric="rgb")
        file.write(picture("float32"), photometric="minisblack")
    decoded = parse_tiff(buffer.getvalue(), page=1)
    np.testing.assert_array_equal(decoded.values, picture("float32").astype(float))


@pytest.mark.parametrize("page", [3, -1])
def test_a_missing_page_is_refused_with_the_count(page):
    refusal = refusal_of(tiff(np.stack([picture("float32")] * 3)), page=page)
    assert refusal.found == f"page {page} was chosen, the TIFF holds 3 page(s)"
    assert refusal.expected == "expected page = 0 to 2"


def test_not_a_number_and_infinity_are_nan():
    image = picture("float32")
    image[0, :3] = [np.nan, np.inf, -np.inf]
    values = parse_tiff(tiff(image)).values
    assert np.isnan(values[0, :3]).all()
    assert np.isfinite(values).sum() == image.size - 3


@pytest.mark.parametrize("dtype", INTEGERS)
def test_counts_at_the_ends_of_their_type_are_saturated(dtype):
    image = np.full(SHAPE, 50, dtype)
    image[1, 2], image[3, 4] = np.iinfo(dtype).min, np.iinfo(dtype).max
    saturated = parse_tiff(tiff(image)).saturated
    assert saturated is not None
    assert np.argwhere(saturated).tolist() == [[1, 2], [3, 4]]


def test_unit_in_the_description():
    assert parse_tiff(tiff(picture("float32"), description="unit: K")).unit == "K"
    assert parse_tiff(tiff(picture("float32"))).unit is None


def test_no_data_value_in_the_file():
    data = tiff(picture("float32"), extratags=[(42113, "s", 0, "-9999", True)])
    assert parse_tiff(data).no_data == -9999.0


def test_min_is_white_keeps_the_stored_counts():
    image = picture("uint8")
    decoded = parse_tiff(tiff(image, photometric="miniswhite"))
    np.testing.assert_array_equal(decoded.values, image.astype(float))
    assert decoded.remarks[0].key == "frame.minimum_is_white_not_applied"


def test_an_orientation_is_remarked_and_not_applied():
    data = tiff(picture("float32"), extratags=[(274, "H", 1, 4, True)])
    decoded = parse_tiff(data)
    assert decoded.remarks[0].key == "frame.orientation_not_applied"
    np.testing.assert_array_equal(decoded.values, picture("float32").astype(float))


@pytest.mark.parametrize(
    ("data", "found"),
    [
        (tiff(np.zeros((8, 9, 3), np.uint8), photometric="rgb"), "picture with 3 colour samples"),
        (
            tiff(np.zeros((8, 9), np.uint8), photometric="palette",
                 colormap=np.zeros((3, 256), np.uint16)),
            "picture with a palette",
        ),
        (tiff(np.zeros((8, 9), np.complex64)), "the TIFF holds"),
        (tiff(np.zeros((8, 9), bool)), "the TIFF holds 1-bit values"),
        (tiff(picture("uint8"), compression="jpeg"), "compressed as JPEG"),
        (b"II*\x00\x08\x00\x00\x00", "the TIFF"),
        (b"II*\x00" + b"\x07" * 40, "the TIFF"),
    ],
)  # fmt: skip
def test_what_is_no_plane_of_temperatures_is_refused(data, found):
    assert found in refusal_of(data).found


@pytest.mark.parametrize("compression", [None, "zlib", "lzw"])
@pytest.mark.parametrize("part", [0.1, 0.5, 0.9])
def test_a_cut_file_is_refused(compression, part):
    # The directory is written first, so the pixels are what is missing.
    data = tiff(picture("float32"), compression=compression)
    assert "expected an intact TIFF" in refusal_of(data[: int(part * len(data))]).expected


def test_damaged_deflate_is_refused():
    data = bytearray(tiff(picture("float32"), compression="zlib"))
    middle = len(data) // 2
    data[middle : middle + 40] = bytes(40)
    assert "the TIFF cannot be read" in refusal_of(bytes(data)).found


def huge_header(rows: int, columns: int) -> bytes:
    """Return a small TIFF whose header declares far more pixels than it holds."""
    data = bytearray(tiff(np.zeros((2, 2), np.float32)))
    with tifffile.TiffFile(io.BytesIO(bytes(data))) as file:
        tags = file.pages[0].tags
        places = {code: (tags[code].valueoffset, tags[code].dtype) for code in (256, 257)}
    for code, value in ((256, columns), (257, rows)):
        offset, kind = places[code]
        size = 2 if kind == 3 else 4
        data[offset : offset + size] = value.to_bytes(size, "little")
    return bytes(data)


def test_a_giant_header_is_refused_before_decoding():
    refusal = refusal_of(huge_header(60000, 60000))
    assert refusal.found == "the TIFF declares 60000 x 60000 pixels"


def test_no_pixels_are_refused():
    assert "declares 0 x 2 pixels" in refusal_of(huge_header(2, 0)).found


def test_a_bomb_is_refused_before_decoding(monkeypatch):
    data = tiff(np.zeros((4000, 3000), np.float32), compression="zlib")
    monkeypatch.setattr(tifffile.TiffPage, "asarray", None)
    assert "would grow from" in refusal_of(data).found


def test_left_out_strips_are_refused():
    buffer = io.BytesIO()
    with tifffile.TiffWriter(buffer) as file:
        file.write(shape=(64, 64), dtype="float32", tile=(32, 32), data=iter([b""] * 4),
                   photometric="minisblack", compression="zlib")  # fmt: skip
    assert "leaves out part of its pixels" in refusal_of(buffer.getvalue()).found


@settings(deadline=None, max_examples=60, suppress_health_check=[HealthCheck.too_slow])
@given(
    st.sampled_from([None, "zlib", "lzw"]),
    st.lists(st.tuples(st.integers(4, 600), st.integers(0, 255)), min_size=1, max_size=6),
)
def test_flipped_bytes_are_read_or_refused(compression, flips):
    data = bytearray(tiff(picture("float32"), compression=compression))
    for place, value in flips:
        data[place] = value
    try:
        decoded = parse_tiff(bytes(data))
    except Refusal:
        return
    assert decoded.values.ndim == 2


def test_magic():
    assert is_tiff(tiff(picture("uint8"), byteorder=">"))
    assert is_tiff(tiff(picture("uint8"), bigtiff=True))
    assert not is_tiff(b"II")


def test_integers_only():
    np.testing.assert_array_equal(parse_tiff_integers(tiff(picture("uint8"))), picture("uint8"))
    with pytest.raises(Refusal, match="the TIFF holds float32"):
        parse_tiff_integers(tiff(picture("float32")))


_WITHOUT_CODECS = """
import sys
sys.modules["imagecodecs"] = None
import numpy as np
from pathlib import Path
from cladwatt.survey.decoded import Refusal
from cladwatt.survey.tiff_format import parse_tiff
for name in sys.argv[2:]:
    try:
        values = parse_tiff(Path(name).read_bytes(), page=int(sys.argv[1])).values
        np.save(name + ".npy", values)
    except Refusal as refusal:
        Path(name + ".txt").write_text(str(refusal))
"""


def without_codecs(page: int, *paths) -> None:
    command = [sys.executable, "-c", _WITHOUT_CODECS, str(page), *map(str, paths)]
    subprocess.run(command, check=True, capture_output=True, timeout=120)


def test_without_imagecodecs_another_decoder_gives_the_same_numbers(tmp_path):
    kinds = {
        "lzw.tif": ("float32", {"compression": "lzw"}),
        "big.tif": ("uint16", {"compression": "lzw", "byteorder": ">"}),
        "predictor.tif": ("float32", {"compression": "zlib", "predictor": 3}),
        "tiled.tif": ("int16", {"compression": "lzw", "tile": (16, 16)}),
    }
    for name, (dtype, options) in kinds.items():
        (tmp_path / name).write_bytes(tiff(picture(dtype), **options))
    without_codecs(0, *(tmp_path / name for name in kinds))
    for name, (dtype, _) in kinds.items():
        got = np.load(tmp_path / f"{name}.npy")
        np.testing.assert_array_equal(got, picture(dtype).astype(float), err_msg=name)


def test_without_imagecodecs_what_nothing_decodes_is_said(tmp_path):
    path = tmp_path / "half.tif"
    path.write_bytes(tiff(picture("float16"), compression="lzw"))
    without_codecs(0, path)
    text = (tmp_path / "half.tif.txt").read_text()
    assert "LZW compression needs the package imagecodecs" in text
    assert "cladwatt[tiff]" in text


def test_without_imagecodecs_a_cut_stack_is_not_taken_for_its_first_page(tmp_path):
    path = tmp_path / "cut.tif"
    data = tiff(np.stack([picture("float32", seed) for seed in range(3)]), compression="lzw")
    path.write_bytes(data[: len(data) * 2 // 3])
    without_codecs(2, path)
    assert (tmp_path / "cut.tif.txt").exists()
    assert not (tmp_path / "cut.tif.npy").exists()
