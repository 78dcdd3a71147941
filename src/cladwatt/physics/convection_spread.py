"""How far published correlations of convection differ under given conditions."""

from collections.abc import Sequence
from dataclasses import replace
from typing import Final

import numpy as np

from cladwatt.physics.convection import VERTICAL_LENGTH, air_stream, convection_coefficient
from cladwatt.physics.convection_laws import CONVECTION_LAWS, AirStream
from cladwatt.physics.iso12241 import coefficient_iso12241_outdoor
from cladwatt.physics.natural_convection import (
    nusselt_churchill_chu_horizontal_laminar,
    slenderness_factor_popiel,
)
from cladwatt.physics.surface_balance import SurfaceExchange
from cladwatt.physics.yawed_wind import (
    yaw_factor_ieee738,
    yaw_factor_morgan,
    yaw_factor_smooth,
)
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = ["CROSS_FLOW_FLOOR", "STILL_AIR_FLOOR", "correlation_spread", "iso_outdoor_ratio"]

#: Least relative standard uncertainty in still air: correlations are said to differ by 10 to 20 %.
STILL_AIR_FLOOR: Final = 0.10
#: The same across flow: three correlations differ by 19 % on one measured case (Incropera et al.,
#: 6th edition, example 7.4), taken as a standard uncertainty.
CROSS_FLOW_FLOOR: Final = 0.19

# Product of wind and diameter below which the outdoor rule's branch is not confirmed. [m2/s]
_OUTDOOR_CLEAR: Final = 0.08

_Member = tuple[FloatArray, BoolArray]


def correlation_spread(surface_temperature: FloatLike, exchange: SurfaceExchange) -> FloatArray:
    """Relative standard uncertainty of the convection coefficient by the choice of correlation.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    exchange : SurfaceExchange
        Its `convection_model` and `convection_factor` play no part.

    Returns
    -------
    array
        Of the broadcast shape; NaN where an input is NaN. [-]

    Notes
    -----
    Standard deviation of the logarithms of the published coefficients that are within their ranges,
    for free flow (Churchill and Chu's two forms, Morgan, Kuehn and Goldstein, ISO 12241 indoors)
    and for flow across (Churchill and Bernstein, Zukauskas, Hilpert, Whitaker) apart, each no less
    than its floor: the same measurements stand behind several formulas, whose agreement is not
    their accuracy. For a vertical run: Churchill and Chu's face, the same with Popiel's factor for
    slim cylinders, ISO 12241. The two parts are added, not squared, with their shares in the mixed
    coefficient, since the mixing rule is uncertain too. The outdoor rule of ISO 12241 is left out,
    see `iso_outdoor_ratio`. The wind's own uncertainty is not in here; shelter changes the wind at
    the pipe, not the correlation.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, sections 7.4 and 9.6.
    """
    stream = _stream(surface_temperature, exchange)
    forced = CONVECTION_LAWS["churchill"].forced
    assert forced is not None
    across = forced(stream)
    u_across = np.maximum(_deviation(_crossing(stream)), CROSS_FLOW_FLOOR)
    if np.any(np.asarray(exchange.wind_angle_deg) != 90.0):
        u_across = np.hypot(u_across, _deviation(_yawed(exchange)))
    natural = CONVECTION_LAWS["churchill"].natural(stream)
    u_natural = np.maximum(_deviation(_horizontal(stream)), STILL_AIR_FLOOR)
    level = _mixed(across, u_across, natural, u_natural, 4.0)
    if not np.any(exchange.inclination_deg):
        return level
    natural = CONVECTION_LAWS["churchill"].vertical(stream, VERTICAL_LENGTH)
    u_natural = np.maximum(_deviation(_upright(stream)), STILL_AIR_FLOOR)
    upright = _mixed(across, u_across, natural, u_natural, 3.0)
    share = np.sin(np.deg2rad(exchange.inclination_deg)) ** 2
    return np.asarray(level + share * (upright - level))


def iso_outdoor_ratio(surface_temperature: FloatLike, exchange: SurfaceExchange) -> FloatArray:
    """Coefficient by the outdoor rule of ISO 12241 over the one of the exchange's model.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    exchange : SurfaceExchange

    Returns
    -------
    array
        NaN where wind times diameter is 0.08 m2/s or less: there the rule's branch could not be
        confirmed. [-]

    Notes
    -----
    A disagreement to be shown; no result is computed with the rule and no uncertainty contains it.
    """
    speed, size = np.asarray(exchange.wind_speed), np.asarray(exchange.diameter)
    ours = convection_coefficient(
        surface_temperature,
        air_temperature=exchange.air_temperature,
        diameter=size,
        wind_speed=speed,
        pressure=exchange.pressure,
        inclination_deg=exchange.inclination_deg,
        wind_angle_deg=exchange.wind_angle_deg,
        wind_uphill=exchange.wind_uphill,
        relative_humidity=exchange.relative_humidity,
        model=exchange.convection_model,
    )
    ratio = coefficient_iso12241_outdoor(speed, size) / ours
    return np.asarray(np.where(speed * size > _OUTDOOR_CLEAR, ratio, np.nan))


def _stream(surface_temperature: FloatLike, exchange: SurfaceExchange) -> AirStream:
    return air_stream(
        surface_temperature,
        air_temperature=exchange.air_temperature,
        diameter=exchange.diameter,
        wind_speed=exchange.wind_speed,
        pressure=exchange.pressure,
        wind_angle_deg=exchange.wind_angle_deg,
        relative_humidity=exchange.relative_humidity,
    )


def _horizontal(stream: AirStream) -> list[_Member]:
    rayleigh = stream.rayleigh(stream.diameter)
    members = []
    for name in ("churchill", "morgan_zukauskas", "kuehn_goldstein_whitaker", "iso12241_indoor"):
        law = CONVECTION_LAWS[name]
        members.append((law.natural(stream), _within(rayleigh, law.rayleigh_range)))
    laminar = nusselt_churchill_chu_horizontal_laminar(rayleigh, stream.film.prandtl)
    per_length = stream.film.conductivity / stream.diameter
    members.append((per_length * laminar, _within(rayleigh, (1e-6, 1e9))))
    return members


def _upright(stream: AirStream) -> list[_Member]:
    rayleigh = stream.rayleigh(VERTICAL_LENGTH)
    is_inside = _within(rayleigh, (1e-1, 1e12))
    face = CONVECTION_LAWS["churchill"].vertical(stream, VERTICAL_LENGTH)
    slim = slenderness_factor_popiel(
        np.maximum(rayleigh, 1.0) / stream.film.prandtl,
        stream.film.prandtl,
        slenderness=VERTICAL_LENGTH / np.asarray(stream.diameter),
    )
    rule = CONVECTION_LAWS["iso12241_indoor"].vertical(stream, VERTICAL_LENGTH)
    return [(face, is_inside), (face * slim, is_inside), (rule, is_inside)]


def _crossing(stream: AirStream) -> list[_Member]:
    members = []
    for name in ("churchill", "morgan_zukauskas", "morgan_hilpert", "kuehn_goldstein_whitaker"):
        law = CONVECTION_LAWS[name]
        assert law.forced is not None
        reynolds = stream.reynolds(stream.free if law.free_stream else stream.film)
        members.append((law.forced(stream), _within(reynolds, law.reynolds_range)))
    return members


def _yawed(exchange: SurfaceExchange) -> list[_Member]:
    angle = np.asarray(exchange.wind_angle_deg, dtype=np.float64)
    forced = CONVECTION_LAWS["churchill"].forced
    assert forced is not None
    square = forced(_stream(exchange.air_temperature, replace(exchange, wind_angle_deg=90.0)))
    # the ratio hardly depends on the surface's temperature
    own = forced(_stream(exchange.air_temperature, exchange)) / square
    rules = (yaw_factor_smooth, yaw_factor_morgan, yaw_factor_ieee738)
    return [(own, own > 0.0), *((np.asarray(rule(angle)), angle >= 0.0) for rule in rules)]


def _within(number: FloatArray, limits: tuple[float, float]) -> BoolArray:
    return np.asarray((number > 0.0) & (number >= limits[0]) & (number <= limits[1]))


def _deviation(members: Sequence[_Member]) -> FloatArray:
    """Return the standard deviation of the logarithms of those inside; 0 for fewer than two."""
    shape = np.broadcast_shapes(*(np.shape(value) for value, _ in members))
    count, total, squares = np.zeros(shape), np.zeros(shape), np.zeros(shape)
    for value, is_inside in members:
        inside = is_inside & (value > 0.0)
        logarithm = np.log(np.where(inside, value, 1.0))
        count = count + inside
        total = total + logarithm
        squares = squares + logarithm * logarithm
    variance = (squares - total * total / np.maximum(count, 1.0)) / np.maximum(count - 1.0, 1.0)
    return np.sqrt(np.maximum(variance, 0.0))


def _mixed(
    across: FloatArray, u_across: FloatArray, natural: FloatArray, u_natural: FloatArray, n: float
) -> FloatArray:
    share = 1.0 / (1.0 + (natural / across) ** n)
    return np.asarray(share * u_across + (1.0 - share) * u_natural)
