"""One case is one region with its truth; many of them as columns."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["LOCAL_KINDS", "Case", "Columns", "columns_of"]

LOCAL_KINDS = frozenset(
    {"compressed", "wet", "wet_underside", "void", "open_joint", "bare", "missing_sector"}
)

NAN = float("nan")


@dataclass(frozen=True)
class Case:
    """What is true of one region, and what was found. Losses in W/m, lengths in m.

    A quantity with ``_low``, ``_high`` has its 95 % interval there; ``loss_q25`` and ``loss_q75``
    bound the 50 % interval of the loss.
    """

    seed: int
    frame_id: str
    region_id: str
    kind: str
    damaged: bool
    indoors: bool
    chilled: bool
    sun: bool
    emissivity: float
    """Declared, in the band."""
    true_loss: float
    true_sound: float
    true_length: float
    """Drawn length without components."""
    matters: bool
    """Local damage that raises the loss by more than 25 % over more than one lagged diameter."""
    aged_ratio: float
    """Loss over sound loss where it is aged throughout, else 1."""
    loss: float
    loss_low: float
    loss_high: float
    loss_q25: float
    loss_q75: float
    sound: float
    sound_low: float
    sound_high: float
    length: float
    length_low: float
    length_high: float
    probability: float
    """That it is damaged."""
    verdict: str
    image: float
    """Loss by the image alone, the specification unused; NaN where it gives none."""
    image_low: float
    image_high: float
    specified: float
    """At the declared values and laboratory conductivity."""
    as_specified: float
    """Sound at the declared values, the image unused."""
    spreadsheet: float
    """What the spreadsheet makes of it; NaN where it gives no number."""
    long_overlap: float = NAN
    """Of a stretch that matters, longer than 0.2 m, with the best one found; NaN: no such."""
    short_offset: float = NAN
    """Of a shorter stretch: distance to the nearest centre found over what is allowed."""
    kind_true: float = NAN
    """Probability of the true kind of local damage, given that it is local; NaN: no such."""
    kind_prior: float = NAN
    kind_thresholds: float = NAN
    """What the prior and thresholds on temperature give the true kind."""
    kind_top: float = NAN
    """Probability of the likeliest kind."""
    kind_right: float = NAN
    """Whether that is the true one."""
    oracle: float = NAN
    """Loss found from the true inputs, where that was asked for."""
    oracle_low: float = NAN
    oracle_high: float = NAN
    oracle_probability: float = NAN


class Columns(Mapping[str, NDArray[Any]]):
    """Cases as columns, or a choice of them, made column by column as they are asked for."""

    def __init__(
        self, data: Mapping[str, NDArray[Any]], index: NDArray[np.int64] | None = None
    ) -> None:
        self._data, self._index = data, index

    def __getitem__(self, name: str) -> NDArray[Any]:
        column = self._data[name]
        return column if self._index is None else column[self._index]

    def __iter__(self) -> Any:
        return iter(self._data)

    def __len__(self) -> int:
        return len(self._data)

    @property
    def count(self) -> int:
        """Number of cases."""
        return int(self["seed"].size)

    def take(self, index: NDArray[Any]) -> "Columns":
        """Return the cases of an index or a mask."""
        rows = np.arange(self.count)[index]
        return Columns(self._data, rows if self._index is None else self._index[rows])


def columns_of(cases: Sequence[Case]) -> Columns:
    """Return cases as columns; ``frame`` numbers the frames, each of each seed by itself."""
    data: dict[str, NDArray[Any]] = {
        item.name: np.array([getattr(case, item.name) for case in cases]) for item in fields(Case)
    }
    numbers: dict[tuple[int, str], int] = {}
    data["frame"] = np.array(
        [numbers.setdefault((case.seed, case.frame_id), len(numbers)) for case in cases],
        dtype=np.int64,
    )
    return Columns(data)
