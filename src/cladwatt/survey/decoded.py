"""What a frame file holds before units are applied, and why a file was refused."""

from dataclasses import dataclass, field
from typing import Literal, TypeAlias

from cladwatt.quantities import Remark
from cladwatt.types import BoolArray, FloatArray

__all__ = ["MAXIMUM_FILE_BYTES", "MAXIMUM_PIXELS", "Decoded", "Refusal", "TemperatureUnit"]

TemperatureUnit: TypeAlias = Literal["C", "K", "F"]

MAXIMUM_PIXELS = 64 * 1024 * 1024
"""Largest frame decoded; far above any infrared camera, far below what fills a memory."""
MAXIMUM_FILE_BYTES = 1024**3


class Refusal(Exception):
    """A file cannot be used; the reader of the frame adds which file it was.

    Attributes
    ----------
    found, expected : str
        As in :class:`cladwatt.errors.Fault`.
    line : int or None
        Line in the file, from 1.
    """

    def __init__(self, found: str, expected: str, line: int | None = None) -> None:
        super().__init__(f"{found}; {expected}")
        self.found = found
        self.expected = expected
        self.line = line


@dataclass(frozen=True)
class Decoded:
    """The numbers of a file as they stand in it, first row of the file first.

    Parameters
    ----------
    values : (rows, cols) array
        NaN where the file holds no number. [as in the file]
    dtype : str
        Name of the numpy type in the file; ``text`` for CSV.
    saturated : (rows, cols) array of bool, optional
        Integer counts at an end of their type.
    unit : {"C", "K", "F"}, optional
        Where the file itself says it.
    no_data : float, optional
        A value the file itself declares to mean "no data".
    details : dict
        Format, shape, encoding and the like for people to read.
    remarks : tuple of Remark
    """

    values: FloatArray
    dtype: str
    saturated: BoolArray | None = None
    unit: TemperatureUnit | None = None
    no_data: float | None = None
    details: dict[str, str] = field(default_factory=dict)
    remarks: tuple[Remark, ...] = ()

    @property
    def is_integer(self) -> bool:
        """Whether the file holds integer counts, which need a scale and an offset."""
        return self.dtype.startswith(("int", "uint"))
