"""What a reflector, a tape patch or a contact probe tells, and what a camera promises."""

from __future__ import annotations

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.band import Band
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.measurement_equation import check_share, object_radiance, optional_radiance
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "MINIMUM_SEPARATION",
    "accuracy_standard_uncertainty",
    "emissivity_from_contact",
    "emissivity_from_reference",
    "reflected_temperature_from_foil",
]

#: Least difference between a surface and the reflected temperature at which an emissivity can be
#: determined from it (ISO 18434-1 and ASTM E1933 ask for 10 K or more). [K]
MINIMUM_SEPARATION = 10.0


def reflected_temperature_from_foil(
    apparent_temperature: FloatLike,
    *,
    band: Band,
    foil_emissivity: FloatLike,
    foil_temperature: FloatLike,
    transmission: FloatLike = 1.0,
    atmosphere_temperature: FloatLike | None = None,
) -> FloatArray:
    """Reflected apparent temperature from a crumpled-foil reflector held before the pipe.

    Parameters
    ----------
    apparent_temperature : float or array
        Temperature of the foil read at emissivity 1 and transmission 1 (camera settings already
        undone), averaged in radiance over the foil. [K]
    band : Band
        The camera's band.
    foil_emissivity : float or array
        The foil's own emissivity in the band, 0 <= value < 1. [-]
    foil_temperature : float or array
        The foil's own temperature: the air's where it touches nothing hot. [K]
    transmission : float or array
        Transmission of the air path to the foil. [-]
    atmosphere_temperature : float or array, optional
        Needed where `transmission` < 1. [K]

    Returns
    -------
    array, broadcast shape
        Reflected apparent temperature, the mean over the half space before the foil; NaN where
        the foil's own radiance exceeds the signal. [K]

    Raises
    ------
    InputError
        If the foil's emissivity is outside [0, 1).

    Notes
    -----
    ASTM E1862, reflector method, with the reflector's own emission taken off:
    ``L_refl = (L_apparent - eps_foil L(T_foil)) / (1 - eps_foil)``. A foil wrapped on a hot pipe
    is not at air temperature and reads kelvins too high.
    """
    check_share("foil_emissivity", foil_emissivity, zero_allowed=True)
    if np.any(np.asarray(foil_emissivity) >= 1):
        raise InputError("foil_emissivity is 1; a reflector must reflect, expected a value below 1")
    seen = _through_air(band, apparent_temperature, transmission, atmosphere_temperature)
    own = foil_emissivity * band.radiance(foil_temperature)
    return band.temperature((seen - own) / (1.0 - np.asarray(foil_emissivity)))


def emissivity_from_reference(
    apparent_temperature: FloatLike,
    reference_apparent_temperature: FloatLike,
    *,
    band: Band,
    reference_emissivity: FloatLike,
    reflected_temperature: FloatLike,
    transmission: FloatLike = 1.0,
    atmosphere_temperature: FloatLike | None = None,
) -> FloatArray:
    """Emissivity beside a tape or paint patch of known emissivity at the same temperature.

    Parameters
    ----------
    apparent_temperature, reference_apparent_temperature : float or array
        Temperatures of the surface and of the patch read at emissivity 1 and transmission 1
        (camera settings already undone). [K]
    band : Band
        The camera's band.
    reference_emissivity : float or array
        Emissivity of the patch in the band, 0 < value <= 1. [-]
    reflected_temperature : float or array
        Reflected apparent temperature. [K]
    transmission : float or array
        Transmission of the air path. [-]
    atmosphere_temperature : float or array, optional
        Needed where `transmission` < 1. [K]

    Returns
    -------
    array, broadcast shape
        Emissivity as computed; NaN, "not determined", where the surface is less than
        `MINIMUM_SEPARATION` from the reflected temperature or the result is not positive. A value
        above 1 is returned as it is: it says that the readings do not fit together. [-]

    Raises
    ------
    InputError
        If the patch's emissivity is outside (0, 1].

    Notes
    -----
    ISO 18434-1 and ASTM E1933, reference emitter method:
    ``eps = eps_ref (L_surface - L_refl) / (L_ref - L_refl)``.
    """
    check_share("reference_emissivity", reference_emissivity)
    reflected = band.radiance(reflected_temperature)
    surface = _through_air(band, apparent_temperature, transmission, atmosphere_temperature)
    reference = _through_air(
        band, reference_apparent_temperature, transmission, atmosphere_temperature
    )
    black = reflected + (reference - reflected) / reference_emissivity
    return _emissivity(band, surface, black, reflected_temperature)


def emissivity_from_contact(
    apparent_temperature: FloatLike,
    contact_temperature: FloatLike,
    *,
    band: Band,
    reflected_temperature: FloatLike,
    transmission: FloatLike = 1.0,
    atmosphere_temperature: FloatLike | None = None,
) -> FloatArray:
    """Emissivity where a contact probe gave the surface's temperature.

    Parameters
    ----------
    apparent_temperature : float or array
        Temperature of the surface read at emissivity 1 and transmission 1. [K]
    contact_temperature : float or array
        Temperature the probe read; it reads towards the air. [K]
    band : Band
        The camera's band.
    reflected_temperature : float or array
        Reflected apparent temperature. [K]
    transmission : float or array
        Transmission of the air path. [-]
    atmosphere_temperature : float or array, optional
        Needed where `transmission` < 1. [K]

    Returns
    -------
    array, broadcast shape
        Emissivity; NaN where not determined, as in `emissivity_from_reference`. [-]

    Notes
    -----
    ISO 18434-1 and ASTM E1933, contact method:
    ``eps = (L_surface - L_refl) / (L(T_contact) - L_refl)``.
    """
    surface = _through_air(band, apparent_temperature, transmission, atmosphere_temperature)
    return _emissivity(band, surface, band.radiance(contact_temperature), reflected_temperature)


def _through_air(
    band: Band,
    apparent_temperature: FloatLike,
    transmission: FloatLike,
    atmosphere_temperature: FloatLike | None,
) -> FloatArray:
    """Return the radiance leaving the surface, own and reflected together."""
    return object_radiance(
        band.radiance(apparent_temperature),
        emissivity=1.0,
        reflected_radiance=None,
        transmission=transmission,
        atmosphere_radiance=optional_radiance(band, atmosphere_temperature),
    )


def _emissivity(
    band: Band, surface: FloatArray, black: FloatArray, reflected_temperature: FloatLike
) -> FloatArray:
    reflected = band.radiance(reflected_temperature)
    separation = np.abs(band.temperature(black) - reflected_temperature)
    with np.errstate(divide="ignore", invalid="ignore"):
        emissivity = (surface - reflected) / (black - reflected)
    determined = (separation >= MINIMUM_SEPARATION) & (emissivity > 0.0)
    return np.where(determined, emissivity, np.nan)


def accuracy_standard_uncertainty(
    reading_temperature: FloatLike,
    limit: FloatLike,
    percent: FloatLike,
    coverage_factor: float | None = None,
) -> FloatArray:
    """Return the standard uncertainty behind an accuracy statement such as "±2 °C or 2 %".

    Parameters
    ----------
    reading_temperature : float or array
        Temperature read. [K]
    limit : float or array
        Absolute part, >= 0. [K]
    percent : float or array
        Part in percent of the reading in degrees Celsius, >= 0.
    coverage_factor : float, optional
        Stated coverage factor; None means a limit of error.

    Returns
    -------
    array, broadcast shape
        Standard uncertainty: the larger part over sqrt(3) (rectangular, JCGM 100:2008, 4.3.7), or
        over the coverage factor. [K]

    Raises
    ------
    InputError
        If a part is negative or the coverage factor is not positive.
    """
    if np.any(np.asarray(limit) < 0) or np.any(np.asarray(percent) < 0):
        raise InputError(f"limit is {limit} K and percent is {percent}; expected both >= 0")
    if coverage_factor is not None and not coverage_factor > 0:
        raise InputError(f"coverage_factor is {coverage_factor:g}; expected a value above 0")
    reading = np.abs(np.asarray(reading_temperature, dtype=np.float64) - ZERO_CELSIUS)
    bound = np.maximum(limit, np.asarray(percent) / 100.0 * reading)
    divisor = np.sqrt(3.0) if coverage_factor is None else coverage_factor
    return np.asarray(bound / divisor, dtype=np.float64)
