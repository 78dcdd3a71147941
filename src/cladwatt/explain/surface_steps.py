"""Steps from the surface's temperature to the heat it gives off."""

import re

import numpy as np

from cladwatt.explain.steps import Pad, Section, median_of, source_of
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.inverse.seen import Seen
from cladwatt.physics.air import (
    _CONDUCTIVITY,
    _SPECIFIC_HEAT,
    _VISCOSITY,
    AIR_TEMPERATURE_RANGE,
    air_properties,
)
from cladwatt.physics.constants import GRAVITY, STEFAN_BOLTZMANN
from cladwatt.physics.convection import (
    VERTICAL_LENGTH,
    convection_coefficient,
    mixed_nusselt,
    nusselt_churchill_bernstein,
    nusselt_churchill_chu_horizontal,
    nusselt_churchill_chu_vertical,
    rayleigh_number,
    reynolds_number,
)
from cladwatt.physics.surface_balance import SurfaceExchange, surface_coefficients, surface_fluxes
from cladwatt.quantities import Quantity
from cladwatt.types import FloatArray

__all__ = ["exchange_steps", "surface_section"]

LEMMON = "quartic fitted to Lemmon and Jacobsen 2004"
INCROPERA = "Incropera et al., section 9.9"
HORIZONTAL = "Churchill and Chu 1975, horizontal cylinder"
VERTICAL = "Churchill and Chu 1975, vertical face"
FORCED = "Churchill and Bernstein 1977"


def surface_section(seen: Seen) -> Section:
    """Return what the surface exchanges heat with; the wind must be known.

    Parameters
    ----------
    seen : Seen
        With one draw.
    """
    pad, conditions, frame, line = Pad(), seen.conditions, seen.frame, seen.line_draws
    _diameter(pad, seen)
    assert frame.wind_speed is not None
    pad.given("wind_speed", "v", frame.wind_speed, "m/s", source_of(conditions.wind_speed, ""))
    pad.given("air_pressure", "p", frame.pressure, "Pa", "site, or standard atmosphere")
    if line.inclination_deg:
        pad.given("inclination", "incl", line.inclination_deg, "deg", "line list")
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
    total = " + ".join([*names, "t_clad"])
    pad.found(
        "lagged_diameter",
        "D",
        seen.diameter,
        "m",
        f"d + 2 ({total})",
        f"d {' '.join(names)} t_clad",
    )


def _surroundings(pad: Pad, seen: Seen, frame: FrameDraws) -> None:
    """Write down the temperature that the surface radiates to."""
    conditions = seen.conditions
    sky, declared = conditions.sky_total_temperature, conditions.surroundings_temperature
    if declared is not None or sky is None:
        source = source_of(declared, "as the air")
        pad.given("surroundings", "T_sur", frame.surroundings_temperature, "K", source)
        return
    view = conditions.sky_view_factor or Quantity(0.5, source="assumption")
    pad.given("sky_total_temperature", "T_sky", median_of(sky), "K", sky.source)
    pad.given("sky_view_factor", "F_sky_tot", median_of(view), "-", view.source)
    pad.found(
        "surroundings", "T_sur", frame.surroundings_temperature, "K",
        "(F_sky_tot T_sky^4 + (1 - F_sky_tot) T_air^4)^(1/4)", "F_sky_tot T_sky T_air",
        "Stefan-Boltzmann",
    )  # fmt: skip


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
    pad: Pad, surface_temperature: float, exchange: SurfaceExchange, *, suffix: str = ""
) -> None:
    """Write down how a surface gives off its heat, from its temperature to its flux.

    Parameters
    ----------
    pad : Pad
    surface_temperature : float
        [K]
    exchange : SurfaceExchange
        One draw.
    suffix : str
        Behind the symbols that belong to this surface temperature.

    Notes
    -----
    The correlations are evaluated one by one; coefficient and fluxes are the engine's own.
    """
    sheet = _Sheet(pad, suffix)
    surface = np.array([surface_temperature])
    _film(sheet, surface, exchange)
    _nusselt(sheet, surface, exchange)
    fluxes = surface_fluxes(surface, exchange)
    sheet.found("convective_flux", "q_conv", fluxes.convection, "W/m²", "{h_c} ({T_s} - T_air)")
    sheet.found(
        "radiative_flux", "q_rad", fluxes.radiation, "W/m²",
        f"eps_tot {STEFAN_BOLTZMANN:.7g} ({{T_s}}^4 - T_sur^4)", "Stefan-Boltzmann",
    )  # fmt: skip
    sheet.found("flux", "q", fluxes.total, "W/m²", "{q_conv} + {q_rad} - q_sun")


class _Sheet:
    """A pad whose own symbols carry a suffix; ``{T_s}`` in a formula is one of them."""

    def __init__(self, pad: Pad, suffix: str) -> None:
        self.pad, self.suffix = pad, suffix

    def found(
        self,
        key: str,
        symbol: str,
        value: FloatArray | float,
        unit: str,
        formula: str,
        source: str = "",
    ) -> None:
        """Write down a step; its inputs are read off the formula."""
        own = {name: name + self.suffix for name in _OWN}
        named = [own[name] for name in _OWN if f"{{{name}}}" in formula]
        plain = formula.format(**{name: " " for name in _OWN})
        words = set(re.findall(r"[A-Za-z]\w*", plain))
        shared = [name for name in _SHARED if name in words]
        self.pad.found(
            key, symbol + self.suffix, value, unit, formula.format(**own),
            " ".join([*named, *shared]), source,
        )  # fmt: skip


_OWN = (
    "T_s", "T_film", "mu", "k_air", "c_p", "rho", "nu", "Pr", "beta", "Gr", "Ra", "Nu_free", "Re",
    "Nu_forced", "Nu", "h_hor", "Gr_H", "Ra_H", "Nu_H", "h_ver", "h_c", "q_conv", "q_rad", "q",
)  # fmt: skip
_SHARED = ("T_air", "T_sur", "D", "v", "p", "H", "incl", "eps_tot", "q_sun")


def _quartic(coefficients: tuple[float, ...], scale: float) -> str:
    """Return a quartic in the film temperature over 300 K as text."""
    terms = [f"{coefficients[0] / scale:.7g}"]
    for power, coefficient in enumerate(coefficients[1:], start=1):
        x = "x" if power == 1 else f"x^{power}"
        sign = "-" if coefficient < 0 else "+"
        terms.append(f"{sign} {abs(coefficient) / scale:.7g} {x}")
    factor = "" if scale == 1 else f"{scale:g} "
    return f"{factor}({' '.join(terms)}), x = {{T_film}}/300 K"


def _film(sheet: _Sheet, surface: FloatArray, exchange: SurfaceExchange) -> None:
    """Write down the air's properties at film temperature."""
    mean = 0.5 * (surface + exchange.air_temperature)
    film = np.clip(mean, *AIR_TEMPERATURE_RANGE)
    air = air_properties(film, exchange.pressure)
    held = "" if (film == mean).all() else ", held within {:g} to {:g} K".format(
        *AIR_TEMPERATURE_RANGE
    )  # fmt: skip
    found = sheet.found
    found("film_temperature", "T_film", film, "K", "({T_s} + T_air) / 2" + held)
    found("air_viscosity", "mu", air.dynamic_viscosity, "Pa s", _quartic(_VISCOSITY, 1e-6), LEMMON)
    found("air_conductivity", "k_air", air.conductivity, "W/(m K)",
          _quartic(_CONDUCTIVITY, 1e-3), LEMMON)  # fmt: skip
    found("air_specific_heat", "c_p", air.specific_heat, "J/(kg K)",
          _quartic(_SPECIFIC_HEAT, 1.0), LEMMON)  # fmt: skip
    found("air_density", "rho", air.density, "kg/m³", "p / (287.05 {T_film})", "ideal gas")
    found("air_kinematic_viscosity", "nu", air.kinematic_viscosity, "m²/s", "{mu} / {rho}")
    found("air_prandtl", "Pr", air.prandtl, "-", "{c_p} {mu} / {k_air}")
    found("air_expansion", "beta", air.expansion, "1/K", "1 / {T_film}", "ideal gas")


def _nusselt(sheet: _Sheet, surface: FloatArray, exchange: SurfaceExchange) -> None:
    """Write down the Nusselt numbers and the coefficient of convection."""
    film = np.clip(0.5 * (surface + exchange.air_temperature), *AIR_TEMPERATURE_RANGE)
    air = air_properties(film, exchange.pressure)
    length = exchange.diameter
    rayleigh = _rayleigh(sheet, surface, exchange, length, "D", "")
    free = nusselt_churchill_chu_horizontal(rayleigh, air.prandtl)
    reynolds = reynolds_number(
        exchange.wind_speed, length=length, kinematic_viscosity=air.kinematic_viscosity
    )
    forced = nusselt_churchill_bernstein(reynolds, air.prandtl)
    found = sheet.found
    found("nusselt_free", "Nu_free", free, "-",
          "(0.60 + 0.387 {Ra}^(1/6) / (1 + (0.559/{Pr})^(9/16))^(8/27))^2", HORIZONTAL)  # fmt: skip
    found("reynolds", "Re", reynolds, "-", "v D / {nu}")
    found("nusselt_forced", "Nu_forced", forced, "-",
          "0.3 + 0.62 {Re}^(1/2) {Pr}^(1/3) / (1 + (0.4/{Pr})^(2/3))^(1/4)"
          " (1 + ({Re}/282000)^(5/8))^(4/5)", FORCED)  # fmt: skip
    mixed = mixed_nusselt(forced, free)
    found("nusselt_mixed", "Nu", mixed, "-", "({Nu_forced}^4 + {Nu_free}^4)^(1/4)", INCROPERA)
    coefficient = surface_coefficients(surface, exchange)[0]
    if not np.any(exchange.inclination_deg):
        found("convection_coefficient", "h_c", coefficient, "W/(m² K)", "{Nu} {k_air} / D")
        return
    _inclined(sheet, surface, exchange, coefficient)


def _rayleigh(
    sheet: _Sheet,
    surface: FloatArray,
    exchange: SurfaceExchange,
    length: FloatArray | float,
    symbol: str,
    suffix: str,
) -> FloatArray:
    """Write down Grashof and Rayleigh number on a length."""
    film = np.clip(0.5 * (surface + exchange.air_temperature), *AIR_TEMPERATURE_RANGE)
    air = air_properties(film, exchange.pressure)
    rayleigh = rayleigh_number(
        surface - exchange.air_temperature,
        length=length,
        expansion=air.expansion,
        kinematic_viscosity=air.kinematic_viscosity,
        prandtl=air.prandtl,
        gravity=GRAVITY,
    )
    sheet.found(
        "grashof", f"Gr{suffix}", rayleigh / air.prandtl, "-",
        f"{GRAVITY:g} {{beta}} |{{T_s}} - T_air| {symbol}^3 / {{nu}}^2",
    )  # fmt: skip
    sheet.found("rayleigh", f"Ra{suffix}", rayleigh, "-", f"{{Gr{suffix}}} {{Pr}}")
    return rayleigh


def _inclined(
    sheet: _Sheet, surface: FloatArray, exchange: SurfaceExchange, coefficient: FloatArray
) -> None:
    """Write down the vertical run's coefficient and the share of either."""
    film = np.clip(0.5 * (surface + exchange.air_temperature), *AIR_TEMPERATURE_RANGE)
    air = air_properties(film, exchange.pressure)
    rayleigh = _rayleigh(sheet, surface, exchange, VERTICAL_LENGTH, "H", "_H")
    upright = nusselt_churchill_chu_vertical(rayleigh, air.prandtl)

    def at(inclination: float) -> FloatArray:
        return convection_coefficient(
            surface,
            air_temperature=exchange.air_temperature,
            diameter=exchange.diameter,
            wind_speed=exchange.wind_speed,
            pressure=exchange.pressure,
            inclination_deg=inclination,
        )

    found = sheet.found
    found("coefficient_horizontal", "h_hor", at(0.0), "W/(m² K)", "{Nu} {k_air} / D")
    formula = "(0.825 + 0.387 {Ra_H}^(1/6) / (1 + (0.492/{Pr})^(9/16))^(8/27))^2"
    found("nusselt_vertical", "Nu_H", upright, "-", formula, VERTICAL)
    found("coefficient_vertical", "h_ver", at(90.0), "W/(m² K)",
          "(({Nu_forced} {k_air} / D)^3 + ({Nu_H} {k_air} / H)^3)^(1/3)", INCROPERA)  # fmt: skip
    found("convection_coefficient", "h_c", coefficient, "W/(m² K)",
          "{h_hor} + sin(incl)^2 ({h_ver} - {h_hor})", "assumption")  # fmt: skip
