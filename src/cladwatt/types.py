"""Array aliases used throughout."""

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

FloatArray: TypeAlias = NDArray[np.float64]
BoolArray: TypeAlias = NDArray[np.bool_]
IntArray: TypeAlias = NDArray[np.int64]
FloatLike: TypeAlias = float | FloatArray

__all__ = ["BoolArray", "FloatArray", "FloatLike", "IntArray"]
