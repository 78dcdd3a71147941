"""One seed: draw its survey, assess it, and join what was found with what is true."""

import csv
import json
import tempfile
import time
from collections.abc import Iterator
from concurrent.futures import ProcessPoolExecutor
from contextlib import contextmanager
from dataclasses import dataclass, replace
from functools import partial
from multiprocessing import get_context
from pathlib import Path
from typing import Any

import numpy as np
from tests.calibration.baselines import declared_losses, spreadsheet_extreme, spreadsheet_loss
from tests.calibration.cases import LOCAL_KINDS, Case
from tests.calibration.counting import longest_run, overlap_of
from tests.calibration.kinds import drop_shown, kind_scores
from tests.calibration.oracle import with_true_inputs
from tests.calibration.totals import TotalCase, total_cases
from tests.calibration.variants import PLAIN, VARIANTS

from cladwatt.assess import assess
from cladwatt.results.assessment import RegionResult, Settings
from cladwatt.survey.frame import read_frame
from cladwatt.survey.survey import Survey
from cladwatt.survey.survey_file import read_survey
from cladwatt.synthetic.sample import SampleOptions, write_sample
from cladwatt.types import FloatArray

__all__ = ["SurveyCases", "assessed", "survey_cases"]

MATTERS_ABOVE = 1.25
"""Times the sound loss."""
LONG_STRETCH = 0.2
"""Longer stretches are judged by their overlap, shorter ones by their centre. [m]"""
CENTRE_WITHIN = 0.05
"""[m]"""
CENTRE_WITHIN_PX = 3.0
FOUND_ABOVE = 0.5
"""Probability from which a stretch counts as found, a region as damaged."""


@dataclass(frozen=True)
class SurveyCases:
    """What one seed came to."""

    seed: int
    cases: tuple[Case, ...]
    left_out: tuple[str, ...]
    """Regions with a truth but without a loss."""
    seconds_drawing: float
    seconds_assessing: float
    totals: tuple[TotalCase, ...] = ()


@contextmanager
def _survey_folder(seed: int, keep: Path | None, variant: str) -> Iterator[tuple[Path, float]]:
    """Give a folder with the survey of a seed, and how long drawing it took."""
    started = time.perf_counter()
    options = VARIANTS[variant].options
    if keep is None:
        with tempfile.TemporaryDirectory(prefix="calibration-") as work:
            folder = Path(work) / str(seed)
            write_sample(folder, seed, options)
            yield folder, time.perf_counter() - started
        return
    # what is drawn otherwise is kept apart
    folder = (keep if options == SampleOptions() else keep / variant) / str(seed)
    if not (folder / "survey.toml").exists():
        write_sample(folder, seed, options)
    yield folder, time.perf_counter() - started


def survey_cases(
    seed: int, *, keep: Path | None = None, oracle: bool = False, variant: str = PLAIN
) -> SurveyCases:
    """Draw the survey of a seed, or take the kept one, assess it and join it with its truth.

    Parameters
    ----------
    seed : int
    keep : Path, optional
        Folder of surveys by seed; what is missing is written there.
    oracle : bool
        Assess once more from the true inputs.
    variant : str
        A key of `VARIANTS`: how it is drawn, and what the estimator is given.
    """
    with _survey_folder(seed, keep, variant) as (folder, seconds_drawing):
        truth = json.loads((folder / "truth" / "truth.json").read_text(encoding="utf-8"))
        stations = _station_truth(folder / "truth" / "truth_stations.csv")
        survey = read_survey(folder)
        started = time.perf_counter()
        assessment = assess(VARIANTS[variant].given(survey, truth), settings=Settings())
        found = {region.region_id: region for region in assessment.regions}
        seconds = time.perf_counter() - started
        plain = _spreadsheet(survey)
        best = _found(with_true_inputs(survey, truth)) if oracle else {}
    cases, left_out = [], []
    for true in truth["regions"]:
        name = true["region_id"]
        result = found.get(name)
        if result is None or result.heat_loss is None or result.probability_damaged is None:
            left_out.append(f"{seed}/{name}")
            continue
        case = _case(seed, survey, truth, true, result, stations[name], plain[name])
        cases.append(_with_oracle(case, best.get(name)))
    true_totals = {
        true["region_id"]: true["heat_loss_W_per_m"] * _true_length(true, stations)
        for true in truth["regions"]
    }
    totals = total_cases(seed, assessment, true_totals)
    return SurveyCases(seed, tuple(cases), tuple(left_out), seconds_drawing, seconds, totals)


def assessed(
    seeds: range,
    *,
    workers: int = 1,
    keep: Path | None = None,
    oracle: bool = False,
    variant: str = PLAIN,
) -> Iterator[SurveyCases]:
    """Yield what each seed came to, in order; the same whatever the number of workers."""
    one = partial(survey_cases, keep=keep, oracle=oracle, variant=variant)
    if workers == 1:
        yield from map(one, seeds)
        return
    with ProcessPoolExecutor(workers, mp_context=get_context("spawn")) as pool:
        yield from pool.map(one, seeds)


def _true_length(true: dict[str, Any], stations: dict[str, "StationTruth"]) -> float:
    """Return the drawn length without components. [m]"""
    component = float(stations[true["region_id"]].component.mean())
    return float(true["length_m"] * (1 - component))


def _found(survey: Survey) -> dict[str, RegionResult]:
    return {region.region_id: region for region in assess(survey, settings=Settings()).regions}


def _spreadsheet(survey: Survey) -> dict[str, tuple[float, float]]:
    """Return loss and corrected hottest pixel of each region by a spreadsheet."""
    found = {}
    for entry in survey.frames:
        frame = read_frame(entry, root=survey.root)
        regions = survey.regions_of(entry.id)
        for region in regions:
            if region.role == "pipe":
                found[region.id] = (
                    spreadsheet_loss(survey, entry, frame, region, regions),
                    spreadsheet_extreme(survey, entry, frame, region, regions),
                )
    return found


@dataclass(frozen=True)
class StationTruth:
    """Along one drawn pipe."""

    station: FloatArray
    heat_loss: FloatArray
    component: FloatArray


def _station_truth(path: Path) -> dict[str, StationTruth]:
    with path.open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    names = list(dict.fromkeys(row["region_id"] for row in rows))
    wanted = ("station_m", "heat_loss_W_per_m", "component")
    return {
        name: StationTruth(
            *(np.array([float(r[key]) for r in rows if r["region_id"] == name]) for key in wanted)
        )
        for name in names
    }


def _case(
    seed: int, survey: Survey, truth: dict[str, Any], true: dict[str, Any],
    result: RegionResult, stations: StationTruth, spreadsheet: tuple[float, float],
) -> Case:  # fmt: skip
    assert result.heat_loss is not None
    assert result.sound_loss is not None
    assert result.probability_damaged is not None
    nan = float("nan")
    line = survey.lines[true["tag"]]
    conditions = survey.frame(true["frame_id"]).conditions
    quarter, three_quarters = np.nanquantile(result.draws["heat_loss"], [0.25, 0.75])
    ratio = true["heat_loss_W_per_m"] / true["sound_loss_W_per_m"]
    specified, as_specified = declared_losses(line, conditions)
    matters = _matters(true, truth["lines"][true["tag"]], stations)
    drawn = next(one for one in survey.regions_of(true["frame_id"]) if one.id == true["region_id"])
    overlap, offset = _stretch_scores(true, result, matters, drawn.origin)
    shown = drop_shown(spreadsheet[1], line, conditions)
    kinds = kind_scores(true["kind"], result.kinds, shown)
    return Case(
        seed=seed,
        frame_id=true["frame_id"],
        region_id=true["region_id"],
        kind=true["kind"],
        damaged=true["damaged"],
        indoors=conditions.indoors is not False,
        chilled=result.gain,
        sun=bool(conditions.sun_on_pipe),
        emissivity=line.cladding.band_emissivity.value,
        true_loss=true["heat_loss_W_per_m"],
        true_sound=true["sound_loss_W_per_m"],
        true_length=_true_length(true, {true["region_id"]: stations}),
        matters=matters,
        aged_ratio=ratio if true["kind"] == "aged" else 1.0,
        loss=result.heat_loss.median,
        loss_low=result.heat_loss.low,
        loss_high=result.heat_loss.high,
        loss_q25=float(quarter),
        loss_q75=float(three_quarters),
        sound=result.sound_loss.median,
        sound_low=result.sound_loss.low,
        sound_high=result.sound_loss.high,
        length=result.length.median,
        length_low=result.length.low,
        length_high=result.length.high,
        probability=result.probability_damaged,
        verdict=result.verdict.level,
        image=nan if result.image_loss is None else result.image_loss.median,
        image_low=nan if result.image_loss is None else result.image_loss.low,
        image_high=nan if result.image_loss is None else result.image_loss.high,
        specified=specified,
        as_specified=as_specified,
        spreadsheet=spreadsheet[0],
        long_overlap=overlap,
        short_offset=offset,
        kind_true=kinds.true,
        kind_prior=kinds.prior,
        kind_thresholds=kinds.thresholds,
        kind_top=kinds.top,
        kind_right=kinds.right,
    )


def _with_oracle(case: Case, best: RegionResult | None) -> Case:
    if best is None or best.heat_loss is None or best.probability_damaged is None:
        return case
    return replace(
        case,
        oracle=best.heat_loss.median,
        oracle_low=best.heat_loss.low,
        oracle_high=best.heat_loss.high,
        oracle_probability=best.probability_damaged,
    )


def _matters(true: dict[str, Any], line: dict[str, float], stations: StationTruth) -> bool:
    """Whether local damage raises the loss by more than 25 % over more than one diameter."""
    if true["kind"] not in LOCAL_KINDS:
        return False
    raised = (
        np.abs(stations.heat_loss) > MATTERS_ABOVE * abs(true["sound_loss_W_per_m"])
    ) & (stations.component == 0)  # fmt: skip
    damaged = np.zeros(raised.size, dtype=bool)
    for stretch in true["stretches"]:
        damaged |= (stations.station >= stretch["start_m"]) & (
            stations.station <= stretch["end_m"]
        )  # fmt: skip
    cell = float(np.median(np.diff(stations.station)))
    diameter = (line["pipe_outside_diameter_mm"] + 2 * line["lagging_thickness_mm"]) / 1000
    return longest_run(raised, damaged) * cell > diameter


def _stretch_scores(
    true: dict[str, Any], result: RegionResult, matters: bool, origin: float
) -> tuple[float, float]:
    """Return the overlap of a long stretch that matters, the relative offset of a short one."""
    nan = float("nan")
    if not true["stretches"]:
        return nan, nan
    real = (true["stretches"][0]["start_m"], true["stretches"][0]["end_m"])
    found = [
        (stretch.start.median - origin, stretch.end.median - origin)
        for stretch in result.stretches
        if stretch.probability > FOUND_ABOVE
    ]
    if real[1] - real[0] > LONG_STRETCH:
        best = max((overlap_of(real, one) for one in found), default=0.0)
        return (best if matters else nan), nan
    middle = sum(real) / 2
    apart = min((abs(sum(one) / 2 - middle) for one in found), default=float("inf"))
    return nan, apart / max(CENTRE_WITHIN, CENTRE_WITHIN_PX * _metres_per_pixel(result))


def _metres_per_pixel(result: RegionResult) -> float:
    stations = result.stations
    step = np.hypot(np.diff(stations.x), np.diff(stations.y))
    return float(np.nanmedian(np.abs(np.diff(stations.station)) / step))
