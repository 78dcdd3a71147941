"""How heat spreads along a lagged pipe, and a picture along a strip: what smears a defect.

Each slice of lagging supplies the surface with the flux that its own resistance lets through.
Under a wave of that supply along the pipe the surface answers more weakly the shorter the wave:
the cladding carries heat along as a fin, the lagging conducts lengthwise under it, and the lens
blurs what is left. None of these makes or takes heat, so the mean along the pipe stays.
"""

import numpy as np
from scipy.linalg import eigh_tridiagonal
from scipy.special import ive, kve, ndtri

from cladwatt.types import BoolArray, FloatArray

__all__ = [
    "blur_matrix",
    "lengthwise_admittance",
    "point_spread_sigma",
    "slice_waves",
    "spread_matrix",
    "surface_response",
]

SPOT_SHARE = 0.9
"""Of the radiance of a square measuring spot that comes from within it; common practice."""


def lengthwise_admittance(
    wavenumber: FloatArray, *, conductivity: float, inner_diameter: float, outer_diameter: float
) -> FloatArray:
    """Return what lengthwise conduction in the lagging adds to its conductance, per outer area.

    Parameters
    ----------
    wavenumber : (n,) array
        Of a wave of the surface temperature along the pipe. [1/m]
    conductivity : float
        Of the lagging. [W/(m K)]
    inner_diameter, outer_diameter : float
        [m]

    Returns
    -------
    (n,) array
        Zero for the longest waves, towards conductivity times wavenumber for the shortest.
        [W/(m2 K)]

    Notes
    -----
    Laplace's equation in the annulus with the inner face held: the temperature goes as
    ``I0(m r) K0(m a) - K0(m r) I0(m a)``, and the admittance is the flux at the outer face over
    its temperature, less the radial conductance ``k / (b ln(b/a))``.

    References
    ----------
    .. [1] Carslaw, Jaeger, *Conduction of Heat in Solids*, 2nd edition, Oxford, 1959,
       section 8.3 (finite hollow cylinder, Bessel functions of imaginary argument).
    """
    a, b = 0.5 * inner_diameter, 0.5 * outer_diameter
    found = np.zeros_like(wavenumber, dtype=np.float64)
    waves = wavenumber * (b - a) > 1e-4
    m = wavenumber[waves]
    # scaled functions: exp(m (b - a)) is taken out of both differences
    fall = np.exp(-2 * m * (b - a))
    top = ive(1, m * b) * kve(0, m * a) + kve(1, m * b) * ive(0, m * a) * fall
    bottom = ive(0, m * b) * kve(0, m * a) - kve(0, m * b) * ive(0, m * a) * fall
    found[waves] = conductivity * (m * top / bottom - 1 / (b * np.log(b / a)))
    return np.maximum(found, 0.0)


def surface_response(
    wavenumber: FloatArray,
    *,
    surface_coefficient: float,
    sheet_conductance: float,
    admittance: FloatArray | float = 0.0,
) -> FloatArray:
    """Return the wave of the flux leaving the surface over that of the supply under it.

    Parameters
    ----------
    wavenumber : (n,) array
        [1/m]
    surface_coefficient : float
        Change of the flux leaving with the surface temperature. [W/(m2 K)]
    sheet_conductance : float
        Thickness times conductivity of the cladding. [W/K]
    admittance : (n,) array or float
        Of lengthwise conduction in the lagging. [W/(m2 K)]

    Returns
    -------
    (n,) array
        ``h / (h + k t m^2 + Y(m))``: 1 for the longest waves. [-]

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 3.6 (fin equation), here with a supply that varies along.
    """
    along = sheet_conductance * np.square(wavenumber) + admittance
    return np.asarray(surface_coefficient / (surface_coefficient + along))


def spread_matrix(lengths: FloatArray, response: FloatArray, vectors: FloatArray) -> FloatArray:
    """Return the matrix that spreads a profile along slices of these lengths.

    Parameters
    ----------
    lengths : (n,) array
        [m]
    response : (n,) array
        Of each wave of `slice_waves`.
    vectors : (n, n) array
        Of `slice_waves`.

    Returns
    -------
    (n, n) array
        No heat passes the ends; means weighted by length are kept.
    """
    root = np.sqrt(lengths)
    spread = (vectors * response) @ vectors.T
    return np.asarray(spread * root[None, :] / root[:, None])


def slice_waves(
    lengths: FloatArray, apart: BoolArray | None = None
) -> tuple[FloatArray, FloatArray]:
    """Return the wavenumbers and waves of a row of slices that exchange heat with neighbours.

    Parameters
    ----------
    lengths : (n,) array
        Need not be equal. [m]
    apart : (n - 1,) array of bool, optional
        Neighbours that exchange nothing, since the sheet ends between them.

    Returns
    -------
    wavenumber : (n,) array
        Ascending from 0. [1/m]
    vectors : (n, n) array
        Orthonormal, over square roots of length.
    """
    between = 2.0 / (lengths[1:] + lengths[:-1])
    if apart is not None:
        between = np.where(apart, 0.0, between)
    diagonal = np.zeros(lengths.size)
    diagonal[:-1] += between
    diagonal[1:] += between
    root = np.sqrt(lengths)
    values, vectors = eigh_tridiagonal(diagonal / lengths, -between / (root[1:] * root[:-1]))
    return np.sqrt(np.maximum(values, 0.0)), np.asarray(vectors)


def point_spread_sigma(spot_pixels: float) -> float:
    """Return the standard deviation of the point spread of a camera. [px]

    Parameters
    ----------
    spot_pixels : float
        Across one square measuring spot, which holds `SPOT_SHARE` of a point's radiance.

    Returns
    -------
    float
        Of the Gaussian, pixel included.
    """
    return 0.5 * spot_pixels / float(ndtri(0.5 + 0.5 * np.sqrt(SPOT_SHARE)))


def blur_matrix(count: int, sigma: float) -> FloatArray:
    """Return the matrix that blurs a row of equal bins by a Gaussian.

    Parameters
    ----------
    count : int
    sigma : float
        In bins.

    Returns
    -------
    (count, count) array
        Mirrored at the ends, so that the mean is kept.
    """
    waves = np.pi * np.arange(count) / count
    places = np.arange(count) + 0.5
    vectors = np.cos(waves[None, :] * places[:, None]) * np.sqrt(2.0 / count)
    vectors[:, 0] = np.sqrt(1.0 / count)
    response = np.exp(-0.5 * np.square(waves * sigma))
    return np.asarray((vectors * response) @ vectors.T)
