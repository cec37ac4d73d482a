"""Equal intensity in all directions."""

from math import pi

from lumentrace.jit import kernel
from lumentrace.kernels import sampling

name = "isotropic"


@kernel
def emit(values, u1, u2):
    """Unit direction in the source's local frame, +z along its normal."""
    return sampling.sphere(u1, u2)


@kernel
def pdf(values, direction):
    """Density of `emit` per steradian."""
    return 1.0 / (4.0 * pi)
