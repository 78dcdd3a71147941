"""Colours: ink and paper of a drawing, and a two-hue scale centred on air temperature.

Loss is terracotta, gain is slate blue; both darken with the distance from air temperature, so the
scale reads in grey, and the two hues stay apart in the common kinds of colour blindness.
"""

import numpy as np
from numpy.typing import NDArray

from cladwatt.types import FloatArray

__all__ = [
    "FAINT",
    "GAIN",
    "HAIR",
    "INK",
    "LOSS",
    "MARK",
    "PAPER",
    "QUIET",
    "contrast_ratio",
    "diverging_palette",
    "hue_of",
    "relative_luminance",
    "temperature_index",
]

INK = "#1c2b33"
QUIET = "#4d5e68"
HAIR = "#c3ccd1"
FAINT = "#eef1f2"
PAPER = "#ffffff"
LOSS = "#8a2f1a"
GAIN = "#1f5a78"
MARK = "#f6e3d8"

NEUTRAL = "#f7f4ee"
_LOSS_RAMP = (NEUTRAL, "#f1d3c2", "#dea28a", "#bd644c", "#8a2f1a", "#561208")
_GAIN_RAMP = (NEUTRAL, "#cfe0e6", "#94bac8", "#538da6", "#1f5a78", "#08324a")


def _rgb(code: str) -> tuple[int, int, int]:
    return int(code[1:3], 16), int(code[3:5], 16), int(code[5:7], 16)


def hue_of(gain: bool) -> str:
    """Return the line colour of a line that gains, or loses, heat."""
    return GAIN if gain else LOSS


def relative_luminance(code: str) -> float:
    """Return the relative luminance of a ``#rrggbb`` colour, 0 black to 1 white.

    References
    ----------
    .. [1] Web Content Accessibility Guidelines 2.1, "relative luminance".
    """
    channels = [value / 255 for value in _rgb(code)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast_ratio(first: str, second: str) -> float:
    """Return the contrast ratio of two colours, 1 to 21.

    References
    ----------
    .. [1] Web Content Accessibility Guidelines 2.1, "contrast ratio".
    """
    light, dark = sorted((relative_luminance(first), relative_luminance(second)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def _ramp(codes: tuple[str, ...], count: int) -> FloatArray:
    anchors = np.array([_rgb(code) for code in codes], dtype=float)
    place = np.linspace(0, len(codes) - 1, count)
    return np.stack([np.interp(place, range(len(codes)), anchors[:, i]) for i in range(3)], axis=1)


def diverging_palette() -> NDArray[np.uint8]:
    """Return the scale's colours, (256, 3).

    Entry 0 is kept for "left out"; 1 is the deepest gain, 128 air temperature, 255 the deepest
    loss.
    """
    gain, loss = _ramp(_GAIN_RAMP, 128)[::-1], _ramp(_LOSS_RAMP, 128)
    colours = np.concatenate([np.zeros((1, 3)), gain, loss[1:]])
    return np.asarray(np.rint(colours), dtype=np.uint8)


def temperature_index(
    temperature: FloatArray, *, centre: float, limits: tuple[float, float]
) -> NDArray[np.uint8]:
    """Return the palette entry of each temperature.

    Parameters
    ----------
    temperature : array
        Any shape; NaN gives entry 0. [K]
    centre : float
        Air temperature. [K]
    limits : (float, float)
        Lowest and highest temperature shown; the one farther from `centre` gets the deepest
        colour, both sides share one step per kelvin. [K]

    Returns
    -------
    array of uint8
        Same shape, 0 to 255.
    """
    reach = max(abs(limits[0] - centre), abs(limits[1] - centre), 1e-6)
    scaled = np.clip((temperature - centre) / reach, -1.0, 1.0)
    index = np.where(np.isnan(scaled), 0.0, 128.0 + 127.0 * scaled)
    return np.asarray(np.rint(index), dtype=np.uint8)
