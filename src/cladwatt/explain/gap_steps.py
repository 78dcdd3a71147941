"""Steps across an air gap at the temperatures of its own faces, to check its conductivity."""

from dataclasses import dataclass

import numpy as np

from cladwatt.explain.sheet import Sheet, polynomial_text
from cladwatt.explain.steps import Pad
from cladwatt.physics.air import _CONDUCTIVITY, _SPECIFIC_HEAT, _VISCOSITY, air_properties
from cladwatt.physics.air_gap import (
    air_gap_conductance,
    annulus_conductivity_ratio,
    annulus_rayleigh,
    concentric_exchange_emissivity,
)
from cladwatt.physics.constants import GRAVITY, STANDARD_PRESSURE, STEFAN_BOLTZMANN
from cladwatt.survey.model import Layer
from cladwatt.types import FloatArray

__all__ = ["GAP_CURVE", "Gap", "gap_steps"]

LEMMON = "quartic fitted to Lemmon and Jacobsen 2004"
RAITHBY = "Raithby and Hollands 1975; Incropera et al., section 9.8.2"
CONCENTRIC = "Incropera et al., table 13.3, concentric cylinders"
GAP_CURVE = "air and radiation across the gap at 10 K between its faces; Incropera et al., 9.8.2"


@dataclass(frozen=True)
class Gap:
    """An air gap in place.

    Attributes
    ----------
    number : int
        Of the layer, from 1.
    layer : Layer
        As declared.
    faces : (str, str)
        Symbols of the temperatures of inner and outer face.
    temperatures, diameters : (array, array)
        Of inner and outer face, one draw each. [K], [m]
    """

    number: int
    layer: Layer
    faces: tuple[str, str]
    temperatures: tuple[FloatArray, FloatArray]
    diameters: tuple[FloatArray, FloatArray]


def gap_steps(pad: Pad, gap: Gap) -> None:
    """Write down a gap's conductivity between the faces it has, to compare with its curve's.

    Parameters
    ----------
    pad : Pad
    gap : Gap
    """
    sheet, (hot, cold) = Sheet(pad, f"_gap_{gap.number}"), gap.faces
    mean = 0.5 * (gap.temperatures[0] + gap.temperatures[1])
    air, found = air_properties(mean, STANDARD_PRESSURE), sheet.found
    found("gap_temperature", "T_film", mean, "K", f"({hot} + {cold}) / 2", others=f"{hot} {cold}")
    found("air_viscosity", "mu", air.dynamic_viscosity, "Pa s",
          polynomial_text(_VISCOSITY, 1e-6), LEMMON)  # fmt: skip
    found("air_conductivity", "k", air.conductivity, "W/(m K)",
          polynomial_text(_CONDUCTIVITY, 1e-3), LEMMON)  # fmt: skip
    found("air_specific_heat", "c_p", air.specific_heat, "J/(kg K)",
          polynomial_text(_SPECIFIC_HEAT), LEMMON)  # fmt: skip
    found("air_density", "rho", air.density, "kg/m³", "101325 / (287.05 {T_film})", "ideal gas")
    found("air_prandtl", "Pr", air.prandtl, "-", "{c_p} {mu} / {k}")
    _convection(sheet, gap)
    _radiation(sheet, gap)


def _convection(sheet: Sheet, gap: Gap) -> None:
    """Write down how much better than still the air of the gap conducts."""
    (hot, cold), (inner, outer) = gap.faces, gap.diameters
    found, thickness = sheet.found, f"t_{gap.number}"
    below = [f"t_{number}" for number in range(1, gap.number)]
    found("gap_diameter", "D_in", inner, "m", " + 2 ".join(["d", *below]),
          others=" ".join(["d", *below]))  # fmt: skip
    found("gap_diameter", "D_out", outer, "m", f"{{D_in}} + 2 {thickness}", others=thickness)
    logarithm = np.log(outer / inner)
    length = 2 * logarithm ** (4 / 3) / ((inner / 2) ** -0.6 + (outer / 2) ** -0.6) ** (5 / 3)
    found("gap_length", "L", length, "m",
          "2 ln({D_out} / {D_in})^(4/3) / ((2/{D_in})^0.6 + (2/{D_out})^0.6)^(5/3)",
          RAITHBY)  # fmt: skip
    rayleigh = annulus_rayleigh(
        inner, outer, inner_temperature=gap.temperatures[0], outer_temperature=gap.temperatures[1]
    )
    found("rayleigh", "Ra", rayleigh, "-",
          f"{GRAVITY:.7g} |{hot} - {cold}| {{L}}^3 {{rho}}^2 {{Pr}} / ({{T_film}} {{mu}}^2)",
          others=f"{hot} {cold}")  # fmt: skip
    prandtl = air_properties(0.5 * sum(gap.temperatures), STANDARD_PRESSURE).prandtl
    ratio = annulus_conductivity_ratio(rayleigh, prandtl)
    if (ratio == 1.0).all():
        sheet.given("gap_ratio", "N", ratio, "-", "the air only conducts; the relation gives less")
    else:
        formula = "0.386 ({Pr} {Ra} / (0.861 + {Pr}))^(1/4)"
        found("gap_ratio", "N", ratio, "-", formula, RAITHBY)


def _radiation(sheet: Sheet, gap: Gap) -> None:
    """Write down what the faces radiate, and the conductivity of both together."""
    (hot, cold), (inner, outer) = gap.faces, gap.diameters
    first, second = gap.layer.inner_emissivity, gap.layer.outer_emissivity
    assert first is not None
    assert second is not None
    sheet.given("gap_emissivity", "eps_in", first.value, "-", first.source)
    sheet.given("gap_emissivity", "eps_out", second.value, "-", second.source)
    exchange = concentric_exchange_emissivity(first.value, second.value, inner / outer)
    sheet.found("gap_exchange", "F", exchange, "-",
                "1 / (1/{eps_in} + (1/{eps_out} - 1) {D_in} / {D_out})", CONCENTRIC)  # fmt: skip
    conductance = air_gap_conductance(
        inner, outer, inner_temperature=gap.temperatures[0], outer_temperature=gap.temperatures[1],
        inner_emissivity=first.value, outer_emissivity=second.value,
    )  # fmt: skip
    solid = conductance * np.log(outer / inner) / (2 * np.pi)
    sheet.found("gap_check", "k_solid", solid, "W/(m K)",
                f"{{N}} {{k}} + {{D_in}} ln({{D_out}} / {{D_in}}) {{F}} {STEFAN_BOLTZMANN:.7g}"
                f" ({hot} + {cold}) ({hot}^2 + {cold}^2) / 2, to be compared with"
                f" k_{gap.number}_sound", others=f"{hot} {cold}")  # fmt: skip
