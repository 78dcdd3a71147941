"""What lagging that was declared wet or frozen says of a region beside its image."""

import numpy as np

from cladwatt.inverse.result import Interval
from cladwatt.inverse.sound import SoundDraws
from cladwatt.quantities import Remark
from cladwatt.types import FloatArray

__all__ = ["declared_condition", "declared_level"]

AGED_FROM = 1.1
"""Times the sound loss, from where lagging that is wet or frozen throughout counts as damaged."""


def declared_level(
    loss: FloatArray, sound: SoundDraws | None, aged_level: float | None
) -> float | None:
    """Return the probability that the whole is worse than sound.

    By the states of the joint estimate; lagging declared wet or frozen has no part in these, and
    the draws themselves tell.
    """
    if sound is None or sound.declared_loss is None:
        return aged_level
    return float(np.mean(loss / sound.heat_loss > AGED_FROM))


def declared_condition(loss: Interval | None) -> tuple[Remark, ...]:
    """Return the word on lagging that was declared wet or frozen."""
    if loss is None:
        return ()
    low, high = sorted((abs(loss.low), abs(loss.high)))
    parameters = (
        ("loss_W_per_m", abs(loss.median)),
        ("low_W_per_m", low),
        ("high_W_per_m", high),
    )
    return (Remark("remark.declared_condition", parameters),)
