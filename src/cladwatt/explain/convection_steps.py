"""Steps from a surface temperature to the coefficient of convection."""

import numpy as np

from cladwatt.explain.sheet import Sheet, polynomial_text
from cladwatt.physics import moist_air
from cladwatt.physics.air import (
    _CONDUCTIVITY,
    _SPECIFIC_HEAT,
    _VISCOSITY,
    AIR_TEMPERATURE_RANGE,
    AirProperties,
    air_properties,
)
from cladwatt.physics.constants import GRAVITY, MOLAR_GAS, MOLAR_MASS_WATER
from cladwatt.physics.convection import (
    VERTICAL_LENGTH,
    air_stream,
    convection_coefficient,
    mixed_nusselt,
    nusselt_churchill_bernstein,
    nusselt_churchill_chu_horizontal,
    nusselt_churchill_chu_vertical,
)
from cladwatt.physics.convection_laws import CONVECTION_LAWS, AirStream
from cladwatt.physics.moist_air import moist_air_properties
from cladwatt.physics.surface_balance import SurfaceExchange, surface_coefficients
from cladwatt.types import FloatArray, FloatLike

__all__ = ["convection_steps"]

LEMMON = "quartic fitted to Lemmon and Jacobsen 2004"
VAPOUR = "polynomial fitted to IAPWS R12-08, R15-11, R6-95"
WILKE = "Wilke 1950; Mason and Saxena 1958"
INCROPERA = "Incropera et al., section 9.9"
HORIZONTAL = "Churchill and Chu 1975, horizontal cylinder"
VERTICAL = "Churchill and Chu 1975, vertical face"
FORCED = "Churchill and Bernstein 1977"
YAW = "CIGRE Technical Brochure 601, eq. 21"


def convection_steps(sheet: Sheet, surface: FloatArray, exchange: SurfaceExchange) -> None:
    """Write down air properties, numbers of similarity and the coefficient.

    Parameters
    ----------
    sheet : Sheet
    surface : (1,) array
        Surface temperature. [K]
    exchange : SurfaceExchange
        One draw.

    Notes
    -----
    The default law is taken apart into its correlations; of another law its two coefficients are
    given.
    """
    stream = air_stream(
        surface,
        air_temperature=exchange.air_temperature,
        diameter=exchange.diameter,
        wind_speed=exchange.wind_speed,
        pressure=exchange.pressure,
        wind_angle_deg=exchange.wind_angle_deg,
        relative_humidity=exchange.relative_humidity,
    )
    _film(sheet, surface, exchange)
    if exchange.relative_humidity is None:
        _dry(sheet, stream.film, "")
    else:
        _moist(sheet, surface, exchange, stream)
    _derived(sheet, stream.film)
    if np.any(np.asarray(exchange.wind_angle_deg) != 90.0):
        sheet.found("wind_across", "v_n", stream.speed, "m/s",
                    "v (sin(psi)^2 + 0.0169 cos(psi)^2)^(1/2)", YAW)  # fmt: skip
    if exchange.convection_model == "churchill":
        _churchill(sheet, stream, exchange)
    else:
        _other_law(sheet, stream, exchange)
    if np.any(exchange.inclination_deg):
        _inclined(sheet, surface, stream, exchange)
    coefficient = surface_coefficients(surface, exchange)[0]
    formula = "{h_hor} + sin(incl)^2 ({h_ver} - {h_hor})"
    if not np.any(exchange.inclination_deg):
        formula = "{h_hor}"
    elif not CONVECTION_LAWS[exchange.convection_model].is_blended:
        formula = "{h_ver}" if np.all(np.asarray(exchange.inclination_deg) > 45) else "{h_hor}"
    sheet.found("convection_coefficient", "h_c", coefficient, "W/(m² K)", formula)


def _film(sheet: Sheet, surface: FloatArray, exchange: SurfaceExchange) -> None:
    mean = 0.5 * (surface + exchange.air_temperature)
    film = np.clip(mean, *AIR_TEMPERATURE_RANGE)
    low, high = AIR_TEMPERATURE_RANGE
    held = "" if (film == mean).all() else f", held within {low:g} to {high:g} K"
    sheet.found("film_temperature", "T_film", film, "K", f"({{T_s}} + T_air) / 2{held}")


def _dry(sheet: Sheet, air: AirProperties, of: str) -> None:
    """Write down viscosity, conductivity, heat capacity and density of dry air."""
    k = "k_air" if not of else f"k{of}"
    found = sheet.found
    found("air_viscosity", f"mu{of}", air.dynamic_viscosity, "Pa s",
          polynomial_text(_VISCOSITY, 1e-6), LEMMON)  # fmt: skip
    found("air_conductivity", k, air.conductivity, "W/(m K)",
          polynomial_text(_CONDUCTIVITY, 1e-3), LEMMON)  # fmt: skip
    found("air_specific_heat", f"c_p{of}", air.specific_heat, "J/(kg K)",
          polynomial_text(_SPECIFIC_HEAT), LEMMON)  # fmt: skip
    found("air_density", f"rho{of}", air.density, "kg/m³", "p / (287.05 {T_film})", "ideal gas")


def _moist(sheet: Sheet, surface: FloatArray, exchange: SurfaceExchange, stream: AirStream) -> None:
    """Write down the properties of humid air from those of dry air and of vapour."""
    film = np.clip(0.5 * (surface + exchange.air_temperature), *AIR_TEMPERATURE_RANGE)
    _dry(sheet, air_properties(film, exchange.pressure), "_dry")
    vapour, found = moist_air_properties(film, exchange.pressure, 1.0), sheet.found
    heat = tuple(MOLAR_GAS / MOLAR_MASS_WATER * c for c in moist_air._HEAT_OVER_R)
    found("vapour_viscosity", "mu_vap", vapour.dynamic_viscosity, "Pa s",
          polynomial_text(moist_air._VISCOSITY, 1e-6), VAPOUR)  # fmt: skip
    found("vapour_conductivity", "k_vap", vapour.conductivity, "W/(m K)",
          polynomial_text(moist_air._CONDUCTIVITY, 1e-3), VAPOUR)  # fmt: skip
    found("vapour_specific_heat", "c_vap", vapour.specific_heat, "J/(kg K)",
          polynomial_text(heat), VAPOUR)  # fmt: skip
    share, ratio = np.asarray(stream.vapour_fraction), moist_air._RATIO
    dry = air_properties(film, exchange.pressure)
    root = np.sqrt(dry.dynamic_viscosity / vapour.dynamic_viscosity)
    quarter = ratio**0.25
    by_vapour = moist_air._AIR_VAPOUR * (1 + root / quarter) ** 2
    by_air = moist_air._VAPOUR_AIR * (1 + quarter / root) ** 2
    found("wilke_air", "s_dry", (1 - share) / (1 - share + share * by_vapour), "-",
          f"(1 - x_v) / (1 - x_v + x_v {moist_air._AIR_VAPOUR:.7g} "
          f"(1 + ({{mu_dry}}/{{mu_vap}})^(1/2) / {quarter:.7g})^2)", WILKE)  # fmt: skip
    found("wilke_vapour", "s_vap", share / (share + (1 - share) * by_air), "-",
          f"x_v / (x_v + (1 - x_v) {moist_air._VAPOUR_AIR:.7g} "
          f"(1 + {quarter:.7g} ({{mu_vap}}/{{mu_dry}})^(1/2))^2)", WILKE)  # fmt: skip
    air = stream.film
    found("air_viscosity_moist", "mu", air.dynamic_viscosity, "Pa s",
          "{s_dry} {mu_dry} + {s_vap} {mu_vap}", WILKE)  # fmt: skip
    found("air_conductivity_moist", "k_air", air.conductivity, "W/(m K)",
          "{s_dry} {k_dry} + {s_vap} {k_vap}", WILKE)  # fmt: skip
    found("air_specific_heat_moist", "c_p", air.specific_heat, "J/(kg K)",
          f"((1 - x_v) {ratio:.7g} {{c_p_dry}} + x_v {{c_vap}}) / ((1 - x_v) {ratio:.7g} + x_v)",
          "ideal gases")  # fmt: skip
    found("air_density_moist", "rho", air.density, "kg/m³",
          f"{{rho_dry}} (1 - x_v + x_v / {ratio:.7g})", "ideal gases")  # fmt: skip


def _derived(sheet: Sheet, air: AirProperties) -> None:
    found = sheet.found
    found("air_kinematic_viscosity", "nu", air.kinematic_viscosity, "m²/s", "{mu} / {rho}")
    found("air_prandtl", "Pr", air.prandtl, "-", "{c_p} {mu} / {k_air}")
    found("air_expansion", "beta", air.expansion, "1/K", "1 / {T_film}", "ideal gas")


def _rayleigh(sheet: Sheet, stream: AirStream, length: FloatLike, symbol: str, of: str) -> None:
    """Write down Grashof and Rayleigh number on a length."""
    rayleigh = stream.rayleigh(length)
    sheet.found(
        "grashof", f"Gr{of}", rayleigh / stream.film.prandtl, "-",
        f"{GRAVITY:g} {{beta}} |{{T_s}} - T_air| {symbol}^3 / {{nu}}^2",
    )  # fmt: skip
    sheet.found("rayleigh", f"Ra{of}", rayleigh, "-", f"{{Gr{of}}} {{Pr}}")


def _churchill(sheet: Sheet, stream: AirStream, exchange: SurfaceExchange) -> None:
    """Write down the default law of a horizontal pipe."""
    air, found = stream.film, sheet.found
    _rayleigh(sheet, stream, exchange.diameter, "D", "")
    free = nusselt_churchill_chu_horizontal(stream.rayleigh(exchange.diameter), air.prandtl)
    found("nusselt_free", "Nu_free", free, "-",
          "(0.60 + 0.387 {Ra}^(1/6) / (1 + (0.559/{Pr})^(9/16))^(8/27))^2", HORIZONTAL)  # fmt: skip
    speed = "v" if np.all(np.asarray(exchange.wind_angle_deg) == 90.0) else "{v_n}"
    reynolds = stream.reynolds(air)
    found("reynolds", "Re", reynolds, "-", f"{speed} D / {{nu}}")
    forced = nusselt_churchill_bernstein(reynolds, air.prandtl)
    found("nusselt_forced", "Nu_forced", forced, "-",
          "0.3 + 0.62 {Re}^(1/2) {Pr}^(1/3) / (1 + (0.4/{Pr})^(2/3))^(1/4)"
          " (1 + ({Re}/282000)^(5/8))^(4/5)", FORCED)  # fmt: skip
    mixed = mixed_nusselt(forced, free)
    found("nusselt_mixed", "Nu", mixed, "-", "({Nu_forced}^4 + {Nu_free}^4)^(1/4)", INCROPERA)
    found("coefficient_horizontal", "h_hor", _at(stream, exchange, 0.0), "W/(m² K)",
          "{Nu} {k_air} / D")  # fmt: skip


def _other_law(sheet: Sheet, stream: AirStream, exchange: SurfaceExchange) -> None:
    """Write down the coefficients of a law that is not the default, as they stand."""
    law = CONVECTION_LAWS[exchange.convection_model]
    sheet.given("coefficient_free", "h_free", law.natural(stream), "W/(m² K)", law.source)
    formula = "{h_free}"
    if law.forced is not None:
        sheet.given("coefficient_forced", "h_forced", law.forced(stream), "W/(m² K)", law.source)
        formula = "({h_forced}^4 + {h_free}^4)^(1/4)"
    sheet.found("coefficient_horizontal", "h_hor", _at(stream, exchange, 0.0), "W/(m² K)",
                formula, INCROPERA)  # fmt: skip


def _inclined(
    sheet: Sheet, surface: FloatArray, stream: AirStream, exchange: SurfaceExchange
) -> None:
    """Write down the coefficient, were the pipe vertical."""
    law = CONVECTION_LAWS[exchange.convection_model]
    vertical = law.vertical(stream, VERTICAL_LENGTH)
    if law.forced is None:
        sheet.given("coefficient_vertical", "h_ver", vertical, "W/(m² K)", law.source)
        return
    _rayleigh(sheet, stream, VERTICAL_LENGTH, "H", "_H")
    prandtl = stream.film.prandtl
    nusselt = nusselt_churchill_chu_vertical(stream.rayleigh(VERTICAL_LENGTH), prandtl)
    formula = "(0.825 + 0.387 {Ra_H}^(1/6) / (1 + (0.492/{Pr})^(9/16))^(8/27))^2"
    sheet.found("nusselt_vertical", "Nu_H", nusselt, "-", formula, VERTICAL)
    forced = "{Nu_forced} {k_air} / D"
    if exchange.convection_model != "churchill":
        forced = "{h_forced}"
    free = "{Nu_H} {k_air} / H"
    formula = f"(({forced})^3 + ({free})^3)^(1/3)"
    rising = np.sign(surface - exchange.air_temperature)
    if np.any(np.asarray(exchange.wind_uphill) * rising < 0):
        opposed = f"cos(psi)^2 (({forced})^3 + ({free})^3 - |({forced})^3 - ({free})^3|)"
        formula = f"(({forced})^3 + ({free})^3 - {opposed})^(1/3)"
        formula += ", not below half of the larger"
    sheet.found("coefficient_vertical", "h_ver", _at(stream, exchange, 90.0), "W/(m² K)",
                formula, INCROPERA)  # fmt: skip


def _at(stream: AirStream, exchange: SurfaceExchange, inclination: float) -> FloatArray:
    """Return the engine's coefficient at an inclination, without its uncertainty."""
    return convection_coefficient(
        stream.surface,
        air_temperature=exchange.air_temperature,
        diameter=exchange.diameter,
        wind_speed=exchange.wind_speed,
        pressure=exchange.pressure,
        inclination_deg=inclination,
        wind_angle_deg=exchange.wind_angle_deg,
        wind_uphill=exchange.wind_uphill,
        relative_humidity=exchange.relative_humidity,
        model=exchange.convection_model,
    )
