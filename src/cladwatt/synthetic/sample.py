"""The sample: a whole survey folder of the invented plant, with its truth beside it."""

import shutil
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from cladwatt.errors import InputError
from cladwatt.survey.region_format import region_text
from cladwatt.synthetic.damage import DamageKind
from cladwatt.synthetic.day import another_day, in_the_sun
from cladwatt.synthetic.drawing import DrawnFrame, draw_regions
from cladwatt.synthetic.frame_files import FRAME_FILES, frame_bytes
from cladwatt.synthetic.geometry import View
from cladwatt.synthetic.picture import take_picture
from cladwatt.synthetic.pipes import PipeTruth, build_pipe
from cladwatt.synthetic.plant import Plant, PlantFrame, load_plant
from cladwatt.synthetic.response import RESPONSE_FILE, response_text
from cladwatt.synthetic.survey_text import survey_text
from cladwatt.synthetic.truth import (
    ConvectionLaw,
    FrameTruth,
    LineTruth,
    draw_frame,
    draw_line,
    draw_shared,
)
from cladwatt.synthetic.truth_files import (
    STATION_HEADER,
    TRUTH_README,
    region_truth,
    station_rows,
    truth_json,
)
from cladwatt.types import FloatArray

__all__ = ["SampleFrame", "SampleOptions", "assign_damage", "make_frames", "write_sample"]

_KINDS: tuple[DamageKind, ...] = (
    "bare", "open_joint", "missing_sector", "wet", "wet_underside", "compressed", "void",
    "aged", "aged",
)  # fmt: skip


@dataclass(frozen=True)
class SampleFrame:
    """One frame of the sample with everything that is true of it."""

    plant: PlantFrame
    truth: FrameTruth
    pipes: tuple[PipeTruth, ...]
    drawn: DrawnFrame
    recorded: FloatArray
    """(rows, cols). [K]"""


@dataclass(frozen=True)
class SampleOptions:
    """What a survey is to be like; the rule is the sample that ships.

    Parameters
    ----------
    corners : bool
        With the frames of rarer cases after the others, whose bytes do not depend on it.
    convection : {"churchill", "morgan_zukauskas"}
        Correlations the air obeys.
    convection_bias : float
        Multiplies every convection coefficient.
    damaged : float
        Times the usual number of damaged pipes in the plain frames, 0 or more.
    sun : bool
        Sun on every outdoor frame.
    """

    corners: bool = True
    convection: ConvectionLaw = "churchill"
    convection_bias: float = 1.0
    damaged: float = 1.0
    sun: bool = False


def assign_damage(
    plant: Plant, random: np.random.Generator, share: float = 1.0
) -> dict[str, DamageKind]:
    """Give every kind of damage to a pipe, and leave near half of the pipes sound.

    Parameters
    ----------
    plant : Plant
        The plant.
    random : numpy.random.Generator
        Source of randomness.
    share : float
        Times the usual number of damaged pipes, as far as there are pipes that can be.

    Returns
    -------
    dict of str to str
        Kind by region id. Corner frames come after the others and by a lot of their own.
    """
    plain = [pipe for frame in plant.frames if not frame.is_corner for pipe in frame.pipes]
    corner = [pipe for frame in plant.frames if frame.is_corner for pipe in frame.pipes]
    kinds: dict[str, DamageKind] = {pipe.id: "sound" for pipe in (*plain, *corner)}
    for kind in _dealt(random, share):
        free = [pipe.id for pipe in plain
                if kinds[pipe.id] == "sound" and (not pipe.only or kind in pipe.only)]  # fmt: skip
        if free:
            kinds[str(random.choice(free))] = kind
    for pipe in corner:
        if pipe.kinds:
            kinds[pipe.id] = pipe.kinds[int(random.integers(len(pipe.kinds)))]
    return kinds


def _dealt(random: np.random.Generator, share: float) -> tuple[DamageKind, ...]:
    """Return the kinds to deal out."""
    if share == 1.0:
        return _KINDS
    number = round(share * len(_KINDS))
    rounds = [random.permutation(len(_KINDS)) for _ in range(number // len(_KINDS) + 1)]
    return tuple(_KINDS[int(i)] for i in np.concatenate(rounds)[:number])


def make_frames(
    plant: Plant, seed: int, options: SampleOptions = SampleOptions()
) -> tuple[dict[str, LineTruth], Iterator[SampleFrame]]:
    """Make the survey of one seed, frame by frame.

    Parameters
    ----------
    plant : Plant
        The plant.
    seed : int
        Same seed, same survey.
    options : SampleOptions
        What it is to be like.

    Returns
    -------
    dict of str to LineTruth
        The lines as they really are, by tag.
    iterator of SampleFrame
        The frames in their order.
    """
    survey, lines, *frames = np.random.SeedSequence(seed).spawn(2 + len(plant.frames))
    random = np.random.default_rng(survey)
    shared = replace(draw_shared(random), law=options.convection, bias=options.convection_bias)
    kinds = assign_damage(plant, random, options.damaged)
    children = zip(plant.lines.items(), lines.spawn(len(plant.lines)), strict=True)
    truths = {tag: draw_line(line, np.random.default_rng(child)) for (tag, line), child in children}

    def frame_of(plain: PlantFrame, child: np.random.SeedSequence) -> SampleFrame:
        random = np.random.default_rng(child)
        frame = another_day(plain, random)
        if options.sun:
            frame = in_the_sun(frame, random.spawn(1)[0])
        truth = draw_frame(frame, shared, random)
        view = View(frame.rows, frame.cols, float(plant.camera["field_of_view_deg"]))
        pipes = [
            build_pipe(pipe, plant.lines[pipe.tag], truths[pipe.tag], truth, view, kinds[pipe.id],
                       random)
            for pipe in frame.pipes
        ]  # fmt: skip
        drawn = draw_regions(pipes, frame, view, random)
        recorded = take_picture(plant, frame, truth, pipes, view, random)
        return SampleFrame(frame, truth, tuple(pipes), drawn, recorded)

    return truths, (frame_of(*pair) for pair in zip(plant.frames, frames, strict=True))


def _write_into(folder: Path, seed: int, options: SampleOptions) -> None:
    """Write all files of the sample into an empty folder."""
    plant = load_plant(options.corners)
    for name in ("frames", "regions", "truth"):
        (folder / name).mkdir()
    lines, frames = make_frames(plant, seed, options)
    regions, stations = [], [STATION_HEADER]
    truths: dict[str, FrameTruth] = {}
    plants = []
    for frame in frames:
        name = frame.plant.id
        plants.append(frame.plant)
        truths[name] = frame.truth
        suffix = FRAME_FILES[frame.plant.file][0]
        (folder / "frames" / f"{name}{suffix}").write_bytes(
            frame_bytes(frame.plant.file, frame.recorded)
        )
        _write_text(folder / "regions" / f"{name}.geojson", region_text(frame.drawn.regions))
        for pipe in frame.pipes:
            drawn = frame.drawn.drawn[pipe.plant.id]
            regions.append(region_truth(pipe, name, drawn))
            stations.extend(station_rows(pipe, name, drawn))
    _write_text(folder / RESPONSE_FILE, response_text())
    _write_text(folder / "survey.toml", survey_text(plant, tuple(plants), seed))
    _write_text(folder / "truth" / "README.txt", TRUTH_README)
    _write_text(folder / "truth" / "truth.json", truth_json(seed, regions, truths, lines))
    _write_text(folder / "truth" / "truth_stations.csv", "\n".join(stations) + "\n")


def _write_text(path: Path, text: str) -> None:
    # the same bytes on every system
    path.write_bytes(text.encode("utf-8"))


def write_sample(folder: Path, seed: int = 7, options: SampleOptions = SampleOptions()) -> None:
    """Write a survey of the invented plant, with its truth beside it.

    The folder appears whole or not at all.

    Parameters
    ----------
    folder : Path
        New or empty.
    seed : int
        0 or more. Same seed, same bytes; another seed places other damage in the same plant and
        draws other conditions.
    options : SampleOptions
        What the survey is to be like.

    Raises
    ------
    InputError
        If the folder holds anything, is a file, or cannot be written, or the seed is negative.
    """
    if seed < 0:
        raise InputError(f"seed is {seed}; expected 0 or more")
    target = Path(folder).absolute()
    try:
        if target.exists() and (not target.is_dir() or any(target.iterdir())):
            what = "holds files already" if target.is_dir() else "is a file"
            raise InputError(f"{folder} {what}; expected a new or an empty folder")
        target.parent.mkdir(parents=True, exist_ok=True)
        work = Path(tempfile.mkdtemp(prefix=f".{target.name[:40]}.", dir=target.parent))
        try:
            _write_into(work, seed, options)
            _put_in_place(work, target)
        finally:
            shutil.rmtree(work, ignore_errors=True)
    except OSError as error:
        reason = error.strerror or str(error)
        raise InputError(
            f"{folder} cannot be written ({reason}); expected a folder that can"
        ) from error


def _put_in_place(work: Path, target: Path) -> None:
    """Move the finished folder to its place; an empty one that stands there is filled."""
    work.chmod(0o755)
    if not target.exists():
        work.rename(target)
        return
    # survey.toml last: a survey without it is none
    parts = sorted(work.iterdir(), key=lambda path: (path.is_file(), path.name))
    moved: list[Path] = []
    try:
        for part in parts:
            part.rename(target / part.name)
            moved.append(target / part.name)
    except OSError:
        for path in moved:
            path.rename(work / path.name)
        raise
