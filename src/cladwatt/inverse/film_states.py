"""Where an image, or a balance, fits a dry surface and one with a film of water alike."""

from typing import NamedTuple

import numpy as np

from cladwatt.inverse.face import dry_and_wet_readings
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import dry_and_wet_sound
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.quantities import Remark
from cladwatt.types import FloatArray

__all__ = ["film_remarks", "fits_both"]

NOTICED_SHARE = 0.05
"""Of the draws in which both states fit, beyond which it is told."""
NOTICED_DIFFERENCE = 2.0
"""Two readings closer than this are one; assumption. [K]"""


class _States(NamedTuple):
    share: float
    dry: float
    wet: float


def film_remarks(seen: Seen) -> tuple[Remark, ...]:
    """Return remarks where the draws allow a dry surface above the dew point and a wet one below.

    Parameters
    ----------
    seen : Seen

    Returns
    -------
    tuple of Remark
        On the reading of the image, and on what sound lagging would gain. Of the reading the dry
        one was taken, of the balance one of the two.
    """
    remarks = []
    read = _reading(seen)
    if read is not None:
        parameters = (
            ("share", read.share),
            ("dry_C", read.dry - ZERO_CELSIUS),
            ("wet_C", read.wet - ZERO_CELSIUS),
        )
        remarks.append(Remark("remark.wet_or_dry_reading", parameters))
    sound = _sound(seen)
    if sound is not None:
        parameters = (
            ("share", sound.share),
            ("dry_W_per_m", -sound.dry),
            ("wet_W_per_m", -sound.wet),
        )
        remarks.append(Remark("remark.wet_or_dry_balance", parameters))
    return tuple(remarks)


def fits_both(seen: Seen) -> bool:
    """Return whether the image fits a dry surface and a wet, far colder one alike."""
    return _reading(seen) is not None


def _noticed(both: FloatArray, dry: FloatArray, wet: FloatArray) -> _States | None:
    share = float(np.mean(both))
    if share <= NOTICED_SHARE:
        return None
    fit = both > 0
    return _States(share, float(np.median(dry[fit])), float(np.median(wet[fit])))


def _reading(seen: Seen) -> _States | None:
    dew = seen.frame.dew_point
    if dew is None or seen.vapour is None:
        return None
    level = np.array([np.median(seen.face.temperature[:, seen.usable])])
    dry, wet = (
        reading[:, 0, 0]
        for reading in dry_and_wet_readings(level, np.zeros(1), seen.frame, seen.line_draws)
    )
    both = (dry >= dew) & (wet < dew) & (dry - wet > NOTICED_DIFFERENCE)
    return _noticed(both.astype(float), dry, wet)


def _sound(seen: Seen) -> _States | None:
    states = dry_and_wet_sound(seen.line_draws, seen.frame)
    if states is None:
        return None
    return _noticed(states.both.astype(float), states.dry_loss, states.wet_loss)
