"""Steps from what was recorded to the temperature of the surface."""

import math
from dataclasses import replace

import numpy as np

from cladwatt.explain.nominal import NominalRegion
from cladwatt.explain.sheet import saturation_text
from cladwatt.explain.steps import Pad, Section, median_of, source_of
from cladwatt.inverse.face import surface_temperature_draws
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import may_condense
from cladwatt.inverse.surroundings_draws import Pieces
from cladwatt.physics.atmosphere import _coefficients, air_path_transmission
from cladwatt.physics.band import Band
from cladwatt.physics.emissivity import (
    BARE_METAL_EMISSIVITY,
    COAT_EMISSIVITY,
    COAT_REFRACTIVE_INDEX,
    directional_emissivity,
    metal_index_hagen_rubens,
)
from cladwatt.physics.humidity import absolute_humidity, vapour_pressure
from cladwatt.physics.radiometry import object_radiance
from cladwatt.quantities import Quantity
from cladwatt.survey.model import Cladding, Conditions, Recording
from cladwatt.survey.region import Region

__all__ = ["recorded_steps", "recorded_temperature", "scene_section", "settings_section"]

PLANCK = "Planck's law; ISO 80000-7"
ISO_18434 = "ISO 18434-1"
ASHRAE = "ASHRAE Fundamentals, psychrometrics"
RADIANCE = "W/(m² sr)"


def band_formula(band: Band, temperature: str) -> str:
    """Return the formula of a black body's radiance in the band."""
    low, high = (1e6 * limit for limit in band.limits)
    weighted = "" if set(band.responses) == {1.0} else " times the camera's response"
    return (
        f"integral over {low:g} to {high:g} um of 2 h c^2 / (lambda^5 (exp(h c / (lambda k_B "
        f"{temperature})) - 1)){weighted}"
    )


def _radiance(pad: Pad, band: Band, temperature: float, of: str, key: str) -> None:
    pad.found(
        key, f"L_{of}", band.radiance(temperature), RADIANCE, band_formula(band, f"T_{of}"),
        f"T_{of}", PLANCK,
    )  # fmt: skip


def settings_section(recording: Recording, band: Band) -> Section:
    """Return what the camera had been told when it recorded.

    Parameters
    ----------
    recording : Recording
    band : Band
    """
    pad, said = Pad(), "survey, recording"
    pad.given("camera_emissivity", "eps_cam", recording.emissivity, "-", said)
    if recording.emissivity < 1 and recording.reflected_temperature is not None:
        value = recording.reflected_temperature
        pad.given("camera_reflected_temperature", "T_refl_cam", value, "K", said)
        _radiance(pad, band, value, "refl_cam", "radiance_there")
    pad.given("camera_transmission", "tau_cam", recording.transmission, "-", said)
    if recording.transmission < 1 and recording.atmosphere_temperature is not None:
        value = recording.atmosphere_temperature
        pad.given("camera_atmosphere_temperature", "T_atm_cam", value, "K", said)
        _radiance(pad, band, value, "atm_cam", "radiance_there")
    if recording.window_transmission < 1 and recording.window_temperature is not None:
        value = recording.window_transmission
        pad.given("camera_window_transmission", "tau_win_cam", value, "-", said)
        value = recording.window_temperature
        pad.given("camera_window_temperature", "T_win_cam", value, "K", said)
        _radiance(pad, band, value, "win_cam", "radiance_there")
    return pad.section("settings")


def _settings_formula(recording: Recording) -> tuple[str, str]:
    """Return how the settings undone give the radiance at the lens, and the symbols in it."""
    formula, inputs = "L_rec", "L_rec"
    if recording.emissivity < 1:
        formula, inputs = "eps_cam L_rec + (1 - eps_cam) L_refl_cam", "L_rec eps_cam L_refl_cam"
    if recording.transmission < 1:
        formula = f"tau_cam ({formula}) + (1 - tau_cam) L_atm_cam"
        inputs += " tau_cam L_atm_cam"
    if recording.window_transmission < 1:
        formula = f"tau_win_cam ({formula}) + (1 - tau_win_cam) L_win_cam"
        inputs += " tau_win_cam L_win_cam"
    return formula, inputs


def recorded_temperature(lens_temperature: float, recording: Recording, band: Band) -> float:
    """Return what the camera would have recorded for a value at the lens. [K]

    Parameters
    ----------
    lens_temperature : float
        Blackbody-equivalent. [K]
    recording : Recording
        The settings the camera had applied.
    band : Band
    """

    def radiance(temperature: float | None) -> float | None:
        return None if temperature is None else float(band.radiance(temperature))

    recorded = object_radiance(
        band.radiance(lens_temperature),
        emissivity=recording.emissivity,
        reflected_radiance=radiance(recording.reflected_temperature),
        transmission=recording.transmission,
        atmosphere_radiance=radiance(recording.atmosphere_temperature),
        window_transmission=recording.window_transmission,
        window_radiance=radiance(recording.window_temperature),
    )
    return float(band.temperature(recorded))


def scene_section(
    nominal: NominalRegion, region: Region, cladding: Cladding, frame: FrameDraws, line: LineDraws
) -> Section:
    """Return the true conditions between surface and lens.

    Parameters
    ----------
    nominal : NominalRegion
    region : Region
        As drawn.
    cladding : Cladding
        Of its line.
    frame, line
        Nominal values, one draw each.
    """
    pad, conditions, band = Pad(), nominal.entry.conditions, frame.band
    air = source_of(conditions.air_temperature, "")
    pad.given("air_temperature", "T_air", frame.air_temperature, "K", air)
    _radiance(pad, band, float(frame.air_temperature[0]), "air", "radiance_there")
    _reflected(pad, nominal, frame)
    _vapour(pad, conditions, frame, line)
    _air_path(pad, nominal, frame)
    _window(pad, conditions, frame)
    declared = region.band_emissivity or cladding.band_emissivity
    source = nominal.by_reference.get("band_emissivity", declared.source)
    pad.given("band_emissivity", "eps_n", line.band_emissivity, "-", source)
    return pad.section("scene")


def _vapour(pad: Pad, conditions: Conditions, frame: FrameDraws, line: LineDraws) -> None:
    """Write down humidity and, on a line cold enough, the dew point."""
    humidity = conditions.relative_humidity
    if humidity is None:
        return
    pad.given("relative_humidity", "phi", median_of(humidity), "-", humidity.source)
    if not may_condense(frame, line):
        return
    assert frame.relative_humidity is not None
    assert frame.dew_point is not None
    pressure = vapour_pressure(frame.air_temperature, frame.relative_humidity)
    pad.found("vapour_pressure", "e_air", pressure, "Pa", f"phi {saturation_text('T_air')}",
              "phi T_air", ASHRAE)  # fmt: skip
    pad.found("dew_point", "T_dew", frame.dew_point, "K",
              f"where {saturation_text('T_dew')} is e_air", "e_air", ASHRAE)  # fmt: skip


def _reflected(pad: Pad, nominal: NominalRegion, frame: FrameDraws) -> None:
    conditions = nominal.entry.conditions
    value = float(frame.reflected_temperature[0])
    source = nominal.by_reference.get("reflected_temperature")
    if source is None and frame.pieces is not None and frame.mirrors_pieces:
        _mirrored_pieces(pad, nominal, frame, frame.pieces)
        return
    sky = conditions.sky_band_temperature
    if source is None and conditions.reflected_temperature is None and sky is not None:
        view = conditions.sky_view_factor or Quantity(0.5, source="assumption")
        pad.given("sky_band_temperature", "T_sky_band", median_of(sky), "K", sky.source)
        _radiance(pad, frame.band, median_of(sky), "sky_band", "radiance_there")
        pad.given("sky_view_factor", "F_sky", median_of(view), "-", view.source)
        formula, inputs = "F_sky L_sky_band + (1 - F_sky) L_air", "F_sky L_sky_band L_air"
        radiance = frame.band.radiance(value)
        pad.found("reflected_radiance", "L_refl", radiance, RADIANCE, formula, inputs, ISO_18434)
        return
    declared = source_of(conditions.reflected_temperature, "as the air")
    pad.given("reflected_temperature", "T_refl", value, "K", source or declared)
    _radiance(pad, frame.band, value, "refl", "radiance_there")


def _mirrored_pieces(pad: Pad, nominal: NominalRegion, frame: FrameDraws, pieces: Pieces) -> None:
    """Write down what surroundings in pieces radiate in the band, by their view factors."""
    inputs: list[str] = []
    terms, shares = [], []
    conditions = nominal.entry.conditions
    for number, piece in enumerate(conditions.surroundings_pieces, start=1):
        of = f"{piece.what}_{number}_band"
        temperature = float(pieces.band_temperature[number - 1, 0])
        source = piece.temperature.source
        if piece.what == "sky":
            source = source_of(conditions.sky_band_temperature, "as the air")
        pad.given("mirrored_piece_temperature", f"T_{of}", temperature, "K", source)
        _radiance(pad, frame.band, temperature, of, "radiance_there")
        factor = piece.view_factor
        pad.given("piece_view_factor", f"F_{of}", median_of(factor), "-", factor.source)
        inputs += [f"F_{of}", f"L_{of}"]
        terms.append(f"F_{of} L_{of}")
        shares.append(f"F_{of}")
    formula = f"({' + '.join(terms)}) / ({' + '.join(shares)})"
    radiance = frame.band.radiance(frame.reflected_temperature)
    pad.found("reflected_radiance", "L_refl", radiance, RADIANCE, formula, " ".join(inputs),
              ISO_18434)  # fmt: skip


def _air_path(pad: Pad, nominal: NominalRegion, frame: FrameDraws) -> None:
    conditions = nominal.entry.conditions
    declared = conditions.atmosphere_transmission
    if declared is not None:
        pad.given("transmission", "tau", frame.transmission, "-", declared.source)
        return
    distance = nominal.path
    humidity = conditions.relative_humidity or Quantity(
        0.5, 0.2, lower=0.0, upper=1.0, source="assumption"
    )
    # like the engine: the declared air temperature, the medians of path and humidity
    assert conditions.air_temperature is not None
    air, path, phi = conditions.air_temperature.value, median_of(distance), median_of(humidity)
    vapour = absolute_humidity(air, phi)
    fit = _coefficients(frame.band.limits)
    pad.given("distance", "d_path", path, "m", distance.source)
    if conditions.relative_humidity is None:
        pad.given("relative_humidity", "phi", phi, "-", humidity.source)
    pad.found(
        "absolute_humidity", "w", vapour, "kg/m³",
        f"phi {saturation_text('T_air')} 0.018015268 / (8.314462618 T_air)", "phi T_air", ASHRAE,
    )  # fmt: skip
    transmission = air_path_transmission(
        path,
        air_temperature=air,
        relative_humidity=phi,
        band_limits=frame.band.limits,
    )
    pad.found(
        "transmission", "tau", transmission, "-",
        f"exp(-({fit.dry:.5g} d_path^{fit.dry_power:g} + {fit.line:.5g} (w/0.01)^"
        f"{fit.line_humidity_power:g} (T_air/293.15)^{fit.line_temperature_power:g} d_path^"
        f"{fit.line_power:g} + {fit.continuum:.5g} (w/0.01)^2 d_path))",
        "d_path w T_air", "fit to LOWTRAN 7, AFGL-TR-88-0177",
    )  # fmt: skip


def _window(pad: Pad, conditions: Conditions, frame: FrameDraws) -> None:
    window = conditions.window
    if window is None:
        return
    transmission = window.transmission.source
    pad.given("window_transmission", "tau_win", frame.window_transmission, "-", transmission)
    reflectance = window.reflectance.source
    pad.given("window_reflectance", "rho_win", frame.window_reflectance, "-", reflectance)
    source = source_of(window.temperature, "as the air")
    pad.given("window_temperature", "T_win", frame.window_temperature, "K", source)
    _radiance(pad, frame.band, float(frame.window_temperature[0]), "win", "radiance_there")


def recorded_steps(
    pad: Pad,
    lens_temperature: float,
    view_angle: float,
    nominal: NominalRegion,
    frame: FrameDraws,
    line: LineDraws,
    surface_temperature: float,
) -> None:
    """Write down how a recorded value becomes a surface temperature.

    Parameters
    ----------
    pad : Pad
    lens_temperature : float
        Blackbody-equivalent at the lens, mean over a band of angle. [K]
    view_angle : float
        [rad]
    nominal : NominalRegion
    frame, line
        Nominal values, one draw each.
    surface_temperature : float
        As the engine has it. [K]
    """
    recording, band = nominal.entry.recording, frame.band
    recorded = recorded_temperature(lens_temperature, recording, band)
    pad.given("recorded_temperature", "T_rec", recorded, "K", f"frame {nominal.entry.id}")
    _radiance(pad, band, recorded, "rec", "recorded_radiance")
    formula, inputs = _settings_formula(recording)
    lens = float(band.radiance(lens_temperature))
    pad.found("lens_radiance", "L_lens", lens, RADIANCE, formula, inputs, ISO_18434)
    pad.found(
        "lens_temperature", "T_lens", lens_temperature, "K", "black body with L_lens in the band",
        "L_lens", PLANCK,
    )  # fmt: skip
    of = "lens"
    offset = float(frame.calibration_offset(np.array([lens_temperature]))[0, 0])
    if offset != 0:
        reference = nominal.by_reference.get("calibration", "declared accuracy")
        pad.given("camera_offset", "dT_cam", offset, "K", reference)
        pad.found(
            "lens_temperature_true", "T_true", lens_temperature + offset, "K", "T_lens + dT_cam",
            "T_lens dT_cam",
        )  # fmt: skip
        of = "true"
        _radiance(pad, band, lens_temperature + offset, of, "lens_radiance_true")
    normal = "eps_n"
    if _shows_water(lens_temperature, view_angle, frame, line, surface_temperature):
        water = float(frame.water.band_emissivity[0])
        normal, film = "eps_w", np.maximum(line.band_emissivity, water)
        pad.found(
            "water_film", normal, film, "-",
            f"film of water below T_dew: the larger of {water:g} and eps_n",
            "T_dew eps_n", "Incropera et al., table A.11",
        )  # fmt: skip
        line = replace(line, band_emissivity=film, is_metal=False)
    _directional(pad, view_angle, line, normal)
    _surface(pad, f"L_{of}", frame, surface_temperature)


def _shows_water(
    lens_temperature: float,
    view_angle: float,
    frame: FrameDraws,
    line: LineDraws,
    surface_temperature: float,
) -> bool:
    """Return whether the engine took the surface as covered with water."""
    if not may_condense(frame, line) or not math.isfinite(surface_temperature):
        return False
    dry = surface_temperature_draws(
        np.array([lens_temperature]), np.array([view_angle]),
        replace(frame, relative_humidity=None), line,
    )  # fmt: skip
    return bool(dry[0, 0, 0] != surface_temperature)


def _directional(pad: Pad, view_angle: float, line: LineDraws, normal: str) -> None:
    """Write down the emissivity towards the camera."""
    emissivity = directional_emissivity(line.band_emissivity, view_angle, line.is_metal)
    pad.given("view_angle", "theta", math.degrees(view_angle), "deg", "arcsin(y / half width)")
    pad.found(
        "coat_against_angle", "C", directional_emissivity(1.0, view_angle, False), "-",
        f"F(theta) / F(0), F = 1 - (r_s^2 + r_p^2)/2 by Fresnel, n = {COAT_REFRACTIVE_INDEX:g}",
        "theta", "Modest, chapter 2",
    )  # fmt: skip
    if not line.is_metal:
        pad.found("emissivity_towards", "eps", emissivity, "-", f"{normal} C", f"{normal} C")
        return
    bare, coat = BARE_METAL_EMISSIVITY, COAT_EMISSIVITY
    index = float(metal_index_hagen_rubens(bare))
    pad.found(
        "metal_against_angle", "M", directional_emissivity(bare, view_angle, True) / bare, "-",
        f"F(theta) / {bare:g}, F by Fresnel, n = k = {index:.6g} (Hagen and Rubens)",
        "theta", "Modest, chapter 2",
    )  # fmt: skip
    pad.found(
        "emissivity_towards", "eps", emissivity, "-",
        f"eps_n (C + b (M - C)), bare part b = {bare:g} ({coat:g} - eps_n) / ({coat - bare:g} "
        f"eps_n) held to 0..1, 1 where eps_n is below {bare:g}",
        "eps_n C M", "patchwork of bare and covered metal; assumption",
    )  # fmt: skip


def _surface(pad: Pad, lens: str, frame: FrameDraws, surface_temperature: float) -> None:
    """Write down the radiance of the surface and its temperature."""
    formula, inputs = lens, f"{lens} eps L_refl tau L_air"
    if not (frame.window_transmission == 1).all():
        formula = f"({lens} - rho_win L_air - (1 - tau_win - rho_win) L_win) / tau_win"
        inputs += " tau_win rho_win L_win"
    pad.found(
        "surface_radiance", "L_s", frame.band.radiance(surface_temperature), RADIANCE,
        f"(({formula} - (1 - tau) L_air) / tau - (1 - eps) L_refl) / eps", inputs, ISO_18434,
    )  # fmt: skip
    pad.found(
        "surface_temperature", "T_s", surface_temperature, "K",
        "black body with L_s in the band", "L_s", PLANCK,
    )  # fmt: skip
