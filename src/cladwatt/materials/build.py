"""From parsed records to typed rows, with the checks that need more than one cell."""

from collections.abc import Iterable, Mapping
from typing import cast

from cladwatt.errors import Fault
from cladwatt.materials.placed import Placed, confidence_of, source_of
from cladwatt.materials.rows import AirRow, CladdingMaterial, Confidence, LaggingMaterial
from cladwatt.materials.table_text import Record
from cladwatt.quantities import Quantity

__all__ = ["build_air_rows", "build_claddings", "build_defaults", "build_lagging"]

_ZERO_CELSIUS = 273.15
_UNITS_PER_SI = {
    "1": 1.0,
    "K": 1.0,
    "%": 1.0,
    "px": 1.0,
    "m": 1.0,
    "m/s": 1.0,
    "Pa": 1.0,
    "um": 1e6,
    "mm": 1e3,
}
_CONFIDENCE_ORDER: tuple[Confidence, ...] = ("low", "medium", "high", "declared")
_SOLAR_BOUNDS = (0.03, 0.99)
_LARGEST_STEP = 2.5
"""Conductivity ratio of neighbouring nodes beyond which a digit is wrong."""
_LARGEST_RATIO = 2.0
"""Band to total emissivity; hemispherical over normal alone is 0.95 to 1.3."""


def _largest_lagging_conductivity(temperature: float) -> float:
    """Return what no lagging exceeds: 0.2 W/(m K) to 100 °C, rising to 0.5 at 600 °C."""
    return 0.2 + 0.3 * max(0.0, min(1.3, (temperature - 100.0) / 500.0))


def _curve_faults(key: str, nodes: list[Placed]) -> Iterable[Fault]:
    previous: Record | None = None
    for placed in nodes:
        record = placed.record
        celsius, conductivity = record.needed("temperature_C"), record.needed(_CONDUCTIVITY)
        limit = _largest_lagging_conductivity(celsius)
        if conductivity > limit:
            yield placed.fault(
                f"{key}: {_CONDUCTIVITY}",
                f"found {record.text(_CONDUCTIVITY)} at {celsius:g} °C",
                f"expected 0.01 to {limit:.2g} W/(m K) for a lagging at this temperature; "
                "is the decimal point misplaced?",
            )
        if previous is not None:
            before = previous.needed(_CONDUCTIVITY)
            if celsius == previous.needed("temperature_C"):
                yield placed.fault(
                    key, f"{celsius:g} °C stands twice", "expected each temperature once"
                )
            elif not before / _LARGEST_STEP < conductivity < before * _LARGEST_STEP:
                yield placed.fault(
                    f"{key}: {_CONDUCTIVITY}",
                    f"found {record.text(_CONDUCTIVITY)} beside {previous.text(_CONDUCTIVITY)} "
                    f"at {previous.needed('temperature_C'):g} °C",
                    f"expected neighbours within a factor {_LARGEST_STEP:g}; "
                    "is the decimal point misplaced?",
                )
        previous = record


_CONDUCTIVITY = "conductivity_W_per_m_K"


def build_lagging(
    conductivity: Iterable[Placed],
    materials: Iterable[Placed],
    shorts: Mapping[str, str],
    faults: list[Fault],
) -> dict[str, LaggingMaterial]:
    """Return the lagging materials by key; what is wrong is appended to `faults`."""
    curves: dict[str, list[Placed]] = {}
    for placed in conductivity:
        curves.setdefault(cast(str, placed.record.values["material"]), []).append(placed)
    described = {cast(str, placed.record.values["material"]): placed for placed in materials}
    for key, placed in described.items():
        if key not in curves:
            faults.append(
                placed.fault(
                    key, "there is no conductivity", "expected rows in lagging_conductivity.csv"
                )
            )
    built = {}
    for key, nodes in curves.items():
        nodes.sort(key=lambda placed: placed.record.needed("temperature_C"))
        wrong = list(_curve_faults(key, nodes))
        faults.extend(wrong)
        if not wrong:
            built[key] = _lagging(key, nodes, described.get(key), shorts, faults)
    return built


def _lagging(
    key: str,
    nodes: list[Placed],
    about: Placed | None,
    shorts: Mapping[str, str],
    faults: list[Fault],
) -> LaggingMaterial:
    service: float | None = None
    wet: tuple[float, float] | None = None
    density, specific_heat = _heat_capacity(key, about, shorts, faults)
    if about is not None:
        service = about.record.number("maximum_service_temperature_C")
        low, high = about.record.number("wet_ratio_low"), about.record.number("wet_ratio_high")
        if (low is None) != (high is None) or (low is not None and cast(float, high) < low):
            faults.append(
                about.fault(
                    f"{key}: wet_ratio_low, wet_ratio_high",
                    f"found {low} and {high}",
                    "expected both or none, the lower first",
                )
            )
        elif low is not None and high is not None:
            wet = (low, high)
    sources = dict.fromkeys(source_of(placed, shorts) for placed in nodes)
    return LaggingMaterial(
        key=key,
        name=(about.record.text("name") if about else "") or key.replace("_", " "),
        temperature=tuple(_ZERO_CELSIUS + p.record.needed("temperature_C") for p in nodes),
        conductivity=tuple(p.record.needed(_CONDUCTIVITY) for p in nodes),
        u_relative=max(p.record.needed("u_relative") for p in nodes),
        source="; ".join(sources),
        confidence=min((confidence_of(p) for p in nodes), key=_CONFIDENCE_ORDER.index),
        maximum_service_temperature=None if service is None else _ZERO_CELSIUS + service,
        vapour_tight=about.record.flag("vapour_tight") if about else False,
        wet_ratio=wet,
        service_source=source_of(about, shorts, "service_source") if about and service else "",
        wet_source=source_of(about, shorts, "wet_source") if about and wet else "",
        aliases=about.record.names("aliases") if about else (),
        density=density,
        specific_heat=specific_heat,
    )


def _heat_capacity(
    key: str, about: Placed | None, shorts: Mapping[str, str], faults: list[Fault]
) -> tuple[Quantity | None, Quantity | None]:
    """Return density and specific heat; an own row without their u is taken as good to a tenth."""
    if about is None:
        return None, None
    source = source_of(about, shorts, "heat_source") or source_of(about, shorts)
    confidence = cast(Confidence, about.record.text("heat_confidence") or "declared")
    found: list[Quantity | None] = []
    for name in ("density_kg_per_m3", "specific_heat_J_per_kg_K"):
        value, u = about.record.number(name), about.record.number(f"u_{name}")
        if value is None and u is not None:
            faults.append(
                about.fault(f"{key}: u_{name}", f"it stands without {name}", "expected both")
            )
        found.append(
            None
            if value is None
            else Quantity(
                value, 0.1 * value if u is None else u, 0.3 * value, 3.0 * value,
                source=source, confidence=confidence,
            )
        )  # fmt: skip
    return found[0], found[1]


def build_claddings(
    placed_rows: Iterable[Placed], shorts: Mapping[str, str], faults: list[Fault]
) -> dict[str, CladdingMaterial]:
    """Return the claddings by key; what is wrong is appended to `faults`."""
    built: dict[str, CladdingMaterial] = {}
    for placed in placed_rows:
        key = cast(str, placed.record.values["cladding"])
        wrong = [
            placed.fault(f"{key}: {name}", *text)
            for name in ("band_emissivity", "total_emissivity")
            if (text := _bounds_fault(placed.record, name))
        ]
        band, total = (placed.record.needed(f"{n}_emissivity") for n in ("band", "total"))
        if not wrong and not 1 / _LARGEST_RATIO < total / band < _LARGEST_RATIO:
            wrong.append(
                placed.fault(
                    f"{key}: band_emissivity, total_emissivity",
                    f"found {band:g} and {total:g}",
                    f"expected them within a factor {_LARGEST_RATIO:g} of each other; "
                    "is a decimal point misplaced?",
                )
            )
        faults.extend(wrong)
        if not wrong:
            built[key] = _cladding(key, placed, shorts)
    return built


def _bounds(record: Record, name: str) -> tuple[float, float]:
    low, high = record.number(f"{name}_low"), record.number(f"{name}_high")
    return (0.01 if low is None else low), (0.995 if high is None else high)


def _bounds_fault(record: Record, name: str) -> tuple[str, str] | None:
    low, high = _bounds(record, name)
    value = record.needed(name)
    if low <= value <= high:
        return None
    return f"found {value:g}", f"expected a value within its own bounds {low:g} to {high:g}"


def _cladding(key: str, placed: Placed, shorts: Mapping[str, str]) -> CladdingMaterial:
    record = placed.record
    source, confidence = source_of(placed, shorts), confidence_of(placed)

    # The sources are those of the emissivities; sun and sheet have none.
    unsourced: tuple[str, Confidence] = (
        (source, confidence) if placed.is_user else ("common practice, no source", "low")
    )

    def ratio(
        name: str,
        bounds: tuple[float, float],
        source: str = source,
        confidence: Confidence = confidence,
    ) -> Quantity:
        return Quantity(
            record.needed(name),
            record.needed(f"u_{name}"),
            *bounds,
            source=source,
            confidence=confidence,
        )

    return CladdingMaterial(
        key=key,
        name=record.text("name") or key.replace("_", " "),
        band_emissivity=ratio("band_emissivity", _bounds(record, "band_emissivity")),
        total_emissivity=ratio("total_emissivity", _bounds(record, "total_emissivity")),
        solar_absorptance=ratio("solar_absorptance", _SOLAR_BOUNDS, *unsourced),
        conductivity=record.needed(_CONDUCTIVITY),
        thickness=Quantity(
            1e-3 * record.needed("thickness_mm"),
            1e-3 * record.needed("u_thickness_mm"),
            lower=0.0,
            source=unsourced[0],
            confidence=unsourced[1],
        ),
        is_metal=record.flag("is_metal"),
        source=source,
        confidence=confidence,
        aliases=record.names("aliases"),
    )


def build_air_rows(placed_rows: Iterable[Placed], shorts: Mapping[str, str]) -> tuple[AirRow, ...]:
    """Return the air rows by rising temperature."""
    rows = [
        AirRow(
            temperature=placed.record.needed("temperature_K"),
            density=placed.record.needed("density_kg_per_m3"),
            specific_heat=placed.record.needed("specific_heat_J_per_kg_K"),
            dynamic_viscosity=placed.record.needed("dynamic_viscosity_Pa_s"),
            conductivity=placed.record.needed("conductivity_W_per_m_K"),
            prandtl=placed.record.needed("prandtl"),
            source=source_of(placed, shorts),
        )
        for placed in placed_rows
    ]
    return tuple(sorted(rows, key=lambda row: row.temperature))


def build_defaults(
    placed_rows: Iterable[Placed], shorts: Mapping[str, str], faults: list[Fault]
) -> dict[str, Quantity]:
    """Return the defaults in SI; a user's value must lie within the bounds that ship."""
    built: dict[str, Quantity] = {}
    shipped: dict[str, Record] = {}
    for placed in placed_rows:
        record = placed.record
        key = cast(str, record.values["quantity"])
        if not placed.is_user:
            shipped[key] = record
        base = shipped.get(key)
        if base is None:
            expected = f"accepted are {', '.join(shipped)}"
            faults.append(placed.fault(key, "there is no such default", expected))
            continue
        unit = base.text("unit")
        if record.text("unit") not in ("", unit):
            faults.append(
                placed.fault(f"{key}: unit", f"found {record.text('unit')!r}", f"expected {unit!r}")
            )
            continue
        low, high, value = base.needed("lower"), base.needed("upper"), record.needed("value")
        if not low <= value <= high:
            faults.append(
                placed.fault(
                    key,
                    f"found {value:g}",
                    f"expected {low:g} to {high:g}" + ("" if unit == "1" else f" {unit}"),
                )
            )
            continue
        per_si = _UNITS_PER_SI[unit]
        built[key] = Quantity(
            value / per_si,
            record.needed("u") / per_si,
            low / per_si,
            high / per_si,
            source=source_of(placed, shorts),
            confidence=confidence_of(placed),
        )
    return built
