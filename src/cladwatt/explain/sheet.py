"""A pad for steps that are repeated at several surface temperatures, and formulas as text."""

import re
from string import Formatter

from cladwatt.explain.steps import Pad
from cladwatt.types import FloatLike

__all__ = ["Sheet", "polynomial_text", "saturation_text"]

_SHARED = (
    "T_air", "T_sur", "D", "v", "psi", "p", "phi", "e_air", "x_v", "H", "incl", "eps_tot", "q_sun",
    "T_dew",
)  # fmt: skip
"""Symbols that do not belong to one surface temperature."""
_FORMATTER = Formatter()


class Sheet:
    """A pad whose own symbols carry a suffix; ``{T_s}`` in a formula is one of them.

    Parameters
    ----------
    pad : Pad
    suffix : str
        Behind the symbols that belong to one surface temperature.
    """

    def __init__(self, pad: Pad, suffix: str = "") -> None:
        self.pad, self.suffix = pad, suffix

    def found(
        self,
        key: str,
        symbol: str,
        value: FloatLike,
        unit: str,
        formula: str,
        source: str = "",
        *,
        others: str = "",
    ) -> None:
        """Write down a step; its inputs are read off the formula, `others` are added to them."""
        own = [name for _, name, _, _ in _FORMATTER.parse(formula) if name]
        words = set(re.findall(r"[A-Za-z]\w*", formula.format(**dict.fromkeys(own, " "))))
        inputs = [name + self.suffix for name in dict.fromkeys(own)]
        inputs += [name for name in _SHARED if name in words] + others.split()
        shown = formula.format(**{name: name + self.suffix for name in own})
        self.pad.found(key, symbol + self.suffix, value, unit, shown, " ".join(inputs), source)

    def given(self, key: str, symbol: str, value: FloatLike, unit: str, source: str) -> None:
        """Write down a value that does not follow from those before it."""
        self.pad.given(key, symbol + self.suffix, value, unit, source)


def polynomial_text(coefficients: tuple[float, ...], scale: float = 1.0) -> str:
    """Return a polynomial in the film temperature over 300 K as text.

    Parameters
    ----------
    coefficients : tuple of float
        Ascending.
    scale : float
        Taken out in front.
    """
    terms = [f"{coefficients[0] / scale:.9g}"]
    for power, coefficient in enumerate(coefficients[1:], start=1):
        x = "x" if power == 1 else f"x^{power}"
        sign = "-" if coefficient < 0 else "+"
        terms.append(f"{sign} {abs(coefficient) / scale:.9g} {x}")
    factor = "" if scale == 1 else f"{scale:g} "
    return f"{factor}({' '.join(terms)}), x = {{T_film}}/300 K"


def saturation_text(temperature: str, *, over_ice: bool = False) -> str:
    """Return the saturation pressure of vapour at a temperature as text. [Pa]

    Parameters
    ----------
    temperature : str
        Its symbol.
    over_ice : bool
        Below 0 °C at a surface.
    """
    t = temperature
    if over_ice:
        return (
            f"exp(-5674.5359/{t} + 6.3925247 - 0.009677843 {t} + 6.2215701e-7 {t}^2"
            f" + 2.0747825e-9 {t}^3 - 9.484024e-13 {t}^4 + 4.1635019 ln({t}))"
        )
    return (
        f"exp(-5800.2206/{t} + 1.3914993 - 0.048640239 {t} + 4.1764768e-5 {t}^2"
        f" - 1.4452093e-8 {t}^3 + 6.5459673 ln({t}))"
    )
