"""A value with its standard uncertainty, its bounds and where it came from."""

import math
from dataclasses import dataclass, replace
from typing import Literal

from cladwatt.errors import InputError

__all__ = ["Quantity", "Remark", "Shape", "declared", "exact"]

Shape = Literal["normal", "rectangular", "lognormal"]


@dataclass(frozen=True)
class Quantity:
    """A quantity as declared or taken from a default, in SI.

    Parameters
    ----------
    value : float
        Best estimate. [SI]
    u : float
        Standard uncertainty (one sigma). [SI]
    lower, upper : float
        Bounds outside which the quantity cannot lie; the distribution is cut there. [SI]
    shape : {"normal", "rectangular", "lognormal"}
        Distribution. For ``lognormal`` `value` is the median and ``u / value`` the sigma of the
        logarithm.
    source : str
        Begins with ``declared`` where the user gave the value (what follows names the source of
        a default uncertainty), else the name of the default's source.
    confidence : {"declared", "high", "medium", "low"}
        How far the source can be trusted; ``declared`` where the user said it.
    """

    value: float
    u: float = 0.0
    lower: float = -math.inf
    upper: float = math.inf
    shape: Shape = "normal"
    source: str = "declared"
    confidence: Literal["declared", "high", "medium", "low"] = "declared"

    def __post_init__(self) -> None:
        if not math.isfinite(self.value):
            raise InputError(f"value is {self.value}; expected a finite number")
        if not (math.isfinite(self.u) and self.u >= 0):
            raise InputError(f"standard uncertainty is {self.u}; expected a finite number >= 0")
        if not self.lower <= self.value <= self.upper:
            raise InputError(
                f"value is {self.value}; expected {self.lower} <= value <= {self.upper}"
            )
        if self.shape == "lognormal" and self.value <= 0:
            raise InputError(f"value is {self.value}; a lognormal quantity must be positive")

    @property
    def is_default(self) -> bool:
        """Whether nobody declared it."""
        return not self.source.startswith("declared")

    def scaled(self, factor: float) -> "Quantity":
        """Return the quantity times a positive exact `factor`."""
        return replace(
            self,
            value=self.value * factor,
            u=self.u * factor,
            lower=self.lower * factor,
            upper=self.upper * factor,
        )


@dataclass(frozen=True)
class Remark:
    """A reason, caution or flag as a key with parameters; the faces put it into words.

    Parameters
    ----------
    key : str
        Key in the wording tables, e.g. ``not_quantified.emissivity_too_low``.
    parameters : tuple of (str, float or str)
        Values for the sentence, SI, named with their unit.
    """

    key: str
    parameters: tuple[tuple[str, float | str], ...] = ()


def declared(value: float, u: float = 0.0, **rest: float) -> Quantity:
    """Return a quantity the user declared."""
    return Quantity(value, u, lower=rest.get("lower", -math.inf), upper=rest.get("upper", math.inf))


def exact(value: float) -> Quantity:
    """Return a quantity without uncertainty."""
    return Quantity(value)
