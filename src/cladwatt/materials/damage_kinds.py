"""Kinds of damage: what each may look like, and how likely it is before the image is looked at."""

import difflib
from collections.abc import Iterable, Mapping
from typing import cast

from cladwatt.errors import Fault
from cladwatt.materials.placed import Placed, confidence_of, source_of
from cladwatt.materials.rows import DamageKind

__all__ = ["WHOLE_KINDS", "build_damage_kinds"]

WHOLE_KINDS = ("sound", "aged")
"""Not local: their priors and severities are the joint estimate's own."""
_SIDES = ("all_round", "upper_side", "underside", "flank")
_RANGES = (
    ("severity_low", "severity_high"),
    ("length_low_m", "length_high_m"),
    ("half_angle_low_deg", "half_angle_high_deg"),
    ("edge_low_m", "edge_high_m"),
)


def build_damage_kinds(
    placed_rows: Iterable[Placed], shorts: Mapping[str, str], faults: list[Fault]
) -> dict[str, DamageKind]:
    """Return the kinds by key; what is wrong is appended to `faults`."""
    rows = list(placed_rows)
    shipped = {str(p.record.values["kind"]) for p in rows if not p.is_user} | set(_SEVERITY)
    built = {}
    for placed in rows:
        wrong = list(_faults(placed, shipped))
        faults.extend(wrong)
        if not wrong:
            kind = _kind(placed, shorts)
            built[kind.key] = kind
    local = sum(kind.prior for kind in built.values() if kind.key not in WHOLE_KINDS)
    own = [placed for placed in rows if placed.is_user]
    if own and not faults and not 0 < local < 1:
        expected = "expected those of all kinds of local damage to add up to between 0 and 1"
        faults.append(own[-1].fault("prior", f"they add up to {local:g}", expected))
    return built


_SEVERITY: dict[str, tuple[float, float]] = {
    "sound": (1.0, 1.0),
    "aged": (1.0, 10.0),
    "compressed": (0.02, 1.0),
    "wet": (1.0, 200.0),
    "wet_underside": (1.0, 200.0),
    "void": (0.0, 0.99),
    "open_joint": (0.02, 1.0),
    "bare": (0.02, 1.0),
    "missing_sector": (0.02, 1.0),
}
"""What a severity may plausibly be: each family reads it in its own way."""


def _faults(placed: Placed, shipped: set[str]) -> Iterable[Fault]:
    record = placed.record
    key = cast(str, record.values["kind"])
    local = sorted(shipped - set(WHOLE_KINDS))
    if key not in shipped or (placed.is_user and key in WHOLE_KINDS):
        near = difflib.get_close_matches(key, local, n=1)
        hint = f" (nearest: {near[0]})" if near else ""
        found = "its prior belongs to the joint estimate" if key in WHOLE_KINDS else "no such kind"
        yield placed.fault(key, found, f"accepted are {', '.join(local)}{hint}")
        return
    for low, high in _RANGES:
        if record.needed(low) > record.needed(high):
            found = f"found {record.needed(low):g} and {record.needed(high):g}"
            yield placed.fault(f"{key}: {low}, {high}", found, "expected the lower first")
    least, most = _SEVERITY[key]
    if not least <= record.needed("severity_low") <= record.needed("severity_high") <= most:
        found = f"found {record.text('severity_low')} to {record.text('severity_high')}"
        yield placed.fault(f"{key}: severity", found, f"expected within {least:g} to {most:g}")
    total = sum(record.needed(side) for side in _SIDES)
    if abs(total - 1) > 1e-6:
        expected = f"expected {', '.join(_SIDES)} to add up to 1"
        yield placed.fault(key, f"the sides add up to {total:g}", expected)


def _kind(placed: Placed, shorts: Mapping[str, str]) -> DamageKind:
    record = placed.record

    def pair(low: str, high: str) -> tuple[float, float]:
        return record.needed(low), record.needed(high)

    severity, length, half_angle, edge = (pair(low, high) for low, high in _RANGES)
    all_round, upper_side, underside, flank = (record.needed(side) for side in _SIDES)
    return DamageKind(
        key=cast(str, record.values["kind"]),
        name=record.text("name"),
        severity=severity,
        length=length,
        sides=(all_round, upper_side, underside, flank),
        half_angle_deg=half_angle,
        edge=edge,
        prior=record.needed("prior"),
        source=source_of(placed, shorts),
        confidence=confidence_of(placed),
    )
