"""``python -m tests.advice``: follow the advice on drawn surveys, and compare with the promise."""

import argparse
import json
import tempfile
from collections.abc import Iterator
from pathlib import Path
from typing import NamedTuple
from unittest import mock

import numpy as np
from tests.advice.measure import measured
from tests.calibration.__main__ import seed_range

import cladwatt.frame_assessment as assessing
from cladwatt.results.assessment import RegionResult, Settings
from cladwatt.survey.survey_file import read_survey
from cladwatt.synthetic.sample import write_sample

PAGE = Path(__file__).parents[2] / "src/cladwatt/guide/advice.md"


class Kept(NamedTuple):
    """One promise and what came of it: half widths of the loss in percent of its median."""

    seed: int
    region: str
    key: str
    now: float
    promised: float
    then: float

    @property
    def ratio(self) -> float:
        """Width found over width promised."""
        return self.then / self.promised

    @property
    def narrowing(self) -> float:
        """Narrowing found over narrowing promised."""
        return (self.now - self.then) / (self.now - self.promised)


def followed(folder: Path, seed: int, draws: int = 1000) -> Iterator[Kept]:
    """Follow every advice on a survey, one measurement at a time."""
    truth = json.loads((folder / "truth" / "truth.json").read_text(encoding="utf-8"))
    survey, settings = read_survey(folder), Settings(draws=draws)
    random = np.random.default_rng(seed)
    for entry in survey.frames:
        frame = assessing.read_frame(entry, root=survey.root)
        for found in assessing.assess_frame(survey, entry, settings).regions:
            advised = found.verdict.advice
            if advised is None or not advised.parameters:
                continue
            region = next(one for one in survey.regions if one.id == found.region_id)
            made = measured(survey, entry, region, frame, truth, advised.key, random)
            if made is None:
                continue
            again, changed, image = made
            with mock.patch.object(assessing, "read_frame", lambda *_, image=image, **__: image):
                results = assessing.assess_frame(again, changed, settings).regions
            after = next(one for one in results if one.region_id == found.region_id)
            if after.heat_loss is not None:
                yield _kept(seed, found, after)


def _kept(seed: int, before: RegionResult, after: RegionResult) -> Kept:
    assert before.verdict.advice is not None
    assert after.heat_loss is not None
    widths = dict(before.verdict.advice.parameters)
    return Kept(
        seed, before.region_id, before.verdict.advice.key.removeprefix("advice."),
        float(widths["width_now"]), float(widths["width_then"]),
        50 * after.heat_loss.relative_width,
    )  # fmt: skip


def table(kept: list[Kept]) -> str:
    """Return what came of the promises, one measurement a row."""
    heads = ("cases", "now", "promised", "found", "found / promised", "narrowing, the same")
    lines = [f"| measurement | {' | '.join(heads)} |", "| --- |" + " ---: |" * len(heads)]
    keys = sorted({one.key for one in kept})
    for name, some in [*((k, [o for o in kept if o.key == k]) for k in keys), ("all", kept)]:
        now, promised, then, ratio, narrowing = (
            np.median([getattr(one, what) for one in some])
            for what in ("now", "promised", "then", "ratio", "narrowing")
        )
        lines.append(
            f"| {name.replace('_', ' ')} | {len(some)} | ±{now:.0f} % | ±{promised:.0f} % |"
            f" ±{then:.0f} % | {ratio:.2f} | {narrowing:.2f} |"
        )
    return "\n".join(lines)


def page_of(kept: list[Kept], seeds: range) -> str:
    """Return the guide's page."""
    off = [abs(one.ratio - 1) for one in kept]
    return f"""# Promises of the advice, kept or not

Written by `python -m tests.advice --write` from a clone: the surveys of seeds {seeds.start} to
{seeds.stop - 1} are drawn, each frame is assessed by itself, and every measurement that is advised
with widths is made on the drawn frame, with its true value and the error it may have; then the
frame is assessed again. Half widths of the loss over its median; medians over the cases.

{table(kept)}

{len(kept)} promises; the width found is off the promised one by {np.median(off):.0%} in the median.
"narrowing, the same" is what the width fell by over what it was promised to fall by. Of a single
measurement it scatters: the interval also moves with what is read. Rows of few cases say little.
"""


def main() -> None:
    """Draw surveys, follow their advice, print the table."""
    parser = argparse.ArgumentParser(prog="python -m tests.advice", description=__doc__)
    parser.add_argument("--seeds", type=seed_range, default=range(1000, 1003), metavar="FIRST:END")
    parser.add_argument(
        "--keep", type=Path, metavar="DIR", help="surveys by seed, drawn if missing"
    )
    parser.add_argument("--write", action="store_true", help="write the guide's page")
    options = parser.parse_args()
    kept: list[Kept] = []
    for seed in options.seeds:
        with tempfile.TemporaryDirectory(prefix="advice-") as work:
            folder = (options.keep or Path(work)) / str(seed)
            if not (folder / "survey.toml").exists():
                write_sample(folder, seed)
            kept += followed(folder, seed)
    page = page_of(kept, options.seeds)
    if options.write:
        PAGE.write_text(page, encoding="utf-8")
    print(page)


if __name__ == "__main__":
    main()
