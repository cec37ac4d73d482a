"""Ideal diffuse transmission: equal radiance in all directions of the far side.

J. H. Lambert, Photometria (1760); as a BTDF, 1 / pi (Nicodemus et al., NBS Monograph 160 (1977)).
"""

from math import pi

from lumentrace.jit import kernel
from lumentrace.kernels import sampling
from lumentrace.models.events import SCATTER_THROUGH

name = "lambertian_through"


@kernel
def sample(incoming, n1, n2, u):
    """Direction that leaves (z < 0: on the far side), the factor on the weight, and the event."""
    x, y, z = sampling.cosine_hemisphere(u[0], u[1])
    return (x, y, -z), 1.0, SCATTER_THROUGH


@kernel
def value(incoming, out, n1, n2):
    """Scattering function per steradian: 1 / pi on the far side."""
    return 1.0 / pi if out[2] < 0.0 else 0.0


@kernel
def pdf(incoming, out, n1, n2):
    """Density of `sample` per steradian: cos / pi."""
    return max(0.0, -out[2]) / pi


@kernel
def albedo(incoming, n1, n2):
    """Share of the light that leaves again."""
    return 1.0
