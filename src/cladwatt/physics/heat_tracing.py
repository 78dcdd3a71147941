"""A tracer under lagging: the warm stripe on the surface, and how much of the loss is its heat."""

from math import pi
from typing import NamedTuple

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "AnnulusPath",
    "TracerShares",
    "covered_half_angle",
    "stripe_profile",
    "surface_transfer",
    "tracer_rise_by_power",
    "tracer_shares",
]

MODES = 24
"""Terms of the series in angle; the lagging smooths the higher ones away."""


class AnnulusPath(NamedTuple):
    """What lies between the fluid and the room, each a number or an array. SI.

    Parameters
    ----------
    inner_radius, outer_radius : float or array
        Of the lagging. [m]
    conductivity : float or array
        Of the lagging, one value for all of it. [W/(m K)]
    outside_coefficient : float or array
        Convection and radiation. [W/(m2 K)]
    inside_coefficient : float or array
        Between fluid and lagging, on the inner radius; infinite where the pipe takes the fluid's
        temperature. [W/(m2 K)]
    sheet_conductance : float or array
        Conductivity times thickness of the cladding, which spreads heat around. [W/K]
    """

    inner_radius: FloatLike
    outer_radius: FloatLike
    conductivity: FloatLike
    outside_coefficient: FloatLike
    inside_coefficient: FloatLike = np.inf
    sheet_conductance: FloatLike = 0.0


def surface_transfer(path: AnnulusPath, mode: FloatLike) -> FloatArray:
    """Amplitude of a wave around the surface over that of the same wave inside.

    Parameters
    ----------
    path : AnnulusPath
    mode : float or array
        Waves around the pipe: 0, 1, 2, ...; broadcast against the fields of `path`.

    Returns
    -------
    array
        Between 0 and 1. [-]

    Raises
    ------
    InputError
        If the radii do not grow outwards, or a conductivity or coefficient is not above 0.

    Notes
    -----
    Laplace's equation in the annulus separates into ``r^n cos(n phi)`` and ``r^-n cos(n phi)``
    [1]_; the two constants follow from ``-k dT/dr = (h + s n^2 / b^2) T`` outside, where s is
    the sheet's conductance, and ``-k dT/dr = h_in (T_in - T)`` inside. Mode 0 is the plain chain
    of resistances.

    References
    ----------
    .. [1] Carslaw, Jaeger, *Conduction of Heat in Solids*, 2nd edition, Oxford, 1959,
       section 6.2 (steady temperature in a hollow cylinder, Fourier series in the angle).
    """
    _check(path)
    n = np.asarray(mode, dtype=np.float64)
    outer, k = np.asarray(path.outer_radius, dtype=np.float64), path.conductivity
    spread = np.asarray(path.sheet_conductance) * n**2 / outer**2
    outside = np.asarray(path.outside_coefficient) + spread
    growth = np.log(outer / path.inner_radius)
    reach = n * growth
    # both grow like exp(reach): taken out, and divided by at the end
    falling = np.exp(-2 * reach)
    cosh = 0.5 * (1 + falling)
    # sinh(reach) / n, its limit at n = 0
    sinh = np.where(n > 0, 0.5 * (1 - falling) / np.where(n > 0, n, 1.0), growth)
    biot = outside * outer / k
    film = np.asarray(k) / (np.asarray(path.inner_radius) * path.inside_coefficient)
    inside = cosh + biot * sinh + film * (n**2 * sinh + biot * cosh)
    return np.asarray(np.exp(-reach) / inside)


def stripe_profile(path: AnnulusPath, half_angle: FloatLike, angle: FloatLike) -> FloatArray:
    """Flux that a warm spot on the pipe adds at an angle from it, over its mean all round.

    Parameters
    ----------
    path : AnnulusPath
    half_angle : float or array
        Half of what the spot covers of the pipe. [rad]
    angle : float or array
        From the middle of the spot; broadcast against `half_angle` and the fields of `path`.
        [rad]

    Returns
    -------
    array
        1 on average; largest at angle 0. [-]
    """
    n = np.arange(1, MODES + 1, dtype=np.float64)
    wide = AnnulusPath(*(np.asarray(part, dtype=np.float64)[..., None] for part in path))
    relative = surface_transfer(wide, n) / surface_transfer(wide, 0.0)
    spot = np.sinc(n * np.asarray(half_angle, dtype=np.float64)[..., None] / pi)
    waves = np.cos(n * np.asarray(angle, dtype=np.float64)[..., None])
    return np.asarray(1.0 + 2.0 * (relative * spot * waves).sum(axis=-1))


def covered_half_angle(pipe_radius: FloatLike, tracer_radius: FloatLike) -> FloatArray:
    """Half of the angle of a pipe that lagging bridges where a tracer lies on it.

    Parameters
    ----------
    pipe_radius, tracer_radius : float or array
        Outer radii. [m]

    Returns
    -------
    array
        The common tangent of the two circles leaves the pipe there: arccos((a - r) / (a + r)).
        [rad]
    """
    pipe = np.asarray(pipe_radius, dtype=np.float64)
    ratio = (pipe - tracer_radius) / (pipe + tracer_radius)
    return np.asarray(np.arccos(np.clip(ratio, -1.0, 1.0)))


class TracerShares(NamedTuple):
    """Heat of a tracer over what the same pipe would lose untraced, arrays. [-]

    Parameters
    ----------
    rise : array
        By how much the loss is larger for the tracer.
    straight : array
        What the tracer gives to the lagging without passing through the pipe; more than `rise`,
        since there it takes the pipe's place.
    """

    rise: FloatArray
    straight: FloatArray


def tracer_shares(coupling: FloatLike, relative_rise: FloatLike) -> TracerShares:
    """Share the loss out between a tracer and the pipe.

    Parameters
    ----------
    coupling : float or array
        Share of the circumference that is at the tracer's temperature instead of the pipe's: a
        shape factor over that of the whole pipe. [-]
    relative_rise : float or array
        Tracer minus fluid over fluid minus air. [-]

    Returns
    -------
    TracerShares

    Notes
    -----
    Conduction is linear, so that only the mean around the inside (mode 0) passes heat in total:
    the inside is at ``T_in + coupling (T_tracer - T_in)`` on average, and the loss grows by
    ``coupling (T_tracer - T_in) / (T_in - T_air)``.
    """
    share, rise = np.asarray(coupling, dtype=np.float64), np.asarray(relative_rise)
    return TracerShares(np.asarray(share * rise), np.asarray(share * (1.0 + rise)))


def tracer_rise_by_power(
    power: FloatLike,
    coupling: FloatLike,
    contact: FloatLike,
    untraced_loss: FloatLike,
    fluid_above_air: FloatLike,
) -> FloatArray:
    """Tracer minus fluid over fluid minus air, for a tracer of known power.

    Parameters
    ----------
    power : float or array
        [W/m]
    coupling : float or array
        As for `tracer_shares`. [-]
    contact : float or array
        Conductance between tracer and fluid per metre. [W/(m K)]
    untraced_loss : float or array
        Of the same pipe. [W/m]
    fluid_above_air : float or array
        [K]

    Returns
    -------
    array
        From the tracer's own balance: what it gives to the lagging and, by contact, to the pipe
        adds up to its power. Negative where the power does not make up for the lagging it warms.
        [-]
    """
    to_lagging = np.asarray(coupling, dtype=np.float64) * untraced_loss
    to_pipe = np.asarray(contact, dtype=np.float64) * fluid_above_air
    return np.asarray((power - to_lagging) / (to_pipe + to_lagging))


def _check(path: AnnulusPath) -> None:
    inner, outer = np.asarray(path.inner_radius), np.asarray(path.outer_radius)
    if not np.all((inner > 0) & (outer > inner)):
        raise InputError(
            f"lagging reaches from radius {np.min(inner):g} m to {np.min(outer):g} m; expected a "
            "radius above 0 and a larger one"
        )
    for name in ("conductivity", "outside_coefficient", "inside_coefficient"):
        value = np.asarray(getattr(path, name))
        if not np.all(value > 0):
            raise InputError(f"{name} is {np.min(value):g}; expected above 0")
