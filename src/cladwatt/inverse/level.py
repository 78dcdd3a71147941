"""Ageing throughout: a level argument, which every shared error can imitate."""

import numpy as np
from scipy import stats

from cladwatt.types import FloatArray

__all__ = ["AGED_THRESHOLD", "aged_probability"]

AGED_THRESHOLD = 0.10
"""Ageing counts as damage where it raises the loss by more than this share."""
PRIOR_SOUND, PRIOR_AGED = 0.55, 0.20
"""Prior shares of sound and aged regions (the rest is local damage); assumption."""
AGED_MEAN_RISE = 0.4
"""Rise of the loss by ageing, exponential with this mean; assumption."""
SOUND_SCATTER = 0.05
"""Scatter of sound lagging about its line's installation factor; assumption."""
FREEDOM = 8.0


def aged_probability(base_loss: FloatArray, sound_loss: FloatArray) -> float:
    """Return the probability that the lagging has aged throughout by more than 10 %.

    Parameters
    ----------
    base_loss : (count,) array
        Draws of the loss at the region's sound level, from the image. [W/m]
    sound_loss : (count,) array
        Draws of what sound lagging would lose, same shared draws. [W/m]

    Returns
    -------
    float
        Posterior over {sound, aged}, given no local damage; about the prior where the image
        says little, NaN where there is no number.

    Notes
    -----
    The relative excess as the image gives it is compared with 0 (sound) and with an exponential
    rise (aged), its error Student distributed with the spread of the draws. Taking the spread of
    the draws for the error of the image neglects that the spread itself depends on the truth.
    """
    relative = base_loss / sound_loss - 1
    relative = relative[np.isfinite(relative)]
    if relative.size < 10:
        return float("nan")
    low, middle, high = np.percentile(relative, [15.87, 50.0, 84.13])
    spread = float(np.hypot((high - low) / 2, SOUND_SCATTER))
    rises = np.linspace(0.0, 4.0, 401)
    prior = stats.expon.pdf(rises, scale=AGED_MEAN_RISE)
    prior /= prior.sum()
    likelihood = stats.t.pdf((middle - rises) / spread, FREEDOM)
    aged = PRIOR_AGED * prior * likelihood
    sound = PRIOR_SOUND * float(stats.t.pdf(middle / spread, FREEDOM))
    return float(aged[rises > AGED_THRESHOLD].sum() / (aged.sum() + sound))
