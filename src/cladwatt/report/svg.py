"""Small helpers to draw SVG by hand: elements, axes with ticks at nice numbers, embedded PNG."""

import base64
import itertools
import math
import struct
import unicodedata
import zlib
from collections.abc import Sequence
from dataclasses import dataclass, field
from html import escape

import numpy as np
from numpy.typing import NDArray

from cladwatt.types import FloatArray

__all__ = [
    "Axis",
    "Drawing",
    "clip_text",
    "isolated",
    "nice_ticks",
    "plain",
    "png_data_uri",
    "text_width",
]

FONT = "'Segoe UI', 'DejaVu Sans', Arial, sans-serif"

_DIRECTION = frozenset("\u200e\u200f\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069")


def plain(words: str) -> str:
    """Return text without control characters, which no XML may hold; line ends become spaces."""
    spaced = "".join(" " if c in "\r\n\t" else c for c in words)
    return "".join(c for c in spaced if unicodedata.category(c) not in ("Cc", "Cs", "Cn"))


def undirected(words: str) -> str:
    """Return text without the signs that steer the writing direction."""
    return "".join(c for c in words if c not in _DIRECTION)


def isolated(words: str) -> str:
    """Return text whose writing direction cannot reach what stands around it; ASCII as it is."""
    words = plain(words)
    return words if words.isascii() else f"\u2068{words}\u2069"


def clip_text(words: str, limit: int) -> str:
    """Return text of at most `limit` characters, its end replaced by an ellipsis."""
    words = plain(words)
    return words if len(words) <= limit else words[: limit - 1].rstrip() + "…"


def text_width(words: str, size: float) -> float:
    """Return a generous estimate of the width of a text set in `size`."""
    wide = sum(1 for c in words if unicodedata.east_asian_width(c) in "WF")
    return size * (0.6 * (len(words) - wide) + 1.1 * wide)


def nice_ticks(low: float, high: float, target: int = 5) -> list[float]:
    """Return tick values at 1, 2 or 5 times a power of ten inside [low, high].

    Parameters
    ----------
    low, high : float
        Ends of the axis, finite, low < high.
    target : int
        About how many ticks are wanted.

    Returns
    -------
    list of float
        Ascending.
    """
    raw = (high - low) / max(target, 1)
    power = 10.0 ** math.floor(math.log10(raw))
    step = next(m * power for m in (1, 2, 5, 10) if m * power >= raw * (1 - 1e-9))
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return [round(i * step, 12) + 0.0 for i in range(first, last + 1)]


def tick_decimals(ticks: Sequence[float]) -> int:
    """Return the decimals that tell all ticks apart."""
    if len(ticks) < 2:
        return 1
    step = min(b - a for a, b in itertools.pairwise(ticks))
    return max(0, -math.floor(math.log10(step) + 1e-9))


@dataclass(frozen=True)
class Axis:
    """Maps values between `low` and `high` on places between `start` and `stop`."""

    low: float
    high: float
    start: float
    stop: float

    def __call__(self, value: float) -> float:
        """Return the place of a value; values beyond the ends stay at the ends."""
        share = (value - self.low) / (self.high - self.low)
        return self.start + min(max(share, 0.0), 1.0) * (self.stop - self.start)

    def places(self, values: FloatArray) -> FloatArray:
        """Return the places of many values; NaN stays NaN."""
        share = np.clip((values - self.low) / (self.high - self.low), 0.0, 1.0)
        return self.start + share * (self.stop - self.start)

    def ticks(self, target: int = 5) -> list[float]:
        """Return nice ticks inside the axis."""
        return nice_ticks(self.low, self.high, target)


def _number(value: float) -> str:
    return f"{value:.2f}".rstrip("0").rstrip(".")


def _attributes(values: dict[str, str | float]) -> str:
    parts = []
    for name, value in values.items():
        shown = escape(plain(value), quote=True) if isinstance(value, str) else _number(value)
        parts.append(f' {name.rstrip("_").replace("_", "-")}="{shown}"')
    return "".join(parts)


@dataclass
class Drawing:
    """An SVG being drawn.

    Parameters
    ----------
    width, height : float
        Size in drawing units.
    prefix : str
        Put before every id, so that several drawings can stand in one page.
    title, description : str
        What a screen reader says.
    top : float
        Where the picture begins; what lies above is cut off.
    """

    width: float
    height: float
    prefix: str
    title: str
    description: str
    top: float = 0.0
    parts: list[str] = field(default_factory=list)

    def element(self, tag: str, **attributes: str | float) -> None:
        """Add an element; ``_`` in attribute names stands for ``-``."""
        self.parts.append(f"<{tag}{_attributes(attributes)}/>")

    def line(self, x1: float, y1: float, x2: float, y2: float, **rest: str | float) -> None:
        """Add a straight line."""
        self.element("line", x1=x1, y1=y1, x2=x2, y2=y2, **rest)

    def rect(self, x: float, y: float, width: float, height: float, **rest: str | float) -> None:
        """Add a rectangle."""
        self.element("rect", x=x, y=y, width=max(width, 0.0), height=max(height, 0.0), **rest)

    def path(self, points: Sequence[tuple[float, float]], **rest: str | float) -> None:
        """Add an open polyline, or a closed one with ``close="z"``."""
        close = str(rest.pop("close", ""))
        steps = "L".join(f"{_number(x)} {_number(y)}" for x, y in points)
        self.element("path", d=f"M{steps}{close}", **rest)

    def text(self, x: float, y: float, words: str, **rest: str | float) -> None:
        """Add a text, isolated so that its own writing direction stays inside it."""
        content = escape(plain(words), quote=False)
        self.parts.append(f"<text{_attributes({'x': x, 'y': y, **rest})}>{content}</text>")

    def hatch(self) -> str:
        """Define the hatching that marks what was left out; return the paint to fill with."""
        name = f"{self.prefix}-hatch"
        self.parts.append(
            f'<defs><pattern id="{name}" width="7" height="7" patternUnits="userSpaceOnUse" '
            'patternTransform="rotate(45)"><rect width="7" height="7" fill="#ffffff"/>'
            '<line x1="0" y1="0" x2="0" y2="7" stroke="#8b989f" stroke-width="1.4"/>'
            "</pattern></defs>"
        )
        return f"url(#{name})"

    def render(self) -> str:
        """Return the finished SVG."""
        size = f"{_number(self.top)} {_number(self.width)} {_number(self.height - self.top)}"
        head = (
            f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 {size}" role="img" '
            f'aria-labelledby="{self.prefix}-t {self.prefix}-d" '
            f'font-family="{FONT}" font-size="14">'
            f'<title id="{self.prefix}-t">{escape(plain(self.title), quote=False)}</title>'
            f'<desc id="{self.prefix}-d">{escape(plain(self.description), quote=False)}</desc>'
        )
        return head + "\n".join(self.parts) + "</svg>\n"


def png_data_uri(index: NDArray[np.uint8], palette: NDArray[np.uint8]) -> str:
    """Return an indexed picture as a ``data:`` address; entry 0 is transparent.

    Parameters
    ----------
    index : (rows, cols) array of uint8
        Palette entries.
    palette : (256, 3) array of uint8
        Red, green, blue.

    Returns
    -------
    str
        A PNG in base64.

    References
    ----------
    .. [1] ISO/IEC 15948:2004, clauses 5, 9 and 11 (chunks, filter type 0, IHDR, PLTE, tRNS).
    """

    def chunk(kind: bytes, data: bytes) -> bytes:
        return (
            struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))
        )

    rows, columns = index.shape
    lines = np.concatenate([np.zeros((rows, 1), dtype=np.uint8), index], axis=1)
    picture = (
        b"\x89PNG\r\n\x1a\n"
        + chunk(b"IHDR", struct.pack(">IIBBBBB", columns, rows, 8, 3, 0, 0, 0))
        + chunk(b"PLTE", palette.tobytes())
        + chunk(b"tRNS", b"\x00")
        + chunk(b"IDAT", zlib.compress(lines.tobytes(), 6))
        + chunk(b"IEND", b"")
    )
    return "data:image/png;base64," + base64.b64encode(picture).decode("ascii")
