"""The log of a line: what all frames together say of it, station by station."""

from dataclasses import dataclass

from cladwatt.inverse.result import Interval
from cladwatt.quantities import Remark

__all__ = ["LineLog", "LogBin", "LogOverlap", "LogStretch"]


@dataclass(frozen=True)
class LogBin:
    """A tenth of a metre of a line, or what of it was seen."""

    station: float
    """Where it begins. [m]"""
    length: float
    """Pipe drawn here, every metre once. [m]"""
    covered: float
    """Of that, what at least one frame sees. [m]"""
    heat_loss: Interval
    """[W/m]"""
    sound_loss: float | None
    """[W/m]"""
    resistance: Interval | None
    """[m K/W]"""
    resistance_ratio: float | None
    """Found over specified. [-]"""
    probability_damaged: float | None
    regions: tuple[str, ...]
    """That see it."""


@dataclass(frozen=True)
class LogOverlap:
    """Metres that several frames see, and whether they agree about them."""

    start: float
    end: float
    """[m]"""
    regions: tuple[str, ...]
    heat_losses: tuple[Interval, ...]
    """Mean over the overlap by each of them. [W/m]"""
    weights: tuple[float, ...]
    heat_loss: Interval
    """Combined; wider where they disagree. [W/m]"""
    standard_uncertainties_apart: float
    """Of the two furthest apart, errors they share cancelled; 1.96 and more is disagreement."""
    agree: bool


@dataclass(frozen=True)
class LogStretch:
    """One damage, in however many frames it was found."""

    id: str
    """Of the first of `members`."""
    members: tuple[str, ...]
    """Ids of the stretches of regions that are this one."""
    regions: tuple[str, ...]
    """That see the metres, whether or not they find it there."""
    start: Interval
    end: Interval
    """[m]"""
    probability: float
    """Mean over those regions by their weights."""
    excess: Interval
    """[W]"""


@dataclass(frozen=True)
class LineLog:
    """One line by station; what no frame shows is in no bin, and nothing is put in its place."""

    tag: str
    area: str
    gain: bool
    regions: tuple[str, ...]
    """With a declared station, in their order along the line."""
    bins: tuple[LogBin, ...]
    overlaps: tuple[LogOverlap, ...]
    stretches: tuple[LogStretch, ...]
    not_seen: tuple[tuple[float, float], ...]
    """Between the first and the last metre: from and to. [m]"""
    covered_length: float
    """Metres seen, each once. [m]"""
    remarks: tuple[Remark, ...] = ()
