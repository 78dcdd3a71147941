"""The one path every face calls: a survey in, an assessment out."""

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from concurrent.futures import Executor, ProcessPoolExecutor
from dataclasses import replace
from importlib.metadata import version
from itertools import repeat
from multiprocessing import get_context

import numpy as np
from threadpoolctl import threadpool_limits

from cladwatt.assumptions import assumptions_of
from cladwatt.errors import InputError
from cladwatt.frame_assessment import assess_frame, look_at_frame, question_remark
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.line_log import log_lines
from cladwatt.inverse.result import ComponentResult, RegionResult, interval_of
from cladwatt.inverse.survey_joint import FrameEvidence, Message, messages_between
from cladwatt.results.assessment import Assessment, FrameResult, LeftOut, LineTotal, Settings
from cladwatt.results.versions import library_versions
from cladwatt.survey.model import FrameEntry
from cladwatt.survey.survey import Survey
from cladwatt.types import FloatArray

__all__ = ["Progress", "assess", "assess_among_others", "assess_frame"]

Progress = Callable[[int, int, str], None]
"""Called with frames done, frames in all and the frame just finished."""

FEWEST_DRAWS = 40
"""With fewer no draw lies beyond the 2.5 and 97.5 percentiles."""


def assess(
    survey: Survey,
    *,
    settings: Settings | None = None,
    workers: int = 1,
    progress: Progress | None = None,
    executor: Executor | None = None,
) -> Assessment:
    """Assess a survey.

    Parameters
    ----------
    survey : Survey
        As `read_survey` gives it.
    settings : Settings, optional
        Seed and number of draws.
    workers : int
        Processes on this machine; results do not depend on it.
    progress : callable, optional
        Called as frames finish, in order.
    executor : concurrent.futures.Executor, optional
        Used instead of own processes.

    Returns
    -------
    Assessment
        A frame, region or line that could not be assessed stands in `left_out` with its reason.

    Raises
    ------
    InputError
        If there are fewer than `FEWEST_DRAWS` draws.
    """
    settings = settings or Settings()
    if settings.draws < FEWEST_DRAWS:
        raise InputError(f"draws is {settings.draws}; expected at least {FEWEST_DRAWS}")
    frames: list[FrameResult] = []
    for result in _frame_results(survey, settings, workers, executor):
        frames.append(result)
        if progress is not None:
            progress(len(frames), len(survey.frames), result.frame_id)
    return _assembled(survey, settings, tuple(frames))


def _frame_results(
    survey: Survey, settings: Settings, workers: int, executor: Executor | None
) -> Iterator[FrameResult]:
    """Yield frame results in the survey's order: every frame is looked at, then assessed."""
    entries = survey.frames
    if executor is not None:
        messages = _messages(executor.map(look_at_frame, repeat(survey), entries, repeat(settings)))
        told = [messages.get(entry.id) for entry in entries]
        yield from executor.map(assess_frame, repeat(survey), entries, repeat(settings), told)
    elif workers > 1 and len(entries) > 1:
        with ProcessPoolExecutor(
            workers, mp_context=get_context("spawn"), initializer=_keep, initargs=(survey, settings)
        ) as pool:
            messages = _messages(pool.map(_look_kept, entries))
            told = [messages.get(entry.id) for entry in entries]
            yield from pool.map(_assess_kept, entries, told)
    else:
        messages = _messages(look_at_frame(survey, entry, settings) for entry in entries)
        for entry in entries:
            yield assess_frame(survey, entry, settings, messages.get(entry.id))


def assess_among_others(survey: Survey, entry: FrameEntry, settings: Settings) -> FrameResult:
    """Assess one frame as it stands in the whole survey, all others only looked at.

    Parameters
    ----------
    survey : Survey
    entry : FrameEntry
        One of its frames.
    settings : Settings

    Returns
    -------
    FrameResult
        The same as `assess` gives for it.
    """
    messages = _messages(look_at_frame(survey, other, settings) for other in survey.frames)
    return assess_frame(survey, entry, settings, messages.get(entry.id))


def _messages(looks: Iterable[FrameEvidence | None]) -> Mapping[str, Message]:
    with threadpool_limits(limits=1, user_api="blas"):
        return messages_between([look for look in looks if look is not None])


_kept: list[tuple[Survey, Settings]] = []


def _keep(survey: Survey, settings: Settings) -> None:
    """Hand a worker the survey once instead of with every frame."""
    _kept[:] = [(survey, settings)]


def _look_kept(entry: FrameEntry) -> FrameEvidence | None:
    survey, settings = _kept[0]
    return look_at_frame(survey, entry, settings)


def _assess_kept(entry: FrameEntry, message: Message | None) -> FrameResult:
    survey, settings = _kept[0]
    return assess_frame(survey, entry, settings, message)


def _assembled(survey: Survey, settings: Settings, frames: tuple[FrameResult, ...]) -> Assessment:
    """Put frame results together, with totals that keep what regions share."""
    found = [region for frame in frames for region in frame.regions]
    logged = log_lines(found, DrawBook(settings.seed, settings.draws).normal)
    regions = [_counted_once(region, logged.counted) for region in found]
    hot = [region for region in regions if not region.gain and "total_loss" in region.draws]
    chilled = [region for region in regions if region.gain and "total_loss" in region.draws]
    known = [region for region in hot if "total_excess" in region.draws]
    losing, gaining = _losing_and_gaining(frames)
    camera = survey.camera
    return Assessment(
        survey_name=survey.name,
        place=survey.site.place,
        date="" if survey.date is None else survey.date.isoformat(),
        inspector=survey.inspector,
        version=version("cladwatt"),
        versions=library_versions(),
        settings=settings,
        inputs=_inputs(survey, frames),
        frames=frames,
        lines=_line_totals(survey, regions),
        total_loss=interval_of(_summed(hot, "total_loss")) if hot else None,
        total_gain=interval_of(-_summed(chilled, "total_loss")) if chilled else None,
        total_excess=interval_of(_summed(known, "total_excess")) if known else None,
        component_loss=interval_of(_summed(losing, "heat_loss")) if losing else None,
        component_gain=interval_of(-_summed(gaining, "heat_loss")) if gaining else None,
        left_out=_survey_left_out(survey)
        + tuple(item for frame in frames for item in frame.left_out),
        assumptions=assumptions_of(survey),
        remarks=(
            *(question_remark(f) for f in survey.faults if f.severity == "question"),
            *logged.remarks,
        ),
        logs=logged.logs,
        camera={
            "model": camera.model,
            "serial": camera.serial,
            "calibration_date": (
                "" if camera.calibration_date is None else camera.calibration_date.isoformat()
            ),
            "band_um": f"{camera.band[0] * 1e6:.4g}-{camera.band[1] * 1e6:.4g}",
        },
    )


def _counted_once(
    region: RegionResult, counted: Mapping[str, Mapping[str, FloatArray]]
) -> RegionResult:
    """Return a region for the sums: of metres that others show too with its share of them."""
    once = counted.get(region.region_id)
    return region if once is None else replace(region, draws={**region.draws, **once})


def _losing_and_gaining(
    frames: tuple[FrameResult, ...],
) -> tuple[list[ComponentResult], list[ComponentResult]]:
    """Divide the components with a number by the sign of its median."""
    known = [
        (one, one.heat_loss.median)
        for frame in frames
        for one in frame.components
        if one.heat_loss is not None and "heat_loss" in one.draws
    ]
    return [one for one, loss in known if loss >= 0], [one for one, loss in known if loss < 0]


def _summed(
    regions: Sequence[RegionResult] | Sequence[ComponentResult], quantity: str
) -> FloatArray:
    """Sum draws over regions; draw by draw, so that shared errors do not average out."""
    return np.asarray(np.sum([region.draws[quantity] for region in regions], axis=0))


def _line_totals(survey: Survey, regions: list[RegionResult]) -> tuple[LineTotal, ...]:
    totals = []
    for tag, line in survey.lines.items():
        own = [r for r in regions if r.tag == tag and "total_loss" in r.draws]
        if not own:
            continue
        with_excess = all("total_excess" in region.draws for region in own)
        totals.append(
            LineTotal(
                tag=tag,
                area=line.area,
                gain=own[0].gain,
                length=interval_of(_summed(own, "length")),
                total_loss=interval_of(_summed(own, "total_loss")),
                excess=interval_of(_summed(own, "total_excess")) if with_excess else None,
                regions=tuple(region.region_id for region in own),
            )
        )
    return tuple(totals)


def _inputs(survey: Survey, frames: tuple[FrameResult, ...]) -> tuple[tuple[str, str], ...]:
    digests = dict(survey.digests)
    paths = {entry.id: entry.path for entry in survey.frames}
    for frame in frames:
        if frame.sha256:
            path = paths[frame.frame_id]
            inside = path.is_relative_to(survey.root)
            name = path.relative_to(survey.root).as_posix() if inside else path.name
            digests[name] = frame.sha256
    return tuple(sorted(digests.items()))


def _survey_left_out(survey: Survey) -> tuple[LeftOut, ...]:
    """Return what reading the survey already left out."""
    left_out = []
    for fault in survey.faults:
        if fault.severity == "question":
            continue
        if fault.region_id is not None:
            left_out.append(LeftOut("region", fault.region_id, fault.frame_id or "", str(fault)))
        elif fault.tag is not None:
            left_out.append(LeftOut("line", fault.tag, "", str(fault)))
        else:
            left_out.append(
                LeftOut("frame", fault.frame_id or "", fault.frame_id or "", str(fault))
            )
    return tuple(left_out)
