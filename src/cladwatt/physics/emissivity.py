"""Emissivity against the angle of view, and the ratio of hemispherical to normal.

Smooth surfaces follow the Fresnel relations. Cladding is between two end members: a dielectric
coat (paint, plastic, thick oxide, dirt), whose emissivity falls towards grazing view, and bare
metal, whose emissivity rises and, in the last degrees only, falls.
"""

from __future__ import annotations

from functools import lru_cache
from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "BARE_METAL_EMISSIVITY",
    "COAT_EMISSIVITY",
    "COAT_REFRACTIVE_INDEX",
    "directional_emissivity",
    "fresnel_dielectric_emissivity",
    "fresnel_metal_emissivity",
    "hemispherical_emissivity",
    "hemispherical_to_normal_ratio",
    "metal_index_hagen_rubens",
]

#: Refractive index of paint binders and plastics in the long-wave infrared, typical. [-]
COAT_REFRACTIVE_INDEX: Final = 1.5
#: Near-normal emissivity of the bare and of the covered part of weathered metal. [-]
BARE_METAL_EMISSIVITY: Final = 0.05
COAT_EMISSIVITY: Final = 0.90

_STEEPEST: Final = np.deg2rad(89.0)  # nothing is measured beyond; keeps the result above zero
_QUADRATURE_ORDER: Final = 400


def _checked_angle(view_angle: FloatLike) -> FloatArray:
    angle = np.abs(np.asarray(view_angle, dtype=np.float64))
    if np.any(angle > np.pi / 2 + 1e-9):
        raise InputError(
            f"view angle is {np.nanmax(angle):g} rad; expected 0 to pi/2 from the surface's normal"
        )
    return angle


def fresnel_dielectric_emissivity(angle: FloatLike, refractive_index: FloatLike) -> FloatArray:
    """Emissivity of a smooth opaque dielectric, both polarisations averaged.

    Parameters
    ----------
    angle : float or array
        Angle from the normal, 0 to pi/2 (its sign does not matter). [rad]
    refractive_index : float or array
        Refractive index, >= 1. [-]

    Returns
    -------
    array, broadcast shape
        Emissivity, 0 at grazing. [-]

    Raises
    ------
    InputError
        If the angle exceeds pi/2 or the index is below 1.

    References
    ----------
    .. [1] M. F. Modest, *Radiative Heat Transfer*, chapter 2 (Fresnel's relations).
    .. [2] R. Siegel, J. R. Howell, *Thermal Radiation Heat Transfer*, NASA SP-164.
    """
    return fresnel_metal_emissivity(angle, refractive_index, 0.0)


def fresnel_metal_emissivity(
    angle: FloatLike, refractive_index: FloatLike, extinction: FloatLike
) -> FloatArray:
    """Emissivity of a smooth absorbing surface of complex index n - ik, polarisations averaged.

    Parameters
    ----------
    angle : float or array
        Angle from the normal, 0 to pi/2 (its sign does not matter). [rad]
    refractive_index, extinction : float or array
        Real part, > 0, and imaginary part, >= 0, of the index. At extinction 0 the refractive
        index must be at least 1. [-]

    Returns
    -------
    array, broadcast shape
        Emissivity, 0 at grazing. [-]

    Raises
    ------
    InputError
        If the angle exceeds pi/2 or the index is not one of an opaque body in air.

    Notes
    -----
    ``r_s = (cos - g)/(cos + g)``, ``r_p = (m^2 cos - g)/(m^2 cos + g)``, ``g^2 = m^2 - sin^2``,
    ``emissivity = 1 - (|r_s|^2 + |r_p|^2)/2`` with the complex index m.

    References
    ----------
    .. [1] As `fresnel_dielectric_emissivity`.
    """
    theta = _checked_angle(angle)
    real = np.asarray(refractive_index, dtype=np.float64)
    imaginary = np.asarray(extinction, dtype=np.float64)
    if np.any(real <= 0) or np.any(imaginary < 0) or np.any((imaginary == 0) & (real < 1)):
        raise InputError(
            f"refractive index is {refractive_index} with extinction {extinction}; expected an "
            "index above 0 (at least 1 without extinction) and an extinction >= 0"
        )
    squared = (real + 1j * imaginary) ** 2
    cosine = np.cos(theta)
    inner = np.sqrt(squared - np.sin(theta) ** 2)
    perpendicular = np.abs((cosine - inner) / (cosine + inner)) ** 2
    parallel = np.abs((squared * cosine - inner) / (squared * cosine + inner)) ** 2
    return np.asarray(1.0 - 0.5 * (perpendicular + parallel))


def metal_index_hagen_rubens(normal_emissivity: FloatLike) -> FloatArray:
    """Return n = k that gives a bare metal this normal emissivity.

    Parameters
    ----------
    normal_emissivity : float or array
        Normal emissivity, 0 < value <= 0.8. [-]

    Returns
    -------
    array, same shape
        Real and imaginary part of the index. [-]

    Raises
    ------
    InputError
        If the emissivity is outside (0, 0.8]: no surface with n = k has it.

    Notes
    -----
    Far in the infrared a metal's n and k grow equal (Hagen and Rubens 1903). Solves
    ``emissivity = 4 n / ((n + 1)^2 + n^2)`` for the larger root.
    """
    value = np.asarray(normal_emissivity, dtype=np.float64)
    if np.any((value <= 0) | (value > 0.8)):
        raise InputError(f"normal emissivity is {normal_emissivity}; expected 0 < value <= 0.8")
    half = 2.0 - value
    return np.asarray((half + np.sqrt(half**2 - 2.0 * value**2)) / (2.0 * value))


def _coat_shape(angle: FloatArray) -> FloatArray:
    """Return the coat's emissivity over its normal value."""
    normal = 1.0 - ((COAT_REFRACTIVE_INDEX - 1.0) / (COAT_REFRACTIVE_INDEX + 1.0)) ** 2
    return fresnel_dielectric_emissivity(np.minimum(angle, _STEEPEST), COAT_REFRACTIVE_INDEX) / (
        normal
    )


def _metal_shape(angle: FloatArray) -> FloatArray:
    """Return the bare metal's emissivity over its normal value."""
    index = metal_index_hagen_rubens(BARE_METAL_EMISSIVITY)
    shape = fresnel_metal_emissivity(np.minimum(angle, _STEEPEST), index, index)
    return np.asarray(shape / BARE_METAL_EMISSIVITY)


def _metal_part(normal_emissivity: FloatArray, is_metal: bool | BoolArray) -> FloatArray:
    """Return the share of the normal emissivity that comes from bare metal, 0 to 1."""
    reach = COAT_EMISSIVITY - BARE_METAL_EMISSIVITY
    covered = np.clip((normal_emissivity - BARE_METAL_EMISSIVITY) / reach, 0.0, 1.0)
    with np.errstate(invalid="ignore"):
        part = np.where(
            normal_emissivity <= BARE_METAL_EMISSIVITY,
            1.0,
            (1.0 - covered) * BARE_METAL_EMISSIVITY / normal_emissivity,
        )
    return np.where(is_metal, part, 0.0)


def _checked_emissivity(normal_emissivity: FloatLike) -> FloatArray:
    value = np.asarray(normal_emissivity, dtype=np.float64)
    wrong = (value <= 0) | (value > 1)
    if np.any(wrong):
        raise InputError(
            f"normal emissivity is {value[wrong].ravel()[0]:g}; expected 0 < emissivity <= 1"
        )
    return value


def directional_emissivity(
    normal_emissivity: FloatLike, view_angle: FloatLike, is_metal: bool | BoolArray
) -> FloatArray:
    """Emissivity of cladding in the direction of view, from its near-normal value.

    Parameters
    ----------
    normal_emissivity : float or array
        Near-normal emissivity in the band, 0 < value <= 1. [-]
    view_angle : float or array
        Angle between view and surface normal, 0 to pi/2 (its sign does not matter); beyond 89°
        the value at 89° is given. [rad]
    is_metal : bool or array of bool
        Whether the cladding is bare metal, bright or weathered; else a coat.

    Returns
    -------
    array, broadcast shape
        Emissivity, above 0 and at most 1; NaN where an argument is NaN. [-]

    Raises
    ------
    InputError
        If the emissivity is outside (0, 1] or the angle exceeds pi/2.

    Notes
    -----
    *Coat*: the normal value times the Fresnel curve of refractive index 1.5 over its normal value
    (2 % below normal at 51°, 5 % at 60°, 22 % at 75°). *Metal* up to a normal emissivity of 0.05:
    the normal value times the Fresnel curve of a metal with n = k (Hagen and Rubens), which rises
    by a quarter at 60° and doubles at 75°. *Weathered metal* is taken as a patchwork of bare
    metal at 0.05 and of covered areas (oxide, dirt) at 0.90 that emit like a coat; the shares
    follow from the normal value. Already at 0.2 the covered part emits most and the curve is
    nearly flat to 60°.

    Assumed: optically smooth; real surfaces are rougher than that and vary less with angle. The
    end members are textbook optics; the patchwork between them is a model without a published
    check, so weight or drop pixels beyond 60°.

    References
    ----------
    .. [1] As `fresnel_dielectric_emissivity`.
    """
    normal = _checked_emissivity(normal_emissivity)
    angle = _checked_angle(view_angle)
    coat = _coat_shape(angle)
    if not np.any(is_metal):
        return np.asarray(normal * coat)
    part = _metal_part(normal, is_metal)
    return np.asarray(normal * (coat + part * (_metal_shape(angle) - coat)))


def hemispherical_emissivity(angle: FloatArray, emissivity: FloatArray) -> FloatArray:
    """Return the hemispherical mean of a directional emissivity.

    Parameters
    ----------
    angle : (angles,) array
        Increasing from 0 to pi/2. [rad]
    emissivity : (..., angles) array
        Directional emissivity at those angles. [-]

    Returns
    -------
    (...) array
        ``2 * integral of emissivity sin(theta) cos(theta) d(theta)``, by trapezia in sin^2, so
        that a constant comes back exactly. [-]
    """
    weight = np.sin(np.asarray(angle, dtype=np.float64)) ** 2
    values = np.asarray(emissivity, dtype=np.float64)
    return np.asarray(np.sum(0.5 * (values[..., 1:] + values[..., :-1]) * np.diff(weight), axis=-1))


@lru_cache(maxsize=1)
def _hemispherical_shapes() -> tuple[float, float]:
    points, weights = np.polynomial.legendre.leggauss(_QUADRATURE_ORDER)
    angle = np.pi / 4 * (points + 1.0)
    lambertian = np.pi / 4 * weights * np.sin(2.0 * angle)
    return float(lambertian @ _coat_shape(angle)), float(lambertian @ _metal_shape(angle))


def hemispherical_to_normal_ratio(
    normal_emissivity: FloatLike, is_metal: bool | BoolArray
) -> FloatArray:
    """Hemispherical over near-normal emissivity of cladding, by the same model.

    Parameters
    ----------
    normal_emissivity : float or array
        Near-normal emissivity, 0 < value <= 1. [-]
    is_metal : bool or array of bool
        As in `directional_emissivity`.

    Returns
    -------
    array, broadcast shape
        Ratio: 0.95 for a coat, about 1.3 for bright metal, between for weathered metal. [-]

    Raises
    ------
    InputError
        If the emissivity is outside (0, 1].
    """
    coat, metal = _hemispherical_shapes()
    return np.asarray(
        coat + _metal_part(_checked_emissivity(normal_emissivity), is_metal) * (metal - coat)
    )
