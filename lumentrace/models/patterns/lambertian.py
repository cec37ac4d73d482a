"""Lambert's cosine law about +z: equal radiance in all directions of a half space."""

from math import pi

from lumentrace.jit import kernel
from lumentrace.kernels import sampling

name = "lambertian"


@kernel
def emit(values, u1, u2):
    """Unit direction in the source's local frame, +z along its normal."""
    return sampling.cosine_hemisphere(u1, u2)


@kernel
def pdf(values, direction):
    """Density of `emit` per steradian."""
    return max(0.0, direction[2]) / pi
