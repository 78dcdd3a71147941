"""The null: how much the strip of a *sound* pipe may vary. Here false alarms are decided.

Everything is said of the blackbody-equivalent temperature at the lens, where noise lives. The
mean over a run of stations of a sound pipe scatters about the sound level by

- pixel noise, independent beyond its correlated area;
- patches of other emissivity, dirt and convection, seen in the region itself as differences
  between its bands of angle that persist along the run;
- the same as known of the cladding beforehand, since a region alike across its bands may still
  be patchy along the pipe;
- a mirrored scene that changes along the pipe.
"""

import math
from dataclasses import dataclass

import numpy as np

from cladwatt.measure.noise import FrameNoise, robust_sigma
from cladwatt.types import FloatArray

__all__ = ["NullModel", "moving_mean", "null_of"]

PATCH_LENGTH = 0.3
"""Length over which patches of emissivity hang together; assumption. [m]"""


@dataclass(frozen=True)
class NullModel:
    """Scatter of the mean of a run on a sound pipe.

    Attributes
    ----------
    station_sigma : float
        Independent scatter of one station. [K]
    patch_sigma : float
        Scatter of patches, before averaging along. [K]
    own_sigma : float
        What the differences between bands of angle show to persist along. [K]
    scene_sigma : float
        Scatter by a mirrored scene; does not average out along. [K]
    station_length : float
        [m]
    """

    station_sigma: float
    patch_sigma: float
    own_sigma: float
    scene_sigma: float
    station_length: float

    def run_sigma(self, stations: float) -> float:
        """Return the standard uncertainty of the mean contrast of a run. [K]"""
        length = stations * self.station_length
        patches = max(self.patch_sigma, self.own_sigma) / math.sqrt(1 + length / PATCH_LENGTH)
        white = self.station_sigma / math.sqrt(max(stations, 1.0))
        return math.sqrt(white**2 + patches**2 + self.scene_sigma**2)


def null_of(
    lens_temperature: FloatArray,
    *,
    noise: FrameNoise,
    pixels_per_station: float,
    station_length: float,
    reflected_temperature: float,
    emissivity: float,
    indoors: bool,
    lagging_scatter: float = 0.0,
) -> NullModel:
    """Return the null of a region, partly from itself.

    Parameters
    ----------
    lens_temperature : (n_bands, n_stations) array
        [K], NaN where nothing usable.
    noise : FrameNoise
        Of the frame.
    pixels_per_station : float
        Pixels that a station's mean takes in.
    station_length : float
        [m]
    reflected_temperature : float
        Declared. [K]
    emissivity : float
        Declared, in the band.
    indoors : bool
    lagging_scatter : float
        What uneven sound lagging adds to the patches on a line that is not steady. [K]

    Returns
    -------
    NullModel

    Notes
    -----
    Relative patchiness of emissivity of paint, half-bright and bright metal (3, 12 and 15 %) and
    scatter of the mirrored scene along a pipe (0.7 K indoors, 2 K outdoors, times the
    reflectance) are assumptions, no source; the bench is to test them.
    """
    level = float(np.nanmedian(lens_temperature))
    independent = max(pixels_per_station / noise.correlated_area, 1.0)
    station_mean = lens_temperature.mean(axis=0)
    rough = robust_sigma(np.diff(station_mean, 2)) / math.sqrt(6)
    relative_patch = 0.03 if emissivity >= 0.7 else 0.12 if emissivity >= 0.25 else 0.15
    scene = 0.7 if indoors else 2.0
    patches = relative_patch * abs(level - reflected_temperature)
    return NullModel(
        station_sigma=max(noise.sigma / math.sqrt(independent), rough),
        patch_sigma=math.hypot(patches, lagging_scatter),
        own_sigma=_band_differences(lens_temperature, station_length),
        scene_sigma=0.5 * (1 - emissivity) * scene,
        station_length=station_length,
    )


def _band_differences(lens_temperature: FloatArray, station_length: float) -> float:
    """Return the scatter of the mean over bands that their persistent differences imply."""
    bands = lens_temperature.shape[0]
    if bands < 3:
        return 0.0
    usable = lens_temperature[:, np.isfinite(lens_temperature).all(axis=0)]
    if usable.shape[1] < 10:
        return 0.0
    residual = usable - np.median(usable, axis=1, keepdims=True)
    residual -= residual.mean(axis=0)
    window = int(np.clip(round(PATCH_LENGTH / station_length), 3, max(3, usable.shape[1] // 3)))
    smooth = np.stack([moving_mean(row, window) for row in residual])
    # neighbouring bands hang together: half as many independent ones as there are
    return robust_sigma(smooth) / math.sqrt(bands / 2)


def moving_mean(values: FloatArray, window: int) -> FloatArray:
    """Return the centred moving mean, shorter at the ends, NaN left out, (n,)."""
    usable = np.isfinite(values)
    kernel = np.ones(min(window, values.size))
    total = np.convolve(np.where(usable, values, 0.0), kernel, mode="same")
    number = np.convolve(usable.astype(float), kernel, mode="same")
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(np.where(number > 0, total / number, np.nan))
