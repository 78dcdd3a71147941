"""A line of the line list from its table: sizes, lagging, cladding, temperatures."""

import math
from dataclasses import replace
from itertools import pairwise
from typing import Literal

from cladwatt.errors import TableError
from cladwatt.materials.rows import CladdingMaterial, Confidence
from cladwatt.materials.tables import (
    MaterialTables,
    cladding_material,
    default_quantity,
    lagging_material,
    pipe_outside_diameter,
    pipe_size,
)
from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList, shown
from cladwatt.survey.keys import LAYER, UNKNOWN_WORD, Section
from cladwatt.survey.model import Cladding, ConductivityCurve, Layer, Line, Tracing
from cladwatt.survey.table_reader import Table, read_list

__all__ = ["build_line", "moved_total_emissivity"]

_LAYER_SECTION = Section("layers", "One layer of lagging", LAYER)
_NO_LAGGING = "none"
_ANY_TEMPERATURE = (50.0, 2000.0)
"""Nodes of a conductivity that holds at every temperature. [K]"""
_BARE_PIPE = "bare_steel_oxidised"


def build_line(table: Table, tables: MaterialTables, faults: FaultList) -> Line | None:
    """Return the line, or None where a fault was found.

    Parameters
    ----------
    table : Table
        Read by the keys of ``line``.
    tables : MaterialTables
        Names are looked up here.
    faults : FaultList
        Gets what is wrong.
    """
    before = faults.errors
    layers = _layers(table, tables, faults)
    diameter = _pipe_diameter(table, tables, faults)
    cladding = _cladding(table, tables, faults, bare=layers == ())
    inside, inside_is = _inside(table, faults)
    if faults.errors > before or cladding is None:
        return None
    factor = table.quantity("installation_factor")
    return Line(
        tag=table.text("tag"),
        pipe_outside_diameter=diameter,
        layers=layers,
        cladding=cladding,
        installation_factor=factor or default_quantity("installation_factor", tables),
        inside_temperature=inside,
        inside_is=inside_is,
        fluid=table.text("fluid"),
        area=table.text("area"),
        access=table.text("access"),
        inclination_deg=table.number("inclination") or 0.0,
        tracing=_tracing(table, faults),
        pipe_material=table.text("pipe_material"),
        hours_at_temperature=table.quantity("hours_at_temperature"),
        note=table.text("note"),
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
        _table_fault(table, name, error, faults)
        return None
    return Quantity(
        diameter,
        row.u_relative * diameter,
        lower=0.9 * diameter,
        upper=1.1 * diameter,
        source=f"declared; {name.upper()} {size} in the {series} series: {row.source}",
        confidence=row.confidence,
    )


def _table_fault(table: Table, name: str, error: TableError, faults: FaultList) -> None:
    for fault in error.faults:
        faults.add(
            table.place,
            name,
            f"{table.spelling(name)} is {shown(table.get(name))}: {fault.found}",
            fault.expected,
        )


def _layers(table: Table, tables: MaterialTables, faults: FaultList) -> tuple[Layer, ...]:
    """Return the layers; empty for a pipe declared bare."""
    single = [
        name
        for name in ("lagging_material", "lagging_thickness", "lagging_conductivity")
        if table.has(name)
    ]
    raw = table.get("layers")
    if raw is not None:
        if single:
            both = f"layers and {table.spelling(single[0])}"
            faults.add(table.place, "layers", f"{both} are both given", "expected one of them")
        return _several_layers(table, tables, faults)
    material = table.text("lagging_material")
    if material.lower() == _NO_LAGGING:
        for name in single[1:]:
            faults.add(
                table.place, table.spelling(name),
                f'{table.spelling(name)} stands beside lagging_material = "none"',
                "delete one of them",
            )  # fmt: skip
        return ()
    layer = _layer(table, "lagging_", tables, faults)
    return () if layer is None else (layer,)


def _several_layers(table: Table, tables: MaterialTables, faults: FaultList) -> tuple[Layer, ...]:
    found = [
        _layer(one, "", tables, faults)
        for one in read_list(_LAYER_SECTION, table, "layers", faults)
    ]
    return tuple(layer for layer in found if layer is not None)


def _layer(table: Table, prefix: str, tables: MaterialTables, faults: FaultList) -> Layer | None:
    name = f"{prefix}material"
    material = table.text(name)
    if not prefix and not material:
        faults.add(
            table.place, name, "material is missing",
            f'expected a name in the material tables, or "{UNKNOWN_WORD}"',
        )  # fmt: skip
        return None
    declared = table.quantity(f"{prefix}conductivity")
    thickness = table.quantity(f"{prefix}thickness")
    curve, u_relative = None, 0.0
    source = "declared"
    confidence: Confidence = "declared"
    if material and material.lower() != UNKNOWN_WORD:
        try:
            row = lagging_material(material, tables)
        except TableError as error:
            if declared is None:
                _table_fault(table, name, error, faults)
                return None
        else:
            curve = ConductivityCurve(
                row.temperature, row.conductivity, row.source, row.maximum_service_temperature
            )
            u_relative, source, confidence = row.u_relative, row.source, row.confidence
    if declared is not None:
        curve = _specified_curve(declared, table.number(f"{prefix}conductivity_temperature"), curve)
        u_relative = declared.u / declared.value
        source, confidence = declared.source, declared.confidence
    factor = Quantity(
        1.0, u_relative, lower=0.2, upper=5.0,
        shape="lognormal" if u_relative else "normal", source=source, confidence=confidence,
    )  # fmt: skip
    return Layer(material or UNKNOWN_WORD, thickness, curve, factor)


def _specified_curve(
    declared: Quantity, temperature: float | None, shape: ConductivityCurve | None
) -> ConductivityCurve:
    """Return a constant curve, or the table's scaled to the specified value."""
    limit = None if shape is None else shape.maximum_service_temperature
    if temperature is None or shape is None:
        return ConductivityCurve(
            _ANY_TEMPERATURE, (declared.value, declared.value), "declared", limit
        )
    scale = declared.value / _interpolated(temperature, shape)
    return ConductivityCurve(
        shape.temperature,
        tuple(scale * value for value in shape.conductivity),
        f"declared at {temperature - 273.15:.4g} °C, shape of: {shape.source}",
        limit,
    )


def _interpolated(temperature: float, curve: ConductivityCurve) -> float:
    """Return the curve's value, constant beyond its ends."""
    nodes = list(zip(curve.temperature, curve.conductivity, strict=True))
    if temperature <= nodes[0][0]:
        return nodes[0][1]
    for (low, k_low), (high, k_high) in pairwise(nodes):
        if temperature <= high:
            return k_low + (k_high - k_low) * (temperature - low) / (high - low)
    return nodes[-1][1]


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
        _table_fault(table, "cladding", error, faults)
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


def _inside(table: Table, faults: FaultList) -> tuple[Quantity | None, Literal["fluid", "wall"]]:
    fluid, wall = table.quantity("fluid_temperature"), table.quantity("wall_temperature")
    if fluid is not None and wall is not None:
        faults.add(
            table.place, table.spelling("wall_temperature"),
            "fluid and wall temperature are both given", "expected the one that was measured",
        )  # fmt: skip
    return (wall, "wall") if wall is not None else (fluid, "fluid")


def _tracing(table: Table, faults: FaultList) -> Tracing:
    kind = table.text("tracing") or "none"
    parts = [name for name in ("tracer_temperature", "tracer_power") if table.has(name)]
    if kind == "none" and parts:
        faults.ask(
            table.place, table.spelling(parts[0]),
            f"{table.spelling(parts[0])} is given but tracing is not", 'declare tracing = "steam"'
            ' or "electric"',
        )  # fmt: skip
    return Tracing(
        kind="steam" if kind == "steam" else "electric" if kind == "electric" else "none",
        clock_position=table.number("tracer_clock_position"),
        temperature=table.quantity("tracer_temperature"),
        power=table.quantity("tracer_power"),
    )
