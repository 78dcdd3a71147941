"""``python -m tests.evidence``: run what is checked against the outside, show it or write it."""

import argparse
import re
import subprocess
import sys
import tempfile
from pathlib import Path

from tests.evidence.page import SHOWN, counts, difference, page_text
from tests.evidence.recorder import read_records
from tests.evidence.summary import Evidence, summarise

CLONE = Path(__file__).parents[2]
PAGE = CLONE / "src/cladwatt/guide/evidence.md"


def collect() -> Evidence:
    """Run the tests that use the fixture, by themselves, and gather what they recorded."""
    files = [
        str(path.relative_to(CLONE))
        for path in sorted((CLONE / "tests").rglob("test_*.py"))
        if re.search(r"\bevidence\b", path.read_text(encoding="utf-8"))
    ]
    with tempfile.TemporaryDirectory() as folder:
        command = [sys.executable, "-m", "pytest", "-q", "-n", "0", "-p", "no:cacheprovider",
                   "--evidence", folder, *files]  # fmt: skip
        done = subprocess.run(command, cwd=CLONE, capture_output=True, text=True, check=False)
        if done.returncode != 0:
            raise RuntimeError(f"a check fails, so there is nothing to show\n{done.stdout[-4000:]}")
        return summarise(read_records(Path(folder)))


def main(arguments: list[str] | None = None) -> int:
    """Run the command."""
    parser = argparse.ArgumentParser(
        prog="python -m tests.evidence",
        description="Run every check against print, libraries and independent calculations, and "
        "print what they add up to, worst first.",
    )
    parser.add_argument("--write", action="store_true", help=f"write {PAGE.relative_to(CLONE)}")
    options = parser.parse_args(arguments)
    try:
        evidence = collect()
    except RuntimeError as error:
        print(error, file=sys.stderr)
        return 1
    if options.write:
        PAGE.write_text(page_text(evidence), encoding="utf-8", newline="\n")
    for words, count in counts(evidence).items():
        print(f"{words:20s} {count}")
    print(f"\nThe {SHOWN} largest differences:")
    for line in evidence.worst[:SHOWN]:
        print(f"  {difference(line.worst):>9s}  {line.check.title}: {line.worst.what}")
    return 0


if __name__ == "__main__":
    sys.exit(main())
