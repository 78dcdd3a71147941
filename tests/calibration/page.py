"""The guide's page of the bench; every number on it comes from the run."""

from collections.abc import Sequence
from dataclasses import dataclass

from tests.calibration.aims import judged
from tests.calibration.causes import CAUSES
from tests.calibration.measures import ESTIMATORS
from tests.calibration.summary import Summary
from tests.calibration.tables import Table, tables_of
from tests.calibration.totals import TotalCase, totals_table

__all__ = ["OtherRun", "Run", "page_text"]


@dataclass(frozen=True)
class Run:
    """What was run."""

    first_seed: int
    last_seed: int
    draws: int
    left_out: int
    """Regions with a truth that came to no loss."""

    @property
    def command(self) -> str:
        """How to repeat it."""
        return f"python -m tests.calibration --seeds {self.first_seed}:{self.last_seed + 1}"


@dataclass(frozen=True)
class OtherRun:
    """A run beside the main one."""

    name: str
    words: str
    first_seed: int
    last_seed: int

    @property
    def command(self) -> str:
        """How to repeat it."""
        return (
            f"python -m tests.calibration --variant {self.name} "
            f"--seeds {self.first_seed}:{self.last_seed + 1}"
        )


_HEAD = """\
# Calibration

Are the intervals as wide as they should be, and no wider? How often is a sound pipe called damaged,
and a damaged one sound? This page counts, on surveys whose truth is known because they are
simulated. It is made from a clone by

    {command}

and every number on it comes from that run, but for those of other runs, which are listed where they
stand: {seeds} surveys, {frames} frames, {regions} regions, {draws} draws each. Regions that came
to no loss and are in no table: {left_out}.

![Reliability of the probability, and coverage by group](images/calibration.svg)

## What was simulated

Each seed draws the invented plant of the sample anew: other damage in other places, other true
values behind every declared one. The model that makes the frames is richer than the estimator:

- heat is conducted in three dimensions, along, around and through the lagging, and along the
  cladding sheet; lagging conductivity depends on temperature and scatters along the pipe;
- convection is uneven around the pipe by 10 to 20 % and off its correlation by 10 % (indoors) or
  15 % (outdoors), one sigma, partly the same in all frames;
- cladding is patchy, mirrors part of ceiling, walls, floor, sky and hot neighbours, and its
  emissivity depends on the viewing angle;
- the camera blurs, adds noise, column pattern and slow drift, has a softer band than the declared
  one, and is off within its stated accuracy;
- regions are drawn by a hand that is a pixel or two off; flanges, supports, crossing pipes and tape
  are in view;
- every declared input (air, surroundings, reflected temperature, humidity, wind, distance,
  emissivities, dimensions, conductivity, installation factor, inside temperature) is off its true
  value by a draw from its declared uncertainty;
- {damaged} of the {regions} regions are damaged, by one of eight kinds, or soaked throughout.

The hot lines are steam, condensate, hot water, oil, starch, glue and drying air, indoors and
outdoors in wind, with painted, weathered and bright cladding; others are chilled. Rarer cases are
in every survey: sun on the pipe, sun or a shower earlier in the day; cladding wet from rain, drops
and frost on cold pipes; lagging soaked or frozen throughout and declared so; tracers; a line still
warming up; a riser, a bend, wind up and down a slope; an inspection window; flanges and valves,
bare and covered; readings beyond the recording range. The estimator was developed on seeds 1000 to
1999. The seeds counted here, {first} to {last}, had no part in that but for this: two of them
had stopped the generator, which was mended; and they had been counted once before the prior of
ageing was lowered. That a region is damaged is decided at P > 0.5, fixed beforehand.

"""

_LIMITS = """\
## What is not counted here

- Other people's plants and simulators: plant, damage and scatter are ours, and known to those
  who wrote the estimator.
- Air properties, conduction curves and the emissivity against viewing angle: generator and
  estimator use the same formulas, the generator with other values. So it is with the convection
  law, but in the run with another one. They are checked against published values in the tests
  instead.
- Declared uncertainties that are themselves wrong, and blunders: every declared value is off by a
  draw from the uncertainty declared with it.
- Two damages on one pipe: each has one at most. Kinds are counted given that damage is local;
  ageing and lagging soaked throughout have no kind to be told from.
- Bands of the profile along the pipe, of resistance and surface temperature, the loss of single
  stretches, and flanges and valves on their own: estimated, and not held against the truth here.
- Rain or snow while the picture is taken.
"""


def page_text(
    summary: Summary,
    run: Run,
    totals: Sequence[TotalCase] = (),
    others: Sequence[OtherRun] = (),
    otherwise: Table | None = None,
) -> str:
    """Return the page in Markdown; `otherwise` is the table of the other runs."""
    aims, *tables = tables_of(summary)
    if totals:
        tables.append(totals_table(totals))
    damaged = summary.of("damaged", "coverage_95")
    parts = [
        _HEAD.format(
            command=run.command, seeds=summary.seeds, frames=summary.frames,
            regions=summary.regions, draws=run.draws, left_out=run.left_out,
            first=run.first_seed, last=run.last_seed,
            damaged=0 if damaged is None else damaged.group_size,
        ),
        "## What was aimed at, and what was reached\n\n",
        "Behind a number stands its 95 % band from resampling whole frames, since the regions of\n"
        "a frame share its errors. A range of coverage is met where the band overlaps it;\n"
        "elsewhere the number itself decides.\n\n",
        _markdown(aims),
        "\n",
        _shortfalls(summary),
    ]  # fmt: skip
    for table in tables:
        parts.append(f"\n## {table.title}\n\n{_markdown(table)}")
        if table.note:
            parts.append(f"\n{table.note}\n")
    absent = [each.words for each in ESTIMATORS.values() if each.words not in
              {line.words for line in summary.estimators}]  # fmt: skip
    if absent:
        parts.append(f"\nNot run this time: {'; '.join(absent)}.\n")
    if otherwise is not None:
        parts.append(f"\n## {otherwise.title}\n\n{_markdown(otherwise)}\n{otherwise.note}\n")
    if others:
        parts.append("\nOther runs on this page:\n\n")
        parts.extend(f"- {other.words}: `{other.command}`\n" for other in others)
    return "".join([*parts, "\n", _LIMITS])


def _markdown(table: Table) -> str:
    def line(cells: list[str]) -> str:
        return "| " + " | ".join(cells) + " |\n"

    rule = line(["---", *("---:" for _ in table.header[1:])])
    return line(table.header) + rule + "".join(line(row) for row in table.rows)


def _shortfalls(summary: Summary) -> str:
    """Say in sentences what was not reached."""
    lines = judged(summary)
    short = [line for line in lines if line.met is False]
    few = [line for line in lines if line.met is None]
    met = len(lines) - len(short) - len(few)
    text = f"Of {len(lines)} aims {met} are met, {len(short)} are not"
    text += f", {len(few)} could not be judged.\n" if few else ".\n"
    if short:
        text += "\nWhat falls short:\n\n"
        text += "".join(
            f"- {line.words}: {line.reached}, where {line.aim} was aimed at "
            f"({line.number} regions).\n"
            for line in short
        )
        causes = [text for words, text in CAUSES if any(x.words.startswith(words) for x in short)]
        text += "\nWhy, and what was tried:\n\n"
        text += "".join(f"- {cause}\n" for cause in dict.fromkeys(causes))
    if few:
        text += "\nToo few regions to judge: " + "; ".join(line.words for line in few) + ".\n"
    return text
