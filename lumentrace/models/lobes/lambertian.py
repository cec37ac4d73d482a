"""Ideal diffuse reflection: equal radiance in all directions of the side that the light came from.

J. H. Lambert, Photometria (1760); as a BRDF, 1 / pi (Nicodemus et al., NBS Monograph 160 (1977)).
"""

from math import pi

from lumentrace.jit import kernel
from lumentrace.kernels import sampling
from lumentrace.models.events import SCATTER

name = "lambertian"


@kernel
def sample(incoming, n1, n2, u):
    """Direction that leaves, the factor on the weight, and the event.

    incoming: local direction of travel, z < 0. n1, n2: indices before and behind the surface.
    u: four uniforms. A direction with z > 0 stays on the side of the incoming light.
    """
    return sampling.cosine_hemisphere(u[0], u[1]), 1.0, SCATTER


@kernel
def value(incoming, out, n1, n2):
    """Scattering function per steradian: 1 / pi on the side of the incoming light."""
    return 1.0 / pi if out[2] > 0.0 else 0.0


@kernel
def pdf(incoming, out, n1, n2):
    """Density of `sample` per steradian: cos / pi."""
    return max(0.0, out[2]) / pi


@kernel
def albedo(incoming, n1, n2):
    """Share of the light that leaves again."""
    return 1.0
