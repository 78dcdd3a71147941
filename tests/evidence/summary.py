"""What the records add up to: one line per check, and what counts."""

from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property

from tests.evidence.catalogue import CHECKS, TOPICS, Check
from tests.evidence.recorder import Record


@dataclass(frozen=True)
class Line:
    """One check and everything recorded of it."""

    check: Check
    records: tuple[Record, ...]

    @cached_property
    def compared(self) -> tuple[Record, ...]:
        """Comparisons of ours with theirs."""
        return tuple(record for record in self.records if record.role in ("check", "spread"))

    @cached_property
    def recomputations(self) -> tuple[Record, ...]:
        """Theirs, worked out again without the package."""
        return tuple(record for record in self.records if record.role == "recomputation")

    @property
    def count(self) -> int:
        """How many values were compared."""
        return sum(record.count for record in self.compared)

    @cached_property
    def worst(self) -> Record:
        """The comparison with the largest difference."""
        return max(self.compared, key=lambda record: abs(record.difference))

    @property
    def closest(self) -> float:
        """Largest share of what is allowed."""
        return max(record.share for record in self.compared)

    @property
    def counts(self) -> bool:
        """Whether it is print that counts: seen, exact, or recomputed."""
        if self.check.kind != "published" or not self.compared:
            return False
        return self.check.basis != "memory" or bool(self.recomputations)

    @property
    def disagrees(self) -> bool:
        """Whether it stands for sources that differ."""
        spread = any(record.role == "spread" for record in self.compared)
        return spread or self.check.note.startswith("sources disagree")

    @property
    def basis(self) -> str:
        """How the print is known, in a word or two."""
        if self.check.basis != "memory":
            return self.check.basis
        return "memory ↻" if self.recomputations else "memory, not counted"


@dataclass(frozen=True)
class Evidence:
    """Everything collected."""

    lines: tuple[Line, ...]

    def of_kind(self, kind: str) -> list[Line]:
        """Return the lines of a kind, largest difference first."""
        chosen = [line for line in self.lines if line.check.kind == kind]
        return sorted(chosen, key=_worst_first)

    @property
    def counted(self) -> list[Line]:
        """Printed tables and examples that count."""
        return [line for line in self.of_kind("published") if line.counts]

    @property
    def works(self) -> Counter[str]:
        """Publications, and how many of their tables and examples count."""
        return Counter(line.check.work for line in self.counted)

    @property
    def worst(self) -> list[Line]:
        """All comparisons, largest difference first."""
        lines = [line for line in self.lines if line.compared]
        return sorted(lines, key=_worst_first)

    @property
    def values(self) -> int:
        """How many values were compared."""
        return sum(line.count for line in self.lines)

    def of_topic(self, topic: str) -> list[Line]:
        """Return the lines of a topic."""
        assert topic in TOPICS
        return [line for line in self.lines if line.check.topic == topic]


def _worst_first(line: Line) -> tuple[float, str]:
    return (-round(abs(line.worst.difference), 9) if line.compared else 0.0, line.check.id)


def summarise(records: Iterable[Record]) -> Evidence:
    """Gather the records by check; a check nobody recorded is a fault."""
    gathered: dict[str, list[Record]] = {key: [] for key in CHECKS}
    for record in records:
        gathered[record.check].append(record)
    empty = [key for key, found in gathered.items() if not found]
    assert not empty, f"in the catalogue, recorded by no test: {', '.join(empty)}"
    return Evidence(tuple(Line(CHECKS[key], tuple(found)) for key, found in gathered.items()))
