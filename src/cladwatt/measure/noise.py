"""Noise of a frame: its size per pixel and how far it hangs together."""

from dataclasses import dataclass

import numpy as np

from cladwatt.types import FloatArray

__all__ = ["FrameNoise", "estimate_noise", "robust_sigma"]


@dataclass(frozen=True)
class FrameNoise:
    """Temperature noise of one pixel [K] and the area over which it hangs together [px2]."""

    sigma: float
    correlated_area: float


def robust_sigma(values: FloatArray) -> float:
    """Return the standard deviation by the median absolute deviation; NaN left out, 0 if empty."""
    usable = values[np.isfinite(values)]
    if usable.size == 0:
        return 0.0
    return float(1.4826 * np.median(np.abs(usable - np.median(usable))))


def estimate_noise(temperature: FloatArray) -> FrameNoise:
    """Estimate the pixel noise of a frame from differences that cancel smooth scenes.

    Parameters
    ----------
    temperature : (rows, cols) array
        [K], NaN where masked.

    Returns
    -------
    FrameNoise

    Notes
    -----
    ``d = t[i] - (t[i-1] + t[i+1]) / 2`` of independent noise has the variance 1.5 sigma^2 and
    its neighbours the correlation -2/3. Smoothed or resampled frames show a weaker negative
    correlation; noise smoothed by a Gaussian of width s has the correlation tabulated below,
    from which s, the true sigma and the correlated area ``1 + 4 pi s^2`` follow. A frame may be
    resampled further down its columns than along its rows: the product of the lengths over which
    noise hangs together each way counts where it is larger. Sigma is that along the rows, where
    a pattern of columns shows and the edges of level pipes do not.
    """
    sigma, width = _one_way(temperature)
    _, down = _one_way(temperature.T)
    area = max(1 + 4 * np.pi * width**2, _correlated_length(width) * _correlated_length(down))
    return FrameNoise(sigma, float(area))


def _one_way(temperature: FloatArray) -> tuple[float, float]:
    """Return sigma [K], and the width of its smoothing [px] along the second axis."""
    differences = temperature[:, 1:-1] - 0.5 * (temperature[:, :-2] + temperature[:, 2:])
    sigma_difference = robust_sigma(differences)
    if sigma_difference == 0:
        return 0.0, 0.0
    # the robust core only: edges of pipes are differences too
    core = np.where(np.abs(differences) < 3 * sigma_difference, differences, np.nan)
    here, beside = core[:, :-1].ravel(), core[:, 1:].ravel()
    usable = np.isfinite(here) & np.isfinite(beside)
    if usable.sum() < 50:
        return float(sigma_difference / np.sqrt(1.5)), 0.0
    correlation = float(np.mean(here[usable] * beside[usable]) / np.nanvar(core))
    width = float(np.interp(correlation, _CORRELATIONS, _WIDTHS)) if correlation > -0.65 else 0.0
    sigma = sigma_difference / np.sqrt(_difference_variance(width))
    return float(sigma), width


def _autocorrelation(width: float, lag: int) -> float:
    """Autocorrelation of white noise smoothed by a sampled Gaussian of this width."""
    offsets = np.arange(-12, 13)
    kernel = np.exp(-0.5 * (offsets / width) ** 2) if width > 0 else (offsets == 0).astype(float)
    full = np.convolve(kernel, kernel[::-1])
    middle = full.size // 2
    return float(full[middle + lag] / full[middle])


def _correlated_length(width: float) -> float:
    """Sum of the autocorrelation over all lags, 2 sqrt(pi) times a width not small. [px]"""
    return 1 + 2 * sum(_autocorrelation(width, lag) for lag in range(1, 13))


def _difference_variance(width: float) -> float:
    r1, r2 = (_autocorrelation(width, lag) for lag in (1, 2))
    return 1.5 - 2 * r1 + 0.5 * r2


def _difference_correlation(width: float) -> float:
    r1, r2, r3 = (_autocorrelation(width, lag) for lag in (1, 2, 3))
    covariance = -1.0 + 1.75 * r1 - r2 + 0.25 * r3
    return covariance / _difference_variance(width)


_WIDTHS = np.linspace(0.0, 1.5, 31)
_CORRELATIONS = np.array([_difference_correlation(width) for width in _WIDTHS])
