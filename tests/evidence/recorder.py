"""The fixture behind every outside check: it asserts, and keeps what it asserted."""

import json
import os
from collections.abc import Iterator
from dataclasses import asdict, dataclass
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike
from tests.evidence.catalogue import CHECKS

ROUNDING = 1e-9
"""Relative differences below this are rounding; which value is worst then says nothing."""

TEMPERATURE_SCALE = 30.0
"""A temperature held to so many kelvin is ranked over this, not over its distance from zero. [K]"""


@dataclass(frozen=True)
class Record:
    """One assertion: how many values, and the worst of them."""

    check: str
    role: str  # "check", "spread", "recomputation" or "beside"
    what: str
    unit: str
    count: int
    expected: float
    computed: float
    difference: float  # over the expected value, or the scale given if larger
    allowed: str
    share: float  # of what is allowed
    by: str = ""


class Evidence:
    """Asserts against outside values and keeps one record of each call."""

    def __init__(self) -> None:
        self.records: list[Record] = []

    def __call__(
        self,
        check: str,
        what: str,
        found: ArrayLike,
        expected: ArrayLike,
        *,
        unit: str = "",
        rel: ArrayLike | None = None,
        abs: ArrayLike | None = None,
        scale: float | None = None,
    ) -> None:
        """Assert that ours agrees with theirs.

        Allowed is `rel` times the expected value or `abs`, the larger where both are given. The
        difference is shown over the expected value, or over `scale` where that is larger: for
        values that may be zero.
        """
        self._agree("check", check, what, found, expected, unit, rel, abs, scale)

    def recomputed(
        self,
        check: str,
        what: str,
        found: ArrayLike,
        printed: ArrayLike,
        *,
        by: str,
        unit: str = "",
        rel: ArrayLike | None = None,
        abs: ArrayLike | None = None,
        scale: float | None = None,
    ) -> None:
        """Assert that a calculation without any code of the package gives what is quoted.

        `by` says what calculated: a library, or a formula written out in the test.
        """
        self._agree("recomputation", check, what, found, printed, unit, rel, abs, scale, by)

    def spread(
        self,
        check: str,
        what: str,
        found: ArrayLike,
        expected: ArrayLike,
        *,
        low: float,
        high: float,
        unit: str = "",
    ) -> None:
        """Assert that ours over theirs lies between bounds: sources that disagree."""
        ours, theirs = _pairs(found, expected)
        ratio = ours / theirs
        worst = int(np.argmax(np.abs(ratio - 1)))
        middle, half = (low + high) / 2, (high - low) / 2
        share = float(np.abs(ratio - middle).max() / half)
        words = f"ratio {low:g} to {high:g}"
        self._keep(
            Record(
                check, "spread", what, unit, ratio.size, float(theirs[worst]), float(ours[worst]),
                float(ratio[worst] - 1), words, share,
            )
        )  # fmt: skip
        assert ratio.min() >= low, f"{check}, {what}: ratio {ratio.min():g} below {low:g}"
        assert ratio.max() <= high, f"{check}, {what}: ratio {ratio.max():g} above {high:g}"

    def beside(
        self,
        check: str,
        subject: str,
        printed: tuple[float, float],
        ours: float,
        u: float,
        *,
        source: str,
        provenance: str,
        unit: str = "",
    ) -> None:
        """Put our value beside one of several sources that differ.

        What was seen must be met by our 95 % interval; what is quoted from memory is shown only.
        """
        low, high = printed
        nearest = min(max(ours, low), high)
        share = abs(ours - nearest) / (2 * u)
        words = f"{low:g}" if low == high else f"{low:g} to {high:g}"
        self._keep(
            Record(
                check, "beside", subject, unit, 1, nearest, ours, ours / nearest - 1, words, share,
                f"{source} ({provenance.split(':')[0].split(',')[0]})",
            )
        )  # fmt: skip
        if provenance.startswith("seen"):
            assert share <= 1.0, f"{subject}: {source} prints {words}; ours is {ours:g}, u {u:g}"

    def _agree(self, role, check, what, found, expected, unit, rel, absolute, scale, by=""):
        assert rel is not None or absolute is not None, "a tolerance is needed"
        ours, theirs = _pairs(found, expected)
        within = np.zeros_like(theirs)
        if rel is not None:
            within = np.maximum(within, np.abs(theirs) * np.asarray(rel, dtype=float).ravel())
        if absolute is not None:
            within = np.maximum(within, np.broadcast_to(absolute, theirs.shape).ravel())
        away = np.abs(ours - theirs)
        share = np.divide(away, within, out=np.where(away > 0, np.inf, 0.0), where=within > 0)
        over = np.maximum(np.abs(theirs), 0.0 if scale is None else scale)
        if scale is None and rel is None and unit == "K":
            over = np.minimum(over, TEMPERATURE_SCALE)
        size = np.divide(away, over, out=np.where(away > 0, np.inf, 0.0), where=over > 0)
        size[size < ROUNDING] = 0.0
        worst = int(np.argmax(size)) if size.any() else 0
        sign = 1.0 if ours[worst] >= theirs[worst] else -1.0
        self._keep(
            Record(
                check, role, what, unit, ours.size, float(theirs[worst]), float(ours[worst]),
                sign * float(size[worst]), _allowed(rel, absolute, worst, unit),
                float(share.max()) if size.any() else 0.0, by,
            )
        )  # fmt: skip
        if not np.all(away <= within):
            at = int(np.argmax(np.where(np.isnan(share), np.inf, share)))
            raise AssertionError(
                f"{check}, {what}, value {at} of {ours.size}: {ours[at]:.10g}; "
                f"expected {theirs[at]:.10g} within {within[at]:.3g} {unit}"
            )

    def _keep(self, record: Record) -> None:
        assert record.check in CHECKS, f"{record.check} is not in tests/evidence/catalogue.toml"
        self.records.append(record)


def _pairs(found: ArrayLike, expected: ArrayLike) -> tuple[np.ndarray, np.ndarray]:
    ours, theirs = np.broadcast_arrays(
        np.asarray(found, dtype=float), np.asarray(expected, dtype=float)
    )
    assert ours.size > 0, "nothing to compare"
    return ours.ravel(), theirs.ravel()


def _allowed(rel, absolute, worst: int, unit: str) -> str:
    words = []
    if rel is not None:
        relative = float(np.ravel(rel)[worst if np.size(rel) > 1 else 0])
        words.append(f"{100 * relative:.3g} %")
    if absolute is not None:
        size = float(np.ravel(absolute)[worst if np.size(absolute) > 1 else 0])
        words.append(f"{size:.3g} {unit}".strip())
    return " or ".join(words)


def write_records(records: list[Record], folder: Path) -> None:
    """Add records to this process's file; workers do not meet."""
    with (folder / f"{os.getpid()}.jsonl").open("a", encoding="utf-8") as file:
        file.writelines(json.dumps(asdict(record)) + "\n" for record in records)


def read_records(folder: Path) -> Iterator[Record]:
    """Give back what every process wrote."""
    for path in sorted(folder.glob("*.jsonl")):
        for line in path.read_text(encoding="utf-8").splitlines():
            yield Record(**json.loads(line))
