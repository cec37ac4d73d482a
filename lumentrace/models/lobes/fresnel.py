"""A smooth uncoated boundary of two media: Fresnel reflection, refraction, total reflection.

For unpolarised light, each event on its own: the mean of the reflectances for s and p decides.
Born and Wolf, Principles of Optics, section 1.5.
"""

from lumentrace.jit import kernel
from lumentrace.kernels.fresnel import is_total, unpolarised_reflectance
from lumentrace.kernels.vectors import refract
from lumentrace.models.events import REFLECT, THROUGH, TOTAL

name = "fresnel"


@kernel
def sample(incoming, n1, n2, u):
    """One of the two branches, chosen in proportion to its share: the weight stays.

    incoming: local direction of travel, z < 0. n1, n2: indices before and behind the surface.
    """
    mirrored = (incoming[0], incoming[1], -incoming[2])
    cosine = -incoming[2]
    if is_total(n1, n2, cosine):
        return mirrored, 1.0, TOTAL
    if u[0] < unpolarised_reflectance(n1, n2, cosine):
        return mirrored, 1.0, REFLECT
    return (
        refract(incoming[0], incoming[1], incoming[2], 0.0, 0.0, 1.0, n1, n2),
        1.0,
        THROUGH,
    )


@kernel
def value(incoming, out, n1, n2):
    """Scattering function per steradian away from the two directions."""
    return 0.0


@kernel
def pdf(incoming, out, n1, n2):
    """Density of `sample` per steradian away from the two directions."""
    return 0.0


@kernel
def albedo(incoming, n1, n2):
    """Share of the light that leaves again, reflected or refracted."""
    return 1.0
