"""The guide's page of evidence, from what was collected."""

from collections import Counter

from tests.evidence.catalogue import NO_PRINT, TOPICS
from tests.evidence.recorder import Record
from tests.evidence.summary import Evidence, Line

SHOWN = 20

HEAD = """\
# Evidence

Every check of the program against the outside: print, other people's libraries, and independent
calculations. The page is made from the tests (`python -m tests.evidence --write`): each line is
what a test compared and the tolerance it asserted, and `tests/test_evidence_page.py` compares this
page with a fresh collection.

- **Printed** is a table, a worked example or a figure of a publication. A table counts once,
  however many of its rows are compared, and so does an example.
- **seen**: the number was read in a document or a copy of it. **exact**: it holds by
  definition. **memory ↻**: it is quoted from memory, and a calculation without any code of the
  program gives it too (last column of the last table); only then does it count. **memory, not
  counted**: nobody has recomputed it.
- **Difference** is ours minus theirs over theirs, of the worst value. Temperatures held to so many
  kelvin show kelvins, and are ranked over 30 K. **Allowed** is what the test asserts, of theirs
  where it is a percentage, or bounds of ours over theirs. **Used** is the largest share of what is
  allowed.
- A few kinds of line need care: *one correlation against an older one* and *makes differ* bear no
  tight check, and what disagrees among the sources themselves is shown, not averaged away.

Nothing here says how well intervals hold the truth; that is counted on simulated surveys
(`python -m tests.calibration`).
"""


def page_text(evidence: Evidence) -> str:
    """Return the page."""
    published = evidence.of_kind("published")
    parts = [
        HEAD,
        _counts(evidence),
        "## By topic\n\n" + _topics(evidence),
        f"## The {SHOWN} largest differences\n\n" + _table(evidence.worst[:SHOWN]),
        "## Where sources disagree\n\n" + _disagreements(evidence),
        "## Printed tables and examples\n\n" + _table(published),
        "## Libraries\n\n" + _table(evidence.of_kind("library")),
        "## Independent calculations, not printed\n\n"
        "Exact or model calculations made outside the program, and comparisons of one published "
        "rule with another.\n\n" + _table(evidence.of_kind("computed")),
        "## Publications\n\n" + _works(evidence),
        "## Where each came from\n\n"
        "By the name the tests use. *Recomputed* says by what, and the largest difference to the "
        "print.\n\n" + _provenance(published + evidence.of_kind("computed")),
    ]
    return "\n".join(parts)


def counts(evidence: Evidence) -> dict[str, int]:
    """Return the numbers of the page's first paragraph."""
    lines = Counter(line.check.basis for line in evidence.counted)
    return {
        "printed": len(evidence.counted),
        "publications": len(evidence.works),
        "seen": lines["seen"],
        "exact": lines["exact"],
        "recomputed": lines["memory"],
        "not counted": len(evidence.of_kind("published")) - len(evidence.counted),
        "libraries": len(_programs(evidence.of_kind("library"))),
        "library comparisons": len(evidence.of_kind("library")),
        "calculations": len(evidence.of_kind("computed")),
        "values": evidence.values,
    }


def _programs(lines: list[Line]) -> list[str]:
    return sorted({line.check.source.split(" (")[0].split(",")[0] for line in lines})


def _counts(evidence: Evidence) -> str:
    number = counts(evidence)
    rows = [
        ("printed tables and examples that count", number["printed"]),
        ("publications they come from", number["publications"]),
        ("of them seen", number["seen"]),
        ("of them exact by definition", number["exact"]),
        ("of them quoted from memory and recomputed", number["recomputed"]),
        ("quoted from memory, not recomputed, not counted", number["not counted"]),
        ("comparisons with libraries", number["library comparisons"]),
        ("libraries and programs", number["libraries"]),
        ("independent calculations", number["calculations"]),
        ("values compared in all", number["values"]),
    ]
    return "| | |\n| --- | --- |\n" + "".join(f"| {words} | {count} |\n" for words, count in rows)


def _topics(evidence: Evidence) -> str:
    text = "| topic | printed | publications | libraries | calculations | values | largest |\n"
    text += "| --- | --- | --- | --- | --- | --- | --- |\n"
    missing = []
    for topic in TOPICS:
        lines = evidence.of_topic(topic)
        counted = [line for line in lines if line.counts]
        kinds = Counter(line.check.kind for line in lines)
        worst = max(counted, key=lambda line: abs(line.worst.difference), default=None)
        largest = "" if worst is None else difference(worst.worst)
        works = len({line.check.work for line in counted})
        text += _row(topic, len(counted), works, kinds["library"], kinds["computed"],
                     sum(line.count for line in lines), largest)  # fmt: skip
        if not counted:
            missing.append(f"- {topic}: {NO_PRINT[topic]}\n")
    if missing:
        text += "\nWithout print:\n\n" + "".join(missing)
    return text


def _table(lines: list[Line]) -> str:
    names = ("check", "source", "known", "values", "worst", "theirs", "ours", "difference",
             "allowed", "used")  # fmt: skip
    text = _row(*names) + _row(*["---"] * len(names))
    for line in lines:
        worst = line.worst
        check = line.check
        title = f"{check.title} *({check.note})*" if check.note else check.title
        known = line.basis if check.kind == "published" else check.kind
        text += _row(title, check.source, known, line.count, worst.what,
                     number(worst.expected, worst.unit), number(worst.computed, worst.unit),
                     difference(worst), worst.allowed, f"{100 * line.closest:.0f} %")  # fmt: skip
    return text


def _disagreements(evidence: Evidence) -> str:
    lines = [line for line in evidence.worst if line.disagrees]
    text = "Ours, or one published rule, over another:\n\n"
    text += "| check | source | compared | values | theirs | ours | difference | allowed |\n"
    text += "| --- | --- | --- | --- | --- | --- | --- | --- |\n"
    for line in lines:
        spreads = [r for r in line.compared if r.role == "spread"] or [line.worst]
        for record in spreads:
            text += _row(line.check.title, line.check.source, record.what, record.count,
                         number(record.expected, record.unit),
                         number(record.computed, record.unit), difference(record),
                         record.allowed)  # fmt: skip
    text += "\nSeveral sources, and what the program takes where nothing is declared:\n\n"
    text += "| of | source | prints | the program's | within its 95 % interval |\n"
    text += "| --- | --- | --- | --- | --- |\n"
    for line in evidence.of_kind("sources"):
        for record in line.records:
            met = "yes" if record.share <= 1 else "no"
            text += _row(f"{line.check.title}: {record.what}", record.by,
                         f"{record.allowed} {record.unit}".strip(),
                         number(record.computed, record.unit), met)  # fmt: skip
    return text


def _works(evidence: Evidence) -> str:
    text = "| publication | tables and examples |\n| --- | --- |\n"
    return text + "".join(_row(work, count) for work, count in sorted(evidence.works.items()))


def _provenance(lines: list[Line]) -> str:
    text = "| name | check | provenance | recomputed |\n| --- | --- | --- | --- |\n"
    for line in sorted(lines, key=lambda line: line.check.id):
        again = line.recomputations
        words = ""
        if again:
            worst = max(again, key=lambda record: abs(record.difference))
            names = ", ".join(dict.fromkeys(record.by for record in again))
            words = f"{names}: {difference(worst)}"
        text += _row(f"`{line.check.id}`", line.check.title, line.check.provenance, words)
    return text


def _row(*cells: object) -> str:
    return (
        "| " + " | ".join(str(cell).replace("|", "/").replace("\n", " ") for cell in cells) + " |\n"
    )


def number(value: float, unit: str) -> str:
    """Return a value with its unit, to six digits."""
    return f"{value:.6g} {unit}".strip()


def difference(record: Record) -> str:
    """Return ours minus theirs as it is shown."""
    if record.difference == 0:
        return "0"
    if record.unit == "K" and "%" not in record.allowed and record.role != "spread":
        return f"{record.computed - record.expected:+.2g} K"
    percent = 100 * record.difference
    return f"{percent:+.1f} %" if abs(percent) >= 10 else f"{percent:+.2g} %"
