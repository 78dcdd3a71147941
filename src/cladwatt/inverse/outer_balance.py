"""What leaves a surface altogether: the dry balance and the heat of condensing vapour."""

import numpy as np

from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.physics.condensation import latent_heat_flux
from cladwatt.physics.surface_balance import (
    SurfaceExchange,
    surface_coefficients,
    surface_heat_flux,
)
from cladwatt.types import FloatArray

__all__ = ["may_condense", "outer_flux"]


def may_condense(frame: FrameDraws, line: LineDraws) -> bool:
    """Return whether the line is so cold that vapour may condense on its cladding."""
    dew, inside = frame.dew_point, line.inside_temperature
    if dew is None or inside is None:
        return False
    return bool(np.median(inside) < np.percentile(dew, 97.5))


def outer_flux(
    surface_temperature: FloatArray,
    exchange: SurfaceExchange,
    relative_humidity: FloatArray | None,
) -> FloatArray:
    """Return the heat that leaves a surface; negative where it takes heat up.

    Parameters
    ----------
    surface_temperature : array
        [K]
    exchange : SurfaceExchange
        Broadcasting with it.
    relative_humidity : array or None
        Broadcasting too; None where vapour cannot condense.

    Returns
    -------
    array, broadcast shape
        Convection, radiation, less sun, and with the latent heat of what condenses. [W/m2]
    """
    flux = surface_heat_flux(surface_temperature, exchange)
    if relative_humidity is None:
        return flux
    convection, _ = surface_coefficients(surface_temperature, exchange)
    latent = latent_heat_flux(
        np.clip(surface_temperature, 233.15, 372.0),
        air_temperature=exchange.air_temperature,
        relative_humidity=relative_humidity,
        convection_coefficient=convection,
        pressure=exchange.pressure,
    )
    return np.asarray(flux + latent)
