"""Material tables: what ships with the package, and a user's own beside the survey.

Every value carries its source, its confidence and a standard uncertainty. An unknown name is an
error that lists the nearest names, never a guess.
"""

import difflib
import math
from bisect import bisect_left
from collections.abc import Mapping
from typing import Literal, TypeVar

from cladwatt.errors import Fault, InputError, TableError
from cladwatt.materials.fittings import fitting_kind
from cladwatt.materials.load import (
    TABLE_NAMES,
    MaterialTables,
    TableRows,
    load_tables,
    shipped_tables,
)
from cladwatt.materials.pipes import parse_nps
from cladwatt.materials.rows import (
    AirRow,
    CladdingMaterial,
    CountsAs,
    DamageKind,
    Fitting,
    LaggingMaterial,
    PipeSize,
)
from cladwatt.materials.table_text import normalised_key
from cladwatt.quantities import Quantity

__all__ = [
    "TABLE_NAMES",
    "AirRow",
    "CladdingMaterial",
    "DamageKind",
    "Fitting",
    "LaggingMaterial",
    "MaterialTables",
    "PipeSize",
    "TableRows",
    "cladding_material",
    "default_quantity",
    "fitting_equivalent_length",
    "hanger_share",
    "hanger_spacing",
    "lagging_material",
    "load_tables",
    "pipe_outside_diameter",
    "pipe_size",
    "table_rows",
]

Series = Literal["EN", "ASME"]
_Row = TypeVar("_Row", bound=LaggingMaterial | CladdingMaterial)


def _found(name: str, rows: Mapping[str, _Row], what: str, table: str) -> _Row:
    key = normalised_key(name)
    if key in rows:
        return rows[key]
    aliases: dict[str, _Row] = {}
    for row in rows.values():
        for other in (*row.aliases, row.name):
            aliases[normalised_key(other)] = row
    if key in aliases:
        return aliases[key]
    near = difflib.get_close_matches(key, [*rows, *aliases], n=6, cutoff=0.5)
    nearest = list(dict.fromkeys(aliases[n].key if n in aliases else n for n in near))[:3]
    hint = f"nearest are {', '.join(nearest)}" if nearest else f"accepted are {', '.join(rows)}"
    raise TableError(
        Fault(
            f"{table}.csv",
            f"{what} {name!r}",
            f"no {what} has this name",
            f"{hint}; `cladwatt tables {table}` lists all, and a row in tables/{table}.csv beside "
            "the survey adds one",
        )
    )


def lagging_material(name: str, tables: MaterialTables | None = None) -> LaggingMaterial:
    """Return a lagging material by key, readable name or alias, whatever the case.

    Raises
    ------
    TableError
        If there is none of that name; the message lists the nearest.

    Examples
    --------
    >>> lagging_material("Mineral wool").key
    'mineral_wool_pipe_section'
    """
    rows = (tables or shipped_tables()).lagging
    return _found(name, rows, "lagging material", "lagging_conductivity")


def cladding_material(name: str, tables: MaterialTables | None = None) -> CladdingMaterial:
    """Return an outer surface by key, readable name or alias, whatever the case.

    Raises
    ------
    TableError
        If there is none of that name; the message lists the nearest.

    Examples
    --------
    >>> cladding_material("bright aluminum").key
    'bright_aluminium'
    """
    return _found(name, (tables or shipped_tables()).claddings, "cladding", "claddings")


def default_quantity(name: str, tables: MaterialTables | None = None) -> Quantity:
    """Return what is taken where `name` is not declared, in SI, with its source.

    Raises
    ------
    InputError
        If there is no default of that name.
    """
    defaults = (tables or shipped_tables()).defaults
    if name not in defaults:
        raise InputError(f"there is no default {name!r}; accepted are {', '.join(defaults)}")
    return defaults[name]


def fitting_equivalent_length(
    kind: str,
    lagged: bool,
    *,
    counts_as: CountsAs | None = None,
    tables: MaterialTables | None = None,
) -> Fitting:
    """Return the pipe length a flange pair or valve counts as.

    Parameters
    ----------
    kind : str
        ``flange``, ``valve`` or what a user's own table adds; ``gate valve`` and the like too.
    lagged : bool
        Whether the fitting itself is lagged.
    counts_as : {"bare_pipe", "lagged_pipe"}, optional
        Whose length is wanted. By default bare pipe for a bare fitting, where that is held, and
        the lagged line beside it for a lagged one.
    tables : MaterialTables, optional
        The survey's tables; what ships where left out.

    Returns
    -------
    Fitting
        Its `amount` is the length. [m]

    Raises
    ------
    TableError
        If there is none; the message lists what there is.

    Examples
    --------
    >>> fitting_equivalent_length("gate valve", lagged=False).amount.value
    1.0
    """
    rows = (tables or shipped_tables()).fittings.values()
    lengths = [row for row in rows if row.counts_as != "line_share"]
    wanted = fitting_kind(kind)
    fit = [row for row in lengths if row.kind == wanted and row.lagged is lagged]
    order = (counts_as,) if counts_as else ("lagged_pipe",) if lagged else _BARE_ORDER
    for counted in order:
        # a user's row stands last and goes first
        for row in reversed(fit):
            if row.counts_as == counted:
                return row
    known = dict.fromkeys(f"{row.kind} {'lagged' if row.lagged else 'bare'}" for row in lengths)
    raise TableError(
        Fault(
            "fittings.csv",
            f"fitting {kind!r}, {'lagged' if lagged else 'bare'}",
            f"no equivalent length{f' of {counts_as}' if counts_as else ''} is held for it",
            f"accepted are {', '.join(known)}; a row in tables/fittings.csv beside the survey adds "
            "one",
        )
    )


_BARE_ORDER: tuple[CountsAs, ...] = ("bare_pipe", "lagged_pipe")


def hanger_share(*, indoors: bool, tables: MaterialTables | None = None) -> Quantity:
    """Return the share of a line's loss that its hangers add. [-]

    Parameters
    ----------
    indoors : bool
    tables : MaterialTables, optional
        The survey's tables; what ships where left out.
    """
    rows = (tables or shipped_tables()).fittings
    return rows["hanger_indoors" if indoors else "hanger_outdoors"].amount


def hanger_spacing(outside_diameter: float, *, tables: MaterialTables | None = None) -> Quantity:
    """Return how far apart the hangers of a line are likely to be. [m]

    Parameters
    ----------
    outside_diameter : float
        Of the pipe. [m]
    tables : MaterialTables, optional
        The survey's tables; what ships where left out.

    Returns
    -------
    Quantity
        From the spacing with water in the pipe to that with steam or gas, all equally likely;
        between the sizes of the table with the root of the diameter, beyond them that of the
        nearest.

    Examples
    --------
    >>> found = hanger_spacing(0.1143)
    >>> found.lower, found.upper
    (4.3, 5.2)
    """
    rows = (tables or shipped_tables()).hanger_spacing
    after = bisect_left([row.outside_diameter for row in rows], outside_diameter)
    small, large = rows[max(after - 1, 0)], rows[min(after, len(rows) - 1)]
    share = 0.0
    if large.outside_diameter > small.outside_diameter:
        start = math.sqrt(small.outside_diameter)
        share = math.sqrt(outside_diameter) - start
        share /= math.sqrt(large.outside_diameter) - start
    nearer = large if share > 0.5 else small
    low = small.water + share * (large.water - small.water)
    high = small.vapour + share * (large.vapour - small.vapour)
    return Quantity(
        0.5 * (low + high), (high - low) / math.sqrt(12.0), low, high,
        shape="rectangular", source=nearer.source, confidence=nearer.confidence,
    )  # fmt: skip


def pipe_size(
    *,
    dn: int | float | str | None = None,
    nps: float | str | None = None,
    tables: MaterialTables | None = None,
) -> PipeSize:
    """Return a nominal pipe size.

    Parameters
    ----------
    dn : int or str, optional
        ``65`` or ``"DN 65"``.
    nps : float or str, optional
        Inches: ``2.5``, ``"2 1/2"``, ``"2-1/2"``, ``"2½"``.
    tables : MaterialTables, optional
        The survey's tables; what ships where left out.

    Raises
    ------
    InputError
        If not exactly one of `dn` and `nps` is given.
    TableError
        If the size is not in the table, or cannot be read as one.
    """
    if (dn is None) == (nps is None):
        raise InputError(f"dn is {dn!r} and nps is {nps!r}; expected exactly one of them")
    sizes = (tables or shipped_tables()).pipe_sizes
    label = f"DN {str(dn).upper().removeprefix('DN').strip()}" if nps is None else f"NPS {nps}"
    wanted = parse_nps(str(nps)) if dn is None else _dn_number(str(dn))
    known: dict[float, PipeSize] = {}
    for size in sizes:
        nominal = size.nps if dn is None else size.dn
        if nominal is not None:
            known[nominal] = size
    if wanted is not None and wanted in known:
        return known[wanted]
    near = sorted(known, key=lambda n: abs(n - wanted))[:3] if wanted else sorted(known)
    raise TableError(
        Fault(
            "pipe_sizes.csv",
            label,
            "the table has no such pipe size",
            f"nearest are {', '.join(f'{n:g}' for n in sorted(near))}; or declare "
            "pipe_outside_diameter_mm, or add a row to tables/pipe_sizes.csv beside the survey",
        )
    )


def _dn_number(text: str) -> float | None:
    try:
        return float(text.upper().removeprefix("DN").strip())
    except ValueError:
        return None


def pipe_outside_diameter(
    *,
    dn: int | float | str | None = None,
    nps: float | str | None = None,
    series: Series | None = None,
    tables: MaterialTables | None = None,
) -> float:
    """Return the outside diameter of a steel pipe by its nominal size.

    Parameters
    ----------
    dn, nps : optional
        Exactly one of them, as :func:`pipe_size` takes them.
    series : {"EN", "ASME"}, optional
        EN 10220 or ASME B36.10M; by default EN with `dn` and ASME with `nps`. They differ by 4 %
        at DN 65 and 1 % at DN 125.
    tables : MaterialTables, optional
        The survey's tables; what ships where left out.

    Returns
    -------
    float
        Diameter; its relative standard uncertainty is :attr:`PipeSize.u_relative`. [m]

    Raises
    ------
    InputError
        If not exactly one of `dn` and `nps` is given, or the series is neither.
    TableError
        If the size is not in the table, or not in that series.
    """
    size = pipe_size(dn=dn, nps=nps, tables=tables)
    chosen = series or ("EN" if nps is None else "ASME")
    if chosen not in ("EN", "ASME"):
        raise InputError(f"series is {chosen!r}; expected 'EN' or 'ASME'")
    diameter = size.en if chosen == "EN" else size.asme
    if diameter is None:
        label = f"DN {dn}" if nps is None else f"NPS {nps}"
        other = "ASME" if chosen == "EN" else "EN"
        found = f"the {chosen} series has no outside diameter for it"
        expected = f"expected series {other!r}, or a declared pipe_outside_diameter_mm"
        raise TableError(Fault("pipe_sizes.csv", label, found, expected))
    return diameter


def table_rows(name: str, tables: MaterialTables | None = None) -> TableRows:
    """Return header, units and rows of one table as text, for printing.

    Raises
    ------
    InputError
        If no table has that name.
    """
    rows = (tables or shipped_tables()).rows
    if name not in rows:
        raise InputError(f"no table is called {name!r}; accepted are {', '.join(rows)}")
    return rows[name]
