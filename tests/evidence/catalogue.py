"""What every outside check is held against: ``catalogue.toml``, and the files it points to."""

import csv
import tomllib
from collections import Counter
from dataclasses import dataclass
from fnmatch import fnmatchcase
from pathlib import Path

HERE = Path(__file__).parent
PUBLISHED = HERE.parent / "published"

KINDS = ("published", "library", "computed", "sources")
BASES = ("seen", "memory", "exact")


@dataclass(frozen=True)
class Check:
    """One table, example, library or independent calculation.

    Attributes
    ----------
    id : str
        Name the tests use.
    title, source, provenance : str
        What it is, who printed it, how it came here.
    topic : str
        Heading of the summary.
    kind : str
        "published", "library", "computed", or "sources": several that differ, side by side.
    basis : str
        Of what is published: "seen", "memory" (quoted from it) or "exact" (by definition).
    work : str
        The publication it counts for.
    file : str
        Table in ``tests/published``, or nothing.
    note : str
        What a reader of the difference must know.
    """

    id: str
    title: str
    source: str
    provenance: str
    topic: str
    kind: str
    basis: str = ""
    work: str = ""
    file: str = ""
    note: str = ""

    def __post_init__(self) -> None:
        assert self.kind in KINDS, (self.id, self.kind)
        assert self.title, self.id
        assert self.source, self.id
        assert self.topic in TOPICS, (self.id, self.topic)
        if self.kind == "published":
            assert self.basis in BASES, (self.id, self.basis)
            assert self.work, self.id
            assert self.provenance, self.id


def _from_file(name: str, select: dict[str, str]) -> tuple[str, str]:
    """Return the sources and the provenances that the chosen rows state."""
    with (PUBLISHED / name).open(encoding="utf-8", newline="") as file:
        rows = [
            row
            for row in csv.DictReader(file)
            if all(fnmatchcase(row[key], pattern) for key, pattern in select.items())
        ]
    assert rows, f"no row of {name} has {select}"
    sources = list(dict.fromkeys(row["source"] for row in rows))
    ways = Counter(row["provenance"] for row in rows)
    if len(ways) == 1:
        return "; ".join(sources), next(iter(ways))
    parts = [f"{way} ({count} of {len(rows)} rows)" for way, count in ways.items()]
    return "; ".join(sources), "; ".join(parts)


_TABLES = tomllib.loads((HERE / "catalogue.toml").read_text(encoding="utf-8"))

TOPICS: tuple[str, ...] = tuple(_TABLES.pop("topics"))
"""Headings of the summary, in their order."""

NO_PRINT: dict[str, str] = _TABLES.pop("no_print")
"""Why a topic has no print to be checked against, by topic."""


def _check(key: str, table: dict) -> Check:
    fields = dict(table)
    select = fields.pop("select", {})
    if fields.get("file"):
        source, provenance = _from_file(fields["file"], select)
        fields.setdefault("source", source)
        fields.setdefault("provenance", provenance)
    fields.setdefault("provenance", "")
    return Check(id=key, **fields)


CHECKS: dict[str, Check] = {key: _check(key, table) for key, table in _TABLES.items()}
"""Every check by its name."""
