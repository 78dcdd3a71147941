"""What a component loses: its surface for an estimate by image, and how two are weighed."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.seen import Seen
from cladwatt.types import BoolArray, FloatArray

__all__ = ["BodySize", "body_size", "covered_area", "weighed"]

AREA_U = 0.3
"""Relative standard uncertainty of a cover's surface, by what is seen of it or by the printed
length: neither knows how closely it follows the body, so both are off together; assumption."""
SMALLEST_SHARE = 0.05
"""Draws of less than this share of the median's size count as it: a logarithm is taken."""


@dataclass(frozen=True)
class BodySize:
    """What is seen of a component.

    Attributes
    ----------
    length : float
        Along the pipe, as drawn. [m]
    silhouette : float
        Area of what is seen of the body in the image plane. [m2]
    """

    length: float
    silhouette: float


def body_size(
    drawn: BoolArray, body: BoolArray, tag: str | None, pipes: Sequence[Seen]
) -> BodySize | None:
    """Measure a component by the scale of the pipe it sits on.

    Parameters
    ----------
    drawn, body : (rows, cols) array of bool
        Pixels of its outline, and those of them that are not background.
    tag : str or None
        Of its line.
    pipes : sequence of Seen
        Regions of the frame.

    Returns
    -------
    BodySize or None
        None where no region of its line lies under it, or none has a scale.
    """
    rows, columns = np.nonzero(drawn)
    if not rows.size or not body.any():
        return None
    best: tuple[float, Seen, int] | None = None
    for seen in pipes:
        if seen.line.tag != tag or not seen.diameter_known:
            continue
        away = np.hypot(seen.strip.x - columns.mean(), seen.strip.y - rows.mean())
        nearest = int(away.argmin())
        reach = float(seen.strip.width[nearest])
        if away[nearest] < reach and (best is None or away[nearest] < best[0]):
            best = (float(away[nearest]), seen, nearest)
    if best is None:
        return None
    _, seen, nearest = best
    strip = seen.strip
    along = float(strip.length[nearest])
    step = np.array([np.gradient(strip.x)[nearest], np.gradient(strip.y)[nearest]])
    pixels = float(np.hypot(*step))
    position = (columns * step[0] + rows * step[1]) / pixels
    across = float(np.median(seen.diameter)) / float(strip.width[nearest])
    if not (math.isfinite(along) and pixels > 0):
        return None
    along /= pixels
    length = (float(np.ptp(position)) + 1.0) * along
    return BodySize(length, float(np.count_nonzero(body)) * along * across)


def covered_area(
    size: BodySize | None,
    published_length: float | None,
    diameter: FloatArray,
    book: DrawBook,
    owner: str,
) -> FloatArray | None:
    """Return draws of the surface of a covered component, (count,). [m2]

    Parameters
    ----------
    size : BodySize or None
    published_length : float or None
        Of bare pipe that the body without a cover counts as. [m]
    diameter : (count,) array
        Over the lagging. [m]
    book, owner
        Of the draws.

    Returns
    -------
    array or None
        None where neither is known.

    Notes
    -----
    By the silhouette: a body of revolution about the pipe has pi times its silhouette for side
    and two ring-shaped ends. By print: a cover adds lagging all round the body as lagging does
    around the pipe, so that it has the surface of as much lagged pipe as the body has of bare.
    Where both are known their geometric mean counts, no better known than either.
    """
    found = []
    if size is not None:
        over = size.silhouette / size.length
        ends = 0.5 * math.pi * np.maximum(over**2 - diameter**2, 0.0)
        found.append(math.pi * size.silhouette + ends)
    if published_length is not None:
        found.append(math.pi * diameter * published_length)
    if not found:
        return None
    spread = np.exp(AREA_U * book.normal(owner, "cover_area"))
    return np.asarray(np.prod(found, axis=0) ** (1 / len(found)) * spread)


def weighed(printed: FloatArray | None, image: FloatArray | None) -> FloatArray | None:
    """Weigh two estimates of a loss.

    Parameters
    ----------
    printed, image : (count,) array or None
        Draws of one quantity. [W]

    Returns
    -------
    array or None
        The other where one is missing, or of the wrong sign: an image that shows a hot line's
        component colder than the air has read it wrong.

    Notes
    -----
    Logarithms, weighed by the inverse of their variances draw by draw. Where the two are
    further apart than these allow, the result is as much wider (Birge, Physical Review 40 (1932)
    207-227).
    """
    if printed is None or image is None:
        return image if printed is None else printed
    sign = math.copysign(1.0, float(np.median(printed)))
    if float(np.median(image)) * sign <= 0:
        return printed
    logs = [_logarithm(sign * one) for one in (printed, image)]
    middles = [float(np.median(one)) for one in logs]
    variances = [_variance(one) for one in logs]
    total = sum(variances)
    if not total > 0:
        return printed
    shares = (variances[1] / total, variances[0] / total)
    middle = shares[0] * middles[0] + shares[1] * middles[1]
    joined = shares[0] * logs[0] + shares[1] * logs[1]
    wider = max(1.0, abs(middles[0] - middles[1]) / math.sqrt(total))
    return np.asarray(sign * np.exp(middle + wider * (joined - middle)))


def _logarithm(size: FloatArray) -> FloatArray:
    return np.asarray(np.log(np.maximum(size, SMALLEST_SHARE * float(np.median(size)))))


def _variance(values: FloatArray) -> float:
    low, high = np.quantile(values, [0.1587, 0.8413])
    return float(0.5 * (high - low)) ** 2
