"""Frames written the way cameras and their exports write them."""

from collections.abc import Callable
from io import BytesIO

import numpy as np

from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.types import FloatArray

__all__ = ["FRAME_FILES", "frame_bytes"]

_COUNT = 0.01
"""Step of integer counts. [K]"""


def _tiff(values: np.ndarray[tuple[int, ...], np.dtype[np.generic]]) -> bytes:
    import tifffile

    whole = np.issubdtype(values.dtype, np.integer)
    buffer = BytesIO()
    tifffile.imwrite(
        buffer, values, compression="zlib", predictor=2 if whole else None, metadata=None,
        software=False, rowsperstrip=64,
    )  # fmt: skip
    return buffer.getvalue()


def _float_tiff(celsius: FloatArray) -> bytes:
    # rounded to 1/512 K, whose short mantissa packs well
    return _tiff((np.round(celsius * 512) / 512).astype(np.float32))


def _int16_tiff(celsius: FloatArray) -> bytes:
    return _tiff(np.round(celsius / _COUNT).astype(np.int16))


def _uint16_tiff(celsius: FloatArray) -> bytes:
    return _tiff(np.round((celsius + ZERO_CELSIUS) / _COUNT).astype(np.uint16))


def _bottom_tiff(celsius: FloatArray) -> bytes:
    return _uint16_tiff(celsius[::-1])


def _comma_csv(celsius: FloatArray) -> bytes:
    rows = [";".join(f"{value:.2f}" for value in row).replace(".", ",") for row in celsius]
    return ("\r\n".join(rows) + "\r\n").encode("ascii")


def _fahrenheit_csv(celsius: FloatArray) -> bytes:
    rows, cols = celsius.shape
    head = ["Recorded temperatures", f"Size: {cols} x {rows}", "Temperature [°F]", ""]
    body = [",".join(f"{value:.2f}" for value in row) for row in celsius * 1.8 + 32]
    return ("\n".join(head + body) + "\n").encode("utf-8")


FRAME_FILES: dict[str, tuple[str, str, Callable[[FloatArray], bytes]]] = {
    "tiff-float": (".tiff", 'unit = "C"', _float_tiff),
    "tiff-int16": (".tiff", 'unit = "C"\nscale = 0.01\noffset = 0.0', _int16_tiff),
    "tiff-uint16": (".tiff", 'unit = "K"\nscale = 0.01\noffset = 0.0', _uint16_tiff),
    "tiff-bottom": (
        ".tiff", 'unit = "K"\nscale = 0.01\noffset = 0.0\nrows_from = "bottom"', _bottom_tiff,
    ),
    "csv-comma": (".csv", 'unit = "C"', _comma_csv),
    "csv-fahrenheit": (".csv", 'unit = "F"', _fahrenheit_csv),
}  # fmt: skip
"""By kind: suffix, keys of the survey file, writer taking °C."""


def frame_bytes(kind: str, temperature: FloatArray) -> bytes:
    """Return a frame as a file of one kind.

    Parameters
    ----------
    kind : str
        A key of `FRAME_FILES`.
    temperature : (rows, cols) array
        Recorded temperature. [K]

    Returns
    -------
    bytes
        The file.
    """
    return FRAME_FILES[kind][2](temperature - ZERO_CELSIUS)
