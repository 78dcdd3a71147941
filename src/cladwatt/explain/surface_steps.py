"""Steps from the surface's temperature to the heat it gives off."""

import numpy as np

from cladwatt.explain.convection_steps import convection_steps
from cladwatt.explain.nominal import NominalBook
from cladwatt.explain.sheet import Sheet, saturation_text
from cladwatt.explain.steps import Pad, Section, median_of, source_of
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.outer_balance import (
    Vapour,
    outer_flux,
    wetted_emissivity,
)
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.surroundings_draws import Pieces, sky_draws
from cladwatt.physics.condensation import (
    latent_heat,
    latent_heat_flux,
    lewis_number,
    mass_transfer_coefficient,
    surface_vapour_pressure,
    vapour_diffusivity,
    vapour_mass_flux,
)
from cladwatt.physics.constants import MOLAR_GAS, MOLAR_MASS_WATER, STEFAN_BOLTZMANN, ZERO_CELSIUS
from cladwatt.physics.convection import VERTICAL_LENGTH
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.moist_air import vapour_mole_fraction
from cladwatt.physics.radiation import radiative_flux
from cladwatt.physics.surface_balance import SurfaceExchange, surface_coefficients, surface_fluxes
from cladwatt.quantities import Quantity
from cladwatt.types import FloatArray

__all__ = ["exchange_steps", "surface_section"]

ASHRAE = "ASHRAE Fundamentals, psychrometrics"
MASSMAN = "Massman 1998"
LEWIS = "Chilton and Colburn 1934"


def surface_section(seen: Seen) -> Section:
    """Return what the surface exchanges heat with; the wind must be known.

    Parameters
    ----------
    seen : Seen
        With one draw.
    """
    pad, conditions, frame, line = Pad(), seen.conditions, seen.frame, seen.line_draws
    exchange = line.exchange(frame, seen.diameter)
    _diameter(pad, seen)
    pad.given("wind_speed", "v", exchange.wind_speed, "m/s", source_of(conditions.wind_speed, ""))
    if np.any(np.asarray(exchange.wind_angle_deg) != 90.0):
        angle = source_of(conditions.wind_angle_deg, "")
        pad.given("wind_angle", "psi", exchange.wind_angle_deg, "deg", angle)
    pad.given("air_pressure", "p", frame.pressure, "Pa", "site, or standard atmosphere")
    _humidity(pad, exchange)
    if line.inclination_deg:
        source = "line list" if seen.region.inclination_deg is None else "region"
        pad.given("inclination", "incl", line.inclination_deg, "deg", source)
        pad.given("vertical_length", "H", VERTICAL_LENGTH, "m", "assumption")
    total = seen.region.total_emissivity or seen.line.cladding.total_emissivity
    pad.given("total_emissivity", "eps_tot", line.total_emissivity, "-", total.source)
    _surroundings(pad, seen, frame)
    _sun(pad, seen, frame, line)
    return pad.section("surface")


def _diameter(pad: Pad, seen: Seen) -> None:
    """Write down the diameter over the cladding."""
    line, override = seen.line, seen.region.outside_diameter
    if override is not None or not seen.diameter_known:
        source = source_of(override, "assumption, for the convection law alone")
        pad.given("lagged_diameter", "D", seen.diameter, "m", source)
        return
    assert line.pipe_outside_diameter is not None
    pipe = line.pipe_outside_diameter
    pad.given("pipe_diameter", "d", median_of(pipe), "m", pipe.source)
    names = []
    for number, layer in enumerate(line.layers, start=1):
        thickness = seen.region.lagging_thickness if len(line.layers) == 1 else None
        thickness = thickness or layer.thickness
        assert thickness is not None
        names.append(f"t_{number}")
        pad.given("layer_thickness", names[-1], median_of(thickness), "m", thickness.source)
    sheet = line.cladding.thickness
    pad.given("cladding_thickness", "t_clad", sheet.value, "m", sheet.source)
    names.append("t_clad")
    pad.found("lagged_diameter", "D", seen.diameter, "m", f"d + 2 ({' + '.join(names)})",
              f"d {' '.join(names)}")  # fmt: skip


def _humidity(pad: Pad, exchange: SurfaceExchange) -> None:
    """Write down the vapour's share of the air where its properties take it in."""
    if exchange.relative_humidity is None:
        return
    air, pressure = exchange.air_temperature, exchange.pressure
    fraction = vapour_mole_fraction(air, exchange.relative_humidity, pressure)
    pad.found("vapour_fraction", "x_v", fraction, "-", f"phi {saturation_text('T_air')} / p",
              "phi T_air p", ASHRAE)  # fmt: skip


def _surroundings(pad: Pad, seen: Seen, frame: FrameDraws) -> None:
    """Write down the temperature that the surface radiates to."""
    conditions = seen.conditions
    if frame.pieces is not None:
        _pieces(pad, seen, frame.pieces)
        return
    sky, declared = conditions.sky_total_temperature, conditions.surroundings_temperature
    if declared is not None or sky is None:
        source = source_of(declared, "as the air")
        pad.given("surroundings", "T_sur", frame.surroundings_temperature, "K", source)
        return
    view = conditions.sky_view_factor or Quantity(0.5, source="assumption")
    drawn = sky_draws(NominalBook(0, 1), "", sky, conditions)
    pad.given("sky_total_temperature", "T_sky", drawn, "K", sky.source)
    pad.given("sky_view_factor", "F_sky_tot", median_of(view), "-", view.source)
    pad.found(
        "surroundings", "T_sur", frame.surroundings_temperature, "K",
        "(F_sky_tot T_sky^4 + (1 - F_sky_tot) T_air^4)^(1/4)", "F_sky_tot T_sky T_air",
        "Stefan-Boltzmann",
    )  # fmt: skip


def _pieces(pad: Pad, seen: Seen, pieces: Pieces) -> None:
    """Write down surroundings in pieces, and the uniform ones that radiate the same."""
    inputs: list[str] = []
    terms, shares = [], []
    declared = seen.conditions.surroundings_pieces
    for number, (piece, temperature) in enumerate(
        zip(declared, pieces.temperature, strict=True), 1
    ):
        symbols = f"T_{piece.what}_{number}", f"F_{piece.what}_{number}"
        pad.given("piece_temperature", symbols[0], temperature, "K", piece.temperature.source)
        factor = piece.view_factor
        pad.given("piece_view_factor", symbols[1], median_of(factor), "-", factor.source)
        inputs += symbols
        terms.append(f"{symbols[1]} {symbols[0]}^4")
        shares.append(symbols[1])
    formula = f"(({' + '.join(terms)}) / ({' + '.join(shares)}))^(1/4)"
    pad.found("surroundings", "T_sur", seen.frame.surroundings_temperature, "K", formula,
              " ".join(inputs), "Stefan-Boltzmann")  # fmt: skip


def _sun(pad: Pad, seen: Seen, frame: FrameDraws, line: LineDraws) -> None:
    """Write down what the surface takes from the sun."""
    if not frame.irradiance.any():
        pad.given("sun", "q_sun", 0.0, "W/m²", "no sun declared on the pipe")
        return
    source = source_of(seen.conditions.solar_irradiance, "")
    pad.given("irradiance", "G", frame.irradiance, "W/m²", source)
    absorptance = seen.line.cladding.solar_absorptance.source
    pad.given("solar_absorptance", "alpha", line.solar_absorptance, "-", absorptance)
    absorbed = line.exchange(frame, seen.diameter).absorbed_solar
    pad.found("sun", "q_sun", absorbed, "W/m²", "alpha G / pi", "alpha G", "projected width of D")


def exchange_steps(
    pad: Pad,
    surface_temperature: float,
    exchange: SurfaceExchange,
    vapour: Vapour | None,
    *,
    suffix: str = "",
) -> None:
    """Write down how a surface gives off its heat, from its temperature to its flux.

    Parameters
    ----------
    pad : Pad
    surface_temperature : float
        [K]
    exchange : SurfaceExchange
        One draw.
    vapour : Vapour or None
        That may condense on the line, one draw.
    suffix : str
        Behind the symbols that belong to this surface temperature.

    Notes
    -----
    The correlations are evaluated one by one; coefficient and fluxes are the engine's own.
    """
    sheet = Sheet(pad, suffix)
    surface = np.array([surface_temperature])
    convection_steps(sheet, surface, exchange)
    fluxes = surface_fluxes(surface, exchange)
    sheet.found("convective_flux", "q_conv", fluxes.convection, "W/m²", "{h_c} ({T_s} - T_air)")
    emissivity, radiation = "eps_tot", fluxes.radiation
    if vapour is not None:
        wetted = wetted_emissivity(surface, exchange, vapour)
        if (wetted != exchange.total_emissivity).any():
            emissivity = _wetted(sheet, surface, exchange, vapour, wetted)
            radiation = radiative_flux(
                surface,
                emissivity=wetted,
                surroundings_temperature=exchange.surroundings_temperature,
            )
    sheet.found(
        "radiative_flux", "q_rad", radiation, "W/m²",
        f"{emissivity} {STEFAN_BOLTZMANN:.7g} ({{T_s}}^4 - T_sur^4)", "Stefan-Boltzmann",
    )  # fmt: skip
    formula = "{q_conv} + {q_rad} - q_sun"
    if vapour is not None:
        _latent(sheet, surface, exchange, vapour)
        formula += " + {q_lat}"
    sheet.found("flux", "q", outer_flux(surface, exchange, vapour), "W/m²", formula)


def _wetted(
    sheet: Sheet,
    surface: FloatArray,
    exchange: SurfaceExchange,
    vapour: Vapour,
    wetted: FloatArray,
) -> str:
    """Write down the emissivity of what has condensed, and return its symbol."""
    dew = dew_point(exchange.air_temperature, np.clip(vapour.relative_humidity, 0.01, 1.0))
    film, span = (float(np.ravel(part)[0]) for part in vapour[1:])
    formula = f"film of water below T_dew: the larger of {film:.10g} and eps_tot"
    if (dew - surface < span).any():
        formula = f"eps_tot + {1 / span:.10g} (T_dew - {{T_s}}) ({film:.10g} - eps_tot)"
    sheet.found("wetted_emissivity", "eps_wet", wetted, "-", formula,
                "Incropera et al., table A.11")  # fmt: skip
    return "{eps_wet}"


def _latent(sheet: Sheet, surface: FloatArray, exchange: SurfaceExchange, vapour: Vapour) -> None:
    """Write down the heat of condensing vapour."""
    coefficient = surface_coefficients(surface, exchange)[0]
    air, pressure = exchange.air_temperature, exchange.pressure
    flux = latent_heat_flux(
        surface,
        air_temperature=air,
        relative_humidity=vapour.relative_humidity,
        convection_coefficient=coefficient,
        pressure=pressure,
    )
    if not flux.any():
        sheet.given("latent_flux", "q_lat", 0.0, "W/m²", "dry: not below the dew point")
        return
    film, found = 0.5 * (surface + air), sheet.found
    dry = "_dry" if exchange.relative_humidity is not None else ""
    conductivity = "{k_dry}" if dry else "{k_air}"
    capacity = f"{{rho{dry}}} {{c_p{dry}}}"
    over_ice = bool(surface[0] < ZERO_CELSIUS)
    found("surface_vapour_pressure", "e_s", surface_vapour_pressure(surface), "Pa",
          saturation_text("{T_s}", over_ice=over_ice), ASHRAE)  # fmt: skip
    found("vapour_diffusivity", "D_v", vapour_diffusivity(film, pressure), "m²/s",
          "2.178e-5 ({T_film}/273.15)^1.81 101325 / p", MASSMAN)  # fmt: skip
    found("lewis", "Le", lewis_number(film), "-", f"{conductivity} / ({capacity} {{D_v}})")
    transfer = mass_transfer_coefficient(coefficient, film, pressure)
    found("mass_transfer", "h_m", transfer, "m/s", f"{{h_c}} / ({capacity} {{Le}}^(2/3))", LEWIS)
    mass = vapour_mass_flux(
        surface,
        air_temperature=air,
        relative_humidity=vapour.relative_humidity,
        convection_coefficient=coefficient,
        pressure=pressure,
    )
    found("vapour_mass_flux", "m_v", mass, "kg/(m² s)",
          f"{{h_m}} {MOLAR_MASS_WATER:.7g} p / ({MOLAR_GAS:.7g} {{T_film}}) "
          "ln((p - e_air) / (p - {e_s}))", "Bird et al., section 18.2")  # fmt: skip
    heat = "2834.4 - 0.24" if over_ice else "2501 - 2.326"
    found("latent_heat", "r", latent_heat(surface), "J/kg", f"1000 ({heat} ({{T_s}} - 273.15))",
          ASHRAE)  # fmt: skip
    found("latent_flux", "q_lat", flux, "W/m²", "{m_v} {r}")
