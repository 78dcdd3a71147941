"""The supply of heat along a strip, with what smeared it undone: lens, cladding, lagging.

What is looked for is the profile the lagging supplies slice by slice, in kelvin at the lens: what
the strip would show if no slice shared heat with its neighbours. It is seen through a linear
operator, known from camera, cladding and lagging (`physics/spreading.py`), under the patches and
noise of `inverse/null.py`; undone without more it would be noise. The prior says that lagging
mostly goes on as it is and now and then changes at once: differences between neighbours are
Student distributed with one degree of freedom, so that small ones are smoothed away while a jump
costs about the same whatever its height and stays sharp. How strongly to smooth is not set but
drawn with the rest: the scale of the differences has its posterior given the strip's own noise,
that is its marginal likelihood, where the discrepancy principle or cross-validation would give one
value, and the bands would hold too little.

Normal given the weights of the differences, Gamma the weights given the profile: drawn in turn, a
few dozen rounds. That is short of all a longer run would settle: bands come out some tens of per
cent wider than after hundreds of rounds, and no narrower.

References
----------
.. [1] Geman, Yang, "Nonlinear image recovery with half-quadratic regularization", IEEE Trans. Image
   Processing 4 (1995) 932-946 (weights in turn with a Gaussian step).
.. [2] Geweke, "Bayesian treatment of the independent Student-t linear model", J. Applied
   Econometrics 8 (1993) S19-S40 (the same as draws from the posterior).
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from scipy.linalg.lapack import dpotrf, dtrtrs

from cladwatt.inverse.null import PATCH_LENGTH, NullModel
from cladwatt.physics.spreading import (
    blur_matrix,
    lengthwise_admittance,
    slice_waves,
    spread_matrix,
    surface_response,
)
from cladwatt.types import BoolArray, FloatArray

__all__ = ["Profile", "Spreading", "recover_profile"]

MOST_BINS = 128
FEWEST_BINS = 8
FREEDOM = 1.0
"""Of the Student distribution of differences: jumps of any height; assumption."""
SCALES = np.geomspace(1.0, 300.0, 60)
"""Scale of the differences over the least, each as likely beforehand."""
SCATTER_ALONG = 0.01
"""Least scatter of a sound pipe's supply over `PATCH_LENGTH`; assumption."""
START = 10.0
"""Scale of the differences to begin with, over the least: from rough on jumps are found sooner."""
SETTLING, ROUNDS = 25, 12
"""Rounds let go by, and rounds that draws are taken from."""


class Spreading(NamedTuple):
    """What spreads heat along a pipe at its sound level."""

    surface_coefficient: float
    """Change of the flux leaving with the surface temperature. [W/(m2 K)]"""
    sheet_conductance: float
    """Thickness times conductivity of the cladding. [W/K]"""
    conductivity: float = 0.0
    """Of the lagging; 0 leaves its lengthwise conduction out. [W/(m K)]"""
    inner_diameter: float = 1.0
    outer_diameter: float = 2.0
    """Of the lagging. [m]"""

    def matrix(self, lengths: FloatArray, apart: BoolArray | None = None) -> FloatArray:
        """Return the matrix from supply to flux leaving, (n, n), for slices of lengths [m].

        `apart`, (n - 1,), marks neighbours between which the sheet ends.
        """
        wavenumber, vectors = slice_waves(lengths, apart)
        admittance: FloatArray | float = 0.0
        if self.conductivity > 0:
            admittance = lengthwise_admittance(
                wavenumber,
                conductivity=self.conductivity,
                inner_diameter=self.inner_diameter,
                outer_diameter=self.outer_diameter,
            )
        response = surface_response(
            wavenumber,
            surface_coefficient=self.surface_coefficient,
            sheet_conductance=self.sheet_conductance,
            admittance=admittance,
        )
        return spread_matrix(lengths, response, vectors)


@dataclass(frozen=True)
class Profile:
    """Posterior draws along a strip, each (count, n_bins), as at the lens without blur. [K]

    Attributes
    ----------
    supply : array
        What each slice of lagging supplies by itself.
    surface : array
        What leaves the surface, heat spread.
    step : int
        Stations per bin.
    """

    supply: FloatArray
    surface: FloatArray
    step: int


def recover_profile(
    value: FloatArray,
    length: FloatArray,
    *,
    null: NullModel,
    blur_sigma: float,
    spreading: Spreading,
    kelvin_per_rise: float,
    generator: np.random.Generator,
    count: int,
    opened: BoolArray | None = None,
) -> Profile | None:
    """Recover the supply of heat along a strip.

    Parameters
    ----------
    value : (n_stations,) array
        At the lens, mean over the bands of angle; NaN in gaps. [K]
    length : (n_stations,) array
        [m]
    null : NullModel
    blur_sigma : float
        Of the point spread. [stations]
    spreading : Spreading
    kelvin_per_rise : float
        What a loss twice that at the sound level shows at the lens. [K]
    generator : numpy Generator
    count : int
        Draws.
    opened : (n_stations,) array of bool, optional
        Stations without a sheet: they share no heat, and none passes across them.

    Returns
    -------
    Profile or None
        None where too little is seen. In gaps the profile is what both sides leave open.
    """
    step = max(1, -(-value.size // MOST_BINS))
    mean, number, lengths = _binned(value, length, step)
    seen = number > 0
    if seen.sum() < FEWEST_BINS:
        return None
    apart = None
    if opened is not None and opened.any():
        bare = np.logical_or.reduceat(opened, np.arange(0, opened.size, step))
        apart = bare[1:] | bare[:-1]
    spread = spreading.matrix(lengths, apart)
    observed = (blur_matrix(lengths.size, blur_sigma / step) @ spread)[seen]
    level = float(np.average(mean[seen], weights=lengths[seen]))
    data = mean[seen] - level
    covariance = _noise(lengths, seen, number, null)
    inverse = np.asarray(np.linalg.inv(covariance))
    weighted = observed.T @ inverse
    least = SCATTER_ALONG * kelvin_per_rise * np.sqrt(np.mean(lengths) / PATCH_LENGTH)
    white = null.station_sigma / np.sqrt(step)
    supply = _draws(
        weighted @ observed, weighted @ data, max(least, 0.05 * white), generator, count
    )
    surface = supply @ spread.T
    # heat is conserved: the mean over what is seen is the one measured
    share = np.where(seen, lengths, 0.0) / lengths[seen].sum()
    offset = level - surface @ share
    return Profile(supply + offset[:, None], surface + offset[:, None], step)


def _binned(
    value: FloatArray, length: FloatArray, step: int
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return mean, number of usable stations and length of each bin."""
    bins = -(-value.size // step)
    padded = np.full((2, bins * step), np.nan)
    padded[0, : value.size], padded[1, : value.size] = value, length
    values, lengths = padded.reshape(2, bins, step)
    number = np.isfinite(values).sum(axis=1).astype(float)
    total = np.nansum(values, axis=1)
    return total / np.maximum(number, 1.0), number, np.nansum(lengths, axis=1)


def _noise(lengths: FloatArray, seen: BoolArray, number: FloatArray, null: NullModel) -> FloatArray:
    """Return the covariance of noise and patches between seen bins, patches about their mean."""
    place = (np.cumsum(lengths) - 0.5 * lengths)[seen]
    patch = max(null.patch_sigma, null.own_sigma)
    covariance = patch**2 * np.exp(-np.abs(place[:, None] - place[None, :]) / PATCH_LENGTH)
    # patches shared by the whole region are no contrast
    covariance -= covariance.mean(axis=0)
    covariance -= covariance.mean(axis=1, keepdims=True)
    return np.asarray(covariance + np.diag(null.station_sigma**2 / number[seen] + 1e-12))


def _draws(
    precision: FloatArray,
    projected: FloatArray,
    least: float,
    generator: np.random.Generator,
    count: int,
) -> FloatArray:
    """Return draws of the profile, (count, n), given what the data say of it."""
    size = projected.size
    scale = START * least
    weights = np.ones(size - 1)
    shares = np.diff(np.linspace(0, count, ROUNDS + 1).astype(int))
    found = []
    for turn in range(SETTLING + ROUNDS):
        full = precision.copy()
        stiff = weights / scale**2
        index = np.arange(size - 1)
        full[index, index] += stiff
        full[index + 1, index + 1] += stiff
        full[index, index + 1] -= stiff
        full[index + 1, index] -= stiff
        upper, _ = dpotrf(full, overwrite_a=True)
        half, _ = dtrtrs(upper, projected, trans=1)
        number = 1 if turn < SETTLING else max(int(shares[turn - SETTLING]), 1)
        # each draw with its mirror image about the mean, which steadies medians
        noise = generator.standard_normal((size, -(-number // 2)))
        noise = np.concatenate([noise, -noise], axis=1)[:, :number]
        drawn, _ = dtrtrs(upper, half[:, None] + noise)
        if turn >= SETTLING:
            found.append(drawn)
        jumps = np.square(np.diff(drawn[:, 0]))
        rate = 0.5 * (FREEDOM + jumps / scale**2)
        weights = generator.gamma(0.5 * (FREEDOM + 1), 1 / rate)
        scale = np.sqrt((weights * jumps).sum() / generator.chisquare(size - 1))
        scale = min(max(scale, least), least * SCALES[-1])
        scale = _rescaled(drawn[:, 0], scale, precision, projected, least, generator)
    return np.concatenate(found, axis=1)[:, :count].T


def _rescaled(
    drawn: FloatArray,
    scale: float,
    precision: FloatArray,
    projected: FloatArray,
    least: float,
    generator: np.random.Generator,
) -> float:
    """Return another scale, all differences moving with it, as the data have it.

    Given the differences their scale hardly moves, whatever the noise; moved together with them
    it goes where the data let it, and where it began is soon forgotten.
    """
    first = drawn[0]
    shape = (drawn - first) / scale
    power = float(shape @ precision @ shape)
    along = float(shape @ (projected - first * precision.sum(axis=1)))
    scales = least * SCALES
    fit = scales * along - 0.5 * scales**2 * power
    chance = np.exp(fit - fit.max())
    return float(scales[np.searchsorted(np.cumsum(chance), generator.random() * chance.sum())])
