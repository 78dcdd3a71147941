"""Linear look-up on a uniform grid, quick enough for whole frames."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from cladwatt.types import FloatArray, FloatLike

__all__ = ["UniformTable", "uniform_table"]

_CHUNK: Final = 16_384  # elements per pass: the working buffers stay in cache


@dataclass(frozen=True)
class UniformTable:
    """A line per interval of a uniform grid: value = intercept + slope x position.

    The first and last interval are padding that holds NaN, so that whatever lies outside, and
    NaN itself, comes out as NaN without a test per element.
    """

    start: float
    step: float
    intercept: FloatArray
    slope: FloatArray
    fourth_root: bool = False

    def look_up(self, position: FloatLike) -> FloatArray:
        """Return the function at `position`, any shape; NaN outside the grid."""
        given = np.asarray(position)
        flat = given.reshape(-1)
        out = np.empty(flat.size)
        size = min(flat.size, _CHUNK)
        cell, gathered, root = np.empty(size, dtype=np.intp), np.empty(size), np.empty(size)
        scaled = np.empty(size)
        inverse, shift = 1.0 / self.step, 1.0 - self.start / self.step
        with np.errstate(invalid="ignore", over="ignore"):
            for begin in range(0, flat.size, _CHUNK):
                here = flat[begin : begin + _CHUNK]
                count = here.size
                result = out[begin : begin + count]
                x, a, c, r = scaled[:count], gathered[:count], cell[:count], root[:count]
                if self.fourth_root:
                    np.sqrt(here, out=r)
                    here = np.sqrt(r, out=r)
                np.multiply(here, inverse, out=x)
                np.add(x, shift, out=x)
                np.copyto(c, x, casting="unsafe")
                self.slope.take(c, out=result, mode="clip")
                np.multiply(result, here, out=result)
                self.intercept.take(c, out=a, mode="clip")
                np.add(result, a, out=result)
        return out.reshape(given.shape)


def uniform_table(
    position: FloatArray, value: FloatArray, *, fourth_root: bool = False
) -> UniformTable:
    """Return the table of chords, moved so that their error is as large up as down.

    Parameters
    ----------
    position : (nodes,) array
        Uniform and increasing; three nodes or more.
    value : (nodes,) array
        Function at the nodes.
    fourth_root : bool
        Whether positions are fourth roots of what is looked up.
    """
    balanced = value.copy()
    balanced[1:-1] -= np.diff(value, 2) / 16.0  # half of a chord's largest error, h^2/8 f''
    value, slope = balanced, np.diff(balanced) / np.diff(position)
    padding = (np.nan,)
    return UniformTable(
        start=float(position[0]),
        step=float((position[-1] - position[0]) / (position.size - 1)),
        slope=np.concatenate([padding, slope, padding]),
        intercept=np.concatenate([padding, value[:-1] - slope * position[:-1], padding]),
        fourth_root=fourth_root,
    )
