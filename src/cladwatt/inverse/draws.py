"""Draws of declared quantities, keyed by seed, owner and quantity.

All who share a quantity share its draws, whatever the order of work or the number of workers.
"""

import hashlib
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import gammaincinv, ndtr, ndtri

from cladwatt.quantities import Quantity
from cladwatt.types import FloatArray

__all__ = ["DrawBook", "quantity_draws"]


@dataclass(frozen=True)
class DrawBook:
    """Gives the same standard normal draws to everyone who asks under the same key.

    Parameters
    ----------
    seed : int
        Seed of the run.
    count : int
        Number of draws.
    """

    seed: int
    count: int

    def generator(self, owner: str, quantity: str) -> np.random.Generator:
        """Return the generator of a key; independent between keys."""
        digest = hashlib.sha256(f"{self.seed}\0{owner}\0{quantity}".encode()).digest()
        return np.random.Generator(np.random.Philox(key=int.from_bytes(digest[:16], "big")))

    def normal(self, owner: str, quantity: str) -> FloatArray:
        """Return stratified standard normal draws, (count,).

        Each of `count` equally likely slices of the distribution holds one draw, in random
        order (Latin hypercube), which steadies medians and percentiles.

        References
        ----------
        .. [1] McKay, Beckman, Conover, "A comparison of three methods for selecting values of
           input variables in the analysis of output from a computer code", Technometrics 21
           (1979) 239-245.
        """
        generator = self.generator(owner, quantity)
        slices = generator.permutation(self.count) + generator.random(self.count)
        return np.asarray(ndtri(slices / self.count))

    def uniform(self, owner: str, quantity: str) -> FloatArray:
        """Return stratified uniform draws on 0..1, (count,)."""
        return np.asarray(ndtr(self.normal(owner, quantity)))

    def quantity(self, owner: str, name: str, quantity: Quantity) -> FloatArray:
        """Return draws of a declared quantity, (count,)."""
        return quantity_draws(quantity, lambda: self.normal(owner, name), self.count)

    def shares(self, owner: str, quantity: str, mean: FloatArray, directions: float) -> FloatArray:
        """Return draws of shares that sum to one about their mean, (parts, count).

        Dirichlet, with the variance of the shares of `directions` draws of one part each.

        Parameters
        ----------
        owner, quantity : str
        mean : (parts, count) array
            Not negative, the sum over the parts 1.
        directions : float
            Above 1.
        """
        uniform = [self.uniform(owner, f"{quantity}_{part}") for part in range(len(mean))]
        parts = gammaincinv(np.maximum((directions - 1) * mean, 1e-9), np.stack(uniform))
        total = parts.sum(axis=0)
        return np.where(total > 0, parts / np.where(total > 0, total, 1.0), mean)

    def mixed(self, name: str, *owners: tuple[str, float]) -> FloatArray:
        """Return standard normal draws made of parts with these (owner, share of variance)."""
        total = np.zeros(self.count)
        for owner, share in owners:
            total += np.sqrt(share) * self.normal(owner, name)
        return total


def quantity_draws(quantity: Quantity, normal: Callable[[], FloatArray], count: int) -> FloatArray:
    """Turn standard normal draws into draws of a quantity.

    Parameters
    ----------
    quantity : Quantity
        Value, standard uncertainty, shape and bounds. [SI]
    normal : callable
        Gives (count,) standard normal draws; not called for an exact quantity.
    count : int
        Number of draws.

    Returns
    -------
    (count,) array
        Draws by the inverse distribution function, cut (not piled up) at the bounds. [SI]

    References
    ----------
    .. [1] JCGM 101:2008, clause 6.4 (distributions) and annex C.2 (drawing from them).
    """
    if quantity.u == 0:
        return np.full(count, quantity.value)
    probability = ndtr(normal())
    if quantity.shape == "rectangular":
        low = max(quantity.value - np.sqrt(3) * quantity.u, quantity.lower)
        high = min(quantity.value + np.sqrt(3) * quantity.u, quantity.upper)
        return np.asarray(low + (high - low) * probability)
    if quantity.shape == "lognormal":
        spread = quantity.u / quantity.value
        low, high = (
            np.log(max(bound, 1e-300) / quantity.value) / spread if np.isfinite(bound) else bound
            for bound in (max(quantity.lower, 0.0), quantity.upper)
        )
        return np.asarray(quantity.value * np.exp(spread * _cut_normal(probability, low, high)))
    low = (quantity.lower - quantity.value) / quantity.u
    high = (quantity.upper - quantity.value) / quantity.u
    return np.asarray(quantity.value + quantity.u * _cut_normal(probability, low, high))


def _cut_normal(probability: FloatArray, low: float, high: float) -> FloatArray:
    """Quantiles of the standard normal distribution cut at `low` and `high`."""
    below, above = ndtr(low), ndtr(high)
    return np.asarray(ndtri(below + (above - below) * probability))
