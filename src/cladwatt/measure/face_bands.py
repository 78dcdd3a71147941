"""Bands of angle across the seen face, complete at every station that carries a number."""

from typing import NamedTuple

import numpy as np

from cladwatt.types import FloatArray

__all__ = ["FaceBands", "bands_of"]


class FaceBands(NamedTuple):
    """Bands of angle across the seen face.

    Attributes
    ----------
    temperature : (n_bands, n_stations) array
        NaN in every band of a station that carries no number. [K]
    view_angle : (n_bands,) array
        Mean angle. [rad]
    extent : (n_bands,) array
        Angle each band covers; they add up to the seen part of the circumference. [rad]
    """

    temperature: FloatArray
    view_angle: FloatArray
    extent: FloatArray


def bands_of(samples: FloatArray, view_angle: FloatArray, bands: int) -> FaceBands:
    """Average sample rows into bands of angle.

    Parameters
    ----------
    samples : (n_across, n_stations) array
        Temperature along a strip, NaN where masked. [K]
    view_angle : (n_across,) array
        [rad]
    bands : int
        Number of bands wanted; fewer where there are fewer rows.

    Returns
    -------
    FaceBands
        A station with less than half of its samples is NaN in every band. A band without a
        sample at a usable station gets the station's level plus the band's own usual difference
        from it; that keeps the structure across the face out of the profile along it.
    """
    rows = np.array_split(np.arange(samples.shape[0]), min(bands, samples.shape[0]))
    gap = np.isfinite(samples).mean(axis=0) < 0.5
    usual = _row_differences(samples)
    level = _station_level(samples, usual)
    filled = np.where(np.isfinite(samples), samples, level + usual[:, None])
    temperature = np.stack([filled[part].mean(axis=0) for part in rows])
    temperature[:, gap] = np.nan
    extent = _extents(view_angle)
    return FaceBands(
        temperature,
        np.array([view_angle[part].mean() for part in rows]),
        np.array([extent[part].sum() for part in rows]),
    )


def _extents(view_angle: FloatArray) -> FloatArray:
    """Return the angle that each of equally spaced sample rows stands for. [rad]"""
    across = np.sin(view_angle)
    half = (across[1] - across[0]) / 2
    return np.asarray(
        np.arcsin(np.minimum(across + half, 1.0)) - np.arcsin(np.maximum(across - half, -1.0))
    )


def _row_differences(samples: FloatArray) -> FloatArray:
    """Return each row's usual difference from the station's mean, from complete stations."""
    complete = np.isfinite(samples).all(axis=0)
    if complete.sum() < 3:
        return np.zeros(samples.shape[0])
    whole = samples[:, complete]
    return np.asarray(np.median(whole - whole.mean(axis=0), axis=1))


def _station_level(samples: FloatArray, usual: FloatArray) -> FloatArray:
    """Return each station's mean with the rows' usual differences taken off first."""
    number = np.isfinite(samples).sum(axis=0)
    total = np.nansum(samples - usual[:, None], axis=0)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(total / np.where(number > 0, number, np.nan))
