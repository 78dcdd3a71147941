"""A camera's band: radiance of a black body in it against temperature, and the inverse.

Both directions are tabulated once per band and looked up linearly on uniform grids, which is as
quick as a fourth power and good to 1e-7. See `Band` for what was traded.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final, NamedTuple

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.constants import FIRST_RADIATION_RADIANCE, SECOND_RADIATION
from cladwatt.physics.lookup import UniformTable, uniform_table
from cladwatt.types import FloatArray, FloatLike

__all__ = ["TABLE_LOWER", "TABLE_UPPER", "Band", "planck_spectral_radiance"]

#: Ends of the tables. [K]
TABLE_LOWER: Final = 90.0
TABLE_UPPER: Final = 1600.0

_MARGIN: Final = 0.05  # so that the ends themselves are safely inside [K]
_INTERVALS: Final = 65_536
_NODES: Final = 4_097
_PIECE: Final = 0.5e-6  # widest piece one Gauss rule covers [m]
_ORDER: Final = 10
_WAVELENGTHS_ACCEPTED: Final = (1.5e-6, 30e-6)


def planck_spectral_radiance(wavelength: FloatLike, temperature: FloatLike) -> FloatArray:
    """Spectral radiance of a black body in vacuum.

    Parameters
    ----------
    wavelength : float or array
        Wavelength. [m]
    temperature : float or array
        Temperature. [K]

    Returns
    -------
    array, broadcast shape
        Spectral radiance. [W/(m3 sr)]

    Notes
    -----
    ``L = 2 h c^2 / (lambda^5 (exp(h c / (lambda k T)) - 1))`` (Planck 1900; ISO 80000-7).
    """
    wave = np.asarray(wavelength, dtype=np.float64)
    exponent = SECOND_RADIATION / (wave * temperature)
    with np.errstate(over="ignore"):
        return np.asarray(FIRST_RADIATION_RADIANCE / (wave**5 * np.expm1(exponent)))


@dataclass(frozen=True)
class Band:
    """Spectral response of a camera, piecewise linear, zero outside its ends.

    Parameters
    ----------
    wavelengths : tuple of float
        Increasing. [m]
    responses : tuple of float
        Relative response at the wavelengths, >= 0. [-]

    Notes
    -----
    Tables run from 90 K to 1600 K. For long-wave bands between -60 °C and 800 °C the radiance is
    within 1e-7 of the integral and radiance followed by its inverse returns the temperature
    within 1e-6 K. Trade: 65 536 intervals per direction (2 MiB per band, built in some tens of
    milliseconds) with one linear step each, instead of a small table with cubic steps, which
    takes about twice as long per frame. Each chord is moved by half its
    largest error. The inverse is tabulated against the fourth root of the
    radiance, in which temperature is nearly straight. In a mid-wave band (3-5 µm) the same holds
    for the radiance; the round trip stays within 5e-6 K.

    Only ratios of radiances matter to a correction, so the scale of `responses` is free.
    """

    wavelengths: tuple[float, ...]
    responses: tuple[float, ...]

    def __post_init__(self) -> None:
        lowest, highest = _WAVELENGTHS_ACCEPTED
        waves = np.asarray(self.wavelengths)
        if waves.ndim != 1 or waves.size < 2 or len(self.responses) != waves.size:
            raise InputError(
                f"band has {waves.size} wavelengths and {len(self.responses)} responses; "
                "expected two or more of each, as many of one as of the other"
            )
        if not (np.all(np.diff(waves) > 0) and waves[0] >= lowest and waves[-1] <= highest):
            raise InputError(
                f"band runs from {waves[0]:g} m to {waves[-1]:g} m; expected increasing "
                f"wavelengths between {lowest:g} m and {highest:g} m"
            )
        response = np.asarray(self.responses)
        if not (np.all(np.isfinite(response)) and np.all(response >= 0) and np.any(response > 0)):
            raise InputError(
                f"band response runs from {response.min():g} to {response.max():g}; "
                "expected finite values >= 0, not all zero"
            )

    @classmethod
    def rectangular(cls, lower: float, upper: float) -> Band:
        """Return the band of response 1 between two wavelengths in metres."""
        return cls((float(lower), float(upper)), (1.0, 1.0))

    @classmethod
    def from_response(cls, wavelength: FloatArray, response: FloatArray) -> Band:
        """Return a band from a measured response, linear between the points.

        Parameters
        ----------
        wavelength : (points,) array
            Increasing. [m]
        response : (points,) array
            Relative response, >= 0. [-]
        """
        return cls(
            tuple(float(value) for value in np.ravel(wavelength)),
            tuple(float(value) for value in np.ravel(response)),
        )

    @property
    def limits(self) -> tuple[float, float]:
        """First and last wavelength in metres."""
        return self.wavelengths[0], self.wavelengths[-1]

    def radiance(self, temperature: FloatLike) -> FloatArray:
        """Return the in-band radiance of a black body.

        Parameters
        ----------
        temperature : float or array
            Any shape; NaN stays NaN. [K]

        Returns
        -------
        array, same shape
            Radiance; NaN outside 90 K to 1600 K. [W/(m2 sr)]
        """
        return _tables(self).radiance.look_up(temperature)

    def radiance_derivative(self, temperature: FloatLike) -> FloatArray:
        """Return the derivative of the in-band radiance with respect to temperature.

        Parameters
        ----------
        temperature : float or array
            Any shape; NaN stays NaN. [K]

        Returns
        -------
        array, same shape
            Derivative; NaN outside 90 K to 1600 K. [W/(m2 sr K)]
        """
        return _tables(self).derivative.look_up(temperature)

    def temperature(self, radiance: FloatLike) -> FloatArray:
        """Return the temperature of the black body that has this in-band radiance.

        Parameters
        ----------
        radiance : float or array
            Any shape; NaN stays NaN. [W/(m2 sr)]

        Returns
        -------
        array, same shape
            Temperature, increasing with radiance; NaN where the radiance is not positive or
            belongs to a temperature outside 90 K to 1600 K. [K]
        """
        return _tables(self).temperature.look_up(radiance)


class _Tables(NamedTuple):
    radiance: UniformTable
    derivative: UniformTable
    temperature: UniformTable


def _quadrature(band: Band) -> tuple[FloatArray, FloatArray]:
    """Return wavelengths and weights (response included) of a composite Gauss rule."""
    edges = [
        np.linspace(lower, upper, max(1, int(np.ceil((upper - lower) / _PIECE))) + 1)
        for lower, upper in zip(band.wavelengths[:-1], band.wavelengths[1:], strict=True)
    ]
    points, weights = np.polynomial.legendre.leggauss(_ORDER)
    lower = np.concatenate([edge[:-1] for edge in edges])[:, None]
    upper = np.concatenate([edge[1:] for edge in edges])[:, None]
    wave = (0.5 * (lower + upper) + 0.5 * (upper - lower) * points).ravel()
    weight = (0.5 * (upper - lower) * weights).ravel()
    return wave, weight * np.interp(wave, band.wavelengths, band.responses)


def _logarithmic_nodes(band: Band, inverse: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return ln L and d(ln L)/d(1/T) at the inverse temperatures by quadrature."""
    wave, weight = _quadrature(band)
    front = FIRST_RADIATION_RADIANCE * weight / wave**5
    exponent = SECOND_RADIATION * np.outer(inverse, 1.0 / wave)
    decay = np.exp(-exponent)
    occupation = decay / -np.expm1(-exponent)
    radiance = occupation @ front
    change = -(occupation * (1.0 + occupation)) @ (front * SECOND_RADIATION / wave)
    return np.log(radiance), change / radiance


def _hermite(
    nodes: FloatArray, values: FloatArray, slopes: FloatArray, at: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return a cubic Hermite interpolant on uniform nodes and its derivative."""
    step = nodes[1] - nodes[0]
    cell = np.clip(((at - nodes[0]) / step).astype(np.intp), 0, nodes.size - 2)
    t = (at - nodes[cell]) / step
    rise = values[cell + 1] - values[cell]
    first, second = step * slopes[cell] - rise, rise - step * slopes[cell + 1]
    bend = t * (1.0 - t)
    value = values[cell] + t * rise + bend * ((1.0 - t) * first + t * second)
    bend_slope = (1.0 - 2.0 * t) * ((1.0 - t) * first + t * second) + bend * (second - first)
    return value, (rise + bend_slope) / step


@lru_cache(maxsize=32)
def _tables(band: Band) -> _Tables:
    nodes = np.linspace(1.0 / (TABLE_UPPER + _MARGIN), 1.0 / (TABLE_LOWER - _MARGIN), _NODES)
    logarithm, slope = _logarithmic_nodes(band, nodes)
    temperature = np.linspace(TABLE_LOWER - _MARGIN, TABLE_UPPER + _MARGIN, _INTERVALS + 1)
    log_radiance, log_slope = _hermite(nodes, logarithm, slope, 1.0 / temperature)
    radiance = np.exp(log_radiance)
    derivative = -log_slope * radiance / temperature**2
    root = np.linspace(radiance[0] ** 0.25, radiance[-1] ** 0.25, _INTERVALS + 1)
    target = 4.0 * np.log(root)
    inverse = 1.0 / np.interp(root**4, radiance, temperature)
    for _ in range(3):  # Newton from an excellent start; quadratic, so two would do
        value, change = _hermite(nodes, logarithm, slope, inverse)
        inverse -= (value - target) / change
    return _Tables(
        radiance=uniform_table(temperature, radiance),
        derivative=uniform_table(temperature, derivative),
        temperature=uniform_table(root, 1.0 / inverse, fourth_root=True),
    )
