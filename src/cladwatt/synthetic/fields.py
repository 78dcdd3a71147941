"""Smooth random fields: patchy emissivity, uneven conductivity, texture, slow non-uniformity."""

import numpy as np

from cladwatt.types import FloatArray

__all__ = ["smooth_field"]


def smooth_field(
    shape: tuple[int, ...],
    lengths: tuple[float, ...],
    random: np.random.Generator,
    *,
    periodic: tuple[bool, ...] | None = None,
) -> FloatArray:
    """Return a Gaussian field of mean 0 and variance 1 with a Gaussian correlation.

    Parameters
    ----------
    shape : tuple of int
        Shape of the field.
    lengths : tuple of float
        Standard deviation of the smoothing kernel along each axis, in cells; 0 leaves the axis
        white.
    random : numpy.random.Generator
        Source of randomness.
    periodic : tuple of bool, optional
        Whether an axis closes on itself; none does by default.

    Returns
    -------
    array of `shape`
        The field; its variance is 1 over the ensemble, not over one draw.
    """
    closed = periodic or (False,) * len(shape)
    pads = [0 if close else int(np.ceil(4 * length))
            for close, length in zip(closed, lengths, strict=True)]  # fmt: skip
    sizes = tuple(size + pad for size, pad in zip(shape, pads, strict=True))
    spectrum = np.fft.rfftn(random.standard_normal(sizes))
    gain = np.ones(())
    for axis, (size, length) in enumerate(zip(sizes, lengths, strict=True)):
        last = axis == len(sizes) - 1
        frequency = np.fft.rfftfreq(size) if last else np.fft.fftfreq(size)
        kernel = np.exp(-2 * (np.pi * frequency * length) ** 2)
        power = kernel**2
        # rfft keeps half of the frequencies: count the others twice
        weight = np.full(kernel.size, 2.0 if last else 1.0)
        if last:
            weight[0] = 1.0
            if size % 2 == 0:
                weight[-1] = 1.0
        kernel = kernel / np.sqrt(np.sum(weight * power) / size)
        gain = np.multiply.outer(gain, kernel)
    field = np.fft.irfftn(spectrum * gain, s=sizes, axes=tuple(range(len(sizes))))
    return np.ascontiguousarray(field[tuple(slice(0, size) for size in shape)])
