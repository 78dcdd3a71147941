"""The guide's page of evidence is what the tests compare, and enough of it."""

import csv
import re
from collections import Counter

import pytest
from tests.evidence.__main__ import PAGE, collect
from tests.evidence.catalogue import CHECKS, NO_PRINT, PUBLISHED, TOPICS, Check
from tests.evidence.page import counts, page_text
from tests.evidence.recorder import Evidence

LEAST_PRINTED, LEAST_PUBLICATIONS = 25, 12
NUMBER = re.compile(r"[+-]?\d+(?:\.\d+)?(?:e[+-]?\d+)?")


@pytest.fixture(scope="module")
def collected():
    return collect()


def rows_of(page: str) -> Counter[tuple[str, str]]:
    """Return heading and first two cells of every row of every table."""
    return Counter((heading, cells[0] + cells[1]) for heading, cells in cells_of(page))


def cells_of(page: str) -> list[tuple[str, list[str]]]:
    heading, found = "", []
    for line in page.splitlines():
        if line.startswith("#"):
            heading = line
        elif line.startswith("|"):
            found.append((heading, [cell.strip() for cell in line.strip("|").split(" | ")]))
    return found


def close(one: str, other: str) -> bool:
    """Whether two cells say the same words and nearly the same numbers."""
    if NUMBER.sub("#", one) != NUMBER.sub("#", other):
        return False
    pairs = zip(NUMBER.findall(one), NUMBER.findall(other), strict=True)
    # the last of two digits shown, and what another version of a library may move
    return all(
        float(a) == pytest.approx(float(b), rel=0.06, abs=0.002 if "%" in one else 0)
        for a, b in pairs
    )


@pytest.mark.slow
class TestPage:
    def test_counts_are_those_of_a_fresh_collection(self, collected):
        shipped = PAGE.read_text(encoding="utf-8")
        fresh = page_text(collected)
        advice = "run python -m tests.evidence --write"
        assert rows_of(shipped) == rows_of(fresh), advice
        first = [cells for heading, cells in cells_of(shipped) if heading == "# Evidence"]
        assert first == [cells for heading, cells in cells_of(fresh) if heading == "# Evidence"]

    def test_numbers_are_those_of_a_fresh_collection(self, collected):
        # rows by name, since what is nearly equal may change places
        shipped = sorted(cells_of(PAGE.read_text(encoding="utf-8")))
        fresh = sorted(cells_of(page_text(collected)))
        changed = [
            (old, new)
            for (_, before), (_, after) in zip(shipped, fresh, strict=True)
            for old, new in zip(before, after, strict=True)
            if not close(old, new)
        ]
        assert changed == [], "run python -m tests.evidence --write"

    def test_enough_print_from_enough_publications(self, collected):
        number = counts(collected)
        assert number["printed"] >= LEAST_PRINTED
        assert number["publications"] >= LEAST_PUBLICATIONS

    def test_every_topic_has_print_or_a_reason(self, collected):
        without = {t for t in TOPICS if not any(x.counts for x in collected.of_topic(t))}
        assert without == set(NO_PRINT)

    def test_all_was_within_what_is_allowed(self, collected):
        over = [
            record
            for line in collected.lines
            for record in (*line.compared, *line.recomputations)
            if not record.share <= 1 + 1e-12
        ]
        assert over == []


def quoted(check: Check) -> bool:
    return "from memory" in check.provenance.replace("2898 row from memory", "")


@pytest.mark.parametrize("check", [c for c in CHECKS.values() if c.kind == "published"],
                         ids=lambda check: check.id)  # fmt: skip
def test_what_is_said_of_print_is_what_its_rows_say(check):
    assert (check.basis == "memory") == quoted(check)
    if check.basis == "seen":
        assert "seen" in check.provenance


@pytest.mark.parametrize("path", sorted(PUBLISHED.glob("*.csv")), ids=lambda path: path.name)
def test_every_published_table_is_in_the_catalogue(path):
    with path.open(encoding="utf-8", newline="") as file:
        names = next(csv.reader(file))
    assert {"source", "provenance"} <= set(names)
    assert path.name in {check.file for check in CHECKS.values()}


class TestFixture:
    CHECK = "ht_cylinder"

    def test_agreement_is_asserted_and_kept(self):
        kept = Evidence()
        kept(self.CHECK, "a", [1.0, 2.02, 3.0], [1.0, 2.0, 3.0], unit="m", rel=0.02)
        (record,) = kept.records
        assert (record.count, record.expected, record.computed) == (3, 2.0, 2.02)
        assert record.difference == pytest.approx(0.01)
        assert record.share == pytest.approx(0.5)
        assert record.allowed == "2 %"

    @pytest.mark.parametrize(
        ("found", "expected", "allowed"),
        [
            (1.03, 1.0, {"rel": 0.02}),
            (1.03, 1.0, {"abs": 0.02}),
            ([1.0, float("nan")], 1.0, {"rel": 0.02}),
            (1e-9, 0.0, {"rel": 0.5}),
            (float("inf"), 1.0, {"rel": 0.5, "abs": 9.0}),
        ],
    )
    def test_what_is_beyond_fails(self, found, expected, allowed):
        with pytest.raises(AssertionError, match="expected"):
            Evidence()(self.CHECK, "a", found, expected, **allowed)

    def test_either_tolerance_will_do(self):
        Evidence()(self.CHECK, "a", [0.001, 10.1], [0.0, 10.0], rel=0.02, abs=0.01)

    def test_a_tolerance_and_a_name_are_needed(self):
        with pytest.raises(AssertionError, match="tolerance"):
            Evidence()(self.CHECK, "a", 1.0, 1.0)
        with pytest.raises(AssertionError, match="not in tests/evidence/catalogue"):
            Evidence()("no_such_check", "a", 1.0, 1.0, rel=0.1)
        with pytest.raises(AssertionError, match="nothing to compare"):
            Evidence()(self.CHECK, "a", [], [], rel=0.1)

    @pytest.mark.parametrize("ours", [[0.9, 1.3], [1.1, 0.7], [1.0, float("nan")]])
    def test_a_ratio_outside_its_bounds_fails(self, ours):
        kept = Evidence()
        kept.spread(self.CHECK, "a", [0.9, 1.1], [1.0, 1.0], low=0.8, high=1.2)
        with pytest.raises(AssertionError, match="ratio"):
            kept.spread(self.CHECK, "a", ours, [1.0, 1.0], low=0.8, high=1.2)

    def test_what_was_seen_must_be_met_and_what_is_quoted_is_shown(self):
        kept, far = Evidence(), (self.CHECK, "a", (0.1, 0.2), 0.5, 0.1)
        kept.beside(*far, source="s", provenance="from memory")
        assert kept.records[0].share > 1
        with pytest.raises(AssertionError, match="s prints"):
            kept.beside(*far, source="s", provenance="seen: a page")
