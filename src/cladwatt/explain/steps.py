"""The frozen structure of an explanation, and the pad its steps are written on."""

import math
from dataclasses import dataclass, field

import numpy as np

from cladwatt.inverse.draws import quantity_draws
from cladwatt.quantities import Quantity, Remark
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "BandOfAngle",
    "Explanation",
    "Pad",
    "Reported",
    "Section",
    "Step",
    "median_of",
    "source_of",
]


@dataclass(frozen=True)
class Step:
    """One line of the calculation.

    Attributes
    ----------
    key : str
        Of its wording, ``explain.step.KEY``.
    symbol : str
        Unique within an explanation, but for the steps that every band of angle repeats.
    value : float
        [SI, angles in degrees]
    unit : str
    formula : str
        From the symbols in `inputs`; empty for what was given.
    source : str
        Publication of the formula, or where a given value comes from.
    inputs : tuple of str
        Symbols the value follows from; empty for what was given.
    """

    key: str
    symbol: str
    value: float
    unit: str
    formula: str = ""
    source: str = ""
    inputs: tuple[str, ...] = ()


@dataclass(frozen=True)
class Section:
    """Steps that belong together; `key` names the heading, ``explain.section.KEY``."""

    key: str
    steps: tuple[Step, ...]


@dataclass(frozen=True)
class BandOfAngle:
    """One band of angle of the seen face, with every step from its recorded value to its flux.

    `share` is its part of the seen angle.
    """

    share: float
    steps: tuple[Step, ...]

    def value(self, symbol: str) -> float:
        """Return the value of a step; NaN where the steps do not reach it."""
        return next((step.value for step in self.steps if step.symbol == symbol), math.nan)


@dataclass(frozen=True)
class Reported:
    """What an assessment says of the same station: median and 95 % interval of the draws."""

    heat_loss: tuple[float, float, float]
    """Median, low, high. [W/m]"""
    sound_loss: float
    """[W/m]"""
    resistance: tuple[float, float, float]
    """[m K/W]"""
    resistance_ratio: float
    verdict: str = ""
    """Of the region: quantified, indicative or not quantified."""
    reasons: tuple[Remark, ...] = ()
    """Why, and what else is said of the region."""


@dataclass(frozen=True)
class Explanation:
    """A station of a region, from one recorded value to loss and resistance.

    Attributes
    ----------
    station : float
        Along the line; NaN where no diameter gives the scale. [m]
    start, end : float
        First and last station of the region. [m]
    x, y : float
        Centre of the station in the frame. [px]
    sections : tuple of Section
        In the order of the calculation. The steps of the bands of angle come behind the section
        ``surface``.
    bands : tuple of BandOfAngle
        Empty where the calculation does not come that far.
    shown : int
        The band nearest the middle of the face.
    missing : tuple of Remark
        Why the calculation ends early.
    notes : tuple of Remark
        Where assessing goes beyond these steps at this station.
    reported : Reported or None
    """

    survey: str
    region_id: str
    frame_id: str
    tag: str
    station: float
    start: float
    end: float
    x: float
    y: float
    sections: tuple[Section, ...]
    bands: tuple[BandOfAngle, ...] = ()
    shown: int = 0
    missing: tuple[Remark, ...] = ()
    notes: tuple[Remark, ...] = ()
    reported: Reported | None = None

    def section(self, key: str) -> Section | None:
        """Return a section, None where the calculation does not reach it."""
        return next((section for section in self.sections if section.key == key), None)

    def value(self, symbol: str) -> float:
        """Return the value of a step outside the bands; NaN where there is none."""
        steps = (step for section in self.sections for step in section.steps)
        return next((step.value for step in steps if step.symbol == symbol), math.nan)


@dataclass
class Pad:
    """Collects the steps of one section."""

    steps: list[Step] = field(default_factory=list)

    def given(self, key: str, symbol: str, value: FloatLike, unit: str, source: str) -> None:
        """Write down a value that is declared, looked up, or read off the image."""
        self.steps.append(Step(key, symbol, _number(value), unit, source=source))

    def found(
        self,
        key: str,
        symbol: str,
        value: FloatLike,
        unit: str,
        formula: str,
        inputs: str,
        source: str = "",
    ) -> None:
        """Write down a value that follows from others; `inputs` are symbols with spaces between."""
        self.steps.append(
            Step(key, symbol, _number(value), unit, formula, source, tuple(inputs.split()))
        )

    def section(self, key: str) -> Section:
        """Return what was written as a section."""
        return Section(key, tuple(self.steps))


def _number(value: FloatLike) -> float:
    """Return the one number of a scalar or of an array with a single element."""
    return float(np.asarray(value, dtype=np.float64).reshape(-1)[0])


def median_of(quantity: Quantity) -> float:
    """Return the median of a quantity's distribution, cut at its bounds. [SI]"""
    return _number(quantity_draws(quantity, _middle, 1))


def _middle() -> FloatArray:
    return np.zeros(1)


def source_of(quantity: Quantity | None, otherwise: str) -> str:
    """Return where a quantity comes from."""
    return otherwise if quantity is None else quantity.source
