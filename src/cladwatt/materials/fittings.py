"""Flanges, valves and hangers: what one of them counts as."""

import difflib
import math
from collections.abc import Iterable, Mapping
from typing import cast

from cladwatt.errors import Fault
from cladwatt.materials.placed import Placed, confidence_of, source_of
from cladwatt.materials.rows import COUNTS_AS, CountsAs, Fitting, HangerSpacing
from cladwatt.materials.table_text import normalised_key
from cladwatt.quantities import Quantity

__all__ = ["build_fittings", "build_hanger_spacing", "fitting_kind"]

_KINDS = {
    "flange_pair": "flange",
    "flanges": "flange",
    "flange_joint": "flange",
    "gate_valve": "valve",
    "globe_valve": "valve",
    "ball_valve": "valve",
    "check_valve": "valve",
    "valves": "valve",
    "support": "hanger",
    "supports": "hanger",
    "pipe_support": "hanger",
    "hangers": "hanger",
    "pipe_hanger": "hanger",
}
_UNITS: dict[CountsAs, str] = {"bare_pipe": "m", "lagged_pipe": "m", "line_share": "1"}


def fitting_kind(name: str) -> str:
    """Return the kind a component's name stands for, itself where it stands for none other.

    Examples
    --------
    >>> fitting_kind("Gate valve"), fitting_kind("support"), fitting_kind("strainer")
    ('valve', 'hanger', 'strainer')
    """
    key = normalised_key(name)
    return _KINDS.get(key, key)


def build_fittings(
    placed_rows: Iterable[Placed], shorts: Mapping[str, str], faults: list[Fault]
) -> dict[str, Fitting]:
    """Return the fittings by key; what is wrong is appended to `faults`."""
    built = {}
    for placed in placed_rows:
        fitting = _fitting(placed, shorts, faults)
        if fitting is not None:
            built[fitting.key] = fitting
    return built


def build_hanger_spacing(
    placed_rows: Iterable[Placed], shorts: Mapping[str, str], faults: list[Fault]
) -> tuple[HangerSpacing, ...]:
    """Return the spacing of hangers by rising diameter; what is wrong is appended to `faults`."""
    built = []
    for placed in placed_rows:
        record = placed.record
        water, vapour = record.needed("water_m"), record.needed("vapour_m")
        if vapour < water:
            faults.append(
                placed.fault(
                    "water_m, vapour_m",
                    f"found {water:g} and {vapour:g}",
                    "expected water_m <= vapour_m: a lighter pipe needs fewer hangers",
                )
            )
            continue
        built.append(
            HangerSpacing(
                outside_diameter=1e-3 * record.needed("outside_diameter_mm"),
                water=water,
                vapour=vapour,
                source=source_of(placed, shorts),
                confidence=confidence_of(placed),
            )
        )
    return tuple(sorted(built, key=lambda one: one.outside_diameter))


def _fitting(placed: Placed, shorts: Mapping[str, str], faults: list[Fault]) -> Fitting | None:
    record = placed.record
    key = cast(str, record.values["fitting"])
    low, high = record.needed("low"), record.needed("high")
    written = normalised_key(record.text("counts_as"))
    if written not in COUNTS_AS:
        near = difflib.get_close_matches(written, COUNTS_AS, n=1)
        hint = f" (nearest: {near[0]})" if near else ""
        faults.append(
            placed.fault(
                f"{key}: counts_as",
                f"found {record.text('counts_as')!r}",
                f"expected one of {', '.join(COUNTS_AS)}{hint}",
            )
        )
        return None
    counts_as = written
    if high < low:
        faults.append(
            placed.fault(f"{key}: low, high", f"found {low:g} and {high:g}", "expected low <= high")
        )
        return None
    unit = record.text("unit")
    if unit not in ("", _UNITS[counts_as]):
        faults.append(
            placed.fault(f"{key}: unit", f"found {unit!r}", f"expected {_UNITS[counts_as]!r}")
        )
        return None
    return Fitting(
        key=key,
        kind=fitting_kind(record.text("kind")),
        lagged=record.flag("lagged"),
        counts_as=counts_as,
        amount=_amount(low, high, source_of(placed, shorts), placed),
    )


def _amount(low: float, high: float, source: str, placed: Placed) -> Quantity:
    """Return a range as all equally likely; a single printed value as good to a quarter."""
    middle = 0.5 * (low + high)
    confidence = confidence_of(placed)
    if high > low:
        return Quantity(
            middle, (high - low) / math.sqrt(12.0), low, high,
            shape="rectangular", source=source, confidence=confidence,
        )  # fmt: skip
    return Quantity(
        middle, 0.25 * middle, 0.3 * middle, 2.0 * middle,
        source=f"{source}; u: common practice, no source", confidence=confidence,
    )  # fmt: skip
