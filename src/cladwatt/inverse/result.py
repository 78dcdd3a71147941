"""What one region came to: intervals, stations, stretches, verdict, and the draws behind them."""

from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from cladwatt.quantities import Remark
from cladwatt.types import FloatArray, IntArray

__all__ = [
    "ComponentResult",
    "Interval",
    "LineProfile",
    "RegionResult",
    "StationTable",
    "Stretch",
    "StretchSide",
    "Verdict",
    "VerdictLevel",
    "interval_of",
]

VerdictLevel = Literal["quantified", "indicative", "not quantified"]
StretchSide = Literal["upper side", "underside", "all round", "not known"]


@dataclass(frozen=True)
class Interval:
    """Median with the 95 % interval, its 2.5 and 97.5 percentiles. Units as where it stands."""

    median: float
    low: float
    high: float

    @property
    def relative_width(self) -> float:
        """Full width over the median's size."""
        return (self.high - self.low) / abs(self.median) if self.median else float("inf")


def interval_of(draws: FloatArray) -> Interval:
    """Return the interval of a set of draws; NaN draws are left out, all NaN gives NaN.

    Parameters
    ----------
    draws : (n_draws,) array
        Draws of one quantity.

    Returns
    -------
    Interval
        2.5, 50 and 97.5 percentiles.

    References
    ----------
    .. [1] JCGM 101:2008, clause 7.7 (coverage interval from the draws).
    """
    usable = draws[np.isfinite(draws)]
    if usable.size == 0:
        return Interval(float("nan"), float("nan"), float("nan"))
    low, median, high = np.percentile(usable, [2.5, 50.0, 97.5])
    return Interval(float(median), float(low), float(high))


@dataclass(frozen=True)
class Verdict:
    """What may be said of a region's number, and why, in one sentence."""

    level: VerdictLevel
    reason: Remark
    advice: Remark | None = None
    """The one measurement that would help most."""


@dataclass(frozen=True)
class StationTable:
    """Figures along a strip; every array has shape (n_stations,)."""

    station: FloatArray
    """Along the line. [m]"""
    x: FloatArray
    """Centre of the station in the frame. [px]"""
    y: FloatArray
    """[px]"""
    width: FloatArray
    """Width of the pipe in the frame. [px]"""
    length: FloatArray
    """Metres of pipe this station stands for. [m]"""
    recorded_temperature: FloatArray
    """Mean recorded temperature over the used face. [K]"""
    surface_temperature: FloatArray
    """Median of the corrected temperature. [K]"""
    surface_temperature_low: FloatArray
    surface_temperature_high: FloatArray
    heat_loss: FloatArray
    """Median loss, negative for a gain. [W/m]"""
    heat_loss_low: FloatArray
    heat_loss_high: FloatArray
    sound_loss: FloatArray
    """What sound lagging would lose in the same conditions; NaN where unknown. [W/m]"""
    resistance: FloatArray
    """Lagging's resistance; NaN where unknown, inf where the loss may be zero. [m K/W]"""
    resistance_low: FloatArray
    resistance_high: FloatArray
    resistance_ratio: FloatArray
    """Found over specified. [-]"""
    flags: IntArray
    """Bits of :mod:`cladwatt.flags`."""


@dataclass(frozen=True)
class Stretch:
    """A run of stations whose lagging differs from the rest of its region."""

    id: str
    start: Interval
    """[m]"""
    end: Interval
    """[m]"""
    probability: float
    """That there is local damage here."""
    heat_loss: Interval
    """Mean over the stretch. [W/m]"""
    excess: Interval
    """Loss above the sound rest of the region, over the whole stretch. [W]"""
    share_of_excess: float
    """Of the region's summed local excess."""
    outline: tuple[tuple[float, float], ...]
    """In the frame. [px]"""
    side: StretchSide = "not known"
    """Where around the pipe the damage lies, if there is any."""
    side_probability: float = float("nan")
    """That it lies there; NaN where it is not known."""
    kinds: tuple[tuple[str, float], ...] = ()
    """Probability of each kind of damage if there is local damage here, likeliest first; they add
    up to 1. Empty where none can be weighed."""


@dataclass(frozen=True)
class LineProfile:
    """A region's draws along its line, in bins of `inverse.line_profile.BIN` from station 0.

    Attributes
    ----------
    first : int
        Number of the first bin.
    low, high : float
        Stations of its ends. [m]
    loss : (n_draws, n_bins) array
        Loss per metre, its mean over what is seen held to the region's; the region's where
        nothing is seen. [W/m]
    conductance : (n_draws, n_bins) array or None
        Of the lagging. [W/(m K)]
    metres, seen : (n_bins,) array
        Of pipe without components, and of that what carries a number. [m]
    """

    first: int
    low: float
    high: float
    loss: FloatArray
    conductance: FloatArray | None
    metres: FloatArray
    seen: FloatArray


@dataclass(frozen=True)
class RegionResult:
    """What one pipe region came to. Intervals are None where the reason stands in `missing`."""

    region_id: str
    frame_id: str
    tag: str
    area: str
    gain: bool
    """Whether the line gains heat (chilled) rather than loses it."""
    length: Interval
    """[m]"""
    start_station: float
    end_station: float
    """[m]"""
    recorded_temperature: float
    """Mean over stations. [K]"""
    surface_temperature: Interval
    """Mean over stations. [K]"""
    heat_flux: Interval
    """Mean over the seen face; what remains where no diameter is known. [W/m2]"""
    heat_loss: Interval | None
    """Mean per metre. [W/m]"""
    total_loss: Interval | None
    """Over the drawn length. [W]"""
    sound_loss: Interval | None
    """[W/m]"""
    specified_loss: Interval | None
    """[W/m]"""
    excess: Interval | None
    """Found minus sound. [W/m]"""
    resistance: Interval | None
    """[m K/W]"""
    specified_resistance: Interval | None
    """[m K/W]"""
    resistance_ratio: Interval | None
    """Found over specified. [-]"""
    effective_conductivity: Interval | None
    """[W/(m K)]"""
    probability_damaged: float | None
    probability_local: float | None
    probability_aged: float | None
    verdict: Verdict
    stretches: tuple[Stretch, ...]
    stations: StationTable
    missing: tuple[Remark, ...] = ()
    cautions: tuple[Remark, ...] = ()
    remarks: tuple[Remark, ...] = ()
    variance_shares: tuple[tuple[str, float], ...] = ()
    """Share of the variance of the loss by declared quantity, largest first."""
    kinds: tuple[tuple[str, float], ...] = ()
    """Probability of sound, aged and each kind of local damage, likeliest first; they add up to 1.
    Empty where that of ageing is not known."""
    image_loss: Interval | None = None
    """Mean loss per metre as the image gives it by itself, the specification unused. [W/m]"""
    declared_loss: Interval | None = None
    """With the lagging wet or frozen as it was declared found; None where declared dry. [W/m]"""
    declared_resistance: Interval | None = None
    """Of that lagging. [m K/W]"""
    tracer_heat: Interval | None = None
    """Of the loss, what comes from the tracer of a traced line. [W/m]"""
    fluid_loss: Interval | None = None
    """The rest; negative where the tracer warms the fluid. [W/m]"""
    air_temperature: float | None = None
    """Declared air temperature of the frame; strip pictures are centred on it. [K]"""
    strip_temperature: FloatArray | None = field(default=None, repr=False, compare=False)
    """Corrected median temperature straightened, (n_across, n_stations), NaN where left out. [K]"""
    draws: dict[str, FloatArray] = field(default_factory=dict, repr=False, compare=False)
    """Draws by quantity: heat_loss, total_loss, sound_loss, excess, length, ... (n_draws,)."""
    profile: LineProfile | None = field(default=None, repr=False, compare=False)
    """Along the line, where the region's station is declared; for the log of the line alone."""


@dataclass(frozen=True)
class ComponentResult:
    """What a flange, valve or hanger in view loses; None where `reason` says why not."""

    region_id: str
    frame_id: str
    tag: str
    kind: str
    lagged: bool
    surface_temperature: Interval | None
    """[K]"""
    equivalent_length: Interval | None
    """Of bare pipe for a bare component, of the line as clad for a lagged one. [m]"""
    heat_loss: Interval | None
    """Negative for a gain. [W]"""
    reason: Remark | None
    source: str = ""
    """Of the equivalent length."""
    draws: dict[str, FloatArray] = field(default_factory=dict, repr=False, compare=False)
    """Draws of heat_loss, (n_draws,)."""
    table_loss: Interval | None = None
    """By what is printed of such components on a line as clad. [W]"""
    image_loss: Interval | None = None
    """By the temperature seen and the body's surface; `heat_loss` weighs both. [W]"""
