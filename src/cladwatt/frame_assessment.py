"""One frame from its file to its results: read, corrected, drawn from, estimated."""

import time
from collections.abc import Mapping, Sequence
from dataclasses import replace
from types import MappingProxyType
from typing import NamedTuple

import numpy as np
from threadpoolctl import threadpool_limits

from cladwatt.errors import Fault, InputError, RegionError
from cladwatt.inverse.components import estimate_component, unknown_component
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
from cladwatt.inverse.result import ComponentResult, RegionResult
from cladwatt.inverse.seen import FrameImage
from cladwatt.inverse.survey_joint import (
    FrameEvidence,
    Message,
    frame_evidence,
    shared_evidence,
)
from cladwatt.measure.noise import FrameNoise, estimate_noise
from cladwatt.measure.outline import region_mask, widened
from cladwatt.physics.radiometry import lens_radiance
from cladwatt.quantities import Remark
from cladwatt.results.assessment import FrameResult, LeftOut, Settings
from cladwatt.survey.checking import check_labels_against_frame, check_region_against_frame
from cladwatt.survey.frame import Frame, frame_questions, read_frame
from cladwatt.survey.model import FrameEntry
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey
from cladwatt.types import BoolArray

__all__ = [
    "assess_frame",
    "fitting_regions",
    "lens_image",
    "look_at_frame",
    "observe_with_references",
    "pipe_distance",
    "question_remark",
]

FIRST_LOOK_DRAWS = 400
"""Draws of a frame that is only looked at: enough for means and covariances of a few quantities,
whatever number of draws the results are given with."""
BLUR_MARGIN_PX = 2.0
"""How far left-out areas are widened: their rims are blurred into the pipe. [px]"""
HIDDEN_SHARE = 0.9
"""A region covered by others beyond this share is refused."""
LEFT_OUT_ROLES = frozenset({"pipe", "leave_out", "foil", "tape", "contact"})
"""Whatever else is drawn over a pipe may not be used for it; crossing pipes hide each other."""


def look_at_frame(survey: Survey, entry: FrameEntry, settings: Settings) -> FrameEvidence | None:
    """Look at a frame for what it tells the others of what they share.

    Parameters
    ----------
    survey : Survey
    entry : FrameEntry
        One of its frames.
    settings : Settings

    Returns
    -------
    FrameEvidence or None
        None where it tells nothing, or cannot be read.
    """
    with threadpool_limits(limits=1, user_api="blas"):
        try:
            frame = read_frame(entry, root=survey.root)
        except InputError:
            return None
        regions, _ = fitting_regions(survey, entry, frame)
        book = DrawBook(settings.seed, FIRST_LOOK_DRAWS)
        look = _looked(survey, entry, frame, regions, book)
        return frame_evidence(look.observed, book, entry.id)


def assess_frame(
    survey: Survey, entry: FrameEntry, settings: Settings, message: Message | None = None
) -> FrameResult:
    """Assess one frame; whatever cannot be assessed is left out with its reason.

    Parameters
    ----------
    survey : Survey
    entry : FrameEntry
        One of its frames.
    settings : Settings
    message : Message, optional
        What the other frames say of what they share with this one.

    Returns
    -------
    FrameResult
    """
    started = time.perf_counter()
    # the last bits of a matrix product hang on the number of threads: always one
    with threadpool_limits(limits=1, user_api="blas"):
        result = _assess_one(survey, entry, settings, message)
    return replace(result, seconds=time.perf_counter() - started)


def _assess_one(
    survey: Survey, entry: FrameEntry, settings: Settings, message: Message | None
) -> FrameResult:
    try:
        frame = read_frame(entry, root=survey.root)
    except InputError as error:
        unreadable = LeftOut("frame", entry.id, entry.id, str(error))
        return FrameResult(entry.id, "", (0, 0), (), (unreadable,))
    regions, left_out = fitting_regions(survey, entry, frame)
    found = _Found()
    if any(region.role in ("pipe", "component") for region in regions):
        found = _assess_regions(survey, entry, frame, regions, settings, message)
    remarks = frame.remarks + tuple(
        question_remark(question) for question in frame_questions(frame, entry, root=survey.root)
    )
    return FrameResult(
        frame_id=entry.id,
        sha256=frame.sha256,
        shape=frame.shape,
        regions=found.regions,
        left_out=(*left_out, *found.left_out),
        remarks=remarks,
        components=found.components,
    )


def question_remark(fault: Fault) -> Remark:
    """Return a question about the input as a remark that is already worded."""
    return Remark("remark.question", (("message", str(fault)),))


def fitting_regions(
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


def lens_image(survey: Survey, entry: FrameEntry, frame: Frame) -> FrameImage:
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


class _Found(NamedTuple):
    regions: tuple[RegionResult, ...] = ()
    components: tuple[ComponentResult, ...] = ()
    left_out: tuple[LeftOut, ...] = ()


class _Look(NamedTuple):
    """Everything that is seen of a frame before anything is concluded."""

    observed: tuple[Observed, ...] = ()
    used: tuple[tuple[Remark, ...], ...] = ()
    """Per region, which references were used."""
    left_out: tuple[LeftOut, ...] = ()
    image: FrameImage | None = None
    draws: FrameDraws | None = None
    readings: tuple[ReferenceReading, ...] = ()
    masks: Mapping[str, BoolArray] = MappingProxyType({})
    missing_air: bool = False


def _looked(
    survey: Survey, entry: FrameEntry, frame: Frame, regions: list[Region], book: DrawBook
) -> _Look:
    """Draw what the frame's conditions may be, and read every pipe region off it."""
    pipes = [region for region in regions if region.role == "pipe"]
    if not any(region.role in ("pipe", "component") for region in regions):
        return _Look()
    try:
        draws = draw_frame(
            book,
            entry.id,
            entry.conditions,
            survey.camera,
            survey.site,
            pipe_distance(survey, frame, pipes),
            survey.defaults,
            survey.convection_model,
        )
    except InputError as error:  # an air path that nothing is known of
        return _Look(left_out=(LeftOut("frame", entry.id, entry.id, f"{entry.id}: {error}"),))
    if draws is None:
        remark = Remark("missing.air_temperature")
        left = tuple(LeftOut("region", one.id, entry.id, "", remark) for one in pipes)
        return _Look(left_out=left, missing_air=True)
    image = lens_image(survey, entry, frame)
    readings = read_references(image.lens_temperature, regions, survey.defaults)
    draws, remarks = with_frame_references(draws, readings, book)
    masks = {region.id: region_mask(region, frame.shape) for region in regions}
    left_out: list[LeftOut] = []
    observed: list[Observed] = []
    used: list[tuple[Remark, ...]] = []
    for region in pipes:
        try:
            one, references = observe_with_references(
                survey, entry, region, regions, masks, image, draws, readings, book
            )
        except InputError as error:
            left_out.append(LeftOut("region", region.id, entry.id, str(error)))
            continue
        observed.append(one)
        used.append(remarks + references)
    return _Look(tuple(observed), tuple(used), tuple(left_out), image, draws, readings, masks)


def _assess_regions(
    survey: Survey,
    entry: FrameEntry,
    frame: Frame,
    regions: list[Region],
    settings: Settings,
    message: Message | None,
) -> _Found:
    """Estimate every pipe region and component of a frame."""
    book = DrawBook(settings.seed, settings.draws)
    components = [region for region in regions if region.role == "component"]
    look = _looked(survey, entry, frame, regions, book)
    if look.image is None or look.draws is None:
        reason = "missing.air_temperature"
        unknown = components if look.missing_air else []
        return _Found(
            components=tuple(unknown_component(one, reason) for one in unknown),
            left_out=look.left_out,
        )
    shared = None if message is None else shared_evidence(message, book)
    results = estimate_regions(
        look.observed,
        book,
        entry.id,
        shared,
        None if survey.tables is None else survey.tables.damage_kinds,
    )
    pipes = [region for region in regions if region.role == "pipe"]
    return _Found(
        regions=tuple(
            replace(result, remarks=result.remarks + references)
            for result, references in zip(results, look.used, strict=True)
        ),
        components=tuple(
            _component(
                survey, entry, region, look.image, look.draws, look.readings, book, look.observed
            )
            for region in (_with_tag(one, pipes, look.masks) for one in components)
        ),
        left_out=look.left_out,
    )


def _with_tag(component: Region, pipes: list[Region], masks: Mapping[str, BoolArray]) -> Region:
    """Return a component with the tag of the pipe it covers most of, where it names none."""
    if component.tag is not None or not pipes:
        return component
    own = masks[component.id]
    most = max(pipes, key=lambda pipe: int(masks[pipe.id][own].sum()))
    return replace(component, tag=most.tag) if masks[most.id][own].any() else component


def _component(
    survey: Survey,
    entry: FrameEntry,
    region: Region,
    image: FrameImage,
    frame: FrameDraws,
    readings: tuple[ReferenceReading, ...],
    book: DrawBook,
    observed: Sequence[Observed],
) -> ComponentResult:
    """Estimate one component with what its line and the references tell."""
    line = None if region.tag is None else survey.lines.get(region.tag)
    if line is None:
        return unknown_component(region, "not_quantified.component_no_line")
    drawn, _ = with_emissivity(draw_line(book, line), line.tag, frame, readings, book)
    return estimate_component(
        region,
        image=image,
        frame=frame,
        line=drawn,
        book=book,
        tables=survey.tables,
        pipes=[one.seen for one in observed],
        indoors=entry.conditions.indoors is not False,
    )


def observe_with_references(
    survey: Survey,
    entry: FrameEntry,
    region: Region,
    regions: list[Region],
    masks: Mapping[str, BoolArray],
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
        bare_component=any(
            other.role == "component"
            and not other.lagged
            and masks[other.id][masks[region.id]].any()
            for other in regions
        ),
    )
    return observed, remarks


def _refuse_hidden(
    region: Region, regions: list[Region], masks: Mapping[str, BoolArray], covered: BoolArray
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
    region: Region, regions: list[Region], masks: Mapping[str, BoolArray], roles: frozenset[str]
) -> BoolArray:
    """Return the pixels of other regions with these roles."""
    covered = np.zeros_like(masks[region.id])
    for other in regions:
        if other.id != region.id and other.role in roles:
            covered |= masks[other.id]
    return covered


def pipe_distance(survey: Survey, frame: Frame, pipes: list[Region]) -> float | None:
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
