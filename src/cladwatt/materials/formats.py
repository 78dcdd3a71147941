"""How each material table is laid out: columns, units and what a value may plausibly be.

The ranges are there to catch a misplaced decimal point, not to describe good practice.
"""

from dataclasses import dataclass
from typing import Literal

__all__ = ["TABLE_FORMATS", "Column", "TableFormat"]


@dataclass(frozen=True)
class Column:
    """One column of a table.

    Parameters
    ----------
    name : str
        As in the header row.
    unit : str
        As in the units row; empty for text, ``1`` for a plain number.
    kind : {"key", "text", "names", "number", "flag", "confidence"}
        ``names`` is several texts separated by ``|``.
    required : bool
        Whether a user's table must have the column and a value in every row.
    low, high : float
        Smallest and largest value accepted, in the column's unit.
    """

    name: str
    unit: str = ""
    kind: Literal["key", "text", "names", "number", "flag", "confidence"] = "text"
    required: bool = False
    low: float = float("-inf")
    high: float = float("inf")


@dataclass(frozen=True)
class TableFormat:
    """One table: its name (the file is ``<name>.csv``), its columns and what it is about."""

    name: str
    about: str
    columns: tuple[Column, ...]
    user_may_extend: bool = True

    @property
    def column(self) -> dict[str, Column]:
        """Columns by name."""
        return {column.name: column for column in self.columns}


def _number(name: str, unit: str, low: float, high: float, *, required: bool = False) -> Column:
    return Column(name, unit, "number", required, low, high)


def _ratio_block(name: str, *, low: float, high: float, bounds: bool = True) -> tuple[Column, ...]:
    value = _number(name, "1", low, high, required=True)
    spread = _number(f"u_{name}", "1", 0.0, 0.4, required=True)
    if not bounds:
        return value, spread
    return (
        value,
        spread,
        _number(f"{name}_low", "1", 0.005, 1.0),
        _number(f"{name}_high", "1", 0.005, 1.0),
    )


_ORIGIN = (Column("source"), Column("provenance"), Column("confidence", kind="confidence"))

TABLE_FORMATS: dict[str, TableFormat] = {
    table.name: table
    for table in (
        TableFormat(
            "lagging_conductivity",
            "laboratory conductivity of lagging against mean temperature, linear between the rows",
            (
                Column("material", kind="key", required=True),
                _number("temperature_C", "°C", -200.0, 1200.0, required=True),
                _number("conductivity_W_per_m_K", "W/(m K)", 0.01, 1.0, required=True),
                _number("u_relative", "1", 0.0, 0.5, required=True),
                *_ORIGIN,
                Column("note"),
            ),
        ),
        TableFormat(
            "lagging_materials",
            "names, valid range, service limits, wet behaviour and heat capacity of lagging",
            (
                Column("material", kind="key", required=True),
                Column("name"),
                Column("aliases", kind="names"),
                _number("valid_from_C", "°C", -200.0, 1200.0),
                _number("valid_to_C", "°C", -200.0, 1200.0),
                _number("maximum_service_temperature_C", "°C", 40.0, 1300.0),
                Column("service_source"),
                Column("service_provenance"),
                Column("vapour_tight", kind="flag"),
                _number("wet_ratio_low", "1", 1.0, 200.0),
                _number("wet_ratio_high", "1", 1.0, 200.0),
                Column("wet_source"),
                Column("wet_provenance"),
                _number("density_kg_per_m3", "kg/m3", 5.0, 1500.0),
                _number("u_density_kg_per_m3", "kg/m3", 0.0, 300.0),
                _number("specific_heat_J_per_kg_K", "J/(kg K)", 400.0, 2500.0),
                _number("u_specific_heat_J_per_kg_K", "J/(kg K)", 0.0, 500.0),
                Column("heat_source"),
                Column("heat_provenance"),
                Column("heat_confidence", kind="confidence"),
                Column("note"),
            ),
        ),
        TableFormat(
            "claddings",
            "outer surfaces: emissivities, solar absorptance, sheet",
            (
                Column("cladding", kind="key", required=True),
                Column("name"),
                Column("aliases", kind="names"),
                *_ratio_block("band_emissivity", low=0.02, high=0.995),
                *_ratio_block("total_emissivity", low=0.02, high=0.995),
                *_ratio_block("solar_absorptance", low=0.03, high=0.99, bounds=False),
                _number("conductivity_W_per_m_K", "W/(m K)", 0.02, 430.0, required=True),
                _number("thickness_mm", "mm", 0.0, 20.0, required=True),
                _number("u_thickness_mm", "mm", 0.0, 5.0, required=True),
                Column("is_metal", kind="flag", required=True),
                _number("valid_from_C", "°C", -200.0, 1200.0),
                _number("valid_to_C", "°C", -200.0, 1200.0),
                *_ORIGIN,
                Column("note"),
            ),
        ),
        TableFormat(
            "pipe_sizes",
            "outside diameters of steel pipe by DN and NPS",
            (
                Column("nps"),
                _number("dn", "1", 4.0, 3000.0),
                _number("asme_outside_diameter_mm", "mm", 5.0, 3200.0),
                _number("en_outside_diameter_mm", "mm", 5.0, 3200.0),
                _number("u_relative", "1", 0.0, 0.05),
                _number("wall_schedule_40_mm", "mm", 0.5, 60.0),
                _number("wall_standard_mm", "mm", 0.5, 60.0),
                *_ORIGIN,
                Column("note"),
            ),
        ),
        TableFormat(
            "fittings",
            "what a flange, valve or hanger counts as: pipe length, or share of the line's loss",
            (
                Column("fitting", kind="key", required=True),
                Column("kind", required=True),
                Column("lagged", kind="flag", required=True),
                Column("counts_as", required=True),
                _number("low", "see unit", 0.0, 50.0, required=True),
                _number("high", "see unit", 0.0, 50.0, required=True),
                Column("unit"),
                *_ORIGIN,
                Column("note"),
            ),
        ),
        TableFormat(
            "hanger_spacing",
            "how far apart the hangers of a line are, by its size",
            (
                _number("dn", "1", 4.0, 3000.0, required=True),
                _number("outside_diameter_mm", "mm", 5.0, 3200.0, required=True),
                _number("water_m", "m", 0.3, 30.0, required=True),
                _number("vapour_m", "m", 0.3, 30.0, required=True),
                *_ORIGIN,
                Column("note"),
            ),
        ),
        TableFormat(
            "damage_kinds",
            "kinds of damage: severity, length, side, edges, and how likely each is beforehand",
            (
                Column("kind", kind="key", required=True),
                Column("name"),
                Column("severity_is"),
                _number("severity_low", "1", 0.0, 200.0, required=True),
                _number("severity_high", "1", 0.0, 200.0, required=True),
                _number("length_low_m", "m", 0.001, 100.0, required=True),
                _number("length_high_m", "m", 0.001, 100.0, required=True),
                _number("all_round", "1", 0.0, 1.0, required=True),
                _number("upper_side", "1", 0.0, 1.0, required=True),
                _number("underside", "1", 0.0, 1.0, required=True),
                _number("flank", "1", 0.0, 1.0, required=True),
                _number("half_angle_low_deg", "deg", 5.0, 180.0, required=True),
                _number("half_angle_high_deg", "deg", 5.0, 180.0, required=True),
                _number("edge_low_m", "m", 0.0, 5.0, required=True),
                _number("edge_high_m", "m", 0.0, 5.0, required=True),
                _number("prior", "1", 0.0, 1.0, required=True),
                *_ORIGIN,
                Column("note"),
            ),
        ),
        TableFormat(
            "air_properties",
            "dry air at 101 325 Pa",
            (
                _number("temperature_K", "K", 50.0, 2000.0, required=True),
                _number("density_kg_per_m3", "kg/m3", 0.1, 10.0, required=True),
                _number("specific_heat_J_per_kg_K", "J/(kg K)", 990.0, 1300.0, required=True),
                _number("dynamic_viscosity_Pa_s", "Pa s", 5e-6, 1e-4, required=True),
                _number("kinematic_viscosity_m2_per_s", "m2/s", 1e-6, 1e-3, required=True),
                _number("conductivity_W_per_m_K", "W/(m K)", 0.005, 0.15, required=True),
                _number("prandtl", "1", 0.6, 0.9, required=True),
                _number("u_relative", "1", 0.0, 0.1, required=True),
                *_ORIGIN,
            ),
            user_may_extend=False,
        ),
        TableFormat(
            "defaults",
            "what is taken where the survey declares nothing; each is named in the results",
            (
                Column("quantity", kind="key", required=True),
                _number("value", "see unit", -1e9, 1e9, required=True),
                _number("u", "see unit", 0.0, 1e9, required=True),
                _number("lower", "see unit", -1e9, 1e9),
                _number("upper", "see unit", -1e9, 1e9),
                Column("unit"),
                *_ORIGIN,
                Column("note"),
            ),
        ),
        TableFormat(
            "sources",
            "what the tables were taken from",
            (
                Column("source", kind="key", required=True),
                Column("short", required=True),
                Column("citation", required=True),
                Column("place"),
                Column("terms"),
            ),
            user_may_extend=False,
        ),
    )
}
