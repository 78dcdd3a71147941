"""The measurement equation of a camera, forwards and backwards, in band radiance.

The air path lies between the surface and the window (or the lens where there is no window); the
few centimetres between window and lens are neglected.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import reduce

import numpy as np

from cladwatt.errors import InputError
from cladwatt.physics.band import Band
from cladwatt.physics.lookup import uniform_table
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "check_shapes",
    "check_share",
    "correct_temperature",
    "lens_radiance",
    "object_radiance",
    "optional_radiance",
    "surface_temperature_fourth_power",
]


def check_share(name: str, value: FloatLike, *, zero_allowed: bool = False) -> None:
    """Raise InputError unless 0 < value <= 1 (0 itself where allowed); NaN passes."""
    array = np.asarray(value)
    wrong = (array < 0 if zero_allowed else array <= 0) | (array > 1)
    if np.any(wrong):
        shown = float(array[wrong].ravel()[0]) if array.ndim else float(array)
        bound = "0 <=" if zero_allowed else "0 <"
        raise InputError(f"{name} is {shown:g}; expected {bound} {name} <= 1")


def check_shapes(**values: FloatLike | None) -> None:
    """Raise InputError, naming the shapes, unless all values broadcast; None is passed over."""
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
        check_share(name, share)
    check_shapes(
        recorded_temperature=recorded_temperature,
        emissivity=emissivity,
        reflected_temperature=reflected_temperature,
        transmission=transmission,
        atmosphere_temperature=atmosphere_temperature,
        window_transmission=window_transmission,
        window_temperature=window_temperature,
    )
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
    check_share("emissivity", emissivity)
    check_share("transmission", transmission)
    check_share("window_transmission", window_transmission)
    check_share("window_reflectance", window_reflectance, zero_allowed=True)
    window_emission = 1.0 - np.asarray(window_transmission) - window_reflectance
    if np.any(window_emission < -1e-12):
        raise InputError(
            "window_transmission + window_reflectance exceeds 1; expected a sum of at most 1"
        )
    check_shapes(
        lens_radiance=lens_radiance,
        emissivity=emissivity,
        reflected_radiance=reflected_radiance,
        transmission=transmission,
        atmosphere_radiance=atmosphere_radiance,
        window_transmission=window_transmission,
        window_reflectance=window_reflectance,
        window_radiance=window_radiance,
        window_reflected_radiance=window_reflected_radiance,
    )
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
    settings = (
        emissivity,
        reflected_temperature,
        transmission,
        atmosphere_temperature,
        window_transmission,
        window_reflectance,
        window_temperature,
        window_reflected_temperature,
        camera_emissivity,
        camera_reflected_temperature,
        camera_transmission,
        camera_atmosphere_temperature,
        camera_window_transmission,
        camera_window_temperature,
    )

    def correct(recorded: FloatLike) -> FloatArray:
        at_lens = lens_radiance(
            recorded,
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
            reflected_radiance=optional_radiance(band, reflected_temperature),
            transmission=transmission,
            atmosphere_radiance=optional_radiance(band, atmosphere_temperature),
            window_transmission=window_transmission,
            window_reflectance=window_reflectance,
            window_radiance=optional_radiance(band, window_temperature),
            window_reflected_radiance=optional_radiance(band, window_reflected_temperature),
        )
        return band.temperature(at_surface)

    whole_frame = np.size(recorded_temperature) >= 4 * _FRAME_NODES and all(
        np.ndim(value) == 0 for value in settings if value is not None
    )
    quick = _tabulated(correct, np.asarray(recorded_temperature)) if whole_frame else None
    return correct(recorded_temperature) if quick is None else quick


#: A frame's own table: a step wider than this, or a map that is not finite all over, is not used.
_FRAME_NODES = 8193
_FRAME_STEP = 0.05


def _tabulated(
    correct: Callable[[FloatLike], FloatArray], recorded: FloatArray
) -> FloatArray | None:
    """Return the correction of a frame through one table of its own range; None if unfit.

    With the same settings everywhere the correction is one smooth function of the recorded
    temperature, so one look-up replaces two and the arithmetic between them.
    """
    lowest, highest = float(recorded.min()), float(recorded.max())
    if np.isnan(lowest):
        lowest, highest = (
            float(np.fmin.reduce(recorded, None)),
            float(np.fmax.reduce(recorded, None)),
        )
    margin = 1e-6 + 1e-6 * (highest - lowest)
    if not highest - lowest < _FRAME_STEP * (_FRAME_NODES - 1):
        return None
    nodes = np.linspace(lowest - margin, highest + margin, _FRAME_NODES)
    values = correct(nodes)
    if not np.all(np.isfinite(values)):
        return None
    return uniform_table(nodes, values).look_up(recorded)


def optional_radiance(band: Band, temperature: FloatLike | None) -> FloatArray | None:
    """Return the band radiance of a temperature that may not be given."""
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
    check_share("emissivity", emissivity)
    check_shapes(apparent=apparent, emissivity=emissivity, reflected=reflected)
    power = np.asarray(
        (np.asarray(apparent) ** 4 - (1.0 - np.asarray(emissivity)) * np.asarray(reflected) ** 4)
        / emissivity
    )
    return np.sqrt(np.sqrt(np.where(power > 0.0, power, np.nan)))
