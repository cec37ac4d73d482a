"""Intensity cos^m about +z; m = 1 is Lambert's law, values[0] is m."""

from math import pi

from lumentrace.jit import kernel
from lumentrace.kernels import sampling

name = "cosine_power"


@kernel
def emit(values, u1, u2):
    """Unit direction in the source's local frame, +z along its normal."""
    return sampling.cosine_power(values[0], u1, u2)


@kernel
def pdf(values, direction):
    """Density of `emit` per steradian: (m + 1) / (2 pi) cos^m."""
    if direction[2] <= 0.0:
        return 0.0
    return (values[0] + 1.0) / (2.0 * pi) * direction[2] ** values[0]
