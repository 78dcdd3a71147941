"""Where a value stands, and the list every fault of a survey is gathered in."""

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Literal

from cladwatt.errors import Fault

__all__ = ["FaultList", "Place", "shown"]

_LONGEST_SHOWN = 80


def shown(value: object) -> str:
    """Return a value as it is shown in a message, cut where it is long."""
    if isinstance(value, bool):
        return "true" if value else "false"
    text = repr(value) if isinstance(value, (str, int, float)) else str(value)
    text = "".join(
        letter if letter.isprintable() else "\N{REPLACEMENT CHARACTER}" for letter in text
    )
    return text if len(text) <= _LONGEST_SHOWN else text[: _LONGEST_SHOWN - 3] + "..."


def _no_line(_key: str) -> int | None:
    return None


@dataclass(frozen=True)
class Place:
    """A table in a file, and what falls away with a fault in it.

    Parameters
    ----------
    path : str
        File as the user knows it.
    prefix : str
        Key path of the table, ``frame[3]``; empty for the whole file.
    line_of : callable
        Line of a key in the file, or None.
    frame_id, region_id, tag : str, optional
        As in :class:`~cladwatt.errors.Fault`.
    """

    path: str
    prefix: str = ""
    line_of: Callable[[str], int | None] = _no_line
    frame_id: str | None = None
    region_id: str | None = None
    tag: str | None = None

    def where(self, key: str) -> str:
        """Return the key path of a key here."""
        if self.prefix.startswith("feature"):
            return f"{self.prefix}: {key}" if key else self.prefix
        return ".".join(part for part in (self.prefix, key) if part)

    def concerning(self, **scope: str | None) -> "Place":
        """Return the same place with another frame, region or tag."""
        return replace(self, **scope)  # type: ignore[arg-type]


@dataclass
class FaultList:
    """Faults in the order they were found."""

    faults: list[Fault] = field(default_factory=list)

    def add(
        self,
        place: Place,
        key: str,
        found: str,
        expected: str,
        *,
        severity: Literal["error", "question"] = "error",
        line: int | None = None,
    ) -> None:
        """Add one fault at a key of a place."""
        self.faults.append(
            Fault(
                place.path,
                place.where(key),
                found,
                expected,
                line=line if line is not None else place.line_of(key),
                severity=severity,
                frame_id=place.frame_id,
                region_id=place.region_id,
                tag=place.tag,
            )
        )

    def ask(self, place: Place, key: str, found: str, expected: str) -> None:
        """Add a question."""
        self.add(place, key, found, expected, severity="question")

    @property
    def errors(self) -> int:
        """Number of faults that are more than questions."""
        return sum(fault.severity == "error" for fault in self.faults)

    def stopping(self) -> tuple[Fault, ...]:
        """Return the errors that concern the survey as a whole."""
        return tuple(
            fault
            for fault in self.faults
            if fault.severity == "error"
            and fault.frame_id is None
            and fault.region_id is None
            and fault.tag is None
        )
