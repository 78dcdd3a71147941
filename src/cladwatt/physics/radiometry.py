"""In-band radiance, and the way from a recorded temperature to a surface temperature and back.

A camera measures radiance in its band, not temperature. Every correction here is made in that
radiance: first the radiance that reached the lens is rebuilt from the settings the camera had
applied, then it is taken apart with the true ones. Correcting a corrected temperature, or
correcting by fourth powers, is not the same thing.

The air path lies between the surface and the window (or the lens where there is no window); the
few centimetres between window and lens are neglected.
"""

from __future__ import annotations

from functools import reduce

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.band import Band
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "MINIMUM_SEPARATION",
    "Band",
    "accuracy_standard_uncertainty",
    "correct_temperature",
    "emissivity_from_contact",
    "emissivity_from_reference",
    "lens_radiance",
    "object_radiance",
    "reflected_temperature_from_foil",
    "surface_temperature_fourth_power",
]

#: Least difference between a surface and the reflected temperature at which an emissivity can be
#: determined from it (ISO 18434-1 and ASTM E1933 ask for 10 K or more). [K]
MINIMUM_SEPARATION = 10.0


def _check_share(name: str, value: FloatLike, *, zero_allowed: bool = False) -> None:
    array = np.asarray(value)
    wrong = (array < 0 if zero_allowed else array <= 0) | (array > 1)
    if np.any(wrong):
        shown = float(array[wrong].ravel()[0]) if array.ndim else float(array)
        bound = "0 <=" if zero_allowed else "0 <"
        raise InputError(f"{name} is {shown:g}; expected {bound} {name} <= 1")


def _check_shapes(**values: FloatLike | None) -> None:
    shapes = {name: np.shape(value) for name, value in values.items() if value is not None}
    try:
        np.broadcast_shapes(*shapes.values())
    except ValueError:
        listed = ", ".join(f"{name} {shape}" for name, shape in shapes.items() if shape)
        raise InputError(f"shapes do not fit together: {listed}") from None


def _part(share: FloatLike, radiance: FloatLike | None, share_name: str, name: str) -> FloatLike:
    """Return share x radiance, zero where the share is zero; refuse a share of nothing known."""
    if radiance is not None:
        return share * np.asarray(radiance, dtype=np.float64)
    if np.any(np.asarray(share) > 0):
        raise InputError(f"{name} is not given; it is needed because {share_name}")
    return 0.0


def _radiance_part(
    band: Band, share: FloatLike, temperature: FloatLike | None, share_name: str, name: str
) -> FloatLike:
    """Return share x radiance of a black body at `temperature`; see `_part`."""
    if temperature is not None and not np.any(np.asarray(share) > 0):
        return 0.0
    radiance = None if temperature is None else band.radiance(temperature)
    return _part(share, radiance, share_name, name)


def lens_radiance(
    recorded_temperature: FloatLike,
    *,
    band: Band,
    emissivity: FloatLike = 1.0,
    reflected_temperature: FloatLike | None = None,
    transmission: FloatLike = 1.0,
    atmosphere_temperature: FloatLike | None = None,
    window_transmission: FloatLike = 1.0,
    window_temperature: FloatLike | None = None,
) -> FloatArray:
    """Radiance that reached the lens, rebuilt from the settings the camera had applied.

    Parameters
    ----------
    recorded_temperature : float or array
        Temperature as recorded; NaN stays NaN. [K]
    band : Band
        The camera's band.
    emissivity, transmission, window_transmission : float or array
        What the camera had applied, 0 < value <= 1. [-]
    reflected_temperature, atmosphere_temperature, window_temperature : float or array, optional
        What the camera had applied; each needed only where its share is not zero. [K]

    Returns
    -------
    array, broadcast shape
        In-band radiance at the lens. [W/(m2 sr)]

    Raises
    ------
    InputError
        If a share is outside (0, 1], a temperature that is needed is missing, or shapes differ.

    Notes
    -----
    ``L_lens = tw (tau (eps L(T_recorded) + (1 - eps) L(T_refl)) + (1 - tau) L(T_atm))
    + (1 - tw) L(T_window)``: the measurement equation of ISO 18434-1 read forwards.

    References
    ----------
    .. [1] ISO 18434-1:2008, Condition monitoring and diagnostics of machines, Thermography,
       part 1: general procedures.
    """
    for name, share in (
        ("emissivity", emissivity),
        ("transmission", transmission),
        ("window_transmission", window_transmission),
    ):
        _check_share(name, share)
    _check_shapes(**{key: value for key, value in locals().items() if key not in _NOT_ARRAYS})
    before = window_transmission * np.asarray(transmission)
    offset = (
        _radiance_part(
            band,
            before * (1.0 - np.asarray(emissivity)),
            reflected_temperature,
            "the camera's emissivity is below 1",
            "reflected_temperature",
        )
        + _radiance_part(
            band,
            window_transmission * (1.0 - np.asarray(transmission)),
            atmosphere_temperature,
            "the camera's transmission is below 1",
            "atmosphere_temperature",
        )
        + _radiance_part(
            band,
            1.0 - np.asarray(window_transmission),
            window_temperature,
            "the camera's window transmission is below 1",
            "window_temperature",
        )
    )
    return _scaled_and_shifted(band.radiance(recorded_temperature), before * emissivity, offset)


_NOT_ARRAYS = frozenset({"band", "name", "share"})


def _scaled_and_shifted(values: FloatLike, scale: FloatLike, offset: FloatLike) -> FloatArray:
    """Return values x scale + offset as a new array of at least no dimension."""
    result = np.array(np.multiply(values, scale), dtype=np.float64, copy=None)
    if np.broadcast_shapes(result.shape, np.shape(offset)) != result.shape:
        return np.array(result + offset, dtype=np.float64, copy=None)
    result += offset
    return result


def object_radiance(
    lens_radiance: FloatLike,
    *,
    emissivity: FloatLike,
    reflected_radiance: FloatLike | None,
    transmission: FloatLike = 1.0,
    atmosphere_radiance: FloatLike | None = None,
    window_transmission: FloatLike = 1.0,
    window_reflectance: FloatLike = 0.0,
    window_radiance: FloatLike | None = None,
    window_reflected_radiance: FloatLike | None = None,
) -> FloatArray:
    """Blackbody-equivalent radiance of the surface, from the radiance at the lens.

    Parameters
    ----------
    lens_radiance : float or array
        In-band radiance that reached the lens. [W/(m2 sr)]
    emissivity : float or array
        True emissivity in the band towards the camera, 0 < value <= 1. [-]
    reflected_radiance : float or array or None
        Blackbody radiance at the reflected apparent temperature; None only at emissivity 1.
        [W/(m2 sr)]
    transmission : float or array
        True transmission of the air path, 0 < value <= 1. [-]
    atmosphere_radiance : float or array, optional
        Blackbody radiance at air temperature; needed where `transmission` < 1. [W/(m2 sr)]
    window_transmission, window_reflectance : float or array
        In-band transmission, 0 < value <= 1, and reflectance of the window; their sum at most 1;
        the rest is emitted. [-]
    window_radiance : float or array, optional
        Blackbody radiance at the window's temperature; needed where it emits. [W/(m2 sr)]
    window_reflected_radiance : float or array, optional
        Radiance mirrored by the window from the camera's side; needed where it reflects.
        [W/(m2 sr)]

    Returns
    -------
    array, broadcast shape
        Radiance a black body at the surface's temperature would have; NaN where not positive:
        the reflected, atmospheric and window parts exceed the signal. [W/(m2 sr)]

    Raises
    ------
    InputError
        If a share is outside its bounds, a radiance that is needed is missing, or shapes differ.

    Notes
    -----
    Inverse of ``L_lens = tw (tau (eps L_object + (1 - eps) L_refl) + (1 - tau) L_atm)
    + rw L_window_reflected + (1 - tw - rw) L_window`` (ISO 18434-1, with a window as in
    ASTM E1897). The air path lies between surface and window.

    References
    ----------
    .. [1] ISO 18434-1:2008; ASTM E1897 (window transmittance), E1862 (reflected temperature),
       E1933 (emissivity).
    """
    _check_share("emissivity", emissivity)
    _check_share("transmission", transmission)
    _check_share("window_transmission", window_transmission)
    _check_share("window_reflectance", window_reflectance, zero_allowed=True)
    window_emission = 1.0 - np.asarray(window_transmission) - window_reflectance
    if np.any(window_emission < -1e-12):
        raise InputError(
            "window_transmission + window_reflectance exceeds 1; expected a sum of at most 1"
        )
    _check_shapes(**{key: value for key, value in locals().items() if key != "window_emission"})
    before = window_transmission * np.asarray(transmission)
    parts = (
        _part(
            before * (1.0 - np.asarray(emissivity)),
            reflected_radiance,
            "emissivity is below 1",
            "reflected_radiance",
        ),
        _part(
            window_transmission * (1.0 - np.asarray(transmission)),
            atmosphere_radiance,
            "transmission is below 1",
            "atmosphere_radiance",
        ),
        _part(
            window_reflectance,
            window_reflected_radiance,
            "the window reflects",
            "window_reflected_radiance",
        ),
        _part(
            np.where(window_emission > 1e-12, window_emission, 0.0),
            window_radiance,
            "the window emits",
            "window_radiance",
        ),
    )
    scale = 1.0 / (before * emissivity)
    return _positive(_scaled_and_shifted(lens_radiance, scale, -reduce(np.add, parts) * scale))


def _positive(values: FloatArray) -> FloatArray:
    """Return `values` with NaN in place of what is not positive; works in place."""
    np.copyto(values, np.nan, where=values <= 0.0)
    return values


def correct_temperature(
    recorded_temperature: FloatLike,
    *,
    band: Band,
    emissivity: FloatLike,
    reflected_temperature: FloatLike | None,
    transmission: FloatLike = 1.0,
    atmosphere_temperature: FloatLike | None = None,
    window_transmission: FloatLike = 1.0,
    window_reflectance: FloatLike = 0.0,
    window_temperature: FloatLike | None = None,
    window_reflected_temperature: FloatLike | None = None,
    camera_emissivity: FloatLike = 1.0,
    camera_reflected_temperature: FloatLike | None = None,
    camera_transmission: FloatLike = 1.0,
    camera_atmosphere_temperature: FloatLike | None = None,
    camera_window_transmission: FloatLike = 1.0,
    camera_window_temperature: FloatLike | None = None,
) -> FloatArray:
    """Surface temperature from a recorded one: camera settings undone, true ones applied.

    Parameters
    ----------
    recorded_temperature : float or array
        Temperature as recorded. [K]
    band : Band
        The camera's band.
    emissivity, reflected_temperature, transmission, atmosphere_temperature : float or array
        True values; see `object_radiance`. [-], [K]
    window_transmission, window_reflectance : float or array
        True values of a window in the way. [-]
    window_temperature, window_reflected_temperature : float or array, optional
        Temperature of the window and of what it mirrors. [K]
    camera_emissivity, camera_reflected_temperature, camera_transmission : float or array
        What the camera had applied; see `lens_radiance`. [-], [K]
    camera_atmosphere_temperature : float or array, optional
        What the camera had applied. [K]
    camera_window_transmission, camera_window_temperature : float or array
        What the camera had applied. [-], [K]

    Returns
    -------
    array, broadcast shape
        Surface temperature; NaN where the other parts exceed the signal. [K]

    Raises
    ------
    InputError
        As `lens_radiance` and `object_radiance`.

    Examples
    --------
    >>> band = Band.rectangular(7.5e-6, 14e-6)
    >>> hot = correct_temperature(307.8003, band=band, emissivity=0.2, reflected_temperature=293.15)
    >>> round(float(hot), 2)
    353.15
    """
    at_lens = lens_radiance(
        recorded_temperature,
        band=band,
        emissivity=camera_emissivity,
        reflected_temperature=camera_reflected_temperature,
        transmission=camera_transmission,
        atmosphere_temperature=camera_atmosphere_temperature,
        window_transmission=camera_window_transmission,
        window_temperature=camera_window_temperature,
    )
    at_surface = object_radiance(
        at_lens,
        emissivity=emissivity,
        reflected_radiance=_optional_radiance(band, reflected_temperature),
        transmission=transmission,
        atmosphere_radiance=_optional_radiance(band, atmosphere_temperature),
        window_transmission=window_transmission,
        window_reflectance=window_reflectance,
        window_radiance=_optional_radiance(band, window_temperature),
        window_reflected_radiance=_optional_radiance(band, window_reflected_temperature),
    )
    return band.temperature(at_surface)


def _optional_radiance(band: Band, temperature: FloatLike | None) -> FloatArray | None:
    return None if temperature is None else band.radiance(temperature)


def surface_temperature_fourth_power(
    apparent: FloatLike, *, emissivity: FloatLike, reflected: FloatLike
) -> FloatArray:
    """Surface temperature by the grey fourth-power law, no air path; for comparison only.

    Parameters
    ----------
    apparent : float or array
        Blackbody-equivalent temperature. [K]
    emissivity : float or array
        Emissivity in the camera's band, 0 < value <= 1. [-]
    reflected : float or array
        Reflected apparent temperature. [K]

    Returns
    -------
    array, broadcast shape
        Surface temperature; NaN where the reflected part exceeds the signal. [K]

    Raises
    ------
    InputError
        If emissivity is outside (0, 1] or shapes do not broadcast.

    Notes
    -----
    ``T^4 = (T_apparent^4 - (1 - eps) T_refl^4) / eps``. In a band radiance does not go with the
    fourth power (near 300 K the exponent is 4.7 for 7.5-14 µm), so this errs by kelvins on shiny
    cladding; nothing in the assessment uses it.

    Examples
    --------
    >>> round(float(surface_temperature_fourth_power(320.0, emissivity=0.9, reflected=293.15)), 2)
    322.6
    """
    _check_share("emissivity", emissivity)
    _check_shapes(apparent=apparent, emissivity=emissivity, reflected=reflected)
    power = np.asarray(
        (np.asarray(apparent) ** 4 - (1.0 - np.asarray(emissivity)) * np.asarray(reflected) ** 4)
        / emissivity
    )
    return np.sqrt(np.sqrt(np.where(power > 0.0, power, np.nan)))


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
    _check_share("foil_emissivity", foil_emissivity, zero_allowed=True)
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
    _check_share("reference_emissivity", reference_emissivity)
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
        atmosphere_radiance=_optional_radiance(band, atmosphere_temperature),
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
