"""``python -m tests.calibration``: draw surveys, assess them, count."""

import argparse
import sys
import time
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

from tests.calibration.cases import columns_of
from tests.calibration.otherwise import cases_of, otherwise_table
from tests.calibration.page import OtherRun, Run, page_text
from tests.calibration.picture import picture
from tests.calibration.pieces import code_state, joined_with_oracle, keep_piece, kept_pieces
from tests.calibration.summary import Summary, summarise
from tests.calibration.surveys import SurveyCases, assessed
from tests.calibration.tables import Table, tables_of
from tests.calibration.totals import TotalCase, totals_table
from tests.calibration.variants import ORACLE, PLAIN, VARIANTS
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
    parser.add_argument("--seeds", type=seed_range, metavar="FIRST:END",
                        help="seeds to draw, END left out (default: the page's)")  # fmt: skip
    parser.add_argument("--variant", choices=VARIANTS, default=PLAIN,
                        help="what is otherwise than in the main run; oracle is the estimator "
                        "given every declared input's true value")  # fmt: skip
    parser.add_argument("--quick", action="store_true",
                        help=f"only the first {QUICK_SEEDS} of the seeds")  # fmt: skip
    parser.add_argument("--workers", type=worker_count, default=1, metavar="N",
                        help="processes over seeds; the numbers do not depend on it")  # fmt: skip
    parser.add_argument("--keep", type=Path, metavar="DIR",
                        help="keep the surveys there, one folder a seed, and take them from there "
                        "next time; empty it when the generator changes. What each run came "
                        "to is kept there too, in counted/")  # fmt: skip
    parser.add_argument("--oracle", action="store_true",
                        help="assess once more with every declared input true")  # fmt: skip
    parser.add_argument("--write", action="store_true",
                        help="write the guide's page and picture, with --keep from all runs kept "
                        "there by the present code; reported seeds only")  # fmt: skip
    parser.add_argument("--only-write", action="store_true",
                        help="the same, and run nothing before")  # fmt: skip
    return parser


def write_page(
    summary: Summary,
    run: Run,
    guide: Path = GUIDE,
    totals: Sequence[TotalCase] = (),
    others: Sequence[OtherRun] = (),
    otherwise: Table | None = None,
) -> None:
    """Write page and picture into the guide."""
    text = page_text(summary, run, totals, others, otherwise)
    (guide / "images").mkdir(parents=True, exist_ok=True)
    (guide / "calibration.md").write_bytes(text.encode())
    (guide / "images" / "calibration.svg").write_bytes(picture(summary).encode())


def write_from(pieces: Mapping[str, Sequence[SurveyCases]], guide: Path = GUIDE) -> None:
    """Write the guide's page from all runs at hand.

    Raises
    ------
    ValueError
        If the main run is not among them, a seed of development is, or one in between is not.
    """
    early = [run.seed for runs in pieces.values() for run in runs
             if run.seed < FIRST_REPORTED_SEED]  # fmt: skip
    if early:
        raise ValueError(f"the page reports seeds from {FIRST_REPORTED_SEED} on; found {early[0]}")
    main_run = pieces.get(PLAIN, ())
    if not cases_of(main_run):
        raise ValueError("the page needs the main run; found none that the present code counted")
    for name, runs in pieces.items():
        kept = [run.seed for run in runs]
        # the page names a run by its first and last seed
        if missing := sorted(set(range(kept[0], kept[-1] + 1)) - set(kept)):
            raise ValueError(f"{name}: seeds {kept[0]} to {kept[-1]} without {missing[0]}; run it")
    cases = joined_with_oracle(cases_of(main_run), pieces.get(ORACLE, ()))
    seeds = sorted(run.seed for run in main_run)
    others = [
        OtherRun(name, VARIANTS[name].words, runs[0].seed, runs[-1].seed)
        for name, runs in pieces.items()
        if name != PLAIN
    ]
    write_page(
        summarise(columns_of(cases)),
        Run(seeds[0], seeds[-1], Settings().draws, sum(len(run.left_out) for run in main_run)),
        guide,
        [total for run in main_run for total in run.totals],
        others,
        otherwise_table(pieces),
    )


def run_seeds(seeds: Sequence[int], results: Iterable[SurveyCases]) -> Iterable[SurveyCases]:
    """Yield the results, saying how far it is."""
    for done, result in enumerate(results, start=1):
        print(
            f"seed {result.seed}  {done}/{len(seeds)}  {len(result.cases)} regions  drawn in "
            f"{result.seconds_drawing:.1f} s, assessed in {result.seconds_assessing:.1f} s",
            file=sys.stderr,
        )
        yield result


def show(runs: Sequence[SurveyCases], others: Mapping[str, Sequence[SurveyCases]]) -> None:
    """Print every table of a run, and it beside the others."""
    cases = cases_of(runs)
    summary = summarise(columns_of(cases))
    print(f"{summary.seeds} surveys, {summary.frames} frames, {summary.regions} regions")
    if left_out := [name for run in runs for name in run.left_out]:
        print("without a loss: " + ", ".join(left_out))
    tables = [*tables_of(summary), totals_table([total for run in runs for total in run.totals])]
    if (beside := otherwise_table(others)) is not None:
        tables.append(beside)
    for table in tables:
        print(f"\n{table.title}\n\n{plain_table(table.header, table.rows)}")
        if table.note:
            print(table.note.replace("\\*", "*"))


def main(arguments: list[str] | None = None) -> int:
    """Run the bench; return the exit code."""
    parser = build_parser()
    options = parser.parse_args(arguments)
    seeds = options.seeds or VARIANTS[options.variant].seeds
    seeds = seeds[:QUICK_SEEDS] if options.quick else seeds
    if options.write and seeds[0] < FIRST_REPORTED_SEED:
        parser.error(f"--write reports seeds from {FIRST_REPORTED_SEED} on; found {seeds[0]}")
    from_kept = options.only_write or (options.write and options.variant != PLAIN)
    if from_kept and options.keep is None:
        parser.error("the page is put together from what is kept; found no --keep DIR")
    started = time.perf_counter()
    code = code_state()
    runs: list[SurveyCases] = []
    if not options.only_write:
        if options.keep is not None:
            options.keep.mkdir(parents=True, exist_ok=True)
        results = assessed(
            seeds, workers=options.workers, keep=options.keep, oracle=options.oracle,
            variant=options.variant,
        )  # fmt: skip
        for result in run_seeds(seeds, results):
            runs.append(result)
            if options.keep is not None:
                keep_piece(options.keep, options.variant, result, code)
        if not cases_of(runs):
            print("no region came to a loss; nothing to count", file=sys.stderr)
            return 1
    pieces = {options.variant: runs} if options.keep is None else kept_pieces(options.keep, code)
    if runs:
        show(runs, {} if options.variant == PLAIN else pieces)
    if options.write or options.only_write:
        try:
            write_from(pieces)
        except ValueError as error:
            parser.error(str(error))
    print(f"\n{time.perf_counter() - started:.0f} s in all", file=sys.stderr)
    return 0


if __name__ == "__main__":
    sys.exit(main())
