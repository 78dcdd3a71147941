"""The one path every face calls: a survey in, an assessment out."""

import time
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, ProcessPoolExecutor
from dataclasses import replace
from importlib.metadata import version
from itertools import repeat
from multiprocessing import get_context

import numpy as np
from threadpoolctl import threadpool_limits

from cladwatt.assumptions import assumptions_of
from cladwatt.errors import Fault, InputError, RegionError
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.frame_draws import FrameDraws, band_of, draw_frame, mirrored
from cladwatt.inverse.line_draws import draw_line
from cladwatt.inverse.observe import Observed, observe_region
from cladwatt.inverse.references import (
    ReferenceReading,
    read_references,
    with_emissivity,
    with_frame_references,
)
from cladwatt.inverse.region_estimate import estimate_regions
from cladwatt.inverse.result import RegionResult, interval_of
from cladwatt.inverse.seen import FrameImage
from cladwatt.measure.noise import FrameNoise, estimate_noise
from cladwatt.measure.outline import region_mask, widened
from cladwatt.physics.radiometry import lens_radiance
from cladwatt.quantities import Remark
from cladwatt.results.assessment import Assessment, FrameResult, LeftOut, LineTotal, Settings
from cladwatt.results.versions import library_versions
from cladwatt.survey.checking import check_labels_against_frame, check_region_against_frame
from cladwatt.survey.frame import Frame, frame_questions, read_frame
from cladwatt.survey.model import FrameEntry
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Progress", "assess", "assess_frame"]

Progress = Callable[[int, int, str], None]
"""Called with frames done, frames in all and the frame just finished."""

BLUR_MARGIN_PX = 2.0
"""How far left-out areas are widened: their rims are blurred into the pipe. [px]"""
FEWEST_DRAWS = 40
"""With fewer no draw lies beyond the 2.5 and 97.5 percentiles."""
HIDDEN_SHARE = 0.9
"""A region covered by others beyond this share is refused."""
LEFT_OUT_ROLES = frozenset({"pipe", "leave_out", "foil", "tape", "contact"})
"""Whatever else is drawn over a pipe may not be used for it; crossing pipes hide each other."""


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
    """Yield frame results in the survey's order."""
    entries = survey.frames
    if executor is not None:
        yield from executor.map(assess_frame, repeat(survey), entries, repeat(settings))
    elif workers > 1 and len(entries) > 1:
        with ProcessPoolExecutor(
            workers, mp_context=get_context("spawn"), initializer=_keep, initargs=(survey, settings)
        ) as pool:
            yield from pool.map(_assess_kept, entries)
    else:
        for entry in entries:
            yield assess_frame(survey, entry, settings)


_kept: list[tuple[Survey, Settings]] = []


def _keep(survey: Survey, settings: Settings) -> None:
    """Hand a worker the survey once instead of with every frame."""
    _kept[:] = [(survey, settings)]


def _assess_kept(entry: FrameEntry) -> FrameResult:
    survey, settings = _kept[0]
    return assess_frame(survey, entry, settings)


def assess_frame(survey: Survey, entry: FrameEntry, settings: Settings) -> FrameResult:
    """Assess one frame; whatever cannot be assessed is left out with its reason.

    Parameters
    ----------
    survey : Survey
    entry : FrameEntry
        One of its frames.
    settings : Settings

    Returns
    -------
    FrameResult
    """
    started = time.perf_counter()
    # the last bits of a matrix product hang on the number of threads: always one
    with threadpool_limits(limits=1, user_api="blas"):
        result = _assess_one(survey, entry, settings)
    return replace(result, seconds=time.perf_counter() - started)


def _assess_one(survey: Survey, entry: FrameEntry, settings: Settings) -> FrameResult:
    try:
        frame = read_frame(entry, root=survey.root)
    except InputError as error:
        left_out = (LeftOut("frame", entry.id, entry.id, str(error)),)
        return FrameResult(entry.id, "", (0, 0), (), left_out)
    regions, left_out_list = _sound_regions(survey, entry, frame)
    results: list[RegionResult] = []
    if any(region.role == "pipe" for region in regions):
        found, more = _assess_regions(survey, entry, frame, regions, settings)
        results.extend(found)
        left_out_list.extend(more)
    remarks = frame.remarks + tuple(
        _question(question) for question in frame_questions(frame, entry, root=survey.root)
    )
    return FrameResult(
        frame_id=entry.id,
        sha256=frame.sha256,
        shape=frame.shape,
        regions=tuple(results),
        left_out=tuple(left_out_list),
        remarks=remarks,
    )


def _question(fault: Fault) -> Remark:
    return Remark("remark.question", (("message", str(fault)),))


def _sound_regions(
    survey: Survey, entry: FrameEntry, frame: Frame
) -> tuple[list[Region], list[LeftOut]]:
    """Divide a frame's regions into usable ones and those that do not fit the frame."""
    usable: list[Region] = []
    left_out: list[LeftOut] = []
    shape = frame.shape
    wrong_labels = check_labels_against_frame(entry, shape, root=survey.root)
    if wrong_labels:  # nothing drawn on this frame can be trusted to lie where it should
        return [], [LeftOut("frame", entry.id, entry.id, str(fault)) for fault in wrong_labels]
    for region in survey.regions_of(entry.id):
        fault: Fault | None = check_region_against_frame(region, shape)
        if fault is None:
            usable.append(region)
        else:
            left_out.append(LeftOut("region", region.id, entry.id, str(fault)))
    return usable, left_out


def _lens_image(survey: Survey, entry: FrameEntry, frame: Frame) -> FrameImage:
    """Undo the camera's own settings: what reached the lens, as a blackbody's temperature."""
    band = band_of(survey.camera)
    recording = entry.recording
    radiance = lens_radiance(
        frame.temperature,
        band=band,
        emissivity=recording.emissivity,
        reflected_temperature=recording.reflected_temperature,
        transmission=recording.transmission,
        atmosphere_temperature=recording.atmosphere_temperature,
        window_transmission=recording.window_transmission,
        window_temperature=recording.window_temperature,
    )
    lens = band.temperature(radiance)
    noise = estimate_noise(lens)
    declared = survey.camera.noise
    if declared is not None:
        noise = FrameNoise(max(noise.sigma, declared.value), noise.correlated_area)
    return FrameImage(entry.id, lens, frame.temperature, frame.clipped, noise)


def _assess_regions(
    survey: Survey,
    entry: FrameEntry,
    frame: Frame,
    regions: list[Region],
    settings: Settings,
) -> tuple[list[RegionResult], list[LeftOut]]:
    """Estimate every pipe region of a frame."""
    book = DrawBook(settings.seed, settings.draws)
    pipes = [region for region in regions if region.role == "pipe"]
    draws = draw_frame(
        book,
        entry.id,
        entry.conditions,
        survey.camera,
        survey.site,
        _distance(survey, frame, pipes),
        survey.defaults["distance"],
    )
    if draws is None:
        remark = Remark("missing.air_temperature")
        return [], [LeftOut("region", region.id, entry.id, "", remark) for region in pipes]
    image = _lens_image(survey, entry, frame)
    readings = read_references(image.lens_temperature, regions, survey.defaults)
    draws, remarks = with_frame_references(draws, readings, book)
    masks = {region.id: region_mask(region, frame.temperature.shape) for region in regions}
    left_out = [
        LeftOut("component", region.id, entry.id, "", Remark("remark.component_not_assessed"))
        for region in regions
        if region.role == "component"
    ]
    observed: list[Observed] = []
    used: list[tuple[Remark, ...]] = []
    for region in pipes:
        try:
            one, references = _observe(
                survey, entry, region, regions, masks, image, draws, readings, book
            )
        except InputError as error:
            left_out.append(LeftOut("region", region.id, entry.id, str(error)))
            continue
        observed.append(one)
        used.append(remarks + references)
    results = [
        replace(result, remarks=result.remarks + references)
        for result, references in zip(estimate_regions(observed, book, entry.id), used, strict=True)
    ]
    return results, left_out


def _observe(
    survey: Survey,
    entry: FrameEntry,
    region: Region,
    regions: list[Region],
    masks: dict[str, BoolArray],
    image: FrameImage,
    frame: FrameDraws,
    readings: tuple[ReferenceReading, ...],
    book: DrawBook,
) -> tuple[Observed, tuple[Remark, ...]]:
    """Read one region off the image, with the references on its line."""
    assert region.tag is not None
    line = survey.lines[region.tag]
    covered = _covered(region, regions, masks, LEFT_OUT_ROLES)
    _refuse_hidden(region, regions, masks, covered)
    frame = mirrored(
        frame,
        book,
        region.id,
        is_metal=line.cladding.is_metal,
        indoors=entry.conditions.indoors is not False,
    )
    line_draws, remarks = with_emissivity(
        draw_line(book, line, region), line.tag, frame, readings, book
    )
    observed = observe_region(
        region,
        line,
        image=image,
        left_out=widened(covered, BLUR_MARGIN_PX),
        components=_covered(region, regions, masks, frozenset({"component"})),
        known_lengths=[r for r in regions if r.role == "known_length" and r.tag == region.tag],
        frame=frame,
        line_draws=line_draws,
        conditions=entry.conditions,
        camera=survey.camera,
        book=book,
    )
    return observed, remarks


def _refuse_hidden(
    region: Region, regions: list[Region], masks: dict[str, BoolArray], covered: BoolArray
) -> None:
    """Refuse a region that others hide, naming them: most likely one pipe was drawn twice."""
    own = masks[region.id]
    share = float(covered[own].mean()) if own.any() else 0.0
    if share < HIDDEN_SHARE:
        return
    others = [
        other.id
        for other in regions
        if other.id != region.id and other.role in LEFT_OUT_ROLES and masks[other.id][own].any()
    ]
    raise RegionError(
        Fault(
            f"regions/{region.frame_id}.geojson",
            f"feature {region.feature} (id '{region.id}')",
            f"{share:.0%} of it lies under other regions ({', '.join(others)})",
            "expected pipes drawn once each; delete one, or leave out only what is in front",
            frame_id=region.frame_id,
            region_id=region.id,
        )
    )


def _covered(
    region: Region, regions: list[Region], masks: dict[str, BoolArray], roles: frozenset[str]
) -> BoolArray:
    """Return the pixels of other regions with these roles."""
    covered = np.zeros_like(masks[region.id])
    for other in regions:
        if other.id != region.id and other.role in roles:
            covered |= masks[other.id]
    return covered


def _distance(survey: Survey, frame: Frame, pipes: list[Region]) -> float | None:
    """Return how far the pipes are by their known diameter and the field of view. [m]"""
    view = survey.camera.field_of_view_deg
    if view is None:
        return None
    focal = frame.temperature.shape[1] / 2 / np.tan(np.radians(view) / 2)
    found = []
    for region in pipes:
        diameter = survey.lines[region.tag].lagged_diameter if region.tag else None
        if diameter is not None and region.widths is not None:
            found.append(focal * diameter / float(np.median(region.widths)))
    return float(np.median(found)) if found else None


def _assembled(survey: Survey, settings: Settings, frames: tuple[FrameResult, ...]) -> Assessment:
    """Put frame results together, with totals that keep what regions share."""
    regions = [region for frame in frames for region in frame.regions]
    hot = [region for region in regions if not region.gain and "total_loss" in region.draws]
    chilled = [region for region in regions if region.gain and "total_loss" in region.draws]
    known = [region for region in hot if "total_excess" in region.draws]
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
        left_out=_survey_left_out(survey)
        + tuple(item for frame in frames for item in frame.left_out),
        assumptions=assumptions_of(survey),
        remarks=tuple(_question(f) for f in survey.faults if f.severity == "question"),
        camera={
            "model": camera.model,
            "serial": camera.serial,
            "calibration_date": (
                "" if camera.calibration_date is None else camera.calibration_date.isoformat()
            ),
            "band_um": f"{camera.band[0] * 1e6:g}-{camera.band[1] * 1e6:g}",
        },
    )


def _summed(regions: list[RegionResult], quantity: str) -> FloatArray:
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
