"""``python -m tests.calibration``: draw surveys, assess them, count."""

import argparse
import sys
import time
from collections.abc import Sequence
from pathlib import Path

from tests.calibration.cases import Case, columns_of
from tests.calibration.page import Run, page_text
from tests.calibration.picture import picture
from tests.calibration.summary import Summary, summarise
from tests.calibration.surveys import assessed
from tests.calibration.tables import tables_of
from tests.calibration.totals import TotalCase, totals_table
from tests.calibration.wording import plain_table

from cladwatt.results.assessment import Settings

GUIDE = Path(__file__).parent.parent.parent / "src/cladwatt/guide"
FIRST_REPORTED_SEED = 5000
QUICK_SEEDS = 4


def seed_range(text: str) -> range:
    """Return the seeds of ``first:end``, the end left out."""
    first, _, end = text.partition(":")
    if not (first.isdigit() and end.isdigit() and int(first) < int(end)):
        raise argparse.ArgumentTypeError(
            f"{text!r} is no range of seeds; expected FIRST:END, whole numbers, FIRST below END"
        )
    return range(int(first), int(end))


def worker_count(text: str) -> int:
    """Return a number of processes."""
    if not (text.isdigit() and int(text) > 0):
        raise argparse.ArgumentTypeError(f"{text!r} is no number of processes; expected 1 or more")
    return int(text)


def build_parser() -> argparse.ArgumentParser:
    """Return the parser of the command line."""
    parser = argparse.ArgumentParser(
        prog="python -m tests.calibration",
        description="Draw surveys of the sample plant, assess them and count how the results fare "
        "against the truth. Seeds 1000 to 1999 are for development, 5000 and above are reported.",
    )
    parser.add_argument("--seeds", type=seed_range, default=range(5000, 5050), metavar="FIRST:END",
                        help="seeds to draw, END left out (default 5000:5050)")  # fmt: skip
    parser.add_argument("--quick", action="store_true",
                        help=f"only the first {QUICK_SEEDS} of the seeds")  # fmt: skip
    parser.add_argument("--workers", type=worker_count, default=1, metavar="N",
                        help="processes over seeds; the numbers do not depend on it")  # fmt: skip
    parser.add_argument("--keep", type=Path, metavar="DIR",
                        help="keep the surveys there, one folder a seed, and take them from there "
                        "next time; empty it when the generator changes")  # fmt: skip
    parser.add_argument("--oracle", action="store_true",
                        help="assess once more with every declared input true")  # fmt: skip
    parser.add_argument("--write", action="store_true",
                        help="write the guide's page and picture; reported seeds only")  # fmt: skip
    return parser


def write_page(
    summary: Summary, run: Run, guide: Path = GUIDE, totals: Sequence[TotalCase] = ()
) -> None:
    """Write page and picture into the guide."""
    (guide / "images").mkdir(parents=True, exist_ok=True)
    (guide / "calibration.md").write_bytes(page_text(summary, run, totals).encode())
    (guide / "images" / "calibration.svg").write_bytes(picture(summary).encode())


def main(arguments: list[str] | None = None) -> int:
    """Run the bench; return the exit code."""
    parser = build_parser()
    options = parser.parse_args(arguments)
    seeds = options.seeds[:QUICK_SEEDS] if options.quick else options.seeds
    if options.write and seeds[0] < FIRST_REPORTED_SEED:
        parser.error(f"--write reports seeds from {FIRST_REPORTED_SEED} on; found {seeds[0]}")
    if options.keep is not None:
        options.keep.mkdir(parents=True, exist_ok=True)
    started = time.perf_counter()
    cases: list[Case] = []
    left_out: list[str] = []
    totals: list[TotalCase] = []
    results = assessed(seeds, workers=options.workers, keep=options.keep, oracle=options.oracle)
    for done, result in enumerate(results, start=1):
        cases.extend(result.cases)
        left_out.extend(result.left_out)
        totals.extend(result.totals)
        print(
            f"seed {result.seed}  {done}/{len(seeds)}  {len(result.cases)} regions  drawn in "
            f"{result.seconds_drawing:.1f} s, assessed in {result.seconds_assessing:.1f} s",
            file=sys.stderr,
        )
    if not cases:
        print("no region came to a loss; nothing to count", file=sys.stderr)
        return 1
    summary = summarise(columns_of(cases))
    print(f"{summary.seeds} surveys, {summary.frames} frames, {summary.regions} regions")
    if left_out:
        print("without a loss: " + ", ".join(left_out))
    for table in [*tables_of(summary), totals_table(totals)]:
        print(f"\n{table.title}\n\n{plain_table(table.header, table.rows)}")
        if table.note:
            print(table.note.replace("\\*", "*"))
    if options.write:
        write_page(
            summary, Run(seeds[0], seeds[-1], Settings().draws, len(left_out)), totals=totals
        )  # fmt: skip
    print(f"\n{time.perf_counter() - started:.0f} s in all", file=sys.stderr)
    return 0


if __name__ == "__main__":
    sys.exit(main())
