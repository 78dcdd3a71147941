"""The layers of a line from their tables: lagging and air gaps, from the inside out."""

import math
from itertools import pairwise

from cladwatt.errors import TableError
from cladwatt.materials.rows import Confidence, LaggingMaterial
from cladwatt.materials.tables import MaterialTables, default_quantity, lagging_material
from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList, shown
from cladwatt.survey.keys import LAYER, UNKNOWN_WORD, Section
from cladwatt.survey.model import ConductivityCurve, Layer
from cladwatt.survey.table_reader import Table, read_list

__all__ = ["build_layers", "table_fault"]

_LAYER_SECTION = Section("layers", "One layer of lagging", LAYER)
_NO_LAGGING = "none"
_ANY_TEMPERATURE = (50.0, 2000.0)
"""Nodes of a conductivity that holds at every temperature. [K]"""
_GAP_NODES = tuple(float(kelvin) for kelvin in range(160, 881, 30))
_GAP_DIFFERENCE = 10.0
"""Between the faces of an air gap, for its conductivity against temperature. [K]"""
_GAP_U = 0.15
"""Relative, of an air gap beside what its emissivities leave open: other differences between its
faces, eccentric faces, spacers. An assumption, no source."""
_FREEZING = 273.15


def build_layers(
    table: Table, diameter: Quantity | None, tables: MaterialTables, faults: FaultList
) -> tuple[Layer, ...]:
    """Return the layers of a line; empty for a pipe declared bare.

    Parameters
    ----------
    table : Table
        Read by the keys of ``line``.
    diameter : Quantity or None
        Outside diameter of the pipe, on which an air gap depends. [m]
    tables : MaterialTables
        Names are looked up here.
    faults : FaultList
        Gets what is wrong.
    """
    names = ("lagging_material", "lagging_thickness", "lagging_conductivity", "lagging_condition")
    single = [name for name in names if table.has(name)]
    if table.get("layers") is not None:
        if single:
            both = f"layers and {table.spelling(single[0])}"
            faults.add(table.place, "layers", f"{both} are both given", "expected one of them")
        return _several_layers(table, diameter, tables, faults)
    if table.text("lagging_material").lower() == _NO_LAGGING:
        for name in single[1:]:
            faults.add(
                table.place, table.spelling(name),
                f'{table.spelling(name)} stands beside lagging_material = "none"',
                "delete one of them",
            )  # fmt: skip
        return ()
    layer = _lagging(table, "lagging_", tables, faults)
    return () if layer is None else (layer,)


def _several_layers(
    table: Table, diameter: Quantity | None, tables: MaterialTables, faults: FaultList
) -> tuple[Layer, ...]:
    layers: list[Layer] = []
    inner = None if diameter is None else diameter.value
    for one in read_list(_LAYER_SECTION, table, "layers", faults):
        if one.text("kind") == "air_gap":
            layer = _air_gap(one, inner, tables, faults)
        else:
            layer = _checked_lagging(one, tables, faults)
        if layer is None:
            continue
        layers.append(layer)
        thickness = layer.thickness
        inner = None if inner is None or thickness is None else inner + 2 * thickness.value
    return tuple(layers)


def _checked_lagging(table: Table, tables: MaterialTables, faults: FaultList) -> Layer | None:
    for name in ("inner_emissivity", "outer_emissivity"):
        if table.has(name):
            faults.add(
                table.place, name, f"{name} is given for lagging",
                'expected it only with kind = "air_gap"',
            )  # fmt: skip
            return None
    if not table.text("material"):
        faults.add(
            table.place, "material", "material is missing",
            f'expected a name in the material tables, or "{UNKNOWN_WORD}"',
        )  # fmt: skip
        return None
    return _lagging(table, "", tables, faults)


def _lagging(table: Table, prefix: str, tables: MaterialTables, faults: FaultList) -> Layer | None:
    name = f"{prefix}material"
    material = table.text(name)
    declared = table.quantity(f"{prefix}conductivity")
    curve, u_relative = None, 0.0
    source = "declared"
    confidence: Confidence = "declared"
    row: LaggingMaterial | None = None
    if material and material.lower() != UNKNOWN_WORD:
        try:
            row = lagging_material(material, tables)
        except TableError as error:
            if declared is None:
                table_fault(table, name, error, faults)
                return None
    if row is not None:
        curve = ConductivityCurve(
            row.temperature, row.conductivity, row.source, row.maximum_service_temperature
        )
        u_relative, source, confidence = row.u_relative, row.source, row.confidence
    if declared is not None:
        curve = _specified_curve(declared, table.number(f"{prefix}conductivity_temperature"), curve)
        u_relative = declared.u / declared.value
        source, confidence = declared.source, declared.confidence
    condition = table.text(f"{prefix}condition")
    return Layer(
        material or UNKNOWN_WORD,
        table.quantity(f"{prefix}thickness"),
        curve,
        _factor(u_relative, source, confidence),
        condition="wet" if condition == "wet" else "ice" if condition == "ice" else "dry",
        condition_factor=_condition_factor(table, f"{prefix}condition", row, faults),
        density=None if row is None else row.density,
        specific_heat=None if row is None else row.specific_heat,
    )


def _factor(u_relative: float, source: str, confidence: Confidence) -> Quantity:
    return Quantity(
        1.0, u_relative, lower=0.2, upper=5.0,
        shape="lognormal" if u_relative else "normal", source=source, confidence=confidence,
    )  # fmt: skip


def _condition_factor(
    table: Table, name: str, row: LaggingMaterial | None, faults: FaultList
) -> Quantity | None:
    """Return conductivity as found over dry: the published range, its ends taken as 95 %."""
    condition = table.text(name)
    if condition not in ("wet", "ice"):
        return None
    if row is None or row.wet_ratio is None:
        faults.ask(
            table.place, name,
            f"{name} is {shown(condition)}, but how much more it then conducts is not held for"
            " its material",
            "name a material of `cladwatt tables lagging_materials` with a wet ratio",
        )  # fmt: skip
        return None
    low, high = row.wet_ratio
    source = f"{condition} over dry conductivity: {row.wet_source}"
    if condition == "ice" and high > 1:
        high = _frozen_ratio(row, low, high)
        source += "; upper end as if ice had taken the place of water"
    if high == low:
        return Quantity(low, lower=low, upper=high, source=source, confidence="low")
    middle = math.sqrt(low * high)
    return Quantity(
        middle, middle * math.log(high / low) / 4, lower=low, upper=high,
        shape="lognormal", source=source, confidence="low",
    )  # fmt: skip


def _frozen_ratio(row: LaggingMaterial, low: float, high: float) -> float:
    from cladwatt.physics.moisture import frozen_conductivity_range

    curve = ConductivityCurve(row.temperature, row.conductivity)
    dry = _interpolated(_FREEZING, curve)
    return float(frozen_conductivity_range(dry, low, high, _FREEZING).high) / dry


def _air_gap(
    table: Table, inner: float | None, tables: MaterialTables, faults: FaultList
) -> Layer | None:
    for name in ("material", "conductivity", "conductivity_temperature"):
        if table.has(name) and table.text(name).lower() != UNKNOWN_WORD:
            written = table.spelling(name)
            faults.add(
                table.place, written, f"{written} is given for an air gap",
                "delete it, or declare a layer of lagging",
            )  # fmt: skip
            return None
    if table.text("condition") in ("wet", "ice"):
        faults.add(
            table.place, "condition", f"condition is {shown(table.text('condition'))} for an air"
            " gap", "expected it only for lagging",
        )  # fmt: skip
        return None
    usual = default_quantity("air_gap_emissivity", tables)
    faces = (table.quantity("inner_emissivity") or usual,
             table.quantity("outer_emissivity") or usual)  # fmt: skip
    thickness = table.quantity("thickness")
    curve, u_relative = None, _GAP_U
    if inner is not None and thickness is not None:
        curve, u_relative = _gap_curve(inner, thickness.value, faces)
    return Layer(
        "air_gap",
        thickness,
        curve,
        _factor(u_relative, "air and radiation across the gap; u: assumption, no source", "low"),
        kind="air_gap",
        inner_emissivity=faces[0],
        outer_emissivity=faces[1],
    )


def _gap_curve(
    inner: float, thickness: float, faces: tuple[Quantity, Quantity]
) -> tuple[ConductivityCurve, float]:
    """Return the conductivity of a solid that passes as much heat as the gap, and relative u."""
    import numpy as np

    from cladwatt.physics.air_gap import air_gap_conductance

    outer = inner + 2 * thickness
    temperature = np.array(_GAP_NODES)

    def conductivity(inner_emissivity: float, outer_emissivity: float) -> list[float]:
        conductance = air_gap_conductance(
            inner, outer, inner_temperature=temperature + _GAP_DIFFERENCE / 2,
            outer_temperature=temperature - _GAP_DIFFERENCE / 2,
            inner_emissivity=inner_emissivity, outer_emissivity=outer_emissivity,
        )  # fmt: skip
        return [float(value) for value in conductance * math.log(outer / inner) / (2 * math.pi)]

    first, second = faces
    nominal = conductivity(first.value, second.value)
    moved = (
        conductivity(max(first.value - first.u, 0.01), second.value),
        conductivity(first.value, max(second.value - second.u, 0.01)),
    )
    middle = len(nominal) // 2
    steps = [1 - other[middle] / nominal[middle] for other in moved]
    curve = ConductivityCurve(
        _GAP_NODES,
        tuple(nominal),
        "air gap: Raithby and Hollands (1975), radiation between concentric cylinders",
    )
    return curve, math.hypot(_GAP_U, *steps)


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


def table_fault(table: Table, name: str, error: TableError, faults: FaultList) -> None:
    """Add what a material table did not hold, at the key that named it."""
    for fault in error.faults:
        faults.add(
            table.place,
            name,
            f"{table.spelling(name)} is {shown(table.get(name))}: {fault.found}",
            fault.expected,
        )
