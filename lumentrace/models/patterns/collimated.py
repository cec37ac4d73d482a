"""A beam of uniform radiance within a half-angle of +z; values[0] is that angle's cosine.

A half-angle of zero (cosine one) is a parallel beam.
"""

from math import inf, pi

from lumentrace.jit import kernel
from lumentrace.kernels import sampling

name = "collimated"


@kernel
def emit(values, u1, u2):
    """Unit direction in the source's local frame, +z along its normal."""
    return sampling.cone(values[0], u1, u2)


@kernel
def pdf(values, direction):
    """Density of `emit` per steradian: cos / (pi sin^2 of the half-angle) within the cone."""
    if direction[2] < values[0]:
        return 0.0
    if values[0] == 1.0:
        return inf
    return direction[2] / (pi * (1.0 - values[0] * values[0]))
