"""Pipe sizes: nominal sizes as they are written, and their rows."""

from collections.abc import Iterable, Mapping

from cladwatt.errors import Fault
from cladwatt.materials.placed import Placed, confidence_of, source_of
from cladwatt.materials.rows import PipeSize

__all__ = ["build_pipe_sizes", "parse_nps"]

_FRACTION_MARKS = {"½": " 1/2", "¼": " 1/4", "¾": " 3/4", "⅜": " 3/8"}


def parse_nps(text: str) -> float | None:
    """Return a nominal pipe size in inches, None where it cannot be read.

    Examples
    --------
    >>> parse_nps("2 1/2"), parse_nps("1-1/4"), parse_nps("2½"), parse_nps('2.5"')
    (2.5, 1.25, 2.5, 2.5)
    """
    plain = text.casefold().replace("nps", "").replace('"', "").replace("inch", "")
    for mark, words in _FRACTION_MARKS.items():
        plain = plain.replace(mark, words)
    parts = plain.replace("-", " ").replace(",", ".").split()
    total = 0.0
    try:
        for part in parts:
            top, _, bottom = part.partition("/")
            total += float(top) / float(bottom) if bottom else float(top)
    except (ValueError, ZeroDivisionError):
        return None
    return total if parts and 0 < total < 200 else None


def build_pipe_sizes(
    placed_rows: Iterable[Placed], shorts: Mapping[str, str], faults: list[Fault]
) -> tuple[PipeSize, ...]:
    """Return the pipe sizes by rising diameter; what is wrong is appended to `faults`."""
    built = []
    for placed in placed_rows:
        size = _pipe_size(placed, shorts, faults)
        if size is not None:
            built.append(size)
    return tuple(sorted(built, key=lambda size: size.en or size.asme or 0.0))


def _pipe_size(placed: Placed, shorts: Mapping[str, str], faults: list[Fault]) -> PipeSize | None:
    record = placed.record
    dn, nps = record.number("dn"), parse_nps(record.text("nps"))
    before = len(faults)
    if record.text("nps") and nps is None:
        faults.append(
            placed.fault(
                "nps", f"found {record.text('nps')!r}", "expected inches like 2 1/2 or 2.5"
            )
        )
    elif dn is None and nps is None:
        faults.append(placed.fault("", "neither dn nor nps is given", "expected one of them"))
        return None
    if dn is not None and dn != int(dn):
        faults.append(placed.fault("dn", f"found {dn:g}", "expected a whole number"))
    nominal = dn if dn is not None else 25.4 * (nps or 1.0)
    diameters = []
    for name in ("asme_outside_diameter_mm", "en_outside_diameter_mm"):
        outside = record.number(name)
        diameters.append(None if outside is None else 1e-3 * outside)
        if outside is not None and not 0.9 < outside / nominal < 1.85:
            faults.append(
                placed.fault(
                    name,
                    f"found {outside:g} for a nominal {nominal:g} mm",
                    f"expected {0.9 * nominal:.3g} to {1.85 * nominal:.3g} mm; "
                    "is the decimal point misplaced?",
                )
            )
    if diameters == [None, None]:
        faults.append(placed.fault("", "no outside diameter is given", "expected one or both"))
    if len(faults) > before:
        return None
    u_relative = record.number("u_relative")
    return PipeSize(
        dn=None if dn is None else int(dn),
        nps=nps,
        asme=diameters[0],
        en=diameters[1],
        u_relative=0.005 if u_relative is None else u_relative,
        source=source_of(placed, shorts),
        confidence=confidence_of(placed),
    )
