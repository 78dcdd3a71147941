"""TIFF frames: look at the header first, decode only what is fit to be decoded."""

import io
import logging
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cladwatt.quantities import Remark
from cladwatt.survey.decoded import MAXIMUM_PIXELS, Decoded, Refusal
from cladwatt.survey.temperature_unit import unit_in_header

__all__ = ["is_tiff", "parse_tiff", "parse_tiff_integers"]

_MAGIC = (b"II*\x00", b"MM\x00*", b"II+\x00", b"MM\x00+")
_LOSSLESS = {
    1: "none", 5: "LZW", 8: "deflate", 32946: "deflate", 32773: "packbits", 34925: "LZMA",
    34926: "zstd", 50000: "zstd",
}  # fmt: skip
_PLAIN = "expected one plane of temperatures: float32 or float64, or integers with scale and offset"
_INTACT = "expected an intact TIFF; export or copy it again"
_MAXIMUM_PAGES = 100_000
# Real frames carry noise: nothing recorded shrinks this far.
_BOMB_BYTES = 32 * 1024**2
_BOMB_RATIO = 500


def is_tiff(data: bytes) -> bool:
    """Whether the bytes begin like a TIFF or BigTIFF of either byte order."""
    return data[:4] in _MAGIC


def parse_tiff(data: bytes, *, page: int = 0) -> Decoded:
    """Read one page of a TIFF as it stands, without scale or unit.

    Parameters
    ----------
    data : bytes
        The whole file.
    page : int
        Page, from 0.

    Returns
    -------
    Decoded

    Raises
    ------
    Refusal
        If the page is missing, is a colour picture, is too large, is damaged or needs a codec
        that is not installed.
    """
    raw, header = _read_page(data, page)
    saturated = None
    if raw.dtype.kind in "iu":
        limits = np.iinfo(raw.dtype)
        saturated = (raw == limits.min) | (raw == limits.max)
    with np.errstate(invalid="ignore", over="ignore"):
        values = raw.astype(np.float64)
    values[~np.isfinite(values)] = np.nan
    return Decoded(
        values,
        raw.dtype.name,
        saturated=saturated,
        unit=unit_in_header(header["description"].splitlines()),
        no_data=header["no_data"],
        details=header["details"],
        remarks=header["remarks"],
    )


def parse_tiff_integers(data: bytes) -> NDArray[np.integer[Any]]:
    """Read the first page of a TIFF that must hold integers, such as a label image."""
    raw, _ = _read_page(data, 0)
    if raw.dtype.kind not in "iu":
        raise Refusal(f"the TIFF holds {raw.dtype.name}", "expected whole numbers, one per region")
    return raw


def _read_page(data: bytes, page: int) -> tuple[NDArray[Any], dict[str, Any]]:
    """Decode one page; whatever goes wrong in the reader becomes one refusal."""
    import tifffile

    _keep_reader_quiet()
    try:
        with tifffile.TiffFile(io.BytesIO(data)) as file:
            chosen = _choose_page(file, page)
            header = _check_header(file, chosen, page, len(data))
            raw = _decode(data, file, chosen, page)
    except Refusal:
        raise
    except Exception as error:
        # The reader raises a dozen unrelated types on damaged files.
        raise Refusal(
            f"the TIFF cannot be read ({type(error).__name__}: {str(error)[:120]})", _INTACT
        ) from error
    if raw.dtype.kind not in "iuf":
        raise Refusal(f"the TIFF holds {raw.dtype.name}", _PLAIN)
    return raw, header


def _keep_reader_quiet() -> None:
    """Give the reader's logger a handler, so that its notes do not fall through to stderr."""
    logger = logging.getLogger("tifffile")
    if not logger.handlers:
        logger.addHandler(logging.NullHandler())


def _choose_page(file: Any, page: int) -> Any:
    count = len(file.pages)
    if count == 0:
        raise Refusal("the TIFF holds no page", _INTACT)
    if count > _MAXIMUM_PAGES:
        raise Refusal(f"the TIFF holds {count} pages", f"expected at most {_MAXIMUM_PAGES}")
    if not 0 <= page < count:
        raise Refusal(
            f"page {page} was chosen, the TIFF holds {count} page(s)",
            f"expected page = 0 to {count - 1}" if count > 1 else "expected page = 0",
        )
    return file.pages[page].aspage()


def _check_header(file: Any, page: Any, index: int, file_bytes: int) -> dict[str, Any]:
    """Refuse by the header alone what must not or cannot be decoded."""
    rows, columns = int(page.imagelength), int(page.imagewidth)
    if rows < 1 or columns < 1:
        raise Refusal(f"the TIFF declares {columns} x {rows} pixels", _INTACT)
    if rows * columns > MAXIMUM_PIXELS:
        raise Refusal(
            f"the TIFF declares {columns} x {rows} pixels",
            f"expected at most {MAXIMUM_PIXELS} pixels",
        )
    photometric, compression = int(page.photometric), int(page.compression)
    if photometric == 3 or page.samplesperpixel != 1 or photometric not in (0, 1):
        kind = "a palette" if photometric == 3 else f"{page.samplesperpixel} colour samples"
        raise Refusal(f"the TIFF is a picture with {kind} per pixel", _PLAIN)
    if compression not in _LOSSLESS:
        name = getattr(page.compression, "name", str(compression))
        raise Refusal(
            f"the TIFF is compressed as {name}, which need not keep the values",
            f"expected one of {', '.join(dict.fromkeys(_LOSSLESS.values()))}",
        )
    if page.imagedepth != 1 or page.bitspersample not in (8, 16, 32, 64) or page.dtype is None:
        raise Refusal(f"the TIFF holds {page.bitspersample}-bit values", _PLAIN)
    counts = [int(count) for count in page.databytecounts]
    if not counts or min(counts) <= 0:
        raise Refusal("the TIFF leaves out part of its pixels", _INTACT)
    decoded = rows * columns * page.bitspersample // 8
    if decoded > _BOMB_BYTES and decoded > _BOMB_RATIO * min(sum(counts), file_bytes):
        raise Refusal(
            f"the TIFF would grow from {file_bytes} to {decoded} bytes",
            f"expected recorded values, which do not shrink more than {_BOMB_RATIO} times",
        )
    return _describe(file, page, index)


def _describe(file: Any, page: Any, index: int) -> dict[str, Any]:
    pages = len(file.pages)
    remarks: list[Remark] = []
    if pages > 1:
        remarks.append(Remark("frame.several_pages", (("pages", pages), ("page", index))))
    orientation = page.tags.valueof(274, default=1)
    if orientation != 1:
        remarks.append(
            Remark("frame.orientation_not_applied", (("orientation", int(orientation)),))
        )
    if int(page.photometric) == 0:
        remarks.append(Remark("frame.minimum_is_white_not_applied"))
    details = {
        "format": "BigTIFF" if file.is_bigtiff else "TIFF",
        "dtype": page.dtype.name,
        "byte_order": "little" if file.byteorder == "<" else "big",
        "compression": _LOSSLESS[int(page.compression)],
        "tiled": "yes" if page.is_tiled else "no",
        "pages": str(pages),
        "page": str(index),
    }
    return {
        "description": str(page.description or ""),
        "no_data": _no_data(page),
        "details": details,
        "remarks": tuple(remarks),
    }


def _no_data(page: Any) -> float | None:
    text = page.tags.valueof(42113)
    try:
        return None if text is None else float(str(text).strip("\x00 "))
    except ValueError:
        return None


def _decode(data: bytes, file: Any, page: Any, index: int) -> NDArray[Any]:
    expected = (int(page.imagelength), int(page.imagewidth))
    try:
        raw: NDArray[Any] = np.asarray(page.asarray())
    except ValueError as error:
        if "imagecodecs" not in str(error):
            raise
        raw = _decode_without_codecs(data, file, page, index)
    raw = raw.reshape(expected)
    return raw.astype(raw.dtype.newbyteorder("="), copy=False)


def _decode_without_codecs(data: bytes, file: Any, page: Any, index: int) -> NDArray[Any]:
    """Decode with OpenCV, and believe it only where it agrees with the header."""
    import cv2

    refusal = Refusal(
        f"the TIFF's {_LOSSLESS[int(page.compression)]} compression needs the package imagecodecs",
        "install cladwatt[tiff], or save the frame uncompressed",
    )
    if int(page.photometric) != 1 or page.dtype.kind not in "iuf":
        raise refusal
    buffer = np.frombuffer(data, dtype=np.uint8)
    try:
        done, images = cv2.imdecodemulti(buffer, cv2.IMREAD_UNCHANGED)
    except cv2.error:
        raise refusal from None
    # It returns fewer pages than there are from a cut file, and says nothing.
    if not done or len(images) != len(file.pages):
        raise refusal
    image: NDArray[Any] = images[index]
    if image.shape != (page.imagelength, page.imagewidth) or image.dtype != page.dtype:
        raise refusal
    return image
