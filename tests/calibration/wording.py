"""How the bench's numbers are written."""

import math

__all__ = ["plain_table", "shown"]


def shown(
    value: float,
    how: str,
    low: float | None = None,
    high: float | None = None,
    *,
    more_digits: int = 0,
) -> str:
    """Return a number in words, with its band behind it where one is given.

    Parameters
    ----------
    value, low, high : float
    how : {"percent", "plain", "count"}
    more_digits : int
        Of the value, not of its band.
    """
    if math.isnan(value):
        return "–"
    text = _one(value, how, more_digits)
    if how == "percent":
        text += " %"
    if low is None or high is None or how == "count" or math.isnan(low) or math.isnan(high):
        return text
    if low == high:
        # all alike: resampling knows no band, which is not the same as a narrow one
        return text
    return f"{text} ({_one(low, how)} to {_one(high, how)})"


def _one(value: float, how: str, more: int = 0) -> str:
    if math.isinf(value):
        return "∞"
    if how == "percent":
        return f"{100 * value:.{1 + more}f}".removesuffix(".0")
    if how == "count":
        return f"{value:.0f}"
    return f"{value:.{(3 if abs(value) < 1 else 2) + more}f}"


def plain_table(header: list[str], rows: list[list[str]]) -> str:
    """Return rows aligned in columns, the first to the left, the others to the right."""
    widths = [max(len(row[i]) for row in [header, *rows]) for i in range(len(header))]

    def line(cells: list[str]) -> str:
        first = cells[0].ljust(widths[0])
        rest = [cell.rjust(width) for cell, width in zip(cells[1:], widths[1:], strict=True)]
        return "  ".join([first, *rest]).rstrip()

    rule = "  ".join("-" * width for width in widths)
    return "\n".join([line(header), rule, *(line(row) for row in rows)])
