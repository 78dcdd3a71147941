"""A table row with the file it stands in."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import cast

from cladwatt.errors import Fault
from cladwatt.materials.rows import Confidence
from cladwatt.materials.table_text import Record

__all__ = ["Placed", "confidence_of", "source_of"]


@dataclass(frozen=True)
class Placed:
    """A record with the file it stands in and whether that file is the user's."""

    record: Record
    path: str
    is_user: bool

    def fault(self, where: str, found: str, expected: str) -> Fault:
        """Return a fault at this row."""
        return Fault(self.path, where, found, expected, self.record.line)


def source_of(placed: Placed, shorts: Mapping[str, str], column: str = "source") -> str:
    """Return the sources of a row in short words; a user's file where it names none."""
    text = placed.record.text(column)
    if not text:
        return placed.path if placed.is_user else ""
    return "; ".join(shorts.get(part.strip(), part.strip()) for part in text.split("|"))


def confidence_of(placed: Placed) -> Confidence:
    """Return the confidence of a row; what a user says without one is declared."""
    return cast(Confidence, placed.record.text("confidence") or "declared")
