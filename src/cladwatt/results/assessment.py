"""What one run found: the frozen result every face and every later step reads."""

from dataclasses import dataclass, field
from typing import Literal

from cladwatt.inverse.line_result import LineLog, LogBin, LogOverlap, LogStretch
from cladwatt.inverse.result import (
    ComponentResult,
    Interval,
    RegionResult,
    StationTable,
    Stretch,
    StretchSide,
    Verdict,
    VerdictLevel,
    interval_of,
)
from cladwatt.quantities import Remark

__all__ = [
    "Assessment",
    "Assumption",
    "ComponentResult",
    "FrameResult",
    "Interval",
    "LeftOut",
    "LineLog",
    "LineTotal",
    "LogBin",
    "LogOverlap",
    "LogStretch",
    "RegionResult",
    "Settings",
    "StationTable",
    "Stretch",
    "StretchSide",
    "Verdict",
    "VerdictLevel",
    "interval_of",
]


@dataclass(frozen=True)
class LeftOut:
    """A frame, region or line that was not assessed, and why."""

    what: Literal["frame", "region", "line"]
    id: str
    frame_id: str
    message: str
    """The fault as it was said, already complete; or empty where `remark` says it."""
    remark: Remark | None = None


@dataclass(frozen=True)
class FrameResult:
    """Everything found in one frame."""

    frame_id: str
    sha256: str
    shape: tuple[int, int]
    regions: tuple[RegionResult, ...]
    left_out: tuple[LeftOut, ...]
    remarks: tuple[Remark, ...] = ()
    components: tuple[ComponentResult, ...] = ()
    seconds: float = field(default=0.0, compare=False)
    """How long it took; told by the run, not kept, so that equal runs leave equal files."""


@dataclass(frozen=True)
class LineTotal:
    """Sum over the drawn regions of one line, shared errors kept; metres in its log count once."""

    tag: str
    area: str
    gain: bool
    length: Interval
    """[m]"""
    total_loss: Interval
    """[W]"""
    excess: Interval | None
    """[W]"""
    regions: tuple[str, ...]


@dataclass(frozen=True)
class Assumption:
    """A default that was used, or a declared quantity, with its source."""

    owner: str
    """``line NS-101``, ``frame f03``, ``camera``, ``model``."""
    quantity: str
    value: float
    u: float
    unit: str
    source: str
    confidence: str


@dataclass(frozen=True)
class Settings:
    """What steers a run beside the survey itself."""

    seed: int = 1
    draws: int = 1000


@dataclass(frozen=True)
class Assessment:
    """What one run over one survey found."""

    survey_name: str
    place: str
    date: str
    inspector: str
    version: str
    settings: Settings
    inputs: tuple[tuple[str, str], ...]
    """(path relative to the survey, SHA-256) of every file read."""
    frames: tuple[FrameResult, ...]
    lines: tuple[LineTotal, ...]
    total_loss: Interval | None
    """Over all hot regions. [W]"""
    total_gain: Interval | None
    """Over all chilled regions, as a positive gain. [W]"""
    total_excess: Interval | None
    """Over all hot regions with a known sound loss. [W]"""
    left_out: tuple[LeftOut, ...]
    assumptions: tuple[Assumption, ...]
    remarks: tuple[Remark, ...] = ()
    camera: dict[str, str] = field(default_factory=dict)
    versions: dict[str, str] = field(default_factory=dict)
    """Of Python and the libraries the numbers depend on."""
    component_loss: Interval | None = None
    """Over all components that lose heat; in none of the totals above. [W]"""
    component_gain: Interval | None = None
    """Over all components that gain heat, as a positive gain. [W]"""
    logs: tuple[LineLog, ...] = ()
    """Of every line with a region whose station along it is declared."""

    @property
    def regions(self) -> tuple[RegionResult, ...]:
        """All region results, in the order of the survey."""
        return tuple(region for frame in self.frames for region in frame.regions)

    @property
    def components(self) -> tuple[ComponentResult, ...]:
        """All components, in the order of the survey."""
        return tuple(one for frame in self.frames for one in frame.components)
