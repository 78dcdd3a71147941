"""What a pipe exchanges radiation with and what it mirrors, from the conditions of a frame."""

import math
from dataclasses import dataclass, replace
from typing import cast

from cladwatt.materials.tables import MaterialTables, default_quantity
from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList
from cladwatt.survey.keys import PIECE, UNKNOWN_WORD, Section
from cladwatt.survey.model import SurroundingsKind, SurroundingsPiece
from cladwatt.survey.table_reader import Table, read_list

__all__ = ["Surroundings", "build_surroundings", "read_pieces", "without_rivals"]

_PIECE_SECTION = Section("surroundings", "One piece of the surroundings", PIECE)
_AS_AIR = "as the air"
"""Begins the source of a default that follows the air temperature."""
_SUM_TOLERANCE = 0.02
_AS_ONE = ("surroundings_temperature", "sky_total_temperature")
"""Declare the surroundings another way than in pieces."""
_LEAST_SKY_U = 3.0
"""Of a sky temperature nobody measured: an assumption, no source. [K]"""
SKY_BAND_BELOW_AIR = 60.0
"""How far below the air's the sky's temperature in the band may be, under clear dry air; low cloud
is near the air's. Anything between is taken as equally likely: an assumption, no source. [K]"""


@dataclass(frozen=True)
class Surroundings:
    """The radiative side of the conditions of one frame; see :class:`Conditions` for each."""

    temperature: Quantity | None
    pieces: tuple[SurroundingsPiece, ...]
    reflected: Quantity | None
    sky_total: Quantity | None
    sky_view: Quantity | None
    sky_band: Quantity | None


def read_pieces(table: Table, faults: FaultList) -> Table:
    """Return conditions or a frame with its list of pieces read, once, where it stands.

    Parameters
    ----------
    table : Table
        The list of ``surroundings`` in it becomes a tuple of tables; a faulty one is taken out.
    faults : FaultList
        Gets what is wrong with it: a piece, or the sum of the view factors.
    """
    raw = table.get("surroundings")
    if raw is None:
        return table
    before = faults.errors
    plain = {name: value for name, value in table.plain.items() if name != "surroundings"}
    if raw == UNKNOWN_WORD:
        return replace(table, plain=plain)
    pieces = tuple(read_list(_PIECE_SECTION, table, "surroundings", faults))
    _check_alone(table, pieces, faults)
    if faults.errors == before:
        _check_sum(table, pieces, faults)
    if faults.errors == before:
        plain["surroundings"] = pieces
    return replace(table, plain=plain)


def _check_alone(table: Table, pieces: tuple[Table, ...], faults: FaultList) -> None:
    sky = [piece for piece in pieces if piece.text("what") == "sky"]
    for name in (*_AS_ONE, *(("sky_view_factor",) if sky else ())):
        if _declares(table, name):
            faults.add(
                table.place, table.spelling(name),
                f"surroundings and {table.spelling(name)} are both given", "expected one of them",
            )  # fmt: skip
    for piece in pieces:
        if piece not in sky and piece.quantity("temperature") is None:
            name = piece.key("temperature").usual
            faults.add(
                piece.place, name, f"the temperature of the {piece.text('what')} is not known",
                f"expected {name}",
            )  # fmt: skip


def _check_sum(table: Table, pieces: tuple[Table, ...], faults: FaultList) -> None:
    shares = [piece.quantity("view_factor") for piece in pieces]
    if any(share is None for share in shares):
        faults.add(
            table.place, "surroundings", "a view factor is unknown",
            "expected a number for each; estimate them from where the pipe hangs",
        )  # fmt: skip
        return
    total = sum(share.value for share in shares if share is not None)
    if abs(total - 1.0) > _SUM_TOLERANCE:
        faults.add(
            table.place, "surroundings", f"the view factors sum to {total:.4g}",
            f"expected 1 within {_SUM_TOLERANCE:g}: add what is missing as a piece of its own",
        )  # fmt: skip


def without_rivals(own: Table, wide: Table) -> Table:
    """Return the survey's conditions without what a frame declares in another way."""
    drop: set[str] = set()
    if own.has("surroundings"):
        drop = {*_AS_ONE, "sky_view_factor"}
    elif any(_declares(own, name) for name in _AS_ONE):
        drop = {"surroundings"}
    if not drop:
        return wide
    return replace(
        wide,
        plain={name: value for name, value in wide.plain.items() if name not in drop},
        written={name: value for name, value in wide.written.items() if name not in drop},
    )


def _declares(table: Table, name: str) -> bool:
    return table.has(name) and not table.is_unknown(name)


def build_surroundings(
    table: Table,
    air: Quantity | None,
    humidity: Quantity | None,
    tables: MaterialTables,
    faults: FaultList,
) -> Surroundings:
    """Return the surroundings of a frame with the defaults that may be taken.

    Parameters
    ----------
    table : Table
        Conditions with what the frame declares over them, pieces read.
    air, humidity : Quantity or None
        Of the frame. [K], [-]
    tables : MaterialTables
    faults : FaultList
    """
    pieces = _pieces(table, air, humidity, faults)
    sky = None
    if pieces:
        temperature: Quantity | None = _uniform(pieces)
    else:
        sky = table.quantity("sky_total_temperature") or _cloudy_sky(table, air, humidity)
        temperature = _temperature(table, air, sky, tables)
    return Surroundings(
        temperature=temperature,
        pieces=pieces,
        reflected=_reflected(table, air, temperature, pieces, tables),
        sky_total=sky,
        sky_view=_sky_view(table, pieces, sky),
        sky_band=_sky_band(table, air, pieces),
    )


def _pieces(
    table: Table, air: Quantity | None, humidity: Quantity | None, faults: FaultList
) -> tuple[SurroundingsPiece, ...]:
    read = table.get("surroundings")
    if not isinstance(read, tuple):
        return ()
    found = [_piece(one, table, air, humidity, faults) for one in read]
    return tuple(piece for piece in found if piece is not None) if all(found) else ()


def _piece(
    one: Table, table: Table, air: Quantity | None, humidity: Quantity | None, faults: FaultList
) -> SurroundingsPiece | None:
    what = one.text("what")
    temperature = one.quantity("temperature")
    if temperature is None and what == "sky":
        temperature = _sky_of_clouds(table, air, humidity)
    if temperature is None:
        faults.add(
            table.place, "surroundings", "the temperature of the sky is not known",
            f"expected {one.key('temperature').usual} in its piece, or cloud_cover, humidity and"
            " air temperature",
        )  # fmt: skip
        return None
    share = one.quantity("view_factor")
    assert share is not None  # refused where it is read
    return SurroundingsPiece(cast(SurroundingsKind, what), temperature, share)


def _uniform(pieces: tuple[SurroundingsPiece, ...]) -> Quantity:
    """Return the temperature of uniform surroundings that give the pipe the same radiation."""
    total = sum(piece.view_factor.value for piece in pieces)
    fourth = sum(p.view_factor.value * p.temperature.value**4 for p in pieces) / total
    value = fourth**0.25
    variance = 0.0
    for piece in pieces:
        kelvin, share = piece.temperature.value, piece.view_factor.value / total
        variance += (share * (kelvin / value) ** 3 * piece.temperature.u) ** 2
        variance += ((kelvin**4 - fourth) / (4 * value**3) * piece.view_factor.u) ** 2
    u = math.sqrt(variance)
    return Quantity(
        value, u, lower=value - 6 * u, upper=value + 6 * u,
        source="declared in pieces: " + ", ".join(piece.what for piece in pieces),
    )  # fmt: skip


def _cloudy_sky(table: Table, air: Quantity | None, humidity: Quantity | None) -> Quantity | None:
    """Return the sky outdoors by its clouds, where nothing else is said of the surroundings."""
    if table.flag("indoors") is not False or _declares(table, "surroundings_temperature"):
        return None
    return _sky_of_clouds(table, air, humidity)


def _sky_of_clouds(
    table: Table, air: Quantity | None, humidity: Quantity | None
) -> Quantity | None:
    cover = table.quantity("cloud_cover")
    if cover is None or air is None or humidity is None:
        return None
    from cladwatt.physics.humidity import dew_point
    from cladwatt.physics.sky import sky_temperature, sky_temperature_uncertainty

    def sky(moved: float) -> float:
        damp = min(max(moved, 0.01), 1.0)
        return float(sky_temperature(air.value, dew_point(air.value, damp), cover.value))

    value = sky(humidity.value)
    by_humidity = 0.5 * (sky(humidity.value + humidity.u) - sky(humidity.value - humidity.u))
    by_relation = float(
        sky_temperature_uncertainty(
            air.value, dew_point(air.value, max(humidity.value, 0.01)), cover.value,
            u_cloud_cover=cover.u,
        )
    )  # fmt: skip
    u = max(_LEAST_SKY_U, math.hypot(by_relation, by_humidity, air.u))
    return Quantity(
        value, u, lower=max(100.0, value - 6 * u), upper=min(air.value + 10.0, value + 6 * u),
        source="sky by cloud cover and humidity: Berdahl and Martin (1984), Martin and Berdahl"
        " (1984)",
        confidence="medium",
    )  # fmt: skip


def _as_air(table: Table, air: Quantity | None, tables: MaterialTables) -> Quantity | None:
    """Return the air temperature with the uncertainty of the surroundings alone."""
    if air is None:
        return None
    where = "indoors" if table.flag("indoors") else "outdoors"
    difference = default_quantity(f"surroundings_minus_air_{where}", tables)
    return Quantity(
        air.value + difference.value,
        difference.u,
        lower=air.value + min(difference.lower, -5 * difference.u),
        upper=air.value + max(difference.upper, 5 * difference.u),
        source=f"{_AS_AIR}, u {difference.u:g} K {where}: {difference.source}",
        confidence="low",
    )


def _temperature(
    table: Table, air: Quantity | None, sky: Quantity | None, tables: MaterialTables
) -> Quantity | None:
    if table.has("surroundings_temperature"):
        declared = table.quantity("surroundings_temperature")
        if declared is not None or sky is None:
            return declared or _as_air(table, air, tables)
    return None if sky is not None else _as_air(table, air, tables)


def _reflected(
    table: Table,
    air: Quantity | None,
    surroundings: Quantity | None,
    pieces: tuple[SurroundingsPiece, ...],
    tables: MaterialTables,
) -> Quantity | None:
    if _declares(table, "reflected_temperature"):
        return table.quantity("reflected_temperature")
    if pieces or _declares(table, "sky_band_temperature"):
        return None  # follows from them, draw by draw
    if table.flag("indoors") and surroundings is not None and not surroundings.is_default:
        return replace(
            surroundings,
            u=math.hypot(surroundings.u, 2.0),
            source="as the declared surroundings, u 2 K more: common practice, no source",
            confidence="low",
        )
    return _as_air(table, air, tables)


def _sky_band(
    table: Table, air: Quantity | None, pieces: tuple[SurroundingsPiece, ...]
) -> Quantity | None:
    """Return what the band sees of the sky; of a piece of sky a wide guess where undeclared."""
    declared = table.quantity("sky_band_temperature")
    if declared is not None or air is None or all(piece.what != "sky" for piece in pieces):
        return declared
    if _declares(table, "reflected_temperature"):
        return None
    return Quantity(
        air.value - SKY_BAND_BELOW_AIR / 2, SKY_BAND_BELOW_AIR / math.sqrt(12),
        lower=air.value - SKY_BAND_BELOW_AIR, upper=air.value, shape="rectangular",
        source=f"below the air's by 0 to {SKY_BAND_BELOW_AIR:g} K: assumption, no source",
        confidence="low",
    )  # fmt: skip


def _sky_view(
    table: Table, pieces: tuple[SurroundingsPiece, ...], sky: Quantity | None
) -> Quantity | None:
    if table.has("sky_view_factor"):
        return table.quantity("sky_view_factor")
    seen = [piece.view_factor for piece in pieces if piece.what == "sky"]
    if seen:
        return replace(
            seen[0], value=min(1.0, sum(share.value for share in seen)),
            u=math.hypot(*(share.u for share in seen)), lower=0.0, upper=1.0,
        )  # fmt: skip
    if sky is None and not (
        table.has("sky_band_temperature") or table.has("sky_total_temperature")
    ):
        return None
    return Quantity(
        0.5, 0.15, lower=0.0, upper=1.0,
        source="a level pipe in the open sees the sky from half round: geometry; u: common"
        " practice, no source",
        confidence="low",
    )  # fmt: skip
