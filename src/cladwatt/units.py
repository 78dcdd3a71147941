"""Units met at the borders: how a suffix in a key turns the written number into SI."""

from dataclasses import dataclass

__all__ = ["UNITS", "Unit", "unit_of", "units_of"]


@dataclass(frozen=True)
class Unit:
    """One accepted unit of a dimension: SI = value * factor + offset.

    Parameters
    ----------
    suffix : str
        What a key ends with after an underscore; ``""`` for none.
    factor : float
        SI units in one of these.
    offset : float
        SI value of zero, for temperatures.
    text : str
        As printed for a reader.
    """

    suffix: str
    factor: float
    offset: float = 0.0
    text: str = ""

    def to_si(self, value: float) -> float:
        """Return `value` in SI."""
        return value * self.factor + self.offset

    def difference_to_si(self, value: float) -> float:
        """Return a difference (an uncertainty) in SI; the zero point does not enter."""
        return value * self.factor

    def from_si(self, value: float) -> float:
        """Return an SI value in this unit."""
        return (value - self.offset) / self.factor


_FAHRENHEIT = 5.0 / 9.0

UNITS: dict[str, tuple[Unit, ...]] = {
    "none": (Unit("", 1.0),),
    "temperature": (
        Unit("C", 1.0, 273.15, "°C"),
        Unit("K", 1.0, 0.0, "K"),
        Unit("F", _FAHRENHEIT, 459.67 * _FAHRENHEIT, "°F"),
    ),
    "temperature difference": (
        Unit("K", 1.0, 0.0, "K"),
        Unit("mK", 1e-3, 0.0, "mK"),
        Unit("C", 1.0, 0.0, "°C"),
        Unit("F", _FAHRENHEIT, 0.0, "°F"),
    ),
    "length": (
        Unit("mm", 1e-3, 0.0, "mm"),
        Unit("m", 1.0, 0.0, "m"),
        Unit("in", 0.0254, 0.0, "in"),
    ),
    "distance": (
        Unit("m", 1.0, 0.0, "m"),
        Unit("mm", 1e-3, 0.0, "mm"),
        Unit("ft", 0.3048, 0.0, "ft"),
        Unit("in", 0.0254, 0.0, "in"),
    ),
    "wavelength": (Unit("um", 1e-6, 0.0, "µm"), Unit("nm", 1e-9, 0.0, "nm")),
    "speed": (
        Unit("m_s", 1.0, 0.0, "m/s"),
        Unit("km_h", 1.0 / 3.6, 0.0, "km/h"),
        Unit("mph", 0.44704, 0.0, "mph"),
    ),
    "pressure": (
        Unit("Pa", 1.0, 0.0, "Pa"),
        Unit("hPa", 100.0, 0.0, "hPa"),
        Unit("kPa", 1e3, 0.0, "kPa"),
        Unit("bar", 1e5, 0.0, "bar"),
    ),
    "steam pressure": (
        Unit("bar", 1e5, 0.0, "bar"),
        Unit("kPa", 1e3, 0.0, "kPa"),
        Unit("MPa", 1e6, 0.0, "MPa"),
        Unit("psi", 6894.757293168, 0.0, "psi"),
    ),
    "angle": (Unit("deg", 1.0, 0.0, "degrees"),),
    "ratio": (Unit("", 1.0), Unit("percent", 0.01, 0.0, "%")),
    "percent": (Unit("percent", 1.0, 0.0, "%"),),
    "conductivity": (
        Unit("W_m_K", 1.0, 0.0, "W/(m K)"),
        Unit("mW_m_K", 1e-3, 0.0, "mW/(m K)"),
    ),
    "power per length": (Unit("W_m", 1.0, 0.0, "W/m"),),
    "irradiance": (Unit("W_m2", 1.0, 0.0, "W/m2"),),
    "film coefficient": (Unit("W_m2_K", 1.0, 0.0, "W/(m2 K)"),),
    "mass flow": (Unit("kg_s", 1.0, 0.0, "kg/s"), Unit("kg_h", 1.0 / 3600.0, 0.0, "kg/h")),
    "specific heat": (
        Unit("J_kg_K", 1.0, 0.0, "J/(kg K)"),
        Unit("kJ_kg_K", 1e3, 0.0, "kJ/(kg K)"),
    ),
    "pixels": (Unit("px", 1.0, 0.0, "px"),),
}


def units_of(dimension: str) -> tuple[Unit, ...]:
    """Return the accepted units of a dimension, the usual one first."""
    return UNITS[dimension]


def unit_of(dimension: str, suffix: str) -> Unit:
    """Return the unit with this suffix.

    Raises
    ------
    KeyError
        If the dimension has no such unit.
    """
    for unit in UNITS[dimension]:
        if unit.suffix == suffix:
            return unit
    raise KeyError(f"{dimension} has no unit {suffix!r}")
