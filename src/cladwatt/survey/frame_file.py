"""Open a frame file and decode it by what it holds."""

from pathlib import Path

from cladwatt.survey.decoded import MAXIMUM_FILE_BYTES, Decoded, Refusal

__all__ = ["decode_frame_bytes", "read_frame_bytes"]

_ACCEPTED = "expected a CSV matrix or a TIFF of temperatures"
_FOREIGN = {
    b"\x89PNG": "a PNG picture",
    b"\xff\xd8\xff": "a JPEG picture",
    b"GIF8": "a GIF picture",
    b"BM": "a BMP picture",
    b"PK\x03\x04": "a workbook or ZIP archive",
    b"\xd0\xcf\x11\xe0": "an old office document",
    b"%PDF": "a PDF",
    b"\x1f\x8b": "a gzip archive",
    b"\x89HDF": "an HDF5 file",
    b"\x93NUMPY": "a numpy file",
}


def read_frame_bytes(path: Path) -> bytes:
    """Return the bytes of a frame file that is a file of a size fit to be read.

    Raises
    ------
    Refusal
        If it is missing, a folder, empty, too large or may not be read.
    """
    try:
        if path.is_dir():
            raise Refusal("this is a folder", f"{_ACCEPTED}; name the file inside it")
        if not path.exists():
            raise Refusal("there is no such file", f"{_ACCEPTED}; correct the path or add the file")
        if not path.is_file():
            raise Refusal("this is no ordinary file", _ACCEPTED)
        size = path.stat().st_size
        if size > MAXIMUM_FILE_BYTES:
            raise Refusal(f"the file holds {size} bytes", f"expected at most {MAXIMUM_FILE_BYTES}")
        data = path.read_bytes()
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise Refusal(f"the file cannot be read ({reason})", _ACCEPTED) from error
    if not data:
        raise Refusal("the file is empty", f"{_ACCEPTED}; export or copy it again")
    return data


def decode_frame_bytes(data: bytes, *, suffix: str = "", page: int = 0) -> Decoded:
    """Decode a frame file by what it holds, not by what it is called.

    Raises
    ------
    Refusal
        If it is neither a CSV matrix nor a fit TIFF.
    """
    from cladwatt.survey.csv_format import MAXIMUM_CSV_BYTES, decode_text, parse_csv_matrix
    from cladwatt.survey.tiff_format import is_tiff, parse_tiff

    if is_tiff(data):
        return parse_tiff(data, page=page)
    for magic, name in _FOREIGN.items():
        if data.startswith(magic):
            raise Refusal(f"the file is {name}", f"{_ACCEPTED}; export the recorded values")
    if suffix.lower() in (".tif", ".tiff"):
        raise Refusal("the file does not begin like a TIFF", f"{_ACCEPTED}; export it again")
    if len(data) > MAXIMUM_CSV_BYTES:
        raise Refusal(f"the file holds {len(data)} bytes", f"expected at most {MAXIMUM_CSV_BYTES}")
    if page != 0:
        raise Refusal(f"page {page} was chosen of a text file", "expected page = 0, or a TIFF")
    text, encoding = decode_text(data)
    return parse_csv_matrix(text, encoding=encoding)
