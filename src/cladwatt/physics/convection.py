"""Convection coefficient of a pipe in air: free, forced and mixed.

The single correlations live in `natural_convection`, `forced_convection` and `iso12241`, and are
offered from here as well; `convection_laws` puts them together under names.
"""

from typing import Final

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.air import AIR_TEMPERATURE_RANGE, air_properties
from cladwatt.physics.constants import STANDARD_PRESSURE
from cladwatt.physics.convection_laws import (
    CONVECTION_LAWS,
    CONVECTION_MODELS,
    AirStream,
    ConvectionLaw,
    ConvectionModel,
)
from cladwatt.physics.forced_convection import (
    nusselt_churchill_bernstein,
    nusselt_hilpert,
    nusselt_whitaker,
    nusselt_zukauskas,
    reynolds_number,
)
from cladwatt.physics.iso12241 import (
    coefficient_iso12241_horizontal_indoor,
    coefficient_iso12241_outdoor,
    coefficient_iso12241_vertical_indoor,
)
from cladwatt.physics.moist_air import moist_air_properties, vapour_mole_fraction
from cladwatt.physics.natural_convection import (
    nusselt_churchill_chu_horizontal,
    nusselt_churchill_chu_horizontal_laminar,
    nusselt_churchill_chu_vertical,
    nusselt_kuehn_goldstein,
    nusselt_morgan,
    rayleigh_number,
)
from cladwatt.physics.yawed_wind import LEAST_PUBLISHED_ANGLE, SLOW_REYNOLDS, wind_across
from cladwatt.types import BoolArray, FloatArray, FloatLike

__all__ = [
    "CONVECTION_MODELS",
    "VERTICAL_LENGTH",
    "ConvectionModel",
    "air_stream",
    "check_inclination",
    "coefficient_iso12241_horizontal_indoor",
    "coefficient_iso12241_outdoor",
    "coefficient_iso12241_vertical_indoor",
    "convection_coefficient",
    "mixed_nusselt",
    "nusselt_churchill_bernstein",
    "nusselt_churchill_chu_horizontal",
    "nusselt_churchill_chu_horizontal_laminar",
    "nusselt_churchill_chu_vertical",
    "nusselt_hilpert",
    "nusselt_kuehn_goldstein",
    "nusselt_morgan",
    "nusselt_whitaker",
    "nusselt_zukauskas",
    "outside_validity",
    "rayleigh_number",
    "reynolds_number",
]

#: Height assumed for a vertical run where none is declared. [m]
VERTICAL_LENGTH: Final = 2.0

_PECLET_LIMIT: Final = 0.2


def mixed_nusselt(
    forced: FloatLike, natural: FloatLike, exponent: float = 4.0, aiding: bool = True
) -> FloatArray:
    """Mixed convection from its two limits.

    Parameters
    ----------
    forced, natural : float or array
        Nusselt numbers on the same length, or coefficients. [-] or [W/(m2 K)]
    exponent : float
        4 across a horizontal cylinder, 3 along a vertical face.
    aiding : bool
        True for flows in the same direction or across each other, False for opposed ones.

    Returns
    -------
    array
        abs(forced^n + natural^n)^(1/n), with a minus where the flows oppose.

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 9.9; after Churchill.
    """
    first = np.asarray(forced, dtype=np.float64) ** exponent
    second = np.asarray(natural, dtype=np.float64) ** exponent
    total = first + second if aiding else np.abs(first - second)
    return np.asarray(total ** (1.0 / exponent))


def air_stream(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    diameter: FloatLike,
    wind_speed: FloatLike = 0.0,
    pressure: FloatLike = STANDARD_PRESSURE,
    wind_angle_deg: FloatLike = 90.0,
    relative_humidity: FloatLike | None = None,
) -> AirStream:
    """Air around a pipe as the correlations take it.

    Parameters
    ----------
    surface_temperature, air_temperature, diameter, wind_speed, pressure : float or array
        As for `convection_coefficient`.
    wind_angle_deg, relative_humidity : float or array
        As for `convection_coefficient`.

    Returns
    -------
    AirStream
        With the wind's part across the pipe, and temperatures held within the range of
        `air_properties`.
    """
    surface = np.asarray(surface_temperature, dtype=np.float64)
    ambient = np.asarray(air_temperature, dtype=np.float64)
    film = np.clip(0.5 * (surface + ambient), *AIR_TEMPERATURE_RANGE)
    fraction: FloatLike = 0.0
    if relative_humidity is not None:
        fraction = vapour_mole_fraction(ambient, relative_humidity, pressure)
    is_across = not np.any(np.asarray(wind_angle_deg) != 90.0)
    return AirStream(
        difference=np.abs(surface - ambient),
        diameter=diameter,
        speed=wind_speed if is_across else wind_across(wind_speed, wind_angle_deg),
        film=(
            air_properties(film, pressure)
            if relative_humidity is None
            else moist_air_properties(film, pressure, fraction)
        ),
        ambient=np.clip(ambient, *AIR_TEMPERATURE_RANGE),
        surface=np.clip(surface, *AIR_TEMPERATURE_RANGE),
        pressure=pressure,
        vapour_fraction=fraction,
    )


def convection_coefficient(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    diameter: FloatLike,
    wind_speed: FloatLike = 0.0,
    pressure: FloatLike = STANDARD_PRESSURE,
    inclination_deg: FloatLike = 0.0,
    vertical_length: FloatLike = VERTICAL_LENGTH,
    wind_angle_deg: FloatLike = 90.0,
    wind_uphill: FloatLike = 0.0,
    relative_humidity: FloatLike | None = None,
    model: ConvectionModel = "churchill",
) -> FloatArray:
    """Mean convection coefficient around a pipe in still or moving air.

    Parameters
    ----------
    surface_temperature : float or array
        [K]
    air_temperature : float or array
        Away from the pipe. [K]
    diameter : float or array
        Over the cladding. [m]
    wind_speed : float or array
        At the pipe: behind a wall or between other pipes that is the wind there. [m/s]
    pressure : float or array
        Absolute. [Pa]
    inclination_deg : float or array
        Of the axis against the horizontal, 0 to 90. [deg]
    vertical_length : float or array
        Height over which the boundary layer of a vertical run grows. [m]
    wind_angle_deg : float or array
        Between wind and axis, 0 (along) to 90 (across); see `wind_across`. [deg]
    wind_uphill : float or array
        1 where the wind's part along the axis of an inclined run blows up the run, -1 down, 0 where
        that is not known: then the flows are taken as crossing. [-]
    relative_humidity : float or array, optional
        Of the air, 0 to 1; dry where left out, which errs by about 1 % at 30 °C. [-]
    model : str
        One of `CONVECTION_MODELS`.

    Returns
    -------
    array
        Of the broadcast shape; NaN where an input is NaN. [W/(m2 K)]

    Notes
    -----
    The default, Churchill and Chu [1]_ with Churchill and Bernstein [3]_: one smooth formula each
    over every pipe met in a plant, while the others step at the joins of their ranges. Vertical:
    Churchill and Chu's vertical face [2]_. Horizontal exponent 4, vertical 3 [4]_: the wind crosses
    the plume in both, so the two add. Between the two the coefficients are weighted with cos^2 and
    sin^2 of the inclination, which is an assumption of this package. Where the wind's part along an
    inclined run blows against the plume, the difference of the cubes takes the place of their sum
    in proportion to cos^2 of the wind's angle (assumption), and never less than half of the larger
    is taken: the difference vanishes where both are equal, which no flow does. `correlation_spread`
    says how far published correlations differ.

    A vertical run of 2 m with 10 K or more on it is turbulent over most of its height, and the
    coefficient then hardly depends on the height: 1 m and 6 m both stay within 5 % of it.
    The film temperature is held within the range of `air_properties`; `outside_validity` says
    where that happened.

    References
    ----------
    .. [1] Churchill, Chu, Int. J. Heat Mass Transfer 18 (1975) 1049-1053.
    .. [2] Churchill, Chu, Int. J. Heat Mass Transfer 18 (1975) 1323-1329.
    .. [3] Churchill, Bernstein, J. Heat Transfer 99 (1977) 300-306.
    .. [4] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 9.9.

    Examples
    --------
    >>> h = convection_coefficient(343.15, air_temperature=293.15, diameter=0.08)
    >>> round(float(h))
    6
    """
    stream = air_stream(
        surface_temperature,
        air_temperature=air_temperature,
        diameter=diameter,
        wind_speed=wind_speed,
        pressure=pressure,
        wind_angle_deg=wind_angle_deg,
        relative_humidity=relative_humidity,
    )
    law = CONVECTION_LAWS[model]
    natural = law.natural(stream)
    forced = None if law.forced is None else law.forced(stream)
    horizontal = natural if forced is None else _fourth_power_sum(forced, natural)
    if not np.any(inclination_deg):
        return np.asarray(horizontal)
    vertical = law.vertical(stream, vertical_length)
    if forced is not None:
        opposed: FloatLike = 0.0
        if np.any(wind_uphill):
            rising = np.sign(np.asarray(surface_temperature) - np.asarray(air_temperature))
            is_against = np.asarray(wind_uphill) * rising < 0
            opposed = np.where(is_against, np.cos(np.deg2rad(wind_angle_deg)) ** 2, 0.0)
        vertical = _along(forced, vertical, opposed)
    share = np.sin(np.deg2rad(inclination_deg)) ** 2
    if not law.is_blended:
        share = np.where(np.asarray(inclination_deg) > 45.0, 1.0, 0.0)
    return np.asarray(horizontal + share * (vertical - horizontal))


def outside_validity(
    surface_temperature: FloatLike,
    *,
    air_temperature: FloatLike,
    diameter: FloatLike,
    wind_speed: FloatLike = 0.0,
    pressure: FloatLike = STANDARD_PRESSURE,
    inclination_deg: FloatLike = 0.0,
    vertical_length: FloatLike = VERTICAL_LENGTH,
    wind_angle_deg: FloatLike = 90.0,
    relative_humidity: FloatLike | None = None,
    model: ConvectionModel = "churchill",
) -> BoolArray:
    """Where `convection_coefficient` leaves the range its correlations are stated for.

    Parameters
    ----------
    surface_temperature, air_temperature, diameter, wind_speed, pressure : float or array
        As for `convection_coefficient`.
    inclination_deg, vertical_length, wind_angle_deg, relative_humidity : float or array
        As for `convection_coefficient`.
    model : str
        One of `CONVECTION_MODELS`.

    Returns
    -------
    array of bool
        True where the film temperature is outside the air properties' range, Ra outside that of the
        law (on the height for inclined runs), Re above that of the law, or forced flow carries the
        heat below it, at Re Pr below 0.2, or where no factor is published for the wind's angle
        (Re of the whole wind above 4000 within 15 degrees of the axis). A law for still air is
        outside in any wind. NaN counts as outside.

    Notes
    -----
    A slim vertical run, D/H below 35 / Gr^(1/4), loses more than the face; that stands in
    `correlation_spread` and is not flagged here.
    """
    stream = air_stream(
        surface_temperature,
        air_temperature=air_temperature,
        diameter=diameter,
        wind_speed=wind_speed,
        pressure=pressure,
        wind_angle_deg=wind_angle_deg,
        relative_humidity=relative_humidity,
    )
    law = CONVECTION_LAWS[model]
    film = 0.5 * (np.asarray(surface_temperature) + np.asarray(air_temperature))
    lowest, highest = AIR_TEMPERATURE_RANGE
    inside = (film >= lowest) & (film <= highest)
    is_inclined = np.asarray(inclination_deg) != 0.0
    rayleigh = stream.rayleigh(np.where(is_inclined, vertical_length, diameter))
    # below the range of free flow there is no difference to speak of, and no heat
    inside &= rayleigh <= np.where(is_inclined, law.vertical_range[1], law.rayleigh_range[1])
    forced_matters = np.asarray(False)
    if law.forced is not None:
        natural = law.natural(stream)
        if np.any(is_inclined):
            along = law.vertical(stream, vertical_length)
            natural = np.where(is_inclined, np.minimum(natural, along), natural)
        forced_matters = law.forced(stream) > natural
    inside &= _forced_inside(stream, law, forced_matters)
    whole = reynolds_number(
        wind_speed, length=diameter, kinematic_viscosity=stream.film.kinematic_viscosity
    )
    is_along = np.asarray(wind_angle_deg) < LEAST_PUBLISHED_ANGLE
    return np.asarray(~(inside & ~(forced_matters & is_along & (whole > SLOW_REYNOLDS))))


def _forced_inside(stream: AirStream, law: ConvectionLaw, matters: BoolArray) -> BoolArray:
    """Return where cross flow is within its range, below which it counts only where it matters."""
    air = stream.free if law.free_stream else stream.film
    reynolds = stream.reynolds(air)
    lowest, highest = law.reynolds_range
    is_enough = (reynolds * air.prandtl >= _PECLET_LIMIT) & (reynolds >= lowest)
    return np.asarray((reynolds <= highest) & (~matters | is_enough))


def check_inclination(inclination_deg: FloatLike) -> None:
    """Refuse an inclination outside 0 to 90 degrees.

    Parameters
    ----------
    inclination_deg : float or array
        [deg]

    Raises
    ------
    InputError
        If any value is below 0 or above 90.
    """
    angle = np.asarray(inclination_deg, dtype=np.float64)
    wrong = (angle < 0.0) | (angle > 90.0)
    if np.any(wrong):
        raise InputError(
            f"inclination is {angle[wrong].flat[0]:g} degrees; expected 0 (horizontal) to 90"
        )


def _along(forced: FloatArray, natural: FloatArray, opposed: FloatLike) -> FloatArray:
    """Mix along a vertical run, the flows opposed by a share from 0 to 1."""
    aiding = mixed_nusselt(forced, natural, exponent=3.0)
    if not np.any(opposed):
        return aiding
    against = mixed_nusselt(forced, natural, exponent=3.0, aiding=False)
    total = np.cbrt(aiding**3 + opposed * (against**3 - aiding**3))
    return np.asarray(np.maximum(total, 0.5 * np.maximum(forced, natural)))


def _fourth_power_sum(forced: FloatArray, natural: FloatArray) -> FloatArray:
    first, second = forced * forced, natural * natural
    return np.asarray(np.sqrt(np.sqrt(first * first + second * second)))
