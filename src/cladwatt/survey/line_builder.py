"""A line of the line list from its table: sizes, lagging, cladding, temperatures."""

import math
from dataclasses import replace
from typing import Literal

from cladwatt.errors import TableError
from cladwatt.materials.rows import CladdingMaterial
from cladwatt.materials.tables import (
    MaterialTables,
    cladding_material,
    default_quantity,
    pipe_outside_diameter,
    pipe_size,
)
from cladwatt.quantities import Quantity
from cladwatt.survey.contradictions import ask_of_layers
from cladwatt.survey.fault_list import FaultList
from cladwatt.survey.inside_builder import build_inside, build_tracing
from cladwatt.survey.keys import UNKNOWN_WORD
from cladwatt.survey.layer_builder import build_layers, table_fault
from cladwatt.survey.model import Cladding, Line
from cladwatt.survey.table_reader import Table

__all__ = ["build_line", "moved_total_emissivity"]

_BARE_PIPE = "bare_steel_oxidised"


def build_line(
    table: Table,
    tables: MaterialTables,
    faults: FaultList,
    *,
    site_pressure: Quantity | None = None,
) -> Line | None:
    """Return the line, or None where a fault was found.

    Parameters
    ----------
    table : Table
        Read by the keys of ``line``.
    tables : MaterialTables
        Names are looked up here.
    faults : FaultList
        Gets what is wrong.
    site_pressure : Quantity, optional
        Air pressure at the site, for a gauge pressure; the default's where left out. [Pa]
    """
    before = faults.errors
    diameter = _pipe_diameter(table, tables, faults)
    layers = build_layers(table, diameter, tables, faults)
    cladding = _cladding(table, tables, faults, bare=layers == ())
    air = site_pressure or default_quantity("air_pressure", tables)
    inside = build_inside(table, air, faults)
    tracing = build_tracing(table, inside.temperature, faults)
    ask_of_layers(table, layers, inside.temperature, faults)
    if faults.errors > before or cladding is None:
        return None
    factor = table.quantity("installation_factor")
    supports = table.quantity("supports_allowance")
    return Line(
        tag=table.text("tag"),
        pipe_outside_diameter=diameter,
        layers=layers,
        cladding=cladding,
        installation_factor=factor or default_quantity("installation_factor", tables),
        inside_temperature=inside.temperature,
        inside_is=inside.inside_is,
        fluid=table.text("fluid"),
        area=table.text("area"),
        access=table.text("access"),
        inclination_deg=table.number("inclination") or 0.0,
        tracing=tracing,
        pipe_material=table.text("pipe_material"),
        hours_at_temperature=table.quantity("hours_at_temperature"),
        note=table.text("note"),
        steam_pressure=inside.steam_pressure,
        inside_film=inside.film,
        flow=inside.flow,
        specific_heat=inside.specific_heat,
        supports_allowance=supports or default_quantity("supports_allowance", tables),
    )


def _pipe_diameter(table: Table, tables: MaterialTables, faults: FaultList) -> Quantity | None:
    names = ("dn", "nps", "pipe_outside_diameter")
    given = [name for name in names if table.has(name)]
    if not given:
        faults.ask(
            table.place,
            "",
            "no pipe size is given",
            f'declare dn, nps or pipe_outside_diameter_mm, or write dn = "{UNKNOWN_WORD}"',
        )
        return None
    if len(given) > 1:
        both = " and ".join(table.spelling(name) for name in given)
        faults.add(table.place, given[1], f"{both} are both given", "expected one of them")
        return None
    if given == ["pipe_outside_diameter"]:
        return table.quantity("pipe_outside_diameter")
    if table.is_unknown(given[0]):
        return None
    return _nominal_diameter(table, given[0], tables, faults)


def _nominal_diameter(
    table: Table, name: str, tables: MaterialTables, faults: FaultList
) -> Quantity | None:
    size = str(table.get(name))
    series: Literal["EN", "ASME"] = "EN" if name == "dn" else "ASME"
    if table.text("pipe_series") in ("EN", "ASME"):
        series = "EN" if table.text("pipe_series") == "EN" else "ASME"
    dn, nps = (size, None) if name == "dn" else (None, size)
    try:
        diameter = pipe_outside_diameter(dn=dn, nps=nps, series=series, tables=tables)
        row = pipe_size(dn=dn, nps=nps, tables=tables)
    except TableError as error:
        table_fault(table, name, error, faults)
        return None
    return Quantity(
        diameter,
        row.u_relative * diameter,
        lower=0.9 * diameter,
        upper=1.1 * diameter,
        source=f"declared; {name.upper()} {size} in the {series} series: {row.source}",
        confidence=row.confidence,
    )


def _cladding(
    table: Table, tables: MaterialTables, faults: FaultList, *, bare: bool
) -> Cladding | None:
    name = table.text("cladding")
    if not name and bare:
        name = _BARE_PIPE
    if not name or name.lower() == UNKNOWN_WORD:
        return _unnamed_cladding(table, name, faults)
    try:
        row = cladding_material(name, tables)
    except TableError as error:
        table_fault(table, "cladding", error, faults)
        return None
    band = table.quantity("emissivity") or row.band_emissivity
    total = table.quantity("total_emissivity")
    return Cladding(
        name=row.key,
        thickness=table.quantity("cladding_thickness") or _thickness(row, bare=bare),
        band_emissivity=band,
        total_emissivity=total or moved_total_emissivity(row, band),
        solar_absorptance=table.quantity("solar_absorptance") or row.solar_absorptance,
        conductivity=row.conductivity,
        is_metal=row.is_metal,
    )


def _thickness(row: CladdingMaterial, *, bare: bool) -> Quantity:
    return Quantity(0.0, source=row.thickness.source) if bare else row.thickness


def moved_total_emissivity(row: "CladdingMaterial | Cladding", band: Quantity) -> Quantity:
    """Return the total emissivity where only the one in the band is declared.

    The table's total is moved by as much as the declared value lies off the table's band value:
    dirt and weather move both.

    Parameters
    ----------
    row : CladdingMaterial or Cladding
        What is known of the surface.
    band : Quantity
        Band emissivity that holds.

    Returns
    -------
    Quantity
        The table's uncertainty is kept.
    """
    total = row.total_emissivity
    move = band.value - row.band_emissivity.value
    if move == 0:
        return total
    value = min(max(total.value + move, 0.02), 0.99)
    return replace(
        total,
        value=value,
        lower=min(max(total.lower + min(move, 0.0), 0.01), value),
        upper=max(min(total.upper + max(move, 0.0), 0.995), value),
        source=f"{total.source}; moved with the declared band emissivity",
        confidence="low",
    )


def _unnamed_cladding(table: Table, name: str, faults: FaultList) -> Cladding | None:
    band = table.quantity("emissivity")
    if band is None and not name:
        faults.add(
            table.place,
            "cladding",
            "neither cladding nor emissivity is given",
            f'name the cladding, declare emissivity, or write cladding = "{UNKNOWN_WORD}"',
        )
        return None
    if band is None:
        band = Quantity(
            0.6, 0.25, lower=0.04, upper=0.98, shape="rectangular",
            source="unknown cladding: anything from polished metal to paint", confidence="low",
        )  # fmt: skip
    total = table.quantity("total_emissivity") or replace(
        band,
        u=math.hypot(band.u, 0.05),
        source="taken as the band emissivity, u 0.05 more: common practice, no source",
        confidence="low",
    )
    absorptance = table.quantity("solar_absorptance") or Quantity(
        0.6, 0.2, lower=0.05, upper=0.98, source="unnamed cladding: common practice, no source",
        confidence="low",
    )  # fmt: skip
    return Cladding(
        name=UNKNOWN_WORD,
        thickness=table.quantity("cladding_thickness") or Quantity(0.0, source="unnamed cladding"),
        band_emissivity=band,
        total_emissivity=total,
        solar_absorptance=absorptance,
        conductivity=50.0 if band.value < 0.5 else 0.2,
        is_metal=band.value < 0.5,
    )
